"""Running a motor up: torque of the driven machine, starters, inertia, time, and the overload relay then.

Speeds are per unit of synchronous speed, torques of the motor's rated torque, currents of its rated current.
"""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.induction import MotorCircuit, motor_admittance, motor_torque

FloatArray = NDArray[np.float64]
TorqueLaw = Literal["constant", "fan", "hyperbolic"]

FAN_BREAKAWAY = 0.1  # friction of a pump or fan at standstill; common practice, no source
HYPERBOLIC_LARGEST = 1.5  # winches and rolls are limited below this part of their speed; common practice
SOFT_START_FIRST_VOLTAGE = 0.4  # of the mains at the beginning of the ramp; common practice, no source
STAR_DELTA_GAP_S = 0.05  # without current between star and delta; common practice, no source
ULTIMATE_TRIP = 1.15  # of the setting, between 1.05 and 1.2 of IEC 60947-4-1, from memory
CLASS_CURRENT = 7.2  # x setting, at which trip classes are defined; IEC 60947-4-1, from memory
# Shortest and longest tripping time at that current from cold [s]; IEC 60947-4-1, table 2, from memory.
TRIP_CLASSES = {"5": (0.5, 5.0), "10A": (2.0, 10.0), "10": (4.0, 10.0), "20": (6.0, 20.0), "30": (9.0, 30.0)}


def load_torque(speed_pu: ArrayLike, law: TorqueLaw) -> FloatArray:
    """Return the torque of a driven machine over that at full speed.

    Constant: 1. Fan or pump: ``T0 + (1 - T0) n^2`` with friction T0 at standstill. Hyperbolic: ``1/n``, held
    at its largest below.

    Source: usual classes of driven machines, any textbook of drives.

    Parameters
    ----------
    speed_pu : float or ndarray
        Speed. [pu]
    law : str
        ``constant``, ``fan`` or ``hyperbolic``.

    Returns
    -------
    ndarray
        Torque over that at speed 1.

    Raises
    ------
    ValueError
        Another law.

    Examples
    --------
    >>> load_torque([0.0, 0.5, 1.0], "fan").round(3).tolist()
    [0.1, 0.325, 1.0]
    """
    n = np.asarray(speed_pu, float)
    match law:
        case "constant":
            return np.ones_like(n)
        case "fan":
            return np.asarray(FAN_BREAKAWAY + (1.0 - FAN_BREAKAWAY) * n * n)
        case "hyperbolic":
            return np.asarray(1.0 / np.maximum(n, 1.0 / HYPERBOLIC_LARGEST))
    raise ValueError(f"unknown load torque law {law!r}")


def starting_torque_factor(slip: ArrayLike, locked_rotor_torque: float, circuit: MotorCircuit) -> FloatArray:
    """Return what the circuit's torque is multiplied by, so that at standstill it is the name-plate's.

    1 up to rated slip, on a line to ``T_name-plate/T_circuit`` at standstill.

    Source: derived; starting current and power factor fix the circuit's torque at standstill, and name-plates
    give it apart.

    Parameters
    ----------
    slip : float or ndarray
        Slip.
    locked_rotor_torque : float
        Of the name-plate. [x rated torque]
    circuit : MotorCircuit
        The circuit.

    Returns
    -------
    ndarray
        Factor.

    Examples
    --------
    >>> from study.formulas.induction import circuit_from_name_plate, typical_starting_data
    >>> c = circuit_from_name_plate(0.93, 0.86, typical_starting_data(30.0))
    >>> round(float(motor_torque(1.0, 1.0, c) * starting_torque_factor(1.0, 2.0, c)), 9)
    2.0
    """
    w = np.clip((np.asarray(slip, float) - circuit.slip_rated) / (1.0 - circuit.slip_rated), 0.0, 1.0)
    at_standstill = locked_rotor_torque / float(motor_torque(1.0, 1.0, circuit))
    return np.asarray(1.0 + w * (at_standstill - 1.0))


def soft_starter_voltage(time_s: ArrayLike, ramp_s: float) -> FloatArray:
    """Return the voltage that the ramp of a soft starter lets through, over that of the mains.

    Source: common practice, no source: from 0.4 at the start on a line to 1 at the end of the ramp.

    Parameters
    ----------
    time_s : float or ndarray
        From the start. [s]
    ramp_s : float
        Length of the ramp. [s]

    Returns
    -------
    ndarray
        0..1.

    Examples
    --------
    >>> soft_starter_voltage([0.0, 5.0, 20.0], 10.0).tolist()
    [0.4, 0.7, 1.0]
    """
    share = np.minimum(np.asarray(time_s, float) / ramp_s, 1.0)
    return np.asarray(SOFT_START_FIRST_VOLTAGE + (1.0 - SOFT_START_FIRST_VOLTAGE) * share)


def largest_driven_inertia(p_rated_kw: float, poles: int) -> float:
    """Return the largest inertia of a driven machine that a cage motor of design N starts.

    ``J = 0.04 P^0.9 p^2.5`` with p pole pairs.

    Source: IEC 60034-12, table of external inertia, from memory.

    Parameters
    ----------
    p_rated_kw : float
        Rated output. [kW]
    poles : int
        Number of poles.

    Returns
    -------
    float
        Inertia. [kg m2]

    Examples
    --------
    >>> round(largest_driven_inertia(30.0, 4), 2)
    4.83
    """
    return float(0.04 * p_rated_kw**0.9 * (0.5 * poles) ** 2.5)


