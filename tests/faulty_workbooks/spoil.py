"""Ways to spoil the good workbook, and what must then be found."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from tests.faulty_workbooks.grids import Grids

Spoil = Callable[[Grids], None]


def put(sheet: str, row: int, heading: str, value: Any) -> Spoil:
    """Set one cell."""
    return lambda grids: grids[sheet].put(row, heading, value)


def rename(sheet: str, heading: str, new: Any) -> Spoil:
    """Change a heading."""

    def spoil(grids: Grids) -> None:
        grids[sheet].headings[grids[sheet].column(heading)] = new

    return spoil


def drop(sheet: str, heading: str) -> Spoil:
    """Take a column out."""
    return lambda grids: grids[sheet].drop(heading)


def add(sheet: str, heading: str, *values: Any) -> Spoil:
    """Add a column at the end."""
    return lambda grids: grids[sheet].add(heading, values)


def again(sheet: str, row: int, **changes: Any) -> Spoil:
    """Repeat a row at the end, with changes by heading (blanks as underscores)."""

    def spoil(grids: Grids) -> None:
        grid = grids[sheet]
        grid.rows.append(list(grid.rows[row]))
        for heading, value in changes.items():
            grid.put(-1, heading.replace("_", " "), value)

    return spoil


def row(sheet: str, **values: Any) -> Spoil:
    """Add a row with the values of some headings."""

    def spoil(grids: Grids) -> None:
        grid = grids[sheet]
        grid.rows.append([values.get(heading.replace(" ", "_")) for heading in grid.headings])

    return spoil


def without(sheet: str) -> Spoil:
    """Take a sheet out."""
    return lambda grids: grids.pop(sheet) and None


def without_row(sheet: str, number: int) -> Spoil:
    """Take a row out."""
    return lambda grids: grids[sheet].rows.pop(number) and None


def call(sheet: str, name: str) -> Spoil:
    """Give a sheet another name; a tab at the end keeps doubled names apart in the test."""

    def spoil(grids: Grids) -> None:
        grids[name] = grids.pop(sheet)

    return spoil


@dataclass(frozen=True)
class Fault:
    """Spoil, expected code, and where: sheet, row from 0 (-1 headings, None no cell) and heading."""

    name: str
    spoil: tuple[Spoil, ...]
    code: str
    sheet: str
    row: int | None = None
    heading: str = ""
    severity: str = "fault"


def fault(name: str, code: str, sheet: str, row: int | None, heading: str, *spoil: Spoil) -> Fault:
    """Return a fault."""
    return Fault(name=name, spoil=spoil, code=code, sheet=sheet, row=row, heading=heading)


def warning(name: str, code: str, sheet: str, row: int, heading: str, *spoil: Spoil) -> Fault:
    """Return a warning, with which the plant is built."""
    return Fault(name=name, spoil=spoil, code=code, sheet=sheet, row=row, heading=heading, severity="warning")


def note(name: str, code: str, sheet: str, row: int, heading: str, *spoil: Spoil) -> Fault:
    """Return a note, with which the plant is built."""
    return Fault(name=name, spoil=spoil, code=code, sheet=sheet, row=row, heading=heading, severity="note")


def cell(name: str, code: str, where: tuple[str, int, str], value: Any) -> Fault:
    """Return a fault of one cell that is set."""
    return fault(name, code, *where, put(*where, value))


def odd_cell(name: str, code: str, where: tuple[str, int, str], value: Any) -> Fault:
    """Return a warning of one cell that is set."""
    return warning(name, code, *where, put(*where, value))


def noted_cell(name: str, code: str, where: tuple[str, int, str], value: Any) -> Fault:
    """Return a note of one cell that is set."""
    return note(name, code, *where, put(*where, value))


def added(name: str, code: str, sheet: str, heading: Any) -> Fault:
    """Return a fault of a heading that is added."""
    return fault(name, code, sheet, -1, heading, add(sheet, heading))


def renamed(name: str, code: str, sheet: str, heading: str, new: str) -> Fault:
    """Return a fault of a heading that is changed."""
    return fault(name, code, sheet, -1, new, rename(sheet, heading, new))
