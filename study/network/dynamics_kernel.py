"""A plant followed in time, compiled: Runge-Kutta steps of fourth order between what happens.

Compiling takes some twenty seconds, once for each installation (the result is kept on disk); reading it back
a fraction of a second.
"""

from __future__ import annotations

from collections.abc import Callable
from hashlib import sha256
from pathlib import Path
from typing import Any

import numpy as np

from study.formulas import exciters, governor, starting
from study.formulas.starting import STAR_DELTA_GAP_S
from study.network import dynamics_data, dynamics_machines, dynamics_network
from study.network.dynamics_data import (
    AUTOTRANSFORMER,
    BLACKOUT,
    CHANGE_LOAD,
    CHANGE_S,
    CLOSE_SOURCE,
    COLLAPSED,
    FAULT_OFF,
    FAULT_ON,
    FIELD,
    FINISHED,
    FULL,
    GAP,
    I_LIMIT,
    INRUSH,
    KEPT_CEILING,
    KEPT_ENGINE,
    KEPT_FIELD,
    KEPT_I,
    KEPT_LINE_I,
    KEPT_LOAD_TORQUE,
    KEPT_MOTOR,
    KEPT_MOTOR_U,
    KEPT_N,
    KEPT_P,
    KEPT_Q,
    KEPT_SOURCE,
    KEPT_SPEED,
    KEPT_TORQUE,
    KEPT_TURNING,
    KEPT_U,
    MACHINE,
    NO_EXCITATION,
    NO_SOLUTION,
    OFF,
    ON,
    OPEN_SOURCE,
    OVERCURRENT,
    OVERFREQUENCY,
    OVERVOLTAGE,
    OWN_MOTOR_V,
    OWN_V,
    P_RATED,
    RACK,
    RAMP_S,
    RATING,
    REDUCED,
    REVERSE_POWER,
    SET_PARAMETER,
    SHED_LOAD,
    SOFT_STARTER,
    SPEED,
    STAR_DELTA,
    START_MOTOR,
    STATES,
    STOP_MOTOR,
    TRIP_SOURCE,
    UNDERFREQUENCY,
    UNDERVOLTAGE,
    Y_SCALE,
    Now,
)
from study.network.dynamics_machines import (
    ceiling,
    island_speed,
    motor_torques,
    move,
    terminal,
)
from study.network.dynamics_network import (
    compiled,
    motor_admittance,
    motor_current,
    solve,
    solve_afresh,
    source_current,
)

FAULT_ADMITTANCE = 1e5  # a bolted fault, pu of the network's base
CHANGE_SPEED = 0.9  # at which a starter changes over by itself; common practice, no source
STALLED_RATE = 0.01  # pu of speed a second below which it changes over as well
STALLED_AFTER_S = 1.0
LOWEST_SPEED, HIGHEST_SPEED = 0.5, 1.5
DEAD_VOLTAGE, DEAD_FOR_S = 0.15, 1.0
LOG_ROWS = 400
SAME_TIME = 1e-9
RELAY_LOG, STARTER_LOG = -1, -2


@compiled
def observe(now: Any, t: float, started: Any, inrush_at: Any) -> None:
    """Bring what follows from states and time up to date: slips, times since the starts, inrush."""
    sys = now.system
    f = island_speed(now)
    for m in range(len(sys.motor_node)):
        now.since[m] = t - started[m]
        now.slip[m] = (f - now.speed[m]) / f
    for k in range(len(sys.inrush_node)):
        if t >= inrush_at[k]:
            now.shunt[sys.inrush_node[k]] = complex(
                now.shunt[sys.inrush_node[k]].real,
                -sys.inrush_y[k] * np.exp(-(t - inrush_at[k]) / sys.inrush_s[k]),
            )


@compiled
def currents(now: Any) -> None:
    """Fill the currents of the sources."""
    sys = now.system
    for j in range(len(sys.node)):
        now.current[j] = source_current(sys.kind[j], now.source[j], now.par[j], now.v[sys.node[j]])


