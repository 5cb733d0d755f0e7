"""What of a fault comes through each branch that ends at its place."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.formulas.fault_current import SQRT2
from study.network.fault_network import FaultNetwork
from study.network.fault_stages import Stage
from study.network.topology import Branch
from study.network.union_find import UnionFind
from study.network.view import DEAD
from study.results.arrays import read_only
from study.results.short_circuit import BranchEnds

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

_EXACT = 1e-9  # shares so near to nothing or all are nothing or all


@dataclass(frozen=True, slots=True, kw_only=True)
class EndRows:
    """Ends of closed branches at live places, [end]: ``branch`` in the topology, ``node`` of the end.

    ``share`` [end, source] is the part of each source's current at the end's place that comes through.
    """

    branch: IntArray
    node: IntArray
    far_node: IntArray
    place: IntArray
    share: FloatArray
    determined: BoolArray

    def row(self, branch: int, node: int) -> int:
        """Return the row of a branch's end, -1 where it is not closed."""
        hit = np.flatnonzero((self.branch == branch) & (self.node == node))
        return int(hit[0]) if len(hit) else -1


def end_rows(net: FaultNetwork, stage: Stage) -> EndRows:
    """Return the ends of all closed branches with what comes through them.

    With the place's voltage at zero each source alone drives ``y (Z_jk - Z_jp Z_pk/Z_pp)`` through the branch
    from bus j, of ``Z_pk/Z_pp`` in all.

    Source: nodal analysis.

    Parameters
    ----------
    net : FaultNetwork
        The network.
    stage : Stage
        Its subtransient stage.

    Returns
    -------
    EndRows
        Branches between buses, then those to terminals, then ties without impedance.
    """
    inner = _inner(net, stage)
    stubs = _stubs(net)
    ties = _ties(net, inner)
    parts = [inner, stubs, ties]
    branch, node, far = (np.concatenate([p[k] for p in parts]) for k in range(3))
    share = np.concatenate([p[3] for p in parts])
    keep = net.plant.place_of_node[node] >= 0
    determined = np.concatenate([np.ones(len(inner[0]) + len(stubs[0]), bool), ties[4]])
    return EndRows(
        branch=branch[keep],
        node=node[keep],
        far_node=far[keep],
        place=net.plant.place_of_node[node[keep]],
        share=share[keep],
        determined=determined[keep],
    )


_Rows = tuple[IntArray, IntArray, IntArray, FloatArray, BoolArray]


def _inner(net: FaultNetwork, stage: Stage) -> _Rows:
    branches = net.plant.network.branches
    a, b = branches.from_node[net.live], branches.to_node[net.live]
    branch, node, far = (np.concatenate(x) for x in ((net.live, net.live), (a, b), (b, a)))
    p, j = (np.concatenate(x) for x in ((net.from_bus, net.to_bus), (net.to_bus, net.from_bus)))
    y = np.tile(1.0 / (net.z * net.ratio), 2)
    z, k = stage.z_bus, net.sources.bus
    if not len(branch) or not len(k):
        return branch, node, far, np.zeros((len(branch), len(k))), np.ones(len(branch), bool)
    to_fault = z[p[:, None], k[None, :]]
    reaches = net.bus_island[p][:, None] == net.bus_island[k][None, :]
    ratio = z[j[:, None], k[None, :]] * z[p, p][:, None] / np.where(reaches, to_fault, 1.0)
    share = np.where(reaches, (y[:, None] * (ratio - z[j, p][:, None])).real, 0.0)
    share = np.clip(np.where(np.abs(share) < _EXACT, 0.0, share), 0.0, 1.0)
    return branch, node, far, np.where(share > 1.0 - _EXACT, 1.0, share), np.ones(len(branch), bool)


def _stubs(net: FaultNetwork) -> _Rows:
    """Return both ends of the paths to terminals: from the board's side the own source, else all others."""
    s = net.sources
    place = np.flatnonzero((net.stub >= 0) & (net.place_bus >= 0))
    branch = net.stub[place]
    terminal = net.plant.place_node[place]
    branches = net.plant.network.branches
    a, b = branches.from_node[branch], branches.to_node[branch]
    board = np.where(a == terminal, b, a)
    own = net.place_own[place]
    near = np.zeros((len(place), len(s.bus)))
    has = np.flatnonzero(own >= 0)
    near[has, own[has]] = 1.0 / s.units[own[has]]
    live = (net.place_island[place][:, None] == s.island[None, :]).astype(float)
    share = np.concatenate([near, live * (1.0 - near)])
    return (
        np.concatenate([branch, branch]),
        np.concatenate([board, terminal]),
        np.concatenate([terminal, board]),
        share,
        np.ones(2 * len(place), bool),
    )


