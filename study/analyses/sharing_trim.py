"""Set-points that make sets in parallel share in proportion at 75 % of their combined rating."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from study.analyses.sharing_curves import TRIMMED_AT_PU, AsSet
from study.analyses.sharing_group import COMPENSATED, Group, kvar_off, kw_off, solve_scaled
from study.network.batch import BatchSolution
from study.network.limits import regulator_error
from study.network.settings import Settings
from study.network.sources import Speed
from study.results.arrays import BoolArray, ComplexArray, FloatArray
from study.results.sharing import SetTrim

MOST_TRIMS = 12
TRIMMED = 2e-7  # of rated kW and kVA, that a set may be from its share
SAME_VOLTAGE, SAME_FREQUENCY = 5e-4, 2e-4  # of rated: changes nearer than this are one
KEPT_IN = 4  # repetitions
RESCALED, MOST_RESCALES = 1e-4, 2  # of the sum of rated kW, that a load may be from what it is called


def trimmed_settings(group: Group, as_set: AsSet) -> Settings | None:
    """Return the set-points that make the sets share in proportion at 75 % of their combined rating.

    The no-load frequency of a set with speed droop becomes ``f + droop P*/Pr``; the no-load voltage becomes
    what its regulator sees at its terminals with its share of kW and kvar, found by repetition since the
    terminals move a little with it. As at a trial, sets are trimmed to those that are right already: one is
    left as set, the one that leaves most others alone and, of several such, brings the bus nearest to rated
    voltage, or frequency. Where another source holds the bus, the bus stays as it is.

    Source: class rules tune the sets at 75 % load before the sharing test (ClassNK 2.4.14-3); IEEE 421.5
    load compensation for the voltage.

    Parameters
    ----------
    group : Group
        The island.
    as_set : AsSet
        The sets as set.

    Returns
    -------
    Settings or None
        Trims for every source of the mode; None where 75 % cannot be reached or has no solution.
    """
    at = np.flatnonzero(as_set.load_pu == TRIMMED_AT_PU)
    if not at.size:
        return None
    row = int(at[0])
    solution = as_set.solution
    if not solution.solved[row]:
        solution, row = as_set.own, 0
    if not solution.solved[row]:
        return None
    trim, scale = _Trim.of(group, as_set, solution, row), as_set.scale[at]
    for _ in range(MOST_TRIMS):
        settings = trim.settings(solution, row)
        solution, row = solve_scaled(group, scale, settings), 0
        if not solution.solved[0]:
            return None
        short_kw = kw_short(group, solution, as_set.load_pu[at])
        if trim.distance(solution) < TRIMMED and abs(short_kw[0]) < RESCALED * group.p_rated_kw.sum():
            break
        scale = scale + short_kw / group.p_kw[group.loads].sum()
    return settings


def trimmed_solution(group: Group, as_set: AsSet, settings: Settings) -> BatchSolution:
    """Solve trimmed sets over the range of load.

    The factors on the consumers are those of the sets as set, set right where consumers take other kW at the
    voltage of the trimmed sets.

    Parameters
    ----------
    group : Group
        The island.
    as_set : AsSet
        The sets as set.
    settings : Settings
        As trimmed.

    Returns
    -------
    BatchSolution
        One row for each load.
    """
    solution, scale = solve_scaled(group, as_set.scale, settings), as_set.scale
    for _ in range(MOST_RESCALES):
        short_kw = np.where(solution.solved, kw_short(group, solution, as_set.load_pu), 0.0)
        if np.abs(short_kw).max() < RESCALED * group.p_rated_kw.sum():
            break
        scale = np.maximum(scale + short_kw / group.p_kw[group.loads].sum(), 0.0)
        solution = solve_scaled(group, scale, settings)
    return solution


def kw_short(group: Group, solution: BatchSolution, load_pu: FloatArray) -> FloatArray:
    """Return by how many kW the sets carry less than wanted loads, of the sum of rated kW, [row]."""
    return np.asarray(
        load_pu * group.p_rated_kw.sum() - solution.source_p_kw[: len(load_pu), group.places].sum(axis=1)
    )


def set_trims(group: Group, settings: Settings | None) -> tuple[SetTrim, ...]:
    """Return each set's set-points as set and as trimmed.

    Parameters
    ----------
    group : Group
        The island.
    settings : Settings or None
        As trimmed; None where the sets could not be.

    Returns
    -------
    tuple of SetTrim
        One for each set; NaN for a set-point that is not in use, or was not trimmed.
    """
    none = np.full(len(group.at.sources), np.nan)
    u, f = (
        none if settings is None else np.asarray(getattr(settings, name), float).ravel()
        for name in ("no_load_voltage_pu", "no_load_frequency_pu")
    )
    by_voltage, by_speed = _regulated(group), _drooped(group)
    return tuple(
        SetTrim(
            genset=s.name,
            u_as_set_pu=s.v_ref_pu if by_voltage[n] else float("nan"),
            u_trimmed_pu=float(u[k]) if by_voltage[n] else float("nan"),
            f_as_set_pu=s.f_no_load_pu if by_speed[n] else float("nan"),
            f_trimmed_pu=float(f[k]) if by_speed[n] else float("nan"),
        )
        for n, (k, s) in enumerate(zip(group.places, group.sources, strict=True))
    )


def _regulated(group: Group) -> BoolArray:
    """Return the sets with a regulator that can be trimmed, [set]."""
    return np.array([s.law in COMPENSATED and s.xc_pu >= 0.0 for s in group.sources], bool)


def _drooped(group: Group) -> BoolArray:
    """Return the sets with a governor that can be trimmed, [set]."""
    return np.array([s.speed == Speed.DROOP for s in group.sources], bool)


def _left_alone(change: FloatArray, bus_pu: float, same: float) -> int:
    """Return the set that is left as set, so that the bus moves by the negative of its change.

    Parameters
    ----------
    change : ndarray, shape (set,)
        Change of every set's set-point with the bus as it is; NaN for one that cannot be trimmed.
    bus_pu : float
        Voltage or frequency of the bus, of rated.
    same : float
        Two changes nearer than this are one.

    Returns
    -------
    int
        Place of the set.
    """
    alone = np.array([np.count_nonzero(np.abs(change - c) < same) for c in change])
    off = np.where(alone == alone.max(), np.abs(bus_pu - change - 1.0), np.inf)
    return int(off.argmin())


@dataclass(frozen=True, slots=True, kw_only=True)
class _Trim:
    """What stays the same while the set-points are found.

    ``voltage`` and ``speed`` [set] mark regulators and governors that can be trimmed; ``u_kept`` and
    ``f_kept`` are the sets left as set, None where the bus stays as it is, at ``u_bus_pu`` and ``f_bus_pu``.
    ``u_by_q`` [set, set] is the change of terminal voltage for a change of each set's kvar, 0 where it is not
    known.
    """

    group: Group
    voltage: BoolArray
    speed: BoolArray
    u_bus_pu: float
    f_bus_pu: float
    u_by_q: FloatArray
    u_kept: int | None = None
    f_kept: int | None = None

    @classmethod
    def of(cls, group: Group, as_set: AsSet, solution: BatchSolution, row: int) -> _Trim:
        """Return the trim of a group, from a solution of the sets as set."""
        trim = cls(
            group=group,
            voltage=_regulated(group),
            speed=_drooped(group),
            u_bus_pu=float(solution.source_u_pu[row, group.places].mean()),
            f_bus_pu=float(solution.frequency_pu[row, group.island]),
            u_by_q=_voltage_by_kvar(group, as_set),
        )
        if any(s.speed != Speed.FIXED for s in group.beside):
            return trim
        p, q = trim.shares(solution, row)
        u_own, f_own = (
            np.array([getattr(s, x) for s in group.sources]) for x in ("v_ref_pu", "f_no_load_pu")
        )
        u = np.where(trim.voltage, trim.voltages(solution, row, p, q) - u_own, np.nan)
        f = np.where(trim.speed, trim.frequencies(p) - f_own, np.nan)
        alone = group.shares_kw == trim.speed  # no isochronous set holds the frequency
        return replace(
            trim,
            u_kept=_left_alone(u, trim.u_bus_pu, SAME_VOLTAGE) if trim.voltage.any() else None,
            f_kept=_left_alone(f, trim.f_bus_pu, SAME_FREQUENCY)
            if trim.speed.any() and alone.all()
            else None,
        )

    def shares(self, solution: BatchSolution, row: int) -> tuple[FloatArray, FloatArray]:
        """Return each set's share of kW and kvar; a set that cannot be trimmed keeps what it carries."""
        group = self.group
        p, q = solution.source_p_kw[row, group.places], solution.source_q_kvar[row, group.places]
        trimmed = replace(group, shares_kvar=self.voltage & group.shares_kvar)
        return p - kw_off(group, p), q - kvar_off(trimmed, q)

    def settings(self, solution: BatchSolution, row: int) -> Settings:
        """Return the set-points that would hold each set at its share, from a solution near it."""
        group, places = self.group, self.group.places
        p, q = self.shares(solution, row)
        u, f = (np.array([getattr(s, x) for s in group.at.sources]) for x in ("v_ref_pu", "f_no_load_pu"))
        u[places[self.voltage]] = self.voltages(solution, row, p, q)[self.voltage]
        f[places[self.speed]] = self.frequencies(p)[self.speed]
        return Settings(no_load_voltage_pu=u[None, :], no_load_frequency_pu=f[None, :])

    def distance(self, solution: BatchSolution) -> float:
        """Return the largest distance of a set from its share, or of a bus to be kept from its voltage."""
        group = self.group
        p, q = self.shares(solution, 0)
        off = (p - solution.source_p_kw[0, group.places]) / group.p_rated_kw
        q_off = (q - solution.source_q_kvar[0, group.places]) / group.s_rated_kva
        u_off = 0.0
        if self.u_kept is None and self.voltage.any():
            u_off = solution.source_u_pu[0, group.places].mean() - self.u_bus_pu
        return float(max(np.abs(off).max(), np.abs(q_off).max(), abs(u_off)))

    def frequencies(self, p_kw: FloatArray) -> FloatArray:
        """Return the no-load frequencies that divide a power so, [set]."""
        sources = self.group.sources
        fall = np.array([s.speed_droop_pu for s in sources]) * p_kw / self.group.p_rated_kw
        f_bus = self.f_bus_pu
        if self.f_kept is not None:
            f_bus = sources[self.f_kept].f_no_load_pu - fall[self.f_kept]
        return np.asarray(f_bus + fall)

    def voltages(self, solution: BatchSolution, row: int, p_kw: FloatArray, q_kvar: FloatArray) -> FloatArray:
        """Return the no-load voltages that divide kvar so, [set], from a solution near it."""
        places, kept = self.group.places, self.u_kept
        u = solution.source_u_pu[row, places]
        u = u + self.u_by_q @ (q_kvar - solution.source_q_kvar[row, places])
        if kept is None:
            return self._seen(solution, row, u + self.u_bus_pu - u.mean(), p_kw + 1j * q_kvar)
        own = self.group.sources[kept].v_ref_pu
        for _ in range(KEPT_IN):  # what a regulator sees moves by a few per cent less than the terminals
            seen = self._seen(solution, row, u, p_kw + 1j * q_kvar)
            u = u + own - seen[kept]
        seen[kept] = own
        return seen

    def _seen(self, solution: BatchSolution, row: int, u_pu: FloatArray, s_kva: ComplexArray) -> FloatArray:
        """Return what each regulator sees at these terminal voltages and powers, of its rated voltage."""
        at, places = self.group.at, self.group.places
        v = solution.v_bus_pu[row, at.structure.source_bus].copy()
        s = solution.source_p_kw[row] + 1j * solution.source_q_kvar[row]
        v[places] *= u_pu / solution.source_u_pu[row, places]
        s[places] = s_kva
        laws = solution.laws.column(row)
        i = np.conj(s / at.network.s_base_kva / v)
        seen = (laws.e_ref - regulator_error(laws, v[:, None], i[:, None])) * laws.to_own_v
        return np.asarray(seen[places, 0])


def _voltage_by_kvar(group: Group, as_set: AsSet) -> FloatArray:
    """Return the change of each terminal's voltage for kvar moved between the sets, [set, set]."""
    solution = as_set.solution
    known = [x for x in as_set.nudges if x.quantity == "voltage" and solution.solved[[x.base, x.row]].all()]
    if not known:
        return np.zeros((len(group.sources), len(group.sources)))
    rows, bases = [x.row for x in known], [x.base for x in known]
    dq, du = (
        (values[rows] - values[bases])[:, group.places]
        for values in (solution.source_q_kvar, solution.source_u_pu)
    )
    # What all terminals do together is the bus voltage, which the trim moves by itself.
    du = du - du.mean(axis=1, keepdims=True)
    return np.asarray((np.linalg.pinv(dq, rcond=1e-2) @ du).T)
