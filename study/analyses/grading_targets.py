"""What fails of a grading, in the order in which settings are looked for."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_margins import AT_ONCE
from study.results.grading import NONE, PARTIAL, GradingPairs, Reach


@dataclass(frozen=True, slots=True, kw_only=True)
class Target:
    """What fails: a pair, or a reach (upstream -1), in which modes, and the figures that bound a cure."""

    downstream: int
    upstream: int
    inward: bool
    modes: tuple[int, ...]
    clears_s: float
    releases_s: float
    needed_s: float
    current_a: float
    upstream_a: float
    current_ratio: float
    at_once: bool


def targets_of(
    pairs: GradingPairs,
    sides: Sequence[bool],
    reach: Reach,
    late: tuple[Sequence[bool], NDArray[np.bool_]],
) -> list[Target]:
    """Return what fails, in the order in which it is to be cured: most modes first, then the least margin.

    Parameters
    ----------
    pairs : GradingPairs
        Of all modes.
    sides : sequence of bool
        Side of the fault of each pair.
    reach : Reach
        Of all modes.
    late : tuple
        Side of the fault of each row of the reach; [row, mode] what is cleared late or never.

    Returns
    -------
    list of Target
        Pairs, then reach.
    """
    bad = np.isin(pairs.extent, (PARTIAL, NONE))
    rows = enumerate(zip(reach.station.tolist(), late[0], strict=True))
    least = {(s, bool(inward)): reach.least_a[k] for k, (s, inward) in rows}
    found: list[tuple[tuple[float, float, int], Target]] = []
    for k in np.flatnonzero(bad.any(axis=1)).tolist():
        modes = np.flatnonzero(bad[k])
        m = int(modes[np.argmin(pairs.margin_s[k, modes])])
        key = (int(pairs.downstream[k]), bool(sides[k]))
        t = Target(
            downstream=int(pairs.downstream[k]),
            upstream=int(pairs.upstream[k]),
            inward=bool(sides[k]),
            modes=tuple(modes.tolist()),
            clears_s=float(np.nanmax(pairs.clears_s[k, modes])),
            releases_s=float(np.nanmin(pairs.releases_s[k, modes])),
            needed_s=float(pairs.needed_s[k, m]),
            current_a=float(np.nanmin([*pairs.current_a[k, modes], *least[key][modes]])),
            upstream_a=float(np.nanmax(pairs.upstream_a[k, modes])),
            current_ratio=float(np.nanmin(pairs.current_ratio[k, modes])),
            at_once=int(pairs.rule[k, m]) == AT_ONCE,
        )
        found.append(((-len(modes), float(pairs.margin_s[k, m]), k), t))
    ranked = [t for _, t in sorted(found, key=lambda x: x[0])]
    for k in np.flatnonzero(late[1].any(axis=1)).tolist():
        modes = np.flatnonzero(late[1][k])
        ranked.append(
            Target(
                downstream=int(reach.station[k]),
                upstream=-1,
                inward=bool(late[0][k]),
                modes=tuple(modes.tolist()),
                clears_s=np.inf,
                releases_s=np.nan,
                needed_s=0.0,
                current_a=float(np.nanmin(reach.least_a[k, modes])),
                upstream_a=np.nan,
                current_ratio=np.inf,
                at_once=False,
            )
        )
    return ranked
