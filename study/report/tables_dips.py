"""Tables of the events followed in time: cases, sets, motors, contactors, and what happened when."""

from __future__ import annotations

from study.report.content import StatusLookup, StudyOutcome
from study.report.findings import listed
from study.report.numbers import percent, quantity
from study.report.tables import (
    Column,
    Table,
    Worked,
    WorkedLine,
    cell_column,
    make_table,
    percent_column,
    text_column,
    verdict_column,
)
from study.report.tables_dips_starts import start_tables
from study.report.tables_dips_traces import trace_tables
from study.results.dips import DipsResult, SimulatedCase

SHEET = "R Voltage dips"
_DROPPED_NAMED = 6


def dips_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return every table of the events followed in time; none in a study without them.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    result = outcome.dips
    if result is None:
        return ()
    return (
        *start_tables(outcome.plant, result),
        cases_table(outcome, result),
        cures_table(outcome, result),
        set_swings_table(result),
        motors_table(result),
        contactors_table(result),
        steps_table(result),
        remarks_table(result),
        *trace_tables(result),
    )


def cases_table(outcome: StudyOutcome, result: DipsResult) -> Table:
    """Return depth, recovery and class of every case."""
    columns = [
        text_column("case", "Case"),
        text_column("mode", "Mode"),
        text_column("event", "Event"),
        text_column("board", "Board judged"),
        percent_column("u_before_percent", "Voltage before", most_decimals=2),
        percent_column("u_least_percent", "Least voltage", most_decimals=2),
        percent_column("u_largest_percent", "Largest voltage", most_decimals=2),
        percent_column("u_after_percent", "Voltage after", most_decimals=2),
        percent_column("u_overshoot_percent", "Overshoot", most_decimals=2),
        Column(key="u_recovery_s", heading="Voltage back after", unit="s", infinite="not back"),
        text_column("worst_board", "Worst board"),
        percent_column("u_worst_percent", "Least voltage there", most_decimals=2),
        Column(key="f_least_hz", heading="Least frequency", unit="Hz"),
        Column(key="f_largest_hz", heading="Largest frequency", unit="Hz"),
        Column(key="f_recovery_s", heading="Frequency back after", unit="s", infinite="not back"),
        text_column("class_voltage", "Class kept, voltage"),
        text_column("class_frequency", "Class kept, frequency"),
        text_column("outcome", "Outcome"),
        verdict_column(),
        cell_column(),
    ]
    status = StatusLookup(outcome.verdicts)
    return make_table(
        key="dips_cases",
        title="Voltage and frequency in every case of the sheet Events",
        sheet=SHEET,
        columns=columns,
        rows=[(*_case_row(case), status(case.mode, case.case, "dips"), _cell(case)) for case in result.cases],
        notes=(
            "Voltages in % of the nominal voltage of the board; times from the disturbance that counts. The "
            "classes are those of ISO 8528-5 (from memory) whose transient figures the event keeps, a "
            "statement and no verdict.",
        ),
        worked=_worked(result, outcome.plant.project.f_rated_hz),
    )


def _case_row(case: SimulatedCase) -> tuple[object, ...]:
    u, f = case.voltage, case.frequency
    worst = float(case.u_worst_pu.min(initial=float("inf"))) if case.simulated else float("nan")
    return (
        case.case,
        case.mode,
        listed(tuple(dict.fromkeys(f"{k} {e}" for k, e in zip(case.kinds, case.equipment, strict=True))), 3),
        case.board,
        percent(u.before),
        percent(u.least),
        percent(u.largest),
        percent(u.after),
        percent(u.overshoot),
        u.recovery_s,
        case.worst_board,
        percent(worst),
        f.least,
        f.largest,
        f.recovery_s,
        case.iso_class_voltage,
        case.iso_class_frequency,
        _outcome(case),
    )


def _outcome(case: SimulatedCase) -> str:
    if not case.simulated:
        return f"not simulated: {case.reason}"
    if case.collapsed:
        return "boards are left dead"
    if not (case.voltage.settled and case.frequency.settled):
        return "not at rest at the end"
    return "comes to rest"


