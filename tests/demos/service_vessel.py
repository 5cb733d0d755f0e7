"""A 72 m offshore service vessel, 450 V 60 Hz: three main sets on a split switchboard, an emergency set.

Station keeping runs with the bus-tie open: two islands, each with its own thruster.

Three faults are planted, and should be found; everything else is meant to be sound:

1. Cargo: the load in this mode is beyond the two sets on line (about 105 %), and stays beyond what is left
   with the largest set lost, even after the standby set has come in.
2. Manoeuvring: the no-load voltage of DG2 is trimmed to 104.2 % (Set-points) against 102 % at DG1, so the
   kvar sharing is far outside its tolerance.
3. C-ACC-2: the feeder of the second accommodation panel is far too thin: its breaker is set above what the
   cable carries, and the load alone is beyond the rating.
"""

from __future__ import annotations

from functools import partial
from typing import Any

from tests.demos.consumers import add_load
from tests.demos.equipment import SHORE_HEADINGS, feeder, genset, protect_sets, transformer
from tests.demos.rows import Book, Tables

MODES = ("At sea", "Manoeuvring", "Station keeping", "Cargo", "Harbour", "Shore", "Emergency")
PORT, STARBOARD = {"group": "Port"}, {"group": "Starboard"}


def tables() -> Tables:
    """Return every sheet of the service vessel's workbook."""
    book = Book(hz=60, modes=MODES, consumer_volts={450: 440})
    _project(book)
    _sources(book)
    _distribution(book)
    _thrusters_and_deck(book)
    _cargo(book)
    _engine_room(book)
    _accommodation(book)
    _emergency(book)
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
    book.add("Shore supplies", SHORE_HEADINGS, ("Shore", "MSB-S", 450, 60, 600, 18, 6, 0.5))
    book.cable("C-Shore", ("Shore", "MSB-S"), 630, 35, board="MSB-S", cores="3 single")
    book.breaker(
        "Q-Shore", "C-Shore", "MSB-S", 630, icw_ka=25, ir=600, tr=10, tr_at=2, isd=2400, tsd=0.3, ii="off"
    )
    book.add(
        "Ties",
        "Tie|Board A|Board B|Rated current [A]|Reactance [ohm]|Resistance [ohm]",
        ("BT-MSB", "MSB-P", "MSB-S", 2000),
        ("BT-LDB", "LDB-P", "LDB-S", 400),
    )
    tie: dict[str, Any] = {"tr": 12, "tr_at": 1.5, "tsd": 0.3, "ii": "off"}
    book.breaker("Q-BT-MSB", "BT-MSB", "MSB-P", 2000, icw_ka=50, ir=1800, isd=3000, **tie)
    book.breaker("Q-BT-LDB", "BT-LDB", "LDB-P", 400, icw_ka=8, ir=300, isd=1200, **tie)


PORT_GROUP: dict[str, object] = {"Redundancy group": "Port"}
STBD_GROUP: dict[str, object] = {"Redundancy group": "Starboard"}


def _distribution(book: Book) -> None:
    feeder(book, ("MSB-S", "ESB"), 320, 48, short=(5, 0.2), switch_at_end=True)
    feeder(book, ("MSB-P", "ER-P"), 225, 24)
    feeder(book, ("MSB-S", "ER-S"), 225, 28)
    feeder(book, ("MSB-S", "DECK"), 260, 46)
    feeder(book, ("MSB-P", "CARGO"), 800, 32, short=(5, 0.2))
    feeder(book, ("MSB-S", "HVAC"), 330, 38)
    feeder(book, ("MSB-P", "GALLEY"), 130, 42)
    for name, board, to in (("T-LV1", "MSB-P", "LDB-P"), ("T-LV2", "MSB-S", "LDB-S")):
        transformer(
            book,
            name,
            (board, to),
            120,
            (4.0, 1.75, 0.42),
            lengths_m=(16, 10),
            primary=(8, 0.2),
            secondary=(4.5, 0.15),
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
            primary=(8, 0.2),
            secondary=(4.5, 0.15),
        )
    feeder(book, ("LDB-P", "ACC-1"), 110, 34, short=(5, 0.08))
    # planted: 10 mm2 where the setting of 110 A asks for 35 mm2
    book.cable(
        "C-ACC-2", ("LDB-S", "ACC-2"), 110, 30, board="LDB-S", max_drop_percent=1.5, section_mm2=10, bunched=8
    )
    book.breaker(
        "Q-ACC-2", "C-ACC-2", "LDB-S", 160, icw_ka=8, ir=110, tr=10, tr_at=2, isd=550, tsd=0.08, ii="off"
    )
    feeder(book, ("LDB-P", "ER-LT"), 70, 30, short=(5, 0.08))
    feeder(book, ("ELDB", "NAV"), 63, 26, short=(5, 0.08))


