"""Result of the sharing study: sets in parallel, as set, as trimmed, and maladjusted."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from study.results.arrays import BoolArray, FloatArray

LEAST_TRIM_PU = 5e-4  # not worth a word: moves a set with 4 % droop by about 1 % of its rated kW or kvar


@dataclass(frozen=True, slots=True, kw_only=True)
class SharingCurve:
    """kW and kvar of every set over total load, arrays [load, set]; totals and frequency [load].

    ``load_pu`` is of the sum of rated kW. Deviations are from the proportional share; tolerances [set].
    ``u_pu`` [load] is the mean of the sets' terminal voltages, each of the set's own rated voltage.
    ``solved`` [load] is False where the plant has no solution at that load.
    """

    trimmed: bool
    load_pu: FloatArray
    p_total_kw: FloatArray
    q_total_kvar: FloatArray
    p_kw: FloatArray
    q_kvar: FloatArray
    dp_kw: FloatArray
    dq_kvar: FloatArray
    u_pu: FloatArray
    f_hz: FloatArray
    solved: BoolArray


@dataclass(frozen=True, slots=True, kw_only=True)
class AdjustingMargin:
    """How far one setting of one set may be off before something is broken.

    ``setting`` is 'no-load voltage', 'voltage droop', 'no-load frequency' or 'speed droop', values per unit;
    ``low_pu`` and ``high_pu`` are the nearest values at which ``*_breaks`` happens (NaN: none). ``trimmed``:
    the sets as set are out of tolerance, so that the margin is about ``set_pu`` as trimmed at 75 % load.
    """

    genset: str
    setting: str
    set_pu: float
    low_pu: float
    low_breaks: str
    high_pu: float
    high_breaks: str
    trimmed: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class SetTrim:
    """Set-points of one set as set, and as trimmed to its share at 75 % of the combined rating.

    Per unit of rated voltage at no load, and of rated frequency at no load. NaN where the set has no such
    set-point in use (no regulator, kvar control, isochronous governor, set power), and as trimmed where the
    sets could not be.
    """

    genset: str
    u_as_set_pu: float
    u_trimmed_pu: float
    f_as_set_pu: float
    f_trimmed_pu: float


@dataclass(frozen=True, slots=True, kw_only=True)
class SettingLine:
    """The voltage-kvar line of one set, arrays [point], with the operating point on it."""

    genset: str
    q_kvar: FloatArray
    u_pu: FloatArray
    q_operating_kvar: float
    u_operating_pu: float


@dataclass(frozen=True, slots=True, kw_only=True)
class IslandSharing:
    """One island with two or more sets in parallel.

    ``p_tolerance_kw`` and ``q_tolerance_kvar`` are [set]; operating arrays [set] are at the mode's own load,
    and NaN where it has no operating point.
    ``u_operating_pu`` is the mean of the sets' terminal voltages, each of the set's own rated voltage.
    ``circulating_kvar`` is half the sum of the distances from the proportional share.
    ``apart_kw`` and ``apart_kvar`` name the sets that take no part in sharing: set power, controlled kvar.
    """

    mode: str
    island: int
    sets: tuple[str, ...]
    cos_phi: float
    p_rated_kw: FloatArray
    q_rated_kvar: FloatArray
    p_tolerance_kw: FloatArray
    q_tolerance_kvar: FloatArray
    p_operating_kw: FloatArray
    q_operating_kvar: FloatArray
    u_operating_pu: float
    f_operating_hz: float
    circulating_kvar: float
    as_set: SharingCurve
    trimmed: SharingCurve
    lines: tuple[SettingLine, ...]
    margins: tuple[AdjustingMargin, ...]
    findings: tuple[str, ...]
    trims: tuple[SetTrim, ...]
    apart_kw: tuple[str, ...] = ()
    apart_kvar: tuple[str, ...] = ()

    def out_of_tolerance(self, curve: SharingCurve, *, kvar: bool) -> bool:
        """Return whether a set is out of tolerance at a load, or no load of the curve has a solution.

        Parameters
        ----------
        curve : SharingCurve
            As set or as trimmed.
        kvar : bool
            Whether kvar are meant, else kW.

        Returns
        -------
        bool
        """
        off, tolerance = (
            (curve.dq_kvar, self.q_tolerance_kvar) if kvar else (curve.dp_kw, self.p_tolerance_kw)
        )
        return not curve.solved.any() or bool((np.abs(off[curve.solved]) > tolerance).any())


@dataclass(frozen=True, slots=True, kw_only=True)
class NotStudied:
    """Sets in parallel whose sharing could not be studied, and why."""

    mode: str
    sets: tuple[str, ...]
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class MaladjustedCase:
    """A maladjustment event solved as a case of its own; arrays [set].

    Where ``solved`` is False ``sentence`` says why; the numbers after the change are then NaN, and where the
    set does not run in parallel ``sets`` names it alone and all numbers are NaN.
    """

    case: str
    mode: str
    genset: str
    setting: str
    value_pu: float
    was_pu: float
    cell: str
    solved: bool
    sets: tuple[str, ...]
    p_before_kw: FloatArray
    q_before_kvar: FloatArray
    p_after_kw: FloatArray
    q_after_kvar: FloatArray
    p_tolerance_kw: FloatArray
    q_tolerance_kvar: FloatArray
    p_share_kw: FloatArray
    q_share_kvar: FloatArray
    s_rated_kva: FloatArray
    u_before_pu: float
    u_after_pu: float
    f_before_hz: float
    f_after_hz: float
    sentence: str


@dataclass(frozen=True, slots=True, kw_only=True)
class SharingResult:
    """Sharing of every mode and island, and every maladjusted case."""

    islands: tuple[IslandSharing, ...]
    cases: tuple[MaladjustedCase, ...]
    not_studied: tuple[NotStudied, ...] = ()
