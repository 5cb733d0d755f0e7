"""Load compensation of a voltage regulator: what it measures, and the voltage it then holds.

Quantities are per unit of one set: its rated voltage and its rated kVA. Current and power leave the machine;
reactive power is positive when the load is inductive. A positive reactance gives droop on reactive load.
"""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

DroopBase = Literal["rated load at rated pf", "rated kVA", "rated kvar"]
DroopLaw = Literal["phasor", "reactive current"]
Polarity = Literal["normal", "reversed"]

FloatArray = NDArray[np.float64]


def compensated_voltage(
    v_pu: ArrayLike, p_pu: ArrayLike, q_pu: ArrayLike, rc_pu: ArrayLike, xc_pu: ArrayLike
) -> FloatArray:
    """Return the voltage that the regulator compares with its set-point, phasor law.

    ``|Vt + (Rc + jXc) It|`` with ``It = (P - jQ)/Vt``.

    Source: IEEE 421.5-2016, clause 4, terminal voltage transducer and load compensation (sign convention: a
    positive Xc lowers the terminal voltage with reactive load); from memory.

    Parameters
    ----------
    v_pu : float or ndarray
        Terminal voltage. [pu]
    p_pu, q_pu : float or ndarray
        Active and reactive power delivered. [pu]
    rc_pu, xc_pu : float or ndarray
        Compensating resistance and reactance. [pu]

    Returns
    -------
    ndarray
        Compensated voltage, broadcast shape. [pu]

    Examples
    --------
    >>> round(float(compensated_voltage(1.0, 0.8, 0.6, 0.0, 0.05)), 5)
    1.03078
    """
    v, p, q = np.asarray(v_pu, float), np.asarray(p_pu, float), np.asarray(q_pu, float)
    rc, xc = np.asarray(rc_pu, float), np.asarray(xc_pu, float)
    return np.asarray(np.hypot(v + (rc * p + xc * q) / v, (xc * p - rc * q) / v))


def compensated_voltage_reactive_current(v_pu: ArrayLike, q_pu: ArrayLike, xc_pu: ArrayLike) -> FloatArray:
    """Return the compensated voltage of a regulator that works on reactive current alone: ``V + Xc Q/V``.

    Source: common practice of digital regulators, no standard; the reactive part of IEEE 421.5 clause 4.

    Parameters
    ----------
    v_pu, q_pu : float or ndarray
        Terminal voltage and reactive power delivered. [pu]
    xc_pu : float or ndarray
        Compensating reactance. [pu]

    Returns
    -------
    ndarray
        Compensated voltage, broadcast shape. [pu]

    Examples
    --------
    >>> float(compensated_voltage_reactive_current(1.0, 0.6, 0.05))
    1.03
    """
    v, q, xc = np.asarray(v_pu, float), np.asarray(q_pu, float), np.asarray(xc_pu, float)
    return np.asarray(v + xc * q / v)


def compensated_voltage_cross_current(
    v_pu: complex, current_pu: ArrayLike, impedance_pu: ArrayLike
) -> FloatArray:
    """Return the compensated voltage of each set where every regulator also sees the currents of the others.

    ``Vc_i = |Vt + sum_j (Rc_ij + jXc_ij) I_j|``.

    Source: IEEE 421.5-2016, clause 4; IEC 61970-302, VCompIEEEType2; from memory.

    Parameters
    ----------
    v_pu : complex
        Voltage of the common bus. [pu]
    current_pu : ndarray, shape (n,)
        Complex current of each set. [pu of its own rating]
    impedance_pu : ndarray, shape (n, n)
        Compensating impedances, row i acting on regulator i. [pu]

    Returns
    -------
    ndarray, shape (n,)
        Compensated voltages. [pu]

    Examples
    --------
    >>> x = cross_current_reactance([1000.0, 500.0], 0.05)
    >>> compensated_voltage_cross_current(1.0, [0.5 - 0.4j, 0.5 - 0.4j], 1j * x).tolist()
    [1.0, 1.0]
    """
    current, impedance = np.asarray(current_pu, complex), np.asarray(impedance_pu, complex)
    return np.asarray(np.abs(v_pu + impedance @ current))


