"""Figures of the fault ratings: peaks of boards against their ratings, the heaviest duties."""

from __future__ import annotations

import math
from typing import Any, Final

import numpy as np

from study.checks.verdict import Verdict
from study.report.charts_short_circuit import clipped
from study.report.content import StudyOutcome
from study.report.fault_view import board_places, ka, solved_modes
from study.report.numbers import percent, quantity
from study.report.plotting import (
    SMALL,
    TALLEST_IN,
    Drawing,
    canvas,
    colour,
    drawing,
    legend_below,
)
from study.report.plotting import place as frame
from study.report.style import ACCENT, INK, RULE, VERDICTS
from study.report.tables_fault_ratings import worst_duties
from study.results.short_circuit import ShortCircuitResult

_MOST_BOARDS: Final = 60
_MOST_DUTIES: Final = 30
_LONGEST_PERCENT: Final = 200.0
_NAME: Final = 42
_DUTY_NAME: Final = 58


def fault_rating_figures(outcome: StudyOutcome) -> tuple[Drawing, ...]:
    """Draw the heaviest duties in percent of their ratings, and the peak of every board over the modes.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Drawing
        Empty where the study has nothing of it.
    """
    drawn = [_duties(outcome), _peaks(outcome)]
    return tuple(figure for figure in drawn if figure is not None)


def _duties(outcome: StudyOutcome) -> Drawing | None:
    """Draw the duties nearest to their ratings, or farthest beyond them, as bars."""
    every = [v for v, _ in worst_duties(outcome)]
    known = [v for v in every if _is_part(v)]
    if not known:
        return None
    shown = sorted(known, key=lambda v: -v.value / v.limit)[:_MOST_DUTIES]
    parts = [percent(v.value / v.limit) for v in shown]
    names = [clipped(f"{v.equipment}, {_short(v.quantity)}", _DUTY_NAME) for v in shown]
    height = 0.75 + 0.2 * len(shown)
    left = min(3.9, 0.3 + 0.06 * max(len(name) for name in names))
    figure = canvas(height)
    axes = figure.add_axes(frame(figure, left=left, right=1.35, bottom=0.5, top=0.12))
    widest = min(max(*parts, 100.0), _LONGEST_PERCENT)
    for y, (v, part) in enumerate(zip(shown, parts, strict=True)):
        look = VERDICTS[v.status]
        axes.barh(
            y, min(part, 1.1 * widest), height=0.62, color=look.ground, edgecolor=look.ink, linewidth=0.9
        )
        axes.text(
            1.01,
            y,
            f"{quantity(part, '%', 1)} {look.shape} {v.status}",
            transform=axes.get_yaxis_transform(),
            va="center",
            fontsize=SMALL,
            color=look.ink,
        )
    axes.axvline(100.0, color=INK, linewidth=1.0, linestyle=(0, (4, 2)))
    axes.set_xlim(0.0, 1.04 * widest)
    axes.set_yticks(range(len(shown)), names, fontsize=SMALL)
    axes.set_ylim(len(shown) - 0.4, -0.6)
    axes.grid(axis="y", visible=False)
    axes.set_xlabel("Duty in the worst mode [% of rating]")
    missing = sum(v.status == "not assessed" for v in every)
    rest = len(known) - len(shown)
    more = f" {rest} lighter duties are in the table." if rest else ""
    worst = shown[0]
    return drawing(
        figure,
        key="fig-fault-duties",
        title="The heaviest duties against their ratings",
        caption=f"Each duty in its worst mode; dashed: the rating; bars end at 200 %.{more} Not assessed "
        f"for want of a rating or of data: {missing}.",
        description=f"{len(shown)} duties. The heaviest is {worst.equipment}, {_short(worst.quantity)}, at "
        f"{quantity(parts[0], '%', 1)} of its rating; {sum(p > 100.0 for p in parts)} are beyond it.",
    )


def _is_part(v: Verdict) -> bool:
    """Return whether a duty is a finite part of an upper limit."""
    return v.sense == "at most" and math.isfinite(v.value) and math.isfinite(v.limit) and v.limit > 0


def _short(text: str) -> str:
    return text.removesuffix(" until it is cleared")


def _peaks(outcome: StudyOutcome) -> Drawing | None:
    """Draw the range of every board's peak over the modes against its rated peak withstand current."""
    result = outcome.short_circuit
    if result is None:
        return None
    found = {p: peaks for p in board_places(result) if (peaks := _peaks_of(outcome, result, p))}
    if not found:
        return None
    limits = {b.name: b.peak_withstand_ka for b in outcome.plant.boards}
    names = result.places.names
    rated = {p: limits.get(names[p]) for p in found}
    shown = sorted(found, key=lambda p: _rank(max(found[p]), rated[p]), reverse=True)[:_MOST_BOARDS]
    step = min(0.2, (TALLEST_IN - 1.0) / len(shown))
    height = 0.95 + max(0.8, step * len(shown))
    left = min(2.9, 0.3 + 0.06 * max(len(clipped(names[p], _NAME)) for p in shown))
    figure = canvas(height)
    axes = figure.add_axes(frame(figure, left=left, right=0.2, bottom=0.7, top=0.12))
    handles: dict[str, Any] = {}
    for y, p in enumerate(shown):
        axes.hlines(y, min(found[p]), max(found[p]), color=ACCENT, linewidth=1.2)
        (handles["greatest peak, one dot for each mode"],) = axes.plot(
            found[p], np.full(len(found[p]), y), "o", color=ACCENT, markersize=3.4, markeredgewidth=0
        )
        limit = rated[p]
        if limit is not None:
            (handles["rated peak withstand current"],) = axes.plot(
                [limit], [y], "|", color=colour(1), markersize=9, markeredgewidth=2.2
            )
    axes.set_yticks(range(len(shown)), [clipped(names[p], _NAME) for p in shown], fontsize=SMALL)
    axes.set_ylim(len(shown) - 0.4, -0.6)
    axes.set_xlim(left=0.0)
    axes.set_xlabel("Peak current [kA]")
    axes.axvline(0.0, color=RULE, linewidth=0.6)
    legend_below(figure, list(handles.values()), list(handles))
    unrated = sum(limit is None for limit in rated.values())
    rest = len(found) - len(shown)
    more = f" The {rest} others are in the tables." if rest else ""
    worst = shown[0]
    return drawing(
        figure,
        key="fig-fault-peaks",
        title="Peak of each board over the modes against its rating",
        caption="Maximum case, current-limiting devices counted. The board nearest to its rating, or "
        f"farthest beyond it, first; boards without a rating last ({unrated}).{more}",
        description=f"{len(shown)} boards. First {names[worst]}, {quantity(max(found[worst]), 'kA')} at most"
        f"{_rated_words(rated[worst])}.",
    )


def _rated_words(limit: float | None) -> str:
    return ", no rating given" if limit is None else f", rated {quantity(limit, 'kA')}"


def _rank(peak_ka: float, limit: float | None) -> tuple[bool, float]:
    return (False, peak_ka) if limit is None else (True, peak_ka / limit)


def _peaks_of(outcome: StudyOutcome, result: ShortCircuitResult, place: int) -> list[float]:
    """Return the greatest peak of a board in each live mode, as the ratings take it."""
    ratings, name = outcome.fault_ratings, result.places.names[place]
    if ratings is not None and name in ratings.boards.names:
        limited = ratings.boards.limited_peak_ka[ratings.boards.names.index(name)]
        return [float(v) for v in limited if math.isfinite(v)]
    modes = solved_modes(result)
    return [ka(m.maximum.peak_a[place]) for m in modes if m.maximum.live[place]]
