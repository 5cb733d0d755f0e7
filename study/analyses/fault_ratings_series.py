"""Usual ratings, to say what would suffice."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.fault_duty import assembly_peak_ratio
from study.formulas.fault_duty_mv import STANDARD_TIME_CONSTANT_S, rated_peak_factor

FloatArray = NDArray[np.float64]

# Breaking capacities of low-voltage devices on the market; common practice, no source. [kA]
LOW_VOLTAGE_KA: Final = (
    *(1.5, 3.0, 4.5, 6.0, 10.0, 15.0, 20.0, 25.0, 36.0, 42.0, 50.0, 65.0, 70.0, 80.0, 100.0, 120.0, 150.0),
    200.0,
)
# R10 series of IEC 60059, as IEC 62271-1 prescribes for short-circuit ratings; from memory. [kA]
R10_KA: Final = (6.3, 8.0, 10.0, 12.5, 16.0, 20.0, 25.0, 31.5, 40.0, 50.0, 63.0, 80.0, 100.0)
# Short-time withstand of low-voltage assemblies on the market; common practice, no source. [kA]
ASSEMBLY_KA: Final = (
    *(5.0, 6.0, 8.0, 10.0, 12.0, 15.0, 20.0, 25.0, 30.0, 36.0, 42.0, 50.0, 65.0, 80.0, 100.0, 120.0, 150.0),
    200.0,
)
ASSEMBLY_PEAK_KA: Final = tuple(float(x) for x in assembly_peak_ratio(ASSEMBLY_KA) * np.array(ASSEMBLY_KA))
# Nominal sections of IEC 60228. [mm2]
SECTIONS_MM2: Final = (
    *(1.0, 1.5, 2.5, 4.0, 6.0, 10.0, 16.0, 25.0, 35.0, 50.0, 70.0, 95.0, 120.0, 150.0, 185.0, 240.0, 300.0),
    *(400.0, 500.0, 630.0),
)


def next_usual(needed: ArrayLike, series: tuple[float, ...]) -> FloatArray:
    """Return the smallest member of a series not below each value; NaN above the last one.

    Parameters
    ----------
    needed : array_like
        Any shape; NaN gives NaN.
    series : tuple of float
        Ascending.

    Returns
    -------
    FloatArray
        The shape of `needed`.

    Examples
    --------
    >>> next_usual([23.0, 25.0, 900.0], LOW_VOLTAGE_KA)
    array([25., 25., nan])
    """
    value = np.asarray(needed, float)
    place = np.searchsorted(np.array(series), np.nan_to_num(value, nan=np.inf), side="left")
    return np.asarray(np.append(np.array(series), np.nan)[place])


def peak_factor_above_1_kv(f_hz: float) -> float:
    """Return the peak factor of switchgear above 1 kV, which is rated for 50 or 60 Hz: the nearer of both.

    Parameters
    ----------
    f_hz : float
        Frequency of the plant. [Hz]

    Returns
    -------
    float
        Rated peak over rated r.m.s. current.

    Examples
    --------
    >>> peak_factor_above_1_kv(58.0)
    2.6
    """
    return rated_peak_factor(50.0 if f_hz < 55.0 else 60.0, STANDARD_TIME_CONSTANT_S)


def greatest(values: FloatArray) -> FloatArray:
    """Return the largest of each row, NaN where all are NaN.

    Parameters
    ----------
    values : ndarray, shape (row, mode)
        Any unit.

    Returns
    -------
    ndarray, shape (row,)
        The same unit.
    """
    if values.shape[1] == 0:
        return np.full(len(values), np.nan)
    largest = np.max(np.where(np.isnan(values), -np.inf, values), axis=1)
    return np.asarray(np.where(np.isfinite(largest), largest, np.nan))


def worst_mode(live: NDArray[np.bool_], *uses: FloatArray) -> NDArray[np.int64]:
    """Return the mode in which the highest of several uses of a rating lies; -1 for a piece that is dead.

    The last of the uses decides only where none of the others is known.

    Parameters
    ----------
    live : ndarray of bool, shape (piece, mode)
        In which modes it is live.
    *uses : ndarray, shape (piece, mode)
        Duty over rating; the last in any unit.

    Returns
    -------
    ndarray of int, shape (piece,)
        Mode.
    """
    if live.shape[1] == 0:
        return np.full(len(live), -1)
    known = np.stack([np.where(live, np.nan_to_num(use, nan=-1.0), -1.0) for use in uses[:-1]]).max(axis=0)
    rated = known.max(axis=1) >= 0.0
    by_size = np.where(live, np.nan_to_num(uses[-1], nan=0.0), -1.0)
    place = np.where(rated, known.argmax(axis=1), by_size.argmax(axis=1))
    return np.where(live.any(axis=1), place, -1).astype(np.int64)


def given(values: Sequence[float | None]) -> FloatArray:
    """Return ratings as an array, NaN where they are not given."""
    return np.array([np.nan if x is None else x for x in values], float)


def ratio(part: FloatArray, whole: FloatArray) -> FloatArray:
    """Return the quotient, 1 where the whole is not above 0."""
    return np.divide(part, whole, out=np.ones_like(whole), where=whole > 0.0)


class Stacked:
    """What each mode has for its pieces, [piece], by name; taken out as [piece, mode] of floats."""

    def __init__(self, modes: Sequence[Mapping[str, NDArray[np.generic]]], rows: int) -> None:
        self._modes, self._rows = modes, rows

    def __getitem__(self, name: str) -> FloatArray:
        """Return one array, [piece, mode]; without modes it has no columns."""
        if not self._modes:
            return np.zeros((self._rows, 0))
        return np.stack([mode[name] for mode in self._modes], axis=1).astype(float)
