"""Fuse-links as edges of a band: melting at the earliest, arc out at the latest, by the standard's gates."""

from __future__ import annotations

from typing import Final

import numpy as np

from study.formulas.fuses_iec60269 import CONVENTIONAL_S, GATES, latest_melting_points
from study.formulas.table_files import numeric_table
from study.formulas.trip_law import Edge

# gG does not melt at 1.25 times rated current within the conventional time: IEC 60269-1, from memory.
NO_FUSING_MULTIPLE: Final = 1.25
# aM: does not melt sooner than these times at these multiples: IEC 60269-2, gates of aM, from memory.
AM_EARLIEST: Final = ((4.0, 60.0), (8.0, 0.5), (10.0, 0.2))
Points = tuple[tuple[float, float], ...]


def earliest_melting_points(rated_a: float, fuse_class: str) -> Points:
    """Return currents and the times within which a fuse-link has not melted, longest time first.

    Source: IEC 60269-1, conventional non-fusing current and gates of gG fuse-links; IEC 60269-2, gates of aM;
    both from memory. The last point of gG comes from the least I2t, its time being 0.01 s.

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
    >>> earliest_melting_points(100.0, "gG")[:2], earliest_melting_points(100.0, "aM")[0]
    (((125.0, 7200.0), (290.0, 10.0)), (400.0, 60.0))
    """
    if fuse_class == "aM":
        return tuple((multiple * rated_a, time_s) for multiple, time_s in AM_EARLIEST)
    if fuse_class != "gG":
        raise ValueError(f"no gates for fuse class {fuse_class!r}")
    row = numeric_table(GATES, "rated_a").get(float(rated_a))
    if row is None:
        raise ValueError(f"no gates for a gG fuse of {rated_a:g} A")
    hold_s = next(time_s for up_to_a, time_s in CONVENTIONAL_S if rated_a <= up_to_a)
    last_a = float(np.sqrt(row["i2t_min_a2s"] / 0.01))
    first = (NO_FUSING_MULTIPLE * rated_a, hold_s)
    return (first, (row["imin_10s_a"], 10.0), (row["imin_01s_a"], 0.1), (last_a, 0.01))


def fuse_edges(rated_a: float, fuse_class: str) -> tuple[Edge, Edge]:
    """Return the edges of a standard fuse-link from its gates.

    The time of the arc is left out: from 0.1 s up it is negligible beside the melting, and below that the
    greatest operating I2t stays within the corridor of the standard.

    Source: IEC 60269-1 (gates, arcing from 0.1 s up) and IEC 60269-2 (operating I2t for discrimination); from
    memory.

    Parameters
    ----------
    rated_a : float
        A rated current of the standard. [A]
    fuse_class : str
        ``gG`` or ``aM``.

    Returns
    -------
    tuple of Edge
        Earliest, latest.

    Raises
    ------
    ValueError
        A rated current that the standard does not list, or an unknown class.

    Examples
    --------
    >>> early, late = fuse_edges(100.0, "gG")
    >>> round(float(early.time_s(820.0)), 3), round(float(late.time_s(1450.0)), 3)
    (0.1, 0.1)
    """
    early = earliest_melting_points(rated_a, fuse_class)
    late = latest_melting_points(rated_a, fuse_class)
    return (
        curve_edge(early, "fuse", early=True, beyond=2.0),
        curve_edge(late, "fuse", early=False, beyond=2.0),
    )


def curve_edge(points: Points, stage: str, *, early: bool, beyond: float) -> Edge:
    """Return points in ampere as an edge; below the first nothing operates.

    The earliest edge heats on the whole current, direct component included, and holds its heat; the latest
    counts on the symmetrical current alone, without a break.

    Source: definition.

    Parameters
    ----------
    points : tuple of (float, float)
        Current, ascending, and time. [A], [s]
    stage : str
        Name.
    early : bool
        Whether it is the earliest edge.
    beyond : float
        Exponent beyond the last point: 2 holds I2t, 0 the time.

    Returns
    -------
    Edge
        One side of a band.

    Examples
    --------
    >>> late = curve_edge(((200.0, 100.0), (1000.0, 0.1)), "fuse", early=False, beyond=2.0)
    >>> float(late.time_s(150.0)), late.sees
    (inf, 'symmetrical')
    """
    return Edge(
        stage=stage,
        law="points",
        from_a=points[0][0],
        setting_a=1.0,
        figures=(beyond,),
        points=points,
        sees="heating" if early else "symmetrical",
        memory="holds" if early else "resets",
    )
