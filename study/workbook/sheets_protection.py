"""The sheets of protective devices, their functions, ranges and makers' curves."""

from __future__ import annotations

from typing import get_args

from study.model.protection import DeviceKind, FunctionKind
from study.workbook import typical as rule
from study.workbook.columns import (
    AMPERES,
    GIVEN,
    KILOAMPERES,
    LARGE,
    POWER_FACTOR,
    REQUIRED,
    UNKNOWN,
    Column,
    SheetSpec,
    above,
    between,
    choice,
    derived,
    key,
    number,
    ratio,
    reference,
    text,
    typical,
)
from study.workbook.sheets_branches import SOURCES
from study.workbook.sheets_modes import ANY_EQUIPMENT, BRANCHES

PRACTICE = "common practice, no source"
PROTECTED = ("Boards", *SOURCES, "Synchronous motors", *BRANCHES, "Filters", "Loads")
BREAKER = (("kind", ("circuit breaker",)),)
RELEASE = (("kind", ("circuit breaker", "overcurrent relay")),)
NO_FUSE = (("kind", ("circuit breaker", "overcurrent relay", "thermal overload")),)
SETTINGS = (
    "Long-time current",
    "Long-time delay",
    "Short-time current",
    "Short-time delay",
    "Instantaneous current",
    "Earth-fault current",
    "Earth-fault delay",
    "Time multiplier",
)
RELAY_CURVES = (
    "standard inverse",
    "very inverse",
    "extremely inverse",
    "long-time inverse",
    "IEEE moderately inverse",
    "IEEE very inverse",
    "IEEE extremely inverse",
    "definite time",
)

RATING_COLUMNS: tuple[Column, ...] = (
    key("Device", "name, unique over all equipment"),
    reference("Equipment", "equipment", PROTECTED, "what it protects", **REQUIRED),
    text("End", "end", "name of the end it stands at, or from or to; blank: the feeding end"),
    choice("Kind", "kind", get_args(DeviceKind), "", **REQUIRED),
    number("Rated current", "A", "i_rated_a", above(0.0, 100_000.0), "In", **REQUIRED),
    number("Rated voltage", "V", "u_rated_v", above(0.0, 52_000.0), "Ue; blank: unknown", **UNKNOWN),
    number("Icu", "kA", "icu_ka", KILOAMPERES, "ultimate breaking, rms; blank: unknown", **UNKNOWN),
    number("Ics", "kA", "ics_ka", KILOAMPERES, "service breaking, rms; blank: unknown", **UNKNOWN),
    number("Icw", "kA", "icw_ka", KILOAMPERES, "short-time withstand, rms; blank: unknown", **UNKNOWN),
    number("Icm", "kA", "icm_ka", KILOAMPERES, "making, peak; blank: unknown", **UNKNOWN),
    number("Icw duration", "s", "icw_duration_s", above(0.0, 10.0), "blank: unknown", **UNKNOWN),
    ratio(
        "Test power factor", "test_cos_phi", POWER_FACTOR, "of the breaking test; blank: unknown",
        **UNKNOWN,
    ),
    choice("Category", "category", ("A", "B"), "IEC 60947-2; blank: unknown", **UNKNOWN),
)  # fmt: skip

SETTING_COLUMNS: tuple[Column, ...] = (
    choice("Setting source", "setting_source", ("fixed", "adjustable"), "", absent="adjustable"),
    reference("Curve", "curve", ("Curves", "Let-through"), "maker's curve; blank: none"),
    number("Long-time current", "A", "long_time_a", AMPERES, "Ir; blank: none"),
    number("Long-time delay", "s", "long_time_delay_s", above(0.0, 3600.0), "at the multiple beside it"),
    number(
        "Long-time delay at", "x Ir", "long_time_delay_at", between(1.05, 20.0), "",
        when=(*BREAKER, ("long_time_delay_s", GIVEN)), **typical(6.0, PRACTICE),
    ),
    choice(
        "Long-time law", "long_time_law", ("I2t", "I4t"), "",
        when=(*BREAKER, ("long_time_a", GIVEN)), **typical("I2t", PRACTICE),
    ),
    number("Short-time current", "A", "short_time_a", LARGE, "Isd, or off; blank: none", words=("off",)),
    number("Short-time delay", "s", "short_time_delay_s", between(0.0, 60.0), "blank: none"),
    choice("Short-time law", "short_time_law", ("definite", "I2t"), "", absent="definite"),
    number(
        "Instantaneous current", "A", "instantaneous_a", LARGE, "Ii, or off; blank: not given",
        words=("off",),
    ),
    choice(
        "Instantaneous senses", "instantaneous_senses", ("rms", "peak"),
        "magnetic: peak; electronic: as the maker says",
        when=RELEASE,
        **typical("peak", "magnetic releases see the peak; the worse case for discrimination"),
    ),
    number("Earth-fault current", "A", "earth_fault_a", AMPERES, "blank: none"),
    number("Earth-fault delay", "s", "earth_fault_delay_s", between(0.0, 60.0), "blank: none"),
    number(
        "Current tolerance", "%", "current_tolerance", between(0.0, 50.0), "plus and minus",
        when=NO_FUSE, **typical(20.0, "short-circuit releases of IEC 60947-2, from memory"),
    ),
    number(
        "Time tolerance", "%", "time_tolerance", between(0.0, 100.0), "plus and minus",
        when=NO_FUSE, **typical(20.0, PRACTICE),
    ),
    number(
        "Opening time min", "s", "opening_time_min_s", between(0.0, 2.0), "release to contacts apart",
        when=RELEASE, **derived(rule.opening_time_min, "0.01 s", PRACTICE),
    ),
    number(
        "Breaking time max", "s", "breaking_time_max_s", between(0.0, 5.0), "release to arc out",
        when=RELEASE, **derived(rule.breaking_time_max, "0.08 s", PRACTICE),
    ),
)  # fmt: skip

