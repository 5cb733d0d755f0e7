"""A set of the plant as the formulas want it: its machine and the most that its field supply gives."""

from __future__ import annotations

from study.formulas.excitation import (
    FieldSupply,
    compound_from_current_share,
    fixed_field,
    independent_ceiling,
    shunt_ceiling,
)
from study.formulas.saturation import saturation_curve
from study.formulas.synchronous import Machine, field_required, rated_load_field
from study.model.sources import Genset, SynchronousMotor

NO_FIELD = fixed_field(0.0)


def machine_of(item: Genset | SynchronousMotor) -> Machine:
    """Return the steady-state machine of a set: unsaturated reactances and its saturation curve.

    Parameters
    ----------
    item : Genset or SynchronousMotor
        The machine's owner.

    Returns
    -------
    Machine
        Per unit of its own rating.
    """
    m = item.machine
    return Machine(
        xd_pu=m.x_d_pu,
        xq_pu=m.x_q_pu,
        xd_transient_pu=m.x_d1_pu,
        ra_pu=m.r_stator_pu,
        saturation=saturation_curve(m.saturation_10, m.saturation_12),
    )


def largest_field(genset: Genset) -> FieldSupply:
    """Return the most field that a set's supply can give.

    Parameters
    ----------
    genset : Genset
        The set.

    Returns
    -------
    FieldSupply
        Per unit of the air-gap-line field at rated voltage.

    Raises
    ------
    ValueError
        An unknown field supply.
    """
    excitation = genset.excitation
    machine = machine_of(genset)
    rated = rated_load_field(genset.cos_phi_rated, machine)
    match excitation.field_supply:
        case "permanent magnet" | "auxiliary winding":
            return independent_ceiling(excitation.ceiling, rated)
        case "shunt":
            return shunt_ceiling(excitation.ceiling, rated)
        case "compounded" | "compounded without regulator":
            return compound_from_current_share(
                excitation.compound_current_share,
                excitation.unregulated_voltage_pu,
                genset.cos_phi_rated,
                machine,
            )
        case "fixed":
            return set_field(genset, genset.regulator.no_load_voltage_pu)
    raise ValueError(f"unknown field supply {excitation.field_supply!r}")


def set_field(genset: Genset, no_load_voltage_pu: float) -> FieldSupply:
    """Return the constant field that gives a voltage at no load and rated speed.

    Parameters
    ----------
    genset : Genset
        The set.
    no_load_voltage_pu : float
        Voltage at no load. [pu of rated]

    Returns
    -------
    FieldSupply
        A constant field.
    """
    return fixed_field(float(field_required(no_load_voltage_pu, 0.0, 0.0, machine_of(genset))))
