"""Second feeds: which branches and sources a row of Transfers opens and closes."""

from __future__ import annotations

from dataclasses import dataclass

from study.model.modes import Transfer
from study.model.plant import Plant
from study.network.topology import Topology


@dataclass(frozen=True, slots=True, kw_only=True)
class Supply:
    """One of the two supplies of a target: branches and sources that it comes through.

    ``node`` is the board that a consumer without a cable of its own hangs on when so fed; None otherwise.
    """

    branches: tuple[int, ...]
    sources: tuple[str, ...]
    node: int | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Feed:
    """A second feed, resolved. ``load`` is the consumer's place in the plant, None for a board."""

    transfer: Transfer
    node: int
    load: int | None
    normal: Supply
    other: Supply
    findings: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class FeedUse:
    """Which supply a target uses in a mode."""

    target: str
    used: str
    transferred: bool


def resolve_feeds(plant: Plant, topology: Topology) -> tuple[Feed, ...]:
    """Return every row of Transfers with its branches and sources.

    Parameters
    ----------
    plant : Plant
        Holds the rows.
    topology : Topology
        Nodes and branches.

    Returns
    -------
    tuple of Feed
        In workbook order.
    """
    if not plant.transfers:
        return ()
    load_index = {x.name: i for i, x in enumerate(plant.loads)}
    boards = {b.name for b in plant.boards}
    feeds = []
    for t in plant.transfers:
        is_load = t.target in load_index
        supplies = [
            _resolve(t.target, s, is_load, s in boards, topology) for s in (t.normal_supply, t.other_supply)
        ]
        findings = [
            f"{t.target} has {name} as a supply, but no branch or source joins the two."
            for name, s in zip((t.normal_supply, t.other_supply), supplies, strict=True)
            if not s.branches and not s.sources and s.node is None
        ]
        feeds.append(
            Feed(
                transfer=t,
                node=topology.node_of[t.target],
                load=load_index.get(t.target),
                normal=supplies[0],
                other=supplies[1],
                findings=tuple(findings),
            )
        )
    return tuple(feeds)


def _resolve(target: str, supply: str, is_load: bool, is_board: bool, topology: Topology) -> Supply:
    if is_board:
        branches = _branches_between(target, supply, is_load, topology)
        node = topology.node_of[supply] if is_load and not branches else None
        return Supply(branches=branches, sources=(), node=node)
    branches = tuple(k for k, b in enumerate(topology.branches) if b.name == supply)
    return Supply(branches=branches, sources=() if branches else (supply,), node=None)


def _branches_between(target: str, board: str, is_load: bool, topology: Topology) -> tuple[int, ...]:
    pair = {(target, board), (board, target)}
    if is_load:
        return tuple(
            k for k, b in enumerate(topology.branches) if b.kind == "cable" and (b.from_end, b.to_end) in pair
        )
    return tuple(k for k, b in enumerate(topology.branches) if b.boards in pair)
