"""Tables of the load balance: sources against load, on line, after a loss, in an emergency."""

from __future__ import annotations

import math
from collections.abc import Sequence

from study.report.content import StatusLookup, StudyOutcome, cells_by_name
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
    verdict_column,
)
from study.results.balance import BalanceResult, IslandBalance, LossOfSet, ModeBalance

_SHEET = "R Capacity"
NO_SET = "no set left"


def source_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return the tables of sources against load.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    return (
        islands_table(outcome),
        sets_table(outcome),
        loss_table(outcome),
        main_set_out_table(outcome),
        emergency_table(outcome),
        restart_table(outcome),
    )


def island_name(mode: ModeBalance, island: IslandBalance) -> str:
    """Return what an island is called: by its first board where a mode has several."""
    return island.boards[0] if len(mode.islands) > 1 and island.boards else "all boards"


def islands_table(outcome: StudyOutcome) -> Table:
    """Return load against sources on line, one row for each live island of each mode."""
    columns = [
        text_column("mode", "Mode"),
        text_column("island", "Island"),
        text_column("sources_on_line", "Sources on line"),
        Column(key="p_load_kw", heading="Load", unit="kW", most_decimals=1),
        Column(key="q_load_kvar", heading="Load", unit="kvar", most_decimals=1),
        Column(key="p_capacity_kw", heading="Capacity", unit="kW", most_decimals=1, exact=True),
        Column(key="s_capacity_kva", heading="Capacity", unit="kVA", most_decimals=1, exact=True),
        percent_column("kw_loading_percent", "kW loading", infinite=NO_SET),
        percent_column("kva_loading_percent", "kVA loading", infinite=NO_SET),
        Column(key="spare_kw", heading="Spare", unit="kW", most_decimals=1),
        text_column("fewest_sets", "Fewest sets that carry the load", kind="long text"),
        text_column("largest_step_load", "Largest load switched"),
        Column(key="largest_step_kw", heading="Its power", unit="kW", most_decimals=1),
        Column(key="step_capability_kw", heading="Load step the engines take", unit="kW", most_decimals=1),
        Column(
            key="shore_current_a",
            heading="Shore current",
            unit="A",
            most_decimals=1,
            against="shore_rated_a",
        ),
        Column(key="shore_rated_a", heading="Shore rating", unit="A", most_decimals=1, exact=True),
    ]
    rows = [_island_row(mode, island) for mode in outcome.balance.modes for island in mode.islands]
    return make_table(
        key="load_balance_islands",
        title="Load against sources on line",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=("An island is what hangs together electrically; it is named by its first board.",),
        worked=_worked_island(outcome.balance),
    )


def _island_row(mode: ModeBalance, island: IslandBalance) -> tuple[Value, ...]:
    sources = [s.name for s in mode.sets if s.state == "on" and s.island == island.island]
    shore = island.shore is not None
    return (
        mode.mode,
        island_name(mode, island),
        ", ".join(sources) or island.shore or "none",
        island.p_load_kw,
        island.q_load_kvar,
        island.p_capacity_kw,
        island.s_capacity_kva,
        percent(island.kw_loading),
        percent(island.kva_loading),
        island.spare_kw,
        island.fewest_sets_text,
        island.largest_step_load or None,
        island.largest_step_kw if island.largest_step_load else None,
        island.step_capability_kw if island.largest_step_load else None,
        island.shore_current_a if shore else None,
        island.shore_rated_a if shore else None,
    )


def _worked_island(balance: BalanceResult) -> Worked | None:
    for mode in balance.modes:
        for island in mode.islands:
            if math.isfinite(island.kw_loading) and island.p_load_kw > 0:
                row = f"{mode.mode}, {island_name(mode, island)}"
                return Worked(row=row, lines=_worked_lines(island))
    return None


def _worked_lines(island: IslandBalance) -> tuple[WorkedLine, ...]:
    p, q = figure(island.p_load_kw, ""), figure(island.q_load_kvar, "")
    return (
        WorkedLine(
            label="kW loading",
            formula="load / capacity",
            figures=f"{p} kW / {figure(island.p_capacity_kw, 'kW')}",
            result=quantity(percent(island.kw_loading), "%"),
        ),
        WorkedLine(
            label="kVA loading",
            formula="√(P² + Q²) / capacity",
            figures=f"√({p}² + {q}²) / {figure(island.s_capacity_kva, 'kVA')}",
            result=quantity(percent(island.kva_loading), "%"),
        ),
    )


