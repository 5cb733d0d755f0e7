"""Figures of sharing: setting lines, shares over the range of load, and sets adjusted wrongly."""

from __future__ import annotations

from typing import Any

import numpy as np

from study.report.content import StudyOutcome
from study.report.findings import listed
from study.report.numbers import percent, quantity
from study.report.plotting import (
    SMALL,
    Drawing,
    canvas,
    colour,
    dash,
    drawing,
    legend_below,
    legend_rows,
    marker,
)
from study.report.plotting import place as frame
from study.report.style import ACCENT, INK, QUIET, RULE, TINT
from study.report.tables_sharing import adjusted
from study.results.arrays import FloatArray
from study.results.sharing import IslandSharing, MaladjustedCase, SharingCurve


def sharing_figures(outcome: StudyOutcome) -> tuple[Drawing, ...]:
    """Draw the setting lines and the shares of every island with sets in parallel.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Drawing
        One for each island.
    """
    return tuple(_island(island, i) for i, island in enumerate(outcome.sharing.islands))


def _island(island: IslandSharing, number: int) -> Drawing:
    labels = [*island.sets, "tolerance", "bus voltage"]
    legend = 0.17 * legend_rows(labels) + 0.1
    height = 4.2 + legend
    figure = canvas(height)
    lines = figure.add_axes(frame(figure, left=0.75, right=5.6, bottom=0.45 + legend, top=0.3))
    handles = _setting_lines(lines, island)
    half = (height - 0.45 - legend - 0.3 - 0.62) / 2
    for row, curve in enumerate((island.as_set, island.trimmed)):
        bottom = 0.45 + legend + (1 - row) * (half + 0.62)
        top = height - bottom - half
        for column, (word, unit) in enumerate((("kW", "kW"), ("kvar", "kvar"))):
            left = 3.75 + 2.67 * column
            axes = figure.add_axes(frame(figure, left=left, right=8.6 - left - 2.05, bottom=bottom, top=top))
            handles = _deviations(axes, island, curve, unit) | handles
            axes.set_title(f"{word}, {adjusted(curve)}")
            axes.set_ylabel(f"Off its share [{unit}]", labelpad=1)
            if row == 1:
                axes.set_xlabel("Load [% of rated kW on line]")
    legend_below(figure, list(handles.values()), list(handles))
    sets = listed(island.sets, 6)
    return drawing(
        figure,
        key=f"fig-sharing-{number + 1}",
        title=f"Sharing in {island.mode}: {sets}",
        caption="Left: the voltage-kvar line of each set; its operating point lies where the line meets the "
        "voltage of its terminals. Right: distance of each set from its proportional share of kW and kvar "
        "against the tolerance, as set and as trimmed.",
        description=_words(island),
    )


def _words(island: IslandSharing) -> str:
    parts = []
    for curve in (island.as_set, island.trimmed):
        if curve.solved.any():
            kw = float(np.abs(curve.dp_kw[curve.solved]).max())
            kvar = float(np.abs(curve.dq_kvar[curve.solved]).max())
            parts.append(
                f"{adjusted(curve)}: at most {quantity(kw, 'kW')} and {quantity(kvar, 'kvar')} off the share"
            )
        else:
            parts.append(f"{adjusted(curve)}: no load has a solution")
    return "; ".join(parts) + "."


def _setting_lines(axes: Any, island: IslandSharing) -> dict[str, Any]:
    handles: dict[str, Any] = {}
    for line in island.lines:
        i = island.sets.index(line.genset)
        axes.plot(line.q_kvar, 100.0 * line.u_pu, color=colour(i), linestyle=dash(i), zorder=2)
        axes.plot(
            [line.q_operating_kvar],
            [100.0 * line.u_operating_pu],
            marker(i),
            color=colour(i),
            markersize=6.5,
            markeredgecolor="white",
            markeredgewidth=0.6,
            zorder=4,
        )
    handles["bus voltage"] = axes.axhline(
        percent(island.u_operating_pu), color=INK, linewidth=0.9, linestyle=(0, (4, 2)), zorder=1
    )
    axes.set_title("Setting lines and operating points")
    axes.set_xlabel("Reactive power of the set [kvar]")
    axes.set_ylabel("Voltage [% of rated]")
    return handles


