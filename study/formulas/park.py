"""Two-axis machine circuits: from test-type data to the resistances and reactances of the windings.

The circuits serve the full-order fault simulation that the short formulas are held against. Impedances keep
the unit they are given in (per unit or ohm); reactances are those at rated frequency.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.polynomial import Polynomial


@dataclass(frozen=True, slots=True, kw_only=True)
class DirectAxis:
    """Direct-axis circuit: mutual reactance, field and one damper, in the unit of the input.

    Attributes
    ----------
    xad : float
        Mutual reactance Xd - Xl.
    x_field, r_field : float
        Leakage reactance and resistance of the field winding.
    x_damper, r_damper : float
        The same of the damper winding.
    """

    xad: float
    x_field: float
    r_field: float
    x_damper: float
    r_damper: float


@dataclass(frozen=True, slots=True, kw_only=True)
class QuadratureAxis:
    """Quadrature-axis circuit: mutual reactance and one damper, in the unit of the input.

    Attributes
    ----------
    xaq : float
        Mutual reactance Xq - Xl.
    x_damper, r_damper : float
        Leakage reactance and resistance of the damper winding.
    """

    xaq: float
    x_damper: float
    r_damper: float


def _direct_numerator(
    xd: float, x_trans: float, x_sub: float, t_trans_s: float, t_sub_s: float
) -> Polynomial:
    """Return N(s) of 1/Xd(s) = N(s) / [(1 + sT')(1 + sT'')]."""
    slow, fast, s = Polynomial([1.0, t_trans_s]), Polynomial([1.0, t_sub_s]), Polynomial([0.0, 1.0])
    return (
        slow * fast / xd
        + s * fast * (t_trans_s * (1.0 / x_trans - 1.0 / xd))
        + s * slow * (t_sub_s * (1.0 / x_sub - 1.0 / x_trans))
    )


def direct_axis_circuit(
    *,
    xd: float,
    x_trans: float,
    x_sub: float,
    x_leak: float,
    t_trans_s: float,
    t_sub_s: float,
    frequency_hz: float,
) -> DirectAxis:
    """Return the direct-axis circuit that has exactly the given short-circuit time constants.

    1/Xd(s) = 1/Xd + (1/X'd - 1/Xd) sT'd/(1+sT'd) + (1/X''d - 1/X'd) sT''d/(1+sT''d) gives the rotor
    admittance 1/(Xd(s) - Xl) - 1/Xad; its two partial fractions A s/(1+sT) are the windings: R = 1/(A w0),
    X = T/A, the longer time constant being the field.

    Source: definition of the operational reactance by the sudden short circuit, IEC 60034-4, from memory;
    partial fractions.

    Parameters
    ----------
    xd, x_trans, x_sub, x_leak : float
        Xd > X'd > X''d > Xl, all in one unit.
    t_trans_s, t_sub_s : float
        T'd and T''d, short-circuited [s].
    frequency_hz : float
        Rated frequency [Hz].

    Returns
    -------
    DirectAxis
        In the unit of the reactances.

    Raises
    ------
    ValueError
        Reactances or time constants out of order.

    Examples
    --------
    >>> axis = direct_axis_circuit(xd=2.2, x_trans=0.25, x_sub=0.15, x_leak=0.09, t_trans_s=0.25,
    ...                            t_sub_s=0.015, frequency_hz=60.0)
    >>> round(axis.x_field, 5), round(axis.r_field, 6)
    (0.18615, 0.002925)
    """
    if not (xd > x_trans > x_sub > x_leak > 0.0 and t_trans_s > t_sub_s > 0.0):
        raise ValueError("the direct axis needs Xd > X'd > X''d > Xl > 0 and T'd > T''d > 0")
    omega0, xad = 2.0 * math.pi * frequency_hz, xd - x_leak
    poles = Polynomial([1.0, t_trans_s]) * Polynomial([1.0, t_sub_s])
    numerator = _direct_numerator(xd, x_trans, x_sub, t_trans_s, t_sub_s)
    rotor_den = poles - x_leak * numerator
    # Its constant term is nothing: at s = 0 no current flows in the rotor.
    rotor_num = Polynomial((xd * numerator - poles).coef[1:])
    windings = []
    for pole in np.sort(np.real(rotor_den.roots()))[::-1]:
        time_constant = -1.0 / pole
        gain = time_constant * rotor_num(pole) / (xad * rotor_den.deriv()(pole))
        windings.append((float(time_constant / gain), float(1.0 / (gain * omega0))))
    (x_field, r_field), (x_damper, r_damper) = windings
    return DirectAxis(xad=xad, x_field=x_field, r_field=r_field, x_damper=x_damper, r_damper=r_damper)


def classical_direct_axis(
    *,
    xd: float,
    x_trans: float,
    x_sub: float,
    x_leak: float,
    t_trans_s: float,
    t_sub_s: float,
    frequency_hz: float,
) -> DirectAxis:
    """Return the direct-axis circuit by the usual approximation, which takes each winding in turn.

    Xfd = Xad (X'd-Xl)/(Xd-X'd), X1d = (X'd-Xl)(X''d-Xl)/(X'd-X''d), T'd0 = T'd Xd/X'd, T''d0 = T''d X'd/X''d.

    Source: Kundur, Power System Stability and Control, section 4.2, from memory.

    Parameters
    ----------
    xd, x_trans, x_sub, x_leak : float
        Xd > X'd > X''d > Xl, all in one unit.
    t_trans_s, t_sub_s : float
        T'd and T''d, short-circuited [s].
    frequency_hz : float
        Rated frequency [Hz].

    Returns
    -------
    DirectAxis
        In the unit of the reactances.

    Examples
    --------
    >>> axis = classical_direct_axis(xd=2.2, x_trans=0.25, x_sub=0.15, x_leak=0.09, t_trans_s=0.25,
    ...                              t_sub_s=0.015, frequency_hz=60.0)
    >>> round(axis.x_damper, 3)
    0.096
    """
    omega0, xad = 2.0 * math.pi * frequency_hz, xd - x_leak
    x_field = xad * (x_trans - x_leak) / (xd - x_trans)
    x_damper = (x_trans - x_leak) * (x_sub - x_leak) / (x_trans - x_sub)
    behind_damper = x_damper + 1.0 / (1.0 / xad + 1.0 / x_field)
    return DirectAxis(
        xad=xad,
        x_field=x_field,
        r_field=(x_field + xad) / (omega0 * t_trans_s * xd / x_trans),
        x_damper=x_damper,
        r_damper=behind_damper / (omega0 * t_sub_s * x_trans / x_sub),
    )


def open_circuit_time_constants_s(
    *, xd: float, x_trans: float, x_sub: float, t_trans_s: float, t_sub_s: float
) -> tuple[float, float]:
    """Return T'd0 and T''d0, the zeros of 1/Xd(s).

    Source: definition of the operational reactance, IEC 60034-4, from memory.

    Parameters
    ----------
    xd, x_trans, x_sub : float
        Xd > X'd > X''d in one unit.
    t_trans_s, t_sub_s : float
        T'd and T''d, short-circuited [s].

    Returns
    -------
    tuple of float
        T'd0, T''d0 [s].

    Examples
    --------
    >>> slow, fast = open_circuit_time_constants_s(xd=2.2, x_trans=0.25, x_sub=0.15, t_trans_s=0.25,
    ...                                            t_sub_s=0.015)
    >>> round(slow, 3), round(fast, 4)
    (2.279, 0.0241)
    """
    roots = np.real(_direct_numerator(xd, x_trans, x_sub, t_trans_s, t_sub_s).roots())
    return float(-1.0 / roots.max()), float(-1.0 / roots.min())


def quadrature_axis_circuit(
    *, xq: float, x_sub: float, x_leak: float, t_sub_s: float, frequency_hz: float
) -> QuadratureAxis:
    """Return the quadrature-axis circuit of a salient-pole machine with one damper.

    T''q0 = T''q Xq/X''q, X1q = (X''q-Xl)(Xq-Xl)/(Xq-X''q), R1q = (X1q+Xaq)/(w0 T''q0); exact with one damper.

    Source: Kundur, Power System Stability and Control, section 4.2, from memory.

    Parameters
    ----------
    xq, x_sub, x_leak : float
        Xq > X''q > Xl in one unit.
    t_sub_s : float
        T''q, short-circuited [s].
    frequency_hz : float
        Rated frequency [Hz].

    Returns
    -------
    QuadratureAxis
        In the unit of the reactances.

    Raises
    ------
    ValueError
        Reactances out of order, or a time constant of 0 s or less.

    Examples
    --------
    >>> axis = quadrature_axis_circuit(xq=1.1, x_sub=0.18, x_leak=0.09, t_sub_s=0.015, frequency_hz=60.0)
    >>> round(axis.x_damper, 4), round(axis.r_damper, 5)
    (0.0988, 0.03209)
    """
    if not (xq > x_sub > x_leak > 0.0 and t_sub_s > 0.0):
        raise ValueError("the quadrature axis needs Xq > X''q > Xl > 0 and T''q > 0")
    xaq = xq - x_leak
    x_damper = (x_sub - x_leak) * xaq / (xq - x_sub)
    open_circuit_s = t_sub_s * xq / x_sub
    r_damper = (x_damper + xaq) / (2.0 * math.pi * frequency_hz * open_circuit_s)
    return QuadratureAxis(xaq=xaq, x_damper=x_damper, r_damper=r_damper)


def no_load_fault_current(
    *,
    voltage: float,
    xd: float,
    x_trans: float,
    x_sub: float,
    xq_sub: float,
    ra: float,
    t_trans_s: float,
    t_sub_s: float,
    angle_rad: float,
    frequency_hz: float,
    time_s: np.typing.NDArray[np.float64],
) -> np.typing.NDArray[np.float64]:
    """Return the phase current of a fault at the terminals of an unloaded machine, in closed form.

    ia = sqrt2 U {[1/Xd + (1/X'd - 1/Xd) e^(-t/T'd) + (1/X''d - 1/X'd) e^(-t/T''d)] cos(wt + a)
    - (X''d+X''q)/(2X''dX''q) e^(-t/Ta) cos a - (X''q-X''d)/(2X''dX''q) e^(-t/Ta) cos(2wt + a)} with
    Ta = 2X''dX''q/[(X''d+X''q) w Ra]; small resistance is assumed.

    Source: Adkins, as printed in Sheldrake, Handbook of Electrical Engineering, p. 492; the double-frequency
    factor is the one that makes ia(0) = 0.

    Parameters
    ----------
    voltage : float
        Phase voltage, r.m.s. [V or pu].
    xd, x_trans, x_sub, xq_sub, ra : float
        Xd, X'd, X''d, X''q, Ra [ohm or pu].
    t_trans_s, t_sub_s : float
        T'd and T''d [s].
    angle_rad : float
        Angle of the voltage at the start of the fault [rad].
    frequency_hz : float
        [Hz]
    time_s : NDArray of float
        [s]

    Returns
    -------
    NDArray of float
        Instantaneous current, shape of the times [A or pu].

    Examples
    --------
    >>> float(no_load_fault_current(
    ...     voltage=1.0, xd=2.2, x_trans=0.25, x_sub=0.15, xq_sub=0.18, ra=0.01, t_trans_s=0.25,
    ...     t_sub_s=0.015, angle_rad=0.0, frequency_hz=60.0, time_s=np.array([0.0]))[0])
    0.0
    """
    omega = 2.0 * math.pi * frequency_hz
    product = 2.0 * x_sub * xq_sub
    ta_s = product / ((x_sub + xq_sub) * omega * ra)
    envelope = (
        1.0 / xd
        + (1.0 / x_trans - 1.0 / xd) * np.exp(-time_s / t_trans_s)
        + (1.0 / x_sub - 1.0 / x_trans) * np.exp(-time_s / t_sub_s)
    )
    offset = (x_sub + xq_sub) * math.cos(angle_rad)
    double = (xq_sub - x_sub) * np.cos(2.0 * omega * time_s + angle_rad)
    decay = np.exp(-time_s / ta_s) / product
    current = envelope * np.cos(omega * time_s + angle_rad) - decay * (offset + double)
    return np.asarray(math.sqrt(2.0) * voltage * current)
