"""Sources at their limits: engine, excitation, converter current, and droop circuits connected in reverse."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from study.formulas.synchronous import field_required, rated_load_field
from study.network.batch import BatchSolution, solve_batch
from study.network.limits import CEILING, LARGEST_CURRENT, NO_EXCITATION
from study.network.machines import machine_of
from study.network.network import build_network, mode_network
from study.network.solution import solution_of
from tests.plants import board, converter_supply, genset, load, plant


def solve(gensets: list[Any], p_kw: Any, q_kvar: Any, **more: Any) -> BatchSolution:
    p = plant(boards=[board("M", 440.0)], gensets=gensets, loads=[load("L", "M")], **more)
    at = mode_network(build_network(p), p.modes[0])
    return solve_batch(at, np.reshape(p_kw, (-1, 1)), np.reshape(q_kvar, (-1, 1)))


def a_set(name: str, **changes: Any) -> Any:
    return genset(name, "M", u_rated_v=440.0, **changes)


def test_an_engine_at_its_limit_leaves_the_rest_to_the_others() -> None:
    """Largest power is 110 % of the engine (IACS UR M51, from memory) times the alternator's efficiency."""
    found = solve([a_set("G1", p_engine_kw=500.0), a_set("G2", p_engine_kw=1200.0)], 1500.0, 600.0)
    assert found.power_state[0].tolist() == [1, 0]
    assert found.source_p_kw[0] == pytest.approx([1.1 * 500.0 * 0.95, 1500.0 - 522.5], rel=1e-8)
    # G2 alone follows its droop: f = 1.04 - 0.04 P/800.
    assert found.frequency_pu[0, 0] == pytest.approx(1.04 - 0.04 * 977.5 / 800.0, abs=1e-9)


def test_a_limited_engine_is_released_where_its_governor_asks_for_less() -> None:
    sets = [a_set("G1", p_engine_kw=500.0), a_set("G2", p_engine_kw=1200.0)]
    found = solve(sets, [600.0, 1500.0], [300.0, 600.0])
    assert found.power_state.tolist() == [[0, 0], [1, 0]]


def test_more_than_all_engines_can_give_has_no_solution() -> None:
    found = solve([a_set("G1"), a_set("G2")], [900.0, 2000.0], [500.0, 800.0])
    assert found.solved.tolist() == [True, False]
    assert "exceeds what the engines of G1 and G2 can give" in found.reason[1]


def test_an_isochronous_set_at_its_limit_lets_the_frequency_go() -> None:
    sets = [
        a_set("G1", governor_mode="isochronous", no_load_frequency_pu=1.0, p_engine_kw=400.0),
        a_set("G2", no_load_frequency_pu=1.01),
    ]
    found = solve(sets, 900.0, 400.0)
    assert found.power_state[0].tolist() == [1, 0]
    assert found.source_p_kw[0, 0] == pytest.approx(418.0, rel=1e-9)
    assert found.frequency_pu[0, 0] == pytest.approx(1.01 - 0.04 * 482.0 / 800.0, abs=1e-9)


def test_a_set_at_its_ceiling_has_the_ceiling_field() -> None:
    """Field by the two-reaction theory with saturation, which the formulas' own tests hold to a textbook."""
    g = a_set("G1", ceiling=0.9)
    found = solve([g, a_set("G2", s_rated_kva=2000.0, p_engine_kw=1800.0)], 1200.0, 2000.0)
    assert found.excitation_state[0].tolist() == [CEILING, 0]
    v = found.source_u_pu[0, 0]
    s = complex(found.source_p_kw[0, 0], found.source_q_kvar[0, 0]) / 1000.0
    machine = machine_of(g)
    field = float(field_required(v, abs(s) / v, np.angle(s), machine))
    assert field == pytest.approx(0.9 * rated_load_field(0.8, machine), rel=1e-8)
    assert found.field_pu[0, 0] == pytest.approx(0.9, rel=1e-8)


