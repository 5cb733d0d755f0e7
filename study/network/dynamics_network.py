"""Voltages of the reduced network at one instant, compiled: Newton's method, factors kept while they serve.

Unknowns are Re V then Im V of every node; the mismatch is the current that leaves a node. Sources are linear
in the voltage while their states stand, motors as well but for soft starters; consumers are not.
"""

from __future__ import annotations

from typing import Any

import numba
import numpy as np

from study.formulas.starting import SOFT_START_FIRST_VOLTAGE
from study.network.dynamics_data import (
    A_IM,
    A_RE,
    ANGLE,
    B_FIXED,
    B_IM,
    B_RE,
    B_SHUNT,
    BY_CONVERTER,
    COSINE,
    DAMPER_D,
    DAMPER_Q,
    FACTORED,
    FLOOR,
    FLUX,
    FULL,
    G_SHUNT,
    HAS_FACTORS,
    I0_IM,
    I0_RE,
    I_D,
    I_IM,
    I_LIMIT,
    I_Q,
    I_RE,
    KIND,
    M_II,
    M_IR,
    M_RI,
    M_RR,
    MACHINE,
    METHOD,
    MOTOR_B,
    MOTOR_G,
    MOTOR_NODE,
    NODE,
    ON,
    OWN_MOTOR_V,
    OWN_V,
    POWER_P,
    POWER_Q,
    R_RUN,
    R_SOURCE,
    R_START,
    R_STATOR,
    RA,
    RAMP_S,
    RATING,
    REDUCED,
    SHUNT_B,
    SHUNT_G,
    SINCE,
    SINE,
    SLIP,
    SLIP_RATED,
    SOFT_STARTER,
    SPEED,
    STAGE,
    STAR_DELTA,
    TAP,
    V_D,
    V_IM,
    V_Q,
    V_RE,
    WINDING,
    X_RUN,
    X_SOURCE,
    X_START,
    XD1,
    XD2,
    XL,
    XQ2,
    Y_SCALE,
)

# Not kept on disk one by one: what calls them would be kept with older ones inside it. See `dynamics_kernel`.
compiled = numba.njit(nogil=True, error_model="numpy", fastmath={"contract", "arcp"})

TOLERANCE = 1e-8  # of the mismatch, pu of the network's base
KEEP_FACTORS = 4  # iterations that old factors may take
MOST = 40
SMALLEST_SLIP = 1e-6
LEAST_SQUARE = 1e-4  # of |V|, so that nothing is divided by nothing in a fault
AS_IMPEDANCE = 1e9  # a floor that no voltage reaches


@compiled
def factorise(a: Any, order: Any) -> bool:
    """Factorise the square part of a [n, n + 1] in place, row exchanges in `order`; False where singular."""
    n = a.shape[0]
    for k in range(n):
        p, best = k, abs(a[k, k])
        for i in range(k + 1, n):
            if abs(a[i, k]) > best:
                p, best = i, abs(a[i, k])
        if best == 0.0 or np.isnan(best):
            return False
        order[k] = p
        if p != k:
            for j in range(n):
                a[k, j], a[p, j] = a[p, j], a[k, j]
        inverse = 1.0 / a[k, k]
        for i in range(k + 1, n):
            if a[i, k] != 0.0:
                f = a[i, k] * inverse
                a[i, k] = f
                for j in range(k + 1, n):
                    a[i, j] -= f * a[k, j]
    return True


@compiled
def back_substitute(a: Any, order: Any) -> None:
    """Solve with the factors in a for the right-hand side in its last column, in place."""
    n = a.shape[0]
    for k in range(n):
        p = order[k]
        a[k, n], a[p, n] = a[p, n], a[k, n]
    for i in range(n):
        total = a[i, n]
        for j in range(i):
            total -= a[i, j] * a[j, n]
        a[i, n] = total
    for i in range(n - 1, -1, -1):
        total = a[i, n]
        for j in range(i + 1, n):
            total -= a[i, j] * a[j, n]
        a[i, n] = total / a[i, i]


