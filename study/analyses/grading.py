"""Which device clears and which waits, for every fault, in every mode.

The pairs are found from the topology of each mode, not listed by hand: for every piece that a device
protects, the devices in series up to each source. Each is graded on the currents that flow through both for
the same fault, as they decay.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_bands import Openers
from study.analyses.grading_currents import grid_s
from study.analyses.grading_faults import LEVELS, MAX_NEAR, MIN_FAR, ModeFaults, mode_faults
from study.analyses.grading_findings import grading_findings
from study.analyses.grading_margins import RULES
from study.analyses.grading_options import GradingOptions
from study.analyses.grading_pairs import IN_TURN, Follow, ModePairing, ModePairs
from study.analyses.grading_proposals import Search
from study.analyses.grading_reach import ENDS_BY_ITSELF, ModeReach, mode_reach
from study.analyses.grading_rules import Rules, rules_of
from study.analyses.grading_sequence import Follower, Opening, Resolve
from study.analyses.grading_starts import ModeStarts, hardest_of
from study.analyses.grading_stations import Stations, stations_of
from study.analyses.grading_targets import targets_of
from study.analyses.protection_devices import protection_devices
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.balance import BalanceResult
from study.results.grading import (
    GradingPairs,
    GradingPath,
    GradingResult,
    GradingStations,
    Reach,
    RideThrough,
)
from study.results.load_flow import LoadFlowResult
from study.results.short_circuit import Places, ShortCircuitResult

IntArray = NDArray[np.int64]

DEFAULT_OPTIONS = GradingOptions()


@dataclass(frozen=True, slots=True, kw_only=True)
class GradedMode:
    """One mode with one set of devices."""

    faults: ModeFaults
    pairs: ModePairs
    reach: ModeReach
    ride_through: tuple[RideThrough, ...]
    paths: tuple[GradingPath, ...]
    kind: IntArray
    starts: ModeStarts


@dataclass(frozen=True, slots=True, kw_only=True)
class GradingBasis:
    """What every mode needs: stations, what opens them, rules, and what flows before."""

    plant: Plant
    stations: Stations
    openers: Openers
    rules: Rules
    flow: LoadFlowResult
    balance: BalanceResult
    options: GradingOptions
    resolve: Resolve | None


def grading(
    plant: Plant,
    short_circuit: ShortCircuitResult,
    flow: LoadFlowResult,
    balance: BalanceResult,
    options: GradingOptions = DEFAULT_OPTIONS,
    *,
    resolve: Resolve | None = None,
) -> GradingResult:
    """Return the grading of every mode.

    Parameters
    ----------
    plant : Plant
        The plant.
    short_circuit : ShortCircuitResult
        Currents, and their ways.
    flow : LoadFlowResult
        What flows before a start.
    balance : BalanceResult
        The steps of the restart after a blackout.
    options : GradingOptions
        Least margin, longest time.
    resolve : callable, optional
        Solves a mode with some devices open: without it pairs behind parallel paths are judged on the
        currents before any of them opens.

    Returns
    -------
    GradingResult
        Stations in the order of their first device.
    """
    time_s = grid_s(short_circuit, options.last_s)
    stations = stations_of(plant, short_circuit)
    openers = Openers(stations, protection_devices(plant), time_s, 0.5 / short_circuit.f_hz)
    basis = GradingBasis(
        plant=plant,
        stations=stations,
        openers=openers,
        rules=rules_of(plant, stations, openers),
        flow=flow,
        balance=balance,
        options=options,
        resolve=resolve,
    )
    everything = mode_faults(plant, short_circuit, stations, time_s)
    graded = [_graded(basis, faults, k) for k, faults in enumerate(everything)]
    pairs, sides = joined_pairs([g.pairs for g in graded])
    reach, zones = joined_reach(graded)
    late = reach.present & ~(reach.clears_s <= options.clearing_s) & (reach.by != ENDS_BY_ITSELF)
    targets = targets_of(pairs, sides, reach, (zones, late & ~np.isnan(reach.clears_s)))
    changes, not_cured = _proposals(basis, graded).search(targets) if targets else ([], [])
    return GradingResult(
        modes=tuple(m.mode for m in short_circuit.modes),
        levels=(*LEVELS, *IN_TURN),
        rules=RULES,
        stations=_stations(plant, stations, openers, short_circuit.places),
        pairs=pairs,
        reach=reach,
        ride_through=hardest_of([row for g in graded for row in g.ride_through]),
        paths=tuple(path for g in graded for path in g.paths),
        changes=tuple(changes),
        not_cured=tuple(not_cured),
        findings=grading_findings(plant, stations, openers, pairs),
    )


def _graded(basis: GradingBasis, faults: ModeFaults, number: int) -> GradedMode:
    faults.work_out()
    pairing = ModePairing(faults, basis.openers, basis.rules, basis.options.margin_s)
    starts = ModeStarts(basis.plant, faults, basis.flow.modes[number], basis.options)
    done = GradedMode(
        faults=faults,
        pairs=pairing.pairs(_follower(basis, faults, number)),
        reach=mode_reach(faults, basis.openers, pairing.mode_rules),
        ride_through=(
            *starts.motor_starts(basis.openers),
            *starts.inrush(basis.openers),
            *starts.restart(basis.balance.modes[number], basis.openers),
        ),
        paths=_paths(faults, pairing),
        kind=pairing.kind,
        starts=starts,
    )
    faults.forget()
    return done


def _follower(basis: GradingBasis, faults: ModeFaults, number: int) -> Follow | None:
    if basis.resolve is None:
        return None
    follower = Follower(basis.stations, basis.openers, basis.resolve)

    def follow(feeds: Sequence[int], behind: Sequence[int], maximum: bool) -> Opening:
        return follower.follow(number, faults, feeds, behind, maximum=maximum)

    return follow


def _proposals(basis: GradingBasis, graded: Sequence[GradedMode]) -> Search:
    """Return the search for settings, with what must be held by the station that is changed."""
    starts = [g.starts for g in graded]

    def held(openers: Openers, station: int) -> set[tuple[str, str, str]]:
        return {
            (row.mode, row.event, row.equipment)
            for one in starts
            for row in (*one.motor_starts(openers, station), *one.inrush(openers, station))
            if row.trips_s < row.needed_s
        }

    return Search(
        basis.plant,
        stations=basis.stations,
        faults=[g.faults for g in graded],
        kinds=[g.kind for g in graded],
        rules=basis.rules,
        openers=basis.openers,
        held=held,
        options=basis.options,
    )


def joined_pairs(modes: Sequence[ModePairs]) -> tuple[GradingPairs, tuple[bool, ...]]:
    """Return the pairs of all modes as one table, and on which side of the nearest station the fault lies.

    Parameters
    ----------
    modes : sequence of ModePairs
        One for each mode.

    Returns
    -------
    GradingPairs
        Pairs in the order in which modes first have them.
    tuple of bool
        True where the fault lies in the branch of the nearest station.
    """
    number: dict[tuple[int, int, bool], int] = {}
    zone: list[str] = []
    for mode in modes:
        for key, words in zip(mode.key, mode.zone, strict=True):
            if key not in number:
                number[key] = len(zone)
                zone.append(words)
    shape = (len(zone), len(modes))
    present = np.zeros(shape, bool)
    whole: dict[str, NDArray[np.generic]] = {}
    for field in fields(ModePairs):
        if field.name in ("key", "zone", "row"):
            continue
        numbers = field.name in ("kind", "extent", "level", "rule")
        whole[field.name] = np.full(shape, -1, np.int64) if numbers else np.full(shape, np.nan)
    for m, mode in enumerate(modes):
        rows = np.array([number[key] for key in mode.key], np.int64)
        present[rows, m] = True
        for name, table in whole.items():
            table[rows, m] = getattr(mode, name)
    keys = list(number)
    pairs = GradingPairs(
        downstream=read_only([k[0] for k in keys], np.int64),
        upstream=read_only([k[1] for k in keys], np.int64),
        zone=tuple(zone),
        present=read_only(present, np.bool_),
        **{name: read_only(table, table.dtype) for name, table in whole.items()},
    )
    return pairs, tuple(k[2] for k in keys)


def joined_reach(modes: Sequence[GradedMode]) -> tuple[Reach, tuple[bool, ...]]:
    """Return the reach of all modes as one table, and on which side of the station the fault lies.

    Parameters
    ----------
    modes : sequence of GradedMode
        One for each mode.

    Returns
    -------
    Reach
        One row for each station and side.
    tuple of bool
        True where the fault lies in the branch of the station.
    """
    number: dict[tuple[int, bool], int] = {}
    zone: list[str] = []
    for mode in modes:
        for feed in mode.faults.feeds:
            if (feed.station, feed.inward) not in number:
                number[feed.station, feed.inward] = len(zone)
                zone.append(mode.faults.zones.zones[feed.zone].name)
    shape = (len(zone), len(modes))
    present, by = np.zeros(shape, bool), np.full(shape, -1, np.int64)
    least, clears, holds = (np.full(shape, np.nan) for _ in range(3))
    for m, mode in enumerate(modes):
        rows = np.array([number[f.station, f.inward] for f in mode.faults.feeds], np.int64)
        present[rows, m], by[rows, m] = mode.reach.judged, mode.reach.by
        least[rows, m], clears[rows, m] = mode.reach.least_a, mode.reach.clears_s
        holds[rows, m] = mode.reach.holds_s
    found = Reach(
        station=read_only([k[0] for k in number], np.int64),
        zone=tuple(zone),
        present=read_only(present, np.bool_),
        least_a=read_only(least),
        clears_s=read_only(clears),
        by=read_only(by, np.int64),
        holds_s=read_only(holds),
    )
    return found, tuple(k[1] for k in number)


def _stations(plant: Plant, stations: Stations, openers: Openers, places: Places) -> GradingStations:
    at = stations.place.tolist()
    first = [openers.models[o.members[0]] for o in openers.openers]
    bands = [[openers.models[k].band for k in o.members] for o in openers.openers]
    return GradingStations(
        names=stations.names,
        set_at=tuple(model.opened_by for model in first),
        unknown=tuple("; ".join(w for band in some for w in band.unknown) for some in bands),
        devices=tuple(tuple(plant.devices[k].name for k in members) for members in stations.devices),
        equipment=stations.equipment,
        boards=tuple(places.boards[p] for p in at),
        u_nominal_v=read_only(places.u_nominal_v[stations.place]),
    )


def _paths(faults: ModeFaults, pairing: ModePairing) -> tuple[GradingPath, ...]:
    """Return the way from every consumer's station, or that of an empty end, to each source."""
    case = faults.maximum.ways.case
    high, low = (pairing.margins.starts[level].half.ac_a[:, 0] for level in (MAX_NEAR, MIN_FAR))
    found = []
    for n, feed in enumerate(faults.feeds):
        zone = faults.zones.zones[feed.zone]
        if zone.boards or zone.sources or not zone.consumers:
            continue
        row = {s: int(faults.own[n]) + 1 + k for k, (s, _) in enumerate(feed.behind)}
        row[feed.station] = int(faults.own[n])
        for source, way in _ways(faults, n):
            rows = [row[s] for s in way]
            found.append(
                GradingPath(
                    mode=faults.mode.mode,
                    zone=zone.name,
                    source=case.sources.names[source],
                    stations=tuple(way),
                    largest_a=tuple(high[rows].tolist()),
                    least_a=tuple(low[rows].tolist()),
                )
            )
    return tuple(found)


def _ways(faults: ModeFaults, number: int) -> list[tuple[int, tuple[int, ...]]]:
    """Return the shortest way from a feed to every source: (source, stations from the consumer up)."""
    feed = faults.feeds[number]
    zones, side = faults.zones.zones, faults.zones.side
    behind = dict(feed.behind)
    start = side[feed.station][0 if feed.inward else 1]
    ways: dict[int, tuple[int, ...]] = {start: (feed.station,)}
    queue = [start]
    found = []
    while queue:
        here = queue.pop(0)
        found += [(source, ways[here]) for source in zones[here].sources]
        for s, inward in zones[here].stations:
            other = side[s][0 if inward else 1]
            if s in behind and behind[s] == inward and other not in ways:
                ways[other] = (*ways[here], s)
                queue.append(other)
    return found
