"""The one verdict type: a value against a limit, judged unrounded."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

Status = Literal["within", "close", "exceeds", "not assessed"]
Sense = Literal["at most", "at least"]
STATUS_ORDER: tuple[Status, ...] = ("exceeds", "not assessed", "close", "within")


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """One judged quantity.

    Attributes
    ----------
    mode, subject, equipment, quantity : str
        Where and what; `subject` is a row of the verdict grid, for example ``loading``.
    value, limit : float
        In `unit`; NaN where there is none.
    sense : str
        Whether the limit is an upper or a lower one.
    margin : float
        Distance to the limit as a fraction of it, positive inside.
    status : str
        ``within``, ``close``, ``exceeds`` or ``not assessed``.
    depends_on_data : bool
        True where the verdict flips within the tolerance of the data behind it.
    basis : str
        Rule or standard, marked where the project agreed another value.
    cell : str
        Governing input cell as ``Sheet!A1``, or empty.
    remedy : str
        What would cure it, in one sentence; empty where nothing needs doing.
    """

    mode: str
    subject: str
    equipment: str
    quantity: str
    value: float
    limit: float
    unit: str
    sense: Sense
    margin: float
    status: Status
    depends_on_data: bool
    basis: str
    cell: str
    remedy: str


def judge(value: float, limit: float, sense: Sense, close_margin: float) -> tuple[Status, float]:
    """Judge one unrounded value.

    Parameters
    ----------
    value, limit : float
        In the same unit.
    sense : {'at most', 'at least'}
        Kind of limit.
    close_margin : float
        Fraction of the limit inside which a value that holds is called close.

    Returns
    -------
    status : str
        The word of the verdict.
    margin : float
        (limit - value) / |limit| for an upper limit, the reverse for a lower one; the plain difference
        where the limit is zero, and 1 or -1 where it is infinite.

    Examples
    --------
    >>> judge(95.0, 100.0, "at most", 0.10)
    ('close', 0.05)
    >>> judge(100.0, 100.0, "at most", 0.10)[0]
    'close'
    >>> judge(float("nan"), 100.0, "at most", 0.10)[0]
    'not assessed'
    """
    if math.isnan(value) or math.isnan(limit):
        return "not assessed", math.nan
    distance = limit - value if sense == "at most" else value - limit
    if math.isinf(limit):
        margin = math.copysign(1.0, distance) if not math.isnan(distance) else -1.0
    else:
        margin = distance / abs(limit) if limit else distance
    if margin < 0:
        return "exceeds", margin
    return ("close" if margin < close_margin else "within"), margin


def make_verdict(
    *,
    mode: str,
    subject: str,
    equipment: str,
    quantity: str,
    value: float,
    limit: float,
    unit: str,
    close_margin: float,
    basis: str,
    sense: Sense = "at most",
    data_tolerance: float = 0.0,
    cell: str = "",
    remedy: str = "",
) -> Verdict:
    """Judge a value and return the whole verdict.

    Parameters
    ----------
    mode, subject, equipment, quantity, unit, basis, cell : str
        As in `Verdict`.
    value, limit : float
        In `unit`.
    close_margin : float
        Fraction of the limit inside which a value that holds is called close.
    sense : {'at most', 'at least'}
        Kind of limit.
    data_tolerance : float
        Relative tolerance of the data behind `value`; the verdict depends on the data where a value this much
        higher or lower would cross the limit.
    remedy : str
        What would cure it; kept only where the value exceeds its limit.

    Returns
    -------
    Verdict
    """
    status, margin = judge(value, limit, sense, close_margin)
    exceeds = {
        judge(value * (1.0 + sign * data_tolerance), limit, sense, close_margin)[0] == "exceeds"
        for sign in (-1.0, 0.0, 1.0)
    }
    return Verdict(
        mode=mode,
        subject=subject,
        equipment=equipment,
        quantity=quantity,
        value=value,
        limit=limit,
        unit=unit,
        sense=sense,
        margin=margin,
        status=status,
        depends_on_data=len(exceeds) > 1,
        basis=basis,
        cell=cell,
        remedy=remedy if status == "exceeds" else "",
    )


def worst(verdicts: tuple[Verdict, ...]) -> Verdict | None:
    """Return the governing verdict: worst status first, then the smallest margin; None for none."""
    if not verdicts:
        return None
    return min(verdicts, key=lambda v: (STATUS_ORDER.index(v.status), _margin_key(v)))


def _margin_key(verdict: Verdict) -> float:
    return math.inf if math.isnan(verdict.margin) else verdict.margin
