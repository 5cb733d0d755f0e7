"""Full-order fault simulation of several machines on one board, solved exactly by eigenvalues.

Speeds are constant, which is fair for about 0.2 s; field voltage is constant after one step. The plant is
then linear, and its response to a fault is a sum of modes: the slow ones are the a.c. envelope, those near
supply frequency are the direct component.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.linalg import block_diag

from study.formulas.fault_current import SQRT2, SQRT3, ComplexArray, FloatArray
from study.formulas.park import DirectAxis, QuadratureAxis

# How far the modes may miss zero current at t = 0, as a part of the steady current, before they are refused.
_MODE_TOLERANCE = 1e-8


@dataclass(frozen=True, slots=True, kw_only=True)
class SynchronousMachine:
    """A synchronous machine with its own cable, as full-order circuit [ohm at rated frequency].

    Attributes
    ----------
    direct, quadrature : DirectAxis, QuadratureAxis
        Rotor circuits.
    x_leak_ohm, ra_ohm : float
        Stator leakage reactance and resistance [ohm].
    load_a : complex
        Load current before the fault in the generator sense, on the board voltage [A].
    field_step_v : float
        Step of the e.m.f. behind Xd at t = 0, phase value, that a regulator forces [V]; 0 for constant field.
    cable_r_ohm, cable_x_ohm : float
        Cable between terminals and board [ohm].
    """

    direct: DirectAxis
    quadrature: QuadratureAxis
    x_leak_ohm: float
    ra_ohm: float
    load_a: complex
    field_step_v: float
    cable_r_ohm: float
    cable_x_ohm: float


@dataclass(frozen=True, slots=True, kw_only=True)
class InductionMachine:
    """An induction motor with its own cable, as full-order circuit [ohm at rated frequency].

    Attributes
    ----------
    rs_ohm, rr_ohm, xs_ohm, xr_ohm, xm_ohm : float
        Stator and rotor resistance, leakages and mutual reactance [ohm].
    slip : float
        Slip, kept during the fault [pu].
    cable_r_ohm, cable_x_ohm : float
        Cable between terminals and board [ohm].
    """

    rs_ohm: float
    rr_ohm: float
    xs_ohm: float
    xr_ohm: float
    xm_ohm: float
    slip: float
    cable_r_ohm: float
    cable_x_ohm: float


@dataclass(frozen=True, slots=True, kw_only=True)
class StaticLoad:
    """A load of constant series impedance on the board [ohm at rated frequency].

    Attributes
    ----------
    r_ohm, x_ohm : float
        One phase; the resistance above 0 ohm [ohm].
    """

    r_ohm: float
    x_ohm: float


Participant = SynchronousMachine | InductionMachine | StaticLoad


@dataclass(frozen=True, slots=True, kw_only=True)
class PlantResponse:
    """Currents after the fault as modes, in a frame that turns with the supply.

    Attributes
    ----------
    rate_per_s : ComplexArray
        Eigenvalues, shape modes [1/s].
    modes_a : ComplexArray
        Amplitudes, shape (1 + participants) x modes: first the current at the fault, then each
        participant's own in their order [A].
    steady_a : ComplexArray
        Steady values, shape 1 + participants; a participant's includes its current before the fault [A].
    frequency_hz : float
        [Hz]
    """

    rate_per_s: ComplexArray
    modes_a: ComplexArray
    steady_a: ComplexArray
    frequency_hz: float


@dataclass(frozen=True, slots=True, kw_only=True)
class _Block:
    """One machine as v = (X/w0) di/dt + (R + G) i, stator first, and its place in the common frame."""

    x: FloatArray
    r: FloatArray
    to_common: FloatArray
    drive_v: FloatArray
    before_a: complex


def _synchronous_block(machine: SynchronousMachine, phase_v: float) -> _Block:
    """Return the block of a synchronous machine; states id, iq, ifd, i1d, i1q in its own rotor frame."""
    d, q = machine.direct, machine.quadrature
    leak, ra = machine.x_leak_ohm + machine.cable_x_ohm, machine.ra_ohm + machine.cable_r_ohm
    x = np.array(
        [
            [-(d.xad + leak), 0.0, d.xad, d.xad, 0.0],
            [0.0, -(q.xaq + leak), 0.0, 0.0, q.xaq],
            [-d.xad, 0.0, d.xad + d.x_field, d.xad, 0.0],
            [-d.xad, 0.0, d.xad, d.xad + d.x_damper, 0.0],
            [0.0, -q.xaq, 0.0, 0.0, q.xaq + q.x_damper],
        ]
    )
    r = np.diag([-ra, -ra, d.r_field, d.r_damper, q.r_damper])
    r[0] -= x[1]
    r[1] += x[0]
    delta = cmath.phase(phase_v + (ra + 1j * (q.xaq + leak)) * machine.load_a)
    to_common = np.zeros((2, 5))
    to_common[:, :2] = [[math.sin(delta), math.cos(delta)], [-math.cos(delta), math.sin(delta)]]
    drive = np.array([0.0, 0.0, machine.field_step_v * d.r_field / d.xad, 0.0, 0.0])
    return _Block(x=x, r=r, to_common=to_common, drive_v=drive, before_a=machine.load_a)


def _induction_block(machine: InductionMachine, phase_v: float) -> _Block:
    """Return the block of an induction motor; states stator x, y and rotor x, y in the common frame."""
    rs = machine.rs_ohm + machine.cable_r_ohm
    xs = machine.xs_ohm + machine.cable_x_ohm
    xm, xr = machine.xm_ohm, machine.xr_ohm
    x = np.kron(np.array([[-(xm + xs), xm], [-xm, xm + xr]]), np.eye(2))
    r = np.diag([-rs, -rs, machine.rr_ohm, machine.rr_ohm])
    turn = np.array([[0.0, -1.0], [1.0, 0.0]])
    r[:2] += turn @ x[:2]
    r[2:] += machine.slip * turn @ x[2:]
    rotor = 1.0 / (1.0 / (1j * xm) + 1.0 / (machine.rr_ohm / machine.slip + 1j * xr))
    before = -phase_v / (rs + 1j * xs + rotor)
    return _Block(x=x, r=r, to_common=np.eye(2, 4), drive_v=np.zeros(4), before_a=before)


def _static_block(load: StaticLoad, phase_v: float) -> _Block:
    """Return the block of a static load; states current x, y in the common frame, into the board."""
    z = np.array([[load.r_ohm, -load.x_ohm], [load.x_ohm, load.r_ohm]])
    before = -phase_v / complex(load.r_ohm, load.x_ohm)
    return _Block(x=-load.x_ohm * np.eye(2), r=-z, to_common=np.eye(2), drive_v=np.zeros(2), before_a=before)


def _blocks(participants: Sequence[Participant], voltage_v: float) -> list[_Block]:
    """Return one block for each participant, in their order."""
    phase_v = voltage_v / SQRT3
    if not participants:
        raise ValueError("a plant without machines has no fault current")
    blocks = []
    for participant in participants:
        match participant:
            case SynchronousMachine():
                blocks.append(_synchronous_block(participant, phase_v))
            case InductionMachine():
                blocks.append(_induction_block(participant, phase_v))
            case StaticLoad():
                blocks.append(_static_block(participant, phase_v))
    return blocks


def state_space(
    participants: Sequence[Participant],
    *,
    voltage_v: float,
    fault_r_ohm: float,
    fault_x_ohm: float,
    frequency_hz: float,
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return A, b and C of the change of currents after a fault: di/dt = A i + b, i(0) = 0.

    Source: two-axis equations in the generator sense, Kundur, Power System Stability and Control, chapters 3
    and 7, from memory; Kirchhoff at the board, with the impedance up to the fault as common branch.

    Parameters
    ----------
    participants : sequence
        What stays on the board during the fault, at least one machine.
    voltage_v : float
        Line voltage of the board before the fault [V].
    fault_r_ohm, fault_x_ohm : float
        Impedance between board and fault [ohm].
    frequency_hz : float
        [Hz]

    Returns
    -------
    tuple of FloatArray
        A (states x states) [1/s], b (states) [A/s], C (2 x states) whose rows add the stator currents to the
        real and imaginary part of the current at the fault.

    Raises
    ------
    ValueError
        No participant at all.
    """
    blocks = _blocks(participants, voltage_v)
    omega0 = 2.0 * math.pi * frequency_hz
    to_common = np.hstack([block.to_common for block in blocks])
    branch = np.array([[fault_r_ohm, -fault_x_ohm], [fault_x_ohm, fault_r_ohm]])
    x = block_diag(*[block.x for block in blocks]) - fault_x_ohm * to_common.T @ to_common
    r = to_common.T @ branch @ to_common - block_diag(*[block.r for block in blocks])
    drive = np.concatenate([block.drive_v for block in blocks]) - to_common.T @ np.array(
        [voltage_v / SQRT3, 0.0]
    )
    return omega0 * np.linalg.solve(x, r), omega0 * np.linalg.solve(x, drive), to_common


