"""Closed forms of the voltage dip: a set behind its reactance, what it feeds, and the motor that starts.

Impedances are per unit on one base, complex or real; a lagging load has a positive reactance.
"""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
PreloadLaw = Literal["constant impedance", "constant current", "constant power"]

ENGINE_OVERLOAD = 1.10  # the rack of an auxiliary engine is left at 110 %; IACS UR M51, from memory
ITERATIONS = 60


def starting_impedance(s_base_kva: ArrayLike, s_start_kva: ArrayLike, cos_phi: ArrayLike) -> ComplexArray:
    """Return the impedance of a motor at standstill: base kVA over starting kVA, at its power factor.

    Source: D. J. Sheldrake, *Handbook of Electrical Engineering*, Wiley 2003, appendix G.

    Parameters
    ----------
    s_base_kva : float or ndarray
        Base power. [kVA]
    s_start_kva : float or ndarray
        Apparent power that the network carries at the start, at base voltage. [kVA]
    cos_phi : float or ndarray
        Power factor at standstill, lagging.

    Returns
    -------
    ndarray
        Impedance. [pu]

    Examples
    --------
    >>> round(abs(complex(starting_impedance(3125.0, 2990.43, 0.25))), 3)
    1.045
    """
    c = np.asarray(cos_phi, float)
    z = np.asarray(s_base_kva, float) / np.asarray(s_start_kva, float)
    return np.asarray(z * (c + 1j * np.sqrt(1.0 - c * c)))


def dip_from_no_load(x_pu: ArrayLike, z_motor_pu: ArrayLike) -> FloatArray:
    """Return the fall of voltage when a motor starts on a set that carries nothing: ``1 - |Zm/(jX + Zm)|``.

    With a reactive start it is ``X/(X + |Zm|)``. X'd gives what a meter sees for the first 0.1 to 0.2 s, X''d
    the first half cycle; n equal sets have X/n.

    Source: voltage divider; any textbook of ship's electrical plant.

    Parameters
    ----------
    x_pu : float or ndarray
        Reactance of the set. [pu]
    z_motor_pu : complex or ndarray
        Impedance of the motor at standstill. [pu]

    Returns
    -------
    ndarray
        Fall of voltage over the voltage before. [pu]

    Examples
    --------
    >>> round(float(dip_from_no_load(0.2, 2.0j)), 4)
    0.0909
    """
    z = np.asarray(z_motor_pu, complex)
    return np.asarray(1.0 - np.abs(z / (z + 1j * np.asarray(x_pu, float))))


def largest_start_kva(x_pu: ArrayLike, dip_pu: ArrayLike) -> FloatArray:
    """Return the starting kVA, over the set's rated kVA, that makes a given dip from no load.

    ``Ss/Sn = dip/((1 - dip) X)``, for a reactive start. With a motor of 6 times rated current on 1/8 of the
    set's kVA the dip is 15 % where X is 0.235 pu, the rule of thumb of ships' electricians.

    Source: inverse of `dip_from_no_load`; Japanese ship textbook (Nippon Foundation library).

    Parameters
    ----------
    x_pu : float or ndarray
        Transient reactance. [pu]
    dip_pu : float or ndarray
        Fall of voltage allowed, below 1. [pu]

    Returns
    -------
    ndarray
        kVA at the start, at rated voltage, over rated kVA.

    Examples
    --------
    >>> round(float(largest_start_kva(0.235, 0.15)) / 6.0, 3)
    0.125
    """
    dip = np.asarray(dip_pu, float)
    return np.asarray(dip / ((1.0 - dip) * np.asarray(x_pu, float)))


def emf_behind(v_pu: ArrayLike, i_pu: ArrayLike, z_pu: ArrayLike) -> ComplexArray:
    """Return the e.m.f. behind an impedance: ``E = V + Z I``, the current leaving the machine.

    Source: Sheldrake, *Handbook of Electrical Engineering*, appendix G.

    Parameters
    ----------
    v_pu, i_pu, z_pu : complex or ndarray
        Terminal voltage, current, and Ra + jX'd. [pu]

    Returns
    -------
    ndarray
        E.m.f. [pu]

    Examples
    --------
    >>> complex(emf_behind(1.0, 1.0 - 0.5j, 0.2j))
    (1.1+0.2j)
    """
    return np.asarray(np.asarray(v_pu, complex) + np.asarray(z_pu, complex) * np.asarray(i_pu, complex))


