"""The least fault at the far end of what each device protects, and whether it is cleared in time."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_backup import ENDS_BY_ITSELF, Backup, Step, least_over_three_phase
from study.analyses.fault_ratings_clearing import STAGES, Clearing, clear
from study.analyses.fault_ratings_history import case_histories, knots_s
from study.analyses.fault_ratings_series import Stacked
from study.analyses.fault_ratings_sides import PlantDevices
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.fault_ratings import ClearingRatings
from study.results.short_circuit import FaultCase, ModeShortCircuit, ShortCircuitResult

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class LeastFaults:
    """The least fault at the far end of each device in one mode, [device], and how it is cleared.

    ``by`` is the device that clears it: itself, one nearer to the sources, -1 for none, -2 where the sources
    block by themselves.
    """

    judged: BoolArray
    first_a: FloatArray
    holds_s: FloatArray
    clearing: Clearing
    by: IntArray
    heat_a2s: FloatArray


def least_faults(
    plant: Plant, devices: PlantDevices, mode: ModeShortCircuit, places: ShortCircuitResult
) -> LeastFaults:
    """Return the least fault that each device must clear in one mode, while its source keeps it up.

    The three-phase current through the device, by the minimum case, times the ratio of the least kind of
    fault to the three-phase one at that place; fitted to the device's own least current where its setting
    gives a time.

    Parameters
    ----------
    plant : Plant
        Devices.
    devices : PlantDevices
        Releases.
    mode : ModeShortCircuit
        The mode.
    places : ShortCircuitResult
        Places and frequency.

    Returns
    -------
    LeastFaults
        In workbook order of the devices.
    """
    case, faults = mode.minimum, mode.devices
    place = np.where(faults.place >= 0, faults.far_place, -1)
    share = _shares(devices, case, place)
    knots = knots_s(places.f_hz, case.parts.ends_s)
    _, through = case_histories(case, place, share, knots)
    least = through.times(least_over_three_phase(case, place, through.time_s))
    own = least.ac_at_a(np.nan_to_num(faults.operating_s, nan=0.0))
    fits = np.isfinite(faults.operating_s) & np.isfinite(faults.least_a) & (own > 0.0)
    least = least.times(np.where(fits, faults.least_a / np.where(fits, own, 1.0), 1.0)[:, None, None])
    holds = _holds_s(case, place, share)
    cleared = clear(devices.releases, least, 0.5 / places.f_hz, holds)
    judged = _counts(plant, devices) & (place >= 0) & np.isfinite(faults.least_a)
    judged &= ~_open(places, case, place)
    by = np.where(np.isfinite(cleared.time_s), np.arange(len(judged)), -1)
    backup = Backup(devices, mode, places)
    for row in np.flatnonzero(judged & (by < 0)):
        current = case.source_initial_a[place[row]] * share[row]
        step = Step(device=int(row), far=int(place[row]), current=current > 0.0)
        by[row], cleared = backup.instead(step, least.row(int(row)), holds[row], cleared)
    return LeastFaults(
        judged=judged,
        first_a=least.ac_a[:, 0, 0],
        holds_s=holds,
        clearing=cleared,
        by=by,
        heat_a2s=least.heat_a2s(cleared.time_s),
    )


def _counts(plant: Plant, devices: PlantDevices) -> BoolArray:
    """Return which devices have settings of their own to judge."""
    return np.array(
        [
            d.kind != "thermal overload" and not (d.kind == "circuit breaker" and r.by_relay) and r.known
            for d, r in zip(plant.devices, devices.releases, strict=True)
        ],
        bool,
    )


def _open(places: ShortCircuitResult, case: FaultCase, place: IntArray) -> BoolArray:
    """Return where the far end is a source that does not run: its breaker is open then."""
    running = set(case.sources.names)
    idle = [
        kind == "source terminals" and name not in running
        for name, kind in zip(places.places.names, places.places.kinds, strict=True)
    ]
    return np.asarray(np.array([*idle, False], bool)[place])


def clearing_ratings(plant: Plant, least: list[LeastFaults], result: ShortCircuitResult) -> ClearingRatings:
    """Return whether every device clears its least fault in every mode.

    Parameters
    ----------
    plant : Plant
        Devices.
    least : list of LeastFaults
        One for each mode.
    result : ShortCircuitResult
        Kinds of the least faults.

    Returns
    -------
    ClearingRatings
        In workbook order.
    """
    table = Stacked([_columns(x) for x in least], len(plant.devices))
    kinds = [mode.devices.least_kind for mode in result.modes]
    return ClearingRatings(
        names=tuple(d.name for d in plant.devices),
        stages=STAGES,
        judged=read_only(table["judged"], np.bool_),
        least_a=read_only(table["least_a"]),
        first_a=read_only(table["first_a"]),
        pick_up_a=read_only(table["pick_up_a"]),
        stage=read_only(table["stage"], np.int64),
        clears=read_only(table["clears"], np.bool_),
        by=read_only(table["by"], np.int64),
        clearing_s=read_only(table["clearing_s"]),
        due_s=read_only(table["due_s"]),
        holds_s=read_only(table["holds_s"]),
        one_set_a=read_only(_one_set_a(least, result)),
        kinds=tuple(tuple(kind[k] for kind in kinds) for k in range(len(plant.devices))),
    )


def _one_set_a(least: list[LeastFaults], result: ShortCircuitResult) -> FloatArray:
    """Return the least current with one supply in each island, [device, mode]."""
    modes = [
        {"a": np.where(x.judged & mode.one_set.fewer, mode.one_set.device_least_a, np.nan)}
        for x, mode in zip(least, result.modes, strict=True)
    ]
    return Stacked(modes, len(least[0].judged) if least else 0)["a"]


def _columns(least: LeastFaults) -> dict[str, NDArray[np.generic]]:
    dark = np.where(least.judged, 1.0, np.nan)
    clears = np.isfinite(least.clearing.time_s) | (least.by == ENDS_BY_ITSELF)
    return {
        "judged": least.judged,
        "least_a": least.clearing.seen_a * dark,
        "first_a": least.first_a * dark,
        "pick_up_a": least.clearing.pick_up_a * dark,
        "stage": least.clearing.meant,
        "clears": clears & least.judged,
        "by": np.where(least.judged, least.by, -1),
        "clearing_s": least.clearing.time_s * dark,
        "due_s": least.clearing.due_s * dark,
        "holds_s": least.holds_s * dark,
    }


def _shares(devices: PlantDevices, case: FaultCase, place: IntArray) -> FloatArray:
    """Return the part of each source that flows through each device into a fault at its far end."""
    row_of = {
        (int(p), name): k for k, (p, name) in enumerate(zip(case.ends.place, case.ends.branches, strict=True))
    }
    share = np.ones((len(place), len(case.sources.names)))
    for k, branch in enumerate(devices.branch):
        row = row_of.get((int(place[k]), branch), -1) if branch else -1
        if row >= 0:
            share[k] = case.ends.share[row]
    return share


def _holds_s(case: FaultCase, place: IntArray, share: FloatArray) -> FloatArray:
    """Return how long the current through each device is kept up: until the first of its sources ends."""
    kept = (case.parts.sustained_a[place] * share > 0.0) & (case.sources.holds_s > 0.0)[None, :]
    return np.asarray(np.where(kept, case.sources.holds_s[None, :], np.inf).min(axis=1, initial=np.inf))
