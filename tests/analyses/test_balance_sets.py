"""Sets against load: sharing, capacity, fewest sets, load steps, shore supply."""

from __future__ import annotations

import math
from typing import Any

import pytest

from study.analyses.balance import BalanceOptions, load_balance
from study.model.modes import Interlock
from study.network.view import view_of
from study.results.balance import BalanceResult, IslandBalance
from tests.plants import (
    board,
    converter_supply,
    demand,
    genset,
    load,
    mode,
    plant,
    set_point,
    shore,
    tie,
)


def balance(p: Any, **options: float) -> BalanceResult:
    return load_balance(p, [view_of(p, m) for m in p.modes], BalanceOptions(**options))  # type: ignore[arg-type]


def island(p: Any, **options: float) -> IslandBalance:
    islands = balance(p, **options).modes[0].islands
    assert len(islands) == 1
    return islands[0]


def heaters(*kw: float, on: str = "MSB") -> list[Any]:
    return [load(f"H{i} {on}", on, kind="heating", p_rated_kw=p) for i, p in enumerate(kw)]


def inductive(p_kw: float, cos_phi: float, name: str = "L", on: str = "MSB", **changes: Any) -> Any:
    return load(name, on, kind="general", p_rated_kw=p_kw, cos_phi=cos_phi, **changes)


def one_board(sources: dict[str, list[Any]], loads: list[Any], **mode_changes: Any) -> Any:
    """Return a plant of one board; `states` and other changes go to its one mode."""
    demands = mode_changes.pop("demand", {x.name: demand(float(x.installed)) for x in loads})
    more = {k: mode_changes.pop(k) for k in ("interlocks", "project") if k in mode_changes}
    return plant(
        boards=[board("MSB")], loads=loads, modes=[mode(demand=demands, **mode_changes)], **sources, **more
    )


def test_rated_power_of_a_set_is_the_lesser_of_alternator_and_engine() -> None:
    # alternator 1000*0.8 = 800 kW; engine 700*0.95 = 665 kW decides
    p = one_board({"gensets": [genset("G1", "MSB", p_engine_kw=700.0)]}, heaters(332.5))
    row = balance(p).modes[0].sets[0]
    assert row.p_rated_kw == pytest.approx(665.0)
    assert row.engine_loading == pytest.approx(0.5)
    assert row.alternator_loading == pytest.approx(0.3325)


def test_unequal_sets_share_in_proportion_to_their_ratings() -> None:
    # 800 + 400 kW rated, load 600 kW + 450 kvar: 400/200 kW, 300/150 kvar
    sets = [genset("G1", "MSB"), genset("G2", "MSB", s_rated_kva=500.0, p_engine_kw=430.0)]
    rows = balance(one_board({"gensets": sets}, [inductive(600.0, 0.8)])).modes[0].sets
    assert [r.p_kw for r in rows] == pytest.approx([400.0, 200.0])
    assert [r.q_kvar for r in rows] == pytest.approx([300.0, 150.0])
    assert [r.s_kva for r in rows] == pytest.approx([500.0, 250.0])
    assert [r.cos_phi for r in rows] == pytest.approx([0.8, 0.8])
    # engines 860 and 430 kW at an alternator efficiency of 0.95: 400/817 and 200/408.5
    assert [r.engine_loading for r in rows] == pytest.approx([400.0 / 817.0, 200.0 / 408.5])


def test_a_set_power_is_given_and_the_others_take_the_rest() -> None:
    sets = [genset(f"G{i}", "MSB") for i in (1, 2, 3)]
    p = one_board({"gensets": sets}, heaters(1000.0), set_points=[set_point("G1", p_set_kw=200.0)])
    assert [r.p_kw for r in balance(p).modes[0].sets] == pytest.approx([200.0, 400.0, 400.0])


def test_set_powers_that_do_not_add_up_are_said_and_shared() -> None:
    # 200 + 300 set, load 600: the 100 kW left over go half and half by equal ratings
    sets = [genset("G1", "MSB"), genset("G2", "MSB")]
    points = [set_point("G1", p_set_kw=200.0), set_point("G2", p_set_kw=300.0)]
    result = balance(one_board({"gensets": sets}, heaters(600.0), set_points=points)).modes[0]
    assert [r.p_kw for r in result.sets] == pytest.approx([250.0, 350.0])
    assert any("set powers on MSB make 500 kW and the load 600 kW" in f for f in result.findings)


