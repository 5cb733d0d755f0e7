"""What is wrong with worksheets and tables; part of the check of a package."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence

from study.workbook.package.cells import address, area, split_address
from study.workbook.package.sheets import SHEET_ORDER
from study.workbook.package.tables import TablePlace
from study.workbook.package.xml import Node, number_in, out_of_order, whole_number

_TABLE_NAME = re.compile(r"[^\W\d][\w.]*|\\[\w.]*")
_CELL_LIKE = re.compile(r"[A-Za-z]{1,3}\d+|[rR]\d*[cC]\d*|[rRcC]")


def check_sheet(part: str, root: Node, formats: int, strings: int) -> Iterator[str]:
    """Yield the faults of one worksheet.

    Parameters
    ----------
    part : str
        Its name.
    root : Node
        Its root element.
    formats, strings : int
        How many cell formats and shared strings the workbook has.
    """
    yield from (f"{part}: {fault}" for fault in out_of_order(root, SHEET_ORDER, ("conditionalFormatting",)))
    columns = root.find("cols")
    for column in columns.children if columns else ():
        yield from _check_number(part, "column", whole_number(column, "style"), formats)
    data = root.find("sheetData")
    last_row = 0
    for row in data.all("row") if data else ():
        number = whole_number(row, "r", last_row + 1)
        if number <= last_row:
            yield f"{part}: row {number} stands behind row {last_row}"
        last_row = number
        yield from _check_number(part, f"row {number}", whole_number(row, "s"), formats)
        yield from _check_cells(part, row, number, formats, strings)


def _check_number(part: str, what: str, style: int, formats: int) -> Iterator[str]:
    if style >= formats:
        yield f"{part}: {what} uses the cell format {style} of {formats}"


def _check_cells(part: str, row: Node, number: int, formats: int, strings: int) -> Iterator[str]:
    last = 0
    for cell in row.all("c"):
        place = cell.attributes.get("r")
        column, in_row = split_address(place) if place else (last + 1, number)
        if in_row != number or column <= last:
            yield f"{part}: cell {place} stands out of order in row {number}"
        last = column
        yield from _check_number(part, f"cell {place}", whole_number(cell, "s"), formats)
        kind, value = cell.attributes.get("t", "n"), cell.find("v")
        if kind == "s" and _string_number(value, strings) is None:
            yield f"{part}: cell {place} refers to a shared string that is not there"
        if kind == "inlineStr" and cell.find("is") is None:
            yield f"{part}: cell {place} holds no text"


def _string_number(value: Node | None, strings: int) -> int | None:
    """Return the number of a shared string, None where there is no such string."""
    number = number_in(value.text) if value is not None else None
    return number if number is not None and number < strings else None


def cell_texts(root: Node, strings: Sequence[str]) -> dict[str, str]:
    """Return the text of every text cell of a sheet by its address."""
    texts = {}
    data = root.find("sheetData")
    for row in data.all("row") if data else ():
        for cell in row.all("c"):
            kind, value = cell.attributes.get("t", "n"), cell.find("v")
            if kind == "inlineStr":
                text = "".join(n.text for n in cell.walk() if n.name == "t")
            elif kind == "s" and (shared := _string_number(value, len(strings))) is not None:
                text = strings[shared]
            else:
                text = value.text if value is not None else ""
            texts[cell.attributes.get("r", "")] = text
    return texts


def check_tables(
    tables: Mapping[str, TablePlace],
    roots: Mapping[str, Node],
    cells: Mapping[str, Mapping[str, str]],
    names: set[str],
) -> Iterator[str]:
    """Yield the faults of the tables.

    Parameters
    ----------
    tables : mapping of str to TablePlace
        By compared part name.
    roots : mapping of str to Node
        Root elements by compared part name.
    cells : mapping
        Texts of the sheet that each table is on, by the table's compared part name.
    names : set of str
        Defined names of the workbook in lower case.
    """
    for what, counts in (
        ("number", Counter(str(t.number) for t in tables.values())),
        ("name", Counter(t.name.lower() for t in tables.values())),
    ):
        for value, count in counts.items():
            if count > 1:
                yield f"tables: the {what} {value} stands twice"
    for key, table in tables.items():
        if not _TABLE_NAME.fullmatch(table.name) or _CELL_LIKE.fullmatch(table.name):
            yield f"{table.part}: {table.name!r} is no valid name of a table"
        if table.name.lower() in names:
            yield f"{table.part}: the name {table.name} is also a defined name"
        if key not in cells:
            yield f"{table.part}: the table is on no sheet"
        yield from _check_columns(table, roots[key], cells.get(key, {}))
    yield from _check_overlaps(tables, cells)


def _check_columns(table: TablePlace, root: Node, cells: Mapping[str, str]) -> Iterator[str]:
    container = root.find("tableColumns")
    columns = container.all("tableColumn") if container else []
    names = [c.attributes.get("name", "") for c in columns]
    place = area(table.ref)
    if place.left < 1 or len(columns) != place.right - place.left + 1:
        yield f"{table.part}: {len(columns)} columns do not fill {table.ref}"
    if container and container.attributes.get("count", str(len(columns))) != str(len(columns)):
        yield f"{table.part}: the count of columns is wrong"
    for what, values in (
        ("name", [n.lower() for n in names]),
        ("id", [c.attributes.get("id", "") for c in columns]),
    ):
        if len(set(values)) < len(values):
            yield f"{table.part}: two columns share one {what}"
    for offset, name in enumerate(names if table.headed else ()):
        found = cells.get(address(place.left + offset, place.top), "")
        if _plain(found) != _plain(name):
            yield f"{table.part}: the heading {found!r} is not the column name {name!r}"


def _plain(heading: str) -> str:
    """Return a heading with line breaks as Excel writes them in cells."""
    return heading.replace("_x000a_", "\n").replace("_x000A_", "\n").replace("\r\n", "\n")


def _check_overlaps(
    tables: Mapping[str, TablePlace], cells: Mapping[str, Mapping[str, str]]
) -> Iterator[str]:
    keys = [k for k in tables if k in cells]
    for i, first in enumerate(keys):
        for second in keys[i + 1 :]:
            same_sheet = cells[first] is cells[second]
            if same_sheet and area(tables[first].ref).overlaps(area(tables[second].ref)):
                yield f"{tables[first].part}: shares cells with {tables[second].part}"
