"""A 24 m workboat, 400 V 50 Hz: two equal main sets, a harbour set, one 230 V board. A sound design.

At sea one main set carries the ship and the other stands by; manoeuvring runs both; in harbour the small set
takes over from a main set by a short parallel change-over.
"""

from __future__ import annotations

from tests.demos.consumers import read_loads
from tests.demos.equipment import SHORE_HEADINGS, feeder, genset, protect_sets, transformer
from tests.demos.rows import Book, Tables

MODES = ("At sea", "Manoeuvring", "Harbour")

# name | kW | demand at sea, manoeuvring, in harbour | cable m | words
LOADS = """
[MSB | Thrusters | motor]
Bow thruster | 30 | - 1/70i - | 20 | soft-starter soft_in=3.0 ramp_s=8 rpm=1475 ist=6.8 start_pf=0.3 tl=1.6 tk=2.4 inertia=0.55 eff=0.93 pf=0.86 start_s=8 stage=1
[DB-ER | Engine auxiliaries | motor]
Sea-water cooling pump | 2x7.5 | 1/85 1/85 - | 8 | propulsion rpm=1455 ist=6.5
Fresh-water cooling pump | 2x4 | 1/85 1/85 - | 8 | propulsion rpm=1445 ist=6.3
Lubricating-oil pump | 2x4 | 1/80 1/80 - | 9 | propulsion constant
Fuel separator | 3 | 1/80 - 1/80i | 10 | constant start_s=6 eff=0.86
Fuel transfer pump | 2.2 | 1/85i - 1/85i | 10 | constant
Start-air compressor | 5.5 | 1/90i 1/90i - | 9 | constant tl=2.2
[MSB | Ventilation | motor]
Engine-room fan | 2x5.5 | 2/85 2/85 1/60 | 15 | propulsion ist=6.5 start_s=4
Air-conditioning compressor | 15 | 1/80 1/75 1/50 | 18 | star-delta habitability constant change_s=4 rpm=1465 eff=0.915 pf=0.84 stage=2
Air-conditioning fan | 4 | 1/90 1/90 1/80 | 18 | habitability ist=6.0 stage=2
[MSB | Steering | motor | steering constant]
Steering gear 1 | 5.5 | 1/35 1/40 - | 24
Steering gear 2 | 5.5 | - 1/40 - | 24
[MSB | Safety | motor]
Fire pump | 15 | 1/90o 1/90o 1/90o | 16 | star-delta safety change_s=4
[DB-ER | Safety | motor]
Bilge pump | 4 | 1/80i 1/80i 1/80i | 11 | safety
[DB-ER | Domestic | motor | habitability]
Sewage plant | 2.2 | 1/80i 1/80i 1/80i | 12
Fresh-water pump | 1.5 | 1/80i 1/80i 1/80i | 12
[DB-ER | Domestic | general]
Fresh-water maker | 6 | 1/85 - - | 10 | pf=0.85 stage=1
[MSB | Deck | motor | constant stage=1]
Tow winch pump | 22 | 1/70i 1/75i - | 22 | star-delta change_s=7 rpm=1465 ist=6.8 inertia=0.25 eff=0.922 pf=0.85
Deck crane pump | 18.5 | 1/60o - - | 20 | star-delta rpm=1465 ist=6.7 inertia=0.2
Anchor windlass | 11 | - 1/60i - | 26 | tl=2.2
[MSB | Galley | heating]
Galley range | 9 | 1/40 1/20 1/40i | 20 | habitability pf=1.0 stage=1
[MSB | Heating | heating | habitability pf=1.0 stage=1]
Water heater | 6 | 1/50 1/50 1/50 | 19
Cabin heaters | 8 | 1/45 1/40 1/30 | 22
[MSB | Navigation | converter]
Battery charger | 2x3 | 1/60 1/60 1/60 | 14 | dc-link safety dc_choke=3 pf=0.88
[DB-230 | Domestic | motor]
Provision refrigeration | 2x1.5 | 2/60 2/60 1/60 | 16 | habitability constant
[DB-230 | Galley | general]
Galley sockets | 4 | 1/40i 1/30i 1/40i | 14 | habitability single-phase fused stage=2
[DB-230 | Lighting | lighting | single-phase]
Cabin lighting and sockets | 5 | 1/70 1/70 1/60 | 16 | habitability
Engine-room lighting | 2.5 | 1/90 1/90 1/70 | 12 | safety
Deck floodlights | 4 | 1/30 1/80 1/30 | 25
[DB-WH | Navigation | general | safety single-phase]
Navigation equipment | 2.5 | 1/80 1/90 1/15 | 6
Radio equipment | 1.2 | 1/50 1/50 1/20 | 6
[DB-WH | Heating | heating]
Window heating | 1.5 | 1/60 1/60 - | 8 | single-phase pf=1.0
"""  # noqa: E501


