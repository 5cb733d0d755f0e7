"""Consumers while they run: what their own runs then carry, without simultaneity or diversity.

The load flow takes what the load balance counts of each consumer: right for boards and feeders, too little
for the run to a consumer that counts in part or not at all.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from study.network.solution import ModeSolution

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]

_REPEATS = 60
_FOUND = 1e-12  # pu of voltage, of the last repetition


def while_running(s: ModeSolution, p_kw: FloatArray, q_kvar: FloatArray) -> ModeSolution:
    """Return a solved mode with every consumer in use running, its board at the voltage of the load flow.

    Only consumers' terminals and the runs that serve one consumer alone change. Where such a run cannot carry
    its consumer at any voltage, its numbers are NaN.

    Parameters
    ----------
    s : ModeSolution
        As solved, with what counts of each consumer.
    p_kw, q_kvar : ndarray, shape (load,)
        Power of all units in use at rated voltage, whatever counts of it. [kW], [kvar]

    Returns
    -------
    ModeSolution
        Its powers no longer add up over a board.
    """
    if not s.solved:
        return s
    at = s.at
    own = _own_runs(s)
    node = np.array(at.view.load_node, np.int64)
    v_node = s.node_v_pu.copy()
    power = np.where(s.load_fed, p_kw + 1j * q_kvar, 0.0)
    v_node[node[own.load]] = _terminal_voltages(s, own, power[own.load])
    v = np.where(s.load_fed, v_node[node], 0.0) * at.load_arrays.v_scale
    share, squared = at.load_arrays.constant_power, np.abs(v) ** 2
    alone = s.load_fed & (own.alone | np.array([at.network.topology.nodes[k].kind == "board" for k in node]))
    drawn = np.where(alone, power * (share + (1.0 - share) * squared), s.load_s_kva)
    (s_from, i_from), (s_to, i_to) = _flows(s, own, v_node)
    return replace(
        s,
        node_v_pu=v_node,
        terminal_v_pu=np.where(own.alone, v, s.terminal_v_pu),
        load_s_kva=drawn,
        s_from_kva=s_from,
        s_to_kva=s_to,
        i_from_a=i_from,
        i_to_a=i_to,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _OwnRuns:
    """Runs that serve one consumer alone, from one node: ``run`` [run] are places among the live branches.

    ``load`` [consumer] are the consumers, ``serves`` [run] their places in it, ``parent`` [consumer] the
    nodes that the runs come from; ``near`` [run] is True where the run's 'to' end is the consumer.
    ``alone`` [load] marks the consumers.
    """

    run: IntArray
    load: IntArray
    serves: IntArray
    parent: IntArray
    near: NDArray[np.bool_]
    alone: NDArray[np.bool_]


def _own_runs(s: ModeSolution) -> _OwnRuns:
    at, branches = s.at, s.at.network.branches
    node = np.array(at.view.load_node, np.int64)
    ends = branches.from_node[at.live], branches.to_node[at.live]
    load = branches.load[at.live]
    run = np.flatnonzero(load >= 0)
    run = run[s.load_fed[load[run]]]
    run = run[(ends[0][run] == node[load[run]]) | (ends[1][run] == node[load[run]])]
    near = ends[1][run] == node[load[run]]
    parent = np.where(near, ends[0][run], ends[1][run])
    touching = np.bincount(np.concatenate(ends), minlength=len(at.bus_of_node))
    count = np.bincount(load[run], minlength=len(node))
    lowest, highest = np.full(len(node), len(at.bus_of_node)), np.full(len(node), -1)
    np.minimum.at(lowest, load[run], parent)
    np.maximum.at(highest, load[run], parent)
    alone = (count > 0) & (count == touching[node]) & (lowest == highest)
    kept = alone[load[run]]
    loads = np.flatnonzero(alone)
    return _OwnRuns(
        run=run[kept],
        load=loads,
        serves=np.searchsorted(loads, load[run[kept]]),
        parent=lowest[loads],
        near=near[kept],
        alone=alone,
    )


def _terminal_voltages(s: ModeSolution, own: _OwnRuns, power_kva: ComplexArray) -> ComplexArray:
    """Return the voltage at each consumer: ``(y' + y) V' = -y_m V - conj(S/V')``, by repetition, [consumer].

    y' and y_m are the run's own and mutual admittance, y what the consumer draws with the square of the
    voltage, S what it draws whatever the voltage, V the voltage at the other end of the run.
    """
    at = s.at
    yff, yft, ytf, ytt = at.two_port
    self_y = np.where(own.near, ytt[own.run], yff[own.run])
    mutual = np.where(own.near, ytf[own.run], yft[own.run])
    y_own, y_mutual = np.zeros(len(own.load), complex), np.zeros(len(own.load), complex)
    np.add.at(y_own, own.serves, self_y)
    np.add.at(y_mutual, own.serves, mutual)
    share, scale = at.load_arrays.constant_power[own.load], at.load_arrays.v_scale[own.load]
    power = power_kva / at.network.s_base_kva
    y_own = y_own + np.conj((1.0 - share) * power) * scale**2
    open_v = -y_mutual * s.node_v_pu[own.parent] / y_own
    v, change = open_v.copy(), np.zeros(len(open_v))
    with np.errstate(all="ignore"):  # where the run cannot carry the load, the repetition wanders off
        for _ in range(_REPEATS):
            last, v = v, open_v - np.conj(share * power / v) / y_own
            change = np.abs(v - last)
            if np.all(change < _FOUND):
                break
    return np.asarray(np.where(change < _FOUND, v, np.nan))


def _flows(s: ModeSolution, own: _OwnRuns, v_node: ComplexArray) -> Iterator[tuple[ComplexArray, FloatArray]]:
    """Yield powers and currents of all branches at both ends, those of the consumers' own runs anew."""
    at, network = s.at, s.at.network
    yff, yft, ytf, ytt = (y[own.run] for y in at.two_port)
    place = np.searchsorted(s.branch, at.live[own.run])
    ends = network.branches.from_node[at.live[own.run]], network.branches.to_node[at.live[own.run]]
    v_from, v_to = v_node[ends[0]], v_node[ends[1]]
    powers = v_from * np.conj(yff * v_from + yft * v_to), v_to * np.conj(ytf * v_from + ytt * v_to)
    factor = network.branches.ampere_factor[at.live[own.run]] / at.units[own.run]
    before = (s.s_from_kva, s.i_from_a), (s.s_to_kva, s.i_to_a)
    for (s_before, i_before), power, node in zip(before, powers, ends, strict=True):
        s_kva, amperes = s_before.copy(), i_before.copy()
        s_kva[place] = power * network.s_base_kva
        u_v = np.abs(v_node[node]) * network.u_base_v[node]
        amperes[place] = 1000.0 * np.abs(s_kva[place]) / (3.0**0.5 * u_v) * factor
        yield s_kva, amperes
