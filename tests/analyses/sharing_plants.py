"""Plants for the sharing tests, and the network solved at any setting, apart from what the study does."""

from __future__ import annotations

from typing import Any

import numpy as np

from study.analyses.sharing import sharing_study
from study.analyses.sharing_options import SharingOptions
from study.model.modes import Event
from study.model.plant import Plant
from study.network.batch import BatchSolution, solve_batch
from study.network.network import ModeNetwork, build_network, mode_network
from study.network.settings import Settings
from study.results.arrays import FloatArray
from study.results.sharing import IslandSharing, SharingResult
from tests.plants import board, cable, genset, load, plant

OPTIONS = SharingOptions()
TRIMS = {
    "no-load voltage": ("no_load_voltage_pu", "v_ref_pu"),
    "voltage droop": ("voltage_droop_pu", "droop_pu"),
    "no-load frequency": ("no_load_frequency_pu", "f_no_load_pu"),
    "speed droop": ("speed_droop_pu", "speed_droop_pu"),
}


def asked(p: Plant) -> tuple[FloatArray, FloatArray]:
    """Return kW and kvar of every consumer at full load, by its name-plate."""
    kw = np.array([x.p_rated_kw * x.installed / x.efficiency for x in p.loads])
    return kw, kw * np.array([np.sqrt(1.0 - x.cos_phi**2) / x.cos_phi for x in p.loads])


def network_of(p: Plant, mode: int = 0) -> ModeNetwork:
    return mode_network(build_network(p), p.modes[mode])


def study(p: Plant, options: SharingOptions = OPTIONS) -> SharingResult:
    kw, kvar = asked(p)
    networks = [network_of(p, k) for k in range(len(p.modes))]
    rows = (len(networks), 1)
    return sharing_study(networks, np.tile(kw, rows), np.tile(kvar, rows), options)


def island(p: Plant, options: SharingOptions = OPTIONS) -> IslandSharing:
    result = study(p, options)
    assert len(result.islands) == 1, result.not_studied
    return result.islands[0]


def one_bus(*sets: dict[str, Any], kw: float = 800.0, cos_phi: float = 0.8, **more: Any) -> Plant:
    """Return sets of 1000 kVA on one board without cables, with one load of constant power."""
    gensets = [
        genset(f"G{i + 1}", "MSB", **{"p_engine_kw": 1200.0, "x_d_pu": 1.5, "ceiling": 3.0, **changes})
        for i, changes in enumerate(sets)
    ]
    consumer = load("Load", "MSB", kind="converter", p_rated_kw=kw, cos_phi=cos_phi)
    return plant(boards=[board("MSB")], gensets=gensets, loads=[consumer], **more)


def three_boards(**changes: Any) -> Plant:
    """Return unequal sets on three boards with cables between, one behind a cable of its own."""
    sets = [
        genset("G1", "A", p_engine_kw=1200.0),
        genset(
            "G2",
            "B",
            s_rated_kva=600.0,
            p_engine_kw=720.0,
            voltage_droop_pu=0.035,
            speed_droop_pu=0.03,
            no_load_frequency_pu=1.033,
        ),
        genset(
            "G3",
            "C",
            p_engine_kw=1200.0,
            droop_law="reactive current",
            droop_base="rated kVA",
            voltage_droop_pu=0.05,
        ),
    ]
    given: dict[str, Any] = {
        "boards": [board("A"), board("B"), board("C")],
        "gensets": sets,
        "cables": [
            cable("A-B", "A", "B", runs=3, length_m=80.0),
            cable("B-C", "B", "C", runs=4, length_m=60.0),
            cable("G1-A", "G1", "A", runs=5, length_m=30.0),
        ],
        "loads": [
            load("Pumps", "A", p_rated_kw=500.0),
            load("Fans", "B", p_rated_kw=300.0),
            load("Heaters", "C", kind="heating", p_rated_kw=300.0),
            load("Compressors", "C", p_rated_kw=200.0),
        ],
    }
    return plant(**{**given, **changes})


def solved_with(
    p: Plant, scale: FloatArray, name: str = "", setting: str = "", value: float = 0.0
) -> BatchSolution:
    """Return the network with one setting of one set changed, at some factors on all consumers."""
    at, (kw, kvar) = network_of(p), asked(p)
    settings = None
    if setting:
        field, own = TRIMS[setting]
        values = np.array([getattr(s, own) for s in at.sources])
        values[at.source_names.index(name)] = value
        settings = Settings(**{field: values})
    return solve_batch(at, scale[:, None] * kw, scale[:, None] * kvar, settings)


def event(equipment: str, size: float | None, unit: str | None, case: str = "Case 1") -> Event:
    return Event(
        case=case,
        mode="At sea",
        kind="maladjustment",
        equipment=equipment,
        cell="Events!F4",
        size=size,
        unit=unit,
        at_s=0.0,
        duration_s=None,
    )
