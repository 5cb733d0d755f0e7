"""What a source keeps up into a fault, and for how long: by its kind of excitation."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from study.formulas.fault_sustained import Excitation, SustainedBasis, sustained_current
from study.formulas.synchronous import rated_load_field
from study.model.loads import Load
from study.model.sources import ConverterSupply, Genset, ShoreSupply, SynchronousMotor
from study.network.machines import largest_field, machine_of, set_field


@dataclass(frozen=True, slots=True, kw_only=True)
class Holding:
    """Sustained current at the terminals in multiples of rated, and why.

    ``known`` is False where the workbook does not give it: the ceiling of the field then stands in for the
    maximum, the field of no load for the minimum, each on the safe side of what a regulator does.
    ``lasts_s`` is inf where no end is known and 0 where nothing is kept. ``field_limit`` is the e.m.f. at
    rated voltage, per unit, of a set that feeds its field from its own terminals; 0 for all else.
    """

    current_in: float
    known: bool
    lasts_s: float
    field_limit: float
    words: str


_NOTHING = Holding(
    current_in=0.0, known=True, lasts_s=0.0, field_limit=0.0, words="keeps nothing up: a motor"
)


def holding_of(
    item: Genset | SynchronousMotor | ShoreSupply | ConverterSupply | Load | None, kind: str, *, maximum: bool
) -> Holding:
    """Return what a source keeps up.

    Parameters
    ----------
    item : Genset, SynchronousMotor, ShoreSupply, ConverterSupply, Load or None
        The source's record.
    kind : str
        As in the results.
    maximum : bool
        Of the maximum case, else of the minimum.

    Returns
    -------
    Holding
        Multiples of its own rated current.
    """
    if isinstance(item, Genset):
        return _of_genset(item, maximum=maximum)
    if isinstance(item, ConverterSupply):
        lasts = item.short_circuit_duration_s
        words = f"limits its current to {item.short_circuit_current or 0.0:g} times rated"
        end = f" for {lasts:g} s, then blocks" if lasts is not None else "; no duration is given"
        return Holding(
            current_in=item.short_circuit_current or 0.0,
            known=lasts is not None,
            lasts_s=np.inf if lasts is None else lasts,
            field_limit=0.0,
            words=words + end,
        )
    if kind == "shore supply":
        return Holding(
            current_in=0.0, known=True, lasts_s=np.inf, field_limit=0.0, words="holds its fault level"
        )
    return _NOTHING


def _of_genset(g: Genset, *, maximum: bool) -> Holding:
    supply = Excitation(g.excitation.field_supply)
    machine = machine_of(g)
    given = g.excitation.sustained_current
    lasts = g.excitation.sustained_duration_s
    if supply is Excitation.SHUNT:
        collapse = sustained_current(supply, 0.0)
        return Holding(
            current_in=collapse.current_a,
            known=True,
            lasts_s=0.0,
            field_limit=largest_field(g).voltage_gain,
            words=f"keeps nothing up: {SustainedBasis.COLLAPSES.value}",
        )
    per_field = 1.0 / float(np.hypot(g.machine.r_stator_pu, g.machine.x_d_pu))
    if supply is Excitation.FIXED:
        current = set_field(g, g.regulator.no_load_voltage_pu).constant_pu * per_field
        words, known = f"constant field, {current:.2f} times rated (Eq0/Xd)", True
    elif given is None:
        current, field = per_field, "the field of no load"
        if maximum:
            current = g.excitation.ceiling * rated_load_field(g.cos_phi_rated, machine) * per_field
            field = f"a field of {g.excitation.ceiling:g} times that of rated load"
        words, known = (
            f"sustained current not given: {field} stands in, {current:.2f} times rated; what hangs on it "
            "after 0.1 s is not assessed",
            False,
        )
    else:
        current, known = given, True
        words = f"{supply.value} excitation holds {given:g} times rated"
    if known and lasts is not None:
        words += f" for {lasts:g} s"
    return Holding(
        current_in=float(current),
        known=known,
        lasts_s=np.inf if lasts is None else lasts,
        field_limit=0.0,
        words=words,
    )
