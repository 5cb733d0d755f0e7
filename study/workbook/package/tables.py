"""Numbers and names of tables: unique in the whole workbook, the same again on the next run."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

from study.workbook.package.opc import SPREADSHEET, TYPES_PART, Package, read_content_types
from study.workbook.package.xml import Node, as_utf8, parse, whole_number
from study.workbook.package.zip import part_key

TABLE_TYPE = SPREADSHEET + "table+xml"


@dataclass(frozen=True, slots=True, kw_only=True)
class TablePlace:
    """What a table is called; formulas know it by ``name``, slicers by ``number``.

    Attributes
    ----------
    part : str
        Its part.
    number : int
        Its id.
    name : str
        Its display name.
    ref : str
        Its cells.
    headed : bool
        Whether the first row holds headings.
    columns : tuple of str
        Headings, as formulas write them.
    """

    part: str
    number: int
    name: str
    ref: str
    headed: bool
    columns: tuple[str, ...] = ()


def read_tables(package: Package) -> list[TablePlace]:
    """Return the tables of a workbook in the order of its parts."""
    types = read_content_types(package.read(TYPES_PART))
    tables = []
    for part in package.names:
        if types.of(part) == TABLE_TYPE:
            root = parse(as_utf8(package.read(part), part), part)
            attributes = root.attributes
            name = attributes.get("displayName", attributes.get("name", ""))
            tables.append(
                TablePlace(
                    part=part,
                    number=whole_number(root, "id"),
                    name=name,
                    ref=attributes.get("ref", ""),
                    headed=attributes.get("headerRowCount", "1") != "0",
                    columns=_columns(root),
                )
            )
    return tables


def _columns(root: Node) -> tuple[str, ...]:
    container = root.find("tableColumns")
    return tuple(c.attributes.get("name", "") for c in container.all("tableColumn")) if container else ()


def place_tables(
    base: Iterable[TablePlace], result: Iterable[TablePlace], dropped: set[str], names: Iterable[str]
) -> Mapping[str, TablePlace]:
    """Give each result table a number and a name that nothing else in the workbook has.

    Parameters
    ----------
    base, result : iterable of TablePlace
        Tables of the engineer's workbook and of the result sheets.
    dropped : set of str
        Compared names of the parts that go: tables of the last run, whose numbers are used again.
    names : iterable of str
        Defined names of the workbook; a table may not share one.

    Returns
    -------
    mapping of str to TablePlace
        By the compared part name in the result workbook.
    """
    base = list(base)
    kept = [t for t in base if part_key(t.part) not in dropped]
    last = {t.name.lower(): t.number for t in base if part_key(t.part) in dropped}
    numbers = {t.number for t in kept}
    taken = {t.name.lower() for t in kept} | {n.lower() for n in names}
    following = max((t.number for t in base), default=0) + 1
    places = {}
    for table in result:
        name = _free(table.name, taken)
        number = last.get(name.lower(), 0)
        if number < 1 or number in numbers:
            number, following = following, following + 1
        numbers.add(number)
        taken.add(name.lower())
        places[part_key(table.part)] = replace(table, number=number, name=name)
    return places


def _free(name: str, taken: set[str]) -> str:
    free, count = name, 1
    while free.lower() in taken:
        free, count = (f"R_{name}" if count == 1 else f"R_{name}_{count}"), count + 1
    return free
