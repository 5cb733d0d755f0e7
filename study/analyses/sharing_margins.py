"""How far one setting of one set may be off before a tolerance, a voltage limit or a rating is broken.

A change of one set's voltage setting, whichever it is, moves the plant along one line: that set's kvar go up,
the others' down, in proportions that the network and the other regulators fix. The line is measured on the
network by a small change of the set's no-load voltage. Where it meets the first limit, the law of the set's
own regulator gives the setting that brings the plant there. Speed settings likewise, with kW.

The fuel limit of the engines, which near full load takes away part of a deviation, is left out: the margin is
then on the safe side.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from study.analyses.sharing_change import trimmed_network
from study.analyses.sharing_curves import NUDGE, AsSet, Nudge, solve_as_set
from study.analyses.sharing_group import Group, beyond_rating, group_of
from study.analyses.sharing_laws import (
    Held,
    droop_holding,
    no_load_frequency_holding,
    no_load_voltage_holding,
    speed_droop_holding,
)
from study.analyses.sharing_limits import LoadLimits, limits_at
from study.analyses.sharing_options import SharingOptions
from study.network.batch import BatchSolution
from study.network.solution import limit_words
from study.network.sources import Source, Speed
from study.results.arrays import FloatArray, IntArray
from study.results.sharing import AdjustingMargin, SetTrim

# how far each setting is followed, in pu of rated voltage or frequency
RANGES = {
    "no-load voltage": 0.06,
    "voltage droop": 0.10,
    "no-load frequency": 0.05,
    "speed droop": 0.08,
}
LEAST_DROOP_PU = 0.002
_SETTINGS = {
    "voltage": ("no-load voltage", "voltage droop"),
    "frequency": ("no-load frequency", "speed droop"),
}


def adjusting_margins(
    group: Group, as_set: AsSet, trims: tuple[SetTrim, ...], options: SharingOptions
) -> tuple[AdjustingMargin, ...]:
    """Return the margins of every voltage and speed setting that acts.

    They are taken at both ends of the range of load, where sharing is judged, and at the mode's own load if
    the sets can carry it together: no setting cures an overload. Where something is broken as set and nothing
    is as trimmed, they are about the trimmed set-points.

    Parameters
    ----------
    group : Group
        The sets.
    as_set : AsSet
        The network's answer as set.
    trims : tuple of SetTrim
        Set-points as trimmed.
    options : SharingOptions
        Tolerances, voltage and frequency band.

    Returns
    -------
    tuple of AdjustingMargin
        By setting, then by set. A set with controlled kvar, fixed field or set power has no margin there, nor
        has any voltage setting beside a reversed droop circuit.
    """
    margins, broken = _margins(group, as_set, options)
    if not broken or not any(t.u_trimmed_pu > 0.0 or t.f_trimmed_pu > 0.0 for t in trims):
        return margins
    trimmed = group_of(
        trimmed_network(group.at, trims),
        group.island,
        group.places.tolist(),
        group.loads,
        p_kw=group.p_kw,
        q_kvar=group.q_kvar,
    )
    solved = solve_as_set(trimmed)
    if isinstance(solved, str):
        return margins
    about, still_broken = _margins(trimmed, solved, options)
    return margins if still_broken else tuple(replace(m, trimmed=True) for m in about)


def _margins(group: Group, as_set: AsSet, options: SharingOptions) -> tuple[tuple[AdjustingMargin, ...], str]:
    """Return the margins about the sets as they are, and what is broken as they are."""
    boards = _Boards.of(group)
    loads = _loads(group, as_set, options, boards)
    broken = next((f"{load.broken}, broken as set" for load in loads if load.broken), "")
    lines = _Lines.of(group, as_set, boards)
    found: dict[str, list[AdjustingMargin]] = {name: [] for names in _SETTINGS.values() for name in names}
    ends = [end for load in loads for end in _ends(load, lines)] if lines.sets else []
    for line, (quantity, n) in enumerate(lines.sets):
        for setting in _SETTINGS[quantity]:
            own = _own_value(group.sources[n], setting)
            if own > 0.0:
                values = [
                    (_value(group, n, setting, end, line), end.breaks[line])
                    for end in ends
                    if not broken and np.isfinite(end.steps[line])
                ]
                found[setting].append(_margin(group.names[n], setting, own, values, broken))
    return tuple(margin for margins in found.values() for margin in margins), broken


@dataclass(frozen=True, slots=True, kw_only=True)
class _Boards:
    """The board of each set: its bus, and what turns network per unit into its nominal voltage, [set]."""

    bus: IntArray
    of_nominal: FloatArray

    @classmethod
    def of(cls, group: Group) -> _Boards:
        network = group.at.network
        home = {g.name: g.board for g in network.plant.gensets}
        node = np.array([network.topology.node_of[home[name]] for name in group.names], np.int64)
        nominal = np.array([network.plant.board(home[name]).u_nominal_v for name in group.names])
        return cls(bus=group.at.bus_of_node[node], of_nominal=network.u_base_v[node] / nominal)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Lines:
    """The changes of the sets' state for one nudge of one set, at the two loads where they were measured.

    ``sets`` [line] holds what was nudged, voltage or frequency, and of which set; ``loads_pu`` is
    [end, line, 1]. Where only one load has a solution it stands for both.
    """

    sets: list[tuple[str, int]]
    loads_pu: FloatArray
    first: Held
    last: Held

    @classmethod
    def of(cls, group: Group, as_set: AsSet, boards: _Boards) -> _Lines:
        """Return the lines that have been measured."""
        solved = as_set.solution.solved
        known: dict[tuple[str, int], list[Nudge]] = {}
        for nudge in as_set.nudges:
            if solved[nudge.base] and solved[nudge.row]:
                known.setdefault((nudge.quantity, nudge.n), []).append(nudge)
        ends = [[pair[k] for pair in known.values()] for k in (0, -1)]
        changes = [
            _held(group, boards, as_set.solution, [x.row for x in end]).moved(
                _held(group, boards, as_set.solution, [x.base for x in end]), -1.0
            )
            for end in ends
        ]
        loads_pu = np.array([[as_set.load_pu[x.base] for x in end] for end in ends])[:, :, None]
        return cls(sets=list(known), loads_pu=loads_pu, first=changes[0], last=changes[1])

    def at(self, load_pu: float) -> Held:
        """Return the changes at another load, on the straight line through the two measured ones."""
        low, high = self.loads_pu
        part = np.where(high > low, (load_pu - low) / np.where(high > low, high - low, 1.0), 0.0)
        return self.first.moved(self.last.moved(self.first, -1.0), part)


@dataclass(frozen=True, slots=True, kw_only=True)
class _End:
    """One end of every line at one load: the state as set, the states there, how many nudges away."""

    now: Held
    then: Held
    steps: FloatArray
    breaks: tuple[str, ...]


def _ends(load: LoadLimits, lines: _Lines) -> list[_End]:
    change = lines.at(load.load_pu)
    return [
        _End(
            now=load.held,
            then=load.held.moved(change, np.where(np.isfinite(end.steps), end.steps, 0.0)[:, None]),
            steps=end.steps,
            breaks=end.breaks,
        )
        for end in load.ends(change)
    ]


def _held(group: Group, boards: _Boards, solution: BatchSolution, row: int | list[int]) -> Held:
    """Return the state in one row of a solution, or in several."""
    return Held(
        p_kw=solution.source_p_kw[row][..., group.places],
        q_kvar=solution.source_q_kvar[row][..., group.places],
        u_pu=solution.source_u_pu[row][..., group.places],
        board_u_pu=np.abs(solution.v_bus_pu[row][..., boards.bus]) * boards.of_nominal,
        f_pu=solution.frequency_pu[row][..., [group.island]],
    )


def _loads(group: Group, as_set: AsSet, options: SharingOptions, boards: _Boards) -> list[LoadLimits]:
    """Return the ends of the range that have a solution, and the mode's own load."""
    ends = [k for k in (0, len(as_set.scale) - 1) if as_set.solution.solved[k]]
    rows = [(as_set.solution, k, False) for k in ends]
    rows += [] if beyond_rating(group, as_set.own) else [(as_set.own, 0, True)]
    loads = []
    for solution, row, own in rows:
        held, words = _held(group, boards, solution, row), limit_words(solution, row)
        at_limit = (f"{words[k]} limit of {s.name}" for k, s in _placed(group) if words[k])
        load_pu = float(held.p_kw.sum() / group.p_rated_kw.sum())
        loads.append(limits_at(group, options, held, load_pu, own=own, at_limit=next(at_limit, "")))
    return loads


