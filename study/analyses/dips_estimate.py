"""The quick estimate: every motor started in every mode by closed forms."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from study.analyses.dips_largest import largest_starts
from study.analyses.dips_options import DipOptions
from study.analyses.dips_places import MotorPlaces, judged_board, motor_places
from study.formulas.dips import engine_power_at_start, voltage_after_start
from study.network.batch import BatchSolution, solve_batch
from study.network.network import ModeNetwork
from study.network.start_network import StartNetwork, start_network
from study.results.arrays import ComplexArray, FloatArray, IntArray, read_only
from study.results.dips import PRELOAD_LAWS, LargestStart, ReductionTerms, StartEstimates


def start_estimates(
    networks: Sequence[ModeNetwork],
    p_kw: FloatArray,
    q_kvar: FloatArray,
    options: DipOptions | None = None,
) -> tuple[tuple[StartEstimates, ...], tuple[LargestStart, ...]]:
    """Estimate the dip of every motor's start in every mode.

    The sets keep their e.m.f. behind Ra + jX'd, the consumers are impedances of what they draw before. One
    unit of a motor that the mode has in use is taken off first. Motors fed by converters draw no starting
    current. For the other two laws of load before, the voltages are scaled as the closed form of one board
    does it at the sets' board.

    Parameters
    ----------
    networks : sequence of ModeNetwork
        One for each mode.
    p_kw, q_kvar : ndarray, shape (mode, load)
        What the consumers ask for. [kW], [kvar]
    options : DipOptions, optional
        Limits.

    Returns
    -------
    tuple of tuples
        Estimates of every mode, and the largest starts of every board with a set.
    """
    options = options or DipOptions()
    estimates, largest = [], []
    for n, at in enumerate(networks):
        batch, load = solve_batch(at, p_kw[n], q_kvar[n]), (p_kw[n], q_kvar[n])
        places = motor_places(at)
        if not batch.solved[0] or not len(places.load):
            estimates.append(_empty(at, batch.reason[0]))
        else:
            home = np.array([judged_board(at, int(i)) for i in places.island], np.int64)
            estimates.append(_Mode(batch=batch, places=places, load=load, home=home).estimates())
        if batch.solved[0]:
            largest += largest_starts(batch, load, options)
    return tuple(estimates), tuple(largest)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Change:
    """Voltages when an admittance comes on at each motor's place, [bus, motor]; ``z`` [motor] there."""

    before: ComplexArray
    after: ComplexArray
    z: ComplexArray


