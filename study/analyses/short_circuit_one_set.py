"""The minimum with one supply left in each island: what a device sees after all other sets have tripped.

The minimum case has the sets that the mode runs: those are its sets, and it cannot be carried by fewer. After
the loss of sets, until load is shed or a standby set comes, fewer feed a fault; the least is what a single
one gives. It is shown beside the minimum case, and judges nothing.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from study.analyses.short_circuit_case import CaseCurrents, SolvedCase
from study.analyses.short_circuit_currents import fault_parts, in_amperes, solve_stages
from study.analyses.short_circuit_totals import ac_sums_at
from study.formulas.fault_current import SQRT3
from study.network.fault_network import FaultNetwork, only_sources
from study.network.fault_zero_sequence import zero_sequence
from study.results.arrays import read_only
from study.results.short_circuit import OneSetLeft

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

_AT_S = np.array([0.1, 1.0])


def one_set_case(minimum: SolvedCase) -> CaseCurrents:
    """Return the case with one supply in each island: that which keeps up least, then gives least.

    Parameters
    ----------
    minimum : SolvedCase
        With every supply that the mode runs.

    Returns
    -------
    CaseCurrents
        The minimum itself where no island has more than one supply.
    """
    keep = _least_of_each_island(minimum.net)
    if keep.all():
        return minimum
    net = only_sources(minimum.net, keep)
    stages = solve_stages(net)
    z2 = np.where(stages.negative.fed, stages.negative.z_place, np.inf)
    z0 = zero_sequence(net)
    earth = None
    if np.isfinite(z0).any():
        earth = in_amperes(net, fault_parts(net, stages, z2 + z0, 3.0)[0])
    return CaseCurrents(
        net=net,
        rows=minimum.rows,
        share=minimum.share[:, keep],
        parts=in_amperes(net, fault_parts(net, stages, None, 1.0)[0]),
        two_phase=in_amperes(net, fault_parts(net, stages, z2, SQRT3)[0]),
        earth=earth,
        ends_s=net.sources.ends_s,
    )


def _least_of_each_island(net: FaultNetwork) -> BoolArray:
    s = net.sources
    keep = np.zeros(len(s.supplies), bool)
    for island in np.unique(s.island):
        here = np.flatnonzero(s.island == island)
        least = min(
            here.tolist(),
            key=lambda k: (
                s.bare.current.sustained_a[k],
                s.bare.current.subtransient_a[k],
                s.supplies[k].name,
            ),
        )
        keep[least] = True
    return keep


def one_set_left(case: CaseCurrents, minimum: SolvedCase, device_least_a: FloatArray) -> OneSetLeft:
    """Return the case as a result.

    Parameters
    ----------
    case : CaseCurrents
        Of `one_set_case`.
    minimum : SolvedCase
        The case of the mode.
    device_least_a : ndarray, shape (device,)
        The least fault at the far end of each device when its setting has cleared it. [A]

    Returns
    -------
    OneSetLeft
        [A] at the voltage of each place.
    """
    live = minimum.case.live
    initial = case.parts.subtransient_a.sum(axis=1)
    least = np.full((len(initial), len(_AT_S)), np.inf)
    for fault in (case.parts, case.two_phase, case.earth):
        if fault is not None:
            there = fault.subtransient_a.sum(axis=1) > 0.0
            least[there] = np.minimum(least[there], ac_sums_at(fault, case.ends_s, _AT_S)[there])
    fed = live & (initial > 0.0)

    def only(values: FloatArray) -> FloatArray:
        return read_only(np.where(fed, values, np.nan))

    return OneSetLeft(
        supplies=tuple(s.name for s in case.net.sources.supplies),
        fewer=len(case.net.sources.supplies) < len(minimum.net.sources.supplies),
        ik_initial_a=only(initial),
        least_100ms_a=only(least[:, 0]),
        least_1s_a=only(least[:, 1]),
        device_least_a=read_only(device_least_a),
    )
