"""A time simulation of one fault place beside the two standards: full-order machines, worst angle."""

from __future__ import annotations

import math
from dataclasses import fields

import numpy as np
from numpy.typing import NDArray

from study.analyses.short_circuit_currents import fault_parts, half_cycle, in_amperes, solve_stages
from study.analyses.short_circuit_equivalent import path_from_home
from study.analyses.short_circuit_general import general_case
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.analyses.short_circuit_totals import greatest_peaks, sums_at
from study.formulas.fault_current import SQRT2, SQRT3, FaultCurrent
from study.formulas.fault_iec61363 import load_phasor_a
from study.formulas.fault_iec61363_motors import TYPICAL_MOTOR
from study.formulas.park import direct_axis_circuit, quadrature_axis_circuit
from study.formulas.park_plant import (
    InductionMachine,
    Participant,
    StaticLoad,
    SynchronousMachine,
    envelopes_a,
    greatest_instant_a,
    phasors_a,
    plant_response,
)
from study.issues import SolveError
from study.model.sources import Genset, MachineData, SynchronousMotor
from study.network.fault_network import FaultNetwork, fault_network, fault_plant, only_sources
from study.network.fault_supplies import MAXIMUM
from study.network.network import Network
from study.results.arrays import read_only
from study.results.short_circuit import SimulatedFault

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

