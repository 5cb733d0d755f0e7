"""Verdicts on grading, from gradings of small plants."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

import pytest

from study.checks.discrimination import judge_discrimination
from study.checks.limits import limits_in_force
from study.checks.verdict import Verdict
from study.model.plant import AcceptanceItem, Plant
from tests import plants
from tests.analyses.grading_plants import breaker, feeder_plant, graded, setting_range

SLOW = {"instantaneous_a": None, "instantaneous_off": True, "short_time_a": 300.0, "short_time_delay_s": 0.2}


def verdicts(plant: Plant, acceptance: Sequence[AcceptanceItem] = ()) -> tuple[Verdict, ...]:
    return judge_discrimination(plant, graded(plant), limits_in_force(acceptance))


def failing(found: Sequence[Verdict]) -> list[Verdict]:
    return [v for v in found if v.status == "exceeds"]


def test_a_graded_plant_is_within_and_says_its_least_margin() -> None:
    found = verdicts(feeder_plant())
    assert failing(found) == []
    (pair,) = [v for v in found if v.quantity.startswith("least time between")]
    assert (pair.equipment, pair.subject, pair.sense) == ("QH", "grading", "at least")
    assert pair.value == pytest.approx(0.15)
    assert pair.limit == 0.01
    assert "against QF" in pair.basis


def test_a_delay_too_short_names_both_times() -> None:
    (bad,) = failing(verdicts(feeder_plant(near=SLOW)))
    assert bad.quantity == "time until QF releases"
    assert bad.value == pytest.approx(0.18)
    assert bad.limit == pytest.approx(0.25 + 0.01)
    assert bad.remedy == "Delay QF longer, or let QH open sooner."


def test_a_proposal_is_the_remedy() -> None:
    plant = replace(
        feeder_plant(near=SLOW), setting_ranges=(setting_range("QF", "Short-time delay", 0.1, 0.5, 0.05),)
    )
    (bad,) = failing(verdicts(plant))
    assert bad.remedy.startswith("Set short-time delay of QF to 0.3 s (now 0.2 s)")


def test_partial_discrimination_is_stated_in_kiloamperes() -> None:
    (bad,) = failing(verdicts(feeder_plant(above={"instantaneous_a": 5_000.0})))
    assert bad.quantity == "fault current up to which it discriminates with QF"
    assert bad.unit == "kA"
    # All but the current of the heater's own circuit flows through both: 0.9 x 5 kA.
    assert bad.value == pytest.approx(4.5, rel=5e-3)
    assert "instantaneous stage of QF" in bad.remedy


def test_what_the_device_behind_clears_alone_is_a_plain_fact() -> None:
    found = failing(verdicts(feeder_plant(near={"instantaneous_a": 30_000.0})))
    assert [v.quantity for v in found] == ["QF alone opens for a fault that QH is to clear"]
    assert "Set the short-time current of QH below" in found[0].remedy


def test_an_unknown_setting_is_not_assessed_and_says_what_is_missing() -> None:
    plant = feeder_plant()
    blank = replace(plant.devices[1], instantaneous_off=False)
    found = verdicts(replace(plant, devices=(plant.devices[0], blank)))
    (open_,) = [v for v in found if v.status == "not assessed" and v.quantity.startswith("discrimination")]
    assert "instantaneous current is not given" in open_.basis


def test_a_fault_that_nothing_clears_exceeds() -> None:
    found = verdicts(feeder_plant(near={"instantaneous_a": 9e4}, above={"short_time_a": 9e4}))
    reach = [v for v in failing(found) if v.quantity == "time until the least fault is cleared"]
    assert {v.equipment for v in reach} == {"QH", "QF"}
    assert all(math.isinf(v.value) and v.limit == 5.0 for v in reach)


def test_a_slow_clearing_exceeds_the_time_allowed() -> None:
    # 15 s at 6 Ir, 9 kA: more than five seconds at the least fault at the far end, and nothing behind opens.
    slow = {**SLOW, "short_time_a": None, "short_time_delay_s": None}
    near = {**slow, "long_time_a": 1500.0, "long_time_delay_s": 15.0}
    plant = feeder_plant(near=near, above={"short_time_a": 9e4})
    late = [v for v in failing(verdicts(plant)) if v.quantity == "time until the least fault is cleared"]
    assert late
    assert late[0].value > 5.0


def test_the_least_margin_can_be_agreed_for_a_project() -> None:
    item = AcceptanceItem(quantity="Least fault cleared within", limit=0.02, unit="s", basis="yard", cell="")
    found = verdicts(feeder_plant(), (item,))
    bad = failing(found)
    assert {v.equipment for v in bad} == {"QH", "QF"}
    assert all("agreed for this project" in v.basis for v in bad)


def test_a_start_that_opens_its_breaker_exceeds() -> None:
    plant = feeder_plant(
        loads=[plants.load("M", "DB")],
        cables=[plants.cable("CM", "DB", "M", length_m=20.0)],
        devices=[breaker("QM", "CM", "DB", instantaneous_a=1100.0)],
    )
    (bad,) = [v for v in failing(verdicts(plant)) if v.equipment == "QM"]
    assert bad.quantity == "direct start: time that it is held for"
    assert bad.value == 0.0
    assert "3 s taken" in bad.basis
