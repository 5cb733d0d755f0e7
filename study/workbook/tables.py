"""A sheet's cells as rows of checked values: the header found, headings recognised, every cell read."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any, Final

from study.workbook.cells import Refused, is_blank, plain, read_cell, shown
from study.workbook.columns import Column, SheetSpec
from study.workbook.faults import Findings, place
from study.workbook.headings import REMARK, HeadingIndex, Match, Misfit, edit_distance, heading_key
from study.workbook.package.cells import address
from study.workbook.reader import Rows
from study.workbook.sheet_xml import ErrorValue, NoStoredValue, Percent, ResultFormula

HEADER_SEARCH_ROWS: Final = 200
_NO_TEXT = (ErrorValue, NoStoredValue, ResultFormula)


@dataclass(frozen=True, slots=True, kw_only=True)
class Placed:
    """A recognised heading and the number of its column."""

    column_number: int
    match: Match
    text: str


@dataclass(slots=True, kw_only=True)
class Table:
    """The data of one sheet: where its headings are, and its rows as raw cells.

    ``at`` gives the column number by mode (None for a plain column) and field, ``heading_columns`` by the
    heading without its unit. ``misread`` holds the modes and fields whose headings are at fault.
    """

    spec: SheetSpec
    header_row: int
    placed: tuple[Placed, ...]
    raw: Mapping[int, Mapping[int, Any]]
    at: dict[tuple[str | None, str], int] = field(default_factory=dict)
    heading_columns: dict[str, int] = field(default_factory=dict)
    misread: set[tuple[str | None, str]] = field(default_factory=set)

    @property
    def key_column(self) -> int:
        """Number of the column of the key."""
        return self.placed[0].column_number

    def cell(self, row: int, name: str, mode: str | None = None) -> str:
        """Return the address of a field's cell without the sheet; of the key where it has no column."""
        return address(self.at.get((mode, name), self.key_column), row)

    def data_rows(self) -> Iterator[tuple[int, Mapping[int, Any]]]:
        """Yield the rows that are neither blank nor remarks."""
        used = {p.column_number for p in self.placed}
        for number, cells in self.raw.items():
            first = cells.get(self.key_column)
            if number <= self.header_row or (type(first) is str and first.lstrip().startswith(REMARK)):
                continue
            if any(column in used and not is_blank(value) for column, value in cells.items()):
                yield number, cells


@dataclass(slots=True, kw_only=True)
class Row:
    """One row: values by field in the unit of the heading; a blank cell has no entry.

    ``broken`` is True where a cell could not be read, so that nothing can be built from the row;
    ``modes`` holds the values of the repeated columns by mode.
    """

    table: Table
    number: int
    values: dict[str, Any]
    modes: dict[str, dict[str, Any]] = field(default_factory=dict)
    broken: set[str] = field(default_factory=set)

    @property
    def sheet(self) -> str:
        """Name of the sheet."""
        return self.table.spec.name

    @property
    def name(self) -> str:
        """The key's text, or an empty one."""
        return str(self.values.get(self.table.spec.key.field, ""))

    def cell(self, name: str, mode: str | None = None) -> str:
        """Return the address of a field's cell without the sheet."""
        return self.table.cell(self.number, name, mode)

    def place(self, name: str, mode: str | None = None) -> str:
        """Return the address of a field's cell with the sheet."""
        return place(self.sheet, self.table.at.get((mode, name), self.table.key_column), self.number)

    def has(self, *names: str) -> bool:
        """Return True where all the fields hold values."""
        return all(self.values.get(name) is not None for name in names)


def find_table(
    spec: SheetSpec, rows: Rows, modes: Iterable[str], found: Findings, not_read: list[str]
) -> Table | None:
    """Find the header row of a sheet and recognise its headings.

    Parameters
    ----------
    spec : SheetSpec
        What the sheet should be.
    rows : mapping
        Its raw cells.
    modes : iterable of str
        Names of the modes.
    found : Findings
        Takes the faults.
    not_read : list of str
        Takes the columns that are the engineer's own.

    Returns
    -------
    Table or None
        None where the sheet is empty or has no header row.
    """
    header = _header_row(spec, rows)
    if header is None:
        _report_no_header(spec, rows, found)
        return None
    number, first = header
    index = HeadingIndex(spec, modes)
    table = Table(spec=spec, header_row=number, placed=(), raw=rows)
    placed: list[Placed] = []
    for column, value in sorted(rows[number].items()):
        text = _heading_text(table, column, value, found) if column >= first else None
        match = None if text is None else _heading(table, column, text, index, found)
        if match is None and text is not None:
            _report_unknown(table, column, text, found, not_read)
        if isinstance(match, Misfit):
            table.misread.update(match.meant)
        if isinstance(match, Match):
            placed.append(Placed(column_number=column, match=match, text=str(value)))
            table.at[match.mode, match.column.field] = column
            table.heading_columns[_plain_heading(spec, match)] = column
    table.placed = tuple(placed)
    _report_missing(table, found)
    return table


def _plain_heading(spec: SheetSpec, match: Match) -> str:
    if match.mode is None:
        return match.column.name
    repeated = next(c for c in spec.mode_columns if c.column is match.column)
    return f"{match.mode}: {repeated.suffix}" if repeated.suffix else match.mode


def _header_row(spec: SheetSpec, rows: Rows) -> tuple[int, int] | None:
    keys = {heading_key(name) for name in (spec.key.name, *spec.key.older)}
    for number, cells in rows.items():
        for column, value in sorted(cells.items()):
            if is_blank(value):
                continue
            if type(value) is str and heading_key(value) in keys:
                return number, column
            break
    return None