def test_set_in_kvar_control_gives_its_set_kvar_or_its_rated_power_factor() -> None:
    sets = [genset("G1", "MSB", regulator_mode="kvar control"), genset("G2", "MSB")]
    loads = [inductive(800.0, 0.8)]  # 600 kvar
    free = balance(one_board({"gensets": sets}, loads)).modes[0].sets
    assert [r.q_kvar for r in free] == pytest.approx([400.0 * 0.75, 300.0])
    held = one_board({"gensets": sets}, loads, set_points=[set_point("G1", q_set_kvar=100.0)])
    assert [r.q_kvar for r in balance(held).modes[0].sets] == pytest.approx([100.0, 500.0])


def test_a_charging_battery_is_a_load_of_the_sets_and_lessens_the_capacity() -> None:
    battery = converter_supply("B1", "MSB", control="grid following", p_set_kw=-150.0)
    p = one_board({"gensets": [genset("G1", "MSB")], "converter_supplies": [battery]}, heaters(400.0))
    result = balance(p).modes[0]
    assert {r.name: r.p_kw for r in result.sets} == pytest.approx({"G1": 550.0, "B1": -150.0})
    assert result.islands[0].spare_kw == pytest.approx(800.0 - 150.0 - 400.0)
    assert any("B1 takes 150 kW by its set power" in f for f in result.findings)


def test_set_driven_by_a_set_power_above_the_load_is_said() -> None:
    sets = [genset("G1", "MSB"), genset("G2", "MSB")]
    p = one_board({"gensets": sets}, heaters(300.0), set_points=[set_point("G1", p_set_kw=400.0)])
    assert any(f.startswith("G2 would be driven with 100 kW") for f in balance(p).modes[0].findings)


def test_island_loading_in_kw_and_kva() -> None:
    # 900 kW at 0.6: 1200 kvar, 1500 kVA on 2 x 800 kW, 2 x 1000 kVA
    got = island(one_board({"gensets": [genset("G1", "MSB"), genset("G2", "MSB")]}, [inductive(900.0, 0.6)]))
    assert got.kw_loading == pytest.approx(0.5625)
    assert got.kva_loading == pytest.approx(0.75)
    assert got.spare_kw == pytest.approx(700.0)


def test_open_tie_makes_two_islands_with_their_own_balance() -> None:
    loads = [*heaters(300.0, on="A"), *heaters(500.0, on="B")]
    p = plant(
        boards=[board("A"), board("B")],
        gensets=[genset("G1", "A"), genset("G2", "B")],
        ties=[tie("BT", "A", "B")],
        loads=loads,
        modes=[
            mode("Split", {"BT": "off"}, {x.name: demand() for x in loads}),
            mode("Joined", {}, {x.name: demand() for x in loads}),
        ],
    )
    split, joined = balance(p).modes
    assert [(i.boards, i.p_load_kw) for i in split.islands] == [(("A",), 300.0), (("B",), 500.0)]
    assert [r.p_kw for r in split.sets] == pytest.approx([300.0, 500.0])
    assert [r.island for r in split.sets] == [0, 1]
    assert split.islands[1].loss[0].sets_left == ()
    assert math.isinf(split.islands[1].loss[0].kw_loading)
    assert [r.p_kw for r in joined.sets] == pytest.approx([400.0, 400.0])
    assert joined.islands[0].loss[0].kw_loading == pytest.approx(1.0)


# ---- fewest sets


def three_sizes() -> list[Any]:
    return [
        genset("G800", "MSB"),
        genset("G400", "MSB", s_rated_kva=500.0, p_engine_kw=430.0),
        genset("G200", "MSB", s_rated_kva=250.0, p_engine_kw=215.0),
    ]


@pytest.mark.parametrize(
    ("p_kw", "margin", "expected"),
    [
        (150.0, 0.0, ("G200",)),  # of equal numbers the least kW
        (200.0, 0.0, ("G200",)),  # just enough
        (200.0, 0.1, ("G400",)),  # 200/0.9 = 222.2 kW
        (362.0, 0.1, ("G800",)),  # 402.2 kW: the margin is of the rating, not of the load
        (700.0, 0.1, ("G800",)),  # 777.8 kW
        (760.0, 0.1, ("G800", "G200")),  # 844.4 kW
        (1300.0, 0.0, ("G800", "G400", "G200")),
        (1300.0, 0.1, None),  # 1444 of 1400 kW
    ],
)
def test_fewest_sets_that_meet_the_load_with_a_margin(
    p_kw: float, margin: float, expected: tuple[str, ...] | None
) -> None:
    p = one_board({"gensets": three_sizes()}, heaters(p_kw), states={"G400": "standby", "G200": "off"})
    got = island(p, one_set_margin=margin)
    assert got.fewest_sets == expected
    words = "more or larger sets than the 3 installed here"
    assert got.fewest_sets_text == (
        words
        if expected is None
        else f"{len(expected)} set{'s'[: len(expected) - 1]} ({', '.join(expected)})"
    )


