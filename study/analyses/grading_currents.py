"""The currents through stations over time, for faults at chosen places of one case."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_stations import CaseWays
from study.results.short_circuit import Exponentials, ShortCircuitResult

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

# Instants: steps of a third; between them the logarithm of a current is a straight line, so that one
# exponential is exact whatever the step.
_FIRST_S, _RATIO = 5e-4, 1.33


@dataclass(frozen=True, slots=True, kw_only=True)
class Currents:
    """Currents of many faults, [row, time]: symmetrical r.m.s. and direct component, in A."""

    ac_a: FloatArray
    dc_a: FloatArray

    def rows(self, rows: IntArray | NDArray[np.bool_]) -> Currents:
        """Return some of the rows."""
        return Currents(ac_a=self.ac_a[rows], dc_a=self.dc_a[rows])

    def at(self, instants: Sequence[int]) -> Currents:
        """Return the currents at some of the instants."""
        return Currents(ac_a=self.ac_a[:, instants], dc_a=self.dc_a[:, instants])

    def times(self, factor: FloatArray) -> Currents:
        """Return the currents times a factor that broadcasts against [row, time]."""
        return Currents(ac_a=self.ac_a * factor, dc_a=self.dc_a * factor)


def joined(parts: Sequence[Currents]) -> Currents:
    """Return the rows of several currents, one after the other."""
    return Currents(
        ac_a=np.concatenate([p.ac_a for p in parts]), dc_a=np.concatenate([p.dc_a for p in parts])
    )


def between(low: Currents, high: Currents, x: FloatArray) -> Currents:
    """Return currents between two faults, in equal steps of the logarithm.

    Parameters
    ----------
    low, high : Currents
        [row, time]
    x : ndarray, broadcast against [row, time]
        0 for the low one, 1 for the high one.

    Returns
    -------
    Currents
        0 where either is 0.
    """

    def mixed(a: FloatArray, b: FloatArray) -> FloatArray:
        there = (a > 0.0) & (b > 0.0)
        logs = (1.0 - x) * np.log(np.where(there, a, 1.0)) + x * np.log(np.where(there, b, 1.0))
        return np.asarray(np.where(there, np.exp(logs), 0.0))

    return Currents(ac_a=mixed(low.ac_a, high.ac_a), dc_a=mixed(low.dc_a, high.dc_a))


def grid_s(result: ShortCircuitResult, last_s: float) -> FloatArray:
    """Return the instants at which currents are looked at; those at which a source stops stand twice.

    Parameters
    ----------
    result : ShortCircuitResult
        Holds the frequency, and when sources stop.
    last_s : float
        The last instant. [s]

    Returns
    -------
    ndarray
        [s]
    """
    ends = np.concatenate([c.parts.ends_s for m in result.modes for c in (m.maximum, m.minimum)])
    ends = np.unique(ends[(ends > 0.0) & (ends < last_s)])
    steps = int(np.ceil(np.log(last_s / _FIRST_S) / np.log(_RATIO)))
    once = np.unique(
        np.concatenate([[0.0, 0.5 / result.f_hz], np.geomspace(_FIRST_S, last_s, steps + 1), ends])
    )
    return np.sort(np.concatenate([once, ends]))


class CaseCurrents:
    """Currents of one case; what sources give at a place is worked out once for each place.

    Parameters
    ----------
    ways : CaseWays
        What comes through each station.
    time_s : ndarray, shape (time,)
        From `grid_s`. [s]
    """

    def __init__(self, ways: CaseWays, time_s: FloatArray) -> None:
        self.ways, self.time_s = ways, time_s
        self._given: dict[tuple[int, bool], FloatArray] = {}

    def forget(self) -> None:
        """Drop what was worked out: it is large."""
        self._given.clear()

    def through(
        self, station: IntArray, place: IntArray, inside: IntArray, *, two_phase: bool = False
    ) -> Currents:
        """Return the current through stations for faults at places, [row, time].

        Parameters
        ----------
        station, place, inside : ndarray of int, shape (row,)
            As for `CaseWays.into_branch`.
        two_phase : bool
            The largest phase current of a two-phase fault: 2/sqrt3 of it on the far side of a star-delta
            transformation.

        Returns
        -------
        Currents
            [A]
        """
        share = self.ways.into_branch(station, place, inside)
        if two_phase:
            turned = self.ways.turned(station, place)
            share = share * np.where(turned, 2.0 / 3.0**0.5, 1.0)[:, None]
        self._work_out(np.unique(place), two_phase)
        both = np.zeros((len(station), 2 * len(self.time_s)))
        order = np.argsort(place, kind="stable")
        share, places = share[order], place[order]
        bounds = [*np.flatnonzero(np.diff(places, prepend=-1)).tolist(), len(places)]
        for first, last in pairwise(bounds):
            np.matmul(share[first:last], self._given[int(places[first]), two_phase], out=both[first:last])
        back = np.empty_like(order)
        back[order] = np.arange(len(order))
        both = np.abs(both[back])
        return Currents(ac_a=both[:, : len(self.time_s)], dc_a=both[:, len(self.time_s) :])

    def _work_out(self, places: IntArray, two_phase: bool) -> None:
        case = self.ways.case
        parts = case.parts_2ph if two_phase else case.parts
        missing = np.array([p for p in places.tolist() if (p, two_phase) not in self._given], np.int64)
        if len(missing):
            both = np.concatenate(_given_a(parts, missing, self.time_s), axis=2)
            self._given |= {(p, two_phase): both[k] for k, p in enumerate(missing.tolist())}


def _given_a(parts: Exponentials, places: IntArray, time_s: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return Iac and idc of each source at places, [place, source, time]."""
    initial, transient, lasting, direct = (
        x[places] for x in (parts.subtransient_a, parts.transient_a, parts.sustained_a, parts.dc_a)
    )
    shape = (*initial.shape, len(time_s))
    ac, dc = np.zeros(shape), np.zeros(shape)
    gives = (initial + transient + lasting) > 0.0
    fast = (initial - transient)[gives][:, None]
    ac[gives] = fast * np.exp(-time_s / parts.t_sub_s[places][gives][:, None])
    # Motors have no transient part, and they are most of the sources.
    slow = gives & ((transient + lasting) > 0.0)
    kept = lasting[slow][:, None]
    ac[slow] += (transient[slow][:, None] - kept) * np.exp(-time_s / parts.t_trans_s[places][slow][:, None])
    ac[slow] += kept
    off = direct > 0.0
    dc[off] = direct[off][:, None] * np.exp(-time_s / parts.t_dc_s[places][off][:, None])
    runs = _runs(parts.ends_s, time_s)
    return ac * runs, dc * runs


def _runs(ends_s: FloatArray, time_s: FloatArray) -> FloatArray:
    """Return 1 while a source gives current, [source, time]; at its end the first of two samples counts."""
    first = np.diff(time_s, prepend=-1.0) > 0.0
    before = time_s[None, :] < ends_s[:, None]
    last = (time_s[None, :] == ends_s[:, None]) & first[None, :]
    return np.asarray(before | last, float)
