"""Operation on changing currents against a plain march in fine steps, and against closed forms.

The march knows nothing of the formulas under test: Euler steps of 20 us on linearly interpolated samples of
the true currents; 3e-3 is what its own steps and the grid of samples (ratio 1.1) leave.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray

from study.formulas.operate_state import CurrentHistory, edge_operating_s, operate, time_grid_s
from study.formulas.trip_band import TripBand
from study.formulas.trip_law import Edge

FloatArray = NDArray[np.float64]
HALF_S = 0.01
STEP_S = 2e-5
EDGES = {
    "I2t": Edge(stage="x", law="power", from_a=300.0, setting_a=300.0, figures=(12.0, 2.0), memory="holds"),
    "I4t": Edge(stage="x", law="power", from_a=400.0, setting_a=300.0, figures=(40.0, 4.0)),
    "inverse": Edge(
        stage="x", law="inverse", from_a=330.0, setting_a=300.0, figures=(0.3, 0.14, 0.0, 0.02)
    ),
    "points": Edge(
        stage="x", law="points", from_a=200.0, setting_a=100.0, figures=(2.0,),
        points=((2.0, 300.0), (5.0, 4.0), (15.0, 0.1), (29.0, 0.01)), memory="holds",
    ),
    "body": Edge(
        stage="x", law="heating", from_a=115.0, setting_a=100.0, figures=(300.0, 1.15, 0.0), memory="cools"
    ),
    "warm body": Edge(
        stage="x", law="heating", from_a=230.0, setting_a=200.0, figures=(200.0, 1.15, 1.0), memory="cools"
    ),
    "delay": Edge(stage="x", law="constant", from_a=900.0, setting_a=900.0, figures=(0.25,)),
    "I2t ramp": Edge(
        stage="x", law="power", from_a=600.0, setting_a=1000.0, figures=(0.4, 2.0), least_s=0.1
    ),
}  # fmt: skip
CURRENTS = {
    "alternator": (9000.0, 3500.0, 1100.0, 0.012, 0.25),
    "long decay": (4000.0, 3000.0, 400.0, 0.05, 1.2),
    "no sustained current": (5000.0, 2500.0, 120.0, 0.02, 0.4),
}


def alternator_a(figures: tuple[float, ...], t: FloatArray) -> FloatArray:
    first, second, last, t_first, t_second = figures
    return np.asarray(
        (first - second) * np.exp(-t / t_first) + (second - last) * np.exp(-t / t_second) + last
    )


def marched_s(edge: Edge, current: FloatArray) -> float:
    """March through the current in equal steps; the current of each step is that in its middle."""
    time = edge.time_s(current)
    if edge.law == "heating":
        tau, trips_at, preload = edge.figures
        theta = preload**2
        for n, amps in enumerate(current):
            theta += STEP_S / tau * ((amps / edge.setting_a) ** 2 - theta)
            if theta >= trips_at**2:
                return (n + 1) * STEP_S
        return np.inf
    state = 0.0
    for n, rate in enumerate(1.0 / time):
        state = state + STEP_S * rate if rate > 0.0 or edge.memory == "holds" else 0.0
        if state >= 1.0:
            return (n + 1) * STEP_S
    return np.inf


@pytest.mark.parametrize("current", CURRENTS)
def test_decaying_currents_against_a_march_in_fine_steps(current: str) -> None:
    last_s = 3.0
    grid = time_grid_s(HALF_S, last_s)
    fine = np.arange(0.0, last_s, STEP_S) + 0.5 * STEP_S
    names = list(EDGES)
    ac = np.tile(alternator_a(CURRENTS[current], grid), (len(names), 1))
    history = CurrentHistory(time_s=grid, ac_a=ac, dc_a=0.0 * ac)
    times = edge_operating_s([EDGES[name] for name in names], history, HALF_S, early=False)
    true = alternator_a(CURRENTS[current], fine)
    for name, time_s in zip(names, times, strict=True):
        assert time_s == pytest.approx(marched_s(EDGES[name], true), rel=3e-3, abs=STEP_S), name


def history(time_s: FloatArray, *currents: FloatArray) -> CurrentHistory:
    ac = np.stack(currents)
    return CurrentHistory(time_s=time_s, ac_a=ac, dc_a=0.0 * ac)


def one_edge_s(
    edge: Edge, time_s: list[float], ac_a: list[float], dc_a: float = 0.0, early: bool = False
) -> float:
    ac = np.array([ac_a])
    past = CurrentHistory(time_s=np.array(time_s), ac_a=ac, dc_a=np.full_like(ac, dc_a))
    return float(edge_operating_s([edge], past, HALF_S, early=early)[0])


def test_a_definite_delay_starts_again_after_a_break() -> None:
    delay = EDGES["delay"]
    times, broken = [0.0, 0.2, 0.2, 0.3, 0.3, 2.0], [1000.0, 1000.0, 500.0, 500.0, 1000.0, 1000.0]
    assert one_edge_s(delay, times, broken) == pytest.approx(0.55)
    assert one_edge_s(replace(delay, memory="holds"), times, broken) == pytest.approx(0.35)


def test_a_delay_that_decays_loses_by_the_reset_law() -> None:
    # IEEE C37.112-1996, equation 2: below the setting the delay runs back at (1 - M²)/tr. After 0.2 s
    # of 0.5 s there are 0.4; 0.1 s at M = 0.5 takes off 0.1 x 0.75/0.375 = 0.2; the other 0.8 need 0.4 s.
    edge = Edge(
        stage="x",
        law="constant",
        from_a=100.0,
        setting_a=100.0,
        figures=(0.5,),
        memory="decays",
        reset_s=0.375,
    )
    times, broken = [0.0, 0.2, 0.2, 0.3, 0.3, 2.0], [300.0, 300.0, 50.0, 50.0, 300.0, 300.0]
    assert one_edge_s(edge, times, broken) == pytest.approx(0.7)


def test_a_body_cools_while_the_current_is_off() -> None:
    # tau dθ/dt = M² - θ by hand: 20 s at M = 3, 30 s off, then M = 3 again until 1.15².
    edge, tau = EDGES["body"], 300.0
    warm = 9.0 * -np.expm1(-20.0 / tau) * np.exp(-30.0 / tau)
    assert warm < 1.15**2
    more = tau * np.log((9.0 - warm) / (9.0 - 1.15**2))
    times, broken = [0.0, 20.0, 20.0, 50.0, 50.0, 200.0], [300.0, 300.0, 1e-6, 1e-6, 300.0, 300.0]
    assert one_edge_s(edge, times, broken) == pytest.approx(50.0 + more, rel=1e-6)


def test_constant_currents_give_the_static_times() -> None:
    grid = time_grid_s(HALF_S, 7200.0)
    for name, edge in EDGES.items():
        amps = edge.setting_a * np.array([1.0, 1.4, 2.5, 6.0, 25.0])
        flat = np.repeat(amps[:, None], len(grid), axis=1)
        found = edge_operating_s([edge] * 5, history(grid, *flat), HALF_S, early=False)
        expected = edge.time_s(amps)
        assert found == pytest.approx(np.where(expected > 7200.0, np.inf, expected), rel=1e-6), name


def test_a_magnetic_release_may_trip_by_the_peak_and_will_trip_by_the_symmetrical_current() -> None:
    # Peak at T/2: sqrt2 Iac + idc; set to 1300 A it sees 1000 + 1000/sqrt2 = 1707 A early, 1000 A late.
    edge = Edge(
        stage="x", law="constant", from_a=1300.0, setting_a=1300.0, figures=(0.0,), sees="peak", after_s=0.01
    )
    assert one_edge_s(edge, [0.0, 1.0], [1000.0, 1000.0], 1000.0, early=True) == 0.0
    assert np.isinf(one_edge_s(edge, [0.0, 1.0], [1000.0, 1000.0], 1000.0, early=False))
    assert np.isinf(
        one_edge_s(replace(edge, sees="symmetrical"), [0.0, 1.0], [1000.0, 1000.0], 1000.0, early=True)
    )


def test_the_latest_edge_of_an_instantaneous_stage_looks_at_half_a_cycle() -> None:
    # 2000 A falling with 10 ms: 736 A at T/2 = 10 ms.
    edge = Edge(stage="x", law="constant", from_a=800.0, setting_a=800.0, figures=(0.0,))
    grid = time_grid_s(HALF_S, 1.0)
    falls = history(grid, 2000.0 * np.exp(-grid / 0.01))
    assert np.isinf(edge_operating_s([edge], falls, HALF_S, early=False)[0])
    assert edge_operating_s([edge], falls, HALF_S, early=True)[0] == 0.0


def test_a_current_that_rises_again_operates_when_it_passes_the_setting() -> None:
    # A straight line of the logarithm from 400 A at 0.5 s to 1600 A at 1.5 s passes 800 A in its middle.
    edge = Edge(stage="x", law="constant", from_a=800.0, setting_a=800.0, figures=(0.0,))
    assert one_edge_s(edge, [0.0, 0.5, 1.5], [400.0, 400.0, 1600.0]) == pytest.approx(1.0)


def test_the_first_stage_opens_and_unknown_edges_are_said_so() -> None:
    slow = Edge(
        stage="long-time", law="power", from_a=105.0, setting_a=100.0, figures=(40.0, 2.0), after_s=0.05
    )
    fast = Edge(
        stage="instantaneous", law="constant", from_a=800.0, setting_a=800.0, figures=(0.0,), after_s=0.02
    )
    bands = [
        TripBand(earliest=(slow, fast), latest=(slow, fast)),
        TripBand(earliest=(slow, fast), latest=(slow, fast)),
        TripBand(earliest=(slow,), latest=(slow,), earliest_known=False, unknown=("no shortest times",)),
    ]
    grid = time_grid_s(HALF_S, 60.0)
    ones = np.ones_like(grid)
    found = operate(bands, history(grid, 400.0 * ones, 1000.0 * ones, 400.0 * ones), HALF_S)
    assert found.latest_s[:2] == pytest.approx([2.55, 0.02])
    assert found.release_s[:2] == pytest.approx([2.5, 0.0])
    assert found.latest_stage[:2] == ("long-time", "instantaneous")
    assert np.isnan(found.release_s[2])
    assert found.latest_s[2] == pytest.approx(2.55)
