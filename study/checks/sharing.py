"""kW and kvar sharing and each set's own regulation, against the rules' tolerances."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from study.checks.limits import Limits
from study.checks.verdict import Verdict, make_verdict
from study.model.plant import Plant
from study.results.arrays import FloatArray
from study.results.regulation import RegulationResult
from study.results.sharing import IslandSharing, SharingCurve, SharingResult


def judge_sharing(plant: Plant, result: SharingResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge sharing over the range of load, as set in the workbook and as trimmed at 75 % load.

    Parameters
    ----------
    plant : Plant
        For the cells that govern.
    result : SharingResult
        The sharing study.
    limits : Limits
        The limits in force.

    Returns
    -------
    tuple of Verdict
        Subjects ``kW sharing`` and ``kvar sharing``, one for each set, island and adjustment.
    """
    verdicts: list[Verdict] = []
    for island in result.islands:
        for curve in (island.as_set, island.trimmed):
            verdicts += _kw(plant, island, curve, limits)
            verdicts += _kvar(plant, island, curve, limits)
    return tuple(verdicts)


def judge_regulation(plant: Plant, result: RegulationResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge each set's voltage regulation (without droop, best centred) and its speed droop.

    Parameters
    ----------
    plant : Plant
        For speed droops and the cells that govern.
    result : RegulationResult
        The regulation study.
    limits : Limits
        The limits in force.

    Returns
    -------
    tuple of Verdict
        Subject ``regulation``; the mode is empty, since the set is judged by itself.
    """
    verdicts: list[Verdict] = []
    for row in result.sets:
        key = "regulation_emergency" if row.service == "emergency" else "regulation_main"
        verdicts.append(
            make_verdict(
                mode="",
                subject="regulation",
                equipment=row.genset,
                quantity="voltage regulation without droop, +/- about the best centre",
                value=100.0 * row.band_centred_pu,
                limit=limits.number(key),
                unit="%",
                close_margin=limits.fraction("close_margin"),
                basis=limits.basis(key),
                cell=plant.cell_of(row.genset, "Field supply"),
                remedy="Needs a regulator with a higher gain or an excitation system with a higher ceiling.",
            )
        )
    verdicts += _speed(plant, limits)
    return tuple(verdicts)


def _speed(plant: Plant, limits: Limits) -> Iterator[Verdict]:
    for genset in plant.gensets:
        yield make_verdict(
            mode="",
            subject="regulation",
            equipment=genset.name,
            quantity="speed fall from no load to rated load",
            value=0.0 if genset.governor.mode == "isochronous" else 100.0 * genset.governor.droop_pu,
            limit=limits.number("speed_variation"),
            unit="%",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("speed_variation"),
            cell=plant.cell_of(genset.name, "Speed droop"),
            remedy="Set a smaller speed droop.",
        )


def _kw(plant: Plant, island: IslandSharing, curve: SharingCurve, limits: Limits) -> Iterator[Verdict]:
    worst_kw = _worst(curve.dp_kw, curve)
    for i, name in enumerate(island.sets):
        yield make_verdict(
            mode=island.mode,
            subject="kW sharing",
            equipment=name,
            quantity=f"kW off its share, {_adjusted(curve)}",
            value=float(worst_kw[i]),
            limit=float(island.p_tolerance_kw[i]),
            unit="kW",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("kw_sharing_largest"),
            cell=plant.cell_of(name, "Speed droop"),
            remedy="Set equal speed droops, then trim the no-load frequencies at 75 % load.",
        )


def _kvar(plant: Plant, island: IslandSharing, curve: SharingCurve, limits: Limits) -> Iterator[Verdict]:
    worst_kvar = _worst(curve.dq_kvar, curve)
    for i, name in enumerate(island.sets):
        yield make_verdict(
            mode=island.mode,
            subject="kvar sharing",
            equipment=name,
            quantity=f"kvar off its share, {_adjusted(curve)}",
            value=float(worst_kvar[i]),
            limit=float(island.q_tolerance_kvar[i]),
            unit="kvar",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("kvar_sharing_largest"),
            cell=plant.cell_of(name, "No-load voltage"),
            remedy="Set equal voltage droops, then trim the no-load voltages at 75 % load.",
        )


def _worst(deviation: FloatArray, curve: SharingCurve) -> FloatArray:
    """Return the largest distance of each set over the loads that have a solution; NaN where none has."""
    if not curve.solved.any():
        return np.full(deviation.shape[1], np.nan)
    return np.asarray(np.abs(deviation[curve.solved]).max(axis=0))


def _adjusted(curve: SharingCurve) -> str:
    return "trimmed at 75 % load" if curve.trimmed else "as set"
