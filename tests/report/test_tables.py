"""The tables, from made-up results."""

from __future__ import annotations

import math
import re
from collections import Counter

import numpy as np
import pytest

from study.report.catalogue import all_tables
from study.report.findings import findings
from study.report.tables import Column, Table, make_table, text_column
from study.report.tables_verdicts import subjects_of, verdict_grid
from tests.report import made_up

OUTCOME = made_up.outcome()
TABLES = all_tables(OUTCOME)
_LONG_NUMBER = re.compile(r"\d{7,}|\d\.\d{7,}")


@pytest.mark.parametrize("table", TABLES.values(), ids=TABLES.keys())
def test_no_cell_prints_a_number_of_many_digits(table: Table) -> None:
    for i, column in enumerate(table.columns):
        if not column.is_text:
            for text in table.texts(i):
                assert not _LONG_NUMBER.search(text), (table.key, column.key, text)


@pytest.mark.parametrize("table", TABLES.values(), ids=TABLES.keys())
def test_every_number_has_a_unit_suffix_or_none_to_have(table: Table) -> None:
    plain = {"cos_phi", "value", "limit", "installed", "in_use", "step", "iterations"}
    suffixes = ["kw", "kvar", "kva", "v", "a", "hz", "pu", "percent", "s", "h", "deg", "count"]
    for column in table.columns:
        if not column.is_text and column.key not in plain and column.kind != "text":
            assert column.key.split("_")[-1] in suffixes, (table.key, column.key)


def test_load_balance_adds_up_to_the_total() -> None:
    table = TABLES["load_balance"]
    for mode in OUTCOME.balance.modes:
        counted = table.column("p_counted_kw", mode.mode)
        by_style = {
            style: [v for r, v in enumerate(counted) if table.style(r) == style and isinstance(v, float)]
            for style in ("", "subtotal", "total")
        }
        assert math.fsum(by_style[""]) == pytest.approx(mode.p_total_kw, rel=1e-12)
        assert math.fsum(by_style["subtotal"]) == pytest.approx(mode.p_total_kw, rel=1e-12)
        assert by_style["total"] == [mode.p_total_kw]


def test_load_balance_leaves_blank_what_is_not_in_use() -> None:
    table = TABLES["load_balance"]
    row = table.column("consumer").index("Consumer 4 with a name of usual length")
    assert table.column("in_use", "At sea")[row] == 0
    assert table.column("p_kw", "At sea")[row] is None


_WORKED = [table for table in TABLES.values() if table.worked is not None]
_UNITS = re.compile(r" (?:kW|kvar|kVA|A|V|%)(?![A-Za-z])")


@pytest.mark.parametrize("table", _WORKED, ids=[table.key for table in _WORKED])
def test_worked_row_holds_by_hand(table: Table) -> None:
    assert table.worked is not None
    for line in table.worked.lines:
        figures = _UNITS.sub("", line.figures).replace("√3", "np.sqrt(3)").replace("√", "np.sqrt")
        figures = figures.replace("×", "*").replace("²", "**2").replace("−", "-")
        result, _, unit = line.result.replace("−", "-").partition(" ")
        by_hand = eval(figures, {"np": np})
        if unit == "%" and "%" not in line.figures:
            by_hand *= 100.0
        # Half of the fourth significant digit of the result is 5e-4 of it at most.
        assert by_hand == pytest.approx(float(result), rel=5.1e-4), line.label


def test_current_just_above_its_rating_prints_above_it() -> None:
    table = TABLES["cables"]
    row = table.column("name").index("C-001")
    current, rating = table.texts(table.index("current_a"))[row], table.texts(table.index("rating_a"))[row]
    assert (current, rating) == ("230.0004", "230.0000")
    assert table.texts(table.index("loading_percent"))[row] != "100.0"


def test_undetermined_current_is_said_in_words_and_stays_nan() -> None:
    table = TABLES["ties_and_reactors"]
    at = table.index("current_a")
    assert table.texts(at) == ("undetermined",)
    assert math.isnan(table.values[at][0])  # type: ignore[arg-type]


def test_findings_stand_worst_first_and_name_everything_needed() -> None:
    found = findings(OUTCOME)
    order = ["exceeds", "not assessed", "close"]
    assert [f.status for f in found] == sorted((f.status for f in found), key=order.index)
    cable = next(f for f in found if f.subject == "cables" and f.status == "exceeds")
    assert cable.sentence.startswith("C-001: current is 230.0004 A, at most 230.0000 A is allowed")
    assert "beyond the limit" in cable.sentence
    assert (cable.cell, cable.remedy) == ("Cables!F4", "Take a larger section or more runs.")
    assert cable.basis == "IEC 60092-352 rating with its corrections"


def test_one_fault_in_several_modes_is_one_finding() -> None:
    found = [f for f in findings(OUTCOME) if f.subject == "kW sharing" and f.equipment == "DG1"]
    assert len(found) == 1
    assert found[0].modes == OUTCOME.modes
    assert found[0].where == "Every mode"


def test_what_is_not_assessed_says_why() -> None:
    found = next(f for f in findings(OUTCOME) if f.status == "not assessed")
    assert found.sentence == "C-002: current is not assessed: no section given."


def test_mode_without_a_solution_is_a_plain_sentence() -> None:
    found = findings(OUTCOME)[0]
    assert found.sentence == "whole plant: load flow without a solution."


def test_grid_has_the_subjects_with_a_verdict_and_the_vessel_in_its_own_column() -> None:
    grid = verdict_grid(OUTCOME)
    assert grid.subjects == (
        "capacity", "loading", "voltage", "kW sharing", "kvar sharing", "cables", "regulation",
    )  # fmt: skip
    assert grid.columns == (*OUTCOME.modes, "vessel")
    regulation = grid.cells[grid.subjects.index("regulation")]
    assert [cell is None for cell in regulation] == [True, True, False]
    cables = grid.cells[grid.subjects.index("cables")][0]
    assert cables is not None
    assert (cables.status, cables.figure) == ("exceeds", "230.0004 A (max 230.0000 A)")


def test_no_verdict_is_dropped_that_is_not_within_its_limit() -> None:
    listed = Counter(TABLES["verdicts"].column("verdict"))
    found = Counter(v.status for v in OUTCOME.verdicts)
    assert {k: n for k, n in listed.items() if k != "within"} == {
        k: n for k, n in found.items() if k != "within"
    }
    assert 0 < listed["within"] <= found["within"]
    assert set(subjects_of(OUTCOME)) == {v.subject for v in OUTCOME.verdicts}


def test_unknown_subject_still_has_a_row() -> None:
    from dataclasses import replace

    odd = replace(OUTCOME.verdicts[0], subject="a new subject")
    assert "a new subject" in verdict_grid(replace(OUTCOME, verdicts=(*OUTCOME.verdicts, odd))).subjects


def test_table_refuses_what_does_not_fit() -> None:
    column = Column(key="p_kw", heading="Power")
    with pytest.raises(ValueError, match="2 values for 1 columns"):
        make_table(key="t", title="", sheet="", columns=[column], rows=[[1.0, 2.0]])
    with pytest.raises(ValueError, match="not snake_case"):
        make_table(key="t", title="", sheet="", columns=[text_column("P [kW]", "P")], rows=[])
    with pytest.raises(ValueError, match="stands twice"):
        make_table(key="t", title="", sheet="", columns=[column, column], rows=[])


def test_large_study_has_every_row() -> None:
    outcome = made_up.large_outcome()
    tables = all_tables(outcome)
    assert tables["terminals"].n_rows == 5000
    assert tables["load_balance"].groups == outcome.modes
