"""What the plant feeds: consumers and groups of equal consumers."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

LoadKind = Literal["motor", "heating", "lighting", "converter", "general"]
EssentialTo = Literal["propulsion", "steering", "safety", "habitability", "none"]
StartingMethod = Literal["direct", "star-delta", "autotransformer", "soft starter", "converter"]
TorqueLaw = Literal["constant", "fan", "hyperbolic"]
ConverterKind = Literal["6-pulse", "12-pulse", "18-pulse", "24-pulse", "active front end"]


@dataclass(frozen=True, slots=True, kw_only=True)
class MotorData:
    """Starting and running data of a motor load; multiples are of its rated current or torque."""

    speed_rpm: float | None
    poles: int
    starting_method: StartingMethod
    starting_current: float
    starting_cos_phi: float
    locked_rotor_torque: float
    breakdown_torque: float
    torque_law: TorqueLaw
    inertia_kgm2: float | None
    starting_time_s: float | None
    star_delta_change_s: float | None
    autotransformer_tap: float
    soft_starter_current: float
    soft_starter_ramp_s: float
    contactor_drop_out: float
    restart_delay_s: float | None
    regenerates: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class ConverterData:
    """The rectifier of a converter load."""

    kind: ConverterKind
    input_choke_pu: float
    dc_choke_pu: float
    phase_shift_deg: float
    displacement_cos_phi: float
    spectrum: str | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Load:
    """A consumer, or `installed` equal ones.

    ``p_rated_kw`` is shaft output for motors and input otherwise, of one unit; ``p_absorbed_kw`` the duty
    point on the same side (what the load factor refers to; equal to the rated power when not given).
    ``efficiency`` and ``cos_phi`` are the values at rated output.
    """

    name: str
    board: str
    cell: str
    description: str
    service: str
    kind: LoadKind
    installed: int
    p_rated_kw: float
    p_absorbed_kw: float
    absorbed_is_given: bool
    efficiency: float
    cos_phi: float
    running_current_a: float | None
    u_rated_v: float
    phases: int
    essential_to: EssentialTo
    trip_stage: int
    redundancy_group: str | None
    motor: MotorData | None
    converter: ConverterData | None
