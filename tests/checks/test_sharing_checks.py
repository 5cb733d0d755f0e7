"""Each verdict on sharing and regulation."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from study.checks.sharing import judge_regulation, judge_sharing
from study.checks.verdict import Verdict
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.regulation import RegulationResult
from study.results.sharing import IslandSharing, NotStudied, SetTrim, SharingCurve, SharingResult
from tests.checks.results import LIMITS, MODE, NAN, agreed, find, with_cells
from tests.plants import board, genset, mode, plant, set_point
from tests.report.made_up import outcome

LOADS = np.array([0.2, 0.75, 1.0])


def a_plant(**changes: Any) -> Plant:
    given: dict[str, Any] = {"boards": [board("MSB")], "gensets": [genset("G1", "MSB"), genset("G2", "MSB")]}
    return with_cells(
        plant(**{**given, **changes}),
        ("G1", "Speed droop"),
        ("G1", "No-load voltage"),
        ("G1", "Voltage droop"),
        ("G2", "No-load voltage"),
        ("G2", "No-load frequency"),
        ("G1", "Field supply"),
    )


def a_curve(dp: Any, dq: Any, *, trimmed: bool = False, solved: Any = (True, True, True)) -> SharingCurve:
    """Return a curve of two sets from deviations [load] of the first one."""
    solved = np.array(solved, bool)
    first_p, first_q = (np.where(solved, np.array(d, float), NAN) for d in (dp, dq))
    dp_kw, dq_kvar = np.stack([first_p, -first_p], axis=1), np.stack([first_q, -first_q], axis=1)
    return SharingCurve(
        trimmed=trimmed,
        load_pu=read_only(LOADS),
        p_total_kw=read_only(1600.0 * LOADS),
        q_total_kvar=read_only(1200.0 * LOADS),
        p_kw=read_only(800.0 * LOADS[:, None] + dp_kw),
        q_kvar=read_only(600.0 * LOADS[:, None] + dq_kvar),
        dp_kw=read_only(dp_kw),
        dq_kvar=read_only(dq_kvar),
        u_pu=read_only(np.ones(3)),
        f_hz=read_only(np.full(3, 60.0)),
        solved=read_only(solved, np.bool_),
    )


def an_island(as_set: SharingCurve, trimmed: SharingCurve | None = None, **changes: Any) -> IslandSharing:
    """Return two sets of 800 kW and 600 kvar: 120 kW and 60 kvar may be off."""
    start = IslandSharing(
        mode=MODE,
        island=0,
        sets=("G1", "G2"),
        cos_phi=0.8,
        p_rated_kw=read_only([800.0, 800.0]),
        q_rated_kvar=read_only([600.0, 600.0]),
        p_tolerance_kw=read_only([120.0, 120.0]),
        q_tolerance_kvar=read_only([60.0, 60.0]),
        p_operating_kw=read_only([400.0, 400.0]),
        q_operating_kvar=read_only([300.0, 300.0]),
        u_operating_pu=1.0,
        f_operating_hz=60.0,
        circulating_kvar=0.0,
        as_set=as_set,
        trimmed=trimmed or replace(a_curve([0, 0, 0], [0, 0, 0]), trimmed=True),
        lines=(),
        margins=(),
        findings=(),
        trims=(),
    )
    return replace(start, **changes)


def judged(*islands: IslandSharing, **changes: Any) -> tuple[Verdict, ...]:
    return judge_sharing(a_plant(**changes), SharingResult(islands=islands, cases=()), LIMITS)


def test_the_largest_distance_over_the_range_decides() -> None:
    verdicts = judged(
        an_island(a_curve([10, -125, 30], [50, -40, 58]), a_curve([5, 0, -6], [8, 0, -9], trimmed=True))
    )
    kw = find(verdicts, "G1", "distance from its kW share as set")
    assert (kw.subject, kw.mode, kw.value, kw.limit, kw.unit) == ("kW sharing", MODE, 125.0, 120.0, "kW")
    assert (kw.status, kw.sense, kw.cell) == ("exceeds", "at most", "G1!Speed droop")
    assert "ClassNK 2.4.14-3" in kw.basis
    assert "no-load frequencies" in kw.remedy
    kvar = find(verdicts, "G1", "distance from its kvar share as set")
    assert (kvar.value, kvar.limit, kvar.unit, kvar.status) == (58.0, 60.0, "kvar", "close")
    assert kvar.cell == "G1!Voltage droop"
    trimmed = find(verdicts, "G2", "distance from its kvar share trimmed at 75 % load")
    assert (trimmed.value, trimmed.status) == (9.0, "within")
    assert len(verdicts) == 8


def test_the_basis_is_that_of_the_rule_that_governs() -> None:
    """Unequal sets: 25 % of the own or of the smallest rating is less than 15 or 10 % of the largest."""
    island = an_island(
        a_curve([10, 0, 0], [10, 0, 0]),
        p_rated_kw=read_only([800.0, 300.0]),
        q_rated_kvar=read_only([600.0, 200.0]),
        p_tolerance_kw=read_only([120.0, 75.0]),
        q_tolerance_kvar=read_only([50.0, 50.0]),
    )
    verdicts = judged(island)
    assert find(verdicts, "G1", "distance from its kW share as set").basis == LIMITS.basis(
        "kw_sharing_largest"
    )
    assert find(verdicts, "G2", "distance from its kW share as set").basis == LIMITS.basis("kw_sharing_own")
    assert find(verdicts, "G1", "distance from its kvar share as set").basis == LIMITS.basis(
        "kvar_sharing_smallest"
    )


def test_an_agreed_tolerance_is_marked() -> None:
    result = SharingResult(islands=(an_island(a_curve([0, 0, 0], [0, 0, 0])),), cases=())
    limits = agreed(**{"kW_sharing,_of_largest_set": 10.0})
    v = find(judge_sharing(a_plant(), result, limits), "G1", "distance from its kW share as set")
    assert v.basis == "agreed for this project: owner"


def test_a_load_without_a_solution_is_no_pass() -> None:
    some = an_island(a_curve([10, 10, 0], [10, 70, 0], solved=(True, True, False)))
    verdicts = judged(some)
    kw, kvar = (find(verdicts, "G1", f"distance from its {unit} share as set") for unit in ("kW", "kvar"))
    assert (kw.status, kw.basis) == ("not assessed", "no operating point at 100 % load")
    assert (kvar.status, kvar.value) == ("exceeds", 70.0)


def test_sets_that_could_not_be_trimmed_are_not_assessed() -> None:
    none = a_curve([0, 0, 0], [0, 0, 0], trimmed=True, solved=(False, False, False))
    v = find(
        judged(an_island(a_curve([0, 0, 0], [0, 0, 0]), none)), "G1", "distance from its kW share trimmed"
    )
    assert (v.status, v.basis) == ("not assessed", "no operating point at 20, 75, 100 % load")


def test_a_set_that_takes_no_part_is_not_judged() -> None:
    island = an_island(
        a_curve([0, 0, 0], [0, 0, 0]),
        sets=("G1", "G2", "G3"),
        p_rated_kw=read_only([800.0] * 3),
        q_rated_kvar=read_only([600.0] * 3),
        p_tolerance_kw=read_only([120.0] * 3),
        q_tolerance_kvar=read_only([60.0] * 3),
        apart_kw=("G2",),
        apart_kvar=("G1", "G2"),
    )
    curve = {name: read_only(np.zeros((3, 3))) for name in ("p_kw", "q_kvar", "dp_kw", "dq_kvar")}
    island = replace(island, as_set=replace(island.as_set, **curve), trimmed=replace(island.trimmed, **curve))
    verdicts = judged(island, gensets=[genset(f"G{i}", "MSB") for i in (1, 2, 3)])
    assert {v.equipment for v in verdicts} == {"G1", "G3"}
    assert {v.subject for v in verdicts} == {"kW sharing"}  # one set alone shares kvar with nobody


@pytest.mark.parametrize(
    ("unit", "changes", "remedy"),
    [
        (
            "kvar",
            {"reversed_polarity": True},
            "Turn the current transformer of the droop circuit of G1 round.",
        ),
        ("kvar", {"regulator_mode": "no droop"}, "Switch the voltage droop of G1 on,"),
        ("kvar", {"field_supply": "compounded without regulator"}, "Let a regulator with the droop"),
        (
            "kvar",
            {"regulator_mode": "fixed excitation"},
            "Let a regulator with the droop of the other sets act",
        ),
        ("kvar", {"voltage_droop_pu": 0.08}, "Set equal voltage droops, then trim"),
        ("kW", {"governor_mode": "isochronous"}, "Put the governor of G1 on the speed droop of the others"),
        ("kW", {"speed_droop_pu": 0.08}, "Set equal speed droops, then trim"),
    ],
)
def test_what_trimming_does_not_cure_has_its_own_cure(
    unit: str, changes: dict[str, Any], remedy: str
) -> None:
    sets = [genset("G1", "MSB", **changes), genset("G2", "MSB")]
    verdicts = judged(an_island(a_curve([0, 700, 0], [0, 700, 0])), gensets=sets)
    assert find(verdicts, "G1", f"distance from its {unit} share as set").remedy.startswith(remedy)


def test_the_mode_s_own_regulator_mode_counts() -> None:
    points = [set_point("G2", regulator_mode="no droop")]
    verdicts = judged(an_island(a_curve([0, 0, 0], [0, 700, 0])), modes=[mode(set_points=points)])
    assert "droop of G2 on" in find(verdicts, "G1", "distance from its kvar share as set").remedy


def trimmed(genset: str, **changes: float) -> SetTrim:
    alike = {"u_as_set_pu": 1.02, "u_trimmed_pu": 1.02, "f_as_set_pu": 1.03, "f_trimmed_pu": 1.03}
    return SetTrim(genset=genset, **{**alike, **changes})


def test_the_cure_names_the_trimmed_set_point_and_its_cell() -> None:
    off = trimmed("G2", u_as_set_pu=1.042, f_trimmed_pu=1.04)
    island = an_island(a_curve([0, 130, 0], [0, 70, 0]), trims=(trimmed("G1"), off))
    verdicts = judged(island)
    v = find(verdicts, "G1", "distance from its kvar share as set")
    assert v.remedy == "Set the no-load voltage of G2 from 104.20 to 102.00 % (G2!No-load voltage)."
    assert v.cell == "G2!No-load voltage"
    v = find(verdicts, "G1", "distance from its kW share as set")
    assert v.remedy == "Set the no-load frequency of G2 from 103.00 to 104.00 % (G2!No-load frequency)."
    points = [set_point("G2", cell="Set-points!A5", no_load_voltage_pu=1.042)]
    v = find(judged(island, modes=[mode(set_points=points)]), "G1", "distance from its kvar share as set")
    assert v.cell == "Set-points!A5"
    assert "(Set-points!A5)" in v.remedy


def test_sets_that_trimming_does_not_cure_need_equal_droops() -> None:
    curve = a_curve([0, 0, 0], [0, 70, 0])
    island = an_island(
        curve, replace(curve, trimmed=True), trims=(trimmed("G1"), trimmed("G2", u_as_set_pu=1.0))
    )
    for v in judged(island):
        assert v.remedy == (
            "Set equal voltage droops, then trim the no-load voltages at 75 % load."
            if v.status == "exceeds"
            else ""
        )
    assert find(judged(island), "G1", "distance from its kvar share as set").cell == "G1!Voltage droop"


def test_sets_in_parallel_without_a_solution_are_not_assessed() -> None:
    left = NotStudied(
        mode=MODE, sets=("G1", "G2"), reason="kvar is undetermined: G1 and G2 hold the voltage."
    )
    verdicts = judge_sharing(a_plant(), SharingResult(islands=(), cases=(), not_studied=(left,)), LIMITS)
    assert {(v.equipment, v.subject, v.status) for v in verdicts} == {
        (name, subject, "not assessed") for name in ("G1", "G2") for subject in ("kW sharing", "kvar sharing")
    }
    assert verdicts[0].basis == "kvar is undetermined: G1 and G2 hold the voltage"


# ---- regulation


def regulation(**changes: Any) -> RegulationResult:
    row = outcome().regulation.sets[0]
    return RegulationResult(sets=(replace(row, genset="G1", **changes),))


@pytest.mark.parametrize(
    ("service", "band", "limit", "status"),
    [
        ("main", 0.024, 2.5, "close"),
        ("main", 0.026, 2.5, "exceeds"),
        ("harbour", 0.026, 2.5, "exceeds"),
        ("emergency", 0.026, 3.5, "within"),
        ("emergency", 0.036, 3.5, "exceeds"),
        ("main", 1.0, 2.5, "exceeds"),  # a set that holds no voltage
    ],
)
def test_regulation_by_the_best_centred_band(service: str, band: float, limit: float, status: str) -> None:
    """+/-2.5 % main, +/-3.5 % emergency: ClassNK 2.4.14-2 and JEM 1274."""
    found = judge_regulation(a_plant(), regulation(service=service, band_centred_pu=band), LIMITS)
    v = find(found, "G1", "voltage regulation without droop")
    assert (v.mode, v.subject, v.unit, v.limit, v.status) == ("", "regulation", "%", limit, status)
    assert v.value == pytest.approx(100.0 * band)
    assert v.cell == "G1!Field supply"


@pytest.mark.parametrize(
    ("governor", "droop", "value", "status"),
    [
        ("droop", 0.04, 4.0, "within"),
        ("droop", 0.055, 5.5, "exceeds"),
        ("isochronous", 0.055, 0.0, "within"),
        ("load sharing", 0.055, 0.0, "within"),
    ],
)
def test_speed_variation_by_the_droop_in_use(governor: str, droop: float, value: float, status: str) -> None:
    """5 % from no load to rated: ClassNK 2.4.2."""
    sets = [genset("G1", "MSB", governor_mode=governor, speed_droop_pu=droop)]
    v = find(judge_regulation(a_plant(gensets=sets), regulation(), LIMITS), "G1", "speed fall")
    assert v.value == pytest.approx(value)
    assert (v.limit, v.status, v.cell) == (5.0, status, "G1!Speed droop")
