"""One verdict on a fault rating: the data behind it is the reactances of the machines."""

from __future__ import annotations

import math
from dataclasses import replace

from study.checks.limits import Limits
from study.checks.verdict import Sense, Verdict, judge, make_verdict

SUBJECT = "fault ratings"


def rating_verdict(
    *,
    mode: str,
    equipment: str,
    quantity: str,
    value: float,
    limit: float,
    limits: Limits,
    basis: str,
    unit: str = "kA",
    sense: Sense = "at most",
    nominal: float = 1.0,
    cell: str = "",
    remedy: str = "",
    unknown: str = "",
) -> Verdict:
    """Judge a fault duty against a rating.

    Parameters
    ----------
    mode, equipment, quantity, value, limit, unit, sense, basis, cell, remedy
        As in `make_verdict`.
    limits : Limits
        For the close margin.
    nominal : float
        The value without the tolerance of the reactances over the value with it: the verdict depends on the
        data where one exceeds and the other does not.
    unknown : str
        Sets on whose sustained current the value rests without its being given: it is then not assessed.

    Returns
    -------
    Verdict
        Subject ``fault ratings``.
    """
    margin = limits.fraction("close_margin")
    verdict = make_verdict(
        mode=mode,
        subject=SUBJECT,
        equipment=equipment,
        quantity=quantity,
        value=value,
        limit=limit,
        unit=unit,
        sense=sense,
        close_margin=margin,
        basis=basis,
        cell=cell,
        remedy=remedy,
    )
    if unknown:
        return not_assessed(verdict, unknown)
    at_nominal = judge(value * nominal, limit, sense, margin)[0]
    if (at_nominal == "exceeds") == (verdict.status == "exceeds"):
        return verdict
    return replace(verdict, depends_on_data=True)


def not_assessed(verdict: Verdict, sets: str) -> Verdict:
    """Return a verdict as not assessed: its value rests on a sustained current that is not given.

    Parameters
    ----------
    verdict : Verdict
        As it would be with what stands in for it.
    sets : str
        Names of the sets.

    Returns
    -------
    Verdict
        With the reason in its basis.
    """
    return replace(
        verdict,
        status="not assessed",
        margin=math.nan,
        depends_on_data=False,
        basis=f"{verdict.basis}; rests on the sustained short-circuit current of {sets}, which is not given",
        remedy="",
    )