MAGNETISING_PU = 3.0  # of an induction motor; common practice, no source
LARGEST_LEAKAGE = 0.8  # of X''d and X''q: more cannot be, and it has no influence on the current
BIAS = (
    "Known bias of IEC 61363-1 against full-order machines: at a loaded board Iac is up to 9 % high and the "
    "peak between 3 % low and 4 % high; behind resistive cables Iac(T/2) is up to 7 % low and the peak 11 %, "
    "because the largest peak comes before T/2 and the decay theory takes R as small against X."
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
    participants, voltage = _participants(net, home, simulated)
    hz = network.plant.project.f_rated_hz
    response = plant_response(
        participants,
        voltage_v=SQRT3 * voltage,
        fault_r_ohm=z_path.real,
        fault_x_ohm=z_path.imag,
        frequency_hz=hz,
    )
    base = float(static.base_a[static.place_node[row]])
    times = np.unique(np.concatenate([np.linspace(0.0, 0.2, 101), [0.5 / hz]]).round(9))
    at = envelopes_a(response, np.array([0.5 / hz, 0.1]))[0] * base
    alone = only_sources(net, simulated)
    ship = _ship(alone, row)
    peak = greatest_instant_a(phasors_a(response, np.linspace(0.0, 0.6 / hz, 601)))[0] * base
    ac, dc = half_cycle(ship, hz)
    never = np.full(ship.dc_a.shape[1], np.inf)
    general = general_case(alone, ShortCircuitOptions()).case
    return SimulatedFault(
        mode=mode,
        place=place,
        peak_a=float(peak),
        iac_half_a=float(at[0]),
        iac_100ms_a=float(at[1]),
        ship_peak_a=float(greatest_peaks(ship, never, hz)[0]),
        ship_ip_a=float((SQRT2 * ac + dc).sum()),
        ship_iac_half_a=float(ac.sum()),
        ship_iac_100ms_a=float(sums_at(ship, never, np.array([0.1]))[0][0, 0]),
        general_ip_a=float(general.ip_3ph_a[row]),
        general_ik_initial_a=float(general.ik_3ph_a[row]),
        time_s=read_only(times),
        iac_a=read_only(envelopes_a(response, times)[0] * base),
        bias=BIAS,
        left_out=tuple(
            s.name
            for s, taken, i in zip(net.sources.supplies, simulated, net.sources.island, strict=True)
            if not taken and i == net.place_island[row]
        ),
    )


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


def _participants(
    net: FaultNetwork, home: int, simulated: NDArray[np.bool_]
) -> tuple[list[Participant], float]:
    """Return the machines behind the impedances that they see to the home board, and its voltage [pu]."""
    s = net.sources
    stage = solve_stages(net).subtransient
    current = stage.z_bus[home, s.bus] / stage.z_bus[home, home]
    z_board = s.at_board.r_ohm + 1j * s.at_board.x_sub_ohm
    lead = s.lead + z_board * np.where(
        np.abs(current) > 0.0, 1.0 / np.where(current == 0.0, 1.0, current) - 1.0, 0.0
    )
    lead = np.maximum(lead.real, 0.0) + 1j * np.maximum(lead.imag, 0.0)
    taken = np.flatnonzero(simulated)
    voltage = float(max(s.voltage[k] for k in taken if not s.asynchronous[k]))
    out: list[Participant] = []
    demand = 0j
    for k in taken:
        if s.asynchronous[k]:
            out.append(_motor(net, int(k), complex(lead[k])))
        else:
            machine = _machine(net, int(k), complex(lead[k]), voltage)
            demand += machine.load_a
            out.append(machine)
    motors = [x for x in out if isinstance(x, InductionMachine)]
    if motors:
        drawn = plant_response(
            motors,
            voltage_v=SQRT3 * voltage,
            fault_r_ohm=0.0,
            fault_x_ohm=0.0,
            frequency_hz=net.plant.network.plant.project.f_rated_hz,
        )
        demand += complex((drawn.modes_a[1:].sum(axis=1) + drawn.steady_a[1:]).sum())
    if demand.real > 0.0 > demand.imag:
        z = voltage / demand
        out.append(StaticLoad(r_ohm=z.real, x_ohm=z.imag))
    return out, voltage


def _machine(net: FaultNetwork, k: int, lead: complex, voltage: float) -> SynchronousMachine:
    """Return a set with the reactances of the maximum case, its field forced to what it sustains."""
    supply = net.sources.supplies[k]
    item = supply.item
    assert isinstance(item, Genset | SynchronousMotor)
    m, hz = item.machine, net.plant.network.plant.project.f_rated_hz
    tolerance = 1.0 + net.options.tolerance_sign * m.reactance_tolerance
    x_sub, x_trans = m.x_d2_saturated_pu * tolerance, m.x_d1_saturated_pu * tolerance
    xq_sub = m.x_q2_pu * (x_sub / m.x_d2_pu)
    leak = min(m.x_l_pu, LARGEST_LEAKAGE * min(x_sub, xq_sub))
    pu = supply.pu
    load = complex(load_phasor_a(voltage / pu, item.cos_phi_rated))
    if supply.kind == "synchronous motor":
        load = -load.conjugate()
    sustained = float(net.sources.bare.current.sustained_a[k])
    return SynchronousMachine(
        direct=direct_axis_circuit(
            xd=m.x_d_pu * pu,
            x_trans=x_trans * pu,
            x_sub=x_sub * pu,
            x_leak=leak * pu,
            t_trans_s=m.t_d1_s,
            t_sub_s=m.t_d2_s,
            frequency_hz=hz,
        ),
        quadrature=quadrature_axis_circuit(
            xq=max(m.x_q_pu, 1.01 * xq_sub) * pu,
            x_sub=xq_sub * pu,
            x_leak=leak * pu,
            t_sub_s=m.t_q2_s,
            frequency_hz=hz,
        ),
        x_leak_ohm=leak * pu,
        ra_ohm=m.r_stator_pu * pu,
        load_a=load,
        field_step_v=_field_step(m, pu, load, voltage, sustained),
        cable_r_ohm=lead.real,
        cable_x_ohm=lead.imag,
    )


def _field_step(m: MachineData, pu: float, load: complex, voltage: float, sustained: float) -> float:
    """Return the step of the e.m.f. that takes the steady short-circuit current to the sustained one.

    Source: steady two-axis machine with shorted terminals; Kundur, Power System Stability and Control,
    chapter 3, from memory.
    """
    ra, xd, xq = m.r_stator_pu * pu, m.x_d_pu * pu, m.x_q_pu * pu
    per_emf = math.hypot(ra, xq) / (ra**2 + xd * xq)
    delta = np.angle(voltage + complex(ra, xq) * load)
    turned = load * complex(np.exp(-1j * delta))
    emf = voltage * math.cos(delta) + ra * turned.real - xd * turned.imag
    return float(sustained / per_emf - emf)


def _motor(net: FaultNetwork, k: int, lead: complex) -> InductionMachine:
    bare = net.sources.bare
    rs, x = float(bare.r_dc_ohm[k]), float(bare.x_sub_ohm[k])
    rr = float(bare.r_ohm[k]) - rs
    scale = x / TYPICAL_MOTOR.x_pu
    return InductionMachine(
        rs_ohm=rs,
        rr_ohm=rr,
        xs_ohm=0.5 * x,
        xr_ohm=0.5 * x,
        xm_ohm=MAGNETISING_PU * net.sources.supplies[k].pu,
        slip=rr / scale,
        cable_r_ohm=lead.real,
        cable_x_ohm=lead.imag,
    )
