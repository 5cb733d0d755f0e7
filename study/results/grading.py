"""Result of the grading study: which device clears, which waits, in every mode.

A *station* is a place at which devices open a circuit: a breaker with its relay and the overload relay
beside it are one. A *pair* is a station that is nearest to a fault and one behind it towards a source; arrays
[pair, mode] hold NaN, and False or -1, where the pair does not exist in a mode. Currents are r.m.s. in A at
the voltage of the station; times in s.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

from study.results.arrays import BoolArray, FloatArray, IntArray

PairKind = Literal[
    "series", "same circuit", "fault of a set", "parallel path", "looks away", "fed back by a converter"
]
PAIR_KINDS: Final[tuple[PairKind, ...]] = (
    "series",
    "same circuit",
    "fault of a set",
    "parallel path",
    "looks away",
    "fed back by a converter",
)
FULL, PARTIAL, NONE, NOT_ASSESSED, NOT_NEEDED = range(5)
EXTENTS: Final = ("full", "partial", "none", "not assessed", "not needed")


@dataclass(frozen=True, slots=True, kw_only=True)
class GradingStations:
    """Stations, tuples and arrays [station].

    ``devices`` are the names of the devices there and ``set_at`` the one that holds the settings against
    faults; ``equipment`` is what they protect, ``boards`` the board at which they stand, ``u_nominal_v`` its
    voltage. ``unknown`` says what of them the workbook does not give.
    """

    names: tuple[str, ...]
    set_at: tuple[str, ...]
    unknown: tuple[str, ...]
    devices: tuple[tuple[str, ...], ...]
    equipment: tuple[str, ...]
    boards: tuple[str, ...]
    u_nominal_v: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class GradingPairs:
    """Pairs of stations.

    [pair]: ``downstream`` and ``upstream`` are stations, ``zone`` is what the downstream one protects.
    [pair, mode]: ``present``; ``kind`` numbers `PAIR_KINDS`; ``extent`` numbers `EXTENTS`. At the fault with
    the least margin, ``level`` of `GradingResult.levels`: ``clears_s`` when the downstream station has
    cleared at the latest (inf: never), ``releases_s`` when the upstream one releases at the earliest,
    ``margin_s`` between both (a bound from below where it is ample; -inf where only the upstream one clears),
    ``needed_s``, ``current_a`` and ``upstream_a`` the currents at the start, ``rule`` of
    `GradingResult.rules` that decided. ``up_to_a`` and ``from_a`` bound the range in which a partial pair
    discriminates, by the current through the downstream station; ``largest_a`` is the largest there.
    ``current_ratio`` is the current at which the upstream station may open without delay over the current
    that it sees, at the least over all faults (inf: no such stage).
    """

    downstream: IntArray
    upstream: IntArray
    zone: tuple[str, ...]
    present: BoolArray
    kind: IntArray
    extent: IntArray
    level: IntArray
    rule: IntArray
    clears_s: FloatArray
    releases_s: FloatArray
    margin_s: FloatArray
    needed_s: FloatArray
    current_a: FloatArray
    upstream_a: FloatArray
    up_to_a: FloatArray
    from_a: FloatArray
    largest_a: FloatArray
    current_ratio: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Reach:
    """Whether the least fault in what each station protects is cleared in time.

    [row]: ``station``, ``zone``. [row, mode]: ``present``; ``least_a`` the least current through the station
    when it clears (at the start where it does not), ``kind`` of which fault; ``clears_s`` when the fault is
    cleared at the latest, ``by`` the station that does it (-1: none, -2: the sources stop by themselves);
    ``holds_s`` for how long the sources keep the current up.
    """

    station: IntArray
    zone: tuple[str, ...]
    present: BoolArray
    least_a: FloatArray
    clears_s: FloatArray
    by: IntArray
    holds_s: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class RideThrough:
    """One start, inrush or restart against one station: the worst mode.

    ``event`` says what happens and to what, ``current_a`` is the current through the station at its start and
    ``lasts_s`` for how long, ``before_a`` what it carried before. ``trips_s`` is when the station may open at
    the earliest (inf: it holds), ``needed_s`` how long it has to hold. ``assumed`` says what was not in the
    workbook.
    """

    mode: str
    station: int
    event: str
    equipment: str
    current_a: float
    before_a: float
    lasts_s: float
    needed_s: float
    trips_s: float
    assumed: str


@dataclass(frozen=True, slots=True, kw_only=True)
class GradingPath:
    """The stations in series from a consumer, or the last board, to one source in one mode.

    ``stations`` go from the consumer to the source. ``largest_a`` and ``least_a`` are the currents through
    each at half a cycle of the largest and of the least fault behind the first one.
    """

    mode: str
    zone: str
    source: str
    stations: tuple[int, ...]
    largest_a: tuple[float, ...]
    least_a: tuple[float, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class SettingChange:
    """One setting that cures a failure, within its range; never applied by the program.

    ``cures`` names what it cures, (downstream, upstream) or (station, ""), each with its modes; ``before``
    and ``after`` are the least margins of that. ``tried`` is how many settings were graded again before this
    one was found, ``graded`` how many pairs and modes were graded again after it.
    """

    device: str
    setting: str
    unit: str
    now: float
    proposed: float
    cell: str
    range_cell: str
    reason: str
    cures: tuple[tuple[str, str, tuple[str, ...]], ...]
    before: float
    after: float
    margin_unit: str
    tried: int
    graded: int


@dataclass(frozen=True, slots=True, kw_only=True)
class NotCured:
    """A failure for which no setting within the ranges was found, and why."""

    downstream: str
    upstream: str
    modes: tuple[str, ...]
    why: str


@dataclass(frozen=True, slots=True, kw_only=True)
class GradingResult:
    """The grading of every mode; the last axis of all arrays is ``modes``."""

    modes: tuple[str, ...]
    levels: tuple[str, ...]
    rules: tuple[str, ...]
    stations: GradingStations
    pairs: GradingPairs
    reach: Reach
    ride_through: tuple[RideThrough, ...]
    paths: tuple[GradingPath, ...]
    changes: tuple[SettingChange, ...]
    not_cured: tuple[NotCured, ...]
    findings: tuple[str, ...]