def _report_no_header(spec: SheetSpec, rows: Rows, found: Findings) -> None:
    filled = [
        (number, column, value)
        for number, cells in rows.items()
        for column, value in sorted(cells.items())[:1]
        if not is_blank(value)
    ]
    if not filled:
        if spec.required:
            found.unread.add(spec.name)
            found.add("missing-sheet", spec.name, "", "the sheet is empty", "fill it in")
        return
    found.unread.add(spec.name)
    wanted = f"start the row of headings with “{spec.key.name}”"
    for number, column, value in filled[:HEADER_SEARCH_ROWS]:
        if edit_distance(heading_key(str(value)), heading_key(spec.key.name), 2) <= 2:
            cell = address(column, number)
            found.add("missing-header", spec.name, cell, f"{shown(value)} is not “{spec.key.name}”", wanted)
            return
    found.add("missing-header", spec.name, "", "the sheet has no row of headings", wanted)


def _heading_text(table: Table, column: int, value: Any, found: Findings) -> str | None:
    """Return a heading's text; None where there is none or it is a remark."""
    text = None if isinstance(value, _NO_TEXT) else plain(value)
    if text is None:
        found.add(
            "error-value" if isinstance(value, ErrorValue) else "no-stored-value", table.spec.name,
            address(column, table.header_row), f"the heading is {shown(value)}", "type the heading as text",
        )  # fmt: skip
        return None
    return None if not text or text.startswith(REMARK) else text


def _heading(
    table: Table, column: int, text: str, index: HeadingIndex, found: Findings
) -> Match | Misfit | None:
    """Return what the heading of one column means; report one that is at fault."""
    sheet, cell = table.spec.name, address(column, table.header_row)
    match = index.recognise(text)
    if isinstance(match, Misfit):
        found.add(match.code, sheet, cell, f"heading {shown(text)}: {match.found}", match.wanted)
        return match
    if match is not None and (match.mode, match.column.field) in table.at:
        other = address(table.at[match.mode, match.column.field], table.header_row)
        said = f"heading {shown(text)} stands in {other} already"
        found.add("doubled-heading", sheet, cell, said, "keep one of them")
        return Misfit(code="doubled-heading", found=said, wanted="")
    return match


def _report_unknown(table: Table, column: int, text: str, found: Findings, not_read: list[str]) -> None:
    mode, colon, suffix = text.rpartition(":")
    suffixes = {heading_key(c.suffix) for c in table.spec.mode_columns if c.suffix}
    if colon and heading_key(suffix.partition("[")[0]) in suffixes:
        if "Modes" in found.unread:
            return
        found.add(
            "unknown-mode", table.spec.name, address(column, table.header_row),
            f"heading {shown(text)} names the mode {shown(mode)}, which the sheet Modes does not have",
            "write the mode as on the sheet Modes",
        )  # fmt: skip
        return
    not_read.append(f"{place(table.spec.name, column, table.header_row)}: column {shown(text)}")


def _report_missing(table: Table, found: Findings) -> None:
    headed = {field for _, field in table.at}
    for column in table.spec.columns:
        if column.blank != "required" or column.when or (None, column.field) in table.misread:
            continue
        if column.field not in headed:
            found.add(
                "missing-heading", table.spec.name, address(table.key_column, table.header_row),
                f"there is no heading “{column.heading}”", f"add the column “{column.heading}”",
            )  # fmt: skip


def read_rows(table: Table, found: Findings) -> list[Row]:
    """Return the checked rows of a sheet; what cannot be read is reported."""
    return [_read_row(table, number, cells, found) for number, cells in table.data_rows()]


def _read_row(table: Table, number: int, cells: Mapping[int, Any], found: Findings) -> Row:
    row = Row(table=table, number=number, values={})
    for placed in table.placed:
        value = cells.get(placed.column_number)
        if value is None or is_blank(value):
            continue
        match = placed.match
        read = read_cell(value, match)
        if type(read) is Refused:
            cell = address(placed.column_number, number)
            said = read.found if match.mode is None else f"{match.mode}: {read.found}"
            found.add(read.code, table.spec.name, cell, said, read.wanted)
            row.broken.add(
                match.column.field if match.mode is None else f"{match.mode}: {match.column.field}"
            )
            continue
        if match.mode is None:
            row.values[match.column.field] = read
        else:
            row.modes.setdefault(match.mode, {})[match.column.field] = read
        _remark_on(row, placed, value, read, found)
    if not row.name and table.spec.key.field not in row.broken:
        _report_nameless(row, found)
    return row


def _report_nameless(row: Row, found: Findings) -> None:
    key = row.table.spec.key
    row.broken.add(key.field)
    found.add(
        "missing-name", row.sheet, row.cell(key.field), f"the row has values and no {key.name}",
        f"write the {key.name}, or clear the row",
    )  # fmt: skip


def _remark_on(row: Row, placed: Placed, value: Any, read: Any, found: Findings) -> None:
    """Report what was read and may not be meant."""
    column = placed.match.column
    usual = column.usual
    if usual is not None and type(read) is float and not usual.hold(read):
        found.add(
            "unusual-value", row.sheet, address(placed.column_number, row.number),
            f"{column.name} is {_with_unit(read, column)}",
            f"usual is {usual.words(column.unit)}; check the unit of the heading",
            severity="warning",
        )  # fmt: skip
    if type(value) is Percent and column.is_percent:
        found.add(
            "percent-read", row.sheet, address(placed.column_number, row.number),
            f"{column.name} is shown as a percentage and read as {_with_unit(read, column)}",
            "format the cell as a plain number",
            severity="note",
        )  # fmt: skip


def _with_unit(value: float, column: Column) -> str:
    return f"{value:.10g} {column.unit}".strip()
