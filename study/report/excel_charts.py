"""Native charts of the result sheets, beside the numbers that they draw."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from itertools import groupby
from typing import Any, Final

from study.report.excel_sheet import Place
from study.report.style import QUIET, RULE, SERIES
from study.report.tables import Table

_HEIGHT = 300
CHART_ROWS: Final = 17
_MOST_CATEGORIES = 120
_DECAY_S = 0.2
_DASHES = ("solid", "dash", "round_dot", "long_dash_dot")
_MARKERS = ("circle", "square", "triangle", "diamond")


def chart_rows(table: Table) -> int:
    """Return the rows that the charts beside a table need.

    Parameters
    ----------
    table : Table
        The table.

    Returns
    -------
    int
        Rows from the table's title down; 0 where it has no chart.
    """
    if table.n_rows == 0 or table.key not in _CHARTS:
        return 0
    if table.key in _SHORT and table.n_rows > _MOST_CATEGORIES:
        return 0
    whole = _WITHOUT_GAPS.get(table.key)
    if whole and any(isinstance(v, float) and math.isnan(v) for v in table.column(whole)):
        return 0
    blocks = _blocks(table, _BLOCK_KEYS[table.key]) if table.key in _BLOCK_KEYS else [(0, 0)]
    return CHART_ROWS * len(list(blocks))


def stands_beside(table: Table) -> bool:
    """Return whether a table's charts stand to its right; those of short tables stand above their heading."""
    return table.key in _BLOCK_KEYS or table.key == "regulation_curves"


def add_charts(book: Any, sheet: Any, place: Place) -> None:
    """Put the charts of a table above its heading or to its right.

    Parameters
    ----------
    book : xlsxwriter.Workbook
        The workbook.
    sheet : xlsxwriter worksheet
        The table's sheet.
    place : Place
        The table and where it stands.
    """
    if chart_rows(place.table):
        _CHARTS[place.table.key](book, sheet, place)


def _bars(axis: str, *keys: tuple[str, str]) -> Callable[[Any, Any, Place], None]:
    """Return a drawer of a bar chart: first series as bars, the others as marks above the same places."""

    def draw(book: Any, sheet: Any, place: Place) -> None:
        chart = book.add_chart({"type": "column"})
        marks = book.add_chart({"type": "line"})
        for i, (key, name) in enumerate(keys):
            series: dict[str, Any] = {
                "name": name,
                "categories": _span(place, 0, 1),
                "values": _span(place, place.column(key), place.column(key)),
            }
            if i == 0:
                chart.add_series({**series, "fill": {"color": SERIES[0]}, "gap": 60})
            else:
                look = {
                    "type": "long_dash",
                    "size": 12,
                    "border": {"color": SERIES[i]},
                    "fill": {"color": SERIES[i]},
                }
                marks.add_series({**series, "line": {"none": True}, "marker": look})
        if len(keys) > 1:
            chart.combine(marks)
        _dress(chart, place.table.title, "", axis)
        chart.set_x_axis({"num_font": {"size": 8}, "line": {"color": RULE}, "label_position": "low"})
        _insert(sheet, chart, place, width=min(1400, max(620, 34 * place.table.n_rows)))

    return draw


def _voltages(book: Any, sheet: Any, place: Place) -> None:
    chart = book.add_chart({"type": "line"})
    for i, (key, name) in enumerate(
        (("lowest_u_percent", "lowest board"), ("highest_u_percent", "highest board"))
    ):
        chart.add_series(
            {
                "name": name,
                "categories": _span(place, 0, 0),
                "values": _span(place, place.column(key), place.column(key)),
                "line": {"none": True},
                "marker": {
                    "type": ("triangle", "diamond")[i],
                    "size": 8,
                    "fill": {"color": SERIES[i]},
                    "border": {"color": SERIES[i]},
                },
            }
        )
    _dress(chart, "Board voltages of each mode", "", "Voltage [% of nominal]")
    _insert(sheet, chart, place, width=620)


def _boards(book: Any, sheet: Any, place: Place) -> None:
    chart = book.add_chart({"type": "line"})
    chart.add_series(
        {
            "name": "board voltage",
            "categories": _span(place, 0, 1),
            "values": _span(place, place.column("u_percent"), place.column("u_percent")),
            "line": {"none": True},
            "marker": {
                "type": "circle",
                "size": 7,
                "fill": {"color": SERIES[0]},
                "border": {"color": SERIES[0]},
            },
        }
    )
    _dress(chart, "Board voltages", "", "Voltage [% of nominal]")
    chart.set_legend({"none": True})
    _insert(sheet, chart, place, width=min(1400, max(620, 30 * place.table.n_rows)))


