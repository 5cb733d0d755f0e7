"""Both sides of every device in one mode: what comes through its own branch, and what comes from the rest."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.analyses.fault_ratings_clearing import INSTANTANEOUS, STAGES, Clearing, clear
from study.analyses.fault_ratings_history import Histories, case_histories, knots_s
from study.analyses.fault_ratings_limiting import LetThrough
from study.analyses.fault_ratings_releases import LIMITS_WITHIN_S, Release
from study.model.plant import Plant
from study.results.short_circuit import FaultCase, ModeShortCircuit

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

_BY_CURVE = (STAGES.index("fuse melting"), STAGES.index("maker's curve"))


@dataclass(frozen=True, slots=True, kw_only=True)
class PlantDevices:
    """What of the devices does not change from mode to mode, [device].

    ``branch`` is the branch on which each stands ("" on a board, or on equipment without a cable), ``source``
    the source whose own device it is ("" for all else).
    """

    releases: tuple[Release, ...]
    sheets: tuple[LetThrough | None, ...]
    branch: tuple[str, ...]
    source: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Sides:
    """Faults on both sides of each device, [device]; arrays of both sides are [side, device], own first.

    ``heat_a2s`` is the I²t until the device has cleared that side, ``limited_a2s`` the same with the maker's
    let-through data where ``let_through`` is True.
    """

    live: BoolArray
    place: IntArray
    histories: tuple[Histories, Histories]
    clearing: tuple[Clearing, Clearing]
    initial_a: FloatArray
    heat_a2s: FloatArray
    limited_a2s: FloatArray
    let_through: BoolArray

    @property
    def stage(self) -> IntArray:
        """Return the stage that clears each side."""
        return np.stack([c.stage for c in self.clearing])

    @property
    def time_s(self) -> FloatArray:
        """Return when each side is cleared."""
        return np.stack([c.time_s for c in self.clearing])


def branch_of_devices(plant: Plant) -> tuple[str, ...]:
    """Return the branch on which each device stands.

    Parameters
    ----------
    plant : Plant
        The plant.

    Returns
    -------
    tuple of str
        The equipment where that is a branch, else the cable that leads to it, else "".
    """
    branches = {x.name for x in plant.cables} | {x.name for x in plant.ties}
    branches |= {x.name for x in plant.transformers} | {x.name for x in plant.three_winding}
    branches |= {x.name for x in plant.reactors}
    boards = {x.name for x in plant.boards}
    cable_to: dict[str, str] = {}
    for cable in plant.cables:
        for end in (cable.from_end, cable.to_end):
            if end not in boards:
                cable_to.setdefault(end, cable.name)
    return tuple(
        d.equipment if d.equipment in branches else cable_to.get(d.equipment, "") for d in plant.devices
    )


def source_of_devices(plant: Plant) -> tuple[str, ...]:
    """Return the source whose own device each is: it stands on the source or on the cable from it.

    Parameters
    ----------
    plant : Plant
        The plant.

    Returns
    -------
    tuple of str
        "" for the other devices.
    """
    sources = {g.name for g in plant.gensets} | {s.name for s in plant.shore_supplies}
    sources |= {c.name for c in plant.converter_supplies} | {m.name for m in plant.synchronous_motors}
    fed = {name: name for name in sources}
    for cable in plant.cables:
        for end in (cable.from_end, cable.to_end):
            if end in sources:
                fed[cable.name] = end
    return tuple(fed.get(d.equipment, "") for d in plant.devices)


def sides_of(plant: Plant, devices: PlantDevices, mode: ModeShortCircuit, f_hz: float) -> Sides:
    """Return both sides of every device in the maximum case of one mode.

    Parameters
    ----------
    plant : Plant
        The plant.
    devices : PlantDevices
        Releases and makers' sheets.
    mode : ModeShortCircuit
        The mode.
    f_hz : float
        Rated frequency. [Hz]

    Returns
    -------
    Sides
        In workbook order of the devices.
    """
    case, faults = mode.maximum, mode.devices
    total, own = case_histories(
        case, faults.place, _shares(plant, case, mode), knots_s(f_hz, case.parts.ends_s)
    )
    histories = own, total.less(own)
    forever = np.full(len(faults.names), np.inf)
    clearing = tuple(clear(devices.releases, h, 0.5 / f_hz, forever) for h in histories)
    heat = np.stack([h.heat_a2s(c.time_s) for h, c in zip(histories, clearing, strict=True)])
    initial = np.stack([h.ac_a[:, 0, 0] for h in histories])
    limited, used = _limited(devices, clearing, initial, heat)
    return Sides(
        live=faults.place >= 0,
        place=faults.place,
        histories=histories,
        clearing=(clearing[0], clearing[1]),
        initial_a=initial,
        heat_a2s=heat,
        limited_a2s=limited,
        let_through=used,
    )


def _shares(plant: Plant, case: FaultCase, mode: ModeShortCircuit) -> FloatArray:
    """Return the part of each source that comes through each device, [device, source]."""
    end = mode.devices.end
    equipment = np.array([d.equipment for d in plant.devices], object)
    own: FloatArray = (equipment[:, None] == np.array(case.sources.names, object)[None, :]).astype(float)
    if len(case.ends.place):
        own[end >= 0] = case.ends.share[end[end >= 0]]
    return own


def _limited(
    devices: PlantDevices, clearing: tuple[Clearing, ...], initial_a: FloatArray, heat_a2s: FloatArray
) -> tuple[FloatArray, BoolArray]:
    """Return the I²t with the maker's data where the device opens fast enough for them to hold."""
    limited, used = heat_a2s.copy(), np.zeros(heat_a2s.shape, bool)
    for side, cleared in enumerate(clearing):
        fast = (cleared.stage == INSTANTANEOUS) | (
            np.isin(cleared.stage, _BY_CURVE) & (cleared.time_s <= LIMITS_WITHIN_S)
        )
        for sheet, rows in _by_sheet(devices, fast):
            let = sheet.heat_at_a2s(initial_a[side, rows])
            used[side, rows] = let < limited[side, rows]
            limited[side, rows] = np.fmin(limited[side, rows], let)
    return limited, used


def _by_sheet(devices: PlantDevices, wanted: BoolArray) -> list[tuple[LetThrough, IntArray]]:
    groups: dict[int, list[int]] = {}
    for row, sheet in enumerate(devices.sheets):
        if sheet is not None and wanted[row]:
            groups.setdefault(id(sheet), []).append(row)
    found = []
    for rows in groups.values():
        sheet = devices.sheets[rows[0]]
        if sheet is not None:
            found.append((sheet, np.array(rows, np.int64)))
    return found


def cut_off_peaks_a(devices: PlantDevices, sides: Sides, peak_a: FloatArray) -> FloatArray:
    """Return the peak that each limiting device lets through on its worse side; NaN for the others.

    Parameters
    ----------
    devices : PlantDevices
        Makers' sheets.
    sides : Sides
        Both sides in one mode.
    peak_a : ndarray, shape (device,)
        Prospective peak: no more than that comes through. [A]

    Returns
    -------
    ndarray, shape (device,)
        [A]
    """
    found = np.full(len(peak_a), np.nan)
    for sheet, rows in _by_sheet(devices, sides.live):
        found[rows] = np.fmin(sheet.cut_off_at_a(sides.initial_a[:, rows].max(axis=0)), peak_a[rows])
    return found
