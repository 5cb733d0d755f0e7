"""What a protective device must stay below or above: damage lines, starting currents, inrush."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

# IEEE C57.109, through-fault protection of liquid-immersed transformers, category I and infrequent faults of
# the larger: multiple of rated current and time [s]; from memory.
THROUGH_FAULT: Final = ((2.0, 1800.0), (3.0, 300.0), (4.75, 60.0), (6.3, 30.0), (11.3, 10.0), (25.0, 2.0))
# Line current on the delta side of a delta-star transformer for a line-neutral fault on the star side, over
# that of a three-phase fault: 1/sqrt3.
DELTA_STAR_SHIFT: Final = 0.577
# A generator carries 150 % of its rated current for 2 min: IACS UR E13, from memory.
SET_OVERLOAD: Final = (1.5, 120.0)
# Longer than this the heat no longer stays in the conductor: IEC 60949, scope of the adiabatic method, from
# memory.
ADIABATIC_UP_TO_S: Final = 5.0


def cable_withstand_s(current_a: ArrayLike, k: ArrayLike, section_mm2: ArrayLike) -> FloatArray:
    """Return how long a cable carries a short-circuit current: ``t = (k S/I)²``.

    Source: IEC 60949:1988, clause 3, adiabatic; not meant for times above 5 s.

    Parameters
    ----------
    current_a : array_like
        [A]
    k : array_like
        From `cable_ratings.adiabatic_k`. [A s^0.5/mm2]
    section_mm2 : array_like
        Of all conductors in parallel. [mm2]

    Returns
    -------
    FloatArray
        [s]

    Examples
    --------
    >>> round(float(cable_withstand_s(10_000.0, 143.0, 70.0)), 3)
    1.002
    """
    return np.asarray((np.asarray(k) * np.asarray(section_mm2) / np.asarray(current_a, float)) ** 2)


def through_fault_s(multiple: ArrayLike, u_k_pu: float) -> FloatArray:
    """Return how long a transformer withstands a through-fault.

    Straight lines between the points in double-logarithmic scale; below twice rated current without limit,
    above the current that its own impedance allows not needed (inf).

    Source: IEEE C57.109-1993, through-fault curve, from memory; interpolation common practice, no source.

    Parameters
    ----------
    multiple : array_like
        Current over rated current.
    u_k_pu : float
        Short-circuit voltage.

    Returns
    -------
    FloatArray
        [s]

    Examples
    --------
    >>> through_fault_s([1.5, 3.0, 11.3, 25.0], 0.04).round(3).tolist()
    [inf, 300.0, 10.0, 2.0]
    """
    m = np.asarray(multiple, float)
    at, seconds = (np.log(np.array(column)) for column in zip(*THROUGH_FAULT, strict=True))
    inside = np.exp(np.interp(np.log(np.maximum(m, 1e-9)), at, seconds))
    beyond = inside * np.minimum(THROUGH_FAULT[-1][0] / np.maximum(m, 1e-9), 1.0) ** 2
    needed = (m >= THROUGH_FAULT[0][0]) & (m * u_k_pu <= 1.0 + 1e-9)
    return np.where(needed, beyond, np.inf)


def inrush_a(time_s: ArrayLike, rated_a: float, multiple: float, decay_s: float) -> FloatArray:
    """Return the inrush current of a transformer as a release that senses the peak sees it.

    ``n In e^(-t/tau)``, n being the first peak over the rated peak.

    Source: common practice, no source: one exponential through the first peak.

    Parameters
    ----------
    time_s : array_like
        [s]
    rated_a : float
        [A]
    multiple : float
        n.
    decay_s : float
        tau. [s]

    Returns
    -------
    FloatArray
        Peak over sqrt2. [A]

    Examples
    --------
    >>> inrush_a([0.0, 0.1], 100.0, 9.0, 0.1).round(1).tolist()
    [900.0, 331.1]
    """
    return np.asarray(multiple * rated_a * np.exp(-np.asarray(time_s, float) / decay_s))


def first_half_cycle_a(starting_a: ArrayLike, starting_cos_phi: ArrayLike) -> FloatArray:
    """Return the starting current of a motor in its first half cycle as a peak-sensing release sees it.

    ``kappa I``, ``kappa = 1.02 + 0.98 e^(-3 R/X)``, R/X being that of the starting power factor.

    Source: IEC 60909-0:2016, equation for kappa; its use for a starting motor is common practice, no source.

    Parameters
    ----------
    starting_a : array_like
        Symmetrical starting current. [A]
    starting_cos_phi : array_like
        Power factor with locked rotor, 0..1.

    Returns
    -------
    FloatArray
        Peak over sqrt2. [A]

    Examples
    --------
    >>> round(float(first_half_cycle_a(100.0, 0.3)), 1)
    140.1
    """
    cos_phi = np.asarray(starting_cos_phi, float)
    r_over_x = cos_phi / np.sqrt(1.0 - np.minimum(cos_phi, 0.999) ** 2)
    return np.asarray(np.asarray(starting_a, float) * (1.02 + 0.98 * np.exp(-3.0 * r_over_x)))


def starting_line(
    steps: Sequence[tuple[float, float]], running_a: float, *, first_s: float, last_s: float
) -> tuple[FloatArray, FloatArray]:
    """Return the line of a starting motor on the time-current sheet: current against time, step by step.

    Parameters
    ----------
    steps : sequence of (float, float)
        Current and the time until which it flows, ascending. [A], [s]
    running_a : float
        Afterwards. [A]
    first_s, last_s : float
        Ends of the sheet. [s]

    Returns
    -------
    tuple of ndarray
        Currents [A] and times [s], corner by corner.

    Examples
    --------
    >>> amps, seconds = starting_line([(600.0, 5.0)], 100.0, first_s=0.01, last_s=1000.0)
    >>> amps.tolist(), seconds.tolist()
    ([600.0, 600.0, 100.0, 100.0], [0.01, 5.0, 5.0, 1000.0])
    """
    ends = [first_s, *(until for _, until in steps), last_s]
    amps = [*(current for current, _ in steps), running_a]
    corners = [(a, t) for n, a in enumerate(amps) for t in (ends[n], ends[n + 1])]
    currents, times = zip(*corners, strict=True)
    return np.array(currents), np.array(times)