def _sharing(book: Any, sheet: Any, place: Place) -> None:
    table = place.table
    for number, (first, last) in enumerate(_blocks(table, _BLOCK_KEYS[table.key])):
        mode, island, adjusted = (table.column(k)[first] for k in _BLOCK_KEYS[table.key])
        for side, (key, tolerance, unit) in enumerate(
            (("dp_kw", "p_tolerance_kw", "kW"), ("dq_kvar", "q_tolerance_kvar", "kvar"))
        ):
            chart = book.add_chart({"type": "scatter", "subtype": "straight"})
            sets = list(_blocks(table, ("genset",), first, last))
            for i, (start, stop) in enumerate(sets):
                name = str(table.column("genset")[start])
                _line(chart, place, (start, stop), ("load_percent", key), name=name, i=i)
            start, stop = sets[0]
            _line(
                chart, place, (start, stop), ("load_percent", tolerance), name="tolerance, either side", i=-1
            )
            title = f"{mode}, {adjusted}: {unit} off the share"
            title += "" if island == "all sets on line" else f" ({island})"
            _dress(chart, title, "Load [% of sum of rated kW]", f"Off the share [{unit}]")
            chart.set_x_axis(
                {**_axis("Load [% of sum of rated kW]"), "min": 0, "max": 100, "label_position": "low"}
            )
            _insert(sheet, chart, place, width=440, down=number, across=side)


def _lines(book: Any, sheet: Any, place: Place) -> None:
    table = place.table
    for number, (first, last) in enumerate(_blocks(table, _BLOCK_KEYS[table.key])):
        chart = book.add_chart({"type": "scatter", "subtype": "straight"})
        for i, (start, stop) in enumerate(_blocks(table, ("genset",), first, last)):
            name = str(table.column("genset")[start])
            _line(chart, place, (start, stop - 1), ("q_kvar", "u_percent"), name=name, i=i)
            _point(chart, place, stop, name=name, i=i)
        _dress(
            chart,
            f"{table.column('mode')[first]}: voltage-kvar lines and operating points",
            "Reactive power [kvar]",
            "Voltage [% of rated]",
        )
        _insert(sheet, chart, place, width=560, down=number)


def _point(chart: Any, place: Place, row: int, *, name: str, i: int) -> None:
    colour = SERIES[i % len(SERIES)]
    x, y = place.column("q_kvar"), place.column("u_percent")
    chart.add_series(
        {
            "name": f"{name}, operating",
            "categories": _span(place, x, x, row, row),
            "values": _span(place, y, y, row, row),
            "line": {"none": True},
            "marker": {
                "type": _MARKERS[i % len(_MARKERS)],
                "size": 9,
                "fill": {"color": colour},
                "border": {"color": colour},
            },
        }
    )


def _regulation(book: Any, sheet: Any, place: Place) -> None:
    table = place.table
    chart = book.add_chart({"type": "scatter", "subtype": "straight"})
    for i, (start, stop) in enumerate(_blocks(table, ("genset",))):
        name = str(table.column("genset")[start])
        for dash, word in enumerate(("without", "with")):
            keys = ("load_percent", f"u_{word}_droop_percent")
            _line(chart, place, (start, stop), keys, name=f"{name}, {word} droop", i=i, dash=dash)
    _dress(chart, table.title, "Load [% of rated]", "Voltage [% of rated]")
    _insert(sheet, chart, place, width=560)


def _inherent(book: Any, sheet: Any, place: Place) -> None:
    table = place.table
    for number, (first, last) in enumerate(_blocks(table, ("genset",))):
        chart = book.add_chart({"type": "scatter", "subtype": "straight"})
        for i, (start, stop) in enumerate(_blocks(table, ("power_factor",), first, last)):
            name = f"power factor {table.column('power_factor')[start]}"
            _line(chart, place, (start, stop), ("current_percent", "u_percent"), name=name, i=i)
        title = f"{table.column('genset')[first]}: voltage against current, constant excitation"
        _dress(chart, title, "Load current [% of rated]", "Voltage [% of rated]")
        _insert(sheet, chart, place, width=560, down=number)


def _decay(book: Any, sheet: Any, place: Place) -> None:
    table = place.table
    for number, (first, last) in enumerate(_blocks(table, _BLOCK_KEYS[table.key])):
        shown = sum(float(t) <= _DECAY_S for t in table.column("time_s")[first : last + 1])  # type: ignore[arg-type]
        chart = book.add_chart({"type": "scatter", "subtype": "straight"})
        for i, (key, name) in enumerate(
            (("envelope_ka", "envelope"), ("iac_ka", "a.c. component, r.m.s."), ("idc_ka", "d.c. component"))
        ):
            _line(chart, place, (first, first + shown - 1), ("time_s", key), name=name, i=i)
        title = f"{table.column('board')[first]}: current against time ({table.column('mode')[first]})"
        _dress(chart, title, "Time [s]", "Current [kA]")
        chart.set_x_axis({**_axis("Time [s]"), "min": 0, "max": _DECAY_S, "label_position": "low"})
        _insert(sheet, chart, place, width=560, down=number)