def voltage_after_start(
    v_before_pu: ArrayLike,
    z_source_pu: ArrayLike,
    z_motor_pu: ArrayLike,
    *,
    s_load_pu: ArrayLike,
    law: PreloadLaw,
) -> ComplexArray:
    """Return the voltage of a board after a motor is put on it, the set's e.m.f. held.

    The set is ``E' = V0 + Zs I0`` behind Zs with ``I0 = conj(S/V0)``; after the start
    ``V = E' - Zs (V/Zm + I(V))``. The load before follows ``S``, ``S |V/V0|`` or ``S |V/V0|^2``: a constant
    impedance gives the handbook's division of voltage, constant power the deepest dip.

    Source: Sheldrake, *Handbook of Electrical Engineering*, appendix G, for constant impedance; the other two
    by iteration of the same equation.

    Parameters
    ----------
    v_before_pu : complex or ndarray
        Voltage before. [pu]
    z_source_pu : complex or ndarray
        Ra + jX'd of the sets. [pu]
    z_motor_pu : complex or ndarray
        Motor at standstill, its cable included. [pu]
    s_load_pu : complex or ndarray
        P + jQ that the board fed before. [pu]
    law : str
        ``constant impedance``, ``constant current`` or ``constant power``.

    Returns
    -------
    ndarray
        Voltage [pu]; nan where no voltage satisfies the equation: it collapses.

    Examples
    --------
    >>> v = voltage_after_start(1.0, 0.25j, 1.0j, s_load_pu=0.5 + 0.3j, law="constant impedance")
    >>> w = voltage_after_start(1.0, 0.25j, 1.0j, s_load_pu=0.5 + 0.3j, law="constant power")
    >>> round(abs(complex(v)), 4), round(abs(complex(w)), 4)
    (0.8132, 0.7792)
    """
    exponent = {"constant impedance": 2.0, "constant current": 1.0, "constant power": 0.0}[law]
    v0, z, zm, s = np.broadcast_arrays(
        *(np.asarray(x, complex) for x in (v_before_pu, z_source_pu, z_motor_pu, s_load_pu))
    )
    e = emf_behind(v0, np.conj(s / v0), z)
    y = np.conj(s) / np.abs(v0) ** 2
    v = e / (1.0 + z * (1.0 / zm + y))
    for _ in range(ITERATIONS):
        drawn = np.conj(s * (np.abs(v) / np.abs(v0)) ** exponent / v)
        error = e - z * (v / zm + drawn) - v
        v = v + error / (1.0 + z * (1.0 / zm + y * (exponent - 1.0)))
    drawn = np.conj(s * (np.abs(v) / np.abs(v0)) ** exponent / v)
    good = np.abs(e - z * (v / zm + drawn) - v) < 1e-9
    return np.asarray(np.where(good, v, np.nan))


def one_line_dip(z_source_pu: ArrayLike, z_load_pu: ArrayLike, z_motor_pu: ArrayLike) -> FloatArray:
    """Return the handbook's one-line estimate of a dip: ``|Zg||Zl| / (|Zl + Zg||Zm|)``.

    It is a fraction of the voltage *with* the motor, and thus larger than the fall of the voltage before.

    Source: Sheldrake, *Handbook of Electrical Engineering*, appendix G, last equation.

    Parameters
    ----------
    z_source_pu, z_load_pu, z_motor_pu : complex or ndarray
        Set, load before, motor at standstill. [pu]

    Returns
    -------
    ndarray
        Dip over the voltage with the motor. [pu]

    Examples
    --------
    >>> round(float(one_line_dip(0.25j, 1e9, 1.0j)), 3)
    0.25
    """
    zg, zl, zm = (np.asarray(x, complex) for x in (z_source_pu, z_load_pu, z_motor_pu))
    return np.asarray(np.abs(zg) * np.abs(zl) / (np.abs(zl + zg) * np.abs(zm)))


def engine_power_at_start(
    p_before_kw: ArrayLike, u_v: ArrayLike, i_start_a: ArrayLike, cos_phi: ArrayLike
) -> FloatArray:
    """Return the kW on the sets while a motor starts: ``Pb + sqrt(3) U Is cos(phi)/1000``.

    To be held against 110 % of the engines' power times the efficiency of the alternators.

    Source: Japanese ship textbook (Nippon Foundation library), motor start against engine overload; the form
    is derived.

    Parameters
    ----------
    p_before_kw : float or ndarray
        Load before. [kW]
    u_v : float or ndarray
        Voltage while the motor starts. [V]
    i_start_a : float or ndarray
        Current of the start at that voltage. [A]
    cos_phi : float or ndarray
        Power factor at standstill.

    Returns
    -------
    ndarray
        Load. [kW]

    Examples
    --------
    >>> round(float(engine_power_at_start(300.0, 380.0, 800.0, 0.3)), 1)
    458.0
    """
    start = np.sqrt(3.0) * np.asarray(u_v, float) * np.asarray(i_start_a, float)
    return np.asarray(np.asarray(p_before_kw, float) + start * np.asarray(cos_phi, float) / 1000.0)


