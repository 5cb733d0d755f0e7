"""Pairs of devices against arithmetic done by hand, and against the rules that stand above the curves."""

from __future__ import annotations

import math
from dataclasses import replace
from itertools import permutations
from typing import Any

import numpy as np
import pytest

from study.analyses.grading_currents import CaseCurrents, grid_s
from study.analyses.grading_stations import case_ways, stations_of
from study.analyses.short_circuit import short_circuit
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.model.plant import Plant
from study.model.protection import LetThroughPoint, MakerDiscrimination, ProtectionFunction
from study.network.network import build_network
from study.results.grading import FULL
from tests import plants
from tests.analyses.grading_plants import Pair, breaker, failing, feeder_plant, graded, heater

# A stiff supply of 15 MVA at 440 V: 15e6 / (sqrt3 440) = 19 682 A, without decay; at least 8 MVA: 10 497 A.
LARGEST_A = 15e6 / (math.sqrt(3.0) * 440.0)
LEAST_A = 8e6 / (math.sqrt(3.0) * 440.0)


SLOW = {"instantaneous_a": None, "instantaneous_off": True, "short_time_a": 300.0, "short_time_delay_s": 0.2}


def same_place(**more: Any) -> Plant:
    """Return two breakers in series with hardly any cable: every fault is that of the supply."""
    plant = feeder_plant(**more)
    thick = {"length_m": 0.1, "section_mm2": 300.0, "resistance_ohm_per_km": 0.06}
    return replace(plant, cables=tuple(replace(c, **thick) for c in plant.cables))


# ---- by hand


def test_a_pair_by_hand() -> None:
    # QH opens at once: 0.03 s to the arc out. QF releases after 0.9 x 0.2 s. Margin 0.18 - 0.03 = 0.15 s.
    pair = Pair(graded(feeder_plant()), "QH", "QF")
    assert pair.extent == "full"
    assert pair.clears_s == pytest.approx(0.03, abs=1e-12)
    assert pair.releases_s == pytest.approx(0.18, abs=1e-12)
    assert pair.margin_s == pytest.approx(0.15, abs=1e-12)
    assert pair.current_ratio == math.inf


def test_the_largest_fault_is_that_just_behind_the_nearest_device() -> None:
    assert Pair(graded(same_place()), "QH", "QF").largest_a == pytest.approx(LARGEST_A, rel=0.01)


def test_a_delay_too_short_is_told_with_its_times() -> None:
    # QH delayed: 1.1 x 0.2 + 0.03 = 0.25 s; QF releases at 0.18 s.
    result = graded(feeder_plant(near=SLOW))
    pair = Pair(result, "QH", "QF")
    assert pair.extent == "none"
    assert pair.margin_s == pytest.approx(0.18 - 0.25, abs=1e-12)
    assert failing(result) == {("QH", "QF"): ("At sea",)}


def test_partial_discrimination_up_to_the_instantaneous_stage_by_hand() -> None:
    # QF may open at once from 0.9 x 15 000 A r.m.s. on; QH and QF carry the same current.
    result = graded(same_place(above={"instantaneous_a": 15_000.0}))
    pair = Pair(result, "QH", "QF")
    assert pair.extent == "partial"
    assert pair.rule == "instantaneous stage upstream"
    # Ten bisections of a quarter of the way from 10.5 to 19.7 kA: 1e-3 of the logarithm's range.
    assert pair.up_to_a == pytest.approx(13_500.0, rel=2e-3)
    assert pair.current_ratio == pytest.approx(13_500.0 / LARGEST_A, rel=0.01)


def test_a_release_that_senses_the_peak_may_open_at_less() -> None:
    # R/X 0.1: idc(T/2) = sqrt2 I e^(-0.1 pi); peak over sqrt2 = I (1 + e^(-0.1 pi)) = 1.7304 I.
    result = graded(same_place(above={"instantaneous_a": 25_000.0, "instantaneous_senses": "peak"}))
    factor = 1.0 + math.exp(-0.1 * math.pi)
    # Cables of 0.1 m leave R/X within 1 % of the supply's.
    assert Pair(result, "QH", "QF").up_to_a == pytest.approx(22_500.0 / factor, rel=0.01)


