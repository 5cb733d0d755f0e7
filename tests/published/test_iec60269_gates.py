"""Gates of gG and aM fuse-links, IEC 60269-1 and -2, from memory.

The standard gives every figure as a bound; a curve drawn through the upper bounds must pass through them.
"""

from __future__ import annotations

import numpy as np
import pytest

from study.formulas.fuse_bands_iec60269 import earliest_melting_points, fuse_edges
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


# rated current, Imin(10 s), Imin(0.1 s) [A], least I2t at 0.01 s [A2s]
LOWER_GATES = (
    (16, 33, 85, 300),
    (63, 160, 450, 9_000),
    (100, 290, 820, 27_000),
    (250, 750, 2590, 250_000),
    (400, 1420, 4500, 760_000),
    (630, 2200, 8060, 2_250_000),
)


@pytest.mark.parametrize(("rated", "at_10s", "at_01s", "i2t"), LOWER_GATES)
def test_does_not_melt_before_its_gates(rated: float, at_10s: float, at_01s: float, i2t: float) -> None:
    early, late = fuse_edges(rated, "gG")
    assert early.time_s([at_10s, at_01s]) == pytest.approx([10.0, 0.1], rel=1e-9)
    fast = 3.0 * np.sqrt(i2t / 0.01)
    assert fast**2 * early.time_s(fast) == pytest.approx(i2t)
    assert np.isinf(early.time_s(1.24 * rated))
    assert np.isinf(late.time_s(1.59 * rated))
    amps = np.geomspace(1.6 * rated, 100.0 * rated, 200)
    assert np.all(early.time_s(amps) < late.time_s(amps))


def test_fuses_1_to_1_6_apart_discriminate_within_a_tenth_of_a_second() -> None:
    # IEC 60269-1: fuses in the ratio 1.6 discriminate. From 0.1 s down the corridors touch; the rounding of
    # logarithms (1e-9) parts them. At some seconds the gates alone leave an overlap.
    for small, large in ((63, 100), (100, 160), (250, 400)):
        late, early = fuse_edges(small, "gG")[1], fuse_edges(large, "gG")[0]
        amps = np.geomspace(early.points[2][0], 200.0 * large, 300)
        assert np.all(late.time_s(amps) <= (1.0 + 1e-9) * early.time_s(amps))


def test_conventional_times() -> None:
    # IEC 60269-1, from memory: 1 h up to 63 A, 2 h up to 160 A, 3 h up to 400 A, 4 h above.
    for rated, hours in ((63, 1), (100, 2), (160, 2), (250, 3), (400, 3), (630, 4)):
        assert earliest_melting_points(rated, "gG")[0] == (1.25 * rated, 3600.0 * hours)
        assert latest_melting_points(rated, "gG")[0] == (pytest.approx(1.6 * rated), 3600.0 * hours)


def test_a_motor_fuse_carries_a_start() -> None:
    # IEC 60269-2, gates of aM, from memory: not within 60 s at 4 In, 0.5 s at 8 In, 0.2 s at 10 In.
    early, late = fuse_edges(100.0, "aM")
    assert early.time_s([400.0, 800.0, 1000.0]) == pytest.approx([60.0, 0.5, 0.2])
    assert np.isinf(early.time_s(390.0))
    amps = np.geomspace(630.0, 5000.0, 50)
    assert np.all(early.time_s(amps) < late.time_s(amps))
