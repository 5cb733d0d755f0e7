"""Stages of low-voltage circuit breakers as edges of a band: overload, short-time, instantaneous."""

from __future__ import annotations

from dataclasses import replace
from typing import Final, Literal

from study.formulas.trip_law import Edge

# Conventional non-tripping and tripping current of overload releases, as multiples of Ir; within 1 h up to
# 63 A, else 2 h: IEC 60947-2, clause 7.2.1.2.4, from memory.
NO_TRIP: Final = 1.05
TRIP: Final = 1.30
CONVENTIONAL_UP_TO_A: Final = 63.0
# Short-circuit releases: must hold at 80 % and trip at 120 % of the setting: IEC 60947-2, clause 8.3.3.1.2,
# from memory.
SHORT_CIRCUIT_TOLERANCE: Final = 0.20
# An I2t ramp of the short-time stage ends at this multiple of Ir in the delay set; common practice, no
# source.
RAMP_ENDS_AT: Final = 10.0
EXPONENT: Final = {"I2t": 2.0, "I4t": 4.0}

Edges = tuple[Edge, Edge]


def conventional_time_s(rated_a: float) -> float:
    """Return the conventional time of overload releases and miniature breakers: 1 h up to 63 A, else 2 h.

    Source: IEC 60947-2, table 6, and IEC 60898-1, table 7; from memory.

    Parameters
    ----------
    rated_a : float
        In. [A]

    Returns
    -------
    float
        [s]

    Examples
    --------
    >>> conventional_time_s(63.0), conventional_time_s(80.0)
    (3600.0, 7200.0)
    """
    return 3600.0 if rated_a <= CONVENTIONAL_UP_TO_A else 7200.0


def long_time_edges(
    ir_a: float,
    delay_s: float,
    delay_at: float,
    *,
    law: Literal["I2t", "I4t"] = "I2t",
    time_tolerance: float,
    opens_s: float,
    breaks_s: float,
    least_s: float = 0.0,
) -> Edges:
    """Return the edges of an overload release: ``t = tr (at/M)^n``, n = 2 or 4.

    It may trip above 1.05 Ir and trips for certain from 1.30 Ir. Its delay holds while the current is below
    the setting at the earliest edge, and starts anew at the latest.

    Source: IEC 60947-2, conventional currents, from memory; I2t and I4t laws of electronic releases, common
    practice, no source.

    Parameters
    ----------
    ir_a : float
        Setting. [A]
    delay_s : float
        tr at the multiple `delay_at`. [s]
    delay_at : float
        Multiple of Ir at which the delay is stated.
    law : str
        ``I2t`` or ``I4t``.
    time_tolerance : float
        0..1, plus and minus.
    opens_s, breaks_s : float
        From release to contacts apart at the earliest, to arc out at the latest. [s]
    least_s : float
        Delay of the short-time stage at its latest: where that takes hold many releases let it end the fault,
        so that the long-time curve is not counted on below it. [s]

    Returns
    -------
    tuple of Edge
        Earliest, latest.

    Examples
    --------
    >>> early, late = long_time_edges(100.0, 10.0, 6.0, time_tolerance=0.1, opens_s=0.01, breaks_s=0.08)
    >>> [round(float(edge.time_s(600.0)), 3) for edge in (early, late)], float(late.time_s(129.0))
    ([9.0, 11.0], inf)
    """
    n = EXPONENT[law]
    at_setting = delay_s * delay_at**n
    return (
        Edge(
            stage="long-time",
            law="power",
            from_a=NO_TRIP * ir_a,
            setting_a=ir_a,
            figures=((1.0 - time_tolerance) * at_setting, n),
            after_s=opens_s,
            memory="holds",
        ),
        Edge(
            stage="long-time",
            law="power",
            from_a=TRIP * ir_a,
            setting_a=ir_a,
            figures=((1.0 + time_tolerance) * at_setting, n),
            least_s=least_s,
            after_s=breaks_s,
        ),
    )


def short_time_edges(
    isd_a: float,
    delay_s: float,
    *,
    ramp_ir_a: float | None = None,
    current_tolerance: float = SHORT_CIRCUIT_TOLERANCE,
    time_tolerance: float,
    opens_s: float,
    breaks_s: float,
    stage: str = "short-time",
) -> Edges:
    """Return the edges of a short-time delayed release, definite or with an I2t ramp.

    With a ramp the delay is ``tsd (10 Ir/I)²`` up to 10 Ir and the delay set above.

    Source: IEC 60947-2, short-circuit releases +/-20 %, from memory; ramp: common practice, no source.

    Parameters
    ----------
    isd_a : float
        Setting. [A]
    delay_s : float
        tsd. [s]
    ramp_ir_a : float, optional
        Ir of the ramp; None: a definite delay. [A]
    current_tolerance, time_tolerance : float
        0..1, plus and minus.
    opens_s, breaks_s : float
        From release to contacts apart at the earliest, to arc out at the latest. [s]
    stage : str
        Name, for example ``earth fault``.

    Returns
    -------
    tuple of Edge
        Earliest, latest.

    Examples
    --------
    >>> _, late = short_time_edges(
    ...     600.0, 0.1, ramp_ir_a=100.0, time_tolerance=0.0, opens_s=0.0, breaks_s=0.0
    ... )
    >>> late.time_s([719.0, 800.0, 2000.0]).round(4).tolist()
    [inf, 0.1562, 0.1]
    """
    edges = []
    for sign, after in ((-1.0, opens_s), (1.0, breaks_s)):
        delay = (1.0 + sign * time_tolerance) * delay_s
        ramp = ramp_ir_a is not None and delay_s > 0.0
        edges.append(
            Edge(
                stage=stage,
                law="power" if ramp else "constant",
                from_a=(1.0 + sign * current_tolerance) * isd_a,
                setting_a=RAMP_ENDS_AT * ramp_ir_a if ramp and ramp_ir_a is not None else isd_a,
                figures=(delay, 2.0) if ramp else (delay,),
                least_s=delay if ramp else 0.0,
                after_s=after,
            )
        )
    return edges[0], edges[1]


def instantaneous_edges(
    ii_a: float,
    *,
    senses: Literal["rms", "peak"],
    current_tolerance: float = SHORT_CIRCUIT_TOLERANCE,
    opens_s: float,
    breaks_s: float,
) -> Edges:
    """Return the edges of an instantaneous release.

    One that senses the peak, as magnetic releases do, may trip on ip/sqrt2; it trips for certain on the
    symmetrical current.

    Source: IEC 60947-2, short-circuit releases +/-20 %, from memory.

    Parameters
    ----------
    ii_a : float
        Setting, r.m.s. [A]
    senses : str
        ``rms`` or ``peak``.
    current_tolerance : float
        0..1, plus and minus.
    opens_s, breaks_s : float
        From release to contacts apart at the earliest, to arc out at the latest. [s]

    Returns
    -------
    tuple of Edge
        Earliest, latest.

    Examples
    --------
    >>> early, late = instantaneous_edges(1000.0, senses="peak", opens_s=0.01, breaks_s=0.02)
    >>> early.from_a, early.sees, late.from_a, late.sees
    (800.0, 'peak', 1200.0, 'symmetrical')
    """
    edges = short_time_edges(
        ii_a,
        0.0,
        current_tolerance=current_tolerance,
        time_tolerance=0.0,
        opens_s=opens_s,
        breaks_s=breaks_s,
        stage="instantaneous",
    )
    return (replace(edges[0], sees="peak") if senses == "peak" else edges[0]), edges[1]
