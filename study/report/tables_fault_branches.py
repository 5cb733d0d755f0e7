"""Tables of what comes through each branch, of quick estimates, and of the current against time."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from typing import Final

import numpy as np

from study.report.content import StudyOutcome
from study.report.fault_view import (
    SHEET,
    curves,
    ends_at,
    governing_mode,
    ka,
    ka_column,
    leading_boards,
    one_busbar,
    ranked_boards,
    solved_modes,
)
from study.report.numbers import figure, quantity
from study.report.tables import Column, Table, Value, Worked, WorkedLine, make_table, text_column
from study.results.arrays import FloatArray
from study.results.short_circuit import FaultCase, ModeShortCircuit, ShortCircuitResult

_SHOWN: Final = 10
DECAY_TIMES_S: Final = (
    *(0.001 * k for k in range(21)),
    *(0.001 * k for k in range(24, 61, 4)),
    *(0.001 * k for k in range(70, 201, 10)),
    0.3,
    0.5,
    1.0,
    2.0,
    5.0,
    10.0,
)


def branches_table(outcome: StudyOutcome, result: ShortCircuitResult) -> Table:
    """Return what arrives at each board through each branch, and what all else gives."""
    columns = [
        text_column("mode", "Mode"),
        text_column("board", "Fault on board"),
        text_column("branch", "Branch"),
        text_column("kind", "Kind"),
        text_column("far_end", "From"),
        ka_column("through_initial_ka", "I''k through it", 3, digits=3),
        ka_column("through_half_ka", "Iac(T/2) through it", 3, digits=3),
        ka_column("through_ip_ka", "ip through it", 3, digits=3),
        ka_column("rest_half_ka", "Iac(T/2) of the rest", 3, digits=3),
        ka_column("rest_ip_ka", "ip of the rest", 3, digits=3),
        text_column("larger", "Larger peak"),
        text_column("remark", "Remark"),
    ]
    rows: list[tuple[Value, ...]] = []
    for mode in solved_modes(result):
        case = mode.maximum
        at_place = ends_at(case)
        for place in ranked_boards(outcome, result, case):
            ends = at_place.get(place, np.zeros(0, np.int64))
            feeding = [int(e) for e in ends if case.ends.through_initial_a[e] > 0.0]
            for e in sorted(feeding, key=lambda e: -float(case.ends.through_ip_a[e])):
                rows.append((mode.mode, result.places.names[place], *_end_row(case, e)))
    return make_table(
        key="fault_branches",
        title="What comes through each branch",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Maximum case. A device at this end has to make and break the larger of what comes through its "
            "own branch and what all else gives. Branches through which nothing comes are left out: their "
            "devices see the whole current of the board.",
        ),
        group_by=("mode",),
        shown_per_group=_SHOWN,
    )


def _end_row(case: FaultCase, e: int) -> tuple[Value, ...]:
    ends = case.ends
    return (
        ends.branches[e],
        ends.kinds[e],
        ends.far_ends[e],
        ka(ends.through_initial_a[e]),
        ka(ends.through_half_a[e]),
        ka(ends.through_ip_a[e]),
        ka(ends.rest_half_a[e]),
        ka(ends.rest_ip_a[e]),
        "own branch" if ends.through_ip_a[e] > ends.rest_ip_a[e] else "the rest",
        "" if ends.determined[e] else "closed ring of ties: the whole current is taken",
    )


def quick_table(result: ShortCircuitResult) -> Table:
    """Return rules of thumb beside the detailed result."""
    columns = [
        text_column("mode", "Mode"),
        text_column("island", "Boards from"),
        text_column("rule", "Rule of thumb"),
        text_column("quantity", "Estimates"),
        text_column("basis", "Basis"),
        ka_column("estimate_ka", "Estimate"),
        ka_column("ik_initial_ka", "I''k in detail"),
        ka_column("iac_half_ka", "Iac(T/2) in detail"),
        ka_column("ip_ka", "ip in detail"),
        Column(key="estimate_multiple", heading="Estimate / I''k", most_decimals=2, digits=3),
    ]
    rows = [row for mode in solved_modes(result) for row in _quick_rows(result, mode)]
    return make_table(
        key="fault_quick_estimates",
        title="Quick estimates of rules and law, as a check of size",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "In detail: the board of that voltage with the greatest I''k, maximum case. The estimates stand "
            "for plants without data; a detailed result of quite another size asks for a second look at the "
            "data.",
        ),
        worked=_worked_quick(rows),
        group_by=("mode",),
        shown_per_group=_SHOWN,
    )


def _quick_rows(result: ShortCircuitResult, mode: ModeShortCircuit) -> Iterable[tuple[Value, ...]]:
    case = mode.maximum
    for quick in mode.quick:
        place = _strongest(result, case, quick.boards)
        detail = (math.nan,) * 3
        if place is not None:
            detail = (ka(case.ik_initial_a[place]), ka(case.iac_half_a[place]), ka(case.ip_a[place]))
        value = ka(quick.value_a)
        yield (
            mode.mode,
            quick.boards[0] if quick.boards else "",
            quick.rule,
            quick.quantity,
            quick.basis,
            value,
            *detail,
            value / detail[0] if detail[0] > 0 else math.nan,
        )


def _strongest(result: ShortCircuitResult, case: FaultCase, boards: Sequence[str]) -> int | None:
    """Return the board with the greatest I''k among those of the island's first voltage."""
    names = result.places.names
    places = [names.index(b) for b in boards if b in names and case.live[names.index(b)]]
    if not places:
        return None
    u: FloatArray = result.places.u_nominal_v
    return max((p for p in places if u[p] == u[places[0]]), key=lambda p: float(case.ik_initial_a[p]))


def _worked_quick(rows: Sequence[tuple[Value, ...]]) -> Worked | None:
    for row in rows:
        estimate, detail, multiple = row[5], row[6], row[9]
        if isinstance(multiple, float) and math.isfinite(multiple):
            line = WorkedLine(
                label="Estimate / I''k",
                formula="estimate / I''k",
                figures=f"{figure(float(estimate or 0.0), 'kA')} / {figure(float(detail or 0.0), 'kA')}",
                result=quantity(multiple, ""),
            )
            return Worked(row=f"{row[0]}, {row[2]}", lines=(line,))
    return None


def decay_table(outcome: StudyOutcome, result: ShortCircuitResult) -> Table:
    """Return current against time at the leading boards in the mode with the greatest peak."""
    columns = [
        text_column("board", "Board"),
        text_column("mode", "Mode"),
        Column(key="time_s", heading="Time", unit="s", most_decimals=3, exact=True),
        ka_column("iac_ka", "Iac", 3),
        ka_column("idc_ka", "idc", 3),
        ka_column("envelope_ka", "Envelope √2 Iac + idc", 3),
    ]
    times = np.array(DECAY_TIMES_S)
    rows: list[tuple[Value, ...]] = []
    for group in one_busbar(result, leading_boards(outcome, result)):
        mode = governing_mode(result, group[0])
        assert mode is not None
        names = ", ".join(result.places.names[p] for p in group)
        at = curves(mode.maximum, group[0], times)
        for t, iac, idc, envelope in zip(times, at.iac_a, at.idc_a, at.envelope_a, strict=True):
            rows.append((names, mode.mode, float(t), ka(iac), ka(idc), ka(envelope)))
    return make_table(
        key="fault_decay",
        title="Current against time on the main, emergency and propulsion boards",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Maximum case in the mode with the greatest peak; sections of one busbar stand together. Beyond "
            "0.1 s the formulas hold only on the board that the sets feed directly.",
        ),
    )
