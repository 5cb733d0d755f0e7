"""Each verdict on currents and powers of the load flow."""

from __future__ import annotations

import math
from typing import Any

import pytest

from study.checks.loading import judge_loading
from study.checks.verdict import Verdict
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.load_flow import LoadFlowResult
from tests.checks.results import (
    LIMITS,
    NAN,
    a_flow,
    agreed,
    boards,
    branches,
    find,
    quantities,
    sources,
    unsolved_flow,
    with_cells,
)
from tests.plants import board, cable, genset, plant, shore, three_winding, tie

RATED = "Rated apparent power"


def a_plant(**changes: Any) -> Plant:
    given: dict[str, Any] = {
        "boards": [board("MSB"), board("HV", 6600.0), board("LV1", 690.0), board("LV2", 690.0)],
        "gensets": [genset("G1", "MSB"), genset("G2", "MSB", reversed_polarity=True)],
        "shore_supplies": [shore("Shore", "MSB")],
        "cables": [cable("C1", "MSB", "MSB"), cable("C2", "MSB", "MSB", rating_a=300.0)],
        "ties": [tie("BT", "MSB", "MSB")],
        "three_winding": [three_winding("DT", "HV", "LV1", "LV2", s_tertiary_kva=800.0)],
    }
    p = plant(**{**given, **changes})
    headings = {
        "G1": (RATED, "Engine power", "Excitation ceiling", "No-load frequency"),
        "Shore": ("Rated current",),
        "C1": ("Section", "Current rating"),
        "C2": ("Section", "Current rating"),
        "BT": ("Rated current",),
        "T1": ("Rated power",),
        "DT": ("Primary power", "Secondary power", "Tertiary power"),
        "MSB": ("Busbar rated current",),
    }
    return with_cells(p, *((name, heading) for name, found in headings.items() for heading in found))


def judged(result: LoadFlowResult, **changes: Any) -> tuple[Verdict, ...]:
    return judge_loading(a_plant(**changes), result, LIMITS)


def test_a_mode_without_a_solution_exceeds() -> None:
    (v,) = judged(unsolved_flow("the load exceeds what the engines can give."))
    assert (v.equipment, v.status, v.subject) == ("whole plant", "exceeds", "loading")
    assert v.basis == "the load exceeds what the engines can give."


def test_kw_and_kva_of_a_set() -> None:
    state = sources(names=("G1",), kw_loading=read_only([0.97]), kva_loading=read_only([1.03]))
    verdicts = judged(a_flow(sources=state))
    kw, kva = find(verdicts, "G1", "loading in kW"), find(verdicts, "G1", "loading in kVA")
    assert (kw.value, kw.limit, kw.unit, kw.status) == (97.0, 100.0, "%", "close")
    assert (kva.value, kva.status) == (103.0, "exceeds")
    assert kva.depends_on_data
    assert kva.cell == "G1!Rated apparent power"
    assert kva.remedy


def test_a_shore_supply_is_judged_by_current_alone() -> None:
    state = sources(names=("Shore",), kinds=("shore supply",), kva_loading=read_only([1.01]))
    verdicts = judged(a_flow(sources=state))
    v = find(verdicts, "Shore", "loading in current")
    assert (v.status, v.cell) == ("exceeds", "Shore!Rated current")
    assert quantities(verdicts, "Shore") == {"loading in current by the load flow"}


def test_a_converter_that_charges_is_no_reverse_power() -> None:
    state = sources(names=("B",), kinds=("converter supply",), p_kw=read_only([-300.0]))
    assert quantities(judged(a_flow(sources=state)), "B") == {"loading in kVA by the load flow"}


def test_a_set_that_is_driven_exceeds() -> None:
    state = sources(names=("G1",), p_kw=read_only([-40.0]), kw_loading=read_only([-0.05]))
    verdicts = judged(a_flow(sources=state))
    v = find(verdicts, "G1", "reverse power")
    assert (v.value, v.limit, v.unit, v.status) == (5.0, 0.0, "%", "exceeds")
    assert v.cell == "G1!No-load frequency"
    idle = sources(names=("G1",), p_kw=read_only([-1e-9]), kw_loading=read_only([0.0]))
    assert not [x for x in judged(a_flow(sources=idle)) if x.quantity.startswith("reverse")]


@pytest.mark.parametrize(
    ("by", "cell"),
    [("engine", "G1!Engine power"), ("excitation", "G1!Excitation ceiling"), ("current", "G1!" + RATED)],
)
def test_a_source_held_at_a_limit_exceeds(by: str, cell: str) -> None:
    v = find(judged(a_flow(sources=sources(names=("G1",), limited_by=(by,)))), "G1", "held at its")
    assert (v.quantity, v.status, v.cell) == (f"held at its {by} limit", "exceeds", cell)
    assert v.remedy == "Run one more source or correct the sharing."


