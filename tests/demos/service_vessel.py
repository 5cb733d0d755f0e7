"""A 72 m offshore service vessel, 450 V 60 Hz: three main sets on a split switchboard, an emergency set.

Station keeping runs with the bus-tie open: two islands, each with its own thruster.

Loss of DG1 then blacks out the port island: that is the redundancy concept, and is reported as it is.

Five faults are planted, and should be found; everything else is meant to be sound:

1. Cargo: the load in this mode is beyond the two sets on line (about 110 %), and stays beyond what is left
   with the largest set lost when the standby set has come in, unless cargo pumps are tripped.
2. Manoeuvring: the no-load voltage of DG2 is trimmed to 104.2 % (Set-points) against 102 % at DG1, so the
   kvar sharing is far outside its tolerance.
3. C-ACC-2: the feeder of the second accommodation panel is far too thin: its breaker is set above what the
   cable carries, and the load alone is beyond the rating.
4. Q-CARGO: its short-time setting of five times the feeder's 800 A is above what one set holds up, so that
   the set's breaker opens first; with two sets in parallel it is graded.
5. Windlass tried in harbour (Events): started direct on the one set of the mode it takes the voltage far
   down; with one set more it does not.
"""

from __future__ import annotations

from typing import Any

from tests.demos.consumers import read_loads
from tests.demos.equipment import SHORE_HEADINGS, feeder, genset, protect_sets, transformer
from tests.demos.rows import Book, Tables
from tests.demos.service_loads import (
    ACCOMMODATION,
    CARGO,
    EMERGENCY,
    ENGINE_ROOM,
    THRUSTERS_AND_DECK,
)

MODES = ("At sea", "Manoeuvring", "Station keeping", "Cargo", "Harbour", "Shore", "Emergency")
PORT_GROUP: dict[str, object] = {"Redundancy group": "Port"}
STBD_GROUP: dict[str, object] = {"Redundancy group": "Starboard"}


def tables() -> Tables:
    """Return every sheet of the service vessel's workbook."""
    book = Book(hz=60, modes=MODES, consumer_volts={450: 440})
    _project(book)
    _sources(book)
    _distribution(book)
    for consumers in (THRUSTERS_AND_DECK, CARGO, ENGINE_ROOM, ACCOMMODATION, EMERGENCY):
        read_loads(book, consumers)
    _makers_data(book)
    _operation(book)
    _events(book)
    _protection(book)
    return book.finish()


def _project(book: Book) -> None:
    book.add(
        "Project",
        "Item|Value|Note",
        ("Vessel", "Demonstration service vessel", "Invented; no real vessel"),
        ("Hull number", "D-202"),
        ("Document number", "D-202-E-010"),
        ("Revision", "B"),
        ("Date", "2025-04-02"),
        ("Prepared by", "Electrical department"),
        ("Checked by", "Design office"),
        ("Approved by", "Technical manager"),
        ("Rated frequency", 60, "Hz"),
        ("Classification rules and edition", "IACS unified requirements, as amended 2023"),
        ("Ambient temperature", 45, "°C, outside air 35 °C"),
        ("Engine-room temperature", 45, "°C"),
    )
    book.add(
        "Acceptance",
        "Quantity|Limit|Unit|Basis",
        ("Close margin", 5, "%", "Design office practice"),
        ("Voltage reference", "rated voltage of consumer", None, "Consumers are rated 440 V"),
        ("Intermittent diversity", 2.5, "-", "Owner's specification"),
        ("One-set margin", 10, "%", "Running sets stay below 90 %"),
        ("Emergency duration", 18, "h", "SOLAS II-1/43, cargo ship"),
    )


