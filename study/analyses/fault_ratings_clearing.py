"""When a fault is cleared, and by which stage, while its current decays."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_history import Histories, running_integral
from study.analyses.fault_ratings_releases import Release, slow_times_s

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

STAGES: Final = (
    "does not clear",
    "instantaneous",
    "short-time delay",
    "long-time delay",
    "relay curve",
    "overload relay",
    "fuse melting",
    "maker's curve",
    "no setting given",
)
DOES_NOT_CLEAR, INSTANTANEOUS, SHORT_TIME, LONG_TIME, UNKNOWN = 0, 1, 2, 3, len(STAGES) - 1
DELAYED: Final = (SHORT_TIME, STAGES.index("relay curve"))


@dataclass(frozen=True, slots=True, kw_only=True)
class Clearing:
    """One row for each fault: ``time_s`` until the arc is out, inf for never, NaN where nothing is known.

    ``stage`` numbers `STAGES`; ``meant`` is the same, or the stage that should have cleared where none does.
    ``pick_up_a`` is the current that this one needs at the far end of its tolerance, ``seen_a`` what it has,
    and ``due_s`` when it would have cleared if the current were kept up (inf: never).
    """

    time_s: FloatArray
    stage: IntArray
    meant: IntArray
    pick_up_a: FloatArray
    seen_a: FloatArray
    due_s: FloatArray


def clear(
    devices: Sequence[Release], faults: Histories, half_cycle_s: float, holds_s: FloatArray
) -> Clearing:
    """Return when each device clears its fault.

    The instantaneous stage looks at Iac at T/2, a delayed one at Iac when its delay ends; for one that
    depends on the current the parts ``dt/t(I)`` of its time add up, as IEC 60255-151 has it for currents that
    change. The earliest stage clears; but where the short-time delay of a breaker takes hold, its long-time
    curve is not counted on: many releases end it there.

    Parameters
    ----------
    devices : sequence of Release
        One for each row.
    faults : Histories
        Current through each device.
    half_cycle_s : float
        T/2. [s]
    holds_s : ndarray, shape (row,)
        How long the current is kept up: what takes longer does not clear. [s]

    Returns
    -------
    Clearing
        One row for each fault.
    """
    n = len(devices)
    at_once = np.array([d.instantaneous_a for d in devices])
    short_a = np.array([d.short_a for d in devices])
    fixed = np.array([d.fixed_s for d in devices])
    half = faults.ac_at_a(np.full(n, half_cycle_s))
    short_end = _short_time_s(devices, faults, short_a)
    slow_end, slow_stage, slow_a = _slow_time_s(devices, faults, half < at_once)
    superseded = np.isfinite(short_end) & (slow_stage == LONG_TIME)
    ends = np.stack([np.where(half >= at_once, 0.0, np.inf), short_end, slow_end]) + fixed
    ends[2] = np.where(superseded, np.inf, ends[2])
    due = ends
    ends = np.where(due <= holds_s, due, np.inf)
    first = np.argmin(ends, axis=0)
    rows = np.arange(n)
    time = ends[first, rows]
    meant = np.where(short_a < np.inf, 1, np.where(at_once < np.inf, 0, 2))
    which = np.where(np.isfinite(time), first, meant)
    wait = np.where(which == 1, [d.short_s if d.short_s < np.inf else 0.0 for d in devices], 0.0)
    wait = np.where(which == 0, half_cycle_s, np.where(which == 2, np.minimum(slow_end, holds_s), wait))
    stage_due = np.select([which == 0, which == 1], [INSTANTANEOUS, SHORT_TIME], slow_stage)
    known = np.array([d.known for d in devices], bool)
    stage = np.where(np.isfinite(time), stage_due, DOES_NOT_CLEAR)
    return Clearing(
        time_s=np.where(known, time, np.nan),
        stage=np.where(known, stage, UNKNOWN).astype(np.int64),
        meant=np.where(known, stage_due, UNKNOWN).astype(np.int64),
        pick_up_a=np.where(known, np.stack([at_once, short_a, slow_a])[which, rows], np.nan),
        seen_a=faults.ac_at_a(wait),
        due_s=due[which, rows],
    )


def _short_time_s(devices: Sequence[Release], faults: Histories, pick_up_a: FloatArray) -> FloatArray:
    """Return when the short-time delay ends with the current still above its pick-up."""
    delay = np.array([d.short_s for d in devices])
    there = np.isfinite(delay)
    seen = faults.ac_at_a(np.where(there, delay, 0.0))
    ends = np.where(there & (seen >= pick_up_a), delay, np.inf)
    bent = np.array([d.short_i2t_from_a for d in devices])
    rows = np.flatnonzero(there & (bent > 0.0))
    if len(rows):
        amps = faults.ac_a[rows]
        ratio = np.maximum(bent[rows][:, None, None] / np.maximum(amps, 1e-9), 1.0)
        rate = np.where(
            amps >= pick_up_a[rows][:, None, None], 1.0 / (delay[rows][:, None, None] * ratio**2), 0.0
        )
        ends[rows] = _reaches_one(faults.time_s, rate)
    return ends


def _slow_time_s(
    devices: Sequence[Release], faults: Histories, wanted: BoolArray
) -> tuple[FloatArray, IntArray, FloatArray]:
    """Return when the stage that depends on the current ends, which it is and from where it counts."""
    ends, from_a = np.full(len(devices), np.inf), np.full(len(devices), np.inf)
    stage = np.full(len(devices), DOES_NOT_CLEAR)
    found = [(row, d.slow) for row, d in enumerate(devices) if d.slow is not None]
    for row, slow in found:
        stage[row], from_a[row] = STAGES.index(slow.kind), slow.from_a
    rows = [row for row, _ in found if wanted[row]]
    if rows:
        time = slow_times_s([slow for row, slow in found if wanted[row]], faults.ac_a[rows])
        ends[rows] = _reaches_one(faults.time_s, 1.0 / np.maximum(time, 1e-6))
    return ends, stage.astype(np.int64), from_a


def _reaches_one(knots: FloatArray, rate_per_s: FloatArray) -> FloatArray:
    """Return when the integral of each row reaches 1; inf for never."""
    whole = running_integral(knots, rate_per_s)
    k = np.argmax(whole >= 1.0, axis=1)
    row = np.arange(len(whole))
    reached = whole[row, -1] >= 1.0
    before = np.maximum(k - 1, 0)
    step = np.where(reached, whole[row, k] - whole[row, before], 1.0)
    part = (1.0 - whole[row, before]) / np.where(step > 0.0, step, 1.0)
    time = knots[before] + part * (knots[np.maximum(k, 1)] - knots[before])
    return np.asarray(np.where(reached, time, np.inf))
