"""From tables to the plant: units, typical values and where they come from, places, and the digest."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest

from study.issues import WorkbookError
from study.model.plant import Assumption, Plant
from study.workbook import check_workbook, column_documentation, read_plant, write_workbook
from study.workbook.sheets import SHEETS
from tests.faulty_workbooks import good
from tests.faulty_workbooks.grids import Grids, check, good_grids, listing


def _plant(grids: Grids) -> Plant:
    plant, issues = check(grids)
    assert plant is not None, listing(issues)
    return plant


def _assumed(plant: Plant, equipment: str, quantity: str) -> Assumption:
    return next(a for a in plant.assumptions if (a.equipment, a.quantity) == (equipment, quantity))


def test_per_cent_become_fractions() -> None:
    plant = _plant(good_grids())
    dg = plant.genset("DG1")
    assert (dg.regulator.droop_pu, dg.regulator.no_load_voltage_pu) == (0.04, 1.02)
    assert (dg.governor.droop_pu, dg.alternator_efficiency, dg.min_engine_load) == (0.04, 0.94, 0.3)
    assert plant.transformers[0].u_k_pu == 0.04
    assert plant.transformers[0].tap_pu == 0.025
    assert plant.transfers[0].transfer_at_pu == 0.8
    assert plant.spectra[0].current_pu == 0.3
    assert plant.mode("At sea").demand["Pump"].load_factor == 0.8
    assert plant.mode("At sea").simultaneity == {("Engine auxiliaries", "intermittent"): 0.6}


@pytest.mark.parametrize(
    ("sheet", "heading", "other", "value"),
    [
        ("Gensets", "Rated apparent power [kVA]", "Rated apparent power [MVA]", 0.5),
        ("Gensets", "Rated voltage [V]", "Rated voltage [kV]", 0.45),
        ("Gensets", "Voltage droop [%]", "Voltage droop [pu]", 0.04),
        ("Gensets", "Xd [pu]", "Xd [%]", 240.0),
        ("Gensets", "Td'' [s]", "Td'' [ms]", 12.0),
        ("Gensets", "Rated power factor", "Rated power factor [%]", 80.0),
        ("Shore supplies", "Rated current [A]", "Rated current [kA]", 0.4),
        ("Ties", "Reactance [ohm]", "Reactance [mohm]", 0.1),
    ],
)
def test_another_unit_gives_the_same_plant(sheet: str, heading: str, other: str, value: float) -> None:
    grids = good_grids()
    grid = grids[sheet]
    place = grid.column(heading)
    grid.headings[place] = other
    ratio = value / grid.rows[0][place]
    for row in grid.rows:
        row[place] *= ratio
    changed, own = _plant(grids), _plant(good_grids())
    names = {"Gensets": "gensets", "Shore supplies": "shore_supplies", "Ties": "ties"}
    first, second = getattr(changed, names[sheet])[0], getattr(own, names[sheet])[0]
    assert str(first) == str(second)


def test_typical_reactances_follow_machine_theory() -> None:
    grids = good_grids()
    for heading in ("X2 [pu]", "Td' [s]", "Armature time constant [s]"):
        grids["Gensets"].put(0, heading, None)
    machine = _plant(grids).genset("DG1").machine
    # Kundur, Power System Stability and Control (1994), 4.2: T'd = T'd0 X'd/Xd; IEC 60034-4: X2 the mean of
    # the subtransient reactances, Ta = X2/(w Ra). From memory.
    assert machine.t_d1_s == pytest.approx(2.0 * 0.22 / 2.4, rel=1e-12)
    assert machine.x_2_pu == pytest.approx(0.5 * (0.15 + 0.18), rel=1e-12)
    assert machine.t_armature_s == pytest.approx(machine.x_2_pu / (120.0 * math.pi * 0.012), rel=1e-12)


def test_stator_resistance_from_the_armature_time_constant() -> None:
    grids = good_grids()
    grids["Gensets"].put(0, "Stator resistance [pu]", None)
    machine = _plant(grids).genset("DG1").machine
    assert machine.r_stator_pu == pytest.approx(0.165 / (120.0 * math.pi * 0.035), rel=1e-12)


def test_rated_voltage_and_frequency_at_three_quarters_of_load() -> None:
    grids = good_grids()
    grids["Gensets"].put(0, "No-load voltage [%]", None)
    grids["Gensets"].put(0, "No-load frequency [%]", None)
    dg = _plant(grids).genset("DG1")
    assert dg.regulator.no_load_voltage_pu - 0.75 * dg.regulator.droop_pu == pytest.approx(1.0, abs=1e-12)
    assert dg.governor.no_load_frequency_pu - 0.75 * dg.governor.droop_pu == pytest.approx(1.0, abs=1e-12)


@pytest.mark.parametrize(
    ("kw", "efficiency"),
    # IEC 60034-30-1:2014, IE2, four poles, 60 Hz, from memory; exact at the listed ratings.
    [(11.0, 0.910), (55.0, 0.941), (150.0, 0.950)],
)
def test_efficiency_of_a_motor(kw: float, efficiency: float) -> None:
    grids = good_grids()
    grids["Loads"].put(0, "Efficiency", None)
    grids["Loads"].put(0, "Rated output [kW]", kw)
    grids["Loads"].put(0, "Absorbed power [kW]", None)
    plant = _plant(grids)
    assert plant.load("Pump").efficiency == pytest.approx(efficiency, abs=0.0005)
    assumption = _assumed(plant, "Pump", "Efficiency")
    assert "IEC 60034-30-1" in assumption.source
    assert assumption.cell == "Loads!I5"
    assert plant.cell_of("Pump", "Efficiency") == "Loads!I5"


@pytest.mark.parametrize(("speed", "poles"), [(3560.0, 2), (1780.0, 4), (1180.0, 6), (885.0, 8), (3600.0, 2)])
def test_poles_from_the_rated_speed(speed: float, poles: int) -> None:
    grids = good_grids()
    grids["Loads"].put(0, "Poles", None)
    grids["Loads"].put(0, "Rated speed [rpm]", speed)
    motor = _plant(grids).load("Pump").motor
    assert motor is not None
    assert motor.poles == poles


@pytest.mark.parametrize(
    ("insulation", "service", "end"),
    # IEC 60092-360 and IEC 60949, from memory.
    [("PVC", 70.0, 150.0), ("EPR", 90.0, 250.0), ("XLPE", 90.0, 250.0), ("silicone", 95.0, 350.0)],
)
def test_temperatures_by_insulation(insulation: str, service: float, end: float) -> None:
    grids = good_grids()
    grids["Cables"].put(0, "Insulation", insulation)
    grids["Cables"].put(0, "Conductor temperature [°C]", None)
    grids["Cables"].put(0, "Short-circuit temperature [°C]", None)
    cable = _plant(grids).cables[0]
    assert (cable.conductor_temperature_degc, cable.short_circuit_temperature_degc) == (service, end)


@pytest.mark.parametrize(
    "heading",
    [
        "Icu [kA]",
        "Ics [kA]",
        "Icw [kA]",
        "Icm [kA]",
        "Rated voltage [V]",
        "Icw duration [s]",
        "Test power factor",
    ],
)
def test_ratings_of_devices_are_never_assumed(heading: str) -> None:
    grids = good_grids()
    grids["Devices"].put(0, heading, None)
    plant = _plant(grids)
    assert not [a for a in plant.assumptions if a.equipment == "Q-DG1"]


def test_what_a_load_is_made_of() -> None:
    plant = _plant(good_grids())
    pump, winch, lights = (plant.load(name) for name in ("Pump", "Winch", "Lights"))
    assert pump.motor is not None
    assert pump.converter is None
    assert winch.motor is None
    assert winch.converter is not None
    assert (lights.motor, lights.converter, lights.efficiency) == (None, None, 1.0)
    assert (pump.p_absorbed_kw, pump.absorbed_is_given, pump.trip_stage, pump.phases) == (27.0, True, 1, 3)


def test_a_motor_on_its_own_converter_has_both() -> None:
    grids = good_grids()
    grids["Loads"].put(0, "Starting method", "converter")
    for heading in good.LINE_START:
        grids["Loads"].put(0, heading, None)
    pump = _plant(grids).load("Pump")
    assert pump.motor is not None
    assert pump.converter is not None
    assert pump.converter.kind == "6-pulse"


def test_off_is_not_blank() -> None:
    devices = _plant(good_grids()).devices
    assert (devices[0].instantaneous_off, devices[0].instantaneous_a) == (True, None)
    assert (devices[1].instantaneous_off, devices[1].instantaneous_a) == (False, 9000.0)
    assert (devices[1].short_time_off, devices[1].short_time_a) == (True, None)
    assert (devices[2].instantaneous_off, devices[2].instantaneous_a) == (False, None)


def test_names_are_written_as_on_their_own_sheet() -> None:
    grids = good_grids()
    grids["Gensets"].put(0, "Board", " msb  A")
    grids["Running"].put(0, "Equipment", "dg1")
    grids["Demand"].put(0, "Load", "PUMP")
    grids["Loads"].put(1, "Service", "engine  AUXILIARIES")
    grids["Modes"].put(0, "Sets that may run together in change-over", "dg2, DG1,dg2")
    plant = _plant(grids)
    assert plant.genset("DG1").board == "MSB A"
    assert plant.mode("At sea").state("DG1") == "on"
    assert "Pump" in plant.mode("At sea").demand
    assert plant.mode("At sea").changeover_sets == ("DG2", "DG1")
    assert {load.service for load in plant.loads} == {"Engine auxiliaries"}


@pytest.mark.parametrize(
    ("text", "end"), [("from", "DG1"), ("TO", "MSB A"), ("msb a", "MSB A"), (None, None)]
)
def test_end_of_a_device(text: str | None, end: str | None) -> None:
    grids = good_grids()
    grids["Devices"].put(0, "End", text)
    assert _plant(grids).devices[0].end == end


def test_equipment_that_is_not_listed_is_on() -> None:
    grids = good_grids()
    del grids["Running"].rows[5]
    assert _plant(grids).mode("Harbour").is_on("BT")


def test_a_blank_state_of_a_tie_is_on_and_listed() -> None:
    grids = good_grids()
    grids["Running"].put(5, "Harbour", None)
    plant = _plant(grids)
    assert plant.mode("Harbour").states["BT"] == "on"
    assert _assumed(plant, "BT", "state in Harbour").cell == "Running!C10"


def test_a_load_that_is_not_listed_asks_for_nothing() -> None:
    grids = good_grids()
    del grids["Demand"].rows[0]
    grids["Demand"].put(0, "Harbour: in use", 0.0)
    modes = _plant(grids).modes
    assert "Pump" not in modes[0].demand
    assert "Thruster" not in modes[1].demand


def test_a_blank_duty_is_continuous_and_listed() -> None:
    grids = good_grids()
    grids["Demand"].drop("Harbour: duty")
    plant = _plant(grids)
    assert plant.mode("Harbour").demand["Pump"].duty == "continuous"
    assert _assumed(plant, "Pump", "duty in Harbour").value == "continuous"


def test_places_of_cells() -> None:
    plant = _plant(good_grids())
    assert plant.cell_of("DG1", "Voltage droop") == "Gensets!AU5"
    assert plant.cell_of("Shore", "Rated voltage") == "'Shore supplies'!C5"
    assert plant.cell_of("Pump", "Harbour: load factor") == "Demand!F5"
    assert plant.cell_of("DG2", "Harbour") == "Running!C6"
    assert plant.cell_of("At sea", "Kind") == "Modes!C5"
    assert plant.cell_of("Project", "Rated frequency") == "Project!B13"
    assert plant.cell_of("Acceptance", "Close margin") == "Acceptance!B5"
    assert plant.cell_of("DG1", "Colour") == ""
    assert len(plant.cells) == len(set(plant.cells)) > 500


def test_rows_and_columns_of_the_engineer_are_left_alone() -> None:
    grids = good_grids()
    grids["Loads"].add("Drawing", ["E-101"])
    grids["Loads"].add("# who", ["me"])
    grids["Loads"].rows.insert(2, [None] * len(grids["Loads"].headings))
    grids["Loads"].rows.insert(
        2, ["# the pumps", "nonsense", True, *[None] * (len(grids["Loads"].headings) - 3)]
    )
    grids["Notes"] = grids["Filters"]
    plant = _plant(grids)
    assert len(plant.loads) == 6
    assert plant.not_read == ("sheet “Notes”", "Loads!AN4: column “Drawing”")


def test_digest_stands_for_the_input_and_nothing_else() -> None:
    own = _plant(good_grids()).input_digest
    moved = good_grids()
    moved["Loads"].add("Drawing", ["E-101"])
    moved["Loads"].rows.insert(1, ["# remark"])
    moved["Notes"] = moved["Filters"]
    assert _plant(moved).input_digest == own
    changed = good_grids()
    changed["Loads"].put(0, "Description", "other")
    assert _plant(changed).input_digest != own
    assert len(own) == 64


def test_order_of_the_faults() -> None:
    grids = good_grids()
    grids["Loads"].put(1, "Rated output [kW]", -1.0)
    grids["Loads"].put(0, "Rated voltage [V]", -1.0)
    grids["Boards"].put(0, "Role", "x")
    grids["Project"].put(8, "Value", "x")
    _, issues = check(grids)
    faults = [(i.sheet, i.cell) for i in issues if i.severity == "fault"]
    assert faults == [("Project", "B13"), ("Boards", "C5"), ("Loads", "L5"), ("Loads", "G6")]


def test_a_workbook_error_holds_every_fault(tmp_path: Path) -> None:
    path = tmp_path / "empty.xlsx"
    write_workbook(path)
    with pytest.raises(WorkbookError, match="Vessel is not given") as caught:
        read_plant(path)
    assert len(caught.value.issues) >= 8
    assert {issue.severity for issue in caught.value.issues} == {"fault"}


def test_the_good_workbook_through_a_file(tmp_path: Path) -> None:
    path = tmp_path / "good.xlsx"
    write_workbook(path, good.tables())
    plant, issues = check_workbook(path)
    assert plant is not None, listing(issues)
    assert issues == ()
    in_memory = _plant(good_grids())
    skipped = {"acceptance", "cells", "file_name", "input_digest", "file_digest"}
    for name in Plant.__dataclass_fields__:
        if name not in skipped:
            assert getattr(plant, name) == getattr(in_memory, name), name


def test_documentation_names_every_column() -> None:
    text = column_documentation()
    for spec in SHEETS:
        assert f"### {spec.name}\n" in text
        for column in (*spec.columns, *spec.items):
            assert f"| {column.heading if column in spec.columns else column.name} |" in text


def test_every_typical_value_names_its_source() -> None:
    columns: list[Any] = [c for spec in SHEETS for c in (*spec.columns, *spec.items) if c.blank == "typical"]
    assert all(column.typical is not None and column.typical.source for column in columns)
    assert all(
        column.typical is None for spec in SHEETS for column in spec.columns if column.blank != "typical"
    )
