"""Thermal overload relays by trip class, and the contactors that they open."""

from __future__ import annotations

from types import MappingProxyType
from typing import Final

import numpy as np

from study.formulas.curves_iec60255 import OVERLOAD_CLASS_AT, OVERLOAD_CLASS_S, ULTIMATE_TRIP
from study.formulas.trip_law import Edge

# Shortest time from cold at 7.2 times the setting of each class [s]; longest from warm at 1.5 times [s]; no
# trip within 2 h at 1.05 times, trip within 2 h at 1.2 times: IEC 60947-4-1, tables 2 and 3, from memory.
CLASS_EARLIEST_S: Final = MappingProxyType({"5": 0.5, "10A": 2.0, "10": 4.0, "20": 6.0, "30": 9.0})
CLASS_WARM_S: Final = MappingProxyType({"5": 120.0, "10A": 120.0, "10": 240.0, "20": 480.0, "30": 720.0})
WARM_AT: Final = 1.5
NO_TRIP: Final = 1.05
# A contactor has dropped out and broken the current within this time of the relay's contact; common practice,
# no source.
CONTACTOR_OPENS_S: Final = 0.1
# A contactor of utilisation category AC-3 breaks 8 times its rated operational current: IEC 60947-4-1,
# table 7, from memory. Above that the breaker or fuse before it must clear.
CONTACTOR_BREAKS: Final = 8.0
# A contactor drops out at 20 to 75 % of its control voltage: IEC 60947-4-1, clause 8.2.1.2, from memory.
DROP_OUT_PU: Final = (0.20, 0.75)


def time_constant_s(class_time_s: float, trips_at: float) -> float:
    """Return the time constant of the body that trips at a given time at 7.2 times the setting, from cold.

    Source: ``t = tau ln(M²/(M² - k²))`` solved for tau.

    Parameters
    ----------
    class_time_s : float
        Time at 7.2 times the setting. [s]
    trips_at : float
        k, the multiple that just trips.

    Returns
    -------
    float
        [s]

    Examples
    --------
    >>> [round(time_constant_s(t, 1.15)) for t in (10.0, 20.0, 30.0)]
    [387, 774, 1161]
    """
    return float(class_time_s / -np.log1p(-((trips_at / OVERLOAD_CLASS_AT) ** 2)))


def overload_relay_edges(
    setting_a: float, trip_class: str, *, breaks_up_to_a: float, preload: float = 0.0
) -> tuple[Edge, Edge]:
    """Return the edges of a thermal overload relay with its contactor, one heated body for each.

    The earliest edge runs through the shortest time of the class and just trips at 1.05 times the setting,
    the latest through the longest and just trips at 1.2 times, from cold. Above what the contactor breaks the
    latest edge ends: the relay is then not counted on.

    Source: IEC 60947-4-1, tables 2 and 3, from memory; heating law of one body.

    Parameters
    ----------
    setting_a : float
        [A]
    trip_class : str
        ``5``, ``10A``, ``10``, ``20`` or ``30``.
    breaks_up_to_a : float
        What the contactor breaks. [A]
    preload : float
        Load before, as a multiple of the setting, for the earliest edge; not above 1.

    Returns
    -------
    tuple of Edge
        Earliest, latest.

    Raises
    ------
    ValueError
        An unknown class.

    Examples
    --------
    >>> early, late = overload_relay_edges(10.0, "10", breaks_up_to_a=100.0)
    >>> [round(float(edge.time_s(72.0)), 3) for edge in (early, late)]
    [4.0, 10.0]
    """
    if trip_class not in CLASS_EARLIEST_S:
        raise ValueError(f"no times for an overload relay of class {trip_class!r}")
    early = Edge(
        stage="overload relay",
        law="heating",
        from_a=NO_TRIP * setting_a,
        setting_a=setting_a,
        figures=(time_constant_s(CLASS_EARLIEST_S[trip_class], NO_TRIP), NO_TRIP, min(preload, 1.0)),
        sees="heating",
        memory="cools",
    )
    late = Edge(
        stage="overload relay",
        law="heating",
        from_a=ULTIMATE_TRIP * setting_a,
        setting_a=setting_a,
        figures=(time_constant_s(OVERLOAD_CLASS_S[trip_class], ULTIMATE_TRIP), ULTIMATE_TRIP, 0.0),
        up_to_a=breaks_up_to_a,
        memory="cools",
    )
    return early, late
