"""What consumers draw at the buses of the network, those at the end of a branch of their own included.

A bus with consumers and one branch, and nothing else, is a leaf: its voltage follows from that of the bus
behind it in closed form, so that the network to be solved holds no leaves. With the branch's two-port and the
consumers' constant power S and admittance y: ``V' = v + z' conj(S/v)``, ``z' = 1/(ytt + y)``,
``V' = -ytf V z'``, a quadratic in ``|v|^2``.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Demand:
    """Consumers' power, complex [place, scenario or 1]: constant, and what goes with V^2.

    Places are the buses with consumers on them, then the leaves.
    """

    constant: ComplexArray
    impedance: ComplexArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Ports:
    """Buses at which consumers draw current, themselves or through leaves.

    ``bus`` [port]; ``direct`` [place] the ports of consumers on the bus itself; leaves are sorted by parent:
    ``parent`` [leaf] their ports, ``first`` the first leaf of each parent and ``parents`` those ports.
    ``into`` [leaf] is the branch's admittance from leaf to parent, ``out`` that from parent to leaf, ``own``
    [leaf] the leaf's own with its shunts.
    """

    bus: IntArray
    direct: IntArray
    parent: IntArray
    first: IntArray
    parents: IntArray
    into: ComplexArray
    out: ComplexArray
    own: ComplexArray

    @property
    def leaves(self) -> int:
        """Number of leaves."""
        return len(self.parent)


def ports_of(
    direct_bus: IntArray, parent_bus: IntArray, into: ComplexArray, out: ComplexArray, own: ComplexArray
) -> Ports:
    """Return the ports for consumers on buses and on leaves.

    Parameters
    ----------
    direct_bus : ndarray of int, shape (direct,)
        Buses with consumers, each once.
    parent_bus : ndarray of int, shape (leaf,)
        Bus behind each leaf, ascending.
    into, out, own : ndarray, shape (leaf,)
        Admittances of the leaves' branches. [pu]

    Returns
    -------
    Ports
        Every bus once.
    """
    bus = np.union1d(direct_bus, parent_bus).astype(np.int64)
    parent = np.searchsorted(bus, parent_bus)
    parents, first = np.unique(parent, return_index=True)
    return Ports(
        bus=bus,
        direct=np.searchsorted(bus, direct_bus),
        parent=parent,
        first=first,
        parents=parents,
        into=into[:, None],
        out=out[:, None],
        own=own[:, None],
    )


def leaf_voltage(ports: Ports, v: ComplexArray, demand: Demand) -> ComplexArray:
    """Return the voltage at every leaf.

    Source: the two-bus quadratic, derived; for example in J. J. Grainger, W. D. Stevenson, *Power System
    Analysis*, from memory. The upper root is taken; NaN where the branch cannot carry the load.

    Parameters
    ----------
    ports : Ports
        Of the mode.
    v : ndarray, shape (port, scenario)
        Voltages at the ports. [pu]
    demand : Demand
        Of the consumers.

    Returns
    -------
    ndarray, shape (leaf, scenario)
        Voltage. [pu]
    """
    behind, a = _behind(ports, v, demand)
    square = behind.real**2 + behind.imag**2
    b = square - 2.0 * a.real
    u = 0.5 * (b + np.sqrt(b * b - 4.0 * (a.real**2 + a.imag**2)))
    return np.asarray((u + np.conj(a)) * (behind / square))


def _behind(ports: Ports, v: ComplexArray, demand: Demand) -> tuple[ComplexArray, ComplexArray]:
    """Return V' and z' conj(S) of every leaf."""
    n = len(ports.direct)
    z = 1.0 / (ports.own + np.conj(demand.impedance[n:]))
    return -ports.out * z * v[ports.parent], z * np.conj(demand.constant[n:])


def drawn_current(ports: Ports, v: ComplexArray, demand: Demand) -> ComplexArray:
    """Return the current that goes to consumers at every port, without what is linear in its own voltage.

    Parameters
    ----------
    ports : Ports
        Of the mode.
    v : ndarray, shape (port, scenario)
        Voltages at the ports. [pu]
    demand : Demand
        Of the consumers.

    Returns
    -------
    ndarray, shape (port, scenario)
        Current. [pu]
    """
    n = len(ports.direct)
    width = max(v.shape[1], demand.constant.shape[1], demand.impedance.shape[1])
    out = np.zeros((len(v), width), complex)
    here = v[ports.direct]
    out[ports.direct] = np.conj(demand.constant[:n] / here) + np.conj(demand.impedance[:n]) * here
    if ports.leaves:
        through = ports.into * leaf_voltage(ports, v, demand)
        out[ports.parents] += np.add.reduceat(through, ports.first, axis=0)
    return out


def drawn_gradient(ports: Ports, v: ComplexArray, demand: Demand) -> FloatArray:
    """Return the gradient of `drawn_current` for one scenario, [4, port]: Re by e, Re by f, Im by e, Im by f.

    With ``dI = A dV + B conj(dV)``: on a bus ``A = conj(y)``, ``B = -conj(S)/conj(V)^2``; through a leaf,
    with ``beta = -z' conj(S)/conj(v)^2`` and ``V' = k V``, ``dv = (k dV - beta conj(k dV))/(1 - |beta|^2)``.

    Parameters
    ----------
    ports : Ports
        Of the mode.
    v : ndarray, shape (port, 1)
        Voltages at the ports. [pu]
    demand : Demand
        Of the consumers.

    Returns
    -------
    ndarray, shape (4, port)
        Gradient. [pu]
    """
    n = len(ports.direct)
    a, b = np.zeros((2, len(v)), complex)
    here = v[ports.direct, 0]
    a[ports.direct] = np.conj(demand.impedance[:n, 0])
    b[ports.direct] = -np.conj(demand.constant[:n, 0] / here**2)
    if ports.leaves:
        _, product = _behind(ports, v, demand)
        z = 1.0 / (ports.own + np.conj(demand.impedance[n:]))
        k = (-ports.out * z)[:, 0]
        beta = -(product / np.conj(leaf_voltage(ports, v, demand)) ** 2)[:, 0]
        slope = ports.into[:, 0] / (1.0 - np.abs(beta) ** 2)
        a[ports.parents] += np.add.reduceat(slope * k, ports.first)
        b[ports.parents] += np.add.reduceat(-slope * beta * np.conj(k), ports.first)
    return np.stack([(a + b).real, (b - a).imag, (a + b).imag, (a - b).real])
