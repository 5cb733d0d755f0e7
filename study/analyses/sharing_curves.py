"""kW and kvar of sets in parallel over the load: factors on the consumers, the sets as set, the curves.

Consumers are scaled together at their own power factors; synchronous motors, filters and supplies at a set
power keep theirs. Three scenarios show how the load on the sets goes with the factor; everything else is then
solved at the factors that give round loads.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from study.analyses.sharing_group import COMPENSATED, Group, kvar_off, kw_off, solve_scaled
from study.network.batch import BatchSolution
from study.network.settings import Settings
from study.network.sources import Speed
from study.results.arrays import FloatArray, read_only
from study.results.sharing import SharingCurve

# of the sum of rated kW: the range over which the rules have sharing judged (ClassNK 2.4.14-3)
LOADS_PU = np.array([0.20, 0.30, 0.40, 0.50, 0.60, 0.70, 0.75, 0.80, 0.90, 1.00])
TRIMMED_AT_PU = 0.75  # where the rules have the sets tuned
NUDGE = {"voltage": 0.003, "frequency": 0.0005}  # small against any droop, large against rounding


@dataclass(frozen=True, slots=True, kw_only=True)
class Nudge:
    """One set's no-load voltage or frequency moved a little at one load.

    ``quantity`` is a key of `NUDGE`, ``n`` the set's place in the group; ``row`` and ``base`` are the rows of
    the solution with and without the nudge.
    """

    quantity: str
    n: int
    base: int
    row: int


@dataclass(frozen=True, slots=True, kw_only=True)
class AsSet:
    """The sets as the workbook sets them.

    The first row of ``own`` is the mode's own load, which may have no solution. ``solution`` has a row for
    each load in ``load_pu`` [load], at the factors ``scale`` [load], and behind them one for each of the
    ``nudges``.
    """

    own: BatchSolution
    load_pu: FloatArray
    scale: FloatArray
    solution: BatchSolution
    nudges: tuple[Nudge, ...]


def solve_as_set(group: Group) -> AsSet | str:
    """Solve the sets as set, over the range of load, and with every set nudged at its ends.

    Parameters
    ----------
    group : Group
        The island.

    Returns
    -------
    AsSet or str
        A sentence where the mode has no solution, or its load cannot be scaled.
    """
    if group.p_kw[group.loads].sum() <= 0.0:
        return "no consumer that could be scaled is in use."
    factors = np.append(1.0, _ends(group))
    own = solve_scaled(group, factors)
    if not own.solved.any():
        return own.reason[0]
    if not own.solved[0]:
        factors = np.append(factors, factors[1:].mean())
        own = solve_scaled(group, factors)
    load_pu, scale = _factors(group, own, factors)
    nudges = tuple(_nudges(group, len(scale)))
    v_ref, f_ref = (
        np.tile([getattr(s, name) for s in group.at.sources], (len(scale) + len(nudges), 1))
        for name in ("v_ref_pu", "f_no_load_pu")
    )
    for nudge in nudges:
        moved = v_ref if nudge.quantity == "voltage" else f_ref
        moved[nudge.row, group.places[nudge.n]] += NUDGE[nudge.quantity]
    solution = solve_scaled(
        group,
        np.append(scale, scale[[nudge.base for nudge in nudges]]),
        Settings(no_load_voltage_pu=v_ref, no_load_frequency_pu=f_ref),
    )
    return AsSet(own=own, load_pu=load_pu, scale=scale, solution=solution, nudges=nudges)


def _nudges(group: Group, loads: int) -> Iterator[Nudge]:
    """Yield what can be moved: nothing of the voltage beside a reversed droop circuit, which runs away."""
    row = loads
    by_voltage = [s.law in COMPENSATED for s in group.sources]
    if any(s.xc_pu < 0.0 for s in group.sources):
        by_voltage = [False] * len(by_voltage)
    for base in (0, loads - 1):
        for quantity, acts in (("voltage", by_voltage), ("frequency", group.shares_kw.tolist())):
            for n in np.flatnonzero(acts):
                yield Nudge(quantity=quantity, n=int(n), base=base, row=row)
                row += 1


def _ends(group: Group) -> FloatArray:
    """Return factors on the consumers near both ends of the range of load."""
    at = group.at
    motors = at.network.plant.synchronous_motors
    node = np.array([at.network.topology.node_of[m.name] for m in motors], np.int64)
    here = np.array(at.view.island, np.int64)[node] == group.island
    constant = float(at.motor_kva[here].real.sum())
    constant -= sum(s.p_set_kw for s in group.beside if s.speed == Speed.FIXED)
    wanted = LOADS_PU[[0, -1]] * group.p_rated_kw.sum() - constant
    return np.asarray(np.maximum(wanted / group.p_kw[group.loads].sum(), 0.0))


def _factors(group: Group, own: BatchSolution, factors: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the loads that can be reached, and the factors on the consumers that give them.

    The kW of the sets against the factor is a smooth line, bent only by losses: the parabola through the own
    load and the two near the ends of the range gives the factors; the middle of the range stands in for an
    own load without a solution.
    """
    rated = group.p_rated_kw.sum()
    k = factors[own.solved]
    p = own.source_p_kw[own.solved][:, group.places].sum(axis=1)
    line = _through(k, p, float(group.p_kw[group.loads].sum()))
    least = float(line(0.0)) / rated
    load_pu = LOADS_PU[least + 0.01 < LOADS_PU]
    if len(load_pu) < len(LOADS_PU):
        load_pu = np.concatenate([[least], load_pu])
    scale = k[0] + (load_pu * rated - p[0]) / line.deriv()(k[0])
    for _ in range(3):
        scale = scale - (line(scale) - load_pu * rated) / line.deriv()(scale)
    return load_pu, np.maximum(scale, 0.0)


