"""The sweep of `scenarios`, compiled: sixteen scenarios side by side, to keep the vector unit at work.

Compiling takes some ten seconds, once for each installation (the result is kept on disk); reading it back a
fraction of a second. It pays for several thousand scenarios of a large plant. Laws of a constant field are
not in it: they go through `scenarios`.
"""

from __future__ import annotations

from typing import Any

import numba
import numpy as np

LANES = 16


_compiled = numba.njit(cache=True, nogil=True, error_model="numpy", fastmath={"contract", "arcp"})


@_compiled
def _solve(y: Any, t: Any) -> None:
    """Solve L U z = y in place, y [size, lane]."""
    size = y.shape[0]
    for j in range(size):
        for n in range(t.lower_start[j], t.lower_start[j + 1]):
            row, value = t.lower_row[n], t.lower[n]
            for w in range(LANES):
                y[row, w] -= value * y[j, w]
    for j in range(size - 1, -1, -1):
        for w in range(LANES):
            y[j, w] *= t.inverse_diagonal[j]
        for n in range(t.upper_start[j], t.upper_start[j + 1]):
            row, value = t.upper_row[n], t.upper[n]
            for w in range(LANES):
                y[row, w] -= value * y[j, w]


@_compiled
def _load(d: Any, k: Any, fixed: Any, varying: Any) -> None:
    """Fill the consumers' data of the scenarios at hand: S and y on buses, V'/V and z' conj(S) on leaves."""
    count = len(fixed.direct)
    wide, wide_y = varying.constant.shape[1] > 1, varying.impedance.shape[1] > 1
    for p in range(varying.constant.shape[0]):
        for w in range(LANES):
            s, y = varying.constant[p, k[w] if wide else 0], varying.impedance[p, k[w] if wide_y else 0]
            if p < count:
                d[p, 0, w], d[p, 1, w], d[p, 2, w], d[p, 3, w] = s.real, s.imag, y.real, y.imag
            else:
                z = 1.0 / (fixed.own[p - count] + np.conj(y))
                ratio, product = -fixed.out[p - count] * z, z * np.conj(s)
                d[p, 0, w], d[p, 1, w] = ratio.real, ratio.imag
                d[p, 2, w], d[p, 3, w] = product.real, product.imag


@_compiled
def _consumers(d: Any, x: Any, fixed: Any, drawn: Any, leaf: Any) -> None:
    """Fill the current drawn at every port, [port, 2, lane], from the unknowns x [size, lane].

    On a bus ``conj(S/V) + conj(y) V``. A leaf's ``u = |v|^2`` solves ``u^2 - b u + c = 0``; each sweep takes
    one step ``u = b - c/u`` towards its upper root, some thousand times nearer, and needs no square root.
    """
    n, first = fixed.buses, len(fixed.direct)
    drawn[:] = 0.0
    work = np.empty((3, LANES))
    for p in range(first):
        port = fixed.direct[p]
        bus = fixed.port_bus[port]
        for w in range(LANES):
            e, f = x[bus, w], x[n + bus, w]
            inverse = 1.0 / (e * e + f * f)
            active, reactive = d[p, 0, w] * inverse + d[p, 2, w], d[p, 1, w] * inverse + d[p, 3, w]
            drawn[port, 0, w] = active * e + reactive * f
            drawn[port, 1, w] = active * f - reactive * e
    for p in range(len(fixed.parent)):
        port = fixed.parent[p]
        bus = fixed.port_bus[port]
        g, h, m = fixed.into[p].real, fixed.into[p].imag, first + p
        # In short loops, each with few arrays, so that the compiler puts the lanes side by side.
        for w in range(LANES):
            e, f = x[bus, w], x[n + bus, w]
            work[0, w] = d[m, 0, w] * e - d[m, 1, w] * f
            work[1, w] = d[m, 0, w] * f + d[m, 1, w] * e
        for w in range(LANES):
            square = work[0, w] * work[0, w] + work[1, w] * work[1, w]
            inverse = 1.0 / (square * leaf[p, 2, w])
            work[2, w] = inverse * leaf[p, 2, w]
            product = d[m, 2, w] * d[m, 2, w] + d[m, 3, w] * d[m, 3, w]
            leaf[p, 2, w] = square - 2.0 * d[m, 2, w] - product * (inverse * square)
        for w in range(LANES):
            along, across = (leaf[p, 2, w] + d[m, 2, w]) * work[2, w], -d[m, 3, w] * work[2, w]
            leaf[p, 0, w] = along * work[0, w] - across * work[1, w]
            leaf[p, 1, w] = along * work[1, w] + across * work[0, w]
        for w in range(LANES):
            drawn[port, 0, w] += g * leaf[p, 0, w] - h * leaf[p, 1, w]
            drawn[port, 1, w] += g * leaf[p, 1, w] + h * leaf[p, 0, w]