@compiled
def prepare_sources(source: Any) -> None:
    """Fill the current of every source as I0 - M V, in network units.

    A machine's axes: ``Vd = -Ra Id + w X''q Iq + w E''d``, ``Vq = -Ra Iq - w X''d Id + w E''q``, turned by
    its angle; any other source is an e.m.f. behind its impedance.
    """
    for j in range(source.shape[0]):
        for column in range(I0_RE, I_RE):
            source[j, column] = 0.0
        s, c = np.sin(source[j, ANGLE]), np.cos(source[j, ANGLE])
        source[j, SINE], source[j, COSINE] = s, c
        if source[j, ON] == 0.0:
            continue
        to_current = source[j, RATING] * source[j, OWN_V]
        scale = to_current * source[j, OWN_V]
        if source[j, KIND] != MACHINE:
            y = 1.0 / complex(source[j, R_SOURCE], source[j, X_SOURCE])
            i = y * complex(c, s) * (source[j, FLUX] * to_current)
            source[j, I0_RE], source[j, I0_IM] = i.real, i.imag
            source[j, M_RR] = source[j, M_II] = y.real * scale
            source[j, M_RI], source[j, M_IR] = -y.imag * scale, y.imag * scale
            continue
        ra, w = source[j, RA], source[j, SPEED]
        xd, xq = w * source[j, XD2], w * source[j, XQ2]
        share = (source[j, XD2] - source[j, XL]) / (source[j, XD1] - source[j, XL])
        eq = w * (share * source[j, FLUX] + (1.0 - share) * source[j, DAMPER_D])
        ed = w * source[j, DAMPER_Q]
        inverse = 1.0 / (ra * ra + xd * xq)
        i_d, i_q = (ra * ed + xq * eq) * inverse, (ra * eq - xd * ed) * inverse
        source[j, I0_RE] = (i_d * s + i_q * c) * to_current
        source[j, I0_IM] = (i_q * s - i_d * c) * to_current
        g = scale * inverse
        d_r, d_i = ra * s + xq * c, -ra * c + xq * s
        q_r, q_i = ra * c - xd * s, ra * s + xd * c
        source[j, M_RR], source[j, M_RI] = g * (d_r * s + q_r * c), g * (d_i * s + q_i * c)
        source[j, M_IR], source[j, M_II] = g * (q_r * s - d_r * c), g * (q_i * s - d_i * c)


@compiled
def fill_currents(source: Any, node: Any) -> None:
    """Fill currents, and axis currents and voltages, of the sources at the voltages found."""
    for j in range(source.shape[0]):
        k = int(source[j, NODE])
        vr, vi = node[k, V_RE], node[k, V_IM]
        re = source[j, I0_RE] - source[j, M_RR] * vr - source[j, M_RI] * vi
        im = source[j, I0_IM] - source[j, M_IR] * vr - source[j, M_II] * vi
        source[j, I_RE], source[j, I_IM] = re, im
        s, c, own = source[j, SINE], source[j, COSINE], source[j, OWN_V]
        to_own = 1.0 / (source[j, RATING] * own)
        source[j, I_D], source[j, I_Q] = (re * s - im * c) * to_own, (re * c + im * s) * to_own
        source[j, V_D], source[j, V_Q] = (vr * s - vi * c) * own, (vr * c + vi * s) * own
        if source[j, ON] == 0.0 and source[j, KIND] == MACHINE:
            share = (source[j, XD2] - source[j, XL]) / (source[j, XD1] - source[j, XL])
            source[j, V_D] = source[j, SPEED] * source[j, DAMPER_Q]
            eq = share * source[j, FLUX] + (1.0 - share) * source[j, DAMPER_D]
            source[j, V_Q] = source[j, SPEED] * eq


@compiled
def motor_branch(motor: Any, m: int) -> Any:
    """Return rotor resistance over slip and leakage reactance of a motor at its slip."""
    s = motor[m, SLIP]
    if abs(s) < SMALLEST_SLIP:
        s = SMALLEST_SLIP
    w = min(max((s - motor[m, SLIP_RATED]) / (1.0 - motor[m, SLIP_RATED]), 0.0), 1.0)
    r = motor[m, R_RUN] + w * (motor[m, R_START] - motor[m, R_RUN])
    return r / s, motor[m, X_RUN] + w * (motor[m, X_START] - motor[m, X_RUN])


