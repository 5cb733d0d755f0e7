"""What is energised: switches, breakers, second feeds, islands, rings of transformers."""

from __future__ import annotations

import pytest

from study.issues import WorkbookError
from study.model.plant import Plant
from study.network.topology import build_topology
from study.network.view import DEAD, view_of
from tests.plants import (
    board,
    cable,
    converter_supply,
    device,
    genset,
    load,
    mode,
    plant,
    small_plant,
    tie,
    transfer,
    transformer,
)


def three_boards(**changes: object) -> Plant:
    """Return two main boards, an emergency board with its own set, and a board behind a transformer."""
    given = {
        "boards": [board("MSB1"), board("MSB2"), board("ESB", role="emergency"), board("LB", 230.0)],
        "gensets": [genset("G1", "MSB1"), genset("G2", "MSB2"), genset("EG", "ESB")],
        "ties": [tie("BT", "MSB1", "MSB2"), tie("IC", "MSB2", "ESB")],
        "transformers": [transformer("T1", "ESB", "LB")],
        "loads": [load("Pump", "MSB1"), load("Steering gear", "MSB1")],
        "cables": [cable("C-G1", "G1", "MSB1"), cable("C-Pump", "MSB1", "Pump")],
        "transfers": [transfer("ESB", "IC", "EG"), transfer("Steering gear", "MSB1", "ESB")],
    }
    return plant(**{**given, **changes})


def energised(p: Plant, states: dict[str, str]) -> dict[str, bool]:
    view = view_of(p, mode(states=states))
    return dict(zip([b.name for b in p.boards], view.board_energised, strict=True))


def test_closed_ties_make_one_island_and_one_bus() -> None:
    p = three_boards()
    view = view_of(p, mode())
    assert [i.boards for i in view.islands] == [("MSB1", "MSB2", "ESB", "LB")]
    assert view.bus[0] == view.bus[1] == view.bus[2] != view.bus[3]


def test_an_open_tie_makes_two_islands() -> None:
    view = view_of(three_boards(), mode(states={"BT": "off"}))
    assert [i.boards for i in view.islands] == [("MSB1",), ("MSB2", "ESB", "LB")]
    assert [i.sources for i in view.islands] == [("G1",), ("G2",)]


def test_a_breaker_that_is_off_opens_what_it_stands_on() -> None:
    p = three_boards(devices=[device("Q-BT", "BT"), device("Q-T1", "T1")])
    view = view_of(p, mode(states={"Q-BT": "off"}))
    assert len(view.islands) == 2
    assert energised(p, {"Q-T1": "off"})["LB"] is False


def test_the_emergency_set_stays_off_line_while_the_normal_supply_is_live() -> None:
    view = view_of(three_boards(), mode())
    assert "EG" not in view.sources


def test_a_dead_normal_supply_brings_the_other_one() -> None:
    view = view_of(three_boards(), mode(states={"G1": "off", "G2": "off"}))
    assert view.sources == ("EG",)
    assert view.board_energised == (False, False, True, True)
    assert [(f.target, f.used) for f in view.feeds] == [("ESB", "EG"), ("Steering gear", "ESB")]
    assert view.load_fed == (False, True)
    assert any("ESB is fed by EG" in text for text in view.findings)


def test_the_emergency_set_never_feeds_back_through_its_normal_supply() -> None:
    view = view_of(three_boards(), mode(states={"G1": "off", "G2": "off", "IC": "on"}))
    assert view.board_island[0] == view.board_island[1] == DEAD


def test_a_transfer_by_hand_needs_the_normal_supply_switched_off() -> None:
    by_hand = [transfer("ESB", "IC", "EG", automatic=False)]
    p = three_boards(transfers=by_hand)
    dead = {"G1": "off", "G2": "off"}
    assert energised(p, dead)["ESB"] is False
    assert energised(p, {**dead, "IC": "off"})["ESB"] is True
    assert any("not automatic" in text for text in view_of(p, mode(states=dead)).findings)


