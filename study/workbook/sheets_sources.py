"""The sheets of what feeds the plant: gensets, shore and converter supplies, synchronous motors."""

from __future__ import annotations

from typing import get_args

from study.model.sources import (
    ConverterControl,
    GensetService,
)
from study.workbook.columns import (
    AMPERES,
    KILOWATTS,
    LARGE,
    REQUIRED,
    UNKNOWN,
    SheetSpec,
    above,
    between,
    choice,
    key,
    number,
    ratio,
    reference,
    typical,
)
from study.workbook.machine_columns import (
    EXCITATION_COLUMNS,
    GOVERNOR_COLUMNS,
    LV_SET,
    MACHINE_COLUMNS,
    PRACTICE,
    RATING_COLUMNS,
    REDUNDANCY_GROUP,
    REGULATOR_COLUMNS,
)

BOARDS = ("Boards",)

GENSETS = SheetSpec(
    name="Gensets",
    row_is="a generating set",
    hint="Reactances are per unit of the set's own rated kVA and voltage.",
    names_equipment=True,
    columns=(
        key("Genset", "name, unique over all equipment"),
        reference("Board", "board", BOARDS, "board that the set feeds", **REQUIRED),
        *RATING_COLUMNS,
        number("Engine power", "kW", "p_engine_kw", KILOWATTS, "rated, at the coupling", **REQUIRED),
        number(
            "Alternator efficiency", "%", "alternator_efficiency", between(50.0, 100.0), "at rated load",
            usual=between(80.0, 99.0), **typical(95.0, LV_SET),
        ),
        choice(
            "Service", "service", get_args(GensetService), "emergency sets count in no other mode's reserve",
            **typical("main", PRACTICE),
        ),
        number(
            "Minimum engine load", "%", "min_engine_load", between(0.0, 100.0),
            "of rated engine power, in continuous running",
            **typical(25.0, PRACTICE),
        ),
        number(
            "Largest engine load step", "%", "max_load_step", above(0.0, 100.0),
            "of rated engine power, taken at once from no load",
            usual=between(10.0, 100.0),
            **typical(33.0, "IACS UR M3 figure for about 24 bar mean effective pressure, from memory"),
        ),
        number(
            "Start delay", "s", "start_delay_s", between(0.0, 600.0), "from the order to the closed breaker",
            **typical(30.0, "class rules: within 30 s, at most 45 s; from memory of SOLAS II-1/41 to 43"),
        ),
        number(
            "Starts at island load", "%", "starts_at_island_load", between(1.0, 200.0),
            "of the running sets' rated kW; a standby set starts there; blank: by hand",
        ),
        REDUNDANCY_GROUP,
        *MACHINE_COLUMNS,
        *EXCITATION_COLUMNS,
        *REGULATOR_COLUMNS,
        *GOVERNOR_COLUMNS,
    ),
)  # fmt: skip

SHORE_SUPPLIES = SheetSpec(
    name="Shore supplies",
    row_is="a shore connection",
    hint="Fault levels as the port states them, at the connection box.",
    names_equipment=True,
    columns=(
        key("Supply", "name, unique over all equipment"),
        reference("Board", "board", BOARDS, "board that the connection feeds", **REQUIRED),
        number(
            "Rated voltage", "V", "u_rated_v", above(0.0, 36_000.0), "line to line", **REQUIRED,
        ),
        number("Frequency", "Hz", "f_hz", between(40.0, 70.0), "of the port's network", **REQUIRED),
        number("Rated current", "A", "i_rated_a", AMPERES, "of the connection", **REQUIRED),
        number(
            "Fault level max", "MVA", "fault_level_max_mva", LARGE,
            "initial three-phase, for ratings; blank: unknown", **UNKNOWN,
        ),
        number(
            "Fault level min", "MVA", "fault_level_min_mva", LARGE,
            "initial three-phase, for protection; blank: unknown", **UNKNOWN,
        ),
        number(
            "R/X", "", "r_over_x", between(0.0, 10.0), "of the port's network",
            **typical(0.1, "IEC 60909-0, network feeder with unknown resistance, from memory"),
        ),
    ),
)  # fmt: skip

GRID_FORMING = (("control", ("grid forming",)),)

CONVERTER_SUPPLIES = SheetSpec(
    name="Converter supplies",
    row_is="a battery, shaft generator or fuel cell that feeds through a converter",
    hint="Grid forming: makes its own voltage; grid following: feeds its set power.",
    names_equipment=True,
    columns=(
        key("Supply", "name, unique over all equipment"),
        reference("Board", "board", BOARDS, "board that the converter feeds", **REQUIRED),
        number(
            "Rated apparent power", "kVA", "s_rated_kva", above(0.0, 200_000.0), "of the converter",
            **REQUIRED,
        ),
        choice("Control", "control", get_args(ConverterControl), "what the converter controls", **REQUIRED),
        number(
            "Set power", "kW", "p_set_kw", between(-200_000.0, 200_000.0),
            "fed into the board; negative: charging",
        ),
        number(
            "Set reactive power", "kvar", "q_set_kvar", between(-200_000.0, 200_000.0), "fed into the board",
        ),
        number(
            "Voltage droop", "%", "voltage_droop_pu", between(0.0, 20.0),
            "fall from no load to rated kvar, % of nominal voltage of the board",
            when=GRID_FORMING, **typical(3.0, "as the sets; common practice, no source"),
        ),
        number(
            "Speed droop", "%", "speed_droop_pu", between(0.0, 20.0),
            "fall from no load to rated kVA as kW, % of rated frequency",
            when=GRID_FORMING, **typical(4.0, "as the sets; common practice, no source"),
        ),
        number(
            "Stored energy", "kWh", "stored_energy_kwh", LARGE, "usable; blank: unknown or none",
            **UNKNOWN,
        ),
        number(
            "Short-circuit current", "x In", "short_circuit_current", between(0.0, 10.0),
            "maker's figure; blank: unknown", **UNKNOWN,
        ),
        number(
            "Short-circuit duration", "s", "short_circuit_duration_s", LARGE, "blank: unknown",
            **UNKNOWN,
        ),
        reference(
            "Spectrum", "spectrum", ("Spectra",), "of the sheet Spectra; blank: unknown", **UNKNOWN,
        ),
    ),
)  # fmt: skip

SYNCHRONOUS_MOTORS = SheetSpec(
    name="Synchronous motors",
    row_is="a synchronous motor",
    hint="Reactances are per unit of the motor's own rated kVA and voltage.",
    names_equipment=True,
    columns=(
        key("Motor", "name, unique over all equipment"),
        reference("Board", "board", BOARDS, "board that feeds the motor", **REQUIRED),
        *RATING_COLUMNS,
        *MACHINE_COLUMNS,
        *EXCITATION_COLUMNS,
        number("Rated output", "kW", "p_output_kw", KILOWATTS, "at the shaft", **REQUIRED),
        ratio(
            "Efficiency", "efficiency", between(0.3, 1.0),
            "at rated output, 0 to 1; head the column [%] for per cent",
            **typical(0.95, "large synchronous motors, 0.94 to 0.97; common practice, no source"),
        ),
    ),
)  # fmt: skip
