"""The governing figures of every mode side by side, for the reader who compares modes."""

from __future__ import annotations

import math
from collections.abc import Iterable

import numpy as np

from study.checks.verdict import worst
from study.report.content import StudyOutcome
from study.report.numbers import percent
from study.report.tables import Column, Table, Value, cell_column, make_table, percent_column, text_column
from study.report.tables_sources import NO_SET
from study.results.arrays import FloatArray
from study.results.balance import ModeBalance
from study.results.load_flow import ModeLoadFlow


def modes_table(outcome: StudyOutcome) -> Table:
    """Return one row of governing figures for each mode.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    Table
        Modes down, figures across.
    """
    columns = [
        text_column("mode", "Mode"),
        text_column("description", "Description", kind="long text"),
        text_column("sources_on_line", "Sources on line", kind="long text"),
        Column(key="p_total_kw", heading="Load", unit="kW", most_decimals=1),
        Column(key="q_total_kvar", heading="Load", unit="kvar", most_decimals=1),
        Column(key="s_total_kva", heading="Load", unit="kVA", most_decimals=1),
        percent_column("kw_loading_percent", "Highest kW loading on line", infinite=NO_SET),
        percent_column("kva_loading_percent", "Highest kVA loading on line", infinite=NO_SET),
        percent_column("lowest_engine_loading_percent", "Lowest engine load"),
        text_column("solution", "Load flow"),
        Column(key="lowest_f_hz", heading="Lowest frequency", unit="Hz", most_decimals=3),
        percent_column("lowest_u_percent", "Lowest board voltage", most_decimals=2),
        text_column("lowest_u_board", "Lowest at board"),
        percent_column("highest_u_percent", "Highest board voltage", most_decimals=2),
        text_column("highest_u_board", "Highest at board"),
        percent_column("largest_drop_percent", "Largest voltage drop", most_decimals=2),
        text_column("largest_drop_consumer", "Largest drop at consumer"),
        percent_column("largest_cable_loading_percent", "Most loaded cable"),
        text_column("most_loaded_cable", "Most loaded cable"),
        Column(key="exceeding_count", heading="Limits exceeded", kind="count"),
        Column(key="not_assessed_count", heading="Not assessed", kind="count"),
        Column(key="verdict", heading="Verdict", kind="verdict"),
        cell_column(),
    ]
    flows = {mode.mode: mode for mode in outcome.load_flow.modes}
    cells = {mode.name: mode.cell for mode in outcome.plant.modes}
    descriptions = {mode.name: mode.description for mode in outcome.plant.modes}
    rows = [
        (
            mode.mode,
            descriptions.get(mode.mode, ""),
            *_balance_figures(mode),
            *_flow_figures(flows.get(mode.mode)),
            *_verdict_figures(outcome, mode.mode),
            cells.get(mode.mode, ""),
        )
        for mode in outcome.balance.modes
    ]
    return make_table(
        key="mode_figures",
        title="Governing figures of every mode",
        sheet="R Capacity",
        columns=columns,
        rows=rows,
    )


def _balance_figures(mode: ModeBalance) -> tuple[Value, ...]:
    running = [s for s in mode.sets if s.state == "on"]
    return (
        ", ".join(s.name for s in running) or "none",
        mode.p_total_kw,
        mode.q_total_kvar,
        mode.s_total_kva,
        percent(_largest(island.kw_loading for island in mode.islands)),
        percent(_largest(island.kva_loading for island in mode.islands)),
        percent(-_largest(-s.engine_loading for s in running)),
    )


def _largest(values: Iterable[float]) -> float:
    known = [v for v in values if not math.isnan(v)]
    return max(known, default=math.nan)


def _flow_figures(mode: ModeLoadFlow | None) -> tuple[Value, ...]:
    if mode is None or not mode.solved:
        return ("no solution", *[None] * 9)
    boards, terminals, branches = mode.boards, mode.terminals, mode.branches
    u_pu = np.where(boards.energised, boards.u_v / boards.u_nominal_v, np.nan)
    is_cable = np.array([kind == "cable" for kind in branches.kinds], dtype=bool)
    cable_loading = np.where(is_cable, branches.loading, np.nan)
    return (
        "solved",
        -_largest(-island.f_hz for island in mode.islands),
        *_extreme(u_pu, boards.names, lowest=True),
        *_extreme(u_pu, boards.names),
        *_extreme(terminals.drop_pu, terminals.loads),
        *_extreme(cable_loading, branches.names),
    )


def _extreme(values: FloatArray, names: tuple[str, ...], *, lowest: bool = False) -> tuple[Value, Value]:
    """Return the largest or smallest value in percent and whose it is; blanks where there is none."""
    if not values.size or np.isnan(values).all():
        return None, None
    at = int(np.nanargmin(values) if lowest else np.nanargmax(values))
    return percent(values[at]), names[at]


def _verdict_figures(outcome: StudyOutcome, mode: str) -> tuple[Value, ...]:
    found = tuple(v for v in outcome.verdicts if v.mode == mode)
    governing = worst(found)
    return (
        sum(v.status == "exceeds" for v in found),
        sum(v.status == "not assessed" for v in found),
        governing.status if governing else "",
    )
