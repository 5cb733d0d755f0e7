"""What consumers draw while they start: by their starting method."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final

import numpy as np

from study.analyses.grading_options import GradingOptions
from study.formulas.induction import rated_current
from study.model.loads import Load

# Open transition from star to delta: for a moment up to the current of a direct start; common practice, no
# source.
TRANSITION_S: Final = 0.1


@dataclass(frozen=True, slots=True, kw_only=True)
class Surge:
    """A current at a load's place that a station must hold for a time.

    ``current_a`` r.m.s., ``peak_a`` its first peak over sqrt2, ``normal_a`` what the load draws otherwise.
    """

    event: str
    load: int
    current_a: float
    peak_a: float
    normal_a: float
    lasts_s: float
    assumed: str


def load_current_a(load: Load) -> float:
    """Return the rated current of one unit of a consumer [A]."""
    if load.running_current_a is not None:
        return load.running_current_a
    return float(rated_current(load.p_rated_kw, load.u_rated_v, load.efficiency, load.cos_phi, load.phases))


def asymmetry(cos_phi: float) -> float:
    """Return the first peak of a starting current over that of its symmetrical part.

    Source: IEC 60909-0:2016, equation for kappa, from memory: 1.02 + 0.98 e^(-3 R/X).

    Parameters
    ----------
    cos_phi : float
        Power factor at the start.

    Returns
    -------
    float
        1.02..2.

    Examples
    --------
    >>> round(asymmetry(0.3), 2)
    1.4
    """
    reactive = max(1.0 - cos_phi**2, 1e-9) ** 0.5
    return float(1.02 + 0.98 * np.exp(-3.0 * cos_phi / reactive))


def surges_of(number: int, load: Load, options: GradingOptions) -> Iterator[Surge]:
    """Yield what a motor draws while it starts.

    Parameters
    ----------
    number : int
        Place of the load in the workbook.
    load : Load
        The consumer.
    options : GradingOptions
        Starting time where none is given.

    Yields
    ------
    Surge
        One for a direct, autotransformer or soft start, two for star-delta; none for a converter.

    Notes
    -----
    Star: a third of the current of a direct start; autotransformer: the square of the tap; definitions.
    """
    motor = load.motor
    if motor is None or load.kind == "converter" or motor.starting_method == "converter":
        return
    rated = load_current_a(load)
    direct = motor.starting_current * rated
    factor = asymmetry(motor.starting_cos_phi)
    given = motor.starting_time_s
    time_s = options.starting_time_s if given is None else given
    assumed = "" if given is not None else f"starting time not given: {options.starting_time_s:g} s taken"

    def surge(event: str, current: float, lasts: float, first: float = factor, words: str = assumed) -> Surge:
        return Surge(
            event=event,
            load=number,
            current_a=current,
            peak_a=first * current,
            normal_a=rated,
            lasts_s=lasts,
            assumed=words,
        )

    match motor.starting_method:
        case "star-delta":
            change = motor.star_delta_change_s
            words = "" if change is not None else assumed
            yield surge("start in star", direct / 3.0, time_s if change is None else change, words=words)
            yield surge("change from star to delta", direct, TRANSITION_S, words="")
        case "autotransformer":
            yield surge("start by autotransformer", direct * motor.autotransformer_tap**2, time_s)
        case "soft starter":
            ramp = motor.soft_starter_ramp_s
            yield surge("soft start", motor.soft_starter_current * rated, ramp, 1.0, "")
        case _:
            yield surge("direct start", direct, time_s)