def _cell(case: SimulatedCase) -> str:
    return case.cells[0] if case.cells else ""


def _worked(result: DipsResult, f_rated_hz: float) -> Worked | None:
    case = next((c for c in result.cases if c.simulated and not c.collapsed), None)
    if case is None:
        return None
    u, f = case.voltage, case.frequency
    below, off = 1.0 - u.least, f_rated_hz - f.least
    lines = (
        WorkedLine(
            label="Voltage below nominal",
            formula="100 % − least voltage",
            figures=f"100 − {quantity(percent(u.least), '%', 2)}",
            result=quantity(percent(below), "%", 2),
        ),
        WorkedLine(
            label="Frequency below rated",
            formula="(rated − least) / rated",
            figures=f"({f_rated_hz:g} − {quantity(f.least, 'Hz', 3)}) / {f_rated_hz:g} Hz",
            result=quantity(percent(off / f_rated_hz), "%", 2),
        ),
    )
    return Worked(row=case.case, lines=lines)


def cures_table(outcome: StudyOutcome, result: DipsResult) -> Table:
    """Return what was tried for the cases that go too far."""
    columns = [
        text_column("case", "Case"),
        text_column("change", "Changed"),
        percent_column("u_least_percent", "Least voltage", most_decimals=2),
        percent_column("u_largest_percent", "Largest voltage", most_decimals=2),
        Column(key="u_recovery_s", heading="Voltage back after", unit="s", infinite="not back"),
        Column(key="f_least_hz", heading="Least frequency", unit="Hz"),
        Column(key="f_largest_hz", heading="Largest frequency", unit="Hz"),
        Column(key="f_recovery_s", heading="Frequency back after", unit="s", infinite="not back"),
        Column(key="run_up_s", heading="Run-up", unit="s", infinite="does not run up", missing="no start"),
        text_column("outcome", "Outcome"),
        verdict_column(),
    ]
    as_it_is = {case.case: case for case in result.cases}
    rows: list[tuple[object, ...]] = []
    for name in dict.fromkeys(cure.case for cure in result.cures):
        status = StatusLookup(outcome.verdicts)(as_it_is[name].mode, name, "dips")
        rows.append((name, "nothing, as in the workbook", *_cure_row(as_it_is[name]), status))
        rows += [
            (name, cure.change, *_cure_row(cure.simulated), word)
            for cure, word in zip(result.cures, outcome.cure_words, strict=True)
            if cure.case == name
        ]
    return make_table(
        key="dips_cures",
        title="Cures tried for the cases that go too far",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=("One thing is changed at a time; the workbook stays as it is.",),
        group_by=("case",),
    )


def _cure_row(case: SimulatedCase) -> tuple[object, ...]:
    u, f = case.voltage, case.frequency
    run_up = max((m.run_up_s for m in case.motors), default=float("nan"))
    return (
        percent(u.least),
        percent(u.largest),
        u.recovery_s,
        f.least,
        f.largest,
        f.recovery_s,
        run_up,
        _outcome(case),
    )


def set_swings_table(result: DipsResult) -> Table:
    """Return how kW, kvar and field of every set swing."""
    columns = [
        text_column("case", "Case"),
        text_column("genset", "Set"),
        Column(key="p_before_kw", heading="Before", unit="kW"),
        Column(key="p_largest_kw", heading="Largest", unit="kW"),
        Column(key="p_after_kw", heading="After", unit="kW"),
        Column(key="q_before_kvar", heading="Before", unit="kvar"),
        Column(key="q_largest_kvar", heading="Largest", unit="kvar"),
        Column(key="q_after_kvar", heading="After", unit="kvar"),
        Column(key="field_largest_pu", heading="Largest field", unit="x rated-load field"),
        Column(key="at_ceiling_s", heading="Time at its ceiling", unit="s"),
        Column(key="opened_at_s", heading="Off the board at", unit="s", missing="stays on"),
    ]
    rows = [
        (
            case.case,
            s.name,
            s.p_before_kw,
            s.p_largest_kw,
            s.p_after_kw,
            s.q_before_kvar,
            s.q_largest_kvar,
            s.q_after_kvar,
            s.field_largest_pu,
            s.at_ceiling_s,
            s.opened_at_s,
        )
        for case in result.cases
        for s in case.sets
    ]
    return make_table(
        key="dips_sets",
        title="Swings of the sets",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        group_by=("case",),
    )


