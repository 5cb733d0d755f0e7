"""Motors as the time simulation wants them: circuits from name-plates, inertia, starters, running motors."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq

from study.formulas.induction import (
    MotorCircuit,
    StartingData,
    circuit_from_name_plate,
    motor_admittance,
    motor_torque,
)
from study.formulas.starting import (
    largest_driven_inertia,
    motor_inertia_constant,
    run_up_integral,
    starting_torque_factor,
)
from study.issues import SolveError
from study.model.loads import Load, MotorData
from study.network import dynamics_data as d

FloatArray = NDArray[np.float64]

METHODS = {
    "direct": d.DIRECT,
    "star-delta": d.STAR_DELTA,
    "autotransformer": d.AUTOTRANSFORMER,
    "soft starter": d.SOFT_STARTER,
    "converter": d.BY_CONVERTER,
}
LAWS = {"constant": d.CONSTANT_TORQUE, "fan": d.FAN, "hyperbolic": d.HYPERBOLIC}
# Pumps, fans and compressors of ships have a small part of what the motor could start; common practice.
ASSUMED_INERTIA_SHARE = 0.2
LEAST_H_S, LARGEST_H_S = 0.02, 20.0
CONVERTER_RAMP_S = 10.0  # where the workbook gives no starting time; common practice, no source


@dataclass(frozen=True, slots=True, kw_only=True)
class Inertia:
    """The run-up constant of a drive, where it comes from, and whether it is data or an assumption."""

    h_s: float
    basis: str
    known: bool


def circuit_of(load: Load) -> MotorCircuit:
    """Return the circuit of a motor load from its name-plate.

    Parameters
    ----------
    load : Load
        A motor.

    Returns
    -------
    MotorCircuit
        Per unit of one unit's rated input.

    Raises
    ------
    SolveError
        A name-plate that no circuit meets.
    """
    motor = _motor(load)
    start = StartingData(
        starting_current=motor.starting_current,
        starting_cos_phi=motor.starting_cos_phi,
        locked_rotor_torque=motor.locked_rotor_torque,
        breakdown_torque=motor.breakdown_torque,
    )
    try:
        return circuit_from_name_plate(load.efficiency, load.cos_phi, start)
    except ValueError as error:
        raise SolveError(f"{load.name}: {error}") from error


def _motor(load: Load) -> MotorData:
    if load.motor is None:
        raise SolveError(f"{load.name} is no motor")
    return load.motor


def inertia_of(load: Load, circuit: MotorCircuit, load_pu: float, f_hz: float) -> Inertia:
    """Return the run-up constant of a drive: from its inertia, its starting time, or assumed.

    Parameters
    ----------
    load : Load
        A motor.
    circuit : MotorCircuit
        Its circuit.
    load_pu : float
        Torque of the driven machine at full speed. [x rated torque]
    f_hz : float
        Rated frequency. [Hz]

    Returns
    -------
    Inertia
        H over rated torque power. [s]
    """
    motor = _motor(load)
    if motor.inertia_kgm2 is not None:
        h = motor_inertia_constant(motor.inertia_kgm2, motor.poles, f_hz, load.p_rated_kw, circuit.slip_rated)
        return Inertia(h_s=h, basis="inertia of the workbook", known=True)
    if motor.starting_time_s is not None and motor.starting_method != "converter":
        integral = run_up_integral(
            circuit,
            locked_rotor_torque=motor.locked_rotor_torque,
            law=motor.torque_law,
            load_pu=load_pu,
            torque_share=_torque_share(motor),
        )
        h = motor.starting_time_s / (2.0 * integral)
        if LEAST_H_S <= h <= LARGEST_H_S:
            return Inertia(h_s=h, basis="starting time of the workbook", known=True)
    j = ASSUMED_INERTIA_SHARE * largest_driven_inertia(load.p_rated_kw, motor.poles)
    h = motor_inertia_constant(j, motor.poles, f_hz, load.p_rated_kw, circuit.slip_rated)
    return Inertia(
        h_s=max(h, LEAST_H_S),
        basis=f"assumed: {ASSUMED_INERTIA_SHARE:g} of the largest inertia of IEC 60034-12",
        known=False,
    )


def _torque_share(motor: MotorData) -> float:
    return {
        "star-delta": 1.0 / 3.0,
        "autotransformer": motor.autotransformer_tap**2,
        "soft starter": min(motor.soft_starter_current / motor.starting_current, 1.0) ** 2,
    }.get(motor.starting_method, 1.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class Drive:
    """A motor, or several equal ones, in a simulation; ``load_pu`` is the torque at full speed."""

    load: Load
    units: float
    load_pu: float


def motor_row(drive: Drive, *, own_v: float, s_base_kva: float, inertia: Inertia) -> FloatArray:
    """Return the parameters of a motor.

    Parameters
    ----------
    drive : Drive
        The motor.
    own_v : float
        What turns the network's voltage into that of the motor, per unit each.
    s_base_kva : float
        Base power. [kVA]
    inertia : Inertia
        Its run-up constant.

    Returns
    -------
    ndarray, shape (MOTOR_COLUMNS,)
        See `dynamics_data`.

    Raises
    ------
    SolveError
        A name-plate that no circuit meets.
    """
    load, motor = drive.load, _motor(drive.load)
    row = np.zeros(d.MOTOR_COLUMNS)
    input_kva = drive.units * load.p_rated_kw / (load.efficiency * load.cos_phi)
    row[d.OWN_MOTOR_V], row[d.Y_SCALE] = own_v, input_kva / s_base_kva * own_v**2
    row[d.METHOD], row[d.LAW] = METHODS[motor.starting_method], LAWS[motor.torque_law]
    row[d.MOTOR_2H], row[d.LOAD] = 2.0 * inertia.h_s, drive.load_pu
    row[d.TAP], row[d.I_LIMIT] = motor.autotransformer_tap, motor.soft_starter_current
    row[d.RAMP_S] = motor.soft_starter_ramp_s
    row[d.CHANGE_S] = np.nan if motor.star_delta_change_s is None else motor.star_delta_change_s
    if motor.starting_method == "autotransformer":
        row[d.CHANGE_S] = np.nan if motor.starting_time_s is None else motor.starting_time_s
    if motor.starting_method == "converter":
        p = drive.units * load.p_rated_kw * drive.load_pu / load.efficiency / s_base_kva
        cos_phi = load.converter.displacement_cos_phi if load.converter is not None else load.cos_phi
        row[d.POWER_P], row[d.POWER_Q] = p, p * (1.0 / cos_phi**2 - 1.0) ** 0.5
        row[d.RAMP_S] = motor.starting_time_s or CONVERTER_RAMP_S
        return row
    fill_circuit(circuit_of(load), motor.locked_rotor_torque, row)
    return row


def fill_circuit(circuit: MotorCircuit, locked_rotor_torque: float, row: FloatArray) -> None:
    """Fill the columns of a motor's circuit."""
    row[d.G_SHUNT], row[d.B_SHUNT] = circuit.g_shunt_pu, circuit.b_shunt_pu
    row[d.R_STATOR] = circuit.r_stator_pu
    row[d.R_RUN], row[d.R_START] = circuit.r_rotor_run_pu, circuit.r_rotor_start_pu
    row[d.X_RUN], row[d.X_START] = circuit.x_run_pu, circuit.x_start_pu
    row[d.SLIP_RATED] = circuit.slip_rated
    r = circuit.r_rotor_run_pu / circuit.slip_rated
    row[d.AIR_GAP] = ((circuit.r_stator_pu + r) ** 2 + circuit.x_run_pu**2) / r
    row[d.TORQUE_FACTOR] = locked_rotor_torque / float(motor_torque(1.0, 1.0, circuit))


