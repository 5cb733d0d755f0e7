"""Two alternators in parallel, one set to a given current: current and excitation of both.

Source: textbook question (33 kV, 12 MW at 0.8 lagging, two sets of 8 ohm a phase that share the active power
equally, one set to 125 A lagging); the answers are worked by complex arithmetic and the power triangle, not
printed in the source. Second: shunt generators of a marine engineers' examination, 265 V falling to 230 V at
350 A and 270 V falling to 240 V at 400 A, on 500 A; the question is published, the answer is where two lines
meet.
"""

import numpy as np
import pytest

from study.formulas.sharing import circulating_current, share_straight
from study.formulas.synchronous import two_reaction

LINE_KV, X_OHM, TOTAL_MW = 33.0, 8.0, 12.0
PHASE_V = LINE_KV * 1e3 / np.sqrt(3.0)


def _set(p_mw: float, q_mvar: float) -> tuple[float, float, float]:
    """Return current [A], line excitation [kV] and load angle [degrees]."""
    current = np.hypot(p_mw, q_mvar) / (np.sqrt(3.0) * LINE_KV) * 1e3
    base_ohm = PHASE_V / current
    s = two_reaction(1.0, 1.0, np.arctan2(q_mvar, p_mw), X_OHM / base_ohm, X_OHM / base_ohm)
    return float(current), float(s.e_pu) * LINE_KV, float(np.degrees(s.delta_rad))


def test_one_set_at_125_ampere():
    p = TOTAL_MW / 2.0
    q_a = np.sqrt((np.sqrt(3.0) * LINE_KV * 0.125) ** 2 - p**2)
    q_b = TOTAL_MW * 0.75 - q_a
    a, b = _set(p, q_a), _set(p, q_b)
    assert a == pytest.approx((125.0, 33.97, 2.45), abs=0.005)
    assert b[0] == pytest.approx(138.0, abs=0.05)
    assert b[1:] == pytest.approx((34.27, 2.43), abs=0.005)


def test_difference_of_excitations_drives_the_reactive_difference():
    p = TOTAL_MW / 2.0
    q_a = np.sqrt((np.sqrt(3.0) * LINE_KV * 0.125) ** 2 - p**2)
    q_b = TOTAL_MW * 0.75 - q_a
    (_, e_a, d_a), (_, e_b, d_b) = _set(p, q_a), _set(p, q_b)
    phase = 1e3 / np.sqrt(3.0)
    i = circulating_current(
        phase * e_b * np.exp(1j * np.radians(d_b)), phase * e_a * np.exp(1j * np.radians(d_a)), 8j, 8j
    )
    half_difference = (q_b - q_a) / 2.0 * 1e6 / 3.0 / PHASE_V
    assert i.imag == pytest.approx(-half_difference, rel=1e-9)
    assert i.real == pytest.approx(0.0, abs=1e-6)  # equal active power: no active current circulates


def test_examination_question_of_two_dynamos():
    v, i = share_straight([265.0, 270.0], [35.0, 30.0], [350.0, 400.0], 500.0)
    assert float(v) == pytest.approx(246.43, abs=0.005)
    assert i.tolist() == pytest.approx([185.7, 314.3], abs=0.05)
    assert (float(v) * i / 1e3).tolist() == pytest.approx([45.8, 77.4], abs=0.06)
