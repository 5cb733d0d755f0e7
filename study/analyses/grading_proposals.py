"""Settings that would cure what fails, within their ranges, each graded again before it is offered."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_bands import Openers
from study.analyses.grading_faults import ModeFaults
from study.analyses.grading_margins import AT_ONCE
from study.analyses.grading_options import GradingOptions
from study.analyses.grading_pairs import ModePairing, PairKey
from study.analyses.grading_reach import mode_reach
from study.analyses.grading_rules import Rules
from study.analyses.grading_stations import Stations
from study.analyses.protection_devices import DeviceModel, device_model, device_surroundings
from study.model.plant import Plant
from study.model.protection import Device, SettingRange
from study.results.grading import NONE, PARTIAL, GradingPairs, NotCured, Reach, SettingChange

IntArray = NDArray[np.int64]
ReachKey = tuple[int, bool]
Held = Callable[[Openers, int], set[tuple[str, str, str]]]

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
class Target:
    """What fails: a pair, or a reach (upstream -1), in which modes, and the figures that bound a cure."""

    downstream: int
    upstream: int
    inward: bool
    modes: tuple[int, ...]
    clears_s: float
    releases_s: float
    needed_s: float
    current_a: float
    upstream_a: float
    current_ratio: float
    at_once: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Candidate:
    """One setting to try: of which station and device, to what, and why."""

    station: int
    row: int
    range: SettingRange
    value: float
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Failures:
    """What fails of the faults in which one station has a part, by mode."""

    pairs: dict[tuple[int, PairKey], float]
    reach: frozenset[tuple[int, ReachKey]]
    graded: int


class Search:
    """The search for settings; what is found stays in force for what is searched after it.

    Parameters
    ----------
    plant : Plant
        Devices and ranges.
    stations : Stations
        Of the plant.
    faults : sequence of ModeFaults
        Of every mode.
    kinds : sequence of ndarray
        Kinds of the rows of every mode.
    rules : Rules
        Beside the curves.
    openers : Openers
        What opens each station now.
    held : callable
        Returns what a station does not hold: starts, inrush, restarts.
    options : GradingOptions
        Least margin, longest time.
    """

    def __init__(
        self,
        plant: Plant,
        *,
        stations: Stations,
        faults: Sequence[ModeFaults],
        kinds: Sequence[IntArray],
        rules: Rules,
        openers: Openers,
        held: Held,
        options: GradingOptions,
    ) -> None:
        self.plant, self.stations, self.faults, self.kinds = plant, stations, faults, kinds
        self.rules, self.openers, self.held, self.options = rules, openers, held, options
        self.devices = list(plant.devices)
        self.surroundings = device_surroundings(plant)
        self.row = {d.name: k for k, d in enumerate(plant.devices)}
        self.ranges: dict[str, list[SettingRange]] = {}
        for item in plant.setting_ranges:
            self.ranges.setdefault(item.device, []).append(item)

    # ---- what fails

    def failures(self, parts: Sequence[ModeFaults], openers: Openers) -> Failures:
        """Return what fails of some faults with some devices."""
        pairs: dict[tuple[int, PairKey], float] = {}
        reach: set[tuple[int, ReachKey]] = set()
        graded = 0
        for m, part in enumerate(parts):
            if not len(part.feed):
                continue
            kind = self.kinds[m][part.whole_rows]
            pairing = ModePairing(part, openers, self.rules, self.options.margin_s, kind)
            pairs |= {(m, key): margin for key, margin in pairing.failing().items()}
            graded += len(pairing.rows)
            found = mode_reach(part, openers, pairing.mode_rules)
            late = found.judged & ~(found.clears_s <= self.options.clearing_s) & (found.by != -2)
            reach |= {(m, (part.feeds[k].station, part.feeds[k].inward)) for k in np.flatnonzero(late)}
        return Failures(pairs=pairs, reach=frozenset(reach), graded=graded)

    # ---- what to try

    def candidates(self, target: Target) -> list[Candidate]:
        """Return settings to try, the least change first."""
        found = list(self._of_downstream(target))
        if target.upstream >= 0:
            found += self._of_upstream(target)
        unique = {(c.row, c.range.setting, c.value): c for c in found}
        return sorted(unique.values(), key=self._change)

    def _change(self, c: Candidate) -> tuple[float, str, str]:
        now = self._now(c.row, c.range)
        return abs(float(np.log(c.value / now))), c.range.device, c.range.setting

    def _now(self, row: int, item: SettingRange) -> float:
        value = getattr(self.devices[row], FIELDS[item.setting][0])
        return float(value) if value else np.nan

    def _settings(self, station: int) -> Iterator[tuple[int, SettingRange, Device]]:
        """Yield the settings of a station that may be changed, each with the device that holds it."""
        for k in self.openers.openers[station].members:
            row = self.row[self.openers.models[k].opened_by]
            for item in self.ranges.get(self.devices[row].name, []):
                if item.setting not in _NEVER and self._now(row, item) > 0.0:
                    yield row, item, self.devices[row]

    def _of_upstream(self, t: Target) -> Iterator[Candidate]:
        name = self.stations.names[t.upstream]
        for row, item, d in self._settings(t.upstream):
            now, aims, reason = self._now(row, item), list[float](), ""
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
                case "Short-time current":
                    aims = [_LITTLE * t.upstream_a / (1.0 - d.current_tolerance)]
                    reason = f"{name} no longer picks up for this fault"
                case _:
                    continue
            for value in _upwards(item, aims, now):
                yield Candidate(station=t.upstream, row=row, range=item, value=value, reason=reason)

    def _of_downstream(self, t: Target) -> Iterator[Candidate]:
        name = self.stations.names[t.downstream]
        for row, item, d in self._settings(t.downstream):
            now, aims, reason = self._now(row, item), list[float](), ""
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

    # ---- trying

    def search(self, targets: Sequence[Target]) -> tuple[list[SettingChange], list[NotCured]]:
        """Return the changes that cure, and what none was found for.

        Parameters
        ----------
        targets : sequence of Target
            What fails, most important first.

        Returns
        -------
        tuple of list
            In the order in which they were found.
        """
        changes: list[SettingChange] = []
        left: list[NotCured] = []
        cured: set[PairKey | ReachKey] = set()
        for target in targets:
            key = _key(target)
            if key in cured:
                continue
            if len(changes) + len(left) >= self.options.proposals:
                break
            change = self._cure(target, cured)
            if change is not None:
                changes.append(change)
            else:
                left.append(self._left(target))
        return _joined(changes), left

    def _cure(self, target: Target, cured: set[PairKey | ReachKey]) -> SettingChange | None:
        parts: dict[int, list[ModeFaults]] = {}
        before: dict[int, Failures] = {}
        tried = 0
        for c in self.candidates(target):
            tried += 1
            if c.station not in parts:
                parts[c.station] = [f.only(c.station) for f in self.faults]
                before[c.station] = self.failures(parts[c.station], self.openers)
            device, openers = self._with(c)
            after = self.failures(parts[c.station], openers)
            old = before[c.station]
            if self._still(target, after) or set(after.pairs) - set(old.pairs) or after.reach - old.reach:
                continue
            if self.held(openers, c.station) - self.held(self.openers, c.station):
                continue
            change = self._said(c, target, (old, after), tried, (parts[c.station], openers))
            self._keep(c, device, openers)
            cured |= {k for _, k in set(old.pairs) - set(after.pairs) if not _in(k, after)}
            cured |= {k for _, k in old.reach - after.reach}
            return change
        return None

    def _still(self, t: Target, after: Failures) -> bool:
        if t.upstream < 0:
            return any((m, (t.downstream, t.inward)) in after.reach for m in t.modes)
        return any((m, (t.downstream, t.upstream, t.inward)) in after.pairs for m in t.modes)

    def _with(self, c: Candidate) -> tuple[Device, Openers]:
        """Return the device with the setting tried, and what opens the stations then."""
        field = FIELDS[c.range.setting][0]
        device = replace(self.devices[c.row], **{field: c.value})  # type: ignore[arg-type]
        relays = dict(self.surroundings.relays)
        if device.kind == "overcurrent relay":
            relays[device.equipment, device.end] = device
        around = replace(self.surroundings, relays=relays)
        models: list[DeviceModel] = list(self.openers.models)
        members = self.stations.devices[c.station]
        for k in members:
            own = device if k == c.row else self.devices[k]
            models[k] = device_model(own, around)
        return device, self.openers.with_device(self.stations, models, set(members))

    def _keep(self, c: Candidate, device: Device, openers: Openers) -> None:
        self.devices[c.row], self.openers = device, openers
        if device.kind == "overcurrent relay":
            relays = {**self.surroundings.relays, (device.equipment, device.end): device}
            self.surroundings = replace(self.surroundings, relays=relays)

    def _said(
        self,
        c: Candidate,
        target: Target,
        both: tuple[Failures, Failures],
        tried: int,
        again: tuple[Sequence[ModeFaults], Openers],
    ) -> SettingChange:
        old, new = both
        modes: dict[PairKey, list[int]] = {}
        for m, key in sorted(set(old.pairs) - set(new.pairs)):
            modes.setdefault(key, []).append(m)
        names, mode_names = self.stations.names, [f.mode.mode for f in self.faults]
        cures = [(names[k[0]], names[k[1]], tuple(mode_names[m] for m in ms)) for k, ms in modes.items()]
        late: dict[int, list[int]] = {}
        for m, reach_key in sorted(old.reach - new.reach):
            late.setdefault(reach_key[0], []).append(m)
        cures += [(names[s], "", tuple(mode_names[m] for m in ms)) for s, ms in late.items()]
        pair = (target.downstream, target.upstream, target.inward)
        margins = [v for (_, key), v in old.pairs.items() if key == pair]
        unit = "s"
        after = self._margin(target, again) if target.upstream >= 0 else np.nan
        return SettingChange(
            device=c.range.device,
            setting=c.range.setting,
            unit=FIELDS[c.range.setting][1],
            now=self._now(c.row, c.range),
            proposed=c.value,
            cell=self.plant.cell_of(c.range.device, c.range.setting),
            range_cell=c.range.cell,
            reason=c.reason,
            cures=tuple(cures),
            before=min(margins, default=np.nan),
            after=after,
            margin_unit=unit,
            tried=tried,
            graded=new.graded,
        )

    def _margin(self, t: Target, again: tuple[Sequence[ModeFaults], Openers]) -> float:
        """Return the least margin of the pair in the modes in which it failed, with the new setting."""
        found = [np.inf]
        for m in t.modes:
            part = again[0][m]
            kind = self.kinds[m][part.whole_rows]
            pairing = ModePairing(part, again[1], self.rules, self.options.margin_s, kind)
            table = pairing.pairs()
            found += [
                float(margin)
                for key, margin in zip(table.key, table.margin_s, strict=True)
                if key == (t.downstream, t.upstream, t.inward)
            ]
        return float(np.nanmin(found))

    def _left(self, t: Target) -> NotCured:
        names = self.stations.names
        stations = [t.downstream] + ([t.upstream] if t.upstream >= 0 else [])
        given = [names[s] for s in stations if any(self._settings(s))]
        if not given:
            why = "no setting of these devices has a range on the sheet Setting ranges"
        else:
            why = (
                f"no value within the ranges of {' and '.join(given)} cures it without breaking another "
                "pair, the reach of the device or a start"
            )
        return NotCured(
            downstream=names[t.downstream],
            upstream=names[t.upstream] if t.upstream >= 0 else "",
            modes=tuple(self.faults[m].mode.mode for m in t.modes),
            why=why,
        )


def _joined(changes: Sequence[SettingChange]) -> list[SettingChange]:
    """Return the changes with those of one setting drawn together: the last value cures them all."""
    found: dict[tuple[str, str], SettingChange] = {}
    for change in changes:
        key = (change.device, change.setting)
        first = found.get(key)
        if first is None:
            found[key] = change
            continue
        found[key] = replace(
            change,
            now=first.now,
            cures=first.cures + change.cures,
            before=min(first.before, change.before),
            after=min(first.after, change.after),
            tried=first.tried + change.tried,
            graded=first.graded + change.graded,
        )
    return list(found.values())


def _key(t: Target) -> PairKey | ReachKey:
    return (t.downstream, t.upstream, t.inward) if t.upstream >= 0 else (t.downstream, t.inward)


def _in(key: PairKey, failures: Failures) -> bool:
    return any(k == key for _, k in failures.pairs)


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


def targets_of(
    pairs: GradingPairs,
    sides: Sequence[bool],
    reach: Reach,
    late: tuple[Sequence[bool], NDArray[np.bool_]],
) -> list[Target]:
    """Return what fails, in the order in which it is to be cured: most modes first, then the least margin.

    Parameters
    ----------
    pairs : GradingPairs
        Of all modes.
    sides : sequence of bool
        Side of the fault of each pair.
    reach : Reach
        Of all modes.
    late : tuple
        Side of the fault of each row of the reach; [row, mode] what is cleared late or never.

    Returns
    -------
    list of Target
        Pairs, then reach.
    """
    bad = np.isin(pairs.extent, (PARTIAL, NONE))
    rows = enumerate(zip(reach.station.tolist(), late[0], strict=True))
    least = {(s, bool(inward)): reach.least_a[k] for k, (s, inward) in rows}
    found: list[tuple[tuple[float, float, int], Target]] = []
    for k in np.flatnonzero(bad.any(axis=1)).tolist():
        modes = np.flatnonzero(bad[k])
        m = int(modes[np.argmin(pairs.margin_s[k, modes])])
        key = (int(pairs.downstream[k]), bool(sides[k]))
        t = Target(
            downstream=int(pairs.downstream[k]),
            upstream=int(pairs.upstream[k]),
            inward=bool(sides[k]),
            modes=tuple(modes.tolist()),
            clears_s=float(np.nanmax(pairs.clears_s[k, modes])),
            releases_s=float(np.nanmin(pairs.releases_s[k, modes])),
            needed_s=float(pairs.needed_s[k, m]),
            current_a=float(np.nanmin([*pairs.current_a[k, modes], *least[key][modes]])),
            upstream_a=float(np.nanmax(pairs.upstream_a[k, modes])),
            current_ratio=float(np.nanmin(pairs.current_ratio[k, modes])),
            at_once=int(pairs.rule[k, m]) == AT_ONCE,
        )
        found.append(((-len(modes), float(pairs.margin_s[k, m]), k), t))
    ranked = [t for _, t in sorted(found, key=lambda x: x[0])]
    for k in np.flatnonzero(late[1].any(axis=1)).tolist():
        modes = np.flatnonzero(late[1][k])
        ranked.append(
            Target(
                downstream=int(reach.station[k]),
                upstream=-1,
                inward=bool(late[0][k]),
                modes=tuple(modes.tolist()),
                clears_s=np.inf,
                releases_s=np.nan,
                needed_s=0.0,
                current_a=float(np.nanmin(reach.least_a[k, modes])),
                upstream_a=np.nan,
                current_ratio=np.inf,
                at_once=False,
            )
        )
    return ranked
