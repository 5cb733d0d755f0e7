"""The sources of one mode as the load balance sees them, and what they can give.

A supply without an engine (shore, converter) is limited by its current, so its rated kW is its rated kVA.
A grid-following supply delivers its set power and no more: that is its capacity, and it is negative where
the supply is charging.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass, replace

from study.analyses.balance_supply import ModeSupply
from study.model.modes import Mode
from study.model.plant import Plant
from study.model.sources import ConverterSupply, Genset, ShoreSupply
from study.network.view import DEAD

ENGINE_OVERLOAD = 1.1  # ISO 3046-1, overload power for an hour, from memory


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """A source in one mode.

    ``service`` is main, harbour, emergency, shore or converter. ``step_kw`` is the largest load step its
    engine takes, at the terminals; infinite where there is no engine. ``forming`` sources hold voltage and
    frequency; ``stored`` marks a supply from storage, which is no substitute for a set in the long run.
    """

    name: str
    kind: str
    service: str
    board: str
    state: str
    island: int
    p_rated_kw: float
    q_rated_kvar: float
    s_rated_kva: float
    i_rated_a: float
    engine_kw: float
    step_kw: float
    forming: bool
    stored: bool
    p_set_kw: float | None
    q_set_kvar: float | None
    kvar_control: bool
    start_delay_s: float

    @property
    def running(self) -> bool:
        """True for a source on line."""
        return self.state == "on"

    @property
    def p_overload_kw(self) -> float:
        """Active power that the source can give for a short time [kW]: engines 110 % of their power."""
        return self.p_rated_kw if math.isnan(self.engine_kw) else ENGINE_OVERLOAD * self.engine_kw

    @property
    def p_capacity_kw(self) -> float:
        """Active power that the source can give [kW]."""
        return self.p_rated_kw if self.forming else (self.p_set_kw or 0.0)

    @property
    def s_capacity_kva(self) -> float:
        """Apparent power that the source can give [kVA]; negative for a supply that is charging."""
        if self.forming:
            return self.s_rated_kva
        return math.copysign(math.hypot(self.p_capacity_kw, self.q_set_kvar or 0.0), self.p_capacity_kw)


def sources_of(plant: Plant, mode: Mode, supply: ModeSupply) -> tuple[Source, ...]:
    """Return every source of the plant with its state and island in one mode, in workbook order.

    The island is that of the source's board, -1 where the board is dead. A source that is switched on but
    does not reach its board (its breaker is open) is off.
    """
    found = [
        *(_of_genset(g, mode) for g in plant.gensets),
        *(_of_shore(s) for s in plant.shore_supplies),
        *(_of_converter(c, mode) for c in plant.converter_supplies),
    ]
    return tuple(_placed(source, mode, supply) for source in found)


def capacity(sources: Iterable[Source]) -> tuple[float, float]:
    """Return the kW and kVA that sources can give together; nothing where none holds the voltage.

    Source: a grid-following supply cannot carry an island alone; common practice, no source.
    """
    listed = list(sources)
    if not any(s.forming for s in listed):
        return 0.0, 0.0
    return math.fsum(s.p_capacity_kw for s in listed), math.fsum(s.s_capacity_kva for s in listed)


def loading(load: float, available: float) -> float:
    """Return load over capacity; infinite where there is no capacity left."""
    return load / available if available > 0.0 else math.inf


def interlocked_pairs(plant: Plant) -> frozenset[frozenset[str]]:
    """Return the pairs of equipment that may not stay in together.

    An interlock between two devices counts for the equipment they switch.
    """
    switched = {d.name: d.equipment for d in plant.devices}
    return frozenset(
        frozenset((switched.get(i.equipment_a, i.equipment_a), switched.get(i.equipment_b, i.equipment_b)))
        for i in plant.interlocks
    )


def may_run_together(names: Iterable[str], pairs: frozenset[frozenset[str]]) -> bool:
    """Return True where no interlock parts any two of the names."""
    chosen = set(names)
    return not any(pair <= chosen for pair in pairs)


def _placed(source: Source, mode: Mode, supply: ModeSupply) -> Source:
    state = "on" if source.name in supply.running else mode.state(source.name)
    if state == "on" and source.name not in supply.running:
        state = "off"
    return replace(source, state=state, island=supply.island_of_board.get(source.board, DEAD))


def _or(first: float | None, second: float | None) -> float | None:
    return second if first is None else first


def _of_genset(genset: Genset, mode: Mode) -> Source:
    engine_kw = genset.p_engine_kw * genset.alternator_efficiency
    trim = mode.set_points.get(genset.name)
    trimmed_mode = None if trim is None else trim.regulator_mode
    kvar_control = (trimmed_mode or genset.regulator.mode) == "kvar control"
    return Source(
        name=genset.name,
        kind="genset",
        service=genset.service,
        board=genset.board,
        state="off",
        island=-1,
        p_rated_kw=genset.p_rated_kw,
        q_rated_kvar=genset.q_rated_kvar,
        s_rated_kva=genset.s_rated_kva,
        i_rated_a=math.nan,
        engine_kw=engine_kw,
        step_kw=genset.max_load_step * engine_kw,
        forming=True,
        stored=False,
        p_set_kw=None if trim is None else trim.p_set_kw,
        q_set_kvar=None if trim is None or not kvar_control else trim.q_set_kvar,
        kvar_control=kvar_control,
        start_delay_s=genset.start_delay_s,
    )


def _of_shore(shore: ShoreSupply) -> Source:
    s_rated_kva = math.sqrt(3.0) * shore.u_rated_v * shore.i_rated_a / 1000.0
    return Source(
        name=shore.name,
        kind="shore supply",
        service="shore",
        board=shore.board,
        state="off",
        island=-1,
        p_rated_kw=s_rated_kva,
        q_rated_kvar=0.0,
        s_rated_kva=s_rated_kva,
        i_rated_a=shore.i_rated_a,
        engine_kw=math.nan,
        step_kw=math.inf,
        forming=True,
        stored=False,
        p_set_kw=None,
        q_set_kvar=None,
        kvar_control=False,
        start_delay_s=math.inf,
    )


def _of_converter(supply: ConverterSupply, mode: Mode) -> Source:
    forming = supply.control == "grid forming"
    trim = mode.set_points.get(supply.name)
    return Source(
        name=supply.name,
        kind="converter supply",
        service="converter",
        board=supply.board,
        state="off",
        island=-1,
        p_rated_kw=supply.s_rated_kva,
        q_rated_kvar=0.0,
        s_rated_kva=supply.s_rated_kva,
        i_rated_a=math.nan,
        engine_kw=math.nan,
        step_kw=math.inf,
        forming=forming,
        stored=supply.stored_energy_kwh is not None,
        p_set_kw=_or(None if trim is None else trim.p_set_kw, supply.p_set_kw),
        q_set_kvar=None if forming else _or(None if trim is None else trim.q_set_kvar, supply.q_set_kvar),
        kvar_control=False,
        start_delay_s=0.0,
    )
