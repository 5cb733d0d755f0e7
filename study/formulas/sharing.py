"""How sets on one bus share active and reactive power, and how far their set-points may stray.

A straight characteristic of set i is ``x = x0_i - d_i y_i / r_i``: x the common quantity, y the power of the
set, r its rating, d its droop in the unit of x from zero to rated. It serves frequency with active power and
voltage with reactive power alike. The last axis of an array runs over the sets.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]


def share_straight(
    no_load: ArrayLike, droop: ArrayLike, rating: ArrayLike, total: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Return the common quantity and each set's power for straight characteristics.

    ``k_i = r_i/d_i``, ``x = (sum k_i x0_i - total)/sum k_i``, ``y_i = k_i (x0_i - x)``. One set without droop
    holds x at its own set-point and takes the rest.

    Source: closed form of n straight lines on one bus; the f-P case in Chapman, *Electric Machinery
    Fundamentals*, parallel operation of generators, from memory.

    Parameters
    ----------
    no_load : ndarray, shape (..., n)
        Value at no load of each set. [unit of x]
    droop : ndarray, shape (..., n)
        Fall from zero to rated power; 0 or more. [unit of x]
    rating : ndarray, shape (..., n)
        Rated power. [unit of y]
    total : ndarray, shape (...)
        Power to be shared. [unit of y]

    Returns
    -------
    tuple of ndarray
        Common quantity, shape (...) [unit of x]; power of each set, shape (..., n) [unit of y].

    Raises
    ------
    ValueError
        Two or more sets without droop (the share is undetermined), or a negative droop (the algebraic
        solution is no operating point).

    Examples
    --------
    >>> f, p = share_straight([61.5, 61.0], [1.0, 1.0], [1.0, 1.0], 2.5)
    >>> float(f), p.tolist()
    (60.0, [1.5, 1.0])
    """
    x0, d, r, y = np.broadcast_arrays(
        *(np.asarray(a, float) for a in (no_load, droop, rating)), np.asarray(total, float)[..., np.newaxis]
    )
    _refuse_undetermined(d)
    stiff = d == 0.0
    k = np.where(stiff, 0.0, r / np.where(stiff, 1.0, d))
    free = (np.sum(k * x0, axis=-1) - y[..., 0]) / np.where(stiff.any(axis=-1), 1.0, np.sum(k, axis=-1))
    held = np.sum(np.where(stiff, x0, 0.0), axis=-1)
    x = np.where(stiff.any(axis=-1), held, free)
    each = k * (x0 - x[..., np.newaxis])
    rest = y[..., 0] - np.sum(each, axis=-1)
    return np.asarray(x), np.asarray(np.where(stiff, rest[..., np.newaxis], each))


def _refuse_undetermined(droop: FloatArray) -> None:
    """Raise where the droops of sets on one bus leave their share undetermined or unstable."""
    if np.any(droop < 0.0):
        raise ValueError("a reversed (negative) droop has no stable share on a common bus")
    if np.any(np.sum(droop == 0.0, axis=-1) > 1):
        raise ValueError("two or more sets without droop on one bus: their share is undetermined")


