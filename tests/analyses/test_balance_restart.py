"""Restart after a blackout, and the emergency set against its list."""

from __future__ import annotations

from typing import Any

import pytest

from study.analyses.balance import BalanceOptions, load_balance
from study.network.view import view_of
from study.results.balance import BalanceResult, ModeBalance
from tests.plants import board, demand, genset, load, mode, plant, tie


def balance(p: Any, options: BalanceOptions | None = None) -> BalanceResult:
    return load_balance(p, [view_of(p, m) for m in p.modes], options)


def motor(name: str, p_kw: float, delay_s: float | None, **changes: Any) -> Any:
    """Return a motor without losses, so that input is output."""
    return load(name, "MSB", p_rated_kw=p_kw, efficiency=1.0, restart_delay_s=delay_s, **changes)


def lights(p_kw: float) -> Any:
    return load("Lights", "MSB", kind="lighting", p_rated_kw=p_kw, cos_phi=1.0)


def restarted(sets: list[Any], loads: list[Any], states: dict[str, str], **changes: Any) -> ModeBalance:
    demands = {x.name: demand() for x in loads}
    p = plant(boards=[board("MSB")], gensets=sets, loads=loads, modes=[mode("M", states, demands, **changes)])
    return balance(p).modes[0]


def test_loads_come_back_in_the_order_of_their_delays() -> None:
    # Standby G2 is on the board after 20 s. 60 kW of lighting come with it; the motors 5 s and 12 s later.
    sets = [genset("G1", "MSB"), genset("G2", "MSB", start_delay_s=20.0, max_load_step=0.5)]
    loads = [motor("Late", 100.0, 12.0), motor("Early", 200.0, 5.0), lights(60.0)]
    steps = restarted(sets, loads, {"G2": "standby"}).restart
    assert [(s.step, s.at_s, s.loads) for s in steps] == [
        (1, 20.0, ("Lights",)),
        (2, 25.0, ("Early",)),
        (3, 32.0, ("Late",)),
    ]
    assert [s.p_step_kw for s in steps] == [60.0, 200.0, 100.0]
    assert [s.p_total_kw for s in steps] == [60.0, 260.0, 360.0]
    # 50 % of 860 kW * 0.95 = 408.5 kW; more is left to 110 % of 817 kW: 898.7 - 260 = 638.7 kW
    assert [s.step_capability_kw for s in steps] == pytest.approx([408.5, 408.5, 408.5])


def test_loads_of_one_delay_are_packed_into_steps_five_seconds_apart() -> None:
    # capability 0.3*817 = 245.1 kW: 150 + 80, then 120 + 100; speed recovers in 5 s (ClassNK 2.4.2)
    sets = [genset("G1", "MSB", start_delay_s=10.0, max_load_step=0.3)]
    loads = [motor(n, p, 6.0) for n, p in (("A", 150.0), ("B", 80.0), ("C", 120.0), ("D", 100.0))]
    steps = restarted(sets, loads, {}).restart
    assert [(s.at_s, s.loads) for s in steps] == [(16.0, ("A", "B")), (21.0, ("C", "D"))]
    assert all(s.p_step_kw <= s.step_capability_kw for s in steps)


def test_interval_between_steps_is_kept_when_delays_are_closer() -> None:
    sets = [genset("G1", "MSB", start_delay_s=10.0)]
    loads = [motor("A", 50.0, 2.0), motor("B", 50.0, 3.0), motor("C", 50.0, 4.0)]
    steps = restarted(sets, loads, {}).restart
    assert [(s.at_s, s.loads) for s in steps] == [(12.0, ("A",)), (17.0, ("B", "C"))]


def test_what_comes_with_the_board_is_one_block_even_if_it_is_too_much() -> None:
    # 300 kW at once on an engine that takes 0.3*817 = 245.1 kW: shown, not split away
    sets = [genset("G1", "MSB", start_delay_s=10.0, max_load_step=0.3)]
    steps = restarted(sets, [lights(300.0), motor("A", 50.0, 5.0)], {}).restart
    assert (steps[0].p_step_kw, steps[0].step_capability_kw) == (300.0, pytest.approx(245.1))


