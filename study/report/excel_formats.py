"""Formats of the cells of result sheets."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from study.report.numbers import excel_format
from study.report.style import ACCENT, RULE, VerdictLook
from study.report.tables import Column


class Formats:
    """Cell formats of the result workbook, each made once.

    Parameters
    ----------
    book : xlsxwriter.Workbook
        The workbook.
    """

    def __init__(self, book: Any) -> None:
        self._book = book
        self._made: dict[tuple[tuple[str, Any], ...], Any] = {}
        self._asked: dict[tuple[tuple[str, Any], ...], Any] = {}

    def get(self, **properties: Any) -> Any:
        """Return the format with these properties."""
        asked = tuple(properties.items())
        if asked not in self._asked:
            self._asked[asked] = self._get(properties)
        return self._asked[asked]

    def _get(self, properties: Mapping[str, Any]) -> Any:
        whole = {"font_name": "Calibri", "font_size": 10, "valign": "top", **properties}
        key = tuple(sorted(whole.items()))
        if key not in self._made:
            self._made[key] = self._book.add_format(whole)
        return self._made[key]

    def colours(self, look: VerdictLook) -> Any:
        """Return the colours of a status word, for a conditional format."""
        key = (("status", look.css),)
        if key not in self._made:
            self._made[key] = self._book.add_format({"font_color": look.ink, "bg_color": look.ground})
        return self._made[key]


def row_look(style: str) -> dict[str, Any]:
    """Return what a row's style adds to the formats of its cells."""
    match style:
        case "group":
            return {"bold": True, "font_color": ACCENT}
        case "subtotal":
            return {"italic": True, "top": 4, "top_color": RULE}
        case "total":
            return {"bold": True, "top": 1, "top_color": ACCENT}
        case _:
            return {}


def padded_format(decimals: int, most: int, column: Column) -> str:
    """Return a number format that keeps the decimal point in line with the longest number of the column."""
    if column.kind == "tiny":
        return "0.0E+00"
    if column.kind in ("count", "free"):
        return "General"
    if column.kind == "judged":
        return excel_format(decimals)
    spaces = most - decimals
    point = "_." if decimals == 0 and most > 0 else ""
    return excel_format(decimals) + point + "_0" * spaces
