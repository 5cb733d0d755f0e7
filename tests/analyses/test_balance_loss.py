"""What is left when the largest running set is lost, and with any one main set out of service."""

from __future__ import annotations

import math
from typing import Any

import pytest

from study.analyses.balance import load_balance
from study.model.modes import Interlock
from study.network.view import view_of
from study.results.balance import IslandBalance, LossOfSet, ModeBalance
from tests.plants import (
    board,
    cable,
    converter_supply,
    demand,
    genset,
    load,
    mode,
    plant,
    tie,
    transfer,
)


def balance(p: Any) -> ModeBalance:
    return load_balance(p, [view_of(p, m) for m in p.modes]).modes[0]


def island(p: Any) -> IslandBalance:
    (only,) = balance(p).islands
    return only


def heaters(*kw: float) -> list[Any]:
    return [load(f"H{i}", "MSB", kind="heating", p_rated_kw=p) for i, p in enumerate(kw)]


def three_sizes() -> list[Any]:
    return [
        genset("G800", "MSB"),
        genset("G400", "MSB", s_rated_kva=500.0, p_engine_kw=430.0),
        genset("G200", "MSB", s_rated_kva=250.0, p_engine_kw=215.0),
    ]


def one_board(sources: dict[str, list[Any]], loads: list[Any], **changes: Any) -> Any:
    """Return a plant of one board in one mode; changes are `states` and `interlocks`."""
    demands = {x.name: demand() for x in loads}
    return plant(
        boards=[board("MSB")],
        loads=loads,
        modes=[mode(states=changes.get("states"), demand=demands)],
        interlocks=changes.get("interlocks", []),
        **sources,
    )


def stages(rows: tuple[LossOfSet, ...]) -> dict[str, tuple[float, float]]:
    return {r.stage: (r.p_load_kw, r.p_capacity_kw) for r in rows}


def shedding_plant(states: dict[str, str], **more: Any) -> Any:
    loads = [
        load("Stage 1", "MSB", kind="heating", p_rated_kw=150.0, trip_stage=1),
        load("Stage 2", "MSB", kind="heating", p_rated_kw=250.0, trip_stage=2),
        load("Kept", "MSB", kind="general", p_rated_kw=600.0, cos_phi=0.8),
    ]
    return one_board({"gensets": three_sizes()}, loads, states=states, **more)


def test_largest_set_lost_before_and_after_the_preferential_trips() -> None:
    # load 1000 kW and 450 kvar on 800 + 400 + 200; the 800 kW set goes: 600 kW, 750 kVA left
    rows = island(shedding_plant({})).loss
    assert {r.lost for r in rows} == {"G800"}
    assert stages(rows) == {
        "at once": (1000.0, 600.0),
        "after trip stage 1": (850.0, 600.0),
        "after trip stage 2": (600.0, 600.0),
    }
    assert rows[0].kw_loading == pytest.approx(1000.0 / 600.0)
    assert rows[2].kw_loading == pytest.approx(1.0)
    assert rows[2].kva_loading == pytest.approx(math.hypot(600.0, 450.0) / 750.0)
    assert rows[2].sets_left == ("G400", "G200")


def test_standby_set_starts_after_the_loss_at_every_trip_stage() -> None:
    got = island(shedding_plant({"G400": "standby"}))
    assert stages(got.loss) == {
        "at once": (1000.0, 200.0),
        "after trip stage 1": (850.0, 200.0),
        "after trip stage 2": (600.0, 200.0),
        "standby started": (1000.0, 600.0),
    }
    assert got.loss[-1].stage == "standby started"
    assert got.loss[-1].sets_left == ("G200", "G400")
    assert stages(got.loss_with_standby) == {
        "at once": (1000.0, 600.0),
        "after trip stage 1": (850.0, 600.0),
        "after trip stage 2": (600.0, 600.0),
    }


def test_the_only_set_lost_leaves_nothing_until_the_standby_starts() -> None:
    got = island(shedding_plant({"G400": "standby", "G200": "off"}))
    assert got.loss[0].sets_left == ()
    assert math.isinf(got.loss[0].kw_loading)
    assert math.isinf(got.loss[0].kva_loading)
    assert got.loss[-1].kw_loading == pytest.approx(1000.0 / 400.0)


def test_interlocked_standby_does_not_start() -> None:
    rows = [Interlock(name="I", equipment_a="G200", equipment_b="G400", cell="", kind="never both closed")]
    got = island(shedding_plant({"G400": "standby"}, interlocks=rows))
    assert "standby started" not in stages(got.loss)
    assert got.loss_with_standby == ()


def test_emergency_set_never_counts_when_a_set_is_lost() -> None:
    sets = [genset("G1", "MSB"), genset("EG", "MSB", service="emergency", s_rated_kva=2000.0)]
    result = balance(one_board({"gensets": sets}, heaters(100.0)))
    rows = result.islands[0].loss
    assert rows[0].lost == "G1"
    assert rows[0].sets_left == ()
    assert any("Emergency set EG is on in At sea" in f for f in result.findings)
    only = balance(one_board({"gensets": sets}, heaters(100.0), states={"G1": "off"}))
    assert only.islands[0].loss == ()


def test_grid_following_supply_cannot_carry_the_island_that_is_left() -> None:
    solar = converter_supply("PV", "MSB", control="grid following", p_set_kw=90.0, stored_energy_kwh=None)
    p = one_board({"gensets": [genset("G1", "MSB")], "converter_supplies": [solar]}, heaters(80.0))
    rows = island(p).loss
    assert rows[0].lost == "G1"
    assert math.isinf(rows[0].kw_loading)


