"""The state of one stage on a current that changes: first instant, running delay, heated body.

Rows are stages, currents [row, time] are what the stage sees; between samples their logarithm is a straight
line, an instant repeated is a jump.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.formulas.trip_law import Edge, edge_times_s

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

_FASTEST_S: Final = 1e-9
_SIMPSON: Final = np.array([1.0, 4.0, 1.0]) / 6.0
_BISECTIONS: Final = 40


def first_instant_s(edges: Sequence[Edge], time_s: FloatArray, seen_a: FloatArray) -> FloatArray:
    """Return the first instant at which each current is in the range of its stage; inf for never.

    Parameters
    ----------
    edges : sequence of Edge
        One for each row.
    time_s, seen_a : ndarray, shape (row, time)
        [s], [A]

    Returns
    -------
    ndarray, shape (row,)
        [s]
    """
    begins, _, inside = _parts(edges, time_s, seen_a)
    k, row = inside.argmax(axis=1), np.arange(len(edges))
    found = time_s[row, k] + begins[row, k] * np.diff(time_s, axis=1)[row, k]
    return np.asarray(np.where(inside.any(axis=1), found, np.inf))


def delay_ends_s(edges: Sequence[Edge], time_s: FloatArray, seen_a: FloatArray) -> FloatArray:
    """Return when the integral of dt/t(I) of each stage reaches 1; inf for never.

    Source: IEC 60255-151:2009 and IEEE C37.112-1996, equations 1 and 2 (reset of a delay that decays: rate
    (1 - M²)/tr); from memory.

    Parameters
    ----------
    edges : sequence of Edge
        One for each row.
    time_s, seen_a : ndarray, shape (row, time)
        [s], [A]

    Returns
    -------
    ndarray, shape (row,)
        [s]
    """
    begins, ends, inside = _parts(edges, time_s, seen_a)
    width = np.diff(time_s, axis=1)
    rate = _rates(edges, seen_a, begins, ends, inside)
    gain = np.where(inside, (rate @ _SIMPSON) * (ends - begins) * width, 0.0)
    loss = _losses(edges, seen_a, begins, ends, inside) * width
    resets = np.array([edge.memory == "resets" for edge in edges])
    rises = begins > 0.0
    state, found = np.zeros(len(edges)), np.full(len(edges), np.inf)
    for k in range(gain.shape[1]):
        real = width[:, k] > 0.0
        out_first = real & (rises[:, k] | ~inside[:, k])
        state = np.where(out_first & resets, 0.0, state)
        state = np.maximum(state - np.where(out_first, loss[:, k], 0.0), 0.0)
        whole = state + gain[:, k]
        now = np.isinf(found) & (whole >= 1.0)
        if now.any():
            part = _fraction(rate[now, k], (1.0 - state[now]) / gain[now, k])
            u = begins[now, k] + part * (ends[now, k] - begins[now, k])
            found[now] = time_s[now, k] + u * width[now, k]
        out_last = real & ~out_first & (ends[:, k] < 1.0)
        state = np.where(out_last & resets, 0.0, whole)
        state = np.maximum(state - np.where(out_last, loss[:, k], 0.0), 0.0)
    return found


def body_trips_s(edges: Sequence[Edge], time_s: FloatArray, seen_a: FloatArray) -> FloatArray:
    """Return when the heated body of each stage reaches its tripping temperature; inf for never.

    ``tau dθ/dt = M² - θ`` from p² to k², solved exactly from sample to sample: M² is an exponential there.
    A current above the range of the stage at that moment is not its to break: it never operates.

    Source: heating law of one body; IEC 60255-149, from memory.

    Parameters
    ----------
    edges : sequence of Edge
        One for each row, all of the law ``heating``.
    time_s, seen_a : ndarray, shape (row, time)
        [s], [A]

    Returns
    -------
    ndarray, shape (row,)
        [s]
    """
    tau, trips_at, preload = np.array([edge.figures for edge in edges]).T
    setting = np.array([edge.setting_a for edge in edges])
    squared = (seen_a / setting[:, None]) ** 2
    most = (np.array([edge.up_to_a for edge in edges]) / setting) ** 2
    width = np.diff(time_s, axis=1)
    theta, last = preload**2, np.full(len(edges), -1)
    before = np.array(theta)
    for n in range(width.shape[1]):
        after = _heated(theta, squared[:, n : n + 2], width[:, n], tau, 1.0)
        now = (last < 0) & (after >= trips_at**2) & (width[:, n] > 0.0)
        last[now], before[now] = n, theta[now]
        theta = after
    row = np.flatnonzero(last >= 0)
    k = last[row]
    pair, step = np.stack([squared[row, k], squared[row, k + 1]], axis=1), width[row, k]
    share = _crossing(before[row], pair, step, tau[row], trips_at[row] ** 2)
    there = pair[:, 0] * (pair[:, 1] / pair[:, 0]) ** share
    found = np.full(len(edges), np.inf)
    found[row] = np.where(there <= most[row], time_s[row, k] + share * step, np.inf)
    return found


def _parts(
    edges: Sequence[Edge], time_s: FloatArray, seen_a: FloatArray
) -> tuple[FloatArray, FloatArray, BoolArray]:
    """Return where each interval is in the range of its stage: from and to [0..1], and whether at all."""
    log = np.log(seen_a)
    low, step = log[:, :-1], np.diff(log, axis=1)
    limits = np.log(np.array([[edge.from_a, edge.up_to_a] for edge in edges]))[:, :, None]
    moving = step != 0.0
    slope = np.where(moving, step, 1.0)
    at_from, at_end = ((limits[:, n] - low) / slope for n in range(2))
    begins = np.clip(np.minimum(at_from, at_end), 0.0, 1.0)
    ends = np.clip(np.maximum(at_from, at_end), 0.0, 1.0)
    steady = (low >= limits[:, 0]) & (low <= limits[:, 1])
    outside = (np.maximum(at_from, at_end) < 0.0) | (np.minimum(at_from, at_end) > 1.0)
    inside = np.where(moving, ~outside, steady) & (np.diff(time_s, axis=1) > 0.0)
    return np.where(moving, begins, 0.0), np.where(moving, ends, 1.0), inside


def _between_a(seen_a: FloatArray, at: FloatArray) -> FloatArray:
    """Return the currents at parts 0..1 of each interval, (row, interval, part)."""
    log = np.log(seen_a)
    return np.asarray(np.exp(log[:, :-1, None] + at * np.diff(log, axis=1)[:, :, None]))


def _thirds(begins: FloatArray, ends: FloatArray) -> FloatArray:
    """Return start, middle and end of parts of intervals."""
    return np.stack([begins, 0.5 * (begins + ends), ends], axis=2)


def _rates(
    edges: Sequence[Edge], seen_a: FloatArray, begins: FloatArray, ends: FloatArray, inside: BoolArray
) -> FloatArray:
    """Return 1/t at start, middle and end of the part of each interval that counts."""
    bounds = np.array([[edge.from_a, edge.up_to_a] for edge in edges])[:, None, :]
    amps = np.clip(_between_a(seen_a, _thirds(begins, ends)), bounds[..., :1], bounds[..., 1:])
    time = edge_times_s(edges, np.where(inside[:, :, None], amps, 0.0))
    return 1.0 / np.maximum(time, _FASTEST_S)


def _losses(
    edges: Sequence[Edge], seen_a: FloatArray, begins: FloatArray, ends: FloatArray, inside: BoolArray
) -> FloatArray:
    """Return what a delay that decays loses in the part of each interval below its setting, for 1 s of it."""
    loss = np.zeros(inside.shape)
    rows = [n for n, edge in enumerate(edges) if edge.memory == "decays"]
    if not rows:
        return loss
    start, end, some = begins[rows], ends[rows], inside[rows]
    rises = start > 0.0
    first = np.where(some & ~rises, end, 0.0)
    last = np.where(some & rises, start, 1.0)
    setting = np.array([[edges[n].from_a] for n in rows])[:, :, None]
    multiple = _between_a(seen_a[rows], _thirds(first, last)) / setting
    reset = np.array([[edges[n].reset_s] for n in rows])
    loss[rows] = (np.maximum(1.0 - multiple**2, 0.0) @ _SIMPSON) * (last - first) / reset
    return loss


def _fraction(rate: FloatArray, share: FloatArray) -> FloatArray:
    """Return where an integral has reached a share of its whole, its rate being an exponential."""
    fall = np.log(np.maximum(rate[:, 2], 1e-30) / np.maximum(rate[:, 0], 1e-30))
    bent = np.abs(fall) > 1e-6
    safe = np.where(bent, fall, 1.0)
    return np.asarray(np.where(bent, np.log1p(share * np.expm1(safe)) / safe, share))


def _heated(
    theta: FloatArray, pair: FloatArray, step: FloatArray, tau: FloatArray, share: FloatArray | float
) -> FloatArray:
    """Return the temperature after a share of one interval, M² running from pair[:, 0] to pair[:, 1]."""
    growth = np.log(pair[:, 1] / pair[:, 0])
    at = step * share
    cool = -at / tau
    swing = growth * share - cool
    even = np.abs(swing) < 1e-9
    shape = np.where(even, 1.0, np.expm1(np.where(even, 1.0, swing)) / np.where(even, 1.0, swing))
    return np.asarray(theta * np.exp(cool) + pair[:, 0] * at / tau * np.exp(cool) * shape)


def _crossing(
    theta: FloatArray, pair: FloatArray, step: FloatArray, tau: FloatArray, target: FloatArray
) -> FloatArray:
    """Return the share of one interval at which the temperature reaches its target, by bisection."""
    low, high = np.zeros(len(theta)), np.ones(len(theta))
    for _ in range(_BISECTIONS):
        middle = 0.5 * (low + high)
        hot = _heated(theta, pair, step, tau, middle) >= target
        low, high = np.where(hot, low, middle), np.where(hot, middle, high)
    return high
