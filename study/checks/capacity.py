"""Load balance against capacity: sets on line, loss of a set, one set out, load steps, emergency, shore."""

from __future__ import annotations

from collections.abc import Iterator

from study.checks.limits import Limits
from study.checks.verdict import Verdict, make_verdict
from study.model.plant import Plant
from study.results.balance import BalanceResult, IslandBalance, LossOfSet, ModeBalance

_SUBJECT = "capacity"
_SOURCES_HEADING = "Rated apparent power"


def judge_capacity(plant: Plant, result: BalanceResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge the load balance of every mode.

    Parameters
    ----------
    plant : Plant
        For the cells that govern.
    result : BalanceResult
        The load balance.
    limits : Limits
        The limits in force.

    Returns
    -------
    tuple of Verdict
        Subjects ``capacity``, ``loading`` (minimum engine load) and ``frequency`` (shore supply).
    """
    verdicts: list[Verdict] = []
    for mode in result.modes:
        verdicts += _mode(plant, mode, limits)
    verdicts += _emergency(plant, result, limits)
    return tuple(verdicts)


def _mode(plant: Plant, mode: ModeBalance, limits: Limits) -> Iterator[Verdict]:
    yield from _unfed(mode, limits)
    for island in mode.islands:
        yield from _island(plant, mode, island, limits)
    yield from _one_out(plant, mode, limits)
    yield from _minimum_load(plant, mode, limits)
    yield from _restart(mode, limits)


def _unfed(mode: ModeBalance, limits: Limits) -> Iterator[Verdict]:
    if mode.p_unfed_kw > 0:
        yield make_verdict(
            mode=mode.mode,
            subject=_SUBJECT,
            equipment="dead boards",
            quantity="load in use without supply",
            value=mode.p_unfed_kw,
            limit=0.0,
            unit="kW",
            close_margin=0.0,
            basis="every load in use needs a live board",
            remedy="Feed the board in this mode, or set its loads to 0 in use (sheets Running, Demand).",
        )


def _island(plant: Plant, mode: ModeBalance, island: IslandBalance, limits: Limits) -> Iterator[Verdict]:
    where = _place(mode, island)
    if island.shore is None:
        for word, value in (("kW", island.kw_loading), ("kVA", island.kva_loading)):
            yield make_verdict(
                mode=mode.mode,
                subject=_SUBJECT,
                equipment=where,
                quantity=f"{word} on the sets on line",
                value=100.0 * value,
                limit=limits.number("set_loading"),
                unit="%",
                close_margin=limits.fraction("close_margin"),
                basis=limits.basis("set_loading"),
                data_tolerance=limits.fraction("load_data_tolerance"),
                cell=_first_set_cell(plant, mode, island),
                remedy=f"Run {island.fewest_sets_text}, or shed load.",
            )
    else:
        yield make_verdict(
            mode=mode.mode,
            subject=_SUBJECT,
            equipment=island.shore,
            quantity="current of the shore supply",
            value=island.shore_current_a,
            limit=island.shore_rated_a * limits.fraction("supply_loading"),
            unit="A",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("supply_loading"),
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(island.shore, "Rated current"),
            remedy="Shed load in port or ask for a stronger shore connection.",
        )
    yield from _loss(plant, mode, island, limits)
    yield from _step(plant, mode, island, limits)


def _loss(plant: Plant, mode: ModeBalance, island: IslandBalance, limits: Limits) -> Iterator[Verdict]:
    governing = _governing_loss(island)
    if governing is None:
        return
    yield make_verdict(
        mode=mode.mode,
        subject=_SUBJECT,
        equipment=governing.lost,
        quantity=f"loading after loss of the largest set, {governing.stage}",
        value=100.0 * max(governing.kw_loading, governing.kva_loading),
        limit=limits.number("set_loss_loading"),
        unit="%",
        close_margin=limits.fraction("close_margin"),
        basis=limits.basis("set_loss_loading"),
        data_tolerance=limits.fraction("load_data_tolerance"),
        cell=plant.cell_of(governing.lost, _SOURCES_HEADING),
        remedy="Run one more set, or put more load on the preferential trips.",
    )


def _governing_loss(island: IslandBalance) -> LossOfSet | None:
    """Return the stage that decides: the last shedding stage, or the standby's start after a blackout."""
    shed = [stage for stage in island.loss if stage.stage != "standby started"]
    if not shed:
        return None
    if shed[-1].sets_left:
        return shed[-1]
    return island.loss[-1]


def _step(plant: Plant, mode: ModeBalance, island: IslandBalance, limits: Limits) -> Iterator[Verdict]:
    if island.largest_step_load and island.shore is None:
        yield make_verdict(
            mode=mode.mode,
            subject=_SUBJECT,
            equipment=island.largest_step_load,
            quantity="largest load switched, against the engines' load step",
            value=island.largest_step_kw,
            limit=island.step_capability_kw,
            unit="kW",
            close_margin=limits.fraction("close_margin"),
            basis="largest engine load step of the sets on line (sheet Gensets)",
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(island.largest_step_load, "Rated output"),
            remedy="Start it with more sets on line, or load it in steps.",
        )


def _one_out(plant: Plant, mode: ModeBalance, limits: Limits) -> Iterator[Verdict]:
    for row in mode.main_set_out:
        yield make_verdict(
            mode=mode.mode,
            subject=_SUBJECT,
            equipment=row.out,
            quantity="essential load with this main set out of service",
            value=100.0 * max(row.kw_loading, row.kva_loading),
            limit=limits.number("one_out_loading"),
            unit="%",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("one_out_loading"),
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(row.out, _SOURCES_HEADING),
            remedy="Install larger sets, or review which loads are essential (sheet Loads).",
        )


def _minimum_load(plant: Plant, mode: ModeBalance, limits: Limits) -> Iterator[Verdict]:
    minimum = {g.name: g.min_engine_load for g in plant.gensets}
    for row in mode.sets:
        if row.state != "on" or row.name not in minimum:
            continue
        yield make_verdict(
            mode=mode.mode,
            subject="loading",
            equipment=row.name,
            quantity="engine load, at least",
            value=100.0 * row.engine_loading,
            limit=100.0 * minimum[row.name],
            unit="%",
            sense="at least",
            close_margin=limits.fraction("close_margin"),
            basis="minimum engine load of the set (sheet Gensets)",
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(row.name, "Minimum engine load"),
            remedy="Run fewer sets in this mode, or a smaller one.",
        )


def _restart(mode: ModeBalance, limits: Limits) -> Iterator[Verdict]:
    for step in mode.restart:
        yield make_verdict(
            mode=mode.mode,
            subject=_SUBJECT,
            equipment=f"restart step {step.step}",
            quantity="load connected in one step after a blackout",
            value=step.p_step_kw,
            limit=step.step_capability_kw,
            unit="kW",
            close_margin=0.0,
            basis="largest engine load step of the sets that start (sheet Gensets)",
            data_tolerance=limits.fraction("load_data_tolerance"),
            remedy="Spread the restart delays of " + ", ".join(step.loads[:3]) + " (sheet Loads).",
        )


def _emergency(plant: Plant, result: BalanceResult, limits: Limits) -> Iterator[Verdict]:
    for row in result.emergency:
        for word, value in (("kW", row.kw_loading), ("kVA", row.kva_loading)):
            yield make_verdict(
                mode=row.mode,
                subject=_SUBJECT,
                equipment=row.genset,
                quantity=f"{word} of the emergency list",
                value=100.0 * value,
                limit=limits.number("set_loading"),
                unit="%",
                close_margin=limits.fraction("close_margin"),
                basis=f"SOLAS II-1/42, 43: {row.hours_required:g} h",
                data_tolerance=limits.fraction("load_data_tolerance"),
                cell=plant.cell_of(row.genset, _SOURCES_HEADING),
                remedy="Take a larger emergency set, or shorten the emergency list.",
            )


def _place(mode: ModeBalance, island: IslandBalance) -> str:
    return island.boards[0] if len(mode.islands) > 1 and island.boards else "all boards"


def _first_set_cell(plant: Plant, mode: ModeBalance, island: IslandBalance) -> str:
    for row in mode.sets:
        if row.island == island.island and row.state == "on":
            return plant.cell_of(row.name, _SOURCES_HEADING)
    return ""
