"""Two sets in parallel on straight speed characteristics.

Source: S. J. Chapman, Electric Machinery Fundamentals, parallel operation of a.c. generators, the example of
two generators of 1 MW/Hz at 61.5 Hz and 61.0 Hz on 2.5 MW. From memory of the book.
The book prints two digits; the arithmetic is exact, so the tolerance only covers rounding of floats.
"""

import pytest

from study.formulas.sharing import share_straight

SLOPE_1_MW_PER_HZ = ([1.0, 1.0], [1.0, 1.0])


@pytest.mark.parametrize(
    ("no_load_hz", "total_mw", "frequency_hz", "power_mw"),
    [
        ([61.5, 61.0], 2.5, 60.0, [1.5, 1.0]),
        ([61.5, 61.0], 3.5, 59.5, [2.0, 1.5]),
        ([61.5, 61.5], 3.5, 59.75, [1.75, 1.75]),
    ],
    ids=["first load", "one megawatt more", "governor of the second set raised by 0.5 Hz"],
)
def test_two_generators_share_by_their_speed_characteristics(no_load_hz, total_mw, frequency_hz, power_mw):
    frequency, power = share_straight(no_load_hz, *SLOPE_1_MW_PER_HZ, total_mw)
    assert float(frequency) == pytest.approx(frequency_hz, abs=1e-9)
    assert power.tolist() == pytest.approx(power_mw, abs=1e-9)
