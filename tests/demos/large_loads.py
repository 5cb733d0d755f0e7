"""The consumers of the demonstration construction vessel, mostly by templates for spaces that repeat.

Columns: name | kW | demand | cable m | words | description. In a demand each part is mode letters and what is
asked for in them; T transit, S slow transit, M manoeuvring, K station keeping with closed ring, P station
keeping in two parts, L heavy lift, H harbour, A at anchor, O on shore supply, E emergency.
"""

from __future__ import annotations

from collections.abc import Iterator

from tests.demos.large_single_loads import CONVERTERS, DECK, EMERGENCY, GALLEY, HEAVY

# one diesel set: n its number, set the modes in which it runs, idle those in which it is kept warm
SET_AUXILIARIES = """
[{mcc} | Engine auxiliaries | motor | {group}]
DG{n} high-temperature pump | 11 | {run} 1/85 | 18 | propulsion
DG{n} low-temperature pump | 15 | {run} 1/85 | 18 | propulsion
DG{n} lubricating-oil priming pump | 7.5 | {warm} 1/70 | 20 | constant
DG{n} fuel booster pump | 4 | {run} 1/80 | 20 | propulsion constant
DG{n} fuel circulating pump | 3 | {run} 1/80 | 20 | propulsion constant
DG{n} lubricating-oil separator | 7.5 | {run} 1/70 | 24 | constant start_s=9
DG{n} room supply fan | 18.5 | {run} 1/85 | 32 | propulsion start_s=8 inertia=1.1
[{mcc} | Heating | heating | {group} pf=1.0 stage=1]
DG{n} preheater | 30 | {warm} 1/50 | 22
DG{n} alternator space heater | 2 | {warm} 1/90 | 20
"""

# one propulsion motor half: s side, n half, room its control room board
PROPULSION_AUXILIARIES = """
[{mcc} | Propulsion auxiliaries | motor | propulsion {group}]
Propulsion motor {s}{n} fan | 7.5 | TSMKPL 1/85 | 26 | start_s=5
Propulsion converter {s}{n} cooling pump | 5.5 | TSMKPL 1/80 | 24
Propulsion transformer {s}{n} fan | 3 | TSMKPL 1/80 | 26
Shaft bearing pump {s}{n} | 4 | TSMKPL 1/75 | 28 | constant
[{mcc} | Propulsion auxiliaries | converter | propulsion {group} 6-pulse]
Propulsion excitation supply {s}{n} | 15 | TSMKPL 1/60 | 22
"""

THRUSTER_AUXILIARIES = """
[{mcc} | Thruster auxiliaries | motor | propulsion {group}]
{name} hydraulic pump | 11 | MKPL 1/60 | 20 | constant
{name} lubricating pump | 3 | MKPL 1/75 | 20 | constant
{name} converter cooling pump | 4 | MKPL 1/80 | 18
{name} motor fan | 5.5 | MKPL 1/85 | 20
{name} room fan | 7.5 | MKPL 1/80; TS 1/50 | 24
{name} steering pump | 7.5 | MKPL 1/50 | 22 | constant
[{mcc} | Heating | heating | {group} pf=1.0 stage=1]
{name} space heater | 3 | TSHAO 1/80 | 20
"""

