"""Tables of sharing: at the mode's load, over the range of load, margins of adjustment, maladjusted cases."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from study.report.content import StatusLookup, StudyOutcome
from study.report.numbers import figure, percent, quantity
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
)
from study.results.arrays import FloatArray
from study.results.sharing import IslandSharing, MaladjustedCase, SharingCurve, SharingResult

_SHEET = "R Sharing"


def sharing_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return every table of sharing.

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
        operating_table(outcome.sharing),
        extremes_table(outcome),
        trims_table(outcome),
        margins_table(outcome),
        cases_table(outcome.sharing),
        curves_table(outcome.sharing),
        lines_table(outcome.sharing),
    )


def island_label(result: SharingResult, island: IslandSharing) -> str:
    """Return what an island is called: its sets, where a mode has several."""
    several = sum(other.mode == island.mode for other in result.islands) > 1
    return ", ".join(island.sets) if several else "all sets on line"


def adjusted(curve: SharingCurve) -> str:
    """Return how the sets are adjusted on a curve."""
    return "trimmed at 75 % load" if curve.trimmed else "as set"


def operating_table(result: SharingResult) -> Table:
    """Return what each set carries at the mode's own load, beside its tolerances."""
    columns = [
        text_column("mode", "Mode"),
        text_column("island", "Sets in parallel"),
        text_column("genset", "Set"),
        Column(key="p_rated_kw", heading="Rated", unit="kW", most_decimals=1, exact=True),
        Column(key="q_rated_kvar", heading="Rated", unit="kvar", most_decimals=1, exact=True),
        Column(key="p_kw", heading="Carries", unit="kW", most_decimals=1),
        Column(key="q_kvar", heading="Carries", unit="kvar", most_decimals=1),
        Column(key="p_tolerance_kw", heading="kW tolerance", unit="kW", most_decimals=1),
        Column(key="q_tolerance_kvar", heading="kvar tolerance", unit="kvar", most_decimals=1),
        percent_column("u_percent", "Bus voltage of rated", most_decimals=2),
        Column(key="f_hz", heading="Frequency", unit="Hz", most_decimals=3),
        Column(key="circulating_kvar", heading="Circulating", unit="kvar", most_decimals=1),
    ]
    rows = [
        (
            island.mode,
            island_label(result, island),
            name,
            island.p_rated_kw[i],
            island.q_rated_kvar[i],
            island.p_operating_kw[i],
            island.q_operating_kvar[i],
            island.p_tolerance_kw[i],
            island.q_tolerance_kvar[i],
            percent(island.u_operating_pu),
            island.f_operating_hz,
            island.circulating_kvar,
        )
        for island in result.islands
        for i, name in enumerate(island.sets)
    ]
    return make_table(
        key="sharing_operating",
        title="Sets in parallel at the mode's load",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Circulating kvar is half the sum of the distances from the proportional share, of the island.",
        ),
        group_by=("mode",),
    )


def extremes_table(outcome: StudyOutcome) -> Table:
    """Return the largest distance of each set from its share over the range of load."""
    columns = [
        text_column("mode", "Mode"),
        text_column("island", "Sets in parallel"),
        text_column("adjusted", "Adjusted"),
        text_column("genset", "Set"),
        Column(
            key="largest_dp_kw",
            heading="kW off its share",
            unit="kW",
            most_decimals=1,
            against="p_tolerance_kw",
        ),
        Column(key="p_tolerance_kw", heading="Tolerance", unit="kW", most_decimals=1),
        percent_column("at_load_for_kw_percent", "kW worst at load", most_decimals=0),
        Column(key="kw_verdict", heading="kW sharing", kind="verdict"),
        Column(
            key="largest_dq_kvar",
            heading="kvar off its share",
            unit="kvar",
            most_decimals=1,
            against="q_tolerance_kvar",
        ),
        Column(key="q_tolerance_kvar", heading="Tolerance", unit="kvar", most_decimals=1),
        percent_column("at_load_for_kvar_percent", "kvar worst at load", most_decimals=0),
        Column(key="kvar_verdict", heading="kvar sharing", kind="verdict"),
    ]
    rows: list[tuple[Value, ...]] = []
    for island in outcome.sharing.islands:
        for curve in (island.as_set, island.trimmed):
            rows += _extreme_rows(outcome, island, curve)
    return make_table(
        key="sharing_extremes",
        title="Largest distance from the proportional share over the range of load",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Load is in % of the sum of the rated kW. Trimmed: adjusted to proportional shares at 75 % of "
            "the total, the way the rules test it.",
        ),
        worked=_worked(outcome.sharing),
        group_by=("mode",),
    )


