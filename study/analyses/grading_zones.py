"""The plant of one mode cut at its protective devices: zones, and the stations that feed a fault in each."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_stations import NO_END, CaseWays, Stations
from study.network.union_find import UnionFind
from study.results.short_circuit import Places

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

# A part of the fault current below this is nothing: the rounding of the network's solution.
NOTHING = 1e-6


@dataclass(frozen=True, slots=True, kw_only=True)
class Zone:
    """What no protective device parts: the pieces that are lost together with a fault anywhere in it.

    ``places`` are the fault places in it, boards first; ``boards`` their names; ``sources`` the lasting
    sources in it; ``consumers`` the consumers' terminals. ``stations`` bound it, each with True where the
    station's branch lies inside the zone.
    """

    places: tuple[int, ...]
    boards: tuple[str, ...]
    sources: tuple[int, ...]
    consumers: tuple[str, ...]
    branches: tuple[str, ...]
    stations: tuple[tuple[int, bool], ...]

    @property
    def passes_on(self) -> bool:
        """Return True where the zone only joins two stations: opening either loses the same."""
        return len(self.stations) == 2 and not (self.boards or self.sources or self.consumers)

    @property
    def name(self) -> str:
        """The zone in words: its boards, else its source, consumer or branches."""
        return ", ".join(self.boards or self.consumers or self.branches)


@dataclass(frozen=True, slots=True, kw_only=True)
class Feed:
    """A station through which a fault in a zone is fed, and the stations behind it towards the sources.

    ``inward`` is True where the fault lies on the side of the station's branch. ``behind`` are (station,
    inward): the current through each of them flows into its branch or out of it. ``alone`` is True where no
    other station feeds the zone from the same part of the plant.
    """

    station: int
    inward: bool
    zone: int
    behind: tuple[tuple[int, bool], ...]


class Zones:
    """The zones of one mode, in its maximum case: change-over sets run, so that every station counts.

    Parameters
    ----------
    stations : Stations
        Of the plant.
    ways : CaseWays
        Of the maximum case.
    places : Places
        Of the result.
    """

    def __init__(self, stations: Stations, ways: CaseWays, places: Places) -> None:
        self._stations, self._ways, self._places = stations, ways, places
        self.side = self._cut()
        self.zones = self._collect()

    @cached_property
    def _branches(self) -> dict[str, int]:
        names = dict.fromkeys(self._ways.case.ends.branches)
        names |= dict.fromkeys(f"\0{s}" for s in np.flatnonzero(self._virtual))
        return {name: k for k, name in enumerate(names)}

    @cached_property
    def _virtual(self) -> NDArray[np.bool_]:
        """Return the stations on live equipment without a cable."""
        plain = np.array([not b for b in self._stations.branch], bool)
        return np.asarray(plain & self._ways.case.live[self._stations.place])

    def _middle(self, station: int) -> int:
        """Return the vertex on the branch's side of a station."""
        name = self._stations.branch[station] or f"\0{station}"
        return len(self._places.names) + self._branches[name]

    def _cut(self) -> dict[int, tuple[int, int]]:
        """Return the zones on the place's and on the branch's side of each live station."""
        count = len(self._places.names)
        group = UnionFind(count + len(self._branches))
        live = [int(s) for s in np.flatnonzero((self._ways.end != NO_END) | self._virtual)]
        parted = {(int(self._stations.place[s]), self._middle(s)) for s in live}
        ends = self._ways.case.ends
        for place, branch in zip(ends.place.tolist(), ends.branches, strict=True):
            middle = count + self._branches[branch]
            if (place, middle) not in parted:
                group.join(place, middle)
        self._root = group.roots()
        return {s: (self._root[int(self._stations.place[s])], self._root[self._middle(s)]) for s in live}

    def _collect(self) -> dict[int, Zone]:
        root, places, case = self._root, self._places, self._ways.case
        count = len(places.names)
        here: dict[int, list[int]] = {}
        for place in np.flatnonzero(case.live).tolist():
            here.setdefault(root[place], []).append(place)
        branches: dict[int, list[str]] = {}
        for name, k in self._branches.items():
            branches.setdefault(root[count + k], []).append(name)
        bounds: dict[int, list[tuple[int, bool]]] = {}
        for s, (outside, inside) in self.side.items():
            bounds.setdefault(outside, []).append((s, False))
            bounds.setdefault(inside, []).append((s, True))
        sources: dict[int, list[int]] = {}
        for k in np.flatnonzero(self._ways.lasting).tolist():
            sources.setdefault(self._zone_of_source(k), []).append(k)
        return {
            z: Zone(
                places=tuple(here.get(z, ())),
                boards=tuple(places.names[p] for p in here.get(z, ()) if places.kinds[p] == "board"),
                sources=tuple(sources.get(z, ())),
                consumers=self._consumers(here.get(z, []), branches.get(z, [])),
                branches=tuple(b for b in branches.get(z, ()) if not b.startswith("\0")),
                stations=tuple(bounds.get(z, ())),
            )
            for z in sorted(bounds.keys() | here.keys())
        }

    def _consumers(self, places: list[int], branches: list[str]) -> tuple[str, ...]:
        found = [self._places.names[p] for p in places if self._places.kinds[p] == "consumer terminals"]
        alone = [int(b[1:]) for b in branches if b.startswith("\0")]
        return tuple(found + [self._stations.equipment[s] for s in alone if self._ways.own[s] < 0])

    def _zone_of_source(self, source: int) -> int:
        sources, places = self._ways.case.sources, self._places
        for s in np.flatnonzero(self._ways.own == source):
            if int(s) in self.side:
                return self.side[int(s)][1]
        name, board = sources.names[source], sources.boards[source]
        for p, (owner, kind) in enumerate(zip(places.names, places.kinds, strict=True)):
            if owner == name and kind == "source terminals":
                return self._root[p]
        return self._root[places.names.index(board)]

    def of_sources(self) -> frozenset[int]:
        """Return the stations behind which stands a source and no board."""
        return frozenset(
            s
            for s, sides in self.side.items()
            if any(self.zones[z].sources and not self.zones[z].boards for z in sides)
        )

    # ---- what feeds a fault

    def rests_at(self, zone: int) -> tuple[int, int]:
        """Return where a fault in a zone is taken to lie: a place, and the station just behind it or -1."""
        z = self.zones[zone]
        if z.places:
            return z.places[0], -1
        station = z.stations[0][0]
        return int(self._stations.place[station]), station

    @cached_property
    def _leaves(self) -> frozenset[int]:
        """Zones behind one station alone, without a lasting source: consumers' circuits."""
        return frozenset(z for z, x in self.zones.items() if len(x.stations) == 1 and not x.sources)

    @cached_property
    def _flow(self) -> dict[tuple[int, int], float]:
        """Return what lasting sources give through the stations into their branches, by (zone, station)."""
        inner = [z for z in self.zones if z not in self._leaves and self.zones[z].stations]
        through = [s for s, sides in self.side.items() if not (set(sides) & self._leaves)]
        at = [self.rests_at(z) for z in inner]
        if not inner or not through:
            return {}
        station = np.tile(np.array(through, np.int64), len(inner))
        place = np.repeat(np.array([p for p, _ in at], np.int64), len(through))
        inside = np.repeat(np.array([s for _, s in at], np.int64), len(through))
        share = self._ways.into_branch(station, place, inside)
        gives = self._ways.case.parts.subtransient_a * self._ways.lasting
        total = gives.sum(axis=1)
        amps = np.einsum("rs,rs->r", share, gives[place])
        part = np.where(total[place] > 0.0, amps / np.where(total[place] > 0.0, total[place], 1.0), 0.0)
        scale = self._places.u_nominal_v[self._stations.place[station]] / self._places.u_nominal_v[place]
        part = part * scale
        zone = np.repeat(np.array(inner, np.int64), len(through))
        keep = np.abs(part) > NOTHING
        keys = zip(zone[keep].tolist(), station[keep].tolist(), strict=True)
        return dict(zip(keys, part[keep].tolist(), strict=True))

    def feeds(self) -> Iterator[Feed]:
        """Yield every station that feeds a fault in any zone, with what stands behind it."""
        for zone, z in self.zones.items():
            for station, inward in z.stations:
                other = self.side[station][0 if inward else 1]
                fault = other if zone in self._leaves else zone
                if zone in self._leaves and not self._ways.case.live[self._stations.place[station]]:
                    continue
                if zone not in self._leaves and not self._flows_in(zone, station, inward):
                    continue
                yield Feed(
                    station=station,
                    inward=inward,
                    zone=zone,
                    behind=self._behind(fault, zone, other, station),
                )

    def _flows_in(self, fault: int, station: int, inward: bool) -> bool:
        part = self._flow.get((fault, station), 0.0)
        return part > 0.0 if inward else part < 0.0

    def _behind(self, fault: int, zone: int, start: int, station: int) -> tuple[tuple[int, bool], ...]:
        """Return the stations that feed `start` for a fault, and so on to the sources; not through `zone`."""
        found: dict[int, bool] = {}
        seen, stack = {start, zone}, [start]
        while stack:
            here = stack.pop()
            for s, inward in self.zones[here].stations:
                other = self.side[s][0 if inward else 1]
                if s == station or s in found or other == zone:
                    continue
                if not self._flows_in(fault, s, inward):
                    continue
                found[s] = inward
                if other not in seen:
                    seen.add(other)
                    stack.append(other)
        return tuple(found.items())