def test_the_upstream_device_alone_opens_where_the_nearest_does_not_see_the_fault() -> None:
    result = graded(feeder_plant(near={"instantaneous_a": 30_000.0}))
    pair = Pair(result, "QH", "QF")
    assert pair.extent == "none"
    assert pair.clears_s == math.inf
    assert pair.margin_s == -math.inf


def test_partial_discrimination_from_a_current_on() -> None:
    # QH opens at once for certain from 1.1 x 9 000 A; QF at 0.18 s whatever the current.
    result = graded(same_place(near={"instantaneous_a": 12_000.0}))
    pair = Pair(result, "QH", "QF")
    assert pair.extent == "partial"
    assert pair.from_a == pytest.approx(13_200.0, rel=2e-3)
    assert math.isnan(pair.up_to_a)


def test_where_neither_opens_nothing_is_said_of_the_pair() -> None:
    result = graded(feeder_plant(near={"instantaneous_a": 90_000.0}, above={"short_time_a": 90_000.0}))
    assert Pair(result, "QH", "QF").extent == "not needed"
    assert failing(result) == {}
    reach = result.reach
    assert np.isinf(reach.clears_s[reach.present]).all()


def test_a_blank_instantaneous_setting_is_not_assessed() -> None:
    plant = feeder_plant()
    bare = replace(plant.devices[1], instantaneous_off=False)
    pair = Pair(graded(replace(plant, devices=(plant.devices[0], bare))), "QH", "QF")
    assert pair.extent == "not assessed"
    assert math.isnan(pair.margin_s)


# ---- what rules inside the instantaneous zone


def _maker(up_to_ka: float) -> MakerDiscrimination:
    return MakerDiscrimination(upstream="QF", downstream="QH", cell="", up_to_ka=up_to_ka, reference="sheet")


@pytest.mark.parametrize(("up_to_ka", "extent"), [(25.0, "full"), (12.0, "partial")])
def test_the_makers_table_rules_in_the_instantaneous_zone(up_to_ka: float, extent: str) -> None:
    plant = replace(same_place(above={"instantaneous_a": 5_000.0}), maker_discrimination=(_maker(up_to_ka),))
    pair = Pair(graded(plant), "QH", "QF")
    assert pair.extent == extent
    if extent == "full":
        assert pair.rule == "maker's table"
    else:
        assert pair.up_to_a == pytest.approx(12_000.0, rel=2e-3)


def test_a_cut_off_peak_below_the_instantaneous_setting_discriminates() -> None:
    sheet = [
        LetThroughPoint(curve="CL", cell="", prospective_ka=ka, cut_off_peak_ka=peak, let_through_a2s=5e4)
        for ka, peak in ((1.0, 1.4), (50.0, 7.0))
    ]
    # The cut-off peak stays below 7 kA, 4.95 kA over sqrt2; QF may open from 0.9 x 6 000 A on.
    limiting = same_place(near={"curve": "CL"}, above={"instantaneous_a": 6_000.0})
    plain = same_place(above={"instantaneous_a": 6_000.0})
    with_sheet = Pair(graded(replace(limiting, let_through=tuple(sheet))), "QH", "QF")
    assert (with_sheet.extent, with_sheet.rule) == ("full", "let-through of the maker's sheet")
    assert Pair(graded(plain), "QH", "QF").extent != "full"


@pytest.mark.parametrize(("upstream_a", "extent"), [(160.0, "full"), (125.0, "partial")])
def test_fuses_discriminate_from_a_ratio_of_1_6_on(upstream_a: float, extent: str) -> None:
    # IEC 60269-1, discrimination of gG fuse-links at 1.6 : 1, from memory.
    fuse = {"kind": "fuse", "fuse_class": "gG", "instantaneous_off": False, "short_time_a": None}
    plant = same_place(
        near={**fuse, "i_rated_a": 100.0, "instantaneous_a": None},
        above={**fuse, "i_rated_a": upstream_a, "short_time_delay_s": None},
    )
    found = Pair(graded(plant), "QH", "QF")
    assert found.extent == extent or (extent == "partial" and found.extent == "none")


# ---- direction, zones, signals, differential functions


def test_a_signal_from_downstream_holds_the_short_time_stage() -> None:
    assert failing(graded(feeder_plant(near=SLOW)))
    held = graded(feeder_plant(near=SLOW, above={"interlocked_with": "QH"}))
    assert failing(held) == {}
    assert Pair(held, "QH", "QF").rule in ("signal from downstream", "curves")