def sets_table(outcome: StudyOutcome) -> Table:
    """Return every source that runs or stands by, with its loading."""
    cells, status = cells_by_name(outcome.plant), StatusLookup(outcome.verdicts)
    minimum = {g.name: percent(g.min_engine_load) for g in outcome.plant.gensets}
    columns = [
        text_column("mode", "Mode"),
        text_column("source", "Source"),
        text_column("state", "State"),
        Column(key="p_rated_kw", heading="Rated", unit="kW", most_decimals=1, exact=True),
        Column(key="s_rated_kva", heading="Rated", unit="kVA", most_decimals=1, exact=True),
        Column(key="p_kw", heading="Load", unit="kW", most_decimals=1),
        Column(key="q_kvar", heading="Load", unit="kvar", most_decimals=1),
        Column(key="cos_phi", heading="Power factor", most_decimals=3),
        percent_column("engine_loading_percent", "Engine load", against="minimum_engine_load_percent"),
        percent_column("minimum_engine_load_percent", "Least engine load"),
        percent_column("alternator_loading_percent", "Alternator load", against=100.0),
        verdict_column(),
        cell_column(),
    ]
    rows = []
    for mode in outcome.balance.modes:
        for s in mode.sets:
            on = s.state == "on"
            rows.append(
                (
                    mode.mode,
                    s.name,
                    s.state,
                    s.p_rated_kw,
                    s.s_rated_kva,
                    s.p_kw if on else None,
                    s.q_kvar if on else None,
                    s.cos_phi if on else None,
                    percent(s.engine_loading) if on and s.name in minimum else None,
                    minimum.get(s.name),
                    percent(s.alternator_loading) if on else None,
                    status(mode.mode, s.name, "loading") if on else "",
                    cells.get(s.name, ""),
                )
            )
    return make_table(
        key="set_loading",
        title="Loading of sources by the load balance",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=("Engine load is of rated engine power, alternator load of rated kVA.",),
        group_by=("mode",),
    )


def loss_table(outcome: StudyOutcome) -> Table:
    """Return every island after its largest set is lost, stage by stage."""
    columns = [
        text_column("mode", "Mode"),
        text_column("lost", "Set lost"),
        text_column("stage", "Stage"),
        Column(key="p_load_kw", heading="Load", unit="kW", most_decimals=1),
        Column(key="q_load_kvar", heading="Load", unit="kvar", most_decimals=1),
        Column(key="p_capacity_kw", heading="Capacity left", unit="kW", most_decimals=1, exact=True),
        Column(key="s_capacity_kva", heading="Capacity left", unit="kVA", most_decimals=1, exact=True),
        percent_column("kw_loading_percent", "kW loading", against=100.0, infinite=NO_SET),
        percent_column("kva_loading_percent", "kVA loading", against=100.0, infinite=NO_SET),
        text_column("sets_left", "Sets left"),
        cell_column(),
    ]
    cells = cells_by_name(outcome.plant)
    rows = [
        (
            mode.mode,
            loss.lost,
            stage,
            loss.p_load_kw,
            loss.q_load_kvar,
            loss.p_capacity_kw,
            loss.s_capacity_kva,
            percent(loss.kw_loading),
            percent(loss.kva_loading),
            ", ".join(loss.sets_left) or "none",
            cells.get(loss.lost, ""),
        )
        for mode in outcome.balance.modes
        for island in mode.islands
        for stage, loss in _stages(island)
    ]
    return make_table(
        key="largest_set_lost",
        title="Largest set lost",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        group_by=("mode",),
    )


def _stages(island: IslandBalance) -> list[tuple[str, LossOfSet]]:
    """Return the stages without the standby sets, then those with them started."""
    alone = [(loss.stage, loss) for loss in island.loss if loss.stage != "standby started"]
    started = [
        ("standby started" + ("" if loss.stage == "at once" else f", {loss.stage}"), loss)
        for loss in island.loss_with_standby
    ]
    return alone + started


