"""Tables of what clears: devices against the least fault, cables against the heat until it is cleared."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Final

import numpy as np

from study.report.fault_pieces import DEAD, SHEET, of_rating, shown, tells, worked_part, worst_rows
from study.report.numbers import figure, quantity
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
from study.report.tables_fault_devices import NO_END
from study.results.fault_ratings import CableRatings, ClearingRatings, FaultRatingsResult

_SHOWN: Final = 25
_CABLES_SHOWN: Final = 6
_KINDS: Final = {"three-phase": "three\u2011phase", "two-phase": "two\u2011phase"}
"""Words that do not break at their hyphen."""
_NONE_USUAL: Final = "none usual"
_SOURCES_BLOCK: Final = -2
"""Where `ClearingRatings.by` says that the sources end the fault by themselves."""
_OPEN: Final = "not assessed"


def clearing_table(ratings: FaultRatingsResult, cells: Mapping[str, str]) -> Table:
    """Return every device in the mode where its least fault is hardest to clear."""
    c = ratings.clearing
    columns = [
        text_column("device", "Device"),
        text_column("mode", "Worst mode"),
        text_column("result", "Result"),
        text_column("cleared_by", "Cleared by"),
        Column(key="first_a", heading="Least fault at its start", unit="A", most_decimals=0),
        Column(key="least_a", heading="When the stage is due", unit="A", most_decimals=0,
               against="pick_up_a"),
        text_column("least_kind", "Fault", short=_KINDS),
        Column(key="pick_up_a", heading="Pick-up, with tolerance", unit="A", most_decimals=0,
               missing="none"),
        Column(key="least_to_pick_up", heading="Least fault / pick-up", most_decimals=2, against=1.0,
               missing="n/a"),
        text_column("stage", "Stage"),
        Column(key="clearing_s", heading="Cleared in", unit="s", most_decimals=3, infinite=NO_END),
        Column(key="due_s", heading="Stage is due at", unit="s", most_decimals=3, infinite="never",
               missing="unknown"),
        Column(key="one_set_a", heading="With one set left", unit="A", most_decimals=0),
        Column(key="holds_s", heading="Current is kept up for", unit="s", most_decimals=2,
               infinite="no end known", missing="unknown"),
        cell_column(),
    ]  # fmt: skip
    rows = [
        _clearing_row(c, i, m, ratings.modes[m], cells)
        for i, m in sorted(_hardest(c), key=lambda at: _clearing_rank(c, *at))
    ]
    return make_table(
        key="fault_clearing",
        title="Devices against the least fault at the far end of what they protect",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Minimum case. A current that collapses, as of a set that takes its field from its own "
            "terminals, may start a delayed stage and be gone before it opens. What does not clear stands "
            "first. With one set left: the least current when the device's setting for high currents has "
            "cleared, after the loss of all supplies of the island but the one that gives least; below the "
            "pick-up, the device does not see its least fault until sets are back. It judges nothing.",
        ),
        worked=_worked_clearing(c, rows),
        group_by=("result",),
        shown_per_group=_SHOWN,
    )


def _clearing_rank(c: ClearingRatings, i: int, m: int) -> tuple[bool, float]:
    ratio = float(c.least_a[i, m]) / float(c.pick_up_a[i, m]) if c.pick_up_a[i, m] > 0 else math.inf
    return bool(c.clears[i, m]), ratio if math.isfinite(ratio) else math.inf


def _hardest(c: ClearingRatings) -> list[tuple[int, int]]:
    """Return each judged device with its hardest mode."""
    found = []
    for i in range(len(c.names)):
        modes = np.flatnonzero(c.judged[i]).tolist()
        if modes:
            found.append((i, min(modes, key=lambda m: _clearing_rank(c, i, m))))
    return found


def _clearing_row(
    c: ClearingRatings, i: int, m: int, mode: str, cells: Mapping[str, str]
) -> tuple[Value, ...]:
    least, pick_up = float(c.least_a[i, m]), float(c.pick_up_a[i, m])
    known = math.isfinite(pick_up) and pick_up > 0
    return (
        c.names[i],
        mode,
        "clears" if c.clears[i, m] else NO_END,
        _clears_words(c, i, m),
        float(c.first_a[i, m]),
        least,
        c.kinds[i][m],
        pick_up if known else math.nan,
        least / pick_up if known else math.nan,
        c.stages[int(c.stage[i, m])],
        float(c.clearing_s[i, m]),
        float(c.due_s[i, m]),
        shown(math.isfinite(c.one_set_a[i, m]), c.one_set_a[i, m]),
        float(c.holds_s[i, m]),
        cells.get(c.names[i], ""),
    )


def _clears_words(c: ClearingRatings, i: int, m: int) -> str:
    by = int(c.by[i, m])
    if by == _SOURCES_BLOCK:
        return "its sources, which block"
    if by < 0 or not c.clears[i, m]:
        return "nothing"
    return "itself" if by == i else f"{c.names[by]}, as backup"


def _worked_clearing(c: ClearingRatings, rows: Sequence[tuple[Value, ...]]) -> Worked | None:
    for row in rows:
        least, pick_up, ratio = row[5], row[7], row[8]
        if all(isinstance(v, float) and math.isfinite(v) for v in (least, pick_up, ratio)):
            line = WorkedLine(
                label="Least fault / pick-up",
                formula="least fault / pick-up",
                figures=f"{figure(float(least or 0), 'A')} / {figure(float(pick_up or 0), 'A')}",
                result=quantity(float(ratio or 0), ""),
            )
            return Worked(row=f"{row[0]}, {row[1]}", lines=(line,))
    return None


def cables_table(ratings: FaultRatingsResult, cells: Mapping[str, str]) -> Table:
    """Return every cable in its worst mode against the heat of a fault."""
    k = ratings.cables
    columns = [
        text_column("cable", "Cable"),
        text_column("mode", "Worst mode"),
        Column(key="heat_ka2s", heading="I²t until cleared", unit="kA²s", most_decimals=3, digits=3,
               against="withstand_ka2s", infinite=NO_END, missing="unknown"),
        Column(key="withstand_ka2s", heading="k²S²", unit="kA²s", most_decimals=3, digits=3,
               missing="no section"),
        percent_column("heat_percent", "I²t, of k²S²", against=100.0, infinite=NO_END, missing=_OPEN),
        Column(key="end_degc", heading="Conductor at the end", unit="°C", most_decimals=0,
               missing="unknown"),
        text_column("device", "Cleared by device"),
        text_column("stage", "By its"),
        Column(key="clearing_s", heading="In", unit="s", most_decimals=3, infinite=NO_END,
               missing="unknown"),
        text_column("data", "I²t is"),
        Column(key="far_heat_ka2s", heading="I²t of the least fault", unit="kA²s", most_decimals=3,
               digits=3, missing="not in 5 s"),
        Column(key="enough_mm2", heading="Enough would be", unit="mm²", most_decimals=1,
               missing=_NONE_USUAL),
        cell_column(),
    ]  # fmt: skip
    rows = sorted(worst_rows(k.worst_mode, ratings.modes), key=lambda row: _heat_rank(k, *row))
    return make_table(
        key="cable_heat",
        title="Cables against the heat of a fault",
        sheet=SHEET,
        columns=columns,
        rows=[_cable_row(ratings, i, m, words, cells) for i, m, words in rows],
        notes=(
            "Adiabatic, from the temperature of the conductor in service; the decaying current with its "
            "direct component until the device has cleared at the far end of its tolerance. A cable "
            "without a device is not assessed.",
        ),
        worked=_worked_cable(k, rows),
        group_by=("mode",),
        shown_per_group=_CABLES_SHOWN,
    )


def _heat_rank(k: CableRatings, i: int, m: int, words: str) -> tuple[bool, float]:
    part = of_rating(float(k.heat_a2s[i, m]), float(k.withstand_a2s[i]))
    return words == DEAD, math.inf if math.isnan(part) else -part


def _cable_row(
    ratings: FaultRatingsResult, i: int, m: int, words: str, cells: Mapping[str, str]
) -> tuple[Value, ...]:
    k = ratings.cables
    live = words != DEAD
    heat, withstand = float(k.heat_a2s[i, m]), float(k.withstand_a2s[i])
    device = int(k.device[i, m])
    known = live and device >= 0
    return (
        k.names[i],
        words,
        shown(live, heat / 1e6),
        withstand / 1e6,
        shown(live, of_rating(heat, withstand)),
        shown(live, k.end_degc[i, m]),
        ratings.clearing.names[device] if known else "none",
        k.stages[int(k.cleared_by[i, m])] if known else "",
        shown(known, k.clearing_s[i, m]),
        ("let through, by the maker" if k.let_through[i, m] else "decaying current") if known else "",
        shown(known, k.far_heat_a2s[i, m] / 1e6),
        shown(live, k.enough_mm2[i]),
        cells.get(k.names[i], ""),
    )


def _worked_cable(k: CableRatings, rows: Sequence[tuple[int, int, str]]) -> Worked | None:
    for i, m, words in rows:
        heat, withstand = float(k.heat_a2s[i, m]) / 1e6, float(k.withstand_a2s[i]) / 1e6
        if words != DEAD and tells(of_rating(heat, withstand)):
            return worked_part(f"{k.names[i]}, {words}", "I²t, of k²S²", heat, withstand, "kA²s")
    return None