def cross_current_reactance(rated_kva: ArrayLike, xc_pu: float) -> FloatArray:
    """Return the matrix Xc_ij of a cross-current (reactive differential) group.

    Each regulator sees its own per-unit current less the mean of the other sets', weighted by rating, so that
    nothing is left when each set carries reactive power in proportion to its rating. A set alone compares
    itself with nothing (its current transformer is short-circuited) and gets zero.

    Source: common practice, no source; the form is that of IEC 61970-302, VCompIEEEType2.

    Parameters
    ----------
    rated_kva : ndarray, shape (n,)
        Ratings of the sets that run in the group. [kVA]
    xc_pu : float
        Own compensating reactance of every set. [pu of its rating]

    Returns
    -------
    ndarray, shape (n, n)
        Row i acts on regulator i; column j multiplies the current of set j in pu of its own rating. [pu]

    Raises
    ------
    ValueError
        A rating is not above 0.

    Examples
    --------
    >>> cross_current_reactance([1000.0, 500.0, 500.0], 0.06).tolist()[1]
    [-0.04, 0.06, -0.02]
    """
    rating = np.asarray(rated_kva, float)
    if np.any(rating <= 0.0):
        raise ValueError("every rating in a cross-current group must be above 0 kVA")
    if rating.size == 1:
        return np.zeros((1, 1))
    others = rating.sum() - rating
    matrix = np.asarray(-xc_pu * rating[np.newaxis, :] / others[:, np.newaxis])
    np.fill_diagonal(matrix, xc_pu)
    return matrix


def reactance_from_droop(
    droop_pu: float, base: DroopBase, law: DroopLaw, cos_phi: float, v_no_load_pu: float
) -> float:
    """Return the compensating reactance that gives a stated droop.

    The droop is the fall of the terminal voltage from no load, ``V0``, to the base load, ``V1 = V0 - droop``.
    Base loads: rated kVA at rated power factor; rated kvar with no active load; or one per unit of reactive
    current (`rated kVA`), for which the reactance equals the droop. Phasor law: the positive root of
    ``Xc2 S2/V1^2 + 2 Xc Q + V1^2 - V0^2 = 0``; reactive-current law: ``Xc = droop V1/Q``.

    Source: closed form of IEEE 421.5-2016, clause 4, with Rc = 0.

    Parameters
    ----------
    droop_pu : float
        Fall of voltage, not negative. [pu of rated voltage]
    base : str
        Load at which the fall is measured.
    law : str
        ``phasor`` or ``reactive current``.
    cos_phi : float
        Rated power factor.
    v_no_load_pu : float
        Voltage at no load. [pu of rated voltage]

    Returns
    -------
    float
        Xc. [pu on the set's rated kVA and rated voltage]

    Raises
    ------
    ValueError
        A droop that is negative or not below the no-load voltage; a power factor outside 0..1; a base load
        without reactive power where the law needs one.

    Examples
    --------
    >>> round(reactance_from_droop(0.05, "rated load at rated pf", "phasor", 0.8, 1.0), 5)
    0.07593
    >>> round(reactance_from_droop(0.05, "rated kVA", "phasor", 0.8, 1.0), 5)
    0.05
    """
    v_loaded = v_no_load_pu - droop_pu
    if droop_pu < 0.0 or v_loaded <= 0.0:
        raise ValueError(f"droop {droop_pu} pu must be 0 or more and below the no-load voltage")
    if not 0.0 <= cos_phi <= 1.0:
        raise ValueError(f"power factor {cos_phi} must be from 0 to 1")
    if droop_pu == 0.0:
        return 0.0
    p, q = _base_load(base, cos_phi, v_loaded)
    if law == "reactive current" or p == 0.0:
        if q == 0.0:
            raise ValueError(f"no reactive power at {base} with power factor 1: the droop has no base")
        return droop_pu * v_loaded / q
    a = (p * p + q * q) / v_loaded**2
    return float((np.sqrt(q * q + a * (v_no_load_pu**2 - v_loaded**2)) - q) / a)


