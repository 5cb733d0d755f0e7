"""Tables of what the study rests on: typical values, limits, methods; and what it does not cover."""

from __future__ import annotations

from typing import Final

from study.report.content import StudyOutcome
from study.report.tables import Column, Table, cell_column, make_table, text_column

_SHEET = "R Assumptions"

_SHORT_CIRCUIT: Final = (
    "Short-circuit currents",
    "Not computed yet; ratings of boards and devices are not judged.",
)
_GRADING: Final = ("Grading of protective devices", "Not computed; settings are not judged.")
_DIPS: Final = ("Voltage and frequency dips", "Events are not simulated.")
NOT_COVERED: Final = (
    ("One-line diagram", "Not drawn yet."),
    _SHORT_CIRCUIT,
    _GRADING,
    _DIPS,
    ("Harmonic distortion", "Not computed yet."),
    (
        "Comparison of two revisions of the workbook",
        "Made by the command `study compare`, not on this page; modes of one workbook are compared here.",
    ),
    ("Trial sheet", "Not made yet."),
    ("D.c. systems and batteries", "Only as a converter supply seen from the a.c. side."),
    ("Arc-flash energy", "Not covered."),
    ("Unbalanced load", "Every load is taken as balanced over three phases."),
    ("Lightning and overvoltage", "Not covered."),
    ("Cable trays and routing", "Lengths are taken as given."),
)


def assumption_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return what the study rests on.

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
        assumptions_table(outcome),
        limits_table(outcome),
        methods_table(outcome),
        not_read_table(outcome),
        not_covered_table(outcome),
    )


def assumptions_table(outcome: StudyOutcome) -> Table:
    """Return every typical value that stands in for a blank cell."""
    return make_table(
        key="assumptions",
        title="Typical values used, to be replaced by maker's data",
        sheet=_SHEET,
        columns=[
            text_column("equipment", "Equipment"),
            text_column("quantity", "Quantity"),
            Column(key="value", heading="Value", kind="free"),
            text_column("unit", "Unit"),
            text_column("source", "Source", kind="long text"),
            cell_column(),
        ],
        rows=[
            (a.equipment, a.quantity, a.value, a.unit, a.source, a.cell) for a in outcome.plant.assumptions
        ],
    )


def limits_table(outcome: StudyOutcome) -> Table:
    """Return every limit in force with its basis."""
    return make_table(
        key="limits",
        title="Limits in force",
        sheet=_SHEET,
        columns=[
            text_column("quantity", "Quantity"),
            Column(key="limit", heading="Limit", kind="free"),
            text_column("unit", "Unit"),
            text_column("basis", "Basis", kind="long text"),
            text_column("agreed", "Agreed for this project"),
            cell_column(),
        ],
        rows=[
            (
                used.quantity,
                used.limit,
                used.unit,
                used.basis,
                "agreed for this project" if used.changed_by_project else "",
                used.cell,
            )
            for used in outcome.limits
        ],
    )


def methods_table(outcome: StudyOutcome) -> Table:
    """Return the methods, one sentence each."""
    return make_table(
        key="methods",
        title="Methods",
        sheet=_SHEET,
        columns=[text_column("method", "Method", kind="long text")],
        rows=[(text,) for text in outcome.methods],
    )


def not_read_table(outcome: StudyOutcome) -> Table:
    """Return columns and sheets of the workbook that are the engineer's own."""
    return make_table(
        key="not_read",
        title="In the workbook, but not read",
        sheet=_SHEET,
        columns=[text_column("item", "Sheet or column", kind="long text")],
        rows=[(text,) for text in outcome.plant.not_read],
    )


def not_covered(outcome: StudyOutcome) -> tuple[tuple[str, str], ...]:
    """Return the subjects that a study does not answer, with a remark on each.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of (str, str)
        Subject and remark.
    """
    covered = {
        _SHORT_CIRCUIT: outcome.short_circuit,
        _GRADING: outcome.grading,
        _DIPS: outcome.dips,
    }
    return tuple(row for row in NOT_COVERED if covered.get(row) is None)


def not_covered_table(outcome: StudyOutcome) -> Table:
    """Return what the study does not answer."""
    return make_table(
        key="not_covered",
        title="Not covered",
        sheet=_SHEET,
        columns=[text_column("subject", "Subject"), text_column("remark", "Remark", kind="long text")],
        rows=not_covered(outcome),
    )
