"""The ways of fault currents through the branches of one mode and case."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.formulas.fault_iec60909_nodal import impedance_matrix
from study.network.fault_network import FaultNetwork
from study.network.union_find import UnionFind
from study.network.view import DEAD
from study.results.arrays import read_only
from study.results.fault_routes import FaultRoutes

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

REFERENCE_PU = 100.0  # admittance at one bus of each island; nothing flows through it


@dataclass(frozen=True, slots=True, kw_only=True)
class Ends:
    """Ends of closed branches: places in the topology, [end]."""

    branch: IntArray
    node: IntArray
    far_node: IntArray


def fault_routes(net: FaultNetwork) -> tuple[Ends, FaultRoutes]:
    """Return the ends of all closed branches at fault places, and the ways of fault currents through them.

    Source: nodal analysis.

    Parameters
    ----------
    net : FaultNetwork
        The network.

    Returns
    -------
    ends : Ends
        Of branches between buses, of paths to terminals, of ties without impedance.
    routes : FaultRoutes
        With the same rows.
    """
    z, turns = _to_reference(net)
    inner, leaves = _inner(net, z)
    stubs, terminal, inward = _stubs(net)
    ties, through, determined = _ties(net, inner, leaves)
    branch, node, far = (np.concatenate(x) for x in zip(inner, stubs, ties, strict=True))
    places, sources = len(net.place_bus), len(net.sources.bus)
    lines = len(leaves) + len(ties[0])
    # what a path carries is known without a table: it has the last, empty line
    line = np.concatenate(
        [np.arange(len(leaves)), np.full(len(stubs[0]), lines), np.arange(len(leaves), lines)]
    )
    keep = net.plant.place_of_node[node] >= 0
    place = net.plant.place_of_node[node[keep]]
    of_inner, of_ties = np.full(len(leaves), -1), np.full(len(ties[0]), -1)
    nodes = net.plant.network.topology.nodes
    routes = FaultRoutes(
        ends=tuple(nodes[n].owner for n in node[keep]),
        determined=read_only(np.concatenate([of_inner < 0, terminal >= 0, determined])[keep], np.bool_),
        terminal=read_only(np.concatenate([of_inner, terminal, of_ties])[keep], np.int64),
        inward=read_only(np.concatenate([0.0 * of_inner, inward, 0.0 * of_ties])[keep]),
        line=read_only(line[keep], np.int64),
        pull=read_only(np.concatenate([leaves, through.pull, np.zeros((1, leaves.shape[1]))])),
        from_source=read_only(
            np.concatenate([np.zeros((len(leaves), sources)), through.from_source, np.zeros((1, sources))])
        ),
        to_place=read_only(
            np.concatenate([np.zeros((len(leaves), places)), through.to_place, np.zeros((1, places))]),
            np.bool_,
        ),
        end_bus=read_only(net.place_bus[place], np.int64),
        source_bus=read_only(net.sources.bus, np.int64),
        source_island=read_only(net.sources.island, np.int64),
        place_bus=read_only(net.place_bus, np.int64),
        place_island=read_only(net.place_island, np.int64),
        turns=read_only(turns),
        hours=read_only(_hours(net), np.int64),
        base_a=read_only(_bus_base(net)),
        own_source=read_only(np.where(net.place_bus >= 0, net.place_own, -1), np.int64),
        units=read_only(net.sources.units),
    )
    return Ends(branch=branch[keep], node=node[keep], far_node=far[keep]), routes


_Columns = tuple[IntArray, IntArray, IntArray]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Lines:
    pull: FloatArray
    from_source: FloatArray
    to_place: FloatArray


def _to_reference(net: FaultNetwork) -> tuple[ComplexArray, FloatArray]:
    """Return Z of the branches alone against one bus of each island, and each bus's voltage there."""
    islands, reference, of_bus = np.unique(net.bus_island, return_index=True, return_inverse=True)
    matrix = net.admittance.copy()
    matrix[reference, reference] += REFERENCE_PU
    z = impedance_matrix(matrix) if len(islands) else matrix
    return z, np.abs(z[np.arange(len(z)), reference[of_bus]]) * REFERENCE_PU


def _bus_base(net: FaultNetwork) -> FloatArray:
    base = np.zeros(len(net.bus_island))
    alive = net.bus_of_node >= 0
    base[net.bus_of_node[alive]] = net.plant.base_a[alive]
    return base


def _inner(net: FaultNetwork, z: ComplexArray) -> tuple[_Columns, FloatArray]:
    """Return both ends of the branches between buses, and what leaves them for 1 at each bus."""
    branches = net.plant.network.branches
    a, b = branches.from_node[net.live], branches.to_node[net.live]
    y, t = (1.0 / net.z)[:, None], net.ratio[:, None]
    first, last = z[net.from_bus], z[net.to_bus]
    leaves = np.concatenate([y / t * (first / t - last), y * (last - first / t)]).real
    return tuple(np.concatenate(x) for x in ((net.live, net.live), (a, b), (b, a))), leaves  # type: ignore[return-value]


