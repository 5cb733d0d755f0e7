"""A section with one set on line, its bus-tie open: what is lost for good when that set is lost."""

from __future__ import annotations

from collections.abc import Sequence

from study.analyses.balance_sources import Source
from study.analyses.balance_supply import ModeSupply
from study.model.modes import Transfer
from study.model.plant import Plant
from study.network.view import DEAD
from study.results.balance import ConsumerDemand

KEPT_UP = ("propulsion", "steering", "safety")


def services_lost(
    plant: Plant,
    demand: ConsumerDemand,
    row: int,
    supply: ModeSupply,
    *,
    island: int,
    sources: Sequence[Source],
) -> tuple[str, ...] | None:
    """Return the services to propulsion, steering and safety that only this section serves.

    A service is kept where a load of the same service, essential to the same, is in use in another section
    and does not belong to the redundancy group that is lost, or where a load of the section itself is
    transferred to another one automatically.

    Source: SOLAS II-1/41.5.1 (supply for propulsion, steering and safety maintained or at once restored when
    one generator is lost; above 3 MW the board is divided and essential services are divided between its
    parts), from memory.

    Parameters
    ----------
    plant : Plant
        For services, redundancy groups and second feeds.
    demand : ConsumerDemand
        What is in use.
    row : int
        The mode's row in `demand`.
    supply : ModeSupply
        Which section feeds what.
    island : int
        The section.
    sources : sequence of Source
        All sources of the mode.

    Returns
    -------
    tuple of str or None
        For example ``propulsion (Engine auxiliaries)``; None where no other section has a source on line that
        is no emergency set.
    """
    others = {s.island for s in sources if s.running and s.service != "emergency"} - {island, DEAD}
    if not others:
        return None
    groups = {g.redundancy_group for g in plant.gensets if g.name in _running_here(sources, island)} - {None}
    there: set[tuple[str, str]] = set()
    here: dict[tuple[str, str], None] = {}
    for i, load in enumerate(plant.loads):
        if load.essential_to not in KEPT_UP or not demand.in_use[row, i] > 0.0:
            continue
        service = (load.essential_to, load.service)
        at = int(supply.load_island[i])
        if at == island:
            here[service] = None
            if _is_transferred(plant, supply, (load.name, plant.boards[supply.load_board[i]].name), others):
                there.add(service)
        elif at in others and load.redundancy_group not in groups:
            there.add(service)
    return tuple(
        f"{essential} ({service})" for essential, service in here if (essential, service) not in there
    )


def _running_here(sources: Sequence[Source], island: int) -> set[str]:
    return {s.name for s in sources if s.running and s.island == island}


def _is_transferred(plant: Plant, supply: ModeSupply, targets: tuple[str, ...], others: set[int]) -> bool:
    """Return whether a load or its board changes over to another section by itself."""
    return any(
        supply.island_of_board.get(board) in others
        for t in plant.transfers
        if t.automatic and t.target in targets
        for board in _boards_of(plant, t)
    )


def _boards_of(plant: Plant, transfer: Transfer) -> tuple[str, ...]:
    """Return the boards at which the other supply of a second feed begins."""
    ends = {
        **{c.name: (c.from_end, c.to_end) for c in plant.cables},
        **{t.name: (t.from_board, t.to_board) for t in plant.transformers},
        **{t.name: (t.board_a, t.board_b) for t in plant.ties},
    }.get(transfer.other_supply, (transfer.other_supply,))
    return tuple(end for end in ends if end != transfer.target)
