"""Cables that cannot be: conductors of no standard, ambients too warm, a fall of voltage out of reason."""

from __future__ import annotations

from math import sqrt
from typing import Final

from study.formulas.cables import conductor_resistance, resistance_at, voltage_drop_approximate
from study.workbook.columns import Values
from study.workbook.tables import Row
from study.workbook.topology import Plan

LARGEST_DROP: Final = 0.20
CONDUCTOR: Final = ("section_mm2", "conductor", "conductor_class", "tinned")
RUN: Final = (*CONDUCTOR, "length_m", "runs", "conductor_temperature_degc", "reactance_ohm_per_km")
CONSUMER: Final = ("p_rated_kw", "efficiency", "cos_phi", "phases", "board_u_nominal_v")


def check_cables(plan: Plan) -> None:
    """Report cables that cannot be, and those to loads that lose more than a fifth of the voltage."""
    for row in plan.of("Cables"):
        if row.broken:
            continue
        _check_conductor(plan, row)
        _check_ambient(plan, row)
        ends = [plan.names.rows.get(row.values[field]) for field in ("from_end", "to_end")]
        load = next((end for end in ends if end is not None and end.sheet == "Loads"), None)
        if load is not None and row.has(*RUN) and load.has(*CONSUMER):
            _check_drop(plan, row, load)


def r20_ohm_per_km(cable: Values) -> float:
    """Return the resistance of one conductor at 20 degC, the maker's where given [ohm/km].

    Raises
    ------
    ValueError
        IEC 60228 has no such conductor, and the maker's resistance is not given.
    """
    given = cable.get("resistance_ohm_per_km")
    if given is not None:
        return float(given)
    kind = (cable["conductor"], int(cable["conductor_class"]), cable["tinned"] == "yes")
    return conductor_resistance(cable["section_mm2"], *kind)


def _check_conductor(plan: Plan, row: Row) -> None:
    try:
        r20_ohm_per_km(row.values)
    except ValueError as error:
        plan.report("no-such-conductor", row, "section_mm2", f"{row.name}: Resistance is blank", str(error))


def _check_ambient(plan: Plan, row: Row) -> None:
    ambient, conductor = row.values["ambient_temperature_degc"], row.values["conductor_temperature_degc"]
    if ambient >= conductor:
        said = (
            f"{row.name}: the ambient temperature is {ambient:g} °C, that of the conductor {conductor:g} °C"
        )
        plan.report("too-warm", row, "ambient_temperature_degc", said, "check the two")
    if conductor >= row.values["short_circuit_temperature_degc"]:
        said = f"{row.name}: the conductor is as warm in service as at the end of a short circuit"
        plan.report("too-warm", row, "short_circuit_temperature_degc", said, "check the two")


def drop_at_rated_current(load: Values, cable: Values) -> float:
    """Return the fall of voltage along a cable at the rated current of its load [pu of nominal].

    Examples
    --------
    >>> load = {"p_rated_kw": 40.0, "efficiency": 1.0, "cos_phi": 1.0, "phases": "3",
    ...         "board_u_nominal_v": 400.0}
    >>> cable = {"conductor": "copper", "length_m": 100.0, "runs": 1, "conductor_temperature_degc": 20.0,
    ...          "resistance_ohm_per_km": 1.83, "reactance_ohm_per_km": 0.1}
    >>> round(drop_at_rated_current(load, cable), 3)
    0.046
    """
    phases, nominal_v = int(load["phases"]), load["board_u_nominal_v"]
    input_va = 1000.0 * load["p_rated_kw"] / load["efficiency"] / load["cos_phi"]
    amperes = input_va / (nominal_v * (sqrt(3.0) if phases == 3 else 1.0))
    hot = resistance_at(r20_ohm_per_km(cable), cable["conductor_temperature_degc"], cable["conductor"])
    km = cable["length_m"] / 1000.0 / cable["runs"]
    reactance = cable["reactance_ohm_per_km"] * km
    return float(voltage_drop_approximate(amperes, hot * km, reactance, load["cos_phi"], phases) / nominal_v)


def _check_drop(plan: Plan, cable: Row, load: Row) -> None:
    if cable.broken:
        return
    drop = drop_at_rated_current(load.values, cable.values)
    if drop > LARGEST_DROP:
        said = (
            f"{cable.name} would lose {100.0 * drop:.3g} % of the voltage at the rated current of {load.name}"
        )
        wanted = f"usual is below {100.0 * LARGEST_DROP:g} %; check length, section and units"
        plan.report("cable-drop", cable, "length_m", said, wanted, warning=True)
