"""The motors of a simulated case: run-up, overload relay meanwhile, and contactors that would open."""

from __future__ import annotations

import numpy as np

from study.analyses.dips_cases import CaseWork
from study.formulas.induction import rated_current
from study.formulas.starting import TRIP_CLASSES, overload_heating, overload_time_constant
from study.model.loads import Load
from study.model.protection import Device
from study.network import dynamics_data as d
from study.network.dynamics_build import Model
from study.network.dynamics_run import Course
from study.network.lumping import voltages_behind
from study.results.arrays import FloatArray, IntArray, read_only
from study.results.dips import DropOut, MotorTrace

RUN_UP_SHARE = 0.95  # of its final speed: a motor has run up
LEAST_FINAL_SPEED = 0.85  # of synchronous: below it a motor has not run up at all
ON_CURRENT = 1e-6


def motor_traces(work: CaseWork, model: Model, course: Course, rows: IntArray) -> tuple[MotorTrace, ...]:
    """Return the motors that start in a case.

    Parameters
    ----------
    work : CaseWork
        What was asked.
    model : Model
        What was followed.
    course : Course
        What it did.
    rows : ndarray of int
        Rows kept.

    Returns
    -------
    tuple of MotorTrace
        In the order of their events.
    """
    return tuple(_trace(work, model, course, rows, m) for m in range(len(work.drives)))


def _trace(work: CaseWork, model: Model, course: Course, rows: IntArray, m: int) -> MotorTrace:
    drive, inertia = work.drives[m], model.inertia[m]
    load, motor = drive.load, drive.load.motor
    assert motor is not None
    kept, t = course.motor[:, m], course.time_s
    started = min(h.at_s for h in work.happenings if h.kind == d.START_MOTOR and h.index == m)
    changed = [float(x) for x, what, which in course.log if what == d.STARTER_LOG and int(which) == m]
    run_up = _run_up_s(t, kept[:, d.KEPT_TURNING], started)
    rated_a = float(
        rated_current(load.p_rated_kw, load.u_rated_v, load.efficiency, load.cos_phi, load.phases)
    )
    live = t >= started
    relay = _relay(work, load)
    quick, slow = _heating(relay, t, kept[:, d.KEPT_LINE_I] * rated_a, started + run_up)
    return MotorTrace(
        load=load.name,
        units=drive.units,
        method=motor.starting_method,
        started_at_s=started,
        changed_at_s=changed[-1] if changed else float("nan"),
        speed_pu=read_only(kept[rows, d.KEPT_TURNING]),
        u_pu=read_only(kept[rows, d.KEPT_MOTOR_U]),
        i_line_pu=read_only(kept[rows, d.KEPT_LINE_I]),
        torque_pu=read_only(kept[rows, d.KEPT_TORQUE]),
        load_torque_pu=read_only(kept[rows, d.KEPT_AGAINST]),
        run_up_s=run_up,
        run_up_known=inertia.known,
        inertia_s=inertia.h_s,
        inertia_basis=inertia.basis,
        u_least_pu=float(kept[live, d.KEPT_MOTOR_U].min()),
        i_largest_a=float(kept[live, d.KEPT_LINE_I].max() * rated_a * drive.units),
        relay=relay.name if relay is not None else "",
        relay_class=(relay.trip_class or "") if relay is not None else "",
        relay_quick=quick,
        relay_slow=slow,
    )


def _run_up_s(t: FloatArray, speed: FloatArray, started: float) -> float:
    final = float(speed[-1])
    if final < LEAST_FINAL_SPEED:
        return float("inf")
    reached = np.flatnonzero((speed >= RUN_UP_SHARE * final) & (t > started))
    return float(t[reached[0]] - started)


def _relay(work: CaseWork, load: Load) -> Device | None:
    """Return the overload relay of a motor."""
    return next(
        (x for x in work.plant.devices if x.equipment == load.name and x.kind == "thermal overload"), None
    )


def _heating(relay: Device | None, t: FloatArray, amperes: FloatArray, until: float) -> tuple[float, float]:
    """Return the heating at the end of the run-up, or of the course: quickest and slowest relay."""
    nan = float("nan")
    if relay is None or relay.trip_class not in TRIP_CLASSES:
        return nan, nan
    current = amperes / (relay.long_time_a or relay.i_rated_a)
    end = min(int(np.searchsorted(t, until)), len(t) - 1)
    quick, slow = (
        float(overload_heating(t[: end + 1], current[: end + 1], overload_time_constant(s))[-1])
        for s in TRIP_CLASSES[relay.trip_class]
    )
    return quick, slow


def drop_outs(work: CaseWork, model: Model, course: Course, rows: IntArray) -> tuple[DropOut, ...]:
    """Return the motors in use whose contactors would open, the lowest voltage first.

    Parameters
    ----------
    work : CaseWork
        What was asked.
    model : Model
        What was followed.
    course : Course
        What it did.
    rows : ndarray of int
        Rows of time that are looked at.

    Returns
    -------
    tuple of DropOut
        Motors that start in the case included.
    """
    at, loads = work.at, work.plant.loads
    here = [
        n for n, x in enumerate(loads) if x.motor is not None and work.p_kw[n] > 0.0 and at.load_bus[n] >= 0
    ]
    nodes = len(model.lumped.bus)
    u = voltages_behind(model.lumped, course.v_pu[rows][:, :nodes], at.load_bus[here])
    u = u * at.load_arrays.v_scale[here]
    t = course.time_s[rows]
    out = [_drop_out(loads[n], t, u[:, k]) for k, n in enumerate(here)]
    for m, drive in enumerate(work.drives):
        kept = course.motor[rows, m]
        on = kept[:, d.KEPT_LINE_I] > ON_CURRENT
        out.append(_drop_out(drive.load, t, np.where(on, kept[:, d.KEPT_MOTOR_U], np.inf)))
    found = [x for x in out if x is not None]
    return tuple(sorted(found, key=lambda x: x.u_least_pu))


def _drop_out(load: Load, t: FloatArray, u: FloatArray) -> DropOut | None:
    assert load.motor is not None
    level = load.motor.contactor_drop_out
    # NaN, where a consumer stands in another island, is not below.
    below = u < level
    if not below.any():
        return None
    return DropOut(
        load=load.name,
        drop_out_pu=level,
        u_least_pu=float(u[below].min()),
        below_s=float(np.diff(t)[below[:-1]].sum()),
    )
