"""Events of one case turned into what the time simulation wants: motors, changes of load, settings."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace

import numpy as np

from study.analyses.dips_options import DipOptions
from study.analyses.dips_settings import setting_happenings
from study.issues import SolveError
from study.model.branches import ThreeWindingTransformer, Transformer
from study.model.loads import Load
from study.model.modes import Event, Mode
from study.model.plant import Plant
from study.network import dynamics_data as d
from study.network.dynamics_build import BoardLoad, Happening, Inrush, Plan, Relay
from study.network.dynamics_motors import Drive
from study.network.network import ModeNetwork
from study.results.arrays import FloatArray
from study.results.dips import CaseStep

TRIAL_COS_PHI = 0.8  # of a load step on a board in kW; common practice of trials, no source
# A suddenly switched load in kVA, A or % is at 0.4: class rules for the transient test of a set, from memory.
SWITCHED_COS_PHI = 0.4
# The first peak of an inrush is one-sided: its fundamental is about half; common practice, no source.
INRUSH_FUNDAMENTAL = 0.5
TYPICAL_INRUSH, TYPICAL_DECAY_S = 10.0, 0.1


@dataclass(slots=True, kw_only=True)
class CaseWork:
    """A case while its events are gone through; ``p_kw`` and ``q_kvar`` [load] are the load before."""

    at: ModeNetwork
    island: int
    p_kw: FloatArray
    q_kvar: FloatArray
    options: DipOptions
    states: list[tuple[FloatArray, FloatArray]] = field(default_factory=list)
    drives: list[Drive] = field(default_factory=list)
    keep: list[int] = field(default_factory=list)
    board_loads: list[BoardLoad] = field(default_factory=list)
    inrush: list[Inrush] = field(default_factory=list)
    happenings: list[Happening] = field(default_factory=list)
    relays: list[Relay] = field(default_factory=list)
    relay_words: list[str] = field(default_factory=list)
    steps: list[CaseStep] = field(default_factory=list)
    findings: list[str] = field(default_factory=list)
    motors_move: bool = False

    @property
    def plant(self) -> Plant:
        """The whole plant."""
        return self.at.network.plant

    def rows(self) -> list[str]:
        """Return the names of the island's sources in the order of the simulation."""
        return [
            s.name
            for s in self.at.sources
            if s.island == self.island
            and not (s.kind == "converter supply" and s.law.name == "REACTIVE_POWER")
        ]

    def row(self, name: str) -> int:
        """Return the row of a source that can be simulated, or say why there is none."""
        rows = self.rows()
        if name not in rows:
            follows = name in self.at.source_names
            why = "follows the grid at a set power" if follows else "is not on line"
            raise SolveError(f"{name} {why} in {self.at.mode.name}.")
        return rows.index(name)

    def state(self, p_kw: FloatArray, q_kvar: FloatArray) -> int:
        """Add a state of load; return its number."""
        self.states.append((p_kw, q_kvar))
        return len(self.states)

    def change(self, at_s: float, dp_kw: FloatArray, dq_kvar: FloatArray) -> None:
        """Add a change of load at a time."""
        index = self.state(self.p_kw + dp_kw, self.q_kvar + dq_kvar)
        self.happenings.append(Happening(at_s=at_s, kind=d.CHANGE_LOAD, index=index))

    def say(self, event: Event, text: str) -> None:
        """Note what an event of the sheet does."""
        self.steps.append(CaseStep(at_s=event.at_s, text=text, cell=event.cell))

    def plan(self) -> Plan:
        """Return what is to be simulated."""
        p, q = zip((self.p_kw, self.q_kvar), *self.states, strict=True)
        running = self._running() if self.motors_move else ()
        return Plan(
            island=self.island,
            p_kw=np.array(p),
            q_kvar=np.array(q),
            drives=tuple(self.drives),
            keep=tuple(self.keep),
            board_loads=tuple(self.board_loads),
            inrush=tuple(self.inrush),
            happenings=tuple(self.happenings),
            relays=tuple(self.relays),
            running=running,
        )

    def _running(self) -> tuple[bool, ...]:
        """Return which consumers run as motors of their own: on line, direct, and with a circuit."""
        return tuple(
            x.motor is not None and x.motor.starting_method != "converter" and bool(p > 0.0)
            for x, p in zip(self.plant.loads, self.p_kw, strict=True)
        )


