"""One result sheet: tables one under the other, each with notes and its worked-out row."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import lru_cache
from typing import Any, Final

from study.issues import StudyError
from study.report.excel_formats import Formats, padded_format, row_look
from study.report.style import ACCENT, QUIET, RULE, TINT, VERDICTS
from study.report.tables import Column, Table

FIRST_ROW: Final = 4
LAST_ROW: Final = 1_048_576
MOST_LINKS: Final = 65_000
"""On a sheet; a spreadsheet program takes 65 530, and the writer would leave out the cells beyond."""
_WIDEST_TEXT = 26
_WIDEST_LONG_TEXT = 44
_NARROWEST = 7.5
_LINE_POINTS = 13.5


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """Where a table stands on its sheet; rows are counted from 0."""

    table: Table
    title_row: int
    chart_row: int
    first_row: int
    last_row: int
    end_row: int

    def column(self, key: str, group: str = "") -> int:
        """Return the position of a column."""
        return self.table.index(key, group)


def layout(
    tables: Sequence[Table], start: int, above: Mapping[str, int], beside: Mapping[str, int]
) -> list[Place]:
    """Return where each table stands; charts keep their rows free.

    Parameters
    ----------
    tables : sequence of Table
        In the order of the sheet.
    start : int
        First free row.
    above, beside : mapping of str to int
        Rows that the charts between a table's notes and its heading, and to its right, need, by its key.

    Returns
    -------
    list of Place
        One for each table.
    """
    places = []
    row = start
    for table in tables:
        chart_row = row + 1 + len(table.notes)
        first = chart_row + above.get(table.key, 0) + (2 if table.groups else 1)
        last = first + max(1, table.n_rows) - 1
        worked = 1 + len(table.worked.lines) if table.worked else 0
        end = max(last + len(table.footers) + worked, chart_row + beside.get(table.key, 0))
        places.append(
            Place(
                table=table, title_row=row, chart_row=chart_row, first_row=first, last_row=last, end_row=end
            )
        )
        row = end + 3
    if row > LAST_ROW:
        raise StudyError(
            f"the sheet {tables[0].sheet} would need {row} rows, more than a sheet can have; "
            "let one row stand for equal loads, or study fewer modes at a time"
        )
    return places


@dataclass
class _Looks:
    """The formats of one column, each asked for once; ``most`` is the largest number of decimals."""

    formats: Formats
    column: Column
    first: bool
    most: int
    known: dict[tuple[str, str, int], Any] = field(default_factory=dict)

    def get(self, kind: str, style: str, detail: int = 0) -> Any:
        """Return a format; the detail is the decimals of a number, and 1 for words that wrap."""
        key = kind, style, detail
        if key not in self.known:
            self.known[key] = self.formats.get(**self._properties(kind, detail), **row_look(style))
        return self.known[key]

    def _properties(self, kind: str, detail: int) -> dict[str, Any]:
        match kind:
            case "blank":
                return {}
            case "link":
                return {"font_color": ACCENT, "underline": 1, "align": "left", "indent": 1}
            case "number":
                return {"num_format": padded_format(detail, self.most, self.column)}
        if not self.column.is_text:
            return {"align": "right", "font_color": QUIET}
        wrap = {"text_wrap": True} if detail else {}
        return {"align": "left", "indent": 0 if self.first else 1, **wrap}


@dataclass
class SheetWriter:
    """Writes tables to one sheet and remembers what the widths and the colours need.

    Attributes
    ----------
    sheet : xlsxwriter worksheet
        The sheet.
    formats : Formats
        Cell formats of the workbook.
    widths : dict
        Characters that each column has to hold.
    texts, decimals : dict
        The cells of each measured table as text, and their decimals, by its key.
    links : int
        How many cells are links by now.
    heights : dict
        Points of each row that does not have the usual ones.
    verdict_ranges : list of str
        Ranges with status words.
    """

    sheet: Any
    formats: Formats
    widths: dict[int, float] = field(default_factory=dict)
    texts: dict[str, list[tuple[str, ...]]] = field(default_factory=dict)
    decimals: dict[str, list[tuple[int, ...]]] = field(default_factory=dict)
    links: int = 0
    heights: dict[int, float] = field(default_factory=dict)
    verdict_ranges: list[str] = field(default_factory=list)

    def text(self, row: int, column: int, text: str, **properties: Any) -> None:
        """Write words; what looks like a formula stays words."""
        self.sheet.write_string(row, column, text, self.formats.get(**properties))

    def set_height(self, row: int, points: float) -> None:
        """Give a row a height of its own."""
        self.heights[row] = points
        self.sheet.set_row(row, points)

    def measure(self, table: Table, *, alone: bool = False) -> None:
        """Widen the columns to what a table needs; to be done for all tables before the first is written.

        A table that is `alone` on its sheet may have a wider first column.
        """
        decimals = [table.decimals(c) for c in range(len(table.columns))]
        texts = [table.texts(c, decimals[c]) for c in range(len(table.columns))]
        self.texts[table.key], self.decimals[table.key] = texts, decimals
        for c, column in enumerate(table.columns):
            longest = max((len(t) for t in texts[c]), default=0)
            wide = column.kind == "long text" or (alone and c == 0)
            most = _WIDEST_LONG_TEXT if wide else _WIDEST_TEXT
            word = max(len(word) for word in column.title.split())
            least = max(_NARROWEST, word + 2.0)
            self.widths[c] = max(self.widths.get(c, 0.0), least, min(longest + 2.5, most))

    def write(self, place: Place) -> None:
        """Write a table with its notes, footers and worked-out row."""
        table = place.table
        self.text(place.title_row, 0, table.title, bold=True, font_size=12, font_color=ACCENT)
        for i, note in enumerate(table.notes):
            self.text(place.title_row + 1 + i, 0, note, italic=True, font_color=QUIET)
        if table.n_rows == 0:
            self.text(place.first_row, 0, "none", font_color=QUIET)
            return
        for c, column in enumerate(table.columns):
            self._column(place, c, column)
        if table.groups or table.row_styles:
            self._plain_header(place)
        else:
            self._excel_table(place)
        self._heights(place)
        self._footers(place)
        self._worked(place)

    def _column(self, place: Place, c: int, column: Column) -> None:
        table, row = place.table, place.first_row
        decimals, texts = self.decimals[table.key][c], self.texts[table.key][c]
        looks = _Looks(formats=self.formats, column=column, first=c == 0, most=max(decimals, default=0))
        wide = self.widths[c] - 1.5
        cells: list[tuple[float | str | None, Any]] = []
        linked: list[tuple[int, str, Any]] = []
        for r, value in enumerate(table.values[c]):
            style = table.row_styles[r] if table.row_styles else ""
            if value is None or value == "":
                cells.append((None, looks.get("blank", style)))
            elif column.kind == "cell" and self.links + len(linked) < MOST_LINKS:
                linked.append((r, str(value), looks.get("link", style)))
                cells.append((None, linked[-1][2]))
            elif isinstance(value, (int, float)) and not isinstance(value, bool) and math.isfinite(value):
                cells.append((value, looks.get("number", style, decimals[r])))
            else:
                cells.append((texts[r], looks.get("words", style, int(len(texts[r]) > wide))))
        self.sheet.fill_column(row, c, cells)
        for r, value, look in linked:
            self.sheet.write_url(row + r, c, internal_link(value), look, value)
        self.links += len(linked)
        if column.kind == "verdict":
            self.verdict_ranges.append(cell_range(place.first_row, c, place.last_row, c))

    def _room(self, c: int) -> int:
        """Return the characters that stand side by side in a column."""
        return max(4, int(self.widths[c] - 0.5))

    def _lines(self, text: str, c: int) -> int:
        """Return the lines that a text takes in its column."""
        width = self._room(c)
        return 1 if len(text) <= width else _wrapped_lines(text, width)

    def _heights(self, place: Place) -> None:
        """Set the heights of the heading and of rows with long text."""
        table, texts = place.table, self.texts[place.table.key]
        lines = max(self._lines(column.title, c) for c, column in enumerate(table.columns))
        self.set_height(place.first_row - 1, _LINE_POINTS * lines + 3)
        most = [1] * table.n_rows
        for c in (c for c, column in enumerate(table.columns) if column.is_text):
            room = self._room(c)
            for r, text in enumerate(texts[c]):
                if len(text) > room:
                    most[r] = max(most[r], self._lines(text, c))
        for r, needed in enumerate(most):
            if needed > 1 and table.style(r) != "group":
                self.set_height(place.first_row + r, _LINE_POINTS * needed + 2)

    def _header_format(self, column: Column, *, first: bool) -> Any:
        return self.formats.get(
            bold=True,
            text_wrap=True,
            valign="bottom",
            align="left" if column.is_text else "right",
            indent=1 if column.is_text and not first else 0,
            font_color=ACCENT,
            bg_color=TINT,
            bottom=1,
            bottom_color=ACCENT,
        )

    def _excel_table(self, place: Place) -> None:
        table = place.table
        self.sheet.add_table(
            place.first_row - 1,
            0,
            place.last_row,
            len(table.columns) - 1,
            {
                "name": f"R_{table.key}",
                "style": None,
                "columns": [
                    {"header": c.title, "header_format": self._header_format(c, first=i == 0)}
                    for i, c in enumerate(table.columns)
                ],
            },
        )

    def _plain_header(self, place: Place) -> None:
        table = place.table
        for c, column in enumerate(table.columns):
            look = self._header_format(column, first=c == 0)
            self.sheet.write_string(place.first_row - 1, c, column.title, look)
        for group in table.groups:
            at = [c for c, column in enumerate(table.columns) if column.group == group]
            look = self.formats.get(
                bold=True, align="left", font_color="#FFFFFF", bg_color=ACCENT, left=1, left_color=RULE
            )
            self.sheet.merge_range(place.first_row - 2, at[0], place.first_row - 2, at[-1], "", look)
            self.sheet.write_string(place.first_row - 2, at[0], group, look)

    def _footers(self, place: Place) -> None:
        table = place.table
        for i, footer in enumerate(table.footers):
            row = place.last_row + 1 + i
            self.text(row, 0, footer.label, bold=True, text_wrap=True)
            for group in table.groups:
                at = [c for c, column in enumerate(table.columns) if column.group == group]
                look = self.formats.get(text_wrap=True, left=1, left_color=RULE)
                text = footer.texts.get(group, "")
                self.sheet.merge_range(row, at[0], row, at[-1], "", look)
                self.sheet.write_string(row, at[0], text, look)
            at = [c for c, column in enumerate(table.columns) if column.group == table.groups[0]]
            room = sum(self.widths[c] for c in at)
            widest = max((len(t) for t in footer.texts.values()), default=0)
            lines = max(math.ceil(widest / room), self._lines(footer.label, 0))
            self.set_height(row, _LINE_POINTS * lines + 2)

    def _worked(self, place: Place) -> None:
        worked = place.table.worked
        if worked is None:
            return
        row = place.last_row + len(place.table.footers) + 1
        self.text(row, 0, f"Worked out: {worked.row}", italic=True, font_color=QUIET)
        for i, line in enumerate(worked.lines):
            whole = f"{line.label} = {line.formula} = {line.figures} = {line.result}"
            self.text(row + 1 + i, 0, whole, font_color=QUIET)

    def finish(self) -> None:
        """Set column widths and the colours of the verdicts."""
        for c, width in self.widths.items():
            self.sheet.set_column(c, c, width)
        for cells in self.verdict_ranges:
            for status, look in VERDICTS.items():
                self.sheet.conditional_format(
                    cells,
                    {
                        "type": "text",
                        "criteria": "begins with",
                        "value": status,
                        "format": self.formats.colours(look),
                    },
                )


@lru_cache(maxsize=10_000)
def _wrapped_lines(text: str, width: int) -> int:
    return len(textwrap.wrap(text, width))


def internal_link(cell: str) -> str:
    """Return the hyperlink of an address such as ``Shore supplies!C4``.

    Parameters
    ----------
    cell : str
        Sheet and cell; the sheet may stand in quotes.

    Returns
    -------
    str
        The link in the form that XlsxWriter takes.

    Examples
    --------
    >>> internal_link("Shore supplies!C4")
    "internal:'Shore supplies'!C4"
    """
    sheet, _, address = cell.rpartition("!")
    if sheet.startswith("'") and sheet.endswith("'"):
        sheet = sheet[1:-1].replace("''", "'")
    quoted = sheet.replace("'", "''")
    return f"internal:'{quoted}'!{address}"


def cell_range(first_row: int, first_column: int, last_row: int, last_column: int) -> str:
    """Return a range in letters and numbers; rows and columns are counted from 0."""
    from xlsxwriter.utility import xl_range

    return str(xl_range(first_row, first_column, last_row, last_column))
