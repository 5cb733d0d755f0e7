"""Everything that must survive a fault: boards, devices, cables, ties, transformers, reactors, resistors."""

from __future__ import annotations

from study.analyses.fault_ratings_boards import board_ratings, tie_ratings
from study.analyses.fault_ratings_cables import cable_ratings
from study.analyses.fault_ratings_devices import RatedDevices, device_ratings
from study.analyses.fault_ratings_earth import earth_fault_rows, resistor_ratings
from study.analyses.fault_ratings_least import clearing_ratings, least_faults
from study.analyses.fault_ratings_limiting import let_through_sheets
from study.analyses.fault_ratings_releases import releases
from study.analyses.fault_ratings_sides import (
    PlantDevices,
    branch_of_devices,
    sides_of,
    source_of_devices,
)
from study.analyses.fault_ratings_through import through_ratings
from study.analyses.fault_ratings_unknown import unknown_sustained
from study.model.plant import Plant
from study.results.fault_ratings import FaultRatingsResult
from study.results.short_circuit import ShortCircuitResult


def fault_ratings(plant: Plant, short_circuit: ShortCircuitResult) -> FaultRatingsResult:
    """Return the fault duty of every piece of equipment beside its ratings.

    Devices are held against the larger of what comes through their own branch and what comes from the rest.
    Faults are taken to be cleared by the device's own settings, each at the far end of its tolerance, while
    the current decays; I²t is that of the decaying current with its direct component.

    Parameters
    ----------
    plant : Plant
        Ratings and settings.
    short_circuit : ShortCircuitResult
        Currents of every mode.

    Returns
    -------
    FaultRatingsResult
        Arrays [piece, mode].
    """
    f_hz = short_circuit.f_hz
    sheets = let_through_sheets(plant)
    devices = PlantDevices(
        releases=releases(plant),
        sheets=tuple(sheets.get(device.curve or "") for device in plant.devices),
        branch=branch_of_devices(plant),
        source=source_of_devices(plant),
    )
    sides = [sides_of(plant, devices, mode, f_hz) for mode in short_circuit.modes]
    least = [least_faults(plant, devices, mode, short_circuit) for mode in short_circuit.modes]
    rated = RatedDevices(plant, short_circuit)
    boards = board_ratings(plant, devices, short_circuit)
    breakers = device_ratings(rated, devices, sides, short_circuit)
    cables = cable_ratings(plant, sides, least, short_circuit)
    ties = tie_ratings(plant, short_circuit)
    return FaultRatingsResult(
        modes=tuple(mode.mode for mode in short_circuit.modes),
        boards=boards,
        devices=breakers,
        clearing=clearing_ratings(plant, least, short_circuit),
        cables=cables,
        ties=ties,
        through=through_ratings(plant, devices, short_circuit),
        resistors=resistor_ratings(plant, short_circuit),
        unknown=unknown_sustained(plant, short_circuit, least, (boards, breakers, cables, ties)),
        earth=earth_fault_rows(plant, short_circuit),
    )
