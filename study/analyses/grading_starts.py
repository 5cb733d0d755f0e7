"""Motor starts, transformer inrush and the restart after a blackout: what must not open a station."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_bands import Openers
from study.analyses.grading_currents import Currents
from study.analyses.grading_faults import ModeFaults
from study.analyses.grading_options import GradingOptions
from study.analyses.grading_surges import Surge, load_current_a, surges_of
from study.model.loads import Load
from study.model.plant import Plant
from study.results.balance import ModeBalance, RestartStep
from study.results.grading import RideThrough
from study.results.load_flow import ModeLoadFlow

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

ON_TOP: Final = " on top of the load"
# Time constants after which an inrush is gone.
DIES_AWAY: Final = 5.0
# A load that carries less of another's start than this is not looked at.
_LEAST_SHARE = 0.02
_SQRT2 = 2.0**0.5


class ModeStarts:
    """What the stations of one mode must hold.

    Parameters
    ----------
    plant : Plant
        Loads and transformers.
    faults : ModeFaults
        Of the mode: how currents find their way.
    flow : ModeLoadFlow
        What flows before.
    options : GradingOptions
        Starting time, factor.
    """

    def __init__(self, plant: Plant, faults: ModeFaults, flow: ModeLoadFlow, options: GradingOptions) -> None:
        self.plant, self.faults, self.options = plant, faults, options
        self.mode = plant.mode(faults.mode.mode)
        self.before = _before_a(faults, flow)
        self._shares: dict[int, FloatArray] = {}
        self._mine = {
            (f.station, name)
            for f in faults.feeds
            for name in faults.zones.zones[f.zone].consumers
            if not faults.zones.zones[f.zone].boards
        }
        self._of_consumers = np.zeros(len(faults.stations), bool)
        for f in faults.feeds:
            if faults.zones.zones[f.zone].consumers and not faults.zones.zones[f.zone].boards:
                self._of_consumers[f.station] = True
        self._at = {
            (name, kind == "board"): p
            for p, (name, kind) in enumerate(zip(faults.places.names, faults.places.kinds, strict=True))
            if kind in ("board", "consumer terminals")
        }

    def _place(self, load: Load) -> int:
        place = self._at.get((load.name, False), -1)
        return place if place >= 0 else self._at.get((load.board, True), -1)

    def shares(self, place: IntArray) -> FloatArray:
        """Return the current through every station for 1 A drawn at places, [place, station].

        Lasting sources take it by what they would give into a fault there. A consumer's own station is left
        out: it carries all of its own consumer's current and nothing else.
        """
        missing = np.array(sorted(set(place.tolist()) - self._shares.keys()), np.int64)
        if len(missing):
            self._work_out(missing)
        return np.array([self._shares[p] for p in place.tolist()]).reshape(len(place), -1)

    def _work_out(self, place: IntArray) -> None:
        ways = self.faults.minimum.ways
        trunk = np.flatnonzero(~self._of_consumers)
        station = np.tile(trunk, len(place))
        where = np.repeat(place, len(trunk))
        share = ways.into_branch(station, where, np.full(len(where), -1, np.int64))
        gives = ways.case.parts.subtransient_a[place] * ways.lasting
        total = gives.sum(axis=1, keepdims=True)
        weight = np.divide(gives, total, out=np.zeros_like(gives), where=total > 0.0)
        found = np.zeros((len(place), len(self.faults.stations)))
        shape = (len(place), len(trunk), weight.shape[1])
        found[:, trunk] = np.abs(np.einsum("pns,ps->pn", share.reshape(shape), weight))
        self._shares |= dict(zip(place.tolist(), found, strict=True))

    def surges(self) -> list[Surge]:
        """Return the starts of the motors that are in use in the mode."""
        return [
            surge
            for k, load in enumerate(self.plant.loads)
            if (demand := self.mode.demand.get(load.name)) is not None and demand.in_use > 0.0
            for surge in surges_of(k, load, self.options)
        ]

    def motor_starts(self, openers: Openers, only: int | None = None) -> list[RideThrough]:
        """Return every motor start against the motor's own station, and the hardest against those behind.

        Parameters
        ----------
        openers : Openers
            What opens each station.
        only : int, optional
            One station alone.

        Returns
        -------
        list of RideThrough
            Of this mode.
        """
        found = self.surges()
        places = np.array([self._place(self.plant.loads[s.load]) for s in found], np.int64)
        here = np.flatnonzero(places >= 0)
        if not len(here):
            return []
        share = self.shares(places[here])
        stations = {name: s for s, name in self._mine}
        for k, r in enumerate(here.tolist()):
            own_station = stations.get(self.plant.loads[found[r].load].name, -1)
            if own_station >= 0:
                share[k, own_station] = 1.0
        row, station = np.nonzero(share > _LEAST_SHARE)
        if only is not None:
            row, station = row[station == only], station[station == only]
            if not len(row):
                return []
        surge = [found[here[r]] for r in row]
        part = share[row, station]
        before = np.maximum(self.before[station] - part * np.array([s.normal_a for s in surge]), 0.0)
        own = self._own(station, [self.plant.loads[s.load].name for s in surge])
        before = np.where(own, 0.0, before)
        current = before + part * np.array([s.current_a for s in surge])
        peak = before + part * np.array([s.peak_a for s in surge])
        trips = _trips_s(openers, station, current, peak)
        needed = self.options.start_factor * np.array([s.lasts_s for s in surge])
        keep = np.concatenate([np.flatnonzero(own), _hardest(station, own, trips / needed)])
        return [
            RideThrough(
                mode=self.mode.name,
                station=int(station[k]),
                event=surge[k].event if own[k] else surge[k].event + ON_TOP,
                equipment=self.plant.loads[surge[k].load].name,
                current_a=float(current[k]),
                before_a=float(before[k]),
                lasts_s=surge[k].lasts_s,
                needed_s=float(needed[k]),
                trips_s=float(trips[k]),
                assumed=surge[k].assumed,
            )
            for k in keep.tolist()
        ]

    def _own(self, station: IntArray, loads: Sequence[str]) -> NDArray[np.bool_]:
        """Return where a station is the load's own: it feeds that consumer's zone."""
        return np.array([(int(s), n) in self._mine for s, n in zip(station, loads, strict=True)], bool)

    def inrush(self, openers: Openers, only: int | None = None) -> list[RideThrough]:
        """Return the inrush of every transformer against the stations through which it comes.

        The first peak is the given multiple of that of the rated current; it falls with the given time
        constant. A stage that does not look at the peak sees the r.m.s. value of half waves, half their peak.

        Source: definition of the multiple; r.m.s. value of a half-wave sine.

        Parameters
        ----------
        openers : Openers
            What opens each station.
        only : int, optional
            One station alone.

        Returns
        -------
        list of RideThrough
            Of this mode.
        """
        found = []
        for feed in self.faults.feeds:
            zone = self.faults.zones.zones[feed.zone]
            if only is not None and only not in (feed.station, *(s for s, _ in feed.behind)):
                continue
            for t in (x for x in self.plant.transformers if x.name in zone.branches):
                rated = 1000.0 * t.s_rated_kva * t.units / (3.0**0.5 * t.u_primary_v)
                near = self.faults.places.names[int(self.faults.stations.place[feed.station])]
                if near != t.from_board:
                    continue
                place = int(self.faults.stations.place[feed.station])
                share = self.shares(np.array([place], np.int64))[0]
                share[feed.station] = 1.0
                stations = [feed.station, *(s for s, _ in feed.behind if share[s] > _LEAST_SHARE)]
                found += self._inrush_at(openers, t.name, (t.inrush_current * rated, t.inrush_decay_s),
                                         np.array(stations, np.int64), share)  # fmt: skip
        return found

    def _inrush_at(
        self,
        openers: Openers,
        name: str,
        surge: tuple[float, float],
        station: IntArray,
        share: FloatArray,
    ) -> list[RideThrough]:
        peak_a, decay_s = surge
        fall = np.exp(-openers.time_s / decay_s)[None, :]
        part = share[station]
        before = np.where(np.arange(len(station)) == 0, 0.0, self.before[station])
        ac = before[:, None] + (part * peak_a / _SQRT2)[:, None] * fall
        dc = _SQRT2 * (part * peak_a * (1.0 - 1.0 / _SQRT2))[:, None] * fall
        currents = Currents(ac_a=ac, dc_a=dc)
        free = np.zeros(len(station), bool)
        release = openers.delayed_release_s(station, currents, free)
        first = Currents(ac_a=ac[:, :1], dc_a=dc[:, :1])
        at_once = openers.threatened(station, first, np.full(len(station), np.inf))
        release = np.where(at_once, 0.0, release)
        release = np.where(openers.early_known[station] | at_once, release, np.nan)
        lasts = DIES_AWAY * decay_s
        return [
            RideThrough(
                mode=self.mode.name,
                station=int(s),
                event="inrush",
                equipment=name,
                current_a=float(before[k] + part[k] * peak_a),
                before_a=float(before[k]),
                lasts_s=lasts,
                needed_s=lasts,
                trips_s=float(release[k]),
                assumed="",
            )
            for k, s in enumerate(station.tolist())
        ]

    def restart(self, balance: ModeBalance, openers: Openers) -> list[RideThrough]:
        """Return the hardest step of the restart after a blackout against every station.

        All motors of a step start together, on top of what the steps before have connected.
        """
        number = {load.name: k for k, load in enumerate(self.plant.loads)}
        running: dict[int, FloatArray] = {}
        found: list[tuple[int, RestartStep, float, float, float]] = []
        for step in sorted(balance.restart, key=lambda x: (x.island, x.at_s)):
            loads = [self.plant.loads[number[name]] for name in step.loads if name in number]
            normal, surge, lasts = self._together([x for x in loads if self._place(x) >= 0])
            before = running.get(step.island, np.zeros(len(surge)))
            found += [
                (s, step, float(before[s] + surge[s]), float(before[s]), lasts)
                for s in np.flatnonzero(surge > 0.0).tolist()
            ]
            running[step.island] = before + normal
        station = np.array([x[0] for x in found], np.int64)
        current = np.array([x[2] for x in found], float)
        trips = _trips_s(openers, station, current, current) if found else current
        worst: dict[int, int] = {}
        for k, (s, *_) in enumerate(found):
            if s not in worst or trips[k] < trips[worst[s]]:
                worst[s] = k
        return [
            RideThrough(
                mode=self.mode.name,
                station=s,
                event=f"restart after a blackout, step {found[k][1].step}",
                equipment=", ".join(found[k][1].loads),
                current_a=found[k][2],
                before_a=found[k][3],
                lasts_s=found[k][4],
                needed_s=self.options.start_factor * found[k][4],
                trips_s=float(trips[k]),
                assumed="",
            )
            for s, k in worst.items()
        ]

    def _together(self, loads: Sequence[Load]) -> tuple[FloatArray, FloatArray, float]:
        """Return what loads draw through every station in service and at their start, and how long."""
        none = np.zeros(len(self.faults.stations))
        if not loads:
            return none, none, 0.0
        share = self.shares(np.array([self._place(x) for x in loads], np.int64))
        units = np.array([self.mode.demand[x.name].in_use for x in loads])
        normal = units * np.array([load_current_a(x) for x in loads])
        surges = [max(surges_of(0, x, self.options), key=_heat, default=None) for x in loads]
        start = [u * s.current_a if s else n for u, s, n in zip(units, surges, normal, strict=True)]
        return normal @ share, np.array(start) @ share, max((s.lasts_s for s in surges if s), default=0.0)


def _heat(surge: Surge) -> float:
    return surge.current_a**2 * surge.lasts_s


def _trips_s(openers: Openers, station: IntArray, current_a: FloatArray, peak_a: FloatArray) -> FloatArray:
    """Return when stations may open at the earliest on a constant current with a first peak."""
    free = np.zeros(len(station), bool)
    release = openers.release_bound_s(station, current_a, free)
    first = Currents(ac_a=current_a[:, None], dc_a=_SQRT2 * (peak_a - current_a)[:, None])
    at_once = openers.threatened(station, first, np.full(len(station), np.inf))
    release = np.where(at_once, 0.0, release)
    return np.where(openers.early_known[station] | at_once, release, np.nan)


def _hardest(station: IntArray, own: NDArray[np.bool_], ratio: FloatArray) -> IntArray:
    """Return the row with the least ratio for each station that is not the load's own."""
    rows = np.flatnonzero(~own)
    order = rows[np.argsort(np.nan_to_num(ratio[rows], nan=np.inf), kind="stable")]
    _, first = np.unique(station[order], return_index=True)
    return np.asarray(order[first], np.int64)


