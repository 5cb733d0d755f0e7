"""Time-current sheets: the bands of all devices of one path, at one voltage."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Final

import numpy as np

from study.formulas.trip_band import TripBand
from study.results.arrays import FloatArray
from study.results.grading import GradingPath, GradingStations
from study.results.time_current import SheetBand, TimeCurrentSheet

_POINTS: Final = 80


def time_current_sheets(
    paths: Sequence[GradingPath], stations: GradingStations, bands: Mapping[str, TripBand]
) -> tuple[TimeCurrentSheet, ...]:
    """Return one sheet for each distinct chain of stations.

    Parameters
    ----------
    paths : sequence of GradingPath
        Of all modes; of equal chains the one with the largest fault is kept.
    stations : GradingStations
        What the paths number.
    bands : mapping of str to TripBand
        By device, in A of the side where it stands.

    Returns
    -------
    tuple of TimeCurrentSheet
        In the order of the first path of each chain.
    """
    chosen: dict[tuple[int, ...], GradingPath] = {}
    for path in paths:
        other = chosen.get(path.stations)
        if other is None or _largest(path) > _largest(other):
            chosen[path.stations] = path
    return tuple(_sheet(path, stations, bands) for path in chosen.values() if path.stations)


def _largest(path: GradingPath) -> float:
    known = [a for a in path.largest_a if np.isfinite(a)]
    return max(known, default=0.0)


def _sheet(path: GradingPath, stations: GradingStations, bands: Mapping[str, TripBand]) -> TimeCurrentSheet:
    chain = list(path.stations)
    u_v = float(stations.u_nominal_v[chain[0]])
    ratio = stations.u_nominal_v[chain] / u_v
    largest_a, least_a = ratio * np.array(path.largest_a), ratio * np.array(path.least_a)
    members = [(s, k, name) for k, s in enumerate(chain) for name in stations.devices[s] if name in bands]
    current_a = _currents_a([(bands[name], float(ratio[k])) for _, k, name in members], largest_a)
    drawn = []
    for s, k, name in members:
        earliest_s, latest_s = bands[name].times_s(current_a / ratio[k])
        drawn.append(
            SheetBand(device=name, station=s, ratio=float(ratio[k]), earliest_s=earliest_s, latest_s=latest_s)
        )
    return TimeCurrentSheet(
        mode=path.mode,
        zone=path.zone,
        source=path.source,
        stations=path.stations,
        u_reference_v=u_v,
        current_a=current_a,
        bands=tuple(drawn),
        largest_a=largest_a,
        least_a=least_a,
    )


def _currents_a(bands: Sequence[tuple[TripBand, float]], largest_a: FloatArray) -> FloatArray:
    """Return currents from half the least current at which any device may open to the largest fault."""
    top = float(np.nanmax(largest_a, initial=1.0))
    trial = np.geomspace(1e-5 * top, top, 400)
    acts = [trial[np.isfinite(band.earliest_s(trial / ratio))] for band, ratio in bands]
    least = min((float(a[0]) for a in acts if len(a)), default=0.1 * top)
    return np.geomspace(0.5 * least, top, _POINTS)