@compiled
def prepare_motor(motor: Any, m: int, v: float) -> None:
    """Fill what the network sees of a motor at a voltage [pu of the network], and the voltage it is left.

    Star: a third of the admittance, and voltage over root 3 on each phase; autotransformer: a^2 and a. A soft
    starter passes k of the voltage and the motor's own current k Y V, whose active part is k^2 G V. A
    converter takes its power whatever the voltage.
    """
    motor[m, MOTOR_G], motor[m, MOTOR_B], motor[m, WINDING] = 0.0, -motor[m, B_FIXED], 0.0
    stage, method = int(motor[m, STAGE]), int(motor[m, METHOD])
    if stage not in (REDUCED, FULL):
        return
    if method == BY_CONVERTER:
        ramp = min(motor[m, SINCE] / motor[m, RAMP_S], 1.0) / (v * v)
        motor[m, MOTOR_G], motor[m, MOTOR_B] = motor[m, POWER_P] * ramp, motor[m, POWER_Q] * ramp
        return
    r, x = motor_branch(motor, m)
    y = complex(motor[m, G_SHUNT], -motor[m, B_SHUNT]) + 1.0 / complex(motor[m, R_STATOR] + r, x)
    active, whole, k = 1.0, 1.0, 1.0
    if stage == REDUCED and method == STAR_DELTA:
        active, whole, k = 1.0 / 3.0, 1.0 / 3.0, 1.0 / np.sqrt(3.0)
    elif stage == REDUCED and method == SOFT_STARTER:
        ramp = min(motor[m, SINCE] / motor[m, RAMP_S], 1.0)
        k = SOFT_START_FIRST_VOLTAGE + (1.0 - SOFT_START_FIRST_VOLTAGE) * ramp
        own = abs(y) * v * motor[m, OWN_MOTOR_V]
        if own * k > motor[m, I_LIMIT]:
            k = motor[m, I_LIMIT] / own
        active, whole = k * k, k
    elif stage == REDUCED:
        k = motor[m, TAP]
        active, whole = k * k, k * k
    g = active * y.real
    b = np.sqrt(max(whole * whole * (y.real * y.real + y.imag * y.imag) - g * g, 0.0))
    motor[m, MOTOR_G] = g * motor[m, Y_SCALE]
    motor[m, MOTOR_B] = b * motor[m, Y_SCALE] - motor[m, B_FIXED]
    motor[m, WINDING] = k


@compiled
def follow_voltage(motor: Any, node: Any, every: bool) -> None:
    """Bring motors up to date with the voltages: all, or those that do not follow them in proportion."""
    for m in range(motor.shape[0]):
        if every or motor[m, METHOD] >= SOFT_STARTER:
            k, least = int(motor[m, MOTOR_NODE]), LEAST_SQUARE
            if motor[m, METHOD] == BY_CONVERTER:
                least = node[k, FLOOR]
            u2 = node[k, V_RE] * node[k, V_RE] + node[k, V_IM] * node[k, V_IM]
            prepare_motor(motor, m, np.sqrt(max(u2, least)))


@compiled
def mismatch(now: Any) -> float:
    """Fill the mismatch into the last column of the work space; return its largest entry."""
    node, f, y = now.node, now.work, now.y
    n = node.shape[0]
    for k in range(n):
        vr, vi = node[k, V_RE], node[k, V_IM]
        over = 1.0 / max(vr * vr + vi * vi, node[k, FLOOR])
        g = node[k, A_RE] * over + node[k, B_RE] + node[k, SHUNT_G]
        b = -node[k, A_IM] * over - node[k, B_IM] + node[k, SHUNT_B]
        re, im = g * vr - b * vi, g * vi + b * vr
        for j in range(n):
            a = y[k, j]
            re += a.real * node[j, V_RE] - a.imag * node[j, V_IM]
            im += a.real * node[j, V_IM] + a.imag * node[j, V_RE]
        f[k, 2 * n], f[n + k, 2 * n] = re, im
    follow_voltage(now.motor, node, False)
    for m in range(now.motor.shape[0]):
        k = int(now.motor[m, MOTOR_NODE])
        g, b = now.motor[m, MOTOR_G], now.motor[m, MOTOR_B]
        f[k, 2 * n] += g * node[k, V_RE] + b * node[k, V_IM]
        f[n + k, 2 * n] += g * node[k, V_IM] - b * node[k, V_RE]
    source = now.source
    for j in range(source.shape[0]):
        k = int(source[j, NODE])
        vr, vi = node[k, V_RE], node[k, V_IM]
        f[k, 2 * n] -= source[j, I0_RE] - source[j, M_RR] * vr - source[j, M_RI] * vi
        f[n + k, 2 * n] -= source[j, I0_IM] - source[j, M_IR] * vr - source[j, M_II] * vi
    worst = 0.0
    for k in range(2 * n):
        worst = abs(f[k, 2 * n]) if not abs(f[k, 2 * n]) <= worst else worst
    return worst


