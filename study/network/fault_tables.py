"""The columns of pandapower's tables for a fault network, so that only `solver_faults` needs the library."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from study.formulas.fault_iec60909 import LvTolerance
from study.model.branches import ThreeWindingTransformer, Transformer
from study.model.sources import Genset, SynchronousMotor
from study.network.fault_general import motor_ratio, three_winding_factor
from study.network.fault_network import FaultNetwork
from study.network.fault_supplies import Supply

Columns = dict[str, Any]
_PAIRS = (("primary", "secondary"), ("primary", "tertiary"), ("secondary", "tertiary"))
_THREE_WINDING_C = 1.1


def two_winding_columns(rows: Sequence[tuple[Transformer, tuple[int, int], float]]) -> Columns:
    """Return the transformers, each with its two buses and its tap (in the rated voltage of the primary).

    Parameters
    ----------
    rows : sequence of tuple
        Transformer, buses, change of primary turns. [pu]

    Returns
    -------
    dict
        Columns of ``trafo``.
    """
    return {
        "name": [t.name for t, _, _ in rows],
        "hv_bus": [e[0] for _, e, _ in rows],
        "lv_bus": [e[1] for _, e, _ in rows],
        "sn_mva": [t.s_rated_kva / 1000.0 for t, _, _ in rows],
        "vn_hv_kv": [t.u_primary_v / 1000.0 * (1.0 + tap) for t, _, tap in rows],
        "vn_lv_kv": [t.u_secondary_v / 1000.0 for t, _, _ in rows],
        "vk_percent": [100.0 * t.u_k_pu for t, _, _ in rows],
        "vkr_percent": [100.0 * t.copper_loss_kw / t.s_rated_kva for t, _, _ in rows],
        "pfe_kw": [0.0] * len(rows),
        "i0_percent": [0.0] * len(rows),
        "shift_degree": [0.0] * len(rows),
        "tap_pos": [0.0] * len(rows),
        "parallel": [t.units for t, _, _ in rows],
        "df": [1.0] * len(rows),
        "in_service": [True] * len(rows),
    }


def three_winding_columns(
    net: FaultNetwork,
    rows: Sequence[tuple[ThreeWindingTransformer, tuple[int, int, int], float]],
    tolerance: LvTolerance,
) -> Columns:
    """Return the three-winding transformers, each with its buses and its tap.

    Parameters
    ----------
    net : FaultNetwork
        Holds the voltages.
    rows : sequence of tuple
        Transformer, buses of primary, secondary and tertiary, change of primary turns. [pu]
    tolerance : {6, 10}
        Chooses the voltage factors.

    Returns
    -------
    dict
        Columns of ``trafo3w``.
    """
    items = [t for t, _, _ in rows]
    columns: dict[str, Any] = {
        "name": [t.name for t in items],
        "hv_bus": [b[0] for _, b, _ in rows],
        "mv_bus": [b[1] for _, b, _ in rows],
        "lv_bus": [b[2] for _, b, _ in rows],
        "vn_hv_kv": [t.u_primary_v / 1000.0 * (1.0 + tap) for t, _, tap in rows],
        "vn_mv_kv": [t.u_secondary_v / 1000.0 for t in items],
        "vn_lv_kv": [t.u_tertiary_v / 1000.0 for t in items],
        "sn_hv_mva": [t.s_primary_kva / 1000.0 for t in items],
        "sn_mv_mva": [t.s_secondary_kva / 1000.0 for t in items],
        "sn_lv_mva": [t.s_tertiary_kva / 1000.0 for t in items],
    }
    pairs = {
        "hv": ("primary", "secondary"),
        "mv": ("secondary", "tertiary"),
        "lv": ("primary", "tertiary"),
    }
    for side, (one, other) in pairs.items():
        rows_of = [_pair(net, t, one, other, tolerance) for t in items]
        columns[f"vk_{side}_percent"] = [100.0 * abs(z) for z in rows_of]
        columns[f"vkr_{side}_percent"] = [100.0 * z.real for z in rows_of]
    zero = [0.0] * len(rows)
    columns |= {"pfe_kw": zero, "i0_percent": zero, "shift_mv_degree": zero, "shift_lv_degree": zero}
    columns |= {
        "tap_pos": zero,
        "tap_at_star_point": [False] * len(rows),
        "in_service": [True] * len(rows),
    }
    return columns


def _pair(
    net: FaultNetwork, t: ThreeWindingTransformer, one: str, other: str, tolerance: LvTolerance
) -> complex:
    """Return the short-circuit impedance of a pair, so that the library's correction gives ours.

    It takes c = 1.1 for every three-winding transformer, whatever the voltage of its lower side.
    """
    r = getattr(t, f"copper_loss_{one}_{other}_kw") / min(
        getattr(t, f"s_{one}_kva"), getattr(t, f"s_{other}_kva")
    )
    z = complex(r, (getattr(t, f"u_k_{one}_{other}_pu") ** 2 - r * r) ** 0.5)
    if not net.options.maximum:
        return z
    c = dict(zip(_PAIRS, three_winding_factor(net, t, tolerance), strict=True))[one, other]
    return z * c / (_THREE_WINDING_C * (1.0 + 0.6 * z.imag) - 0.6 * z.imag * c)


def generator_columns(items: Sequence[Genset | SynchronousMotor], buses: Sequence[int]) -> Columns:
    """Return the sets and synchronous motors; their resistance is set later.

    Parameters
    ----------
    items : sequence of Genset or SynchronousMotor
        The machines.
    buses : sequence of int
        Their buses.

    Returns
    -------
    dict
        Columns of ``gen``.
    """
    return {
        "name": [x.name for x in items],
        "bus": list(buses),
        "p_mw": [0.0] * len(items),
        "vm_pu": [1.0] * len(items),
        "sn_mva": [x.s_rated_kva / 1000.0 for x in items],
        "scaling": [1.0] * len(items),
        "slack": [False] * len(items),
        "in_service": [True] * len(items),
        "slack_weight": [0.0] * len(items),
        "vn_kv": [x.u_rated_v / 1000.0 for x in items],
        "xdss_pu": [x.machine.x_d2_saturated_pu for x in items],
        "rdss_ohm": [0.0] * len(items),
        "cos_phi": [x.cos_phi_rated for x in items],
        "pg_percent": [0.0] * len(items),
        "power_station_trafo": [np.nan] * len(items),
    }


def shore_columns(rows: Sequence[tuple[int, Supply]], s_base_mva: float) -> Columns:
    """Return the shore supplies by fault level, on the voltage of their level.

    Parameters
    ----------
    rows : sequence of tuple
        Bus and supply.
    s_base_mva : float
        Base power. [MVA]

    Returns
    -------
    dict
        Columns of ``ext_grid``.
    """
    level = [s_base_mva / s.pu * s.voltage**2 for _, s in rows]
    ratio = [s.r_over_x for _, s in rows]
    return {
        "name": [s.name for _, s in rows],
        "bus": [b for b, _ in rows],
        "vm_pu": [1.0] * len(rows),
        "va_degree": [0.0] * len(rows),
        "in_service": [True] * len(rows),
        "s_sc_max_mva": level,
        "s_sc_min_mva": level,
        "rx_max": ratio,
        "rx_min": ratio,
    }


def motor_columns(
    rows: Sequence[tuple[int, float, Supply]], u_v: Sequence[float], s_base_mva: float
) -> Columns:
    """Return motors or parts of a group of them, by rating and starting current.

    Parameters
    ----------
    rows : sequence of tuple
        Bus, part of the group, supply.
    u_v : sequence of float
        Voltage of their levels. [V]
    s_base_mva : float
        Base power. [MVA]

    Returns
    -------
    dict
        Columns of ``motor``.
    """
    return {
        "name": [s.name for _, _, s in rows],
        "bus": [b for b, _, _ in rows],
        "pn_mech_mw": [s_base_mva / s.pu * part for _, part, s in rows],
        "loading_percent": [100.0] * len(rows),
        "cos_phi": [1.0] * len(rows),
        "cos_phi_n": [1.0] * len(rows),
        "efficiency_percent": [100.0] * len(rows),
        "efficiency_n_percent": [100.0] * len(rows),
        "lrc_pu": [s.starting for _, _, s in rows],
        "rx": [motor_ratio(s, u) for (_, _, s), u in zip(rows, u_v, strict=True)],
        "vn_kv": [u / 1000.0 for u in u_v],
        "scaling": [1.0] * len(rows),
        "in_service": [True] * len(rows),
    }
