"""The plant as a network, and the network of one mode: what both solvers start from."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.sparse import csr_array

from study.issues import SolveError
from study.model.modes import Mode
from study.model.plant import Plant
from study.network.admittance import branch_admittances, filter_admittance
from study.network.arrays import (
    BranchArrays,
    LoadArrays,
    base_power_kva,
    branch_arrays,
    load_arrays,
    transformer_ratio,
)
from study.network.equations import Structure, structure
from study.network.fields import SetGroup, set_groups
from study.network.laws import VoltageLaws, voltage_laws
from study.network.power import PowerLaws, power_laws
from study.network.pruning import prune
from study.network.refusals import refusal
from study.network.sources import Source, sources_of
from study.network.topology import Topology, build_topology
from study.network.view import DEAD, View, view_of

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Network:
    """A plant with its nodes, branches and bases; ``u_base_v`` is [node]."""

    plant: Plant
    topology: Topology
    branches: BranchArrays
    s_base_kva: float
    u_base_v: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class ModeNetwork:
    """The network of one mode.

    ``bus_of_node`` [node] and ``load_bus`` [load] are -1 where dead or switched off; leaves (see `consumers`)
    are the last buses. ``live`` lists the
    closed branches with impedance (places in the topology); ``two_port``, ``ratio`` and ``units`` are [live].
    ``order`` [island] is frequency over rated: not 1 on a shore supply of another frequency.
    ``constant_sum`` and ``square_sum`` [place, load] add up the consumers' power at their places, the part
    that is constant and the part that follows the square of the voltage. ``filter_pu`` [filter] is 0 where
    the filter is off or dead, ``motor_kva`` [synchronous motor] likewise.
    ``laws`` and ``power`` are those of the sources as set in the workbook, within their limits.
    ``refusals`` [island] say why an island cannot be solved, or are empty.
    """

    network: Network
    mode: Mode
    view: View
    sources: tuple[Source, ...]
    structure: Structure
    bus_of_node: IntArray
    load_bus: IntArray
    load_arrays: LoadArrays
    motor_kva: ComplexArray
    live: IntArray
    two_port: tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]
    ratio: FloatArray
    units: FloatArray
    order: FloatArray
    filter_pu: ComplexArray
    constant_sum: csr_array
    square_sum: csr_array
    port_constant: ComplexArray
    set_groups: tuple[SetGroup, ...]
    source_u_base_v: FloatArray
    laws: VoltageLaws
    power: PowerLaws
    refusals: tuple[str, ...]

    @property
    def source_names(self) -> tuple[str, ...]:
        """Names of the sources on line, in the order of every [source] array."""
        return tuple(s.name for s in self.sources)


def build_network(plant: Plant) -> Network:
    """Return the network of a plant.

    Parameters
    ----------
    plant : Plant
        The whole plant.

    Returns
    -------
    Network
        Serves every mode.

    Raises
    ------
    WorkbookError
        Cables whose ends do not meet, or boards of different voltage joined without a transformer.
    SolveError
        An impedance that is not a number, or a negative resistance.
    """
    topology = build_topology(plant)
    s_base = base_power_kva(plant)
    branches = branch_arrays(plant, topology, s_base)
    _refuse_nonsense(topology, branches)
    return Network(
        plant=plant,
        topology=topology,
        branches=branches,
        s_base_kva=s_base,
        u_base_v=np.array([n.u_base_v for n in topology.nodes]),
    )


def _refuse_nonsense(topology: Topology, branches: BranchArrays) -> None:
    values = np.stack([branches.r_pu, branches.x_pu, branches.g_pu, branches.b_pu, branches.ratio])
    bad = ~np.isfinite(values).all(axis=0)
    star = np.array([b.kind == "three-winding transformer" for b in topology.branches], bool)
    bad |= (branches.r_pu < 0.0) & ~star
    joint = np.array([b.without_impedance for b in topology.branches], bool)
    bad |= (np.hypot(branches.r_pu, branches.x_pu) == 0.0) & ~joint
    if bad.any():
        names = ", ".join(dict.fromkeys(topology.branches[k].name for k in np.flatnonzero(bad)))
        raise SolveError(f"impedance of {names}: not a number, zero, or a negative resistance")


def mode_network(network: Network, mode: Mode | str) -> ModeNetwork:
    """Return the network of one mode.

    Parameters
    ----------
    network : Network
        Of the plant.
    mode : Mode or str
        The mode or its name.

    Returns
    -------
    ModeNetwork
        Ready to be solved for any load.
    """
    plant, topology = network.plant, network.topology
    mode = plant.mode(mode) if isinstance(mode, str) else mode
    view = view_of(plant, mode, topology)
    sources = sources_of(plant, mode, topology, view)
    bus_of_node, buses = _number_buses(view)
    order = _orders(sources, len(view.islands))
    island = np.array(view.island, np.int64)
    live = _live_branches(topology, view)
    ratio = _ratios(network, mode, live)
    units = _units(network, mode, live)
    from_node, to_node = network.branches.from_node[live], network.branches.to_node[live]
    two_port = branch_admittances(
        _some(network.branches, live), ratio, units, order[island[from_node]] if len(live) else 1.0
    )
    filter_pu = _filters(network, mode, view, order)
    filter_on = filter_pu != 0.0
    source_node = np.array([s.node for s in sources], np.int64)
    tree = prune(
        bus_of_node,
        buses,
        from_bus=bus_of_node[from_node],
        to_bus=bus_of_node[to_node],
        two_port=two_port,
        source_bus=bus_of_node[source_node],
    )
    bus_of_node = tree.bus_of_node
    filter_bus = bus_of_node[np.array(topology.filter_node, np.int64)[filter_on]]
    load_bus = np.where(view.load_fed, bus_of_node[np.array(view.load_node, np.int64)], DEAD)
    motor_bus, motor_kva = _motors(network, mode, view, bus_of_node)
    used = np.unique(np.concatenate([load_bus[load_bus >= 0], motor_bus[motor_kva != 0.0]]))
    direct = used[used < tree.buses]
    places = np.concatenate([direct, np.arange(tree.buses, buses)])
    arrays = load_arrays(plant, network.u_base_v[np.array(view.load_node, np.int64)])
    share, follows = arrays.constant_power, (1.0 - arrays.constant_power) * arrays.v_scale**2
    return ModeNetwork(
        network=network,
        mode=mode,
        view=view,
        sources=sources,
        structure=structure(
            tree.admittance(filter_bus, filter_pu[filter_on]),
            bus_of_node[source_node],
            np.array([s.island for s in sources], np.int64),
            tree.ports(direct, filter_bus, filter_pu[filter_on]),
            len(view.islands),
        ),
        bus_of_node=bus_of_node,
        load_bus=load_bus,
        load_arrays=arrays,
        motor_kva=motor_kva,
        live=live,
        two_port=two_port,
        ratio=ratio,
        units=units,
        order=order,
        filter_pu=filter_pu,
        constant_sum=_sum_at(load_bus, places, share / network.s_base_kva),
        square_sum=_sum_at(load_bus, places, follows / network.s_base_kva),
        port_constant=_sum_at(motor_bus, places, np.full(len(motor_bus), 1.0 / network.s_base_kva))
        @ motor_kva,
        source_u_base_v=network.u_base_v[source_node],
        **_of_sources(sources, network.u_base_v[source_node], network.s_base_kva, view),
    )


def with_settings(at: ModeNetwork, plant: Plant, mode: Mode) -> ModeNetwork:
    """Return the network of a mode in which nothing but settings of sets and converters differs.

    Parameters
    ----------
    at : ModeNetwork
        As it is.
    plant : Plant
        With other droops, or the same.
    mode : Mode
        With other set-points of sets and converters, or the same.

    Returns
    -------
    ModeNetwork
        As `mode_network` would make it.
    """
    network = at.network
    sources = sources_of(plant, mode, network.topology, at.view)
    return replace(
        at,
        network=replace(network, plant=plant),
        mode=mode,
        sources=sources,
        **_of_sources(sources, at.source_u_base_v, network.s_base_kva, at.view),
    )


def _of_sources(
    sources: tuple[Source, ...], u_base_v: FloatArray, s_base_kva: float, view: View
) -> dict[str, Any]:
    """Return what hangs on the settings of the sources."""
    return {
        "set_groups": set_groups(sources),
        "laws": voltage_laws(
            sources,
            u_base_v,
            s_base_kva,
            v_ref_pu=_column(sources, "v_ref_pu"),
            xc_pu=_column(sources, "xc_pu"),
        ),
        "power": power_laws(
            sources,
            len(view.islands),
            s_base_kva,
            f_no_load_pu=_column(sources, "f_no_load_pu"),
            speed_droop_pu=_column(sources, "speed_droop_pu"),
            at_limit=np.zeros(len(sources), np.int64),
        ),
        "refusals": tuple(
            island.refusal or refusal([s for s in sources if s.island == n])
            for n, island in enumerate(view.islands)
        ),
    }


def _column(sources: Sequence[Source], name: str) -> FloatArray:
    return np.array([getattr(s, name) for s in sources], float).reshape(-1, 1)


def _number_buses(view: View) -> tuple[IntArray, int]:
    root, island = np.array(view.bus, np.int64), np.array(view.island, np.int64)
    out = np.full(len(root), DEAD, np.int64)
    alive = island != DEAD
    buses, place = np.unique(root[alive], return_inverse=True)
    out[alive] = place
    return out, len(buses)


def _orders(sources: Sequence[Source], islands: int) -> FloatArray:
    order = np.ones(islands)
    for s in sources:
        if s.kind == "shore supply":
            order[s.island] = s.f_no_load_pu
    return order


def _live_branches(topology: Topology, view: View) -> IntArray:
    return np.array(
        [
            k
            for k, b in enumerate(topology.branches)
            if view.closed[k] and not b.without_impedance and view.island[b.from_node] != DEAD
        ],
        np.int64,
    )


def _some(branches: BranchArrays, k: IntArray) -> BranchArrays:
    return BranchArrays(**{name: getattr(branches, name)[k] for name in BranchArrays.__slots__})


def _ratios(network: Network, mode: Mode, live: IntArray) -> FloatArray:
    """Return the ratios, with the taps that the mode's set-points name."""
    ratio = network.branches.ratio[live].copy()
    for n, k in enumerate(live):
        branch = network.topology.branches[k]
        point = mode.set_points.get(branch.name)
        if point is None or point.tap_pu is None:
            continue
        u_from, u_to = network.u_base_v[branch.from_node], network.u_base_v[branch.to_node]
        if branch.kind == "transformer":
            ratio[n] = transformer_ratio(network.plant.transformers[branch.index], point.tap_pu, u_from, u_to)
        elif branch.winding == "primary":
            ratio[n] = transformer_ratio(
                network.plant.three_winding[branch.index], point.tap_pu, u_from, u_to
            )
    return ratio


