"""How the sources of an island divide its active power: P = a + b m, with one unknown m for each island.

m is the frequency where droop holds it, the kW of the isochronous set, or the common fraction of rated kW of
sets with load-sharing governors. Arrays are [source, scenario or 1].
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from study.network.laws import some, take
from study.network.sources import Source, Speed

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

# Plain integers: comparing an array with a member of an enumeration is slow.
DROOP, ISOCHRONOUS, LOAD_SHARING, FIXED, SHORE = (int(kind) for kind in Speed)

VARYING = ("a", "b", "gain", "f_no_load", "held_f")


@dataclass(frozen=True, slots=True, kw_only=True)
class PowerLaws:
    """Active power of the sources, per unit of the network's base; ``gain`` is 1/droop on that base.

    ``a`` and ``b`` [source, scenario or 1]; ``rated`` and ``limit`` [source, 1] are rated and largest power;
    ``held_f`` [island] is NaN where the frequency is the unknown.
    ``shore`` [island] marks islands that hang on a shore supply; ``short`` [island] those in which no source
    can take a change.
    """

    a: FloatArray
    b: FloatArray
    gain: FloatArray
    rated: FloatArray
    limit: FloatArray
    f_no_load: FloatArray
    held_f: FloatArray
    shore: BoolArray
    short: BoolArray

    def column(self, k: int | None) -> PowerLaws:
        """Return the laws of one scenario, or of the mean of all where k is None."""
        return replace(self, **{n: take(getattr(self, n), k) for n in VARYING})

    def columns(self, k: IntArray) -> PowerLaws:
        """Return the laws of some scenarios."""
        return replace(self, **{n: some(getattr(self, n), k) for n in VARYING})

    def frequency(self, m: FloatArray) -> FloatArray:
        """Return each island's frequency, [island, scenario], from the unknowns."""
        return np.where(np.isnan(self.held_f), m, self.held_f)


def power_laws(
    sources: tuple[Source, ...],
    islands: int,
    s_base_kva: float,
    *,
    f_no_load_pu: FloatArray,
    speed_droop_pu: FloatArray,
    at_limit: IntArray,
) -> PowerLaws:
    """Return the active-power laws of the sources.

    Parameters
    ----------
    sources : tuple of Source
        Sources on line.
    islands : int
        Number of islands.
    s_base_kva : float
        Base power. [kVA]
    f_no_load_pu, speed_droop_pu : ndarray, shape (source, scenario or 1)
        Governor settings. [pu of rated frequency; droop over rated kW]
    at_limit : ndarray of int, shape (source,)
        1 where a source is held at its largest kW, -1 at the largest that it takes, 0 elsewhere.

    Returns
    -------
    PowerLaws
        Per unit of the base.
    """
    speed = np.array([s.speed for s in sources], np.int64)
    rated = np.array([s.p_rated_kw for s in sources])[:, None] / s_base_kva
    limit = np.array([s.p_max_kw for s in sources])[:, None] / s_base_kva
    p_set = np.array([s.p_set_kw for s in sources])[:, None] / s_base_kva
    island = np.array([s.island for s in sources], np.int64)
    droop = np.where(speed_droop_pu > 0.0, speed_droop_pu, np.inf)
    gain = rated / droop
    shape = np.broadcast_shapes(gain.shape, f_no_load_pu.shape)
    a, b = np.zeros(shape), np.zeros(shape)
    held_f = np.full((islands, shape[1]), np.nan)
    shore, short = np.zeros(islands, bool), np.zeros(islands, bool)
    for n in range(islands):
        here = island == n
        free = here & (at_limit == 0)
        masters = here & (speed == SHORE)
        shore[n] = bool(masters.any())
        if not shore[n]:
            masters = free & ((speed == ISOCHRONOUS) | (speed == LOAD_SHARING))
        droops = free & (speed == DROOP)
        if masters.any():
            held_f[n] = _common(f_no_load_pu, masters, rated)
            a[droops] = (gain * (f_no_load_pu - held_f[n]))[droops]
        else:
            a[droops], b[droops] = (gain * f_no_load_pu)[droops], np.broadcast_to(-gain, shape)[droops]
        b[free & (speed == ISOCHRONOUS)] = 1.0
        b[free & (speed == LOAD_SHARING)] = rated[free & (speed == LOAD_SHARING)]
        short[n] = not shore[n] and not (b[here] != 0.0).any()
    fixed = (speed == FIXED) & (at_limit == 0)
    a[fixed] = np.broadcast_to(p_set, shape)[fixed]
    held = at_limit != 0
    a[held] = limit[held] * at_limit[held, None]
    return PowerLaws(
        a=a,
        b=b,
        gain=gain,
        rated=rated,
        limit=limit,
        f_no_load=f_no_load_pu,
        held_f=held_f,
        shore=shore,
        short=short,
    )


def _common(f_no_load: FloatArray, masters: BoolArray, rated: FloatArray) -> FloatArray:
    """Return the frequency that the masters hold: the mean of their set-points by rating."""
    weight = rated[masters]
    return np.asarray((f_no_load[masters] * weight).sum(axis=0) / weight.sum())
