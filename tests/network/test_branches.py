"""Branches in ohms, amperes and kW: cables, transformers, single-phase runs, ties, rings, dead boards."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from study.issues import SolveError
from study.model.plant import Plant
from study.network.admittance import filter_admittance
from study.network.arrays import base_power_kva
from study.network.batch import Settings, solve_batch
from study.network.network import build_network, mode_network
from study.network.solution import ModeSolution, solution_of
from tests.plants import (
    board,
    cable,
    demand,
    filter_bank,
    genset,
    load,
    mode,
    plant,
    small_plant,
    tie,
    transformer,
)


def solve(p: Plant, p_kw: Any, q_kvar: Any) -> ModeSolution:
    at = mode_network(build_network(p), p.modes[0])
    p_all, q_all = np.asarray(p_kw, float), np.asarray(q_kvar, float)
    return solution_of(solve_batch(at, p_all, q_all), 0, p_all, q_all)


def stiff_plant(**changes: Any) -> Plant:
    """Return one set that holds exactly 440 V on its board, and what is named."""
    g = genset("G", "M", u_rated_v=440.0, voltage_droop_pu=0.0)
    return plant(boards=[board("M", 440.0)], gensets=[g], **changes)


def row(s: ModeSolution, name: str) -> int:
    branches = s.at.network.topology.branches
    return next(n for n, k in enumerate(s.branch) if branches[k].name == name)


# Maker's 0.1930 ohm/km at 20 degC is 0.1930 x 324.5/254.5 = 0.24608 at 90 degC (IEC 60228). Skin effect by
# IEC 60287-1-1: x^2 = 8 pi 60 1e-7/0.24608e-3 = 0.61280, factor 1 + x^4/(192 + 0.8 x^4) = 1.00195.
R_OHM, X_OHM = 0.24608 * 1.00195 * 0.05, 0.090 * 0.05


def test_a_cable_drops_what_a_hand_calculation_says() -> None:
    """Two buses, exact: V2^4 + V2^2 (2(RP + XQ) - V1^2) + (R^2 + X^2) S^2 = 0, in V, W and ohm."""
    p, q = 100e3, 60e3
    b = 2.0 * (R_OHM * p + X_OHM * q) - 440.0**2
    v2 = (0.5 * (-b + (b * b - 4.0 * (R_OHM**2 + X_OHM**2) * (p * p + q * q)) ** 0.5)) ** 0.5
    s = solve(stiff_plant(loads=[load("L", "M")], cables=[cable("C", "M", "L")]), [100.0], [60.0])
    assert abs(s.terminal_v_pu[0]) * 440.0 == pytest.approx(v2, rel=1e-5)
    current = np.hypot(p, q) / (3.0**0.5 * v2)
    k = row(s, "C")
    assert s.i_to_a[k] == pytest.approx(current, rel=1e-5)
    loss_kw = 3.0 * current**2 * R_OHM / 1000.0
    assert (s.s_from_kva[k] + s.s_to_kva[k]).real == pytest.approx(loss_kw, rel=1e-3)


@pytest.mark.parametrize("boards", [0, 1])
def test_no_load_beyond_the_nose_is_carried(boards: int) -> None:
    """Largest load at power factor 1 behind R + jX: V^2/(2 (R + |Z|)), where the quadratic loses its root.

    With a board half-way the voltage there is iterated; without one it is closed form.
    """
    half = {"length_m": 500.0}
    runs = [cable("C", "M", "L", length_m=1000.0)]
    extra = []
    if boards:
        runs = [cable("C1", "M", "N", **half), cable("C2", "N", "L", **half)]
        extra = [board("N", 440.0)]
    consumer = load("L", "N" if boards else "M", kind="converter")
    g = genset("G", "M", u_rated_v=440.0, voltage_droop_pu=0.0)
    p = plant(boards=[board("M", 440.0), *extra], gensets=[g], cables=runs, loads=[consumer])
    r, x = 20.0 * R_OHM, 20.0 * X_OHM
    nose_kw = 440.0**2 / (2.0 * (r + np.hypot(r, x))) / 1000.0
    below, above = solve(p, [0.998 * nose_kw], [0.0]), solve(p, [1.002 * nose_kw], [0.0])
    assert below.solved
    assert abs(below.terminal_v_pu[0]) == pytest.approx(0.54, abs=0.02)  # upper root, just above the nose
    assert not above.solved
    assert ("exceeds what sources" in above.reason) if boards else ("L asks for more" in above.reason)


def test_each_unit_in_use_has_its_own_run() -> None:
    two = load("L", "M", installed=2)
    modes = [mode(demand={"L": demand(2.0)})]
    p = stiff_plant(loads=[two], cables=[cable("C", "M", "L")], modes=modes)
    one = solve(stiff_plant(loads=[load("L", "M")], cables=[cable("C", "M", "L")]), [100.0], [60.0])
    both = solve(p, [200.0], [120.0])
    assert abs(both.terminal_v_pu[0]) == pytest.approx(abs(one.terminal_v_pu[0]), abs=1e-10)
    assert both.i_to_a[0] == pytest.approx(one.i_to_a[0], rel=1e-9)


def test_runs_in_parallel_halve_the_drop() -> None:
    loads = [load("L", "M")]
    single = solve(stiff_plant(loads=loads, cables=[cable("C", "M", "L")]), [50.0], [30.0])
    double = solve(stiff_plant(loads=loads, cables=[cable("C", "M", "L", runs=2)]), [100.0], [60.0])
    assert abs(double.terminal_v_pu[0]) == pytest.approx(abs(single.terminal_v_pu[0]), abs=1e-10)


@pytest.mark.parametrize(
    ("phases", "u_rated", "u_board"), [(2, 230.0, 230.0), (1, 230.0, 230.0), (1, 230.0, 400.0)]
)
def test_single_phase_run_drops_twice_its_impedance(phases: int, u_rated: float, u_board: float) -> None:
    """Drop along both conductors, 2 I (R cos + X sin), of the consumer's own voltage; common practice."""
    p_kw, q_kvar = 2.0, 1.0
    g = genset("G", "M", u_rated_v=u_board, voltage_droop_pu=0.0)
    consumer = load("L", "M", kind="converter", phases=phases, u_rated_v=u_rated)
    run = cable("C", "M", "L", cores="2")
    p = plant(boards=[board("M", u_board)], gensets=[g], loads=[consumer], cables=[run])
    s = solve(p, [p_kw], [q_kvar])
    u_source = u_board if u_board == u_rated else u_board / 3.0**0.5
    v = abs(s.terminal_v_pu[0]) * u_rated
    current = 1000.0 * np.hypot(p_kw, q_kvar) / v
    z = 2.0 * current * complex(R_OHM, X_OHM) * np.exp(-1j * np.arctan2(q_kvar, p_kw))
    assert abs(v + z) == pytest.approx(u_source, rel=2e-6)
    assert s.i_to_a[row(s, "C")] == pytest.approx(current, rel=1e-9)


