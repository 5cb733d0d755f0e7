"""How sources and motors move, compiled: the derivatives of their states at the voltages of an instant.

Machine of subtransient order: Sauer and Pai, *Power System Dynamics and Stability*, with saturation added to
the field equation and speed as a factor on the voltages; from memory. TD01 and TD02 are those of the
windings, see `formulas.winding_times`. Regulators: `formulas.exciters`, governors: `formulas.governor`,
motors: `formulas.induction` and `formulas.starting`.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from study.formulas.exciters import DERIVATIVE_FILTER_S, KVAR_TRIM_S, TRANSDUCER_S
from study.formulas.governor import ENGINE_DRAG, POWER_FILTER_S, POWER_TRIM_S, TURBOCHARGER_S
from study.formulas.starting import FAN_BREAKAWAY, HYPERBOLIC_LARGEST
from study.network.dynamics_data import (
    AGAINST,
    AIR_GAP,
    ANGLE,
    AVR_D,
    AVR_I,
    AVR_P,
    BY_CONVERTER,
    BY_DROOP,
    CONSTANT_FIELD,
    CONVERTER,
    COSINE,
    CROSS_CURRENT,
    DAMPER_D,
    DAMPER_Q,
    DEAD_S,
    DELAY,
    DROOP,
    ENGINE,
    EXCITER_S,
    F_REF,
    FAN,
    FIELD,
    FIELD_ON,
    FILTERED,
    FIRST_STATE,
    FLUX,
    GOV_D,
    GOV_FILTER_S,
    GOV_FILTERED,
    GOV_I,
    GOV_INTEGRAL,
    GOV_P,
    GOVERNOR,
    GROUP,
    HYPERBOLIC,
    I_D,
    I_IM,
    I_MAX,
    I_Q,
    I_RE,
    INTEGRAL,
    ISLAND_SPEED,
    KIND,
    KNEE,
    KVAR,
    KVAR_TRIM,
    LAW,
    LOAD,
    LOAD_SHARING,
    MACHINE,
    MEASURED,
    METHOD,
    MOTOR_2H,
    MOTOR_NODE,
    OFF,
    OMEGA,
    ON,
    OWN_MOTOR_V,
    OWN_V,
    P_RATED,
    P_SET,
    POWER,
    POWER_TRIM,
    Q_PER_P,
    Q_SET,
    R_STATOR,
    RA,
    RACK,
    RACK_S,
    RAMP_S,
    RATE,
    RATED_FIELD,
    RATING,
    REACTIVE_CURRENT,
    REGULATOR,
    SAT_A,
    SAT_B,
    SAT_KIND,
    SET_POWER,
    SHARED,
    SHORE,
    SINE,
    SLIP,
    SLIP_RATED,
    SPEED,
    STAGE,
    STATES,
    STEP,
    SUPPLY_ALONE,
    SUPPLY_C,
    SUPPLY_I,
    SUPPLY_V,
    TD01,
    TD02,
    TORQUE,
    TORQUE_FACTOR,
    TQ02,
    TURBO,
    TURNING,
    TURNING_RATE,
    TWO_H,
    V_D,
    V_IM,
    V_Q,
    V_RE,
    V_REF,
    WINDING,
    XC,
    XD,
    XD1,
    XD2,
    XL,
    XQ,
    XQ2,
)
from study.network.dynamics_network import compiled, motor_branch

OVERLOAD = 1.10  # largest rack, of the engine's rated power; IACS UR M51, from memory
LEAST_TRIM_DROOP = 0.03
SHARING_DROOP = 0.04  # gain of the load-sharing lines, as that of a droop; common practice, no source
CONVERTER_S = 0.02  # of a grid-forming converter's voltage control; common practice, no source
CONVERTER_SPEED_S = 0.01
LIMITER_X = 0.15  # a converter's current limiter lowers its e.m.f. by this times the excess of current


@compiled
def saturation(source: Any, j: int) -> Any:
    """Return the field spent on saturation, quadratic (1) or exponential (2)."""
    e = source[j, FLUX]
    if source[j, SAT_KIND] == 1.0:
        over = max(e - source[j, SAT_A], 0.0)
        return source[j, SAT_B] * over * over
    if source[j, SAT_KIND] == 2.0:
        return source[j, SAT_A] * max(e, 0.0) ** (source[j, SAT_B] + 1.0)
    return 0.0


@compiled
def island_speed(source: Any) -> Any:
    """Return the mean speed of the sets on the board by stored energy, or what holds the frequency else."""
    total, weight = 0.0, 0.0
    for j in range(source.shape[0]):
        if source[j, ON] != 0.0 and source[j, KIND] == MACHINE:
            h = source[j, TWO_H] * source[j, RATING]
            total += h * source[j, SPEED]
            weight += h
    if weight > 0.0:
        return total / weight
    for j in range(source.shape[0]):
        if source[j, ON] != 0.0:
            return source[j, F_REF] if source[j, KIND] == SHORE else source[j, SPEED]
    return source[0, SPEED] if source.shape[0] else 1.0


@compiled
def ceiling(source: Any, j: int) -> Any:
    """Return the most field that the supply gives: constant + |Kv V + jKi I|."""
    real = source[j, SUPPLY_V] * source[j, V_D] - source[j, SUPPLY_I] * source[j, I_Q]
    imaginary = source[j, SUPPLY_V] * source[j, V_Q] + source[j, SUPPLY_I] * source[j, I_D]
    return source[j, FIELD_ON] * (source[j, SUPPLY_C] + np.sqrt(real * real + imaginary * imaginary))


@compiled
def others_current(source: Any, j: int) -> Any:
    """Return the mean current of the other sets of a cross-current group in the axes of set j.

    Per unit and weighted by rating, of those that are on the board: the current transformer of a set off it
    is short-circuited. A set alone has none.
    """
    re, im, weight = 0.0, 0.0, 0.0
    for k in range(source.shape[0]):
        if k != j and source[k, ON] != 0.0 and source[k, GROUP] == source[j, GROUP]:
            re += source[k, I_RE] / source[k, OWN_V]
            im += source[k, I_IM] / source[k, OWN_V]
            weight += source[k, RATING]
    if weight == 0.0 or source[j, ON] == 0.0:
        return 0.0, 0.0, False
    s, c = source[j, SINE] / weight, source[j, COSINE] / weight
    return re * s - im * c, re * c + im * s, True


@compiled
def seen_voltage(source: Any, j: int) -> Any:
    """Return the voltage that a regulator compares with its set-point, load compensation included."""
    i_d, i_q, vd, vq, xc = (
        source[j, I_D],
        source[j, I_Q],
        source[j, V_D],
        source[j, V_Q],
        source[j, XC],
    )
    if source[j, REGULATOR] == REACTIVE_CURRENT:
        v = np.sqrt(vd * vd + vq * vq)
        return v + xc * (vq * i_d - vd * i_q) / max(v, 1e-6)
    if source[j, REGULATOR] == CROSS_CURRENT:
        other_d, other_q, found = others_current(source, j)
        i_d, i_q = (i_d - other_d, i_q - other_q) if found else (0.0, 0.0)
    real, imaginary = vd - xc * i_q, vq + xc * i_d
    return np.sqrt(real * real + imaginary * imaginary)


@compiled
def excite(source: Any, j: int) -> None:
    """Fill the rates of field and regulator."""
    most, way = ceiling(source, j), int(source[j, REGULATOR])
    field, lag = source[j, FIELD], source[j, EXCITER_S]
    if way == CONSTANT_FIELD:
        source[j, FIELD + RATE] = (source[j, SUPPLY_C] * source[j, FIELD_ON] - field) / lag
        return
    if way == SUPPLY_ALONE:
        source[j, FIELD + RATE] = (most - field) / lag
        return
    measured = source[j, MEASURED]
    source[j, MEASURED + RATE] = (seen_voltage(source, j) - measured) / TRANSDUCER_S
    reference = source[j, V_REF] + source[j, KVAR_TRIM]
    if source[j, SPEED] < source[j, KNEE]:
        reference *= source[j, SPEED] / source[j, KNEE]
    error = reference - measured
    rate = (error - source[j, FILTERED]) / DERIVATIVE_FILTER_S
    by_error = source[j, AVR_P] * error + source[j, INTEGRAL] + source[j, AVR_D] * rate
    asked = source[j, RATED_FIELD] * by_error
    source[j, FILTERED + RATE] = rate
    held = (asked > most and error > 0.0) or (asked < 0.0 and error < 0.0)
    source[j, INTEGRAL + RATE] = 0.0 if held else source[j, AVR_I] * error
    source[j, FIELD + RATE] = (min(max(asked, 0.0), most) - field) / lag
    if way == KVAR and source[j, ON] != 0.0:
        active = source[j, V_D] * source[j, I_D] + source[j, V_Q] * source[j, I_Q]
        reactive = source[j, V_Q] * source[j, I_D] - source[j, V_D] * source[j, I_Q]
        wanted = source[j, Q_SET] + source[j, Q_PER_P] * active
        source[j, KVAR_TRIM + RATE] = (wanted - reactive) / KVAR_TRIM_S


@compiled
def govern(source: Any, j: int, active: float, shared: float) -> None:
    """Fill the rates of governor and rack; `active` in pu of rated kVA, `shared` what sharing lines carry."""
    way, power = int(source[j, GOVERNOR]), source[j, POWER]
    source[j, POWER + RATE] = (active / source[j, P_RATED] - power) / POWER_FILTER_S
    error = source[j, F_REF] - source[j, SPEED]
    if way == BY_DROOP:
        error -= source[j, DROOP] * power
    elif way == SET_POWER:
        error += source[j, POWER_TRIM] - source[j, DROOP] * power
        trim = max(source[j, DROOP], LEAST_TRIM_DROOP) * (source[j, P_SET] - power)
        source[j, POWER_TRIM + RATE] = trim / POWER_TRIM_S
    elif way == LOAD_SHARING:
        error += SHARING_DROOP * (shared - power)
    rate = (error - source[j, GOV_FILTERED]) / source[j, GOV_FILTER_S]
    asked = source[j, GOV_P] * error + source[j, GOV_INTEGRAL] + source[j, GOV_D] * rate
    engine = source[j, ENGINE]
    most = min(OVERLOAD * engine, source[j, TURBO] + source[j, STEP] * engine)
    source[j, GOV_FILTERED + RATE] = rate
    least = -ENGINE_DRAG * engine
    held = (asked > most and error > 0.0) or (asked < least and error < 0.0)
    source[j, GOV_INTEGRAL + RATE] = 0.0 if held else source[j, GOV_I] * error
    rack = min(max(asked, least), most)
    if source[j, DEAD_S] > 0.0:
        source[j, DELAY + RATE] = (rack - source[j, DELAY]) / (0.5 * source[j, DEAD_S])
        rack = 2.0 * source[j, DELAY] - rack
    source[j, RACK + RATE] = (rack - source[j, RACK]) / source[j, RACK_S]
    source[j, TURBO + RATE] = (source[j, RACK] - source[j, TURBO]) / TURBOCHARGER_S


@compiled
def move_machine(now: Any, j: int) -> None:
    """Fill the rates of a set."""
    source = now.source
    i_d, i_q = source[j, I_D], source[j, I_Q]
    active = source[j, V_D] * i_d + source[j, V_Q] * i_q
    flux, damper = source[j, FLUX], source[j, DAMPER_D]
    lead = source[j, XD1] - source[j, XL]
    linkage = (source[j, XD1] - source[j, XD2]) / (lead * lead) * (damper + lead * i_d - flux)
    demagnetised = (source[j, XD] - source[j, XD1]) * (i_d - linkage)
    spent = flux + demagnetised + saturation(source, j)
    source[j, FLUX + RATE] = (source[j, FIELD] - spent) / source[j, TD01]
    source[j, DAMPER_D + RATE] = (flux - lead * i_d - damper) / source[j, TD02]
    across = (source[j, XQ] - source[j, XQ2]) * i_q
    source[j, DAMPER_Q + RATE] = (across - source[j, DAMPER_Q]) / source[j, TQ02]
    torque = (active + source[j, RA] * (i_d * i_d + i_q * i_q)) / source[j, SPEED]
    source[j, SPEED + RATE] = (source[j, RACK] * source[j, P_RATED] - torque) / source[j, TWO_H]
    excite(source, j)
    govern(source, j, active, now.single[SHARED])


@compiled
def move_converter(source: Any, j: int) -> None:
    """Fill the rates of a grid-forming converter: e.m.f. by voltage or current, speed by droop."""
    i_d, i_q, vd, vq = source[j, I_D], source[j, I_Q], source[j, V_D], source[j, V_Q]
    seen = np.hypot(vd - source[j, XC] * i_q, vq + source[j, XC] * i_d)
    room = LIMITER_X * (source[j, I_MAX] - np.hypot(i_d, i_q))
    source[j, FLUX + RATE] = min(source[j, V_REF] - seen, room) / CONVERTER_S
    power = (vd * i_d + vq * i_q) / source[j, P_RATED]
    source[j, POWER + RATE] = (power - source[j, POWER]) / CONVERTER_S
    aim = source[j, F_REF] - source[j, DROOP] * source[j, POWER]
    if source[j, GOVERNOR] == SET_POWER:
        aim += source[j, POWER_TRIM]
        trim = max(source[j, DROOP], LEAST_TRIM_DROOP) * (source[j, P_SET] - source[j, POWER])
        source[j, POWER_TRIM + RATE] = trim / POWER_TRIM_S
    source[j, SPEED + RATE] = (aim - source[j, SPEED]) / CONVERTER_SPEED_S


@compiled
def shared_power(source: Any) -> Any:
    """Return what the load-sharing lines carry: mean kW of the sets on them over their rated kW."""
    total, weight = 0.0, 0.0
    for j in range(source.shape[0]):
        if source[j, GOVERNOR] == LOAD_SHARING and source[j, ON] != 0.0:
            rated = source[j, P_RATED] * source[j, RATING]
            total += source[j, POWER] * rated
            weight += rated
    return total / weight if weight > 0.0 else 0.0


@compiled
def fill_torques(motor: Any, node: Any, m: int, f: float) -> None:
    """Fill the torque of a motor and that of its load, over rated torque; `f` is the island's speed."""
    n = motor[m, TURNING]
    against = 1.0
    if motor[m, LAW] == FAN:
        against = FAN_BREAKAWAY + (1.0 - FAN_BREAKAWAY) * n * n
    elif motor[m, LAW] == HYPERBOLIC:
        against = 1.0 / max(n, 1.0 / HYPERBOLIC_LARGEST)
    motor[m, AGAINST], motor[m, TORQUE] = against * motor[m, LOAD], 0.0
    if motor[m, WINDING] == 0.0:
        return
    k = int(motor[m, MOTOR_NODE])
    u2 = node[k, V_RE] * node[k, V_RE] + node[k, V_IM] * node[k, V_IM]
    own = motor[m, WINDING] * motor[m, OWN_MOTOR_V]
    r, x = motor_branch(motor, m)
    with_r = motor[m, R_STATOR] + r
    torque = r / (with_r * with_r + x * x) * u2 * own * own * motor[m, AIR_GAP] / f
    slip, rated = motor[m, SLIP], motor[m, SLIP_RATED]
    w = min(max((slip - rated) / (1.0 - rated), 0.0), 1.0)
    motor[m, TORQUE] = torque * (1.0 + w * (motor[m, TORQUE_FACTOR] - 1.0))


