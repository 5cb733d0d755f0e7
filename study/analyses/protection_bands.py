"""From a row of the sheet Devices to a band: every blank is absent or unknown, never a guess."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Final

from study.formulas.curves_iec60255 import FLAT_ABOVE, RESET_S
from study.formulas.fuse_bands_iec60269 import Points, curve_edge, fuse_edges
from study.formulas.relays_iec60255 import DEFINITE, Reset, relay_edges
from study.formulas.releases_iec60947 import instantaneous_edges, long_time_edges, short_time_edges
from study.formulas.thermal_iec60947_4 import CONTACTOR_OPENS_S, overload_relay_edges
from study.formulas.trip_band import TripBand
from study.formulas.trip_law import Edge
from study.model.protection import CurvePoint, Device

Edges = tuple[Edge, Edge]

# A curve that begins at a shorter time than this has a part below its first point that is not given.
WHOLE_FROM_S: Final = 60.0
# Above the last point of a breaker's curve it may open at once, for all that is known.
AT_ONCE_S: Final = 1e-6
DECAYING_WORDS: Final = ("ieee", "inverse", "decay", "dependent", "rotating")


def phase_band(device: Device, curve: Sequence[CurvePoint]) -> TripBand:
    """Return the band of a device on phase currents, from its own settings or its maker's curve.

    Parameters
    ----------
    device : Device
        Row of the sheet.
    curve : sequence of CurvePoint
        Points of the curve that it names; empty for none.

    Returns
    -------
    TripBand
        In ampere of the side where the device stands.
    """
    if curve:
        return _curve_band(device, curve)
    match device.kind:
        case "fuse":
            return _fuse_band(device)
        case "thermal overload":
            return _overload_band(device)
        case _:
            return _release_band(device)


def earth_band(device: Device) -> TripBand | None:
    """Return the band of a device on earth-fault currents; None where it has no such stage.

    Parameters
    ----------
    device : Device
        Row of the sheet.

    Returns
    -------
    TripBand or None
        On the residual current.
    """
    if device.earth_fault_a is None:
        return None
    if device.earth_fault_delay_s is None:
        return _unknown("the earth-fault delay is not given")
    early, late = short_time_edges(
        device.earth_fault_a,
        device.earth_fault_delay_s,
        current_tolerance=device.current_tolerance,
        time_tolerance=device.time_tolerance,
        opens_s=device.opening_time_min_s,
        breaks_s=device.breaking_time_max_s,
        stage="earth fault",
    )
    return TripBand(earliest=(early,), latest=(late,))


def by_relay(relay: TripBand, relay_row: Device, breaker: Device) -> TripBand:
    """Return the band of a breaker that a relay opens: the times of the slower mechanism at the latest.

    Parameters
    ----------
    relay : TripBand
        Band of the relay by itself.
    relay_row, breaker : Device
        Rows of both.

    Returns
    -------
    TripBand
        Band of the breaker.
    """
    opens = min(relay_row.opening_time_min_s, breaker.opening_time_min_s)
    breaks = max(relay_row.breaking_time_max_s, breaker.breaking_time_max_s)
    return replace(
        relay,
        earliest=tuple(replace(edge, after_s=opens) for edge in relay.earliest),
        latest=tuple(replace(edge, after_s=breaks) for edge in relay.latest),
    )


def _unknown(*words: str) -> TripBand:
    return TripBand(earliest=(), latest=(), earliest_known=False, latest_known=False, unknown=words)


def _fuse_band(device: Device) -> TripBand:
    if device.fuse_class is None:
        return _unknown("neither a fuse class nor a maker's curve is given")
    try:
        early, late = fuse_edges(device.i_rated_a, device.fuse_class)
    except ValueError as error:
        return _unknown(f"{error}: give the maker's curve")
    return TripBand(earliest=(early,), latest=(late,))


def _overload_band(device: Device) -> TripBand:
    if device.long_time_a is None or device.trip_class is None:
        return _unknown("the current setting or the trip class is not given")
    # A starter breaks what its relay trips up to the take-over current of the breaker or fuse before it:
    # IEC 60947-4-1, annex B.4, from memory. The contactor's own rating is not on the sheet.
    early, late = overload_relay_edges(
        device.long_time_a, device.trip_class, breaks_up_to_a=FLAT_ABOVE * device.long_time_a
    )
    breaks = max(device.breaking_time_max_s, CONTACTOR_OPENS_S)
    return TripBand(
        earliest=(replace(early, after_s=device.opening_time_min_s),),
        latest=(replace(late, after_s=breaks),),
    )


def _curve_band(device: Device, curve: Sequence[CurvePoint]) -> TripBand:
    """Return the band of a maker's curve; its times are those of the whole device."""
    fuse = device.kind == "fuse"
    early, late = (_points(device, curve, early=x) for x in (True, False))
    stage = "fuse" if fuse else "maker's curve"
    unknown = [
        f"the maker's curve has no {word} times"
        for x, word in ((early, "shortest"), (late, "longest"))
        if not x
    ]
    earliest: tuple[Edge, ...] = ()
    if early:
        begins = early[0][0] if early[0][1] >= WHOLE_FROM_S else min(device.i_rated_a, early[0][0])
        whole = early if fuse else (*early, ((1.0 + 1e-9) * early[-1][0], AT_ONCE_S))
        edge = curve_edge(whole, stage, early=True, beyond=2.0 if fuse else 0.0)
        peak = device.instantaneous_senses == "peak" and not fuse
        earliest = (replace(edge, from_a=begins, sees="peak" if peak else "heating"),)
    latest: tuple[Edge, ...] = ()
    if late:
        latest = (curve_edge(late, stage, early=False, beyond=2.0 if fuse else 0.0),)
    return TripBand(
        earliest=earliest,
        latest=latest,
        earliest_known=bool(early),
        latest_known=bool(late),
        unknown=tuple(unknown),
    )


