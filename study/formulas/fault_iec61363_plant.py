"""IEC 61363-1: sources taken together: equivalent generator, other voltage levels, sustained current.

For a fault on the board itself the sources are added one by one; the equivalent generator serves only to
carry them through a further impedance. The text of the standard was not at hand: formulas are from memory.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.fault_current import (
    SQRT3,
    ComplexArray,
    FaultCurrent,
    FloatArray,
    as_float,
)
from study.formulas.fault_iec61363 import Source

BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class EquivalentGenerator:
    """Several sources condensed into one.

    Attributes
    ----------
    source : Source
        Currents I''*, I'*, Ik*, time constants and inner impedances; shape of the places.
    sub_fitted, trans_fitted : BoolArray
        True where T''* (T'*) makes the equivalent equal to the sum at tx. False where no time constant can
        (parts of opposite sign, as when some sets force Ikd above I'kd): there it is the mean by size.
    """

    source: Source
    sub_fitted: BoolArray
    trans_fitted: BoolArray


def _condensed_time_constant_s(
    amplitude_a: FloatArray, time_constant_s: FloatArray, tx_s: float
) -> tuple[FloatArray, BoolArray]:
    """Return T* = -tx / ln(K*/amplitude*) over the first axis, and whether it could be formed."""
    at_zero = amplitude_a.sum(axis=0)
    at_tx = (amplitude_a * np.exp(-tx_s / time_constant_s)).sum(axis=0)
    size = np.abs(amplitude_a)
    weight = size.sum(axis=0)
    absent = weight == 0.0
    decays = np.where(size > 0.0, time_constant_s, 0.0)
    mean = np.divide((size * decays).sum(axis=0), weight, out=np.full_like(weight, math.inf), where=~absent)
    ratio = np.divide(at_tx, at_zero, out=np.full_like(weight, -1.0), where=at_zero != 0.0)
    fitted = (ratio > 0.0) & (ratio < 1.0)
    formed = -tx_s / np.log(np.where(fitted, ratio, 0.5))
    return as_float(np.where(fitted, formed, mean)), fitted | absent | np.isinf(mean)


def _source_impedance_ohm(voltage_v: ArrayLike, current_a: FloatArray) -> FloatArray:
    """Return U0 / (sqrt3 I), infinite where there is no current."""
    phase = np.broadcast_to(as_float(voltage_v) / SQRT3, current_a.shape)
    return as_float(
        np.divide(phase, current_a, out=np.full(current_a.shape, math.inf), where=current_a > 0.0)
    )


def _reactance_ohm(z_ohm: FloatArray, r_ohm: FloatArray) -> FloatArray:
    """Return the reactance of an impedance; 0 where the resistance, which X'' fixes, is more than all of it.

    That happens where regulators hold nearly the subtransient current at a place of high resistance.
    """
    return np.asarray(np.sqrt(np.maximum(z_ohm**2 - r_ohm**2, 0.0)))


def equivalent_generator(
    currents: FaultCurrent,
    *,
    voltage_v: ArrayLike,
    frequency_hz: float,
    tx_sub_s: float,
    tx_trans_s: float,
) -> EquivalentGenerator:
    """Return the one generator that stands for several sources on one board.

    I''* = sum I'', I'* = sum I', Ik* = sum Ik; each time constant makes the equivalent equal to the sum at
    tx: T''* = -tx/ln(K''*/M*), T'* = -tx/ln(K'*/N*), Tdc* = -tx/ln(Kdc*/Idc*); Z''* = U0/(sqrt3 I''*) and
    likewise, R* = Z''*/sqrt(1 + (w Tdc*)²), X* = sqrt(Z*² - R*²).

    Source: IEC 61363-1:1998, clause 7, equivalent generator, from memory; the instants tx are not confirmed,
    so they are arguments: T/2 for T''* and Tdc* makes the peak exact.

    Parameters
    ----------
    currents : FaultCurrent
        Sources on the first axis; motors have no transient and no sustained part.
    voltage_v : array_like
        Line voltage of the board before the fault, broadcast against the places [V].
    frequency_hz : float
        [Hz]
    tx_sub_s : float
        Instant at which T''* and Tdc* are formed [s].
    tx_trans_s : float
        Instant at which T'* is formed [s].

    Returns
    -------
    EquivalentGenerator
        Shape of the places.

    Raises
    ------
    ValueError
        No source gives any current.
    """
    if currents.subtransient_a.ndim == 0:
        raise ValueError("the sources must lie along the first axis")
    initial, transient = currents.subtransient_a.sum(axis=0), currents.transient_a.sum(axis=0)
    sustained, dc = currents.sustained_a.sum(axis=0), currents.dc_a.sum(axis=0)
    if not (initial > 0.0).all():
        raise ValueError("a place without any source has no equivalent generator")
    fast = currents.subtransient_a - currents.transient_a
    t_sub, sub_fitted = _condensed_time_constant_s(fast, currents.t_sub_s, tx_sub_s)
    slow = currents.transient_a - currents.sustained_a
    t_trans, trans_fitted = _condensed_time_constant_s(slow, currents.t_trans_s, tx_trans_s)
    t_dc, _ = _condensed_time_constant_s(currents.dc_a, currents.t_dc_s, tx_sub_s)
    z_sub = _source_impedance_ohm(voltage_v, initial)
    r = z_sub / np.sqrt(1.0 + (2.0 * math.pi * frequency_hz * t_dc) ** 2)
    x_sub = np.sqrt(z_sub**2 - r**2)
    source = Source(
        current=FaultCurrent(
            subtransient_a=initial,
            transient_a=transient,
            sustained_a=sustained,
            dc_a=dc,
            t_sub_s=t_sub,
            t_trans_s=t_trans,
            t_dc_s=t_dc,
        ),
        r_ohm=r,
        x_sub_ohm=x_sub,
        x_trans_ohm=_reactance_ohm(_source_impedance_ohm(voltage_v, transient), r),
        x_sustained_ohm=_reactance_ohm(_source_impedance_ohm(voltage_v, sustained), r),
        r_dc_ohm=r,
        x_dc_ohm=x_sub,
    )
    return EquivalentGenerator(source=source, sub_fitted=sub_fitted, trans_fitted=trans_fitted)


def starred(source: Source, voltage_v: ArrayLike) -> Source:
    """Return each source with its own starred impedances, Z'' = U0/(sqrt3 I'') and Z' = U0/(sqrt3 I').

    The load before the fault is then inside the impedances, as it is in the equivalent generator, while
    every source keeps its own decay. Without this step a loaded machine drives its full e.m.f. into a distant
    fault, which the load that stays on the board does not let it do: up to 13 % too much.

    Source: the starred impedances of IEC 61363-1:1998, clause 7, from memory, taken for each source.

    Parameters
    ----------
    source : Source
        At the board.
    voltage_v : array_like
        Line voltage of the board before the fault [V].

    Returns
    -------
    Source
        Same currents; the reactance of the sustained current is left alone.

    Raises
    ------
    ValueError
        A resistance that exceeds the starred impedance.
    """
    z_sub = _source_impedance_ohm(voltage_v, source.current.subtransient_a)
    z_trans = _source_impedance_ohm(voltage_v, source.current.transient_a)
    if (source.r_ohm > z_sub).any():
        raise ValueError("the resistance of a source exceeds its starred impedance")
    return replace(
        source,
        x_sub_ohm=np.sqrt(z_sub**2 - source.r_ohm**2),
        x_trans_ohm=np.sqrt(z_trans**2 - source.r_ohm**2),
    )


def own_part_of_common_impedance_ohm(initial_a: ArrayLike, impedance_ohm: ArrayLike) -> ComplexArray:
    """Return the series impedance that each source sees in an impedance common to all of them.

    A common impedance Z carries the sum of all currents, so a source that gives the part s of it sees Z / s.
    Each source, `starred` where loads ran, taken through its own part keeps its own decay behind it.

    Source: circuit theory; exact for sources alike, and at t = 0 for sources of equal impedance angle.

    Parameters
    ----------
    initial_a : array_like
        I'' of the sources at the near side, sources on the first axis [A].
    impedance_ohm : array_like of complex
        Common impedance of one phase, broadcast against the places [ohm].

    Returns
    -------
    ComplexArray
        Sources x places [ohm].

    Raises
    ------
    ValueError
        A source without current, which has no part.

    Examples
    --------
    >>> own_part_of_common_impedance_ohm([3000.0, 1000.0], 0.003 + 0.006j)
    array([0.004+0.008j, 0.012+0.024j])
    """
    initial = as_float(initial_a)
    if not (initial > 0.0).all():
        raise ValueError("a source without current has no part of the common impedance")
    return np.asarray(np.asarray(impedance_ohm) * initial.sum(axis=0) / initial, dtype=complex)


def referred(source: Source, voltage_ratio: ArrayLike) -> Source:
    """Return the source on another voltage level: impedances x (U2/U1)², currents x U1/U2.

    Source: IEC 61363-1:1998, non-active components, from memory; transformer theory.

    Parameters
    ----------
    source : Source
        On the level U1.
    voltage_ratio : array_like
        Rated U2/U1 of the transformer.

    Returns
    -------
    Source
        On the level U2, time constants unchanged.

    Raises
    ------
    ValueError
        A ratio of 0 or less.
    """
    ratio = as_float(voltage_ratio)
    if not (ratio > 0.0).all():
        raise ValueError("a voltage ratio must be above 0")
    bare = source.current
    return Source(
        current=FaultCurrent(
            subtransient_a=bare.subtransient_a / ratio,
            transient_a=bare.transient_a / ratio,
            sustained_a=bare.sustained_a / ratio,
            dc_a=bare.dc_a / ratio,
            t_sub_s=bare.t_sub_s,
            t_trans_s=bare.t_trans_s,
            t_dc_s=bare.t_dc_s,
        ),
        r_ohm=source.r_ohm * ratio**2,
        x_sub_ohm=source.x_sub_ohm * ratio**2,
        x_trans_ohm=source.x_trans_ohm * ratio**2,
        x_sustained_ohm=source.x_sustained_ohm * ratio**2,
        r_dc_ohm=source.r_dc_ohm * ratio**2,
        x_dc_ohm=source.x_dc_ohm * ratio**2,
    )
