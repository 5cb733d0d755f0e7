"""The consumers of the demonstration service vessel.

Columns: name | kW | demand at sea, manoeuvring, station keeping, cargo, harbour, on shore supply, in an
emergency | cable m | words | description.
"""

from __future__ import annotations

THRUSTERS_AND_DECK = """
[MSB-P | Thrusters | converter]
Bow thruster | 320 | - 1/42 1/60 - - - - | 40 | 12-pulse port | 330 kW drive behind a 12-pulse rectifier
[MSB-S | Thrusters | converter]
Stern thruster | 240 | - 1/40 1/50 - - - - | 45 | active starboard | Drive with active front end
[MSB-S | Deck | converter]
Towing winch | 110 | 1/15i 1/30i 1/20i - - - - | 52 | dc-link starboard fused regenerates stage=1 | Frequency-controlled, brakes into the board through a regenerative rectifier
[DECK | Deck | motor]
Deck crane pump 1 | 55 | - - 1/40i 1/70i 1/40i - - | 30 | star-delta starboard constant ist=6.8 stage=1
Deck crane pump 2 | 55 | - - - 1/70i - - - | 34 | star-delta starboard constant ist=6.8 stage=1
Tugger winch | 2x22 | - - 1/50i 2/60i 1/50i - - | 28 | constant tl=2.0
Capstan | 2x18.5 | - 2/50i - - - - - | 36 | constant tl=2.2 stage=1
Anchor windlass | 45 | - 1/50i - - - - - | 44 | starboard constant tl=2.2
Deck machinery cooling pump | 5.5 | - 1/80 1/80 1/80 - - - | 26
[DECK | Safety | motor]
Rescue-boat davit | 15 | - - 1/60o - - - - | 38 | safety tl=2.0
[DECK | Cargo | motor]
Hose reel | 2x7.5 | - - - 2/40i - - - | 30 | constant
"""  # noqa: E501

CARGO = """
[CARGO | Cargo | motor]
Mud pump 1 | 110 | - - - 1/100 - - - | 16 | absorbed=104 drop_out=65 star-delta port eff=0.952 pf=0.87 ist=6.7 stage=2 inertia=1.4 start_s=5
Mud pump 2 | 110 | - - - 1/100 - - - | 18 | absorbed=104 drop_out=65 star-delta port eff=0.952 pf=0.87 ist=6.7 stage=2 inertia=1.4 start_s=5
Fuel cargo pump 1 | 75 | - - - 1/92 - - - | 20 | star-delta port eff=0.946 pf=0.87 ist=6.7 stage=2 inertia=1.4 start_s=5
Fuel cargo pump 2 | 75 | - - - 1/92 - - - | 22 | star-delta port eff=0.946 pf=0.87 ist=6.7 stage=2 inertia=1.4 start_s=5
Brine pump | 75 | - - - 1/90i - - - | 22 | star-delta port eff=0.946 pf=0.87 ist=6.7 stage=2 inertia=1.4 start_s=5
Fresh-water cargo pump | 37 | - - - 1/85 - - - | 24 | star-delta port ist=6.7 stage=2 inertia=1.4 start_s=5
Tank cleaning pump | 30 | 1/85i - - - - - - | 24 | star-delta stage=1
Cargo hydraulic pump | 18.5 | - - - 1/70i - - - | 18 | constant
Stripping pump | 2x7.5 | - - - 1/80i - - - | 22 | constant
Mud tank agitator | 4x5.5 | - - 4/60 4/70 - - - | 32 | constant stage=2
[MSB-P | Cargo | motor | port]
Bulk air compressor 1 | 132 | - - - 1/92 - - - | 30 | soft-starter eff=0.954 pf=0.88 ist=6.5 rpm=1785 inertia=2.6 stage=2
Ballast pump 1 | 45 | 1/80i - 1/80i 1/85 1/80i - - | 26 | star-delta
[MSB-S | Cargo | motor | starboard]
Bulk air compressor 2 | 132 | - - - 1/92o - - - | 34 | soft-starter eff=0.954 pf=0.88 ist=6.5 rpm=1785 inertia=2.6 stage=2
Ballast pump 2 | 45 | - - 1/80i 1/85i - - - | 28 | star-delta
[CARGO | Cargo | general]
Bulk air dryer | 2x6 | - - - 2/80 - - - | 24 | pf=0.88 stage=2
"""  # noqa: E501

