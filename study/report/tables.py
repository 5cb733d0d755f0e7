"""The table that every output renders: Excel sheets, the HTML page and the JSON file share one definition."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Final, Literal

import numpy as np

from study.report.numbers import (
    NOT_AVAILABLE,
    close_rows,
    column_decimals,
    column_texts,
    decimals_apart,
    exact_decimals,
    judged_decimals,
    number,
    quantity,
    tiny,
)

Value = str | float | int | bool | None
Kind = Literal["text", "long text", "number", "count", "tiny", "judged", "free", "verdict", "cell"]
RowStyle = Literal["", "group", "subtotal", "total"]

SHEETS: Final = (
    "R Summary",
    "R Load balance",
    "R Capacity",
    "R Load flow",
    "R Sharing",
    "R Short-circuit",
    "R Fault ratings",
    "R Grading",
    "R Cables",
    "R Voltage dips",
    "R Assumptions",
)

_SNAKE = re.compile(r"[a-z][a-z0-9]*(_[a-z0-9]+)*")
_NOISE_DECIMALS = 6


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column of a table.

    Attributes
    ----------
    key : str
        Stable name in snake_case with a unit suffix, for example ``p_counted_kw``.
    heading, unit : str
        What the reader sees above the numbers.
    kind : str
        How a value is shown; ``cell`` is an address of an input cell, ``verdict`` a status word, ``tiny``
        a number with a power of ten, ``judged`` a value or its limit whose unit stands in its own row,
        ``free`` a number or words.
    group : str
        Mode that the column belongs to, where a table has columns for each mode.
    most_decimals : int
        Never more decimals than this, but for telling a value from its limit.
    digits : int
        Significant digits of the smallest number, where `most_decimals` allows.
    exact : bool
        Numbers of the input: as many decimals as they were written with.
    against : float or str, optional
        A limit, or the key of the column that holds it: numbers print with enough digits to differ from it.
    infinite, missing : str
        Words for an infinite value and for NaN.
    short : mapping of str to str
        Short forms of long words, for print.
    """

    key: str
    heading: str
    unit: str = ""
    kind: Kind = "number"
    group: str = ""
    most_decimals: int = 2
    digits: int = 4
    exact: bool = False
    against: float | str | None = None
    infinite: str = "infinite"
    missing: str = NOT_AVAILABLE
    short: Mapping[str, str] = field(default_factory=dict)

    @property
    def is_text(self) -> bool:
        """Whether the column holds words."""
        return self.kind in ("text", "long text", "verdict", "cell")

    @property
    def title(self) -> str:
        """Heading with its unit in brackets."""
        return f"{self.heading} [{self.unit}]" if self.unit else self.heading


