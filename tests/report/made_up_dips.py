"""A result of the dip study written by hand: one start of a motor, one lost board, one case not simulated."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from study.results.arrays import read_only
from study.results.dips import (
    BoardDips,
    CaseStep,
    DipsResult,
    DropOut,
    LargestStart,
    MotorTrace,
    Recovery,
    ReductionTerms,
    SetTrace,
    SimulatedCase,
    StartEstimates,
)

NAN = float("nan")
TIME_S = np.array([0.0, 0.5, 0.5, 0.6, 1.0, 2.0, 4.0])
U_PU = np.array([1.0, 1.0, 0.9, 0.84, 0.95, 0.99, 0.99])


def recovery(**changes: Any) -> Recovery:
    """Return a voltage that dips to 84 % and is back after 0.8 s."""
    given: dict[str, Any] = {
        "before": 1.0,
        "least": 0.84,
        "least_at_s": 0.6,
        "largest": 1.02,
        "largest_at_s": 1.4,
        "after": 0.99,
        "recovery_s": 0.8,
        "overshoot": 0.03,
        "settled": True,
    }
    return Recovery(**{**given, **changes})


def case(mode: str, *, genset: str = "G1", load: str = "Pump", **changes: Any) -> SimulatedCase:
    """Return the start of a pump on one set."""
    n = len(TIME_S)
    flat = read_only(np.ones(n))
    motor = MotorTrace(
        load=load,
        units=1.0,
        method="direct",
        started_at_s=0.5,
        changed_at_s=NAN,
        speed_pu=read_only(np.linspace(0.0, 0.97, n)),
        u_pu=read_only(U_PU),
        i_line_pu=flat,
        torque_pu=flat,
        load_torque_pu=flat,
        run_up_s=2.5,
        run_up_known=True,
        inertia_s=0.2,
        inertia_basis="given",
        u_least_pu=0.82,
        i_largest_a=300.0,
        relay="F-Pump",
        relay_class="10",
        relay_quick=0.6,
        relay_slow=0.3,
    )
    source = SetTrace(
        name=genset,
        u_pu=read_only(U_PU),
        i_pu=flat,
        field_pu=flat,
        ceiling_pu=read_only(2.0 * np.ones(n)),
        p_kw=read_only(100.0 * np.ones(n)),
        q_kvar=read_only(60.0 * np.ones(n)),
        speed_pu=flat,
        engine_pu=flat,
        opened_at_s=NAN,
        p_before_kw=80.0,
        q_before_kvar=40.0,
        p_largest_kw=130.0,
        q_largest_kvar=150.0,
        p_after_kw=100.0,
        q_after_kvar=60.0,
        field_largest_pu=1.8,
        at_ceiling_s=0.0,
    )
    given: dict[str, Any] = {
        "case": "Pump start",
        "mode": mode,
        "cells": ("Events!A5",),
        "kinds": ("motor start",),
        "equipment": (load,),
        "simulated": True,
        "reason": "",
        "collapsed": False,
        "board": "MSB",
        "u_nominal_v": 400.0,
        "worst_board": "DB",
        "starts_at_s": 0.5,
        "time_s": read_only(TIME_S),
        "u_board_pu": read_only(U_PU),
        "u_worst_pu": read_only(U_PU - 0.01),
        "f_hz": read_only(np.array([50.0, 50.0, 50.0, 49.0, 48.0, 49.5, 49.6])),
        "voltage": recovery(),
        "frequency": recovery(
            before=50.0, least=48.0, largest=50.0, after=49.6, recovery_s=1.0, overshoot=0.0
        ),
        "iso_class_voltage": "G2",
        "iso_class_frequency": "G3",
        "sets": (source,),
        "motors": (motor,),
        "boards": BoardDips(
            names=("MSB",),
            u_before_pu=read_only(np.array([1.0])),
            u_least_pu=read_only(np.array([0.84])),
            u_largest_pu=read_only(np.array([1.02])),
            u_after_pu=read_only(np.array([0.99])),
        ),
        "drop_outs": (),
        "steps": (CaseStep(at_s=0.5, text=f"{load} starts: direct", cell="Events!A5"),),
        "findings": (),
        "time_step_s": 0.002,
    }
    return SimulatedCase(**{**given, **changes})


def estimates(mode: str, load: str, dip_pu: float = 0.12) -> StartEstimates:
    """Return the estimate of one motor's start."""

    def one(value: float) -> Any:
        return read_only(np.array([value]))

    u = read_only(np.array([[1.0 - dip_pu + 0.02], [1.0 - dip_pu + 0.01], [1.0 - dip_pu]]))
    terms = ReductionTerms(
        load=load,
        board="MSB",
        s_base_kva=1000.0,
        u_base_v=400.0,
        v_before=1.0 + 0.0j,
        z_source=0.02 + 0.2j,
        z_path=0.01 + 0.01j,
        z_motor=0.3 + 1.2j,
        v_after=0.86 - 0.01j,
    )
    return StartEstimates(
        mode=mode,
        solved=True,
        reason="",
        loads=(load,),
        boards=("MSB",),
        methods=("direct",),
        set_boards=("MSB",),
        worst_boards=("DB",),
        line_current_a=one(280.0),
        line_cos_phi=one(0.3),
        u_set_board_before_pu=one(1.0),
        u_set_board_pu=u,
        u_set_board_first_cycle_pu=one(0.92),
        u_set_board_running_pu=one(0.99),
        u_terminal_pu=u,
        u_terminal_running_pu=one(0.98),
        u_worst_board_pu=one(0.88),
        dip_pu=one(dip_pu),
        torque_pu=one(1.5),
        p_engine_before_kw=one(80.0),
        p_engine_start_kw=one(120.0),
        p_engine_limit_kw=one(150.0),
        worked=terms,
    )


def dips(mode: str, load: str) -> DipsResult:
    """Return estimates, a largest start and three cases."""
    four = read_only(np.array([20.0, 60.0, 45.0, np.inf]))
    lost = case(
        mode,
        load=load,
        case="Set trips",
        kinds=("set trip",),
        equipment=("G1",),
        collapsed=True,
        motors=(),
        drop_outs=(DropOut(load=load, drop_out_pu=0.75, u_least_pu=0.4, below_s=1.0),),
        findings=("No source is left on the boards: blackout.",),
        voltage=recovery(recovery_s=float("inf"), least=0.4),
    )
    silent = replace(
        case(mode, load=load, case="Not possible"),
        simulated=False,
        reason="the mode has no solution",
        board="",
        worst_board="",
        time_s=read_only(np.zeros(0)),
        u_board_pu=read_only(np.zeros(0)),
        u_worst_pu=read_only(np.zeros(0)),
        f_hz=read_only(np.zeros(0)),
        voltage=recovery(before=NAN, least=NAN, largest=NAN, after=NAN, recovery_s=NAN, overshoot=NAN),
        frequency=recovery(before=NAN, least=NAN, largest=NAN, after=NAN, recovery_s=NAN, overshoot=NAN),
        sets=(),
        motors=(),
        steps=(),
    )
    largest = LargestStart(mode=mode, board="MSB", dip_allowed_pu=0.15, p_rated_kw=four, p_engine_kw=four)
    return DipsResult(
        estimates=(estimates(mode, load),), largest=(largest,), cases=(case(mode, load=load), lost, silent)
    )