def _extreme_rows(
    outcome: StudyOutcome, island: IslandSharing, curve: SharingCurve
) -> Iterator[tuple[Value, ...]]:
    status = StatusLookup(v for v in outcome.verdicts if v.quantity.endswith(adjusted(curve)))
    label = island_label(outcome.sharing, island)
    for i, name in enumerate(island.sets):
        yield (
            island.mode,
            label,
            adjusted(curve),
            name,
            *_largest(curve, curve.dp_kw[:, i], float(island.p_tolerance_kw[i])),
            status(island.mode, name, "kW sharing"),
            *_largest(curve, curve.dq_kvar[:, i], float(island.q_tolerance_kvar[i])),
            status(island.mode, name, "kvar sharing"),
        )


def _largest(curve: SharingCurve, deviation: FloatArray, tolerance: float) -> tuple[Value, Value, Value]:
    """Return the largest distance among the loads that have a solution, its tolerance and its load."""
    if not curve.solved.any():
        return math.nan, tolerance, math.nan
    size = np.where(curve.solved, np.abs(deviation), -1.0)
    at = int(np.argmax(size))
    return float(size[at]), tolerance, percent(curve.load_pu[at])


def _worked(result: SharingResult) -> Worked | None:
    for island in result.islands:
        curve = island.as_set
        solved = np.flatnonzero(curve.solved)
        if solved.size:
            at = int(solved[-1])
            total = figure(float(curve.q_total_kvar[at]), "kvar")
            ratings = " + ".join(figure(float(q), "") for q in island.q_rated_kvar)
            own = figure(float(curve.q_kvar[at, 0]), "kvar")
            share = f"{total} × {figure(float(island.q_rated_kvar[0]), '')} / ({ratings})"
            line = WorkedLine(
                label="kvar off its share",
                formula="Q − total Q × rated kvar / sum of rated kvar",
                figures=f"{own} − {share}",
                result=quantity(float(curve.dq_kvar[at, 0]), "kvar"),
            )
            load = quantity(percent(curve.load_pu[at]), "%")
            return Worked(row=f"{island.sets[0]}, {island.mode}, as set, at {load} load", lines=(line,))
    return None


def trims_table(outcome: StudyOutcome) -> Table:
    """Return the set-points of each set as set, and as trimmed at 75 % load."""
    columns = [
        text_column("mode", "Mode"),
        text_column("island", "Sets in parallel"),
        text_column("genset", "Set"),
        percent_column(
            "u_as_set_percent", "No-load voltage as set", most_decimals=2, digits=5, missing="none"
        ),
        percent_column(
            "u_trimmed_percent", "No-load voltage as trimmed", most_decimals=2, digits=5, missing="none"
        ),
        text_column("u_input_cell", "Cell of the voltage", kind="cell"),
        percent_column(
            "f_as_set_percent", "No-load frequency as set", most_decimals=2, digits=5, missing="none"
        ),
        percent_column(
            "f_trimmed_percent", "No-load frequency as trimmed", most_decimals=2, digits=5, missing="none"
        ),
        text_column("f_input_cell", "Cell of the frequency", kind="cell"),
    ]
    rows = [
        (
            island.mode,
            island_label(outcome.sharing, island),
            trim.genset,
            percent(trim.u_as_set_pu),
            percent(trim.u_trimmed_pu),
            outcome.plant.setting_cell(trim.genset, island.mode, "No-load voltage"),
            percent(trim.f_as_set_pu),
            percent(trim.f_trimmed_pu),
            outcome.plant.setting_cell(trim.genset, island.mode, "No-load frequency"),
        )
        for island in outcome.sharing.islands
        for trim in island.trims
    ]
    return make_table(
        key="sharing_trims",
        title="Set-points that share in proportion at 75 % load",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "In % of rated voltage and rated frequency, at no load; droops stay as set. One set is"
            " left alone: the one that leaves most others alone too and brings the board nearest to rated"
            " voltage or frequency. 'None': no such set-point is in use, or the sets cannot be trimmed.",
        ),
        group_by=("mode",),
    )


