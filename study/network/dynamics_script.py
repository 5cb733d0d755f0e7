"""What happens to a plant while it is followed, compiled: events, starters that change over, relays."""

from __future__ import annotations

from typing import Any

import numpy as np

from study.formulas.starting import STAR_DELTA_GAP_S
from study.network.dynamics_data import (
    A_IM,
    A_RE,
    ANGLE,
    B_IM,
    B_RE,
    BY_CONVERTER,
    CHANGE_LOAD,
    CHANGE_S,
    CLOSE_SOURCE,
    DIRECT,
    EVENT_COLUMN,
    EVENT_INDEX,
    EVENT_KIND,
    EVENT_TIME,
    EVENT_VALUE,
    FAULT_OFF,
    FAULT_ON,
    FULL,
    GAP,
    GAP_UNTIL,
    INRUSH,
    INRUSH_AT,
    INRUSH_NODE,
    INRUSH_S,
    INRUSH_Y,
    KEPT_I,
    KEPT_P,
    KEPT_Q,
    KEPT_SPEED,
    KEPT_U,
    METHOD,
    NO_EXCITATION,
    NODE,
    OFF,
    ON,
    OPEN_SOURCE,
    OVERCURRENT,
    OVERFREQUENCY,
    OVERVOLTAGE,
    P_RATED,
    RAMP_S,
    REDUCED,
    RELAY_DELAY,
    RELAY_DOES,
    RELAY_INDEX,
    RELAY_LOOKS,
    RELAY_SETTING,
    RELAY_SOURCE,
    RELAY_TIMER,
    REVERSE_POWER,
    SET_PARAMETER,
    SHED_LOAD,
    SHUNT_B,
    SHUNT_G,
    SINCE,
    SOFT_STARTER,
    STAGE,
    STAR_DELTA,
    START_MOTOR,
    STARTED,
    STOP_MOTOR,
    TRIP_SOURCE,
    TURNING,
    TURNING_RATE,
    UNDERFREQUENCY,
    UNDERVOLTAGE,
    V_D,
    V_IM,
    V_Q,
    V_RE,
    WINDING,
)
from study.network.dynamics_network import compiled

FAULT_ADMITTANCE = 1e5  # a bolted fault, pu of the network's base
CHANGE_SPEED = 0.9  # at which a starter changes over by itself; common practice, no source
STALLED_RATE = 0.01  # pu of speed a second below which it changes over as well
STALLED_AFTER_S = 1.0
SAME_TIME = 1e-9  # s


@compiled
def apply(now: Any, script: Any, e: int) -> None:
    """Let event e happen."""
    event = script.event
    t, kind, k = event[e, EVENT_TIME], int(event[e, EVENT_KIND]), int(event[e, EVENT_INDEX])
    if kind == START_MOTOR:
        now.motor[k, STARTED] = t
        now.motor[k, STAGE] = FULL if now.motor[k, METHOD] in (DIRECT, BY_CONVERTER) else REDUCED
    elif kind == STOP_MOTOR:
        now.motor[k, STAGE] = OFF
    elif kind == OPEN_SOURCE:
        now.source[k, ON] = 0.0
    elif kind == CLOSE_SOURCE:
        close_source(now, k)
    elif kind == CHANGE_LOAD:
        change_load(now.node, script.load, k)
    elif kind == SET_PARAMETER:
        now.source[k, int(event[e, EVENT_COLUMN])] = event[e, EVENT_VALUE]
    elif kind == FAULT_ON:
        now.node[k, SHUNT_G] += FAULT_ADMITTANCE
    elif kind == FAULT_OFF:
        now.node[k, SHUNT_G] -= FAULT_ADMITTANCE
    elif kind == INRUSH:
        script.inrush[k, INRUSH_AT] = t


@compiled
def close_source(now: Any, j: int) -> None:
    """Close a set as an ideal synchroniser does: its own voltage in phase with that of its node."""
    k = int(now.source[j, NODE])
    network = np.arctan2(now.node[k, V_IM], now.node[k, V_RE])
    # Seen from its q axis the set's voltage leads by the angle of (Vq, Vd).
    own = np.arctan2(-now.source[j, V_D], now.source[j, V_Q])
    now.source[j, ANGLE] = network - own
    now.source[j, ON] = 1.0


