"""The smallest standard section of each run that meets rating, short circuit and voltage drop together."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_series import SECTIONS_MM2, greatest
from study.formulas.cable_overload import first_that_holds, least_rating_a
from study.formulas.cable_ratings import base_current
from study.model.branches import Cable
from study.model.plant import Plant
from study.network.cable_data import cable_ohm_per_km
from study.results.arrays import read_only
from study.results.cable_protection import CableDrop, CableHeat, CableOverload, CableSections
from study.results.load_flow import LoadFlowResult

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

# Sections of power cables on board begin here; common practice, no source. [mm2]
OFFERED_MM2: Final = tuple(x for x in SECTIONS_MM2 if x >= 1.5)
DEMANDS: Final = ("rating", "short circuit", "voltage drop")


def cable_sections(
    plant: Plant,
    overload: CableOverload,
    heat: CableHeat,
    drop: CableDrop,
    flow: LoadFlowResult,
    *,
    trip_factor: float,
) -> CableSections:
    """Return the smallest sections, number of runs and way of laying kept.

    Parameters
    ----------
    plant : Plant
        Cables.
    overload, heat, drop : CableOverload, CableHeat, CableDrop
        What each cable must meet.
    flow : LoadFlowResult
        Power factors of the cables.
    trip_factor : float
        What trips the overload protection for certain, over the rating.

    Returns
    -------
    CableSections
        In workbook order.
    """
    cables = plant.cables
    sizes = np.array(OFFERED_MM2)
    runs = np.array([c.runs for c in cables], float)
    rating = _rating_holds(cables, overload, trip_factor)
    worst = greatest(heat.heat_a2s)
    withstand = (heat.k * runs)[:, None] ** 2 * sizes**2
    known = ~np.isnan(worst)
    short = np.where(known[:, None], withstand >= np.where(known, worst, 0.0)[:, None], True)
    falls = _drop_holds(plant, drop, flow)
    table = np.stack([rating, short, falls])
    whole = np.asarray(table.all(axis=0))
    needed = np.stack([first_that_holds(holds, sizes) for holds in table])
    judged = known & ~np.isnan(overload.load_a) & ~np.isnan(overload.rating_a)
    enough = np.where(judged, first_that_holds(whole, sizes), np.nan)
    demanded = np.stack([np.ones(len(cables), bool), known, ~np.isnan(drop.allowed_pu)])
    first = np.where(demanded, np.nan_to_num(needed, nan=np.inf), -1.0).argmax(axis=0)
    return CableSections(
        section_mm2=read_only([c.section_mm2 for c in cables]),
        rating_mm2=read_only(needed[0]),
        heat_mm2=read_only(np.where(demanded[1], needed[1], np.nan)),
        drop_mm2=read_only(np.where(demanded[2], needed[2], np.nan)),
        enough_mm2=read_only(enough),
        governs=tuple(DEMANDS[k] if ok else "" for k, ok in zip(first, judged, strict=True)),
    )


def _rating_holds(cables: tuple[Cable, ...], overload: CableOverload, trip_factor: float) -> BoolArray:
    """Return for each cable and section whether it carries the load and suits the overload protection."""
    free = np.array([bool(word) for word in overload.exempt]) | np.isinf(overload.device_a)
    wanted = least_rating_a(
        overload.load_a,
        np.where(free, np.nan, overload.device_a),
        np.where(free, np.nan, overload.conventional_a),
        trip_factor,
    )
    part = np.array([_rating_parts(c.section_mm2, c.conductor_temperature_degc) for c in cables])
    part = part.reshape(len(cables), len(OFFERED_MM2))
    return np.asarray(part * overload.rating_a[:, None] >= wanted[:, None] * (1.0 - 1e-9))


@cache
def _rating_parts(section_mm2: float, conductor_degc: float) -> tuple[float, ...]:
    """Return the ratings of the sections offered over that of a section; 0 for one that is not rated."""
    return tuple(
        (_base_a(size, conductor_degc) / _base_a(section_mm2, conductor_degc))
        if _base_a(section_mm2, conductor_degc)
        else float(size == section_mm2)
        for size in OFFERED_MM2
    )


@cache
def _base_a(section_mm2: float, conductor_degc: float) -> float:
    try:
        return base_current(section_mm2, conductor_degc)
    except ValueError:  # outside the standard's table: not offered
        return 0.0


def _drop_holds(plant: Plant, drop: CableDrop, flow: LoadFlowResult) -> BoolArray:
    """Return for each cable and section whether the worst consumer behind it stays within the limit."""
    cables = plant.cables
    holds = np.ones((len(cables), len(OFFERED_MM2)), bool)
    powers = [
        dict(
            zip(m.branches.names, zip(m.branches.p_from_kw, m.branches.q_from_kvar, strict=True), strict=True)
        )
        for m in flow.modes
    ]
    known: dict[tuple[object, ...], FloatArray] = {}
    for k, cable in enumerate(cables):
        mode = int(drop.worst_mode[k])
        if mode < 0:
            continue
        own = float(drop.own_pu[k, mode])
        if own == 0.0:
            continue
        p, q = powers[mode].get(cable.name, (np.nan, np.nan))
        part = _drop_parts(cable, plant.project.f_rated_hz, (abs(float(p)), abs(float(q))), known)
        holds[k] = own * part <= float(drop.allowed_pu[k]) * (1.0 + 1e-9)
    return holds


def _drop_parts(
    cable: Cable, f_hz: float, power: tuple[float, float], known: dict[tuple[object, ...], FloatArray]
) -> FloatArray:
    """Return the drop with each section offered over the present one, at equal current and power factor.

    Source: ``R cos + X sin`` of the run; see `formulas.cable_overload.voltage_drop_pu`.
    """
    build = (
        cable.cores,
        cable.conductor,
        cable.conductor_class,
        cable.tinned,
        cable.conductor_temperature_degc,
    )
    if build not in known:
        known[build] = np.array([_ohm_per_km(cable, size, f_hz) for size in OFFERED_MM2])
    r, x = known[build].T
    r0, x0 = _ohm_per_km(cable, cable.section_mm2, f_hz)
    p, q = power
    given_r, given_x = cable_ohm_per_km(cable, f_hz)
    along = (given_r / r0 * r * p + given_x / x0 * x * q) / (given_r * p + given_x * q)
    return np.asarray(np.where(np.isnan(along), np.inf, along))


def _ohm_per_km(cable: Cable, section_mm2: float, f_hz: float) -> tuple[float, float]:
    """Return resistance and reactance of a section by the tables; NaN where they have none."""
    plain = replace(cable, section_mm2=section_mm2, resistance_ohm_per_km=None, reactance_ohm_per_km=None)
    try:
        return cable_ohm_per_km(plain, f_hz)
    except ValueError:
        return np.nan, np.nan
