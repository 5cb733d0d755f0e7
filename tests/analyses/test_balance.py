"""The balance as a whole: totals that add up, findings, second feeds, synchronous motors."""

from __future__ import annotations

import math
import random
from typing import Any

import numpy as np
import pytest

from study.analyses.balance import load_balance
from study.network.view import view_of
from study.results.balance import DUTIES, BalanceResult
from tests.plants import (
    board,
    cable,
    demand,
    filter_bank,
    genset,
    load,
    mode,
    plant,
    set_point,
    small_plant,
    synchronous_motor,
    tie,
    transfer,
)


def balance(p: Any) -> BalanceResult:
    return load_balance(p, [view_of(p, m) for m in p.modes])


def large_plant(loads: int = 60, modes: int = 4, seed: int = 7) -> Any:
    """Return many loads of all kinds on four boards, the last of which is dead in every second mode."""
    draw = random.Random(seed)
    boards = ["MSB", "DB1", "DB2", "DB3"]
    rows = [
        load(
            f"L{i}",
            draw.choice(boards),
            kind=draw.choice(["motor", "heating", "lighting", "general"]),
            p_rated_kw=draw.uniform(0.3, 90.0),
            service=draw.choice(["Deck", "Galley", "Engine", "Lighting"]),
            installed=3,
        )
        for i in range(loads)
    ]
    asked = [
        mode(
            f"M{k}",
            {"C-DB3": "off" if k % 2 else "on"},
            {
                x.name: demand(draw.choice([0.0, 1.0, 2.0, 3.0]), draw.uniform(0.2, 1.0), draw.choice(DUTIES))
                for x in rows
            },
            simultaneity={("Deck", "intermittent"): 0.7, ("Galley", "occasional"): 0.1},
        )
        for k in range(modes)
    ]
    return plant(
        boards=[board(b) for b in boards],
        gensets=[genset("G1", "MSB"), genset("G2", "MSB")],
        cables=[cable(f"C-{b}", "MSB", b) for b in boards[1:]],
        loads=rows,
        modes=asked,
    )


def test_totals_by_load_service_duty_board_island_and_set_are_one_number() -> None:
    # Sums of the same unrounded values in another order agree to the last bits of a double.
    result = balance(large_plant())
    for row, got in enumerate(result.modes):
        for total, parts in (
            (got.p_total_kw, result.demand.p_counted_kw[row]),
            (got.p_total_kw, got.p_by_service_kw.ravel()),
            (got.p_total_kw, got.p_by_board_kw),
            (got.p_total_kw, [i.p_load_kw for i in got.islands]),
            (got.p_total_kw, [s.p_kw for s in got.sets]),
            (got.q_total_kvar, result.demand.q_counted_kvar[row]),
            (got.q_total_kvar, got.q_by_service_kvar.ravel()),
            (got.q_total_kvar, got.q_by_board_kvar),
            (got.q_total_kvar, [s.q_kvar for s in got.sets]),
        ):
            assert math.fsum(parts) == pytest.approx(total, rel=1e-13)
        assert got.s_total_kva == pytest.approx(math.hypot(got.p_total_kw, got.q_total_kvar))
        connected = result.demand.p_kw[row] * result.demand.fed[row]
        assert math.fsum(got.p_connected_by_service_kw.ravel()) == pytest.approx(math.fsum(connected))
        unfed = result.demand.p_kw[row][~result.demand.fed[row]]
        assert got.p_unfed_kw == pytest.approx(math.fsum(unfed))
        assert (got.p_unfed_kw > 0.0) == bool(row % 2)


def test_counted_is_connected_times_factor() -> None:
    got = balance(large_plant()).demand
    np.testing.assert_array_equal(got.p_counted_kw, got.p_kw * got.factor)
    np.testing.assert_array_equal(got.q_counted_kvar, got.q_kvar * got.factor)
    np.testing.assert_array_equal(got.p_kw, got.in_use * got.p_unit_kw)


def test_arrays_of_the_result_cannot_be_written_to() -> None:
    result = balance(small_plant())
    with pytest.raises(ValueError, match="read-only"):
        result.demand.p_kw[0, 0] = 1.0
    with pytest.raises(ValueError, match="read-only"):
        result.modes[0].p_by_service_kw[0, 0] = 1.0


def test_load_behind_a_transformer_counts_on_its_own_board_and_in_the_island() -> None:
    # 400/0.93 = 430.108 kW pump, 200 kW heater on MSB; 80 kW lights on LB: 710.108 kW on two sets
    got = balance(small_plant()).modes[0]
    assert got.p_by_board_kw.tolist() == pytest.approx([630.108, 80.0], abs=5e-4)
    assert got.islands[0].boards == ("MSB", "LB")
    assert [s.p_kw for s in got.sets] == pytest.approx([355.054, 355.054], abs=5e-4)


