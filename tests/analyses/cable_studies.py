"""The cables of a small plant through the whole chain: load flow, short circuit, devices."""

from __future__ import annotations

import numpy as np

from study.analyses.cable_protection import CableOptions, cable_protection
from study.analyses.load_flow import load_flow
from study.analyses.protection_devices import DeviceModel, protection_devices
from study.analyses.short_circuit import short_circuit
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.model.plant import Plant
from study.network.network import build_network, mode_network
from study.results.cable_protection import CableProtectionResult
from study.results.load_flow import LoadFlowResult
from study.results.short_circuit import ShortCircuitResult

OPTIONS = CableOptions(drop_limit_pu=0.06, trip_factor=1.45)


def flows(plant: Plant) -> LoadFlowResult:
    """Every consumer at its rated input, at its own power factor."""
    network = build_network(plant)
    kw = np.array([x.p_rated_kw / x.efficiency * x.installed for x in plant.loads])
    kvar = kw * np.tan(np.arccos([x.cos_phi for x in plant.loads]))
    rows = len(plant.modes)
    return load_flow(
        [mode_network(network, mode) for mode in plant.modes],
        np.tile(kw, (rows, 1)),
        np.tile(kvar, (rows, 1)),
    )


def faults(plant: Plant) -> ShortCircuitResult:
    return short_circuit(build_network(plant), ShortCircuitOptions(compare=False))


def study_cables(
    plant: Plant, flow: LoadFlowResult | None = None
) -> tuple[tuple[DeviceModel, ...], ShortCircuitResult, CableProtectionResult]:
    models, currents = protection_devices(plant), faults(plant)
    result = cable_protection(plant, models, flow or flows(plant), currents, OPTIONS)
    return models, currents, result