def _ties(net: FaultNetwork, inner: _Rows) -> _Rows:
    """Return ties without impedance: what stands on the far side; all of it where a ring leaves it open."""
    topology, view, s = net.plant.network.topology, net.view, net.sources
    ties = [
        k
        for k, b in enumerate(topology.branches)
        if b.without_impedance and view.closed[k] and view.island[b.from_node] != DEAD
    ]
    stands = np.array([_hang(net, x.node) for x in s.supplies], np.int64)
    rows: list[tuple[int, int, int, FloatArray, bool]] = []
    for k in ties:
        rest = UnionFind(len(topology.nodes))
        for other in ties:
            if other != k:
                rest.join(topology.branches[other].from_node, topology.branches[other].to_node)
        roots = np.array(rest.roots())
        ends = topology.branches[k].from_node, topology.branches[k].to_node
        parted = roots[ends[0]] != roots[ends[1]]
        for near, far in (ends, ends[::-1]):
            share = (s.island == view.island[near]).astype(float)
            if parted:
                share = inner[3][roots[inner[1]] == roots[far]].sum(axis=0)
                share = np.minimum(share + (roots[stands] == roots[far]), 1.0)
            rows.append((k, near, far, share, bool(parted)))
    if not rows:
        empty = np.zeros(0, np.int64)
        return empty, empty, empty, np.zeros((0, len(s.bus))), np.zeros(0, bool)
    branch, near_node, far_node, shares, parts = zip(*rows, strict=True)
    return (
        np.array(branch, np.int64),
        np.array(near_node, np.int64),
        np.array(far_node, np.int64),
        np.array(shares),
        np.array(parts, bool),
    )


def _hang(net: FaultNetwork, node: int) -> int:
    """Return the board node that a source's node hangs on."""
    place = net.plant.place_of_node[node]
    if place < 0 or net.stub[place] < 0:
        return node
    branch = net.plant.network.topology.branches[net.stub[place]]
    return int(branch.to_node if branch.from_node == node else branch.from_node)


def with_taken_over(rows: EndRows, transient_a: FloatArray, columns: int) -> FloatArray:
    """Return the shares with a last column for what is taken over: as the lasting sources share it.

    Parameters
    ----------
    rows : EndRows
        Of the case.
    transient_a : ndarray, shape (place, source)
        Weights.
    columns : int
        Columns wanted; no more than those of the sources: nothing is added.

    Returns
    -------
    ndarray, shape (end, columns)
        Shares.
    """
    if rows.share.shape[1] == columns:
        return rows.share
    weight = transient_a[rows.place][:, : rows.share.shape[1]]
    total = weight.sum(axis=1)
    mean = np.divide((weight * rows.share).sum(axis=1), total, out=np.zeros_like(total), where=total > 0.0)
    return np.concatenate([rows.share, mean[:, None]], axis=1)


def branch_ends(
    net: FaultNetwork,
    rows: EndRows,
    share: FloatArray,
    currents_a: tuple[FloatArray, FloatArray, FloatArray],
) -> BranchEnds:
    """Return the ends as a result.

    Parameters
    ----------
    net : FaultNetwork
        The network.
    rows : EndRows
        Its ends.
    share : ndarray, shape (end, source)
        With the column of what is taken over.
    currents_a : tuple of ndarray, shape (place, source)
        I'', Iac at T/2, idc at T/2. [A]

    Returns
    -------
    BranchEnds
        [A]
    """
    topology = net.plant.network.topology
    through = [np.einsum("es,es->e", share, x[rows.place]) for x in currents_a]
    total = [x.sum(axis=1)[rows.place] for x in currents_a]
    rest = [t - x for t, x in zip(total, through, strict=True)]
    found: list[Branch] = [topology.branches[k] for k in rows.branch]
    return BranchEnds(
        place=read_only(rows.place, np.int64),
        branches=tuple(b.name for b in found),
        kinds=tuple(b.kind for b in found),
        far_ends=tuple(
            b.to_end if b.from_node == node else b.from_end for b, node in zip(found, rows.node, strict=True)
        ),
        share=read_only(share),
        through_initial_a=read_only(through[0]),
        through_half_a=read_only(through[1]),
        through_ip_a=read_only(SQRT2 * through[1] + through[2]),
        rest_initial_a=read_only(np.maximum(rest[0], 0.0)),
        rest_half_a=read_only(np.maximum(rest[1], 0.0)),
        rest_ip_a=read_only(np.maximum(SQRT2 * rest[1] + rest[2], 0.0)),
        determined=read_only(rows.determined, np.bool_),
    )
