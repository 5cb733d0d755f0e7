"""Protection of sets: units, the stages beside the set's own current, and the usual ranges."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from study.analyses.generator_protection import generator_protection
from study.analyses.protection_devices import protection_devices
from study.checks.generator_protection import judge_generator_protection
from study.checks.limits import limits_in_force
from study.checks.verdict import Verdict
from study.model.plant import Plant
from study.model.protection import ProtectionFunction
from study.results.generator_protection import GeneratorProtectionResult
from study.results.load_flow import LoadFlowResult
from study.results.short_circuit import ShortCircuitResult
from tests import plants
from tests.analyses.cable_studies import faults, flows

LIMITS = limits_in_force(())
SOUND = (
    ("reverse power", 10.0, "%", 8.0),
    ("undervoltage", 60.0, "%", 1.0),
    ("overvoltage", 115.0, "%", 2.0),
    ("underfrequency", 90.0, "%", 5.0),
    ("overfrequency", 110.0, "%", 5.0),
    ("preferential trip 1", 100.0, "%", 5.0),
)


def functions(*rows: tuple[str, float, str, float]) -> list[ProtectionFunction]:
    return [
        ProtectionFunction(
            name=f"{genset} {kind}", equipment=genset, cell="", kind=kind, pick_up=pick_up,  # type: ignore[arg-type]
            unit=unit, delay_s=delay, trips=None,
        )
        for genset in ("G1", "G2")
        for kind, pick_up, unit, delay in rows
    ]  # fmt: skip


def two_sets(*rows: tuple[str, float, str, float], **breaker: object) -> Plant:
    """Two sets of 800 kVA, 440 V (1050 A) with a sustained current of 3.2 times rated, and their breakers."""
    settings = {
        "long_time_a": 1150.0,
        "long_time_delay_s": 15.0,
        "long_time_delay_at": 1.5,
        "short_time_a": 2600.0,
        "short_time_delay_s": 0.4,
        "instantaneous_a": 14_000.0,
    }
    return plants.plant(
        boards=[plants.board("MSB")],
        gensets=[
            plants.genset(name, "MSB", s_rated_kva=800.0, u_rated_v=440.0, sustained_current=3.2,
                          sustained_duration_s=5.0)
            for name in ("G1", "G2")
        ],
        loads=[plants.load("Pump", "MSB")],
        devices=[plants.device(f"Q{n}", f"G{n}", **(settings | breaker)) for n in (1, 2)],
        protection_functions=functions(*(rows or SOUND)),
    )  # fmt: skip


@cache
def solved(kva: float) -> tuple[LoadFlowResult, ShortCircuitResult]:
    """Return the currents of two sets: settings and functions do not change them."""
    plant = two_sets()
    plant = replace(plant, gensets=tuple(replace(g, s_rated_kva=kva) for g in plant.gensets))
    return flows(plant), faults(plant)


def studied(plant: Plant) -> GeneratorProtectionResult:
    flow, currents = solved(plant.gensets[0].s_rated_kva)
    return generator_protection(plant, protection_devices(plant), flow, currents)


def judged(plant: Plant) -> tuple[Verdict, ...]:
    return judge_generator_protection(plant, studied(plant), LIMITS)


def exceeding(plant: Plant) -> set[str]:
    return {v.quantity for v in judged(plant) if v.status != "within" and v.equipment == "G1"}


@pytest.fixture(scope="module")
def sound() -> Plant:
    return two_sets()


def test_a_sound_set_is_not_blamed(sound: Plant) -> None:
    assert not exceeding(sound)


@pytest.mark.parametrize(
    ("row", "part"),
    [
        # Rated: 800 kVA at 0.8, 440 V, 60 Hz, 1049.7 A; the pick-up in ampere, volt, hertz or kW by hand.
        (("reverse power", 64.0, "kW", 8.0), 0.1),
        (("undervoltage", 0.264, "kV", 1.0), 0.6),
        (("underfrequency", 54.0, "Hz", 5.0), 0.9),
        (("preferential trip 1", 1049.7, "A", 5.0), 1.0),
        (("overfrequency", 1.1, "pu", 5.0), 1.1),
        (("overfrequency", 60.0, "rpm", 5.0), np.nan),
    ],
)
def test_pick_ups_in_any_unit_of_their_kind(
    sound: Plant, row: tuple[str, float, str, float], part: float
) -> None:
    plant = replace(sound, protection_functions=tuple(functions(row)))
    result = studied(plant)
    assert result.functions[0].pick_up_pu == pytest.approx(part, rel=1e-4, nan_ok=True)


@pytest.mark.parametrize(
    ("row", "found"),
    [
        (("reverse power", 20.0, "%", 8.0), "pick-up of G1 reverse power"),
        (("reverse power", 1.0, "%", 8.0), "pick-up of G1 reverse power"),
        (("reverse power", 10.0, "%", 12.0), "delay of G1 reverse power"),
        (("undervoltage", 80.0, "%", 1.0), "pick-up of G1 undervoltage"),
        (("undervoltage", 30.0, "%", 1.0), "pick-up of G1 undervoltage"),
        (("overvoltage", 104.0, "%", 1.0), "pick-up of G1 overvoltage"),
        (("underfrequency", 96.0, "%", 1.0), "pick-up of G1 underfrequency"),
        (("overfrequency", 120.0, "%", 1.0), "pick-up of G1 overfrequency"),
        (("preferential trip 1", 120.0, "%", 5.0), "pick-up of G1 preferential trip 1"),
        (("preferential trip 1", 100.0, "%", 30.0), "delay of G1 preferential trip 1"),
    ],
)
def test_a_function_outside_its_range_is_found(row: tuple[str, float, str, float], found: str) -> None:
    rows = tuple(row if row[0] == kind[0] else kind for kind in SOUND)
    assert exceeding(two_sets(*rows)) == {found}


@pytest.mark.parametrize(
    ("change", "found"),
    [
        ({"long_time_a": 1209.0}, "overcurrent setting"),
        ({"long_time_delay_s": 130.0}, "overload of 150 % cleared within"),
        # 80 % of 3.2 x 1049.7 A is 2687 A.
        ({"short_time_a": 2700.0}, "short-time setting against the sustained current"),
        # Its own I''k is 8.1 to 9.6 kA: 10 % below 8000 A is less.
        ({"instantaneous_a": 8000.0}, "instantaneous setting, lower tolerance, above its own contribution"),
    ],
)
def test_a_stage_outside_its_range_is_found(change: dict[str, object], found: str) -> None:
    assert exceeding(two_sets(**change)) == {f"Q1: {found}"}


def test_missing_functions_are_found() -> None:
    without = two_sets(*(row for row in SOUND if row[0] not in ("reverse power", "undervoltage")))
    assert exceeding(without) == {"no reverse power protection", "no undervoltage protection"}
    large = two_sets()
    large = replace(
        large, gensets=tuple(replace(g, s_rated_kva=1600.0, p_engine_kw=1400.0) for g in large.gensets)
    )
    assert "no differential protection" in exceeding(large)
    guarded = functions(*SOUND, ("differential", 20.0, "%", 0.05))
    assert "no differential protection" not in exceeding(replace(large, protection_functions=tuple(guarded)))
