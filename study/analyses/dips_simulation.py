"""Voltage, speed and loading in time: every case of the sheet Events, from its load flow to its new rest."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from study.analyses.dips_build_up import simulate_build_up
from study.analyses.dips_cases import KINDS, CaseWork, load_before, mode_before
from study.analyses.dips_options import DipOptions
from study.analyses.dips_relays import add_relays
from study.analyses.dips_results import case_result
from study.analyses.dips_unsimulated import not_simulated
from study.issues import SolveError
from study.model.modes import Event
from study.network.batch import BatchSolution, solve_batch
from study.network.dynamics_build import Model, build_model
from study.network.dynamics_data import START_MOTOR
from study.network.dynamics_run import Course, follow_model
from study.network.network import ModeNetwork, mode_network
from study.results.arrays import FloatArray
from study.results.dips import SimulatedCase

Progress = Callable[[str], None]
NOT_IN_TIME = "maladjustment"  # a matter of sharing
STARTER_TAIL_S = 4.0  # simulated beyond the ramp or change-over of a starter


@dataclass(frozen=True, slots=True, kw_only=True)
class SimulatedModel:
    """A case as it was followed, for those who look closer: model, course, and what was asked."""

    batch: BatchSolution
    work: CaseWork
    model: Model
    course: Course


def simulate_cases(
    networks: Sequence[ModeNetwork],
    p_kw: FloatArray,
    q_kvar: FloatArray,
    options: DipOptions | None = None,
    *,
    progress: Progress | None = None,
) -> tuple[SimulatedCase, ...]:
    """Simulate every case of the sheet Events.

    Parameters
    ----------
    networks : sequence of ModeNetwork
        One for each mode, in workbook order.
    p_kw, q_kvar : ndarray, shape (mode, load)
        What the consumers ask for, all units in use together, at rated voltage. [kW], [kvar]
    options : DipOptions, optional
        Limits and lengths.
    progress : callable, optional
        Is told which case is being simulated.

    Returns
    -------
    tuple of SimulatedCase
        In the sheet's order; a case that cannot be simulated says why, and the others go on.
    """
    if not networks:
        return ()
    row = {at.mode.name: n for n, at in enumerate(networks)}
    out = []
    for events in cases_of(networks[0].network.plant.events):
        n = row[events[0].mode]
        if progress is not None:
            progress(f"simulating {events[0].case}")
        out.append(simulate_case(networks[n], events, p_kw[n], q_kvar[n], options=options))
    return tuple(out)


def cases_of(events: Sequence[Event]) -> list[tuple[Event, ...]]:
    """Return the rows of each case in the order of their times; maladjustments are a matter of sharing."""
    cases: dict[str, list[Event]] = {}
    for e in events:
        if e.kind != NOT_IN_TIME:
            cases.setdefault(e.case, []).append(e)
    return [tuple(sorted(rows, key=lambda e: e.at_s)) for rows in cases.values()]


def simulate_case(
    at: ModeNetwork,
    events: Sequence[Event],
    p_kw: FloatArray,
    q_kvar: FloatArray,
    *,
    options: DipOptions | None = None,
) -> SimulatedCase:
    """Simulate one case.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    events : sequence of Event
        Rows of one case, by time.
    p_kw, q_kvar : ndarray, shape (load,)
        What the consumers ask for in the mode. [kW], [kvar]
    options : DipOptions, optional
        Limits and lengths.

    Returns
    -------
    SimulatedCase
        One that cannot be simulated says why.
    """
    options = options or DipOptions()
    try:
        if any(e.kind == "build-up" for e in events):
            return simulate_build_up(at, events, options)
        done = follow_case(at, events, p_kw, q_kvar, options=options)
    except SolveError as error:
        return not_simulated(at, events, str(error))
    return case_result(done.batch, done.work, done.model, done.course, events=events)


def follow_case(
    at: ModeNetwork,
    events: Sequence[Event],
    p_kw: FloatArray,
    q_kvar: FloatArray,
    *,
    options: DipOptions | None = None,
) -> SimulatedModel:
    """Follow one case and return all of it: model and course at every step.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    events : sequence of Event
        Rows of one case, by time.
    p_kw, q_kvar : ndarray, shape (load,)
        What the consumers ask for in the mode. [kW], [kvar]
    options : DipOptions, optional
        Limits and lengths.

    Returns
    -------
    SimulatedModel
        For closer looks and for tests.

    Raises
    ------
    SolveError
        The case cannot be simulated; says why.
    """
    options = options or DipOptions()
    batch, work = prepare_case(at, events, p_kw, q_kvar, options)
    model = build_model(batch, work.plan())
    course = follow_model(model, length_s(work, options))
    return SimulatedModel(batch=batch, work=work, model=model, course=course)


def prepare_case(
    at: ModeNetwork, events: Sequence[Event], p_kw: FloatArray, q_kvar: FloatArray, options: DipOptions
) -> tuple[BatchSolution, CaseWork]:
    """Return the load flow before a case, and what happens in it.

    Raises
    ------
    SolveError
        The mode has no solution before, or an event cannot happen in it.
    """
    plant = at.network.plant
    if len({e.mode for e in events}) > 1:
        raise SolveError(f"the rows of case {events[0].case} name different modes.")
    mode = mode_before(plant, at.mode, events)
    if mode is not at.mode:
        at = mode_network(at.network, mode)
    p, q = load_before(plant, at.mode, events, p_kw, q_kvar)
    batch = solve_batch(at, p, q)
    if not batch.solved[0]:
        raise SolveError(f"{at.mode.name} has no solution before the case: {batch.reason[0]}")
    work = CaseWork(at=at, island=island_of(at, events), p_kw=p, q_kvar=q, options=options)
    for e in events:
        if e.kind not in KINDS:
            raise SolveError(f"a {e.kind} cannot be simulated together with other events.")
        KINDS[e.kind](work, e)
    add_relays(work)
    return batch, work


def island_of(at: ModeNetwork, events: Sequence[Event]) -> int:
    """Return the island in which a case plays: that of its first equipment that is live.

    Raises
    ------
    SolveError
        Nothing of it is live.
    """
    topology, plant = at.network.topology, at.network.plant
    loads = {x.name: n for n, x in enumerate(plant.loads)}
    for e in events:
        nodes = [topology.node_of[e.equipment]] if e.equipment in topology.node_of else []
        nodes += [n for b in topology.branches if b.name == e.equipment for n in (b.from_node, b.to_node)]
        if e.equipment in loads:
            nodes = [at.view.load_node[loads[e.equipment]]]
        live = [at.view.island[n] for n in nodes if at.view.island[n] >= 0]
        if live:
            return int(live[0])
    raise SolveError(f"{events[0].equipment} is dead in {at.mode.name}.")


def length_s(work: CaseWork, options: DipOptions) -> float:
    """Return how long a case is followed: beyond its last event and its starters' ramps. [s]."""
    last = max((h.at_s for h in work.happenings), default=0.0)
    until = last + options.after_s
    started = {h.index: h.at_s for h in work.happenings if h.kind == START_MOTOR}
    for n, drive in enumerate(work.drives):
        motor = drive.load.motor
        assert motor is not None
        ramp = {
            "star-delta": motor.star_delta_change_s or 0.0,
            "soft starter": motor.soft_starter_ramp_s,
            "converter": motor.starting_time_s or 0.0,
        }.get(motor.starting_method, 0.0)
        until = max(until, started.get(n, 0.0) + max(ramp, motor.starting_time_s or 0.0) + STARTER_TAIL_S)
    return min(until, options.longest_s)
