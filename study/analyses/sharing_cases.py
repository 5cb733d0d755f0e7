"""Maladjusted sets: each event solved as a case of its own, with a sentence that says what to do."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from study.analyses.sharing_curves import Group, share_of, solve_scaled, with_trim
from study.analyses.sharing_options import SharingOptions
from study.formulas.sharing import active_sharing_limit, reactive_sharing_limit
from study.model.modes import Event
from study.network.batch import BatchSolution, Settings
from study.results.arrays import FloatArray, read_only
from study.results.sharing import MaladjustedCase

# unit word of the event -> (name of the setting, field of Settings, the source's own value)
SETTINGS = {
    "% no-load voltage": ("no-load voltage", "no_load_voltage_pu", "v_ref_pu"),
    "% voltage droop": ("voltage droop", "voltage_droop_pu", "droop_pu"),
    "% no-load frequency": ("no-load frequency", "no_load_frequency_pu", "f_no_load_pu"),
    "% speed droop": ("speed droop", "speed_droop_pu", "speed_droop_pu"),
}


def maladjusted_case(
    group: Group, events: tuple[Event, ...], before: BatchSolution, options: SharingOptions
) -> MaladjustedCase:
    """Solve the mode with the settings of one case, and compare with the settings of the workbook.

    Parameters
    ----------
    group : Group
        Sets of the island in which the last event's set runs.
    events : tuple of Event
        Rows of the case up to the one that is reported, which is the last; all their settings apply.
    before : BatchSolution
        The mode as set.
    options : SharingOptions
        Tolerances.

    Returns
    -------
    MaladjustedCase
        The case; ``solved`` is False where the plant has no solution so adjusted.
    """
    event = events[-1]
    settings = Settings()
    for row in events:
        place = group.at.source_names.index(row.equipment)
        settings = with_trim(
            settings, SETTINGS[str(row.unit)][1], place, (row.size or 0.0) / 100.0, group.at.sources
        )
    after = solve_scaled(group, np.ones(1), settings)
    p_before, q_before = _powers(before, group)
    p_after, q_after = _powers(after, group)
    f_rated = group.at.network.plant.project.f_rated_hz
    p_limit = active_sharing_limit(
        group.p_rated_kw, of_largest=options.kw_of_largest, of_own=options.kw_of_own
    )
    q_limit = reactive_sharing_limit(
        group.q_rated_kvar, of_largest=options.kvar_of_largest, of_smallest=options.kvar_of_smallest
    )
    name, _, own = SETTINGS[str(event.unit)]
    was = float(getattr(group.at.sources[group.at.source_names.index(event.equipment)], own))
    case = MaladjustedCase(
        case=event.case,
        mode=event.mode,
        genset=event.equipment,
        setting=name,
        value_pu=(event.size or 0.0) / 100.0,
        was_pu=was,
        cell=event.cell,
        solved=bool(after.solved[0]),
        sets=tuple(s.name for s in group.sources),
        p_before_kw=read_only(p_before),
        q_before_kvar=read_only(q_before),
        p_after_kw=read_only(p_after),
        q_after_kvar=read_only(q_after),
        p_tolerance_kw=read_only(p_limit),
        q_tolerance_kvar=read_only(np.full(len(group.sources), q_limit)),
        p_share_kw=read_only(share_of(p_after.sum(), group.p_rated_kw, p_after, group.shares_kw)),
        q_share_kvar=read_only(share_of(q_after.sum(), group.q_rated_kvar, q_after, group.shares_kvar)),
        s_rated_kva=read_only([s.s_rated_kva for s in group.sources]),
        u_before_pu=float(before.source_u_pu[0, group.places[0]]),
        u_after_pu=float(after.source_u_pu[0, group.places[0]]),
        f_before_hz=float(before.frequency_pu[0, group.island]) * f_rated,
        f_after_hz=float(after.frequency_pu[0, group.island]) * f_rated,
        sentence="",
    )
    return _with_sentence(case, after.reason[0])


def _powers(solution: BatchSolution, group: Group) -> tuple[FloatArray, FloatArray]:
    return solution.source_p_kw[0, group.places], solution.source_q_kvar[0, group.places]


def _with_sentence(case: MaladjustedCase, reason: str) -> MaladjustedCase:
    opening = (
        f"With the {case.setting} of {case.genset} at {100.0 * case.value_pu:.1f} % instead of "
        f"{100.0 * case.was_pu:.1f} %"
    )
    if not case.solved:
        return replace(case, sentence=f"{opening} the plant has no operating point: {reason}")
    voltage = case.setting in ("no-load voltage", "voltage droop")
    unit = "kvar" if voltage else "kW"
    now = case.q_after_kvar if voltage else case.p_after_kw
    off = now - (case.q_share_kvar if voltage else case.p_share_kw)
    tolerance = case.q_tolerance_kvar if voltage else case.p_tolerance_kw
    most, least = int(off.argmax()), int(off.argmin())
    beyond = bool((np.abs(off) > tolerance).any())
    overload = [
        f"{name} is loaded to {100.0 * s / rated:.0f} % of its kVA"
        for name, s, rated in zip(
            case.sets, np.hypot(case.p_after_kw, case.q_after_kvar), case.s_rated_kva, strict=True
        )
        if s > rated
    ]
    parts = [
        f"{opening}, {case.sets[most]} takes {off[most]:.0f} {unit} more than its share "
        f"({now[most]:.0f} {unit}) and {case.sets[least]} {-off[least]:.0f} {unit} less "
        f"({now[least]:.0f} {unit}); the tolerance is {tolerance.min():.0f} {unit}, "
        + ("so the sharing is out of tolerance." if beyond else "so the sharing still holds.")
    ]
    if overload:
        parts.append("; ".join(overload) + ".")
    parts.append(
        f"Set the {case.setting} of {case.genset} back to {100.0 * case.was_pu:.1f} %, then trim the "
        f"{'no-load voltages' if voltage else 'no-load frequencies'} at 75 % load."
    )
    return replace(case, sentence=" ".join(parts))
