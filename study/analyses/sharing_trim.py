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
from study.results.arrays import BoolArray, FloatArray

MOST_TRIMS = 12
TRIMMED = 2e-7  # of rated kW and kVA, that a set may be from its share


def trimmed_settings(group: Group, as_set: AsSet) -> Settings | None:
    """Return the set-points that make the sets share in proportion at 75 % of their combined rating.

    The no-load frequency of a set with speed droop becomes ``f + droop P*/Pr``; the no-load voltage becomes
    what its regulator sees at its terminals with its share of kW and kvar, found by repetition since the
    terminals move a little with it. The bus keeps the voltage and frequency that it has as set.

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
    trim = _Trim.of(group, as_set, float(solution.source_u_pu[row, group.places].mean()))
    for _ in range(MOST_TRIMS):
        settings = trim.settings(solution, row)
        solution, row = solve_scaled(group, as_set.scale[at], settings), 0
        if not solution.solved[0]:
            return None
        if trim.distance(solution) < TRIMMED:
            break
    return settings


@dataclass(frozen=True, slots=True, kw_only=True)
class _Trim:
    """What stays the same while the set-points are found.

    ``voltage`` [set] marks regulators that can be trimmed; ``u_by_q`` [set, set] is the change of terminal
    voltage for a change of each set's kvar, 0 where it is not known.
    """

    group: Group
    voltage: BoolArray
    u_wanted_pu: float
    u_by_q: FloatArray

    @classmethod
    def of(cls, group: Group, as_set: AsSet, u_wanted_pu: float) -> _Trim:
        """Return the trim of a group that is to keep its mean voltage."""
        voltage = np.array([s.law in COMPENSATED and s.xc_pu >= 0.0 for s in group.sources], bool)
        return cls(
            group=group, voltage=voltage, u_wanted_pu=u_wanted_pu, u_by_q=_voltage_by_kvar(group, as_set)
        )

    def shares(self, solution: BatchSolution, row: int) -> tuple[FloatArray, FloatArray]:
        """Return each set's share of kW and kvar; a set that cannot be trimmed keeps what it carries."""
        group = self.group
        p, q = solution.source_p_kw[row, group.places], solution.source_q_kvar[row, group.places]
        trimmed = replace(group, shares_kvar=self.voltage & group.shares_kvar)
        return p - kw_off(group, p), q - kvar_off(trimmed, q)

    def settings(self, solution: BatchSolution, row: int) -> Settings:
        """Return the set-points that would hold each set at its share, from a solution near it."""
        p, q = self.shares(solution, row)
        return Settings(
            no_load_voltage_pu=self._voltages(solution, row, p, q)[None, :],
            no_load_frequency_pu=self._frequencies(solution, row, p)[None, :],
        )

    def distance(self, solution: BatchSolution) -> float:
        """Return the largest distance of a set from its share, or of the bus from its voltage, of rated."""
        group = self.group
        p, q = self.shares(solution, 0)
        off = (p - solution.source_p_kw[0, group.places]) / group.p_rated_kw
        q_off = (q - solution.source_q_kvar[0, group.places]) / group.s_rated_kva
        u_off = solution.source_u_pu[0, group.places].mean() - self.u_wanted_pu if self.voltage.any() else 0.0
        return float(max(np.abs(off).max(), np.abs(q_off).max(), abs(u_off)))

    def _frequencies(self, solution: BatchSolution, row: int, p_kw: FloatArray) -> FloatArray:
        group = self.group
        out = np.array([s.f_no_load_pu for s in group.at.sources])
        f = float(solution.frequency_pu[row, group.island])
        for k, s, wanted in zip(group.places, group.sources, p_kw, strict=True):
            if s.speed == Speed.DROOP:
                out[k] = f + s.speed_droop_pu * wanted / s.p_rated_kw
        return out

    def _voltages(
        self, solution: BatchSolution, row: int, p_kw: FloatArray, q_kvar: FloatArray
    ) -> FloatArray:
        at, places = self.group.at, self.group.places
        u = solution.source_u_pu[row, places]
        moved = u + self.u_by_q @ (q_kvar - solution.source_q_kvar[row, places])
        moved += self.u_wanted_pu - moved.mean()
        v = solution.v_bus_pu[row, at.structure.source_bus].copy()
        s = solution.source_p_kw[row] + 1j * solution.source_q_kvar[row]
        v[places] *= moved / u
        s[places] = p_kw + 1j * q_kvar
        laws = solution.laws.column(row)
        i = np.conj(s / at.network.s_base_kva / v)
        seen = (laws.e_ref - regulator_error(laws, v[:, None], i[:, None])) * laws.to_own_v
        out = np.array([source.v_ref_pu for source in at.sources])
        out[places[self.voltage]] = seen[places[self.voltage], 0]
        return out


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
    # What all terminals do together is the bus voltage, which the trim holds.
    du = du - du.mean(axis=1, keepdims=True)
    return np.asarray((np.linalg.pinv(dq, rcond=1e-2) @ du).T)
