"""From a checked row to a dataclass of the model, for every kind of equipment that maps field by field."""

from __future__ import annotations

from collections.abc import Hashable, Mapping
from dataclasses import fields
from functools import cache
from typing import Any, TypeVar, cast

from study.workbook.columns import SheetSpec
from study.workbook.tables import Row

_Made = TypeVar("_Made")


@cache
def _field_names(kind: Any) -> tuple[str, ...]:
    return tuple(field.name for field in fields(kind))


@cache
def _conversions(spec_name: str) -> tuple[tuple[str, str], ...]:
    from study.workbook.sheets import BY_NAME

    spec: SheetSpec = BY_NAME[spec_name]
    percent = tuple((column.field, "percent") for column in spec.columns if column.is_percent)
    return percent + tuple((column.field, "yes-no") for column in spec.columns if column.kind == "yes-no")


def model_values(row: Row) -> dict[str, Any]:
    """Return the values of a row in the units of the model: per cent as fractions, yes and no as truth.

    Parameters
    ----------
    row : Row
        A row with its blanks filled.
    """
    values = dict(row.values)
    for name, how in _conversions(row.sheet):
        value = values.get(name)
        if how == "yes-no":
            values[name] = value == "yes"
        elif isinstance(value, (int, float)):
            values[name] = value / 100.0
    values["cell"] = row.place(row.table.spec.key.field)
    return values


def make(made: type[_Made], values: Mapping[str, Any], /, **others: Any) -> _Made:
    """Return a dataclass from the values of its fields; `others` go before `values`."""
    return made(
        **{
            name: others[name] if name in others else values[name]
            for name in _field_names(cast(Hashable, made))
        }
    )