def _thrusters_and_deck(book: Book) -> None:
    load = partial(add_load, book)
    # demand: at sea, manoeuvring, station keeping, cargo, harbour, shore, emergency
    load(
        "Bow thruster", "MSB-P", "Thrusters", "converter", 1, 320, "- 1/50 1/60 - - - -", 40,
        about="330 kW drive behind a 12-pulse rectifier", pf=0.94, dpf=0.96, pulses="12-pulse", choke=4,
        spectrum="Typical 12-pulse", fused=True, **PORT,
    )  # fmt: skip
    load(
        "Stern thruster", "MSB-S", "Thrusters", "converter", 1, 240, "- 1/45 1/60 - - - -", 45,
        about="Drive with active front end", pf=0.99, dpf=1.0, pulses="active front end", choke=8,
        spectrum="Typical active front end", fused=True, **STARBOARD,
    )  # fmt: skip
    load(
        "Towing winch", "MSB-S", "Deck", "converter", 1, 110, "1/15i 1/30i 1/20i - - - -", 52,
        about="Frequency-controlled, brakes into the board through a regenerative rectifier",
        pf=0.93, dpf=0.95, pulses="6-pulse", dc_choke=4, regen="yes", spectrum="Typical 6-pulse DC link",
        fused=True, stage=1, **STARBOARD,
    )  # fmt: skip
    oil = {"law": "constant", "start": "star-delta", "change_s": 5, "stage": 1, **STARBOARD}
    load("Deck crane pump 1", "DECK", "Deck", "motor", 1, 55, "- - 1/40i 1/70i 1/40i - -", 30, ist=6.8, **oil)
    load("Deck crane pump 2", "DECK", "Deck", "motor", 1, 55, "- - - 1/70i - - -", 34, ist=6.8, **oil)
    load(
        "Tugger winch",
        "DECK",
        "Deck",
        "motor",
        2,
        22,
        "- - 1/50i 2/60i 1/50i - -",
        28,
        tl=2.0,
        law="constant",
    )
    load(
        "Capstan", "DECK", "Deck", "motor", 2, 18.5, "- 2/50i - - - - -", 36, tl=2.2, law="constant", stage=1
    )
    load(
        "Anchor windlass",
        "DECK",
        "Deck",
        "motor",
        1,
        45,
        "- 1/50i - - - - -",
        44,
        tl=2.2,
        law="constant",
        **STARBOARD,
    )
    load("Deck machinery cooling pump", "DECK", "Deck", "motor", 1, 5.5, "- 1/80 1/80 1/80 - - -", 26)
    load(
        "Rescue-boat davit", "DECK", "Safety", "motor", 1, 15, "- - 1/60o - - - -", 38, for_="safety", tl=2.0
    )
    load("Hose reel", "DECK", "Cargo", "motor", 2, 7.5, "- - - 2/40i - - -", 30, law="constant")


