"""Conventional currents and tolerances of low-voltage breakers, miniature breakers and overload relays.

IEC 60947-2, 60898-1 and 60947-4-1, all from memory. The figures are bounds, so bands must touch them exactly.
"""

from __future__ import annotations

import numpy as np
import pytest

from study.formulas.curves_iec60255 import ULTIMATE_TRIP
from study.formulas.releases_iec60947 import (
    conventional_time_s,
    instantaneous_edges,
    long_time_edges,
    short_time_edges,
)
from study.formulas.thermal_iec60947_4 import (
    CLASS_WARM_S,
    overload_relay_edges,
    time_constant_s,
)
from study.formulas.trip_law import heating_time_s

AT_ONCE = {"opens_s": 0.0, "breaks_s": 0.0}


def test_an_overload_release_holds_at_1_05_and_trips_at_1_30_within_its_time() -> None:
    # IEC 60947-2, table 6: no trip at 1.05 Ir, trip at 1.30 Ir within 1 h up to 63 A, 2 h above.
    for rated in (40.0, 63.0, 64.0, 400.0):
        early, late = long_time_edges(rated, 10.0, 6.0, time_tolerance=0.1, **AT_ONCE)
        assert np.isinf(early.time_s(1.049 * rated))
        assert np.isinf(late.time_s(1.299 * rated))
        assert late.time_s(1.30 * rated) <= conventional_time_s(rated)
    assert conventional_time_s(63.0) == 3600.0
    assert conventional_time_s(64.0) == 7200.0


@pytest.mark.parametrize(("law", "at_twice"), [("I2t", 90.0), ("I4t", 810.0)])
def test_long_time_laws_through_the_point_set(law: str, at_twice: float) -> None:
    # 10 s at 6 Ir: I2t constant gives 10 (6/2)² = 90 s at twice the setting, I4t constant 10 (6/2)^4 = 810 s.
    edges = long_time_edges(100.0, 10.0, 6.0, law=law, time_tolerance=0.2, **AT_ONCE)  # type: ignore[arg-type]
    assert [float(edge.time_s(600.0)) for edge in edges] == pytest.approx([8.0, 12.0])
    assert [float(edge.time_s(200.0)) for edge in edges] == pytest.approx([0.8 * at_twice, 1.2 * at_twice])


def test_a_short_circuit_release_holds_at_80_and_trips_at_120_per_cent() -> None:
    early, late = instantaneous_edges(1000.0, senses="rms", opens_s=0.01, breaks_s=0.05)
    assert np.isinf(early.time_s(799.0))
    assert early.time_s(801.0) == 0.0
    assert np.isinf(late.time_s(1199.0))
    # IEC 60947-2, clause 8.3.3.1.2: at 120 % within 0.2 s.
    assert late.time_s(1201.0) + late.after_s <= 0.2


def test_an_i2t_ramp_meets_the_definite_delay_at_ten_times() -> None:
    _, late = short_time_edges(
        500.0, 0.2, ramp_ir_a=100.0, time_tolerance=0.0, current_tolerance=0.0, **AT_ONCE
    )
    assert late.time_s([500.0, 1000.0, 3000.0]) == pytest.approx([0.8, 0.2, 0.2])


@pytest.mark.parametrize(
    ("trip_class", "least", "most"),
    [("10A", 2.0, 10.0), ("10", 4.0, 10.0), ("20", 6.0, 20.0), ("30", 9.0, 30.0)],
)
def test_overload_relay_at_7_2_times_from_cold(trip_class: str, least: float, most: float) -> None:
    edges = overload_relay_edges(10.0, trip_class, breaks_up_to_a=1000.0)
    assert [float(edge.time_s(72.0)) for edge in edges] == pytest.approx([least, most], rel=1e-9)


@pytest.mark.parametrize("trip_class", ["10", "20", "30"])
def test_overload_relay_at_1_05_1_2_and_1_5_times(trip_class: str) -> None:
    # IEC 60947-4-1, tables 2 and 3: no trip in 2 h at 1.05, trip in 2 h at 1.2 after it, from warm within 4,
    # 8, 12 min at 1.5. Class 10A (2 min) is left out: its two points lie on no one curve of one body.
    early, late = overload_relay_edges(10.0, trip_class, breaks_up_to_a=1000.0)
    assert early.time_s(10.49) > 7200.0
    tau = time_constant_s({"10": 10.0, "20": 20.0, "30": 30.0}[trip_class], ULTIMATE_TRIP)
    assert heating_time_s(1.5, tau, ULTIMATE_TRIP, 1.0) <= CLASS_WARM_S[trip_class]
    assert heating_time_s(1.201, tau, ULTIMATE_TRIP, 1.05) <= 7200.0
    assert np.isinf(late.time_s(12.0))


def test_time_constants_through_the_class_points() -> None:
    # tau = t/ln(7.2²/(7.2² - 1.15²)), worked by hand: 387, 774, 1161 s; and 2.5 s at 7.2 times from warm.
    assert [time_constant_s(t, 1.15) for t in (10.0, 20.0, 30.0)] == pytest.approx([387, 774, 1161], abs=0.5)
    assert heating_time_s(7.2, 387.0, 1.15, 1.0) == pytest.approx(2.5, abs=0.05)


def test_a_contactor_is_not_counted_on_above_what_it_breaks() -> None:
    early, late = overload_relay_edges(10.0, "10", breaks_up_to_a=80.0)
    assert np.isfinite(late.time_s(80.0))
    assert np.isinf(late.time_s(81.0))
    assert np.isfinite(early.time_s(81.0))
