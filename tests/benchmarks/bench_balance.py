"""Time the load balance of 500 loads in 10 modes, and hold its demand against a plain loop over loads.

Run with ``python -m tests.benchmarks.bench_balance``. Ratios are what counts: machines differ.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable
from typing import Any

import numpy as np

from study.analyses.balance import load_balance
from study.analyses.balance_demand import asked_of, consumer_demand, load_table
from study.model.loads import Load
from study.model.modes import Demand, Mode
from study.network.view import view_of
from tests.plants import board, cable, demand, genset, load, mode, plant

LOADS, MODES, BOARDS, REPEATS = 500, 10, 20, 15
DUTY = ("continuous", "intermittent", "occasional")
KIND = ("motor", "motor", "heating", "lighting", "general")


def example() -> Any:
    """Return a plant of 500 loads on 20 boards, each with a demand in 10 modes."""
    boards = ["MSB", *(f"DB{i}" for i in range(1, BOARDS))]
    loads = [
        load(f"L{i}", boards[i % BOARDS], kind=KIND[i % 5], p_rated_kw=1.0 + i % 37, service=f"S{i % 12}")
        for i in range(LOADS)
    ]
    modes = [
        mode(
            f"M{k}",
            {},
            {
                x.name: demand(float((i + k) % 2), 0.4 + (i % 7) / 10, DUTY[(i + k) % 3])
                for i, x in enumerate(loads)
            },
        )
        for k in range(MODES)
    ]
    return plant(
        boards=[board(b) for b in boards],
        gensets=[genset(f"G{i}", "MSB", s_rated_kva=2500.0, p_engine_kw=2200.0) for i in range(1, 5)],
        cables=[cable(f"C{b}", "MSB", b) for b in boards[1:]],
        loads=loads,
        modes=modes,
    )


def plain_input(item: Load, asked: Demand) -> tuple[float, float]:
    """Return kW and kvar of one load by the formulas of `study.formulas.demand`, written out as scalars."""
    output_kw = item.p_absorbed_kw * asked.load_factor
    if not output_kw or not asked.in_use:
        return 0.0, 0.0
    tangent = math.sqrt(1.0 - item.cos_phi**2) / item.cos_phi
    if item.kind != "motor":
        return asked.in_use * output_kw, asked.in_use * output_kw * tangent
    b = output_kw / item.p_rated_kw
    loss = 1.0 / item.efficiency - 1.0
    p_kw = item.p_rated_kw * (b + loss * (3.0 / 7.0 + 4.0 / 7.0 * b * b))
    leakage = 0.15 / max(math.sqrt(1.0 - item.cos_phi**2), 0.15)
    q_kvar = item.p_rated_kw / item.efficiency * tangent * (1.0 - leakage * (1.0 - b * b))
    return asked.in_use * p_kw, asked.in_use * q_kvar


def plain_loop(loads: tuple[Load, ...], modes: tuple[Mode, ...]) -> np.ndarray:
    """Return counted kW and kvar [mode, load, 2] by a plain loop."""
    counts = {"continuous": 1.0, "intermittent": 0.5, "occasional": 0.0}
    rows = []
    for item in modes:
        row = []
        for consumer in loads:
            asked = item.demand[consumer.name]
            p_kw, q_kvar = plain_input(consumer, asked)
            factor = item.simultaneity.get((consumer.service, asked.duty), counts[asked.duty])
            row.append((p_kw * factor, q_kvar * factor))
        rows.append(row)
    return np.array(rows)


def fastest_ms(work: Callable[[], object]) -> float:
    """Return the shortest of several runs [ms]."""
    times = []
    for _ in range(REPEATS):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return 1000.0 * min(times)


def main() -> None:
    """Print the times and the largest difference."""
    p = example()
    views = [view_of(p, m) for m in p.modes]
    fed = np.ones((MODES, LOADS), dtype=bool)
    table = load_table(p)
    result = load_balance(p, views)
    loop = plain_loop(p.loads, p.modes)
    counted = np.stack([result.demand.p_counted_kw, result.demand.q_counted_kvar], axis=2)
    difference = float(np.abs(counted - loop).max())
    if difference > 1e-9:
        raise SystemExit(f"the two routes differ by {difference:g} kW or kvar")
    asked = asked_of(p, table)
    reading_ms = fastest_ms(lambda: asked_of(p, table))
    arrays_ms = fastest_ms(lambda: consumer_demand(p.modes, table, asked, fed, 2.0))
    loop_ms = fastest_ms(lambda: plain_loop(p.loads, p.modes))
    whole_ms = fastest_ms(lambda: load_balance(p, views))
    print(f"{LOADS} loads x {MODES} modes: difference {difference:.1e} kW or kvar")
    print(
        f"demand: to arrays {reading_ms:.2f} ms, arithmetic {arrays_ms:.2f} ms; plain loop {loop_ms:.2f} ms"
    )
    print(f"plain loop / (to arrays + arithmetic) = {loop_ms / (reading_ms + arrays_ms):.1f}")
    print(f"whole balance {whole_ms:.1f} ms")


if __name__ == "__main__":
    main()
