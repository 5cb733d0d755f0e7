"""Voltages of the reduced network at one instant, compiled: Newton's method, factors kept while they serve.

Unknowns are Re V then Im V of every node; the mismatch is the current that leaves a node.
"""

from __future__ import annotations

from typing import Any

import numba
import numpy as np

from study.formulas.starting import SOFT_START_FIRST_VOLTAGE
from study.network.dynamics_data import (
    ANGLE,
    B_FIXED,
    B_SHUNT,
    BY_CONVERTER,
    DAMPER_D,
    DAMPER_Q,
    FLUX,
    FULL,
    G_SHUNT,
    I_LIMIT,
    MACHINE,
    OFF,
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
    SLIP_RATED,
    SOFT_STARTER,
    SPEED,
    STAR_DELTA,
    TAP,
    X_RUN,
    X_SOURCE,
    X_START,
    XD1,
    XD2,
    XL,
    XQ2,
    Y_SCALE,
)

compiled = numba.njit(cache=True, nogil=True, error_model="numpy", fastmath={"contract", "arcp"})

TOLERANCE = 1e-8  # of the mismatch, pu of the network's base
KEEP_FACTORS = 4  # iterations that old factors may take
MOST = 40
SMALLEST_SLIP = 1e-6
LEAST_VOLTAGE = 1e-4  # of |V|^2, so that nothing is divided by nothing in a fault


@compiled
def factorise(a: Any, order: Any) -> bool:
    """Factorise a [n, n] in place with row exchanges in `order`; False where it is singular."""
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
                a[i, k] *= inverse
                f = a[i, k]
                for j in range(k + 1, n):
                    a[i, j] -= f * a[k, j]
    return True


@compiled
def back_substitute(a: Any, order: Any, b: Any) -> None:
    """Solve with the factors, in place."""
    n = a.shape[0]
    for k in range(n):
        p = order[k]
        b[k], b[p] = b[p], b[k]
    for i in range(n):
        total = b[i]
        for j in range(i):
            total -= a[i, j] * b[j]
        b[i] = total
    for i in range(n - 1, -1, -1):
        total = b[i]
        for j in range(i + 1, n):
            total -= a[i, j] * b[j]
        b[i] = total / a[i, i]


@compiled
def subtransient(x: Any, p: Any) -> Any:
    """Return speed x E''d and speed x E''q of a machine from its states."""
    share = (p[XD2] - p[XL]) / (p[XD1] - p[XL])
    eq = share * x[FLUX] + (1.0 - share) * x[DAMPER_D]
    return x[SPEED] * x[DAMPER_Q], x[SPEED] * eq


@compiled
def axis_currents(x: Any, p: Any, v: complex) -> Any:
    """Return Id, Iq, Vd and Vq of a machine at a network voltage, per unit of its own."""
    s, c = np.sin(x[ANGLE]), np.cos(x[ANGLE])
    vr, vi = v.real * p[OWN_V], v.imag * p[OWN_V]
    vd, vq = vr * s - vi * c, vr * c + vi * s
    ed, eq = subtransient(x, p)
    xd, xq = x[SPEED] * p[XD2], x[SPEED] * p[XQ2]
    inverse = 1.0 / (p[RA] * p[RA] + xd * xq)
    i_d = (p[RA] * (ed - vd) + xq * (eq - vq)) * inverse
    i_q = (p[RA] * (eq - vq) - xd * (ed - vd)) * inverse
    return i_d, i_q, vd, vq


@compiled
def source_current(kind: int, x: Any, p: Any, v: complex) -> complex:
    """Return the current of a source in network units."""
    if p[ON] == 0.0:
        return 0j
    if kind == MACHINE:
        i_d, i_q, _, _ = axis_currents(x, p, v)
        s, c = np.sin(x[ANGLE]), np.cos(x[ANGLE])
        return complex(i_d * s + i_q * c, i_q * s - i_d * c) * (p[RATING] * p[OWN_V])
    emf = complex(x[FLUX] * np.cos(x[ANGLE]), x[FLUX] * np.sin(x[ANGLE]))
    return (emf - v * p[OWN_V]) / complex(p[R_SOURCE], p[X_SOURCE]) * (p[RATING] * p[OWN_V])


