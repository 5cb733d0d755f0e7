"""The quick estimate against the voltage divider, against itself, and against the simulation of a start."""

from __future__ import annotations

import numpy as np
import pytest

from study.analyses.dips_estimate import start_estimates
from study.analyses.dips_event_estimate import event_estimates
from study.analyses.dips_largest import GRID_KW, admittance_for_dip
from study.analyses.dips_options import DipOptions
from study.analyses.dips_simulation import simulate_case
from study.formulas.dips import dip_from_no_load, largest_start_kva, starting_impedance, voltage_after_start
from study.formulas.induction import typical_efficiency, typical_power_factor, typical_starting_data
from study.model.modes import Event
from study.network.network import build_network, mode_network
from study.results.dips import START_METHODS
from tests import plants
from tests.agreement.dips_plants import genset

SET = {"no_load_voltage_pu": 1.0, "regulator_mode": "no droop", "voltage_droop_pu": 0.0}


def estimates(loads, p, q, *, sets=None, options=None, **more):
    plant = plants.plant(
        boards=more.pop("boards", [plants.board("MSB", 450.0)]),
        gensets=sets or [genset(**SET)],
        loads=loads,
        **more,
    )
    at = mode_network(build_network(plant), plant.modes[0])
    (found,), largest = start_estimates([at], np.array([p]), np.array([q]), options)
    return found, largest, at


def motor(name="M", board="MSB", **changes):
    start = {"p_rated_kw": 75.0, "u_rated_v": 450.0, "starting_current": 6.5, "starting_cos_phi": 0.25}
    return plants.load(name, board, **{**start, **changes})


INPUT_KVA = 75.0 / (0.93 * 0.86)


def test_from_no_load_it_is_the_voltage_divider():
    found, _, _ = estimates([motor()], [0.0], [0.0])
    z = complex(starting_impedance(1000.0, 6.5 * INPUT_KVA, 0.25))
    z_set = complex(0.01, 0.25)
    assert found.u_set_board_pu[:, 0] == pytest.approx(abs(z / (z + z_set)), rel=1e-9)
    assert found.dip_pu[0] == pytest.approx(float(dip_from_no_load(0.25, z)), abs=0.004)  # Ra left out
    assert found.u_set_board_first_cycle_pu[0] == pytest.approx(abs(z / (z + complex(0.01, 0.15))), rel=1e-9)
    assert found.u_terminal_pu[:, 0] == pytest.approx(found.u_set_board_pu[:, 0])


def test_the_rule_of_thumb_of_ships():
    """A motor of 6 times rated current on 1/8 of the set's kVA dips 15 % where X'd is 0.235 pu.

    Source: Japanese ship textbook (Nippon Foundation library).
    """
    assert float(largest_start_kva(0.235, 0.15)) == pytest.approx(6.0 / 8.0, abs=0.002)


@pytest.mark.parametrize("law", ["constant impedance", "constant current", "constant power"])
def test_the_load_before_by_its_law(law):
    heater = plants.load("L", "MSB", "heating", p_rated_kw=500.0, cos_phi=0.8, u_rated_v=450.0)
    found, _, _ = estimates([motor(), heater], [0.0, 500.0], [0.0, 375.0])
    z = complex(starting_impedance(1000.0, 6.5 * INPUT_KVA, 0.25))
    wanted = voltage_after_start(1.0, complex(0.01, 0.25), z, s_load_pu=0.5 + 0.375j, law=law)
    row = ("constant impedance", "constant current", "constant power").index(law)
    assert found.u_set_board_pu[row, 0] == pytest.approx(abs(complex(wanted)), rel=1e-6)


