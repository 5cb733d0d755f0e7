"""When a fault is cleared: every kind of stage against hand-worked times, with steady and falling current."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from study.analyses.fault_ratings_clearing import STAGES, Clearing, clear
from study.analyses.fault_ratings_history import Histories, knots_s
from study.analyses.fault_ratings_releases import releases
from study.model.protection import CurvePoint, Device
from tests import plants

HALF_S = 0.5 / 60.0
NO_TOLERANCE = {"current_tolerance": 0.0, "time_tolerance": 0.0}


def steady(amps: float) -> Histories:
    """Return a current that does not change, of one row."""
    return falling(amps, amps, 1.0)


def falling(first: float, last: float, t_s: float) -> Histories:
    """Return a current that falls from one value to another by an exponential."""
    knots = knots_s(60.0, np.array([np.inf]))
    times = np.stack([knots[:-1], 0.5 * (knots[1:] + knots[:-1]), knots[1:]], axis=1)
    ac = last + (first - last) * np.exp(-times / t_s)
    return Histories(time_s=knots, ac_a=ac[None], dc_a=np.zeros_like(ac)[None])


def cleared(
    device: Device, current: Histories, *, holds_s: float = math.inf, **plant: Any
) -> tuple[str, Clearing]:
    """Return stage and times of one device of a plant that has no other."""
    release = releases(plants.plant(boards=[plants.board("MSB")], devices=[device], **plant))
    found = clear(release, current, HALF_S, np.array([holds_s]))
    return STAGES[found.stage[0]], found


def breaker(**settings: Any) -> Device:
    return plants.device("Q1", "MSB", breaking_time_max_s=0.05, **{**NO_TOLERANCE, **settings})


def test_instantaneous_clears_in_its_breaking_time() -> None:
    stage, found = cleared(breaker(instantaneous_a=5000.0), steady(5000.0))
    assert stage == "instantaneous"
    assert found.time_s[0] == 0.05


def test_instantaneous_is_counted_on_only_beyond_its_tolerance() -> None:
    device = breaker(instantaneous_a=5000.0, current_tolerance=0.2)
    assert cleared(device, steady(5999.0))[0] == "does not clear"
    assert cleared(device, steady(6001.0))[0] == "instantaneous"


def test_a_definite_delay_is_lengthened_by_its_tolerance() -> None:
    device = breaker(short_time_a=3000.0, short_time_delay_s=0.4, time_tolerance=0.1)
    stage, found = cleared(device, steady(4000.0))
    assert stage == "short-time delay"
    assert found.time_s[0] == pytest.approx(0.4 * 1.1 + 0.05, rel=1e-12)


def test_a_current_that_falls_below_the_pick_up_before_the_delay_ends_is_not_cleared() -> None:
    # 10 kA falling with 0.1 s: 10 e^-4 = 183 A after 0.4 s
    device = breaker(short_time_a=3000.0, short_time_delay_s=0.4)
    stage, found = cleared(device, falling(10_000.0, 0.0, 0.1))
    assert stage == "does not clear"
    assert np.isinf(found.time_s[0])
    assert found.seen_a[0] == pytest.approx(10_000.0 * math.exp(-4.0), rel=1e-3)
    assert found.pick_up_a[0] == 3000.0
    assert STAGES[found.meant[0]] == "short-time delay"


def test_an_i2t_delay_is_the_delay_set_from_ten_times_the_long_time_current() -> None:
    device = breaker(long_time_a=1000.0, short_time_a=3000.0, short_time_delay_s=0.1, short_time_law="I2t")
    assert cleared(device, steady(12_000.0))[1].time_s[0] == pytest.approx(0.15, rel=1e-6)
    # at 5 Ir four times as long
    assert cleared(device, steady(5_000.0))[1].time_s[0] == pytest.approx(0.45, rel=1e-6)


@pytest.mark.parametrize(("law", "time_s"), [("I2t", 10.0), ("I4t", 10.0 / 4.0)])
def test_long_time_delay_by_its_law(law: str, time_s: float) -> None:
    # 10 s at 6 Ir; at 6 sqrt2 Ir half of that for I2t and a quarter for I4t
    device = breaker(long_time_a=1000.0, long_time_delay_s=10.0, long_time_delay_at=6.0, long_time_law=law)
    found = cleared(device, steady(6000.0 * math.sqrt(2.0)))[1]
    assert found.time_s[0] == pytest.approx((5.0 if law == "I2t" else time_s) + 0.05, rel=1e-9)


def test_long_time_delay_of_a_falling_current_gathers_its_heat() -> None:
    # I2t = 10 s (6 kA)2 = 3.6e8; I = 8 e^(-t/20) + 4 kA: heat to t by hand
    device = breaker(long_time_a=1000.0, long_time_delay_s=10.0, long_time_delay_at=6.0)
    found = cleared(device, falling(12_000.0, 4000.0, 20.0))[1]
    t = found.time_s[0] - 0.05
    heat = 64e6 * 10.0 * (1.0 - math.exp(-t / 10.0)) + 64e6 * 20.0 * (1.0 - math.exp(-t / 20.0)) + 16e6 * t
    assert heat == pytest.approx(3.6e8, rel=0.02)  # linear inside an interval of the time grid


def test_where_the_short_time_delay_takes_hold_a_faster_long_time_curve_is_not_counted_on() -> None:
    device = breaker(
        long_time_a=100.0,
        long_time_delay_s=10.0,
        long_time_delay_at=2.0,
        short_time_a=600.0,
        short_time_delay_s=0.2,
    )
    stage, found = cleared(device, steady(20_000.0))  # long time: 10 (2/200)2 = 1 ms
    assert stage == "short-time delay"
    assert found.time_s[0] == pytest.approx(0.25, rel=1e-9)


def test_relay_curve_and_the_breaker_that_it_opens() -> None:
    # very inverse, setting 400 A, multiplier 0.5: at 10 times 0.5 x 13.5/9 = 0.75 s, and 0.08 s to arc out
    relay = plants.device(
        "R1", "C1", end="MSB", kind="overcurrent relay", long_time_a=400.0, relay_curve="very inverse",
        time_multiplier=0.5, breaking_time_max_s=0.08, **NO_TOLERANCE,
    )  # fmt: skip
    switch = plants.device("Q1", "C1", end="MSB", breaking_time_max_s=0.06, **NO_TOLERANCE)
    both = releases(plants.plant(boards=[plants.board("MSB")], devices=[switch, relay]))
    currents = steady(4000.0)
    pair = Histories(
        time_s=currents.time_s,
        ac_a=np.repeat(currents.ac_a, 2, axis=0),
        dc_a=np.repeat(currents.dc_a, 2, axis=0),
    )
    found = clear(both, pair, HALF_S, np.full(2, np.inf))
    assert found.time_s == pytest.approx([0.83, 0.83], rel=1e-9)
    assert [release.by_relay for release in both] == [True, False]


def test_a_relay_of_definite_time() -> None:
    relay = plants.device(
        "R1", "MSB", kind="overcurrent relay", long_time_a=400.0, relay_curve="definite time",
        long_time_delay_s=1.5, breaking_time_max_s=0.1, **NO_TOLERANCE,
    )  # fmt: skip
    assert cleared(relay, steady(500.0))[1].time_s[0] == pytest.approx(1.6, rel=1e-9)
    assert cleared(relay, steady(399.0))[0] == "does not clear"


def test_a_standard_fuse_by_its_gates() -> None:
    # 100 A gG: 580 A within 5 s (IEC 60269-1, from memory)
    fuse = plants.device("S1", "MSB", kind="fuse", i_rated_a=100.0, fuse_class="gG")
    stage, found = cleared(fuse, steady(580.0))
    assert stage == "fuse melting"
    assert found.time_s[0] == pytest.approx(5.0, rel=1e-9)


def test_a_makers_curve_comes_before_settings_and_gates() -> None:
    points = [
        CurvePoint(curve="C", cell="", current_in=x, current_a=None, time_min_s=None, time_max_s=t)
        for x, t in ((1.45, 3600.0), (10.0, 0.1), (100.0, 0.01))
    ]
    device = breaker(i_rated_a=20.0, curve="C", instantaneous_a=1.0)
    stage, found = cleared(device, steady(200.0), curves=points)
    assert stage == "maker's curve"
    assert found.time_s[0] == pytest.approx(0.1, rel=1e-9)


def test_a_motors_overload_relay_stands_in_for_a_magnetic_breakers_missing_stage() -> None:
    # class 10 at 7.2 times its setting from cold: 10 s (IEC 60947-4-1, from memory)
    magnetic = plants.device("Q1", "C1", instantaneous_a=5000.0, breaking_time_max_s=0.05, **NO_TOLERANCE)
    overload = plants.device("F1", "Pump", kind="thermal overload", long_time_a=100.0, trip_class="10")
    plant = plants.plant(
        boards=[plants.board("MSB")],
        loads=[plants.load("Pump", "MSB")],
        cables=[plants.cable("C1", "MSB", "Pump")],
        devices=[magnetic, overload],
    )
    release = releases(plant)[:1]
    found = clear(release, steady(720.0), HALF_S, np.array([np.inf]))
    assert STAGES[found.stage[0]] == "overload relay"
    assert found.time_s[0] == pytest.approx(10.05, rel=1e-6)


def test_what_takes_longer_than_the_current_is_kept_up_does_not_clear() -> None:
    device = breaker(long_time_a=1000.0, long_time_delay_s=10.0, long_time_delay_at=6.0)
    stage, found = cleared(device, steady(6000.0), holds_s=5.0)
    assert stage == "does not clear"
    assert found.due_s[0] == pytest.approx(10.05, rel=1e-9)


@pytest.mark.parametrize(
    "device",
    [
        breaker(),
        breaker(short_time_a=3000.0),  # no delay given
        breaker(long_time_a=1000.0),  # no delay given
        plants.device("S1", "MSB", kind="fuse", i_rated_a=100.0),  # no class given
        plants.device("S1", "MSB", kind="fuse", i_rated_a=110.0, fuse_class="gG"),  # no standard size
    ],
)
def test_without_a_setting_nothing_is_known(device: Device) -> None:
    stage, found = cleared(device, steady(50_000.0))
    assert stage == "no setting given"
    assert np.isnan(found.time_s[0])


def test_an_instantaneous_stage_that_is_off_is_none() -> None:
    device = breaker(instantaneous_a=None, instantaneous_off=True, short_time_a=100.0, short_time_delay_s=0.3)
    assert cleared(device, steady(50_000.0))[0] == "short-time delay"
    assert cleared(replace(device, short_time_a=None, short_time_off=True), steady(5e4))[0] == (
        "no setting given"
    )
