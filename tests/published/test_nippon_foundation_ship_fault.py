"""Ship switchboard with three generators and motors, and motor groups at a switchboard.

Source: Japanese training texts for ship electricians in the Nippon Foundation library: 2005 text 00132, p. 26
(generators, motors and the equivalent generator) and 2002 text 00399, p. 47 (motor groups). The formulas are
images there; only the visible arithmetic is checked. The texts round the factor of a motor to 6.25 and take
rated load as 1.10 on the a.c. and 1.03 on the d.c. component.
"""

import math

import numpy as np
import pytest

from study.formulas.fault_current import (
    FaultCurrent,
    ac_component_a,
    dc_component_a,
    half_cycle_peak_a,
)
from study.formulas.fault_iec61363 import synchronous_source
from study.formulas.fault_iec61363_motors import motor_behind_cable, motor_rated_impedance_ohm
from study.formulas.fault_iec61363_plant import equivalent_generator

RATED_A, MOTORS_A, U_V, HZ = 480.0, 790.0, 450.0, 60.0
AC_LOAD, DC_LOAD = 1.10, 1.03


def _unloaded_generator():
    base_ohm = U_V / math.sqrt(3.0) / RATED_A
    return synchronous_source(
        voltage_v=U_V,
        load_a=0.0,
        ra_ohm=0.0,
        x_sub_ohm=0.158 * base_ohm,
        x_trans_ohm=0.208 * base_ohm,
        xd_ohm=2.0 * base_ohm,
        t_sub_s=0.01,
        t_trans_s=0.2,
        t_dc_s=0.03,
        sustained_a=0.0,
        frequency_hz=HZ,
    ).current


def _board():
    generator = _unloaded_generator()
    initial = AC_LOAD * generator.subtransient_a
    transient = AC_LOAD * generator.transient_a
    motors = 6.25 * MOTORS_A
    return FaultCurrent(
        subtransient_a=np.array([initial, initial, initial, motors]),
        transient_a=np.array([transient, transient, transient, 0.0]),
        sustained_a=np.zeros(4),
        dc_a=np.array([DC_LOAD * generator.dc_a] * 3 + [math.sqrt(2.0) * motors]),
        t_sub_s=np.array([0.01, 0.01, 0.01, 0.019]),
        t_trans_s=np.full(4, 0.2),
        t_dc_s=np.array([0.03, 0.03, 0.03, 0.012]),
    )


def test_one_generator_without_load():
    generator = _unloaded_generator()
    assert generator.subtransient_a == pytest.approx(3038.0, abs=0.05)
    assert generator.transient_a == pytest.approx(2307.7, abs=0.05)


def test_equivalent_generator_of_the_board():
    equivalent = equivalent_generator(
        _board(), voltage_v=U_V, frequency_hz=HZ, tx_sub_s=0.5 / HZ, tx_trans_s=0.1
    ).source.current
    # Printed 14 963, 7 615.4 and their difference 7 347.5.
    assert equivalent.subtransient_a == pytest.approx(14963.0, abs=0.5)
    assert equivalent.transient_a == pytest.approx(7615.4, abs=0.05)
    assert equivalent.subtransient_a - equivalent.transient_a == pytest.approx(7347.5, abs=0.1)
    # Printed 20 259: the text carries sqrt2 with four digits, so its last digit is not sure.
    assert equivalent.dc_a == pytest.approx(20259.0, abs=1.0)


def test_peak_at_the_end_of_the_feeder():
    at_half_cycle = FaultCurrent(
        subtransient_a=7456.5,
        transient_a=7456.5,
        sustained_a=7456.5,
        dc_a=2509.9,
        t_sub_s=1.0,
        t_trans_s=1.0,
        t_dc_s=math.inf,
    )
    assert ac_component_a(at_half_cycle, 0.5 / HZ) == pytest.approx(7456.5)
    assert dc_component_a(at_half_cycle, 0.5 / HZ) == pytest.approx(2509.9)
    assert half_cycle_peak_a(at_half_cycle, HZ) == pytest.approx(13055.0, abs=0.5)


def _motor_group(rr_pu):
    """15 motors of 40 A, each on 30 m of 14 mm² copper at 85 °C; the cable's data are not printed."""
    base = motor_rated_impedance_ohm(440.0, 40.0)
    resistance = 0.017241 * (1.0 + 0.00393 * 65.0) / 14.0 * 30.0
    motor = motor_behind_cable(
        voltage_v=440.0,
        load_a=0.0,
        rs_ohm=0.0269 * base,
        rr_ohm=rr_pu * base,
        x_ohm=0.168 * base,
        cable_r_ohm=resistance,
        cable_x_ohm=0.105e-3 * 30.0,
        frequency_hz=HZ,
    ).current
    return 15.0 * motor.subtransient_a, 15.0 * motor.dc_a


def test_motor_group_without_rotor_resistance():
    # The printed 3 488.4 A leaves RR out of Z''M, so the rotor's resistance is as good as nothing here.
    initial, direct = _motor_group(rr_pu=1e-9)
    assert initial == pytest.approx(3488.4, rel=1e-3)  # the cable's resistance is assumed
    assert direct / initial == pytest.approx(4933.3 / 3488.4, rel=2e-5)  # last digits of the printed pair


def test_motor_group_with_rotor_resistance_is_lower():
    initial, _ = _motor_group(rr_pu=0.0229)
    assert initial == pytest.approx(3488.4 * (1.0 - 0.033), rel=1e-3)  # Z''M with RR is 3.4 % larger
