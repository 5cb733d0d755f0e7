"""The sheets of boards and what joins them: transformers, cables, ties, reactors; and filters."""

from __future__ import annotations

from typing import get_args

from study.model.branches import BoardRole, CableCores, Duty, Earthing, FilterKind
from study.workbook import typical as rule
from study.workbook.columns import (
    AMPERES,
    KILOAMPERES,
    KILOWATTS,
    LARGE,
    REQUIRED,
    UNKNOWN,
    Bounds,
    Column,
    SheetSpec,
    above,
    between,
    choice,
    derived,
    integer,
    key,
    number,
    ratio,
    reference,
    text,
    typical,
    yes_no,
)

PRACTICE = "common practice, no source"
BOARD = ("Boards",)
SOURCES = ("Gensets", "Shore supplies", "Converter supplies")
TRANSFORMER_SHEETS = ("Transformers", "Three-winding transformers")
CABLE_ENDS = (*BOARD, *SOURCES, "Synchronous motors", *TRANSFORMER_SHEETS, "Loads")
VOLTAGE = above(0.0, 36_000.0)
DRY_TYPE = "fit to makers' dry-type lists, 10 to 3000 kVA; common practice, no source"
INSULATIONS = ("PVC", "EPR", "HEPR", "XLPE", "halogen-free", "silicone")

BOARDS = SheetSpec(
    name="Boards",
    row_is="a board or board section",
    hint="Withstand figures are the maker's and are never assumed.",
    names_equipment=True,
    required=True,
    columns=(
        key("Board", "name, unique over all equipment"),
        number("Nominal voltage", "V", "u_nominal_v", VOLTAGE, "line to line", **REQUIRED),
        choice("Role", "role", get_args(BoardRole), "what the board is for", **REQUIRED),
        number("Busbar rated current", "A", "busbar_rated_a", AMPERES, "blank: unknown", **UNKNOWN),
        number(
            "Peak withstand", "kA", "peak_withstand_ka", KILOAMPERES, "Ipk, maker's figure; blank: unknown",
            **UNKNOWN,
        ),
        number(
            "Short-time withstand", "kA", "short_time_withstand_ka", KILOAMPERES,
            "Icw, maker's figure; blank: unknown", **UNKNOWN,
        ),
        number(
            "Short-time duration", "s", "short_time_duration_s", above(0.0, 60.0),
            "of the short-time withstand; blank: unknown", **UNKNOWN,
        ),
        choice(
            "System earthing", "earthing", get_args(Earthing), "of the neutral of this system",
            **typical("insulated", "usual on ships below 1 kV; common practice, no source"),
        ),
        number("Earthing resistor", "ohm", "earthing_resistor_ohm", LARGE, "blank: none"),
        number("Resistor rating", "A", "resistor_rating_a", AMPERES, "blank: unknown", **UNKNOWN),
        number("Resistor time", "s", "resistor_time_s", LARGE, "of the rating; blank: unknown", **UNKNOWN),
        text("Redundancy group", "redundancy_group", "name of the group that is lost together; blank: none"),
    ),
)  # fmt: skip