ENGINE_ROOM = """
[{mcc} | Engine auxiliaries | motor | propulsion {group}]
Main sea-water pump {s}1 | 55 | TSMKPLA 1/85 | 24 | star-delta ist=6.8 eff=0.942 pf=0.87
Main sea-water pump {s}2 | 55 | TMKPL 1/85 | 26 | star-delta ist=6.8 eff=0.942 pf=0.87
Central fresh-water pump {s} | 37 | TSMKPL 1/85; A 1/60 | 24 | star-delta
Auxiliary sea-water pump {s} | 22 | SA 1/80; H 1/80 | 28
Fuel separator {s} | 11 | TSMKPLA 1/75 | 26 | constant start_s=9
Fuel transfer pump {s} | 11 | TSLA 1/85i | 26 | constant
Lubricating-oil transfer pump {s} | 4 | TSLA 1/80i | 26 | constant
Start-air compressor {s} | 22 | TSMKPLA 1/85i | 22 | constant tl=2.2 star-delta
Control-air compressor {s} | 15 | TSMKPLAH 1/85i | 22 | constant tl=2.0
Sludge pump {s} | 3 | TSLA 1/80i | 30 | constant
Fuel heater pump {s} | 2.2 | TSMKPLA 1/80 | 28 | constant
[{mcc} | Ventilation | motor | {group}]
Engine-room supply fan {s}1 | 30 | TSMKPLA 1/85; HO 1/50 | 34 | propulsion start_s=9 inertia=2.4 star-delta
Engine-room supply fan {s}2 | 30 | TMKPL 1/85 | 34 | propulsion start_s=9 inertia=2.4 star-delta
Engine-room exhaust fan {s} | 15 | TSMKPLA 1/80 | 36
Switchboard-room cooling {s} | 11 | TSMKPLAHO 1/75 | 20 | constant
Converter-room cooling {s} | 22 | TSMKPL 1/75 | 26 | constant
Separator-room fan {s} | 5.5 | TSMKPLA 1/80 | 30
[{mcc} | Safety | motor | safety {group}]
Bilge pump {s} | 22 | TSMKPLHAO 1/80i | 32 | ist=6.8
[{mcc} | Heating | heating | {group} pf=1.0 stage=1]
Fuel heater {s} | 36 | TSMKPLA 1/45 | 28
Lubricating-oil heater {s} | 18 | TSMKPLA 1/45 | 28
[{mcc} | Domestic | motor | habitability {group}]
Fresh-water hydrophore pump {s} | 2x7.5 | TSMKPLHAO 1/75i | 30
Hot-water circulating pump {s} | 2.2 | TSMKPLHAO 1/80 | 30
Grey-water pump {s} | 4 | TSMKPLHAO 1/70i | 32
"""

ENGINE_ROOM_PORT_ONLY = """
[PUMP-P | Ballast and bilge | motor | port]
Ballast pump P | 90 | L 1/85; TSA 1/80i | 24 | star-delta eff=0.95 pf=0.87 ist=6.8 inertia=1.6
Anti-heeling pump P | 75 | L 1/80; KP 1/60i | 26 | soft-starter eff=0.947 pf=0.87
Bilge and general-service pump P | 45 | TSMKPLHAO 1/85o | 28 | safety star-delta
Stripping pump P | 7.5 | LA 1/80i | 28 | constant
Drainage pump P | 5.5 | TSMKPLHA 1/80i | 30
Fire pump P | 110 | TSMKPLHA 1/90o | 30 | safety autotransformer ist=6.8 eff=0.954 pf=0.88
Deck-wash pump P | 30 | TSLA 1/85i | 32 | star-delta stage=1
Fresh-water maker feed pump P | 11 | TSKPLA 1/85 | 26
[PUMP-P | Domestic | general | port stage=1]
Fresh-water maker P | 30 | TSKPLA 1/85 | 26 | pf=0.85
Sewage plant P | 15 | TSMKPLHAO 1/70 | 28 | pf=0.82
Vacuum toilet pumps P | 7.5 | TSMKPLHAO 1/60i | 30 | pf=0.8
[PUMP-S | Ballast and bilge | motor | starboard]
Ballast pump S | 90 | L 1/85; TSA 1/80i | 24 | star-delta eff=0.95 pf=0.87 ist=6.8 inertia=1.6
Anti-heeling pump S | 75 | L 1/80; KP 1/60i | 26 | soft-starter eff=0.947 pf=0.87
Bilge and general-service pump S | 45 | TSMKPLHAO 1/85o | 28 | safety star-delta
Stripping pump S | 7.5 | LA 1/80i | 28 | constant
Drainage pump S | 5.5 | TSMKPLHA 1/80i | 30
Fire pump S | 110 | TSMKPLHAO 1/90o | 30 | safety autotransformer ist=6.8 eff=0.954 pf=0.88
Deck-wash pump S | 30 | TSLA 1/85i | 32 | star-delta stage=1
Fresh-water maker feed pump S | 11 | L 1/85 | 26
[PUMP-S | Domestic | general | starboard stage=1]
Fresh-water maker S | 30 | L 1/85 | 26 | pf=0.85
Sewage plant S | 15 | TSMKPLHAO 1/50i | 28 | pf=0.82
Oily-water separator | 5.5 | TSA 1/70i | 28 | pf=0.8
Incinerator | 25 | TSA 1/50i | 34 | pf=0.85
"""

