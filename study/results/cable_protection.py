"""Result of the cables' study: overload, short circuit, voltage drop, and the section that would suffice.

Arrays [cable] and [cable, mode] in workbook order; NaN where nothing is known or the cable is dead.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from study.results.arrays import BoolArray, FloatArray, IntArray

Exempt = Literal["", "steering gear", "fire pump"]


@dataclass(frozen=True, slots=True, kw_only=True)
class CableOverload:
    """Load, setting and rating of each cable, of all its runs together.

    [cable]: ``load_a`` Ib, the greatest of the load flow's currents and of the rated current of what the
    cable serves; ``flow_a`` [cable, mode] the former alone; ``rating_a`` Iz; ``device`` the one that
    protects it against overload ("": none), ``device_a`` In its rating or setting and ``conventional_a`` I2,
    what trips it for certain (inf: nothing does; NaN: not known). ``exempt`` names what may have no ordinary
    overload protection.
    """

    load_a: FloatArray
    load_mode: IntArray
    flow_a: FloatArray
    rating_a: FloatArray
    device: tuple[str, ...]
    device_a: FloatArray
    conventional_a: FloatArray
    exempt: tuple[Exempt, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class CableHeat:
    """Heat of the worst fault on each cable, over the whole range from the near end to the far end.

    [cable]: ``withstand_a2s`` k² S² of all runs. [cable, mode]: ``heat_a2s`` until the arc is out at the
    latest, but no longer than the 5 s for which heat stays in the conductor; ``fault_a`` the initial
    symmetrical current of that fault; ``clearing_s`` (inf: it does not clear) and the ``device`` (place in
    `devices`, -1: none) and ``stage`` that clear it; ``let_through`` True where the maker's let-through I²t
    counts; ``inside`` True where a fault between both ends is worse than any at the ends; ``slow`` True where
    some fault of the range lasts longer than those 5 s.
    """

    k: FloatArray
    withstand_a2s: FloatArray
    devices: tuple[str, ...]
    heat_a2s: FloatArray
    fault_a: FloatArray
    clearing_s: FloatArray
    device: IntArray
    stage: tuple[tuple[str, ...], ...]
    let_through: BoolArray
    inside: BoolArray
    slow: BoolArray


@dataclass(frozen=True, slots=True, kw_only=True)
class CableDrop:
    """Fall of voltage, per unit: of the run itself and to the worst consumer behind it, [cable, mode].

    ``allowed_pu`` [cable] is what the run itself may use while every consumer behind it stays within the
    limit, in the mode that leaves least; NaN where no consumer is behind it. ``consumer`` is the worst one.
    """

    own_pu: FloatArray
    total_pu: FloatArray
    allowed_pu: FloatArray
    consumer: tuple[str, ...]
    worst_mode: IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class CableSections:
    """The smallest standard sections of each run that meet each demand and all of them, [cable].

    The number of runs and the way of laying are kept. NaN where no section suffices or a demand is not known;
    ``governs`` names the demand that decides: ``rating``, ``short circuit``, ``voltage drop`` or "".
    """

    section_mm2: FloatArray
    rating_mm2: FloatArray
    heat_mm2: FloatArray
    drop_mm2: FloatArray
    enough_mm2: FloatArray
    governs: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class CableProtectionResult:
    """Every cable with what protects it; ``devices`` are all that stand on it or at its ends, by name."""

    modes: tuple[str, ...]
    names: tuple[str, ...]
    from_ends: tuple[str, ...]
    to_ends: tuple[str, ...]
    runs: IntArray
    length_m: FloatArray
    devices: tuple[tuple[str, ...], ...]
    overload: CableOverload
    heat: CableHeat
    drop: CableDrop
    sections: CableSections
