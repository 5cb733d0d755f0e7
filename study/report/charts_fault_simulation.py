"""Figures of the simulated faults: the current of one phase, and the a.c. component, beside IEC 61363-1."""

from __future__ import annotations

from dataclasses import replace
from typing import Any, Final

from study.report.content import StudyOutcome
from study.report.fault_view import SHEET, ka
from study.report.numbers import quantity
from study.report.plotting import Drawing, canvas, colour, drawing, legend_below, legend_rows
from study.report.plotting import place as frame
from study.report.style import ACCENT
from study.results.short_circuit import SimulatedFault

_MOST_FIGURES: Final = 6
_LABELS: Final = (
    "simulated",
    "IEC 61363-1",
    "ip at half cycle, IEC 61363-1",
)


def simulation_figures(outcome: StudyOutcome) -> tuple[Drawing, ...]:
    """Draw every simulated fault.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Drawing
        Empty where no fault is simulated.
    """
    result = outcome.short_circuit
    faults = [f for f in result.simulated if f.simulated] if result is not None else []
    if result is None or not faults:
        return ()
    half_s = 0.5 / result.f_hz
    drawn = [_drawing(fault, k, half_s) for k, fault in enumerate(faults[:_MOST_FIGURES])]
    if len(faults) > len(drawn):
        more = f" {len(faults) - len(drawn)} further faults are on sheet {SHEET} of the workbook."
        drawn[-1] = replace(drawn[-1], caption=drawn[-1].caption + more)
    return tuple(drawn)


def _drawing(fault: SimulatedFault, number: int, half_s: float) -> Drawing:
    labels = list(_LABELS)
    below = 0.17 * legend_rows(labels) + 0.14
    figure = canvas(2.9 + below)
    left = figure.add_axes(frame(figure, left=0.6, right=4.6, bottom=0.42 + below, top=0.3))
    right = figure.add_axes(frame(figure, left=4.85, right=0.15, bottom=0.42 + below, top=0.3))
    handles = _wave(left, fault, half_s)
    _component(right, fault)
    legend_below(figure, handles, labels)
    return drawing(
        figure,
        key=f"fig-fault-simulated-{number + 1}",
        title=f"Simulated fault at {fault.place} ({fault.mode})",
        caption="All windings of the machines, fault at the worst point of the wave. Left: the phase with "
        "the greatest peak, under the envelope √2 Iac + idc of IEC 61363-1. Right: the a.c. component.",
        description=_words(fault),
    )


def _words(fault: SimulatedFault) -> str:
    currents = (fault.peak_a, fault.ship_ip_a, fault.iac_half_a, fault.ship_iac_half_a)
    peak, ip, half, ship_half = (quantity(ka(value), "kA") for value in currents)
    return (
        f"The greatest peak is {peak} simulated; ip of IEC 61363-1 is {ip}. The a.c. component at half a "
        f"cycle is {half} simulated and {ship_half} by the standard."
    )


def _wave(axes: Any, fault: SimulatedFault, half_s: float) -> list[Any]:
    times = fault.wave_time_s
    lines = list(axes.plot(times, fault.wave_a / 1000.0, color=colour(0)))
    pattern = (0, (5, 1.6))
    lines += axes.plot(times, fault.ship_envelope_a / 1000.0, color=colour(1), linestyle=pattern)
    lines += axes.plot(
        [half_s], [ka(fault.ship_ip_a)], "o", color=ACCENT, markersize=6, markeredgecolor="white"
    )
    axes.set_title("Current of one phase")
    axes.set_xlabel("Time [s]")
    axes.set_ylabel("Instantaneous current [kA]")
    axes.set_xlim(0.0, float(times[-1]))
    return lines


def _component(axes: Any, fault: SimulatedFault) -> None:
    axes.plot(fault.time_s, fault.iac_a / 1000.0, color=colour(0))
    axes.plot(fault.time_s, fault.ship_iac_a / 1000.0, color=colour(1), linestyle=(0, (5, 1.6)))
    axes.set_title("A.c. component")
    axes.set_xlabel("Time [s]")
    axes.set_ylabel("A.c. component, r.m.s. [kA]")
    axes.set_xlim(0.0, float(fault.time_s[-1]))
    axes.set_ylim(bottom=0.0)
