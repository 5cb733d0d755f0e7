"""Tables of breakers and fuses against the fault that they must make, break and carry."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Final

from study.report.fault_pieces import DEAD, NOT_GIVEN, SHEET, of_rating, shown, tells, worked_part, worst_rows
from study.report.fault_view import ka_column
from study.report.numbers import figure, percent, quantity
from study.report.tables import (
    Column,
    Table,
    Value,
    Worked,
    WorkedLine,
    cell_column,
    make_table,
    percent_column,
    text_column,
)
from study.results.fault_ratings import DeviceRatings, FaultRatingsResult

_SHOWN: Final = 25
_NOISE: Final = 1e-9
NO_END: Final = "does not clear"
_NONE_USUAL: Final = "none usual"
_OPEN: Final = "not assessed"


def device_tables(ratings: FaultRatingsResult, cells: Mapping[str, str]) -> tuple[Table, ...]:
    """Return the tables of breakers and fuses.

    Parameters
    ----------
    ratings : FaultRatingsResult
        The result.
    cells : mapping of str to str
        Input cells by name.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    return (
        breakers_table(ratings, cells),
        high_voltage_table(ratings, cells),
        carrying_table(ratings, cells),
        fuses_table(ratings, cells),
    )


def _rows_of(ratings: FaultRatingsResult, *rules: str) -> list[tuple[int, int, str]]:
    """Return the worst rows of devices of a kind, the highest duty over rating first."""
    d = ratings.devices
    rows = [row for row in worst_rows(d.worst_mode, ratings.modes) if d.rules[row[0]] in rules]
    return sorted(rows, key=lambda row: _first(_heaviest(d, row[0], row[1]), row[2]))


def _first(part: float, words: str) -> tuple[bool, float]:
    return words == DEAD, -part if math.isfinite(part) else math.inf


def _heaviest(d: DeviceRatings, i: int, m: int) -> float:
    """Return the highest duty over rating of a device; NaN where none is known."""
    parts = (
        of_rating(float(d.peak_ka[i, m]), float(d.making_peak_ka[i])),
        of_rating(float(d.needed_ka[i, m]), float(d.icu_ka[i])),
        of_rating(float(d.asymmetrical_ka[i, m]), float(d.rated_asymmetrical_ka[i])),
    )
    return max((p for p in parts if math.isfinite(p)), default=math.nan)


def _side(d: DeviceRatings, i: int, m: int) -> str:
    return "own branch" if d.through[i, m] else "the rest"


def breakers_table(ratings: FaultRatingsResult, cells: Mapping[str, str]) -> Table:
    """Return every low-voltage breaker in its worst mode: making and breaking."""
    columns = [
        text_column("device", "Breaker"),
        text_column("mode", "Worst mode"),
        text_column("side", "Larger side"),
        ka_column("ik_initial_ka", "I''k", 3, digits=3),
        ka_column("iac_half_ka", "Iac(T/2)", 3, digits=3),
        ka_column("ip_ka", "ip", 3, digits=3, against="icm_ka"),
        ka_column("icm_ka", "Icm", exact=True, missing=NOT_GIVEN),
        text_column("icm_data", "Icm is"),
        percent_column("making_percent", "ip, of Icm", against=100.0, missing=_OPEN),
        Column(key="cos_phi", heading="cos\u00a0φ", most_decimals=3, digits=3, missing="unknown"),
        ka_column("needed_ka", "Capacity needed", 3, digits=3, against="icu_ka"),
        text_column("needed_by", "Needed by"),
        ka_column("icu_ka", "Icu", exact=True, missing=NOT_GIVEN),
        ka_column("ics_ka", "Ics", exact=True, missing=NOT_GIVEN),
        percent_column("breaking_percent", "Needed, of Icu", against=100.0, missing=_OPEN),
        percent_column("service_percent", "Needed, of Ics", against=100.0, missing=_OPEN),
        ka_column("enough_ka", "Enough would be", missing=_NONE_USUAL),
        cell_column(),
    ]
    d = ratings.devices
    rows = _rows_of(ratings, "low-voltage breaker")
    return make_table(
        key="breaker_ratings",
        title="Low-voltage breakers: making and breaking",
        sheet=SHEET,
        columns=columns,
        rows=[_breaker_row(d, i, m, words, cells) for i, m, words in rows],
        notes=(
            "IEC 60947-2. Where the power factor of the fault is below that of the breaker's test, the "
            "capacity needed is the one whose test peak covers ip; else it is Iac(T/2). Nearest to its "
            "ratings first.",
        ),
        worked=_worked_breaker(d, rows),
        group_by=("side",),
        shown_per_group=_SHOWN,
    )


