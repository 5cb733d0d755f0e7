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


@dataclass(frozen=True, slots=True, kw_only=True)
class _Study:
    group: Group
    loads: OperatingLoads
    options: SharingOptions


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
    study = _Study(group=group, loads=loads, options=options)
    margins = (_margin(study, n, setting) for n in range(len(group.sources)) for setting in settings)
    return tuple(margin for margin in margins if margin is not None)


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


def _margin(study: _Study, n: int, setting: str) -> AdjustingMargin | None:
    """Return the margin of one setting of one set; None where the set does not have the setting."""
    source = study.group.sources[n]
    own = _own_value(source, setting)
    if own == 0.0:
        return None
    tried = own + np.linspace(*RANGES[setting], _STEPS)
    tried = np.unique(np.append(tried[tried >= LEAST_DROOP_PU] if "droop" in setting else tried, own))
    reach, words = _reach(study, n, setting, tried)
    at_own = int(np.searchsorted(tried, own))
    low, low_words = _first_broken(tried[at_own::-1], reach[at_own::-1], words[at_own::-1])
    high, high_words = _first_broken(tried[at_own:], reach[at_own:], words[at_own:])
    return AdjustingMargin(
        genset=source.name,
        setting=setting,
        as_set_pu=own,
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


def _reach(study: _Study, n: int, setting: str, tried: FloatArray) -> tuple[FloatArray, list[str]]:
    """Return how much of the nearest limit each value uses, 1 at the limit, and what that limit is."""
    used = _uses(study.group, study.options, *_shift(study.group, study.loads, n, setting, tried))
    table = np.stack(list(used.values()))
    names = list(used)
    return table.max(axis=0), [names[k] for k in table.argmax(axis=0)]


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
    group: Group, loads: OperatingLoads, n: int, setting: str, tried: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return kW and kvar [value, load, set] and voltage [value, load] with one setting of one set moved."""
    base = {name: np.array([_own_value(s, name) for s in group.sources]) for name in RANGES}
    moved = {name: np.repeat(base[name][None, :], len(tried), axis=0) for name in RANGES}
    moved[setting][:, n] = tried
    p_total = loads.p_kw.sum(axis=1)
    p = np.broadcast_to(loads.p_kw, (len(tried), *loads.p_kw.shape))
    if "speed" in setting or "frequency" in setting:
        p = p + _kw(group, moved, p_total) - _kw(group, {k: v[None, :] for k, v in base.items()}, p_total)
    if setting in ("no-load voltage", "voltage droop"):
        u_old, q_old = _kvar(group, loads, {k: v[None, :] for k, v in base.items()}, loads.p_kw[None])
        u_new, q_new = _kvar(group, loads, moved, p)
        return p, loads.q_kvar + q_new - q_old, loads.u_pu + u_new - u_old
    shape = (len(tried), *loads.q_kvar.shape)
    return p, np.broadcast_to(loads.q_kvar, shape), np.broadcast_to(loads.u_pu, shape[:2])


def _kw(group: Group, settings: dict[str, FloatArray], p_total: FloatArray) -> FloatArray:
    _, p = share_straight(
        settings["no-load frequency"][:, None, :],
        settings["speed droop"][:, None, :],
        group.p_rated_kw,
        p_total[None, :],
    )
    return p


def _kvar(
    group: Group, loads: OperatingLoads, settings: dict[str, FloatArray], p_kw: FloatArray
) -> tuple[FloatArray, FloatArray]:
    rating = np.array([s.s_rated_kva for s in group.sources])
    phasor = np.array([s.law == Law.PHASOR for s in group.sources])
    return share_reactive(
        settings["no-load voltage"][:, None, :],
        _reactances(group.sources, settings)[:, None, :],
        np.where(phasor, p_kw / rating, 0.0),
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
