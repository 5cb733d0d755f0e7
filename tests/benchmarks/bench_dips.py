"""How fast the time simulation is: against real time, and against `solve_ivp` on the same equations.

Run as a script for the table, or with pytest for the claims behind it::

    python tests/benchmarks/bench_dips.py
    pytest tests/benchmarks/bench_dips.py

The large demonstration vessel with all six main sets on line and three motors that start within 0.3 s; its
boards are drawn together to the nodes of sets and motors. Times are processor seconds of one core, the best
of several; compiling and reading the compiled code back are told apart. The peer is written in numpy, the
plain way, with the step control of `solve_ivp` (RK45, relative tolerance 1e-5).
"""

from __future__ import annotations

import subprocess
import sys
import time
from dataclasses import replace
from functools import cache
from pathlib import Path

import numpy as np

from study.analyses.balance import load_balance
from study.analyses.dips_options import DipOptions
from study.analyses.dips_simulation import prepare_case, simulate_cases
from study.model.modes import Event
from study.network import dynamics_data as d
from study.network.dynamics_build import Model, build_model
from study.network.dynamics_run import Course, follow_model
from study.network.network import build_network, mode_network
from study.workbook import read_plant
from tests.agreement.dips_peer import STATES, Peer

BOOK = Path(__file__).parents[2] / "workbooks" / "large-vessel.xlsx"
MODE = "Transit"
SETS = ("DG1", "DG2", "DG3", "DG4", "DG5", "DG6")
STARTS = {"Rapid ballast pump 1": 0.1, "Rapid ballast pump 2": 0.2, "Fire-monitor pump": 0.3}
LENGTH_S = 5.0
REAL_TIME, PEER = 50.0, 20.0


@cache
def vessel():
    """Return plant, networks and demand of the large vessel."""
    plant = read_plant(BOOK)
    network = build_network(plant)
    networks = [mode_network(network, m) for m in plant.modes]
    demand = load_balance(plant, [at.view for at in networks]).demand
    return plant, network, networks, demand


@cache
def model() -> Model:
    """Return the event that is timed: six sets, three motors that start."""
    plant, network, _, demand = vessel()
    row = [m.name for m in plant.modes].index(MODE)
    mode = plant.modes[row]
    states = {**mode.states, **dict.fromkeys(SETS, "on"), "BATT-S": "off", "BATT-P": "off"}
    states |= {t.name: "on" for t in plant.ties}
    at = mode_network(network, replace(mode, states=states))
    events = [
        Event(
            case="Three starts",
            mode=MODE,
            kind="motor start",
            equipment=name,
            cell="",
            size=None,
            unit=None,
            at_s=at_s,
            duration_s=None,
        )
        for name, at_s in STARTS.items()
    ]
    p, q = demand.p_counted_kw[row], demand.q_counted_kvar[row]
    batch, work = prepare_case(at, events, p, q, DipOptions())
    work.relays.clear()  # the peer has none
    return build_model(batch, work.plan())


def seconds(call, repeats: int = 5) -> float:
    """Return the least processor time of a call."""
    best = np.inf
    for _ in range(repeats):
        start = time.process_time()
        call()
        best = min(best, time.process_time() - start)
    return best


@cache
def course() -> Course:
    """Return the event followed by the compiled code."""
    return follow_model(model(), LENGTH_S)


@cache
def peer() -> tuple[np.ndarray, np.ndarray, float]:
    """Return times, states and processor time of the plain way."""
    at_s = np.arange(0.0, LENGTH_S - 0.01, 0.05)
    begun = time.process_time()
    found = Peer(model(), np.array(list(STARTS.values()))).follow(LENGTH_S, list(STARTS.values()), at_s)
    return at_s, found, time.process_time() - begun


def largest_difference() -> dict[str, float]:
    """Return the largest differences of speed, field (of rated-load field) and motor speed."""
    at_s, found, _ = peer()
    run, start = course(), model().start
    rows = np.searchsorted(run.time_s, at_s + 1e-9) - 1
    sets, motors = len(start.source), len(start.motor)
    states = found[:, : sets * STATES].reshape(len(at_s), sets, STATES)
    field = run.source[rows, :, d.KEPT_FIELD] - states[:, :, d.FIELD - d.FIRST_STATE]
    speed = run.source[rows, :, d.KEPT_SPEED] - states[:, :, d.SPEED - d.FIRST_STATE]
    turning = run.motor[rows, :, d.KEPT_TURNING] - found[:, sets * STATES : sets * STATES + motors]
    return {
        "speed": float(np.abs(speed).max()),
        "field": float(np.abs(field / start.source[:, d.RATED_FIELD]).max()),
        "motor speed": float(np.abs(turning).max()),
    }


def test_the_event_is_what_it_says() -> None:
    start = model().start
    assert len(start.source) == 6
    assert len(start.motor) == 3
    assert course().how == d.FINISHED
    assert course().motor[-1, :, d.KEPT_TURNING].min() > 0.3


def test_traces_are_those_of_the_peer() -> None:
    assert max(largest_difference().values()) < 1e-3


def test_faster_than_real_time() -> None:
    course()
    assert LENGTH_S / seconds(lambda: follow_model(model(), LENGTH_S)) >= REAL_TIME


def test_faster_than_solve_ivp() -> None:
    course()
    assert peer()[2] / seconds(lambda: follow_model(model(), LENGTH_S)) >= PEER


def first_call_s(fresh: bool) -> float:
    """Return the processor time of the first call in a new process, compiling where `fresh`."""
    folder = Path(__file__).parents[2]
    if fresh:
        for path in (folder / "study" / "network" / "__pycache__").glob("dynamics_kernel*.nb?"):
            path.unlink()
    code = (
        "import time; from tests.benchmarks.bench_dips import model; from study.network.dynamics_run import "
        "follow_model; m = model(); t = time.process_time(); follow_model(m, 0.01); "
        "print(time.process_time() - t)"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=folder, capture_output=True, text=True, check=True
    )
    return float(done.stdout.split()[-1])


def main() -> None:
    """Print the table."""
    plant, _, networks, demand = vessel()
    compiling, loading = first_call_s(fresh=True), first_call_s(fresh=False)
    own = seconds(lambda: follow_model(model(), LENGTH_S))
    start = model().start
    print(f"{len(plant.boards)} boards, reduced to {len(start.node)} nodes; 6 sets, 3 motors; {LENGTH_S:g} s")
    print(f"compiled run   {1000 * own:8.1f} ms   {LENGTH_S / own:6.0f} x real time")
    print(f"solve_ivp      {1000 * peer()[2]:8.0f} ms   {peer()[2] / own:6.0f} x the compiled run")
    print("largest differences: " + ", ".join(f"{k} {v:.1e}" for k, v in largest_difference().items()))
    print(f"compiling, once for each installation {compiling:.0f} s; reading it back {loading:.2f} s")
    cases = seconds(lambda: simulate_cases(networks, demand.p_counted_kw, demand.q_counted_kvar), 2)
    print(f"all cases of the vessel, results included: {cases:.2f} s")


if __name__ == "__main__":
    main()
