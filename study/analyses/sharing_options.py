"""What the sharing study needs to know of the rules; the pipeline fills it from the limits in force."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class SharingOptions:
    """Tolerances as fractions; the defaults are those of the rules named in `study.limits`.

    ``kw_of_largest`` and ``kw_of_own`` are of rated kW, ``kvar_of_largest`` and ``kvar_of_smallest`` of rated
    kvar; ``voltage_low`` and ``voltage_high`` of the board's nominal voltage; ``frequency`` of rated.
    """

    kw_of_largest: float = 0.15
    kw_of_own: float = 0.25
    kvar_of_largest: float = 0.10
    kvar_of_smallest: float = 0.25
    voltage_low: float = 0.10
    voltage_high: float = 0.06
    frequency: float = 0.05