TRANSFORMERS = SheetSpec(
    name="Transformers",
    row_is="a two-winding transformer, or several equal ones in parallel",
    hint="Losses and powers are those of one unit. From is the side that feeds.",
    names_equipment=True,
    columns=(
        key("Transformer", "name, unique over all equipment"),
        reference("From", "from_board", BOARD, "board on the primary side", **REQUIRED),
        reference("To", "to_board", BOARD, "board on the secondary side", **REQUIRED),
        number("Rated power", "kVA", "s_rated_kva", above(0.0, 200_000.0), "of one unit", **REQUIRED),
        number("Primary voltage", "V", "u_primary_v", VOLTAGE, "rated, line to line", **REQUIRED),
        number("Secondary voltage", "V", "u_secondary_v", VOLTAGE, "rated, line to line", **REQUIRED),
        number(
            "Short-circuit voltage", "%", "u_k_pu", above(0.0, 50.0), "uk, of rated voltage",
            usual=between(1.0, 20.0), **REQUIRED,
        ),
        number(
            "Copper loss", "kW", "copper_loss_kw", KILOWATTS, "of one unit, at rated current and 75 °C",
            **derived(rule.copper_loss, "4.5 % x kVA^-0.2, at most 0.8 of uk", DRY_TYPE),
        ),
        number(
            "Iron loss", "kW", "iron_loss_kw", between(0.0, 100_000.0), "of one unit, at rated voltage",
            **derived(rule.iron_loss, "1.1 % x kVA^-0.22", DRY_TYPE),
        ),
        text(
            "Vector group", "vector_group", "like Dyn11: windings with capitals first, then the clock number",
            pattern=r"[DYZ]N?[dyz]n?\d{1,2}", **typical("Dyn11", PRACTICE),
        ),
        integer("Units in parallel", "units", between(1, 50), "equal transformers", absent=1),
        number(
            "Tap", "%", "tap_pu", between(-20.0, 20.0),
            "+ : more primary turns, lower secondary voltage", absent=0.0,
        ),
        number(
            "X0/X1", "", "x0_over_x1", above(0.0, 20.0), "zero- to positive-sequence reactance",
            **typical(0.95, "IEC 60909-4, star-delta core type, from memory"),
        ),
        number(
            "R0/R1", "", "r0_over_r1", above(0.0, 20.0), "zero- to positive-sequence resistance",
            **typical(1.0, "IEC 60909-4, star-delta core type, from memory"),
        ),
        number(
            "Inrush current", "x In", "inrush_current", above(0.0, 50.0), "first peak, of rated peak",
            **typical(10.0, "8 to 12 times rated current; common practice, no source"),
        ),
        number(
            "Inrush decay", "s", "inrush_decay_s", above(0.0, 10.0), "time constant of the inrush",
            **typical(0.1, PRACTICE),
        ),
    ),
)  # fmt: skip


def _uk(name: str, field: str) -> Column:
    hint = "of the lesser rated power of the two windings"
    return number(name, "%", field, above(0.0, 50.0), hint, usual=between(1.0, 30.0), **REQUIRED)


THREE_WINDING = SheetSpec(
    name="Three-winding transformers",
    row_is="a three-winding transformer",
    hint="Short-circuit voltages and copper losses are on the lesser rated power of the two windings.",
    names_equipment=True,
    columns=(
        key("Transformer", "name, unique over all equipment"),
        reference("Primary board", "primary_board", BOARD, "", older=("Primary",), **REQUIRED),
        reference("Secondary board", "secondary_board", BOARD, "", older=("Secondary",), **REQUIRED),
        reference("Tertiary board", "tertiary_board", BOARD, "", older=("Tertiary",), **REQUIRED),
        number("Primary power", "kVA", "s_primary_kva", above(0.0, 200_000.0), "rated", **REQUIRED),
        number("Secondary power", "kVA", "s_secondary_kva", above(0.0, 200_000.0), "rated", **REQUIRED),
        number("Tertiary power", "kVA", "s_tertiary_kva", above(0.0, 200_000.0), "rated", **REQUIRED),
        number("Primary voltage", "V", "u_primary_v", VOLTAGE, "rated, line to line", **REQUIRED),
        number("Secondary voltage", "V", "u_secondary_v", VOLTAGE, "rated, line to line", **REQUIRED),
        number("Tertiary voltage", "V", "u_tertiary_v", VOLTAGE, "rated, line to line", **REQUIRED),
        _uk("Short-circuit voltage primary-secondary", "u_k_primary_secondary_pu"),
        _uk("Short-circuit voltage primary-tertiary", "u_k_primary_tertiary_pu"),
        _uk("Short-circuit voltage secondary-tertiary", "u_k_secondary_tertiary_pu"),
        number(
            "Copper loss primary-secondary", "kW", "copper_loss_primary_secondary_kw", KILOWATTS, "",
            **derived(rule.copper_loss_primary_secondary, "4.5 % x kVA^-0.2, at most 0.8 of uk", DRY_TYPE),
        ),
        number(
            "Copper loss primary-tertiary", "kW", "copper_loss_primary_tertiary_kw", KILOWATTS, "",
            **derived(rule.copper_loss_primary_tertiary, "4.5 % x kVA^-0.2, at most 0.8 of uk", DRY_TYPE),
        ),
        number(
            "Copper loss secondary-tertiary", "kW", "copper_loss_secondary_tertiary_kw", KILOWATTS, "",
            **derived(rule.copper_loss_secondary_tertiary, "4.5 % x kVA^-0.2, at most 0.8 of uk", DRY_TYPE),
        ),
        number(
            "Iron loss", "kW", "iron_loss_kw", between(0.0, 100_000.0), "at rated voltage",
            **derived(rule.iron_loss_three_winding, "1.1 % x kVA^-0.22", DRY_TYPE),
        ),
        text(
            "Vector group", "vector_group", "like Dd0y11: each secondary winding with its clock number",
            pattern=r"[DYZ]N?(?:[dyz]n?\d{1,2}){2}", **typical("Dd0y11", PRACTICE),
        ),
        number(
            "Tap", "%", "tap_pu", between(-20.0, 20.0), "+ : more primary turns, lower secondary voltages",
            absent=0.0,
        ),
    ),
)  # fmt: skip

