"""The sheets of what the plant feeds and of the spectra of its converters."""

from __future__ import annotations

from typing import get_args

from study.model.loads import ConverterKind, EssentialTo, LoadKind, StartingMethod, TorqueLaw
from study.workbook import typical as rule
from study.workbook.columns import (
    AMPERES,
    LARGE,
    POWER_FACTOR,
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
CAGE = "usual cage motors; common practice, no source"
MOTOR = (("kind", ("motor",)),)
BY_LINE = (*MOTOR, ("starting_method", ("direct", "star-delta", "autotransformer", "soft starter")))
AUTOTRANSFORMER = (*MOTOR, ("starting_method", ("autotransformer",)))
SOFT_STARTER = (*MOTOR, ("starting_method", ("soft starter",)))
STAR_DELTA = (*MOTOR, ("starting_method", ("star-delta",)))
FED_BY_CONVERTER = (("fed_by_converter", ("yes",)),)

CONSUMER_COLUMNS: tuple[Column, ...] = (
    key("Load", "name, unique over all equipment"),
    reference("Board", "board", ("Boards",), "board that feeds it", **REQUIRED),
    text("Description", "description", "what it is", absent=""),
    text("Service", "service", "group of the load balance, for example Engine auxiliaries", **REQUIRED),
    choice("Kind", "kind", get_args(LoadKind), "", **REQUIRED),
    integer("Installed", "installed", between(1, 10_000), "number of equal units", **REQUIRED),
    number(
        "Rated output", "kW", "p_rated_kw", above(0.0, 200_000.0),
        "of one unit: shaft power of a motor, input of anything else", **REQUIRED,
    ),
    number(
        "Absorbed power", "kW", "p_absorbed_kw", above(0.0, 200_000.0),
        "of one unit at its duty point, same side as the rated output; the load factor refers to it",
    ),
    ratio(
        "Efficiency", "efficiency", above(0.2, 1.0), "of a motor at rated output, 0 to 1",
        when=MOTOR, **derived(rule.motor_efficiency, "by rated output", rule.EFFICIENCY_SOURCE),
    ),
    ratio(
        "Power factor", "cos_phi", POWER_FACTOR, "at rated output, 0 to 1",
        **derived(rule.load_power_factor, "by kind, rated output and poles", PRACTICE),
    ),
    number("Running current", "A", "running_current_a", AMPERES, "of one unit at rated output, name-plate"),
    number(
        "Rated voltage", "V", "u_rated_v", above(0.0, 36_000.0), "name-plate",
        **derived(rule.nominal_voltage, "nominal voltage of its board", "Boards sheet"),
    ),
    choice("Phases", "phases", ("3", "2", "1"), "", absent="3"),
    choice("Essential to", "essential_to", get_args(EssentialTo), "", absent="none"),
    choice("Trip stage", "trip_stage", ("none", "1", "2"), "of the preferential trip", absent="none"),
    text("Redundancy group", "redundancy_group", "name of the group that is lost together; blank: none"),
)  # fmt: skip

MOTOR_COLUMNS: tuple[Column, ...] = (
    number("Rated speed", "rpm", "speed_rpm", above(0.0, 60_000.0), "name-plate; blank: unknown", **UNKNOWN),
    integer(
        "Poles", "poles", between(2, 60), "even number", when=MOTOR,
        **derived(rule.poles, "from the rated speed, else 4", PRACTICE),
    ),
    choice(
        "Starting method", "starting_method", get_args(StartingMethod), "converter: fed by its own converter",
        when=MOTOR, **typical("direct", "the usual method, and the hardest on the plant"),
    ),
    number(
        "Starting current", "x In", "starting_current", above(1.0, 15.0), "locked rotor, direct on line",
        usual=between(3.0, 10.0), when=BY_LINE,
        **derived(rule.starting_current, "by rated output", CAGE),
    ),
    ratio(
        "Starting power factor", "starting_cos_phi", above(0.0, 1.0), "locked rotor",
        when=BY_LINE, **derived(rule.starting_cos_phi, "by rated output", CAGE),
    ),
    number(
        "Locked-rotor torque", "x Tn", "locked_rotor_torque", above(0.0, 10.0), "direct on line",
        when=BY_LINE, **derived(rule.locked_rotor_torque, "by rated output", CAGE),
    ),
    number(
        "Breakdown torque", "x Tn", "breakdown_torque", above(1.0, 10.0), "largest",
        when=BY_LINE, **derived(rule.breakdown_torque, "by rated output", CAGE),
    ),
    choice(
        "Load torque law", "torque_law", get_args(TorqueLaw), "of the driven machine against speed",
        when=MOTOR, **typical("fan", "most ship motors drive pumps and fans; common practice, no source"),
    ),
    number(
        "Moment of inertia", "kgm2", "inertia_kgm2", LARGE, "motor and driven machine; blank: unknown",
        **UNKNOWN,
    ),
    number("Starting time", "s", "starting_time_s", above(0.0, 600.0), "blank: unknown", **UNKNOWN),
    number(
        "Star-delta change at", "s", "star_delta_change_s", above(0.0, 600.0), "blank: unknown",
        **UNKNOWN,
    ),
    number(
        "Autotransformer tap", "%", "autotransformer_tap", between(20.0, 100.0), "of rated voltage",
        when=AUTOTRANSFORMER, **typical(65.0, PRACTICE),
    ),
    number(
        "Soft-starter current", "x In", "soft_starter_current", between(1.0, 10.0), "limit while starting",
        when=SOFT_STARTER, **typical(3.5, PRACTICE),
    ),
    number(
        "Soft-starter ramp", "s", "soft_starter_ramp_s", above(0.0, 600.0), "",
        when=SOFT_STARTER, **typical(10.0, PRACTICE),
    ),
    number(
        "Contactor drop-out", "%", "contactor_drop_out", between(0.0, 100.0),
        "of rated voltage, where the contactor opens",
        when=MOTOR,
        **typical(75.0, "upper end of the range of IEC 60947-4-1 (20 to 75 %), from memory"),
    ),
    number(
        "Restart delay after blackout", "s", "restart_delay_s", between(0.0, 3600.0),
        "blank: not restarted by itself",
    ),
    yes_no("Regenerates", "regenerates", "feeds back while it lowers or brakes", absent="no"),
)  # fmt: skip

CONVERTER_COLUMNS: tuple[Column, ...] = (
    choice(
        "Converter kind", "converter_kind", get_args(ConverterKind), "of the rectifier",
        when=FED_BY_CONVERTER, **typical("6-pulse", "the usual one, and the hardest on the voltage waveform"),
    ),
    number(
        "Input choke", "%", "input_choke_pu", between(0.0, 30.0), "of the converter's rating; blank: none",
        absent=0.0,
    ),
    number(
        "DC choke", "%", "dc_choke_pu", between(0.0, 30.0), "of the converter's rating; blank: none",
        absent=0.0,
    ),
    number(
        "Phase shift", "deg", "phase_shift_deg", between(-180.0, 180.0),
        "of the converter's own transformer; blank: none", absent=0.0,
    ),
    ratio(
        "Displacement power factor", "displacement_cos_phi", POWER_FACTOR, "of the fundamental",
        when=FED_BY_CONVERTER,
        **derived(rule.displacement_power_factor, "1.00 active front end, else 0.95", PRACTICE),
    ),
    reference(
        "Spectrum", "spectrum", ("Spectra",), "a spectrum of the sheet Spectra; blank: computed", absent=None,
    ),
)  # fmt: skip

LOADS = SheetSpec(
    name="Loads",
    row_is="a consumer or a group of equal ones",
    hint="Powers are those of one unit; the number of units is beside them.",
    names_equipment=True,
    required=True,
    columns=(*CONSUMER_COLUMNS, *MOTOR_COLUMNS, *CONVERTER_COLUMNS),
)

SPECTRA = SheetSpec(
    name="Spectra",
    row_is="a harmonic of a converter type",
    hint="Harmonic currents of a converter, in per cent of its fundamental current at that loading.",
    unique=("spectrum", "loading_pu", "order"),
    columns=(
        text("Spectrum", "spectrum", "name that Loads and Converter supplies refer to", **REQUIRED),
        number("Loading", "%", "loading_pu", above(0.0, 150.0), "of the converter's rating", absent=100.0),
        number("Order", "", "order", Bounds(low=1.0, high=200.0, low_open=True), "", **REQUIRED),
        number("Current", "%", "current_pu", between(0.0, 150.0), "of the fundamental", **REQUIRED),
        number("Angle", "deg", "angle_deg", between(-360.0, 360.0), "blank: 0", absent=0.0),
    ),
)
