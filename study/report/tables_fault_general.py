"""Tables of IEC 60909 beside IEC 61363-1, and its comparison with the library."""

from __future__ import annotations

import math
from collections.abc import Iterable

import numpy as np

from study.report.content import StudyOutcome
from study.report.fault_view import SHEET, CaseView, cases, ka, ka_column, ranked_boards
from study.report.numbers import figure, percent, quantity
from study.report.tables import (
    Column,
    Table,
    Value,
    Worked,
    WorkedLine,
    make_table,
    percent_column,
    text_column,
)
from study.results.short_circuit import ShortCircuitResult

_SHOWN = 8
_SQRT2 = math.sqrt(2.0)


def general_tables(outcome: StudyOutcome, result: ShortCircuitResult) -> tuple[Table, ...]:
    """Return IEC 60909 of every board, and its comparison with the library.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.
    result : ShortCircuitResult
        Its short-circuit currents.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    return general_table(outcome, result), agreement_table(result)


def general_table(outcome: StudyOutcome, result: ShortCircuitResult) -> Table:
    """Return the currents of IEC 60909 of boards and of the terminals of sources and transformers."""
    columns = [
        text_column("mode", "Mode"),
        text_column("case", "Case"),
        text_column("place", "Place"),
        text_column("kind", "Kind"),
        Column(key="voltage_factor", heading="c", most_decimals=2),
        ka_column("ik_3ph_ka", "I''k"),
        ka_column("ik_2ph_ka", "I''k2"),
        ka_column("ik_earth_ka", "I''k1", missing="not earthed"),
        Column(key="kappa", heading="κ = ip / (√2 I''k)", most_decimals=3),
        ka_column("ip_3ph_ka", "ip"),
        ka_column("ip_2ph_ka", "ip2"),
        ka_column("ib_ka", "Ib"),
        ka_column("ik_steady_ka", "Ik"),
        ka_column("ith_ka", "Ith"),
        ka_column("ik_library_ka", "I''k by pandapower", missing="not compared"),
        ka_column("ip_library_ka", "ip by pandapower", missing="not compared"),
        ka_column("ik_2ph_library_ka", "I''k2 by pandapower", missing="not compared"),
        percent_column("ip_to_ship_percent", "ip, of that by IEC 61363-1"),
    ]
    rows = [
        _general_row(view, result, place)
        for view in cases(result)
        for place in _general_places(outcome, result, view)
    ]
    return make_table(
        key="short_circuit_general",
        title="IEC 60909 beside it",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(_general_note(result),),
        worked=_worked_general(outcome, result),
        group_by=("mode", "case"),
        shown_per_group=_SHOWN,
    )


def _general_note(result: ShortCircuitResult) -> str:
    delays = dict.fromkeys((view.general.delay_s, view.general.duration_s) for view in cases(result))
    times = "; ".join(
        f"Ib at {quantity(1000.0 * delay, 'ms')}, Ith over {quantity(duration, 's')}"
        for delay, duration in delays
    )
    return f"{times or 'No mode has a solution'}. I''k1 is the line-to-earth fault of earthed systems."


def _general_places(outcome: StudyOutcome, result: ShortCircuitResult, view: CaseView) -> Iterable[int]:
    kinds = result.places.kinds
    wanted = ("transformer terminals", "source terminals")
    others = [int(p) for p in np.flatnonzero(view.ship.live) if kinds[int(p)] in wanted]
    return (*ranked_boards(outcome, result, view.ship), *others)


def _general_row(view: CaseView, result: ShortCircuitResult, p: int) -> tuple[Value, ...]:
    g, ship = view.general, view.ship
    initial, peak = float(g.ik_3ph_a[p]), float(g.ip_3ph_a[p])
    return (
        view.mode,
        view.name,
        result.places.names[p],
        result.places.kinds[p],
        float(g.c[p]),
        ka(initial),
        ka(g.ik_2ph_a[p]),
        ka(g.ik_earth_a[p]),
        peak / (_SQRT2 * initial) if initial > 0 else math.nan,
        ka(peak),
        *(ka(v[p]) for v in (g.ip_2ph_a, g.ib_a, g.ik_steady_a, g.ith_a)),
        *(ka(v[p]) for v in (g.pandapower_ik_3ph_a, g.pandapower_ip_3ph_a, g.pandapower_ik_2ph_a)),
        percent(peak / float(ship.ip_a[p])) if ship.ip_a[p] > 0 else math.nan,
    )


def _worked_general(outcome: StudyOutcome, result: ShortCircuitResult) -> Worked | None:
    for view in cases(result):
        for place in _general_places(outcome, result, view):
            initial, peak = ka(view.general.ik_3ph_a[place]), ka(view.general.ip_3ph_a[place])
            if not (initial > 0 and peak > 0):
                continue
            line = WorkedLine(
                label="κ",
                formula="ip / (√2 · I''k)",
                figures=f"{figure(peak, 'kA')} / (√2 × {figure(initial, 'kA')})",
                result=quantity(peak / (_SQRT2 * initial), ""),
            )
            return Worked(row=f"{view.mode}, {view.name}, {result.places.names[place]}", lines=(line,))
    return None


def agreement_table(result: ShortCircuitResult) -> Table:
    """Return how far our own IEC 60909 lies from the library's for the same network."""
    return make_table(
        key="short_circuit_agreement",
        title="Our IEC 60909 held against pandapower",
        sheet=SHEET,
        columns=[
            text_column("mode", "Mode"),
            text_column("case", "Case"),
            text_column("compared", "What was compared"),
            Column(key="largest_difference_pu", heading="Largest relative difference", kind="tiny"),
        ],
        rows=[
            (view.mode, view.name, view.general.comparison, view.general.largest_difference)
            for view in cases(result)
        ],
    )
