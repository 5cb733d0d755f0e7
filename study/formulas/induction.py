"""Induction motors: typical name-plate data, and the equivalent circuit that a name-plate gives."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.optimize import brentq

from study.formulas.demand import CONSTANT_LOSS_SHARE
from study.formulas.table_files import numeric_table, table_rows

EfficiencyClass = Literal["IE1", "IE2", "IE3", "IE4"]
ReducedStart = Literal["direct", "star-delta", "autotransformer", "soft starter"]

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def typical_efficiency(p_rated_kw: float, efficiency_class: EfficiencyClass, f_hz: float) -> float:
    """Return the nominal efficiency of a four-pole motor, between two ratings on the logarithm of the rating.

    Source: IEC 60034-30-1:2014 (from memory).

    Parameters
    ----------
    p_rated_kw : float
        Rated output, 0.75 to 1000. [kW]
    efficiency_class : str
        ``IE1`` to ``IE4``; the 60 Hz table ends at ``IE3``.
    f_hz : float
        50 or 60. [Hz]

    Returns
    -------
    float
        Efficiency, 0..1.

    Raises
    ------
    ValueError
        Outside the table.

    Examples
    --------
    >>> round(typical_efficiency(11.0, "IE3", 50.0), 4)
    0.914
    """
    rows = [
        (float(row["output_kw"]), float(row[efficiency_class]) / 100.0)
        for row in table_rows("motor_efficiency_iec60034_30")
        if float(row["frequency_hz"]) == f_hz and row[efficiency_class]
    ]
    if not rows or not 0.75 <= p_rated_kw <= 1000.0:
        raise ValueError(f"no {efficiency_class} efficiency for {p_rated_kw:g} kW at {f_hz:g} Hz: give it")
    return _between(p_rated_kw, rows)


def typical_power_factor(p_rated_kw: float, poles: int) -> float:
    """Return the usual power factor of a motor at rated output; the ends of the table hold beyond it.

    Source: table ``motor_power_factor``; common practice, no source.

    Parameters
    ----------
    p_rated_kw : float
        Rated output. [kW]
    poles : int
        2, 4, 6; 8 stands for more.

    Returns
    -------
    float
        Power factor.

    Examples
    --------
    >>> round(typical_power_factor(7.5, 4), 2)
    0.82
    """
    column = str(min(max(poles, 2), 8))
    return _between(p_rated_kw, _column("motor_power_factor", column))


@dataclass(frozen=True, slots=True, kw_only=True)
class StartingData:
    """How a motor starts direct on line.

    Attributes
    ----------
    starting_current : float
        [x rated current]
    starting_cos_phi : float
        Power factor at standstill.
    locked_rotor_torque, breakdown_torque : float
        [x rated torque]
    """

    starting_current: float
    starting_cos_phi: float
    locked_rotor_torque: float
    breakdown_torque: float


def typical_starting_data(p_rated_kw: float) -> StartingData:
    """Return the usual starting data of a cage motor of that rating; the ends of the table hold beyond it.

    Source: table ``motor_starting``; common practice, no source.

    Parameters
    ----------
    p_rated_kw : float
        Rated output. [kW]

    Returns
    -------
    StartingData
        Typical values.

    Examples
    --------
    >>> round(typical_starting_data(30.0).starting_current, 9)
    7.0
    """
    names = ("starting_current", "starting_cos_phi", "locked_rotor_torque", "breakdown_torque")
    return StartingData(**{name: _between(p_rated_kw, _column("motor_starting", name)) for name in names})


def _column(table: str, heading: str) -> list[tuple[float, float]]:
    return [(kw, row[heading]) for kw, row in numeric_table(table, "output_kw").items()]


def _between(p_kw: float, rows: list[tuple[float, float]]) -> float:
    """Interpolate linearly on the logarithm of the rating, held beyond the ends."""
    ratings, values = zip(*rows, strict=True)
    return float(np.interp(np.log(p_kw), np.log(ratings), values))


def rated_current(
    p_rated_kw: ArrayLike, u_v: ArrayLike, efficiency: ArrayLike, cos_phi: ArrayLike, phases: int
) -> FloatArray:
    """Return the rated current: ``P/(sqrt(3) U eta cos(phi))``, without the root for a single phase.

    Source: definition.

    Parameters
    ----------
    p_rated_kw : float or ndarray
        Rated output at the shaft. [kW]
    u_v : float or ndarray
        Rated voltage. [V]
    efficiency, cos_phi : float or ndarray
        At rated output, 0..1.
    phases : int
        3; 1 or 2 for a load between two conductors.

    Returns
    -------
    ndarray
        Current. [A]

    Raises
    ------
    ValueError
        Phases other than 1, 2, 3.

    Examples
    --------
    >>> round(float(rated_current(11.0, 400.0, 0.914, 0.83, 3)), 1)
    20.9
    """
    if phases not in {1, 2, 3}:
        raise ValueError(f"phases must be 1, 2 or 3, not {phases}")
    root = np.sqrt(3.0) if phases == 3 else 1.0
    va = np.asarray(p_rated_kw, float) * 1e3 / (np.asarray(efficiency, float) * np.asarray(cos_phi, float))
    return np.asarray(va / (root * np.asarray(u_v, float)))


def line_starting_current(
    method: ReducedStart, direct_current: float, *, tap: float, current_limit: float
) -> float:
    """Return the current that the network carries at the start: ``Is``, ``Is/3``, ``a^2 Is``, or the limit.

    Source: transformation of voltage and current, any textbook of drives.

    Parameters
    ----------
    method : str
        ``direct``, ``star-delta``, ``autotransformer`` or ``soft starter``.
    direct_current : float
        Starting current direct on line, in any unit.
    tap : float
        Voltage of the autotransformer's tap over that of the network, 0..1; not used by the others.
    current_limit : float
        Limit of the soft starter, unit of `direct_current`; not used by the others.

    Returns
    -------
    float
        Line current. [unit of `direct_current`]

    Raises
    ------
    ValueError
        Another method: a converter has no starting current of the motor's.

    Examples
    --------
    >>> round(line_starting_current("autotransformer", 6.0, tap=0.65, current_limit=0.0), 3)
    2.535
    """
    match method:
        case "direct":
            return direct_current
        case "star-delta":
            return direct_current / 3.0
        case "autotransformer":
            return tap * tap * direct_current
        case "soft starter":
            return min(current_limit, direct_current)
    raise ValueError(f"no starting current of the motor's on the network for {method!r}")


@dataclass(frozen=True, slots=True, kw_only=True)
class MotorCircuit:
    """A circuit of one shunt and one series branch, per unit of rated input kVA and rated voltage.

    Attributes
    ----------
    g_shunt_pu, b_shunt_pu : float
        Conductance of the losses that do not change, and susceptance of the magnetising current. [pu]
    r_stator_pu : float
        Stator resistance. [pu]
    r_rotor_run_pu, r_rotor_start_pu : float
        Rotor resistance at rated slip and at standstill. [pu]
    x_run_pu, x_start_pu : float
        Leakage reactance of stator and rotor at rated slip and at standstill. [pu]
    slip_rated : float
        Slip at rated output.
    """

    g_shunt_pu: float
    b_shunt_pu: float
    r_stator_pu: float
    r_rotor_run_pu: float
    r_rotor_start_pu: float
    x_run_pu: float
    x_start_pu: float
    slip_rated: float


def circuit_from_name_plate(efficiency: float, cos_phi: float, start: StartingData) -> MotorCircuit:
    """Return the circuit that meets the rated point, the breakdown torque and the standstill impedance.

    The constant part of the rated losses is the shunt conductance; the rest is halved between stator and
    rotor, which fixes the slip. The running leakage reactance is that of the breakdown torque,
    ``Tb = V^2/(2 (R1 + sqrt(R1^2 + X^2)))``; rotor resistance and reactance go linearly in slip to their
    standstill values (skin effect of the bars, saturation of the leakage paths). The torque at standstill
    follows from the starting current and its power factor; it need not be that of the name-plate.

    Source: circle diagram and Kloss, any textbook of machines; the loss split as in `part_load_efficiency`.

    Parameters
    ----------
    efficiency, cos_phi : float
        At rated output, 0..1.
    start : StartingData
        Starting current and power factor, breakdown torque.

    Returns
    -------
    MotorCircuit
        The circuit.

    Raises
    ------
    ValueError
        A name-plate that no such circuit meets.

    Examples
    --------
    >>> c = circuit_from_name_plate(0.93, 0.86, typical_starting_data(30.0))
    >>> round(abs(complex(motor_admittance(c.slip_rated, c))), 6)
    1.0
    """
    losses = cos_phi * (1.0 - efficiency)
    g_shunt = CONSTANT_LOSS_SHARE * losses
    half = 0.5 * (1.0 - CONSTANT_LOSS_SHARE) * losses
    air_gap = cos_phi * efficiency + half
    active = cos_phi - g_shunt
    sin_phi = float(np.sqrt(1.0 - cos_phi**2))

    def lagging(x: float) -> float:
        return float((1.0 - np.sqrt(1.0 - (2.0 * x * active) ** 2)) / (2.0 * x))

    def stator(x: float) -> float:
        return half / (active**2 + lagging(x) ** 2)

    def torque_error(x: float) -> float:
        return 0.5 / (stator(x) + float(np.hypot(stator(x), x))) - start.breakdown_torque * air_gap

    x_run, highest = 0.0, 0.5 / active
    if torque_error(1e-6) > 0.0 > torque_error(highest):
        x_run = float(brentq(torque_error, 1e-6, highest, xtol=1e-14))
    b_shunt = sin_phi - lagging(x_run) if x_run else -1.0
    if b_shunt < 0.0:
        raise ValueError(
            f"no circuit has power factor {cos_phi:g} and breakdown torque {start.breakdown_torque:g} x rated"
        )
    r_stator, slip = stator(x_run), half / air_gap
    standstill = start.starting_current * np.exp(-1j * np.arccos(start.starting_cos_phi))
    branch = 1.0 / (standstill - (g_shunt - 1j * b_shunt))
    if branch.real <= r_stator or branch.imag <= 0.0:
        raise ValueError(f"a starting power factor of {start.starting_cos_phi:g} leaves no rotor resistance")
    series_square = active**2 + lagging(x_run) ** 2
    return MotorCircuit(
        g_shunt_pu=g_shunt,
        b_shunt_pu=b_shunt,
        r_stator_pu=r_stator,
        r_rotor_run_pu=slip * (active / series_square - r_stator),
        r_rotor_start_pu=float(branch.real) - r_stator,
        x_run_pu=x_run,
        x_start_pu=float(branch.imag),
        slip_rated=slip,
    )


def _rotor_branch(slip: ArrayLike, circuit: MotorCircuit) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return slip, rotor resistance and leakage reactance at that slip."""
    s = np.asarray(slip, float)
    w = np.clip((s - circuit.slip_rated) / (1.0 - circuit.slip_rated), 0.0, 1.0)
    r_rotor = circuit.r_rotor_run_pu + w * (circuit.r_rotor_start_pu - circuit.r_rotor_run_pu)
    return s, np.asarray(r_rotor), np.asarray(circuit.x_run_pu + w * (circuit.x_start_pu - circuit.x_run_pu))


