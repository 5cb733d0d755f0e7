"""Builders of what comes with its own cable and breakers: sets, transformers, feeders of sub-boards."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Final

from tests.demos import catalogue, sizing
from tests.demos.catalogue import Row
from tests.demos.rows import Book

SHORE_HEADINGS: Final = (
    "Supply|Board|Rated voltage [V]|Frequency [Hz]|Rated current [A]"
    "|Fault level max [MVA]|Fault level min [MVA]|R/X"
)
SET_DEFAULTS: Final[Row] = {
    "Rated power factor": 0.8,
    "Alternator efficiency [%]": 94.0,
    "Service": "main",
    "Minimum engine load [%]": 30,
    "Largest engine load step [%]": 50,
    "Start delay [s]": 20,
    "Starts at island load [%]": 85,
    "No-load voltage [%]": 102.0,
    "Voltage droop [%]": 4.0,
    "Droop base": "rated load at rated pf",
    "Droop law": "phasor",
    "Regulator mode": "droop",
    "Droop circuit polarity": "normal",
    "No-load frequency [%]": 102.0,
    "Speed droop [%]": 4.0,
    "Governor mode": "droop",
    "Governor time constant [s]": 0.25,
    "Governor dead time [s]": 0.03,
}


def genset(
    book: Book,
    place: tuple[str, str],
    power: tuple[float, float],
    kind: tuple[str, str],
    length_m: float,
    *,
    also: Mapping[str, object] | None = None,
    short: tuple[float, float] = (2.5, 0.4),
    inst_x: float | None = None,
) -> None:
    """Add a set with its cable and its breaker at the board.

    `place` is name and board, `power` alternator kVA and engine kW, `kind` machine type and field supply;
    `short` the short-time setting [x rated current] and its delay [s], `inst_x` the instantaneous one.
    """
    name, board = place
    row: Row = {"Genset": name, "Board": board, "Rated apparent power [kVA]": power[0]}
    row |= {"Rated voltage [V]": book.volts[board], "Engine power [kW]": power[1]} | SET_DEFAULTS
    row |= catalogue.machine(kind[0]) | catalogue.field(kind[1], book.hz) | dict(also or {})
    book.sheets["Gensets"].append({heading: v for heading, v in row.items() if v is not None})
    amps = sizing.line_current_a(power[0], book.volts[board])
    book.cable(
        f"C-{name}",
        (name, board),
        1.15 * amps,
        length_m,
        board=board,
        cores="3 single" if amps > 300 else "3",
        max_drop_percent=1.0,
        least_mm2=book.least_mm2(board),
    )
    book.breaker(
        f"Q-{name}",
        f"C-{name}",
        board,
        sizing.next_size(1.1 * amps, sizing.SUPPLY_BREAKERS_A),
        icw_ka=book.breaking_ka[board] if amps > 500 else 0.8 * book.breaking_ka[board],
        ir=round(1.1 * amps),
        tr=15,
        tr_at=1.5,
        isd=round(short[0] * amps),
        tsd=short[1],
        ii="off" if inst_x is None else round(inst_x * amps, -1),
    )


def transformer(
    book: Book,
    name: str,
    ends: tuple[str, str],
    kva: float,
    figures: tuple[float, float, float],
    *,
    lengths_m: tuple[float, float],
    volts: tuple[float, float] | None = None,
    primary: tuple[float, float] = (8.0, 0.25),
    secondary: tuple[float, float] = (5.0, 0.15),
    also: Mapping[str, object] | None = None,
) -> None:
    """Add a transformer with both cables and both breakers.

    `figures` are short-circuit voltage [%], copper and iron loss [kW]; `primary` and `secondary` the
    short-time setting [x rated current] and its delay [s]. The instantaneous setting of the primary stays
    above what a fault on the secondary side draws: 1.3 times rated current over short-circuit voltage.
    """
    u = volts or (book.volts[ends[0]], book.volts[ends[1]])
    row: Row = {
        "Transformer": name,
        "From": ends[0],
        "To": ends[1],
        "Rated power [kVA]": kva,
        "Primary voltage [V]": u[0],
        "Secondary voltage [V]": u[1],
        "Short-circuit voltage [%]": figures[0],
        "Copper loss [kW]": figures[1],
        "Iron loss [kW]": figures[2],
        "Vector group": "Dyn11" if u[0] > 1000 else "Dd0",
        "Units in parallel": 1,
        "Tap [%]": 0,
        "Inrush current [x In]": 9,
        "Inrush decay [s]": 0.1,
    }
    book.sheets["Transformers"].append(row | dict(also or {}))
    for side, (board, short) in enumerate(zip(ends, (primary, secondary), strict=True)):
        winding(
            book,
            f"{name}-{side + 1}",
            (board, name),
            kva / u[side],
            lengths_m[side],
            short=short,
            feeds=side == 0,
            inst_x=130.0 / figures[0],
        )


def winding(
    book: Book,
    label: str,
    ends: tuple[str, str],
    ka_root3: float,
    length_m: float,
    *,
    short: tuple[float, float],
    feeds: bool,
    inst_x: float = 15.0,
) -> None:
    """Add cable and breaker of one winding of a transformer, between the board and the transformer."""
    board, name = ends
    amps = 1000 * ka_root3 / 3**0.5
    setting = round(1.1 * amps)
    book.cable(
        f"C-{label}",
        (board, name) if feeds else (name, board),
        setting,
        length_m,
        board=board,
        cores="3 single" if amps > 300 else "3",
        max_drop_percent=1.0,
        least_mm2=book.least_mm2(board),
    )
    book.breaker(
        f"Q-{label}",
        f"C-{label}",
        board,
        sizing.next_size(setting, sizing.SUPPLY_BREAKERS_A),
        icw_ka=0.8 * book.breaking_ka[board],
        ir=setting,
        tr=10,
        tr_at=2,
        isd=round(short[0] * amps),
        tsd=short[1],
        ii=round(inst_x * amps) if feeds else "off",
    )


def feeder(
    book: Book,
    ends: tuple[str, str],
    amps: float,
    length_m: float,
    *,
    name: str | None = None,
    short: tuple[float, float] = (6.0, 0.1),
    switch_at_end: bool = False,
    max_drop_percent: float = 1.5,
    least_mm2: float = 10,
) -> None:
    """Add the run from one board to another, with its breaker and, where asked, one at the far end."""
    label = name or ends[1]
    setting = round(amps)
    book.cable(
        f"C-{label}",
        ends,
        setting,
        length_m,
        board=ends[0],
        cores="3 single" if amps > 300 else "3",
        max_drop_percent=max_drop_percent,
        least_mm2=least_mm2,
    )
    places = ((f"Q-{label}", ends[0]), (f"Q-{label}-E", ends[1]))
    for device, board in places if switch_at_end else places[:1]:
        book.breaker(
            device,
            f"C-{label}",
            board,
            sizing.next_size(setting, sizing.SUPPLY_BREAKERS_A),
            icw_ka=0.8 * book.breaking_ka[board],
            ir=setting,
            tr=10,
            tr_at=2,
            isd=round(short[0] * setting),
            tsd=short[1],
            ii="off",
        )


def protect_sets(book: Book, names: Sequence[str], *, preferential: bool = True) -> None:
    """Add the functions that every set's breaker carries besides its overcurrent release."""
    for name in names:
        lines: list[tuple[object, ...]] = [
            (f"{name} reverse power", name, "reverse power", 10, "%", 10, f"Q-{name}"),
            (f"{name} undervoltage", name, "undervoltage", 70, "%", 1.5, f"Q-{name}"),
            (f"{name} overvoltage", name, "overvoltage", 120, "%", 5, f"Q-{name}"),
            (f"{name} underfrequency", name, "underfrequency", 90, "%", 5, f"Q-{name}"),
            (f"{name} overfrequency", name, "overfrequency", 110, "%", 5, f"Q-{name}"),
        ]
        if preferential:
            lines += [
                (f"{name} preferential trip 1", name, "preferential trip 1", 105, "%", 5, "Trip stage 1"),
                (f"{name} preferential trip 2", name, "preferential trip 2", 105, "%", 10, "Trip stage 2"),
            ]
        book.add("Protection functions", "Function|Equipment|Kind|Pick-up|Unit|Delay [s]|Trips", *lines)