def _placed(group: Group) -> Iterator[tuple[int, Source]]:
    return zip(group.places.tolist(), group.sources, strict=True)


def _own_value(source: Source, setting: str) -> float:
    """Return what a setting is as set; 0 where the source has none."""
    return {
        "no-load voltage": source.v_ref_pu,
        "voltage droop": source.droop_pu,
        "no-load frequency": source.f_no_load_pu,
        "speed droop": source.speed_droop_pu if source.speed == Speed.DROOP else 0.0,
    }[setting]


def _value(group: Group, n: int, setting: str, end: _End, line: int) -> float:
    """Return the setting that brings the plant to the end of a line; NaN where none does."""
    source = group.sources[n]
    if setting == "no-load voltage":
        return no_load_voltage_holding(group, n, end.now, end.then.at(line))
    if setting == "voltage droop":
        return droop_holding(group, n, end.now, end.then.at(line))
    if source.speed != Speed.DROOP:
        return source.f_no_load_pu + NUDGE["frequency"] * float(end.steps[line])
    holding = no_load_frequency_holding if setting == "no-load frequency" else speed_droop_holding
    return holding(source, float(end.then.p_kw[line, n]), float(end.then.f_pu[line, 0]))


def _margin(
    name: str, setting: str, own: float, values: list[tuple[float, str]], broken: str
) -> AdjustingMargin:
    """Return the nearest values either way, within the range that is followed."""
    none = (float("nan"), "")
    if broken:
        low = high = (own, broken)
    else:
        least = max(own - RANGES[setting], LEAST_DROOP_PU if "droop" in setting else 0.0)
        low = max((v for v in values if least <= v[0] <= own), default=none)
        high = min((v for v in values if own < v[0] <= own + RANGES[setting]), default=none)
    return AdjustingMargin(
        genset=name,
        setting=setting,
        set_pu=own,
        low_pu=low[0],
        low_breaks=low[1],
        high_pu=high[0],
        high_breaks=high[1],
    )
