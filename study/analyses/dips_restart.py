"""The restart after a blackout in time: sets that start, and consumers that come back step by step."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from study.analyses.dips_cases import CaseWork, torque_share
from study.analyses.dips_options import DipOptions
from study.analyses.dips_relays import add_relays
from study.analyses.dips_results import case_result
from study.analyses.dips_unsimulated import not_simulated
from study.issues import SolveError
from study.model.loads import Load
from study.model.modes import Event, Mode
from study.model.sources import Genset
from study.network import dynamics_data as d
from study.network.batch import BatchSolution, solve_batch
from study.network.dynamics_build import Happening, build_model
from study.network.dynamics_motors import Drive
from study.network.dynamics_run import follow_model
from study.network.network import ModeNetwork, mode_network
from study.results.arrays import FloatArray
from study.results.balance import RestartStep
from study.results.dips import CaseStep, SimulatedCase

CASE = "Restart after blackout"
BEFORE_S = 0.5  # simulated before the first step
LARGE_START = 0.05  # of the rating of the sets: smaller motors come back with their running power alone


def simulate_restart(
    at: ModeNetwork,
    steps: Sequence[RestartStep],
    p_kw: FloatArray,
    q_kvar: FloatArray,
    *,
    options: DipOptions | None = None,
) -> SimulatedCase:
    """Simulate the restart of one island after a blackout.

    The sets that start are those of the load balance: the standby sets, without any those on line, in an
    emergency mode the emergency sets. The first is at rated speed and voltage with nothing on the boards; the
    others are synchronised when they are ready. Consumers come back in the steps given, motors whose start is
    large by their starters, the rest with their power. Time counts from half a second before the first step.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    steps : sequence of RestartStep
        Of one island, in time order.
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
    events = _events(at, steps)
    if not steps:
        return not_simulated(at, events, f"nothing comes back by itself in {at.mode.name}.")
    try:
        batch, work = _prepare(at, steps, p_kw, q_kvar, options)
        model = build_model(batch, work.plan())
        last = max(h.at_s for h in work.happenings)
        course = follow_model(model, min(last + options.after_s, options.longest_s))
    except SolveError as error:
        return not_simulated(at, events, str(error))
    return case_result(batch, work, model, course, events=events)


def starting_sets(at: ModeNetwork) -> list[Genset]:
    """Return the sets that bring a mode back after a blackout, first to start first.

    Source: as the load balance takes them; SOLAS II-1/42 and 43 for emergency sets.
    """
    mode, sets = at.mode, at.network.plant.gensets
    emergency = mode.kind == "emergency"
    wanted = [g for g in sets if (g.service == "emergency") == emergency]
    running = [g for g in wanted if mode.is_on(g.name)]
    standby = [g for g in wanted if mode.state(g.name) == "standby"]
    chosen = running + standby if emergency else standby or running
    return sorted(chosen, key=lambda g: g.start_delay_s)


def _events(at: ModeNetwork, steps: Sequence[RestartStep]) -> tuple[Event, ...]:
    """Return the steps as events, for the cells and words of the result."""
    first = steps[0].at_s if steps else 0.0
    cells = {x.name: x.cell for x in at.network.plant.loads}
    out = [
        Event(
            case=CASE,
            mode=at.mode.name,
            kind="load step",
            equipment=name,
            cell=cells.get(name, ""),
            size=None,
            unit=None,
            at_s=step.at_s - first + BEFORE_S,
            duration_s=None,
        )
        for step in steps
        for name in step.loads
    ]
    return tuple(out) or (
        Event(
            case=CASE,
            mode=at.mode.name,
            kind="load step",
            equipment="",
            cell=at.mode.cell,
            size=None,
            unit=None,
            at_s=0.0,
            duration_s=None,
        ),
    )


