"""How fast grading is, how it grows with the number of pairs, and against grading pair by pair.

Run as a script for the table, or with pytest for the claims behind it::

    python -m tests.benchmarks.bench_grading
    pytest tests/benchmarks/bench_grading.py -s

Seconds of the processor; only ratios of one run mean anything. *Pair by pair* takes the same currents and
calls `operate`, which integrates one device's state, for both devices of each of nine faults of a pair: what
a plain loop would do. It is timed on a sample of pairs.
"""

from __future__ import annotations

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # small matrices: a second thread costs

import math
import time
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np

from study.analyses.balance import load_balance
from study.analyses.grading import grading
from study.analyses.grading_currents import grid_s
from study.analyses.load_flow import load_flow
from study.analyses.protection_devices import protection_devices
from study.analyses.short_circuit import short_circuit
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.formulas.operate_state import CurrentHistory, operate
from study.model.plant import Plant
from study.network.network import build_network, mode_network
from study.results.grading import GradingResult
from study.workbook import read_plant
from tests import plants
from tests.analyses.grading_plants import breaker, heater

BOOKS = Path(__file__).parents[2] / "workbooks"
ROUNDS, LEVELS, SAMPLE = 3, 9, 100
SIZES = (10, 20, 40)


@dataclass(frozen=True, slots=True, kw_only=True)
class Measured:
    """Seconds of the grading of one plant, and how many pairs it has over all modes."""

    name: str
    pairs: int
    seconds: float
    one_by_one_s: float


def _prepared(plant: Plant) -> tuple[Callable[[], GradingResult], float]:
    """Return the grading of a plant with all that it needs, and seconds of `operate` for one case."""
    network = build_network(plant)
    networks = [mode_network(network, mode) for mode in plant.modes]
    balance = load_balance(plant, [at.view for at in networks])
    flow = load_flow(networks, balance.demand.p_counted_kw, balance.demand.q_counted_kvar)
    faults = short_circuit(network, ShortCircuitOptions(compare=False))
    bands = [m.band for m in protection_devices(plant)][:SAMPLE]
    grid = grid_s(faults, 20.0)
    amps = 5000.0 * np.exp(-grid / 0.3)[None, :] + 1000.0
    start = time.process_time()
    for band in bands:
        operate([band], CurrentHistory(time_s=grid, ac_a=amps, dc_a=0.0 * amps), 0.5 / faults.f_hz)
    once = (time.process_time() - start) / len(bands)
    return lambda: grading(plant, faults, flow, balance), once


def measure(name: str, plant: Plant, rounds: int = ROUNDS) -> Measured:
    """Return the best time of several."""
    work, once = _prepared(plant)
    best, pairs = math.inf, 0
    for _ in range(rounds):
        start = time.process_time()
        result = work()
        best = min(best, time.process_time() - start)
        pairs = int(result.pairs.present.sum())
    return Measured(name=name, pairs=pairs, seconds=best, one_by_one_s=2 * LEVELS * pairs * once)


def made(boards: int) -> Plant:
    """Return two sets, and boards of ten consumers each."""
    names = [f"B{n}" for n in range(boards)]
    consumers = [f"{b}-{k}" for b in names for k in range(10)]
    return plants.plant(
        boards=[plants.board("MSB"), *(plants.board(b, role="distribution") for b in names)],
        gensets=[plants.genset("G1", "MSB"), plants.genset("G2", "MSB")],
        cables=[
            *(plants.cable(f"C{g}", g, "MSB", length_m=8.0, section_mm2=300.0, runs=3) for g in ("G1", "G2")),
            *(plants.cable(f"C{b}", "MSB", b, length_m=20.0, section_mm2=240.0) for b in names),
            *(plants.cable(f"C{c}", c.split("-")[0], c, length_m=15.0) for c in consumers),
        ],
        loads=[heater(c, c.split("-")[0], 2.0) for c in consumers],
        devices=[
            *(
                breaker(f"Q{g}", f"C{g}", "MSB", short_time_a=2600.0, short_time_delay_s=0.4)
                for g in ("G1", "G2")
            ),
            *(breaker(f"Q{b}", f"C{b}", "MSB", short_time_a=1500.0, short_time_delay_s=0.2) for b in names),
            *(breaker(f"Q{c}", f"C{c}", c.split("-")[0], instantaneous_a=500.0) for c in consumers),
        ],
    )


@cache
def demos() -> tuple[Measured, ...]:
    """Return the demonstration vessels, measured."""
    return tuple(
        measure(name, read_plant(BOOKS / f"{name}.xlsx"))
        for name in ("workboat", "service-vessel", "large-vessel")
    )


@cache
def grown() -> tuple[Measured, ...]:
    """Return plants of growing size, measured."""
    return tuple(measure(f"{10 * n} consumers", made(n)) for n in SIZES)


def test_all_pairs_of_the_large_vessel_take_seconds() -> None:
    assert demos()[-1].pairs > 30_000
    assert demos()[-1].seconds < 8.0


def test_the_time_grows_no_faster_than_the_pairs() -> None:
    first, last = grown()[0], grown()[-1]
    exponent = math.log(last.seconds / first.seconds) / math.log(last.pairs / first.pairs)
    assert exponent < 1.15


def test_it_is_many_times_faster_than_pair_by_pair() -> None:
    assert demos()[-1].one_by_one_s / demos()[-1].seconds > 20.0


if __name__ == "__main__":
    print(f"{'plant':<16}{'pairs x modes':>14}{'s':>8}{'us/pair':>9}{'pair by pair, s':>17}{'ratio':>8}")
    for m in (*demos(), *grown()):
        micro = 1e6 * m.seconds / max(m.pairs, 1)
        ratio = m.one_by_one_s / m.seconds
        print(f"{m.name:<16}{m.pairs:>14}{m.seconds:>8.2f}{micro:>9.0f}{m.one_by_one_s:>17.1f}{ratio:>8.1f}")