def margins_table(outcome: StudyOutcome) -> Table:
    """Return how far each setting may be off before something is broken."""
    headings = {
        "no-load voltage": "No-load voltage",
        "voltage droop": "Voltage droop",
        "no-load frequency": "No-load frequency",
        "speed droop": "Speed droop",
    }
    columns = [
        text_column("mode", "Mode"),
        text_column("genset", "Set"),
        text_column("setting", "Setting"),
        text_column("adjusted", "Adjusted"),
        percent_column("set_percent", "Set at", most_decimals=2),
        percent_column("low_percent", "May fall to", most_decimals=2, missing="no bound"),
        text_column("low_breaks", "Below that breaks"),
        percent_column("high_percent", "May rise to", most_decimals=2, missing="no bound"),
        text_column("high_breaks", "Above that breaks"),
        cell_column(),
    ]
    rows = [
        (
            island.mode,
            margin.genset,
            margin.setting,
            "trimmed at 75 % load" if margin.trimmed else "as set",
            percent(margin.set_pu),
            percent(margin.low_pu),
            margin.low_breaks or None,
            percent(margin.high_pu),
            margin.high_breaks or None,
            outcome.plant.setting_cell(margin.genset, island.mode, headings.get(margin.setting, "")),
        )
        for island in outcome.sharing.islands
        for margin in island.margins
    ]
    return make_table(
        key="adjusting_margins",
        title="How far one setting may be off",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "One setting of one set is changed, everything else stays. Where the sets are out of tolerance "
            "as set, the room is that about the trimmed set-points.",
        ),
        group_by=("mode",),
    )


def cases_table(result: SharingResult) -> Table:
    """Return every maladjusted case, set by set."""
    columns = [
        text_column("case", "Case"),
        text_column("mode", "Mode"),
        text_column("genset", "Set"),
        text_column("changed", "Changed", kind="long text"),
        Column(key="p_before_kw", heading="Before", unit="kW", most_decimals=1),
        Column(key="p_after_kw", heading="After", unit="kW", most_decimals=1),
        Column(key="p_share_kw", heading="Share", unit="kW", most_decimals=1),
        Column(key="p_tolerance_kw", heading="Tolerance", unit="kW", most_decimals=1),
        Column(key="q_before_kvar", heading="Before", unit="kvar", most_decimals=1),
        Column(key="q_after_kvar", heading="After", unit="kvar", most_decimals=1),
        Column(key="q_share_kvar", heading="Share", unit="kvar", most_decimals=1),
        Column(key="q_tolerance_kvar", heading="Tolerance", unit="kvar", most_decimals=1),
        percent_column("u_before_percent", "Voltage before", most_decimals=2),
        percent_column("u_after_percent", "Voltage after", most_decimals=2),
        Column(key="f_before_hz", heading="Frequency before", unit="Hz", most_decimals=3),
        Column(key="f_after_hz", heading="Frequency after", unit="Hz", most_decimals=3),
        cell_column(),
    ]
    return make_table(
        key="maladjusted_cases",
        title="Sets adjusted wrongly",
        sheet=_SHEET,
        columns=columns,
        rows=[row for case in result.cases for row in _case_rows(case)],
    )


