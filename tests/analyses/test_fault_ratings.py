"""Duties beside ratings against arithmetic done by hand, from made-up short-circuit results."""

from __future__ import annotations

import math
from dataclasses import fields
from itertools import permutations
from typing import Any

import numpy as np
import pytest

from study.analyses.fault_ratings import fault_ratings
from study.model.plant import Plant
from study.model.protection import CurvePoint, Device, LetThroughPoint
from study.results.fault_ratings import FaultRatingsResult
from study.results.short_circuit import ModeShortCircuit, ShortCircuitResult
from tests import plants
from tests.analyses import made_up_short_circuit as made
from tests.analyses.made_up_short_circuit import DeviceRow, Feed, Place, Source

SQRT2 = math.sqrt(2.0)
HALF_S = 0.5 / 60.0
MSB = Place(name="MSB")
DB = Place(name="DB")
RATED = {"peak_withstand_ka": 63.0, "short_time_withstand_ka": 30.0, "short_time_duration_s": 1.0}
EXACT = {"current_tolerance": 0.0, "time_tolerance": 0.0}


def with_peak(half_a: float, ip_a: float, t_dc_s: float = 0.04, **feed: Any) -> Feed:
    """Return a feed of MSB with a steady Iac and with the direct component that gives a peak."""
    direct = (ip_a - SQRT2 * half_a) * math.exp(HALF_S / t_dc_s)
    start = {"place": "MSB", "source": "G1", "initial_a": half_a, "dc_a": direct, "t_dc_s": t_dc_s}
    return Feed(**{**start, **feed})


def result_of(*modes: ModeShortCircuit, where: tuple[Place, ...] = (MSB,)) -> ShortCircuitResult:
    return made.result(made.places(*where), *modes)


def one_mode(
    feeds: list[Feed], rows: list[DeviceRow], where: tuple[Place, ...] = (MSB,), **more: Any
) -> ShortCircuitResult:
    sources = more.pop("sources", None) or [Source(name=n) for n in dict.fromkeys(f.source for f in feeds)]
    return result_of(made.mode("At sea", made.places(*where), sources, feeds, rows, **more), where=where)


def one_breaker(feed: Feed, **ratings: Any) -> FaultRatingsResult:
    """Return the duties of one breaker on a feeder of MSB, fed by all of the plant."""
    plant = plants.plant(
        boards=[plants.board("MSB", **RATED)],
        cables=[plants.cable("C1", "MSB", "Pump")],
        loads=[plants.load("Pump", "MSB")],
        devices=[plants.device("Q1", "C1", **{"breaking_time_max_s": 0.05, **EXACT, **ratings})],
    )
    return fault_ratings(plant, one_mode([feed], [DeviceRow(name="Q1", place="MSB", own="C1")]))


# --- low-voltage breakers ---------------------------------------------------------------------------------


def test_breaking_capacity_where_the_power_factor_is_below_that_of_the_test() -> None:
    # Iac(T/2) 18.1 kA, ip 48.4 kA: at n = 2.0 it would be 24.2 kA, so in the range with n = 2.1: 23.05 kA
    # (ratios of IEC 60947-2, table 2, from memory); w Tdc = 15.1, cos phi 0.066 against 0.30 of the test.
    devices = one_breaker(with_peak(18_100.0, 48_400.0), icu_ka=20.0).devices
    assert devices.half_ka[0, 0] == pytest.approx(18.1, rel=1e-9)
    assert devices.peak_ka[0, 0] == pytest.approx(48.4, rel=1e-9)
    assert devices.cos_phi[0, 0] == pytest.approx(1.0 / math.hypot(1.0, 2 * math.pi * 60.0 * 0.04), rel=1e-3)
    assert devices.needed_ka[0, 0] == pytest.approx(48.4 / 2.1, rel=1e-9)
    assert devices.peak_governs[0, 0]
    assert devices.enough_breaking_ka[0] == 25.0


def test_breaking_capacity_where_the_power_factor_is_not_below_that_of_the_test() -> None:
    # Tdc 5 ms: R/X 0.53, cos phi 0.47 against 0.30 of a breaker of 20 kA
    devices = one_breaker(with_peak(18_100.0, 30_000.0, 0.005), icu_ka=20.0).devices
    assert devices.needed_ka[0, 0] == pytest.approx(18.1, rel=1e-9)
    assert not devices.peak_governs[0, 0]


