"""Whatever is typed into a workbook: a plant or a list of faults comes out, never an error of the program."""

from __future__ import annotations

from datetime import datetime
from typing import Any

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from study.workbook.faults import FAULTS
from study.workbook.sheet_xml import ErrorValue, NoStoredValue, Percent, ResultFormula
from study.workbook.sheets import BY_NAME
from tests.faulty_workbooks.grids import GOOD, Grids, check, good_grids

NAMES = [
    str(row[0]) for sheet in ("Boards", "Gensets", "Cables", "Loads", "Ties") for row in GOOD[sheet].rows
]

VALUES: st.SearchStrategy[Any] = st.one_of(
    st.none(),
    st.floats(),
    st.sampled_from([0.0, 1.0, -1.0, 1e-9, 1e9, 50.0, 100.0]),
    st.integers(-3, 3).map(float),
    st.text(max_size=12),
    st.sampled_from(["1,5", "off", "yes", "-", " ", "#x", "on", "DG1, DG2", *NAMES]),
    st.booleans(),
    st.datetimes(datetime(1900, 3, 1), datetime(2100, 1, 1)),
    st.sampled_from([ErrorValue("#N/A"), NoStoredValue("A1"), ResultFormula("'R Cables'!A1"), Percent(0.04)]),
)
HEADINGS = st.one_of(
    st.text(max_size=20),
    st.sampled_from([c.heading for spec in BY_NAME.values() for c in spec.columns]),
    st.sampled_from(["At sea: in use", "Pier: duty", "Xd [MW]", "Voltage droop", "# own"]),
)


@st.composite
def spoilt_books(draw: st.DrawFn) -> Grids:
    """Return the good workbook with some cells, headings, rows, columns or sheets changed."""
    grids = good_grids()
    for _ in range(draw(st.integers(1, 8))):
        sheet = draw(st.sampled_from(sorted(grids)))
        grid = grids[sheet]
        what = draw(st.sampled_from(["cell", "cell", "cell", "heading", "row", "column", "sheet"]))
        if what == "sheet" and len(grids) > 1:
            del grids[sheet]
        elif what == "heading":
            grid.headings[draw(st.integers(0, len(grid.headings) - 1))] = draw(HEADINGS)
        elif what == "row" and grid.rows:
            grid.rows.append(list(grid.rows[draw(st.integers(0, len(grid.rows) - 1))]))
        elif what == "column" and len(grid.headings) > 1:
            grid.drop(grid.headings[draw(st.integers(0, len(grid.headings) - 1))])
        elif grid.rows:
            row = draw(st.integers(0, len(grid.rows) - 1))
            grid.rows[row][draw(st.integers(0, len(grid.headings) - 1))] = draw(VALUES)
    return grids


@settings(max_examples=80, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(spoilt_books())
def test_a_plant_or_a_list_of_faults(grids: Grids) -> None:
    plant, issues = check(grids)
    faults = [issue for issue in issues if issue.severity == "fault"]
    assert (plant is None) == bool(faults)
    for issue in issues:
        assert issue.code in FAULTS
        assert issue.found
        assert issue.wanted
        assert str(issue)
    if plant is not None:
        assert plant.findings == issues
        assert all(cell for cell in plant.cells.values())
