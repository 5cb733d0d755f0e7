"""The standard's equivalent generator, carried from the board that sources feed to the places behind it."""

from __future__ import annotations

from dataclasses import fields

import numpy as np
from numpy.typing import NDArray

from study.analyses.short_circuit_currents import half_cycle
from study.analyses.short_circuit_ends import EndRows
from study.formulas.fault_current import SQRT2, SQRT3, FaultCurrent
from study.formulas.fault_iec61363 import through_impedance
from study.formulas.fault_iec61363_plant import equivalent_generator
from study.network.fault_network import FaultNetwork
from study.network.union_find import UnionFind

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]

TX_TRANSIENT_S = 0.1  # instant at which T'* is formed; not confirmed by the standard's text


def behind_equivalent(net: FaultNetwork, rows: EndRows, parts: FaultCurrent) -> tuple[FloatArray, FloatArray]:
    """Return Iac(T/2) and ip of the equivalent generator behind the impedance to each place.

    The sources are condensed at the nearest board that one of them feeds directly, without what comes from
    the place's own side; that is added as it is.

    Source: IEC 61363-1:1998, clause 7, from memory.

    Parameters
    ----------
    net : FaultNetwork
        The network.
    rows : EndRows
        Its ends.
    parts : FaultCurrent
        Three-phase fault, (place, source), with or without the column of what is taken over. [pu]

    Returns
    -------
    tuple of ndarray, shape (place,)
        [pu]; NaN on boards that a source feeds directly, and where nothing feeds.
    """
    half, ip = np.full(len(net.place_bus), np.nan), np.full(len(net.place_bus), np.nan)
    s, hz = net.sources, net.plant.network.plant.project.f_rated_hz
    if not len(s.bus):
        return half, ip
    home, first, z, turns, _ = _paths(net)
    z = z[net.place_bus] + net.place_z / turns[net.place_bus] ** 2
    stub_rows = {(int(b), int(p)): n for n, (b, p) in enumerate(zip(rows.branch, rows.far_node, strict=True))}
    row = np.array(
        [
            -1
            if net.place_bus[p] < 0
            else first[net.place_bus[p]]
            if first[net.place_bus[p]] >= 0
            else stub_rows.get((int(net.stub[p]), int(net.plant.place_node[p])), -1)
            for p in range(len(half))
        ],
        np.int64,
    )
    places = np.flatnonzero((row >= 0) & (np.abs(z) > 0.0))
    if not len(places):
        return half, ip
    at_home = home[net.place_bus[places]]
    own_side = rows.share[row[places]]
    own_side = np.where(row[places][:, None] >= 0, own_side, 0.0)
    columns = slice(0, len(s.bus))
    weight = (1.0 - own_side).T
    values = {f.name: getattr(parts, f.name)[at_home, columns].T for f in fields(FaultCurrent)}
    masked = {k: v * weight if k.endswith("_a") else v for k, v in values.items()}
    fed = masked["subtransient_a"].sum(axis=0) > 0.0
    places, own_side = places[fed], own_side[fed]
    upstream = FaultCurrent(**{k: v[:, fed] for k, v in masked.items()})
    voltage = np.array([s.voltage[s.island == i].max(initial=1.0) for i in range(net.place_island.max() + 1)])
    one = equivalent_generator(
        upstream,
        voltage_v=SQRT3 * voltage[net.place_island[places]],
        frequency_hz=hz,
        tx_sub_s=0.5 / hz,
        tx_trans_s=TX_TRANSIENT_S,
    ).source
    behind = through_impedance(one, r_ohm=z[places].real, x_ohm=z[places].imag, frequency_hz=hz).current
    ac, dc = half_cycle(behind, hz)
    k = turns[net.place_bus[places]]
    own_ac, own_dc = half_cycle(_rows(parts, places, columns), hz)
    half[places] = ac / k + (own_ac * own_side).sum(axis=1)
    ip[places] = (SQRT2 * ac + dc) / k + ((SQRT2 * own_ac + own_dc) * own_side).sum(axis=1)
    return half, ip


