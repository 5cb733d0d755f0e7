"""Settings to try against a failure: within their ranges, the least change first."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from study.analyses.grading_bands import Openers
from study.analyses.grading_stations import Stations
from study.analyses.grading_targets import Target
from study.model.protection import Device, SettingRange

FIELDS: Final = {
    "Long-time current": ("long_time_a", "A"),
    "Short-time current": ("short_time_a", "A"),
    "Short-time delay": ("short_time_delay_s", "s"),
    "Instantaneous current": ("instantaneous_a", "A"),
    "Time multiplier": ("time_multiplier", ""),
}
# Overload settings are those of what is protected: they are not touched to cure a grading.
_NEVER: Final = ("Long-time current", "Long-time delay", "Earth-fault current", "Earth-fault delay")
_LOWER: Final = (0.9, 0.75, 0.6, 0.5, 0.4, 0.3)
_STEPS = 5
_LITTLE = 1.001


@dataclass(frozen=True, slots=True, kw_only=True)
class Candidate:
    """One setting to try: of which station and device, to what, and why."""

    station: int
    row: int
    range: SettingRange
    value: float
    reason: str


class Trials:
    """The settings that may be tried, with the devices as they are now.

    Parameters
    ----------
    stations : Stations
        Of the plant.
    openers : Openers
        What opens each station now.
    devices : sequence of Device
        In workbook order.
    ranges : mapping of str to sequence of SettingRange
        By device.
    of_sources : frozenset of int
        Stations of sources: their short-time pick-up is bound to the current that the source holds up, and
        is never raised.
    """

    def __init__(
        self,
        stations: Stations,
        openers: Openers,
        devices: Sequence[Device],
        ranges: Mapping[str, Sequence[SettingRange]],
        of_sources: frozenset[int],
    ) -> None:
        self.of_sources = of_sources
        self.stations, self.openers, self.devices, self.ranges = stations, openers, devices, ranges
        self.row = {d.name: k for k, d in enumerate(devices)}

    def candidates(self, target: Target) -> list[Candidate]:
        """Return settings to try, the least change first."""
        found = list(self._of_downstream(target))
        if target.upstream >= 0:
            found += self._of_upstream(target)
        unique = {(c.row, c.range.setting, c.value): c for c in found}
        return sorted(unique.values(), key=self._change)

    def _change(self, c: Candidate) -> tuple[float, str, str]:
        now = self.now(c.row, c.range)
        return abs(float(np.log(c.value / now))), c.range.device, c.range.setting

    def now(self, row: int, item: SettingRange) -> float:
        """Return the present value of a setting, NaN where it is not given."""
        value = getattr(self.devices[row], FIELDS[item.setting][0])
        return float(value) if value else np.nan

    def settings(self, station: int) -> Iterator[tuple[int, SettingRange, Device]]:
        """Yield the settings of a station that may be changed, each with the device that holds it."""
        for k in self.openers.openers[station].members:
            row = self.row[self.openers.models[k].opened_by]
            for item in self.ranges.get(self.devices[row].name, []):
                if item.setting not in _NEVER and self.now(row, item) > 0.0:
                    yield row, item, self.devices[row]

    def _of_upstream(self, t: Target) -> Iterator[Candidate]:
        name = self.stations.names[t.upstream]
        for row, item, d in self.settings(t.upstream):
            now, aims, reason = self.now(row, item), list[float](), ""
            match item.setting:
                case "Short-time delay" if np.isfinite(t.clears_s):
                    aims = [(t.clears_s + t.needed_s) / (1.0 - d.time_tolerance)]
                    reason = f"{name} waits until {self.stations.names[t.downstream]} has cleared"
                case "Time multiplier" if np.isfinite(t.clears_s) and t.releases_s > 0.0:
                    aims = [now * (t.clears_s + t.needed_s) / t.releases_s]
                    reason = f"{name} waits until {self.stations.names[t.downstream]} has cleared"
                case "Instantaneous current" if t.at_once and t.current_ratio > 0.0:
                    aims = [_LITTLE * now / t.current_ratio]
                    reason = f"{name} no longer opens without delay for this fault"
                case "Short-time current" if t.upstream not in self.of_sources:
                    aims = [_LITTLE * t.upstream_a / (1.0 - d.current_tolerance)]
                    reason = f"{name} no longer picks up for this fault"
                case _:
                    continue
            for value in _upwards(item, aims, now):
                yield Candidate(station=t.upstream, row=row, range=item, value=value, reason=reason)

    def _of_downstream(self, t: Target) -> Iterator[Candidate]:
        name = self.stations.names[t.downstream]
        for row, item, d in self.settings(t.downstream):
            now, aims, reason = self.now(row, item), list[float](), ""
            match item.setting:
                case "Short-time delay" if t.upstream >= 0 and np.isfinite(t.releases_s):
                    left = t.releases_s - t.needed_s - d.breaking_time_max_s
                    aims = [left / (1.0 + d.time_tolerance)] if left > 0.0 else []
                    reason = f"{name} clears before {self.stations.names[t.upstream]} releases"
                case "Short-time current" | "Instantaneous current" if not t.at_once:
                    aims = [part * t.current_a / (1.0 + d.current_tolerance) for part in _LOWER]
                    reason = f"{name} is sure to pick up for this fault"
                case _:
                    continue
            for value in _downwards(item, aims, now):
                yield Candidate(station=t.downstream, row=row, range=item, value=value, reason=reason)


def _snapped(item: SettingRange, value: float, *, up: bool) -> float:
    """Return the next setting that can be made, up or down; without steps the value to three digits."""
    if item.step:
        count = (value - item.minimum) / item.step
        whole = np.ceil(count - 1e-6) if up else np.floor(count + 1e-6)
        return float(round(item.minimum + whole * item.step, 6))
    if value <= 0.0:
        return value
    scale = 10.0 ** (np.floor(np.log10(value)) - 2)
    return float(round((np.ceil if up else np.floor)(value / scale) * scale, 6))


def _upwards(item: SettingRange, aims: Sequence[float], now: float) -> list[float]:
    """Return the first settings from each aim up that are above the present one."""
    found: list[float] = []
    for aim in aims:
        value = _snapped(item, max(aim, _LITTLE * now), up=True)
        step = item.step or 0.1 * value
        found += [round(value + k * step, 6) for k in range(_STEPS)]
    return [v for v in found if now < v and item.minimum <= v <= item.maximum]


def _downwards(item: SettingRange, aims: Sequence[float], now: float) -> list[float]:
    """Return the first settings from each aim down that are below the present one."""
    highest = min(now / _LITTLE, item.maximum)
    found = [_snapped(item, min(aim, highest), up=False) for aim in aims]
    return [v for v in found if v < now and item.minimum <= v <= item.maximum]
