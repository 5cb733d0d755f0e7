"""What the load balance needs of one mode's network: islands, sources on line, what feeds each load."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from study.model.plant import Plant
from study.network.view import DEAD, View
from study.results.arrays import IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class ModeSupply:
    """What the balance needs of one mode's network.

    Attributes
    ----------
    islands : tuple of tuple of str
        Boards of each live island.
    island_of_board : mapping of str to int
        Live boards only; a board that is not named is dead.
    running : frozenset of str
        Sources on line.
    motors_on : tuple of str
        Synchronous motors that are on and live.
    load_island : ndarray of int, shape (load,)
        -1 where nothing feeds the load.
    load_board : ndarray of int, shape (load,)
        Place in the plant of the board that feeds the load now, second feeds included.
    """

    islands: tuple[tuple[str, ...], ...]
    island_of_board: Mapping[str, int]
    running: frozenset[str]
    motors_on: tuple[str, ...]
    load_island: IntArray
    load_board: IntArray


def supply_of(plant: Plant, view: View) -> ModeSupply:
    """Return what the balance needs of a mode's view of the network."""
    place = {board.name: i for i, board in enumerate(plant.boards)}
    feeding = {load.name: place[load.board] for load in plant.loads}
    ends = {cable.name: (cable.from_end, cable.to_end) for cable in plant.cables}
    for feed in view.feeds:
        if feed.transferred and feed.target in feeding:
            supply = (feed.used, *ends.get(feed.used, ()))
            feeding[feed.target] = next((place[x] for x in supply if x in place), feeding[feed.target])
    load_island = [
        view.island[node] if fed else DEAD for node, fed in zip(view.load_node, view.load_fed, strict=True)
    ]
    return ModeSupply(
        islands=tuple(island.boards for island in view.islands),
        island_of_board={
            board.name: number
            for board, number in zip(plant.boards, view.board_island, strict=True)
            if number != DEAD
        },
        running=frozenset(view.sources),
        motors_on=view.motors_on,
        load_island=np.array(load_island, dtype=np.int64),
        load_board=np.array(list(feeding.values()), dtype=np.int64),
    )
