"""Earth-fault currents against the phasors of the three phases, solved node by node."""

import math

import numpy as np
import pytest

from study.formulas.fault_earth import (
    capacitive_earth_fault_current_a,
    earth_fault_current_a,
    largest_neutral_resistance_ohm,
    neutral_resistor_power_w,
    resistive_earth_fault_current_a,
)


def solve(line_v, capacitance_f, frequency_hz, neutral_s):
    """Phase a earthed, the neutral behind an admittance: return the currents at fault and neutral."""
    turn = np.exp(-2j * math.pi / 3.0)
    emf = line_v / math.sqrt(3.0) * np.array([1.0, turn, turn**2])
    neutral_v = -emf[0]
    to_earth = 2j * math.pi * frequency_hz * capacitance_f * (neutral_v + emf)
    through_neutral = neutral_s * neutral_v
    return -(to_earth.sum() + through_neutral), through_neutral


@pytest.mark.parametrize("frequency_hz", [50.0, 60.0])
@pytest.mark.parametrize(("line_v", "capacitance_f"), [(440.0, 8e-6), (690.0, 30e-6), (6600.0, 1.5e-6)])
def test_insulated_system(line_v, capacitance_f, frequency_hz):
    fault, _ = solve(line_v, capacitance_f, frequency_hz, 0.0)
    found = capacitive_earth_fault_current_a(line_v, capacitance_f, frequency_hz)
    assert found == pytest.approx(abs(fault), rel=1e-12)


def test_resistor_at_its_limit_carries_as_much_as_the_capacitances():
    line_v, capacitance_f, frequency_hz = 6600.0, 1.2e-6, 60.0
    resistance = float(largest_neutral_resistance_ohm(capacitance_f, frequency_hz))
    fault, neutral = solve(line_v, capacitance_f, frequency_hz, 1.0 / resistance)
    capacitive = capacitive_earth_fault_current_a(line_v, capacitance_f, frequency_hz)
    resistive = resistive_earth_fault_current_a(line_v, resistance)
    assert resistive == pytest.approx(abs(neutral), rel=1e-12)
    assert resistive == pytest.approx(float(capacitive), rel=1e-12)
    assert earth_fault_current_a(capacitive, resistive) == pytest.approx(abs(fault), rel=1e-12)
    assert neutral_resistor_power_w(line_v, resistance) == pytest.approx(
        abs(neutral) ** 2 * resistance, rel=1e-12
    )