def tables() -> Tables:
    """Return every sheet of the workboat's workbook."""
    book = Book(hz=50, modes=MODES)
    _project(book)
    _plant(book)
    read_loads(book, LOADS)
    _operation(book)
    _protection(book)
    return book.finish()


def _project(book: Book) -> None:
    book.add(
        "Project",
        "Item|Value|Note",
        ("Vessel", "Demonstration workboat", "Invented; no real vessel"),
        ("Hull number", "D-101"),
        ("Document number", "D-101-E-010"),
        ("Revision", "A"),
        ("Date", "2025-03-14"),
        ("Prepared by", "Electrical department"),
        ("Checked by", "Design office"),
        ("Approved by", "Technical manager"),
        ("Rated frequency", 50, "Hz"),
        ("Classification rules and edition", "IACS unified requirements, as amended 2023"),
        ("Ambient temperature", 45, "°C, outside air 35 °C"),
        ("Engine-room temperature", 45, "°C"),
    )
    book.add(
        "Acceptance",
        "Quantity|Limit|Unit|Basis",
        ("Close margin", 5, "%", "Design office practice"),
        ("Voltage reference", "nominal of board", None, "Agreed with the owner"),
        ("Intermittent diversity", 2, "-", "Intermittent load divided by 2; ship design practice"),
        ("One-set margin", 10, "%", "Owner's specification: running sets stay below 90 %"),
        ("Voltage drop to consumer", 5, "%", "Owner's specification, sharper than 6 %"),
    )


def _plant(book: Book) -> None:
    book.boards(
        # name, V, role, busbar A, Ipk kA, Icw kA, s, earthing, group | Icu fitted kA, ambient
        ("MSB", 400, "main", 630, 30, 15, 1, "insulated", None, 25, 45),
        ("DB-ER", 400, "distribution", 160, 20, 10, 1, "insulated", None, 15, 45),
        ("DB-230", 230, "distribution", 160, 12, 6, 1, "insulated", None, 10, 45),
        ("DB-WH", 230, "distribution", 63, 12, 6, 1, "insulated", None, 10, 45),
    )
    main = {
        "Largest engine load step [%]": 60,
        "Alternator efficiency [%]": 93.0,
        "Governor time constant [s]": 0.2,
    }
    genset(book, ("DG1", "MSB"), (150, 132), ("LV 150", "auxiliary winding"), 12, also=main)
    genset(book, ("DG2", "MSB"), (150, 132), ("LV 150", "auxiliary winding"), 12, also=main)
    harbour = {
        "Alternator efficiency [%]": 91.0,
        "Service": "harbour",
        "Starts at island load [%]": None,
        "Largest engine load step [%]": 100,
    }
    genset(book, ("HG", "MSB"), (80, 72), ("LV 50", "compounded"), 10, also=harbour)
    book.add(
        "Shore supplies",
        SHORE_HEADINGS,
        ("Shore", "MSB", 400, 50, 63, 6, 2, 0.6),
    )
    book.cable("C-Shore", ("Shore", "MSB"), 63, 18, board="MSB")
    book.breaker(
        "Q-Shore", "C-Shore", "MSB", 100, icw_ka=12, ir=63, tr=10, tr_at=2, isd=315, tsd=0.4, ii="off"
    )
    for name in ("T-230-1", "T-230-2"):
        transformer(
            book,
            name,
            ("MSB", "DB-230"),
            30,
            (4.0, 0.62, 0.16),
            lengths_m=(8, 6),
            volts=(400, 234),
            primary=(5.0, 0.25),
            secondary=(4.5, 0.12),
        )
    feeder(book, ("MSB", "DB-ER"), 63, 14, short=(5, 0.15))
    feeder(book, ("DB-230", "DB-WH"), 32, 22, short=(6, 0.05), max_drop_percent=1.2)


