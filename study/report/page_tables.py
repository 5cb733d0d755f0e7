"""Tables made ready for the page: texts aligned on the decimal point, long tables cut, wide ones split."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from study.report.style import VERDICTS
from study.report.tables import Column, Table, Worked

_MODES_SIDE_BY_SIDE: Final = 2
_PORTRAIT: Final = 125
"""Characters that fit across a portrait page."""
_OPEN_ROWS: Final = 24
"""Rows up to which a table stands open; longer ones are folded and unfold in one click."""
_LINE: Final = 20
"""Characters after which words may break in a narrow column."""
_FIGURE_SPACE, _POINT_SPACE = "\u2007", "\u2008"


@dataclass(frozen=True, slots=True, kw_only=True)
class HeadCell:
    """One heading: words, unit below, and whether words or numbers stand under it."""

    text: str
    unit: str
    css: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One row: its anchor and style, and (style, text) of each cell."""

    anchor: str
    css: str
    cells: tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class FooterLine:
    """A label and one text for each mode of the part."""

    label: str
    texts: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Part:
    """One printed table: a table as a whole, or some of its modes."""

    groups: tuple[tuple[str, int], ...]
    lead: int
    head: tuple[HeadCell, ...]
    rows: tuple[Row, ...]
    footers: tuple[FooterLine, ...]

    @property
    def fold(self) -> str:
        """What the fold of a long part says; empty where the part stands open."""
        if len(self.rows) <= _OPEN_ROWS:
            return ""
        modes = ", ".join(group for group, _ in self.groups)
        return f"{modes + ': ' if modes else ''}{len(self.rows)} rows"


@dataclass(frozen=True, slots=True, kw_only=True)
class TableView:
    """A table as the page shows it."""

    key: str
    title: str
    notes: tuple[str, ...]
    parts: tuple[Part, ...]
    worked: Worked | None
    is_wide: bool
    left_out: str


def table_view(table: Table, *, anchors: Sequence[str] = (), without: Sequence[str] = ()) -> TableView:
    """Return a table as the page shows it.

    Parameters
    ----------
    table : Table
        The table.
    anchors : sequence of str
        One anchor for each row, empty for none.
    without : sequence of str
        Keys of columns that the page leaves to the result sheet.

    Returns
    -------
    TableView
        Ready for a template.
    """
    shown = shown_rows(table)
    columns = [i for i, column in enumerate(table.columns) if column.key not in without]
    cells = {i: _aligned(table, i) for i in columns}
    parts = []
    for groups in _chunks(table.groups):
        chosen = [i for i in columns if table.columns[i].group in ("", *groups)]
        parts.append(_part(table, chosen, shown, cells, groups=groups, anchors=anchors))
    return TableView(
        key=table.key.replace("_", "-"),
        title=table.title,
        notes=table.notes,
        parts=tuple(parts),
        worked=table.worked,
        is_wide=max(_width(part) for part in parts) > _PORTRAIT,
        left_out=_left_out(table, len(shown)),
    )


def _width(part: Part) -> int:
    """Return about how many characters a printed table needs across."""
    width = 0
    for c, head in enumerate(part.head):
        longest = max((len(row.cells[c][1]) for row in part.rows if row.css != "group"), default=0)
        word = max(len(w) for w in (*head.text.split(), head.unit))
        width += max(word, min(longest, _LINE if head.css else longest)) + 2
    return width


def shown_rows(table: Table) -> list[int]:
    """Return the rows that the page shows: the first ones of each group where the table is long.

    Parameters
    ----------
    table : Table
        The table.

    Returns
    -------
    list of int
        Row numbers from 0.
    """
    if table.shown_per_group is None or not table.group_by:
        return list(range(table.n_rows))
    columns = [table.column(key) for key in table.group_by]
    seen: Counter[tuple[object, ...]] = Counter()
    shown = []
    for row in range(table.n_rows):
        group = tuple(column[row] for column in columns)
        if seen[group] < table.shown_per_group:
            shown.append(row)
        seen[group] += 1
    return shown