ENGINE_ROOM = """
[ER-P | Engine auxiliaries | motor]
Main sea-water pump 1 | 22 | 1/85 1/85 1/85 1/60 - - - | 14 | propulsion port ist=6.8
Low-temperature water pump 1 | 15 | 1/85 1/85 1/85 1/85 - - - | 14 | propulsion port
High-temperature water pump 1 | 7.5 | 1/85 1/85 1/85 - - - - | 14 | propulsion port
Propulsion lubricating pump 1 | 11 | 1/80 1/80 1/80 - - - - | 16 | propulsion port constant
Gearbox pump 1 | 5.5 | 1/70 1/70 1/70 - - - - | 18 | propulsion port constant
Pitch hydraulic pump 1 | 7.5 | 1/60 1/75 1/75 - - - - | 20 | propulsion port constant
Fuel separator 1 | 5.5 | 1/80 - - - 1/80i - - | 16 | port constant start_s=9
Lubricating-oil separator 1 | 4 | 1/75 1/75 1/75 - - - - | 16 | port constant start_s=8
Start-air compressor 1 | 11 | 1/90i 1/90i 1/90i - - - - | 18 | port constant tl=2.2
Fuel transfer pump | 2x5.5 | 1/85i 1/85i - - 1/85i - - | 20 | constant
[ER-P | Ventilation | motor]
Engine-room fan port | 15 | 1/85 1/85 1/85 1/85 1/60 1/50 - | 26 | propulsion port ist=6.5 start_s=7 inertia=0.9
[ER-P | Heating | heating]
Engine preheater 1 | 18 | - - - 1/60i 1/70 1/60 - | 18 | port pf=1.0 stage=1
[ER-S | Engine auxiliaries | motor]
Main sea-water pump 2 | 22 | 1/85 1/85 1/85 1/60 - - - | 14 | propulsion starboard ist=6.8
Low-temperature water pump 2 | 15 | 1/85 1/85 1/85 1/85 - - - | 14 | propulsion starboard
High-temperature water pump 2 | 7.5 | 1/85 1/85 1/85 - - - - | 14 | propulsion starboard
Propulsion lubricating pump 2 | 11 | 1/80 1/80 1/80 - - - - | 16 | propulsion starboard constant
Gearbox pump 2 | 5.5 | 1/70 1/70 1/70 - - - - | 18 | propulsion starboard constant
Pitch hydraulic pump 2 | 7.5 | 1/60 1/75 1/75 - - - - | 20 | propulsion starboard constant
Fuel separator 2 | 5.5 | - 1/80 1/80 - - - - | 16 | starboard constant start_s=9
Lubricating-oil separator 2 | 4 | 1/75 1/75 1/75 - - - - | 16 | starboard constant start_s=8
Start-air compressor 2 | 11 | - 1/90i - - - - - | 18 | starboard constant tl=2.2
Working-air compressor | 22 | 1/80i - 1/80i 1/80i 1/80i - - | 22 | star-delta constant change_s=4 stage=2
[ER-S | Ventilation | motor]
Engine-room fan starboard | 15 | 1/85 1/85 1/85 1/85 1/60 1/50 - | 26 | propulsion starboard ist=6.5 start_s=7 inertia=0.9
[ER-S | Heating | heating]
Engine preheater 2 | 18 | - - - 1/60i 1/70 1/60 - | 18 | starboard pf=1.0 stage=1
[ER-P | Engine auxiliaries | general | pf=0.8]
Oily-water separator | 4 | 1/70i - - - - - - | 20
Workshop | 15 | 1/30i - - - 1/40i 1/40i - | 22 | stage=1
[ER-S | Domestic | general]
Fresh-water maker | 15 | 1/90 - 1/90 - - - - | 22 | pf=0.85 stage=1
[ER-S | Domestic | motor | habitability]
Sewage plant | 7.5 | 1/70i 1/70i 1/70i 1/70i 1/70i 1/60i - | 24
Fresh-water hydrophore pump | 2x4 | 1/80i 1/80i 1/80i 1/80i 1/80i 1/80i - | 20
[MSB-P | Safety | motor]
Fire pump 1 | 75 | 1/90o 1/90o 1/90o 1/90o 1/90o - - | 32 | star-delta safety port ist=6.8 eff=0.945 pf=0.87
[MSB-S | Safety | motor]
Fire pump 2 | 75 | 1/90o 1/90o 1/90o 1/90o 1/90o 1/90o - | 34 | star-delta safety starboard ist=6.8 eff=0.945 pf=0.87
[ER-S | Safety | motor]
Bilge pump | 11 | 1/80i 1/80i 1/80i 1/80i 1/80i 1/80i - | 18 | safety
[MSB-P | Steering | motor]
Steering gear 1 | 18.5 | 1/30 1/40 1/30 - - - - | 62 | steering constant eff=0.92 pf=0.84
"""  # noqa: E501

