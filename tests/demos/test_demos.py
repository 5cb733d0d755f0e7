"""The demo vessels are what their docstrings say: sound, but for the faults that are planted."""

from __future__ import annotations

from pathlib import Path

import pytest

from study.workbook.blank import write_workbook
from study.workbook.build import read_plant
from tests.demos import large_vessel, service_vessel, sizing, workboat
from tests.demos.rows import Row, Tables

VESSELS = {"workboat": workboat, "service vessel": service_vessel, "construction vessel": large_vessel}


@pytest.fixture(scope="module", params=VESSELS)
def vessel(request: pytest.FixtureRequest) -> tuple[str, Tables]:
    return request.param, VESSELS[request.param].tables()


@pytest.mark.parametrize(
    ("ambient_degc", "factor"),
    [
        (35, 1.10),
        (40, 1.05),
        (50, 0.94),
        (55, 0.88),
        (60, 0.82),
        (65, 0.74),
        (70, 0.67),
        (75, 0.58),
        (80, 0.47),
    ],
)
def test_ambient_correction_of_90_degc_cables(ambient_degc: float, factor: float) -> None:
    # Source: correction factors of IEC 60092-352 for 90 degC, from memory. Printed to two digits, some of
    # them cut and not rounded (35 and 65 degC), so the tolerance is one unit of the last digit.
    found = sizing.rating_a(50, "3 single", ambient_degc, 1) / sizing.rating_a(50, "3 single", 45, 1)
    assert found == pytest.approx(factor, abs=0.01)


@pytest.mark.parametrize(
    ("section_mm2", "amps"),
    [(2.5, 30), (4, 40), (6, 52), (10, 72), (16, 96), (25, 127), (50, 196), (240, 522)],
)
def test_rating_of_single_core_cables(section_mm2: float, amps: float) -> None:
    # Source: IEC 60092-352 ratings for 90 degC at 45 degC ambient, from memory, whole amperes.
    # Tolerance: half an ampere.
    assert sizing.rating_a(section_mm2, "3 single", 45, 1) == pytest.approx(amps, abs=0.51)


def test_breakers_protect_their_cables(vessel: tuple[str, Tables]) -> None:
    # The long-time setting may not exceed what the cable carries: IEC 60092-202, from memory.
    name, tables = vessel
    cables = {row["Cable"]: row for row in tables["Cables"]}
    thin = {
        row["Equipment"]
        for row in tables["Devices"]
        if row["Equipment"] in cables
        and row["Kind"] == "circuit breaker"
        and "Long-time current [A]" in row
        and _number(row, "Long-time current [A]") > _carries_a(cables[row["Equipment"]])
    }
    assert thin == ({"C-ACC-2"} if name == "service vessel" else set())


def test_reader_takes_the_workbook_without_a_remark(vessel: tuple[str, Tables], tmp_path: Path) -> None:
    _, tables = vessel
    write_workbook(tmp_path / "demo.xlsx", tables)
    plant = read_plant(tmp_path / "demo.xlsx")
    assert plant.findings == ()
    assert plant.not_read == ()
    assert [load.name for load in plant.loads] == [row["Load"] for row in tables["Loads"]]


def test_every_consumer_has_a_demand(vessel: tuple[str, Tables]) -> None:
    _, tables = vessel
    assert [row["Load"] for row in tables["Loads"]] == [row["Load"] for row in tables["Demand"]]


def test_cargo_overloads_the_two_sets_on_line() -> None:
    # Continuous load alone, by hand: sum of kW x load factor / efficiency of the cargo mode.
    tables = service_vessel.tables()
    demand = {row["Load"]: row for row in tables["Demand"]}
    total_kw = sum(_continuous_kw(row, demand[row["Load"]], "Cargo") for row in tables["Loads"])
    on_line_kw = 640 + 400
    # Below the capacity without the intermittent load, above it with 2.5 as diversity: about 110 %.
    assert total_kw < on_line_kw < total_kw + 336 / 2.5


def test_manoeuvring_trim_breaks_the_sharing_of_kvar() -> None:
    # Two equal sets share by Q1 - Q2 = Qr dE0/d (scalar droop law): each is off by half of that. The 4 %
    # droop at rated load and power factor 0.8 is close to 4 % per rated kvar.
    tables = service_vessel.tables()
    trim = next(r for r in tables["Set-points"] if r["Mode"] == "Manoeuvring")
    own = next(r for r in tables["Gensets"] if r["Genset"] == "DG1")
    off = 0.5 * (_number(trim, "No-load voltage [%]") - _number(own, "No-load voltage [%]")) / 4.0
    assert off > 0.10


def _number(row: Row, heading: str) -> float:
    return float(str(row[heading]))


def _carries_a(row: Row) -> float:
    if "Current rating [A]" in row:
        return _number(row, "Runs in parallel") * _number(row, "Current rating [A]")
    one = sizing.rating_a(
        _number(row, "Section [mm2]"),
        str(row["Cores"]),
        _number(row, "Ambient temperature [°C]"),
        int(str(row["Cables bunched"])),
    )
    return _number(row, "Runs in parallel") * one * float(str(row.get("Further derating", 1.0)))


def _continuous_kw(load: Row, demand: Row, mode: str) -> float:
    units = float(str(demand.get(f"{mode}: in use", 0)))
    if not units or demand[f"{mode}: duty"] != "continuous":
        return 0.0
    kw = float(str(load.get("Absorbed power [kW]", load["Rated output [kW]"])))
    efficiency = (
        sizing.motor_figures(_number(load, "Rated output [kW]"))[0] if load["Kind"] == "motor" else 1.0
    )
    factor = _number(demand, f"{mode}: load factor [%]") / 100
    return units * kw * factor / float(str(load.get("Efficiency", efficiency)))
