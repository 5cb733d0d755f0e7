"""Test power factors, making ratios and d.c. components of breakers and assemblies; rules of thumb.

Source: IEC 60947-1 table 16, IEC 60947-2 tables 2 and 11, IEC 61439-1 table 7, IEC 62271-100, IEEE C37.13,
all from memory; 46 CFR 111.52-3; ClassNK H2.3.3 and the plant of the Nippon Foundation training texts: three
sets of 480 A, motors of 790 A.
"""

import math

import numpy as np
import pytest

from study.formulas.fault_duty import (
    assembly_peak_ratio,
    breaker_test_power_factor,
    equivalent_short_time_current_a,
    fault_power_factor,
    making_ratio,
    multiplying_factor,
    required_breaking_capacity,
)
from study.formulas.fault_duty_mv import (
    asymmetrical_breaking_current_a,
    dc_component_of_fault,
    peak_of_time_constant,
    rated_dc_component,
    rated_peak_factor,
)
from study.formulas.fault_estimates import QUICK_ESTIMATES, quick_estimate_a

# Upper end of each range [kA], test power factor, ratio n of IEC 60947-2 (below 4.5 kA of IEC 60947-1).
BREAKERS = [
    (1.5, 0.95, 1.41),
    (3.0, 0.90, 1.42),
    (4.5, 0.80, 1.47),
    (6.0, 0.70, 1.5),
    (10.0, 0.50, 1.7),
    (20.0, 0.30, 2.0),
    (50.0, 0.25, 2.1),
    (1000.0, 0.20, 2.2),
]


@pytest.mark.parametrize(("up_to_ka", "cos_phi", "ratio"), BREAKERS)
def test_breaker_table_row(up_to_ka, cos_phi, ratio):
    inside = up_to_ka * 0.999
    for current in (inside, up_to_ka):
        assert breaker_test_power_factor(current) == cos_phi
        assert making_ratio(current) == ratio


def test_a_current_just_above_a_limit_belongs_to_the_next_range():
    limits = np.array([row[0] for row in BREAKERS[:-1]])
    assert making_ratio(limits * 1.0001).tolist() == [row[2] for row in BREAKERS[1:]]


@pytest.mark.parametrize(("up_to_ka", "cos_phi", "ratio"), BREAKERS)
def test_ratio_is_the_peak_factor_at_the_test_power_factor(up_to_ka, cos_phi, ratio):
    """sqrt2 (1.02 + 0.98 e^(-3R/X)) of IEC 60909, R/X = cot(arccos), is the table before rounding.

    The formula cannot fall below 1.02 sqrt2 = 1.442, which the two highest power factors do.
    """
    r_over_x = cos_phi / math.sqrt(1.0 - cos_phi**2)
    formula = math.sqrt(2.0) * (1.02 + 0.98 * math.exp(-3.0 * r_over_x))
    assert making_ratio(up_to_ka) == pytest.approx(formula, abs=0.035)


@pytest.mark.parametrize(
    ("short_time_ka", "ratio"),
    [(4.0, 1.5), (5.0, 1.5), (5.1, 1.7), (10.0, 1.7), (20.0, 2.0), (20.1, 2.1), (50.0, 2.1), (50.1, 2.2)],
)
def test_assembly_peak(short_time_ka, ratio):
    assert assembly_peak_ratio(short_time_ka) == ratio


def test_required_capacity_where_the_peak_governs():
    """18.1 kA with a peak of 48.4 kA: n 2.0 would need 24.2 kA, above its range; n 2.1 needs 23.05 kA."""
    found = required_breaking_capacity(18.1, 48.4)
    assert (found.ratio, found.governed_by) == (2.1, "making")
    assert found.breaking_ka == pytest.approx(48.4 / 2.1, rel=1e-12)


def test_required_capacity_where_the_symmetrical_current_governs():
    found = required_breaking_capacity(30.0, 55.0)
    assert (found.breaking_ka, found.ratio, found.governed_by) == (30.0, 2.1, "breaking")


def test_required_capacity_between_two_ranges_is_just_above_the_limit():
    """Peak 41 kA: a 20 kA breaker makes 40 kA, any above it 42 kA or more."""
    found = required_breaking_capacity(15.0, 41.0)
    assert found.breaking_ka == pytest.approx(20.0)
    assert found.breaking_ka > 20.0
    assert found.ratio == 2.1