@dataclass(frozen=True, slots=True, kw_only=True)
class WorkedLine:
    """One step worked by hand: what it is, its formula, the figures put in, the result."""

    label: str
    formula: str
    figures: str
    result: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Worked:
    """One row of a table worked out in full, for the reader who checks by hand."""

    row: str
    lines: tuple[WorkedLine, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Footer:
    """A line under a table with columns for each mode: a label and one text for each mode."""

    label: str
    texts: Mapping[str, str]


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """One table of the study.

    ``values`` is [column][row]: None is a blank, NaN is not available. ``row_styles`` is empty or has one
    entry for each row. ``group_by`` names the columns by which the page shortens a long table to
    ``shown_per_group`` rows each; rows stand in order of importance within it.
    """

    key: str
    title: str
    sheet: str
    columns: tuple[Column, ...]
    values: tuple[tuple[Value, ...], ...]
    notes: tuple[str, ...] = ()
    row_styles: tuple[RowStyle, ...] = ()
    footers: tuple[Footer, ...] = ()
    worked: Worked | None = None
    group_by: tuple[str, ...] = ()
    shown_per_group: int | None = None

    def __post_init__(self) -> None:
        keys = [(c.group, c.key) for c in self.columns]
        if len(set(keys)) != len(keys):
            raise ValueError(f"table {self.key}: a column key stands twice")
        titles = [(c.group, c.title) for c in self.columns]
        if len(set(titles)) != len(titles):
            raise ValueError(f"table {self.key}: a heading stands twice")
        for key in (self.key, *(c.key for c in self.columns)):
            if not _SNAKE.fullmatch(key):
                raise ValueError(f"table {self.key}: {key!r} is not snake_case")
        if len(self.values) != len(self.columns) or len({len(v) for v in self.values}) > 1:
            raise ValueError(f"table {self.key}: columns of unequal length")
        if self.row_styles and len(self.row_styles) != self.n_rows:
            raise ValueError(f"table {self.key}: row styles do not match the rows")

    @property
    def n_rows(self) -> int:
        """Number of rows."""
        return len(self.values[0]) if self.values else 0

    @property
    def groups(self) -> tuple[str, ...]:
        """Modes for which the table has columns, in order."""
        return tuple(dict.fromkeys(c.group for c in self.columns if c.group))

    def index(self, key: str, group: str = "") -> int:
        """Return the position of a column; KeyError where there is none."""
        for i, column in enumerate(self.columns):
            if (column.key, column.group) == (key, group):
                return i
        raise KeyError(key)

    def column(self, key: str, group: str = "") -> tuple[Value, ...]:
        """Return the values of a column."""
        return self.values[self.index(key, group)]

    def rows(self) -> Iterable[tuple[Value, ...]]:
        """Return the rows one after the other."""
        return zip(*self.values, strict=True)

    def style(self, row: int) -> RowStyle:
        """Return the style of a row."""
        return self.row_styles[row] if self.row_styles else ""

    def decimals(self, column: int) -> tuple[int, ...]:
        """Return the decimals of every cell of a number column; other columns have none.

        Parameters
        ----------
        column : int
            Position of the column.

        Returns
        -------
        tuple of int
            One for each row [1].
        """
        own = self.columns[column]
        values = [_float(v) for v in self.values[column]]
        if own.kind == "judged":
            return self._judged_decimals()
        if own.kind != "number":
            return (0,) * len(values)
        against = own.against
        judged_by = [
            (values, [_float(v) for v in self.column(c.key, c.group)])
            for c in self.columns
            if isinstance(c.against, str) and c.against == own.key and c.group == own.group
        ]
        pool = values + [v for pair in judged_by for v in pair[1]]
        if isinstance(against, str):
            limits = [_float(v) for v in self.column(against, own.group)]
            pool = pool + limits
        else:
            limits = [math.nan if against is None else against] * len(values)
        base = column_decimals(pool, own.most_decimals, own.digits)
        if own.exact:
            base = exact_decimals(pool, own.most_decimals)
        if against is None and not judged_by:
            return (base,) * len(values)
        found = [base] * len(values)
        for a, b in [(values, limits), *judged_by]:
            for row in close_rows(a, b, base):
                found[row] = max(found[row], decimals_apart(a[row], b[row], base, _NOISE_DECIMALS))
        return tuple(found)

    def _judged_decimals(self) -> tuple[int, ...]:
        """Return the decimals of the columns ``value`` and ``limit`` of a table of verdicts."""
        judged = zip(self.column("value"), self.column("limit"), self.column("verdict"), strict=True)
        return tuple(
            judged_decimals(_float(value), _float(limit), exceeds=status == "exceeds")
            for value, limit, status in judged
        )

    def texts(self, column: int, decimals: Sequence[int] | None = None) -> tuple[str, ...]:
        """Return a column as the reader sees it.

        Parameters
        ----------
        column : int
            Position of the column.
        decimals : sequence of int, optional
            `decimals` of that column, where they are known already.

        Returns
        -------
        tuple of str
            One text for each row; blanks are empty.
        """
        own = self.columns[column]
        decimals = self.decimals(column) if decimals is None else decimals
        values = self.values[column]
        if own.kind not in ("number", "judged"):
            return tuple(_text(v, own, d) for v, d in zip(values, decimals, strict=True))
        plain = [k for k, v in enumerate(values) if type(v) is float and math.isfinite(v)]
        texts = column_texts([values[k] for k in plain], [decimals[k] for k in plain])  # type: ignore[misc]
        found = dict(zip(plain, texts, strict=True))
        return tuple(
            found[k] if k in found else _text(v, own, d)
            for k, (v, d) in enumerate(zip(values, decimals, strict=True))
        )


def make_table(
    *,
    key: str,
    title: str,
    sheet: str,
    columns: Sequence[Column],
    rows: Iterable[Sequence[Any]],
    **more: Any,
) -> Table:
    """Return a table from its rows; numpy scalars become plain numbers.

    Parameters
    ----------
    key, title, sheet : str
        As in `Table`.
    columns : sequence of Column
        Column definitions.
    rows : iterable of sequence
        One value for each column.
    **more
        Further fields of `Table`.

    Returns
    -------
    Table
        The table.

    Examples
    --------
    >>> column = Column(key="p_kw", heading="Active power", unit="kW")
    >>> make_table(key="t", title="T", sheet="R Summary", columns=[column], rows=[[1.0], [12.5]]).texts(0)
    ('1.00', '12.50')
    """
    plain = [tuple(_plain(v) for v in row) for row in rows]
    for row in plain:
        if len(row) != len(columns):
            raise ValueError(f"table {key}: a row has {len(row)} values for {len(columns)} columns")
    values = tuple(zip(*plain, strict=True)) if plain else tuple(() for _ in columns)
    return Table(key=key, title=title, sheet=sheet, columns=tuple(columns), values=values, **more)


def _plain(value: Any) -> Value:
    if value is None or isinstance(value, (str, bool)):
        return value
    if isinstance(value, np.bool_):
        return bool(value)
    if isinstance(value, (int, np.integer)):
        return int(value)
    return float(value)


def _float(value: Value) -> float:
    if type(value) is float:
        return value
    return float(value) if isinstance(value, (int, float)) and not isinstance(value, bool) else math.nan


def _text(value: Value, column: Column, decimals: int) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, str):
        return column.short.get(value, value)
    if isinstance(value, int) or column.kind == "count":
        return number(float(value), 0 if float(value).is_integer() or not math.isfinite(value) else 1)
    return _number_text(value, column, decimals)


def _number_text(value: float, column: Column, decimals: int) -> str:
    match column.kind:
        case "tiny":
            return tiny(value)
        case "free":
            return quantity(value, "")
        case _:
            return number(value, decimals, column.infinite, column.missing)


def text_column(key: str, heading: str, **more: Any) -> Column:
    """Return a column of words."""
    return Column(key=key, heading=heading, kind=more.pop("kind", "text"), **more)


def percent_column(key: str, heading: str, **more: Any) -> Column:
    """Return a column of percentages with one decimal as a rule."""
    return Column(key=key, heading=heading, unit="%", most_decimals=more.pop("most_decimals", 1), **more)


def verdict_column() -> Column:
    """Return the column of status words."""
    return Column(key="verdict", heading="Verdict", kind="verdict")


def cell_column() -> Column:
    """Return the column of governing input cells."""
    return Column(key="input_cell", heading="Input cell", kind="cell")
