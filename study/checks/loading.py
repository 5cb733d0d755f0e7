"""Currents and powers of the load flow against ratings."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

from study.checks.limits import Limits
from study.checks.verdict import Verdict, make_verdict
from study.model.branches import ThreeWindingTransformer
from study.model.plant import Plant
from study.results.load_flow import LoadFlowResult, ModeLoadFlow


@dataclass(frozen=True, slots=True, kw_only=True)
class _BranchKind:
    """How a kind of branch is judged; ``missing`` says what is wanting where it has no rating."""

    subject: str
    limit: str
    heading: str
    missing: str
    remedy: str


_TRANSFORMER = _BranchKind(
    subject="loading",
    limit="transformer_loading",
    heading="Rated power",
    missing="no rated power given",
    remedy="Take a larger transformer or move load.",
)
_BRANCH = {
    "cable": _BranchKind(
        subject="cables",
        limit="cable_loading",
        heading="Section",
        missing="IEC 60092-352 does not rate it and no current rating is given",
        remedy="Take a larger section or more runs.",
    ),
    "transformer": _TRANSFORMER,
    "three-winding transformer": _TRANSFORMER,
    "tie": _BranchKind(
        subject="loading",
        limit="busbar_loading",
        heading="Rated current",
        missing="no rated current given",
        remedy="Split the load between the sections.",
    ),
    "reactor": _BranchKind(
        subject="loading",
        limit="busbar_loading",
        heading="Rated current",
        missing="no rated current given",
        remedy="Take a reactor of a higher rated current.",
    ),
}
_RING = "it is in a closed ring of ties without impedance, whose currents are undetermined"
_HELD_BY = {"engine": "Engine power", "excitation": "Excitation ceiling", "current": "Rated apparent power"}


def judge_loading(plant: Plant, result: LoadFlowResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge sources, cables, transformers, ties and busbars of every mode.

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
        genset = state.kinds[i] == "genset"
        key = "set_loading" if genset else "supply_loading"
        whole = "kVA" if state.kinds[i] != "shore supply" else "current"
        judged = [("kW", state.kw_loading[i])] if genset else []
        for word, value in (*judged, (whole, state.kva_loading[i])):
            yield make_verdict(
                mode=mode.mode,
                subject="loading",
                equipment=name,
                quantity=f"loading in {word} by the load flow",
                value=100.0 * float(value),
                limit=limits.number(key),
                unit="%",
                close_margin=limits.fraction("close_margin"),
                basis=limits.basis(key),
                data_tolerance=limits.fraction("load_data_tolerance"),
                cell=plant.cell_of(name, "Rated apparent power") or plant.cell_of(name, "Rated current"),
                remedy="Run one more source, shed load, or correct the sharing.",
            )
        if genset and state.p_kw[i] < -1e-6 * state.p_rated_kw[i]:
            yield _driven(plant, mode, i)
        if state.limited_by[i]:
            yield _held(plant, mode, i)


def _driven(plant: Plant, mode: ModeLoadFlow, i: int) -> Verdict:
    state = mode.sources
    return make_verdict(
        mode=mode.mode,
        subject="loading",
        equipment=state.names[i],
        quantity="reverse power by the load flow",
        value=-100.0 * float(state.p_kw[i] / state.p_rated_kw[i]),
        limit=0.0,
        unit="%",
        close_margin=0.0,
        basis="a set does not drive another one",
        cell=plant.cell_of(state.names[i], "No-load frequency"),
        remedy="Correct the no-load frequencies and speed droops, or the set powers.",
    )


def _held(plant: Plant, mode: ModeLoadFlow, i: int) -> Verdict:
    state = mode.sources
    name, by = state.names[i], state.limited_by[i]
    turned = any(g.name == name and g.regulator.reversed_polarity for g in plant.gensets)
    remedy = "Run one more source or correct the sharing."
    if turned and by == "excitation":
        remedy = "Turn the current transformer of its droop circuit round."
    return make_verdict(
        mode=mode.mode,
        subject="loading",
        equipment=name,
        quantity=f"held at its {by} limit",
        value=1.0,
        limit=0.0,
        unit="-",
        close_margin=0.0,
        basis="a source at its limit no longer regulates",
        cell=plant.cell_of(name, _HELD_BY.get(by, "")),
        remedy=remedy,
    )


def _branches(plant: Plant, mode: ModeLoadFlow, limits: Limits) -> Iterator[Verdict]:
    state = mode.branches
    given = {c.name for c in plant.cables if c.rating_a is not None}
    three = {t.name: t for t in plant.three_winding}
    for i, name in enumerate(state.names):
        kind = _BRANCH[state.kinds[i]]
        rated, quantity, heading = float(state.rating_a[i]), "current", kind.heading
        if name in given:
            heading = "Current rating"
        if name in three:
            windings = _windings(three[name], rated)
            quantity = f"current of its {' or '.join(windings) or 'most loaded'} winding"
            heading = f"{(windings or ['primary'])[0].capitalize()} power"
        basis = limits.basis(kind.limit) if not math.isnan(rated) else kind.missing
        yield make_verdict(
            mode=mode.mode,
            subject=kind.subject,
            equipment=name,
            quantity=quantity,
            value=float(state.current_a[i]) if state.determined[i] else math.nan,
            limit=rated * limits.fraction(kind.limit),
            unit="A",
            close_margin=limits.fraction("close_margin"),
            basis=basis if state.determined[i] else _RING,
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(name, heading),
            remedy=kind.remedy,
        )


def _windings(t: ThreeWindingTransformer, rated_a: float) -> list[str]:
    """Return the windings of this rated current: the load flow reports the most loaded one."""
    rated = {
        "primary": 1000.0 * t.s_primary_kva / (3.0**0.5 * t.u_primary_v),
        "secondary": 1000.0 * t.s_secondary_kva / (3.0**0.5 * t.u_secondary_v),
        "tertiary": 1000.0 * t.s_tertiary_kva / (3.0**0.5 * t.u_tertiary_v),
    }
    return [name for name, amperes in rated.items() if math.isclose(amperes, rated_a, rel_tol=1e-6)]


def _busbars(plant: Plant, mode: ModeLoadFlow, limits: Limits) -> Iterator[Verdict]:
    state = mode.boards
    for i, name in enumerate(state.names):
        if not state.energised[i]:
            continue
        rated, current = float(state.busbar_rated_a[i]), float(state.busbar_current_a[i])
        basis = limits.basis("busbar_loading")
        if math.isnan(rated):
            basis = "no busbar rated current given"
        elif math.isnan(current):
            basis = "a tie on it is in a closed ring of ties without impedance"
        yield make_verdict(
            mode=mode.mode,
            subject="loading",
            equipment=name,
            quantity="busbar current",
            value=current,
            limit=rated * limits.fraction("busbar_loading"),
            unit="A",
            close_margin=limits.fraction("close_margin"),
            basis=basis,
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(name, "Busbar rated current"),
            remedy="Take a busbar of a higher rated current or split the load.",
        )
