"""How fast the network room is, against open libraries on the same networks with the same answers.

Run as a script for the table, or with pytest for the claims behind it::

    python tests/benchmarks/bench_network.py
    pytest tests/benchmarks/bench_network.py

Only ratios of one run mean anything; every time is the best of several. Libraries that are not installed are
left out. Scenarios vary the load of every board and the voltage and speed setting of every set.
"""

from __future__ import annotations

import os
import time
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache, partial
from importlib.util import find_spec
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from study.analyses.balance import load_balance
from study.network import solver
from study.network.batch import BatchSolution, Settings, solve_batch
from study.network.cases import case
from study.network.network import ModeNetwork, build_network, mode_network
from study.workbook import read_plant
from tests.plants import board, cable, genset, load, plant, reactor

SIZES = {60: (4, 8000), 400: (8, 2000)}  # boards: sets, scenarios
THREADS = len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else 1
U_V, S_KVA = 440.0, 2000.0
X_DROOP = 0.04
R_OHM, X_OHM = 0.02, 0.01  # ohm/km
ANSWERS_PU = 1e-8


@dataclass(frozen=True, slots=True, kw_only=True)
class Task:
    """A network and its scenarios; ``km`` [board - 2] is the run from ``parent`` to each board."""

    at: ModeNetwork
    parent: np.ndarray
    km: np.ndarray
    p_kw: np.ndarray
    q_kvar: np.ndarray
    v_ref: np.ndarray
    f_0: np.ndarray

    @property
    def sets(self) -> int:
        return self.v_ref.shape[1]

    @property
    def count(self) -> int:
        return len(self.p_kw)


@cache
def task(boards: int) -> Task:
    """Return two main boards with sets and a tree of distribution boards, one constant-power load on each."""
    sets, count = SIZES[boards]
    rng = np.random.default_rng(boards)
    # Half the boards on the switchboards, half behind another board, as on a ship.
    first = (boards - 2) // 2
    parent = np.concatenate([np.arange(first) % 2, 2 + rng.integers(0, first, boards - 2 - first)])
    km = rng.uniform(0.02, 0.08, boards - 2)
    names = [f"B{n}" for n in range(boards)]
    p = plant(
        boards=[board(n, U_V) for n in names],
        gensets=[
            genset(
                f"G{n}",
                names[n % 2],
                u_rated_v=U_V,
                s_rated_kva=S_KVA,
                p_engine_kw=2.0 * S_KVA,
                ceiling=9.0,
                droop_base="rated kVA",
                voltage_droop_pu=X_DROOP,
                speed_droop_pu=0.04,
            )
            for n in range(sets)
        ],
        reactors=[reactor("X", "B0", "B1", x_ohm=0.001, r_ohm=0.0001)],
        cables=[
            cable(
                f"C{n}",
                names[parent[n - 2]],
                names[n],
                length_m=1000.0 * km[n - 2],
                resistance_ohm_per_km=R_OHM,
                reactance_ohm_per_km=X_OHM,
                conductor_temperature_degc=20.0,
            )
            for n in range(2, boards)
        ],
        loads=[load(f"L{n}", names[n], kind="converter") for n in range(boards)],
    )
    share = 0.6 * sets * 0.8 * S_KVA / boards
    p_kw = share * rng.uniform(0.5, 1.3, (count, boards))
    return Task(
        at=mode_network(build_network(p), p.modes[0]),
        parent=parent,
        km=km,
        p_kw=p_kw,
        q_kvar=p_kw * rng.uniform(0.3, 0.8, (count, boards)),
        v_ref=rng.uniform(0.99, 1.01, (count, sets)),
        f_0=rng.uniform(1.03, 1.05, (count, sets)),
    )


def r_ohm_per_km(t: Task) -> float:
    """Return the resistance in use: maker's at 20 degC, with skin effect, read back from the network."""
    network = t.at.network
    k = next(i for i, b in enumerate(network.topology.branches) if b.kind == "cable")
    z_base = U_V**2 / (1000.0 * network.s_base_kva)
    km = network.plant.cables[network.topology.branches[k].index].length_m / 1000.0
    return float(network.branches.r_pu[k] * z_base / km)


def ours(t: Task) -> BatchSolution:
    trims = Settings(no_load_voltage_pu=t.v_ref, no_load_frequency_pu=t.f_0)
    return solve_batch(t.at, t.p_kw, t.q_kvar, trims, compiled=True)


