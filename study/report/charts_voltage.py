"""Figures of voltage: the boards of each mode against the permitted band, and each set by itself."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from study.report.content import StudyOutcome
from study.report.findings import listed
from study.report.numbers import percent, quantity
from study.report.plotting import (
    SMALL,
    TALLEST_IN,
    Drawing,
    canvas,
    colour,
    dash,
    drawing,
    legend_below,
    marker,
)
from study.report.plotting import place as frame
from study.report.style import ACCENT, INK, QUIET, RULE, TINT
from study.report.tables_regulation import power_factor
from study.results.load_flow import ModeLoadFlow
from study.results.regulation import SetRegulation

_MOST_BOARDS = 60


def _band(outcome: StudyOutcome) -> tuple[float, float] | None:
    """Return the permitted band in percent of the reference; None where the study holds no such limit."""
    low, high = outcome.limit("voltage_low"), outcome.limit("voltage_high")
    if low is None or high is None:
        return None
    return 100.0 - float(low.limit), 100.0 + float(high.limit)


def _live(mode: ModeLoadFlow) -> tuple[list[str], Any]:
    """Return the live boards of a mode and their voltages in percent of nominal."""
    state = mode.boards
    live = np.flatnonzero(state.energised)
    return [state.names[b] for b in live], 100.0 * state.u_v[live] / state.u_nominal_v[live]


def _shade(axes: Any, band: tuple[float, float] | None) -> None:
    if band:
        axes.axvspan(*band, color=TINT, linewidth=0)
        for end in band:
            axes.axvline(end, color=QUIET, linewidth=0.8, linestyle=(0, (4, 2)))
    axes.axvline(100.0, color=RULE, linewidth=0.8)


def board_voltages(outcome: StudyOutcome) -> Drawing | None:
    """Draw every live board of every mode as a dot on one line for each mode.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    Drawing or None
        None where no mode has a live board.
    """
    modes = [mode for mode in outcome.load_flow.modes if mode.solved and mode.boards.energised.any()]
    if not modes:
        return None
    band = _band(outcome)
    height = 0.75 + 0.36 * len(modes)
    left = min(2.6, 0.3 + 0.062 * max(len(mode.mode) for mode in modes))
    figure = canvas(height)
    axes = figure.add_axes(frame(figure, left=left, right=2.5, bottom=0.5, top=0.12))
    _shade(axes, band)
    worst_words = []
    for y, mode in enumerate(modes):
        names, u_percent = _live(mode)
        axes.plot(u_percent, np.full(len(u_percent), y), "o", color=ACCENT, alpha=0.55, markeredgewidth=0)
        low, high = int(np.argmin(u_percent)), int(np.argmax(u_percent))
        words = [
            f"{word} {quantity(float(u_percent[b]), '%', 1)}  {_clipped(names[b])}"
            for word, b in (("high", high), ("low", low))
        ]
        axes.text(
            1.02, y, "\n".join(words), transform=axes.get_yaxis_transform(), va="center", fontsize=SMALL
        )
        worst_words.append(f"{mode.mode}: {words[1]}, {words[0]}")
    axes.set_yticks(range(len(modes)), [mode.mode for mode in modes])
    axes.set_ylim(len(modes) - 0.4, -0.6)
    axes.set_xlabel("Board voltage [% of nominal]")
    return drawing(
        figure,
        key="fig-board-voltages",
        title="Board voltages of each mode against the permitted band",
        caption="One dot for each live board. " + _band_words(band),
        description="; ".join(worst_words) + ".",
    )


def _clipped(name: str, most: int = 26) -> str:
    return name if len(name) <= most else name[: most - 1] + "…"


def _band_words(band: tuple[float, float] | None) -> str:
    if band is None:
        return "The study holds no limit of voltage."
    low, high = (quantity(end, "%") for end in band)
    return f"Shaded: {low} to {high}, the permitted band for consumers."


def voltages_by_board(outcome: StudyOutcome) -> Drawing | None:
    """Draw the range of every board's voltage over the modes, the farthest from nominal first.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    Drawing or None
        None where no mode has a live board.
    """
    found: dict[str, list[float]] = {}
    for mode in outcome.load_flow.modes:
        if mode.solved:
            for name, value in zip(*_live(mode), strict=True):
                found.setdefault(name, []).append(float(value))
    if not found:
        return None
    ranked = sorted(found, key=lambda name: -max(abs(u - 100.0) for u in found[name]))
    shown = ranked[:_MOST_BOARDS]
    step = min(0.2, (TALLEST_IN - 0.8) / len(shown))
    height = 0.75 + max(1.0, step * len(shown))
    left = min(2.9, 0.3 + 0.06 * max(len(_clipped(name, 42)) for name in shown))
    figure = canvas(height)
    axes = figure.add_axes(frame(figure, left=left, right=0.2, bottom=0.5, top=0.12))
    _shade(axes, _band(outcome))
    for y, name in enumerate(shown):
        values = found[name]
        axes.hlines(y, min(values), max(values), color=ACCENT, linewidth=1.2)
        axes.plot(values, [y] * len(values), "o", color=ACCENT, markersize=3.2, markeredgewidth=0)
    axes.set_yticks(range(len(shown)), [_clipped(name, 42) for name in shown], fontsize=SMALL)
    axes.set_ylim(len(shown) - 0.4, -0.6)
    axes.set_xlabel("Board voltage [% of nominal]")
    rest = len(ranked) - len(shown)
    more = f" The {rest} boards nearer to nominal are in the table." if rest else ""
    worst = shown[0]
    return drawing(
        figure,
        key="fig-voltages-by-board",
        title="Voltage of each board over the modes",
        caption="One dot for each mode, the farthest from nominal first."
        f"{more} {_band_words(_band(outcome))}",
        description=f"{len(shown)} boards. The farthest from nominal is {worst}, "
        f"{quantity(min(found[worst]), '%', 1)} to {quantity(max(found[worst]), '%', 1)}.",
    )


def regulation_figures(outcome: StudyOutcome) -> tuple[Drawing, ...]:
    """Draw voltage against load of each set, equal sets drawn once.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Drawing
        One for each group of equal sets.
    """
    groups: list[list[SetRegulation]] = []
    for row in outcome.regulation.sets:
        same = next((g for g in groups if _alike(g[0], row)), None)
        if same is None:
            groups.append([row])
        else:
            same.append(row)
    return tuple(_regulation(group, i) for i, group in enumerate(groups))


def _alike(a: SetRegulation, b: SetRegulation) -> bool:
    """Return whether two sets have the same curves."""
    pairs = (
        (a.inherent.u_pu, b.inherent.u_pu),
        (a.inherent.current_pu, b.inherent.current_pu),
        (a.u_with_droop_pu, b.u_with_droop_pu),
        (a.u_without_droop_pu, b.u_without_droop_pu),
        (a.load_pu, b.load_pu),
    )
    same_words = a.inherent.labels == b.inherent.labels and a.field_supply == b.field_supply
    return same_words and all(np.array_equal(x, y, equal_nan=True) for x, y in pairs)


def _regulation(group: Sequence[SetRegulation], number: int) -> Drawing:
    row = group[0]
    figure = canvas(3.4)
    left = figure.add_axes(frame(figure, left=0.6, right=4.55, bottom=1.05, top=0.3))
    right = figure.add_axes(frame(figure, left=4.85, right=0.2, bottom=1.05, top=0.3))
    handles, labels = [], []
    for k, label in enumerate(row.inherent.labels):
        (line,) = left.plot(
            100.0 * row.inherent.current_pu[k],
            100.0 * row.inherent.u_pu[k],
            color=colour(k),
            linestyle=dash(k),
        )
        handles.append(line)
        labels.append(f"power factor {power_factor(label)}")
    left.set_title("Constant excitation of no load")
    left.set_xlabel("Load current [% of rated]")
    left.set_ylabel("Terminal voltage [% of rated]")
    left.set_xlim(left=0.0)
    left.set_ylim(bottom=0.0)
    load = 100.0 * row.load_pu
    for k, (u_pu, label) in enumerate(
        ((row.u_without_droop_pu, "own excitation, without droop"), (row.u_with_droop_pu, "with droop"))
    ):
        (line,) = right.plot(
            load, 100.0 * u_pu, color=colour(4 + k), linestyle=dash(k), marker=marker(k), markevery=0.2
        )
        handles.append(line)
        labels.append(label)
    right.set_title("Own excitation, rated power factor")
    right.set_xlabel("Load [% of rated]")
    right.set_ylabel("Terminal voltage [% of rated]")
    right.axhline(100.0, color=INK, linewidth=0.6)
    _room(right, 1.0)
    legend_below(figure, handles, labels)
    names = listed([s.genset for s in group], 6)
    band = quantity(percent(row.band_as_set_pu), "%", 2)
    fall = quantity(percent(row.droop_no_load_to_rated_pu), "%", 2)
    return drawing(
        figure,
        key=f"fig-regulation-{number + 1}",
        title=f"Terminal voltage against load: {names}",
        caption=f"Field supply: {row.field_supply}. Left: with the field of rated voltage at no load, held "
        "constant. Right: with the set's own excitation, at rated power factor.",
        description=f"Without droop the voltage stays within ±{band} of rated; with droop it falls by {fall} "
        "from no load to rated load.",
    )


def _room(axes: Any, least: float) -> None:
    """Keep a scale of at least so many units about its middle, so that noise does not fill the frame."""
    low, high = axes.get_ylim()
    if high - low < 2.0 * least:
        middle = 0.5 * (low + high)
        axes.set_ylim(middle - least, middle + least)
