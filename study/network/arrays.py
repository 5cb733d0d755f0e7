"""The plant's branches and consumers as per-unit arrays, on one base power and a base voltage for each level.

Impedances are at rated frequency; `admittance` takes them to another. Nothing here depends on the mode.
"""

from __future__ import annotations

from dataclasses import dataclass
from types import MappingProxyType
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.model.branches import Cable, ThreeWindingTransformer, Transformer
from study.model.loads import Load
from study.model.plant import Plant
from study.network.cable_data import cable_ohm_per_km
from study.network.topology import Branch, Topology

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

# Part of a consumer's power that stays constant when the voltage moves; the rest is an impedance.
# Common practice, no source: an induction motor on its pump or fan and a regulated converter keep their
# power, a heater and lamps behind a transformer follow the square of the voltage, a mixed board lies between.
CONSTANT_POWER_SHARE: Final = MappingProxyType(
    {"motor": 1.0, "converter": 1.0, "heating": 0.0, "lighting": 0.0, "general": 0.5}
)
PHASE_VOLTAGE_TOLERANCE = 0.15  # a single-phase consumer within this of U/sqrt(3) is taken as line to neutral


@dataclass(frozen=True, slots=True, kw_only=True)
class BranchArrays:
    """Branches, arrays [branch], per unit of base power and the base voltage of the `to` end.

    ``g`` and ``b`` are the whole shunt admittance, half of it at each end; ``ratio`` the off-nominal turns
    ratio at the `from` end. ``load`` is the consumer that the branch runs to, -1 for none: its impedance and
    ``ampere_factor`` are then for one unit. Current in A is ``ampere_factor`` x S / (sqrt(3) U).
    """

    from_node: IntArray
    to_node: IntArray
    r_pu: FloatArray
    x_pu: FloatArray
    g_pu: FloatArray
    b_pu: FloatArray
    ratio: FloatArray
    load: IntArray
    ampere_factor: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadArrays:
    """Consumers, arrays [load].

    ``constant_power`` is the share of power that does not follow the voltage; the rest follows the square of
    V x ``v_scale``, which is per unit of the consumer's own rated voltage where V is that of its node.
    """

    constant_power: FloatArray
    v_scale: FloatArray


def base_power_kva(plant: Plant) -> float:
    """Return the base power: the sum of all source ratings.

    It only scales the numbers; a base of the plant's own size keeps them near one.

    Parameters
    ----------
    plant : Plant
        The whole plant.

    Returns
    -------
    float
        Base. [kVA]
    """
    ratings = [g.s_rated_kva for g in plant.gensets]
    ratings += [c.s_rated_kva for c in plant.converter_supplies]
    ratings += [3.0**0.5 * s.u_rated_v * s.i_rated_a / 1000.0 for s in plant.shore_supplies]
    return float(sum(ratings)) or 1000.0


def branch_arrays(plant: Plant, topology: Topology, s_base_kva: float) -> BranchArrays:
    """Return every branch per unit, at rated frequency and the transformers' own taps.

    Parameters
    ----------
    plant : Plant
        The whole plant.
    topology : Topology
        Its nodes and branches.
    s_base_kva : float
        Base power. [kVA]

    Returns
    -------
    BranchArrays
        In the topology's order.
    """
    count = len(topology.branches)
    columns = {name: np.zeros(count) for name in ("r_pu", "x_pu", "g_pu", "b_pu", "ratio", "ampere_factor")}
    load_index = {x.name: i for i, x in enumerate(plant.loads)}
    for k, branch in enumerate(topology.branches):
        load = plant.loads[load_index[branch.load]] if branch.load in load_index else None
        row = _branch_row(plant, topology, branch, load, s_base_kva)
        for name, value in zip(columns, row, strict=True):
            columns[name][k] = value
    return BranchArrays(
        from_node=np.array([b.from_node for b in topology.branches], np.int64),
        to_node=np.array([b.to_node for b in topology.branches], np.int64),
        load=np.array([load_index.get(b.load, -1) for b in topology.branches], np.int64),
        **columns,
    )


def _branch_row(
    plant: Plant, topology: Topology, branch: Branch, load: Load | None, s_base_kva: float
) -> tuple[float, float, float, float, float, float]:
    """Return r, x, g, b, ratio and ampere factor of one branch."""
    u_from, u_to = topology.nodes[branch.from_node].u_base_v, topology.nodes[branch.to_node].u_base_v
    z_base = u_to**2 / (1000.0 * s_base_kva)
    match branch.kind:
        case "transformer":
            return _transformer_row(plant.transformers[branch.index], u_from, u_to, s_base_kva)
        case "three-winding transformer":
            return _winding_row(plant.three_winding[branch.index], branch.winding, u_from, u_to, s_base_kva)
        case "cable":
            return _cable_row(plant.cables[branch.index], load, u_to, z_base, plant.project.f_rated_hz)
        case "tie" | "reactor":
            item = plant.ties[branch.index] if branch.kind == "tie" else plant.reactors[branch.index]
            return item.r_ohm / z_base, item.x_ohm / z_base, 0.0, 0.0, 1.0, 1.0
    raise ValueError(f"unknown kind of branch {branch.kind!r}")


def _cable_row(
    cable: Cable, load: Load | None, u_v: float, z_base_ohm: float, f_hz: float
) -> tuple[float, float, float, float, float, float]:
    impedance_factor, ampere_factor = (1.0, 1.0) if load is None else _phase_factors(load, u_v)
    r, x = cable_ohm_per_km(cable, f_hz)
    per_run = impedance_factor * cable.length_m / 1000.0 / cable.runs / z_base_ohm
    c_farad = (cable.capacitance_uf_per_km or 0.0) * 1e-6 * cable.length_m / 1000.0 * cable.runs
    b_pu = 2.0 * np.pi * f_hz * c_farad * z_base_ohm
    return r * per_run, x * per_run, 0.0, float(b_pu), 1.0, ampere_factor


