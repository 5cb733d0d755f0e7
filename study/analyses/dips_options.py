"""Limits and lengths of the voltage-dip study, which the caller takes from the limits in force."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class DipOptions:
    """What the study is asked for, fractions per unit.

    ``recovery_band_pu`` and ``frequency_band_pu`` are those around the value after, within which a quantity
    has come back (IACS UR and class: +/-3 % of voltage, 1 % of speed; from memory). ``after_s`` is how long a
    case is followed after its last event, ``longest_s`` the longest run.
    """

    dip_allowed_pu: float = 0.15
    rise_allowed_pu: float = 0.20
    recovery_band_pu: float = 0.03
    frequency_band_pu: float = 0.01
    after_s: float = 8.0
    longest_s: float = 60.0
    rows_kept: int = 400
