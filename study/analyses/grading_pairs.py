"""Pairs of stations over all modes: the governing fault of each, and how far a partial one discriminates."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_bands import Openers
from study.analyses.grading_faults import LEVELS, MAX_FAR, MAX_NEAR, MIN_FAR, ModeFaults
from study.analyses.grading_kinds import pair_kinds, partners_of
from study.analyses.grading_margins import DOWNSTREAM_UNKNOWN, NEITHER, UPSTREAM_UNKNOWN, ModeMargins, Stage
from study.analyses.grading_rules import Rules, mode_rules
from study.analyses.grading_sequence import Opening
from study.results.grading import FULL, NONE, NOT_ASSESSED, NOT_NEEDED, PAIR_KINDS, PARTIAL

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]
PairKey = tuple[int, int, bool]
Follow = Callable[[Sequence[int], Sequence[int], bool], Opening]

IN_TURN: Final = ("largest fault, paths opening in turn", "least fault, paths opening in turn")
IN_TURN_MAXIMUM, IN_TURN_MINIMUM = len(LEVELS), len(LEVELS) + 1

# Sets that run together from which on the faulty one can be told by the current of all the others: the
# breaker of each may have an instantaneous stage above its own contribution; ABS 4-8-2/9.11, from memory.
SETS_TOLD_APART: Final = 3
_BISECTIONS = 10
_PATH: Final = (MIN_FAR, 4, 5, 6, MAX_NEAR)
_SQRT2 = 2.0**0.5


@dataclass(frozen=True, slots=True, kw_only=True)
class ModePairs:
    """The pairs of one mode, arrays [row] over the rows behind; fields as in `GradingPairs`.

    ``key`` [row] is (downstream, upstream, inward).
    """

    key: tuple[PairKey, ...]
    zone: tuple[str, ...]
    row: IntArray
    kind: IntArray
    extent: IntArray
    level: IntArray
    rule: IntArray
    clears_s: FloatArray
    releases_s: FloatArray
    margin_s: FloatArray
    needed_s: FloatArray
    current_a: FloatArray
    upstream_a: FloatArray
    up_to_a: FloatArray
    from_a: FloatArray
    largest_a: FloatArray
    current_ratio: FloatArray


class ModePairing:
    """The pairs of one mode with one set of devices.

    Parameters
    ----------
    faults : ModeFaults
        The faults of the mode, their currents worked out.
    openers : Openers
        What opens each station.
    rules : Rules
        Beside the curves.
    needed_s : float
        The least margin. [s]
    kind : ndarray of int, shape (row,), optional
        Kinds of the rows where the faults are a part of all; else found from the topology.
    """

    def __init__(
        self,
        faults: ModeFaults,
        openers: Openers,
        rules: Rules,
        needed_s: float,
        kind: IntArray | None = None,
    ) -> None:
        self.faults, self.openers = faults, openers
        self.mode_rules = mode_rules(rules, faults, openers)
        if kind is None:
            kinds = pair_kinds(faults, self.mode_rules.blind)
            kind = np.array([PAIR_KINDS.index(k) for k in kinds], np.int64)
        self.kind = kind
        self.margins = ModeMargins(faults, openers, self.mode_rules, needed_s)
        self.rows = self.margins.behind
        self.partners = partners_of(faults)
        self.stages = [self._with_partners(stage) for stage in self.margins.stages()]
        fused = np.isfinite(openers.melts_a2s[faults.station[self.rows]])
        self.needed_s = np.where(fused, 0.0, needed_s)

    def _with_partners(self, stage: Stage) -> Stage:
        """Return a stage in which a station behind several paths has to wait until all have opened."""
        late, margin = stage.late_s[self.faults.feed].copy(), stage.margin_s.copy()
        for row, feeds in self.partners.items():
            times = stage.late_s[[self.faults.feed[row], *feeds]]
            late[row] = np.nan if np.isnan(times[0]) else np.nanmax(times)
            if not np.isposinf(stage.release_s[row]):
                margin[row] = stage.release_s[row] - late[row]
        return replace(stage, margin_s=margin)

    def pairs(self, follow: Follow | None = None) -> ModePairs:
        """Return the pairs of the mode.

        Parameters
        ----------
        follow : callable, optional
            Follows paths that open one after the other, where pairs fail without that.

        Returns
        -------
        ModePairs
            Over the rows behind.
        """
        faults, rows = self.faults, self.rows
        kind = self.kind[rows]
        judged = self._judged(kind) & ~self._neither()
        level, margin, unknown = self._governing()
        feed = faults.feed[rows]
        at = (level, np.arange(len(rows)))
        starts = self.margins.starts
        own_a = np.stack([s.half.ac_a[self.margins.own_row[rows], 0] for s in starts])
        up_a = np.stack([s.half.ac_a[rows, 0] for s in starts])
        fails = margin < self.needed_s
        up_to, low = self._range(np.flatnonzero(fails & judged))
        partial = (np.nan_to_num(up_to) > 0.0) | np.isfinite(low)
        extent = np.select(
            [~judged, fails & partial, fails, unknown], [NOT_NEEDED, PARTIAL, NONE, NOT_ASSESSED], FULL
        )
        zones = [faults.zones.zones[faults.feeds[f].zone].name for f in feed.tolist()]
        found = ModePairs(
            key=tuple(self.keys(rows)),
            zone=tuple(zones),
            row=rows,
            kind=kind,
            extent=extent.astype(np.int64),
            level=level,
            rule=np.stack([s.rule[rows] for s in self.stages])[at],
            clears_s=np.stack([s.late_s[feed] for s in self.stages])[at],
            releases_s=np.stack([s.release_s[rows] for s in self.stages])[at],
            margin_s=margin,
            needed_s=self.needed_s,
            current_a=own_a[at],
            upstream_a=up_a[at],
            up_to_a=up_to,
            from_a=low,
            largest_a=own_a[MAX_NEAR],
            current_ratio=self._current_ratio(),
        )
        return found if follow is None else self._followed(found, follow)

    def _followed(self, pairs: ModePairs, follow: Follow) -> ModePairs:
        """Return the pairs, those that fail behind several paths judged on the paths' opening in turn."""
        place = {row: k for k, row in enumerate(self.rows.tolist())}
        failing = np.isin(pairs.extent, (PARTIAL, NONE))
        groups: dict[tuple[int, ...], list[int]] = {}
        for row, partners in self.partners.items():
            if row in place and failing[place[row]]:
                feeds = tuple(sorted((int(self.faults.feed[row]), *partners)))
                groups.setdefault(feeds, []).append(row)
        arrays = {
            name: getattr(pairs, name).copy()
            for name in ("extent", "level", "clears_s", "releases_s", "margin_s", "up_to_a", "from_a")
        }
        for feeds, rows in groups.items():
            behind = sorted({int(self.faults.station[r]) for r in rows})
            for maximum, level in ((True, IN_TURN_MAXIMUM), (False, IN_TURN_MINIMUM)):
                if not self.faults.zones.zones[self.faults.feeds[feeds[0]].zone].places:
                    continue
                if not maximum and not self.faults.there[list(feeds)].all():
                    continue
                opening = follow(feeds, behind, maximum)
                if not np.isfinite(opening.isolated_s):
                    continue
                for row in rows:
                    k, station = place[row], int(self.faults.station[row])
                    margin = opening.releases_s[station] - opening.isolated_s
                    if maximum or margin < arrays["margin_s"][k]:
                        arrays["level"][k], arrays["margin_s"][k] = level, margin
                        arrays["clears_s"][k] = opening.isolated_s
                        arrays["releases_s"][k] = opening.releases_s[station]
                        arrays["extent"][k] = FULL if margin >= self.needed_s[k] else NONE
                        arrays["up_to_a"][k] = arrays["from_a"][k] = np.nan
        return replace(pairs, **arrays)

    def failing(self) -> dict[PairKey, float]:
        """Return the pairs that fail with their least margin: what a change of a setting is held against."""
        rows = self.rows
        _, margin, _ = self._governing()
        bad = np.flatnonzero(self._judged(self.kind[rows]) & ~self._neither() & (margin < self.needed_s))
        return dict(zip(self.keys(rows[bad]), margin[bad].tolist(), strict=True))

    def keys(self, rows: IntArray) -> list[PairKey]:
        """Return (downstream, upstream, inward) of rows behind."""
        faults = self.faults
        own = faults.station[self.margins.own_row[rows]].tolist()
        inward = [faults.feeds[f].inward for f in faults.feed[rows].tolist()]
        return list(zip(own, faults.station[rows].tolist(), inward, strict=True))

    def _judged(self, kind: IntArray) -> BoolArray:
        """Return the rows that have to discriminate."""
        series = kind == PAIR_KINDS.index("series")
        of_sets = kind == PAIR_KINDS.index("fault of a set")
        feed = self.faults.feed[self.rows]
        quick = np.isfinite(self.mode_rules.quick_s)[feed]
        together = self._sets_together()[feed] >= SETS_TOLD_APART
        directed = np.array([self._directed(k) for k in range(len(self.faults.feeds))], bool)[feed]
        parallel = kind == PAIR_KINDS.index("parallel path")
        return np.asarray(series | (of_sets & (together | quick)) | (parallel & (directed | quick)))

    def _neither(self) -> BoolArray:
        """Return the rows with no fault that either station clears: that is a matter of reach."""
        rule = np.stack([s.rule[self.rows] for s in self.stages])
        there = np.stack([self.faults.exists(k) for k in range(len(LEVELS))])[:, self.faults.feed[self.rows]]
        return np.asarray((~there | (rule == NEITHER)).all(axis=0))

    def _sets_together(self) -> IntArray:
        """Return how many lasting sources run in the island of each feed, [feed]."""
        case = self.faults.maximum.ways.case
        island = case.sources.island[self.faults.maximum.ways.lasting]
        here = case.routes.place_island[self.faults.place[0]]
        return np.asarray((island[None, :] == here[:, None]).sum(axis=1), np.int64)

    def _directed(self, feed: int) -> bool:
        members = self.openers.openers[self.faults.feeds[feed].station].members
        return any(self.openers.models[k].direction or self.openers.models[k].zone for k in members)

    def _governing(self) -> tuple[IntArray, FloatArray, BoolArray]:
        """Return the level with the least margin, that margin, and where a level could not be told."""
        margin = np.stack([s.margin_s[self.rows] for s in self.stages])
        rule = np.stack([s.rule[self.rows] for s in self.stages])
        open_ = np.isin(rule, (UPSTREAM_UNKNOWN, DOWNSTREAM_UNKNOWN)) & np.isnan(margin)
        there = np.stack([self.faults.exists(k) for k in range(len(LEVELS))])[:, self.faults.feed[self.rows]]
        known = np.where(np.isnan(margin), np.inf, margin)
        level = known.argmin(axis=0)
        unknown = (open_ & there).any(axis=0)
        first = (open_ & there).argmax(axis=0)
        least = known[level, np.arange(len(level))]
        show = unknown & ~(least < self.needed_s)
        return np.where(show, first, level), np.where(show, np.nan, least), np.asarray(unknown, bool)

    def _current_ratio(self) -> FloatArray:
        station = self.faults.station[self.rows]
        found = np.full(len(self.rows), np.inf)
        for stage, start in zip(self.stages, self.margins.starts, strict=True):
            half = start.half.rows(self.rows)
            symmetrical = half.ac_a[:, 0]
            peak = symmetrical + half.dc_a[:, 0] / _SQRT2
            with np.errstate(divide="ignore", invalid="ignore"):
                ratio = np.fmin(
                    self.openers.at_once_a[0, station] / peak,
                    self.openers.at_once_a[1, station] / symmetrical,
                )
            found = np.where(np.isnan(stage.margin_s[self.rows]), found, np.fmin(found, ratio))
        return found

    def _range(self, failing: IntArray) -> tuple[FloatArray, FloatArray]:
        """Return up to and from which current partial pairs discriminate, [row]; NaN where nothing bounds it.

        Found by bisection over the level of the fault between the least and the greatest.
        """
        up_to, start = (np.full(len(self.rows), np.nan) for _ in range(2))
        if not len(failing):
            return up_to, start
        good = self._good_on_path(failing)
        rises = ~good[0]  # fails at the least fault: may discriminate from somewhere up
        changed = (good != good[0]).argmax(axis=0)
        never = (good == good[0]).all(axis=0)
        up_to[failing[never & rises]] = 0.0
        some = failing[~never]
        low = (changed[~never] - 1) / (len(_PATH) - 1.0)
        high = changed[~never] / (len(_PATH) - 1.0)
        current = np.full(len(some), np.nan)
        first = good[0][~never]
        for _ in range(_BISECTIONS):
            middle = 0.5 * (low + high)
            margin, amps = self.margins.at_parts(self.rows[some], middle)
            same = ~(margin < self.needed_s[some]) == first
            low, high = np.where(same, middle, low), np.where(same, high, middle)
            current = np.where(same == first, amps, np.where(np.isnan(current), amps, current))
        up_to[some[first]], start[some[~first]] = current[first], current[~first]
        return up_to, start

    def _good_on_path(self, failing: IntArray) -> BoolArray:
        """Return whether failing rows discriminate at the faults from the least to the greatest."""
        rows = self.rows[failing]
        there = self.faults.there[self.faults.feed[rows]]
        path: list[Stage] = [self.stages[level] for level in _PATH]
        margin = np.stack([s.margin_s[rows] for s in path])
        margin[0] = np.where(there, margin[0], self.stages[MAX_FAR].margin_s[rows])
        margin = np.where(np.isnan(margin), margin[-1], margin)
        return np.asarray(~(margin < self.needed_s[failing]))