def board_volts(found: BatchSolution) -> np.ndarray:
    return np.abs(found.v_bus_pu[:, found.at.bus_of_node[: len(found.at.network.plant.boards)]])


# ---- peers


def pandapower_network(t: Task) -> Any:
    """Return the network built by pandapower's own functions; EMFs behind droop reactances last."""
    import pandapower as pp

    net = pp.create_empty_network(sn_mva=1.0, f_hz=60.0)
    boards = t.p_kw.shape[1]
    pp.create_buses(net, boards + t.sets, vn_kv=U_V / 1000.0)
    every = {"c_nf_per_km": 0.0, "max_i_ka": 1.0}
    for n in range(2, boards):
        pp.create_line_from_parameters(net, t.parent[n - 2], n, t.km[n - 2], r_ohm_per_km(t), X_OHM, **every)
    pp.create_line_from_parameters(net, 0, 1, 1.0, 0.0001, 0.001, **every)
    x_ohm = X_DROOP * U_V**2 / (1000.0 * S_KVA)
    for n in range(t.sets):
        pp.create_line_from_parameters(net, boards + n, n % 2, 1.0, 0.0, x_ohm, **every)
        pp.create_gen(net, boards + n, p_mw=1.0, vm_pu=1.0, slack=True, slack_weight=1.0 / t.sets)
    pp.create_loads(net, range(boards), p_mw=0.1, q_mvar=0.05)
    return net


def base_points_mw(t: Task) -> np.ndarray:
    """Return each set's MW at rated frequency; the rest is shared equally, all droops being equal."""
    return 0.8 * S_KVA / 1000.0 * (t.f_0 - 1.0) / 0.04


def by_pandapower(t: Task, scenarios: int) -> np.ndarray:
    import pandapower as pp

    net, volts = _pandapower_once(t), []
    for k in range(scenarios):
        net.load["p_mw"], net.load["q_mvar"] = t.p_kw[k] / 1000.0, t.q_kvar[k] / 1000.0
        net.gen["vm_pu"], net.gen["p_mw"] = t.v_ref[k], base_points_mw(t)[k]
        pp.runpp(net, **RUNPP)
        volts.append(net.res_bus.vm_pu.to_numpy()[: t.p_kw.shape[1]])
    return np.array(volts)


RUNPP: dict[str, Any] = {
    "distributed_slack": True,
    "tolerance_mva": 1e-9,
    "init": "flat",
    "numba": False,
    "lightsim2grid": False,
    "check_connectivity": False,
    "calculate_voltage_angles": False,
}


@cache
def _pandapower_of(boards: int) -> Any:
    return pandapower_network(task(boards))


def _pandapower_once(t: Task) -> Any:
    return _pandapower_of(t.p_kw.shape[1])


@cache
def _lightsim_sweep(boards: int) -> tuple[Any, np.ndarray]:
    import pandapower as pp
    from lightsim2grid.lightsim2grid_cpp import InjectionSweepCPP
    from lightsim2grid.network import init_from_pandapower

    t, net = task(boards), _pandapower_of(boards)
    pp.runpp(net, **RUNPP)
    grid = init_from_pandapower(net)
    sweep = InjectionSweepCPP(grid)
    sweep.nb_thread = THREADS
    start = net.res_bus.vm_pu.to_numpy() * np.exp(1j * np.deg2rad(net.res_bus.va_degree.to_numpy()))
    assert len(start) == t.p_kw.shape[1] + t.sets
    return sweep, start


def by_lightsim2grid(t: Task) -> np.ndarray:
    sweep, start = _lightsim_sweep(t.p_kw.shape[1])
    sweep.modify_gen_p(base_points_mw(t))
    sweep.modify_gen_v(t.v_ref)
    sweep.modify_load_p(t.p_kw / 1000.0)
    sweep.modify_load_q(t.q_kvar / 1000.0)
    sweep.compute(start, 20, 1e-9)
    return np.abs(np.asarray(sweep.get_voltages())[:, : t.p_kw.shape[1]])


