"""Load balance: what a consumer takes at part load, and what of it counts."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

# The constant part of a motor's rated losses for which the efficiency at 3/4 load equals that at rated load.
CONSTANT_LOSS_SHARE = 3.0 / 7.0
# Leakage reactance that the load-dependent part of a motor's kvar stands for, pu of rated input kVA.
MOTOR_LEAKAGE_PU = 0.15


def part_load_efficiency(load_fraction: ArrayLike, efficiency: ArrayLike) -> FloatArray:
    """Return the efficiency of a motor at part load from that at rated load.

    ``eta = 1/(1 + v0/b + vL b)`` with b the load fraction, ``v0 + vL = 1/eta_r - 1`` and ``v0 = 3/7`` of it:
    the split at which the efficiency at three-quarter load equals that at rated load.

    Source: IEC 60034-31, efficiency at any load from two published ones (from memory). That both efficiencies
    are equal is common practice of motor data, no source.

    Parameters
    ----------
    load_fraction : float or ndarray
        Output over rated output, above 0.
    efficiency : float or ndarray
        Efficiency at rated output, above 0, not above 1.

    Returns
    -------
    ndarray
        Efficiency, 0..1.

    Raises
    ------
    ValueError
        A load fraction that is not above 0, or an efficiency outside 0..1.

    Examples
    --------
    >>> part_load_efficiency([0.25, 0.5, 0.75, 1.0], 0.90).round(3).tolist()
    [0.829, 0.887, 0.9, 0.9]
    """
    b = np.asarray(load_fraction, float)
    if np.any(b <= 0.0):
        raise ValueError("the load fraction must be above 0: an idle motor has no efficiency")
    return np.asarray(b / input_per_rated_output(b, efficiency))


def input_per_rated_output(load_fraction: ArrayLike, efficiency: ArrayLike) -> FloatArray:
    """Return the input of a motor over its rated output; at no load what remains is the constant loss.

    Source: see `part_load_efficiency`.

    Parameters
    ----------
    load_fraction : float or ndarray
        Output over rated output, 0 or more.
    efficiency : float or ndarray
        Efficiency at rated output, above 0, not above 1.

    Returns
    -------
    ndarray
        Input power. [pu of rated output]

    Raises
    ------
    ValueError
        A negative load fraction, or an efficiency outside 0..1.

    Examples
    --------
    >>> round(float(input_per_rated_output(1.0, 0.9)), 4)
    1.1111
    """
    b, eta = np.asarray(load_fraction, float), np.asarray(efficiency, float)
    if np.any(b < 0.0):
        raise ValueError("the load fraction must be 0 or more")
    if np.any(eta <= 0.0) or np.any(eta > 1.0):
        raise ValueError("the efficiency must be above 0 and not above 1")
    loss = 1.0 / eta - 1.0
    return np.asarray(b + loss * (CONSTANT_LOSS_SHARE + (1.0 - CONSTANT_LOSS_SHARE) * b * b))


def part_load_reactive_fraction(load_fraction: ArrayLike, cos_phi: ArrayLike) -> FloatArray:
    """Return the reactive power of an induction motor at part load over that at rated load.

    ``a + (1 - a) b^2``: a magnetising part that does not change and a leakage part that follows the current,
    with ``1 - a = 0.15/sin(phi_r)``.

    Source: form of the equivalent circuit; a leakage of 0.15 pu puts the half-load power factor 0.10 to 0.15
    below the rated one, common practice, no source.

    Parameters
    ----------
    load_fraction : float or ndarray
        Output over rated output, 0 or more.
    cos_phi : float or ndarray
        Power factor at rated output, above 0, not above 1.

    Returns
    -------
    ndarray
        Fraction of the rated reactive power.

    Raises
    ------
    ValueError
        A negative load fraction, or a power factor outside 0..1.

    Examples
    --------
    >>> round(float(part_load_reactive_fraction(0.5, 0.8)), 4)
    0.8125
    """
    b, cos = np.asarray(load_fraction, float), np.asarray(cos_phi, float)
    if np.any(b < 0.0):
        raise ValueError("the load fraction must be 0 or more")
    if np.any(cos <= 0.0) or np.any(cos > 1.0):
        raise ValueError("the power factor must be above 0 and not above 1")
    sin = np.sqrt(1.0 - cos * cos)
    leakage = MOTOR_LEAKAGE_PU / np.maximum(sin, MOTOR_LEAKAGE_PU)
    return np.asarray(1.0 - leakage * (1.0 - b * b))


def part_load_power_factor(load_fraction: ArrayLike, cos_phi: ArrayLike, efficiency: ArrayLike) -> FloatArray:
    """Return the power factor of an induction motor at part load from that at rated load.

    The reactive part follows `part_load_reactive_fraction`, the active part the input power at that load.

    Source: see `part_load_reactive_fraction` and `part_load_efficiency`.

    Parameters
    ----------
    load_fraction : float or ndarray
        Output over rated output, 0 or more.
    cos_phi, efficiency : float or ndarray
        Power factor and efficiency at rated output, above 0, not above 1.

    Returns
    -------
    ndarray
        Power factor, 0..1.

    Raises
    ------
    ValueError
        A value outside its range.

    Examples
    --------
    >>> part_load_power_factor([0.5, 0.75, 1.0], 0.85, 0.91).round(2).tolist()
    [0.72, 0.81, 0.85]
    """
    cos = np.asarray(cos_phi, float)
    reactive = part_load_reactive_fraction(load_fraction, cos) * np.sqrt(1.0 - cos * cos) / cos
    active = input_per_rated_output(load_fraction, efficiency) * np.asarray(efficiency, float)
    return np.asarray(active / np.hypot(active, reactive))


def reactive_power_kvar(p_kw: ArrayLike, cos_phi: ArrayLike) -> FloatArray:
    """Return the reactive power that goes with an active power at a lagging power factor.

    Source: definition, ``Q = P tan(phi)``.

    Parameters
    ----------
    p_kw : float or ndarray
        Active power. [kW]
    cos_phi : float or ndarray
        Power factor, above 0, not above 1.

    Returns
    -------
    ndarray
        Reactive power. [kvar]

    Raises
    ------
    ValueError
        A power factor outside 0..1.

    Examples
    --------
    >>> round(float(reactive_power_kvar(80.0, 0.8)), 9)
    60.0
    """
    cos = np.asarray(cos_phi, float)
    if np.any(cos <= 0.0) or np.any(cos > 1.0):
        raise ValueError("the power factor must be above 0 and not above 1")
    return np.asarray(np.asarray(p_kw, float) * np.sqrt(1.0 - cos * cos) / cos)


def diversified_total_kw(continuous_kw: ArrayLike, intermittent_kw: ArrayLike, diversity: float) -> float:
    """Return the demand of a mode: continuous loads in full, intermittent ones divided by their diversity.

    ``PG = sum(Pc) + chi sum(Pi)``, ``chi = 1/diversity``, diversity usually 2 to 3.

    Source: electric load analysis as in ClassNK guidance and Japanese ship-electrical textbooks.

    Parameters
    ----------
    continuous_kw, intermittent_kw : ndarray, shape (n,)
        Input power of each load. [kW]
    diversity : float
        Sum of the intermittent loads over the most they take together, 1 or more.

    Returns
    -------
    float
        Demand. [kW]

    Raises
    ------
    ValueError
        A diversity below 1.

    Examples
    --------
    >>> diversified_total_kw([300.0, 200.0], [60.0, 30.0], 3.0)
    530.0
    """
    if diversity < 1.0:
        raise ValueError(f"diversity {diversity} must be 1 or more")
    return float(
        np.sum(np.asarray(continuous_kw, float)) + np.sum(np.asarray(intermittent_kw, float)) / diversity
    )


def largest_intermittent_total_kw(
    continuous_kw: ArrayLike, intermittent_kw: ArrayLike, together_kw: ArrayLike
) -> float:
    """Return the demand by the other rule: the largest intermittent load and those sure to run with it.

    Source: alternative of the same guidance as `diversified_total_kw`.

    Parameters
    ----------
    continuous_kw, intermittent_kw : ndarray, shape (n,)
        Input power of each load. [kW]
    together_kw : ndarray, shape (n,)
        Intermittent loads that are sure to run with any other, not among `intermittent_kw`. [kW]

    Returns
    -------
    float
        Demand. [kW]

    Examples
    --------
    >>> largest_intermittent_total_kw([300.0, 200.0], [60.0, 30.0], [10.0])
    570.0
    """
    largest = float(np.max(np.asarray(intermittent_kw, float), initial=0.0))
    return float(np.sum(np.asarray(continuous_kw, float)) + np.sum(np.asarray(together_kw, float))) + largest
