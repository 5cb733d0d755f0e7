"""What a load takes at part load, and what of it counts."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import pytest

from study.analyses.balance import BalanceOptions, load_balance
from study.formulas.demand import diversified_total_kw, largest_intermittent_total_kw
from study.network.view import view_of
from study.results.balance import BalanceResult
from tests.plants import board, cable, demand, genset, load, mode, plant, transformer


def balance(p: Any, **options: float) -> BalanceResult:
    return load_balance(p, [view_of(p, m) for m in p.modes], BalanceOptions(**options))  # type: ignore[arg-type]


def one_board(loads: list[Any], demands: dict[str, Any], **mode_changes: Any) -> Any:
    return plant(
        boards=[board("MSB")],
        gensets=[genset("G1", "MSB", s_rated_kva=5000.0, p_engine_kw=4500.0)],
        loads=loads,
        modes=[mode(demand=demands, **mode_changes)],
    )


def test_motor_takes_its_input_and_kvar_at_part_load() -> None:
    # 3 installed, 2 in use; 80 kW absorbed of 100 kW rated, load factor 75 %: 60 kW shaft each, b = 0.6.
    # losses at rated load 1/0.93 - 1 = 0.0752688 of output; at b: 3/7 constant + 4/7 b^2 = 0.6342857 of them
    # input 60 + 100*0.0752688*0.6342857 = 64.77419 kW a unit; efficiency 60/64.77419 = 0.926295
    # rated kvar 100/0.93*tan(acos 0.86) = 107.52688*0.5933661 = 63.80271; leakage 0.15/0.5102940 = 0.2939482
    # at b: 63.80271*(1 - 0.2939482*0.64) = 51.79966 kvar a unit
    pump = load("Pump", "MSB", installed=3, p_absorbed_kw=80.0, absorbed_is_given=True)
    result = balance(one_board([pump], {"Pump": demand(2.0, 0.75)})).demand
    assert result.p_unit_kw[0, 0] == pytest.approx(64.77419, abs=1e-5)
    assert result.efficiency[0, 0] == pytest.approx(0.926295, abs=1e-6)
    assert result.p_kw[0, 0] == pytest.approx(129.54839, abs=1e-5)
    assert result.q_kvar[0, 0] == pytest.approx(103.5993, abs=1e-3)


def test_rated_power_factor_at_half_load_understates_kvar_by_20_to_40_percent() -> None:
    # Common practice, no source: half-load power factor of standard motors is 0.10 to 0.15 below rated.
    motor = load("Fan", "MSB", p_rated_kw=45.0, efficiency=0.93, cos_phi=0.86)
    result = balance(one_board([motor], {"Fan": demand(1.0, 0.5)})).demand
    at_rated_cos_phi = float(result.p_kw[0, 0]) * math.tan(math.acos(0.86))
    assert 0.20 < 1.0 - at_rated_cos_phi / float(result.q_kvar[0, 0]) < 0.40
    assert 0.10 < 0.86 - float(result.cos_phi[0, 0]) < 0.15


def test_other_kinds_are_rated_by_their_input() -> None:
    loads = [
        load("Heater", "MSB", kind="heating", p_rated_kw=50.0),
        load("Lights", "MSB", kind="lighting", p_rated_kw=20.0, cos_phi=0.9, efficiency=0.5),
        load("Charger", "MSB", kind="converter", p_rated_kw=30.0, cos_phi=0.8, efficiency=0.9),
    ]
    result = balance(one_board(loads, {x.name: demand(1.0, 0.8) for x in loads})).demand
    assert result.p_kw[0].tolist() == pytest.approx([40.0, 16.0, 24.0])
    # heating at unity; lighting 16*tan(acos 0.9) = 7.749; converter at its displacement factor 0.95: 7.888
    assert result.q_kvar[0].tolist() == pytest.approx([0.0, 7.749, 7.888], abs=5e-4)
    assert result.efficiency[0].tolist() == [1.0, 1.0, 1.0]


def test_motor_behind_a_converter_keeps_the_power_factor_of_the_converter() -> None:
    drive = load("Drive", "MSB", starting_method="converter", cos_phi=0.95)
    result = balance(one_board([drive], {"Drive": demand(1.0, 0.5)})).demand
    assert result.cos_phi[0, 0] == 0.95


def test_idle_and_unused_loads_take_nothing() -> None:
    loads = [load("Idle", "MSB"), load("Off", "MSB"), load("Not asked", "MSB")]
    p = one_board(loads, {"Idle": demand(1.0, 0.0), "Off": demand(0.0, 1.0)})
    result = balance(p)
    assert result.demand.p_kw[0].tolist() == [0.0, 0.0, 0.0]
    assert result.demand.q_kvar[0].tolist() == [0.0, 0.0, 0.0]
    assert any("load factor of 0 %" in f and "Idle" in f for f in result.modes[0].findings)


def test_driven_machine_gives_back_its_output_less_losses() -> None:
    # A winch lowering: -60 kW at the shaft, efficiency at b = 0.6 is 0.926295 (first test): -55.5777 kW
    winch = load("Winch", "MSB", regenerates=True)
    result = balance(one_board([winch], {"Winch": demand(1.0, -0.6)})).demand
    assert result.p_kw[0, 0] == pytest.approx(-55.5777, abs=1e-4)
    assert result.q_kvar[0, 0] > 0.0


def heaters(*kw: float, **changes: Any) -> list[Any]:
    return [load(f"H{i}", "MSB", kind="heating", p_rated_kw=p, **changes) for i, p in enumerate(kw)]


@pytest.mark.parametrize("chi", [2.0, 2.5, 3.0])
def test_classnk_formula_continuous_and_diversified_intermittent(chi: float) -> None:
    # ClassNK-type electric load analysis: PG = sum(Pc) + chi sum(Pi), here chi = 1/diversity.
    loads = heaters(300.0, 200.0, 60.0, 36.0, 90.0)
    duties = ["continuous", "continuous", "intermittent", "intermittent", "occasional"]
    p = one_board(loads, {x.name: demand(1.0, 1.0, d) for x, d in zip(loads, duties, strict=True)})
    result = balance(p, intermittent_diversity=chi)
    assert result.modes[0].p_total_kw == pytest.approx(500.0 + 96.0 / chi)
    assert result.modes[0].p_total_kw == pytest.approx(
        diversified_total_kw([300.0, 200.0], [60.0, 36.0], chi)
    )
    assert result.diversity == chi


def test_alternative_takes_the_largest_intermittent_unit_and_those_sure_to_run() -> None:
    # 500 continuous; intermittent: 2 x 60 (largest unit 60), 36, and 10 with a simultaneity of 100 %
    loads = [*heaters(500.0, 60.0, 36.0), load("Sure", "MSB", kind="heating", p_rated_kw=10.0, service="S")]
    demands = {
        "H0": demand(),
        "H1": demand(2.0, 1.0, "intermittent"),
        "H2": demand(1.0, 1.0, "intermittent"),
        "Sure": demand(1.0, 1.0, "intermittent"),
    }
    p = one_board(loads, demands, simultaneity={("S", "intermittent"): 1.0})
    result = balance(p).modes[0]
    assert result.alternative_kw == pytest.approx(
        largest_intermittent_total_kw([500.0], [60.0, 60.0, 36.0], [10.0])
    )
    assert result.alternative_kw == pytest.approx(570.0)
    assert result.p_total_kw == pytest.approx(500.0 + (120.0 + 36.0) / 2.0 + 10.0)


def test_simultaneity_factors_give_a_continuous_intermittent_standby_rule() -> None:
    # Sheldrake, Handbook of Electrical Engineering, table 1.4: peak load = Dc C + Di I + Ds S;
    # with Dc 1.0, Di 0.5, Ds 0.1 and C = 400, I = 120, S = 80 kW: 400 + 60 + 8 = 468 kW.
    loads = heaters(400.0, 120.0, 80.0)
    duties = ["continuous", "intermittent", "occasional"]
    factors = {("auxiliaries", "continuous"): 1.0, ("auxiliaries", "occasional"): 0.1}
    p = one_board(
        loads,
        {x.name: demand(1.0, 1.0, d) for x, d in zip(loads, duties, strict=True)},
        simultaneity=factors,
    )
    result = balance(p).modes[0]
    assert result.p_total_kw == pytest.approx(468.0)
    assert result.p_by_service_kw[0].tolist() == pytest.approx([400.0, 60.0, 8.0])
    assert result.p_connected_by_service_kw[0].tolist() == pytest.approx([400.0, 120.0, 80.0])


def test_given_simultaneity_goes_before_every_other_rule() -> None:
    loads = heaters(100.0, 100.0)
    demands = {"H0": demand(1.0, 1.0, "continuous"), "H1": demand(1.0, 1.0, "intermittent")}
    factors = {("auxiliaries", "continuous"): 0.7, ("auxiliaries", "intermittent"): 0.3}
    for kind in ("sea", "emergency"):
        p = one_board(loads, demands, simultaneity=factors, kind=kind)
        assert balance(p).demand.factor[0].tolist() == [0.7, 0.3]


def emergency_plant(kind: str, **mode_changes: Any) -> Any:
    """Return main and emergency boards, with a distribution board below each."""
    boards = [
        board("MSB"),
        board("ESB", role="emergency"),
        board("E-DB", 230.0, role="distribution"),
        board("M-DB", role="distribution"),
    ]
    names = ("MSB", "ESB", "E-DB", "M-DB")
    loads = [load(f"On {b}", b, kind="heating", essential_to="safety") for b in names]
    loads.append(load("Comfort", "ESB", kind="heating", essential_to="habitability"))
    return plant(
        boards=boards,
        gensets=[genset("G1", "MSB")],
        transformers=[transformer("T1", "ESB", "E-DB")],
        cables=[cable("C1", "MSB", "ESB"), cable("C2", "MSB", "M-DB")],
        loads=loads,
        modes=[
            mode(kind=kind, demand={x.name: demand(1.0, 1.0, "intermittent") for x in loads}, **mode_changes)
        ],
    )


def test_on_the_main_source_loads_of_the_emergency_board_count_by_their_duty() -> None:
    # SOLAS II-1/42, 43 (from memory) ask for services counted together of the emergency source alone.
    assert balance(emergency_plant("sea")).demand.factor[0].tolist() == [0.5] * 5


def test_emergency_mode_has_no_diversity_and_counts_what_is_occasional() -> None:
    p = emergency_plant("emergency")
    assert balance(p).demand.factor[0].tolist() == [1.0] * 5
    rare = {name: demand(1.0, 1.0, "occasional") for name in p.modes[0].demand}
    p = replace(p, modes=(replace(p.modes[0], demand=rare),))
    assert balance(p).demand.factor[0].tolist() == [1.0] * 5


def test_dead_board_counts_nothing_and_is_named() -> None:
    p = plant(
        boards=[board("MSB"), board("DB")],
        gensets=[genset("G1", "MSB")],
        cables=[cable("C1", "MSB", "DB")],
        loads=[load("A", "MSB", kind="heating"), load("B", "DB", kind="heating", p_rated_kw=37.0)],
        modes=[mode(states={"C1": "off"}, demand={"A": demand(), "B": demand(1.0, 1.0, "intermittent")})],
    )
    result = balance(p)
    assert result.demand.fed.tolist() == [[True, False]]
    assert result.demand.factor.tolist() == [[1.0, 0.0]]
    assert result.modes[0].p_total_kw == pytest.approx(100.0)
    assert result.modes[0].p_unfed_kw == pytest.approx(37.0)
    assert any(f.startswith("Not fed on DB: B, in use with 37.0 kW") for f in result.modes[0].findings)


def test_running_current_is_a_cross_check_only() -> None:
    # 100 kW / (0.93*0.86*sqrt3*440 V) = 164.06 A at rated output
    right = load("Right", "MSB", running_current_a=164.0)
    wrong = load("Wrong", "MSB", running_current_a=120.0)
    result = balance(one_board([right, wrong], {"Right": demand(), "Wrong": demand()}))
    said = [f for f in result.modes[0].findings if "running current" in f]
    assert len(said) == 1
    assert said[0].startswith("Wrong: running current 120 A")
    assert "164.1 A" in said[0]
    assert result.demand.p_kw[0, 0] == result.demand.p_kw[0, 1]


def test_options_refuse_a_diversity_below_one() -> None:
    with pytest.raises(ValueError, match=r"intermittent diversity is 0\.5"):
        BalanceOptions(intermittent_diversity=0.5)
    with pytest.raises(ValueError, match="one-set margin is 1"):
        BalanceOptions(one_set_margin=1.0)