def test_a_device_that_looks_the_other_way_does_not_see_the_fault() -> None:
    forward = graded(feeder_plant(near=SLOW, above={"direction": "forward"}))
    reverse = graded(feeder_plant(near=SLOW, above={"direction": "reverse"}))
    assert failing(forward) == {("QH", "QF"): ("At sea",)}
    assert failing(reverse) == {}
    assert Pair(reverse, "QH", "QF").rule == "not seen by the upstream device"


def test_a_device_that_protects_a_zone_alone_does_not_open_beyond_it() -> None:
    result = graded(feeder_plant(near=SLOW, above={"protected_zone": "DB"}))
    assert failing(result) == {}


def _differential(equipment: str, trips: str | None, delay_s: float = 0.05) -> ProtectionFunction:
    return ProtectionFunction(
        name="87", equipment=equipment, cell="", kind="differential", pick_up=20.0, unit="%",
        delay_s=delay_s, trips=trips,
    )  # fmt: skip


def test_a_differential_function_clears_its_own_board() -> None:
    plant = feeder_plant()
    quick = graded(replace(plant, protection_functions=(_differential("DB", "QF"),)))
    row = next(k for k, s in enumerate(quick.reach.station) if quick.stations.names[s] == "QF")
    assert quick.reach.clears_s[row, 0] == pytest.approx(0.05 + 0.03)
    slow = graded(plant)
    assert slow.reach.clears_s[row, 0] == pytest.approx(1.1 * 0.2 + 0.03)


# ---- sets, ties, parallel paths


