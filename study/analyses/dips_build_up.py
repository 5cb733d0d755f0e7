"""The voltage of a set alone building up from its residual magnetism, at rated speed."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from study.analyses.dips_measures import recovery_of, rows_to_keep
from study.analyses.dips_options import DipOptions
from study.analyses.dips_sets import source_trace
from study.analyses.dips_unsimulated import not_simulated
from study.issues import SolveError
from study.model.modes import Event
from study.network import dynamics_data as d
from study.network.dynamics_run import empty_script, follow_plant
from study.network.dynamics_sources import set_alone
from study.network.machines import largest_field
from study.network.network import ModeNetwork
from study.results.arrays import read_only
from study.results.dips import BoardDips, CaseStep, SimulatedCase

RESIDUAL_PU = 0.03  # of rated voltage, 2 to 5 %; common practice, no source
BUILT_UP_PU = 0.5  # below it a set has not excited itself


def simulate_build_up(at: ModeNetwork, events: Sequence[Event], options: DipOptions) -> SimulatedCase:
    """Simulate the build-up of a set's voltage, its engine at rated speed and its breaker open.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    events : sequence of Event
        One row of kind build-up.
    options : DipOptions
        Limits and lengths.

    Returns
    -------
    SimulatedCase
        ``voltage.before`` is the residual voltage, ``voltage.recovery_s`` the time to the settled one.

    Raises
    ------
    SolveError
        Other events in the same case.
    """
    if len(events) > 1:
        raise SolveError("a build-up is simulated alone: give the other events a case of their own.")
    (event,) = events
    plant = at.network.plant
    item = plant.genset(event.equipment)
    start = set_alone(item, largest_field(item), plant.project.f_rated_hz, RESIDUAL_PU)
    course = follow_plant(start, empty_script(1), options.longest_s)
    u = course.v_pu[:, 0] * item.u_rated_v / plant.board(item.board).u_nominal_v
    moment = np.repeat(course.time_s[:1], 1)
    time_s = event.at_s + np.concatenate([moment, course.time_s])
    u = np.concatenate([u[:1], u])
    voltage = recovery_of(time_s, u, [event.at_s], options.recovery_band_pu)
    rows = rows_to_keep(course.time_s, [0.0], [int(u.argmax())], options.rows_kept)
    f_hz = plant.project.f_rated_hz * course.source[:, 0, d.KEPT_SPEED]
    frequency = recovery_of(course.time_s, f_hz, [0.0], options.frequency_band_pu * plant.project.f_rated_hz)
    trace = source_trace(
        item.name, item.s_rated_kva, float(start.source[0, d.RATED_FIELD]), course, (0, rows)
    )
    findings = []
    if voltage.after < BUILT_UP_PU:
        findings.append(f"{item.name} does not excite itself from {100 * RESIDUAL_PU:g} % residual voltage.")
    elif not voltage.settled:
        findings.append("The voltage has not settled at the end of the time simulated.")
    board = plant.board(item.board)
    kept = read_only(u[1:][rows])
    return replace(
        not_simulated(at, events, ""),
        simulated=True,
        board=board.name,
        u_nominal_v=board.u_nominal_v,
        time_s=read_only(event.at_s + course.time_s[rows]),
        u_board_pu=kept,
        u_worst_pu=kept,
        worst_board=board.name,
        f_hz=read_only(f_hz[rows]),
        voltage=voltage,
        frequency=frequency,
        sets=(trace,),
        boards=BoardDips(
            names=(board.name,),
            u_before_pu=read_only(u[:1]),
            u_least_pu=read_only([u.min()]),
            u_largest_pu=read_only([u.max()]),
            u_after_pu=read_only(u[-1:]),
        ),
        steps=(CaseStep(at_s=event.at_s, text=f"{item.name} is excited at rated speed", cell=event.cell),),
        findings=tuple(findings),
        time_step_s=course.step_s,
    )