@compiled
def jacobian(now: Any) -> None:
    """Fill the gradient of the mismatch into the square part of the work space."""
    node, a = now.node, now.work
    n = node.shape[0]
    for k in range(n):
        for j in range(n):
            y = now.y[k, j]
            a[k, j], a[k, n + j], a[n + k, j], a[n + k, n + j] = y.real, -y.imag, y.imag, y.real
        vr, vi = node[k, V_RE], node[k, V_IM]
        u2 = vr * vr + vi * vi
        over = 1.0 / max(u2, node[k, FLOOR])
        g = node[k, A_RE] * over + node[k, B_RE] + node[k, SHUNT_G]
        b = -node[k, A_IM] * over - node[k, B_IM] + node[k, SHUNT_B]
        a[k, k], a[k, n + k] = a[k, k] + g, a[k, n + k] - b
        a[n + k, k], a[n + k, n + k] = a[n + k, k] + b, a[n + k, n + k] + g
        if u2 > node[k, FLOOR]:
            twice = 2.0 * over * over
            re = (node[k, A_RE] * vr + node[k, A_IM] * vi) * twice
            im = (node[k, A_RE] * vi - node[k, A_IM] * vr) * twice
            a[k, k], a[k, n + k] = a[k, k] - re * vr, a[k, n + k] - re * vi
            a[n + k, k], a[n + k, n + k] = a[n + k, k] - im * vr, a[n + k, n + k] - im * vi
    for m in range(now.motor.shape[0]):
        k = int(now.motor[m, MOTOR_NODE])
        g, b = now.motor[m, MOTOR_G], now.motor[m, MOTOR_B]
        a[k, k], a[k, n + k] = a[k, k] + g, a[k, n + k] + b
        a[n + k, k], a[n + k, n + k] = a[n + k, k] - b, a[n + k, n + k] + g
    source = now.source
    for j in range(source.shape[0]):
        k = int(source[j, NODE])
        a[k, k], a[k, n + k] = a[k, k] + source[j, M_RR], a[k, n + k] + source[j, M_RI]
        a[n + k, k] = a[n + k, k] + source[j, M_IR]
        a[n + k, n + k] = a[n + k, n + k] + source[j, M_II]


@compiled
def newton(now: Any) -> bool:
    """Find the voltages for the sources and motors prepared; False where there are none."""
    node, a, single = now.node, now.work, now.single
    n = node.shape[0]
    for turn in range(MOST):
        worst = mismatch(now)
        if worst < TOLERANCE:
            return True
        if np.isnan(worst) or worst > 1e9:
            return False
        if single[HAS_FACTORS] == 0.0 or turn >= KEEP_FACTORS:
            for k in range(2 * n):
                now.order[k] = k
            jacobian(now)
            single[HAS_FACTORS] = 1.0 if factorise(a, now.order) else 0.0
            single[FACTORED] += 1.0
            if single[HAS_FACTORS] == 0.0:
                return False
        back_substitute(a, now.order)
        for k in range(n):
            node[k, V_RE] -= a[k, 2 * n]
            node[k, V_IM] -= a[n + k, 2 * n]
    return False


@compiled
def solve(now: Any) -> bool:
    """Find voltages and currents for the states at hand; False where there are none."""
    prepare_sources(now.source)
    follow_voltage(now.motor, now.node, True)
    found, turns = False, 0
    # Called in one place: every place is a copy of the whole for the compiler.
    while not found and turns < 2:
        if turns == 1:
            now.single[HAS_FACTORS] = 0.0
        found = newton(now)
        turns += 1
    fill_currents(now.source, now.node)
    return found


@compiled
def load_as_impedance(node: Any, before: Any) -> None:
    """Make every load an impedance of what it drew before: the network is then linear."""
    for k in range(node.shape[0]):
        u2 = max(before[k, V_RE] ** 2 + before[k, V_IM] ** 2, LEAST_SQUARE)
        node[k, V_RE], node[k, V_IM] = before[k, V_RE], before[k, V_IM]
        node[k, A_RE] = before[k, A_RE] * AS_IMPEDANCE / u2
        node[k, A_IM] = before[k, A_IM] * AS_IMPEDANCE / u2
        node[k, FLOOR] = AS_IMPEDANCE


@compiled
def load_as_before(node: Any, before: Any) -> None:
    """Give every load its own law again."""
    for k in range(node.shape[0]):
        node[k, A_RE], node[k, A_IM], node[k, FLOOR] = before[k, A_RE], before[k, A_IM], before[k, FLOOR]


@compiled
def solve_afresh(now: Any) -> bool:
    """Find the voltages after a sudden change; from impedances alone where the last point leads nowhere."""
    before = now.node.copy()
    found, turns = False, 0
    while not found and turns < 3:
        if turns == 1:
            load_as_impedance(now.node, before)
        elif turns == 2:
            load_as_before(now.node, before)
        now.single[HAS_FACTORS] = 0.0
        found = solve(now) and turns != 1
        turns += 1
    return found
