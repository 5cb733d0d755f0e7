"""Made-up fault ratings for the report: just beyond a rating, without a rating, never cleared, dead."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from study.checks.verdict import Verdict, make_verdict
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.fault_ratings import (
    BoardRatings,
    CableRatings,
    ClearingRatings,
    DeviceRatings,
    EarthFaultRow,
    FaultRatingsResult,
    ResistorRatings,
    ThroughRatings,
    TieRatings,
    UnknownSustained,
)

NAN = math.nan
STAGES = ("does not clear", "instantaneous", "short-time delay")
JUST_ABOVE_KA = 105.00004
RULES = (
    "low-voltage breaker",
    "low-voltage breaker",
    "medium-voltage breaker",
    "fuse",
    "low-voltage breaker",
)


def fault_ratings(plant: Plant) -> FaultRatingsResult:
    """Return a whole result for a plant."""
    modes = tuple(mode.name for mode in plant.modes)
    return FaultRatingsResult(
        modes=modes,
        boards=_boards(plant, len(modes)),
        devices=_devices(plant, len(modes)),
        clearing=_clearing(plant, len(modes)),
        cables=_cables(plant, len(modes)),
        ties=_ties(plant, len(modes)),
        through=_through(len(modes)),
        resistors=ResistorRatings(
            boards=(plant.boards[0].name,),
            current_a=read_only([5.0]),
            rated_a=read_only([5.0]),
            rated_s=read_only([10.0]),
            live=read_only(np.ones((1, len(modes))), bool),
            lasts_s=read_only(np.full((1, len(modes)), np.inf)),
        ),
        unknown=_unknown(plant, len(modes)),
        earth=tuple(
            EarthFaultRow(
                mode=mode,
                boards=(plant.boards[0].name, plant.boards[1].name),
                u_nominal_v=440.0,
                earthing="insulated",
                capacitive_a=0.354,
                capacitance_given=False,
                fault_a=0.354,
                trips=(),
                pick_up_a=NAN,
                pick_up_device="",
            )
            for mode in modes
        ),
    )


def _through(modes: int) -> ThroughRatings:
    """Return a transformer, one whose fault nothing clears, and a reactor without a rating."""
    live = np.ones((3, modes), bool)
    return ThroughRatings(
        names=("T1", "T2", "X1"),
        behind=("DB", "DB", "DB"),
        words=("", "secondary", ""),
        kinds=("transformer", "transformer", "reactor"),
        withstand_ka=read_only([20.0, 15.0, NAN]),
        duration_s=read_only([2.0, 2.0, NAN]),
        rated_peak_ka=read_only([45.00004, 38.0, NAN]),
        live=read_only(live, bool),
        initial_ka=read_only(_rows([18.0, 14.0, 9.0], modes)),
        heat_ka=read_only(_rows([8.1, NAN, NAN], modes)),
        peak_ka=read_only(_rows([45.0001, 30.0, 20.0], modes)),
        device=read_only(np.outer([0, -1, -1], np.ones(modes)), np.int64),
        clearing_s=read_only(np.outer([0.3, NAN, NAN], np.ones(modes))),
        rests_on_unknown=read_only(~live, bool),
        worst_mode=read_only([modes - 1] * 3, np.int64),
    )


def _unknown(plant: Plant, modes: int) -> UnknownSustained:
    boards, devices, cables, ties = (len(x) for x in (plant.boards, RULES, plant.cables, plant.ties))
    counts = {
        "boards": boards,
        "devices": devices,
        "clearing": devices,
        "cables": cables,
        "far_cables": cables,
        "ties": ties,
    }
    return UnknownSustained(
        sets=("",) * modes, **{k: read_only(np.zeros((n, modes)), bool) for k, n in counts.items()}
    )


def fault_verdicts(ratings: FaultRatingsResult) -> tuple[Verdict, ...]:
    """Return verdicts of the peaks of boards, and of a heat that never ends."""
    found = []
    boards, cables = ratings.boards, ratings.cables
    for m, mode in enumerate(ratings.modes):
        for i, name in enumerate(boards.names):
            if boards.live[i, m]:
                found.append(
                    _verdict(
                        mode,
                        name,
                        "peak withstand Ipk against the greatest peak",
                        value=boards.limited_peak_ka[i, m],
                        limit=boards.rated_peak_ka[i],
                        unit="kA",
                    )
                )
        found.append(
            _verdict(
                mode,
                cables.names[0],
                "heat of a fault at the near end until it is cleared",
                value=cables.heat_a2s[0, m] / 1e6,
                limit=cables.withstand_a2s[0] / 1e6,
                unit="kA²s",
            )
        )
    return tuple(found)


def _verdict(mode: str, equipment: str, quantity: str, *, value: float, limit: float, unit: str) -> Verdict:
    return make_verdict(
        mode=mode,
        subject="fault ratings",
        equipment=equipment,
        quantity=quantity,
        value=float(value),
        limit=float(limit),
        unit=unit,
        close_margin=0.1,
        basis="a standard" if math.isfinite(limit) else "no rating given",
        cell="Boards!F4",
        remedy="Needs a peak withstand of <b>125</b> kA.",
    )


def _rows(values: list[float], modes: int, *, growth: float = 0.01) -> Any:
    """Return values [piece, mode], the last mode the greatest."""
    return read_only(np.outer(values, 1.0 - growth * np.arange(modes)[::-1]))


def _boards(plant: Plant, modes: int) -> BoardRatings:
    n = len(plant.boards)
    peak = np.linspace(70.0, 20.0, n)
    peak[0] = JUST_ABOVE_KA
    rated = np.where(np.arange(n) == 1, NAN, 105.0)
    live = np.ones((n, modes), bool)
    live[-1] = False
    dark = np.where(live, 1.0, NAN)
    peaks = _rows(list(peak), modes) * dark
    return BoardRatings(
        names=tuple(b.name for b in plant.boards),
        medium_voltage=read_only(np.zeros(n), bool),
        rated_peak_ka=read_only(rated),
        rated_short_time_ka=read_only(np.full(n, 50.0)),
        rated_duration_s=read_only(np.where(np.arange(n) == 2, NAN, 1.0)),
        live=read_only(live, bool),
        ip_peak_ka=read_only(0.98 * peaks),
        greatest_peak_ka=read_only(peaks),
        limited_peak_ka=read_only(peaks),
        limited_by=("",) * n,
        half_ka=read_only(0.4 * peaks),
        heat_ka=read_only(np.where(np.arange(n) == 2, NAN, 1.0)[:, None] * 0.15 * peaks),
        nominal_peak=read_only(0.9 * dark),
        nominal_initial=read_only(0.9 * dark),
        enough_peak_ka=read_only(np.full(n, 143.0)),
        enough_short_time_ka=read_only(np.where(np.arange(n) == 3, NAN, 50.0)),
        worst_mode=read_only(np.where(live.any(axis=1), modes - 1, -1), np.int64),
    )


def _devices(plant: Plant, modes: int) -> DeviceRatings:
    n = len(RULES)
    live = np.ones((n, modes), bool)
    live[-1] = False
    dark = np.where(live, 1.0, NAN)
    high = np.array([rule.startswith("medium") for rule in RULES])
    half = _rows([18.1, 30.0, 20.0, 12.0, 10.0], modes) * dark
    peak = _rows([48.4, 66.00004, 55.0, 25.0, 20.0], modes) * dark
    icu = np.array([25.0, 30.0, 25.0, 80.0, 25.0])
    delayed = np.broadcast_to(np.array([True, False, False, False, False])[:, None], (n, modes))
    only_high = np.where(high, 1.0, NAN)[:, None]
    return DeviceRatings(
        names=tuple(f"Q{i + 1}" for i in range(n)),
        rules=RULES,
        stages=STAGES,
        icu_ka=read_only(icu),
        ics_ka=read_only([25.0, NAN, NAN, NAN, 25.0]),
        icw_ka=read_only([20.0, NAN, 25.0, NAN, 20.0]),
        icw_duration_s=read_only([1.0, NAN, 1.0, NAN, 1.0]),
        making_peak_ka=read_only([52.5, 66.0, 62.5, NAN, 52.5]),
        making_declared=read_only([True, False, True, False, False], bool),
        live=read_only(live, bool),
        initial_ka=read_only(1.2 * half),
        half_ka=read_only(half),
        peak_ka=read_only(peak),
        through=read_only(np.broadcast_to((np.arange(n) == 0)[:, None], (n, modes)), bool),
        cos_phi=read_only(0.12 * dark),
        needed_ka=read_only(np.where(np.arange(n)[:, None] == 0, peak / 2.1, half)),
        peak_governs=read_only(np.broadcast_to((np.arange(n) == 0)[:, None], (n, modes)), bool),
        parting_s=read_only(np.full(n, 0.05)),
        parting_ka=read_only(0.8 * half * only_high),
        dc_part=read_only(1.08 * dark * only_high),
        rated_dc_part=read_only(np.where(high, 0.35, NAN)),
        asymmetrical_ka=read_only(1.4 * half * only_high),
        rated_asymmetrical_ka=read_only(np.where(high, 27.9, NAN)),
        clearing_s=read_only(0.17 * dark),
        cleared_by=read_only(np.full((n, modes), 2), np.int64),
        delayed=read_only(delayed & live, bool),
        heat_ka=read_only(np.where(delayed, 6.3, NAN) * dark),
        closed_peak_ka=read_only(np.where(delayed, 48.4, NAN) * dark),
        rated_closed_peak_ka=read_only([40.0, NAN, 62.5, NAN, 40.0]),
        cut_off_peak_ka=read_only(np.where(np.arange(n)[:, None] == 3, 8.5, NAN) * dark),
        nominal_peak=read_only(0.9 * dark),
        nominal_initial=read_only(0.9 * dark),
        enough_breaking_ka=read_only([25.0, 36.0, 31.5, 15.0, NAN]),
        worst_mode=read_only(np.where(live.any(axis=1), modes - 1, -1), np.int64),
    )


def _clearing(plant: Plant, modes: int) -> ClearingRatings:
    n = len(RULES)
    shape = (n, modes)
    clears = np.ones(shape, bool)
    clears[1] = False
    judged = np.ones(shape, bool)
    judged[-1] = False
    dark = np.where(judged, 1.0, NAN)
    by = np.broadcast_to(np.array([0, -1, 0, -2, 4])[:, None], shape)
    return ClearingRatings(
        names=tuple(f"Q{i + 1}" for i in range(n)),
        stages=STAGES,
        judged=read_only(judged, bool),
        least_a=read_only(_rows([3454.3, 1900.0, 5000.0, 900.0, 1.0], modes) * dark),
        first_a=read_only(_rows([5115.0, 4200.0, 6000.0, 900.0, 1.0], modes) * dark),
        pick_up_a=read_only(np.broadcast_to(np.array([3300.0, 2719.0, 1000.0, np.inf, 1.0])[:, None], shape)),
        stage=read_only(np.broadcast_to(np.array([2, 2, 1, 0, 0])[:, None], shape), np.int64),
        clears=read_only(clears & judged, bool),
        by=read_only(by, np.int64),
        clearing_s=read_only(np.where(clears, 0.39, np.inf) * dark),
        due_s=read_only(np.where(clears, 0.39, 0.6) * dark),
        holds_s=read_only(np.where(clears, 10.0, 0.2) * dark),
        one_set_a=read_only(_rows([1200.0, 700.0, NAN, NAN, NAN], modes) * dark),
        kinds=(("two-phase",) * modes,) * n,
    )


def _cables(plant: Plant, modes: int) -> CableRatings:
    names = tuple(cable.name for cable in plant.cables)
    n = len(names)
    withstand = np.full(n, 2.047e6)
    withstand[2] = NAN
    heat = np.linspace(5.18e6, 0.01e6, n)
    heat[0] = np.inf
    device = np.zeros((n, modes), int)
    device[1] = -1
    cleared = np.where(np.isinf(heat), 0, 1)[:, None] * np.ones((n, modes), int)
    return CableRatings(
        names=names,
        stages=STAGES,
        k=read_only(np.full(n, 143.0)),
        withstand_a2s=read_only(withstand),
        devices=tuple(("Q1",) if i != 1 else () for i in range(n)),
        live=read_only(np.ones((n, modes)), bool),
        heat_a2s=read_only(np.where(device < 0, NAN, heat[:, None])),
        device=read_only(device, np.int64),
        clearing_s=read_only(np.where(np.isinf(heat)[:, None], np.inf, 0.06) * np.ones((n, modes))),
        cleared_by=read_only(cleared, np.int64),
        let_through=read_only(np.zeros((n, modes)), bool),
        end_degc=read_only(np.full((n, modes), 216.0)),
        far_heat_a2s=read_only(np.full((n, modes), NAN)),
        nominal_initial=read_only(np.full((n, modes), 0.9)),
        enough_mm2=read_only(np.where(np.arange(n) == 0, NAN, 16.0)),
        worst_mode=read_only(np.full(n, modes - 1), np.int64),
    )


def _ties(plant: Plant, modes: int) -> TieRatings:
    names = tuple(tie.name for tie in plant.ties)
    n = len(names)
    board = plant.boards[0].name
    return TieRatings(
        names=names,
        rated_peak_ka=read_only(np.full(n, 105.0)),
        rated_by=(board,) * n,
        rated_short_time_ka=read_only(np.full(n, NAN)),
        rated_duration_s=read_only(np.full(n, 1.0)),
        rated_heat_by=(board,) * n,
        live=read_only(np.ones((n, modes)), bool),
        peak_ka=read_only(np.full((n, modes), 35.9)),
        heat_ka=read_only(np.full((n, modes), 20.0)),
        nominal_peak=read_only(np.full((n, modes), 0.9)),
        nominal_initial=read_only(np.full((n, modes), 0.9)),
        worst_mode=read_only(np.full(n, modes - 1), np.int64),
    )