def _deviations(axes: Any, island: IslandSharing, curve: SharingCurve, unit: str) -> dict[str, Any]:
    values: FloatArray = curve.dp_kw if unit == "kW" else curve.dq_kvar
    limits = island.p_tolerance_kw if unit == "kW" else island.q_tolerance_kvar
    load = 100.0 * curve.load_pu
    handles: dict[str, Any] = {}
    for i, name in enumerate(island.sets):
        (handles[name],) = axes.plot(load, values[:, i], color=colour(i), linestyle=dash(i), zorder=3)
    for i, limit in enumerate(dict.fromkeys(float(x) for x in limits)):
        pattern = (0, (4, 2)) if i == 0 else (0, (1.5, 1.5))
        for sign in (-1.0, 1.0):
            line = axes.axhline(sign * limit, color=QUIET, linewidth=0.9, linestyle=pattern, zorder=2)
            handles["tolerance"] = line
    axes.axhline(0.0, color=RULE, linewidth=0.6, zorder=1)
    axes.set_xlim(0.0, 100.0)
    return handles


def case_figures(outcome: StudyOutcome) -> tuple[Drawing, ...]:
    """Draw every maladjusted case: each set before and after, against its share and tolerance.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Drawing
        One for each case that has a solution.
    """
    solved = [case for case in outcome.sharing.cases if case.solved]
    return tuple(_case(case, i) for i, case in enumerate(solved))


def _case(case: MaladjustedCase, number: int) -> Drawing:
    height = 1.05 + 0.3 * len(case.sets)
    left = min(1.9, 0.3 + 0.065 * max(len(name) for name in case.sets))
    width = (8.6 - left - 0.2 - 0.45) / 2
    figure = canvas(height)
    panels = (
        ("kW", case.p_before_kw, case.p_after_kw, case.p_share_kw, case.p_tolerance_kw),
        ("kvar", case.q_before_kvar, case.q_after_kvar, case.q_share_kvar, case.q_tolerance_kvar),
    )
    handles: dict[str, Any] = {}
    for k, (unit, before, after, share, tolerance) in enumerate(panels):
        start = left + k * (width + 0.45)
        axes = figure.add_axes(frame(figure, left=start, right=8.6 - start - width, bottom=0.72, top=0.1))
        y = np.arange(len(case.sets))
        handles["share with its tolerance"] = axes.barh(
            y, 2.0 * tolerance, left=share - tolerance, height=0.5, color=TINT, edgecolor=RULE, linewidth=0.6
        )
        axes.hlines(y, before, after, color=QUIET, linewidth=1.0)
        (handles["before"],) = axes.plot(
            before, y, "o", color="white", markeredgecolor=ACCENT, markersize=5.5, markeredgewidth=1.2
        )
        (handles["after"],) = axes.plot(after, y, "D", color=colour(1), markersize=5.0)
        axes.set_yticks(y, case.sets if k == 0 else [""] * len(y), fontsize=SMALL + 0.5)
        axes.set_ylim(len(y) - 0.4, -0.6)
        axes.grid(axis="y", visible=False)
        axes.set_xlabel({"kW": "Active power [kW]", "kvar": "Reactive power [kvar]"}[unit])
    legend_below(figure, list(handles.values()), list(handles))
    first, then = (quantity(percent(u), "%", 2) for u in (case.u_before_pu, case.u_after_pu))
    was, now = quantity(percent(case.was_pu), "%"), quantity(percent(case.value_pu), "%")
    return drawing(
        figure,
        key=f"fig-case-{number + 1}",
        title=f"{case.case} ({case.mode})",
        caption=case.sentence,
        description=f"{case.genset}: {case.setting} from {was} to {now}. "
        f"Voltage {first} before and {then} after.",
    )
