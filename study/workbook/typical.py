"""Typical values that follow from other cells of the same row.

Every rule takes the row (numbers in the unit of their headings) and returns the value in the unit of its own
heading. Rows also hold two things that no column does: ``f_rated_hz`` of the project, and
``board_u_nominal_v`` of the board that the row names.
"""

from __future__ import annotations

from math import acos, log, pi
from typing import TYPE_CHECKING, Final

from study.formulas.cables import insulation_data, typical_reactance
from study.workbook.columns import Values

if TYPE_CHECKING:
    from study.formulas.induction import StartingData

SATURATED_SHARE = 0.9
EFFICIENCY_CLASS: Final = "IE2"
EFFICIENCY_SOURCE: Final = "IEC 60034-30-1 class IE2, four poles, from memory"
# The smallest motor of the standard and its efficiency, four poles, IE2, 50 Hz; from memory.
SMALLEST_MOTOR: Final = (0.12, 0.591)
TABLE_START_KW: Final = 0.75
TABLE_END_KW: Final = 1000.0


def x_d1_saturated(row: Values) -> float:
    """Return the saturated transient reactance [pu].

    Examples
    --------
    >>> round(x_d1_saturated({"x_d1_pu": 0.2}), 4)
    0.18
    """
    return SATURATED_SHARE * float(row["x_d1_pu"])


def x_d2_saturated(row: Values) -> float:
    """Return the saturated subtransient reactance [pu]."""
    return SATURATED_SHARE * float(row["x_d2_pu"])


def x_q(row: Values) -> float:
    """Return the quadrature-axis reactance of a salient-pole machine [pu]."""
    return 0.55 * float(row["x_d_pu"])


def x_q1(row: Values) -> float:
    """Return the quadrature-axis transient reactance [pu]: a salient pole has no winding that gives one."""
    return float(row["x_q_pu"])


def x_q2(row: Values) -> float:
    """Return the quadrature-axis subtransient reactance [pu]."""
    return 1.2 * float(row["x_d2_pu"])


def x_l(row: Values) -> float:
    """Return the stator leakage reactance [pu]."""
    return 0.6 * float(row["x_d2_pu"])


def x_2(row: Values) -> float:
    """Return the negative-sequence reactance [pu], the mean of the two subtransient reactances.

    Examples
    --------
    >>> round(x_2({"x_d2_pu": 0.15, "x_q2_pu": 0.18}), 4)
    0.165
    """
    return 0.5 * (float(row["x_d2_pu"]) + float(row["x_q2_pu"]))


def r_stator(row: Values) -> float:
    """Return the stator resistance [pu] from the armature time constant where that is given, else 0.015."""
    t_armature_s = row.get("t_armature_s")
    if t_armature_s is None:
        return 0.015
    return float(row["x_2_pu"]) / (2.0 * pi * float(row["f_rated_hz"]) * float(t_armature_s))


def t_armature(row: Values) -> float:
    """Return the armature time constant [s], X2 over w times the stator resistance.

    Examples
    --------
    >>> round(t_armature({"x_2_pu": 0.165, "r_stator_pu": 0.011, "f_rated_hz": 60.0}), 4)
    0.0398
    """
    return float(row["x_2_pu"]) / (2.0 * pi * float(row["f_rated_hz"]) * float(row["r_stator_pu"]))


def t_d01(row: Values) -> float:
    """Return the open-circuit transient time constant [s] from the short-circuit one, else 2 s."""
    t_d1_s = row.get("t_d1_s")
    return 2.0 if t_d1_s is None else float(t_d1_s) * float(row["x_d_pu"]) / float(row["x_d1_pu"])


def t_d1(row: Values) -> float:
    """Return the short-circuit transient time constant [s].

    Examples
    --------
    >>> round(t_d1({"t_d01_s": 2.2, "x_d_pu": 2.2, "x_d1_pu": 0.25}), 4)
    0.25
    """
    return float(row["t_d01_s"]) * float(row["x_d1_pu"]) / float(row["x_d_pu"])


def t_q2(row: Values) -> float:
    """Return the quadrature-axis subtransient time constant [s], taken as the direct-axis one."""
    return float(row["t_d2_s"])


def no_load_voltage(row: Values) -> float:
    """Return the no-load voltage [%] that gives rated voltage at 75 % of rated load.

    Examples
    --------
    >>> no_load_voltage({"regulator_mode": "droop", "voltage_droop_pu": 4.0})
    103.0
    """
    droops = row.get("regulator_mode") in {"droop", "kvar control"}
    return 100.0 + (0.75 * float(row["voltage_droop_pu"]) if droops else 0.0)


