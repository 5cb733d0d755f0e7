"""The traces of the simulated cases, thinned, for the charts of the sheet and for the JSON file."""

from __future__ import annotations

from typing import Final

import numpy as np

from study.report.numbers import percent
from study.report.tables import Column, Table, make_table, percent_column, text_column
from study.results.arrays import IntArray
from study.results.dips import DipsResult, SimulatedCase

_SHEET: Final = "R Voltage dips"
_BOARD_ROWS: Final = 160
_SET_ROWS: Final = 48


def trace_tables(result: DipsResult) -> tuple[Table, ...]:
    """Return the traces of boards and of sets.

    Parameters
    ----------
    result : DipsResult
        The simulated cases.

    Returns
    -------
    tuple of Table
        Both may be without rows.
    """
    return board_traces(result), set_traces(result)


def kept_rows(case: SimulatedCase, most: int) -> IntArray:
    """Return the instants that a table shows: every n-th, with the extremes of the voltage.

    Parameters
    ----------
    case : SimulatedCase
        A simulated case.
    most : int
        About so many.

    Returns
    -------
    ndarray of int, shape (instant,)
        Rising.
    """
    n = len(case.time_s)
    if n == 0:
        return np.zeros(0, np.int64)
    spread = np.linspace(0, n - 1, min(most, n)).round().astype(np.int64)
    u = case.u_board_pu
    return np.unique(np.concatenate([spread, [int(np.argmin(u)), int(np.argmax(u))]]))


def board_traces(result: DipsResult) -> Table:
    """Return voltage and frequency against time."""
    rows = [
        (
            case.case,
            case.time_s[k],
            percent(case.u_board_pu[k]),
            percent(case.u_worst_pu[k]),
            case.f_hz[k],
        )
        for case in result.cases
        if case.simulated
        for k in kept_rows(case, _BOARD_ROWS)
    ]
    return make_table(
        key="dips_traces",
        title="Voltage and frequency against time",
        sheet=_SHEET,
        columns=[
            text_column("case", "Case"),
            Column(key="time_s", heading="Time", unit="s", most_decimals=3),
            percent_column("u_percent", "Voltage of the board judged", most_decimals=2),
            percent_column("u_worst_percent", "Voltage of the worst board", most_decimals=2),
            Column(key="f_hz", heading="Frequency", unit="Hz", most_decimals=3),
        ],
        rows=rows,
    )


def set_traces(result: DipsResult) -> Table:
    """Return field, kW and kvar of every set against time."""
    rows = [
        (
            case.case,
            s.name,
            case.time_s[k],
            percent(s.u_pu[k]),
            s.field_pu[k],
            s.p_kw[k],
            s.q_kvar[k],
            percent(s.speed_pu[k]),
        )
        for case in result.cases
        if case.simulated
        for s in case.sets
        for k in kept_rows(case, _SET_ROWS)
    ]
    return make_table(
        key="dips_set_traces",
        title="Sets against time",
        sheet=_SHEET,
        columns=[
            text_column("case", "Case"),
            text_column("genset", "Set"),
            Column(key="time_s", heading="Time", unit="s", most_decimals=3),
            percent_column("u_percent", "Terminal voltage", most_decimals=2),
            Column(key="field_pu", heading="Field", unit="x rated-load field"),
            Column(key="p_kw", heading="Active power", unit="kW"),
            Column(key="q_kvar", heading="Reactive power", unit="kvar"),
            percent_column("speed_percent", "Speed", most_decimals=2),
        ],
        rows=rows,
    )
