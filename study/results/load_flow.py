"""Result of the load flow."""

from __future__ import annotations

from dataclasses import dataclass

from study.results.arrays import BoolArray, FloatArray, IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class BoardState:
    """Boards of a mode, arrays [board].

    ``island`` is -1 and the numbers are NaN where ``energised`` is False.
    Angle is against the island's first board. ``busbar_current_a`` is the larger of the sum of currents in
    and the sum out; ``busbar_loading`` NaN where the busbar has no rating.
    """

    names: tuple[str, ...]
    energised: BoolArray
    island: IntArray
    u_nominal_v: FloatArray
    u_v: FloatArray
    angle_deg: FloatArray
    p_load_kw: FloatArray
    q_load_kvar: FloatArray
    busbar_current_a: FloatArray
    busbar_rated_a: FloatArray
    busbar_loading: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class TerminalState:
    """Consumer terminals in use in a mode, arrays [terminal], while the consumer runs with all units in use.

    Its board is at the voltage of the load flow, in which it may count in part only; so kW and kvar do not
    add up to the load of the board. ``drop_pu`` is the fall of voltage from the nearest main or emergency
    switchboard (or transformer secondary feeding the consumer's own voltage level) to the terminal, of the
    consumer's rated voltage; ``angle_deg`` is against the first board of its island.
    ``path`` lists the pieces between them, joined by ' > '.
    """

    loads: tuple[str, ...]
    boards: tuple[str, ...]
    fed_by: tuple[str, ...]
    path: tuple[str, ...]
    u_rated_v: FloatArray
    u_v: FloatArray
    angle_deg: FloatArray
    drop_pu: FloatArray
    p_kw: FloatArray
    q_kvar: FloatArray
    current_a: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class SourceState:
    """Sources on line in a mode, arrays [source]; kW, kvar, kVA at the source's own terminals.

    ``limited_by`` is empty, 'engine' or 'excitation'; ``field_pu`` is the field current as a multiple of that
    at rated load (NaN for supplies without a field).
    """

    names: tuple[str, ...]
    kinds: tuple[str, ...]
    island: IntArray
    u_v: FloatArray
    p_kw: FloatArray
    q_kvar: FloatArray
    s_kva: FloatArray
    cos_phi: FloatArray
    current_a: FloatArray
    p_rated_kw: FloatArray
    q_rated_kvar: FloatArray
    s_rated_kva: FloatArray
    kw_loading: FloatArray
    kva_loading: FloatArray
    engine_loading: FloatArray
    field_pu: FloatArray
    limited_by: tuple[str, ...]
    law: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class BranchState:
    """Cables, transformers, ties, reactors and shore connections carrying current, arrays [branch].

    ``kind`` is cable, transformer, three-winding transformer, tie or reactor. A tie in a closed ring of ties
    without impedance has NaN current and ``determined`` False. Load cables: current of one unit's run, power
    of all, while the consumer runs, whatever counts of it in the load flow.
    ``rating_a`` is the derated rating, of all runs in parallel; NaN where there is none.
    """

    names: tuple[str, ...]
    kinds: tuple[str, ...]
    from_ends: tuple[str, ...]
    to_ends: tuple[str, ...]
    p_from_kw: FloatArray
    q_from_kvar: FloatArray
    p_to_kw: FloatArray
    q_to_kvar: FloatArray
    current_a: FloatArray
    rating_a: FloatArray
    loading: FloatArray
    loss_kw: FloatArray
    loss_kvar: FloatArray
    drop_pu: FloatArray
    determined: BoolArray


@dataclass(frozen=True, slots=True, kw_only=True)
class IslandState:
    """One live island: its boards, its sources, its frequency, and what was found about its regulation."""

    island: int
    boards: tuple[str, ...]
    sources: tuple[str, ...]
    f_hz: float
    p_load_kw: float
    p_loss_kw: float
    q_load_kvar: float
    q_loss_kvar: float
    findings: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class SolverAgreement:
    """Largest differences between the two solvers in one mode; ``iterations`` of the vectorised one."""

    largest_du_pu: float
    largest_dp_kw: float
    largest_dq_kvar: float
    residual_pu: float
    iterations: int


@dataclass(frozen=True, slots=True, kw_only=True)
class ModeLoadFlow:
    """The solution of one mode; where ``solved`` is False ``reason`` says why and the tables are empty."""

    mode: str
    solved: bool
    reason: str
    boards: BoardState
    terminals: TerminalState
    sources: SourceState
    branches: BranchState
    islands: tuple[IslandState, ...]
    dead_boards: tuple[str, ...]
    agreement: SolverAgreement
    findings: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadFlowResult:
    """The load flow of every mode."""

    modes: tuple[ModeLoadFlow, ...]
