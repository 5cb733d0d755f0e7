"""Through-fault withstand of transformers: IEC 60076-5:2006, table 4 (factor k sqrt2), from memory.

Tolerance: half of the last printed digit.
"""

import numpy as np
import pytest

from study.formulas.fault_transformer import WITHSTAND_S, withstand_current_a, withstand_peak_factor

X_OVER_R = (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0, 14.0)
K_SQRT2 = (1.51, 1.64, 1.76, 1.95, 2.09, 2.19, 2.27, 2.38, 2.46, 2.55)


def test_table_4_peak_factor():
    assert withstand_peak_factor(X_OVER_R) == pytest.approx(K_SQRT2, abs=0.005)


def test_two_seconds_at_rated_current_over_short_circuit_voltage():
    """A transformer of 4 % carries 25 times its rated current: the largest that table 1 asks for."""
    assert WITHSTAND_S == 2.0
    rated = 500e3 / (3.0**0.5 * 400.0)
    assert withstand_current_a(500e3, 400.0, np.array([0.04, 0.06])) == pytest.approx(
        [25.0 * rated, rated / 0.06]
    )
