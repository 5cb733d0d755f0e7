"""How the blank workbook looks: white paper, one accent, dark headings where a value is required."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Final

from study.workbook.columns import Column

if TYPE_CHECKING:
    import xlsxwriter
    from xlsxwriter.format import Format
    from xlsxwriter.worksheet import Worksheet

ACCENT: Final = "#1F4E6B"
TINT: Final = "#E7EEF2"
GREY: Final = "#5F6B73"
LINE: Final = "#C9D3D9"
FONT: Final = "Calibri"
HEADING_HEIGHT: Final = 48
NARROWEST: Final = 8.0
WIDEST: Final = 38.0
WIDEST_PROSE: Final = 80.0
A3: Final = 8
A4: Final = 9
A4_COLUMNS: Final = 12
COLUMNS_PER_PAGE: Final = 22


@dataclass(frozen=True, slots=True, kw_only=True)
class Look:
    """The cell formats of one workbook."""

    title: Format
    hint: Format
    legend: Format
    required: Format
    optional: Format
    remark: Format
    text: Format
    number: Format
    date: Format

    def heading(self, column: Column | None) -> Format:
        """Return the format of a heading."""
        if column is None:
            return self.remark
        return self.required if column.blank == "required" and not column.when else self.optional

    def cell(self, column: Column | None) -> Format:
        """Return the format of the cells under a heading."""
        return self.number if column is not None and column.kind in {"number", "integer"} else self.text


def make_look(book: xlsxwriter.Workbook) -> Look:
    """Add the formats to a workbook."""

    def style(**properties: Any) -> Format:
        return book.add_format({"font_name": FONT, "font_size": 10, **properties})

    heading = {"bold": True, "text_wrap": True, "valign": "vcenter", "align": "center", "bottom": 1}
    cell = {"valign": "vcenter", "bottom": 4, "bottom_color": LINE}
    return Look(
        title=style(bold=True, font_size=16, font_color=ACCENT),
        hint=style(font_color=GREY),
        legend=style(font_color=GREY, italic=True, font_size=9),
        required=style(
            **heading,
            bg_color=ACCENT,
            font_color="#FFFFFF",
            bottom_color=ACCENT,
            right=1,
            right_color="#FFFFFF",
        ),
        optional=style(
            **heading, bg_color=TINT, font_color=ACCENT, bottom_color=ACCENT, right=1, right_color="#FFFFFF"
        ),
        remark=style(**heading, font_color=GREY, bottom_color=LINE),
        text=style(**cell, align="left", indent=1),
        number=style(**cell, align="right", indent=1),
        date=style(**cell, align="left", indent=1, num_format="yyyy-mm-dd"),
    )


def column_width(heading: str, texts: Sequence[str], column: Column | None) -> float:
    """Return the width that holds the longest cell, and the heading over three lines.

    Examples
    --------
    >>> column_width("Board", ["Main switchboard"], None)
    19.0
    """
    words = max(len(word) for word in heading.split())
    longest = max((len(text) for text in texts), default=0)
    wanted = max(NARROWEST, words + 3.0, len(heading) / 3.0 + 3.0, longest + 3.0)
    is_prose = column is not None and column.kind == "text" and column.blank != "required"
    return min(wanted, WIDEST_PROSE if is_prose else WIDEST)


def set_page(sheet: Worksheet, look: Look, header_row: int, columns: int) -> None:
    """Set the header's height, freeze it with the key column, and set up printing on A4 or A3 landscape."""
    sheet.set_row(0, 24)
    sheet.set_row(header_row, HEADING_HEIGHT)
    sheet.freeze_panes(header_row + 1, 1)
    sheet.hide_gridlines(2)
    sheet.set_landscape()
    sheet.set_paper(A4 if columns <= A4_COLUMNS else A3)
    pages_wide = -(-columns // COLUMNS_PER_PAGE)
    sheet.fit_to_pages(pages_wide, 0)
    sheet.repeat_rows(header_row)
    if pages_wide > 1:  # some office suites take long to open a sheet that repeats both rows and columns
        sheet.repeat_columns(0)
    sheet.set_margins(left=0.4, right=0.4, top=0.5, bottom=0.6)
    sheet.set_footer("&L&8&A&R&8&P / &N")