@pytest.mark.parametrize(
    ("method", "current", "torque"),
    [("direct", 1.0, 1.0), ("star-delta", 1 / 3, 1 / 3), ("autotransformer", 0.65**2, 0.65**2)],
)
def test_current_and_torque_by_method(method, current, torque):
    found, _, _ = estimates([motor(starting_method=method)], [0.0], [0.0])
    rated_a = 1000.0 * INPUT_KVA / (3**0.5 * 450.0)
    assert found.line_current_a[0] == pytest.approx(6.5 * current * rated_a)
    assert found.torque_pu[0] == pytest.approx(2.0 * torque * found.u_terminal_pu[0, 0] ** 2)


def test_a_motor_fed_by_a_converter_draws_no_starting_current():
    found, _, _ = estimates([motor(starting_method="converter")], [0.0], [0.0])
    assert found.solved
    assert found.loads == ()


def test_the_motor_s_own_run_and_the_row_worked_by_hand():
    found, _, at = estimates([motor()], [0.0], [0.0], cables=[plants.cable("C", "MSB", "M")])
    t = found.worked
    z = t.z_path + t.z_motor
    assert abs(t.v_after) == pytest.approx(abs(t.v_before * z / (t.z_source + z)), rel=1e-9)
    assert found.u_terminal_pu[0, 0] == pytest.approx(abs(t.v_after * t.z_motor / z), rel=1e-9)
    z_base = 450.0**2 / (1000.0 * at.network.s_base_kva)
    assert t.z_path.imag * z_base == pytest.approx(0.090 * 0.05, rel=1e-9)


def test_the_engines_at_the_start():
    heater = plants.load("L", "MSB", "heating", p_rated_kw=500.0, cos_phi=1.0, u_rated_v=450.0)
    found, _, _ = estimates([motor(), heater], [0.0, 500.0], [0.0, 0.0])
    u = found.u_terminal_pu[0, 0]
    assert found.p_engine_before_kw[0] == pytest.approx(500.0, rel=1e-6)
    assert found.p_engine_start_kw[0] == pytest.approx(500.0 + 6.5 * INPUT_KVA * u * u * 0.25, rel=1e-6)
    assert found.p_engine_limit_kw[0] == pytest.approx(1.1 * 860.0 * 0.95)


@pytest.mark.parametrize("method", [0, 1, 2, 3])
def test_the_largest_motor_makes_the_dip_allowed(method):
    heater = plants.load("L", "MSB", "heating", p_rated_kw=300.0, cos_phi=0.8, u_rated_v=450.0)
    _, (largest,), _ = estimates([heater], [300.0], [225.0], options=DipOptions(dip_allowed_pu=0.12))
    p_kw = float(largest.p_rated_kw[method])
    start = typical_starting_data(p_kw)
    usual = motor(
        p_rated_kw=p_kw,
        efficiency=typical_efficiency(p_kw, "IE2", 60.0),
        cos_phi=typical_power_factor(p_kw, 4),
        starting_method=START_METHODS[method],
        starting_current=start.starting_current,
        starting_cos_phi=start.starting_cos_phi,
        autotransformer_tap=0.65,
        soft_starter_current=3.5,
    )
    found, _, _ = estimates([usual, heater], [0.0, 300.0], [0.0, 225.0])
    dip = 1.0 - found.u_set_board_pu[0, 0] / found.u_set_board_before_pu[0]
    # The usual data are worked out on a grid of ratings and met on a line between two.
    assert dip == pytest.approx(0.12, abs=0.002)
    assert GRID_KW[0] < p_kw < GRID_KW[-1]


def test_admittance_for_a_dip():
    y = float(admittance_for_dip(0.02 + 0.2j, np.array([0.3]), 0.15)[0])
    turned = y * complex(0.3, -((1.0 - 0.09) ** 0.5))
    assert abs(1.0 / (1.0 + (0.02 + 0.2j) * turned)) == pytest.approx(0.85, rel=1e-12)


def test_a_mode_without_a_solution_says_why():
    found, largest, _ = estimates([motor()], [3000.0], [0.0])
    assert not found.solved
    assert "exceeds" in found.reason
    assert largest == ()