def share_reactive(
    v_ref_pu: ArrayLike,
    xc_pu: ArrayLike,
    p_pu: ArrayLike,
    rating: ArrayLike,
    total: ArrayLike,
    *,
    q_min_pu: ArrayLike = -np.inf,
    q_max_pu: ArrayLike = np.inf,
) -> tuple[FloatArray, FloatArray]:
    """Return bus voltage and reactive power of each set under the phasor law of load compensation.

    Solves ``sum r_i q_i(V) = total`` with ``q_i(V) = (V/Xc)(sqrt(Vref^2 - (Xc P/V)^2) - V)``, each clamped at
    its limits, by root finding between the noses of the sets and twice the highest set-point, where q_i only
    falls. One set without droop holds its set-point while it is within its limits. With `p_pu` = 0 the law is
    that of a regulator that works on reactive current alone.

    Source: IEEE 421.5-2016, clause 4, with Rc = 0, on one ideal bus.

    Parameters
    ----------
    v_ref_pu : ndarray, shape (..., n)
        Set-points. [pu of one common voltage]
    xc_pu : ndarray, shape (..., n)
        Compensating reactances, 0 or more. [pu of own rating and the common voltage]
    p_pu : ndarray, shape (..., n)
        Active power of each set. [pu of own rating]
    rating : ndarray, shape (..., n)
        Rated apparent power. [kVA]
    total : ndarray, shape (...)
        Reactive power to be shared. [kvar]
    q_min_pu, q_max_pu : ndarray, shape (..., n)
        Limits of each set's reactive power. [pu of own rating]

    Returns
    -------
    tuple of ndarray
        Bus voltage, shape (...) [pu]; reactive power of each set, shape (..., n) [kvar].

    Raises
    ------
    ValueError
        Two or more sets without droop, a negative droop, or no voltage at which the sets carry the load.

    Examples
    --------
    >>> v, q = share_reactive([1.0, 1.0], [0.04, 0.08], [0.8, 0.8], [1000.0, 1000.0], 1000.0)
    >>> round(float(q[0] / q.sum()), 3)
    0.68
    """
    arrays = (v_ref_pu, xc_pu, p_pu, rating, q_min_pu, q_max_pu)
    v_ref, xc, p, r, q_low, q_high, q_tot = np.broadcast_arrays(
        *(np.asarray(a, float) for a in arrays), np.asarray(total, float)[..., np.newaxis]
    )
    _refuse_undetermined(xc)
    stiff = xc == 0.0
    x = np.where(stiff, 1.0, xc)

    def each(v: FloatArray) -> FloatArray:
        u = v[..., np.newaxis]
        falling = (u / x) * (np.sqrt(np.maximum(v_ref**2 - (x * p / u) ** 2, 0.0)) - u)
        step = np.where(u < v_ref, np.inf, -np.inf)
        return np.asarray(r * np.clip(np.where(stiff, step, falling), q_low, q_high))

    nose = np.where(stiff, 0.5 * v_ref, np.sqrt((0.5 * v_ref) ** 2 + (x * p / v_ref) ** 2))
    low, high = np.max(nose, axis=-1), 2.0 * np.max(v_ref, axis=-1)
    total_1 = q_tot[..., 0]
    if np.any(np.sum(each(low), axis=-1) < total_1) or np.any(np.sum(each(high), axis=-1) > total_1):
        raise ValueError("there is no voltage at which the sets carry this reactive load")
    v = _bisect(each, low, high, total_1) if stiff.any() else _common_voltage(each, low, high, total_1)
    return _settle_stiff(v, each, v_ref, stiff, total_1)


def _bisect(
    each: Callable[[FloatArray], FloatArray], low: FloatArray, high: FloatArray, total: FloatArray
) -> FloatArray:
    """Return the voltage between two at which the sets' powers, falling with it, add up to the total."""
    for _ in range(80):
        middle = 0.5 * (low + high)
        above = np.sum(each(middle), axis=-1) >= total
        low, high = np.where(above, middle, low), np.where(above, high, middle)
    return np.asarray(0.5 * (low + high))


def _common_voltage(
    each: Callable[[FloatArray], FloatArray], low: FloatArray, high: FloatArray, total: FloatArray
) -> FloatArray:
    """Return the same as `_bisect` by the secant through two trial voltages, kept inside the bracket."""
    old, v = high, 0.5 * (low + high)
    excess_old = np.sum(each(old), axis=-1) - total
    for _ in range(80):
        excess = np.sum(each(v), axis=-1) - total
        low, high = np.where(excess >= 0.0, v, low), np.where(excess >= 0.0, high, v)
        moved = excess != excess_old
        slope = np.where(moved, (excess - excess_old) / np.where(v != old, v - old, 1.0), -1.0)
        step = np.where(excess == 0.0, 0.0, -excess / slope)
        better = v + step
        inside = (better >= low) & (better <= high) & moved
        old, excess_old = v, excess
        v = np.where(inside, better, 0.5 * (low + high))
        if np.max(np.abs(v - old), initial=0.0) < 1e-14:
            break
    return np.asarray(v)


