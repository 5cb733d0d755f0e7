"""Conductor resistance.

Source: IEC 60228:2004, tables 2 and 3, from memory; values for 2.5 mm2 of all four copper kinds and the class
2 column were transcribed a second time, apart from the table file. The printed digits are exact.
"""

import numpy as np
import pytest

from study.formulas.cables import conductor_resistance, resistance_at, standard_sections

CLASS_2_PLAIN = {
    1.5: 12.1, 2.5: 7.41, 4: 4.61, 6: 3.08, 10: 1.83, 16: 1.15, 25: 0.727, 35: 0.524, 50: 0.387, 70: 0.268,
    95: 0.193, 120: 0.153, 150: 0.124, 185: 0.0991, 240: 0.0754, 300: 0.0601,
}  # fmt: skip


@pytest.mark.parametrize(("section", "ohm_per_km"), CLASS_2_PLAIN.items())
def test_table_2_plain_copper(section, ohm_per_km):
    assert conductor_resistance(section, "copper", 2, False) == ohm_per_km


@pytest.mark.parametrize(
    ("conductor_class", "tinned", "ohm_per_km"),
    [(2, False, 7.41), (2, True, 7.56), (5, False, 7.98), (5, True, 8.21)],
)
def test_2_5_mm2_of_all_kinds(conductor_class, tinned, ohm_per_km):
    assert conductor_resistance(2.5, "copper", conductor_class, tinned) == ohm_per_km


@pytest.mark.parametrize("conductor_class", [2, 5])
@pytest.mark.parametrize("tinned", [False, True])
def test_resistivity_behind_every_copper_entry_is_plausible(conductor_class, tinned):
    """Copper has 17.241 ohm mm2/km (IEC 60028); stranding, tinning and nominal sections add up to 18 %."""
    sections = np.array(standard_sections())
    r = np.array([conductor_resistance(s, "copper", conductor_class, tinned) for s in sections])
    assert np.all(np.diff(r) < 0.0)
    assert np.all((r * sections > 17.241) & (r * sections < 17.241 * 1.2))


def test_aluminium_against_copper():
    """IEC 60889: aluminium has 28.264 ohm mm2/km, 1.64 times copper."""
    for section in (16, 25, 50, 95, 150, 240, 300):
        ratio = conductor_resistance(section, "aluminium", 2, False) / conductor_resistance(
            section, "copper", 2, False
        )
        assert ratio == pytest.approx(28.264 / 17.241, rel=0.025)


def test_annex_a_temperature_correction():
    """IEC 60228 annex A: factors 0.784 at 90 degC and 0.836 at 70 degC for copper, three digits printed."""
    assert 1.0 / float(resistance_at(1.0, 90.0, "copper")) == pytest.approx(0.784, abs=5e-4)
    assert 1.0 / float(resistance_at(1.0, 70.0, "copper")) == pytest.approx(0.836, abs=5e-4)


@pytest.mark.parametrize(
    ("section", "conductor", "conductor_class", "tinned"),
    [
        (85.0, "copper", 2, False),
        (2.5, "aluminium", 2, False),
        (25.0, "aluminium", 5, False),
        (25.0, "copper", 1, False),
    ],
)
def test_conductors_that_the_standard_does_not_have(section, conductor, conductor_class, tinned):
    with pytest.raises(ValueError, match="IEC 60228 has no"):
        conductor_resistance(section, conductor, conductor_class, tinned)
