"""Current rating of ship cable and what a conductor withstands in a short circuit."""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.cables import Conductor, Cores
from study.formulas.table_files import numeric_table

Duty = Literal["continuous", "60 min", "30 min", "intermittent"]

FloatArray = NDArray[np.float64]

REFERENCE_AMBIENT_DEGC = 45.0

# IEC 60092-352, annex B, I = A S^0.625 at 45 degC, by highest conductor temperature; from memory.
COEFFICIENT_A = {
    60.0: 9.5,
    65.0: 11.0,
    70.0: 12.0,
    75.0: 13.5,
    80.0: 15.0,
    85.0: 16.0,
    90.0: 17.0,
    95.0: 18.0,
}
# The formula ends at 300 mm2. Above: a.c. values at 90 degC of the tables in IEC 60092-352; from memory.
LARGE_SECTION_A_AT_90 = {400.0: 670.0, 500.0: 720.0, 630.0: 780.0}
CORE_FACTOR: dict[Cores, float] = {"3 single": 1.0, "2": 0.85, "3": 0.70, "4": 0.70}
BUNCH_OF_MORE_THAN_SIX = 0.85

# IEC 60949: K of the conductor, A s^0.5/mm2, and the temperature of zero resistance, turned in sign.
ADIABATIC_K = {"copper": (226.0, 234.5), "aluminium": (148.0, 228.0)}


def base_current(section_mm2: float, conductor_degc: float) -> float:
    """Return the continuous current of single-core copper cable at 45 degC ambient.

    The value of the printed table where it has one, else ``A S^0.625``; above 300 mm2 the tabulated current
    at 90 degC in proportion to A.

    Source: IEC 60092-352, annex B, method B (from memory); ABS Rules 4-8-3, table 6.

    Parameters
    ----------
    section_mm2 : float
        Nominal section, to 630 mm2. [mm2]
    conductor_degc : float
        Highest conductor temperature, one of 60, 65, 70, 75, 80, 85, 90, 95. [degC]

    Returns
    -------
    float
        Current. [A]

    Raises
    ------
    ValueError
        A temperature class or section that the standard does not rate.

    Examples
    --------
    >>> base_current(95.0, 85.0), round(base_current(16.0, 90.0), 1)
    (276.0, 96.2)
    """
    coefficient = COEFFICIENT_A.get(float(conductor_degc))
    if coefficient is None:
        raise ValueError(f"no current rating for a conductor temperature of {conductor_degc:g} degC: give it")
    printed = numeric_table("current_rating_45degc", "section_mm2").get(float(section_mm2), {})
    if f"{conductor_degc:g}" in printed:
        return printed[f"{conductor_degc:g}"]
    if section_mm2 <= 300.0:
        return float(coefficient * section_mm2**0.625)
    if float(section_mm2) not in LARGE_SECTION_A_AT_90:
        raise ValueError(f"no current rating for {section_mm2:g} mm2: give it")
    return LARGE_SECTION_A_AT_90[float(section_mm2)] * coefficient / COEFFICIENT_A[90.0]


def aluminium_factor() -> float:
    """Return the current of an aluminium conductor over that of copper of equal section.

    Equal heat at equal temperature: the square root of the ratio of resistivities at 20 degC,
    17.241/28.264 ohm mm2/km.

    Source: IEC 60028 and IEC 60889 resistivities (from memory); equal-loss reasoning.

    Returns
    -------
    float
        Factor.

    Examples
    --------
    >>> round(aluminium_factor(), 2)
    0.78
    """
    return float(np.sqrt(17.241 / 28.264))


def ambient_factor(ambient_degc: ArrayLike, conductor_degc: ArrayLike) -> FloatArray:
    """Return the correction of the rating for ambient temperature: ``sqrt((Tc - Ta)/(Tc - 45))``.

    Source: IEC 60092-352, correction factors for ambient temperature (heating law behind the table).

    Parameters
    ----------
    ambient_degc : float or ndarray
        Temperature around the cable. [degC]
    conductor_degc : float or ndarray
        Highest conductor temperature, above 45. [degC]

    Returns
    -------
    ndarray
        Factor.

    Raises
    ------
    ValueError
        The ambient is not below, or the conductor temperature not above 45 degC.

    Examples
    --------
    >>> round(float(ambient_factor(60.0, 90.0)), 2)
    0.82
    """
    ta, tc = np.asarray(ambient_degc, float), np.asarray(conductor_degc, float)
    if np.any(ta >= tc) or np.any(tc <= REFERENCE_AMBIENT_DEGC):
        raise ValueError(
            "the ambient must be below the highest conductor temperature, and that above 45 degC"
        )
    return np.asarray(np.sqrt((tc - ta) / (tc - REFERENCE_AMBIENT_DEGC)))