CABLES = SheetSpec(
    name="Cables",
    row_is="a run between two ends",
    hint="An end is a board, set, supply, transformer, motor or load; a run to a load is for one unit.",
    names_equipment=True,
    columns=(
        key("Cable", "name, unique over all equipment"),
        reference("From", "from_end", CABLE_ENDS, "end that feeds", **REQUIRED),
        reference("To", "to_end", CABLE_ENDS, "end that is fed", **REQUIRED),
        choice("Cores", "cores", get_args(CableCores), "of one cable", **typical("3", PRACTICE)),
        integer("Runs in parallel", "runs", between(1, 100), "equal cables", absent=1),
        number(
            "Section", "mm2", "section_mm2", between(0.5, 1000.0), "of one conductor",
            usual=between(1.0, 630.0), **REQUIRED,
        ),
        number(
            "Length", "m", "length_m", above(0.0, 5000.0), "one way",
            usual=Bounds(high=1000.0), **REQUIRED,
        ),
        choice("Conductor", "conductor", ("copper", "aluminium"), "", **typical("copper", PRACTICE)),
        choice("Conductor class", "conductor_class", ("2", "5"), "IEC 60228", **typical("2", PRACTICE)),
        yes_no("Tinned", "tinned", "metal-coated conductor", **typical("no", PRACTICE)),
        choice("Insulation", "insulation", INSULATIONS, "", **typical("EPR", PRACTICE)),
        number(
            "Conductor temperature", "°C", "conductor_temperature_degc", between(40.0, 250.0),
            "highest in service",
            **derived(rule.conductor_temperature, "by the insulation", "IEC 60092-352 and -360, from memory"),
        ),
        number(
            "Short-circuit temperature", "°C", "short_circuit_temperature_degc", between(100.0, 400.0),
            "end temperature",
            **derived(rule.end_temperature, "by the insulation", "IEC 60949 and 60092-360, from memory"),
        ),
        number(
            "Ambient temperature", "°C", "ambient_temperature_degc", between(-20.0, 90.0), "of the run",
            **derived(rule.ambient, "ambient temperature of the Project sheet", "Project sheet"),
        ),
        integer(
            "Cables bunched", "bunched", between(1, 500), "in one bunch, this one included",
            **typical(6, "no correction up to six; IEC 60092-352, from memory"),
        ),
        choice("Duty", "duty", get_args(Duty), "", **typical("continuous", PRACTICE)),
        number(
            "Overall diameter", "mm", "overall_diameter_mm", between(1.0, 200.0),
            "for short-time duty; blank: unknown", **UNKNOWN,
        ),
        ratio(
            "Further derating", "further_derating", above(0.0, 1.5), "factor on the rating; blank: 1",
            absent=1.0,
        ),
        number(
            "Resistance", "ohm/km", "resistance_ohm_per_km", above(0.0, 100.0),
            "maker's, at 20 °C; blank: from the conductor",
        ),
        number(
            "Reactance", "ohm/km", "reactance_ohm_per_km", above(0.0, 10.0), "maker's, at rated frequency",
            **derived(rule.cable_reactance, "from section and cores", f"typical build; {PRACTICE}"),
        ),
        number("R0", "ohm/km", "r0_ohm_per_km", above(0.0, 1000.0), "blank: unknown", **UNKNOWN),
        number("X0", "ohm/km", "x0_ohm_per_km", above(0.0, 100.0), "blank: unknown", **UNKNOWN),
        number(
            "Capacitance", "uF/km", "capacitance_uf_per_km", above(0.0, 100.0), "to earth; blank: unknown",
            **UNKNOWN,
        ),
        number(
            "Current rating", "A", "rating_a", AMPERES,
            "of one run, as installed; blank: by IEC 60092-352",
        ),
    ),
)  # fmt: skip