@_compiled
def _law(j: int, w: int, q: Any, z: Any, fixed: Any) -> Any:
    """Return the residual of a source's voltage law; q holds e_ref, x, a, b and z Re V, Im V, Re I, Im I."""
    s = len(fixed.code)
    e, f, re, im = z[j, w], z[s + j, w], z[2 * s + j, w], z[3 * s + j, w]
    e_ref, x = q[0, j, w], q[1, j, w]
    code = fixed.code[j]
    if code == 1:
        square = e * e + f * f
        return square + x * (f * re - e * im) - e_ref * np.sqrt(square)
    if code == 2:
        return f * re - e * im - fixed.q_set[j] - fixed.q_per_p[j] * (e * re + f * im)
    if code == 6:
        return re * re + im * im - fixed.i_max[j] ** 2
    seen_re, seen_im = e + fixed.r[j] * re - x * im, f + fixed.r[j] * im + x * re
    if code == 5:
        return seen_re - e_ref
    for other in range(s):
        seen_re -= fixed.cross[j, other] * z[3 * s + other, w]
        seen_im += fixed.cross[j, other] * z[2 * s + other, w]
    return seen_re * seen_re + seen_im * seen_im - e_ref * e_ref


@_compiled
def _sources(q: Any, x: Any, fixed: Any, z: Any, right: Any) -> None:
    """Fill the right-hand side of the sources' rows, [2 source, lane]."""
    n, s = fixed.buses, len(fixed.code)
    for j in range(s):
        bus = fixed.source_bus[j]
        for w in range(LANES):
            z[j, w], z[s + j, w] = x[bus, w], x[n + bus, w]
            z[2 * s + j, w], z[3 * s + j, w] = x[2 * n + j, w], x[2 * n + s + j, w]
    for j in range(s):
        island = 2 * n + 2 * s + fixed.source_island[j]
        e0, f0, re0, im0 = fixed.v0[j].real, fixed.v0[j].imag, fixed.i0[j].real, fixed.i0[j].imag
        for w in range(LANES):
            e, f, re, im = z[j, w], z[s + j, w], z[2 * s + j, w], z[3 * s + j, w]
            linear = e * re0 + f * im0 + e0 * re + f0 * im
            law = linear - e * re - f * im + q[2, j, w] + (q[3, j, w] - fixed.b0[j]) * x[island, w]
            right[j, w] = 0.0 if fixed.code[j] == 5 else law
            total = -_law(j, w, q, z, fixed)
            for c in range(4 * s):
                total += fixed.by_law[j, c] * z[c, w]
            right[s + j, w] = total


@_compiled
def _right(fixed: Any, x: Any, drawn: Any, right: Any) -> None:
    """Fill the right-hand side of the ports' rows, [2 port, lane]."""
    n, count = fixed.buses, len(fixed.port_bus)
    for p in range(count):
        bus = fixed.port_bus[p]
        a, b, c, d = fixed.by_load[0, p], fixed.by_load[1, p], fixed.by_load[2, p], fixed.by_load[3, p]
        for w in range(LANES):
            e, f = x[bus, w], x[n + bus, w]
            right[p, w] = a * e + b * f - drawn[p, 0, w]
            right[count + p, w] = c * e + d * f - drawn[p, 1, w]


@_compiled
def _step(t: Any, fixed: Any, right: Any, y: Any, x: Any) -> None:
    """Solve for the unknowns x [size, lane] from the right-hand side."""
    n, count, s = fixed.buses, len(fixed.port_bus), len(fixed.code)
    y[:] = 0.0
    for p in range(count):
        bus = fixed.port_bus[p]
        real, imaginary = t.row_place[bus], t.row_place[n + bus]
        for w in range(LANES):
            y[real, w] = right[p, w]
            y[imaginary, w] = right[count + p, w]
    for j in range(2 * s):
        row = t.row_place[2 * n + j]
        for w in range(LANES):
            y[row, w] = right[2 * count + j, w]
    _solve(y, t)
    for j in range(x.shape[0]):
        row = t.column_place[j]
        for w in range(LANES):
            x[j, w] = y[row, w]


