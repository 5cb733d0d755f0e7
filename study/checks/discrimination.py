"""Grading: does the nearest device open alone, in time, and does it hold what is no fault."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Final

import numpy as np

from study.checks.limits import Limits
from study.checks.verdict import Verdict, make_verdict
from study.model.plant import Plant
from study.results.grading import FULL, NONE, NOT_ASSESSED, PARTIAL, GradingResult, RideThrough

SUBJECT: Final = "grading"
# A device that is so much later than the one behind it has not picked up with its short-circuit stages.
_SLOW_S = 1.0
_BANDS = "bands with all tolerances; "
_START = "earliest trip at the current of the event"


def judge_discrimination(plant: Plant, result: GradingResult, limits: Limits) -> tuple[Verdict, ...]:
    """Judge pairs, reach and what has to be held, in every mode.

    Parameters
    ----------
    plant : Plant
        For the cells that govern.
    result : GradingResult
        Pairs, reach, starts.
    limits : Limits
        Least margin, longest time.

    Returns
    -------
    tuple of Verdict
        Subject ``grading``: every pair that fails or could not be told, and for each device the pair with the
        least margin; every least fault; every start against its devices in its worst mode.
    """
    judged = _Judged(plant, result, limits)
    found: list[Verdict] = []
    for mode in range(len(result.modes)):
        found += judged.pairs(mode)
        found += judged.reach(mode)
    found += [judged.held(row) for row in result.ride_through]
    return tuple(found)


class _Judged:
    def __init__(self, plant: Plant, result: GradingResult, limits: Limits) -> None:
        self.plant, self.result, self.limits = plant, result, limits
        self.cures: dict[tuple[str, str], str] = {}
        for change in result.changes:
            for downstream, upstream, _ in change.cures:
                self.cures[downstream, upstream] = (
                    f"Set {change.setting[0].lower()}{change.setting[1:]} of {change.device} to"
                    f" {change.proposed:g} {change.unit} (now {change.now:g} {change.unit}): "
                    "every pair was graded again with it."
                )

    def _verdict(
        self,
        mode: str,
        station: int,
        quantity: str,
        figures: tuple[float, float, str],
        *,
        at_most: bool = False,
        basis: str,
        cell: str,
        remedy: str = "",
    ) -> Verdict:
        return make_verdict(
            mode=mode,
            subject=SUBJECT,
            equipment=self.result.stations.names[station],
            quantity=quantity,
            value=figures[0],
            limit=figures[1],
            unit=figures[2],
            sense="at most" if at_most else "at least",
            close_margin=self.limits.fraction("close_margin"),
            basis=basis,
            cell=cell,
            remedy=remedy,
        )

    # ---- pairs

    def pairs(self, mode: int) -> Iterator[Verdict]:
        """Judge the pairs of one mode."""
        p = self.result.pairs
        extent = p.extent[:, mode]
        for k in np.flatnonzero(np.isin(extent, (PARTIAL, NONE, NOT_ASSESSED))).tolist():
            yield self._not_graded(k, mode)
        full = np.flatnonzero(extent == FULL)
        least: dict[int, int] = {}
        for k in full[np.argsort(p.margin_s[full, mode] - p.needed_s[full, mode], kind="stable")].tolist():
            least.setdefault(int(p.downstream[k]), k)
        for k in least.values():
            yield self._graded(k, mode)

    def _graded(self, k: int, mode: int) -> Verdict:
        p = self.result.pairs
        other = self.result.stations.names[p.upstream[k]]
        return self._verdict(
            self.result.modes[mode],
            int(p.downstream[k]),
            "least time between clearing and release behind it",
            (float(p.margin_s[k, mode]), float(p.needed_s[k, mode]), "s"),
            basis=f"{self._basis(k, mode)}; against {other}",
            cell=self._cell(k, mode),
        )

    def _not_graded(self, k: int, mode: int) -> Verdict:
        p, names = self.result.pairs, self.result.stations.names
        own, other = int(p.downstream[k]), int(p.upstream[k])
        what = f"discrimination with {names[other]}"
        range_of = f"it discriminates with {names[other]}"
        basis, cell = self._basis(k, mode), self._cell(k, mode)
        remedy = self.cures.get((names[own], names[other]), self._remedy(k, mode))
        where = self.result.modes[mode]
        margin, needed = float(p.margin_s[k, mode]), float(p.needed_s[k, mode])
        up_to, start = float(p.up_to_a[k, mode]), float(p.from_a[k, mode])
        if p.extent[k, mode] == NOT_ASSESSED:
            said = self.result.stations.unknown[own] or self.result.stations.unknown[other]
            return self._verdict(where, own, what, (math.nan, needed, "s"), basis=said or basis, cell=cell)
        if up_to > 0.0:
            largest = float(p.largest_a[k, mode])
            return self._verdict(
                where, own, f"fault current up to which {range_of}",
                (up_to / 1000.0, largest / 1000.0, "kA"),
                basis=basis, cell=cell, remedy=remedy,
            )  # fmt: skip
        if math.isfinite(start):
            least = min(float(p.current_a[k, mode]), start)
            return self._verdict(
                where, own, f"fault current from which {range_of}",
                (start / 1000.0, least / 1000.0, "kA"), at_most=True,
                basis=basis, cell=cell, remedy=remedy,
            )  # fmt: skip
        if math.isinf(margin):
            alone = f"{names[other]} alone opens for a fault that {names[own]} is to clear"
            return self._verdict(
                where, own, alone, (1.0, 0.0, "-"), at_most=True, basis=basis, cell=cell, remedy=remedy
            )
        released, cleared = float(p.releases_s[k, mode]), float(p.clears_s[k, mode])
        return self._verdict(
            where, own, f"time until {names[other]} releases", (released, cleared + needed, "s"),
            basis=basis, cell=cell, remedy=remedy,
        )  # fmt: skip

    def _basis(self, k: int, mode: int) -> str:
        p = self.result.pairs
        rule, level = self.result.rules[p.rule[k, mode]], self.result.levels[p.level[k, mode]]
        clears, releases = float(p.clears_s[k, mode]), float(p.releases_s[k, mode])
        when = f"{clears:.3g} s" if math.isfinite(clears) else "never"
        then = f"{releases:.3g} s" if math.isfinite(releases) else "never"
        return (
            f"{_BANDS}{rule}; {level}, {p.current_a[k, mode] / 1000.0:.2f} kA: cleared at the latest {when},"
            f" {p.upstream_a[k, mode] / 1000.0:.2f} kA behind it, released at the earliest {then}"
        )

    def _cell(self, k: int, mode: int) -> str:
        p, stations = self.result.pairs, self.result.stations
        device = stations.set_at[p.upstream[k]]
        heading = "Short-time delay"
        if self.result.rules[p.rule[k, mode]].startswith("instantaneous"):
            heading = "Instantaneous current"
        elif not p.margin_s[k, mode] > -_SLOW_S:
            device, heading = stations.set_at[p.downstream[k]], "Short-time current"
        return self.plant.cell_of(device, heading)

    def _remedy(self, k: int, mode: int) -> str:
        p, names = self.result.pairs, self.result.stations.names
        own, other = names[p.downstream[k]], names[p.upstream[k]]
        if self.result.rules[p.rule[k, mode]].startswith("instantaneous"):
            return (
                f"Set the instantaneous stage of {other} above the fault, or off; or show discrimination by "
                "the maker's table (sheet Maker discrimination)."
            )
        if not p.margin_s[k, mode] > -_SLOW_S:
            return f"Set the short-time current of {own} below the current of this fault."
        return f"Delay {other} longer, or let {own} open sooner."

    # ---- reach

    def reach(self, mode: int) -> Iterator[Verdict]:
        """Judge the least faults of one mode."""
        r = self.result.reach
        for k in np.flatnonzero(r.present[:, mode]).tolist():
            station, by = int(r.station[k]), int(r.by[k, mode])
            if by == -2:
                continue
            others = by not in (-1, station)
            who = f"; by {self.result.stations.names[by]}: discrimination is lost" if others else ""
            device = self.result.stations.set_at[station]
            clears = float(r.clears_s[k, mode])
            yield self._verdict(
                self.result.modes[mode],
                station,
                "time until the least fault is cleared",
                (clears, self.limits.number("fault_clearing"), "s"),
                at_most=True,
                basis=f"{self.limits.basis('fault_clearing')}; {r.least_a[k, mode]:.0f} A in {r.zone[k]}{who}"
                if not math.isnan(clears)
                else self.result.stations.unknown[station] or "the device's settings are not given",
                cell=self.plant.cell_of(device, "Short-time current"),
                remedy=f"Set {device} lower or faster, or fit an excitation that holds the current.",
            )

    # ---- what has to be held

    def held(self, row: RideThrough) -> Verdict:
        """Judge one start, inrush or restart."""
        device = self.result.stations.set_at[row.station]
        assumed = f"; {row.assumed}" if row.assumed else ""
        return self._verdict(
            row.mode,
            row.station,
            f"{row.event.split(',')[0]}: time that it is held for",
            (row.trips_s, row.needed_s, "s"),
            basis=f"{_START} of {row.equipment}, {row.current_a:.0f} A{assumed}"
            if not math.isnan(row.trips_s)
            else self.result.stations.unknown[row.station] or "the device's settings are not given",
            cell=self.plant.cell_of(
                device, "Instantaneous current" if row.trips_s == 0.0 else "Long-time delay"
            ),
            remedy=f"Set {self.result.stations.names[row.station]} higher or slower.",
        )
