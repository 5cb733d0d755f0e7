"""kW and kvar sharing and each set's own regulation, against the rules' tolerances."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from study.checks.limits import Limits
from study.checks.verdict import Verdict, make_verdict
from study.model.plant import Plant
from study.model.sources import Genset
from study.results.arrays import FloatArray
from study.results.regulation import RegulationResult
from study.results.sharing import LEAST_TRIM_PU, IslandSharing, NotStudied, SharingCurve, SharingResult


@dataclass(frozen=True, slots=True, kw_only=True)
class _Power:
    """kW or kvar: where its results stand, what limits it, what governs it.

    ``trims`` are the set-points as set and as trimmed, ``heading`` that of the droop; ``trimmed_holds`` is
    whether every set keeps its tolerance as trimmed.
    """

    unit: str
    by_rule: tuple[str, str]
    set_point: str
    trims: dict[str, tuple[float, float]]
    trimmed_holds: bool
    heading: str
    apart: tuple[str, ...]
    deviation: FloatArray
    tolerance: FloatArray
    by_own: FloatArray


def judge_sharing(plant: Plant, result: SharingResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge sharing over the range of load, as set in the workbook and as trimmed at 75 % load.

    A load without a solution is no pass: a set that holds its tolerance elsewhere is then not assessed.

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
        Subjects ``kW sharing`` and ``kvar sharing``, one for each set that takes part, island and adjustment.
    """
    verdicts: list[Verdict] = []
    for island in result.islands:
        for curve in (island.as_set, island.trimmed):
            for power in (_kw(island, curve, limits), _kvar(island, curve, limits)):
                verdicts += _judge(plant, island, curve, power, limits)
    for left in result.not_studied:
        verdicts += _not_studied(left, limits)
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
                quantity="voltage regulation without droop, ± about the best centre",
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
        drooped = genset.governor.mode == "droop"
        yield make_verdict(
            mode="",
            subject="regulation",
            equipment=genset.name,
            quantity="speed fall from no load to rated load",
            value=100.0 * genset.governor.droop_pu if drooped else 0.0,
            limit=limits.number("speed_variation"),
            unit="%",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("speed_variation"),
            cell=plant.cell_of(genset.name, "Speed droop"),
            remedy="Set a smaller speed droop.",
        )


def _kw(island: IslandSharing, curve: SharingCurve, limits: Limits) -> _Power:
    return _Power(
        unit="kW",
        by_rule=("kw_sharing_largest", "kw_sharing_own"),
        set_point="No-load frequency",
        trims={t.genset: (t.f_as_set_pu, t.f_trimmed_pu) for t in island.trims},
        trimmed_holds=not island.out_of_tolerance(island.trimmed, kvar=False),
        heading="Speed droop",
        apart=island.apart_kw,
        deviation=curve.dp_kw,
        tolerance=island.p_tolerance_kw,
        by_own=limits.fraction("kw_sharing_own") * island.p_rated_kw,
    )


def _kvar(island: IslandSharing, curve: SharingCurve, limits: Limits) -> _Power:
    rated = island.q_rated_kvar
    smallest = rated[rated > 0.0].min(initial=np.inf)
    return _Power(
        unit="kvar",
        by_rule=("kvar_sharing_largest", "kvar_sharing_smallest"),
        set_point="No-load voltage",
        trims={t.genset: (t.u_as_set_pu, t.u_trimmed_pu) for t in island.trims},
        trimmed_holds=not island.out_of_tolerance(island.trimmed, kvar=True),
        heading="Voltage droop",
        apart=island.apart_kvar,
        deviation=curve.dq_kvar,
        tolerance=island.q_tolerance_kvar,
        by_own=np.full(len(rated), limits.fraction("kvar_sharing_smallest") * smallest),
    )


def _judge(
    plant: Plant, island: IslandSharing, curve: SharingCurve, power: _Power, limits: Limits
) -> Iterator[Verdict]:
    sharing = [i for i, name in enumerate(island.sets) if name not in power.apart]
    if len(sharing) < 2:
        return
    remedy, wrong = _trimming(plant, island, power)
    for i in sharing:
        name, tolerance = island.sets[i], float(power.tolerance[i])
        worst, missing = _worst(power.deviation[:, i], curve)
        rule = power.by_rule[int(math.isclose(tolerance, float(power.by_own[i]), rel_tol=1e-9))]
        known = not missing or worst > tolerance
        yield make_verdict(
            mode=island.mode,
            subject=f"{power.unit} sharing",
            equipment=name,
            quantity=f"distance from its {power.unit} share {_adjusted(curve)}",
            value=worst if known else math.nan,
            limit=tolerance,
            unit=power.unit,
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis(rule) if known else missing,
            cell=_cell(plant, island.mode, wrong or name, power, trimmed=bool(wrong)),
            remedy=remedy or _equal_droops(plant, island, power),
        )


