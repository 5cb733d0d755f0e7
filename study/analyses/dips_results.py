"""A simulated course in the words of the plant: boards, sets, motors, contactors, figures of a case."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from study.analyses.dips_cases import CaseWork
from study.analyses.dips_measures import recovery_of, rows_to_keep
from study.analyses.dips_motors import drop_outs, motor_traces
from study.analyses.dips_places import judged_board
from study.analyses.dips_sets import set_traces
from study.formulas.performance_iso8528 import performance_class
from study.model.modes import Event
from study.network import dynamics_data as d
from study.network.batch import BatchSolution
from study.network.dynamics_build import Model
from study.network.dynamics_run import Course
from study.network.lumping import voltages_behind
from study.results.arrays import FloatArray, IntArray, read_only
from study.results.dips import BoardDips, CaseStep, Recovery, SimulatedCase

LOAD_ON = {"motor start", "load step", "transformer energising", "build-up"}
LOAD_OFF = {"load rejection"}
ENDS = {
    d.COLLAPSED: "Voltage or speed breaks down: the sets do not carry this event.",
    d.BLACKOUT: "No source is left on the boards: blackout.",
    d.NO_SOLUTION: "The network has no voltages any more: collapse.",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class View:
    """A course as the results want it: rows kept, boards of the island and their voltages at every step."""

    work: CaseWork
    model: Model
    course: Course
    rows: IntArray
    boards: IntArray
    u_board_pu: FloatArray
    f_pu: FloatArray
    starts_s: tuple[float, ...]


def case_result(
    batch: BatchSolution, work: CaseWork, model: Model, course: Course, *, events: Sequence[Event]
) -> SimulatedCase:
    """Return the result of a case that was followed.

    Parameters
    ----------
    batch : BatchSolution
        Load flow before.
    work : CaseWork
        What was asked.
    model : Model
        What was followed.
    course : Course
        What it did.
    events : sequence of Event
        Rows of the sheet.

    Returns
    -------
    SimulatedCase
        With traces thinned.
    """
    view = _view(work, model, course, events)
    at, plant = work.at, work.plant
    judged = judged_board(at, work.island)
    place = int(np.flatnonzero(view.boards == judged)[0])
    voltage = recovery_of(
        course.time_s, view.u_board_pu[:, place], view.starts_s, work.options.recovery_band_pu
    )
    f_hz = plant.project.f_rated_hz
    frequency = recovery_of(
        course.time_s, f_hz * view.f_pu, view.starts_s, work.options.frequency_band_pu * f_hz
    )
    least = view.u_board_pu.min(axis=0)
    others = [n for n in range(len(view.boards)) if n != place]
    worst = min(others, key=lambda n: least[n] / view.u_board_pu[0, n]) if others else place
    motors = motor_traces(work, model, course, view.rows)
    classes = _classes(work, events, voltage, frequency)
    findings = [*work.findings, *_below_knee(model), *_findings(course, voltage, frequency, batch)]
    return SimulatedCase(
        case=events[0].case,
        mode=at.mode.name,
        cells=tuple(e.cell for e in events),
        kinds=tuple(e.kind for e in events),
        equipment=tuple(e.equipment for e in events),
        simulated=True,
        reason="",
        collapsed=course.how in (d.COLLAPSED, d.BLACKOUT, d.NO_SOLUTION),
        board=plant.boards[judged].name,
        u_nominal_v=plant.boards[judged].u_nominal_v,
        worst_board=plant.boards[int(view.boards[worst])].name,
        starts_at_s=view.starts_s[0],
        time_s=read_only(course.time_s[view.rows]),
        u_board_pu=read_only(view.u_board_pu[view.rows, place]),
        u_worst_pu=read_only(view.u_board_pu[view.rows, worst]),
        f_hz=read_only(f_hz * view.f_pu[view.rows]),
        voltage=voltage,
        frequency=frequency,
        iso_class_voltage=classes[0],
        iso_class_frequency=classes[1],
        sets=set_traces(work, model, course, view.rows),
        motors=motors,
        boards=_boards(view),
        drop_outs=drop_outs(work, model, course, view.rows),
        steps=_steps(work, course),
        findings=tuple(findings),
        time_step_s=course.step_s,
    )


def _view(work: CaseWork, model: Model, course: Course, events: Sequence[Event]) -> View:
    at = work.at
    nodes = len(model.lumped.bus)
    boards = [n for n, x in enumerate(work.plant.boards) if x.name in at.view.islands[work.island].boards]
    bus = np.array([at.bus_of_node[n] for n in boards], np.int64)
    nominal = np.array([work.plant.boards[n].u_nominal_v for n in boards])
    u = voltages_behind(model.lumped, course.v_pu[:, :nodes], bus)
    u = u * at.network.u_base_v[boards] / nominal
    f = island_speed_of(course, model)
    starts = tuple(sorted({e.at_s for e in events} | {h.at_s for h in work.happenings} | set(_acted(course))))
    worst = int(u.min(axis=1).argmin())
    rows = rows_to_keep(
        course.time_s,
        [*starts, *(float(x) for x in course.log[:, 0])],
        [worst, int(f.argmin()), int(f.argmax()), len(f) - 1],
        work.options.rows_kept,
    )
    return View(
        work=work,
        model=model,
        course=course,
        rows=rows,
        boards=np.array(boards, np.int64),
        u_board_pu=u,
        f_pu=f,
        starts_s=starts,
    )


def _acted(course: Course) -> list[float]:
    """Return when relays acted and starters let go of their first stage: disturbances of their own."""
    first: dict[int, float] = {}
    for at_s, what, which in course.log:
        if what == d.STARTER_LOG:
            first.setdefault(int(which), float(at_s))
    return [*(float(at_s) for at_s, what, _ in course.log if what == d.RELAY_LOG), *first.values()]


def island_speed_of(course: Course, model: Model) -> FloatArray:
    """Return the frequency of the board over rated, [time]: mean speed of the sets on it by stored energy."""
    source = model.start.source
    weight = np.where(source[:, d.KIND] == d.MACHINE, source[:, d.TWO_H] * source[:, d.RATING], 0.0)
    on = course.source[:, :, d.KEPT_ON]
    if not weight.any():
        weight = np.ones(len(weight))
    total = (on * weight).sum(axis=1)
    mean = (on * weight * course.source[:, :, d.KEPT_SPEED]).sum(axis=1) / np.maximum(total, 1e-12)
    # Without a set on the board a frequency is that of the last one.
    return np.asarray(np.where(total > 0.0, mean, course.source[:, 0, d.KEPT_SPEED]))


def _boards(view: View) -> BoardDips:
    u = view.u_board_pu
    return BoardDips(
        names=tuple(view.work.plant.boards[int(n)].name for n in view.boards),
        u_before_pu=read_only(u[0]),
        u_least_pu=read_only(u.min(axis=0)),
        u_largest_pu=read_only(u.max(axis=0)),
        u_after_pu=read_only(u[-1]),
    )


def _classes(
    work: CaseWork, events: Sequence[Event], voltage: Recovery, frequency: Recovery
) -> tuple[str, str]:
    """Return the classes of ISO 8528-5 that voltage and frequency keep; empty for other events."""
    kinds = {e.kind for e in events}
    if not kinds <= LOAD_ON | LOAD_OFF or (kinds & LOAD_ON and kinds & LOAD_OFF):
        return "", ""
    on, f_hz = bool(kinds & LOAD_ON), work.plant.project.f_rated_hz
    droop = min((s.speed_droop_pu for s in work.at.sources if s.island == work.island), default=0.0)
    u = voltage.before - voltage.least if on else voltage.largest - voltage.before
    f = frequency.before - frequency.least if on else frequency.largest - frequency.before
    return (
        performance_class("voltage", load_on=on, deviation_pu=u, recovery_s=voltage.recovery_s),
        performance_class(
            "frequency",
            load_on=on,
            deviation_pu=f / f_hz,
            recovery_s=frequency.recovery_s,
            speed_droop_pu=droop,
        ),
    )


def _steps(work: CaseWork, course: Course) -> tuple[CaseStep, ...]:
    """Return what happened, in the order of time: events, starters that changed over, relays."""
    steps = list(work.steps)
    for at_s, what, which in course.log:
        if what == d.RELAY_LOG:
            steps.append(CaseStep(at_s=float(at_s), text=work.relay_words[int(which)], cell=""))
        elif int(which) < len(work.drives):
            name = work.drives[int(which)].load.name
            steps.append(CaseStep(at_s=float(at_s), text=f"the starter of {name} changes over", cell=""))
    return tuple(sorted(steps, key=lambda s: s.at_s))


def _below_knee(model: Model) -> list[str]:
    """Return a finding for each set that the volts-per-hertz function holds down before the event."""
    source, at = model.start.source, model.at
    return [
        f"{at.sources[int(j)].name} is below the knee of its V/Hz function before the event: its voltage is "
        "lower than the load flow has it."
        for j, row in zip(model.rows.place, source, strict=True)
        if row[d.KIND] == d.MACHINE and row[d.SPEED] < row[d.KNEE]
    ]


def _findings(course: Course, voltage: Recovery, frequency: Recovery, batch: BatchSolution) -> list[str]:
    out = [ENDS[course.how]] if course.how in ENDS else []
    if course.how == d.FINISHED and not voltage.settled:
        out.append("The voltage has not settled at the end of the time simulated: it swings, or still moves.")
    if course.how == d.FINISHED and not frequency.settled:
        out.append("The frequency has not settled at the end of the time simulated.")
    out += [
        f"{s.name} is at a limit of its {word} before the event."
        for s, e, p in zip(batch.at.sources, batch.excitation_state[0], batch.power_state[0], strict=True)
        for word, state in (("excitation", e), ("engine", p))
        if state
    ]
    return out
