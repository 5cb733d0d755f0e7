"""Load balance against capacity: sets on line, loss of a set, one set out, load steps, shore, restart."""

from __future__ import annotations

from collections.abc import Iterator

from study.checks.emergency import judge_emergency
from study.checks.limits import Limits
from study.checks.verdict import Verdict, make_verdict
from study.model.plant import Plant
from study.results.balance import BalanceResult, IslandBalance, LossOfSet, ModeBalance

_SUBJECT = "capacity"
_RATED = "Rated apparent power"
UNDER_WAY = ("sea", "manoeuvring", "station keeping")


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
    verdicts += judge_emergency(plant, result, limits)
    return tuple(verdicts)


def _mode(plant: Plant, mode: ModeBalance, limits: Limits) -> Iterator[Verdict]:
    yield from _unfed(mode)
    for island in mode.islands:
        yield from _island(plant, mode, island, limits)
    yield from _one_out(plant, mode, limits)
    yield from _minimum_load(plant, mode, limits)
    yield from _restart(plant, mode, limits)


def _unfed(mode: ModeBalance) -> Iterator[Verdict]:
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
    if island.shore is None:
        yield from _sets(plant, mode, island, limits)
        yield from _step(plant, mode, island, limits)
    else:
        yield from _shore(plant, mode, island, limits)
    yield from _loss(plant, mode, island, limits)


def _sets(plant: Plant, mode: ModeBalance, island: IslandBalance, limits: Limits) -> Iterator[Verdict]:
    remedy = f"Run {island.fewest_sets_text}, or shed load."
    if mode.kind == "emergency":
        remedy = "Shed load, or feed fewer boards in this mode."
    for word, value in (("kW", island.kw_loading), ("kVA", island.kva_loading)):
        yield make_verdict(
            mode=mode.mode,
            subject=_SUBJECT,
            equipment=_place(mode, island),
            quantity=f"loading in {word} of the sets on line",
            value=100.0 * value,
            limit=limits.number("set_loading"),
            unit="%",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("set_loading"),
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=_first_set_cell(plant, mode, island),
            remedy=remedy,
        )


def _shore(plant: Plant, mode: ModeBalance, island: IslandBalance, limits: Limits) -> Iterator[Verdict]:
    yield make_verdict(
        mode=mode.mode,
        subject=_SUBJECT,
        equipment=str(island.shore),
        quantity="current of the shore supply",
        value=island.shore_current_a,
        limit=island.shore_rated_a * limits.fraction("supply_loading"),
        unit="A",
        close_margin=limits.fraction("close_margin"),
        basis=limits.basis("supply_loading"),
        data_tolerance=limits.fraction("load_data_tolerance"),
        cell=plant.cell_of(str(island.shore), "Rated current"),
        remedy="Shed load in port or ask for a stronger shore connection.",
    )
    f_hz = {s.name: s.f_hz for s in plant.shore_supplies}.get(str(island.shore), float("nan"))
    yield make_verdict(
        mode=mode.mode,
        subject="frequency",
        equipment=str(island.shore),
        quantity="frequency of the shore supply off rated",
        value=100.0 * abs(f_hz / plant.project.f_rated_hz - 1.0),
        limit=limits.number("frequency_deviation"),
        unit="%",
        close_margin=limits.fraction("close_margin"),
        basis=limits.basis("frequency_deviation"),
        cell=plant.cell_of(str(island.shore), "Frequency"),
        remedy="Take a frequency converter, or a connection of the vessel's frequency.",
    )


def _loss(plant: Plant, mode: ModeBalance, island: IslandBalance, limits: Limits) -> Iterator[Verdict]:
    governing = _governing_loss(mode, island)
    if governing is None:
        return
    stage, words = governing
    if not stage.sets_left and island.services_lost is not None:
        if island.services_lost:
            yield _section(plant, mode, island, stage, island.services_lost)
        return
    yield make_verdict(
        mode=mode.mode,
        subject=_SUBJECT,
        equipment=stage.lost,
        quantity=f"loading after loss of the largest set, {words}",
        value=100.0 * max(stage.kw_loading, stage.kva_loading),
        limit=limits.number("set_loss_loading"),
        unit="%",
        close_margin=limits.fraction("close_margin"),
        basis=limits.basis("set_loss_loading"),
        data_tolerance=limits.fraction("load_data_tolerance"),
        cell=plant.cell_of(stage.lost, _RATED),
        remedy="Run one more set, let one stand by, or put more load on the preferential trips.",
    )