def _worst(deviation: FloatArray, curve: SharingCurve) -> tuple[float, str]:
    """Return the largest distance over the loads that have a solution, and which loads have none."""
    worst = float(np.abs(deviation[curve.solved]).max(initial=-math.inf))
    lost = 100.0 * curve.load_pu[~curve.solved]
    if not lost.size:
        return worst, ""
    loads = ", ".join(f"{load:.0f}" for load in lost)
    return worst, f"no operating point at {loads} % load"


def _cell(plant: Plant, mode: str, genset: str, power: _Power, *, trimmed: bool) -> str:
    """Return the cell of the set-point to be trimmed, or of the droop."""
    return (
        plant.setting_cell(genset, mode, power.set_point) if trimmed else plant.cell_of(genset, power.heading)
    )


def _trimming(plant: Plant, island: IslandSharing, power: _Power) -> tuple[str, str]:
    """Return which set-points to change and from what to what, and the set that is furthest off.

    Empty where trimming alone does not bring the sets into tolerance.
    """
    changes = {n: then - now for n, (now, then) in power.trims.items() if abs(then - now) >= LEAST_TRIM_PU}
    if not changes or not power.trimmed_holds:
        return "", ""
    what = power.set_point.lower()
    steps = []
    for name in changes:
        now, then = (f"{100.0 * value:.2f}" for value in power.trims[name])
        cell = _cell(plant, island.mode, name, power, trimmed=True)
        steps.append(f"the {what} of {name} from {now} to {then} %" + (f" ({cell})" if cell else ""))
    return f"Set {' and '.join(steps)}.", max(changes, key=lambda n: abs(changes[n]))


def _equal_droops(plant: Plant, island: IslandSharing, power: _Power) -> str:
    """Return what would cure sets that trimming does not bring into tolerance."""
    sets = [plant.genset(name) for name in island.sets]
    if power.unit == "kW":
        stiff = [g.name for g in sets if g.governor.mode == "isochronous" or g.governor.droop_pu == 0.0]
        if stiff:
            return (
                f"Put the governor of {_and(stiff)} on the speed droop of the others, or all on load sharing."
            )
        return "Set equal speed droops, then trim the no-load frequencies at 75 % load."
    modes = {g.name: _regulator_mode(plant, island.mode, g) for g in sets}
    turned = [g.name for g in sets if g.regulator.reversed_polarity]
    unregulated = [name for name, mode in modes.items() if mode == "fixed excitation"]
    stiff = [g.name for g in sets if modes[g.name] == "no droop" or g.regulator.droop_pu == 0.0]
    if turned:
        return f"Turn the current transformer of the droop circuit of {_and(turned)} round."
    if unregulated:
        return f"Let a regulator with the droop of the other sets act on the field of {_and(unregulated)}."
    if stiff:
        return f"Switch the voltage droop of {_and(stiff)} on, as of the other sets, then trim at 75 % load."
    return "Set equal voltage droops, then trim the no-load voltages at 75 % load."


def _regulator_mode(plant: Plant, mode: str, genset: Genset) -> str:
    """Return how a set's regulator works in a mode; a field that none acts on counts as fixed excitation."""
    if genset.excitation.field_supply in ("fixed", "compounded without regulator"):
        return "fixed excitation"
    point = plant.mode(mode).set_points.get(genset.name)
    return (point.regulator_mode if point else None) or genset.regulator.mode


def _and(names: Sequence[str]) -> str:
    return " and ".join(names)


def _not_studied(left: NotStudied, limits: Limits) -> Iterator[Verdict]:
    for unit in ("kW", "kvar"):
        for name in left.sets:
            yield make_verdict(
                mode=left.mode,
                subject=f"{unit} sharing",
                equipment=name,
                quantity=f"distance from its {unit} share as set",
                value=math.nan,
                limit=math.nan,
                unit=unit,
                close_margin=limits.fraction("close_margin"),
                basis=left.reason.rstrip("."),
            )


def _adjusted(curve: SharingCurve) -> str:
    return "trimmed at 75 % load" if curve.trimmed else "as set"
