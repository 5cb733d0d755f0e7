"""An island of a mode made ready for the time simulation: reduced network, sources, motors, what happens."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.formulas.exciters import TRANSDUCER_S
from study.issues import SolveError
from study.network import dynamics_data as d
from study.network.batch import BatchSolution
from study.network.consumers import Demand
from study.network.dynamics_data import Plant, Script
from study.network.dynamics_idle import without_idle_nodes
from study.network.dynamics_motors import (
    Drive,
    Inertia,
    RunningMotors,
    circuit_of,
    inertia_of,
    motor_row,
    running_motors,
)
from study.network.dynamics_sources import SourceRows, following, source_rows
from study.network.lumping import FLOOR_PU, Lumped, lump
from study.network.network import ModeNetwork

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Happening:
    """Something at a time; ``index`` is a motor, a row of sources, a bus or a state of load, by its kind."""

    at_s: float
    kind: int
    index: int
    column: int = 0
    value: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Relay:
    """A relay of a source: what it looks at, its setting per unit, and what it does after its delay."""

    source: int
    looks: int
    setting: float
    delay_s: float
    does: int
    index: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Inrush:
    """A transformer to be energised: susceptance at first [pu of the network], and its decay."""

    bus: int
    y_pu: float
    decay_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class BoardLoad:
    """A change of load on a bus itself, by state of load: power at 1 pu voltage that follows its square."""

    bus: int
    state: int
    s_pu: complex


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """What is to be simulated.

    ``p_kw`` and ``q_kvar`` [state, load]: row 0 is the load before, without what starts later; the others are
    states that happenings of kind CHANGE_LOAD add the difference of. ``loads_running`` marks the consumers
    [load] whose motors follow the speed as motors; the others keep to their law.
    """

    island: int
    p_kw: FloatArray
    q_kvar: FloatArray
    drives: tuple[Drive, ...] = ()
    keep: tuple[int, ...] = ()
    board_loads: tuple[BoardLoad, ...] = ()
    inrush: tuple[Inrush, ...] = ()
    happenings: tuple[Happening, ...] = ()
    relays: tuple[Relay, ...] = ()
    running: tuple[bool, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Model:
    """An island ready to be followed; ``lumped`` gives the voltages of all other buses from its nodes'.

    ``inertia`` is [drive]; the motors of ``start`` are the plan's drives, then the running ones. ``back``
    [node, node of ``start``] turns voltages of the nodes simulated into those of all nodes: the buses of
    ``lumped``, then the terminals of motors with a run of their own.
    """

    at: ModeNetwork
    plan: Plan
    lumped: Lumped
    rows: SourceRows
    inertia: tuple[Inertia, ...]
    start: Plant
    script: Script
    back: ComplexArray


def demand_of(at: ModeNetwork, p_kw: FloatArray, q_kvar: FloatArray) -> Demand:
    """Return consumers' power at their places, a column for each row of kW and kvar.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    p_kw, q_kvar : ndarray, shape (state, load)
        [kW], [kvar]

    Returns
    -------
    Demand
        Per unit of the network's base.
    """
    s = np.asarray(p_kw, float).T + 1j * np.asarray(q_kvar, float).T
    constant = np.asarray(at.constant_sum @ s) + at.port_constant[:, None]
    return Demand(constant=constant, impedance=np.asarray(at.square_sum @ s))


def build_model(batch: BatchSolution, plan: Plan) -> Model:
    """Return an island ready for the time simulation, at rest in its load flow.

    Parameters
    ----------
    batch : BatchSolution
        The mode solved with the load before (row 0 of the plan).
    plan : Plan
        What is to be simulated.

    Returns
    -------
    Model
        For `dynamics_kernel.follow`.

    Raises
    ------
    SolveError
        A motor whose name-plate no circuit meets, or whose run cannot be found.
    """
    at = batch.at
    places = [place_of(at, x) for x in plan.drives]
    keep = {*plan.keep, *(bus for bus, _ in places), *(x.bus for x in plan.board_loads)}
    keep |= {x.bus for x in plan.inrush}
    p, q = plan.p_kw, plan.q_kvar
    running = np.array(plan.running, bool) if plan.running else np.zeros(p.shape[1], bool)
    still = [np.concatenate([np.where(running, 0.0, x), x[:1]]) for x in (p, q)]
    demand = demand_of(at, still[0], still[1])
    lumped = lump(at, batch.v_bus_pu[0], demand, plan.island, keep)
    rows = source_rows(batch, plan.island)
    return _Builder(batch=batch, plan=plan, lumped=lumped, rows=rows, places=places, running=running).model()


def _node_of_load(at: ModeNetwork, name: str) -> int:
    """Return the node that feeds a consumer in the mode, that of its second feed where it hangs on that."""
    number = next(n for n, x in enumerate(at.network.plant.loads) if x.name == name)
    return int(at.view.load_node[number])


def place_of(at: ModeNetwork, drive: Drive) -> tuple[int, complex]:
    """Return the bus that a motor hangs on, and the impedance of its own run (0 for none), per unit.

    Raises
    ------
    SolveError
        The motor is not fed in this mode.
    """
    topology = at.network.topology
    node, branches = _node_of_load(at, drive.load.name), at.network.branches
    at_node = (branches.from_node[at.live] == node) | (branches.to_node[at.live] == node)
    own = [int(k) for k in at.live[at_node] if topology.branches[k].load == drive.load.name]
    if not own:
        bus = int(at.bus_of_node[node])
        if bus < 0:
            raise SolveError(f"{at.mode.name}: {drive.load.name} is not fed")
        return bus, 0j
    y = sum(drive.units / complex(branches.r_pu[k], branches.x_pu[k]) for k in own)
    first = topology.branches[own[0]]
    other = first.from_node if first.to_node == node else first.to_node
    return int(at.bus_of_node[other]), 1.0 / y


@dataclass(frozen=True, slots=True, kw_only=True)
class _Builder:
    batch: BatchSolution
    plan: Plan
    lumped: Lumped
    rows: SourceRows
    places: list[tuple[int, complex]]
    running: NDArray[np.bool_]

    def model(self) -> Model:
        y, v, node = self._grid()
        load = np.stack([self._load(len(v), state) for state in range(len(self.plan.p_kw))])
        inertia = self._inertia()
        motor = self._motors(node, inertia)
        small = without_idle_nodes(self._start(y, v, load[0], motor), self._script(load - load[0]))
        return Model(
            at=self.batch.at,
            plan=self.plan,
            lumped=self.lumped,
            rows=self.rows,
            inertia=inertia,
            start=small.start,
            script=small.script,
            back=small.back,
        )

    def _grid(self) -> tuple[ComplexArray, ComplexArray, IntArray]:
        """Return admittance and voltages of all nodes, and the node of each motor that starts."""
        lumped, n = self.lumped, len(self.lumped.bus)
        own = [k for k, (_, z) in enumerate(self.places) if z != 0j]
        size = n + len(own)
        y, v = np.zeros((size, size), complex), np.zeros(size, complex)
        y[:n, :n], v[:n] = lumped.admittance, lumped.v
        node = np.zeros(len(self.places), np.int64)
        for k, (bus, z) in enumerate(self.places):
            parent = lumped.node_of(bus)
            node[k] = parent
            if z != 0j:
                node[k] = n + own.index(k)
                y[parent, parent] += 1.0 / z
                y[parent, node[k]] = y[node[k], parent] = -1.0 / z
                y[node[k], node[k]] = 1.0 / z
                v[node[k]] = v[parent]
        return y, v, node

    def _load(self, size: int, state: int) -> FloatArray:
        """Return A and B, [4, node], in a state of load, with what is on the boards themselves."""
        constant, square = np.zeros(size, complex), np.zeros(size, complex)
        n = len(self.lumped.bus)
        constant[:n], square[:n] = self.lumped.constant[:, state], self.lumped.square[:, state]
        for x in self.plan.board_loads:
            if x.state == state:
                square[self.lumped.node_of(x.bus)] += x.s_pu
        buses, power = following(self.batch, self.plan.island)
        for bus, s in zip(buses, power, strict=True):
            constant[self.lumped.node_of(int(bus))] -= s
        return np.stack([constant.real, constant.imag, square.real, square.imag])

    def _inertia(self) -> tuple[Inertia, ...]:
        f_hz = self.batch.at.network.plant.project.f_rated_hz
        return tuple(
            Inertia(h_s=1.0, basis="fed by its converter", known=False)
            if x.load.motor is not None and x.load.motor.starting_method == "converter"
            else inertia_of(x.load, circuit_of(x.load), x.load_pu, f_hz)
            for x in self.plan.drives
        )

    def _motors(self, node: IntArray, inertia: Sequence[Inertia]) -> FloatArray:
        """Return the motors that start, then the running ones, [motor, column]."""
        at, rows = self.batch.at, []
        number = {x.name: n for n, x in enumerate(at.network.plant.loads)}
        for x, h, k in zip(self.plan.drives, inertia, node, strict=True):
            own_v = float(at.load_arrays.v_scale[number[x.load.name]])
            row = motor_row(x, own_v=own_v, s_base_kva=at.network.s_base_kva, inertia=h)
            row[d.MOTOR_NODE] = k
            rows.append(row)
        f_pu = float(self.batch.frequency_pu[0, self.plan.island])
        for k in range(len(self.lumped.bus)):
            found = self._running_at(k, f_pu)
            if found is not None:
                found.row[d.MOTOR_NODE] = k
                rows.append(found.row)
        return np.array(rows, float).reshape(-1, d.MOTOR_COLUMNS)

    def _running_at(self, k: int, f_pu: float) -> RunningMotors | None:
        """Return the running motors behind one node as one motor."""
        if not self.running.any():
            return None
        network, lumped = self.batch.at.network, self.lumped
        here = [n for n in np.flatnonzero(self.running) if self._node_behind(int(n)) == k]
        u2 = abs(lumped.v[k]) ** 2
        total = (
            lumped.constant[k, -1] - lumped.constant[k, 0] + (lumped.square[k, -1] - lumped.square[k, 0]) * u2
        )
        p = self.plan.p_kw[0, here]
        if not here or p.sum() <= 0.0:
            return None
        at = self.batch.at
        u = np.abs(self.batch.v_bus_pu[0, at.load_bus[here]]) * at.load_arrays.v_scale[here]
        return running_motors(
            [network.plant.loads[n] for n in here],
            (p / p.sum() * total * network.s_base_kva).tolist(),
            u.tolist(),
            v=complex(lumped.v[k]),
            s_base_kva=network.s_base_kva,
            f_hz=network.plant.project.f_rated_hz,
            f_pu=f_pu,
        )

    def _node_behind(self, load: int) -> int:
        """Return the node that a consumer hangs on through the trees; -1 in another island."""
        bus = int(self.batch.at.load_bus[load])
        behind = dict(zip(self.lumped.twigs.bus.tolist(), self.lumped.twigs.behind.tolist(), strict=True))
        while bus in behind:
            bus = behind[bus]
        place = np.flatnonzero(self.lumped.bus == bus)
        return int(place[0]) if len(place) else -1

    def _start(self, y: ComplexArray, v: ComplexArray, load: FloatArray, motor: FloatArray) -> Plant:
        at, source, size = self.batch.at, self.rows.table.copy(), len(v)
        source[:, d.NODE] = [self.lumped.node_of(int(at.structure.source_bus[j])) for j in self.rows.place]
        node, single = np.zeros((size, d.NODE_COLUMNS)), np.zeros(d.SINGLE_COLUMNS)
        node[:, d.V_RE], node[:, d.V_IM] = v.real, v.imag
        node[:, d.A_RE : d.B_IM + 1] = load.T
        node[:, d.FLOOR] = (FLOOR_PU * np.abs(v)) ** 2
        single[d.OMEGA] = 2.0 * np.pi * at.network.plant.project.f_rated_hz
        return Plant(
            source=source,
            motor=motor,
            node=node,
            y=y,
            work=np.zeros((2 * size, 2 * size + 1)),
            order=np.zeros(2 * size, np.int64),
            single=single,
        )

    def _script(self, load: FloatArray) -> Script:
        plan = self.plan
        happenings = sorted(plan.happenings, key=lambda x: x.at_s)
        event = [[x.at_s, x.kind, self._index(x), x.column, x.value] for x in happenings]
        relay = [[x.source, x.looks, x.setting, x.delay_s, x.does, x.index, 0.0] for x in plan.relays]
        inrush = [[self.lumped.node_of(x.bus), x.y_pu, x.decay_s, np.inf] for x in plan.inrush]
        return Script(
            event=np.array(event, float).reshape(-1, d.EVENT_COLUMNS),
            relay=np.array(relay, float).reshape(-1, d.RELAY_COLUMNS),
            inrush=np.array(inrush, float).reshape(-1, d.INRUSH_COLUMNS),
            load=load,
        )

    def _index(self, x: Happening) -> int:
        return self.lumped.node_of(x.index) if x.kind in (d.FAULT_ON, d.FAULT_OFF) else x.index


def shortest_time_s(plant: Plant) -> float:
    """Return the shortest time constant of a plant.

    Parameters
    ----------
    plant : Plant
        Ready to be followed.

    Returns
    -------
    float
        Of transducers, regulators, dampers, racks, and of motors near their rated slip. [s]
    """
    machines = plant.source[plant.source[:, d.KIND] == d.MACHINE]
    times = [TRANSDUCER_S]
    if len(machines):
        times += machines[:, [d.TD02, d.TQ02, d.EXCITER_S, d.RACK_S, d.GOV_FILTER_S]].ravel().tolist()
        times += (0.5 * machines[:, d.DEAD_S][machines[:, d.DEAD_S] > 0.0]).tolist()
    motors = plant.motor[plant.motor[:, d.SLIP_RATED] > 0.0]
    times += (motors[:, d.MOTOR_2H] * motors[:, d.SLIP_RATED]).tolist()
    return float(min(times))
