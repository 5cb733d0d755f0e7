"""The network of a fault: one mode and case, derived from the same nodes and branches as the load flow.

No droop reactance, no load and no shunt. A terminal at the end of a single path is not a bus: the path is a
series impedance, of one unit of a group of equal consumers. Cables are cold for the maximum and hot for the
minimum.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from study.formulas.cables import resistance_at, skin_effect_factor
from study.formulas.fault_iec60909_nodal import admittance_matrix
from study.model.modes import Mode
from study.model.plant import Plant
from study.network.arrays import transformer_ratio
from study.network.cable_data import cable_ohm_per_km
from study.network.fault_inverse import inverse
from study.network.fault_sources import FaultSources, fault_sources, pick_sources
from study.network.fault_supplies import CaseOptions, Supply, supplies_of
from study.network.network import Network
from study.network.view import DEAD, View, view_of

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

_ROUNDS = 6  # to undo the skin effect; each gains two digits
COLD_DEGC = 20.0  # conductor at the start of a maximum fault: IEC 60909-0:2016, cables, from memory
_LINE_TO_NEUTRAL_AMPERES = 3.0  # `BranchArrays.ampere_factor` of a consumer between line and neutral
_IMPEDANCE_FACTOR = {1.0: 1.0, 3.0**0.5: 2.0, 3.0: 6.0}


@dataclass(frozen=True, slots=True, kw_only=True)
class FaultPlant:
    """What no mode changes: places and branch impedances of both cases, per unit.

    ``place_node`` [place] is the node of each place, ``place_of_node`` [node] its inverse (-1: a star point).
    ``z_cold`` and ``z_hot`` [branch]; those of a consumer's run are of one unit and one conductor, in the
    hot case doubled for a consumer between line and neutral. ``base_a`` [node] is the current of 1 pu.
    """

    network: Network
    place_node: IntArray
    place_of_node: IntArray
    z_cold: ComplexArray
    z_hot: ComplexArray
    base_a: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class FaultNetwork:
    """The network of one mode and case.

    [place]: ``place_bus`` (-1: dead), ``place_z`` the series impedance from that bus, ``place_own`` the
    source that stands at the place itself (-1: none), ``place_island``, ``stub`` the branch that a place at a
    path's end hangs on (-1: none). ``live`` are the closed branches between buses (places in the topology)
    with ``from_bus``, ``to_bus``, ``z`` and ``ratio`` [live]; ``admittance`` is that of the branches alone.
    """

    plant: FaultPlant
    mode: Mode
    view: View
    options: CaseOptions
    bus_of_node: IntArray
    bus_island: IntArray
    place_bus: IntArray
    place_z: ComplexArray
    place_own: IntArray
    place_island: IntArray
    stub: IntArray
    live: IntArray
    from_bus: IntArray
    to_bus: IntArray
    z: ComplexArray
    ratio: FloatArray
    admittance: ComplexArray
    sources: FaultSources
    findings: tuple[str, ...]


def fault_plant(network: Network) -> FaultPlant:
    """Return what no mode changes.

    Parameters
    ----------
    network : Network
        Of the plant.

    Returns
    -------
    FaultPlant
        Serves every mode and case.
    """
    nodes = network.topology.nodes
    place_node = np.array([k for k, n in enumerate(nodes) if n.kind != "star"], np.int64)
    place_of_node = np.full(len(nodes), -1, np.int64)
    place_of_node[place_node] = np.arange(len(place_node))
    branches = network.branches
    plain = np.array([_IMPEDANCE_FACTOR[float(f)] for f in branches.ampere_factor], float)
    factor = _resistance_factors(network)
    x = 1j * branches.x_pu / plain
    r = branches.r_pu / plain
    to_neutral = np.where(branches.ampere_factor == _LINE_TO_NEUTRAL_AMPERES, 2.0, 1.0)
    return FaultPlant(
        network=network,
        place_node=place_node,
        place_of_node=place_of_node,
        z_cold=r * factor[0] + x,
        z_hot=(r * factor[1] + x) * to_neutral,
        base_a=1000.0 * network.s_base_kva / (3.0**0.5 * network.u_base_v),
    )


def _resistance_factors(network: Network) -> FloatArray:
    """Return the factors on resistance at operating temperature: cold, and hot at the end of a fault."""
    out = np.ones((2, len(network.topology.branches)))
    hz = network.plant.project.f_rated_hz
    for k, branch in enumerate(network.topology.branches):
        if branch.kind != "cable":
            continue
        cable = network.plant.cables[branch.index]
        r_operating, _ = cable_ohm_per_km(cable, hz)
        warm = _direct_resistance(r_operating, hz)
        for n, degc in enumerate((COLD_DEGC, cable.short_circuit_temperature_degc)):
            own = float(resistance_at(1.0, cable.conductor_temperature_degc, cable.conductor))
            r = warm * float(resistance_at(1.0, degc, cable.conductor)) / own
            out[n, k] = r * float(skin_effect_factor(r, hz)) / r_operating
    return out


def _direct_resistance(r_ac: float, hz: float) -> float:
    """Return the d.c. resistance whose a.c. resistance is given; the skin effect is a small correction."""
    r = r_ac
    for _ in range(_ROUNDS):
        r = r_ac / float(skin_effect_factor(r, hz))
    return r


def case_mode(mode: Mode, plant: Plant, options: CaseOptions) -> Mode:
    """Return the mode of a case: for the maximum, change-over sets and their devices are on.

    Parameters
    ----------
    mode : Mode
        As the workbook has it.
    plant : Plant
        Holds the devices.
    options : CaseOptions
        The case.

    Returns
    -------
    Mode
        The same mode for the minimum.
    """
    if not options.maximum or not mode.changeover_sets:
        return mode
    on = dict.fromkeys(mode.changeover_sets, "on")
    on |= {d.name: "on" for d in plant.devices if d.equipment in mode.changeover_sets}
    return replace(mode, states={**mode.states, **on})  # type: ignore[dict-item]


def fault_network(
    static: FaultPlant, mode: Mode, options: CaseOptions, view: View | None = None
) -> FaultNetwork:
    """Return the network of one mode and case.

    Parameters
    ----------
    static : FaultPlant
        Of the plant.
    mode : Mode
        As the workbook has it.
    options : CaseOptions
        The case.
    view : View, optional
        What is energised in the case, where it is known already.

    Returns
    -------
    FaultNetwork
        Ready to be solved in stages.
    """
    network = static.network
    topology, plant = network.topology, network.plant
    mode = case_mode(mode, plant, options)
    view = view or view_of(plant, mode, topology)
    island = np.array(view.island, np.int64)
    closed = np.array(
        [
            k
            for k, b in enumerate(topology.branches)
            if view.closed[k] and not b.without_impedance and view.island[b.from_node] != DEAD
        ],
        np.int64,
    )
    z = (static.z_cold if options.maximum else static.z_hot)[closed]
    stub_node, stub_z, stub_branch = _stubs(network, view, closed, z)
    bus_of_node = _buses(view, island, stub_node >= 0)
    ends = stub_node >= 0
    inner = ~(ends[network.branches.from_node[closed]] | ends[network.branches.to_node[closed]])
    live = closed[inner]
    ratio = _ratios(network, mode, live)
    from_bus = bus_of_node[network.branches.from_node[live]]
    to_bus = bus_of_node[network.branches.to_node[live]]
    count = int(bus_of_node.max(initial=-1)) + 1
    bus_island = np.zeros(count, np.int64)
    bus_island[bus_of_node[bus_of_node >= 0]] = island[bus_of_node >= 0]
    admittance = admittance_matrix(
        count,
        branch_from=from_bus,
        branch_to=to_bus,
        branch_impedance=z[inner],
        branch_ratio=ratio,
        source_bus=np.zeros(0, np.int64),
        source_impedance=np.zeros(0),
    )
    leads = {int(n): (int(stub_node[n]), complex(stub_z[n])) for n in np.flatnonzero(ends)}
    supplies, found = supplies_of(network, mode, view, options, leads)
    bus, at_place = _stand(static, supplies, leads, bus_of_node)
    before = _before(supplies, bus, admittance, bus_island)
    sources = fault_sources(plant, supplies, (bus, bus_island[bus]), options, before[bus])
    place_own = np.full(len(static.place_node), -1, np.int64)
    standing = np.flatnonzero(at_place >= 0)
    place_own[at_place[standing]] = standing
    nodes = static.place_node
    hang = np.where(ends[nodes], stub_node[nodes], nodes)
    return FaultNetwork(
        plant=static,
        mode=mode,
        view=view,
        options=options,
        bus_of_node=bus_of_node,
        bus_island=bus_island,
        place_bus=np.where(island[nodes] != DEAD, bus_of_node[hang], DEAD),
        place_z=stub_z[nodes],
        place_own=place_own,
        place_island=island[nodes],
        stub=stub_branch[nodes],
        live=live,
        from_bus=from_bus,
        to_bus=to_bus,
        z=z[inner],
        ratio=ratio,
        admittance=admittance,
        sources=sources,
        findings=(*view.findings, *found),
    )


def _stubs(
    network: Network, view: View, closed: IntArray, z: ComplexArray
) -> tuple[IntArray, ComplexArray, IntArray]:
    """Return, [node]: the node that a terminal hangs on (-1: it is a bus), through what, by which branch."""
    topology = network.topology
    nodes = len(topology.nodes)
    terminal = np.array([n.kind == "terminal" for n in topology.nodes], bool)
    a, b = network.branches.from_node[closed], network.branches.to_node[closed]
    root = np.array(view.bus, np.int64)
    low, high = np.full(nodes, nodes, np.int64), np.full(nodes, -1, np.int64)
    hang, branch = np.full(nodes, -1, np.int64), np.full(nodes, -1, np.int64)
    y = np.zeros(nodes, complex)
    for end, other in ((a, b), (b, a)):
        here = terminal[end] & ~terminal[other]
        np.minimum.at(low, end[here], root[other[here]])
        np.maximum.at(high, end[here], root[other[here]])
        np.add.at(y, end[here], 1.0 / z[here])
        hang[end[here]] = other[here]
        branch[end[here]] = closed[here]
    is_stub = terminal & (low == high)
    both = terminal[a] & terminal[b]
    is_stub[a[both]] = is_stub[b[both]] = False
    return (
        np.where(is_stub, hang, -1),
        np.where(is_stub, 1.0 / np.where(is_stub, y, 1.0), 0.0),
        np.where(is_stub, branch, -1),
    )


def _buses(view: View, island: IntArray, stub: BoolArray) -> IntArray:
    root = np.array(view.bus, np.int64)
    out = np.full(len(root), DEAD, np.int64)
    alive = (island != DEAD) & ~stub
    out[alive] = np.unique(root[alive], return_inverse=True)[1]
    return out


def _ratios(network: Network, mode: Mode, live: IntArray) -> FloatArray:
    """Return the ratios of live branches, with the taps that the mode's set-points name."""
    ratio = network.branches.ratio[live].copy()
    for n, k in enumerate(live):
        branch = network.topology.branches[k]
        point = mode.set_points.get(branch.name)
        if point is None or point.tap_pu is None:
            continue
        u = network.u_base_v[branch.from_node], network.u_base_v[branch.to_node]
        if branch.kind == "transformer":
            ratio[n] = transformer_ratio(network.plant.transformers[branch.index], point.tap_pu, *u)
        elif branch.winding == "primary":
            ratio[n] = transformer_ratio(network.plant.three_winding[branch.index], point.tap_pu, *u)
    return ratio


