"""What is left when a set is lost: the largest running set of an island, and any one main set of the plant.

Emergency sets never count in either: they are no part of the main source of power.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from study.analyses.balance_islands import Consumers
from study.analyses.balance_shares import Share
from study.analyses.balance_sources import Source, capacity, loading, may_run_together
from study.results.arrays import IntArray
from study.results.balance import LossOfSet, MainSetOut

TRIPPED = (("at once", 0), ("after trip stage 1", 1), ("after trip stage 2", 2))


@dataclass(frozen=True, slots=True, kw_only=True)
class Loss:
    """The stages after the largest set is lost: the sets left alone, then with the standby sets started.

    ``alone`` ends with the standby started against the whole load where there is a standby set;
    ``with_standby`` has the started standby at every trip stage.
    """

    alone: tuple[LossOfSet, ...]
    with_standby: tuple[LossOfSet, ...]


def loss_of_largest(
    sources: Sequence[Source],
    shares: dict[str, Share],
    consumers: Consumers,
    trip_stage: IntArray,
    pairs: frozenset[frozenset[str]],
) -> Loss:
    """Return the island after its largest running set is lost, stage by stage.

    The largest set is that of the largest rated kW, of equals the one that carries most. Preferential trips
    shed stage 1, then stages 1 and 2. The standby sets then start, as far as interlocks let them in.

    Source: SOLAS II-1/41.5.1 (load shedding and standby set, from memory).

    Parameters
    ----------
    sources : sequence of Source
        Sources of the island, on line and standing by.
    shares : dict
        What each source on line delivers, by name.
    consumers : Consumers
        What counts in the island.
    trip_stage : ndarray of int, shape (load,)
        0, 1 or 2.
    pairs : frozenset
        Sources that may not run together.

    Returns
    -------
    Loss
        Empty where no main set, harbour set or shaft supply is on line.
    """
    running = [s for s in sources if s.running and s.service != "emergency"]
    could_go = [s for s in running if s.service in ("main", "harbour", "converter") and not s.stored]
    if not could_go:
        return Loss(alone=(), with_standby=())
    lost = max(could_go, key=lambda s: (s.p_capacity_kw, shares[s.name].p_kw))
    left = [s for s in running if s.name != lost.name]
    started = _with_standby(left, sources, pairs)
    kept = {name: consumers.without((trip_stage > 0) & (trip_stage <= n)) for name, n in TRIPPED}
    alone = [_stage(lost, left, kept[name], name) for name in kept]
    with_standby = []
    if len(started) > len(left):
        alone.append(_stage(lost, started, consumers, "standby started"))
        with_standby = [_stage(lost, started, kept[name], name) for name in kept]
    return Loss(alone=tuple(alone), with_standby=tuple(with_standby))


def main_sets_out(sources: Sequence[Source], p_load_kw: float, q_load_kvar: float) -> tuple[MainSetOut, ...]:
    """Return the loading of the other main sets with each main set of the plant out of service.

    Every other installed main set is taken as available, and ties as closed. Harbour and emergency sets,
    shore and converter supplies are not counted.

    Source: SOLAS II-1/41.1.2 (services for normal propulsion and safety, and minimum comfortable conditions
    of habitability, with any one generating set stopped).

    Parameters
    ----------
    sources : sequence of Source
        All sources of the plant.
    p_load_kw, q_load_kvar : float
        What counts of the loads essential to propulsion, steering, safety and habitability.

    Returns
    -------
    tuple of MainSetOut
        One row for each main set.
    """
    main = [s for s in sources if s.service == "main"]
    rows = []
    for out in main:
        p_left, s_left = capacity(s for s in main if s.name != out.name)
        rows.append(
            MainSetOut(
                out=out.name,
                p_load_kw=p_load_kw,
                q_load_kvar=q_load_kvar,
                p_capacity_kw=p_left,
                s_capacity_kva=s_left,
                kw_loading=loading(p_load_kw, p_left),
                kva_loading=loading(math.hypot(p_load_kw, q_load_kvar), s_left),
            )
        )
    return tuple(rows)


def _with_standby(
    left: list[Source], sources: Sequence[Source], pairs: frozenset[frozenset[str]]
) -> list[Source]:
    started = list(left)
    for source in sources:
        if source.state != "standby" or source.service not in ("main", "harbour", "converter"):
            continue
        if may_run_together([s.name for s in started] + [source.name], pairs):
            started.append(source)
    return started


def _stage(lost: Source, left: list[Source], kept: Consumers, stage: str) -> LossOfSet:
    p_capacity_kw, s_capacity_kva = capacity(left)
    return LossOfSet(
        island=lost.island,
        lost=lost.name,
        stage=stage,
        p_load_kw=kept.p_kw,
        q_load_kvar=kept.q_kvar,
        p_capacity_kw=p_capacity_kw,
        s_capacity_kva=s_capacity_kva,
        kw_loading=loading(kept.p_kw, p_capacity_kw),
        kva_loading=loading(math.hypot(kept.p_kw, kept.q_kvar), s_capacity_kva),
        sets_left=tuple(s.name for s in left) if p_capacity_kw > 0.0 else (),
    )
