"""Voltage regulation of each set by itself: at constant excitation, and with its own excitation system."""

from __future__ import annotations

import numpy as np

from study.formulas.excitation import FieldSupply, available_field, held_voltage
from study.formulas.load_compensation import (
    reactance_from_droop,
    signed_reactance,
    terminal_voltage_phasor,
    terminal_voltage_reactive_current,
)
from study.formulas.synchronous import (
    Machine,
    field_required,
    inherent_regulation,
    rated_load_field,
    terminal_voltage_at_field,
)
from study.model.plant import Plant
from study.model.sources import Genset
from study.network.machines import largest_field, machine_of, set_field
from study.results.arrays import FloatArray, read_only
from study.results.regulation import InherentCurve, RegulationResult, SetRegulation

LABELS = ("0 lagging", "0.8 lagging", "1.0", "0.8 leading")
COS_PHI = np.array([0.0, 0.8, 1.0, 0.8])
LAGGING = (True, True, True, False)
WITHOUT_REGULATOR = ("fixed", "compounded without regulator")
CURRENTS_PU = np.linspace(0.0, 1.2, 49)
LOADS_PU = np.linspace(0.0, 1.0, 41)
_OVERLOADS_PU = np.linspace(0.02, 3.0, 150)
_COLLAPSED = 1.0  # a set that holds no voltage at all is off by the whole rated voltage


def voltage_regulation(plant: Plant) -> RegulationResult:
    """Study the regulation of every set of the plant.

    Parameters
    ----------
    plant : Plant
        Its sets, as set on the sheet Gensets; trims of single modes do not enter.

    Returns
    -------
    RegulationResult
        One entry for each set in workbook order.
    """
    return RegulationResult(sets=tuple(_regulate(genset) for genset in plant.gensets))


def inherent_curves(genset: Genset) -> InherentCurve:
    """Return terminal voltage against current at constant excitation, at four power factors.

    The field is that of rated voltage at no load, so the curves show how much the regulator has to make good;
    an inductive load asks for the most.

    Source: Fitzgerald, Kingsley, Umans, *Electric Machinery*, ch. 5, two-reaction theory, from memory;
    saturation as S(E'q) on the direct axis.

    Parameters
    ----------
    genset : Genset
        The set.

    Returns
    -------
    InherentCurve
        Voltage [pu] by power factor and current, NaN where the field cannot drive the current.
    """
    machine = machine_of(genset)
    phi = np.arccos(COS_PHI) * np.where(LAGGING, 1.0, -1.0)
    field = float(field_required(1.0, 0.0, 0.0, machine))
    u_pu = terminal_voltage_at_field(field, CURRENTS_PU[np.newaxis, :], phi[:, np.newaxis], machine)
    return InherentCurve(
        labels=LABELS,
        cos_phi=read_only(COS_PHI),
        lagging=LAGGING,
        current_pu=read_only(np.broadcast_to(CURRENTS_PU, u_pu.shape)),
        u_pu=read_only(u_pu),
        regulation_pu=read_only(inherent_regulation(1.0, phi, machine)),
        field_pu=read_only(field_required(1.0, 1.0, phi, machine)),
    )


def has_regulator(genset: Genset) -> bool:
    """Return whether a regulator acts on the set's field.

    Parameters
    ----------
    genset : Genset
        The set.

    Returns
    -------
    bool
        False for a fixed field, a compounded set without regulator, and a regulator switched to fixed
        excitation.
    """
    return (
        genset.excitation.field_supply not in WITHOUT_REGULATOR
        and genset.regulator.mode != "fixed excitation"
    )


def field_supply_in_use(genset: Genset) -> FieldSupply:
    """Return the most field that the set's supply gives, or the constant field of a set on fixed excitation.

    Parameters
    ----------
    genset : Genset
        The set.

    Returns
    -------
    FieldSupply
        Constant, voltage-derived and current-derived parts.
    """
    if genset.regulator.mode == "fixed excitation":
        return set_field(genset, genset.regulator.no_load_voltage_pu)
    return largest_field(genset)


