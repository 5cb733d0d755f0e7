"""Transformers and series reactors: what flows through them into a fault behind them, until it is cleared."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_clearing import clear
from study.analyses.fault_ratings_history import Histories, case_histories, knots_s
from study.analyses.fault_ratings_series import Stacked, given, worst_mode
from study.analyses.fault_ratings_sides import PlantDevices
from study.analyses.fault_ratings_unknown import KNOWN_UP_TO_S, fed_by_unknown
from study.formulas.fault_duty import equivalent_short_time_current_a
from study.formulas.fault_transformer import WITHSTAND_S, withstand_current_a, withstand_peak_factor
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.fault_ratings import ThroughRatings
from study.results.short_circuit import ModeShortCircuit, ShortCircuitResult

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

_ALL_OF_IT = 0.99  # a device sees a through fault where so much of it flows through the device
# Peak over short-time current of a reactor, 1.8 sqrt2; IEC 60076-6:2007, clause 8.2, from memory.
_REACTOR_PEAK = 2.55


@dataclass(frozen=True, slots=True, kw_only=True)
class _Piece:
    """A pair of windings or a reactor, with the board behind it and what it withstands."""

    name: str
    words: str
    kind: str
    behind: str
    withstand_a: float
    duration_s: float
    peak_a: float


def through_ratings(plant: Plant, devices: PlantDevices, result: ShortCircuitResult) -> ThroughRatings:
    """Return what flows through every transformer and reactor into a fault behind it, in every mode.

    Parameters
    ----------
    plant : Plant
        Transformers, reactors and devices.
    devices : PlantDevices
        Releases.
    result : ShortCircuitResult
        Currents.

    Returns
    -------
    ThroughRatings
        Transformers by pair of windings, then reactors by direction.
    """
    pieces = [*_two_windings(plant), *_three_windings(plant), *_reactors(plant)]
    protecting = _protecting(plant, devices, pieces)
    table = Stacked([_mode(devices, pieces, protecting, mode, result) for mode in result.modes], len(pieces))
    duration = np.array([p.duration_s for p in pieces], float)
    heat_ka = equivalent_short_time_current_a(table["heat_a2s"], duration[:, None]) / 1000.0
    withstand_ka = np.array([p.withstand_a for p in pieces], float) / 1000.0
    peak_rated = np.array([p.peak_a for p in pieces], float) / 1000.0
    live, peak_ka = table["live"] > 0.0, table["peak_a"] / 1000.0
    return ThroughRatings(
        names=tuple(p.name for p in pieces),
        behind=tuple(p.behind for p in pieces),
        words=tuple(p.words for p in pieces),
        kinds=tuple(p.kind for p in pieces),
        withstand_ka=read_only(withstand_ka),
        duration_s=read_only(duration),
        rated_peak_ka=read_only(peak_rated),
        live=read_only(live, np.bool_),
        initial_ka=read_only(table["initial_a"] / 1000.0),
        heat_ka=read_only(heat_ka),
        peak_ka=read_only(peak_ka),
        device=read_only(table["device"], np.int64),
        clearing_s=read_only(table["clearing_s"]),
        rests_on_unknown=read_only(table["unknown"] > 0.0, np.bool_),
        worst_mode=read_only(
            worst_mode(live, heat_ka / withstand_ka[:, None], peak_ka / peak_rated[:, None], peak_ka),
            np.int64,
        ),
    )


def _two_windings(plant: Plant) -> list[_Piece]:
    return [
        _windings(
            t.name,
            "",
            t.to_board,
            (1000.0 * t.s_rated_kva * t.units, t.u_secondary_v, t.u_k_pu),
            t.copper_loss_kw / t.s_rated_kva,
        )
        for t in plant.transformers
    ]


def _three_windings(plant: Plant) -> list[_Piece]:
    found = []
    for t in plant.three_winding:
        for other, board, kva, volts, u_k, loss in (
            (
                "secondary",
                t.secondary_board,
                t.s_secondary_kva,
                t.u_secondary_v,
                t.u_k_primary_secondary_pu,
                t.copper_loss_primary_secondary_kw,
            ),
            (
                "tertiary",
                t.tertiary_board,
                t.s_tertiary_kva,
                t.u_tertiary_v,
                t.u_k_primary_tertiary_pu,
                t.copper_loss_primary_tertiary_kw,
            ),
        ):
            least = min(kva, t.s_primary_kva)
            found.append(_windings(t.name, other, board, (1000.0 * least, volts, u_k), loss / least))
    return found


def _windings(name: str, words: str, board: str, rating: tuple[float, float, float], r_pu: float) -> _Piece:
    s_va, volts, u_k = rating
    withstand = float(withstand_current_a(s_va, volts, u_k))
    x_over_r = (u_k**2 - r_pu**2) ** 0.5 / r_pu if r_pu > 0.0 else 1e6
    return _Piece(
        name=name,
        words=words,
        kind="transformer",
        behind=board,
        withstand_a=withstand,
        duration_s=WITHSTAND_S,
        peak_a=withstand * float(withstand_peak_factor(x_over_r)),
    )


def _reactors(plant: Plant) -> list[_Piece]:
    found = []
    for r in plant.reactors:
        rated = float(given([r.short_time_ka])[0]) * 1000.0
        for board in (r.to_board, r.from_board):
            found.append(
                _Piece(
                    name=r.name,
                    words="",
                    kind="reactor",
                    behind=board,
                    withstand_a=rated,
                    duration_s=float(given([r.short_time_duration_s])[0]),
                    peak_a=_REACTOR_PEAK * rated,
                )
            )
    return found


def _protecting(plant: Plant, devices: PlantDevices, pieces: list[_Piece]) -> list[list[int]]:
    """Return the devices with settings that stand on each piece, or on a cable that ends at it."""
    cables: dict[str, list[str]] = {}
    for cable in plant.cables:
        for end in (cable.from_end, cable.to_end):
            cables.setdefault(end, []).append(cable.name)
    found = []
    for piece in pieces:
        on = {piece.name, *cables.get(piece.name, ())}
        found.append(
            [
                k
                for k, d in enumerate(plant.devices)
                if d.equipment in on and d.kind != "thermal overload" and devices.releases[k].known
            ]
        )
    return found


def _mode(
    devices: PlantDevices,
    pieces: list[_Piece],
    protecting: list[list[int]],
    mode: ModeShortCircuit,
    result: ShortCircuitResult,
) -> dict[str, NDArray[np.generic]]:
    case, f_hz = mode.maximum, result.f_hz
    end = _ends(pieces, mode, result)
    place = np.where(end >= 0, case.ends.place[end] if len(case.ends.place) else -1, -1)
    share = np.zeros((len(pieces), len(case.sources.names)))
    there = np.flatnonzero(end >= 0)
    share[there] = case.ends.share[end[there]]
    _, through = case_histories(case, place, share, knots_s(f_hz, case.parts.ends_s))
    initial = through.ac_a[:, 0, 0]
    live = (end >= 0) & (initial > 0.0)
    half = np.full(len(pieces), 0.5 / f_hz)
    device, clearing = _cleared(devices, protecting, mode, (place, live, through), f_hz)
    unknown = fed_by_unknown(case)[place] & live & ~(clearing <= KNOWN_UP_TO_S)
    dark = np.where(live, 1.0, np.nan)
    return {
        "live": live,
        "initial_a": initial * dark,
        "heat_a2s": through.heat_a2s(clearing) * dark,
        "peak_a": (2.0**0.5 * through.ac_at_a(half) + through.dc_at_a(half)) * dark,
        "device": device,
        "clearing_s": clearing * dark,
        "unknown": unknown,
    }


def _ends(pieces: list[_Piece], mode: ModeShortCircuit, result: ShortCircuitResult) -> IntArray:
    """Return the row of each piece's far end in the maximum case, -1 where it is open or dead."""
    ends, places = mode.maximum.ends, result.places
    row_of = {
        (name, places.boards[int(p)]): k
        for k, (name, p) in enumerate(zip(ends.branches, ends.place, strict=True))
    }
    return np.array([row_of.get((p.name, p.behind), -1) for p in pieces], np.int64)


