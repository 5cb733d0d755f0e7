"""What of a fault comes through each branch that ends at its place."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.analyses.short_circuit_routes import fault_routes
from study.formulas.fault_current import SQRT2
from study.network.fault_network import FaultNetwork
from study.network.topology import Branch
from study.results.arrays import read_only
from study.results.fault_routes import FaultRoutes
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
    routes: FaultRoutes

    @property
    def determined(self) -> BoolArray:
        """Return False for ties in a closed ring of ties without impedance, [end]."""
        return self.routes.determined

    def row(self, branch: int, node: int) -> int:
        """Return the row of a branch's end, -1 where it is not closed."""
        hit = np.flatnonzero((self.branch == branch) & (self.node == node))
        return int(hit[0]) if len(hit) else -1


def end_rows(net: FaultNetwork) -> EndRows:
    """Return the ends of all closed branches with what comes through them to a fault where they end.

    Parameters
    ----------
    net : FaultNetwork
        The network.

    Returns
    -------
    EndRows
        Branches between buses, then those to terminals, then ties without impedance.
    """
    ends, routes = fault_routes(net)
    place = net.plant.place_of_node[ends.node]
    leaves = routes.shares(np.arange(len(place)), place)
    # Of a tie in a ring of ties no more is known than that all of it may come through.
    share = np.clip(np.where(routes.determined[:, None], -leaves, leaves), 0.0, 1.0)
    share = np.where(share < _EXACT, 0.0, np.where(share > 1.0 - _EXACT, 1.0, share))
    return EndRows(
        branch=ends.branch, node=ends.node, far_node=ends.far_node, place=place, share=share, routes=routes
    )


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
