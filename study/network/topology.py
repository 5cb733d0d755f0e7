"""Nodes and branches of the plant, whatever the mode: where each piece of equipment is joined.

A piece that a cable runs to has a terminal of its own; one without a cable sits on its board. Nodes and
branches are numbered here once; words for results (boards, equipment) stay with them.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Literal

from study.issues import Issue, WorkbookError
from study.model.branches import Cable
from study.model.plant import Plant
from study.network.union_find import UnionFind

BranchKind = Literal["cable", "transformer", "three-winding transformer", "tie", "reactor"]
LARGEST_STEP_AT_ONE_LEVEL = (
    0.1  # boards joined without a transformer may differ in name-plate voltage by this
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Node:
    """A board, a terminal or a star point.

    ``board`` is the board that a terminal belongs to; ``owner`` the equipment, or the board itself.
    ``u_base_v`` is one voltage for all nodes that are joined without a transformer.
    """

    kind: Literal["board", "terminal", "primary", "secondary", "star"]
    owner: str
    board: str
    u_base_v: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Branch:
    """What joins two nodes; ``winding`` names the winding of a three-winding transformer, else empty.

    ``boards`` are the boards of the two ends, ``index`` the place in the plant's own tuple of that kind.
    ``load`` names the consumer that a cable runs to (its impedance is for one unit), or is empty.
    """

    kind: BranchKind
    name: str
    winding: Literal["", "primary", "secondary", "tertiary"]
    index: int
    from_node: int
    to_node: int
    from_end: str
    to_end: str
    boards: tuple[str, str]
    load: str
    without_impedance: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Topology:
    """Everything that can be joined, with every switch closed.

    ``node_of`` maps boards and equipment (sources, motors, loads) to their node.
    """

    nodes: tuple[Node, ...]
    branches: tuple[Branch, ...]
    node_of: Mapping[str, int]
    filter_node: tuple[int, ...]
    breakers: Mapping[str, tuple[tuple[str, str | None], ...]]


def build_topology(plant: Plant) -> Topology:
    """Return nodes and branches of a plant.

    Parameters
    ----------
    plant : Plant
        The whole plant.

    Returns
    -------
    Topology
        Boards first, in workbook order.

    Raises
    ------
    WorkbookError
        A cable whose ends do not meet, or boards of different voltage joined without a transformer; all
        faults together.
    """
    return _Builder(plant).build()


class _Builder:
    """Collects nodes, branches and faults while the plant is walked through."""

    def __init__(self, plant: Plant) -> None:
        self.plant = plant
        self.faults: list[Issue] = []
        self.nodes: list[tuple[str, str, str]] = []  # kind, owner, board
        self.branches: list[Branch] = []
        self.board_node: dict[str, int] = {}
        self.side_node: dict[tuple[str, str], int] = {}
        self.home = _boards_of_equipment(plant)
        self.windings = _windings(plant)
        self.loads = {x.name for x in plant.loads}

    def build(self) -> Topology:
        for board in self.plant.boards:
            self.board_node[board.name] = self._new_node("board", board.name, board.name)
        ends = [self._cable_nodes(c) for c in self.plant.cables]
        self._add_transformers()
        self._add_three_winding()
        self._add_joints()
        for i, (cable, pair) in enumerate(zip(self.plant.cables, ends, strict=True)):
            if pair is not None:
                self._add_cable(i, cable, pair)
        base = self._levels()
        if self.faults:
            raise WorkbookError(self.faults)
        node_of = dict(self.board_node)
        for name, home in self.home.items():
            node_of[name] = self.side_node.get((name, ""), self.board_node[home])
        breakers: dict[str, list[tuple[str, str | None]]] = {}
        for d in self.plant.devices:
            breakers.setdefault(d.equipment, []).append((d.name, d.end))
        return Topology(
            nodes=tuple(
                Node(kind=k, owner=o, board=b, u_base_v=u)  # type: ignore[arg-type]
                for (k, o, b), u in zip(self.nodes, base, strict=True)
            ),
            branches=tuple(self.branches),
            node_of=node_of,
            filter_node=tuple(self.board_node[f.board] for f in self.plant.filters),
            breakers={k: tuple(v) for k, v in breakers.items()},
        )

    def _new_node(self, kind: str, owner: str, board: str) -> int:
        self.nodes.append((kind, owner, board))
        return len(self.nodes) - 1

    def _terminal(self, kind: str, owner: str, board: str, side: str) -> int:
        if (owner, side) not in self.side_node:
            self.side_node[owner, side] = self._new_node(kind, owner, board)
        return self.side_node[owner, side]

    def _cable_nodes(self, cable: Cable) -> tuple[int, int] | None:
        """Return the two nodes of a cable, or None after noting a fault."""
        a, b = self._boards_at(cable.from_end), self._boards_at(cable.to_end)
        board_to_board = cable.from_end in self.board_node and cable.to_end in self.board_node
        common = [x for x in a if x in b]
        if board_to_board or len(common) == 1:
            return (
                self._end_node(cable.from_end, common[0] if common else cable.from_end),
                self._end_node(cable.to_end, common[0] if common else cable.to_end),
            )
        second_feed = self._second_feed(cable, a, b)
        if second_feed is not None:
            return second_feed
        self.faults.append(
            Issue(
                code="ends-do-not-meet",
                sheet=cable.cell.partition("!")[0],
                cell=cable.cell.partition("!")[2],
                found=f"cable {cable.name} joins {cable.from_end} ({_on(a)}) and {cable.to_end} ({_on(b)})",
                wanted="give two ends that stand on one board, or two boards",
            )
        )
        return None

    def _second_feed(self, cable: Cable, a: tuple[str, ...], b: tuple[str, ...]) -> tuple[int, int] | None:
        """Return the nodes of a cable from another board than the consumer's own, where Transfers says so."""
        for end, other in ((cable.from_end, cable.to_end), (cable.to_end, cable.from_end)):
            named = {
                s for t in self.plant.transfers if t.target == end for s in (t.normal_supply, t.other_supply)
            }
            at_board = other in self.board_node and (other in named or cable.name in named)
            if end in self.home and at_board:
                pair = {end: self._end_node(end, self.home[end]), other: self.board_node[other]}
                return pair[cable.from_end], pair[cable.to_end]
        return None

    def _boards_at(self, end: str) -> tuple[str, ...]:
        """Return the boards that an end of a cable stands on: one for each winding of a transformer."""
        if end in self.board_node:
            return (end,)
        if end in self.windings:
            return tuple(self.windings[end].values())
        return (self.home[end],) if end in self.home else ()

    def _end_node(self, end: str, board: str) -> int:
        if end in self.board_node:
            return self.board_node[end]
        if end in self.windings:
            side = next(winding for winding, at in self.windings[end].items() if at == board)
            return self._terminal(side, end, board, side)
        return self._terminal("terminal", end, board, "")

    def _add_transformers(self) -> None:
        for i, t in enumerate(self.plant.transformers):
            self.branches.append(
                Branch(
                    kind="transformer",
                    name=t.name,
                    winding="",
                    index=i,
                    from_node=self.side_node.get((t.name, "primary"), self.board_node[t.from_board]),
                    to_node=self.side_node.get((t.name, "secondary"), self.board_node[t.to_board]),
                    from_end=t.from_board,
                    to_end=t.to_board,
                    boards=(t.from_board, t.to_board),
                    load="",
                    without_impedance=False,
                )
            )

    def _add_three_winding(self) -> None:
        for i, t in enumerate(self.plant.three_winding):
            star = self._new_node("star", t.name, t.primary_board)
            for winding, board in self.windings[t.name].items():
                terminal = self.side_node.get((t.name, winding), self.board_node[board])
                self.branches.append(
                    Branch(
                        kind="three-winding transformer",
                        name=t.name,
                        winding=winding,  # type: ignore[arg-type]
                        index=i,
                        from_node=terminal if winding == "primary" else star,
                        to_node=star if winding == "primary" else terminal,
                        from_end=board if winding == "primary" else t.name,
                        to_end=t.name if winding == "primary" else board,
                        boards=(t.primary_board, board),
                        load="",
                        without_impedance=False,
                    )
                )

    def _add_joints(self) -> None:
        joints = [("tie", i, t.name, t.board_a, t.board_b, t) for i, t in enumerate(self.plant.ties)] + [
            ("reactor", i, r.name, r.from_board, r.to_board, r) for i, r in enumerate(self.plant.reactors)
        ]
        for kind, i, name, a, b, item in joints:
            self.branches.append(
                Branch(
                    kind=kind,  # type: ignore[arg-type]
                    name=name,
                    winding="",
                    index=i,
                    from_node=self.board_node[a],
                    to_node=self.board_node[b],
                    from_end=a,
                    to_end=b,
                    boards=(a, b),
                    load="",
                    without_impedance=item.x_ohm == 0.0 and item.r_ohm == 0.0,
                )
            )

    def _add_cable(self, index: int, cable: Cable, pair: tuple[int, int]) -> None:
        consumers = [end for end in (cable.to_end, cable.from_end) if end in self.loads]
        self.branches.append(
            Branch(
                kind="cable",
                name=cable.name,
                winding="",
                index=index,
                from_node=pair[0],
                to_node=pair[1],
                from_end=cable.from_end,
                to_end=cable.to_end,
                boards=(self.nodes[pair[0]][2], self.nodes[pair[1]][2]),
                load=consumers[0] if consumers else "",
                without_impedance=False,
            )
        )

    def _levels(self) -> list[float]:
        """Return the voltage base of every node: that of the first board joined without a transformer."""
        group = UnionFind(len(self.nodes))
        for b in self.branches:
            if b.kind in ("cable", "tie", "reactor") or b.winding == "primary":
                group.join(b.from_node, b.to_node)
        nominal = {x.name: x.u_nominal_v for x in self.plant.boards}
        first: dict[int, str] = {}
        for name, node in self.board_node.items():
            other = first.setdefault(group.root(node), name)
            if abs(nominal[name] / nominal[other] - 1.0) > LARGEST_STEP_AT_ONE_LEVEL:
                self._refuse_levels(name, other, nominal)
        own = [nominal[board] for _, _, board in self.nodes]
        return [
            nominal[first[group.root(i)]] if group.root(i) in first else own[i]
            for i in range(len(self.nodes))
        ]

    def _refuse_levels(self, name: str, other: str, nominal: Mapping[str, float]) -> None:
        self.faults.append(
            Issue(
                code="two-voltages",
                sheet="Boards",
                cell=next(b.cell for b in self.plant.boards if b.name == name).partition("!")[2],
                found=f"{name} is {nominal[name]:g} V and {other} {nominal[other]:g} V, yet a tie, reactor "
                "or cable joins them",
                wanted="give one voltage, or join them by a transformer",
            )
        )


def _windings(plant: Plant) -> dict[str, dict[str, str]]:
    """Return the board on each winding of every transformer."""
    two: dict[str, dict[str, str]] = {
        t.name: {"primary": t.from_board, "secondary": t.to_board} for t in plant.transformers
    }
    three = {
        t.name: {"primary": t.primary_board, "secondary": t.secondary_board, "tertiary": t.tertiary_board}
        for t in plant.three_winding
    }
    return two | three


def _boards_of_equipment(plant: Plant) -> dict[str, str]:
    kinds: Iterable[Iterable[object]] = (
        plant.gensets,
        plant.shore_supplies,
        plant.converter_supplies,
        plant.synchronous_motors,
        plant.loads,
    )
    return {item.name: item.board for kind in kinds for item in kind}  # type: ignore[attr-defined]


def _on(boards: tuple[str, ...]) -> str:
    return "on " + " and ".join(boards) if boards else "not a board, source, transformer or load"
