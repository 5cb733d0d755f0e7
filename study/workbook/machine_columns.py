"""The columns of synchronous machines, which Gensets and Synchronous motors share."""

from __future__ import annotations

from typing import get_args

from study.model.sources import (
    DroopBase,
    DroopLaw,
    FieldSupply,
    GovernorMode,
    RegulatorMode,
)
from study.workbook import typical as rule
from study.workbook.columns import (
    POWER_FACTOR,
    REQUIRED,
    UNKNOWN,
    Bounds,
    Column,
    above,
    between,
    choice,
    derived,
    number,
    ratio,
    text,
    typical,
)

PRACTICE = "common practice, no source"
LV_SET = "typical of low-voltage four-pole ship sets; common practice, no source"
COMPOUNDED = (("field_supply", ("compounded", "compounded without regulator")),)
REGULATED = (("field_supply", ("auxiliary winding", "permanent magnet", "shunt", "compounded")),)
BUILDS_UP = (
    (
        "field_supply",
        ("auxiliary winding", "permanent magnet", "shunt", "compounded", "compounded without regulator"),
    ),
)
REACTANCE = above(0.0, 10.0)
TIME_CONSTANT = above(0.0, 60.0)
# 0 is a plain regulator; between 0 and this a number meant as a fraction was probably written under [%]
DROOP = Bounds(low=0.2, high=12.0, or_zero=True)

REDUNDANCY_GROUP = text(
    "Redundancy group", "redundancy_group", "name of the group that is lost together; blank: none"
)

RATING_COLUMNS: tuple[Column, ...] = (
    number(
        "Rated apparent power", "kVA", "s_rated_kva", above(0.0, 200_000.0), "name-plate, at the terminals",
        **REQUIRED,
    ),
    ratio("Rated power factor", "cos_phi_rated", POWER_FACTOR, "name-plate, 0 to 1", **REQUIRED),
    number(
        "Rated voltage", "V", "u_rated_v", above(0.0, 36_000.0), "name-plate, line to line",
        **REQUIRED,
    ),
)  # fmt: skip

