"""Cables, transformers, ties and reactors of a mode: flow, current against rating, losses, voltage drop."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.cable_ratings import (
    CORE_FACTOR,
    aluminium_factor,
    ambient_factor,
    base_current,
    bunching_factor,
    duty_factor,
)
from study.model.branches import Cable, ThreeWindingTransformer
from study.model.plant import Plant
from study.network.network import Network
from study.network.solution import ModeSolution
from study.network.topology import Branch
from study.results.arrays import read_only
from study.results.load_flow import BranchState

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class BranchTable:
    """What the modes share of a plant's branches, [branch] in the topology's order: names, ends and ratings.

    ``plain`` is False for the legs of three-winding transformers, of which ``windings`` holds the
    equipment by name.
    """

    names: NDArray[np.object_]
    kinds: NDArray[np.object_]
    from_ends: NDArray[np.object_]
    to_ends: NDArray[np.object_]
    from_node: IntArray
    to_node: IntArray
    rating_a: FloatArray
    transformer: BoolArray
    plain: BoolArray
    windings: Mapping[str, ThreeWindingTransformer]


def branch_table(network: Network) -> BranchTable:
    """Return what the modes of a plant share of its branches.

    Parameters
    ----------
    network : Network
        Of the plant.

    Returns
    -------
    BranchTable
        Serves every mode.
    """
    branches, plant = network.topology.branches, network.plant
    return BranchTable(
        names=np.array([b.name for b in branches], object),
        kinds=np.array([b.kind for b in branches], object),
        from_ends=np.array([b.from_end for b in branches], object),
        to_ends=np.array([b.to_end for b in branches], object),
        from_node=network.branches.from_node,
        to_node=network.branches.to_node,
        rating_a=np.array([_rating_a(plant, b) for b in branches], float),
        transformer=np.array([b.kind == "transformer" for b in branches], bool),
        plain=np.array([not b.winding for b in branches], bool),
        windings={t.name: t for t in plant.three_winding},
    )


def _rating_a(plant: Plant, branch: Branch) -> float:
    """Return the rated current, a transformer's on its primary side; NaN where there is none."""
    match branch.kind:
        case "cable":
            return cable_rating_a(plant.cables[branch.index])
        case "tie":
            return plant.ties[branch.index].rated_current_a or float("nan")
        case "reactor":
            return plant.reactors[branch.index].rated_current_a
        case "transformer":
            t = plant.transformers[branch.index]
            return float(1000.0 * t.s_rated_kva * t.units / (3.0**0.5 * t.u_primary_v))
    return float("nan")


