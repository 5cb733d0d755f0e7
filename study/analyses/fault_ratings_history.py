"""Currents over time: a.c. and direct component of many faults at once, and the heat that has gathered."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.results.short_circuit import FaultCase

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

# Steps of a third follow decays of a few milliseconds to 1e-4 of the heat; past 10 s hardly any is left.
_FIRST_S, _FINE_TO_S, _FINE, _LAST_S, _COARSE = 0.0005, 10.0, 1.35, 7200.0, 2.0
_DIED_AWAY = 35.0  # time constants: 1e-15 of the start
_SIMPSON = np.array([1.0, 4.0, 1.0]) / 6.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Histories:
    """Currents of many faults, [row, interval, 3]: at the start, middle and end of each interval.

    ``time_s`` [interval + 1] bounds the intervals; integrals take a parabola through the three points. An
    instant at which a source stops bounds two intervals, so that both sides of it are kept apart.
    """

    time_s: FloatArray
    ac_a: FloatArray
    dc_a: FloatArray

    def less(self, other: Histories) -> Histories:
        """Return these currents less a part of them, never below 0."""
        return Histories(
            time_s=self.time_s,
            ac_a=np.maximum(self.ac_a - other.ac_a, 0.0),
            dc_a=np.maximum(self.dc_a - other.dc_a, 0.0),
        )

    def times(self, factor: FloatArray) -> Histories:
        """Return the currents times a factor that broadcasts against [row, interval, 3]."""
        return Histories(time_s=self.time_s, ac_a=self.ac_a * factor, dc_a=self.dc_a * factor)

    def row(self, row: int) -> Histories:
        """Return one row."""
        return Histories(time_s=self.time_s, ac_a=self.ac_a[row : row + 1], dc_a=self.dc_a[row : row + 1])

    def ac_at_a(self, time_s: FloatArray) -> FloatArray:
        """Return Iac of each row at its own time [row]."""
        return value_at(self.time_s, self.ac_a, time_s)

    def dc_at_a(self, time_s: FloatArray) -> FloatArray:
        """Return idc of each row at its own time [row]."""
        return value_at(self.time_s, self.dc_a, time_s)

    def heat_a2s(self, time_s: FloatArray) -> FloatArray:
        """Return the integral of Iac² + idc² of each row from 0 to its own time [row].

        Source: definition of the Joule integral; the term at supply frequency averages out.
        """
        return integral_until(self.time_s, self.ac_a**2 + self.dc_a**2, time_s)


def knots_s(f_hz: float, ends_s: FloatArray) -> FloatArray:
    """Return the bounds of the intervals: geometric, with half a cycle and every end of a source among them.

    Parameters
    ----------
    f_hz : float
        [Hz]
    ends_s : ndarray
        When sources stop; inf for those that do not. [s]

    Returns
    -------
    ndarray
        From 0 to 2 h. [s]
    """
    fine = np.exp(np.arange(np.log(_FIRST_S), np.log(_FINE_TO_S), np.log(_FINE)))
    coarse = np.exp(np.arange(np.log(_FINE_TO_S), np.log(_LAST_S), np.log(_COARSE)))
    ends = ends_s[(ends_s > 0.0) & (ends_s < _LAST_S)]
    return np.unique(np.concatenate([[0.0, 0.5 / f_hz, _LAST_S], fine, coarse, ends]))


def case_histories(
    case: FaultCase, place: IntArray, share: FloatArray, knots: FloatArray
) -> tuple[Histories, Histories]:
    """Return what flows at places in all, and what part of it each row sees.

    Parameters
    ----------
    case : FaultCase
        Of one mode.
    place : ndarray of int, shape (row,)
        Place of each row; -1 for none: no current.
    share : ndarray, shape (row, source)
        Part of each source's current that the row sees.
    knots : ndarray
        From `knots_s`. [s]

    Returns
    -------
    tuple of Histories
        All of it, [row]; the part, [row].
    """
    used, index = np.unique(place[place >= 0], return_inverse=True)
    fed = np.flatnonzero(_gives(case)[used].any(axis=0))
    samples = np.empty(2 * len(knots) - 1)
    samples[::2], samples[1::2] = knots, 0.5 * (knots[1:] + knots[:-1])
    each = _components(case, used, fed, samples)
    rows, weight = np.flatnonzero(place >= 0), share[place >= 0][:, fed]
    some = np.flatnonzero(weight.any(axis=1))
    runs = (samples[1::2] < case.parts.ends_s[fed][:, None]).astype(float)
    totals, parts = [], []
    for component in each:
        whole = _expanded(component, runs)
        total, part = (np.zeros((len(place), len(knots) - 1, 3)) for _ in range(2))
        total[rows] = whole[index]
        seen = component[index[some]] * weight[some][:, :, None]
        part[rows[some]] = _expanded(seen, runs)
        totals.append(total)
        parts.append(part)
    return (
        Histories(time_s=knots, ac_a=totals[0], dc_a=totals[1]),
        Histories(time_s=knots, ac_a=parts[0], dc_a=parts[1]),
    )


def _gives(case: FaultCase) -> BoolArray:
    """Return which source gives anything at each place, [place, source]."""
    parts = case.parts
    given = parts.subtransient_a + parts.transient_a + parts.sustained_a + parts.dc_a
    return np.asarray(given > 0.0)


def _components(
    case: FaultCase, places: IntArray, fed: IntArray, samples: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return Iac and idc of the sources that feed places, [place, source, sample]."""
    at = np.ix_(places, fed)
    parts = case.parts
    initial, transient, lasting, direct = (
        x[at] for x in (parts.subtransient_a, parts.transient_a, parts.sustained_a, parts.dc_a)
    )
    ac, dc = (np.zeros((*initial.shape, len(samples))) for _ in range(2))
    _add_decays(ac, initial - transient, parts.t_sub_s[at], samples)
    _add_decays(ac, transient - lasting, parts.t_trans_s[at], samples)
    ac += lasting[:, :, None]
    _add_decays(dc, direct, parts.t_dc_s[at], samples)
    return ac, dc