def _base_load(base: DroopBase, cos_phi: float, v_loaded_pu: float) -> tuple[float, float]:
    """Return active and reactive power of the load that a droop is measured at."""
    sin_phi = float(np.sqrt(1.0 - cos_phi * cos_phi))
    match base:
        case "rated load at rated pf":
            return cos_phi, sin_phi
        case "rated kvar":
            return 0.0, sin_phi
        case "rated kVA":
            return 0.0, v_loaded_pu
    raise ValueError(f"unknown droop base {base!r}")


def signed_reactance(xc_pu: float, polarity: Polarity) -> float:
    """Return the reactance as the regulator sees it: negative where the droop circuit is reversed.

    A reversed circuit raises the voltage with reactive load; two such sets have an algebraic solution on one
    bus that is no operating point.

    Source: IEEE 421.5-2016, clause 4 (sign of Xc); from memory.

    Parameters
    ----------
    xc_pu : float
        Magnitude of the compensating reactance. [pu]
    polarity : str
        ``normal`` or ``reversed``.

    Returns
    -------
    float
        Signed reactance. [pu]

    Raises
    ------
    ValueError
        An unknown polarity.

    Examples
    --------
    >>> signed_reactance(0.05, "reversed")
    -0.05
    """
    try:
        return {"normal": xc_pu, "reversed": -xc_pu}[polarity]
    except KeyError:
        raise ValueError(f"unknown polarity {polarity!r}: normal or reversed") from None


def terminal_voltage_phasor(
    p_pu: ArrayLike, q_pu: ArrayLike, v_ref_pu: ArrayLike, xc_pu: ArrayLike, rc_pu: ArrayLike = 0.0
) -> FloatArray:
    """Return the terminal voltage that a regulator with load compensation holds, phasor law.

    Upper root of ``V^4 - (Vref^2 - 2(Rc P + Xc Q)) V^2 + (Rc^2 + Xc^2)(P^2 + Q^2) = 0``, which is
    ``(V + Xc Q/V)^2 + (Xc P/V)^2 = Vref^2`` for Rc = 0.

    Source: closed form of IEEE 421.5-2016, clause 4.

    Parameters
    ----------
    p_pu, q_pu : float or ndarray
        Power delivered. [pu]
    v_ref_pu : float or ndarray
        Set-point: the voltage at no load. [pu]
    xc_pu, rc_pu : float or ndarray
        Compensating reactance and resistance, signed. [pu]

    Returns
    -------
    ndarray
        Terminal voltage. [pu]

    Raises
    ------
    ValueError
        No voltage satisfies the law at some load (beyond the nose of the compensated set).

    Examples
    --------
    >>> round(float(terminal_voltage_phasor(0.8, 0.6, 1.0, 0.05)), 5)
    0.96816
    """
    p, q, v_ref = np.asarray(p_pu, float), np.asarray(q_pu, float), np.asarray(v_ref_pu, float)
    rc, xc = np.asarray(rc_pu, float), np.asarray(xc_pu, float)
    b = v_ref**2 - 2.0 * (rc * p + xc * q)
    discriminant = b * b - 4.0 * (rc * rc + xc * xc) * (p * p + q * q)
    if np.any(discriminant < 0.0) or np.any(b < 0.0):
        raise ValueError("no terminal voltage satisfies the droop law at this load")
    return np.asarray(np.sqrt(0.5 * (b + np.sqrt(discriminant))))


