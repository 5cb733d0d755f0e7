"""Part load, diversity, choice of sets: limit cases and figures of practice."""

import numpy as np
import pytest

from study.formulas.demand import (
    diversified_total_kw,
    input_per_rated_output,
    largest_intermittent_total_kw,
    part_load_efficiency,
    part_load_power_factor,
    part_load_reactive_fraction,
    reactive_power_kvar,
)
from study.formulas.set_capability import (
    alternator_load,
    engine_load,
    fewest_sets,
    load_step_capability,
    load_steps,
    mean_effective_pressure_bar,
    rated_set_kw,
)


@pytest.mark.parametrize("eta", [0.80, 0.90, 0.96])
def test_efficiency_at_three_quarter_load_equals_that_at_rated_load(eta):
    """Common practice of motor data, no source; half load one to three points lower at 90 %."""
    assert float(part_load_efficiency(1.0, eta)) == pytest.approx(eta, rel=1e-12)
    assert float(part_load_efficiency(0.75, eta)) == pytest.approx(eta, rel=1e-12)
    assert float(part_load_efficiency(0.5, eta)) < eta


def test_efficiency_between_two_published_ones():
    """IEC 60034-31: v0, vL from the efficiencies at 3/4 and 4/4; here both 90 %."""
    v_load = ((1.0 / 0.9 - 1.0) - 0.75 * (1.0 / 0.9 - 1.0)) / 0.4375
    v_none = (1.0 / 0.9 - 1.0) - v_load
    for b in (0.25, 0.5, 0.6, 1.1):
        assert float(part_load_efficiency(b, 0.9)) == pytest.approx(
            1.0 / (1.0 + v_none / b + v_load * b), rel=1e-12
        )


@pytest.mark.parametrize(
    ("cos_phi", "eta", "at_half_load"),
    [(0.75, 0.83, 0.57), (0.83, 0.914, 0.69), (0.86, 0.942, 0.745), (0.88, 0.958, 0.78)],
)
def test_half_load_power_factor_is_that_of_practice(cos_phi, eta, at_half_load):
    """Four-pole motors of about 0.75, 11, 45 and 160 kW; common practice, no source, known to some 0.03."""
    assert float(part_load_power_factor(0.5, cos_phi, eta)) == pytest.approx(at_half_load, abs=0.03)


def test_rated_power_factor_at_half_load_understates_kvar_by_a_fifth_to_two_fifths():
    for cos_phi in (0.80, 0.85, 0.88):
        true = float(part_load_reactive_fraction(0.5, cos_phi))
        naive = float(input_per_rated_output(0.5, 0.92)) * 0.92
        assert 0.2 < 1.0 - naive / true < 0.42


def test_power_factor_and_reactive_power_tell_the_same():
    b, cos, eta = np.array([0.0, 0.1, 0.5, 1.0, 1.2]), 0.84, 0.92
    p = input_per_rated_output(b, eta)
    q = reactive_power_kvar(p, part_load_power_factor(b, cos, eta))
    q_rated = reactive_power_kvar(1.0 / eta, cos)
    assert (q / q_rated).tolist() == pytest.approx(part_load_reactive_fraction(b, cos).tolist(), rel=1e-12)


def test_a_motor_of_unity_power_factor_takes_no_kvar_at_any_load():
    assert part_load_power_factor([0.2, 1.0], 1.0, 0.95).tolist() == [1.0, 1.0]


def test_an_idle_motor_takes_its_constant_losses():
    assert float(input_per_rated_output(0.0, 0.9)) == pytest.approx((1.0 / 0.9 - 1.0) * 3.0 / 7.0, rel=1e-12)
    with pytest.raises(ValueError, match="idle motor"):
        part_load_efficiency(0.0, 0.9)


@pytest.mark.parametrize(
    ("b", "eta", "cos"), [(-0.1, 0.9, 0.8), (0.5, 0.0, 0.8), (0.5, 1.1, 0.8), (0.5, 0.9, 1.1)]
)
def test_values_outside_their_range(b, eta, cos):
    with pytest.raises(ValueError, match=r"load fraction|efficiency|power factor"):
        part_load_power_factor(b, cos, eta)


def test_intermittent_loads_of_a_cargo_ship():
    """Japanese ship-electrical textbook: diversity 2 to 3; three loads of 144 kW with 3 give 48 kW."""
    assert diversified_total_kw([], [90.0, 30.0, 24.0], 3.0) == pytest.approx(48.0)
    assert largest_intermittent_total_kw([100.0], [90.0, 30.0], [24.0]) == pytest.approx(214.0)
    assert largest_intermittent_total_kw([100.0], [], []) == 100.0
    with pytest.raises(ValueError, match="1 or more"):
        diversified_total_kw([], [90.0], 0.5)


def test_rating_of_a_set_is_the_weaker_machine():
    assert rated_set_kw([1000.0, 1000.0], 0.8, [830.0, 900.0], 0.95).tolist() == pytest.approx([788.5, 800.0])
    assert float(engine_load(788.5, 830.0, 0.95)) == pytest.approx(1.0)
    assert float(alternator_load(800.0, 600.0, 1000.0)) == pytest.approx(1.0)


def test_fewest_sets_by_brute_force():
    ratings = (800.0, 800.0, 500.0, 300.0)
    for load in np.arange(0.0, 2401.0, 50.0):
        found = fewest_sets(float(load), ratings, 0.85)
        enough = [
            m for m in range(1, 16) if sum(r for i, r in enumerate(ratings) if m >> i & 1) * 0.85 >= load
        ]
        if found is None:
            assert not enough
        else:
            best = min((m.bit_count(), sum(r for i, r in enumerate(ratings) if m >> i & 1)) for m in enough)
            assert (len(found), sum(ratings[i] for i in found)) == best


def test_a_margin_of_nothing_is_refused():
    with pytest.raises(ValueError, match="above 0"):
        fewest_sets(100.0, (200.0,), 0.0)


@pytest.mark.parametrize(("bar", "fraction"), [(6.0, 1.0), (8.0, 1.0), (16.0, 0.50), (24.0, 0.33)])
def test_first_step_of_an_engine(bar, fraction):
    """IACS UR M3, curve read at three pressures, two digits; from memory."""
    assert load_step_capability(bar) == pytest.approx(fraction, abs=0.005)


def test_mean_effective_pressure():
    """One bar of mean pressure on one litre at 1200 1/min of a four-stroke engine is 1 kW."""
    assert mean_effective_pressure_bar(1.0, 1.0, 1200.0, 4) == pytest.approx(1.0)
    assert mean_effective_pressure_bar(1.0, 1.0, 600.0, 2) == pytest.approx(1.0)
    with pytest.raises(ValueError, match="2 or 4"):
        mean_effective_pressure_bar(1.0, 1.0, 1200.0, 3)


@pytest.mark.parametrize(
    ("load", "step", "count"), [(0.0, 0.5, 0), (0.5, 0.5, 1), (0.51, 0.5, 2), (1.0, 1.0 / 3.0, 3)]
)
def test_steps(load, step, count):
    assert load_steps(load, step) == count


def test_steps_refuse_nonsense():
    with pytest.raises(ValueError, match="0 or more"):
        load_steps(-0.1, 0.5)
    with pytest.raises(ValueError, match="above 0 bar"):
        load_step_capability(0.0)
