"""Protective devices, their functions, ranges and makers' curves, as the workbook gives them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

DeviceKind = Literal["circuit breaker", "fuse", "overcurrent relay", "thermal overload"]
FunctionKind = Literal[
    "reverse power",
    "undervoltage",
    "overvoltage",
    "underfrequency",
    "overfrequency",
    "loss of excitation",
    "differential",
    "preferential trip 1",
    "preferential trip 2",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Device:
    """A protective device at one end of a piece of equipment; None is a rating or setting not given.

    ``instantaneous_off`` is True where the engineer wrote `off`, which differs from a blank.
    """

    name: str
    equipment: str
    end: str | None
    cell: str
    kind: DeviceKind
    i_rated_a: float
    u_rated_v: float | None
    icu_ka: float | None
    ics_ka: float | None
    icw_ka: float | None
    icm_ka: float | None
    icw_duration_s: float | None
    test_cos_phi: float | None
    category: Literal["A", "B"] | None
    setting_source: Literal["fixed", "adjustable"]
    curve: str | None
    long_time_a: float | None
    long_time_delay_s: float | None
    long_time_delay_at: float
    long_time_law: Literal["I2t", "I4t"]
    short_time_a: float | None
    short_time_off: bool
    short_time_delay_s: float | None
    short_time_law: Literal["definite", "I2t"]
    instantaneous_a: float | None
    instantaneous_off: bool
    instantaneous_senses: Literal["rms", "peak"]
    earth_fault_a: float | None
    earth_fault_delay_s: float | None
    current_tolerance: float
    time_tolerance: float
    opening_time_min_s: float
    breaking_time_max_s: float
    ct_primary_a: float | None
    ct_secondary_a: float | None
    relay_curve: str | None
    time_multiplier: float | None
    reset: str | None
    trip_class: str | None
    fuse_class: Literal["gG", "aM"] | None
    direction: str | None
    protected_zone: str | None
    interlocked_with: str | None


@dataclass(frozen=True, slots=True, kw_only=True)
class ProtectionFunction:
    """A protection that does not look at a phase-current curve. ``pick_up`` is in `unit` as written."""

    name: str
    equipment: str
    cell: str
    kind: FunctionKind
    pick_up: float
    unit: str
    delay_s: float
    trips: str | None


@dataclass(frozen=True, slots=True, kw_only=True)
class SettingRange:
    """What one setting of a device can be set to."""

    device: str
    setting: str
    cell: str
    minimum: float
    maximum: float
    step: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class CurvePoint:
    """One point of a maker's time-current curve; exactly one of the two currents is given."""

    curve: str
    cell: str
    current_in: float | None
    current_a: float | None
    time_min_s: float | None
    time_max_s: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class LetThroughPoint:
    """One point of a maker's cut-off and let-through curve."""

    curve: str
    cell: str
    prospective_ka: float
    cut_off_peak_ka: float | None
    let_through_a2s: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class MakerDiscrimination:
    """A maker's statement on a pair of devices."""

    upstream: str
    downstream: str
    cell: str
    up_to_ka: float
    reference: str | None


@dataclass(frozen=True, slots=True, kw_only=True)
class SpectrumLine:
    """One harmonic current of a converter type, per unit of its fundamental at that loading."""

    spectrum: str
    cell: str
    loading_pu: float
    order: float
    current_pu: float
    angle_deg: float
