"""Adiabatic short circuit of a conductor.

Source: IEC 60949 (K and b from memory); the rounded k of 115, 143, 94 and 134, 141 A s^0.5/mm2 are those of
IEC 60364-4-43, table 43A (PVC, XLPE/EPR, aluminium XLPE, rubber 85 and 60 degC), printed in whole numbers.
"""

import numpy as np
import pytest

from study.formulas.cable_ratings import adiabatic_k, least_section_mm2, withstand_a2s


@pytest.mark.parametrize(
    ("start", "end", "conductor", "computed", "printed"),
    [
        (70, 160, "copper", 115.0, 115),
        (70, 140, "copper", 102.8, 103),
        (90, 250, "copper", 143.1, 143),
        (85, 220, "copper", 134.2, 134),
        (60, 200, "copper", 140.9, 141),
        (90, 250, "aluminium", 94.5, 94),
    ],
)
def test_k_of_table_43a(start, end, conductor, computed, printed):
    k = float(adiabatic_k(start, end, conductor))
    assert k == pytest.approx(computed, abs=0.05)
    assert k == pytest.approx(printed, abs=0.51)


@pytest.mark.parametrize(("start", "end", "k"), [(70, 150, 109), (75, 150, 105), (95, 350, 171)])
def test_k_of_ship_insulations(start, end, k):
    """End temperatures of ship cable, IEC 60092-360, from memory; k by the equation, in whole numbers."""
    assert float(adiabatic_k(start, end, "copper")) == pytest.approx(k, abs=0.5)


def test_withstand_and_least_section_are_inverse():
    k = adiabatic_k(90.0, 250.0, "copper")
    assert float(least_section_mm2(withstand_a2s(35.0, k), k)) == pytest.approx(35.0, rel=1e-12)
    assert float(np.sqrt(withstand_a2s(50.0, 143.0))) == pytest.approx(7150.0, rel=1e-12)  # 7.15 kA for 1 s


def test_no_heating_no_withstand():
    assert float(adiabatic_k(90.0, 90.0, "copper")) == 0.0
    with pytest.raises(ValueError, match="is below"):
        adiabatic_k(90.0, 80.0, "copper")