def _sources(book: Book) -> None:
    book.boards(
        # name, V, role, busbar A, Ipk kA, Icw kA, s, earthing, group | Icu fitted kA, ambient
        ("MSB-P", 450, "main", 2500, 105, 50, 1, "insulated", "Port", 50, 45),
        ("MSB-S", 450, "main", 2500, 105, 50, 1, "insulated", "Starboard", 50, 45),
        ("ESB", 450, "emergency", 630, 63, 30, 1, "insulated", None, 36, 40),
        ("ER-P", 450, "distribution", 400, 52, 25, 1, "insulated", "Port", 36, 45),
        ("ER-S", 450, "distribution", 400, 52, 25, 1, "insulated", "Starboard", 36, 45),
        ("DECK", 450, "distribution", 400, 52, 25, 1, "insulated", "Starboard", 36, 45),
        ("CARGO", 450, "distribution", 1000, 63, 30, 1, "insulated", "Port", 36, 45),
        ("HVAC", 450, "distribution", 630, 52, 25, 1, "insulated", "Starboard", 36, 40),
        ("GALLEY", 450, "distribution", 250, 40, 20, 1, "insulated", "Port", 25, 40),
        ("LDB-P", 230, "distribution", 400, 20, 10, 1, "insulated", "Port", 15, 40),
        ("LDB-S", 230, "distribution", 400, 20, 10, 1, "insulated", "Starboard", 15, 40),
        ("ELDB", 230, "distribution", 250, 17, 8, 1, "insulated", None, 10, 40),
        ("ACC-1", 230, "distribution", 160, 17, 8, 1, "insulated", "Port", 10, 40),
        ("ACC-2", 230, "distribution", 160, 17, 8, 1, "insulated", "Starboard", 10, 40),
        ("ER-LT", 230, "distribution", 100, 17, 8, 1, "insulated", None, 10, 45),
        ("NAV", 230, "distribution", 100, 17, 8, 1, "insulated", None, 10, 40),
    )
    large = {"Alternator efficiency [%]": 95.0, "Largest engine load step [%]": 45}
    genset(
        book,
        ("DG1", "MSB-P"),
        (800, 690),
        ("LV 800", "auxiliary winding"),
        22,
        also=large | PORT_GROUP,
        inst_x=17,
    )
    genset(
        book,
        ("DG2", "MSB-S"),
        (800, 690),
        ("LV 800", "auxiliary winding"),
        26,
        also=large | STBD_GROUP,
        inst_x=17,
    )
    small = {"Alternator efficiency [%]": 94.5, "Largest engine load step [%]": 50}
    genset(
        book, ("DG3", "MSB-S"), (500, 430), ("LV 500", "compounded"), 20, also=small | STBD_GROUP, inst_x=18
    )
    emergency = {
        "Service": "emergency",
        "Alternator efficiency [%]": 93.5,
        "Largest engine load step [%]": 70,
        "Start delay [s]": 15,
        "Starts at island load [%]": None,
    }
    genset(book, ("EDG", "ESB"), (250, 220), ("LV 150", "permanent magnet"), 8, also=emergency)
    book.add("Shore supplies", SHORE_HEADINGS, ("Shore", "MSB-S", 455, 60, 600, 20, 14, 0.5))
    book.cable("C-Shore", ("Shore", "MSB-S"), 630, 35, board="MSB-S", cores="3 single")
    book.breaker(
        "Q-Shore", "C-Shore", "MSB-S", 630, icw_ka=40, ir=600, tr=10, tr_at=2, isd=2400, tsd=0.4, ii="off"
    )
    book.add(
        "Ties",
        "Tie|Board A|Board B|Rated current [A]|Reactance [ohm]|Resistance [ohm]",
        ("BT-MSB", "MSB-P", "MSB-S", 2000),
        ("BT-LDB", "LDB-P", "LDB-S", 400),
    )
    tie: dict[str, Any] = {"tr": 12, "tr_at": 1.5, "tsd": 0.3, "ii": "off"}
    book.breaker("Q-BT-MSB", "BT-MSB", "MSB-P", 2000, icw_ka=50, ir=1000, isd=1500, **tie)
    book.breaker("Q-BT-LDB", "BT-LDB", "LDB-P", 400, icw_ka=8, ir=300, isd=1200, **tie)


def _distribution(book: Book) -> None:
    feeder(book, ("MSB-S", "ESB"), 320, 48, short=(5, 0.2), switch_at_end=True)
    feeder(book, ("MSB-P", "ER-P"), 225, 24)
    feeder(book, ("MSB-S", "ER-S"), 225, 28)
    feeder(book, ("MSB-S", "DECK"), 260, 46)
    feeder(book, ("MSB-P", "CARGO"), 800, 32, short=(5, 0.2))
    feeder(book, ("MSB-S", "HVAC"), 330, 38)
    feeder(book, ("MSB-P", "GALLEY"), 130, 42, least_mm2=70)
    for name, board, to in (("T-LV1", "MSB-P", "LDB-P"), ("T-LV2", "MSB-S", "LDB-S")):
        transformer(
            book,
            name,
            (board, to),
            120,
            (4.0, 1.75, 0.42),
            lengths_m=(16, 10),
            primary=(8, 0.2),
            secondary=(4.5, 0.12),
            also={"Vector group": "Dd0"},
        )
    for name in ("T-EM1", "T-EM2"):
        transformer(
            book,
            name,
            ("ESB", "ELDB"),
            50,
            (3.8, 0.95, 0.24),
            lengths_m=(8, 6),
            primary=(8, 0.12),
            secondary=(4.5, 0.12),
        )
    feeder(book, ("LDB-P", "ACC-1"), 110, 34, short=(5, 0.05))
    # planted: 10 mm2 where the setting of 110 A asks for 35 mm2
    book.cable(
        "C-ACC-2", ("LDB-S", "ACC-2"), 110, 30, board="LDB-S", max_drop_percent=1.5, section_mm2=10, bunched=8
    )
    book.breaker(
        "Q-ACC-2", "C-ACC-2", "LDB-S", 160, icw_ka=8, ir=110, tr=10, tr_at=2, isd=550, tsd=0.05, ii="off"
    )
    feeder(book, ("LDB-P", "ER-LT"), 70, 30, short=(5, 0.05))
    feeder(book, ("ELDB", "NAV"), 63, 26, short=(5, 0.05))


