"""Fall of voltage in each cable and to the worst consumer behind it, and what a run may use of the limit."""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_series import worst_mode
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.cable_protection import CableDrop
from study.results.load_flow import LoadFlowResult, ModeLoadFlow

FloatArray = NDArray[np.float64]

# Above every drop [pu].
_ABOVE_ANY: Final = 10.0


def cable_drop(plant: Plant, flow: LoadFlowResult, limit_pu: float) -> CableDrop:
    """Return the fall of voltage of every cable.

    What a run may use is its own drop and what the worst consumer behind it leaves of the limit.

    Parameters
    ----------
    plant : Plant
        Cables.
    flow : LoadFlowResult
        Of every mode.
    limit_pu : float
        Permitted fall from the switchboard to a consumer.

    Returns
    -------
    CableDrop
        In workbook order.
    """
    row = {cable.name: k for k, cable in enumerate(plant.cables)}
    shape = (len(row), len(flow.modes))
    own, total, left = (np.full(shape, np.nan) for _ in range(3))
    consumer = np.full(shape, "", object)
    for column, mode in enumerate(flow.modes):
        for name, kind, drop in zip(
            mode.branches.names, mode.branches.kinds, mode.branches.drop_pu, strict=True
        ):
            if kind == "cable":
                own[row[name], column] = drop
        _terminals(mode, row, limit_pu, (total[:, column], left[:, column], consumer[:, column]))
    spare = np.where(np.isnan(left), np.nan, own + left)
    scarce = _ABOVE_ANY - spare
    worst = worst_mode(~np.isnan(spare), scarce, scarce)
    served = np.flatnonzero(worst >= 0)
    allowed, names = np.full(len(row), np.nan), [""] * len(row)
    allowed[served] = spare[served, worst[served]]
    for k in served:
        names[k] = str(consumer[k, worst[k]])
    return CableDrop(
        own_pu=read_only(own),
        total_pu=read_only(total),
        allowed_pu=read_only(allowed),
        consumer=tuple(names),
        worst_mode=read_only(worst, np.int64),
    )


def _terminals(
    mode: ModeLoadFlow,
    row: dict[str, int],
    limit_pu: float,
    columns: tuple[FloatArray, FloatArray, NDArray[np.object_]],
) -> None:
    """Enter the worst consumer behind each cable: its whole drop, what that leaves, its name."""
    total, left, consumer = columns
    state = mode.terminals
    nominal = dict(zip(mode.boards.names, mode.boards.u_nominal_v, strict=True))
    for k, path in enumerate(state.path):
        drop = float(state.drop_pu[k])
        if np.isnan(drop):
            continue
        spare = (limit_pu - drop) * float(state.u_rated_v[k]) / float(nominal[state.boards[k]])
        for name in path.split(" > "):
            at = row.get(name)
            if at is not None and not left[at] <= spare:
                total[at], left[at], consumer[at] = drop, spare, state.loads[k]