def test_a_transformer_at_no_load_shows_ratio_tap_and_iron_loss() -> None:
    t = transformer("T", "M", "N", tap_pu=0.05, copper_loss_kw=0.0, u_k_pu=0.0001)
    p = plant(
        boards=[board("M", 440.0), board("N", 230.0)],
        gensets=[genset("G", "M", u_rated_v=440.0, voltage_droop_pu=0.0)],
        transformers=[t],
        loads=[load("L", "M")],
    )
    s = solve(p, [0.0], [0.0])
    assert abs(s.board_v_pu[1]) * 230.0 == pytest.approx(230.0 / 1.05, rel=1e-6)
    # 0.6 kW at rated secondary voltage falls with the square of the voltage.
    assert s.source_s_kva[0].real == pytest.approx(0.6 / 1.05**2, rel=1e-4)


def test_a_transformers_regulation_is_kapps_triangle() -> None:
    """Kapp: at rated current the fall is r cos + x sin + (x cos - r sin)^2/2; any textbook on machines."""
    t = transformer("T", "M", "N", iron_loss_kw=0.0)
    n = load("L", "N", kind="converter", u_rated_v=230.0)
    p = plant(
        boards=[board("M", 440.0), board("N", 230.0)],
        gensets=[genset("G", "M", u_rated_v=440.0, voltage_droop_pu=0.0)],
        transformers=[t],
        loads=[n],
    )
    r, z, cos, sin = 2.6 / 200.0, 0.04, 0.8, 0.6
    x = (z * z - r * r) ** 0.5
    fall = r * cos + x * sin + 0.5 * (x * cos - r * sin) ** 2
    v = 1.0 - fall
    s = solve(p, [200.0 * v * cos], [200.0 * v * sin])  # rated current at the voltage that results
    assert abs(s.board_v_pu[1]) == pytest.approx(v, abs=5e-6)


