"""How sources and motors move, compiled: the derivatives of their states at the voltages of an instant.

Machine of subtransient order: Sauer and Pai, *Power System Dynamics and Stability*, with saturation added to
the field equation and speed as a factor on the voltages; from memory. Regulators: `formulas.exciters`,
governors: `formulas.governor`, motors: `formulas.induction` and `formulas.starting`.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from study.formulas.exciters import DERIVATIVE_FILTER_S, KVAR_TRIM_S, TRANSDUCER_S
from study.formulas.governor import POWER_FILTER_S, POWER_TRIM_S, TURBOCHARGER_S
from study.formulas.starting import FAN_BREAKAWAY, HYPERBOLIC_LARGEST
from study.network.dynamics_data import (
    AIR_GAP,
    ANGLE,
    AVR_D,
    AVR_I,
    AVR_P,
    BY_CONVERTER,
    BY_DROOP,
    CONSTANT_FIELD,
    CONVERTER,
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
    FLUX,
    FULL,
    GOV_D,
    GOV_FILTER_S,
    GOV_FILTERED,
    GOV_I,
    GOV_INTEGRAL,
    GOV_P,
    HYPERBOLIC,
    I_MAX,
    INTEGRAL,
    KNEE,
    KVAR,
    KVAR_TRIM,
    LOAD,
    LOAD_SHARING,
    MACHINE,
    MEASURED,
    MOTOR_2H,
    OFF,
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
    RATED_FIELD,
    RATING,
    REACTIVE_CURRENT,
    REDUCED,
    SAT_A,
    SAT_B,
    SAT_KIND,
    SET_POWER,
    SHORE,
    SLIP_RATED,
    SPEED,
    STEP,
    SUPPLY_ALONE,
    SUPPLY_C,
    SUPPLY_I,
    SUPPLY_V,
    TD01,
    TD02,
    TORQUE_FACTOR,
    TQ02,
    TURBO,
    TWO_H,
    V_REF,
    XC,
    XD,
    XD1,
    XD2,
    XL,
    XQ,
    XQ2,
)
from study.network.dynamics_network import (
    axis_currents,
    compiled,
    motor_admittance,
    motor_branch,
    subtransient,
)

OVERLOAD = 1.10  # largest rack, of the engine's rated power; IACS UR M51, from memory
LEAST_TRIM_DROOP = 0.03
SHARING_DROOP = 0.04  # gain of the load-sharing lines, as that of a droop; common practice, no source
CONVERTER_S = 0.02  # of a grid-forming converter's voltage control; common practice, no source
CONVERTER_SPEED_S = 0.01
LIMITER_X = 0.15  # a converter's current limiter lowers its e.m.f. by this times the excess of current
RUNNING_SPEED = 0.02


@compiled
def terminal(now: Any, j: int) -> Any:
    """Return Id, Iq, Vd, Vq of a machine, on the board or off it."""
    x, p = now.source[j], now.par[j]
    if p[ON] == 0.0:
        ed, eq = subtransient(x, p)
        return 0.0, 0.0, ed, eq
    return axis_currents(x, p, now.v[now.system.node[j]])


@compiled
def saturation(e: float, p: Any) -> float:
    """Return the field spent on saturation, quadratic (1) or exponential (2)."""
    if p[SAT_KIND] == 1.0:
        over = max(e - p[SAT_A], 0.0)
        return p[SAT_B] * over * over
    if p[SAT_KIND] == 2.0:
        return p[SAT_A] * max(e, 0.0) ** (p[SAT_B] + 1.0)
    return 0.0


@compiled
def island_speed(now: Any) -> float:
    """Return the mean speed of the sets on the board by stored energy, or what holds the frequency else."""
    total, weight = 0.0, 0.0
    for j in range(len(now.system.node)):
        p = now.par[j]
        if p[ON] != 0.0 and now.system.kind[j] == MACHINE:
            h = p[TWO_H] * p[RATING]
            total += h * now.source[j, SPEED]
            weight += h
    if weight > 0.0:
        return total / weight
    for j in range(len(now.system.node)):
        if now.par[j, ON] != 0.0:
            return now.par[j, F_REF] if now.system.kind[j] == SHORE else now.source[j, SPEED]
    return now.source[0, SPEED] if len(now.source) else 1.0


@compiled
def ceiling(p: Any, axes: Any) -> float:
    """Return the most field that the supply gives: constant + |Kv V + jKi I|."""
    i_d, i_q, vd, vq = axes
    real = p[SUPPLY_V] * vd - p[SUPPLY_I] * i_q
    imaginary = p[SUPPLY_V] * vq + p[SUPPLY_I] * i_d
    return p[FIELD_ON] * (p[SUPPLY_C] + np.sqrt(real * real + imaginary * imaginary))


@compiled
def seen_voltage(now: Any, j: int, axes: Any) -> float:
    """Return the voltage that a regulator compares with its set-point, load compensation included."""
    i_d, i_q, vd, vq = axes
    p = now.par[j]
    if now.system.regulator[j] == REACTIVE_CURRENT:
        v = np.sqrt(vd * vd + vq * vq)
        return v + p[XC] * (vq * i_d - vd * i_q) / max(v, 1e-6)
    real, imaginary = vd - p[XC] * i_q, vq + p[XC] * i_d
    cross = 0j
    for k in range(len(now.current)):
        cross += complex(0.0, now.system.cross[j, k]) * now.current[k]
    if cross != 0j:
        x = now.source[j]
        turned = cross * p[OWN_V] * complex(np.sin(x[ANGLE]), np.cos(x[ANGLE]))
        real, imaginary = real + turned.real, imaginary + turned.imag
    return np.sqrt(real * real + imaginary * imaginary)


@compiled
def excite(now: Any, j: int, axes: Any, d: Any) -> None:
    """Fill the derivatives of field and regulator."""
    x, p = now.source[j], now.par[j]
    most = ceiling(p, axes)
    if now.system.regulator[j] == CONSTANT_FIELD:
        d[FIELD] = (p[SUPPLY_C] * p[FIELD_ON] - x[FIELD]) / p[EXCITER_S]
        return
    if now.system.regulator[j] == SUPPLY_ALONE:
        d[FIELD] = (most - x[FIELD]) / p[EXCITER_S]
        return
    d[MEASURED] = (seen_voltage(now, j, axes) - x[MEASURED]) / TRANSDUCER_S
    reference = p[V_REF] + x[KVAR_TRIM]
    if x[SPEED] < p[KNEE]:
        reference *= x[SPEED] / p[KNEE]
    error = reference - x[MEASURED]
    rate = (error - x[FILTERED]) / DERIVATIVE_FILTER_S
    asked = p[RATED_FIELD] * (p[AVR_P] * error + x[INTEGRAL] + p[AVR_D] * rate)
    d[FILTERED] = rate
    held = (asked > most and error > 0.0) or (asked < 0.0 and error < 0.0)
    d[INTEGRAL] = 0.0 if held else p[AVR_I] * error
    d[FIELD] = (min(max(asked, 0.0), most) - x[FIELD]) / p[EXCITER_S]
    if now.system.regulator[j] == KVAR and p[ON] != 0.0:
        i_d, i_q, vd, vq = axes
        active, reactive = vd * i_d + vq * i_q, vq * i_d - vd * i_q
        d[KVAR_TRIM] = (p[Q_SET] + p[Q_PER_P] * active - reactive) / KVAR_TRIM_S


@compiled
def govern(now: Any, j: int, active: float, d: Any) -> None:
    """Fill the derivatives of governor and rack; `active` in pu of rated kVA."""
    x, p = now.source[j], now.par[j]
    way = now.system.governor[j]
    power = x[POWER]
    d[POWER] = (active / p[P_RATED] - power) / POWER_FILTER_S
    error = p[F_REF] - x[SPEED]
    if way == BY_DROOP:
        error -= p[DROOP] * power
    elif way == SET_POWER:
        error += x[POWER_TRIM] - p[DROOP] * power
        d[POWER_TRIM] = max(p[DROOP], LEAST_TRIM_DROOP) * (p[P_SET] - power) / POWER_TRIM_S
    elif way == LOAD_SHARING:
        error += SHARING_DROOP * (now.shared[0] - power)
    rate = (error - x[GOV_FILTERED]) / p[GOV_FILTER_S]
    asked = p[GOV_P] * error + x[GOV_INTEGRAL] + p[GOV_D] * rate
    most = min(OVERLOAD * p[ENGINE], x[TURBO] + p[STEP] * p[ENGINE])
    d[GOV_FILTERED] = rate
    held = (asked > most and error > 0.0) or (asked < 0.0 and error < 0.0)
    d[GOV_INTEGRAL] = 0.0 if held else p[GOV_I] * error
    rack = min(max(asked, 0.0), most)
    if p[DEAD_S] > 0.0:
        d[DELAY] = (rack - x[DELAY]) / (0.5 * p[DEAD_S])
        rack = 2.0 * x[DELAY] - rack
    d[RACK] = (rack - x[RACK]) / p[RACK_S]
    d[TURBO] = (x[RACK] - x[TURBO]) / TURBOCHARGER_S


@compiled
def move_machine(now: Any, j: int, f: float, d: Any) -> None:
    """Fill the derivatives of a set; `f` is the speed of the frame."""
    x, p = now.source[j], now.par[j]
    axes = terminal(now, j)
    i_d, i_q, vd, vq = axes
    active = vd * i_d + vq * i_q
    lead = p[XD1] - p[XL]
    linkage = (p[XD1] - p[XD2]) / (lead * lead) * (x[DAMPER_D] + lead * i_d - x[FLUX])
    demagnetised = (p[XD] - p[XD1]) * (i_d - linkage)
    d[FLUX] = (x[FIELD] - x[FLUX] - demagnetised - saturation(x[FLUX], p)) / p[TD01]
    d[DAMPER_D] = (x[FLUX] - lead * i_d - x[DAMPER_D]) / p[TD02]
    d[DAMPER_Q] = ((p[XQ] - p[XQ2]) * i_q - x[DAMPER_Q]) / p[TQ02]
    torque = (active + p[RA] * (i_d * i_d + i_q * i_q)) / x[SPEED]
    d[SPEED] = (x[RACK] * p[P_RATED] - torque) / p[TWO_H]
    d[ANGLE] = now.system.omega * (x[SPEED] - f)
    excite(now, j, axes, d)
    govern(now, j, active, d)


@compiled
def move_converter(now: Any, j: int, f: float, d: Any) -> None:
    """Fill the derivatives of a grid-forming converter: e.m.f. by voltage or current, angle by droop."""
    x, p = now.source[j], now.par[j]
    v = now.v[now.system.node[j]] * p[OWN_V]
    i = now.current[j] / (p[RATING] * p[OWN_V])
    seen = abs(v + complex(0.0, p[XC]) * i)
    d[FLUX] = min(p[V_REF] - seen, LIMITER_X * (p[I_MAX] - abs(i))) / CONVERTER_S
    power = (v * np.conj(i)).real / p[P_RATED]
    d[POWER] = (power - x[POWER]) / CONVERTER_S
    aim = p[F_REF] - p[DROOP] * x[POWER]
    if now.system.governor[j] == SET_POWER:
        aim += x[POWER_TRIM]
        d[POWER_TRIM] = max(p[DROOP], LEAST_TRIM_DROOP) * (p[P_SET] - x[POWER]) / POWER_TRIM_S
    d[SPEED] = (aim - x[SPEED]) / CONVERTER_SPEED_S
    d[ANGLE] = now.system.omega * (x[SPEED] - f)


@compiled
def share_power(now: Any) -> None:
    """Set what the load-sharing lines carry: the mean kW of the sets on them over their rated kW."""
    total, weight = 0.0, 0.0
    for j in range(len(now.system.node)):
        p = now.par[j]
        if now.system.governor[j] == LOAD_SHARING and p[ON] != 0.0:
            total += now.source[j, POWER] * p[P_RATED] * p[RATING]
            weight += p[P_RATED] * p[RATING]
    now.shared[0] = total / weight if weight > 0.0 else 0.0


@compiled
def motor_torques(now: Any, m: int, f: float) -> Any:
    """Return the torque of a motor and that of its load, over rated torque."""
    par = now.system.motor[m]
    n = now.speed[m]
    law = now.system.law[m]
    against = 1.0
    if law == FAN:
        against = FAN_BREAKAWAY + (1.0 - FAN_BREAKAWAY) * n * n
    elif law == HYPERBOLIC:
        against = 1.0 / max(n, 1.0 / HYPERBOLIC_LARGEST)
    against *= par[LOAD]
    if now.stage[m] not in (REDUCED, FULL) or now.system.method[m] == BY_CONVERTER:
        return 0.0, against
    v_own = abs(now.v[now.system.motor_node[m]]) * par[OWN_MOTOR_V]
    _, k = motor_admittance(now, m, v_own)
    slip = now.slip[m]
    r, x = motor_branch(slip, par)
    v = v_own * k
    torque = r / ((par[R_STATOR] + r) ** 2 + x * x) * v * v * par[AIR_GAP] / f
    w = min(max((slip - par[SLIP_RATED]) / (1.0 - par[SLIP_RATED]), 0.0), 1.0)
    return torque * (1.0 + w * (par[TORQUE_FACTOR] - 1.0)), against


@compiled
def move(now: Any, f: float, d_source: Any, d_speed: Any) -> None:
    """Fill the derivatives of all states at the voltages of `now`; `f` is the island's speed."""
    share_power(now)
    d_source[:] = 0.0
    for j in range(len(now.system.node)):
        if now.system.kind[j] == MACHINE:
            move_machine(now, j, f, d_source[j])
        elif now.system.kind[j] == CONVERTER:
            move_converter(now, j, f, d_source[j])
        else:
            d_source[j, ANGLE] = now.system.omega * (now.par[j, F_REF] - f)
    for m in range(len(now.system.motor_node)):
        d_speed[m] = 0.0
        if now.stage[m] == OFF:
            continue
        if now.system.method[m] == BY_CONVERTER:
            d_speed[m] = 1.0 / now.system.motor[m, RAMP_S] if now.speed[m] < 1.0 else 0.0
            continue
        torque, against = motor_torques(now, m, f)
        d_speed[m] = (torque - against) / now.system.motor[m, MOTOR_2H]
        if now.speed[m] <= 0.0 and d_speed[m] < 0.0:
            d_speed[m] = 0.0
