"""Leaves of a mode's network taken off: buses with consumers, one branch and nothing else."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array

from study.network.admittance import nodal_admittance
from study.network.consumers import Ports, ports_of

ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
TwoPort = tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]


@dataclass(frozen=True, slots=True, kw_only=True)
class Pruned:
    """A network without its leaves; buses are numbered anew, leaves last and sorted by the bus behind them.

    ``kept`` [branch] marks branches between buses that stay. ``parent``, and the branch's admittances
    ``behind`` (own of the parent), ``into``, ``out`` and ``own``, are [leaf].
    """

    bus_of_node: IntArray
    buses: int
    from_bus: IntArray
    to_bus: IntArray
    kept_two_port: TwoPort
    parent: IntArray
    behind: ComplexArray
    into: ComplexArray
    out: ComplexArray
    own: ComplexArray

    def admittance(self, shunt_bus: IntArray, shunt_pu: ComplexArray) -> csr_array:
        """Return the nodal admittance of what is left, the near ends of the leaves' branches included."""
        here = shunt_bus < self.buses
        return nodal_admittance(
            self.buses,
            self.from_bus,
            self.to_bus,
            self.kept_two_port,
            shunt_bus=np.concatenate([shunt_bus[here], self.parent]),
            shunt_pu=np.concatenate([shunt_pu[here], self.behind]),
        )

    def ports(self, direct_bus: IntArray, shunt_bus: IntArray, shunt_pu: ComplexArray) -> Ports:
        """Return where consumers draw current; shunts on a leaf count as its own."""
        own, there = self.own.copy(), shunt_bus >= self.buses
        np.add.at(own, shunt_bus[there] - self.buses, shunt_pu[there])
        return ports_of(direct_bus, self.parent, self.into, self.out, own)


def prune(
    bus_of_node: IntArray,
    buses: int,
    *,
    from_bus: IntArray,
    to_bus: IntArray,
    two_port: TwoPort,
    source_bus: IntArray,
) -> Pruned:
    """Take the leaves off a network.

    Parameters
    ----------
    bus_of_node : ndarray of int, shape (node,)
        Bus of each node, -1 where dead.
    buses : int
        Number of buses.
    from_bus, to_bus : ndarray of int, shape (branch,)
        Ends of the branches.
    two_port : tuple of ndarray
        Admittances of the branches, [branch] each.
    source_bus : ndarray of int, shape (source,)
        Buses that stay.

    Returns
    -------
    Pruned
        With buses numbered anew.
    """
    degree = np.bincount(np.concatenate([from_bus, to_bus]), minlength=buses)
    leaf = degree == 1
    leaf[source_bus] = False
    at_to, at_from = leaf[to_bus], leaf[from_bus]
    off = at_to | at_from
    yff, yft, ytf, ytt = two_port
    end = np.where(at_to, to_bus, from_bus)[off]
    parent = np.where(at_to, from_bus, to_bus)[off]
    number = np.full(buses, -1, np.int64)
    number[~leaf] = np.arange(np.count_nonzero(~leaf))
    order = np.argsort(number[parent], kind="stable")
    number[end[order]] = np.count_nonzero(~leaf) + np.arange(len(order))
    admittances = [
        np.where(at_to, a, b)[off][order] for a, b in ((yff, ytt), (yft, ytf), (ytf, yft), (ytt, yff))
    ]
    renumbered = np.full(len(bus_of_node), -1, np.int64)
    renumbered[bus_of_node >= 0] = number[bus_of_node[bus_of_node >= 0]]
    return Pruned(
        bus_of_node=renumbered,
        buses=int(np.count_nonzero(~leaf)),
        from_bus=number[from_bus[~off]],
        to_bus=number[to_bus[~off]],
        kept_two_port=(yff[~off], yft[~off], ytf[~off], ytt[~off]),
        parent=number[parent[order]],
        behind=admittances[0],
        into=admittances[1],
        out=admittances[2],
        own=admittances[3],
    )
