"""kW and kvar of sets in parallel over the load, as set and as trimmed at 75 % load."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from study.formulas.load_compensation import compensated_voltage, compensated_voltage_reactive_current
from study.formulas.sharing import proportional_share
from study.network.batch import BatchSolution, Settings, solve_batch
from study.network.network import ModeNetwork
from study.network.sources import Law, Source, Speed
from study.results.arrays import BoolArray, FloatArray, IntArray, read_only
from study.results.sharing import SharingCurve

LOADS_PU = np.linspace(0.20, 1.00, 17)
_TRIM_AT = 11  # 75 % load, where the rules have the sets tuned
_TRIMS = 4


@dataclass(frozen=True, slots=True, kw_only=True)
class Group:
    """The sets of one island, in the mode's network.

    ``places`` are the sets' positions among the mode's sources. ``shares_kw`` and ``shares_kvar`` [set] are
    False for a set that runs at a set power, or whose kvar is controlled: it takes no part in sharing.
    """

    at: ModeNetwork
    island: int
    places: IntArray
    loads: BoolArray
    p_kw: FloatArray
    q_kvar: FloatArray

    @property
    def sources(self) -> tuple[Source, ...]:
        """The sets."""
        return tuple(self.at.sources[k] for k in self.places)

    @property
    def p_rated_kw(self) -> FloatArray:
        """Rated kW of the sets [set]."""
        return np.array([s.p_rated_kw for s in self.sources])

    @property
    def q_rated_kvar(self) -> FloatArray:
        """Rated kvar of the sets [set]."""
        return np.array([s.q_rated_kvar for s in self.sources])

    @property
    def shares_kw(self) -> BoolArray:
        """Whether each set takes part in kW sharing [set]."""
        return np.array([s.speed != Speed.FIXED for s in self.sources])

    @property
    def shares_kvar(self) -> BoolArray:
        """Whether each set takes part in kvar sharing [set]."""
        return np.array([s.law != Law.REACTIVE_POWER for s in self.sources])


def solve_scaled(group: Group, scale: FloatArray, settings: Settings | None = None) -> BatchSolution:
    """Solve the mode with the island's loads scaled, everything else left alone.

    Parameters
    ----------
    group : Group
        The island.
    scale : ndarray, shape (scenario,)
        Factor on every load of the island.
    settings : Settings, optional
        Trims of the sources.

    Returns
    -------
    BatchSolution
        One row for each factor.
    """
    factor = np.where(group.loads, scale[:, None], 1.0)
    return solve_batch(group.at, factor * group.p_kw, factor * group.q_kvar, settings)


def scale_to(
    group: Group, load_pu: FloatArray, settings: Settings | None = None
) -> tuple[FloatArray, BatchSolution]:
    """Return the factors on the island's loads that put a given load on its sets, and the solution there.

    One correction for the losses: what remains is their change over that correction.

    Parameters
    ----------
    group : Group
        The island.
    load_pu : ndarray, shape (scenario,)
        Wanted kW of all sets over the sum of their rated kW.
    settings : Settings, optional
        Trims of the sources.

    Returns
    -------
    scale : ndarray, shape (scenario,)
        Factors.
    solution : BatchSolution
        At those factors.
    """
    wanted = load_pu * group.p_rated_kw.sum()
    of_loads = float(group.p_kw[group.loads].sum())
    scale = wanted / of_loads
    solution = solve_scaled(group, scale, settings)
    total = solution.source_p_kw[:, group.places].sum(axis=1)
    better = scale * np.where(total > 0.0, wanted / np.where(total > 0.0, total, 1.0), 1.0)
    scale = np.where(np.isfinite(better), better, scale)
    return scale, solve_scaled(group, scale, settings)


def share_of(total: FloatArray, rated: FloatArray, actual: FloatArray, takes_part: BoolArray) -> FloatArray:
    """Return each set's proportional share; a set that takes no part keeps what it carries.

    Parameters
    ----------
    total : ndarray, shape (...)
        Power of all sets.
    rated : ndarray, shape (set,)
        Ratings.
    actual : ndarray, shape (..., set)
        What each set carries.
    takes_part : ndarray of bool, shape (set,)
        Sets that share.

    Returns
    -------
    ndarray, shape (..., set)
        Shares, in the unit of `total`.
    """
    if not takes_part.any():
        return actual
    rest = total - actual[..., ~takes_part].sum(axis=-1)
    share = np.array(actual)
    share[..., takes_part] = proportional_share(rest, rated[takes_part])
    return share


def sharing_curve(group: Group, solution: BatchSolution, *, trimmed: bool) -> SharingCurve:
    """Return kW and kvar of each set from 20 to 100 % of the combined rating.

    Parameters
    ----------
    group : Group
        The island.
    solution : BatchSolution
        From `scale_to` over `LOADS_PU`.
    trimmed : bool
        What to call the curve.

    Returns
    -------
    SharingCurve
        At the mode's own power factor, losses included.
    """
    p, q = solution.source_p_kw[:, group.places], solution.source_q_kvar[:, group.places]
    p_total, q_total = p.sum(axis=1), q.sum(axis=1)
    board = group.sources[0].node
    u_v = np.abs(solution.v_bus_pu[:, group.at.bus_of_node[board]]) * group.at.network.u_base_v[board]
    return SharingCurve(
        trimmed=trimmed,
        load_pu=read_only(LOADS_PU),
        p_total_kw=read_only(p_total),
        q_total_kvar=read_only(q_total),
        p_kw=read_only(p),
        q_kvar=read_only(q),
        dp_kw=read_only(p - share_of(p_total, group.p_rated_kw, p, group.shares_kw)),
        dq_kvar=read_only(q - share_of(q_total, group.q_rated_kvar, q, group.shares_kvar)),
        u_pu=read_only(u_v / group.sources[0].u_rated_v),
        f_hz=read_only(solution.frequency_pu[:, group.island] * group.at.network.plant.project.f_rated_hz),
        solved=read_only(solution.solved, bool),
    )


def trimmed_settings(group: Group, scale: FloatArray, as_set: BatchSolution) -> Settings | None:
    """Return the set-points that make the sets share in proportion at 75 % of their combined rating.

    The no-load frequency of a set with speed droop becomes ``f + droop P*/Pr``; the no-load voltage becomes
    the compensated voltage at its terminals with its share of kW and kvar, found by repetition since the
    sets' terminals move a little with it. The bus keeps the voltage and frequency that it has as set.

    Source: class rules tune the sets at 75 % load before the sharing test (ClassNK 2.4.14-3); IEEE 421.5
    load compensation for the voltage.

    Parameters
    ----------
    group : Group
        The island.
    scale : ndarray, shape (load,)
        Factors of `scale_to` over `LOADS_PU`, as set.
    as_set : BatchSolution
        The solution there.

    Returns
    -------
    Settings or None
        Trims for every source of the mode; None where there is no solution at 75 % load.
    """
    sources = group.at.sources
    v_ref = np.array([s.v_ref_pu for s in sources])
    f_ref = np.array([s.f_no_load_pu for s in sources])
    solution, row = as_set, _TRIM_AT
    u_wanted = float(solution.source_u_pu[row, group.places].mean())
    settings = None
    for _ in range(_TRIMS):
        if not solution.solved[row]:
            return None
        _trim_speed(group, solution, row, f_ref)
        _trim_voltage(group, solution, row, v_ref, u_wanted)
        settings = Settings(no_load_voltage_pu=v_ref[None, :], no_load_frequency_pu=f_ref[None, :])
        solution, row = solve_scaled(group, scale[[_TRIM_AT]], settings), 0
    return settings


def _trim_speed(group: Group, solution: BatchSolution, row: int, f_ref: FloatArray) -> None:
    p = solution.source_p_kw[row, group.places]
    share = share_of(p.sum(), group.p_rated_kw, p, group.shares_kw)
    f = float(solution.frequency_pu[row, group.island])
    for k, s, wanted in zip(group.places, group.sources, share, strict=True):
        if s.speed == Speed.DROOP:
            f_ref[k] = f + s.speed_droop_pu * wanted / s.p_rated_kw


def _trim_voltage(
    group: Group, solution: BatchSolution, row: int, v_ref: FloatArray, u_wanted: float
) -> None:
    p = solution.source_p_kw[row, group.places]
    q = solution.source_q_kvar[row, group.places]
    p_share = share_of(p.sum(), group.p_rated_kw, p, group.shares_kw)
    q_share = share_of(q.sum(), group.q_rated_kvar, q, group.shares_kvar)
    u = solution.source_u_pu[row, group.places]
    u = u + u_wanted - u.mean()
    for n, (k, s) in enumerate(zip(group.places, group.sources, strict=True)):
        at = (p_share[n] / s.s_rated_kva, q_share[n] / s.s_rated_kva)
        if s.law == Law.PHASOR and s.xc_pu > 0.0:
            v_ref[k] = compensated_voltage(u[n], at[0], at[1], 0.0, s.xc_pu)
        elif s.law == Law.REACTIVE_CURRENT:
            v_ref[k] = compensated_voltage_reactive_current(u[n], at[1], s.xc_pu)


def with_trim(
    settings: Settings, name: str, place: int, value: float, sources: tuple[Source, ...]
) -> Settings:
    """Return settings in which one trim of one source has another value.

    Parameters
    ----------
    settings : Settings
        To start from.
    name : str
        Field of `Settings`.
    place : int
        Position of the source among the mode's sources.
    value : float
        The new value, per unit.
    sources : tuple of Source
        The mode's sources, whose own values stand where `settings` has none.

    Returns
    -------
    Settings
        A copy.
    """
    own = {
        "no_load_voltage_pu": "v_ref_pu",
        "voltage_droop_pu": "droop_pu",
        "no_load_frequency_pu": "f_no_load_pu",
        "speed_droop_pu": "speed_droop_pu",
    }[name]
    known: FloatArray | None = getattr(settings, name)
    values = np.array([[getattr(s, own) for s in sources]]) if known is None else known.copy()
    values[:, place] = value
    return replace(settings, **{name: values})
