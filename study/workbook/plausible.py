"""Gates before any solving: figures that contradict each other, or that no real plant has."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from itertools import pairwise
from math import sqrt
from typing import Final

from study.workbook.plausible_cables import check_cables
from study.workbook.plausible_operation import check_events, check_interlocks, check_modes, known_modes
from study.workbook.plausible_protection import check_protection
from study.workbook.plausible_rings import check_rings
from study.workbook.plausible_voltage import check_voltages
from study.workbook.sheets import SOURCE_SHEETS
from study.workbook.tables import Row
from study.workbook.topology import Plan, check_topology

Gate = tuple[float, float]
FIRST_CYCLE: Final[tuple[Gate, Gate]] = ((4.0, 12.0), (2.0, 25.0))
RESISTANCE_RATIO: Final[tuple[Gate, Gate]] = ((0.02, 0.3), (0.001, 1.0))
ENGINE_RATIO: Final[tuple[Gate, Gate]] = ((0.7, 1.3), (0.2, 5.0))
LOAD_SUM: Final = 3.0
LARGEST_SLIP: Final = 0.12


def check_plausible(plan: Plan, modes: Sequence[str]) -> None:
    """Run every gate; rows whose cells are at fault are left out of what needs them."""
    check_topology(plan)
    check_voltages(plan)
    for row in plan.of("Gensets", "Synchronous motors"):
        _check_machine(plan, row)
    for row in plan.of("Gensets"):
        _check_engine(plan, row)
    for row in plan.of("Shore supplies"):
        _check_fault_levels(plan, row)
    for row in plan.of("Transformers"):
        _check_short_circuit_voltage(plan, row)
    for row in plan.of("Loads"):
        _check_load(plan, row)
    _check_load_sum(plan)
    check_cables(plan)
    known = known_modes(plan, modes)
    check_modes(plan, known)
    check_interlocks(plan, known)
    check_rings(plan, known)
    check_events(plan)
    check_protection(plan)


def _check_machine(plan: Plan, row: Row) -> None:
    _rising(plan, row, ("x_d2_pu", "x_d1_pu", "x_d_pu"), "reactance-order")
    _rising(plan, row, ("x_d2_saturated_pu", "x_d1_saturated_pu"), "reactance-order")
    _rising(plan, row, ("x_l_pu", "x_d2_pu"), "reactance-order")
    _rising(plan, row, ("x_d2_saturated_pu", "x_d2_pu"), "reactance-order", equal=True)
    _rising(plan, row, ("x_d1_saturated_pu", "x_d1_pu"), "reactance-order", equal=True)
    _rising(plan, row, ("x_q2_pu", "x_q_pu"), "reactance-order", equal=True)
    _rising(plan, row, ("t_d2_s", "t_d1_s", "t_d01_s"), "time-constant-order")
    _rising(plan, row, ("saturation_10", "saturation_12"), "saturation-order")
    if row.has("x_d2_saturated_pu"):
        multiple = 1.0 / row.values["x_d2_saturated_pu"]
        said = (
            f"{row.name}: Xd'' saturated gives a short-circuit current of {multiple:.3g} times rated current"
        )
        _gate(plan, row, "x_d2_pu", multiple, FIRST_CYCLE, code="first-cycle-current", said=said)
    if row.has("r_stator_pu", "x_d2_pu"):
        ratio = row.values["r_stator_pu"] / row.values["x_d2_pu"]
        said = f"{row.name}: stator resistance over Xd'' is {ratio:.3g}"
        _gate(plan, row, "r_stator_pu", ratio, RESISTANCE_RATIO, code="resistance-ratio", said=said)


def _rising(plan: Plan, row: Row, fields: tuple[str, ...], code: str, *, equal: bool = False) -> None:
    """Report two values of which the first should be the smaller."""
    for low, high in pairwise(fields):
        if not row.has(low, high) or row.broken & {low, high}:
            continue
        smaller, larger = row.values[low], row.values[high]
        if smaller < larger or (equal and smaller == larger):
            continue
        columns = row.table.spec.column(low), row.table.spec.column(high)
        unit = f" {columns[0].unit}" if columns[0].unit else ""
        # A value that the engineer gave is the one to look at, not the typical one beside it.
        field = low if (None, low) in row.table.at else high
        said = f"{row.name}: {columns[0].name} is {smaller:.4g}{unit}, {columns[1].name} {larger:.4g}{unit}"
        plan.report(code, row, field, said, f"{columns[0].name} must be below {columns[1].name}")


def _gate(
    plan: Plan,
    row: Row,
    field: str,
    value: float,
    gates: tuple[Gate, Gate],
    *,
    code: str,
    said: str,
    check: str = "check the data",
) -> None:
    """Report a value outside its usual range as a warning, outside the possible one as a fault."""
    (usual_low, usual_high), (low, high) = gates
    if usual_low <= value <= usual_high:
        return
    wanted = f"usual is {usual_low:g} to {usual_high:g}; {check}"
    plan.report(code, row, field, said, wanted, warning=low <= value <= high)


def _check_engine(plan: Plan, row: Row) -> None:
    if not row.has("s_rated_kva", "cos_phi_rated", "p_engine_kw", "alternator_efficiency"):
        return
    values = row.values
    output_kw = values["p_engine_kw"] * values["alternator_efficiency"] / 100.0
    alternator_kw = values["s_rated_kva"] * values["cos_phi_rated"]
    said = (
        f"{row.name}: the engine gives {output_kw:.4g} kW at the terminals, the alternator is rated "
        f"{alternator_kw:.4g} kW, a ratio of {output_kw / alternator_kw:.3g}"
    )
    _gate(
        plan, row, "p_engine_kw", output_kw / alternator_kw, ENGINE_RATIO, code="engine-power", said=said,
        check="check engine power, rated kVA and power factor",
    )  # fmt: skip


def _check_fault_levels(plan: Plan, row: Row) -> None:
    if not row.has("fault_level_max_mva", "fault_level_min_mva"):
        return
    if row.values["fault_level_min_mva"] > row.values["fault_level_max_mva"]:
        said = f"{row.name}: the least fault level is above the largest"
        plan.report("fault-levels", row, "fault_level_min_mva", said, "exchange the two")


def _check_short_circuit_voltage(plan: Plan, row: Row) -> None:
    if not row.has("copper_loss_kw", "s_rated_kva", "u_k_pu"):
        return
    loss_percent = 100.0 * row.values["copper_loss_kw"] / row.values["s_rated_kva"]
    if loss_percent >= row.values["u_k_pu"]:
        said = (
            f"{row.name}: the copper loss is {loss_percent:.3g} % of rated power, the short-circuit voltage "
            f"{row.values['u_k_pu']:.3g} %"
        )
        plan.report(
            "u-k-order", row, "copper_loss_kw", said, "the loss must be below the short-circuit voltage"
        )


def _check_load(plan: Plan, row: Row) -> None:
    if row.has("p_absorbed_kw", "p_rated_kw") and row.values["p_absorbed_kw"] > row.values["p_rated_kw"]:
        said = f"{row.name}: the absorbed power is above the rated output"
        plan.report("absorbed-power", row, "p_absorbed_kw", said, "check the two", warning=True)
    if row.values.get("kind") != "motor" or not row.has("poles"):
        return
    if row.values["poles"] % 2:
        said = f"{row.name}: the number of poles is {row.values['poles']}"
        plan.report("out-of-range", row, "poles", said, "give an even number")
    elif row.has("speed_rpm", "f_rated_hz"):
        _check_slip(plan, row)


def _check_slip(plan: Plan, row: Row) -> None:
    synchronous_rpm = 120.0 * row.values["f_rated_hz"] / row.values["poles"]
    speed_rpm = row.values["speed_rpm"]
    said = (
        f"{row.name}: the rated speed is {speed_rpm:.5g} rpm, the synchronous one {synchronous_rpm:.5g} rpm"
    )
    if speed_rpm > synchronous_rpm:
        plan.report("out-of-range", row, "speed_rpm", said, "correct the speed or the number of poles")
    elif speed_rpm < (1.0 - LARGEST_SLIP) * synchronous_rpm:
        wanted = "check the speed, the number of poles and the rated frequency"
        plan.report("unusual-value", row, "speed_rpm", said, wanted, warning=True)


def _check_load_sum(plan: Plan) -> None:
    loads = [row for row in plan.of("Loads") if row.has("installed", "p_rated_kw")]
    sum_kw = sum(row.values["installed"] * row.values["p_rated_kw"] for row in loads)
    capacities_kw = [_capacity_kw(row) for row in plan.of(*SOURCE_SHEETS)]
    capacity_kw = sum(capacities_kw)
    # A source whose rating is at fault has none, and the sum says nothing.
    if not plan.found.unread.isdisjoint(SOURCE_SHEETS):
        return
    if all(capacities_kw) and capacity_kw > 0.0 and sum_kw > LOAD_SUM * capacity_kw:
        largest = max(loads, key=lambda row: float(row.values["installed"] * row.values["p_rated_kw"]))
        said = f"all loads together are {sum_kw:.4g} kW, all sources {capacity_kw:.4g} kW"
        wanted = f"usual is below {LOAD_SUM:g} times; check the units, first those of {largest.name}"
        plan.report("load-sum", largest, "p_rated_kw", said, wanted, warning=True)


def _capacity_kw(row: Row) -> float:
    by_sheet: dict[str, Callable[[], float]] = {
        "Gensets": lambda: row.values["s_rated_kva"] * row.values["cos_phi_rated"],
        "Shore supplies": lambda: sqrt(3.0) * row.values["u_rated_v"] * row.values["i_rated_a"] / 1000.0,
        "Converter supplies": lambda: row.values["s_rated_kva"],
    }
    needed = {
        "Gensets": ("s_rated_kva", "cos_phi_rated"),
        "Shore supplies": ("u_rated_v", "i_rated_a"),
        "Converter supplies": ("s_rated_kva",),
    }
    return float(by_sheet[row.sheet]()) if row.has(*needed[row.sheet]) else 0.0
