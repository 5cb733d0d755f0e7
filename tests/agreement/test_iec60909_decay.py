"""Factors of IEC 60909 against the integrals they stand for, and at their edges."""

import math

import numpy as np
import pytest
from scipy.integrate import quad

from study.formulas.fault_iec60909 import kappa_method_b, three_phase_a, two_phase_a, voltage_factor
from study.formulas.fault_iec60909_decay import (
    breaking_current_a,
    breaking_current_meshed_a,
    m_factor,
    motor_decay,
    mu_factor,
    n_factor,
    q_factor,
    thermal_equivalent_a,
)
from study.formulas.fault_iec60909_equipment import motor_impedance_ohm, transformer_impedance_ohm
from study.formulas.fault_iec60909_nodal import admittance_matrix, impedance_matrix


@pytest.mark.parametrize("frequency_hz", [50.0, 60.0])
@pytest.mark.parametrize("kappa", [1.1, 1.4, 1.8, 1.95])
@pytest.mark.parametrize("duration_s", [0.05, 1.0])
def test_m_is_the_heat_of_the_direct_component(kappa, frequency_hz, duration_s):
    """kappa = 1 + e^(-T/2/Tdc) gives the time constant; the component starts at sqrt2 I''k."""
    t_dc = 0.5 / frequency_hz / -math.log(kappa - 1.0)
    heat, _ = quad(lambda t: 2.0 * math.exp(-2.0 * t / t_dc), 0.0, duration_s, epsabs=1e-13)
    assert m_factor(kappa, frequency_hz, duration_s) == pytest.approx(heat / duration_s, rel=1e-7)


@pytest.mark.parametrize("ratio", [1.25, 2.0, 5.0, 10.0])
@pytest.mark.parametrize("duration_s", [0.1, 1.0, 3.0])
def test_n_is_the_heat_of_the_symmetrical_component(ratio, duration_s):
    """Annex A: I'k/Ik = ratio/(0.88 + 0.17 ratio), T'd = 3.1 s/(I'k/Ik), T''d = T'd/10 (from memory)."""
    transient = ratio / (0.88 + 0.17 * ratio)
    t_trans = 3.1 / transient

    def squared(t):
        fast = (ratio - transient) * math.exp(-10.0 * t / t_trans)
        return (fast + (transient - 1.0) * math.exp(-t / t_trans) + 1.0) ** 2

    heat, _ = quad(squared, 0.0, duration_s, epsrel=1e-11)
    assert n_factor(ratio, duration_s) == pytest.approx(heat / duration_s / ratio**2, rel=1e-9)


def test_far_from_generators_the_symmetrical_current_keeps_its_heat():
    assert n_factor([0.9, 1.0], 1.0).tolist() == [1.0, 1.0]
    assert thermal_equivalent_a(10e3, 0.0, 1.0) == 10e3
    assert thermal_equivalent_a(10e3, 0.44, 1.0) == pytest.approx(12e3)


@pytest.mark.parametrize(
    ("delay_s", "wanted"),
    # r = 4: 0.84+0.26e^-1.04, 0.71+0.51e^-1.2, 0.62+0.72e^-1.28, 0.56+0.94e^-1.52, by pocket calculator.
    [(0.02, 0.9319), (0.05, 0.8636), (0.10, 0.8202), (0.25, 0.7656), (1.0, 0.7656)],
)
def test_mu_at_the_delays_of_the_standard(delay_s, wanted):
    assert mu_factor(4.0, delay_s) == pytest.approx(wanted, abs=0.5e-4)


def test_mu_between_delays_is_linear_and_never_above_one():
    middle = 0.5 * (mu_factor(4.0, 0.05) + mu_factor(4.0, 0.10))
    assert mu_factor(4.0, 0.075) == pytest.approx(float(middle), rel=1e-12)
    assert mu_factor([0.5, 2.0], 0.25).tolist() == [1.0, 1.0]
    ratio = np.linspace(2.01, 12.0, 200)
    assert (mu_factor(ratio, 0.02) <= 1.0).all()
    assert (np.diff(mu_factor(ratio, 0.1)) < 0.0).all()
    with pytest.raises(ValueError, match="least"):
        mu_factor(4.0, 0.01)


def test_q_at_one_megawatt_is_its_constant():
    found = [float(q_factor(1.0, delay)) for delay in (0.02, 0.05, 0.10, 0.25)]
    assert found == pytest.approx([1.0, 0.79, 0.57, 0.26])
    assert q_factor(0.05, 0.25) == pytest.approx(0.0, abs=0.0)  # 0.26 + 0.10 ln 0.05 is below 0
    assert motor_decay(6.0, 1.0, 0.1) == pytest.approx(float(mu_factor(6.0, 0.1)) * 0.57)


def test_breaking_current_of_one_source_and_of_a_mesh_whose_fault_is_at_its_terminals():
    """At the terminals the drop is the whole voltage (no resistance), so the mesh formula becomes mu I''k."""
    initial = np.array([-1j * 8000.0])
    meshed = breaking_current_meshed_a(initial, np.array([[1.0 + 0j]]), initial[None, :], np.array([[0.8]]))
    assert meshed == pytest.approx(breaking_current_a([8000.0], 0.8))


def test_method_b_and_its_caps():
    assert kappa_method_b([0.05, 0.05, 1.0], 0.5, [True, False, False]) == pytest.approx(
        [1.8, 2.0, 1.15 * (1.02 + 0.98 * math.exp(-3.0))]
    )


@pytest.mark.parametrize(
    ("nominal_v", "case", "tolerance", "wanted"),
    [
        (690.0, "max", 6, 1.05),
        (690.0, "min", 6, 0.95),
        (1000.0, "max", 10, 1.10),
        (1000.0, "min", 10, 0.90),
        (6600.0, "max", 10, 1.10),
        (11e3, "min", 6, 1.00),
    ],
)
def test_voltage_factors(nominal_v, case, tolerance, wanted):
    """IEC 60909-0:2016, table 1, from memory."""
    assert voltage_factor(nominal_v, case, tolerance) == wanted


def test_two_phase_is_0_866_of_three_phase_with_equal_impedances():
    z = 0.003 + 0.02j
    ratio = two_phase_a(440.0, 1.05, z, z) / three_phase_a(440.0, 1.05, z)
    assert ratio == pytest.approx(math.sqrt(3.0) / 2.0, rel=1e-12)


def test_converter_drive_that_feeds_back_is_a_motor_of_three_times_rated_current():
    z = motor_impedance_ohm(rated_v=690.0, rated_a=500.0, starting_ratio=3.0, r_over_x=0.10)
    assert three_phase_a(690.0, 1.0, z) == pytest.approx(1500.0)


def test_nonsense_is_refused():
    with pytest.raises(ValueError, match="load losses"):
        transformer_impedance_ohm(1e6, 440.0, 0.05, 0.06)
    grid = {"branch_from": [0], "branch_to": [1], "branch_ratio": 1.0, "source_bus": [0]}
    with pytest.raises(ValueError, match="join its buses"):
        admittance_matrix(2, branch_impedance=[0j], source_impedance=[1j], **grid)
    with pytest.raises(ValueError, match=r"no source feeds some bus: \[2\]"):
        impedance_matrix(admittance_matrix(3, branch_impedance=[1j], source_impedance=[1j], **grid))
    pair = {"branch_from": [1], "branch_to": [2], "branch_ratio": 1.0, "source_bus": [0]}
    with pytest.raises(ValueError, match="buses that are joined"):
        impedance_matrix(admittance_matrix(3, branch_impedance=[1j], source_impedance=[1j], **pair))
