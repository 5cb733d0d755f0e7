"""The file as raw cells: every sheet by name, and what can be trusted of its formulas."""

from __future__ import annotations

import re
from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass
from functools import partial
from typing import Final

from study.issues import PackageError
from study.workbook.package.cells import address, area
from study.workbook.package.names import Sheet, defined_names, read_sheets
from study.workbook.package.opc import Package, read_relations, rels_part
from study.workbook.package.parts import read_graph
from study.workbook.package.tables import read_tables
from study.workbook.package.xml import Node, as_utf8, number_in, parse
from study.workbook.package.zip import part_key
from study.workbook.result_formulas import Place, dependent_formulas, mentions_results, shifted
from study.workbook.sheet_xml import (
    BookTables,
    ResultFormula,
    SheetCells,
    TooManyRowsError,
    Value,
    plain_text,
    read_cells,
    read_shared_strings,
)
from study.workbook.sheets import RESULT_PREFIX
from study.workbook.table_formulas import BookTable, with_cells

MOST_ROWS: Final = 20_000
"""Of a sheet of input; four times the largest plant that is meant to be studied."""

_PERCENT_FORMATS: Final = frozenset({9, 10})
_DATE_FORMATS: Final = frozenset({*range(14, 23), *range(27, 37), *range(45, 48), *range(50, 59)})
_QUOTED = re.compile(r'"[^"]*"|\\.|\[[^\]]*\]|_.|\*.')


# An apostrophe, a book in brackets perhaps, and the prefix of result sheets.
_RESULT_MENTION = re.compile(rb"(?:'|&apos;|&#39;|\])[Rr] ")
_HAS_FORMULA = re.compile(rb"<(?:\w+:)?f[ />]")
_MAY_NAME_A_TABLE = re.compile(rb"<(?:\w+:)?f\b[^<]*\[")

Rows = Mapping[int, Mapping[int, Value]]


@dataclass(frozen=True, slots=True, kw_only=True)
class RawSheet:
    """One sheet; `read` returns its cells by row and column number from 1, rows in order."""

    name: str
    read: Callable[[], Rows]


@dataclass(frozen=True, slots=True, kw_only=True)
class RawBook:
    """The sheets that are not results, in the order of the tabs."""

    file_name: str
    sheets: Sequence[RawSheet]


def read_package(package: Package, file_name: str) -> RawBook:
    """List the sheets of a workbook that are not results.

    Parameters
    ----------
    package : Package
        The workbook.
    file_name : str
        Its name.

    Returns
    -------
    RawBook
        Its sheets; the cells of one are read when they are asked for.

    Raises
    ------
    PackageError
        The file is damaged.
    """
    root = _xml(package, package.workbook_part)
    load = partial(_cells, package, _tables(package, root))
    sheets = _own_sheets(package, root)
    refused = _dependent(package, root, sheets, load)
    return RawBook(
        file_name=file_name,
        sheets=tuple(RawSheet(name=s.name, read=partial(_rows, load, s, refused)) for s in sheets),
    )


def sheets_that_show_results(package: Package) -> tuple[str, ...]:
    """Return the names of the engineer's sheets with a formula that depends on a result sheet.

    Parameters
    ----------
    package : Package
        The workbook.

    Returns
    -------
    tuple of str
        In the order of the tabs.
    """
    root = _xml(package, package.workbook_part)
    sheets = _own_sheets(package, root)
    load = partial(_cells, package, _tables(package, root))
    found = {place[0] for place in _dependent(package, root, sheets, load)}
    return tuple(sheet.name for sheet in sheets if sheet.name.casefold() in found)


def own_work_on_results(package: Package) -> tuple[str, ...]:
    """Return what somebody wrote on result sheets: the program puts no formula and no comment there.

    Parameters
    ----------
    package : Package
        The workbook, with the result sheets of the last run.

    Returns
    -------
    tuple of str
        ``R Summary!H12 (=SUM(B2:B9))`` for a formula, ``comments on R Summary`` for comments.
    """
    root = _xml(package, package.workbook_part)
    graph = read_graph(package)
    found = []
    for sheet in read_sheets(package, root, RESULT_PREFIX):
        if not sheet.owned:
            continue
        data = as_utf8(package.read(sheet.part), sheet.part)
        if _HAS_FORMULA.search(data):
            cells = read_cells(data, sheet.part, _tables(package, root))
            for place, text in cells.formulas.items():
                row, column = place
                formula = shifted(text, *cells.moved.get(place, (0, 0)))
                found.append(f"{sheet.name}!{address(column, row)} (={formula})")
        if any(relation.is_a("comments") for relation in graph.get(part_key(sheet.part), ())):
            found.append(f"comments on {sheet.name}")
    return tuple(found)


def _own_sheets(package: Package, root: Node) -> list[Sheet]:
    return [
        sheet
        for sheet in read_sheets(package, root, RESULT_PREFIX)
        if sheet.relation.is_a("worksheet") and not is_result(sheet.name)
    ]


def is_result(name: str) -> bool:
    """Return True for the name of a result sheet.

    Examples
    --------
    >>> is_result("R Load flow"), is_result("Running")
    (True, False)
    """
    return name[: len(RESULT_PREFIX)].upper() == RESULT_PREFIX


