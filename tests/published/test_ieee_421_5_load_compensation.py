"""Load compensation |Vt + (Rc + jXc) It| and reactive sharing.

Source: IEEE 421.5-2016, clause 4 (form and sign), from memory. Numbers are worked by hand or by complex
arithmetic in the test; the sharing of two straight characteristics is an intersection of lines.
"""

import numpy as np
import pytest

from study.formulas.load_compensation import (
    compensated_voltage,
    compensated_voltage_cross_current,
    cross_current_reactance,
    reactance_from_droop,
    reactive_power_phasor,
    terminal_voltage_phasor,
    terminal_voltage_reactive_current,
)
from study.formulas.sharing import share_reactive, share_straight


@pytest.mark.parametrize("rc", [0.0, 0.02])
@pytest.mark.parametrize("xc", [0.05, 0.0, -0.03])
@pytest.mark.parametrize(("p", "q"), [(0.8, 0.6), (1.0, 0.0), (0.8, -0.6), (0.0, 0.0)])
def test_law_against_complex_arithmetic(p, q, rc, xc):
    v = 0.97
    current = np.conj((p + 1j * q) / v)
    assert float(compensated_voltage(v, p, q, rc, xc)) == pytest.approx(
        abs(v + (rc + 1j * xc) * current), abs=1e-14
    )


def test_lagging_load_lowers_the_voltage_of_a_set_with_positive_reactance():
    assert float(terminal_voltage_phasor(0.8, 0.6, 1.0, 0.05)) < 1.0
    assert float(terminal_voltage_phasor(0.8, -0.6, 1.0, 0.05)) > 1.0
    assert float(terminal_voltage_phasor(0.8, 0.6, 1.0, -0.05)) > 1.0


def test_mistaken_base_changes_the_fall_at_rated_load():
    """Five per cent on rated kVA is a fall of 3.2 % at rated load, on rated kvar one of 5.2 %."""
    fall = {
        base: 1.0
        - float(terminal_voltage_phasor(0.8, 0.6, 1.0, reactance_from_droop(0.05, base, "phasor", 0.8, 1.0)))
        for base in ("rated kVA", "rated kvar", "rated load at rated pf")
    }
    assert fall["rated load at rated pf"] == pytest.approx(0.05, abs=1e-12)
    assert fall["rated kVA"] == pytest.approx(0.032, abs=5e-4)
    assert fall["rated kvar"] == pytest.approx(0.052, abs=5e-4)


def test_two_sets_of_4_per_cent_with_set_points_one_per_cent_apart():
    v, q = share_straight([1.02, 1.01], [0.04, 0.04], [600.0, 600.0], 720.0)
    assert float(v) == pytest.approx(0.9910, abs=5e-5)
    assert q.tolist() == pytest.approx([435.0, 285.0], abs=1e-9)
    assert (q[0] - q[1]) == pytest.approx(600.0 * 0.01 / 0.04, abs=1e-9)  # Qr dE/d, whatever the load


def test_unequal_droop():
    v, q = share_straight([1.02, 1.02], [0.04, 0.03], [600.0, 600.0], 720.0)
    assert float(v) == pytest.approx(0.99943, abs=5e-6)
    assert q.tolist() == pytest.approx([308.57, 411.43], abs=0.005)


def test_equal_droop_shares_equally():
    _, q = share_reactive([1.0, 1.0], [0.04, 0.04], [0.8, 0.8], [1000.0, 1000.0], 1000.0)
    assert q.tolist() == pytest.approx([500.0, 500.0], abs=1e-9)


def test_4_and_8_per_cent_split_about_two_thirds_to_one_third():
    """Common practice, no source: kvar divide inversely to the droops; exactly so on reactive current."""
    _, phasor = share_reactive([1.0, 1.0], [0.04, 0.08], [0.8, 0.8], [1000.0, 1000.0], 1000.0)
    _, current = share_reactive([1.0, 1.0], [0.04, 0.08], [0.0, 0.0], [1000.0, 1000.0], 1000.0)
    assert current.tolist() == pytest.approx([2000.0 / 3.0, 1000.0 / 3.0], abs=1e-8)
    assert phasor[0] / 1000.0 == pytest.approx(0.680, abs=5e-4)


def test_cross_current_group_sees_no_droop_on_a_proportional_load():
    rating = np.array([2000.0, 1200.0, 800.0])
    x = cross_current_reactance(rating, 0.05)
    alike = np.full(3, 0.7 - 0.5j)
    assert compensated_voltage_cross_current(1.0, alike, 1j * x).tolist() == pytest.approx(
        [1.0] * 3, abs=1e-15
    )
    unlike = alike - 1j * np.array([0.1, 0.0, 0.0])  # the first set carries too much reactive current
    seen = compensated_voltage_cross_current(1.0, unlike, 1j * x)
    assert seen[0] > 1.0 > seen[1]


@pytest.mark.parametrize("xc", [0.05, -0.05, 0.3])
def test_reactive_power_is_the_inverse_of_the_terminal_voltage(xc):
    q = np.linspace(-0.3, 0.7, 11)
    v = terminal_voltage_phasor(0.6, q, 1.01, xc)
    assert reactive_power_phasor(v, 0.6, 1.01, xc).tolist() == pytest.approx(q.tolist(), abs=1e-11)


@pytest.mark.parametrize("law", ["phasor", "reactive current"])
@pytest.mark.parametrize("base", ["rated load at rated pf", "rated kvar"])
@pytest.mark.parametrize("v0", [1.0, 1.025])
def test_derived_reactance_gives_the_stated_fall_back(base, law, v0):
    x = reactance_from_droop(0.04, base, law, 0.8, v0)
    p = 0.8 if base == "rated load at rated pf" else 0.0
    if law == "phasor":
        v = terminal_voltage_phasor(p, 0.6, v0, x)
    else:
        v = terminal_voltage_reactive_current(0.6, v0, x)
    assert v0 - float(v) == pytest.approx(0.04, abs=1e-12)
