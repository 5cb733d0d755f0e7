"""IEC 61363-1 against the full-order machine: at terminals and behind an impedance.

The machine: 1 MVA, 450 V, 60 Hz, Xd 2.2, X'd 0.25, X''d 0.15, Xq 1.1, X''q 0.18, Xl 0.09, Ra 0.01 pu, T'd
0.25 s, T''d 15 ms, Tdc = X''d/(w Ra), constant field; Ikd is the true steady current.

The differences are properties of the method: loaded, the formula puts the whole e.m.f. on the direct axis,
and behind resistance its decay theory takes R as small against X. Another program, written apart, gave the
same full-order values to the last digit and the same differences within 0.1 % (it had no guard at R = X = 0,
worth 0.2 % of T'' and T'). They are held within half of the last digit; a wrong T''de, T'de or Tdce moves
them by percents.
"""

import math

import numpy as np
import pytest

from study.formulas.fault_current import ac_component_a, greatest_peak_a, half_cycle_peak_a
from study.formulas.fault_iec61363 import (
    dc_time_constant_s,
    load_phasor_a,
    synchronous_source,
    through_impedance,
)
from study.formulas.fault_iec61363_motors import asynchronous_source
from study.formulas.park import direct_axis_circuit, quadrature_axis_circuit
from study.formulas.park_plant import (
    InductionMachine,
    SynchronousMachine,
    envelopes_a,
    greatest_instant_a,
    phasors_a,
    plant_response,
)

HZ, U_V, S_VA = 60.0, 450.0, 1e6
HALF_CYCLE_S = 0.5 / HZ
BASE_OHM = U_V**2 / S_VA
RATED_A = S_VA / U_V / math.sqrt(3.0)
RATED_LOAD_A = complex(load_phasor_a(RATED_A, 0.8))
FINE_S = np.linspace(0.0, 1.2 * HALF_CYCLE_S, 2401)


def park_machine(load_a=0.0, *, xq_sub=0.18, tq_sub_s=0.015, x_leak=0.09, base_ohm=BASE_OHM):
    return SynchronousMachine(
        direct=direct_axis_circuit(
            xd=2.2 * base_ohm,
            x_trans=0.25 * base_ohm,
            x_sub=0.15 * base_ohm,
            x_leak=x_leak * base_ohm,
            t_trans_s=0.25,
            t_sub_s=0.015,
            frequency_hz=HZ,
        ),
        quadrature=quadrature_axis_circuit(
            xq=1.1 * base_ohm,
            x_sub=xq_sub * base_ohm,
            x_leak=x_leak * base_ohm,
            t_sub_s=tq_sub_s,
            frequency_hz=HZ,
        ),
        x_leak_ohm=x_leak * base_ohm,
        ra_ohm=0.01 * base_ohm,
        load_a=load_a,
        field_step_v=0.0,
        cable_r_ohm=0.0,
        cable_x_ohm=0.0,
    )


def iec_source(load_a, sustained_a, *, t_sub_s=0.015, t_trans_s=0.25):
    return synchronous_source(
        voltage_v=U_V,
        load_a=load_a,
        ra_ohm=0.01 * BASE_OHM,
        x_sub_ohm=0.15 * BASE_OHM,
        x_trans_ohm=0.25 * BASE_OHM,
        xd_ohm=2.2 * BASE_OHM,
        t_sub_s=t_sub_s,
        t_trans_s=t_trans_s,
        t_dc_s=dc_time_constant_s(0.15, 0.01, HZ),
        sustained_a=sustained_a,
        frequency_hz=HZ,
    )


def respond(machine, r_ohm=0.0, x_ohm=0.0):
    return plant_response([machine], voltage_v=U_V, fault_r_ohm=r_ohm, fault_x_ohm=x_ohm, frequency_hz=HZ)


# Full-order values [A]: I'' or t = 0, T/2, 0.1 s, 1 s; worst peak at T/2; true maximum and its time [ms].
FULL_ORDER = {
    "no load": (0.0, [8626.0, 6980.0, 3638.0, 666.0], 19953.0, 19991.0, 8.05),
    "rated load": (RATED_LOAD_A, [9290.0, 7499.0, 4376.0, 1751.0], 20418.0, 21146.0, 7.12),
}
# Formula over full order, less one [%]: I'', T/2, 0.1 s, 1 s, peak at T/2, peak at T/2 to true maximum.
DIFFERENCE = {
    "no load": [-1.1, -0.7, -0.1, 0.0, -1.8, -2.0],
    "rated load": [1.4, 4.4, 5.0, 0.3, 2.8, -0.7],
}


