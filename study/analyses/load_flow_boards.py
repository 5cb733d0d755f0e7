"""Boards of a mode: voltage, angle, what hangs on them, and the current that their busbars carry."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from study.network.solution import ModeSolution
from study.results.arrays import read_only
from study.results.load_flow import BoardState

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


def board_state(s: ModeSolution) -> BoardState:
    """Return the boards of a solved mode; empty where it is not solved.

    Parameters
    ----------
    s : ModeSolution
        Of the mode.

    Returns
    -------
    BoardState
        Boards in workbook order.
    """
    boards = s.at.network.plant.boards if s.solved else ()
    count = len(boards)
    nominal = np.array([b.u_nominal_v for b in boards])
    live = s.energised[:count]
    load = _load_at_boards(s)[:count]
    current = _busbar_current_a(s, nominal)[:count] if count else np.zeros(0)
    rated = np.array([np.nan if b.busbar_rated_a is None else b.busbar_rated_a for b in boards])
    return BoardState(
        names=tuple(b.name for b in boards),
        energised=read_only(live, np.bool_),
        island=read_only(s.at.view.board_island[:count], np.int64),
        u_nominal_v=read_only(nominal),
        u_v=read_only(np.where(live, np.abs(s.board_v_pu[:count]) * nominal, np.nan)),
        angle_deg=read_only(_angles(s)[:count]),
        p_load_kw=read_only(np.where(live, load.real, np.nan)),
        q_load_kvar=read_only(np.where(live, load.imag, np.nan)),
        busbar_current_a=read_only(np.where(live, current, np.nan)),
        busbar_rated_a=read_only(rated),
        busbar_loading=read_only(np.where(live, current / rated, np.nan)),
    )


def _angles(s: ModeSolution) -> FloatArray:
    """Return each board's angle against the first board of its island, in degrees."""
    island = np.array(s.at.view.board_island, np.int64)
    out = np.full(len(island), np.nan)
    for n in range(len(s.at.view.islands)):
        here = island == n
        v = s.board_v_pu[here]
        if s.solved and here.any():
            out[here] = np.rad2deg(np.angle(v / v[0]))
    return out


def _load_at_boards(s: ModeSolution) -> ComplexArray:
    """Return what hangs on each board itself, consumers with a cable of their own included, in kVA."""
    topology, plant = s.at.network.topology, s.at.network.plant
    index = {b.name: k for k, b in enumerate(plant.boards)}
    out = np.zeros(len(plant.boards), complex)
    for node, power in zip(s.at.view.load_node, s.load_s_kva, strict=True):
        out[index[topology.nodes[node].board]] += power
    for motor, power in zip(plant.synchronous_motors, s.motor_s_kva, strict=True):
        out[index[motor.board]] += power
    return out


def _busbar_current_a(s: ModeSolution, nominal_v: FloatArray) -> FloatArray:
    """Return the current that crosses each busbar: all that comes in, which equals all that goes out."""
    at, count = s.at, len(nominal_v)
    node_of, branches = at.network.topology.node_of, at.network.branches
    nodes = [np.array([x.node for x in at.sources], np.int64), np.array(at.view.load_node, np.int64)]
    into = [s.source_s_kva, -s.load_s_kva]
    motors = [node_of[m.name] for m in at.network.plant.synchronous_motors]
    nodes += [np.array(motors, np.int64), np.array(at.network.topology.filter_node, np.int64)]
    into += [-s.motor_s_kva, s.filter_s_kva]
    nodes += [branches.from_node[s.branch], branches.to_node[s.branch]]
    into += [-s.s_from_kva, -s.s_to_kva]
    node, power = np.concatenate(nodes), np.concatenate(into)
    on_board = node < count
    node, power = node[on_board], power[on_board]
    sums = np.zeros((2, count), complex)
    for row, chosen in enumerate((~(power.real <= 0.0), ~(power.real > 0.0))):
        np.add.at(sums[row], node[chosen], power[chosen])
    with np.errstate(divide="ignore", invalid="ignore"):
        current = 1000.0 * np.abs(sums) / (3.0**0.5 * np.abs(s.board_v_pu) * nominal_v)
    return np.asarray(current.max(axis=0))