def test_fewest_sets_looks_at_kva_too() -> None:
    # 390 kW at 0.6 is 650 kVA: the 400 kW, 500 kVA set is too small by its kVA
    p = one_board({"gensets": three_sizes()}, [inductive(390.0, 0.6)])
    assert island(p).fewest_sets == ("G800",)


def test_fewest_sets_respects_interlocks_and_leaves_emergency_sets_out() -> None:
    rows = [
        Interlock(name="I", equipment_a="G800", equipment_b="G400", cell="", kind="never both closed"),
    ]
    sets = [*three_sizes(), genset("EG", "MSB", service="emergency")]
    p = one_board({"gensets": sets}, heaters(900.0), interlocks=rows, states={"EG": "off"})
    assert island(p).fewest_sets == ("G800", "G200")
    p = one_board({"gensets": sets}, heaters(1100.0), interlocks=rows, states={"EG": "off"})
    assert island(p).fewest_sets is None


def test_shaft_supply_counts_among_the_fewest_sets_and_a_battery_does_not() -> None:
    shaft = converter_supply("SG", "MSB", s_rated_kva=700.0, stored_energy_kwh=None)
    battery = converter_supply("BAT", "MSB", s_rated_kva=600.0)
    sources = {"gensets": [genset("G1", "MSB")], "converter_supplies": [shaft, battery]}
    assert island(one_board(sources, heaters(500.0))).fewest_sets == ("SG",)


@pytest.mark.parametrize(
    ("kind", "state", "expected"),
    [
        ("sea", "off", ("G1",)),
        ("sea", "standby", ("HG",)),
        ("harbour", "off", ("HG",)),
        ("shore", "off", ("HG",)),
    ],
)
def test_harbour_set_counts_in_port_or_where_it_is_ready(
    kind: str, state: str, expected: tuple[str, ...]
) -> None:
    harbour = genset("HG", "MSB", service="harbour", s_rated_kva=500.0, p_engine_kw=430.0)
    p = one_board(
        {"gensets": [genset("G1", "MSB"), harbour]}, heaters(300.0), kind=kind, states={"HG": state}
    )
    assert island(p).fewest_sets == expected


def test_fewest_sets_carry_what_a_battery_charges_and_do_not_lean_on_what_it_gives() -> None:
    # 380 kW of load on sets of 800, 400 and 200 kW: 400 kW is enough alone, not with 150 kW of charging
    for p_set_kw, expected in ((150.0, ("G400",)), (-150.0, ("G800",))):
        battery = converter_supply("B1", "MSB", control="grid following", p_set_kw=p_set_kw)
        p = one_board({"gensets": three_sizes(), "converter_supplies": [battery]}, heaters(380.0))
        assert island(p).fewest_sets == expected


# ---- load steps


def test_step_capability_is_reached_by_the_first_engine_at_its_limit() -> None:
    # G1 50 % of 817 kW = 408.5, G2 25 % of 408.5 = 102.1; shares 2/3 and 1/3: min(612.75, 306.4) = 306.4 kW
    sets = [
        genset("G1", "MSB", max_load_step=0.5),
        genset("G2", "MSB", s_rated_kva=500.0, p_engine_kw=430.0, max_load_step=0.25),
    ]
    loads = [*heaters(100.0, 80.0)]
    got = island(one_board({"gensets": sets}, loads))
    assert got.step_capability_kw == pytest.approx(3.0 * 0.25 * 408.5)
    assert (got.largest_step_load, got.largest_step_kw) == ("H0 MSB", 100.0)


def test_equal_sets_take_the_sum_of_their_steps() -> None:
    sets = [genset(f"G{i}", "MSB", max_load_step=0.3) for i in (1, 2)]
    assert island(one_board({"gensets": sets}, heaters(10.0))).step_capability_kw == pytest.approx(
        2 * 0.3 * 817.0
    )