def test_required_capacity_is_enough_and_no_smaller_one_is():
    rng = np.random.default_rng(60947)
    for symmetrical, factor in zip(rng.uniform(0.5, 80.0, 300), rng.uniform(1.45, 2.7, 300), strict=True):
        peak = symmetrical * factor
        needed = required_breaking_capacity(symmetrical, peak).breaking_ka
        assert needed >= symmetrical
        assert making_ratio(needed) * needed >= peak * (1.0 - 1e-12)
        smaller = np.linspace(0.2, needed * (1.0 - 1e-9), 400)
        enough = (smaller >= symmetrical) & (making_ratio(smaller) * smaller >= peak)
        assert not enough.any()


@pytest.mark.parametrize(("cos_phi", "x_over_r"), [(0.15, 6.6), (0.20, 4.9), (0.30, 3.2), (0.50, 1.7)])
def test_multiplying_factor_is_one_at_the_test_and_grows_beyond(cos_phi, x_over_r):
    assert math.tan(math.acos(cos_phi)) == pytest.approx(x_over_r, abs=0.05)
    assert multiplying_factor(x_over_r, x_over_r) == 1.0
    assert multiplying_factor(0.5 * x_over_r, x_over_r) == 1.0
    assert multiplying_factor(1e9, x_over_r) == pytest.approx(2.0 / (1.0 + math.exp(-math.pi / x_over_r)))


def test_power_factor_of_a_fault():
    """R/X 0.05..0.15 of a ship's board: cos phi 0.05..0.15, below every test power factor."""
    for r_over_x in (0.05, 0.15):
        t_dc = 1.0 / (r_over_x * 2.0 * math.pi * 60.0)
        wanted = r_over_x / math.hypot(1.0, r_over_x)
        assert fault_power_factor(t_dc, 60.0) == pytest.approx(wanted, rel=1e-12)
        assert wanted < breaker_test_power_factor(100.0)


def test_short_time_current_of_equal_heat():
    assert equivalent_short_time_current_a(50e3**2 * 0.5, 1.0) == pytest.approx(50e3 / math.sqrt(2.0))


@pytest.mark.parametrize(
    ("frequency_hz", "time_constant_s", "factor"), [(50.0, 0.045, 2.5), (60.0, 0.045, 2.6)]
)
def test_medium_voltage_peak_factor(frequency_hz, time_constant_s, factor):
    assert rated_peak_factor(frequency_hz, time_constant_s) == factor
    # 2.55 and 2.59 before rounding.
    assert peak_of_time_constant(time_constant_s, frequency_hz) == pytest.approx(factor, abs=0.051)


@pytest.mark.parametrize("time_constant_s", [0.060, 0.075, 0.120])
def test_medium_voltage_peak_factor_of_special_time_constants(time_constant_s):
    assert rated_peak_factor(50.0, time_constant_s) == 2.7
    with pytest.raises(KeyError):
        rated_peak_factor(16.7, 0.045)


def test_dc_component_at_contact_parting():
    """e^(-(40 + 10)/45) = 32.9 % at 50 Hz; 20 % of d.c. raises the r.m.s. by 4 %, which the rating covers."""
    assert rated_dc_component(0.040, 0.045, 50.0) == pytest.approx(0.329, abs=0.0005)
    assert rated_dc_component(0.040, 0.045, 60.0) == pytest.approx(math.exp(-0.0483333 / 0.045), rel=1e-5)
    assert asymmetrical_breaking_current_a(1.0, 0.2) == pytest.approx(1.04, abs=0.005)
    assert dc_component_of_fault(math.sqrt(2.0) * 5e3, 5e3) == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("estimate", "wanted_a"),
    [
        ("ClassNK", 16770.0),  # printed in the text: 14 400 + 2 370
        ("46 CFR maximum asymmetrical", 14400.0 + 3160.0),
        ("46 CFR average asymmetrical", 12240.0 + 2765.0),
        ("46 CFR direct current", 14400.0 + 4740.0),
    ],
)
def test_rules_of_thumb(estimate, wanted_a):
    assert quick_estimate_a(QUICK_ESTIMATES[estimate], [480.0] * 3, [790.0]) == pytest.approx(wanted_a)


def test_no_current_has_no_range():
    with pytest.raises(ValueError, match="above 0 kA"):
        making_ratio(0.0)
    with pytest.raises(ValueError, match="above 0 kA"):
        required_breaking_capacity(10.0, -1.0)
