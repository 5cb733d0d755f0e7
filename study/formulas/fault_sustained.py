"""What remains of a fault current: sustained current by kind of excitation, and unsymmetrical faults.

IEC 61363-1 treats the three-phase fault at the generator's board. Behind an impedance, and for two-phase and
line-earth faults, these are classical machine theory and are named so.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike

from study.formulas.fault_current import SQRT3, ComplexArray, FaultCurrent, FloatArray, as_float
from study.formulas.fault_iec61363 import Source, through_impedance


class Excitation(StrEnum):
    """Where the excitation system takes its power, which decides what it holds during a fault."""

    AUXILIARY_WINDING = "auxiliary winding"
    PERMANENT_MAGNET = "permanent magnet"
    SHUNT = "shunt"
    COMPOUNDED = "compounded"
    COMPOUNDED_WITHOUT_REGULATOR = "compounded without regulator"
    FIXED = "fixed"


class SustainedBasis(StrEnum):
    """Why a sustained current has its value."""

    MAKERS_VALUE = "maker's value"
    CONSTANT_FIELD = "constant field, Eq0/Xd"
    COLLAPSES = "shunt excitation collapses with the terminal voltage"


@dataclass(frozen=True, slots=True, kw_only=True)
class SustainedCurrent:
    """Sustained current of one set at its terminals.

    Attributes
    ----------
    current_a : float
        Ikd, r.m.s. [A].
    basis : SustainedBasis
        Why it has this value.
    """

    current_a: float
    basis: SustainedBasis


@dataclass(frozen=True, slots=True, kw_only=True)
class SustainedEstimates:
    """Two estimates of the sustained current behind an impedance.

    Attributes
    ----------
    reach_a : FloatArray
        Low estimate, with Z* = U0/(sqrt3 Ik): for the reach of protection [A].
    duty_a : FloatArray
        High estimate, the lesser of held voltage and held excitation: for I²t and the maximum [A].
    """

    reach_a: FloatArray
    duty_a: FloatArray


def sustained_current(excitation: Excitation, given_current_a: float) -> SustainedCurrent:
    """Return Ikd at the terminals by the kind of excitation.

    Compounded, auxiliary-winding and permanent-magnet systems keep their supply during the fault and hold the
    maker's value, commonly about 3 times rated current. A fixed field holds Eq0/Xd. A shunt system loses its
    supply: 0 A at the terminals (behind an impedance that keeps up the terminal voltage it may hold on).

    Source: common practice, no source; the need for a maker's value is from memory of IEC 61363-1:1998.

    Parameters
    ----------
    excitation : Excitation
        Kind of supply.
    given_current_a : float
        Maker's sustained current, or Eq0/Xd of a fixed field; not used for a shunt system [A].

    Returns
    -------
    SustainedCurrent
        Value and the reason for it.

    Raises
    ------
    ValueError
        A system that holds current, without a value above 0 A.

    Examples
    --------
    >>> sustained_current(Excitation.SHUNT, 0.0).current_a
    0.0
    >>> sustained_current(Excitation.COMPOUNDED, 3900.0).basis.value
    "maker's value"
    """
    if excitation is Excitation.SHUNT:
        return SustainedCurrent(current_a=0.0, basis=SustainedBasis.COLLAPSES)
    if not given_current_a > 0.0:
        raise ValueError(f"{excitation.value} excitation holds a current: give it, above 0 A")
    fixed = excitation is Excitation.FIXED
    basis = SustainedBasis.CONSTANT_FIELD if fixed else SustainedBasis.MAKERS_VALUE
    return SustainedCurrent(current_a=given_current_a, basis=basis)


def _source_z_ohm(sustained_a: FloatArray, phase_v: FloatArray, r_ohm: FloatArray) -> ComplexArray:
    """Return Z* = U0/(sqrt3 Ik) split into the given resistance and a reactance, infinite for no current."""
    with np.errstate(divide="ignore"):
        magnitude = phase_v / sustained_a
    impedance = np.empty(np.broadcast_shapes(magnitude.shape, r_ohm.shape), dtype=complex)
    impedance.real = r_ohm
    impedance.imag = np.sqrt(np.maximum(magnitude**2 - r_ohm**2, 0.0))
    return impedance


def sustained_behind_impedance(
    *, sustained_a: ArrayLike, voltage_v: ArrayLike, source_z_ohm: ArrayLike, impedance_ohm: ArrayLike
) -> SustainedEstimates:
    """Return the two estimates of the sustained current behind an impedance Z.

    Low: U0/(sqrt3 |Z* + Z|) with |Z*| = U0/(sqrt3 Ik) and the resistance of Zd. High: the lesser of
    U0/(sqrt3 |Z|), terminal voltage held by the regulator, and Ik |Zd| / |Zd + Z|, excitation held at its
    limit; that lesser one is the steady state of a regulated machine without saturation.

    Source: Z* from memory of IEC 61363-1:1998, clause 7; the high estimate is classical machine theory.

    Parameters
    ----------
    sustained_a : array_like
        Ik of the sources together on the near side [A].
    voltage_v : array_like
        Line voltage before the fault [V].
    source_z_ohm : array_like of complex
        Ra + jXd of the sources in parallel [ohm].
    impedance_ohm : array_like of complex
        Z, one phase, on the same voltage level [ohm].

    Returns
    -------
    SustainedEstimates
        Shape of the broadcast inputs.

    Raises
    ------
    ValueError
        An impedance Ra + jXd of 0 ohm.

    Examples
    --------
    >>> at_board = sustained_behind_impedance(
    ...     sustained_a=3900.0, voltage_v=450.0, source_z_ohm=0.45j, impedance_ohm=0j)
    >>> float(at_board.reach_a), float(at_board.duty_a)
    (3900.0, 3900.0)
    """
    sustained, phase_v = as_float(sustained_a), as_float(voltage_v) / SQRT3
    zd, z = np.asarray(source_z_ohm, dtype=complex), np.asarray(impedance_ohm, dtype=complex)
    if not (np.abs(zd) > 0.0).all():
        raise ValueError("Ra + jXd must not be 0 ohm")
    held_excitation = sustained * np.abs(zd) / np.abs(zd + z)
    with np.errstate(divide="ignore"):
        held_voltage = phase_v / np.abs(z)
    duty = np.minimum(held_voltage, held_excitation)
    low = phase_v / np.abs(_source_z_ohm(sustained, phase_v, zd.real) + z)
    return SustainedEstimates(reach_a=as_float(np.minimum(low, duty)), duty_a=as_float(duty))


def _scaled(current: FaultCurrent, factor: float) -> FaultCurrent:
    """Return the current with all components multiplied by a factor."""
    return FaultCurrent(
        subtransient_a=current.subtransient_a * factor,
        transient_a=current.transient_a * factor,
        sustained_a=current.sustained_a * factor,
        dc_a=current.dc_a * factor,
        t_sub_s=current.t_sub_s,
        t_trans_s=current.t_trans_s,
        t_dc_s=current.t_dc_s,
    )


def two_phase_current(
    source: Source, *, r2_ohm: ArrayLike, x2_ohm: ArrayLike, frequency_hz: float
) -> FaultCurrent:
    """Return the two-phase fault current, sqrt3 E / |Z1 + Z2|, with its own time constants.

    To the positive sequence a two-phase fault is the negative-sequence impedance in series. With X2 = X''d
    the initial current is 0.866 of the three-phase one; the sustained current sqrt3 E/(Xd + X2) is larger
    than the three-phase one.

    Source: symmetrical components, as in Kundur, Power System Stability and Control, chapter 3; outside the
    scope of IEC 61363-1. From memory.

    Parameters
    ----------
    source : Source
        With the positive-sequence impedance up to the fault included.
    r2_ohm, x2_ohm : array_like
        Negative-sequence impedance up to the fault [ohm].
    frequency_hz : float
        [Hz]

    Returns
    -------
    FaultCurrent
        Shape of the broadcast inputs.
    """
    behind = through_impedance(source, r_ohm=r2_ohm, x_ohm=x2_ohm, frequency_hz=frequency_hz)
    return _scaled(behind.current, SQRT3)


def line_earth_current(
    source: Source,
    *,
    r2_ohm: ArrayLike,
    x2_ohm: ArrayLike,
    r0_ohm: ArrayLike,
    x0_ohm: ArrayLike,
    frequency_hz: float,
) -> FaultCurrent:
    """Return the line-earth fault current of an earthed system, 3 E / |Z1 + Z2 + Z0|.

    Source: symmetrical components, as in Kundur, Power System Stability and Control, chapter 3; outside the
    scope of IEC 61363-1. From memory.

    Parameters
    ----------
    source : Source
        With the positive-sequence impedance up to the fault included.
    r2_ohm, x2_ohm, r0_ohm, x0_ohm : array_like
        Negative- and zero-sequence impedance up to the fault, with three times the neutral resistor [ohm].
    frequency_hz : float
        [Hz]

    Returns
    -------
    FaultCurrent
        Shape of the broadcast inputs.
    """
    behind = through_impedance(
        source,
        r_ohm=as_float(r2_ohm) + as_float(r0_ohm),
        x_ohm=as_float(x2_ohm) + as_float(x0_ohm),
        frequency_hz=frequency_hz,
    )
    return _scaled(behind.current, 3.0)