ACCOMMODATION = """
[HVAC | Ventilation | motor]
Air-conditioning compressor 1 | 45 | 1/85 1/85 1/85 1/85 1/70 1/70 - | 18 | star-delta habitability constant change_s=4 stage=2 eff=0.94 pf=0.86
Air-conditioning compressor 2 | 45 | - 1/40 1/50 1/40 - - - | 20 | star-delta habitability constant change_s=4 stage=2 eff=0.94 pf=0.86
Air-handling unit | 3x11 | 3/85 3/85 3/85 3/85 2/85 2/85 - | 22 | habitability start_s=6 inertia=0.7 stage=2
Cabin exhaust fan | 4x2.2 | 4/80 4/80 4/80 4/80 3/80 3/80 - | 24 | habitability stage=2
Cargo-hold fan | 4x5.5 | 2/80 2/80 2/80 4/85 - - - | 34 | stage=1
Chilled-water pump | 2x7.5 | 1/85 1/85 1/85 1/85 1/80 1/80 - | 18 | habitability
[HVAC | Heating | heating]
Electric reheater | 4x12 | 1/50 1/50 1/50 1/50 1/50 1/50 - | 22 | pf=1.0 stage=1
[GALLEY | Galley | heating | stage=1]
Galley range | 24 | 1/50 1/30 1/50 1/50 1/40i 1/40i - | 10 | habitability pf=1.0
Galley oven | 2x12 | 1/50 1/40i 1/50 1/50 1/40i 1/40i - | 10 | fused pf=1.0
Dishwasher | 9 | 1/50i 1/50i 1/50i 1/50i 1/50i 1/50i - | 10 | pf=0.98
[GALLEY | Galley | motor]
Galley hood fan | 2x1.5 | 2/80 2/80 2/80 2/80 1/80 1/80 - | 14 | stage=1
[GALLEY | Domestic | motor]
Provision refrigeration | 2x7.5 | 1/70 1/70 1/70 1/70 1/60 1/60 - | 14 | habitability constant
[GALLEY | Domestic | heating]
Laundry machine | 3x8 | 2/40i - 2/40i 2/40i 1/40i 1/40i - | 20 | fused pf=0.98 stage=1
[GALLEY | Heating | heating]
Calorifier | 2x15 | 1/60 1/50 1/60 1/60 1/60 1/60 - | 22 | habitability pf=1.0 stage=1
[ACC-1 | Lighting | lighting | habitability port]
Cabin lighting 1 | 9 | 1/75 1/75 1/75 1/75 1/65 1/65 - | 18 | pf=0.95
Alleyway lighting 1 | 4 | 1/95 1/95 1/95 1/95 1/95 1/95 - | 22 | single-phase
[ACC-1 | Domestic | general]
Cabin sockets 1 | 8 | 1/60 1/50 1/60 1/60 1/50 1/50 - | 18 | habitability port pf=0.9
[ACC-1 | Heating | heating]
Cabin heaters 1 | 12 | 1/70 1/60 1/70 1/70 1/60 1/60 - | 20 | port pf=1.0 stage=1
[ACC-1 | Galley | general]
Pantry 1 | 3.5 | 1/50i 1/50i 1/50i 1/50i 1/50i 1/50i - | 20 | port single-phase fused stage=2
[ACC-2 | Lighting | lighting | habitability starboard]
Cabin lighting 2 | 9 | 1/75 1/75 1/75 1/75 1/65 1/65 - | 18 | pf=0.95
Alleyway lighting 2 | 4 | 1/95 1/95 1/95 1/95 1/95 1/95 - | 22 | single-phase
[ACC-2 | Domestic | general]
Cabin sockets 2 | 8 | 1/60 1/50 1/60 1/60 1/50 1/50 - | 18 | habitability starboard pf=0.9
[ACC-2 | Heating | heating]
Cabin heaters 2 | 12 | 1/70 1/60 1/70 1/70 1/60 1/60 - | 20 | starboard pf=1.0 stage=1
[ACC-2 | Galley | general]
Pantry 2 | 3.5 | 1/50i 1/50i 1/50i 1/50i 1/50i 1/50i - | 20 | starboard single-phase fused stage=2
[ER-LT | Lighting | lighting]
Engine-room lighting | 12 | 1/95 1/95 1/95 1/95 1/80 1/80 - | 16 | safety
[ER-LT | Engine auxiliaries | general]
Engine-room sockets | 6 | 1/40i 1/40i 1/40i 1/40i 1/40i 1/40i - | 16 | stage=1
[LDB-S | Lighting | lighting]
Deck lighting | 8 | 1/25 1/80 1/80 1/90 1/70 1/70 - | 40
[LDB-P | Lighting | lighting]
Searchlights | 2x2 | - 2/50i 1/50i - - - - | 44 | single-phase
[LDB-P | Domestic | general]
Entertainment and computers | 7 | 1/60 1/60 1/60 1/60 1/50 1/50 - | 30 | single-phase pf=0.92
[LDB-S | Domestic | general]
Gymnasium and hospital | 4 | 1/40i - 1/40i 1/40i - - - | 26 | single-phase
"""  # noqa: E501