@compiled
def motor_branch(slip: float, m: Any) -> Any:
    """Return rotor resistance over slip and leakage reactance of a motor at a slip."""
    s = slip
    if abs(s) < SMALLEST_SLIP:
        s = SMALLEST_SLIP
    w = min(max((s - m[SLIP_RATED]) / (1.0 - m[SLIP_RATED]), 0.0), 1.0)
    r = m[R_RUN] + w * (m[R_START] - m[R_RUN])
    return r / s, m[X_RUN] + w * (m[X_START] - m[X_RUN])


@compiled
def starter(now: Any, m: int, y: float, v_own: float) -> Any:
    """Return the shares of active and of whole motor admittance that the network sees, and of the voltage.

    Star: a third of the admittance, and voltage over root 3 on each phase; autotransformer: a^2 and a. A soft
    starter passes k of the voltage and the motor's own current k Y V, whose active part is k^2 G V.
    """
    method, par = now.system.method[m], now.system.motor[m]
    if now.stage[m] == FULL:
        return 1.0, 1.0, 1.0
    if method == STAR_DELTA:
        return 1.0 / 3.0, 1.0 / 3.0, 1.0 / np.sqrt(3.0)
    if method == SOFT_STARTER:
        share = min(now.since[m] / par[RAMP_S], 1.0)
        k = SOFT_START_FIRST_VOLTAGE + (1.0 - SOFT_START_FIRST_VOLTAGE) * share
        if y * v_own * k > par[I_LIMIT]:
            k = par[I_LIMIT] / (y * v_own)
        return k * k, k, k
    a = par[TAP]
    return a * a, a * a, a


@compiled
def motor_admittance(now: Any, m: int, v_own: float) -> Any:
    """Return a motor's admittance in network units, and the part of the voltage at its windings."""
    par = now.system.motor[m]
    fixed = complex(0.0, par[B_FIXED])
    if now.stage[m] not in (REDUCED, FULL):
        return fixed, 0.0
    r, x = motor_branch(now.slip[m], par)
    y = complex(par[G_SHUNT], -par[B_SHUNT]) + 1.0 / complex(par[R_STATOR] + r, x)
    active, whole, k = starter(now, m, abs(y), v_own)
    g = active * y.real
    b = np.sqrt(max(whole * whole * (y.real**2 + y.imag**2) - g * g, 0.0))
    return complex(g, -b if y.imag < 0.0 else b) * par[Y_SCALE] + fixed, k


@compiled
def mismatch(now: Any, f: Any) -> float:
    """Fill the mismatch [2 node] at the voltages of `now`; return its largest entry."""
    v, n = now.v, len(now.v)
    sys = now.system
    for k in range(n):
        re, im = 0.0, 0.0
        for j in range(n):
            a = sys.y[k, j]
            re += a.real * v[j].real - a.imag * v[j].imag
            im += a.real * v[j].imag + a.imag * v[j].real
        u2 = v[k].real ** 2 + v[k].imag ** 2
        over = 1.0 / max(u2, sys.floor[k])
        a = np.conj(now.constant[k]) * over + np.conj(now.square[k]) + now.shunt[k]
        total = a * v[k]
        f[k], f[n + k] = re + total.real, im + total.imag
    for m in range(len(sys.motor_node)):
        k = sys.motor_node[m]
        # The two that do not follow the voltage in proportion are worked out at every voltage.
        i = motor_current(now, m) if sys.method[m] >= SOFT_STARTER else now.motor_y[m] * v[k]
        f[k] += i.real
        f[n + k] += i.imag
    for j in range(len(sys.node)):
        k = sys.node[j]
        i = source_current(sys.kind[j], now.source[j], now.par[j], v[k])
        f[k] -= i.real
        f[n + k] -= i.imag
    worst = 0.0
    for k in range(2 * n):
        worst = abs(f[k]) if not abs(f[k]) <= worst else worst
    return worst


@compiled
def motor_current(now: Any, m: int) -> complex:
    """Return the current of a motor in network units at the voltages of `now`."""
    sys = now.system
    v = now.v[sys.motor_node[m]]
    u = abs(v)
    if sys.method[m] == BY_CONVERTER:
        if now.stage[m] == OFF:
            return 0j
        ramp = min(now.since[m] / sys.motor[m, RAMP_S], 1.0)
        s = complex(sys.motor[m, POWER_P], -sys.motor[m, POWER_Q]) * ramp
        return s * v / max(u * u, sys.floor[sys.motor_node[m]])
    y, _ = motor_admittance(now, m, u * sys.motor[m, OWN_MOTOR_V])
    return y * v