def _makers_data(book: Book) -> None:
    """Replace what a data sheet settles: short-time cables, measured cable data, breaker tests."""
    short: dict[str, object] = {"Duty": "30 min", "Overall diameter [mm]": 32}
    book.amend("Cables", short, "C-Anchor windlass")
    intermittent: dict[str, object] = {"Duty": "intermittent", "Overall diameter [mm]": 34}
    book.amend("Cables", intermittent, "C-Deck crane pump 1", "C-Deck crane pump 2")
    book.amend("Cables", {"Further derating": 0.95}, "C-ER-P", "C-ER-S")
    measured: dict[str, object] = {"Resistance [ohm/km]": 0.0601, "Reactance [ohm/km]": 0.098}
    book.amend("Cables", measured, "C-DG1", "C-DG2")
    book.amend("Cables", {"Current rating [A]": 340}, "C-Shore")
    book.amend("Devices", {"Test power factor": 0.25}, "Q-DG1", "Q-DG2", "Q-DG3", "Q-BT-MSB")
    book.amend("Devices", {"Long-time law": "I4t"}, "Q-Shore")
    book.amend("Devices", {"Short-time law": "I2t"}, "Q-GALLEY")


def _operation(book: Book) -> None:
    book.add(
        "Modes",
        "Mode|Description|Kind|Sets that may run together in change-over",
        ("At sea", "Transit, one large set, the other stands by", "sea", "DG1, DG2"),
        ("Manoeuvring", "Approach with both thrusters, bus-tie closed", "manoeuvring"),
        ("Station keeping", "Positioning beside a structure, bus-tie open, two islands", "station keeping"),
        ("Cargo", "Discharge of mud, fuel and bulk", "cargo"),
        ("Harbour", "Alongside on the small set", "harbour", "DG3, DG1"),
        ("Shore", "Laid up on the shore connection", "shore"),
        ("Emergency", "Main switchboard dead, emergency set on its board", "emergency"),
    )
    book.running(
        {
            "DG1": "on on on on standby off off",
            "DG2": "standby on on standby off off off",
            "DG3": "off standby on on on off off",
            "EDG": "standby standby standby standby standby standby on",
            "Shore": "off off off off off on off",
            "BT-MSB": "on on off on on on off",
            "BT-LDB": "off off off off off off off",
            "C-ESB": "on on on on on on off",
            "T-LV1": "on on on on on on off",
            "T-LV2": "on on on on on on off",
            "T-EM1": "on on on on on on on",
            "T-EM2": "standby standby standby standby standby standby standby",
        }
    )
    book.add(
        "Set-points",
        "Equipment|Mode|No-load voltage [%]|No-load frequency [%]|Set power [kW]|Regulator mode|Tap [%]",
        # planted: 2.2 % above its neighbour
        ("DG2", "Manoeuvring", 104.2, 102.0),
        ("DG3", "Harbour", 101.5, 102.0),
        ("T-LV1", "Shore", None, None, None, None, -2.5),
    )
    book.add(
        "Simultaneity",
        "Service|Mode|Duty|Simultaneity factor [%]",
        ("Deck", "Cargo", "intermittent", 50),
        ("Deck", "Manoeuvring", "intermittent", 60),
        ("Lighting", "Harbour", "continuous", 90),
        ("Galley", "At sea", "continuous", 80),
        ("Safety", "Emergency", "intermittent", 100),
    )
    book.add(
        "Interlocks",
        "Interlock|Equipment A|Equipment B|Kind",
        ("Shore against DG1", "Shore", "DG1", "never both closed"),
        ("Shore against DG2", "Shore", "DG2", "never both closed"),
        ("Shore against DG3", "Shore", "DG3", "never both closed"),
        ("Interconnector against EDG", "C-ESB", "EDG", "never both closed"),
        ("Emergency transformers", "T-EM1", "T-EM2", "both only in change-over"),
        ("230 V tie against T-LV1", "BT-LDB", "T-LV1", "both only in change-over"),
    )
    book.add(
        "Transfers",
        "Board or load|Normal supply|Other supply|Automatic|Transfer at [% U]|Delay [s]",
        ("ESB", "MSB-S", "EDG", "yes", 70, 15),
        ("ELDB", "T-EM1", "T-EM2", "no"),
        ("Steering gear 1", "MSB-P", "ESB", "yes", 70, 5),
    )


