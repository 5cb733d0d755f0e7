"""Whether every fault is cleared while the sources keep its current up."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from study.checks.fault_ratings_verdict import rating_verdict
from study.checks.limits import Limits
from study.checks.verdict import Verdict
from study.model.plant import Plant
from study.results.fault_ratings import ClearingRatings, FaultRatingsResult

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
            yield _not_cleared(plant, clearing, at, result.modes[mode], limits)


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
    late = math.isfinite(due) and math.isfinite(holds)
    seen, first = float(clearing.least_a[at]), float(clearing.first_a[at])
    if late:
        what = f"it needs {due:.3g} s, the sources keep the current up for {holds:.3g} s"
    elif seen < float(clearing.pick_up_a[at]):
        what = (
            f"the current falls from {first:.0f} A to {seen:.0f} A, below the {clearing.pick_up_a[at]:.0f} A"
            f" at which the {stage} is sure to act"
        )
    else:
        what = f"the current of {seen:.0f} A does not last until the {stage} acts"
    verdict = rating_verdict(
        mode=mode,
        equipment=name,
        quantity="does not clear: time against that for which the current is kept up"
        if late
        else "does not clear: least fault at the far end against the pick-up",
        value=due if late else seen,
        limit=holds if late else float(clearing.pick_up_a[at]),
        unit="s" if late else "A",
        sense="at most" if late else "at least",
        limits=limits,
        basis=f"{clearing.kinds[at[0]][at[1]]} fault; no device nearer to the sources clears it either",
        cell=plant.cell_of(name, _HEADING.get(stage, "")),
    )
    remedy = f"Does not clear: {what}; set it lower or faster, or fit an excitation that holds the current."
    return replace(verdict, status="exceeds", remedy=remedy)