def test_the_simulation_dips_between_the_first_cycle_and_the_transient_estimate():
    """Behind X''d it starts, behind X'd it would come to rest if the field did nothing: 5 to 150 ms."""
    found, _, at = estimates([motor(inertia_kgm2=6.0)], [0.0], [0.0])
    event = Event(
        case="Start",
        mode="At sea",
        kind="motor start",
        equipment="M",
        cell="",
        size=None,
        unit=None,
        at_s=0.2,
        duration_s=None,
    )
    case = simulate_case(at, [event], np.zeros(1), np.zeros(1), options=DipOptions(after_s=1.0))
    first = np.flatnonzero(np.diff(case.time_s) == 0.0)[0] + 1
    # The first moment is that of X''d, but for the saliency of the other axis.
    assert case.u_board_pu[first] == pytest.approx(found.u_set_board_first_cycle_pu[0], abs=0.004)
    at_50ms = float(np.interp(0.25, case.time_s[first:], case.u_board_pu[first:]))
    assert found.u_set_board_pu[0, 0] - 0.01 < at_50ms < found.u_set_board_first_cycle_pu[0]


def rows(kind, equipment, size=None, unit=None):
    return Event(
        case=f"{kind} of {equipment}",
        mode="At sea",
        kind=kind,
        equipment=equipment,
        cell="Events!A5",
        size=size,
        unit=unit,
        at_s=0.2,
        duration_s=None,
    )


@pytest.mark.parametrize(
    "event",
    [
        rows("motor start", "M"),
        rows("load step", "MSB", 300.0, "kVA"),
        rows("load rejection", "MSB", 60.0, "%"),
        rows("set trip", "G2"),
        rows("transformer energising", "T"),
    ],
    ids=lambda e: e.kind,
)
def test_every_kind_of_event_starts_as_estimated(event):
    """Superposition behind X''d and the simulation's first moment: two routes, impedances for consumers.

    The other axis, the speed of the sets and constant power make the difference.
    """
    heater = plants.load("L", "MSB", "heating", p_rated_kw=700.0, cos_phi=0.9, u_rated_v=450.0)
    plant = plants.plant(
        boards=[plants.board("MSB", 450.0), plants.board("LDB", 230.0)],
        gensets=[genset("G1"), genset("G2", s_rated_kva=700.0, p_engine_kw=600.0)],
        loads=[motor(), heater],
        transformers=[plants.transformer("T", "MSB", "LDB", s_rated_kva=80.0)],
        events=[event],
    )
    at = mode_network(build_network(plant), plant.modes[0])
    p, q = np.array([0.0, 700.0]), np.array([0.0, 339.0])
    (found,) = event_estimates([at], p[None], q[None])
    case = simulate_case(at, [event], p, q, options=DipOptions(after_s=0.3))
    first = np.flatnonzero(np.diff(case.time_s) == 0.0)[0] + 1
    assert found.assessed
    assert found.board == case.board == "MSB"
    assert found.u_before_pu == pytest.approx(case.u_board_pu[0], abs=1e-6)
    change = case.u_board_pu[first] - case.u_board_pu[0]
    assert found.u_first_cycle_pu - found.u_before_pu == pytest.approx(change, abs=0.004, rel=0.08)
    assert abs(found.change_pu) > abs(found.u_first_cycle_pu / found.u_before_pu - 1.0)


def test_an_event_without_a_closed_form_says_so():
    plant = plants.plant(
        boards=[plants.board("MSB", 450.0)],
        gensets=[genset("G1")],
        loads=[motor()],
        events=[rows("field loss", "G1"), rows("motor start", "L9")],
    )
    at = mode_network(build_network(plant), plant.modes[0])
    field, unknown = event_estimates([at], np.zeros((1, 1)), np.zeros((1, 1)))
    assert not field.assessed
    assert "see the simulation" in field.reason
    assert not unknown.assessed
    assert np.isnan(unknown.change_pu)