def compensation_reactance(genset: Genset) -> float:
    """Return the reactance of the set's droop circuit as its regulator sees it [pu of rated kVA].

    0 where the circuit is not in use: no droop, kvar control, no regulator.

    Source: closed form of IEEE 421.5-2016 clause 4; see `study.formulas.load_compensation`.
    """
    setting = genset.regulator
    if setting.mode not in ("droop", "cross-current") or not has_regulator(genset):
        return 0.0
    xc = reactance_from_droop(
        setting.droop_pu,
        setting.droop_base,
        setting.droop_law,
        genset.cos_phi_rated,
        setting.no_load_voltage_pu,
    )
    return signed_reactance(xc, "reversed" if setting.reversed_polarity else "normal")


def proportional_offset(
    v_set_pu: float, p_pu: FloatArray, q_pu: FloatArray, gain: float, machine: Machine
) -> FloatArray:
    """Return the voltage that a proportional regulator holds: it needs an error to ask for more field.

    ``V = V0 - (E(V, P, Q) - E(V0, 0, 0)) / K``, found by fixed point; K is large against dE/dV.

    Source: steady state of a proportional regulator, common practice, no source.

    Parameters
    ----------
    v_set_pu : float
        Voltage at no load. [pu]
    p_pu, q_pu : ndarray
        Load at 1 pu voltage, taken as constant current. [pu]
    gain : float
        Field over voltage. [pu of air-gap field / pu of voltage]
    machine : Machine
        Reactances and saturation.

    Returns
    -------
    ndarray
        Terminal voltage. [pu]
    """
    current, phi = np.hypot(p_pu, q_pu), np.arctan2(q_pu, p_pu)
    at_no_load = field_required(v_set_pu, 0.0, 0.0, machine)
    v = np.full(np.shape(current), v_set_pu)
    relaxation = 1.0 / (1.0 + 3.0 / gain)  # dE/dV of a saturated machine stays below about 3
    for _ in range(200):
        wanted = v_set_pu - (field_required(v, current, phi, machine) - at_no_load) / gain
        step = relaxation * (wanted - v)
        v = v + step
        if np.max(np.abs(step), initial=0.0) < 1e-12:
            break
    return v


def _regulate(genset: Genset) -> SetRegulation:
    machine, supply = machine_of(genset), field_supply_in_use(genset)
    p, q = _loads(genset)
    without = _held(genset, supply, _regulated_without_droop(genset, machine, p, q))
    # Cross-current compensation compares a set with the others, so a set alone has no droop by it.
    drooped = genset.regulator.mode == "droop" and compensation_reactance(genset) != 0.0
    with_droop = _held_with_droop(genset, supply, p, q) if drooped else without
    field = field_required(without, LOADS_PU, np.arccos(genset.cos_phi_rated), machine)
    rated_field = rated_load_field(genset.cos_phi_rated, machine)
    return SetRegulation(
        genset=genset.name,
        service=genset.service,
        field_supply=genset.excitation.field_supply,
        law=_law(genset),
        inherent=inherent_curves(genset),
        load_pu=read_only(LOADS_PU),
        u_with_droop_pu=read_only(with_droop),
        u_without_droop_pu=read_only(without),
        field_pu=read_only(field / rated_field),
        band_as_set_pu=_largest_distance(without),
        band_centred_pu=_half_range(without),
        band_as_set_with_droop_pu=_largest_distance(with_droop),
        droop_no_load_to_rated_pu=float(with_droop[0] - with_droop[-1]),
        compensation_x_pu=compensation_reactance(genset),
        reaches_ceiling_at_pu=_ceiling_load(genset, supply, machine),
        findings=(*_findings(genset, supply, machine, without), *_droop_findings(genset, with_droop)),
    )


def _regulated_without_droop(genset: Genset, machine: Machine, p: FloatArray, q: FloatArray) -> FloatArray:
    v_set = genset.regulator.no_load_voltage_pu
    if genset.excitation.integral_per_s > 0.0:
        return np.full(p.shape, v_set)
    gain = genset.excitation.gain * rated_load_field(genset.cos_phi_rated, machine)
    return proportional_offset(v_set, p, q, gain, machine)


