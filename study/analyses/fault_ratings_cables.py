"""Cables: heat of a fault until it is cleared, against what the conductors withstand."""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_boards import nominal_ratios
from study.analyses.fault_ratings_clearing import STAGES, UNKNOWN
from study.analyses.fault_ratings_least import LeastFaults
from study.analyses.fault_ratings_series import SECTIONS_MM2, Stacked, greatest, next_usual, worst_mode
from study.analyses.fault_ratings_sides import Sides
from study.formulas.cable_ratings import ADIABATIC_K, adiabatic_k, least_section_mm2, withstand_a2s
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.fault_ratings import CableRatings
from study.results.short_circuit import ModeShortCircuit, ShortCircuitResult

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

# Longer than this the heat no longer stays in the conductor: IEC 60949, scope of the adiabatic method, from
# memory.
ADIABATIC_UP_TO_S: Final = 5.0


def protecting_devices(plant: Plant) -> tuple[tuple[int, ...], ...]:
    """Return the devices that clear a fault on each cable, by their place in the workbook.

    Those that stand on the cable, else those on the consumer, source or transformer at one of its ends.

    Parameters
    ----------
    plant : Plant
        Cables and devices.

    Returns
    -------
    tuple of tuple of int
        One for each cable.
    """
    on: dict[str, list[int]] = {}
    for k, device in enumerate(plant.devices):
        if device.kind != "thermal overload":
            on.setdefault(device.equipment, []).append(k)
    boards = {b.name for b in plant.boards}
    found = []
    for cable in plant.cables:
        ends = [end for end in (cable.from_end, cable.to_end) if end not in boards]
        found.append(tuple(on.get(cable.name) or [k for end in ends for k in on.get(end, ())]))
    return tuple(found)


def cable_ratings(
    plant: Plant, sides: list[Sides], least: list[LeastFaults], result: ShortCircuitResult
) -> CableRatings:
    """Return the heat in every cable in every mode.

    Parameters
    ----------
    plant : Plant
        Cables and devices.
    sides : list of Sides
        Both sides of all devices, one item for each mode.
    least : list of LeastFaults
        One for each mode.
    result : ShortCircuitResult
        Currents.

    Returns
    -------
    CableRatings
        In workbook order.
    """
    cables = plant.cables
    devices = protecting_devices(plant)
    k = np.array(
        [
            float(adiabatic_k(c.conductor_temperature_degc, c.short_circuit_temperature_degc, c.conductor))
            for c in cables
        ]
    )
    runs = np.array([c.runs for c in cables], float)
    section = np.array([c.section_mm2 for c in cables], float)
    withstand = withstand_a2s(runs * section, k)
    pairs = zip(sides, least, result.modes, strict=True)
    table = Stacked([_mode(plant, devices, a, b, mode) for a, b, mode in pairs], len(cables))
    heat, far, live = table["heat_a2s"], table["far_heat_a2s"], table["live"] > 0.0
    worst = greatest(np.where(live, np.fmax(heat, far), np.nan))
    return CableRatings(
        names=tuple(c.name for c in cables),
        stages=STAGES,
        k=read_only(k),
        withstand_a2s=read_only(withstand),
        devices=tuple(tuple(plant.devices[d].name for d in found) for found in devices),
        live=read_only(live, np.bool_),
        heat_a2s=read_only(heat),
        device=read_only(table["device"], np.int64),
        clearing_s=read_only(table["clearing_s"]),
        cleared_by=read_only(table["cleared_by"], np.int64),
        let_through=read_only(table["let_through"], np.bool_),
        end_degc=read_only(_end_degc(plant, heat, (runs * section)[:, None])),
        far_heat_a2s=read_only(far),
        nominal_initial=read_only(table["nominal_initial"]),
        enough_mm2=read_only(next_usual(least_section_mm2(worst, k) / runs, SECTIONS_MM2)),
        worst_mode=read_only(worst_mode(live, np.fmax(heat, far) / withstand[:, None], heat), np.int64),
    )


def _end_degc(plant: Plant, heat_a2s: FloatArray, section_mm2: FloatArray) -> FloatArray:
    """Return the temperature that the conductor reaches, (ts + b) e^(I²t/(K S)²) - b.

    Source: IEC 60949:1988, clause 3, adiabatic equation solved for the temperature; constants from memory.
    """
    constants = np.array([ADIABATIC_K[c.conductor] for c in plant.cables], float).reshape(-1, 2)
    big_k, b = constants[:, :1], constants[:, 1:]
    start = np.array([c.conductor_temperature_degc for c in plant.cables], float)[:, None]
    rise = np.minimum(heat_a2s / (big_k * section_mm2) ** 2, 50.0)
    return np.asarray((start + b) * np.exp(rise) - b)


def _mode(
    plant: Plant,
    devices: tuple[tuple[int, ...], ...],
    sides: Sides,
    least: LeastFaults,
    mode: ModeShortCircuit,
) -> dict[str, NDArray[np.generic]]:
    limited = np.nan_to_num(sides.limited_a2s, nan=-1.0)
    worse = np.stack([limited.argmax(axis=0), np.arange(limited.shape[1])])
    # The last column stands for no device, which -1 picks.
    heat = np.append(limited[*worse], -1.0)
    stage = np.append(sides.stage[*worse], UNKNOWN)
    clearing_s = np.append(sides.time_s[*worse], np.nan)
    by_maker = np.append(sides.let_through[*worse], False)
    place = np.append(sides.place, -1)
    closed = set(mode.maximum.ends.branches)
    live = np.array(
        [
            any(sides.live[d] for d in found) if found else cable.name in closed
            for cable, found in zip(plant.cables, devices, strict=True)
        ],
        bool,
    )
    device = np.array([_hottest(found, sides, heat) for found in devices], np.int64)
    there = device >= 0
    return {
        "live": live,
        "device": device,
        "heat_a2s": np.where(there, heat[device], np.nan),
        "clearing_s": clearing_s[device],
        "cleared_by": stage[device],
        "let_through": by_maker[device],
        "nominal_initial": nominal_ratios(mode.maximum, place[device])[1],
        "far_heat_a2s": _far_heat(devices, least),
    }


def _hottest(found: tuple[int, ...], sides: Sides, heat_a2s: FloatArray) -> int:
    """Return the device that lets most heat into the cable; -1 where no clearing time is known."""
    live = [d for d in found if sides.live[d] and heat_a2s[d] >= 0.0]
    return max(live, key=lambda d: heat_a2s[d], default=-1)


def _far_heat(devices: tuple[tuple[int, ...], ...], least: LeastFaults) -> FloatArray:
    """Return the heat of the least fault at the far end where it is cleared soon enough to stay inside."""
    soon = least.judged & (least.clearing.time_s <= ADIABATIC_UP_TO_S)
    heat = np.where(soon, least.heat_a2s, np.nan)
    return np.array([max((float(heat[d]) for d in found if soon[d]), default=np.nan) for found in devices])