# one air-conditioning station: n its number
VENTILATION = """
[HVAC-{n} | Ventilation | motor | habitability {group}]
Chiller {n} | 110 | TSMKPLA 1/{chill}; {quiet} | 14 | star-delta constant stage=2 eff=0.952 pf=0.88 drop_out=65
Chilled-water pump {n} | 15 | TSMKPLA 1/85; HO 1/60 | 16
Air-handling unit {n}A | 18.5 | TSMKPLA 1/85; HO 1/60 | 26 | start_s=7 inertia=1.2
Air-handling unit {n}B | 18.5 | TSMKPLA 1/85 | 28 | start_s=7 inertia=1.2
Exhaust fan {n}A | 5.5 | TSMKPLHAO 1/80 | 30
Exhaust fan {n}B | 5.5 | TSMKPLA 1/80 | 32
Sanitary exhaust fan {n} | 2.2 | TSMKPLHAO 1/80 | 32
Stairwell fan {n} | 3 | TSMKPLHAO 1/70 | 34
Cooling-water pump {n} | 11 | TSMKPLHAO 1/80 | 18
[HVAC-{n} | Heating | heating | {group} pf=1.0 stage=1]
Reheater {n}A | 30 | TSMKPLA 1/40; HO 1/20 | 24
Reheater {n}B | 30 | TSMKPLA 1/35 | 26
Humidifier {n} | 12 | TSMKPLA 1/30 | 24
"""  # noqa: E501

# one accommodation deck: n its number
ACCOMMODATION_DECK = """
[L-ACC{n} | Lighting | lighting | habitability single-phase]
Cabin lighting deck {n} port | 5 | TSMKPLHAO 1/65 | 20
Cabin lighting deck {n} starboard | 5 | TSMKPLHAO 1/65 | 22
Alleyway lighting deck {n} | 4 | TSMKPLHAO 1/95 | 24
Public-room lighting deck {n} | 3 | TSMKPLHAO 1/60 | 24
[L-ACC{n} | Domestic | general | habitability single-phase pf=0.92]
Cabin sockets deck {n} port | 6 | TSMKPLHAO 1/35 | 20
Cabin sockets deck {n} starboard | 6 | TSMKPLHAO 1/35 | 22
Entertainment deck {n} | 3 | TSMKPLHAO 1/50 | 24
Cleaning sockets deck {n} | 3 | TSMKPLHAO 1/30i | 26 | stage=1
[L-ACC{n} | Heating | heating | pf=1.0 stage=1]
Cabin heaters deck {n} | 20 | TSMKPLHAO 1/35 | 22
Bathroom heaters deck {n} | 8 | TSMKPLHAO 1/40 | 24
[L-ACC{n} | Galley | general | single-phase pf=0.95 stage=1]
Pantry deck {n} | 3 | TSMKPLHAO 1/35i | 24
"""

