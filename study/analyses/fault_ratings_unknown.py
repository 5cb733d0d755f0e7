"""What rests on a sustained current that the workbook does not give: it cannot be assessed."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_boards import board_places
from study.analyses.fault_ratings_cables import protecting_devices
from study.analyses.fault_ratings_least import LeastFaults
from study.analyses.fault_ratings_series import Stacked
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.fault_ratings import (
    BoardRatings,
    CableRatings,
    DeviceRatings,
    TieRatings,
    UnknownSustained,
)
from study.results.short_circuit import FaultCase, ModeShortCircuit, ShortCircuitResult

BoolArray = NDArray[np.bool_]
FloatArray = NDArray[np.float64]

# IEC 61363-1 does without the sustained current for the first 100 ms; from memory of its scope.
KNOWN_UP_TO_S: Final = 0.1
_SMALLEST_PART: Final = 0.01  # of the transient current at a place


def unknown_sustained(
    plant: Plant,
    result: ShortCircuitResult,
    least: Sequence[LeastFaults],
    ratings: tuple[BoardRatings, DeviceRatings, CableRatings, TieRatings],
) -> UnknownSustained:
    """Return the duties and clearing times that rest on a sustained current which is not given.

    Parameters
    ----------
    plant : Plant
        Its equipment.
    result : ShortCircuitResult
        Which sets have none.
    least : sequence of LeastFaults
        One for each mode.
    ratings : tuple
        Of boards, devices, cables and ties.

    Returns
    -------
    UnknownSustained
        [piece, mode]
    """
    boards, devices, cables, ties = ratings
    of_devices = {name: k for k, name in enumerate(d.name for d in plant.devices)}
    rows = np.array([of_devices[name] for name in devices.names], np.int64)
    place = board_places(result.places, [b.name for b in plant.boards])
    names = [b.name for b in plant.boards]
    joined = np.array([[names.index(t.board_a), names.index(t.board_b)] for t in plant.ties], np.int64)
    protecting = protecting_devices(plant)
    columns = []
    for m, mode in enumerate(result.modes):
        high, low = fed_by_unknown(mode.maximum), fed_by_unknown(mode.minimum)
        at_board = high[place] & (place >= 0)
        at_device = high[mode.devices.place] & (mode.devices.place >= 0)
        far = mode.devices.far_place
        at_far = low[far] & (far >= 0) & least[m].judged
        late = at_far & ~(least[m].clearing.time_s <= KNOWN_UP_TO_S)
        columns.append(
            {
                "boards": at_board & (boards.rated_duration_s > KNOWN_UP_TO_S),
                "devices": at_device[rows] & _late(devices.clearing_s[:, m]),
                "clearing": late,
                "cables": _cables(cables, m, at_device),
                "far_cables": np.array([any(late[d] for d in found) for found in protecting], bool),
                "ties": at_board[joined].any(axis=1) & (ties.rated_duration_s > KNOWN_UP_TO_S)
                if len(joined)
                else np.zeros(0, bool),
            }
        )
    counts = {
        "boards": len(boards.names),
        "devices": len(devices.names),
        "clearing": len(plant.devices),
        "cables": len(cables.names),
        "far_cables": len(cables.names),
        "ties": len(ties.names),
    }
    return UnknownSustained(
        sets=tuple(", ".join(_unknown(mode)) for mode in result.modes),
        **{name: read_only(Stacked(columns, n)[name] > 0.0, np.bool_) for name, n in counts.items()},
    )


def _unknown(mode: ModeShortCircuit) -> list[str]:
    """Return the sources of a mode, in either case, whose sustained current is not known."""
    found: dict[str, None] = {}
    for case in (mode.maximum, mode.minimum):
        for name, known, holds in zip(
            case.sources.names, case.sources.sustained_known, case.sources.kinds, strict=True
        ):
            if not known and holds == "genset":
                found[name] = None
    return list(found)


def fed_by_unknown(case: FaultCase) -> BoolArray:
    """Return the places to which sets of unknown sustained current give a part that counts.

    Parameters
    ----------
    case : FaultCase
        Of one mode.

    Returns
    -------
    ndarray of bool, shape (place + 1,)
        The last is False, for no place.
    """
    unknown = ~case.sources.sustained_known & np.array([k == "genset" for k in case.sources.kinds], bool)
    transient = case.parts.transient_a
    part = transient[:, unknown].sum(axis=1)
    counts: BoolArray = (part > _SMALLEST_PART * transient.sum(axis=1)) & (part > 0.0)
    return np.append(counts, False)


def _late(time_s: FloatArray) -> BoolArray:
    return np.asarray(time_s > KNOWN_UP_TO_S)


def _cables(cables: CableRatings, m: int, at_device: BoolArray) -> BoolArray:
    device = cables.device[:, m]
    there = np.append(at_device, False)[device] & (device >= 0)
    return np.asarray(there & ~cables.let_through[:, m] & _late(cables.clearing_s[:, m]))
