"""The band of a protective device: earliest release and latest clearing, over its stages and tolerances."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.trip_law import Edge, edge_times_s

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class TripBand:
    """What opens one device: the edges of its stages, in ampere of the side where it stands.

    ``earliest`` are the stages at the near end of their tolerances, ``latest`` at the far end; the first
    stage to operate opens the device. ``earliest_known`` is False where a stage may open the device of which
    the workbook does not say how early, ``latest_known`` likewise how late: such a time is NaN, never a
    guess. ``unknown`` says in words what is missing.
    """

    earliest: tuple[Edge, ...]
    latest: tuple[Edge, ...]
    earliest_known: bool = True
    latest_known: bool = True
    unknown: tuple[str, ...] = ()

    def release_s(self, current_a: ArrayLike) -> FloatArray:
        """Return the earliest moment from which the device opens for good, in s, at a constant current.

        A device upstream discriminates while this is later than the clearing downstream.
        """
        return self._first(current_a, early=True, after=False)

    def earliest_s(self, current_a: ArrayLike) -> FloatArray:
        """Return when the contacts part or the fuse melts at the earliest, in s: the lower edge."""
        return self._first(current_a, early=True, after=True)

    def latest_s(self, current_a: ArrayLike) -> FloatArray:
        """Return when the arc is out at the latest, in s: the upper edge."""
        return self._first(current_a, early=False, after=True)

    def times_s(self, current_a: ArrayLike) -> tuple[FloatArray, FloatArray]:
        """Return both edges in s: earliest contacts apart, latest arc out."""
        return self.earliest_s(current_a), self.latest_s(current_a)

    def scaled(self, ratio: float) -> TripBand:
        """Return the band in currents of the other side of a transformer: all currents times `ratio`."""
        return replace(
            self,
            earliest=tuple(edge.scaled(ratio) for edge in self.earliest),
            latest=tuple(edge.scaled(ratio) for edge in self.latest),
        )

    def _first(self, current_a: ArrayLike, *, early: bool, after: bool) -> FloatArray:
        current = np.asarray(current_a, float)
        flat = current.reshape(1, -1)
        return first_times_s([self], flat, early=early, after=after).reshape(current.shape)


def first_times_s(
    bands: Sequence[TripBand], current_a: FloatArray, *, early: bool, after: bool = True
) -> FloatArray:
    """Return when the first stage of each band operates, at constant currents.

    Parameters
    ----------
    bands : sequence of TripBand
        One for each row.
    current_a : ndarray, shape (row, ...)
        Symmetrical, r.m.s. [A]
    early : bool
        True: the earliest edges, False: the latest.
    after : bool
        True: with the time from release to contacts apart (earliest) or arc out (latest).

    Returns
    -------
    ndarray
        The shape of the currents; inf where a device does not operate, NaN where the edge is not known. [s]

    Examples
    --------
    >>> edge = Edge(stage="instantaneous", law="constant", from_a=800.0, setting_a=800.0, figures=(0.0,),
    ...             after_s=0.01)
    >>> first_times_s([TripBand(earliest=(edge,), latest=())], np.array([[700.0, 900.0]]), early=True)
    array([[ inf, 0.01]])
    """
    current = np.asarray(current_a, float)
    edges = [edge for band in bands for edge in side(band, early=early)]
    row = np.array([n for n, band in enumerate(bands) for _ in side(band, early=early)], np.int64)
    first = np.full(current.shape, np.inf)
    if edges:
        time = edge_times_s(edges, current[row])
        if after:
            time = time + np.array([e.after_s for e in edges]).reshape(-1, *[1] * (current.ndim - 1))
        np.minimum.at(first, row, time)
    first[~known_rows(bands, early=early)] = np.nan
    return first


def side(band: TripBand, *, early: bool) -> tuple[Edge, ...]:
    """Return the edges of one side of a band."""
    return band.earliest if early else band.latest


def known_rows(bands: Sequence[TripBand], *, early: bool) -> NDArray[np.bool_]:
    """Return for each band whether that side of it is known."""
    return np.array([b.earliest_known if early else b.latest_known for b in bands], bool)
