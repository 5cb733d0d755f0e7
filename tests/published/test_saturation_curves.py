"""Saturation curves through S(1.0) and S(1.2).

Source: the pair 0.02/0.12 is typical data of IEC 61970-302 (from memory); coefficients worked by hand to five
digits and proved by putting them back into the curve.
"""

import pytest

from study.formulas.saturation import (
    exponential_exponent,
    quadratic_coefficients,
    saturation_curve,
    saturation_field,
)


@pytest.mark.parametrize(
    ("s10", "s12", "knee", "gain", "exponent"),
    [(0.11, 0.39, 0.81179, 3.10540, 6.9419), (0.02, 0.12, 0.88118, 1.41672, 9.8275)],
)
def test_fit(s10, s12, knee, gain, exponent):
    a, b = quadratic_coefficients(s10, s12)
    assert (a, b) == pytest.approx((knee, gain), abs=5e-6)
    assert b * (1.0 - a) ** 2 / 1.0 == pytest.approx(s10, rel=1e-12)
    assert b * (1.2 - a) ** 2 / 1.2 == pytest.approx(s12, rel=1e-12)
    assert exponential_exponent(s10, s12) == pytest.approx(exponent, abs=5e-5)
    assert s10 * 1.2 ** exponential_exponent(s10, s12) == pytest.approx(s12, rel=1e-12)


def test_no_saturation_below_the_knee():
    curve = saturation_curve(0.11, 0.39)
    assert float(saturation_field(0.8, curve)) == 0.0
    assert float(saturation_field(0.82, curve)) > 0.0
    assert saturation_field([1.0, 1.2], curve).tolist() == pytest.approx([0.11, 1.2 * 0.39], rel=1e-12)


def test_a_flat_pair_takes_the_exponential_curve():
    curve = saturation_curve(0.10, 0.11)
    assert curve.kind == "exponential"
    assert saturation_field([1.0, 1.2], curve).tolist() == pytest.approx([0.10, 1.2 * 0.11], rel=1e-12)


def test_knee_at_one_where_the_first_factor_is_zero():
    curve = saturation_curve(0.0, 0.12)
    assert saturation_field([1.0, 1.2], curve).tolist() == pytest.approx([0.0, 1.2 * 0.12], abs=1e-12)


@pytest.mark.parametrize(("s10", "s12"), [(0.3, 0.2), (-0.1, 0.2), (0.1, 0.1)])
def test_impossible_pairs_are_refused(s10, s12):
    with pytest.raises(ValueError, match=r"S\(1\.2\)"):
        saturation_curve(s10, s12)


def test_unsaturated():
    assert float(saturation_field(1.5, saturation_curve(0.0, 0.0))) == 0.0
