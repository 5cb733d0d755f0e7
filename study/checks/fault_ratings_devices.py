"""Breakers and fuses: making, breaking and short-time withstand against their ratings."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from study.checks.fault_ratings_verdict import rating_verdict
from study.checks.limits import Limits
from study.checks.verdict import Verdict
from study.model.plant import Plant
from study.results.fault_ratings import DeviceRatings, FaultRatingsResult

_MAKING = "IEC 60947-2:2006 cl. 4.3.5.1"
_RATIO = "IEC 60947-2:2006 table 2"
_BREAKING = "IEC 60947-2:2006 cl. 4.3.5.2"
_SHORT_TIME = "IEC 60947-2:2006 cl. 4.3.5.4"
_CLOSED = "IEC 60947-1 table 16, first peak of the short-time withstand test"
_HIGH = "IEC 62271-100"
_MEMORY = ", from memory"


def judge_devices(plant: Plant, result: FaultRatingsResult, mode: int, limits: Limits) -> Iterator[Verdict]:
    """Judge breakers and fuses that are live in one mode.

    Parameters
    ----------
    plant : Plant
        For the cells that govern.
    result : FaultRatingsResult
        Duties and ratings.
    mode : int
        Which mode.
    limits : Limits
        Whether Ics or Icu is held against the breaking current.

    Yields
    ------
    Verdict
        One for each device and duty.
    """
    devices = result.devices
    for k in np.flatnonzero(devices.live[:, mode]):
        unknown = result.unknown.sets[mode] if result.unknown.devices[k, mode] else ""
        judged = _Judged(plant, devices, (int(k), mode), result.modes[mode], limits)
        match devices.rules[k]:
            case "fuse":
                yield judged.fuse()
            case "low-voltage breaker":
                yield judged.making(_MAKING, _RATIO)
                yield judged.breaking()
                yield from judged.carrying(_SHORT_TIME, _CLOSED, unknown)
            case "medium-voltage breaker":
                yield judged.making(_HIGH + " cl. 4.103", _HIGH + " cl. 4.103")
                yield from judged.parting()
                yield from judged.carrying(_HIGH + " cl. 4.5", _HIGH + " cl. 4.6", unknown)


class _Judged:
    """One device in one mode."""

    def __init__(
        self, plant: Plant, devices: DeviceRatings, at: tuple[int, int], mode: str, limits: Limits
    ) -> None:
        self.plant, self.devices, self.at, self.mode, self.limits = plant, devices, at, mode, limits
        self.name = devices.names[at[0]]
        side = "through its own branch" if devices.through[at] else "by the rest of the plant"
        self.side = f"; fed {side}"

    def _verdict(
        self,
        quantity: str,
        value: float,
        limit: float,
        *,
        nominal: float,
        basis: str,
        heading: str,
        remedy: str,
        detail: str = "",
        unknown: str = "",
    ) -> Verdict:
        return rating_verdict(
            mode=self.mode,
            equipment=self.name,
            quantity=quantity,
            value=value,
            limit=limit,
            nominal=nominal,
            limits=self.limits,
            basis=basis + _MEMORY + detail + self.side,
            cell=self.plant.cell_of(self.name, heading),
            remedy=remedy,
            unknown=unknown,
        )

    def _enough(self) -> str:
        enough = float(self.devices.enough_breaking_ka[self.at[0]])
        if math.isnan(enough):
            return "No usual breaking capacity suffices: limit the fault level."
        return f"Take a device of {enough:g} kA, the next usual breaking capacity that suffices in all modes."

    def fuse(self) -> Verdict:
        """Judge the breaking capacity of a fuse."""
        d, k = self.devices, self.at[0]
        return self._verdict(
            "breaking capacity of the fuse against I''k",
            float(d.needed_ka[self.at]),
            float(np.fmin(d.icu_ka[k], d.ics_ka[k])),
            nominal=float(d.nominal_initial[self.at]),
            basis="IEC 60269-1 cl. 5.7.2",
            heading="Icu",
            remedy=self._enough(),
        )

    def making(self, declared: str, ratio: str) -> Verdict:
        """Judge the peak onto which a breaker may close."""
        d, k = self.devices, self.at[0]
        return self._verdict(
            "making capacity Icm against the peak",
            float(d.peak_ka[self.at]),
            float(d.making_peak_ka[k]),
            nominal=float(d.nominal_peak[self.at]),
            basis=declared if d.making_declared[k] else ratio,
            detail="" if d.making_declared[k] else "; Icm is not declared, n x Icu stands in",
            heading="Icm" if d.making_declared[k] else "Icu",
            remedy=self._enough(),
        )

    def breaking(self) -> Verdict:
        """Judge what a low-voltage breaker breaks, raised where the power factor is below its test's."""
        d, k = self.devices, self.at[0]
        rating = self.limits.text("breaking_rating")
        icu, ics = float(d.icu_ka[k]), float(d.ics_ka[k])
        value, limit = float(d.needed_ka[self.at]), ics if rating == "Ics" else icu
        if math.isnan(limit) and value > icu:
            rating, limit = "Icu", icu
        detail = ""
        if d.peak_governs[self.at]:
            detail = (
                f"; Iac(T/2) {d.half_ka[self.at]:.2f} kA, raised to cover a peak of"
                f" {d.peak_ka[self.at]:.1f} kA at a power factor of {d.cos_phi[self.at]:.2f}, table 2"
            )
        return self._verdict(
            f"breaking capacity {rating} against Iac at T/2 and its power factor",
            value,
            limit,
            nominal=float((d.nominal_peak if d.peak_governs[self.at] else d.nominal_initial)[self.at]),
            basis=_BREAKING,
            detail=detail,
            heading=rating,
            remedy=self._enough(),
        )

    def parting(self) -> Iterator[Verdict]:
        """Judge what a breaker above 1 kV breaks when its contacts part."""
        d, k = self.devices, self.at[0]
        nominal = float(d.nominal_initial[self.at])
        after = f"; contacts part after {1000.0 * d.parting_s[k]:.0f} ms"
        yield self._verdict(
            "breaking current against Iac when the contacts part",
            float(d.parting_ka[self.at]),
            float(d.icu_ka[k]),
            nominal=nominal,
            basis=_HIGH + " cl. 4.101",
            detail=after,
            heading="Icu",
            remedy=self._enough(),
        )
        yield self._verdict(
            "asymmetrical breaking current when the contacts part",
            float(d.asymmetrical_ka[self.at]),
            float(d.rated_asymmetrical_ka[k]),
            nominal=nominal,
            basis=_HIGH + " cl. 4.101",
            detail=f"; direct component {100.0 * d.dc_part[self.at]:.0f} %, rated"
            f" {100.0 * d.rated_dc_part[k]:.0f} % at 45 ms{after}",
            heading="Icu",
            remedy=self._enough(),
        )
        yield rating_verdict(
            mode=self.mode,
            equipment=self.name,
            quantity="direct component when the contacts part: above 100 % no current zero",
            value=100.0 * float(d.dc_part[self.at]),
            limit=100.0,
            unit="%",
            limits=self.limits,
            basis="IEC/IEEE 62271-37-013, delayed current zeros" + _MEMORY + after,
            cell=self.plant.cell_of(self.name, "Opening time min"),
            remedy="Let the breaker open later, or take one that is proven for delayed current zeros.",
        )

    def carrying(self, short_time: str, closed: str, unknown: str) -> Iterator[Verdict]:
        """Judge what a breaker that opens with a delay carries closed until then."""
        d, k = self.devices, self.at[0]
        if not d.delayed[self.at]:
            return
        stage, seconds = d.stages[d.cleared_by[self.at]], float(d.clearing_s[self.at])
        missing = math.isnan(d.icw_duration_s[k]) and not math.isnan(d.icw_ka[k])
        over = "duration of Icw not given" if missing else f"I²t over {d.icw_duration_s[k]:g} s"
        yield self._verdict(
            "short-time withstand Icw against the heat until it opens",
            float(d.heat_ka[self.at]),
            float(d.icw_ka[k]),
            nominal=float(d.nominal_initial[self.at]),
            basis=short_time,
            detail=f"; {over}; {stage}, {seconds:.3g} s",
            heading="Icw duration" if missing else "Icw",
            remedy="Shorten the delay, or take a breaker of a higher Icw.",
            unknown=unknown,
        )
        yield self._verdict(
            "peak while it stays closed against n x Icw",
            float(d.closed_peak_ka[self.at]),
            float(d.rated_closed_peak_ka[k]),
            nominal=float(d.nominal_peak[self.at]),
            basis=closed,
            detail=f"; {stage}, {seconds:.3g} s",
            heading="Icw",
            remedy="Take a breaker of a higher Icw, or let it open at once above the peak that it can hold.",
        )
