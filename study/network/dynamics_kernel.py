"""A plant followed in time, compiled: Runge-Kutta steps of fourth order between what happens.

Compiling takes about half a minute, once for each installation (the result is kept on disk); reading it back
less than a second.
"""

from __future__ import annotations

from collections.abc import Callable
from hashlib import sha256
from pathlib import Path
from typing import Any

import numba
import numpy as np

from study.formulas import exciters, governor, starting
from study.network import dynamics_data, dynamics_machines, dynamics_network, dynamics_script
from study.network.dynamics_data import (
    AGAINST,
    B_FIXED,
    BLACKOUT,
    COLLAPSED,
    DEAD_TIME,
    EVENT_TIME,
    FIELD,
    FINISHED,
    FIRST_STATE,
    I_D,
    I_Q,
    ISLAND_SPEED,
    KEPT_AGAINST,
    KEPT_CEILING,
    KEPT_ENGINE,
    KEPT_FIELD,
    KEPT_I,
    KEPT_LINE_I,
    KEPT_MOTOR_U,
    KEPT_ON,
    KEPT_P,
    KEPT_Q,
    KEPT_SPEED,
    KEPT_TORQUE,
    KEPT_TURNING,
    KEPT_U,
    KIND,
    MACHINE,
    MOTOR_B,
    MOTOR_G,
    MOTOR_NODE,
    NO_SOLUTION,
    ON,
    ORIGIN,
    OWN_MOTOR_V,
    P_RATED,
    RACK,
    RATE,
    RELAY_LOG,
    SHUNT_G,
    SLIP,
    SPEED,
    STARTER_LOG,
    STATES,
    TORQUE,
    TOTAL,
    TURNING,
    TURNING_ORIGIN,
    TURNING_RATE,
    TURNING_TOTAL,
    V_D,
    V_IM,
    V_Q,
    V_RE,
    Y_SCALE,
)
from study.network.dynamics_machines import ceiling, island_speed, move
from study.network.dynamics_network import compiled, solve, solve_afresh
from study.network.dynamics_script import (
    FAULT_ADMITTANCE,
    SAME_TIME,
    apply,
    change_over,
    observe,
    run_relay,
)

LOWEST_SPEED, HIGHEST_SPEED = 0.5, 1.5
DEAD_VOLTAGE, DEAD_FOR_S = 0.15, 1.0


@compiled
def slips(now: Any) -> None:
    """Fill the island's speed and the motors' slips."""
    f = island_speed(now.source)
    now.single[ISLAND_SPEED] = f
    for m in range(now.motor.shape[0]):
        now.motor[m, SLIP] = (f - now.motor[m, TURNING]) / f


@compiled
def keep_source(source: Any, j: int, row: Any) -> None:
    """Fill what is kept of a source."""
    i_d, i_q, vd, vq = source[j, I_D], source[j, I_Q], source[j, V_D], source[j, V_Q]
    row[KEPT_U], row[KEPT_I] = np.sqrt(vd * vd + vq * vq), np.sqrt(i_d * i_d + i_q * i_q)
    row[KEPT_P], row[KEPT_Q] = vd * i_d + vq * i_q, vq * i_d - vd * i_q
    row[KEPT_SPEED], row[KEPT_ON] = source[j, SPEED], source[j, ON]
    if source[j, KIND] == MACHINE:
        row[KEPT_CEILING], row[KEPT_FIELD] = ceiling(source, j), source[j, FIELD]
        row[KEPT_ENGINE] = source[j, RACK]
    else:
        row[KEPT_CEILING], row[KEPT_FIELD] = np.nan, np.nan
        row[KEPT_ENGINE] = row[KEPT_P] / source[j, P_RATED]


@compiled
def keep(now: Any, kept: Any, n: int, t: float) -> None:
    """Write one row of results."""
    node, motor = now.node, now.motor
    kept.time[n] = t
    for k in range(node.shape[0]):
        kept.v[n, k, 0], kept.v[n, k, 1] = node[k, V_RE], node[k, V_IM]
    for j in range(now.source.shape[0]):
        keep_source(now.source, j, kept.source[n, j])
    for m in range(motor.shape[0]):
        row, k = kept.motor[n, m], int(motor[m, MOTOR_NODE])
        u = np.sqrt(node[k, V_RE] * node[k, V_RE] + node[k, V_IM] * node[k, V_IM])
        g, b = motor[m, MOTOR_G], motor[m, MOTOR_B] + motor[m, B_FIXED]
        row[KEPT_TURNING], row[KEPT_TORQUE], row[KEPT_AGAINST] = (
            motor[m, TURNING],
            motor[m, TORQUE],
            motor[m, AGAINST],
        )
        row[KEPT_MOTOR_U] = u * motor[m, OWN_MOTOR_V]
        row[KEPT_LINE_I] = np.sqrt(g * g + b * b) * u * motor[m, OWN_MOTOR_V] / motor[m, Y_SCALE]


@compiled
def step_to(now: Any, ahead: float) -> None:
    """Set the states to their origin and their rates over a time ahead."""
    source, motor = now.source, now.motor
    for j in range(source.shape[0]):
        for x in range(FIRST_STATE, FIRST_STATE + STATES):
            source[j, x] = source[j, x + ORIGIN] + ahead * source[j, x + RATE]
    for m in range(motor.shape[0]):
        motor[m, TURNING] = motor[m, TURNING_ORIGIN] + ahead * motor[m, TURNING_RATE]


@compiled
def gather(now: Any, weight: float) -> None:
    """Add the rates to their weighted sums."""
    source, motor = now.source, now.motor
    for j in range(source.shape[0]):
        for x in range(FIRST_STATE, FIRST_STATE + STATES):
            source[j, x + TOTAL] += weight * source[j, x + RATE]
    for m in range(motor.shape[0]):
        motor[m, TURNING_TOTAL] += weight * motor[m, TURNING_RATE]


