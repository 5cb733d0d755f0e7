"""The list of settings that a commissioning engineer signs."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

from study.model.protection import Device
from study.report.content import StudyOutcome
from study.report.tables import Column, Table, Value, make_table, text_column

SHEET: Final = "R Grading"


def settings_table(outcome: StudyOutcome) -> Table:
    """Return every device with its settings, in primary ampere and on the relay's own scale.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    Table
        In workbook order, with blanks to sign.
    """
    numbers: list[tuple[str, str, str, Callable[[Device], float | None]]] = [
        ("i_rated_a", "In", "A", lambda d: d.i_rated_a),
        ("ct_primary_a", "CT primary", "A", lambda d: d.ct_primary_a),
        ("ct_secondary_a", "CT secondary", "A", lambda d: d.ct_secondary_a),
        ("long_time_a", "Long-time current", "A", lambda d: d.long_time_a),
        ("long_time_s", "Long-time delay", "s", lambda d: d.long_time_delay_s),
        ("long_time_at", "Delay stated at", "x Ir", _stated_at),
        ("time_multiplier", "Time multiplier", "", lambda d: d.time_multiplier),
        ("short_time_a", "Short-time current", "A", lambda d: d.short_time_a),
        ("short_time_s", "Short-time delay", "s", lambda d: d.short_time_delay_s),
        ("instantaneous_a", "Instantaneous current", "A", lambda d: d.instantaneous_a),
        ("earth_fault_a", "Earth-fault current", "A", lambda d: d.earth_fault_a),
        ("earth_fault_s", "Earth-fault delay", "s", lambda d: d.earth_fault_delay_s),
    ]
    columns = [
        text_column("device", "Device"),
        text_column("equipment", "Protects"),
        text_column("kind", "Kind"),
        text_column("law", "Curve or law"),
        *[
            Column(key=key, heading=heading, unit=unit, exact=True, most_decimals=3)
            for key, heading, unit, _ in numbers
        ],
        text_column("switched_off", "Set to off"),
        text_column("remarks", "Direction, zone, signal"),
        text_column("as_left", "Set as left"),
        text_column("signed", "Date and signature"),
    ]
    return make_table(
        key="setting_list",
        title="Setting list",
        sheet=SHEET,
        columns=columns,
        rows=[
            (
                d.name,
                d.equipment,
                d.kind,
                _law(d),
                *(_value(get(d)) for _, _, _, get in numbers),
                _off(d),
                _remarks(d),
                "",
                "",
            )
            for d in outcome.plant.devices
        ],
        notes=(
            "As the workbook gives them; currents are primary. Settings are to be verified at trials before "
            "energising.",
        ),
    )


def _value(value: float | None) -> Value:
    return None if value is None else float(value)


def _stated_at(device: Device) -> float | None:
    return device.long_time_delay_at if device.long_time_delay_s is not None else None


def _law(d: Device) -> str:
    if d.kind == "fuse":
        return d.fuse_class or d.curve or "not given"
    if d.kind == "thermal overload":
        return f"class {d.trip_class}" if d.trip_class else "not given"
    if d.relay_curve:
        return d.relay_curve
    laws: list[str] = [d.long_time_law] if d.long_time_a is not None else []
    laws += [f"short time {d.short_time_law}"] if d.short_time_a is not None else []
    return ", ".join(laws) or (d.curve or "")


def _off(d: Device) -> str:
    return ", ".join(
        words
        for words, off in (("short time", d.short_time_off), ("instantaneous", d.instantaneous_off))
        if off
    )


def _remarks(d: Device) -> str:
    parts = (
        ("", d.direction),
        ("zone ", d.protected_zone),
        ("signal with ", d.interlocked_with),
        ("reset ", d.reset),
    )
    return ", ".join(f"{words}{value}" for words, value in parts if value)