def motor_admittance(slip: ArrayLike, circuit: MotorCircuit) -> ComplexArray:
    """Return the admittance of a motor at a slip: current at rated voltage; active power its real part.

    Source: equivalent circuit, shunt branch at the terminals.

    Parameters
    ----------
    slip : float or ndarray
        Slip, above 0; 1 at standstill.
    circuit : MotorCircuit
        The circuit.

    Returns
    -------
    ndarray
        Admittance G - jB. [pu of rated input kVA]

    Examples
    --------
    >>> start = typical_starting_data(30.0)
    >>> c = circuit_from_name_plate(0.93, 0.86, start)
    >>> round(abs(complex(motor_admittance(1.0, c))), 6)
    7.0
    """
    s, r_rotor, x = _rotor_branch(slip, circuit)
    series = 1.0 / (circuit.r_stator_pu + r_rotor / s + 1j * x)
    return np.asarray(circuit.g_shunt_pu - 1j * circuit.b_shunt_pu + series)


def motor_torque(slip: ArrayLike, v_pu: ArrayLike, circuit: MotorCircuit) -> FloatArray:
    """Return the torque of a motor at a slip and a voltage over its rated torque.

    Source: air-gap power of the equivalent circuit over that at the rated point.

    Parameters
    ----------
    slip : float or ndarray
        Slip, above 0; 1 at standstill.
    v_pu : float or ndarray
        Terminal voltage. [pu of rated]
    circuit : MotorCircuit
        The circuit.

    Returns
    -------
    ndarray
        Torque. [x rated torque]

    Examples
    --------
    >>> c = circuit_from_name_plate(0.93, 0.86, typical_starting_data(30.0))
    >>> round(float(motor_torque(c.slip_rated, 1.0, c)), 6)
    1.0
    """
    rated = _air_gap_power(circuit.slip_rated, circuit)
    return np.asarray(_air_gap_power(slip, circuit) / rated * np.asarray(v_pu, float) ** 2)


def _air_gap_power(slip: ArrayLike, circuit: MotorCircuit) -> FloatArray:
    s, r_rotor, x = _rotor_branch(slip, circuit)
    return np.asarray(r_rotor / s / ((circuit.r_stator_pu + r_rotor / s) ** 2 + x * x))