def motors_table(result: DipsResult) -> Table:
    """Return run-up of every motor that starts."""
    columns = [
        text_column("case", "Case"),
        text_column("load", "Motor"),
        Column(key="units", heading="Units", kind="count"),
        text_column("method", "Started"),
        percent_column("u_least_percent", "Least voltage at its terminals", most_decimals=2),
        Column(key="i_largest_a", heading="Largest line current", unit="A"),
        Column(key="run_up_s", heading="Run-up", unit="s", infinite="does not run up"),
        percent_column("speed_percent", "Speed at the end"),
        Column(key="inertia_s", heading="Inertia constant", unit="s"),
        text_column("inertia_basis", "Inertia from"),
        text_column("relay", "Overload relay"),
        text_column("relay_class", "Trip class"),
        percent_column("relay_quick_percent", "Heating, quickest relay", missing="no relay"),
        percent_column("relay_slow_percent", "Heating, slowest relay", missing="no relay"),
    ]
    rows = [
        (
            case.case,
            m.load,
            m.units,
            m.method,
            percent(m.u_least_pu),
            m.i_largest_a,
            m.run_up_s,
            percent(m.speed_pu[-1]),
            m.inertia_s,
            m.inertia_basis,
            m.relay,
            m.relay_class,
            percent(m.relay_quick),
            percent(m.relay_slow),
        )
        for case in result.cases
        for m in case.motors
    ]
    return make_table(
        key="dips_motors",
        title="Motors that start",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Terminal voltage in % of the motor's rated voltage, speed in % of synchronous. Heating of the "
            "overload relay at the end of the run-up in % of that at which a cold relay of the class trips.",
        ),
    )


def contactors_table(result: DipsResult) -> Table:
    """Return where contactors would open, the worst of each case named."""
    rows = []
    for case in result.cases:
        dropped = sorted(case.drop_outs, key=lambda d: d.u_least_pu - d.drop_out_pu)
        if not dropped:
            continue
        worst = dropped[0]
        rows.append(
            (
                case.case,
                len(dropped),
                worst.load,
                percent(worst.u_least_pu),
                percent(worst.drop_out_pu),
                max(d.below_s for d in dropped),
                listed([d.load for d in dropped], _DROPPED_NAMED),
            )
        )
    return make_table(
        key="dips_contactors",
        title="Contactors that would open",
        sheet=SHEET,
        columns=[
            text_column("case", "Case"),
            Column(key="count", heading="Consumers", kind="count"),
            text_column("worst", "Worst"),
            percent_column("u_least_percent", "Least voltage there", most_decimals=2),
            percent_column("drop_out_percent", "Its drop-out level"),
            Column(key="below_s", heading="Longest below", unit="s"),
            text_column("loads", "Consumers whose contactors open", kind="long text"),
        ],
        rows=rows,
        notes=("Restarting delays of the sheet Loads apply when the voltage is back.",),
    )


def steps_table(result: DipsResult) -> Table:
    """Return what happened when."""
    return make_table(
        key="dips_steps",
        title="What happens when",
        sheet=SHEET,
        columns=[
            text_column("case", "Case"),
            Column(key="at_s", heading="At", unit="s"),
            text_column("text", "What happens", kind="long text"),
            cell_column(),
        ],
        rows=[(case.case, step.at_s, step.text, step.cell) for case in result.cases for step in case.steps],
    )


def remarks_table(result: DipsResult) -> Table:
    """Return the remarks of the simulation."""
    return make_table(
        key="dips_remarks",
        title="Remarks on the simulated cases",
        sheet=SHEET,
        columns=[text_column("case", "Case"), text_column("text", "Remark", kind="long text")],
        rows=[(case.case, text) for case in result.cases for text in case.findings],
    )