def _before_a(faults: ModeFaults, flow: ModeLoadFlow) -> FloatArray:
    """Return what each station carries before: of its branch, else of its own source; in A."""
    branch = dict(zip(flow.branches.names, flow.branches.current_a.tolist(), strict=True))
    source = dict(zip(flow.sources.names, flow.sources.current_a.tolist(), strict=True))
    stations = faults.stations
    found = [
        branch.get(b, 0.0) if b else source.get(e, 0.0)
        for b, e in zip(stations.branch, stations.equipment, strict=True)
    ]
    return np.asarray(np.nan_to_num(np.array(found, float)))


def hardest_of(rows: Sequence[RideThrough]) -> tuple[RideThrough, ...]:
    """Return the worst mode of each event, equipment and station; for restarts of each station.

    Parameters
    ----------
    rows : sequence of RideThrough
        Of all modes.

    Returns
    -------
    tuple of RideThrough
        In the order in which they came first.
    """
    worst: dict[tuple[str, str, int], RideThrough] = {}
    for row in rows:
        shared = row.event.startswith("restart") or row.event.endswith(ON_TOP)
        event = ("restart" if row.event.startswith("restart") else ON_TOP) if shared else row.event
        key = (event, "" if shared else row.equipment, row.station)
        known = worst.get(key)
        if known is None or _ratio(row) < _ratio(known):
            worst[key] = row
    return tuple(worst.values())


def _ratio(row: RideThrough) -> float:
    if np.isnan(row.trips_s):
        return np.inf
    return row.trips_s / max(row.needed_s, 1e-9)
