"""Voltage at boards and consumers, voltage drop, and frequency, against the permitted band."""

from __future__ import annotations

from collections.abc import Iterator

from study.checks.limits import Limits
from study.checks.verdict import Verdict, make_verdict
from study.model.plant import Plant
from study.results.load_flow import LoadFlowResult, ModeLoadFlow


def judge_voltage(plant: Plant, result: LoadFlowResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge every live board, every consumer terminal in use and every island's frequency.

    Of the two ends of the voltage band only the nearer one is stated.

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
    return tuple(verdicts)


def _band(
    *, mode: str, equipment: str, quantity: str, deviation: float, cell: str, remedy: str, limits: Limits
) -> Verdict:
    """Judge a deviation from the reference, as a fraction, against the nearer end of the band."""
    low, high = limits.number("voltage_low"), limits.number("voltage_high")
    below = -100.0 * deviation / low >= 100.0 * deviation / high
    key = "voltage_low" if below else "voltage_high"
    return make_verdict(
        mode=mode,
        subject="voltage",
        equipment=equipment,
        quantity=f"{quantity} {'below' if below else 'above'} reference",
        value=-100.0 * deviation if below else 100.0 * deviation,
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
    nominal = {board.name: board.u_nominal_v for board in plant.boards}
    by_board = limits.text("voltage_reference") == "nominal of board"
    for i, name in enumerate(state.loads):
        reference = nominal[state.boards[i]] if by_board else float(state.u_rated_v[i])
        yield _band(
            mode=mode.mode,
            equipment=name,
            quantity="terminal voltage",
            deviation=float(state.u_v[i]) / reference - 1.0,
            cell=plant.cell_of(name, "Rated voltage"),
            remedy="Take a larger cable, or feed it from a board nearer by.",
            limits=limits,
        )
        yield make_verdict(
            mode=mode.mode,
            subject="voltage",
            equipment=name,
            quantity="voltage drop from the switchboard",
            value=100.0 * float(state.drop_pu[i]),
            limit=limits.number("cable_drop"),
            unit="%",
            close_margin=limits.fraction("close_margin"),
            basis=limits.basis("cable_drop"),
            data_tolerance=limits.fraction("load_data_tolerance"),
            cell=plant.cell_of(state.fed_by[i], "Section"),
            remedy="Take a larger section or a shorter run.",
        )


def _frequency(plant: Plant, mode: ModeLoadFlow, limits: Limits) -> Iterator[Verdict]:
    rated = plant.project.f_rated_hz
    for island in mode.islands:
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
            cell=plant.cell_of(island.sources[0], "No-load frequency") if island.sources else "",
            remedy="Trim the sets' no-load frequency or set a smaller speed droop.",
        )
