"""Duty of low-voltage breakers and assemblies: what they are tested for, and what a fault asks of them.

A ship's board lies close to its generators, so the power factor of the fault is often below every test power
factor: then the symmetrical current alone does not show whether a breaker is enough.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cache
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from study.formulas.fault_current import FloatArray, as_float
from study.formulas.table_files import table_rows

BREAKER_TABLE = "breaker_test_iec60947"
ASSEMBLY_TABLE = "assembly_peak_iec61439"


@dataclass(frozen=True, slots=True, kw_only=True)
class RequiredCapacity:
    """The breaking capacity that a breaker must have for its standard test to cover a fault.

    Attributes
    ----------
    breaking_ka : float
        Least Icu (or Ics) [kA].
    ratio : float
        Ratio n of making to breaking capacity in the range where it lies.
    governed_by : {"breaking", "making"}
        Whether the symmetrical current or the peak asks for it.
    """

    breaking_ka: float
    ratio: float
    governed_by: Literal["breaking", "making"]


@cache
def _column(table: str, name: str) -> FloatArray:
    """Return one column of a table of ranges."""
    return as_float([float(row[name]) for row in table_rows(table)])


def _range_value(table: str, name: str, current_ka: ArrayLike) -> FloatArray:
    """Return the value of the range (above, up to and including] in which each current lies."""
    current = as_float(current_ka)
    if not (current > 0.0).all():
        raise ValueError("a short-circuit current must be above 0 kA")
    return as_float(_column(table, name)[np.searchsorted(_column(table, "up_to_ka"), current, side="left")])


def breaker_test_power_factor(breaking_ka: ArrayLike) -> FloatArray:
    """Return the power factor at which a low-voltage breaker of this capacity is tested.

    Source: IEC 60947-2, test power factors, from memory (tables/breaker_test_iec60947.csv).

    Parameters
    ----------
    breaking_ka : array_like
        Rated breaking capacity [kA].

    Returns
    -------
    FloatArray
        cos phi.

    Raises
    ------
    ValueError
        A current of 0 kA or less.

    Examples
    --------
    >>> breaker_test_power_factor([10.0, 50.0, 65.0])
    array([0.5 , 0.25, 0.2 ])
    """
    return _range_value(BREAKER_TABLE, "cos_phi", breaking_ka)


def making_ratio(breaking_ka: ArrayLike) -> FloatArray:
    """Return n, the least ratio of making to breaking capacity of a low-voltage breaker.

    Source: IEC 60947-2, table 2, from memory (tables/breaker_test_iec60947.csv).

    Parameters
    ----------
    breaking_ka : array_like
        Rated breaking capacity [kA].

    Returns
    -------
    FloatArray
        n; Icm = n Icu where the maker declares no other.

    Raises
    ------
    ValueError
        A current of 0 kA or less.

    Examples
    --------
    >>> making_ratio([20.0, 20.1, 50.0, 65.0])
    array([2. , 2.1, 2.1, 2.2])
    """
    return _range_value(BREAKER_TABLE, "ratio", breaking_ka)


def assembly_peak_ratio(short_time_ka: ArrayLike) -> FloatArray:
    """Return the ratio of rated peak to short-time withstand current of a low-voltage assembly.

    Source: IEC 61439-1, table 7, from memory (tables/assembly_peak_iec61439.csv).

    Parameters
    ----------
    short_time_ka : array_like
        Rated short-time withstand current Icw [kA].

    Returns
    -------
    FloatArray
        n; Ipk = n Icw.

    Raises
    ------
    ValueError
        A current of 0 kA or less.

    Examples
    --------
    >>> assembly_peak_ratio([5.0, 50.0, 80.0])
    array([1.5, 2.1, 2.2])
    """
    return _range_value(ASSEMBLY_TABLE, "ratio", short_time_ka)


def fault_power_factor(t_dc_s: ArrayLike, frequency_hz: float) -> FloatArray:
    """Return the power factor of a fault from its direct time constant, R/X = 1/(w Tdc).

    Source: definition of both.

    Parameters
    ----------
    t_dc_s : array_like
        Tdc [s].
    frequency_hz : float
        [Hz]

    Returns
    -------
    FloatArray
        cos phi.

    Examples
    --------
    >>> round(float(fault_power_factor(0.0398, 60.0)), 3)
    0.067
    """
    return as_float(1.0 / np.hypot(1.0, 2.0 * math.pi * frequency_hz * as_float(t_dc_s)))


def required_breaking_capacity(symmetrical_ka: float, peak_ka: float) -> RequiredCapacity:
    """Return the least breaking capacity whose test covers both the symmetrical current and the peak.

    Icu >= Iac and n(Icu) Icu >= ip, n being that of the range in which Icu itself lies. Where the peak falls
    between two ranges the answer lies just above the limit: a breaker rated at the limit belongs below it.

    Source: follows from table 2 of IEC 60947-2 (from memory); the practice of raising the rating where the
    fault's power factor is below the test's is that of IEEE C37.13, see `multiplying_factor`.

    Parameters
    ----------
    symmetrical_ka : float
        Iac when the contacts part, in practice at T/2, r.m.s. [kA].
    peak_ka : float
        ip [kA].

    Returns
    -------
    RequiredCapacity
        Capacity, ratio and what governs.

    Raises
    ------
    ValueError
        A current of 0 kA or less.

    Examples
    --------
    >>> required = required_breaking_capacity(18.1, 48.4)
    >>> round(required.breaking_ka, 1), required.governed_by
    (23.0, 'making')
    """
    if not (symmetrical_ka > 0.0 and peak_ka > 0.0):
        raise ValueError("a short-circuit current must be above 0 kA")
    above, up_to = _column(BREAKER_TABLE, "above_ka"), _column(BREAKER_TABLE, "up_to_ka")
    ratio = _column(BREAKER_TABLE, "ratio")
    least = np.maximum(np.maximum(symmetrical_ka, peak_ka / ratio), np.nextafter(above, np.inf))
    index = int(np.argmax(least <= up_to))
    needed = float(least[index])
    return RequiredCapacity(
        breaking_ka=needed,
        ratio=float(ratio[index]),
        governed_by="making" if needed > symmetrical_ka else "breaking",
    )


def multiplying_factor(x_over_r: ArrayLike, test_x_over_r: ArrayLike) -> FloatArray:
    """Return the factor on the symmetrical current where X/R exceeds that of the test, at least 1.

    MF = (1 + e^(-pi R/X)) / (1 + e^(-pi (R/X) of the test)).

    Source: IEEE Std C37.13, low-voltage power circuit-breakers, from memory; test X/R 6.6 at 15 %, 4.9 at
    20 %, 3.2 at 30 % and 1.7 at 50 % power factor.

    Parameters
    ----------
    x_over_r : array_like
        X/R of the fault.
    test_x_over_r : array_like
        X/R of the breaker's test.

    Returns
    -------
    FloatArray
        MF.

    Examples
    --------
    >>> round(float(multiplying_factor(15.0, 6.6)), 3), float(multiplying_factor(3.0, 6.6))
    (1.117, 1.0)
    """
    fault = 1.0 + np.exp(-math.pi / as_float(x_over_r))
    tested = 1.0 + np.exp(-math.pi / as_float(test_x_over_r))
    return as_float(np.maximum(fault / tested, 1.0))


def equivalent_short_time_current_a(joule_integral_a2s: ArrayLike, duration_s: ArrayLike) -> FloatArray:
    """Return the constant current with the same heat as a decaying one, to hold against Icw.

    Source: definition of the short-time withstand current, I²t constant; IEC 60947-1.

    Parameters
    ----------
    joule_integral_a2s : array_like
        Of the decaying current over the duration, see `fault_current.joule_integral_a2s` [A²s].
    duration_s : array_like
        Duration for which Icw is rated [s].

    Returns
    -------
    FloatArray
        [A]

    Examples
    --------
    >>> float(equivalent_short_time_current_a(400e6, 1.0))
    20000.0
    """
    return as_float(np.sqrt(as_float(joule_integral_a2s) / as_float(duration_s)))