def _cargo(book: Book) -> None:
    load = partial(add_load, book)
    pump: dict[str, Any] = {"ist": 6.7, "stage": 2, "inertia": 1.4, "start_s": 5, **PORT}
    wye: dict[str, Any] = {"start": "star-delta", "change_s": 5}
    load(
        "Mud pump 1",
        "CARGO",
        "Cargo",
        "motor",
        1,
        110,
        "- - - 1/95 - - -",
        16,
        eff=95.2,
        pf=0.87,
        **pump,
        **wye,
    )
    load(
        "Mud pump 2",
        "CARGO",
        "Cargo",
        "motor",
        1,
        110,
        "- - - 1/95 - - -",
        18,
        eff=95.2,
        pf=0.87,
        **pump,
        **wye,
    )
    load(
        "Fuel cargo pump 1",
        "CARGO",
        "Cargo",
        "motor",
        1,
        75,
        "- - - 1/92 - - -",
        20,
        eff=94.6,
        pf=0.87,
        **pump,
        **wye,
    )
    load(
        "Fuel cargo pump 2",
        "CARGO",
        "Cargo",
        "motor",
        1,
        75,
        "- - - 1/92 - - -",
        22,
        eff=94.6,
        pf=0.87,
        **pump,
        **wye,
    )
    load(
        "Brine pump",
        "CARGO",
        "Cargo",
        "motor",
        1,
        75,
        "- - - 1/90i - - -",
        22,
        eff=94.6,
        pf=0.87,
        **pump,
        **wye,
    )
    load(
        "Bulk air compressor 1", "MSB-P", "Cargo", "motor", 1, 132, "- - - 1/92 - - -", 30,
        start="soft starter", soft_in=3.2, ramp_s=10, law="constant", eff=95.4, pf=0.88, ist=6.5, rpm=1785,
        inertia=2.6, stage=2, **PORT,
    )  # fmt: skip
    load(
        "Bulk air compressor 2", "MSB-S", "Cargo", "motor", 1, 132, "- - - 1/92o - - -", 34,
        start="soft starter", soft_in=3.2, ramp_s=10, law="constant", eff=95.4, pf=0.88, ist=6.5, rpm=1785,
        inertia=2.6, stage=2, **STARBOARD,
    )  # fmt: skip
    load("Bulk air dryer", "CARGO", "Cargo", "general", 2, 6, "- - - 2/80 - - -", 24, pf=0.88, stage=2)
    load("Fresh-water cargo pump", "CARGO", "Cargo", "motor", 1, 37, "- - - 1/85 - - -", 24, **pump, **wye)
    load("Tank cleaning pump", "CARGO", "Cargo", "motor", 1, 30, "1/85i - - - 1/85i - -", 24, **wye, stage=1)
    load("Cargo hydraulic pump", "CARGO", "Cargo", "motor", 1, 18.5, "- - - 1/70i - - -", 18, law="constant")
    load("Stripping pump", "CARGO", "Cargo", "motor", 2, 7.5, "- - - 1/80i - - -", 22, law="constant")
    load(
        "Mud tank agitator",
        "CARGO",
        "Cargo",
        "motor",
        4,
        5.5,
        "- - 4/60 4/70 - - -",
        32,
        law="constant",
        stage=2,
    )
    load(
        "Ballast pump 1", "MSB-P", "Cargo", "motor", 1, 45, "1/80i - 1/80i 1/85 1/80i - -", 26, **wye, **PORT
    )
    load("Ballast pump 2", "MSB-S", "Cargo", "motor", 1, 45, "- - 1/80i 1/85i - - -", 28, **wye, **STARBOARD)


