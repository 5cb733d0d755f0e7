"""A mode as a linear network behind the sources' transient impedances: what a sudden start meets.

Every consumer is an impedance of what it draws before; every source an e.m.f. behind Ra + jX'd (or X''d), so
that an admittance put on a bus changes the voltages by one column of the impedance matrix.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from study.network.batch import BatchSolution
from study.network.dynamics_build import demand_of
from study.network.dynamics_sources import CONVERTER_X_PU, STIFF_X_PU
from study.network.sources import Law, Source

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, kw_only=True)
class StartNetwork:
    """The network of a mode before a start, per unit of its base.

    ``v`` [bus] are the voltages before, leaves included. ``z`` [bus, place] are the transfer impedances from
    the places where something may start; ``z_without`` [place] are those at the places with the sources
    alone, no consumer on the boards.
    """

    v: ComplexArray
    z: ComplexArray
    place: IntArray
    z_without: ComplexArray


def source_admittances(batch: BatchSolution, *, first_cycle: bool) -> ComplexArray:
    """Return the admittance that each source's e.m.f. is behind, [source].

    Parameters
    ----------
    batch : BatchSolution
        The mode solved.
    first_cycle : bool
        X''d in place of X'd.

    Returns
    -------
    ndarray
        0 for converters that follow the grid: they keep their current. [pu of the network]
    """
    plant = batch.at.network.plant

    def own(s: Source) -> complex:
        if s.machine is not None:
            m = plant.genset(s.name).machine
            return 1.0 / complex(m.r_stator_pu, m.x_d2_pu if first_cycle else m.x_d1_pu)
        if s.kind == "shore supply":
            return 1.0 / (complex(s.r_pu, s.xc_pu) or 1j * STIFF_X_PU)
        return 0j if s.law == Law.REACTIVE_POWER else 1.0 / (1j * CONVERTER_X_PU)

    to_network = batch.laws.to_own_v[:, 0] / batch.laws.to_own_i[:, 0]
    return np.asarray(np.array([own(s) for s in batch.at.sources], complex) * to_network, complex)


def start_network(
    batch: BatchSolution, load: tuple[FloatArray, FloatArray], place: IntArray, *, first_cycle: bool
) -> StartNetwork:
    """Return the network before a start.

    Parameters
    ----------
    batch : BatchSolution
        The mode solved; the first scenario is taken.
    load : tuple of ndarray, shape (load,)
        kW and kvar that it was solved for.
    place : ndarray of int, shape (place,)
        Buses where something may start, leaves allowed.
    first_cycle : bool
        X''d in place of X'd.

    Returns
    -------
    StartNetwork
        Per unit of the network.
    """
    at, v = batch.at, batch.v_bus_pu[0]
    structure, ports = at.structure, at.structure.ports
    n = structure.buses
    bare = np.asarray(structure.admittance.toarray(), complex)
    y_source = source_admittances(batch, first_cycle=first_cycle)
    np.add.at(bare, (structure.source_bus, structure.source_bus), y_source)
    loads = _load_admittances(batch, load)
    with_loads = bare.copy()
    with_loads[np.arange(n), np.arange(n)] += loads[:n]
    leaves = _Leaves(
        parent=ports.bus[ports.parent],
        into=ports.into[:, 0],
        out=ports.out[:, 0],
        own=1.0 / (ports.own[:, 0] + loads[n:]),
    )
    unloaded = replace(leaves, own=1.0 / ports.own[:, 0])
    z = _columns(with_loads, place, leaves)
    z_bare = _columns(bare, place, unloaded)
    return StartNetwork(v=v, z=z, place=place, z_without=z_bare[place, np.arange(len(place))])


@dataclass(frozen=True, slots=True, kw_only=True)
class _Leaves:
    """Leaves, [leaf]: the bus behind, the branch's admittances, and the impedance at the leaf itself."""

    parent: IntArray
    into: ComplexArray
    out: ComplexArray
    own: ComplexArray


def _columns(y: ComplexArray, place: IntArray, leaves: _Leaves) -> ComplexArray:
    """Return the columns of the impedance matrix at some places, [bus, place], leaves included."""
    n = len(y)
    y = y.copy()
    np.subtract.at(y, (leaves.parent, leaves.parent), leaves.into * leaves.own * leaves.out)
    at_leaf = place >= n
    leaf = np.where(at_leaf, place - n, 0)
    right = np.zeros((n, len(place)), complex)
    bus = np.where(at_leaf, leaves.parent[leaf] if len(leaves.parent) else 0, place)
    factor = np.where(at_leaf, (-leaves.into * leaves.own)[leaf] if len(leaves.parent) else 1.0, 1.0)
    right[bus, np.arange(len(place))] = factor
    inner = np.linalg.solve(y, right)
    outer = -(leaves.own * leaves.out)[:, None] * inner[leaves.parent]
    outer[leaf[at_leaf], np.flatnonzero(at_leaf)] += leaves.own[leaf[at_leaf]]
    return np.concatenate([inner, outer])


def _load_admittances(batch: BatchSolution, load: tuple[FloatArray, FloatArray]) -> ComplexArray:
    """Return what the consumers are as admittances at the voltages before, [bus], leaves included."""
    at, ports = batch.at, batch.at.structure.ports
    demand = demand_of(at, np.atleast_2d(load[0]), np.atleast_2d(load[1]))
    out = np.zeros(at.structure.all_buses, complex)
    bus = np.concatenate([ports.bus[ports.direct], at.structure.buses + np.arange(ports.leaves)])
    u2 = np.abs(batch.v_bus_pu[0, bus]) ** 2
    out[bus] = np.conj(demand.constant[:, 0] / u2 + demand.impedance[:, 0])
    return out
