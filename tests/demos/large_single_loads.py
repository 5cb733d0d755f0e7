"""Consumers of the demonstration construction vessel that occur once.

The lines are written as in ``large_loads``.
"""

from __future__ import annotations

GALLEY = """
[GALLEY | Galley | heating | habitability stage=1 pf=1.0]
Range 1 | 27 | TSMKPLAHO 1/45 | 12
Range 2 | 27 | TSKPLA 1/40 | 12
Convection oven 1 | 18 | TSMKPLAHO 1/45 | 12 | fused
Convection oven 2 | 18 | TSKPLA 1/40i | 12 | fused
Tilting pan | 2x12 | TSKPLAHO 1/45i | 12
Deep fryer | 2x12 | TSKPLAHO 1/40i | 12
Boiling kettle | 2x15 | TSKPLAHO 1/45i | 14
Griddle | 9 | TSKPLAHO 1/40i | 12
Bain-marie | 2x6 | TSMKPLAHO 1/50 | 14
Coffee machine | 2x5 | TSMKPLAHO 1/40i | 16
[GALLEY | Galley | general | stage=1 pf=0.9]
Dishwasher | 2x18 | TSKPLAHO 1/50i | 16
Food-waste mill | 7.5 | TSKPLA 1/40i | 18
Food mixer | 4 | TSKPLAHO 1/30i | 12
Pantry equipment | 3x4 | TSMKPLAHO 2/30i | 22
[GALLEY | Galley | motor | stage=1]
Galley hood fan | 3x3 | TSMKPLAHO 2/80 | 18
Galley supply fan | 5.5 | TSMKPLAHO 1/80 | 20
[REFRIG | Domestic | motor | habitability]
Provision compressor 1 | 22 | TSMKPLHAO 1/75 | 14 | constant star-delta
Provision compressor 2 | 22 | TSKPLA 1/40i | 14 | constant star-delta
Provision cooling pump | 2x4 | TSMKPLHAO 1/80 | 14
Cold-room evaporator fan | 6x0.75 | TSMKPLHAO 5/80 | 22
Cold-room defrost pump | 1.5 | TSMKPLHAO 1/50i | 18
[REFRIG | Heating | heating | pf=1.0]
Cold-room defrost heater | 6x3 | TSMKPLHAO 2/50i | 22
[LAUNDRY | Domestic | heating | stage=1 pf=0.98]
Washing machine | 6x9 | TSKPLAHO 3/45i | 16 | fused
Tumble dryer | 6x12 | TSKPLAHO 3/45i | 16 | fused
Ironing press | 2x6 | TSKPLAHO 1/40i | 16
Drying-room heater | 2x9 | TSKPLA 1/50 | 18
[LAUNDRY | Domestic | motor | stage=1]
Laundry exhaust fan | 2x2.2 | TSKPLAHO 1/80 | 20
[LAUNDRY | Heating | heating | habitability pf=1.0 stage=1]
Calorifier 1 | 45 | TSMKPLHAO 1/55 | 22
Calorifier 2 | 45 | TSKPLA 1/45 | 22
"""

