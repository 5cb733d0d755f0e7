"""Workbooks as grids of cells that a test can spoil, in memory or as a file."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Any

import xlsxwriter

from study.issues import Issue
from study.model.plant import Plant
from study.workbook.blank import sheet_headings
from study.workbook.build import check_raw
from study.workbook.package.cells import address
from study.workbook.reader import RawBook, RawSheet
from study.workbook.sheet_xml import ErrorValue, NoStoredValue, Percent, ResultFormula
from study.workbook.sheets import SHEETS
from tests.faulty_workbooks import good

HEADER = 4


@dataclass
class Grid:
    """One sheet: headings and rows of cells under them."""

    headings: list[str]
    rows: list[list[Any]]

    def column(self, heading: str) -> int:
        """Return the place of a heading, from 0."""
        return self.headings.index(heading)

    def cell(self, row: int, heading: str) -> str:
        """Return the address of a cell; rows count from 0, and -1 is the row of headings."""
        return address(self.column(heading) + 1, HEADER + 1 + row)

    def put(self, row: int, heading: str, value: Any) -> None:
        """Set one cell."""
        self.rows[row][self.column(heading)] = value

    def drop(self, heading: str) -> None:
        """Take a column out."""
        place = self.column(heading)
        del self.headings[place]
        for row in self.rows:
            del row[place]

    def add(self, heading: str, values: Sequence[Any] = ()) -> None:
        """Add a column at the end."""
        self.headings.append(heading)
        for row, value in zip(self.rows, [*values, *[None] * len(self.rows)], strict=False):
            row.append(value)


Grids = dict[str, Grid]


def grids(tables: good.Tables | None = None) -> Grids:
    """Return the good workbook, or some other, as grids."""
    given = good.tables() if tables is None else tables
    modes = [str(row["Mode"]) for row in given["Modes"]]
    made: Grids = {}
    for spec in SHEETS:
        rows = given.get(spec.name, [])
        headings = [heading.text for heading in sheet_headings(spec, rows, modes)]
        made[spec.name] = Grid(headings, [[row.get(heading) for heading in headings] for row in rows])
    return made


GOOD = grids()


def good_grids() -> Grids:
    """Return a copy of the good workbook that may be spoilt."""
    return {name: Grid(list(grid.headings), [list(row) for row in grid.rows]) for name, grid in GOOD.items()}


def _cells(grid: Grid) -> dict[int, dict[int, Any]]:
    lines = [grid.headings, *grid.rows]
    return {
        HEADER + number: {
            column: float(value) if type(value) is int else value
            for column, value in enumerate(line, 1)
            if value is not None
        }
        for number, line in enumerate(lines)
    }


def check(spoilt: Mapping[str, Grid]) -> tuple[Plant | None, tuple[Issue, ...]]:
    """Run the reader on grids in memory."""
    sheets = tuple(
        RawSheet(name=name.rstrip("\t"), read=lambda grid=grid: _cells(grid)) for name, grid in spoilt.items()
    )
    return check_raw(RawBook(file_name="test.xlsx", sheets=sheets))


def write(spoilt: Mapping[str, Grid], path: Path) -> None:
    """Write grids as a file, with formats and errors as Excel stores them."""
    with xlsxwriter.Workbook(str(path), {"strings_to_formulas": False, "strings_to_numbers": False}) as book:
        formats = {Percent: book.add_format({"num_format": "0.0%"})}
        formats[datetime] = book.add_format({"num_format": "yyyy-mm-dd"})
        for name, grid in spoilt.items():
            sheet = book.add_worksheet(name)
            for row, line in enumerate([grid.headings, *grid.rows], HEADER - 1):
                for column, value in enumerate(line):
                    _write_cell(sheet, (row, column), value, formats)


def _write_cell(sheet: Any, place: tuple[int, int], value: Any, formats: Mapping[type, Any]) -> None:
    if isinstance(value, ErrorValue):
        sheet.write_formula(*place, "=1/0", None, str(value))
    elif isinstance(value, ResultFormula):
        sheet.write_formula(*place, f"={value}", None, 1.0)
    elif isinstance(value, NoStoredValue):
        sheet.write_formula(*place, f"={value}", None, "")
    elif isinstance(value, Percent):
        sheet.write_number(*place, float(value), formats[Percent])
    elif isinstance(value, bool):
        sheet.write_boolean(*place, value)
    elif isinstance(value, datetime):
        sheet.write_datetime(*place, value, formats[datetime])
    elif isinstance(value, str):
        sheet.write_string(*place, value)
    elif value is not None:
        sheet.write_number(*place, value)


def has(issues: Sequence[Issue], code: str, sheet: str, cell: str) -> bool:
    """Return True where an issue of that code stands at that address."""
    return any(i.code == code and i.sheet == sheet and i.cell == cell for i in issues)


def listing(issues: Sequence[Issue]) -> str:
    """Return the issues as text, for the message of a failed test."""
    return "\n".join(map(str, issues)) or "nothing found"
