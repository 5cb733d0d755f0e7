"""How far one setting of one set may be off before a tolerance, a voltage limit or a rating is broken.

The margins are found on one ideal bus in closed form and shifted by what the network's own solution differs
from it as set; that leaves an error of second order in the cables between the sets.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from study.analyses.sharing_curves import Group
from study.analyses.sharing_options import SharingOptions
from study.formulas.load_compensation import reactance_from_droop
from study.formulas.sharing import (
    active_sharing_limit,
    proportional_share,
    reactive_sharing_limit,
    share_reactive,
    share_straight,
)
from study.network.sources import Law, Source, Speed
from study.results.arrays import FloatArray
from study.results.sharing import AdjustingMargin, SharingCurve

# how far each setting is moved, in pu of rated voltage or frequency
RANGES = {
    "no-load voltage": (-0.06, 0.06),
    "voltage droop": (-0.10, 0.10),
    "no-load frequency": (-0.05, 0.05),
    "speed droop": (-0.08, 0.08),
}
LEAST_DROOP_PU = 0.002
_STEPS = 33


@dataclass(frozen=True, slots=True, kw_only=True)
class OperatingLoads:
    """The loads at which a setting is tried: 20 %, 100 % and the mode's own, and the network's answer there.

    Arrays [load, set]; totals and voltage [load]. The last load is the mode's own.
    """

    p_kw: FloatArray
    q_kvar: FloatArray
    u_pu: FloatArray


def operating_loads(
    curve: SharingCurve, p_own_kw: FloatArray, q_own_kvar: FloatArray, u_own_pu: float
) -> OperatingLoads:
    """Return the two ends of a sharing curve and the mode's own load as one set of loads.

    Parameters
    ----------
    curve : SharingCurve
        As set.
    p_own_kw, q_own_kvar : ndarray, shape (set,)
        At the mode's own load.
    u_own_pu : float
        Voltage there.

    Returns
    -------
    OperatingLoads
        Three loads, fewer where the network has no solution.
    """
    ends = [k for k in (0, -1) if curve.solved[k]]
    return OperatingLoads(
        p_kw=np.vstack([*(curve.p_kw[k] for k in ends), p_own_kw]),
        q_kvar=np.vstack([*(curve.q_kvar[k] for k in ends), q_own_kvar]),
        u_pu=np.array([*(curve.u_pu[k] for k in ends), u_own_pu]),
    )


def adjusting_margins(
    group: Group, loads: OperatingLoads, options: SharingOptions
) -> tuple[AdjustingMargin, ...]:
    """Return the margins of every setting that shares load.

    Parameters
    ----------
    group : Group
        The sets.
    loads : OperatingLoads
        The network's answer as set.
    options : SharingOptions
        Tolerances and the voltage band.

    Returns
    -------
    tuple of AdjustingMargin
        Voltage settings where all sets have droop by load compensation (one may have none), speed settings
        where all have speed droop (one may be isochronous).
    """
    settings: list[str] = []
    if _voltage_shared(group.sources):
        settings += ["no-load voltage", "voltage droop"]
    if _speed_shared(group.sources):
        settings += ["no-load frequency", "speed droop"]
    pairs = [(n, name) for name in settings for n in range(len(group.sources))]
    trials = [t for t in (_trial(group.sources, n, name) for n, name in pairs) if t is not None]
    if not trials:
        return ()
    p, q, u = _shift(group, loads, trials)
    use = _uses(group, options, p, q, u)
    names, table = list(use), np.stack(list(use.values()))
    reach, breaks = table.max(axis=0), table.argmax(axis=0)
    found, first = [], 0
    for trial in trials:
        here = slice(first, first + len(trial.tried))
        found.append(_margin(group, trial, reach[here], [names[k] for k in breaks[here]]))
        first += len(trial.tried)
    return tuple(found)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Trial:
    """Values [value] of one setting of set `place` to be tried, its own among them."""

    place: int
    setting: str
    own: float
    tried: FloatArray


def _trial(sources: tuple[Source, ...], n: int, setting: str) -> _Trial | None:
    """Return what to try of one setting of one set; None where the set does not have the setting."""
    own = _own_value(sources[n], setting)
    if own == 0.0:
        return None
    tried = own + np.linspace(*RANGES[setting], _STEPS)
    tried = np.unique(np.append(tried[tried >= LEAST_DROOP_PU] if "droop" in setting else tried, own))
    return _Trial(place=n, setting=setting, own=own, tried=tried)


def _voltage_shared(sources: tuple[Source, ...]) -> bool:
    return (
        all(s.law in (Law.PHASOR, Law.REACTIVE_CURRENT) and s.xc_pu >= 0.0 for s in sources)
        and sum(s.xc_pu == 0.0 for s in sources) <= 1
    )


def _speed_shared(sources: tuple[Source, ...]) -> bool:
    return (
        all(s.speed in (Speed.DROOP, Speed.ISOCHRONOUS) for s in sources)
        and sum(s.speed == Speed.ISOCHRONOUS for s in sources) <= 1
    )


def _own_value(source: Source, setting: str) -> float:
    return {
        "no-load voltage": source.v_ref_pu,
        "voltage droop": source.droop_pu,
        "no-load frequency": source.f_no_load_pu,
        "speed droop": 0.0 if source.speed == Speed.ISOCHRONOUS else source.speed_droop_pu,
    }[setting]


def _margin(group: Group, trial: _Trial, reach: FloatArray, words: list[str]) -> AdjustingMargin:
    at_own = int(np.searchsorted(trial.tried, trial.own))
    low, low_words = _first_broken(trial.tried[at_own::-1], reach[at_own::-1], words[at_own::-1])
    high, high_words = _first_broken(trial.tried[at_own:], reach[at_own:], words[at_own:])
    return AdjustingMargin(
        genset=group.sources[trial.place].name,
        setting=trial.setting,
        as_set_pu=trial.own,
        low_pu=low,
        low_breaks=low_words,
        high_pu=high,
        high_breaks=high_words,
    )


def _first_broken(tried: FloatArray, reach: FloatArray, words: list[str]) -> tuple[float, str]:
    """Return where the reach first passes 1 going outwards, interpolated; NaN where it never does."""
    over = np.flatnonzero(reach > 1.0)
    if not over.size:
        return float("nan"), ""
    k = int(over[0])
    if k == 0:
        return float(tried[0]), f"{words[0]}, broken as set"
    part = (1.0 - reach[k - 1]) / (reach[k] - reach[k - 1]) if np.isfinite(reach[k]) else 0.0
    return float(tried[k - 1] + part * (tried[k] - tried[k - 1])), words[k]


def _uses(
    group: Group, options: SharingOptions, p: FloatArray, q: FloatArray, u: FloatArray
) -> dict[str, FloatArray]:
    """Return the use of every limit, [value], from powers [value, load, set] and voltage [value, load]."""
    p_limit = active_sharing_limit(
        group.p_rated_kw, of_largest=options.kw_of_largest, of_own=options.kw_of_own
    )
    q_limit = reactive_sharing_limit(
        group.q_rated_kvar, of_largest=options.kvar_of_largest, of_smallest=options.kvar_of_smallest
    )
    dp = np.abs(p - proportional_share(p.sum(axis=-1), group.p_rated_kw)) / p_limit
    dq = np.abs(q - proportional_share(q.sum(axis=-1), group.q_rated_kvar)) / q_limit
    s = np.hypot(p[:, -1], q[:, -1])
    uses: dict[str, FloatArray] = {}
    for i, source in enumerate(group.sources):
        uses[f"kW sharing of {source.name}"] = dp[:, :, i].max(axis=1)
        uses[f"kvar sharing of {source.name}"] = dq[:, :, i].max(axis=1)
        uses[f"rated kVA of {source.name}"] = s[:, i] / source.s_rated_kva
        uses[f"rated kW of {source.name}"] = p[:, -1, i] / source.p_rated_kw
    uses["lowest voltage"] = (1.0 - u[:, -1]) / options.voltage_low
    uses["highest voltage"] = (u[:, -1] - 1.0) / options.voltage_high
    return uses


def _shift(
    group: Group, loads: OperatingLoads, trials: list[_Trial]
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return kW and kvar [value, load, set] and voltage [value, load] for every value of every trial."""
    base = {name: np.array([_own_value(s, name) for s in group.sources]) for name in RANGES}
    count = sum(len(t.tried) for t in trials)
    moved = {name: np.repeat(base[name][None, :], count, axis=0) for name in RANGES}
    speed, first = np.zeros(count, bool), 0
    for t in trials:
        here = slice(first, first + len(t.tried))
        moved[t.setting][here, t.place] = t.tried
        speed[here] = t.setting in ("no-load frequency", "speed droop")
        first += len(t.tried)
    at_own = {name: values[None, :] for name, values in base.items()}
    p = np.repeat(loads.p_kw[None], count, axis=0)
    q = np.repeat(loads.q_kvar[None], count, axis=0)
    u = np.repeat(loads.u_pu[None], count, axis=0)
    if speed.any():
        some = {name: values[speed] for name, values in moved.items()}
        p[speed] += _kw(group, some, loads) - _kw(group, at_own, loads)
    if not speed.all():
        some = {name: values[~speed] for name, values in moved.items()}
        u_old, q_old = _kvar(group, loads, at_own)
        u_new, q_new = _kvar(group, loads, some)
        q[~speed] += q_new - q_old
        u[~speed] += u_new - u_old
    return p, q, u


