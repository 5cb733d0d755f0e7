"""Inverse-time curves of overcurrent relays and of thermal overload relays."""

from __future__ import annotations

from types import MappingProxyType
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

# k, c and alpha of t = TMS (k / (M^alpha - 1) + c); IEC 60255-151:2009, table A.1, from memory. The long-time
# inverse curve is that of BS 142, from memory.
INVERSE_CURVES: Final = MappingProxyType(
    {
        "standard inverse": (0.14, 0.0, 0.02),
        "very inverse": (13.5, 0.0, 1.0),
        "extremely inverse": (80.0, 0.0, 2.0),
        "long-time inverse": (120.0, 0.0, 1.0),
        "IEEE moderately inverse": (0.0515, 0.1140, 0.02),
        "IEEE very inverse": (19.61, 0.491, 2.0),
        "IEEE extremely inverse": (28.2, 0.1217, 2.0),
    }
)
FLAT_ABOVE: Final = 20.0
# Reset time at no current and a time dial of 1 [s]; IEEE C37.112-1996, table 1, from memory. Those of the IEC
# curves are the maker's.
RESET_S: Final = MappingProxyType(
    {"IEEE moderately inverse": 4.85, "IEEE very inverse": 21.6, "IEEE extremely inverse": 29.1}
)

# Time from cold at 7.2 times the setting, the longest of each class; IEC 60947-4-1, table 2, from memory.
OVERLOAD_CLASS_S: Final = MappingProxyType({"5": 5.0, "10A": 10.0, "10": 10.0, "20": 20.0, "30": 30.0})
OVERLOAD_CLASS_AT: Final = 7.2
ULTIMATE_TRIP: Final = 1.2


def inverse_time_s(multiple: ArrayLike, k: ArrayLike, c: ArrayLike, alpha: ArrayLike) -> FloatArray:
    """Return the operating time at a time multiplier of 1: ``k / (M^alpha - 1) + c``.

    Flat above 20 times the setting; infinite at and below it.

    Source: IEC 60255-151:2009, clause 5.2, equation for dependent-time operation; from memory.

    Parameters
    ----------
    multiple : array_like
        M, current over setting.
    k, c, alpha : array_like
        Constants of the curve, see `INVERSE_CURVES`. [s], [s], [1]

    Returns
    -------
    FloatArray
        [s]

    Examples
    --------
    >>> [round(float(inverse_time_s(m, *INVERSE_CURVES["standard inverse"])), 3) for m in (2.0, 10.0)]
    [10.029, 2.971]
    """
    m = np.minimum(np.asarray(multiple, float), FLAT_ABOVE)
    above = m > 1.0
    safe = np.where(above, m, 2.0)
    # expm1 keeps M^alpha - 1 above 0 for every M above 1.
    rise = np.expm1(np.asarray(alpha) * np.log(safe))
    return np.where(above, np.asarray(k) / rise + np.asarray(c), np.inf)


def reset_time_s(multiple: ArrayLike, reset_s: ArrayLike) -> FloatArray:
    """Return the time in which a relay at the point of tripping resets: ``tr / (1 - M²)``, dial of 1.

    Source: IEEE C37.112-1996, equation 2; from memory.

    Parameters
    ----------
    multiple : array_like
        M, current over setting.
    reset_s : array_like
        tr, see `RESET_S`. [s]

    Returns
    -------
    FloatArray
        inf from the setting up. [s]

    Examples
    --------
    >>> reset_time_s([0.0, 0.5, 1.0], RESET_S["IEEE very inverse"]).round(3).tolist()
    [21.6, 28.8, inf]
    """
    part = 1.0 - np.asarray(multiple, float) ** 2
    below = part > 0.0
    return np.where(below, np.asarray(reset_s) / np.where(below, part, 1.0), np.inf)


def overload_time_s(multiple: ArrayLike, class_time_s: ArrayLike) -> FloatArray:
    """Return the longest tripping time of a thermal overload relay from cold, through its class's point.

    One thermal body, ``t = tau ln(M^2 / (M^2 - k^2))``, k = 1.2, with tau such that the time at 7.2 times the
    setting is the longest of the class.

    Source: heating law of one body; point and ultimate trip of IEC 60947-4-1, table 2, from memory.

    Parameters
    ----------
    multiple : array_like
        Current over setting.
    class_time_s : array_like
        Longest time at 7.2 times the setting. [s]

    Returns
    -------
    FloatArray
        [s]

    Examples
    --------
    >>> round(float(overload_time_s(7.2, 10.0)), 6), float(overload_time_s(1.1, 10.0))
    (10.0, inf)
    """
    square, limit = np.asarray(multiple, float) ** 2, ULTIMATE_TRIP**2
    tau = np.asarray(class_time_s) / -np.log1p(-limit / OVERLOAD_CLASS_AT**2)
    safe = np.where(square > limit, square, 2.0 * limit)
    return np.where(square > limit, -tau * np.log1p(-limit / safe), np.inf)
