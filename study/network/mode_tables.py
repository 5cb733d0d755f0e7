"""What a mode writes into pandapower's tables: branches, ties, taps, consumers."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from study.network.network import ModeNetwork
from study.network.tables import Layout

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]


def mode_columns(at: ModeNetwork, layout: Layout) -> Mapping[tuple[str, str], NDArray[Any]]:
    """Return the columns that a mode switches: branches, ties, taps.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    layout : Layout
        The plant's rows.

    Returns
    -------
    mapping of (table, column) to ndarray
        The branches' part of each column; sources' rows behind them are not in it.
    """
    branches, closed = at.network.branches, np.array(at.view.closed, bool)
    units, order = np.ones(len(closed)), np.ones(len(closed))
    units[at.live] = at.units
    order[at.live] = at.order[np.array(at.view.island)[branches.from_node[at.live]]]
    k = layout.impedance
    out: dict[tuple[str, str], NDArray[Any]] = {}
    for column, value in (
        ("r", branches.r_pu[k] / units[k]),
        ("x", branches.x_pu[k] * order[k] / units[k]),
    ):
        out["impedance", f"{column}ft_pu"] = out["impedance", f"{column}tf_pu"] = value
    for column, value in (("g", branches.g_pu), ("b", branches.b_pu * order)):
        half = 0.5 * value[k] * units[k]
        out["impedance", f"{column}f_pu"] = out["impedance", f"{column}t_pu"] = half
    out["impedance", "in_service"] = closed[k]
    out["trafo", "in_service"] = closed[layout.trafo]
    out["trafo3w", "in_service"] = closed[layout.trafo3w]
    out["switch", "closed"] = closed[layout.tie]
    out["trafo", "tap_step_percent"] = 100.0 * _taps(at, layout.trafo)
    out["trafo3w", "tap_step_percent"] = 100.0 * _taps(at, layout.trafo3w)
    z, r = _at_order(at, layout.trafo, order)
    out["trafo", "vk_percent"], out["trafo", "vkr_percent"] = z, r
    return out


def _taps(at: ModeNetwork, places: IntArray) -> FloatArray:
    plant, out = at.network.plant, np.zeros(len(places))
    for n, k in enumerate(places):
        branch = at.network.topology.branches[k]
        items = plant.transformers if branch.kind == "transformer" else plant.three_winding
        point = at.mode.set_points.get(branch.name)
        own = items[branch.index].tap_pu
        out[n] = own if point is None or point.tap_pu is None else point.tap_pu
    return out


def _at_order(at: ModeNetwork, places: IntArray, order: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return short-circuit voltage and its resistive part at the island's frequency, in %."""
    items = [at.network.plant.transformers[at.network.topology.branches[k].index] for k in places]
    r = np.array([100.0 * t.copper_loss_kw / t.s_rated_kva for t in items], float)
    z = np.array([100.0 * t.u_k_pu for t in items], float)
    x = np.sqrt(z * z - r * r) * order[places]
    return np.hypot(r, x), r


def consumer_columns(
    at: ModeNetwork, layout: Layout, p_kw: FloatArray, q_kvar: FloatArray
) -> Mapping[tuple[str, str], NDArray[Any]]:
    """Return the columns of loads and shunts for what the consumers ask.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    layout : Layout
        The plant's rows.
    p_kw, q_kvar : ndarray, shape (load,)
        At the consumers' rated voltage. [kW], [kvar]

    Returns
    -------
    mapping of (table, column) to ndarray
        Whole columns.
    """
    fed, share = at.load_bus >= 0, at.load_arrays.constant_power
    motor, s_base = at.motor_kva / 1000.0, at.network.s_base_kva / 1000.0
    filters = np.conj(at.filter_pu) * s_base
    by_square = (1.0 - share) * at.load_arrays.v_scale**2 / 1000.0
    moved = np.array(at.view.load_node, np.int64)
    u_kv = at.network.u_base_v / 1000.0
    filter_node = np.array(at.network.topology.filter_node, np.int64)
    motor_node = np.array(
        [at.network.topology.node_of[m.name] for m in at.network.plant.synchronous_motors], np.int64
    )
    return {
        ("load", "bus"): np.concatenate([moved, motor_node]),
        ("load", "p_mw"): np.concatenate([p_kw * share / 1000.0, motor.real]),
        ("load", "q_mvar"): np.concatenate([q_kvar * share / 1000.0, motor.imag]),
        ("load", "in_service"): np.concatenate([fed & (share > 0.0), motor != 0.0]),
        ("shunt", "bus"): np.concatenate([moved, filter_node]),
        ("shunt", "vn_kv"): np.concatenate([u_kv[moved], u_kv[filter_node]]),
        ("shunt", "p_mw"): np.concatenate([p_kw * by_square, filters.real]),
        ("shunt", "q_mvar"): np.concatenate([q_kvar * by_square, filters.imag]),
        ("shunt", "in_service"): np.concatenate([fed & (share < 1.0), filters != 0.0]),
    }
