"""IEC 61363-1: short-circuit current of asynchronous motors.

The text of the standard was not at hand: formulas and typical data are written from memory. The typical
data reproduce the well-known 6.25, 4 and 10 times rated current; the tests hold them against a full-order
model. Converter sources, which have no decay of their own, are here too.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from study.formulas.fault_current import SQRT2, SQRT3, FaultCurrent, FloatArray, as_float
from study.formulas.fault_iec61363 import Source, dc_start_a, dc_time_constant_s, internal_emf_v


@dataclass(frozen=True, slots=True, kw_only=True)
class MotorImpedances:
    """Locked-rotor circuit of a motor, per unit of its rated impedance UrM / (sqrt3 IrM).

    Attributes
    ----------
    rs_pu, rr_pu : float
        Stator and rotor resistance [pu].
    x_pu : float
        XM = XS + XR [pu].
    """

    rs_pu: float
    rr_pu: float
    x_pu: float


# From memory of IEC 61363-1:1998: Z''M 0.16, XM 0.15, RS 0.034, RR 0.021. No second set for small motors
# could be confirmed: the same values serve motors one by one (above 100 kW) and the equivalent of the rest.
TYPICAL_MOTOR = MotorImpedances(rs_pu=0.034, rr_pu=0.021, x_pu=0.15)

# Rated output above which the standard takes motors one by one; the rest are lumped [kW]. From memory.
LARGE_MOTOR_KW = 100.0


def motor_rated_impedance_ohm(rated_voltage_v: ArrayLike, rated_current_a: ArrayLike) -> FloatArray:
    """Return UrM / (sqrt3 IrM), the base of a motor's per-unit impedances.

    Source: definition; used so in IEC 60909-0:2016, asynchronous motors.

    Parameters
    ----------
    rated_voltage_v : array_like
        Line voltage [V].
    rated_current_a : array_like
        [A]; of an equivalent motor the sum of the rated currents.

    Returns
    -------
    FloatArray
        [ohm]

    Examples
    --------
    >>> round(float(motor_rated_impedance_ohm(440.0, 100.0)), 4)
    2.5403
    """
    return as_float(as_float(rated_voltage_v) / (SQRT3 * as_float(rated_current_a)))


def motor_subtransient_time_constant_s(
    x_ohm: ArrayLike, rr_ohm: ArrayLike, frequency_hz: float
) -> FloatArray:
    """Return T''M = (XS + XR) / (w RR).

    Source: IEC 61363-1:1998, asynchronous motors, from memory.

    Parameters
    ----------
    x_ohm, rr_ohm : array_like
        XS + XR (with the cable's reactance) and the rotor resistance [ohm].
    frequency_hz : float
        [Hz]

    Returns
    -------
    FloatArray
        [s]

    Examples
    --------
    >>> round(float(motor_subtransient_time_constant_s(0.15, 0.021, 60.0)), 4)
    0.0189
    """
    return dc_time_constant_s(x_ohm, rr_ohm, frequency_hz)


def asynchronous_source(
    *,
    voltage_v: ArrayLike,
    load_a: ArrayLike,
    rs_ohm: ArrayLike,
    rr_ohm: ArrayLike,
    x_ohm: ArrayLike,
    frequency_hz: float,
) -> Source:
    """Return the fault current of asynchronous motors at their terminals.

    I''M = E''M / Z''M with Z''M = RS + RR + j(XS + XR), T''M = (XS+XR)/(w RR), TdcM = (XS+XR)/(w RS). Without
    pre-load (0 A) E''M is the voltage and the direct component starts at sqrt2 I''M. A motor cable is added
    with `motor_behind_cable`.

    Source: IEC 61363-1:1998, asynchronous motors, from memory.

    Parameters
    ----------
    voltage_v : array_like
        Line voltage before the fault [V].
    load_a : array_like of complex
        Load current in the generator sense [A]: the negative of `load_phasor_a` for a running motor, or 0.
    rs_ohm, rr_ohm, x_ohm : array_like
        RS, RR and XS + XR [ohm].
    frequency_hz : float
        [Hz]

    Returns
    -------
    Source
        Shape of the broadcast inputs; no transient and no sustained component.

    Raises
    ------
    ValueError
        A resistance of 0 ohm or less, or a reactance of 0 ohm or less.

    Examples
    --------
    >>> source = asynchronous_source(voltage_v=3**0.5, load_a=0.0, rs_ohm=0.034, rr_ohm=0.021, x_ohm=0.15,
    ...                              frequency_hz=60.0)
    >>> round(float(source.current.subtransient_a), 2)
    6.26
    """
    rs, rr, x = as_float(rs_ohm), as_float(rr_ohm), as_float(x_ohm)
    if not ((rs > 0.0).all() and (rr > 0.0).all() and (x > 0.0).all()):
        raise ValueError("RS, RR and XS + XR of a motor must be above 0 ohm")
    initial = internal_emf_v(voltage_v, load_a, rs + rr, x) / np.hypot(rs + rr, x)
    return Source(
        current=FaultCurrent(
            subtransient_a=initial,
            transient_a=as_float(0.0),
            sustained_a=as_float(0.0),
            dc_a=dc_start_a(initial, load_a),
            t_sub_s=motor_subtransient_time_constant_s(x, rr, frequency_hz),
            t_trans_s=as_float(math.inf),
            t_dc_s=dc_time_constant_s(x, rs, frequency_hz),
        ),
        r_ohm=rs + rr,
        x_sub_ohm=x,
        x_trans_ohm=as_float(math.inf),
        x_sustained_ohm=as_float(math.inf),
        r_dc_ohm=rs,
        x_dc_ohm=x,
    )


def motor_behind_cable(
    *,
    voltage_v: ArrayLike,
    load_a: ArrayLike,
    rs_ohm: ArrayLike,
    rr_ohm: ArrayLike,
    x_ohm: ArrayLike,
    cable_r_ohm: ArrayLike,
    cable_x_ohm: ArrayLike,
    frequency_hz: float,
) -> Source:
    """Return the fault current of asynchronous motors at the board end of their own cables.

    RM becomes RM + Rc and XM becomes XM + Xc; T''M = (XM+Xc)/(w RR), TdcM = (XM+Xc)/(w (RS+Rc)): the cable's
    resistance acts with the stator's.

    Source: IEC 61363-1:1998, asynchronous motors with cable, from memory.

    Parameters
    ----------
    voltage_v : array_like
        Line voltage at the board before the fault [V].
    load_a : array_like of complex
        Load current in the generator sense, see `asynchronous_source` [A].
    rs_ohm, rr_ohm, x_ohm : array_like
        RS, RR and XS + XR [ohm].
    cable_r_ohm, cable_x_ohm : array_like
        One phase of the cable [ohm].
    frequency_hz : float
        [Hz]

    Returns
    -------
    Source
        Shape of the broadcast inputs.

    Raises
    ------
    ValueError
        As `asynchronous_source`.
    """
    return asynchronous_source(
        voltage_v=voltage_v,
        load_a=load_a,
        rs_ohm=as_float(rs_ohm) + as_float(cable_r_ohm),
        rr_ohm=rr_ohm,
        x_ohm=as_float(x_ohm) + as_float(cable_x_ohm),
        frequency_hz=frequency_hz,
    )


def typical_motor_source(
    *, voltage_v: ArrayLike, rated_voltage_v: ArrayLike, rated_current_a: ArrayLike, frequency_hz: float
) -> Source:
    """Return the fault current of motors of which only the rated current is known, without pre-load.

    Source: IEC 61363-1:1998, typical data of asynchronous motors, from memory (`TYPICAL_MOTOR`).

    Parameters
    ----------
    voltage_v : array_like
        Line voltage before the fault [V].
    rated_voltage_v : array_like
        [V]
    rated_current_a : array_like
        [A]; of an equivalent motor the sum of the rated currents.
    frequency_hz : float
        [Hz]

    Returns
    -------
    Source
        Shape of the broadcast inputs.

    Examples
    --------
    >>> source = typical_motor_source(voltage_v=440.0, rated_voltage_v=440.0, rated_current_a=100.0,
    ...                               frequency_hz=60.0)
    >>> round(float(source.current.subtransient_a))
    626
    """
    base = motor_rated_impedance_ohm(rated_voltage_v, rated_current_a)
    return asynchronous_source(
        voltage_v=voltage_v,
        load_a=0.0,
        rs_ohm=TYPICAL_MOTOR.rs_pu * base,
        rr_ohm=TYPICAL_MOTOR.rr_pu * base,
        x_ohm=TYPICAL_MOTOR.x_pu * base,
        frequency_hz=frequency_hz,
    )


def limited_current_a(current_a: ArrayLike, duration_s: ArrayLike, time_s: ArrayLike) -> FloatArray:
    """Return the current of a converter source: constant for its duration, then none; no direct component.

    Source: maker's value and duration, as IEC 61363-1:1998 asks; the constant magnitude is that of a current
    source in IEC 60909-0:2016, power station units with full-size converter, from memory.

    Parameters
    ----------
    current_a : array_like
        Limited current, r.m.s. [A].
    duration_s : array_like
        How long the converter holds it before it blocks [s].
    time_s : array_like
        Time from the start of the fault [s].

    Returns
    -------
    FloatArray
        Shape of the broadcast inputs [A].

    Examples
    --------
    >>> limited_current_a(500.0, 0.1, [0.0, 0.05, 0.2])
    array([500., 500.,   0.])
    """
    current, duration, time = np.broadcast_arrays(as_float(current_a), as_float(duration_s), as_float(time_s))
    return np.where(time <= duration, current, 0.0)


def limited_current_behind_impedance_a(
    current_a: ArrayLike, voltage_v: ArrayLike, r_ohm: ArrayLike, x_ohm: ArrayLike
) -> FloatArray:
    """Return what a converter source drives through an impedance: its limit, or what its voltage can drive.

    Source: circuit theory; a converter that limits its current holds no more than its rated voltage.

    Parameters
    ----------
    current_a : array_like
        Limited current, r.m.s. [A].
    voltage_v : array_like
        Rated line voltage of the converter [V].
    r_ohm, x_ohm : array_like
        One phase between converter and fault [ohm].

    Returns
    -------
    FloatArray
        [A]

    Examples
    --------
    >>> float(limited_current_behind_impedance_a(500.0, 400.0, 0.0, 0.0))
    500.0
    >>> round(float(limited_current_behind_impedance_a(500.0, 400.0, 1.0, 0.0)), 1)
    230.9
    """
    impedance = np.hypot(as_float(r_ohm), as_float(x_ohm))
    with np.errstate(divide="ignore"):
        voltage_limit = as_float(voltage_v) / SQRT3 / impedance
    return as_float(np.minimum(as_float(current_a), voltage_limit))


def limited_peak_a(current_a: ArrayLike) -> FloatArray:
    """Return the peak of a limited current, sqrt2 I: it has no direct component.

    Source: definition of the peak of a sine wave.

    Parameters
    ----------
    current_a : array_like
        r.m.s. [A]

    Returns
    -------
    FloatArray
        [A]
    """
    return as_float(SQRT2 * as_float(current_a))