@compiled
def jacobian(now: Any, a: Any) -> None:
    """Fill the gradient of the mismatch [2 node, 2 node]."""
    v, n = now.v, len(now.v)
    sys = now.system
    for k in range(n):
        for j in range(n):
            y = sys.y[k, j]
            a[k, j], a[k, n + j], a[n + k, j], a[n + k, n + j] = y.real, -y.imag, y.imag, y.real
        u2 = v[k].real ** 2 + v[k].imag ** 2
        c = np.conj(now.constant[k])
        y = np.conj(now.square[k]) + now.shunt[k] + c / max(u2, sys.floor[k])
        add(a, k, (y.real, -y.imag, y.imag, y.real))
        if u2 > sys.floor[k]:
            i = c * v[k] / (u2 * u2)
            e, f = 2.0 * v[k].real, 2.0 * v[k].imag
            add(a, k, (-i.real * e, -i.real * f, -i.imag * e, -i.imag * f))
    for m in range(len(sys.motor_node)):
        y = now.motor_y[m]
        add(a, sys.motor_node[m], (y.real, -y.imag, y.imag, y.real))
    for j in range(len(sys.node)):
        p, x = now.par[j], now.source[j]
        if p[ON] == 0.0:
            continue
        scale = p[RATING] * p[OWN_V] * p[OWN_V]
        if sys.kind[j] != MACHINE:
            y = scale / complex(p[R_SOURCE], p[X_SOURCE])
            add(a, sys.node[j], (y.real, -y.imag, y.imag, y.real))
            continue
        s, c = np.sin(x[ANGLE]), np.cos(x[ANGLE])
        xd, xq = x[SPEED] * p[XD2], x[SPEED] * p[XQ2]
        g = scale / (p[RA] * p[RA] + xd * xq)
        # Both axes turned into the network's: T^T [[Ra, Xq], [-Xd, Ra]] T.
        d_r, d_i = p[RA] * s + xq * c, -p[RA] * c + xq * s
        q_r, q_i = p[RA] * c - xd * s, p[RA] * s + xd * c
        rr, ri = g * (d_r * s + q_r * c), g * (d_i * s + q_i * c)
        ir, ii = g * (q_r * s - d_r * c), g * (q_i * s - d_i * c)
        add(a, sys.node[j], (rr, ri, ir, ii))


@compiled
def add(a: Any, k: int, block: Any) -> None:
    """Add a two by two block to the rows and columns of a node."""
    n = a.shape[0] // 2
    a[k, k] += block[0]
    a[k, n + k] += block[1]
    a[n + k, k] += block[2]
    a[n + k, n + k] += block[3]


@compiled
def solve(now: Any) -> bool:
    """Find the voltages of `now`; False where there are none."""
    n = len(now.v)
    sys = now.system
    for m in range(len(sys.motor_node)):
        k = sys.motor_node[m]
        if sys.method[m] == BY_CONVERTER:
            now.motor_y[m] = 0j
        else:
            v_own = max(abs(now.v[k]) * sys.motor[m, OWN_MOTOR_V], 1e-3)
            now.motor_y[m], _ = motor_admittance(now, m, v_own)
    for turn in range(MOST):
        worst = mismatch(now, now.right)
        if worst < TOLERANCE:
            return True
        if np.isnan(worst) or worst > 1e9:
            return False
        if now.flags[0] == 0 or turn == KEEP_FACTORS or turn > 2 * KEEP_FACTORS:
            jacobian(now, now.factors)
            now.flags[0] = 1 if factorise(now.factors, now.order) else 0
            now.flags[1] += 1
            if now.flags[0] == 0:
                return False
        back_substitute(now.factors, now.order, now.right)
        for k in range(n):
            now.v[k] -= complex(now.right[k], now.right[n + k])
    return False


@compiled
def solve_afresh(now: Any) -> bool:
    """Find the voltages after a sudden change; from impedances alone where the last point leads nowhere."""
    n = len(now.v)
    now.flags[0] = 0
    before = now.v.copy()
    if solve(now):
        return True
    floor = now.system.floor.copy()
    now.system.floor[:] = 1e9
    # With every load an impedance of what it drew before, the network is linear.
    kept = now.constant.copy()
    for k in range(n):
        u2 = max(before[k].real ** 2 + before[k].imag ** 2, LEAST_VOLTAGE)
        now.constant[k] = kept[k] * 1e9 / u2
        now.v[k] = before[k]
    now.flags[0] = 0
    solve(now)
    now.system.floor[:] = floor
    now.constant[:] = kept
    now.flags[0] = 0
    return solve(now)
