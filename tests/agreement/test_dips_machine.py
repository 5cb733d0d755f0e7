"""One simulated set against closed forms, linear transfer functions, energy, and the full-order machine.

Sources: field equation behind an external reactance (Kimbark, Power System Stability, vol. III, from memory);
two-axis theory (Kundur, Power System Stability and Control, chapter 3); `scipy.signal` and `scipy.linalg` for
the linear responses.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.linalg import expm
from scipy.optimize import fsolve
from scipy.signal import lsim

from study.formulas.dips import recovery_time_at_ceiling, step_response_at_constant_field
from study.formulas.excitation import FieldSupply, available_field, unregulated_no_load_voltage
from study.formulas.exciters import (
    SLIP_RING_LAG_S,
    RegulatorGains,
    machine_open_circuit,
    regulated_open_circuit,
    self_excited_open_circuit,
)
from study.formulas.machine_constants import open_circuit_time_constant
from study.formulas.park import direct_axis_circuit, open_circuit_time_constants_s, quadrature_axis_circuit
from study.formulas.park_plant import SynchronousMachine, envelopes_a, plant_response
from study.formulas.synchronous import rated_load_field
from study.formulas.winding_times import coupling, winding_time_constants
from study.network import dynamics_data as d
from study.network.dynamics_build import Happening
from study.network.dynamics_run import empty_script, follow_plant
from study.network.dynamics_sources import set_alone
from study.network.machines import largest_field, machine_of
from tests.agreement.dips_plants import STEP_AT_S, course_of, genset, network_of, with_step

KVA = 1000.0
# The machine of the check values: Xd 2.0, X'd 0.2, X''d 0.12, T'd0 2.5 s, T''d0 0.03 s.
CHECK = {
    "x_d_pu": 2.0,
    "x_d1_pu": 0.2,
    "x_d2_pu": 0.12,
    "x_q_pu": 1.2,
    "x_q2_pu": 0.12,
    "x_l_pu": 0.08,
    "t_d01_s": 2.5,
    "t_d2_s": 0.03 * 0.12 / 0.2,
    "t_q2_s": 0.01,
    "r_stator_pu": 0.0,
    "saturation_10": 0.0,
    "saturation_12": 0.0,
    "no_load_voltage_pu": 1.0,
    "no_load_frequency_pu": 1.0,
}
X_LOAD = 2.0


def inductive_step(**changes):
    at = network_of([genset(**{**CHECK, "field_supply": "fixed", **changes})])
    _, model = with_step(at, complex(0.0, KVA / X_LOAD))
    return model


@pytest.fixture(scope="module", name="fixed_field")
def _fixed_field():
    course = course_of(inductive_step(), STEP_AT_S + 4.0, 0.001)
    after = course.time_s >= STEP_AT_S
    return course.time_s[after][1:] - STEP_AT_S, course.v_pu[after, 0][1:]


def test_first_moment_and_last_voltage(fixed_field):
    t, v = fixed_field
    assert t[0] == 0.0
    assert v[0] == pytest.approx(0.9434, abs=0.00005)  # half of the last digit
    assert v[-1] == pytest.approx(0.5, abs=0.04)  # after three time constants of 1.375 s


def test_constant_field_is_the_exact_linear_response(fixed_field):
    """Field and damper with an inductive load are two linear equations: the matrix exponential is exact."""
    t, v = fixed_field
    xd, x1, x2, xl = 2.0, 0.2, 0.12, 0.08
    t1, t2 = winding_time_constants(coupling(xd, x1, x2, xl), 2.5, 0.03)
    share, lead = (x2 - xl) / (x1 - xl), x1 - xl
    per_e = np.array([share, 1.0 - share])  # E''q of (E'q, psi1d)
    i = per_e / (x2 + X_LOAD)
    k = (x1 - x2) / lead**2
    linkage = i * (1.0 - k * lead) - k * np.array([-1.0, 1.0])
    a = np.array(
        [
            (np.array([-1.0, 0.0]) - (xd - x1) * linkage) / t1,
            (np.array([1.0, -1.0]) - lead * i) / t2,
        ]
    )
    start = np.array([1.0, 1.0])
    rest = np.linalg.solve(a, -np.array([1.0 / t1, 0.0]))
    exact = np.array([X_LOAD * i @ (rest + expm(a * x) @ (start - rest)) for x in t[::100]])
    assert v[::100] == pytest.approx(exact, abs=1e-6)


def test_constant_field_is_near_the_closed_form(fixed_field):
    """The closed form takes the time constants as far apart; the full-order machine lies between the two."""
    t, v = fixed_field
    data = {"x_d_pu": 2.0, "x_d1_pu": 0.2, "x_d2_pu": 0.12, "t_d01_s": 2.5, "t_d02_s": 0.03}
    closed = step_response_at_constant_field(t, X_LOAD, **data)
    assert np.abs(v - closed).max() < 0.012
    assert np.abs(v - closed)[t > 2.0].max() < 0.001


@pytest.mark.parametrize(("ceiling", "wanted_s"), [(2.0, 1.524), (3.0, 0.150), (4.0, 0.079)])
def test_recovery_with_the_field_at_its_ceiling(ceiling, wanted_s):
    """The field jumps to its ceiling, with hardly a damper: the closed form, which has none."""
    formula = recovery_time_at_ceiling(0.97, ceiling, X_LOAD, x_d_pu=2.0, x_d1_pu=0.2, t_d01_s=2.5)
    assert float(formula) == pytest.approx(wanted_s, abs=0.0005)  # half of the last digit
    no_damper = {"t_d2_s": 1e-3, "x_d2_pu": 0.1995, "x_q2_pu": 0.1995, "exciter_time_constant_s": 0.001}
    at = network_of([genset(**{**CHECK, "field_supply": "fixed", **no_damper})])
    jump = Happening(at_s=STEP_AT_S, kind=d.SET_PARAMETER, index=0, column=d.SUPPLY_C, value=ceiling)
    _, model = with_step(at, complex(0.0, KVA / X_LOAD), more=(jump,))
    course = course_of(model, STEP_AT_S + 1.2 * wanted_s, 0.0002)
    after = course.time_s > STEP_AT_S + 1e-9
    t, v = course.time_s[after] - STEP_AT_S, course.v_pu[after, 0]
    found = float(t[np.flatnonzero(v >= 0.97)[0]])
    # Lags of 1 ms of field and damper, steps of 0.2 ms; where the voltage comes back flat, 1e-4 pu are 5 ms.
    assert found == pytest.approx(wanted_s, abs=0.003 + 0.003 * wanted_s)


# ---- each excitation system at open circuit

SUPPLIES = ["permanent magnet", "auxiliary winding", "shunt", "compounded"]
GAINS = RegulatorGains(proportional=30.0, integral_per_s=20.0, derivative_s=2.0)
SET_POINT_STEP = 1e-4


def machine_function(item):
    m = item.machine
    return machine_open_circuit(
        x_d_pu=m.x_d_pu,
        x_d1_pu=m.x_d1_pu,
        x_d2_pu=m.x_d2_pu,
        x_l_pu=m.x_l_pu,
        t_d01_s=m.t_d01_s,
        t_d02_s=float(open_circuit_time_constant(m.t_d2_s, m.x_d2_pu, m.x_d1_pu)),
    )


def change_after(course):
    """Return times after the step, and voltage less the voltage before."""
    after = course.time_s > STEP_AT_S - 1e-9
    return course.time_s[after][1:] - STEP_AT_S, course.v_pu[after, 0][1:] - course.v_pu[0, 0]


@pytest.mark.parametrize("exciter_s", [0.12, None])
@pytest.mark.parametrize("supply", SUPPLIES)
def test_open_circuit_step_of_a_regulated_set(supply, exciter_s):
    """A small step of the set-point stays within the limits of every supply: the chain is linear."""
    excitation = {"field_supply": supply, "exciter_time_constant_s": exciter_s, "regulator_mode": "no droop"}
    item = genset(**{**CHECK, **excitation, "unregulated_voltage_pu": 1.3, "compound_current_share": 0.5})
    step = Happening(
        at_s=STEP_AT_S, kind=d.SET_PARAMETER, index=0, column=d.V_REF, value=1.0 + SET_POINT_STEP
    )
    _, model = with_step(network_of([item]), 0j, more=(step,))
    course = course_of(model, STEP_AT_S + 1.5, 0.0005)
    field, ceiling = course.source[:, 0, d.KEPT_FIELD], course.source[:, 0, d.KEPT_CEILING]
    assert (field > 0.0).all()
    assert (field < ceiling).all()
    t, dv = change_after(course)
    rated = float(model.start.source[0, d.RATED_FIELD])
    function = regulated_open_circuit(
        machine_function(item), GAINS, rated_field_pu=rated, exciter_s=exciter_s or SLIP_RING_LAG_S
    )
    wanted = lsim(function, np.ones(len(t)), t)[1]
    assert dv / SET_POINT_STEP == pytest.approx(wanted, abs=5e-4)


def test_open_circuit_step_of_a_fixed_field():
    item = genset(**{**CHECK, "field_supply": "fixed", "exciter_time_constant_s": 0.12})
    step = Happening(at_s=STEP_AT_S, kind=d.SET_PARAMETER, index=0, column=d.SUPPLY_C, value=1.1)
    _, model = with_step(network_of([item]), 0j, more=(step,))
    t, dv = change_after(course_of(model, STEP_AT_S + 3.0, 0.001))
    numerator, denominator = machine_function(item)
    function = (numerator, np.polymul(denominator, [0.12, 1.0]))
    assert dv / 0.1 == pytest.approx(lsim(function, np.ones(len(t)), t)[1], abs=1e-5)


def test_open_circuit_step_of_a_compounded_set_without_regulator():
    """Without saturation nothing fixes the voltage at a gain of 1: the supply is turned down to 0.6 of it.

    What it then lacks is given as a constant part, stepped by a tenth.
    """
    item = genset(
        **{**CHECK, "field_supply": "compounded without regulator", "exciter_time_constant_s": 0.12},
        unregulated_voltage_pu=1.0,
        compound_current_share=0.73,
    )
    step = Happening(at_s=STEP_AT_S, kind=d.SET_PARAMETER, index=0, column=d.SUPPLY_C, value=0.5)
    start = set_alone(item, FieldSupply(constant_pu=0.4, voltage_gain=0.6, current_gain=1.0), 60.0, 1.0)
    start.source[0, [d.FIELD, d.TURBO]] = 1.0, 0.0
    script = empty_script(1)._replace(event=np.array([[STEP_AT_S, step.kind, 0, step.column, step.value]]))
    t, dv = change_after(follow_plant(start, script, STEP_AT_S + 3.0, 0.001))
    function = self_excited_open_circuit(machine_function(item), voltage_gain=0.6, exciter_s=0.12)
    assert dv / 0.1 == pytest.approx(lsim(function, np.ones(len(t)), t)[1], abs=1e-5)


# ---- levels and speed of excitation systems: common practice, no source


def test_unregulated_level_of_a_compounded_set():
    """Common practice: about 120 % of rated voltage with the regulator taking nothing away."""
    item = genset(field_supply="compounded", unregulated_voltage_pu=1.2, compound_current_share=0.68)
    start = set_alone(item, largest_field(item), 60.0, 0.9)
    start.source[0, d.REGULATOR] = d.SUPPLY_ALONE
    start.source[0, d.FIELD] = 0.9
    course = follow_plant(start, empty_script(1), 40.0, 0.002)
    found = float(course.v_pu[-1, 0])
    assert found == pytest.approx(1.2, abs=0.06)
    supply = largest_field(item)
    assert found == pytest.approx(unregulated_no_load_voltage(supply, 2.0, machine_of(item)), abs=1e-4)


def after_rated_current(until_s: float, **changes):
    """Return times since, and voltage after, rated current at power factor 0.4 is thrown on."""
    at = network_of([genset(**{"regulator_mode": "no droop", "no_load_frequency_pu": 1.0, **changes})])
    _, model = with_step(at, KVA * complex(0.4, 0.84**0.5))
    return change_after(course_of(model, STEP_AT_S + until_s, 0.001))


def test_a_compounded_set_recovers_faster_than_a_plain_brushless_one():
    """Common practice: the current transformers force the field at once, a rotating exciter lags.

    Both have the same field to spare at rated load. Even twice the field behind an exciter dips deeper.
    """
    compounded = {
        "field_supply": "compounded",
        "unregulated_voltage_pu": 1.2,
        "compound_current_share": 0.68,
        "exciter_time_constant_s": None,
    }
    item = genset(**compounded)
    spare = float(available_field(1.0, 1.0, np.arccos(0.8), largest_field(item)))
    spare /= rated_load_field(0.8, machine_of(item))
    brushless = {"field_supply": "shunt", "exciter_time_constant_s": 0.2}
    t, dv = after_rated_current(3.0, **compounded)
    _, plain = after_rated_current(3.0, **brushless, ceiling=spare)
    _, strong = after_rated_current(3.0, **brushless, ceiling=2.0)
    assert 1.0 < spare < 1.3
    assert dv[-1] > -0.03 > plain[-1]
    assert t[np.flatnonzero(dv > -0.03)[1]] < 3.0
    assert strong.min() < dv.min() - 0.015
    assert plain.min() < dv.min() - 0.05


# ---- energy


def test_energy_balance_of_a_load_step():
    """What the engine gives less what the stator takes is what the shaft gains: integrated over 3 s."""
    _, model = with_step(network_of([genset()]), complex(400.0, 300.0))
    course = course_of(model, 3.0, 0.001)
    kept, t, par = course.source[:, 0], course.time_s, model.start.source[0]
    w = kept[:, d.KEPT_SPEED]
    given = kept[:, d.KEPT_ENGINE] * par[d.P_RATED] * w
    taken = kept[:, d.KEPT_P] + par[d.RA] * kept[:, d.KEPT_I] ** 2
    steps = np.diff(t)
    gained = float((0.5 * ((given - taken)[1:] + (given - taken)[:-1]) * steps).sum())
    stored = 0.5 * par[d.TWO_H] * (w[-1] ** 2 - w[0] ** 2)
    moved = float(np.abs(taken).max() * t[-1])
    assert abs(gained - stored) < 2e-5 * moved  # trapezoidal integral of a jump and of 1 ms steps
    assert abs(stored) > 1e-3  # the speed has changed: the balance is not of nothing


# ---- the full-order machine


def short_circuit_times(m):
    """Return T'd and T''d whose machine has exactly T'd0 and T''d0 at open circuit."""
    wanted = np.array([m.t_d01_s, float(open_circuit_time_constant(m.t_d2_s, m.x_d2_pu, m.x_d1_pu))])

    def error(times):
        found = open_circuit_time_constants_s(
            xd=m.x_d_pu, x_trans=m.x_d1_pu, x_sub=m.x_d2_pu, t_trans_s=times[0], t_sub_s=times[1]
        )
        return np.array(found) - wanted

    return fsolve(error, [m.t_d01_s * m.x_d1_pu / m.x_d_pu, m.t_d2_s])


@pytest.mark.parametrize("x_load", [2.0, 0.8])
def test_the_first_100_ms_are_those_of_the_full_order_machine(x_load):
    """Two-axis machine with its stator transients, loaded by a reactance: the a.c. part of its current.

    Its windings have exactly the open-circuit time constants of the data; the model of the simulation has
    them as well, and differs in how much of the current each of the two carries.
    """
    item = genset(**{**CHECK, "field_supply": "fixed", "r_stator_pu": 0.005})
    m = item.machine
    t_d1, t_d2 = short_circuit_times(m)
    full = SynchronousMachine(
        direct=direct_axis_circuit(
            xd=m.x_d_pu,
            x_trans=m.x_d1_pu,
            x_sub=m.x_d2_pu,
            x_leak=m.x_l_pu,
            t_trans_s=t_d1,
            t_sub_s=t_d2,
            frequency_hz=60.0,
        ),
        quadrature=quadrature_axis_circuit(
            xq=m.x_q_pu, x_sub=m.x_q2_pu, x_leak=m.x_l_pu, t_sub_s=m.t_q2_s, frequency_hz=60.0
        ),
        x_leak_ohm=m.x_l_pu,
        ra_ohm=m.r_stator_pu,
        load_a=0j,
        field_step_v=0.0,
        cable_r_ohm=0.0,
        cable_x_ohm=0.0,
    )
    response = plant_response(
        [full], voltage_v=3.0**0.5, fault_r_ohm=0.0, fault_x_ohm=x_load, frequency_hz=60.0
    )
    _, model = with_step(network_of([item]), complex(0.0, KVA / x_load))
    course = course_of(model, STEP_AT_S + 0.1, 0.0005)
    after = course.time_s > STEP_AT_S - 1e-9
    t, i = course.time_s[after][1:] - STEP_AT_S, course.source[after, 0, d.KEPT_I][1:]
    wanted = envelopes_a(response, t)[0]
    assert i == pytest.approx(wanted, rel=0.013)
