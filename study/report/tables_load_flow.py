"""Tables of the load flow: islands, boards, sources, terminals, and how well the two solvers agree."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

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
from study.results.arrays import FloatArray
from study.results.load_flow import LoadFlowResult, ModeLoadFlow

_SHEET = "R Load flow"
_SHOWN = 10


def load_flow_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return the tables of the load flow but for its branches.

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
        boards_table(outcome),
        sources_table(outcome),
        terminals_table(outcome),
        agreement_table(outcome),
    )


def islands_table(outcome: StudyOutcome) -> Table:
    """Return frequency, load and losses of every live island, and the modes without a solution."""
    columns = [
        text_column("mode", "Mode"),
        text_column("island", "Island"),
        text_column("sources", "Sources", kind="long text"),
        Column(key="f_hz", heading="Frequency", unit="Hz", most_decimals=3),
        Column(key="p_load_kw", heading="Load", unit="kW", most_decimals=1),
        Column(key="q_load_kvar", heading="Load", unit="kvar", most_decimals=1),
        Column(key="p_loss_kw", heading="Losses", unit="kW"),
        Column(key="q_loss_kvar", heading="Losses", unit="kvar"),
        text_column("dead_boards", "Boards without supply", kind="long text"),
    ]
    return make_table(
        key="load_flow_islands",
        title="Islands, frequency and losses",
        sheet=_SHEET,
        columns=columns,
        rows=[row for mode in outcome.load_flow.modes for row in _island_rows(mode)],
    )


def _island_rows(mode: ModeLoadFlow) -> Iterator[tuple[Value, ...]]:
    dead = ", ".join(mode.dead_boards) or "none"
    if not mode.solved:
        yield (mode.mode, f"no solution: {mode.reason}", *[None] * 6, dead)
        return
    for island in mode.islands:
        name = island.boards[0] if len(mode.islands) > 1 else "all boards"
        yield (
            mode.mode,
            name,
            ", ".join(island.sources),
            island.f_hz,
            island.p_load_kw,
            island.q_load_kvar,
            island.p_loss_kw,
            island.q_loss_kvar,
            dead,
        )


def boards_table(outcome: StudyOutcome) -> Table:
    """Return voltage, load and busbar current of every live board, the farthest from nominal first."""
    columns = [
        text_column("mode", "Mode"),
        text_column("board", "Board"),
        Column(key="u_nominal_v", heading="Nominal", unit="V", most_decimals=1, exact=True),
        Column(key="u_v", heading="Voltage", unit="V", most_decimals=1),
        percent_column("u_percent", "Voltage of nominal", most_decimals=2),
        Column(key="angle_deg", heading="Angle", unit="°"),
        Column(key="p_load_kw", heading="Load", unit="kW", most_decimals=1),
        Column(key="q_load_kvar", heading="Load", unit="kvar", most_decimals=1),
        Column(
            key="busbar_current_a",
            heading="Busbar current",
            unit="A",
            most_decimals=1,
            against="busbar_rated_a",
        ),
        Column(key="busbar_rated_a", heading="Busbar rating", unit="A", most_decimals=1),
        percent_column("busbar_loading_percent", "Of rating", against=100.0),
        verdict_column(),
        cell_column(),
    ]
    cells, status = cells_by_name(outcome.plant), StatusLookup(outcome.verdicts)
    rows = []
    for mode in outcome.load_flow.modes:
        state = mode.boards
        deviation = np.abs(state.u_v / state.u_nominal_v - 1.0)
        for b in _largest_first(deviation):
            if not state.energised[b]:
                continue
            name = state.names[b]
            rows.append(
                (
                    mode.mode,
                    name,
                    state.u_nominal_v[b],
                    state.u_v[b],
                    percent(state.u_v[b] / state.u_nominal_v[b]),
                    state.angle_deg[b],
                    state.p_load_kw[b],
                    state.q_load_kvar[b],
                    state.busbar_current_a[b],
                    state.busbar_rated_a[b],
                    percent(state.busbar_loading[b]),
                    status(mode.mode, name, "voltage", "loading"),
                    cells.get(name, ""),
                )
            )
    return make_table(
        key="boards",
        title="Boards",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "The farthest from nominal voltage first. The verdict is the worse of voltage and busbar "
            "current. The angle is against the first board of the island.",
        ),
        group_by=("mode",),
        shown_per_group=_SHOWN,
    )


def _largest_first(values: FloatArray) -> list[int]:
    """Return positions from the largest value down; NaN last, equals in workbook order."""
    ranked = np.where(np.isnan(values), -np.inf, values)
    return [int(i) for i in np.argsort(-ranked, kind="stable")]


def sources_table(outcome: StudyOutcome) -> Table:
    """Return what every source on line gives at its own terminals."""
    columns = [
        text_column("mode", "Mode"),
        text_column("source", "Source"),
        text_column("kind", "Kind"),
        Column(key="u_v", heading="Voltage", unit="V", most_decimals=1),
        Column(key="p_kw", heading="Active", unit="kW", most_decimals=1),
        Column(key="q_kvar", heading="Reactive", unit="kvar", most_decimals=1),
        Column(key="s_kva", heading="Apparent", unit="kVA", most_decimals=1),
        Column(key="cos_phi", heading="Power factor", most_decimals=3),
        Column(key="current_a", heading="Current", unit="A", most_decimals=1),
        percent_column("kw_loading_percent", "kW of rated", against=100.0),
        percent_column("kva_loading_percent", "kVA of rated", against=100.0),
        percent_column("engine_loading_percent", "Engine load", against=100.0),
        Column(key="field_pu", heading="Field", unit="x rated-load field"),
        text_column("limited_by", "Held at"),
        text_column("law", "Droop law"),
        verdict_column(),
        cell_column(),
    ]
    cells, status = cells_by_name(outcome.plant), StatusLookup(outcome.verdicts)
    rows = []
    for mode in outcome.load_flow.modes:
        state = mode.sources
        for i, name in enumerate(state.names):
            limited = state.limited_by[i]
            rows.append(
                (
                    mode.mode,
                    name,
                    state.kinds[i],
                    state.u_v[i],
                    state.p_kw[i],
                    state.q_kvar[i],
                    state.s_kva[i],
                    state.cos_phi[i],
                    state.current_a[i],
                    percent(state.kw_loading[i]),
                    percent(state.kva_loading[i]),
                    percent(state.engine_loading[i]),
                    state.field_pu[i],
                    f"{limited} limit" if limited else None,
                    state.law[i] or None,
                    status(mode.mode, name, "loading"),
                    cells.get(name, ""),
                )
            )
    return make_table(
        key="sources",
        title="Sources",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=("Reactive power is that at the set's terminals; the droop is a setting and carries none.",),
        worked=_worked_source(outcome.load_flow),
        group_by=("mode",),
    )


def _worked_source(result: LoadFlowResult) -> Worked | None:
    for mode in result.modes:
        state = mode.sources
        if state.names:
            s_kva, u_v = float(state.s_kva[0]), float(state.u_v[0])
            p_kw, q_kvar = float(state.p_kw[0]), float(state.q_kvar[0])
            return Worked(
                row=f"{state.names[0]}, {mode.mode}",
                lines=(
                    WorkedLine(
                        label="Apparent power",
                        formula="√(P² + Q²)",
                        figures=f"√({figure(p_kw, '')}² + {figure(q_kvar, '')}²)",
                        result=quantity(s_kva, "kVA"),
                    ),
                    WorkedLine(
                        label="Current",
                        formula="1000 × S / (√3 × U)",
                        figures=f"1000 × {figure(s_kva, 'kVA')} / (√3 × {figure(u_v, 'V')})",
                        result=quantity(float(state.current_a[0]), "A"),
                    ),
                ),
            )
    return None


def terminals_table(outcome: StudyOutcome) -> Table:
    """Return voltage and voltage drop at the consumers' terminals, the largest drop first."""
    columns = [
        text_column("mode", "Mode"),
        text_column("consumer", "Consumer"),
        text_column("board", "Board"),
        text_column("fed_by", "Fed by"),
        Column(key="u_rated_v", heading="Rated", unit="V", most_decimals=1, exact=True),
        Column(key="u_v", heading="Voltage", unit="V", most_decimals=1),
        percent_column("u_percent", "Voltage of rated", most_decimals=2),
        Column(key="angle_deg", heading="Angle", unit="°"),
        percent_column("drop_percent", "Drop from switchboard", most_decimals=2),
        Column(key="p_kw", heading="Active", unit="kW", most_decimals=1),
        Column(key="q_kvar", heading="Reactive", unit="kvar", most_decimals=1),
        Column(key="current_a", heading="Current", unit="A", most_decimals=1),
        text_column("path", "Path from the switchboard", kind="long text"),
        verdict_column(),
        cell_column(),
    ]
    cells, status = cells_by_name(outcome.plant), StatusLookup(outcome.verdicts)
    rows = []
    for mode in outcome.load_flow.modes:
        state = mode.terminals
        for t in _largest_first(state.drop_pu):
            name = state.loads[t]
            rows.append(
                (
                    mode.mode,
                    name,
                    state.boards[t],
                    state.fed_by[t],
                    state.u_rated_v[t],
                    state.u_v[t],
                    percent(state.u_v[t] / state.u_rated_v[t]),
                    state.angle_deg[t],
                    percent(state.drop_pu[t]),
                    state.p_kw[t],
                    state.q_kvar[t],
                    state.current_a[t],
                    state.path[t],
                    status(mode.mode, name, "voltage"),
                    cells.get(state.fed_by[t]) or cells.get(name, ""),
                )
            )
    return make_table(
        key="terminals",
        title="Consumer terminals",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Each consumer while it runs, all units in use, on its board at the voltage of the load flow; "
            "what counts of it in the load balance may be less. The largest voltage drop first, in % of the "
            "consumer's rated voltage.",
        ),
        group_by=("mode",),
        shown_per_group=_SHOWN,
    )


