"""The blank workbook: every input sheet with headings, drop-downs and hints, and rows where given."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import date, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any, Final

from study.limits import BUILT_IN
from study.workbook.blank_look import Look, column_width, make_look, set_page
from study.workbook.columns import Column, SheetSpec
from study.workbook.headings import REMARK, HeadingIndex, Match, folded
from study.workbook.sheets import BY_NAME, SHEETS

if TYPE_CHECKING:
    import xlsxwriter
    from xlsxwriter.worksheet import Worksheet

Row = Mapping[str, object]
Tables = Mapping[str, Sequence[Row]]

HEADER_ROW: Final = 3
EMPTY_ROWS: Final = 12
SPARE_ROWS: Final = 500
LIST_ROWS: Final = 10_000
MESSAGE_LENGTH: Final = 250
TITLE_LENGTH: Final = 32
LIST_LENGTH: Final = 250
LEGEND: Final = (
    "Dark headings are required; a blank under a light one takes a typical value, or means absent or "
    "unknown. Units may be changed in the brackets. A row or heading that starts with # is a remark."
)
STARTER_MODES: Final = (
    {"Mode": "At sea", "Kind": "sea"},
    {"Mode": "Manoeuvring", "Kind": "manoeuvring"},
    {"Mode": "Harbour", "Kind": "harbour"},
    {"Mode": "Emergency", "Kind": "emergency"},
)
# A file that is written twice has the same bytes.
CREATED: Final = datetime(2000, 1, 1)


@dataclass(frozen=True, slots=True, kw_only=True)
class Heading:
    """One heading of the written sheet; a remark of the engineer's has no column."""

    text: str
    column: Column | None


def write_workbook(path: Path | str, tables: Tables | None = None) -> None:
    """Write a workbook with every input sheet.

    Parameters
    ----------
    path : path
        File to write; an existing one is replaced.
    tables : mapping, optional
        Rows of each sheet, each a mapping from heading to value. A heading may carry another unit than the
        sheet's own. Without it the workbook holds the items of the project, the built-in limits and four
        modes.

    Raises
    ------
    ValueError
        A sheet or heading that does not exist.
    """
    import xlsxwriter

    filled = _with_starters(tables)
    modes = [str(row["Mode"]) for row in filled["Modes"]]
    options = {"strings_to_formulas": False, "strings_to_urls": False, "strings_to_numbers": False}
    with xlsxwriter.Workbook(str(path), options) as book:
        book.set_properties({"created": CREATED, "title": "Vessel electrical plant"})
        look = make_look(book)
        for spec in SHEETS:
            _write_sheet(book, look, spec, filled.get(spec.name, ()), modes)
        _define_lists(book)


def _with_starters(tables: Tables | None) -> Tables:
    filled: dict[str, Sequence[Row]] = dict(tables or {})
    for name in filled:
        if name not in BY_NAME:
            raise ValueError(f"there is no input sheet “{name}”")
    filled.setdefault("Project", [{"Item": item.name} for item in BY_NAME["Project"].items])
    filled["Acceptance"] = _acceptance(filled.get("Acceptance", ()))
    filled.setdefault("Modes", STARTER_MODES)
    return filled


def _acceptance(given: Sequence[Row]) -> list[Row]:
    own = {folded(str(row["Quantity"])): row for row in given}
    rows: list[Row] = []
    for limit in BUILT_IN.values():
        built_in = {
            "Quantity": limit.quantity,
            "Limit": limit.limit,
            "Unit": limit.unit,
            "Basis": limit.basis,
        }
        rows.append(own.pop(folded(limit.quantity), built_in))
    if own:
        raise ValueError(f"Acceptance has no quantity “{next(iter(own.values()))['Quantity']}”")
    return rows


def sheet_headings(spec: SheetSpec, rows: Sequence[Row], modes: Sequence[str]) -> list[Heading]:
    """Return the headings of one sheet in order, worded as the rows word them.

    Raises
    ------
    ValueError
        The rows hold a heading that the sheet has not.
    """
    headings = [Heading(text=column.heading, column=column) for column in spec.columns]
    for mode in modes:
        for repeated in spec.mode_columns:
            headings.append(Heading(text=repeated.heading(mode), column=repeated.column))
    index = HeadingIndex(spec, modes)
    own = {index_key(index, heading.text): place for place, heading in enumerate(headings)}
    for text in dict.fromkeys(text for row in rows for text in row):
        if text.startswith(REMARK):
            headings.append(Heading(text=text, column=None))
            continue
        place = own[index_key(index, text)]
        headings[place] = Heading(text=text, column=headings[place].column)
    return headings