RELAY_COLUMNS: tuple[Column, ...] = (
    number("CT primary", "A", "ct_primary_a", AMPERES, "blank: none"),
    number("CT secondary", "A", "ct_secondary_a", above(0.0, 10.0), "blank: none"),
    choice("Relay curve", "relay_curve", RELAY_CURVES, "IEC 60255-151; blank: none"),
    number("Time multiplier", "", "time_multiplier", above(0.0, 100.0), "blank: none"),
    text("Reset", "reset", "of the relay, as the maker says"),
    choice(
        "Trip class", "trip_class", ("5", "10A", "10", "20", "30"), "IEC 60947-4-1; blank: unknown", **UNKNOWN
    ),
    choice("Fuse class", "fuse_class", ("gG", "aM"), "IEC 60269; blank: unknown", **UNKNOWN),
    text("Direction", "direction", "forward or reverse; blank: both"),
    text("Protected zone", "protected_zone", "blank: none"),
    reference("Interlocked with", "interlocked_with", ("Devices",), "zone-selective; blank: none"),
)

DEVICES = SheetSpec(
    name="Devices",
    row_is="a protective device",
    hint="Breaking, making and withstand ratings are the maker's, never assumed.",
    names_equipment=True,
    columns=(*RATING_COLUMNS, *SETTING_COLUMNS, *RELAY_COLUMNS),
)

PROTECTION_FUNCTIONS = SheetSpec(
    name="Protection functions",
    row_is="a protection that does not look at a phase-current curve",
    hint="The unit belongs to the pick-up.",
    unique=("name",),
    columns=(
        text("Function", "name", "name", **REQUIRED),
        reference("Equipment", "equipment", ANY_EQUIPMENT, "what it watches", **REQUIRED),
        choice("Kind", "kind", get_args(FunctionKind), "", **REQUIRED),
        number("Pick-up", "", "pick_up", between(0.0, 1_000_000.0), "in the unit beside it", **REQUIRED),
        text("Unit", "unit", "for example %, kW, V, Hz, A", **REQUIRED),
        number("Delay", "s", "delay_s", between(0.0, 3600.0), "", **REQUIRED),
        text("Trips", "trips", "what it opens"),
    ),
)

SETTING_RANGES = SheetSpec(
    name="Setting ranges",
    row_is="what one setting of a device can be set to",
    hint="In the unit that the setting has on the sheet Devices.",
    unique=("device", "setting"),
    columns=(
        reference("Device", "device", ("Devices",), "", **REQUIRED),
        choice("Setting", "setting", SETTINGS, "as headed on the sheet Devices", **REQUIRED),
        number("Min", "", "minimum", between(0.0, 1_000_000.0), "", **REQUIRED),
        number("Max", "", "maximum", between(0.0, 1_000_000.0), "", **REQUIRED),
        number("Step", "", "step", LARGE, "blank: without steps"),
    ),
)

CURVES = SheetSpec(
    name="Curves",
    row_is="a point of a maker's time-current curve",
    hint="Give the current as a multiple or in ampere, and the shortest or longest time or both.",
    one_of=(("current_in", "current_a"), ("time_min_s", "time_max_s")),
    columns=(
        text("Curve", "curve", "name that Devices refer to", **REQUIRED),
        number("Current", "x In", "current_in", above(0.0, 1000.0), "multiple of rated current"),
        number("Current", "A", "current_a", above(0.0, 1e6), "or ampere"),
        number("Time min", "s", "time_min_s", above(0.0, 1e6), "shortest"),
        number("Time max", "s", "time_max_s", above(0.0, 1e6), "longest"),
    ),
)

LET_THROUGH = SheetSpec(
    name="Let-through",
    row_is="a point of a maker's cut-off and let-through curve",
    hint="Give the cut-off peak or the let-through I2t or both.",
    unique=("curve", "prospective_ka"),
    one_of=(("cut_off_peak_ka", "let_through_a2s"),),
    columns=(
        text("Curve", "curve", "name that Devices refer to", **REQUIRED),
        number("Prospective current", "kA", "prospective_ka", above(0.0, 1000.0), "rms", **REQUIRED),
        number("Cut-off peak", "kA", "cut_off_peak_ka", above(0.0, 2500.0), "peak"),
        number("Let-through I2t", "A2s", "let_through_a2s", above(0.0, 1e11), ""),
    ),
)

MAKER_DISCRIMINATION = SheetSpec(
    name="Maker discrimination",
    row_is="a maker's statement on a pair of devices",
    hint="Up to which prospective current the downstream device alone opens.",
    unique=("upstream", "downstream"),
    columns=(
        reference("Upstream device", "upstream", ("Devices",), "", **REQUIRED),
        reference("Downstream device", "downstream", ("Devices",), "", **REQUIRED),
        number("Discrimination up to", "kA", "up_to_ka", above(0.0, 1000.0), "prospective, rms", **REQUIRED),
        text("Reference", "reference", "maker's document"),
    ),
)
