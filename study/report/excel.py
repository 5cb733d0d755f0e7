"""The result sheets as a workbook in memory, ready to be put behind the engineer's own sheets."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from datetime import datetime
from io import BytesIO
from typing import Any

from study.report.catalogue import all_tables
from study.report.content import CAUTION, StudyOutcome
from study.report.excel_charts import CHART_ROWS, add_charts, chart_rows, stands_beside
from study.report.excel_formats import Formats
from study.report.excel_pages import modes_scale, pages_across, pages_down, print_scale
from study.report.excel_sheet import FIRST_ROW, Place, SheetWriter, cell_range, layout
from study.report.style import ACCENT, QUIET, TINT
from study.report.tables import SHEETS, Table
from study.report.tables_verdicts import VerdictGrid, verdict_grid

_FIXED_DATE = datetime(2000, 1, 1)
_A3 = 8


def result_workbook(outcome: StudyOutcome, tables: Mapping[str, Table] | None = None) -> bytes:
    """Return every table as result sheets, with native charts beside the numbers.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.
    tables : mapping of str to Table, optional
        `all_tables` of the study, where they have been made already.

    Returns
    -------
    bytes
        An .xlsx file, the same for the same study.
    """
    import xlsxwriter

    buffer = BytesIO()
    book = xlsxwriter.Workbook(
        buffer,
        {
            "in_memory": True,
            "strings_to_numbers": False,
            "strings_to_formulas": False,
            "strings_to_urls": False,
            "nan_inf_to_errors": False,
        },
    )
    book.set_properties({"title": "Study results", "author": "", "created": _FIXED_DATE})
    formats = Formats(book)
    tables = all_tables(outcome) if tables is None else tables
    for name in SHEETS:
        on_sheet = [table for table in tables.values() if table.sheet == name]
        if on_sheet:
            _sheet(book, formats, name, on_sheet, outcome)
    book.close()
    return buffer.getvalue()


def _sheet(book: Any, formats: Formats, name: str, tables: Sequence[Table], outcome: StudyOutcome) -> None:
    from study.report.excel_rows import ResultSheet

    sheet = book.add_worksheet(name, ResultSheet)
    sheet.hide_gridlines(2)
    writer = SheetWriter(sheet=sheet, formats=formats)
    _heading(writer, name, outcome)
    start = FIRST_ROW
    if name == "R Summary":
        start = _grid(writer, verdict_grid(outcome), start)
    listed = len(tables) > 1
    above = {table.key: chart_rows(table) for table in tables if not stands_beside(table)}
    beside = {table.key: chart_rows(table) for table in tables if stands_beside(table)}
    places = layout(tables, start + (len(tables) + 2 if listed else 0), above, beside)
    for table in tables:
        writer.measure(table, alone=not listed)
    if listed:
        _index(writer, name, places, start)
    for place in places:
        writer.write(place)
        add_charts(book, sheet, place)
    writer.finish()
    _print_setup(writer, name, places, outcome)


def _heading(writer: SheetWriter, name: str, outcome: StudyOutcome) -> None:
    project = outcome.plant.project
    title = f"{name.removeprefix('R ')}: {project.vessel}"
    writer.text(0, 0, title, bold=True, font_size=14, font_color=ACCENT)
    facts = (
        f"Document {project.document_number}, revision {project.revision}, {project.date}. "
        f"Input {outcome.plant.file_name}, digest {outcome.plant.input_digest[:16]}. "
        f"Study {outcome.tool_version}."
    )
    writer.text(1, 0, facts, font_color=QUIET)
    writer.text(2, 0, CAUTION, font_color=QUIET)


def _grid(writer: SheetWriter, grid: VerdictGrid, start: int) -> int:
    """Write subjects against modes and return the next free row."""
    writer.text(start, 0, "Verdicts", bold=True, font_size=12, font_color=ACCENT)
    head = {"bold": True, "font_color": ACCENT, "bg_color": TINT, "text_wrap": True, "bottom": 1}
    writer.text(start + 1, 0, "Subject", **head)
    for c, column in enumerate(grid.columns):
        writer.text(start + 1, c + 1, column, **head)
    for r, subject in enumerate(grid.subjects):
        writer.text(start + 2 + r, 0, subject, bold=True)
        lines = 1
        for c, cell in enumerate(grid.cells[r]):
            text = f"{cell.status}: {cell.figure}" if cell else "nothing to judge"
            look: dict[str, Any] = {"text_wrap": True}
            writer.text(start + 2 + r, c + 1, text, **look)
            lines = max(lines, math.ceil(len(text) / 16))
        writer.set_height(start + 2 + r, 14.0 * lines)
    last = start + 1 + len(grid.subjects)
    if grid.subjects:
        writer.verdict_ranges.append(cell_range(start + 2, 1, last, len(grid.columns)))
    for c in range(len(grid.columns)):
        writer.widths[c + 1] = max(writer.widths.get(c + 1, 0.0), 18.0)
    return last + 3


def _index(writer: SheetWriter, name: str, places: Sequence[Place], start: int) -> None:
    writer.text(start, 0, "On this sheet", bold=True, font_color=ACCENT)
    link = writer.formats.get(font_color=ACCENT, underline=1)
    for i, place in enumerate(places):
        target = f"internal:'{name}'!A{place.title_row + 1}"
        writer.sheet.write_url(start + 1 + i, 0, target, link, place.table.title)


def _together(place: Place) -> list[tuple[int, int]]:
    """Return first and last row of what one page should hold: heading with first rows, and each chart."""
    rows = chart_rows(place.table)
    if not rows:
        return [(place.title_row, min(place.first_row + 1, place.end_row))]
    if not stands_beside(place.table):
        return [(place.title_row, min(place.first_row + 1, place.end_row))]
    tops = range(place.chart_row, place.chart_row + rows, CHART_ROWS)
    return [(place.title_row if top == place.chart_row else top, top + CHART_ROWS - 1) for top in tops]


def _print_setup(writer: SheetWriter, name: str, places: Sequence[Place], outcome: StudyOutcome) -> None:
    sheet, project = writer.sheet, outcome.plant.project
    sheet.set_landscape()
    sheet.set_paper(_A3)
    sheet.set_margins(left=0.5, right=0.5, top=0.6, bottom=0.7)
    only = places[0] if len(places) == 1 and places[0].table.groups else None
    if only:
        starts = [c for c, column in enumerate(only.table.columns) if column.group]
        starts = [c for c in starts if only.table.columns[c].group != only.table.columns[c - 1].group]
        breaks, widest = pages_across(writer.widths, starts)
        sheet.set_v_pagebreaks(breaks)
        sheet.set_print_scale(modes_scale(widest))
    else:
        pages, scale = print_scale(writer.widths.values())
        sheet.fit_to_pages(pages, 0)
        pieces = [piece for place in places for piece in _together(place)]
        sheet.set_h_pagebreaks(pages_down(pieces, writer.heights, scale))
    document = f"{project.document_number} rev. {project.revision}".replace("&", "&&")
    sheet.set_footer(f"&L&8{document}&C&8&A&R&8Page &P of &N")
    if only:
        sheet.freeze_panes(only.first_row, 1)
        sheet.repeat_rows(only.first_row - 2, only.first_row - 1)
        sheet.repeat_columns(0)
    else:
        sheet.freeze_panes(2, 1)
        sheet.repeat_rows(0, 1)
