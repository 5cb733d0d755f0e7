"""The JSON file, from made-up results."""

from __future__ import annotations

import json
import math
import re

from study.report.json_out import json_document, json_text
from study.report.tables import Column, make_table
from tests.report import made_up

OUTCOME = made_up.outcome()
DOCUMENT = json.loads(json_text(OUTCOME))


def test_keys_are_snake_case_all_the_way_down() -> None:
    modes = set(OUTCOME.modes)

    def walk(node: object) -> None:
        if isinstance(node, dict):
            for key, value in node.items():
                assert key in modes or re.fullmatch(r"[a-z][a-z0-9]*(_[a-z0-9]+)*", key), key
                walk(value)
        elif isinstance(node, list):
            for item in node:
                walk(item)

    walk(DOCUMENT)


def test_it_is_plain_json_without_nan_and_the_same_every_time() -> None:
    def refuse(text: str) -> None:
        raise AssertionError(text)

    json.loads(json_text(OUTCOME), parse_constant=refuse)
    assert json_text(OUTCOME) == json_text(made_up.outcome())


def test_the_text_written_column_by_column_is_that_of_the_document() -> None:
    whole = json.dumps(json_document(OUTCOME), ensure_ascii=False, allow_nan=False)
    assert json_text(OUTCOME) == whole + "\n"


def test_numbers_words_and_blanks_of_every_kind_are_written_as_json_writes_them() -> None:
    column = Column(key="value", heading="Value", kind="free")
    values = (1.0, 1, True, -0.0, 1e300, math.nan, -math.inf, None, "", 'a "b" \\ Ω\n', 0.1)
    table = make_table(key="t", title="T", sheet="R Summary", columns=[column], rows=[[v] for v in values])
    written = json.loads(json_text(OUTCOME, {"t": table}))["tables"]["t"]["rows"]
    wanted = [None if isinstance(v, float) and not math.isfinite(v) else v for v in values]
    assert [repr(row["value"]) for row in written] == [repr(v) for v in wanted]


def test_values_are_unrounded_and_what_is_missing_is_null() -> None:
    cables = DOCUMENT["tables"]["cables"]["rows"]
    assert cables[0]["current_a"] == float(OUTCOME.load_flow.modes[0].branches.current_a[0])
    assert next(row for row in cables if row["name"] == "C-002")["rating_a"] is None


def test_load_balance_has_one_record_for_each_consumer_with_its_modes() -> None:
    rows = DOCUMENT["tables"]["load_balance"]["rows"]
    items = [row for row in rows if row["row"] == "item"]
    assert len(items) == len(OUTCOME.plant.loads)
    assert set(items[0]["modes"]) == set(OUTCOME.modes)
    total = next(row for row in rows if row["row"] == "total")
    assert total["modes"]["At sea"]["p_counted_kw"] == OUTCOME.balance.modes[0].p_total_kw


def test_it_names_input_digest_and_version() -> None:
    document = json_document(OUTCOME)
    assert document["input"]["sha256_of_input_cells"] == OUTCOME.plant.input_digest
    assert document["tool_version"] == "0.0.test"
