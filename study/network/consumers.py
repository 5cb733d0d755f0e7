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


@dataclass(frozen=True, slots=True, kw_only=True)
class Drawn:
    """Consumers of some scenarios, with what does not depend on the voltages worked out, [place, scenario].

    On buses ``s`` is conj(S) and ``y`` the conjugate admittance. On leaves ``ratio`` is V'/V without constant
    power and ``product`` z' conj(S), of which ``twice`` is twice the real part and ``fourfold`` four times
    the square.
    """

    ports: Ports
    s: ComplexArray
    y: ComplexArray
    ratio: ComplexArray
    product: ComplexArray
    twice: FloatArray
    fourfold: FloatArray

    def leaf_voltage(self, v: ComplexArray) -> ComplexArray:
        """Return the voltage at every leaf from those at the ports, [leaf, scenario], per unit.

        Source: the two-bus quadratic, derived; for example in J. J. Grainger, W. D. Stevenson, *Power System
        Analysis*, from memory. The upper root is taken; NaN where the branch cannot carry the load.
        """
        behind = self.ratio * v[self.ports.parent]
        square = behind.real**2 + behind.imag**2
        b = square - self.twice
        u = 0.5 * (b + np.sqrt(b * b - self.fourfold))
        return np.asarray((u + np.conj(self.product)) * (behind / square))

    def gradient(self, v: ComplexArray) -> FloatArray:
        """Return the gradient of the current for one scenario, [4, port]: Re by e, Re by f, Im by e, Im by f.

        With ``dI = A dV + B conj(dV)``: on a bus ``A = conj(y)``, ``B = -conj(S)/conj(V)^2``; through a leaf,
        ``beta = -z' conj(S)/conj(v)^2``, ``V' = k V`` and ``dv = (k dV - beta conj(k dV))/(1 - |beta|^2)``.
        """
        ports = self.ports
        a, b = np.zeros((2, len(v)), complex)
        a[ports.direct] = self.y[:, 0]
        b[ports.direct] = -self.s[:, 0] / np.conj(v[ports.direct, 0]) ** 2
        if ports.leaves:
            k = self.ratio[:, 0]
            beta = -(self.product / np.conj(self.leaf_voltage(v)) ** 2)[:, 0]
            slope = ports.into[:, 0] / (1.0 - np.abs(beta) ** 2)
            a[ports.parents] += np.add.reduceat(slope * k, ports.first)
            b[ports.parents] += np.add.reduceat(-slope * beta * np.conj(k), ports.first)
        return np.stack([(a + b).real, (b - a).imag, (a + b).imag, (a - b).real])


def drawn_by(ports: Ports, demand: Demand) -> Drawn:
    """Return the consumers of some scenarios, ready to be evaluated at any voltage.

    Parameters
    ----------
    ports : Ports
        Of the mode.
    demand : Demand
        Of the consumers.

    Returns
    -------
    Drawn
        For the same scenarios.
    """
    n = len(ports.direct)
    z = 1.0 / (ports.own + np.conj(demand.impedance[n:]))
    product = z * np.conj(demand.constant[n:])
    return Drawn(
        ports=ports,
        s=np.conj(demand.constant[:n]),
        y=np.conj(demand.impedance[:n]),
        ratio=-ports.out * z,
        product=product,
        twice=2.0 * product.real,
        fourfold=4.0 * (product.real**2 + product.imag**2),
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Currents:
    """What consumers draw at the ports, as a function of the voltages there, for many evaluations.

    A leaf without constant power is an admittance at its port: ``straight`` [port, scenario] adds them up.
    The others, with k = V'/V without their power and p = z' conj(S), draw ``ytf' (u + conj(p)) / conj(k V)``
    with ``2 u = b + sqrt(b^2 - 4 |p|^2)`` and ``b = |k|^2 |V|^2 - 2 Re p``; arrays [leaf, scenario]:
    ``square`` is |k|^2, ``half_re`` and ``half_im`` multiply 2 u. ``parent`` [leaf] is the port, ``parents``
    each port once, ``first`` its first leaf, and ``fixed`` [parents, scenario] the sum of the part without u.
    """

    ports: Ports
    s: ComplexArray
    y: ComplexArray
    straight: ComplexArray
    parent: IntArray
    parents: IntArray
    first: IntArray
    square: FloatArray
    twice: FloatArray
    fourfold: FloatArray
    half_re: FloatArray
    half_im: FloatArray
    fixed: ComplexArray

    def at(self, v: ComplexArray) -> ComplexArray:
        """Return what is drawn at every port but for the near ends of the leaves' branches, per unit."""
        direct = self.ports.direct
        if not self.ports.leaves and len(direct) == len(v):
            return np.asarray(self.s / np.conj(v) + self.y * v)
        out = self.straight * v
        if len(direct):
            here = v[direct]
            out[direct] += self.s / np.conj(here) + self.y * here
        if len(self.parents):
            out[self.parents] += self._through(v) / np.conj(v[self.parents])
        return np.asarray(out)

    def _through(self, v: ComplexArray) -> ComplexArray:
        """Return the current to the leaves with constant power, times the conjugate voltage."""
        v_square = v.real**2 + v.imag**2
        b = self.square * v_square[self.parent] - self.twice
        double = b + np.sqrt(b * b - self.fourfold)
        out = np.empty((len(self.parents), double.shape[1]), complex)
        out.real = np.add.reduceat(self.half_re * double, self.first, axis=0)
        out.imag = np.add.reduceat(self.half_im * double, self.first, axis=0)
        return out + self.fixed


def currents_of(drawn: Drawn) -> Currents:
    """Return the consumers' currents as a function of the voltages.

    Parameters
    ----------
    drawn : Drawn
        Consumers of some scenarios.

    Returns
    -------
    Currents
        For the same scenarios.
    """
    ports, bent = drawn.ports, np.asarray(drawn.product.any(axis=1))
    width = max(drawn.ratio.shape[1], drawn.product.shape[1])
    straight = np.zeros((len(ports.bus), width), complex)
    through = ports.into * drawn.ratio
    k = np.flatnonzero(bent)
    parent, ratio, product = ports.parent[k], drawn.ratio[k], drawn.product[k]
    first = np.flatnonzero(np.diff(parent, prepend=-1))
    square = ratio.real**2 + ratio.imag**2
    half = through[k] * (0.5 / square)
    if len(k) < ports.leaves:
        through[k] = 0.0
        straight[ports.parents] = np.add.reduceat(through, ports.first, axis=0)
    fixed = 2.0 * half * np.conj(product)
    return Currents(
        ports=ports,
        s=drawn.s,
        y=drawn.y,
        straight=straight,
        parent=parent,
        parents=parent[first],
        first=first,
        square=square,
        twice=drawn.twice[k],
        fourfold=drawn.fourfold[k],
        half_re=np.ascontiguousarray(half.real),
        half_im=np.ascontiguousarray(half.imag),
        fixed=np.add.reduceat(fixed, first, axis=0) if len(k) else fixed,
    )
