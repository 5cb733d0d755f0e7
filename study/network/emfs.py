"""Each source as an EMF behind a reactance, adjusted until the source's own law holds."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.network.batch import BatchSolution
from study.network.in_force import laws_in_force, power_in_force
from study.network.laws import VoltageLaws
from study.network.network import ModeNetwork
from study.network.power import PowerLaws
from study.network.sources import Law

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

OWN_REACTANCE_PU = 0.3  # behind which a source under an odd law stands; any value gives the same solution
LARGEST_STEP_PU = 0.2


@dataclass(slots=True, kw_only=True)
class Emfs:
    """The sources of a mode, arrays [source], per unit of the network's base.

    ``e`` is adjusted between load flows; ``p`` and ``weight`` divide the active power: P = p + weight x what
    is missing. ``fixed`` marks sources of known kW and kvar, ``exact`` those whose EMF is known beforehand,
    ``grid`` shore supplies.
    """

    at: ModeNetwork
    laws: VoltageLaws
    power: PowerLaws
    e: FloatArray
    r: FloatArray
    x: FloatArray
    p: FloatArray
    q: FloatArray
    weight: FloatArray
    fixed: BoolArray
    exact: BoolArray
    grid: BoolArray

    def law_error(self, v_bus: ComplexArray, s: ComplexArray, members: IntArray) -> FloatArray:
        """Return the residual of each member's voltage law at the voltages found, per unit."""
        v, i = self._terminal(v_bus, s)
        return np.asarray(self.laws.residual(v, i)[members, 0])

    def power_error(self, s: ComplexArray, members: IntArray) -> FloatArray:
        """Return how far each member is from its active-power law, per unit."""
        a, b = self.power.a[members, 0], self.power.b[members, 0]
        p = s[members].real
        if not b.any():
            return np.where(self.grid[members], 0.0, p - a)
        m = (p.sum() - a.sum()) / b.sum()
        return np.asarray(p - a - b * m)

    def _terminal(self, v_bus: ComplexArray, s: ComplexArray) -> tuple[ComplexArray, ComplexArray]:
        """Return terminal voltages and currents, idle at 1 pu where the island is not solved yet."""
        v = v_bus[self.at.structure.source_bus]
        known = ~np.isnan(v)
        v = np.where(known, v, 1.0)
        return v[:, None], np.conj(np.where(known, s, 0.0) / v)[:, None]

    def adjust(
        self, members: IntArray, error: FloatArray, last: tuple[FloatArray, FloatArray] | None
    ) -> tuple[FloatArray, FloatArray]:
        """Move the EMFs of odd sources by the secant rule; return what the next step starts from."""
        odd = ~self.exact[members]
        before = self.e[members].copy()
        slope = np.where(self.fixed[members], np.inf, self._first_slope(members))
        if last is not None:
            moved = before - last[0]
            change = error - last[1]
            usable = odd & (np.abs(moved) > 1e-12) & (change * moved > 0.0)
            slope[usable] = change[usable] / moved[usable]
        step = np.where(odd, -error / slope, 0.0)
        self.e[members] = before + np.clip(step, -LARGEST_STEP_PU, LARGEST_STEP_PU)
        return before, error

    def _first_slope(self, members: IntArray) -> FloatArray:
        """Return the change of each law's residual for a change of its EMF, at rated voltage alone."""
        code, x = self.laws.code[members], self.x[members]
        power_like = np.isin(code, (Law.REACTIVE_POWER, Law.CURRENT_LIMIT))
        return np.where(power_like, 1.0 / np.where(x == 0.0, 1.0, x), 2.0)

    def frequency(self, s: ComplexArray) -> FloatArray:
        """Return the frequency of each island from the active power found, per unit."""
        m = np.zeros((self.at.structure.islands, 1))
        for n in range(len(m)):
            here = self.at.structure.source_island == n
            a, b = self.power.a[here, 0], self.power.b[here, 0]
            if b.any():
                m[n] = (s[here].real.sum() - a.sum()) / b.sum()
        return np.asarray(self.power.frequency(m)[:, 0])


def emfs_of(batch: BatchSolution) -> Emfs:
    """Return the sources of the first scenario of a batch as EMFs.

    EMFs of odd sources start from the batch's own solution; what counts is the law's residual at the other
    solver's voltages.

    Parameters
    ----------
    batch : BatchSolution
        Solved.

    Returns
    -------
    Emfs
        To be adjusted.
    """
    at = batch.at
    laws, power = laws_in_force(batch), power_in_force(batch)
    x, r = laws.x[:, 0].copy(), laws.r[:, 0].copy()
    phasor = np.isin(laws.code, (Law.PHASOR, Law.CROSS_CURRENT)) & ~laws.cross.any(axis=1)
    grid = laws.code == Law.BEHIND_IMPEDANCE
    exact = phasor | grid
    rating = np.array([s.s_rated_kva for s in at.sources]) / at.network.s_base_kva
    x[~exact] = OWN_REACTANCE_PU / rating[~exact]
    v = batch.v_bus_pu[0, at.structure.source_bus]
    i = batch.i_source_pu[0]
    e = np.where(exact, laws.e_ref[:, 0], np.abs(v + (r + 1j * x) * i))
    s = v * np.conj(i)
    b = power.b[:, 0]
    fixed = (laws.code == Law.REACTIVE_POWER) & (b == 0.0)
    return Emfs(
        at=at,
        laws=laws,
        power=power,
        e=e,
        r=r,
        x=x,
        p=_base_points(at, power, s),
        q=(laws.q_set + laws.q_per_p * power.a)[:, 0],
        weight=np.abs(b),
        fixed=fixed,
        exact=exact | fixed,
        grid=grid,
    )


def _base_points(at: ModeNetwork, power: PowerLaws, s: ComplexArray) -> FloatArray:
    """Return a + b m with m rounded, so that the other solver has the rest of the division to find."""
    p = power.a[:, 0].copy()
    for n in range(at.structure.islands):
        here = at.structure.source_island == n
        b = power.b[here, 0]
        if b.any():
            m = round((s[here].real.sum() - p[here].sum()) / b.sum(), 2)
            p[here] += b * m
    return p
