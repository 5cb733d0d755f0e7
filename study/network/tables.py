"""The plant as pandapower's tables: plain columns, so that only `solver` needs the library.

Powers are in MW and Mvar there, impedances per unit of the network's base. Every source has a bus of its own,
joined to its terminal by its reactance or, without one, by a closed switch.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from study.model.branches import ThreeWindingTransformer, Transformer
from study.network.network import Network

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
WIDE_Q = 1000.0  # Mvar
Columns = dict[str, NDArray[Any]]


@dataclass(frozen=True, slots=True, kw_only=True)
class Layout:
    """Which row of which table stands for what; rows are numbered from 0 in every table.

    ``impedance``, ``trafo``, ``trafo3w`` and ``tie`` hold places in the topology's branches ([row]; a
    three-winding transformer that of its primary). Source k has hidden bus ``nodes + k``, row ``k`` of
    generators, external grids and static generators, row ``len(impedance) + k`` of impedances and row
    ``len(tie) + k`` of switches. Consumers come first in loads and shunts, then synchronous motors
    or filters.
    """

    nodes: int
    source_names: tuple[str, ...]
    impedance: IntArray
    trafo: IntArray
    trafo3w: IntArray
    tie: IntArray
    loads: int

    def source_row(self, name: str) -> int:
        """Return the row of a source."""
        return self.source_names.index(name)


def layout_of(network: Network) -> Layout:
    """Return the rows of a plant's tables.

    Parameters
    ----------
    network : Network
        Of the plant.

    Returns
    -------
    Layout
        Serves every mode.
    """
    branches, plant = network.topology.branches, network.plant

    def places(wanted: str) -> IntArray:
        return np.array(
            [
                k
                for k, b in enumerate(branches)
                if _table(b.kind, b.without_impedance) == wanted and b.winding in ("", "primary")
            ],
            np.int64,
        )

    names = [g.name for g in plant.gensets] + [s.name for s in plant.shore_supplies]
    names += [c.name for c in plant.converter_supplies]
    return Layout(
        nodes=len(network.topology.nodes),
        source_names=tuple(names),
        impedance=places("impedance"),
        trafo=places("trafo"),
        trafo3w=places("trafo3w"),
        tie=places("switch"),
        loads=len(plant.loads),
    )


def _table(kind: str, without_impedance: bool) -> str:
    if without_impedance:
        return "switch"
    return {"transformer": "trafo", "three-winding transformer": "trafo3w"}.get(kind, "impedance")


def fixed_tables(network: Network, layout: Layout) -> Mapping[str, Columns]:
    """Return every table, all of it out of service: what a mode does not change.

    Parameters
    ----------
    network : Network
        Of the plant.
    layout : Layout
        Its rows.

    Returns
    -------
    mapping of str to dict of ndarray
        Table name to its columns.
    """
    plant, topology = network.plant, network.topology
    node_of_source = np.array([topology.node_of[n] for n in layout.source_names], np.int64)
    hidden = layout.nodes + np.arange(len(layout.source_names))
    u_kv = network.u_base_v / 1000.0
    names = [f"{n.owner} {n.kind}" if n.kind != "board" else n.owner for n in topology.nodes]
    loads = np.array([topology.node_of[x.name] for x in plant.loads], np.int64)
    motors = np.array([topology.node_of[m.name] for m in plant.synchronous_motors], np.int64)
    filters = np.array(topology.filter_node, np.int64)
    s_base = network.s_base_kva / 1000.0
    return {
        "bus": {
            "name": np.array([*names, *(f"EMF of {n}" for n in layout.source_names)], object),
            "vn_kv": np.concatenate([u_kv, u_kv[node_of_source]]),
            "type": np.full(len(u_kv) + len(hidden), "b", object),
            "in_service": np.zeros(len(u_kv) + len(hidden), bool),
        },
        "impedance": _impedance_table(network, layout, hidden, node_of_source, s_base),
        "trafo": _trafo_table(network, layout),
        "trafo3w": _trafo3w_table(network, layout),
        "switch": _switch_table(network, layout, hidden, node_of_source),
        "gen": _source_table(layout, hidden, "gen"),
        "ext_grid": _source_table(layout, hidden, "ext_grid"),
        "sgen": _source_table(layout, node_of_source, "sgen"),
        "load": {
            "name": np.array(
                [*(x.name for x in plant.loads), *(m.name for m in plant.synchronous_motors)], object
            ),
            **_power_columns(np.concatenate([loads, motors])),
            **{f"const_{c}_{p}_percent": np.zeros(len(loads) + len(motors)) for c in "zi" for p in "pq"},
            "scaling": np.ones(len(loads) + len(motors)),
        },
        "shunt": {
            "name": np.array([*(x.name for x in plant.loads), *(f.name for f in plant.filters)], object),
            **_power_columns(np.concatenate([loads, filters])),
            "vn_kv": np.concatenate([u_kv[loads], u_kv[filters]]),
            "step": np.ones(len(loads) + len(filters)),
            "max_step": np.ones(len(loads) + len(filters), np.uint32),
            "step_dependency_table": np.zeros(len(loads) + len(filters), bool),
        },
    }


def _power_columns(bus: IntArray) -> Columns:
    zero = np.zeros(len(bus))
    return {"bus": bus, "p_mw": zero, "q_mvar": zero.copy(), "in_service": np.zeros(len(bus), bool)}


def _impedance_table(
    network: Network, layout: Layout, hidden: IntArray, terminal: IntArray, s_base_mva: float
) -> Columns:
    k = layout.impedance
    count = len(k) + len(hidden)
    names = [network.topology.branches[n].name for n in k] + [
        f"reactance of {n}" for n in layout.source_names
    ]
    zero_columns = ("rft_pu", "xft_pu", "rtf_pu", "xtf_pu", "gf_pu", "bf_pu", "gt_pu", "bt_pu")
    return {
        "name": np.array(names, object),
        "from_bus": np.concatenate([network.branches.from_node[k], hidden]),
        "to_bus": np.concatenate([network.branches.to_node[k], terminal]),
        **{c: np.zeros(count) for c in zero_columns},
        "sn_mva": np.full(count, s_base_mva),
        "in_service": np.zeros(count, bool),
    }


def _trafo_table(network: Network, layout: Layout) -> Columns:
    items: list[Transformer] = [
        network.plant.transformers[network.topology.branches[k].index] for k in layout.trafo
    ]
    branches = network.branches
    return {
        "name": np.array([t.name for t in items], object),
        "hv_bus": branches.from_node[layout.trafo],
        "lv_bus": branches.to_node[layout.trafo],
        "sn_mva": _numbers(items, "s_rated_kva", 1e-3),
        "vn_hv_kv": _numbers(items, "u_primary_v", 1e-3),
        "vn_lv_kv": _numbers(items, "u_secondary_v", 1e-3),
        "vk_percent": _numbers(items, "u_k_pu", 100.0),
        "vkr_percent": np.array([100.0 * t.copper_loss_kw / t.s_rated_kva for t in items]),
        "pfe_kw": _numbers(items, "iron_loss_kw", 1.0),
        "i0_percent": np.zeros(len(items)),
        "shift_degree": np.zeros(len(items)),
        **_tap_columns(len(items)),
        "parallel": np.array([t.units for t in items], np.uint32),
        "df": np.ones(len(items)),
        "in_service": np.zeros(len(items), bool),
    }


def _trafo3w_table(network: Network, layout: Layout) -> Columns:
    items: list[ThreeWindingTransformer] = [
        network.plant.three_winding[network.topology.branches[k].index] for k in layout.trafo3w
    ]
    pairs = {"hv": "primary_secondary", "mv": "secondary_tertiary", "lv": "primary_tertiary"}
    least = {"hv": ("primary", "secondary"), "mv": ("secondary", "tertiary"), "lv": ("primary", "tertiary")}
    sides = {"hv": "primary", "mv": "secondary", "lv": "tertiary"}
    primary, branches = layout.trafo3w, network.branches  # secondary and tertiary follow in the topology
    columns: Columns = {
        "name": np.array([t.name for t in items], object),
        "hv_bus": branches.from_node[primary],
        "mv_bus": branches.to_node[primary + 1],
        "lv_bus": branches.to_node[primary + 2],
    }
    for side, word in sides.items():
        columns[f"sn_{side}_mva"] = _numbers(items, f"s_{word}_kva", 1e-3)
        columns[f"vn_{side}_kv"] = _numbers(items, f"u_{word}_v", 1e-3)
        columns[f"vk_{side}_percent"] = _numbers(items, f"u_k_{pairs[side]}_pu", 100.0)
        columns[f"vkr_{side}_percent"] = np.array(
            [
                100.0
                * getattr(t, f"copper_loss_{pairs[side]}_kw")
                / min(getattr(t, f"s_{w}_kva") for w in least[side])
                for t in items
            ]
        )
    zero = np.zeros(len(items))
    columns |= {"pfe_kw": _numbers(items, "iron_loss_kw", 1.0), "i0_percent": zero}
    columns |= {"shift_mv_degree": zero, "shift_lv_degree": zero, **_tap_columns(len(items))}
    columns |= {
        "tap_at_star_point": np.zeros(len(items), bool),
        "in_service": np.zeros(len(items), bool),
    }
    return columns


def _tap_columns(count: int) -> Columns:
    """Return the columns of a tap on the primary: position 1 of steps as wide as the tap."""
    return {
        "tap_side": np.full(count, "hv", object),
        "tap_neutral": np.zeros(count),
        "tap_min": np.zeros(count),
        "tap_max": np.ones(count),
        "tap_step_percent": np.zeros(count),
        "tap_step_degree": np.zeros(count),
        "tap_pos": np.ones(count),
        "tap_changer_type": np.full(count, "Ratio", object),
        "tap_dependency_table": np.zeros(count, bool),
    }


def _numbers(
    items: list[Transformer] | list[ThreeWindingTransformer], name: str, factor: float
) -> FloatArray:
    return np.array([factor * getattr(t, name) for t in items], float)


def _switch_table(network: Network, layout: Layout, hidden: IntArray, terminal: IntArray) -> Columns:
    count = len(layout.tie) + len(hidden)
    names = [network.topology.branches[k].name for k in layout.tie]
    return {
        "bus": np.concatenate([network.branches.from_node[layout.tie], hidden]),
        "element": np.concatenate([network.branches.to_node[layout.tie], terminal]),
        "et": np.full(count, "b", object),
        "type": np.full(count, "CB", object),
        "closed": np.zeros(count, bool),
        "name": np.array([*names, *(f"{n} without reactance" for n in layout.source_names)], object),
        "z_ohm": np.zeros(count),
    }


def _source_table(layout: Layout, bus: IntArray, table: str) -> Columns:
    count = len(layout.source_names)
    columns: Columns = {
        "name": np.array(layout.source_names, object),
        "bus": bus,
        "in_service": np.zeros(count, bool),
    }
    if table == "ext_grid":
        return columns | {
            "vm_pu": np.ones(count),
            "va_degree": np.zeros(count),
            "slack_weight": np.ones(count),
            "controllable": np.ones(count, bool),
        }
    columns |= {"p_mw": np.zeros(count), "scaling": np.ones(count)}
    if table == "gen":
        # Wide but finite: pandapower splits kvar by these, and 1e9 Mvar would cost seven digits.
        wide = np.full(count, WIDE_Q)
        columns |= {"vm_pu": np.ones(count), "slack": np.zeros(count, bool)}
        columns |= {"min_q_mvar": -wide, "max_q_mvar": wide}
        return columns | {"slack_weight": np.zeros(count), "controllable": np.ones(count, bool)}
    return columns | {"q_mvar": np.zeros(count), "current_source": np.ones(count, bool)}
