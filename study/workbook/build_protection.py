"""Checked rows of devices, functions, ranges and makers' curves as the model's dataclasses."""

from __future__ import annotations

from typing import Any

from study.model.protection import (
    CurvePoint,
    Device,
    LetThroughPoint,
    MakerDiscrimination,
    ProtectionFunction,
    SettingRange,
)
from study.workbook.build_parts import make, model_values
from study.workbook.tables import Row

OFF = "off"


def device(row: Row) -> Device:
    """Return a protective device; `off` in a setting is kept apart from a blank."""
    values = model_values(row)
    return make(
        Device,
        values,
        short_time_a=_ampere(values["short_time_a"]),
        short_time_off=values["short_time_a"] == OFF,
        instantaneous_a=_ampere(values["instantaneous_a"]),
        instantaneous_off=values["instantaneous_a"] == OFF,
    )


def _ampere(value: Any) -> float | None:
    return None if value == OFF else value


def protection_function(row: Row) -> ProtectionFunction:
    """Return a protection function."""
    return make(ProtectionFunction, model_values(row))


def setting_range(row: Row) -> SettingRange:
    """Return what one setting can be set to."""
    return make(SettingRange, model_values(row))


def curve_point(row: Row) -> CurvePoint:
    """Return one point of a time-current curve."""
    return make(CurvePoint, model_values(row))


def let_through_point(row: Row) -> LetThroughPoint:
    """Return one point of a let-through curve."""
    return make(LetThroughPoint, model_values(row))


def maker_discrimination(row: Row) -> MakerDiscrimination:
    """Return a maker's statement on a pair of devices."""
    return make(MakerDiscrimination, model_values(row))
