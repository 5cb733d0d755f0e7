"""The equations of a mode in real numbers: node currents, source laws, one power balance for each island.

Unknowns are Re V and Im V of every bus, Re I and Im I of every source, and one number m for each island (see
`power`). Rows: node currents (real, then imaginary), active-power law and voltage law of each source, and for
each island either the angle of its first source's bus or, on shore supply, m itself.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Protocol

import numpy as np
from numpy.typing import NDArray
from scipy.linalg.lapack import dgetrf, dgetrs
from scipy.sparse import csc_matrix, csr_array
from scipy.sparse.linalg import SuperLU, splu

from study.network.consumers import Currents, Demand, Ports, drawn_by
from study.network.laws import VoltageLaws, some, take
from study.network.power import PowerLaws

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]

TOLERANCE = 1e-10  # of node current and source laws, pu of the base power
DENSE_UP_TO = 110  # unknowns
ROUNDING = 16.0 * float(np.finfo(float).eps)


@dataclass(frozen=True, slots=True, kw_only=True)
class Structure:
    """Sizes and places that do not change while a mode is solved.

    ``admittance`` is that of the buses that are no leaves (see `consumers`). ``source_bus`` and
    ``source_island`` are [source], ``reference_bus`` [island] the bus whose voltage has no imaginary part;
    ``accept`` is the residual accepted, pu.
    ``rows`` and ``columns`` are those of the Jacobian's entries in the order `jacobian` fills them;
    ``slot`` their places in the sparse matrix with pattern ``indices`` and ``indptr``, ``flat`` in the dense
    one.
    """

    admittance: csr_array
    source_bus: IntArray
    source_island: IntArray
    ports: Ports
    reference_bus: IntArray
    islands: int
    row_start: IntArray
    accept: float
    fixed_values: FloatArray
    slot: IntArray
    flat: IntArray
    indices: IntArray
    indptr: IntArray

    @property
    def buses(self) -> int:
        """Number of buses that are no leaves."""
        return int(self.admittance.shape[0])

    @property
    def all_buses(self) -> int:
        """Number of buses, leaves included."""
        return self.buses + self.ports.leaves

    @property
    def sources(self) -> int:
        """Number of sources."""
        return len(self.source_bus)

    @property
    def size(self) -> int:
        """Number of unknowns."""
        return 2 * self.buses + 2 * self.sources + self.islands


def structure(
    admittance: csr_array, source_bus: IntArray, source_island: IntArray, ports: Ports, islands: int
) -> Structure:
    """Return the structure of a mode's equations.

    Parameters
    ----------
    admittance : csr_array, shape (bus, bus)
        Nodal admittance. [pu]
    source_bus, source_island : ndarray of int, shape (source,)
        Where each source stands.
    ports : Ports
        Where consumers draw current.
    islands : int
        Number of islands.

    Returns
    -------
    Structure
        With the pattern of the Jacobian.
    """
    n, s = admittance.shape[0], len(source_bus)
    y = admittance.tocoo()
    row, col = y.coords
    j = np.arange(s)
    own = np.repeat(j, s), np.tile(j, s)
    r_p, r_q = 2 * n + j, 2 * n + s + j
    r_m = 2 * n + 2 * s + np.arange(islands)
    c_re, c_im, c_m = 2 * n + j, 2 * n + s + j, 2 * n + 2 * s + np.arange(islands)
    first = np.array([np.flatnonzero(source_island == m)[0] for m in range(islands)], np.int64)
    ref_bus = source_bus[first] if islands else np.zeros(0, np.int64)
    b = ports.bus
    rows = [row, row, n + row, n + row, source_bus, n + source_bus]
    cols = [col, n + col, col, n + col, c_re, c_im]
    fixed = np.concatenate([y.data.real, -y.data.imag, y.data.imag, y.data.real, -np.ones(2 * s)])
    rows += [b, b, n + b, n + b, r_p, r_p, r_p, r_p, r_p]
    cols += [b, n + b, b, n + b, source_bus, n + source_bus, c_re, c_im, 2 * n + 2 * s + source_island]
    rows += [r_q[own[0]]] * 4
    cols += [source_bus[own[1]], (n + source_bus)[own[1]], c_re[own[1]], c_im[own[1]]]
    rows += [r_m, r_m]
    cols += [n + ref_bus, c_m]
    all_rows, all_cols = np.concatenate(rows), np.concatenate(cols)
    size = 2 * n + 2 * s + islands
    key = all_cols.astype(np.int64) * size + all_rows
    unique, slot = np.unique(key, return_inverse=True)
    indptr = np.searchsorted(unique // size, np.arange(size + 1))
    return Structure(
        admittance=admittance,
        source_bus=source_bus,
        source_island=source_island,
        ports=ports,
        reference_bus=ref_bus,
        islands=islands,
        row_start=admittance.indptr[:-1].astype(np.int64),
        accept=_accepted(admittance, ports),
        fixed_values=fixed,
        slot=slot,
        flat=key,
        indices=(unique % size).astype(np.int32),
        indptr=indptr.astype(np.int32),
    )


def _accepted(admittance: csr_array, ports: Ports) -> float:
    """Return the residual accepted: 1e-10 pu, or what rounding leaves beside very small impedances."""
    entries = np.concatenate([admittance.data, ports.own[:, 0]])
    return max(TOLERANCE, ROUNDING * float(np.abs(entries).max(initial=0.0)))


@dataclass(frozen=True, slots=True, kw_only=True)
class Point:
    """A point in the space of unknowns: [bus], [source] and [island], each with scenarios behind."""

    v: ComplexArray
    i: ComplexArray
    m: FloatArray


def shore_row(laws: VoltageLaws, v: ComplexArray, i: ComplexArray) -> FloatArray:
    """Return Im(V + Z I) of each source: zero for a shore supply, whose voltage is the angle reference."""
    return np.asarray(laws.compensated(v, i).imag)


def power_residual(
    at: Structure, laws: VoltageLaws, power: PowerLaws, m: FloatArray, *, v: ComplexArray, i: ComplexArray
) -> FloatArray:
    """Return P - a - b m of each source, or the second equation of a shore supply; [source, scenario]."""
    out = (v * np.conj(i)).real - power.a - power.b * m[at.source_island]
    if laws.any_behind:
        out[laws.behind] = shore_row(laws, v, i)[laws.behind]
    return np.asarray(out)


@dataclass(frozen=True, slots=True, kw_only=True)
class Problem:
    """What is to be solved: the mode's structure, and laws and demand of one scenario or of many."""

    at: Structure
    laws: VoltageLaws
    power: PowerLaws
    demand: Demand

    def column(self, k: int | None) -> Problem:
        """Return one scenario, or the mean of all where k is None."""
        return replace(
            self,
            laws=self.laws.column(k),
            power=self.power.column(k),
            demand=Demand(constant=take(self.demand.constant, k), impedance=take(self.demand.impedance, k)),
        )

    def columns(self, k: IntArray) -> Problem:
        """Return some scenarios."""
        return replace(
            self,
            laws=self.laws.columns(k),
            power=self.power.columns(k),
            demand=Demand(constant=some(self.demand.constant, k), impedance=some(self.demand.impedance, k)),
        )


