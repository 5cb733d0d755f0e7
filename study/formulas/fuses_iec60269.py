"""Longest melting time of standard fuse-links: the gates that every maker's fuse must pass."""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.table_files import numeric_table

FloatArray = NDArray[np.float64]

GATES: Final = "fuse_gates_iec60269"
# aM: melts within these times at these multiples of rated current; IEC 60269-2, gates of aM, from memory.
AM_LATEST: Final = ((6.3, 60.0), (12.5, 0.5), (19.0, 0.1))
# gG: melts at 1.6 times rated current within the conventional time [s] of its size, up to each rated current;
# IEC 60269-1, conventional times, from memory.
FUSING_MULTIPLE: Final = 1.6
CONVENTIONAL_S: Final = ((63.0, 3600.0), (160.0, 7200.0), (400.0, 10800.0), (1250.0, 14400.0))


def latest_melting_points(rated_a: float, fuse_class: str) -> tuple[tuple[float, float], ...]:
    """Return currents and the times within which a fuse-link has melted, longest time first.

    Source: IEC 60269-1, conventional fusing current and gates of gG fuse-links; IEC 60269-2, gates of aM;
    both from memory. The last point of gG comes from the greatest I2t, its time being 0.01 s.

    Parameters
    ----------
    rated_a : float
        A rated current of the standard. [A]
    fuse_class : str
        ``gG`` or ``aM``.

    Returns
    -------
    tuple of (float, float)
        Current and time. [A], [s]

    Raises
    ------
    ValueError
        A rated current that the standard does not list, or an unknown class.

    Examples
    --------
    >>> latest_melting_points(100.0, "gG")[:2], latest_melting_points(100.0, "aM")[-1]
    (((160.0, 7200.0), (580.0, 5.0)), (1900.0, 0.1))
    """
    if fuse_class == "aM":
        return tuple((multiple * rated_a, time_s) for multiple, time_s in AM_LATEST)
    if fuse_class != "gG":
        raise ValueError(f"no gates for fuse class {fuse_class!r}")
    row = numeric_table(GATES, "rated_a").get(float(rated_a))
    if row is None:
        raise ValueError(f"no gates for a gG fuse of {rated_a:g} A")
    slowest_s = next(time_s for up_to_a, time_s in CONVENTIONAL_S if rated_a <= up_to_a)
    last_a = float(np.sqrt(row["i2t_max_a2s"] / 0.01))
    first = (FUSING_MULTIPLE * rated_a, slowest_s)
    return (first, (row["imax_5s_a"], 5.0), (row["imax_01s_a"], 0.1), (last_a, 0.01))


def latest_melting_time_s(current_a: ArrayLike, points: tuple[tuple[float, float], ...]) -> FloatArray:
    """Return the time within which a fuse-link has melted.

    Straight lines between the points in double-logarithmic scale, constant I2t above the last, and no melting
    taken for granted below the first.

    Source: follows from the gates; interpolation is common practice, no source.

    Parameters
    ----------
    current_a : array_like
        r.m.s. [A]
    points : tuple of (float, float)
        From `latest_melting_points`.

    Returns
    -------
    FloatArray
        [s]

    Examples
    --------
    >>> points = latest_melting_points(100.0, "gG")
    >>> [round(float(t), 3) for t in latest_melting_time_s([150.0, 580.0, 1450.0], points)]
    [inf, 5.0, 0.1]
    """
    current = np.maximum(np.asarray(current_a, float), 1e-9)
    amps, seconds = (np.array(column) for column in zip(*points, strict=True))
    inside = np.exp(np.interp(np.log(current), np.log(amps), np.log(seconds)))
    beyond = seconds[-1] * (amps[-1] / current) ** 2
    return np.where(current > amps[-1], beyond, np.where(current < amps[0], np.inf, inside))
