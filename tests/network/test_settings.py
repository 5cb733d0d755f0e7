"""Settings and limits that differ from scenario to scenario, each scenario held to its solution alone."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from study.model.plant import Plant
from study.network.batch import BatchSolution, solve_batch
from study.network.network import ModeNetwork, build_network, mode_network
from study.network.settings import Settings
from tests.plants import board, cable, converter_supply, genset, load, plant

DROOPS = np.array([[0.02, 0.02, 0.02], [0.05, 0.05, 0.05], [0.03, 0.04, 0.06]])


def at_of(p: Plant) -> ModeNetwork:
    return mode_network(build_network(p), p.modes[0])


def asked(p: Plant) -> tuple[np.ndarray, np.ndarray]:
    kw = np.array([x.p_rated_kw for x in p.loads])
    return kw, kw * np.array([(1.0 / x.cos_phi**2 - 1.0) ** 0.5 for x in p.loads])


def cross_current_plant() -> Plant:
    """Return three unequal cross-current sets, one behind a cable and off its set-point."""
    more = {"regulator_mode": "cross-current", "p_engine_kw": 1200.0}
    return plant(
        boards=[board("MSB")],
        gensets=[
            genset("G1", "MSB", **more),
            genset("G2", "MSB", **{**more, "s_rated_kva": 600.0, "no_load_voltage_pu": 1.003}),
            genset("G3", "MSB", **more),
        ],
        cables=[cable("C-G3", "G3", "MSB", runs=4, length_m=40.0)],
        loads=[load("Load", "MSB", kind="converter", p_rated_kw=1500.0, cos_phi=0.8)],
    )


@pytest.mark.parametrize("compiled", [False, True])
def test_each_scenario_of_a_cross_current_group_has_its_own_droop(compiled: bool) -> None:
    """The droop setting of one scenario is none of another's."""
    p = cross_current_plant()
    kw, kvar = asked(p)
    together = solve_batch(at_of(p), kw, kvar, Settings(voltage_droop_pu=DROOPS), compiled=compiled)
    assert together.solved.all()
    for row, droops in enumerate(DROOPS):
        own = [
            replace(g, regulator=replace(g.regulator, droop_pu=d))
            for g, d in zip(p.gensets, droops, strict=True)
        ]
        alone = solve_batch(at_of(replace(p, gensets=tuple(own))), kw, kvar)
        np.testing.assert_allclose(together.source_q_kvar[row], alone.source_q_kvar[0], atol=1e-6)
    spread = np.ptp(together.source_q_kvar, axis=0)
    assert spread.max() > 10.0


def a_battery(kw: float, cos_phi: float, **more: object) -> BatchSolution:
    p = plant(
        boards=[board("MSB")],
        converter_supplies=[converter_supply("Battery", "MSB", s_rated_kva=500.0)],
        loads=[load("Load", "MSB", p_rated_kw=kw, cos_phi=cos_phi, **{"kind": "converter", **more})],
    )
    return solve_batch(at_of(p), *asked(p))


@pytest.mark.parametrize(("kw", "cos_phi"), [(420.0, 0.8), (520.0, 1.0), (300.0, 0.5)])
def test_a_converter_asked_for_more_than_its_current_is_named(kw: float, cos_phi: float) -> None:
    """At constant power less voltage asks for more current: 500 kVA hold 500 kVA and no more."""
    found = a_battery(kw, cos_phi)
    assert not found.solved[0]
    assert found.reason[0].startswith("no operating point: the load asks Battery for more than the largest")


def test_a_converter_at_its_current_feeds_heaters_at_a_lower_voltage() -> None:
    """S = V I with I = 1 pu and P = 1.04 V^2: V = 1 / 1.04."""
    found = a_battery(520.0, 1.0, kind="heating")
    assert found.source_u_pu[0, 0] == pytest.approx(1.0 / 1.04, abs=1e-9)
    assert found.excitation_state[0, 0] == 3
