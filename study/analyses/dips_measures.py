"""Figures of a simulated course: dips and rises, recovery, overshoot, classes; and which rows to keep."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from study.results.arrays import FloatArray, IntArray
from study.results.dips import Recovery

SETTLED_S = 0.5  # of the end over which a quantity is looked at
SETTLED_BAND = 0.005  # of its value: within it it has settled
EARLY_POINTS = 40
SAME_TIME = 1e-9  # s
JOINED_S = 2.0  # no longer than governors and regulators need


def recovery_of(time_s: FloatArray, value: FloatArray, starts_s: Sequence[float], band: float) -> Recovery:
    """Return how a quantity is disturbed and comes back.

    Of several disturbances the one counts after which it goes farthest from its value before. What follows
    within `JOINED_S` belongs to the same disturbance: a set lost and the drives that give way, a fault and
    its clearing.

    Parameters
    ----------
    time_s, value : ndarray, shape (time,)
        Course; an instant of change stands twice.
    starts_s : sequence of float
        When something disturbs it, ascending. [s]
    band : float
        Half width of the band around the value after, in the unit of the value.

    Returns
    -------
    Recovery
        Of the disturbance that counts.
    """
    starts = _joined(starts_s) or [float(time_s[0])]
    ends = [*starts[1:], float(time_s[-1])]
    found = [
        _window(time_s, value, start, end, band)
        for start, end in zip(starts, ends, strict=True)
        if end > start
    ]
    return max(found, key=lambda r: max(r.before - r.least, r.largest - r.before))


def _joined(starts_s: Sequence[float]) -> list[float]:
    """Return the first moment of each disturbance."""
    first: list[float] = []
    last = -np.inf
    for start in sorted(set(starts_s)):
        if start - last > JOINED_S:
            first.append(start)
        last = start
    return first


def _window(time_s: FloatArray, value: FloatArray, start: float, end: float, band: float) -> Recovery:
    first = int(np.searchsorted(time_s, start - SAME_TIME))
    last = int(np.searchsorted(time_s, end - SAME_TIME))
    t, v = time_s[first : last + 1], value[first : last + 1]
    before = float(v[0])
    tail = v[t >= max(end - SETTLED_S, start)]
    after = float(tail.mean())
    low, high = int(v.argmin()), int(v.argmax())
    outside = np.flatnonzero(np.abs(v[1:] - after) > band) + 1
    if not len(outside):
        back = 0.0
    elif outside[-1] == len(v) - 1:
        back = float("inf")
    else:
        back = float(t[outside[-1] + 1] - start)
    dips = before - v[low] >= v[high] - before
    past = v[low:].max() - after if dips else after - v[high:].min()
    return Recovery(
        before=before,
        least=float(v[low]),
        least_at_s=float(t[low]),
        largest=float(v[high]),
        largest_at_s=float(t[high]),
        after=after,
        recovery_s=back,
        overshoot=max(float(past), 0.0),
        settled=bool(np.ptp(tail) <= SETTLED_BAND * abs(after)),
    )


def rows_to_keep(
    time_s: FloatArray, moments_s: Sequence[float], extremes: Sequence[int], count: int
) -> IntArray:
    """Return which rows of a course are kept: evenly spaced ones, more after each moment, and the extremes.

    Parameters
    ----------
    time_s : ndarray, shape (time,)
        Every step.
    moments_s : sequence of float
        When something happens; both rows of the moment are kept. [s]
    extremes : sequence of int
        Rows that are kept whatever else.
    count : int
        Evenly spaced rows.

    Returns
    -------
    ndarray of int
        Ascending.
    """
    wanted = [np.linspace(time_s[0], time_s[-1], count)]
    wanted += [m + np.geomspace(1e-3, 1.0, EARLY_POINTS) for m in sorted(set(moments_s))[:12]]
    rows: NDArray[np.int64] = np.searchsorted(time_s, np.concatenate(wanted)).astype(np.int64)
    doubled = np.flatnonzero(np.diff(time_s) == 0.0)
    rows = np.concatenate([rows, doubled, doubled + 1, np.array(list(extremes), np.int64)])
    return np.unique(np.clip(rows, 0, len(time_s) - 1))
