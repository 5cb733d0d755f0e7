"""Reactance, capacitance and voltage drop of cable: limit cases and independent routes."""

import numpy as np
import pytest

from study.formulas.cables import (
    insulation_data,
    reactance_from_build,
    skin_effect_factor,
    standard_sections,
    typical_capacitance,
    typical_reactance,
    voltage_drop_approximate,
    voltage_drop_exact,
)
from study.formulas.table_files import table_source

# Typical reactance of multicore 0.6/1 kV cable at 60 Hz, ohm/km; common practice, two digits.
MULTICORE_60_HZ = {
    1.5: 0.13, 2.5: 0.12, 4: 0.115, 6: 0.11, 10: 0.10, 16: 0.10, 25: 0.097, 35: 0.094, 50: 0.094,
    70: 0.092, 95: 0.090, 120: 0.090, 150: 0.090, 185: 0.090, 240: 0.088, 300: 0.088,
}  # fmt: skip


@pytest.mark.parametrize(("section", "x"), MULTICORE_60_HZ.items())
def test_typical_reactance_is_that_of_practice(section, x):
    assert typical_reactance(section, "3", 60.0) == pytest.approx(x, rel=0.05)


def test_reactance_follows_frequency_and_spacing():
    assert typical_reactance(95.0, "3", 60.0) == pytest.approx(
        1.2 * typical_reactance(95.0, "3", 50.0), rel=1e-12
    )
    assert typical_reactance(95.0, "3", 60.0) < typical_reactance(95.0, "4", 60.0)
    assert typical_reactance(95.0, "4", 60.0) < typical_reactance(95.0, "3 single", 60.0)


def test_reactance_is_the_geometric_mean_radius_formula():
    """L = 2e-7 ln(GMD/GMR) H/m with GMR = exp(-1/4) r, any textbook."""
    metre = 2.0 * np.pi * 60.0 * 2e-7 * np.log(0.025 / (np.exp(-0.25) * 0.006))
    assert reactance_from_build(60.0, 25.0, 12.0) == pytest.approx(1e3 * metre, rel=1e-12)


def test_capacitance_of_a_coaxial_core():
    """C = 2 pi e0 er / ln(D/d); IEC 60287 rounds 2 pi e0 to 1/18 nF/m, 0.14 % low."""
    d, core = 12.6, 12.6 + 3.2
    expected = 2.0 * np.pi * 8.8541878e-12 * insulation_data("EPR")["permittivity"] / np.log(core / d) * 1e9
    assert typical_capacitance(95.0, "EPR") == pytest.approx(expected, rel=2e-3)


def test_every_section_has_a_build():
    for section in standard_sections():
        assert typical_reactance(section, "3", 50.0) > 0.0
    with pytest.raises(ValueError, match="no standard section"):
        typical_reactance(85.0, "3", 50.0)
    with pytest.raises(ValueError, match="unknown insulation"):
        insulation_data("paper")


def test_skin_effect_of_a_large_conductor_at_50_hz():
    """630 mm2 copper at 90 degC, 50 Hz: handbooks give about 6 % (common practice, no source)."""
    assert float(skin_effect_factor(0.0283 * 1.275, 50.0)) == pytest.approx(1.06, abs=0.005)
    assert float(skin_effect_factor(7.41, 60.0)) == pytest.approx(1.0, abs=1e-5)
    with pytest.raises(ValueError, match="ends at"):
        skin_effect_factor(0.0283, 1000.0)


@pytest.mark.parametrize(("phases", "factor"), [(3, np.sqrt(3.0)), (1, 2.0), (2, 2.0)])
def test_drop_of_a_purely_resistive_run(phases, factor):
    assert float(voltage_drop_approximate(50.0, 0.1, 0.0, 1.0, phases)) == pytest.approx(
        factor * 5.0, rel=1e-12
    )
    assert float(voltage_drop_exact(230.0, 50.0, 0.1, 1.0, phases)) == pytest.approx(factor * 5.0, rel=1e-12)


def test_exact_drop_closes_the_phasor_diagram():
    us, i, z, cos = 440.0, 400.0, 0.03 + 0.02j, 0.8
    ur = us - float(voltage_drop_exact(us, i, z, cos, 3))
    assert abs(ur + np.sqrt(3.0) * i * z * (0.8 - 0.6j)) == pytest.approx(us, rel=1e-13)


def test_both_drops_agree_for_small_angles():
    exact = float(voltage_drop_exact(440.0, 100.0, 0.02 + 0.01j, 0.8, 3))
    assert float(voltage_drop_approximate(100.0, 0.02, 0.01, 0.8, 3)) == pytest.approx(exact, rel=1e-3)


def test_a_run_that_cannot_carry_the_current():
    with pytest.raises(ValueError, match="cannot carry"):
        voltage_drop_exact(440.0, 5000.0, 0.1 + 0.1j, 0.8, 3)


def test_phases():
    with pytest.raises(ValueError, match="1, 2 or 3"):
        voltage_drop_approximate(1.0, 1.0, 1.0, 1.0, 4)


@pytest.mark.parametrize(
    "table", ["conductor_resistance_iec60228", "cable_build", "insulation", "current_rating_45degc",
              "motor_efficiency_iec60034_30", "motor_power_factor", "motor_starting"]
)  # fmt: skip
def test_every_table_names_its_source(table):
    assert len(table_source(table)) > 30
