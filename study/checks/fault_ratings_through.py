"""Transformers and series reactors against the fault behind them."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from study.checks.fault_ratings_verdict import rating_verdict
from study.checks.limits import Limits
from study.checks.verdict import Verdict
from study.model.plant import Plant
from study.results.fault_ratings import FaultRatingsResult

_TRANSFORMER = "IEC 60076-5:2006 cl. 4.1.3 and 4.2.3, In/uk for 2 s, from memory"
_REACTOR = "IEC 60076-6:2007 cl. 8.2, thermal and mechanical short-time current, from memory"
_HEADINGS = {"transformer": "Short-circuit voltage", "reactor": "Short-time current"}


def judge_through_faults(
    plant: Plant, result: FaultRatingsResult, mode: int, limits: Limits
) -> Iterator[Verdict]:
    """Judge what flows through transformers and reactors in one mode.

    Parameters
    ----------
    plant : Plant
        For the cells that govern, and the names of devices.
    result : FaultRatingsResult
        Currents and what is withstood.
    mode : int
        Which mode.
    limits : Limits
        For the close margin.

    Yields
    ------
    Verdict
        Heat and peak of each piece; without a device that clears, or without a rating, not assessed.
    """
    for k in np.flatnonzero(result.through.live[:, mode]):
        for peak in (False, True):
            yield _judged(plant, result, (int(k), mode), limits, peak=peak)


def _judged(
    plant: Plant, result: FaultRatingsResult, at: tuple[int, int], limits: Limits, *, peak: bool
) -> Verdict:
    t, k = result.through, at[0]
    kind = t.kinds[k]
    what = "peak of a fault" if peak else "heat until cleared of a fault"
    basis = _TRANSFORMER if kind == "transformer" else _REACTOR
    if math.isnan(t.withstand_ka[k]):
        basis += "; its short-time current is not given"
    elif not peak:
        basis += "; " + _clearing_words(plant, result, at)
    return rating_verdict(
        mode=result.modes[at[1]],
        equipment=t.names[k],
        quantity=f"{what} on {t.behind[k]}, through it",
        value=float((t.peak_ka if peak else t.heat_ka)[at]),
        limit=float((t.rated_peak_ka if peak else t.withstand_ka)[k]),
        limits=limits,
        basis=basis,
        cell=plant.cell_of(t.names[k], _HEADINGS[kind]),
        remedy="Let its device clear sooner, or agree a higher withstand with the maker.",
        unknown=result.unknown.sets[at[1]] if t.rests_on_unknown[at] and not peak else "",
    )


def _clearing_words(plant: Plant, result: FaultRatingsResult, at: tuple[int, int]) -> str:
    device = int(result.through.device[at])
    if device < 0:
        return "no device that stands on it sees this fault"
    seconds = float(result.through.clearing_s[at])
    if math.isinf(seconds):
        return f"{plant.devices[device].name} does not clear it"
    return f"cleared by {plant.devices[device].name} in {seconds:.3g} s"