def test_a_test_at_a_lower_power_factor_than_the_standards_covers_a_higher_peak() -> None:
    # cos phi 0.1: R/X 0.1005, sqrt2 (1.02 + 0.98 e^-0.3015) = 2.468
    devices = one_breaker(with_peak(18_100.0, 48_400.0), icu_ka=20.0, test_cos_phi=0.1).devices
    r_over_x = 0.1 / math.sqrt(0.99)
    ratio = SQRT2 * (1.02 + 0.98 * math.exp(-3.0 * r_over_x))
    assert devices.needed_ka[0, 0] == pytest.approx(48.4 / ratio, rel=1e-9)


def test_making_capacity_declared_or_by_the_ratio_of_the_standard() -> None:
    declared = one_breaker(with_peak(18_100.0, 48_400.0), icu_ka=25.0, icm_ka=55.0).devices
    assert (declared.making_peak_ka[0], bool(declared.making_declared[0])) == (55.0, True)
    derived = one_breaker(with_peak(18_100.0, 48_400.0), icu_ka=25.0).devices
    assert (derived.making_peak_ka[0], bool(derived.making_declared[0])) == (2.1 * 25.0, False)
    neither = one_breaker(with_peak(18_100.0, 48_400.0)).devices
    assert np.isnan(neither.making_peak_ka[0])


def test_short_time_withstand_until_the_delay_ends() -> None:
    # 10 kA steady for 0.2 x 1.1 + 0.05 = 0.27 s: the same heat as 5.196 kA for 1 s
    devices = one_breaker(
        Feed(place="MSB", source="G1", initial_a=10_000.0, dc_a=0.0), icu_ka=25.0, icw_ka=12.0,
        icw_duration_s=1.0, short_time_a=2000.0, short_time_delay_s=0.2, time_tolerance=0.1,
    ).devices  # fmt: skip
    assert devices.delayed[0, 0]
    assert devices.clearing_s[0, 0] == pytest.approx(0.27)
    assert devices.heat_ka[0, 0] == pytest.approx(math.sqrt(100.0 * 0.27), rel=1e-9)
    assert devices.closed_peak_ka[0, 0] == pytest.approx(10.0 * SQRT2, rel=1e-9)
    assert devices.rated_closed_peak_ka[0] == 2.0 * 12.0


def test_no_short_time_withstand_is_asked_of_a_breaker_that_opens_at_once() -> None:
    devices = one_breaker(with_peak(18_100.0, 48_400.0), instantaneous_a=5000.0, icw_ka=12.0).devices
    assert not devices.delayed[0, 0]
    assert np.isnan(devices.heat_ka[0, 0])


def test_the_larger_of_own_branch_and_the_rest() -> None:
    feeds = [
        Feed(place="MSB", source="G1", initial_a=9000.0, through="C-G1", far_end="G1"),
        Feed(place="MSB", source="G2", initial_a=7000.0, through="C-G2", far_end="G2"),
    ]
    plant = plants.plant(
        boards=[plants.board("MSB")],
        gensets=[plants.genset("G1", "MSB"), plants.genset("G2", "MSB")],
        cables=[plants.cable("C-G1", "G1", "MSB"), plants.cable("C-G2", "G2", "MSB")],
        devices=[
            plants.device("Q1", "C-G1", short_time_a=2000.0, short_time_delay_s=0.4),
            plants.device("Q2", "C-G2", short_time_a=2000.0, short_time_delay_s=0.4),
        ],
    )
    rows = [DeviceRow(name="Q1", place="MSB", own="C-G1"), DeviceRow(name="Q2", place="MSB", own="C-G2")]
    devices = fault_ratings(plant, one_mode(feeds, rows)).devices
    # Q1 carries its own set's 9 kA, Q2 the 9 kA of the other set: never 16 kA
    assert devices.half_ka[:, 0] == pytest.approx([9.0, 9.0])
    assert devices.through[:, 0].tolist() == [True, False]


# --- fuses ------------------------------------------------------------------------------------------------