@_compiled
def _settings(q: Any, k: Any, varying: Any) -> None:
    """Fill the sources' data of the scenarios at hand."""
    for j in range(q.shape[1]):
        for w in range(LANES):
            q[0, j, w] = varying.e_ref[j, k[w] if varying.e_ref.shape[1] > 1 else 0]
            q[1, j, w] = varying.x[j, k[w] if varying.x.shape[1] > 1 else 0]
            q[2, j, w] = varying.a[j, k[w] if varying.a.shape[1] > 1 else 0]
            q[3, j, w] = varying.b[j, k[w] if varying.b.shape[1] > 1 else 0]


@_compiled
def _compare(new: Any, right: Any, residual: Any) -> float:
    """Set each scenario's residual, take the new right-hand side over, return the largest residual."""
    residual[:] = 0.0
    for j in range(new.shape[0]):
        for w in range(LANES):
            change = abs(new[j, w] - right[j, w])
            residual[w] = change if not change <= residual[w] else residual[w]
            right[j, w] = new[j, w]
    worst = 0.0
    for w in range(LANES):
        worst = residual[w] if not residual[w] <= worst else worst
    return worst


@_compiled
def _keep(x: Any, leaf: Any, fixed: Any, found: Any, k: Any) -> None:
    """Write the unknowns into the results of scenarios k."""
    n, s, count = fixed.buses, len(fixed.code), len(k)
    for j in range(n):
        for w in range(count):
            found.v[j, k[w]] = complex(x[j, w], x[n + j, w])
    for j in range(leaf.shape[0]):
        for w in range(count):
            found.v[n + j, k[w]] = complex(leaf[j, 0, w], leaf[j, 1, w])
    for w in range(count):
        for j in range(s):
            found.i[j, k[w]] = complex(x[2 * n + j, w], x[2 * n + s + j, w])
        for j in range(fixed.islands):
            found.m[j, k[w]] = x[2 * n + 2 * s + j, w]


@_compiled
def sweep(part: Any, limits: Any, t: Any, fixed: Any, data: Any) -> None:
    """Solve part of the scenarios, sixteen at a time, each until its residual is accepted.

    Parameters
    ----------
    part : tuple of int
        First scenario, and the one after the last.
    limits : tuple of float and int
        Residual accepted [pu] and largest number of sweeps.
    t : Triangles
        Factors of the Jacobian.
    fixed : Fixed
        What the scenarios share.
    data : tuple of Varying and Found
        What differs, and the results, which are filled.
    """
    first, last = part
    accept, most = limits
    varying, found = data
    s, ports, leaves = len(fixed.code), len(fixed.port_bus), len(fixed.parent)
    size = len(found.start)
    x, y = np.empty((size, LANES)), np.empty((size, LANES))
    drawn, leaf = np.empty((ports, 2, LANES)), np.empty((leaves, 3, LANES))
    d = np.empty((varying.constant.shape[0], 4, LANES))
    q, z = np.empty((4, s, LANES)), np.empty((4 * s, LANES))
    right, new = np.empty((2 * ports + 2 * s, LANES)), np.empty((2 * ports + 2 * s, LANES))
    k, residual = np.empty(LANES, np.int64), np.empty(LANES)
    for begin in range(first, last, LANES):
        for w in range(LANES):
            k[w] = min(begin + w, last - 1)
            residual[w] = np.inf
            found.sweeps[k[w]] = 0
        _load(d, k, fixed, varying)
        _settings(q, k, varying)
        for j in range(size):
            x[j] = found.start[j]
        leaf[:] = 1.0
        count = min(LANES, last - begin)
        for turn in range(most + 1):
            _consumers(d, x, fixed, drawn, leaf)
            _right(fixed, x, drawn, new)
            _sources(q, x, fixed, z, new[2 * ports :])
            if turn == 0:
                right[:] = new
            else:
                for w in range(count):
                    found.sweeps[k[w]] += 1 if residual[w] > accept else 0
                worst = _compare(new, right, residual)
                if worst <= accept or worst > 1e6:
                    break
            _step(t, fixed, right, y, x)
        _keep(x, leaf, fixed, found, k[:count])
        for w in range(count):
            found.residual[k[w]] = residual[w]