DECK = """
[DECK-F | Deck | motor | constant port]
Windlass pump 1 | 90 | M 1/50i; A 1/30i | 34 | star-delta ist=6.8 eff=0.95 pf=0.87
Windlass pump 2 | 90 | M 1/50i | 36 | star-delta ist=6.8 eff=0.95 pf=0.87
Mooring winch F | 2x37 | M 2/45i; H 1/20o | 38 | star-delta
Forward stores crane | 45 | LH 1/50i; A 1/40i | 32 | star-delta stage=1
Forward hydraulic cooling pump | 5.5 | MLA 1/80 | 30
Forward bosun-store fan | 3 | TSMKPLHA 1/80 | 34
Hawser reel F | 7.5 | M 1/40i | 36
Forward rescue-boat davit | 18.5 | KPL 1/60o | 40 | safety
[DECK-A | Deck | motor | constant starboard]
Mooring winch A | 4x37 | M 2/45i; H 1/20o | 40 | star-delta
Tugger winch | 6x30 | L 4/50i; KP 1/40i | 36 | stage=1
Deck crane pump P | 75 | L 1/65i; KPHA 1/45i | 38 | star-delta eff=0.947 pf=0.87 stage=1
Deck crane pump S | 75 | L 1/65i; HA 1/45i | 40 | star-delta eff=0.947 pf=0.87 stage=1
Capstan A | 2x22 | M 2/50i | 42
Hose reel | 2x11 | KPL 1/40i | 38
Aft hydraulic cooling pump | 7.5 | MKPL 1/80 | 34
Aft rescue-boat davit | 18.5 | KPL 1/60o | 44 | safety
Lifeboat davit P | 22 | KPL 1/60o | 46 | safety
Lifeboat davit S | 22 | KPL 1/60o | 46 | safety
Skidding power pack | 2x90 | L 1/55i | 38 | star-delta eff=0.95 pf=0.87 stage=1
Carousel drive pump | 45 | L 1/60 | 40 | star-delta
[DECK-A | Deck | general | starboard stage=1]
Container sockets aft | 12x8 | TSKPLA 6/45 | 48 | pf=0.85 | Reefer and workshop containers
Welding sockets aft | 6x15 | L 4/35i; KP 1/35i | 46 | pf=0.8
[WORKSHOP | Workshop | general | port stage=1]
Lathe | 11 | TSKPLAH 1/40i | 14 | pf=0.78
Milling machine | 7.5 | TSKPLAH 1/30i | 14 | pf=0.78
Drilling machine | 2x3 | TSKPLAH 1/30i | 14 | pf=0.78
Welding set | 4x15 | TSKPLAH 1/40i | 16 | pf=0.8
Grinding machine | 2x3 | TSKPLAH 1/30i | 14 | pf=0.78
Workshop crane | 5.5 | TSKPLAH 1/40i | 18 | pf=0.8
Hydraulic press | 7.5 | TSKPLAH 1/30i | 14 | pf=0.8
Injector test bench | 4 | TSKPLAH 1/30i | 16 | pf=0.8
[WORKSHOP | Workshop | motor | port]
Workshop exhaust fan | 2x4 | TSKPLAH 1/80 | 20
Working-air compressor | 2x55 | KPL 1/80i; TSA 1/70i | 22 | star-delta constant stage=2
"""

# the 690 V boards
HEAVY = """
[LV690-P | Deck | converter | port regenerates stage=1]
Main crane hoist | 1100 | L 1/55i | 46 | active regenerates | Heavy-lift crane, hoisting drive
Main crane slew and luff | 500 | L 1/45i | 46 | active regenerates
[CRANE-P | Deck | converter | port stage=1 dc-link]
Auxiliary crane hoist | 250 | L 1/45i; KP 1/25i | 22 | regenerates
Auxiliary crane luff | 132 | L 1/35i; KP 1/20i | 22
Spooling winch | 160 | L 1/40i; KP 1/30i | 26
[CRANE-P | Deck | motor | port constant]
Crane hydraulic pump | 2x110 | L 1/60 | 20 | star-delta eff=0.952 pf=0.88 stage=1
Crane cooling pump | 2x15 | L 1/80; KP 1/60 | 20
Tensioner power pack P | 200 | L 1/50i | 30 | soft-starter eff=0.957 pf=0.89 stage=1
[CRANE-S | Deck | converter | starboard stage=1 dc-link]
Underwater-vehicle winch 1 | 132 | KPL 1/35i | 24 | regenerates
Underwater-vehicle winch 2 | 132 | KP 1/30i | 26
Underwater-vehicle supply 1 | 110 | KPL 1/70 | 28 | pf=0.93
Underwater-vehicle supply 2 | 110 | KP 1/60 | 28 | pf=0.93
[CRANE-S | Deck | motor | starboard constant]
Tensioner power pack S | 200 | L 1/50i | 30 | soft-starter eff=0.957 pf=0.89 stage=1
Vehicle launch pump | 2x90 | KPL 1/40i | 28 | star-delta eff=0.95 pf=0.87
Moon-pool hatch pump | 55 | KPL 1/40o | 34 | star-delta
[LV690-S | Ballast and bilge | motor | starboard]
Rapid ballast pump 1 | 315 | L 1/95 | 36 | soft-starter eff=0.96 pf=0.89 ist=6.5 inertia=9 stage=2 absorbed=265 rpm=1785
Rapid ballast pump 2 | 315 | L 1/95i | 38 | soft-starter eff=0.96 pf=0.89 ist=6.5 inertia=9 stage=2 absorbed=265 rpm=1785
[LV690-P | Safety | motor | port]
Fire-monitor pump | 315 | KPL 1/90o | 40 | safety soft-starter eff=0.96 pf=0.89 ist=6.5 inertia=9 amps=308 rpm=1785
"""  # noqa: E501