def _engine_room(book: Book) -> None:
    load = partial(add_load, book)
    engine = "Engine auxiliaries"
    for board, side, group, number in (("ER-P", "port", PORT, 1), ("ER-S", "starboard", STARBOARD, 2)):
        run: dict[str, Any] = {"for_": "propulsion", **group}
        both = "1/85 1/85 1/85 1/60 - - -"
        load(f"Main sea-water pump {number}", board, engine, "motor", 1, 22, both, 14, ist=6.8, **run)
        load(
            f"Low-temperature water pump {number}",
            board,
            engine,
            "motor",
            1,
            15,
            "1/85 1/85 1/85 1/85 - - -",
            14,
            **run,
        )
        load(
            f"High-temperature water pump {number}",
            board,
            engine,
            "motor",
            1,
            7.5,
            "1/85 1/85 1/85 - - - -",
            14,
            **run,
        )
        load(
            f"Propulsion lubricating pump {number}",
            board,
            engine,
            "motor",
            1,
            11,
            "1/80 1/80 1/80 - - - -",
            16,
            law="constant",
            **run,
        )
        load(
            f"Gearbox pump {number}",
            board,
            engine,
            "motor",
            1,
            5.5,
            "1/70 1/70 1/70 - - - -",
            18,
            law="constant",
            **run,
        )
        load(
            f"Pitch hydraulic pump {number}",
            board,
            engine,
            "motor",
            1,
            7.5,
            "1/60 1/75 1/75 - - - -",
            20,
            law="constant",
            **run,
        )
        fans = "1/85 1/85 1/85 1/85 1/60 1/50 -"
        load(
            f"Engine-room fan {side}",
            board,
            "Ventilation",
            "motor",
            1,
            15,
            fans,
            26,
            ist=6.5,
            start_s=7,
            inertia=0.9,
            **run,
        )
        load(
            f"Fuel separator {number}",
            board,
            engine,
            "motor",
            1,
            5.5,
            "1/80 - - - 1/80i - -" if number == 1 else "- 1/80 1/80 - - - -",
            16,
            law="constant",
            start_s=9,
            **group,
        )
        load(
            f"Lubricating-oil separator {number}",
            board,
            engine,
            "motor",
            1,
            4,
            "1/75 1/75 1/75 - - - -",
            16,
            law="constant",
            start_s=8,
            **group,
        )
        load(
            f"Start-air compressor {number}",
            board,
            engine,
            "motor",
            1,
            11,
            "1/90i 1/90i 1/90i - - - -" if number == 1 else "- 1/90i - - - - -",
            18,
            law="constant",
            tl=2.2,
            **group,
        )
        load(
            f"Engine preheater {number}",
            board,
            "Heating",
            "heating",
            1,
            18,
            "- - - 1/60i 1/70 1/60 -",
            18,
            pf=1.0,
            stage=1,
            **group,
        )
    load(
        "Fuel transfer pump", "ER-P", engine, "motor", 2, 5.5, "1/85i 1/85i - - 1/85i - -", 20, law="constant"
    )
    load("Oily-water separator", "ER-P", engine, "general", 1, 4, "1/70i - - - - - -", 20, pf=0.8)
    load(
        "Fresh-water maker", "ER-S", "Domestic", "general", 1, 15, "1/90 - 1/90 - - - -", 22, pf=0.85, stage=1
    )
    load(
        "Sewage plant",
        "ER-S",
        "Domestic",
        "motor",
        1,
        7.5,
        "1/70i 1/70i 1/70i 1/70i 1/70i 1/60i -",
        24,
        for_="habitability",
    )
    load(
        "Fresh-water hydrophore pump",
        "ER-S",
        "Domestic",
        "motor",
        2,
        4,
        "1/80i 1/80i 1/80i 1/80i 1/80i 1/80i -",
        20,
        for_="habitability",
    )
    load(
        "Working-air compressor",
        "ER-S",
        engine,
        "motor",
        1,
        22,
        "1/80i - 1/80i 1/80i 1/80i - -",
        22,
        start="star-delta",
        change_s=4,
        law="constant",
        stage=2,
    )
    load("Workshop", "ER-P", engine, "general", 1, 15, "1/30i - - - 1/40i 1/40i -", 22, pf=0.8, stage=1)
    fire: dict[str, Any] = {"for_": "safety", "ist": 6.8, "eff": 94.5, "pf": 0.87}
    load(
        "Fire pump 1",
        "MSB-P",
        "Safety",
        "motor",
        1,
        75,
        "1/90o 1/90o 1/90o 1/90o 1/90o - -",
        32,
        start="autotransformer",
        tap=65,
        **fire,
        **PORT,
    )
    load(
        "Fire pump 2",
        "MSB-S",
        "Safety",
        "motor",
        1,
        75,
        "1/90o 1/90o 1/90o 1/90o 1/90o 1/90o -",
        34,
        start="autotransformer",
        tap=65,
        **fire,
        **STARBOARD,
    )
    load(
        "Bilge pump",
        "ER-S",
        "Safety",
        "motor",
        1,
        11,
        "1/80i 1/80i 1/80i 1/80i 1/80i 1/80i -",
        18,
        for_="safety",
    )
    load(
        "Steering gear 1",
        "MSB-P",
        "Steering",
        "motor",
        1,
        18.5,
        "1/30 1/40 1/30 - - - -",
        62,
        law="constant",
        for_="steering",
        eff=92,
        pf=0.84,
    )


