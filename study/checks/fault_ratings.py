"""Fault duty against ratings: boards, breakers, fuses, cables, ties; and whether every fault is cleared."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from study.checks.fault_ratings_clearing import judge_clearing
from study.checks.fault_ratings_devices import judge_devices
from study.checks.fault_ratings_earth import judge_earth_faults
from study.checks.fault_ratings_through import judge_through_faults
from study.checks.fault_ratings_verdict import rating_verdict
from study.checks.limits import Limits
from study.checks.verdict import Verdict
from study.model.plant import Plant
from study.results.fault_ratings import BoardRatings, CableRatings, FaultRatingsResult

_LOW_PEAK = "IEC 61439-1 cl. 5.3.4, rated peak withstand current, from memory"
_LOW_SHORT = "IEC 61439-1 cl. 5.3.5, rated short-time withstand current, from memory"
_HIGH = "IEC 62271-1, rated short-time and peak withstand current, from memory"
_CABLE = "IEC 60949:1988 cl. 3, adiabatic"
_TIE = "taken as built like the busbars that it joins; common practice, no source"


def judge_fault_ratings(plant: Plant, result: FaultRatingsResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge every piece of equipment against the fault it must survive, duty by duty, in every mode.

    Parameters
    ----------
    plant : Plant
        For the cells that govern.
    result : FaultRatingsResult
        Duties and ratings.
    limits : Limits
        The limits in force.

    Returns
    -------
    tuple of Verdict
        Subject ``fault ratings``; a rating that is not given is not assessed.
    """
    verdicts: list[Verdict] = []
    for mode in range(len(result.modes)):
        verdicts += _boards(plant, result, mode, limits)
        verdicts += judge_devices(plant, result, mode, limits)
        verdicts += _cables(plant, result, mode, limits)
        verdicts += _ties(plant, result, mode, limits)
        verdicts += judge_through_faults(plant, result, mode, limits)
        verdicts += judge_clearing(plant, result, mode, limits)
    verdicts += judge_earth_faults(plant, result, limits)
    return tuple(verdicts)


def _boards(plant: Plant, result: FaultRatingsResult, mode: int, limits: Limits) -> Iterator[Verdict]:
    boards = result.boards
    for k in np.flatnonzero(boards.live[:, mode]):
        yield _board_peak(plant, result.modes[mode], boards, (int(k), mode), limits)
        name = boards.names[k]
        basis = _HIGH if boards.medium_voltage[k] else _LOW_SHORT
        rated = float(boards.rated_short_time_ka[k])
        cell = "Short-time duration" if math.isnan(boards.rated_duration_s[k]) else "Short-time withstand"
        remedy = _needs("short-time withstand Icw", float(boards.enough_short_time_ka[k]), "kA")
        unknown = result.unknown.sets[mode] if result.unknown.boards[k, mode] else ""
        for quantity, value, heading, rests_on in (
            (
                "short-time withstand Icw against the heat of the decaying current",
                boards.heat_ka,
                cell,
                unknown,
            ),
            ("short-time withstand Icw against Iac at T/2", boards.half_ka, "Short-time withstand", ""),
        ):
            yield rating_verdict(
                mode=result.modes[mode],
                equipment=name,
                quantity=quantity,
                value=float(value[k, mode]),
                limit=rated,
                nominal=float(boards.nominal_initial[k, mode]),
                limits=limits,
                basis=basis,
                cell=plant.cell_of(name, heading),
                remedy=remedy,
                unknown=rests_on,
            )


def _board_peak(
    plant: Plant, mode: str, boards: BoardRatings, at: tuple[int, int], limits: Limits
) -> Verdict:
    k = at[0]
    basis = _HIGH if boards.medium_voltage[k] else _LOW_PEAK
    prospective, limited = float(boards.greatest_peak_ka[at]), float(boards.limited_peak_ka[at])
    if limited < prospective:
        basis += f"; prospective peak {prospective:.1f} kA, cut off by {boards.limited_by[k]}"
    return rating_verdict(
        mode=mode,
        equipment=boards.names[k],
        quantity="peak withstand Ipk against the greatest peak",
        value=limited,
        limit=float(boards.rated_peak_ka[k]),
        nominal=float(boards.nominal_peak[at]),
        limits=limits,
        basis=basis,
        cell=plant.cell_of(boards.names[k], "Peak withstand"),
        remedy=_needs("peak withstand Ipk", float(boards.enough_peak_ka[k]), "kA"),
    )


