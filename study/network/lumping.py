"""An island drawn together at the buses that matter: trees of consumers become loads where they hang.

What hangs on a bus by one branch, and holds no source, is a load of that bus: a function of the magnitude of
its voltage alone. It is kept as ``A + B |V|^2``, with the value and the slope that it has at the voltage
before; it errs by second order in the change of voltage, and of the losses in the tree alone.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, fields, replace

import numpy as np
from numpy.typing import NDArray

from study.network.consumers import Demand
from study.network.network import ModeNetwork

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]

FLOOR_PU = 0.7  # of the voltage before: below it the constant part of a load is an impedance


@dataclass(frozen=True, slots=True, kw_only=True)
class Twigs:
    """Buses taken off, [twig]: each with its branch to the bus behind it and its consumers, [twig, state]."""

    bus: IntArray
    behind: IntArray
    own: ComplexArray
    out: ComplexArray
    into: ComplexArray
    constant: ComplexArray
    square: ComplexArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Lumped:
    """An island with its trees drawn together.

    ``bus`` [node] are the buses left, ``admittance`` [node, node] without consumers. ``constant`` and
    ``square`` [node, state] are the consumers' power, one column for each demand given. ``v`` [node] is the
    voltage before.
    """

    bus: IntArray
    admittance: ComplexArray
    constant: ComplexArray
    square: ComplexArray
    v: ComplexArray
    twigs: Twigs

    def node_of(self, bus: int) -> int:
        """Return the node of a bus that is left; raises KeyError for another."""
        place = np.flatnonzero(self.bus == bus)
        if not len(place):
            raise KeyError(bus)
        return int(place[0])


def lump(at: ModeNetwork, v_bus: ComplexArray, demand: Demand, island: int, keep: Iterable[int]) -> Lumped:
    """Draw the trees of an island together.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    v_bus : ndarray, shape (bus,)
        Voltages before, leaves included. [pu]
    demand : Demand
        Of the consumers, one column for each state of load.
    island : int
        Which island.
    keep : iterable of int
        Buses that stay, besides those of the sources.

    Returns
    -------
    Lumped
        Per unit of the network.
    """
    structure, ports = at.structure, at.structure.ports
    count, n = structure.buses, len(ports.direct)
    width = max(demand.constant.shape[1], demand.impedance.shape[1])
    constant, square = np.zeros((count, width), complex), np.zeros((count, width), complex)
    np.add.at(constant, ports.bus[ports.direct], np.broadcast_to(demand.constant[:n], (n, width)))
    np.add.at(square, ports.bus[ports.direct], np.broadcast_to(demand.impedance[:n], (n, width)))
    stay = set(keep)
    leaves = Twigs(
        bus=count + np.arange(ports.leaves),
        behind=ports.bus[ports.parent],
        own=ports.own[:, 0],
        out=ports.out[:, 0],
        into=ports.into[:, 0],
        constant=np.broadcast_to(demand.constant[n:], (ports.leaves, width)),
        square=np.broadcast_to(demand.impedance[n:], (ports.leaves, width)),
    )
    kept = np.isin(leaves.bus, list(stay))
    off, left = _some(leaves, ~kept), _some(leaves, kept)
    _hang(off, v_bus, constant, square)
    work = _Work(at=at, v_bus=v_bus, constant=constant, square=square, left=_buses_of(at, island))
    twigs = [off, *work.trees(stay | set(left.behind.tolist()))]
    bus = np.array(sorted(work.left), np.int64)
    return _with_leaves(
        Lumped(
            bus=bus,
            admittance=structure.admittance[bus][:, bus].toarray(),
            constant=constant[bus],
            square=square[bus],
            v=v_bus[bus],
            twigs=Twigs(
                **{f.name: np.concatenate([getattr(t, f.name) for t in twigs]) for f in fields(Twigs)}
            ),
        ),
        left,
        v_bus,
    )


def _some(twigs: Twigs, k: NDArray[np.bool_]) -> Twigs:
    return Twigs(**{f.name: getattr(twigs, f.name)[k] for f in fields(Twigs)})


def _with_leaves(lumped: Lumped, leaves: Twigs, v_bus: ComplexArray) -> Lumped:
    """Return an island with the leaves that stay as nodes of their own."""
    n, count = len(lumped.bus), len(leaves.bus)
    if not count:
        return lumped
    y = np.zeros((n + count, n + count), complex)
    y[:n, :n] = lumped.admittance
    at = np.array([lumped.node_of(int(b)) for b in leaves.behind])
    own = n + np.arange(count)
    y[own, own], y[own, at], y[at, own] = leaves.own, leaves.out, leaves.into
    return replace(
        lumped,
        bus=np.concatenate([lumped.bus, leaves.bus]),
        admittance=y,
        constant=np.concatenate([lumped.constant, leaves.constant]),
        square=np.concatenate([lumped.square, leaves.square]),
        v=np.concatenate([lumped.v, v_bus[leaves.bus]]),
    )


def _buses_of(at: ModeNetwork, island: int) -> set[int]:
    nodes = np.array(at.bus_of_node, np.int64)
    here = (nodes >= 0) & (nodes < at.structure.buses) & (np.array(at.view.island, np.int64) == island)
    return set(nodes[here].tolist())


@dataclass(frozen=True, slots=True, kw_only=True)
class _Work:
    """Loads [bus, state] and buses left while trees are taken off; written to."""

    at: ModeNetwork
    v_bus: ComplexArray
    constant: ComplexArray
    square: ComplexArray
    left: set[int]

    def trees(self, keep: set[int]) -> list[Twigs]:
        """Take off every bus with one neighbour, from the ends inwards."""
        y, left = self.at.structure.admittance, self.left
        keep = keep | set(self.at.structure.source_bus.tolist())
        near = {b: set(y.indices[y.indptr[b] : y.indptr[b + 1]].tolist()) & left - {b} for b in left}
        waiting = [b for b in sorted(left) if len(near[b]) == 1 and b not in keep]
        twigs: list[Twigs] = []
        while waiting:
            b = waiting.pop()
            if len(near[b]) != 1:
                continue
            (p,) = near[b]
            twigs.append(self._twig(b, p))
            left.discard(b)
            near[p].discard(b)
            if len(near[p]) == 1 and p not in keep:
                waiting.append(p)
        return twigs

    def _twig(self, b: int, p: int) -> Twigs:
        y = self.at.structure.admittance
        twig = Twigs(
            bus=np.array([b]),
            behind=np.array([p]),
            own=np.array([y[b, b]]),
            out=np.array([y[b, p]]),
            into=np.array([y[p, b]]),
            constant=self.constant[[b]],
            square=self.square[[b]],
        )
        _hang(twig, self.v_bus, self.constant, self.square)
        return twig


def _hang(twigs: Twigs, v_bus: ComplexArray, constant: ComplexArray, square: ComplexArray) -> None:
    """Add what twigs draw to the buses behind them."""
    a, b = power_behind(twigs, np.abs(v_bus[twigs.behind]))
    np.add.at(constant, twigs.behind, a)
    np.add.at(square, twigs.behind, b)


def power_behind(twigs: Twigs, u: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Return A and B of the power ``A + B U^2`` that twigs draw, near the voltages behind them.

    With ``V' = v - z' conj(A/V')``, ``z' = 1/(own + conj(B))``, ``v = -out z' U`` the power at the bus behind
    is ``U conj(into V')``; its slope follows as in `consumers.Drawn.gradient`.

    Parameters
    ----------
    twigs : Twigs
        With their consumers.
    u : ndarray, shape (twig,)
        Magnitudes of the voltages behind. [pu]

    Returns
    -------
    tuple of ndarray, shape (twig, state)
        Constant part and part at 1 pu that follows the square. [pu]
    """
    at = u[:, None]
    z = 1.0 / (twigs.own[:, None] + np.conj(twigs.square))
    ratio = -twigs.out[:, None] * z
    product = z * np.conj(twigs.constant)
    v = _upper(ratio * at, product)
    beta = -product / np.conj(v) ** 2
    slope = (ratio - beta * np.conj(ratio)) / (1.0 - np.abs(beta) ** 2)
    into = twigs.into[:, None]
    rate = np.conj(into * v) + at * np.conj(into * slope)
    square = rate / (2.0 * at)
    return at * np.conj(into * v) - square * at * at, square


