"""Speed governor and fuel rack of an engine that drives a generator.

The controller compares the speed with ``f0 - R P``, its set-point less droop on the kW measured at the
terminals, and moves the rack by proportional, integral and derivative action; the rack follows with a lag
after the dead time of the engine. The torque follows the rack. The engine gives at once no more than one load
step above what it gave before: the limit follows with the run-up of the turbocharger.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

ENGINE_DRAG = 0.10  # torque of an engine without fuel, of its rated one; common practice, no source
OPTIMUM_RATIO = 2.5  # between 2 (quick) and 3 (well damped); Kessler's symmetrical optimum, from memory
DERIVATIVE_FILTER = 0.2  # of the derivative time; common practice, no source
POWER_FILTER_S = 0.2  # of the kW measurement; common practice, no source
TURBOCHARGER_S = 2.0  # time constant of the charge air; common practice, no source
POWER_TRIM_S = 5.0  # of a power management that holds a set at its set kW; common practice, no source


@dataclass(frozen=True, slots=True, kw_only=True)
class GovernorGains:
    """Gains of the speed controller, per unit of rated torque over rated speed.

    Attributes
    ----------
    proportional : float
        [pu]
    integral_per_s : float
        [pu/s]
    derivative_s : float
        [pu s]
    filter_s : float
        Time constant on the derivative. [s]
    """

    proportional: float
    integral_per_s: float
    derivative_s: float
    filter_s: float


def tuned_gains(inertia_s: float, rack_lag_s: float, dead_time_s: float) -> GovernorGains:
    """Return the gains with which a set runs quick and well damped, whatever its droop.

    The derivative time takes the lag of the rack away, which leaves ``ts`` = dead time + derivative filter;
    for the integrating shaft the symmetrical optimum with ratio a gives ``Kp = 2H/(a ts)``,
    ``Ti = a^2 ts``. The product form is turned into a sum.

    Source: C. Kessler, symmetrical optimum, Regelungstechnik 1958, from memory; no workbook gives the gains
    of a governor, and a maker sets them at trials.

    Parameters
    ----------
    inertia_s : float
        H of the set over rated kW: stored energy over rated torque power. [s]
    rack_lag_s : float
        Governor time constant. [s]
    dead_time_s : float
        Until the next cylinder fires. [s]

    Returns
    -------
    GovernorGains
        Of the parallel form.

    Examples
    --------
    >>> g = tuned_gains(1.25, 0.2, 0.03)
    >>> round(g.proportional, 2), round(g.integral_per_s, 2), round(g.derivative_s, 2)
    (20.82, 32.65, 2.86)
    """
    filter_s = DERIVATIVE_FILTER * rack_lag_s
    small = dead_time_s + filter_s
    gain = 2.0 * inertia_s / (OPTIMUM_RATIO * small)
    reset_s = OPTIMUM_RATIO**2 * small
    lead_s = rack_lag_s
    return GovernorGains(
        proportional=gain * (1.0 + lead_s / reset_s),
        integral_per_s=gain / reset_s,
        derivative_s=gain * lead_s,
        filter_s=filter_s,
    )


def governor_open_loop(
    inertia_s: float, rack_lag_s: float, dead_time_s: float, gains: GovernorGains
) -> tuple[FloatArray, FloatArray]:
    """Return numerator and denominator of controller, rack, dead time (first-order Padé) and shaft.

    Source: block diagram of this module; Padé approximation of first order.

    Parameters
    ----------
    inertia_s : float
        H over rated kW. [s]
    rack_lag_s, dead_time_s : float
        Of the engine. [s]
    gains : GovernorGains
        Of the controller.

    Returns
    -------
    tuple of ndarray
        Coefficients, highest power of s first.

    Examples
    --------
    >>> n, d = governor_open_loop(1.25, 0.2, 0.03, tuned_gains(1.25, 0.2, 0.03))
    >>> len(n), len(d)
    (4, 6)
    """
    g = gains
    pid = np.polyadd(
        np.polymul([g.proportional, g.integral_per_s], [g.filter_s, 1.0]), [g.derivative_s, 0.0, 0.0]
    )
    half = 0.5 * dead_time_s
    numerator = np.polymul(pid, [-half, 1.0])
    denominator = np.polymul([g.filter_s, 1.0, 0.0], [half, 1.0])
    shaft = np.polymul([rack_lag_s, 1.0], [2.0 * inertia_s, 0.0])
    return np.asarray(numerator, float), np.asarray(np.polymul(denominator, shaft), float)


def acceptance_limit(
    engine_pu: ArrayLike, largest_step: ArrayLike, overload: float, turbo_pu: ArrayLike
) -> FloatArray:
    """Return the most torque that an engine gives at once: ``min(overload, turbo + step)``.

    The charge-air pressure ``turbo`` follows the torque with a time constant of some seconds.

    Source: load acceptance of turbocharged engines, IACS UR M3 and ISO 8528-5 (steps by mean effective
    pressure), from memory; the first-order follow-up is common practice, no source.

    Parameters
    ----------
    engine_pu : float or ndarray
        Torque at rated power of the engine. [pu of rated kW]
    largest_step : float or ndarray
        Largest load step. [pu of the engine's rated power]
    overload : float
        Largest rack. [pu of the engine's rated power]
    turbo_pu : float or ndarray
        What the charge air is ready for. [pu of rated kW]

    Returns
    -------
    ndarray
        Torque. [pu of rated kW]

    Examples
    --------
    >>> float(acceptance_limit(1.0, 0.5, 1.1, 0.2))
    0.7
    """
    engine = np.asarray(engine_pu, float)
    step = np.asarray(turbo_pu, float) + np.asarray(largest_step, float) * engine
    return np.asarray(np.minimum(overload * engine, step))
