"""Flow through closed ties without impedance, by Kirchhoff's current law."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from study.network.topology import Topology
from study.network.union_find import UnionFind
from study.network.view import DEAD, View

ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]


def tie_flows(
    topology: Topology, view: View, node_s_kva: ComplexArray
) -> tuple[IntArray, ComplexArray, BoolArray]:
    """Return the power through each closed tie without impedance, from its first board to its second.

    A tie whose opening would part the boards carries what one side has too much. In a closed ring the split
    is undetermined.

    Parameters
    ----------
    topology : Topology
        Nodes and branches.
    view : View
        What is closed.
    node_s_kva : ndarray, shape (node,)
        What comes into each node less what leaves it, without the ties. [kVA]

    Returns
    -------
    tuple of ndarray
        Place of each tie in the topology; power [kVA], NaN where undetermined; whether it is determined.
    """
    ties = [
        k
        for k, b in enumerate(topology.branches)
        if b.without_impedance and view.closed[k] and view.island[b.from_node] != DEAD
    ]
    power = np.full(len(ties), np.nan, complex)
    for n, k in enumerate(ties):
        rest = UnionFind(len(topology.nodes))
        for other in ties:
            if other != k:
                rest.join(topology.branches[other].from_node, topology.branches[other].to_node)
        roots = np.array(rest.roots())
        here = roots[topology.branches[k].from_node]
        if here != roots[topology.branches[k].to_node]:
            power[n] = node_s_kva[roots == here].sum()
    return np.array(ties, np.int64), power, ~np.isnan(power)
