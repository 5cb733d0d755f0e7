"""Figures of the simulated cases: voltage in its envelope, frequency, field, kW and kvar of the sets."""

from __future__ import annotations

from dataclasses import replace
from typing import Any, Final

import numpy as np

from study.report.content import StudyOutcome
from study.report.numbers import percent, quantity
from study.report.plotting import Drawing, canvas, colour, drawing, legend_below, legend_rows
from study.report.plotting import place as frame
from study.report.style import INK, QUIET
from study.report.tables_dips import SHEET
from study.results.arrays import FloatArray
from study.results.dips import SetTrace, SimulatedCase

_MOST_FIGURES: Final = 16
_MOST_SETS: Final = 7
_LIMIT: Final[Any] = (0, (4, 2))
_ENVELOPE: Final = "permitted envelope"


def dips_figures(outcome: StudyOutcome) -> tuple[Drawing, ...]:
    """Draw every simulated case.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Drawing
        Empty where nothing is simulated.
    """
    if outcome.dips is None:
        return ()
    cases = [case for case in outcome.dips.cases if case.simulated]
    drawn = [_case(outcome, case, n) for n, case in enumerate(cases[:_MOST_FIGURES])]
    if len(cases) > len(drawn):
        more = f" {len(cases) - len(drawn)} further cases are on sheet {SHEET} of the workbook."
        drawn[-1] = replace(drawn[-1], caption=drawn[-1].caption + more)
    return tuple(drawn)


def _case(outcome: StudyOutcome, case: SimulatedCase, number: int) -> Drawing:
    sets = case.sets[:_MOST_SETS]
    labels = [*_voltage_labels(case), _ENVELOPE, *(s.name for s in sets)]
    below = 0.17 * legend_rows(labels) + 0.14
    figure = canvas(4.3 + below)
    low = {"bottom": 0.42 + below, "top": 2.45}
    high = {"bottom": 2.42 + below, "top": 0.3}
    left, right = {"left": 0.6, "right": 4.6}, {"left": 4.95, "right": 0.15}
    axes = [
        figure.add_axes(frame(figure, **side, **level)) for level in (high, low) for side in (left, right)
    ]
    handles = _voltage(axes[0], outcome, case)
    _frequency(axes[1], outcome, case)
    handles += _field(axes[2], case, sets)
    _power(axes[3], case, sets)
    for one in axes:
        one.set_xlim(float(case.time_s[0]), float(case.time_s[-1]))
    for one in axes[2:]:
        one.set_xlabel("Time [s]")
    legend_below(figure, handles, labels)
    return drawing(
        figure,
        key=f"fig-dip-{number + 1}",
        title=f"{case.case} ({case.mode})",
        caption="Above: voltage of the board judged and of the worst board, with the permitted envelope; "
        "frequency. Below: field of each set in multiples of its rated-load field; power of each set, kW "
        "full and kvar dashed.",
        description=_words(case),
    )


def _words(case: SimulatedCase) -> str:
    u, f = case.voltage, case.frequency
    back = "does not come back" if np.isinf(u.recovery_s) else f"is back after {quantity(u.recovery_s, 's')}"
    return (
        f"The voltage of {case.board} goes from {quantity(percent(u.before), '%')} of nominal to between "
        f"{quantity(percent(u.least), '%')} and {quantity(percent(u.largest), '%')} and {back}; the "
        f"frequency lies between {quantity(f.least, 'Hz')} and {quantity(f.largest, 'Hz')}."
    )


def _voltage_labels(case: SimulatedCase) -> list[str]:
    own = f"voltage of {case.board}"
    return [own, f"voltage of {case.worst_board}"] if case.worst_board not in ("", case.board) else [own]


def _voltage(axes: Any, outcome: StudyOutcome, case: SimulatedCase) -> list[Any]:
    lines = list(axes.plot(case.time_s, 100.0 * case.u_board_pu, color=INK, linewidth=1.4))
    if len(_voltage_labels(case)) > 1:
        lines += axes.plot(
            case.time_s, 100.0 * case.u_worst_pu, color=QUIET, linewidth=0.9, linestyle=(0, (2, 1))
        )
    time_s, low, high = _envelope(outcome, case)
    lines += axes.plot(time_s, low, color=colour(1), linewidth=1.0, linestyle=_LIMIT)
    axes.plot(time_s, high, color=colour(1), linewidth=1.0, linestyle=_LIMIT)
    axes.set_title("Voltage")
    axes.set_ylabel("Voltage [% of nominal]")
    return lines


def _number(outcome: StudyOutcome, key: str) -> float:
    used = outcome.limit(key)
    return float(used.limit) if used is not None else float("nan")


def _envelope(outcome: StudyOutcome, case: SimulatedCase) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return time and the two limits: the transient band, then the band about the value after."""
    start, end = case.starts_at_s, float(case.time_s[-1])
    back = min(start + _number(outcome, "recovery_time"), end)
    band, after = _number(outcome, "voltage_recovery_band"), percent(case.voltage.after)
    low, high = 100.0 - _number(outcome, "transient_low"), 100.0 + _number(outcome, "transient_high")
    return (
        np.array([start, back, back, end]),
        np.array([low, low, after - band, after - band]),
        np.array([high, high, after + band, after + band]),
    )


def _frequency(axes: Any, outcome: StudyOutcome, case: SimulatedCase) -> None:
    axes.plot(case.time_s, case.f_hz, color=INK, linewidth=1.4)
    rated = outcome.plant.project.f_rated_hz
    off = rated * _number(outcome, "transient_frequency") / 100.0
    for value in (rated - off, rated + off):
        axes.axhline(value, color=colour(1), linewidth=1.0, linestyle=_LIMIT)
    axes.set_title("Frequency")
    axes.set_ylabel("Frequency [Hz]")


def _field(axes: Any, case: SimulatedCase, sets: tuple[SetTrace, ...]) -> list[Any]:
    lines: list[Any] = []
    for i, s in enumerate(sets):
        lines += axes.plot(case.time_s, s.field_pu, color=colour(i))
    axes.set_title("Field")
    axes.set_ylabel("Field [x rated-load field]")
    axes.set_ylim(bottom=0.0)
    return lines


def _power(axes: Any, case: SimulatedCase, sets: tuple[SetTrace, ...]) -> None:
    for i, s in enumerate(sets):
        axes.plot(case.time_s, s.p_kw, color=colour(i))
        axes.plot(case.time_s, s.q_kvar, color=colour(i), linestyle=(0, (3, 1.5)), linewidth=1.0)
    axes.set_title("Power of the sets, kW full, kvar dashed")
    axes.set_ylabel("Power [kW], [kvar]")