@pytest.mark.parametrize("case", FULL_ORDER)
def test_full_order_values(case):
    load_a, envelope_a, peak_a, maximum_a, maximum_ms = FULL_ORDER[case]
    response = respond(park_machine(load_a))
    times = np.array([0.0, HALF_CYCLE_S, 0.1, 1.0])
    assert envelopes_a(response, times)[1] == pytest.approx(envelope_a, abs=0.5)
    phasors = phasors_a(response, FINE_S)[1]
    assert greatest_instant_a(phasors) == pytest.approx(maximum_a, abs=0.5)
    assert FINE_S[np.abs(phasors).argmax()] * 1e3 == pytest.approx(maximum_ms, abs=0.01)
    at_half_cycle = phasors_a(response, np.array([HALF_CYCLE_S]))[1]
    assert greatest_instant_a(at_half_cycle) == pytest.approx(peak_a, abs=0.5)


@pytest.mark.parametrize("case", DIFFERENCE)
def test_formula_at_the_terminals(case):
    load_a, _, _, _, _ = FULL_ORDER[case]
    response = respond(park_machine(load_a))
    current = iec_source(load_a, abs(response.steady_a[1])).current
    times = np.array([0.0, HALF_CYCLE_S, 0.1, 1.0])
    envelope = ac_component_a(current, times) / envelopes_a(response, times)[1]
    peak = half_cycle_peak_a(current, HZ)
    at_half_cycle = greatest_instant_a(phasors_a(response, np.array([HALF_CYCLE_S]))[1])
    maximum = greatest_instant_a(phasors_a(response, FINE_S)[1])
    found = 100.0 * (np.array([*envelope, peak / at_half_cycle, peak / maximum]) - 1.0)
    assert found == pytest.approx(DIFFERENCE[case], abs=0.051)


@pytest.mark.parametrize(
    ("tq_sub_s", "xq_sub", "at_half_cycle", "peak"),
    [
        (0.005, 0.18, 8.6, -1.5),
        (0.015, 0.18, 4.4, -0.7),
        (0.030, 0.18, 3.0, -0.3),
        (0.015, 0.1501, 2.2, None),
        (0.015, 0.30, 7.8, None),
    ],
)
def test_loaded_difference_depends_on_the_quadrature_axis(tq_sub_s, xq_sub, at_half_cycle, peak):
    response = respond(park_machine(RATED_LOAD_A, xq_sub=xq_sub, tq_sub_s=tq_sub_s))
    current = iec_source(RATED_LOAD_A, abs(response.steady_a[1])).current
    envelope = envelopes_a(response, np.array([HALF_CYCLE_S]))[1, 0]
    assert 100.0 * (ac_component_a(current, HALF_CYCLE_S) / envelope - 1.0) == pytest.approx(
        at_half_cycle, abs=0.051
    )
    if peak is not None:
        maximum = greatest_instant_a(phasors_a(response, FINE_S)[1])
        assert 100.0 * (half_cycle_peak_a(current, HZ) / maximum - 1.0) == pytest.approx(peak, abs=0.051)


def test_leakage_reactance_has_no_influence():
    times = np.array([0.0, HALF_CYCLE_S, 0.1])
    low = envelopes_a(respond(park_machine(RATED_LOAD_A, x_leak=0.05)), times)[1]
    high = envelopes_a(respond(park_machine(RATED_LOAD_A, x_leak=0.14)), times)[1]
    assert low == pytest.approx(high, rel=1e-9)


# R, X [pu]; T''de, T'de [ms]; slowest full-order mode [ms]; difference at T/2, 0.1 s and of the peak [%].
BEHIND_IMPEDANCE = [
    (0.00, 0.00, 15.0, 250.0, 250.0, -0.8, -0.1, -2.2),
    (0.01, 0.01, 15.5, 260.0, 259.0, -2.0, -0.5, -3.9),
    (0.05, 0.02, 16.4, 279.0, 269.0, -6.2, -1.6, -8.0),
    (0.02, 0.05, 16.8, 296.0, 294.0, -2.3, -1.3, -3.9),
    (0.05, 0.10, 18.1, 343.0, 337.0, -3.2, -2.2, -4.7),
    (0.02, 0.30, 20.5, 485.0, 490.0, -0.8, -1.9, -1.0),
    (0.20, 0.05, 20.2, 410.0, 318.0, -4.1, -9.1, -4.9),
    (0.50, 0.30, 22.8, 757.0, 601.0, -0.9, -8.5, -2.6),
]


