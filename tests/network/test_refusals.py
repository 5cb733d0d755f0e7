"""Islands whose sharing is undetermined are refused with a sentence; the determinate ones are solved."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from study.network.batch import BatchSolution, solve_batch
from study.network.network import build_network, mode_network
from tests.plants import board, converter_supply, genset, load, mode, plant, set_point, shore


def solve(gensets: list[Any], p_kw: float = 1000.0, q_kvar: float = 700.0, **more: Any) -> BatchSolution:
    p = plant(boards=[board("M", 440.0)], gensets=gensets, loads=[load("L", "M")], **more)
    at = mode_network(build_network(p), p.modes[0])
    return solve_batch(at, [p_kw], [q_kvar])


def a_set(name: str, **changes: Any) -> Any:
    return genset(name, "M", u_rated_v=440.0, **changes)


def test_two_sets_without_droop_are_refused() -> None:
    found = solve([a_set("G1", voltage_droop_pu=0.0), a_set("G2", regulator_mode="no droop")])
    assert not found.solved[0]
    assert "kvar is undetermined: G1 and G2" in found.reason[0]
    assert np.isnan(found.source_q_kvar).all()


def test_one_set_without_droop_holds_the_voltage_and_takes_every_change() -> None:
    sets = [a_set("G1", voltage_droop_pu=0.0), a_set("G2")]
    first, second = solve(sets, 1000.0, 700.0), solve(sets, 1000.0, 800.0)
    assert first.source_u_pu[0] == pytest.approx([1.0, 1.0], abs=1e-9)
    change = second.source_q_kvar[0] - first.source_q_kvar[0]
    assert change == pytest.approx([100.0, 0.0], abs=1e-5)


def test_cross_current_compensation_shares_by_rating_without_board_droop() -> None:
    """The differential circuit sees nothing when each set carries kvar by its rating (IEEE 421.5)."""
    sets = [
        a_set("G1", regulator_mode="cross-current"),
        a_set("G2", s_rated_kva=500.0, p_engine_kw=430.0, regulator_mode="cross-current"),
    ]
    found = solve(sets, 900.0, 600.0)
    assert found.source_q_kvar[0] == pytest.approx([400.0, 200.0], rel=1e-9)
    assert found.source_u_pu[0] == pytest.approx([1.0, 1.0], abs=1e-9)


def test_a_cross_current_group_and_a_set_without_droop_are_refused() -> None:
    sets = [a_set("G1", regulator_mode="cross-current"), a_set("G2", regulator_mode="cross-current")]
    found = solve([*sets, a_set("G3", voltage_droop_pu=0.0)])
    assert "G1 with G2" in found.reason[0]


def test_sets_of_two_cross_current_groups_are_refused() -> None:
    sets = [
        a_set("G1", regulator_mode="cross-current", cross_current_group="port"),
        a_set("G2", regulator_mode="cross-current", cross_current_group="starboard"),
    ]
    assert "kvar is undetermined" in solve(sets).reason[0]


def test_two_isochronous_governors_are_refused() -> None:
    sets = [a_set("G1", governor_mode="isochronous"), a_set("G2", governor_mode="isochronous")]
    assert "kW is undetermined: G1 and G2" in solve(sets).reason[0]


def test_one_isochronous_governor_holds_the_frequency() -> None:
    sets = [
        a_set("G1", governor_mode="isochronous", no_load_frequency_pu=1.0),
        a_set("G2", no_load_frequency_pu=1.02, speed_droop_pu=0.04),
    ]
    found = solve(sets)
    assert found.frequency_pu[0] == pytest.approx([1.0])
    assert found.source_p_kw[0, 1] == pytest.approx(400.0, rel=1e-9)  # 0.02/0.04 of 800 kW


def test_load_sharing_governors_share_by_rating() -> None:
    small = {"s_rated_kva": 500.0, "p_engine_kw": 430.0}
    sets = [
        a_set("G1", governor_mode="load sharing", no_load_frequency_pu=1.0),
        a_set("G2", governor_mode="load sharing", no_load_frequency_pu=1.0, **small),
    ]
    found = solve(sets, 900.0)
    assert found.source_p_kw[0] == pytest.approx([600.0, 300.0], rel=1e-9)
    assert found.frequency_pu[0] == pytest.approx([1.0])


def test_isochronous_beside_load_sharing_is_refused() -> None:
    sets = [a_set("G1", governor_mode="isochronous"), a_set("G2", governor_mode="load sharing")]
    assert "kW is undetermined" in solve(sets).reason[0]


def test_a_set_at_set_power_keeps_it() -> None:
    point = [mode(set_points=[set_point("G1", p_set_kw=300.0)])]
    found = solve([a_set("G1"), a_set("G2")], 900.0, modes=point)
    assert found.source_p_kw[0] == pytest.approx([300.0, 600.0], rel=1e-9)


def test_nothing_but_set_power_is_refused() -> None:
    point = [mode(set_points=[set_point("G1", p_set_kw=300.0)])]
    assert "nothing holds the frequency" in solve([a_set("G1")], modes=point).reason[0]


def test_nothing_but_fixed_kvar_is_refused() -> None:
    assert "nothing holds the voltage" in solve([a_set("G1", regulator_mode="kvar control")]).reason[0]


def test_kvar_control_holds_its_kvar_or_its_power_factor() -> None:
    sets = [a_set("G1", regulator_mode="kvar control"), a_set("G2")]
    found = solve(sets)
    assert found.source_q_kvar[0, 0] == pytest.approx(0.75 * found.source_p_kw[0, 0], rel=1e-9)
    point = [mode(set_points=[set_point("G1", q_set_kvar=250.0)])]
    assert solve(sets, modes=point).source_q_kvar[0, 0] == pytest.approx(250.0, rel=1e-9)


def test_a_shore_supply_holds_the_frequency_of_sets_in_parallel() -> None:
    sets = [a_set("G1", no_load_frequency_pu=1.02)]
    found = solve(sets, 500.0, 200.0, shore_supplies=[shore("S", "M")])
    assert found.frequency_pu[0] == pytest.approx([1.0])
    assert found.source_p_kw[0, 0] == pytest.approx(400.0, rel=1e-9)


def test_an_isochronous_set_beside_a_shore_supply_is_refused() -> None:
    found = solve([a_set("G1", governor_mode="isochronous")], shore_supplies=[shore("S", "M")])
    assert "would hold the frequency that S holds" in found.reason[0]


def test_a_stiff_shore_supply_and_a_set_without_droop_are_refused() -> None:
    stiff = shore("S", "M", fault_level_min_mva=None, fault_level_max_mva=None)
    found = solve([a_set("G1", voltage_droop_pu=0.0)], shore_supplies=[stiff])
    assert "kvar is undetermined" in found.reason[0]


def test_a_converter_that_follows_gives_its_set_power() -> None:
    battery = converter_supply("B", "M", control="grid following", p_set_kw=200.0, q_set_kvar=50.0)
    found = solve([a_set("G1")], 700.0, 400.0, converter_supplies=[battery])
    assert found.source_p_kw[0] == pytest.approx([500.0, 200.0], rel=1e-9)
    assert found.source_q_kvar[0] == pytest.approx([350.0, 50.0], rel=1e-9)


def test_a_converter_that_forms_the_grid_shares_like_a_set() -> None:
    battery = converter_supply("B", "M", s_rated_kva=800.0, speed_droop_pu=0.04, p_set_kw=None)
    found = solve([a_set("G1", no_load_frequency_pu=1.0)], 900.0, 300.0, converter_supplies=[battery])
    assert found.source_p_kw[0] == pytest.approx([450.0, 450.0], rel=1e-9)