def _add_decays(total: FloatArray, start: FloatArray, constant_s: FloatArray, samples: FloatArray) -> None:
    """Add decaying parts [place, source] to a total [place, source, sample], up to where they have died away.

    Motors have no transient part, and most decays are short against the last sample.
    """
    columns = np.flatnonzero(start.any(axis=0))
    if not len(columns):
        return
    longest = np.where(start[:, columns] != 0.0, constant_s[:, columns], 0.0).max()
    until = int(np.searchsorted(samples, _DIED_AWAY * longest, side="right"))
    falls = np.exp(-samples[:until] / constant_s[:, columns, None])
    falls *= start[:, columns, None]
    total[:, columns, :until] += falls


def _expanded(component: FloatArray, runs: FloatArray) -> FloatArray:
    """Return the sum over sources, [row, source, sample], as [row, interval, 3]; each stops when it ends."""
    points = 2 * np.arange(runs.shape[1])[:, None] + np.arange(3)
    stops = ~runs.all(axis=1)
    whole = component[:, ~stops].sum(axis=1)[:, points]
    for source in np.flatnonzero(stops):
        whole = whole + component[:, source][:, points] * runs[source][:, None]
    return np.asarray(whole)


def value_at(knots: FloatArray, values: FloatArray, time_s: FloatArray) -> FloatArray:
    """Return the value of each row at its own time: the logarithm is a parabola, exact for one exponential.

    Parameters
    ----------
    knots : ndarray, shape (interval + 1,)
        [s]
    values : ndarray, shape (row, interval, 3)
        At the start, middle and end of each interval.
    time_s : ndarray, shape (row,)
        NaN gives NaN; beyond the last knot the last value holds. [s]

    Returns
    -------
    ndarray, shape (row,)
        In the unit of the values.
    """
    k, u = _position(knots, time_s)
    points = values[np.arange(len(k)), k]
    falls = np.all(points > 0.0, axis=1)
    a, b, c = np.where(falls[:, None], np.log(np.where(falls[:, None], points, 1.0)), points).T
    there = a + u * (4.0 * b - 3.0 * a - c) + u**2 * (2.0 * a - 4.0 * b + 2.0 * c)
    there = np.where(falls, np.exp(np.where(falls, there, 0.0)), there)
    return np.asarray(np.where(np.isnan(time_s), np.nan, there))


def integral_until(knots: FloatArray, values: FloatArray, time_s: FloatArray) -> FloatArray:
    """Return the integral of each row from 0 to its own time, by Simpson's rule.

    Parameters
    ----------
    knots : ndarray, shape (interval + 1,)
        [s]
    values : ndarray, shape (row, interval, 3)
        At the start, middle and end of each interval.
    time_s : ndarray, shape (row,)
        NaN gives NaN; beyond the last knot nothing is added. [s]

    Returns
    -------
    ndarray, shape (row,)
        Unit of the values times s.
    """
    k, u = _position(knots, time_s)
    row, width = np.arange(len(k)), np.diff(knots)
    before = running_integral(knots, values)[row, k]
    a, b, c = (values[row, k, i] for i in range(3))
    within = u * a + u**2 / 2.0 * (4.0 * b - 3.0 * a - c) + u**3 / 3.0 * (2.0 * a - 4.0 * b + 2.0 * c)
    return np.asarray(np.where(np.isnan(time_s), np.nan, before + width[k] * within))


def running_integral(knots: FloatArray, values: FloatArray) -> FloatArray:
    """Return the integral of each row from 0 to each knot, (row, interval + 1)."""
    steps = (values @ _SIMPSON) * np.diff(knots)
    return np.concatenate([np.zeros((len(values), 1)), np.cumsum(steps, axis=1)], axis=1)


def _position(knots: FloatArray, time_s: FloatArray) -> tuple[IntArray, FloatArray]:
    """Return the interval of each time and how far into it, 0..1."""
    time = np.clip(np.nan_to_num(time_s, nan=0.0, posinf=knots[-1]), 0.0, knots[-1])
    k = np.clip(np.searchsorted(knots, time, side="left") - 1, 0, len(knots) - 2)
    return k.astype(np.int64), (time - knots[k]) / np.diff(knots)[k]