def _dips(book: Any, sheet: Any, place: Place) -> None:
    table = place.table
    for number, (first, last) in enumerate(_blocks(table, _BLOCK_KEYS[table.key])):
        lines = (
            ("Voltage [% of nominal]", (("u_percent", "board judged"), ("u_worst_percent", "worst board"))),
            ("Frequency [Hz]", (("f_hz", "frequency"),)),
        )
        for side, (axis, series) in enumerate(lines):
            chart = book.add_chart({"type": "scatter", "subtype": "straight"})
            for i, (key, name) in enumerate(series):
                _line(chart, place, (first, last), ("time_s", key), name=name, i=i)
            _dress(chart, str(table.column("case")[first]), "Time [s]", axis)
            _insert(sheet, chart, place, width=440, down=number, across=side)


def _line(
    chart: Any,
    place: Place,
    rows: tuple[int, int],
    keys: tuple[str, str],
    *,
    name: str,
    i: int,
    dash: int = 0,
) -> None:
    """Add one line; series -1 is a limit."""
    x, y = place.column(keys[0]), place.column(keys[1])
    look = {"color": QUIET, "width": 1.25, "dash_type": "dash"}
    if i >= 0:
        kind = _DASHES[(dash + i // len(SERIES)) % len(_DASHES)]
        look = {"color": SERIES[i % len(SERIES)], "width": 1.75, "dash_type": kind}
    chart.add_series(
        {
            "name": name,
            "categories": _span(place, x, x, *rows),
            "values": _span(place, y, y, *rows),
            "line": look,
            "marker": {"type": "none"},
        }
    )


def _blocks(
    table: Table, keys: tuple[str, ...], first: int = 0, last: int | None = None
) -> Iterator[tuple[int, int]]:
    """Yield first and last row of each run of equal values, counted from the table's first row."""
    stop = table.n_rows if last is None else last + 1
    columns = [table.column(key) for key in keys]
    for _, run in groupby(range(first, stop), key=lambda r: tuple(c[r] for c in columns)):
        rows = list(run)
        yield rows[0], rows[-1]


def _span(
    place: Place, first_column: int, last_column: int, first: int = 0, last: int | None = None
) -> list[Any]:
    start = place.first_row
    end = place.last_row if last is None else start + last
    return [place.table.sheet, start + first, first_column, end, last_column]


def _axis(name: str) -> dict[str, Any]:
    return {
        "name": name,
        "name_font": {"size": 9, "bold": False, "color": QUIET},
        "num_font": {"size": 9},
        "num_format": "General",
        "line": {"color": RULE},
        "major_gridlines": {"visible": True, "line": {"color": "#E4E9ED", "width": 0.5}},
    }


def _dress(chart: Any, title: str, x_name: str, y_name: str) -> None:
    chart.set_title({"name": title, "name_font": {"size": 11, "bold": True}, "overlay": False})
    chart.set_x_axis({**_axis(x_name), "label_position": "low"} if x_name else {"num_font": {"size": 9}})
    chart.set_y_axis(_axis(y_name))
    chart.set_legend({"position": "bottom", "font": {"size": 9}})


def _insert(sheet: Any, chart: Any, place: Place, *, width: int, down: int = 0, across: int = 0) -> None:
    chart.set_size({"width": width, "height": _HEIGHT})
    beside = stands_beside(place.table)
    column = len(place.table.columns) + 1 if beside else 0
    offset: dict[str, Any] = {"x_offset": across * (width + 12), "y_offset": 6, "object_position": 3}
    offset["description"] = f"Chart: {place.table.title}"
    sheet.insert_chart(place.chart_row + down * CHART_ROWS, column, chart, offset)


_BLOCK_KEYS: Final[dict[str, tuple[str, ...]]] = {
    "sharing_curves": ("mode", "island", "adjusted"),
    "setting_lines": ("mode", "island"),
    "inherent_curves": ("genset",),
    "fault_decay": ("board",),
    "dips_traces": ("case",),
}
_SHORT: Final = ("load_balance_islands", "set_loading", "boards", "board_ratings")
_WITHOUT_GAPS: Final = {"board_ratings": "rated_peak_ka"}
"""Columns that a chart would show as nought where they hold words."""
_CHARTS: Final[dict[str, Callable[[Any, Any, Place], None]]] = {
    "mode_figures": _voltages,
    "load_balance_islands": _bars(
        "Active power [kW]", ("p_load_kw", "load"), ("p_capacity_kw", "capacity on line")
    ),
    "set_loading": _bars(
        "Engine load [% of rated engine power]",
        ("engine_loading_percent", "engine load"),
        ("minimum_engine_load_percent", "least engine load"),
    ),
    "boards": _boards,
    "sharing_curves": _sharing,
    "setting_lines": _lines,
    "regulation_curves": _regulation,
    "inherent_curves": _inherent,
    "fault_decay": _decay,
    "dips_traces": _dips,
    "board_ratings": _bars(
        "Peak current [kA]", ("limited_peak_ka", "greatest peak"), ("rated_peak_ka", "rated peak withstand")
    ),
}