def _units(network: Network, mode: Mode, live: IntArray) -> FloatArray:
    """Return how many equal runs lie in parallel: one to each unit of a consumer that is in use."""
    in_use = np.array([_in_use(mode, x.name) for x in network.plant.loads] or [1.0])
    load = network.branches.load[live]
    return np.where(load >= 0, in_use[load], 1.0)


def _in_use(mode: Mode, load: str) -> float:
    demand = mode.demand.get(load)
    return demand.in_use if demand is not None and demand.in_use > 0.0 else 1.0


def _filters(network: Network, mode: Mode, view: View, order: FloatArray) -> ComplexArray:
    out = np.zeros(len(network.plant.filters), complex)
    for n, item in enumerate(network.plant.filters):
        node = network.topology.filter_node[n]
        if mode.is_on(item.name) and view.island[node] != DEAD:
            h = float(order[view.island[node]])
            out[n] = filter_admittance(item, network.u_base_v[node], network.s_base_kva, h)
    return out


def _motors(network: Network, mode: Mode, view: View, bus_of_node: IntArray) -> tuple[IntArray, ComplexArray]:
    """Return bus and power of the synchronous motors: set power or rated input, and no kvar.

    Demand has no row for them, and their excitation is not given; as in the load balance no credit is taken
    for the kvar that they could supply.
    """
    motors = network.plant.synchronous_motors
    bus = np.array([bus_of_node[network.topology.node_of[m.name]] for m in motors], np.int64)
    power = np.zeros(len(motors), complex)
    for n, m in enumerate(motors):
        if m.name in view.motors_on:
            point = mode.set_points.get(m.name)
            given = point.p_set_kw if point is not None else None
            power[n] = m.p_output_kw / m.efficiency if given is None else abs(given)
    return bus, power


