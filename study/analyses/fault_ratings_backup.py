"""What clears a fault that its own device does not see: devices nearer to the sources."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_clearing import Clearing, clear
from study.analyses.fault_ratings_history import Histories, case_histories, knots_s
from study.analyses.fault_ratings_sides import PlantDevices
from study.results.short_circuit import FaultCase, ModeShortCircuit, ShortCircuitResult

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
IntArray = NDArray[np.int64]

_LEVELS = 6  # boards on the way from a fault to the sources
_NEGLIGIBLE = 1e-6
NOBODY, ENDS_BY_ITSELF = -1, -2


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """A device on the way: it does not clear a fault at the place `far`; `current` [source] feeds that."""

    device: int
    far: int
    current: BoolArray


def least_over_three_phase(case: FaultCase, place: IntArray, knots: FloatArray) -> FloatArray:
    """Return the ratio of the least kind of fault to the three-phase one, [row, interval, 3]."""
    samples = np.stack([knots[:-1], 0.5 * (knots[1:] + knots[:-1]), knots[1:]], axis=1)
    there = np.isfinite(case.iac_a) & (case.iac_a > 0.0) & np.isfinite(case.least_a)
    ratio = np.where(there, case.least_a, 1.0) / np.where(there, case.iac_a, 1.0)
    found = np.ones((len(place), *samples.shape))
    for at in np.unique(place[place >= 0]):
        found[place == at] = np.interp(samples, case.time_s, ratio[at])
    return found


class Backup:
    """The devices of one mode, and what feeds each place in its minimum case."""

    def __init__(self, devices: PlantDevices, mode: ModeShortCircuit, result: ShortCircuitResult) -> None:
        self._devices, self._mode, self._result = devices, mode, result
        self._ends: dict[int, list[int]] = {}
        for end, place in enumerate(mode.minimum.ends.place):
            self._ends.setdefault(int(place), []).append(end)
        self._on: dict[str, list[int]] = {}
        for k, branch in enumerate(devices.branch):
            if branch and mode.devices.place[k] >= 0 and devices.releases[k].known:
                self._on.setdefault(branch, []).append(k)
        self._beside: dict[str, list[int]] = {}
        for k, equipment in enumerate(devices.source):
            if equipment and mode.devices.place[k] >= 0 and devices.releases[k].known:
                self._beside.setdefault(equipment, []).append(k)
        self._place = {
            name: k
            for k, (name, kind) in enumerate(zip(result.places.names, result.places.kinds, strict=True))
            if kind == "board"
        }

    def instead(
        self, step: Step, history: Histories, holds_s: float, cleared: Clearing
    ) -> tuple[int, Clearing]:
        """Return what clears instead of a device, and the clearing times with its row filled in.

        Parameters
        ----------
        step : Step
            The device that does not clear, and its fault.
        history : Histories
            One row: the current through it.
        holds_s : float
            How long that is kept up. [s]
        cleared : Clearing
            What every device does by itself.

        Returns
        -------
        tuple of int and Clearing
            The last device to clear, `NOBODY` where some current goes on and `ENDS_BY_ITSELF` where only
            sources feed the fault that block; the times, unchanged without a device.
        """
        by, instead = self._cleared(step, history, holds_s, _LEVELS)
        if instead is None:
            by, instead = self._sources_cleared(step, holds_s)
        if instead is None:
            return by, cleared
        arrays = {f.name: getattr(cleared, f.name).copy() for f in fields(Clearing)}
        for name, array in arrays.items():
            array[step.device] = getattr(instead, name)[0]
        return by, Clearing(**arrays)

    def _cleared(
        self, step: Step, history: Histories, holds_s: float, levels: int
    ) -> tuple[int, Clearing | None]:
        """Return the last device to clear among all branches by which the current comes; -1 for none."""
        place = self._sending_place(step)
        total = self._mode.minimum.source_initial_a[place] * step.current if place >= 0 else np.zeros(1)
        if levels == 0 or total.sum() <= 0.0:
            return NOBODY, None
        last: tuple[int, Clearing | None] = (NOBODY, None)
        seen = 0.0
        volts = self._result.places.u_nominal_v
        for end in self._ends.get(place, []):
            ends = self._mode.minimum.ends
            if ends.branches[end] == self._devices.branch[step.device]:
                continue
            part = float((total * ends.share[end]).sum() / total.sum())
            if part < _NEGLIGIBLE:
                continue
            seen += part
            fed = history.times(np.array(part * volts[step.far] / volts[place]))
            found = self._on_branch(ends.branches[end], place, step, (fed, holds_s, levels))
            if found[1] is None:
                return NOBODY, None
            if last[1] is None or found[1].time_s[0] > last[1].time_s[0]:
                last = found
        return last if seen > 1.0 - 1e-3 else (NOBODY, None)

    def _on_branch(
        self, branch: str, place: int, step: Step, fault: tuple[Histories, float, int]
    ) -> tuple[int, Clearing | None]:
        """Return the device of a branch that clears, or what clears instead of it."""
        history, holds_s, levels = fault
        for device in self._on.get(branch, []):
            at = int(self._mode.devices.place[device])
            volts = self._result.places.u_nominal_v
            seen = history.times(np.array(volts[place] / volts[at]))
            tried = clear(
                (self._devices.releases[device],), seen, 0.5 / self._result.f_hz, np.array([holds_s])
            )
            if np.isfinite(tried.time_s[0]):
                return device, tried
        for device in self._on.get(branch, [])[:1]:
            onward = Step(device=device, far=place, current=step.current)
            return self._cleared(onward, history, holds_s, levels - 1)
        return NOBODY, None

    def _sources_cleared(self, step: Step, holds_s: float) -> tuple[int, Clearing | None]:
        """Return the last of the sources' own devices to clear what each source gives, by whatever path."""
        case = self._mode.minimum
        last: tuple[int, Clearing | None] = (ENDS_BY_ITSELF, None)
        for source in np.flatnonzero(step.current):
            if np.isfinite(case.parts.ends_s[source]):
                continue
            share = np.zeros((1, len(step.current)))
            share[0, source] = 1.0
            place = np.array([step.far])
            _, given = case_histories(case, place, share, knots_s(self._result.f_hz, case.parts.ends_s))
            least = given.times(self._least(step.far, given.time_s))
            found = self._at_source(case.sources.names[source], step.far, least, holds_s)
            if found[1] is None:
                return NOBODY, None
            if last[1] is None or found[1].time_s[0] > last[1].time_s[0]:
                last = found
        return last

    def _at_source(
        self, source: str, far: int, history: Histories, holds_s: float
    ) -> tuple[int, Clearing | None]:
        volts = self._result.places.u_nominal_v
        for device in self._beside.get(source, []):
            at = int(self._mode.devices.place[device])
            tried = clear(
                (self._devices.releases[device],),
                history.times(np.array(volts[far] / volts[at])),
                0.5 / self._result.f_hz,
                np.array([holds_s]),
            )
            if np.isfinite(tried.time_s[0]):
                return device, tried
        return NOBODY, None

    def _least(self, place: int, knots: FloatArray) -> FloatArray:
        return least_over_three_phase(self._mode.minimum, np.array([place]), knots)

    def _sending_place(self, step: Step) -> int:
        """Return the board from which a device's current comes."""
        at = int(self._mode.devices.place[step.device])
        if at != step.far:
            return at
        ends, branch = self._mode.minimum.ends, self._devices.branch[step.device]
        for end in self._ends.get(step.far, []):
            if ends.branches[end] == branch:
                return self._place.get(ends.far_ends[end], -1)
        return -1
