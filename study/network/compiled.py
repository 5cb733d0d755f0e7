"""The compiled sweep set up and shared out among threads."""

from __future__ import annotations

import os
from concurrent.futures import ThreadPoolExecutor

import numpy as np

from study.network.consumers import drawn_by
from study.network.equations import Point, Problem, sparse_jacobian
from study.network.kernel import LANES, sweep
from study.network.kernel_data import Fixed, Found, Varying, triangles
from study.network.scenarios import Solutions
from study.network.sources import Law


def solve_compiled(problem: Problem, base: Point, out: Solutions, most_sweeps: int) -> None:
    """Solve all scenarios of a problem with the compiled sweep.

    Parameters
    ----------
    problem : Problem
        Scenarios; no law of a constant field among them, and no varying droop of a cross-current group.
    base : Point
        Solution of the mean scenario.
    out : Solutions
        Is filled.
    most_sweeps : int
        Largest number of sweeps for one scenario.

    Raises
    ------
    ValueError
        There is such a law, or such a droop.
    """
    if (problem.laws.code == Law.FIELD).any():
        raise ValueError("the compiled sweep has no law of a constant field")
    if problem.laws.crossed and problem.laws.cross_x.shape[1] > 1:
        raise ValueError("the compiled sweep has one droop of a cross-current group for all scenarios")
    mean, at = problem.column(None), problem.at
    fixed, accept = _fixed(mean, base), at.accept
    laws, power, demand = problem.laws, problem.power, problem.demand
    varying = Varying(
        constant=np.ascontiguousarray(demand.constant),
        impedance=np.ascontiguousarray(demand.impedance),
        e_ref=np.ascontiguousarray(laws.e_ref),
        x=np.ascontiguousarray(laws.x),
        a=np.ascontiguousarray(power.a),
        b=np.ascontiguousarray(power.b),
    )
    parts = (base.v.real, base.v.imag, base.i.real, base.i.imag, base.m)
    start = np.concatenate([part[:, 0] for part in parts])
    found = Found(out.v, out.i, out.m, out.residual_pu, out.iterations, start)
    factors = triangles(sparse_jacobian(mean, base))
    count, threads = out.v.shape[1], len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else 1
    share = -(-count // (4 * threads * LANES)) * LANES
    with ThreadPoolExecutor(threads) as pool:
        tasks = [
            pool.submit(
                sweep,
                (first, min(first + share, count)),
                (accept, most_sweeps),
                factors,
                fixed,
                (varying, found),
            )
            for first in range(0, count, share)
        ]
    for task in tasks:
        task.result()
    out.residual_pu[np.isnan(out.residual_pu)] = np.inf
    out.converged[:] = out.residual_pu <= accept


def _fixed(mean: Problem, base: Point) -> Fixed:
    at, laws, ports = mean.at, mean.laws, mean.at.ports
    v_s, s = base.v[at.source_bus, 0], at.sources
    return Fixed(
        port_bus=ports.bus,
        direct=ports.direct,
        parent=ports.parent,
        into=ports.into[:, 0].copy(),
        out=ports.out[:, 0].copy(),
        own=ports.own[:, 0].copy(),
        by_load=drawn_by(ports, mean.demand).gradient(base.v[ports.bus]),
        source_bus=at.source_bus,
        source_island=at.source_island,
        code=laws.code,
        v0=v_s,
        i0=base.i[:, 0].copy(),
        b0=np.where(laws.code == Law.BEHIND_IMPEDANCE, 0.0, mean.power.b[:, 0]),
        by_law=np.ascontiguousarray(laws.gradient(v_s, base.i[:, 0]).reshape(s, 4 * s)),
        r=laws.r[:, 0].copy(),
        cross=np.ascontiguousarray(laws.cross_x * laws.cross),
        q_set=laws.q_set[:, 0].copy(),
        q_per_p=laws.q_per_p[:, 0].copy(),
        i_max=laws.i_max[:, 0].copy(),
        buses=at.buses,
        islands=at.islands,
    )