def test_a_consumer_that_is_an_impedance_follows_the_square_of_the_voltage() -> None:
    p = stiff_plant(loads=[load("H", "M", kind="heating", u_rated_v=400.0)])
    assert solve(p, [100.0], [0.0]).load_s_kva[0].real == pytest.approx(100.0 * 1.1**2, rel=1e-9)


def test_a_consumer_of_constant_power_does_not() -> None:
    p = stiff_plant(loads=[load("H", "M", kind="converter", u_rated_v=400.0)])
    assert solve(p, [100.0], [0.0]).load_s_kva[0].real == pytest.approx(100.0, rel=1e-9)


def test_a_capacitor_gives_its_rated_kvar_at_rated_voltage() -> None:
    p = stiff_plant(loads=[load("L", "M")], filters=[filter_bank("F", "M")])
    s = solve(p, [100.0], [60.0])
    assert s.filter_s_kva[0] == pytest.approx(100.0j, rel=1e-9)
    assert s.source_s_kva[0].imag == pytest.approx(-40.0, rel=1e-7)


@pytest.mark.parametrize("kind", ["tuned", "high-pass"])
def test_a_filter_is_in_tune_at_its_order(kind: str) -> None:
    """At the tuning order the two reactances are equal (Arrillaga and Watson, from memory)."""
    item = filter_bank("F", "M", kind=kind, tuning_order=4.8, quality=40.0)
    at_rated = filter_admittance(item, 440.0, 1000.0, 1.0)
    assert at_rated.imag == pytest.approx(0.1, rel=2e-3)
    z = 1.0 / filter_admittance(item, 440.0, 1000.0, 4.8)
    if kind == "tuned":
        assert z.imag == pytest.approx(0.0, abs=1e-12)
    assert abs(z) < abs(1.0 / filter_admittance(item, 440.0, 1000.0, 4.4))
    assert abs(z) < abs(1.0 / at_rated)


def test_flow_through_a_tie_is_what_one_side_needs() -> None:
    boards = [board("A"), board("B")]
    p = plant(
        boards=boards,
        gensets=[genset("G", "A")],
        loads=[load("LA", "A"), load("LB", "B")],
        ties=[tie("T", "B", "A")],
    )
    s = solve(p, [100.0, 70.0], [50.0, 30.0])
    k = row(s, "T")
    assert s.s_from_kva[k] == pytest.approx(-70.0 - 30.0j, rel=1e-9)
    assert s.determined[k]
    u = abs(s.board_v_pu[0]) * 440.0
    assert s.i_from_a[k] == pytest.approx(1000.0 * np.hypot(70.0, 30.0) / (3.0**0.5 * u), rel=1e-9)


