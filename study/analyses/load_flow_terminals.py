"""Consumers' terminals of a mode: voltage, current, and the voltage drop from the switchboard to them."""

from __future__ import annotations

from collections import deque
from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from study.network.solution import ModeSolution
from study.results.arrays import read_only
from study.results.load_flow import TerminalState

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

SWITCHBOARDS = ("main", "emergency", "propulsion")


def terminal_state(s: ModeSolution) -> TerminalState:
    """Return the terminals that carry load in a solved mode; empty where it is not solved.

    Parameters
    ----------
    s : ModeSolution
        Of the mode.

    Returns
    -------
    TerminalState
        In workbook order of the consumers.
    """
    plant, topology, at = s.at.network.plant, s.at.network.topology, s.at
    used = [k for k in range(len(plant.loads)) if s.solved and s.load_fed[k] and s.load_s_kva[k] != 0.0]
    paths = _Paths(s)
    walks = [paths.from_switchboard(at.view.load_node[k]) for k in used]
    u_rated = np.array([plant.loads[k].u_rated_v for k in used], float)
    scale = at.load_arrays.v_scale[used]
    node = np.array([at.view.load_node[k] for k in used], np.int64)
    v_terminal = np.abs(s.node_v_pu[node])
    v_start = np.array([np.nan if start is None else abs(s.node_v_pu[start]) for start, _ in walks])
    power = s.load_s_kva[used]
    return TerminalState(
        loads=tuple(plant.loads[k].name for k in used),
        boards=tuple(topology.nodes[at.view.load_node[k]].board for k in used),
        fed_by=tuple(path[-1] for _, path in walks),
        path=tuple(" > ".join(path) for _, path in walks),
        u_rated_v=read_only(u_rated),
        u_v=read_only(v_terminal * scale * u_rated),
        angle_deg=read_only(_angle_deg(s, node)),
        drop_pu=read_only((v_start - v_terminal) * scale),
        p_kw=read_only(power.real),
        q_kvar=read_only(power.imag),
        current_a=read_only(_current(s, used, v_terminal * scale * u_rated)),
    )


def _angle_deg(s: ModeSolution, node: IntArray) -> FloatArray:
    """Return the angle of each node's voltage against the first board of its island."""
    board_island = np.array(s.at.view.board_island, np.int64)
    first = np.array([np.flatnonzero(board_island == n)[0] for n in range(len(s.at.view.islands))], np.int64)
    island = np.array(s.at.view.island, np.int64)[node]
    return np.rad2deg(np.angle(s.node_v_pu[node] / s.board_v_pu[first[island]]))


def _current(s: ModeSolution, used: list[int], u_v: FloatArray) -> FloatArray:
    """Return the current of all units in use, as their own phases carry it."""
    loads = s.at.network.plant.loads
    factor = np.array([3.0**0.5 if loads[k].phases == 3 else 1.0 for k in used])
    return np.asarray(1000.0 * np.abs(s.load_s_kva[used]) / (factor * u_v))


class _Paths:
    """Ways upstream through cables, ties and reactors, as far as a switchboard or a transformer."""

    def __init__(self, s: ModeSolution) -> None:
        self.topology = s.at.network.topology
        roles = {b.name: b.role for b in s.at.network.plant.boards}
        branches = self.topology.branches
        closed = [branches[k] for k in s.branch]
        fed_by_transformer = {
            b.to_node for b in closed if b.kind == "transformer" or b.winding in ("secondary", "tertiary")
        }
        self.starts = fed_by_transformer | {
            k
            for k, n in enumerate(self.topology.nodes)
            if n.kind == "board" and roles[n.owner] in SWITCHBOARDS
        }
        self.around: dict[int, list[tuple[int, str]]] = {}
        for b in closed:
            if b.kind in ("cable", "tie", "reactor"):
                self.around.setdefault(b.from_node, []).append((b.to_node, b.name))
                self.around.setdefault(b.to_node, []).append((b.from_node, b.name))
        self.known: dict[int, tuple[int | None, list[str]]] = {}

    def from_switchboard(self, node: int) -> tuple[int | None, list[str]]:
        """Return the node where the way begins, and the names on it from there to `node`."""
        if node not in self.known:
            one_way = len(self.around.get(node, ())) == 1 and node not in self.starts
            self.known[node] = self._beyond(node) if one_way else self._walk(node)
        return self.known[node]

    def _beyond(self, node: int) -> tuple[int | None, list[str]]:
        """Return the way to the end of a branch: that to its other end, which many have in common."""
        ((nearer, name),) = self.around[node]
        if nearer not in self.known:
            self.known[nearer] = self._walk(nearer)
        start, path = self.known[nearer]
        if start is None:
            return None, [self.topology.nodes[node].board]
        here = self.topology.nodes[nearer]
        passed = [here.owner] if nearer != start and here.kind == "board" else []
        return start, [*path, *passed, name]

    def _walk(self, node: int) -> tuple[int | None, list[str]]:
        came_from: dict[int, tuple[int, str]] = {node: (node, "")}
        queue = deque([node])
        while queue:
            here = queue.popleft()
            if here in self.starts:
                return here, self._names(here, node, came_from)
            for neighbour, name in self.around.get(here, ()):
                if neighbour not in came_from:
                    came_from[neighbour] = (here, name)
                    queue.append(neighbour)
        return None, [self.topology.nodes[node].board]

    def _names(self, start: int, node: int, came_from: Mapping[int, tuple[int, str]]) -> list[str]:
        nodes = self.topology.nodes
        out = [nodes[start].owner]
        here = start
        while here != node:
            here, name = came_from[here]
            out.append(name)
            if here != node and nodes[here].kind == "board":
                out.append(nodes[here].owner)
        return out
