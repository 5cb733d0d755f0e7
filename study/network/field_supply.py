"""A set's machine and field supply as the formulas take them."""

from __future__ import annotations

from study.formulas.excitation import (
    FieldSupply,
    compound_from_current_share,
    compound_from_two_loads,
    fixed_field,
    independent_ceiling,
    shunt_ceiling,
)
from study.formulas.saturation import saturation_curve
from study.formulas.synchronous import Machine, field_required, rated_load_field
from study.model.sources import Genset, MachineData

WITHOUT_REGULATOR = ("fixed", "compounded without regulator")


def steady_machine(data: MachineData) -> Machine:
    """Return what the steady state needs of a machine: unsaturated reactances and the saturation curve.

    Parameters
    ----------
    data : MachineData
        The machine's constants, per unit of its own rating.

    Returns
    -------
    Machine
        Synchronous reactances, transient reactance, stator resistance, saturation.
    """
    return Machine(
        xd_pu=data.x_d_pu,
        xq_pu=data.x_q_pu,
        xd_transient_pu=data.x_d1_pu,
        ra_pu=data.r_stator_pu,
        saturation=saturation_curve(data.saturation_10, data.saturation_12),
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
        False for a fixed field, for a compounded set without regulator, and with the regulator switched to
        fixed excitation.
    """
    return (
        genset.excitation.field_supply not in WITHOUT_REGULATOR
        and genset.regulator.mode != "fixed excitation"
    )


def field_supply(genset: Genset) -> FieldSupply:
    """Return the most field that the set's supply gives.

    A fixed field is the one that gives the no-load voltage. A compounded set without regulator is set so that
    it has its no-load voltage at no load and that less the droop at rated load. With a regulator that takes
    excitation away, the compound source alone would hold the unregulated voltage at rated load, the current
    transformers giving their share of the field there. Other supplies give their ceiling.

    Source: IEEE 421.5-2016, type ST2A for compound sources, from memory; common practice, no source.

    Parameters
    ----------
    genset : Genset
        The set.

    Returns
    -------
    FieldSupply
        Constant, voltage-derived and current-derived parts.

    Raises
    ------
    ValueError
        The voltage-derived part alone already gives more than the field at rated load.
    """
    machine = steady_machine(genset.machine)
    excitation, setting = genset.excitation, genset.regulator
    rated_field = rated_load_field(genset.cos_phi_rated, machine)
    if setting.mode == "fixed excitation":
        return fixed_field(float(field_required(setting.no_load_voltage_pu, 0.0, 0.0, machine)))
    match excitation.field_supply:
        case "fixed":
            return fixed_field(float(field_required(setting.no_load_voltage_pu, 0.0, 0.0, machine)))
        case "compounded without regulator":
            return compound_from_two_loads(
                setting.no_load_voltage_pu,
                setting.no_load_voltage_pu - setting.droop_pu,
                genset.cos_phi_rated,
                machine,
            )
        case "compounded":
            return compound_from_current_share(
                excitation.compound_current_share,
                excitation.unregulated_voltage_pu,
                genset.cos_phi_rated,
                machine,
            )
        case "shunt":
            return shunt_ceiling(excitation.ceiling, rated_field)
        case "auxiliary winding" | "permanent magnet":
            return independent_ceiling(excitation.ceiling, rated_field)
