"""The vectorised load flow: any number of scenarios of a mode, with the limits of the sources."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.sparse import csr_array

from study.issues import SolveError
from study.network.consumers import Demand, drawn_by
from study.network.equations import Point, Problem
from study.network.fields import field_state
from study.network.laws import VoltageLaws, some, voltage_laws
from study.network.limits import (
    CEILING,
    LARGEST_CURRENT,
    NO_EXCITATION,
    excitation_steps,
    limited_laws,
    power_steps,
    regulator_error,
)
from study.network.network import ModeNetwork, checked_loads
from study.network.power import PowerLaws, power_laws
from study.network.scenarios import Solutions, no_solutions, solve_scenarios
from study.network.settings import Settings, column_wise, or_own, reactances
from study.network.sources import Law, Source
from study.network.stability import most_reversed, runaway

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

LIMIT_WORDS = {CEILING: "excitation", NO_EXCITATION: "excitation", LARGEST_CURRENT: "current"}


@dataclass(frozen=True, slots=True, kw_only=True)
class BatchSolution:
    """Scenarios of one mode, arrays [scenario, ...].

    ``v_bus_pu`` [scenario, bus] is complex, per unit of the level's base voltage. Sources' kW and kvar are
    those at their terminals. ``excitation_state`` and ``power_state`` [scenario, source] are 0 within limits
    (see `limits`). ``field_pu`` is a multiple of the field at rated load. Where ``solved`` is False the
    numbers are NaN and ``reason`` says why. ``laws`` are those within limits; ``f_no_load_pu`` and
    ``speed_droop_pu`` [source, scenario or 1] the governors' settings.
    """

    at: ModeNetwork
    laws: VoltageLaws
    f_no_load_pu: FloatArray
    speed_droop_pu: FloatArray
    solved: BoolArray
    reason: tuple[str, ...]
    residual_pu: FloatArray
    iterations: IntArray
    v_bus_pu: ComplexArray
    i_source_pu: ComplexArray
    source_p_kw: FloatArray
    source_q_kvar: FloatArray
    source_u_pu: FloatArray
    field_pu: FloatArray
    frequency_pu: FloatArray
    excitation_state: IntArray
    power_state: IntArray
    ran_away: BoolArray

    def board_u_pu(self) -> FloatArray:
        """Return board voltages [scenario, board], per unit of nominal voltage; NaN where dead."""
        network = self.at.network
        nominal = np.array([b.u_nominal_v for b in network.plant.boards])
        bus = self.at.bus_of_node[: len(nominal)]
        out = np.abs(self.v_bus_pu)[:, bus] * (network.u_base_v[: len(nominal)] / nominal)
        out[:, bus < 0] = np.nan
        return np.asarray(out)


def solve_batch(
    at: ModeNetwork,
    p_kw: ArrayLike,
    q_kvar: ArrayLike,
    settings: Settings | None = None,
    *,
    compiled: bool | None = None,
) -> BatchSolution:
    """Solve scenarios of a mode.

    Parameters
    ----------
    at : ModeNetwork
        The mode's network.
    p_kw, q_kvar : ndarray, shape (load,) or (scenario, load)
        Power of each consumer, all its units in use, at its rated voltage. [kW], [kvar]
    settings : Settings, optional
        Trims other than those of the workbook.
    compiled : bool, optional
        Whether to use the compiled sweep, which costs some ten seconds the first time; by the size of the
        task where left out.

    Returns
    -------
    BatchSolution
        One row for each scenario.

    Raises
    ------
    SolveError
        Loads or settings that are not numbers or not of the right shape.
    """
    batch = _Batch(at, p_kw, q_kvar, settings or Settings())
    batch.compiled = compiled
    return batch.solve()


class _Batch:
    """One call: inputs as [.., scenario] arrays, and the state of every source in every scenario."""

    def __init__(self, at: ModeNetwork, p_kw: ArrayLike, q_kvar: ArrayLike, settings: Settings) -> None:
        self.at, self.sources = at, at.sources
        self.compiled: bool | None = None
        self.s_base = at.network.s_base_kva
        p, q = checked_loads(at, p_kw, q_kvar)
        trims = [
            column_wise(at, getattr(settings, name), name)
            for name in (
                "no_load_voltage_pu",
                "voltage_droop_pu",
                "no_load_frequency_pu",
                "speed_droop_pu",
            )
        ]
        widths = {len(p)} | {t.shape[1] for t in trims if t is not None}
        self.count = max(widths)
        if widths - {1, self.count}:
            raise SolveError(f"{at.mode.name}: loads and settings are given for {sorted(widths)} scenarios")
        self.demand = _demand(at, p, q)
        self.own = all(t is None for t in trims)
        v_ref = or_own(trims[0], self.sources, "v_ref_pu")
        self.laws = (
            at.laws
            if self.own
            else voltage_laws(
                self.sources,
                at.source_u_base_v,
                self.s_base,
                v_ref_pu=v_ref,
                xc_pu=reactances(self.sources, v_ref, trims[0], trims[1]),
            )
        )
        self.f_no_load = or_own(trims[2], self.sources, "f_no_load_pu")
        self.speed_droop = or_own(trims[3], self.sources, "speed_droop_pu")
        shape = (len(self.sources), self.count)
        self.state, self.power_state = np.zeros(shape, np.int64), np.zeros(shape, np.int64)
        self.pinned, self.at_current = np.zeros(shape, bool), np.zeros(shape, bool)
        self.found = no_solutions(at.structure, 0)
        self.field = np.full(shape, np.nan)
        self.frequency = np.full((at.structure.islands, self.count), np.nan)

    def solve(self) -> BatchSolution:
        reasons = np.full(self.count, "", object)
        refused = " ".join(r for r in self.at.refusals if r)
        if refused or not self.sources:
            reasons[:] = refused or "no source is on line."
            return self._result(reasons)
        todo = np.arange(self.count)
        for _ in range(4 * len(self.sources) + 4):
            if not len(todo):
                break
            todo = np.sort(np.concatenate([self._pass(k, reasons) for k in self._alike(todo)]))
        for k in todo:
            reasons[k] = self._beyond_currents(self.at_current[:, k]) or (
                "the sources' limits lead from one to the other without end: no steady state found."
            )
        return self._result(reasons)

    def _alike(self, todo: IntArray) -> list[IntArray]:
        """Return scenarios grouped by the state of their sources."""
        both = np.concatenate([self.state, self.power_state])[:, todo]
        if not both.any():
            return [todo]
        _, group = np.unique(both, axis=1, return_inverse=True)
        return [todo[group == g] for g in range(group.max() + 1)]

    def _pass(self, k: IntArray, reasons: NDArray[np.object_]) -> IntArray:
        """Solve scenarios in one state; return those in which a source then changes its state."""
        state, power_state = self.state[:, k[0]], self.power_state[:, k[0]]
        problem = self._problem(k, state, power_state)
        for n in np.flatnonzero(problem.power.short):
            reasons[k] = f"the load exceeds what the engines of {_names(self.sources, int(n))} can give."
        if problem.power.short.any():
            return np.zeros(0, np.int64)
        solved = solve_scenarios(problem, len(k), self._mean_point(k), compiled=self.compiled)
        self._store(k, solved)
        self.frequency[:, k] = problem.power.frequency(solved.m)
        ran = self._let_run_away(k, state, power_state)
        lost = k[~solved.converged]
        for n in np.setdiff1d(lost, ran):
            reasons[n] = self._no_point(n)
        stays = ~np.isin(k, np.concatenate([lost, ran]))
        moved = self._change_states(k[stays], problem.power.columns(np.flatnonzero(stays)))
        return np.asarray(np.concatenate([moved, ran]))

    def _problem(self, k: IntArray, state: IntArray, power_state: IntArray) -> Problem:
        return Problem(
            at=self.at.structure,
            laws=limited_laws(self.laws.columns(k), self.sources, state),
            power=self._power(k, power_state),
            demand=Demand(constant=some(self.demand.constant, k), impedance=some(self.demand.impedance, k)),
        )

    def _no_point(self, n: int) -> str:
        found = self.found
        tried = f"(residual {found.residual_pu[n]:.1e} pu after {found.iterations[n]} iterations)."
        if self.pinned[:, n].any():
            names = " and ".join(self.sources[j].name for j in np.flatnonzero(self.pinned[:, n]))
            return (
                f"the droop circuit of {names} is reversed: the regulators run apart to their limits, and "
                f"the sets cannot stay in step there {tried}"
            )
        beyond = self._beyond_their_runs(n)
        if beyond:
            asks = "ask" if " and " in beyond else "asks"
            return (
                f"no operating point: {beyond} {asks} for more than the run there can carry at any voltage."
            )
        held = self._beyond_currents(self.state[:, n] == LARGEST_CURRENT)
        if held:
            return held
        without = np.flatnonzero(self.state[:, n] == NO_EXCITATION)
        if len(without):
            names = " and ".join(self.sources[j].name for j in without)
            return (
                f"no operating point: the other sources hold the voltage so high that {names} would run "
                f"without field, and cannot stay in step so {tried}"
            )
        return f"no operating point: the load exceeds what sources and network can carry {tried}"

    def _beyond_currents(self, held: BoolArray) -> str:
        """Return that the load asks these sources, [source], for more than their current; empty for none."""
        names = " and ".join(self.sources[j].name for j in np.flatnonzero(held))
        if not names:
            return ""
        return (
            f"no operating point: the load asks {names} for more than the largest current of the converter, "
            "and takes more current still as the voltage falls."
        )

    def _beyond_their_runs(self, n: int) -> str:
        """Return the consumers at the end of a run that cannot carry their load from rated voltage."""
        at = self.at.structure
        one = np.array([n])
        demand = Demand(constant=some(self.demand.constant, one), impedance=some(self.demand.impedance, one))
        with np.errstate(invalid="ignore"):
            v = drawn_by(at.ports, demand).leaf_voltage(np.ones((len(at.ports.bus), 1), complex))
        buses = at.buses + np.flatnonzero(np.isnan(v[:, 0]))
        names = [
            x.name
            for x, bus in zip(self.at.network.plant.loads, self.at.load_bus, strict=True)
            if bus in buses
        ]
        return " and ".join(names)

    def _power(self, k: IntArray, power_state: IntArray) -> PowerLaws:
        if self.own and not power_state.any():
            return self.at.power
        return power_laws(
            self.sources,
            self.at.structure.islands,
            self.s_base,
            f_no_load_pu=some(self.f_no_load, k),
            speed_droop_pu=some(self.speed_droop, k),
            at_limit=power_state,
        )

    def _change_states(self, k: IntArray, power: PowerLaws) -> IntArray:
        """Let the source that is furthest from its limit, or from needing it, change its state."""
        if not len(k):
            return k
        v, i = some(self.found.v[self.at.structure.source_bus], k), some(self.found.i, k)
        state, power_state = self.state[:, k[0]], self.power_state[:, k[0]]
        laws = self.laws.columns(k)
        field = field_state(self.at.set_groups, *laws.own(v, i))
        self.field[:, k] = field.needed
        wanted, by = excitation_steps(laws, self.sources, state, field, v=v, i=i)
        by[self.pinned[:, k]] = 0.0
        p, f = (v * np.conj(i)).real, self.frequency[:, k]
        p_wanted, p_by = power_steps(power, self.sources, power_state, p=p, f=f)
        distance = np.concatenate([by, p_by])
        most = distance.argmax(axis=0)
        moves = distance[most, np.arange(len(k))] > 0.0
        count = len(self.sources)
        by_field, by_engine = np.flatnonzero(moves & (most < count)), np.flatnonzero(moves & (most >= count))
        self.state[most[by_field], k[by_field]] = wanted[most[by_field], by_field]
        self.at_current |= self.state == LARGEST_CURRENT
        j = most[by_engine] - count
        self.power_state[j, k[by_engine]] = p_wanted[j, by_engine]
        return np.asarray(k[moves])

    def _let_run_away(self, k: IntArray, state: IntArray, power_state: IntArray) -> IntArray:
        """Send sets whose regulators do not hold the point to the limit that they run to.

        Where reversed and normal droop cancel there is no point at all: then the reversed set with the most
        droop runs. Returns the scenarios in which a set has been sent.
        """
        found, ran = self.found, []
        for n in k if (self.laws.x < 0.0).any() else k[:0]:
            one = np.array([n])
            problem = self._problem(one, state, power_state)
            j: int | None
            x = None
            if found.converged[n]:
                x = Point(v=found.v[: self.at.structure.buses, one], i=found.i[:, one], m=found.m[:, one])
                j = runaway(problem, x)
            else:
                j = most_reversed(problem.laws)
            if j is not None:
                self.state[j, n] = self._limit_reached(j, problem, x)
                self.pinned[j, n] = True
                ran.append(n)
        return np.array(ran, np.int64)

    def _limit_reached(self, j: int, problem: Problem, x: Point | None) -> int:
        """Return the limit that a set runs to when it is closed in with no kvar on it."""
        laws = problem.laws
        code, q_set, q_per_p = laws.code.copy(), laws.q_set.copy(), laws.q_per_p.copy()
        code[j], q_set[j], q_per_p[j] = Law.REACTIVE_POWER, 0.0, 0.0
        idle = replace(laws.with_code(code), q_set=q_set, q_per_p=q_per_p)
        at_rest = solve_scenarios(replace(problem, laws=idle), 1, x)
        bus = self.at.structure.source_bus
        error = regulator_error(laws, at_rest.v[bus], at_rest.i)
        return CEILING if error[j, 0] > 0.0 else NO_EXCITATION

    def _mean_point(self, k: IntArray) -> Point | None:
        """Return the mean of what was found before for these scenarios, as a first point."""
        found, buses = self.found, self.at.structure.buses
        known = k[found.converged[k]] if len(found.converged) else k[:0]
        if not len(known):
            return None
        return Point(
            v=found.v[:buses, known].mean(axis=1, keepdims=True),
            i=found.i[:, known].mean(axis=1, keepdims=True),
            m=found.m[:, known].mean(axis=1, keepdims=True),
        )

    def _store(self, k: IntArray, solved: Solutions) -> None:
        if not len(self.found.converged):  # the first pass, over all scenarios
            self.found = solved
            return
        found = self.found
        found.v[:, k], found.i[:, k], found.m[:, k] = solved.v, solved.i, solved.m
        found.residual_pu[k], found.converged[k] = solved.residual_pu, solved.converged
        found.iterations[k] += solved.iterations

    def _result(self, reasons: NDArray[np.object_]) -> BatchSolution:
        solved = reasons == ""
        lost = ~solved
        found = self.found if len(self.found.converged) else no_solutions(self.at.structure, self.count)
        if lost.any():
            found.v[:, lost], found.i[:, lost], found.m[:, lost] = np.nan, np.nan, np.nan
        v_s = found.v[self.at.structure.source_bus]
        s = v_s * np.conj(found.i) * self.s_base
        return BatchSolution(
            at=self.at,
            laws=self.laws,
            f_no_load_pu=self.f_no_load,
            speed_droop_pu=self.speed_droop,
            solved=solved,
            reason=tuple(reasons.tolist()),
            residual_pu=found.residual_pu,
            iterations=found.iterations,
            v_bus_pu=found.v.T,
            i_source_pu=found.i.T,
            source_p_kw=s.real.T,
            source_q_kvar=s.imag.T,
            source_u_pu=(np.abs(v_s) * self.laws.to_own_v).T,
            field_pu=np.where(solved, self.field, np.nan).T,
            frequency_pu=np.where(solved, self.frequency, np.nan).T,
            excitation_state=self.state.T,
            power_state=self.power_state.T,
            ran_away=self.pinned.T,
        )


def _names(sources: tuple[Source, ...], island: int) -> str:
    return " and ".join(s.name for s in sources if s.island == island)


def _demand(at: ModeNetwork, p_kw: FloatArray, q_kvar: FloatArray) -> Demand:
    """Return the consumers' power at their places, [place, scenario]."""
    p, q = np.ascontiguousarray(p_kw.T), np.ascontiguousarray(q_kvar.T)
    constant = _at_places(at.constant_sum, p, q) + at.port_constant[:, None]
    return Demand(constant=constant, impedance=_at_places(at.square_sum, p, q))


def _at_places(weights: csr_array, p_kw: FloatArray, q_kvar: FloatArray) -> ComplexArray:
    """Return a part of the consumers' power, [place, scenario], or one column of zeros for none."""
    if not weights.nnz:
        return np.zeros((weights.shape[0], 1), complex)
    out = np.empty((weights.shape[0], p_kw.shape[1]), complex)
    out.real, out.imag = weights @ p_kw, weights @ q_kvar
    return out
