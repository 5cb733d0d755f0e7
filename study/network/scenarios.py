"""Thousands of scenarios of one mode: one Jacobian serves them all, the rest of each equation is iterated.

The equations are ``F(x) = 0`` with Jacobian J at the mean scenario. ``J x_new = J x - F(x)``: every linear
row drops out of the right-hand side, so that only consumers and source laws have to be evaluated, and the
difference of two right-hand sides is the true residual of the new point.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.network.consumers import Currents, currents_of, drawn_by
from study.network.equations import Factors, Point, Problem, Structure, jacobian
from study.network.newton import Solved, flat_start, solve_one
from study.network.sources import Law

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

MOST_SWEEPS = 40
COMPILED_FROM = 3_000_000  # scenarios times buses: some seconds of numpy
BLOCK = 1024  # scenarios handled together, so that the working arrays stay in the cache
DENSE_FROM = 64  # scenarios from which the inverse is worth building
DENSE_UP_TO = 700_000  # entries of the inverse beyond which the sparse factors are quicker


@dataclass(frozen=True, slots=True, kw_only=True)
class Solutions:
    """Scenarios solved: ``v`` [bus, scenario] with leaves last, ``i`` [source, ..], ``m`` [island, ..]."""

    v: ComplexArray
    i: ComplexArray
    m: FloatArray
    residual_pu: FloatArray
    iterations: IntArray
    converged: BoolArray


def solve_scenarios(
    problem: Problem, count: int, start: Point | None = None, *, compiled: bool | None = None
) -> Solutions:
    """Solve scenarios that share structure and kinds of law.

    Parameters
    ----------
    problem : Problem
        Arrays with `count` columns or one.
    count : int
        Number of scenarios.
    start : Point, optional
        First point for the mean scenario.
    compiled : bool, optional
        Whether the compiled sweep is used; by the size of the task where left out.

    Returns
    -------
    Solutions
        In the order given; where ``converged`` is False the numbers are the last ones found.
    """
    base = _base(problem.column(None), start)
    if count == 1:
        return _from_one(problem, base)
    out = _to_be_filled(problem.at, count)
    if base.converged:
        if _pays(problem, count) if compiled is None else compiled and _can_compile(problem):
            from study.network.compiled import solve_compiled

            solve_compiled(problem, base.point, out, MOST_SWEEPS)
        else:
            frame = _Frame(problem.column(None), base.point, count)
            for first in range(0, count, BLOCK):
                k = np.arange(first, min(first + BLOCK, count))
                frame.solve_block(out, k, problem.columns(k))
    for lost in np.flatnonzero(~out.converged):
        _one_by_one(out, int(lost), problem.column(int(lost)), base)
    return out


def _pays(problem: Problem, count: int) -> bool:
    """Return True where compiling, or loading what was compiled, costs less than it saves."""
    at = problem.at
    places = len(at.ports.direct) + at.ports.leaves + at.buses
    return count * places > COMPILED_FROM and _can_compile(problem)


def _can_compile(problem: Problem) -> bool:
    laws = problem.laws
    return not (laws.code == Law.FIELD).any() and not (laws.crossed and laws.cross_x.shape[1] > 1)


def _base(problem: Problem, start: Point | None) -> Solved:
    base = solve_one(problem, start or flat_start(problem))
    if not base.converged and start is not None:
        base = solve_one(problem, flat_start(problem))
    return base


def _from_one(problem: Problem, base: Solved) -> Solutions:
    return Solutions(
        v=_with_leaves(problem, base.point.v),
        i=base.point.i,
        m=base.point.m,
        residual_pu=np.array([base.residual_pu]),
        iterations=np.full(1, base.iterations, np.int64),
        converged=np.array([base.converged]),
    )


def no_solutions(at: Structure, count: int) -> Solutions:
    """Return scenarios without a solution.

    Parameters
    ----------
    at : Structure
        Of the mode.
    count : int
        Number of scenarios.

    Returns
    -------
    Solutions
        NaN, not converged.
    """
    return Solutions(
        v=np.full((at.all_buses, count), np.nan, complex),
        i=np.full((at.sources, count), np.nan, complex),
        m=np.full((at.islands, count), np.nan),
        residual_pu=np.full(count, np.inf),
        iterations=np.zeros(count, np.int64),
        converged=np.zeros(count, bool),
    )


def _to_be_filled(at: Structure, count: int) -> Solutions:
    """Return arrays that every path fills; writing them twice would cost as much as solving."""
    return Solutions(
        v=np.empty((at.all_buses, count), complex),
        i=np.empty((at.sources, count), complex),
        m=np.empty((at.islands, count)),
        residual_pu=np.full(count, np.inf),
        iterations=np.zeros(count, np.int64),
        converged=np.zeros(count, bool),
    )


def _with_leaves(problem: Problem, v: ComplexArray) -> ComplexArray:
    """Return the voltages of all buses, those of the leaves behind the others."""
    ports = problem.at.ports
    with np.errstate(all="ignore"):  # where the branch cannot carry the load, the scenario is not solved
        return np.concatenate([v, drawn_by(ports, problem.demand).leaf_voltage(v[ports.bus])])


def _one_by_one(out: Solutions, k: int, problem: Problem, base: Solved) -> None:
    """Solve one scenario by Newton's method, from the mean scenario and from rated voltage."""
    starts = [base.point, flat_start(problem)] if base.converged else [flat_start(problem)]
    for start in starts:
        one = solve_one(problem, start)
        out.v[:, k] = _with_leaves(problem, one.point.v)[:, 0]
        out.i[:, k], out.m[:, k] = one.point.i[:, 0], one.point.m[:, 0]
        out.residual_pu[k], out.converged[k] = one.residual_pu, one.converged
        out.iterations[k] += one.iterations
        if one.converged:
            return


