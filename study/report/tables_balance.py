"""Tables of the load balance: what the consumers take."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from study.model.loads import Load
from study.report.content import StudyOutcome
from study.report.numbers import figure, percent, quantity
from study.report.tables import (
    Column,
    Footer,
    RowStyle,
    Table,
    Value,
    Worked,
    WorkedLine,
    cell_column,
    make_table,
    percent_column,
    text_column,
)
from study.report.tables_sources import NO_SET, island_name
from study.results.balance import DUTIES, BalanceResult, IslandBalance, ModeBalance

_SHEET = "R Load balance"
_SHORT_DUTY = {duty: duty[0].upper() for duty in DUTIES} | {
    f"{duty}, not fed": f"{duty[0].upper()} (not fed)" for duty in DUTIES
}
_PER_MODE = 10


def balance_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return the tables of what the consumers take.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    return (consumers_table(outcome), services_table(outcome), board_demand_table(outcome))


def consumers_table(outcome: StudyOutcome) -> Table:
    """Return the load balance as a surveyor reads it: consumers down, modes across, subtotals and totals."""
    balance = outcome.balance
    rows: list[tuple[Value, ...]] = []
    styles: list[RowStyle] = []
    for service in _services(balance):
        rows.append(_heading_row(service, balance))
        styles.append("group")
        for index, name in enumerate(balance.demand.loads):
            load = outcome.plant.load(name)
            if load.service == service:
                rows.append(_consumer_row(load, index, balance))
                styles.append("")
        for duty in _duties_of(service, balance):
            rows.append(_subtotal_row(service, duty, balance))
            styles.append("subtotal")
    rows.append(_total_row(balance))
    styles.append("total")
    return make_table(
        key="load_balance",
        title="Load balance by consumer",
        sheet=_SHEET,
        columns=_consumer_columns(balance),
        rows=rows,
        row_styles=tuple(styles),
        footers=_consumer_footers(balance),
        notes=(
            "Duty: C continuous, I intermittent, O occasional. Rated and absorbed power are those of one "
            "unit: shaft output for motors, input otherwise. The load factor refers to the absorbed power; "
            "efficiency and cos φ are those at that load.",
            "kW and kvar are the input of all units in use at their part load; counted kW and kvar are these "
            f"times the simultaneity factor. Intermittent load without a factor of its own counts 1/"
            f"{quantity(balance.diversity, '')} (diversity {quantity(balance.diversity, '')}).",
            "Subtotals and totals are of unrounded values.",
        ),
        worked=_worked_consumer(outcome),
    )


def _consumer_columns(balance: BalanceResult) -> list[Column]:
    columns = [
        text_column("consumer", "Consumer"),
        text_column("board", "Board"),
        Column(key="installed", heading="Installed", kind="count"),
        Column(key="p_rated_kw", heading="Rated", unit="kW", exact=True),
        Column(key="p_absorbed_kw", heading="Absorbed", unit="kW", exact=True),
        cell_column(),
    ]
    for mode in balance.demand.modes:
        columns += [
            Column(key="in_use", heading="In use", kind="count", group=mode),
            percent_column("load_factor_percent", "Load factor", group=mode, exact=True),
            text_column("duty", "Duty", group=mode, short=_SHORT_DUTY),
            percent_column("efficiency_percent", "Efficiency", group=mode),
            Column(key="cos_phi", heading="cos φ", group=mode, most_decimals=2),
            Column(key="p_kw", heading="Power", unit="kW", group=mode, most_decimals=1),
            Column(key="q_kvar", heading="Reactive", unit="kvar", group=mode, most_decimals=1),
            percent_column("factor_percent", "Simultaneity", group=mode, most_decimals=0),
            Column(key="p_counted_kw", heading="Counted", unit="kW", group=mode, most_decimals=1),
            Column(key="q_counted_kvar", heading="Counted", unit="kvar", group=mode, most_decimals=1),
        ]
    return columns


def _services(balance: BalanceResult) -> tuple[str, ...]:
    return tuple(dict.fromkeys(s for mode in balance.modes for s in mode.services))


def _duties_of(service: str, balance: BalanceResult) -> list[int]:
    """Return the duties that a service has in any mode."""
    return [
        duty
        for duty in range(len(DUTIES))
        if any(
            service in mode.services
            and mode.p_connected_by_service_kw[mode.services.index(service), duty] != 0.0
            for mode in balance.modes
        )
    ]


def _heading_row(service: str, balance: BalanceResult) -> tuple[Value, ...]:
    return (service, *[None] * (5 + _PER_MODE * len(balance.demand.modes)))


def _consumer_row(load: Load, index: int, balance: BalanceResult) -> tuple[Value, ...]:
    row: list[Value] = [
        load.name,
        load.board,
        load.installed,
        load.p_rated_kw,
        load.p_absorbed_kw,
        load.cell,
    ]
    for mode in range(len(balance.demand.modes)):
        row += _demand_cells(balance, mode, index)
    return tuple(row)


def _demand_cells(balance: BalanceResult, mode: int, load: int) -> list[Value]:
    demand, at = balance.demand, (mode, load)
    in_use = float(demand.in_use[at])
    if in_use == 0.0:
        return [0, *[None] * (_PER_MODE - 1)]
    duty = DUTIES[int(demand.duty[at])]
    return [
        in_use,
        percent(demand.load_factor[at]),
        duty if demand.fed[at] else f"{duty}, not fed",
        percent(demand.efficiency[at]),
        float(demand.cos_phi[at]),
        float(demand.p_kw[at]),
        float(demand.q_kvar[at]),
        percent(demand.factor[at]),
        float(demand.p_counted_kw[at]),
        float(demand.q_counted_kvar[at]),
    ]


def _subtotal_row(service: str, duty: int, balance: BalanceResult) -> tuple[Value, ...]:
    row: list[Value] = [f"{service}, {DUTIES[duty]}", *[None] * 5]
    for name in balance.demand.modes:
        mode = _mode(balance, name)
        if service not in mode.services:
            row += [None] * _PER_MODE
            continue
        at = mode.services.index(service), duty
        row += [None] * 5 + [float(mode.p_connected_by_service_kw[at]), None, None]
        row += [float(mode.p_by_service_kw[at]), float(mode.q_by_service_kvar[at])]
    return tuple(row)


def _total_row(balance: BalanceResult) -> tuple[Value, ...]:
    row: list[Value] = ["Total", *[None] * 5]
    for name in balance.demand.modes:
        mode = _mode(balance, name)
        in_use_kw = float(mode.p_connected_by_service_kw.sum())
        row += [*[None] * 5, in_use_kw, None, None, mode.p_total_kw, mode.q_total_kvar]
    return tuple(row)


def _mode(balance: BalanceResult, name: str) -> ModeBalance:
    return next(mode for mode in balance.modes if mode.mode == name)


def _consumer_footers(balance: BalanceResult) -> tuple[Footer, ...]:
    by_mode = [(mode.mode, mode) for mode in balance.modes]
    lines = [
        Footer(label="Apparent power", texts={n: quantity(m.s_total_kva, "kVA") for n, m in by_mode}),
        Footer(label="Sources on line", texts={n: _on_line(m) for n, m in by_mode}),
        Footer(
            label="Loading of the sources on line, kW / kVA",
            texts={n: "; ".join(_loading(m, island) for island in m.islands) for n, m in by_mode},
        ),
        Footer(
            label="By the other rule: continuous, largest intermittent and those sure to run with it",
            texts={n: quantity(m.alternative_kw, "kW") for n, m in by_mode},
        ),
    ]
    if any(m.p_unfed_kw > 0 for _, m in by_mode):
        texts = {n: quantity(m.p_unfed_kw, "kW") for n, m in by_mode}
        lines.append(Footer(label="In use, but on a dead board", texts=texts))
    return tuple(lines)


def _on_line(mode: ModeBalance) -> str:
    return ", ".join(s.name for s in mode.sets if s.state == "on") or "none"


def _loading(mode: ModeBalance, island: IslandBalance) -> str:
    where = f"{island_name(mode, island)}: " if len(mode.islands) > 1 else ""
    texts = [
        quantity(percent(x), "%", 1) if math.isfinite(x) else NO_SET
        for x in (island.kw_loading, island.kva_loading)
    ]
    return where + " / ".join(texts)


def _worked_consumer(outcome: StudyOutcome) -> Worked | None:
    """Work out the motor that counts most in the first mode, or the largest consumer where none runs."""
    demand = outcome.balance.demand
    if not demand.loads or not demand.modes or not np.any(demand.p_counted_kw[0] > 0):
        return None
    motor = np.array([outcome.plant.load(n).kind == "motor" for n in demand.loads])
    size = np.where(motor, demand.p_counted_kw[0], 0.0)
    index = int(np.argmax(size if np.any(size > 0) else demand.p_counted_kw[0]))
    at = (0, index)
    load = outcome.plant.load(demand.loads[index])
    absorbed = f"{figure(load.p_absorbed_kw, 'kW')} × {figure(float(demand.load_factor[at]), '')}"
    p_unit_kw, p_kw = float(demand.p_unit_kw[at]), float(demand.p_kw[at])
    cos_phi = figure(float(demand.cos_phi[at]), "")
    lines = [
        WorkedLine(
            label="Input of one unit",
            formula="absorbed power × load factor / efficiency",
            figures=f"{absorbed} / {figure(float(demand.efficiency[at]), '')}",
            result=quantity(p_unit_kw, "kW"),
        ),
        WorkedLine(
            label="All units in use",
            formula="units in use × input of one unit",
            figures=f"{figure(float(demand.in_use[at]), '')} × {figure(p_unit_kw, 'kW')}",
            result=quantity(p_kw, "kW"),
        ),
        WorkedLine(
            label="Reactive power",
            formula="P × √(1 / cos²φ − 1)",
            figures=f"{figure(p_kw, 'kW')} × √(1 / {cos_phi}² − 1)",
            result=quantity(float(demand.q_kvar[at]), "kvar"),
        ),
        WorkedLine(
            label="Counted",
            formula="P × simultaneity factor",
            figures=f"{figure(p_kw, 'kW')} × {figure(float(demand.factor[at]), '')}",
            result=quantity(float(demand.p_counted_kw[at]), "kW"),
        ),
    ]
    return Worked(row=f"{load.name}, {demand.modes[0]}", lines=tuple(lines))


def services_table(outcome: StudyOutcome) -> Table:
    """Return the load of each service and duty in each mode."""
    columns = [
        text_column("mode", "Mode"),
        text_column("service", "Service"),
        text_column("duty", "Duty"),
        Column(key="p_connected_kw", heading="In use", unit="kW", most_decimals=1),
        Column(key="p_counted_kw", heading="Counted", unit="kW", most_decimals=1),
        Column(key="q_counted_kvar", heading="Counted", unit="kvar", most_decimals=1),
    ]
    return make_table(
        key="load_by_service",
        title="Load by service",
        sheet="R Capacity",
        columns=columns,
        rows=[row for mode in outcome.balance.modes for row in _service_rows(mode)],
        group_by=("mode",),
    )


def _service_rows(mode: ModeBalance) -> Iterator[tuple[Value, ...]]:
    for s, service in enumerate(mode.services):
        for d, duty in enumerate(DUTIES):
            if mode.p_connected_by_service_kw[s, d] != 0.0:
                yield (
                    mode.mode,
                    service,
                    duty,
                    float(mode.p_connected_by_service_kw[s, d]),
                    float(mode.p_by_service_kw[s, d]),
                    float(mode.q_by_service_kvar[s, d]),
                )


def board_demand_table(outcome: StudyOutcome) -> Table:
    """Return the counted load that hangs on each board itself."""
    columns = [
        text_column("mode", "Mode"),
        text_column("board", "Board"),
        Column(key="p_counted_kw", heading="Counted", unit="kW", most_decimals=1),
        Column(key="q_counted_kvar", heading="Counted", unit="kvar", most_decimals=1),
    ]
    rows = [
        (mode.mode, board, float(mode.p_by_board_kw[b]), float(mode.q_by_board_kvar[b]))
        for mode in outcome.balance.modes
        for b, board in enumerate(mode.boards)
    ]
    return make_table(
        key="load_by_board",
        title="Load of each board",
        sheet="R Capacity",
        columns=columns,
        rows=rows,
        group_by=("mode",),
    )
