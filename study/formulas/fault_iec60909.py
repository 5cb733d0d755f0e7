"""IEC 60909-0: factors and currents of the equivalent voltage source method.

The text of the standard was not at hand: formulas are from memory and are held against the published
results of IEC TR 60909-4. Equipment is in `fault_iec60909_equipment`, decay in `fault_iec60909_decay`.
"""

from __future__ import annotations

from types import MappingProxyType
from typing import Final, Literal

import numpy as np
from numpy.typing import ArrayLike

from study.formulas.fault_current import SQRT2, SQRT3, FloatArray, as_float

Case = Literal["max", "min"]
LvTolerance = Literal[6, 10]

LV_LIMIT_V: Final = 1000.0

# Table 1: (case, tolerance of a low-voltage system in percent); 0.90 is 0.95 in the edition of 2001.
_LV_FACTOR: Final = MappingProxyType(
    {("max", 6): 1.05, ("max", 10): 1.10, ("min", 6): 0.95, ("min", 10): 0.90}
)
_HV_FACTOR: Final = MappingProxyType({"max": 1.10, "min": 1.00})

# Ratio of the equivalent frequency of method C to the system's: 20 Hz at 50 Hz, 24 Hz at 60 Hz.
EQUIVALENT_FREQUENCY_RATIO: Final = 0.4


def voltage_factor(nominal_v: float, case: Case, lv_tolerance_percent: LvTolerance) -> float:
    """Return the voltage factor c.

    Source: IEC 60909-0:2016, table 1, from memory.

    Parameters
    ----------
    nominal_v : float
        Nominal line voltage [V].
    case : {"max", "min"}
        Which current is sought.
    lv_tolerance_percent : {6, 10}
        Upper voltage tolerance of a low-voltage system [%]; not used above 1 kV.

    Returns
    -------
    float
        c.

    Examples
    --------
    >>> voltage_factor(440.0, "max", 6), voltage_factor(6600.0, "min", 6)
    (1.05, 1.0)
    """
    if nominal_v <= LV_LIMIT_V:
        return _LV_FACTOR[case, lv_tolerance_percent]
    return _HV_FACTOR[case]


def kappa_factor(r_over_x: ArrayLike) -> FloatArray:
    """Return kappa = 1.02 + 0.98 e^(-3R/X).

    Source: IEC 60909-0:2016, peak short-circuit current, from memory.

    Parameters
    ----------
    r_over_x : array_like
        R/X at the fault.

    Returns
    -------
    FloatArray
        kappa.

    Examples
    --------
    >>> round(float(kappa_factor(0.15)), 4)
    1.6449
    """
    return as_float(1.02 + 0.98 * np.exp(-3.0 * as_float(r_over_x)))


def kappa_method_b(
    r_over_x: ArrayLike, largest_branch_r_over_x: ArrayLike, low_voltage: ArrayLike
) -> FloatArray:
    """Return kappa of a meshed network by method B: 1.15 kappa, at most 1.8 in low voltage, else 2.0.

    The factor 1.15 is not needed where R/X stays below 0.3 in all branches.

    Source: IEC 60909-0:2016, peak current in meshed networks, from memory.

    Parameters
    ----------
    r_over_x : array_like
        R/X of the impedance at the fault.
    largest_branch_r_over_x : array_like
        Largest R/X among the branches that carry the fault current.
    low_voltage : array_like of bool
        Nominal voltage up to 1 kV.

    Returns
    -------
    FloatArray
        kappa.

    Examples
    --------
    >>> float(kappa_method_b(0.05, 0.4, True)), round(float(kappa_method_b(0.15, 0.2, True)), 4)
    (1.8, 1.6449)
    """
    bare = kappa_factor(r_over_x)
    cap = np.where(np.asarray(low_voltage, dtype=bool), 1.8, 2.0)
    return as_float(np.where(as_float(largest_branch_r_over_x) < 0.3, bare, np.minimum(1.15 * bare, cap)))


