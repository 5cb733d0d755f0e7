"""The full-order machine against its definition, its closed form and a direct integration.

Source: two-axis equations, Kundur, Power System Stability and Control, chapter 3; closed form after Adkins in
Sheldrake, Handbook of Electrical Engineering, p. 492. The machine: 1 MVA, 60 Hz, Xd 2.2, X'd 0.25, X''d 0.15,
Xq 1.1, X''q 0.18, Xl 0.09, Ra 0.01 pu, T'd 0.25 s, T''d and T''q 15 ms; per unit of the machine throughout.
"""

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from study.formulas.park import (
    classical_direct_axis,
    direct_axis_circuit,
    no_load_fault_current,
    open_circuit_time_constants_s,
    quadrature_axis_circuit,
)
from study.formulas.park_plant import (
    InductionMachine,
    SynchronousMachine,
    envelopes_a,
    phasors_a,
    plant_response,
)

HZ = 60.0
W0 = 2.0 * math.pi * HZ
U_LINE = math.sqrt(3.0)
DIRECT = {
    "xd": 2.2,
    "x_trans": 0.25,
    "x_sub": 0.15,
    "x_leak": 0.09,
    "t_trans_s": 0.25,
    "t_sub_s": 0.015,
    "frequency_hz": HZ,
}
RATED_LOAD = 0.8 - 0.6j


def machine(load=0.0, *, axis=direct_axis_circuit, xq_sub=0.18, ra=0.01, field_step=0.0):
    return SynchronousMachine(
        direct=axis(**DIRECT),
        quadrature=quadrature_axis_circuit(xq=1.1, x_sub=xq_sub, x_leak=0.09, t_sub_s=0.015, frequency_hz=HZ),
        x_leak_ohm=0.09,
        ra_ohm=ra,
        load_a=load,
        field_step_v=field_step,
        cable_r_ohm=0.0,
        cable_x_ohm=0.0,
    )


MOTOR = InductionMachine(
    rs_ohm=0.068,
    rr_ohm=0.042,
    xs_ohm=0.15,
    xr_ohm=0.15,
    xm_ohm=6.0,
    slip=0.021,
    cable_r_ohm=0.01,
    cable_x_ohm=0.01,
)


def fault(machines, motors=(), r=0.0, x=0.0):
    return plant_response(
        [*machines, *motors], voltage_v=U_LINE, fault_r_ohm=r, fault_x_ohm=x, frequency_hz=HZ
    )


def operational_admittance(s, axis):
    """1/Xd(s) of the circuit itself: leakage, then the mutual reactance beside both rotor windings."""
    rotor = sum(
        1.0 / (x + r * W0 / s) for x, r in ((axis.x_field, axis.r_field), (axis.x_damper, axis.r_damper))
    )
    return 1.0 / (0.09 + 1.0 / (1.0 / axis.xad + rotor))


@pytest.mark.parametrize("s", [0.5, 7.0, 80.0, 10j, 377j, -2.0 + 30j])
def test_circuit_has_the_operational_admittance_of_its_data(s):
    d = DIRECT
    wanted = (
        1.0 / d["xd"]
        + (1.0 / d["x_trans"] - 1.0 / d["xd"]) * s * d["t_trans_s"] / (1.0 + s * d["t_trans_s"])
        + (1.0 / d["x_sub"] - 1.0 / d["x_trans"]) * s * d["t_sub_s"] / (1.0 + s * d["t_sub_s"])
    )
    assert operational_admittance(s, direct_axis_circuit(**d)) == pytest.approx(wanted, rel=1e-10)


def test_open_circuit_time_constants_are_those_of_the_circuit_with_open_stator():
    axis = direct_axis_circuit(**DIRECT)
    # Field and damper coupled by Xad alone: det(R + s X / w0) = 0.
    x = np.array([[axis.x_field + axis.xad, axis.xad], [axis.xad, axis.x_damper + axis.xad]])
    rates = np.linalg.eigvals(-W0 * np.linalg.solve(x, np.diag([axis.r_field, axis.r_damper])))
    wanted = sorted(-1.0 / rates.real, reverse=True)
    found = open_circuit_time_constants_s(
        **{k: v for k, v in DIRECT.items() if k not in ("x_leak", "frequency_hz")}
    )
    assert found == pytest.approx(wanted, rel=1e-9)


def test_classical_circuit_is_close_but_not_exact():
    half_cycle_and_later = np.array([0.5 / HZ, 0.1])
    exact = envelopes_a(fault([machine(RATED_LOAD)]), half_cycle_and_later)[1]
    classical = envelopes_a(fault([machine(RATED_LOAD, axis=classical_direct_axis)]), half_cycle_and_later)[1]
    # The usual approximation neglects the field's resistance in T''d and the damper in T'd.
    assert classical / exact - 1.0 == pytest.approx([0.010, 0.032], abs=0.0005)


