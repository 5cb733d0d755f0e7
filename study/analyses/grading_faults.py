"""The faults that the devices of one mode are graded on, and the currents through each of them."""

from __future__ import annotations

import copy
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_currents import CaseCurrents, Currents, between, joined
from study.analyses.grading_stations import Stations, case_ways
from study.analyses.grading_zones import Feed, Zones
from study.model.modes import Mode
from study.model.plant import Plant
from study.results.short_circuit import ModeShortCircuit, Places, ShortCircuitResult

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

LEVELS: Final = (
    "maximum just behind the device",
    "maximum at the far end",
    "minimum just behind the device",
    "minimum at the far end",
    "a quarter up from the minimum",
    "half way between minimum and maximum",
    "three quarters up from the minimum",
    "two-phase, maximum just behind the device",
    "two-phase, minimum at the far end",
)
MAX_NEAR, MAX_FAR, MIN_NEAR, MIN_FAR = range(4)
TWO_PHASE_NEAR, TWO_PHASE_FAR = 7, 8
BETWEEN: Final = {4: 0.25, 5: 0.5, 6: 0.75}
_CORNER: Final = {MAX_NEAR: 0, MAX_FAR: 1, MIN_NEAR: 0, MIN_FAR: 1, TWO_PHASE_NEAR: 0, TWO_PHASE_FAR: 1}
_MAXIMUM: Final = (MAX_NEAR, MAX_FAR, TWO_PHASE_NEAR)


