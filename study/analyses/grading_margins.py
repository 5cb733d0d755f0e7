"""The time between clearing by the nearest station and release of those behind it, fault by fault."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_bands import Openers
from study.analyses.grading_currents import Currents, between, joined
from study.analyses.grading_faults import (
    BETWEEN,
    LEVELS,
    MAX_FAR,
    MAX_NEAR,
    MIN_FAR,
    MIN_NEAR,
    TWO_PHASE_NEAR,
    ModeFaults,
)
from study.analyses.grading_rules import ModeRules

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

RULES: Final = (
    "curves",
    "not seen by the upstream device",
    "maker's table",
    "let-through of the maker's sheet",
    "I²t of the fuses",
    "signal from downstream",
    "instantaneous stage upstream",
    "upstream device not known",
    "downstream device not known",
    "neither opens",
)
(
    CURVES,
    NOT_SEEN,
    MAKER,
    LET_THROUGH,
    FUSES,
    SIGNAL,
    AT_ONCE,
    UPSTREAM_UNKNOWN,
    DOWNSTREAM_UNKNOWN,
    NEITHER,
) = range(10)

# A device that has cleared by then limits the current, if its maker gives a sheet: as the fault ratings.
LIMITS_WITHIN_S: Final = 0.1
# Margins this far above what is needed are not worked out to the end: they stay bounds from below.
AMPLE_S: Final = 0.05
NO_EDGE, BY_DIFFERENTIAL = -1, -2
_SQRT2 = 2.0**0.5


@dataclass(frozen=True, slots=True, kw_only=True)
class Stage:
    """What happens at one level of fault, [feed] and [row].

    ``late_s`` [feed] is when the nearest station has cleared at the latest, ``edge`` by which of its latest
    edges (`NO_EDGE`, `BY_DIFFERENTIAL`). [row]: ``release_s`` the earliest release of the stations behind,
    ``margin_s`` between both, ``rule`` what decided; NaN where the level is no fault of the feed. A margin is
    -inf where only a station behind clears, and inf where that never does.
    """

    late_s: FloatArray
    edge: IntArray
    release_s: FloatArray
    margin_s: FloatArray
    rule: IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Start:
    """Currents of rows at one level as instantaneous stages see them: at half a cycle, and largest."""

    half: Currents
    largest_a: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Nearest:
    """The nearest station of each row: when it has cleared, and its current at half a cycle."""

    late_s: FloatArray
    start_a: FloatArray


def _spread(rows: IntArray, values: FloatArray, count: int) -> FloatArray:
    """Return values at their rows, NaN elsewhere."""
    found = np.full(count, np.nan)
    found[rows] = values
    return found


class ModeMargins:
    """Margins of one mode.

    Parameters
    ----------
    faults : ModeFaults
        The faults, their currents worked out.
    openers : Openers
        What opens each station.
    rules : ModeRules
        Beside the curves.
    needed_s : float
        Margins above this and a little are not worked out to the end. [s]
    """

    def __init__(self, faults: ModeFaults, openers: Openers, rules: ModeRules, needed_s: float) -> None:
        self.faults, self.openers, self.rules = faults, openers, rules
        self.needed_s = needed_s
        self.own_row = faults.own[faults.feed]
        self.behind = np.flatnonzero(np.arange(len(faults.feed)) != self.own_row)
        self._corners = {level: self._start(level) for level in (MAX_NEAR, MAX_FAR, MIN_NEAR, MIN_FAR)}
        self.starts = [self.start(level) for level in range(len(LEVELS))]
        self._bounds = self.openers.release_bound_s(
            faults.station[self.behind],
            np.stack([x.largest_a[self.behind] for x in self.starts], axis=1),
            rules.held[self.behind],
        )

    def _start(self, level: int) -> Start:
        currents = self.faults.currents(np.arange(len(self.faults.feed)), level)
        return Start(half=self.openers.half(currents), largest_a=self.openers.largest_a(currents))

    def start(self, level: int) -> Start:
        """Return the currents of every row at one level as instantaneous stages see them."""
        if level in self._corners:
            return self._corners[level]
        if level >= TWO_PHASE_NEAR:
            return self._start(level)
        high, low = self._corners[MAX_NEAR], self._low()
        x = np.array(BETWEEN[level])
        peak = between(
            Currents(ac_a=low.largest_a[:, None], dc_a=low.largest_a[:, None]),
            Currents(ac_a=high.largest_a[:, None], dc_a=high.largest_a[:, None]),
            x,
        )
        return Start(half=between(low.half, high.half, x), largest_a=peak.ac_a[:, 0])

    def _low(self) -> Start:
        there = self.faults.there[self.faults.feed]
        a, b = self._corners[MIN_FAR], self._corners[MAX_FAR]
        wide = there[:, None]
        return Start(
            half=Currents(
                ac_a=np.where(wide, a.half.ac_a, b.half.ac_a), dc_a=np.where(wide, a.half.dc_a, b.half.dc_a)
            ),
            largest_a=np.where(there, a.largest_a, b.largest_a),
        )

    def stages(self) -> list[Stage]:
        """Return what happens at every level; all of them are worked out at once.

        Returns
        -------
        list of Stage
            In the order of the levels; NaN where a level is no fault of a feed.
        """
        faults = self.faults
        there = [faults.exists(level) for level in range(len(LEVELS))]
        feeds = [np.flatnonzero(x) for x in there]
        currents = joined([faults.currents(faults.own[f], level) for level, f in enumerate(feeds)])
        late, edge = self._late_s(np.concatenate(feeds), currents)
        bounds = np.cumsum([len(f) for f in feeds])[:-1]
        times = [_spread(f, x, len(faults.feeds)) for f, x in zip(feeds, np.split(late, bounds), strict=True)]
        behind = [np.flatnonzero(x[faults.feed[self.behind]]) for x in there]
        level = np.repeat(np.arange(len(LEVELS)), [len(x) for x in behind])
        of_behind = np.concatenate(behind)
        rows = self.behind[of_behind]
        starts = [Start(half=s.half.rows(self.behind[x]), largest_a=s.largest_a[self.behind[x]])
                  for s, x in zip(self.starts, behind, strict=True)]  # fmt: skip
        own = [s.half.ac_a[self.own_row[self.behind[x]], 0] for s, x in zip(self.starts, behind, strict=True)]
        release, margin, rule = self._judged(
            rows,
            Nearest(late_s=np.stack(times)[level, faults.feed[rows]], start_a=np.concatenate(own)),
            Start(
                half=joined([s.half for s in starts]), largest_a=np.concatenate([s.largest_a for s in starts])
            ),
            self._bounds[of_behind, level],
            lambda some: self._at_levels(rows[some], level[some]),
        )
        edges = np.split(edge, bounds)
        found = []
        for k in range(len(LEVELS)):
            mine, count = level == k, len(faults.feed)
            which = np.full(len(faults.feeds), NO_EDGE, np.int64)
            which[feeds[k]] = edges[k]
            whole_rule = np.full(count, CURVES, np.int64)
            whole_rule[rows[mine]] = rule[mine]
            found.append(
                Stage(
                    late_s=times[k],
                    edge=which,
                    release_s=_spread(rows[mine], release[mine], count),
                    margin_s=_spread(rows[mine], margin[mine], count),
                    rule=whole_rule,
                )
            )
        return found

    def _at_levels(self, rows: IntArray, level: IntArray) -> Currents:
        """Return the currents of rows, each at its own level; levels ascend."""
        return joined([self.faults.currents(rows[level == k], k) for k in range(len(LEVELS))])

    def at_parts(self, rows: IntArray, part: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the margins of some rows for faults between the least (0) and the greatest (1).

        Parameters
        ----------
        rows : ndarray of int, shape (row,)
            Stations behind.
        part : ndarray, shape (row,)
            0..1

        Returns
        -------
        margin, current : ndarray, shape (row,)
            And the current through the nearest station at the start. [s], [A]
        """
        own = self.faults.at_part(self.own_row[rows], part)
        through = self.faults.at_part(rows, part)
        late, _ = self._late_s(self.faults.feed[rows], own)
        near = Nearest(late_s=late, start_a=self.openers.half(own).ac_a[:, 0])
        start = Start(half=self.openers.half(through), largest_a=self.openers.largest_a(through))
        station, held = self.faults.station[rows], self.rules.held[rows]
        bound = self.openers.release_bound_s(station, start.largest_a, held)
        _, margin, _ = self._judged(rows, near, start, bound, through.rows)
        return margin, own.ac_a[:, 0]

    def _late_s(self, feeds: IntArray, currents: Currents) -> tuple[FloatArray, IntArray]:
        """Return when the stations of feeds have cleared, and by which edge."""
        own = self.faults.own[feeds]
        time, which = self.openers.latest_s(self.faults.station[own], currents)
        time = np.where(self.rules.blind[own], np.inf, time)
        quick = self.rules.quick_s[feeds]
        first = np.isfinite(quick) & ~(time <= quick)
        return np.where(first, quick, time), np.where(first, BY_DIFFERENTIAL, which)

    def limits(self, feed: IntArray, near: Nearest) -> tuple[FloatArray, FloatArray]:
        """Return what the nearest station lets through: peak over sqrt2 and I²t; inf where nothing limits.

        Parameters
        ----------
        feed : ndarray of int, shape (row,)
            Feed of each row.
        near : Nearest
            When its station has cleared, and its current.

        Returns
        -------
        tuple of ndarray
            [A], [A²s]
        """
        station = self.faults.station[self.faults.own[feed]]
        peak, heat = np.full(len(feed), np.inf), np.full(len(feed), np.inf)
        fast = near.late_s <= LIMITS_WITHIN_S
        sheets: dict[int, list[int]] = {}
        for row in np.flatnonzero(fast).tolist():
            sheets.setdefault(id(self.openers.openers[station[row]].sheet), []).append(row)
        for rows in sheets.values():
            sheet = self.openers.openers[station[rows[0]]].sheet
            if sheet is not None:
                peak[rows] = np.nan_to_num(sheet.cut_off_at_a(near.start_a[rows]) / _SQRT2, nan=np.inf)
                heat[rows] = np.nan_to_num(sheet.heat_at_a2s(near.start_a[rows]), nan=np.inf)
        return peak, np.where(fast, np.minimum(heat, self.openers.cleared_a2s[station]), np.inf)

    def _judged(
        self,
        rows: IntArray,
        near: Nearest,
        start: Start,
        bound_s: FloatArray,
        currents: Callable[[IntArray], Currents],
    ) -> tuple[FloatArray, FloatArray, IntArray]:
        """Return release, margin and rule of stations behind; bounds from below where they are ample."""
        openers, rules = self.openers, self.rules
        station, held = self.faults.station[rows], rules.held[rows]
        ratio = np.zeros(len(rows))
        np.divide(start.half.ac_a[:, 0], near.start_a, out=ratio, where=near.start_a > 0.0)
        peak, heat = self.limits(self.faults.feed[rows], near)
        reach = np.where(ratio > 0.0, ratio, 1.0)
        peak, heat = peak * reach, heat * reach**2
        bare = openers.threatened(station, start.half, np.full(len(rows), np.inf))
        at_once = openers.threatened(station, start.half, peak)
        release = np.where(at_once, 0.0, bound_s)
        known = np.where(np.isnan(near.late_s), -np.inf, near.late_s)
        exact = np.flatnonzero(~at_once & (release < np.minimum(known, 1e9) + self.needed_s + AMPLE_S))
        if len(exact):
            release[exact] = openers.delayed_release_s(station[exact], currents(exact), held[exact])
        rule = np.select([at_once, bare, held], [AT_ONCE, LET_THROUGH, SIGNAL], CURVES)
        melts = openers.melts_a2s[station]
        by_fuse = np.isfinite(melts) & ~at_once & (heat <= melts * (1.0 + 1e-9))
        by_table = (near.start_a <= rules.maker_a[rows]) & (release < LIMITS_WITHIN_S)
        blind = rules.blind[rows] | (start.largest_a <= 0.0)
        free = [blind, by_table, by_fuse]
        unknown = ~openers.early_known[station] & ~at_once
        release = np.where(np.any(free, axis=0), np.inf, np.where(unknown, np.nan, release))
        rule = np.select([*free, unknown], [NOT_SEEN, MAKER, FUSES, UPSTREAM_UNKNOWN], rule)
        rule = np.where(np.isnan(near.late_s), DOWNSTREAM_UNKNOWN, rule)
        rule = np.where(np.isposinf(near.late_s) & np.isposinf(release), NEITHER, rule)
        never = np.isposinf(release) & ~np.isnan(near.late_s)
        with np.errstate(invalid="ignore"):
            return release, np.where(never, np.inf, release - near.late_s), rule