def _sum_at(bus: IntArray, places: IntArray, weight: FloatArray) -> csr_array:
    """Return the matrix that adds up, with weights, what stands at each place; places ascending."""
    on = np.flatnonzero(np.isin(bus, places) & (bus >= 0) & (weight != 0.0))
    rows = np.searchsorted(places, bus[on])
    return csr_array((weight[on], (rows, on)), shape=(len(places), len(bus)))


def checked_loads(at: ModeNetwork, p_kw: ArrayLike, q_kvar: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Return kW and kvar of the consumers as [scenario, load], refusing what is no number.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    p_kw, q_kvar : ndarray, shape (load,) or (scenario, load)
        Power of all units in use at the consumer's rated voltage. [kW], [kvar]

    Returns
    -------
    tuple of ndarray
        Both [scenario, load].

    Raises
    ------
    SolveError
        A wrong number of loads, or a value that is not a finite number; names the consumers.
    """
    loads = at.network.plant.loads
    p, q = np.broadcast_arrays(
        np.atleast_2d(np.asarray(p_kw, float)), np.atleast_2d(np.asarray(q_kvar, float))
    )
    if p.shape[1] != len(loads):
        raise SolveError(f"{at.mode.name}: kW and kvar are given for {p.shape[1]} of {len(loads)} loads")
    bad = ~(np.isfinite(p) & np.isfinite(q)).all(axis=0)
    if bad.any():
        names = ", ".join(loads[k].name for k in np.flatnonzero(bad))
        raise SolveError(f"{at.mode.name}: the kW or kvar of {names} is not a number")
    return p, q