def _breaker_row(d: DeviceRatings, i: int, m: int, words: str, cells: Mapping[str, str]) -> tuple[Value, ...]:
    live = words != DEAD
    peak, needed = float(d.peak_ka[i, m]), float(d.needed_ka[i, m])
    declared = "declared" if d.making_declared[i] else "n × Icu"
    return (
        d.names[i],
        words,
        _side(d, i, m) if live else "",
        *(shown(live, v[i, m]) for v in (d.initial_ka, d.half_ka, d.peak_ka)),
        float(d.making_peak_ka[i]),
        declared if math.isfinite(d.making_peak_ka[i]) else "",
        shown(live, of_rating(peak, float(d.making_peak_ka[i]))),
        shown(live, d.cos_phi[i, m]),
        shown(live, needed),
        ("peak" if d.peak_governs[i, m] else "Iac(T/2)") if live else "",
        float(d.icu_ka[i]),
        float(d.ics_ka[i]),
        shown(live, of_rating(needed, float(d.icu_ka[i]))),
        shown(live, of_rating(needed, float(d.ics_ka[i]))),
        shown(live, d.enough_breaking_ka[i]),
        cells.get(d.names[i], ""),
    )


def _worked_breaker(d: DeviceRatings, rows: Sequence[tuple[int, int, str]]) -> Worked | None:
    """Return a row worked by hand, rather one whose need follows from the peak and a ratio n."""
    plain = None
    for i, m, words in rows:
        needed, icu, peak = float(d.needed_ka[i, m]), float(d.icu_ka[i]), float(d.peak_ka[i, m])
        if words == DEAD or not tells(of_rating(needed, icu)) or needed <= 0:
            continue
        found = worked_part(f"{d.names[i]}, {words}", "Needed, of Icu", needed, icu, "kA")
        ratio = peak / needed
        # A need at the very end of a range of capacities is set by the range and by no ratio.
        if d.peak_governs[i, m] and abs(ratio - round(ratio, 2)) < _NOISE:
            need = WorkedLine(
                label="Capacity needed",
                formula="ip / n of its range",
                figures=f"{figure(peak, 'kA')} / {figure(ratio, '')}",
                result=quantity(needed, "kA"),
            )
            return Worked(row=found.row, lines=(need, *found.lines))
        plain = plain or found
    return plain


def high_voltage_table(ratings: FaultRatingsResult, cells: Mapping[str, str]) -> Table:
    """Return every breaker above 1 kV in its worst mode: making, breaking, direct component."""
    columns = [
        text_column("device", "Breaker"),
        text_column("mode", "Worst mode"),
        text_column("side", "Larger side"),
        ka_column("ip_ka", "ip", 2, digits=3, against="making_ka"),
        ka_column("making_ka", "Rated making", exact=True, missing=NOT_GIVEN),
        percent_column("making_percent", "ip, of making", against=100.0, missing=_OPEN),
        ka_column("iac_half_ka", "Iac(T/2)", digits=3, against="breaking_ka"),
        ka_column("breaking_ka", "Rated breaking", exact=True, missing=NOT_GIVEN),
        Column(key="parting_ms", heading="Contacts part at", unit="ms", most_decimals=1),
        ka_column("parting_ka", "Iac then", digits=3),
        percent_column("dc_percent", "D.c. then", most_decimals=1, against="rated_dc_percent"),
        percent_column("rated_dc_percent", "Rated d.c.", most_decimals=1),
        ka_column("asymmetrical_ka", "Asymmetrical", digits=3, against="rated_asymmetrical_ka"),
        ka_column("rated_asymmetrical_ka", "Rated asymmetrical", missing=NOT_GIVEN),
        percent_column("breaking_percent", "Asymmetrical, of rated", against=100.0, missing=_OPEN),
        ka_column("enough_ka", "Enough would be", missing=_NONE_USUAL),
        cell_column(),
    ]
    d = ratings.devices
    rows = _rows_of(ratings, "medium-voltage breaker")
    return make_table(
        key="high_voltage_breaker_ratings",
        title="Breakers above 1 kV: making, breaking, direct component",
        sheet=SHEET,
        columns=columns,
        rows=[_high_row(d, i, m, words, cells) for i, m, words in rows],
        notes=(
            "IEC 62271-100, from memory. D.c. is idc / (√2 Iac) when the contacts part; above 100 % the "
            "current has no zero and a standard breaker cannot break it.",
        ),
        worked=_worked_high(d, rows),
        group_by=("side",),
        shown_per_group=_SHOWN,
    )


def _high_row(d: DeviceRatings, i: int, m: int, words: str, cells: Mapping[str, str]) -> tuple[Value, ...]:
    live = words != DEAD
    asymmetrical, rated = float(d.asymmetrical_ka[i, m]), float(d.rated_asymmetrical_ka[i])
    return (
        d.names[i],
        words,
        _side(d, i, m) if live else "",
        shown(live, d.peak_ka[i, m]),
        float(d.making_peak_ka[i]),
        shown(live, of_rating(float(d.peak_ka[i, m]), float(d.making_peak_ka[i]))),
        shown(live, d.half_ka[i, m]),
        float(d.icu_ka[i]),
        1000.0 * float(d.parting_s[i]),
        shown(live, d.parting_ka[i, m]),
        shown(live, percent(d.dc_part[i, m])),
        percent(d.rated_dc_part[i]),
        shown(live, asymmetrical),
        rated,
        shown(live, of_rating(asymmetrical, rated)),
        shown(live, d.enough_breaking_ka[i]),
        cells.get(d.names[i], ""),
    )