def _upper(behind: ComplexArray, product: ComplexArray) -> ComplexArray:
    """Return the voltage at the end of a branch from that at no load; see `consumers.Drawn.leaf_voltage`."""
    square = np.abs(behind) ** 2
    b = square - 2.0 * product.real
    # A branch that cannot carry its load is left at the nose of its curve.
    u = 0.5 * (b + np.sqrt(np.maximum(b * b - 4.0 * np.abs(product) ** 2, 0.0)))
    return np.asarray((u + np.conj(product)) * behind / square)


def voltages_behind(lumped: Lumped, v: FloatArray, buses: IntArray) -> FloatArray:
    """Return the voltage of buses that were taken off, as magnitudes, from those of the buses left.

    Parameters
    ----------
    lumped : Lumped
        The island.
    v : ndarray, shape (time, node)
        Magnitudes at the buses left. [pu]
    buses : ndarray of int, shape (wanted,)
        Buses, left or taken off; -1 gives nan.

    Returns
    -------
    ndarray, shape (time, wanted)
        Magnitudes, with the loads of the last state. [pu]
    """
    twigs = lumped.twigs
    known: dict[int, FloatArray] = {int(b): v[:, k] for k, b in enumerate(lumped.bus)}
    before = {int(b): float(abs(x)) for b, x in zip(lumped.bus, lumped.v, strict=True)}
    place = {int(b): k for k, b in enumerate(twigs.bus)}

    def find(bus: int) -> FloatArray | None:
        if bus not in known and bus in place:
            k = place[bus]
            behind = find(int(twigs.behind[k]))
            if behind is None:
                return None
            before[bus] = float(_through(twigs, k, np.array([before[int(twigs.behind[k])]]), 0.0)[0])
            known[bus] = _through(twigs, k, behind, FLOOR_PU * before[bus])
        return known.get(bus)

    out = np.full((len(v), len(buses)), np.nan)
    for n, bus in enumerate(buses.tolist()):
        found = find(bus)
        if found is not None:
            out[:, n] = found
    return out


def _through(twigs: Twigs, k: int, behind: FloatArray, floor: float) -> FloatArray:
    """Return the magnitude at the end of a twig; below the floor its whole load is an impedance."""
    a, b = complex(twigs.constant[k, -1]), complex(twigs.square[k, -1])
    z = 1.0 / (twigs.own[k] + np.conj(b))
    end = np.maximum(behind, 1e-9).astype(complex)
    v = np.abs(_upper(-twigs.out[k] * z * end, np.full(len(end), z * np.conj(a))))
    if floor == 0.0:
        return np.asarray(v)
    as_impedance = np.abs(twigs.out[k] / (twigs.own[k] + np.conj(b + a / floor**2))) * behind
    return np.asarray(np.where(v < floor, as_impedance, v))
