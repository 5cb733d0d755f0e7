"""Decay of the short-circuit current of a generator at its terminals.

Source: Glover, Sarma and Overbye, Power System Analysis and Design, example 7.2: 500 MVA, 20 kV, 60 Hz,
X''d 0.15, X'd 0.24, Xd 1.1 pu, T''d 0.035 s, T'd 2.0 s, TA 0.20 s; unloaded at 1.05 times rated voltage;
interruption after 3 cycles. Printed results from memory of the book: base 14.43 kA, I'' 7.0 pu = 101.0 kA,
direct component 142.9 e^(-t/0.20) kA, Iac(0.05) 4.920 pu = 71.01 kA, asymmetrical 132 kA.
"""

import math

import pytest

from study.formulas.fault_current import ac_component_a, asymmetrical_rms_a, dc_component_a
from study.formulas.fault_iec61363 import synchronous_source

BASE_KA = 500.0 / (math.sqrt(3.0) * 20.0)
BASE_OHM = 20.0**2 / 500.0
CLEARING_S = 0.05


@pytest.fixture(name="current")
def _current():
    return synchronous_source(
        voltage_v=1.05 * 20e3,
        load_a=0.0,
        ra_ohm=0.0,
        x_sub_ohm=0.15 * BASE_OHM,
        x_trans_ohm=0.24 * BASE_OHM,
        xd_ohm=1.1 * BASE_OHM,
        t_sub_s=0.035,
        t_trans_s=2.0,
        t_dc_s=0.20,
        sustained_a=1.05 / 1.1 * BASE_KA * 1e3,
        frequency_hz=60.0,
    ).current


def test_base_current():
    assert pytest.approx(14.43, abs=0.005) == BASE_KA


def test_initial_current(current):
    assert current.subtransient_a / 1e3 == pytest.approx(101.0, abs=0.05)
    assert current.subtransient_a / BASE_KA / 1e3 == pytest.approx(7.0, abs=0.05)


def test_direct_component(current):
    assert dc_component_a(current, 0.0) / 1e3 == pytest.approx(142.9, abs=0.05)
    assert dc_component_a(current, 0.2) / dc_component_a(current, 0.0) == pytest.approx(math.exp(-1.0))


def test_symmetrical_current_at_interruption(current):
    at_clearing_ka = ac_component_a(current, CLEARING_S) / 1e3
    assert at_clearing_ka / BASE_KA == pytest.approx(4.920, abs=0.0005)
    assert at_clearing_ka == pytest.approx(71.01, abs=0.005)


def test_asymmetrical_current_at_interruption(current):
    assert asymmetrical_rms_a(current, CLEARING_S) / 1e3 == pytest.approx(132.0, abs=0.5)
