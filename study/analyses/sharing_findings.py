"""What is odd about sets in parallel, in plain sentences."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from study.analyses.sharing_curves import LOADS_PU
from study.analyses.sharing_group import COMPENSATED, Group, beyond_rating
from study.network.batch import BatchSolution
from study.network.solution import limit_words
from study.network.sources import Law, Source, Speed
from study.results.arrays import FloatArray


def group_findings(group: Group) -> Iterator[str]:
    """Yield what the settings of the sets mean for their sharing."""
    for s in group.sources:
        yield from _kw_findings(s)
        yield from _kvar_findings(s)
    crossed = [s.name for s in group.sources if s.law == Law.CROSS_CURRENT]
    drooped = [s.name for s in group.sources if s.law in COMPENSATED and s.law != Law.CROSS_CURRENT]
    if crossed and drooped:
        yield (
            f"{_listed(crossed)} hold the voltage by cross-current compensation and take every change of "
            f"kvar; {_listed(drooped)} with droop beside them take none."
        )
    forming = [s.name for s in group.beside if s.speed != Speed.FIXED]
    if forming:
        yield f"Shares are of what the sets carry; {_listed(forming)} too takes load by droop of its own."
    constant = [s.name for s in group.beside if s.speed == Speed.FIXED] + _not_scaled(group)
    if constant:
        keep = "keeps its" if len(constant) == 1 else "keep their"
        yield f"{_listed(constant)} {keep} power over the range of load: only the consumers are scaled."


def _kw_findings(s: Source) -> Iterator[str]:
    if s.speed == Speed.FIXED:
        yield f"{s.name} runs at a set power and takes no part in kW sharing."
    if s.speed == Speed.ISOCHRONOUS:
        yield f"{s.name} is isochronous and takes every change of kW."


def _kvar_findings(s: Source) -> Iterator[str]:
    if s.law == Law.REACTIVE_POWER:
        yield f"{s.name} is on kvar control and takes no part in kvar sharing."
    if s.q_rated_kvar == 0.0:
        yield f"{s.name} is rated for power factor 1, has no rated kvar and takes no part in kvar sharing."
    if s.law == Law.FIELD:
        yield f"{s.name}: no regulator acts on its field; it cannot be trimmed, its kvar follow the voltage."
    if s.law == Law.PHASOR and s.xc_pu == 0.0:
        yield f"{s.name} has no voltage droop and takes every change of kvar."
    if s.xc_pu < 0.0:
        yield f"{s.name}: its droop circuit is reversed and it cannot share kvar; no margins are stated."


def _not_scaled(group: Group) -> list[str]:
    """Return the synchronous motors and filters on line in the island."""
    at, topology = group.at, group.at.network.topology
    plant = at.network.plant
    motors = [
        m.name
        for m in plant.synchronous_motors
        if m.name in at.view.motors_on and at.view.island[topology.node_of[m.name]] == group.island
    ]
    filters = [
        f.name
        for f, node, y in zip(plant.filters, topology.filter_node, at.filter_pu, strict=True)
        if y != 0.0 and at.view.island[node] == group.island
    ]
    return motors + filters


def own_load_findings(group: Group, own: BatchSolution) -> Iterator[str]:
    """Yield why the sets have no operating point at the mode's own load, or are overloaded there.

    Parameters
    ----------
    group : Group
        The sets.
    own : BatchSolution
        Its first row is the mode's own load.

    Yields
    ------
    str
        A sentence.
    """
    if not own.solved[0]:
        yield (
            f"{_listed(group.names)} have no operating point at the mode's own load: {own.reason[0]} "
            "Sharing is judged over the range of load that the sets can carry, at the power factor of the "
            "mode's load."
        )
    elif beyond_rating(group, own):
        yield (
            f"The mode's own load is beyond the ratings of {_listed(group.names)} together; adjusting "
            "margins are those of the range of load."
        )


def curve_findings(
    group: Group, load_pu: FloatArray, solution: BatchSolution | None, adjusted: str
) -> Iterator[str]:
    """Yield where a curve stops: loads out of reach, without a solution, or with a set at its limit.

    Parameters
    ----------
    group : Group
        The sets.
    load_pu : ndarray, shape (load,)
        Loads of the curve.
    solution : BatchSolution or None
        Its first rows are those loads; None where the sets could not be trimmed.
    adjusted : str
        What the curve is called.

    Yields
    ------
    str
        A sentence.
    """
    if solution is None:
        yield "The plant has no solution at 75 % load, so the sets could not be trimmed there."
        return
    if adjusted == "as set" and load_pu[0] > LOADS_PU[0] + 0.01:
        yield f"The sets carry {100.0 * load_pu[0]:.0f} % without any consumer; sharing is judged from there."
    lost = np.flatnonzero(~solution.solved[: len(load_pu)])
    if lost.size:
        yield f"No operating point at {_loads(load_pu[lost])} load, {adjusted}: {solution.reason[lost[0]]}"
    words = [limit_words(solution, k) for k in range(len(load_pu))]
    for k, name in zip(group.places, group.names, strict=True):
        held = [n for n, row in enumerate(words) if row[k] and solution.solved[n]]
        if held:
            word, where = words[held[0]][k], _loads(load_pu[held])
            yield f"{name} is held at its {word} limit at {where} load, {adjusted}."


def _loads(load_pu: FloatArray) -> str:
    low, high = 100.0 * load_pu.min(), 100.0 * load_pu.max()
    return f"{low:.0f} %" if low == high else f"{low:.0f} to {high:.0f} %"


def _listed(names: Sequence[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"
