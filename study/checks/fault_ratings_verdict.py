"""One verdict on a fault rating: the data behind it is the reactances of the machines."""

from __future__ import annotations

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
    at_nominal = judge(value * nominal, limit, sense, margin)[0]
    if (at_nominal == "exceeds") == (verdict.status == "exceeds"):
        return verdict
    return replace(verdict, depends_on_data=True)