def test_a_fuse_breaks_the_initial_current_and_cuts_its_peak_off() -> None:
    sheet = [
        LetThroughPoint(curve="F", cell="", prospective_ka=x, cut_off_peak_ka=y, let_through_a2s=z)
        for x, y, z in ((5.0, 5.0, 2e4), (20.0, 10.0, 4e4))
    ]
    plant = plants.plant(
        boards=[plants.board("MSB")],
        cables=[plants.cable("C1", "MSB", "Pump", section_mm2=2.5)],
        loads=[plants.load("Pump", "MSB")],
        devices=[
            plants.device("S1", "C1", kind="fuse", i_rated_a=63.0, fuse_class="gG", icu_ka=80.0, curve="F")
        ],
        let_through=sheet,
    )
    feed = Feed(place="MSB", source="G1", initial_a=10_000.0, transient_a=6000.0)
    found = fault_ratings(plant, one_mode([feed], [DeviceRow(name="S1", place="MSB", own="C1")]))
    assert found.devices.rules == ("fuse",)
    assert found.devices.needed_ka[0, 0] == pytest.approx(10.0)
    # halfway between 5 and 20 kA in logarithms
    assert found.devices.cut_off_peak_ka[0, 0] == pytest.approx(math.sqrt(50.0))
    assert found.cables.let_through[0, 0]
    assert found.cables.heat_a2s[0, 0] == pytest.approx(math.sqrt(8e8))


# --- above 1 kV -------------------------------------------------------------------------------------------


def medium_voltage(**ratings: Any) -> FaultRatingsResult:
    """Return a breaker at 6.6 kV, 60 Hz: 10 kA falling, direct component 14.14 kA with 50 ms."""
    feed = Feed(
        place="MV", source="G1", initial_a=10_000.0, transient_a=6000.0, sustained_a=2000.0,
        t_sub_s=0.02, t_trans_s=0.3, t_dc_s=0.05,
    )  # fmt: skip
    where = (Place(name="MV", u_nominal_v=6600.0),)
    plant = plants.plant(
        boards=[plants.board("MV", 6600.0)],
        cables=[plants.cable("C1", "MV", "Pump")],
        loads=[plants.load("Pump", "MV")],
        devices=[plants.device("Q1", "C1", opening_time_min_s=0.04, **ratings)],
    )
    parting = 0.04 + HALF_S
    row = DeviceRow(name="Q1", place="MV", own="C1", parting_s=parting)
    return fault_ratings(plant, one_mode([feed], [row], where))


def test_a_breaker_above_1_kv_when_its_contacts_part() -> None:
    devices = medium_voltage(icu_ka=25.0).devices
    t = 0.04 + HALF_S
    ac = 4.0 * math.exp(-t / 0.02) + 4.0 * math.exp(-t / 0.3) + 2.0
    dc = 10.0 * SQRT2 * math.exp(-t / 0.05)
    assert devices.rules == ("medium-voltage breaker",)
    # Values between two points of the time grid: 1e-3, as tested in test_fault_ratings_history.
    assert devices.parting_ka[0, 0] == pytest.approx(ac, rel=1e-3)
    assert devices.dc_part[0, 0] == pytest.approx(dc / (SQRT2 * ac), rel=2e-3)
    assert devices.asymmetrical_ka[0, 0] == pytest.approx(math.hypot(ac, dc), rel=1e-3)
    # IEC 62271-100, from memory: e^-(40 + 8.33)/45 = 34 % and peak factor 2.6 at 60 Hz
    rated = math.exp(-(0.04 + HALF_S) / 0.045)
    assert rated == pytest.approx(0.342, abs=5e-4)
    assert devices.rated_dc_part[0] == pytest.approx(rated)
    assert devices.rated_asymmetrical_ka[0] == pytest.approx(25.0 * math.sqrt(1.0 + 2.0 * rated**2))
    assert devices.making_peak_ka[0] == pytest.approx(65.0)
    # ip = sqrt2 8.527 + 14.14 e^(-8.33/50) = 24.03 kA, over 2.6 is 9.24 kA, above Iac(T/2) 8.53 kA
    assert devices.peak_ka[0, 0] == pytest.approx(24.03, abs=0.01)
    assert devices.enough_breaking_ka[0] == 10.0


@pytest.mark.parametrize(("f_hz", "factor"), [(50.0, 2.5), (51.0, 2.5), (58.0, 2.6), (60.0, 2.6)])
def test_peak_factor_at_the_nearer_of_the_rated_frequencies(f_hz: float, factor: float) -> None:
    where = made.places(Place(name="MV", u_nominal_v=6600.0))
    plant = plants.plant(
        boards=[plants.board("MV", 6600.0)],
        devices=[plants.device("Q1", "MV", icu_ka=20.0)],
    )
    rows = [DeviceRow(name="Q1", place="MV")]
    feeds = [Feed(place="MV", source="G1", initial_a=1e4)]
    mode = made.mode("At sea", where, [Source(name="G1")], feeds, rows, f_hz=f_hz)
    devices = fault_ratings(plant, made.result(where, mode, f_hz=f_hz)).devices
    assert devices.making_peak_ka[0] == pytest.approx(factor * 20.0)