def _accommodation(book: Book) -> None:
    load = partial(add_load, book)
    live: dict[str, Any] = {"for_": "habitability"}
    cool: dict[str, Any] = {
        "start": "star-delta",
        "change_s": 4,
        "law": "constant",
        "stage": 2,
        "eff": 94.0,
        "pf": 0.86,
    }
    load(
        "Air-conditioning compressor 1",
        "HVAC",
        "Ventilation",
        "motor",
        1,
        45,
        "1/85 1/85 1/85 1/85 1/70 1/70 -",
        18,
        **cool,
        **live,
    )
    load(
        "Air-conditioning compressor 2",
        "HVAC",
        "Ventilation",
        "motor",
        1,
        45,
        "1/60 1/40 1/60 1/40 - - -",
        20,
        **cool,
        **live,
    )
    load(
        "Air-handling unit",
        "HVAC",
        "Ventilation",
        "motor",
        3,
        11,
        "3/85 3/85 3/85 3/85 2/85 2/85 -",
        22,
        start_s=6,
        inertia=0.7,
        **live,
    )
    load(
        "Cabin exhaust fan",
        "HVAC",
        "Ventilation",
        "motor",
        4,
        2.2,
        "4/80 4/80 4/80 4/80 3/80 3/80 -",
        24,
        **live,
    )
    load("Cargo-hold fan", "HVAC", "Ventilation", "motor", 4, 5.5, "2/80 2/80 2/80 4/85 - - -", 34, stage=1)
    load(
        "Chilled-water pump",
        "HVAC",
        "Ventilation",
        "motor",
        2,
        7.5,
        "1/85 1/85 1/85 1/85 1/80 1/80 -",
        18,
        **live,
    )
    load(
        "Electric reheater",
        "HVAC",
        "Heating",
        "heating",
        4,
        12,
        "1/50 1/50 1/50 1/50 1/50 1/50 -",
        22,
        pf=1.0,
        stage=1,
    )
    load(
        "Galley range",
        "GALLEY",
        "Galley",
        "heating",
        1,
        24,
        "1/50 1/30 1/50 1/50 1/40i 1/40i -",
        10,
        pf=1.0,
        stage=1,
        **live,
    )
    load(
        "Galley oven",
        "GALLEY",
        "Galley",
        "heating",
        2,
        12,
        "1/50 1/40i 1/50 1/50 1/40i 1/40i -",
        10,
        pf=1.0,
        stage=1,
        fused=True,
    )
    load(
        "Dishwasher",
        "GALLEY",
        "Galley",
        "heating",
        1,
        9,
        "1/50i 1/50i 1/50i 1/50i 1/50i 1/50i -",
        10,
        pf=0.98,
        stage=1,
    )
    load(
        "Galley hood fan", "GALLEY", "Galley", "motor", 2, 1.5, "2/80 2/80 2/80 2/80 1/80 1/80 -", 14, stage=1
    )
    load(
        "Provision refrigeration",
        "GALLEY",
        "Domestic",
        "motor",
        2,
        7.5,
        "1/70 1/70 1/70 1/70 1/60 1/60 -",
        14,
        law="constant",
        **live,
    )
    load(
        "Laundry machine",
        "GALLEY",
        "Domestic",
        "heating",
        3,
        8,
        "2/40i - 2/40i 2/40i 1/40i 1/40i -",
        20,
        pf=0.98,
        stage=1,
        fused=True,
    )
    load(
        "Calorifier",
        "GALLEY",
        "Heating",
        "heating",
        2,
        15,
        "1/60 1/50 1/60 1/60 1/60 1/60 -",
        22,
        pf=1.0,
        stage=1,
        **live,
    )
    one: dict[str, Any] = {"phases": 2}
    for panel, group in (("ACC-1", PORT), ("ACC-2", STARBOARD)):
        number = panel[-1]
        load(
            f"Cabin lighting {number}",
            panel,
            "Lighting",
            "lighting",
            1,
            9,
            "1/75 1/75 1/75 1/75 1/65 1/65 -",
            18,
            pf=0.95,
            **live,
            **group,
        )
        load(
            f"Cabin sockets {number}",
            panel,
            "Domestic",
            "general",
            1,
            8,
            "1/60 1/50 1/60 1/60 1/50 1/50 -",
            18,
            pf=0.9,
            **live,
            **group,
        )
        load(
            f"Alleyway lighting {number}",
            panel,
            "Lighting",
            "lighting",
            1,
            4,
            "1/95 1/95 1/95 1/95 1/95 1/95 -",
            22,
            **one,
            **live,
            **group,
        )
        load(
            f"Cabin heaters {number}",
            panel,
            "Heating",
            "heating",
            1,
            12,
            "1/70 1/60 1/70 1/70 1/60 1/60 -",
            20,
            pf=1.0,
            **group,
        )
        load(
            f"Pantry {number}",
            panel,
            "Galley",
            "general",
            1,
            3.5,
            "1/50i 1/50i 1/50i 1/50i 1/50i 1/50i -",
            20,
            stage=2,
            fused=True,
            **one,
            **group,
        )
    load(
        "Engine-room lighting",
        "ER-LT",
        "Lighting",
        "lighting",
        1,
        12,
        "1/95 1/95 1/95 1/95 1/80 1/80 -",
        16,
        for_="safety",
    )
    load(
        "Engine-room sockets",
        "ER-LT",
        "Engine auxiliaries",
        "general",
        1,
        6,
        "1/40i 1/40i 1/40i 1/40i 1/40i 1/40i -",
        16,
        stage=1,
    )
    load("Deck lighting", "LDB-S", "Lighting", "lighting", 1, 8, "1/25 1/80 1/80 1/90 1/70 1/70 -", 40)
    load("Searchlights", "LDB-P", "Lighting", "lighting", 2, 2, "- 2/50i 1/50i - - - -", 44, **one)
    load(
        "Entertainment and computers",
        "LDB-P",
        "Domestic",
        "general",
        1,
        7,
        "1/60 1/60 1/60 1/60 1/50 1/50 -",
        30,
        pf=0.92,
        **one,
    )
    load(
        "Gymnasium and hospital", "LDB-S", "Domestic", "general", 1, 4, "1/40i - 1/40i 1/40i - - -", 26, **one
    )