def no_load_frequency(row: Values) -> float:
    """Return the no-load frequency [%] that gives rated frequency at 75 % of rated load."""
    droops = row.get("governor_mode") == "droop"
    return 100.0 + (0.75 * float(row["speed_droop_pu"]) if droops else 0.0)


def copper_loss(row: Values) -> float:
    """Return the copper loss of a transformer [kW] from its rated power.

    Examples
    --------
    >>> round(copper_loss({"s_rated_kva": 1000.0, "u_k_pu": 6.0}), 1)
    11.3
    """
    return _copper_loss(float(row["s_rated_kva"]), float(row["u_k_pu"]))


def copper_loss_primary_secondary(row: Values) -> float:
    """Return the copper loss between primary and secondary [kW]."""
    s_kva = min(float(row["s_primary_kva"]), float(row["s_secondary_kva"]))
    return _copper_loss(s_kva, float(row["u_k_primary_secondary_pu"]))


def copper_loss_primary_tertiary(row: Values) -> float:
    """Return the copper loss between primary and tertiary [kW]."""
    s_kva = min(float(row["s_primary_kva"]), float(row["s_tertiary_kva"]))
    return _copper_loss(s_kva, float(row["u_k_primary_tertiary_pu"]))


def copper_loss_secondary_tertiary(row: Values) -> float:
    """Return the copper loss between secondary and tertiary [kW]."""
    s_kva = min(float(row["s_secondary_kva"]), float(row["s_tertiary_kva"]))
    return _copper_loss(s_kva, float(row["u_k_secondary_tertiary_pu"]))


def iron_loss(row: Values) -> float:
    """Return the iron loss of a transformer [kW] from its rated power.

    Examples
    --------
    >>> round(iron_loss({"s_rated_kva": 1000.0}), 2)
    2.41
    """
    return _iron_loss(float(row["s_rated_kva"]))


def iron_loss_three_winding(row: Values) -> float:
    """Return the iron loss of a three-winding transformer [kW] from its primary power."""
    return _iron_loss(float(row["s_primary_kva"]))


def _copper_loss(s_kva: float, u_k_percent: float) -> float:
    share_percent = min(4.5 * float(s_kva**-0.2), 0.8 * u_k_percent)
    return share_percent / 100.0 * s_kva


def _iron_loss(s_kva: float) -> float:
    return 1.1 * float(s_kva**-0.22) / 100.0 * s_kva


def reactor_resistance(row: Values) -> float:
    """Return the resistance of a series reactor [ohm], a fiftieth of its reactance."""
    return float(row["x_ohm"]) / 50.0


def filter_quality(row: Values) -> float:
    """Return the quality of a filter: 40 for a tuned one, 2 for a high-pass."""
    return 40.0 if row["kind"] == "tuned" else 2.0


def nominal_voltage(row: Values) -> float:
    """Return the nominal voltage of the board that the row names [V]."""
    return float(row["board_u_nominal_v"])


def poles(row: Values) -> int:
    """Return the number of poles from the rated speed where that is given, else 4.

    Examples
    --------
    >>> poles({"speed_rpm": 1180.0, "f_rated_hz": 60.0})
    6
    """
    speed_rpm = row.get("speed_rpm")
    if speed_rpm is None:
        return 4
    # The rated speed lies a little under the synchronous one: the pole pairs are rounded down.
    return max(2, 2 * int(60.0 * float(row["f_rated_hz"]) / float(speed_rpm) + 1e-6))


def load_power_factor(row: Values) -> float:
    """Return the power factor at rated output by the kind of load."""
    if row["kind"] == "motor":
        return motor_power_factor(row)
    if row["kind"] == "converter":
        return displacement_power_factor(row)
    return {"heating": 1.0, "lighting": 0.95, "general": 0.85}[str(row["kind"])]


def displacement_power_factor(row: Values) -> float:
    """Return the displacement power factor: 1.00 for an active front end, 0.95 for a diode rectifier."""
    return 1.0 if row.get("converter_kind") == "active front end" else 0.95


def motor_efficiency(row: Values) -> float:
    """Return the efficiency of a motor at rated output; 1 for what is rated by its input.

    Below 0.75 kW on the line to the smallest motor of the standard, over the logarithm of the rating.

    Examples
    --------
    >>> round(motor_efficiency({"kind": "motor", "p_rated_kw": 11.0, "f_rated_hz": 50.0}), 3)
    0.898
    >>> round(motor_efficiency({"kind": "motor", "p_rated_kw": 0.12, "f_rated_hz": 50.0}), 3)
    0.591
    """
    from study.formulas.induction import typical_efficiency

    if row["kind"] != "motor":
        return 1.0
    p_kw, f_hz = float(row["p_rated_kw"]), 50.0 if float(row["f_rated_hz"]) < 55.0 else 60.0
    at_kw = min(max(p_kw, TABLE_START_KW), TABLE_END_KW)
    efficiency = typical_efficiency(at_kw, EFFICIENCY_CLASS, f_hz)
    if p_kw >= TABLE_START_KW:
        return efficiency
    smallest_kw, smallest = SMALLEST_MOTOR
    share = log(max(p_kw, smallest_kw) / TABLE_START_KW) / log(smallest_kw / TABLE_START_KW)
    return efficiency + share * (smallest - efficiency)


