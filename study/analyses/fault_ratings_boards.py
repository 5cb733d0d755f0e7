"""Boards against peak and short-time withstand, and ties against the boards that they join."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_history import case_histories, knots_s
from study.analyses.fault_ratings_series import (
    ASSEMBLY_KA,
    ASSEMBLY_PEAK_KA,
    R10_KA,
    Stacked,
    given,
    greatest,
    next_usual,
    peak_factor_above_1_kv,
    ratio,
    worst_mode,
)
from study.analyses.fault_ratings_sides import PlantDevices
from study.formulas.fault_duty import equivalent_short_time_current_a
from study.model.branches import Board, Tie
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.fault_ratings import BoardRatings, TieRatings
from study.results.short_circuit import FaultCase, ModeShortCircuit, Places, ShortCircuitResult

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
Arrays = dict[str, NDArray[np.generic]]

MEDIUM_VOLTAGE_V = 1000.0


def board_ratings(plant: Plant, devices: PlantDevices, result: ShortCircuitResult) -> BoardRatings:
    """Return what every board must withstand in every mode.

    Parameters
    ----------
    plant : Plant
        Ratings.
    devices : PlantDevices
        Current-limiting devices among them.
    result : ShortCircuitResult
        Currents.

    Returns
    -------
    BoardRatings
        In workbook order.
    """
    boards = plant.boards
    duration = given([b.short_time_duration_s for b in boards])
    limiters: dict[str, set[str]] = {b.name: set() for b in boards}
    modes = [_board_mode(plant, devices, result, mode, limiters) for mode in result.modes]
    table = Stacked(modes, len(boards))
    heat_ka = equivalent_short_time_current_a(table["heat_a2s"], duration[:, None]) / 1000.0
    limited_ka, half_ka = table["limited_a"] / 1000.0, table["half_a"] / 1000.0
    short_ka = np.fmax(heat_ka, half_ka)
    rated_peak = given([b.peak_withstand_ka for b in boards])
    rated_short = given([b.short_time_withstand_ka for b in boards])
    high = np.array([b.u_nominal_v > MEDIUM_VOLTAGE_V for b in boards], bool)
    factor = peak_factor_above_1_kv(result.f_hz)
    peaks, shorts = greatest(limited_ka), greatest(short_ka)
    live = table["live"] > 0.0
    return BoardRatings(
        names=tuple(b.name for b in boards),
        medium_voltage=read_only(high, np.bool_),
        rated_peak_ka=read_only(rated_peak),
        rated_short_time_ka=read_only(rated_short),
        rated_duration_s=read_only(duration),
        live=read_only(live, np.bool_),
        ip_peak_ka=read_only(table["ip_a"] / 1000.0),
        greatest_peak_ka=read_only(table["greatest_a"] / 1000.0),
        limited_peak_ka=read_only(limited_ka),
        limited_by=tuple(", ".join(sorted(limiters[b.name])) for b in boards),
        half_ka=read_only(half_ka),
        heat_ka=read_only(heat_ka),
        nominal_peak=read_only(table["nominal_peak"]),
        nominal_initial=read_only(table["nominal_initial"]),
        enough_peak_ka=read_only(
            np.where(
                high,
                next_usual(peaks, tuple(factor * x for x in R10_KA)),
                next_usual(peaks, ASSEMBLY_PEAK_KA),
            )
        ),
        enough_short_time_ka=read_only(
            np.where(high, next_usual(shorts, R10_KA), next_usual(shorts, ASSEMBLY_KA))
        ),
        worst_mode=read_only(
            worst_mode(
                live, limited_ka / rated_peak[:, None], short_ka / rated_short[:, None], table["ip_a"]
            ),
            np.int64,
        ),
    )


def board_places(places: Places, names: list[str]) -> IntArray:
    """Return the place of each board, -1 where it is none."""
    place = {
        name: k
        for k, (name, kind) in enumerate(zip(places.names, places.kinds, strict=True))
        if kind == "board"
    }
    return np.array([place.get(name, -1) for name in names], np.int64)


def nominal_ratios(case: FaultCase, place: IntArray) -> tuple[FloatArray, FloatArray]:
    """Return peak and initial current without the tolerance of the reactances over those with it."""
    return (
        ratio(case.ip_nominal_a[place], case.ip_a[place]),
        ratio(case.ik_initial_nominal_a[place], case.ik_initial_a[place]),
    )


def _board_mode(
    plant: Plant,
    devices: PlantDevices,
    result: ShortCircuitResult,
    mode: ModeShortCircuit,
    limiters: dict[str, set[str]],
) -> Arrays:
    case = mode.maximum
    place = board_places(result.places, [b.name for b in plant.boards])
    nobody = np.zeros((len(place), len(case.sources.names)))
    total, _ = case_histories(case, place, nobody, knots_s(result.f_hz, case.parts.ends_s))
    nominal_peak, nominal_initial = nominal_ratios(case, place)
    live = (place >= 0) & case.live[place]
    dark = np.where(live, 1.0, np.nan)
    greatest_a = np.fmax(case.peak_a, case.ip_a)[place] * dark
    limited_a, limiting = _limited(devices, case, place, greatest_a)
    for row, device in limiting:
        limiters[plant.boards[row].name].add(plant.devices[device].name)
    duration_s = given([b.short_time_duration_s for b in plant.boards])
    return {
        "live": live,
        "ip_a": case.ip_a[place] * dark,
        "greatest_a": greatest_a,
        "limited_a": limited_a,
        "half_a": case.iac_half_a[place] * dark,
        "heat_a2s": total.heat_a2s(duration_s) * dark,
        "nominal_peak": nominal_peak,
        "nominal_initial": nominal_initial,
    }


def _limited(
    devices: PlantDevices, case: FaultCase, place: IntArray, greatest_a: FloatArray
) -> tuple[FloatArray, list[tuple[int, int]]]:
    """Return the greatest peak with what limiting devices in the incoming branches let through, and those."""
    found: list[tuple[int, int]] = []
    limiting: dict[str, list[int]] = {}
    for k, branch in enumerate(devices.branch):
        if branch and devices.sheets[k] is not None:
            limiting.setdefault(branch, []).append(k)
    row_of = {int(p): row for row, p in enumerate(place)}
    peak = greatest_a.copy()
    for end, branch in enumerate(case.ends.branches):
        row = row_of.get(int(case.ends.place[end]), -1)
        comes = float(case.ends.through_ip_a[end])
        if row < 0 or comes <= 0.0:
            continue
        for k in limiting.get(branch, ()):
            sheet, release = devices.sheets[k], devices.releases[k]
            opens = float(case.ends.through_half_a[end]) >= release.limits_from_a
            cut = np.nan
            if sheet is not None and opens:
                cut = float(sheet.cut_off_at_a(case.ends.through_initial_a[end : end + 1])[0])
            if cut < comes:
                peak[row] -= comes - cut
                comes = cut
                found.append((row, k))
    return peak, found


def tie_ratings(plant: Plant, result: ShortCircuitResult) -> TieRatings:
    """Return what flows through every tie in a fault on either of its boards.

    Parameters
    ----------
    plant : Plant
        Boards and ties.
    result : ShortCircuitResult
        Currents.

    Returns
    -------
    TieRatings
        In workbook order.
    """
    ties = plant.ties
    pairs = [(plant.board(t.board_a), plant.board(t.board_b)) for t in ties]
    by_peak = [_weaker(pair, [b.peak_withstand_ka for b in pair]) for pair in pairs]
    by_heat = [_weaker(pair, [b.short_time_withstand_ka for b in pair]) for pair in pairs]
    duration = given([b.short_time_duration_s for b in by_heat])
    table = Stacked([_tie_mode(ties, mode, result.f_hz, duration) for mode in result.modes], len(ties))
    heat_ka = equivalent_short_time_current_a(table["heat_a2s"], duration[:, None]) / 1000.0
    peak_ka, live = table["peak_a"] / 1000.0, table["live"] > 0.0
    rated_peak = given([b.peak_withstand_ka for b in by_peak])
    rated_short = given([b.short_time_withstand_ka for b in by_heat])
    return TieRatings(
        names=tuple(t.name for t in ties),
        rated_peak_ka=read_only(rated_peak),
        rated_by=tuple(b.name for b in by_peak),
        rated_short_time_ka=read_only(rated_short),
        rated_duration_s=read_only(duration),
        rated_heat_by=tuple(b.name for b in by_heat),
        live=read_only(live, np.bool_),
        peak_ka=read_only(peak_ka),
        heat_ka=read_only(heat_ka),
        nominal_peak=read_only(table["nominal_peak"]),
        nominal_initial=read_only(table["nominal_initial"]),
        worst_mode=read_only(
            worst_mode(live, peak_ka / rated_peak[:, None], heat_ka / rated_short[:, None], peak_ka),
            np.int64,
        ),
    )


def _weaker(pair: tuple[Board, Board], ratings: list[float | None]) -> Board:
    """Return the board of the lower rating, or the one whose rating is not given."""
    missing = [board for board, value in zip(pair, ratings, strict=True) if value is None]
    if missing:
        return missing[0]
    return pair[0] if given(ratings)[0] <= given(ratings)[1] else pair[1]


def _tie_mode(ties: tuple[Tie, ...], mode: ModeShortCircuit, f_hz: float, duration_s: FloatArray) -> Arrays:
    case = mode.maximum
    row_of = {t.name: k for k, t in enumerate(ties)}
    ends = np.array([k for k, name in enumerate(case.ends.branches) if name in row_of], np.int64)
    tie = np.array([row_of[case.ends.branches[k]] for k in ends], np.int64)
    place = case.ends.place[ends]
    _, through = case_histories(case, place, case.ends.share[ends], knots_s(f_hz, case.parts.ends_s))
    heat = through.heat_a2s(duration_s[tie]) if len(ends) else np.zeros(0)
    nominal = nominal_ratios(case, place)
    return {
        "live": np.isin(np.arange(len(ties)), tie),
        "peak_a": _larger(len(ties), tie, case.ends.through_ip_a[ends]),
        "heat_a2s": _larger(len(ties), tie, heat),
        "nominal_peak": _larger(len(ties), tie, nominal[0]),
        "nominal_initial": _larger(len(ties), tie, nominal[1]),
    }


def _larger(rows: int, row: IntArray, values: FloatArray) -> FloatArray:
    """Return the larger value of both ends, NaN for a tie that is open."""
    best = np.full(rows, np.nan)
    for k, value in zip(row, values, strict=True):
        best[k] = np.fmax(best[k], value)
    return best