def branch_state(s: ModeSolution, table: BranchTable) -> BranchState:
    """Return the closed branches of a solved mode; empty where it is not solved.

    Parameters
    ----------
    s : ModeSolution
        Of the mode.
    table : BranchTable
        Of the plant.

    Returns
    -------
    BranchState
        In the topology's order, three-winding transformers last.
    """
    n = np.flatnonzero(table.plain[s.branch])
    k = s.branch[n]
    windings = _three_winding_rows(s, table)
    current = np.where(table.transformer[k], s.i_from_a[n], np.maximum(s.i_from_a[n], s.i_to_a[n]))
    falls = np.abs(s.node_v_pu[table.from_node[k]]) - np.abs(s.node_v_pu[table.to_node[k]])

    def joined(own: ArrayLike, name: str) -> NDArray[Any]:
        return np.concatenate([np.asarray(own), np.array([getattr(r, name) for r in windings])])

    s_from, s_to = joined(s.s_from_kva[n], "s_from"), joined(s.s_to_kva[n], "s_to")
    amperes = joined(np.where(s.determined[n], current, np.nan), "current_a")
    rating = joined(table.rating_a[k], "rating_a")
    loss = s_from + s_to
    none = np.full(len(windings), np.nan)
    return BranchState(
        names=(*table.names[k], *(r.item.name for r in windings)),
        kinds=(*table.kinds[k], *("three-winding transformer" for _ in windings)),
        from_ends=(*table.from_ends[k], *(r.item.primary_board for r in windings)),
        to_ends=(
            *table.to_ends[k],
            *(f"{r.item.secondary_board}, {r.item.tertiary_board}" for r in windings),
        ),
        p_from_kw=read_only(s_from.real),
        q_from_kvar=read_only(s_from.imag),
        p_to_kw=read_only(s_to.real),
        q_to_kvar=read_only(s_to.imag),
        current_a=read_only(amperes),
        rating_a=read_only(rating),
        loading=read_only(amperes / rating),
        loss_kw=read_only(loss.real),
        loss_kvar=read_only(loss.imag),
        drop_pu=read_only(np.concatenate([np.where(table.transformer[k], falls, np.abs(falls)), none])),
        determined=read_only(np.concatenate([s.determined[n], np.ones(len(windings), bool)]), np.bool_),
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _ThreeWinding:
    """A three-winding transformer: its closed legs together."""

    item: ThreeWindingTransformer
    s_from: complex
    s_to: complex
    current_a: float
    rating_a: float


def _three_winding_rows(s: ModeSolution, table: BranchTable) -> list[_ThreeWinding]:
    legs: dict[str, list[int]] = {}
    for n in np.flatnonzero(~table.plain[s.branch]):
        legs.setdefault(table.names[s.branch[n]], []).append(int(n))
    return [_three_winding_row(s, places, table.windings[name]) for name, places in legs.items()]


def _three_winding_row(s: ModeSolution, places: Sequence[int], t: ThreeWindingTransformer) -> _ThreeWinding:
    """Return one row for the legs that are closed: the winding with the highest loading stands for all."""
    branches = s.at.network.topology.branches
    rated = {
        "primary": (t.s_primary_kva, t.u_primary_v),
        "secondary": (t.s_secondary_kva, t.u_secondary_v),
        "tertiary": (t.s_tertiary_kva, t.u_tertiary_v),
    }
    pairs = []
    for n in places:
        winding = branches[s.branch[n]].winding
        kva, u = rated[winding]
        current = s.i_from_a[n] if winding == "primary" else s.i_to_a[n]
        pairs.append((float(current), 1000.0 * kva / (3.0**0.5 * u)))
    current, rating = max(pairs, key=lambda pair: pair[0] / pair[1])
    return _ThreeWinding(
        item=t,
        s_from=complex(s.s_from_kva[list(places)].sum()),
        s_to=complex(s.s_to_kva[list(places)].sum()),
        current_a=current,
        rating_a=rating,
    )


def cable_rating_a(cable: Cable) -> float:
    """Return the current that a run may carry where it lies, all cables in parallel together.

    The maker's value as installed where given. Otherwise the base current by section and conductor
    temperature, times the factors for cores, conductor, ambient temperature, bunching and duty. Short-time
    duty without an overall diameter counts as continuous.

    Source: IEC 60092-352, annex B; from memory (see `formulas.cable_ratings`).

    Parameters
    ----------
    cable : Cable
        The run.

    Returns
    -------
    float
        Rating [A]; NaN where neither the standard nor the maker rates it.
    """
    if cable.rating_a is not None:
        return cable.rating_a * cable.runs
    try:
        base = base_current(cable.section_mm2, cable.conductor_temperature_degc)
    except ValueError:  # outside the standard's tables: not rated, and reported as such
        return float("nan")
    duty = 1.0 if cable.overall_diameter_mm is None else duty_factor(cable.duty, cable.overall_diameter_mm)
    metal = 1.0 if cable.conductor == "copper" else aluminium_factor()
    ambient = float(ambient_factor(cable.ambient_temperature_degc, cable.conductor_temperature_degc))
    factors = CORE_FACTOR[cable.cores] * metal * ambient * bunching_factor(cable.bunched) * duty
    return base * factors * cable.further_derating * cable.runs