def _operation(book: Book) -> None:
    book.add(
        "Modes",
        "Mode|Description|Kind|Sets that may run together in change-over",
        ("At sea", "Transit with tow, one main set, the other stands by", "sea", "DG1, DG2"),
        ("Manoeuvring", "Harbour approach, bow thruster and winch in use", "manoeuvring"),
        ("Harbour", "Alongside on the harbour set", "harbour", "DG1, HG"),
    )
    book.running(
        {
            "DG1": "on on standby",
            "DG2": "standby on off",
            "HG": "off off on",
            "Shore": "off off off",
            "T-230-1": "on on on",
            "T-230-2": "standby standby standby",
        }
    )
    book.add(
        "Set-points",
        "Equipment|Mode|No-load voltage [%]|No-load frequency [%]|Tap [%]",
        ("HG", "Harbour", 102.0, 102.0),
        ("T-230-1", "Harbour", None, None, -2.5),
    )
    book.add(
        "Simultaneity",
        "Service|Mode|Duty|Simultaneity factor [%]",
        ("Deck", "At sea", "intermittent", 50),
        ("Thrusters", "Manoeuvring", "intermittent", 100),
        ("Lighting", "Harbour", "continuous", 90),
    )
    book.add(
        "Interlocks",
        "Interlock|Equipment A|Equipment B|Kind",
        ("Shore against DG1", "Shore", "DG1", "never both closed"),
        ("Shore against DG2", "Shore", "DG2", "never both closed"),
        ("Shore against HG", "Shore", "HG", "never both closed"),
        ("Harbour set against DG1", "HG", "DG1", "both only in change-over"),
        ("230 V transformers", "T-230-1", "T-230-2", "both only in change-over"),
    )
    book.add(
        "Transfers",
        "Board or load|Normal supply|Other supply|Automatic|Transfer at [% U]|Delay [s]",
        ("DB-230", "T-230-1", "T-230-2", "no"),
    )
    book.add(
        "Events",
        "Case|Mode|Kind|Equipment|Size|Unit|At [s]|Duration [s]",
        ("Winch start while manoeuvring", "Manoeuvring", "motor start", "Tow winch pump", 1, "units", 0.5),
        ("Fire pump start at sea", "At sea", "motor start", "Fire pump", 1, "units", 0.5),
        ("Load step on one set", "At sea", "load step", "MSB", 25, "kW", 0.5),
        ("One of two sets trips", "Manoeuvring", "set trip", "DG2", None, None, 0.5),
        ("Full load off", "At sea", "load rejection", "DG1", 100, "%", 0.5),
        ("DG2 droop 5 %", "Manoeuvring", "maladjustment", "DG2", 5, "% voltage droop", 0),
        ("DG2 voltage 102.5 %", "Manoeuvring", "maladjustment", "DG2", 102.5, "% no-load voltage", 0),
        ("DG2 frequency 102.4 %", "Manoeuvring", "maladjustment", "DG2", 102.4, "% no-load frequency", 0),
    )


def _protection(book: Book) -> None:
    protect_sets(book, ("DG1", "DG2", "HG"))
    book.add(
        "Setting ranges",
        "Device|Setting|Min|Max|Step",
        ("Q-DG1", "Long-time current", 100, 250, 1),
        ("Q-DG1", "Short-time delay", 0.1, 0.5, 0.1),
        ("Q-DG2", "Long-time current", 100, 250, 1),
        ("Q-DG2", "Short-time delay", 0.1, 0.5, 0.1),
        ("Q-HG", "Long-time current", 40, 100, 1),
    )
    book.add(
        "Maker discrimination",
        "Upstream device|Downstream device|Discrimination up to [kA]|Reference",
        ("Q-DB-ER", "Q-Sea-water cooling pump", 10, "Invented data sheet, table 3"),
        ("Q-DB-WH", "Q-Navigation equipment", 3, "Invented data sheet, table 1"),
    )
