"""Result of the voltage regulation study: each set by itself."""

from __future__ import annotations

from dataclasses import dataclass

from study.results.arrays import FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class InherentCurve:
    """Terminal voltage against load current at constant excitation, arrays [power factor, current].

    Excitation is that of rated voltage at no load; NaN where the set cannot carry the current.
    ``regulation_pu`` [power factor] is (E0 - U) / U: the rise when rated load at that power factor is thrown
    off with the field left as it was at rated voltage and load.
    """

    labels: tuple[str, ...]
    cos_phi: FloatArray
    lagging: tuple[bool, ...]
    current_pu: FloatArray
    u_pu: FloatArray
    regulation_pu: FloatArray
    field_pu: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class SetRegulation:
    """One set with its own excitation system, alone on the bus.

    ``load_pu`` [load] runs from no load to rated load at rated power factor; ``u_with_droop_pu`` and
    ``u_without_droop_pu`` [load] are terminal voltages of rated voltage. ``band_as_set_pu`` is the largest
    distance from rated voltage, ``band_centred_pu`` half the range: the best that the set-point can do.
    ``*_with_droop`` likewise for the drooped line.
    """

    genset: str
    service: str
    field_supply: str
    law: str
    inherent: InherentCurve
    load_pu: FloatArray
    u_with_droop_pu: FloatArray
    u_without_droop_pu: FloatArray
    field_pu: FloatArray
    band_as_set_pu: float
    band_centred_pu: float
    band_as_set_with_droop_pu: float
    droop_no_load_to_rated_pu: float
    compensation_x_pu: float
    reaches_ceiling_at_pu: float
    findings: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class RegulationResult:
    """Every set of the plant."""

    sets: tuple[SetRegulation, ...]