def test_load_larger_than_a_step_waits_for_the_next_set() -> None:
    # one set takes 245.1 kW, two together 490.2 kW from 40 s on
    sets = [
        genset("G1", "MSB", start_delay_s=10.0, max_load_step=0.3),
        genset("G2", "MSB", start_delay_s=40.0, max_load_step=0.3),
    ]
    steps = restarted(sets, [motor("Big", 300.0, 5.0)], {}).restart
    assert [(s.at_s, s.loads, s.step_capability_kw) for s in steps] == [
        (40.0, ("Big",), pytest.approx(490.2))
    ]


def test_load_larger_than_any_step_is_shown_as_it_is() -> None:
    sets = [genset("G1", "MSB", start_delay_s=10.0, max_load_step=0.3)]
    step = restarted(sets, [motor("Big", 300.0, 5.0)], {}).restart[0]
    assert step.p_step_kw > step.step_capability_kw


def test_what_the_sets_have_no_room_for_waits_and_is_named() -> None:
    # Two sets carry 1000 kW; only the standby of 400 kW starts: A 300, then B 300 finds no room, C 50 does
    sets = [
        genset("G1", "MSB"),
        genset("G2", "MSB"),
        genset("G3", "MSB", s_rated_kva=500.0, p_engine_kw=430.0, max_load_step=1.0),
    ]
    loads = [motor("A", 300.0, 1.0), motor("B", 300.0, 2.0), motor("C", 50.0, 3.0)]
    got = restarted(sets, loads, {"G3": "standby"})
    assert [s.loads for s in got.restart] == [("A",), ("C",)]
    assert any("no room for B (300 kW)" in f for f in got.findings)


def test_motors_without_a_delay_stay_off_and_essential_ones_are_named() -> None:
    sets = [genset("G1", "MSB", start_delay_s=10.0)]
    loads = [
        motor("Timed", 50.0, 3.0),
        motor("Cooling pump", 50.0, None, essential_to="propulsion"),
        motor("Winch", 50.0, None),
        load("Drive", "MSB", kind="converter", p_rated_kw=90.0),
    ]
    got = restarted(sets, loads, {})
    assert [s.loads for s in got.restart] == [("Timed",)]
    assert any("stay off after a blackout: Cooling pump." in f for f in got.findings)


def test_without_any_delay_the_restart_is_not_assessed() -> None:
    got = restarted([genset("G1", "MSB")], [motor("A", 50.0, None), lights(10.0)], {})
    assert got.restart == ()
    assert any("restart after a blackout is not assessed" in f for f in got.findings)


def test_intermittent_loads_come_back_as_they_are_counted() -> None:
    p = plant(
        boards=[board("MSB")],
        gensets=[genset("G1", "MSB")],
        loads=[motor("A", 100.0, 3.0)],
        modes=[mode("M", {}, {"A": demand(1.0, 1.0, "intermittent")})],
    )
    assert balance(p).modes[0].restart[0].p_step_kw == pytest.approx(50.0)


def test_first_set_later_than_45_seconds_is_said() -> None:
    late = restarted([genset("G1", "MSB", start_delay_s=50.0)], [motor("A", 10.0, 1.0)], {})
    assert any("on the board after 50 s; 45 s are allowed" in f for f in late.findings)
    right = restarted([genset("G1", "MSB", start_delay_s=45.0)], [motor("A", 10.0, 1.0)], {})
    assert not any("are allowed" in f for f in right.findings)


def test_islands_restart_each_by_itself() -> None:
    loads = [motor("A", 100.0, 5.0), load("B", "B2", p_rated_kw=80.0, efficiency=1.0, restart_delay_s=5.0)]
    p = plant(
        boards=[board("MSB"), board("B2")],
        gensets=[genset("G1", "MSB", start_delay_s=10.0), genset("G2", "B2", start_delay_s=10.0)],
        ties=[tie("BT", "MSB", "B2")],
        loads=loads,
        modes=[mode("M", {"BT": "off"}, {x.name: demand() for x in loads})],
    )
    steps = balance(p).modes[0].restart
    assert [(s.step, s.island, s.loads, s.p_total_kw) for s in steps] == [
        (1, 0, ("A",), 100.0),
        (2, 1, ("B",), 80.0),
    ]