@compiled
def take_total(now: Any) -> None:
    """Set the states to their weighted sums: the end of a step."""
    source, motor = now.source, now.motor
    for j in range(source.shape[0]):
        for x in range(FIRST_STATE, FIRST_STATE + STATES):
            source[j, x] = source[j, x + TOTAL]
    for m in range(motor.shape[0]):
        motor[m, TURNING] = max(motor[m, TURNING_TOTAL], 0.0)


@compiled
def advance(now: Any, script: Any, t: float, h: float) -> bool:
    """Make one Runge-Kutta step of length h; voltages and currents are those at its end."""
    source, motor = now.source, now.motor
    for j in range(source.shape[0]):
        for x in range(FIRST_STATE, FIRST_STATE + STATES):
            source[j, x + ORIGIN], source[j, x + TOTAL] = source[j, x], source[j, x]
    for m in range(motor.shape[0]):
        motor[m, TURNING_ORIGIN], motor[m, TURNING_TOTAL] = motor[m, TURNING], motor[m, TURNING]
    for part in range(5):
        if part == 4:
            take_total(now)
        elif part > 0:
            step_to(now, h if part == 3 else 0.5 * h)
        if part > 0:
            observe(now, script, t + (h if part >= 3 else 0.5 * h))
            slips(now)
            if not solve(now):
                return False
        if part < 4:
            move(now)
            gather(now, h / 6.0 if part in (0, 3) else h / 3.0)
    return True


@compiled
def ended(now: Any, h: float) -> int:
    """Return how a run has ended, FINISHED where it goes on."""
    source, node = now.source, now.node
    alive = 0
    for j in range(source.shape[0]):
        if source[j, ON] != 0.0:
            alive += 1
            if not LOWEST_SPEED < source[j, SPEED] < HIGHEST_SPEED:
                return COLLAPSED
    if alive == 0:
        return BLACKOUT
    highest, fault = 0.0, False
    for k in range(node.shape[0]):
        highest = max(highest, node[k, V_RE] ** 2 + node[k, V_IM] ** 2)
        fault = fault or node[k, SHUNT_G] > 0.5 * FAULT_ADMITTANCE
    dead = highest < DEAD_VOLTAGE**2 and not fault
    now.single[DEAD_TIME] = now.single[DEAD_TIME] + h if dead else 0.0
    return COLLAPSED if now.single[DEAD_TIME] > DEAD_FOR_S else FINISHED


@compiled
def react(now: Any, script: Any, kept: Any, marks: Any) -> Any:
    """Let starters and relays react to a step (time, length, its row, rows of log); return rows of log."""
    t, h, n, logged = marks
    for m in range(now.motor.shape[0]):
        if change_over(now.motor, m, t) and logged < kept.log.shape[0]:
            kept.log[logged, 0], kept.log[logged, 1], kept.log[logged, 2] = t, STARTER_LOG, m
            logged += 1
    for r in range(script.relay.shape[0]):
        if run_relay(now, script, r, kept.source[n], h) and logged < kept.log.shape[0]:
            kept.log[logged, 0], kept.log[logged, 1], kept.log[logged, 2] = t, RELAY_LOG, r
            logged += 1
    return logged


@compiled
def let_happen(now: Any, script: Any, t: float, first: int) -> int:
    """Let the events that are due happen; return the first that is not."""
    e = first
    while e < script.event.shape[0] and script.event[e, EVENT_TIME] <= t + SAME_TIME:
        apply(now, script, e)
        e += 1
    return e


@compiled
def settle(now: Any, script: Any, t: float) -> bool:
    """Bring a plant up to date after a sudden change."""
    observe(now, script, t)
    slips(now)
    if not solve_afresh(now):
        return False
    # The rates go with the point, so that starters and results see those of this moment.
    move(now)
    return True


def digest_of(*modules: Any) -> str:
    """Return a digest of modules' sources: numba's cache looks at the file of the cached function alone."""
    text = b"".join(Path(str(m.__file__)).read_bytes() for m in modules)
    return sha256(text).hexdigest()


def _follower(digest: str) -> Callable[..., Any]:
    """Return the compiled run; the digest, being part of it, parts it from runs of other sources."""

    @numba.njit(cache=True, nogil=True, error_model="numpy", fastmath={"contract", "arcp"})
    def follow(now: Any, script: Any, kept: Any, timing: Any) -> Any:
        until, step = timing
        t, e, n, logged = 0.0, 0, -1, 0
        how, changed = FINISHED if len(digest) > 0 else NO_SOLUTION, True
        while how == FINISHED and n < kept.time.shape[0] - 3:
            if changed:
                how = FINISHED if settle(now, script, t) else NO_SOLUTION
                n += 1
                keep(now, kept, n, t)
            first = e
            e = let_happen(now, script, t, first)
            changed = e > first
            if changed:
                continue
            if t >= until - SAME_TIME:
                break
            h = min(step, until - t)
            if e < script.event.shape[0]:
                h = min(h, script.event[e, EVENT_TIME] - t)
            if not advance(now, script, t, h):
                how = NO_SOLUTION
                break
            t, n = t + h, n + 1
            keep(now, kept, n, t)
            before = logged
            logged = react(now, script, kept, (t, h, n, logged))
            changed, how = logged > before, ended(now, h)
        return n + 1, logged, how

    return follow


follow = _follower(
    digest_of(
        dynamics_data, dynamics_machines, dynamics_network, dynamics_script, exciters, governor, starting
    )
)
