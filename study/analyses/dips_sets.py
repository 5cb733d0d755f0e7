"""The sets of a simulated case: traces and figures."""

from __future__ import annotations

import numpy as np

from study.analyses.dips_cases import CaseWork
from study.network import dynamics_data as d
from study.network.dynamics_build import Model
from study.network.dynamics_run import Course
from study.results.arrays import FloatArray, IntArray, read_only
from study.results.dips import SetTrace

AT_CEILING = 0.98  # of the ceiling: from there the field counts as being at it


def set_traces(work: CaseWork, model: Model, course: Course, rows: IntArray) -> tuple[SetTrace, ...]:
    """Return the sets and other sources of a case.

    Parameters
    ----------
    work : CaseWork
        What was asked.
    model : Model
        What was followed.
    course : Course
        What it did.
    rows : ndarray of int
        Rows kept.

    Returns
    -------
    tuple of SetTrace
        In the order of the mode's sources.
    """
    return tuple(
        source_trace(
            work.at.sources[int(j)].name,
            work.at.sources[int(j)].s_rated_kva,
            float(model.start.source[n, d.RATED_FIELD]),
            course,
            (n, rows),
        )
        for n, j in enumerate(model.rows.place)
    )


def source_trace(
    name: str, s_rated_kva: float, rated_field: float, course: Course, where: tuple[int, IntArray]
) -> SetTrace:
    """Return one source of a course.

    Parameters
    ----------
    name : str
        Of the source.
    s_rated_kva : float
        Its rating. [kVA]
    rated_field : float
        Field at rated load, 0 for what has none. [pu of the air-gap-line field]
    course : Course
        What it did.
    where : tuple of int and ndarray
        Its row in the course, and the rows of time kept.

    Returns
    -------
    SetTrace
        Powers at its terminals.
    """
    n, rows = where
    kept = course.source[:, n]
    p, q = s_rated_kva * kept[:, d.KEPT_P], s_rated_kva * kept[:, d.KEPT_Q]
    unit = rated_field if rated_field > 0.0 else np.nan
    field, ceiling = kept[:, d.KEPT_FIELD] / unit, kept[:, d.KEPT_CEILING] / unit
    opened = np.flatnonzero(kept[:, d.KEPT_ON] == 0.0)
    after = _ends_at(course.time_s, p)
    return SetTrace(
        name=name,
        u_pu=read_only(kept[rows, d.KEPT_U]),
        i_pu=read_only(kept[rows, d.KEPT_I]),
        field_pu=read_only(field[rows]),
        ceiling_pu=read_only(ceiling[rows]),
        p_kw=read_only(p[rows]),
        q_kvar=read_only(q[rows]),
        speed_pu=read_only(kept[rows, d.KEPT_SPEED]),
        engine_pu=read_only(kept[rows, d.KEPT_ENGINE]),
        opened_at_s=float(course.time_s[opened[0]]) if len(opened) else float("nan"),
        p_before_kw=float(p[0]),
        q_before_kvar=float(q[0]),
        p_largest_kw=float(p.max()),
        q_largest_kvar=float(q.max()),
        p_after_kw=after,
        q_after_kvar=_ends_at(course.time_s, q),
        field_largest_pu=float(field.max()),
        at_ceiling_s=_time_at_ceiling(course.time_s, field, ceiling),
    )


def _ends_at(time_s: FloatArray, value: FloatArray) -> float:
    """Return the mean over the last half second."""
    return float(value[time_s >= time_s[-1] - 0.5].mean())


def _time_at_ceiling(time_s: FloatArray, field: FloatArray, ceiling: FloatArray) -> float:
    """Return for how long the field is at the ceiling of the moment; 0 without a field."""
    at = field[:-1] >= AT_CEILING * ceiling[:-1]
    return float(np.diff(time_s)[at].sum())
