"""One mode of the load balance: its islands, sets, losses, restart and findings put together."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from study.analyses import balance_findings as findings
from study.analyses.balance_demand import LoadTable, alternative_total_kw, synchronous_motor_kw
from study.analyses.balance_islands import (
    Consumers,
    LoadStep,
    charging_kw,
    fewest_sets,
    fewest_sets_words,
    largest_unit,
    set_candidates,
    shore_loading,
    step_capability_kw,
)
from study.analyses.balance_loss import loss_of_largest, main_sets_out
from study.analyses.balance_options import BalanceOptions
from study.analyses.balance_restart import (
    emergency_duty,
    reconnections,
    restart_steps,
    sets_that_start,
)
from study.analyses.balance_section import services_lost
from study.analyses.balance_shares import Share, set_row, share_load
from study.analyses.balance_sources import Source, capacity, loading, sources_of
from study.analyses.balance_supply import ModeSupply
from study.analyses.balance_totals import totals
from study.model.modes import Mode
from study.model.plant import Plant
from study.results.balance import (
    ConsumerDemand,
    EmergencyDuty,
    IslandBalance,
    MainSetOut,
    ModeBalance,
    RestartStep,
)

NOT_UNDER_OWN_POWER = ("shore", "emergency")


@dataclass(frozen=True, slots=True, kw_only=True)
class Study:
    """What is the same for every mode of one plant.

    ``interlocked`` are the pairs of sources that may not run together; ``restarts`` is False where no motor
    has a restart delay, so that nothing can be said of a restart.
    """

    plant: Plant
    table: LoadTable
    demand: ConsumerDemand
    options: BalanceOptions
    interlocked: frozenset[frozenset[str]]
    restarts: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class LiveIsland:
    """One live island: its sources on line and standing by, its consumers, and who carries what."""

    number: int
    boards: tuple[str, ...]
    sources: tuple[Source, ...]
    consumers: Consumers
    shares: dict[str, Share]

    @property
    def running(self) -> list[Source]:
        """The sources on line."""
        return [s for s in self.sources if s.running]

    @property
    def standby(self) -> list[Source]:
        """The sources standing by."""
        return [s for s in self.sources if not s.running]


def mode_balance(study: Study, row: int, supply: ModeSupply) -> tuple[ModeBalance, list[EmergencyDuty]]:
    """Return the balance of one mode, and its emergency sets against their list.

    Parameters
    ----------
    study : Study
        The plant with its demand.
    row : int
        Place of the mode in the plant.
    supply : ModeSupply
        What is energised in it.

    Returns
    -------
    ModeBalance
        The mode.
    list of EmergencyDuty
        Empty where the mode is no emergency mode.
    """
    plant, mode = study.plant, study.plant.modes[row]
    sources = sources_of(plant, mode, supply)
    motors = [
        (m, synchronous_motor_kw(m, mode) if m.name in supply.motors_on else 0.0)
        for m in plant.synchronous_motors
    ]
    by_board = {b: math.fsum(kw for m, kw in motors if m.board == b) for b in {m.board for m, _ in motors}}
    live = [
        _live_island(study, row, n, supply, sources=sources, motors_kw=by_board)
        for n in range(len(supply.islands))
    ]
    shares = {name: share for island in live for name, share in island.shares.items()}
    names = tuple(b.name for b in plant.boards)
    sums = totals(study.table, study.demand, row, supply, boards=names, motors=motors)
    restart, restart_notes = _restart(study, row, mode, live)
    islands = tuple(_island_balance(study, island, sources, supply) for island in live)
    notes = [
        *findings.supply_findings(plant, mode, sources, supply),
        *findings.demand_findings(plant, mode, study.demand, row),
        *(note for pair in zip(live, islands, strict=True) for note in _island_notes(study, *pair)),
        *restart_notes,
        *findings.synchronous_findings(motors),
    ]
    nothing = Share(p_kw=0.0, q_kvar=0.0)
    return ModeBalance(
        mode=mode.name,
        kind=mode.kind,
        services=sums.services,
        boards=names,
        p_by_service_kw=sums.p_by_service_kw,
        q_by_service_kvar=sums.q_by_service_kvar,
        p_connected_by_service_kw=sums.p_connected_by_service_kw,
        p_by_board_kw=sums.p_by_board_kw,
        q_by_board_kvar=sums.q_by_board_kvar,
        p_total_kw=sums.p_total_kw,
        q_total_kvar=sums.q_total_kvar,
        s_total_kva=math.hypot(sums.p_total_kw, sums.q_total_kvar),
        alternative_kw=alternative_total_kw(study.demand, row) + sums.p_synchronous_kw,
        p_unfed_kw=sums.p_unfed_kw,
        sets=tuple(set_row(s, shares.get(s.name, nothing)) for s in sources if s.state != "off"),
        islands=islands,
        main_set_out=_one_out(study, row, mode, sources),
        restart=restart,
        findings=tuple(notes),
        p_synchronous_kw=sums.p_synchronous_kw,
    ), _emergency(study, mode, live)


def _live_island(
    study: Study,
    row: int,
    number: int,
    supply: ModeSupply,
    *,
    sources: Sequence[Source],
    motors_kw: dict[str, float],
) -> LiveIsland:
    boards = supply.islands[number]
    consumers = Consumers(
        demand=study.demand,
        row=row,
        here=(supply.load_island == number) & (study.demand.in_use[row] > 0.0),
        motors_kw=math.fsum(motors_kw.get(board, 0.0) for board in boards),
    )
    here = tuple(s for s in sources if s.island == number and s.state != "off")
    running = [s for s in here if s.running]
    return LiveIsland(
        number=number,
        boards=boards,
        sources=here,
        consumers=consumers,
        shares=share_load(running, consumers.p_kw, consumers.q_kvar),
    )


def _island_balance(
    study: Study, island: LiveIsland, sources: Sequence[Source], supply: ModeSupply
) -> IslandBalance:
    p_load_kw, q_load_kvar = island.consumers.p_kw, island.consumers.q_kvar
    s_load_kva = math.hypot(p_load_kw, q_load_kvar)
    p_capacity_kw, s_capacity_kva = capacity(island.running)
    candidates = set_candidates(sources, island.number, study.plant.modes[island.consumers.row].kind)
    chosen = None
    if p_load_kw > 0.0:
        p_need_kw = p_load_kw + charging_kw(island.running)
        s_need_kva = math.hypot(p_need_kw, q_load_kvar)
        margin = study.options.one_set_margin
        chosen = fewest_sets(candidates, p_need_kw, s_need_kva, margin, study.interlocked)
    step = _largest_step(study, island)
    loss = loss_of_largest(
        island.sources, island.shares, island.consumers, study.table.trip_stage, study.interlocked
    )
    shore = shore_loading(island.running, island.shares)
    return IslandBalance(
        island=island.number,
        boards=island.boards,
        p_load_kw=p_load_kw,
        q_load_kvar=q_load_kvar,
        p_capacity_kw=p_capacity_kw,
        s_capacity_kva=s_capacity_kva,
        kw_loading=loading(p_load_kw, p_capacity_kw),
        kva_loading=loading(s_load_kva, s_capacity_kva),
        spare_kw=p_capacity_kw - p_load_kw,
        fewest_sets=chosen,
        fewest_sets_text=fewest_sets_words(chosen, len(candidates), p_load_kw),
        largest_step_load=step.load,
        largest_step_kw=step.p_kw,
        step_capability_kw=step.capability_kw,
        loss=loss.alone,
        shore=shore.name,
        shore_current_a=shore.current_a,
        shore_rated_a=shore.rated_a,
        loss_with_standby=loss.with_standby,
        services_lost=services_lost(
            study.plant,
            study.demand,
            island.consumers.row,
            supply,
            island=island.number,
            sources=sources,
        ),
    )


def _largest_step(study: Study, island: LiveIsland) -> LoadStep:
    index, p_kw = largest_unit(island.consumers, study.table.behind_converter)
    return LoadStep(
        load=study.demand.loads[index] if index >= 0 else "",
        p_kw=p_kw,
        capability_kw=_capability_without(study, island, index),
    )


def _capability_without(study: Study, island: LiveIsland, index: int) -> float:
    """Return the step that the sources take before one unit of a load is in; index -1 for no load."""
    demand, consumers = study.demand, island.consumers
    counted_kw = 0.0
    if index >= 0:
        unit_kw = demand.p_unit_kw[consumers.row, index] * min(1.0, demand.in_use[consumers.row, index])
        counted_kw = float(unit_kw * demand.factor[consumers.row, index])
    before = share_load(island.running, consumers.p_kw - counted_kw, consumers.q_kvar)
    return step_capability_kw(island.running, before)


def _island_notes(study: Study, island: LiveIsland, balance: IslandBalance) -> list[str]:
    notes = list(
        findings.island_findings(
            island.boards, island.running, island.standby, island.shares, balance.p_load_kw
        )
    )
    notes += findings.section_findings(island.boards, balance)
    start = findings.largest_start(study.plant, island.consumers)
    if start is not None and any(s.kind == "genset" for s in island.running):
        capability_kw = _capability_without(study, island, start)
        notes += findings.start_finding(study.plant.loads[start], capability_kw)
    return notes


def _one_out(study: Study, row: int, mode: Mode, sources: Sequence[Source]) -> tuple[MainSetOut, ...]:
    if mode.kind in NOT_UNDER_OWN_POWER or not study.table.essential.any():
        return ()
    essential = study.table.essential
    return main_sets_out(
        sources,
        math.fsum(study.demand.p_counted_kw[row][essential]),
        math.fsum(study.demand.q_counted_kvar[row][essential]),
    )


def _restart(
    study: Study, row: int, mode: Mode, live: Sequence[LiveIsland]
) -> tuple[tuple[RestartStep, ...], list[str]]:
    if mode.kind == "shore" or not study.restarts:
        return (), []
    steps: list[RestartStep] = []
    notes: list[str] = []
    for island in live:
        sets = sets_that_start(island.sources, mode)
        if not sets:
            continue
        back = reconnections(study.plant.loads, island.consumers)
        restart = restart_steps(sets, back, study.options.restart_interval_s, len(steps) + 1)
        steps += restart.steps
        notes += findings.restart_findings(
            restart.waiting, sets[0].start_delay_s, study.options.blackout_start_s
        )
    notes += findings.by_hand_findings(mode, study.plant.loads, study.demand.in_use[row] > 0.0)
    return tuple(steps), notes


def _emergency(study: Study, mode: Mode, live: Sequence[LiveIsland]) -> list[EmergencyDuty]:
    options = study.options
    return [
        duty
        for island in live
        for duty in emergency_duty(
            mode, island.running, island.shares, options.emergency_hours, options.emergency_basis
        )
    ]
