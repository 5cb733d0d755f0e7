"""Table of transformers and reactors against the fault behind them."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

from study.report.fault_pieces import (
    DEAD,
    NOT_GIVEN,
    SHEET,
    of_rating,
    shown,
    tells,
    worked_part,
    worst_rows,
)
from study.report.fault_view import ka_column
from study.report.tables import (
    Column,
    Table,
    Value,
    Worked,
    cell_column,
    make_table,
    percent_column,
    text_column,
)
from study.results.fault_ratings import FaultRatingsResult

_OPEN = "not assessed"


def through_table(ratings: FaultRatingsResult, cells: Mapping[str, str]) -> Table:
    """Return every transformer and reactor in its worst mode.

    Parameters
    ----------
    ratings : FaultRatingsResult
        Currents and what is withstood.
    cells : mapping of str to str
        Input cell of each piece.

    Returns
    -------
    Table
        One row for each pair of windings or direction.
    """
    t = ratings.through
    columns = [
        text_column("equipment", "Transformer or reactor"),
        text_column("kind", "Kind"),
        text_column("behind", "Fault on"),
        text_column("mode", "Worst mode"),
        ka_column("ik_initial_ka", "I''k through it", 3, digits=3),
        ka_column("heat_ka", "Equal heating", 3, digits=3, against="withstand_ka"),
        Column(key="duration_s", heading="Over", unit="s", most_decimals=2, exact=True, missing=NOT_GIVEN),
        ka_column("withstand_ka", "Withstands", 3, digits=3, missing=NOT_GIVEN),
        percent_column("heat_percent", "Heating, of withstood", against=100.0, missing=_OPEN),
        ka_column("peak_ka", "Peak through it", 2, against="rated_peak_ka"),
        ka_column("rated_peak_ka", "Peak withstood", 2, missing=NOT_GIVEN),
        percent_column("peak_percent", "Peak, of withstood", against=100.0, missing=_OPEN),
        text_column("device", "Cleared by"),
        Column(
            key="clearing_s",
            heading="In",
            unit="s",
            most_decimals=3,
            infinite="no end known",
            missing="unknown",
        ),
        cell_column(),
    ]
    rows = worst_rows(t.worst_mode, ratings.modes)
    return make_table(
        key="through_faults",
        title="Transformers and reactors against the fault behind them",
        sheet=SHEET,
        columns=columns,
        rows=[_row(ratings, i, m, words, cells) for i, m, words in rows],
        notes=(
            "At the voltage of the faulted side. A transformer withstands its rated current over its "
            "short-circuit voltage for 2 s (IEC 60076-5, from memory), and the first peak that goes with its "
            "own X/R; a reactor what its row gives. Without a device that stands on it and sees the fault, "
            "or without a rating, nothing is assessed. Short-time ratings of current transformers are no "
            "input: they are not assessed.",
        ),
        worked=_worked(ratings, rows),
    )


def _row(
    ratings: FaultRatingsResult, i: int, m: int, words: str, cells: Mapping[str, str]
) -> tuple[Value, ...]:
    t = ratings.through
    live = words != DEAD
    heat, peak = float(t.heat_ka[i, m]), float(t.peak_ka[i, m])
    if live and t.rests_on_unknown[i, m]:
        heat = math.nan
    device = int(t.device[i, m])
    return (
        t.names[i],
        f"{t.words[i]} winding" if t.words[i] else t.kinds[i],
        t.behind[i],
        words,
        shown(live, t.initial_ka[i, m]),
        shown(live, heat),
        float(t.duration_s[i]),
        float(t.withstand_ka[i]),
        shown(live, of_rating(heat, float(t.withstand_ka[i]))),
        shown(live, peak),
        float(t.rated_peak_ka[i]),
        shown(live, of_rating(peak, float(t.rated_peak_ka[i]))),
        ratings.clearing.names[device] if live and device >= 0 else "",
        shown(live and device >= 0, t.clearing_s[i, m]),
        cells.get(t.names[i], ""),
    )


def _worked(ratings: FaultRatingsResult, rows: Sequence[tuple[int, int, str]]) -> Worked | None:
    t = ratings.through
    for i, m, words in rows:
        value, rating = float(t.peak_ka[i, m]), float(t.rated_peak_ka[i])
        if words != DEAD and tells(of_rating(value, rating)):
            return worked_part(f"{t.names[i]}, {words}", "Peak, of withstood", value, rating, "kA")
    return None