def plant_response(
    participants: Sequence[Participant],
    *,
    voltage_v: float,
    fault_r_ohm: float,
    fault_x_ohm: float,
    frequency_hz: float,
) -> PlantResponse:
    """Return the modes of the currents after a three-phase fault behind an impedance of the board.

    Source: eigenvalue solution of `state_space`.

    Parameters
    ----------
    participants : sequence
        What stays on the board during the fault, at least one machine.
    voltage_v : float
        Line voltage of the board before the fault [V].
    fault_r_ohm, fault_x_ohm : float
        Impedance between board and fault [ohm].
    frequency_hz : float
        [Hz]

    Returns
    -------
    PlantResponse
        Current at the fault and of each participant.

    Raises
    ------
    ValueError
        No participant at all.
    ArithmeticError
        The modes do not add up to the state before the fault.
    """
    a, b, to_common = state_space(
        participants,
        voltage_v=voltage_v,
        fault_r_ohm=fault_r_ohm,
        fault_x_ohm=fault_x_ohm,
        frequency_hz=frequency_hz,
    )
    steady = -np.linalg.solve(a, b)
    rate, vectors = np.linalg.eig(a)
    amplitude = vectors * np.linalg.solve(vectors, -steady.astype(complex))
    if np.abs(amplitude.sum(axis=1) + steady).max() > _MODE_TOLERANCE * np.abs(steady).max():
        raise ArithmeticError("the eigenvectors of the plant are too close to dependent")
    pick = to_common[0] + 1j * to_common[1]
    modes, steady_currents, start = [pick @ amplitude], [pick @ steady], 0
    for block in _blocks(participants, voltage_v):
        own = slice(start, start + len(block.x))
        modes.append(pick[own] @ amplitude[own])
        steady_currents.append(block.before_a + pick[own] @ steady[own])
        start = own.stop
    return PlantResponse(
        rate_per_s=np.asarray(rate, dtype=complex),
        modes_a=np.array(modes),
        steady_a=np.array(steady_currents),
        frequency_hz=frequency_hz,
    )


