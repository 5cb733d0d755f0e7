"""Checked rows of boards, transformers, cables, ties, reactors and filters as the model's dataclasses."""

from __future__ import annotations

from study.model.branches import (
    Board,
    Cable,
    Filter,
    Reactor,
    ThreeWindingTransformer,
    Tie,
    Transformer,
)
from study.workbook.build_parts import make, model_values
from study.workbook.tables import Row


def board(row: Row) -> Board:
    """Return a board."""
    return make(Board, model_values(row))


def transformer(row: Row) -> Transformer:
    """Return a two-winding transformer."""
    return make(Transformer, model_values(row))


def three_winding(row: Row) -> ThreeWindingTransformer:
    """Return a three-winding transformer."""
    return make(ThreeWindingTransformer, model_values(row))


def cable(row: Row) -> Cable:
    """Return a cable."""
    values = model_values(row)
    return make(Cable, values, conductor_class=int(values["conductor_class"]))


def tie(row: Row) -> Tie:
    """Return a tie."""
    return make(Tie, model_values(row))


def reactor(row: Row) -> Reactor:
    """Return a series reactor."""
    return make(Reactor, model_values(row))


def filter_of(row: Row) -> Filter:
    """Return a filter; a capacitor bank has neither order nor quality."""
    values = model_values(row)
    if values["kind"] == "capacitor":
        return make(Filter, values, tuning_order=None, quality=None)
    return make(Filter, values)
