"""Overcurrent relays as edges of a band: dependent and definite time, current transformers."""

from __future__ import annotations

from typing import Final, Literal

from study.formulas.curves_iec60255 import INVERSE_CURVES, RESET_S
from study.formulas.trip_law import Edge, Memory

Reset = Literal["at once", "decaying"]
DEFINITE: Final = "definite time"


def relay_edges(
    curve: str,
    setting_a: float,
    multiplier: float,
    *,
    reset: Reset = "at once",
    current_tolerance: float,
    time_tolerance: float,
    opens_s: float,
    breaks_s: float,
) -> tuple[Edge, Edge]:
    """Return the edges of a relay with a dependent-time curve, flat above 20 times the setting.

    The tolerance of the setting shifts the multiple M, that of the time the whole curve. A reset that decays
    is that of IEEE C37.112 in proportion to the multiplier.

    Source: IEC 60255-151:2009 and IEEE C37.112-1996, from memory; see `curves_iec60255`.

    Parameters
    ----------
    curve : str
        One of `INVERSE_CURVES`.
    setting_a : float
        In primary ampere. [A]
    multiplier : float
        Time multiplier or time dial.
    reset : str
        ``at once`` or ``decaying`` (IEEE curves).
    current_tolerance, time_tolerance : float
        0..1, plus and minus.
    opens_s, breaks_s : float
        From relay contact to breaker contacts apart at the earliest, to arc out at the latest. [s]

    Returns
    -------
    tuple of Edge
        Earliest, latest.

    Raises
    ------
    ValueError
        The curve is not known, or has no reset law.

    Examples
    --------
    >>> early, late = relay_edges("standard inverse", 500.0, 0.3, current_tolerance=0.0, time_tolerance=0.05,
    ...                           opens_s=0.0, breaks_s=0.0)
    >>> [round(float(edge.time_s(5000.0)), 3) for edge in (early, late)]
    [0.847, 0.936]
    """
    if curve not in INVERSE_CURVES:
        raise ValueError(f"no constants for the relay curve {curve!r}")
    if reset == "decaying" and curve not in RESET_S:
        raise ValueError(f"{curve}: the reset of this curve is the maker's; no law is given")
    memory: Memory = "decays" if reset == "decaying" else "resets"
    edges = [
        Edge(
            stage="relay curve",
            law="inverse",
            from_a=(1.0 + sign * current_tolerance) * setting_a,
            setting_a=(1.0 + sign * current_tolerance) * setting_a,
            figures=((1.0 + sign * time_tolerance) * multiplier, *INVERSE_CURVES[curve]),
            after_s=after,
            memory=memory,
            reset_s=multiplier * RESET_S.get(curve, 0.0),
        )
        for sign, after in ((-1.0, opens_s), (1.0, breaks_s))
    ]
    return edges[0], edges[1]


def secondary_a(primary_a: float, ct_primary_a: float, ct_secondary_a: float) -> float:
    """Return a setting in the relay's own ampere: primary current by the ratio of the current transformer.

    Source: definition.

    Parameters
    ----------
    primary_a : float
        [A]
    ct_primary_a, ct_secondary_a : float
        Rated currents of the transformer. [A]

    Returns
    -------
    float
        [A]

    Examples
    --------
    >>> secondary_a(500.0, 400.0, 5.0)
    6.25
    """
    return primary_a * ct_secondary_a / ct_primary_a