class _Frame:
    """The Jacobian at the base, and the right-hand side of each scenario's step."""

    def __init__(self, mean: Problem, base: Point, count: int) -> None:
        at = self.at = mean.at
        n, s = at.buses, at.sources
        v_s = base.v[at.source_bus, 0]
        self.by_load = drawn_by(at.ports, mean.demand).gradient(base.v[at.ports.bus])[:, :, None]
        self.base = base
        self.by_law = mean.laws.gradient(v_s, base.i[:, 0]).reshape(s, 4 * s)
        self.v0, self.i0 = v_s[:, None], base.i
        self.behind = (mean.laws.code == Law.BEHIND_IMPEDANCE)[:, None]
        self.b0 = np.where(self.behind, 0.0, mean.power.b)
        self.accept = at.accept
        b = at.ports.bus
        self.rows = np.concatenate([b, n + b, np.arange(2 * n, 2 * n + 2 * s)])
        self.local = np.union1d(b, at.source_bus)
        self.load_place = np.searchsorted(self.local, b)
        self.source_place = np.searchsorted(self.local, at.source_bus)
        local_rows = np.concatenate([self.local, n + self.local, np.arange(2 * n, at.size)])
        self.step, self.whole = _steps(at, jacobian(mean, base), self.rows, local_rows, count)

    def solve_block(self, out: Solutions, k: IntArray, problem: Problem) -> None:
        """Sweep one block of scenarios until every one has converged or stopped converging."""
        count = len(k)
        currents = currents_of(drawn_by(self.at.ports, problem.demand))
        right = self._first_right(problem, currents, count)
        residual = np.full(count, np.inf)
        sweeps = np.zeros(count, np.int64)
        with np.errstate(all="ignore"):  # a diverging scenario overflows; it is solved again by itself
            for _ in range(MOST_SWEEPS):
                v, i, m = self._split(self.step(right))
                new = self._right(problem, currents, v, i, m)
                change = np.abs(new - right).max(axis=0)
                sweeps += residual > self.accept
                residual = np.where(np.isnan(change), np.inf, change)
                if np.all((residual <= self.accept) | (residual > 1e6)):
                    break
                right = new
            x = self.whole(right)
        n, s = self.at.buses, self.at.sources
        out.v[:, k] = _with_leaves(problem, x[:n] + 1j * x[n : 2 * n])
        out.i[:, k] = x[2 * n : 2 * n + s] + 1j * x[2 * n + s : 2 * n + 2 * s]
        out.m[:, k] = x[2 * n + 2 * s :]
        out.residual_pu[k], out.iterations[k] = residual, sweeps
        out.converged[k] = residual <= self.accept

    def _first_right(self, problem: Problem, currents: Currents, count: int) -> FloatArray:
        """Return the right-hand side at the base point."""
        v = np.broadcast_to(self.base.v[self.local], (len(self.local), count))
        i = np.broadcast_to(self.i0, (self.at.sources, count))
        return self._right(problem, currents, v, i, np.broadcast_to(self.base.m, (self.at.islands, count)))

    def _split(self, x: FloatArray) -> tuple[ComplexArray, ComplexArray, FloatArray]:
        n, s = len(self.local), self.at.sources
        v = x[:n] + 1j * x[n : 2 * n]
        i = x[2 * n : 2 * n + s] + 1j * x[2 * n + s : 2 * n + 2 * s]
        return v, i, x[2 * n + 2 * s :]

    def _right(
        self, problem: Problem, currents: Currents, v: ComplexArray, i: ComplexArray, m: FloatArray
    ) -> FloatArray:
        v_l, v_s = v[self.load_place], v[self.source_place]
        laws, power = problem.laws, problem.power
        current = currents.at(v_l)
        p, s = len(v_l), len(v_s)
        out = np.empty((2 * p + 2 * s, v.shape[1]))
        re_e, re_f, im_e, im_f = self.by_load
        np.subtract(re_e * v_l.real + re_f * v_l.imag, current.real, out=out[:p])
        np.subtract(im_e * v_l.real + im_f * v_l.imag, current.imag, out=out[p : 2 * p])
        m_s = m[self.at.source_island]
        linear = (v_s * np.conj(self.i0) + self.v0 * np.conj(i)).real
        law = linear - (v_s * np.conj(i)).real + power.a + (power.b - self.b0) * m_s
        out[2 * p : 2 * p + s] = np.where(self.behind, 0.0, law)
        z = np.concatenate([v_s.real, v_s.imag, i.real, i.imag])
        out[2 * p + s :] = self.by_law @ z - laws.residual(v_s, i)
        return out


def _steps(
    at: Structure, factors: Factors, rows: IntArray, local_rows: IntArray, count: int
) -> tuple[Callable[[FloatArray], FloatArray], Callable[[FloatArray], FloatArray]]:
    """Return the functions from right-hand side to the unknowns it depends on, and to all unknowns."""
    if count < DENSE_FROM or len(rows) * len(local_rows) > DENSE_UP_TO:

        def whole(right: FloatArray) -> FloatArray:
            full = np.zeros((at.size, right.shape[1]))
            full[rows] = right
            return np.asarray(factors.solve(full))

        return lambda right: whole(right)[local_rows], whole
    unit = np.zeros((at.size, len(rows)))
    unit[rows, np.arange(len(rows))] = 1.0
    inverse = np.ascontiguousarray(factors.solve(unit))
    local = np.ascontiguousarray(inverse[local_rows])
    return lambda right: local @ right, lambda right: inverse @ right