def test_up_to_a_fifth_of_direct_component_the_symmetrical_rating_covers() -> None:
    feed = Feed(place="MV", source="G1", initial_a=9900.0, dc_a=0.0)
    plant = plants.plant(
        boards=[plants.board("MV", 6600.0)],
        cables=[plants.cable("C1", "MV", "Pump")],
        loads=[plants.load("Pump", "MV")],
        devices=[plants.device("Q1", "C1", opening_time_min_s=0.2, icu_ka=10.0)],
    )
    where = (Place(name="MV", u_nominal_v=6600.0),)
    devices = fault_ratings(
        plant, one_mode([feed], [DeviceRow(name="Q1", place="MV", own="C1")], where)
    ).devices
    # after 0.2 s the breaker's own rated component is only 1 %
    assert devices.rated_asymmetrical_ka[0] == pytest.approx(10.0 * math.sqrt(1.0 + 2.0 * 0.2**2))


# --- boards -----------------------------------------------------------------------------------------------


def test_a_boards_peak_and_the_heat_of_one_second() -> None:
    feed = Feed(place="MSB", source="G1", initial_a=20_000.0, dc_a=0.0)
    plant = plants.plant(boards=[plants.board("MSB", **RATED), plants.board("Dead", **RATED)])
    boards = fault_ratings(plant, one_mode([feed], [])).boards
    assert boards.ip_peak_ka[0, 0] == pytest.approx(20.0 * SQRT2)
    assert boards.greatest_peak_ka[0, 0] == pytest.approx(1.01 * 20.0 * SQRT2)  # as made up
    assert boards.heat_ka[0, 0] == pytest.approx(20.0)
    assert boards.enough_short_time_ka[0] == 20.0
    assert boards.enough_peak_ka[0] == 30.0  # 15 kA x 2.0 of IEC 61439-1, table 7
    assert not boards.live[1, 0]
    assert boards.worst_mode.tolist() == [0, -1]
    assert np.isnan(boards.greatest_peak_ka[1, 0])


def test_without_a_duration_there_is_no_heat() -> None:
    plant = plants.plant(boards=[plants.board("MSB", short_time_withstand_ka=30.0)])
    boards = fault_ratings(plant, one_mode([Feed(place="MSB", source="G1", initial_a=2e4)], [])).boards
    assert np.isnan(boards.heat_ka[0, 0])
    assert boards.half_ka[0, 0] == pytest.approx(20.0)


def test_a_limiting_fuse_in_the_incoming_cable_cuts_a_boards_peak() -> None:
    sheet = [
        LetThroughPoint(curve="F", cell="", prospective_ka=x, cut_off_peak_ka=12.0, let_through_a2s=1e5)
        for x in (5.0, 50.0)
    ]
    feeds = [
        Feed(place="DB", source="G1", initial_a=15_000.0, through="C-DB", far_end="MSB"),
        Feed(place="DB", source="M", initial_a=1000.0, dc_a=0.0),
        Feed(place="MSB", source="G1", initial_a=20_000.0),
    ]
    plant = plants.plant(
        boards=[plants.board("MSB"), plants.board("DB", **RATED)],
        cables=[plants.cable("C-DB", "MSB", "DB")],
        devices=[
            plants.device("S1", "C-DB", kind="fuse", i_rated_a=250.0, fuse_class="gG", icu_ka=80.0, curve="F")
        ],
        let_through=sheet,
    )
    row = DeviceRow(name="S1", place="MSB", own="C-DB")
    boards = fault_ratings(plant, one_mode(feeds, [row], (MSB, DB))).boards
    whole = boards.greatest_peak_ka[1, 0]
    comes = feeds[0].peak_a(60.0) / 1000.0
    assert boards.limited_peak_ka[1, 0] == pytest.approx(whole - comes + 12.0)
    assert boards.limited_by == ("", "S1")
    assert boards.limited_peak_ka[0, 0] == boards.greatest_peak_ka[0, 0]


# --- cables -----------------------------------------------------------------------------------------------


def on_cable(device: Device | None, amps: float = 10_000.0, **cable: Any) -> FaultRatingsResult:
    feed = Feed(place="MSB", source="G1", initial_a=amps, dc_a=0.0)
    plant = plants.plant(
        boards=[plants.board("MSB")],
        cables=[plants.cable("C1", "MSB", "Pump", **cable)],
        loads=[plants.load("Pump", "MSB")],
        devices=[] if device is None else [device],
    )
    rows = [] if device is None else [DeviceRow(name=device.name, place="MSB", own="C1")]
    ends = Feed(place="MSB", source="M", initial_a=1.0, dc_a=0.0, through="C1", far_end="Pump")
    return fault_ratings(plant, one_mode([feed, ends], rows))


