"""Boards, sources, transformers and feeders of the demonstration construction vessel."""

from __future__ import annotations

from typing import Any

from tests.demos import catalogue, sizing
from tests.demos.equipment import SHORE_HEADINGS, feeder, genset, transformer, winding
from tests.demos.rows import Book

PORT: dict[str, object] = {"Redundancy group": "Port"}
STARBOARD: dict[str, object] = {"Redundancy group": "Starboard"}
SIDES: tuple[tuple[str, dict[str, object]], ...] = (("P", PORT), ("S", STARBOARD))

ACTIVE = "Typical active front end"
SMALL_PANELS = ("L-THR-F", "L-THR-A", "L-WORK", "L-SWB", "L-DECK-F", "L-DECK-A")


def add_plant(book: Book) -> None:
    """Add everything between the sources and the boards."""
    _boards(book)
    _sources(book)
    _synchronous_motor(book)
    _medium_voltage(book)
    _distribution(book)
    _low_distribution(book)


def _boards(book: Book) -> None:
    # name, V, role, busbar A, Ipk kA, Icw kA, s, earthing, group | Icu fitted kA, ambient
    for n, group in ((1, "Port"), (2, "Port"), (3, "Starboard"), (4, "Starboard")):
        book.boards(
            (f"MV-{n}", 6600, "main", 1600, 65, 25, 1, "high resistance", group, 25, 45),
        )
        book.sheets["Boards"][-1] |= {
            "Earthing resistor [ohm]": 760,
            "Resistor rating [A]": 6,
            "Resistor time [s]": 10,
        }
    for side, (group, n) in (("P", ("Port", 1)), ("S", ("Starboard", 2))):
        for half in ("1A", "1B", "2A", "2B"):
            book.boards((f"PB-{side}{half}", 690, "propulsion", 1600, 75, 35, 1, "insulated", group, 42, 45))
        for place in ("F", "A"):
            book.boards((f"TB-{place}{n}", 690, "propulsion", 1600, 75, 35, 1, "insulated", group, 42, 45))
        book.boards(
            (f"LV690-{side}", 690, "distribution", 3200, 105, 50, 1, "insulated", group, 50, 45),
            (f"CRANE-{side}", 690, "distribution", 1600, 63, 30, 1, "insulated", group, 42, 45),
            (f"SWB-{side}", 450, "main", 4000, 143, 65, 1, "insulated", group, 65, 45),
            (f"ER1-{side}", 450, "distribution", 1000, 105, 50, 1, "insulated", group, 50, 45),
            (f"ER2-{side}", 450, "distribution", 630, 75, 36, 1, "insulated", group, 42, 45),
            (f"PROP-{side}", 450, "distribution", 400, 63, 30, 1, "insulated", group, 42, 45),
            (f"PUMP-{side}", 450, "distribution", 800, 105, 50, 1, "insulated", group, 50, 45),
            (f"L-ER-{side}", 230, "distribution", 160, 20, 10, 1, "insulated", group, 15, 45),
        )
    book.boards(
        ("ESB", 450, "emergency", 2000, 75, 36, 1, "insulated", None, 42, 40),
        *[
            (f"HVAC-{n}", 450, "distribution", 630, 63, 30, 1, "insulated", None, 42, 40)
            for n in (1, 2, 3, 4)
        ],
        ("GALLEY", 450, "distribution", 630, 52, 25, 1, "insulated", None, 36, 40),
        ("REFRIG", 450, "distribution", 250, 52, 25, 1, "insulated", None, 36, 40),
        ("LAUNDRY", 450, "distribution", 400, 52, 25, 1, "insulated", None, 36, 40),
        ("DECK-F", 450, "distribution", 630, 52, 25, 1, "insulated", "Port", 36, 45),
        ("DECK-A", 450, "distribution", 1000, 75, 36, 1, "insulated", "Starboard", 42, 45),
        ("WORKSHOP", 450, "distribution", 400, 52, 25, 1, "insulated", "Port", 36, 45),
        ("THR-F", 450, "distribution", 400, 52, 25, 1, "insulated", None, 36, 45),
        ("THR-A", 450, "distribution", 400, 52, 25, 1, "insulated", None, 36, 45),
        ("LDB-1", 230, "distribution", 800, 30, 15, 1, "insulated", "Port", 25, 40),
        ("LDB-2", 230, "distribution", 800, 30, 15, 1, "insulated", "Starboard", 25, 40),
        ("ELDB", 230, "distribution", 400, 25, 12, 1, "insulated", None, 15, 40),
        *[(f"L-ACC{n}", 230, "distribution", 250, 20, 10, 1, "insulated", None, 15, 40) for n in range(1, 8)],
        *[(name, 230, "distribution", 160, 20, 10, 1, "insulated", None, 15, 45) for name in SMALL_PANELS],
        ("NAV", 230, "distribution", 250, 20, 10, 1, "insulated", None, 15, 40),
        ("RADIO", 230, "distribution", 100, 17, 8, 1, "insulated", None, 10, 40),
    )


