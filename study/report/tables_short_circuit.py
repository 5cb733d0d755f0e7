"""The tables of short-circuit currents in the order of the page, the remarks and the basis."""

from __future__ import annotations

from study.report.content import StudyOutcome
from study.report.fault_view import SHEET, mode_words
from study.report.methods_short_circuit import KNOWN_BIAS, SHORT_CIRCUIT_BASIS
from study.report.tables import Table, make_table, text_column
from study.report.tables_fault_boards import boards_table, by_mode_table, governing_table
from study.report.tables_fault_branches import branches_table, decay_table, quick_table
from study.report.tables_fault_earth import earth_table
from study.report.tables_fault_general import general_tables
from study.report.tables_fault_places import places_table
from study.report.tables_fault_simulation import bias_words, simulation_tables
from study.report.tables_fault_sources import contributions_table, sources_table
from study.results.short_circuit import ShortCircuitResult


def short_circuit_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return the tables of short-circuit currents; none where the study has no such result.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    result = outcome.short_circuit
    if result is None:
        return ()
    return (
        governing_table(outcome, result),
        findings_table(outcome, result),
        boards_table(outcome, result),
        by_mode_table(result),
        contributions_table(outcome, result),
        sources_table(outcome, result),
        branches_table(outcome, result),
        quick_table(result),
        decay_table(outcome, result),
        *simulation_tables(result),
        places_table(outcome, result),
        *general_tables(outcome, result),
        earth_table(outcome, result),
        basis_table(result),
    )


def findings_table(outcome: StudyOutcome, result: ShortCircuitResult) -> Table:
    """Return what the analysis found, equal sentences of several modes drawn together."""
    found: dict[str, list[str]] = {}
    for mode in result.modes:
        if not mode.solved:
            found.setdefault(f"No short-circuit study: {mode.reason}.", []).append(mode.mode)
        for sentence in mode.findings:
            found.setdefault(sentence, []).append(mode.mode)
    return make_table(
        key="short_circuit_findings",
        title="Remarks of the short-circuit study",
        sheet=SHEET,
        columns=[text_column("modes", "Modes"), text_column("remark", "Remark", kind="long text")],
        rows=[(mode_words(modes, outcome.modes), sentence) for sentence, modes in found.items()],
    )


def basis_table(result: ShortCircuitResult) -> Table:
    """Return what the figures rest on, and the cautions."""
    bias = bias_words(result)
    return make_table(
        key="short_circuit_basis",
        title="Basis of the short-circuit currents, and cautions",
        sheet=SHEET,
        columns=[text_column("subject", "Subject"), text_column("remark", "Basis", kind="long text")],
        rows=[(subject, text.replace(KNOWN_BIAS, bias)) for subject, text in SHORT_CIRCUIT_BASIS],
    )
