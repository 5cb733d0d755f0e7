"""Cables: overload by hand, heat of the whole fault range by brute force, proposals by following them."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from study.analyses.cable_heat import cable_ends, samples
from study.analyses.fault_ratings_history import Histories, case_histories, knots_s
from study.checks.cables import judge_cables
from study.checks.limits import limits_in_force
from study.checks.verdict import Verdict
from study.formulas.operate_state import first_operation
from study.formulas.trip_band import TripBand
from study.model.plant import Plant
from study.results.load_flow import LoadFlowResult
from tests import plants
from tests.analyses.cable_studies import flows, study_cables

LIMITS = limits_in_force(())
SETTINGS = {"short_time_a": 900.0, "short_time_delay_s": 0.2, "instantaneous_a": 3000.0}


def small(*, section_mm2: float = 16.0, load: str = "Pump", kva: float = 800.0, **breaker: object) -> Plant:
    """One set, a pump of 30 kW behind a breaker, a cable of 30 m and a thermal overload relay."""
    motor = plants.load(load, "MSB", p_rated_kw=30.0)
    settings: dict[str, object] = {"i_rated_a": 63.0, "instantaneous_a": 700.0}
    return plants.plant(
        boards=[plants.board("MSB")],
        gensets=[plants.genset("G1", "MSB", s_rated_kva=kva)],
        loads=[motor],
        cables=[
            plants.cable(
                "C1", "MSB", load, section_mm2=section_mm2, length_m=30.0, resistance_ohm_per_km=None,
                reactance_ohm_per_km=None,
            )
        ],
        devices=[
            plants.device("Q1", "C1", end="MSB", **(settings | breaker)),
            plants.device(
                "F1", load, kind="thermal overload", i_rated_a=50.0, long_time_a=50.0, trip_class="10"
            ),
        ],
    )  # fmt: skip


@cache
def flow_of_small() -> LoadFlowResult:
    """Return a load flow that serves every small plant where the drop does not matter."""
    return flows(small())


def verdicts(plant: Plant) -> tuple[Verdict, ...]:
    return judge_cables(plant, study_cables(plant, flow_of_small())[2], LIMITS)


def exceeding(plant: Plant) -> set[str]:
    return {v.quantity for v in verdicts(plant) if v.status == "exceeds"}


def test_load_setting_and_rating_by_hand() -> None:
    # 30/(0.93 x 0.86 x sqrt3 x 0.44) = 49.2 A. 16 mm2, three cores, 45 degC: 17 x 16^0.625 x 0.7 = 67.3 A.
    own = study_cables(small(), flow_of_small())[2].overload
    assert own.load_a[0] == pytest.approx(49.2, abs=0.05)
    assert own.rating_a[0] == pytest.approx(67.3, abs=0.05)
    assert own.device == ("F1",)
    assert (own.device_a[0], own.conventional_a[0]) == (50.0, pytest.approx(60.0))


def test_a_sound_cable_is_not_blamed() -> None:
    assert not exceeding(small())


def test_a_cable_smaller_than_its_overload_relay_is_found() -> None:
    # 10 mm2: 50.2 A carries a setting of 50 A; 6 mm2: 36.5 A does not, and 1.2 x 50 A is above 1.45 x 36.5 A.
    assert not exceeding(small(section_mm2=10.0))
    assert exceeding(small(section_mm2=6.0)) == {
        "setting or rating of F1 against the cable's rating",
        "current that trips F1 for certain",
    }


def test_a_gg_fuse_needs_a_tenth_more_than_its_rated_current() -> None:
    # 63 A gG trips for certain at 1.6 x 63 = 100.8 A; 16 mm2 allows 1.45 x 67.3 = 97.6 A, though 63 < 67.3.
    fused = small(kind="fuse", fuse_class="gG", instantaneous_a=None)
    alone = replace(fused, devices=fused.devices[:1])
    assert exceeding(alone) == {"current that trips Q1 for certain"}
    assert not exceeding(replace(alone, cables=(replace(alone.cables[0], section_mm2=25.0),)))


def test_without_any_overload_protection_that_is_the_finding() -> None:
    plant = small()
    plant = replace(plant, devices=plant.devices[:1])
    assert exceeding(plant) == {"no device protects it against overload"}


@pytest.mark.parametrize("name", ["Steering gear", "Fire pump", "Emergency fire-pump"])
def test_steering_gear_and_fire_pumps_need_no_overload_trip_and_may_have_only_a_high_one(name: str) -> None:
    plant = small(load=name)
    if name == "Steering gear":
        plant = replace(plant, loads=(replace(plant.loads[0], essential_to="steering"),))
    assert not exceeding(replace(plant, devices=plant.devices[:1]))
    # 50 A is less than twice 49.2 A; 100 A is not.
    (found,) = (v for v in verdicts(plant) if v.status == "exceeds")
    assert found.quantity.startswith("overload setting of F1 for")
    assert found.limit == pytest.approx(2.0 * 49.2, abs=0.1)
    high = replace(plant.devices[1], long_time_a=100.0)
    assert not exceeding(replace(plant, devices=(plant.devices[0], high)))


def test_nothing_is_claimed_of_a_cable_whose_device_has_no_settings() -> None:
    plant = small(instantaneous_a=None)
    plant = replace(plant, devices=plant.devices[:1])
    result = study_cables(plant, flow_of_small())[2]
    assert np.isnan(result.heat.heat_a2s).all()
    assert np.isnan(result.sections.enough_mm2).all()
    statuses = {v.status for v in judge_cables(plant, result, LIMITS)}
    assert statuses == {"not assessed"}


STAGES = {
    "instantaneous alone": {"instantaneous_a": 700.0},
    "short-time and instantaneous": SETTINGS,
    "ramp": SETTINGS | {"short_time_law": "I2t", "long_time_a": 60.0, "long_time_delay_s": 8.0},
    "long delay": SETTINGS | {"short_time_delay_s": 0.8, "instantaneous_a": None, "instantaneous_off": True},
}


@pytest.mark.parametrize("settings", STAGES)
def test_the_worst_fault_of_the_whole_range_against_brute_force(settings: str) -> None:
    """Forty currents between both ends, each cleared and heated by itself; none may be hotter, one as hot.

    2 %: what lies between two of the forty and below a pick-up.
    """
    plant = small(section_mm2=4.0, **STAGES[settings])
    plant = replace(plant, cables=(replace(plant.cables[0], length_m=150.0),))
    models, currents, result = study_cables(plant, flow_of_small())
    mode, (end,) = currents.modes[0], cable_ends(plant, models)
    knots = knots_s(currents.f_hz, np.concatenate([mode.maximum.parts.ends_s, mode.minimum.parts.ends_s]))
    device = np.array([0])
    place, far = mode.devices.place[device], mode.devices.far_place[device]
    out = np.abs(mode.device_shares(device, place, maximum=True))
    total, behind = case_histories(mode.maximum, place, out, knots)
    near = total.less(behind)
    into = mode.device_shares(device, far, maximum=False)
    least = case_histories(mode.minimum, far, into, knots)[1]
    # The least fault is of two phases: sqrt3/2 of three at first, more later; so this is no more than a part.
    share = np.linspace(0.0, 1.0, 40)[:, None, None]
    swept = Histories(
        time_s=knots,
        ac_a=np.maximum(near.ac_a, 1e-9) ** (1 - share) * np.maximum(least.ac_a, 1e-9) ** share,
        dc_a=(1 - share) * near.dc_a + share * least.dc_a,
    )
    bands = [TripBand(earliest=(), latest=end.edges)] * 40
    cleared = first_operation(bands, samples(swept), 0.5 / currents.f_hz, early=False)[1]
    heat = swept.heat_a2s(np.minimum(cleared, 5.0))
    worst = result.heat.heat_a2s[0, 0]
    assert heat.max() <= 1.001 * worst
    assert heat.max() == pytest.approx(worst, rel=0.02 if not result.heat.inside[0, 0] else 0.12)


def test_a_fault_between_both_ends_may_be_the_worst() -> None:
    # Instantaneous for certain from 8800 A; below it 0.22 s of short-time delay and 0.05 s of opening.
    high = SETTINGS | {"instantaneous_a": 8000.0}
    result = study_cables(small(section_mm2=10.0, **high), flow_of_small())[2]
    assert result.heat.inside[0, 0]
    assert result.heat.stage[0][0] == "short-time"
    late_s = 1.1 * 0.2 + 0.05
    assert result.heat.clearing_s[0, 0] == pytest.approx(late_s)
    # By the current's own decay, no more than its first value for all the time, with the direct component.
    assert 8800.0 < result.heat.fault_a[0, 0] < 10_300.0
    assert result.heat.heat_a2s[0, 0] < 1.5 * result.heat.fault_a[0, 0] ** 2 * late_s


def laid(plant: Plant, section_mm2: float) -> Plant:
    return replace(plant, cables=(replace(plant.cables[0], section_mm2=section_mm2),))


@pytest.mark.parametrize(
    ("case", "governs"),
    [
        (small(kva=200.0), "rating"),
        (small(**SETTINGS), "short circuit"),
    ],
    ids=["rating", "short circuit"],
)
def test_the_section_proposed_holds_and_the_next_smaller_does_not(case: Plant, governs: str) -> None:
    sections = study_cables(case, flow_of_small())[2].sections
    enough = float(sections.enough_mm2[0])
    assert sections.governs == (governs,)
    sizes = [1.5, 2.5, 4.0, 6.0, 10.0, 16.0, 25.0, 35.0, 50.0, 70.0, 95.0]
    smaller = sizes[sizes.index(enough) - 1]
    held, spoilt = (study_cables(laid(case, x), flow_of_small())[2] for x in (enough, smaller))
    own = held.overload
    assert own.rating_a[0] >= max(own.load_a[0], own.device_a[0], own.conventional_a[0] / 1.45)
    assert held.heat.heat_a2s[0, 0] <= held.heat.withstand_a2s[0]
    if governs == "rating":
        assert spoilt.overload.rating_a[0] < spoilt.overload.device_a[0]
    else:
        assert spoilt.heat.heat_a2s[0, 0] > spoilt.heat.withstand_a2s[0]


def test_voltage_drop_asks_for_a_larger_section_and_that_section_holds_it() -> None:
    plant = small(section_mm2=16.0)
    plant = replace(plant, cables=(replace(plant.cables[0], length_m=400.0),))
    result = study_cables(plant)[2]
    assert result.drop.total_pu[0, 0] > 0.06
    assert result.sections.governs == ("voltage drop",)
    enough = float(result.sections.enough_mm2[0])
    assert study_cables(laid(plant, enough))[2].drop.total_pu[0, 0] <= 0.06
    smaller = {50.0: 35.0, 35.0: 25.0, 70.0: 50.0}[enough]
    assert study_cables(laid(plant, smaller))[2].drop.total_pu[0, 0] > 0.06
