"""Whether the regulators of sets in parallel hold the point found: a reversed droop circuit may not.

Every regulator raises its field while it sees less than its set-point. With H the change of what each sees
for a change of each field, the point is held where every eigenvalue of H has a positive real part.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from study.network.equations import Point, Problem, jacobian
from study.network.laws import VoltageLaws
from study.network.sources import Law

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

REGULATED = (Law.PHASOR, Law.REACTIVE_CURRENT, Law.CROSS_CURRENT)


def runaway(problem: Problem, x: Point) -> int | None:
    """Return the set with reversed droop that leaves a point, or None where the regulators hold it.

    Source: small-signal condition for integrating regulators, derived; that a reversed droop circuit makes
    sets in parallel run apart is common practice, no source.

    Parameters
    ----------
    problem : Problem
        One scenario.
    x : Point
        Its solution.

    Returns
    -------
    int or None
        Place of the source.
    """
    laws = problem.laws
    reversed_sets = (laws.x[:, 0] < 0.0) & np.isin(laws.code, REGULATED)
    if not reversed_sets.any():
        return None
    has_field = np.array([m is not None for m in laws.machines])
    regulated = np.flatnonzero(has_field & np.isin(laws.code, REGULATED))
    values, vectors = np.linalg.eig(_sensitivity(problem, x, regulated))
    worst = int(np.argmin(values.real))
    if values.real[worst] > 0.0:
        return None
    weight = np.abs(vectors[:, worst]) * reversed_sets[regulated]
    return int(regulated[np.argmax(weight)])


def most_reversed(laws: VoltageLaws) -> int | None:
    """Return the regulated set with the largest reversed reactance where others run beside it, or None.

    Parameters
    ----------
    laws : VoltageLaws
        One scenario.

    Returns
    -------
    int or None
        Place of the source.
    """
    x = np.where(np.isin(laws.code, REGULATED), laws.x[:, 0], 0.0)
    return int(np.argmin(x)) if x.min() < 0.0 and len(x) > 1 else None


def _sensitivity(problem: Problem, x: Point, regulated: IntArray) -> FloatArray:
    """Return H [regulator, field], field per unit of the air-gap line."""
    at, laws = problem.at, problem.laws
    n, s = at.buses, at.sources
    code = laws.code.copy()
    code[regulated] = Law.FIELD
    factors = jacobian(replace(problem, laws=laws.with_code(code)), x)
    unit = np.zeros((at.size, len(regulated)))
    unit[2 * n + s + regulated, np.arange(len(regulated))] = 1.0
    moved = factors.solve(unit)
    z = np.concatenate(
        [moved[at.source_bus], moved[n + at.source_bus], moved[2 * n : 2 * n + s], moved[2 * n + s :][:s]]
    )
    slope = laws.gradient(x.v[at.source_bus, 0], x.i[:, 0])[regulated].reshape(len(regulated), 4 * s)
    return np.asarray(slope @ z)
