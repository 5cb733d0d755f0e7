"""Every column of every sheet spoilt in every way that its kind allows; the fault must name the cell.

Every column that a way of spoiling fits is spoilt in the same workbook, which also holds the promise that all
faults are reported together.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from datetime import datetime
from functools import cache
from math import inf, nan
from typing import Any

import pytest

from study.issues import Issue
from study.model.plant import Plant
from study.workbook.columns import Column, SheetSpec
from study.workbook.sheet_xml import ErrorValue, NoStoredValue, Percent, ResultFormula
from study.workbook.sheets import BY_NAME, SHEETS
from tests.faulty_workbooks.grids import GOOD, Grid, check, good_grids, has, listing

# Project and Acceptance hold items; what is wrong with Modes changes the headings of other sheets.
APART = {"Project", "Acceptance", "Modes"}


@dataclass(frozen=True)
class Way:
    """A way to spoil a column: for which it applies, what is put in, what must be found."""

    code: str
    applies: Callable[[Column], bool]
    spoil: Callable[[Grid, int, str, Column], None]
    in_heading: bool = False
    severity: str = "fault"


def _is_number(column: Column) -> bool:
    return column.kind in {"number", "integer"}


def _put(value: Any) -> Callable[[Grid, int, str, Column], None]:
    def spoil(grid: Grid, row: int, heading: str, column: Column) -> None:
        grid.put(row, heading, value)

    return spoil


def _below(grid: Grid, row: int, heading: str, column: Column) -> None:
    low = column.bounds.low
    assert low is not None
    step = max(abs(low) * 1e-9, 1e-9)
    grid.put(
        row, heading, low if column.bounds.low_open else low - (1.0 if column.kind == "integer" else step)
    )


def _above(grid: Grid, row: int, heading: str, column: Column) -> None:
    high = column.bounds.high
    assert high is not None
    grid.put(row, heading, high + (1.0 if column.kind == "integer" else high * 1e-9))


def _misspell(grid: Grid, row: int, heading: str, column: Column) -> None:
    place = grid.column(heading)
    name, bracket, unit = heading.partition(" [")
    # The first letter doubled; digits and primes that tell columns apart stay as they are.
    grid.headings[place] = name[0] + name + bracket + unit


def _unit(text: str | None) -> Callable[[Grid, int, str, Column], None]:
    def spoil(grid: Grid, row: int, heading: str, column: Column) -> None:
        name = heading.partition(" [")[0]
        grid.headings[grid.column(heading)] = name if text is None else f"{name} [{text}]"

    return spoil


def _double(grid: Grid, row: int, heading: str, column: Column) -> None:
    grid.add(heading.upper() if heading == heading.partition(" [")[0] else heading)


def _no_brackets(grid: Grid, row: int, heading: str, column: Column) -> None:
    grid.headings[grid.column(heading)] = heading.replace("[", "(").replace("]", ")")


def _is_named(column: Column) -> bool:
    return column.kind in {"reference"}


def _is_text(column: Column) -> bool:
    return column.kind in {"text", "reference"}


def _is_plain(column: Column) -> bool:
    return not column.unit and not column.ratio


def _has_known_unit(column: Column) -> bool:
    return bool(column.unit) and column.unit != "% U" and not column.unit.startswith("x ")


WAYS = {
    "text": Way("text-number", _is_number, _put("about 5")),
    "number kept as text": Way("text-number", lambda c: _is_number(c) and c.kind != "integer", _put("12.5")),
    "decimal comma": Way("decimal-comma", _is_number, _put("1,5")),
    "thousands": Way("decimal-comma", _is_number, _put("1 234,5")),
    "truth": Way("truth-for-number", _is_number, _put(True)),
    "date": Way("date-for-number", _is_number, _put(datetime(2025, 3, 4))),
    "infinite": Way("not-finite", _is_number, _put(inf)),
    "not a number": Way("not-finite", _is_number, _put(nan)),
    "half a unit": Way("not-whole", lambda c: c.kind == "integer", _put(2.5)),
    "error": Way("error-value", lambda c: True, _put(ErrorValue("#DIV/0!"))),
    "formula without value": Way("no-stored-value", lambda c: True, _put(NoStoredValue("A1*2"))),
    "formula of a result": Way("result-formula", lambda c: True, _put(ResultFormula("'R Load flow'!B2"))),
    "huge": Way("out-of-range", _is_number, _put(1e12)),
    "hugely negative": Way("out-of-range", _is_number, _put(-1e12)),
    "below": Way("out-of-range", lambda c: _is_number(c) and c.bounds.low is not None, _below),
    "above": Way("out-of-range", lambda c: _is_number(c) and c.bounds.high is not None, _above),
    "percent format": Way(
        "percent-format",
        lambda c: _is_number(c) and bool(c.unit) and not c.is_percent and c.unit != "pu",
        _put(Percent(0.5)),
    ),
    "not in the list": Way("unknown-choice", lambda c: c.kind in {"choice", "yes-no"}, _put("nonsense")),
    "a date for a choice": Way("unknown-choice", lambda c: c.kind == "choice", _put(datetime(2025, 1, 1))),
    "unknown name": Way("unknown-name", _is_named, _put("No such thing")),
    "truth for a name": Way("not-a-name", _is_text, _put(True)),
    "date for a name": Way("not-a-name", _is_text, _put(datetime(2025, 1, 2))),
    "misspelt heading": Way("near-miss-heading", lambda c: True, _misspell, in_heading=True),
    "no unit": Way("missing-unit", lambda c: bool(c.unit), _unit(None), in_heading=True),
    "another unit": Way("wrong-unit", _has_known_unit, _unit("kgm2"), in_heading=True),
    "an unknown unit": Way("unknown-unit", lambda c: bool(c.unit), _unit("furlong"), in_heading=True),
    "unit in round brackets": Way("unit-without-brackets", _has_known_unit, _no_brackets, in_heading=True),
    "a unit too many": Way("wrong-unit", _is_plain, _unit("kW"), in_heading=True),
}  # fmt: skip

# Columns of one name and two units: each unit names another column, and none alone is missing.
TWO_UNITS = {("Curves", "Current")}
# A moment of inertia in kgm2 is in its own unit.
OWN_UNIT = {("Loads", "Moment of inertia")}


def _headings(spec: SheetSpec) -> Iterator[tuple[str, Column]]:
    for column in spec.columns:
        yield column.heading, column
    for repeated in spec.mode_columns:
        yield repeated.heading("Harbour"), repeated.column


def _cases() -> Iterator[tuple[str, str, str]]:
    for name, way in WAYS.items():
        for spec in SHEETS:
            if spec.name in APART:
                continue
            for heading, column in _headings(spec):
                skip = way.in_heading and (
                    (spec.name, column.name) in TWO_UNITS
                    or (column is spec.key)
                    or (name == "another unit" and (spec.name, column.name) in OWN_UNIT)
                )
                if way.applies(column) and not skip:
                    yield name, spec.name, heading


CASES = list(_cases())


def _first_filled(grid: Grid, heading: str) -> int:
    place = grid.column(heading)
    return next((number for number, row in enumerate(grid.rows) if row[place] is not None), 0)


@cache
def _spoilt(name: str) -> tuple[Plant | None, tuple[Issue, ...], dict[tuple[str, str], str]]:
    """Spoil every column that a way fits; return what is found and the cells spoilt."""
    way, grids, cells = WAYS[name], good_grids(), {}
    for a_name, sheet, heading in CASES:
        if a_name != name:
            continue
        row = _first_filled(GOOD[sheet], heading)
        cells[sheet, heading] = grids[sheet].cell(-1 if way.in_heading else row, heading)
        way.spoil(grids[sheet], row, heading, dict(_headings(BY_NAME[sheet]))[heading])
    return *check(grids), cells


@pytest.mark.parametrize(("name", "sheet"), list(dict.fromkeys(case[:2] for case in CASES)))
def test_every_spoilt_cell_is_named(name: str, sheet: str) -> None:
    plant, issues, cells = _spoilt(name)
    wanted = {heading: cell for (a_sheet, heading), cell in cells.items() if a_sheet == sheet}
    missed = [heading for heading, cell in wanted.items() if not has(issues, WAYS[name].code, sheet, cell)]
    assert wanted
    assert plant is None
    assert not missed, listing(issues)


# Sheets on which one of two columns is wanted, or a size with its unit: tested one by one elsewhere.
WANTED_TOGETHER = {"Curves", "Let-through", "Events"}
BLANK_CASES = [
    (column.blank, spec.name, column.heading)
    for spec in SHEETS
    if spec.name not in APART
    for column in spec.columns
    if column is not spec.key
    and not (spec.name in WANTED_TOGETHER and column.blank == "none")
    and not (column.blank == "required" and column.when)
]


@cache
def _blanked(blank: str) -> tuple[Plant | None, tuple[Issue, ...], dict[tuple[str, str], str]]:
    """Blank every column of one class; conditions of other columns need their kinds, which are required."""
    grids, cells = good_grids(), {}
    for a_blank, sheet, heading in BLANK_CASES:
        if a_blank == blank:
            row = _first_filled(GOOD[sheet], heading)
            cells[sheet, heading] = grids[sheet].cell(row, heading)
            grids[sheet].put(row, heading, None)
    return *check(grids), cells


@pytest.mark.parametrize(("blank", "sheet"), list(dict.fromkeys(case[:2] for case in BLANK_CASES)))
def test_blank_cells_by_their_class(blank: str, sheet: str) -> None:
    plant, issues, cells = _blanked(blank)
    wanted = {heading: cell for (a_sheet, heading), cell in cells.items() if a_sheet == sheet}
    assert wanted
    if blank == "required":
        assert plant is None
        missed = [
            heading for heading, cell in wanted.items() if not has(issues, "missing-value", sheet, cell)
        ]
        assert not missed, listing(issues)
        return
    assert plant is not None, listing(issues)
    assumed = {assumption.cell.replace("'", "") for assumption in plant.assumptions}
    listed = {heading: f"{sheet}!{cell}" in assumed for heading, cell in wanted.items()}
    assert listed == dict.fromkeys(wanted, blank == "typical")


REQUIRED = [
    (spec.name, column.heading)
    for spec in SHEETS
    for column in spec.columns
    if column.blank == "required" and not column.when and column is not spec.key and spec.name != "Modes"
]


@pytest.mark.parametrize(("sheet", "heading"), REQUIRED)
def test_missing_required_heading(sheet: str, heading: str) -> None:
    grids = good_grids()
    grids[sheet].drop(heading)
    plant, issues = check(grids)
    assert plant is None
    assert has(issues, "missing-heading", sheet, "A4"), listing(issues)


@pytest.mark.parametrize("sheet", [spec.name for spec in SHEETS if spec.name not in APART])
def test_row_without_a_key(sheet: str) -> None:
    grids = good_grids()
    grids[sheet].rows[0][0] = "  "
    plant, issues = check(grids)
    assert plant is None
    assert has(issues, "missing-name", sheet, "A5"), listing(issues)