def path_from_home(net: FaultNetwork, place: int) -> tuple[int, complex, NDArray[np.bool_]]:
    """Return the board behind which a place lies, and the impedance from there to the place.

    It is the nearest board, from the lasting sources on, with none of them on the place's side.

    Parameters
    ----------
    net : FaultNetwork
        The network.
    place : int
        A live place.

    Returns
    -------
    home : int
        Bus of that board.
    z : complex
        On the level of the place. [pu]
    downstream : ndarray of bool, shape (source,)
        True for sources that stand on the place's side of the home board.
    """
    _, _, z, turns, parent = _paths(net)
    bus, s = int(net.place_bus[place]), net.sources
    path = [bus]
    while parent[path[-1]] >= 0:
        path.append(int(parent[path[-1]]))
    home, below = bus, np.zeros(len(s.bus), bool)
    for candidate in reversed(path[1:]):
        side = _side(net, candidate)
        behind = (side[s.bus] == side[bus]) & (s.bus != candidate)
        if not (behind & ~s.asynchronous).any():
            home, below = candidate, behind
            break
    own = net.place_own[place]
    if own >= 0:
        below = below | (np.arange(len(s.bus)) == own)
    return home, complex((z[bus] - z[home]) * turns[bus] ** 2 + net.place_z[place]), below


def _side(net: FaultNetwork, home: int) -> IntArray:
    """Return the group that each bus falls in when a bus is taken out of the network."""
    group = UnionFind(len(net.bus_island))
    for a, b in zip(net.from_bus, net.to_bus, strict=True):
        if home not in (a, b):
            group.join(int(a), int(b))
    return np.array(group.roots(), np.int64)


def _rows(parts: FaultCurrent, places: IntArray, columns: slice) -> FaultCurrent:
    return FaultCurrent(**{f.name: getattr(parts, f.name)[places, columns] for f in fields(FaultCurrent)})


def _paths(net: FaultNetwork) -> tuple[IntArray, IntArray, ComplexArray, FloatArray, IntArray]:
    """Return, [bus]: home board's place, end row of the first branch, impedance from home, turns, parent.

    The impedance is on the home's level; ``turns`` is the voltage of the bus at 1 pu on the home.
    """
    count = len(net.bus_island)
    home, first = np.full(count, -1, np.int64), np.full(count, -1, np.int64)
    z, turns = np.zeros(count, complex), np.ones(count)
    parent = np.full(count, -1, np.int64)
    place_of_bus = {int(b): p for p, b in reversed(list(enumerate(net.place_bus))) if net.stub[p] < 0}
    lasting = [int(b) for k, b in enumerate(net.sources.bus) if not net.sources.asynchronous[k]]
    queue = list(dict.fromkeys(lasting))
    for b in queue:
        home[b] = place_of_bus.get(b, -1)
    around: dict[int, list[tuple[int, int]]] = {}
    for n, (a, b) in enumerate(zip(net.from_bus, net.to_bus, strict=True)):
        around.setdefault(int(a), []).append((n, int(b)))
        around.setdefault(int(b), []).append((n, int(a)))
    end_of = _first_rows(net)
    for b in queue:
        for n, other in around.get(b, []):
            if home[other] >= 0:
                continue
            home[other], parent[other] = home[b], b
            forward = net.to_bus[n] == other
            turns[other] = turns[b] / net.ratio[n] if forward else turns[b] * net.ratio[n]
            on_to_side = turns[other] if forward else turns[b]
            z[other] = z[b] + net.z[n] / on_to_side**2
            first[other] = first[b] if first[b] >= 0 else end_of[n, b]
            queue.append(other)
    return home, first, z, turns, parent


def _first_rows(net: FaultNetwork) -> dict[tuple[int, int], int]:
    """Return the row in `end_rows` of each live branch at each of its buses (star points have no row)."""
    branches = net.plant.network.branches
    a, b = branches.from_node[net.live], branches.to_node[net.live]
    keep = net.plant.place_of_node[np.concatenate([a, b])] >= 0
    number = np.cumsum(keep) - 1
    count = len(net.live)
    out = {}
    for n in range(count):
        out[n, int(net.from_bus[n])] = int(number[n]) if keep[n] else -1
        out[n, int(net.to_bus[n])] = int(number[count + n]) if keep[count + n] else -1
    return out