def _xml(package: Package, part: str) -> Node:
    return parse(as_utf8(package.read(part), part), part)


def _tables(package: Package, root: Node) -> BookTables:
    relations = read_relations(package.read(rels_part(package.workbook_part)), package.workbook_part)
    properties = root.find("workbookPr")
    starts_1904 = properties is not None and properties.attributes.get("date1904", "0") in {"1", "true"}
    strings: list[str] = []
    shown: list[str] = []
    for relation in relations:
        if relation.external:
            continue
        if relation.is_a("sharedStrings"):
            strings = read_shared_strings(
                as_utf8(package.read(relation.target), relation.target), relation.target
            )
        elif relation.is_a("styles"):
            shown = shown_as(_xml(package, relation.target))
    return BookTables(strings=strings, shown_as=shown, starts_1904=starts_1904)


def shown_as(styles: Node) -> list[str]:
    """Return for each cell style whether its numbers are shown as ``percent``, as a ``date``, or plainly."""
    formats = styles.find("numFmts")
    codes = {
        node.attributes.get("numFmtId", ""): node.attributes.get("formatCode", "")
        for node in (formats.all("numFmt") if formats else ())
    }
    cells = styles.find("cellXfs")
    return [
        _format_kind(xf.attributes.get("numFmtId", "0"), codes) for xf in (cells.all("xf") if cells else ())
    ]


def _format_kind(number: str, codes: Mapping[str, str]) -> str:
    if number in codes:
        return code_kind(codes[number])
    known = number_in(number)
    if known in _PERCENT_FORMATS:
        return "percent"
    return "date" if known in _DATE_FORMATS else ""


def code_kind(code: str) -> str:
    """Return what a number format shows: ``percent``, ``date``, or an empty text for a plain number.

    Examples
    --------
    >>> code_kind("0.0%"), code_kind("yyyy-mm-dd"), code_kind('0.0 "days"'), code_kind("[Red]0.0")
    ('percent', 'date', '', '')
    """
    bare = _QUOTED.sub("", code.partition(";")[0]).lower()
    if "%" in bare:
        return "percent"
    return "date" if any(letter in bare for letter in "ymdhs") and "general" not in bare else ""


def _cells(package: Package, tables: BookTables, sheet: Sheet, most_rows: int | None = None) -> SheetCells:
    return read_cells(as_utf8(package.read(sheet.part), sheet.part), sheet.part, tables, most_rows)


def _rows(load: Callable[..., SheetCells], sheet: Sheet, refused: Collection[Place]) -> Rows:
    try:
        cells = load(sheet, MOST_ROWS)
    except TooManyRowsError as error:
        raise PackageError(
            f"the sheet {sheet.name} holds more than the {MOST_ROWS} rows that are read; let one row stand "
            "for equal items, or take out rows that are not needed"
        ) from error
    folded = sheet.name.casefold()
    for (row, column), formula in cells.formulas.items():
        if (folded, row, column) in refused:
            cells.rows.setdefault(row, {})[column] = ResultFormula(formula)
    return dict(sorted(cells.rows.items()))


def _dependent(
    package: Package, root: Node, sheets: Sequence[Sheet], load: Callable[..., SheetCells]
) -> Collection[Place]:
    """Return the cells whose formulas depend on a result sheet; formulas are read only where one may."""
    # Names of a result sheet's own, such as its print titles, are in no formula that does not name the sheet.
    own = {sheet.index for sheet in read_sheets(package, root, RESULT_PREFIX) if is_result(sheet.name)}
    names = {d.name.casefold(): d.value for _, d in defined_names(root) if d.scope not in own}
    parts = [as_utf8(package.read(sheet.part), sheet.part) for sheet in sheets]
    by_table = any("[" in value for value in names.values())
    by_table = by_table or any(_MAY_NAME_A_TABLE.search(part) for part in parts)
    tables = _tables_by_name(package, root) if by_table else {}
    names = {name: with_cells(value, 1, tables) for name, value in names.items()}
    if not (
        any(mentions_results(value) for value in names.values())
        or any(_RESULT_MENTION.search(part) for part in parts)
        or any(is_result(table.sheet) for table in tables.values())
    ):
        return ()
    formulas = {}
    for sheet in sheets:
        cells = load(sheet)
        for place, formula in cells.formulas.items():
            text = shifted(formula, *cells.moved[place]) if place in cells.moved else formula
            formulas[sheet.name.casefold(), *place] = with_cells(text, place[0], tables)
    return dependent_formulas(formulas, names)


def _tables_by_name(package: Package, root: Node) -> dict[str, BookTable]:
    """Return the tables of all sheets by their names in small letters."""
    places = {part_key(table.part): table for table in read_tables(package)}
    graph = read_graph(package)
    tables: dict[str, BookTable] = {}
    for sheet in read_sheets(package, root, RESULT_PREFIX):
        for relation in graph.get(part_key(sheet.part), ()):
            table = None if relation.external else places.get(part_key(relation.target))
            if table is not None:
                tables[table.name.casefold()] = BookTable(
                    sheet=sheet.name,
                    cells=area(table.ref),
                    columns=tuple(plain_text(name).casefold() for name in table.columns),
                )
    return tables