def _stand(
    static: FaultPlant,
    supplies: Sequence[Supply],
    leads: dict[int, tuple[int, complex]],
    bus_of_node: IntArray,
) -> tuple[IntArray, IntArray]:
    """Return the bus of each source, and the place at its own terminals (-1 where it stands on its board)."""
    bus = np.array([bus_of_node[leads[s.node][0] if s.node in leads else s.node] for s in supplies], np.int64)
    place = np.array([static.place_of_node[s.node] if s.node in leads else -1 for s in supplies], np.int64)
    return bus, place


def _before(
    supplies: Sequence[Supply], bus: IntArray, admittance: ComplexArray, bus_island: IntArray
) -> FloatArray:
    """Return the voltage of every bus before the fault: its supplies' at no load, through the ratios."""
    driving = np.array([bool(s.voltage) for s in supplies], bool)
    y = np.array([1.0 / (1j * s.pu) if s.voltage else 0.0 for s in supplies], complex)
    e = np.array([s.voltage for s in supplies], float)
    z = inverse(admittance, bus[driving], y[driving], bus_island)
    injected = np.zeros(len(bus_island), complex)
    np.add.at(injected, bus, y * e)
    return np.abs(z @ injected)


def with_tolerance(net: FaultNetwork, options: CaseOptions) -> FaultNetwork:
    """Return the network with its sources at another point of their reactances' tolerance.

    Parameters
    ----------
    net : FaultNetwork
        The network.
    options : CaseOptions
        Differs from that of the network in the tolerance alone.

    Returns
    -------
    FaultNetwork
        The same places and branches.
    """
    s = net.sources
    sources = fault_sources(net.plant.network.plant, s.supplies, (s.bus, s.island), options, s.voltage)
    return replace(net, options=options, sources=sources)


def only_sources(net: FaultNetwork, keep: BoolArray) -> FaultNetwork:
    """Return the network with some of its sources alone.

    Parameters
    ----------
    net : FaultNetwork
        The network.
    keep : ndarray of bool, shape (source,)
        Which sources stay.

    Returns
    -------
    FaultNetwork
        The same places and branches.
    """
    rows = np.flatnonzero(keep)
    number = np.full(len(keep) + 1, -1, np.int64)
    number[rows] = np.arange(len(rows))
    return replace(net, sources=pick_sources(net.sources, rows), place_own=number[net.place_own])
