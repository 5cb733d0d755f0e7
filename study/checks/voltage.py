"""Voltage at boards and consumers, voltage drop, and frequency, against the permitted band."""

from __future__ import annotations

import math
from collections.abc import Iterator

from study.checks.limits import Limits
from study.checks.verdict import Verdict, make_verdict
from study.model.plant import Plant
from study.results.load_flow import LoadFlowResult, ModeLoadFlow


def judge_voltage(plant: Plant, result: LoadFlowResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge every live board, every consumer terminal in use and every island's frequency.

    Of the two ends of the voltage band only the one on the side of the deviation is stated. An island on a
    shore supply has the frequency of the port, which the load balance's checks judge.

    Parameters
    ----------
    plant : Plant
        For nominal voltages, rated frequency and governing cells.
    result : LoadFlowResult
        The load flow.
    limits : Limits
        The limits in force.

    Returns
    -------
    tuple of Verdict
        Subjects ``voltage`` and ``frequency``.
    """
    verdicts: list[Verdict] = []
    for mode in result.modes:
        if mode.solved:
            verdicts += _boards(plant, mode, limits)
            verdicts += _terminals(plant, mode, limits)
            verdicts += _frequency(plant, mode, limits)
        else:
            verdicts += _not_known(mode, limits)
    return tuple(verdicts)


def _not_known(mode: ModeLoadFlow, limits: Limits) -> Iterator[Verdict]:
    for subject, quantity in (("voltage", "voltage of boards and terminals"), ("frequency", "frequency")):
        yield make_verdict(
            mode=mode.mode,
            subject=subject,
            equipment="whole plant",
            quantity=quantity,
            value=math.nan,
            limit=math.nan,
            unit="%",
            close_margin=limits.fraction("close_margin"),
            basis="the mode's load flow has no solution",
        )


def _band(
    *, mode: str, equipment: str, quantity: str, deviation: float, cell: str, remedy: str, limits: Limits
) -> Verdict:
    """Judge a deviation from the reference, as a fraction, against the end of the band on its side."""
    below = deviation <= 0.0
    key = "voltage_low" if below else "voltage_high"
    return make_verdict(
        mode=mode,
        subject="voltage",
        equipment=equipment,
        quantity=f"{quantity} {'below' if below else 'above'} reference",
        value=100.0 * abs(deviation),
        limit=limits.number(key),
        unit="%",
        close_margin=limits.fraction("close_margin"),
        basis=limits.basis(key),
        data_tolerance=limits.fraction("load_data_tolerance"),
        cell=cell,
        remedy=remedy,
    )


def _boards(plant: Plant, mode: ModeLoadFlow, limits: Limits) -> Iterator[Verdict]:
    state = mode.boards
    for i, name in enumerate(state.names):
        if state.energised[i]:
            yield _band(
                mode=mode.mode,
                equipment=name,
                quantity="board voltage",
                deviation=float(state.u_v[i] / state.u_nominal_v[i] - 1.0),
                cell=plant.cell_of(name, "Nominal voltage"),
                remedy="Trim the sets' no-load voltage, change the transformer tap, or take a larger cable.",
                limits=limits,
            )


def _terminals(plant: Plant, mode: ModeLoadFlow, limits: Limits) -> Iterator[Verdict]:
    state = mode.terminals
    by_board = limits.text("voltage_reference") == "nominal of board"
    nominal = {board.name: board.u_nominal_v for board in plant.boards}
    for i, name in enumerate(state.loads):
        rated = float(state.u_rated_v[i])
        reference = _of_board(nominal[state.boards[i]], rated) if by_board else rated
        yield _band(
            mode=mode.mode,
            equipment=name,
            quantity="terminal voltage",
            deviation=float(state.u_v[i]) / reference - 1.0,
            cell=plant.cell_of(name, "Rated voltage"),
            remedy="Take a larger cable, or feed it from a board nearer by.",
            limits=limits,
        )
        drop = float(state.drop_pu[i])
        yield make_verdict(
            mode=mode.mode,
            subject="voltage",
            equipment=name,
            quantity="voltage drop from the switchboard",
            value=100.0 * drop,
            limit=limits.number("cable_drop"),
            unit="%",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("cable_drop")
            if not math.isnan(drop)
            else "no switchboard or transformer is on its way to a source",
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(state.fed_by[i], "Section"),
            remedy="Take a larger section or a shorter run.",
        )


def _of_board(nominal_v: float, rated_v: float) -> float:
    """Return the board's nominal voltage as a consumer sees it: line to line, or line to neutral."""
    return float(min((nominal_v, nominal_v / 3.0**0.5), key=lambda u: abs(u - rated_v)))


def _frequency(plant: Plant, mode: ModeLoadFlow, limits: Limits) -> Iterator[Verdict]:
    rated = plant.project.f_rated_hz
    ports = {s.name for s in plant.shore_supplies}
    for island in mode.islands:
        if ports & set(island.sources):
            continue
        yield make_verdict(
            mode=mode.mode,
            subject="frequency",
            equipment=island.boards[0],
            quantity="frequency off rated",
            value=100.0 * abs(island.f_hz / rated - 1.0),
            limit=limits.number("frequency_deviation"),
            unit="%",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("frequency_deviation"),
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(island.sources[0], "No-load frequency") if island.sources else "",
            remedy="Trim the sets' no-load frequency or set a smaller speed droop.",
        )
