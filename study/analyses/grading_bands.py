"""What opens each station: the bands of its devices together, and when they operate."""

from __future__ import annotations

import copy
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_limiting import LetThrough
from study.analyses.grading_currents import Currents
from study.analyses.grading_stations import Stations
from study.analyses.protection_devices import DeviceModel
from study.formulas.operate_state import CurrentHistory, edge_operating_s
from study.formulas.trip_law import Edge, edge_times_s

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

SHORT_TIME, LONG_TIME = "short-time", "long-time"
_SQRT2 = 2.0**0.5


@dataclass(frozen=True, slots=True, kw_only=True)
class Opener:
    """What opens one station.

    ``at_once`` are the earliest edges without a delay, ``delayed`` the others, ``latest`` all latest edges.
    ``early_known`` and ``late_known`` are False where an edge is not known. ``members`` are the rows of the
    devices that count. ``melts_a2s`` is the least I²t at which a fuse in it melts and ``cleared_a2s`` the
    greatest until it has cleared, in the range in which it limits the current; inf for none.
    """

    members: tuple[int, ...]
    at_once: tuple[Edge, ...]
    delayed: tuple[Edge, ...]
    latest: tuple[Edge, ...]
    early_known: bool
    late_known: bool
    melts_a2s: float
    cleared_a2s: float
    sheet: LetThrough | None


def opener_of(members: Sequence[int], models: Sequence[DeviceModel]) -> Opener:
    """Return what opens a station; a relay counts through the breaker that it opens.

    Parameters
    ----------
    members : sequence of int
        Rows of the devices at the station.
    models : sequence of DeviceModel
        All devices.

    Returns
    -------
    Opener
        The first of all edges opens it.
    """
    opened = {models[k].opened_by for k in members if models[k].opened_by != models[k].name}
    own = tuple(k for k in members if models[k].name not in opened)
    bands = [models[k].band for k in own]
    early = [edge for band in bands for edge in _not_before_short_time(band.earliest)]
    late = [edge for band in bands for edge in band.latest]
    return Opener(
        members=own,
        at_once=tuple(e for e in early if _is_at_once(e)),
        delayed=tuple(e for e in early if not _is_at_once(e)),
        latest=tuple(late),
        early_known=all(band.earliest_known for band in bands),
        late_known=any(band.latest_known for band in bands),
        melts_a2s=_last_a2s(early),
        cleared_a2s=_last_a2s(late),
        sheet=next((models[k].let_through for k in own if models[k].let_through is not None), None),
    )


def _not_before_short_time(edges: Sequence[Edge]) -> list[Edge]:
    """Return the earliest edges with the overload release no sooner than the short-time stage.

    Makers' curves end the overload release where the short-time stage begins; common practice, no source.
    """
    delay = [e.figures[0] if e.law == "constant" else e.least_s for e in edges if e.stage == SHORT_TIME]
    return [
        replace(e, least_s=max(e.least_s, min(delay))) if delay and e.stage == LONG_TIME else e for e in edges
    ]


def _is_at_once(edge: Edge) -> bool:
    return edge.law == "constant" and edge.figures[0] == 0.0


def _last_a2s(edges: Iterable[Edge]) -> float:
    """Return the I²t of the last point of a fuse's curve, beyond which it is constant."""
    points = [e.points[-1] for e in edges if e.law == "points" and e.figures[0] == 2.0]
    return min((amps**2 * time_s for amps, time_s in points), default=np.inf)