def sets_plant(count: int = 2, tie: dict[str, Any] | None = None, **more: Any) -> Plant:
    """Return sets on two boards with a tie between them, and a heater on the second board."""
    names = [f"G{n + 1}" for n in range(count)]
    boards = ["A" if n < (count + 1) // 2 else "B" for n in range(count)]
    own = {"short_time_a": 2500.0, "short_time_delay_s": 0.4}
    return plants.plant(
        boards=[plants.board("A"), plants.board("B")],
        gensets=[plants.genset(n, b) for n, b in zip(names, boards, strict=True)],
        ties=[plants.tie("BT", "A", "B")],
        cables=[
            *[
                plants.cable(f"C{n}", n, b, length_m=10.0, section_mm2=300.0, runs=3)
                for n, b in zip(names, boards, strict=True)
            ],
            plants.cable("CH", "B", "H", length_m=15.0),
        ],
        loads=[heater("H", "B")],
        devices=[
            *[
                breaker(f"Q{n}", f"C{n}", b, **(own | more.pop(f"Q{n}", {})))
                for n, b in zip(names, boards, strict=True)
            ],
            breaker("QBT", "BT", "A", **({"short_time_a": 1200.0, "short_time_delay_s": 0.2} | (tie or {}))),
            breaker("QH", "CH", "B", instantaneous_a=400.0),
        ],
        **more,
    )  # fmt: skip


def test_a_tie_opens_before_the_sets_behind_it() -> None:
    result = graded(sets_plant())
    assert failing(result) == {}
    # The tie clears at 1.1 x 0.2 + 0.03 s, a set releases at 0.9 x 0.4 s, on both sides.
    for upstream in ("QG1", "QG2"):
        pair = Pair(result, "QBT", upstream)
        assert pair.margin_s == pytest.approx(0.36 - 0.25, abs=1e-9)


def test_a_tie_as_slow_as_the_sets_is_found() -> None:
    found = failing(graded(sets_plant(tie={"short_time_delay_s": 0.4})))
    assert set(found) == {("QBT", "QG1"), ("QBT", "QG2")}


def test_two_sets_cannot_tell_which_of_them_is_faulty() -> None:
    result = graded(sets_plant())
    assert Pair(result, "QG1", "QG2").extent == "not needed"
    assert any("fewer than three sets" in words for words in result.findings)


def test_of_three_sets_the_faulty_one_is_told_by_its_instantaneous_stage() -> None:
    # A fault in the cable of G1: two other sets feed it through QG1, one through each other breaker. One set
    # gives at most 11.05 kA at half a cycle, below 0.95 x 12 kA; two give more than 1.05 x 12 kA.
    untold = failing(graded(sets_plant(3)))
    assert {("QG1", "QG2"), ("QG1", "QG3"), ("QG3", "QG1")} <= untold.keys()
    own = {"instantaneous_a": 12_000.0, "current_tolerance": 0.05}
    told = graded(sets_plant(3, QG1=own, QG2=own, QG3=own))
    assert failing(told) == {}
    assert Pair(told, "QG1", "QG2").current_ratio == pytest.approx(0.95 * 12_000.0 / 11_050.0, rel=1e-3)


def test_the_set_that_feeds_through_the_tie_carries_less_than_the_fault() -> None:
    pair = Pair(graded(sets_plant()), "QH", "QG1")
    assert 0.3 < pair.upstream_a / pair.current_a < 0.6


def transformers(count: int) -> Plant:
    names = [f"T{n + 1}" for n in range(count)]
    return plants.plant(
        boards=[plants.board("MSB"), plants.board("LB", 230.0, role="distribution")],
        gensets=[plants.genset("G1", "MSB")],
        transformers=[plants.transformer(n, "MSB", "LB") for n in names],
        cables=[
            *[plants.cable(f"C{n}-1", "MSB", n, length_m=5.0) for n in names],
            *[plants.cable(f"C{n}-2", n, "LB", length_m=5.0, runs=3) for n in names],
            plants.cable("CG", "G1", "MSB", length_m=10.0, runs=4),
            plants.cable("CH", "LB", "H", length_m=10.0),
        ],
        loads=[plants.load("H", "LB", "heating", p_rated_kw=10.0, u_rated_v=230.0)],
        devices=[
            *[
                breaker(f"Q{n}-1", f"C{n}-1", "MSB", short_time_a=1300.0, short_time_delay_s=0.2)
                for n in names
            ],
            *[
                breaker(f"Q{n}-2", f"C{n}-2", "LB", short_time_a=1500.0, short_time_delay_s=0.1)
                for n in names
            ],
            breaker("QG", "CG", "MSB", short_time_a=2500.0, short_time_delay_s=0.4),
            breaker("QH", "CH", "LB", instantaneous_a=300.0),
        ],
    )


def test_both_breakers_of_one_transformer_are_one_circuit() -> None:
    pair = Pair(graded(transformers(1)), "QT1-2", "QT1-1")
    assert pair.extent == "not needed"
    assert Pair(graded(transformers(1)), "QT1-2", "QG").extent == "full"


def test_currents_behind_a_transformer_go_by_its_turns() -> None:
    # Three-phase: times 230/440; with two phases 2/sqrt3 more in one of the three conductors.
    pair = Pair(graded(transformers(1)), "QH", "QT1-1")
    factor = 2.0 / math.sqrt(3.0) if "two-phase" in pair.level else 1.0
    assert pair.upstream_a / pair.current_a == pytest.approx(factor * 230.0 / 440.0, rel=0.01)


def test_a_two_phase_fault_behind_star_delta_flows_in_one_phase_of_the_primary() -> None:
    # Symmetrical components: 2/sqrt3 of the secondary's phase current, through the turns, in one phase.
    plant = transformers(1)
    result = short_circuit(build_network(plant), ShortCircuitOptions(compare=False))
    stations = stations_of(plant, result)
    currents = CaseCurrents(case_ways(stations, result.modes[0], maximum=False), grid_s(result, 5.0))
    place = np.array([result.places.names.index("LB")] * 2)
    both = np.array([stations.names.index("QT1-1"), stations.names.index("QT1-2")])
    none = np.full(2, -1)
    primary, secondary = currents.through(both, place, none, two_phase=True).ac_a[:, 0]
    assert primary / secondary == pytest.approx(230.0 / 440.0 * 2.0 / math.sqrt(3.0), rel=1e-9)
    primary, secondary = currents.through(both, place, none).ac_a[:, 0]
    assert primary / secondary == pytest.approx(230.0 / 440.0, rel=1e-9)


def test_parallel_transformers_share_and_are_not_told_apart() -> None:
    result = graded(transformers(2))
    one = Pair(result, "QH", "QT1-2")
    assert one.upstream_a / one.current_a == pytest.approx(0.5, rel=0.02)
    assert Pair(result, "QT1-2", "QT2-2").extent == "not needed"


# ---- over modes, and in any order


def test_a_mode_that_breaks_a_grading_is_named() -> None:
    small = plants.genset("HG", "A", s_rated_kva=150.0, p_engine_kw=130.0)
    plant = sets_plant()
    modes = (
        plants.mode("At sea", {"HG": "off"}, {"H": plants.demand()}),
        plants.mode("Harbour", {"G1": "off", "G2": "off"}, {"H": plants.demand()}, kind="harbour"),
    )
    harbour = breaker("QHG", "CHG", "A", short_time_a=480.0, short_time_delay_s=0.4)
    plant = replace(
        plant,
        gensets=(*plant.gensets, small),
        cables=(*plant.cables, plants.cable("CHG", "HG", "A", length_m=10.0)),
        devices=(
            *(d for d in plant.devices if d.name != "QH"),
            harbour,
            breaker("QH", "CH", "B", instantaneous_a=3000.0),
        ),
        modes=modes,
    )
    result = graded(plant)
    assert failing(result)["QH", "QHG"] == ("Harbour",)
    assert ("QH", "QG1") not in failing(result)


def test_the_order_of_the_devices_changes_nothing() -> None:
    plant = sets_plant(tie={"short_time_delay_s": 0.4})
    first = graded(plant)
    for order in list(permutations(range(len(plant.devices))))[1::17]:
        other = graded(replace(plant, devices=tuple(plant.devices[k] for k in order)))
        assert failing(other) == failing(first)
        for pair in (("QBT", "QG1"), ("QH", "QG2"), ("QH", "QBT")):
            one, two = Pair(first, *pair), Pair(other, *pair)
            assert one.margin_s == two.margin_s
            assert one.upstream_a == pytest.approx(two.upstream_a, rel=1e-12)


def test_consumers_that_a_mode_does_not_use_are_switched_off_in_it() -> None:
    plant = feeder_plant(modes=[plants.mode("At sea", demand={"H": plants.demand(in_use=0.0)})])
    result = graded(plant)
    assert not any(result.stations.names[s] == "QH" for s in result.pairs.downstream)


def test_every_consumer_has_its_way_to_every_source() -> None:
    result = graded(sets_plant())
    ways = {
        (path.zone, path.source): tuple(result.stations.names[s] for s in path.stations)
        for path in result.paths
    }
    assert ways == {("H", "G2"): ("QH", "QG2"), ("H", "G1"): ("QH", "QBT", "QG1")}
    assert (result.pairs.extent[result.pairs.present] >= FULL).all()


# The supply's own arithmetic, so that the constants above stand for something.
def test_the_supply_gives_what_its_fault_level_says() -> None:
    result = graded(same_place())
    path = result.paths[0]
    assert path.largest_a[0] == pytest.approx(LARGEST_A, rel=0.01)
    assert path.least_a[0] == pytest.approx(LEAST_A, rel=0.01)


def unlike_transformers(qg_delay_s: float) -> Plant:
    """Return 400 and 100 kVA in parallel; the small one's breaker does not see its part at first."""
    plant = transformers(2)
    settings = {"QT2-2": {"short_time_a": 3000.0}, "QG": {"short_time_delay_s": qg_delay_s}}
    return replace(
        plant,
        transformers=tuple(
            replace(t, s_rated_kva=kva) for t, kva in zip(plant.transformers, (400.0, 100.0), strict=True)
        ),
        devices=tuple(replace(d, **settings.get(d.name, {})) for d in plant.devices),
    )


def test_paths_that_open_in_turn_add_their_times() -> None:
    # QT1-2 has cleared after 1.1 x 0.1 + 0.03 = 0.14 s. Only then does the current through QT2-2 rise above
    # its pick-up, and it takes as long again: 0.28 s. QG releases after 0.9 x its delay.
    plant = unlike_transformers(0.4)
    before = Pair(graded(plant), "QT2-2", "QG")
    assert before.clears_s == math.inf
    followed = Pair(graded(plant, in_turn=True), "QT2-2", "QG")
    assert followed.level == "largest fault, paths opening in turn"
    assert followed.clears_s == pytest.approx(0.28, abs=1e-6)
    assert (followed.extent, followed.releases_s) == ("full", pytest.approx(0.36))
    assert failing(graded(plant, in_turn=True)) == {}
    quick = graded(unlike_transformers(0.3), in_turn=True)
    assert Pair(quick, "QT2-2", "QG").margin_s == pytest.approx(0.27 - 0.28, abs=1e-6)
    assert ("QT1-2", "QG") in failing(quick)


# ---- plants with little in them


def test_a_plant_without_devices_has_nothing_to_grade() -> None:
    result = graded(plants.small_plant())
    assert result.stations.names == ()
    assert result.pairs.present.shape == (0, 1)


def test_a_dead_mode_has_nothing_to_grade_and_harms_no_other() -> None:
    dead = plants.mode("Laid up", {"G1": "off", "G2": "off"})
    alive = plants.mode("At sea", demand={"H": plants.demand()})
    both = graded(replace(sets_plant(), modes=(dead, alive)))
    assert not both.pairs.present[:, 0].any()
    assert Pair(both, "QBT", "QG1", mode=1).margin_s == pytest.approx(0.11)
    alone = graded(replace(sets_plant(), modes=(dead,)))
    assert alone.stations.names == ()


def test_sets_and_consumers_without_cables_stand_on_their_board() -> None:
    own = {"short_time_a": 2500.0, "short_time_delay_s": 0.4}
    plant = plants.plant(
        boards=[plants.board("MSB")],
        gensets=[plants.genset("G1", "MSB"), plants.genset("G2", "MSB")],
        loads=[heater("H", "MSB")],
        devices=[
            breaker("Q1", "G1", "MSB", **own),
            breaker("Q2", "G2", "MSB", **own),
            breaker("QH", "H", "MSB", instantaneous_a=500.0),
            breaker("QB", "MSB", "MSB", **own),
        ],
    )
    result = graded(plant)
    pair = Pair(result, "QH", "Q1")
    assert pair.margin_s == pytest.approx(0.36 - 0.03)
    assert pair.upstream_a / pair.current_a == pytest.approx(0.5, rel=1e-6)
    assert any(words.startswith("QB: on a board") for words in result.findings)


def test_a_battery_alone_is_graded_while_its_converter_holds() -> None:
    plant = plants.plant(
        boards=[plants.board("MSB")],
        converter_supplies=[plants.converter_supply("BAT", "MSB")],
        cables=[plants.cable("CB", "BAT", "MSB"), plants.cable("CH", "MSB", "H")],
        loads=[heater("H", "MSB")],
        devices=[
            breaker("QB", "CB", "MSB", short_time_a=700.0, short_time_delay_s=0.4),
            breaker("QH", "CH", "MSB", instantaneous_a=300.0),
        ],
    )
    result = graded(plant)
    assert Pair(result, "QH", "QB").margin_s == pytest.approx(0.36 - 0.03)
    # It gives 1.5 x 656 A for 1 s: what would take longer ends by itself.
    slow = replace(plant.devices[0], short_time_delay_s=1.5)
    late = graded(replace(plant, devices=(slow, plant.devices[1])))
    row = [late.stations.names[s] for s in late.reach.station].index("QB")
    assert late.reach.by[row, 0] == -2


def test_a_ring_of_ties_that_are_equally_slow_cannot_be_graded() -> None:
    names = "ABC"
    ties = [("T1", "A", "B"), ("T2", "B", "C"), ("T3", "C", "A")]
    plant = plants.plant(
        boards=[plants.board(b) for b in names],
        gensets=[plants.genset("G1", "A"), plants.genset("G2", "B")],
        ties=[plants.tie(name, a, b, x_ohm=0.0002, r_ohm=0.00005) for name, a, b in ties],
        cables=[plants.cable("CH", "C", "H"), plants.cable("CG1", "G1", "A"), plants.cable("CG2", "G2", "B")],
        loads=[heater("H", "C")],
        devices=[
            *(
                breaker(f"Q{name}", name, a, short_time_a=1000.0, short_time_delay_s=0.2)
                for name, a, _ in ties
            ),
            breaker("QG1", "CG1", "A", short_time_a=2500.0, short_time_delay_s=0.5),
            breaker("QG2", "CG2", "B", short_time_a=2500.0, short_time_delay_s=0.5),
            breaker("QH", "CH", "C", instantaneous_a=500.0),
        ],
    )
    blamed = failing(graded(plant))
    assert blamed
    assert all(down.startswith("QT") and up.startswith("QT") for down, up in blamed)
    # A differential function on every section opens its own ties alone, at once.
    zones = {"A": "QT1, QT3, QG1", "B": "QT1, QT2, QG2", "C": "QT2, QT3"}
    functions = tuple(replace(_differential(b, opens), name=f"87 {b}") for b, opens in zones.items())
    assert failing(graded(replace(plant, protection_functions=functions))) == {}
