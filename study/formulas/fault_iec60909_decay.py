"""IEC 60909-0: what is left of the initial current: breaking current, thermal equivalent, steady state.

The text of the standard was not at hand: formulas are from memory. Breaking and steady-state currents of
meshed networks are confirmed by IEC TR 60909-4; m follows from kappa by integration; the constants of n
could not be confirmed. The factor lambda of the steady-state current is left out: nor could its curves.
"""

from __future__ import annotations

from types import MappingProxyType
from typing import Final

import numpy as np
from numpy.typing import ArrayLike

from study.formulas.fault_current import FloatArray, as_float

_DELAYS_S: Final = (0.02, 0.05, 0.10, 0.25)
# a, b, c of mu = a + b e^(-c r) and a, b of q = a + b ln m, by minimum time delay [s].
_MU: Final = MappingProxyType(
    {0.02: (0.84, 0.26, 0.26), 0.05: (0.71, 0.51, 0.30), 0.10: (0.62, 0.72, 0.32), 0.25: (0.56, 0.94, 0.38)}
)
_Q: Final = MappingProxyType({0.02: (1.03, 0.12), 0.05: (0.79, 0.12), 0.10: (0.57, 0.12), 0.25: (0.26, 0.10)})


def _between_delays(at_delay: list[FloatArray], delay_s: float) -> FloatArray:
    """Return the value at a time delay, linear between those of the standard, constant above 0.25 s."""
    if delay_s < _DELAYS_S[0]:
        raise ValueError(f"a time delay of {delay_s} s is below the standard's least, {_DELAYS_S[0]} s")
    upper = min(int(np.searchsorted(_DELAYS_S, min(delay_s, _DELAYS_S[-1]))), len(_DELAYS_S) - 1)
    lower = max(upper - 1, 0)
    span = _DELAYS_S[upper] - _DELAYS_S[lower]
    weight = (min(delay_s, _DELAYS_S[-1]) - _DELAYS_S[lower]) / span if span else 0.0
    return as_float((1.0 - weight) * at_delay[lower] + weight * at_delay[upper])


def mu_factor(initial_over_rated: ArrayLike, delay_s: float) -> FloatArray:
    """Return mu, the decay of a machine's contribution until the contacts part; 1 up to a ratio of 2.

    Source: IEC 60909-0:2016, breaking current, from memory; applied in IEC TR 60909-4.

    Parameters
    ----------
    initial_over_rated : array_like
        I''kG/IrG (I''kM/IrM), both at the machine's terminals.
    delay_s : float
        Minimum time delay, 0.02 s or more [s].

    Returns
    -------
    FloatArray
        mu, at most 1.

    Raises
    ------
    ValueError
        A delay below 0.02 s.

    Examples
    --------
    >>> round(float(mu_factor(5.0, 0.1)), 4), float(mu_factor(1.9, 0.1))
    (0.7654, 1.0)
    """
    ratio = as_float(initial_over_rated)
    curves = [as_float(a + b * np.exp(-c * ratio)) for a, b, c in _MU.values()]
    return as_float(np.where(ratio <= 2.0, 1.0, np.minimum(_between_delays(curves, delay_s), 1.0)))


def q_factor(power_mw_per_pole_pair: ArrayLike, delay_s: float) -> FloatArray:
    """Return q, the further decay of an asynchronous motor's contribution.

    Source: IEC 60909-0:2016, breaking current, from memory; applied in IEC TR 60909-4.

    Parameters
    ----------
    power_mw_per_pole_pair : array_like
        m, rated active power over pole pairs [MW].
    delay_s : float
        Minimum time delay, 0.02 s or more [s].

    Returns
    -------
    FloatArray
        q, between 0 and 1.

    Raises
    ------
    ValueError
        A delay below 0.02 s.

    Examples
    --------
    >>> round(float(q_factor(2.5, 0.1)), 4)
    0.68
    """
    logarithm = np.log(as_float(power_mw_per_pole_pair))
    curves = [as_float(a + b * logarithm) for a, b in _Q.values()]
    return as_float(np.clip(_between_delays(curves, delay_s), 0.0, 1.0))


def breaking_current_a(initial_a: ArrayLike, decay: ArrayLike) -> FloatArray:
    """Return Ib of one source without meshes, mu I''kG or mu q I''kM; several sources are added.

    Source: IEC 60909-0:2016, breaking current, from memory.

    Parameters
    ----------
    initial_a : array_like
        I''k of the source [A].
    decay : array_like
        mu of a generator, mu q of a motor, 1 of a network feeder.

    Returns
    -------
    FloatArray
        [A]
    """
    return as_float(as_float(initial_a) * as_float(decay))


