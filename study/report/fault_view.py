"""What of the short-circuit result is shown where: boards by weight, governing modes, finer curves."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any, Final, Literal

import numpy as np

from study.report.content import StudyOutcome
from study.report.tables import Column
from study.results.arrays import FloatArray, IntArray
from study.results.short_circuit import FaultCase, Iec60909Case, ModeShortCircuit, ShortCircuitResult

CaseName = Literal["maximum", "minimum"]
SHEET: Final = "R Short-circuit"
LEADING_ROLES: Final = ("main", "emergency", "propulsion")
_SAME: Final = 1e-9
_MODES_NAMED: Final = 3


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseView:
    """One case of one solved mode, with both standards."""

    mode: str
    name: CaseName
    ship: FaultCase
    general: Iec60909Case


def ka(value_a: float) -> float:
    """Return a current in kA.

    Parameters
    ----------
    value_a : float
        [A]

    Returns
    -------
    float
        [kA]

    Examples
    --------
    >>> ka(25000.0)
    25.0
    """
    return float(value_a) / 1000.0


def ka_column(key: str, heading: str, most_decimals: int = 2, **more: Any) -> Column:
    """Return a column of fault currents."""
    return Column(key=key, heading=heading, unit="kA", most_decimals=most_decimals, **more)


def solved_modes(result: ShortCircuitResult) -> tuple[ModeShortCircuit, ...]:
    """Return the modes that have a solution."""
    return tuple(mode for mode in result.modes if mode.solved)


def cases(result: ShortCircuitResult) -> Iterator[CaseView]:
    """Yield maximum and minimum case of every solved mode."""
    for mode in solved_modes(result):
        yield CaseView(mode=mode.mode, name="maximum", ship=mode.maximum, general=mode.iec60909_maximum)
        yield CaseView(mode=mode.mode, name="minimum", ship=mode.minimum, general=mode.iec60909_minimum)


def board_places(result: ShortCircuitResult) -> list[int]:
    """Return the places that are boards."""
    return [i for i, kind in enumerate(result.places.kinds) if kind == "board"]


def roles(outcome: StudyOutcome) -> dict[str, str]:
    """Return the role of every board by its name."""
    return {board.name: board.role for board in outcome.plant.boards}


def leading_boards(outcome: StudyOutcome, result: ShortCircuitResult) -> list[int]:
    """Return the places that are main, emergency or propulsion boards, in workbook order."""
    role = roles(outcome)
    names = result.places.names
    return [p for p in board_places(result) if role.get(names[p], "") in LEADING_ROLES]


def ranked_boards(outcome: StudyOutcome, result: ShortCircuitResult, case: FaultCase) -> list[int]:
    """Return the live boards of a case: leading ones in workbook order, then by falling peak."""
    leading = leading_boards(outcome, result)
    others = [p for p in board_places(result) if p not in leading]
    ranked = leading + sorted(others, key=lambda p: -_rank(float(case.ip_a[p])))
    return [p for p in ranked if case.live[p]]


def _rank(value: float) -> float:
    return value if math.isfinite(value) else -math.inf


@dataclass(frozen=True, slots=True, kw_only=True)
class Extreme:
    """The greatest or the least value over the modes, and the modes that have it."""

    value: float
    modes: tuple[str, ...]

    @property
    def words(self) -> str:
        """The modes in words."""
        rest = len(self.modes) - _MODES_NAMED
        named = "; ".join(self.modes[:_MODES_NAMED])
        return f"{named} and {rest} more" if rest > 0 else named


def greatest(names: Sequence[str], values: Sequence[float]) -> Extreme | None:
    """Return the greatest of one value for each mode; None where no value is known."""
    found = least(names, [-v for v in values])
    return None if found is None else Extreme(value=-found.value, modes=found.modes)


def least(names: Sequence[str], values: Sequence[float]) -> Extreme | None:
    """Return the least of one value for each mode; None where no value is known."""
    known = [(name, v) for name, v in zip(names, values, strict=True) if math.isfinite(v)]
    if not known:
        return None
    value = min(v for _, v in known)
    modes = tuple(name for name, v in known if v - value <= _SAME * abs(value))
    return Extreme(value=value, modes=modes)


def governing_mode(result: ShortCircuitResult, place: int) -> ModeShortCircuit | None:
    """Return the first mode with the greatest peak at a place; None where it is dead in all modes."""
    live = [mode for mode in solved_modes(result) if mode.maximum.live[place]]
    if not live:
        return None
    top = max(float(mode.maximum.ip_a[place]) for mode in live)
    return next(m for m in live if float(m.maximum.ip_a[place]) >= top * (1.0 - _SAME))


def instant(case: FaultCase, time_s: float) -> int:
    """Return the position in the time grid of a case that is nearest to a time."""
    return int(np.argmin(np.abs(case.time_s - time_s)))


@dataclass(frozen=True, slots=True, kw_only=True)
class Curves:
    """Current of one place against time: totals [time] and each source's a.c. part [source, time]."""

    time_s: FloatArray
    iac_a: FloatArray
    idc_a: FloatArray
    source_iac_a: FloatArray

    @property
    def envelope_a(self) -> FloatArray:
        """The upper envelope of the current, sqrt2 Iac + idc."""
        envelope: FloatArray = math.sqrt(2.0) * self.iac_a + self.idc_a
        return envelope


