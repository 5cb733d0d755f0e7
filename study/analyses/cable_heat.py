"""The worst heat in each cable: faults from its near end to its far end, cleared at the latest."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from study.analyses.cable_loads import devices_of_cables
from study.analyses.fault_ratings_backup import least_over_three_phase
from study.analyses.fault_ratings_history import Histories, case_histories, knots_s
from study.analyses.fault_ratings_limiting import LetThrough
from study.analyses.protection_devices import DeviceModel
from study.formulas.cable_ratings import adiabatic_k, withstand_a2s
from study.formulas.damage_curves import ADIABATIC_UP_TO_S
from study.formulas.operate_state import CurrentHistory, edge_operating_s
from study.formulas.trip_law import Edge
from study.model.plant import Plant
from study.results.arrays import read_only
from study.results.cable_protection import CableHeat
from study.results.short_circuit import ModeShortCircuit, ShortCircuitResult

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

# A device limits the current where it opens at once or within this time.
LIMITS_WITHIN_S: Final = 0.1
LIMITING: Final = ("instantaneous", "fuse", "maker's curve")
# Just below a pick-up the next slower stage clears: the hottest fault of its range.
_BELOW: Final = 0.999
_NEGLIGIBLE_A: Final = 1.0


@dataclass(frozen=True, slots=True, kw_only=True)
class CableEnd:
    """The devices at one end of a cable: the first to open clears what comes through this end.

    ``edges`` are all their latest edges, ``owners`` the device of each. ``alone`` is True where the other end
    has none: this one must then also clear what comes through the cable towards it. ``on_cable`` is False for
    devices on the transformer at the cable's end: a fault at their own place does not heat the cable. The
    thermal overload relay of a starter counts with the devices before it, up to which it opens the motor.
    """

    cable: int
    devices: tuple[int, ...]
    edges: tuple[Edge, ...]
    owners: tuple[int, ...]
    sheet: LetThrough | None
    alone: bool
    on_cable: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class _Faults:
    """Faults of one mode, [row]: the end whose devices clear each, its currents, and where it lies."""

    end: IntArray
    currents: Histories
    inside: BoolArray


def cable_heat(plant: Plant, models: Sequence[DeviceModel], result: ShortCircuitResult) -> CableHeat:
    """Return the worst heat in every cable in every mode.

    Faults lie between the near end, in the maximum case, and the far end, least kind of fault in the minimum
    case; between both, those just below every pick-up of the devices count, where the next slower stage
    clears. Where the cable has devices at one end alone, they also clear what the other end feeds into a
    fault on their own side. Of a fault that lasts longer than 5 s, the heat of the first 5 s counts.

    Parameters
    ----------
    plant : Plant
        Cables.
    models : sequence of DeviceModel
        From `protection_devices`.
    result : ShortCircuitResult
        Currents of every mode.

    Returns
    -------
    CableHeat
        In workbook order.
    """
    ends = cable_ends(plant, models)
    k = np.array(
        [
            float(adiabatic_k(c.conductor_temperature_degc, c.short_circuit_temperature_degc, c.conductor))
            for c in plant.cables
        ]
    )
    area = np.array([c.runs * c.section_mm2 for c in plant.cables], float)
    shape = (len(plant.cables), len(result.modes))
    table = _Worst(shape)
    for column, mode in enumerate(result.modes):
        if mode.solved and ends:
            _mode_heat(table, column, _Case(plant, ends, mode, result))
    return CableHeat(
        k=read_only(k),
        withstand_a2s=read_only(withstand_a2s(area, k)),
        devices=tuple(m.name for m in models),
        heat_a2s=read_only(table.heat_a2s),
        fault_a=read_only(table.fault_a),
        clearing_s=read_only(table.clearing_s),
        device=read_only(table.device, np.int64),
        stage=tuple(tuple(row) for row in table.stage),
        let_through=read_only(table.let_through, np.bool_),
        inside=read_only(table.inside, np.bool_),
        slow=read_only(table.slow, np.bool_),
    )


class _Worst:
    """The worst fault of each cable and mode while they are found."""

    def __init__(self, shape: tuple[int, int]) -> None:
        self.heat_a2s, self.fault_a, self.clearing_s = (np.full(shape, np.nan) for _ in range(3))
        self.device = np.full(shape, -1, np.int64)
        self.stage = [[""] * shape[1] for _ in range(shape[0])]
        self.let_through, self.inside, self.slow = (np.zeros(shape, bool) for _ in range(3))


def cable_ends(plant: Plant, models: Sequence[DeviceModel]) -> tuple[CableEnd, ...]:
    """Return the ends of cables that have devices whose latest clearing is known.

    Parameters
    ----------
    plant : Plant
        Cables and devices.
    models : sequence of DeviceModel
        From `protection_devices`.

    Returns
    -------
    tuple of CableEnd
        One for each cable and end.
    """
    found = []
    transformers = {t.name for t in plant.transformers} | {t.name for t in plant.three_winding}
    for cable, devices in enumerate(devices_of_cables(plant)):
        opened = {models[k].opened_by for k in devices if models[k].opened_by != models[k].name}
        own = [k for k in devices if models[k].name not in opened and models[k].band.latest]
        starter = [k for k in own if models[k].device.kind == "thermal overload"]
        groups: dict[tuple[str, str | None], list[int]] = {}
        for k in own:
            if k not in starter:
                groups.setdefault((models[k].device.equipment, models[k].device.end), []).append(k)
        for (equipment, _), rows in groups.items():
            pairs = [(edge, k) for k in (*rows, *starter) for edge in models[k].band.latest]
            found.append(
                CableEnd(
                    cable=cable,
                    devices=tuple(rows),
                    edges=tuple(edge for edge, _ in pairs),
                    owners=tuple(k for _, k in pairs),
                    sheet=next((models[k].let_through for k in rows if models[k].let_through), None),
                    alone=len(groups) == 1,
                    on_cable=equipment not in transformers,
                )
            )
    return tuple(found)


class _Case:
    """One mode: its live ends, where they stand, and the currents of the cable for 1 A at the device."""

    def __init__(
        self, plant: Plant, ends: tuple[CableEnd, ...], mode: ModeShortCircuit, result: ShortCircuitResult
    ) -> None:
        device = np.array([end.devices[0] for end in ends], np.int64)
        self.mode, self.half_cycle_s = mode, 0.5 / result.f_hz
        self.live = np.flatnonzero(mode.devices.place[device] >= 0)
        self.ends = tuple(ends[n] for n in self.live)
        self.device = device[self.live]
        self.place, self.far = mode.devices.place[self.device], mode.devices.far_place[self.device]
        volts = {b.name: b.u_nominal_v for b in plant.boards}
        cables = [plant.cables[end.cable] for end in self.ends]
        own = [volts.get(c.from_end, volts.get(c.to_end, np.nan)) for c in cables]
        there = result.places.u_nominal_v[self.place]
        self.ratio = np.where(np.isnan(own), 1.0, there / np.array(own, float))
        stops = np.concatenate([mode.maximum.parts.ends_s, mode.minimum.parts.ends_s])
        knots = knots_s(result.f_hz, stops)
        self.knots = knots[knots <= 2.0 * ADIABATIC_UP_TO_S]


def _mode_heat(table: _Worst, column: int, case: _Case) -> None:
    faults = _faults(case)
    if not len(faults.end):
        return
    clearing_s, owner, stages = _cleared(case, faults)
    initial = faults.currents.ac_a[:, 0, 0]
    soon = clearing_s <= ADIABATIC_UP_TO_S
    heat = faults.currents.heat_a2s(np.minimum(clearing_s, ADIABATIC_UP_TO_S))
    fast = np.array([stage in LIMITING for stage in stages]) & (clearing_s <= LIMITS_WITHIN_S)
    let = _let_through_a2s(case, faults.end, initial, fast)
    ratio = case.ratio[faults.end]
    limited = let < heat
    heat = np.fmin(heat, let) * ratio**2
    cable = np.array([end.cable for end in case.ends])[faults.end]
    table.slow[cable[~soon], column] = True
    for row in np.argsort(heat, kind="stable"):
        at = cable[row], column
        table.heat_a2s[at], table.fault_a[at] = heat[row], initial[row] * ratio[row]
        table.clearing_s[at], table.device[at] = clearing_s[row], owner[row]
        table.stage[at[0]][column] = stages[row]
        table.let_through[at], table.inside[at] = limited[row], faults.inside[row]


def _faults(case: _Case) -> _Faults:
    """Return the faults to be cleared at each live end: near, far, from behind, and below each pick-up."""
    mode, knots = case.mode, case.knots
    out = np.abs(mode.device_shares(case.device, case.place, maximum=True))
    total, behind = case_histories(mode.maximum, case.place, out, knots)
    near = _near(case, total.less(behind))
    into = np.maximum(mode.device_shares(case.device, case.far, maximum=False), 0.0)
    _, least = case_histories(mode.minimum, case.far, into, knots)
    least = least.times(least_over_three_phase(mode.minimum, case.far, knots))
    rows, share = _corners(case.ends, near, least, case.half_cycle_s)
    alone = np.flatnonzero([end.alone and end.on_cable for end in case.ends])
    every = np.arange(len(case.ends))
    parts = [(every, near, False), (every, least, False), (alone, _rows(behind, alone), False)]
    parts.append((rows, _between(near, least, rows, share), True))
    counts = np.concatenate([h.ac_a[:, 0, 0] > _NEGLIGIBLE_A for _, h, _ in parts])
    return _Faults(
        end=np.concatenate([end for end, _, _ in parts])[counts],
        currents=_rows(_joined([h for _, h, _ in parts]), counts),
        inside=np.concatenate([np.full(len(end), x) for end, _, x in parts])[counts],
    )


def _near(case: _Case, rest: Histories) -> Histories:
    """Return the greatest faults: at the device, or beyond it where it does not stand on the cable."""
    off = np.flatnonzero([not end.on_cable for end in case.ends])
    if not len(off):
        return rest
    into = np.maximum(case.mode.device_shares(case.device[off], case.far[off], maximum=True), 0.0)
    _, beyond = case_histories(case.mode.maximum, case.far[off], into, case.knots)
    ac, dc = np.array(rest.ac_a), np.array(rest.dc_a)
    ac[off], dc[off] = beyond.ac_a, beyond.dc_a
    return Histories(time_s=rest.time_s, ac_a=ac, dc_a=dc)


def _rows(histories: Histories, rows: IntArray | BoolArray) -> Histories:
    return Histories(time_s=histories.time_s, ac_a=histories.ac_a[rows], dc_a=histories.dc_a[rows])


def _joined(parts: Sequence[Histories]) -> Histories:
    return Histories(
        time_s=parts[0].time_s,
        ac_a=np.concatenate([h.ac_a for h in parts]),
        dc_a=np.concatenate([h.dc_a for h in parts]),
    )


def _corners(
    ends: Sequence[CableEnd], near: Histories, far: Histories, half_cycle_s: float
) -> tuple[IntArray, FloatArray]:
    """Return the faults just below each pick-up: row of the end, and how far towards the far end [0..1].

    Each is placed so that the current falls short of the pick-up at the moment when it is asked for: half a
    cycle for a stage without delay, the end of a definite delay, the start for all else.
    """
    pairs = [(row, edge) for row, end in enumerate(ends) for edge in end.edges]
    row = np.array([r for r, _ in pairs], np.int64)
    delay = [edge.figures[0] if edge.law == "constant" else 0.0 for _, edge in pairs]
    asked = np.array([max(d, half_cycle_s) if e.law == "constant" else 0.0
                      for d, (_, e) in zip(delay, pairs, strict=True)])  # fmt: skip
    wanted = _BELOW * np.array([edge.from_a for _, edge in pairs])
    high = np.maximum(_rows(near, row).ac_at_a(asked), 1e-9)
    low = np.maximum(_rows(far, row).ac_at_a(asked), 1e-9)
    there = (wanted < high) & (wanted > low)
    share = np.log(high[there] / wanted[there]) / np.log(high[there] / low[there])
    return row[there], np.asarray(share)


def _between(near: Histories, far: Histories, rows: IntArray, share: FloatArray) -> Histories:
    """Return faults between both ends: equal steps of the logarithm are equal shares of the way."""
    x = share[:, None, None]
    high, low = np.maximum(near.ac_a[rows], 1e-9), np.maximum(far.ac_a[rows], 1e-9)
    return Histories(
        time_s=near.time_s,
        ac_a=np.exp((1.0 - x) * np.log(high) + x * np.log(low)),
        dc_a=(1.0 - x) * near.dc_a[rows] + x * far.dc_a[rows],
    )


def _cleared(case: _Case, faults: _Faults) -> tuple[FloatArray, IntArray, list[str]]:
    """Return when each fault is cleared at the latest, by which device and by which of its stages."""
    pairs = [(row, edge, owner) for row, end in enumerate(faults.end)
             for edge, owner in zip(case.ends[end].edges, case.ends[end].owners, strict=True)]  # fmt: skip
    row = np.array([r for r, _, _ in pairs], np.int64)
    edges = [edge for _, edge, _ in pairs]
    history = samples(_rows(faults.currents, row))
    time = edge_operating_s(edges, history, case.half_cycle_s, early=False)
    time = time + np.array([edge.after_s for edge in edges])
    clearing = np.full(len(faults.end), np.inf)
    owner, stages = np.full(len(faults.end), -1, np.int64), [""] * len(faults.end)
    for n in np.argsort(-time, kind="stable"):
        if np.isfinite(time[n]):
            clearing[row[n]], owner[row[n]], stages[row[n]] = time[n], pairs[n][2], edges[n].stage
    return clearing, owner, stages


def samples(histories: Histories) -> CurrentHistory:
    """Return histories as samples: ends and middles of the intervals; a source that stops makes a jump.

    Parameters
    ----------
    histories : Histories
        [row, interval, 3]

    Returns
    -------
    CurrentHistory
        [row, time]
    """
    knots = histories.time_s
    middle = 0.5 * (knots[1:] + knots[:-1])
    time = np.stack([knots[:-1], middle, knots[1:]], axis=1).reshape(-1)
    ac, dc = (x.reshape(len(x), -1) for x in (histories.ac_a, histories.dc_a))
    steady = np.append((np.diff(time) > 0.0) | np.any(np.diff(ac, axis=1) != 0.0, axis=0), True)
    return CurrentHistory(time_s=time[steady], ac_a=ac[:, steady], dc_a=dc[:, steady])


def _let_through_a2s(case: _Case, end: IntArray, initial_a: FloatArray, fast: BoolArray) -> FloatArray:
    """Return the maker's let-through I²t where a device opens fast enough for it to hold; NaN elsewhere."""
    found = np.full(len(end), np.nan)
    groups: dict[int, list[int]] = {}
    for row in np.flatnonzero(fast):
        sheet = case.ends[end[row]].sheet
        if sheet is not None:
            groups.setdefault(id(sheet), []).append(int(row))
    for rows in groups.values():
        sheet = case.ends[end[rows[0]]].sheet
        if sheet is not None:
            found[rows] = sheet.heat_at_a2s(initial_a[rows])
    return found
