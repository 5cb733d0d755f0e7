"""Steady state of a synchronous machine by the two-reaction theory, and its voltage at a given field.

Per unit of the machine's rated kVA and rated voltage. Generator sign: current leaves the machine, a positive
angle `phi` is lagging (inductive) load. One per unit of field gives rated voltage on the air-gap line.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.saturation import UNSATURATED, SaturationCurve, saturation_field

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Machine:
    """The data that the steady state needs.

    Attributes
    ----------
    xd_pu, xq_pu, xd_transient_pu : float
        Unsaturated synchronous reactances of both axes and transient reactance X'd. [pu]
    ra_pu : float
        Stator resistance. [pu]
    saturation : SaturationCurve
        Open-circuit saturation, applied to E'q.
    """

    xd_pu: float
    xq_pu: float
    xd_transient_pu: float
    ra_pu: float = 0.0
    saturation: SaturationCurve = UNSATURATED


@dataclass(frozen=True, slots=True, kw_only=True)
class RotorState:
    """Where the rotor stands and what its axes see.

    Attributes
    ----------
    e_pu : ndarray
        Excitation voltage without saturation: the air-gap-line field. [pu]
    delta_rad : ndarray
        Load angle, rotor ahead of terminal voltage. [rad]
    id_pu, iq_pu : ndarray
        Direct and quadrature current; a positive `id_pu` demagnetises. [pu]
    """

    e_pu: FloatArray
    delta_rad: FloatArray
    id_pu: FloatArray
    iq_pu: FloatArray


def two_reaction(
    v_pu: ArrayLike, i_pu: ArrayLike, phi_rad: ArrayLike, xd_pu: float, xq_pu: float, *, ra_pu: float = 0.0
) -> RotorState:
    """Return excitation voltage, load angle and axis currents from terminal voltage and current.

    The angle is that of ``V + (Ra + jXq) I``; ``Id = I sin(delta + phi)``, ``Iq = I cos(delta + phi)``,
    ``E = V cos(delta) + Ra Iq + Xd Id``.

    Source: Fitzgerald, Kingsley, Umans, *Electric Machinery*, chapter 5 (salient-pole machines), from memory.

    Parameters
    ----------
    v_pu : float or ndarray
        Terminal voltage. [pu]
    i_pu : float or ndarray
        Stator current. [pu]
    phi_rad : float or ndarray
        Angle of lag of the current. [rad]
    xd_pu, xq_pu : float
        Synchronous reactances. [pu]
    ra_pu : float
        Stator resistance. [pu]

    Returns
    -------
    RotorState
        Arrays of broadcast shape.

    Examples
    --------
    >>> s = two_reaction(1.0, 1.0, np.arccos(0.8), 1.0, 0.6)
    >>> round(float(s.e_pu), 4), round(float(np.degrees(s.delta_rad)), 2)
    (1.775, 19.44)
    """
    v, i, phi = np.asarray(v_pu, float), np.asarray(i_pu, float), np.asarray(phi_rad, float)
    in_phase, lagging = i * np.cos(phi), i * np.sin(phi)
    delta = np.arctan2(xq_pu * in_phase - ra_pu * lagging, v + ra_pu * in_phase + xq_pu * lagging)
    i_d, i_q = i * np.sin(delta + phi), i * np.cos(delta + phi)
    e = v * np.cos(delta) + ra_pu * i_q + xd_pu * i_d
    return RotorState(
        e_pu=np.asarray(e), delta_rad=np.asarray(delta), id_pu=np.asarray(i_d), iq_pu=np.asarray(i_q)
    )


def field_required(v_pu: ArrayLike, i_pu: ArrayLike, phi_rad: ArrayLike, machine: Machine) -> FloatArray:
    """Return the field that holds a terminal voltage at a given current: ``E + E'q S(E'q)``.

    ``E'q = E - (Xd - X'd) Id`` is the voltage behind the transient reactance, on which the saturation acts.

    Source: steady state of the machine model in Sauer and Pai, *Power System Dynamics and Stability*, with
    additive saturation; from memory.

    Parameters
    ----------
    v_pu, i_pu : float or ndarray
        Terminal voltage and stator current. [pu]
    phi_rad : float or ndarray
        Angle of lag. [rad]
    machine : Machine
        Reactances and saturation.

    Returns
    -------
    ndarray
        Field (current or voltage, equal in steady state). [pu of the air-gap-line field at rated voltage]

    Examples
    --------
    >>> m = Machine(xd_pu=2.0, xq_pu=1.2, xd_transient_pu=0.25)
    >>> round(float(field_required(1.0, 1.0, np.arccos(0.8), m)), 4)
    2.7008
    """
    state = two_reaction(v_pu, i_pu, phi_rad, machine.xd_pu, machine.xq_pu, ra_pu=machine.ra_pu)
    e_transient = state.e_pu - (machine.xd_pu - machine.xd_transient_pu) * state.id_pu
    return np.asarray(state.e_pu + saturation_field(e_transient, machine.saturation))


def field_required_for_load(
    v_pu: ArrayLike, p_pu: ArrayLike, q_pu: ArrayLike, exponent: float, machine: Machine
) -> FloatArray:
    """Return the field that holds a terminal voltage on a load ``P V^n + jQ V^n``.

    Source: see `field_required`, with ``I = sqrt(P^2 + Q^2) V^(n-1)``.

    Parameters
    ----------
    v_pu : float or ndarray
        Terminal voltage. [pu]
    p_pu, q_pu : float or ndarray
        Active and reactive power at 1.0 pu voltage. [pu]
    exponent : float
        n: 0 constant power, 1 constant current, 2 constant impedance.
    machine : Machine
        Reactances and saturation.

    Returns
    -------
    ndarray
        Field. [pu of the air-gap-line field at rated voltage]

    Examples
    --------
    >>> m = Machine(xd_pu=2.0, xq_pu=1.2, xd_transient_pu=0.25)
    >>> round(float(field_required_for_load(1.0, 0.8, 0.6, 0.0, m)), 4)
    2.7008
    """
    v, p, q = np.asarray(v_pu, float), np.asarray(p_pu, float), np.asarray(q_pu, float)
    return field_required(v, np.hypot(p, q) * v ** (exponent - 1.0), np.arctan2(q, p), machine)


def rated_load_field(cos_phi: float, machine: Machine) -> float:
    """Return the field at rated voltage, rated kVA and rated (lagging) power factor.

    Source: see `field_required`.

    Parameters
    ----------
    cos_phi : float
        Rated power factor.
    machine : Machine
        Reactances and saturation.

    Returns
    -------
    float
        Field. [pu of the air-gap-line field at rated voltage]

    Raises
    ------
    ValueError
        A power factor outside 0..1.

    Examples
    --------
    >>> round(rated_load_field(0.8, Machine(xd_pu=2.0, xq_pu=1.2, xd_transient_pu=0.25)), 4)
    2.7008
    """
    if not 0.0 <= cos_phi <= 1.0:
        raise ValueError(f"power factor {cos_phi} must be from 0 to 1")
    return float(field_required(1.0, 1.0, np.arccos(cos_phi), machine))


def highest_held_voltage(
    surplus: Callable[[FloatArray], FloatArray], v_top_pu: ArrayLike, points: int = 256
) -> FloatArray:
    """Return the highest voltage, not above a given one, at which the field suffices.

    Below the point found the surplus of field builds the voltage up, above it the voltage falls back: the
    point is stable. A scan from the top finds the interval, bisection the point. A lobe narrower than one
    step of the scan is passed over; no set can be run that close to its nose.

    Source: graphical construction of the operating point, common practice, no source.

    Parameters
    ----------
    surplus : callable
        Takes voltages, shape ``(points, *shape)`` or ``shape``; returns field available less field
        required. [pu]
    v_top_pu : float or ndarray
        Highest voltage to be considered, the regulated one for example. [pu]
    points : int
        Steps of the scan.

    Returns
    -------
    ndarray
        Voltage [pu]: `v_top_pu` where the field suffices there, nan where it is short at every voltage
        (collapse).

    Examples
    --------
    >>> round(float(highest_held_voltage(lambda v: 1.1 - v, 2.0)), 12)
    1.1
    >>> float(highest_held_voltage(lambda v: 1.1 - v, 1.0))
    1.0
    """
    v_top = np.asarray(v_top_pu, float)
    grid = np.linspace(1.0, 1e-6, points + 1).reshape(-1, *([1] * v_top.ndim)) * v_top
    enough = np.asarray(surplus(grid) >= 0.0)
    first = np.argmax(enough, axis=0)
    low = np.take_along_axis(grid, first[np.newaxis, ...], axis=0)[0]
    high = np.take_along_axis(grid, np.maximum(first - 1, 0)[np.newaxis, ...], axis=0)[0]
    for _ in range(60):
        middle = 0.5 * (low + high)
        ok = surplus(middle) >= 0.0
        low, high = np.where(ok, middle, low), np.where(ok, high, middle)
    return np.asarray(np.where(enough.any(axis=0), low, np.nan))


def terminal_voltage_at_field(
    field_pu: ArrayLike, i_pu: ArrayLike, phi_rad: ArrayLike, machine: Machine
) -> FloatArray:
    """Return the terminal voltage at constant field for a given current and power factor.

    One call gives an inherent regulation curve V(I): the branch that starts at no load. (With a leading
    current the curve bends back on itself; the lower branch is reached by `terminal_voltage_on_load`.)

    Source: inverse of `field_required`; the curves are those of the generator characteristics in Fitzgerald,
    Kingsley, Umans, *Electric Machinery*, chapter 5, from memory.

    Parameters
    ----------
    field_pu : float or ndarray
        Constant field. [pu of the air-gap-line field at rated voltage]
    i_pu : float or ndarray
        Stator current. [pu]
    phi_rad : float or ndarray
        Angle of lag; negative where the current leads. [rad]
    machine : Machine
        Reactances and saturation.

    Returns
    -------
    ndarray
        Terminal voltage [pu]; nan where the field cannot drive that current at any voltage.

    Examples
    --------
    >>> m = Machine(xd_pu=1.0, xq_pu=0.6, xd_transient_pu=0.25)
    >>> round(float(terminal_voltage_at_field(1.77503, 1.0, np.arccos(0.8), m)), 3)
    1.0
    """
    field, i, phi = np.broadcast_arrays(*(np.asarray(x, float) for x in (field_pu, i_pu, phi_rad)))
    v_top = field + (machine.xd_pu + machine.ra_pu) * i + 0.01
    return highest_held_voltage(lambda v: field - field_required(v, i, phi, machine), v_top)


def terminal_voltage_on_load(
    field_pu: ArrayLike,
    p_pu: ArrayLike,
    q_pu: ArrayLike,
    *,
    exponent: float,
    v_top_pu: ArrayLike,
    machine: Machine,
) -> FloatArray:
    """Return the terminal voltage at constant field on a load ``P V^n + jQ V^n``, not above a given voltage.

    With `v_top_pu` the regulated voltage and `field_pu` the limit of the field, a limited set holds this.
    On constant power with Xd S > V^2 a short field has no stable voltage below: the result is nan.

    Source: inverse of `field_required_for_load`.

    Parameters
    ----------
    field_pu : float or ndarray
        Constant field. [pu of the air-gap-line field at rated voltage]
    p_pu, q_pu : float or ndarray
        Power at 1.0 pu voltage. [pu]
    exponent : float
        n: 0 constant power, 1 constant current, 2 constant impedance.
    v_top_pu : float or ndarray
        Highest voltage to be considered. [pu]
    machine : Machine
        Reactances and saturation.

    Returns
    -------
    ndarray
        Terminal voltage [pu]; nan where no voltage can be held.

    Examples
    --------
    >>> m = Machine(xd_pu=1.0, xq_pu=0.6, xd_transient_pu=0.25)
    >>> v = terminal_voltage_on_load(0.9 * 1.77503, 0.8, 0.6, exponent=2.0, v_top_pu=1.0, machine=m)
    >>> round(float(v), 4)
    0.9
    """
    field, p, q, v_top = np.broadcast_arrays(
        *(np.asarray(x, float) for x in (field_pu, p_pu, q_pu, v_top_pu))
    )
    return highest_held_voltage(lambda v: field - field_required_for_load(v, p, q, exponent, machine), v_top)


def open_circuit_voltage(field_pu: ArrayLike, curve: SaturationCurve) -> FloatArray:
    """Return the no-load voltage that a field gives: V in ``V + V S(V) = field``.

    Source: definition of the open-circuit characteristic.

    Parameters
    ----------
    field_pu : float or ndarray
        Field. [pu of the air-gap-line field at rated voltage]
    curve : SaturationCurve
        Fitted curve.

    Returns
    -------
    ndarray
        Voltage. [pu]

    Examples
    --------
    >>> from study.formulas.saturation import saturation_curve
    >>> round(float(open_circuit_voltage(1.11, saturation_curve(0.11, 0.39))), 9)
    1.0
    """
    field = np.asarray(field_pu, float)
    return highest_held_voltage(lambda v: field - v - saturation_field(v, curve), field + 0.01)


def inherent_regulation(i_pu: float, phi_rad: ArrayLike, machine: Machine) -> FloatArray:
    """Return the inherent voltage regulation: rise when the load is thrown off at constant field and speed.

    ``(V0 - V)/V`` with V = 1 pu; negative where the current leads enough.

    Source: IEC 60034-4-1, voltage regulation (definition), from memory.

    Parameters
    ----------
    i_pu : float
        Load current before. [pu]
    phi_rad : float or ndarray
        Angle of lag before. [rad]
    machine : Machine
        Reactances and saturation.

    Returns
    -------
    ndarray
        Regulation; 0.10 is 10 %. [pu of rated voltage]

    Examples
    --------
    >>> m = Machine(xd_pu=1.0, xq_pu=1.0, xd_transient_pu=0.25)
    >>> round(float(inherent_regulation(1.0, np.arccos(0.8), m)), 4)
    0.7889
    """
    return open_circuit_voltage(field_required(1.0, i_pu, phi_rad, machine), machine.saturation) - 1.0
