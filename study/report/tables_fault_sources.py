"""Tables of what feeds a fault: each source, and what it gives to the leading boards."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from typing import Final

import numpy as np

from study.report.content import StudyOutcome
from study.report.fault_view import (
    SHEET,
    CaseView,
    cases,
    ends_at,
    ka,
    ka_column,
    leading_boards,
    mode_words,
    solved_modes,
)
from study.report.numbers import figure, percent, quantity
from study.report.tables import (
    Column,
    Table,
    Value,
    Worked,
    WorkedLine,
    make_table,
    percent_column,
    text_column,
)
from study.results.arrays import IntArray
from study.results.short_circuit import FaultCase, FaultSources, ShortCircuitResult

_SOURCES_SHOWN: Final = 20
_PARTS_SHOWN: Final = 6
_DIGITS: Final = 9
_SMALLEST_SHARE: Final = 1e-6
_SYNCHRONOUS: Final = ("genset", "synchronous motor")
NO_END: Final = "no end known"


def sources_table(outcome: StudyOutcome, result: ShortCircuitResult) -> Table:
    """Return every source at its own terminals, equal rows of several modes drawn together."""
    columns = [
        text_column("case", "Case"),
        text_column("source", "Source"),
        text_column("kind", "Kind"),
        text_column("board", "Board"),
        text_column("modes", "Modes"),
        Column(key="rated_a", heading="Rated", unit="A", most_decimals=1),
        ka_column("ik_initial_ka", "I''k", 3, digits=3),
        Column(key="initial_multiple", heading="I''k, times rated", most_decimals=2, digits=3),
        ka_column("ip_ka", "ip", 3, digits=3),
        ka_column("sustained_ka", "Sustained", 3, digits=3),
        Column(key="sustained_multiple", heading="Sustained, times rated", most_decimals=2, digits=3),
        Column(key="holds_s", heading="Kept up for", unit="s", most_decimals=2, digits=2, infinite=NO_END),
        percent_column("preload_percent", "Load before the fault", most_decimals=0),
        text_column("sustained_data", "Sustained current is"),
        text_column("holds", "What it keeps up"),
    ]
    found: dict[tuple[Value, ...], list[str]] = {}
    for view in cases(result):
        for s in _standing(view.ship.sources):
            found.setdefault(_source_row(view, s), []).append(view.mode)
    ranked = sorted(found.items(), key=lambda item: (item[0][0] != "maximum", _kind_rank(item[0][2])))
    rows = [(*row[:4], mode_words(modes, outcome.modes), *row[4:]) for row, modes in ranked]
    return make_table(
        key="fault_sources",
        title="What feeds a fault",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Into a fault at the source's own terminals. A set that draws its field from its own "
            "terminals has nothing to hold it up: its sustained current falls to nought.",
        ),
        worked=_worked_source(rows),
        group_by=("case",),
        shown_per_group=_SOURCES_SHOWN,
    )


def _standing(at: FaultSources) -> list[int]:
    """Return the sources that stand somewhere, without what others take over from motors."""
    return [s for s in range(len(at.names)) if at.rated_a[s] > 0.0 or at.initial_a[s] > 0.0]


def _kind_rank(kind: Value) -> int:
    order = ("genset", "shore supply", "converter supply", "synchronous motor", "motor")
    return order.index(str(kind)) if kind in order else len(order)


def _source_row(view: CaseView, s: int) -> tuple[Value, ...]:
    at = view.ship.sources
    rated, initial, sustained = (float(v[s]) for v in (at.rated_a, at.initial_a, at.sustained_a))
    return (
        view.name,
        at.names[s],
        at.kinds[s],
        at.boards[s],
        _rounded(rated),
        _rounded(ka(initial)),
        _rounded(initial / rated) if rated > 0 else None,
        _rounded(ka(at.peak_a[s])),
        _rounded(ka(sustained)),
        _rounded(sustained / rated) if rated > 0 else None,
        float(at.holds_s[s]),
        _rounded(percent(at.preload[s])),
        _sustained_words(at, s),
        at.holds[s],
    )


def _rounded(value: float) -> float:
    """Drop the noise of a solution, so that a source that is the same in two modes is one row."""
    if not math.isfinite(value) or value == 0.0:
        return value
    return round(value, _DIGITS - 1 - math.floor(math.log10(abs(value))))


def _sustained_words(at: FaultSources, s: int) -> str:
    if at.sustained_known[s]:
        return "by data"
    return "not given: a bound stands in" if at.kinds[s] in _SYNCHRONOUS else ""


def _worked_source(rows: Sequence[tuple[Value, ...]]) -> Worked | None:
    for row in rows:
        rated, initial, multiple = row[5], row[6], row[7]
        if isinstance(multiple, float) and isinstance(rated, float) and isinstance(initial, float):
            line = WorkedLine(
                label="I''k, times rated",
                formula="I''k / rated current",
                figures=f"{figure(1000.0 * initial, 'A')} / {figure(rated, 'A')}",
                result=quantity(multiple, ""),
            )
            return Worked(row=f"{row[1]}, {row[0]}", lines=(line,))
    return None


def contributions_table(outcome: StudyOutcome, result: ShortCircuitResult) -> Table:
    """Return what every source gives to every main, emergency and propulsion board."""
    columns = [
        text_column("mode", "Mode"),
        text_column("case", "Case"),
        text_column("board", "Board"),
        text_column("source", "Source"),
        text_column("through", "Arrives through"),
        ka_column("ik_initial_ka", "I''k", 3, digits=3),
        ka_column("iac_half_ka", "Iac(T/2)", 3, digits=3),
        ka_column("ip_ka", "ip", 3, digits=3),
        percent_column("ip_share_percent", "Part of ip", digits=3),
        ka_column("sustained_ka", "Sustained", 3, digits=3),
    ]
    leading = leading_boards(outcome, result)
    rows: list[tuple[Value, ...]] = []
    for view in cases(result):
        at_place = ends_at(view.ship)
        for place in leading:
            if view.ship.live[place]:
                rows += _contributions(view, result, place, at_place.get(place))
    return make_table(
        key="fault_contributions",
        title="Contribution of every source to the main, emergency and propulsion boards",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "They add up to the current of the board; the greatest first. Where motors share a feeder with "
            "other sources, these give more as the motors die away: that is shown as taken over from motors.",
        ),
        worked=_worked_contribution(result, leading),
        group_by=("mode", "case", "board"),
        shown_per_group=_PARTS_SHOWN,
    )


def _contributions(
    view: CaseView, result: ShortCircuitResult, place: int, ends: IntArray | None
) -> Iterable[tuple[Value, ...]]:
    case = view.ship
    total = float(case.ip_a[place])
    for s in np.argsort(-case.source_ip_a[place], kind="stable").tolist():
        if case.source_ip_a[place, s] <= 0.0:
            continue
        yield (
            view.mode,
            view.name,
            result.places.names[place],
            case.sources.names[s],
            _through(case, ends, s, result.places.names[place]),
            ka(case.source_initial_a[place, s]),
            ka(case.source_half_a[place, s]),
            ka(case.source_ip_a[place, s]),
            percent(case.source_ip_a[place, s] / total),
            ka(case.parts.sustained_a[place, s]),
        )


def _through(case: FaultCase, ends: IntArray | None, s: int, board: str) -> str:
    rows = [] if ends is None else [int(e) for e in ends if case.ends.share[e, s] > _SMALLEST_SHARE]
    if rows:
        return ", ".join(dict.fromkeys(case.ends.branches[e] for e in rows))
    return "stands on the board" if case.sources.boards[s] == board else ""


def _worked_contribution(result: ShortCircuitResult, leading: Sequence[int]) -> Worked | None:
    for mode in solved_modes(result):
        case = mode.maximum
        for place in leading:
            if case.live[place]:
                s = int(np.argmax(case.source_ip_a[place]))
                row = f"{mode.mode}, maximum, {result.places.names[place]}, {case.sources.names[s]}"
                return Worked(row=row, lines=_decay_lines(case, place, s, 0.5 / result.f_hz))
    return None


def _decay_lines(case: FaultCase, place: int, s: int, half_s: float) -> tuple[WorkedLine, ...]:
    p = case.parts
    first, second, last, dc = (
        ka(v[place, s]) for v in (p.subtransient_a, p.transient_a, p.sustained_a, p.dc_a)
    )
    t = figure(half_s, "")
    t_sub, t_trans, t_dc = (figure(v[place, s], "") for v in (p.t_sub_s, p.t_trans_s, p.t_dc_s))
    i1, i2, i3 = (figure(v, "") for v in (first, second, last))
    direct = f"{figure(dc, '')} × exp(−{t} / {t_dc})"
    return (
        WorkedLine(
            label="Iac(T/2)",
            formula="(I''k − I'k) · exp(−t/T'') + (I'k − Ik) · exp(−t/T') + Ik",
            figures=f"({i1} − {i2}) × exp(−{t} / {t_sub}) + ({i2} − {i3}) × exp(−{t} / {t_trans}) + {i3}",
            result=quantity(ka(case.source_half_a[place, s]), "kA"),
        ),
        WorkedLine(
            label="ip",
            formula="√2 · Iac(T/2) + idc(0) · exp(−t/Tdc)",
            figures=f"√2 × {figure(ka(case.source_half_a[place, s]), '')} + {direct}",
            result=quantity(ka(case.source_ip_a[place, s]), "kA"),
        ),
    )