EMERGENCY = """
[ESB | Safety | motor | safety]
Emergency fire pump | 45 | 1/90o 1/90o 1/90o 1/90o 1/90o 1/90o 1/85 | 46 | star-delta ist=6.8 eff=0.938 pf=0.87 restart_s=20 amps=72 start_pf=0.3 tk=2.5
Emergency bilge pump | 11 | 1/80i 1/80i 1/80i 1/80i 1/80i 1/80i 1/80 | 36
Quick-closing and watertight doors | 5.5 | 1/60o 1/60o 1/60o 1/60o 1/60o 1/60o 1/60i | 40 | constant
Water-mist pump | 30 | - - - - - - 1/80o | 34 | star-delta ist=6.8 change_s=4
[ESB | Steering | motor]
Steering gear 2 | 18.5 | - 1/40 1/30 - - - 1/40 | 58 | steering constant eff=0.92 pf=0.84 restart_s=5
[ESB | Ventilation | motor]
Emergency-set fan | 3 | - - - - - - 1/80 | 10 | safety
[ESB | Engine auxiliaries | motor]
Emergency air compressor | 5.5 | - - - - - - 1/80i | 34 | constant tl=2.2 restart_s=60
[ESB | Navigation | converter]
Radio and DP battery charger | 2x8 | 2/60 2/60 2/70 2/60 1/60 1/60 2/70 | 28 | 6-pulse safety pf=0.9
[ESB | Engine auxiliaries | converter]
Machinery battery charger | 8 | 1/60 1/60 1/60 1/60 1/60 1/60 1/70 | 26 | 6-pulse safety pf=0.9
[ELDB | Lighting | lighting | safety]
Emergency lighting engine room | 5 | 1/95 1/95 1/95 1/95 1/95 1/95 1/95 | 24 | single-phase
Emergency lighting accommodation | 6 | 1/95 1/95 1/95 1/95 1/95 1/95 1/95 | 22
Muster and lifeboat lighting | 2.5 | 1/30 1/30 1/30 1/30 1/30 1/30 1/95 | 30 | single-phase
[ELDB | Safety | general | safety single-phase]
Fire detection and alarms | 2 | 1/70 1/70 1/70 1/70 1/70 1/70 1/90 | 20
Public address | 1.5 | 1/30 1/30 1/30 1/30 1/30 1/30 1/60 | 20
[NAV | Navigation | general | safety single-phase pf=0.92]
Bridge consoles | 4 | 1/70 1/80 1/80 1/40 1/30 1/30 1/60 | 8
Radar | 2x1.5 | 2/80 2/80 1/80 - - - 1/80 | 10
Positioning system | 2x1.5 | - 2/80 2/90 - - - - | 10
[NAV | Navigation | lighting]
Navigation lights | 0.8 | 1/90 1/90 1/90 1/30 1/30 1/30 1/90 | 14 | safety single-phase
[NAV | Heating | heating]
Bridge window heating | 3 | 1/50 1/50 1/50 - - - - | 12 | single-phase pf=1.0
"""  # noqa: E501
