"""References of formulas by table and column name, written out as references to cells."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final

from study.workbook.package.cells import Area, address

THIS_ROW: Final = "#this row"
_ITEM: Final = r"(?:[^\[\]']|'.)*"
_STRUCTURED: Final = re.compile(rf"([A-Za-z_\\][\w.]*)\[((?:{_ITEM}|\[{_ITEM}\])*)\]")
_BRACKETED: Final = re.compile(rf"\[({_ITEM})\]")
_TEXT: Final = re.compile(r'"[^"]*"')
_ESCAPED: Final = re.compile(r"'(.)")


@dataclass(frozen=True, slots=True, kw_only=True)
class BookTable:
    """A table of the workbook: its sheet, its cells, and its headings in small letters."""

    sheet: str
    cells: Area
    columns: tuple[str, ...]


def with_cells(formula: str, row: int, tables: Mapping[str, BookTable]) -> str:
    """Return a formula with the cells that its references by table name mean added at its end.

    Parameters
    ----------
    formula : str
        The formula.
    row : int
        Number of the row that it stands in.
    tables : mapping
        Tables by their names in small letters.

    Examples
    --------
    >>> pumps = BookTable(sheet="Own", cells=Area(left=2, top=4, right=4, bottom=9), columns=("a", "b", "c"))
    >>> with_cells("SUM(Pumps[b])*2", 7, {"pumps": pumps})
    "SUM(Pumps[b])*2+'Own'!C4:C9"
    >>> with_cells("Pumps[[#This Row],[a]:[b]]", 7, {"pumps": pumps})
    "Pumps[[#This Row],[a]:[b]]+'Own'!B7:C7"
    """
    if "[" not in formula:
        return formula
    meant = [
        _cells(tables[name.casefold()], inside, row)
        for name, inside in _STRUCTURED.findall(_TEXT.sub("", formula))
        if name.casefold() in tables
    ]
    return "+".join([formula, *meant])


def _cells(table: BookTable, inside: str, row: int) -> str:
    items = _BRACKETED.findall(inside) if inside.lstrip("@ ").startswith("[") else [inside.lstrip("@")]
    words = [_ESCAPED.sub(r"\1", item).casefold() for item in items]
    places = [table.columns.index(word) for word in words if word in table.columns]
    cells = table.cells
    left, right = (min(places), max(places)) if places else (0, cells.right - cells.left)
    top, bottom = (row, row) if THIS_ROW in words or inside.startswith("@") else (cells.top, cells.bottom)
    sheet = table.sheet.replace("'", "''")
    return f"'{sheet}'!{address(cells.left + left, top)}:{address(cells.left + right, bottom)}"