def test_the_ceiling_of_a_shunt_field_falls_with_the_voltage() -> None:
    sets = [
        a_set("G1", ceiling=0.9, field_supply="shunt"),
        a_set("G2", s_rated_kva=2000.0, p_engine_kw=1800.0),
    ]
    found = solve(sets, 1200.0, 2000.0)
    assert found.excitation_state[0, 0] == CEILING
    assert found.field_pu[0, 0] == pytest.approx(0.9 * found.source_u_pu[0, 0], rel=1e-8)


def test_a_set_too_low_in_voltage_never_needs_less_than_no_field() -> None:
    sets = [a_set("G1", no_load_voltage_pu=0.93), a_set("G2", s_rated_kva=3000.0, p_engine_kw=2600.0)]
    found = solve(sets, 100.0, 900.0)
    assert found.excitation_state[0, 0] == NO_EXCITATION
    assert found.field_pu[0, 0] == pytest.approx(0.0, abs=1e-8)
    assert found.source_q_kvar[0, 0] < 0.0


def test_a_grid_forming_converter_stops_at_its_rated_current() -> None:
    battery = converter_supply("B", "M", speed_droop_pu=0.04, voltage_droop_pu=0.005)
    g = a_set("G1", voltage_droop_pu=0.08)
    found = solve([g], 700.0, 1000.0, converter_supplies=[battery])
    assert found.excitation_state[0, 1] == LARGEST_CURRENT
    s = np.hypot(found.source_p_kw[0, 1], found.source_q_kvar[0, 1])
    assert s / found.source_u_pu[0, 1] == pytest.approx(500.0, rel=1e-8)


def test_reversed_droop_alone_raises_the_voltage_with_load() -> None:
    found = solve([a_set("G1", reversed_polarity=True)], 500.0, 300.0)
    assert found.solved[0]
    assert found.source_u_pu[0, 0] > 1.0
    assert not found.ran_away.any()


def test_reversed_droop_beside_a_smaller_normal_one_runs_to_its_ceiling() -> None:
    """The algebraic point lies where no regulator holds it: the reversed set takes ever more kvar."""
    found = solve(_one_reversed(ceiling=1.2), 900.0, 900.0)
    assert found.ran_away[0].tolist() == [True, False]
    assert found.excitation_state[0].tolist() == [CEILING, 0]
    assert found.field_pu[0, 0] == pytest.approx(1.2, rel=1e-8)
    assert found.source_q_kvar[0, 0] > 900.0
    assert found.source_q_kvar[0, 1] < 0.0
    text = " ".join(solution_of(found, 0, np.array([900.0]), np.array([900.0])).findings)
    assert "droop circuit is reversed" in text
    assert "excitation ceiling (1.20 x rated-load field)" in text


def _one_reversed(ceiling: float) -> list[Any]:
    return [
        a_set("G1", reversed_polarity=True, voltage_droop_pu=0.04, ceiling=ceiling),
        a_set("G2", voltage_droop_pu=0.02),
    ]


def test_a_set_that_runs_to_a_high_ceiling_drives_the_other_out_of_step() -> None:
    """Without field a salient-pole set carries V^2 (1/Xq - 1/Xd)/2, here 0.2 of its rating, and no more."""
    found = solve(_one_reversed(ceiling=2.0), 900.0, 600.0)
    assert not found.solved[0]
    assert "the droop circuit of G1 is reversed" in found.reason[0]
    assert "cannot stay in step" in found.reason[0]


def test_reversed_droop_beside_a_larger_normal_one_is_held() -> None:
    sets = [a_set("G1", reversed_polarity=True, voltage_droop_pu=0.01), a_set("G2", voltage_droop_pu=0.05)]
    found = solve(sets, 900.0, 600.0)
    assert not found.ran_away.any()
    assert found.excitation_state[0].tolist() == [0, 0]


def test_two_reversed_sets_fall_out_of_step() -> None:
    sets = [a_set("G1", reversed_polarity=True), a_set("G2", reversed_polarity=True)]
    found = solve(sets, 1200.0, 800.0)
    assert not found.solved[0]
    assert "regulators run apart" in found.reason[0]
