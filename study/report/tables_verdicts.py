"""Verdicts: the grid of subjects against modes, the governing figures, and every judged quantity."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from study.checks.verdict import STATUS_ORDER, Status, Verdict, worst
from study.report.content import StudyOutcome
from study.report.findings import NEVER_CLEARED, findings, is_fault, is_plain_fact, remarks
from study.report.numbers import judged_pair, percent, quantity
from study.report.tables import (
    Column,
    Table,
    Value,
    cell_column,
    make_table,
    percent_column,
    text_column,
    verdict_column,
)

SUBJECTS: Final = (
    "capacity",
    "loading",
    "voltage",
    "frequency",
    "kW sharing",
    "kvar sharing",
    "cables",
    "regulation",
    "fault ratings",
    "grading",
    "set protection",
    "dips",
    "harmonics",
)
_OF_LOAD_FLOW: Final = ("voltage", "frequency", "cables")
VESSEL: Final = "vessel"
_SHEET = "R Summary"
_SHOWN = 3
_NEAREST = 3  # verdicts within their limit that are listed for each quantity, mode and subject


@dataclass(frozen=True, slots=True, kw_only=True)
class GridCell:
    """One subject in one mode: the status of its governing verdict and the figure behind it."""

    status: Status
    figure: str
    equipment: str
    judged: int
    exceeding: int


@dataclass(frozen=True, slots=True, kw_only=True)
class VerdictGrid:
    """Subjects down, modes across; a cell is None where there is nothing to judge."""

    subjects: tuple[str, ...]
    columns: tuple[str, ...]
    cells: tuple[tuple[GridCell | None, ...], ...]


def verdict_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return findings, governing figures, every judged quantity and the remarks of the analyses.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    return (
        findings_table(outcome),
        governing_table(outcome),
        verdicts_table(outcome),
        remarks_table(outcome),
    )


def subjects_of(outcome: StudyOutcome) -> tuple[str, ...]:
    """Return the subjects that have a verdict, known ones first, in the order of the grid."""
    used = dict.fromkeys(v.subject for v in outcome.verdicts)
    return tuple(s for s in SUBJECTS if s in used) + tuple(s for s in used if s not in SUBJECTS)


def _by_place(outcome: StudyOutcome) -> dict[tuple[str, str], list[Verdict]]:
    """Return verdicts by subject and mode, in the order of the grid, worst first."""
    modes = (*outcome.modes, *dict.fromkeys(v.mode for v in outcome.verdicts if v.mode not in outcome.modes))
    places: dict[tuple[str, str], list[Verdict]] = {(s, m): [] for s in subjects_of(outcome) for m in modes}
    for v in outcome.verdicts:
        places[v.subject, v.mode].append(v)
    return {place: sorted(found, key=_worst_first) for place, found in places.items() if found}


def _worst_first(v: Verdict) -> tuple[int, float]:
    return STATUS_ORDER.index(v.status), math.inf if math.isnan(v.margin) else v.margin


def verdict_grid(outcome: StudyOutcome) -> VerdictGrid:
    """Return the grid of the first page.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    VerdictGrid
        Columns are the modes, and ``vessel`` where a verdict is about the vessel itself.
    """
    places = _by_place(outcome)
    extra = tuple(dict.fromkeys(m for _, m in places if m not in outcome.modes))
    keys = (*outcome.modes, *extra)
    subjects = subjects_of(outcome)
    return VerdictGrid(
        subjects=subjects,
        columns=tuple(m or VESSEL for m in keys),
        cells=tuple(
            tuple(_grid_cell(places.get((s, m), ())) or _unsolved(outcome, s, m) for m in keys)
            for s in subjects
        ),
    )


def _unsolved(outcome: StudyOutcome, subject: str, mode: str) -> GridCell | None:
    """Return an open cell where the mode has no load flow to judge; None where nothing is to be judged."""
    unsolved = any(flow.mode == mode and not flow.solved for flow in outcome.load_flow.modes)
    if not unsolved or subject not in _OF_LOAD_FLOW:
        return None
    return GridCell(
        status="not assessed", figure="no solution", equipment="whole plant", judged=0, exceeding=0
    )


def _grid_cell(verdicts: Sequence[Verdict]) -> GridCell | None:
    governing = worst(tuple(verdicts))
    if governing is None:
        return None
    missing = sum(v.status == "not assessed" for v in verdicts)
    figure = figure_text(governing)
    if governing.status == "not assessed":
        assessed = worst(tuple(v for v in verdicts if v.status != "not assessed"))
        figure = f"{missing} of {len(verdicts)}"
        figure += f"; worst of the others {figure_text(assessed)}" if assessed else ""
    return GridCell(
        status=governing.status,
        figure=figure,
        equipment=governing.equipment,
        judged=len(verdicts),
        exceeding=sum(v.status == "exceeds" for v in verdicts),
    )


def figure_text(v: Verdict) -> str:
    """Return the figure of a verdict: value, and limit in brackets.

    Parameters
    ----------
    v : Verdict
        The verdict.

    Returns
    -------
    str
        For example ``81.3 % (max 100 %)``.
    """
    if is_plain_fact(v):
        return v.quantity if v.status == "exceeds" else "none"
    if math.isinf(v.value):
        return NEVER_CLEARED if is_fault(v) else "no source left"
    if v.status == "exceeds":
        value, limit = judged_pair(v.value, v.limit, exceeds=True)
    else:
        value, limit = quantity(v.value, "", _decimals(v)), quantity(v.limit, "")
    unit = f" {v.unit}" if v.unit not in ("", "-") else ""
    word = "max" if v.sense == "at most" else "min"
    return f"{value}{unit} ({word} {limit}{unit})"


def _decimals(v: Verdict) -> int | None:
    return 1 if math.isfinite(v.value) and 10 <= abs(v.value) < 1000 else None


JUDGED_COLUMNS = (
    Column(key="value", heading="Value", kind="judged", infinite="no source left"),
    Column(key="limit", heading="Limit", kind="judged"),
    text_column("unit", "Unit"),
    text_column("sense", "Limit is"),
    percent_column("margin_percent", "Margin", against=0.0),
    verdict_column(),
)
"""Columns of a judged quantity, for tables of verdicts."""


def judged_values(v: Verdict) -> tuple[Value, ...]:
    """Return the cells of `JUDGED_COLUMNS` of one verdict."""
    factor, unit = (100.0, "%") if v.unit == "pu" else (1.0, v.unit)
    if is_plain_fact(v):
        return None, None, None, v.sense, None, v.status
    margin = percent(v.margin) if v.limit != 0.0 and not math.isinf(v.margin) else None
    value = NEVER_CLEARED if math.isinf(v.value) and is_fault(v) else factor * v.value
    return value, factor * v.limit, unit, v.sense, margin, v.status


def verdicts_table(outcome: StudyOutcome) -> Table:
    """Return every judged quantity, worst first within its subject and mode."""
    columns = [
        text_column("subject", "Subject"),
        text_column("mode", "Mode"),
        text_column("equipment", "Equipment"),
        text_column("quantity", "Quantity", kind="long text"),
        *JUDGED_COLUMNS,
        Column(key="depends_on_data", heading="Depends on data", kind="text"),
        text_column("basis", "Basis", kind="long text"),
        cell_column(),
    ]
    rows = [
        (
            subject,
            mode or VESSEL,
            v.equipment,
            v.quantity,
            *judged_values(v),
            v.depends_on_data,
            v.basis,
            v.cell,
        )
        for (subject, mode), found in _by_place(outcome).items()
        for v in _listed(found)
    ]
    return make_table(
        key="verdicts",
        title="Judged quantities",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Margin is the distance to the limit in % of it, positive inside. 'Depends on data': the verdict "
            "flips within the tolerance of the data behind it.",
            f"Of {len(outcome.verdicts)} judged quantities {len(rows)} are listed: all that are not within "
            f"their limit, and of the others the {_NEAREST} nearest to it for each quantity. Other tables "
            "hold every value with its verdict.",
        ),
        group_by=("subject", "mode"),
        shown_per_group=_SHOWN,
    )


def _listed(found: Sequence[Verdict]) -> list[Verdict]:
    """Return what is listed of the verdicts of one subject and mode, which are in order, worst first."""
    within: Counter[str] = Counter()
    listed = []
    for v in found:
        within[v.quantity] += v.status == "within"
        if v.status != "within" or within[v.quantity] <= _NEAREST:
            listed.append(v)
    return listed


def governing_table(outcome: StudyOutcome) -> Table:
    """Return the governing verdict of each subject in each mode."""
    columns = [
        text_column("subject", "Subject"),
        text_column("mode", "Mode"),
        text_column("equipment", "Equipment"),
        text_column("quantity", "Quantity", kind="long text"),
        *JUDGED_COLUMNS,
        Column(key="judged_count", heading="Judged", kind="count"),
        Column(key="exceeding_count", heading="Exceeding", kind="count"),
        Column(key="not_assessed_count", heading="Not assessed", kind="count"),
        text_column("basis", "Basis", kind="long text"),
        cell_column(),
    ]
    rows = []
    for (subject, mode), found in _by_place(outcome).items():
        v = found[0]
        rows.append(
            (
                subject,
                mode or VESSEL,
                v.equipment,
                v.quantity,
                *judged_values(v),
                len(found),
                sum(x.status == "exceeds" for x in found),
                sum(x.status == "not assessed" for x in found),
                v.basis,
                v.cell,
            )
        )
    return make_table(
        key="governing_verdicts",
        title="Governing verdict of each subject and mode",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
    )


def findings_table(outcome: StudyOutcome) -> Table:
    """Return the findings, worst first, in sentences."""
    columns = [
        verdict_column(),
        text_column("subject", "Subject"),
        text_column("where", "Where"),
        text_column("finding", "Finding", kind="long text"),
        text_column("basis", "Basis", kind="long text"),
        text_column("remedy", "What would cure it", kind="long text"),
        Column(key="depends_on_data", heading="Depends on data", kind="text"),
        cell_column(),
    ]
    rows = [
        (f.status, f.subject, f.where, f.sentence, f.basis, f.remedy, f.depends_on_data, f.cell)
        for f in findings(outcome)
    ]
    return make_table(
        key="findings",
        title="Findings, worst first",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
    )


def remarks_table(outcome: StudyOutcome) -> Table:
    """Return the remarks of the workbook's reader and of the analyses."""
    return make_table(
        key="remarks",
        title="Remarks of the reader of the workbook and of the analyses",
        sheet=_SHEET,
        columns=[
            text_column("source", "From"),
            text_column("where", "Where"),
            text_column("remark", "Remark", kind="long text"),
        ],
        rows=[(r.source, r.where, r.text) for r in remarks(outcome)],
    )
