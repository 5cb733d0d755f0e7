"""When devices have cleared at the latest, from their own settings: one row for each device."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

from study.formulas.curves_iec60255 import INVERSE_CURVES, OVERLOAD_CLASS_S, inverse_time_s, overload_time_s
from study.formulas.fuses_iec60269 import latest_melting_points, latest_melting_time_s
from study.model.plant import Plant
from study.model.protection import CurvePoint, Device

FloatArray = NDArray[np.float64]

# Overload releases trip within the conventional time from here up: IEC 60947-2, from memory.
CONVENTIONAL_TRIP: Final = 1.3
# An I2t delay is the delay set from this multiple of Ir up; common practice, no source.
SHORT_I2T_FROM: Final = 10.0
# A curve that opens later than this does not limit the current.
LIMITS_WITHIN_S: Final = 0.1
DEFINITE: Final = "definite time"

SlowKind = Literal["", "long-time delay", "relay curve", "overload relay", "fuse melting", "maker's curve"]


@dataclass(frozen=True, slots=True, kw_only=True)
class SlowStage:
    """A stage whose time depends on the current.

    ``from_a`` is where it starts to count, ``setting_a`` what currents are measured in. ``law`` and
    ``figures`` give the time: ``power`` (time at the setting, exponent), ``inverse`` (time multiplier, k, c,
    alpha), ``overload`` (time of the class), ``points`` (none: ``points`` are multiples of the setting and
    times).
    """

    kind: SlowKind
    from_a: float
    setting_a: float
    law: Literal["power", "inverse", "overload", "points"]
    figures: tuple[float, ...] = ()
    points: tuple[tuple[float, float], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Release:
    """What opens a device, each stage at the far end of its tolerance; inf: no such stage.

    ``short_i2t_from_a`` is the current above which an I2t delay is the delay set (0: a definite delay);
    ``fixed_s`` is the time from release to arc out. ``by_relay``: another device holds the settings.
    """

    instantaneous_a: float = np.inf
    short_a: float = np.inf
    short_s: float = np.inf
    short_i2t_from_a: float = 0.0
    slow: SlowStage | None = None
    fixed_s: float = 0.0
    by_relay: bool = False

    @property
    def known(self) -> bool:
        """Return True where at least one stage is given."""
        return self.slow is not None or min(self.instantaneous_a, self.short_a) < np.inf

    @property
    def limits_from_a(self) -> float:
        """Return the current from which it opens fast enough to limit: its instantaneous stage or curve."""
        if self.slow is None or self.slow.law != "points":
            return self.instantaneous_a
        fast = [multiple for multiple, time_s in self.slow.points if time_s <= LIMITS_WITHIN_S]
        return min(fast, default=np.inf) * self.slow.setting_a


def slow_times_s(stages: Sequence[SlowStage], amps: FloatArray) -> FloatArray:
    """Return the time of each stage at the currents of its row; inf below where it counts.

    Parameters
    ----------
    stages : sequence of SlowStage
        One for each row.
    amps : ndarray, shape (row, ...)
        [A]

    Returns
    -------
    ndarray
        The shape of the currents. [s]
    """
    groups: dict[tuple[object, ...], list[int]] = {}
    for row, stage in enumerate(stages):
        groups.setdefault((stage.law, stage.points), []).append(row)
    times = np.full(amps.shape, np.inf)
    wide = (slice(None), *[None] * (amps.ndim - 1))
    for rows in groups.values():
        some = [stages[row] for row in rows]
        multiple = amps[rows] / np.array([s.setting_a for s in some])[wide]
        figures = [np.array(column)[wide] for column in zip(*(s.figures for s in some), strict=True)]
        counts = amps[rows] >= np.array([s.from_a for s in some])[wide]
        times[rows] = np.where(counts, _time_s(some[0], multiple, figures), np.inf)
    return times


def _time_s(stage: SlowStage, multiple: FloatArray, figures: list[FloatArray]) -> FloatArray:
    match stage.law:
        case "power":
            return np.asarray(figures[0] * np.maximum(multiple, 1e-9) ** -figures[1])
        case "inverse":
            return np.asarray(figures[0] * inverse_time_s(multiple, *figures[1:]))
        case "overload":
            return overload_time_s(multiple, figures[0])
        case "points":
            return latest_melting_time_s(multiple, stage.points)


def releases(plant: Plant) -> tuple[Release, ...]:
    """Return what opens each device, in workbook order.

    A breaker without settings of its own is opened by the overcurrent relay at the same place. Where a
    motor's breaker has no stage for small currents, the thermal overload relay of the motor stands in.

    Parameters
    ----------
    plant : Plant
        The plant.

    Returns
    -------
    tuple of Release
        One for each device.
    """
    curves = _curves(plant)
    own = [_own(device, curves) for device in plant.devices]
    relays = {
        (d.equipment, d.end): r
        for d, r in zip(plant.devices, own, strict=True)
        if d.kind == "overcurrent relay"
    }
    overloads = {
        d.equipment: r.slow for d, r in zip(plant.devices, own, strict=True) if d.kind == "thermal overload"
    }
    ends = {cable.name: (cable.from_end, cable.to_end) for cable in plant.cables}
    whole: list[Release] = []
    for device, release in zip(plant.devices, own, strict=True):
        relay = relays.get((device.equipment, device.end))
        opened = release
        if device.kind == "circuit breaker" and not release.known and relay is not None:
            opened = replace(relay, fixed_s=max(relay.fixed_s, release.fixed_s), by_relay=True)
        beyond = [overloads.get(x) for x in (device.equipment, *ends.get(device.equipment, ()))]
        overload = next((x for x in beyond if x is not None), None)
        whole.append(replace(opened, slow=overload) if opened.slow is None else opened)
    return tuple(whole)


def _curves(plant: Plant) -> dict[str, tuple[CurvePoint, ...]]:
    names = dict.fromkeys(point.curve for point in plant.curves)
    return {name: tuple(p for p in plant.curves if p.curve == name) for name in names}


def _own(device: Device, curves: dict[str, tuple[CurvePoint, ...]]) -> Release:
    points = _latest_points(device, curves.get(device.curve or "", ()))
    if points:
        return Release(
            slow=SlowStage(
                kind="fuse melting" if device.kind == "fuse" else "maker's curve",
                from_a=points[0][0] * device.i_rated_a,
                setting_a=device.i_rated_a,
                law="points",
                points=points,
            )
        )
    if device.kind == "fuse":
        return Release()
    if device.kind == "thermal overload":
        return Release(slow=_overload(device))
    return _stages(device)


def _latest_points(device: Device, curve: tuple[CurvePoint, ...]) -> tuple[tuple[float, float], ...]:
    """Return the longest times of a maker's curve or of a standard fuse, by multiple of rated current."""
    points = [
        (p.current_in if p.current_in is not None else (p.current_a or 0.0) / device.i_rated_a, p.time_max_s)
        for p in curve
    ]
    given = tuple(sorted((amps, seconds) for amps, seconds in points if seconds is not None))
    if given or device.kind != "fuse" or device.fuse_class is None:
        return given
    try:
        standard = latest_melting_points(device.i_rated_a, device.fuse_class)
    except ValueError:
        return ()
    return tuple((amps / device.i_rated_a, seconds) for amps, seconds in standard)


