"""The emergency list against the emergency set or battery: kW, kVA, start, and how long a store lasts."""

from __future__ import annotations

from collections.abc import Iterator

from study.checks.limits import Limits
from study.checks.verdict import Verdict, make_verdict
from study.model.plant import Plant
from study.results.balance import BalanceResult, EmergencyDuty, ModeBalance

_SUBJECT = "capacity"


def judge_emergency(plant: Plant, result: BalanceResult, limits: Limits) -> Iterator[Verdict]:
    """Yield the verdicts on emergency sources of power.

    Parameters
    ----------
    plant : Plant
        For start delays, stored energy and the cells that govern.
    result : BalanceResult
        The load balance.
    limits : Limits
        The limits in force.

    Yields
    ------
    Verdict
        Subject ``capacity``.
    """
    delays = {g.name: g.start_delay_s for g in plant.gensets}
    for row in result.emergency:
        yield from _loading(plant, row, limits)
        yield make_verdict(
            mode=row.mode,
            subject=_SUBJECT,
            equipment=row.genset,
            quantity="start of the emergency set",
            value=delays.get(row.genset, float("nan")),
            limit=limits.number("emergency_start"),
            unit="s",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("emergency_start"),
            cell=plant.cell_of(row.genset, "Start delay"),
            remedy="Take a starting system that brings it on the board in time.",
        )
    for mode in result.modes:
        if mode.kind == "emergency":
            yield from _stores(plant, mode, limits)


def _loading(plant: Plant, row: EmergencyDuty, limits: Limits) -> Iterator[Verdict]:
    for word, value in (("kW", row.kw_loading), ("kVA", row.kva_loading)):
        yield make_verdict(
            mode=row.mode,
            subject=_SUBJECT,
            equipment=row.genset,
            quantity=f"loading in {word} by the emergency list",
            value=100.0 * value,
            limit=limits.number("set_loading"),
            unit="%",
            close_margin=limits.fraction("close_margin"),
            basis=f"{row.hours_basis}: {row.hours_required:g} h",
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(row.genset, "Rated apparent power"),
            remedy="Take a larger emergency set, or shorten the emergency list.",
        )


def _stores(plant: Plant, mode: ModeBalance, limits: Limits) -> Iterator[Verdict]:
    """Yield what is drawn from batteries over the emergency's duration; a blank store is not assessed."""
    stored = {c.name: c.stored_energy_kwh for c in plant.converter_supplies}
    hours = limits.number("emergency_duration")
    for row in mode.sets:
        if row.state != "on" or row.name not in stored or row.p_kw <= 0.0:
            continue
        given = stored[row.name]
        yield make_verdict(
            mode=mode.mode,
            subject=_SUBJECT,
            equipment=row.name,
            quantity=f"energy drawn in {hours:g} h",
            value=row.p_kw * hours,
            limit=float("nan") if given is None else given,
            unit="kWh",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("emergency_duration") if given is not None else "no stored energy given",
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(row.name, "Stored energy"),
            remedy="Take a larger store, or shorten the emergency list.",
        )
