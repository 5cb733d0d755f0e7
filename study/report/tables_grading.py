"""Tables of grading: pairs of devices, reach, starts, proposed settings, the list of settings to sign."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from typing import Final

import numpy as np

from study.report.content import StudyOutcome
from study.report.fault_view import ka, ka_column, mode_words
from study.report.numbers import quantity
from study.report.tables import (
    Column,
    Table,
    Value,
    Worked,
    WorkedLine,
    cell_column,
    make_table,
    text_column,
)
from study.report.tables_settings import settings_table
from study.results.grading import (
    EXTENTS,
    FULL,
    NONE,
    NOT_ASSESSED,
    PAIR_KINDS,
    PARTIAL,
    GradingResult,
)

SHEET: Final = "R Grading"
_PAIRS_SHOWN: Final = 40
_ROWS_SHOWN: Final = 8


def grading_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return the tables of grading; none where the study has no such result.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    result = outcome.grading
    if result is None:
        return ()
    return (
        pairs_table(outcome, result),
        lost_table(result),
        changes_table(result),
        reach_table(outcome, result),
        held_table(result),
        grading_remarks_table(result),
        settings_table(outcome),
    )


def _seconds(key: str, heading: str, **more: object) -> Column:
    return Column(key=key, heading=heading, unit="s", most_decimals=3, **more)  # type: ignore[arg-type]


def shown_pairs(result: GradingResult) -> list[tuple[int, int]]:
    """Return the pairs to show, each with the mode of its least margin, worst first.

    All that fail or could not be told, and for each downstream station the pair with the least margin.

    Parameters
    ----------
    result : GradingResult
        The result.

    Returns
    -------
    list of (int, int)
        Pair and mode.
    """
    p = result.pairs
    rank = np.select(
        [p.extent == NONE, p.extent == PARTIAL, p.extent == NOT_ASSESSED, p.extent == FULL], [0, 1, 2, 3], 9
    )
    spare = np.nan_to_num(p.margin_s - p.needed_s, nan=-1e9)
    mode = np.lexsort((spare, rank), axis=1)[:, 0] if len(rank) else np.zeros(0, np.int64)
    rows = np.arange(len(mode))
    worst, least = rank[rows, mode], spare[rows, mode]
    found: list[int] = []
    governed: set[int] = set()
    for k in np.lexsort((least, worst)).tolist():
        station = int(p.downstream[k])
        if worst[k] < 3 or (worst[k] == 3 and station not in governed):
            found.append(k)
            governed.add(station)
    return [(k, int(mode[k])) for k in found]


def pairs_table(outcome: StudyOutcome, result: GradingResult) -> Table:
    """Return the pairs that fail, and for each device the pair with the least margin."""
    p, names = result.pairs, result.stations.names
    columns = [
        text_column("downstream", "Nearest device"),
        text_column("upstream", "Device behind it"),
        text_column("zone", "For a fault in"),
        text_column("extent", "Discrimination"),
        text_column("modes", "In"),
        text_column("worst_mode", "Least margin in"),
        _seconds("clears_s", "Cleared at the latest", infinite="never"),
        _seconds("releases_s", "Released at the earliest", infinite="never"),
        _seconds("margin_s", "Margin", against="needed_s", infinite="never opens"),
        _seconds("needed_s", "Needed"),
        Column(
            key="current_ratio",
            heading="Instantaneous stage over fault",
            most_decimals=2,
            infinite="no such stage",
        ),
        ka_column("up_to_ka", "Discriminates up to", missing=""),
        ka_column("from_ka", "Discriminates from", missing=""),
        ka_column("largest_ka", "Largest fault"),
        ka_column("current_ka", "Fault there"),
        ka_column("upstream_ka", "Through the device behind"),
        text_column("level", "At", kind="long text"),
        text_column("rule", "Ruled by"),
        cell_column(),
    ]
    cells = {d.name: d.cell for d in outcome.plant.devices}
    rows = []
    for k, m in shown_pairs(result):
        alike = [result.modes[x] for x in np.flatnonzero(p.extent[k] == p.extent[k, m])]
        rows.append(
            (
                names[p.downstream[k]],
                names[p.upstream[k]],
                p.zone[k],
                EXTENTS[p.extent[k, m]],
                mode_words(alike, result.modes),
                result.modes[m],
                float(p.clears_s[k, m]),
                float(p.releases_s[k, m]),
                float(p.margin_s[k, m]),
                float(p.needed_s[k, m]),
                float(p.current_ratio[k, m]),
                ka(p.up_to_a[k, m]),
                ka(p.from_a[k, m]),
                ka(p.largest_a[k, m]),
                ka(p.current_a[k, m]),
                ka(p.upstream_a[k, m]),
                result.levels[p.level[k, m]],
                result.rules[p.rule[k, m]],
                cells.get(result.stations.set_at[p.upstream[k]], ""),
            )
        )
    judged = int(np.isin(p.extent, (FULL, PARTIAL, NONE)).sum())
    return make_table(
        key="grading_pairs",
        title="Pairs of devices in series",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            f"{judged} pairs were graded over all modes, each from the least to the largest fault; shown are "
            "those that fail, and for each device the pair with the least margin. Cleared and released are "
            "the far and the near end of the bands, with all tolerances, on the decaying currents through "
            "both devices. Margins well above what is needed are bounds from below. Consumers that a mode "
            "does not use are switched off in it.",
        ),
        worked=_worked_margin(result),
        group_by=("extent",),
        shown_per_group=_PAIRS_SHOWN,
    )


def _worked_margin(result: GradingResult) -> Worked | None:
    p, names = result.pairs, result.stations.names
    for k, m in shown_pairs(result):
        clears, releases = float(p.clears_s[k, m]), float(p.releases_s[k, m])
        if math.isfinite(clears) and math.isfinite(releases):
            line = WorkedLine(
                label="Margin",
                formula="earliest release behind − latest clearing",
                figures=f"{quantity(releases, 's', 4)} − {quantity(clears, 's', 4)}",
                result=quantity(releases - clears, "s", 4),
            )
            row = f"{names[p.downstream[k]]} and {names[p.upstream[k]]}, {result.modes[m]}"
            return Worked(row=row, lines=(line,))
    return None


def lost_table(result: GradingResult) -> Table:
    """Return the pairs that are graded in some modes and not in others."""
    p, names = result.pairs, result.stations.names
    bad = np.isin(p.extent, (PARTIAL, NONE))
    good = p.extent == FULL
    rows = [
        (
            names[p.downstream[k]],
            names[p.upstream[k]],
            mode_words([result.modes[m] for m in np.flatnonzero(good[k])], result.modes),
            mode_words([result.modes[m] for m in np.flatnonzero(bad[k])], result.modes),
        )
        for k in np.flatnonzero(bad.any(axis=1) & good.any(axis=1))
    ]
    return make_table(
        key="grading_lost",
        title="Grading that a mode breaks",
        sheet=SHEET,
        columns=[
            text_column("downstream", "Nearest device"),
            text_column("upstream", "Device behind it"),
            text_column("graded_in", "Graded in"),
            text_column("lost_in", "Lost in"),
        ],
        rows=rows,
        notes=("Other sources run, or other paths feed the fault, than where it is graded.",),
    )


def changes_table(result: GradingResult) -> Table:
    """Return proposed settings, and the failures for which none was found."""
    columns = [
        text_column("device", "Device"),
        text_column("setting", "Setting"),
        Column(key="now", heading="Now", kind="free"),
        Column(key="proposed", heading="Proposed", kind="free"),
        text_column("unit", "Unit"),
        text_column("cures", "Cures", kind="long text"),
        text_column("before_after", "Before and after", kind="long text"),
        text_column("reason", "Reason", kind="long text"),
        Column(key="graded", heading="Pairs and modes graded again", kind="count"),
        cell_column(),
    ]
    rows: list[Sequence[Value]] = [
        (
            c.device,
            c.setting,
            c.now,
            c.proposed,
            c.unit,
            "; ".join(_cured(c.cures, result.modes)),
            f"least margin {_margin(c.before, c.margin_unit)}, then {_margin(c.after, c.margin_unit)}",
            c.reason,
            c.graded,
            c.cell,
        )
        for c in result.changes
    ]
    rows += [
        (
            n.downstream,
            "none found",
            None,
            None,
            "",
            f"not cured: with {n.upstream}, {mode_words(n.modes, result.modes)}" if n.upstream
            else f"not cured: its least fault, {mode_words(n.modes, result.modes)}",
            "",
            n.why,
            None,
            "",
        )
        for n in result.not_cured
    ]  # fmt: skip
    return make_table(
        key="grading_changes",
        title="Proposed settings",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Within the ranges of the sheet Setting ranges; the smallest change that cures without breaking "
            "another pair, reach or start. Each stands on those above it. Nothing is changed by the program. "
            "Steering gear and fire pumps never get an overload setting.",
        ),
    )


def _cured(cures: Iterable[tuple[str, str, tuple[str, ...]]], every: Sequence[str]) -> list[str]:
    return [
        f"{down} with {up} ({mode_words(modes, every)})"
        if up
        else f"{down}, least fault ({mode_words(modes, every)})"
        for down, up, modes in cures
    ]


def _margin(value: float, unit: str) -> str:
    if math.isinf(value):
        return "none: only the device behind opens" if value < 0.0 else "the device behind never opens"
    return quantity(value, unit, 3)


def reach_table(outcome: StudyOutcome, result: GradingResult) -> Table:
    """Return the least fault that each device must clear, in its slowest mode."""
    r, names = result.reach, result.stations.names
    used = outcome.limit("fault_clearing")
    allowed = float(used.limit) if used is not None else math.nan
    columns = [
        text_column("device", "Device"),
        text_column("zone", "Protects"),
        text_column("mode", "Slowest in"),
        Column(key="least_a", heading="Least fault when it clears", unit="A", most_decimals=0),
        text_column("by", "Cleared by"),
        _seconds("clears_s", "Cleared at the latest", against="allowed_s", infinite="never"),
        _seconds("allowed_s", "Allowed"),
        _seconds("holds_s", "Current held for", infinite="no end"),
        cell_column(),
    ]
    cells = {d.name: d.cell for d in outcome.plant.devices}
    rows = []
    for k in range(len(r.zone)):
        present = np.flatnonzero(r.present[k])
        if not len(present):
            continue
        m = int(present[np.argmax(np.nan_to_num(r.clears_s[k, present], nan=1e9))])
        by = int(r.by[k, m])
        who = {-1: "none", -2: "sources stop by themselves"}.get(by) or names[by]
        rows.append(
            (
                names[r.station[k]],
                r.zone[k],
                result.modes[m],
                float(r.least_a[k, m]),
                who,
                float(r.clears_s[k, m]),
                allowed,
                float(r.holds_s[k, m]),
                cells.get(result.stations.set_at[r.station[k]], ""),
            )
        )
    rows.sort(key=lambda row: -row[5] if not math.isnan(row[5]) else -math.inf)
    return make_table(
        key="grading_reach",
        title="Least fault, and when it is cleared",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "The least of three-phase, two-phase and earth fault where the current through the device is "
            "least, with the sustained current of the sources; what takes longer than they hold it does not "
            "clear.",
        ),
        group_by=("mode",),
        shown_per_group=_ROWS_SHOWN,
    )


def held_table(result: GradingResult) -> Table:
    """Return starts, inrush and restarts that devices have to hold."""
    names = result.stations.names
    columns = [
        text_column("event", "Event"),
        text_column("equipment", "Of", kind="long text"),
        text_column("device", "Device"),
        text_column("mode", "Worst in"),
        Column(key="current_a", heading="Current at the start", unit="A", most_decimals=0),
        Column(key="before_a", heading="Of it before", unit="A", most_decimals=0),
        _seconds("lasts_s", "Lasts"),
        _seconds("trips_s", "Opens at the earliest", against="needed_s", infinite="holds"),
        _seconds("needed_s", "Must hold for"),
        text_column("assumed", "Assumed", kind="long text"),
    ]
    rows = [
        (
            row.event,
            row.equipment,
            names[row.station],
            row.mode,
            row.current_a,
            row.before_a,
            row.lasts_s,
            row.trips_s,
            row.needed_s,
            row.assumed,
        )
        for row in sorted(result.ride_through, key=lambda x: x.trips_s / max(x.needed_s, 1e-9))
    ]
    return make_table(
        key="grading_held",
        title="Starts, inrush and restart that devices must hold",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Each start against the consumer's own device; for devices behind it the hardest start on top of "
            "the load that flows, and the hardest step of the restart after a blackout.",
        ),
        group_by=("event",),
        shown_per_group=5,
    )


def grading_remarks_table(result: GradingResult) -> Table:
    """Return what the study leaves open, in sentences, and how many pairs of each kind there are."""
    p = result.pairs
    counts = [
        (
            f"pairs, {PAIR_KINDS[kind]}, {EXTENTS[extent]}",
            int(((p.kind == kind) & (p.extent == extent)).sum()),
        )
        for kind in range(len(PAIR_KINDS))
        for extent in range(len(EXTENTS))
    ]
    rows: list[Sequence[Value]] = [(words, count) for words, count in counts if count]
    rows += [(sentence, None) for sentence in result.findings]
    return make_table(
        key="grading_remarks",
        title="What was graded, and what is left open",
        sheet=SHEET,
        columns=[
            text_column("remark", "What", kind="long text"),
            Column(key="count", heading="Pairs and modes", kind="count"),
        ],
        rows=rows,
    )