def delayed(**settings: Any) -> Device:
    start = {"short_time_a": 2000.0, "short_time_delay_s": 0.2, "breaking_time_max_s": 0.05}
    return plants.device("Q1", "C1", **{**start, **EXACT, **settings})


def test_heat_of_a_cable_until_its_breaker_clears() -> None:
    # 10 kA for 0.25 s = 25e6 A2s; EPR 90 to 250 degC: k = 226 sqrt(ln(484.5/324.5)) = 143.1 (IEC 60949)
    cables = on_cable(delayed()).cables
    k = 226.0 * math.sqrt(math.log(484.5 / 324.5))
    assert k == pytest.approx(143.1, abs=0.05)
    assert cables.heat_a2s[0, 0] == pytest.approx(25e6, rel=1e-6)
    assert cables.withstand_a2s[0] == pytest.approx((k * 95.0) ** 2)
    assert cables.end_degc[0, 0] == pytest.approx(
        324.5 * math.exp(25e6 / (226.0 * 95.0) ** 2) - 234.5, rel=1e-6
    )
    assert cables.enough_mm2[0] == 35.0  # sqrt(25e6)/143.1 = 34.9 mm2
    assert cables.stages[cables.cleared_by[0, 0]] == "short-time delay"


def test_runs_in_parallel_share_the_heat() -> None:
    cables = on_cable(delayed(), runs=2, section_mm2=16.0).cables
    assert cables.withstand_a2s[0] == pytest.approx((143.1 * 32.0) ** 2, rel=1e-3)
    assert cables.enough_mm2[0] == 25.0  # 34.9 mm2 in two runs


def test_end_temperature_at_the_withstand_is_that_of_the_insulation() -> None:
    cables = on_cable(delayed()).cables
    amps = 10_000.0 * math.sqrt(cables.withstand_a2s[0] / cables.heat_a2s[0, 0])
    assert on_cable(delayed(), amps).cables.end_degc[0, 0] == pytest.approx(250.0, abs=0.01)


def test_a_cable_without_device_or_without_setting_has_no_heat() -> None:
    bare = on_cable(None).cables
    assert bare.live[0, 0]
    assert np.isnan(bare.heat_a2s[0, 0])
    assert bare.devices == ((),)
    unset = on_cable(plants.device("Q1", "C1")).cables
    assert np.isnan(unset.heat_a2s[0, 0])
    assert unset.stages[unset.cleared_by[0, 0]] == "no setting given"


def test_a_device_on_the_consumer_protects_its_cable() -> None:
    plant = plants.plant(
        boards=[plants.board("MSB")],
        cables=[plants.cable("C1", "MSB", "Pump")],
        loads=[plants.load("Pump", "MSB")],
        devices=[plants.device("Q1", "Pump", instantaneous_a=1000.0, breaking_time_max_s=0.02, **EXACT)],
    )
    feed = Feed(place="MSB", source="G1", initial_a=10_000.0, dc_a=0.0)
    cables = fault_ratings(plant, one_mode([feed], [DeviceRow(name="Q1", place="MSB", own="C1")])).cables
    assert cables.devices == (("Q1",),)
    assert cables.heat_a2s[0, 0] == pytest.approx(1e8 * 0.02, rel=1e-6)


# --- the least fault --------------------------------------------------------------------------------------


def one_set(feed: Feed, device: Device, *, holds_s: float, operating_s: float) -> FaultRatingsResult:
    """Return a set with its breaker; the least fault is a three-phase one on its board."""
    plant = plants.plant(
        boards=[plants.board("MSB")],
        gensets=[plants.genset("G1", "MSB")],
        cables=[plants.cable("C-G1", "G1", "MSB")],
        devices=[device],
    )
    row = DeviceRow(
        name="Q1", place="MSB", own="C-G1", far_place="MSB", operating_s=operating_s,
        least_a=0.866 * feed.ac_a(10.0 if math.isnan(operating_s) else operating_s),
    )  # fmt: skip
    return fault_ratings(plant, one_mode([feed], [row], sources=[Source(name="G1", holds_s=holds_s)]))


def set_feed(sustained_a: float) -> Feed:
    return Feed(
        place="MSB", source="G1", initial_a=9000.0, transient_a=6000.0, sustained_a=sustained_a,
        t_trans_s=0.15, through="C-G1", far_end="G1",
    )  # fmt: skip


