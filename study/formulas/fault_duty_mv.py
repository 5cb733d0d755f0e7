"""Duty of medium-voltage breakers: rated making current and d.c. component against those of a fault."""

from __future__ import annotations

import math
from types import MappingProxyType
from typing import Final

import numpy as np
from numpy.typing import ArrayLike

from study.formulas.fault_current import SQRT2, FloatArray, as_float

STANDARD_TIME_CONSTANT_S: Final = 0.045

# Peak factor of the rated making current by rated frequency [Hz], for 45 ms; 2.7 for the special constants.
_PEAK_FACTOR: Final = MappingProxyType({50.0: 2.5, 60.0: 2.6})
_SPECIAL_PEAK_FACTOR: Final = 2.7


def rated_peak_factor(frequency_hz: float, time_constant_s: float) -> float:
    """Return the ratio of rated making to rated breaking current of a medium-voltage breaker.

    Source: IEC 62271-100, rated short-circuit making current, from memory.

    Parameters
    ----------
    frequency_hz : float
        50 or 60 [Hz].
    time_constant_s : float
        Rated d.c. time constant: 0.045, or a special one above it [s].

    Returns
    -------
    float
        2.5 at 50 Hz, 2.6 at 60 Hz; 2.7 for special time constants.

    Raises
    ------
    KeyError
        A frequency that is neither 50 nor 60 Hz.

    Examples
    --------
    >>> rated_peak_factor(60.0, 0.045), rated_peak_factor(50.0, 0.120)
    (2.6, 2.7)
    """
    if time_constant_s > STANDARD_TIME_CONSTANT_S:
        return _SPECIAL_PEAK_FACTOR
    return _PEAK_FACTOR[frequency_hz]


def rated_dc_component(
    opening_time_s: ArrayLike, time_constant_s: ArrayLike, frequency_hz: float
) -> FloatArray:
    """Return the rated d.c. component at contact parting, e^(-(Top + Tr)/tau), Tr half a cycle.

    Source: IEC 62271-100, rated short-circuit breaking current, from memory.

    Parameters
    ----------
    opening_time_s : array_like
        Least opening time Top [s].
    time_constant_s : array_like
        tau, 0.045 as standard [s].
    frequency_hz : float
        [Hz]

    Returns
    -------
    FloatArray
        Part of the peak of the a.c. component, 0..1.

    Examples
    --------
    >>> round(float(rated_dc_component(0.040, 0.045, 50.0)), 3)
    0.329
    """
    half_cycle = 0.5 / frequency_hz
    return as_float(np.exp(-(as_float(opening_time_s) + half_cycle) / as_float(time_constant_s)))


def dc_component_of_fault(direct_a: ArrayLike, symmetrical_a: ArrayLike) -> FloatArray:
    """Return the d.c. component of a fault at an instant, idc(t) / (sqrt2 Iac(t)); above 1 there is no zero.

    Source: IEC 62271-100, definition of the percentage of the d.c. component, from memory. A current without
    zero crossing is the generator-breaker case of IEC/IEEE 62271-37-013.

    Parameters
    ----------
    direct_a, symmetrical_a : array_like
        idc(t) and Iac(t), r.m.s., when the contacts part [A].

    Returns
    -------
    FloatArray
        Part of the peak of the a.c. component.

    Examples
    --------
    >>> round(float(dc_component_of_fault(1414.2, 1000.0)), 3)
    1.0
    """
    return as_float(as_float(direct_a) / (SQRT2 * as_float(symmetrical_a)))


def asymmetrical_breaking_current_a(symmetrical_a: ArrayLike, dc_component: ArrayLike) -> FloatArray:
    """Return the asymmetrical breaking current, Isc sqrt(1 + 2 dc²).

    Source: IEC 62271-100, annex on asymmetrical breaking current, from memory.

    Parameters
    ----------
    symmetrical_a : array_like
        Isc, r.m.s. [A].
    dc_component : array_like
        Part of the peak of the a.c. component.

    Returns
    -------
    FloatArray
        r.m.s. [A]

    Examples
    --------
    >>> round(float(asymmetrical_breaking_current_a(1000.0, 0.2)))
    1039
    """
    return as_float(as_float(symmetrical_a) * np.sqrt(1.0 + 2.0 * as_float(dc_component) ** 2))


def peak_of_time_constant(time_constant_s: float, frequency_hz: float) -> float:
    """Return the peak factor that a time constant gives after half a cycle, sqrt2 (1 + e^(-T/2/tau)).

    Source: definition; the factors of `rated_peak_factor` are this, rounded.

    Parameters
    ----------
    time_constant_s : float
        tau [s].
    frequency_hz : float
        [Hz]

    Returns
    -------
    float
        Peak over r.m.s.

    Examples
    --------
    >>> round(peak_of_time_constant(0.045, 50.0), 2), round(peak_of_time_constant(0.045, 60.0), 2)
    (2.55, 2.59)
    """
    return SQRT2 * (1.0 + math.exp(-0.5 / frequency_hz / time_constant_s))