def _regulated_with_droop(genset: Genset, p: FloatArray, q: FloatArray) -> FloatArray:
    """Return the drooped line; the droop of the workbook is the whole fall, proportional offset included."""
    v_set, xc = genset.regulator.no_load_voltage_pu, compensation_reactance(genset)
    if genset.regulator.droop_law == "reactive current":
        return terminal_voltage_reactive_current(q, v_set, xc)
    return terminal_voltage_phasor(p, q, v_set, xc)


def _held(genset: Genset, supply: FieldSupply, regulated: FloatArray) -> FloatArray:
    p, q = _loads(genset)
    top = regulated if has_regulator(genset) else np.full(p.shape, 2.0)
    machine = machine_of(genset)
    return held_voltage(p, q, exponent=1.0, v_top_pu=top, supply=supply, machine=machine)


def _held_with_droop(genset: Genset, supply: FieldSupply, p: FloatArray, q: FloatArray) -> FloatArray:
    """Return the drooped line within the field supply; NaN where the droop leaves no voltage at some load."""
    try:
        regulated = _regulated_with_droop(genset, p, q)
    except ValueError:
        return np.full(p.shape, np.nan)
    return _held(genset, supply, regulated)


def _loads(genset: Genset) -> tuple[FloatArray, FloatArray]:
    return LOADS_PU * genset.cos_phi_rated, LOADS_PU * np.sqrt(1.0 - genset.cos_phi_rated**2)


def _ceiling_load(genset: Genset, supply: FieldSupply, machine: Machine) -> float:
    """Return the load current at rated power factor from which the field is short [pu]; NaN: none."""
    if not has_regulator(genset):
        return float("nan")
    phi = float(np.arccos(genset.cos_phi_rated))
    given = available_field(1.0, _OVERLOADS_PU, phi, supply)
    short = given < field_required(1.0, _OVERLOADS_PU, phi, machine)
    return float(_OVERLOADS_PU[np.argmax(short)]) if short.any() else float("nan")


def _findings(genset: Genset, supply: FieldSupply, machine: Machine, u_pu: FloatArray) -> tuple[str, ...]:
    found = []
    if np.isnan(u_pu[-1]):
        found.append(f"{genset.name}: its field supply holds no voltage at rated load.")
    if not has_regulator(genset):
        found.append(
            f"{genset.name}: no regulator acts on its field; the voltage follows load and power factor."
        )
    elif genset.excitation.field_supply == "compounded":
        no_load = held_voltage(0.0, 0.0, exponent=1.0, v_top_pu=2.0, supply=supply, machine=machine)
        found.append(
            f"{genset.name}: with its regulator out of action the compound source alone gives about "
            f"{100.0 * genset.excitation.unregulated_voltage_pu:.0f} % of rated voltage at rated load and "
            f"{100.0 * float(no_load):.0f} % at no load."
        )
    elif genset.excitation.field_supply == "shunt":
        found.append(
            f"{genset.name}: its regulator is fed from its own terminals: the field falls with the voltage."
        )
    if has_regulator(genset) and genset.excitation.integral_per_s == 0.0:
        found.append(
            f"{genset.name}: proportional regulator, gain {genset.excitation.gain:g}; the voltage falls with "
            "load even without droop."
        )
    return tuple(found)


def _droop_findings(genset: Genset, with_droop: FloatArray) -> tuple[str, ...]:
    if compensation_reactance(genset) < 0.0:
        return (f"{genset.name}: its droop circuit is reversed; its voltage rises with reactive load.",)
    if np.isnan(with_droop).any() and has_regulator(genset):
        return (f"{genset.name}: with its droop it holds no voltage at some load up to rated.",)
    return ()


def _law(genset: Genset) -> str:
    if not has_regulator(genset):
        return "no regulator"
    if genset.regulator.mode in ("no droop", "cross-current", "kvar control"):
        return genset.regulator.mode
    return {
        "phasor": "phasor law |V + jXc I|, IEEE 421.5",
        "reactive current": "reactive-current law V + Xc Iq",
    }[genset.regulator.droop_law]


def _largest_distance(u_pu: FloatArray) -> float:
    return _COLLAPSED if np.isnan(u_pu).any() else float(np.abs(u_pu - 1.0).max())


def _half_range(u_pu: FloatArray) -> float:
    return _COLLAPSED if np.isnan(u_pu).any() else float(u_pu.max() - u_pu.min()) / 2.0
