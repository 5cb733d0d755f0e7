"""Inverse-time curves of IEC 60255-151:2009, table A.1, and IEEE C37.112; all from memory.

Operating times at a time multiplier of 1, to four decimals or five digits; tolerance half of the last digit.
"""

from __future__ import annotations

import numpy as np
import pytest

from study.formulas.curves_iec60255 import INVERSE_CURVES, inverse_time_s, overload_time_s

TIMES = {
    "standard inverse": (10.029, 4.2797, 2.9706, 2.2674),
    "very inverse": (13.5, 3.375, 1.5, 0.7105),
    "extremely inverse": (26.667, 3.3333, 0.8081, 0.2005),
    "long-time inverse": (120.0, 30.0, 13.333, 6.3158),
    "IEEE moderately inverse": (3.8032, 1.6883, 1.2068, 0.9481),
    "IEEE very inverse": (7.0277, 1.3081, 0.6891, 0.5401),
    "IEEE extremely inverse": (9.5217, 1.2967, 0.4065, 0.1924),
}


@pytest.mark.parametrize("curve", TIMES)
def test_times_at_2_5_10_and_20_times_the_setting(curve: str) -> None:
    times = inverse_time_s([2.0, 5.0, 10.0, 20.0], *INVERSE_CURVES[curve])
    for time_s, printed in zip(times, TIMES[curve], strict=True):
        assert time_s == pytest.approx(printed, abs=5e-4 if printed > 9.9995 else 5e-5)


def test_flat_above_twenty_and_never_at_the_setting() -> None:
    at_20, above, at_1 = inverse_time_s([20.0, 35.0, 1.0], *INVERSE_CURVES["very inverse"])
    assert above == at_20
    assert np.isinf(at_1)


def test_feeder_relay_of_a_printed_example() -> None:
    # Chakrabarti et al., Power System Engineering, part III, example 7.3: 400/5 A at 125 %, multiplier 0.3,
    # fault 5000 A: 10 times the setting, 0.891 s by the formula of the curve.
    assert 0.3 * inverse_time_s(5000.0 / 500.0, *INVERSE_CURVES["standard inverse"]) == pytest.approx(
        0.891, abs=5e-4
    )


def test_overload_relay_passes_through_the_points_of_its_class() -> None:
    # IEC 60947-4-1, table 2, from memory: class 20 trips within 20 s at 7.2 times the setting from cold, and
    # within 2 h at 1.2 times only after warming: the curve has no end above 1.2.
    assert overload_time_s(7.2, 20.0) == pytest.approx(20.0, rel=1e-12)
    assert np.isinf(overload_time_s(1.2, 20.0))
    assert overload_time_s(3.0, 20.0) > overload_time_s(6.0, 20.0)