MACHINE_COLUMNS: tuple[Column, ...] = (
    number(
        "Xd", "pu", "x_d_pu", REACTANCE, "synchronous, unsaturated, of rated kVA and voltage",
        usual=between(0.5, 5.0), **typical(2.5, LV_SET),
    ),
    number(
        "Xd'", "pu", "x_d1_pu", REACTANCE, "transient, unsaturated, of rated kVA and voltage",
        usual=between(0.08, 0.6), older=("X'd",), **typical(0.22, LV_SET),
    ),
    number(
        "Xd''", "pu", "x_d2_pu", REACTANCE, "subtransient, unsaturated, of rated kVA and voltage",
        usual=between(0.05, 0.4), older=("X''d",), **typical(0.14, LV_SET),
    ),
    number(
        "Xd' saturated", "pu", "x_d1_saturated_pu", REACTANCE, "transient, saturated: for faults",
        older=("X'd saturated",), **derived(rule.x_d1_saturated, "0.9 of Xd'", PRACTICE),
    ),
    number(
        "Xd'' saturated", "pu", "x_d2_saturated_pu", REACTANCE, "subtransient, saturated: for faults",
        older=("X''d saturated",), **derived(rule.x_d2_saturated, "0.9 of Xd''", PRACTICE),
    ),
    number(
        "Xq", "pu", "x_q_pu", REACTANCE, "quadrature axis, unsaturated",
        **derived(rule.x_q, "0.55 of Xd", "salient poles, 0.5 to 0.6 of Xd; common practice, no source"),
    ),
    number(
        "Xq'", "pu", "x_q1_pu", REACTANCE, "quadrature axis, transient; salient poles: as Xq",
        older=("X'q",),
        **derived(rule.x_q1, "as Xq", "salient poles have no transient quadrature winding; machine theory"),
    ),
    number(
        "Xq''", "pu", "x_q2_pu", REACTANCE, "quadrature axis, subtransient",
        older=("X''q",), **derived(rule.x_q2, "1.2 of Xd''", PRACTICE),
    ),
    number(
        "Xl", "pu", "x_l_pu", REACTANCE, "stator leakage",
        **derived(rule.x_l, "0.6 of Xd''", PRACTICE),
    ),
    number(
        "X2", "pu", "x_2_pu", REACTANCE, "negative sequence",
        **derived(rule.x_2, "mean of Xd'' and Xq''", "IEC 60034-4, from memory"),
    ),
    number(
        "X0", "pu", "x_0_pu", REACTANCE, "zero sequence",
        **typical(0.04, LV_SET),
    ),
    number(
        "Stator resistance", "pu", "r_stator_pu", above(0.0, 0.5), "of rated kVA and voltage, at 20 °C",
        **derived(rule.r_stator, "from the armature time constant, else 0.015", LV_SET),
    ),
    number(
        "Td0'", "s", "t_d01_s", TIME_CONSTANT, "transient, open circuit",
        older=("T'd0",), **derived(rule.t_d01, "from Td', else 2 s", LV_SET),
    ),
    number(
        "Td'", "s", "t_d1_s", TIME_CONSTANT, "transient, short circuit",
        older=("T'd",), **derived(rule.t_d1, "Td0' x Xd' / Xd", "machine theory"),
    ),
    number(
        "Td''", "s", "t_d2_s", TIME_CONSTANT, "subtransient, short circuit",
        older=("T''d",), usual=between(0.002, 0.1), **typical(0.012, LV_SET),
    ),
    number(
        "Tq''", "s", "t_q2_s", TIME_CONSTANT, "quadrature axis, subtransient, short circuit",
        older=("T''q",), **derived(rule.t_q2, "as Td''", PRACTICE),
    ),
    number(
        "Armature time constant", "s", "t_armature_s", TIME_CONSTANT, "decay of the d.c. component",
        **derived(rule.t_armature, "X2 / (w x stator resistance)", "machine theory"),
    ),
    number(
        "Saturation S(1.0)", "", "saturation_10", between(0.0, 5.0),
        "extra field at rated voltage above the air-gap line, as a part of the air-gap field",
        **typical(0.10, LV_SET),
    ),
    number(
        "Saturation S(1.2)", "", "saturation_12", between(0.0, 10.0),
        "the same at 120 % of rated voltage",
        **typical(0.40, LV_SET),
    ),
    number(
        "Reactance tolerance", "%", "reactance_tolerance", between(0.0, 50.0),
        "maker's tolerance on the reactances, plus and minus",
        **typical(15.0, "makers' usual guarantee on reactances; common practice, no source"),
    ),
    number(
        "Inertia constant", "s", "inertia_s", above(0.0, 20.0), "H of the whole set on rated kVA",
        usual=between(0.2, 5.0), **typical(1.0, LV_SET),
    ),
)  # fmt: skip

