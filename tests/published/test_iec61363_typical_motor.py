"""Typical asynchronous motor of IEC 61363-1.

Source: IEC 61363-1:1998, typical data of asynchronous motors, from memory: Z''M 0.16, XM 0.15 pu; I''M 6.25,
Iac(T/2) 4 and ip 10 times rated current; T''M 22.4 and 18.67 ms, TdcM 14.08 and 11.73 ms at 50 and 60 Hz. The
factors 6.25 and 4 also stand in the Nippon Foundation training texts for ship electricians.
"""

import math

import numpy as np
import pytest

from study.formulas.fault_current import ac_component_a, half_cycle_peak_a
from study.formulas.fault_iec61363 import load_phasor_a
from study.formulas.fault_iec61363_motors import (
    TYPICAL_MOTOR,
    asynchronous_source,
    limited_current_a,
    limited_current_behind_impedance_a,
    limited_peak_a,
    typical_motor_source,
)

RATED_A = 100.0


def _typical(frequency_hz):
    return typical_motor_source(
        voltage_v=440.0, rated_voltage_v=440.0, rated_current_a=RATED_A, frequency_hz=frequency_hz
    ).current


def test_impedance():
    z = np.hypot(TYPICAL_MOTOR.rs_pu + TYPICAL_MOTOR.rr_pu, TYPICAL_MOTOR.x_pu)
    assert z == pytest.approx(0.16, abs=0.005)


@pytest.mark.parametrize("frequency_hz", [50.0, 60.0])
def test_multiples_of_rated_current(frequency_hz):
    current = _typical(frequency_hz)
    # 6.25 is 1/0.16 with 0.16 rounded from 0.1598.
    assert current.subtransient_a / RATED_A == pytest.approx(6.25, abs=0.01)
    assert ac_component_a(current, 0.5 / frequency_hz) / RATED_A == pytest.approx(4.0, abs=0.05)
    assert half_cycle_peak_a(current, frequency_hz) / RATED_A == pytest.approx(10.0, abs=0.05)


@pytest.mark.parametrize(("frequency_hz", "t_sub_ms", "t_dc_ms"), [(50.0, 22.4, 14.08), (60.0, 18.67, 11.73)])
def test_time_constants(frequency_hz, t_sub_ms, t_dc_ms):
    current = _typical(frequency_hz)
    # RR is printed with two digits (0.021 +- 0.0005), which moves T''M by 2.4 %; RS likewise, by 1.5 %.
    assert current.t_sub_s * 1e3 == pytest.approx(t_sub_ms, rel=0.024)
    assert current.t_dc_s * 1e3 == pytest.approx(t_dc_ms, rel=0.015)


def test_load_before_the_fault_lowers_the_initial_current():
    load = -load_phasor_a(1.0, 0.85)
    loaded = asynchronous_source(
        voltage_v=math.sqrt(3.0), load_a=load, rs_ohm=0.034, rr_ohm=0.021, x_ohm=0.15, frequency_hz=60.0
    ).current
    # E''M written in the standard's components: U cos phi - RM I and U sin phi - XM I.
    emf = math.hypot(0.85 - 0.055, math.sqrt(1.0 - 0.85**2) - 0.15)
    assert loaded.subtransient_a == pytest.approx(emf / math.hypot(0.055, 0.15), rel=1e-12)
    sin_phi = math.sqrt(1.0 - 0.85**2)
    assert loaded.dc_a == pytest.approx(math.sqrt(2.0) * (loaded.subtransient_a + sin_phi), rel=1e-12)


def test_converter_source_holds_its_limit_for_its_duration():
    times = np.array([0.0, 0.5, 0.51])
    assert limited_current_a(800.0, 0.5, times).tolist() == [800.0, 800.0, 0.0]
    assert limited_peak_a(800.0) == pytest.approx(800.0 * math.sqrt(2.0))


def test_converter_source_far_away_is_limited_by_its_voltage():
    # 690 V behind 1 ohm drives 398.4 A, less than the 800 A limit.
    far = limited_current_behind_impedance_a(800.0, 690.0, [0.0, 0.6], [0.0, 0.8])
    assert far == pytest.approx([800.0, 398.4], abs=0.05)


def test_motor_without_resistance_is_refused():
    with pytest.raises(ValueError, match="above 0 ohm"):
        asynchronous_source(
            voltage_v=440.0, load_a=0.0, rs_ohm=0.0, rr_ohm=0.02, x_ohm=0.2, frequency_hz=60.0
        )
