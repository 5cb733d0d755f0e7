"""Magnetic saturation of a synchronous machine: S(E), the field that the iron asks for.

One per unit of field gives one per unit of voltage on the air-gap line, so that the open-circuit field is
``E (1 + S(E))``.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]


def quadratic_coefficients(s10: float, s12: float) -> tuple[float, float]:
    """Return knee A and gain B of ``S(E) = B (E - A)^2 / E`` through S(1.0) and S(1.2).

    ``k = sqrt(1.2 S12/S10)``, ``A = (1.2 - k)/(1 - k)``, ``B = S10/(1 - A)^2``.

    Source: algebra; the curve is the scaled quadratic in common use (IEC 61970-302, excitation and machine
    saturation; from memory).

    Parameters
    ----------
    s10, s12 : float
        Saturation factors at 1.0 and 1.2 pu voltage. [pu]

    Returns
    -------
    tuple of float
        Knee A [pu voltage] and gain B [pu].

    Raises
    ------
    ValueError
        A factor below 0, S(1.2) not above S(1.0), or a ratio below 1.2: the curve then has no knee above 0.

    Examples
    --------
    >>> [round(x, 5) for x in quadratic_coefficients(0.11, 0.39)]
    [0.81179, 3.1054]
    """
    if s10 < 0.0 or s12 <= s10:
        raise ValueError(f"S(1.0) = {s10} must be 0 or more and S(1.2) = {s12} above it")
    if s10 == 0.0:
        return 1.0, 1.2 * s12 / 0.2**2
    k = float(np.sqrt(1.2 * s12 / s10))
    knee = (1.2 - k) / (1.0 - k)
    if knee < 0.0:
        raise ValueError(f"S(1.2)/S(1.0) = {s12 / s10:.3f} is below 1.2: use the exponential curve")
    return knee, s10 / (1.0 - knee) ** 2


def exponential_exponent(s10: float, s12: float) -> float:
    """Return the exponent n of ``S(E) = S10 E^n`` through S(1.0) and S(1.2): ``ln(S12/S10)/ln 1.2``.

    Source: algebra; curve as in IEC 61970-302 (from memory).

    Parameters
    ----------
    s10, s12 : float
        Saturation factors at 1.0 and 1.2 pu voltage. [pu]

    Returns
    -------
    float
        Exponent.

    Raises
    ------
    ValueError
        S(1.0) not above 0 or S(1.2) not above S(1.0).

    Examples
    --------
    >>> round(exponential_exponent(0.11, 0.39), 4)
    6.9419
    """
    if s10 <= 0.0 or s12 <= s10:
        raise ValueError(f"S(1.0) = {s10} must be above 0 and S(1.2) = {s12} above it")
    return float(np.log(s12 / s10) / np.log(1.2))


@dataclass(frozen=True, slots=True, kw_only=True)
class SaturationCurve:
    """A fitted curve; `a` and `b` are knee and gain (quadratic) or S(1.0) and exponent (exponential).

    Attributes
    ----------
    kind : str
        ``none``, ``quadratic`` or ``exponential``.
    a, b : float
        Coefficients of the kind; 0 for ``none``.
    """

    kind: Literal["none", "quadratic", "exponential"]
    a: float
    b: float


UNSATURATED = SaturationCurve(kind="none", a=0.0, b=0.0)


def saturation_curve(s10: float, s12: float) -> SaturationCurve:
    """Return the quadratic curve through S(1.0) and S(1.2), or the exponential one where that has no knee.

    Both zero gives the straight air-gap line.

    Source: see `quadratic_coefficients` and `exponential_exponent`.

    Parameters
    ----------
    s10, s12 : float
        Saturation factors at 1.0 and 1.2 pu voltage. [pu]

    Returns
    -------
    SaturationCurve
        The fitted curve.

    Raises
    ------
    ValueError
        S(1.2) not above S(1.0).

    Examples
    --------
    >>> saturation_curve(0.11, 0.39).kind
    'quadratic'
    """
    if s10 == 0.0 and s12 == 0.0:
        return UNSATURATED
    if s10 > 0.0 and s10 < s12 < 1.2 * s10:
        return SaturationCurve(kind="exponential", a=s10, b=exponential_exponent(s10, s12))
    knee, gain = quadratic_coefficients(s10, s12)
    return SaturationCurve(kind="quadratic", a=knee, b=gain)


def saturation_field(e_pu: ArrayLike, curve: SaturationCurve) -> FloatArray:
    """Return the field spent on saturation, ``E S(E)``; zero below the knee of a quadratic curve.

    Source: definition of S; quadratic ``B (E - A)^2``, exponential ``S10 E^(n+1)``.

    Parameters
    ----------
    e_pu : float or ndarray
        Voltage behind the reactance that saturates. [pu]
    curve : SaturationCurve
        Fitted curve.

    Returns
    -------
    ndarray
        Field above the air-gap line. [pu]

    Examples
    --------
    >>> round(float(saturation_field(1.2, saturation_curve(0.11, 0.39))), 6)
    0.468
    """
    e = np.asarray(e_pu, float)
    match curve.kind:
        case "quadratic":
            return np.asarray(curve.b * np.maximum(e - curve.a, 0.0) ** 2)
        case "exponential":
            return np.asarray(curve.a * np.maximum(e, 0.0) ** (curve.b + 1.0))
    return np.zeros_like(e)
