"""What is energised in a mode: closed branches, second feeds, islands, dead parts."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from study.model.modes import Mode
from study.model.plant import Plant
from study.network.rings import vector_group_clashes
from study.network.topology import Topology, build_topology
from study.network.transfers import Feed, FeedUse, resolve_feeds
from study.network.union_find import roots_of

DEAD = -1


@dataclass(frozen=True, slots=True, kw_only=True)
class Island:
    """One live island; ``refusal`` says why it cannot be solved, and is empty where it can."""

    boards: tuple[str, ...]
    sources: tuple[str, ...]
    refusal: str


@dataclass(frozen=True, slots=True, kw_only=True)
class View:
    """A plant in one mode.

    ``closed`` is [branch], ``bus`` and ``island`` [node]: nodes joined by closed ties without impedance
    share a bus; island -1 is dead. ``load_node`` and ``load_fed`` are [load] in workbook order; ``load_fed``
    is False where the load is switched off or nothing feeds it. ``sources`` names what is on line.
    ``feeds`` says which supply each second-feed target uses.
    """

    mode: str
    closed: tuple[bool, ...]
    bus: tuple[int, ...]
    island: tuple[int, ...]
    islands: tuple[Island, ...]
    sources: tuple[str, ...]
    motors_on: tuple[str, ...]
    board_energised: tuple[bool, ...]
    board_island: tuple[int, ...]
    load_node: tuple[int, ...]
    load_fed: tuple[bool, ...]
    feeds: tuple[FeedUse, ...]
    findings: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class _State:
    """Connection of the plant for one choice of second feeds."""

    closed: list[bool]
    sources: list[str]
    load_node: list[int]
    root: list[int]
    live: set[int]


def view_of(plant: Plant, mode: Mode, topology: Topology | None = None) -> View:
    """Return what is energised in a mode.

    Parameters
    ----------
    plant : Plant
        The whole plant.
    mode : Mode
        One of its modes.
    topology : Topology, optional
        The plant's nodes and branches, where they are known already.

    Returns
    -------
    View
        Boards and loads in workbook order.

    Raises
    ------
    WorkbookError
        From `build_topology`.
    """
    topology = topology or build_topology(plant)
    return _Viewer(plant, mode, topology).view()


def is_closed(mode: Mode, equipment: str, topology: Topology, end: str | None = None) -> bool:
    """Return True where a piece of equipment and every device on it are on.

    Parameters
    ----------
    mode : Mode
        The mode.
    equipment : str
        Name of a source, branch or load.
    topology : Topology
        Holds the devices on each piece.
    end : str, optional
        A winding's board: devices at another board's end then do not count.

    Returns
    -------
    bool
        True where current can flow.
    """
    if not mode.is_on(equipment):
        return False
    devices = topology.breakers.get(equipment)
    return devices is None or all(
        mode.is_on(name) for name, at in devices if end is None or at is None or at == end
    )


class _Viewer:
    def __init__(self, plant: Plant, mode: Mode, topology: Topology) -> None:
        self.plant, self.mode, self.topology = plant, mode, topology
        self.findings: list[str] = []
        self.feeds = resolve_feeds(plant, topology)
        self.forming = {g.name for g in plant.gensets} | {s.name for s in plant.shore_supplies}
        self.forming |= {c.name for c in plant.converter_supplies if c.control == "grid forming"}
        self.following = [c.name for c in plant.converter_supplies if c.control != "grid forming"]
        names = [*(g.name for g in plant.gensets), *(s.name for s in plant.shore_supplies)]
        names += [c.name for c in plant.converter_supplies]
        self.on = [n for n in names if is_closed(mode, n, topology)]
        self.load_node = [topology.node_of[x.name] for x in plant.loads]
        self.from_node = np.array([b.from_node for b in topology.branches], np.int64)
        self.to_node = np.array([b.to_node for b in topology.branches], np.int64)
        self.known: dict[frozenset[int], _State] = {}
        self.base = [self._branch_closed(k) for k in range(len(topology.branches))]
        self.usable = [
            closed or self.mode.state(b.name) == "standby"
            for closed, b in zip(self.base, topology.branches, strict=True)
        ]

    def view(self) -> View:
        other = self._choose_feeds()
        state = self._connect(other)
        ties = [k for k, b in enumerate(self.topology.branches) if state.closed[k] and b.without_impedance]
        islands, number = self._islands(state)
        island = [number.get(r, DEAD) for r in state.root]
        loads = self.plant.loads
        boards = range(len(self.plant.boards))
        self._note_feeds(other, state)
        self._note_devices_on_boards()
        return View(
            mode=self.mode.name,
            closed=tuple(
                c and island[b.from_node] != DEAD
                for c, b in zip(state.closed, self.topology.branches, strict=True)
            ),
            bus=tuple(self._roots(ties)),
            island=tuple(island),
            islands=islands,
            sources=tuple(s for s in state.sources if island[self.topology.node_of[s]] != DEAD),
            motors_on=tuple(
                m.name
                for m in self.plant.synchronous_motors
                if is_closed(self.mode, m.name, self.topology)
                and island[self.topology.node_of[m.name]] != DEAD
            ),
            board_energised=tuple(island[i] != DEAD for i in boards),
            board_island=tuple(island[i] for i in boards),
            load_node=tuple(state.load_node),
            load_fed=tuple(
                island[n] != DEAD and is_closed(self.mode, x.name, self.topology)
                for x, n in zip(loads, state.load_node, strict=True)
            ),
            feeds=tuple(
                FeedUse(
                    target=f.transfer.target,
                    used=f.transfer.other_supply if i in other else f.transfer.normal_supply,
                    transferred=i in other,
                )
                for i, f in enumerate(self.feeds)
            ),
            findings=tuple(self.findings),
        )

    def _branch_closed(self, k: int) -> bool:
        branch = self.topology.branches[k]
        end = None
        if branch.winding:
            end = branch.from_end if branch.winding == "primary" else branch.to_end
        return is_closed(self.mode, branch.name, self.topology, end)

    # ---- second feeds

    def _choose_feeds(self) -> set[int]:
        """Return the transfers that go to the other supply: normal supply dead or off, other one live."""
        other: set[int] = set()
        changed = bool(self.feeds)
        while changed:
            changed = False
            for i, feed in enumerate(self.feeds):
                if i in other or self._target_live(feed, self._connect(other)):
                    continue
                moved = self._may_transfer(feed) and self._target_live(feed, self._connect(other | {i}))
                if moved:
                    other.add(i)
                    changed = True
        return other

    def _may_transfer(self, feed: Feed) -> bool:
        if feed.transfer.automatic:
            return True
        normal = feed.normal
        switched_off = [not self.base[k] for k in normal.branches] + [
            s not in self.on for s in normal.sources
        ]
        return bool(switched_off) and all(switched_off)

    def _target_live(self, feed: Feed, state: _State) -> bool:
        node = feed.node if feed.load is None else state.load_node[feed.load]
        return state.root[node] in state.live

    def _roots(self, branches: list[int]) -> list[int]:
        """Return the lowest node that each node is joined to by some branches."""
        return roots_of(len(self.topology.nodes), self.from_node[branches], self.to_node[branches])

    def _connect(self, other: set[int]) -> _State:
        chosen = frozenset(other)
        if chosen not in self.known:
            self.known[chosen] = self._connected(chosen)
        return self.known[chosen]

    def _connected(self, other: frozenset[int]) -> _State:
        closed, sources = list(self.base), list(self.on)
        load_node = list(self.load_node)
        for i, feed in enumerate(self.feeds):
            used, left = (feed.other, feed.normal) if i in other else (feed.normal, feed.other)
            for k in left.branches:
                closed[k] = False
            sources = [s for s in sources if s not in left.sources]
            for k in used.branches:
                closed[k] = self.usable[k] if i in other else self.base[k]
            if feed.load is not None and used.node is not None:
                load_node[feed.load] = used.node
        root = self._roots([k for k, is_on in enumerate(closed) if is_on])
        boards = len(self.plant.boards)
        with_board = set(root[:boards])
        live = {root[self.topology.node_of[s]] for s in sources if s in self.forming} & with_board
        return _State(closed=closed, sources=sources, load_node=load_node, root=root, live=live)

    # ---- islands

    def _islands(self, state: _State) -> tuple[tuple[Island, ...], dict[int, int]]:
        order = [r for r in dict.fromkeys(state.root[: len(self.plant.boards)]) if r in state.live]
        number = {r: i for i, r in enumerate(order)}
        clash = vector_group_clashes(self.plant, self.topology, state.closed, state.root)
        islands = tuple(
            Island(
                boards=tuple(b.name for i, b in enumerate(self.plant.boards) if state.root[i] == r),
                sources=tuple(s for s in state.sources if state.root[self.topology.node_of[s]] == r),
                refusal=clash.get(r, ""),
            )
            for r in order
        )
        for s in state.sources:
            r = state.root[self.topology.node_of[s]]
            if r in number:
                continue
            if s in self.following:
                self.findings.append(
                    f"{s} follows the grid, and nothing forms one where it stands: not on line."
                )
            else:
                self.findings.append(f"{s} is on, but nothing closed joins it to a board.")
        return islands, number

    # ---- findings

    def _note_feeds(self, other: set[int], state: _State) -> None:
        for i, feed in enumerate(self.feeds):
            t = feed.transfer
            self.findings.extend(feed.findings)
            if i in other:
                self.findings.append(
                    f"{t.target} is fed by {t.other_supply}: {t.normal_supply} is off or dead."
                )
            elif not self._target_live(feed, state):
                why = "neither supply is live" if t.automatic else "the transfer is not automatic"
                self.findings.append(f"{t.target} is dead: {t.normal_supply} is off or dead, and {why}.")

    def _note_devices_on_boards(self) -> None:
        boards = {b.name for b in self.plant.boards}
        self.findings.extend(
            f"{name} stands on board {board} and is off: that opens nothing; name the equipment it switches."
            for board, devices in self.topology.breakers.items()
            if board in boards
            for name, _ in devices
            if not self.mode.is_on(name)
        )
