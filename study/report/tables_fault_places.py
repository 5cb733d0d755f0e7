"""Table of every fault place that is not a board: consumers at the end of their cables, terminals."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from study.report.content import StudyOutcome, cells_by_name
from study.report.fault_view import SHEET, ka, ka_column, solved_modes
from study.report.tables import Column, Table, Value, Worked, cell_column, make_table, text_column
from study.report.tables_fault_boards import LEAST_HEADING, OUTSIDE, least_a, peak_lines
from study.results.short_circuit import FaultCase, ModeShortCircuit, ShortCircuitResult

_SHOWN = 4


def places_table(outcome: StudyOutcome, result: ShortCircuitResult) -> Table:
    """Return every place that is not a board: consumers, cable ends, terminals of sources, transformers."""
    columns = [
        text_column("mode", "Mode"),
        text_column("kind", "Place"),
        text_column("place", "Equipment"),
        text_column("board", "Board"),
        Column(key="u_nominal_v", heading="Nominal", unit="V", most_decimals=0),
        ka_column("ik_initial_ka", "I''k", 3, digits=3),
        ka_column("iac_half_ka", "Iac(T/2)", 3, digits=3),
        ka_column("idc_half_ka", "idc(T/2)", 3, digits=3),
        ka_column("ip_ka", "ip", 3, digits=3),
        ka_column("peak_ka", "Greatest peak", 3, digits=3),
        ka_column("ip_equivalent_ka", "ip by equivalent generator", 3, digits=3),
        Column(key="r_over_x", heading="R/X", most_decimals=2, digits=3),
        ka_column("sustained_duty_ka", "Sustained, high", 3, digits=3),
        ka_column("ik_general_ka", "I''k by IEC 60909", 3, digits=3),
        ka_column("ip_general_ka", "ip by IEC 60909", 3, digits=3),
        ka_column("ik_lowest_ka", "I''k, minimum case", 3, digits=3),
        ka_column("least_ka", LEAST_HEADING, 3, digits=3),
        ka_column("sustained_reach_ka", "Sustained, minimum case", 3, digits=3),
        text_column("remark", "Remark", kind="long text"),
        cell_column(),
    ]
    cells = cells_by_name(outcome.plant)
    rows = [
        _place_row(mode, result, place, cells)
        for mode in solved_modes(result)
        for place in _ranked_places(result, mode.maximum)
    ]
    return make_table(
        key="short_circuit_places",
        title="Consumers, cable ends and terminals",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "The place of a consumer is the far end of its cable. Maximum case unless the heading says "
            "otherwise; by falling peak within each kind. The equivalent generator is the standard's way "
            "behind an impedance; ip beside it adds the sources one by one, each with its own decay.",
        ),
        worked=_worked_place(result),
        group_by=("mode", "kind"),
        shown_per_group=_SHOWN,
    )


def _ranked_places(result: ShortCircuitResult, case: FaultCase) -> Sequence[int]:
    kinds = result.places.kinds
    order = {kind: i for i, kind in enumerate(dict.fromkeys(kinds))}
    places = [p for p in np.flatnonzero(case.live).tolist() if kinds[p] != "board"]
    return sorted(places, key=lambda p: (order[kinds[p]], -float(case.ip_a[p])))


def _place_row(
    mode: ModeShortCircuit, result: ShortCircuitResult, place: int, cells: dict[str, str]
) -> tuple[Value, ...]:
    case, low, general = mode.maximum, mode.minimum, mode.iec60909_maximum
    where = result.places
    fed = bool(low.live[place])
    return (
        mode.mode,
        where.kinds[place],
        where.names[place],
        where.boards[place],
        float(where.u_nominal_v[place]),
        *(
            ka(v[place])
            for v in (case.ik_initial_a, case.iac_half_a, case.idc_half_a, case.ip_a, case.peak_a)
        ),
        _known(case.equivalent_ip_a[place]),
        float(case.r_over_x[place]),
        ka(case.sustained_duty_a[place]),
        ka(general.ik_3ph_a[place]),
        ka(general.ip_3ph_a[place]),
        ka(low.ik_initial_a[place]) if fed else None,
        ka(least_a(low, place)) if fed else None,
        ka(low.sustained_reach_a[place]) if fed else None,
        OUTSIDE if case.parallel_paths[place] else "",
        cells.get(where.names[place], ""),
    )


def _known(value_a: float) -> float | None:
    return ka(value_a) if math.isfinite(value_a) else None


def _worked_place(result: ShortCircuitResult) -> Worked | None:
    for mode in solved_modes(result):
        for place in _ranked_places(result, mode.maximum):
            row = f"{mode.mode}, {result.places.names[place]}"
            return Worked(row=row, lines=peak_lines(mode.maximum, place)[:1])
    return None
