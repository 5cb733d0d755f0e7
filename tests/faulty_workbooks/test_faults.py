"""One fault at a time: what is spoilt, and the code and cell that must be found."""

from __future__ import annotations

import pytest

from study.workbook.faults import FAULTS
from tests.faulty_workbooks import cases_plant, cases_reading
from tests.faulty_workbooks.grids import check, good_grids, has, listing
from tests.faulty_workbooks.spoil import Fault

CASES = [
    *cases_reading.SHEETS, *cases_reading.HEADINGS, *cases_reading.ITEMS, *cases_reading.CELLS,
    *cases_plant.NAMES, *cases_plant.TOPOLOGY, *cases_plant.OPERATION, *cases_plant.PLAUSIBILITY,
]  # fmt: skip


@pytest.mark.parametrize("case", CASES, ids=lambda case: f"{case.code}: {case.name}")
def test_fault_is_found_at_its_cell(case: Fault) -> None:
    grids = good_grids()
    for spoil in case.spoil:
        spoil(grids)
    plant, issues = check(grids)
    cell = "" if case.row is None else grids[case.sheet].cell(case.row, case.heading)
    assert has(issues, case.code, case.sheet, cell), listing(issues)
    found = next(i for i in issues if i.code == case.code and i.cell == cell)
    assert found.severity == case.severity
    assert (plant is None) == any(issue.severity == "fault" for issue in issues)
    if case.severity != "fault":
        assert plant is not None, listing(issues)
        assert found in plant.findings


def test_the_good_workbook_has_nothing_wrong() -> None:
    plant, issues = check(good_grids())
    assert plant is not None
    assert issues == ()


def test_every_kind_of_fault_is_tested() -> None:
    elsewhere = {
        # tests/faulty_workbooks/test_every_column.py
        "truth-for-number", "decimal-comma", "date-for-number", "not-finite", "not-whole", "no-stored-value",
        "result-formula", "missing-unit",
    }  # fmt: skip
    assert {case.code for case in CASES} | elsewhere == set(FAULTS)
