"""Motor efficiency classes.

Source: IEC 60034-30-1:2014, four-pole columns, per cent with one decimal; from memory, transcribed a second
time apart from the table file.
"""

from itertools import pairwise

import pytest

from study.formulas.induction import typical_efficiency

KW_50 = [0.75, 1.1, 1.5, 2.2, 3, 4, 5.5, 7.5, 11, 15, 18.5, 22, 30, 37, 45, 55, 75, 90, 110, 132, 160, 200]
AT_50_HZ = {
    "IE1": "72.1 75.0 77.2 79.7 81.5 83.1 84.7 86.0 87.6 88.7 89.3 "
           "89.9 90.7 91.2 91.7 92.1 92.7 93.0 93.3 93.5 93.8 94.0",
    "IE2": "79.6 81.4 82.8 84.3 85.5 86.6 87.7 88.7 89.8 90.6 91.2 "
           "91.6 92.3 92.7 93.1 93.5 94.0 94.2 94.5 94.7 94.9 95.1",
    "IE3": "82.5 84.1 85.3 86.7 87.7 88.6 89.6 90.4 91.4 92.1 92.6 "
           "93.0 93.6 93.9 94.2 94.6 95.0 95.2 95.4 95.6 95.8 96.0",
}  # fmt: skip
AT_60_HZ = {
    "IE2": {0.75: 82.5, 1.1: 84.0, 2.2: 87.5, 3.7: 87.5, 7.5: 89.5, 11: 91.0, 18.5: 92.4, 30: 93.0, 45: 93.6,
            55: 94.1, 75: 94.5, 110: 95.0, 185: 95.4},
    "IE3": {0.75: 83.5, 1.1: 86.5, 2.2: 89.5, 3.7: 89.5, 7.5: 91.7, 11: 92.4, 15: 93.0, 22: 93.6, 30: 94.1,
            37: 94.5, 45: 95.0, 90: 95.4, 110: 95.8, 150: 96.2},
}  # fmt: skip


@pytest.mark.parametrize("efficiency_class", AT_50_HZ)
def test_50_hz(efficiency_class):
    printed = [float(x) / 100.0 for x in AT_50_HZ[efficiency_class].split()]
    found = [typical_efficiency(kw, efficiency_class, 50.0) for kw in KW_50]
    assert found == pytest.approx(printed, abs=1e-9)


@pytest.mark.parametrize("efficiency_class", AT_60_HZ)
def test_60_hz(efficiency_class):
    for kw, percent in AT_60_HZ[efficiency_class].items():
        assert typical_efficiency(kw, efficiency_class, 60.0) == pytest.approx(percent / 100.0, abs=1e-9)


@pytest.mark.parametrize("f_hz", [50.0, 60.0])
def test_classes_are_ordered_and_efficiency_grows_with_rating(f_hz):
    ratings = [0.75, 1.5, 2.5, 6.0, 20.0, 80.0, 300.0]
    by_class = [[typical_efficiency(kw, c, f_hz) for kw in ratings] for c in ("IE1", "IE2", "IE3")]
    for low, high in pairwise(by_class):
        assert all(a < b for a, b in zip(low, high, strict=True))
    for row in by_class:
        assert row == sorted(row)


@pytest.mark.parametrize(
    ("kw", "name", "f_hz"), [(0.5, "IE3", 50.0), (11, "IE4", 60.0), (11, "IE3", 55.0), (2e3, "IE3", 50.0)]
)
def test_outside_the_table(kw, name, f_hz):
    with pytest.raises(ValueError, match="give it"):
        typical_efficiency(kw, name, f_hz)