def _emergency(book: Book) -> None:
    load = partial(add_load, book)
    safe: dict[str, Any] = {"for_": "safety"}
    one: dict[str, Any] = {"phases": 2, **safe}
    load(
        "Emergency fire pump",
        "ESB",
        "Safety",
        "motor",
        1,
        45,
        "1/90o 1/90o 1/90o 1/90o 1/90o 1/90o 1/85",
        46,
        ist=6.8,
        eff=93.8,
        pf=0.87,
        restart_s=20,
        **safe,
    )
    load(
        "Steering gear 2",
        "ESB",
        "Steering",
        "motor",
        1,
        18.5,
        "- 1/40 1/30 - - - 1/40",
        58,
        law="constant",
        for_="steering",
        eff=92,
        pf=0.84,
        restart_s=5,
    )
    load(
        "Emergency bilge pump",
        "ESB",
        "Safety",
        "motor",
        1,
        11,
        "1/80i 1/80i 1/80i 1/80i 1/80i 1/80i 1/80",
        36,
        **safe,
    )
    load("Emergency-set fan", "ESB", "Ventilation", "motor", 1, 3, "- - - - - - 1/80", 10, **safe)
    load(
        "Emergency air compressor",
        "ESB",
        "Engine auxiliaries",
        "motor",
        1,
        5.5,
        "- - - - - - 1/80i",
        34,
        law="constant",
        tl=2.2,
        restart_s=60,
    )
    load(
        "Radio and DP battery charger",
        "ESB",
        "Navigation",
        "converter",
        2,
        8,
        "2/60 2/60 2/70 2/60 1/60 1/60 2/70",
        28,
        pulses="6-pulse",
        choke=3,
        pf=0.9,
        dpf=0.95,
        spectrum="Typical 6-pulse",
        **safe,
    )
    load(
        "Machinery battery charger",
        "ESB",
        "Engine auxiliaries",
        "converter",
        1,
        8,
        "1/60 1/60 1/60 1/60 1/60 1/60 1/70",
        26,
        pulses="6-pulse",
        choke=3,
        pf=0.9,
        dpf=0.95,
        spectrum="Typical 6-pulse",
        **safe,
    )
    load(
        "Quick-closing and watertight doors",
        "ESB",
        "Safety",
        "motor",
        1,
        5.5,
        "1/60o 1/60o 1/60o 1/60o 1/60o 1/60o 1/60i",
        40,
        law="constant",
        **safe,
    )
    load(
        "Water-mist pump",
        "ESB",
        "Safety",
        "motor",
        1,
        30,
        "- - - - - - 1/80o",
        34,
        ist=6.8,
        start="star-delta",
        change_s=4,
        **safe,
    )
    load(
        "Emergency lighting engine room",
        "ELDB",
        "Lighting",
        "lighting",
        1,
        5,
        "1/95 1/95 1/95 1/95 1/95 1/95 1/95",
        24,
        **one,
    )
    load(
        "Emergency lighting accommodation",
        "ELDB",
        "Lighting",
        "lighting",
        1,
        6,
        "1/95 1/95 1/95 1/95 1/95 1/95 1/95",
        22,
        **safe,
    )
    load(
        "Muster and lifeboat lighting",
        "ELDB",
        "Lighting",
        "lighting",
        1,
        2.5,
        "1/30 1/30 1/30 1/30 1/30 1/30 1/95",
        30,
        **one,
    )
    load(
        "Fire detection and alarms",
        "ELDB",
        "Safety",
        "general",
        1,
        2,
        "1/70 1/70 1/70 1/70 1/70 1/70 1/90",
        20,
        **one,
    )
    load(
        "Public address", "ELDB", "Safety", "general", 1, 1.5, "1/30 1/30 1/30 1/30 1/30 1/30 1/60", 20, **one
    )
    load(
        "Bridge consoles",
        "NAV",
        "Navigation",
        "general",
        1,
        4,
        "1/70 1/80 1/80 1/40 1/30 1/30 1/60",
        8,
        pf=0.92,
        **one,
    )
    load("Radar", "NAV", "Navigation", "general", 2, 1.5, "2/80 2/80 1/80 - - - 1/80", 10, pf=0.92, **one)
    load(
        "Navigation lights",
        "NAV",
        "Navigation",
        "lighting",
        1,
        0.8,
        "1/90 1/90 1/90 1/30 1/30 1/30 1/90",
        14,
        **one,
    )
    load(
        "Positioning system",
        "NAV",
        "Navigation",
        "general",
        2,
        1.5,
        "- 2/80 2/90 - - - -",
        10,
        pf=0.92,
        **one,
    )
    load(
        "Bridge window heating",
        "NAV",
        "Heating",
        "heating",
        1,
        3,
        "1/50 1/50 1/50 - - - -",
        12,
        pf=1.0,
        phases=2,
    )


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
        ("Mud pumps one after the other", "Cargo", "motor start", "Mud pump 1", 1, "units", 0.5),
        ("Mud pumps one after the other", "Cargo", "motor start", "Mud pump 2", 1, "units", 8),
        ("Load step on one set", "At sea", "load step", "MSB-P", 250, "kW", 0.5),
        ("DG2 trips while manoeuvring", "Manoeuvring", "set trip", "DG2", None, None, 0.5),
        ("DG1 throws off its load", "At sea", "load rejection", "DG1", 100, "%", 0.5),
        ("DG1 voltage raised", "At sea", "set-point step", "DG1", 104, "% no-load voltage", 0.5),
        ("DG3 droop changed", "Cargo", "droop changed", "DG3", 6, "% voltage droop", 0.5),
        ("Field of DG2 lost", "Manoeuvring", "field loss", "DG2", None, None, 0.5),
        ("Fault on crane panel", "Cargo", "fault", "DECK", None, None, 0.5, 0.15),
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
