"""Small plants for the time simulation, and the way from one to its course."""

from __future__ import annotations

from typing import Any

import numpy as np

from study.network import dynamics_data as d
from study.network.batch import BatchSolution, solve_batch
from study.network.dynamics_build import BoardLoad, Happening, Model, Plan, build_model
from study.network.dynamics_run import Course, follow_model
from study.network.network import ModeNetwork, build_network, mode_network
from tests import plants

STEP_AT_S = 0.1
# Regulator and machine that are well damped; the rest as in tests.plants.
DAMPED = {
    "gain": 30.0,
    "integral_per_s": 20.0,
    "derivative_s": 2.0,
    "exciter_time_constant_s": 0.12,
    "ceiling": 3.0,
    "v_per_hz_knee_hz": None,
}


def genset(name: str = "G1", board: str = "MSB", **changes: Any):
    """Return a set of 1000 kVA, 450 V with a damped regulator."""
    return plants.genset(name, board, **{**DAMPED, **changes})


def network_of(sets, loads=(), **more: Any) -> ModeNetwork:
    """Return the only mode of a plant with one board of 450 V."""
    boards = more.pop("boards", None) or [plants.board("MSB", 450.0)]
    plant = plants.plant(boards=boards, gensets=list(sets), loads=list(loads), **more)
    return mode_network(build_network(plant), plant.modes[0])


def solved(at: ModeNetwork, p_kw=(), q_kvar=()) -> BatchSolution:
    """Return the load flow of a mode."""
    batch = solve_batch(at, np.array(p_kw, float), np.array(q_kvar, float))
    assert batch.solved[0], batch.reason
    return batch


def with_step(
    at: ModeNetwork, s_kva: complex, p_kw=(), q_kvar=(), *, more: tuple[Happening, ...] = ()
) -> tuple[BatchSolution, Model]:
    """Return a model in which a constant-impedance load comes on the first board, and its load flow."""
    p, q = np.array(p_kw, float), np.array(q_kvar, float)
    batch = solved(at, p, q)
    bus = int(at.bus_of_node[0])
    step = BoardLoad(bus=bus, state=1, s_pu=s_kva / at.network.s_base_kva)
    plan = Plan(
        island=0,
        p_kw=np.stack([p, p]),
        q_kvar=np.stack([q, q]),
        board_loads=(step,),
        happenings=(Happening(at_s=STEP_AT_S, kind=d.CHANGE_LOAD, index=1), *more),
    )
    return batch, build_model(batch, plan)


def course_of(model: Model, until_s: float, step_s: float | None = None) -> Course:
    """Return what a model does."""
    course = follow_model(model, until_s, step_s)
    assert course.how == d.FINISHED
    return course


def end_of(course: Course, column: int) -> np.ndarray:
    """Return the last value of a column of every source."""
    return course.source[-1, :, column]
