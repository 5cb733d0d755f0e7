"""The laws of the sources as equations in terminal voltage and current, with their gradients.

Arrays are [source, scenario]; a source's current leaves it. Every equation is zero where the law holds.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from study.formulas.excitation import FieldSupply, available_field
from study.formulas.load_compensation import cross_current_reactance
from study.formulas.synchronous import Machine, field_required
from study.network.sources import Law, Source

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]
_Number = TypeVar("_Number", np.float64, np.complex128)

# Plain integers: members of an enumeration are slow to look up and to compare.
PHASOR, CROSS_CURRENT = int(Law.PHASOR), int(Law.CROSS_CURRENT)
BEHIND_IMPEDANCE = int(Law.BEHIND_IMPEDANCE)
EVERY = slice(None)
STEP = 1e-6  # of voltage and current, for the gradient of the field equation


@dataclass(frozen=True, slots=True, kw_only=True)
class VoltageLaws:
    """The voltage law of each source, per unit of the network's base.

    ``code`` [source], and ``groups`` its kinds with their sources; ``e_ref`` and ``x`` [source, scenario or
    1]; ``cross`` [source, source] weights with which the currents of a cross-current group count, and
    ``cross_x`` [source, scenario or 1] the reactance that they act through. ``to_own_v`` and
    ``to_own_i`` turn network per unit into the source's. ``z`` is r + jx; ``behind`` [source] marks supplies
    behind an impedance, ``crossed`` and ``any_behind`` say whether there are any reactances or supplies such.
    """

    code: IntArray
    e_ref: FloatArray
    x: FloatArray
    r: FloatArray
    q_set: FloatArray
    q_per_p: FloatArray
    cross: FloatArray
    cross_x: FloatArray
    i_max: FloatArray
    to_own_v: FloatArray
    to_own_i: FloatArray
    machines: tuple[Machine | None, ...]
    supplies: tuple[FieldSupply, ...]
    groups: tuple[tuple[int, IntArray], ...]
    z: ComplexArray
    crossed: bool
    behind: BoolArray
    any_behind: bool

    def with_code(self, code: IntArray) -> VoltageLaws:
        """Return the laws with other kinds of law."""
        return replace(self, code=code, **_of_code(code))

    def column(self, k: int | None) -> VoltageLaws:
        """Return the laws of one scenario, or of the mean of all where k is None."""
        if self.e_ref.shape[1] == self.x.shape[1] == 1:
            return self
        return replace(
            self,
            e_ref=take(self.e_ref, k),
            x=take(self.x, k),
            z=take(self.z, k),
            cross_x=take(self.cross_x, k),
        )

    def columns(self, k: IntArray) -> VoltageLaws:
        """Return the laws of some scenarios."""
        if self.e_ref.shape[1] == self.x.shape[1] == 1:
            return self
        return replace(
            self,
            e_ref=some(self.e_ref, k),
            x=some(self.x, k),
            z=some(self.z, k),
            cross_x=some(self.cross_x, k),
        )

    def residual(self, v: ComplexArray, i: ComplexArray) -> FloatArray:
        """Return the residual of every law, [source, scenario]; the first of the two for an impedance."""
        if len(self.groups) == 1:
            code, k = self.groups[0]
            return _RESIDUAL[code](self, EVERY, v, i)
        out = np.empty(v.shape)
        for code, k in self.groups:
            out[k] = _RESIDUAL[code](self, k, v, i)
        return out

    def compensated(self, v: ComplexArray, i: ComplexArray) -> ComplexArray:
        """Return V + jX I and what cross-current compensation adds, [source, scenario]."""
        out = v + self.z * i
        return out + 1j * self.cross_x * (self.cross @ i) if self.crossed else out

    def field_surplus(self, j: int, v: ComplexArray, i: ComplexArray) -> FloatArray:
        """Return field required less field available of source j, per unit of its air-gap-line field."""
        machine = self.machines[j]
        assert machine is not None
        v_own, i_own, phi = self._own(j, v, i)
        return field_required(v_own, i_own, phi, machine) - available_field(
            v_own, i_own, phi, self.supplies[j]
        )

    def own(self, v: ComplexArray, i: ComplexArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Return voltage, current and angle of lag of all sources, per unit of their own rating."""
        return np.abs(v) * self.to_own_v, np.abs(i) * self.to_own_i, np.angle(v * np.conj(i))

    def _own(self, j: int, v: ComplexArray, i: ComplexArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        phi = np.angle(v * np.conj(i))
        return np.abs(v) * self.to_own_v[j], np.abs(i) * self.to_own_i[j], phi

    def gradient(self, v: ComplexArray, i: ComplexArray) -> FloatArray:
        """Return the gradient at one point, [source, 4, source]: by Re V, Im V, Re I, Im I of each source."""
        count = len(v)
        out = np.zeros((count, 4, count))
        vc = self.compensated(v[:, None], i[:, None])[:, 0]
        for code, k in self.groups:
            if code in (PHASOR, CROSS_CURRENT):
                # Of |Vc|^2: twice Vc times what each unknown does to it.
                turned = 1j * (self.cross_x[k] * self.cross[k]) * np.conj(vc[k])[:, None]
                turned[np.arange(len(k)), k] += self.z[k, 0] * np.conj(vc[k])
                out[k, 0, k], out[k, 1, k] = 2.0 * vc[k].real, 2.0 * vc[k].imag
                out[k, 2], out[k, 3] = 2.0 * turned.real, -2.0 * turned.imag
            else:
                for j in k:
                    out[j, :, j] = self._gradient_of(j, v[j], i[j])
        return out

    def _gradient_of(self, j: int, v: complex, i: complex) -> Any:
        e, f, re, im = v.real, v.imag, i.real, i.imag
        x, k = self.x[j, 0], self.q_per_p[j, 0]
        match self.code[j]:
            case Law.REACTIVE_CURRENT:
                per_v = self.e_ref[j, 0] / abs(v)
                return (2.0 * e - x * im - per_v * e, 2.0 * f + x * re - per_v * f, x * f, -x * e)
            case Law.REACTIVE_POWER:
                return (-im - k * re, re - k * im, f - k * e, -e - k * f)
            case Law.BEHIND_IMPEDANCE:
                return (1.0, 0.0, self.r[j, 0], -x)
            case Law.CURRENT_LIMIT:
                return (0.0, 0.0, 2.0 * re, 2.0 * im)
            case Law.FIELD:
                return self._field_gradient(j, v, i)
        raise ValueError(f"unknown law {self.code[j]}")

    def _field_gradient(self, j: int, v: complex, i: complex) -> FloatArray:
        h_v, h_i = STEP, STEP / self.to_own_i[j, 0]
        dv = np.array([h_v, -h_v, 1j * h_v, -1j * h_v, 0, 0, 0, 0])
        di = np.array([0, 0, 0, 0, h_i, -h_i, 1j * h_i, -1j * h_i])
        g = self.field_surplus(j, v + dv, i + di)
        return (g[0::2] - g[1::2]) / (2.0 * np.array([h_v, h_v, h_i, h_i]))


def _of_phasor(laws: VoltageLaws, k: Any, v: ComplexArray, i: ComplexArray) -> FloatArray:
    seen = laws.compensated(v, i)[k]
    return np.asarray(seen.real**2 + seen.imag**2 - laws.e_ref[k] ** 2)


def _of_reactive_current(laws: VoltageLaws, k: Any, v: ComplexArray, i: ComplexArray) -> FloatArray:
    v_mag, q = np.abs(v[k]), (v[k] * np.conj(i[k])).imag
    return np.asarray(v_mag**2 + laws.x[k] * q - laws.e_ref[k] * v_mag)


def _of_reactive_power(laws: VoltageLaws, k: Any, v: ComplexArray, i: ComplexArray) -> FloatArray:
    s = v[k] * np.conj(i[k])
    return np.asarray(s.imag - laws.q_set[k] - laws.q_per_p[k] * s.real)


def _of_impedance(laws: VoltageLaws, k: Any, v: ComplexArray, i: ComplexArray) -> FloatArray:
    return np.asarray(laws.compensated(v, i)[k].real - laws.e_ref[k])


def _of_current_limit(laws: VoltageLaws, k: Any, v: ComplexArray, i: ComplexArray) -> FloatArray:
    return np.asarray(np.abs(i[k]) ** 2 - laws.i_max[k] ** 2)


def _of_field(laws: VoltageLaws, k: Any, v: ComplexArray, i: ComplexArray) -> FloatArray:
    return np.stack([laws.field_surplus(j, v[j], i[j]) for j in np.arange(len(v))[k]])


_RESIDUAL: dict[int, Callable[[VoltageLaws, Any, ComplexArray, ComplexArray], FloatArray]] = {
    PHASOR: _of_phasor,
    CROSS_CURRENT: _of_phasor,
    int(Law.REACTIVE_CURRENT): _of_reactive_current,
    int(Law.REACTIVE_POWER): _of_reactive_power,
    BEHIND_IMPEDANCE: _of_impedance,
    int(Law.CURRENT_LIMIT): _of_current_limit,
    int(Law.FIELD): _of_field,
}


def take(values: NDArray[_Number], k: int | None) -> NDArray[_Number]:
    """Return one column, or the mean column where k is None; one column stands for all scenarios."""
    if values.shape[1] == 1:
        return values
    return np.asarray(values.mean(axis=1, keepdims=True)) if k is None else values[:, k : k + 1]


def some(values: NDArray[_Number], k: IntArray) -> NDArray[_Number]:
    """Return some columns, `k` ascending; one column stands for all scenarios."""
    width = values.shape[1]
    return values if width == 1 or len(k) == width else values[:, k]


def voltage_laws(
    sources: tuple[Source, ...],
    u_base_v: FloatArray,
    s_base_kva: float,
    *,
    v_ref_pu: FloatArray,
    xc_pu: FloatArray,
) -> VoltageLaws:
    """Return the laws of the sources within their limits.

    Parameters
    ----------
    sources : tuple of Source
        Sources on line.
    u_base_v : ndarray, shape (source,)
        Base voltage at each source's node. [V]
    s_base_kva : float
        Base power. [kVA]
    v_ref_pu, xc_pu : ndarray, shape (source, scenario or 1)
        Voltage at no load and compensating reactance. [pu of the source's own rating]

    Returns
    -------
    VoltageLaws
        Per unit of the network.
    """
    rating = np.array([s.s_rated_kva for s in sources])[:, None] / s_base_kva
    own_v = np.array([u / s.u_rated_v for u, s in zip(u_base_v, sources, strict=True)])[:, None]
    to_network = 1.0 / (own_v**2 * rating)
    code = np.array([s.law for s in sources], np.int64)
    cross = _cross_weights(sources, own_v[:, 0], rating[:, 0])
    crossed = np.any(cross != 0.0, axis=1, keepdims=True)
    own_x = np.where((code == Law.CROSS_CURRENT)[:, None], 0.0, xc_pu)
    x, r = own_x * to_network, np.array([s.r_pu for s in sources]).reshape(-1, 1) * to_network
    return VoltageLaws(
        code=code,
        e_ref=v_ref_pu / own_v,
        x=x,
        r=r,
        q_set=np.array([s.q_set_pu for s in sources]).reshape(-1, 1) * rating,
        q_per_p=np.array([s.q_per_p for s in sources]).reshape(-1, 1),
        cross=cross,
        cross_x=np.where(crossed, xc_pu, 0.0),
        i_max=np.array([s.i_max_pu for s in sources]).reshape(-1, 1) * rating * own_v,
        to_own_v=own_v,
        to_own_i=1.0 / (rating * own_v),
        machines=tuple(s.machine for s in sources),
        supplies=tuple(s.field for s in sources),
        z=r + 1j * x,
        crossed=bool(crossed.any()),
        **_of_code(code),
    )


def _of_code(code: IntArray) -> dict[str, Any]:
    """Return what follows from the kinds of law alone."""
    behind = code == BEHIND_IMPEDANCE
    return {"groups": _groups(code), "behind": behind, "any_behind": bool(behind.any())}


def _groups(code: IntArray) -> tuple[tuple[int, IntArray], ...]:
    """Return each kind of law with the places of the sources under it."""
    kinds = sorted(set(code.tolist()))
    return tuple((kind, np.flatnonzero(code == kind)) for kind in kinds)


def _cross_weights(sources: tuple[Source, ...], own_v: FloatArray, rating: FloatArray) -> FloatArray:
    """Return the weights of the currents of all cross-current groups, [source, source].

    Row i multiplies the sets' currents in pu of their own rating, which are I / (rating own_v); with i's
    reactance they give the voltage that i's regulator sees, in pu of the network. A regulator's row is zero
    where it is alone in its group.
    """
    out = np.zeros((len(sources), len(sources)))
    groups = {(s.island, s.cross_group) for s in sources if s.law == Law.CROSS_CURRENT}
    for island, group in groups:
        k = [
            n
            for n, s in enumerate(sources)
            if s.law == Law.CROSS_CURRENT and (s.island, s.cross_group) == (island, group)
        ]
        weights = cross_current_reactance([sources[m].s_rated_kva for m in k], 1.0)
        out[np.ix_(k, k)] = weights / own_v[k][:, None] / (rating[k] * own_v[k])
    return out