@cache
def _power_grid_model(boards: int) -> tuple[Any, np.ndarray]:
    """Return the model and the gain from active power to EMF angle at no load."""
    import power_grid_model as pgm

    t = task(boards)
    node = pgm.initialize_array("input", "node", boards)
    node["id"], node["u_rated"] = np.arange(boards), U_V
    line = pgm.initialize_array("input", "line", boards - 1)
    line["id"] = 10_000 + np.arange(boards - 1)
    line["from_node"], line["to_node"] = np.append(t.parent, 0), np.append(np.arange(2, boards), 1)
    line["from_status"] = line["to_status"] = 1
    line["r1"], line["x1"] = np.append(t.km * r_ohm_per_km(t), 0.0001), np.append(t.km * X_OHM, 0.001)
    line["c1"] = line["tan1"] = 0.0
    source = pgm.initialize_array("input", "source", t.sets)
    source["id"], source["node"] = 20_000 + np.arange(t.sets), np.arange(t.sets) % 2
    source["status"], source["u_ref"], source["u_ref_angle"] = 1, 1.0, 0.0
    source["sk"], source["rx_ratio"] = 1000.0 * S_KVA / X_DROOP, 0.0
    demand = pgm.initialize_array("input", "sym_load", boards)
    demand["id"], demand["node"] = 30_000 + np.arange(boards), np.arange(boards)
    demand["status"], demand["type"] = 1, pgm.LoadGenType.const_power
    demand["p_specified"], demand["q_specified"] = 1e5, 5e4
    model = pgm.PowerGridModel({"node": node, "line": line, "source": source, "sym_load": demand})
    return model, _angle_gain(t)


def _angle_gain(t: Task) -> np.ndarray:
    """Return the pseudo-inverse of d P/d angle [rad/W] of EMFs behind X on two boards joined by a reactor."""
    y = 1.0 / (X_DROOP * U_V**2 / (1000.0 * S_KVA))
    tie = 1.0 / 0.001
    at = np.arange(t.sets) % 2
    full = np.zeros((t.sets + 2, t.sets + 2))
    for n in range(t.sets):
        for a, b, v in ((n, n, y), (n, t.sets + at[n], -y), (t.sets + at[n], n, -y)):
            full[a, b] += v
        full[t.sets + at[n], t.sets + at[n]] += y
    full[-2:, -2:] += tie * np.array([[1.0, -1.0], [-1.0, 1.0]])
    s = t.sets
    # Constant-power loads neither add nor take synchronising power, so that the boards are eliminated.
    inner = full[:s, :s] - full[:s, s:] @ np.linalg.pinv(full[s:, s:]) @ full[s:, :s]
    return np.linalg.pinv(inner * U_V**2)


def by_power_grid_model(t: Task) -> np.ndarray:
    """Solve the batch again and again with angles corrected, until the kW follow the governors."""
    import power_grid_model as pgm

    model, gain = _power_grid_model(t.p_kw.shape[1])
    source = pgm.initialize_array("update", "source", (t.count, t.sets))
    source["id"] = 20_000 + np.arange(t.sets)
    source["u_ref"] = t.v_ref
    angle = np.zeros((t.count, t.sets))
    demand = pgm.initialize_array("update", "sym_load", t.p_kw.shape)
    demand["id"] = 30_000 + np.arange(t.p_kw.shape[1])
    demand["p_specified"], demand["q_specified"] = 1000.0 * t.p_kw, 1000.0 * t.q_kvar
    wanted = 1e6 * base_points_mw(t)
    for _ in range(12):
        source["u_ref_angle"] = angle
        out = model.calculate_power_flow(
            update_data={"source": source, "sym_load": demand},
            error_tolerance=1e-10,
            threading=THREADS,
            output_component_types={"node": ["u_pu"], "source": ["p"]},
        )
        p = out["source"]["p"]
        error = wanted + (p.sum(axis=1) - wanted.sum(axis=1))[:, None] / t.sets - p
        if np.abs(error).max() < 1e-8 * 1000.0 * t.at.network.s_base_kva:
            break
        angle = angle + error @ gain
    return np.asarray(out["node"]["u_pu"])


# ---- claims


def best(call: Callable[[], Any], repeats: int = 5) -> float:
    """Return the shortest time of several [s]."""
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        call()
        times.append(time.perf_counter() - start)
    return min(times)


def one_mode(boards: int) -> tuple[float, float]:
    """Return the times of one solution: ours, and pandapower's `runpp` on a network already built [s]."""
    import pandapower as pp

    t = task(boards)
    net = _pandapower_once(t)
    by_pandapower(t, 1)
    single = solve_batch(t.at, t.p_kw[0], t.q_kvar[0])
    assert single.solved[0]
    own, theirs = [], []
    for _ in range(20):  # in turn, so that whatever else the machine does falls on both
        own.append(best(lambda: solve_batch(t.at, t.p_kw[0], t.q_kvar[0]), 5))
        theirs.append(best(lambda: pp.runpp(net, **RUNPP), 1))
    return min(own), min(theirs)