def test_step_is_bounded_by_the_overload_power_left_before_the_load_comes_in() -> None:
    # One engine of 860 kW * 0.95 = 817 kW, 898.7 kW at 110 %. The largest unit is the heater of 600 kW:
    # nothing else is in before it, so 50 % of 817 = 408.5 kW.
    loads = [*heaters(600.0), load("Fire pump", "MSB", kind="general", p_rated_kw=250.0, cos_phi=1.0)]
    demands = {"H0 MSB": demand(), "Fire pump": demand(1.0, 1.0, "occasional")}
    got = island(one_board({"gensets": [genset("G1", "MSB")]}, loads, demand=demands))
    assert (got.largest_step_load, got.step_capability_kw) == ("H0 MSB", pytest.approx(408.5))
    # Three heaters of 200 kW are in before the fire pump, which is not counted: 898.7 - 600 = 298.7 kW.
    loads[0] = load("H0 MSB", "MSB", kind="heating", installed=3, p_rated_kw=200.0)
    demands["H0 MSB"] = demand(3.0)
    got = island(one_board({"gensets": [genset("G1", "MSB")]}, loads, demand=demands))
    assert (got.largest_step_load, got.largest_step_kw) == ("Fire pump", 250.0)
    assert got.step_capability_kw == pytest.approx(298.7)


def test_supply_without_an_engine_takes_a_step_up_to_its_rating() -> None:
    # 700 kVA, of 400 kW in two units the largest of 300 comes last: 700 - 100 = 600 kW
    shaft = converter_supply("SG", "MSB", s_rated_kva=700.0)
    got = island(one_board({"converter_supplies": [shaft]}, heaters(100.0, 300.0)))
    assert got.step_capability_kw == pytest.approx(600.0)


def test_a_load_that_a_converter_brings_up_is_no_step() -> None:
    loads = [load("Drive", "MSB", starting_method="converter", p_rated_kw=500.0), *heaters(30.0)]
    assert island(one_board({"gensets": [genset("G1", "MSB")]}, loads)).largest_step_load == "H0 MSB"


def test_motor_start_that_asks_more_than_a_step_is_said() -> None:
    # 6.5 x 150/(0.93*0.86) kVA x 0.3 = 365.7 kW direct; in star a third, 121.9 kW
    sets = [genset("G1", "MSB", s_rated_kva=500.0, p_engine_kw=430.0, max_load_step=0.5)]
    direct = [load("Pump", "MSB", p_rated_kw=150.0)]
    said = balance(one_board({"gensets": sets}, direct)).modes[0].findings
    assert any("Pump, started direct, draws about 366 kW" in f and "204 kW in one step" in f for f in said)
    star = [load("Pump", "MSB", p_rated_kw=150.0, starting_method="star-delta")]
    assert not any(
        "Pump, started" in f for f in balance(one_board({"gensets": sets}, star)).modes[0].findings
    )


# ---- shore supply


def test_shore_current_from_apparent_power() -> None:
    # 300 kW at 0.8 = 375 kVA; 375e3/(sqrt3*440) = 492.06 A of 800 A
    p = one_board({"shore_supplies": [shore("S1", "MSB")]}, [inductive(300.0, 0.8)], kind="shore")
    result = balance(p).modes[0]
    got = result.islands[0]
    assert (got.shore, got.shore_rated_a) == ("S1", 800.0)
    assert got.shore_current_a == pytest.approx(492.06, abs=5e-3)
    assert got.kva_loading == pytest.approx(492.06 / 800.0, abs=1e-5)
    assert got.loss == ()
    assert result.main_set_out == ()
    assert result.restart == ()
    assert math.isnan(result.sets[0].engine_loading)


def test_shore_of_another_frequency_or_voltage_is_said() -> None:
    p = one_board({"shore_supplies": [shore("S1", "MSB", f_hz=50.0, u_rated_v=380.0)]}, heaters(10.0))
    said = balance(p).modes[0].findings
    assert any(f.startswith("S1 gives 50 Hz to a 60 Hz plant") for f in said)
    assert any(f.startswith("S1 gives 380 V to MSB, a board of 440 V") for f in said)
    p = one_board({"shore_supplies": [shore("S1", "MSB", u_rated_v=450.0)]}, heaters(10.0))
    assert not any(f.startswith("S1 gives") for f in balance(p).modes[0].findings)


def test_shore_in_parallel_with_sets_is_said() -> None:
    p = one_board({"gensets": [genset("G1", "MSB")], "shore_supplies": [shore("S1", "MSB")]}, heaters(10.0))
    assert any("S1 and G1 run in parallel" in f for f in balance(p).modes[0].findings)