def motor_decay(
    initial_over_rated: ArrayLike, power_mw_per_pole_pair: ArrayLike, delay_s: float
) -> FloatArray:
    """Return mu q of asynchronous motors; 1 up to a ratio of 2, where the fault is far from the motor.

    Source: IEC 60909-0:2016, breaking current, from memory; the results of IEC TR 60909-4 leave out q, too,
    of motors up to a ratio of 2.

    Parameters
    ----------
    initial_over_rated : array_like
        I''kM/IrM at the motor's terminals.
    power_mw_per_pole_pair : array_like
        m, rated active power over pole pairs [MW].
    delay_s : float
        Minimum time delay, 0.02 s or more [s].

    Returns
    -------
    FloatArray
        mu q.

    Raises
    ------
    ValueError
        A delay below 0.02 s.

    Examples
    --------
    >>> motor_decay([1.5, 5.2], 1.0, 0.1).round(4)
    array([1.    , 0.4311])
    """
    ratio = as_float(initial_over_rated)
    product = mu_factor(ratio, delay_s) * q_factor(power_mw_per_pole_pair, delay_s)
    return as_float(np.where(ratio <= 2.0, 1.0, product))


def breaking_current_meshed_a(
    initial_a: ArrayLike, voltage_drop: ArrayLike, contribution_a: ArrayLike, decay: ArrayLike
) -> FloatArray:
    """Return Ib in a meshed network, I''k - sum of dU''/(c Un/sqrt3) (1 - mu q) I''k of the machines.

    Source: IEC 60909-0:2016, breaking current in meshed networks, from memory; applied in IEC TR 60909-4.

    Parameters
    ----------
    initial_a : array_like of complex
        I''k at the fault places [A].
    voltage_drop : array_like of complex
        Initial drop at each machine's terminals over the driving voltage, machines x places:
        jX'' I'' over c Un/sqrt3, X'' corrected as in the network.
    contribution_a : array_like of complex
        What each machine contributes, machines x places, on the voltage of the fault place [A].
    decay : array_like
        mu of a generator, mu q of a motor, machines x places.

    Returns
    -------
    FloatArray
        Shape places [A].
    """
    lost = np.asarray(voltage_drop) * (1.0 - as_float(decay)) * np.asarray(contribution_a)
    return as_float(np.abs(np.asarray(initial_a) - lost.sum(axis=0)))


def m_factor(kappa: ArrayLike, frequency_hz: float, duration_s: ArrayLike) -> FloatArray:
    """Return m, the heat of the direct component over that of the initial current.

    m = [e^(4 f Tk ln(kappa - 1)) - 1] / [2 f Tk ln(kappa - 1)].

    Source: IEC 60909-0:2016, annex A, from memory; confirmed by integration.

    Parameters
    ----------
    kappa : array_like
        From 1.02 to 2.
    frequency_hz : float
        [Hz]
    duration_s : array_like
        Tk [s].

    Returns
    -------
    FloatArray
        m.

    Examples
    --------
    >>> round(float(m_factor(1.8, 50.0, 1.0)), 4), float(m_factor(2.0, 50.0, 1.0))
    (0.0448, 2.0)
    """
    exponent = 2.0 * frequency_hz * as_float(duration_s) * np.log(as_float(kappa) - 1.0)
    safe = np.where(exponent == 0.0, -1.0, exponent)
    return as_float(np.where(exponent == 0.0, 2.0, np.expm1(2.0 * safe) / safe))


def n_factor(initial_over_steady: ArrayLike, duration_s: ArrayLike) -> FloatArray:
    """Return n, the heat of the symmetrical current over that of the initial current.

    It is the mean of the squared decay with T'd = 3.1 s Ik/I'k and T''d = T'd/10, where
    I'k/Ik = (I''k/Ik) / (0.88 + 0.17 I''k/Ik); 1 up to a ratio of 1.

    Source: IEC 60909-0:2016, annex A, from memory; the constants 0.88, 0.17 and 3.1 s are not confirmed.

    Parameters
    ----------
    initial_over_steady : array_like
        I''k/Ik; 1 for a fault far from generators.
    duration_s : array_like
        Tk [s].

    Returns
    -------
    FloatArray
        n.

    Examples
    --------
    >>> float(n_factor(1.0, 1.0))
    1.0
    """
    ratio, duration = np.broadcast_arrays(as_float(initial_over_steady), as_float(duration_s))
    transient = ratio / (0.88 + 0.17 * ratio)
    x = 3.1 / transient / duration
    fast, slow = ratio - transient, transient - 1.0
    mean_square = (
        1.0
        + x / 20.0 * -np.expm1(-20.0 / x) * fast**2
        + x / 2.0 * -np.expm1(-2.0 / x) * slow**2
        + x / 5.0 * -np.expm1(-10.0 / x) * fast
        + 2.0 * x * -np.expm1(-1.0 / x) * slow
        + x / 5.5 * -np.expm1(-11.0 / x) * fast * slow
    )
    return as_float(np.where(ratio <= 1.0, 1.0, np.minimum(mean_square / ratio**2, 1.0)))


def thermal_equivalent_a(initial_a: ArrayLike, m: ArrayLike, n: ArrayLike) -> FloatArray:
    """Return Ith = I''k sqrt(m + n).

    Source: IEC 60909-0:2016, Joule integral and thermal equivalent current, from memory.

    Parameters
    ----------
    initial_a : array_like
        I''k [A].
    m, n : array_like
        Factors of the direct and the symmetrical component.

    Returns
    -------
    FloatArray
        [A]
    """
    return as_float(as_float(initial_a) * np.sqrt(as_float(m) + as_float(n)))
