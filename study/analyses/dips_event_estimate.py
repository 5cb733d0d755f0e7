"""The quick estimate of every event: what it puts on the network, behind the reactances of the sets."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from study.analyses.dips_cases import CaseWork
from study.analyses.dips_options import DipOptions
from study.analyses.dips_places import judged_board, start_by_method
from study.analyses.dips_simulation import prepare_case
from study.issues import SolveError
from study.model.modes import Event
from study.network import dynamics_data as d
from study.network.batch import BatchSolution
from study.network.dynamics_build import place_of
from study.network.network import ModeNetwork
from study.network.start_network import StartNetwork, source_admittances, start_network
from study.results.arrays import ComplexArray, FloatArray, IntArray
from study.results.dips_events import EventEstimate

# What has no such estimate: a setting or the field act slowly, a fault takes all voltage.
SLOW = {
    "set-point step": "a setting acts through the regulator: see the simulation",
    "droop changed": "a setting acts through the regulator: see the simulation",
    "field loss": "the field decays slowly: see the simulation",
    "build-up": "the set is not on the boards yet: see the simulation",
    "fault": "the voltage of the place is nothing: see short circuits, and the simulation",
    "fault cleared": "what comes back depends on the motors: see the simulation",
    "maladjustment": "see sharing",
}


def event_estimates(
    networks: Sequence[ModeNetwork],
    p_kw: FloatArray,
    q_kvar: FloatArray,
    options: DipOptions | None = None,
) -> tuple[EventEstimate, ...]:
    """Estimate every row of the sheet Events by itself, from the mode as it is.

    Motor starts, load steps, transformers that are energised and load thrown off are admittances that come or
    go; a set that trips takes its e.m.f. and its reactance with it.

    Source: superposition in the linear network of e.m.f.s behind Ra + jX'd; Sheldrake, *Handbook of
    Electrical Engineering*, appendix G, for the motor start.

    Parameters
    ----------
    networks : sequence of ModeNetwork
        One for each mode.
    p_kw, q_kvar : ndarray, shape (mode, load)
        What the consumers ask for. [kW], [kvar]
    options : DipOptions, optional
        Limits.

    Returns
    -------
    tuple of EventEstimate
        In the sheet's order; rows that no closed form covers say so.
    """
    if not networks:
        return ()
    row = {at.mode.name: n for n, at in enumerate(networks)}
    return tuple(
        _estimate(networks[row[e.mode]], e, p_kw[row[e.mode]], q_kvar[row[e.mode]], options or DipOptions())
        for e in networks[0].network.plant.events
    )


def _estimate(
    at: ModeNetwork, event: Event, p_kw: FloatArray, q_kvar: FloatArray, options: DipOptions
) -> EventEstimate:
    if event.kind in SLOW:
        return _none(event, SLOW[event.kind])
    try:
        batch, work = prepare_case(at, [replace(event, duration_s=None)], p_kw, q_kvar, options)
        change = _change(batch, work)
    except SolveError as error:
        return _none(event, str(error))
    first, transient = (_voltages(batch, work, change, first_cycle=f) for f in (True, False))
    before = _boards(work, batch.v_bus_pu[0])
    judged = judged_board(work.at, work.island)
    island = np.array(work.at.view.board_island, np.int64)
    others = np.flatnonzero((island == work.island) & (np.arange(len(before)) != judged))
    ratio = transient[others] / before[others]
    worst = int(others[np.argmax(np.abs(ratio - 1.0))]) if len(others) else judged
    names = [b.name for b in work.plant.boards]
    return EventEstimate(
        case=event.case,
        mode=event.mode,
        kind=event.kind,
        equipment=event.equipment,
        cell=event.cell,
        assessed=True,
        reason="",
        board=names[judged],
        u_before_pu=float(before[judged]),
        u_first_cycle_pu=float(first[judged]),
        u_transient_pu=float(transient[judged]),
        change_pu=float(transient[judged] / before[judged] - 1.0),
        worst_board=names[worst],
        u_worst_pu=float(transient[worst]),
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Change:
    """Admittances that come on at buses [place], and the source that goes (-1: none)."""

    bus: IntArray
    y: ComplexArray
    lost: int


def _change(batch: BatchSolution, work: CaseWork) -> _Change:
    """Return what an event puts on the network."""
    at = work.at
    parts: dict[int, complex] = {}
    s_base = at.network.s_base_kva

    def add(bus: int, y: complex) -> None:
        parts[bus] = parts.get(bus, 0j) + y

    for drive in work.drives:
        motor = drive.load.motor
        assert motor is not None
        if motor.starting_method == "converter":
            continue
        start, (bus, z) = start_by_method(motor), place_of(at, drive)
        number = next(n for n, x in enumerate(work.plant.loads) if x.name == drive.load.name)
        kva = drive.units * drive.load.p_rated_kw / (drive.load.efficiency * drive.load.cos_phi)
        y = kva / s_base * float(at.load_arrays.v_scale[number]) ** 2 * start.times
        y *= np.exp(-1j * np.arccos(start.cos_phi))
        add(bus, complex(y / (1.0 + z * y)))
    # The first state of load is the event; a relay's stage is none of it.
    for h in work.happenings:
        if h.kind == d.CHANGE_LOAD:
            p, q = work.states[h.index - 1]
            ds = (p - work.p_kw + 1j * (q - work.q_kvar)) / s_base
            for n in np.flatnonzero(ds):
                bus = int(at.load_bus[n])
                add(bus, complex(np.conj(ds[n]) / abs(batch.v_bus_pu[0, bus]) ** 2))
    for x in work.board_loads:
        add(x.bus, complex(np.conj(x.s_pu)))
    for t in work.inrush:
        add(t.bus, -1j * t.y_pu)
    opened = [h.index for h in work.happenings if h.kind == d.OPEN_SOURCE]
    lost = at.source_names.index(work.rows()[opened[0]]) if opened else -1
    return _Change(bus=np.array(list(parts), np.int64), y=np.array(list(parts.values()), complex), lost=lost)


def _voltages(batch: BatchSolution, work: CaseWork, change: _Change, *, first_cycle: bool) -> FloatArray:
    """Return the boards' voltages just after, [board], per unit of nominal; 0 where nothing feeds them."""
    at = work.at
    y_source = source_admittances(batch, first_cycle=first_cycle)
    place, y, drive = change.bus, change.y, np.zeros(len(change.bus), complex)
    if change.lost >= 0:
        j = change.lost
        if not any(s.island == work.island and n != j for n, s in enumerate(at.sources) if y_source[n] != 0j):
            return np.zeros(len(work.plant.boards))
        bus = at.structure.source_bus[j]
        emf = batch.v_bus_pu[0, bus] + batch.i_source_pu[0, j] / y_source[j]
        place = np.concatenate([place, [bus]])
        y = np.concatenate([y, [-y_source[j]]])
        drive = np.concatenate([drive, [-y_source[j] * emf]])
    if not len(place):
        return _boards(work, batch.v_bus_pu[0])
    net: StartNetwork = start_network(batch, (work.p_kw, work.q_kvar), place, first_cycle=first_cycle)
    z = net.z[place]
    # V = V0 - Z (y V - J) at the places; then everywhere.
    at_place = np.linalg.solve(np.eye(len(place)) + z * y, net.v[place] + z @ drive)
    return _boards(work, net.v - net.z @ (y * at_place - drive))


def _boards(work: CaseWork, v: ComplexArray) -> FloatArray:
    at, boards = work.at, work.plant.boards
    nominal = np.array([b.u_nominal_v for b in boards])
    bus = at.bus_of_node[: len(boards)]
    u = np.abs(v[bus]) * at.network.u_base_v[: len(boards)] / nominal
    return np.asarray(np.where(bus >= 0, u, 0.0))


def _none(event: Event, reason: str) -> EventEstimate:
    nan = float("nan")
    return EventEstimate(
        case=event.case,
        mode=event.mode,
        kind=event.kind,
        equipment=event.equipment,
        cell=event.cell,
        assessed=False,
        reason=reason,
        board="",
        u_before_pu=nan,
        u_first_cycle_pu=nan,
        u_transient_pu=nan,
        change_pu=nan,
        worst_board="",
        u_worst_pu=nan,
    )
