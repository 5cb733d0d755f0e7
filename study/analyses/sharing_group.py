"""The sets of one island that run in parallel, and who of them takes part in sharing."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from study.analyses.sharing_options import SharingOptions
from study.formulas.sharing import active_sharing_limit, reactive_sharing_limit
from study.network.batch import BatchSolution, solve_batch
from study.network.network import ModeNetwork
from study.network.settings import Settings
from study.network.sources import Law, Source, Speed
from study.results.arrays import BoolArray, FloatArray, IntArray

# laws under which a regulator holds a voltage that can be set
COMPENSATED = (Law.PHASOR, Law.REACTIVE_CURRENT, Law.CROSS_CURRENT)


@dataclass(frozen=True, slots=True, kw_only=True)
class Group:
    """The sets of one island, in the mode's network.

    ``places`` [set] are the sets' positions among the mode's sources, ``loads`` [load] marks the consumers of
    the island. ``shares_kw`` and ``shares_kvar`` [set] are False for a set that runs at a set power, or whose
    kvar is controlled: it takes no part in sharing.
    """

    at: ModeNetwork
    island: int
    places: IntArray
    loads: BoolArray
    p_kw: FloatArray
    q_kvar: FloatArray
    sources: tuple[Source, ...]
    p_rated_kw: FloatArray
    q_rated_kvar: FloatArray
    s_rated_kva: FloatArray
    shares_kw: BoolArray
    shares_kvar: BoolArray

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the sets."""
        return tuple(s.name for s in self.sources)

    @property
    def beside(self) -> tuple[Source, ...]:
        """The island's other sources."""
        sets = set(self.places.tolist())
        return tuple(s for k, s in enumerate(self.at.sources) if s.island == self.island and k not in sets)


def groups_of(at: ModeNetwork, p_kw: FloatArray, q_kvar: FloatArray) -> list[Group]:
    """Return the islands of a mode in which two or more sets run, without those on a shore supply.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    p_kw, q_kvar : ndarray, shape (load,)
        Power of the consumers.

    Returns
    -------
    list of Group
        In the order of the islands.
    """
    found = []
    load_island = np.array(at.view.island, np.int64)[np.array(at.view.load_node, np.int64)]
    for n in range(len(at.view.islands)):
        here = [k for k, s in enumerate(at.sources) if s.island == n]
        sets = [k for k in here if at.sources[k].kind == "genset"]
        on_shore = any(at.sources[k].speed == Speed.SHORE for k in here)
        if len(sets) > 1 and not on_shore:
            loads = (load_island == n) & (at.load_bus >= 0)
            # Islands have nothing to do with each other: an overload elsewhere must not hide this one.
            p, q = np.where(loads, p_kw, 0.0), np.where(loads, q_kvar, 0.0)
            found.append(group_of(at, n, sets, loads, p_kw=p, q_kvar=q))
    return found


def group_of(
    at: ModeNetwork,
    island: int,
    places: list[int],
    loads: BoolArray,
    *,
    p_kw: FloatArray,
    q_kvar: FloatArray,
) -> Group:
    """Return the group of some sources of a mode.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    island : int
        Number of the island.
    places : list of int
        Positions of the sets among the mode's sources.
    loads : ndarray of bool, shape (load,)
        Consumers of the island.
    p_kw, q_kvar : ndarray, shape (load,)
        Power of the consumers; 0 outside the island.

    Returns
    -------
    Group
        With the sets' ratings.
    """
    sources = tuple(at.sources[k] for k in places)
    return Group(
        at=at,
        island=island,
        places=np.array(places, np.int64),
        loads=loads,
        p_kw=p_kw,
        q_kvar=q_kvar,
        sources=sources,
        p_rated_kw=np.array([s.p_rated_kw for s in sources]),
        q_rated_kvar=np.array([s.q_rated_kvar for s in sources]),
        s_rated_kva=np.array([s.s_rated_kva for s in sources]),
        shares_kw=np.array([s.speed != Speed.FIXED for s in sources], bool),
        shares_kvar=np.array([s.law != Law.REACTIVE_POWER and s.q_rated_kvar > 0.0 for s in sources], bool),
    )


def solve_scaled(group: Group, scale: FloatArray, settings: Settings | None = None) -> BatchSolution:
    """Solve the mode with the island's consumers scaled, everything else left alone.

    Parameters
    ----------
    group : Group
        The island.
    scale : ndarray, shape (scenario,)
        Factor on every consumer of the island.
    settings : Settings, optional
        Trims of the sources.

    Returns
    -------
    BatchSolution
        One row for each factor.
    """
    factor = np.where(group.loads, scale[:, None], 1.0)
    return solve_batch(group.at, factor * group.p_kw, factor * group.q_kvar, settings)


def tolerances(group: Group, options: SharingOptions) -> tuple[FloatArray, FloatArray]:
    """Return how far each set may be from its share, kW and kvar, both [set]."""
    kw = active_sharing_limit(group.p_rated_kw, of_largest=options.kw_of_largest, of_own=options.kw_of_own)
    rated = group.q_rated_kvar[group.q_rated_kvar > 0.0]
    kvar = 0.0
    if rated.size:
        kvar = reactive_sharing_limit(
            rated, of_largest=options.kvar_of_largest, of_smallest=options.kvar_of_smallest
        )
    return kw, np.full(len(group.sources), kvar)


def beyond_rating(group: Group, own: BatchSolution) -> bool:
    """Return whether the mode's own load, the first row, is more than the sets can carry together."""
    p, q = own.source_p_kw[0, group.places].sum(), own.source_q_kvar[0, group.places].sum()
    within = p <= group.p_rated_kw.sum() and np.hypot(p, q) <= group.s_rated_kva.sum()
    return not (own.solved[0] and within)


def kw_off(group: Group, p_kw: FloatArray) -> FloatArray:
    """Return how far each set's kW are from its share, [..., set]; linear in the kW."""
    return _off(p_kw, group.p_rated_kw, group.shares_kw)


def kvar_off(group: Group, q_kvar: FloatArray) -> FloatArray:
    """Return how far each set's kvar are from its share, [..., set]; linear in the kvar."""
    return _off(q_kvar, group.q_rated_kvar, group.shares_kvar)


def _off(carried: FloatArray, rated: FloatArray, takes_part: BoolArray) -> FloatArray:
    weight = rated * takes_part
    if not takes_part.any():
        return np.zeros(carried.shape)
    return np.asarray(takes_part * carried - (carried @ takes_part)[..., None] * (weight / weight.sum()))