def curves(case: FaultCase, place: int, time_s: FloatArray) -> Curves:
    """Return the current at one place, read from its exponentials at other times than those of the result.

    Parameters
    ----------
    case : FaultCase
        The case.
    place : int
        The place.
    time_s : ndarray, shape (time,)
        Times from the start of the fault [s].

    Returns
    -------
    Curves
        Of the sources that the case has.
    """
    p = case.parts
    fast = (p.subtransient_a - p.transient_a)[place][:, None] * _decay(p.t_sub_s[place], time_s)
    slow = (p.transient_a - p.sustained_a)[place][:, None] * _decay(p.t_trans_s[place], time_s)
    lasting = time_s[None, :] <= p.ends_s[:, None]
    iac = np.where(lasting, fast + slow + p.sustained_a[place][:, None], 0.0)
    idc = np.where(lasting, p.dc_a[place][:, None] * _decay(p.t_dc_s[place], time_s), 0.0)
    return Curves(time_s=time_s, iac_a=iac.sum(axis=0), idc_a=idc.sum(axis=0), source_iac_a=iac)


def _decay(constant_s: FloatArray, time_s: FloatArray) -> FloatArray:
    decay: FloatArray = np.exp(-time_s[None, :] / constant_s[:, None])
    return decay


def one_busbar(result: ShortCircuitResult, places: Sequence[int]) -> list[tuple[int, ...]]:
    """Return boards in groups whose every source gives the same in every mode: sections of one busbar.

    Parameters
    ----------
    result : ShortCircuitResult
        The result.
    places : sequence of int
        Boards.

    Returns
    -------
    list of tuple of int
        Every board once, in the order given.
    """
    groups: list[list[int]] = []
    for place in places:
        mode = governing_mode(result, place)
        if mode is None:
            continue
        for group in groups:
            if governing_mode(result, group[0]) is mode and _alike(mode.maximum, group[0], place):
                group.append(place)
                break
        else:
            groups.append([place])
    return [tuple(group) for group in groups]


def _alike(case: FaultCase, a: int, b: int) -> bool:
    one, other = case.source_ip_a[a], case.source_ip_a[b]
    return bool(np.allclose(one, other, rtol=_SAME, atol=0.0))


def ends_at(case: FaultCase) -> dict[int, IntArray]:
    """Return the rows of the branch ends by their place."""
    rows: dict[int, list[int]] = {}
    for end, place in enumerate(case.ends.place.tolist()):
        rows.setdefault(int(place), []).append(end)
    return {place: np.array(found, np.int64) for place, found in rows.items()}


def mode_words(modes: Sequence[str], every: Sequence[str]) -> str:
    """Return modes in words: all of them as one phrase; names may hold commas.

    Parameters
    ----------
    modes, every : sequence of str
        Names; those of the study.

    Returns
    -------
    str
        The text.

    Examples
    --------
    >>> every = ["At sea", "Harbour"]
    >>> mode_words(["At sea", "Harbour"], every), mode_words(["At sea"], every)
    ('every mode', 'At sea')
    """
    if len(every) > 1 and set(modes) == set(every):
        return "every mode"
    return "; ".join(modes)