def residual(problem: Problem, currents: Currents, x: Point) -> FloatArray:
    """Return the residual of every row for one scenario.

    Parameters
    ----------
    problem : Problem
        One scenario.
    currents : Currents
        Of its consumers.
    x : Point
        Arrays with one column.

    Returns
    -------
    ndarray, shape (size,)
        Residuals. [pu]
    """
    at, laws, power = problem.at, problem.laws, problem.power
    n, s = at.buses, at.sources
    v, i, m = x.v[:, 0], x.i[:, 0], x.m[:, 0]
    # The sparse product by hand: the library's own costs more than the multiplications.
    current = np.add.reduceat(at.admittance.data * v[at.admittance.indices], at.row_start)
    np.subtract.at(current, at.source_bus, i)
    current[at.ports.bus] += currents.at(x.v[at.ports.bus])[:, 0]
    out = np.empty(at.size)
    out[:n], out[n : 2 * n] = current.real, current.imag
    v_s = x.v[at.source_bus]
    out[2 * n : 2 * n + s] = power_residual(at, laws, power, x.m, v=v_s, i=x.i)[:, 0]
    out[2 * n + s : 2 * n + 2 * s] = laws.residual(v_s, x.i)[:, 0]
    out[2 * n + 2 * s :] = np.where(power.shore, m, v[at.reference_bus].imag)
    return out


