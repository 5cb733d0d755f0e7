"""What a generating set can carry: its rating, its load, the sets that meet a demand, the steps it takes."""

from __future__ import annotations

from itertools import combinations
from math import ceil

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]


def rated_set_kw(
    s_rated_kva: ArrayLike, cos_phi: ArrayLike, p_engine_kw: ArrayLike, efficiency: ArrayLike
) -> FloatArray:
    """Return the rated active power of a set: the lesser of its alternator's and its engine's.

    Source: definition, ``min(S cos(phi), Pe eta)``.

    Parameters
    ----------
    s_rated_kva : float or ndarray
        Rated apparent power. [kVA]
    cos_phi : float or ndarray
        Rated power factor.
    p_engine_kw : float or ndarray
        Engine power at the shaft. [kW]
    efficiency : float or ndarray
        Alternator efficiency, 0..1.

    Returns
    -------
    ndarray
        Rated power at the terminals. [kW]

    Examples
    --------
    >>> float(rated_set_kw(1000.0, 0.8, 830.0, 0.95))
    788.5
    """
    alternator = np.asarray(s_rated_kva, float) * np.asarray(cos_phi, float)
    return np.asarray(np.minimum(alternator, np.asarray(p_engine_kw, float) * np.asarray(efficiency, float)))


def engine_load(p_kw: ArrayLike, p_engine_kw: ArrayLike, efficiency: ArrayLike) -> FloatArray:
    """Return the load of an engine as a fraction of its rating: ``P/(eta Pe)``.

    Source: definition.

    Parameters
    ----------
    p_kw : float or ndarray
        Power at the terminals of the set. [kW]
    p_engine_kw : float or ndarray
        Engine power at the shaft. [kW]
    efficiency : float or ndarray
        Alternator efficiency, 0..1.

    Returns
    -------
    ndarray
        Fraction.

    Examples
    --------
    >>> round(float(engine_load(760.0, 1000.0, 0.95)), 9)
    0.8
    """
    return np.asarray(
        np.asarray(p_kw, float) / (np.asarray(p_engine_kw, float) * np.asarray(efficiency, float))
    )


def alternator_load(p_kw: ArrayLike, q_kvar: ArrayLike, s_rated_kva: ArrayLike) -> FloatArray:
    """Return the load of an alternator as a fraction of its rated kVA.

    Source: definition.

    Parameters
    ----------
    p_kw : float or ndarray
        Active power. [kW]
    q_kvar : float or ndarray
        Reactive power. [kvar]
    s_rated_kva : float or ndarray
        Rated apparent power. [kVA]

    Returns
    -------
    ndarray
        Fraction.

    Examples
    --------
    >>> float(alternator_load(400.0, 300.0, 1000.0))
    0.5
    """
    return np.asarray(
        np.hypot(np.asarray(p_kw, float), np.asarray(q_kvar, float)) / np.asarray(s_rated_kva, float)
    )


def fewest_sets(
    load_kw: float, rated_kw: tuple[float, ...], largest_fraction: float
) -> tuple[int, ...] | None:
    """Return the fewest sets that meet a load at no more than a fraction of their summed rating.

    Every combination is tried. Of several with equally many sets the one with the least rating is taken: it
    is loaded best.

    Source: common practice, no source.

    Parameters
    ----------
    load_kw : float
        Load. [kW]
    rated_kw : tuple of float
        Rated power of the sets that may run. [kW]
    largest_fraction : float
        Load over summed rating that is not to be exceeded, for example 0.85.

    Returns
    -------
    tuple of int or None
        Indices into `rated_kw`; None where all sets together are not enough.

    Raises
    ------
    ValueError
        A fraction that is not above 0.

    Examples
    --------
    >>> fewest_sets(900.0, (800.0, 800.0, 400.0), 0.85)
    (0, 2)
    """
    if largest_fraction <= 0.0:
        raise ValueError(f"largest fraction {largest_fraction} must be above 0")
    for count in range(1, len(rated_kw) + 1):
        able = [
            (sum(rated_kw[i] for i in chosen), chosen)
            for chosen in combinations(range(len(rated_kw)), count)
            if load_kw <= largest_fraction * sum(rated_kw[i] for i in chosen)
        ]
        if able:
            return min(able)[1]
    return None


def mean_effective_pressure_bar(
    p_engine_kw: float, swept_volume_l: float, speed_rpm: float, strokes: int
) -> float:
    """Return the brake mean effective pressure of an engine: ``300 strokes P/(V n)``.

    Source: definition; work over swept volume, one working stroke in `strokes` strokes.

    Parameters
    ----------
    p_engine_kw : float
        Power. [kW]
    swept_volume_l : float
        Swept volume of all cylinders. [litre]
    speed_rpm : float
        Speed. [rpm]
    strokes : int
        2 or 4.

    Returns
    -------
    float
        Pressure. [bar]

    Raises
    ------
    ValueError
        Strokes other than 2 or 4.

    Examples
    --------
    >>> round(mean_effective_pressure_bar(1000.0, 50.0, 1200.0, 4), 9)
    20.0
    """
    if strokes not in {2, 4}:
        raise ValueError(f"an engine has 2 or 4 strokes, not {strokes}")
    return 300.0 * strokes * p_engine_kw / (swept_volume_l * speed_rpm)


def load_step_capability(mean_effective_pressure: float) -> float:
    """Return the part of its rating that a four-stroke engine can take in one step.

    ``min(1, 8 bar/pme)``: about 100 % at 8 bar, 50 % at 16 bar, 33 % at 24 bar.

    Source: first load step against mean effective pressure, IACS UR M3 and ISO 8528-5, from memory.

    Parameters
    ----------
    mean_effective_pressure : float
        At rated power. [bar]

    Returns
    -------
    float
        Fraction of rated power, 0..1.

    Raises
    ------
    ValueError
        A pressure that is not above 0.

    Examples
    --------
    >>> load_step_capability(16.0)
    0.5
    """
    if mean_effective_pressure <= 0.0:
        raise ValueError("the mean effective pressure must be above 0 bar")
    return min(1.0, 8.0 / mean_effective_pressure)


def load_steps(load_fraction: float, largest_step: float) -> int:
    """Return in how many equal steps a load has to be switched on to stay within the largest step.

    Source: IACS UR M3: load in steps where the engine cannot take it at once; from memory.

    Parameters
    ----------
    load_fraction : float
        Load to be switched on over the rating of the running sets, 0 or more.
    largest_step : float
        Largest step as a fraction of rating, above 0.

    Returns
    -------
    int
        Number of steps.

    Raises
    ------
    ValueError
        A value outside its range.

    Examples
    --------
    >>> load_steps(0.8, 0.33)
    3
    """
    if load_fraction < 0.0 or largest_step <= 0.0:
        raise ValueError("the load must be 0 or more and the largest step above 0")
    return ceil(load_fraction / largest_step - 1e-9)
