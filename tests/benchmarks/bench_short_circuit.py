"""How fast the short-circuit study is, against pandapower's `calc_sc` on the same places.

Run as a script for the table, or with pytest for the claims behind it::

    python tests/benchmarks/bench_short_circuit.py
    pytest tests/benchmarks/bench_short_circuit.py

Only ratios of one run mean anything; every time is processor time, the best of several, both sides in turn.

- *the study* is everything: both cases of every mode by IEC 61363-1 (seven stages of the fault, decay and
  contributions of every source, two-phase and earth faults, the equivalent generator, the ways through every
  branch) and by IEC 60909, at every live place of the large demonstration vessel.
- *like for like* is what the library computes, by our IEC 60909: the maximum case alone with I''k and ip, and
  with it the two-phase and steady currents, Ib and ith, which come from the same matrices. Networks are built
  beforehand on both sides.

The library computes I''k and ip of the maximum case; one call a mode, or bus by bus (timed on a sample).
"""

from __future__ import annotations

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # small matrices: a second thread costs, for both sides

import logging
import time
import warnings
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from study.analyses.short_circuit import solve_mode
from study.analyses.short_circuit_general import general_case
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.network.fault_network import fault_network, fault_plant
from study.network.fault_supplies import MAXIMUM
from study.network.network import build_network
from study.network.solver_faults import library_network
from study.workbook import read_plant

BOOK = Path(__file__).parents[2] / "workbooks" / "large-vessel.xlsx"
ROUNDS, SAMPLE = 4, 2


@dataclass(frozen=True, slots=True, kw_only=True)
class Times:
    """Seconds for all modes; ``places`` over all modes."""

    ours_s: float
    like_for_like_s: float
    one_call_a_mode_s: float
    bus_by_bus_s: float
    places: int
    modes: int


def _best(*works: Callable[[], object], rounds: int = ROUNDS) -> list[float]:
    """Return the best time of each, one after the other in every round."""
    best = [float("inf")] * len(works)
    for _ in range(rounds):
        for k, work in enumerate(works):
            start = time.process_time()
            work()
            best[k] = min(best[k], time.process_time() - start)
    return best


@cache
def measure() -> Times:
    """Time both sides, one after the other in every round."""
    from pandapower.shortcircuit import calc_sc

    logging.getLogger("pandapower.shortcircuit.calc_sc").setLevel(logging.ERROR)
    static = fault_plant(build_network(read_plant(BOOK)))
    modes = static.network.plant.modes
    options = ShortCircuitOptions(compare=False)
    nets = [fault_network(static, m, MAXIMUM) for m in modes]
    places = [int((n.place_bus >= 0).sum()) for n in nets]
    grids = [library_network(n, 6, all_places=True) for n in nets]
    how = {"fault": "3ph", "case": "max", "ip": True, "kappa_method": "C", "lv_tol_percent": 6}
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        ours, alike, call = _best(
            lambda: [solve_mode(static, m, options) for m in modes],
            lambda: [general_case(n, options) for n in nets],
            lambda: [calc_sc(g, **how) for g in grids],
        )
        loop = 0.0
        for grid, count in zip(grids, places, strict=True):
            buses = np.linspace(0, len(grid.bus) - 1, SAMPLE).astype(int)
            one = _best(lambda g=grid, b=buses: [calc_sc(g, bus=int(k), **how) for k in b], rounds=1)[0]
            loop += one / SAMPLE * count
    return Times(
        ours_s=ours,
        like_for_like_s=alike,
        one_call_a_mode_s=call,
        bus_by_bus_s=loop,
        places=sum(places),
        modes=len(modes),
    )


def test_ten_times_faster_than_a_loop_over_buses():
    t = measure()
    assert t.bus_by_bus_s / t.ours_s >= 10.0


def test_the_whole_study_is_not_slower_than_one_call_a_mode():
    t = measure()
    assert t.one_call_a_mode_s / t.ours_s >= 1.0


def test_like_for_like_it_is_five_times_faster_than_one_call_a_mode():
    t = measure()
    assert t.one_call_a_mode_s / t.like_for_like_s >= 5.0


def main() -> None:
    """Print the table."""
    t = measure()
    print(f"{t.places} live places in {t.modes} modes of {BOOK.stem}")
    for name, seconds in (
        ("the study: both standards, both cases", t.ours_s),
        ("our IEC 60909, maximum alone", t.like_for_like_s),
        ("calc_sc, one call a mode, maximum alone", t.one_call_a_mode_s),
        (f"calc_sc, bus by bus (from {SAMPLE} buses a mode)", t.bus_by_bus_s),
    ):
        print(
            f"{name:46s} {seconds:9.2f} s   {seconds / t.ours_s:7.1f} x the study"
            f"   {seconds / t.like_for_like_s:7.1f} x like for like"
        )


if __name__ == "__main__":
    pytest.importorskip("pandapower")
    main()
