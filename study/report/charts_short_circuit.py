"""Figures of the short-circuit study: current against time at the leading boards, peaks over the modes."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Final

import numpy as np

from study.report.content import StudyOutcome
from study.report.fault_view import (
    board_places,
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
    SMALL,
    TALLEST_IN,
    Drawing,
    canvas,
    colour,
    drawing,
    legend_below,
    legend_rows,
)
from study.report.plotting import place as frame
from study.report.style import ACCENT, INK, QUIET, RULE
from study.results.arrays import FloatArray
from study.results.short_circuit import FaultCase, ModeShortCircuit, ShortCircuitResult

_SHORT_S: Final = np.concatenate([np.arange(0.0, 0.02, 0.0005), np.arange(0.02, 0.1001, 0.002)])
_LONG_S: Final = np.geomspace(0.001, 10.0, 61)
_MOST_SOURCES: Final = 7
_COMPONENTS: Final = (
    "envelope √2 Iac + idc",
    "a.c. component √2 Iac",
    "d.c. component idc",
    "ip at half a cycle",
    "greatest peak",
)
_MOST_FIGURES: Final = 12
_MOST_BOARDS: Final = 60


def short_circuit_figures(outcome: StudyOutcome) -> tuple[Drawing, ...]:
    """Draw current against time at the leading boards, and the peak of every board over the modes.

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
    groups = one_busbar(result, leading_boards(outcome, result))[:_MOST_FIGURES]
    drawn = [_board(result, group, i) for i, group in enumerate(groups)]
    peaks = _peaks(outcome, result)
    return tuple(drawn if peaks is None else [*drawn, peaks])


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
        f"Right: the a.c. component by source, r.m.s.{_minimum_words(minimum)} Beyond 0.1 s the formulas "
        "hold only on the board that the sets feed directly.",
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
    shown: list[tuple[str, Sequence[int]]] = [(_clipped(case.sources.names[s], 34), [s]) for s in first]
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
    return list(
        axes.plot(
            case.time_s[later],
            case.least_a[place, later] / 1000.0,
            color=INK,
            linestyle=(0, (4, 2)),
            linewidth=1.1,
        )
    )


def _peaks(outcome: StudyOutcome, result: ShortCircuitResult) -> Drawing | None:
    """Draw the range of every board's peak over the modes against its rated peak withstand current."""
    found = {p: _peaks_of(result, p) for p in board_places(result)}
    rated = {b.name: b.peak_withstand_ka for b in outcome.plant.boards}
    live = [p for p in found if found[p]]
    if not live:
        return None
    names = result.places.names
    shown = sorted(live, key=lambda p: _distance(max(found[p]), rated.get(names[p])), reverse=True)
    shown = shown[:_MOST_BOARDS]
    step = min(0.2, (TALLEST_IN - 1.0) / len(shown))
    height = 0.95 + max(0.8, step * len(shown))
    left = min(2.9, 0.3 + 0.06 * max(len(_clipped(names[p], 42)) for p in shown))
    figure = canvas(height)
    axes = figure.add_axes(frame(figure, left=left, right=0.2, bottom=0.7, top=0.12))
    handles: dict[str, Any] = {}
    for y, p in enumerate(shown):
        axes.hlines(y, min(found[p]), max(found[p]), color=ACCENT, linewidth=1.2)
        (handles["ip, one dot for each mode"],) = axes.plot(
            found[p], [y] * len(found[p]), "o", color=ACCENT, markersize=3.4, markeredgewidth=0
        )
        limit = rated.get(names[p])
        if limit is not None:
            (handles["rated peak withstand current"],) = axes.plot(
                [limit], [y], "|", color=colour(1), markersize=9, markeredgewidth=2.2
            )
    axes.set_yticks(range(len(shown)), [_clipped(names[p], 42) for p in shown], fontsize=SMALL)
    axes.set_ylim(len(shown) - 0.4, -0.6)
    axes.set_xlim(left=0.0)
    axes.set_xlabel("Peak current ip [kA]")
    axes.axvline(0.0, color=RULE, linewidth=0.6)
    legend_below(figure, list(handles.values()), list(handles))
    unrated = sum(rated.get(names[p]) is None for p in live)
    rest = len(live) - len(shown)
    more = f" The {rest} others are in the tables." if rest else ""
    worst = shown[0]
    return drawing(
        figure,
        key="fig-fault-peaks",
        title="Peak of each board over the modes against its rating",
        caption="Maximum case. The board nearest to its rating, or farthest beyond it, first; boards "
        f"without a rating last ({unrated}).{more}",
        description=f"{len(shown)} boards. First {names[worst]}, {quantity(max(found[worst]), 'kA')} at most"
        f"{_rated_words(rated.get(names[worst]))}.",
    )


def _rated_words(limit: float | None) -> str:
    return ", no rating given" if limit is None else f", rated {quantity(limit, 'kA')}"


def _distance(peak_ka: float, limit: float | None) -> tuple[bool, float]:
    return (False, peak_ka) if limit is None else (True, peak_ka / limit)


def _peaks_of(result: ShortCircuitResult, place: int) -> list[float]:
    modes = solved_modes(result)
    return [ka(m.maximum.ip_a[place]) for m in modes if m.maximum.live[place]]


def _clipped(name: str, most: int) -> str:
    return name if len(name) <= most else name[: most - 1] + "…"
