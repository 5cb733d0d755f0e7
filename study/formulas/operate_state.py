"""When a protective device operates on a current that changes: its state is integrated, band edge by edge."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.formulas.trip_band import TripBand, known_rows, side
from study.formulas.trip_law import Edge
from study.formulas.trip_state import body_trips_s, delay_ends_s, first_instant_s

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

# Steps of a tenth follow decays to 2e-3 of the operating time; past 10 s hardly any decay is left.
FIRST_S: Final = 2e-4
FINE_TO_S: Final = 10.0
GRID_RATIO: Final = 1.1
COARSE_RATIO: Final = 1.5
NOTHING_A: Final = 1e-9
_ROWS_AT_ONCE: Final = 4096


@dataclass(frozen=True, slots=True, kw_only=True)
class CurrentHistory:
    """Currents through devices over time, [case, time]; between samples their logarithm is a straight line.

    ``time_s`` is [time], or [case, time] where the instants differ. A jump is given by repeating an instant:
    its first sample is the value before, its second that after. ``ac_a`` is the symmetrical r.m.s. current,
    ``dc_a`` the direct component (instantaneous). Nothing operates
    after the last sample.
    """

    time_s: FloatArray
    ac_a: FloatArray
    dc_a: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Operation:
    """When devices operate on their currents, [case].

    ``release_s`` is the earliest moment from which the device opens for good, ``earliest_s`` when its
    contacts part at the earliest, ``latest_s`` when the arc is out at the latest; inf for never, NaN where
    the edge is not known. ``earliest_stage`` and ``latest_stage`` name the stages, empty for none.
    """

    release_s: FloatArray
    earliest_s: FloatArray
    latest_s: FloatArray
    earliest_stage: tuple[str, ...]
    latest_stage: tuple[str, ...]


def time_grid_s(half_cycle_s: float, last_s: float, *instants_s: float) -> FloatArray:
    """Return instants fit for `operate`: geometric, with half a cycle and given instants among them.

    Parameters
    ----------
    half_cycle_s : float
        [s]
    last_s : float
        [s]
    *instants_s : float
        At which a current changes suddenly; each is repeated. [s]

    Returns
    -------
    ndarray
        From 0 to `last_s`. [s]

    Examples
    --------
    >>> grid = time_grid_s(0.01, 10.0, 0.3)
    >>> float(grid[0]), float(grid[-1]), int((grid == 0.3).sum()), len(grid)
    (0.0, 10.0, 2, 119)
    """
    fine = FIRST_S * GRID_RATIO ** np.arange(np.log(FINE_TO_S / FIRST_S) / np.log(GRID_RATIO))
    coarse = FINE_TO_S * COARSE_RATIO ** np.arange(
        np.log(max(last_s / FINE_TO_S, 1.0)) / np.log(COARSE_RATIO)
    )
    inside = [t for t in instants_s if 0.0 < t < last_s]
    once = np.unique(np.concatenate([[0.0, half_cycle_s, last_s], fine, coarse, inside]))
    return np.sort(np.concatenate([once[once <= last_s], np.unique(inside)]))


def operate(bands: Sequence[TripBand], history: CurrentHistory, half_cycle_s: float) -> Operation:
    """Return when each device operates on the current of its case, both edges of its band.

    A delay that depends on the current runs at the rate ``1/t(I)`` and ends when the parts add up to 1; below
    the setting it resets, holds, decays or cools as the edge says. A definite delay needs the current above
    its setting without a break. An instantaneous stage operates at the first moment above its setting; its
    latest edge looks no earlier than half a cycle after the start. The earliest edge of a stage that senses
    the peak sees ``(sqrt2 Iac + idc)/sqrt2`` at its greatest, half a cycle after the start; one that heats
    sees ``sqrt(Iac² + idc²)``; latest edges count on the symmetrical current alone.

    Source: IEC 60255-151:2009, clause on operating time with changing currents, integral of dt/t(I) = 1, and
    IEEE C37.112-1996, equations 1 and 2; both from memory. Differential equation of one heated body.

    Parameters
    ----------
    bands : sequence of TripBand
        One for each case.
    history : CurrentHistory
        Currents, [case, time].
    half_cycle_s : float
        T/2. [s]

    Returns
    -------
    Operation
        One row for each case.

    Examples
    --------
    >>> delay = Edge(stage="short-time", law="constant", from_a=900.0, setting_a=1000.0, figures=(0.3,))
    >>> band = TripBand(earliest=(delay,), latest=(delay,))
    >>> grid = time_grid_s(0.01, 2.0)
    >>> falls = np.stack([2000.0 * np.exp(-grid / 1.0), 2000.0 * np.exp(-grid / 0.2)])
    >>> history = CurrentHistory(time_s=grid, ac_a=falls, dc_a=0.0 * falls)
    >>> operate([band, band], history, 0.01).latest_s.round(3).tolist()
    [0.3, inf]
    """
    (release, early, early_stage), (_, late, late_stage) = (
        first_operation(bands, history, half_cycle_s, early=x) for x in (True, False)
    )
    return Operation(
        release_s=release,
        earliest_s=early,
        latest_s=late,
        earliest_stage=early_stage,
        latest_stage=late_stage,
    )


def first_operation(
    bands: Sequence[TripBand], history: CurrentHistory, half_cycle_s: float, *, early: bool
) -> tuple[FloatArray, FloatArray, tuple[str, ...]]:
    """Return one side of `operate`: when the first stage releases, when the device is open, which stage.

    Parameters
    ----------
    bands : sequence of TripBand
        One for each case.
    history : CurrentHistory
        Currents, [case, time].
    half_cycle_s : float
        T/2. [s]
    early : bool
        True: the earliest edges, False: the latest.

    Returns
    -------
    tuple
        Release and opening [s], name of the stage; inf, inf and "" for never, NaN where it is not known.
    """
    edges = [edge for band in bands for edge in side(band, early=early)]
    case = np.array([n for n, band in enumerate(bands) for _ in side(band, early=early)], np.int64)
    release, ends = (np.full(len(bands), np.inf) for _ in range(2))
    stages = [""] * len(bands)
    if edges:
        time = edge_operating_s(edges, _of_cases(history, case), half_cycle_s, early=early)
        after = time + np.array([edge.after_s for edge in edges])
        for n in np.argsort(-after, kind="stable"):
            if np.isfinite(after[n]):
                ends[case[n]], stages[case[n]] = after[n], edges[n].stage
        np.minimum.at(release, case, time)
    unknown = ~known_rows(bands, early=early)
    release[unknown], ends[unknown] = np.nan, np.nan
    named = ("" if hidden else stage for hidden, stage in zip(unknown, stages, strict=True))
    return release, ends, tuple(named)


def _of_cases(history: CurrentHistory, case: IntArray) -> CurrentHistory:
    time = np.asarray(history.time_s, float)
    return CurrentHistory(
        time_s=time[case] if time.ndim == 2 else time[None, :],
        ac_a=np.asarray(history.ac_a, float)[case],
        dc_a=np.asarray(history.dc_a, float)[case],
    )


def edge_operating_s(
    edges: Sequence[Edge], history: CurrentHistory, half_cycle_s: float, *, early: bool
) -> FloatArray:
    """Return when each edge releases on the current of its row; inf for never.

    Parameters
    ----------
    edges : sequence of Edge
        One for each row.
    history : CurrentHistory
        [row, time]
    half_cycle_s : float
        T/2. [s]
    early : bool
        True where the edges are those of the earliest release.

    Returns
    -------
    ndarray, shape (row,)
        [s]
    """
    time = np.broadcast_to(np.atleast_2d(np.asarray(history.time_s, float)), history.ac_a.shape)
    found = np.full(len(edges), np.inf)
    for way, ends_s in _WAYS.items():
        rows = np.array([n for n, edge in enumerate(edges) if _way(edge) == way], np.int64)
        for some in np.split(rows, range(_ROWS_AT_ONCE, len(rows), _ROWS_AT_ONCE)):
            if len(some):
                own = [edges[n] for n in some]
                part = CurrentHistory(time_s=time[some], ac_a=history.ac_a[some], dc_a=history.dc_a[some])
                found[some] = ends_s(own, time[some], _seen_a(own, part, half_cycle_s, early=early))
    return found


_WAYS: Final[Mapping[str, Callable[[Sequence[Edge], FloatArray, FloatArray], FloatArray]]] = MappingProxyType(
    {"at once": first_instant_s, "integral": delay_ends_s, "heat": body_trips_s}
)


def _way(edge: Edge) -> str:
    if edge.law == "constant" and edge.figures[0] == 0.0:
        return "at once"
    return "heat" if edge.law == "heating" and edge.memory == "cools" else "integral"


def _seen_a(
    edges: Sequence[Edge], history: CurrentHistory, half_cycle_s: float, *, early: bool
) -> FloatArray:
    """Return what each edge measures, [row, time]."""
    seen, direct = np.maximum(history.ac_a, NOTHING_A), np.abs(history.dc_a)
    held = np.array([_way(edge) == "at once" for edge in edges])
    if early:
        heats = np.array([edge.sees == "heating" for edge in edges])
        held = np.array([edge.sees == "peak" for edge in edges])
        seen[heats] = np.hypot(seen[heats], direct[heats])
        seen[held] += direct[held] / np.sqrt(2.0)
    rows = np.flatnonzero(held)
    if len(rows):
        seen[rows] = _held_until(history.time_s[rows], seen[rows], half_cycle_s)
    return seen


def _held_until(time: FloatArray, values: FloatArray, until_s: float) -> FloatArray:
    """Return the values, those before an instant replaced by the one at it."""
    k = np.clip((time < until_s).sum(axis=1) - 1, 0, time.shape[1] - 2)
    row = np.arange(len(time))
    width = time[row, k + 1] - time[row, k]
    u = np.where(
        width > 0.0, np.clip((until_s - time[row, k]) / np.where(width > 0.0, width, 1.0), 0, 1), 1.0
    )
    there = np.exp((1.0 - u) * np.log(values[row, k]) + u * np.log(values[row, k + 1]))
    return np.asarray(np.where(time < until_s, there[:, None], values))
