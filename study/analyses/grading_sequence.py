"""A fault that is fed by several paths: they open one after the other, and the rest takes over each time."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_bands import Openers
from study.analyses.grading_currents import CaseCurrents, Currents
from study.analyses.grading_faults import ModeFaults
from study.analyses.grading_stations import Stations, case_ways
from study.results.short_circuit import ModeShortCircuit

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

# Returns a mode with the stations of some devices open: its number, the names of the devices.
Resolve = Callable[[int, tuple[str, ...]], ModeShortCircuit]

MOST: Final = 6  # paths into one zone


@dataclass(frozen=True, slots=True, kw_only=True)
class Opening:
    """How a zone is isolated in one case: the stations in the order in which they open, and when.

    ``isolated_s`` is when the last has opened, inf where one never does; ``releases_s`` maps every station
    behind to its earliest release on the currents as they change.
    """

    opened: tuple[int, ...]
    isolated_s: float
    releases_s: dict[int, float]
    start_a: dict[int, float]


class Follower:
    """Follows the opening of several paths.

    Parameters
    ----------
    stations : Stations
        Of the plant.
    openers : Openers
        What opens each station.
    resolve : callable
        Solves a mode with some devices open.
    """

    def __init__(self, stations: Stations, openers: Openers, resolve: Resolve) -> None:
        self.stations, self.openers, self._resolve = stations, openers, resolve
        self._solved: dict[tuple[int, frozenset[str]], ModeShortCircuit] = {}

    def follow(
        self, number: int, faults: ModeFaults, feeds: Sequence[int], behind: Sequence[int], *, maximum: bool
    ) -> Opening:
        """Return how the paths of a zone open, one after the other.

        Each opens at its latest; the currents of the others then are those of the plant without it, as far
        from the start of the fault as the instant is. Delays that run go on.

        Parameters
        ----------
        number : int
            Of the mode.
        faults : ModeFaults
            Of the mode.
        feeds : sequence of int
            Feeds of one zone.
        behind : sequence of int
            Stations behind them.
        maximum : bool
            The maximum case, else the minimum.

        Returns
        -------
        Opening
            Of the fault at the zone's first place.
        """
        zone = faults.zones.zones[faults.feeds[feeds[0]].zone]
        place = zone.places[0]
        paths = [faults.feeds[f].station for f in feeds]
        everyone = np.array([*paths, *behind], np.int64)
        cuts: list[float] = []
        opened: list[int] = []
        modes = [faults.mode]
        history, grid = self._history(modes, cuts, everyone, place, maximum)
        start = dict(zip(everyone.tolist(), history.ac_a[:, 0].tolist(), strict=True))
        while len(opened) < len(paths) and len(opened) < MOST:
            left = np.array([k for k, s in enumerate(paths) if s not in opened], np.int64)
            late, _ = self._on(grid).latest_s(everyone[left], history.rows(left))
            k = int(np.argmin(np.nan_to_num(late, nan=np.inf)))
            if not np.isfinite(late[k]):
                break
            cuts.append(max(float(late[k]), cuts[-1] if cuts else 0.0))
            opened.append(int(everyone[left[k]]))
            if len(opened) < len(paths):
                modes.append(self._without(number, opened))
                history, grid = self._history(modes, cuts, everyone, place, maximum)
        whole = len(opened) == len(paths)
        rows = np.arange(len(paths), len(everyone))
        return Opening(
            opened=tuple(opened),
            isolated_s=cuts[-1] if whole else np.inf,
            releases_s=self._releases(grid, everyone[rows], history.rows(rows)),
            start_a=start,
        )

    def _on(self, grid: FloatArray) -> Openers:
        return self.openers.on_grid(grid)

    def _releases(self, grid: FloatArray, station: IntArray, currents: Currents) -> dict[int, float]:
        openers = self._on(grid)
        held = np.zeros(len(station), bool)
        release = openers.delayed_release_s(station, currents, held)
        at_once = openers.threatened(station, openers.half(currents), np.full(len(station), np.inf))
        return dict(zip(station.tolist(), np.where(at_once, 0.0, release).tolist(), strict=True))

    def _without(self, number: int, opened: Sequence[int]) -> ModeShortCircuit:
        names = frozenset(
            self.openers.models[k].name for s in opened for k in self.openers.openers[s].members
        )
        if (number, names) not in self._solved:
            self._solved[number, names] = self._resolve(number, tuple(sorted(names)))
        return self._solved[number, names]

    def _history(
        self,
        modes: Sequence[ModeShortCircuit],
        cuts: Sequence[float],
        station: IntArray,
        place: int,
        maximum: bool,
    ) -> tuple[Currents, FloatArray]:
        """Return the currents through stations while the paths open, and their instants."""
        grid = self.openers.time_s
        pieces, times = [], []
        bounds = [0.0, *cuts[: len(modes) - 1], float(grid[-1])]
        for n, mode in enumerate(modes):
            inner = grid[(grid > bounds[n]) & (grid < bounds[n + 1])]
            part = np.concatenate([[bounds[n]], inner, [bounds[n + 1]]])
            currents = CaseCurrents(case_ways(self.stations, mode, maximum=maximum), part)
            where = np.full(len(station), place, np.int64)
            pieces.append(currents.through(station, where, np.full(len(station), -1, np.int64)))
            times.append(part)
        return (
            Currents(
                ac_a=np.concatenate([p.ac_a for p in pieces], axis=1),
                dc_a=np.concatenate([p.dc_a for p in pieces], axis=1),
            ),
            np.concatenate(times),
        )
