"""Time simulations of fault places beside the two standards: full-order machines, worst angle."""

from __future__ import annotations

import math
from dataclasses import fields, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from study.analyses.short_circuit_currents import fault_parts, half_cycle, in_amperes, solve_stages
from study.analyses.short_circuit_equivalent import path_from_home
from study.analyses.short_circuit_general import general_case
from study.analyses.short_circuit_machines import participants_of
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.analyses.short_circuit_totals import greatest_peaks, sums_at
from study.formulas.fault_current import SQRT2, SQRT3, FaultCurrent
from study.formulas.fault_iec61363_bias import BIAS_MOTORS_UP_TO, BIAS_QUANTITIES, known_bias_percent
from study.formulas.park_plant import (
    PlantResponse,
    envelopes_a,
    greatest_instant_a,
    phasors_a,
    plant_response,
)
from study.issues import SolveError
from study.model.modes import Event
from study.network.fault_network import FaultNetwork, fault_network, fault_plant, only_sources
from study.network.fault_supplies import MAXIMUM
from study.network.network import Network
from study.results.arrays import read_only
from study.results.short_circuit import KnownBias, SimulatedFault

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

BOARD, FEEDER = "board", "feeder, each source"  # of `known_bias_percent`
_STATE = "loaded, forced field"  # of every maximum case
_WAVE_CYCLES = 6
_SERIES = ("iac_a", "ship_iac_a", "wave_a", "ship_envelope_a")


def simulated_faults(network: Network) -> tuple[SimulatedFault, ...]:
    """Return the faults that the sheet Events asks for, each place of a mode once.

    Parameters
    ----------
    network : Network
        Of the plant, with its events.

    Returns
    -------
    tuple of SimulatedFault
        In the order of the sheet; what cannot be simulated says why.
    """
    asked: dict[tuple[str, str], list[Event]] = {}
    for event in network.plant.events:
        if event.kind == "fault":
            asked.setdefault((event.mode, event.equipment), []).append(event)
    found = []
    for (mode, place), events in asked.items():
        try:
            one = simulate_fault(network, mode, place)
        except SolveError as error:
            one = _not_simulated(mode, place, str(error))
        except (ValueError, ArithmeticError) as error:
            one = _not_simulated(mode, place, f"{mode}: a machine's data cannot be simulated ({error})")
        cases = tuple(dict.fromkeys(e.case for e in events))
        found.append(replace(one, cases=cases, cell=events[0].cell))
    return tuple(found)


def known_bias() -> tuple[KnownBias, ...]:
    """Return the known differences of IEC 61363-1 in a maximum case, by kind of place and quantity.

    Returns
    -------
    tuple of KnownBias
        [%]
    """
    words = {BOARD: "on a board that sets feed", FEEDER: "behind a cable"}
    return tuple(
        KnownBias(place=words[place], state=_STATE, quantity=quantity, low_percent=low, high_percent=high)
        for place in (BOARD, FEEDER)
        for quantity, (low, high) in zip(BIAS_QUANTITIES, known_bias_percent(place), strict=True)
    )


def simulate_fault(network: Network, mode: str, place: str) -> SimulatedFault:
    """Simulate a three-phase fault in the maximum case of a mode and set it beside the two standards.

    Sets and motors stand on the board behind which the place lies, each behind what it sees to there;
    motors on the faulted side of that board, supplies without a machine and sustained loads are left out of
    both sides of the comparison.

    Parameters
    ----------
    network : Network
        Of the plant.
    mode : str
        Name of the mode.
    place : str
        A board, or equipment with a cable of its own.

    Returns
    -------
    SimulatedFault
        [A] at the voltage of the place.

    Raises
    ------
    SolveError
        No such place, a dead one, or one that no machine feeds.
    """
    static = fault_plant(network)
    net = fault_network(static, network.plant.mode(mode), MAXIMUM)
    row = _row(net, place)
    home, z_path, downstream = path_from_home(net, row)
    simulated = np.array(
        [s.kind not in ("shore supply", "converter supply") for s in net.sources.supplies], bool
    )
    simulated &= (net.sources.island == net.place_island[row]) & ~downstream
    machines = simulated & ~net.sources.asynchronous
    if not machines.any():
        raise SolveError(f"{mode}: no synchronous machine feeds {place}; nothing can be simulated")
    participants, voltage = participants_of(net, home, simulated)
    hz = network.plant.project.f_rated_hz
    response = plant_response(
        participants,
        voltage_v=SQRT3 * voltage,
        fault_r_ohm=z_path.real,
        fault_x_ohm=z_path.imag,
        frequency_hz=hz,
    )
    alone = only_sources(net, simulated)
    general = general_case(alone, ShortCircuitOptions()).case
    behind = FEEDER if abs(z_path) > 0.0 else BOARD
    bias = np.array(known_bias_percent(behind))
    return SimulatedFault(
        cases=(),
        cell="",
        mode=mode,
        place=place,
        simulated=True,
        reason="",
        behind="on a board that sets feed" if behind == BOARD else "behind a cable",
        general_ip_a=float(general.ip_3ph_a[row]),
        general_ik_initial_a=float(general.ik_3ph_a[row]),
        bias_low_percent=read_only(bias[:, 0]),
        bias_high_percent=read_only(bias[:, 1]),
        motors_over_sets=_motors_over_sets(net, simulated),
        motors_known_to=BIAS_MOTORS_UP_TO,
        left_out=tuple(
            s.name
            for s, taken, i in zip(net.sources.supplies, simulated, net.sources.island, strict=True)
            if not taken and i == net.place_island[row]
        ),
        **_machines_currents(response, float(static.base_a[static.place_node[row]]), hz),
        **_ship_currents(_ship(alone, row), hz),
    )


