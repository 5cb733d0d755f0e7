"""Made-up short-circuit results: a few feeds of a fault in, a whole and consistent result out.

A feed is what one source gives at one place, and through which branch it arrives. All totals, peaks, shares
and duties follow from the feeds here by plain loops, apart from the program's own arithmetic.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np

from study.results.arrays import read_only
from study.results.fault_routes import FaultRoutes
from study.results.short_circuit import (
    BranchEnds,
    DeviceFaults,
    EarthSystem,
    Exponentials,
    FaultCase,
    FaultSources,
    Iec60909Case,
    ModeShortCircuit,
    OneSetLeft,
    Places,
    QuickRow,
    ShortCircuitResult,
)

SQRT2 = math.sqrt(2.0)
SQRT3 = math.sqrt(3.0)
TIMES_S = (0.0, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1.0, 2.0, 3.0, 5.0, 10.0)
PARTINGS_S = (0.02, 0.04, 0.06, 0.1)


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """A fault place; a board unless `kind` says otherwise."""

    name: str
    board: str = ""
    u_nominal_v: float = 440.0
    kind: str = "board"


@dataclass(frozen=True, slots=True, kw_only=True)
class Feed:
    """What one source gives at one place; blank currents mean that nothing decays.

    ``dc_a`` is sqrt2 I'' unless given; ``through`` is the branch by which it arrives (blank: the source
    stands on the place itself); ``far_end`` is where that branch comes from.
    """

    place: str
    source: str
    initial_a: float
    transient_a: float | None = None
    sustained_a: float | None = None
    dc_a: float | None = None
    t_sub_s: float = 0.015
    t_trans_s: float = 0.25
    t_dc_s: float = 0.04
    through: str = ""
    through_kind: str = "cable"
    far_end: str = ""

    def ac_a(self, t_s: float) -> float:
        """Return Iac at an instant."""
        transient = self.initial_a if self.transient_a is None else self.transient_a
        sustained = transient if self.sustained_a is None else self.sustained_a
        fast = (self.initial_a - transient) * math.exp(-t_s / self.t_sub_s)
        return fast + (transient - sustained) * math.exp(-t_s / self.t_trans_s) + sustained

    def direct_a(self, t_s: float) -> float:
        """Return idc at an instant."""
        start = SQRT2 * self.initial_a if self.dc_a is None else self.dc_a
        return start * math.exp(-t_s / self.t_dc_s)

    def peak_a(self, f_hz: float) -> float:
        """Return ip at half a cycle."""
        return SQRT2 * self.ac_a(0.5 / f_hz) + self.direct_a(0.5 / f_hz)


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """A source of fault current; its figures at its own terminals are those of its largest feed."""

    name: str
    board: str = "MSB"
    kind: str = "genset"
    rated_a: float = 1283.0
    sustained_known: bool = True
    holds: str = "holds about 3 In"
    holds_s: float = math.inf
    ends_s: float = math.inf


@dataclass(frozen=True, slots=True, kw_only=True)
class DeviceRow:
    """A device at a place: on the branch or the source that `own` names; dead where the place is blank."""

    name: str
    place: str = ""
    own: str = ""
    parting_s: float = 0.02
    operating_s: float = math.nan
    far_place: str = ""
    least_a: float = math.nan
    least_kind: str = "two-phase"


def places(*rows: Place) -> Places:
    """Return the places of a plant."""
    return Places(
        names=tuple(row.name for row in rows),
        kinds=tuple(row.kind for row in rows),  # type: ignore[arg-type]
        boards=tuple(row.board or row.name for row in rows),
        u_nominal_v=read_only([row.u_nominal_v for row in rows]),
    )


def fault_case(
    where: Places,
    sources: Sequence[Source],
    feeds: Sequence[Feed],
    *,
    f_hz: float = 60.0,
    tolerance: float = 0.15,
    two_phase: float = 0.866,
) -> FaultCase:
    """Return one case of one mode; nominal values are lower by `tolerance`."""
    half = 0.5 / f_hz
    shape = (len(where.names), len(sources))
    at = {
        (where.names.index(feed.place), [s.name for s in sources].index(feed.source)): feed for feed in feeds
    }
    table = {name: _table(at, shape, f_hz, name) for name in ("initial", "half", "direct", "ip")}
    live = np.zeros(shape[0], bool)
    live[[place for place, _ in at]] = True
    dark = np.where(live, 1.0, np.nan)
    iac = _over_time(at, shape, "ac_a") * dark[:, None]
    idc = _over_time(at, shape, "direct_a") * dark[:, None]
    parting = np.array([[sum(f.direct_a(t) for (p, _), f in at.items() if p == i) for t in PARTINGS_S]
                        for i in range(shape[0])])  # fmt: skip
    standing = np.array([[sum(f.ac_a(t) for (p, _), f in at.items() if p == i) for t in PARTINGS_S]
                         for i in range(shape[0])])  # fmt: skip
    with np.errstate(invalid="ignore", divide="ignore"):
        dc_part = parting / (SQRT2 * standing)
        t_dc = half / np.log(_starting_dc(at, shape) / table["direct"].sum(axis=1))
        r_over_x = 1.0 / (2.0 * math.pi * f_hz * t_dc)
    sustained = _over_time(at, shape, "ac_a", (1e6,))[:, 0] * dark
    initial, peak = table["initial"].sum(axis=1) * dark, table["ip"].sum(axis=1) * dark
    return FaultCase(
        sources=_fault_sources(sources, at, f_hz),
        live=read_only(live, bool),
        parallel_paths=read_only(np.zeros(shape[0]), bool),
        ik_initial_a=read_only(initial),
        iac_half_a=read_only(table["half"].sum(axis=1) * dark),
        idc_half_a=read_only(table["direct"].sum(axis=1) * dark),
        ip_a=read_only(peak),
        peak_a=read_only(1.01 * peak),
        ik_initial_nominal_a=read_only(initial * (1.0 - tolerance)),
        ip_nominal_a=read_only(peak * (1.0 - tolerance)),
        r_over_x=read_only(r_over_x),
        cos_phi=read_only(r_over_x / np.hypot(1.0, r_over_x)),
        sustained_reach_a=read_only(sustained),
        sustained_duty_a=read_only(sustained),
        equivalent_half_a=read_only(np.full(shape[0], np.nan)),
        equivalent_ip_a=read_only(np.full(shape[0], np.nan)),
        time_s=read_only(TIMES_S),
        iac_a=read_only(iac),
        idc_a=read_only(idc),
        iac_2ph_a=read_only(two_phase * iac),
        iac_earth_a=read_only(np.full_like(iac, np.nan)),
        least_a=read_only(min(two_phase, 1.0) * iac),
        parting_s=read_only(PARTINGS_S),
        dc_part=read_only(dc_part),
        parts=_exponentials(sources, at, shape),
        parts_2ph=_exponentials(sources, at, shape, times=two_phase),
        parts_earth=_exponentials(sources, at, shape, times=0.0),
        source_initial_a=read_only(table["initial"]),
        source_half_a=read_only(table["half"]),
        source_ip_a=read_only(table["ip"]),
        ends=_branch_ends(at, shape, table),
        routes=no_routes(shape),
    )


def no_routes(shape: tuple[int, int]) -> FaultRoutes:
    """Return ways of fault currents without any branch, for places and sources on one board."""
    places, sources = shape
    return FaultRoutes(
        ends=(),
        determined=read_only([], bool),
        terminal=read_only([], np.int64),
        inward=read_only([]),
        line=read_only([], np.int64),
        pull=read_only(np.zeros((1, 1))),
        from_source=read_only(np.zeros((1, sources))),
        to_place=read_only(np.zeros((1, places)), bool),
        end_bus=read_only([], np.int64),
        source_bus=read_only(np.zeros(sources), np.int64),
        source_island=read_only(np.zeros(sources), np.int64),
        place_bus=read_only(np.zeros(places), np.int64),
        place_island=read_only(np.zeros(places), np.int64),
        turns=read_only([1.0]),
        hours=read_only([0], np.int64),
        base_a=read_only([1000.0]),
        own_source=read_only(np.full(places, -1), np.int64),
        units=read_only(np.ones(sources)),
    )


def mode(
    name: str,
    where: Places,
    sources: Sequence[Source],
    feeds: Sequence[Feed],
    devices: Sequence[DeviceRow] = (),
    *,
    minimum: Sequence[Feed] | None = None,
    f_hz: float = 60.0,
    earth: Sequence[EarthSystem] = (),
    quick: Sequence[QuickRow] = (),
    **changes: Any,
) -> ModeShortCircuit:
    """Return one mode; the minimum case has the same feeds unless it is given."""
    maximum = fault_case(where, sources, feeds, f_hz=f_hz)
    least = fault_case(where, sources, feeds if minimum is None else minimum, f_hz=f_hz)
    whole = ModeShortCircuit(
        mode=name,
        solved=True,
        reason="",
        maximum=maximum,
        minimum=least,
        one_set=one_set_left(where, devices),
        iec60909_maximum=general_case(maximum, 1.05),
        iec60909_minimum=general_case(least, 0.95),
        devices=device_faults(where, feeds, devices, maximum, f_hz),
        earth=tuple(earth),
        quick=tuple(quick),
        findings=(),
    )
    return replace(whole, **changes)


def result(where: Places, *modes: ModeShortCircuit, f_hz: float = 60.0) -> ShortCircuitResult:
    """Return the whole result."""
    return ShortCircuitResult(places=where, f_hz=f_hz, modes=modes, simulated=(), bias=())


def earth_system(boards: Sequence[str], u_nominal_v: float = 440.0, **changes: Any) -> EarthSystem:
    """Return an insulated system of 1 microfarad to earth in each phase."""
    capacitive = SQRT3 * 2.0 * math.pi * 60.0 * 1e-6 * u_nominal_v
    start = EarthSystem(
        boards=tuple(boards),
        u_nominal_v=u_nominal_v,
        earthing="insulated",
        capacitance_f=1e-6,
        capacitance_given=True,
        capacitive_a=capacitive,
        resistor_a=math.nan,
        fault_a=capacitive,
        largest_resistor_ohm=1.0 / (3.0 * 2.0 * math.pi * 60.0 * 1e-6),
        resistor_power_w=math.nan,
    )
    return replace(start, **changes)


def general_case(case: FaultCase, c: float) -> Iec60909Case:
    """Return IEC 60909 figures of about the size of the case."""
    initial, none = case.ik_initial_a, np.full(len(case.ik_initial_a), np.nan)
    return Iec60909Case(
        c=read_only(np.full(len(initial), c)),
        ik_3ph_a=initial,
        ik_2ph_a=read_only(0.866 * initial),
        ik_earth_a=read_only(none),
        ip_3ph_a=case.ip_a,
        ip_2ph_a=read_only(0.866 * case.ip_a),
        ib_a=case.iac_half_a,
        ik_steady_a=case.sustained_duty_a,
        ith_a=initial,
        delay_s=0.1,
        duration_s=1.0,
        pandapower_ik_3ph_a=initial,
        pandapower_ip_3ph_a=case.ip_a,
        pandapower_ik_2ph_a=read_only(0.866 * initial),
        largest_difference=0.0,
        comparison="made up",
    )


def one_set_left(where: Places, rows: Sequence[DeviceRow]) -> OneSetLeft:
    """Return the case with one supply in each island, of which nothing is known."""
    none = read_only(np.full(len(where.names), np.nan))
    return OneSetLeft(
        supplies=(),
        fewer=False,
        ik_initial_a=none,
        least_100ms_a=none,
        least_1s_a=none,
        device_least_a=read_only(np.full(len(rows), np.nan)),
    )


def device_faults(
    where: Places, feeds: Sequence[Feed], rows: Sequence[DeviceRow], case: FaultCase, f_hz: float
) -> DeviceFaults:
    """Return what every device sees: the larger of its own branch and the rest."""
    names = list(where.names)
    ends = list(zip(case.ends.place.tolist(), case.ends.branches, strict=True))
    place = [names.index(row.place) if row.place else -1 for row in rows]
    duty = [_device_duty(row, feeds, f_hz) for row in rows]
    return DeviceFaults(
        names=tuple(row.name for row in rows),
        place=read_only(place, np.int64),
        end=read_only(
            [ends.index((p, r.own)) if (p, r.own) in ends else -1 for p, r in zip(place, rows, strict=True)],
            np.int64,
        ),
        ends=read_only(np.full((2, len(rows)), -1), np.int64),
        own=read_only(np.full((2, len(rows)), -1), np.int64),
        duty_initial_a=read_only([x[0] for x in duty]),
        duty_half_a=read_only([x[1] for x in duty]),
        duty_ip_a=read_only([x[2] for x in duty]),
        duty_through=read_only([x[3] for x in duty], bool),
        parting_s=read_only([row.parting_s for row in rows]),
        dc_part=read_only([x[4] for x in duty]),
        operating_s=read_only([row.operating_s for row in rows]),
        far_place=read_only([names.index(r.far_place) if r.far_place else -1 for r in rows], np.int64),
        least_a=read_only([row.least_a for row in rows]),
        least_kind=tuple(row.least_kind for row in rows),
    )


def _device_duty(row: DeviceRow, feeds: Sequence[Feed], f_hz: float) -> tuple[float, ...]:
    here = [feed for feed in feeds if row.place and feed.place == row.place]
    if not here:
        return (math.nan, math.nan, math.nan, False, math.nan)
    own = [feed for feed in here if row.own in (feed.through, feed.source)]
    sides = [own, [feed for feed in here if feed not in own]]
    peaks = [sum(feed.peak_a(f_hz) for feed in side) for side in sides]
    governs = sides[0] if peaks[0] > peaks[1] else sides[1]
    direct = sum(feed.direct_a(row.parting_s) for feed in governs)
    return (
        sum(feed.initial_a for feed in governs),
        max(sum(feed.ac_a(0.5 / f_hz) for feed in side) for side in sides),
        max(peaks),
        peaks[0] > peaks[1],
        direct / (SQRT2 * sum(feed.ac_a(row.parting_s) for feed in governs)),
    )


_At = dict[tuple[int, int], Feed]


def _table(at: _At, shape: tuple[int, int], f_hz: float, name: str) -> np.ndarray:
    values, half = np.zeros(shape), 0.5 / f_hz
    for index, feed in at.items():
        values[index] = {
            "initial": feed.initial_a,
            "half": feed.ac_a(half),
            "direct": feed.direct_a(half),
            "ip": feed.peak_a(f_hz),
        }[name]
    return values


def _starting_dc(at: _At, shape: tuple[int, int]) -> np.ndarray:
    return np.array([sum(f.direct_a(0.0) for (p, _), f in at.items() if p == i) for i in range(shape[0])])


def _over_time(
    at: _At, shape: tuple[int, int], component: str, times_s: Sequence[float] = TIMES_S
) -> np.ndarray:
    values = np.zeros((shape[0], len(times_s)))
    for (place, _), feed in at.items():
        values[place] += [getattr(feed, component)(t) for t in times_s]
    return values


def _exponentials(
    sources: Sequence[Source], at: _At, shape: tuple[int, int], *, times: float = 1.0
) -> Exponentials:
    table = {f.name: np.zeros(shape) for f in fields(Exponentials) if f.name.endswith("_a")}
    table |= {name: np.ones(shape) for name in ("t_sub_s", "t_trans_s", "t_dc_s")}
    for index, feed in at.items():
        table["subtransient_a"][index] = feed.initial_a
        table["transient_a"][index] = feed.initial_a if feed.transient_a is None else feed.transient_a
        table["sustained_a"][index] = feed.ac_a(1e6)
        table["dc_a"][index] = feed.direct_a(0.0)
        for name in ("t_sub_s", "t_trans_s", "t_dc_s"):
            table[name][index] = getattr(feed, name)
    arrays = {
        name: read_only(times * values if name.endswith("_a") else values) for name, values in table.items()
    }
    return Exponentials(**arrays, ends_s=read_only([source.ends_s for source in sources]))


def _fault_sources(sources: Sequence[Source], at: _At, f_hz: float) -> FaultSources:
    def largest(value: Any) -> Any:
        return read_only(
            [max([value(f) for (_, s), f in at.items() if s == i], default=0.0) for i in range(len(sources))]
        )

    return FaultSources(
        names=tuple(source.name for source in sources),
        kinds=tuple(source.kind for source in sources),
        boards=tuple(source.board for source in sources),
        island=read_only(np.zeros(len(sources)), np.int64),
        rated_a=read_only([source.rated_a for source in sources]),
        initial_a=largest(lambda feed: feed.initial_a),
        peak_a=largest(lambda feed: feed.peak_a(f_hz)),
        sustained_a=largest(lambda feed: feed.ac_a(1e6)),
        sustained_known=read_only([source.sustained_known for source in sources], bool),
        holds=tuple(source.holds for source in sources),
        holds_s=read_only([source.holds_s for source in sources]),
        preload=read_only(np.zeros(len(sources))),
    )


def _branch_ends(at: _At, shape: tuple[int, int], table: dict[str, np.ndarray]) -> BranchEnds:
    keys = list(dict.fromkeys((place, feed.through) for (place, _), feed in at.items() if feed.through))
    first = {key: next(f for (p, _), f in at.items() if (p, f.through) == key) for key in keys}
    share = np.zeros((len(keys), shape[1]))
    for (place, source), feed in at.items():
        if feed.through:
            share[keys.index((place, feed.through)), source] = 1.0
    rows = [place for place, _ in keys]
    through = {name: (share * table[name][rows]).sum(axis=1) for name in ("initial", "half", "ip")}
    rest = {name: ((1.0 - share) * table[name][rows]).sum(axis=1) for name in through}
    return BranchEnds(
        place=read_only(rows, np.int64),
        branches=tuple(branch for _, branch in keys),
        kinds=tuple(first[key].through_kind for key in keys),
        far_ends=tuple(first[key].far_end for key in keys),
        share=read_only(share),
        through_initial_a=read_only(through["initial"]),
        through_half_a=read_only(through["half"]),
        through_ip_a=read_only(through["ip"]),
        rest_initial_a=read_only(rest["initial"]),
        rest_half_a=read_only(rest["half"]),
        rest_ip_a=read_only(rest["ip"]),
        determined=read_only(np.ones(len(keys)), bool),
    )
