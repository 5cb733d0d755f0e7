"""Regulator and exciter of a set in time, and their linear transfer functions at open circuit.

Field is per unit of the field that gives rated voltage on the air-gap line. Every system is one chain:
transducer, PID regulator in multiples of the rated-load field, the limits 0 and what the supply gives at the
moment, and the lag of the exciter. What differs is the supply (`excitation`): constant (permanent magnet,
auxiliary winding), in proportion to the terminal voltage (shunt), or the phasor sum of a voltage-derived and
a current-derived part, of which a compounded set's regulator only takes away.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.winding_times import coupling, winding_time_constants

FloatArray = NDArray[np.float64]
TransferFunction = tuple[FloatArray, FloatArray]

TRANSDUCER_S = 0.005  # of the voltage measurement; lower end of 5 to 20 ms, common practice, no source
DERIVATIVE_FILTER_S = 0.01  # of the regulator; common practice, no source
SLIP_RING_LAG_S = 0.01  # of rectifier and firing where nothing rotates; common practice, no source
KVAR_TRIM_S = 5.0  # of a slow controller that holds a set at its kvar; common practice, no source


@dataclass(frozen=True, slots=True, kw_only=True)
class RegulatorGains:
    """Gains of a PID regulator, in multiples of the rated-load field per unit of voltage.

    Attributes
    ----------
    proportional : float
        [1]
    integral_per_s : float
        [1/s]
    derivative_s : float
        [s]
    """

    proportional: float
    integral_per_s: float
    derivative_s: float


def reference_at_frequency(v_ref_pu: ArrayLike, f_hz: ArrayLike, knee_hz: float) -> FloatArray:
    """Return the set-point as the volts-per-hertz function leaves it: in proportion to f below the knee.

    Source: common practice of regulators of generating sets, no standard; IEEE 421.5-2016, V/Hz limiter.

    Parameters
    ----------
    v_ref_pu : float or ndarray
        Set-point. [pu]
    f_hz : float or ndarray
        Frequency. [Hz]
    knee_hz : float
        Knee; 0 for none. [Hz]

    Returns
    -------
    ndarray
        Set-point in force. [pu]

    Examples
    --------
    >>> reference_at_frequency(1.0, [60.0, 54.0], 57.0).round(4).tolist()
    [1.0, 0.9474]
    """
    v, f = np.asarray(v_ref_pu, float), np.asarray(f_hz, float)
    return np.asarray(v * np.minimum(1.0, f / knee_hz) if knee_hz > 0.0 else v + 0.0 * f)


def regulator_output(
    error_pu: ArrayLike,
    integral_pu: ArrayLike,
    filtered_error_pu: ArrayLike,
    gains: RegulatorGains,
    rated_field_pu: float,
) -> FloatArray:
    """Return the field that a PID regulator asks for, before its limits.

    ``u = Efr (Kp e + xi + Kd (e - xd)/Td)`` with the states ``dxi/dt = Ki e`` and ``dxd/dt = (e - xd)/Td``.

    Source: IEEE 421.5-2016, type AC8B, from memory; gains in multiples of the rated-load field.

    Parameters
    ----------
    error_pu : float or ndarray
        Set-point less what is measured. [pu]
    integral_pu, filtered_error_pu : float or ndarray
        States xi [x rated-load field] and xd [pu].
    gains : RegulatorGains
        Of the regulator.
    rated_field_pu : float
        Field at rated load. [pu of the air-gap-line field]

    Returns
    -------
    ndarray
        Field. [pu of the air-gap-line field]

    Examples
    --------
    >>> g = RegulatorGains(proportional=20.0, integral_per_s=20.0, derivative_s=0.5)
    >>> round(float(regulator_output(0.01, 0.4, 0.01, g, 2.5)), 3)
    1.5
    """
    e, xd = np.asarray(error_pu, float), np.asarray(filtered_error_pu, float)
    by_gain = gains.proportional * e + gains.derivative_s * (e - xd) / DERIVATIVE_FILTER_S
    return np.asarray(rated_field_pu * (by_gain + np.asarray(integral_pu, float)))


def machine_open_circuit(
    *, x_d_pu: float, x_d1_pu: float, x_d2_pu: float, x_l_pu: float, t_d01_s: float, t_d02_s: float
) -> TransferFunction:
    """Return the transfer function from field to terminal voltage at open circuit and rated speed.

    ``(1 + a T2 s)/((1 + T'd0 s)(1 + T''d0 s))`` with ``a = (X''d - Xl)/(X'd - Xl)`` and T2 of the damper.

    Source: machine model of P. W. Sauer and M. A. Pai, *Power System Dynamics and Stability*, with no
    current; from memory.

    Parameters
    ----------
    x_d_pu, x_d1_pu, x_d2_pu, x_l_pu : float
        Xd, X'd, X''d and leakage reactance. [pu]
    t_d01_s, t_d02_s : float
        T'd0 and T''d0. [s]

    Returns
    -------
    tuple of ndarray
        Numerator and denominator, highest power of s first.

    Examples
    --------
    >>> data = {"x_d_pu": 2.0, "x_d1_pu": 0.2, "x_d2_pu": 0.12, "x_l_pu": 0.08}
    >>> n, d = machine_open_circuit(**data, t_d01_s=2.5, t_d02_s=0.03)
    >>> n.round(5).tolist(), d.round(4).tolist()
    ([0.01165, 1.0], [0.075, 2.53, 1.0])
    """
    a = (x_d2_pu - x_l_pu) / (x_d1_pu - x_l_pu)
    c = coupling(x_d_pu, x_d1_pu, x_d2_pu, x_l_pu)
    damper_s = winding_time_constants(c, t_d01_s, t_d02_s)[1]
    return np.array([a * damper_s, 1.0]), np.asarray(np.polymul([t_d01_s, 1.0], [t_d02_s, 1.0]), float)


def regulated_open_circuit(
    machine: TransferFunction, gains: RegulatorGains, *, rated_field_pu: float, exciter_s: float
) -> TransferFunction:
    """Return the transfer function from set-point to terminal voltage at open circuit, within the limits.

    Source: block diagram of this module.

    Parameters
    ----------
    machine : tuple of ndarray
        From `machine_open_circuit`.
    gains : RegulatorGains
        Of the regulator.
    rated_field_pu : float
        Field at rated load. [pu of the air-gap-line field]
    exciter_s : float
        Lag of the exciter. [s]

    Returns
    -------
    tuple of ndarray
        Numerator and denominator, highest power of s first.

    Examples
    --------
    >>> data = {"x_d_pu": 2.0, "x_d1_pu": 0.2, "x_d2_pu": 0.12, "x_l_pu": 0.08}
    >>> m = machine_open_circuit(**data, t_d01_s=2.0, t_d02_s=0.03)
    >>> g = RegulatorGains(proportional=20.0, integral_per_s=20.0, derivative_s=0.5)
    >>> n, d = regulated_open_circuit(m, g, rated_field_pu=2.5, exciter_s=0.1)
    >>> round(float(n[-1] / d[-1]), 9)
    1.0
    """
    pid = np.polyadd(
        np.polymul([gains.proportional, gains.integral_per_s], [DERIVATIVE_FILTER_S, 1.0]),
        [gains.derivative_s, 0.0, 0.0],
    )
    forward = rated_field_pu * np.polymul(pid, machine[0])
    lag = np.polymul(np.polymul([DERIVATIVE_FILTER_S, 1.0, 0.0], [exciter_s, 1.0]), machine[1])
    return (
        np.polymul(forward, [TRANSDUCER_S, 1.0]),
        np.polyadd(np.polymul(lag, [TRANSDUCER_S, 1.0]), forward),
    )


def self_excited_open_circuit(
    machine: TransferFunction, *, voltage_gain: float, exciter_s: float
) -> TransferFunction:
    """Return the transfer function from an added field to terminal voltage of a set without regulator.

    The supply returns ``Kv V`` through the lag of the exciter; the voltage is fixed where Kv is below 1, or
    by saturation.

    Source: block diagram of this module.

    Parameters
    ----------
    machine : tuple of ndarray
        From `machine_open_circuit`.
    voltage_gain : float
        Kv, field for 1 pu voltage. [pu]
    exciter_s : float
        Lag of the exciter. [s]

    Returns
    -------
    tuple of ndarray
        Numerator and denominator, highest power of s first.

    Examples
    --------
    >>> data = {"x_d_pu": 2.0, "x_d1_pu": 0.2, "x_d2_pu": 0.12, "x_l_pu": 0.08}
    >>> m = machine_open_circuit(**data, t_d01_s=2.0, t_d02_s=0.03)
    >>> n, d = self_excited_open_circuit(m, voltage_gain=0.5, exciter_s=0.1)
    >>> round(float(n[-1] / d[-1]), 9)
    2.0
    """
    return machine[0], np.polyadd(np.polymul([exciter_s, 1.0], machine[1]), -voltage_gain * machine[0])