class ModeFaults:
    """The faults of one mode, by the station that is to clear each.

    ``feeds`` [feed] are the stations that feed a fault, each with the zone in which it lies. Rows [row] are
    the currents to be looked at: ``feed``, ``station``, ``inward``; the first row of a feed, ``own`` [feed],
    is that of its own station, the others are the stations behind it. ``place`` and ``inside`` are [near or
    far, feed]. ``there`` [feed] is False where the minimum case does not feed the fault; ``fed_back`` [feed]
    True where only converters feed it, and others feed the fault too; ``turned`` [row] True with a star-delta
    transformation between station and fault.

    Parameters
    ----------
    mode : ModeShortCircuit
        One mode.
    stations : Stations
        Of the plant.
    places : Places
        Of the result.
    time_s : ndarray, shape (time,)
        Instants of all currents. [s]
    unused : frozenset of str
        Consumers that are not in use in the mode: switched off.
    """

    def __init__(
        self,
        mode: ModeShortCircuit,
        stations: Stations,
        places: Places,
        time_s: FloatArray,
        unused: frozenset[str],
    ) -> None:
        self.mode, self.stations, self.places, self.time_s = mode, stations, places, time_s
        self.unused = unused
        self.maximum = CaseCurrents(case_ways(stations, mode, maximum=True), time_s)
        self.minimum = CaseCurrents(case_ways(stations, mode, maximum=False), time_s)
        self.zones = Zones(stations, self.maximum.ways, places)
        self.feeds = tuple(f for f in self.zones.feeds() if not self._idle(f))
        self._kept: dict[int, Currents] = {}
        self._number()
        self.place, self.inside = self._where()
        self.there = self._in_minimum()
        self.fed_back = self._by_converters_alone()
        self.turned = self._turned()
        self.whole_rows = np.arange(len(self.feed))

    def only(self, station: int) -> ModeFaults:
        """Return the faults in which a station has a part, with the rows that its settings bear upon.

        Where it is the nearest one those are all rows of the feed, elsewhere the feed's own and its row.

        Parameters
        ----------
        station : int
            Which.

        Returns
        -------
        ModeFaults
            A part of these; its currents are worked out.
        """
        has = np.zeros(len(self.feeds), bool)
        has[self.feed[self.station == station]] = True
        nearest = self.station[self.own] == station
        return self._part(has, nearest[self.feed] | (self.station == station))

    def only_feed(self, station: int, inward: bool) -> ModeFaults:
        """Return the faults that a station is to clear on one of its sides, with all stations behind it."""
        has = np.array([(f.station, f.inward) == (station, inward) for f in self.feeds], bool)
        return self._part(has, np.ones(len(self.feed), bool))

    def _part(self, has: BoolArray, rows: BoolArray) -> ModeFaults:
        """Return some feeds with the others of their zones; of their rows those wanted and their own."""
        zones = np.array([f.zone for f in self.feeds], np.int64)
        has = has | np.isin(zones, zones[has])
        is_own = np.zeros(len(self.feed), bool)
        is_own[self.own] = True
        keep = np.flatnonzero(has[self.feed] & (rows | is_own))
        feeds = np.flatnonzero(has)
        part = copy.copy(self)
        part._kept = {}
        part.feeds = tuple(self.feeds[k] for k in feeds)
        part.feed = np.searchsorted(feeds, self.feed[keep])
        part.station, part.inward, part.turned = self.station[keep], self.inward[keep], self.turned[keep]
        part.own = np.flatnonzero(is_own[keep])
        part.place, part.inside = self.place[:, feeds], self.inside[:, feeds]
        part.there, part.fed_back = self.there[feeds], self.fed_back[feeds]
        part.whole_rows = keep
        part.work_out()
        return part

    def work_out(self) -> None:
        """Work out the currents of all rows at once and keep them until `forget`."""
        everything = np.arange(len(self.feed))
        self._kept = {level: self.currents(everything, level) for level in range(4)}
        self.maximum.forget()
        self.minimum.forget()

    def forget(self) -> None:
        """Drop the currents that were worked out: they are large."""
        self._kept = {}
        self.maximum.forget()
        self.minimum.forget()

    def _idle(self, feed: Feed) -> bool:
        """Return True for a zone that holds the open end of something that is off: nothing is protected."""
        zone = self.zones.zones[feed.zone]
        if zone.consumers and not zone.boards and not zone.sources:
            return self.unused.issuperset(zone.consumers)
        if zone.boards or zone.consumers or zone.sources or len(zone.stations) > 1 or not zone.places:
            return False
        running = set(self.mode.maximum.sources.names)
        return all(
            self.places.names[p] not in zone.branches and self.places.names[p] not in running
            for p in zone.places
        )

    def _number(self) -> None:
        sizes = [1 + len(f.behind) for f in self.feeds]
        self.feed = np.repeat(np.arange(len(self.feeds)), sizes)
        self.own = np.concatenate([[0], np.cumsum(sizes)])[:-1].astype(np.int64)
        self.station = np.array(
            [s for f in self.feeds for s in (f.station, *(b for b, _ in f.behind))], np.int64
        )
        self.inward = np.array([i for f in self.feeds for i in (f.inward, *(b for _, b in f.behind))], bool)

    def _where(self) -> tuple[IntArray, IntArray]:
        """Return where the faults lie: just behind each feed's station, and where the current is least."""
        at = [self._near(f) for f in self.feeds]
        options = [self._options(f) for f in self.feeds]
        far = [o[0] for o in options]
        many = [k for k, o in enumerate(options) if len(o) > 1]
        if many:
            feed = np.repeat(many, [len(options[k]) for k in many])
            where = np.array([o for k in many for o in options[k]], np.int64)
            amps = self._start_a(feed, where[:, 0], where[:, 1])
            for k in many:
                rows = np.flatnonzero(feed == k)
                best = rows[int(np.argmin(np.where(amps[rows] > 0.0, amps[rows], np.inf)))]
                far[k] = (int(where[best, 0]), int(where[best, 1]))
        both = np.array([at, far], np.int64).reshape(2, len(self.feeds), 2)
        return both[:, :, 0], both[:, :, 1]

    def _near(self, feed: Feed) -> tuple[int, int]:
        place = int(self.stations.place[feed.station])
        return place, feed.station if feed.inward else -1

    def _options(self, feed: Feed) -> list[tuple[int, int]]:
        zone = self.zones.zones[feed.zone]
        if zone.places:
            return [(p, -1) for p in zone.places]
        others = [s for s, inward in zone.stations if inward and s != feed.station]
        return [(int(self.stations.place[s]), s) for s in others] or [self._near(feed)]

    def _start_a(self, feed: IntArray, place: IntArray, inside: IntArray) -> FloatArray:
        """Return the current at the start through the feeds; of the minimum case where that feeds."""
        station = np.array([self.feeds[k].station for k in feed], np.int64)
        found = []
        for currents in (self.minimum, self.maximum):
            share = currents.ways.into_branch(station, place, inside)
            parts = currents.ways.case.parts
            lasts = parts.sustained_a[place] + 1e-3 * parts.subtransient_a[place]
            found.append(np.abs((share * lasts).sum(axis=1)))
        return np.asarray(np.where(found[0] > 0.0, found[0], found[1]))

    def _in_minimum(self) -> BoolArray:
        station = self.station[self.own]
        share = self.minimum.ways.into_branch(station, self.place[1], self.inside[1])
        parts = self.minimum.ways.case.parts
        return np.asarray(np.abs((share * parts.subtransient_a[self.place[1]]).sum(axis=1)) > 0.0)

    def _by_converters_alone(self) -> BoolArray:
        """Return the feeds through which only converters give current, where others feed the fault too.

        Their current stays near the rated one until they block: no device can tell it from load.
        """
        ways = self.maximum.ways
        station, place, inside = self.station[self.own], self.place[0], self.inside[0]
        share = np.abs(ways.into_branch(station, place, inside)) * ways.case.parts.subtransient_a[place]
        kinds = ways.case.sources.kinds
        converter = np.array([kind == "converter supply" for kind in kinds], bool)
        total = (share * ways.lasting).sum(axis=1)
        only = (share * converter).sum(axis=1) > (1.0 - 1e-6) * total
        others: dict[int, bool] = {}
        for feed, alone in zip(self.feeds, only.tolist(), strict=True):
            others[feed.zone] = others.get(feed.zone, False) or not alone
        return np.array([a and others[f.zone] for f, a in zip(self.feeds, only.tolist(), strict=True)], bool)

    def _turned(self) -> BoolArray:
        """Return the rows with a star-delta transformation between their station and the fault."""
        place = self.place[1][self.feed]
        return self.maximum.ways.turned(self.station, place)

    # ---- currents

    def exists(self, level: int) -> BoolArray:
        """Return the feeds for which a level is a fault of its own, [feed]."""
        everywhere = np.ones(len(self.feeds), bool)
        turned = np.zeros(len(self.feeds), bool)
        np.logical_or.at(turned, self.feed, self.turned)
        apart = (self.place[0] != self.place[1]) | (self.inside[0] != self.inside[1])
        found = {
            MAX_NEAR: everywhere,
            MAX_FAR: apart,
            MIN_NEAR: self.there & apart,
            MIN_FAR: self.there,
            TWO_PHASE_NEAR: turned,
            TWO_PHASE_FAR: turned & self.there,
        }
        return np.asarray(found.get(level, self.there | apart), bool)

    def currents(self, rows: IntArray, level: int) -> Currents:
        """Return the currents of some rows at one level, [row, time].

        Parameters
        ----------
        rows : ndarray of int, shape (row,)
            Which.
        level : int
            Place in `LEVELS`.

        Returns
        -------
        Currents
            [A]
        """
        if level in self._kept:
            return self._kept[level].rows(rows)
        if level in BETWEEN:
            return self.at_part(rows, np.full(len(rows), BETWEEN[level]))
        case = self.maximum if level in _MAXIMUM else self.minimum
        end, feed = _CORNER[level], self.feed[rows]
        return case.through(
            self.station[rows],
            self.place[end][feed],
            self.inside[end][feed],
            two_phase=level in (TWO_PHASE_NEAR, TWO_PHASE_FAR),
        )

    def at_part(self, rows: IntArray, part: FloatArray) -> Currents:
        """Return currents between the least fault (0) and the greatest (1) of each row's feed.

        Parameters
        ----------
        rows : ndarray of int, shape (row,)
            Which.
        part : ndarray, shape (row,)
            0..1

        Returns
        -------
        Currents
            [A]
        """
        order = np.argsort(~self.there[self.feed[rows]], kind="stable")
        with_minimum = int(self.there[self.feed[rows]].sum())
        low = [
            self.currents(rows[order[:with_minimum]], MIN_FAR),
            self.currents(rows[order[with_minimum:]], MAX_FAR),
        ]
        back = np.empty(len(rows), np.int64)
        back[order] = np.arange(len(rows))
        return between(joined(low).rows(back), self.currents(rows, MAX_NEAR), part[:, None])


def mode_faults(
    plant: Plant, result: ShortCircuitResult, stations: Stations, time_s: FloatArray
) -> list[ModeFaults]:
    """Return the faults of every mode.

    Parameters
    ----------
    plant : Plant
        What is in use in each mode.
    result : ShortCircuitResult
        Currents of every mode.
    stations : Stations
        Of the plant.
    time_s : ndarray, shape (time,)
        Instants of all currents. [s]

    Returns
    -------
    list of ModeFaults
        In the order of the modes.
    """
    return [
        ModeFaults(mode, stations, result.places, time_s, _unused(plant, plant.mode(mode.mode)))
        for mode in result.modes
    ]


def _unused(plant: Plant, mode: Mode) -> frozenset[str]:
    used = {name for name, demand in mode.demand.items() if demand.in_use > 0.0}
    return frozenset(load.name for load in plant.loads if load.name not in used)