def step_response_at_constant_field(
    time_s: ArrayLike,
    x_load_pu: float,
    *,
    x_d_pu: float,
    x_d1_pu: float,
    x_d2_pu: float,
    t_d01_s: float,
    t_d02_s: float,
) -> FloatArray:
    """Return the voltage after an inductive load is put on a set at no load, its field left alone.

    ``V = XL/(Xd+XL) + (XL/(X'd+XL) - XL/(Xd+XL)) e^(-t/T') + (XL/(X''d+XL) - XL/(X'd+XL)) e^(-t/T'')`` with
    ``T' = T'd0 (X'd+XL)/(Xd+XL)`` and ``T'' = T''d0 (X''d+XL)/(X'd+XL)``. Unsaturated, speed held, time
    constants far apart.

    Source: E. W. Kimbark, *Power System Stability*, vol. III, machine behind an external reactance; from
    memory.

    Parameters
    ----------
    time_s : float or ndarray
        From the step. [s]
    x_load_pu : float
        Reactance of the load. [pu]
    x_d_pu, x_d1_pu, x_d2_pu : float
        Xd, X'd, X''d. [pu]
    t_d01_s, t_d02_s : float
        T'd0 and T''d0. [s]

    Returns
    -------
    ndarray
        Voltage over that before. [pu]

    Examples
    --------
    >>> data = {"x_d_pu": 2.0, "x_d1_pu": 0.2, "x_d2_pu": 0.12, "t_d01_s": 2.5, "t_d02_s": 0.03}
    >>> step_response_at_constant_field([0.0, 100.0], 2.0, **data).round(4).tolist()
    [0.9434, 0.5]
    """
    t = np.asarray(time_s, float)
    last, transient, first = (x_load_pu / (x + x_load_pu) for x in (x_d_pu, x_d1_pu, x_d2_pu))
    slow = t_d01_s * (x_d1_pu + x_load_pu) / (x_d_pu + x_load_pu)
    fast = t_d02_s * (x_d2_pu + x_load_pu) / (x_d1_pu + x_load_pu)
    return np.asarray(last + (transient - last) * np.exp(-t / slow) + (first - transient) * np.exp(-t / fast))


def recovery_time_at_ceiling(
    v_target_pu: ArrayLike,
    ceiling_pu: ArrayLike,
    x_load_pu: float,
    *,
    x_d_pu: float,
    x_d1_pu: float,
    t_d01_s: float,
) -> FloatArray:
    """Return the time from the dip to a voltage, with the field at its ceiling from the first moment.

    ``t = T' ln((Vinf - V0)/(Vinf - V))`` with ``V0 = XL/(X'd+XL)``, ``Vinf = Ec XL/(Xd+XL)`` and
    ``T' = T'd0 (X'd+XL)/(Xd+XL)``.

    Source: solution of the field equation behind an external reactance; Kimbark, *Power System Stability*,
    vol. III, from memory.

    Parameters
    ----------
    v_target_pu : float or ndarray
        Voltage to come back to, over that before. [pu]
    ceiling_pu : float or ndarray
        Field over that at no load.
    x_load_pu : float
        Reactance of the load. [pu]
    x_d_pu, x_d1_pu : float
        Xd and X'd. [pu]
    t_d01_s : float
        T'd0. [s]

    Returns
    -------
    ndarray
        Time [s]; inf where that field does not reach the voltage, 0 where it is not left.

    Examples
    --------
    >>> data = {"x_d_pu": 2.0, "x_d1_pu": 0.2, "t_d01_s": 2.5}
    >>> recovery_time_at_ceiling(0.97, [2.0, 3.0, 4.0], 2.0, **data).round(3).tolist()
    [1.524, 0.15, 0.079]
    """
    target, ceiling = np.asarray(v_target_pu, float), np.asarray(ceiling_pu, float)
    start = x_load_pu / (x_d1_pu + x_load_pu)
    end = ceiling * x_load_pu / (x_d_pu + x_load_pu)
    t = t_d01_s * (x_d1_pu + x_load_pu) / (x_d_pu + x_load_pu)
    reached = end > target
    ratio = np.where(reached, (end - start) / np.where(reached, end - target, 1.0), np.inf)
    return np.asarray(np.where(target <= start, 0.0, t * np.log(np.maximum(ratio, 1.0))))
