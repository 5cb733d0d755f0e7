"""What is odd about a mode's balance, in plain sentences."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

import numpy as np

from study.analyses.balance_demand import behind_converter
from study.analyses.balance_islands import Consumers
from study.analyses.balance_restart import Reconnection, restart_delay_s
from study.analyses.balance_shares import Share
from study.analyses.balance_sources import Source
from study.analyses.balance_supply import ModeSupply
from study.model.loads import Load
from study.model.modes import Mode
from study.model.plant import Plant
from study.model.sources import ShoreSupply, SynchronousMotor
from study.results.arrays import BoolArray
from study.results.balance import ConsumerDemand, IslandBalance

NAMES_SHOWN = 5
CURRENT_TOLERANCE = 0.10
SHORE_LOW, SHORE_HIGH = 0.90, 1.06  # IACS UR E10: +6/-10 % of rated voltage
UNDER_WAY = ("sea", "manoeuvring", "station keeping")


def listed(names: Sequence[str]) -> str:
    """Return names joined by commas, the first few of many.

    Examples
    --------
    >>> listed(["A", "B"])
    'A, B'
    """
    shown = ", ".join(names[:NAMES_SHOWN])
    return shown if len(names) <= NAMES_SHOWN else f"{shown} and {len(names) - NAMES_SHOWN} more"


def plant_findings(plant: Plant, demand: ConsumerDemand) -> Iterator[str]:
    """Yield what concerns the plant and no mode in particular."""
    emergency = [g.name for g in plant.gensets if g.service == "emergency"]
    if emergency and not any(m.kind == "emergency" for m in plant.modes):
        yield f"No mode is of the kind emergency, so {listed(emergency)} is not held against a list of loads."
    if not any(load.essential_to != "none" for load in plant.loads):
        yield (
            "No load is marked essential, so the check with any one main set out covers nothing "
            "(sheet Loads, Essential to)."
        )
    if not any(restart_delay_s(x) is not None for x in plant.loads if x.motor is not None):
        yield "No motor has a restart delay, so the restart after a blackout is not assessed (sheet Loads)."
    for load in plant.loads:
        if load.trip_stage and load.essential_to in ("propulsion", "steering", "safety"):
            yield f"{load.name} is essential to {load.essential_to} and yet in trip stage {load.trip_stage}."
    yield from _running_currents(plant, demand)
    if plant.filters:
        names = listed([bank.name for bank in plant.filters])
        yield f"The kvar of filters and capacitors ({names}) are in the load flow and not in the balance."
    known = {load.service for load in plant.loads}
    strange = sorted({s for m in plant.modes for s, _ in m.simultaneity} - known)
    if strange:
        yield f"Simultaneity factors are given for {listed(strange)}, a service that no load has."


def supply_findings(plant: Plant, mode: Mode, sources: Sequence[Source], supply: ModeSupply) -> Iterator[str]:
    """Yield what is odd about the sources of a mode."""
    running = [s for s in sources if s.running]
    if not running:
        yield f"No source is on line in {mode.name}: the plant is dead."
    for source in sources:
        if source.state == "standby" and source.island < 0 and source.service != "emergency":
            yield f"{source.name} stands by on {source.board}, which is dead in {mode.name}."
        if mode.kind == "emergency" and source.service == "emergency" and not source.running:
            yield f"{source.name} is an emergency set and not on in {mode.name}, an emergency mode."
    for number in range(len(supply.islands)):
        here = [s for s in running if s.island == number]
        yield from _mixed_sources(mode, here)
    for shore in plant.shore_supplies:
        if shore.name in supply.running:
            yield from _shore_quality(plant, shore)


def demand_findings(plant: Plant, mode: Mode, demand: ConsumerDemand, row: int) -> Iterator[str]:
    """Yield what is odd about the demand of a mode."""
    used = demand.in_use[row] > 0.0
    unfed = used & ~demand.fed[row]
    for board in plant.boards:
        here = [i for i in unfed.nonzero()[0] if plant.loads[i].board == board.name]
        if here:
            p_kw = float(demand.p_kw[row, here].sum())
            names = listed([demand.loads[i] for i in here])
            yield f"Not fed on {board.name}: {names}, in use with {p_kw:.1f} kW, not counted."
    installed = np.array([load.installed for load in plant.loads], dtype=float)
    for i in (demand.in_use[row] > installed).nonzero()[0]:
        yield f"{demand.loads[i]}: {demand.in_use[row, i]:g} in use, {installed[i]:g} installed."
    idle = [demand.loads[i] for i in (used & (demand.load_factor[row] == 0.0)).nonzero()[0]]
    if idle:
        yield f"In use with a load factor of 0 %, so counted as nothing: {listed(idle)}."


def island_findings(
    boards: Sequence[str],
    running: Sequence[Source],
    standby: Sequence[Source],
    shares: dict[str, Share],
    p_load_kw: float,
) -> Iterator[str]:
    """Yield what is odd about one island: no load, set powers that do not add up, charging."""
    where = boards[0]
    if p_load_kw == 0.0:
        names = listed([s.name for s in (*running, *standby)])
        yield f"{names} on {where}: no load in this island."
    given = [s for s in running if s.p_set_kw is not None and s.forming]
    free = [s for s in running if s.p_set_kw is None and s.forming]
    set_kw = math.fsum(s.p_set_kw or 0.0 for s in running if s.p_set_kw is not None)
    if given and not free and abs(set_kw - p_load_kw) > 0.01 * max(p_load_kw, 1.0):
        yield (
            f"The set powers on {where} make {set_kw:.0f} kW and the load {p_load_kw:.0f} kW; "
            "the difference is shared in proportion to rating."
        )
    for source in running:
        p_kw = shares[source.name].p_kw
        if p_kw < 0.0 and source.p_set_kw is not None:
            yield f"{source.name} takes {-p_kw:.0f} kW by its set power, a load of the other sources."
        elif p_kw < 0.0:
            yield f"{source.name} would be driven with {-p_kw:.0f} kW: the set powers exceed the load."


def section_findings(boards: Sequence[str], balance: IslandBalance) -> Iterator[str]:
    """Yield what the loss of the only set of a section means, where other sections have sources on line."""
    if balance.services_lost is None or not balance.loss or balance.loss[0].sets_left:
        return
    lost = balance.services_lost
    else_where = f"nothing else then serves {listed(lost)}"
    if not lost:
        else_where = (
            "each service to propulsion, steering and safety in use there has its like on another section"
        )
    yield (
        f"{balance.loss[0].lost} runs alone on its section: when it is lost, {listed(boards)} "
        f"{'is' if len(boards) == 1 else 'are'} dead until a standby set has started or a tie is closed; "
        f"{else_where}."
    )


def largest_start(plant: Plant, consumers: Consumers) -> int | None:
    """Return the place of the motor in use that draws most active power while it starts; None for none."""
    rows = [
        (starting_power_kw(plant.loads[i]), int(i))
        for i in consumers.here.nonzero()[0]
        if plant.loads[i].motor is not None and not behind_converter(plant.loads[i])
    ]
    return max(rows)[1] if rows else None


def start_finding(load: Load, capability_kw: float) -> Iterator[str]:
    """Yield a motor whose start asks more active power than the engines take in one step.

    Source: Japanese ship-electrical textbooks: engine check at the start of a motor.
    """
    p_kw = starting_power_kw(load)
    if p_kw > capability_kw:
        yield (
            f"{load.name}, started {_how(load)}, draws about {p_kw:.0f} kW while it runs up; the engines on "
            f"line take {capability_kw:.0f} kW in one step."
        )


def restart_findings(waiting: Sequence[Reconnection], live_after_s: float, limit_s: float) -> Iterator[str]:
    """Yield what the restart of one island after a blackout leaves open."""
    if live_after_s > limit_s:
        yield (
            f"After a blackout the first set is on the board after {live_after_s:.0f} s; "
            f"{limit_s:.0f} s are allowed."
        )
    if waiting:
        p_kw = math.fsum(x.p_kw for x in waiting)
        yield (
            f"After a blackout the sets that start have no room for {listed([x.load for x in waiting])} "
            f"({p_kw:.0f} kW); they wait for another set."
        )


def by_hand_findings(mode: Mode, loads: Sequence[Load], used: BoolArray) -> Iterator[str]:
    """Yield the essential motors in use under way that do not come back by themselves."""
    by_hand = [
        load.name
        for load, on in zip(loads, used, strict=True)
        if on
        and load.motor is not None
        and load.essential_to in ("propulsion", "steering", "safety")
        and restart_delay_s(load) is None
    ]
    if by_hand and mode.kind in UNDER_WAY:
        yield f"Essential motors without a restart delay stay off after a blackout: {listed(by_hand)}."


def synchronous_findings(motors: Sequence[tuple[SynchronousMotor, float]]) -> Iterator[str]:
    """Yield how synchronous motors on line are counted."""
    for motor, p_kw in motors:
        if p_kw > 0.0:
            yield (
                f"{motor.name} counts with {p_kw:.0f} kW and no kvar, and not as an essential load: "
                "synchronous motors have no row in Demand."
            )


def starting_power_kw(load: Load) -> float:
    """Return the active power that one motor of a row draws from the board while it starts [kW].

    ``sqrt3 U I_start cos(start)`` with the line current of the starting method: in full when direct, a third
    in star, the square of the tap with an autotransformer, the limit of a soft starter.

    Source: common practice, no source.
    """
    motor = load.motor
    if motor is None or behind_converter(load):
        return load.p_rated_kw / load.efficiency
    line = {
        "direct": motor.starting_current,
        "star-delta": motor.starting_current / 3.0,
        "autotransformer": motor.starting_current * motor.autotransformer_tap**2,
        "soft starter": min(motor.soft_starter_current, motor.starting_current),
    }[motor.starting_method]
    return load.p_rated_kw / (load.efficiency * load.cos_phi) * line * motor.starting_cos_phi


def _running_currents(plant: Plant, demand: ConsumerDemand) -> Iterator[str]:
    for load in plant.loads:
        if load.running_current_a is None:
            continue
        efficiency = load.efficiency if load.kind == "motor" else 1.0
        lines = math.sqrt(3.0) if load.phases == 3 else 1.0
        rated_a = load.p_rated_kw * 1000.0 / (efficiency * load.cos_phi * lines * load.u_rated_v)
        part = load.p_absorbed_kw / load.p_rated_kw
        low_a, high_a = sorted((rated_a, rated_a * part))
        given = load.running_current_a
        if not low_a * (1.0 - CURRENT_TOLERANCE) <= given <= high_a * (1.0 + CURRENT_TOLERANCE):
            yield (
                f"{load.name}: running current {given:.4g} A, but its kW, efficiency and power factor make "
                f"{rated_a:.4g} A at rated output; the balance uses kW."
            )


def _mixed_sources(mode: Mode, here: Sequence[Source]) -> Iterator[str]:
    emergency = [s.name for s in here if s.service == "emergency"]
    shore = [s.name for s in here if s.service == "shore"]
    sets = [s.name for s in here if s.kind == "genset"]
    if emergency and mode.kind != "emergency":
        yield f"Emergency set {listed(emergency)} is on in {mode.name}, which is no emergency mode."
    if shore and sets:
        yield f"{listed(shore)} and {listed(sets)} run in parallel in {mode.name}; only for change-over."


def _shore_quality(plant: Plant, shore: ShoreSupply) -> Iterator[str]:
    rated_hz = plant.project.f_rated_hz
    if abs(shore.f_hz - rated_hz) > 0.005 * rated_hz:
        yield (
            f"{shore.name} gives {shore.f_hz:g} Hz to a {rated_hz:g} Hz plant: motor speeds and powers "
            "change with it and are not corrected here."
        )
    nominal_v = plant.board(shore.board).u_nominal_v
    if not SHORE_LOW <= shore.u_rated_v / nominal_v <= SHORE_HIGH:
        yield f"{shore.name} gives {shore.u_rated_v:g} V to {shore.board}, a board of {nominal_v:g} V."


def _how(load: Load) -> str:
    method = load.motor.starting_method if load.motor else "direct"
    return method if method == "direct" else f"by {method}"
