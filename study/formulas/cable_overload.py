"""Coordination of a cable with its overload protection, and the next standard section."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


def least_rating_a(
    load_a: ArrayLike, device_a: ArrayLike, conventional_a: ArrayLike, trip_factor: float = 1.45
) -> FloatArray:
    """Return the least rating of a cable: the largest of Ib, In and I2/1.45; NaN is no demand.

    Source: IEC 60364-4-43, clause 433.1: Ib <= In <= Iz and I2 <= 1.45 Iz; from memory.

    Parameters
    ----------
    load_a : array_like
        Ib, the load. [A]
    device_a : array_like
        In, rating or setting of the overload protection. [A]
    conventional_a : array_like
        I2, what trips it for certain. [A]
    trip_factor : float
        What I2 may be over the rating.

    Returns
    -------
    FloatArray
        NaN where nothing is known. [A]

    Examples
    --------
    >>> least_rating_a([80.0, 80.0], [100.0, np.nan], [160.0, np.nan]).round(1).tolist()
    [110.3, 80.0]
    """
    demands = np.broadcast_arrays(
        np.asarray(load_a, float),
        np.asarray(device_a, float),
        np.asarray(conventional_a, float) / trip_factor,
    )
    return np.asarray(np.fmax.reduce(demands))


def voltage_drop_pu(
    current_a: ArrayLike,
    ohm_per_km: tuple[ArrayLike, ArrayLike],
    length_m: ArrayLike,
    cos_phi: ArrayLike,
    voltage_v: ArrayLike,
    *,
    three_phase: ArrayLike = True,
) -> FloatArray:
    """Return the fall of voltage along a run: ``sqrt3 I l (R cos + X sin)/U``, single-phase 2 for sqrt3.

    Source: IEC 60092-352, annex on voltage drop, from memory; the part across the voltage is left out.

    Parameters
    ----------
    current_a : array_like
        Of one run. [A]
    ohm_per_km : pair of array_like
        Resistance at operating temperature and reactance of one run. [ohm/km]
    length_m : array_like
        One way. [m]
    cos_phi : array_like
        Of the load, lagging.
    voltage_v : array_like
        Line to line, or across the load of a single-phase run. [V]
    three_phase : array_like of bool
        Three-phase or single-phase run.

    Returns
    -------
    FloatArray
        Per unit of the voltage.

    Examples
    --------
    >>> round(float(voltage_drop_pu(100.0, (0.927, 0.097), 50.0, 0.85, 440.0)), 4)
    0.0165
    """
    r, x = (np.asarray(value, float) for value in ohm_per_km)
    cos = np.asarray(cos_phi, float)
    factor = np.where(np.asarray(three_phase), np.sqrt(3.0), 2.0)
    along = r * cos + x * np.sqrt(np.maximum(1.0 - cos**2, 0.0))
    return np.asarray(
        factor * np.asarray(current_a) * np.asarray(length_m) / 1000.0 * along / np.asarray(voltage_v)
    )


def first_that_holds(holds: BoolArray, sizes: ArrayLike) -> FloatArray:
    """Return the smallest size for which a demand holds; NaN where none does.

    Source: definition.

    Parameters
    ----------
    holds : ndarray of bool, shape (row, size)
        Whether each size suffices.
    sizes : array_like, shape (size,)
        Ascending.

    Returns
    -------
    ndarray, shape (row,)
        In the unit of the sizes.

    Examples
    --------
    >>> first_that_holds(np.array([[False, True, True], [False, False, False]]), [1.5, 2.5, 4.0]).tolist()
    [2.5, nan]
    """
    table = np.asarray(sizes, float)
    return np.asarray(np.where(holds.any(axis=1), table[holds.argmax(axis=1)], np.nan))
