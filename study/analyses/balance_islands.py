"""One live island of a mode: load against sources, fewest sets, load steps, shore supply.

The load of an island is the sum of what counts on its boards; losses of cables and transformers are the load
flow's and are not in it.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import combinations

import numpy as np

from study.analyses.balance_shares import Share, proportions
from study.analyses.balance_sources import Source, may_run_together
from study.results.arrays import BoolArray
from study.results.balance import ConsumerDemand


@dataclass(frozen=True, slots=True, kw_only=True)
class Consumers:
    """What counts in one island of one mode.

    ``here`` marks the loads of the island (fed and in use), ``row`` is the mode's row in ``demand``;
    ``motors_kw`` is the input of the synchronous motors on line.
    """

    demand: ConsumerDemand
    row: int
    here: BoolArray
    motors_kw: float

    @property
    def p_kw(self) -> float:
        """Active power that counts [kW]."""
        return math.fsum((*self.demand.p_counted_kw[self.row][self.here].tolist(), self.motors_kw))

    @property
    def q_kvar(self) -> float:
        """Reactive power that counts [kvar]."""
        return math.fsum(self.demand.q_counted_kvar[self.row][self.here].tolist())

    def without(self, shed: BoolArray) -> Consumers:
        """Return the same island without the marked loads."""
        return replace(self, here=self.here & ~shed)


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadStep:
    """The largest load that is switched in one go; an empty name where there is none."""

    load: str
    p_kw: float
    capability_kw: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ShoreLoading:
    """The shore supply of an island that comes nearest to its rated current."""

    name: str | None
    current_a: float
    rated_a: float


NO_SHORE = ShoreLoading(name=None, current_a=math.nan, rated_a=math.nan)


def fewest_sets(
    candidates: Sequence[Source],
    p_load_kw: float,
    s_load_kva: float,
    margin: float,
    pairs: frozenset[frozenset[str]],
) -> tuple[str, ...] | None:
    """Return the fewest sets that meet a load with a margin, and of equal numbers those of the least kW.

    Both ``sum(P rated) >= P/(1 - margin)`` and ``sum(S rated) >= S/(1 - margin)`` must hold.

    Source: common practice, no source; the margin is that of the Acceptance sheet.

    Parameters
    ----------
    candidates : sequence of Source
        Sets that may be run.
    p_load_kw, s_load_kva : float
        Load to be met. [kW], [kVA]
    margin : float
        Part of the rating that stays free, below 1. [-]
    pairs : frozenset
        Sets that may not run together.

    Returns
    -------
    tuple of str or None
        Names in workbook order; None where no combination is enough.
    """
    p_need, s_need = p_load_kw / (1.0 - margin), s_load_kva / (1.0 - margin)
    for count in range(1, len(candidates) + 1):
        enough = [
            chosen
            for chosen in combinations(candidates, count)
            if math.fsum(s.p_rated_kw for s in chosen) >= p_need
            and math.fsum(s.s_rated_kva for s in chosen) >= s_need
            and may_run_together((s.name for s in chosen), pairs)
        ]
        if enough:
            best = min(enough, key=lambda chosen: math.fsum(s.p_rated_kw for s in chosen))
            return tuple(s.name for s in best)
    return None


def set_candidates(sources: Sequence[Source], island: int, mode_kind: str) -> list[Source]:
    """Return the sets that could feed an island in the long run.

    Main sets, whatever their state; harbour sets in port, and elsewhere where they run or stand by; and
    supplies through a converter that hold the voltage, have no store to run empty, and run or stand by.
    """
    in_port = mode_kind in ("harbour", "shore")
    return [
        s
        for s in sources
        if s.island == island
        and (
            s.service == "main"
            or (s.service == "harbour" and (in_port or s.state != "off"))
            or (s.kind == "converter supply" and s.forming and not s.stored and s.state != "off")
        )
    ]


def charging_kw(running: Sequence[Source]) -> float:
    """Return what supplies take by their set power, a load that any sets have to carry [kW]."""
    return math.fsum(max(0.0, -(s.p_set_kw or 0.0)) for s in running if not s.forming)


def fewest_sets_words(chosen: tuple[str, ...] | None, installed: int, p_load_kw: float) -> str:
    """Return the fewest sets in words that can follow 'run'.

    Examples
    --------
    >>> fewest_sets_words(("DG1", "DG2"), 3, 900.0)
    '2 sets (DG1, DG2)'
    >>> fewest_sets_words(None, 3, 9000.0)
    'more or larger sets than the 3 installed here'
    """
    if chosen is not None:
        return f"{len(chosen)} set{'s' if len(chosen) > 1 else ''} ({', '.join(chosen)})"
    if p_load_kw <= 0.0:
        return "no set, since there is no load"
    if not installed:
        return "a main or harbour set, of which none is installed here"
    return f"more or larger sets than the {installed} installed here"


def step_capability_kw(running: Sequence[Source], before: dict[str, Share]) -> float:
    """Return the largest load that the sources on line take in one step.

    The step is shared in proportion to rated kW. No engine may get more than its largest load step, nor more
    than what is left to its overload power; no supply without an engine more than what is left to its rating.
    The source that reaches its limit first decides: ``min(min(step_i, P_max_i - P_i) / w_i)`` with
    ``w_i = P_rated_i / sum(P_rated)`` and ``P_max = 1.1 P_engine eta``.

    Source: largest load step by the maker (IACS UR M3 and ISO 8528-5, mean effective pressure curves, from
    memory), used at any load before the step. Overload power of 110 %: Japanese ship-electrical textbooks,
    engine check at the start of a motor, ``Pb + sqrt3 U Is cos(phi) <= 1.1 Pe eta``. The sharing is derived.

    Parameters
    ----------
    running : sequence of Source
        Sources on line in one island; those that follow the grid take no step.
    before : dict
        What each delivers before the step, by name.

    Returns
    -------
    float
        [kW]; zero where no source holds the voltage.
    """
    forming = [s for s in running if s.forming]
    weights = proportions([s.p_rated_kw for s in forming])
    room = [
        min(s.step_kw, s.p_overload_kw - before[s.name].p_kw) / w
        for s, w in zip(forming, weights, strict=True)
    ]
    return max(0.0, min(room, default=0.0))


def largest_unit(consumers: Consumers, ramped: BoolArray) -> tuple[int, float]:
    """Return index and input [kW] of the largest single unit that is switched; index -1 where there is none.

    Loads that a converter brings up (`ramped`, [load]) are no step for the engines.
    """
    demand, row = consumers.demand, consumers.row
    single = demand.p_unit_kw[row] * np.minimum(demand.in_use[row], 1.0) * (consumers.here & ~ramped)
    if not single.size or float(single.max()) <= 0.0:
        return -1, 0.0
    index = int(single.argmax())
    return index, float(single[index])


def shore_loading(running: Sequence[Source], shares: dict[str, Share]) -> ShoreLoading:
    """Return the shore supply nearest to its rated current, ``I / I rated = S / (sqrt3 U I rated)``."""
    rows = [
        (math.hypot(shares[s.name].p_kw, shares[s.name].q_kvar) / s.s_rated_kva, s)
        for s in running
        if s.service == "shore"
    ]
    if not rows:
        return NO_SHORE
    part, shore = max(rows, key=lambda pair: pair[0])
    return ShoreLoading(name=shore.name, current_a=part * shore.i_rated_a, rated_a=shore.i_rated_a)