def _section(
    plant: Plant, mode: ModeBalance, island: IslandBalance, stage: LossOfSet, lost: tuple[str, ...]
) -> Verdict:
    """Judge the loss of the only set of a section while other sections have sources on line."""
    return make_verdict(
        mode=mode.mode,
        subject=_SUBJECT,
        equipment=stage.lost,
        quantity=f"with it its section is dead ({island.boards[0]}), and nowhere else served: "
        + ", ".join(lost),
        value=float(len(lost)),
        limit=0.0,
        unit="-",
        close_margin=0.0,
        basis="SOLAS II-1/41.5.1, from memory: propulsion, steering and safety stay supplied or are at once "
        "restored when one generator is lost",
        cell=plant.cell_of(stage.lost, _RATED),
        remedy="Divide these services between the sections, or run one more set on this one, or let one "
        "stand by (sheets Loads, Running).",
    )


def _governing_loss(mode: ModeBalance, island: IslandBalance) -> tuple[LossOfSet, str] | None:
    """Return the stage that decides, and what it is called; None where nothing is asked.

    Where sets are left, the preferential trips have to save them: the stage with the least loading, the first
    of equal ones, before any standby has started. After a blackout the standby sets carry what the trips
    leave. A set that runs alone without a standby is no fault in port, where propulsion and steering do not
    hang on it (SOLAS II-1/41.5.1.1, from memory). Under way it is none on one of several sections, where the
    others serve what is essential.
    """
    alone = [stage for stage in island.loss if stage.stage != "standby started"]
    if not alone:
        return None
    if alone[0].sets_left:
        stage = min(alone, key=_loading)
        return stage, stage.stage
    if island.loss_with_standby:
        stage = min(island.loss_with_standby, key=_loading)
        return stage, f"standby started, {stage.stage}"
    if mode.kind not in UNDER_WAY:
        return None
    return alone[0], "no set left"


def _loading(stage: LossOfSet) -> float:
    return max(stage.kw_loading, stage.kva_loading)


def _step(plant: Plant, mode: ModeBalance, island: IslandBalance, limits: Limits) -> Iterator[Verdict]:
    if island.largest_step_load:
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
            cell=plant.cell_of(row.out, _RATED),
            remedy="Install larger sets, or review which loads are essential (sheet Loads).",
        )


def _minimum_load(plant: Plant, mode: ModeBalance, limits: Limits) -> Iterator[Verdict]:
    """Yield the engines on line against their least load in continuous running.

    An emergency set in an emergency is not in continuous running.
    """
    minimum = {
        g.name: g.min_engine_load
        for g in plant.gensets
        if not (g.service == "emergency" and mode.kind == "emergency")
    }
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


def _restart(plant: Plant, mode: ModeBalance, limits: Limits) -> Iterator[Verdict]:
    started: set[int] = set()
    for step in mode.restart:
        name = f"restart step {step.step}"
        yield make_verdict(
            mode=mode.mode,
            subject=_SUBJECT,
            equipment=name,
            quantity="load connected in one step after a blackout",
            value=step.p_step_kw,
            limit=step.step_capability_kw,
            unit="kW",
            close_margin=limits.fraction("close_margin"),
            basis="largest engine load step of the sets that start (sheet Gensets)",
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(step.loads[0], "Restart delay after blackout") if step.loads else "",
            remedy="Spread the restart delays of " + ", ".join(step.loads[:3]) + " (sheet Loads).",
        )
        if step.island not in started and mode.kind in UNDER_WAY:
            started.add(step.island)
            yield make_verdict(
                mode=mode.mode,
                subject=_SUBJECT,
                equipment=name,
                quantity="first set on the board after a blackout",
                value=step.at_s,
                limit=limits.number("emergency_start"),
                unit="s",
                close_margin=limits.fraction("close_margin"),
                basis="SOLAS II-1/41.5.1.1, from memory: within the time of the emergency supply",
                remedy="Let a set with a shorter start delay stand by (sheets Running, Gensets).",
            )


def _place(mode: ModeBalance, island: IslandBalance) -> str:
    return island.boards[0] if len(mode.islands) > 1 and island.boards else "all boards"


def _first_set_cell(plant: Plant, mode: ModeBalance, island: IslandBalance) -> str:
    for row in mode.sets:
        if row.island == island.island and row.state == "on":
            return plant.cell_of(row.name, _RATED)
    return ""
