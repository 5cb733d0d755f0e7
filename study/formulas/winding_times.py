"""Time constants of field and damper in the machine model, from those that are measured.

The model of Sauer and Pai couples the two windings, so that the time constants in its equations are not those
of its open-circuit response; name-plate data are the latter.
"""

from __future__ import annotations

import numpy as np


def coupling(x_d_pu: float, x_d1_pu: float, x_d2_pu: float, x_l_pu: float) -> float:
    """Return how much the damper acts on the field equation: ``c = (Xd-X'd)(X'd-X''d)/(X'd-Xl)^2``.

    Source: P. W. Sauer and M. A. Pai, *Power System Dynamics and Stability*, machine with a damper in each
    axis; from memory.

    Parameters
    ----------
    x_d_pu, x_d1_pu, x_d2_pu, x_l_pu : float
        Xd > X'd > X''d > Xl. [pu]

    Returns
    -------
    float
        c.

    Examples
    --------
    >>> round(coupling(2.0, 0.2, 0.12, 0.08), 6)
    10.0
    """
    return (x_d_pu - x_d1_pu) * (x_d1_pu - x_d2_pu) / (x_d1_pu - x_l_pu) ** 2


def winding_time_constants(c: float, t_d01_s: float, t_d02_s: float) -> tuple[float, float]:
    """Return the time constants T1, T2 of field and damper whose open-circuit response has T'd0 and T''d0.

    ``(1 + c + s T1)(1 + s T2) - c = (1 + s T'd0)(1 + s T''d0)``: ``T1 T2 = T'd0 T''d0`` and
    ``T1 + (1 + c) T2 = T'd0 + T''d0``.

    Source: open-circuit poles of the model of Sauer and Pai, derived.

    Parameters
    ----------
    c : float
        From `coupling`.
    t_d01_s, t_d02_s : float
        T'd0 > T''d0. [s]

    Returns
    -------
    tuple of float
        T1, T2. [s]

    Raises
    ------
    ValueError
        Coupled so closely that no windings have these time constants: Xl is too near X''d.

    Examples
    --------
    >>> [round(x, 5) for x in winding_time_constants(10.0, 2.5, 0.03)]
    [2.14547, 0.03496]
    """
    total, product = t_d01_s + t_d02_s, t_d01_s * t_d02_s
    rest = total**2 - 4.0 * (1.0 + c) * product
    if rest < 0.0:
        raise ValueError(f"no windings have T'd0 = {t_d01_s:g} s and T''d0 = {t_d02_s:g} s: Xl is too large")
    damper = (total - float(np.sqrt(rest))) / (2.0 * (1.0 + c))
    return product / damper, damper


def largest_leakage(x_d_pu: float, x_d1_pu: float, x_d2_pu: float, t_d01_s: float, t_d02_s: float) -> float:
    """Return the largest leakage reactance with which windings of the given time constants exist.

    ``1 + c = (T'd0 + T''d0)^2/(4 T'd0 T''d0)`` solved for Xl.

    Source: limit of `winding_time_constants`.

    Parameters
    ----------
    x_d_pu, x_d1_pu, x_d2_pu : float
        Xd > X'd > X''d. [pu]
    t_d01_s, t_d02_s : float
        T'd0 > T''d0. [s]

    Returns
    -------
    float
        Xl [pu]; below 0 where even without leakage there are none.

    Examples
    --------
    >>> round(largest_leakage(2.0, 0.2, 0.12, 2.5, 0.03), 4)
    0.1159
    """
    most = (t_d01_s + t_d02_s) ** 2 / (4.0 * t_d01_s * t_d02_s) - 1.0
    return x_d1_pu - float(np.sqrt((x_d_pu - x_d1_pu) * (x_d1_pu - x_d2_pu) / most))
