"""Zero sequence of a fault network, and the systems of boards that share one neutral."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.formulas.cables import typical_capacitance
from study.formulas.fault_iec60909_nodal import impedance_matrix
from study.model.sources import Genset
from study.network.fault_network import FaultNetwork
from study.network.topology import Branch
from study.network.union_find import UnionFind
from study.network.view import DEAD

ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]

EARTHED = ("solid", "low resistance")
# Zero- over positive-sequence impedance of a cable of which the workbook says nothing: return through the
# fourth conductor or screen; common practice, no source (three conductors in series with one: 1 + 3).
CABLE_Z0_OVER_Z1 = 4.0


@dataclass(frozen=True, slots=True, kw_only=True)
class NeutralSystem:
    """Live boards joined without a transformer in one island, and the capacitance of their cables.

    ``boards`` are places in the plant's boards; ``capacitance_f`` is one phase to earth, ``given`` False
    where a cable's capacitance is a typical value.
    """

    boards: tuple[int, ...]
    u_base_v: float
    capacitance_f: float
    given: bool


def neutral_systems(net: FaultNetwork) -> tuple[NeutralSystem, ...]:
    """Return the systems of a mode.

    Parameters
    ----------
    net : FaultNetwork
        The network; filters and machines have no known capacitance and are left out.

    Returns
    -------
    tuple of NeutralSystem
        In the order of their first boards.
    """
    plant, topology = net.plant.network.plant, net.plant.network.topology
    group = UnionFind(len(topology.nodes))
    closed = [(k, b) for k, b in enumerate(topology.branches) if net.view.closed[k] and not _separates(b)]
    for _, b in closed:
        group.join(b.from_node, b.to_node)
    roots = group.roots()
    capacitance: dict[int, float] = {}
    typical: set[int] = set()
    for k, b in closed:
        if b.kind != "cable":
            continue
        cable = plant.cables[b.index]
        per_km = cable.capacitance_uf_per_km
        if per_km is None:
            typical.add(roots[b.from_node])
            per_km = typical_capacitance(cable.section_mm2, cable.insulation)
        units = _units(net, k)
        farad = per_km * 1e-6 * cable.length_m / 1000.0 * cable.runs * units
        capacitance[roots[b.from_node]] = capacitance.get(roots[b.from_node], 0.0) + farad
    members: dict[int, list[int]] = {}
    for i in range(len(plant.boards)):
        if net.view.island[i] != DEAD:
            members.setdefault(roots[i], []).append(i)
    return tuple(
        NeutralSystem(
            boards=tuple(boards),
            u_base_v=float(net.plant.network.u_base_v[boards[0]]),
            capacitance_f=capacitance.get(root, 0.0),
            given=root not in typical,
        )
        for root, boards in members.items()
    )


def _separates(branch: Branch) -> bool:
    return branch.kind == "transformer" or branch.winding in ("secondary", "tertiary")


def _units(net: FaultNetwork, k: int) -> float:
    load = int(net.plant.network.branches.load[k])
    if load < 0:
        return 1.0
    demand = net.mode.demand.get(net.plant.network.plant.loads[load].name)
    return demand.in_use if demand is not None and demand.in_use > 0.0 else 1.0


def zero_sequence(net: FaultNetwork) -> ComplexArray:
    """Return the zero-sequence impedance at each place, infinite where the neutral is not earthed.

    Earthed are the neutrals of sets and shore supplies on boards that are solidly or low-resistance earthed,
    through the board's resistor, and star points of transformers that face such boards.

    Source: symmetrical components, as in IEC 60909-0:2016; from memory.

    Parameters
    ----------
    net : FaultNetwork
        The network.

    Returns
    -------
    ndarray, shape (place,)
        Per unit.
    """
    plant, topology = net.plant.network.plant, net.plant.network.topology
    out = np.full(len(net.place_bus), np.inf, complex)
    earthed = [i for i, b in enumerate(plant.boards) if b.earthing in EARTHED and net.view.island[i] != DEAD]
    if not earthed:
        return out
    count = len(net.bus_island)
    matrix = np.zeros((count, count), complex)
    group = UnionFind(count)
    shunt = np.zeros(count, complex)
    at_board = dict.fromkeys(earthed, 0j)
    for n, k in enumerate(net.live):
        branch = topology.branches[k]
        if _separates(branch) or branch.winding:
            _star_point(net, branch, n, at_board)
            continue
        y = 1.0 / (net.z[n] * _ratio_z0(net, branch))
        a, b = net.from_bus[n], net.to_bus[n]
        matrix[[a, b], [a, b]] += y
        matrix[[a, b], [b, a]] -= y
        group.join(int(a), int(b))
    for k, s in enumerate(net.sources.supplies):
        board = next(i for i, b in enumerate(plant.boards) if b.name == s.board)
        if board in at_board and s.kind in ("genset", "shore supply"):
            own = complex(net.sources.bare.r_ohm[k], _own_x0(net, k)) + net.sources.lead[k]
            at_board[board] += 1.0 / own
    for i, y in at_board.items():
        resistor = plant.boards[i].earthing_resistor_ohm or 0.0
        if y != 0.0:
            base = net.plant.network.u_base_v[i] ** 2 / (1000.0 * net.plant.network.s_base_kva)
            shunt[net.bus_of_node[i]] += 1.0 / (1.0 / y + 3.0 * resistor / base)
    roots = np.array(group.roots())
    live = np.isin(roots, roots[np.flatnonzero(shunt)])
    matrix[np.arange(count), np.arange(count)] += shunt + ~live
    z = impedance_matrix(matrix)
    fed = (net.place_bus >= 0) & live[net.place_bus]
    bus = net.place_bus[fed]
    out[fed] = z[bus, bus] + net.place_z[fed] * CABLE_Z0_OVER_Z1
    return out


def _own_x0(net: FaultNetwork, k: int) -> float:
    item = net.sources.supplies[k].item
    if isinstance(item, Genset):
        return item.machine.x_0_pu * net.sources.supplies[k].pu
    return float(net.sources.bare.x_sub_ohm[k])


def _ratio_z0(net: FaultNetwork, branch: Branch) -> complex:
    """Return zero- over positive-sequence impedance of a branch that is no transformer."""
    if branch.kind != "cable":
        return 1.0
    cable = net.plant.network.plant.cables[branch.index]
    if cable.r0_ohm_per_km is None or cable.x0_ohm_per_km is None:
        return CABLE_Z0_OVER_Z1
    z = net.plant.z_cold[list(net.plant.network.topology.branches).index(branch)]
    u = net.plant.network.u_base_v[branch.to_node]
    base = u**2 / (1000.0 * net.plant.network.s_base_kva)
    own = complex(cable.r0_ohm_per_km, cable.x0_ohm_per_km) * cable.length_m / 1000.0 / cable.runs / base
    return complex(own / z)


def _star_point(net: FaultNetwork, branch: Branch, n: int, at_board: dict[int, complex]) -> None:
    """Add a transformer's earthed star point to the board that it faces."""
    plant = net.plant.network.plant
    if branch.kind != "transformer":
        return
    t = plant.transformers[branch.index]
    board = next(i for i, b in enumerate(plant.boards) if b.name == t.to_board)
    if board in at_board and re.match(r"^[DYZ]N?(yn|zn)", t.vector_group) and t.vector_group[0] != "Y":
        z = net.z[n]
        at_board[board] += 1.0 / complex(z.real * t.r0_over_r1, z.imag * t.x0_over_x1)