# ---- any one main set out


def test_any_one_main_set_out_against_the_essential_loads() -> None:
    # Essential: 500 kW propulsion + 100 steering + 60 safety + 40 habitability = 700 kW; 900 kW are not.
    # Main sets 800/400/200 kW; harbour and emergency sets do not count.
    kinds = {"propulsion": 500.0, "steering": 100.0, "safety": 60.0, "habitability": 40.0, "none": 900.0}
    loads = [load(k, "MSB", kind="heating", p_rated_kw=p, essential_to=k) for k, p in kinds.items()]
    sets = [
        *three_sizes(),
        genset("HG", "MSB", service="harbour"),
        genset("EG", "MSB", service="emergency"),
    ]
    p = one_board({"gensets": sets}, loads, states={"EG": "off", "G200": "off", "G400": "standby"})
    rows = {r.out: r for r in balance(p).main_set_out}
    assert set(rows) == {"G800", "G400", "G200"}
    assert {r.p_load_kw for r in rows.values()} == {700.0}
    assert {k: r.p_capacity_kw for k, r in rows.items()} == {"G800": 600.0, "G400": 1000.0, "G200": 1200.0}
    assert rows["G800"].kw_loading == pytest.approx(700.0 / 600.0)
    assert rows["G800"].kva_loading == pytest.approx(700.0 / 750.0)


def test_one_main_set_alone_leaves_nothing_when_it_is_out() -> None:
    loads = [load("Lights", "MSB", kind="lighting", essential_to="safety")]
    row = balance(one_board({"gensets": [genset("G1", "MSB")]}, loads)).main_set_out[0]
    assert row.p_capacity_kw == 0.0
    assert math.isinf(row.kw_loading)


def test_no_essential_load_means_no_check_and_a_word_about_it() -> None:
    result = balance(one_board({"gensets": [genset("G1", "MSB")]}, heaters(10.0)))
    assert result.main_set_out == ()
    assert any("No load is marked essential" in f for f in result.findings)


def two_sections(*loads: Any, sets: tuple[str, ...] = ("P", "S"), **more: Any) -> ModeBalance:
    """Return a set on each of two sections with the bus-tie open, and an emergency board with its set."""
    p = plant(
        boards=[board("P"), board("S"), board("ESB")],
        gensets=[genset(f"G-{b}", b, redundancy_group=b) for b in sets]
        + [genset("EDG", "ESB", service="emergency")],
        ties=[tie("BT", "P", "S"), tie("BT-E", "S", "ESB")],
        loads=list(loads),
        modes=[mode(states={"BT": "off", "BT-E": "off"}, demand={x.name: demand() for x in loads})],
        **more,
    )
    return balance(p)


def essential(name: str, at: str, **changes: Any) -> Any:
    return load(name, at, **{"service": "Pumps", "essential_to": "propulsion", "p_rated_kw": 50.0, **changes})


def test_a_service_that_both_sections_have_is_kept() -> None:
    one, other, _ = two_sections(essential("Pump 1", "P"), essential("Pump 2", "S")).islands
    assert one.services_lost == other.services_lost == ()
    assert not one.loss[0].sets_left
    notes = two_sections(essential("Pump 1", "P"), essential("Pump 2", "S")).findings
    assert sum("has its like on another section" in x for x in notes) == 2


def test_a_service_of_one_section_alone_is_lost_with_it() -> None:
    lone = essential("Steering gear 1", "P", service="Steering", essential_to="steering")
    comfort = essential("Galley", "P", service="Galley", essential_to="habitability")
    on_emergency = essential("Steering gear 2", "ESB", service="Steering", essential_to="steering")
    result = two_sections(lone, comfort, on_emergency, essential("Pump", "S"))
    one, other, emergency = result.islands
    assert one.services_lost == ("steering (Steering)",)  # the emergency set is no part of the main source
    assert other.services_lost == ("propulsion (Pumps)",)
    assert emergency.loss == ()
    assert any("G-P runs alone on its section: when it is lost, P is dead" in x for x in result.findings)


def test_a_load_of_the_lost_redundancy_group_keeps_nothing_up() -> None:
    pair = essential("Pump 1", "P"), essential("Pump 2", "S", redundancy_group="P")
    assert two_sections(*pair).islands[0].services_lost == ("propulsion (Pumps)",)


@pytest.mark.parametrize(
    ("target", "other", "automatic", "lost"),
    [
        ("Pump", "S", True, ()),
        ("Pump", "S", False, ("propulsion (Pumps)",)),
        ("Pump", "ESB", True, ("propulsion (Pumps)",)),
        ("Pump", "C-Pump", True, ()),
    ],
)
def test_an_automatic_second_feed_from_another_section_keeps_a_service(
    target: str, other: str, automatic: bool, lost: tuple[str, ...]
) -> None:
    feed = transfer(target, "P", other, automatic=automatic)
    cables = [cable("C-Pump", "S", "Pump")] if other == "C-Pump" else []
    result = two_sections(essential("Pump", "P"), transfers=[feed], cables=cables)
    assert result.islands[0].services_lost == lost


def test_one_section_alone_has_no_other_to_keep_anything_up() -> None:
    assert two_sections(essential("Pump", "P"), sets=("P",)).islands[0].services_lost is None
