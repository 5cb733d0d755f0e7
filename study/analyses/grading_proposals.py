"""Settings that would cure what fails, within their ranges, each graded again before it is offered."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from study.analyses.grading_bands import Openers
from study.analyses.grading_candidates import FIELDS, Candidate, Trials
from study.analyses.grading_faults import ModeFaults
from study.analyses.grading_options import GradingOptions
from study.analyses.grading_pairs import ModePairing, PairKey
from study.analyses.grading_reach import ENDS_BY_ITSELF, mode_reach
from study.analyses.grading_rules import Rules
from study.analyses.grading_stations import Stations
from study.analyses.grading_targets import Target
from study.analyses.protection_devices import DeviceModel, device_model, device_surroundings
from study.model.plant import Plant
from study.model.protection import Device, SettingRange
from study.results.grading import NotCured, SettingChange

IntArray = NDArray[np.int64]
ReachKey = tuple[int, bool]
Held = Callable[[Openers, int], set[tuple[str, str, str]]]


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
        self.trials_left = options.trials
        self.of_sources = frozenset(s for f in faults for s in f.zones.of_sources())
        self.devices = list(plant.devices)
        self.surroundings = device_surroundings(plant)
        self.ranges: dict[str, list[SettingRange]] = {}
        for item in plant.setting_ranges:
            self.ranges.setdefault(item.device, []).append(item)

    # ---- what fails

    def failures(self, mode: int, part: ModeFaults, openers: Openers) -> Failures:
        """Return what fails of some faults of a mode with some devices."""
        if not len(part.feed):
            return Failures(pairs={}, reach=frozenset(), graded=0)
        kind = self.kinds[mode][part.whole_rows]
        pairing = ModePairing(part, openers, self.rules, self.options.margin_s, kind)
        found = mode_reach(part, openers, pairing.mode_rules)
        late = found.judged & ~(found.clears_s <= self.options.clearing_s) & (found.by != ENDS_BY_ITSELF)
        feeds = (part.feeds[k] for k in np.flatnonzero(late))
        return Failures(
            pairs={(mode, key): margin for key, margin in pairing.failing().items()},
            reach=frozenset((mode, (f.station, f.inward)) for f in feeds),
            graded=len(pairing.rows),
        )

    def _trials(self) -> Trials:
        return Trials(self.stations, self.openers, self.devices, self.ranges, self.of_sources)

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
            if _key(target) in cured:
                continue
            change = self._cure(target, cured)
            if change is not None:
                changes.append(change)
            else:
                left.append(self._left(target))
        return _joined(changes), left

    def _cure(self, target: Target, cured: set[PairKey | ReachKey]) -> SettingChange | None:
        """Return the first change that cures and breaks nothing; it stays in force."""
        own = {m: self.faults[m].only_feed(target.downstream, target.inward) for m in target.modes}
        tried = 0
        for c in self._trials().candidates(target):
            tried += 1
            device, openers = self._with(c)
            if any(_fails(target, self.failures(m, part, openers)) for m, part in own.items()):
                continue
            if self.trials_left <= 0:
                break
            self.trials_left -= 1
            both = self._graded_again(c.station, openers)
            if both is None or self.held(openers, c.station) - self.held(self.openers, c.station):
                continue
            old, new = both
            after = [self._margin(target, m, part, openers) for m, part in own.items()]
            change = self._said(c, target, both, tried, min(after))
            self._keep(c, device, openers)
            cured |= {k for _, k in set(old.pairs) - set(new.pairs) if not _in(k, new)}
            cured |= {k for _, k in old.reach - new.reach}
            return change
        return None

    def _graded_again(self, station: int, openers: Openers) -> tuple[Failures, Failures] | None:
        """Return what fails before and after of all that a station bears upon; None where more fails."""
        old, new = [], []
        for m, faults in enumerate(self.faults):
            part = faults.only(station)
            old.append(self.failures(m, part, self.openers))
            new.append(self.failures(m, part, openers))
            if set(new[-1].pairs) - set(old[-1].pairs) or new[-1].reach - old[-1].reach:
                return None
        return _whole(old), _whole(new)

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
        after: float,
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
        return SettingChange(
            device=c.range.device,
            setting=c.range.setting,
            unit=FIELDS[c.range.setting][1],
            now=self._trials().now(c.row, c.range),
            proposed=c.value,
            cell=self.plant.cell_of(c.range.device, c.range.setting),
            range_cell=c.range.cell,
            reason=c.reason,
            cures=tuple(cures),
            before=min(margins, default=np.nan),
            after=after,
            margin_unit="s",
            tried=tried,
            graded=new.graded,
        )

    def _margin(self, t: Target, mode: int, part: ModeFaults, openers: Openers) -> float:
        """Return the least margin of the pair in a mode with the new setting; NaN for a reach."""
        if t.upstream < 0:
            return np.nan
        kind = self.kinds[mode][part.whole_rows]
        table = ModePairing(part, openers, self.rules, self.options.margin_s, kind).pairs()
        pair = (t.downstream, t.upstream, t.inward)
        margins = zip(table.key, table.margin_s.tolist(), strict=True)
        return min((margin for key, margin in margins if key == pair), default=np.nan)

    def _left(self, t: Target) -> NotCured:
        names = self.stations.names
        stations = [t.downstream] + ([t.upstream] if t.upstream >= 0 else [])
        given = [names[s] for s in stations if any(self._trials().settings(s))]
        if given and self.trials_left <= 0:
            why = "not searched: the search ends after so many trials; cure the others first and run again"
        elif not given:
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


def _fails(t: Target, failures: Failures) -> bool:
    if t.upstream < 0:
        return any(key == (t.downstream, t.inward) for _, key in failures.reach)
    return _in((t.downstream, t.upstream, t.inward), failures)


def _whole(parts: Sequence[Failures]) -> Failures:
    return Failures(
        pairs={key: margin for part in parts for key, margin in part.pairs.items()},
        reach=frozenset(key for part in parts for key in part.reach),
        graded=sum(part.graded for part in parts),
    )


def _key(t: Target) -> PairKey | ReachKey:
    return (t.downstream, t.upstream, t.inward) if t.upstream >= 0 else (t.downstream, t.inward)


def _in(key: PairKey, failures: Failures) -> bool:
    return any(k == key for _, k in failures.pairs)