def _events(book: Book) -> None:
    book.add(
        "Events",
        "Case|Mode|Kind|Equipment|Size|Unit|At [s]|Duration [s]",
        ("Fire pump start at sea", "At sea", "motor start", "Fire pump 1", 1, "units", 0.5),
        ("Bulk compressor start", "Cargo", "motor start", "Bulk air compressor 1", 1, "units", 0.5),
        ("Emergency fire pump start", "Emergency", "motor start", "Emergency fire pump", 1, "units", 0.5),
        ("Crane start in harbour", "Harbour", "motor start", "Deck crane pump 1", 1, "units", 0.5),
        ("Windlass tried in harbour", "Harbour", "motor start", "Anchor windlass", 1, "units", 0.5),
        ("Mud pumps one after the other", "Cargo", "motor start", "Mud pump 1", 1, "units", 0.5),
        ("Mud pumps one after the other", "Cargo", "motor start", "Mud pump 2", 1, "units", 8),
        ("Load step on one set", "At sea", "load step", "MSB-P", 120, "kW", 0.5),
        ("DG2 trips while manoeuvring", "Manoeuvring", "set trip", "DG2", None, None, 0.5),
        ("DG2 trips while manoeuvring", "Manoeuvring", "load step", "Bow thruster", -130, "kW", 0.8),
        ("DG1 throws off its load", "At sea", "load rejection", "DG1", 100, "%", 0.5),
        ("DG1 voltage raised", "At sea", "set-point step", "DG1", 104, "% no-load voltage", 0.5),
        ("DG3 droop changed", "Cargo", "droop changed", "DG3", 6, "% voltage droop", 0.5),
        ("Field of DG2 lost", "Manoeuvring", "field loss", "DG2", None, None, 0.5),
        ("Fault on crane panel", "Cargo", "fault", "DECK", None, None, 0.5, 0.05),
        ("DG2 droop 8 %", "Manoeuvring", "maladjustment", "DG2", 8, "% voltage droop", 0),
        ("DG2 voltage 103.5 %", "Manoeuvring", "maladjustment", "DG2", 103.5, "% no-load voltage", 0),
        ("DG2 frequency 103 %", "Manoeuvring", "maladjustment", "DG2", 103, "% no-load frequency", 0),
        ("DG3 speed droop 5 %", "Cargo", "maladjustment", "DG3", 5, "% speed droop", 0),
        ("DG3 droop 2 %", "Cargo", "maladjustment", "DG3", 2, "% voltage droop", 0),
    )


def _protection(book: Book) -> None:
    protect_sets(book, ("DG1", "DG2", "DG3"))
    protect_sets(book, ("EDG",), preferential=False)
    book.add(
        "Protection functions",
        "Function|Equipment|Kind|Pick-up|Unit|Delay [s]|Trips",
        ("DG1 loss of excitation", "DG1", "loss of excitation", 40, "%", 3, "Q-DG1"),
        ("DG2 loss of excitation", "DG2", "loss of excitation", 40, "%", 3, "Q-DG2"),
        ("ESB undervoltage", "ESB", "undervoltage", 70, "%", 3, "Q-ESB-E"),
    )
    book.add(
        "Setting ranges",
        "Device|Setting|Min|Max|Step",
        *[(f"Q-{name}", "Long-time current", 500, 1250, 1) for name in ("DG1", "DG2")],
        *[(f"Q-{name}", "Short-time current", 1000, 10000, 50) for name in ("DG1", "DG2", "DG3", "BT-MSB")],
        *[(f"Q-{name}", "Short-time delay", 0.1, 0.5, 0.1) for name in ("DG1", "DG2", "DG3", "BT-MSB")],
        ("Q-CARGO", "Short-time current", 1600, 8000, 100),
        ("Q-CARGO", "Short-time delay", 0.1, 0.4, 0.1),
        ("Q-ESB", "Short-time delay", 0.1, 0.4, 0.1),
    )
    book.add(
        "Maker discrimination",
        "Upstream device|Downstream device|Discrimination up to [kA]|Reference",
        ("Q-ER-P", "Q-Main sea-water pump 1", 36, "Invented data sheet, table 3"),
        ("Q-ER-S", "Q-Main sea-water pump 2", 36, "Invented data sheet, table 3"),
        ("Q-CARGO", "Q-Mud pump 1", 36, "Invented data sheet, table 4"),
        ("Q-ACC-1", "Q-Cabin lighting 1", 6, "Invented data sheet, table 1"),
    )
