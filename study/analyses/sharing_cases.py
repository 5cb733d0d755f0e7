"""Maladjusted sets: each event solved as a case of its own, with a sentence that says what to do."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from study.analyses.sharing_change import SETTINGS, changed_network, own_value, why_not
from study.analyses.sharing_group import Group, group_of, kvar_off, kw_off, solve_scaled, tolerances
from study.analyses.sharing_options import SharingOptions
from study.model.modes import Event
from study.model.plant import Plant
from study.network.batch import BatchSolution
from study.network.solution import limit_words
from study.results.arrays import FloatArray, read_only
from study.results.sharing import LEAST_TRIM_PU, IslandSharing, MaladjustedCase, NotStudied


@dataclass(frozen=True, slots=True, kw_only=True)
class Parallel:
    """Sets in parallel with the mode's solution as set, its first row, and what was found of them."""

    group: Group
    own: BatchSolution
    result: IslandSharing


def maladjusted_cases(
    plant: Plant,
    groups: dict[tuple[str, str], Parallel],
    not_studied: Sequence[NotStudied],
    options: SharingOptions,
) -> tuple[MaladjustedCase, ...]:
    """Return every maladjustment on the sheet Events as a case.

    Rows of one case add up: each is reported with the rows before it in force.

    Parameters
    ----------
    plant : Plant
        Holds the events.
    groups : dict
        Sets in parallel by mode and source.
    not_studied : sequence of NotStudied
        Sets in parallel without a solution as set, for the reason.
    options : SharingOptions
        Tolerances.

    Returns
    -------
    tuple of MaladjustedCase
        In the order of the sheet; what cannot be solved says why.
    """
    found: list[MaladjustedCase] = []
    rows: dict[tuple[str, str], list[Event]] = {}
    for event in plant.events:
        if event.kind != "maladjustment":
            continue
        known = groups.get((event.mode, event.equipment))
        if known is None:
            reason = _not_in_parallel(event, not_studied)
        else:
            reason = why_not(known.group.at, event) or known.own.reason[0]
        if known is None or reason:
            found.append(_unsolved(plant, event, reason, known))
            continue
        earlier = rows.setdefault((event.case, event.mode), [])
        earlier.append(event)
        found.append(maladjusted_case(known, tuple(earlier), options))
    return tuple(found)


def _not_in_parallel(event: Event, not_studied: Sequence[NotStudied]) -> str:
    for group in not_studied:
        if group.mode == event.mode and event.equipment in group.sets:
            return group.reason
    return f"{event.equipment} does not run in parallel with another set in {event.mode}."


def _unsolved(plant: Plant, event: Event, reason: str, known: Parallel | None) -> MaladjustedCase:
    sets = (event.equipment,) if known is None else known.group.names
    none = np.full(len(sets), np.nan)
    p = none if known is None else known.own.source_p_kw[0, known.group.places]
    q = none if known is None else known.own.source_q_kvar[0, known.group.places]
    name = SETTINGS.get(event.unit, str(event.unit))
    empty = read_only(none)
    return MaladjustedCase(
        case=event.case,
        mode=event.mode,
        genset=event.equipment,
        setting=name,
        value_pu=float("nan") if event.size is None else event.size / 100.0,
        was_pu=own_value(plant, event),
        cell=event.cell,
        solved=False,
        sets=sets,
        p_before_kw=read_only(p),
        q_before_kvar=read_only(q),
        p_after_kw=empty,
        q_after_kvar=empty,
        p_tolerance_kw=empty,
        q_tolerance_kvar=empty,
        p_share_kw=empty,
        q_share_kvar=empty,
        s_rated_kva=empty,
        u_before_pu=float("nan"),
        u_after_pu=float("nan"),
        f_before_hz=float("nan"),
        f_after_hz=float("nan"),
        sentence=f"{event.case}: {event.equipment} in {event.mode} is not studied: {reason}",
    )


def maladjusted_case(known: Parallel, events: tuple[Event, ...], options: SharingOptions) -> MaladjustedCase:
    """Solve the mode with the settings of one case, and compare with the settings of the workbook.

    Parameters
    ----------
    known : Parallel
        Sets of the island in which the last event's set runs.
    events : tuple of Event
        Rows of the case up to the one that is reported, which is the last; all their settings apply.
    options : SharingOptions
        Tolerances.

    Returns
    -------
    MaladjustedCase
        The case; ``solved`` is False where the plant has no solution so adjusted.
    """
    event = events[-1]
    group, before = known.group, known.own
    changed = group_of(
        changed_network(group.at, events),
        group.island,
        group.places.tolist(),
        group.loads,
        p_kw=group.p_kw,
        q_kvar=group.q_kvar,
    )
    plant = group.at.network.plant
    after = solve_scaled(changed, np.ones(1))
    p, q = after.source_p_kw[0, group.places], after.source_q_kvar[0, group.places]
    p_limit, q_limit = tolerances(group, options)
    f_rated = plant.project.f_rated_hz
    case = MaladjustedCase(
        case=event.case,
        mode=event.mode,
        genset=event.equipment,
        setting=SETTINGS[event.unit],
        value_pu=float(event.size or 0.0) / 100.0,
        was_pu=own_value(plant, event),
        cell=event.cell,
        solved=bool(after.solved[0]),
        sets=group.names,
        p_before_kw=read_only(before.source_p_kw[0, group.places]),
        q_before_kvar=read_only(before.source_q_kvar[0, group.places]),
        p_after_kw=read_only(p),
        q_after_kvar=read_only(q),
        p_tolerance_kw=read_only(p_limit),
        q_tolerance_kvar=read_only(q_limit),
        p_share_kw=read_only(p - kw_off(changed, p)),
        q_share_kvar=read_only(q - kvar_off(changed, q)),
        s_rated_kva=read_only(group.s_rated_kva),
        u_before_pu=float(before.source_u_pu[0, group.places].mean()),
        u_after_pu=float(after.source_u_pu[0, group.places].mean()),
        f_before_hz=float(before.frequency_pu[0, group.island]) * f_rated,
        f_after_hz=float(after.frequency_pu[0, group.island]) * f_rated,
        sentence="",
    )
    if not case.solved:
        return replace(
            case,
            sentence=f"{_opening(case, len(events))} the plant has no operating point: {after.reason[0]}",
        )
    words = limit_words(after, 0)
    held = [(name, words[k]) for k, name in zip(group.places, group.names, strict=True) if words[k]]
    parts = [
        f"{_opening(case, len(events))}, {_who_takes_what(case)}",
        *_overloads(case, group.p_rated_kw),
        *(f"{name} is held at its {word} limit." for name, word in held),
        _cure(case, known.result),
    ]
    return replace(case, sentence=" ".join(parts))


