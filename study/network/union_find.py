"""Groups of nodes that are joined."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array
from scipy.sparse.csgraph import connected_components

IntArray = NDArray[np.int64]


def roots_of(size: int, a: IntArray, b: IntArray) -> list[int]:
    """Return the lowest node of every node's group, all pairs being joined at once.

    Parameters
    ----------
    size : int
        Number of nodes.
    a, b : ndarray of int, shape (pair,)
        Nodes that are joined.

    Returns
    -------
    list of int
        Root of each node.

    Examples
    --------
    >>> roots_of(4, np.array([3, 2]), np.array([1, 2]))
    [0, 1, 2, 1]
    """
    joined = csr_array((np.ones(len(a), np.int8), (a, b)), shape=(size, size))
    group = connected_components(joined, directed=False)[1]
    first = np.unique(group, return_index=True)[1]
    lowest: list[int] = first[group].tolist()
    return lowest


class UnionFind:
    """Groups of nodes that are joined; the root of a group is its lowest node.

    Parameters
    ----------
    size : int
        Number of nodes.

    Examples
    --------
    >>> u = UnionFind(3)
    >>> u.join(2, 1), u.root(2), u.root(0)
    (True, 1, 0)
    """

    def __init__(self, size: int) -> None:
        self._parent = list(range(size))

    def root(self, node: int) -> int:
        """Return the root of a node's group."""
        parent = self._parent
        while parent[node] != node:
            parent[node] = parent[parent[node]]
            node = parent[node]
        return node

    def join(self, a: int, b: int) -> bool:
        """Join two groups; False where they were one already."""
        ra, rb = self.root(a), self.root(b)
        if ra == rb:
            return False
        self._parent[max(ra, rb)] = min(ra, rb)
        return True

    def roots(self) -> list[int]:
        """Return the root of every node."""
        return [self.root(i) for i in range(len(self._parent))]
