"""Result of the voltage-dip study: quick estimates of every start, and events simulated in time."""

from __future__ import annotations

from dataclasses import dataclass

from study.results.arrays import FloatArray

PRELOAD_LAWS = ("constant impedance", "constant current", "constant power")
START_METHODS = ("direct", "star-delta", "autotransformer", "soft starter")


@dataclass(frozen=True, slots=True, kw_only=True)
class ReductionTerms:
    """The numbers of one estimate, for the reader who works it by hand; complex, at the board judged.

    Per unit of ``s_base_kva`` and the board's base voltage: ``z_source`` is what the plant shows at the board
    (sets behind Ra + jX'd, all other load as impedance), ``z_path`` from the board to the motor's terminals,
    ``z_motor`` the motor as the network sees it, ``v_before`` the voltage before.
    The voltage after is ``v_before (z_path + z_motor) / (z_source + z_path + z_motor)``.
    """

    load: str
    board: str
    s_base_kva: float
    u_base_v: float
    v_before: complex
    z_source: complex
    z_path: complex
    z_motor: complex
    v_after: complex


@dataclass(frozen=True, slots=True, kw_only=True)
class StartEstimates:
    """Every motor started in one mode, by closed forms; arrays [motor] unless said otherwise.

    Voltages of boards are per unit of nominal, of terminals per unit of the motor's rated voltage.
    ``set_board`` is the board of the largest set of the motor's island, ``worst_board`` the one that
    falls most of the others. ``u_set_board_pu`` and ``u_terminal_pu`` are [law, motor] in the
    order of ``PRELOAD_LAWS``, with X'd (what a meter sees for 0.1 to 0.2 s); ``first_cycle`` is with X''d.
    ``u_*_running_pu`` are with the motor at rated speed. ``p_engine_*`` belong to the engine check: kW before
    plus kW of the start against 110 % of the engines. NaN where there is none. ``dip_pu`` is the fall at the
    set's board of its voltage before, the largest of the three laws.
    """

    mode: str
    solved: bool
    reason: str
    loads: tuple[str, ...]
    boards: tuple[str, ...]
    methods: tuple[str, ...]
    set_boards: tuple[str, ...]
    worst_boards: tuple[str, ...]
    line_current_a: FloatArray
    line_cos_phi: FloatArray
    u_set_board_before_pu: FloatArray
    u_set_board_pu: FloatArray
    u_set_board_first_cycle_pu: FloatArray
    u_set_board_running_pu: FloatArray
    u_terminal_pu: FloatArray
    u_terminal_running_pu: FloatArray
    u_worst_board_pu: FloatArray
    dip_pu: FloatArray
    torque_pu: FloatArray
    p_engine_before_kw: FloatArray
    p_engine_start_kw: FloatArray
    p_engine_limit_kw: FloatArray
    worked: ReductionTerms | None


@dataclass(frozen=True, slots=True, kw_only=True)
class LargestStart:
    """The largest motor that one board of a mode can start, [method] in the order of ``START_METHODS``.

    ``p_rated_kw`` is for a usual cage motor on the board itself, by the dip allowed there; ``p_engine_kw`` by
    the engine check alone. NaN where the board has no set.
    """

    mode: str
    board: str
    dip_allowed_pu: float
    p_rated_kw: FloatArray
    p_engine_kw: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class SetTrace:
    """One set in a simulated case, arrays [time] on the case's own times.

    ``u_pu`` of its rated voltage, ``field_pu`` and ``ceiling_pu`` of the field at rated load, ``speed_pu`` of
    rated. ``engine_pu`` is the torque of the engine over that at rated kW. After ``opened_at_s`` (NaN: never)
    the set is off the board.
    """

    name: str
    u_pu: FloatArray
    i_pu: FloatArray
    field_pu: FloatArray
    ceiling_pu: FloatArray
    p_kw: FloatArray
    q_kvar: FloatArray
    speed_pu: FloatArray
    engine_pu: FloatArray
    opened_at_s: float
    p_before_kw: float
    q_before_kvar: float
    p_largest_kw: float
    q_largest_kvar: float
    p_after_kw: float
    q_after_kvar: float
    field_largest_pu: float
    at_ceiling_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class MotorTrace:
    """One starting, or re-accelerating, motor in a simulated case; arrays [time] on the case's own times.

    ``speed_pu`` of synchronous, ``u_pu`` of its rated voltage at its terminals, ``i_line_pu`` what the
    network carries over its rated current, torques over rated. ``run_up_s`` from the start to 95 % of its
    final speed (inf: does not run up); ``run_up_known`` is False where the inertia is an assumption, said by
    ``inertia_basis``. ``relay_*``: heating at the end of the run-up over that at which the overload relay of
    the trip class trips, cold, for the quickest and the slowest relay of the class (NaN: no relay or no
    class); 1 or more trips.
    """

    load: str
    units: float
    method: str
    started_at_s: float
    changed_at_s: float
    speed_pu: FloatArray
    u_pu: FloatArray
    i_line_pu: FloatArray
    torque_pu: FloatArray
    load_torque_pu: FloatArray
    run_up_s: float
    run_up_known: bool
    inertia_s: float
    inertia_basis: str
    u_least_pu: float
    i_largest_a: float
    relay: str
    relay_class: str
    relay_quick: float
    relay_slow: float


