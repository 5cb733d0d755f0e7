"""Quick estimates of a short-circuit current in rules and law, to judge the size of a detailed result."""

from __future__ import annotations

from dataclasses import dataclass
from types import MappingProxyType
from typing import Final

from numpy.typing import ArrayLike

from study.formulas.fault_current import as_float


@dataclass(frozen=True, slots=True, kw_only=True)
class QuickEstimate:
    """A rule of thumb of a rule or law: multiples of the sums of rated current.

    Attributes
    ----------
    generators, motors : float
        Multiple of the sum of rated currents of the sets and of the motors that run at once.
    quantity : str
        What it estimates.
    source : str
        Where it stands.
    """

    generators: float
    motors: float
    quantity: str
    source: str


_CFR = "46 CFR 111.52-3, plants below 1500 kW"

QUICK_ESTIMATES: Final = MappingProxyType(
    {
        "46 CFR maximum asymmetrical": QuickEstimate(
            generators=10.0, motors=4.0, quantity="maximum asymmetrical current, a.c.", source=_CFR
        ),
        "46 CFR average asymmetrical": QuickEstimate(
            generators=8.5,
            motors=3.5,
            quantity="average asymmetrical current, a.c.",
            source=_CFR + ", from memory",
        ),
        "46 CFR direct current": QuickEstimate(
            generators=10.0, motors=6.0, quantity="maximum current, d.c. system", source=_CFR
        ),
        "ClassNK": QuickEstimate(
            generators=10.0,
            motors=3.0,
            quantity="symmetrical current, r.m.s.",
            source="ClassNK Rules H2.3.3, as quoted in the Nippon Foundation training texts",
        ),
    }
)


def quick_estimate_a(
    estimate: QuickEstimate, generator_rated_a: ArrayLike, motor_rated_a: ArrayLike
) -> float:
    """Return a rule-of-thumb current, to see whether a detailed result is of the right size.

    Source: as named in the estimate.

    Parameters
    ----------
    estimate : QuickEstimate
        One of `QUICK_ESTIMATES`.
    generator_rated_a, motor_rated_a : array_like
        Rated currents of the sets and motors that run at once [A].

    Returns
    -------
    float
        [A]

    Examples
    --------
    >>> quick_estimate_a(QUICK_ESTIMATES["ClassNK"], [480.0, 480.0, 480.0], [790.0])
    16770.0
    """
    generators, motors = as_float(generator_rated_a).sum(), as_float(motor_rated_a).sum()
    return float(estimate.generators * generators + estimate.motors * motors)