def _motors_over_sets(net: FaultNetwork, simulated: NDArray[np.bool_]) -> float:
    """Return the rated current of the motors over that of the synchronous machines, both in pu."""
    s = net.sources
    base = net.plant.base_a[np.array([x.node for x in s.supplies], np.int64)]
    rated = np.array([x.rated_a for x in s.supplies]) / base * simulated
    return float(rated[s.asynchronous].sum() / rated[~s.asynchronous].sum())


def _machines_currents(response: PlantResponse, base_a: float, hz: float) -> dict[str, Any]:
    """Return the figures of the simulation, and its times."""
    late, wave = _times(hz)
    at = envelopes_a(response, np.array([0.5 / hz, 0.1]))[0] * base_a
    first = np.linspace(0.0, 0.6 / hz, 601)
    phasors = phasors_a(response, first)[0]
    worst = int(np.abs(phasors).argmax())
    # the angle of the voltage is such that this phase has its peak there
    angle = -2.0 * math.pi * hz * first[worst] - float(np.angle(phasors[worst]))
    turned = phasors_a(response, wave)[0] * np.exp(1j * (2.0 * math.pi * hz * wave + angle))
    return {
        "peak_a": float(greatest_instant_a(phasors) * base_a),
        "iac_half_a": float(at[0]),
        "iac_100ms_a": float(at[1]),
        "time_s": read_only(late),
        "iac_a": read_only(envelopes_a(response, late)[0] * base_a),
        "wave_time_s": read_only(wave),
        "wave_a": read_only(SQRT2 * turned.real * base_a),
    }


def _ship_currents(ship: FaultCurrent, hz: float) -> dict[str, Any]:
    """Return the figures of IEC 61363-1."""
    late, wave = _times(hz)
    never = np.full(ship.dc_a.shape[1], np.inf)
    ac, dc = half_cycle(ship, hz)
    over_wave = sums_at(ship, never, wave)
    return {
        "ship_peak_a": float(greatest_peaks(ship, never, hz)[0]),
        "ship_ip_a": float((SQRT2 * ac + dc).sum()),
        "ship_iac_half_a": float(ac.sum()),
        "ship_iac_100ms_a": float(sums_at(ship, never, np.array([0.1]))[0][0, 0]),
        "ship_iac_a": read_only(sums_at(ship, never, late)[0][0]),
        "ship_envelope_a": read_only(SQRT2 * over_wave[0][0] + over_wave[1][0]),
    }


def _times(hz: float) -> tuple[FloatArray, FloatArray]:
    """Return the times of the a.c. component, to 0.2 s, and of the first cycles."""
    late = np.unique(np.concatenate([np.linspace(0.0, 0.2, 101), [0.5 / hz]]).round(9))
    return late, np.linspace(0.0, _WAVE_CYCLES / hz, 48 * _WAVE_CYCLES + 1)


def _not_simulated(mode: str, place: str, reason: str) -> SimulatedFault:
    names = [f.name for f in fields(SimulatedFault)]
    series = [n for n in names if n.endswith(("_percent", "_s")) or n in _SERIES]
    values: dict[str, Any] = {n: math.nan for n in names if n.endswith(("_a", "_sets", "_known_to"))}
    values |= {n: read_only([]) for n in series}
    values |= {"cases": (), "cell": "", "mode": mode, "place": place, "behind": "", "left_out": ()}
    return SimulatedFault(**values, simulated=False, reason=reason)


def _row(net: FaultNetwork, place: str) -> int:
    nodes = net.plant.network.topology.nodes
    rows = [k for k, n in enumerate(net.plant.place_node) if nodes[n].owner == place]
    if not rows:
        raise SolveError(f"there is no fault place {place!r}: name a board, or equipment with its own cable")
    if net.place_bus[rows[0]] < 0:
        raise SolveError(f"{net.mode.name}: {place} is dead")
    return rows[0]


def _ship(net: FaultNetwork, row: int) -> FaultCurrent:
    """Return the exponentials of IEC 61363-1 at one place, (1, source)."""
    parts = in_amperes(net, fault_parts(net, solve_stages(net), None, 1.0)[0])
    return FaultCurrent(**{f.name: getattr(parts, f.name)[[row]] for f in fields(FaultCurrent)})