def motor_inertia_constant(
    inertia_kgm2: float, poles: int, f_hz: float, p_rated_kw: float, slip_rated: float
) -> float:
    """Return the run-up constant of a drive: stored energy at synchronous speed over rated torque power.

    ``H = J w^2/(2 Pn')`` with w synchronous and ``Pn' = Pn/(1 - s)``, so that ``2H dn/dt = T - TL`` in rated
    torques.

    Source: definition.

    Parameters
    ----------
    inertia_kgm2 : float
        Motor and driven machine, at the motor's shaft. [kg m2]
    poles : int
        Number of poles.
    f_hz : float
        Rated frequency. [Hz]
    p_rated_kw : float
        Rated output. [kW]
    slip_rated : float
        Slip at rated output.

    Returns
    -------
    float
        H. [s]

    Examples
    --------
    >>> round(motor_inertia_constant(0.55, 4, 50.0, 30.0, 0.0167), 3)
    0.222
    """
    omega = 4.0 * np.pi * f_hz / poles
    return float(inertia_kgm2 * omega**2 / (2.0 * 1000.0 * p_rated_kw / (1.0 - slip_rated)))


def run_up_integral(
    circuit: MotorCircuit,
    *,
    locked_rotor_torque: float,
    law: TorqueLaw,
    load_pu: float,
    v_pu: float = 1.0,
    torque_share: float = 1.0,
    points: int = 400,
) -> float:
    """Return the time of a run-up over 2H: the integral of ``dn/(T - TL)`` to 95 % of the final speed.

    Source: equation of motion, any textbook of drives.

    Parameters
    ----------
    circuit : MotorCircuit
        Of the motor.
    locked_rotor_torque : float
        Of the name-plate. [x rated torque]
    law : str
        Of the driven machine.
    load_pu : float
        Its torque at full speed. [x rated torque]
    v_pu : float
        Terminal voltage, held. [pu of rated]
    torque_share : float
        Of the torque direct on line that the starter leaves: 1/3 in star, a^2 on an autotransformer.
    points : int
        Of the integral.

    Returns
    -------
    float
        Time over 2H [s/s]; inf where the motor does not run up.

    Examples
    --------
    >>> from study.formulas.induction import circuit_from_name_plate, typical_starting_data
    >>> c = circuit_from_name_plate(0.93, 0.86, typical_starting_data(30.0))
    >>> round(run_up_integral(c, locked_rotor_torque=2.2, law="fan", load_pu=1.0), 2)
    0.46
    """
    n = np.linspace(0.0, 0.95 * (1.0 - circuit.slip_rated), points)
    slip = 1.0 - n
    torque = motor_torque(slip, v_pu, circuit) * torque_share
    torque = torque * starting_torque_factor(slip, locked_rotor_torque, circuit)
    surplus = torque - load_pu * load_torque(n, law)
    if np.any(surplus <= 0.0):
        return float("inf")
    inverse = 1.0 / surplus
    return float(np.sum(0.5 * (inverse[1:] + inverse[:-1]) * np.diff(n)))


def starting_current_at(slip: ArrayLike, circuit: MotorCircuit) -> FloatArray:
    """Return the current of a motor direct on line at rated voltage and a slip.

    Source: see `motor_admittance`.

    Parameters
    ----------
    slip : float or ndarray
        Slip.
    circuit : MotorCircuit
        Of the motor.

    Returns
    -------
    ndarray
        Current. [x rated current]

    Examples
    --------
    >>> from study.formulas.induction import circuit_from_name_plate, typical_starting_data
    >>> c = circuit_from_name_plate(0.93, 0.86, typical_starting_data(30.0))
    >>> round(float(starting_current_at(1.0, c)), 6)
    7.0
    """
    return np.asarray(np.abs(motor_admittance(slip, circuit)))


def overload_time_constant(trip_s: float) -> float:
    """Return the heating time constant of an overload relay that trips in a time at 7.2 x its setting, cold.

    ``tau = t/ln(M^2/(M^2 - k^2))`` with M = 7.2 and k = 1.15.

    Source: first-order heating through the class point of IEC 60947-4-1, table 2; the form is derived.

    Parameters
    ----------
    trip_s : float
        Tripping time at 7.2 x the setting. [s]

    Returns
    -------
    float
        Time constant. [s]

    Examples
    --------
    >>> round(overload_time_constant(10.0), 0)
    387.0
    """
    square = CLASS_CURRENT**2
    return float(trip_s / np.log(square / (square - ULTIMATE_TRIP**2)))


def overload_heating(time_s: FloatArray, current: FloatArray, time_constant_s: float) -> FloatArray:
    """Return the heating of an overload relay over that at which it trips, from cold.

    ``tau dh/dt = (i/k)^2 - h``, the current held over each interval at its mean square.

    Source: first-order heating, IEC 60255-149 form; from memory.

    Parameters
    ----------
    time_s : ndarray, shape (time,)
        Instants, ascending. [s]
    current : ndarray, shape (time,)
        Current. [x setting]
    time_constant_s : float
        See `overload_time_constant`. [s]

    Returns
    -------
    ndarray, shape (time,)
        1 trips.

    Examples
    --------
    >>> h = overload_heating(np.array([0.0, 10.0]), np.array([7.2, 7.2]), overload_time_constant(10.0))
    >>> round(float(h[-1]), 6)
    1.0
    """
    t, i = np.asarray(time_s, float), np.asarray(current, float)
    square = (i[1:] ** 2 + i[1:] * i[:-1] + i[:-1] ** 2) / 3.0 / ULTIMATE_TRIP**2
    keep = np.exp(-np.diff(t) / time_constant_s)
    out = np.zeros(len(t))
    for n, (k, s) in enumerate(zip(keep, square, strict=True)):
        out[n + 1] = out[n] * k + s * (1.0 - k)
    return out
