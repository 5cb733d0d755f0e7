"""Gates of gG and aM fuse-links, IEC 60269-1 and -2, from memory.

The standard gives every figure as a bound; a curve drawn through the upper bounds must pass through them.
"""

from __future__ import annotations

import numpy as np
import pytest

from study.formulas.fuses_iec60269 import latest_melting_points, latest_melting_time_s
from study.formulas.table_files import numeric_table

# rated current, Imax(5 s), Imax(0.1 s) [A]
GATES = (
    (16, 65, 150),
    (63, 320, 820),
    (100, 580, 1450),
    (250, 1650, 4500),
    (400, 2840, 8060),
    (630, 5100, 14140),
)


@pytest.mark.parametrize(("rated", "at_5s", "at_01s"), GATES)
def test_melts_within_its_gates(rated: float, at_5s: float, at_01s: float) -> None:
    points = latest_melting_points(rated, "gG")
    assert latest_melting_time_s([at_5s, at_01s], points) == pytest.approx([5.0, 0.1], rel=1e-9)


def test_constant_heat_above_the_last_point() -> None:
    points = latest_melting_points(100.0, "gG")
    last_a, last_s = points[-1]
    assert last_a**2 * last_s == pytest.approx(86_000.0)
    assert latest_melting_time_s(2.0 * last_a, points) == pytest.approx(last_s / 4.0)


def test_discrimination_of_sizes_in_the_ratio_1_to_1_6() -> None:
    # IEC 60269-1: fuses of one kind discriminate from 16 A up where their ratings are 1:1.6 apart; so the
    # greatest I2t of one is no more than the least of the next but one.
    table = numeric_table("fuse_gates_iec60269", "rated_a")
    for small, large in ((16, 25), (63, 100), (100, 160), (125, 200), (250, 400), (400, 630)):
        assert table[small]["i2t_max_a2s"] <= table[large]["i2t_min_a2s"]


def test_a_motor_fuse_melts_at_6_3_times_within_a_minute_and_not_for_certain_below() -> None:
    points = latest_melting_points(100.0, "aM")
    assert latest_melting_time_s(630.0, points) == pytest.approx(60.0)
    assert np.isinf(latest_melting_time_s(600.0, points))


def test_a_size_that_no_standard_lists_is_refused() -> None:
    with pytest.raises(ValueError, match="no gates for a gG fuse of 110 A"):
        latest_melting_points(110.0, "gG")
