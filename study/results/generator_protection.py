"""Result of the look at the sets' protection: functions without a phase curve, and overcurrent stages."""

from __future__ import annotations

from dataclasses import dataclass

from study.results.arrays import BoolArray, FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class FunctionSetting:
    """One protection function of a set.

    ``pick_up_pu`` is its pick-up over the set's rated value (kW, V, Hz or A as the kind has it), NaN where
    the unit on the sheet does not belong to the kind; ``written`` is the pick-up as on the sheet.
    """

    name: str
    genset: str
    kind: str
    pick_up_pu: float
    written: str
    delay_s: float
    trips: str
    cell: str


@dataclass(frozen=True, slots=True, kw_only=True)
class SetStages:
    """Overcurrent stages of the sets' breakers, [set] in workbook order; NaN where there is none.

    ``device`` is the breaker ("": none stands there) and ``opened_by`` what holds its settings. In A:
    ``rated_a``, ``long_time_a``, ``short_time_a``, ``instantaneous_a``, this one at the near end of its
    tolerance also ``instantaneous_least_a``. ``clears_150_s`` is when 1.5 times rated current is cleared at
    the latest. ``own_seen_a`` is the greatest of the set's own current into a fault at its terminals as its
    instantaneous stage sees it (ip/sqrt2 or I''k), ``sustained_a`` the least that it keeps up. ``parallel``
    says whether it runs beside another set in some mode.
    """

    names: tuple[str, ...]
    device: tuple[str, ...]
    opened_by: tuple[str, ...]
    rated_a: FloatArray
    rated_kva: FloatArray
    long_time_a: FloatArray
    clears_150_s: FloatArray
    short_time_a: FloatArray
    instantaneous_a: FloatArray
    instantaneous_least_a: FloatArray
    own_seen_a: FloatArray
    sustained_a: FloatArray
    parallel: BoolArray
    differential: BoolArray


@dataclass(frozen=True, slots=True, kw_only=True)
class GeneratorProtectionResult:
    """Functions in workbook order, and the stages of every set."""

    functions: tuple[FunctionSetting, ...]
    stages: SetStages