@compiled
def keep_source(now: Any, j: int, row: Any) -> None:
    """Fill what is kept of a source."""
    p, x = now.par[j], now.source[j]
    if now.system.kind[j] == MACHINE:
        axes = terminal(now, j)
        i_d, i_q, vd, vq = axes
        row[KEPT_U], row[KEPT_I] = np.sqrt(vd * vd + vq * vq), np.sqrt(i_d * i_d + i_q * i_q)
        row[KEPT_P], row[KEPT_Q] = vd * i_d + vq * i_q, vq * i_d - vd * i_q
        row[KEPT_CEILING] = ceiling(p, axes)
        row[KEPT_FIELD], row[KEPT_ENGINE] = x[FIELD], x[RACK]
    else:
        v = now.v[now.system.node[j]] * p[OWN_V]
        i = now.current[j] / (p[RATING] * p[OWN_V])
        s = v * np.conj(i)
        row[KEPT_U], row[KEPT_I], row[KEPT_P], row[KEPT_Q] = abs(v), abs(i), s.real, s.imag
        row[KEPT_CEILING], row[KEPT_FIELD] = np.nan, np.nan
        row[KEPT_ENGINE] = s.real / p[P_RATED]
    row[KEPT_SPEED] = x[SPEED]
    row[KEPT_TURNING] = p[ON]


@compiled
def keep(now: Any, n: int, t: float, out: Any) -> int:
    """Write one row of results; return the number of rows then kept."""
    time, v, source, motor = out
    f = island_speed(now)
    time[n] = t
    v[n] = now.v
    for j in range(len(now.system.node)):
        keep_source(now, j, source[n, j])
    for m in range(len(now.system.motor_node)):
        row = motor[n, m]
        par = now.system.motor[m]
        torque, against = motor_torques(now, m, f)
        u = abs(now.v[now.system.motor_node[m]])
        i = abs(motor_current(now, m)) if now.stage[m] in (REDUCED, FULL) else 0.0
        row[KEPT_N], row[KEPT_TORQUE], row[KEPT_LOAD_TORQUE] = now.speed[m], torque, against
        row[KEPT_MOTOR_U] = u * par[OWN_MOTOR_V]
        row[KEPT_LINE_I] = i / (par[Y_SCALE] / par[OWN_MOTOR_V])
    return n + 1


@compiled
def apply(now: Any, e: int, t: float, marks: Any) -> None:
    """Let event e happen."""
    sys = now.system
    started, inrush_at, _ = marks
    kind, k, value = sys.event_kind[e], sys.event_index[e], sys.event_value[e]
    if kind == START_MOTOR:
        started[k] = t
        now.stage[k] = REDUCED if sys.method[k] != 0 else FULL
    elif kind == STOP_MOTOR:
        now.stage[k] = OFF
    elif kind == OPEN_SOURCE:
        now.par[k, ON] = 0.0
    elif kind == CLOSE_SOURCE:
        now.par[k, ON] = 1.0
    elif kind == CHANGE_LOAD:
        change_load(now, k)
    elif kind == SET_PARAMETER:
        now.par[k, sys.event_column[e]] = value
    elif kind == FAULT_ON:
        now.shunt[k] += FAULT_ADMITTANCE
    elif kind == FAULT_OFF:
        now.shunt[k] -= FAULT_ADMITTANCE
    elif kind == INRUSH:
        inrush_at[k] = t


@compiled
def change_load(now: Any, row: int) -> None:
    """Add a change of load."""
    for k in range(len(now.v)):
        now.constant[k] += now.system.load_a[row, k]
        now.square[k] += now.system.load_b[row, k]


@compiled
def starters(now: Any, t: float, marks: Any, d_speed: Any) -> int:
    """Let starters change over; return the motor that did, or -1."""
    sys = now.system
    started, _, gap_until = marks
    for m in range(len(sys.motor_node)):
        par, method = sys.motor[m], sys.method[m]
        if now.stage[m] == GAP:
            if t >= gap_until[m] - SAME_TIME:
                now.stage[m] = FULL
                return m
        elif now.stage[m] == REDUCED and method in (STAR_DELTA, AUTOTRANSFORMER):
            since = t - started[m]
            due = since >= par[CHANGE_S] - SAME_TIME
            if np.isnan(par[CHANGE_S]):
                stalled = since > STALLED_AFTER_S and d_speed[m] < STALLED_RATE
                due = now.speed[m] >= CHANGE_SPEED or stalled
            if due:
                now.stage[m] = FULL if method == AUTOTRANSFORMER else GAP
                gap_until[m] = t + STAR_DELTA_GAP_S
                return m
        elif now.stage[m] == REDUCED and method == SOFT_STARTER and t - started[m] >= par[RAMP_S]:
            v_own = abs(now.v[sys.motor_node[m]]) * par[OWN_MOTOR_V]
            _, k = motor_admittance(now, m, v_own)
            if k > 1.0 - 1e-6 and v_own * par[I_LIMIT] > 0.0:
                now.stage[m] = FULL
                return m
    return -1


