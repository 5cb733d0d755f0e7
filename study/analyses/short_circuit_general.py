"""IEC 60909 at every place of one mode and case, by our own nodal currents."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from study.analyses.short_circuit_options import ShortCircuitOptions
from study.formulas.fault_current import SQRT2, SQRT3
from study.formulas.fault_iec60909 import equivalent_frequency_r_over_x, kappa_factor, voltage_factor
from study.formulas.fault_iec60909_decay import (
    breaking_current_meshed_a,
    m_factor,
    motor_decay,
    mu_factor,
    n_factor,
    thermal_equivalent_a,
)
from study.formulas.fault_iec60909_nodal import at_equivalent_frequency
from study.network.fault_general import GeneralSources, general_network, general_sources
from study.network.fault_network import FaultNetwork
from study.network.fault_stages import Stage, solve_stage
from study.network.fault_zero_sequence import zero_sequence
from study.results.arrays import read_only
from study.results.short_circuit import Iec60909Case

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

_KAPPA_LEAST = 1.02 + 1e-9


@dataclass(frozen=True, slots=True, kw_only=True)
class GeneralCase:
    """The IEC 60909 currents of a case, and I''k and ip [place] of its impedances alone [A].

    The latter leave converter supplies out and are what a library is held against.
    """

    case: Iec60909Case
    ik_impedances_a: FloatArray
    ip_impedances_a: FloatArray


def general_case(net: FaultNetwork, options: ShortCircuitOptions) -> GeneralCase:
    """Return the IEC 60909 currents of one case; what pandapower gives is left open.

    Source: IEC 60909-0:2016, from memory; held against IEC TR 60909-4 by the tests of its formulas.

    Parameters
    ----------
    net : FaultNetwork
        The network of the ship method.
    options : ShortCircuitOptions
        Voltage tolerance, time delay, duration.

    Returns
    -------
    GeneralCase
        [A] at the voltage of each place.
    """
    tolerance = options.lv_tolerance_percent
    hz = net.plant.network.plant.project.f_rated_hz
    corrected, own = general_network(net, tolerance), general_sources(net, tolerance)
    everyone = net.sources.limit == 0.0
    drive = np.ones(len(everyone))
    lead = net.sources.lead
    full = solve_stage(corrected, own.z + lead, own.z, everyone, voltage=drive)
    at_fc = solve_stage(
        corrected,
        own.z_peak + lead,
        own.z_peak,
        everyone,
        voltage=drive,
        transform=at_equivalent_frequency,
    )
    lasting = everyone & ~net.sources.asynchronous
    lasting &= np.array([s.kind != "synchronous motor" for s in net.sources.supplies], bool)
    steady = solve_stage(corrected, own.z + lead, own.z, lasting, voltage=drive)
    u = net.plant.network.u_base_v[net.plant.place_node]
    case = "max" if net.options.maximum else "min"
    c = np.array([voltage_factor(float(v), case, tolerance) for v in u])  # type: ignore[arg-type]
    base = net.plant.base_a[net.plant.place_node]
    limited = _limited(net, full)
    fed = full.fed | (limited > 0.0)
    z1 = np.where(full.fed, full.z_place, np.inf)
    initial = c / np.abs(z1) + limited
    z_fc = np.where(at_fc.fed, at_fc.z_place, 1j)
    kappa = np.maximum(kappa_factor(equivalent_frequency_r_over_x(z_fc)), _KAPPA_LEAST)
    two_phase = c / np.abs(z1) * (0.5 * SQRT3)  # Z2 = Z1
    z0 = zero_sequence(net)
    earthed = np.isfinite(z0) & full.fed
    loop = np.where(earthed, 2.0 * np.where(earthed, z1, 0.0) + np.where(earthed, z0, 0.0), 1.0)
    earth = np.where(earthed, 3.0 * c / np.abs(loop), np.nan)
    ik_steady = np.where(steady.fed, c / np.abs(np.where(steady.fed, steady.z_place, 1.0)), 0.0) + limited
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.where(ik_steady > 0.0, initial / ik_steady, np.inf)
    n = np.where(
        np.isfinite(ratio), n_factor(np.where(np.isfinite(ratio), ratio, 1.0), options.duration_s), 0.0
    )
    ith = thermal_equivalent_a(initial, m_factor(kappa, hz, options.duration_s), n)
    no_current_peak = c / np.abs(z1) * kappa * SQRT2 + SQRT2 * limited

    def only(values: FloatArray) -> FloatArray:
        return read_only(np.where(fed, values * base, np.nan))

    unknown = read_only(np.full(len(u), np.nan))
    result = Iec60909Case(
        c=read_only(c),
        ik_3ph_a=only(initial),
        ik_2ph_a=only(two_phase),
        ik_earth_a=only(earth),
        ip_3ph_a=only(no_current_peak),
        ip_2ph_a=only(two_phase * kappa * SQRT2),
        ib_a=only(_breaking(net, full, own, c, options.delay_s) + limited),
        ik_steady_a=only(ik_steady),
        ith_a=only(ith),
        delay_s=options.delay_s,
        duration_s=options.duration_s,
        pandapower_ik_3ph_a=unknown,
        pandapower_ip_3ph_a=unknown,
        pandapower_ik_2ph_a=unknown,
        largest_difference=math.nan,
        comparison="not compared",
    )
    by_impedance = np.where(full.fed, c / np.abs(z1) * base, np.nan)
    return GeneralCase(
        case=result,
        ik_impedances_a=by_impedance,
        ip_impedances_a=by_impedance * kappa * SQRT2,
    )


def compared(
    own: GeneralCase, ik_3ph_a: FloatArray, ik_2ph_a: FloatArray, ip_3ph_a: FloatArray, words: str
) -> Iec60909Case:
    """Return the case with another's figures beside it and the largest relative difference.

    Parameters
    ----------
    own : GeneralCase
        Ours.
    ik_3ph_a, ik_2ph_a, ip_3ph_a : ndarray, shape (place,)
        The other's; NaN where it was not asked. [A]
    words : str
        What was compared.

    Returns
    -------
    Iec60909Case
        Complete.
    """
    pairs = (
        (own.ik_impedances_a, ik_3ph_a),
        (own.ip_impedances_a, ip_3ph_a),
        (own.ik_impedances_a * (0.5 * SQRT3), ik_2ph_a),
    )
    differences = np.array([np.abs(a / b - 1.0) for a, b in pairs])
    seen = differences[np.isfinite(differences)]
    return replace(
        own.case,
        pandapower_ik_3ph_a=read_only(ik_3ph_a),
        pandapower_ip_3ph_a=read_only(ip_3ph_a),
        pandapower_ik_2ph_a=read_only(ik_2ph_a),
        largest_difference=float(seen.max()) if len(seen) else math.nan,
        comparison=words,
    )


def _limited(net: FaultNetwork, stage: Stage) -> FloatArray:
    """Return what converter supplies add, as current sources through the network.

    Source: IEC 60909-0:2016, power station units with full-size converter: I Zik/Zii; from memory.
    """
    s = net.sources
    columns = np.flatnonzero(s.limit > 0.0)
    if not len(columns):
        return np.zeros(len(net.place_bus))
    fed = stage.fed
    bus = np.where(fed, net.place_bus, 0)
    reach = (
        np.abs(stage.z_bus[bus[:, None], s.bus[columns][None, :]]) / np.abs(stage.z_bus[bus, bus])[:, None]
    )
    same = net.place_island[:, None] == s.island[columns][None, :]
    # Where nothing but converters feeds, each gives its limit.
    gives = np.where(fed[:, None], np.minimum(reach, 1.0), 1.0) * (same & (net.place_bus >= 0)[:, None])
    return np.asarray(gives @ s.limit[columns])


def _breaking(
    net: FaultNetwork, stage: Stage, own: GeneralSources, c: FloatArray, delay_s: float
) -> FloatArray:
    s = net.sources
    if not len(s.supplies):
        return np.zeros(len(c))
    given = stage.current * c[:, None]  # (place, source)
    ratio = np.abs(given) / own.rated[None, :]
    kinds = [x.kind for x in s.supplies]
    decay = np.ones(given.shape)
    for k, kind in enumerate(kinds):
        if kind == "genset":
            decay[:, k] = mu_factor(ratio[:, k], delay_s)
        elif kind in ("motor", "small motors"):
            decay[:, k] = motor_decay(ratio[:, k], max(own.mw_per_pole_pair[k], 1e-6), delay_s)
        elif kind == "synchronous motor":
            decay[:, k] = mu_factor(ratio[:, k], delay_s)
        elif kind == "regenerating drive":
            decay[:, k] = 0.0  # counts for I''k and ip alone
    drop = 1j * own.z.imag[None, :] * given / c[:, None]
    initial = np.where(stage.fed, c / np.where(stage.fed, stage.z_place, 1.0), 0.0)
    return breaking_current_meshed_a(initial, drop.T, given.T, decay.T)
