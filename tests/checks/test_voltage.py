"""Each verdict on voltage, voltage drop and frequency."""

from __future__ import annotations

import math
from typing import Any

import pytest

from study.checks.verdict import Verdict
from study.checks.voltage import judge_voltage
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.load_flow import LoadFlowResult
from tests.checks.results import (
    LIMITS,
    NAN,
    a_flow,
    agreed,
    an_island_state,
    boards,
    find,
    quantities,
    terminals,
    unsolved_flow,
    with_cells,
)
from tests.plants import board, genset, load, plant, shore


def a_plant(**changes: Any) -> Plant:
    given: dict[str, Any] = {
        "boards": [board("MSB"), board("LV", 400.0)],
        "gensets": [genset("G1", "MSB")],
        "shore_supplies": [shore("Shore", "MSB")],
        "loads": [load("Pump", "MSB"), load("Lamp", "LV", phases=1, u_rated_v=230.0)],
    }
    return with_cells(
        plant(**{**given, **changes}),
        ("MSB", "Nominal voltage"),
        ("Pump", "Rated voltage"),
        ("C1", "Section"),
        ("G1", "No-load frequency"),
    )


def judged(result: LoadFlowResult) -> tuple[Verdict, ...]:
    return judge_voltage(a_plant(), result, LIMITS)


@pytest.mark.parametrize(
    ("volts", "quantity", "limit", "status"),
    [
        (450.0, "board voltage above reference", 6.0, "within"),
        (466.0, "board voltage above reference", 6.0, "close"),
        (467.0, "board voltage above reference", 6.0, "exceeds"),
        (440.0, "board voltage below reference", 10.0, "within"),
        (397.0, "board voltage below reference", 10.0, "close"),
        (395.0, "board voltage below reference", 10.0, "exceeds"),
    ],
)
def test_a_board_against_the_end_of_the_band_on_its_side(
    volts: float, quantity: str, limit: float, status: str
) -> None:
    """+6/-10 % of nominal (IACS UR E10)."""
    (v,) = judged(a_flow(boards=boards(names=("MSB",), u_v=read_only([volts]))))
    assert (v.quantity, v.limit, v.unit, v.sense, v.status) == (quantity, limit, "%", "at most", status)
    assert v.value == pytest.approx(100.0 * abs(volts / 440.0 - 1.0))
    assert v.cell == "MSB!Nominal voltage"
    assert bool(v.remedy) == (status == "exceeds")


def test_a_dead_board_has_no_voltage_to_judge() -> None:
    state = boards(names=("MSB",), energised=read_only([False], bool), u_v=read_only([NAN]))
    assert judged(a_flow(boards=state)) == ()


def test_a_band_without_room_on_one_side_is_a_limit_of_nothing() -> None:
    limits = agreed(Voltage_above=0.0)
    state = boards(names=("MSB", "DB"), u_v=read_only([440.1, 439.9]))
    high, low = judge_voltage(a_plant(), a_flow(boards=state), limits)
    assert (high.status, low.status) == ("exceeds", "within")


def terminal_of(u_v: float, **columns: Any) -> LoadFlowResult:
    return a_flow(terminals=terminals(loads=("Pump",), u_v=read_only([u_v]), **columns))


def test_a_terminal_against_the_consumer_s_rated_voltage() -> None:
    v = find(judged(terminal_of(400.0)), "Pump", "terminal voltage")
    assert v.value == pytest.approx(100.0 * (1.0 - 400.0 / 440.0))
    assert (v.quantity, v.limit, v.status) == (
        "terminal voltage below reference",
        10.0,
        "close" if v.value > 9.5 else "within",
    )
    assert v.cell == "Pump!Rated voltage"


def test_the_reference_of_acceptance_moves_the_verdict() -> None:
    """A 415 V motor at 395 V on a 440 V board: -4.8 % of its own, -10.2 % of the board's voltage."""
    flow = terminal_of(395.0, u_rated_v=read_only([415.0]))
    own = find(judged(flow), "Pump", "terminal voltage")
    of_board = find(
        judge_voltage(a_plant(), flow, agreed(Voltage_reference="nominal of board")),
        "Pump",
        "terminal voltage",
    )
    assert own.value == pytest.approx(100.0 * 20.0 / 415.0)
    assert own.status == "within"
    assert of_board.value == pytest.approx(100.0 * 45.0 / 440.0)
    assert of_board.status == "exceeds"


def test_a_line_to_neutral_consumer_sees_the_board_by_root_3() -> None:
    """230 V on a 400 V board: its reference is 400/sqrt3 = 230.9 V, not 400 V."""
    state = terminals(loads=("Lamp",), boards=("LV",), u_rated_v=read_only([230.0]), u_v=read_only([225.0]))
    limits = agreed(Voltage_reference="nominal of board")
    v = find(judge_voltage(a_plant(), a_flow(terminals=state), limits), "Lamp", "terminal voltage")
    assert v.value == pytest.approx(100.0 * (1.0 - 225.0 * math.sqrt(3.0) / 400.0))
    assert v.status == "within"


def test_voltage_drop_on_the_way() -> None:
    """6 % to any consumer (IEC 60092-201 and -352, from memory)."""
    v = find(judged(terminal_of(440.0, drop_pu=read_only([0.061]))), "Pump", "voltage drop")
    assert (v.value, v.limit, v.unit, v.status) == (pytest.approx(6.1), 6.0, "%", "exceeds")
    assert v.cell == "C1!Section"
    assert v.depends_on_data


def test_a_drop_from_nowhere_is_not_assessed() -> None:
    v = find(judged(terminal_of(440.0, drop_pu=read_only([NAN]))), "Pump", "voltage drop")
    assert v.status == "not assessed"
    assert v.basis == "no switchboard or transformer is on its way to a source"


@pytest.mark.parametrize(
    ("hz", "status"), [(61.5, "within"), (57.1, "close"), (56.9, "exceeds"), (63.1, "exceeds")]
)
def test_frequency_either_way(hz: float, status: str) -> None:
    """+/-5 % (IACS UR E10)."""
    v = find(judged(a_flow(islands=(an_island_state(hz, "G1"),))), "MSB", "frequency off rated")
    assert (v.subject, v.limit, v.status) == ("frequency", 5.0, status)
    assert v.value == pytest.approx(100.0 * abs(hz / 60.0 - 1.0))
    assert v.cell == "G1!No-load frequency"


def test_a_port_s_frequency_is_not_laid_to_the_sets() -> None:
    """The check of the load balance judges it, with a remedy that fits, whether or not the mode is solved."""
    assert judged(a_flow(islands=(an_island_state(50.0, "Shore"),))) == ()


def test_a_mode_without_a_solution_is_not_assessed() -> None:
    verdicts = judged(unsolved_flow())
    assert {(v.subject, v.status) for v in verdicts} == {
        ("voltage", "not assessed"),
        ("frequency", "not assessed"),
    }
    assert quantities(verdicts, "whole plant") == {"voltage of boards and terminals", "frequency"}
