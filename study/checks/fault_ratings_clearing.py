"""Whether every fault is cleared while the sources keep its current up."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from study.checks.fault_ratings_verdict import not_assessed, rating_verdict
from study.checks.limits import Limits
from study.checks.verdict import Verdict
from study.model.plant import Plant
from study.results.fault_ratings import ClearingRatings, FaultRatingsResult

FOLLOWED_S = 7200.0  # how long a fault is followed where no end of its current is known

_HEADING = {
    "instantaneous": "Instantaneous current",
    "short-time delay": "Short-time current",
    "long-time delay": "Long-time current",
    "relay curve": "Long-time current",
    "overload relay": "Long-time current",
    "fuse melting": "Rated current",
    "maker's curve": "Rated current",
}


def judge_clearing(plant: Plant, result: FaultRatingsResult, mode: int, limits: Limits) -> Iterator[Verdict]:
    """Judge the least fault at the far end of every device's equipment in one mode.

    Parameters
    ----------
    plant : Plant
        For the cells that govern.
    result : FaultRatingsResult
        What clears and what does not.
    mode : int
        Which mode.
    limits : Limits
        For the close margin.

    Yields
    ------
    Verdict
        One for each device; one that does not clear exceeds.
    """
    clearing = result.clearing
    for k in np.flatnonzero(clearing.judged[:, mode]):
        at = (int(k), mode)
        if clearing.clears[at] and clearing.by[at] >= 0:
            yield _cleared(plant, clearing, at, result.modes[mode], limits)
        elif not clearing.clears[at]:
            found = _not_cleared(plant, clearing, at, result.modes[mode], limits)
            rests = result.unknown.clearing[at]
            yield not_assessed(found, result.unknown.sets[mode]) if rests else found


def _cleared(
    plant: Plant, clearing: ClearingRatings, at: tuple[int, int], mode: str, limits: Limits
) -> Verdict:
    by, stage = int(clearing.by[at]), clearing.stages[clearing.stage[at]]
    own, other = clearing.names[at[0]], clearing.names[by]
    instead = "" if by == at[0] else f" of {other}: {own} does not see it, discrimination is lost"
    return rating_verdict(
        mode=mode,
        equipment=own,
        quantity="least fault at the far end against the pick-up that clears it",
        value=float(clearing.least_a[at]),
        limit=float(clearing.pick_up_a[at]),
        unit="A",
        sense="at least",
        limits=limits,
        basis=f"{clearing.kinds[at[0]][at[1]]} fault; {stage}{instead}, {clearing.clearing_s[at]:.3g} s",
        cell=plant.cell_of(other, _HEADING.get(stage, "")),
    )


def _not_cleared(
    plant: Plant, clearing: ClearingRatings, at: tuple[int, int], mode: str, limits: Limits
) -> Verdict:
    name, stage = clearing.names[at[0]], clearing.stages[clearing.stage[at]]
    due, holds = float(clearing.due_s[at]), float(clearing.holds_s[at])
    seen, first = float(clearing.least_a[at]), float(clearing.first_a[at])
    pick_up = float(clearing.pick_up_a[at])
    too_small = seen < pick_up and not (math.isfinite(due) and math.isfinite(holds))
    kept_up = holds if math.isfinite(holds) else FOLLOWED_S
    if too_small:
        what = (
            f"the current falls from {first:.0f} A to {seen:.0f} A, below the {pick_up:.0f} A at which the "
            f"{stage} is sure to act"
        )
    elif math.isfinite(due):
        what = f"it needs {due:.3g} s, the sources keep the current up for {kept_up:.3g} s"
    else:
        lasts = "it is kept up" if math.isfinite(holds) else "it is followed"
        what = f"the {stage} does not act on {seen:.0f} A within the {kept_up:.3g} s that {lasts}"
    verdict = rating_verdict(
        mode=mode,
        equipment=name,
        quantity="does not clear: least fault at the far end against the pick-up"
        if too_small
        else "does not clear: time against that for which the current is kept up",
        value=seen if too_small else due,
        limit=pick_up if too_small else kept_up,
        unit="A" if too_small else "s",
        sense="at least" if too_small else "at most",
        limits=limits,
        basis=f"{clearing.kinds[at[0]][at[1]]} fault; no device nearer to the sources clears it either",
        cell=plant.cell_of(name, _HEADING.get(stage, "")),
    )
    remedy = f"Does not clear: {what}; set it lower or faster, or fit an excitation that holds the current."
    return replace(verdict, status="exceeds", remedy=remedy)
