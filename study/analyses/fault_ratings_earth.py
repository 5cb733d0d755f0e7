"""Earth faults: neutral resistors against current and time, and what detects the fault in each system."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_series import Stacked, given
from study.formulas.fault_earth import resistive_earth_fault_current_a
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.fault_ratings import EarthFaultRow, ResistorRatings
from study.results.short_circuit import EarthSystem, ModeShortCircuit, ShortCircuitResult

FloatArray = NDArray[np.float64]


def earth_fault_rows(plant: Plant, result: ShortCircuitResult) -> tuple[EarthFaultRow, ...]:
    """Return the earth-fault current of every system in every mode, with the devices that trip on it.

    Parameters
    ----------
    plant : Plant
        Devices.
    result : ShortCircuitResult
        Systems of each mode.

    Returns
    -------
    tuple of EarthFaultRow
        Modes in order, systems within.
    """
    rows = []
    set_for_it = _set_for_earth_faults(plant)
    for mode in result.modes:
        for system in mode.earth:
            trips = _tripping(result, mode, system, set_for_it)
            pick_ups = [
                (plant.devices[k].earth_fault_a or 0.0) * (1.0 + plant.devices[k].current_tolerance)
                for k in trips
            ]
            highest = int(np.argmax(pick_ups)) if trips else -1
            rows.append(
                EarthFaultRow(
                    mode=mode.mode,
                    boards=system.boards,
                    u_nominal_v=system.u_nominal_v,
                    earthing=system.earthing,
                    capacitive_a=system.capacitive_a,
                    capacitance_given=system.capacitance_given,
                    fault_a=system.fault_a,
                    trips=tuple(plant.devices[k].name for k in trips),
                    pick_up_a=pick_ups[highest] if trips else np.nan,
                    pick_up_device=plant.devices[trips[highest]].name if trips else "",
                )
            )
    return tuple(rows)


def _set_for_earth_faults(plant: Plant) -> list[int]:
    """Return the devices with an earth-fault setting."""
    return [k for k, device in enumerate(plant.devices) if device.earth_fault_a is not None]


def _tripping(
    result: ShortCircuitResult, mode: ModeShortCircuit, system: EarthSystem, set_for_it: list[int]
) -> list[int]:
    """Return those of the devices that stand in a system."""
    place = mode.devices.place
    return [k for k in set_for_it if place[k] >= 0 and result.places.boards[place[k]] in system.boards]


def resistor_ratings(plant: Plant, result: ShortCircuitResult) -> ResistorRatings:
    """Return the current of every neutral resistor and how long it flows.

    Parameters
    ----------
    plant : Plant
        Boards and devices.
    result : ShortCircuitResult
        Systems of each mode.

    Returns
    -------
    ResistorRatings
        Boards with a resistor, in workbook order.
    """
    boards = [b for b in plant.boards if b.earthing_resistor_ohm is not None]
    volts = np.array([b.u_nominal_v for b in boards], float)
    ohms = given([b.earthing_resistor_ohm for b in boards])
    names = tuple(b.name for b in boards)
    modes: list[dict[str, NDArray[np.generic]]] = [
        {"lasts_s": _lasts_s(plant, result, mode, names)} for mode in result.modes
    ]
    lasts = Stacked(modes, len(boards))["lasts_s"]
    return ResistorRatings(
        boards=names,
        current_a=read_only(resistive_earth_fault_current_a(volts, ohms)),
        rated_a=read_only(given([b.resistor_rating_a for b in boards])),
        rated_s=read_only(given([b.resistor_time_s for b in boards])),
        live=read_only(~np.isnan(lasts), np.bool_),
        lasts_s=read_only(lasts),
    )


def _lasts_s(
    plant: Plant, result: ShortCircuitResult, mode: ModeShortCircuit, boards: tuple[str, ...]
) -> FloatArray:
    """Return the longest earth-fault delay in each board's system; inf: nothing trips, NaN: dead."""
    found = np.full(len(boards), np.nan)
    set_for_it = _set_for_earth_faults(plant)
    for system in mode.earth:
        delays = []
        for k in _tripping(result, mode, system, set_for_it):
            device = plant.devices[k]
            if device.earth_fault_delay_s is not None:
                more = 1.0 + device.time_tolerance
                delays.append(device.earth_fault_delay_s * more + device.breaking_time_max_s)
        for row, name in enumerate(boards):
            if name in system.boards:
                found[row] = max(delays, default=np.inf)
    return found
