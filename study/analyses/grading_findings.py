"""What the grading study has to say in sentences: what it could not judge, and why."""

from __future__ import annotations

import numpy as np

from study.analyses.grading_bands import Openers
from study.analyses.grading_stations import Stations
from study.model.plant import Plant
from study.results.grading import PAIR_KINDS, GradingPairs

_NAMED = 6


def grading_findings(
    plant: Plant, stations: Stations, openers: Openers, pairs: GradingPairs
) -> tuple[str, ...]:
    """Return what the study leaves open.

    Parameters
    ----------
    plant : Plant
        Devices and boards.
    stations : Stations
        Of the plant.
    openers : Openers
        What opens each station.
    pairs : GradingPairs
        Of all modes.

    Returns
    -------
    tuple of str
        Sentences.
    """
    found: list[str] = []
    placed = {k for members in stations.devices for k in members}
    left = [d.name for k, d in enumerate(plant.devices) if k not in placed]
    if left:
        found.append(f"{_listed(left)}: on a board, or dead in every mode; not graded.")
    for kind, words in (
        (
            "fault of a set",
            "a fault between a set and its breaker, with fewer than three sets in parallel: both breakers "
            "see alike currents, so overcurrent releases cannot tell which set is faulty; a differential "
            "protection would.",
        ),
        (
            "parallel path",
            "a fault in one of several parallel paths is fed back through the others: overcurrent releases "
            "without direction cannot tell them apart; a directional or differential protection would.",
        ),
    ):
        rows = ((pairs.kind == PAIR_KINDS.index(kind)) & (pairs.extent == 4)).any(axis=1)
        names = dict.fromkeys(stations.names[s] for s in pairs.downstream[np.flatnonzero(rows)])
        if names:
            found.append(f"{_listed(list(names))}: not judged for {words}")
    for members, opener in zip(stations.devices, openers.openers, strict=True):
        unknown = [w for k in members for w in openers.models[k].band.unknown]
        if unknown and not (opener.early_known and opener.late_known):
            found.append(f"{' + '.join(plant.devices[k].name for k in members)}: {'; '.join(unknown)}.")
    return tuple(found)


def _listed(names: list[str]) -> str:
    if len(names) > _NAMED:
        return f"{', '.join(names[:_NAMED])} and {len(names) - _NAMED} more"
    return ", ".join(names)
