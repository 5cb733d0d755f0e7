"""Starts, inrush and restart against devices, by hand."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import pytest

from study.analyses.grading_options import GradingOptions
from study.analyses.grading_surges import load_current_a, surges_of
from study.model.plant import Plant
from study.results.grading import GradingResult, RideThrough
from tests import plants
from tests.analyses.grading_plants import breaker, feeder_plant, graded

# 100 kW / (sqrt3 440 V 0.93 0.86) = 164.06 A
RATED_A = 100e3 / (math.sqrt(3.0) * 440.0 * 0.93 * 0.86)


def motor_plant(settings: dict[str, Any], **motor: Any) -> Plant:
    """Return a motor of 100 kW on the far board, behind QM."""
    return feeder_plant(
        loads=[plants.load("M", "DB", **motor)],
        cables=[plants.cable("CM", "DB", "M", length_m=20.0)],
        devices=[breaker("QM", "CM", "DB", i_rated_a=200.0, **settings)],
    )


def row(result: GradingResult, station: str, event: str) -> RideThrough:
    return next(
        r
        for r in result.ride_through
        if result.stations.names[r.station] == station and r.event.startswith(event)
    )


def test_the_current_of_a_direct_start_by_hand() -> None:
    found = row(graded(motor_plant({"instantaneous_a": 2200.0}, starting_time_s=4.0)), "QM", "direct start")
    assert found.current_a == pytest.approx(6.5 * RATED_A, rel=1e-9)
    assert found.needed_s == pytest.approx(1.1 * 4.0)
    assert found.trips_s == math.inf
    assert found.assumed == ""


@pytest.mark.parametrize(("setting_a", "senses", "trips"), [(1500.0, "peak", True), (1500.0, "rms", False)])
def test_the_first_peak_of_a_start_opens_what_senses_the_peak(
    setting_a: float, senses: str, trips: bool
) -> None:
    # cos phi 0.3: R/X 0.3145, kappa 1.02 + 0.98 e^(-0.943) = 1.4015; 1.4015 x 1066 A = 1495 A > 0.9 x 1500 A.
    settings = {"instantaneous_a": setting_a, "instantaneous_senses": senses}
    found = row(graded(motor_plant(settings)), "QM", "direct start")
    assert found.trips_s == (0.0 if trips else math.inf)


def test_a_starting_time_that_is_not_given_is_said() -> None:
    found = row(graded(motor_plant({"instantaneous_a": 2200.0})), "QM", "direct start")
    assert found.lasts_s == 3.0
    assert "not given" in found.assumed


def test_a_long_start_opens_an_overload_release() -> None:
    # 6 Ir for 5 s, 10 % tolerance: 5 x (6/6.5 x 164/164)^2 x 0.9 = 3.83 s at 6.5 Ir, below 1.1 x 6 s.
    settings = {"instantaneous_a": 2200.0, "long_time_a": RATED_A, "long_time_delay_s": 5.0}
    found = row(graded(motor_plant(settings, starting_time_s=6.0)), "QM", "direct start")
    assert found.trips_s == pytest.approx(0.9 * 5.0 * (6.0 / 6.5) ** 2, rel=1e-6)
    assert found.trips_s < found.needed_s


@pytest.mark.parametrize(
    ("method", "more", "first"),
    [
        ("direct", {}, 6.5),
        ("star-delta", {"star_delta_change_s": 4.0}, 6.5 / 3.0),
        ("autotransformer", {"autotransformer_tap": 0.65}, 6.5 * 0.65**2),
        ("soft starter", {"soft_starter_current": 3.0}, 3.0),
    ],
)
def test_starting_methods(method: str, more: dict[str, float], first: float) -> None:
    load = plants.load("M", "DB", starting_method=method, **more)
    surges = list(surges_of(0, load, GradingOptions()))
    assert surges[0].current_a == pytest.approx(first * load_current_a(load))
    assert len(surges) == (2 if method == "star-delta" else 1)


def test_a_converter_does_not_surge() -> None:
    assert not list(surges_of(0, plants.load("M", "DB", starting_method="converter"), GradingOptions()))
    assert not list(surges_of(0, plants.load("M", "DB", "heating"), GradingOptions()))


def test_the_start_stands_on_the_load_in_the_feeder() -> None:
    # QF carries the heater of 20 kW (26.2 A and what its cable takes) and the motor; the start of the motor
    # is added to what is left without its running current.
    result = graded(motor_plant({"instantaneous_a": 2200.0}))
    found = row(result, "QF", "direct start")
    heater_a = 20e3 / (math.sqrt(3.0) * 440.0)
    assert found.current_a - found.before_a == pytest.approx(6.5 * RATED_A, rel=1e-6)
    # The motor draws a little more than rated at the voltage that it has.
    assert found.before_a == pytest.approx(heater_a, abs=0.05 * RATED_A)


def transformer_plant(**settings: Any) -> Plant:
    return plants.plant(
        boards=[plants.board("MSB"), plants.board("LB", 230.0, role="distribution")],
        shore_supplies=[plants.shore("Shore", "MSB")],
        transformers=[plants.transformer("T1", "MSB", "LB")],
        cables=[plants.cable("C1", "MSB", "T1", length_m=5.0)],
        loads=[plants.load("H", "LB", "heating", p_rated_kw=10.0, u_rated_v=230.0)],
        devices=[breaker("QT", "C1", "MSB", **settings)],
    )


@pytest.mark.parametrize(
    ("setting_a", "senses", "trips"),
    [(2000.0, "rms", True), (2200.0, "rms", False), (2800.0, "peak", True), (3000.0, "peak", False)],
)
def test_the_inrush_of_a_transformer(setting_a: float, senses: str, trips: bool) -> None:
    # 200 kVA at 440 V: 262.4 A; first peak 10 times: 2624 A over sqrt2; half waves have 1856 A r.m.s.
    result = graded(transformer_plant(instantaneous_a=setting_a, instantaneous_senses=senses))
    found = row(result, "QT", "inrush")
    assert (found.trips_s == 0.0) is trips
    assert found.current_a == pytest.approx(2624.3, rel=1e-3)


def test_a_delay_outlasts_the_inrush() -> None:
    # 1856 A falls below 0.9 x 900 A after 0.1 ln(1856/810) = 0.083 s.
    short = row(graded(transformer_plant(short_time_a=900.0, short_time_delay_s=0.08)), "QT", "inrush")
    long = row(graded(transformer_plant(short_time_a=900.0, short_time_delay_s=0.1)), "QT", "inrush")
    assert short.trips_s == pytest.approx(0.9 * 0.08, rel=1e-6)
    assert long.trips_s == math.inf


def test_the_restart_starts_the_motors_of_a_step_together() -> None:
    motors = [plants.load(f"M{n}", "DB", restart_delay_s=5.0, p_rated_kw=50.0) for n in range(2)]
    plant = plants.plant(
        boards=[plants.board("MSB"), plants.board("DB", role="distribution")],
        gensets=[plants.genset("G1", "MSB")],
        cables=[plants.cable("CF", "MSB", "DB", length_m=20.0)],
        loads=motors,
        devices=[breaker("QF", "CF", "MSB", short_time_a=900.0, short_time_delay_s=0.2)],
    )
    found = row(graded(plant), "QF", "restart")
    each = load_current_a(motors[0])
    assert found.current_a == pytest.approx(2 * 6.5 * each, rel=1e-6)
    # 0.9 x 900 A is below the two starts: it opens after 0.9 x 0.2 s.
    assert found.trips_s == pytest.approx(0.18)
    apart = replace(plant, loads=(motors[0], plants.load("M1", "DB", restart_delay_s=20.0, p_rated_kw=50.0)))
    assert row(graded(apart), "QF", "restart").trips_s == math.inf