class Openers:
    """What opens every station, and when it does on given currents.

    Parameters
    ----------
    stations : Stations
        Of the plant.
    models : sequence of DeviceModel
        All devices, in workbook order.
    time_s : ndarray, shape (time,)
        Instants of all currents. [s]
    half_cycle_s : float
        T/2. [s]
    """

    def __init__(
        self, stations: Stations, models: Sequence[DeviceModel], time_s: FloatArray, half_cycle_s: float
    ) -> None:
        self.models, self.time_s, self.half_cycle_s = tuple(models), time_s, half_cycle_s
        self.openers = [opener_of(members, models) for members in stations.devices]
        self._look_up()

    def _look_up(self) -> None:
        x = self.openers
        self._at_once_late = [tuple(k for k, e in enumerate(o.latest) if _is_at_once(e)) for o in x]
        self._delayed_late = [tuple(k for k, e in enumerate(o.latest) if not _is_at_once(e)) for o in x]
        self.early_known = np.array([o.early_known for o in x], bool)
        self.late_known = np.array([o.late_known for o in x], bool)
        self.melts_a2s = np.array([o.melts_a2s for o in x], float)
        self.cleared_a2s = np.array([o.cleared_a2s for o in x], float)
        self.at_once_a = np.array(
            [
                [min((e.from_a for e in o.at_once if (e.sees == "peak") is peak), default=np.inf) for o in x]
                for peak in (True, False)
            ],
            float,
        ).reshape(2, len(x))

    def with_device(self, stations: Stations, models: Sequence[DeviceModel], changed: set[int]) -> Openers:
        """Return the same with other models of some devices.

        Parameters
        ----------
        stations : Stations
            Of the plant.
        models : sequence of DeviceModel
            All devices.
        changed : set of int
            Rows of the devices that differ.

        Returns
        -------
        Openers
            A new one.
        """
        new = object.__new__(Openers)
        new.models, new.time_s, new.half_cycle_s = tuple(models), self.time_s, self.half_cycle_s
        new.openers = [
            opener_of(members, models) if changed.intersection(members) else old
            for members, old in zip(stations.devices, self.openers, strict=True)
        ]
        new._look_up()
        return new

    def on_grid(self, time_s: FloatArray) -> Openers:
        """Return the same for currents at other instants.

        Parameters
        ----------
        time_s : ndarray, shape (time,)
            Half a cycle may be missing: then the instant behind it counts. [s]

        Returns
        -------
        Openers
            A new one.
        """
        new = copy.copy(self)
        new.time_s = time_s
        return new

    def half(self, currents: Currents) -> Currents:
        """Return the currents at half a cycle, twice: what instantaneous stages are judged on."""
        k = int(np.searchsorted(self.time_s, self.half_cycle_s))
        return currents.at((k, k))

    def latest_s(self, station: IntArray, currents: Currents) -> tuple[FloatArray, IntArray]:
        """Return when stations have cleared at the latest, and by which of their latest edges.

        Parameters
        ----------
        station : ndarray of int, shape (row,)
            Which station each row is about.
        currents : Currents
            [row, time]

        Returns
        -------
        time : ndarray, shape (row,)
            inf for never, NaN where it is not known. [s]
        edge : ndarray of int, shape (row,)
            Place among the latest edges of the station; -1 for none.
        """
        found, which = np.full(len(station), np.inf), np.full(len(station), -1, np.int64)
        sooner = self._first_of(self._at_once_late, station, self.half(currents), found, which)
        slow = np.flatnonzero(~sooner)
        if len(slow):
            part, edge = found[slow], which[slow]
            self._first_of(self._delayed_late, station[slow], currents.rows(slow), part, edge)
            found[slow], which[slow] = part, edge
        return np.where(self.late_known[station], found, np.nan), which

    def _first_of(
        self,
        kept: Sequence[tuple[int, ...]],
        station: IntArray,
        currents: Currents,
        found: FloatArray,
        which: IntArray,
    ) -> BoolArray:
        """Fill in the first of some latest edges of each row; return where one operates."""
        some = [kept[s] for s in station.tolist()]
        edges = [self.openers[s].latest[k] for s, ks in zip(station.tolist(), some, strict=True) for k in ks]
        row = np.repeat(np.arange(len(some)), [len(ks) for ks in some])
        if edges:
            time = self._operate_s(edges, currents.rows(row), early=False)
            time += np.array([edge.after_s for edge in edges])
            np.minimum.at(found, row, time)
            place = np.array([k for ks in some for k in ks], np.int64)
            hit = np.flatnonzero(np.isfinite(time) & (time == found[row]))[::-1]
            which[row[hit]] = place[hit]
        return np.isfinite(found)

    def delayed_release_s(self, station: IntArray, currents: Currents, held: BoolArray) -> FloatArray:
        """Return when the delayed stages of stations release at the earliest, for good.

        Parameters
        ----------
        station : ndarray of int, shape (row,)
            Which station each row is about.
        currents : Currents
            [row, time]
        held : ndarray of bool, shape (row,)
            Where the short-time stage is held by a signal from downstream.

        Returns
        -------
        ndarray, shape (row,)
            inf for never. [s]
        """
        edges, row = self._delayed(station, held)
        found = np.full(len(station), np.inf)
        if edges:
            np.minimum.at(found, row, self._operate_s(edges, currents.rows(row), early=True))
        return found

    def release_bound_s(self, station: IntArray, current_a: FloatArray, held: BoolArray) -> FloatArray:
        """Return a bound from below of `delayed_release_s`: the largest current kept up.

        Parameters
        ----------
        station, held
            As for `delayed_release_s`.
        current_a : ndarray, shape (row, ...)
            The largest current of each row. [A]

        Returns
        -------
        ndarray
            The shape of the currents. [s]
        """
        found = np.full(current_a.shape, np.inf)
        key = 2 * station + held
        order = np.argsort(key, kind="stable")
        bounds = np.flatnonzero(np.diff(key[order], prepend=-1)).tolist()
        for first, last in pairwise([*bounds, len(order)]):
            rows = order[first:last]
            edges, _ = self._delayed(station[rows[:1]], held[rows[:1]])
            if edges:
                amps = np.broadcast_to(current_a[rows].reshape(1, -1), (len(edges), current_a[rows].size))
                found[rows] = edge_times_s(edges, amps).min(axis=0).reshape(current_a[rows].shape)
        return found

    def largest_a(self, currents: Currents) -> FloatArray:
        """Return the largest current of each row that any stage may see, [row], in A."""
        peak = currents.ac_a + currents.dc_a
        return np.asarray(peak.max(axis=1, initial=0.0))

    def _delayed(self, station: IntArray, held: BoolArray) -> tuple[list[Edge], IntArray]:
        return _flat(
            [
                tuple(e for e in self.openers[s].delayed if e.stage != SHORT_TIME)
                if h
                else self.openers[s].delayed
                for s, h in zip(station.tolist(), held.tolist(), strict=True)
            ]
        )

    def _operate_s(self, edges: list[Edge], currents: Currents, *, early: bool) -> FloatArray:
        whole = currents.ac_a.shape[1] == len(self.time_s)
        time_s = self.time_s if whole else np.array([0.0, self.half_cycle_s])
        history = CurrentHistory(time_s=time_s[None, :], ac_a=currents.ac_a, dc_a=currents.dc_a)
        return edge_operating_s(edges, history, self.half_cycle_s, early=early)

    def threatened(self, station: IntArray, half: Currents, limit_a: FloatArray) -> BoolArray:
        """Return where a stage without delay may open a station.

        Parameters
        ----------
        station : ndarray of int, shape (row,)
            Which station each row is about.
        half : Currents
            From `half`.
        limit_a : ndarray, shape (row,)
            No more than that gets through, peak over sqrt2; inf where nothing limits it. [A]

        Returns
        -------
        ndarray of bool, shape (row,)
        """
        symmetrical = half.ac_a[:, 0]
        peak = np.minimum(symmetrical + half.dc_a[:, 0] / _SQRT2, limit_a)
        return np.asarray(
            (peak >= self.at_once_a[0, station])
            | (np.minimum(symmetrical, limit_a) >= self.at_once_a[1, station])
        )


def _flat(edges: Sequence[tuple[Edge, ...]]) -> tuple[list[Edge], IntArray]:
    return (
        [edge for some in edges for edge in some],
        np.repeat(np.arange(len(edges)), [len(some) for some in edges]),
    )