def _cleared(
    devices: PlantDevices,
    protecting: list[list[int]],
    mode: ModeShortCircuit,
    faults: tuple[IntArray, BoolArray, Histories],
    f_hz: float,
) -> tuple[IntArray, FloatArray]:
    """Return the first device to clear each through fault and when; -1 and NaN where none stands there."""
    place, live, through = faults
    device, clearing = np.full(len(place), -1), np.full(len(place), np.nan)
    pairs = [(row, d) for row in np.flatnonzero(live).tolist() for d in protecting[row]]
    if not pairs:
        return device, clearing
    rows, found = (np.array(x, np.int64) for x in zip(*pairs, strict=True))
    share = np.abs(mode.device_shares(found, place[rows], maximum=True))
    initial = mode.maximum.parts.subtransient_a[place[rows]]
    scale = (share * initial).sum(axis=1) / through.ac_a[rows, 0, 0]
    at_device = Histories(
        time_s=through.time_s,
        ac_a=through.ac_a[rows] * scale[:, None, None],
        dc_a=through.dc_a[rows] * scale[:, None, None],
    )
    level = _level(mode, found, place[rows])
    sees = scale > _ALL_OF_IT * level
    forever = np.full(len(rows), np.inf)
    times = clear([devices.releases[d] for d in found], at_device, 0.5 / f_hz, forever).time_s
    for k in np.flatnonzero(sees & ~np.isnan(times)):
        if not times[k] >= clearing[rows[k]]:
            device[rows[k]], clearing[rows[k]] = found[k], times[k]
    return device, clearing


def _level(mode: ModeShortCircuit, device: IntArray, place: IntArray) -> FloatArray:
    """Return the A at each device for 1 A that flows through it to the place, by the turns between them."""
    routes = mode.maximum.routes
    end = mode.devices.ends[0, device]
    bus, at = routes.end_bus[end], routes.place_bus[place]
    turns = routes.turns[at] / routes.turns[bus] * routes.base_a[bus] / routes.base_a[at]
    return np.asarray(np.where(end >= 0, turns, np.inf))