def main_set_out_table(outcome: StudyOutcome) -> Table:
    """Return any one main set out of service, the others available."""
    columns = [
        text_column("mode", "Mode"),
        text_column("out", "Set out of service"),
        Column(key="p_load_kw", heading="Essential load", unit="kW", most_decimals=1),
        Column(key="q_load_kvar", heading="Essential load", unit="kvar", most_decimals=1),
        Column(key="p_capacity_kw", heading="Capacity left", unit="kW", most_decimals=1, exact=True),
        Column(key="s_capacity_kva", heading="Capacity left", unit="kVA", most_decimals=1, exact=True),
        percent_column("kw_loading_percent", "kW loading", against=100.0, infinite=NO_SET),
        percent_column("kva_loading_percent", "kVA loading", against=100.0, infinite=NO_SET),
    ]
    rows = [
        (
            mode.mode,
            row.out,
            row.p_load_kw,
            row.q_load_kvar,
            row.p_capacity_kw,
            row.s_capacity_kva,
            percent(row.kw_loading),
            percent(row.kva_loading),
        )
        for mode in outcome.balance.modes
        for row in mode.main_set_out
    ]
    return make_table(
        key="main_set_out",
        title="Any one main set out of service",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Essential load is that of propulsion, steering, safety and minimum habitability "
            "(SOLAS II-1/41); emergency sets are not counted.",
        ),
    )


def emergency_table(outcome: StudyOutcome) -> Table:
    """Return every emergency set against the emergency list."""
    status = StatusLookup(outcome.verdicts)
    columns = [
        text_column("mode", "Mode"),
        text_column("genset", "Emergency set"),
        Column(key="p_load_kw", heading="Load", unit="kW", most_decimals=1),
        Column(key="q_load_kvar", heading="Load", unit="kvar", most_decimals=1),
        Column(key="p_rated_kw", heading="Rated", unit="kW", most_decimals=1, exact=True),
        Column(key="s_rated_kva", heading="Rated", unit="kVA", most_decimals=1, exact=True),
        percent_column("kw_loading_percent", "kW loading", against=100.0),
        percent_column("kva_loading_percent", "kVA loading", against=100.0),
        Column(key="hours_required_h", heading="For at least", unit="h", most_decimals=0),
        text_column("basis", "Basis", kind="long text"),
        verdict_column(),
    ]
    rows = [
        (
            row.mode,
            row.genset,
            row.p_load_kw,
            row.q_load_kvar,
            row.p_rated_kw,
            row.s_rated_kva,
            percent(row.kw_loading),
            percent(row.kva_loading),
            row.hours_required,
            row.hours_basis,
            status(row.mode, row.genset, "capacity"),
        )
        for row in outcome.balance.emergency
    ]
    return make_table(
        key="emergency_sets",
        title="Emergency sets against the emergency list",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
    )


def restart_table(outcome: StudyOutcome) -> Table:
    """Return the steps of the restart after a blackout."""
    columns = [
        text_column("mode", "Mode"),
        Column(key="step", heading="Step", kind="count"),
        Column(key="at_s", heading="At", unit="s", most_decimals=1),
        text_column("loads", "Loads connected", kind="long text"),
        Column(
            key="p_step_kw",
            heading="Step",
            unit="kW",
            most_decimals=1,
            against="step_capability_kw",
        ),
        Column(key="step_capability_kw", heading="Load step the engines take", unit="kW", most_decimals=1),
        Column(key="p_total_kw", heading="Connected so far", unit="kW", most_decimals=1),
    ]
    rows = [
        (
            mode.mode,
            step.step,
            step.at_s,
            _named(step.loads),
            step.p_step_kw,
            step.step_capability_kw,
            step.p_total_kw,
        )
        for mode in outcome.balance.modes
        for step in mode.restart
    ]
    return make_table(
        key="restart_after_blackout",
        title="Restart after a blackout",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        group_by=("mode",),
    )


def _named(names: Sequence[str], most: int = 8) -> str:
    shown = ", ".join(names[:most])
    return shown if len(names) <= most else f"{shown} and {len(names) - most} more"
