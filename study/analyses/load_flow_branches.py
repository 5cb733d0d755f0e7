"""Cables, transformers, ties and reactors of a mode: flow, current against rating, losses, voltage drop."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

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
from study.network.solution import ModeSolution
from study.network.topology import Branch
from study.results.arrays import read_only
from study.results.load_flow import BranchState

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Row:
    """One piece of equipment: its branch, or the three legs of a three-winding transformer."""

    name: str
    kind: str
    from_end: str
    to_end: str
    s_from: complex
    s_to: complex
    current_a: float
    rating_a: float
    drop_pu: float
    determined: bool


def branch_state(s: ModeSolution) -> BranchState:
    """Return the closed branches of a solved mode; empty where it is not solved.

    Parameters
    ----------
    s : ModeSolution
        Of the mode.

    Returns
    -------
    BranchState
        In the order transformers, three-winding transformers, ties, reactors, cables.
    """
    rows = _rows(s)
    s_from, s_to = np.array([r.s_from for r in rows], complex), np.array([r.s_to for r in rows], complex)
    current, rating = np.array([r.current_a for r in rows]), np.array([r.rating_a for r in rows])
    loss = s_from + s_to
    return BranchState(
        names=tuple(r.name for r in rows),
        kinds=tuple(r.kind for r in rows),
        from_ends=tuple(r.from_end for r in rows),
        to_ends=tuple(r.to_end for r in rows),
        p_from_kw=read_only(s_from.real),
        q_from_kvar=read_only(s_from.imag),
        p_to_kw=read_only(s_to.real),
        q_to_kvar=read_only(s_to.imag),
        current_a=read_only(current),
        rating_a=read_only(rating),
        loading=read_only(current / rating),
        loss_kw=read_only(loss.real),
        loss_kvar=read_only(loss.imag),
        drop_pu=read_only(np.array([r.drop_pu for r in rows])),
        determined=read_only(np.array([r.determined for r in rows], bool), np.bool_),
    )


def _rows(s: ModeSolution) -> list[_Row]:
    branches, plant = s.at.network.topology.branches, s.at.network.plant
    rows: list[_Row] = []
    legs: dict[str, list[int]] = {}
    for n, k in enumerate(s.branch):
        branch = branches[k]
        if branch.winding:
            legs.setdefault(branch.name, []).append(n)
        else:
            rows.append(_plain_row(s, n, branch))
    for name, places in legs.items():
        item = next(t for t in plant.three_winding if t.name == name)
        rows.append(_three_winding_row(s, places, item))
    return rows


def _plain_row(s: ModeSolution, n: int, branch: Branch) -> _Row:
    plant = s.at.network.plant
    rating = np.nan
    match branch.kind:
        case "cable":
            rating = cable_rating_a(plant.cables[branch.index])
        case "tie":
            rating = plant.ties[branch.index].rated_current_a or np.nan
        case "reactor":
            rating = plant.reactors[branch.index].rated_current_a
        case "transformer":
            t = plant.transformers[branch.index]
            rating = 1000.0 * t.s_rated_kva * t.units / (3.0**0.5 * t.u_primary_v)
    larger = s.i_from_a[n] if branch.kind == "transformer" else max(s.i_from_a[n], s.i_to_a[n])
    return _Row(
        name=branch.name,
        kind=branch.kind,
        from_end=branch.from_end,
        to_end=branch.to_end,
        s_from=complex(s.s_from_kva[n]),
        s_to=complex(s.s_to_kva[n]),
        current_a=float(larger) if s.determined[n] else np.nan,
        rating_a=float(rating),
        drop_pu=_drop(s, branch),
        determined=bool(s.determined[n]),
    )


def _three_winding_row(s: ModeSolution, places: Sequence[int], t: ThreeWindingTransformer) -> _Row:
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
    return _Row(
        name=t.name,
        kind="three-winding transformer",
        from_end=t.primary_board,
        to_end=f"{t.secondary_board}, {t.tertiary_board}",
        s_from=complex(s.s_from_kva[list(places)].sum()),
        s_to=complex(s.s_to_kva[list(places)].sum()),
        current_a=current,
        rating_a=rating,
        drop_pu=np.nan,
        determined=True,
    )


def _drop(s: ModeSolution, branch: Branch) -> float:
    """Return the fall of voltage from end to end, of the base voltage of each end."""
    u_from, u_to = (abs(s.node_v_pu[n]) for n in (branch.from_node, branch.to_node))
    falls = u_from - u_to
    return float(abs(falls) if branch.kind != "transformer" else falls)


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


def rated_cables(plant: Plant) -> dict[str, float]:
    """Return the rating of every cable by its name [A]; NaN where there is none."""
    return {c.name: cable_rating_a(c) for c in plant.cables}
