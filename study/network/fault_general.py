"""Impedances of IEC 60909 for a fault network: corrected sources and transformers, per unit."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from study.formulas.fault_iec60909 import LvTolerance, voltage_factor
from study.formulas.fault_iec60909_equipment import (
    generator_correction,
    generator_fictitious_resistance_ohm,
    motor_r_over_x,
    three_winding_star,
    transformer_correction,
)
from study.formulas.fault_iec60909_nodal import admittance_matrix
from study.model.branches import ThreeWindingTransformer
from study.model.sources import Genset, SynchronousMotor
from study.network.fault_network import FaultNetwork
from study.network.fault_sources import LARGE
from study.network.fault_supplies import DRIVE_R_OVER_X, Supply

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, kw_only=True)
class GeneralSources:
    """Sources as IEC 60909 has them, [source], per unit of the network's base, at their own terminals.

    ``z`` is with the real resistance, ``z_peak`` with the fictitious one of generators, for the peak alone.
    ``rated`` is rated current, ``mw_per_pole_pair`` of motors (0 for others). Converter supplies are no
    impedance (``z`` is `LARGE`): they add their limited current.
    """

    z: ComplexArray
    z_peak: ComplexArray
    rated: FloatArray
    mw_per_pole_pair: FloatArray


def general_network(net: FaultNetwork, lv_tolerance_percent: LvTolerance) -> FaultNetwork:
    """Return the network with the transformers corrected by KT, for the maximum alone.

    Source: IEC 60909-0:2016, clause 6.3.3, from memory (in the maximum case alone: as pandapower has it).

    Parameters
    ----------
    net : FaultNetwork
        The network of the ship method.
    lv_tolerance_percent : {6, 10}
        Chooses the voltage factors.

    Returns
    -------
    FaultNetwork
        With other branch impedances.
    """
    if not net.options.maximum:
        return net
    plant, topology = net.plant.network.plant, net.plant.network.topology
    u = net.plant.network.u_base_v
    z = net.z.copy()
    for n, k in enumerate(net.live):
        branch = topology.branches[k]
        if branch.kind == "transformer":
            t = plant.transformers[branch.index]
            c_max = voltage_factor(float(u[branch.to_node]), "max", lv_tolerance_percent)
            x = (t.u_k_pu**2 - (t.copper_loss_kw / t.s_rated_kva) ** 2) ** 0.5
            z[n] *= float(transformer_correction(c_max, x))
        elif branch.winding:
            item = plant.three_winding[branch.index]
            factors = three_winding_factor(net, item, lv_tolerance_percent)
            z[n] *= _leg_factor(item, branch.winding, factors)
    return replace(
        net,
        z=z,
        admittance=admittance_matrix(
            len(net.bus_island),
            branch_from=net.from_bus,
            branch_to=net.to_bus,
            branch_impedance=z,
            branch_ratio=net.ratio,
            source_bus=np.zeros(0, np.int64),
            source_impedance=np.zeros(0),
        ),
    )


def three_winding_factor(
    net: FaultNetwork, item: ThreeWindingTransformer, lv_tolerance_percent: LvTolerance
) -> tuple[float, float, float]:
    """Return cmax of the pairs primary-secondary, primary-tertiary, secondary-tertiary: of the lower voltage.

    Source: IEC 60909-0:2016, three-winding transformers, from memory.

    Parameters
    ----------
    net : FaultNetwork
        Holds the voltages.
    item : ThreeWindingTransformer
        The transformer.
    lv_tolerance_percent : {6, 10}
        Chooses the voltage factors.

    Returns
    -------
    tuple of float
        cmax of each pair.
    """
    u = {
        name: float(net.plant.network.u_base_v[net.plant.network.topology.node_of[board]])
        for name, board in (
            ("p", item.primary_board),
            ("s", item.secondary_board),
            ("t", item.tertiary_board),
        )
    }
    pairs = (("p", "s"), ("p", "t"), ("s", "t"))
    factors = [voltage_factor(min(u[a], u[b]), "max", lv_tolerance_percent) for a, b in pairs]
    return factors[0], factors[1], factors[2]


def _leg_factor(item: ThreeWindingTransformer, winding: str, c_max: tuple[float, float, float]) -> complex:
    """Return the corrected over the uncorrected impedance of a leg of the star."""
    rows = (
        (item.u_k_primary_secondary_pu, item.copper_loss_primary_secondary_kw, "primary", "secondary"),
        (item.u_k_primary_tertiary_pu, item.copper_loss_primary_tertiary_kw, "primary", "tertiary"),
        (item.u_k_secondary_tertiary_pu, item.copper_loss_secondary_tertiary_kw, "secondary", "tertiary"),
    )
    plain, corrected = [], []
    for (uk, loss, one, other), c in zip(rows, c_max, strict=True):
        s = min(getattr(item, f"s_{one}_kva"), getattr(item, f"s_{other}_kva"))
        r = loss / s
        pair = complex(r, (uk * uk - r * r) ** 0.5)
        plain.append(pair / s)
        corrected.append(float(transformer_correction(c, pair.imag)) * pair / s)
    leg = ("primary", "secondary", "tertiary").index(winding)
    return complex(three_winding_star(*corrected)[leg]) / complex(three_winding_star(*plain)[leg])


def general_sources(net: FaultNetwork, lv_tolerance_percent: LvTolerance) -> GeneralSources:
    """Return the impedances of the sources.

    Source: IEC 60909-0:2016, generators, motors, network feeders, from memory.

    Parameters
    ----------
    net : FaultNetwork
        The network.
    lv_tolerance_percent : {6, 10}
        Chooses the voltage factors.

    Returns
    -------
    GeneralSources
        In the order of the network's sources.
    """
    supplies = net.sources.supplies
    u = net.plant.network.u_base_v
    rows = [_row(net, s, float(u[s.node]), lv_tolerance_percent) for s in supplies]
    base = net.plant.base_a[np.array([s.node for s in supplies], np.int64)]
    return GeneralSources(
        z=np.array([r[0] for r in rows], complex),
        z_peak=np.array([r[1] for r in rows], complex),
        rated=np.array([s.rated_a for s in supplies], float) / base,
        mw_per_pole_pair=np.array([s.p_rated_kw / 1000.0 / max(s.poles / 2, 1) for s in supplies], float),
    )


def _row(net: FaultNetwork, s: Supply, u_v: float, tolerance: LvTolerance) -> tuple[complex, complex]:
    c_max = voltage_factor(u_v, "max", tolerance)
    if isinstance(s.item, Genset | SynchronousMotor):
        m = s.item.machine
        x = m.x_d2_saturated_pu
        k = float(
            generator_correction(
                nominal_v=u_v, rated_v=s.item.u_rated_v, c_max=c_max, x_sub_pu=x, cos_phi=s.item.cos_phi_rated
            )
        )
        fictitious = float(
            generator_fictitious_resistance_ohm(x, s.item.u_rated_v, 1000.0 * s.item.s_rated_kva)
        )
        return k * complex(m.r_stator_pu, x) * s.pu, k * complex(fictitious, x) * s.pu
    if s.kind == "shore supply":
        c = c_max if net.options.maximum else voltage_factor(u_v, "min", tolerance)
        x = c * s.pu / s.voltage**2 / float(np.hypot(1.0, s.r_over_x))
        return complex(x * s.r_over_x, x), complex(x * s.r_over_x, x)
    if s.kind == "converter supply":
        return LARGE, LARGE
    ratio = motor_ratio(s, u_v)
    x = s.pu / s.starting / float(np.hypot(1.0, ratio))
    return complex(x * ratio, x), complex(x * ratio, x)


def motor_ratio(s: Supply, u_v: float) -> float:
    """Return RM/XM of a motor by voltage and power per pole pair; 0.10 of a regenerating drive.

    Parameters
    ----------
    s : Supply
        A motor or small motors.
    u_v : float
        Voltage of its level. [V]

    Returns
    -------
    float
        RM/XM.
    """
    if s.kind == "regenerating drive":
        return DRIVE_R_OVER_X
    if u_v <= 1000.0:
        return motor_r_over_x("low voltage")
    large = s.p_rated_kw / 1000.0 / max(s.poles / 2, 1) >= 1.0
    return motor_r_over_x(
        "above 1 kV, 1 MW per pole pair or more" if large else "above 1 kV, below 1 MW per pole pair"
    )
