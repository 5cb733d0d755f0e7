"""Motor data and the circuit of a name-plate: what it must reproduce."""

import numpy as np
import pytest

from study.formulas.demand import part_load_efficiency, part_load_power_factor
from study.formulas.induction import (
    StartingData,
    circuit_from_name_plate,
    line_starting_current,
    motor_admittance,
    motor_torque,
    rated_current,
    typical_efficiency,
    typical_power_factor,
    typical_starting_data,
)

RATINGS = [0.75, 4.0, 11.0, 30.0, 75.0, 160.0, 400.0, 1000.0]


def _circuit(kw):
    eta, cos, start = (
        typical_efficiency(kw, "IE3", 50.0),
        typical_power_factor(kw, 4),
        typical_starting_data(kw),
    )
    return eta, cos, start, circuit_from_name_plate(eta, cos, start)


@pytest.mark.parametrize("kw", RATINGS)
def test_rated_point(kw):
    """Current 1 pu at the rated power factor, and (1 - s) times the air-gap power equal to the output."""
    eta, cos, _, c = _circuit(kw)
    y = complex(motor_admittance(c.slip_rated, c))
    assert y == pytest.approx(cos - 1j * np.sqrt(1.0 - cos**2), abs=1e-10)
    series = y - (c.g_shunt_pu - 1j * c.b_shunt_pu)
    shaft = (1.0 - c.slip_rated) * c.r_rotor_run_pu / c.slip_rated * abs(series) ** 2
    assert shaft == pytest.approx(cos * eta, rel=1e-10)


@pytest.mark.parametrize("kw", RATINGS)
def test_standstill(kw):
    _, _, start, c = _circuit(kw)
    y = complex(motor_admittance(1.0, c))
    assert abs(y) == pytest.approx(start.starting_current, rel=1e-10)
    assert y.real / abs(y) == pytest.approx(start.starting_cos_phi, rel=1e-10)


@pytest.mark.parametrize("kw", [30.0, 75.0, 160.0, 400.0, 1000.0])
def test_breakdown_torque_is_met_within_5_per_cent(kw):
    """Not exact: the rotor's data move with slip between both name-plate points."""
    _, _, start, c = _circuit(kw)
    highest = motor_torque(np.geomspace(1e-3, 1.0, 2000), 1.0, c).max()
    assert highest == pytest.approx(start.breakdown_torque, rel=0.05)


def test_torque_goes_with_the_square_of_the_voltage():
    _, _, _, c = _circuit(30.0)
    assert float(motor_torque(0.5, 0.8, c)) == pytest.approx(
        0.64 * float(motor_torque(0.5, 1.0, c)), rel=1e-12
    )


@pytest.mark.parametrize("kw", [11.0, 30.0, 160.0])
def test_circuit_agrees_with_the_part_load_curves(kw):
    """Two routes to the half-load point: the circuit at the slip of half the output, and the formulas."""
    eta, cos, _, c = _circuit(kw)
    slip = np.linspace(0.05, 1.0, 4001) * c.slip_rated
    y = motor_admittance(slip, c)
    series = y - (c.g_shunt_pu - 1j * c.b_shunt_pu)
    shaft = (1.0 - slip) * c.r_rotor_run_pu / slip * np.abs(series) ** 2
    half = int(np.argmin(np.abs(shaft - 0.5 * cos * eta)))
    assert shaft[half] / y[half].real == pytest.approx(float(part_load_efficiency(0.5, eta)), abs=0.004)
    circuit_pf = y[half].real / abs(y[half])
    assert circuit_pf == pytest.approx(float(part_load_power_factor(0.5, cos, eta)), abs=0.03)


@pytest.mark.parametrize(
    ("cos", "start"),
    [
        (
            0.99,
            StartingData(
                starting_current=6.0, starting_cos_phi=0.3, locked_rotor_torque=2.0, breakdown_torque=2.5
            ),
        ),
        (
            0.86,
            StartingData(
                starting_current=6.0, starting_cos_phi=0.3, locked_rotor_torque=2.0, breakdown_torque=0.5
            ),
        ),
        (
            0.86,
            StartingData(
                starting_current=6.0, starting_cos_phi=0.01, locked_rotor_torque=2.0, breakdown_torque=2.5
            ),
        ),
    ],
    ids=["power factor too high", "breakdown below rated torque", "no rotor resistance"],
)
def test_contradictory_name_plates_are_refused(cos, start):
    with pytest.raises(ValueError, match=r"no circuit has|no rotor resistance"):
        circuit_from_name_plate(0.93, cos, start)


def test_rated_current_by_hand():
    """11 kW, 400 V, 91.4 %, 0.83: 11000/(1.732 x 400 x 0.7586) = 20.9 A."""
    assert float(rated_current(11.0, 400.0, 0.914, 0.83, 3)) == pytest.approx(20.9, abs=0.05)
    assert float(rated_current(1.0, 230.0, 0.8, 0.9, 1)) == pytest.approx(6.04, abs=0.005)
    with pytest.raises(ValueError, match="phases"):
        rated_current(1.0, 230.0, 0.8, 0.9, 4)


def test_reduced_voltage_starts():
    kwargs = {"tap": 0.8, "current_limit": 3.0}
    assert line_starting_current("direct", 6.6, **kwargs) == 6.6
    assert line_starting_current("star-delta", 6.6, **kwargs) == pytest.approx(2.2)
    assert line_starting_current("autotransformer", 6.6, **kwargs) == pytest.approx(4.224)
    assert line_starting_current("soft starter", 6.6, **kwargs) == 3.0
    with pytest.raises(ValueError, match="converter"):
        line_starting_current("converter", 6.6, **kwargs)


def test_power_factor_anchors():
    """Common practice, no source: four-pole motors of 0.75, 7.5, 45 and 160 kW."""
    found = [typical_power_factor(kw, 4) for kw in (0.75, 7.5, 45.0, 160.0)]
    assert found == pytest.approx([0.72, 0.82, 0.86, 0.88], abs=1e-9)
    assert typical_power_factor(45.0, 2) > typical_power_factor(45.0, 6) > typical_power_factor(45.0, 12)
