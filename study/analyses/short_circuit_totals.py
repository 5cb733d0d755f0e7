"""Sums over sources: a.c. and direct component on a grid of times, and the greatest peak of the envelope."""

from __future__ import annotations

import math

import numpy as np
from numpy.polynomial import chebyshev
from numpy.typing import NDArray

from study.formulas.fault_current import SQRT2, FaultCurrent

FloatArray = NDArray[np.float64]

_NODES = 10  # Chebyshev points in half a cycle; the decays are smooth, ten leave 1e-7
_COARSE, _PASSES, _FINE = 16, 4, 9
_EARLIEST = -0.2  # of half a cycle, -1 to 1: resistance alone puts the peak at 0, a quarter cycle
_FEW_S = np.array([0.0, 0.05, 0.1, 0.2, 0.5, 1.0, 2.0, 10.0])
_DIED_AWAY = -30.0  # exponent: 1e-13 of the start


def sums_at(current: FaultCurrent, ends_s: FloatArray, time_s: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return Iac and idc of all sources together at given times.

    Source: IEC 61363-1:1998, contributions added arithmetically; from memory.

    Parameters
    ----------
    current : FaultCurrent
        Shape (place, source). [A]
    ends_s : ndarray, shape (source,)
        When each source stops. [s]
    time_s : ndarray, shape (time,)
        From the start of the fault. [s]

    Returns
    -------
    tuple of ndarray
        Both (place, time). [A]
    """
    return ac_sums_at(current, ends_s, time_s), _decays(
        current.dc_a, current.t_dc_s, _runs(ends_s, time_s), time_s
    )


def ac_sums_at(current: FaultCurrent, ends_s: FloatArray, time_s: FloatArray) -> FloatArray:
    """Return Iac of all sources together at given times; see `sums_at`.

    Parameters
    ----------
    current : FaultCurrent
        Shape (place, source). [A]
    ends_s : ndarray, shape (source,)
        When each source stops. [s]
    time_s : ndarray, shape (time,)
        From the start of the fault. [s]

    Returns
    -------
    ndarray, shape (place, time)
        [A]
    """
    lasting = (current.transient_a > 0.0).any(axis=0) | (current.sustained_a > 0.0).any(axis=0)
    runs = _runs(ends_s, time_s)
    fast = _decays(current.subtransient_a - current.transient_a, current.t_sub_s, runs, time_s)
    few = np.flatnonzero(lasting)
    slow = _decays(
        (current.transient_a - current.sustained_a)[:, few], current.t_trans_s[:, few], runs[few], time_s
    )
    kept = current.sustained_a[:, few] @ runs[few]
    return np.asarray(fast + slow + kept)


def _runs(ends_s: FloatArray, time_s: FloatArray) -> FloatArray:
    """Return 1 while a source runs and 0 after, (source, time)."""
    return np.asarray((time_s[None, :] <= ends_s[:, None]).astype(float))


def _decays(start: FloatArray, constant_s: FloatArray, runs: FloatArray, time_s: FloatArray) -> FloatArray:
    """Return the sum over sources of decaying parts, (place, time)."""
    out = np.zeros((start.shape[0], len(time_s)))
    # Instant by instant the exponentials stay in the cache; what has died away everywhere is left out.
    present = np.flatnonzero(start.any(axis=0))
    start, rate, runs = start[:, present], -1.0 / constant_s[:, present], runs[present]
    slowest = rate.max(axis=0, initial=-np.inf)
    for k in np.argsort(time_s):
        still = slowest * time_s[k] > _DIED_AWAY
        if not still.all():
            start, rate, runs, slowest = start[:, still], rate[:, still], runs[still], slowest[still]
        falls = rate * time_s[k]
        np.exp(falls, out=falls)
        falls *= start
        out[:, k] = falls @ runs[:, k]
    return out


def greatest_peaks(current: FaultCurrent, ends_s: FloatArray, frequency_hz: float) -> FloatArray:
    """Return the greatest instantaneous current at each place over all times and angles of the voltage.

    At time t the worst angle gives ``abs(sqrt2 Iac e^(jwt) - idc)``; the sums over sources are taken at
    Chebyshev points of half a cycle and interpolated.

    Source: follows from the components of IEC 61363-1:1998; the same as
    `study.formulas.fault_current.greatest_peak_a`, at a hundredth of its work.

    Parameters
    ----------
    current : FaultCurrent
        Shape (place, source). [A]
    ends_s : ndarray, shape (source,)
        When each source stops. [s]
    frequency_hz : float
        [Hz]

    Returns
    -------
    ndarray, shape (place,)
        [A]
    """
    points = chebyshev.chebpts1(_NODES)
    ac, dc = sums_at(current, ends_s, (points + 1.0) * 0.25 / frequency_hz)
    fit = np.linalg.inv(chebyshev.chebvander(points, _NODES - 1))
    series_ac, series_dc = fit @ ac.T, fit @ dc.T  # (order, place)
    middle, step = 0.5 * (1.0 + _EARLIEST), 0.5 * (1.0 - _EARLIEST)
    best = np.full(ac.shape[0], middle)
    offsets = np.linspace(-1.0, 1.0, _COARSE)
    value = np.zeros_like(best)
    for _ in range(_PASSES + 1):
        x = np.clip(best[:, None] + step * offsets[None, :], -1.0, 1.0)
        angle = 0.5 * math.pi * (x + 1.0)
        total_ac = chebyshev.chebval(x, series_ac[:, :, None], tensor=False)
        total_dc = chebyshev.chebval(x, series_dc[:, :, None], tensor=False)
        size = np.abs(SQRT2 * total_ac * np.exp(1j * angle) - total_dc)
        at = np.argmax(size, axis=1)[:, None]
        best = np.take_along_axis(x, at, axis=1)[:, 0]
        value = np.take_along_axis(size, at, axis=1)[:, 0]
        step, offsets = step * 2.0 / (len(offsets) - 1), np.linspace(-1.0, 1.0, _FINE)
    return value


def time_grid(frequency_hz: float, *, fine: bool) -> FloatArray:
    """Return the common times of the totals, to 10 s, with T/2 and T.

    Parameters
    ----------
    frequency_hz : float
        [Hz]
    fine : bool
        Fine in the first cycles, for the minimum currents that devices must see; else a few instants.

    Returns
    -------
    ndarray
        Ascending, from 0. [s]
    """
    own = np.array([0.5 / frequency_hz, 1.0 / frequency_hz])
    if not fine:
        return np.unique(np.concatenate([_FEW_S, own]).round(9))
    parts = [np.linspace(0.0, 0.02, 9), np.linspace(0.025, 0.1, 16), np.geomspace(0.12, 10.0, 24), own]
    return np.unique(np.concatenate(parts).round(9))
