"""Each verdict on the load balance: value, limit, sense, unit, margin, cell, remedy."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import pytest

from study.checks.capacity import judge_capacity
from study.checks.verdict import Verdict
from study.model.plant import Plant
from study.results.balance import BalanceResult, EmergencyDuty, MainSetOut, RestartStep
from tests.checks.results import (
    LIMITS,
    a_balance,
    a_loss,
    a_set,
    agreed,
    an_island,
    find,
    quantities,
    with_cells,
)
from tests.plants import board, converter_supply, genset, load, plant, shore

RATED = "Rated apparent power"


def a_plant(**changes: Any) -> Plant:
    given: dict[str, Any] = {
        "boards": [board("MSB")],
        "gensets": [genset("G1", "MSB"), genset("G2", "MSB"), genset("EG", "MSB", service="emergency")],
        "shore_supplies": [shore("Shore", "MSB", f_hz=50.0)],
        "loads": [load("Thruster", "MSB")],
    }
    return with_cells(
        plant(**{**given, **changes}),
        ("G1", RATED),
        ("G1", "Minimum engine load"),
        ("EG", RATED),
        ("EG", "Start delay"),
        ("Shore", "Rated current"),
        ("Shore", "Frequency"),
        ("Thruster", "Rated output"),
        ("Thruster", "Restart delay after blackout"),
        ("Battery", "Stored energy"),
    )


def judged(result: BalanceResult, **changes: Any) -> tuple[Verdict, ...]:
    return judge_capacity(a_plant(**changes), result, LIMITS)


def test_load_on_the_sets_on_line() -> None:
    verdicts = judged(a_balance(an_island(kw_loading=1.02, kva_loading=0.96), sets=(a_set(),)))
    kw, kva = find(verdicts, "all boards", "loading in kW"), find(verdicts, "all boards", "loading in kVA")
    assert (kw.value, kw.limit, kw.unit, kw.sense, kw.status) == (102.0, 100.0, "%", "at most", "exceeds")
    assert kw.margin == pytest.approx(-0.02)
    assert kw.cell == "G1!Rated apparent power"
    assert kw.remedy == "Run 2 sets (G1, G2), or shed load."
    assert kw.depends_on_data  # 5 % less load would fit
    assert (kva.status, kva.remedy) == ("close", "")


def test_several_islands_are_named_by_their_first_board() -> None:
    verdicts = judged(a_balance(an_island(), an_island(island=1, boards=("ESB",))))
    assert find(verdicts, "MSB", "loading in kW").status == "within"
    assert find(verdicts, "ESB", "loading in kW").status == "within"


def test_an_island_without_capacity_exceeds() -> None:
    verdicts = judged(a_balance(an_island(kw_loading=math.inf, kva_loading=math.inf)))
    assert find(verdicts, "all boards", "loading in kW").status == "exceeds"


def test_in_an_emergency_the_remedy_is_no_main_set() -> None:
    verdicts = judged(a_balance(an_island(kw_loading=1.2), kind="emergency"))
    assert "G1" not in find(verdicts, "all boards", "loading in kW").remedy


def test_load_without_supply_exceeds() -> None:
    v = find(judged(a_balance(p_unfed_kw=12.5)), "dead boards", "load in use without supply")
    assert (v.value, v.limit, v.unit, v.status) == (12.5, 0.0, "kW", "exceeds")


def test_shore_supply_by_its_current_and_its_frequency() -> None:
    """50 Hz for a 60 Hz plant is off by a sixth; the current is held against the connection's."""
    island = an_island(shore="Shore", shore_current_a=780.0, shore_rated_a=800.0)
    verdicts = judged(a_balance(island, kind="shore"))
    current = find(verdicts, "Shore", "current of the shore supply")
    assert (current.value, current.limit, current.unit, current.status) == (780.0, 800.0, "A", "close")
    assert current.cell == "Shore!Rated current"
    frequency = find(verdicts, "Shore", "frequency of the shore supply off rated")
    assert (frequency.subject, frequency.status) == ("frequency", "exceeds")
    assert frequency.value == pytest.approx(100.0 / 6.0)
    assert frequency.limit == 5.0
    assert frequency.cell == "Shore!Frequency"
    assert not [v for v in verdicts if "sets on line" in v.quantity]


def test_shore_supply_of_the_vessel_s_frequency_is_within() -> None:
    island = an_island(shore="Shore", shore_current_a=780.0, shore_rated_a=800.0)
    verdicts = judged(a_balance(island, kind="shore"), shore_supplies=[shore("Shore", "MSB")])
    assert find(verdicts, "Shore", "frequency").value == 0.0


def test_a_lower_supply_loading_lowers_the_amperes() -> None:
    island = an_island(shore="Shore", shore_current_a=780.0, shore_rated_a=800.0)
    verdicts = judge_capacity(a_plant(), a_balance(island), agreed(Shore_and_converter_supply_loading=90.0))
    current = find(verdicts, "Shore", "current")
    assert (current.limit, current.status) == (720.0, "exceeds")
    assert current.basis.startswith("agreed for this project")


