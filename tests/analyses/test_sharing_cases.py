"""Maladjusted sets: what the case solves, and that its sentence names the right set and numbers."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from study.formulas.sharing import share_straight
from study.model.modes import Event
from study.model.plant import Plant
from study.results.sharing import MaladjustedCase
from tests.analyses.sharing_plants import event, one_bus, solved_with, study, three_boards
from tests.plants import converter_supply, genset, mode, set_point


def cases(p: Plant, *events: Event) -> tuple[MaladjustedCase, ...]:
    return study(replace(p, events=events)).cases


@pytest.mark.parametrize(
    ("setting", "percent"),
    [("no-load voltage", 101.5), ("voltage droop", 6.0), ("no-load frequency", 103.0), ("speed droop", 6.0)],
)
def test_a_case_is_the_network_with_that_setting(setting: str, percent: float) -> None:
    p = three_boards()
    (case,) = cases(p, event("G2", percent, f"% {setting}"))
    there = solved_with(p, np.ones(1), "G2", setting, percent / 100.0)
    np.testing.assert_allclose(case.p_after_kw, there.source_p_kw[0], atol=1e-5)
    np.testing.assert_allclose(case.q_after_kvar, there.source_q_kvar[0], atol=1e-5)
    before = solved_with(p, np.ones(1))
    np.testing.assert_allclose(case.q_before_kvar, before.source_q_kvar[0], atol=1e-5)
    assert case.value_pu == percent / 100.0
    assert case.f_after_hz == pytest.approx(60.0 * there.frequency_pu[0, 0], abs=1e-8)


def test_the_sentence_names_who_takes_more_by_how_much_and_the_cure() -> None:
    """Equal sets, 2 % of set-point over about 2 x 3 %: far beyond 10 % of rated kvar."""
    (case,) = cases(one_bus({}, {}), event("G2", 102.0, "% no-load voltage"))
    off = case.q_after_kvar - case.q_after_kvar.sum() / 2.0
    assert off[1] > case.q_tolerance_kvar[1]
    assert case.sentence == (
        "With the no-load voltage of G2 at 102.0 % instead of 100.0 %, "
        f"G2 takes {case.q_after_kvar[1]:.0f} kvar, {off[1]:.0f} more than its share, and "
        f"G1 {case.q_after_kvar[0]:.0f} kvar, {-off[0]:.0f} less; G2 may be 60 kvar off, so the "
        "sharing is out of tolerance. Set the no-load voltage of G2 back to 100.0 %."
    )


def test_within_tolerance_is_said_too() -> None:
    (case,) = cases(one_bus({}, {}), event("G1", 104.4, "% no-load frequency"))
    _, kw = share_straight([1.044, 1.04], [0.04, 0.04], [800.0, 800.0], 800.0)
    np.testing.assert_allclose(case.p_after_kw, kw, atol=1e-6)
    assert "G1 takes 440 kW, 40 more than its share, and G2 360 kW, 40 less; " in case.sentence
    assert "G1 may be 120 kW off, so the sharing is within tolerance." in case.sentence
    assert case.sentence.endswith("Set the no-load frequency of G1 back to 104.0 %.")


def test_the_tolerance_named_is_that_of_the_set_furthest_beyond_its_own() -> None:
    """Unequal sets: 25 % of the small set's own rating is less than 15 % of the large one's."""
    small = {"s_rated_kva": 400.0, "p_engine_kw": 480.0}
    (case,) = cases(one_bus({}, small), event("G2", 105.5, "% no-load frequency"))
    np.testing.assert_allclose(case.p_tolerance_kw, [120.0, 80.0])
    assert "G2 may be 80 kW off, so the sharing is out of tolerance." in case.sentence


def test_rows_of_one_case_add_up() -> None:
    p = one_bus({}, {})
    first, second = cases(p, event("G1", 102.0, "% no-load voltage"), event("G2", 102.0, "% no-load voltage"))
    assert first.q_after_kvar[0] - first.q_after_kvar[1] > 100.0
    assert second.q_after_kvar[0] == pytest.approx(second.q_after_kvar[1], abs=1e-6)
    assert second.u_after_pu - second.u_before_pu == pytest.approx(0.02, abs=1e-3)
    assert (
        "at 102.0 % instead of 100.0 %, after the rows of this case before it, every set" in second.sentence
    )
    assert "every set keeps its share of kvar" in second.sentence


def test_rows_of_two_cases_do_not_add_up() -> None:
    p = one_bus({}, {})
    one = event("G1", 102.0, "% no-load voltage", case="A")
    _, other = cases(p, one, event("G2", 102.0, "% no-load voltage", case="B"))
    assert other.q_after_kvar[1] - other.q_after_kvar[0] > 100.0


def test_two_settings_of_one_case_act_together() -> None:
    p = one_bus({}, {})
    _, both = cases(p, event("G1", 101.0, "% no-load voltage"), event("G1", 5.0, "% voltage droop"))
    alone = cases(p, event("G1", 5.0, "% voltage droop"))[0]
    assert both.q_after_kvar[0] > alone.q_after_kvar[0] + 50.0


def test_the_mode_s_set_point_is_what_the_setting_was() -> None:
    points = [set_point("G1", no_load_voltage_pu=1.01, no_load_frequency_pu=1.041)]
    p = one_bus({}, {}, modes=[mode(set_points=points)])
    (case,) = cases(p, event("G1", 100.0, "% no-load voltage"))
    assert case.was_pu == 1.01
    np.testing.assert_allclose(case.q_after_kvar, case.q_after_kvar[0], atol=1.0)  # unequal kW leave a trace
    assert case.q_before_kvar[0] - case.q_before_kvar[1] > 60.0
    assert case.sentence.endswith(
        "As the workbook sets them the sets are out of tolerance too. Set the no-load voltage of G1 back to "
        "101.0 % and the no-load voltage of G2 to 101.0 %."
    )


def test_overload_and_motoring_are_said() -> None:
    (case,) = cases(one_bus({}, {}, kw=1000.0), event("G1", 110.0, "% no-load frequency"))
    assert "G1 is loaded to" in case.sentence
    assert "% of its kW." in case.sentence
    assert case.p_after_kw[1] < 0.0
    assert "G2 is driven as a motor." in case.sentence


def test_a_speed_droop_of_nothing_is_an_isochronous_set() -> None:
    """It takes every change; it does not drop out of the sharing."""
    (case,) = cases(one_bus({"no_load_frequency_pu": 1.0}, {}), event("G1", 0.0, "% speed droop"))
    assert case.f_after_hz == pytest.approx(60.0, abs=1e-9)
    np.testing.assert_allclose(case.p_after_kw, [0.0, 800.0], atol=1e-6)


def test_a_case_that_leaves_kvar_undetermined_says_so() -> None:
    (case,) = cases(one_bus({"regulator_mode": "no droop"}, {}), event("G2", 0.0, "% voltage droop"))
    assert not case.solved
    assert "the plant has no operating point: kvar is undetermined: G1 and G2" in case.sentence


def test_a_fixed_field_follows_its_no_load_voltage() -> None:
    fixed = {"regulator_mode": "fixed excitation", "no_load_voltage_pu": 1.3}
    (case,) = cases(one_bus(fixed, {}, kw=400.0), event("G1", 145.0, "% no-load voltage"))
    assert case.solved
    assert case.q_after_kvar[0] > case.q_before_kvar[0] + 20.0


PLAIN: tuple[dict[str, Any], ...] = ({}, {})
KVAR = ({"regulator_mode": "kvar control"}, {})
STIFF = ({"regulator_mode": "no droop"}, {})
MASTER = ({"governor_mode": "isochronous"}, {})
COMPOUND = ({"field_supply": "compounded without regulator", "unregulated_voltage_pu": 1.0}, {})


@pytest.mark.parametrize(
    ("sets", "equipment", "size", "unit", "reason"),
    [
        (PLAIN, "G1", 104.0, "% set-point", "'% set-point' names no setting; the unit is one of: % no-load"),
        (PLAIN, "G1", None, "% voltage droop", "no size is given; give the new value, from 0 to 20 %."),
        (PLAIN, "G1", 1.5, "% no-load voltage", "a no-load voltage of 1.5 % is no setting; give the new"),
        (PLAIN, "G1", -3.0, "% speed droop", "a speed droop of -3 % is no setting"),
        (KVAR, "G1", 101.0, "% no-load voltage", "G1 is on kvar control."),
        (KVAR, "G1", 4.0, "% voltage droop", "G1 is on kvar control."),
        (STIFF, "G1", 4.0, "% voltage droop", "its droop setting is not in use"),
        (MASTER, "G1", 4.0, "% speed droop", "the governor of G1 is isochronous"),
        (COMPOUND, "G1", 101.0, "% no-load voltage", "no regulator acts on the field of G1."),
        (PLAIN, "Alone", 101.0, "% no-load voltage", "Alone does not run in parallel with another set"),
    ],
)
def test_what_would_change_nothing_or_cannot_be_is_refused(
    sets: tuple[dict[str, Any], ...], equipment: str, size: float | None, unit: str, reason: str
) -> None:
    p = one_bus(*sets, kw=500.0)
    p = replace(p, gensets=(*p.gensets, genset("Alone", "MSB")), modes=(mode(states={"Alone": "off"}),))
    (case,) = cases(p, event(equipment, size, unit))
    assert not case.solved
    assert reason in case.sentence
    assert np.isnan(case.q_after_kvar).all()
    assert len(case.p_after_kw) == len(case.sets)


def test_a_set_power_makes_speed_settings_idle() -> None:
    p = one_bus({}, {}, {}, modes=[mode(set_points=[set_point("G1", p_set_kw=200.0)])])
    (case,) = cases(p, event("G1", 105.0, "% no-load frequency"))
    assert case.sentence.endswith("G1 runs at a set power.")


def test_a_refused_row_does_not_count_in_the_rows_after_it() -> None:
    p = one_bus({}, {})
    _, good = cases(p, event("G1", 1.0, "% no-load voltage"), event("G2", 101.0, "% no-load voltage"))
    assert good.solved
    assert "after the rows" not in good.sentence


def test_a_mode_without_a_solution_passes_its_reason_on() -> None:
    (case,) = cases(one_bus({}, {}, kw=5000.0), event("G1", 101.0, "% no-load voltage"))
    assert not case.solved
    assert "the load exceeds what the engines of G1 and G2 can give" in case.sentence


def test_a_battery_that_forms_the_grid_can_be_maladjusted() -> None:
    battery = converter_supply("Battery", "MSB", speed_droop_pu=0.05)
    point = set_point("Battery", no_load_frequency_pu=1.03)
    p = one_bus({}, {}, converter_supplies=[battery], modes=[mode(set_points=[point])])
    (case,) = cases(p, event("Battery", 104.0, "% no-load frequency"))
    assert case.solved
    assert case.was_pu == 1.03
    assert case.p_after_kw.sum() < case.p_before_kw.sum() - 50.0
    assert case.sets == ("G1", "G2")