def set_breaker(**settings: Any) -> Device:
    start = {"short_time_a": 2500.0, "short_time_delay_s": 0.4, "breaking_time_max_s": 0.05}
    return plants.device("Q1", "C-G1", end="MSB", **{**start, **EXACT, **settings})


def test_a_set_that_collapses_under_its_delay_does_not_clear() -> None:
    clearing = one_set(set_feed(0.0), set_breaker(), holds_s=0.0, operating_s=0.45).clearing
    assert clearing.judged[0, 0]
    assert not clearing.clears[0, 0]
    assert np.isinf(clearing.clearing_s[0, 0])
    # two-phase, 0.866 of 6 kA e^(-0.4/0.15) = 361 A when the delay ends, against 2500 A
    assert clearing.least_a[0, 0] == pytest.approx(0.866 * 6000.0 * math.exp(-0.4 / 0.15), rel=0.02)
    assert clearing.pick_up_a[0, 0] == 2500.0
    assert clearing.first_a[0, 0] == pytest.approx(0.866 * 9000.0, rel=1e-2)


def test_a_set_that_holds_three_times_rated_clears() -> None:
    clearing = one_set(set_feed(3850.0), set_breaker(), holds_s=5.0, operating_s=0.45).clearing
    assert clearing.clears[0, 0]
    assert clearing.by[0, 0] == 0
    assert clearing.clearing_s[0, 0] == pytest.approx(0.45)


def test_a_current_that_ends_before_the_long_time_delay_does_not_clear() -> None:
    # 3.33 kA at Ir 1 kA: 15 s (1.5/3.33)2 = 3.0 s, but it is held for 2 s
    device = set_breaker(
        short_time_a=None, short_time_delay_s=None, long_time_a=1000.0, long_time_delay_s=15.0,
        long_time_delay_at=1.5,
    )  # fmt: skip
    feed = Feed(place="MSB", source="G1", initial_a=3850.0, dc_a=0.0, through="C-G1", far_end="G1")
    short = one_set(feed, device, holds_s=2.0, operating_s=math.nan).clearing
    assert not short.clears[0, 0]
    assert short.due_s[0, 0] == pytest.approx(15.0 * (1.5 / (0.866 * 3.85)) ** 2 + 0.05, rel=1e-6)
    assert short.holds_s[0, 0] == 2.0
    assert one_set(feed, device, holds_s=10.0, operating_s=math.nan).clearing.clears[0, 0]


def feeder_behind_a_set(set_settings: dict[str, Any]) -> FaultRatingsResult:
    """Return a feeder whose breaker sees too little; the set's breaker stands behind it."""
    plant = plants.plant(
        boards=[plants.board("MSB"), plants.board("DB")],
        gensets=[plants.genset("G1", "MSB")],
        cables=[plants.cable("C-G1", "G1", "MSB"), plants.cable("C-DB", "MSB", "DB")],
        devices=[
            set_breaker(**set_settings),
            plants.device("Q2", "C-DB", short_time_a=5000.0, short_time_delay_s=0.1, **EXACT),
        ],
    )
    feeds = [
        Feed(place="MSB", source="G1", initial_a=4000.0, dc_a=0.0, through="C-G1", far_end="G1"),
        Feed(place="DB", source="G1", initial_a=3500.0, dc_a=0.0, through="C-DB", far_end="MSB"),
    ]
    rows = [
        DeviceRow(name="Q1", place="MSB", own="C-G1", far_place="MSB", operating_s=0.45, least_a=3464.0),
        DeviceRow(name="Q2", place="MSB", own="C-DB", far_place="DB", operating_s=0.15, least_a=3031.0),
    ]
    return fault_ratings(plant, one_mode(feeds, rows, (MSB, DB)))


def test_the_sets_breaker_clears_what_the_feeders_does_not_see() -> None:
    clearing = feeder_behind_a_set({}).clearing
    assert clearing.clears[:, 0].tolist() == [True, True]
    assert clearing.by[:, 0].tolist() == [0, 0]
    assert clearing.clearing_s[1, 0] == pytest.approx(0.45)
    assert clearing.least_a[1, 0] == pytest.approx(3031.0, rel=1e-6)


def test_where_the_sets_breaker_does_not_see_it_either_nothing_clears() -> None:
    clearing = feeder_behind_a_set({"short_time_a": 3200.0}).clearing
    assert clearing.clears[:, 0].tolist() == [True, False]
    assert clearing.by[:, 0].tolist() == [0, -1]