def _overload(device: Device) -> SlowStage | None:
    setting, seconds = device.long_time_a, OVERLOAD_CLASS_S.get(device.trip_class or "")
    if setting is None or seconds is None:
        return None
    return SlowStage(
        kind="overload relay",
        from_a=CONVENTIONAL_TRIP * setting,
        setting_a=setting,
        law="overload",
        figures=(seconds,),
    )


def _stages(device: Device) -> Release:
    more_a, more_s = 1.0 + device.current_tolerance, 1.0 + device.time_tolerance
    release = Release(fixed_s=device.breaking_time_max_s, slow=_long_time(device, more_a, more_s))
    if device.instantaneous_a is not None:
        release = replace(release, instantaneous_a=device.instantaneous_a * more_a)
    if device.short_time_a is None or device.short_time_delay_s is None:
        return release
    reference = device.long_time_a if device.long_time_a is not None else device.i_rated_a
    return replace(
        release,
        short_a=device.short_time_a * more_a,
        short_s=device.short_time_delay_s * more_s,
        short_i2t_from_a=SHORT_I2T_FROM * reference if device.short_time_law == "I2t" else 0.0,
    )


def _long_time(device: Device, more_a: float, more_s: float) -> SlowStage | None:
    if device.relay_curve is not None:
        return _relay_curve(device, device.relay_curve, more_a, more_s)
    setting, delay = device.long_time_a, device.long_time_delay_s
    if setting is None or delay is None:
        return None
    power = 4.0 if device.long_time_law == "I4t" else 2.0
    return SlowStage(
        kind="long-time delay",
        from_a=CONVENTIONAL_TRIP * setting,
        setting_a=setting,
        law="power",
        figures=(delay * more_s * device.long_time_delay_at**power, power),
    )


def _relay_curve(device: Device, curve: str, more_a: float, more_s: float) -> SlowStage | None:
    """Return the stage of a relay; a definite time is a curve that is all constant."""
    setting = device.long_time_a
    constants = (0.0, device.long_time_delay_s, 1.0) if curve == DEFINITE else INVERSE_CURVES[curve]
    multiplier = 1.0 if curve == DEFINITE else device.time_multiplier
    if setting is None or multiplier is None or constants[1] is None:
        return None
    return SlowStage(
        kind="relay curve",
        from_a=setting * more_a,
        setting_a=setting,
        law="inverse",
        figures=(multiplier * more_s, constants[0], constants[1], constants[2]),
    )