def test_unloaded_fault_agrees_with_the_closed_form():
    # Adkins neglects all resistance against reactance, which is worth 6 % with the machine's own time
    # constants; a hundred times longer ones leave about 1/(w T''d) = 0.18 % of the greatest current.
    time_s = np.linspace(0.0, 2.0, 4999)
    ra = 0.0001
    slow = {**DIRECT, "t_trans_s": 25.0, "t_sub_s": 1.5}
    unloaded = SynchronousMachine(
        direct=direct_axis_circuit(**slow),
        quadrature=quadrature_axis_circuit(xq=1.1, x_sub=0.18, x_leak=0.09, t_sub_s=1.5, frequency_hz=HZ),
        x_leak_ohm=0.09,
        ra_ohm=ra,
        load_a=0.0,
        field_step_v=0.0,
        cable_r_ohm=0.0,
        cable_x_ohm=0.0,
    )
    turning = phasors_a(fault([unloaded]), time_s)[0]
    for angle in (0.0, 0.7, math.pi / 2.0, 2.5):
        # The turning frame has the voltage on its real axis; the closed form takes it as -sin(wt + a).
        found = math.sqrt(2.0) * np.real(turning * np.exp(1j * (W0 * time_s + angle + math.pi / 2.0)))
        closed = no_load_fault_current(
            voltage=1.0,
            **{k: v for k, v in slow.items() if k != "x_leak"},
            xq_sub=0.18,
            ra=ra,
            angle_rad=angle,
            time_s=time_s,
        )
        assert np.abs(found - closed).max() < 0.0018 * np.abs(closed).max()


def test_loaded_fault_agrees_with_integrated_flux_equations():
    axis = direct_axis_circuit(**DIRECT)
    quad = quadrature_axis_circuit(xq=1.1, x_sub=0.18, x_leak=0.09, t_sub_s=0.015, frequency_hz=HZ)
    ra, load = 0.01, RATED_LOAD
    delta = np.angle(1.0 + (ra + 1.1j) * load)
    phi = -np.angle(load)
    i_d, i_q = math.sin(delta + phi), math.cos(delta + phi)
    v_q = math.cos(delta)
    i_f = (v_q + ra * i_q + 2.2 * i_d) / axis.xad
    to_flux_d = np.array(
        [
            [-2.2, axis.xad, axis.xad],
            [-axis.xad, axis.xad + axis.x_field, axis.xad],
            [-axis.xad, axis.xad, axis.xad + axis.x_damper],
        ]
    )
    to_flux_q = np.array([[-1.1, quad.xaq], [-quad.xaq, quad.xaq + quad.x_damper]])
    v_f = axis.r_field * i_f
    start = np.concatenate([to_flux_d @ [i_d, i_f, 0.0], to_flux_q @ [i_q, 0.0]])

    def currents(flux):
        return np.linalg.solve(to_flux_d, flux[:3]), np.linalg.solve(to_flux_q, flux[3:])

    def rate(_time, flux):
        d, q = currents(flux)
        return W0 * np.array(
            [
                ra * d[0] + flux[3],
                v_f - axis.r_field * d[1],
                -axis.r_damper * d[2],
                ra * q[0] - flux[0],
                -quad.r_damper * q[1],
            ]
        )

    times = np.linspace(0.0, 0.2, 400)
    solved = solve_ivp(rate, (0.0, 0.2), start, t_eval=times, method="DOP853", rtol=1e-11, atol=1e-12)
    magnitude = [math.hypot(d[0], q[0]) for d, q in map(currents, solved.y.T)]
    found = np.abs(phasors_a(fault([machine(RATED_LOAD)]), times)[1])
    assert found == pytest.approx(magnitude, abs=1e-8)  # the integrator's own error


