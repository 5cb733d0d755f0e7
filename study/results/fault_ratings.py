"""Result of the fault ratings: every piece of equipment against the fault it must survive, in every mode.

Arrays are [piece, mode] unless the text says [piece]; NaN where the piece is dead in the mode, where a rating
is not given, or where the quantity has no meaning for the piece. Currents in kA are r.m.s. unless the name
says peak. ``worst_mode`` [piece] is the mode with the highest duty over rating (over the peak where no rating
is given), -1 where the piece is live in no mode. ``nominal`` is the same current without the tolerance of the
reactances over the one with it: what depends on the data flips between both.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from study.results.arrays import BoolArray, FloatArray, IntArray

DeviceRule = Literal["low-voltage breaker", "medium-voltage breaker", "fuse"]


@dataclass(frozen=True, slots=True, kw_only=True)
class BoardRatings:
    """Boards: peak withstand and short-time withstand.

    [board]: ``rated_peak_ka``, ``rated_short_time_ka`` over ``rated_duration_s`` (1 s is not assumed);
    ``medium_voltage`` True above 1 kV; ``enough_peak_ka`` and ``enough_short_time_ka`` the next usual ratings
    that suffice in all modes. [board, mode]: ``ip_peak_ka`` at T/2, ``greatest_peak_ka`` over all times and
    angles, ``limited_peak_ka`` the same with what current-limiting devices in the incoming branches let
    through (equal where there are none), named in ``limited_by`` [board]; ``half_ka`` Iac at T/2; ``heat_ka``
    the constant current over the rated duration with the same I²t as the decaying one.
    """

    names: tuple[str, ...]
    medium_voltage: BoolArray
    rated_peak_ka: FloatArray
    rated_short_time_ka: FloatArray
    rated_duration_s: FloatArray
    live: BoolArray
    ip_peak_ka: FloatArray
    greatest_peak_ka: FloatArray
    limited_peak_ka: FloatArray
    limited_by: tuple[str, ...]
    half_ka: FloatArray
    heat_ka: FloatArray
    nominal_peak: FloatArray
    nominal_initial: FloatArray
    enough_peak_ka: FloatArray
    enough_short_time_ka: FloatArray
    worst_mode: IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class DeviceRatings:
    """Breakers and fuses: making, breaking and short-time withstand; the larger of own branch and the rest.

    [device]: ratings as given; ``making_peak_ka`` declared, else what follows from the breaking capacity
    (``making_declared`` False); ``enough_breaking_ka`` the next usual breaking capacity that suffices in all
    modes. [device, mode]: ``initial_ka`` I''k, ``half_ka`` Iac(T/2), ``peak_ka`` ip; ``cos_phi`` of the fault
    and ``needed_ka`` the breaking capacity that it asks for: Iac(T/2), or more where the power factor is
    below that of the breaker's test (``peak_governs``); fuses: I''k.

    Medium voltage: ``parting_s`` [device], ``parting_ka`` Iac and ``dc_part`` idc/(sqrt2 Iac) when the
    contacts part, ``rated_dc_part`` [device], ``asymmetrical_ka`` against ``rated_asymmetrical_ka`` [device].

    ``clearing_s`` of the device for the side that heats it more, by ``cleared_by`` (numbers ``stages``; inf:
    it does not clear). Where it opens with an intentional delay (``delayed``), ``heat_ka`` is the constant
    current over ``icw_duration_s`` with the same I²t until then and ``closed_peak_ka`` the peak that it
    carries closed; NaN where no short-time withstand is asked of it. ``cut_off_peak_ka`` is what a
    current-limiting device lets through.
    """

    names: tuple[str, ...]
    rules: tuple[DeviceRule, ...]
    stages: tuple[str, ...]
    icu_ka: FloatArray
    ics_ka: FloatArray
    icw_ka: FloatArray
    icw_duration_s: FloatArray
    making_peak_ka: FloatArray
    making_declared: BoolArray
    live: BoolArray
    initial_ka: FloatArray
    half_ka: FloatArray
    peak_ka: FloatArray
    through: BoolArray
    cos_phi: FloatArray
    needed_ka: FloatArray
    peak_governs: BoolArray
    parting_s: FloatArray
    parting_ka: FloatArray
    dc_part: FloatArray
    rated_dc_part: FloatArray
    asymmetrical_ka: FloatArray
    rated_asymmetrical_ka: FloatArray
    clearing_s: FloatArray
    cleared_by: IntArray
    delayed: BoolArray
    heat_ka: FloatArray
    closed_peak_ka: FloatArray
    rated_closed_peak_ka: FloatArray
    cut_off_peak_ka: FloatArray
    nominal_peak: FloatArray
    nominal_initial: FloatArray
    enough_breaking_ka: FloatArray
    worst_mode: IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class ClearingRatings:
    """Devices against the least fault at the far end of what they protect.

    [device, mode]: ``by`` is the device that clears, by its place in the workbook's order: itself, or one
    nearer to the sources where it does not; -2 where only sources feed the fault that block by themselves,
    and -1 (``clears`` False) where nothing clears while the current is kept up. ``least_a`` is the current
    through that device when its stage is due, ``pick_up_a`` this stage's pick-up at the far end of its
    tolerance, ``stage`` which it is (numbers ``stages``), ``clearing_s`` the time, inf for never; where no
    device clears, all are those of the stage that should, and ``due_s`` is when it would if the sources kept
    the current up for longer than ``holds_s``. ``first_a`` is the least current at the start of
    the fault: it shows one that collapses. ``judged`` False: dead, or nothing known. ``one_set_a`` is the
    least current at the far end with one supply left in each island (NaN where the mode runs no more).
    """

    names: tuple[str, ...]
    stages: tuple[str, ...]
    judged: BoolArray
    least_a: FloatArray
    first_a: FloatArray
    pick_up_a: FloatArray
    stage: IntArray
    clears: BoolArray
    by: IntArray
    clearing_s: FloatArray
    due_s: FloatArray
    holds_s: FloatArray
    one_set_a: FloatArray
    kinds: tuple[tuple[str, ...], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class CableRatings:
    """Cables: heat of the fault until it is cleared, against what the conductor withstands (adiabatic).

    [cable]: ``withstand_a2s`` = k² S² of all runs, ``k``; ``devices`` that protect it, by name (empty: none);
    ``enough_mm2`` the next usual section of each run that suffices in all modes. [cable, mode]: ``heat_a2s``
    at the near end of the device that heats it most, whose place in the workbook's order is ``device`` (-1:
    none), ``clearing_s`` and ``cleared_by`` of it, ``let_through`` True where the maker's let-through I²t was
    taken, ``end_degc`` the temperature that the conductor reaches. ``far_heat_a2s`` is that of the least
    fault at the far end where it is cleared within 5 s (NaN above: heat then leaves the conductor).
    """

    names: tuple[str, ...]
    stages: tuple[str, ...]
    k: FloatArray
    withstand_a2s: FloatArray
    devices: tuple[tuple[str, ...], ...]
    live: BoolArray
    heat_a2s: FloatArray
    device: IntArray
    clearing_s: FloatArray
    cleared_by: IntArray
    let_through: BoolArray
    end_degc: FloatArray
    far_heat_a2s: FloatArray
    nominal_initial: FloatArray
    enough_mm2: FloatArray
    worst_mode: IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class TieRatings:
    """Ties: what flows through them, against the ratings of the weaker of the two boards that they join.

    [tie]: ``rated_*`` of the weaker board and ``rated_by`` its name for the peak, ``rated_heat_by`` for the
    short time. [tie, mode]: ``peak_ka`` and ``heat_ka`` over the rated duration, the larger of both ends.
    """

    names: tuple[str, ...]
    rated_peak_ka: FloatArray
    rated_by: tuple[str, ...]
    rated_short_time_ka: FloatArray
    rated_duration_s: FloatArray
    rated_heat_by: tuple[str, ...]
    live: BoolArray
    peak_ka: FloatArray
    heat_ka: FloatArray
    nominal_peak: FloatArray
    nominal_initial: FloatArray
    worst_mode: IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class ThroughRatings:
    """Transformers by pair of windings, then reactors in either direction: a fault at the far end.

    [piece]: ``behind`` is the board there, ``words`` the winding of a three-winding transformer ("" for
    others), ``kinds`` transformer or reactor; ``withstand_ka`` the r.m.s. current that it withstands for
    ``duration_s``, ``rated_peak_ka`` the first peak (NaN: not given). [piece, mode], at the voltage of the
    far end: ``initial_ka`` I''k through it, ``peak_ka`` at T/2, ``heat_ka`` the constant current over the
    duration with the same I²t until ``device`` (by its place in the workbook's order, -1: none that sees it)
    has cleared after ``clearing_s``. ``rests_on_unknown`` True where that rests on a sustained current that
    is not given.
    """

    names: tuple[str, ...]
    behind: tuple[str, ...]
    words: tuple[str, ...]
    kinds: tuple[str, ...]
    withstand_ka: FloatArray
    duration_s: FloatArray
    rated_peak_ka: FloatArray
    live: BoolArray
    initial_ka: FloatArray
    heat_ka: FloatArray
    peak_ka: FloatArray
    device: IntArray
    clearing_s: FloatArray
    rests_on_unknown: BoolArray
    worst_mode: IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class ResistorRatings:
    """Neutral resistors, one for each board that has one.

    [board]: ``current_a`` = U/(sqrt3 R), ``rated_a`` for ``rated_s``. [board, mode]: ``lasts_s`` is the
    longest delay of the earth-fault devices of the system, inf where none trips.
    """

    boards: tuple[str, ...]
    current_a: FloatArray
    rated_a: FloatArray
    rated_s: FloatArray
    live: BoolArray
    lasts_s: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class EarthFaultRow:
    """The earth-fault current of one system in one mode.

    ``trips`` names the devices with an earth-fault setting there, ``pick_up_a`` the highest of their settings
    at the far end of its tolerance (NaN: none), ``pick_up_device`` its owner.
    """

    mode: str
    boards: tuple[str, ...]
    u_nominal_v: float
    earthing: str
    capacitive_a: float
    capacitance_given: bool
    fault_a: float
    trips: tuple[str, ...]
    pick_up_a: float
    pick_up_device: str


@dataclass(frozen=True, slots=True, kw_only=True)
class UnknownSustained:
    """What rests on the sustained current of sets of which the workbook does not give it, [piece, mode].

    ``sets`` [mode] names them. True where the piece is fed by them for longer than 0.1 s: ``boards`` and
    ``ties`` over the duration of their short-time withstand, ``devices`` and ``cables`` until they are
    cleared, ``clearing`` and ``far_cables`` for the least fault at the far end.
    """

    sets: tuple[str, ...]
    boards: BoolArray
    devices: BoolArray
    clearing: BoolArray
    cables: BoolArray
    far_cables: BoolArray
    ties: BoolArray


@dataclass(frozen=True, slots=True, kw_only=True)
class FaultRatingsResult:
    """Everything that must survive a fault; the last axis of all arrays is ``modes``."""

    modes: tuple[str, ...]
    boards: BoardRatings
    devices: DeviceRatings
    clearing: ClearingRatings
    cables: CableRatings
    ties: TieRatings
    through: ThroughRatings
    resistors: ResistorRatings
    unknown: UnknownSustained
    earth: tuple[EarthFaultRow, ...]