def _sources(book: Book) -> None:
    places = ((1, "MV-1"), (2, "MV-2"), (3, "MV-2"), (4, "MV-3"), (5, "MV-4"), (6, "MV-4"))
    for n, board in places:
        large = n not in (2, 5)
        group = PORT if n <= 3 else STARBOARD
        also = group | {
            "Alternator efficiency [%]": 96.8 if large else 96.2,
            "Largest engine load step [%]": 33,
            "Start delay [s]": 25,
            "Cross-current group": "Port" if n <= 3 else "Starboard",
            "No-load voltage [%]": 101.5,
            "Voltage droop [%]": 3.0,
        }
        kva, engine_kw, kind = (5600, 4700, "MV 5600") if large else (3500, 2950, "MV 3500")
        genset(
            book,
            (f"DG{n}", board),
            (kva, engine_kw),
            (kind, "permanent magnet" if large else "compounded"),
            30 + 4 * n,
            also=also,
            short=(2.5, 0.85),
            inst_x=14,
        )
    alone: dict[str, object] = {"Governor mode": "isochronous", "No-load frequency [%]": 100.0}
    harbour = alone | {"Service": "harbour", "Starts at island load [%]": None, "No-load voltage [%]": 101.0}
    genset(book, ("HG", "SWB-S"), (1700, 1450), ("LV 800", "shunt"), 25, also=harbour, short=(2.0, 0.4))
    emergency = alone | {
        "Service": "emergency",
        "Starts at island load [%]": None,
        "Start delay [s]": 15,
        "Largest engine load step [%]": 60,
    }
    genset(book, ("EDG", "ESB"), (800, 700), ("LV 800", "permanent magnet"), 12, also=emergency)
    book.add("Shore supplies", SHORE_HEADINGS, ("Shore", "SWB-P", 460, 60, 1600, 35, 25, 0.4))
    book.cable("C-Shore", ("Shore", "SWB-P"), 1600, 40, board="SWB-P", cores="3 single")
    book.breaker(
        "Q-Shore", "C-Shore", "SWB-P", 1600, icw_ka=65, ir=1600, tr=10, tr_at=2, isd=6400, tsd=0.4, ii="off"
    )
    book.add(
        "Converter supplies",
        "Supply|Board|Rated apparent power [kVA]|Control|Set power [kW]|Set reactive power [kvar]"
        "|Voltage droop [%]|Speed droop [%]|Stored energy [kWh]|Short-circuit current [x In]"
        "|Short-circuit duration [s]|Spectrum",
        ("BATT-P", "LV690-P", 2200, "grid forming", None, None, 3.0, 4.0, 1500, 1.5, 3, ACTIVE),
        ("BATT-S", "LV690-S", 1500, "grid following", 0, 0, None, None, 1000, 1.3, 3, ACTIVE),
    )
    for name, board, kva, frame in (("BATT-P", "LV690-P", 2200, 2500), ("BATT-S", "LV690-S", 1500, 1600)):
        amps = sizing.line_current_a(kva, 690)
        book.cable(f"C-{name}", (name, board), 1.1 * amps, 28, board=board, cores="3 single")
        book.breaker(
            f"Q-{name}", f"C-{name}", board, frame, icw_ka=50, ir=round(1.1 * amps), tr=10, tr_at=2,
            isd=round(1.25 * amps), tsd=0.7, ii=round(2.5 * amps),
        )  # fmt: skip


def _synchronous_motor(book: Book) -> None:
    amps = sizing.line_current_a(1600, 6600)
    row = {
        "Motor": "Jetting pump motor",
        "Board": "MV-4",
        "Rated apparent power [kVA]": 1600,
        "Rated power factor": 0.9,
        "Rated voltage [V]": 6600,
        "Rated output [kW]": 1380,
        "Efficiency": 0.958,
    }
    row |= catalogue.machine("MV motor") | catalogue.field("permanent magnet", 60)
    book.sheets["Synchronous motors"].append(row)
    book.cable(
        "C-Jetting pump motor", ("MV-4", "Jetting pump motor"), 1.15 * amps, 70, board="MV-4", least_mm2=70
    )
    book.breaker(
        "Q-Jetting pump motor", "C-Jetting pump motor", "MV-4", 200, ir=round(1.1 * amps), tr=20, tr_at=6,
        isd=round(7 * amps), tsd=0.1, ii=round(11 * amps),
    )  # fmt: skip