EXCITATION_COLUMNS: tuple[Column, ...] = (
    choice("Field supply", "field_supply", get_args(FieldSupply), "how the field is fed", **REQUIRED),
    number(
        "Unregulated voltage", "%", "unregulated_voltage_pu", between(80.0, 150.0),
        "of rated voltage; compounded set whose regulator takes nothing away",
        when=COMPOUNDED,
        **derived(
            rule.unregulated_voltage, "about 120 %; 100 % without regulator", "common practice, no source"
        ),
    ),
    number(
        "Compound current share", "%", "compound_current_share", between(0.0, 100.0),
        "part of the rated-load field that the current transformers give",
        when=COMPOUNDED,
        **derived(
            rule.compound_current_share, "the same unregulated voltage at no load and at rated load",
            "flat compounding; IEEE 421.5 compound source, from memory",
        ),
    ),
    number(
        "Excitation ceiling", "x rated-load field", "ceiling", between(1.0, 10.0),
        "largest field, as a multiple of the field at rated load and power factor",
        when=BUILDS_UP, **typical(2.0, "lower end of 2 to 3.5; common practice, no source"),
    ),
    number(
        "Exciter time constant", "s", "exciter_time_constant_s", above(0.0, 10.0),
        "rotating exciter; blank: slip rings",
    ),
    number(
        "Regulator gain", "", "gain", above(0.0, 10_000.0),
        "proportional, pu of rated-load field per pu of voltage",
        when=REGULATED, **typical(20.0, PRACTICE),
    ),
    number(
        "Regulator integral", "1/s", "integral_per_s", between(0.0, 10_000.0),
        "integral, pu of rated-load field per pu of voltage and second",
        when=REGULATED, **typical(20.0, PRACTICE),
    ),
    number(
        "Regulator derivative", "s", "derivative_s", between(0.0, 1_000.0),
        "derivative, pu of rated-load field per pu of voltage in a second",
        when=REGULATED, **typical(0.5, PRACTICE),
    ),
    number(
        "V/Hz knee", "Hz", "v_per_hz_knee_hz", between(10.0, 100.0),
        "below it the voltage falls with the frequency; blank: no such function",
    ),
    number(
        "Sustained short-circuit current", "x In", "sustained_current", above(0.0, 10.0),
        "maker's figure with the regulator, three-phase at the terminals; blank: unknown",
        **UNKNOWN,
    ),
    number(
        "Sustained duration", "s", "sustained_duration_s", above(0.0, 60.0),
        "how long the sustained current is held; blank: unknown",
        **UNKNOWN,
    ),
)  # fmt: skip

REGULATOR_COLUMNS: tuple[Column, ...] = (
    number(
        "No-load voltage", "%", "no_load_voltage_pu", between(50.0, 150.0), "of rated voltage",
        usual=between(85.0, 115.0),
        **derived(
            rule.no_load_voltage, "rated voltage at 75 % of rated load",
            "where the class rules tune sharing; common practice, no source",
        ),
    ),
    number(
        "Voltage droop", "%", "voltage_droop_pu", between(0.0, 20.0),
        "fall from no load to the droop base, % of rated voltage",
        usual=DROOP, **typical(3.0, "2 to 5 %; common practice, no source"),
    ),
    choice(
        "Droop base", "droop_base", get_args(DroopBase), "the load at which the full droop is reached",
        **typical("rated load at rated pf", "as trimmed at trials; common practice, no source"),
    ),
    choice(
        "Droop law", "droop_law", get_args(DroopLaw),
        "phasor: analogue circuit; reactive current: digital regulator",
        **typical("phasor", "IEEE 421.5 load compensator"),
    ),
    choice(
        "Regulator mode", "regulator_mode", get_args(RegulatorMode), "how the set shares reactive power",
        **typical("droop", PRACTICE),
    ),
    choice(
        "Droop circuit polarity", "polarity", ("normal", "reversed"),
        "reversed: the current transformer is wired the wrong way round",
        absent="normal",
    ),
    text("Cross-current group", "cross_current_group", "sets of one group are wired together; blank: none"),
)  # fmt: skip

GOVERNOR_COLUMNS: tuple[Column, ...] = (
    number(
        "No-load frequency", "%", "no_load_frequency_pu", between(50.0, 150.0), "of rated frequency",
        usual=between(95.0, 110.0),
        **derived(
            rule.no_load_frequency, "rated frequency at 75 % of rated load",
            "where the class rules tune sharing; common practice, no source",
        ),
    ),
    number(
        "Speed droop", "%", "speed_droop_pu", between(0.0, 20.0),
        "fall from no load to rated kW, % of rated frequency",
        usual=DROOP, **typical(4.0, "3 to 5 %; common practice, no source"),
    ),
    choice(
        "Governor mode", "governor_mode", get_args(GovernorMode), "how the set shares active power",
        **typical("droop", PRACTICE),
    ),
    number(
        "Governor time constant", "s", "governor_time_constant_s", above(0.0, 10.0),
        "governor and fuel rack together",
        **typical(0.2, PRACTICE),
    ),
    number(
        "Governor dead time", "s", "dead_time_s", between(0.0, 2.0), "until the next cylinder fires",
        **typical(0.03, PRACTICE),
    ),
)  # fmt: skip