@compiled
def change_load(node: Any, load: Any, row: int) -> None:
    """Add a change of load."""
    for k in range(load.shape[2]):
        node[k, A_RE] += load[row, 0, k]
        node[k, A_IM] += load[row, 1, k]
        node[k, B_RE] += load[row, 2, k]
        node[k, B_IM] += load[row, 3, k]


@compiled
def observe(now: Any, script: Any, t: float) -> None:
    """Bring what depends on time up to date: time since the starts, inrush."""
    motor, inrush = now.motor, script.inrush
    for m in range(motor.shape[0]):
        motor[m, SINCE] = t - motor[m, STARTED]
    for r in range(inrush.shape[0]):
        now.node[int(inrush[r, INRUSH_NODE]), SHUNT_B] = 0.0
    for r in range(inrush.shape[0]):
        if t >= inrush[r, INRUSH_AT]:
            y = inrush[r, INRUSH_Y] * np.exp(-(t - inrush[r, INRUSH_AT]) / inrush[r, INRUSH_S])
            now.node[int(inrush[r, INRUSH_NODE]), SHUNT_B] -= y


@compiled
def change_over(motor: Any, m: int, t: float) -> bool:
    """Let a starter change over where it is due; True where it did."""
    stage, method = int(motor[m, STAGE]), int(motor[m, METHOD])
    if stage == GAP:
        if t < motor[m, GAP_UNTIL] - SAME_TIME:
            return False
        motor[m, STAGE] = FULL
        return True
    if stage != REDUCED:
        return False
    since = t - motor[m, STARTED]
    if method == SOFT_STARTER:
        due = since >= motor[m, RAMP_S] and motor[m, WINDING] > 1.0 - 1e-6
    elif np.isnan(motor[m, CHANGE_S]):
        stalled = since > STALLED_AFTER_S and motor[m, TURNING_RATE] < STALLED_RATE
        due = motor[m, TURNING] >= CHANGE_SPEED or stalled
    else:
        due = since >= motor[m, CHANGE_S] - SAME_TIME
    if due:
        motor[m, STAGE] = GAP if method == STAR_DELTA else FULL
        motor[m, GAP_UNTIL] = t + STAR_DELTA_GAP_S
    return bool(due)


@compiled
def beyond(relay: Any, r: int, row: Any, p_rated: float) -> bool:
    """Return True where what a relay looks at is beyond its setting."""
    limit, looks = relay[r, RELAY_SETTING], int(relay[r, RELAY_LOOKS])
    over = -np.inf
    if looks == OVERCURRENT:
        over = row[KEPT_I] - limit
    elif looks == UNDERVOLTAGE:
        over = limit - row[KEPT_U]
    elif looks == OVERVOLTAGE:
        over = row[KEPT_U] - limit
    elif looks == UNDERFREQUENCY:
        over = limit - row[KEPT_SPEED]
    elif looks == OVERFREQUENCY:
        over = row[KEPT_SPEED] - limit
    elif looks == REVERSE_POWER:
        over = -row[KEPT_P] - limit * p_rated
    elif looks == NO_EXCITATION:
        over = -row[KEPT_Q] - limit
    return bool(over > 0.0)


@compiled
def run_relay(now: Any, script: Any, r: int, rows: Any, h: float) -> bool:
    """Advance a relay by a step of length h, and let it act where its delay is over; True where it did.

    `rows` [source, ...] is what is kept of the sources at the end of the step.
    """
    relay = script.relay
    j = int(relay[r, RELAY_SOURCE])
    if now.source[j, ON] == 0.0 or np.isinf(relay[r, RELAY_TIMER]):
        return False
    if not beyond(relay, r, rows[j], now.source[j, P_RATED]):
        relay[r, RELAY_TIMER] = 0.0
        return False
    relay[r, RELAY_TIMER] += h
    if relay[r, RELAY_TIMER] < relay[r, RELAY_DELAY] - SAME_TIME:
        return False
    relay[r, RELAY_TIMER] = np.inf
    if relay[r, RELAY_DOES] == TRIP_SOURCE:
        now.source[j, ON] = 0.0
        return True
    change_load(now.node, script.load, int(relay[r, RELAY_INDEX]))
    # Other relays of that stage have nothing left to shed.
    for other in range(relay.shape[0]):
        if relay[other, RELAY_DOES] == SHED_LOAD and relay[other, RELAY_INDEX] == relay[r, RELAY_INDEX]:
            relay[other, RELAY_TIMER] = np.inf
    return True
