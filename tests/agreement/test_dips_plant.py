"""Simulated plants against the load flow, against one another, and motors against the run-up integral."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from study.analyses.balance import load_balance
from study.analyses.dips_simulation import follow_case
from study.formulas.induction import motor_admittance, motor_torque
from study.formulas.starting import run_up_integral
from study.model.modes import Event, SetPoint
from study.network import dynamics_data as d
from study.network.batch import solve_batch
from study.network.dynamics_build import Drive, Happening, Plan, build_model, demand_of, place_of
from study.network.dynamics_motors import circuit_of
from study.network.lumping import voltages_behind
from study.network.network import build_network, mode_network
from study.workbook import read_plant
from tests import plants
from tests.agreement.dips_plants import STEP_AT_S, course_of, end_of, genset, network_of, solved, with_step

BOOKS = Path(__file__).parents[2] / "workbooks"
STEP_KVA = complex(300.0, 200.0)


def heater(name, kva: complex):
    """Return a consumer that is an impedance of that kVA at the 450 V of the board."""
    return plants.load(
        name,
        "MSB",
        "heating",
        p_rated_kw=kva.real,
        cos_phi=kva.real / abs(kva),
        u_rated_v=450.0,
    )


# ---- the steady state after the transient is the load flow's

SETTINGS = {
    "phasor droop": ({}, {}),
    "reactive-current droop": ({"droop_law": "reactive current"}, {"droop_law": "reactive current"}),
    "unequal droops": ({"voltage_droop_pu": 0.02}, {"voltage_droop_pu": 0.05, "speed_droop_pu": 0.03}),
    "cross-current": ({"regulator_mode": "cross-current"}, {"regulator_mode": "cross-current"}),
    "one isochronous": ({"governor_mode": "isochronous"}, {}),
    "load sharing": ({"governor_mode": "load sharing"}, {"governor_mode": "load sharing"}),
    "compounded": ({"field_supply": "compounded", "unregulated_voltage_pu": 1.3}, {}),
    "unequal ratings": ({}, {"s_rated_kva": 600.0, "p_engine_kw": 520.0}),
}


@pytest.mark.parametrize("name", SETTINGS)
def test_two_sets_settle_in_the_load_flow(name):
    one, two = SETTINGS[name]
    sets = [genset("G1", **one), genset("G2", **two)]
    base = heater("L", 600.0 + 350.0j)
    at = network_of(sets, [base])
    p, q = [base.p_rated_kw], [350.0]
    _, model = with_step(at, STEP_KVA, p, q)
    course = course_of(model, 20.0)
    # The step is an impedance of the board: in the load flow a consumer that is one.
    after = solved(network_of(sets, [base, heater("S", STEP_KVA)]), [600.0, 300.0], [350.0, 200.0])
    rating = np.array([g.s_rated_kva for g in sets])
    assert end_of(course, d.KEPT_U) == pytest.approx(after.source_u_pu[0], abs=1e-4)
    assert end_of(course, d.KEPT_P) == pytest.approx(after.source_p_kw[0] / rating, abs=1e-4)
    assert end_of(course, d.KEPT_Q) == pytest.approx(after.source_q_kvar[0] / rating, abs=1e-4)
    assert end_of(course, d.KEPT_SPEED) == pytest.approx(after.frequency_pu[0, 0], abs=1e-4)


def with_points(at, points):
    mode = replace(at.mode, set_points={p.equipment: p for p in points})
    return mode_network(replace(at.network, plant=replace(at.network.plant, modes=(mode,))), mode)


def point(name, **changes):
    empty = {
        "no_load_voltage_pu": None,
        "no_load_frequency_pu": None,
        "p_set_kw": None,
        "regulator_mode": None,
        "tap_pu": None,
    }
    return SetPoint(equipment=name, mode="At sea", cell="", **{**empty, **changes})


@pytest.mark.parametrize(
    "held", [{"p_set_kw": 250.0}, {"regulator_mode": "kvar control", "q_set_kvar": 100.0}]
)
def test_a_set_at_a_set_power_or_kvar_comes_back_to_it(held):
    sets, base = [genset("G1"), genset("G2")], heater("L", 600.0 + 350.0j)
    at = with_points(network_of(sets, [base]), [point("G1", **held)])
    _, model = with_step(at, STEP_KVA, [600.0], [350.0])
    course = course_of(model, 60.0)
    more = with_points(network_of(sets, [base, heater("S", STEP_KVA)]), [point("G1", **held)])
    after = solved(more, [600.0, 300.0], [350.0, 200.0])
    assert end_of(course, d.KEPT_U) == pytest.approx(after.source_u_pu[0], abs=1e-4)
    assert end_of(course, d.KEPT_P) * 1000.0 == pytest.approx(after.source_p_kw[0], abs=0.2)
    assert end_of(course, d.KEPT_Q) * 1000.0 == pytest.approx(after.source_q_kvar[0], abs=0.2)


def test_two_equal_sets_are_one_of_double_size():
    pair = network_of([genset("G1"), genset("G2")])
    _, two = with_step(pair, 2.0 * STEP_KVA)
    whole = network_of([genset("G", s_rated_kva=2000.0, p_engine_kw=1720.0)])
    _, one = with_step(whole, 2.0 * STEP_KVA)
    a, b = course_of(two, 4.0, 0.002), course_of(one, 4.0, 0.002)
    for n in (0, 1):
        assert a.source[:, n, : d.KEPT_SPEED + 1] == pytest.approx(
            b.source[:, 0, : d.KEPT_SPEED + 1], abs=1e-7
        )
    assert a.v_pu[:, 0] == pytest.approx(b.v_pu[:, 0], abs=1e-7)


def test_shore_and_converter_settle_in_the_load_flow():
    at = network_of(
        [], [heater("L", 200.0 + 100.0j)], shore_supplies=[plants.shore("Shore", "MSB", u_rated_v=450.0)]
    )
    _, model = with_step(at, STEP_KVA, [200.0], [100.0])
    course = course_of(model, 2.0)
    more = network_of(
        [],
        [heater("L", 200.0 + 100.0j), heater("S", STEP_KVA)],
        shore_supplies=[plants.shore("Shore", "MSB", u_rated_v=450.0)],
    )
    after = solved(more, [200.0, 300.0], [100.0, 200.0])
    assert end_of(course, d.KEPT_U) == pytest.approx(after.source_u_pu[0], abs=1e-6)
    battery = plants.converter_supply("B", "MSB")
    at = network_of([genset()], [heater("L", 300.0 + 100.0j)], converter_supplies=[battery])
    _, model = with_step(at, STEP_KVA, [300.0], [100.0])
    course = course_of(model, 20.0)
    more = network_of(
        [genset()], [heater("L", 300.0 + 100.0j), heater("S", STEP_KVA)], converter_supplies=[battery]
    )
    after = solved(more, [300.0, 300.0], [100.0, 200.0])
    assert end_of(course, d.KEPT_U) == pytest.approx(after.source_u_pu[0], abs=1e-4)
    assert end_of(course, d.KEPT_SPEED) == pytest.approx(after.frequency_pu[0, 0], abs=1e-4)


# ---- whole vessels: trees of consumers drawn together


@pytest.fixture(scope="module", name="vessel")
def _vessel():
    plant = read_plant(BOOKS / "service-vessel.xlsx")
    network = build_network(plant)
    views = [mode_network(network, m).view for m in plant.modes]
    demand = load_balance(plant, views).demand
    row = [m.name for m in plant.modes].index("At sea")
    return mode_network(network, plant.modes[row]), demand.p_counted_kw[row], demand.q_counted_kvar[row]


def test_a_vessel_stays_in_its_load_flow(vessel):
    at, p, q = vessel
    batch = solved(at, p, q)
    model = build_model(batch, Plan(island=0, p_kw=p[None], q_kvar=q[None]))
    course = course_of(model, 2.0)
    assert np.ptp(course.v_pu, axis=0) == pytest.approx(0.0, abs=1e-7)
    assert np.ptp(course.source[:, :, d.KEPT_SPEED], axis=0) == pytest.approx(0.0, abs=1e-7)
    nodes = course.v_pu[:1, : len(model.lumped.bus)]
    every = np.arange(at.structure.all_buses)
    behind = voltages_behind(model.lumped, nodes, every)[0]
    known = ~np.isnan(behind)
    assert behind[known] == pytest.approx(np.abs(batch.v_bus_pu[0])[known], abs=1e-9)
    assert known.sum() > 20


def test_a_vessel_settles_in_its_load_flow_after_shedding(vessel):
    """A quarter of every consumer goes: the trees are then expanded around other voltages."""
    at, p, q = vessel
    batch = solved(at, p, q)
    states = {"p_kw": np.stack([p, 0.75 * p]), "q_kvar": np.stack([q, 0.75 * q])}
    off = Happening(at_s=STEP_AT_S, kind=d.CHANGE_LOAD, index=1)
    model = build_model(batch, Plan(island=0, **states, happenings=(off,)))
    course = course_of(model, 20.0)
    after = solve_batch(at, 0.75 * p, 0.75 * q)
    u = np.abs(after.v_bus_pu[0, model.lumped.bus])
    assert course.v_pu[-1, : len(u)] == pytest.approx(u, abs=1e-4)
    rating = np.array([at.sources[j].s_rated_kva for j in model.rows.place])
    assert end_of(course, d.KEPT_P) == pytest.approx(after.source_p_kw[0] / rating, abs=1e-4)
    assert end_of(course, d.KEPT_Q) == pytest.approx(after.source_q_kvar[0] / rating, abs=1e-4)


def test_the_first_moment_of_a_start_is_that_of_the_network_solved_in_full(vessel):
    """E.m.f. held behind X''d, the motor at standstill: the reduced network against every bus of the mode.

    The sets are given X''q = X''d, so that they are plain e.m.f.s: what is left is how trees are drawn up.
    """
    at, p, q = vessel
    plant = at.network.plant
    sets = tuple(replace(g, machine=replace(g.machine, x_q2_pu=g.machine.x_d2_pu)) for g in plant.gensets)
    at = mode_network(build_network(replace(plant, gensets=sets)), at.mode)
    load = max(
        (x for x in plant.loads if x.motor is not None and x.motor.starting_method == "direct"),
        key=lambda x: x.p_rated_kw,
    )
    event = Event(
        case="Start",
        mode=at.mode.name,
        kind="motor start",
        equipment=load.name,
        cell="",
        size=None,
        unit=None,
        at_s=STEP_AT_S,
        duration_s=None,
    )
    done = follow_case(at, [event], p, q)
    first = int(np.flatnonzero(np.diff(done.course.time_s) == 0.0)[0]) + 1
    nodes = len(done.model.lumped.bus)
    found = done.course.v_pu[first, :nodes]
    wanted = np.abs(full_network_at_start(done, load))[done.model.lumped.bus]
    assert (found < done.course.v_pu[0, :nodes] - 0.005).all()
    assert found == pytest.approx(wanted, abs=2e-4)


def full_network_at_start(done, load):
    """Return the voltages of every bus: sources behind X''d, consumers by their laws, the motor standing."""
    at, batch = done.work.at, done.batch
    structure, ports, n = at.structure, at.structure.ports, at.structure.buses
    y = np.zeros((structure.all_buses,) * 2, complex)
    y[:n, :n] = structure.admittance.toarray()
    leaf, parent = n + np.arange(ports.leaves), ports.bus[ports.parent]
    y[leaf, leaf], y[leaf, parent], y[parent, leaf] = ports.own[:, 0], ports.out[:, 0], ports.into[:, 0]
    right, v = np.zeros(len(y), complex), batch.v_bus_pu[0].copy()
    for j, s in enumerate(at.sources):
        m = at.network.plant.genset(s.name).machine
        z = complex(m.r_stator_pu, m.x_d2_pu * batch.frequency_pu[0, 0])
        z *= batch.laws.to_own_i[j, 0] / batch.laws.to_own_v[j, 0]
        bus = structure.source_bus[j]
        y[bus, bus] += 1.0 / z
        right[bus] += (v[bus] + z * batch.i_source_pu[0, j]) / z
    demand = demand_of(at, done.work.p_kw[None], done.work.q_kvar[None])
    place = np.concatenate([ports.bus[ports.direct], leaf])
    motor_bus, z_path = place_of(at, Drive(load=load, units=1.0, load_pu=1.0))
    y_motor = complex(motor_admittance(1.0, circuit_of(load))) * done.model.start.motor[0, d.Y_SCALE]
    y[motor_bus, motor_bus] += 1.0 / (z_path + 1.0 / y_motor)
    for _ in range(200):
        drawn = np.zeros(len(y), complex)
        power = demand.constant[:, 0] + demand.impedance[:, 0] * np.abs(v[place]) ** 2
        np.add.at(drawn, place, np.conj(power / v[place]))
        v = 0.5 * v + 0.5 * np.linalg.solve(y, right - drawn)
    return v


# ---- motors

MOTOR = {
    "u_rated_v": 450.0,
    "p_rated_kw": 75.0,
    "inertia_kgm2": 2.5,
    "starting_method": "direct",
    "torque_law": "fan",
}


def run_up(units: float = 1.0, **changes):
    """Return the course of a motor that starts on a shore supply without impedance, and its model."""
    load = plants.load("M", "MSB", **{**MOTOR, **changes})
    shore = plants.shore("Shore", "MSB", u_rated_v=450.0, fault_level_max_mva=None, fault_level_min_mva=None)
    at = network_of([], [load], shore_supplies=[shore])
    start = Happening(at_s=STEP_AT_S, kind=d.START_MOTOR, index=0)
    drive = Drive(load=load, units=units, load_pu=0.8)
    none = np.zeros((1, 1))
    plan = Plan(island=0, p_kw=none, q_kvar=none, drives=(drive,), happenings=(start,))
    model = build_model(solved(at, [0.0], [0.0]), plan)
    return course_of(model, 8.0, 0.002), model, load


@pytest.mark.parametrize("law", ["fan", "constant", "hyperbolic"])
def test_run_up_at_constant_voltage(law):
    course, model, load = run_up(torque_law=law)
    circuit = circuit_of(load)
    n = course.motor[:, 0, d.KEPT_TURNING]
    reached = 0.95 * (1.0 - circuit.slip_rated)
    found = float(course.time_s[np.flatnonzero(n >= reached)[0]] - STEP_AT_S)
    integral = run_up_integral(
        circuit, locked_rotor_torque=load.motor.locked_rotor_torque, law=law, load_pu=0.8
    )
    two_h = float(model.start.motor[0, d.MOTOR_2H])
    # The supply stands behind a thousandth of its rating; steps of 2 ms.
    assert found == pytest.approx(two_h * integral, rel=0.02)


def test_a_motor_settles_where_its_torque_is_the_load_s():
    course, _, load = run_up()
    circuit = circuit_of(load)
    slip = 1.0 - course.motor[-1, 0, d.KEPT_TURNING]
    u = course.motor[-1, 0, d.KEPT_MOTOR_U]
    against = 0.8 * (0.1 + 0.9 * (1.0 - slip) ** 2)
    assert float(motor_torque(slip, u, circuit)) == pytest.approx(against, rel=2e-3)
    assert course.motor[-1, 0, d.KEPT_TORQUE] == pytest.approx(course.motor[-1, 0, d.KEPT_AGAINST], rel=1e-6)


@pytest.mark.parametrize(
    ("changes", "current", "torque"),
    [
        ({"starting_method": "direct"}, 1.0, 1.0),
        ({"starting_method": "star-delta", "star_delta_change_s": 30.0}, 1.0 / 3.0, 1.0 / 3.0),
        ({"starting_method": "autotransformer", "autotransformer_tap": 0.65}, 0.65**2, 0.65**2),
        ({"starting_method": "soft starter", "soft_starter_ramp_s": 1e-3}, 3.0 / 6.5, (3.0 / 6.5) ** 2),
    ],
)
def test_current_and_torque_at_standstill_by_starter(changes, current, torque):
    """Star: a third of both; autotransformer: a^2 of both; soft starter: its limit, and its square."""
    course, _, load = run_up(**changes)
    row = course.motor[np.flatnonzero(course.motor[:, 0, d.KEPT_LINE_I] > 0.0)[1], 0]
    u = row[d.KEPT_MOTOR_U]
    of_limit = 1.0 if changes["starting_method"] == "soft starter" else u
    assert row[d.KEPT_LINE_I] == pytest.approx(6.5 * current * of_limit, rel=0.02)
    assert row[d.KEPT_TORQUE] == pytest.approx(
        load.motor.locked_rotor_torque * torque * of_limit**2, rel=0.03
    )


def test_several_units_draw_in_proportion():
    one, _, _ = run_up()
    two, _, _ = run_up(units=2.0)
    assert two.motor[:, 0, d.KEPT_LINE_I].max() == pytest.approx(
        one.motor[:, 0, d.KEPT_LINE_I].max(), rel=0.02
    )
    assert two.source[:, 0, d.KEPT_I].max() == pytest.approx(2.0 * one.source[:, 0, d.KEPT_I].max(), rel=0.02)
