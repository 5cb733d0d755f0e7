"""A model followed in time: the compiled run called, and what it kept as arrays of the right length."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.network import dynamics_data as d
from study.network.dynamics_build import Model, shortest_time_s
from study.network.dynamics_data import Kept, Plant, Script

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

LONGEST_STEP_S = 0.002
SHORTEST_STEP_S = 0.0002
STEP_SHARE = 0.4  # of the shortest time constant
LOG_ROWS = 400
MORE_ROWS = 2 * LOG_ROWS + 64


@dataclass(frozen=True, slots=True, kw_only=True)
class Course:
    """What a plant did: arrays [time, ...] at every step, an event with a row before and one after.

    ``v_pu`` [time, node] are magnitudes; ``source`` and ``motor`` [time, row, column] hold the KEPT_ columns
    of `dynamics_data`, per unit of their own ratings. ``log`` [row] is (time, what, which). ``how`` it ended.
    """

    time_s: FloatArray
    v_pu: FloatArray
    source: FloatArray
    motor: FloatArray
    log: FloatArray
    how: int
    step_s: float


def step_for(plant: Plant) -> float:
    """Return the length of step that a plant wants.

    Parameters
    ----------
    plant : Plant
        Ready to be followed.

    Returns
    -------
    float
        Some part of its shortest time constant, within bounds. [s]
    """
    return float(np.clip(STEP_SHARE * shortest_time_s(plant), SHORTEST_STEP_S, LONGEST_STEP_S))


def follow_model(model: Model, until_s: float, step_s: float | None = None) -> Course:
    """Follow a model in time.

    Parameters
    ----------
    model : Model
        At rest; stays as it is.
    until_s : float
        How long. [s]
    step_s : float, optional
        Length of a step; by `step_for` where left out. [s]

    Returns
    -------
    Course
        What it did.
    """
    return follow_plant(model.start, model.script, until_s, step_s, back=model.back)


def follow_plant(
    start: Plant,
    script: Script,
    until_s: float,
    step_s: float | None = None,
    *,
    back: ComplexArray | None = None,
) -> Course:
    """Follow a plant in time; see `follow_model`.

    Parameters
    ----------
    start : Plant
        At rest; stays as it is.
    script : Script
        What happens; stays as it is.
    until_s : float
        How long. [s]
    step_s : float, optional
        Length of a step. [s]
    back : ndarray, shape (node wanted, node), optional
        What turns voltages of the plant's nodes into those wanted.

    Returns
    -------
    Course
        What it did.
    """
    from study.network.dynamics_kernel import follow

    step = step_for(start) if step_s is None else step_s
    now = Plant(**{name: x.copy() for name, x in start._asdict().items()})
    script = Script(**{name: x.copy() for name, x in script._asdict().items()})
    kept = space_for(now, int(until_s / step) + 4 * len(script.event) + MORE_ROWS)
    rows, logged, how = follow(now, script, kept, (float(until_s), step))
    v = kept.v[:rows, :, 0] + 1j * kept.v[:rows, :, 1]
    return Course(
        time_s=kept.time[:rows],
        v_pu=np.abs(v if back is None else v @ back.T),
        source=kept.source[:rows],
        motor=kept.motor[:rows],
        log=kept.log[:logged],
        how=int(how),
        step_s=step,
    )


def empty_script(nodes: int) -> Script:
    """Return a script in which nothing happens.

    Parameters
    ----------
    nodes : int
        Of the plant.

    Returns
    -------
    Script
        Without events.
    """
    return Script(
        event=np.zeros((0, d.EVENT_COLUMNS)),
        relay=np.zeros((0, d.RELAY_COLUMNS)),
        inrush=np.zeros((0, d.INRUSH_COLUMNS)),
        load=np.zeros((1, 4, nodes)),
    )


def space_for(plant: Plant, rows: int) -> Kept:
    """Return the space that a run of so many rows needs."""
    sources, motors, nodes = len(plant.source), len(plant.motor), len(plant.node)
    return Kept(
        time=np.zeros(rows),
        v=np.zeros((rows, nodes, 2)),
        source=np.zeros((rows, sources, d.KEPT_SOURCE)),
        motor=np.zeros((rows, motors, d.KEPT_MOTOR)),
        log=np.zeros((LOG_ROWS, 3)),
    )
