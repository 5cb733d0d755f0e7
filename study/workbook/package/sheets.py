"""Result sheets made ready for another workbook: own text inline, formats by their new numbers."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from study.workbook.package.styles import StyleMap
from study.workbook.package.xml import MAIN, Document, Node, as_utf8, escape, parse

_CELL = re.compile(r'<c r="([A-Z]+\d+)"(?: s="(\d+)")?(?: t="s"><v>(\d+)</v></c>|( t="\w+")?(/?>))')
_ROW = re.compile(r"<row\b[^>]*>")
_COLUMN = re.compile(r"<col\b[^>]*>")
_DIFFERENTIAL_TAG = re.compile(r"<(?:cfRule|colorFilter|sortCondition|table|tableColumn)\b[^>]*>")
_DIFFERENTIAL = re.compile(r'(\b\w*[dD]xfId=")(\d+)"')
_FORMULA = re.compile(r"<f\b[^>]*>[^<]*</f>")
_SHEET_DATA = re.compile(rb"<(?:\w+:)?sheetData\b")
_ROOT_NAME = re.compile(rb"<((?:\w+:)?worksheet)\b")
_END = "</worksheet>"
_VIEW = re.compile(r"<sheetView\b[^>]*>")
_STYLE = re.compile(r'\bs="(\d+)"')
_COLUMN_STYLE = re.compile(r'\bstyle="(\d+)"')


SHEET_ORDER = (
    "sheetPr", "dimension", "sheetViews", "sheetFormatPr", "cols", "sheetData", "sheetCalcPr",
    "sheetProtection", "protectedRanges", "scenarios", "autoFilter", "sortState", "dataConsolidate",
    "customSheetViews", "mergeCells", "phoneticPr", "conditionalFormatting", "dataValidations",
    "hyperlinks", "printOptions", "pageMargins", "pageSetup", "headerFooter", "rowBreaks", "colBreaks",
    "customProperties", "cellWatches", "ignoredErrors", "smartTags", "drawing", "legacyDrawing",
    "legacyDrawingHF", "drawingHF", "picture", "oleObjects", "controls", "webPublishItems",
    "tableParts", "extLst",
)  # fmt: skip
"""Children of a worksheet in the order of ECMA-376-1 clause 18.3.1.99 (CT_Worksheet), from memory."""


@dataclass(frozen=True, slots=True, kw_only=True)
class OldSheet:
    """What a replaced sheet leaves to the new one.

    Attributes
    ----------
    code_name : str
        Name by which macros know the sheet; empty when there is none.
    selected : bool
        Whether its tab is among the selected ones.
    """

    code_name: str = ""
    selected: bool = False


def shared_strings(data: bytes | None) -> list[str]:
    """Return the content of each shared string as XML, ready to stand in an inline string."""
    if data is None:
        return []
    root = parse(data, "shared strings of the result sheets")
    items = []
    for item in root.all("si"):
        whole = data[item.start : item.stop].decode()
        items.append(whole[whole.index(">") + 1 : whole.rindex("<")] if item.close >= 0 else "<t/>")
    return items


def rewrite_sheet(
    data: bytes, strings: Sequence[str], styles: StyleMap, old: OldSheet, tables: Mapping[str, str]
) -> bytes:
    """Return a result sheet as it stands in the engineer's workbook.

    Parameters
    ----------
    data : bytes
        The sheet as XlsxWriter wrote it.
    strings : sequence of str
        Shared strings of the result workbook.
    styles : StyleMap
        New numbers of the formats.
    old : OldSheet
        The sheet that it replaces.
    tables : mapping of str to str
        New names of tables that had to be renamed, for formulas that name them.

    Returns
    -------
    bytes
        The new part.
    """
    text = data.decode("utf-8")
    if f'<worksheet xmlns="{MAIN}"' not in text:
        raise ValueError("result sheets are to be written by XlsxWriter")
    head, opening, body = text.partition("<sheetData")
    if old.code_name:
        head = _with_code_name(head, old.code_name)
    head = _VIEW.sub(lambda m: _select(m[0], old.selected), head)
    head = _COLUMN.sub(
        lambda m: _COLUMN_STYLE.sub(lambda s: f'style="{styles.cells[int(s[1])]}"', m[0]), head
    )
    # Cell text never holds "<", so these tags cannot be text of a cell.
    body = _ROW.sub(lambda m: _STYLE.sub(lambda s: f's="{styles.cells[int(s[1])]}"', m[0]), body)
    body = _DIFFERENTIAL_TAG.sub(lambda m: _move_differential(m[0], styles), body)
    body = _FORMULA.sub(lambda m: _rename_tables(m[0], tables), body)
    cells = body.count("<c ")
    marks = [f' s="{number}"' if number else "" for number in styles.cells]
    body, moved = _CELL.subn(lambda m: _cell(m, strings, marks), body)
    if moved != cells:
        raise ValueError("result sheets hold cells in an unknown form")
    return (head + opening + body).encode()


def _select(view: str, selected: bool) -> str:
    view = view.replace(' tabSelected="1"', "")
    return view.replace("<sheetView", '<sheetView tabSelected="1"', 1) if selected else view


def _move_differential(tag: str, styles: StyleMap) -> str:
    return _DIFFERENTIAL.sub(lambda m: f'{m[1]}{styles.differential[int(m[2])]}"', tag)


def _cell(found: re.Match[str], strings: Sequence[str], marks: Sequence[str]) -> str:
    """Return the start of a cell with its new format; a shared string becomes an inline one, whole."""
    place, style, shared, kind, end = found.groups()
    mark = marks[int(style or 0)]
    if shared is not None:
        return f'<c r="{place}"{mark} t="inlineStr"><is>{strings[int(shared)]}</is></c>'
    return f'<c r="{place}"{mark}{kind or ""}{end}'


def _rename_tables(formula: str, tables: Mapping[str, str]) -> str:
    for name, new in tables.items():
        formula = re.sub(rf"(?<![\w.]){re.escape(name)}\[", f"{new}[", formula)
    return formula


def _with_code_name(head: str, code_name: str) -> str:
    """Keep the name that macros use, or Excel would add a second module for the sheet."""
    sheet = Document((head + _END).encode(), "result sheet")
    properties = sheet.root.find("sheetPr")
    if properties is None:
        sheet.insert_in_order(f'<sheetPr codeName="{escape(code_name)}"/>', "sheetPr", SHEET_ORDER)
    else:
        sheet.set_attribute(properties, "codeName", code_name)
    return sheet.result().decode().removesuffix(_END)


def rewrite_table(data: bytes, styles: StyleMap, number: int, name: str) -> bytes:
    """Return a table part with its new number, name and formats."""
    text = _DIFFERENTIAL_TAG.sub(lambda m: _move_differential(m[0], styles), data.decode("utf-8"))
    table = Document(text.encode(), "table of a result sheet")
    table.set_attribute(table.root, "id", str(number))
    table.set_attribute(table.root, "name", name)
    table.set_attribute(table.root, "displayName", name)
    return table.result()


def old_sheet(data: bytes, part: str) -> OldSheet:
    """Read what has to be carried over from a sheet that is about to be replaced."""
    begin = _SHEET_DATA.search(data)
    name = _ROOT_NAME.search(data)
    if begin and name:
        data = data[: begin.start()] + b"</" + name[1] + b">"
    root = parse(as_utf8(data, part), part)
    properties, views = root.find("sheetPr"), root.find("sheetViews")
    view = views.find("sheetView") if views else None
    return OldSheet(
        code_name=_attribute(properties, "codeName"),
        selected=_attribute(view, "tabSelected") in ("1", "true"),
    )


def _attribute(node: Node | None, name: str) -> str:
    return node.attributes.get(name, "") if node else ""
