"""Tables of what carries current: cables, transformers, ties and reactors."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from study.report.content import StatusLookup, StudyOutcome, cells_by_name
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
    verdict_column,
)
from study.results.load_flow import BranchState, ModeLoadFlow

_SHEET = "R Load flow"
_SHOWN = 10


def branch_tables(outcome: StudyOutcome) -> tuple[Table, ...]:
    """Return cables, transformers, and ties with reactors, each with the most loaded first.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    return (
        _branch_table(outcome, "cables", "Cables", ("cable",), _CABLE_NOTE),
        _branch_table(
            outcome,
            "transformers",
            "Transformers",
            ("transformer", "three-winding transformer"),
            "Currents are those of the primary side, of all units in parallel; the most loaded first.",
        ),
        _branch_table(outcome, "ties_and_reactors", "Ties and reactors", ("tie", "reactor"), _TIE_NOTE),
    )


_CABLE_NOTE = (
    "Rating: all runs in parallel, with its deratings. A cable to a consumer stands for one unit's run, and "
    "its row for the consumer running, whatever counts of it in the load balance. The most loaded first."
)
_TIE_NOTE = (
    "In a closed ring of ties without impedance the current of each tie is undetermined; give the ties an "
    "impedance to have it."
)


def _columns() -> list[Column]:
    return [
        text_column("mode", "Mode"),
        text_column("name", "Name"),
        text_column("from_end", "From"),
        text_column("to_end", "To"),
        Column(key="p_from_kw", heading="Active in", unit="kW", most_decimals=1),
        Column(key="q_from_kvar", heading="Reactive in", unit="kvar", most_decimals=1),
        Column(
            key="current_a",
            heading="Current",
            unit="A",
            most_decimals=1,
            against="rating_a",
            missing="undetermined",
        ),
        Column(key="rating_a", heading="Rating", unit="A", most_decimals=1),
        percent_column("loading_percent", "Of rating", against=100.0),
        Column(key="loss_kw", heading="Loss", unit="kW", most_decimals=2),
        percent_column("drop_percent", "Voltage drop", most_decimals=2),
        verdict_column(),
        cell_column(),
    ]


def _branch_table(outcome: StudyOutcome, key: str, title: str, kinds: tuple[str, ...], note: str) -> Table:
    cells, status = cells_by_name(outcome.plant), StatusLookup(outcome.verdicts)
    rows: list[tuple[Value, ...]] = []
    for mode in outcome.load_flow.modes:
        rows += [_row(mode, b, cells, status) for b in _most_loaded_first(mode.branches, kinds)]
    return make_table(
        key=key,
        title=title,
        sheet=_SHEET,
        columns=_columns(),
        rows=rows,
        notes=(note,),
        worked=_worked(outcome, kinds),
        group_by=("mode",),
        shown_per_group=_SHOWN,
    )


def _most_loaded_first(state: BranchState, kinds: tuple[str, ...]) -> list[int]:
    loading = np.where(np.isnan(state.loading), -np.inf, state.loading)
    return [int(i) for i in np.argsort(-loading, kind="stable") if state.kinds[i] in kinds]


def _row(mode: ModeLoadFlow, b: int, cells: Mapping[str, str], status: StatusLookup) -> tuple[Value, ...]:
    state, name = mode.branches, mode.branches.names[b]
    return (
        mode.mode,
        name,
        state.from_ends[b],
        state.to_ends[b],
        float(state.p_from_kw[b]),
        float(state.q_from_kvar[b]),
        float(state.current_a[b]),
        float(state.rating_a[b]),
        percent(state.loading[b]),
        float(state.loss_kw[b]),
        percent(state.drop_pu[b]),
        status(mode.mode, name, "cables", "loading"),
        cells.get(name, ""),
    )


def _worked(outcome: StudyOutcome, kinds: tuple[str, ...]) -> Worked | None:
    for mode in outcome.load_flow.modes:
        state = mode.branches
        for b in _most_loaded_first(state, kinds):
            if np.isfinite(state.loading[b]):
                current, rating = float(state.current_a[b]), float(state.rating_a[b])
                line = WorkedLine(
                    label="Of rating",
                    formula="current / rating",
                    figures=f"{figure(current, 'A')} / {figure(rating, 'A')}",
                    result=quantity(percent(state.loading[b]), "%"),
                )
                return Worked(row=f"{state.names[b]}, {mode.mode}", lines=(line,))
    return None
