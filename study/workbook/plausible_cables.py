"""Cables to loads whose fall of voltage can only come from a wrong length, section or unit."""

from __future__ import annotations

from typing import Any, Final

from study.workbook.columns import Values
from study.workbook.tables import Row
from study.workbook.topology import Plan

LARGEST_DROP: Final = 0.20
RESISTIVITY_OHM_MM2_PER_KM: Final = {"copper": 17.241, "aluminium": 28.264}
PER_KELVIN: Final = 0.00393


def drop_at_rated_current(load: Values, cable: Values, u_nominal_v: float) -> float:
    """Return the fall of voltage along a cable at the rated current of its load [pu of nominal].

    Resistance alone, at the conductor's service temperature: a gate for wrong units, not a calculation.

    Source: resistivity at 20 degC of IEC 60028 (copper) and IEC 60889 (aluminium), from memory.

    Examples
    --------
    >>> load = {"p_rated_kw": 40.0, "efficiency": 1.0, "cos_phi": 1.0, "phases": "3"}
    >>> cable = {"section_mm2": 10.0, "length_m": 100.0, "runs": 1, "conductor": "copper",
    ...          "conductor_temperature_degc": 20.0}
    >>> round(drop_at_rated_current(load, cable, 400.0), 4)
    0.0431
    """
    per_km = RESISTIVITY_OHM_MM2_PER_KM[cable["conductor"]] / (cable["section_mm2"] * cable["runs"])
    hot = 1.0 + PER_KELVIN * (cable["conductor_temperature_degc"] - 20.0)
    ohm = per_km * hot * cable["length_m"] / 1000.0
    input_w = 1000.0 * load["p_rated_kw"] / load["efficiency"]
    # With P = sqrt3 U I cos(phi): sqrt3 I R cos(phi) / U = P R / U^2; out and back without three phases.
    both_ways = 1.0 if load["phases"] == "3" else 2.0
    return float(both_ways * input_w * ohm / u_nominal_v**2)


def check_cable_drops(plan: Plan) -> None:
    """Report cables to loads that lose more than a fifth of the voltage at rated current."""
    for row in plan.of("Cables"):
        ends = [plan.names.rows.get(row.values.get(field) or "") for field in ("from_end", "to_end")]
        load = next((end for end in ends if end is not None and end.sheet == "Loads"), None)
        if load is not None and _complete(row, load):
            _check(plan, row, load)


def _complete(cable: Row, load: Row) -> bool:
    return cable.has(
        "section_mm2", "length_m", "runs", "conductor", "conductor_temperature_degc"
    ) and load.has("p_rated_kw", "efficiency", "phases", "board_u_nominal_v")


def _check(plan: Plan, cable: Row, load: Row) -> None:
    values: dict[str, Any] = load.values
    drop = drop_at_rated_current(values, cable.values, values["board_u_nominal_v"])
    if drop > LARGEST_DROP:
        said = (
            f"{cable.name} would lose {100.0 * drop:.3g} % of the voltage at the rated current of {load.name}"
        )
        wanted = f"usual is below {100.0 * LARGEST_DROP:g} %; check length, section and units"
        plan.report("cable-drop", cable, "length_m", said, wanted, warning=True)
