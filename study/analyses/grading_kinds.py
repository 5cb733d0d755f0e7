"""What a pair of stations is to each other: in series, one circuit, parallel paths; who waits for whom."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_faults import ModeFaults
from study.analyses.grading_zones import Feed, Zones
from study.results.grading import PairKind

BoolArray = NDArray[np.bool_]


def partners_of(faults: ModeFaults) -> dict[int, tuple[int, ...]]:
    """Return the rows whose station feeds a fault by several paths, with the other feeds of the same zone.

    Parameters
    ----------
    faults : ModeFaults
        Of the mode.

    Returns
    -------
    dict of int to tuple of int
        Row to feeds.
    """
    zones = [feed.zone for feed in faults.feeds]
    paths: dict[tuple[int, int], list[int]] = {}
    for n, one in enumerate(faults.feeds):
        for station, _ in one.behind:
            paths.setdefault((one.zone, station), []).append(n)
    found: dict[int, tuple[int, ...]] = {}
    for row, (feed, station) in enumerate(zip(faults.feed.tolist(), faults.station.tolist(), strict=True)):
        here = paths.get((zones[feed], station), [])
        if len(here) > 1 and feed in here:
            found[row] = tuple(n for n in here if n != feed)
    return found


def pair_kinds(faults: ModeFaults, blind: BoolArray) -> list[PairKind]:
    """Return the kind of each row behind, [row of all rows].

    Parameters
    ----------
    faults : ModeFaults
        Of the mode.
    blind : ndarray of bool, shape (row,)
        Where a station does not see the fault.

    Returns
    -------
    list of str
        For a feed's own row: series.
    """
    zones = faults.zones
    found: list[PairKind] = []
    feeds_of: dict[int, int] = {}
    for feed in faults.feeds:
        feeds_of[feed.zone] = feeds_of.get(feed.zone, 0) + 1
    for n, feed in enumerate(faults.feeds):
        whole = _kind_of_fault(feed, zones, feeds_of[feed.zone])
        if faults.fed_back[n]:
            whole = "fed back by a converter"
        if blind[faults.own[n]]:
            whole = "looks away"
        same = _same_circuit(feed, zones)
        found.append("series")
        found += ["same circuit" if s in same and whole == "series" else whole for s, _ in feed.behind]
    return found


def _kind_of_fault(feed: Feed, zones: Zones, feeds: int) -> PairKind:
    zone = zones.zones[feed.zone]
    if zone.sources and not zone.boards:
        return "fault of a set"
    if zone.passes_on and feeds > 1:
        return "parallel path"
    return "series"


def _same_circuit(feed: Feed, zones: Zones) -> set[int]:
    """Return the stations that open the same circuit as a feed's own: nothing branches off in between."""
    found: set[int] = set()
    station, here = feed.station, zones.side[feed.station][0 if feed.inward else 1]
    while zones.zones[here].passes_on:
        station = next(s for s, _ in zones.zones[here].stations if s != station)
        found.add(station)
        outside, inside = zones.side[station]
        here = inside if here == outside else outside
    return found