def whole_study() -> tuple[float, float]:
    """Return the time of the ten modes of the large vessel, and the part of it inside pandapower alone [s].

    Pandapower's part is making an empty network and one `runpp` for each island.
    """
    import pandapower as pp

    p = read_plant(Path(__file__).parents[2] / "workbooks" / "large-vessel.xlsx")
    network = build_network(p)
    networks = [mode_network(network, m) for m in p.modes]
    balance = load_balance(p, [at.view for at in networks])
    demand = balance.demand
    cases = [case(at, demand.p_counted_kw[k], demand.q_counted_kvar[k]) for k, at in enumerate(networks)]
    solver.solve_reported(network, cases)
    inside, run = [], solver._Grid.run

    def timed(grid: Any, distributed: bool) -> bool:
        start = time.perf_counter()
        done = run(grid, distributed)
        inside.append(time.perf_counter() - start)
        return done

    solver._Grid.run = timed  # type: ignore[method-assign]
    try:
        empty = best(pp.create_empty_network, 3)
        start = time.perf_counter()
        solver.solve_reported(network, cases)
        return time.perf_counter() - start, empty + sum(inside)
    finally:
        solver._Grid.run = run  # type: ignore[method-assign]


@pytest.mark.parametrize("boards", SIZES)
def test_one_mode_is_twenty_times_faster_than_pandapower(boards: int) -> None:
    pytest.importorskip("pandapower")
    own, theirs = one_mode(boards)
    assert theirs / own > 20.0


def test_ten_modes_cost_little_more_than_their_load_flows() -> None:
    total, bare = whole_study()
    assert total / bare < 1.5


@pytest.mark.parametrize("boards", SIZES)
def test_answers_equal_pandapowers(boards: int) -> None:
    t = task(boards)
    assert board_volts(ours(t))[:20] == pytest.approx(by_pandapower(t, 20), abs=ANSWERS_PU)


@pytest.mark.parametrize("boards", SIZES)
def test_faster_than_lightsim2grid_at_equal_answers(boards: int) -> None:
    pytest.importorskip("lightsim2grid")
    t = task(boards)
    assert board_volts(ours(t)) == pytest.approx(by_lightsim2grid(t), abs=ANSWERS_PU)
    assert best(lambda: by_lightsim2grid(t)) > best(lambda: ours(t))


@pytest.mark.parametrize("boards", SIZES)
def test_faster_than_power_grid_model_at_equal_answers(boards: int) -> None:
    pytest.importorskip("power_grid_model")
    t = task(boards)
    assert board_volts(ours(t)) == pytest.approx(by_power_grid_model(t), abs=ANSWERS_PU)
    assert best(lambda: by_power_grid_model(t), 3) > best(lambda: ours(t))


def table() -> list[tuple[str, int, float, float]]:
    """Return rows of library, boards, scenarios per second, and the largest difference of voltage to ours."""
    rows = []
    for boards in SIZES:
        t = task(boards)
        volts = board_volts(ours(t))
        rows.append(("this program", boards, t.count / best(partial(ours, t)), 0.0))
        peers = {"lightsim2grid": by_lightsim2grid, "power_grid_model": by_power_grid_model}
        for name, call in peers.items():
            if find_spec(name) is not None:
                apart = float(np.abs(call(t) - volts).max())
                rows.append((name, boards, t.count / best(partial(call, t), 3), apart))
        apart = float(np.abs(by_pandapower(t, 20) - volts[:20]).max())
        rows.append(("pandapower", boards, 20 / best(partial(by_pandapower, t, 20), 2), apart))
    return rows


def main() -> None:
    """Print the table and the ratios."""
    print(f"{THREADS} threads; scenarios per second, difference to this program's voltages")
    for name, boards, rate, apart in table():
        print(f"{name:18s} {boards:4d} boards {rate:10.0f} /s  {apart:.1e} pu")
    for boards in SIZES:
        own, theirs = one_mode(boards)
        times = f"{1e3 * own:.2f} ms, runpp {1e3 * theirs:.1f} ms, ratio {theirs / own:.0f}"
        print(f"one mode, {boards} boards: {times}")
    total, bare = whole_study()
    times = f"{total:.2f} s, of it pandapower {bare:.2f} s, ratio {total / bare:.2f}"
    print(f"ten modes of the large vessel: {times}")


if __name__ == "__main__":
    main()
