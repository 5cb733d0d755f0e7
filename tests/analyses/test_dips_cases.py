"""What each kind of event does to a simulated plant, and what its result says."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from study.analyses.dips_measures import recovery_of, rows_to_keep
from study.analyses.dips_options import DipOptions
from study.analyses.dips_restart import simulate_restart
from study.analyses.dips_simulation import cases_of, simulate_case, simulate_cases
from study.model.modes import Event
from study.model.protection import ProtectionFunction
from study.network.batch import solve_batch
from study.network.network import build_network, mode_network
from study.results.balance import RestartStep
from tests import plants
from tests.agreement.dips_plants import genset

MODE = "At sea"
SHORT = DipOptions(after_s=4.0)
AT = 0.2


def event(kind, equipment, size=None, unit=None, *, at_s=AT, duration_s=None, case="Case"):
    return Event(
        case=case,
        mode=MODE,
        kind=kind,
        equipment=equipment,
        cell=f"Events!{kind}",
        size=size,
        unit=unit,
        at_s=at_s,
        duration_s=duration_s,
    )


def preferential(name, stage, pick_up, delay_s):
    return ProtectionFunction(
        name=f"{name} trip {stage}",
        equipment=name,
        cell="",
        kind=f"preferential trip {stage}",
        pick_up=pick_up,
        unit="%",
        delay_s=delay_s,
        trips=f"Trip stage {stage}",
    )


def make_plant(**more):
    """Return two sets on one board with a heater, pumps, a group that is shed, and a transformer."""
    loads = [
        plants.load("Heater", "MSB", "heating", p_rated_kw=300.0, u_rated_v=450.0),
        plants.load("Pump", "MSB", p_rated_kw=75.0, inertia_kgm2=2.5, u_rated_v=450.0),
        plants.load("Galley", "MSB", "general", p_rated_kw=250.0, trip_stage=1, u_rated_v=450.0),
        plants.load("Lights", "LDB", "lighting", p_rated_kw=20.0, u_rated_v=230.0),
        plants.load("Fan", "MSB", p_rated_kw=55.0, u_rated_v=450.0, starting_method="star-delta"),
    ]
    base = {
        "boards": [plants.board("MSB", 450.0), plants.board("LDB", 230.0)],
        "gensets": [genset("G1"), genset("G2")],
        "loads": loads,
        "transformers": [plants.transformer("T", "MSB", "LDB", s_rated_kva=100.0)],
    }
    return plants.plant(**{**base, **more})


P = np.array([300.0, 0.0, 250.0, 20.0, 0.0])
Q = np.array([0.0, 0.0, 120.0, 5.0, 0.0])


def run(*events, plant=None, p=P, q=Q, options=SHORT):
    plant = plant or make_plant()
    at = mode_network(build_network(plant), plant.modes[0])
    return simulate_case(at, events, p, q, options=options)


def test_a_motor_start():
    case = run(event("motor start", "Pump"))
    assert case.simulated
    assert not case.collapsed
    assert case.board == "MSB"
    assert case.voltage.least < case.voltage.before - 0.03
    assert case.voltage.least_at_s == pytest.approx(AT, abs=0.3)
    assert case.voltage.settled
    (motor,) = case.motors
    assert motor.run_up_known
    assert 0.2 < motor.run_up_s < 3.0
    assert motor.speed_pu[-1] > 0.95
    assert motor.i_largest_a > 5.0 * 75e3 / (3**0.5 * 450.0 * 0.93 * 0.86)
    assert [s.text for s in case.steps] == ["Pump starts: direct"]
    assert case.iso_class_voltage in ("G1", "G2", "G3")


def test_an_event_stands_twice_in_the_times():
    case = run(event("motor start", "Pump"))
    twice = np.flatnonzero(np.diff(case.time_s) == 0.0)
    assert case.time_s[twice[0]] == pytest.approx(AT)
    assert case.u_board_pu[twice[0]] == pytest.approx(case.voltage.before)
    assert case.u_board_pu[twice[0] + 1] < case.u_board_pu[twice[0]]


def test_star_delta_changes_over_at_its_time():
    loads = list(make_plant().loads)
    loads[4] = plants.load(
        "Fan", "MSB", p_rated_kw=55.0, u_rated_v=450.0, starting_method="star-delta",
        star_delta_change_s=2.0, inertia_kgm2=1.0,
    )  # fmt: skip
    case = run(event("motor start", "Fan"), plant=make_plant(loads=loads))
    (fan,) = case.motors
    changes = [s.at_s for s in case.steps if "changes over" in s.text]
    assert changes == [pytest.approx(AT + 2.0), pytest.approx(AT + 2.05)]
    gap = (case.time_s > AT + 2.001) & (case.time_s < AT + 2.049)
    assert fan.i_line_pu[gap].max() == 0.0


def test_a_unit_in_use_is_off_before_it_starts():
    p = P + np.array([0.0, 60.0, 0.0, 0.0, 0.0])
    plant = make_plant()
    mode = replace(plant.modes[0], demand={**plant.modes[0].demand, "Pump": plants.demand(1.0, 0.8)})
    case = run(event("motor start", "Pump"), plant=replace(plant, modes=(mode,)), p=p)
    assert sum(s.p_before_kw for s in case.sets) == pytest.approx(P.sum(), rel=0.02)


def test_a_load_step_and_its_end():
    case = run(event("load step", "MSB", 200.0, "kW", duration_s=2.0), options=DipOptions(after_s=6.0))
    kw = sum(s.p_kw for s in case.sets)
    during = np.interp(AT + 1.9, case.time_s, kw)
    assert during - kw[0] == pytest.approx(200.0, rel=0.05)
    assert kw[-1] == pytest.approx(kw[0], rel=0.005)


def test_a_suddenly_switched_load_is_at_the_power_factor_of_the_class_test():
    case = run(event("load step", "MSB", 60.0, "%"))
    dp = sum(s.p_after_kw - s.p_before_kw for s in case.sets)
    dq = sum(s.q_after_kvar - s.q_before_kvar for s in case.sets)
    assert dp / np.hypot(dp, dq) == pytest.approx(0.4, abs=0.03)
    assert np.hypot(dp, dq) == pytest.approx(600.0, rel=0.1)


def test_a_set_trip_sheds_the_stage_that_its_relay_names():
    """Each carries 285 kW; the one left has 58 % of its rated current, and 320 kW when the galley is off."""
    functions = (preferential("G1", 1, 50.0, 1.5), preferential("G2", 1, 50.0, 1.5))
    plant = replace(make_plant(), protection_functions=functions)
    case = run(event("set trip", "G2"), plant=plant)
    shed = [s for s in case.steps if "stage 1 is shed" in s.text]
    assert len(shed) == 1
    # The relay starts to count with the trip, or with the first step after it.
    assert shed[0].at_s == pytest.approx(AT + 1.5, abs=0.01)
    one, two = case.sets
    assert two.opened_at_s == pytest.approx(AT)
    assert two.p_after_kw == pytest.approx(0.0, abs=1e-6)
    assert one.p_largest_kw > 550.0
    assert one.p_after_kw == pytest.approx(320.0, rel=0.04)


def test_without_a_relay_nothing_is_shed():
    case = run(event("set trip", "G2"))
    assert case.sets[0].p_after_kw == pytest.approx(570.0, rel=0.03)


def test_load_rejection_of_all_load():
    case = run(event("load rejection", "G1", 100.0, "%"), options=DipOptions(after_s=8.0))
    assert case.voltage.largest > case.voltage.before + 0.01
    assert case.frequency.largest > case.frequency.before
    assert sum(s.p_after_kw for s in case.sets) == pytest.approx(0.0, abs=1.5)
    assert case.frequency.settled


def settled_in(case, plant, change):
    """Hold the end of a case against the load flow of a changed plant."""
    plant = change(plant)
    at = mode_network(build_network(plant), plant.modes[0])
    after = solve_batch(at, P, Q)
    assert [s.q_after_kvar for s in case.sets] == pytest.approx(after.source_q_kvar[0], abs=0.5)
    assert [s.p_after_kw for s in case.sets] == pytest.approx(after.source_p_kw[0], abs=0.5)


def other(**changes):
    return lambda plant: replace(plant, gensets=(genset("G1", **changes), *plant.gensets[1:]))


LONG = DipOptions(after_s=15.0)


@pytest.mark.parametrize(
    ("kind", "size", "unit", "changes"),
    [
        ("set-point step", 102.0, "% no-load voltage", {"no_load_voltage_pu": 1.02}),
        ("set-point step", 104.5, "% no-load frequency", {"no_load_frequency_pu": 1.045}),
        ("droop changed", 5.0, "% voltage droop", {"voltage_droop_pu": 0.05}),
        ("droop changed", 3.0, "% speed droop", {"speed_droop_pu": 0.03}),
    ],
)
def test_a_changed_setting_ends_in_the_load_flow_of_that_setting(kind, size, unit, changes):
    plant = make_plant()
    case = run(event(kind, "G1", size, unit), plant=plant, options=LONG)
    settled_in(case, plant, other(**changes))


def test_a_set_without_field_takes_kvar_in():
    case = run(event("field loss", "G2"))
    assert case.sets[1].field_pu[-1] < 0.05
    assert case.sets[1].q_after_kvar < -50.0
    assert case.sets[0].q_after_kvar > case.sets[0].q_before_kvar + 50.0


def test_a_fault_and_its_clearing():
    p = P + np.array([0.0, 60.0, 0.0, 0.0, 0.0])
    case = run(event("fault", "LDB", duration_s=0.15), p=p, q=Q + np.array([0.0, 35.0, 0.0, 0.0, 0.0]))
    low = case.boards.names.index("LDB")
    assert case.boards.u_least_pu[low] < 1e-3
    assert case.boards.u_after_pu == pytest.approx(case.boards.u_before_pu, abs=0.01)
    assert [s.text for s in case.steps] == ["three-phase fault on LDB", "fault on LDB cleared"]
    assert case.voltage.settled


def test_a_fault_on_the_main_board_slows_the_running_motors():
    """While the voltage is nothing the motors coast; when it is back they draw current to speed up."""
    pumps = [plants.load("Pumps", "MSB", p_rated_kw=250.0, inertia_kgm2=6.0, u_rated_v=450.0)]
    plant = make_plant(loads=[*make_plant().loads[:1], *pumps])
    p, q = np.array([100.0, 260.0]), np.array([0.0, 150.0])
    case = run(event("fault", "MSB", duration_s=0.2), plant=plant, p=p, q=q)
    i = sum(s.i_pu for s in case.sets)
    after = (case.time_s > AT + 0.25) & (case.time_s < AT + 0.45)
    assert i[after].max() > 1.5 * i[0]
    assert i[-1] == pytest.approx(i[0], rel=0.01)
    assert {x.load for x in case.drop_outs} == {"Pumps"}


def test_transformer_energising():
    """First peak 10 times rated, half of it fundamental: 500 kvar of a 100 kVA transformer, gone in 0.5 s."""
    case = run(event("transformer energising", "T"))
    kvar = sum(s.q_kvar for s in case.sets)
    first = np.flatnonzero(np.diff(case.time_s) == 0.0)[0] + 1
    u = case.u_board_pu[first]
    assert kvar[first] - kvar[0] == pytest.approx(500.0 * u**2 * (450.0 / 440.0) ** 2, rel=0.08)
    assert kvar[-1] == pytest.approx(kvar[0], abs=1.0)
    # Before it is energised nothing is fed through it.
    assert sum(s.p_before_kw for s in case.sets) == pytest.approx(550.0, rel=0.02)


@pytest.mark.parametrize("supply", ["permanent magnet", "shunt", "compounded"])
def test_build_up(supply):
    plant = make_plant(gensets=[genset("G1", field_supply=supply, unregulated_voltage_pu=1.3), genset("G2")])
    case = run(event("build-up", "G1"), plant=plant, options=DipOptions(longest_s=30.0))
    assert case.voltage.before == pytest.approx(0.03)
    assert case.voltage.after == pytest.approx(1.0, abs=1e-3)
    assert 0.1 < case.voltage.recovery_s < 25.0
    assert not case.findings


def test_a_set_that_does_not_excite_itself():
    """The supply line lies below the air-gap line: nothing builds up."""
    weak = genset("G1", field_supply="compounded", unregulated_voltage_pu=0.8, compound_current_share=0.9)
    case = run(event("build-up", "G1"), plant=make_plant(gensets=[weak, genset("G2")]))
    assert case.voltage.after < 0.1
    assert "does not excite itself" in case.findings[0]


@pytest.mark.parametrize(
    ("events", "reason"),
    [
        ([event("motor start", "Heater")], "Heater is no motor"),
        ([event("set trip", "G9")], "G9 is dead"),
        ([event("load step", "MSB", 5.0, "bar")], "a load step in 'bar'"),
        ([event("set-point step", "G1", 2.0, "bar")], "names no setting"),
        ([event("build-up", "G1"), event("motor start", "Pump")], "simulated alone"),
    ],
)
def test_what_cannot_be_simulated_says_why(events, reason):
    case = run(*events)
    assert not case.simulated
    assert reason in case.reason
    assert np.isnan(case.voltage.least)
    assert not len(case.time_s)


def test_an_overload_ends_in_a_collapse():
    case = run(event("load step", "MSB", 2500.0, "kW"))
    assert case.collapsed
    assert any("break" in f or "collapse" in f for f in case.findings)


def test_maladjustments_are_left_to_the_sharing_study():
    events = (
        event("maladjustment", "G1", 5.0, "% voltage droop", case="A"),
        event("motor start", "Pump", case="B"),
    )
    assert [rows[0].case for rows in cases_of(events)] == ["B"]


def test_cases_come_in_the_order_of_the_sheet_and_others_go_on():
    plant = replace(
        make_plant(),
        events=(event("motor start", "Heater", case="First"), event("motor start", "Pump", case="Second")),
    )
    told = []
    at = mode_network(build_network(plant), plant.modes[0])
    cases = simulate_cases([at], P[None], Q[None], SHORT, progress=told.append)
    assert [(c.case, c.simulated) for c in cases] == [("First", False), ("Second", True)]
    assert told == ["simulating First", "simulating Second"]


def test_restart_after_a_blackout_in_steps():
    plant = make_plant()
    at = mode_network(build_network(plant), plant.modes[0])
    steps = [
        RestartStep(
            step=n + 1,
            at_s=45.0 + 4.0 * n,
            loads=loads,
            p_step_kw=kw,
            p_total_kw=kw,
            step_capability_kw=400.0,
        )
        for n, (loads, kw) in enumerate([(("Heater", "Lights"), 320.0), (("Galley",), 250.0)])
    ]
    case = simulate_restart(at, steps, P, Q)
    assert case.simulated
    assert case.sets[0].p_before_kw == pytest.approx(0.0, abs=0.5)
    kw = sum(s.p_kw for s in case.sets)
    assert np.interp(4.0, case.time_s, kw) == pytest.approx(320.0, rel=0.03)
    assert kw[-1] == pytest.approx(570.0, rel=0.03)
    assert case.steps[0].text.startswith("step 1: 2 consumers")


def test_a_motor_fed_by_its_converter_takes_its_power_on_a_ramp():
    loads = list(make_plant().loads)
    loads[4] = plants.load(
        "Fan", "MSB", p_rated_kw=93.0, u_rated_v=450.0, starting_method="converter", starting_time_s=4.0
    )
    case = run(event("motor start", "Fan"), plant=make_plant(loads=loads), options=DipOptions(after_s=8.0))
    kw = sum(s.p_kw for s in case.sets)
    assert np.interp(AT + 2.0, case.time_s, kw) - kw[0] == pytest.approx(50.0, abs=4.0)
    assert kw[-1] - kw[0] == pytest.approx(100.0, abs=4.0)
    assert case.motors[0].speed_pu[-1] == pytest.approx(1.0, abs=0.01)


def test_below_the_knee_the_voltage_follows_the_frequency():
    """A knee of 60.5 Hz, and a load that pulls the frequency under it: V/f holds."""
    sets = [genset("G1", v_per_hz_knee_hz=60.5, no_load_voltage_pu=1.0, regulator_mode="no droop")]
    plant = make_plant(gensets=sets)
    case = run(event("load step", "MSB", 150.0, "kW"), plant=plant, options=DipOptions(after_s=12.0))
    assert case.f_hz[-1] < 60.5
    assert case.sets[0].u_pu[-1] == pytest.approx(case.f_hz[-1] / 60.5, abs=1e-4)


# ---- measures


def test_recovery_of_a_dip_that_comes_back_exponentially():
    t = np.concatenate([[0.0, 1.0], np.linspace(1.0, 6.0, 5001)])
    v = np.where(np.arange(len(t)) < 2, 1.0, 1.0 - 0.2 * np.exp(-(t - 1.0) / 0.5))
    r = recovery_of(t, v, [1.0], 0.03)
    assert (r.before, r.least, r.least_at_s) == (1.0, pytest.approx(0.8), 1.0)
    assert r.recovery_s == pytest.approx(0.5 * np.log(0.2 / 0.03), abs=0.002)
    assert r.overshoot == pytest.approx(0.0, abs=1e-3)
    assert r.settled


def test_overshoot_and_a_quantity_that_does_not_settle():
    t = np.concatenate([[0.0, 1.0], np.linspace(1.0, 5.0, 4001)])
    swing = 1.0 - 0.2 * np.exp(-(t - 1.0)) * np.cos(6.0 * (t - 1.0))
    r = recovery_of(t, np.where(np.arange(len(t)) < 2, 1.0, swing), [1.0], 0.01)
    assert r.overshoot == pytest.approx(0.2 * np.exp(-np.pi / 6.0), abs=0.01)
    endless = 1.0 + 0.05 * np.sin(6.0 * t)
    assert not recovery_of(t, endless, [1.0], 0.01).settled
    assert recovery_of(t, endless, [1.0], 0.01).recovery_s == np.inf


def test_of_several_disturbances_the_worst_counts():
    t = np.array([0.0, 1.0, 1.0, 2.0, 2.0, 3.0])
    v = np.array([1.0, 1.0, 0.95, 1.0, 0.8, 1.0])
    assert recovery_of(t, v, [1.0, 2.0], 0.03).least == 0.8


def test_rows_kept_hold_events_and_extremes():
    t = np.sort(np.concatenate([np.arange(0.0, 10.0, 0.002), [1.0]]))
    rows = rows_to_keep(t, [1.0], [4321], 200)
    assert 4321 in rows
    assert (np.diff(t[rows]) == 0.0).sum() == 1
    assert len(rows) < 300