class Factors(Protocol):
    """A factorised matrix, dense or sparse."""

    def solve(self, right: FloatArray) -> FloatArray:
        """Return the solution for one or more right-hand sides."""


class DenseFactors:
    """Factors of a small Jacobian: below a hundred or so unknowns LAPACK is quicker than a sparse method.

    Parameters
    ----------
    matrix : ndarray, shape (size, size)
        The Jacobian.

    Raises
    ------
    RuntimeError
        Singular matrix.
    """

    def __init__(self, matrix: FloatArray) -> None:
        self._factors, self._pivots, info = dgetrf(matrix, overwrite_a=True)
        if info > 0:
            raise RuntimeError("singular Jacobian")

    def solve(self, right: FloatArray) -> FloatArray:
        """Return the solution for one or more right-hand sides."""
        return np.asarray(dgetrs(self._factors, self._pivots, right)[0])


def jacobian(problem: Problem, x: Point) -> Factors:
    """Return the factorised Jacobian at a point of one scenario.

    Parameters
    ----------
    problem : Problem
        One scenario.
    x : Point
        Arrays with one column.

    Returns
    -------
    Factors
        Dense for few unknowns.

    Raises
    ------
    RuntimeError
        Singular matrix.
    """
    at = problem.at
    if at.size > DENSE_UP_TO:
        sparse: Factors = sparse_jacobian(problem, x)
        return sparse
    values = jacobian_values(problem, x)
    flat = np.asarray(np.bincount(at.flat, weights=values, minlength=at.size**2), float)
    return DenseFactors(flat.reshape((at.size, at.size), order="F"))


def sparse_jacobian(problem: Problem, x: Point) -> SuperLU:
    """Return the sparse factors of the Jacobian, whatever its size; see `jacobian`."""
    at = problem.at
    values = jacobian_values(problem, x)
    data = np.bincount(at.slot, weights=values, minlength=len(at.indices))
    return splu(csc_matrix((data, at.indices, at.indptr), shape=(at.size, at.size)))


def jacobian_values(problem: Problem, x: Point) -> FloatArray:
    """Return the Jacobian's entries in the order of `structure`."""
    at, laws, power = problem.at, problem.laws, problem.power
    v_s, i_s = x.v[at.source_bus, 0], x.i[:, 0]
    by_load = drawn_by(at.ports, problem.demand).gradient(x.v[at.ports.bus])
    by_power = np.stack([i_s.real, i_s.imag, v_s.real, v_s.imag])
    b = power.b[:, 0].copy()
    if laws.any_behind:
        behind = laws.behind
        by_power[:, behind] = np.stack(
            [0 * laws.r[:, 0], 0 * laws.r[:, 0] + 1.0, laws.x[:, 0], laws.r[:, 0]]
        )[:, behind]
        b[behind] = 0.0
    by_law = laws.gradient(v_s, i_s)
    return np.concatenate(
        [
            at.fixed_values,
            by_load.ravel(),
            by_power.ravel(),
            -b,
            by_law.transpose(1, 0, 2).ravel(),
            np.where(power.shore, 0.0, 1.0),
            np.where(power.shore, 1.0, 0.0),
        ]
    )