TIES = SheetSpec(
    name="Ties",
    row_is="a bus-tie, section switch or interconnector",
    hint="It joins two boards of one voltage; give a long one its impedance.",
    names_equipment=True,
    columns=(
        key("Tie", "name, unique over all equipment"),
        reference("Board A", "board_a", BOARD, "", **REQUIRED),
        reference("Board B", "board_b", BOARD, "", **REQUIRED),
        number("Rated current", "A", "rated_current_a", AMPERES, "blank: unknown", **UNKNOWN),
        number("Reactance", "ohm", "x_ohm", between(0.0, 100.0), "blank: none", absent=0.0),
        number("Resistance", "ohm", "r_ohm", between(0.0, 100.0), "blank: none", absent=0.0),
    ),
)

REACTORS = SheetSpec(
    name="Reactors",
    row_is="a series reactor",
    hint="It joins two boards of one voltage.",
    names_equipment=True,
    columns=(
        key("Reactor", "name, unique over all equipment"),
        reference("From", "from_board", BOARD, "", **REQUIRED),
        reference("To", "to_board", BOARD, "", **REQUIRED),
        number("Rated current", "A", "rated_current_a", AMPERES, "", **REQUIRED),
        number("Reactance", "ohm", "x_ohm", above(0.0, 100.0), "of one phase", **REQUIRED),
        number(
            "Resistance", "ohm", "r_ohm", between(0.0, 100.0), "of one phase",
            **derived(rule.reactor_resistance, "a fiftieth of the reactance", PRACTICE),
        ),
        number(
            "Short-time current", "kA", "short_time_ka", KILOAMPERES,
            "rated thermal short-time current, maker's figure; blank: unknown", **UNKNOWN,
        ),
        number(
            "Short-time duration", "s", "short_time_duration_s", above(0.0, 60.0),
            "of the short-time current; blank: unknown", **UNKNOWN,
        ),
    ),
)  # fmt: skip

TUNED = (("kind", ("tuned", "high-pass")),)

FILTERS = SheetSpec(
    name="Filters",
    row_is="a capacitor bank, tuned or high-pass filter",
    hint="Tuning order and quality are wanted for tuned and high-pass filters only.",
    names_equipment=True,
    columns=(
        key("Filter", "name, unique over all equipment"),
        reference("Board", "board", BOARD, "board that it is on", **REQUIRED),
        choice("Kind", "kind", get_args(FilterKind), "", **REQUIRED),
        number("Rated reactive power", "kvar", "q_rated_kvar", KILOWATTS, "at rated voltage", **REQUIRED),
        number("Rated voltage", "V", "u_rated_v", VOLTAGE, "line to line", **REQUIRED),
        number(
            "Tuning order", "", "tuning_order", above(1.0, 50.0), "multiple of rated frequency",
            when=TUNED, **REQUIRED,
        ),
        number(
            "Quality", "", "quality", above(0.0, 500.0), "at the tuning frequency",
            when=TUNED, **derived(rule.filter_quality, "40 tuned, 2 high-pass", PRACTICE),
        ),
    ),
)  # fmt: skip
