"""Rings that transformers of different phase shift close: no operating state, whatever the load flow says."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

from study.model.plant import Plant
from study.network.topology import Branch, Topology


def vector_group_clashes(
    plant: Plant, topology: Topology, closed: Sequence[bool], root: Sequence[int]
) -> dict[int, str]:
    """Return a sentence for every island in which transformers of different vector group close a ring.

    Parameters
    ----------
    plant : Plant
        Holds the vector groups.
    topology : Topology
        Nodes and branches.
    closed : sequence of bool
        One for each branch.
    root : sequence of int
        Island's root node for each node.

    Returns
    -------
    dict of int to str
        Keyed by the island's root.
    """
    around: dict[int, list[tuple[int, int, str]]] = {}
    for branch, is_closed in zip(topology.branches, closed, strict=True):
        if is_closed:
            shift = _hours(plant, branch)
            around.setdefault(branch.from_node, []).append((branch.to_node, shift, branch.name))
            around.setdefault(branch.to_node, []).append((branch.from_node, -shift, branch.name))
    hours: dict[int, int] = {}
    clashes: dict[int, str] = {}
    for start in around:
        if start not in hours:
            hours[start] = 0
            for name in _walk(start, around, hours):
                clashes[root[start]] = (
                    f"transformers of different vector group close a ring through {name}: that is a standing "
                    "short-circuit; open one of them."
                )
    return clashes


def _walk(start: int, around: Mapping[int, list[tuple[int, int, str]]], hours: dict[int, int]) -> list[str]:
    """Give every node of an island its clock hour; return the branches that do not agree with it."""
    wrong: list[str] = []
    stack = [start]
    while stack:
        node = stack.pop()
        for neighbour, shift, name in around[node]:
            hour = (hours[node] + shift) % 12
            if neighbour not in hours:
                hours[neighbour] = hour
                stack.append(neighbour)
            elif hours[neighbour] != hour:
                wrong.append(name)
    return wrong


def _hours(plant: Plant, branch: Branch) -> int:
    """Return the lag of the `to` end in twelfths of a turn, from the vector group (IEC 60076-1)."""
    if branch.kind == "transformer":
        return _numbers(plant.transformers[branch.index].vector_group)[0]
    if branch.winding in ("secondary", "tertiary"):
        numbers = _numbers(plant.three_winding[branch.index].vector_group)
        return numbers[0] if branch.winding == "secondary" else numbers[-1]
    return 0


def _numbers(vector_group: str) -> list[int]:
    return [int(x) for x in re.findall(r"\d+", vector_group)] or [0]
