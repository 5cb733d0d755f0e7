"""The built-in limits: one row for each quantity of the Acceptance sheet, with its basis.

This is the only place where a limit's number stands. The workbook's Acceptance sheet may change any of them
for one project; `study.checks.limits` merges the two.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Final


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitSpec:
    """One built-in limit.

    ``limit`` is in `unit` as the sheet shows it; ``choices`` is empty for a number.
    """

    key: str
    quantity: str
    limit: float | str
    unit: str
    basis: str
    choices: tuple[str, ...] = ()
    minimum: float = 0.0
    maximum: float = 1e6


_E10 = "IACS UR E10 power-supply variation; IEC 60092-101 cl. 2.8 from memory"
_PRACTICE = "common practice, no source"

_SPECS = (
    LimitSpec(
        key="close_margin", quantity="Close margin", limit=5.0, unit="%", basis=_PRACTICE, maximum=50.0
    ),
    LimitSpec(
        key="voltage_reference",
        quantity="Voltage reference",
        limit="rated voltage of consumer",
        unit="",
        basis="IEC 60092-101 cl. 2.8 from memory",
        choices=("rated voltage of consumer", "nominal of board"),
    ),
    LimitSpec(
        key="load_data_tolerance",
        quantity="Load data tolerance",
        limit=5.0,
        unit="%",
        basis=_PRACTICE,
        maximum=50.0,
    ),
    LimitSpec(
        key="intermittent_diversity",
        quantity="Intermittent diversity",
        limit=2.0,
        unit="-",
        basis="ClassNK-type load analysis: diversity 2 to 3 on intermittent load",
        minimum=1.0,
        maximum=10.0,
    ),
    LimitSpec(
        key="one_set_margin",
        quantity="One-set margin",
        limit=10.0,
        unit="%",
        basis="common practice, no source: running sets stay below 90 %",
        maximum=90.0,
    ),
    LimitSpec(
        key="set_loading",
        quantity="Set loading",
        limit=100.0,
        unit="%",
        basis="continuous rating of the set",
        maximum=200.0,
    ),
    LimitSpec(
        key="set_loss_loading",
        quantity="Loading after loss of largest set",
        limit=100.0,
        unit="%",
        basis="SOLAS II-1/41.5 and class: load shedding protects the sets left on line",
        maximum=200.0,
    ),
    LimitSpec(
        key="one_out_loading",
        quantity="Loading with one main set out",
        limit=100.0,
        unit="%",
        basis="SOLAS II-1/41.1.2: propulsion, safety and minimum habitability with any one set out",
        maximum=200.0,
    ),
    LimitSpec(
        key="emergency_duration",
        quantity="Emergency duration",
        limit=18.0,
        unit="h",
        basis="SOLAS II-1/43 (cargo ships; passenger ships 36 h, II-1/42, from memory)",
        maximum=200.0,
    ),
    LimitSpec(
        key="emergency_start",
        quantity="Emergency supply within",
        limit=45.0,
        unit="s",
        basis="SOLAS II-1/43.3.1.2",
        maximum=600.0,
    ),
    LimitSpec(key="voltage_low", quantity="Voltage below", limit=10.0, unit="%", basis=_E10, maximum=50.0),
    LimitSpec(key="voltage_high", quantity="Voltage above", limit=6.0, unit="%", basis=_E10, maximum=50.0),
    LimitSpec(
        key="frequency_deviation",
        quantity="Frequency deviation",
        limit=5.0,
        unit="%",
        basis=_E10,
        maximum=20.0,
    ),
    LimitSpec(
        key="cable_drop",
        quantity="Voltage drop to consumer",
        limit=6.0,
        unit="%",
        basis="IEC 60092-201 and -352, from memory",
        maximum=20.0,
    ),
    LimitSpec(
        key="regulation_main",
        quantity="Regulation of main sets",
        limit=2.5,
        unit="%",
        basis="ClassNK 2.4.14-2 and JEM 1274: +/-2.5 % no load to rated load at rated power factor",
        maximum=20.0,
    ),
    LimitSpec(
        key="regulation_emergency",
        quantity="Regulation of emergency sets",
        limit=3.5,
        unit="%",
        basis="ClassNK 2.4.14-2 and JEM 1274: +/-3.5 % no load to rated load at rated power factor",
        maximum=20.0,
    ),
    LimitSpec(
        key="speed_variation",
        quantity="Permanent speed variation",
        limit=5.0,
        unit="%",
        basis="ClassNK 2.4.2; IACS UR M3 from memory",
        maximum=20.0,
    ),
    LimitSpec(
        key="kw_sharing_largest",
        quantity="kW sharing, of largest set",
        limit=15.0,
        unit="%",
        basis="ClassNK 2.4.14-3, 20 to 100 % of the combined rating",
        maximum=100.0,
    ),
    LimitSpec(
        key="kw_sharing_own",
        quantity="kW sharing, of own rating",
        limit=25.0,
        unit="%",
        basis="IEC 60092-301, from memory; whichever is less",
        maximum=100.0,
    ),
    LimitSpec(
        key="kvar_sharing_largest",
        quantity="kvar sharing, of largest set",
        limit=10.0,
        unit="%",
        basis="class rule quoted in marine engineers' examination texts",
        maximum=100.0,
    ),
    LimitSpec(
        key="kvar_sharing_smallest",
        quantity="kvar sharing, of smallest set",
        limit=25.0,
        unit="%",
        basis="IEC 60092-301, from memory; whichever is less",
        maximum=100.0,
    ),
    LimitSpec(
        key="cable_loading",
        quantity="Cable loading",
        limit=100.0,
        unit="%",
        basis="IEC 60092-352 rating with its corrections",
        maximum=200.0,
    ),
    LimitSpec(
        key="cable_overload_trip",
        quantity="Overload trip against cable rating",
        limit=145.0,
        unit="%",
        basis="IEC 60364-4-43 cl. 433.1 and IEC 60092-202: I2 up to 1.45 Iz, from memory",
        minimum=100.0,
        maximum=200.0,
    ),
    LimitSpec(
        key="steering_overload",
        quantity="Overload setting of steering gear and fire pumps",
        limit=200.0,
        unit="%",
        basis="SOLAS II-1/30: where there is any, not less than twice the full-load current; fire pumps by"
        " class practice; from memory",
        minimum=100.0,
        maximum=1000.0,
    ),
    LimitSpec(
        key="transformer_loading",
        quantity="Transformer loading",
        limit=100.0,
        unit="%",
        basis="continuous rating of the transformer",
        maximum=200.0,
    ),
    LimitSpec(
        key="busbar_loading",
        quantity="Busbar and tie loading",
        limit=100.0,
        unit="%",
        basis="continuous rating of the busbar or tie",
        maximum=200.0,
    ),
    LimitSpec(
        key="supply_loading",
        quantity="Shore and converter supply loading",
        limit=100.0,
        unit="%",
        basis="rated current of the supply",
        maximum=200.0,
    ),
    LimitSpec(
        key="breaking_rating",
        quantity="Breaking capacity judged by",
        limit="Ics",
        unit="",
        basis="class practice for main and essential circuits, from memory",
        choices=("Ics", "Icu"),
    ),
    LimitSpec(
        key="earth_fault_standing",
        quantity="Earth-fault current left standing",
        limit=5.0,
        unit="A",
        basis="class practice above 1 kV: an alarm may do up to about 5 A, above it the fault is tripped; DNV"
        " Pt.4 Ch.8 from memory; below 1 kV common practice, no source",
        maximum=100.0,
    ),
    LimitSpec(
        key="earth_fault_detection",
        quantity="Earth fault detected from",
        limit=1.0,
        unit="A",
        basis="common practice, no source: what a core-balance transformer tells for certain; above 1 kV",
        maximum=100.0,
    ),
    LimitSpec(
        key="reverse_power_least",
        quantity="Reverse power, least",
        limit=2.0,
        unit="%",
        basis="ClassNK: 2 to 15 % of rated kW; ABS 4-8-2/9.11: 2 to 6 % turbines, 8 to 15 % diesel engines",
        maximum=50.0,
    ),
    LimitSpec(
        key="reverse_power_most",
        quantity="Reverse power, most",
        limit=15.0,
        unit="%",
        basis="ClassNK: 2 to 15 % of rated kW; ABS 4-8-2/9.11: 2 to 6 % turbines, 8 to 15 % diesel engines",
        maximum=50.0,
    ),
    LimitSpec(
        key="reverse_power_delay",
        quantity="Reverse power delay",
        limit=10.0,
        unit="s",
        basis="ClassNK guidance: about 10 s",
        maximum=60.0,
    ),
    LimitSpec(
        key="undervoltage_least",
        quantity="Undervoltage trip, least",
        limit=35.0,
        unit="%",
        basis="class practice: 70 to 35 % with a delay, from memory",
        maximum=100.0,
    ),
    LimitSpec(
        key="undervoltage_most",
        quantity="Undervoltage trip, most",
        limit=70.0,
        unit="%",
        basis="class practice: 70 to 35 % with a delay, from memory",
        maximum=100.0,
    ),
    LimitSpec(
        key="overvoltage_most",
        quantity="Overvoltage trip, most",
        limit=130.0,
        unit="%",
        basis=_PRACTICE,
        minimum=100.0,
        maximum=200.0,
    ),
    LimitSpec(
        key="underfrequency_least",
        quantity="Underfrequency trip, least",
        limit=85.0,
        unit="%",
        basis=_PRACTICE,
        maximum=100.0,
    ),
    LimitSpec(
        key="overfrequency_most",
        quantity="Overfrequency trip, most",
        limit=115.0,
        unit="%",
        basis="IACS UR M3: overspeed device of sets at 115 %, from memory",
        minimum=100.0,
        maximum=150.0,
    ),
    LimitSpec(
        key="preferential_least",
        quantity="Preferential trip, least",
        limit=95.0,
        unit="%",
        basis="marine engineers' examination texts: 95 to 110 % of rated current",
        maximum=200.0,
    ),
    LimitSpec(
        key="preferential_most",
        quantity="Preferential trip, most",
        limit=110.0,
        unit="%",
        basis="marine engineers' examination texts: 95 to 110 % of rated current",
        maximum=200.0,
    ),
    LimitSpec(
        key="preferential_delay",
        quantity="Preferential trip delay",
        limit=15.0,
        unit="s",
        basis="marine engineers' examination texts: 5, 10 and 15 s",
        maximum=60.0,
    ),
    LimitSpec(
        key="set_long_time",
        quantity="Overcurrent setting of sets",
        limit=115.0,
        unit="%",
        basis="ABS 4-8-2/9.11: long-time pick-up up to 115 % of full load",
        minimum=100.0,
        maximum=200.0,
    ),
    LimitSpec(
        key="set_overload_time",
        quantity="Overload of 150 % cleared within",
        limit=120.0,
        unit="s",
        basis="IACS UR E13: a set carries 150 % for 2 min; from memory",
        maximum=600.0,
    ),
    LimitSpec(
        key="set_short_time",
        quantity="Short-time setting of sets, of sustained current",
        limit=80.0,
        unit="%",
        basis="ship electrical textbook, Nippon Foundation library: about 80 % of the sustained current",
        maximum=100.0,
    ),
    LimitSpec(
        key="set_differential",
        quantity="Differential protection from",
        limit=1500.0,
        unit="kVA",
        basis="class practice for sets of 1500 kVA and more, from memory",
        maximum=1e5,
    ),
    LimitSpec(
        key="grading_margin",
        quantity="Time left for grading",
        limit=0.01,
        unit="s",
        basis="half a cycle beyond bands that hold every tolerance; common practice, no source",
        maximum=1.0,
    ),
    LimitSpec(
        key="fault_clearing",
        quantity="Least fault cleared within",
        limit=5.0,
        unit="s",
        basis="IEC 60364-4-41 cl. 411.3.2.3, distribution circuits, from memory",
        maximum=60.0,
    ),
    LimitSpec(
        key="motor_starting_time",
        quantity="Starting time of motors where not given",
        limit=3.0,
        unit="s",
        basis="pumps and fans started direct, common practice, no source",
        maximum=60.0,
    ),
    LimitSpec(
        key="transient_low",
        quantity="Transient voltage below",
        limit=15.0,
        unit="%",
        basis="class practice: -15/+20 % at the main busbars",
        maximum=50.0,
    ),
    LimitSpec(
        key="transient_high",
        quantity="Transient voltage above",
        limit=20.0,
        unit="%",
        basis="class practice: -15/+20 % at the main busbars",
        maximum=50.0,
    ),
    LimitSpec(
        key="recovery_time",
        quantity="Voltage recovery time",
        limit=1.5,
        unit="s",
        basis="Lloyd's Register naval rules V2 P9 C2 6.4.3",
        maximum=30.0,
    ),
    LimitSpec(
        key="thd",
        quantity="Total harmonic distortion",
        limit=8.0,
        unit="%",
        basis="IACS UR E24",
        maximum=50.0,
    ),
    LimitSpec(
        key="single_harmonic",
        quantity="Single harmonic",
        limit=5.0,
        unit="%",
        basis="DNV Pt.4 Ch.8 and ABS 4-8-2, from memory",
        maximum=50.0,
    ),
)

BUILT_IN: Final[Mapping[str, LimitSpec]] = MappingProxyType({spec.key: spec for spec in _SPECS})