def _left_out(table: Table, shown: int) -> str:
    if shown == table.n_rows:
        return ""
    groups = " and ".join(table.columns[table.index(key)].heading.lower() for key in table.group_by)
    return (
        f"The first {table.shown_per_group} of each {groups} are shown; all {table.n_rows} rows are on sheet "
        f"{table.sheet} of the workbook."
    )


def _chunks(groups: Sequence[str]) -> list[tuple[str, ...]]:
    if not groups:
        return [()]
    step = _MODES_SIDE_BY_SIDE
    return [tuple(groups[i : i + step]) for i in range(0, len(groups), step)]


def _aligned(table: Table, i: int) -> tuple[str, ...]:
    """Return the cells of a column, padded on the right so that decimal points stand in one line."""
    texts = table.texts(i)
    if table.columns[i].kind != "number":
        return texts
    longest = max((_decimals(t) for t in texts), default=0)
    return tuple(_pad(t, longest) for t in texts)


def _decimals(text: str) -> int:
    return len(text.partition(".")[2]) if text[-1:].isdigit() else 0


def _pad(text: str, longest: int) -> str:
    if not text[-1:].isdigit() or ("." not in text and longest == 0):
        return text
    own = _decimals(text)
    return text + (_POINT_SPACE if own == 0 and longest else "") + _FIGURE_SPACE * (longest - own)


def _part(
    table: Table,
    chosen: list[int],
    shown: list[int],
    cells: dict[int, tuple[str, ...]],
    *,
    groups: tuple[str, ...],
    anchors: Sequence[str],
) -> Part:
    columns = [table.columns[i] for i in chosen]
    rows = []
    for r in shown:
        style = table.style(r)
        if style == "group":
            content: tuple[tuple[str, str], ...] = (("", cells[chosen[0]][r]),)
        else:
            content = tuple(
                (_css(table.columns[i], cells[i][r]), _shown(table.columns[i], cells[i][r])) for i in chosen
            )
        rows.append(Row(anchor=anchors[r] if anchors else "", css=style, cells=content))
    counts = Counter(c.group for c in columns)
    return Part(
        groups=tuple((group, counts[group]) for group in groups),
        lead=counts[""],
        head=tuple(HeadCell(text=c.heading, unit=c.unit, css="t" if c.is_text else "") for c in columns),
        rows=tuple(rows),
        footers=tuple(
            FooterLine(label=f.label, texts=tuple(f.texts.get(group, "") for group in groups))
            for f in table.footers
        ),
    )


def _css(column: Column, text: str) -> str:
    match column.kind:
        case "verdict":
            return f"t v {verdict_css(text)}" if text else "t"
        case "cell":
            return "t c"
        case "long text":
            return "t l"
        case _ if column.is_text:
            return "t s" if column.short else "t"
        case _:
            return ""


def _shown(column: Column, text: str) -> str:
    return verdict_text(text) if column.kind == "verdict" and text else text


def verdict_css(status: str) -> str:
    """Return the style name of a status word; empty for other words."""
    return next((look.css for word, look in VERDICTS.items() if word == status), "")


def verdict_text(status: str) -> str:
    """Return a status word behind its shape."""
    shape = next((look.shape for word, look in VERDICTS.items() if word == status), "")
    return f"{shape} {status}" if shape else status


def turned(table: Table) -> tuple[tuple[str, ...], tuple[tuple[str, str, tuple[str, ...]], ...]]:
    """Return a table with its rows as columns: names of the columns, then (heading, unit, cells) of each row.

    Parameters
    ----------
    table : Table
        A table whose first column names its rows.

    Returns
    -------
    names : tuple of str
        What the rows were called.
    lines : tuple of tuple
        Heading, unit and cells of each of the other columns.
    """
    lines = []
    for i, column in enumerate(table.columns[1:], start=1):
        if column.kind == "cell":
            continue
        texts = table.texts(i)
        lines.append((column.heading, column.unit, tuple(_shown(column, t) for t in texts)))
    return table.texts(0), tuple(lines)
