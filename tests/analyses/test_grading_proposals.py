"""Settings that the search offers: within their ranges, graded again, never at another pair's expense."""

from __future__ import annotations

from dataclasses import replace

import pytest

from study.model.plant import Plant
from tests import plants
from tests.analyses.grading_plants import breaker, failing, feeder_plant, graded, setting_range

SLOW = {"instantaneous_a": None, "instantaneous_off": True, "short_time_a": 300.0, "short_time_delay_s": 0.2}


def ranged(plant: Plant, *ranges: tuple[str, str, float, float, float | None]) -> Plant:
    return replace(plant, setting_ranges=tuple(setting_range(*r) for r in ranges))


def applied(plant: Plant, result: object) -> Plant:
    """Return the plant with the proposed settings, as an engineer would write them into the sheet."""
    fields = {
        "Short-time delay": "short_time_delay_s",
        "Short-time current": "short_time_a",
        "Instantaneous current": "instantaneous_a",
        "Time multiplier": "time_multiplier",
    }
    devices = list(plant.devices)
    for change in result.changes:  # type: ignore[attr-defined]
        k = next(n for n, d in enumerate(devices) if d.name == change.device)
        devices[k] = replace(devices[k], **{fields[change.setting]: change.proposed})
    return replace(plant, devices=tuple(devices))


def test_the_next_delay_that_cures_is_offered() -> None:
    # QH has cleared after 1.1 x 0.2 + 0.03 = 0.25 s: QF needs (0.25 + 0.01)/0.9 = 0.289 s, in steps 0.3 s.
    plant = ranged(feeder_plant(near=SLOW), ("QF", "Short-time delay", 0.1, 0.5, 0.05))
    result = graded(plant)
    (change,) = result.changes
    assert (change.device, change.setting, change.now, change.proposed) == (
        "QF",
        "Short-time delay",
        0.2,
        0.3,
    )
    assert change.cures == (("QH", "QF", ("At sea",)),)
    assert change.before == pytest.approx(0.18 - 0.25)
    assert change.after == pytest.approx(0.27 - 0.25)
    assert failing(graded(applied(plant, result))) == {}
    assert plant.devices[1].short_time_delay_s == 0.2


def test_the_smaller_change_is_offered_first() -> None:
    plant = ranged(
        feeder_plant(near=SLOW),
        ("QF", "Short-time delay", 0.1, 0.5, 0.05),
        ("QH", "Short-time delay", 0.05, 0.5, 0.01),
    )
    # QH: (0.18 - 0.01 - 0.03)/1.1 = 0.127 s, in steps 0.12 s: ln(0.2/0.12) = 0.51; QF: ln(0.3/0.2) = 0.41.
    assert graded(plant).changes[0].device == "QF"


def test_without_a_range_nothing_is_offered() -> None:
    result = graded(feeder_plant(near=SLOW))
    assert result.changes == ()
    (left,) = result.not_cured
    assert (left.downstream, left.upstream) == ("QH", "QF")
    assert "no setting" in left.why


def test_overload_settings_are_left_alone() -> None:
    plant = ranged(feeder_plant(near=SLOW), ("QF", "Long-time current", 100.0, 2000.0, 1.0),
                   ("QH", "Long-time current", 10.0, 40.0, 1.0))  # fmt: skip
    assert graded(plant).changes == ()


def test_a_change_that_breaks_another_pair_is_not_offered() -> None:
    # Delaying QF to 0.3 s would leave 0.36 - (0.33 + 0.03) s to the supply's breaker QS.
    plant = feeder_plant(
        near=SLOW,
        cables=[plants.cable("CS", "Shore", "MSB", length_m=5.0, section_mm2=300.0, runs=3)],
        devices=[breaker("QS", "CS", "MSB", short_time_a=3000.0, short_time_delay_s=0.4)],
    )
    alone = ranged(plant, ("QF", "Short-time delay", 0.1, 0.5, 0.1))
    assert failing(graded(alone)) == {("QH", "QF"): ("At sea",)}
    assert graded(alone).changes == ()
    both = ranged(
        plant, ("QF", "Short-time delay", 0.1, 0.5, 0.1), ("QH", "Short-time delay", 0.05, 0.5, 0.05)
    )
    result = graded(both)
    assert [(c.device, c.proposed) for c in result.changes] == [("QH", 0.1)]
    assert failing(graded(applied(both, result))) == {}


def test_an_instantaneous_stage_is_raised_above_the_fault() -> None:
    plant = ranged(
        feeder_plant(above={"instantaneous_a": 3000.0}),
        ("QF", "Instantaneous current", 1000.0, 40000.0, 500.0),
    )
    result = graded(plant)
    (change,) = result.changes
    assert change.setting == "Instantaneous current"
    assert failing(graded(applied(plant, result))) == {}


def test_a_fault_that_is_not_seen_is_cured_by_a_lower_pick_up() -> None:
    plant = ranged(
        feeder_plant(near={"instantaneous_a": 30_000.0}),
        ("QH", "Instantaneous current", 200.0, 40_000.0, None),
    )
    result = graded(plant)
    assert result.changes[0].device == "QH"
    assert failing(graded(applied(plant, result))) == {}


def test_a_change_that_a_start_does_not_survive_is_not_offered() -> None:
    # The motor starts with 6.5 x 164 A = 1066 A: the only pick-ups in the range would open at once.
    plant = feeder_plant(
        near={"instantaneous_a": 900.0},
        loads=[plants.load("M", "DB")],
        cables=[plants.cable("CM", "DB", "M", length_m=20.0)],
        devices=[breaker("QM", "CM", "DB", instantaneous_a=30_000.0)],
    )
    narrow = ranged(plant, ("QM", "Instantaneous current", 500.0, 900.0, 100.0))
    wide = ranged(plant, ("QM", "Instantaneous current", 500.0, 20_000.0, 100.0))
    assert ("QM", "QF") in failing(graded(narrow))
    assert graded(narrow).changes == ()
    offered = graded(wide).changes
    assert offered[0].proposed > 1066.0 / 0.9


def test_the_pick_up_of_a_set_is_never_raised() -> None:
    # It is bound to what the set holds up (80 % of the sustained current, common in ship practice).
    plant = feeder_plant(
        source={"gensets": [plants.genset("G1", "MSB")]},
        above={"short_time_a": 2000.0, "short_time_delay_s": 0.4},
        cables=[plants.cable("CG", "G1", "MSB", length_m=5.0, section_mm2=300.0, runs=3)],
        devices=[breaker("QG", "CG", "MSB", short_time_a=2500.0, short_time_delay_s=0.4)],
    )
    raised = ranged(plant, ("QG", "Short-time current", 1000.0, 40_000.0, 100.0))
    assert ("QF", "QG") in failing(graded(raised))
    assert graded(raised).changes == ()
    later = ranged(plant, ("QG", "Short-time delay", 0.1, 1.0, 0.1))
    assert [(c.device, c.setting) for c in graded(later).changes] == [("QG", "Short-time delay")]