def terminal_voltage_reactive_current(q_pu: ArrayLike, v_ref_pu: ArrayLike, xc_pu: ArrayLike) -> FloatArray:
    """Return the terminal voltage held by a regulator that works on reactive current alone.

    Upper root of ``V^2 - Vref V + Xc Q = 0``.

    Source: closed form of the reactive part of IEEE 421.5-2016, clause 4.

    Parameters
    ----------
    q_pu : float or ndarray
        Reactive power delivered. [pu]
    v_ref_pu : float or ndarray
        Set-point: the voltage at no load. [pu]
    xc_pu : float or ndarray
        Compensating reactance, signed. [pu]

    Returns
    -------
    ndarray
        Terminal voltage. [pu]

    Raises
    ------
    ValueError
        No voltage satisfies the law at some load.

    Examples
    --------
    >>> round(float(terminal_voltage_reactive_current(0.6, 1.0, 0.05)), 5)
    0.96904
    """
    q, v_ref, xc = np.asarray(q_pu, float), np.asarray(v_ref_pu, float), np.asarray(xc_pu, float)
    discriminant = v_ref**2 - 4.0 * xc * q
    if np.any(discriminant < 0.0):
        raise ValueError("no terminal voltage satisfies the droop law at this load")
    return np.asarray(0.5 * (v_ref + np.sqrt(discriminant)))


def reactive_power_phasor(
    v_pu: ArrayLike, p_pu: ArrayLike, v_ref_pu: ArrayLike, xc_pu: ArrayLike
) -> FloatArray:
    """Return the reactive power that a set delivers at a given terminal voltage, phasor law with Rc = 0.

    ``Q = (V/Xc)(sqrt(Vref^2 - (Xc P/V)^2) - V)``.

    Source: closed form of IEEE 421.5-2016, clause 4.

    Parameters
    ----------
    v_pu, p_pu : float or ndarray
        Terminal voltage and active power delivered. [pu]
    v_ref_pu : float or ndarray
        Set-point. [pu]
    xc_pu : float or ndarray
        Compensating reactance, signed, not 0. [pu]

    Returns
    -------
    ndarray
        Reactive power. [pu]

    Raises
    ------
    ValueError
        Xc is 0 (the voltage then says nothing of Q), or the voltage is too low for the active power.

    Examples
    --------
    >>> v = terminal_voltage_phasor(0.8, 0.6, 1.0, 0.05)
    >>> round(float(reactive_power_phasor(v, 0.8, 1.0, 0.05)), 12)
    0.6
    """
    v, p = np.asarray(v_pu, float), np.asarray(p_pu, float)
    v_ref, xc = np.asarray(v_ref_pu, float), np.asarray(xc_pu, float)
    if np.any(xc == 0.0):
        raise ValueError("a set without droop has no reactive power of its own at a given voltage")
    rest = v_ref**2 - (xc * p / v) ** 2
    if np.any(rest < 0.0):
        raise ValueError("the voltage is too low for this active power under the droop law")
    return np.asarray((v / xc) * (np.sqrt(rest) - v))


def reactive_power_reactive_current(v_pu: ArrayLike, v_ref_pu: ArrayLike, xc_pu: ArrayLike) -> FloatArray:
    """Return the reactive power at a given terminal voltage, reactive-current law: ``Q = V (Vref - V)/Xc``.

    Source: closed form of the reactive part of IEEE 421.5-2016, clause 4.

    Parameters
    ----------
    v_pu : float or ndarray
        Terminal voltage. [pu]
    v_ref_pu : float or ndarray
        Set-point. [pu]
    xc_pu : float or ndarray
        Compensating reactance, signed, not 0. [pu]

    Returns
    -------
    ndarray
        Reactive power. [pu]

    Raises
    ------
    ValueError
        Xc is 0.

    Examples
    --------
    >>> round(float(reactive_power_reactive_current(0.97, 1.0, 0.05)), 4)
    0.582
    """
    v, v_ref, xc = np.asarray(v_pu, float), np.asarray(v_ref_pu, float), np.asarray(xc_pu, float)
    if np.any(xc == 0.0):
        raise ValueError("a set without droop has no reactive power of its own at a given voltage")
    return np.asarray(v * (v_ref - v) / xc)