def test_a_reversed_droop_circuit_has_its_own_cure() -> None:
    v = find(judged(a_flow(sources=sources(names=("G2",), limited_by=("excitation",)))), "G2", "held at its")
    assert v.remedy == "Turn the current transformer of its droop circuit round."


def test_a_cable_s_current_against_its_rating() -> None:
    state = branches(
        names=("C1", "C2", "C3"),
        current_a=read_only([210.0, 310.0, 5.0]),
        rating_a=read_only([232.0, 300.0, NAN]),
    )
    verdicts = judged(a_flow(branches=state))
    first, second, third = (find(verdicts, name, "current") for name in ("C1", "C2", "C3"))
    assert (first.subject, first.value, first.limit, first.unit) == ("cables", 210.0, 232.0, "A")
    assert (first.status, first.cell) == ("within", "C1!Section")
    assert first.margin == pytest.approx(22.0 / 232.0)
    assert (second.status, second.cell) == ("exceeds", "C2!Current rating")
    assert (third.status, third.basis) == (
        "not assessed",
        "IEC 60092-352 does not rate it and no current rating is given",
    )


def test_a_lower_permitted_loading_lowers_the_amperes() -> None:
    state = branches(names=("C1",), current_a=read_only([210.0]), rating_a=read_only([232.0]))
    v = find(judge_loading(a_plant(), a_flow(branches=state), agreed(Cable_loading=90.0)), "C1", "current")
    assert v.limit == pytest.approx(208.8)
    assert v.status == "exceeds"
    assert v.basis == "agreed for this project: owner"


@pytest.mark.parametrize("kind", ["transformer", "tie", "reactor"])
def test_transformers_ties_and_reactors_are_loading(kind: str) -> None:
    state = branches(names=("X",), kinds=(kind,), current_a=read_only([99.0]), rating_a=read_only([100.0]))
    v = find(judged(a_flow(branches=state)), "X", "current")
    assert (v.subject, v.status) == ("loading", "close")


def test_a_tie_without_a_rating_is_not_assessed() -> None:
    state = branches(names=("BT",), kinds=("tie",), current_a=read_only([900.0]), rating_a=read_only([NAN]))
    v = find(judged(a_flow(branches=state)), "BT", "current")
    assert (v.status, v.basis, v.cell) == ("not assessed", "no rated current given", "BT!Rated current")


def test_a_tie_in_a_ring_is_not_passed_over() -> None:
    state = branches(
        names=("BT",),
        kinds=("tie",),
        current_a=read_only([NAN]),
        rating_a=read_only([2000.0]),
        determined=read_only([False], bool),
    )
    v = find(judged(a_flow(branches=state)), "BT", "current")
    assert v.status == "not assessed"
    assert "closed ring of ties without impedance" in v.basis


def test_a_three_winding_transformer_names_its_winding() -> None:
    """800 kVA at 690 V is 669.4 A: the tertiary's rated current."""
    rated = 800e3 / (math.sqrt(3.0) * 690.0)
    state = branches(
        names=("DT",),
        kinds=("three-winding transformer",),
        current_a=read_only([700.0]),
        rating_a=read_only([rated]),
    )
    v = find(judged(a_flow(branches=state)), "DT", "current")
    assert (v.quantity, v.cell, v.status) == (
        "current of its tertiary winding",
        "DT!Tertiary power",
        "exceeds",
    )


def test_two_equal_windings_are_both_named() -> None:
    rated = 1000e3 / (math.sqrt(3.0) * 690.0)
    state = branches(
        names=("DT",),
        kinds=("three-winding transformer",),
        current_a=read_only([700.0]),
        rating_a=read_only([rated]),
    )
    verdicts = judged(a_flow(branches=state), three_winding=[three_winding("DT", "HV", "LV1", "LV2")])
    assert find(verdicts, "DT", "current").quantity == "current of its secondary or tertiary winding"


def test_busbar_current_against_its_rating() -> None:
    state = boards(
        names=("MSB", "DB", "DEAD", "RING"),
        energised=read_only([True, True, False, True], bool),
        busbar_current_a=read_only([2501.0, 400.0, NAN, NAN]),
        busbar_rated_a=read_only([2500.0, NAN, 800.0, 800.0]),
    )
    verdicts = judged(a_flow(boards=state))
    main, sub = find(verdicts, "MSB", "busbar current"), find(verdicts, "DB", "busbar current")
    assert (main.value, main.limit, main.unit, main.status) == (2501.0, 2500.0, "A", "exceeds")
    assert main.cell == "MSB!Busbar rated current"
    assert (sub.status, sub.basis) == ("not assessed", "no busbar rated current given")
    assert not quantities(verdicts, "DEAD")
    ring = find(verdicts, "RING", "busbar current")
    assert ring.status == "not assessed"
    assert "ring of ties" in ring.basis
