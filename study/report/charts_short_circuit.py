"""Figures of the short-circuit study: current against time at the leading boards, by component and source."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Any, Final

import numpy as np

from study.report.charts_fault_simulation import simulation_figures
from study.report.content import StudyOutcome
from study.report.fault_view import (
    SHEET,
    curves,
    governing_mode,
    instant,
    ka,
    leading_boards,
    least,
    one_busbar,
    solved_modes,
)
from study.report.findings import listed
from study.report.numbers import quantity
from study.report.plotting import (
    Drawing,
    canvas,
    colour,
    drawing,
    legend_below,
    legend_rows,
)
from study.report.plotting import place as frame
from study.report.style import ACCENT, INK, QUIET
from study.results.arrays import FloatArray
from study.results.short_circuit import FaultCase, ModeShortCircuit, ShortCircuitResult

_SHORT_S: Final = np.concatenate([np.arange(0.0, 0.02, 0.0005), np.arange(0.02, 0.1001, 0.002)])
_LONG_S: Final = np.geomspace(0.001, 10.0, 61)
_MOST_SOURCES: Final = 7
_COMPONENTS: Final = (
    "envelope of both",
    "a.c., √2 Iac",
    "d.c., idc",
    "ip at half cycle",
    "greatest peak",
)
_MOST_FIGURES: Final = 20


def short_circuit_figures(outcome: StudyOutcome) -> tuple[Drawing, ...]:
    """Draw current against time at the main, emergency and propulsion boards, then the simulated faults.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Drawing
        Empty where the study has no short-circuit study.
    """
    result = outcome.short_circuit
    if result is None or not solved_modes(result):
        return ()
    groups = one_busbar(result, leading_boards(outcome, result))
    drawn = [_board(result, group, i) for i, group in enumerate(groups[:_MOST_FIGURES])]
    rest = len(groups) - len(drawn)
    if rest:
        more = f" The curves of {rest} further boards are on sheet {SHEET} of the workbook."
        drawn[-1] = replace(drawn[-1], caption=drawn[-1].caption + more)
    return (*drawn, *simulation_figures(outcome))


def _board(result: ShortCircuitResult, group: Sequence[int], number: int) -> Drawing:
    mode = governing_mode(result, group[0])
    assert mode is not None
    place, case = group[0], mode.maximum
    shown = _leading_sources(case, place)
    minimum = _weakest(result, place)
    labels = [*(name for name, _ in shown), *(["least fault, minimum case"] if minimum else [])]
    below = 0.17 * legend_rows(labels) + 0.14
    above = 0.17 * legend_rows(list(_COMPONENTS)) + 0.12
    height = 3.0 + below + above
    figure = canvas(height)
    bottom = 0.42 + below + above
    left = figure.add_axes(frame(figure, left=0.6, right=4.6, bottom=bottom, top=0.3))
    right = figure.add_axes(frame(figure, left=4.85, right=0.15, bottom=bottom, top=0.3))
    lines = _components(left, result, case, place)
    handles = _contributions(right, case, place, shown)
    if minimum:
        handles += _least(right, minimum.minimum, place)
    legend_below(figure, handles, labels)
    legend_below(figure, lines, list(_COMPONENTS), y_in=below + 0.04)
    names = listed([result.places.names[p] for p in group], 4)
    return drawing(
        figure,
        key=f"fig-fault-{number + 1}",
        title=f"Short circuit on {names} ({mode.mode})",
        caption="Maximum case in the mode with the greatest peak. Left: the first 0.1 s, instantaneous. "
        "Right: the a.c. component by source, r.m.s., up to the high estimate of the sustained current"
        f"{_minimum_words(minimum)} Beyond 0.1 s the formulas hold only on the board that the sets feed "
        "directly.",
        description=_words(case, place, shown),
    )


def _minimum_words(minimum: ModeShortCircuit | None) -> str:
    return f"; dashed, the least fault of the minimum case ({minimum.mode})." if minimum else "."


def _words(case: FaultCase, place: int, shown: Sequence[tuple[str, Sequence[int]]]) -> str:
    ip, ac, dc = (quantity(ka(v[place]), "kA") for v in (case.ip_a, case.iac_half_a, case.idc_half_a))
    peak, duty = quantity(ka(case.peak_a[place]), "kA"), quantity(ka(case.sustained_duty_a[place]), "kA")
    parts = "; ".join(
        f"{name} {quantity(ka(sum(case.source_half_a[place, s] for s in rows)), 'kA')}"
        for name, rows in shown
    )
    return (
        f"At half a cycle the a.c. component is {ac} and the d.c. component {dc}, so that the peak is "
        f"{ip}; the greatest peak is {peak}. The current settles at no more than {duty}. By source at "
        f"half a cycle: {parts}."
    )


def _leading_sources(case: FaultCase, place: int) -> list[tuple[str, Sequence[int]]]:
    """Return the sources that give most, and the rest as one."""
    given = case.source_ip_a[place]
    ranked = [int(s) for s in np.argsort(-given, kind="stable") if given[s] > 0.0]
    many = len(ranked) > _MOST_SOURCES + 1
    first = ranked[:_MOST_SOURCES] if many else ranked
    shown: list[tuple[str, Sequence[int]]] = [(clipped(case.sources.names[s], 34), [s]) for s in first]
    if many:
        shown.append((f"{len(ranked) - _MOST_SOURCES} others", ranked[_MOST_SOURCES:]))
    return shown


def _weakest(result: ShortCircuitResult, place: int) -> ModeShortCircuit | None:
    """Return the mode with the least fault current at a place at 0.1 s."""
    modes = [m for m in solved_modes(result) if m.minimum.live[place]]
    values = [float(m.minimum.least_a[place, instant(m.minimum, 0.1)]) for m in modes]
    found = least([m.mode for m in modes], values)
    return next((m for m in modes if found and m.mode == found.modes[0]), None)


def _components(axes: Any, result: ShortCircuitResult, case: FaultCase, place: int) -> list[Any]:
    at = curves(case, place, _SHORT_S)
    lines = []
    parts = (at.envelope_a, np.sqrt(2.0) * at.iac_a, at.idc_a)
    for i, (values, pattern) in enumerate(zip(parts, ("-", (0, (5, 1.6)), (0, (1.5, 1.3))), strict=True)):
        lines += axes.plot(at.time_s, values / 1000.0, color=colour(i), linestyle=pattern)
    half_s, ip = 0.5 / result.f_hz, ka(case.ip_a[place])
    lines += axes.plot([half_s], [ip], "o", color=ACCENT, markersize=6, markeredgecolor="white")
    peak = ka(case.peak_a[place])
    lines.append(axes.axhline(peak, color=INK, linewidth=0.9, linestyle=(0, (6, 1.4, 1.4, 1.4))))
    axes.set_title("Current against time")
    axes.set_xlabel("Time [s]")
    axes.set_ylabel("Instantaneous current [kA]")
    axes.set_xlim(0.0, 0.1)
    axes.set_ylim(bottom=0.0)
    return lines


def _contributions(
    axes: Any, case: FaultCase, place: int, shown: Sequence[tuple[str, Sequence[int]]]
) -> list[Any]:
    at = curves(case, place, _LONG_S)
    handles = []
    base: FloatArray = np.zeros(len(_LONG_S))
    for i, (_, rows) in enumerate(shown):
        top = base + at.source_iac_a[list(rows)].sum(axis=0) / 1000.0
        area = axes.fill_between(_LONG_S, base, top, color=colour(i), linewidth=0.4, edgecolor="white")
        handles.append(area)
        base = top
    axes.set_xscale("log")
    axes.set_xlim(_LONG_S[0], _LONG_S[-1])
    axes.set_xticks([0.001, 0.01, 0.1, 1.0, 10.0], ["0.001", "0.01", "0.1", "1", "10"])
    axes.minorticks_off()
    axes.axvline(0.1, color=QUIET, linewidth=0.7, linestyle=(0, (2, 2)))
    axes.set_title("Contributions by source")
    axes.set_xlabel("Time [s]")
    axes.set_ylabel("A.c. component, r.m.s. [kA]")
    axes.set_ylim(bottom=0.0)
    return handles


def _least(axes: Any, case: FaultCase, place: int) -> list[Any]:
    later = case.time_s >= _LONG_S[0]
    times, values = case.time_s[later], case.least_a[place, later] / 1000.0
    # A light line under the dashes, so that they stand out from every colour.
    axes.plot(times, values, color="white", linewidth=2.6, alpha=0.75)
    return list(axes.plot(times, values, color=INK, linestyle=(0, (4, 2)), linewidth=1.1))


def clipped(name: str, most: int) -> str:
    """Return a name, cut where it is too long for a figure."""
    return name if len(name) <= most else name[: most - 1] + "…"
