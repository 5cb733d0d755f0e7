"""Tables of cables and of the sets' protection: what a reader sees for a plant worked by hand."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from study.analyses.generator_protection import generator_protection
from study.analyses.protection_devices import protection_devices
from study.model.plant import Plant
from study.report.tables import Table
from study.report.tables_cables import cable_tables
from study.report.tables_generator_protection import generator_protection_tables
from tests.analyses.cable_studies import faults, flows, study_cables
from tests.analyses.test_cable_protection import small
from tests.analyses.test_generator_protection import two_sets


def tables_of(plant: Plant) -> dict[str, Table]:
    return {table.key: table for table in cable_tables(plant, study_cables(plant)[2])}


@pytest.fixture(scope="module")
def shown() -> dict[str, Table]:
    return tables_of(small(section_mm2=6.0))


def text(table: Table, key: str, row: int = 0) -> str:
    return table.texts(table.index(key))[row]


def test_overload_as_the_reader_sees_it(shown: dict[str, Table]) -> None:
    # 6 mm2, three cores: 17 x 6^0.625 x 0.7 = 36.5 A; relay set to 50 A, trips for certain at 60 A.
    table = shown["cable_overload"]
    assert [text(table, key) for key in ("cable", "device", "in_a", "rating_a", "i2_a")] == [
        "C1", "F1", "50.0", "36.5", "60.0",
    ]  # fmt: skip
    assert float(text(table, "in_percent")) == pytest.approx(100.0 * 50.0 / 36.47, abs=0.06)
    assert float(text(table, "i2_percent")) == pytest.approx(100.0 * 60.0 / 36.47, abs=0.06)
    assert table.worked is not None
    assert table.worked.lines[0].formula == "In / Iz"


def test_heat_as_the_reader_sees_it(shown: dict[str, Table]) -> None:
    # k²S² = (143.1 x 6)² = 0.737 kA²s.
    table = shown["cable_fault_range"]
    assert float(text(table, "withstand")) == pytest.approx(0.737, abs=6e-4)
    heat, part = float(text(table, "heat")), float(text(table, "heat_percent"))
    assert part == pytest.approx(100.0 * heat / 0.737, rel=2e-3)
    assert text(table, "device") == "Q1"
    assert text(table, "stage") == "instantaneous"


def test_the_proposal_and_its_reason(shown: dict[str, Table]) -> None:
    table = shown["cable_sections"]
    assert float(text(table, "section_mm2")) == 6.0
    assert text(table, "proposal") == "larger section"
    assert text(table, "reason") == "short circuit"


def test_what_is_exempt_or_unprotected_prints_words_and_no_infinity() -> None:
    steering = small(load="Steering gear")
    loads = (replace(steering.loads[0], essential_to="steering"),)
    exempt = tables_of(replace(steering, loads=loads, devices=steering.devices[:1]))["cable_overload"]
    assert [text(exempt, key) for key in ("exempt", "in_a", "i2_a", "device")] == [
        "steering gear",
        "",
        "",
        "",
    ]
    pump = small()
    bare = tables_of(replace(pump, devices=pump.devices[:1]))["cable_overload"]
    assert [text(bare, key) for key in ("in_a", "i2_a", "device")] == ["none", "none", "none"]


def test_a_cable_without_devices_is_shown_as_unknown() -> None:
    table = tables_of(replace(small(), devices=()))["cable_fault_range"]
    assert math.isnan(float(str(table.column("heat")[0])))
    assert text(table, "heat_percent") == "not assessed"


def test_stages_and_functions_of_the_sets() -> None:
    plant = two_sets()
    result = generator_protection(plant, protection_devices(plant), flows(plant), faults(plant))
    stages, functions = generator_protection_tables(plant, result)
    # 1150 A of 1049.7 A; 2600 A of 3.2 x 1049.7 A.
    assert float(text(stages, "long_time_percent")) == pytest.approx(109.6, abs=0.06)
    assert float(text(stages, "short_time_percent")) == pytest.approx(77.4, abs=0.06)
    assert text(stages, "parallel") == "yes"
    assert functions.n_rows == len(plant.protection_functions)
    assert [text(functions, key) for key in ("written", "delay_s")] == ["10 %", "8"]
