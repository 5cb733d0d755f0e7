"""Tables of grading, from a small plant that has something of everything."""

from __future__ import annotations

import json
from dataclasses import replace

import pytest

from study.report.catalogue import all_tables
from study.report.content import StudyOutcome
from study.report.html import report_page
from study.report.json_out import json_text
from study.report.tables import Table
from tests import plants
from tests.analyses.grading_plants import breaker, feeder_plant, graded, setting_range
from tests.report import made_up

SLOW = {"instantaneous_a": None, "instantaneous_off": True, "short_time_a": 300.0, "short_time_delay_s": 0.2}


@pytest.fixture(scope="module")
def outcome() -> StudyOutcome:
    plant = feeder_plant(
        near=SLOW,
        above={"instantaneous_a": 5000.0},
        loads=[plants.load("M", "DB", restart_delay_s=5.0)],
        cables=[
            plants.cable("CM", "DB", "M", length_m=20.0),
            plants.cable("CS", "Shore", "MSB", length_m=5.0, section_mm2=300.0, runs=3),
        ],
        devices=[
            breaker("QM", "CM", "DB", instantaneous_a=2200.0),
            breaker("QS", "CS", "MSB", short_time_a=3000.0, short_time_delay_s=0.4, direction="reverse"),
            plants.device("FM", "M", kind="thermal overload", long_time_a=164.0, trip_class="10"),
        ],
        setting_ranges=[setting_range("QF", "Instantaneous current", 1000.0, 40_000.0, 500.0)],
    )
    start = made_up.outcome()
    graded_result = graded(plant)
    return replace(start, plant=replace(start.plant, devices=plant.devices), grading=graded_result)


@pytest.fixture(scope="module")
def tables(outcome: StudyOutcome) -> dict[str, Table]:
    return {key: t for key, t in all_tables(outcome).items() if t.sheet == "R Grading"}


def test_every_table_is_there(tables: dict[str, Table]) -> None:
    assert list(tables) == [
        "grading_pairs",
        "grading_lost",
        "grading_changes",
        "grading_reach",
        "grading_held",
        "grading_remarks",
        "setting_list",
    ]


def test_failing_pairs_stand_first_with_their_range(tables: dict[str, Table]) -> None:
    pairs = tables["grading_pairs"]
    rows = list(
        zip(pairs.column("downstream"), pairs.column("upstream"), pairs.column("extent"), strict=True)
    )
    assert ("QH", "QF", "none") in rows or ("QH", "QF", "partial") in rows
    order = [("none", "partial", "not assessed", "full", "not needed").index(str(r[2])) for r in rows]
    assert order == sorted(order)
    assert pairs.worked is not None


def test_each_device_shows_its_least_margin(tables: dict[str, Table]) -> None:
    pairs = tables["grading_pairs"]
    full = [d for d, e in zip(pairs.column("downstream"), pairs.column("extent"), strict=True) if e == "full"]
    assert len(full) == len(set(full))


def test_a_proposal_shows_before_and_after(tables: dict[str, Table]) -> None:
    changes = tables["grading_changes"]
    row = dict(zip([c.key for c in changes.columns], next(iter(changes.rows())), strict=True))
    assert row["device"] == "QF"
    assert row["setting"] == "Instantaneous current"
    assert "then" in str(row["before_after"])


def test_the_reach_is_listed_with_what_is_allowed(tables: dict[str, Table]) -> None:
    reach = tables["grading_reach"]
    assert {"QH", "QF", "QM + FM"} <= set(reach.column("device"))
    cleared = [c for c in reach.column("clears_s") if c is not None]
    assert cleared == sorted(cleared, reverse=True)


def test_starts_are_listed_hardest_first(tables: dict[str, Table]) -> None:
    held = tables["grading_held"]
    assert any(str(e).startswith("direct start") for e in held.column("event"))
    assert "3 s taken" in " ".join(str(x) for x in held.column("assumed"))


def test_the_setting_list_has_a_row_for_every_device_and_a_place_to_sign(
    outcome: StudyOutcome, tables: dict[str, Table]
) -> None:
    listed = tables["setting_list"]
    assert listed.column("device") == tuple(d.name for d in outcome.plant.devices)
    assert listed.column("short_time_a")[0] == 300.0
    assert listed.column("law")[-1] == "class 10"
    assert listed.column("remarks")[3] == "reverse"
    assert set(listed.column("signed")) == {""}


def test_every_table_is_in_the_json_file_and_on_the_page(
    outcome: StudyOutcome, tables: dict[str, Table]
) -> None:
    document = json.loads(json_text(outcome, all_tables(outcome)))
    page = report_page(outcome)
    for key, table in tables.items():
        assert key in document["tables"]
        shown = f'id="table-{key.replace("_", "-")}"' in page
        assert shown is (table.n_rows > 0 and key != "setting_list")
    assert '<h2 id="grading">' in page


def test_without_a_grading_there_is_no_section() -> None:
    plain = made_up.outcome()
    assert not [t for t in all_tables(plain).values() if t.sheet == "R Grading"]
    assert "table-grading-pairs" not in report_page(plain)