def _kw(group: Group, settings: dict[str, FloatArray], loads: OperatingLoads) -> FloatArray:
    _, p = share_straight(
        settings["no-load frequency"][:, None, :],
        settings["speed droop"][:, None, :],
        group.p_rated_kw,
        loads.p_kw.sum(axis=1)[None, :],
    )
    return p


def _kvar(
    group: Group, loads: OperatingLoads, settings: dict[str, FloatArray]
) -> tuple[FloatArray, FloatArray]:
    rating = np.array([s.s_rated_kva for s in group.sources])
    phasor = np.array([s.law == Law.PHASOR for s in group.sources])
    return share_reactive(
        settings["no-load voltage"][:, None, :],
        _reactances(group.sources, settings)[:, None, :],
        np.where(phasor, loads.p_kw / rating, 0.0)[None],
        rating,
        loads.q_kvar.sum(axis=1)[None, :],
    )


def _reactances(sources: tuple[Source, ...], settings: dict[str, FloatArray]) -> FloatArray:
    v, d = settings["no-load voltage"], settings["voltage droop"]
    out = np.empty(v.shape)
    for j, s in enumerate(sources):
        law = "reactive current" if s.law == Law.REACTIVE_CURRENT else "phasor"
        pairs, place = np.unique(np.stack([v[:, j], d[:, j]]), axis=1, return_inverse=True)
        x = [reactance_from_droop(b, s.droop_base, law, s.cos_phi, a) for a, b in pairs.T]  # type: ignore[arg-type]
        out[:, j] = np.array(x)[place]
    return out