def _stubs(net: FaultNetwork) -> tuple[_Columns, IntArray, FloatArray]:
    """Return both ends of the paths to terminals, the terminal's place, and the part of it that each carries.

    The part is negative at the terminal; rows of cables side by side share by their admittance.
    """
    branches = net.plant.network.branches
    closed = np.flatnonzero(np.array(net.view.closed, bool))
    z = net.plant.z_cold if net.options.maximum else net.plant.z_hot
    columns: list[list[int]] = [[], [], []]
    places: list[int] = []
    parts: list[float] = []
    place_of = net.plant.place_of_node
    for end, other in (
        (branches.from_node, branches.to_node),
        (branches.to_node, branches.from_node),
    ):
        place = place_of[end[closed]]
        here = (place >= 0) & (net.stub[place] >= 0) & (net.place_bus[place] >= 0)
        for k, p in zip(closed[here].tolist(), place[here].tolist(), strict=True):
            for values, value in zip(columns, (k, int(other[k]), int(end[k])), strict=True):
                values.append(value)
            places.append(p)
            parts.append(float((net.place_z[p] / z[k]).real))
    branch, board, terminal = (np.array(x, np.int64) for x in columns)
    both = (branch, branch), (board, terminal), (terminal, board)
    inward = np.concatenate([parts, -np.array(parts, float)])
    return (
        tuple(np.concatenate(x) for x in both),  # type: ignore[return-value]
        np.array(places + places, np.int64),
        inward,
    )


def _ties(net: FaultNetwork, inner: _Columns, leaves: FloatArray) -> tuple[_Columns, _Lines, BoolArray]:
    """Return both ends of ties without impedance: through each comes what the far side lacks.

    Where a ring of ties leaves the way open, all of it is taken as coming through each.
    """
    topology, view = net.plant.network.topology, net.view
    ties = [
        k
        for k, b in enumerate(topology.branches)
        if b.without_impedance and view.closed[k] and view.island[b.from_node] != DEAD
    ]
    stands = _boards_of(net, np.array([s.node for s in net.sources.supplies], np.int64))
    lies = _boards_of(net, net.plant.place_node)
    rows: list[tuple[int, int, int, FloatArray, FloatArray, FloatArray, bool]] = []
    for k in ties:
        rest = UnionFind(len(topology.nodes))
        for other in ties:
            if other != k:
                rest.join(topology.branches[other].from_node, topology.branches[other].to_node)
        roots = np.array(rest.roots())
        ends = topology.branches[k].from_node, topology.branches[k].to_node
        parted = bool(roots[ends[0]] != roots[ends[1]])
        for near, far in (ends, ends[::-1]):
            side = roots[far]
            pull = leaves[roots[inner[1]] == side].sum(axis=0) * parted
            gives = (roots[stands] == side).astype(float) * parted
            takes = (roots[lies] == side).astype(float) if parted else np.ones(len(lies))
            rows.append((k, near, far, pull, gives, takes, parted))
    shapes = (leaves.shape[1], len(net.sources.bus), len(net.place_bus))
    tables = [
        np.array([r[3 + i] for r in rows], float).reshape(len(rows), width) for i, width in enumerate(shapes)
    ]
    columns = tuple(np.array([r[i] for r in rows], np.int64) for i in range(3))
    lines = _Lines(pull=tables[0], from_source=tables[1], to_place=tables[2])
    return columns, lines, np.array([r[6] for r in rows], bool)  # type: ignore[return-value]


def _boards_of(net: FaultNetwork, nodes: IntArray) -> IntArray:
    """Return the board's node that each node hangs on by a path of its own, or the node itself."""
    place = net.plant.place_of_node[nodes]
    stub = np.where(place >= 0, net.stub[place], -1)
    branches = net.plant.network.branches
    out, hangs = nodes.copy(), np.flatnonzero(stub >= 0)
    a, b = branches.from_node[stub[hangs]], branches.to_node[stub[hangs]]
    out[hangs] = np.where(a == nodes[hangs], b, a)
    return out


def _hours(net: FaultNetwork) -> IntArray:
    """Return the lag of every bus behind the first of its island, in twelfths of a turn.

    Source: clock numbers of vector groups, IEC 60076-1.
    """
    count = len(net.bus_island)
    around: dict[int, list[tuple[int, int]]] = {}
    for n, (a, b) in enumerate(zip(net.from_bus.tolist(), net.to_bus.tolist(), strict=True)):
        shift = _clock(net, int(net.live[n]))
        around.setdefault(a, []).append((b, shift))
        around.setdefault(b, []).append((a, -shift))
    hours = np.full(count, -1, np.int64)
    for start in range(count):
        if hours[start] >= 0:
            continue
        hours[start], stack = 0, [start]
        while stack:
            bus = stack.pop()
            for other, shift in around.get(bus, []):
                if hours[other] < 0:
                    hours[other] = (hours[bus] + shift) % 12
                    stack.append(other)
    return hours


def _clock(net: FaultNetwork, k: int) -> int:
    plant, branch = net.plant.network.plant, net.plant.network.topology.branches[k]
    if branch.kind == "transformer":
        group = plant.transformers[branch.index].vector_group
    elif branch.winding in ("secondary", "tertiary"):
        group = plant.three_winding[branch.index].vector_group
    else:
        return 0
    numbers = [int(x) for x in re.findall(r"\d+", group)] or [0]
    return numbers[-1] if branch.winding == "tertiary" else numbers[0]
