"""Load, setting and rating of each cable: Ib <= In <= Iz, and what trips for certain against 1.45 Iz."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_cables import protecting_devices
from study.analyses.fault_ratings_series import greatest, worst_mode
from study.analyses.load_flow_branches import cable_rating_a
from study.analyses.protection_devices import DeviceModel
from study.model.branches import Cable
from study.model.loads import Load
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.cable_protection import CableOverload, Exempt
from study.results.load_flow import LoadFlowResult

FloatArray = NDArray[np.float64]


def cable_overload(plant: Plant, models: Sequence[DeviceModel], flow: LoadFlowResult) -> CableOverload:
    """Return load, setting and rating of every cable.

    The overload protection is the device with the least current that trips for certain, among those on the
    cable or at its ends, thermal overload relays of the consumer included.

    Parameters
    ----------
    plant : Plant
        Cables, consumers, sources.
    models : sequence of DeviceModel
        From `protection_devices`.
    flow : LoadFlowResult
        Currents of every mode.

    Returns
    -------
    CableOverload
        In workbook order.
    """
    currents = flow_currents_a(plant, flow)
    rated = rated_currents_a(plant)
    served = [np.fmax(rated.get(c.from_end, np.nan), rated.get(c.to_end, np.nan)) for c in plant.cables]
    found = [_protection([models[k] for k in devices]) for devices in devices_of_cables(plant)]
    return CableOverload(
        load_a=read_only(np.fmax(greatest(currents), served)),
        load_mode=read_only(worst_mode(~np.isnan(currents), currents, currents), np.int64),
        flow_a=read_only(currents),
        rating_a=read_only([cable_rating_a(c) for c in plant.cables]),
        device=tuple(name for name, _, _ in found),
        device_a=read_only([setting_a for _, setting_a, _ in found]),
        conventional_a=read_only([trips_a for _, _, trips_a in found]),
        exempt=tuple(exempt(plant, cable) for cable in plant.cables),
    )


def flow_currents_a(plant: Plant, flow: LoadFlowResult) -> FloatArray:
    """Return the current of each cable in each mode, [cable, mode]; NaN where it carries none.

    Parameters
    ----------
    plant : Plant
        Cables.
    flow : LoadFlowResult
        Currents of every mode.

    Returns
    -------
    ndarray, shape (cable, mode)
        Of all runs together. [A]
    """
    row = {cable.name: k for k, cable in enumerate(plant.cables)}
    found = np.full((len(row), len(flow.modes)), np.nan)
    for column, mode in enumerate(flow.modes):
        branches = mode.branches
        for name, kind, amps in zip(branches.names, branches.kinds, branches.current_a, strict=True):
            if kind == "cable":
                found[row[name], column] = amps
    return found


def rated_currents_a(plant: Plant) -> Mapping[str, float]:
    """Return the rated current of one unit of every consumer and source, by name.

    Source: definition, ``I = S/(sqrt3 U)``, single-phase ``S/U``; the name-plate's where given.

    Parameters
    ----------
    plant : Plant
        Consumers and sources.

    Returns
    -------
    mapping of str to float
        [A]
    """
    rated = {load.name: rated_current_a(load) for load in plant.loads}
    root3 = np.sqrt(3.0)
    rated |= {g.name: 1000.0 * g.s_rated_kva / (root3 * g.u_rated_v) for g in plant.gensets}
    rated |= {s.name: s.i_rated_a for s in plant.shore_supplies}
    return rated


def rated_current_a(load: Load) -> float:
    """Return the rated current of one unit of a consumer.

    Source: definition; the name-plate's where given.

    Parameters
    ----------
    load : Load
        The consumer.

    Returns
    -------
    float
        [A]
    """
    if load.running_current_a is not None:
        return load.running_current_a
    efficiency = load.efficiency if load.kind == "motor" else 1.0
    lines = np.sqrt(3.0) if load.phases == 3 else 1.0
    return float(1000.0 * load.p_rated_kw / (efficiency * load.cos_phi * lines * load.u_rated_v))


def exempt(plant: Plant, cable: Cable) -> Exempt:
    """Return what a cable serves where that may have no ordinary overload protection.

    Source: SOLAS II-1/30 for steering gear; class practice for fire pumps, from memory.

    Parameters
    ----------
    plant : Plant
        Consumers.
    cable : Cable
        The run.

    Returns
    -------
    str
        ``steering gear``, ``fire pump`` or "".
    """
    for load in plant.loads:
        if load.name in (cable.from_end, cable.to_end):
            if load.essential_to == "steering" and load.kind in ("motor", "converter"):
                return "steering gear"
            words = f"{load.name} {load.description}".lower()
            if "fire pump" in " ".join(words.replace("-", " ").split()):
                return "fire pump"
    return ""


def devices_of_cables(plant: Plant) -> list[tuple[int, ...]]:
    """Return the devices of each cable, thermal overload relays on it and at its ends included.

    Parameters
    ----------
    plant : Plant
        Cables and devices.

    Returns
    -------
    list of tuple of int
        Places in the workbook's order; breakers, fuses and relays first.
    """
    overloads: dict[str, list[int]] = {}
    for k, device in enumerate(plant.devices):
        if device.kind == "thermal overload":
            overloads.setdefault(device.equipment, []).append(k)
    pairs = zip(plant.cables, protecting_devices(plant), strict=True)
    return [
        (*found, *(k for at in (c.name, c.from_end, c.to_end) for k in overloads.get(at, ())))
        for c, found in pairs
    ]


def _protection(own: Sequence[DeviceModel]) -> tuple[str, float, float]:
    """Return name, In and I2 of what protects a cable from overload; inf for nothing, NaN for not known."""
    known = [m for m in own if not np.isnan(m.conventional_a)]
    if known:
        first = min(known, key=lambda m: m.conventional_a)
        return first.name, first.overload_a, first.conventional_a
    if not own or any(m.band.unknown or not np.isnan(m.overload_a) for m in own):
        return "", np.nan, np.nan
    return "", np.inf, np.inf