# one technical space with its own 230 V panel
SPACE = """
[{board} | Lighting | lighting | single-phase]
{name} lighting A | 4 | TSMKPLHAO 1/90 | 22 | safety
{name} lighting B | 4 | TSMKPLHA 1/90 | 24
{name} local lighting | 2 | TSMKPLHA 1/50 | 26
[{board} | {service} | general | single-phase pf=0.9]
{name} sockets | 4 | TSMKPLHAO 1/30i | 24 | stage=1
{name} instruments | 2 | TSMKPLHAO 1/80 | 20
{name} motor heaters | 3 | TSMKPLHAO 1/60 | 26 | stage=1
{name} trace heating | 4 | TSMKPLHAO 1/30 | 30 | stage=1
"""

OUTSIDE = """
[{board} | Lighting | lighting]
{name} floodlights port | 6 | M 1/80; KPL 1/90; HAO 1/60; TS 1/15 | 40
{name} floodlights starboard | 6 | M 1/80; KPL 1/90; HAO 1/60; TS 1/15 | 42
{name} walkway lighting | 3 | TSMKPLHAO 1/70 | 44 | single-phase
{name} work-area lighting | 8 | L 1/90; KP 1/60; HA 1/30 | 44
[{board} | Deck | general | single-phase pf=0.9 stage=1]
{name} sockets | 4 | TSMKPLHAO 1/30i | 44
{name} anti-condensation heaters | 3 | TSMKPLHAO 1/60 | 44
{name} trace heating | 6 | TSMKPLHAO 1/30 | 46
"""

# which modes each diesel set runs in, as in the Running sheet
SETS = (
    (1, "ER1-P", "port", "TSMKPL"),
    (2, "ER2-P", "port", "A"),
    (3, "ER2-P", "port", "PL"),
    (4, "ER1-S", "starboard", "TSMKPL"),
    (5, "ER2-S", "starboard", ""),
    (6, "ER2-S", "starboard", "TMKPL"),
)
SPACES = (
    ("L-ER-P", "Engine room P", "Engine auxiliaries"),
    ("L-ER-S", "Engine room S", "Engine auxiliaries"),
    ("L-THR-F", "Thruster room F", "Thruster auxiliaries"),
    ("L-THR-A", "Thruster room A", "Thruster auxiliaries"),
    ("L-WORK", "Workshop space", "Workshop"),
    ("L-SWB", "Switchboard room", "Engine auxiliaries"),
)


def load_lists() -> Iterator[str]:
    """Return every list of consumers, with the templates filled in."""
    yield CONVERTERS
    for n, mcc, group, runs in SETS:
        warm = "".join(letter for letter in "TSMKPLA" if letter not in runs)
        yield SET_AUXILIARIES.format(n=n, mcc=mcc, group=group, run=runs or "-", warm=warm)
    for side, group in (("P", "port"), ("S", "starboard")):
        yield ENGINE_ROOM.format(mcc=f"ER1-{side}", s=side, group=group)
        for n in (1, 2):
            yield PROPULSION_AUXILIARIES.format(mcc=f"PROP-{side}", s=side, n=n, group=group)
    for name, mcc, group in (
        ("Bow thruster 1", "THR-F", "port"),
        ("Bow thruster 2", "THR-F", "starboard"),
        ("Azimuth thruster 1", "THR-A", "port"),
        ("Azimuth thruster 2", "THR-A", "starboard"),
    ):
        yield THRUSTER_AUXILIARIES.format(name=name, mcc=mcc, group=group)
    for n, chill, quiet in ((1, 80, "HO 1/55"), (2, 75, "HO 1/45"), (3, 60, "-"), (4, 50, "-")):
        yield VENTILATION.format(n=n, chill=chill, quiet=quiet, group="port" if n in (1, 3) else "starboard")
    yield from (ENGINE_ROOM_PORT_ONLY, GALLEY, DECK, HEAVY, EMERGENCY)
    for n in range(1, 8):
        yield ACCOMMODATION_DECK.format(n=n)
    for board, name, service in SPACES:
        yield SPACE.format(board=board, name=name, service=service)
    for board, name in (("L-DECK-F", "Foredeck"), ("L-DECK-A", "Afterdeck")):
        yield OUTSIDE.format(board=board, name=name)
