"""Every protective device of the plant as a band, with what else its row says of how it works."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final, Literal

import numpy as np

from study.analyses.fault_ratings_limiting import LetThrough, let_through_sheets
from study.analyses.protection_bands import by_relay, earth_band, phase_band, reset_law
from study.formulas.curves_iec60255 import ULTIMATE_TRIP
from study.formulas.fuses_iec60269 import FUSING_MULTIPLE
from study.formulas.releases_iec60947 import TRIP, conventional_time_s
from study.formulas.trip_band import TripBand
from study.model.plant import Plant
from study.model.protection import CurvePoint, Device, SettingRange

Direction = Literal["", "forward", "reverse"]
DIRECTIONS: Final[Mapping[str, Direction]] = {"": "", "both": "", "forward": "forward", "reverse": "reverse"}


@dataclass(frozen=True, slots=True, kw_only=True)
class DeviceModel:
    """One protective device.

    ``band`` is on phase currents, ``earth`` on the residual current (None: no such stage), both in ampere of
    the side where the device stands. ``opened_by`` is the relay that opens a breaker without settings of its
    own, else the device's own name. ``overload_a`` is the setting or rating that protects against overload
    and ``conventional_a`` the current that trips for certain within the conventional time; both NaN where
    there is no such protection or it is not known. ``direction`` is empty for a device that looks both ways;
    ``zone`` the zone that it protects alone and ``differential`` the differential functions that open it;
    ``interlocked_with`` the device whose signal holds its delay. ``let_through`` is the maker's sheet.
    ``ranges`` are what its settings can be set to. ``notes`` are words for the reader.
    """

    device: Device
    band: TripBand
    earth: TripBand | None
    opened_by: str
    overload_a: float
    conventional_a: float
    direction: Direction
    zone: str
    differential: tuple[str, ...]
    interlocked_with: str
    let_through: LetThrough | None
    ranges: tuple[SettingRange, ...]
    notes: tuple[str, ...]

    @property
    def name(self) -> str:
        """Name of the device."""
        return self.device.name


@dataclass(frozen=True, slots=True, kw_only=True)
class DeviceSurroundings:
    """What the rows of devices refer to, looked up once."""

    curves: Mapping[str, tuple[CurvePoint, ...]]
    sheets: Mapping[str, LetThrough]
    ranges: Mapping[str, tuple[SettingRange, ...]]
    relays: Mapping[tuple[str, str | None], Device]
    differential: Mapping[str, tuple[str, ...]]


def device_surroundings(plant: Plant) -> DeviceSurroundings:
    """Return what the rows of devices refer to.

    Parameters
    ----------
    plant : Plant
        The plant.

    Returns
    -------
    DeviceSurroundings
        For `device_model`.
    """
    curves: dict[str, list[CurvePoint]] = {}
    for point in plant.curves:
        curves.setdefault(point.curve, []).append(point)
    ranges: dict[str, list[SettingRange]] = {}
    for item in plant.setting_ranges:
        ranges.setdefault(item.device, []).append(item)
    differential: dict[str, list[str]] = {}
    for function in plant.protection_functions:
        if function.kind == "differential":
            opens = {name.strip() for name in (function.trips or "").split(",")}
            for where in {function.equipment, *opens} - {""}:
                differential.setdefault(where, []).append(function.name)
    return DeviceSurroundings(
        curves={name: tuple(points) for name, points in curves.items()},
        sheets=let_through_sheets(plant),
        ranges={name: tuple(items) for name, items in ranges.items()},
        relays={(d.equipment, d.end): d for d in plant.devices if d.kind == "overcurrent relay"},
        differential={name: tuple(names) for name, names in differential.items()},
    )


def protection_devices(plant: Plant) -> tuple[DeviceModel, ...]:
    """Return every device of the plant, in workbook order.

    Parameters
    ----------
    plant : Plant
        The plant.

    Returns
    -------
    tuple of DeviceModel
        One for each row of the sheet Devices.
    """
    surroundings = device_surroundings(plant)
    return tuple(device_model(device, surroundings) for device in plant.devices)


def device_model(device: Device, surroundings: DeviceSurroundings) -> DeviceModel:
    """Return one device; also one whose settings were changed for a trial.

    Parameters
    ----------
    device : Device
        Row of the sheet.
    surroundings : DeviceSurroundings
        From `device_surroundings`.

    Returns
    -------
    DeviceModel
        The device.
    """
    curve = surroundings.curves.get(device.curve or "", ())
    band, opener = phase_band(device, curve), device
    relay = surroundings.relays.get((device.equipment, device.end))
    if device.kind == "circuit breaker" and relay is not None and not _has_settings(device, curve):
        band = by_relay(phase_band(relay, surroundings.curves.get(relay.curve or "", ())), relay, device)
        opener = relay
    notes: list[str] = list(band.unknown)
    direction = _direction(opener, notes)
    own = {name for key in (device.name, opener.name) for name in surroundings.differential.get(key, ())}
    overload_a, conventional_a = overload_currents_a(opener, band, bool(curve))
    notes += _notes(opener, curve)
    return DeviceModel(
        device=device,
        band=band,
        earth=earth_band(opener),
        opened_by=opener.name,
        overload_a=overload_a,
        conventional_a=conventional_a,
        direction=direction,
        zone=opener.protected_zone or "",
        differential=tuple(sorted(own)),
        interlocked_with=opener.interlocked_with or "",
        let_through=surroundings.sheets.get(device.curve or ""),
        ranges=surroundings.ranges.get(opener.name, ()),
        notes=tuple(notes),
    )


def _has_settings(device: Device, curve: tuple[CurvePoint, ...]) -> bool:
    settings = (device.long_time_a, device.short_time_a, device.instantaneous_a, device.earth_fault_a)
    return bool(curve) or any(setting is not None for setting in settings) or device.instantaneous_off


def _direction(device: Device, notes: list[str]) -> Direction:
    words = " ".join((device.direction or "").lower().split())
    if words not in DIRECTIONS:
        notes.append(f"the direction {device.direction!r} is neither forward nor reverse: taken as both")
    return DIRECTIONS.get(words, "")


def _notes(device: Device, curve: tuple[CurvePoint, ...]) -> list[str]:
    notes = []
    settings = (device.long_time_a, device.short_time_a, device.instantaneous_a)
    if curve and any(setting is not None for setting in settings):
        notes.append(f"the maker's curve {device.curve} stands for the settings, which are not used")
    if curve and device.kind != "fuse":
        last = max(p.current_a or (p.current_in or 0.0) * device.i_rated_a for p in curve)
        notes.append(f"the maker's curve ends at {last:g} A: above it the device may open at once")
    if device.relay_curve is not None and device.reset and reset_law(device) == "at once":
        notes.append(f"reset {device.reset!r}: the delay is taken to reset at once below the setting")
    return notes


def overload_currents_a(device: Device, band: TripBand, by_curve: bool) -> tuple[float, float]:
    """Return the current that a device carries for ever and the one that trips it within its time.

    Source: IEC 60364-4-43, clause 433.1: In and I2; conventional currents of IEC 60947-2, 60269-1 and
    60947-4-1; from memory.

    Parameters
    ----------
    device : Device
        The row whose settings count.
    band : TripBand
        Its band.
    by_curve : bool
        Whether a maker's curve stands for the settings.

    Returns
    -------
    tuple of float
        In, I2; NaN where there is no overload protection or it is not known. [A]
    """
    rated = device.i_rated_a
    if by_curve and device.fuse_class != "aM":
        return rated, _from_curve_a(band, rated)
    factor = _trips_at(device)
    setting = rated if device.kind == "fuse" else device.long_time_a
    return (np.nan, np.nan) if setting is None or np.isnan(factor) else (setting, factor * setting)


def _trips_at(device: Device) -> float:
    """Return the multiple of its setting at which a device trips for certain; NaN for none."""
    match device.kind:
        case "fuse":
            return FUSING_MULTIPLE if device.fuse_class == "gG" else np.nan
        case "thermal overload":
            return ULTIMATE_TRIP
        case "overcurrent relay":
            return 1.0 + device.current_tolerance
        case _:
            return TRIP


def _from_curve_a(band: TripBand, rated_a: float) -> float:
    """Return the least current at which a maker's curve has cleared within the conventional time."""
    limit_s = 1.001 * conventional_time_s(rated_a)
    points = [point for edge in band.latest for point in edge.points]
    return min((amps for amps, seconds in points if seconds <= limit_s), default=np.nan)
