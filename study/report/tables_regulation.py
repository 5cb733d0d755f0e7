"""Tables of regulation: each set by itself, with its own excitation."""

from __future__ import annotations

from study.report.content import StatusLookup, StudyOutcome, cells_by_name
from study.report.numbers import percent, quantity
from study.report.tables import (
    Column,
    Table,
    Value,
    Worked,
    WorkedLine,
    cell_column,
    make_table,
    percent_column,
    text_column,
    verdict_column,
)
from study.results.regulation import RegulationResult

_SHEET = "R Sharing"


def regulation_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return every table of regulation.

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
        regulation_table(outcome),
        inherent_table(outcome.regulation),
        regulation_curves_table(outcome.regulation),
        inherent_curves_table(outcome.regulation),
    )


def regulation_table(outcome: StudyOutcome) -> Table:
    """Return the voltage regulation of each set from no load to rated load."""
    columns = [
        text_column("genset", "Set"),
        text_column("service", "Service"),
        text_column("field_supply", "Field supply"),
        text_column("law", "Droop law"),
        percent_column("band_as_set_percent", "Without droop, as set ±", most_decimals=2),
        percent_column("band_centred_percent", "Without droop, best centred ±", most_decimals=2),
        percent_column("band_as_set_with_droop_percent", "With droop, as set ±", most_decimals=2),
        percent_column("droop_percent", "Fall, no load to rated, with droop", most_decimals=2),
        Column(
            key="compensation_x_pu",
            heading="Compensating reactance",
            unit="pu of rated kVA",
            most_decimals=4,
        ),
        percent_column("reaches_ceiling_at_percent", "Reaches ceiling at load", missing="none"),
        verdict_column(),
        cell_column(),
    ]
    cells, status = cells_by_name(outcome.plant), StatusLookup(outcome.verdicts)
    rows = [
        (
            s.genset,
            s.service,
            s.field_supply,
            s.law,
            percent(s.band_as_set_pu),
            percent(s.band_centred_pu),
            percent(s.band_as_set_with_droop_pu),
            percent(s.droop_no_load_to_rated_pu),
            s.compensation_x_pu,
            percent(s.reaches_ceiling_at_pu),
            status("", s.genset, "regulation"),
            cells.get(s.genset, ""),
        )
        for s in outcome.regulation.sets
    ]
    return make_table(
        key="regulation",
        title="Voltage regulation of each set, no load to rated load at rated power factor",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "In % of the set's rated voltage. The verdict is on the regulator's own characteristic, without "
            "droop; the droop is a setting for running in parallel.",
        ),
        worked=_worked(outcome.regulation),
    )


def _worked(result: RegulationResult) -> Worked | None:
    if not result.sets:
        return None
    s = result.sets[0]
    first, last = percent(s.u_with_droop_pu[0]), percent(s.u_with_droop_pu[-1])
    line = WorkedLine(
        label="Fall, no load to rated, with droop",
        formula="U at no load − U at rated load",
        figures=f"{quantity(first, '%', 3)} − {quantity(last, '%', 3)}",
        result=quantity(percent(s.droop_no_load_to_rated_pu), "%", 3),
    )
    return Worked(row=s.genset, lines=(line,))


def power_factor(label: str) -> str:
    """Return the name of a curve without the words that stand in the heading or before it."""
    return label.removeprefix("power factor ")


def inherent_table(result: RegulationResult) -> Table:
    """Return the rise of voltage when rated load is thrown off with the field left as it was."""
    columns = [
        text_column("genset", "Set"),
        text_column("power_factor", "Power factor"),
        percent_column("regulation_percent", "Inherent regulation"),
        Column(key="field_pu", heading="Field", unit="x rated-load field"),
    ]
    rows = [
        (s.genset, power_factor(label), percent(s.inherent.regulation_pu[k]), s.inherent.field_pu[k])
        for s in result.sets
        for k, label in enumerate(s.inherent.labels)
    ]
    return make_table(
        key="inherent_regulation",
        title="Inherent regulation: rated load thrown off at constant excitation",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=("(E0 − U) / U: the rise of voltage with the field left as it was at rated voltage and load.",),
    )


def regulation_curves_table(result: RegulationResult) -> Table:
    """Return terminal voltage against load with the set's own excitation."""
    columns = [
        text_column("genset", "Set"),
        percent_column("load_percent", "Load"),
        percent_column("u_without_droop_percent", "Voltage without droop", most_decimals=2),
        percent_column("u_with_droop_percent", "Voltage with droop", most_decimals=2),
        Column(key="field_pu", heading="Field", unit="x rated-load field"),
    ]
    rows = [
        (
            s.genset,
            percent(s.load_pu[k]),
            percent(s.u_without_droop_pu[k]),
            percent(s.u_with_droop_pu[k]),
            s.field_pu[k],
        )
        for s in result.sets
        for k in range(len(s.load_pu))
    ]
    return make_table(
        key="regulation_curves",
        title="Terminal voltage against load, own excitation, rated power factor",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
    )


def inherent_curves_table(result: RegulationResult) -> Table:
    """Return terminal voltage against load current at constant excitation."""
    columns = [
        text_column("genset", "Set"),
        text_column("power_factor", "Power factor"),
        percent_column("current_percent", "Load current"),
        percent_column("u_percent", "Voltage of rated", most_decimals=2),
    ]
    rows: list[tuple[Value, ...]] = [
        (s.genset, power_factor(label), percent(s.inherent.current_pu[k, i]), percent(s.inherent.u_pu[k, i]))
        for s in result.sets
        for k, label in enumerate(s.inherent.labels)
        for i in range(s.inherent.current_pu.shape[1])
    ]
    return make_table(
        key="inherent_curves",
        title="Terminal voltage against load current at constant excitation",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
    )