def bunching_factor(cables: int) -> float:
    """Return the correction for cables bunched together: 0.85 for more than six that may be loaded at once.

    Source: IEC 60092-352, clause on bunched cables; from memory.

    Parameters
    ----------
    cables : int
        Cables in the bunch.

    Returns
    -------
    float
        Factor.

    Raises
    ------
    ValueError
        Fewer than 1.

    Examples
    --------
    >>> bunching_factor(6), bunching_factor(7)
    (1.0, 0.85)
    """
    if cables < 1:
        raise ValueError("a bunch has at least one cable")
    return BUNCH_OF_MORE_THAN_SIX if cables > 6 else 1.0


def thermal_time_constant_min(overall_diameter_mm: ArrayLike) -> FloatArray:
    """Return the thermal time constant of a cable: ``0.245 d^1.35`` minutes.

    Source: IEC 60092-352, short-time duty; from memory.

    Parameters
    ----------
    overall_diameter_mm : float or ndarray
        Overall diameter. [mm]

    Returns
    -------
    ndarray
        Time constant. [min]

    Examples
    --------
    >>> round(float(thermal_time_constant_min(30.0)), 1)
    24.2
    """
    return np.asarray(0.245 * np.asarray(overall_diameter_mm, float) ** 1.35)


def duty_factor(duty: Duty, overall_diameter_mm: float) -> float:
    """Return the correction for short-time or intermittent duty.

    Short time: ``sqrt(1.12/(1 - exp(-ts/T)))``; intermittent, 4 minutes on in every 10:
    ``sqrt((1 - exp(-10/T))/(1 - exp(-4/T)))``.

    Source: IEC 60092-352, correction factors for half-hour, one-hour and intermittent service; from memory.

    Parameters
    ----------
    duty : str
        ``continuous``, ``60 min``, ``30 min`` or ``intermittent``.
    overall_diameter_mm : float
        Overall diameter; not used for continuous duty. [mm]

    Returns
    -------
    float
        Factor.

    Raises
    ------
    ValueError
        An unknown duty.

    Examples
    --------
    >>> [round(duty_factor(d, 30.0), 2) for d in ("continuous", "30 min", "60 min", "intermittent")]
    [1.0, 1.26, 1.11, 1.49]
    """
    if duty == "continuous":
        return 1.0
    tau = float(thermal_time_constant_min(overall_diameter_mm))
    match duty:
        case "30 min" | "60 min":
            return float(np.sqrt(1.12 / -np.expm1(-float(duty[:2]) / tau)))
        case "intermittent":
            return float(np.sqrt(np.expm1(-10.0 / tau) / np.expm1(-4.0 / tau)))
    raise ValueError(f"unknown duty {duty!r}")


def adiabatic_k(start_degc: ArrayLike, end_degc: ArrayLike, conductor: Conductor) -> FloatArray:
    """Return k of the adiabatic short circuit: ``K sqrt(ln((te + b)/(ts + b)))``.

    Source: IEC 60949:1988, clause 3, adiabatic equation; K = 226 and b = 234.5 for copper, 148 and 228 for
    aluminium; from memory.

    Parameters
    ----------
    start_degc, end_degc : float or ndarray
        Temperature of the conductor before and after. [degC]
    conductor : str
        ``copper`` or ``aluminium``.

    Returns
    -------
    ndarray
        k. [A s^0.5/mm2]

    Raises
    ------
    ValueError
        The end is below the start.

    Examples
    --------
    >>> round(float(adiabatic_k(90.0, 250.0, "copper")), 1)
    143.1
    """
    start, end = np.asarray(start_degc, float), np.asarray(end_degc, float)
    if np.any(end < start):
        raise ValueError("the end temperature of a short circuit is below the conductor temperature")
    big_k, b = ADIABATIC_K[conductor]
    return np.asarray(big_k * np.sqrt(np.log((end + b) / (start + b))))


def withstand_a2s(section_mm2: ArrayLike, k: ArrayLike) -> FloatArray:
    """Return the I2t that a conductor withstands: ``k^2 S^2``.

    Source: IEC 60949:1988, clause 3.

    Parameters
    ----------
    section_mm2 : float or ndarray
        Section, of all conductors in parallel. [mm2]
    k : float or ndarray
        From `adiabatic_k`. [A s^0.5/mm2]

    Returns
    -------
    ndarray
        Withstand. [A2s]

    Examples
    --------
    >>> float(withstand_a2s(10.0, 143.0))
    2044900.0
    """
    return np.asarray((np.asarray(section_mm2, float) * np.asarray(k, float)) ** 2)


def least_section_mm2(i2t_a2s: ArrayLike, k: ArrayLike) -> FloatArray:
    """Return the least section that withstands an I2t: ``sqrt(I2t)/k``.

    Source: IEC 60949:1988, clause 3.

    Parameters
    ----------
    i2t_a2s : float or ndarray
        Let-through of the protection. [A2s]
    k : float or ndarray
        From `adiabatic_k`. [A s^0.5/mm2]

    Returns
    -------
    ndarray
        Section. [mm2]

    Examples
    --------
    >>> float(least_section_mm2(2044900.0, 143.0))
    10.0
    """
    return np.asarray(np.sqrt(np.asarray(i2t_a2s, float)) / np.asarray(k, float))
