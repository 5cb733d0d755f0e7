"""Tables of fault ratings: the worst duty of every piece, boards, ties."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Final

from study.checks.verdict import STATUS_ORDER, Verdict
from study.report.content import StudyOutcome
from study.report.fault_pieces import (
    DEAD,
    NOT_GIVEN,
    SHEET,
    larger,
    of_rating,
    piece_cells,
    shown,
    tells,
    worked_part,
    worst_rows,
)
from study.report.fault_view import ka_column, mode_words
from study.report.numbers import figure, percent, quantity
from study.report.tables import (
    Column,
    Table,
    Value,
    Worked,
    WorkedLine,
    cell_column,
    make_table,
    percent_column,
    text_column,
)
from study.report.tables_fault_clearing import cables_table, clearing_table
from study.report.tables_fault_devices import device_tables
from study.report.tables_fault_earth import detection_table, resistors_table
from study.report.tables_fault_through import through_table
from study.report.tables_verdicts import JUDGED_COLUMNS, judged_values
from study.results.fault_ratings import BoardRatings, FaultRatingsResult, TieRatings

SUBJECT: Final = "fault ratings"
_DUTIES_SHOWN: Final = 20


def fault_rating_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return the tables of fault ratings; none where the study has no such result.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    ratings = outcome.fault_ratings
    if ratings is None:
        return ()
    cells = piece_cells(outcome)
    return (
        duties_table(outcome),
        boards_table(ratings, cells),
        *device_tables(ratings, cells),
        clearing_table(ratings, cells),
        cables_table(ratings, cells),
        ties_table(ratings, cells),
        through_table(ratings, cells),
        resistors_table(ratings, cells),
        detection_table(outcome, ratings),
    )


def worst_duties(outcome: StudyOutcome) -> tuple[tuple[Verdict, tuple[str, ...]], ...]:
    """Return the worst verdict of every quantity of every piece, worst first, with the modes that share it.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of (Verdict, tuple of str)
        Verdict and modes.
    """
    groups: dict[tuple[str, str], list[Verdict]] = {}
    for v in outcome.verdicts:
        if v.subject == SUBJECT:
            groups.setdefault((v.equipment, v.quantity), []).append(v)
    found = []
    for group in groups.values():
        governing = min(group, key=_worst_first)
        alike = [v.mode for v in group if _worst_first(v) == _worst_first(governing)]
        found.append((governing, tuple(dict.fromkeys(alike))))
    return tuple(sorted(found, key=lambda pair: _worst_first(pair[0])))


def _worst_first(v: Verdict) -> tuple[int, float]:
    return STATUS_ORDER.index(v.status), math.inf if math.isnan(v.margin) else v.margin


def duties_table(outcome: StudyOutcome) -> Table:
    """Return the worst mode of every duty of every piece: margin, verdict, what would cure it."""
    columns = [
        text_column("equipment", "Equipment"),
        text_column("quantity", "Duty", kind="long text"),
        text_column("modes", "Worst in"),
        *JUDGED_COLUMNS,
        Column(key="depends_on_data", heading="Depends on data", kind="text"),
        text_column("remedy", "What to change", kind="long text"),
        text_column("basis", "Basis", kind="long text"),
        cell_column(),
    ]
    rows = [
        (
            v.equipment,
            v.quantity,
            mode_words(modes, outcome.modes),
            *judged_values(v),
            v.depends_on_data,
            v.remedy,
            v.basis,
            v.cell,
        )
        for v, modes in worst_duties(outcome)
    ]
    return make_table(
        key="fault_duties",
        title="Duty of everything that must survive a fault, in its worst mode",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Each device is held against the larger of what comes through its own branch and what all else "
            "gives. A rating that is not given leaves the duty not assessed. 'Depends on data': the verdict "
            "flips between the reactances with and without their tolerance.",
        ),
        worked=_worked_margin([v for v, _ in worst_duties(outcome)]),
        group_by=("verdict",),
        shown_per_group=_DUTIES_SHOWN,
    )


def _worked_margin(verdicts: Sequence[Verdict]) -> Worked | None:
    for v in verdicts:
        if math.isfinite(v.value) and v.limit > 0 and tells(100.0 + percent(v.margin)):
            value, limit = figure(v.value, v.unit), figure(v.limit, v.unit)
            upper = v.sense == "at most"
            line = WorkedLine(
                label="Margin",
                formula="(limit − value) / limit" if upper else "(value − limit) / limit",
                figures=f"({limit} − {value}) / {limit}" if upper else f"({value} − {limit}) / {limit}",
                result=quantity(percent(v.margin), "%"),
            )
            return Worked(row=f"{v.equipment}, {v.quantity}, {v.mode}", lines=(line,))
    return None


def boards_table(ratings: FaultRatingsResult, cells: Mapping[str, str]) -> Table:
    """Return every board in its worst mode against its peak and short-time withstand."""
    b = ratings.boards
    columns = [
        text_column("board", "Board"),
        text_column("mode", "Worst mode"),
        text_column("limited_by", "Peak limited by"),
        ka_column("ip_ka", "ip"),
        ka_column("greatest_peak_ka", "Greatest peak"),
        ka_column("limited_peak_ka", "Peak, limited", against="rated_peak_ka"),
        ka_column("rated_peak_ka", "Rated Ipk", exact=True, missing=NOT_GIVEN),
        percent_column("peak_percent", "Peak, of rated", against=100.0, missing="not assessed"),
        ka_column("enough_peak_ka", "Enough Ipk would be", missing="none usual"),
        ka_column("half_ka", "Iac(T/2)", against="rated_short_time_ka"),
        ka_column("heat_ka", "Equal heating", against="rated_short_time_ka"),
        Column(
            key="rated_duration_s",
            heading="Over",
            unit="s",
            most_decimals=2,
            exact=True,
            missing=NOT_GIVEN,
        ),
        ka_column("rated_short_time_ka", "Rated Icw", exact=True, missing=NOT_GIVEN),
        percent_column("short_time_percent", "Short time, of rated", against=100.0, missing="not assessed"),
        ka_column("enough_short_time_ka", "Enough Icw would be", missing="none usual"),
        cell_column(),
    ]
    rows = [_board_row(b, i, m, words, cells) for i, m, words in worst_rows(b.worst_mode, ratings.modes)]
    return make_table(
        key="board_ratings",
        title="Boards against their withstand",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Equal heating: the constant current over the rated duration with the same I²t as the decaying "
            "current. It or Iac(T/2), whichever is larger, is held against Icw. Limited: with what "
            "current-limiting devices in the incoming branches let through.",
        ),
        worked=_worked_board(ratings),
    )


def _board_row(b: BoardRatings, i: int, m: int, words: str, cells: Mapping[str, str]) -> tuple[Value, ...]:
    short_ka = larger(float(b.half_ka[i, m]), float(b.heat_ka[i, m]))
    live = words != DEAD
    return (
        b.names[i],
        words,
        b.limited_by[i],
        *(shown(live, v[i, m]) for v in (b.ip_peak_ka, b.greatest_peak_ka, b.limited_peak_ka)),
        float(b.rated_peak_ka[i]),
        shown(live, of_rating(float(b.limited_peak_ka[i, m]), float(b.rated_peak_ka[i]))),
        shown(live, b.enough_peak_ka[i]),
        shown(live, b.half_ka[i, m]),
        shown(live, b.heat_ka[i, m]),
        float(b.rated_duration_s[i]),
        float(b.rated_short_time_ka[i]),
        shown(live, of_rating(short_ka, float(b.rated_short_time_ka[i]))),
        shown(live, b.enough_short_time_ka[i]),
        cells.get(b.names[i], ""),
    )


def _worked_board(ratings: FaultRatingsResult) -> Worked | None:
    b = ratings.boards
    for i, m, words in worst_rows(b.worst_mode, ratings.modes):
        value, rating = float(b.limited_peak_ka[i, m]), float(b.rated_peak_ka[i])
        if words != DEAD and tells(of_rating(value, rating)):
            return worked_part(f"{b.names[i]}, {words}", "Peak, of rated", value, rating, "kA")
    return None


def ties_table(ratings: FaultRatingsResult, cells: Mapping[str, str]) -> Table:
    """Return every tie in its worst mode against the ratings of the boards that it joins."""
    t = ratings.ties
    columns = [
        text_column("tie", "Tie"),
        text_column("mode", "Worst mode"),
        text_column("rated_by", "Ipk is of board"),
        text_column("rated_heat_by", "Icw is of board"),
        ka_column("peak_ka", "Peak through it", against="rated_peak_ka"),
        ka_column("rated_peak_ka", "Rated Ipk", exact=True, missing=NOT_GIVEN),
        percent_column("peak_percent", "Peak, of rated", against=100.0, missing="not assessed"),
        ka_column("heat_ka", "Equal heating", against="rated_short_time_ka"),
        Column(
            key="rated_duration_s",
            heading="Over",
            unit="s",
            most_decimals=2,
            exact=True,
            missing=NOT_GIVEN,
        ),
        ka_column("rated_short_time_ka", "Rated Icw", exact=True, missing=NOT_GIVEN),
        percent_column("heat_percent", "Heating, of rated", against=100.0, missing="not assessed"),
        cell_column(),
    ]
    rows = [_tie_row(t, i, m, words, cells) for i, m, words in worst_rows(t.worst_mode, ratings.modes)]
    return make_table(
        key="tie_ratings",
        title="Ties against the boards that they join",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "The larger of what flows through the tie into a fault on either side, against the weaker of "
            "both boards.",
        ),
    )


def _tie_row(t: TieRatings, i: int, m: int, words: str, cells: Mapping[str, str]) -> tuple[Value, ...]:
    live = words != DEAD
    peak, heat = float(t.peak_ka[i, m]), float(t.heat_ka[i, m])
    return (
        t.names[i],
        words,
        t.rated_by[i],
        t.rated_heat_by[i],
        shown(live, peak),
        float(t.rated_peak_ka[i]),
        shown(live, of_rating(peak, float(t.rated_peak_ka[i]))),
        shown(live, heat),
        float(t.rated_duration_s[i]),
        float(t.rated_short_time_ka[i]),
        shown(live, of_rating(heat, float(t.rated_short_time_ka[i]))),
        cells.get(t.names[i], ""),
    )