def _worked_high(d: DeviceRatings, rows: Sequence[tuple[int, int, str]]) -> Worked | None:
    for i, m, words in rows:
        both, rated = float(d.asymmetrical_ka[i, m]), float(d.rated_asymmetrical_ka[i])
        if words != DEAD and tells(of_rating(both, rated)):
            return worked_part(f"{d.names[i]}, {words}", "Asymmetrical, of rated", both, rated, "kA")
    return None


def carrying_table(ratings: FaultRatingsResult, cells: Mapping[str, str]) -> Table:
    """Return every breaker that opens with a delay, in its worst mode: what it carries closed."""
    d = ratings.devices
    columns = [
        text_column("device", "Breaker"),
        text_column("mode", "Worst mode"),
        ka_column("heat_ka", "Equal heating", 3, digits=3, against="icw_ka"),
        Column(key="icw_duration_s", heading="Over", unit="s", most_decimals=2, exact=True,
               missing=NOT_GIVEN),
        ka_column("icw_ka", "Icw", exact=True, missing=NOT_GIVEN),
        percent_column("heat_percent", "Heating, of Icw", against=100.0, missing=_OPEN),
        ka_column("closed_peak_ka", "Peak carried closed", 3, digits=3, against="rated_closed_peak_ka"),
        ka_column("rated_closed_peak_ka", "Peak of Icw", missing=NOT_GIVEN),
        percent_column("peak_percent", "Peak, of that of Icw", against=100.0, missing=_OPEN),
        Column(key="clearing_s", heading="Clears in", unit="s", most_decimals=3, infinite=NO_END,
               missing="unknown"),
        text_column("cleared_by", "By its"),
        cell_column(),
    ]  # fmt: skip
    rows = [
        (d.names[i], words, *_carrying(d, i, m), cells.get(d.names[i], ""))
        for i, m, words in worst_rows(d.worst_mode, ratings.modes)
        if words != DEAD and d.delayed[i, m]
    ]
    return make_table(
        key="short_time_ratings",
        title="Breakers that open with a delay: short-time withstand",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Equal heating: the constant current over the rated duration with the same I²t as the decaying "
            "current until the breaker has cleared. Breakers that open without delay are not asked for it.",
        ),
    )


def _carrying(d: DeviceRatings, i: int, m: int) -> tuple[Value, ...]:
    heat, peak = float(d.heat_ka[i, m]), float(d.closed_peak_ka[i, m])
    return (
        heat,
        float(d.icw_duration_s[i]),
        float(d.icw_ka[i]),
        of_rating(heat, float(d.icw_ka[i])),
        peak,
        float(d.rated_closed_peak_ka[i]),
        of_rating(peak, float(d.rated_closed_peak_ka[i])),
        float(d.clearing_s[i, m]),
        d.stages[int(d.cleared_by[i, m])],
    )


def fuses_table(ratings: FaultRatingsResult, cells: Mapping[str, str]) -> Table:
    """Return every fuse in its worst mode: breaking capacity and cut-off."""
    d = ratings.devices
    columns = [
        text_column("device", "Fuse"),
        text_column("mode", "Worst mode"),
        ka_column("ik_initial_ka", "I''k", 3, digits=3, against="icu_ka"),
        ka_column("icu_ka", "Breaking capacity", exact=True, missing=NOT_GIVEN),
        percent_column("breaking_percent", "I''k, of capacity", against=100.0, missing=_OPEN),
        ka_column("ip_ka", "ip", 3, digits=3),
        ka_column("cut_off_ka", "Cut-off peak", 3, digits=3, missing="no data"),
        ka_column("enough_ka", "Enough would be", missing=_NONE_USUAL),
        cell_column(),
    ]
    rows = [
        (
            d.names[i],
            words,
            shown(words != DEAD, d.initial_ka[i, m]),
            float(d.icu_ka[i]),
            shown(words != DEAD, of_rating(float(d.initial_ka[i, m]), float(d.icu_ka[i]))),
            shown(words != DEAD, d.peak_ka[i, m]),
            shown(words != DEAD, d.cut_off_peak_ka[i, m]),
            shown(words != DEAD, d.enough_breaking_ka[i]),
            cells.get(d.names[i], ""),
        )
        for i, m, words in _rows_of(ratings, "fuse")
    ]
    return make_table(key="fuse_ratings", title="Fuses", sheet=SHEET, columns=columns, rows=rows)
