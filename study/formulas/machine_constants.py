"""Relations between the standard data of a synchronous machine, per unit of its own rating."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]


def short_circuit_time_constant(
    t_open_s: ArrayLike, x_after_pu: ArrayLike, x_before_pu: ArrayLike
) -> FloatArray:
    """Return the short-circuit from the open-circuit time constant: ``T'd = T'd0 X'd/Xd``, likewise T''d.

    Source: IEC 60034-4-1 and IEEE 115, classical relation of standard data (time constants far apart); from
    memory.

    Parameters
    ----------
    t_open_s : float or ndarray
        Open-circuit time constant. [s]
    x_after_pu, x_before_pu : float or ndarray
        Reactance that the time constant leads from (X'd, X''d) and to (Xd, X'd). [pu]

    Returns
    -------
    ndarray
        Short-circuit time constant. [s]

    Raises
    ------
    ValueError
        The first reactance is not below the second.

    Examples
    --------
    >>> round(float(short_circuit_time_constant(2.5, 0.2, 2.0)), 9)
    0.25
    """
    return loaded_time_constant(t_open_s, x_after_pu, x_before_pu, 0.0)


def open_circuit_time_constant(
    t_short_s: ArrayLike, x_after_pu: ArrayLike, x_before_pu: ArrayLike
) -> FloatArray:
    """Return the open-circuit from the short-circuit time constant: the inverse relation.

    Source: see `short_circuit_time_constant`.

    Parameters
    ----------
    t_short_s : float or ndarray
        Short-circuit time constant. [s]
    x_after_pu, x_before_pu : float or ndarray
        X'd and Xd, or X''d and X'd. [pu]

    Returns
    -------
    ndarray
        Open-circuit time constant. [s]

    Raises
    ------
    ValueError
        The first reactance is not below the second.

    Examples
    --------
    >>> round(float(open_circuit_time_constant(0.25, 0.2, 2.0)), 9)
    2.5
    """
    return np.asarray(np.asarray(t_short_s, float) / loaded_time_constant(1.0, x_after_pu, x_before_pu, 0.0))


def loaded_time_constant(
    t_open_s: ArrayLike, x_after_pu: ArrayLike, x_before_pu: ArrayLike, x_external_pu: ArrayLike
) -> FloatArray:
    """Return the time constant behind an external reactance: ``T'd0 (X'd + Xe)/(Xd + Xe)``.

    Source: E. W. Kimbark, *Power System Stability*, vol. III, time constant with external reactance;
    from memory.

    Parameters
    ----------
    t_open_s : float or ndarray
        Open-circuit time constant. [s]
    x_after_pu, x_before_pu : float or ndarray
        X'd and Xd, or X''d and X'd. [pu]
    x_external_pu : float or ndarray
        Reactance outside the machine; 0 at a terminal short circuit, infinite at open circuit. [pu]

    Returns
    -------
    ndarray
        Time constant. [s]

    Raises
    ------
    ValueError
        The first reactance is not below the second.

    Examples
    --------
    >>> round(float(loaded_time_constant(2.5, 0.2, 2.0, 2.0)), 9)
    1.375
    """
    low, high = np.asarray(x_after_pu, float), np.asarray(x_before_pu, float)
    if np.any(low >= high):
        raise ValueError("a reactance sooner after a change must be below the later one: Xd'' < Xd' < Xd")
    external = np.asarray(x_external_pu, float)
    return np.asarray(np.asarray(t_open_s, float) * (low + external) / (high + external))


def negative_sequence_reactance(x_d2_pu: ArrayLike, x_q2_pu: ArrayLike) -> FloatArray:
    """Return the negative-sequence reactance: the mean of both subtransient reactances.

    Source: IEC 60034-4-1, determination of X2 from X''d and X''q; from memory.

    Parameters
    ----------
    x_d2_pu, x_q2_pu : float or ndarray
        Subtransient reactances of both axes. [pu]

    Returns
    -------
    ndarray
        X2. [pu]

    Examples
    --------
    >>> round(float(negative_sequence_reactance(0.15, 0.18)), 9)
    0.165
    """
    return np.asarray(0.5 * (np.asarray(x_d2_pu, float) + np.asarray(x_q2_pu, float)))


def armature_time_constant(x_2_pu: ArrayLike, ra_pu: ArrayLike, f_hz: ArrayLike) -> FloatArray:
    """Return the time constant of the d.c. component at a terminal short circuit: ``X2/(2 pi f Ra)``.

    Source: IEC 60034-4-1, armature time constant; from memory.

    Parameters
    ----------
    x_2_pu : float or ndarray
        Negative-sequence reactance. [pu]
    ra_pu : float or ndarray
        Stator resistance, above 0. [pu]
    f_hz : float or ndarray
        Rated frequency. [Hz]

    Returns
    -------
    ndarray
        Ta. [s]

    Examples
    --------
    >>> round(float(armature_time_constant(0.165, 0.011, 60.0)), 4)
    0.0398
    """
    return np.asarray(
        np.asarray(x_2_pu, float) / (2.0 * np.pi * np.asarray(f_hz, float) * np.asarray(ra_pu, float))
    )


def inertia_constant(inertia_kgm2: ArrayLike, speed_rpm: ArrayLike, s_rated_kva: ArrayLike) -> FloatArray:
    """Return the stored energy at rated speed over rated kVA: ``J w^2/(2 S)``.

    Source: definition.

    Parameters
    ----------
    inertia_kgm2 : float or ndarray
        Moment of inertia of the whole set. [kg m2]
    speed_rpm : float or ndarray
        Rated speed. [rpm]
    s_rated_kva : float or ndarray
        Rated apparent power. [kVA]

    Returns
    -------
    ndarray
        H. [s]

    Examples
    --------
    >>> round(float(inertia_constant(100.0, 1200.0, 1000.0)), 4)
    0.7896
    """
    omega = np.asarray(speed_rpm, float) * np.pi / 30.0
    return np.asarray(
        0.5 * np.asarray(inertia_kgm2, float) * omega**2 / (1e3 * np.asarray(s_rated_kva, float))
    )
