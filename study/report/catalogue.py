"""Every table of the study, made once and rendered by every output."""

from __future__ import annotations

from study.report.content import StudyOutcome
from study.report.tables import Table
from study.report.tables_assumptions import assumption_tables
from study.report.tables_balance import balance_tables
from study.report.tables_branches import branch_tables
from study.report.tables_cables import cable_tables
from study.report.tables_dips import dips_tables
from study.report.tables_fault_ratings import fault_rating_tables
from study.report.tables_generator_protection import generator_protection_tables
from study.report.tables_grading import grading_tables
from study.report.tables_load_flow import load_flow_tables
from study.report.tables_modes import modes_table
from study.report.tables_regulation import regulation_tables
from study.report.tables_sharing import sharing_tables
from study.report.tables_short_circuit import short_circuit_tables
from study.report.tables_sources import source_tables
from study.report.tables_verdicts import verdict_tables


def all_tables(outcome: StudyOutcome) -> dict[str, Table]:
    """Return every table by its key.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    dict
        Key to table, in the order of the report.

    Raises
    ------
    ValueError
        Two tables with one key.
    """
    tables = (
        *verdict_tables(outcome),
        modes_table(outcome),
        *source_tables(outcome),
        *balance_tables(outcome),
        *load_flow_tables(outcome),
        *branch_tables(outcome),
        *sharing_tables(outcome),
        *regulation_tables(outcome),
        *short_circuit_tables(outcome),
        *fault_rating_tables(outcome),
        *grading_tables(outcome),
        *_protection(outcome),
        *dips_tables(outcome),
        *assumption_tables(outcome),
    )
    found = {table.key: table for table in tables}
    if len(found) != len(tables):
        raise ValueError("two tables have one key")
    return found


def _protection(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return the tables of the sets' protection and of the cables, where the study has them."""
    tables: tuple[Table, ...] = ()
    if outcome.set_protection is not None:
        tables += generator_protection_tables(outcome.plant, outcome.set_protection)
    if outcome.cables is not None:
        tables += cable_tables(outcome.plant, outcome.cables)
    return tables