def agreement_table(outcome: StudyOutcome) -> Table:
    """Return the largest differences between the two solvers."""
    columns = [
        text_column("mode", "Mode"),
        text_column("solution", "Solution", kind="long text"),
        Column(key="largest_du_pu", heading="Voltage differs by", unit="pu", kind="tiny"),
        Column(key="largest_dp_kw", heading="Active power differs by", unit="kW", kind="tiny"),
        Column(key="largest_dq_kvar", heading="Reactive power differs by", unit="kvar", kind="tiny"),
        Column(key="residual_pu", heading="Residual", unit="pu", kind="tiny"),
        Column(key="iterations", heading="Iterations", kind="count"),
    ]
    rows: list[tuple[Value, ...]] = []
    for mode in outcome.load_flow.modes:
        found = mode.agreement
        if mode.solved:
            rows.append(
                (
                    mode.mode,
                    "solved",
                    found.largest_du_pu,
                    found.largest_dp_kw,
                    found.largest_dq_kvar,
                    found.residual_pu,
                    found.iterations,
                )
            )
        else:
            rows.append((mode.mode, f"no solution: {mode.reason}", *[None] * 5))
    return make_table(
        key="solver_agreement",
        title="Agreement of the two solvers",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Each mode is solved twice, by different methods on one list of branches. That they agree "
            "shows that the equations are solved right, not that the model is right; a difference above "
            "1e-6 pu is a finding.",
        ),
    )
