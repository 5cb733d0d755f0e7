"""Earth faults in a system with insulated or high-resistance earthed neutral."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike

from study.formulas.fault_current import SQRT3, FloatArray, as_float


def capacitive_earth_fault_current_a(
    line_voltage_v: ArrayLike, capacitance_f: ArrayLike, frequency_hz: float
) -> FloatArray:
    """Return the current of an earth fault in an insulated system, Ic = sqrt3 w C U.

    Source: circuit theory; the same in IEC 60909-3, earth faults in insulated systems, from memory.

    Parameters
    ----------
    line_voltage_v : array_like
        Line voltage [V].
    capacitance_f : array_like
        Capacitance of one phase to earth of all that is connected: cables, filters, machines [F].
    frequency_hz : float
        [Hz]

    Returns
    -------
    FloatArray
        [A]

    Examples
    --------
    >>> round(float(capacitive_earth_fault_current_a(690.0, 10e-6, 60.0)), 2)
    4.51
    """
    omega = 2.0 * math.pi * frequency_hz
    return as_float(SQRT3 * omega * as_float(capacitance_f) * as_float(line_voltage_v))


def largest_neutral_resistance_ohm(capacitance_f: ArrayLike, frequency_hz: float) -> FloatArray:
    """Return the largest neutral resistance that damps the overvoltages of an arcing earth fault, 1/(3 w C).

    The resistor's current is then at least the capacitive one.

    Source: common practice of high-resistance earthing, as in IEEE Std 142, from memory.

    Parameters
    ----------
    capacitance_f : array_like
        Capacitance of one phase to earth [F].
    frequency_hz : float
        [Hz]

    Returns
    -------
    FloatArray
        [ohm]

    Examples
    --------
    >>> round(float(largest_neutral_resistance_ohm(10e-6, 60.0)), 1)
    88.4
    """
    return as_float(1.0 / (3.0 * 2.0 * math.pi * frequency_hz * as_float(capacitance_f)))


def resistive_earth_fault_current_a(line_voltage_v: ArrayLike, resistance_ohm: ArrayLike) -> FloatArray:
    """Return the current of a neutral resistor during an earth fault, U / (sqrt3 R).

    Source: circuit theory.

    Parameters
    ----------
    line_voltage_v : array_like
        Line voltage [V].
    resistance_ohm : array_like
        Neutral resistor [ohm].

    Returns
    -------
    FloatArray
        [A]

    Examples
    --------
    >>> round(float(resistive_earth_fault_current_a(6600.0, 762.1)), 3)
    5.0
    """
    return as_float(as_float(line_voltage_v) / (SQRT3 * as_float(resistance_ohm)))


def earth_fault_current_a(capacitive_a: ArrayLike, resistive_a: ArrayLike) -> FloatArray:
    """Return the current at the fault, sqrt(Ic² + Ir²), of a system earthed through a high resistance.

    Source: circuit theory; the two are in quadrature.

    Parameters
    ----------
    capacitive_a, resistive_a : array_like
        Capacitive and resistor current [A].

    Returns
    -------
    FloatArray
        [A]

    Examples
    --------
    >>> float(earth_fault_current_a(3.0, 4.0))
    5.0
    """
    return as_float(np.hypot(as_float(capacitive_a), as_float(resistive_a)))


def neutral_resistor_power_w(line_voltage_v: ArrayLike, resistance_ohm: ArrayLike) -> FloatArray:
    """Return the heat of the neutral resistor during an earth fault, U² / (3 R).

    Source: circuit theory.

    Parameters
    ----------
    line_voltage_v : array_like
        Line voltage [V].
    resistance_ohm : array_like
        Neutral resistor [ohm].

    Returns
    -------
    FloatArray
        [W]

    Examples
    --------
    >>> round(float(neutral_resistor_power_w(6600.0, 762.1)))
    19053
    """
    return as_float(as_float(line_voltage_v) ** 2 / (3.0 * as_float(resistance_ohm)))