# ---- loss of the largest set


def test_with_sets_left_the_least_loading_of_the_trip_stages_decides() -> None:
    """SOLAS II-1/41.5.2, from memory: shedding protects what is left on line; the standby comes later."""
    loss = (
        a_loss("at once", 1.4, "G2"),
        a_loss("after trip stage 1", 1.1, "G2"),
        a_loss("after trip stage 2", 1.04, "G2", kva_loading=1.05),
        a_loss("standby started", 0.7, "G2", "G3"),
    )
    better = (a_loss("at once", 0.7, "G2", "G3"),)
    v = find(judged(a_balance(an_island(loss=loss, loss_with_standby=better))), "G1", "loading after loss")
    assert v.quantity == "loading after loss of the largest set, after trip stage 2"
    assert (v.value, v.limit, v.unit, v.status) == (105.0, 100.0, "%", "exceeds")
    assert v.cell == "G1!Rated apparent power"


def test_where_nothing_is_shed_the_first_stage_is_named() -> None:
    loss = tuple(a_loss(s, 0.9, "G2") for s in ("at once", "after trip stage 1", "after trip stage 2"))
    v = find(judged(a_balance(an_island(loss=loss))), "G1", "loading after loss")
    assert v.quantity.endswith(", at once")


BLACKOUT = tuple(a_loss(s, math.inf) for s in ("at once", "after trip stage 1", "after trip stage 2"))


def test_the_only_set_of_one_of_several_sections_is_judged_by_what_it_alone_serves() -> None:
    """SOLAS II-1/41.5.1, from memory: what is essential is kept up by the other sections."""
    kept = an_island(loss=BLACKOUT, services_lost=())
    assert not [x for x in judged(a_balance(kept)) if x.status == "exceeds"]
    lost = an_island(loss=BLACKOUT, services_lost=("propulsion (Pumps)",))
    v = find(judged(a_balance(lost)), "G1", "with it its section")
    assert v.status == "exceeds"
    assert v.quantity.endswith("(MSB), and nowhere else served: propulsion (Pumps)")
    assert v.cell == "G1!Rated apparent power"
    assert not [x for x in judged(a_balance(lost, kind="harbour")) if "section" in x.quantity]


def test_after_a_blackout_the_standby_carries_what_the_trips_leave() -> None:
    with_standby = (
        a_loss("at once", 1.2, "G2"),
        a_loss("after trip stage 1", 0.9, "G2"),
        a_loss("after trip stage 2", 0.8, "G2"),
    )
    island = an_island(loss=(*BLACKOUT, a_loss("standby started", 1.2, "G2")), loss_with_standby=with_standby)
    v = find(judged(a_balance(island)), "G1", "loading after loss")
    assert v.quantity == "loading after loss of the largest set, standby started, after trip stage 2"
    assert (v.value, v.status) == (80.0, "within")


@pytest.mark.parametrize("kind", ["sea", "manoeuvring", "station keeping"])
def test_under_way_a_single_set_without_standby_exceeds(kind: str) -> None:
    v = find(judged(a_balance(an_island(loss=BLACKOUT), kind=kind)), "G1", "loading after loss")
    assert v.quantity.endswith(", no set left")
    assert (v.value, v.status) == (math.inf, "exceeds")
    assert "let one stand by" in v.remedy


@pytest.mark.parametrize("kind", ["harbour", "cargo", "shore"])
def test_in_port_a_single_set_may_run_without_standby(kind: str) -> None:
    verdicts = judged(a_balance(an_island(loss=BLACKOUT), kind=kind))
    assert not [v for v in verdicts if "loss" in v.quantity]


def test_in_port_two_sets_are_still_judged() -> None:
    loss = (a_loss("at once", 1.3, "G2"),)
    assert (
        find(judged(a_balance(an_island(loss=loss), kind="cargo")), "G1", "loading after").status == "exceeds"
    )


# ---- load step, one set out, minimum load, restart


def test_largest_load_switched_against_the_engines_step() -> None:
    island = an_island(largest_step_load="Thruster", largest_step_kw=410.0)
    v = find(judged(a_balance(island)), "Thruster", "largest load switched")
    assert (v.value, v.limit, v.unit, v.status) == (410.0, 400.0, "kW", "exceeds")
    assert v.cell == "Thruster!Rated output"
    assert not [x for x in judged(a_balance(an_island())) if "largest load switched" in x.quantity]


def test_any_one_main_set_out() -> None:
    row = MainSetOut(
        out="G1",
        p_load_kw=700.0,
        q_load_kvar=500.0,
        p_capacity_kw=800.0,
        s_capacity_kva=1000.0,
        kw_loading=0.875,
        kva_loading=0.86,
    )
    v = find(judged(a_balance(main_set_out=(row,))), "G1", "essential load")
    assert (v.value, v.limit, v.unit, v.status) == (87.5, 100.0, "%", "within")
    assert "SOLAS II-1/41" in v.basis
    alone = replace(row, kw_loading=math.inf)
    assert find(judged(a_balance(main_set_out=(alone,))), "G1", "essential load").status == "exceeds"