def _medium_voltage(book: Book) -> None:
    book.add(
        "Ties",
        "Tie|Board A|Board B|Rated current [A]|Reactance [ohm]|Resistance [ohm]",
        *[
            (f"BT-{a}{b}", f"MV-{a}", f"MV-{b}", 1250, 0.0024, 0.0008)
            for a, b in ((1, 2), (2, 3), (3, 4), (4, 1))
        ],
        ("BT-690", "LV690-P", "LV690-S", 2000),
        ("BT-450", "SWB-P", "SWB-S", 2500),
        ("BT-LDB", "LDB-1", "LDB-2", 800),
    )
    slow: dict[str, Any] = {"tr": 12, "tr_at": 1.5, "ii": "off"}
    for label, a in (("12", 1), ("23", 2), ("34", 3), ("41", 4)):
        book.breaker(f"Q-BT-{label}", f"BT-{label}", f"MV-{a}", 1250, ir=600, isd=650, tsd=0.65, **slow)
    book.breaker("Q-BT-690", "BT-690", "LV690-P", 2000, icw_ka=50, ir=1900, isd=3500, tsd=0.3, **slow)
    book.breaker("Q-BT-450", "BT-450", "SWB-P", 2500, icw_ka=65, ir=2300, isd=5000, tsd=0.3, **slow)
    book.breaker("Q-BT-LDB", "BT-LDB", "LDB-1", 800, icw_ka=15, ir=700, isd=2100, tsd=0.1, **slow)
    for name, board, halves in (
        ("T-PP1", "MV-1", ("PB-P1A", "PB-P1B")),
        ("T-PP2", "MV-2", ("PB-P2A", "PB-P2B")),
        ("T-PS1", "MV-3", ("PB-S1A", "PB-S1B")),
        ("T-PS2", "MV-4", ("PB-S2A", "PB-S2B")),
    ):
        _propulsion_transformer(book, name, board, halves)
    for name, board, to in (
        ("T-TF1", "MV-1", "TB-F1"),
        ("T-TF2", "MV-3", "TB-F2"),
        ("T-TA1", "MV-2", "TB-A1"),
        ("T-TA2", "MV-4", "TB-A2"),
    ):
        _step_down(book, name, (board, to), 1600, (6.0, 15.5, 3.6))
    for name, board, to in (("T-690-P", "MV-2", "LV690-P"), ("T-690-S", "MV-4", "LV690-S")):
        _step_down(book, name, (board, to), 2500, (7.0, 21.0, 5.0))
    for name, board, to in (("T-450-P", "MV-1", "SWB-P"), ("T-450-S", "MV-3", "SWB-S")):
        _step_down(book, name, (board, to), 2500, (8.0, 21.0, 5.0), no_load_v=462)


def _step_down(
    book: Book,
    name: str,
    ends: tuple[str, str],
    kva: float,
    figures: tuple[float, float, float],
    *,
    no_load_v: float = 690,
) -> None:
    transformer(
        book,
        name,
        ends,
        kva,
        figures,
        lengths_m=(38, 14),
        volts=(6600, no_load_v),
        primary=(2.5, 0.5),
        secondary=(2.5, 0.4),
        also={"Vector group": "Dyn11", "X0/X1": 0.95, "R0/R1": 1.0},
    )


def _propulsion_transformer(book: Book, name: str, board: str, halves: tuple[str, str]) -> None:
    row = {
        "Transformer": name,
        "Primary board": board,
        "Secondary board": halves[0],
        "Tertiary board": halves[1],
        "Primary power [kVA]": 2900,
        "Secondary power [kVA]": 1450,
        "Tertiary power [kVA]": 1450,
        "Primary voltage [V]": 6600,
        "Secondary voltage [V]": 690,
        "Tertiary voltage [V]": 690,
        "Short-circuit voltage primary-secondary [%]": 6.0,
        "Short-circuit voltage primary-tertiary [%]": 6.0,
        "Short-circuit voltage secondary-tertiary [%]": 11.0,
        "Copper loss primary-secondary [kW]": 13.0,
        "Copper loss primary-tertiary [kW]": 13.0,
        "Copper loss secondary-tertiary [kW]": 17.0,
        "Iron loss [kW]": 5.8,
        "Vector group": "Dd0y11",
        "Tap [%]": 0,
    }
    book.sheets["Three-winding transformers"].append(row)
    winding(book, f"{name}-1", (board, name), 2900 / 6600, 42, short=(2.5, 0.5), feeds=True)
    for place, half in zip(("2", "3"), halves, strict=True):
        winding(book, f"{name}-{place}", (half, name), 1450 / 690, 12, short=(2.5, 0.4), feeds=False)