def phasors_a(response: PlantResponse, time_s: FloatArray) -> ComplexArray:
    """Return the currents in the turning frame: at the fault, then of each participant.

    Source: two-axis theory; the direct component turns backwards at supply frequency in this frame.

    Parameters
    ----------
    response : PlantResponse
        Of `plant_response`.
    time_s : FloatArray
        Shape times [s].

    Returns
    -------
    ComplexArray
        Shape (1 + participants) x times, r.m.s. measure [A].
    """
    growth = np.exp(np.multiply.outer(response.rate_per_s, time_s))
    return np.asarray(response.modes_a @ growth + response.steady_a[:, None], dtype=complex)


def envelopes_a(response: PlantResponse, time_s: FloatArray) -> FloatArray:
    """Return the symmetrical currents, r.m.s.: at the fault, then of each participant.

    They are the modes that turn slower than half supply frequency.

    Source: two-axis theory.

    Parameters
    ----------
    response : PlantResponse
        Of `plant_response`.
    time_s : FloatArray
        Shape times [s].

    Returns
    -------
    FloatArray
        Shape (1 + participants) x times [A].
    """
    slow = np.abs(response.rate_per_s.imag) < math.pi * response.frequency_hz
    growth = np.exp(np.multiply.outer(response.rate_per_s[slow], time_s))
    return np.asarray(np.abs(response.modes_a[:, slow] @ growth + response.steady_a[:, None]))


def greatest_instant_a(phasor_a: ComplexArray) -> FloatArray:
    """Return the greatest phase current over the sampled times and over all angles of the voltage.

    Source: two-axis theory; over all angles the phase current reaches sqrt2 abs(id + j iq).

    Parameters
    ----------
    phasor_a : ComplexArray
        Times on the last axis; 200 points in half a cycle find the maximum within 0.01 % [A].

    Returns
    -------
    FloatArray
        One axis less [A].
    """
    return np.asarray(SQRT2 * np.abs(phasor_a).max(axis=-1))
