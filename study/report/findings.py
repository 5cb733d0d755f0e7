"""Verdicts in plain sentences, equal ones of several modes drawn together, worst first."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from study.checks.verdict import STATUS_ORDER, Status, Verdict, worst
from study.report.content import StudyOutcome
from study.report.numbers import judged_pair, percent, quantity, significant_decimals

_NAMED = 8


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """What was found, where, by how much, by which rule, which cell governs, and what would cure it.

    ``modes`` is empty where the finding is about the vessel itself.
    """

    status: Status
    subject: str
    equipment: str
    modes: tuple[str, ...]
    where: str
    sentence: str
    basis: str
    cell: str
    remedy: str
    depends_on_data: bool


def findings(outcome: StudyOutcome) -> tuple[Finding, ...]:
    """Return every verdict that is not within its limit as a sentence, worst first.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Finding
        First what exceeds, then what is not assessed, then what is close, each by its margin.
    """
    groups: dict[tuple[str, ...], list[Verdict]] = {}
    for v in outcome.verdicts:
        if v.status != "within":
            groups.setdefault(_group_key(v), []).append(v)
    ranked = sorted(groups.values(), key=lambda g: _rank(_worst(g)))
    return tuple(_finding(group, outcome) for group in ranked)


def _group_key(v: Verdict) -> tuple[str, ...]:
    if v.status == "not assessed":
        return (v.status, v.subject, v.quantity, v.basis)
    return (v.status, v.subject, v.equipment, v.quantity, v.basis, v.cell)


def _worst(group: Sequence[Verdict]) -> Verdict:
    found = worst(tuple(group))
    assert found is not None
    return found


def _rank(v: Verdict) -> tuple[int, float]:
    """Order by status, then by how far beyond; a limit of zero has no ratio and comes first."""
    if math.isnan(v.margin):
        return STATUS_ORDER.index(v.status), 0.0
    return STATUS_ORDER.index(v.status), -math.inf if v.limit == 0.0 and v.margin < 0 else v.margin


def _finding(group: Sequence[Verdict], outcome: StudyOutcome) -> Finding:
    governing = _worst(group)
    modes = tuple(m for m in outcome.modes if any(v.mode == m for v in group))
    names = tuple(dict.fromkeys(v.equipment for v in group))
    equipment = listed(names)
    where = _where(modes, outcome.modes)
    sentence = f"{equipment}: {statement(governing)}"
    if len(modes) > 1 and governing.status != "not assessed":
        sentence += f" Worst in {governing.mode}."
    return Finding(
        status=governing.status,
        subject=governing.subject,
        equipment=equipment,
        modes=modes,
        where=where,
        sentence=sentence,
        basis=governing.basis,
        cell=governing.cell,
        remedy=governing.remedy,
        depends_on_data=any(v.depends_on_data for v in group),
    )


def _where(modes: Sequence[str], every: Sequence[str]) -> str:
    if not modes:
        return "Vessel"
    if len(modes) == len(every) > 1:
        return "Every mode"
    return ", ".join(modes)


def listed(names: Sequence[str], most: int = _NAMED) -> str:
    """Return names as a list in words, cut where it grows long.

    Parameters
    ----------
    names : sequence of str
        The names.
    most : int
        Names shown [1].

    Returns
    -------
    str
        The text.

    Examples
    --------
    >>> listed(["A", "B", "C"], most=2)
    'A, B and 1 more'
    """
    if len(names) > most:
        return f"{', '.join(names[:most])} and {len(names) - most} more"
    return ", ".join(names)


def is_plain_fact(v: Verdict) -> bool:
    """Return whether a verdict states a fact that should not be, and no quantity against a limit."""
    return v.unit == "-" and v.limit == 0.0


NEVER_CLEARED = "never cleared"


def is_fault(v: Verdict) -> bool:
    """Return whether a verdict is about a fault, where a value without end is a fault that stays."""
    return v.subject in ("fault ratings", "grading")


def statement(v: Verdict) -> str:
    """Return a verdict as a sentence without its equipment.

    Parameters
    ----------
    v : Verdict
        The verdict.

    Returns
    -------
    str
        One sentence.
    """
    name = v.quantity.removesuffix(f", {v.sense}")
    if v.status == "not assessed":
        return f"{name} is not assessed: {v.basis}."
    if is_plain_fact(v):
        return f"{name}."
    if math.isinf(v.value):
        return f"{name}: {NEVER_CLEARED if is_fault(v) else 'no source is left to carry it'}."
    value, limit = judged_pair(v.value, v.limit, exceeds=v.status == "exceeds")
    unit = f" {v.unit}" if v.unit not in ("", "-") else ""
    needed = "allowed" if v.sense == "at most" else "required"
    return f"{name} is {value}{unit}, {v.sense} {limit}{unit} is {needed}{_by(v)}."


def _by(v: Verdict) -> str:
    if v.limit == 0.0 or not math.isfinite(v.margin):
        return ""
    distance = percent(abs(v.margin))
    text = quantity(distance, "%", significant_decimals(distance, 2))
    return f"; {text} beyond the limit" if v.status == "exceeds" else f"; {text} to spare"


@dataclass(frozen=True, slots=True, kw_only=True)
class Remark:
    """A sentence that an analysis or the reader of the workbook wrote, and where it belongs."""

    source: str
    where: str
    text: str


def remarks(outcome: StudyOutcome) -> tuple[Remark, ...]:
    """Return every sentence that the workbook's reader and the analyses left, in the order of the study.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Remark
        Sentences.
    """
    found: list[Remark] = []
    for issue in outcome.plant.findings:
        found.append(Remark(source="Workbook", where=issue.address, text=f"{issue.found}; {issue.wanted}"))
    for balance in outcome.balance.modes:
        found += _remarks("Load balance", balance.mode, balance.findings)
    for flow in outcome.load_flow.modes:
        if not flow.solved:
            found.append(Remark(source="Load flow", where=flow.mode, text=f"No solution: {flow.reason}"))
        found += _remarks("Load flow", flow.mode, flow.findings)
        for live in flow.islands:
            found += _remarks("Load flow", flow.mode, live.findings)
    for row in outcome.regulation.sets:
        found += _remarks("Regulation", row.genset, row.findings)
    for island in outcome.sharing.islands:
        found += _remarks("Sharing", island.mode, island.findings)
    for left in outcome.sharing.not_studied:
        found.append(Remark(source="Sharing", where=left.mode, text=f"{', '.join(left.sets)}: {left.reason}"))
    for case in outcome.sharing.cases:
        found += _remarks("Maladjusted set", case.mode, [f"Case {case.case}: {case.sentence}"])
    found += _remarks("Grading", "", _grading(outcome))
    return tuple(dict.fromkeys(found))


def _grading(outcome: StudyOutcome) -> tuple[str, ...]:
    return () if outcome.grading is None else outcome.grading.findings


def _remarks(source: str, where: str, texts: Iterable[str]) -> list[Remark]:
    return [Remark(source=source, where=where, text=text) for text in texts]