def motor_power_factor(row: Values) -> float:
    """Return the power factor of a motor at rated output, by rating and number of poles."""
    from study.formulas.induction import typical_power_factor

    return typical_power_factor(float(row["p_rated_kw"]), int(row["poles"]))


def starting_current(row: Values) -> float:
    """Return the starting current of a cage motor [x rated current]."""
    return _starting_data(row).starting_current


def starting_cos_phi(row: Values) -> float:
    """Return the power factor of a cage motor at standstill."""
    return _starting_data(row).starting_cos_phi


def locked_rotor_torque(row: Values) -> float:
    """Return the torque of a cage motor at standstill [x rated torque]."""
    return _starting_data(row).locked_rotor_torque


def breakdown_torque(row: Values) -> float:
    """Return the largest torque of a cage motor [x rated torque]."""
    return _starting_data(row).breakdown_torque


def _starting_data(row: Values) -> StartingData:
    from study.formulas.induction import typical_starting_data

    return typical_starting_data(float(row["p_rated_kw"]))


def conductor_temperature(row: Values) -> float:
    """Return the highest service temperature of a conductor by its insulation [degC]."""
    return insulation_data(str(row["insulation"]))["conductor_degc"]


def end_temperature(row: Values) -> float:
    """Return the end temperature of a short circuit by the insulation [degC].

    Examples
    --------
    >>> end_temperature({"insulation": "EPR"})
    250.0
    """
    return insulation_data(str(row["insulation"]))["end_degc"]


def cable_reactance(row: Values) -> float:
    """Return the reactance of a cable of typical build [ohm/km].

    Raises
    ------
    ValueError
        No typical build of that section.
    """
    return typical_reactance(float(row["section_mm2"]), row["cores"], float(row["f_rated_hz"]))


def ambient(row: Values) -> float:
    """Return the ambient temperature of the project [degC]."""
    return float(row["project_ambient_degc"])


def opening_time_min(row: Values) -> float:
    """Return the shortest opening time of a device [s]."""
    return 0.01 if row["kind"] in {"circuit breaker", "overcurrent relay"} else 0.0


def breaking_time_max(row: Values) -> float:
    """Return the longest breaking time of a device [s]."""
    return 0.08 if row["kind"] in {"circuit breaker", "overcurrent relay"} else 0.0


def unregulated_voltage(row: Values) -> float:
    """Return the voltage of a compounded set at rated load with nothing taken away [% of rated].

    With a regulator that can only take excitation away it has to lie well above rated voltage; without one it
    is the set's own voltage.

    Examples
    --------
    >>> unregulated_voltage({"field_supply": "compounded"})
    120.0
    """
    return 100.0 if row["field_supply"] == "compounded without regulator" else 120.0


def compound_current_share(row: Values) -> float:
    """Return the current transformers' share of the field at rated load [%].

    The share of a flat compounding: the same unregulated voltage at no load and at rated load.

    Examples
    --------
    >>> machine = {"x_d_pu": 2.0, "x_q_pu": 2.0, "x_d1_pu": 0.25, "r_stator_pu": 0.0}
    >>> field = {"saturation_10": 0.0, "saturation_12": 0.0, "cos_phi_rated": 0.8}
    >>> round(compound_current_share(machine | field | {"unregulated_voltage_pu": 100.0}), 2)
    73.52
    """
    from study.formulas.excitation import compound_from_two_loads
    from study.formulas.saturation import saturation_curve
    from study.formulas.synchronous import Machine, field_required

    machine = Machine(
        xd_pu=float(row["x_d_pu"]),
        xq_pu=float(row["x_q_pu"]),
        xd_transient_pu=float(row["x_d1_pu"]),
        ra_pu=float(row["r_stator_pu"]),
        saturation=saturation_curve(float(row["saturation_10"]), float(row["saturation_12"])),
    )
    v, cos_phi = float(row["unregulated_voltage_pu"]) / 100.0, float(row["cos_phi_rated"])
    supply = compound_from_two_loads(v, v, cos_phi, machine)
    return 100.0 * supply.current_gain / float(field_required(v, 1.0, acos(cos_phi), machine))