EMERGENCY = """
[ESB | Safety | motor | safety]
Emergency fire pump | 90 | TSMKPLHAO 1/90o; E 1/85 | 46 | ist=6.8 eff=0.95 pf=0.87 star-delta restart_s=20 start_pf=0.28
Emergency bilge pump | 30 | TSMKPLHAO 1/80i; E 1/80 | 40 | restart_s=40
Sprinkler pump | 75 | E 1/85o | 42 | star-delta ist=6.8 eff=0.947 pf=0.87
Water-mist pump | 2x37 | E 1/80i | 42 | star-delta
Foam pump | 15 | E 1/80o | 40
Watertight-door power pack | 2x7.5 | TSMKPLHAO 1/60o; E 2/60i | 44 | constant
Smoke-extract fan | 2x11 | E 1/85i | 40
[ESB | Engine auxiliaries | motor]
Emergency start-air compressor | 11 | E 1/85i | 36 | constant tl=2.2 restart_s=60
Emergency-set room fan | 7.5 | E 1/80 | 12 | restart_s=2
Emergency-set fuel pump | 2.2 | E 1/80i | 14 | constant
Dead-ship fuel pump | 5.5 | E 1/80i | 40 | constant
Engine-control-room cooler | 11 | TSMKPLHAO 1/75; E 1/75 | 34 | constant
[ESB | Navigation | converter | safety 6-pulse]
UPS bridge | 2x30 | TSMKPLA 2/45; HO 1/40; E 2/45 | 44
UPS engine control | 2x30 | TSMKPLA 2/45; HO 1/40; E 2/45 | 30
UPS positioning | 2x20 | MKPL 2/55; TSA 1/40; E 1/50 | 44
Machinery battery charger | 2x12 | TSMKPLHAO 2/50; E 2/60 | 30
Radio battery charger | 2x6 | TSMKPLHAO 2/50; E 2/60 | 46
[ESB | Ventilation | motor]
Emergency galley fan | 3 | E 1/70 | 40
Battery-room fan | 2x1.5 | TSMKPLHAO 2/80; E 2/80 | 38
[ESB | Domestic | motor | habitability]
Hospital refrigeration | 2.2 | TSMKPLHAO 1/70; E 1/70 | 40 | constant
Passenger lift | 2x11 | TSMKPLHAO 1/40i; E 1/40i | 40 | constant
[ELDB | Lighting | lighting | safety]
Emergency lighting engine room P | 5 | TSMKPLHAOE 1/95 | 30
Emergency lighting engine room S | 5 | TSMKPLHAOE 1/95 | 32
Emergency lighting thruster rooms | 3 | TSMKPLHAOE 1/95 | 46
Emergency lighting accommodation | 12 | TSMKPLHAOE 1/95 | 34
Emergency lighting stairs | 6 | TSMKPLHAOE 1/95 | 34
Emergency lighting decks | 6 | TSMKPLHAO 1/40; E 1/95 | 40
Muster-station lighting | 4 | TSMKPLHAO 1/30; E 1/95 | 44 | single-phase
Helideck lighting | 5 | KPLE 1/60i | 48
[ELDB | Safety | general | safety single-phase]
Fire detection | 2 | TSMKPLHAOE 1/80 | 30
Gas detection | 1.5 | TSMKPLHAOE 1/80 | 30
Public address and alarm | 4 | TSMKPLHAO 1/30; E 1/60 | 32
Alarm and monitoring | 4 | TSMKPLHAOE 1/80 | 28
Hospital equipment | 2 | TSMKPLHAOE 1/40 | 34
[NAV | Navigation | general | safety single-phase pf=0.92]
Bridge console forward | 4 | TSMKPL 1/80; A 1/50; HO 1/30; E 1/60 | 10
Bridge console aft | 4 | MKPL 1/80; TSA 1/30; E 1/40 | 16
Radar X band | 2x2 | TSMKPL 2/80; A 1/50; E 1/80 | 12
Radar S band | 2.5 | TSMKPL 1/80; E 1/80 | 12
Gyro compasses | 1.5 | TSMKPLAE 1/80 | 10
Position reference systems | 4 | MKPL 1/85 | 12
Positioning control | 3 | MKPL 1/85; E 1/60 | 12
Internal communication | 3 | TSMKPLHAOE 1/50 | 14
Searchlight | 4x2 | M 2/60i; KPL 1/50i | 26
[NAV | Navigation | lighting | safety single-phase]
Navigation lights | 1.2 | TSMKPLE 1/90; A 1/40 | 26
[NAV | Heating | heating | pf=1.0]
Bridge window heating | 12 | TSMKPL 1/50 | 16
[RADIO | Navigation | general | safety single-phase pf=0.92]
Radio station | 3 | TSMKPLAHO 1/40; E 1/60 | 8
Satellite terminals | 3 | TSMKPLAHO 1/60; E 1/60 | 10
Ship network | 6 | TSMKPLAHO 1/70; E 1/50 | 10
Computer room cooling | 4 | TSMKPLAHOE 1/70 | 12
"""  # noqa: E501