@dataclass(frozen=True, slots=True, kw_only=True)
class BoardDips:
    """Every live board of the island in a simulated case, arrays [board], per unit of nominal voltage."""

    names: tuple[str, ...]
    u_before_pu: FloatArray
    u_least_pu: FloatArray
    u_largest_pu: FloatArray
    u_after_pu: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class DropOut:
    """A motor in use whose contactor would open: voltage at its terminals below its drop-out level."""

    load: str
    drop_out_pu: float
    u_least_pu: float
    below_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseStep:
    """Something that happened in a case: an event of the sheet, or what a relay or starter did."""

    at_s: float
    text: str
    cell: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Recovery:
    """A quantity that is disturbed and comes back; times from the disturbance that counts.

    ``before`` and ``after`` are the settled values, ``least`` and ``largest`` the extremes with the moment
    at which they come. ``recovery_s`` is the time until it stays within the band of its value after (inf: it
    does not within the time simulated); ``overshoot`` how far it passes its value after on the way back.
    ``settled`` is False where it still moves at the end.
    """

    before: float
    least: float
    least_at_s: float
    largest: float
    largest_at_s: float
    after: float
    recovery_s: float
    overshoot: float
    settled: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class SimulatedCase:
    """One case of the sheet Events, simulated; where ``simulated`` is False ``reason`` says why.

    ``board`` is where the voltage is judged: the board of the largest set of the island. ``time_s`` [time]
    are the instants kept; an event stands twice, just before and just after. ``u_board_pu`` of nominal,
    ``f_hz`` of the island, ``u_worst_pu`` that of ``worst_board``. ``voltage`` is in pu of the board's
    nominal voltage, ``frequency`` in Hz. ``iso_class_*`` is the strictest performance class of ISO 8528-5
    whose transient figures the event keeps, 'none' where it keeps none, empty where the class has none for
    such an event. ``collapsed`` is True where voltage or speed broke down.
    """

    case: str
    mode: str
    cells: tuple[str, ...]
    kinds: tuple[str, ...]
    equipment: tuple[str, ...]
    simulated: bool
    reason: str
    collapsed: bool
    board: str
    u_nominal_v: float
    worst_board: str
    starts_at_s: float
    time_s: FloatArray
    u_board_pu: FloatArray
    u_worst_pu: FloatArray
    f_hz: FloatArray
    voltage: Recovery
    frequency: Recovery
    iso_class_voltage: str
    iso_class_frequency: str
    sets: tuple[SetTrace, ...]
    motors: tuple[MotorTrace, ...]
    boards: BoardDips
    drop_outs: tuple[DropOut, ...]
    steps: tuple[CaseStep, ...]
    findings: tuple[str, ...]
    time_step_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Cure:
    """A case simulated again with one thing changed; ``change`` says what."""

    case: str
    change: str
    simulated: SimulatedCase


@dataclass(frozen=True, slots=True, kw_only=True)
class DipsResult:
    """Quick estimates of every mode, the largest starts, and the simulated cases in the sheet's order."""

    estimates: tuple[StartEstimates, ...]
    largest: tuple[LargestStart, ...]
    cases: tuple[SimulatedCase, ...]
    cures: tuple[Cure, ...] = ()