def equivalent_frequency_r_over_x(impedance_ohm: ArrayLike) -> FloatArray:
    """Return R/X at system frequency by method C, from the impedance at the equivalent frequency.

    R/X = (Rc/Xc) (fc/f) with fc/f = 0.4 (20 Hz at 50 Hz, 24 Hz at 60 Hz).

    Source: IEC 60909-0:2016, peak current in meshed networks, from memory.

    Parameters
    ----------
    impedance_ohm : array_like of complex
        Impedance at the fault, all reactances reduced to 0.4 of their value [ohm].

    Returns
    -------
    FloatArray
        R/X.

    Examples
    --------
    >>> round(float(equivalent_frequency_r_over_x(0.15 + 0.4j)), 6)
    0.15
    """
    impedance = np.asarray(impedance_ohm, dtype=complex)
    return as_float(impedance.real / impedance.imag * EQUIVALENT_FREQUENCY_RATIO)


def peak_a(initial_a: ArrayLike, kappa: ArrayLike) -> FloatArray:
    """Return ip = kappa sqrt2 I''k; peaks of unmeshed branches at the fault are added.

    Source: IEC 60909-0:2016, peak short-circuit current, from memory.

    Parameters
    ----------
    initial_a : array_like
        I''k [A].
    kappa : array_like
        kappa.

    Returns
    -------
    FloatArray
        [A]
    """
    return as_float(as_float(kappa) * SQRT2 * as_float(initial_a))


def three_phase_a(nominal_v: ArrayLike, c: ArrayLike, z1_ohm: ArrayLike) -> FloatArray:
    """Return I''k = c Un / (sqrt3 abs(Z1)).

    Source: IEC 60909-0:2016, equation 31 of the 2016 edition, from memory.

    Parameters
    ----------
    nominal_v, c : array_like
        Nominal line voltage [V] and voltage factor.
    z1_ohm : array_like of complex
        Positive-sequence impedance at the fault [ohm].

    Returns
    -------
    FloatArray
        [A]
    """
    return as_float(as_float(c) * as_float(nominal_v) / (SQRT3 * np.abs(np.asarray(z1_ohm))))


def two_phase_a(nominal_v: ArrayLike, c: ArrayLike, z1_ohm: ArrayLike, z2_ohm: ArrayLike) -> FloatArray:
    """Return the initial two-phase current c Un / abs(Z1 + Z2); with Z2 = Z1 0.866 of the three-phase one.

    Source: IEC 60909-0:2016, line-to-line short circuit, from memory.

    Parameters
    ----------
    nominal_v, c : array_like
        Nominal line voltage [V] and voltage factor.
    z1_ohm, z2_ohm : array_like of complex
        Positive- and negative-sequence impedance at the fault [ohm].

    Returns
    -------
    FloatArray
        [A]
    """
    return as_float(as_float(c) * as_float(nominal_v) / np.abs(np.asarray(z1_ohm) + np.asarray(z2_ohm)))


def line_earth_a(
    nominal_v: ArrayLike, c: ArrayLike, z1_ohm: ArrayLike, z2_ohm: ArrayLike, z0_ohm: ArrayLike
) -> FloatArray:
    """Return the initial line-to-earth current sqrt3 c Un / abs(Z1 + Z2 + Z0).

    Source: IEC 60909-0:2016, line-to-earth short circuit, from memory.

    Parameters
    ----------
    nominal_v, c : array_like
        Nominal line voltage [V] and voltage factor.
    z1_ohm, z2_ohm, z0_ohm : array_like of complex
        Sequence impedances at the fault, three times the neutral impedance inside Z0 [ohm].

    Returns
    -------
    FloatArray
        [A]
    """
    loop = np.abs(np.asarray(z1_ohm) + np.asarray(z2_ohm) + np.asarray(z0_ohm))
    return as_float(SQRT3 * as_float(c) * as_float(nominal_v) / loop)