@pytest.mark.parametrize(
    ("loading", "status"), [(0.20, "exceeds"), (0.255, "close"), (0.40, "within"), (-0.1, "exceeds")]
)
def test_minimum_engine_load_is_a_lower_limit(loading: float, status: str) -> None:
    v = find(judged(a_balance(sets=(a_set(engine_loading=loading),))), "G1", "engine load, at least")
    assert (v.subject, v.sense, v.unit, v.limit) == ("loading", "at least", "%", 25.0)
    assert v.value == pytest.approx(100.0 * loading)
    assert v.status == status
    assert v.cell == "G1!Minimum engine load"


def test_minimum_engine_load_is_asked_of_running_engines_only() -> None:
    rows = (
        a_set("G1", state="standby", engine_loading=0.0),
        a_set("Shore", kind="shore supply", engine_loading=math.nan),
        a_set("G2", engine_loading=0.5),
    )
    found = {v.equipment for v in judged(a_balance(sets=rows)) if v.quantity.startswith("engine load")}
    assert found == {"G2"}


def test_an_emergency_set_has_no_least_load_in_an_emergency() -> None:
    rows = (a_set("EG", engine_loading=0.1),)
    assert not quantities(judged(a_balance(sets=rows, kind="emergency")), "EG")
    assert quantities(judged(a_balance(sets=rows, kind="harbour")), "EG") == {"engine load, at least"}


def a_step(number: int = 1, **changes: Any) -> RestartStep:
    start = RestartStep(
        step=number,
        at_s=30.0,
        loads=("Thruster",),
        p_step_kw=300.0,
        p_total_kw=300.0,
        step_capability_kw=400.0,
    )
    return replace(start, **changes)


def test_restart_in_steps_and_in_time() -> None:
    """45 s: SOLAS II-1/41.5.1.1, from memory; the first step of an island says when its board is live."""
    steps = (a_step(), a_step(2, at_s=60.0, p_step_kw=420.0), a_step(3, at_s=50.0, island=1))
    verdicts = judged(a_balance(restart=steps))
    second = find(verdicts, "restart step 2", "load connected")
    assert (second.value, second.limit, second.unit, second.status) == (420.0, 400.0, "kW", "exceeds")
    assert second.remedy == "Spread the restart delays of Thruster (sheet Loads)."
    assert second.cell == "Thruster!Restart delay after blackout"
    first = find(verdicts, "restart step 1", "first set on the board")
    assert (first.value, first.limit, first.unit, first.status) == (30.0, 45.0, "s", "within")
    assert find(verdicts, "restart step 3", "first set on the board").status == "exceeds"
    assert quantities(verdicts, "restart step 2") == {"load connected in one step after a blackout"}


# ---- emergency


def a_duty(**changes: Any) -> EmergencyDuty:
    start = EmergencyDuty(
        genset="EG",
        mode="Emergency",
        p_load_kw=816.0,
        q_load_kvar=300.0,
        p_rated_kw=800.0,
        s_rated_kva=1000.0,
        kw_loading=1.02,
        kva_loading=0.87,
        hours_required=18.0,
        hours_basis="SOLAS II-1/43",
    )
    return replace(start, **changes)


def test_the_emergency_list_and_the_start_of_the_emergency_set() -> None:
    verdicts = judged(a_balance(emergency=(a_duty(),)))
    kw = find(verdicts, "EG", "loading in kW by the emergency list")
    assert (kw.mode, kw.value, kw.limit, kw.status) == ("Emergency", 102.0, 100.0, "exceeds")
    assert kw.basis == "SOLAS II-1/43: 18 h"
    assert kw.cell == "EG!Rated apparent power"
    start = find(verdicts, "EG", "start of the emergency set")
    assert (start.value, start.limit, start.unit, start.status) == (30.0, 45.0, "s", "within")
    assert start.cell == "EG!Start delay"
    slow = [genset("EG", "MSB", service="emergency", start_delay_s=50.0)]
    late = find(judged(a_balance(emergency=(a_duty(),)), gensets=slow), "EG", "start of")
    assert late.status == "exceeds"


@pytest.mark.parametrize(("kwh", "status"), [(500.0, "within"), (440.0, "exceeds"), (None, "not assessed")])
def test_a_battery_lasts_for_the_emergency_s_hours(kwh: float | None, status: str) -> None:
    """25 kW for 18 h is 450 kWh (SOLAS II-1/43, cargo ships)."""
    row = a_set("Battery", kind="converter supply", p_kw=25.0)
    battery = converter_supply("Battery", "MSB", stored_energy_kwh=kwh)
    result = a_balance(sets=(row,), kind="emergency")
    v = find(judged(result, converter_supplies=[battery]), "Battery", "energy drawn in 18 h")
    assert (v.value, v.unit, v.status) == (450.0, "kWh", status)
    if kwh is None:
        assert v.basis == "no stored energy given"
    elsewhere = judged(a_balance(sets=(row,)), converter_supplies=[battery])
    assert not quantities(elsewhere, "Battery")
