"""What joins the boards: transformers, cables, ties, reactors; and the boards and filters themselves."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

BoardRole = Literal["main", "emergency", "distribution", "propulsion"]
Earthing = Literal["insulated", "solid", "low resistance", "high resistance"]
FilterKind = Literal["capacitor", "tuned", "high-pass"]
CableCores = Literal["3 single", "2", "3", "4"]
Duty = Literal["continuous", "60 min", "30 min", "intermittent"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Board:
    """A board or board section."""

    name: str
    cell: str
    u_nominal_v: float
    role: BoardRole
    busbar_rated_a: float | None
    peak_withstand_ka: float | None
    short_time_withstand_ka: float | None
    short_time_duration_s: float | None
    earthing: Earthing
    earthing_resistor_ohm: float | None
    resistor_rating_a: float | None
    resistor_time_s: float | None
    redundancy_group: str | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Transformer:
    """A two-winding transformer, or several equal ones in parallel.

    ``tap_pu`` is the change of primary turns (positive: more turns, lower secondary voltage).
    Losses are those of one unit.
    """

    name: str
    from_board: str
    to_board: str
    cell: str
    s_rated_kva: float
    u_primary_v: float
    u_secondary_v: float
    u_k_pu: float
    copper_loss_kw: float
    iron_loss_kw: float
    vector_group: str
    units: int
    tap_pu: float
    x0_over_x1: float
    r0_over_r1: float
    inrush_current: float
    inrush_decay_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ThreeWindingTransformer:
    """A three-winding transformer.

    Short-circuit voltages are per unit of the lesser rated power of the pair of windings they are
    measured between, copper losses likewise.
    """

    name: str
    primary_board: str
    secondary_board: str
    tertiary_board: str
    cell: str
    s_primary_kva: float
    s_secondary_kva: float
    s_tertiary_kva: float
    u_primary_v: float
    u_secondary_v: float
    u_tertiary_v: float
    u_k_primary_secondary_pu: float
    u_k_primary_tertiary_pu: float
    u_k_secondary_tertiary_pu: float
    copper_loss_primary_secondary_kw: float
    copper_loss_primary_tertiary_kw: float
    copper_loss_secondary_tertiary_kw: float
    iron_loss_kw: float
    vector_group: str
    tap_pu: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Cable:
    """A run between two ends; an end is a board, a source, a transformer or a load.

    ``resistance_ohm_per_km`` is given by the maker at 20 degC; None means: from the conductor.
    A run to a load is for one unit of it.
    """

    name: str
    from_end: str
    to_end: str
    cell: str
    cores: CableCores
    runs: int
    section_mm2: float
    length_m: float
    conductor: Literal["copper", "aluminium"]
    conductor_class: int
    tinned: bool
    insulation: str
    conductor_temperature_degc: float
    short_circuit_temperature_degc: float
    ambient_temperature_degc: float
    bunched: int
    duty: Duty
    overall_diameter_mm: float | None
    further_derating: float
    resistance_ohm_per_km: float | None
    reactance_ohm_per_km: float | None
    r0_ohm_per_km: float | None
    x0_ohm_per_km: float | None
    capacitance_uf_per_km: float | None
    rating_a: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Tie:
    """A bus-tie, section switch or interconnector between two boards of one voltage."""

    name: str
    board_a: str
    board_b: str
    cell: str
    rated_current_a: float | None
    x_ohm: float
    r_ohm: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Reactor:
    """A series reactor between two boards of one voltage; None: its short-time rating is not known."""

    name: str
    from_board: str
    to_board: str
    cell: str
    rated_current_a: float
    x_ohm: float
    r_ohm: float
    short_time_ka: float | None
    short_time_duration_s: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Filter:
    """A capacitor bank, tuned or high-pass filter on a board; ``q_rated_kvar`` at rated voltage."""

    name: str
    board: str
    cell: str
    kind: FilterKind
    q_rated_kvar: float
    u_rated_v: float
    tuning_order: float | None
    quality: float | None