def index_key(index: HeadingIndex, text: str) -> tuple[str | None, str]:
    """Return mode and field of a known heading.

    Raises
    ------
    ValueError
        The sheet has no such heading.
    """
    match = index.recognise(text)
    if not isinstance(match, Match):
        why = "is not known" if match is None else match.found
        raise ValueError(f"heading “{text}”: {why}")
    return match.mode, match.column.field


def _write_sheet(
    book: xlsxwriter.Workbook, look: Look, spec: SheetSpec, rows: Sequence[Row], modes: Sequence[str]
) -> None:
    headings = sheet_headings(spec, rows, modes)
    sheet = book.add_worksheet(spec.name)
    sheet.write_string(0, 0, spec.name, look.title)
    sheet.write_string(1, 0, f"One row is {spec.row_is}. {spec.hint}", look.hint)
    sheet.write_string(2, 0, LEGEND, look.legend)
    last_row = HEADER_ROW + max(len(rows), 1 if rows else EMPTY_ROWS)
    columns = [
        {"header": h.text, "header_format": look.heading(h.column), "format": look.cell(h.column)}
        for h in headings
    ]
    table = {"name": table_name(spec.name), "style": None, "columns": columns}
    sheet.add_table(HEADER_ROW, 0, last_row, len(headings) - 1, table)
    for place, heading in enumerate(headings):
        texts = [_shown(row.get(heading.text)) for row in rows]
        sheet.set_column(place, place, column_width(heading.text, texts, heading.column))
        if heading.column is not None:
            _guide(sheet, place, last_row, heading.column)
        for offset, row in enumerate(rows, 1):
            _write_cell(sheet, look, (HEADER_ROW + offset, place), row.get(heading.text), heading.column)
    set_page(sheet, look, HEADER_ROW, len(headings))


def table_name(sheet: str) -> str:
    """Return the name of a sheet's Excel table.

    Examples
    --------
    >>> table_name("Three-winding transformers")
    'Three_winding_transformers'
    """
    return sheet.replace(" ", "_").replace("-", "_")


def _shown(value: object) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, (tuple, list)):
        return ", ".join(str(part) for part in value)
    return str(value)


def _write_cell(
    sheet: Worksheet, look: Look, place: tuple[int, int], value: object, column: Column | None
) -> None:
    row, col = place
    if value is None or value == "":
        sheet.write_blank(row, col, None, look.cell(column))
    elif isinstance(value, date):
        sheet.write_datetime(row, col, value, look.date)
    elif isinstance(value, (int, float)) and not isinstance(value, bool):
        sheet.write_number(row, col, value, look.cell(column))
    else:
        sheet.write_string(row, col, _shown(value), look.cell(column))


def _guide(sheet: Worksheet, place: int, last_row: int, column: Column) -> None:
    options: dict[str, Any] = {
        "validate": "any",
        "input_title": column.name[:TITLE_LENGTH],
        "input_message": input_message(column)[:MESSAGE_LENGTH],
        "error_title": column.name[:TITLE_LENGTH],
    }
    if column.kind in {"choice", "yes-no"}:
        choices = list(column.choices) or ["yes", "no"]
        if len(",".join(choices)) <= LIST_LENGTH:
            options |= {"validate": "list", "source": choices, "error_message": "Choose from the list."}
    elif column.kind == "reference":
        only = len(column.target) == 1
        options |= {"validate": "list", "source": f"={list_name(column.target[0])}"}
        options |= {"error_message": "No such name yet.", "error_type": "warning"}
        options |= {"show_error": only}
    sheet.data_validation(HEADER_ROW + 1, place, last_row + SPARE_ROWS, place, options)


def input_message(column: Column) -> str:
    """Return what Excel shows beside a selected cell of the column."""
    parts = [column.hint] if column.hint else []
    if column.kind in {"number", "integer"}:
        parts.append(column.bounds.words(column.unit))
    if column.target:
        parts.append(f"a name from {', '.join(column.target)}")
    if column.blank == "required":
        parts.append("used only for some kinds" if column.when else "required")
    elif column.typical is not None:
        value = column.typical.words or f"{column.typical.value} {column.unit}".strip()
        parts.append(f"blank: {value}")
    return "; ".join(parts)


def list_name(sheet: str) -> str:
    """Return the defined name of the list of names on a sheet."""
    return f"{table_name(sheet)}_list"


def _define_lists(book: xlsxwriter.Workbook) -> None:
    targets = {column.target[0] for spec in SHEETS for column in spec.columns if column.kind == "reference"}
    for spec in SHEETS:
        if spec.name not in targets:
            continue
        quoted = f"'{spec.name}'"
        first = HEADER_ROW + 2
        cells = f"{quoted}!$A${first}:$A${first + LIST_ROWS}"
        book.define_name(list_name(spec.name), f"={quoted}!$A${first}:INDEX({cells},MAX(1,COUNTA({cells})))")
