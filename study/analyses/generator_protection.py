"""The sets' own protection: pick-ups over rated values, overcurrent stages beside their own fault current."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from types import MappingProxyType
from typing import Final

import numpy as np

from study.analyses.protection_devices import DeviceModel
from study.model.plant import Plant
from study.model.protection import Device, ProtectionFunction
from study.model.sources import Genset
from study.results.arrays import FloatArray, read_only
from study.results.generator_protection import FunctionSetting, GeneratorProtectionResult, SetStages
from study.results.load_flow import LoadFlowResult
from study.results.short_circuit import ShortCircuitResult

_POWER: Final = MappingProxyType({"kw": 1.0, "mw": 1000.0, "w": 0.001})
_VOLTAGE: Final = MappingProxyType({"v": 1.0, "kv": 1000.0})
_CURRENT: Final = MappingProxyType({"a": 1.0, "ka": 1000.0})
# What a kind measures, and the units that belong to it.
_UNITS: Final[Mapping[str, tuple[str, Mapping[str, float]]]] = MappingProxyType(
    {
        "reverse power": ("power", _POWER),
        "undervoltage": ("voltage", _VOLTAGE),
        "overvoltage": ("voltage", _VOLTAGE),
        "underfrequency": ("frequency", MappingProxyType({"hz": 1.0})),
        "overfrequency": ("frequency", MappingProxyType({"hz": 1.0})),
        "differential": ("current", _CURRENT),
        "preferential trip 1": ("current", _CURRENT),
        "preferential trip 2": ("current", _CURRENT),
        "loss of excitation": ("none", MappingProxyType({})),
    }
)
_FRACTIONS: Final = MappingProxyType({"%": 0.01, "pu": 1.0, "p.u.": 1.0, "x": 1.0})
_AT_150: Final = 1.5


def generator_protection(
    plant: Plant, models: Sequence[DeviceModel], flow: LoadFlowResult, short_circuit: ShortCircuitResult
) -> GeneratorProtectionResult:
    """Return what protects each set, in terms of its rated values and its own fault current.

    Parameters
    ----------
    plant : Plant
        Sets, devices, functions.
    models : sequence of DeviceModel
        From `protection_devices`.
    flow : LoadFlowResult
        Which sets run in parallel.
    short_circuit : ShortCircuitResult
        What each set gives into a fault.

    Returns
    -------
    GeneratorProtectionResult
        In workbook order.
    """
    sets = {genset.name: genset for genset in plant.gensets}
    own = [(f, _set_of(plant, f, sets)) for f in plant.protection_functions]
    return GeneratorProtectionResult(
        functions=tuple(_function(plant, f, genset) for f, genset in own if genset is not None),
        stages=_stages(plant, models, flow, short_circuit),
    )


def _set_of(plant: Plant, function: ProtectionFunction, sets: Mapping[str, Genset]) -> Genset | None:
    """Return the set that a function watches: itself, its cable's, or that of its device."""
    at = {function.equipment}
    at |= {d.equipment for d in plant.devices if d.name in at}
    at |= {end for c in plant.cables if c.name in at for end in (c.from_end, c.to_end)}
    return next((sets[name] for name in at if name in sets), None)


def _function(plant: Plant, function: ProtectionFunction, genset: Genset) -> FunctionSetting:
    rated = {
        "power": genset.p_rated_kw,
        "voltage": genset.u_rated_v,
        "frequency": plant.project.f_rated_hz,
        "current": rated_current_a(genset),
        "none": np.nan,
    }
    measure, units = _UNITS[function.kind]
    unit = function.unit.strip().lower()
    part = _FRACTIONS.get(unit, units.get(unit, np.nan) / rated[measure])
    return FunctionSetting(
        name=function.name,
        genset=genset.name,
        kind=function.kind,
        pick_up_pu=function.pick_up * part,
        written=f"{function.pick_up:g} {function.unit}",
        delay_s=function.delay_s,
        trips=function.trips or "",
        cell=function.cell,
    )


def rated_current_a(genset: Genset) -> float:
    """Return the rated current of a set: ``S/(sqrt3 U)``.

    Source: definition.

    Parameters
    ----------
    genset : Genset
        The set.

    Returns
    -------
    float
        [A]
    """
    return float(1000.0 * genset.s_rated_kva / (np.sqrt(3.0) * genset.u_rated_v))


