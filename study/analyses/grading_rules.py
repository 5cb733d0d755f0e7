"""What rules grading beside the curves: makers' tables, signals, direction, zones, differential functions."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_bands import Openers
from study.analyses.grading_faults import ModeFaults
from study.analyses.grading_stations import Stations
from study.analyses.grading_zones import Zone
from study.model.plant import Plant

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

_DIRECTION = {"forward": True, "reverse": False}
_SEPARATORS = re.compile(r"\s*[,;+/]\s*|\s+and\s+")


@dataclass(frozen=True, slots=True, kw_only=True)
class Differential:
    """A differential function: what it watches, the stations it opens (empty: all around) and its delay."""

    equipment: str
    stations: frozenset[int]
    delay_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Rules:
    """Rules of the whole plant, by station.

    ``maker_a`` maps (upstream, downstream) to the prospective current up to which the downstream one opens
    alone; ``signals`` holds both orders of stations that hold each other. ``looks`` is True for forward,
    False for reverse; a station that looks both ways is not in it. ``zone`` is the zone that a station
    protects alone.
    """

    maker_a: dict[tuple[int, int], float]
    signals: frozenset[tuple[int, int]]
    looks: dict[int, bool]
    zone: dict[int, str]
    differential: tuple[Differential, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class ModeRules:
    """The rules for the faults of one mode.

    [row]: ``blind`` where the station does not see the fault, ``held`` where a signal from downstream holds
    its short-time stage, ``maker_a`` (NaN: no table). [feed]: ``quick_s``, when a differential function has
    cleared the fault (inf: none).
    """

    blind: BoolArray
    held: BoolArray
    maker_a: FloatArray
    quick_s: FloatArray


def rules_of(plant: Plant, stations: Stations, openers: Openers) -> Rules:
    """Return the rules of a plant.

    Parameters
    ----------
    plant : Plant
        Makers' tables and functions.
    stations : Stations
        Of the plant.
    openers : Openers
        Direction, zone and signals of the devices.

    Returns
    -------
    Rules
        By station.
    """
    at = {plant.devices[k].name: s for s, members in enumerate(stations.devices) for k in members}
    maker: dict[tuple[int, int], float] = {}
    for row in plant.maker_discrimination:
        if row.upstream in at and row.downstream in at:
            maker[at[row.upstream], at[row.downstream]] = 1000.0 * row.up_to_ka
    signals: set[tuple[int, int]] = set()
    looks: dict[int, bool] = {}
    zone: dict[int, str] = {}
    for s, opener in enumerate(openers.openers):
        for model in (openers.models[k] for k in opener.members):
            other = at.get(model.interlocked_with)
            if other is not None:
                signals |= {(s, other), (other, s)}
            if model.direction:
                looks[s] = _DIRECTION[model.direction]
            if model.zone:
                zone[s] = model.zone
    return Rules(
        maker_a=maker,
        signals=frozenset(signals),
        looks=looks,
        zone=zone,
        differential=tuple(
            Differential(
                equipment=f.equipment,
                stations=frozenset(at[n] for n in _SEPARATORS.split(f.trips or "") if n in at),
                delay_s=f.delay_s,
            )
            for f in plant.protection_functions
            if f.kind == "differential"
        ),
    )


def mode_rules(rules: Rules, faults: ModeFaults, openers: Openers) -> ModeRules:
    """Return the rules for the faults of one mode.

    Parameters
    ----------
    rules : Rules
        Of the plant.
    faults : ModeFaults
        Of the mode.
    openers : Openers
        Breaking times.

    Returns
    -------
    ModeRules
        By row and feed.
    """
    own = faults.station[faults.own][faults.feed]
    zones = [faults.zones.zones[f.zone] for f in faults.feeds]
    sources = faults.mode.maximum.sources.names
    named = [_names(zone, sources) for zone in zones]
    blind = [
        rules.looks.get(s, inward) != inward or (s in rules.zone and rules.zone[s].casefold() not in named[f])
        for s, inward, f in zip(
            faults.station.tolist(), faults.inward.tolist(), faults.feed.tolist(), strict=True
        )
    ]
    pairs = list(zip(faults.station.tolist(), own.tolist(), strict=True))
    return ModeRules(
        blind=np.array(blind, bool),
        held=np.array([pair in rules.signals for pair in pairs], bool),
        maker_a=np.array([rules.maker_a.get(pair, np.nan) for pair in pairs], float),
        quick_s=np.array(
            [
                _quick_s(rules, openers, f.station, zone, names)
                for f, zone, names in zip(faults.feeds, zones, named, strict=True)
            ],
            float,
        ),
    )


def _names(zone: Zone, sources: tuple[str, ...]) -> frozenset[str]:
    """Return the names by which a zone is known."""
    own = (*zone.boards, *zone.branches, *zone.consumers, *(sources[k] for k in zone.sources))
    return frozenset(name.casefold() for name in own)


def _quick_s(rules: Rules, openers: Openers, station: int, zone: Zone, names: frozenset[str]) -> float:
    """Return when a differential function has opened a station for a fault in a zone; inf for none.

    One that watches a branch or source does not see a fault on the board that is in the same zone.
    """
    found = np.inf
    breaks = max(
        (openers.models[k].device.breaking_time_max_s for k in openers.openers[station].members), default=0.0
    )
    boards = {board.casefold() for board in zone.boards}
    for function in rules.differential:
        watched = function.equipment.casefold()
        sees = watched in (boards or names)
        opens = not function.stations or station in function.stations
        if sees and opens:
            found = min(found, function.delay_s + breaks)
    return float(found)