CONVERTERS = """
[PB-P1A | Propulsion | converter | propulsion port 6-pulse shift=7.5]
Propulsion converter P1A | 1250 | T 1/84; S 1/35; M 1/25; KP 1/18; L 1/14 | 14
[PB-P1B | Propulsion | converter | propulsion port 6-pulse shift=7.5]
Propulsion converter P1B | 1250 | T 1/84; S 1/35; M 1/25; KP 1/18; L 1/14 | 14
[PB-P2A | Propulsion | converter | propulsion port 6-pulse shift=-7.5 stage=2]
Propulsion converter P2A | 1250 | T 1/84; S 1/35; M 1/25; KP 1/18; L 1/14 | 14
[PB-P2B | Propulsion | converter | propulsion port 6-pulse shift=-7.5 stage=2]
Propulsion converter P2B | 1250 | T 1/84; S 1/35; M 1/25; KP 1/18; L 1/14 | 14
[PB-S1A | Propulsion | converter | propulsion starboard 6-pulse shift=7.5]
Propulsion converter S1A | 1250 | T 1/84; S 1/35; M 1/25; KP 1/18; L 1/14 | 14
[PB-S1B | Propulsion | converter | propulsion starboard 6-pulse shift=7.5]
Propulsion converter S1B | 1250 | T 1/84; S 1/35; M 1/25; KP 1/18; L 1/14 | 14
[PB-S2A | Propulsion | converter | propulsion starboard 6-pulse shift=-7.5 stage=2]
Propulsion converter S2A | 1250 | T 1/84; S 1/35; M 1/25; KP 1/18; L 1/14 | 14
[PB-S2B | Propulsion | converter | propulsion starboard 6-pulse shift=-7.5 stage=2]
Propulsion converter S2B | 1250 | T 1/84; S 1/35; M 1/25; KP 1/18; L 1/14 | 14
[TB-F1 | Thrusters | converter | propulsion port 12-pulse]
Bow thruster 1 | 1200 | M 1/50; KP 1/45; L 1/40 | 12
[TB-F2 | Thrusters | converter | propulsion starboard 12-pulse]
Bow thruster 2 | 1200 | M 1/50; KP 1/45; L 1/40 | 12
[TB-A1 | Thrusters | converter | propulsion port active]
Azimuth thruster 1 | 1200 | M 1/40; KP 1/45; L 1/40 | 12
[TB-A2 | Thrusters | converter | propulsion starboard active]
Azimuth thruster 2 | 1200 | M 1/40; KP 1/45; L 1/40 | 12
"""