@compiled
def looks_bad(now: Any, r: int, row: Any) -> bool:
    """Return True where what a relay looks at is beyond its setting."""
    sys = now.system
    limit, looks = sys.relay_at[r], sys.relay_looks[r]
    if looks == OVERCURRENT:
        return bool(row[KEPT_I] > limit)
    if looks == UNDERVOLTAGE:
        return bool(row[KEPT_U] < limit)
    if looks == OVERVOLTAGE:
        return bool(row[KEPT_U] > limit)
    if looks == UNDERFREQUENCY:
        return bool(row[KEPT_SPEED] < limit)
    if looks == OVERFREQUENCY:
        return bool(row[KEPT_SPEED] > limit)
    if looks == REVERSE_POWER:
        return bool(row[KEPT_P] < -limit * now.par[sys.relay_source[r], P_RATED])
    if looks == NO_EXCITATION:
        return bool(row[KEPT_Q] < -limit)
    return False


@compiled
def relays(now: Any, h: float, rows: Any, timers: Any) -> int:
    """Advance the relays by a step; return one that acts, or -1."""
    sys = now.system
    for r in range(len(sys.relay_source)):
        j = sys.relay_source[r]
        if now.par[j, ON] == 0.0 or np.isinf(timers[r]):
            continue
        timers[r] = timers[r] + h if looks_bad(now, r, rows[j]) else 0.0
        if timers[r] >= sys.relay_delay[r] - SAME_TIME and timers[r] > 0.0:
            timers[r] = np.inf
            return r
    return -1


@compiled
def act(now: Any, r: int, timers: Any) -> None:
    """Let a relay trip its set, or shed a stage of load; other relays of that stage then have nothing left."""
    sys = now.system
    if sys.relay_does[r] == TRIP_SOURCE:
        now.par[sys.relay_source[r], ON] = 0.0
        return
    change_load(now, sys.relay_index[r])
    for other in range(len(timers)):
        if sys.relay_does[other] == SHED_LOAD and sys.relay_index[other] == sys.relay_index[r]:
            timers[other] = np.inf


@compiled
def ended(now: Any, h: float, dead: Any) -> int:
    """Return how the run has ended, or 0 where it goes on."""
    sys = now.system
    alive, fault = 0, False
    for j in range(len(sys.node)):
        if now.par[j, ON] != 0.0:
            alive += 1
            if not LOWEST_SPEED < now.source[j, SPEED] < HIGHEST_SPEED:
                return COLLAPSED
    if alive == 0:
        return BLACKOUT
    highest = 0.0
    for k in range(len(now.v)):
        highest = max(highest, abs(now.v[k]))
        fault = fault or now.shunt[k].real > 0.5 * FAULT_ADMITTANCE
    dead[0] = dead[0] + h if highest < DEAD_VOLTAGE and not fault else 0.0
    return COLLAPSED if dead[0] > DEAD_FOR_S else FINISHED


@compiled
def advance(now: Any, t: float, h: float, space: Any, marks: Any) -> bool:
    """Make one Runge-Kutta step of length h; the voltages are those at its end. False without a solution."""
    x0, n0, d_source, d_speed, total, total_n = space
    started, inrush_at, _ = marks
    x0[:] = now.source
    n0[:] = now.speed
    total[:] = 0.0
    total_n[:] = 0.0
    for part in range(4):
        if part > 0:
            ahead = h if part == 3 else 0.5 * h
            now.source[:] = x0 + ahead * d_source
            now.speed[:] = n0 + ahead * d_speed
            observe(now, t + ahead, started, inrush_at)
            if not solve(now):
                now.flags[0] = 0
                if not solve(now):
                    return False
            currents(now)
        move(now, island_speed(now), d_source, d_speed)
        weight = h / 6.0 if part in (0, 3) else h / 3.0
        total += weight * d_source
        total_n += weight * d_speed
    now.source[:] = x0 + total
    now.speed[:] = np.maximum(n0 + total_n, 0.0)
    observe(now, t + h, started, inrush_at)
    if not solve(now):
        return False
    currents(now)
    return True