def _ring(x_ohm: float) -> Plant:
    boards = [board(n) for n in "ABCD"]
    ties = [tie(f"{a}{b}", a, b, x_ohm=x_ohm) for a, b in ("AB", "BC", "CA")] + [tie("CD", "C", "D")]
    loads = [load("LB", "B"), load("LD", "D")]
    return plant(boards=boards, gensets=[genset("G", "A")], ties=ties, loads=loads)


def test_flow_in_a_closed_ring_of_ties_is_undetermined_and_said_so() -> None:
    s = solve(_ring(0.0), [90.0, 60.0], [0.0, 0.0])
    names = [s.at.network.topology.branches[k].name for k in s.branch]
    assert dict(zip(names, s.determined.tolist(), strict=True)) == {
        "AB": False,
        "BC": False,
        "CA": False,
        "CD": True,
    }
    assert np.isnan(s.i_from_a[names.index("AB")])
    assert s.s_from_kva[names.index("CD")].real == pytest.approx(60.0, rel=1e-9)


def test_a_ring_with_impedance_divides_by_it() -> None:
    """Three equal reactances: a load at a corner is fed two thirds directly, one third the long way."""
    s = solve(_ring(1e-5), [90.0, 0.0], [0.0, 0.0])
    assert s.s_from_kva[row(s, "AB")].real == pytest.approx(60.0, rel=1e-4)
    assert s.s_from_kva[row(s, "BC")].real == pytest.approx(-30.0, rel=1e-4)


def test_dead_boards_are_reported_dead_and_not_as_a_number() -> None:
    p = plant(
        boards=[board("A"), board("B")],
        gensets=[genset("G", "A")],
        loads=[load("LA", "A"), load("LB", "B")],
    )
    s = solve(p, [100.0, 70.0], [50.0, 30.0])
    assert s.solved
    assert s.energised.tolist() == [True, False]
    assert s.board_v_pu[1] == 0.0
    assert s.load_s_kva[1] == 0.0
    assert s.source_s_kva[0] == pytest.approx(100.0 + 50.0j, rel=1e-9)


def test_a_plant_without_a_source_on_line_says_so() -> None:
    p = plant(boards=[board("A")], gensets=[genset("G", "A")], modes=[mode(states={"G": "off"})])
    s = solve(p, [], [])
    assert not s.solved
    assert s.reason == "no source is on line."


@pytest.mark.parametrize("bad", [np.nan, np.inf])
def test_a_load_that_is_no_number_is_refused_by_name(bad: float) -> None:
    p = small_plant()
    at = mode_network(build_network(p), p.modes[0])
    with pytest.raises(SolveError, match="At sea: the kW or kvar of Heater is not a number"):
        solve_batch(at, [400.0, bad, 80.0], [200.0, 0.0, 20.0])


def test_a_setting_that_is_no_number_is_refused() -> None:
    p = small_plant()
    at = mode_network(build_network(p), p.modes[0])
    with pytest.raises(SolveError, match="no_load_voltage_pu holds what is not a number"):
        solve_batch(at, [1.0] * 3, [0.0] * 3, Settings(no_load_voltage_pu=np.array([1.0, np.nan])))


def test_loads_for_another_plant_are_refused() -> None:
    p = small_plant()
    at = mode_network(build_network(p), p.modes[0])
    with pytest.raises(SolveError, match="given for 2 of 3 loads"):
        solve_batch(at, [1.0, 2.0], [0.0, 0.0])


@pytest.mark.parametrize("r", [-0.1, np.nan])
def test_a_negative_or_missing_resistance_is_refused_by_name(r: float) -> None:
    p = plant(boards=[board("A"), board("B")], ties=[tie("T", "A", "B", r_ohm=r, x_ohm=0.1)])
    with pytest.raises(SolveError, match="impedance of T"):
        build_network(p)


def test_base_power_is_the_sum_of_ratings() -> None:
    assert base_power_kva(small_plant(3)) == 3000.0