def _prepare(
    at: ModeNetwork, steps: Sequence[RestartStep], p_kw: FloatArray, q_kvar: FloatArray, options: DipOptions
) -> tuple[BatchSolution, CaseWork]:
    sets = starting_sets(at)
    if not sets:
        raise SolveError(f"no set starts after a blackout in {at.mode.name}.")
    alive = mode_network(at.network, _mode_with(at, sets))
    nothing = np.zeros(len(p_kw))
    batch = solve_batch(alive, nothing, nothing)
    if not batch.solved[0]:
        raise SolveError(f"the sets have no operating point at no load: {batch.reason[0]}")
    island = next(s.island for s in alive.sources if s.name == sets[0].name)
    work = CaseWork(at=alive, island=island, p_kw=nothing, q_kvar=nothing, options=options)
    _close_sets(work, sets)
    first = steps[0].at_s
    capacity = sum(g.s_rated_kva for g in sets)
    for step in steps:
        _connect(work, step, step.at_s - first + BEFORE_S, (p_kw, q_kvar, capacity))
    add_relays(work)
    return batch, work


def _mode_with(at: ModeNetwork, sets: Sequence[Genset]) -> Mode:
    """Return the mode with those sets alone on line, without the trims of normal running."""
    plant, names = at.network.plant, {g.name for g in sets}
    sources = [g.name for g in plant.gensets] + [s.name for s in plant.shore_supplies]
    sources += [c.name for c in plant.converter_supplies]
    states = {**at.mode.states, **{n: "on" if n in names else "off" for n in sources}}
    points = {k: v for k, v in at.mode.set_points.items() if k not in sources}
    return replace(at.mode, states=states, set_points=points)  # type: ignore[arg-type]


def _close_sets(work: CaseWork, sets: Sequence[Genset]) -> None:
    """Take the later sets off at once, and synchronise each when it is ready."""
    rows = work.rows()
    for g in sets:
        after_s = g.start_delay_s - sets[0].start_delay_s
        if after_s > 0.0 and g.name in rows:
            row = rows.index(g.name)
            work.happenings.append(Happening(at_s=0.0, kind=d.OPEN_SOURCE, index=row))
            at_s = after_s + BEFORE_S
            work.happenings.append(Happening(at_s=at_s, kind=d.CLOSE_SOURCE, index=row))
            work.steps.append(CaseStep(at_s=at_s, text=f"{g.name} is synchronised", cell=g.cell))


def _connect(
    work: CaseWork, step: RestartStep, at_s: float, asked: tuple[FloatArray, FloatArray, float]
) -> None:
    """Let the consumers of a step come back."""
    p_kw, q_kvar, capacity = asked
    dp, dq = np.zeros(len(p_kw)), np.zeros(len(p_kw))
    for n, load in enumerate(work.plant.loads):
        if load.name not in step.loads or work.at.load_bus[n] < 0:
            continue
        units = _large_units(work, load, capacity)
        if units > 0.0:
            work.drives.append(Drive(load=load, units=units, load_pu=torque_share(work.at.mode, load)))
            work.happenings.append(Happening(at_s=at_s, kind=d.START_MOTOR, index=len(work.drives) - 1))
        else:
            dp[n], dq[n] = p_kw[n], q_kvar[n]
    if dp.any() or dq.any():
        work.change(at_s, dp, dq)
    count = len(step.loads)
    text = f"step {step.step}: {count} consumers, {step.p_step_kw:.0f} kW"
    work.steps.append(CaseStep(at_s=at_s, text=text, cell=""))


def _large_units(work: CaseWork, load: Load, capacity_kva: float) -> float:
    """Return how many units of a motor start by their starters; 0 where its start is small."""
    motor, demand = load.motor, work.at.mode.demand.get(load.name)
    if motor is None or motor.starting_method == "converter" or demand is None:
        return 0.0
    start_kva = load.p_rated_kw / (load.efficiency * load.cos_phi) * motor.starting_current * demand.in_use
    return demand.in_use if start_kva > LARGE_START * capacity_kva else 0.0