def test_load_on_its_second_feed_counts_on_the_board_that_feeds_it() -> None:
    p = plant(
        boards=[board("A"), board("B")],
        gensets=[genset("G1", "A"), genset("G2", "B")],
        loads=[load("Steering gear", "A", kind="heating", p_rated_kw=30.0)],
        transfers=[transfer("Steering gear", "A", "B")],
        modes=[mode("M", {"G1": "off"}, {"Steering gear": demand()})],
    )
    got = balance(p).modes[0]
    assert got.p_by_board_kw.tolist() == [0.0, 30.0]
    assert [(i.boards, i.p_load_kw) for i in got.islands] == [(("B",), 30.0)]
    assert got.p_unfed_kw == 0.0


def test_load_on_a_second_feed_with_a_cable_of_its_own() -> None:
    p = plant(
        boards=[board("A"), board("B")],
        gensets=[genset("G1", "A"), genset("G2", "B")],
        cables=[cable("F1", "A", "Steering gear"), cable("F2", "B", "Steering gear")],
        loads=[load("Steering gear", "A", kind="heating", p_rated_kw=30.0)],
        transfers=[transfer("Steering gear", "F1", "F2")],
        modes=[mode("M", {"G1": "off"}, {"Steering gear": demand()})],
    )
    assert balance(p).modes[0].p_by_board_kw.tolist() == [0.0, 30.0]


def test_synchronous_motor_counts_as_a_service_of_its_own() -> None:
    # 950 kW output at 0.95: 1000 kW input beside 200 kW of heating
    p = plant(
        boards=[board("MSB"), board("B2")],
        gensets=[genset(f"G{i}", "MSB") for i in (1, 2)],
        synchronous_motors=[synchronous_motor("M1", "B2", p_output_kw=950.0)],
        ties=[tie("BT", "MSB", "B2")],
        loads=[load("Heater", "MSB", kind="heating", p_rated_kw=200.0)],
        modes=[
            mode("On", {}, {"Heater": demand()}),
            mode("Off", {"M1": "off"}, {"Heater": demand()}),
            mode("Set", {}, {"Heater": demand()}, [set_point("M1", "Set", p_set_kw=400.0)]),
        ],
    )
    on, off, trimmed = balance(p).modes
    assert on.services == ("auxiliaries", "Synchronous motors")
    assert (on.p_total_kw, off.p_total_kw, trimmed.p_total_kw) == pytest.approx((1200.0, 200.0, 600.0))
    assert on.p_synchronous_kw == pytest.approx(1000.0)
    assert on.p_by_board_kw.tolist() == pytest.approx([200.0, 1000.0])
    assert math.fsum(on.p_by_service_kw.ravel()) == pytest.approx(on.p_total_kw)
    assert on.islands[0].p_load_kw == pytest.approx(1200.0)
    assert on.alternative_kw == pytest.approx(1200.0)
    assert [s.p_kw for s in on.sets] == pytest.approx([600.0, 600.0])
    assert any("M1 counts with 1000 kW" in f for f in on.findings)
    assert not any("M1" in f for f in off.findings)


def test_odd_things_are_said_in_words() -> None:
    loads = [
        load("Fire pump", "MSB", essential_to="safety", trip_stage=1),
        load("Fan", "MSB", installed=1),
    ]
    p = plant(
        boards=[board("MSB"), board("B2"), board("B3")],
        gensets=[genset("G1", "MSB"), genset("G2", "B2"), genset("G3", "B3")],
        filters=[filter_bank("F1", "MSB")],
        loads=loads,
        modes=[
            mode(
                "M",
                {"G2": "standby"},
                {"Fire pump": demand(), "Fan": demand(2.0)},
                simultaneity={("Dekc", "continuous"): 0.5},
            )
        ],
    )
    said = balance(p).modes[0].findings
    for words in (
        "Fire pump is essential to safety and yet in trip stage 1.",
        "Simultaneity factors are given for Dekc, a service that no load has.",
        "G2 stands by on B2, which is dead in M.",
        "G3 on B3: no load in this island.",
        "Fan: 2 in use, 1 installed.",
        "The kvar of filters and capacitors (F1) are in the load flow and not in the balance.",
    ):
        assert words in said


def test_what_concerns_the_plant_is_said_once() -> None:
    p = plant(
        boards=[board("MSB")],
        gensets=[genset("G1", "MSB")],
        loads=[load("Pump", "MSB")],
        modes=[mode("A", {}, {"Pump": demand()}), mode("B", {}, {"Pump": demand()})],
    )
    first, second = balance(p).modes
    assert sum("restart delay" in f for f in first.findings) == 1
    assert not any("restart delay" in f for f in second.findings)


def test_plant_without_loads_or_sources_is_a_result_too() -> None:
    p = plant(boards=[board("MSB")], modes=[mode("M")])
    got = balance(p)
    assert got.modes[0].p_total_kw == 0.0
    assert got.modes[0].islands == ()
    assert got.demand.p_kw.shape == (1, 0)


def test_views_have_to_be_those_of_the_modes() -> None:
    with pytest.raises(ValueError, match="one view for each mode"):
        load_balance(small_plant(), [])