@compiled
def move_motors(motor: Any, node: Any, f: float) -> None:
    """Fill torques and rates of all motors."""
    for m in range(motor.shape[0]):
        motor[m, TURNING_RATE] = 0.0
        if motor[m, METHOD] == BY_CONVERTER:
            ramping = motor[m, STAGE] != OFF and motor[m, TURNING] < 1.0
            motor[m, TURNING_RATE] = 1.0 / motor[m, RAMP_S] if ramping else 0.0
            continue
        fill_torques(motor, node, m, f)
        if motor[m, STAGE] == OFF:
            continue
        rate = (motor[m, TORQUE] - motor[m, AGAINST]) / motor[m, MOTOR_2H]
        motor[m, TURNING_RATE] = rate if motor[m, TURNING] > 0.0 else max(rate, 0.0)


@compiled
def move(now: Any) -> None:
    """Fill the rates of all states at the voltages and currents found."""
    source, f = now.source, now.single[ISLAND_SPEED]
    now.single[SHARED] = shared_power(source)
    for j in range(source.shape[0]):
        for state in range(FIRST_STATE, FIRST_STATE + STATES):
            source[j, state + RATE] = 0.0
        speed = source[j, SPEED]
        if source[j, KIND] == MACHINE:
            move_machine(now, j)
        elif source[j, KIND] == CONVERTER:
            move_converter(source, j)
        else:
            speed = source[j, F_REF]
        source[j, ANGLE + RATE] = now.single[OMEGA] * (speed - f)
    move_motors(now.motor, now.node, f)
