"""IEC 61363-1: short-circuit current of synchronous machines, at terminals and behind an impedance.

Every current is kept as its own exponentials and direct component, so that sources with unlike decay can be
added at any instant. Arrays broadcast: the usual shape is sources x places, with times on a further axis.

The text of the standard was not at hand: its formulas are written from memory and held against a full-order
machine model by the tests.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, fields, replace

import numpy as np
from numpy.typing import ArrayLike

from study.formulas.fault_current import (
    SQRT2,
    SQRT3,
    ComplexArray,
    FaultCurrent,
    FloatArray,
    as_float,
    read_only_arrays,
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """A fault current together with the impedances that carry it through a further impedance.

    Attributes
    ----------
    current : FaultCurrent
        The current that the source gives at the place reached so far.
    r_ohm : FloatArray
        Series resistance for the a.c. component [ohm].
    x_sub_ohm, x_trans_ohm, x_sustained_ohm : FloatArray
        Reactances that limit I'', I' and Ik [ohm]; ``inf`` where the source has no such component.
    r_dc_ohm, x_dc_ohm : FloatArray
        Resistance and reactance of the direct component [ohm]: Tdc = x_dc / (w r_dc).
    """

    current: FaultCurrent
    r_ohm: FloatArray
    x_sub_ohm: FloatArray
    x_trans_ohm: FloatArray
    x_sustained_ohm: FloatArray
    r_dc_ohm: FloatArray
    x_dc_ohm: FloatArray

    def __post_init__(self) -> None:
        """Give the impedances one shape, make them read-only and refuse values that cannot be."""
        names = [field.name for field in fields(self) if field.name != "current"]
        for name, array in read_only_arrays({name: getattr(self, name) for name in names}).items():
            if np.isnan(array).any() or (array < 0.0).any():
                raise ValueError(f"{name} holds an impedance below 0 ohm or no number")
            object.__setattr__(self, name, array)
        if not (self.x_sub_ohm > 0.0).all():
            raise ValueError("x_sub_ohm must be above 0 ohm")


def load_phasor_a(current_a: ArrayLike, cos_phi: ArrayLike) -> ComplexArray:
    """Return the load current before the fault as a phasor on the terminal voltage, lagging.

    In the generator sense: a generator that delivers reactive power takes it as it is, a motor that draws
    reactive power takes its negative, and a leading current is its conjugate.

    Parameters
    ----------
    current_a : array_like
        Load current, r.m.s. [A].
    cos_phi : array_like
        Power factor [0..1].

    Returns
    -------
    ComplexArray
        I0 (cos phi - j sin phi) [A].

    Raises
    ------
    ValueError
        A power factor outside 0..1.

    Examples
    --------
    >>> load_phasor_a(100.0, 0.8)
    array(80.-60.j)
    """
    cosine = as_float(cos_phi)
    if not ((cosine >= 0.0) & (cosine <= 1.0)).all():
        raise ValueError("a power factor lies between 0 and 1")
    current = as_float(current_a) * (cosine - 1j * np.sqrt(1.0 - cosine**2))
    return np.asarray(current, dtype=complex)


def internal_emf_v(voltage_v: ArrayLike, load_a: ArrayLike, r_ohm: ArrayLike, x_ohm: ArrayLike) -> FloatArray:
    """Return the phase voltage E'' or E' behind a reactance from the load before the fault.

    Source: IEC 61363-1:1998, synchronous generators, from memory. The vector sum written there in
    components, sqrt[(U0/sqrt3 cos phi + R I0)^2 + (U0/sqrt3 sin phi + X I0)^2], is this magnitude.

    Parameters
    ----------
    voltage_v : array_like
        Line voltage at the terminals before the fault [V].
    load_a : array_like of complex
        Load current in the generator sense, see `load_phasor_a` [A].
    r_ohm, x_ohm : array_like
        Ra and X'' (or X') [ohm].

    Returns
    -------
    FloatArray
        Phase voltage [V].

    Examples
    --------
    >>> round(float(internal_emf_v(3**0.5, load_phasor_a(1.0, 0.8), 0.0, 0.15)), 4)
    1.0966
    """
    impedance = as_float(r_ohm) + 1j * as_float(x_ohm)
    return as_float(np.abs(as_float(voltage_v) / SQRT3 + impedance * np.asarray(load_a)))


def dc_time_constant_s(x_sub_ohm: ArrayLike, ra_ohm: ArrayLike, frequency_hz: float) -> FloatArray:
    """Return Tdc = X''d / (w Ra), for a machine whose maker gives no Tdc.

    Source: IEC 61363-1:1998, from memory.

    Parameters
    ----------
    x_sub_ohm, ra_ohm : array_like
        Subtransient reactance and armature resistance [ohm].
    frequency_hz : float
        [Hz]

    Returns
    -------
    FloatArray
        [s]; ``inf`` where the resistance is 0.

    Examples
    --------
    >>> round(float(dc_time_constant_s(0.15, 0.01, 60.0)), 4)
    0.0398
    """
    omega = 2.0 * math.pi * frequency_hz
    x_sub, ra = np.broadcast_arrays(as_float(x_sub_ohm), as_float(ra_ohm))
    return as_float(np.divide(x_sub, omega * ra, out=np.full(x_sub.shape, np.inf), where=ra > 0.0))


def dc_start_a(subtransient_a: ArrayLike, load_a: ArrayLike) -> FloatArray:
    """Return the direct component at t = 0, sqrt2 (I'' - I0 sin phi0), for the worst angle.

    Source: IEC 61363-1:1998, synchronous generators (and, with the load's sign turned, motors), from memory.

    Parameters
    ----------
    subtransient_a : array_like
        I'' [A].
    load_a : array_like of complex
        Load current in the generator sense [A].

    Returns
    -------
    FloatArray
        [A]

    Examples
    --------
    >>> round(float(dc_start_a(1000.0, 80 - 60j)), 1)
    1329.4
    """
    return np.asarray(SQRT2 * (as_float(subtransient_a) + np.imag(np.asarray(load_a))))


def synchronous_source(
    *,
    voltage_v: ArrayLike,
    load_a: ArrayLike,
    ra_ohm: ArrayLike,
    x_sub_ohm: ArrayLike,
    x_trans_ohm: ArrayLike,
    xd_ohm: ArrayLike,
    t_sub_s: ArrayLike,
    t_trans_s: ArrayLike,
    t_dc_s: ArrayLike,
    sustained_a: ArrayLike,
    frequency_hz: float,
) -> Source:
    """Return the fault current of synchronous machines at their terminals.

    I''kd = E''q0 / Z''d, I'kd = E'q0 / Z'd. A motor gives its load with the sign turned and 0 A sustained.

    Source: IEC 61363-1:1998, synchronous generators and motors, from memory.

    Parameters
    ----------
    voltage_v : array_like
        Line voltage before the fault [V].
    load_a : array_like of complex
        Load current before the fault in the generator sense [A]; 0 for a machine at no load.
    ra_ohm, x_sub_ohm, x_trans_ohm, xd_ohm : array_like
        Ra, X''d, X'd, Xd [ohm].
    t_sub_s, t_trans_s, t_dc_s : array_like
        T''d, T'd, Tdc [s].
    sustained_a : array_like
        Ikd, excitation system included [A].
    frequency_hz : float
        [Hz]

    Returns
    -------
    Source
        Shape of the broadcast inputs.

    Raises
    ------
    ValueError
        X'd below X''d, or a value that no machine can have.

    Examples
    --------
    >>> source = synchronous_source(
    ...     voltage_v=450.0, load_a=0.0, ra_ohm=0.0, x_sub_ohm=0.03, x_trans_ohm=0.05, xd_ohm=0.4,
    ...     t_sub_s=0.015, t_trans_s=0.25, t_dc_s=0.04, sustained_a=3000.0, frequency_hz=60.0)
    >>> round(float(source.current.subtransient_a))
    8660
    """
    omega = 2.0 * math.pi * frequency_hz
    ra, x_sub, x_trans, t_dc = np.broadcast_arrays(
        *(as_float(value) for value in (ra_ohm, x_sub_ohm, x_trans_ohm, t_dc_s))
    )
    if (x_trans < x_sub).any():
        raise ValueError("X'd is below X''d: the two are interchanged or wrong")
    subtransient = internal_emf_v(voltage_v, load_a, ra, x_sub) / np.hypot(ra, x_sub)
    # A finite Tdc with Ra = 0 can only mean that the resistance was not told.
    r_dc = np.where((ra == 0.0) & np.isfinite(t_dc), x_sub / (omega * t_dc), ra)
    x_dc = np.where(np.isfinite(t_dc), omega * np.where(np.isfinite(t_dc), t_dc, 0.0) * r_dc, x_sub)
    return Source(
        current=FaultCurrent(
            subtransient_a=subtransient,
            transient_a=internal_emf_v(voltage_v, load_a, ra, x_trans) / np.hypot(ra, x_trans),
            sustained_a=as_float(sustained_a),
            dc_a=dc_start_a(subtransient, load_a),
            t_sub_s=as_float(t_sub_s),
            t_trans_s=as_float(t_trans_s),
            t_dc_s=t_dc,
        ),
        r_ohm=ra,
        x_sub_ohm=x_sub,
        x_trans_ohm=x_trans,
        x_sustained_ohm=as_float(xd_ohm),
        r_dc_ohm=r_dc,
        x_dc_ohm=x_dc,
    )


def _fall(r0_ohm: FloatArray, x0_ohm: FloatArray, r_ohm: FloatArray, x_ohm: FloatArray) -> FloatArray:
    """Return the factor |Z0| / |Z0 + Z| on a current; 1 where the source has no such component."""
    present = np.isfinite(x0_ohm)
    x0 = np.where(present, x0_ohm, 1.0)
    return as_float(np.where(present, np.hypot(r0_ohm, x0) / np.hypot(r0_ohm + r_ohm, x0 + x_ohm), 1.0))


def _stretch(
    r0_ohm: FloatArray, fast_ohm: FloatArray, slow_ohm: FloatArray, r_ohm: FloatArray, x_ohm: FloatArray
) -> FloatArray:
    """Return the factor on T'' (or T') where its reactances are X'', X' (or X', Xd); 1 without impedance.

    An infinite slow reactance is the limit for a source that has no slower component.
    """
    present = np.isfinite(fast_ohm)
    fast = np.where(present, fast_ohm, 1.0)
    inverse0, inverse = 1.0 / slow_ohm, 1.0 / (slow_ohm + x_ohm)
    bare = (r0_ohm**2 + fast**2) / (r0_ohm**2 * inverse0 + fast)
    r, x = r0_ohm + r_ohm, fast + x_ohm
    slow_ratio = 1.0 / (1.0 + x_ohm * inverse0)
    return as_float(np.where(present, (r**2 + x**2) / (r**2 * inverse + x) / bare * slow_ratio, 1.0))


def through_impedance(source: Source, *, r_ohm: ArrayLike, x_ohm: ArrayLike, frequency_hz: float) -> Source:
    """Return the source as seen behind a series impedance: currents and time constants adjusted.

    T''de = T''d [(Ra+R)^2 + (X''d+X)^2] X'd / {[(Ra+R)^2 + (X''d+X)(X'd+X)] X''d}, T'de likewise with X'd and
    Xd, both divided by their value at R = X = 0 so that no impedance leaves the bare constants;
    Tdce = [Tdc + X/(w Ra)] / (1 + R/Ra). The direct component scales with I''.

    Source: IEC 61363-1:1998, influence of non-active components, from memory.

    Parameters
    ----------
    source : Source
        A machine, or a group condensed into one.
    r_ohm, x_ohm : array_like
        Impedance of one phase, on the voltage level of the source, broadcast against it [ohm].
    frequency_hz : float
        [Hz]

    Returns
    -------
    Source
        With the impedance included, so that it may be carried through a further one.

    Raises
    ------
    ValueError
        A negative resistance or reactance.
    """
    r, x = as_float(r_ohm), as_float(x_ohm)
    if not ((r >= 0.0).all() and (x >= 0.0).all()):
        raise ValueError("a series impedance has neither negative resistance nor negative reactance")
    bare, r0 = source.current, source.r_ohm
    x_sub, x_trans, x_sustained = source.x_sub_ohm, source.x_trans_ohm, source.x_sustained_ohm
    fall = _fall(r0, x_sub, r, x)
    r_dc, x_dc = source.r_dc_ohm + r, source.x_dc_ohm + x
    added = (r > 0.0) | (x > 0.0)
    return Source(
        current=FaultCurrent(
            subtransient_a=bare.subtransient_a * fall,
            transient_a=bare.transient_a * _fall(r0, x_trans, r, x),
            sustained_a=bare.sustained_a * _fall(r0, x_sustained, r, x),
            dc_a=bare.dc_a * fall,
            t_sub_s=bare.t_sub_s * _stretch(r0, x_sub, x_trans, r, x),
            t_trans_s=bare.t_trans_s * _stretch(r0, x_trans, x_sustained, r, x),
            t_dc_s=np.where(added, dc_time_constant_s(x_dc, r_dc, frequency_hz), bare.t_dc_s),
        ),
        r_ohm=r0 + r,
        x_sub_ohm=x_sub + x,
        x_trans_ohm=x_trans + x,
        x_sustained_ohm=x_sustained + x,
        r_dc_ohm=r_dc,
        x_dc_ohm=x_dc,
    )


def with_sustained(source: Source, sustained_a: ArrayLike) -> Source:
    """Return the source with another sustained current, its other components left alone.

    Parameters
    ----------
    source : Source
        Any shape.
    sustained_a : array_like
        [A]

    Returns
    -------
    Source
    """
    current = replace(source.current, sustained_a=as_float(sustained_a))
    return replace(source, current=current)
