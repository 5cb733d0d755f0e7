"""Cables against their overload protection, and against faults between their two ends."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from study.checks.limits import Limits
from study.checks.verdict import Verdict, make_verdict
from study.model.plant import Plant
from study.results.cable_protection import CableProtectionResult

SUBJECT = "cables"
_RULE = "IEC 60364-4-43 cl. 433.1 and IEC 60092-202: Ib <= In <= Iz, from memory"
_HEAT = "k²S² of IEC 60949"


def judge_cables(plant: Plant, result: CableProtectionResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge every cable against what protects it.

    Load against setting, setting against rating, what trips for certain against 1.45 times the rating.
    Steering gear and fire pumps have no ordinary overload protection; where there is any, its setting is
    held against twice the rated current. The heat of faults is judged here where one between both ends is
    worse than those at the ends, which `study.checks.fault_ratings` judges.

    Parameters
    ----------
    plant : Plant
        For the cells that govern.
    result : CableProtectionResult
        The result.
    limits : Limits
        The limits in force.

    Returns
    -------
    tuple of Verdict
        Subject ``cables``; the mode is empty where the verdict holds in every mode.
    """
    verdicts: list[Verdict] = []
    for k in range(len(result.names)):
        if result.overload.exempt[k]:
            verdicts += _exempt(plant, result, k, limits)
        else:
            verdicts += _overload(plant, result, k, limits)
        verdicts += _heat(plant, result, k, limits)
    return tuple(verdicts)


def _overload(plant: Plant, result: CableProtectionResult, k: int, limits: Limits) -> Iterator[Verdict]:
    own, name = result.overload, result.names[k]
    device, setting = own.device[k], float(own.device_a[k])
    if math.isinf(setting):
        yield _unprotected(plant, result, k)
        return
    if math.isnan(setting):
        yield _unknown(plant, result, k)
        return
    cell = _setting_cell(plant, device)
    mode = int(own.load_mode[k])
    if mode >= 0:
        yield make_verdict(
            mode=result.modes[mode],
            subject=SUBJECT,
            equipment=name,
            quantity=f"load against the setting or rating of {device}",
            value=float(own.flow_a[k, mode]),
            limit=setting,
            unit="A",
            close_margin=limits.fraction("close_margin"),
            basis=_RULE,
            cell=cell,
            remedy=f"Set {device} above the load, and lay a cable that carries the setting.",
        )
    rating, factor = float(own.rating_a[k]), limits.fraction("cable_overload_trip")
    yield make_verdict(
        mode="",
        subject=SUBJECT,
        equipment=name,
        quantity=f"setting or rating of {device} against the cable's rating",
        value=setting,
        limit=rating,
        unit="A",
        close_margin=0.0,
        basis=_RULE,
        cell=cell,
        remedy=_larger(result, k, device),
    )
    yield make_verdict(
        mode="",
        subject=SUBJECT,
        equipment=name,
        quantity=f"current that trips {device} for certain",
        value=float(own.conventional_a[k]),
        limit=factor * rating,
        unit="A",
        close_margin=0.0,
        basis=limits.basis("cable_overload_trip"),
        cell=cell,
        remedy=_larger(result, k, device),
    )


def _unprotected(plant: Plant, result: CableProtectionResult, k: int) -> Verdict:
    """Return the plain fact that nothing protects a cable against overload."""
    first = result.devices[k][0]
    return make_verdict(
        mode="",
        subject=SUBJECT,
        equipment=result.names[k],
        quantity="no device protects it against overload",
        value=1.0,
        limit=0.0,
        unit="-",
        close_margin=0.0,
        basis=_RULE,
        cell=plant.cell_of(first, "Long-time current"),
        remedy=f"Give {first} a long-time setting, or the motor a thermal overload relay.",
    )


def _unknown(plant: Plant, result: CableProtectionResult, k: int) -> Verdict:
    devices = result.devices[k]
    why, cell = "no device stands on it", plant.cell_of(result.names[k], "Section")
    if devices:
        why = f"{devices[0]}: no setting or curve gives it"
        cell = plant.cell_of(devices[0], "Rated current")
    return make_verdict(
        mode="",
        subject=SUBJECT,
        equipment=result.names[k],
        quantity="overload protection",
        value=math.nan,
        limit=float(result.overload.rating_a[k]),
        unit="A",
        close_margin=0.0,
        basis=f"{_RULE}; {why}",
        cell=cell,
    )


def _exempt(plant: Plant, result: CableProtectionResult, k: int, limits: Limits) -> Iterator[Verdict]:
    own = result.overload
    if not own.device[k]:
        return
    yield make_verdict(
        mode="",
        subject=SUBJECT,
        equipment=result.names[k],
        quantity=f"overload setting of {own.device[k]} for {own.exempt[k]}",
        value=float(own.device_a[k]),
        limit=limits.fraction("steering_overload") * float(own.load_a[k]),
        unit="A",
        sense="at least",
        close_margin=0.0,
        basis=limits.basis("steering_overload"),
        cell=_setting_cell(plant, own.device[k]),
        remedy="Give an overload alarm in place of the trip, or set it to twice the rated current.",
    )


def _heat(plant: Plant, result: CableProtectionResult, k: int, limits: Limits) -> Iterator[Verdict]:
    heat = result.heat
    rows = np.where(heat.inside[k], heat.heat_a2s[k], np.nan)
    if np.isnan(rows).all():
        return
    mode = int(np.nanargmax(rows))
    device = heat.devices[int(heat.device[k, mode])] if heat.device[k, mode] >= 0 else result.devices[k][0]
    how = (
        f"{heat.stage[k][mode]} at {heat.fault_a[k, mode] / 1000.0:.3g} kA, {heat.clearing_s[k, mode]:.3g} s"
    )
    yield make_verdict(
        mode=result.modes[mode],
        subject=SUBJECT,
        equipment=result.names[k],
        quantity="heat of the worst fault between both ends until it is cleared",
        value=float(rows[mode]) / 1e6,
        limit=float(heat.withstand_a2s[k]) / 1e6,
        unit="kA²s",
        close_margin=limits.fraction("close_margin"),
        basis=f"{_HEAT}, k {heat.k[k]:.0f}; {device}: {how}",
        cell=plant.cell_of(result.names[k], "Section"),
        remedy=_larger(result, k, device),
    )


def _larger(result: CableProtectionResult, k: int, device: str) -> str:
    enough = float(result.sections.enough_mm2[k])
    if math.isnan(enough):
        return f"No standard section suffices: lay more runs, or lower the setting of {device}."
    return f"Needs {enough:g} mm2 in each run, or a lower setting of {device}."


def _setting_cell(plant: Plant, device: str) -> str:
    return plant.cell_of(device, "Long-time current") or plant.cell_of(device, "Rated current")
