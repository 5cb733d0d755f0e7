"""Newton's method for one scenario: the factors are kept while they serve and renewed when they do not."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.network.consumers import Currents, currents_of, drawn_by
from study.network.equations import Factors, Point, Problem, Structure, jacobian, residual

FloatArray = NDArray[np.float64]

MOST_ITERATIONS = 60
SLOW = 0.1  # the factors are renewed when a step leaves more than this part of the residual
SHORTEST_STEP = 1.0 / 64.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Solved:
    """Where Newton's method ended: the point, its largest residual, and the last factors."""

    point: Point
    residual_pu: float
    iterations: int
    converged: bool
    factors: Factors | None


def flat_start(problem: Problem) -> Point:
    """Return a first point: rated voltage everywhere, load divided by the active-power laws.

    Parameters
    ----------
    problem : Problem
        One scenario.

    Returns
    -------
    Point
        Arrays with one column.
    """
    at, power, demand = problem.at, problem.power, problem.demand
    total = (demand.constant + demand.impedance)[:, 0].sum() / max(at.islands, 1)
    m = np.zeros(at.islands)
    p = power.a[:, 0].copy()
    for n in range(at.islands):
        here = at.source_island == n
        slope = power.b[here, 0].sum()
        if slope != 0.0 and not power.shore[n]:
            m[n] = (total.real - power.a[here, 0].sum()) / slope
        p[here] += power.b[here, 0] * m[n]
    q = np.full(at.sources, total.imag * at.islands / max(at.sources, 1))
    return Point(v=np.ones((at.buses, 1), complex), i=(p - 1j * q)[:, None].astype(complex), m=m[:, None])


def solve_one(problem: Problem, start: Point) -> Solved:
    """Solve one scenario by Newton's method.

    Parameters
    ----------
    problem : Problem
        One scenario.
    start : Point
        First point.

    Returns
    -------
    Solved
        Where ``converged`` is False the point is the best found.
    """
    at = problem.at
    accept, currents = at.accept, currents_of(drawn_by(at.ports, problem.demand))
    x = _pack(start)
    f = _residual(problem, currents, start)
    size = float(np.abs(f).max())
    factors: Factors | None = None
    fresh = False
    step = 1.0
    for count in range(1, MOST_ITERATIONS + 1):
        if size <= accept or not np.isfinite(size):
            return _ended(at, x, size, count - 1, factors)
        if factors is None or not fresh:
            factors = _factors(problem, _unpack(at, x))
            if factors is None:
                break
        trial = x - step * factors.solve(f)
        f_trial = _residual(problem, currents, _unpack(at, trial))
        size_trial = float(np.abs(f_trial).max())
        if size_trial < size:
            fresh = size_trial < SLOW * size
            x, f, size = trial, f_trial, size_trial
            step = min(1.0, 2.0 * step)
        elif fresh:
            fresh = False
        else:
            step *= 0.5
            fresh = True
            if step < SHORTEST_STEP:
                break
    return _ended(at, x, size, count, factors)


def _factors(problem: Problem, x: Point) -> Factors | None:
    try:
        return jacobian(problem, x)
    except RuntimeError:  # singular: SuperLU's own word for it
        return None


def _ended(at: Structure, x: FloatArray, size: float, count: int, factors: Factors | None) -> Solved:
    return Solved(
        point=_unpack(at, x),
        residual_pu=size,
        iterations=count,
        converged=size <= at.accept,
        factors=factors,
    )


def _residual(problem: Problem, currents: Currents, x: Point) -> FloatArray:
    """Return the residual, infinite where a leaf's branch cannot carry its load at that point."""
    with np.errstate(invalid="ignore", over="ignore", divide="ignore"):
        f = residual(problem, currents, x)
    return np.where(np.isfinite(f), f, np.inf)


def _pack(x: Point) -> FloatArray:
    return np.concatenate([x.v[:, 0].real, x.v[:, 0].imag, x.i[:, 0].real, x.i[:, 0].imag, x.m[:, 0]])


def _unpack(at: Structure, x: FloatArray) -> Point:
    n, s = at.buses, at.sources
    return Point(
        v=(x[:n] + 1j * x[n : 2 * n])[:, None],
        i=(x[2 * n : 2 * n + s] + 1j * x[2 * n + s : 2 * n + 2 * s])[:, None],
        m=x[2 * n + 2 * s :, None],
    )