def test_plant_behind_a_common_impedance_agrees_with_integration_in_space_vectors():
    """One generator and one motor behind a common branch, with motor fluxes and space vectors as states."""
    r_fault, x_fault = 0.03, 0.05
    times = np.linspace(0.0, 0.1, 200)
    response = fault([machine(0.0)], [MOTOR], r_fault, x_fault)
    axis = direct_axis_circuit(**DIRECT)
    quad = quadrature_axis_circuit(xq=1.1, x_sub=0.18, x_leak=0.09, t_sub_s=0.015, frequency_hz=HZ)
    # No load: the rotor's q axis lies on the voltage. States: rotor fluxes and the two stator currents.
    xs, rs = MOTOR.xs_ohm + MOTOR.cable_x_ohm, MOTOR.rs_ohm + MOTOR.cable_r_ohm
    x_rotor = MOTOR.xm_ohm + MOTOR.xr_ohm
    rotor_d = np.array([[axis.xad + axis.x_field, axis.xad], [axis.xad, axis.xad + axis.x_damper]])
    v_f = axis.r_field / axis.xad
    motor_z = (
        rs
        + 1j * xs
        + 1.0 / (1.0 / (1j * MOTOR.xm_ohm) + 1.0 / (MOTOR.rr_ohm / MOTOR.slip + 1j * MOTOR.xr_ohm))
    )
    i_m0 = -1.0 / motor_z
    back_v = 1.0 + (rs + 1j * xs) * i_m0
    i_r0 = (back_v / 1j + MOTOR.xm_ohm * i_m0) / MOTOR.xm_ohm
    flux_r0 = -MOTOR.xm_ohm * i_m0 + x_rotor * i_r0

    def rate(_time, y):
        flux_f, flux_1, flux_1q, gen_d, gen_q, m_re, m_im, fr_re, fr_im = y
        motor, flux_r = m_re + 1j * m_im, fr_re + 1j * fr_im
        i_f, i_1 = np.linalg.solve(rotor_d, [flux_f + axis.xad * gen_d, flux_1 + axis.xad * gen_d])
        i_1q = (flux_1q + quad.xaq * gen_q) / (quad.xaq + quad.x_damper)
        i_r = (flux_r + MOTOR.xm_ohm * motor) / x_rotor
        d_flux_f, d_flux_1 = v_f - axis.r_field * i_f, -axis.r_damper * i_1
        d_flux_1q, d_flux_r = -quad.r_damper * i_1q, -MOTOR.rr_ohm * i_r - 1j * MOTOR.slip * flux_r
        flux_d = -2.2 * gen_d + axis.xad * (i_f + i_1)
        flux_q = -1.1 * gen_q + quad.xaq * i_1q
        flux_s = -(xs + MOTOR.xm_ohm) * motor + MOTOR.xm_ohm * i_r
        # Five unknown derivatives: generator d and q, motor real and imaginary with the common voltage.
        k_d = axis.xad * np.linalg.solve(rotor_d, [1.0, 1.0])
        x_gen_d = 2.2 - k_d.sum() * axis.xad
        x_gen_q = 1.1 - quad.xaq**2 / (quad.xaq + quad.x_damper)
        x_mot = xs + MOTOR.xm_ohm - MOTOR.xm_ohm**2 / x_rotor
        drive_d = k_d @ [d_flux_f, d_flux_1]
        drive_q = quad.xaq / (quad.xaq + quad.x_damper) * d_flux_1q
        drive_m = MOTOR.xm_ohm / x_rotor * d_flux_r
        total = (gen_q + motor.real) + 1j * (-gen_d + motor.imag)
        drop = (r_fault + 1j * x_fault) * (total - i_m0)  # the motor's load current never crossed the branch
        # v_q - j v_d in the common frame, rotor q axis on the real axis.
        known_q = -0.01 * gen_q + flux_d + drive_q - drop.real
        known_d = -0.01 * gen_d - flux_q + drive_d + drop.imag
        known_m = -rs * motor + 1j * flux_s + drive_m - drop
        lhs = np.array([[x_gen_q + x_fault, x_fault], [x_fault, x_mot + x_fault]])
        d_gen_q, d_m_re = np.linalg.solve(lhs, [known_q, known_m.real])
        lhs = np.array([[x_gen_d + x_fault, -x_fault], [-x_fault, x_mot + x_fault]])
        d_gen_d, d_m_im = np.linalg.solve(lhs, [known_d, known_m.imag])
        return W0 * np.array(
            [d_flux_f, d_flux_1, d_flux_1q, d_gen_d, d_gen_q, d_m_re, d_m_im, d_flux_r.real, d_flux_r.imag]
        )

    i_f0 = 1.0 / axis.xad
    start = [
        (axis.xad + axis.x_field) * i_f0,
        1.0,
        0.0,
        0.0,
        0.0,
        i_m0.real,
        i_m0.imag,
        flux_r0.real,
        flux_r0.imag,
    ]
    solved = solve_ivp(rate, (0.0, 0.1), start, t_eval=times, method="DOP853", rtol=1e-11, atol=1e-12)
    found = phasors_a(response, times)
    assert np.hypot(solved.y[3], solved.y[4]) == pytest.approx(np.abs(found[1]), abs=1e-8)
    assert solved.y[5] + 1j * solved.y[6] == pytest.approx(found[2], abs=1e-8)


def test_steady_current_of_a_plant_is_that_of_the_phasor_circuit():
    response = fault([machine(), machine(field_step=1.5)], [MOTOR], 0.0, 0.2)
    # E.m.f. 1 and 2.5 behind Xd 2.2, the motor passive. The sets were unloaded, so the motor's own current
    # before the fault came from elsewhere and goes on.
    motor_z = 0.078 + 0.16j + 1.0 / (1.0 / 6j + 1.0 / (0.042 / 0.021 + 0.15j))
    zd = 0.01 + 2.2j
    voltage = (1.0 / zd + 2.5 / zd + 1.0 / motor_z) / (2.0 / zd + 1.0 / motor_z + 1.0 / 0.2j)
    # Saliency turns a small q-axis part against the d axis: a few tenths of a percent.
    assert abs(response.steady_a[0]) == pytest.approx(abs(voltage / 0.2j), rel=5e-3)
