"""Each verdict on simulated events and on quick estimates."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from study.checks.dips import judge_dips
from study.checks.verdict import Verdict
from study.results.arrays import read_only
from study.results.dips import DipsResult, DropOut, SimulatedCase
from tests.checks.results import LIMITS, MODE, agreed, find
from tests.plants import board, demand, genset, load, mode, plant
from tests.report.made_up_dips import case, estimates, recovery

PLANT = plant(
    boards=[board("MSB")],
    gensets=[genset("G1", "MSB")],
    loads=[load("Pump", "MSB")],
    modes=[mode(MODE, demand={"Pump": demand(in_use=1)})],
)
PLANT = replace(PLANT, project=replace(PLANT.project, f_rated_hz=50.0))
IDLE = replace(PLANT, modes=(mode(MODE, demand={"Pump": demand(in_use=0)}),))


def verdicts(one: SimulatedCase, **limits: float) -> tuple[Verdict, ...]:
    result = DipsResult(estimates=(), largest=(), cases=(one,))
    return judge_dips(PLANT, result, agreed(**limits) if limits else LIMITS)


def test_a_dip_of_16_percent_exceeds_15() -> None:
    found = verdicts(case(MODE))
    low = find(found, "Pump start", "voltage below nominal")
    assert (low.value, low.status, low.cell) == (pytest.approx(16.0), "exceeds", "Events!A5")
    assert find(found, "Pump start", "voltage above nominal").value == pytest.approx(2.0)
    assert find(found, "Pump start", "time until the voltage is back").status == "within"
    off = find(found, "Pump start", "frequency off rated")
    assert (off.value, off.status) == (pytest.approx(4.0), "within")


def test_a_limit_agreed_for_the_project_counts() -> None:
    low = find(verdicts(case(MODE), Transient_voltage_below=17.0), "Pump start", "voltage below")
    assert low.status == "within"
    assert low.basis.startswith("agreed")


def test_a_voltage_that_does_not_come_back_exceeds() -> None:
    late = find(
        verdicts(case(MODE, voltage=recovery(recovery_s=float("inf")))),
        "Pump start",
        "time until the voltage is back",
    )
    assert late.status == "exceeds"


@pytest.mark.parametrize("kind", ["fault", "set-point step", "droop changed", "field loss", "build-up"])
def test_no_transient_limit_for_faults_settings_and_build_up(kind: str) -> None:
    found = verdicts(case(MODE, kinds=(kind,), motors=()))
    assert not [v for v in found if "voltage" in v.quantity or "frequency" in v.quantity]


def test_boards_left_dead_exceed_whatever_the_event() -> None:
    found = verdicts(case(MODE, kinds=("fault",), collapsed=True))
    assert find(found, "Pump start", "boards left dead").status == "exceeds"


def test_a_motor_that_does_not_run_up() -> None:
    one = case(MODE)
    stuck = replace(one.motors[0], speed_pu=read_only(np.array([0.0, 0.2])), run_up_s=float("inf"))
    assert find(verdicts(replace(one, motors=(stuck,))), "Pump start", "speed that Pump").status == "exceeds"
    assert find(verdicts(one), "Pump start", "speed that Pump").status == "within"


@pytest.mark.parametrize(("heat", "status"), [(0.6, "within"), (1.01, "exceeds")])
def test_the_overload_relay_during_run_up(heat: float, status: str) -> None:
    one = case(MODE)
    found = verdicts(replace(one, motors=(replace(one.motors[0], relay_quick=heat),)))
    assert find(found, "Pump start", "heating of F-Pump").status == status


def test_no_relay_no_verdict() -> None:
    one = case(MODE)
    found = verdicts(replace(one, motors=(replace(one.motors[0], relay="", relay_quick=float("nan")),)))
    assert not [v for v in found if v.quantity.startswith("heating")]


def test_the_worst_contactor_is_named() -> None:
    drops = (
        DropOut(load="Fan", drop_out_pu=0.75, u_least_pu=0.72, below_s=0.1),
        DropOut(load="Lift", drop_out_pu=0.75, u_least_pu=0.70, below_s=0.1),
    )
    found = find(verdicts(case(MODE, drop_outs=drops)), "Pump start", "voltage at Lift")
    assert (found.status, found.sense, found.value) == ("exceeds", "at least", pytest.approx(70.0))


def test_a_case_that_is_not_simulated_is_not_assessed() -> None:
    found = verdicts(case(MODE, simulated=False, reason="no solution"))
    assert [v.status for v in found] == ["not assessed"]
    assert found[0].basis == "no solution"


@pytest.mark.parametrize(
    ("the_plant", "dip", "count", "status"),
    [(PLANT, 0.12, 1, "within"), (PLANT, 0.16, 1, "exceeds"), (IDLE, 0.16, 0, "")],
)
def test_the_quick_estimate_counts_for_motors_in_use(
    the_plant: Any, dip: float, count: int, status: str
) -> None:
    result = DipsResult(estimates=(estimates(MODE, "Pump", dip),), largest=(), cases=())
    found = judge_dips(the_plant, result, LIMITS)
    assert [v.status for v in found] == [status] * count
