"""How the sources on line take the load of their island."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from study.analyses.balance_sources import Source
from study.results.balance import SetBalance


@dataclass(frozen=True, slots=True, kw_only=True)
class Share:
    """What one source delivers."""

    p_kw: float
    q_kvar: float


def share_load(sources: Sequence[Source], p_load_kw: float, q_load_kvar: float) -> dict[str, Share]:
    """Share the load of an island between the sources on line.

    Sources with a set power give it; the others take what remains in proportion to rated kW. Where all have a
    set power, what it leaves over is taken in the same proportion, as the droop of the governors would do.
    kvar go the same way, by set kvar and rated kvar, or rated kVA where a source has no rated kvar.

    Source: common practice, no source; the load flow has the droop of each set.

    Parameters
    ----------
    sources : sequence of Source
        The sources on line in one island.
    p_load_kw, q_load_kvar : float
        Load of the island.

    Returns
    -------
    dict
        Share by name of source.
    """
    p_kw = _assigned(sources, [s.p_set_kw for s in sources], [s.p_rated_kw for s in sources], p_load_kw)
    q_set = [_set_kvar(s, p) for s, p in zip(sources, p_kw, strict=True)]
    q_kvar = _assigned(sources, q_set, _kvar_weights(sources), q_load_kvar)
    return {s.name: Share(p_kw=p, q_kvar=q) for s, p, q in zip(sources, p_kw, q_kvar, strict=True)}


def proportions(weights: Sequence[float]) -> list[float]:
    """Return weights over their sum; nothing for no weights.

    Examples
    --------
    >>> proportions([300.0, 100.0])
    [0.75, 0.25]
    """
    total = math.fsum(weights)
    return [w / total for w in weights]


def set_row(source: Source, share: Share) -> SetBalance:
    """Return the row of one source: what it gives and how far it is loaded."""
    s_kva = math.hypot(share.p_kw, share.q_kvar)
    return SetBalance(
        name=source.name,
        kind=source.kind,
        state=source.state,
        island=source.island,
        p_rated_kw=source.p_rated_kw,
        s_rated_kva=source.s_rated_kva,
        p_kw=share.p_kw,
        q_kvar=share.q_kvar,
        s_kva=s_kva,
        cos_phi=share.p_kw / s_kva if s_kva else math.nan,
        engine_loading=share.p_kw / source.engine_kw,
        alternator_loading=s_kva / source.s_rated_kva,
    )


def _assigned(
    sources: Sequence[Source], given: Sequence[float | None], weights: Sequence[float], total: float
) -> list[float]:
    forming = [s.forming for s in sources]
    takes = [f and value is None for f, value in zip(forming, given, strict=True)]
    if not any(takes):
        takes = forming
    fixed = [value or 0.0 for value in given]
    rest = total - math.fsum(fixed)
    scale = math.fsum(w for w, t in zip(weights, takes, strict=True) if t)
    return [f + (rest * w / scale if t else 0.0) for f, w, t in zip(fixed, weights, takes, strict=True)]


def _set_kvar(source: Source, p_kw: float) -> float | None:
    if source.q_set_kvar is None and source.kvar_control:
        return p_kw * source.q_rated_kvar / math.sqrt(source.s_rated_kva**2 - source.q_rated_kvar**2)
    return source.q_set_kvar


def _kvar_weights(sources: Sequence[Source]) -> list[float]:
    rated = [s.q_rated_kvar for s in sources if s.forming]
    by_kvar = bool(rated) and all(q > 0.0 for q in rated)
    return [s.q_rated_kvar if by_kvar else s.s_rated_kva for s in sources]