@pytest.mark.parametrize("row", BEHIND_IMPEDANCE, ids=lambda row: f"{row[0]}+j{row[1]}")
def test_formula_behind_an_impedance(row):
    r, x, t_sub_ms, t_trans_ms, mode_ms, at_half_cycle, at_100_ms, peak = row
    response = respond(park_machine(tq_sub_s=0.012), r * BASE_OHM, x * BASE_OHM)
    source = iec_source(0.0, U_V / math.sqrt(3.0) / (2.2 * BASE_OHM))
    current = through_impedance(source, r_ohm=r * BASE_OHM, x_ohm=x * BASE_OHM, frequency_hz=HZ).current
    # The bare expression without the guard is 0.2 % above these: still the same printed milliseconds.
    assert current.t_sub_s * 1e3 == pytest.approx(t_sub_ms, abs=0.05 + 0.002 * t_sub_ms)
    assert current.t_trans_s * 1e3 == pytest.approx(t_trans_ms, abs=0.5 + 0.002 * t_trans_ms)
    assert -1e3 / response.rate_per_s.real.max() == pytest.approx(mode_ms, abs=0.51)
    envelope = ac_component_a(current, np.array([HALF_CYCLE_S, 0.1]))
    envelope = envelope / envelopes_a(response, np.array([HALF_CYCLE_S, 0.1]))[0]
    maximum = greatest_instant_a(phasors_a(response, FINE_S)[0])
    found = 100.0 * (np.array([*envelope, half_cycle_peak_a(current, HZ) / maximum]) - 1.0)
    assert found == pytest.approx([at_half_cycle, at_100_ms, peak], abs=0.051)


def test_greatest_peak_is_nearer_to_the_full_order_maximum_than_the_one_at_half_cycle():
    for r, x, *_ in BEHIND_IMPEDANCE:
        response = respond(park_machine(tq_sub_s=0.012), r * BASE_OHM, x * BASE_OHM)
        source = iec_source(0.0, U_V / math.sqrt(3.0) / (2.2 * BASE_OHM))
        current = through_impedance(source, r_ohm=r * BASE_OHM, x_ohm=x * BASE_OHM, frequency_hz=HZ).current
        maximum = greatest_instant_a(phasors_a(response, FINE_S)[0])
        greatest = greatest_peak_a(current, HZ, sum_sources=False)
        at_half_cycle = half_cycle_peak_a(current, HZ)
        assert at_half_cycle < greatest
        assert abs(greatest - maximum) < abs(at_half_cycle - maximum)


def test_bare_time_constants_behind_a_long_feeder_would_be_far_too_short():
    """The adjustment of T''d and T'd is worth up to 28 % at 1 s: without it the current is too low."""
    r, x = 0.02 * BASE_OHM, 0.30 * BASE_OHM
    times = np.array([HALF_CYCLE_S, 0.1, 1.0])
    truth = envelopes_a(respond(park_machine(tq_sub_s=0.012), r, x), times)[0]
    source = iec_source(0.0, U_V / math.sqrt(3.0) / (2.2 * BASE_OHM))
    current = through_impedance(source, r_ohm=r, x_ohm=x, frequency_hz=HZ).current
    fast, slow = current.subtransient_a - current.transient_a, current.transient_a - current.sustained_a
    bare = fast * np.exp(-times / 0.015) + slow * np.exp(-times / 0.25) + current.sustained_a
    assert 100.0 * (bare / truth - 1.0) == pytest.approx([-3.7, -14.9, -27.6], abs=0.1)
    assert 100.0 * (ac_component_a(current, times) / truth - 1.0) == pytest.approx(
        [-0.8, -1.9, -1.4], abs=1.0
    )


def test_typical_motor_against_the_full_order_motor():
    """Full-order motor, Xm 3 pu, slip 2.1 %: 6.71 at 0, 4.34 at T/2, peak 10.8 at T/2 and 11.0 at 7.3 ms."""
    motor = InductionMachine(
        rs_ohm=0.034,
        rr_ohm=0.021,
        xs_ohm=0.075,
        xr_ohm=0.075,
        xm_ohm=3.0,
        slip=0.021,
        cable_r_ohm=0.0,
        cable_x_ohm=0.0,
    )
    response = plant_response(
        [motor], voltage_v=math.sqrt(3.0), fault_r_ohm=0.0, fault_x_ohm=0.0, frequency_hz=HZ
    )
    found = envelopes_a(response, np.array([0.0, HALF_CYCLE_S]))[1]
    assert found == pytest.approx([6.71, 4.34], abs=0.005)
    fine = phasors_a(response, FINE_S)[1]
    assert greatest_instant_a(fine) == pytest.approx(11.0, abs=0.05)
    assert FINE_S[np.abs(fine).argmax()] * 1e3 == pytest.approx(7.3, abs=0.05)
    at_half_cycle = greatest_instant_a(phasors_a(response, np.array([HALF_CYCLE_S]))[1])
    assert at_half_cycle == pytest.approx(10.8, abs=0.05)

    load_a = complex(response.modes_a[1].sum() + response.steady_a[1])
    for load, ratio in ((0.0, 0.93), (load_a, 0.83)):
        current = asynchronous_source(
            voltage_v=math.sqrt(3.0), load_a=load, rs_ohm=0.034, rr_ohm=0.021, x_ohm=0.15, frequency_hz=HZ
        ).current
        # Both variants are low; the one without pre-load is the nearer.
        assert ac_component_a(current, HALF_CYCLE_S) / found[1] == pytest.approx(ratio, abs=0.005)
