"""Restart after a blackout in steps that the engines can take, and the emergency set's own balance."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field, replace

from study.analyses.balance_islands import Consumers, step_capability_kw
from study.analyses.balance_shares import Share, share_load
from study.analyses.balance_sources import Source, capacity, loading
from study.model.loads import Load
from study.model.modes import Mode
from study.results.balance import EmergencyDuty, RestartStep

WITH_THE_BOARD = ("heating", "lighting", "general")


@dataclass(frozen=True, slots=True, kw_only=True)
class Reconnection:
    """A load that comes back by itself: how long after the board is live, and with how much."""

    load: str
    delay_s: float
    p_kw: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Restart:
    """The steps of one island, and the loads that find no room on the sets that start."""

    steps: tuple[RestartStep, ...]
    waiting: tuple[Reconnection, ...]


def restart_delay_s(load: Load) -> float | None:
    """Return how long after the board is live a load comes back by itself [s]; None: started by hand.

    Consumers without a contactor of their own (heating, lighting, general) come with the board. Motors and
    converters without a restart delay stay off.

    Source: common practice, no source: contactors drop out and drives block when the voltage goes.
    """
    if load.motor is not None and load.motor.restart_delay_s is not None:
        return load.motor.restart_delay_s
    return 0.0 if load.kind in WITH_THE_BOARD else None


def sets_that_start(sources: Sequence[Source], mode: Mode) -> list[Source]:
    """Return the sets that bring an island back, first to start first.

    In an emergency mode the emergency sets; else the standby sets, since those on line are what was lost;
    without a standby the sets on line start again. Shore supplies do not start.
    """
    main = ("main", "harbour", "converter")
    wanted = ("emergency",) if mode.kind == "emergency" else main
    standby = [s for s in sources if s.state == "standby" and s.service in wanted and s.forming]
    running = [s for s in sources if s.state == "on" and s.service in wanted and s.forming]
    chosen = running + standby if mode.kind == "emergency" else standby or running
    # A set power is a matter of normal running: after a blackout the sets share by rating.
    return sorted(
        (replace(s, p_set_kw=None, q_set_kvar=None, kvar_control=False) for s in chosen),
        key=lambda s: s.start_delay_s,
    )


def reconnections(loads: tuple[Load, ...], consumers: Consumers) -> list[Reconnection]:
    """Return what comes back by itself in an island, with what the balance counts of it."""
    counted = consumers.demand.p_counted_kw[consumers.row]
    back = []
    for index in consumers.here.nonzero()[0]:
        delay_s = restart_delay_s(loads[index])
        if delay_s is not None and counted[index] > 0.0:
            back.append(Reconnection(load=loads[index].name, delay_s=delay_s, p_kw=float(counted[index])))
    return back


def restart_steps(
    sets: Sequence[Source], loads: Sequence[Reconnection], interval_s: float, first: int = 1
) -> Restart:
    """Return the steps in which the loads come back on the sets that start.

    The board is live when the first set is. What comes with the board is the first step, as one block; the
    rest follows by restart delay, as many as the engines take in one step, a new step every `interval_s`
    at the earliest. A load larger than one step waits for the next set, and where none follows makes a step
    of its own that exceeds. A load that the rating of all sets has no room for waits.

    Source: sequential restart SOLAS II-1/41.5.1.1; recovery between steps in 5 s ClassNK 2.4.2. Motors count
    with their running power; what they draw while starting is a matter of the voltage dip.

    Parameters
    ----------
    sets : sequence of Source
        In the order in which they start.
    loads : sequence of Reconnection
        What comes back by itself.
    interval_s : float
        Least time from step to step. [s]
    first : int
        Number of the first step.

    Returns
    -------
    Restart
        Steps in time order.
    """
    if not sets or not loads:
        return Restart(steps=(), waiting=())
    t_live_s = sets[0].start_delay_s
    sequence = _Sequence(sets=sets, interval_s=interval_s, at_s=t_live_s, number=first)
    block = [x for x in loads if x.delay_s == 0.0]
    if block:
        sequence.connect(block)
    rest = sorted((x for x in loads if x.delay_s > 0.0), key=lambda x: x.delay_s)
    while rest:
        sequence.wait_until(t_live_s + rest[0].delay_s)
        due = [x for x in rest if t_live_s + x.delay_s <= sequence.at_s]
        taken = sequence.fitting(due)
        rest = [x for x in rest if x not in taken and x not in sequence.waiting]
        if taken:
            sequence.connect(taken)
    return Restart(steps=tuple(sequence.steps), waiting=tuple(sequence.waiting))


def emergency_duty(
    mode: Mode, running: Sequence[Source], shares: dict[str, Share], hours: float, basis: str
) -> list[EmergencyDuty]:
    """Return the emergency sets on line in an emergency mode against what they carry.

    Source: SOLAS II-1/42.2 and 43.2 (services and hours, from memory for passenger ships).
    """
    return [
        EmergencyDuty(
            genset=s.name,
            mode=mode.name,
            p_load_kw=shares[s.name].p_kw,
            q_load_kvar=shares[s.name].q_kvar,
            p_rated_kw=s.p_rated_kw,
            s_rated_kva=s.s_rated_kva,
            kw_loading=loading(shares[s.name].p_kw, s.p_rated_kw),
            kva_loading=loading(math.hypot(shares[s.name].p_kw, shares[s.name].q_kvar), s.s_rated_kva),
            hours_required=hours,
            hours_basis=basis,
        )
        for s in running
        if s.service == "emergency" and mode.kind == "emergency"
    ]


@dataclass(slots=True, kw_only=True)
class _Sequence:
    """Time, load and steps while a restart is walked through."""

    sets: Sequence[Source]
    interval_s: float
    at_s: float
    number: int
    p_total_kw: float = 0.0
    steps: list[RestartStep] = field(default_factory=list)
    waiting: list[Reconnection] = field(default_factory=list)

    def capability_kw(self) -> float:
        live = [s for s in self.sets if s.start_delay_s <= self.at_s]
        return step_capability_kw(live, share_load(live, self.p_total_kw, 0.0))

    def wait_until(self, earliest_s: float) -> None:
        """Move on to the next possible moment, one interval after the last step at the earliest."""
        after_last = self.steps[-1].at_s + self.interval_s if self.steps else self.at_s
        self.at_s = max(self.at_s, earliest_s, after_last)

    def fitting(self, due: Sequence[Reconnection]) -> list[Reconnection]:
        """Return what of the loads that are due goes into one step now; nothing where it has to wait."""
        room_kw = min(self.capability_kw(), self.left_kw())
        taken: list[Reconnection] = []
        for load in due:
            if load.p_kw > room_kw:
                break
            taken.append(load)
            room_kw -= load.p_kw
        return taken or self._too_large(due[0])

    def left_kw(self) -> float:
        """Return what the rating of all sets leaves free."""
        return capacity(self.sets)[0] - self.p_total_kw

    def _too_large(self, load: Reconnection) -> list[Reconnection]:
        if load.p_kw > self.left_kw():
            self.waiting.append(load)
            return []
        later = [s.start_delay_s for s in self.sets if s.start_delay_s > self.at_s]
        if later:
            self.at_s = min(later)
            return []
        return [load]

    def connect(self, loads: Sequence[Reconnection]) -> None:
        p_step_kw = math.fsum(x.p_kw for x in loads)
        capability_kw = self.capability_kw()
        self.p_total_kw += p_step_kw
        self.steps.append(
            RestartStep(
                step=self.number,
                at_s=self.at_s,
                loads=tuple(x.load for x in loads),
                p_step_kw=p_step_kw,
                p_total_kw=self.p_total_kw,
                step_capability_kw=capability_kw,
                island=self.sets[0].island,
            )
        )
        self.number += 1
