"""Time the sharing study of six sets, and hold it against solving the same scenarios one by one.

Run with ``python -m tests.benchmarks.bench_sharing``. Ratios are what counts: machines differ. Every scenario
that the study asks for is recorded and solved again by itself; the answers have to be equal. Scenarios that
move a set with cross-current compensation are held to 1e-4 only: the batch solver takes its reactance, which
follows the no-load voltage a little, from the first scenario.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from study.analyses import sharing_group
from study.analyses.balance import load_balance
from study.analyses.sharing import sharing_study
from study.analyses.sharing_options import SharingOptions
from study.model.plant import Plant
from study.network.batch import BatchSolution, solve_batch
from study.network.network import ModeNetwork, build_network, mode_network
from study.network.settings import Settings
from study.network.sources import Law
from study.resources import resource_dir
from study.results.arrays import FloatArray
from study.workbook import read_plant
from tests.plants import board, cable, demand, genset, load, mode, plant

REPEATS = 5
FIELDS = ("no_load_voltage_pu", "voltage_droop_pu", "no_load_frequency_pu", "speed_droop_pu")


@dataclass(frozen=True, kw_only=True)
class Asked:
    """One call of the batch solver."""

    at: ModeNetwork
    p_kw: FloatArray
    q_kvar: FloatArray
    settings: Settings | None
    answer: BatchSolution


def six_sets() -> Plant:
    """Return six unequal sets on six sections with cables between, 60 consumers, one mode."""
    sections = [f"S{i}" for i in range(6)]
    sizes = (1500.0, 1500.0, 1000.0, 1000.0, 2000.0, 2000.0)
    loads = [load(f"L{i}", sections[i % 6], p_rated_kw=20.0 + 3.0 * (i % 37)) for i in range(60)]
    return plant(
        boards=[board(s) for s in sections],
        gensets=[
            genset(
                f"G{i}", s, s_rated_kva=kva, p_engine_kw=0.9 * kva, voltage_droop_pu=0.03 + 0.001 * (i % 2)
            )
            for i, (s, kva) in enumerate(zip(sections, sizes, strict=True))
        ],
        cables=[cable(f"C{i}", sections[i], sections[(i + 1) % 6], runs=6, length_m=40.0) for i in range(6)]
        + [cable(f"K{x.name}", x.board, x.name, section_mm2=120.0) for x in loads],
        loads=loads,
        modes=[mode(demand={x.name: demand() for x in loads})],
    )


def recorded(work: Callable[[], object]) -> list[Asked]:
    """Return every call of the batch solver that some work makes."""
    calls: list[Asked] = []
    own = sharing_group.solve_batch

    def noted(at: Any, p_kw: Any, q_kvar: Any, settings: Any = None) -> BatchSolution:
        answer = own(at, p_kw, q_kvar, settings)
        calls.append(Asked(at=at, p_kw=p_kw, q_kvar=q_kvar, settings=settings, answer=answer))
        return answer

    sharing_group.solve_batch = noted  # type: ignore[attr-defined]
    try:
        work()
    finally:
        sharing_group.solve_batch = own  # type: ignore[attr-defined]
    return calls


def one_by_one(calls: list[Asked]) -> tuple[float, float]:
    """Solve every scenario by itself; return the largest difference of a set's kW or kvar, of rated kVA.

    The second figure is that of sets in an island with cross-current compensation.
    """
    worst = [0.0, 0.0]
    for call in calls:
        rated = np.array([s.s_rated_kva for s in call.at.sources])
        crossed = {s.island for s in call.at.sources if s.law == Law.CROSS_CURRENT}
        apart = np.array([s.island in crossed for s in call.at.sources], bool)
        for k in range(len(call.answer.solved)):
            trims = {} if call.settings is None else {f: row(getattr(call.settings, f), k) for f in FIELDS}
            alone = solve_batch(call.at, row(call.p_kw, k), row(call.q_kvar, k), Settings(**trims))
            if call.answer.solved[k]:
                off = np.hypot(
                    alone.source_p_kw[0] - call.answer.source_p_kw[k],
                    alone.source_q_kvar[0] - call.answer.source_q_kvar[k],
                )
                for n, sets in enumerate((~apart, apart)):
                    worst[n] = max(worst[n], float(np.max((off / rated)[sets], initial=0.0)))
    return worst[0], worst[1]


def row(values: FloatArray | None, k: int) -> FloatArray | None:
    """Return one scenario's row; one row stands for all."""
    if values is None:
        return None
    table = np.atleast_2d(values)
    return table[min(k, len(table) - 1)]


def fastest_ms(work: Callable[[], object]) -> float:
    """Return the shortest of several runs [ms]."""
    times = []
    for _ in range(REPEATS):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return 1000.0 * min(times)


def within_batch_ms(work: Callable[[], object]) -> float:
    """Return the shortest time that the batch solver takes of some work [ms]."""
    own, spent = sharing_group.solve_batch, [0.0]

    def timed(*given: Any) -> BatchSolution:
        start = time.perf_counter()
        answer = own(*given)
        spent[0] += time.perf_counter() - start
        return answer

    sharing_group.solve_batch = timed  # type: ignore[attr-defined]
    found = []
    try:
        for _ in range(REPEATS):
            spent[0] = 0.0
            work()
            found.append(spent[0])
    finally:
        sharing_group.solve_batch = own  # type: ignore[attr-defined]
    return 1000.0 * min(found)


def report(name: str, p: Plant) -> None:
    """Print the figures of one plant."""
    network = build_network(p)
    networks = [mode_network(network, m) for m in p.modes]
    balance = load_balance(p, [at.view for at in networks])
    p_kw, q_kvar = balance.demand.p_counted_kw, balance.demand.q_counted_kvar

    def work() -> object:
        return sharing_study(networks, p_kw, q_kvar, SharingOptions())

    calls = recorded(work)
    scenarios = sum(len(call.answer.solved) for call in calls)
    difference, crossed = one_by_one(calls)
    if difference > 1e-6 or crossed > 1e-4:
        raise SystemExit(f"{name}: a scenario alone differs by {difference:g} of rated, {crossed:g} crossed")
    whole_ms, batch_ms = fastest_ms(work), within_batch_ms(work)
    start = time.perf_counter()
    one_by_one(calls)
    alone_ms = 1000.0 * (time.perf_counter() - start)
    print(f"{name}: {len(p.gensets)} sets, {len(p.modes)} modes, {len(p.loads)} consumers")
    print(
        f"  {len(calls)} calls, {scenarios} scenarios; alone they differ by {difference:.1e} of rated at most"
    )
    print(f"  sharing study {whole_ms:.0f} ms, of which the batch solver {batch_ms:.0f} ms")
    print(f"  one by one {alone_ms:.0f} ms; ratio {alone_ms / whole_ms:.1f}")


def main() -> None:
    """Print times and ratios."""
    report("six sets in a ring", six_sets())
    report("large demonstration vessel", read_plant(resource_dir("workbooks") / "large-vessel.xlsx"))


if __name__ == "__main__":
    main()