def test_a_set_on_standby_feeds_nothing() -> None:
    states = {"G1": "off", "G2": "off", "EG": "standby"}
    assert not any(energised(three_boards(), states).values())


def test_a_load_moves_to_the_board_of_its_second_feed() -> None:
    p = three_boards(transfers=[transfer("Steering gear", "MSB1", "MSB2")])
    view = view_of(p, mode(states={"BT": "off", "G1": "off"}))
    assert view.load_node[1] == 1
    assert view.load_fed == (False, True)


def test_the_cable_of_the_feed_not_in_use_is_open() -> None:
    cables = [cable("Normal", "MSB1", "Steering gear"), cable("Alternative", "ESB", "Steering gear")]
    p = three_boards(cables=cables)
    names = [b.name for b in build_topology(p).branches]
    closed = dict(zip(names, view_of(p, mode()).closed, strict=True))
    assert closed["Normal"]
    assert not closed["Alternative"]
    closed = dict(zip(names, view_of(p, mode(states={"G1": "off", "G2": "off"})).closed, strict=True))
    assert not closed["Normal"]
    assert closed["Alternative"]


def test_a_supply_that_only_follows_the_grid_makes_nothing_live() -> None:
    p = plant(
        boards=[board("B")], converter_supplies=[converter_supply("Battery", "B", control="grid following")]
    )
    view = view_of(p, p.modes[0])
    assert view.board_energised == (False,)
    assert view.sources == ()
    assert any("nothing forms one" in text for text in view.findings)


def test_a_set_that_nothing_joins_to_a_board_is_named() -> None:
    p = three_boards()
    view = view_of(p, mode(states={"C-G1": "off"}))
    assert "G1" not in view.sources
    assert any(text.startswith("G1 is on") for text in view.findings)


def test_transformers_of_one_vector_group_may_close_a_ring() -> None:
    both = [transformer("T1", "MSB", "LB"), transformer("T2", "MSB", "LB")]
    view = view_of(_ring(both), mode())
    assert view.islands[0].refusal == ""


def test_transformers_of_different_vector_group_may_not() -> None:
    both = [transformer("T1", "MSB", "LB"), transformer("T2", "MSB", "LB", vector_group="Dyn5")]
    view = view_of(_ring(both), mode())
    assert "vector group" in view.islands[0].refusal


def test_two_shifts_that_add_up_to_the_third_close_a_ring() -> None:
    """IEC 60076-1: Dyn11 then Dyn1 bring the hour back to where Yy0 leaves it."""
    boards = [board("MSB"), board("M", 690.0), board("LB", 230.0)]
    chain = [
        transformer("T1", "MSB", "M", u_secondary_v=690.0),
        transformer("T2", "M", "LB", u_primary_v=690.0, vector_group="Dyn1"),
        transformer("T3", "MSB", "LB", vector_group="Yyn0"),
    ]
    p = plant(boards=boards, gensets=[genset("G", "MSB")], transformers=chain)
    assert view_of(p, p.modes[0]).islands[0].refusal == ""


def _ring(transformers: list[object]) -> Plant:
    boards = [board("MSB"), board("LB", 230.0)]
    return plant(boards=boards, gensets=[genset("G", "MSB")], transformers=transformers)


def test_a_cable_whose_ends_do_not_meet_is_a_fault_with_its_cell() -> None:
    p = three_boards(cables=[cable("C1", "G1", "MSB2", cell="Cables!A7")])
    with pytest.raises(WorkbookError, match="C1 joins G1") as caught:
        build_topology(p)
    assert caught.value.issues[0].address == "Cables!A7"


def test_boards_of_two_voltages_need_a_transformer() -> None:
    p = plant(boards=[board("A"), board("B", 690.0)], ties=[tie("T", "A", "B")])
    with pytest.raises(WorkbookError, match="B is 690 V and A 440 V"):
        build_topology(p)


def test_a_piece_without_a_cable_sits_on_its_board() -> None:
    topology = build_topology(small_plant())
    assert topology.node_of["G1"] == topology.node_of["Pump"] == topology.node_of["MSB"]