def _settle_stiff(
    v: FloatArray,
    each: Callable[[FloatArray], FloatArray],
    v_ref: FloatArray,
    stiff: NDArray[np.bool_],
    total: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Give the set without droop, where the bus stands at its set-point, what the others leave."""
    set_point = np.sum(np.where(stiff, v_ref, 0.0), axis=-1)
    holds = stiff.any(axis=-1) & np.isclose(v, set_point, rtol=0.0, atol=1e-12)
    v = np.where(holds, set_point, v)
    q = each(v)
    rest = total - np.sum(np.where(stiff, 0.0, q), axis=-1)
    takes = stiff & holds[..., np.newaxis]
    return np.asarray(v), np.asarray(np.where(takes, rest[..., np.newaxis], q))


def circulating_current(e1: complex, e2: complex, z1: complex, z2: complex) -> complex:
    """Return the current that circulates between two machines of fixed excitation: ``(E1 - E2)/(Z1 + Z2)``.

    Source: Kirchhoff; with Z the synchronous impedance of each.

    Parameters
    ----------
    e1, e2 : complex
        Excitation voltages. [pu, or V for each phase]
    z1, z2 : complex
        Synchronous impedances. [pu on one base, or ohm]

    Returns
    -------
    complex
        Current out of machine 1 into machine 2. [pu or A]

    Examples
    --------
    >>> circulating_current(1.1, 1.0, 0.5j, 0.5j)
    -0.10000000000000009j
    """
    return (e1 - e2) / (z1 + z2)


def proportional_share(total: ArrayLike, rating: ArrayLike) -> FloatArray:
    """Return the part of a total that falls to each set by its rating.

    Source: definition of proportionate share, IEC 60092-301 and class rules.

    Parameters
    ----------
    total : ndarray, shape (...)
        Power to be shared. [kW or kvar]
    rating : ndarray, shape (n,)
        Rated power. [unit of `total`]

    Returns
    -------
    ndarray, shape (..., n)
        Shares. [unit of `total`]

    Examples
    --------
    >>> proportional_share(900.0, [1000.0, 500.0]).tolist()
    [600.0, 300.0]
    """
    r = np.asarray(rating, float)
    return np.asarray(np.asarray(total, float)[..., np.newaxis] * r / np.sum(r))


def active_sharing_limit(rated_kw: ArrayLike, *, of_largest: float, of_own: float) -> FloatArray:
    """Return how far each set's active power may be from its share: the less of two fractions.

    Source: 15 % of the largest set, ClassNK Part H 2.4.14; or 25 % of the set's own rating if that is less,
    from memory of IEC 60092-301 and other class rules.

    Parameters
    ----------
    rated_kw : ndarray, shape (n,)
        Rated active power of the sets that run. [kW]
    of_largest, of_own : float
        Fractions; the rules have 0.15 and 0.25.

    Returns
    -------
    ndarray, shape (n,)
        Permitted deviation. [kW]

    Examples
    --------
    >>> active_sharing_limit([1000.0, 400.0], of_largest=0.15, of_own=0.25).tolist()
    [150.0, 100.0]
    """
    r = np.asarray(rated_kw, float)
    return np.asarray(np.minimum(of_largest * np.max(r), of_own * r))


def reactive_sharing_limit(rated_kvar: ArrayLike, *, of_largest: float, of_smallest: float) -> float:
    """Return how far any set's reactive power may be from its share: the less of two fractions.

    Source: class rules: 10 % of the largest set, or 25 % of the smallest if that is less; from memory of
    IEC 60092-301.

    Parameters
    ----------
    rated_kvar : ndarray, shape (n,)
        Rated reactive power of the sets that run. [kvar]
    of_largest, of_smallest : float
        Fractions; the rules have 0.10 and 0.25.

    Returns
    -------
    float
        Permitted deviation, equal for all sets. [kvar]

    Examples
    --------
    >>> reactive_sharing_limit([600.0, 200.0], of_largest=0.10, of_smallest=0.25)
    50.0
    """
    r = np.asarray(rated_kvar, float)
    return float(min(of_largest * np.max(r), of_smallest * np.min(r)))


def trimmed_no_load(common: ArrayLike, droop: ArrayLike, load_fraction: float) -> FloatArray:
    """Return the set-points that make straight characteristics share in proportion at one load.

    ``x0_i = x + d_i f``: at that load every set carries the fraction f of its own rating. (For the phasor law
    the set-point is the compensated voltage at that load.)

    Source: rule practice of tuning sets at 75 % of the total before the sharing test (ClassNK H 2.4.14).

    Parameters
    ----------
    common : float or ndarray
        Voltage or frequency wanted at that load. [unit of x]
    droop : ndarray, shape (..., n)
        Fall from zero to rated. [unit of x]
    load_fraction : float
        f; the rules have 0.75.

    Returns
    -------
    ndarray, shape (..., n)
        Values at no load. [unit of x]

    Examples
    --------
    >>> trimmed_no_load(1.0, [0.04, 0.03], 0.75).round(4).tolist()
    [1.03, 1.0225]
    """
    return np.asarray(np.asarray(common, float) + np.asarray(droop, float) * load_fraction)


def set_point_sensitivity(droop: ArrayLike, rating: ArrayLike) -> FloatArray:
    """Return how each set's power answers each set-point on straight characteristics at a constant total.

    ``dy_i/dx0_j = k_i (delta_ij - k_j/sum k)``, ``k = r/d``.

    Source: derivative of `share_straight`.

    Parameters
    ----------
    droop, rating : ndarray, shape (n,)
        Droop, above 0 [unit of x], and rated power [unit of y].

    Returns
    -------
    ndarray, shape (n, n)
        Row i is the set that answers, column j the set-point moved. [unit of y for one unit of x]

    Raises
    ------
    ValueError
        A droop that is not above 0.

    Examples
    --------
    >>> set_point_sensitivity([0.04, 0.04], [600.0, 600.0]).round(3).tolist()
    [[7500.0, -7500.0], [-7500.0, 7500.0]]
    """
    d, r = np.asarray(droop, float), np.asarray(rating, float)
    if np.any(d <= 0.0):
        raise ValueError("every droop must be above 0 for a sensitivity")
    k = r / d
    return np.asarray(np.diag(k) - np.outer(k, k) / np.sum(k))


def set_point_margin(
    deviation: ArrayLike, limit: ArrayLike, droop: ArrayLike, rating: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Return how far each set-point may be lowered and raised, alone, before any set leaves its limit.

    Exact for straight characteristics at a constant total: the deviation of set i moves by
    ``dy_i/dx0_j`` for each unit of set-point j (see `set_point_sensitivity`).

    Source: derivative of `share_straight`.

    Parameters
    ----------
    deviation : ndarray, shape (n,)
        Present deviation of each set from its share. [unit of y]
    limit : ndarray, shape (n,)
        Permitted deviation, either way. [unit of y]
    droop, rating : ndarray, shape (n,)
        Droop, above 0 [unit of x], and rated power [unit of y].

    Returns
    -------
    tuple of ndarray, shape (n,)
        Room downwards and upwards of each set-point; negative where a limit is passed already. [unit of x]

    Raises
    ------
    ValueError
        A droop that is not above 0, or fewer than two sets.

    Examples
    --------
    >>> down, up = set_point_margin([0.0, 0.0], [60.0, 60.0], [0.04, 0.04], [600.0, 600.0])
    >>> down.round(6).tolist(), up.round(6).tolist()
    ([0.008, 0.008], [0.008, 0.008])
    """
    now, bound = np.asarray(deviation, float)[:, np.newaxis], np.asarray(limit, float)[:, np.newaxis]
    slope = set_point_sensitivity(droop, rating)
    if slope.shape[0] < 2:
        raise ValueError("a set that runs alone shares with nobody: it has no sharing margin")
    steep = np.abs(slope)
    up = np.min((bound - np.sign(slope) * now) / steep, axis=0)
    down = np.min((bound + np.sign(slope) * now) / steep, axis=0)
    return np.asarray(down), np.asarray(up)