def mode_before(plant: Plant, mode: Mode, events: Sequence[Event]) -> Mode:
    """Return the mode before a case: a transformer that is energised in it is still off.

    Parameters
    ----------
    plant : Plant
        The whole plant.
    mode : Mode
        Of the case.
    events : sequence of Event
        Of the case.

    Returns
    -------
    Mode
        The mode itself where nothing differs.
    """
    names = {e.equipment for e in events if e.kind == "transformer energising"}
    if not names:
        return mode
    return replace(mode, states={**mode.states, **dict.fromkeys(names, "off")})


def load_before(
    plant: Plant, mode: Mode, events: Sequence[Event], p: FloatArray, q: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return kW and kvar before a case: without the units that start in it.

    Parameters
    ----------
    plant : Plant
        The whole plant.
    mode : Mode
        Of the case.
    events : sequence of Event
        Of the case.
    p, q : ndarray, shape (load,)
        What the mode counts. [kW], [kvar]

    Returns
    -------
    tuple of ndarray
        [kW], [kvar]
    """
    share = np.ones(len(plant.loads))
    index = {x.name: n for n, x in enumerate(plant.loads)}
    for e in events:
        if e.kind == "motor start" and e.equipment in index:
            demand = mode.demand.get(e.equipment)
            in_use = demand.in_use if demand is not None else 0.0
            if in_use > 0.0:
                share[index[e.equipment]] -= min(units_of(e) / in_use, 1.0)
    share = np.maximum(share, 0.0)
    return np.asarray(p) * share, np.asarray(q) * share


def units_of(event: Event) -> float:
    """Return how many units an event starts; one where its size is not a number of units."""
    return float(event.size) if event.size is not None and event.unit in (None, "units") else 1.0


def torque_share(mode: Mode, load: Load) -> float:
    """Return the torque of a driven machine at full speed over rated torque, from its duty in a mode."""
    demand = mode.demand.get(load.name)
    factor = demand.load_factor if demand is not None and demand.load_factor > 0.0 else 1.0
    return load.p_absorbed_kw * factor / load.p_rated_kw


# ---- one function for each kind of event


def _motor_start(work: CaseWork, e: Event) -> None:
    if any(m.name == e.equipment for m in work.plant.synchronous_motors):
        raise SolveError(
            f"{e.equipment}: the workbook has no asynchronous starting data of synchronous motors."
        )
    load = work.plant.load(e.equipment)
    if load.motor is None:
        raise SolveError(f"{load.name} is no motor.")
    units = units_of(e)
    work.drives.append(Drive(load=load, units=units, load_pu=torque_share(work.at.mode, load)))
    work.happenings.append(Happening(at_s=e.at_s, kind=d.START_MOTOR, index=len(work.drives) - 1))
    count = "" if units == 1.0 else f" ({units:g} units)"
    work.say(e, f"{load.name}{count} starts: {load.motor.starting_method}")


def _load_step(work: CaseWork, e: Event) -> None:
    size = float(e.size or 0.0)
    boards = {b.name: n for n, b in enumerate(work.plant.boards)}
    if e.equipment in boards:
        _board_step(work, e, boards[e.equipment], size)
        return
    n = _load_index(work, e)
    load, unit = work.plant.loads[n], e.unit or "kW"
    p_unit = load.p_rated_kw / load.efficiency
    p = {
        "kW": size,
        "kVA": size * load.cos_phi,
        "units": size * p_unit,
        "%": size / 100.0 * p_unit * load.installed,
    }.get(unit)
    if p is None:
        raise SolveError(f"{e.equipment}: a load step in {unit!r}; give kW, kVA, units or %.")
    cos_phi = load.converter.displacement_cos_phi if load.converter is not None else load.cos_phi
    dp, dq = _one(work, n, p), _one(work, n, p * (1.0 / cos_phi**2 - 1.0) ** 0.5)
    work.change(e.at_s, dp, dq)
    if e.duration_s is not None:
        work.change(e.at_s + e.duration_s, -dp, -dq)
    work.say(e, f"{load.name} takes {p:+.0f} kW")


def _one(work: CaseWork, n: int, value: float) -> FloatArray:
    out = np.zeros(len(work.p_kw))
    out[n] = value
    return out


def _board_step(work: CaseWork, e: Event, board: int, size: float) -> None:
    at, unit = work.at, e.unit or "kW"
    u_v = work.plant.boards[board].u_nominal_v
    largest = max((s.s_rated_kva for s in at.sources if s.island == work.island), default=0.0)
    s_kva, cos_phi = {
        "kW": (size / TRIAL_COS_PHI, TRIAL_COS_PHI),
        "kVA": (size, SWITCHED_COS_PHI),
        "A": (3.0**0.5 * u_v * size / 1000.0, SWITCHED_COS_PHI),
        "%": (size / 100.0 * largest, SWITCHED_COS_PHI),
    }.get(unit, (0.0, 0.0))
    if cos_phi == 0.0:
        raise SolveError(f"{e.equipment}: a load step in {unit!r}; give kW, kVA, A or %.")
    s = s_kva * complex(cos_phi, (1.0 - cos_phi**2) ** 0.5) / at.network.s_base_kva
    s *= (float(at.network.u_base_v[board]) / u_v) ** 2
    bus = int(at.bus_of_node[board])
    for at_s, sign in ((e.at_s, 1.0), (e.at_s + (e.duration_s or np.inf), -1.0)):
        if np.isfinite(at_s):
            index = work.state(work.p_kw, work.q_kvar)
            work.board_loads.append(BoardLoad(bus=bus, state=index, s_pu=sign * s))
            work.happenings.append(Happening(at_s=at_s, kind=d.CHANGE_LOAD, index=index))
    work.say(e, f"{s_kva:.0f} kVA at power factor {cos_phi:g} on {e.equipment}, as an impedance")


def _load_index(work: CaseWork, e: Event) -> int:
    for n, x in enumerate(work.plant.loads):
        if x.name == e.equipment:
            if work.at.load_bus[n] < 0:
                raise SolveError(f"{x.name} is not fed in {work.at.mode.name}.")
            return n
    raise SolveError(f"{e.equipment} is no load.")


def _set_trip(work: CaseWork, e: Event) -> None:
    work.happenings.append(Happening(at_s=e.at_s, kind=d.OPEN_SOURCE, index=work.row(e.equipment)))
    work.say(e, f"{e.equipment} trips")


def _load_rejection(work: CaseWork, e: Event) -> None:
    """Throw off load: of one consumer, of a board's consumers, or at a source of its whole island."""
    here = _thrown_off(work, e)
    p = float(work.p_kw[here].sum())
    share = 1.0 if e.size is None else float(e.size) / 100.0
    if e.unit == "kW":
        share = float(e.size or 0.0) / p if p > 0.0 else 0.0
    elif e.unit not in (None, "%"):
        raise SolveError(f"{e.equipment}: load thrown off in {e.unit!r}; give % or kW.")
    share = min(share, 1.0)
    gone = np.where(here, share, 0.0)
    work.change(e.at_s, -gone * work.p_kw, -gone * work.q_kvar)
    of = f" of the load of its island ({p:.0f} kW)" if e.equipment in work.at.source_names else ""
    work.say(e, f"{e.equipment} throws off {100.0 * share:.0f} %{of}")


def _thrown_off(work: CaseWork, e: Event) -> np.typing.NDArray[np.bool_]:
    island = np.array(work.at.view.island, np.int64)[np.array(work.at.view.load_node, np.int64)]
    fed = (work.at.load_bus >= 0) & (island == work.island)
    if e.equipment in work.at.source_names:
        return np.asarray(fed)
    boards = {b.name for b in work.plant.boards}
    if e.equipment in boards:
        return np.asarray(np.array([x.board == e.equipment for x in work.plant.loads], bool) & fed)
    return np.asarray(np.array([x.name == e.equipment for x in work.plant.loads], bool) & fed)


def _setting(work: CaseWork, e: Event) -> None:
    happenings, text = setting_happenings(work.at, e, work.row(e.equipment))
    work.happenings.extend(happenings)
    work.say(e, text)


def _field_loss(work: CaseWork, e: Event) -> None:
    row = work.row(e.equipment)
    work.happenings.append(
        Happening(at_s=e.at_s, kind=d.SET_PARAMETER, index=row, column=d.FIELD_ON, value=0.0)
    )
    work.say(e, f"{e.equipment} loses its field")


def _fault(work: CaseWork, e: Event) -> None:
    bus = _bus_of(work, e.equipment)
    work.keep.append(bus)
    work.happenings.append(Happening(at_s=e.at_s, kind=d.FAULT_ON, index=bus))
    work.say(e, f"three-phase fault on {e.equipment}")
    work.motors_move = True
    if e.duration_s is not None:
        work.happenings.append(Happening(at_s=e.at_s + e.duration_s, kind=d.FAULT_OFF, index=bus))
        work.steps.append(
            CaseStep(at_s=e.at_s + e.duration_s, text=f"fault on {e.equipment} cleared", cell=e.cell)
        )


def _fault_cleared(work: CaseWork, e: Event) -> None:
    bus = _bus_of(work, e.equipment)
    work.keep.append(bus)
    work.happenings.append(Happening(at_s=e.at_s, kind=d.FAULT_OFF, index=bus))
    work.say(e, f"fault on {e.equipment} cleared")


def _bus_of(work: CaseWork, equipment: str) -> int:
    """Return the bus of a board, a piece with a terminal, or the far end of a branch."""
    topology = work.at.network.topology
    node = topology.node_of.get(equipment)
    if node is None:
        ends = [b.to_node for b in topology.branches if b.name == equipment]
        if not ends:
            raise SolveError(f"{equipment} is nowhere in the network.")
        node = ends[0]
    bus = int(work.at.bus_of_node[node])
    if bus < 0:
        raise SolveError(f"{equipment} is dead in {work.at.mode.name}.")
    return bus


def _energise(work: CaseWork, e: Event) -> None:
    at, plant = work.at, work.plant
    items: list[Transformer | ThreeWindingTransformer] = [*plant.transformers, *plant.three_winding]
    item = next((t for t in items if t.name == e.equipment), None)
    if item is None:
        raise SolveError(f"{e.equipment} is no transformer.")
    board = item.from_board if isinstance(item, Transformer) else item.primary_board
    s_kva = item.s_rated_kva * item.units if isinstance(item, Transformer) else item.s_primary_kva
    times = item.inrush_current if isinstance(item, Transformer) else TYPICAL_INRUSH
    decay = item.inrush_decay_s if isinstance(item, Transformer) else TYPICAL_DECAY_S
    node = at.network.topology.node_of[board]
    bus = int(at.bus_of_node[node])
    if bus < 0:
        raise SolveError(f"{board} is dead in {at.mode.name}.")
    own = float(at.network.u_base_v[node]) / item.u_primary_v
    y = INRUSH_FUNDAMENTAL * times * s_kva / at.network.s_base_kva * own**2
    work.inrush.append(Inrush(bus=bus, y_pu=y, decay_s=max(decay, 1e-3)))
    work.happenings.append(Happening(at_s=e.at_s, kind=d.INRUSH, index=len(work.inrush) - 1))
    work.say(e, f"{e.equipment} is energised from {board}; first peak {times:g} times its rated one")
    if not isinstance(item, Transformer):
        work.findings.append(f"{e.equipment}: a usual inrush is taken, {TYPICAL_INRUSH:g} times rated.")


KINDS: dict[str, Callable[[CaseWork, Event], None]] = {
    "motor start": _motor_start,
    "load step": _load_step,
    "set trip": _set_trip,
    "load rejection": _load_rejection,
    "set-point step": _setting,
    "droop changed": _setting,
    "field loss": _field_loss,
    "fault": _fault,
    "fault cleared": _fault_cleared,
    "transformer energising": _energise,
}
