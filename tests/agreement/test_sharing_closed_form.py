"""Sets in parallel on one board against the closed form of their laws, solved here by bisection.

Law of each set (IEEE 421.5, load compensation with Rc = 0): ``(V + X q/V)^2 + (X p/V)^2 = Vref^2`` in per
unit of its rating; active power ``P = Pr (f0 - f)/droop``.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import pytest
from scipy.optimize import brentq

from study.network.batch import Settings, solve_batch
from study.network.cases import case
from study.network.network import ModeNetwork, build_network, mode_network
from study.network.solver import solve_reported
from tests.plants import board, genset, load, plant


def on_one_board(sets: Sequence[dict[str, Any]]) -> ModeNetwork:
    p = plant(
        boards=[board("M", 440.0)],
        gensets=[
            genset(f"G{n}", "M", u_rated_v=440.0, droop_base="rated kVA", **s) for n, s in enumerate(sets)
        ],
        loads=[load("L", "M")],
    )
    return mode_network(build_network(p), p.modes[0])


def closed_form(
    ratings: Sequence[float], droops: Sequence[float], v_ref: Sequence[float], p: Sequence[float], q: float
) -> tuple[float, list[float]]:
    """Return the voltage and the kvar of sets that carry given kW; droop in pu at 1 pu reactive current."""

    def kvar(v: float) -> list[float]:
        return [
            s * (v / x) * (np.sqrt(e * e - (x * pi / s / v) ** 2) - v)
            for s, x, e, pi in zip(ratings, droops, v_ref, p, strict=True)
        ]

    v = brentq(lambda u: sum(kvar(u)) - q, 0.8, 1.2, xtol=1e-15)
    return v, kvar(v)


@pytest.mark.parametrize("droops", [(0.04, 0.04), (0.04, 0.08), (0.02, 0.05)])
@pytest.mark.parametrize("v_ref", [(1.0, 1.0), (1.01, 1.0)])
def test_two_sets_share_as_the_closed_form_says(
    droops: tuple[float, float], v_ref: tuple[float, float]
) -> None:
    at = on_one_board(
        [{"voltage_droop_pu": d, "no_load_voltage_pu": e} for d, e in zip(droops, v_ref, strict=True)]
    )
    found = solve_batch(at, [1600.0], [1000.0])
    v, q = closed_form([1000.0, 1000.0], droops, v_ref, [800.0, 800.0], 1000.0)
    assert found.source_q_kvar[0] == pytest.approx(q, rel=1e-8)
    assert found.source_u_pu[0, 0] == pytest.approx(v, abs=1e-9)


def test_four_and_eight_per_cent_divide_almost_two_to_one() -> None:
    """At 1.6 MW and 1.0 Mvar the smaller droop takes 67.99 %, not 66.67: the active term counts."""
    at = on_one_board([{"voltage_droop_pu": 0.04}, {"voltage_droop_pu": 0.08}])
    share = solve_batch(at, [1600.0], [1000.0]).source_q_kvar[0, 0] / 1000.0
    assert share == pytest.approx(0.680, abs=5e-4)


def test_unequal_ratings_and_set_points_of_three_sets() -> None:
    ratings, droops, v_ref = [1000.0, 800.0, 400.0], [0.03, 0.04, 0.05], [1.0, 1.005, 0.995]
    sets = [
        {"s_rated_kva": s, "p_engine_kw": s, "voltage_droop_pu": d, "no_load_voltage_pu": e}
        for s, d, e in zip(ratings, droops, v_ref, strict=True)
    ]
    found = solve_batch(on_one_board(sets), [1200.0], [900.0])
    p = [1200.0 * s / 2200.0 for s in ratings]
    v, q = closed_form(ratings, droops, v_ref, p, 900.0)
    assert found.source_p_kw[0] == pytest.approx(p, rel=1e-9)
    assert found.source_q_kvar[0] == pytest.approx(q, rel=1e-7)
    assert found.source_u_pu[0, 0] == pytest.approx(v, abs=1e-9)


def test_the_law_on_reactive_current_is_a_straight_line() -> None:
    """V = Vref - X Q/V for each set: two unknowns solved by hand for equal sets, V^2 - Vref V + X Q = 0."""
    at = on_one_board([{"voltage_droop_pu": 0.05, "droop_law": "reactive current"}] * 2)
    found = solve_batch(at, [1000.0], [1200.0])
    v = 0.5 * (1.0 + (1.0 - 4.0 * 0.05 * 0.6) ** 0.5)
    assert found.source_u_pu[0] == pytest.approx([v, v], abs=1e-10)


def test_frequency_droop_shares_as_in_the_textbook() -> None:
    """Chapman, *Electric Machinery Fundamentals*, two sets of 1 MW/Hz set to 61.5 and 61.0 Hz; from memory.

    2.5 MW: 60.0 Hz, 1.5 and 1.0 MW; 3.5 MW: 59.5 Hz, 2.0 and 1.5 MW; set 2 raised by 0.5 Hz: 59.75 Hz, 1.75
    MW each. Sets of 2 MW rated with 2 Hz droop have that slope.
    """
    big = {"s_rated_kva": 2500.0, "p_engine_kw": 4000.0, "speed_droop_pu": 2.0 / 60.0}
    at = on_one_board([{**big, "no_load_frequency_pu": f / 60.0} for f in (61.5, 61.0)])
    raised = np.array([[61.5, 61.0], [61.5, 61.0], [61.5, 61.5]]) / 60.0
    p = np.array([[2500.0], [3500.0], [3500.0]])
    found = solve_batch(at, p, 0.3 * p, Settings(no_load_frequency_pu=raised))
    assert 60.0 * found.frequency_pu[:, 0] == pytest.approx([60.0, 59.5, 59.75], abs=1e-8)
    expected = np.array([[1500.0, 1000.0], [2000.0, 1500.0], [1750.0, 1750.0]])
    assert found.source_p_kw == pytest.approx(expected, rel=1e-8)


def test_both_solvers_agree_with_the_closed_form() -> None:
    at = on_one_board([{"voltage_droop_pu": 0.04}, {"voltage_droop_pu": 0.08}])
    one = solve_reported(at.network, [case(at, [1600.0], [1000.0])])[0]
    _, q = closed_form([1000.0, 1000.0], [0.04, 0.08], [1.0, 1.0], [800.0, 800.0], 1000.0)
    for solution in (one.reported, one.own):
        assert solution.source_s_kva.imag == pytest.approx(q, rel=1e-6)
    assert one.agreement.du_pu < 1e-9


def test_scenarios_of_droop_and_set_point_follow_the_closed_form() -> None:
    rng = np.random.default_rng(7)
    droops, v_ref = rng.uniform(0.02, 0.06, (40, 2)), rng.uniform(0.99, 1.01, (40, 2))
    p, q = rng.uniform(600.0, 1600.0, 40), rng.uniform(400.0, 1000.0, 40)
    at = on_one_board([{}, {}])
    trims = Settings(no_load_voltage_pu=v_ref, voltage_droop_pu=droops)
    found = solve_batch(at, p[:, None], q[:, None], trims)
    expected = [closed_form([1000.0] * 2, droops[k], v_ref[k], [p[k] / 2] * 2, q[k])[1] for k in range(40)]
    assert found.solved.all()
    assert found.source_q_kvar == pytest.approx(np.array(expected), abs=1e-4)
