"""Rings that transformers close: where the ends meet, phase and voltage must agree."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import exp, log
from typing import Final

from study.workbook.plausible_voltage import nominal_v
from study.workbook.tables import Row
from study.workbook.topology import BRANCH_BOARDS, Plan, boards_of

LARGEST_RATIO_ERROR: Final = 0.01
HOURS: Final = 12
DEGREES_PER_HOUR: Final = 30
SUPPLIES: Final = ("normal_supply", "other_supply")
WINDINGS: Final = {
    "Transformers": (("to_board", "u_secondary_v", 0),),
    "Three-winding transformers": (
        ("secondary_board", "u_secondary_v", 0),
        ("tertiary_board", "u_tertiary_v", 1),
    ),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Joint:
    """What joins two boards.

    ``hours`` is the clock number by which the second end lags, ``ratio`` the per-unit ratio at tap 0;
    ``switches`` names everything that must be on.
    """

    row: Row
    ends: tuple[str, str]
    hours: int
    ratio: float
    switches: tuple[str, ...]

    @property
    def is_transformer(self) -> bool:
        """Return True where the joint has windings."""
        return self.row.sheet in WINDINGS


@dataclass(frozen=True, slots=True, kw_only=True)
class Reached:
    """How a board was reached from the first one: by which joint, from where, and what adds up on the way."""

    by: Joint | None
    before: str
    hours: int
    log_ratio: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Ring:
    """The transformers of a ring, by name, and by how much the ends meet amiss where it closes."""

    transformers: tuple[Row, ...]
    hours: int
    ratio_error: float


def check_rings(plan: Plan, modes: Sequence[str]) -> None:
    """Report rings whose transformers differ in phase, and those that differ in ratio."""
    joints = list(_joints(plan))
    if not any(joint.is_transformer for joint in joints):
        return
    found: dict[tuple[bool, tuple[str, ...]], tuple[Ring, list[str]]] = {}
    for mode in modes:
        for ring in _rings(_closed(plan, joints, mode), _taps(plan, mode)):
            if ring.hours or ring.ratio_error > LARGEST_RATIO_ERROR:
                key = (ring.hours > 0, tuple(row.name for row in ring.transformers))
                found.setdefault(key, (ring, []))[1].append(mode)
    for ring, its_modes in found.values():
        (_report_phase if ring.hours else _report_ratio)(plan, ring, its_modes)


def _closed(plan: Plan, joints: Sequence[Joint], mode: str) -> list[Joint]:
    off = {row.name for row in plan.of("Running") if row.modes.get(mode, {}).get("state", "on") != "on"}
    return [joint for joint in joints if off.isdisjoint(joint.switches)]


def _joints(plan: Plan) -> Iterator[Joint]:
    """Yield what joins boards; what a transfer switches is never closed on both sides and is left out."""
    supplies = {row.values.get(name) for row in plan.of("Transfers") for name in SUPPLIES}
    targets = {row.values.get("target") for row in plan.of("Transfers")}
    devices: dict[str, list[Row]] = {}
    for row in plan.of("Devices"):
        devices.setdefault(row.values.get("equipment") or "", []).append(row)
    cables = _cables_by_end(plan)
    for sheet in ("Cables", "Ties", "Reactors", *WINDINGS):
        for row in plan.of(sheet):
            if row.broken or row.name in supplies:
                continue
            for joint in _joints_of(plan, row, devices, cables):
                if targets.isdisjoint(joint.ends):
                    yield joint


def _cables_by_end(plan: Plan) -> dict[str, list[Row]]:
    cables: dict[str, list[Row]] = {}
    for row in plan.of("Cables"):
        for name in ("from_end", "to_end"):
            cables.setdefault(row.values.get(name) or "", []).append(row)
    return cables


def _joints_of(
    plan: Plan, row: Row, devices: dict[str, list[Row]], cables: dict[str, list[Row]]
) -> Iterator[Joint]:
    if row.sheet not in WINDINGS:
        one, other = (row.values.get(name) for name in BRANCH_BOARDS[row.sheet])
        if boards_of(plan, row.name) == {one, other}:
            switches = (row.name, *(device.name for device in devices.get(row.name, ())))
            yield Joint(row=row, ends=(str(one), str(other)), hours=0, ratio=1.0, switches=switches)
        return
    first = BRANCH_BOARDS[row.sheet][0]
    clock = [int(number) for number in re.findall(r"\d+", row.values.get("vector_group") or "")]
    for board, voltage, place in WINDINGS[row.sheet]:
        ends = (row.values.get(first), row.values.get(board))
        levels = [nominal_v(plan, end) for end in ends]
        if None in ends or None in levels or not row.has("u_primary_v", voltage) or len(clock) <= place:
            continue
        ratio = row.values["u_primary_v"] / levels[0] / (row.values[voltage] / levels[1])
        yield Joint(
            row=row,
            ends=(str(ends[0]), str(ends[1])),
            hours=clock[place],
            ratio=ratio,
            switches=_winding_switches(row, ends, devices, cables),
        )


def _winding_switches(
    row: Row,
    ends: tuple[str | None, ...],
    devices: dict[str, list[Row]],
    cables: dict[str, list[Row]],
) -> tuple[str, ...]:
    """Return what must be on for current through one pair of windings: the cables and devices at its ends."""
    names = [row.name]
    names += [d.name for d in devices.get(row.name, ()) if d.values.get("end") in (None, row.name, *ends)]
    for cable in cables.get(row.name, ()):
        if {cable.values.get("from_end"), cable.values.get("to_end")} & set(ends):
            names += [cable.name, *(device.name for device in devices.get(cable.name, ()))]
    return tuple(names)


def _taps(plan: Plan, mode: str) -> dict[str, float]:
    """Return the tap of every transformer in a mode [fraction]: its own, or that of the set-points."""
    taps = {row.name: row.values.get("tap_pu") or 0.0 for row in plan.of(*WINDINGS)}
    for row in plan.of("Set-points"):
        if row.values.get("mode") == mode and row.has("equipment", "tap_pu"):
            taps[row.values["equipment"]] = row.values["tap_pu"]
    return {name: tap / 100.0 for name, tap in taps.items()}


def _rings(closed: Sequence[Joint], taps: dict[str, float]) -> Iterator[Ring]:
    """Yield the rings of a mode, one for each joint that closes one."""
    around: dict[str, list[tuple[str, Joint, int]]] = {}
    for joint in closed:
        one, other = joint.ends
        around.setdefault(one, []).append((other, joint, 1))
        around.setdefault(other, []).append((one, joint, -1))
    reached: dict[str, Reached] = {}
    for start in around:
        if start in reached:
            continue
        reached[start] = Reached(by=None, before="", hours=0, log_ratio=0.0)
        used: set[int] = set()
        waiting = [start]
        while waiting:
            board = waiting.pop()
            for other, joint, sign in around[board]:
                if id(joint) in used:
                    continue
                used.add(id(joint))
                there = _beyond(reached[board], board, joint, sign, taps)
                if other in reached:
                    yield _ring(joint, board, other, there, reached)
                else:
                    reached[other] = there
                    waiting.append(other)


def _beyond(here: Reached, board: str, joint: Joint, sign: int, taps: dict[str, float]) -> Reached:
    ratio = joint.ratio * (1.0 + taps.get(joint.row.name, 0.0))
    return Reached(
        by=joint,
        before=board,
        hours=(here.hours + sign * joint.hours) % HOURS,
        log_ratio=here.log_ratio - sign * log(ratio),
    )


def _ring(closing: Joint, board: str, other: str, there: Reached, reached: dict[str, Reached]) -> Ring:
    one, two = _way_back(board, reached), _way_back(other, reached)
    shared = {id(joint) for joint in one} & {id(joint) for joint in two}
    around = [*(joint for joint in (*one, *two) if id(joint) not in shared), closing]
    transformers = {joint.row.name: joint.row for joint in around if joint.is_transformer}
    apart = (there.hours - reached[other].hours) % HOURS
    return Ring(
        transformers=tuple(transformers[name] for name in sorted(transformers)),
        hours=min(apart, HOURS - apart),
        ratio_error=exp(abs(there.log_ratio - reached[other].log_ratio)) - 1.0,
    )


def _way_back(board: str, reached: dict[str, Reached]) -> list[Joint]:
    way = []
    while (step := reached[board]).by is not None:
        way.append(step.by)
        board = step.before
    return way


def _report_phase(plan: Plan, ring: Ring, modes: Sequence[str]) -> None:
    row = ring.transformers[-1]
    named = _and([f"{t.name} ({t.values['vector_group']})" for t in ring.transformers])
    said = (
        f"{named} close a ring in {_modes(modes)}, and its ends are {DEGREES_PER_HOUR * ring.hours}° apart: "
        "a standing short circuit"
    )
    wanted = "give vector groups of one clock number, or open the ring on the sheet Running"
    plan.report("ring-phase", row, "vector_group", said, wanted)


def _report_ratio(plan: Plan, ring: Ring, modes: Sequence[str]) -> None:
    row = ring.transformers[-1]
    named = _and([t.name for t in ring.transformers])
    said = (
        f"{named} close a ring in {_modes(modes)}, and the voltages at its ends differ by "
        f"{100.0 * ring.ratio_error:.2g} %: current circulates"
    )
    wanted = "check taps and rated voltages, or open the ring on the sheet Running"
    plan.report("ring-ratio", row, "tap_pu", said, wanted, warning=True)


def _and(names: Sequence[str]) -> str:
    return " and ".join([", ".join(names[:-1]), names[-1]] if len(names) > 1 else names)


def _modes(modes: Sequence[str]) -> str:
    return f"the mode {modes[0]}" if len(modes) == 1 else f"the modes {_and(modes)}"