def digest_of(*modules: Any) -> str:
    """Return a digest of modules' sources: numba's cache looks at the file of the function alone."""
    text = b"".join(Path(str(m.__file__)).read_bytes() for m in modules)
    return sha256(text).hexdigest()


def _follower(digest: str) -> Callable[..., Any]:
    """Return the compiled run; the digest, being part of it, parts it from runs of other sources."""

    @compiled
    def follow(system: Any, start: Any, until_s: float, step_s: float) -> Any:
        """Follow a plant in time; see `dynamics_data` for what goes in and comes out."""
        n, s, m = len(start.v), len(system.node), len(system.motor_node)
        now = Now(
            system,
            system.par.copy(),
            system.constant.copy(),
            system.square.copy(),
            np.zeros(n, np.complex128),
            start.source.copy(),
            start.speed.copy(),
            np.zeros(m),
            start.stage.copy(),
            np.zeros(m),
            np.zeros(m, np.complex128),
            np.zeros(s, np.complex128),
            np.zeros(1),
            start.v.copy(),
            np.zeros(2 * n),
            np.zeros((2 * n, 2 * n)),
            np.zeros(2 * n, np.int64),
            np.zeros(2, np.int64),
        )
        events = len(system.event_time)
        rows = int(until_s / step_s) + 4 * events + 2 * LOG_ROWS + 16
        out = (np.zeros(rows), np.zeros((rows, n), np.complex128), np.zeros((rows, s, KEPT_SOURCE)),
               np.zeros((rows, m, KEPT_MOTOR)))  # fmt: skip
        log = np.zeros((LOG_ROWS, 3))
        marks = (np.zeros(m), np.full(len(system.inrush_node), np.inf), np.zeros(m))
        space = (np.zeros((s, STATES)), np.zeros(m), np.zeros((s, STATES)), np.zeros(m), np.zeros((s, STATES)),
                 np.zeros(m))  # fmt: skip
        timers, dead = np.zeros(len(system.relay_source)), np.zeros(1)
        t, e, logged = 0.0, 0, 0
        how = FINISHED if len(digest) else NO_SOLUTION
        observe(now, t, marks[0], marks[1])
        if not solve_afresh(now):
            return out, 0, log, 0, NO_SOLUTION
        currents(now)
        kept = keep(now, 0, t, out)
        while t < until_s - SAME_TIME and how == FINISHED and kept < rows - 4:
            changed = False
            while e < events and system.event_time[e] <= t + SAME_TIME:
                apply(now, e, t, marks)
                e, changed = e + 1, True
            if not changed:
                h = min(step_s, until_s - t)
                if e < events:
                    h = min(h, system.event_time[e] - t)
                if not advance(now, t, h, space, marks):
                    how = NO_SOLUTION
                    break
                t += h
                kept = keep(now, kept, t, out)
                turned = starters(now, t, marks, space[3])
                acted = relays(now, h, out[2][kept - 1], timers)
                if turned >= 0 and logged < LOG_ROWS:
                    log[logged, 0], log[logged, 1], log[logged, 2] = t, STARTER_LOG, turned
                    logged, changed = logged + 1, True
                if acted >= 0 and logged < LOG_ROWS:
                    act(now, acted, timers)
                    log[logged, 0], log[logged, 1], log[logged, 2] = t, RELAY_LOG, acted
                    logged, changed = logged + 1, True
                how = ended(now, h, dead)
            if changed and how == FINISHED:
                observe(now, t, marks[0], marks[1])
                if not solve_afresh(now):
                    how = NO_SOLUTION
                    break
                currents(now)
                kept = keep(now, kept, t, out)
        return out, kept, log, logged, how

    return follow


follow = _follower(
    digest_of(dynamics_data, dynamics_machines, dynamics_network, exciters, governor, starting)
)