def _phase_factors(load: Load, u_v: float) -> tuple[float, float]:
    """Return impedance and current factors of a run to a consumer that is not three-phase.

    Out and back: the drop is 2 Z I where it is sqrt(3) Z I in a three-phase run. A line-to-line consumer
    draws S/U = sqrt(3) S/(sqrt(3) U), one from line to neutral 3 S/(sqrt(3) U), with 2 x 3 in the impedance.
    """
    if load.phases == 3:
        return 1.0, 1.0
    return (6.0, 3.0) if _is_line_to_neutral(load, u_v) else (2.0, 3.0**0.5)


def _is_line_to_neutral(load: Load, u_v: float) -> bool:
    if load.phases != 1:
        return False
    return bool(abs(load.u_rated_v * 3.0**0.5 / u_v - 1.0) < PHASE_VOLTAGE_TOLERANCE)


def _transformer_row(
    t: Transformer, u_from_v: float, u_to_v: float, s_base_kva: float
) -> tuple[float, float, float, float, float, float]:
    """Return a transformer's row: impedance and iron loss on its secondary, taps on the primary."""
    scale = (t.u_secondary_v / u_to_v) ** 2 * s_base_kva / (t.s_rated_kva * t.units)
    r_own = t.copper_loss_kw / t.s_rated_kva
    x_own = _rest(t.u_k_pu, r_own)
    g = t.units * t.iron_loss_kw / s_base_kva * (u_to_v / t.u_secondary_v) ** 2
    return r_own * scale, x_own * scale, g, 0.0, transformer_ratio(t, t.tap_pu, u_from_v, u_to_v), 1.0


def transformer_ratio(
    t: Transformer | ThreeWindingTransformer, tap_pu: float, u_from_v: float, u_to_v: float
) -> float:
    """Return the off-nominal ratio of a transformer at a tap; for three windings that of the primary.

    Parameters
    ----------
    t : Transformer or ThreeWindingTransformer
        The transformer.
    tap_pu : float
        Change of primary turns. [pu]
    u_from_v, u_to_v : float
        Base voltages of the two ends. [V]

    Returns
    -------
    float
        Ratio.
    """
    if isinstance(t, ThreeWindingTransformer):
        return 1.0 + tap_pu
    return (1.0 + tap_pu) * (t.u_primary_v / u_from_v) / (t.u_secondary_v / u_to_v)


def _winding_row(
    t: ThreeWindingTransformer, winding: str, u_from_v: float, u_to_v: float, s_base_kva: float
) -> tuple[float, float, float, float, float, float]:
    """Return one leg of the star that stands for a three-winding transformer."""
    s_p, s_s, s_t = t.s_primary_kva, t.s_secondary_kva, t.s_tertiary_kva
    ps = _pair(t.u_k_primary_secondary_pu, t.copper_loss_primary_secondary_kw, min(s_p, s_s))
    pt = _pair(t.u_k_primary_tertiary_pu, t.copper_loss_primary_tertiary_kw, min(s_p, s_t))
    st = _pair(t.u_k_secondary_tertiary_pu, t.copper_loss_secondary_tertiary_kw, min(s_s, s_t))
    legs = {
        "primary": (ps + pt - st, t.u_primary_v),
        "secondary": (ps + st - pt, t.u_secondary_v),
        "tertiary": (pt + st - ps, t.u_tertiary_v),
    }
    z_per_kva, u_own = legs[winding]
    z = 0.5 * z_per_kva * s_base_kva * (u_own / u_to_v) ** 2
    if winding == "primary":
        g = t.iron_loss_kw / s_base_kva * (u_to_v / t.u_primary_v) ** 2
        return z.real, z.imag, g, 0.0, transformer_ratio(t, t.tap_pu, u_from_v, u_to_v), 1.0
    return z.real, z.imag, 0.0, 0.0, (t.u_primary_v / u_from_v) / (u_own / u_to_v), 1.0


def _pair(u_k_pu: float, copper_loss_kw: float, s_kva: float) -> complex:
    """Return the short-circuit impedance between two windings per unit and kVA of base."""
    r = copper_loss_kw / s_kva
    return complex(r, _rest(u_k_pu, r)) / s_kva


def _rest(z: float, r: float) -> float:
    if r > z:
        raise ValueError(f"copper loss alone ({r:.4f} pu) exceeds the short-circuit voltage ({z:.4f} pu)")
    return float((z * z - r * r) ** 0.5)


def load_arrays(plant: Plant, u_base_v: FloatArray) -> LoadArrays:
    """Return how every consumer follows the voltage.

    Parameters
    ----------
    plant : Plant
        The whole plant.
    u_base_v : ndarray, shape (load,)
        Base voltage of each consumer's node. [V]

    Returns
    -------
    LoadArrays
        In workbook order.
    """
    u_line = [
        x.u_rated_v * (3.0**0.5 if _is_line_to_neutral(x, u) else 1.0)
        for x, u in zip(plant.loads, u_base_v, strict=True)
    ]
    return LoadArrays(
        constant_power=np.array([CONSTANT_POWER_SHARE[x.kind] for x in plant.loads], float),
        v_scale=np.asarray(u_base_v, float) / np.array(u_line, float) if u_line else np.zeros(0),
    )
