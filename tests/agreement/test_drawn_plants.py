"""Plants drawn at random, every law and kind of branch among them: two solvers, and Kirchhoff in amperes.

The seed is fixed; a plant is three boards of one voltage joined by ties, reactors or cables, a fourth behind
a transformer, up to four sources and six consumers with cables of their own.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from study.model.plant import Plant
from study.network.batch import Settings, solve_batch
from study.network.cases import case
from study.network.network import build_network, mode_network
from study.network.solver import solve_reported
from tests.agreement.si_circuit import current_mismatch
from tests.plants import (
    board,
    cable,
    converter_supply,
    demand,
    filter_bank,
    genset,
    load,
    mode,
    plant,
    reactor,
    shore,
    tie,
    transformer,
)

BOARDS = ("A", "B", "C")
KINDS = ("motor", "heating", "lighting", "converter", "general")
REGULATORS: tuple[dict[str, Any], ...] = (
    {},
    {"droop_law": "reactive current"},
    {"droop_base": "rated kVA", "voltage_droop_pu": 0.05},
    {"regulator_mode": "kvar control"},
    {"regulator_mode": "fixed excitation", "no_load_voltage_pu": 1.6},
    {"field_supply": "compounded without regulator", "unregulated_voltage_pu": 1.0},
    {"ceiling": 0.7},
    {"ceiling": 0.9, "field_supply": "shunt"},
    {"p_engine_kw": 330.0},
)


UNREGULATED = slice(4, 6)  # places of REGULATORS; two of them in one island overpower the third set


def drawn(seed: int) -> tuple[Plant, np.ndarray, np.ndarray]:
    """Return a plant with kW and kvar of its consumers."""
    rng = np.random.default_rng(seed)
    joints = _joints(rng)
    loads, runs = _consumers(rng)
    joints["cables"] += runs
    if rng.random() < 0.5:
        joints["cables"].append(cable("CG0", "G0", "A", runs=10, length_m=20.0))
    share = np.array([60.0 if x.board == "D" else 250.0 for x in loads])
    p_kw = share * rng.uniform(0.3, 1.0, 6)
    in_use = {x.name: demand(float(rng.integers(1, 4))) for x in loads}
    built = plant(
        boards=[*(board(n) for n in BOARDS), board("D", 230.0)],
        gensets=_sets(rng),
        transformers=[transformer("T", "B", "D", tap_pu=float(rng.choice([-0.025, 0.0, 0.025])), units=3)],
        loads=loads,
        modes=[mode(demand=in_use)],
        **joints,
        **_others(rng),
    )
    return built, p_kw, p_kw * rng.uniform(0.1, 0.8, 6)


def _sets(rng: np.random.Generator) -> list[Any]:
    sets = [genset("G0", "A", voltage_droop_pu=0.03, p_engine_kw=1500.0, ceiling=3.0)]
    kinds = list(range(len(REGULATORS)))
    for n in range(1, rng.integers(2, 4)):
        kind = int(rng.choice(kinds))
        changes = dict(REGULATORS[kind])
        if kind in range(9)[UNREGULATED]:
            kinds = [k for k in kinds if k not in range(9)[UNREGULATED]]
        changes["s_rated_kva"] = float(rng.integers(400, 1500))
        changes.setdefault("p_engine_kw", changes["s_rated_kva"])
        changes["no_load_frequency_pu"] = float(rng.uniform(1.03, 1.05))
        sets.append(genset(f"G{n}", BOARDS[rng.integers(3)], **changes))
    return sets


def _joints(rng: np.random.Generator) -> dict[str, list[Any]]:
    joints: dict[str, list[Any]] = {"ties": [], "reactors": [], "cables": []}
    for a, b in (("A", "B"), ("B", "C")):
        kind, item = (
            ("ties", tie(f"T{a}{b}", a, b)),
            ("ties", tie(f"T{a}{b}", a, b, x_ohm=0.002, r_ohm=0.0005)),
            ("reactors", reactor(f"R{a}{b}", a, b, x_ohm=0.01)),
            ("cables", cable(f"C{a}{b}", a, b, runs=8, capacitance_uf_per_km=0.5)),
        )[rng.integers(4)]
        joints[kind].append(item)
    return joints


def _consumers(rng: np.random.Generator) -> tuple[list[Any], list[Any]]:
    loads, cables = [], []
    for n in range(6):
        at = ("A", "B", "C", "D")[rng.integers(4)]
        phases = int(rng.choice([3, 3, 2])) if at == "D" else 3
        u = 230.0 if at == "D" else 440.0
        kind = KINDS[rng.integers(5)]
        loads.append(load(f"L{n}", at, kind=kind, u_rated_v=u, phases=phases, installed=3))
        if rng.random() < 0.7:
            runs = int(rng.integers(1, 4))
            cables.append(cable(f"CL{n}", at, f"L{n}", length_m=float(rng.uniform(5, 60)), runs=runs))
    return loads, cables


def _others(rng: np.random.Generator) -> dict[str, Any]:
    following = {"control": "grid following", "p_set_kw": 150.0, "q_set_kvar": 40.0}
    f_hz = float(rng.choice([60.0, 60.6]))
    return (
        {"converter_supplies": [converter_supply("S", "C", speed_droop_pu=0.04)]},
        {"converter_supplies": [converter_supply("S", "B", **following)]},
        {"shore_supplies": [shore("S", "C", f_hz=f_hz, fault_level_min_mva=20.0)]},
        {"filters": [filter_bank("F", "B", kind="tuned", tuning_order=4.9, quality=30.0)]},
        {},
    )[rng.integers(5)]


@pytest.mark.parametrize("seed", range(40))
def test_both_solvers_and_kirchhoff_agree(seed: int) -> None:
    p, p_kw, q_kvar = drawn(seed)
    network = build_network(p)
    one = solve_reported(network, [case(mode_network(network, p.modes[0]), p_kw, q_kvar)])[0]
    assert one.own.solved, one.own.reason
    assert one.reported.solved, one.reported.reason
    assert one.agreement.du_pu < 1e-8
    assert max(one.agreement.dp_kw, one.agreement.dq_kvar) < 1e-7 * network.s_base_kva
    mismatch, largest = current_mismatch(one.own, p_kw, q_kvar)
    assert mismatch < 1e-8 * largest


@pytest.mark.parametrize("seed", range(6))
def test_scenarios_together_equal_scenarios_one_by_one(seed: int) -> None:
    p, p_kw, q_kvar = drawn(seed)
    at = mode_network(build_network(p), p.modes[0])
    rng = np.random.default_rng(seed)
    scale = rng.uniform(0.5, 1.05, (30, 1))
    v_ref = np.array([s.v_ref_pu for s in at.sources]) + rng.uniform(-0.004, 0.004, (30, len(at.sources)))
    together = solve_batch(at, scale * p_kw, scale * q_kvar, Settings(no_load_voltage_pu=v_ref))
    for k in range(0, 30, 5):
        alone = solve_batch(at, scale[k] * p_kw, scale[k] * q_kvar, Settings(no_load_voltage_pu=v_ref[k]))
        assert alone.solved[0] == together.solved[k]
        if alone.solved[0]:
            assert together.v_bus_pu[k] == pytest.approx(alone.v_bus_pu[0], abs=1e-8)
            assert (together.excitation_state[k] == alone.excitation_state[0]).all()


@pytest.mark.parametrize("seed", range(6))
def test_the_compiled_sweep_equals_the_plain_one(seed: int) -> None:
    """The first of these compiles for some ten seconds, once for each installation."""
    p, p_kw, q_kvar = drawn(seed)
    at = mode_network(build_network(p), p.modes[0])
    scale = np.random.default_rng(seed).uniform(0.5, 1.05, (50, 1))
    plain = solve_batch(at, scale * p_kw, scale * q_kvar, compiled=False)
    swept = solve_batch(at, scale * p_kw, scale * q_kvar, compiled=True)
    assert (plain.solved == swept.solved).all()
    assert swept.v_bus_pu == pytest.approx(plain.v_bus_pu, abs=1e-8, nan_ok=True)
    assert swept.frequency_pu == pytest.approx(plain.frequency_pu, abs=1e-9, nan_ok=True)