def _case_rows(case: MaladjustedCase) -> Iterator[tuple[Value, ...]]:
    for i, name in enumerate(case.sets):
        changed = None
        if name == case.genset:
            was, now = quantity(percent(case.was_pu), ""), quantity(percent(case.value_pu), "%")
            changed = f"{case.setting} {was} to {now}"
        yield (
            case.case,
            case.mode,
            name,
            changed if case.solved else "no solution",
            case.p_before_kw[i],
            case.p_after_kw[i],
            case.p_share_kw[i],
            case.p_tolerance_kw[i],
            case.q_before_kvar[i],
            case.q_after_kvar[i],
            case.q_share_kvar[i],
            case.q_tolerance_kvar[i],
            percent(case.u_before_pu),
            percent(case.u_after_pu),
            case.f_before_hz,
            case.f_after_hz,
            case.cell if name == case.genset else "",
        )


def curves_table(result: SharingResult) -> Table:
    """Return the sharing curves, a block of rows for each set."""
    columns = [
        text_column("mode", "Mode"),
        text_column("island", "Sets in parallel"),
        text_column("adjusted", "Adjusted"),
        text_column("genset", "Set"),
        percent_column("load_percent", "Load"),
        Column(key="p_kw", heading="Carries", unit="kW", most_decimals=1),
        Column(key="dp_kw", heading="Off its share", unit="kW"),
        Column(key="q_kvar", heading="Carries", unit="kvar", most_decimals=1),
        Column(key="dq_kvar", heading="Off its share", unit="kvar"),
        Column(key="p_tolerance_kw", heading="kW tolerance", unit="kW", most_decimals=1),
        Column(key="q_tolerance_kvar", heading="kvar tolerance", unit="kvar", most_decimals=1),
        percent_column("u_percent", "Bus voltage of rated", most_decimals=2),
        Column(key="f_hz", heading="Frequency", unit="Hz", most_decimals=3),
    ]
    rows = [
        (
            island.mode,
            island_label(result, island),
            adjusted(curve),
            name,
            percent(curve.load_pu[k]),
            curve.p_kw[k, i],
            curve.dp_kw[k, i],
            curve.q_kvar[k, i],
            curve.dq_kvar[k, i],
            island.p_tolerance_kw[i],
            island.q_tolerance_kvar[i],
            percent(curve.u_pu[k]),
            curve.f_hz[k],
        )
        for island in result.islands
        for curve in (island.as_set, island.trimmed)
        for i, name in enumerate(island.sets)
        for k in range(len(curve.load_pu))
    ]
    return make_table(
        key="sharing_curves",
        title="Sharing over the range of load",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
    )


def lines_table(result: SharingResult) -> Table:
    """Return the voltage-kvar line of each set with its operating point."""
    columns = [
        text_column("mode", "Mode"),
        text_column("island", "Sets in parallel"),
        text_column("genset", "Set"),
        text_column("point", "Point"),
        Column(key="q_kvar", heading="Reactive", unit="kvar", most_decimals=1),
        percent_column("u_percent", "Voltage of rated", most_decimals=2),
    ]
    rows: list[tuple[Value, ...]] = []
    for island in result.islands:
        for line in island.lines:
            rows += [
                (island.mode, island_label(result, island), line.genset, "line", float(q), percent(u))
                for q, u in zip(line.q_kvar, line.u_pu, strict=True)
            ]
            rows.append(
                (
                    island.mode,
                    island_label(result, island),
                    line.genset,
                    "operating point",
                    line.q_operating_kvar,
                    percent(line.u_operating_pu),
                )
            )
    return make_table(
        key="setting_lines",
        title="Voltage-kvar line of each set",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
    )