def _through(k: FloatArray, p: FloatArray, slope: float) -> np.poly1d:
    """Return the parabola through points that are apart, or a line of the given slope through the first."""
    apart = np.append(True, np.abs(k[1:] - k[0]) > 1e-3)
    k, p = k[apart], p[apart]
    if len(k) == 1:
        return np.poly1d([slope, p[0] - slope * k[0]])
    return np.poly1d(np.polyfit(k, p, len(k) - 1))


def sharing_curve(
    group: Group, load_pu: FloatArray, solution: BatchSolution, *, trimmed: bool
) -> SharingCurve:
    """Return kW and kvar of each set over the load.

    Parameters
    ----------
    group : Group
        The island.
    load_pu : ndarray, shape (load,)
        Loads, of the sum of rated kW.
    solution : BatchSolution
        Its first rows are those loads.
    trimmed : bool
        What to call the curve.

    Returns
    -------
    SharingCurve
        With deviations from the proportional share.
    """
    rows = slice(0, len(load_pu))
    p, q = solution.source_p_kw[rows, group.places], solution.source_q_kvar[rows, group.places]
    return SharingCurve(
        trimmed=trimmed,
        load_pu=read_only(load_pu),
        p_total_kw=read_only(p.sum(axis=1)),
        q_total_kvar=read_only(q.sum(axis=1)),
        p_kw=read_only(p),
        q_kvar=read_only(q),
        dp_kw=read_only(kw_off(group, p)),
        dq_kvar=read_only(kvar_off(group, q)),
        u_pu=read_only(solution.source_u_pu[rows, group.places].mean(axis=1)),
        f_hz=read_only(solution.frequency_pu[rows, group.island] * group.at.network.plant.project.f_rated_hz),
        solved=read_only(solution.solved[rows], bool),
    )


def no_curve(group: Group, load_pu: FloatArray) -> SharingCurve:
    """Return the trimmed curve of sets that could not be trimmed: no load has a solution."""
    none = np.full(len(load_pu), np.nan)
    table = np.full((len(load_pu), len(group.sources)), np.nan)
    return SharingCurve(
        trimmed=True,
        load_pu=read_only(load_pu),
        p_total_kw=read_only(none),
        q_total_kvar=read_only(none),
        p_kw=read_only(table),
        q_kvar=read_only(table),
        dp_kw=read_only(table),
        dq_kvar=read_only(table),
        u_pu=read_only(none),
        f_hz=read_only(none),
        solved=read_only(np.zeros(len(load_pu)), bool),
    )