def _needs(what: str, enough: float, unit: str) -> str:
    if math.isnan(enough):
        return f"No usual {what} suffices: limit the fault level, by fewer sets together or a reactor."
    return f"Needs a {what} of {enough:g} {unit}, the next usual rating that suffices in all modes."


def _cables(plant: Plant, result: FaultRatingsResult, mode: int, limits: Limits) -> Iterator[Verdict]:
    cables = result.cables
    for k in np.flatnonzero(cables.live[:, mode]):
        yield _near(plant, result, (int(k), mode), limits)
        if not math.isnan(cables.far_heat_a2s[k, mode]):
            yield rating_verdict(
                mode=result.modes[mode],
                equipment=cables.names[k],
                quantity="heat of the least fault at the far end until it is cleared",
                value=float(cables.far_heat_a2s[k, mode]) / 1e6,
                limit=float(cables.withstand_a2s[k]) / 1e6,
                unit="kA²s",
                nominal=1.0,
                limits=limits,
                basis=f"{_CABLE}, k {cables.k[k]:.0f}",
                cell=plant.cell_of(cables.names[k], "Section"),
                remedy=_section(cables, int(k)),
                unknown=result.unknown.sets[mode] if result.unknown.far_cables[k, mode] else "",
            )


def _near(plant: Plant, result: FaultRatingsResult, at: tuple[int, int], limits: Limits) -> Verdict:
    cables, k = result.cables, at[0]
    name, device = cables.names[k], int(cables.device[at])
    if not cables.devices[k]:
        how, cell = "; no device stands on it", plant.cell_of(name, "Section")
    elif device < 0:
        how = f"; {cables.devices[k][0]} has no setting that gives a clearing time"
        cell = plant.cell_of(cables.devices[k][0], "Instantaneous current")
    else:
        stage = cables.stages[cables.cleared_by[at]]
        by = "let-through I²t" if cables.let_through[at] else f"{stage}, {cables.clearing_s[at]:.3g} s"
        how = (
            f"; {plant.devices[device].name}: {by}"
            if math.isfinite(cables.clearing_s[at])
            else (f"; {plant.devices[device].name} does not clear")
        )
        cell = plant.cell_of(name, "Section")
    return rating_verdict(
        mode=result.modes[at[1]],
        equipment=name,
        quantity="heat of a fault at the near end until it is cleared",
        value=float(cables.heat_a2s[at]) / 1e6,
        limit=float(cables.withstand_a2s[k]) / 1e6,
        unit="kA²s",
        nominal=float(cables.nominal_initial[at]) ** 2,
        limits=limits,
        basis=f"{_CABLE}, k {cables.k[k]:.0f}{how}",
        cell=cell,
        remedy=_section(cables, k),
        unknown=result.unknown.sets[at[1]] if result.unknown.cables[at] else "",
    )


def _section(cables: CableRatings, k: int) -> str:
    enough = float(cables.enough_mm2[k])
    if math.isnan(enough):
        return "No usual section suffices: let the device clear sooner (its delay), or lay more runs."
    return f"Needs {enough:g} mm2 in each run, or a device that clears sooner (its delay)."


def _ties(plant: Plant, result: FaultRatingsResult, mode: int, limits: Limits) -> Iterator[Verdict]:
    for k in np.flatnonzero(result.ties.live[:, mode]):
        for peak in (True, False):
            yield _tie(plant, result, (int(k), mode, peak), limits)


def _tie(plant: Plant, result: FaultRatingsResult, at: tuple[int, int, bool], limits: Limits) -> Verdict:
    k, m, peak = at
    ties, mode = result.ties, result.modes[m]
    unknown = result.unknown.sets[m] if result.unknown.ties[k, m] and not peak else ""
    board = ties.rated_by[k] if peak else ties.rated_heat_by[k]
    rated = ties.rated_peak_ka if peak else ties.rated_short_time_ka
    return rating_verdict(
        mode=mode,
        equipment=ties.names[k],
        quantity=f"peak through the tie against Ipk of {board}"
        if peak
        else f"heat through the tie against Icw of {board}",
        value=float((ties.peak_ka if peak else ties.heat_ka)[k, m]),
        limit=float(rated[k]),
        nominal=float((ties.nominal_peak if peak else ties.nominal_initial)[k, m]),
        limits=limits,
        basis=_TIE,
        cell=plant.cell_of(board, "Peak withstand" if peak else "Short-time withstand"),
        remedy="Take a tie and busbars of a higher rating, or part the sections in this mode.",
        unknown=unknown,
    )
