"""Currents and powers of the load flow against ratings."""

from __future__ import annotations

import math
from collections.abc import Iterator

from study.checks.limits import Limits
from study.checks.verdict import Verdict, make_verdict
from study.model.plant import Plant
from study.results.load_flow import LoadFlowResult, ModeLoadFlow

_BRANCH = {
    "cable": ("cables", "cable_loading", "Section", "Take a larger section or more runs."),
    "transformer": (
        "loading",
        "transformer_loading",
        "Rated power",
        "Take a larger transformer or move load.",
    ),
    "three-winding transformer": (
        "loading",
        "transformer_loading",
        "Rated power",
        "Take a larger transformer or move load.",
    ),
    "tie": ("loading", "busbar_loading", "Rated current", "Split the load between the sections."),
    "reactor": ("loading", "busbar_loading", "Rated current", "Take a reactor of a higher rated current."),
}


def judge_loading(plant: Plant, result: LoadFlowResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge sources, cables, transformers, ties and busbars of every mode that has a solution.

    Parameters
    ----------
    plant : Plant
        For the cells that govern.
    result : LoadFlowResult
        The load flow.
    limits : Limits
        The limits in force.

    Returns
    -------
    tuple of Verdict
        Subjects ``loading`` and ``cables``; a mode without a solution gives one verdict that exceeds.
    """
    verdicts: list[Verdict] = []
    for mode in result.modes:
        if mode.solved:
            verdicts += _sources(plant, mode, limits)
            verdicts += _branches(plant, mode, limits)
            verdicts += _busbars(plant, mode, limits)
        else:
            verdicts.append(_no_solution(mode))
    return tuple(verdicts)


def _no_solution(mode: ModeLoadFlow) -> Verdict:
    return make_verdict(
        mode=mode.mode,
        subject="loading",
        equipment="whole plant",
        quantity="load flow without a solution",
        value=1.0,
        limit=0.0,
        unit="-",
        close_margin=0.0,
        basis=mode.reason,
        remedy="Run more sets or correct the settings named in the reason.",
    )


def _sources(plant: Plant, mode: ModeLoadFlow, limits: Limits) -> Iterator[Verdict]:
    state = mode.sources
    for i, name in enumerate(state.names):
        key = "set_loading" if state.kinds[i] == "genset" else "supply_loading"
        for word, value in (("kW", state.kw_loading[i]), ("kVA", state.kva_loading[i])):
            if word == "kW" and key == "supply_loading":
                continue
            yield make_verdict(
                mode=mode.mode,
                subject="loading",
                equipment=name,
                quantity=f"{word} of rated, from the load flow",
                value=100.0 * float(value),
                limit=limits.number(key),
                unit="%",
                close_margin=limits.fraction("close_margin"),
                basis=limits.basis(key),
                data_tolerance=limits.fraction("load_data_tolerance"),
                cell=plant.cell_of(name, "Rated apparent power") or plant.cell_of(name, "Rated current"),
                remedy="Run one more source, shed load, or correct the sharing.",
            )
        if state.limited_by[i]:
            yield _held(plant, mode, i)


def _held(plant: Plant, mode: ModeLoadFlow, i: int) -> Verdict:
    state = mode.sources
    heading = "Engine power" if state.limited_by[i] == "engine" else "Excitation ceiling"
    return make_verdict(
        mode=mode.mode,
        subject="loading",
        equipment=state.names[i],
        quantity=f"held at its {state.limited_by[i]} limit",
        value=1.0,
        limit=0.0,
        unit="-",
        close_margin=0.0,
        basis="a set at its limit no longer regulates",
        cell=plant.cell_of(state.names[i], heading),
        remedy="Run one more set or correct the sharing.",
    )


def _branches(plant: Plant, mode: ModeLoadFlow, limits: Limits) -> Iterator[Verdict]:
    state = mode.branches
    for i, name in enumerate(state.names):
        subject, key, heading, remedy = _BRANCH[state.kinds[i]]
        current = float(state.current_a[i])
        if math.isnan(current) and not state.determined[i]:
            continue
        allowed = float(state.rating_a[i]) * limits.fraction(key)
        yield make_verdict(
            mode=mode.mode,
            subject=subject,
            equipment=name,
            quantity="current",
            value=current,
            limit=allowed,
            unit="A",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis(key) if not math.isnan(allowed) else f"no {heading.lower()} given",
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(name, heading),
            remedy=remedy,
        )


def _busbars(plant: Plant, mode: ModeLoadFlow, limits: Limits) -> Iterator[Verdict]:
    state = mode.boards
    for i, name in enumerate(state.names):
        if not state.energised[i]:
            continue
        rated = float(state.busbar_rated_a[i])
        yield make_verdict(
            mode=mode.mode,
            subject="loading",
            equipment=name,
            quantity="busbar current",
            value=float(state.busbar_current_a[i]),
            limit=rated * limits.fraction("busbar_loading"),
            unit="A",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("busbar_loading")
            if not math.isnan(rated)
            else "no busbar rated current given",
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(name, "Busbar rated current"),
            remedy="Take a busbar of a higher rated current or split the load.",
        )
