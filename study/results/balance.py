"""Result of the load balance."""

from __future__ import annotations

from dataclasses import dataclass

from study.results.arrays import BoolArray, FloatArray

DUTIES = ("continuous", "intermittent", "occasional")


@dataclass(frozen=True, slots=True, kw_only=True)
class ConsumerDemand:
    """What every load takes in every mode; arrays are [mode, load], rows in workbook order.

    ``p_unit_kw`` is the input of one unit at its duty point times load factor, ``p_kw`` that of all units in
    use before diversity, ``p_counted_kw`` after simultaneity or diversity: these add up to the mode's total.
    ``efficiency`` and ``cos_phi`` are those at the actual part load; ``factor`` is p_counted / p (0: none).
    ``duty`` indexes ``DUTIES``; ``fed`` is False where the load's board is dead.
    """

    modes: tuple[str, ...]
    loads: tuple[str, ...]
    in_use: FloatArray
    load_factor: FloatArray
    duty: FloatArray
    efficiency: FloatArray
    cos_phi: FloatArray
    factor: FloatArray
    p_unit_kw: FloatArray
    p_kw: FloatArray
    q_kvar: FloatArray
    p_counted_kw: FloatArray
    q_counted_kvar: FloatArray
    fed: BoolArray


@dataclass(frozen=True, slots=True, kw_only=True)
class SetBalance:
    """One source on line or standing by in one mode, as the load balance sees it.

    Each set takes the island's load in proportion to its rated kW (kvar: rated kvar), unless a set power
    says otherwise. ``engine_loading`` is of rated engine power, ``alternator_loading`` of rated kVA.
    """

    name: str
    kind: str
    state: str
    island: int
    p_rated_kw: float
    s_rated_kva: float
    p_kw: float
    q_kvar: float
    s_kva: float
    cos_phi: float
    engine_loading: float
    alternator_loading: float


@dataclass(frozen=True, slots=True, kw_only=True)
class LossOfSet:
    """The island after its largest running set is lost, at one stage of what follows.

    ``stage`` is one of: at once, after trip stage 1, after trip stage 2, standby started.
    Loading is the remaining load over the remaining rated kW and kVA; infinite where nothing remains.
    """

    island: int
    lost: str
    stage: str
    p_load_kw: float
    q_load_kvar: float
    p_capacity_kw: float
    s_capacity_kva: float
    kw_loading: float
    kva_loading: float
    sets_left: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class IslandBalance:
    """One live island of a mode: load against sources.

    ``loss_with_standby`` is the loss of the same set with the standby sets started, at every trip stage;
    empty where no set stands by. ``services_lost`` are the services to propulsion, steering and safety that
    no other section serves; None where no other section has a main source on line.
    """

    island: int
    boards: tuple[str, ...]
    p_load_kw: float
    q_load_kvar: float
    p_capacity_kw: float
    s_capacity_kva: float
    kw_loading: float
    kva_loading: float
    spare_kw: float
    fewest_sets: tuple[str, ...] | None
    fewest_sets_text: str
    largest_step_load: str
    largest_step_kw: float
    step_capability_kw: float
    loss: tuple[LossOfSet, ...]
    shore: str | None
    shore_current_a: float
    shore_rated_a: float
    loss_with_standby: tuple[LossOfSet, ...] = ()
    services_lost: tuple[str, ...] | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class MainSetOut:
    """Any one main set out of service (SOLAS II-1/41), all other main sets available.

    ``p_load_kw`` is that of loads essential to propulsion, steering, safety and habitability.
    """

    out: str
    p_load_kw: float
    q_load_kvar: float
    p_capacity_kw: float
    s_capacity_kva: float
    kw_loading: float
    kva_loading: float


@dataclass(frozen=True, slots=True, kw_only=True)
class RestartStep:
    """One step of the restart after a blackout: what is connected, and what the engines can take.

    Each island restarts by itself: ``p_total_kw`` is what its sets carry after the step.
    """

    step: int
    at_s: float
    loads: tuple[str, ...]
    p_step_kw: float
    p_total_kw: float
    step_capability_kw: float
    island: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class ModeBalance:
    """The load balance of one mode.

    Arrays: ``p_by_service_kw`` and ``q_by_service_kvar`` are [service, duty] after diversity,
    ``p_connected_by_service_kw`` [service, duty] before it; ``p_by_board_kw`` is [board] of what hangs on the
    board itself. ``alternative_kw`` is the mode's total by the other rule: continuous load, plus the largest
    intermittent consumer and those whose simultaneity is 100 %. ``p_synchronous_kw`` is the part of the total
    that synchronous motors take: they have a service of their own and no row in the demand.
    """

    mode: str
    kind: str
    services: tuple[str, ...]
    boards: tuple[str, ...]
    p_by_service_kw: FloatArray
    q_by_service_kvar: FloatArray
    p_connected_by_service_kw: FloatArray
    p_by_board_kw: FloatArray
    q_by_board_kvar: FloatArray
    p_total_kw: float
    q_total_kvar: float
    s_total_kva: float
    alternative_kw: float
    p_unfed_kw: float
    sets: tuple[SetBalance, ...]
    islands: tuple[IslandBalance, ...]
    main_set_out: tuple[MainSetOut, ...]
    restart: tuple[RestartStep, ...]
    findings: tuple[str, ...]
    p_synchronous_kw: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class EmergencyDuty:
    """An emergency set against the emergency list (SOLAS II-1/42, 43)."""

    genset: str
    mode: str
    p_load_kw: float
    q_load_kvar: float
    p_rated_kw: float
    s_rated_kva: float
    kw_loading: float
    kva_loading: float
    hours_required: float
    hours_basis: str


@dataclass(frozen=True, slots=True, kw_only=True)
class BalanceResult:
    """The load balance of the whole study."""

    demand: ConsumerDemand
    modes: tuple[ModeBalance, ...]
    emergency: tuple[EmergencyDuty, ...]
    diversity: float