def _distribution(book: Book) -> None:
    book.add(
        "Reactors",
        "Reactor|From|To|Rated current [A]|Reactance [ohm]|Resistance [ohm]"
        "|Short-time current [kA]|Short-time duration [s]",
        *[
            (f"X-CRANE-{side}", f"LV690-{side}", f"CRANE-{side}", 1250, 0.012, 0.0003, 25, 1)
            for side, _ in SIDES
        ],
    )
    for side, _ in SIDES:
        book.breaker(
            f"Q-X-CRANE-{side}", f"X-CRANE-{side}", f"LV690-{side}", 1250, icw_ka=50, ir=1200, tr=10, tr_at=2,
            isd=3000, tsd=0.2, ii="off",
        )  # fmt: skip
    book.add(
        "Filters",
        "Filter|Board|Kind|Rated reactive power [kvar]|Rated voltage [V]|Tuning order|Quality",
        ("FLT-P", "LV690-P", "tuned", 300, 690, 4.8, 40),
        ("FLT-S", "LV690-S", "tuned", 300, 690, 4.8, 40),
        ("FLT-MV", "MV-2", "high-pass", 500, 6600, 10.7, 3),
    )
    for side, _ in SIDES:
        feeder(book, (f"SWB-{side}", f"ER1-{side}"), 720, 30, short=(5, 0.2))
        feeder(book, (f"SWB-{side}", f"ER2-{side}"), 320, 34, short=(6, 0.2), least_mm2=150)
        feeder(book, (f"SWB-{side}", f"PROP-{side}"), 160, 40, short=(6, 0.2), least_mm2=150)
        feeder(book, (f"SWB-{side}", f"PUMP-{side}"), 520, 44, short=(5, 0.2))
    feeder(book, ("SWB-P", "ESB"), 900, 62, short=(5, 0.2), switch_at_end=True)
    # second feeds of the thruster rooms, normally open
    feeder(book, ("SWB-S", "THR-F"), 200, 74, name="THR-F-2", short=(6, 0.2), least_mm2=150)
    feeder(book, ("SWB-P", "THR-A"), 200, 68, name="THR-A-2", short=(6, 0.2), least_mm2=150)
    for n in (1, 2, 3, 4):
        feeder(book, ("SWB-P" if n in (1, 3) else "SWB-S", f"HVAC-{n}"), 420, 50 + 6 * n, short=(6, 0.2))
    for board, to, amps, length_m in (
        ("SWB-P", "GALLEY", 330, 66),
        ("SWB-S", "REFRIG", 125, 60),
        ("SWB-S", "LAUNDRY", 250, 64),
        ("SWB-P", "DECK-F", 450, 70),
        ("SWB-S", "DECK-A", 700, 76),
        ("SWB-P", "WORKSHOP", 250, 52),
        ("SWB-P", "THR-F", 200, 72),
        ("SWB-S", "THR-A", 200, 64),
    ):
        feeder(book, (board, to), amps, length_m, short=(6, 0.2), least_mm2=150)


def _low_distribution(book: Book) -> None:
    for name, ends in (("T-230-P", ("SWB-P", "LDB-1")), ("T-230-S", ("SWB-S", "LDB-2"))):
        transformer(
            book,
            name,
            ends,
            315,
            (4.5, 4.0, 0.9),
            lengths_m=(18, 10),
            volts=(450, 236),
            primary=(8, 0.2),
            secondary=(4.5, 0.12),
        )
    for name in ("T-EM1", "T-EM2"):
        transformer(
            book,
            name,
            ("ESB", "ELDB"),
            120,
            (4.0, 1.75, 0.42),
            lengths_m=(10, 8),
            volts=(450, 236),
            primary=(8, 0.12),
            secondary=(4.5, 0.12),
        )
    panels = [(f"L-ACC{n}", "LDB-1" if n % 2 else "LDB-2", 150, 30 + 4 * n) for n in range(1, 8)]
    panels += [("L-ER-P", "LDB-1", 80, 34), ("L-ER-S", "LDB-2", 80, 36)]
    panels += [("L-THR-F", "LDB-1", 80, 70), ("L-DECK-F", "LDB-1", 120, 66), ("L-WORK", "LDB-1", 80, 50)]
    panels += [("L-THR-A", "LDB-2", 80, 66), ("L-DECK-A", "LDB-2", 120, 70), ("L-SWB", "LDB-2", 80, 24)]
    panels += [("NAV", "ELDB", 125, 40), ("RADIO", "ELDB", 63, 42)]
    for to, board, amps, length_m in panels:
        feeder(book, (board, to), amps, length_m, short=(5, 0.06), max_drop_percent=2.0, least_mm2=50)