@dataclass(frozen=True, slots=True, kw_only=True)
class RunningMotors:
    """Running motors of one node as one: its row, and the slip at which they take their kW."""

    row: FloatArray
    slip: float


def running_motors(
    loads: Sequence[Load],
    s_kva: Sequence[complex],
    u_pu: Sequence[float],
    *,
    v: complex,
    s_base_kva: float,
    f_hz: float,
    f_pu: float,
) -> RunningMotors | None:
    """Return the running motors of a node as one motor of mean name-plate that takes the same kW and kvar.

    Each is taken at full load, so that the rating is that of what runs; the difference of kvar is a fixed
    susceptance. The inertia is that of the workbook where it is given, else assumed.

    Source: aggregation of motors by their rating, common practice of stability studies, no source.

    Parameters
    ----------
    loads : sequence of Load
        Motors direct on line.
    s_kva : sequence of complex
        What each draws at the node now. [kVA]
    u_pu : sequence of float
        Voltage at the terminals of each now. [pu of its rated voltage]
    v : complex
        Voltage of the node. [pu]
    s_base_kva : float
        Base power. [kVA]
    f_hz, f_pu : float
        Rated frequency [Hz], and that before over it.

    Returns
    -------
    RunningMotors or None
        None where none takes any kW.

    Raises
    ------
    SolveError
        No slip gives that power.
    """
    weight = np.array([s.real for s in s_kva])
    if not len(weight) or weight.sum() <= 0.0:
        return None
    weight = weight / weight.sum()
    row, circuits = np.zeros(d.MOTOR_COLUMNS), [circuit_of(x) for x in loads]
    circuit = MotorCircuit(
        **{
            name: float(np.dot(weight, [getattr(c, name) for c in circuits]))
            for name in MotorCircuit.__slots__
        }
    )
    torque = float(np.dot(weight, [_motor(x).locked_rotor_torque for x in loads]))
    fill_circuit(circuit, torque, row)
    h = [inertia_of(x, c, 1.0, f_hz).h_s for x, c in zip(loads, circuits, strict=True)]
    own_v = float(np.dot(weight, u_pu)) / abs(v)
    p_now = sum(s.real for s in s_kva) / s_base_kva
    cos_phi = float(motor_admittance(circuit.slip_rated, circuit).real)
    row[d.OWN_MOTOR_V], row[d.Y_SCALE] = own_v, p_now / cos_phi * own_v**2
    row[d.MOTOR_2H] = 2.0 * float(np.dot(weight, h))
    u = abs(v) * own_v
    slip = _slip_for(circuit, p_now / row[d.Y_SCALE] * own_v**2, u)
    factor = float(starting_torque_factor(slip, torque, circuit))
    row[d.LOAD] = float(motor_torque(slip, u, circuit)) * factor / f_pu
    y = complex(motor_admittance(slip, circuit)) * row[d.Y_SCALE]
    wanted = sum(s.imag for s in s_kva) / s_base_kva
    row[d.B_FIXED] = (-y.imag * abs(v) ** 2 - wanted) / abs(v) ** 2
    row[d.METHOD], row[d.LAW], row[d.STAGE] = d.DIRECT, d.CONSTANT_TORQUE, d.FULL
    row[d.TURNING] = f_pu * (1.0 - slip)
    return RunningMotors(row=row, slip=slip)


def _slip_for(circuit: MotorCircuit, p: float, u: float) -> float:
    """Return the slip at which a motor takes a power at a voltage, per unit of its input."""

    def short(slip: float) -> float:
        return float(motor_admittance(slip, circuit).real) * u * u - p

    slips = circuit.slip_rated * np.linspace(0.0, 8.0, 161)[1:]
    enough = [s for s in slips if short(float(s)) >= 0.0]
    if not enough:
        raise SolveError("the running motors cannot take their power at the voltage before")
    return float(brentq(short, 1e-6, enough[0]))
