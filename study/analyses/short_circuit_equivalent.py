"""The standard's equivalent generator, carried from the board that sources feed to the places behind it."""

from __future__ import annotations

from dataclasses import dataclass, fields

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

    The sources are condensed at the board above the place, without what comes from the place's own side;
    that is added as it is.

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
    steps = _steps(net, rows)
    places = np.flatnonzero((steps.row >= 0) & (np.abs(steps.z) > 0.0))
    if not len(places):
        return half, ip
    own_side = _own_side(net, rows, steps, places)
    columns = slice(0, len(s.bus))
    weight = (1.0 - own_side).T
    at_home = steps.home[places]
    values = {f.name: getattr(parts, f.name)[at_home, columns].T for f in fields(FaultCurrent)}
    masked = {k: v * weight if k.endswith("_a") else v for k, v in values.items()}
    # Held voltage may sustain more than a source gave at first; the equivalent has no impedance for that.
    masked["sustained_a"] = np.minimum(masked["sustained_a"], masked["transient_a"])
    fed = masked["subtransient_a"].sum(axis=0) > 0.0
    places, own_side = places[fed], own_side[fed]
    upstream = FaultCurrent(**{k: v[:, fed] for k, v in masked.items()})
    islands = range(int(net.place_island.max()) + 1)
    voltage = np.array([s.voltage[s.island == i].max(initial=1.0) for i in islands])
    one = equivalent_generator(
        upstream,
        voltage_v=SQRT3 * voltage[net.place_island[places]] * steps.turns_home[places],
        frequency_hz=hz,
        tx_sub_s=0.5 / hz,
        tx_trans_s=TX_TRANSIENT_S,
    ).source
    z = steps.z[places]
    behind = through_impedance(one, r_ohm=z.real, x_ohm=z.imag, frequency_hz=hz).current
    ac, dc = half_cycle(behind, hz)
    k = steps.ratio[places]
    own_ac, own_dc = half_cycle(_rows(parts, places, columns), hz)
    half[places] = ac / k + (own_ac * own_side).sum(axis=1)
    ip[places] = (SQRT2 * ac + dc) / k + ((SQRT2 * own_ac + own_dc) * own_side).sum(axis=1)
    return half, ip


def _own_side(net: FaultNetwork, rows: EndRows, steps: _Steps, places: IntArray) -> FloatArray:
    """Return the part of each source that comes from the place's own side of its home board."""
    own_side = rows.share[steps.row[places]]
    own = np.where(net.stub[places] >= 0, net.place_own[places], -1)
    own_side[net.stub[places] >= 0] = 0.0
    has = np.flatnonzero(own >= 0)
    own_side[has, own[has]] = 1.0 / net.sources.units[own[has]]
    return own_side


@dataclass(frozen=True, slots=True, kw_only=True)
class _Steps:
    """The last step to each place, [place]: from which place, by which end row, through what.

    ``z`` and ``turns_home`` are of the home's level; ``ratio`` is the voltage of the place at 1 pu there.
    """

    home: IntArray
    row: IntArray
    z: ComplexArray
    ratio: FloatArray
    turns_home: FloatArray


def _steps(net: FaultNetwork, rows: EndRows) -> _Steps:
    """Return the last step to each place: from the board above it, past star points."""
    paths = _paths(net)
    place_of_bus = {int(b): p for p, b in reversed(list(enumerate(net.place_bus))) if net.stub[p] < 0}
    end_of = _first_rows(net)
    at = {(int(b), int(n)): k for k, (b, n) in enumerate(zip(rows.branch, rows.far_node, strict=True))}
    count = len(net.place_bus)
    home, row = np.full(count, -1, np.int64), np.full(count, -1, np.int64)
    z, ratio, turns_home = np.zeros(count, complex), np.ones(count), np.ones(count)
    for p in np.flatnonzero(net.place_bus >= 0):
        bus = int(net.place_bus[p])
        if net.stub[p] >= 0:
            home[p] = place_of_bus[bus]
            row[p] = at.get((int(net.stub[p]), int(net.plant.place_node[p])), -1)
            z[p], turns_home[p] = net.place_z[p], paths.turns[bus]
            continue
        child, above = bus, int(paths.parent[bus])
        while above >= 0 and above not in place_of_bus:
            child, above = above, int(paths.parent[above])
        if above < 0:
            continue
        home[p], row[p] = place_of_bus[above], end_of[int(paths.branch[child]), above]
        z[p] = (paths.z[bus] - paths.z[above]) * paths.turns[above] ** 2
        ratio[p], turns_home[p] = paths.turns[bus] / paths.turns[above], paths.turns[above]
    return _Steps(home=home, row=row, z=z, ratio=ratio, turns_home=turns_home)


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
    paths = _paths(net)
    z, turns, parent = paths.z, paths.turns, paths.parent
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


@dataclass(frozen=True, slots=True, kw_only=True)
class _Paths:
    """The way to each bus from the nearest bus that a lasting source feeds directly, [bus].

    ``parent`` (-1: fed directly) and ``branch``, the place in ``live`` of what leads there; ``z`` the
    impedance on the level of the start; ``turns`` the voltage of the bus at 1 pu there.
    """

    parent: IntArray
    branch: IntArray
    z: ComplexArray
    turns: FloatArray


def _paths(net: FaultNetwork) -> _Paths:
    count = len(net.bus_island)
    parent, branch = np.full(count, -1, np.int64), np.full(count, -1, np.int64)
    z, turns = np.zeros(count, complex), np.ones(count)
    lasting = [int(b) for k, b in enumerate(net.sources.bus) if not net.sources.asynchronous[k]]
    queue = list(dict.fromkeys(lasting))
    seen = set(queue)
    around: dict[int, list[tuple[int, int]]] = {}
    for n, (a, b) in enumerate(zip(net.from_bus, net.to_bus, strict=True)):
        around.setdefault(int(a), []).append((n, int(b)))
        around.setdefault(int(b), []).append((n, int(a)))
    for b in queue:
        for n, other in around.get(b, []):
            if other in seen:
                continue
            seen.add(other)
            parent[other], branch[other] = b, n
            forward = net.to_bus[n] == other
            turns[other] = turns[b] / net.ratio[n] if forward else turns[b] * net.ratio[n]
            z[other] = z[b] + net.z[n] / (turns[other] if forward else turns[b]) ** 2
            queue.append(other)
    return _Paths(parent=parent, branch=branch, z=z, turns=turns)


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
