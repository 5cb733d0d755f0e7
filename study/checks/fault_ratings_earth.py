"""Earth faults: neutral resistors, and whether an earth fault is seen or may be left standing."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from study.checks.fault_ratings_verdict import SUBJECT, rating_verdict
from study.checks.limits import Limits
from study.checks.verdict import Sense, Verdict, make_verdict
from study.model.plant import Plant
from study.results.fault_ratings import EarthFaultRow, FaultRatingsResult, ResistorRatings

_HIGH_V = 1000.0
_JUDGED = ("insulated", "high resistance")
# A typical capacitance of cables is right within this factor; common practice, no source.
_TYPICAL_CAPACITANCE = 0.5
_RESISTOR = "current U/(√3 R) and time of the resistor's rating"


def judge_earth_faults(plant: Plant, result: FaultRatingsResult, limits: Limits) -> Iterator[Verdict]:
    """Judge the earth-fault current of insulated and high-resistance earthed systems, and the resistors.

    Parameters
    ----------
    plant : Plant
        For the cells that govern.
    result : FaultRatingsResult
        Systems and resistors.
    limits : Limits
        Current that may stand, and current that is detected.

    Yields
    ------
    Verdict
        Subject ``fault ratings``.
    """
    for row in result.earth:
        if row.earthing in _JUDGED:
            yield from _system(plant, row, limits)
    for mode in range(len(result.modes)):
        yield from _resistors(plant, result.resistors, result.modes[mode], mode, limits)


def _system(plant: Plant, row: EarthFaultRow, limits: Limits) -> Iterator[Verdict]:
    current = row.capacitive_a if math.isnan(row.fault_a) else row.fault_a
    typical = not row.capacitance_given and current > 0.0
    tolerance = _TYPICAL_CAPACITANCE * row.capacitive_a / current if typical else 0.0
    quantity, limit, sense, basis, cell, remedy = _standing(plant, row, limits)
    yield make_verdict(
        mode=row.mode,
        subject=SUBJECT,
        equipment=row.boards[0],
        quantity=quantity,
        value=current,
        limit=limit,
        unit="A",
        sense=sense,
        close_margin=limits.fraction("close_margin"),
        data_tolerance=tolerance,
        basis=basis,
        cell=cell,
        remedy=remedy,
    )
    if row.u_nominal_v > _HIGH_V:
        yield make_verdict(
            mode=row.mode,
            subject=SUBJECT,
            equipment=row.boards[0],
            quantity="earth-fault current, enough to be detected",
            value=current,
            limit=limits.number("earth_fault_detection"),
            unit="A",
            sense="at least",
            close_margin=limits.fraction("close_margin"),
            data_tolerance=tolerance,
            basis=limits.basis("earth_fault_detection"),
            cell=plant.cell_of(row.boards[0], "System earthing"),
            remedy="Earth the neutral through a resistor, or detect by displacement voltage.",
        )


def _standing(plant: Plant, row: EarthFaultRow, limits: Limits) -> tuple[str, float, Sense, str, str, str]:
    """Return what an earth-fault current is held against: the highest pick-up, or what may stand."""
    if row.trips:
        return (
            f"earth-fault current against the pick-up of {row.pick_up_device}",
            row.pick_up_a,
            "at least",
            f"{len(row.trips)} devices trip on an earth fault here; the highest pick-up with its tolerance",
            plant.cell_of(row.pick_up_device, "Earth-fault current"),
            "Set the earth-fault pick-up lower, or lower the ohms of the neutral resistor.",
        )
    return (
        "earth-fault current left standing: no device trips on it",
        limits.number("earth_fault_standing"),
        "at most",
        limits.basis("earth_fault_standing"),
        plant.cell_of(row.boards[0], "System earthing"),
        "Give the feeders an earth-fault trip (sheet Devices), or part the system in this mode.",
    )


def _resistors(
    plant: Plant, resistors: ResistorRatings, name: str, mode: int, limits: Limits
) -> Iterator[Verdict]:
    for k in np.flatnonzero(resistors.live[:, mode]):
        board = resistors.boards[k]
        yield rating_verdict(
            mode=name,
            equipment=board,
            quantity="neutral resistor: current in an earth fault",
            value=float(resistors.current_a[k]),
            limit=float(resistors.rated_a[k]),
            unit="A",
            limits=limits,
            basis=_RESISTOR,
            cell=plant.cell_of(board, "Resistor rating"),
            remedy="Take a resistor of a higher rated current, or of more ohms.",
        )
        lasts = float(resistors.lasts_s[k, mode])
        trips = math.isfinite(lasts)
        yield rating_verdict(
            mode=name,
            equipment=board,
            quantity="neutral resistor: time until the earth fault is tripped",
            value=lasts if trips else math.nan,
            limit=float(resistors.rated_s[k]),
            unit="s",
            limits=limits,
            basis=_RESISTOR
            if trips
            else _RESISTOR + "; no device trips on it: rate it for continuous current",
            cell=plant.cell_of(board, "Resistor time"),
            remedy="Trip sooner, or take a resistor rated for a longer time.",
        )
