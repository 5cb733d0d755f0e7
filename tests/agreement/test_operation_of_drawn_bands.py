"""Drawn devices on drawn currents: what must hold of any band, and a march in fine steps for every stage.

The march steps 50 us through currents given as sums of exponentials with a step up or down when another
source drops out or comes in; it knows nothing of grids, quadrature or logarithms. The band of agreement is
what its own steps and the grid of samples leave: 4e-3 of the time or two steps.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest
from numpy.typing import NDArray

from study.formulas.fuse_bands_iec60269 import fuse_edges
from study.formulas.operate_state import CurrentHistory, edge_operating_s, operate, time_grid_s
from study.formulas.relays_iec60255 import relay_edges
from study.formulas.releases_iec60947 import instantaneous_edges, long_time_edges, short_time_edges
from study.formulas.thermal_iec60947_4 import overload_relay_edges
from study.formulas.trip_band import TripBand
from study.formulas.trip_law import Edge

FloatArray = NDArray[np.float64]
HALF_S, STEP_S, LAST_S = 0.01, 5e-5, 1.5
CASES = 120


@dataclass(frozen=True, slots=True, kw_only=True)
class Drawn:
    """A current of three exponentials that is multiplied by `factor` from `at_s` on."""

    parts: FloatArray
    at_s: float
    factor: float

    def at(self, t: FloatArray) -> FloatArray:
        first, second, last, t_first, t_second = self.parts
        whole = (first - second) * np.exp(-t / t_first) + (second - last) * np.exp(-t / t_second) + last
        return np.asarray(whole * np.where(t >= self.at_s, self.factor, 1.0))


def drawn_current(rng: np.random.Generator) -> Drawn:
    last = rng.uniform(100.0, 1500.0)
    second = last * rng.uniform(1.2, 5.0)
    constants_s = rng.uniform(5e-3, 0.05), rng.uniform(0.1, 1.0)
    parts = np.array([second * rng.uniform(1.1, 2.5), second, last, *constants_s])
    return Drawn(parts=parts, at_s=rng.uniform(0.05, 1.0), factor=rng.choice([0.05, 0.4, 1.0, 1.8]))


def drawn_edges(rng: np.random.Generator) -> tuple[Edge, Edge]:
    spread = {"current_tolerance": rng.uniform(0.0, 0.2), "time_tolerance": rng.uniform(0.0, 0.2)}
    after = {"opens_s": rng.uniform(0.0, 0.03), "breaks_s": rng.uniform(0.03, 0.1)}
    amps = float(np.exp(rng.uniform(np.log(100.0), np.log(3000.0))))
    delay_s, law = rng.uniform(0.05, 0.6), rng.choice(["I2t", "I4t"])
    curve = rng.choice(["very inverse", "standard inverse", "extremely inverse"])
    only_time = {"time_tolerance": spread["time_tolerance"]}
    makers = (
        lambda: long_time_edges(amps, 4.0 * delay_s, 6.0, law=law, **only_time, **after),
        lambda: short_time_edges(amps, delay_s, **spread, **after),
        lambda: short_time_edges(amps, delay_s, ramp_ir_a=amps / 4.0, **spread, **after),
        lambda: instantaneous_edges(amps, senses="rms", current_tolerance=0.1, **after),
        lambda: relay_edges(curve, amps, 0.1, **spread, **after),
        lambda: relay_edges("IEEE very inverse", amps, 0.2, reset="decaying", **spread, **after),
        lambda: fuse_edges(100.0, "gG"),
        lambda: overload_relay_edges(amps / 8.0, "10A", breaks_up_to_a=1e9),
    )
    return makers[rng.integers(len(makers))]()


def marched_s(edge: Edge, current: FloatArray) -> float:
    """March through the current; the current of each step is that in its middle."""
    if edge.law == "heating":
        return _marched_body_s(edge, current)
    if edge.law == "constant" and edge.figures[0] == 0.0:
        first = round(HALF_S / STEP_S)
        seen = np.concatenate([np.full(first, current[first]), current[first:]])
        over = (seen >= edge.from_a) & (seen <= edge.up_to_a)
        return float(over.argmax() * STEP_S) if over.any() else np.inf
    rates, state = 1.0 / edge.time_s(current), 0.0
    for n, rate in enumerate(rates):
        if rate > 0.0:
            state += STEP_S * rate
        elif edge.memory == "resets":
            state = 0.0
        elif edge.memory == "decays":
            state = max(state - STEP_S * (1.0 - (current[n] / edge.from_a) ** 2) / edge.reset_s, 0.0)
        if state >= 1.0:
            return (n + 1) * STEP_S
    return np.inf


def _marched_body_s(edge: Edge, current: FloatArray) -> float:
    tau, trips_at, preload = edge.figures
    theta = preload**2
    for n, squared in enumerate((current / edge.setting_a) ** 2):
        theta += STEP_S / tau * (squared - theta)
        if theta >= trips_at**2:
            return (n + 1) * STEP_S
    return np.inf


def history(currents: list[Drawn]) -> CurrentHistory:
    grids = [time_grid_s(HALF_S, LAST_S, current.at_s) for current in currents]
    length = max(len(grid) for grid in grids)
    grids = [np.concatenate([grid, np.full(length - len(grid), LAST_S)]) for grid in grids]
    time = np.stack(grids)
    ac = np.stack([current.at(row) for current, row in zip(currents, time, strict=True)])
    for row, current in enumerate(currents):
        jump = int((time[row] >= current.at_s).argmax())
        ac[row, jump] /= current.factor
    return CurrentHistory(time_s=time, ac_a=ac, dc_a=np.zeros_like(ac))


@pytest.fixture(scope="module")
def drawn() -> tuple[list[tuple[Edge, Edge]], list[Drawn]]:
    rng = np.random.default_rng(20_260)
    return [drawn_edges(rng) for _ in range(CASES)], [drawn_current(rng) for _ in range(CASES)]


def test_every_stage_against_a_march(drawn: tuple[list[tuple[Edge, Edge]], list[Drawn]]) -> None:
    pairs, currents = drawn
    late = [late for _, late in pairs]
    found = edge_operating_s(late, history(currents), HALF_S, early=False)
    fine = np.arange(0.0, LAST_S, STEP_S) + 0.5 * STEP_S
    operated = 0
    for n, (edge, current) in enumerate(zip(late, currents, strict=True)):
        expected = marched_s(edge, current.at(fine))
        if min(expected, float(found[n])) > 0.99 * LAST_S:
            continue
        operated += 1
        assert found[n] == pytest.approx(expected, rel=4e-3, abs=2.0 * STEP_S), (n, edge, current)
    assert operated > CASES / 3


def test_what_holds_of_any_band(drawn: tuple[list[tuple[Edge, Edge]], list[Drawn]]) -> None:
    pairs, currents = drawn
    bands = [TripBand(earliest=(early,), latest=(late,)) for early, late in pairs]
    found = operate(bands, history(currents), HALF_S)
    assert np.all(found.release_s <= found.earliest_s)
    assert np.all(found.earliest_s <= found.latest_s)
    # A higher current operates no later, at either edge: no stage of these is slower at a higher current.
    more = np.array([1.3, 1.3, 1.3, 1.0, 1.0])
    higher = [Drawn(parts=c.parts * more, at_s=c.at_s, factor=c.factor) for c in currents]
    sooner = operate(bands, history(higher), HALF_S)
    assert np.all(sooner.release_s <= found.release_s * (1.0 + 1e-9))
    assert np.all(sooner.latest_s <= found.latest_s * (1.0 + 1e-9))


def test_many_bands_at_once_are_each_by_itself(drawn: tuple[list[tuple[Edge, Edge]], list[Drawn]]) -> None:
    pairs, currents = drawn
    rows = range(0, CASES, 11)
    together = operate([TripBand(earliest=(e,), latest=(x,)) for e, x in pairs], history(currents), HALF_S)
    for n in rows:
        one = TripBand(earliest=(pairs[n][0],), latest=(pairs[n][1],))
        alone = operate([one], history([currents[n]]), HALF_S)
        assert alone.release_s[0] == pytest.approx(together.release_s[n], rel=1e-12)
        assert alone.latest_s[0] == pytest.approx(together.latest_s[n], rel=1e-12)
