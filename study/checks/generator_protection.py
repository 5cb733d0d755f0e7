"""Protection of the sets against the usual ranges on board ship."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace

from study.checks.limits import Limits
from study.checks.verdict import Sense, Verdict, make_verdict, worst
from study.model.plant import Plant
from study.results.generator_protection import FunctionSetting, GeneratorProtectionResult, SetStages

SUBJECT = "set protection"
_E10 = "above what is permitted for good: IACS UR E10"
_OWN = "ABS 4-8-2/9.11: instantaneous trip above the set's own contribution where two or more run in parallel"


def judge_generator_protection(
    plant: Plant, result: GeneratorProtectionResult, limits: Limits
) -> tuple[Verdict, ...]:
    """Judge pick-ups and delays of the sets' functions, their overcurrent stages, and what is missing.

    Parameters
    ----------
    plant : Plant
        For the cells that govern.
    result : GeneratorProtectionResult
        The result.
    limits : Limits
        The limits in force.

    Returns
    -------
    tuple of Verdict
        Subject ``set protection``; the mode is empty, since a set is judged by itself.
    """
    verdicts: list[Verdict] = []
    for function in result.functions:
        verdicts += _function(function, limits)
    for k in range(len(result.stages.names)):
        verdicts += _stages(plant, result.stages, k, limits)
        verdicts += _missing(plant, result, k, limits)
    return tuple(verdicts)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Range:
    """Least and most pick-up in per cent, and the basis of each."""

    least: float
    most: float
    low_basis: str
    high_basis: str


def _ranges(limits: Limits) -> dict[str, _Range]:
    """Return the usual range of every kind that has one."""
    deviation, high = limits.number("frequency_deviation"), limits.number("voltage_high")
    preferential = _between("preferential_least", "preferential_most", limits)
    return {
        "reverse power": _between("reverse_power_least", "reverse_power_most", limits),
        "undervoltage": _between("undervoltage_least", "undervoltage_most", limits),
        "overvoltage": replace(
            _between("overvoltage_most", "overvoltage_most", limits), least=100.0 + high, low_basis=_E10
        ),
        "underfrequency": replace(
            _between("underfrequency_least", "underfrequency_least", limits),
            most=100.0 - deviation,
            high_basis=_E10,
        ),
        "overfrequency": replace(
            _between("overfrequency_most", "overfrequency_most", limits),
            least=100.0 + deviation,
            low_basis=_E10,
        ),
        "preferential trip 1": preferential,
        "preferential trip 2": preferential,
    }


def _between(least: str, most: str, limits: Limits) -> _Range:
    return _Range(
        least=limits.number(least),
        most=limits.number(most),
        low_basis=limits.basis(least),
        high_basis=limits.basis(most),
    )


_DELAY = {
    "reverse power": "reverse_power_delay",
    "preferential trip 1": "preferential_delay",
    "preferential trip 2": "preferential_delay",
}


def _function(function: FunctionSetting, limits: Limits) -> Iterator[Verdict]:
    usual = _ranges(limits).get(function.kind)
    if usual is None:
        return
    bounds: tuple[tuple[float, Sense, str], ...] = (
        (usual.least, "at least", usual.low_basis),
        (usual.most, "at most", usual.high_basis),
    )
    governing = worst(tuple(_pick_up(function, usual, *bound) for bound in bounds))
    if governing is not None:
        yield governing
    key = _DELAY.get(function.kind)
    if key is not None:
        yield make_verdict(
            mode="",
            subject=SUBJECT,
            equipment=function.genset,
            quantity=f"delay of {function.name}",
            value=function.delay_s,
            limit=limits.number(key),
            unit="s",
            close_margin=0.0,
            basis=limits.basis(key),
            cell=function.cell,
            remedy=f"Set {function.name} to {limits.number(key):g} s or less.",
        )


def _pick_up(function: FunctionSetting, usual: _Range, limit: float, sense: Sense, basis: str) -> Verdict:
    pick_up = 100.0 * function.pick_up_pu
    if math.isnan(pick_up):
        basis = f"{function.written}: the unit is not one of its kind"
    return make_verdict(
        mode="",
        subject=SUBJECT,
        equipment=function.genset,
        quantity=f"pick-up of {function.name}",
        value=pick_up,
        limit=limit,
        unit="%",
        sense=sense,
        close_margin=0.0,
        basis=basis,
        cell=function.cell,
        remedy=f"Set {function.name} between {usual.least:g} and {usual.most:g} %.",
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Asked:
    """One overcurrent setting of a set against its limit."""

    quantity: str
    heading: str
    value: float
    limit: float
    unit: str
    basis: str
    sense: Sense = "at most"


def _stages(plant: Plant, own: SetStages, k: int, limits: Limits) -> Iterator[Verdict]:
    if not own.device[k]:
        return
    asked = [
        _Asked(
            quantity="overcurrent setting",
            heading="Long-time current",
            value=float(own.long_time_a[k]),
            limit=limits.fraction("set_long_time") * float(own.rated_a[k]),
            unit="A",
            basis=limits.basis("set_long_time"),
        ),
        _Asked(
            quantity="overload of 150 % cleared within",
            heading="Long-time delay",
            value=float(own.clears_150_s[k]),
            limit=limits.number("set_overload_time"),
            unit="s",
            basis=limits.basis("set_overload_time"),
        ),
    ]
    if not math.isnan(own.short_time_a[k]):
        asked.append(
            _Asked(
                quantity="short-time setting against the sustained current",
                heading="Short-time current",
                value=float(own.short_time_a[k]),
                limit=limits.fraction("set_short_time") * float(own.sustained_a[k]),
                unit="A",
                basis=limits.basis("set_short_time"),
            )
        )
    if own.parallel[k] and not math.isnan(own.instantaneous_a[k]):
        asked.append(
            _Asked(
                quantity="instantaneous setting, lower tolerance, above its own contribution",
                heading="Instantaneous current",
                value=float(own.instantaneous_least_a[k]),
                limit=float(own.own_seen_a[k]),
                unit="A",
                basis=_OWN,
                sense="at least",
            )
        )
    for one in asked:
        yield _stage(plant, own, k, one)


def _stage(plant: Plant, own: SetStages, k: int, asked: _Asked) -> Verdict:
    device, why = own.opened_by[k], ""
    if math.isnan(asked.value):
        why = f"; {device} has no such setting"
    elif math.isnan(asked.limit):
        why = "; the set's sustained current is not given"
    move = "Raise" if asked.sense == "at least" else "Lower"
    return make_verdict(
        mode="",
        subject=SUBJECT,
        equipment=own.names[k],
        quantity=f"{device}: {asked.quantity}",
        value=asked.value,
        limit=asked.limit,
        unit=asked.unit,
        sense=asked.sense,
        close_margin=0.0,
        basis=f"{asked.basis}{why}",
        cell=plant.cell_of(device, asked.heading),
        remedy=f"{move} the {asked.heading.lower()} of {device}.",
    )


def _missing(plant: Plant, result: GeneratorProtectionResult, k: int, limits: Limits) -> Iterator[Verdict]:
    own = result.stages
    kinds = {f.kind for f in result.functions if f.genset == own.names[k]}
    large = own.rated_kva[k] >= limits.number("set_differential")
    parallel = "class rules for sets that run in parallel, from memory"
    wanted = (
        (bool(own.parallel[k]), "reverse power", parallel),
        (True, "undervoltage", "class rules, from memory"),
        (bool(large), "differential", limits.basis("set_differential")),
    )
    kinds |= {"differential"} if own.differential[k] else set()
    for due, kind, basis in wanted:
        if due and kind not in kinds:
            yield make_verdict(
                mode="",
                subject=SUBJECT,
                equipment=own.names[k],
                quantity=f"no {kind} protection",
                value=1.0,
                limit=0.0,
                unit="-",
                close_margin=0.0,
                basis=basis,
                cell=plant.cell_of(own.names[k], "Rated apparent power"),
                remedy=f"Add a row of kind {kind} for it on the sheet Protection functions.",
            )