@dataclass(frozen=True, slots=True, kw_only=True)
class _Mode:
    """One mode; arrays are [motor] in the order of ``places``, ``home`` the board judged."""

    batch: BatchSolution
    places: MotorPlaces
    load: tuple[FloatArray, FloatArray]
    home: IntArray

    def estimates(self) -> StartEstimates:
        plant, places, home = self.batch.at.network.plant, self.places, self.home
        m = np.arange(len(home))
        home_bus = self.batch.at.bus_of_node[home]
        net = start_network(self.batch, self.load, np.concatenate([places.bus, home_bus]), first_cycle=False)
        first = start_network(self.batch, self.load, places.bus, first_cycle=True)
        started, running = self._change(net, places.y_start), self._change(net, places.y_run)
        u, before = self._boards(started.after), self._boards(started.before)[home, m]
        scale = self._by_law(net, started, home_bus)
        u_home, u_terminal = scale * u[home, m], scale * self._terminal(started, places.y_start)
        worst, u_worst = self._worst(u, self._boards(started.before))
        spare = self._engines(u_terminal[0])
        deepest = int(np.argmin(u[home, m] / before))
        return StartEstimates(
            mode=self.batch.at.mode.name,
            solved=True,
            reason="",
            loads=tuple(plant.loads[n].name for n in places.load),
            boards=tuple(plant.loads[n].board for n in places.load),
            methods=places.methods,
            set_boards=tuple(plant.boards[b].name for b in home),
            worst_boards=tuple(plant.boards[b].name if b >= 0 else "" for b in worst),
            line_current_a=read_only(places.i_line_a),
            line_cos_phi=read_only(places.cos_phi),
            u_set_board_before_pu=read_only(before),
            u_set_board_pu=read_only(u_home),
            u_set_board_first_cycle_pu=read_only(
                self._boards(self._change(first, places.y_start).after)[home, m]
            ),
            u_set_board_running_pu=read_only(self._boards(running.after)[home, m]),
            u_terminal_pu=read_only(u_terminal),
            u_terminal_running_pu=read_only(self._terminal(running, places.y_run)),
            u_worst_board_pu=read_only(u_worst),
            dip_pu=read_only((1.0 - u_home / before).max(axis=0)),
            torque_pu=read_only(places.torque * u_terminal[0] ** 2),
            p_engine_before_kw=read_only(spare[0]),
            p_engine_start_kw=read_only(spare[1]),
            p_engine_limit_kw=read_only(spare[2]),
            worked=self._worked(started, deepest),
        )

    def _change(self, net: StartNetwork, y: ComplexArray) -> _Change:
        """Return what admittances do, one at a time, behind their own runs: a column of the matrix each."""
        m, places = np.arange(len(y)), self.places
        own, behind = self._in_use(), y / (1.0 + places.z_path * y)
        column, at = net.z[:, m], places.bus
        grown = 1.0 - column[at, m] * own
        v = net.v[:, None]
        before = v + column * (own * net.v[at] / grown)
        column = column / grown
        z = column[at, m]
        after = before - column * (behind * before[at, m] / (1.0 + z * behind))
        return _Change(before=before, after=after, z=z)

    def _in_use(self) -> ComplexArray:
        """Return one unit of each motor in use as the admittance that the mode counts it with."""
        at, n = self.batch.at, self.places.load
        in_use = np.array([_units(at, int(k)) for k in n])
        s = (self.load[0][n] + 1j * self.load[1][n]) / np.maximum(in_use, 1.0) / at.network.s_base_kva
        u2 = np.abs(self.batch.v_bus_pu[0, at.load_bus[n]]) ** 2
        y = np.conj(np.where(in_use > 0.0, s, 0.0)) / u2
        return np.asarray(y / (1.0 + self.places.z_path * y))

    def _boards(self, v: ComplexArray) -> FloatArray:
        """Return voltages of the boards, [board, motor], per unit of nominal; 0 where dead."""
        at = self.batch.at
        nominal = np.array([b.u_nominal_v for b in at.network.plant.boards])
        bus = at.bus_of_node[: len(nominal)]
        u = np.abs(v[bus]) * (at.network.u_base_v[: len(nominal)] / nominal)[:, None]
        return np.asarray(np.where(bus[:, None] >= 0, u, 0.0))

    def _terminal(self, change: _Change, y: ComplexArray) -> FloatArray:
        """Return the voltage at the motors' terminals, per unit of their rated voltage."""
        m, places = np.arange(len(y)), self.places
        return np.asarray(np.abs(change.after[places.bus, m] / (1.0 + places.z_path * y)) * places.own_v)

    def _by_law(self, net: StartNetwork, started: _Change, home_bus: IntArray) -> FloatArray:
        """Return [law, motor] what the voltages are scaled by for each law of the load before.

        The set's board alone: sets behind what they show there, the load that turns that into what the
        network shows, and the motor as the impedance that gives the change found.
        """
        m = np.arange(len(home_bus))
        z_home = net.z[home_bus, len(m) + m]
        v = started.before[home_bus, m]
        ratio = started.after[home_bus, m] / v
        z_motor = z_home * ratio / (1.0 - ratio)
        s_load = np.conj(1.0 / z_home - 1.0 / net.z_without[len(m) + m]) * np.abs(v) ** 2
        laws = [
            np.abs(
                voltage_after_start(
                    v,
                    net.z_without[len(m) + m],
                    z_motor,
                    s_load_pu=s_load,
                    law=law,  # type: ignore[arg-type]
                )
            )
            for law in PRELOAD_LAWS
        ]
        return np.stack(laws) / laws[0]

    def _worst(self, u: FloatArray, before: FloatArray) -> tuple[IntArray, FloatArray]:
        """Return the board that falls most besides the one judged, and its voltage; -1 and NaN for none."""
        view = self.batch.at.view
        island = np.array(view.board_island, np.int64)[:, None]
        m = np.arange(len(self.home))
        other = (island == self.places.island) & (np.arange(len(u))[:, None] != self.home)
        left = np.where(other, u / np.where(before > 0.0, before, 1.0), np.inf)
        worst = left.argmin(axis=0)
        found = other.any(axis=0)
        return np.where(found, worst, -1), np.where(found, u[worst, m], np.nan)

    def _engines(self, u_terminal: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Return kW of the sets before and at the start, and the most that their engines give."""
        batch, places = self.batch, self.places
        before, limit = np.full((2, len(places.load)), np.nan)
        for island in np.unique(places.island):
            here = places.island == island
            sets = [n for n, s in enumerate(batch.at.sources) if s.island == island and s.machine is not None]
            if sets:
                before[here] = batch.source_p_kw[0, sets].sum()
                limit[here] = sum(batch.at.sources[n].p_max_kw for n in sets)
        before = before - np.abs(self._in_use().real) * batch.at.network.s_base_kva
        u_v = u_terminal * places.u_rated_v
        start = engine_power_at_start(before, u_v, places.i_line_a * u_terminal, places.cos_phi)
        return before, start, limit

    def _worked(self, started: _Change, k: int) -> ReductionTerms:
        at, places = self.batch.at, self.places
        load = at.network.plant.loads[places.load[k]]
        bus = int(places.bus[k])
        node = int(np.flatnonzero(at.bus_of_node == bus)[0])
        return ReductionTerms(
            load=load.name,
            board=at.network.topology.nodes[node].board,
            s_base_kva=at.network.s_base_kva,
            u_base_v=float(at.network.u_base_v[node]),
            v_before=complex(started.before[bus, k]),
            z_source=complex(started.z[k]),
            z_path=complex(places.z_path[k]),
            z_motor=complex(1.0 / places.y_start[k]),
            v_after=complex(started.after[bus, k]),
        )


def _units(at: ModeNetwork, load: int) -> float:
    demand = at.mode.demand.get(at.network.plant.loads[load].name)
    return demand.in_use if demand is not None else 0.0


def _empty(at: ModeNetwork, reason: str) -> StartEstimates:
    """Return the estimates of a mode without a solution, or without a motor."""
    none, laws = read_only(np.zeros(0)), read_only(np.zeros((len(PRELOAD_LAWS), 0)))
    return StartEstimates(
        mode=at.mode.name,
        solved=not reason,
        reason=reason,
        loads=(),
        boards=(),
        methods=(),
        set_boards=(),
        worst_boards=(),
        line_current_a=none,
        line_cos_phi=none,
        u_set_board_before_pu=none,
        u_set_board_pu=laws,
        u_set_board_first_cycle_pu=none,
        u_set_board_running_pu=none,
        u_terminal_pu=laws,
        u_terminal_running_pu=none,
        u_worst_board_pu=none,
        dip_pu=none,
        torque_pu=none,
        p_engine_before_kw=none,
        p_engine_start_kw=none,
        p_engine_limit_kw=none,
        worked=None,
    )
