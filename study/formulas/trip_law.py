"""Operating time against current: the laws that the edges of protective devices' bands follow."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Final, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.curves_iec60255 import inverse_time_s

FloatArray = NDArray[np.float64]

LawKind = Literal["constant", "power", "inverse", "heating", "points"]
Sees = Literal["symmetrical", "heating", "peak"]
Memory = Literal["resets", "holds", "decays", "cools"]

ALWAYS: Final = np.inf


@dataclass(frozen=True, slots=True, kw_only=True)
class Edge:
    """The least or the greatest operating time of one stage, as a function of current.

    It operates at currents from ``from_a`` to ``up_to_a``, in a time that follows from the multiple M of
    ``setting_a``:

    ``constant`` (time), ``power`` (time at M = 1, exponent n: t M^-n), ``inverse`` (time multiplier, k, c,
    alpha: TMS (k / (M^alpha - 1) + c), flat above 20), ``heating`` (time constant, multiple k that just
    trips, load before p: tau ln((M² - p²)/(M² - k²))), ``points`` (exponent beyond the last point; `points`
    are multiples and times, straight lines in double-logarithmic scale, the first time held below the
    first).

    ``least_s`` is a floor of the time, ``after_s`` what is added to it: the time from release to contacts
    apart, or to the arc out. ``sees`` is what the stage measures (`study.formulas.operate_state`), ``memory``
    what becomes of a delay that has begun: it ``resets`` at once below the setting, ``holds``, ``decays``
    (IEEE C37.112, ``reset_s`` being the reset time at no current) or ``cools`` with the time constant of a
    ``heating`` law.
    """

    stage: str
    law: LawKind
    from_a: float
    setting_a: float
    figures: tuple[float, ...] = ()
    points: tuple[tuple[float, float], ...] = ()
    up_to_a: float = ALWAYS
    least_s: float = 0.0
    after_s: float = 0.0
    sees: Sees = "symmetrical"
    memory: Memory = "resets"
    reset_s: float = 0.0

    def time_s(self, current_a: ArrayLike) -> FloatArray:
        """Return the time until release, in s, without `after_s`; inf where it does not operate."""
        current = np.asarray(current_a, float)
        flat = current.reshape(1, -1)
        return edge_times_s([self], flat).reshape(current.shape)

    def scaled(self, ratio: float) -> Edge:
        """Return the edge in currents of the other side of a transformer: all currents times `ratio`."""
        return replace(
            self,
            from_a=self.from_a * ratio,
            setting_a=self.setting_a * ratio,
            up_to_a=self.up_to_a * ratio,
        )


def edge_times_s(edges: Sequence[Edge], current_a: FloatArray) -> FloatArray:
    """Return the time until release of many edges, each at the currents of its row.

    Parameters
    ----------
    edges : sequence of Edge
        One for each row.
    current_a : ndarray, shape (row, ...)
        What the stage measures, see `Edge.sees`. [A]

    Returns
    -------
    ndarray
        The shape of the currents; inf where an edge does not operate. [s]

    Examples
    --------
    >>> delay = Edge(stage="long-time", law="power", from_a=105.0, setting_a=100.0, figures=(360.0, 2.0))
    >>> edge_times_s([delay], np.array([[100.0, 600.0]]))
    array([[inf, 10.]])
    """
    current = np.asarray(current_a, float)
    time = np.empty(current.shape)
    wide = (slice(None), *[None] * (current.ndim - 1))
    for rows in _alike(edges):
        some = [edges[row] for row in rows]
        setting, least, start, end = (
            np.array([getattr(edge, name) for edge in some])[wide]
            for name in ("setting_a", "least_s", "from_a", "up_to_a")
        )
        amps = current[rows]
        operates = (amps >= start) & (amps <= end) & (amps > 0.0)
        multiple = np.where(operates, amps / setting, 1.0)
        figures = [np.array(column)[wide] for column in zip(*(edge.figures for edge in some), strict=True)]
        law = np.maximum(_law_s(some[0], multiple, figures), least)
        time[rows] = np.where(operates, law, np.inf)
    return time


def _alike(edges: Sequence[Edge]) -> list[list[int]]:
    """Return the rows of edges that one formula serves at once."""
    groups: dict[tuple[object, ...], list[int]] = {}
    for row, edge in enumerate(edges):
        groups.setdefault((edge.law, edge.points), []).append(row)
    return list(groups.values())


def _law_s(edge: Edge, multiple: FloatArray, figures: list[FloatArray]) -> FloatArray:
    match edge.law:
        case "constant":
            return np.broadcast_to(figures[0], multiple.shape)
        case "power":
            return np.asarray(figures[0] * multiple ** -figures[1])
        case "inverse":
            return np.asarray(figures[0] * inverse_time_s(multiple, *figures[1:]))
        case "heating":
            return heating_time_s(multiple, *figures)
        case "points":
            return points_time_s(multiple, edge.points, figures[0])


def heating_time_s(
    multiple: ArrayLike, tau_s: ArrayLike, trips_at: ArrayLike, preload: ArrayLike = 0.0
) -> FloatArray:
    """Return when one thermal body trips: ``t = tau ln((M² - p²)/(M² - k²))``.

    Source: heating law of one body; IEC 60255-149, cold and hot curve of thermal relays, from memory.

    Parameters
    ----------
    multiple : array_like
        M, current over setting.
    tau_s : array_like
        Time constant. [s]
    trips_at : array_like
        k, the multiple that just trips.
    preload : array_like
        p, load before, as a multiple of the setting.

    Returns
    -------
    FloatArray
        inf up to k. [s]

    Examples
    --------
    >>> [round(float(heating_time_s(7.2, 387.0, 1.15, p)), 1) for p in (0.0, 1.0)]
    [10.0, 2.5]
    """
    m2, k2, p2 = (np.asarray(x, float) ** 2 for x in (multiple, trips_at, preload))
    above = m2 > k2
    safe = np.where(above, m2, k2 + 1.0)
    warm = np.maximum(k2 - p2, 0.0)
    return np.where(above, np.asarray(tau_s) * np.log1p(warm / (safe - k2)), np.inf)


def points_time_s(
    multiple: ArrayLike, points: tuple[tuple[float, float], ...], exponent_beyond: ArrayLike
) -> FloatArray:
    """Return the time of a curve given by points: straight lines in double-logarithmic scale.

    Below the first point its time is held, beyond the last ``t M^n`` stays constant: n = 2 for a fuse that
    melts without losing heat, 0 to hold the time.

    Source: definition; constant I2t of short melting times is IEC 60269-1, from memory.

    Parameters
    ----------
    multiple : array_like
        Current in the unit of the points.
    points : tuple of (float, float)
        Current, ascending, and time. [s]
    exponent_beyond : array_like
        n.

    Returns
    -------
    FloatArray
        [s]

    Examples
    --------
    >>> points_time_s([1.0, 10.0, 20.0], ((2.0, 100.0), (10.0, 0.04)), 2.0).round(3).tolist()
    [100.0, 0.04, 0.01]
    """
    m = np.asarray(multiple, float)
    at, seconds = (np.array(column, float) for column in zip(*points, strict=True))
    inside = np.exp(np.interp(np.log(m), np.log(at), np.log(seconds)))
    return np.asarray(inside * np.maximum(m / at[-1], 1.0) ** -np.asarray(exponent_beyond, float))
