"""Tables of boards: which mode governs each, every board in both cases, boards against modes."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Final

from study.report.content import StudyOutcome, cells_by_name
from study.report.fault_view import (
    SHEET,
    CaseView,
    board_places,
    cases,
    governing_mode,
    greatest,
    instant,
    ka,
    ka_column,
    leading_boards,
    least,
    mode_words,
    ranked_boards,
    roles,
    solved_modes,
)
from study.report.numbers import figure, percent, quantity
from study.report.tables import Column, Table, Value, Worked, WorkedLine, cell_column, make_table, text_column
from study.results.short_circuit import FaultCase, ModeShortCircuit, ShortCircuitResult

OUTSIDE: Final = "parallel paths: outside IEC 61363-1, by nodal reduction"
LEAST_HEADING: Final = "Least fault at 0.1\u00a0s"
_LEAST_AT_S = 0.1
_BOARDS_SHOWN = 8
_TERMS = 8


def governing_table(outcome: StudyOutcome, result: ShortCircuitResult) -> Table:
    """Return every board with the mode of its greatest peak, and where another mode gives more or least."""
    columns = [
        text_column("board", "Board"),
        text_column("role", "Role"),
        text_column("mode", "Greatest peak in"),
        text_column("iac_mode", "Greatest Iac(T/2) in"),
        text_column("least_mode", "Least fault in"),
        Column(key="u_nominal_v", heading="Nominal", unit="V", most_decimals=0),
        ka_column("ik_initial_ka", "I''k"),
        ka_column("iac_half_ka", "Iac(T/2)"),
        ka_column("idc_half_ka", "idc(T/2)"),
        ka_column("ip_ka", "ip"),
        ka_column("peak_ka", "Greatest peak"),
        Column(key="cos_phi", heading="cos\u00a0φ", most_decimals=3, digits=3),
        ka_column("iac_highest_ka", "Greatest Iac(T/2)"),
        ka_column("ip_lowest_ka", "Smallest ip"),
        ka_column("least_ka", LEAST_HEADING, 3, digits=3),
        ka_column("least_one_set_ka", f"{LEAST_HEADING}, one set left", 3, digits=3),
        text_column("dead_in", "Dead in"),
        cell_column(),
    ]
    cells, role = cells_by_name(outcome.plant), roles(outcome)
    leading = leading_boards(outcome, result)
    order = leading + [p for p in board_places(result) if p not in leading]
    rows = [_governing_row(result, p, role, cells) for p in order]
    return make_table(
        key="short_circuit_governing",
        title="Which mode governs each board",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Maximum case, IEC 61363-1; main, emergency and propulsion boards first. ip is the peak at "
            "half a cycle, the greatest peak that over all times and angles. Least fault: minimum case, "
            "the least of three-phase, two-phase and line-to-earth fault at 0.1 s; one set left: the same "
            "after the loss of all supplies of the island but the one that gives least.",
        ),
        worked=_worked_peak(result, order),
    )


def _governing_row(
    result: ShortCircuitResult, place: int, role: dict[str, str], cells: dict[str, str]
) -> tuple[Value, ...]:
    name, modes = result.places.names[place], solved_modes(result)
    u_nominal_v, cell = float(result.places.u_nominal_v[place]), cells.get(name, "")
    dead = mode_words([m.mode for m in modes if not m.maximum.live[place]], [m.mode for m in result.modes])
    governing = governing_mode(result, place)
    if governing is None:
        return (name, role.get(name, ""), "none", "", "", u_nominal_v, *(None,) * 10, dead, cell)
    names = [m.mode for m in modes]
    case = governing.maximum
    ip = [float(m.maximum.ip_a[place]) for m in modes]
    top, low = greatest(names, ip), least(names, ip)
    iac = greatest(names, [float(m.maximum.iac_half_a[place]) for m in modes])
    minimum = least(names, [least_a(m.minimum, place) for m in modes])
    alone = least(names, [float(m.one_set.least_100ms_a[place]) for m in modes])
    return (
        name,
        role.get(name, ""),
        top.words if top else governing.mode,
        iac.words if iac else "",
        minimum.words if minimum else "no fault current",
        u_nominal_v,
        *(
            ka(v[place])
            for v in (case.ik_initial_a, case.iac_half_a, case.idc_half_a, case.ip_a, case.peak_a)
        ),
        float(case.cos_phi[place]),
        *(ka(found.value) if found else math.nan for found in (iac, low, minimum, alone)),
        dead,
        cell,
    )


def least_a(case: FaultCase, place: int) -> float:
    """Return the least fault current at a place at 0.1 s [A]; NaN where it is dead."""
    return float(case.least_a[place, instant(case, _LEAST_AT_S)]) if case.live[place] else math.nan


def _worked_peak(result: ShortCircuitResult, order: Sequence[int]) -> Worked | None:
    for place in order:
        mode = governing_mode(result, place)
        if mode is not None:
            row = f"{result.places.names[place]}, {mode.mode}, maximum"
            return Worked(row=row, lines=peak_lines(mode.maximum, place))
    return None


def peak_lines(case: FaultCase, place: int) -> tuple[WorkedLine, ...]:
    """Return the peak at half a cycle and the power factor of a fault, worked by hand."""
    iac, idc, r_over_x = ka(case.iac_half_a[place]), ka(case.idc_half_a[place]), float(case.r_over_x[place])
    return (
        WorkedLine(
            label="ip",
            formula="√2 · Iac(T/2) + idc(T/2)",
            figures=f"√2 × {figure(iac, 'kA')} + {figure(idc, 'kA')}",
            result=quantity(ka(case.ip_a[place]), "kA"),
        ),
        WorkedLine(
            label="cos φ",
            formula="(R/X) / √(1 + (R/X)²)",
            figures=f"{figure(r_over_x, '')} / √(1 + {figure(r_over_x, '')}²)",
            result=quantity(float(case.cos_phi[place]), ""),
        ),
    )


def boards_table(outcome: StudyOutcome, result: ShortCircuitResult) -> Table:
    """Return every live board in both cases of every mode."""
    partings = _partings(result)
    columns = [
        text_column("mode", "Mode"),
        text_column("case", "Case"),
        text_column("board", "Board"),
        Column(key="u_nominal_v", heading="Nominal", unit="V", most_decimals=0),
        ka_column("ik_initial_ka", "I''k"),
        ka_column("iac_half_ka", "Iac(T/2)"),
        ka_column("idc_half_ka", "idc(T/2)"),
        ka_column("ip_ka", "ip"),
        ka_column("peak_ka", "Greatest peak"),
        Column(key="r_over_x", heading="R/X", most_decimals=3, digits=3),
        Column(key="cos_phi", heading="cos\u00a0φ", most_decimals=3, digits=3),
        *(
            Column(
                key=f"dc_at_{_milliseconds(t).replace('.', '_')}_ms_percent",
                heading=f"D.c. at {_milliseconds(t)}\u00a0ms",
                unit="%",
                most_decimals=0,
            )
            for t in partings
        ),
        ka_column("sustained_reach_ka", "Sustained, low"),
        ka_column("sustained_duty_ka", "Sustained, high"),
        ka_column("ik_general_ka", "I''k by IEC 60909"),
        ka_column("ip_general_ka", "ip by IEC 60909"),
        ka_column("ik_nominal_ka", "I''k, nominal"),
        ka_column("ip_nominal_ka", "ip, nominal"),
        text_column("remark", "Remark", kind="long text"),
    ]
    rows = [
        _board_row(view, result, place, partings)
        for view in cases(result)
        for place in ranked_boards(outcome, result, view.ship)
    ]
    return make_table(
        key="short_circuit_boards",
        title="Short-circuit currents of every board",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Bolted three-phase fault, IEC 61363-1. D.c. is idc / (√2 Iac) at that time after the start "
            "of the fault; above 100 % the current has no zero. Main, emergency and propulsion boards "
            "first, then by falling peak. Behind transformers and long cables the high sustained current may "
            "be above I''k: the regulators bring the sets back to rated voltage, and only the impedance up "
            "to the fault is left.",
        ),
        worked=_worked_board(outcome, result, partings),
        group_by=("mode", "case"),
        shown_per_group=_BOARDS_SHOWN,
    )


def _partings(result: ShortCircuitResult) -> tuple[float, ...]:
    """Return the parting times that every case has."""
    found = [tuple(float(t) for t in view.ship.parting_s) for view in cases(result)]
    return tuple(t for t in found[0] if all(t in other for other in found)) if found else ()


def _milliseconds(time_s: float) -> str:
    return quantity(1000.0 * time_s, "")


def _board_row(
    view: CaseView, result: ShortCircuitResult, place: int, partings: Sequence[float]
) -> tuple[Value, ...]:
    case, general = view.ship, view.general
    at = [list(case.parting_s).index(t) for t in partings]
    return (
        view.mode,
        view.name,
        result.places.names[place],
        float(result.places.u_nominal_v[place]),
        *(
            ka(v[place])
            for v in (case.ik_initial_a, case.iac_half_a, case.idc_half_a, case.ip_a, case.peak_a)
        ),
        float(case.r_over_x[place]),
        float(case.cos_phi[place]),
        *(percent(case.dc_part[place, k]) for k in at),
        ka(case.sustained_reach_a[place]),
        ka(case.sustained_duty_a[place]),
        ka(general.ik_3ph_a[place]),
        ka(general.ip_3ph_a[place]),
        ka(case.ik_initial_nominal_a[place]),
        ka(case.ip_nominal_a[place]),
        OUTSIDE if case.parallel_paths[place] else "",
    )


def _worked_board(
    outcome: StudyOutcome, result: ShortCircuitResult, partings: Sequence[float]
) -> Worked | None:
    for view in cases(result):
        for place in ranked_boards(outcome, result, view.ship):
            row = f"{view.mode}, {view.name}, {result.places.names[place]}"
            return Worked(row=row, lines=(_sum_line(view.ship, place), *peak_lines(view.ship, place)))
    return None


def _sum_line(case: FaultCase, place: int) -> WorkedLine:
    parts = sorted((ka(v) for v in case.source_initial_a[place] if v > 0.0), reverse=True)
    formula = "sum of the contributions"
    if len(parts) > _TERMS:
        formula += f", the {len(parts) - _TERMS + 1} smallest as one"
        parts = [*parts[: _TERMS - 1], math.fsum(parts[_TERMS - 1 :])]
    return WorkedLine(
        label="I''k",
        formula=formula,
        figures=" + ".join(figure(v, "kA") for v in parts),
        result=quantity(ka(case.ik_initial_a[place]), "kA"),
    )


def by_mode_table(result: ShortCircuitResult) -> Table:
    """Return boards down, modes across, for the comparison of modes."""
    columns = [text_column("board", "Board")]
    modes = solved_modes(result)
    for mode in modes:
        columns += [
            ka_column("ik_initial_ka", "I''k", group=mode.mode),
            ka_column("iac_half_ka", "Iac(T/2)", group=mode.mode),
            ka_column("ip_ka", "ip", group=mode.mode),
            ka_column("least_ka", LEAST_HEADING, 3, digits=3, group=mode.mode),
        ]
    rows = [
        (result.places.names[place], *(v for mode in modes for v in _mode_figures(mode, place)))
        for place in board_places(result)
    ]
    return make_table(
        key="short_circuit_by_mode",
        title="Boards in every mode",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=("Maximum case; the least fault is of the minimum case. A blank is a dead board.",),
    )


def _mode_figures(mode: ModeShortCircuit, place: int) -> tuple[float | None, ...]:
    case = mode.maximum
    figures: tuple[float | None, ...] = (None,) * 3
    if case.live[place]:
        figures = (ka(case.ik_initial_a[place]), ka(case.iac_half_a[place]), ka(case.ip_a[place]))
    return (*figures, ka(least_a(mode.minimum, place)) if mode.minimum.live[place] else None)
