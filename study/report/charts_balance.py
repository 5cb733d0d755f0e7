"""Figures of the load balance: loading of each set, and load by service against capacity."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Sequence
from typing import Any

import numpy as np

from study.report.content import StudyOutcome
from study.report.numbers import percent, quantity
from study.report.plotting import SMALL, WIDTH_IN, Drawing, canvas, colour, drawing, legend_below, legend_rows
from study.report.plotting import place as frame
from study.report.style import ACCENT, INK, RULE
from study.results.balance import IslandBalance, ModeBalance, SetBalance

_PLACES_IN_A_ROW = 32
_FEWEST_PLACES = 14
_PLACE_IN = (WIDTH_IN - 0.75) / (_PLACES_IN_A_ROW + 0.6)
"""Width of a place [inch]."""
_HATCHES = ("", "////", "....", "xxxx")


def set_loading(outcome: StudyOutcome) -> Drawing | None:
    """Draw the engine load of every set on line, with its least load.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    Drawing or None
        None where no set runs.
    """
    least = {g.name: percent(g.min_engine_load) for g in outcome.plant.gensets}
    groups = [
        (mode.mode, [s for s in mode.sets if s.state == "on" and s.name in least])
        for mode in outcome.balance.modes
    ]
    groups = [(name, sets) for name, sets in groups if sets]
    if not groups:
        return None
    rows = _rows_of_groups(groups)
    names = 0.06 * (7 + max(len(s.name) for _, sets in groups for s in sets)) + 0.1
    height = 0.45 + len(rows) * (1.75 + names + 0.4)
    figure = canvas(height)
    # One scale for every row; a place is never narrower than what the names are wrapped for.
    places = max(_FEWEST_PLACES, *(sum(_places(group) for group in row) for row in rows))
    top = 0.1
    for row in rows:
        bottom = height - top - 0.35 - 1.75
        axes = figure.add_axes(frame(figure, left=0.6, right=0.15, bottom=bottom, top=top + 0.35))
        _loading_row(axes, row, least, places)
        top += 1.75 + names + 0.4
    highest = max((s for _, sets in groups for s in sets), key=lambda s: s.engine_loading)
    lowest = min((s for _, sets in groups for s in sets), key=lambda s: s.engine_loading)
    return drawing(
        figure,
        key="fig-set-loading",
        title="Engine load of each set on line",
        caption="Bars: load by the load balance, in % of rated engine power. Short orange lines: the least "
        "engine load of the set. Dashed line: rated power.",
        description=f"Bars for {sum(len(s) for _, s in groups)} running sets in {len(groups)} modes. Highest "
        f"{highest.name} with {quantity(percent(highest.engine_loading), '%', 1)}, lowest {lowest.name} with "
        f"{quantity(percent(lowest.engine_loading), '%', 1)}.",
    )


_Group = tuple[str, list[SetBalance]]


def _rows_of_groups(groups: Sequence[_Group]) -> list[list[_Group]]:
    """Return modes in rows of at most so many bars, a mode counting for the width of its name too."""
    rows: list[list[_Group]] = [[]]
    for group in groups:
        taken = sum(_places(g) for g in rows[-1])
        if rows[-1] and taken + _places(group) > _PLACES_IN_A_ROW:
            rows.append([])
        rows[-1].append(group)
    return rows


def _places(group: _Group) -> int:
    """Return the places on the axis that a mode takes: its bars and a gap, or its name in two lines."""
    mode, sets = group
    longest = max(len(mode) // 2 + 2, *(len(word) for word in mode.split()))
    return max(len(sets) + 1, math.ceil((0.08 * longest + 0.1) / _PLACE_IN))


def _loading_row(axes: Any, row: list[_Group], least: dict[str, float], places: int) -> None:
    at, names = 0.0, []
    highest = max([100.0, *(percent(s.engine_loading) for _, sets in row for s in sets)])
    for group in row:
        mode, sets = group
        x = at + np.arange(len(sets))
        values = [percent(s.engine_loading) for s in sets]
        axes.bar(x, values, width=0.7, color=ACCENT)
        marks = [least[s.name] for s in sets]
        axes.hlines(marks, x - 0.42, x + 0.42, colors=colour(1), linewidth=2.0)
        lines = textwrap.wrap(mode, max(6, int((_places(group) * _PLACE_IN - 0.1) / 0.078)))
        label = "\n".join(lines[:2]) + ("…" if len(lines) > 2 else "")
        axes.text(at - 0.4, highest * 1.08, label, fontsize=SMALL + 0.5, fontweight="bold", va="bottom")
        names += [(float(p), f"{s.name}  {v:.0f} %") for p, s, v in zip(x, sets, values, strict=True)]
        at += _places(group)
    axes.axhline(100.0, color=INK, linewidth=0.8, linestyle=(0, (4, 2)))
    axes.set_xlim(-0.8, places - 0.2)
    axes.set_ylim(0.0, highest * 1.06)
    axes.set_xticks([p for p, _ in names], [n for _, n in names], rotation=90)
    axes.grid(axis="x", visible=False)
    axes.set_ylabel("Engine load\n[% of rated power]")


def load_by_service(outcome: StudyOutcome) -> Drawing | None:
    """Draw the load of each mode by service, against capacity on line and with the largest set lost.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    Drawing or None
        None where there is no mode.
    """
    modes = outcome.balance.modes
    if not modes:
        return None
    services = tuple(dict.fromkeys(s for mode in modes for s in mode.services))
    rows = [row for mode in modes for row in _service_rows(mode)]
    labels = [*services, "capacity on line", "capacity with the largest set lost"]
    legend = 0.17 * legend_rows(labels) + 0.05
    height = 0.65 + 0.27 * len(rows) + legend
    left = min(3.4, 0.35 + 0.062 * max(len(label) for label, _, _ in rows))
    figure = canvas(height)
    axes = figure.add_axes(frame(figure, left=left, right=0.3, bottom=0.45 + legend, top=0.1))
    handles: dict[str, Any] = {}
    for y, (_, mode, island) in enumerate(rows):
        if mode is not None:
            _stack(axes, y, mode, services, handles)
        if island is not None:
            _island(axes, y, island, handles, own_bar=mode is None)
    axes.set_yticks(range(len(rows)), [label for label, _, _ in rows])
    axes.set_ylim(len(rows) - 0.4, -0.6)
    axes.set_xlim(left=0.0)
    axes.grid(axis="y", visible=False)
    axes.set_xlabel("Active power [kW]")
    legend_below(figure, list(handles.values()), list(handles))
    largest = max(modes, key=lambda m: m.p_total_kw)
    return drawing(
        figure,
        key="fig-load-by-service",
        title="Load by service against capacity",
        caption="Counted load of each mode by service, after simultaneity. A mode whose plant is split has a "
        "row for each island below it, in grey.",
        description=f"Stacked bars for {len(modes)} modes and {len(services)} services. The largest load is "
        f"{quantity(largest.p_total_kw, 'kW')} in {largest.mode}.",
    )


_Row = tuple[str, ModeBalance | None, IslandBalance | None]


def _service_rows(mode: ModeBalance) -> list[_Row]:
    """Return one row for a mode, with its island; and one for each island where there are several."""
    if len(mode.islands) == 1:
        return [(_label(mode.mode, mode.p_total_kw), mode, mode.islands[0])]
    split: list[_Row] = [
        (_label(f"of it {island.boards[0]}", island.p_load_kw), None, island) for island in mode.islands
    ]
    return [(_label(mode.mode, mode.p_total_kw), mode, None), *split]


def _label(name: str, p_kw: float) -> str:
    return f"{name}  {quantity(p_kw, 'kW')}"


def _stack(axes: Any, y: int, mode: ModeBalance, services: Sequence[str], handles: dict[str, Any]) -> None:
    start = 0.0
    for i, service in enumerate(services):
        if service not in mode.services:
            continue
        value = float(np.sum(mode.p_by_service_kw[mode.services.index(service)]))
        bar = axes.barh(
            y,
            value,
            left=start,
            height=0.62,
            color=colour(i),
            hatch=_HATCHES[(i // 8) % len(_HATCHES)],
            edgecolor="white",
            linewidth=0.4,
        )
        handles.setdefault(service, bar)
        start += value


def _island(axes: Any, y: int, island: IslandBalance, handles: dict[str, Any], *, own_bar: bool) -> None:
    if own_bar:
        axes.barh(y, island.p_load_kw, height=0.45, color=RULE)
    marks: list[tuple[str, float, Any]] = [("capacity on line", island.p_capacity_kw, "-")]
    at_once = [loss for loss in island.loss if loss.stage == "at once"]
    if at_once:
        marks.append(("capacity with the largest set lost", at_once[0].p_capacity_kw, (0, (2, 1.2))))
    for label, value, pattern in marks:
        if math.isfinite(value):
            line = axes.vlines(value, y - 0.44, y + 0.44, colors=INK, linewidth=1.6, linestyles=[pattern])
            handles.setdefault(label, line)
