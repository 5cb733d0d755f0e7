"""IEC 61363-1 of the demonstration vessels' boards against a time simulation with full-order machines.

Bands: those measured on 10 000 drawn plants (loaded, forced field) for the formulas alone, see
`test_iec61363_drawn_plants`: boards Iac(T/2) -2..+17 %, Iac(0.1 s) +1..+13 %, peak at T/2 -9..+4 %, greatest
peak -6..+4 %; behind feeders -10..+10 %, -9..+13 %, -13..+2 %, -9..+3 %. Both are widened by the percent that
is the drawn plants' tail; a single plant may lie anywhere inside. At 0.1 s feeders get 3 % more: the vessels
hold 3.2 to 3.5 times rated current, the drawn plants 3 times.
"""

from pathlib import Path

import pytest

from study.analyses.short_circuit_simulation import simulate_fault
from study.issues import SolveError
from study.network.network import build_network
from study.workbook import read_plant
from tests import plants

BOOKS = Path(__file__).parents[2] / "workbooks"
BOARD = {"half": (-3, 18), "late": (0, 14), "ip": (-10, 5), "peak": (-7, 5)}
FEEDER = {"half": (-11, 11), "late": (-10, 17), "ip": (-14, 3), "peak": (-10, 4)}
CASES = [
    ("workboat", "Manoeuvring", "MSB", BOARD),
    ("workboat", "Harbour", "MSB", BOARD),
    ("workboat", "Manoeuvring", "DB-ER", FEEDER),
    ("workboat", "Harbour", "DB-230", FEEDER),
    ("service-vessel", "Manoeuvring", "MSB-P", BOARD),
    ("service-vessel", "Cargo", "MSB-S", BOARD),
    ("service-vessel", "Emergency", "ESB", BOARD),
    ("service-vessel", "At sea", "ER-P", FEEDER),
    ("large-vessel", "Station keeping closed ring", "MV-1", BOARD),
    ("large-vessel", "Heavy lift", "MV-2", BOARD),
    ("large-vessel", "Harbour", "SWB-P", BOARD),
    ("large-vessel", "Manoeuvring", "SWB-P", FEEDER),
    ("large-vessel", "Station keeping in two parts", "LV690-P", FEEDER),
]


@pytest.fixture(scope="module", name="network")
def _network():
    books = {book for book, *_ in CASES}
    return {book: build_network(read_plant(BOOKS / f"{book}.xlsx")) for book in books}


@pytest.mark.parametrize(("book", "mode", "place", "band"), CASES)
def test_a_place_lies_in_the_band_of_the_method(network, book, mode, place, band):
    r = simulate_fault(network[book], mode, place)
    found = {
        "half": r.ship_iac_half_a / r.iac_half_a,
        "late": r.ship_iac_100ms_a / r.iac_100ms_a,
        "ip": r.ship_ip_a / r.peak_a,
        "peak": r.ship_peak_a / r.peak_a,
    }
    for quantity, (low, high) in band.items():
        assert low <= 100.0 * (found[quantity] - 1.0) <= high, quantity
    assert r.ship_ip_a <= r.ship_peak_a
    # The general method knows no load before the fault and takes a fictitious resistance.
    assert abs(r.general_ip_a / r.peak_a - 1.0) < 0.12


def test_the_simulated_current_settles_at_the_sustained_current():
    """After many transient time constants the forced field holds what the workbook says: 3 times rated."""
    plant = plants.plant(
        boards=[plants.board("MSB", 450.0)], gensets=[plants.genset("G1", "MSB", t_d1_s=0.02, t_d2_s=0.005)]
    )
    r = simulate_fault(build_network(plant), "At sea", "MSB")
    assert r.left_out == ()
    assert r.iac_a[-1] == pytest.approx(3.0 * 1000e3 / (3**0.5 * 450.0), rel=1e-3)


def test_what_cannot_be_simulated_says_why(network):
    with pytest.raises(SolveError, match="no synchronous machine feeds MSB-P"):
        simulate_fault(network["service-vessel"], "Shore", "MSB-P")
    with pytest.raises(SolveError, match="MSB-P is dead"):
        simulate_fault(network["service-vessel"], "Emergency", "MSB-P")
    with pytest.raises(SolveError, match="no fault place 'Galley'"):
        simulate_fault(network["service-vessel"], "At sea", "Galley")