def _points(device: Device, curve: Sequence[CurvePoint], *, early: bool) -> Points:
    """Return one side of a maker's curve in ampere, ascending; empty where it has none."""
    points = [
        (
            p.current_a if p.current_a is not None else (p.current_in or 0.0) * device.i_rated_a,
            p.time_min_s if early else p.time_max_s,
        )
        for p in curve
    ]
    given = [(amps, seconds) for amps, seconds in points if seconds is not None]
    return tuple(sorted(given, key=lambda point: (point[0], -point[1])))


def _release_band(device: Device) -> TripBand:
    """Return the stages of a breaker's release or of an overcurrent relay."""
    unknown: list[str] = []
    found = [_long_time(device, unknown), _short_time(device, unknown), _instantaneous(device, unknown)]
    stages = [pair for pair in found if pair is not None]
    if not stages and not unknown:
        unknown.append("no setting and no curve is given")
    return TripBand(
        earliest=tuple(early for early, _ in stages),
        latest=tuple(late for _, late in stages),
        earliest_known=not unknown,
        latest_known=bool(stages),
        unknown=tuple(unknown),
    )


def _long_time(device: Device, unknown: list[str]) -> Edges | None:
    if device.long_time_a is None:
        return None
    if device.relay_curve is not None:
        return _relay_curve(device, device.long_time_a, device.relay_curve, unknown)
    if device.long_time_delay_s is None:
        unknown.append("the long-time delay is not given")
        return None
    delayed = device.short_time_a is not None and device.short_time_delay_s is not None
    short_s = (device.short_time_delay_s or 0.0) if delayed else 0.0
    return long_time_edges(
        device.long_time_a,
        device.long_time_delay_s,
        device.long_time_delay_at,
        law=device.long_time_law,
        time_tolerance=device.time_tolerance,
        opens_s=device.opening_time_min_s,
        breaks_s=device.breaking_time_max_s,
        least_s=(1.0 + device.time_tolerance) * short_s,
    )


def _relay_curve(device: Device, setting_a: float, curve: str, unknown: list[str]) -> Edges | None:
    opens, breaks = device.opening_time_min_s, device.breaking_time_max_s
    if curve == DEFINITE:
        if device.long_time_delay_s is None:
            unknown.append("the delay of the definite-time relay is not given")
            return None
        return short_time_edges(
            setting_a,
            device.long_time_delay_s,
            current_tolerance=device.current_tolerance,
            time_tolerance=device.time_tolerance,
            opens_s=opens,
            breaks_s=breaks,
            stage="definite time",
        )
    if device.time_multiplier is None:
        unknown.append("the time multiplier is not given")
        return None
    return relay_edges(
        curve,
        setting_a,
        device.time_multiplier,
        reset=reset_law(device),
        current_tolerance=device.current_tolerance,
        time_tolerance=device.time_tolerance,
        opens_s=opens,
        breaks_s=breaks,
    )


def reset_law(device: Device) -> Reset:
    """Return how a relay's delay resets: the words of the sheet name a law only for IEEE curves.

    Parameters
    ----------
    device : Device
        Row of the sheet.

    Returns
    -------
    str
        ``at once`` or ``decaying``.
    """
    words = (device.reset or "").lower()
    if device.relay_curve in RESET_S and any(word in words for word in DECAYING_WORDS):
        return "decaying"
    return "at once"


def _short_time(device: Device, unknown: list[str]) -> Edges | None:
    if device.short_time_a is None:
        return None
    if device.short_time_delay_s is None:
        unknown.append("the short-time delay is not given")
        return None
    ramp_a = device.long_time_a if device.long_time_a is not None else device.i_rated_a
    return short_time_edges(
        device.short_time_a,
        device.short_time_delay_s,
        ramp_ir_a=ramp_a if device.short_time_law == "I2t" else None,
        current_tolerance=device.current_tolerance,
        time_tolerance=device.time_tolerance,
        opens_s=device.opening_time_min_s,
        breaks_s=device.breaking_time_max_s,
    )


def _instantaneous(device: Device, unknown: list[str]) -> Edges | None:
    if device.instantaneous_a is None:
        settings = (device.long_time_a, device.short_time_a)
        if device.kind == "circuit breaker" and not device.instantaneous_off and settings != (None, None):
            unknown.append("the instantaneous current is not given: write it, or off where there is none")
        return None
    return instantaneous_edges(
        device.instantaneous_a,
        senses=device.instantaneous_senses,
        current_tolerance=device.current_tolerance,
        opens_s=device.opening_time_min_s,
        breaks_s=device.breaking_time_max_s,
    )