# ---- emergency set


def emergency_plant(states: dict[str, str], kind: str = "emergency", **changes: Any) -> Any:
    loads = [
        load("Emergency lights", "ESB", kind="lighting", p_rated_kw=20.0, cos_phi=1.0, essential_to="safety"),
        load(
            "Fire pump", "ESB", p_rated_kw=45.0, efficiency=0.9, cos_phi=0.8, essential_to="safety",
            restart_delay_s=8.0,
        ),
        load("Main pump", "MSB", kind="heating", p_rated_kw=300.0),
    ]  # fmt: skip
    demands = {
        "Emergency lights": demand(),
        "Fire pump": demand(1.0, 1.0, "intermittent"),
        **changes.pop("also", {}),
    }
    sets = [
        genset("G1", "MSB"),
        genset(
            "EG", "ESB", service="emergency", s_rated_kva=100.0, p_engine_kw=90.0, max_load_step=1.0,
            start_delay_s=12.0,
        ),
    ]  # fmt: skip
    return plant(
        boards=[board("MSB"), board("ESB", role="emergency")],
        gensets=sets,
        ties=[tie("IC", "MSB", "ESB")],
        loads=loads,
        modes=[mode("Emergency", states, demands, kind=kind, **changes)],
    )


def test_emergency_set_against_the_emergency_list() -> None:
    # 20 + 45/0.9 = 70 kW, no diversity; kvar 50*0.75 = 37.5; rated min(80, 85.5) = 80 kW, 100 kVA
    result = balance(emergency_plant({"IC": "off", "G1": "off"}))
    (row,) = result.emergency
    assert (row.genset, row.mode) == ("EG", "Emergency")
    assert (row.p_load_kw, row.q_load_kvar) == pytest.approx((70.0, 37.5))
    assert row.kw_loading == pytest.approx(0.875)
    assert row.kva_loading == pytest.approx(0.79412, abs=5e-6)  # sqrt(70^2 + 37.5^2) = 79.412 kVA
    assert (row.hours_required, row.hours_basis) == (18.0, "SOLAS II-1/43, cargo ships")
    mode_row = result.modes[0]
    assert mode_row.islands[0].boards == ("ESB",)
    assert mode_row.islands[0].fewest_sets_text == "a main or harbour set, of which none is installed here"
    assert mode_row.main_set_out == ()


def test_emergency_loads_come_on_the_emergency_set_in_steps() -> None:
    steps = balance(emergency_plant({"IC": "off", "G1": "off"})).modes[0].restart
    assert [(s.at_s, s.loads, s.p_step_kw) for s in steps] == [
        (12.0, ("Emergency lights",), 20.0),
        (20.0, ("Fire pump",), pytest.approx(50.0)),
    ]


def test_hours_are_those_of_the_options() -> None:
    options = BalanceOptions(emergency_hours=36.0, emergency_basis="SOLAS II-1/42, passenger ships")
    (row,) = balance(emergency_plant({"IC": "off", "G1": "off"}), options).emergency
    assert (row.hours_required, row.hours_basis) == (36.0, "SOLAS II-1/42, passenger ships")


def test_emergency_set_is_judged_in_emergency_modes_only() -> None:
    p = emergency_plant({"EG": "off"}, kind="sea")
    result = balance(p)
    assert result.emergency == ()
    assert any("No mode is of the kind emergency" in f for f in result.modes[0].findings)


def test_emergency_set_that_is_not_on_and_loads_on_the_dead_main_board_are_named() -> None:
    result = balance(emergency_plant({"IC": "off", "G1": "off", "EG": "off"}, also={"Main pump": demand()}))
    said = result.modes[0].findings
    assert any("EG is an emergency set and not on in Emergency" in f for f in said)
    assert any("No source is on line in Emergency" in f for f in said)
    assert any(f.startswith("Not fed on MSB: Main pump") for f in said)
    assert result.modes[0].islands == ()
    assert result.modes[0].p_total_kw == 0.0
    assert result.modes[0].p_unfed_kw == pytest.approx(370.0)