def test_a_set_that_does_not_run_has_its_breaker_open() -> None:
    where = (MSB, Place(name="G2", board="MSB", kind="source terminals"))
    plant = plants.plant(
        boards=[plants.board("MSB")],
        gensets=[plants.genset("G1", "MSB"), plants.genset("G2", "MSB")],
        cables=[plants.cable("C-G2", "G2", "MSB")],
        devices=[plants.device("Q1", "C-G2", short_time_a=2500.0, short_time_delay_s=0.4)],
    )
    feeds = [
        Feed(place="MSB", source="G1", initial_a=2000.0),
        Feed(place="G2", source="G1", initial_a=1900.0, through="C-G2", far_end="MSB"),
    ]
    row = DeviceRow(name="Q1", place="MSB", own="C-G2", far_place="G2", operating_s=0.45, least_a=1645.0)
    assert not fault_ratings(plant, one_mode(feeds, [row], where)).clearing.judged[0, 0]


# --- ties, resistors, earth faults ------------------------------------------------------------------------


def test_a_tie_against_the_weaker_of_its_boards() -> None:
    feeds = [
        Feed(place="MSB", source="G1", initial_a=9000.0, dc_a=0.0),
        Feed(place="DB", source="G1", initial_a=9000.0, dc_a=0.0, through="BT", through_kind="tie"),
        Feed(place="DB", source="G2", initial_a=5000.0, dc_a=0.0),
        Feed(place="MSB", source="G2", initial_a=5000.0, dc_a=0.0, through="BT", through_kind="tie"),
    ]
    plant = plants.plant(
        boards=[plants.board("MSB", **RATED), plants.board("DB", **{**RATED, "peak_withstand_ka": 40.0})],
        ties=[plants.tie("BT", "MSB", "DB")],
    )
    ties = fault_ratings(plant, one_mode(feeds, [], (MSB, DB))).ties
    assert ties.peak_ka[0, 0] == pytest.approx(9.0 * SQRT2)  # the stronger set's, not both
    assert (ties.rated_peak_ka[0], ties.rated_by[0]) == (40.0, "DB")
    assert ties.heat_ka[0, 0] == pytest.approx(9.0)


def test_a_tie_to_a_board_without_rating_has_none() -> None:
    plant = plants.plant(
        boards=[plants.board("MSB", **RATED), plants.board("DB")], ties=[plants.tie("BT", "MSB", "DB")]
    )
    ties = fault_ratings(plant, one_mode([Feed(place="MSB", source="G1", initial_a=1e4)], [])).ties
    assert np.isnan(ties.rated_peak_ka[0])
    assert ties.rated_by == ("DB",)
    assert ties.worst_mode.tolist() == [-1]


def test_a_neutral_resistor_and_the_delay_of_what_trips() -> None:
    # 6600/(sqrt3 762.1) = 5.000 A; 0.8 x 1.1 + 0.08 = 0.96 s
    plant = plants.plant(
        boards=[
            plants.board(
                "MV", 6600.0, earthing="high resistance", earthing_resistor_ohm=762.1,
                resistor_rating_a=6.0, resistor_time_s=10.0,
            )
        ],
        devices=[
            plants.device(
                "R1", "MV", kind="overcurrent relay", earth_fault_a=1.5, earth_fault_delay_s=0.8,
                breaking_time_max_s=0.08,
            )
        ],
    )  # fmt: skip
    system = made.earth_system(["MV"], 6600.0, earthing="high resistance", resistor_a=5.0, fault_a=5.4)
    where = (Place(name="MV", u_nominal_v=6600.0),)
    feeds = [Feed(place="MV", source="G1", initial_a=1e4)]
    found = fault_ratings(plant, one_mode(feeds, [DeviceRow(name="R1", place="MV")], where, earth=[system]))
    assert found.resistors.current_a[0] == pytest.approx(5.0, abs=5e-4)
    assert found.resistors.lasts_s[0, 0] == pytest.approx(0.96)
    assert found.earth[0].trips == ("R1",)
    assert found.earth[0].pick_up_a == pytest.approx(1.65)


# --- the whole --------------------------------------------------------------------------------------------


def a_plant() -> Plant:
    return plants.plant(
        boards=[plants.board("MSB", **RATED)],
        gensets=[plants.genset(f"G{k}", "MSB") for k in (1, 2)],
        loads=[plants.load("Pump", "MSB")],
        cables=[
            plants.cable("C-G1", "G1", "MSB"),
            plants.cable("C-G2", "G2", "MSB"),
            plants.cable("C-P", "MSB", "Pump"),
        ],
        devices=[
            set_breaker(icu_ka=50.0, icw_ka=30.0, icw_duration_s=1.0),
            plants.device("Q3", "C-P", instantaneous_a=1500.0, icu_ka=25.0, breaking_time_max_s=0.02),
        ],
    )