def _opening(case: MaladjustedCase, rows: int) -> str:
    before = ", after the rows of this case before it," if rows > 1 else ""
    return (
        f"With the {case.setting} of {case.genset} at {_percent(case.value_pu)} % instead of "
        f"{_percent(case.was_pu)} %{before}"
    ).rstrip(",")


def _percent(value_pu: float) -> str:
    """Return a setting in percent, with a second decimal only where it has one."""
    text = f"{100.0 * value_pu:.2f}"
    return text[:-1] if text.endswith("0") else text


def _of_voltage(case: MaladjustedCase) -> bool:
    return case.setting in ("no-load voltage", "voltage droop")


def _who_takes_what(case: MaladjustedCase) -> str:
    unit = "kvar" if _of_voltage(case) else "kW"
    now = case.q_after_kvar if _of_voltage(case) else case.p_after_kw
    off = now - (case.q_share_kvar if _of_voltage(case) else case.p_share_kw)
    tolerance = case.q_tolerance_kvar if _of_voltage(case) else case.p_tolerance_kw
    most, least = int(off.argmax()), int(off.argmin())
    worst = _furthest(np.abs(off) / tolerance, case)
    allowed = f"{case.sets[worst]} may be {tolerance[worst]:.0f} {unit} off"
    if np.abs(off).max() < 0.5:
        return f"every set keeps its share of {unit}; {allowed}."
    verdict = "out of tolerance" if abs(off[worst]) > tolerance[worst] else "within tolerance"
    return (
        f"{case.sets[most]} takes {now[most]:.0f} {unit}, {off[most]:.0f} more than its share, and "
        f"{case.sets[least]} {now[least]:.0f} {unit}, {-off[least]:.0f} less; {allowed}, so the sharing is "
        f"{verdict}."
    )


def _furthest(used: FloatArray, case: MaladjustedCase) -> int:
    """Return the set that uses most of its tolerance; of equal ones the one whose setting is off."""
    equal = np.flatnonzero(used > used.max() - 1e-6)
    return int(next((k for k in equal if case.sets[k] == case.genset), equal[0]))


def _overloads(case: MaladjustedCase, p_rated_kw: FloatArray) -> list[str]:
    loaded = (
        ("kVA", np.hypot(case.p_after_kw, case.q_after_kvar) / case.s_rated_kva),
        ("kW", case.p_after_kw / p_rated_kw),
    )
    out = [
        f"{name} is loaded to {100.0 * part:.0f} % of its {unit}."
        for unit, parts in loaded
        for name, part in zip(case.sets, parts, strict=True)
        if part > 1.0
    ]
    driven = [name for name, p in zip(case.sets, case.p_after_kw, strict=True) if p < -1e-6]
    return out + [f"{name} is driven as a motor." for name in driven]


def _cure(case: MaladjustedCase, result: IslandSharing) -> str:
    """Return what to adjust: back to the workbook's setting, unless that is out of tolerance itself."""
    kvar = _of_voltage(case)
    back = f"the {case.setting} of {case.genset} back to {_percent(case.was_pu)} %"
    if not result.out_of_tolerance(result.as_set, kvar=kvar):
        return f"Set {back}."
    droop = "droop" in case.setting
    steps = [back] if droop else []
    setting = "no-load voltage" if kvar else "no-load frequency"
    for trim in result.trims:
        now, then = (trim.u_as_set_pu, trim.u_trimmed_pu) if kvar else (trim.f_as_set_pu, trim.f_trimmed_pu)
        if abs(then - now) >= LEAST_TRIM_PU:
            steps.append(f"the {setting} of {trim.genset} to {_percent(then)} %")
        elif trim.genset == case.genset and not droop:
            steps.append(back)
    too = "As the workbook sets them the sets are out of tolerance too"
    if result.out_of_tolerance(result.trimmed, kvar=kvar) or not steps:
        word = "voltage" if kvar else "speed"
        return f"{too}, trimmed at 75 % load as well. Set equal {word} droops, then trim the sets."
    return f"{too}. Set {' and '.join(steps)}."
