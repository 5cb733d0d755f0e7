"""Whether the least fault in what each station protects is cleared, by whom and when."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_bands import Openers
from study.analyses.grading_currents import Currents
from study.analyses.grading_faults import MAX_FAR, MIN_FAR, ModeFaults
from study.analyses.grading_rules import ModeRules

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

NOBODY, ENDS_BY_ITSELF = -1, -2


@dataclass(frozen=True, slots=True, kw_only=True)
class ModeReach:
    """Reach in one mode, [feed]; fields as in `study.results.grading.Reach`. ``judged``: the feed counts."""

    judged: BoolArray
    least_a: FloatArray
    clears_s: FloatArray
    by: IntArray
    holds_s: FloatArray


def mode_reach(faults: ModeFaults, openers: Openers, rules: ModeRules) -> ModeReach:
    """Return when the least fault of every feed is cleared at the latest.

    The least of three-phase, two-phase and earth fault at every instant, by the minimum case; where that does
    not feed the fault, by the maximum case. A station that clears later than the sources keep the current up
    does not clear. Where a feed's own station does not clear, the first of those behind that does counts.

    Source: IEC 60364-4-43, clause 434: least short-circuit current, from memory.

    Parameters
    ----------
    faults : ModeFaults
        The faults of the mode, their currents worked out.
    openers : Openers
        What opens each station.
    rules : ModeRules
        Direction, zones and differential functions.

    Returns
    -------
    ModeReach
        [feed]
    """
    own = faults.own
    level = np.where(faults.there, MIN_FAR, MAX_FAR)
    least = _least(faults, own, level)
    holds = _holds_s(faults, own, level)
    late = _clears(faults, openers, rules, own, least)
    late = np.fmin(late, rules.quick_s)
    late = np.where(late <= holds, late, np.where(np.isnan(late), np.nan, np.inf))
    by = np.where(np.isfinite(late), faults.station[own], NOBODY)
    _by_others(faults, openers, rules, (late, by), holds)
    when = np.where(np.isfinite(late), np.minimum(late, faults.time_s[-1]), 0.0)
    stops = ~np.isfinite(late) & (least.ac_a[:, -1] <= 0.0) & (least.ac_a[:, 0] > 0.0)
    return ModeReach(
        judged=(least.ac_a[:, 0] > 0.0) & ~faults.fed_back,
        least_a=_at(faults.time_s, least.ac_a, when),
        clears_s=late,
        by=np.where(stops, ENDS_BY_ITSELF, by),
        holds_s=holds,
    )


def _least(faults: ModeFaults, rows: IntArray, level: IntArray) -> Currents:
    """Return the currents of the least kind of fault, [row, time]."""
    ac = np.zeros((len(rows), len(faults.time_s)))
    for at, case in ((MIN_FAR, faults.minimum.ways.case), (MAX_FAR, faults.maximum.ways.case)):
        some = np.flatnonzero(level[faults.feed[rows]] == at)
        if not len(some):
            continue
        place = faults.place[1][faults.feed[rows[some]]]
        through = faults.currents(rows[some], at).ac_a
        given = (case.iac_a[place] > 0.0) & np.isfinite(case.least_a[place])
        ratio = np.where(given, case.least_a[place], 1.0) / np.where(given, case.iac_a[place], 1.0)
        for k, row in enumerate(some.tolist()):
            ac[row] = through[k] * np.interp(faults.time_s, case.time_s, ratio[k])
    return Currents(ac_a=ac, dc_a=np.zeros_like(ac))


def _holds_s(faults: ModeFaults, rows: IntArray, level: IntArray) -> FloatArray:
    """Return how long the current through each row is kept up: until the first of its sources ends."""
    found = np.full(len(rows), np.inf)
    feed = faults.feed[rows]
    for at, currents in ((MIN_FAR, faults.minimum), (MAX_FAR, faults.maximum)):
        some = np.flatnonzero(level[feed] == at)
        if not len(some):
            continue
        case = currents.ways.case
        place, inside = faults.place[1][feed[some]], faults.inside[1][feed[some]]
        share = currents.ways.into_branch(faults.station[rows[some]], place, inside)
        count = len(case.sources.holds_s)
        holds = case.sources.holds_s[None, :]
        kept = (np.abs(share[:, :count] * case.parts.sustained_a[place][:, :count]) > 0.0) & (holds > 0.0)
        found[some] = np.where(kept, holds, np.inf).min(axis=1, initial=np.inf)
    return found


def _clears(
    faults: ModeFaults, openers: Openers, rules: ModeRules, rows: IntArray, currents: Currents
) -> FloatArray:
    late, _ = openers.latest_s(faults.station[rows], currents)
    return np.where(rules.blind[rows], np.inf, late)


def _by_others(
    faults: ModeFaults,
    openers: Openers,
    rules: ModeRules,
    found: tuple[FloatArray, IntArray],
    holds_s: FloatArray,
) -> None:
    """Fill in the stations behind that clear where a feed's own does not; all of several paths must open."""
    late, by = found
    lost = np.flatnonzero(~np.isfinite(late))
    is_own = np.zeros(len(faults.feed), bool)
    is_own[faults.own] = True
    rows = np.flatnonzero(np.isin(faults.feed, lost) & ~is_own)
    if not len(rows):
        return
    level = np.where(faults.there, MIN_FAR, MAX_FAR)
    least = _least(faults, rows, level)
    time = _clears(faults, openers, rules, rows, least)
    share = np.divide(
        least.ac_a[:, 0],
        _least(faults, faults.own[faults.feed[rows]], level).ac_a[:, 0],
        out=np.zeros(len(rows)),
        where=least.ac_a[:, 0] > 0.0,
    )
    volts = faults.places.u_nominal_v[faults.stations.place]
    share *= volts[faults.station[rows]] / volts[faults.station[faults.own[faults.feed[rows]]]]
    for feed in lost.tolist():
        mine = np.flatnonzero(faults.feed[rows] == feed)
        good = [k for k in mine.tolist() if time[k] <= holds_s[feed]]
        # One that carries all of the current ends the fault; sets side by side must all open.
        whole = [k for k in good if share[k] > 0.99]
        if whole:
            best = min(whole, key=lambda k: float(time[k]))
        elif good and sum(share[k] for k in good) > 0.99:
            best = max(good, key=lambda k: float(time[k]))
        else:
            continue
        late[feed], by[feed] = time[best], faults.station[rows[best]]


def _at(time_s: FloatArray, values: FloatArray, when_s: FloatArray) -> FloatArray:
    return np.array([np.interp(t, time_s, row) for t, row in zip(when_s, values, strict=True)], float)