FEEDS = (
    set_feed(3850.0),
    Feed(place="MSB", source="G2", initial_a=7000.0, transient_a=4000.0, sustained_a=0.0, through="C-G2"),
    Feed(place="MSB", source="M", initial_a=1500.0, transient_a=0.0, through="C-P", t_dc_s=0.011),
)
ROWS = [
    DeviceRow(name="Q1", place="MSB", own="C-G1", far_place="MSB", operating_s=0.45, least_a=3400.0),
    DeviceRow(name="Q3", place="MSB", own="C-P"),
]


def test_the_order_of_the_sources_changes_nothing() -> None:
    names = [f.source for f in FEEDS]
    first = fault_ratings(a_plant(), one_mode(list(FEEDS), ROWS))
    for order in permutations(range(len(FEEDS))):
        sources = [Source(name=names[k]) for k in order]
        again = fault_ratings(a_plant(), one_mode([FEEDS[k] for k in order], ROWS, sources=sources))
        for part in ("boards", "devices", "clearing", "cables"):
            for field in fields(getattr(first, part)):
                before, after = (getattr(getattr(r, part), field.name) for r in (first, again))
                if isinstance(before, np.ndarray):
                    np.testing.assert_allclose(after, before, rtol=1e-9, err_msg=f"{part}.{field.name}")


def test_the_worst_mode_of_each_piece() -> None:
    where = made.places(MSB)
    two = [Source(name=n) for n in ("G1", "G2", "M")]
    unseen = [DeviceRow(name="Q1", place="MSB", own="C-G1"), DeviceRow(name="Q3", place="MSB", own="C-P")]
    modes = [
        made.mode("At sea", where, two, [FEEDS[0]], ROWS),
        made.mode("Manoeuvring", where, two, list(FEEDS), ROWS),
        made.mode("Harbour", where, two, [FEEDS[2]], unseen),
    ]
    found = fault_ratings(a_plant(), result_of(*modes))
    assert found.modes == ("At sea", "Manoeuvring", "Harbour")
    assert found.boards.worst_mode.tolist() == [1]
    # Q1 carries its own set's current in the first two modes alike, and less from the rest: the first
    assert found.devices.worst_mode.tolist() == [0, 1]
    assert found.cables.worst_mode[[0, 2]].tolist() == [0, 1]
    assert found.cables.enough_mm2.shape == (3,)


def test_a_dead_plant_has_no_duty() -> None:
    where = made.places(MSB)
    rows = [DeviceRow(name="Q1"), DeviceRow(name="Q3")]
    found = fault_ratings(
        a_plant(), result_of(made.mode("Out", where, [Source(name="G1")], [], rows, solved=False))
    )
    assert not found.boards.live.any()
    assert not found.devices.live.any()
    assert not found.cables.live.any()
    assert found.devices.worst_mode.tolist() == [-1, -1]
    assert not found.clearing.judged.any()


def test_results_cannot_be_written_to() -> None:
    found = fault_ratings(a_plant(), one_mode(list(FEEDS), ROWS))
    with pytest.raises(ValueError, match="read-only"):
        found.devices.peak_ka[0, 0] = 0.0


def test_makers_curve_points_are_read_once_for_each_device() -> None:
    points = [
        CurvePoint(curve="C", cell="", current_in=x, current_a=None, time_min_s=None, time_max_s=t)
        for x, t in ((2.0, 60.0), (10.0, 0.02))
    ]
    plant = plants.plant(
        boards=[plants.board("MSB")],
        cables=[plants.cable("C1", "MSB", "Pump")],
        loads=[plants.load("Pump", "MSB")],
        devices=[plants.device("Q1", "C1", i_rated_a=16.0, curve="C", icu_ka=15.0)],
        curves=points,
    )
    feed = Feed(place="MSB", source="G1", initial_a=5000.0, dc_a=0.0)
    cables = fault_ratings(plant, one_mode([feed], [DeviceRow(name="Q1", place="MSB", own="C1")])).cables
    # beyond the last point the I2t stays that of the last: 160 A for 20 ms
    assert cables.heat_a2s[0, 0] == pytest.approx(160.0**2 * 0.02, rel=0.05)
