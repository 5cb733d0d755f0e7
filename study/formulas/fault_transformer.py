"""What a transformer withstands when a fault lies behind it."""

from __future__ import annotations

import math
from typing import Final

import numpy as np
from numpy.typing import ArrayLike

from study.formulas.fault_current import SQRT2, SQRT3, FloatArray, as_float

# Duration where nothing else is agreed: IEC 60076-5:2006, clause 4.1.3, from memory.
WITHSTAND_S: Final = 2.0
_STEPS = 721  # a quarter of a degree: the maximum is flat


def withstand_current_a(s_rated_va: ArrayLike, u_rated_v: ArrayLike, u_k_pu: ArrayLike) -> FloatArray:
    """Return the symmetrical through-fault current that a transformer is built for, In/uk.

    The impedance of the system is left out, which gives the larger current; on a ship it is the sets' and
    the current never reaches it by much.

    Source: IEC 60076-5:2006, clause 3.2.2.3 (equation for category I, Zs neglected), from memory.

    Parameters
    ----------
    s_rated_va : array_like
        Rated power [VA].
    u_rated_v : array_like
        Rated voltage of the winding for which the current is wanted, line to line [V].
    u_k_pu : array_like
        Short-circuit voltage [pu].

    Returns
    -------
    FloatArray
        r.m.s., at that winding [A].

    Examples
    --------
    >>> round(float(withstand_current_a(630e3, 410.0, 0.04)))
    22179
    """
    return as_float(as_float(s_rated_va) / (SQRT3 * as_float(u_rated_v)) / as_float(u_k_pu))


def withstand_peak_factor(x_over_r: ArrayLike) -> FloatArray:
    """Return the first peak over the symmetrical current, k sqrt2, of a transformer's own X/R.

    A fault at zero voltage gives ``sin(wt - phi) + sin(phi) e^(-wt R/X)``; its greatest value is k.

    Source: the circuit's equation; IEC 60076-5:2006, clause 4.2.3, table 4 prints its values, from memory.

    Parameters
    ----------
    x_over_r : array_like
        Of the transformer's short-circuit impedance.

    Returns
    -------
    FloatArray
        Between sqrt2 and 2 sqrt2.

    Examples
    --------
    >>> [round(float(withstand_peak_factor(x)), 2) for x in (1.0, 14.0)]
    [1.51, 2.55]
    """
    ratio = as_float(x_over_r)[..., None]
    phi = np.arctan(ratio)
    angle = np.linspace(0.5 * math.pi, math.pi, _STEPS)
    current = np.sin(angle - phi) + np.sin(phi) * np.exp(-angle / ratio)
    return as_float(SQRT2 * current.max(axis=-1))
