"""Checked rows of sources as the model's dataclasses."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from study.model.sources import (
    ConverterSupply,
    ExcitationSystem,
    Genset,
    GovernorSettings,
    MachineData,
    RegulatorSettings,
    ShoreSupply,
    SynchronousMotor,
)
from study.workbook.build_parts import make, model_values
from study.workbook.tables import Row


def genset(row: Row) -> Genset:
    """Return a generating set."""
    values = model_values(row)
    return make(
        Genset,
        values,
        machine=make(MachineData, values),
        excitation=make(ExcitationSystem, values),
        regulator=_regulator(values),
        governor=_governor(values),
    )


def _regulator(values: Mapping[str, Any]) -> RegulatorSettings:
    return make(
        RegulatorSettings,
        values,
        droop_pu=values["voltage_droop_pu"],
        mode=values["regulator_mode"],
        reversed_polarity=values["polarity"] == "reversed",
    )


def _governor(values: Mapping[str, Any]) -> GovernorSettings:
    return make(
        GovernorSettings,
        values,
        droop_pu=values["speed_droop_pu"],
        mode=values["governor_mode"],
        time_constant_s=values["governor_time_constant_s"],
    )


def shore_supply(row: Row) -> ShoreSupply:
    """Return a shore connection."""
    return make(ShoreSupply, model_values(row))


def converter_supply(row: Row) -> ConverterSupply:
    """Return a supply through a converter."""
    return make(ConverterSupply, model_values(row))


def synchronous_motor(row: Row) -> SynchronousMotor:
    """Return a synchronous motor."""
    values = model_values(row)
    return make(
        SynchronousMotor,
        values,
        machine=make(MachineData, values),
        excitation=make(ExcitationSystem, values),
    )
