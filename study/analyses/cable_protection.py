"""Every cable against overload, short circuit and voltage drop, and the section that would suffice."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from study.analyses.cable_drops import cable_drop
from study.analyses.cable_heat import cable_heat
from study.analyses.cable_loads import cable_overload
from study.analyses.cable_sections import cable_sections
from study.analyses.fault_ratings_cables import protecting_devices
from study.analyses.protection_devices import DeviceModel
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.cable_protection import CableProtectionResult
from study.results.load_flow import LoadFlowResult
from study.results.short_circuit import ShortCircuitResult


@dataclass(frozen=True, slots=True, kw_only=True)
class CableOptions:
    """Limits that the proposed sections keep.

    ``drop_limit_pu`` from the switchboard to a consumer, ``trip_factor`` what may trip the overload
    protection for certain over the rating of the cable.
    """

    drop_limit_pu: float
    trip_factor: float


def cable_protection(
    plant: Plant,
    models: Sequence[DeviceModel],
    flow: LoadFlowResult,
    short_circuit: ShortCircuitResult,
    options: CableOptions,
) -> CableProtectionResult:
    """Return every cable with what protects it.

    Parameters
    ----------
    plant : Plant
        Cables.
    models : sequence of DeviceModel
        From `protection_devices`.
    flow : LoadFlowResult
        Currents and voltages of every mode.
    short_circuit : ShortCircuitResult
        Fault currents of every mode.
    options : CableOptions
        Limits that the proposals keep.

    Returns
    -------
    CableProtectionResult
        In workbook order.
    """
    overload = cable_overload(plant, models, flow)
    heat = cable_heat(plant, models, short_circuit)
    drop = cable_drop(plant, flow, options.drop_limit_pu)
    cables = plant.cables
    return CableProtectionResult(
        modes=tuple(mode.mode for mode in flow.modes),
        names=tuple(c.name for c in cables),
        from_ends=tuple(c.from_end for c in cables),
        to_ends=tuple(c.to_end for c in cables),
        runs=read_only([c.runs for c in cables], np.int64),
        length_m=read_only([c.length_m for c in cables]),
        devices=tuple(tuple(models[k].name for k in found) for found in protecting_devices(plant)),
        overload=overload,
        heat=heat,
        drop=drop,
        sections=cable_sections(plant, overload, heat, drop, flow, trip_factor=options.trip_factor),
    )