def _stages(
    plant: Plant, models: Sequence[DeviceModel], flow: LoadFlowResult, short_circuit: ShortCircuitResult
) -> SetStages:
    rows = {device.name: device for device in plant.devices}
    found = [_breaker(plant, models, genset) for genset in plant.gensets]
    settings = [None if m is None else rows[m.opened_by] for m in found]
    rated = np.array([rated_current_a(g) for g in plant.gensets], float)
    running = _parallel(flow)
    seen = [_own_seen_a(short_circuit, g.name, row) for g, row in zip(plant.gensets, settings, strict=True)]
    clears = [
        np.nan if m is None else float(m.band.latest_s(_AT_150 * amps))
        for m, amps in zip(found, rated, strict=True)
    ]
    guarded = {f.equipment for f in plant.protection_functions if f.kind == "differential"}
    return SetStages(
        names=tuple(g.name for g in plant.gensets),
        device=tuple("" if m is None else m.name for m in found),
        opened_by=tuple("" if m is None else m.opened_by for m in found),
        rated_a=read_only(rated),
        rated_kva=read_only([g.s_rated_kva for g in plant.gensets]),
        long_time_a=_settings(settings, "long_time_a"),
        clears_150_s=read_only(clears),
        short_time_a=_settings(settings, "short_time_a"),
        instantaneous_a=_settings(settings, "instantaneous_a"),
        instantaneous_least_a=read_only(
            _settings(settings, "instantaneous_a")
            * np.array([np.nan if d is None else 1.0 - d.current_tolerance for d in settings])
        ),
        own_seen_a=read_only(seen),
        sustained_a=read_only([_sustained_a(short_circuit, g) for g in plant.gensets]),
        parallel=read_only([g.name in running for g in plant.gensets], np.bool_),
        differential=read_only(
            [
                g.name in guarded or (m is not None and bool(m.differential))
                for g, m in zip(plant.gensets, found, strict=True)
            ],
            np.bool_,
        ),
    )


def _settings(rows: Sequence[Device | None], name: str) -> FloatArray:
    values = [np.nan if row is None or getattr(row, name) is None else getattr(row, name) for row in rows]
    return read_only(values)


def _breaker(plant: Plant, models: Sequence[DeviceModel], genset: Genset) -> DeviceModel | None:
    """Return the breaker of a set: on the set, else on its cable; the first that is no relay."""
    at = {genset.name} | {c.name for c in plant.cables if genset.name in (c.from_end, c.to_end)}
    own = [m for m in models if m.device.equipment in at and m.device.kind != "overcurrent relay"]
    return next((m for m in own if m.device.kind == "circuit breaker"), own[0] if own else None)


def _parallel(flow: LoadFlowResult) -> set[str]:
    """Return the sets that run beside another set on one island in some mode."""
    found: set[str] = set()
    for mode in flow.modes:
        state = mode.sources
        places: dict[int, list[str]] = {}
        for name, kind, island in zip(state.names, state.kinds, state.island.tolist(), strict=True):
            if kind == "genset":
                places.setdefault(island, []).append(name)
        found |= {name for names in places.values() if len(names) > 1 for name in names}
    return found


def _own_seen_a(result: ShortCircuitResult, genset: str, row: Device | None) -> float:
    """Return the greatest of a set's own current as the instantaneous stage of its breaker sees it."""
    peak = row is not None and row.instantaneous_senses == "peak"
    best = np.nan
    for mode in result.modes:
        sources = mode.maximum.sources
        for k, name in enumerate(sources.names):
            if name == genset:
                seen = sources.peak_a[k] / np.sqrt(2.0) if peak else sources.initial_a[k]
                best = np.fmax(best, seen)
    return float(best)


def _sustained_a(result: ShortCircuitResult, genset: Genset) -> float:
    """Return the current that a set keeps up: the maker's where given, else the least of the study."""
    if genset.excitation.sustained_current is not None:
        return genset.excitation.sustained_current * rated_current_a(genset)
    best = np.nan
    for mode in result.modes:
        sources = mode.minimum.sources
        for k, name in enumerate(sources.names):
            if name == genset.name and sources.sustained_known[k]:
                best = np.fmin(best, sources.sustained_a[k])
    return float(best)
