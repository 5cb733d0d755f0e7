"""The machines of a simulated fault: full-order circuits from the rows of the workbook."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from study.analyses.short_circuit_currents import solve_stages
from study.formulas.fault_current import SQRT3
from study.formulas.fault_iec61363 import load_phasor_a
from study.formulas.fault_iec61363_motors import TYPICAL_MOTOR
from study.formulas.park import direct_axis_circuit, quadrature_axis_circuit
from study.formulas.park_plant import (
    InductionMachine,
    Participant,
    StaticLoad,
    SynchronousMachine,
    plant_response,
)
from study.model.sources import Genset, MachineData, SynchronousMotor
from study.network.fault_network import FaultNetwork

MAGNETISING_PU = 3.0  # of an induction motor; common practice, no source
LARGEST_LEAKAGE = 0.8  # of X''d and X''q: more cannot be, and it has no influence on the current


def participants_of(
    net: FaultNetwork, home: int, simulated: NDArray[np.bool_]
) -> tuple[list[Participant], float]:
    """Return the machines behind the impedances that they see to a board, and the board's voltage.

    Parameters
    ----------
    net : FaultNetwork
        The maximum case.
    home : int
        Bus of the board.
    simulated : ndarray of bool, shape (source,)
        Machines that take part.

    Returns
    -------
    participants : list
        With the load that remains of the machines' load before the fault.
    voltage : float
        [pu]
    """
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
