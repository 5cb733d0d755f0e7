"""Tables of the quick estimates: every motor started in every mode, and the largest that can be started."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from study.model.plant import Plant
from study.report.numbers import percent
from study.report.tables import (
    Column,
    Table,
    Worked,
    WorkedLine,
    make_table,
    percent_column,
    text_column,
)
from study.results.dips import START_METHODS, DipsResult, ReductionTerms, StartEstimates

_SHEET = "R Voltage dips"
_SHOWN = 5


def start_tables(plant: Plant, result: DipsResult) -> tuple[Table, ...]:
    """Return the estimates of every start, and the largest starts.

    Parameters
    ----------
    plant : Plant
        Says what is in use in each mode.
    result : DipsResult
        The estimates.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    return estimates_table(plant, result), largest_table(result)


def estimates_table(plant: Plant, result: DipsResult) -> Table:
    """Return the dip of every start, the deepest of each mode first."""
    columns = [
        text_column("mode", "Mode"),
        text_column("load", "Motor"),
        text_column("in_use", "In use in the mode"),
        text_column("method", "Started"),
        Column(key="line_current_a", heading="Line current", unit="A"),
        Column(key="line_cos_phi", heading="Its power factor"),
        text_column("set_board", "Board of the sets"),
        percent_column("u_before_percent", "Voltage there before", most_decimals=2),
        percent_column("u_impedance_percent", "At start, load before as impedance", most_decimals=2),
        percent_column("u_current_percent", "As constant current", most_decimals=2),
        percent_column("u_power_percent", "As constant power", most_decimals=2),
        percent_column("u_first_cycle_percent", "In the first cycle, by X''d", most_decimals=2),
        percent_column("dip_percent", "Deepest of the three dips", most_decimals=2),
        percent_column("u_terminal_percent", "At the motor's terminals", most_decimals=2),
        Column(key="torque_pu", heading="Torque at standstill", unit="x rated"),
        text_column("worst_board", "Other board that falls most"),
        percent_column("u_worst_percent", "Voltage there", most_decimals=2),
        percent_column("u_running_percent", "At the sets when it runs", most_decimals=2),
        Column(key="p_before_kw", heading="Engines before", unit="kW"),
        Column(key="p_start_kw", heading="Engines at start", unit="kW"),
        Column(key="p_limit_kw", heading="110 % of the engines", unit="kW"),
    ]
    rows = [row for mode in result.estimates if mode.solved for row in _rows(plant, mode)]
    return make_table(
        key="dips_starts",
        title="Quick estimate of every motor's start",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Sets as a constant e.m.f. behind Ra + jX'd (what a meter shows for 0.1 to 0.2 s), every motor "
            "that can be fed in the mode, one unit at a time on top of the others. Voltages of boards in % "
            "of nominal, of terminals in % of the motor's rated voltage; the columns after the first three "
            "take the load before as an impedance. Motors on converters draw no starting current.",
        ),
        worked=_worked(result),
        group_by=("mode",),
        shown_per_group=_SHOWN,
    )


def _rows(plant: Plant, e: StartEstimates) -> Iterator[tuple[object, ...]]:
    demand = plant.mode(e.mode).demand
    for k in np.argsort(-e.dip_pu, kind="stable").tolist():
        used = demand.get(e.loads[k])
        yield (
            e.mode,
            e.loads[k],
            "yes" if used is not None and used.in_use > 0.0 else "no",
            e.methods[k],
            e.line_current_a[k],
            e.line_cos_phi[k],
            e.set_boards[k],
            percent(e.u_set_board_before_pu[k]),
            *(percent(u) for u in e.u_set_board_pu[:, k]),
            percent(e.u_set_board_first_cycle_pu[k]),
            percent(e.dip_pu[k]),
            percent(e.u_terminal_pu[0, k]),
            e.torque_pu[k],
            e.worst_boards[k],
            percent(e.u_worst_board_pu[k]),
            percent(e.u_set_board_running_pu[k]),
            e.p_engine_before_kw[k],
            e.p_engine_start_kw[k],
            e.p_engine_limit_kw[k],
        )


def _worked(result: DipsResult) -> Worked | None:
    terms = [(e.mode, e.worked) for e in result.estimates if e.solved and e.worked is not None]
    if not terms:
        return None
    mode, t = terms[0]
    line = WorkedLine(
        label=f"Voltage at {t.board}",
        formula="U before x (Z path + Z motor) / (Z source + Z path + Z motor), per unit of "
        f"{t.s_base_kva:.0f} kVA and {t.u_base_v:.0f} V",
        figures=_figures(t),
        result=f"{abs(t.v_after):.4f} pu",
    )
    return Worked(row=f"{t.load} ({mode})", lines=(line,))


def _figures(t: ReductionTerms) -> str:
    before, path, motor, source = (_complex(z) for z in (t.v_before, t.z_path, t.z_motor, t.z_source))
    return f"|{before} x ({path} + {motor}) / ({source} + {path} + {motor})|"


def _complex(z: complex) -> str:
    sign = "−" if z.imag < 0.0 else "+"
    return f"({z.real:.4f} {sign} j{abs(z.imag):.4f})"


def largest_table(result: DipsResult) -> Table:
    """Return the largest motor that each board with sets can start."""
    columns = [
        text_column("mode", "Mode"),
        text_column("board", "Board"),
        percent_column("dip_allowed_percent", "Dip allowed"),
        *(Column(key=f"p_{_key(m)}_kw", heading=f"Largest motor, {m}", unit="kW") for m in START_METHODS),
        *(
            Column(key=f"engine_{_key(m)}_kw", heading=f"By the engines, {m}", unit="kW")
            for m in START_METHODS
        ),
    ]
    rows = [
        (
            row.mode,
            row.board,
            percent(row.dip_allowed_pu),
            *(_finite(p) for p in row.p_rated_kw),
            *(_finite(p) for p in row.p_engine_kw),
        )
        for row in result.largest
    ]
    return make_table(
        key="dips_largest",
        title="Largest motor that can be started",
        sheet=_SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "A usual cage motor of four poles on the board itself, on top of the load of the mode: by the "
            "dip allowed, and by 110 % of the engines at its starting power. Autotransformer at 65 %, soft "
            "starter at 3.5 times rated current (common practice, no source).",
        ),
    )


def _key(method: str) -> str:
    return method.replace("-", "_").replace(" ", "_")


def _finite(value: float) -> float:
    return float(value) if math.isfinite(value) else math.nan
