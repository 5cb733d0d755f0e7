"""Sharing over the load, as set and trimmed, against closed forms and textbook figures."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from study.formulas.load_compensation import reactance_from_droop
from study.formulas.sharing import share_reactive, share_straight
from study.model.plant import Plant
from study.results.sharing import IslandSharing
from tests.analyses.sharing_plants import island, one_bus, study, three_boards
from tests.plants import (
    board,
    converter_supply,
    filter_bank,
    genset,
    load,
    mode,
    plant,
    set_point,
    shore,
    synchronous_motor,
)

KVA_BASE = {"droop_base": "rated kVA"}


def closed_form(p: Plant, one: IslandSharing) -> tuple[float, np.ndarray]:
    """Return bus voltage and kvar by the one equation of sets on one bus (`share_reactive`)."""
    x = [
        reactance_from_droop(
            g.regulator.droop_pu,
            g.regulator.droop_base,
            g.regulator.droop_law,
            g.cos_phi_rated,
            g.regulator.no_load_voltage_pu,
        )
        for g in p.gensets
    ]
    rated = np.array([g.s_rated_kva for g in p.gensets])
    phasor = np.array([g.regulator.droop_law == "phasor" for g in p.gensets])
    v, q = share_reactive(
        [g.regulator.no_load_voltage_pu for g in p.gensets],
        x,
        np.where(phasor, one.p_operating_kw / rated, 0.0),
        rated,
        one.q_operating_kvar.sum(),
    )
    return float(v), q


def test_two_equal_sets_with_equal_droop_share_equally() -> None:
    one = island(one_bus({"voltage_droop_pu": 0.04}, {"voltage_droop_pu": 0.04}))
    assert one.q_operating_kvar[0] == pytest.approx(one.q_operating_kvar[1], abs=1e-6)
    assert one.circulating_kvar == pytest.approx(0.0, abs=1e-6)
    assert np.abs(one.as_set.dq_kvar).max() < 1e-6


def test_a_set_with_half_the_droop_takes_about_two_thirds() -> None:
    """4 %/8 %: about two thirds is common practice, no source; exactly as the compensation equation."""
    p = one_bus({"voltage_droop_pu": 0.04, **KVA_BASE}, {"voltage_droop_pu": 0.08, **KVA_BASE}, kw=1200.0)
    one = island(p)
    part = one.q_operating_kvar[0] / one.q_operating_kvar.sum()
    assert part == pytest.approx(2.0 / 3.0, abs=0.02)
    v, q = closed_form(p, one)
    np.testing.assert_allclose(one.q_operating_kvar, q, rtol=1e-6)
    assert one.u_operating_pu == pytest.approx(v, rel=1e-9)


@pytest.mark.parametrize(
    "sets",
    [
        ({"no_load_voltage_pu": 1.02}, {"no_load_voltage_pu": 1.01}),
        ({"voltage_droop_pu": 0.04}, {"voltage_droop_pu": 0.03}),
        ({"droop_law": "reactive current"}, {"voltage_droop_pu": 0.05}),
        ({"droop_law": "reactive current", "droop_base": "rated kvar"}, {"droop_base": "rated kvar"}),
        ({"s_rated_kva": 2000.0, "p_engine_kw": 2400.0}, {"voltage_droop_pu": 0.035}, {}),
    ],
)
def test_kvar_follow_the_closed_form_on_one_bus(sets: tuple[dict[str, Any], ...]) -> None:
    p = one_bus(*sets)
    one = island(p)
    v, q = closed_form(p, one)
    np.testing.assert_allclose(one.q_operating_kvar, q, rtol=1e-6)
    assert one.u_operating_pu == pytest.approx(v, rel=1e-9)


def test_a_set_point_mismatch_moves_rated_kvar_times_de_over_d() -> None:
    """Q1 - Q2 = Qr dE/d for straight lines of equal droop d over rated kvar, whatever the load.

    Derived from the lines; the real law bends them by about a twentieth.
    """
    droop = {"voltage_droop_pu": 0.04, "droop_base": "rated kvar"}
    one = island(one_bus({"no_load_voltage_pu": 1.008, **droop}, droop))
    difference = one.as_set.q_kvar[:, 0] - one.as_set.q_kvar[:, 1]
    np.testing.assert_allclose(difference, 600.0 * 0.008 / 0.04, rtol=0.07)


def chapman(kw: float, **changes: Any) -> Plant:
    """Return two sets of 2 MW whose frequency falls by 1 Hz for 1 MW, from 61.5 and 61.0 Hz, at 60 Hz."""
    common = {"s_rated_kva": 2500.0, "p_engine_kw": 2600.0, "speed_droop_pu": 2.0 / 60.0}
    return one_bus(
        {"no_load_frequency_pu": 61.5 / 60.0, **common},
        {"no_load_frequency_pu": 61.0 / 60.0, **common},
        kw=kw,
        **changes,
    )


@pytest.mark.parametrize(
    ("kw", "raised_hz", "hz", "shares"),
    [
        (2500.0, 0.0, 60.0, (1500.0, 1000.0)),
        (3500.0, 0.0, 59.5, (2000.0, 1500.0)),
        (3500.0, 0.5, 59.75, (1750.0, 1750.0)),
    ],
)
def test_frequency_and_kw_of_a_textbook_pair(
    kw: float, raised_hz: float, hz: float, shares: tuple[float, float]
) -> None:
    """Chapman, *Electric Machinery Fundamentals*, generators in parallel, from memory; figures are exact."""
    point = set_point("G2", no_load_frequency_pu=(61.0 + raised_hz) / 60.0)
    one = island(chapman(kw, modes=[mode(set_points=[point])]))
    assert one.f_operating_hz == pytest.approx(hz, abs=1e-6)
    np.testing.assert_allclose(one.p_operating_kw, shares, atol=1e-3)


def test_kw_follow_straight_lines_over_the_whole_range() -> None:
    p = one_bus({"speed_droop_pu": 0.05}, {"speed_droop_pu": 0.04, "no_load_frequency_pu": 1.035})
    one = island(p)
    f, kw = share_straight([1.04, 1.035], [0.05, 0.04], [800.0, 800.0], one.as_set.p_total_kw)
    np.testing.assert_allclose(one.as_set.p_kw, kw, atol=1e-4)
    np.testing.assert_allclose(one.as_set.f_hz, 60.0 * f, atol=1e-7)


@pytest.mark.parametrize("p", [three_boards(), one_bus({}, {})])
def test_the_range_runs_from_20_to_100_per_cent_of_the_combined_rating(p: Plant) -> None:
    """ClassNK 2.4.14-3. Losses are in: the sets carry the load within a thousandth of what is asked."""
    one = island(p)
    assert one.as_set.load_pu[0] == 0.20
    assert one.as_set.load_pu[-1] == 1.00
    for curve in (one.as_set, one.trimmed):
        assert curve.solved.all()
        np.testing.assert_allclose(curve.p_total_kw / one.p_rated_kw.sum(), curve.load_pu, atol=1e-3)
        np.testing.assert_allclose(curve.p_kw.sum(axis=1), curve.p_total_kw)


CROSS = {"regulator_mode": "cross-current"}


@pytest.mark.parametrize(
    "p",
    [
        three_boards(),
        one_bus({"no_load_voltage_pu": 1.03, "voltage_droop_pu": 0.06}, {"voltage_droop_pu": 0.02}),
        one_bus({"no_load_voltage_pu": 1.10}, {}),  # one at its ceiling, the other without field, as set
        one_bus({"regulator_mode": "no droop"}, {"no_load_voltage_pu": 1.01}),
        one_bus({"no_load_voltage_pu": 1.004, **CROSS}, CROSS),
        one_bus({"governor_mode": "isochronous"}, {}),
        one_bus({"no_load_frequency_pu": 1.06}, {"speed_droop_pu": 0.06}),
        one_bus({"droop_law": "reactive current", "no_load_voltage_pu": 1.02}, {}, {"s_rated_kva": 1500.0}),
    ],
)
def test_trimmed_sets_share_in_proportion_at_75_per_cent_and_one_is_left_alone(p: Plant) -> None:
    one = island(p)
    at = list(one.trimmed.load_pu).index(0.75)
    assert np.abs(one.trimmed.dp_kw[at] / one.p_rated_kw).max() < 1e-6
    assert np.abs(one.trimmed.dq_kvar[at] / one.q_rated_kvar).max() < 1e-6
    assert any(t.u_trimmed_pu == t.u_as_set_pu for t in one.trims)
    drooped = [t for t in one.trims if not np.isnan(t.f_as_set_pu)]
    if len(drooped) == len(one.trims):
        assert any(t.f_trimmed_pu == t.f_as_set_pu for t in drooped)


def test_trimmed_set_points_put_into_the_workbook_give_the_trimmed_curves() -> None:
    p = three_boards()
    one = island(p)
    trimmed = {
        t.genset: set_point(t.genset, no_load_voltage_pu=t.u_trimmed_pu, no_load_frequency_pu=t.f_trimmed_pu)
        for t in one.trims
    }
    again = island(replace(p, modes=(replace(p.modes[0], set_points=trimmed),)))
    np.testing.assert_allclose(again.as_set.q_kvar, one.trimmed.q_kvar, atol=0.01)
    np.testing.assert_allclose(again.as_set.p_kw, one.trimmed.p_kw, atol=0.01)
    assert [t.u_trimmed_pu for t in again.trims] == pytest.approx(
        [t.u_trimmed_pu for t in one.trims], abs=2e-6
    )


def test_sets_are_trimmed_to_those_that_are_right() -> None:
    """Two of three equal sets agree: the third is brought to them, and they stay as they are."""
    odd = {"no_load_voltage_pu": 1.05, "no_load_frequency_pu": 1.045}
    one = island(one_bus({}, odd, {}, kw=1500.0))
    assert [t.u_trimmed_pu for t in one.trims] == pytest.approx([one.trims[0].u_as_set_pu] * 3, abs=1e-6)
    assert [t.f_trimmed_pu for t in one.trims] == pytest.approx([one.trims[0].f_as_set_pu] * 3, abs=1e-9)


@pytest.mark.parametrize(("first", "second", "trimmed"), [(1.03, 1.06, 1.03), (0.99, 1.03, 1.03)])
def test_of_two_sets_the_one_that_brings_the_bus_nearest_to_rated_is_kept(
    first: float, second: float, trimmed: float
) -> None:
    one = island(one_bus({"no_load_voltage_pu": first}, {"no_load_voltage_pu": second}))
    assert [t.u_trimmed_pu for t in one.trims] == pytest.approx([trimmed] * 2, abs=1e-6)


def test_what_holds_its_own_voltage_or_speed_has_no_trim() -> None:
    one = island(
        one_bus({"field_supply": "fixed", "no_load_voltage_pu": 1.5}, {"governor_mode": "isochronous"})
    )
    assert np.isnan(one.trims[0].u_trimmed_pu)
    assert np.isnan(one.trims[1].f_trimmed_pu)
    assert one.trims[0].f_trimmed_pu == pytest.approx(1.04 + 0.75 * 0.04, abs=1e-9)


def test_equal_droops_trimmed_share_in_proportion_at_every_load() -> None:
    """Equal straight lines lie on each other; only the phasor law leaves a trace where kW differ."""
    one = island(one_bus({"no_load_voltage_pu": 1.01, "no_load_frequency_pu": 1.045}, {}))
    assert np.abs(one.trimmed.dp_kw).max() < 1e-3
    assert np.abs(one.trimmed.dq_kvar).max() < 1e-3


def test_droop_of_4_and_8_per_cent_trimmed_at_75_fails_at_the_ends() -> None:
    """Between trim and 20 % the gentler line gives up (1/d1)/(1/d1 + 1/d2) of the change, not half of it.

    Closed form of straight lines; the law bends them, and the active load adds to the fall, by a tenth.
    """
    one = island(one_bus({"voltage_droop_pu": 0.04}, {"voltage_droop_pu": 0.08}))
    change = one.trimmed.q_total_kvar[0] - one.trimmed.q_total_kvar[list(one.trimmed.load_pu).index(0.75)]
    assert one.trimmed.dq_kvar[0, 0] == pytest.approx(change * (2.0 / 3.0 - 1.0 / 2.0), rel=0.1)
    assert np.abs(one.trimmed.dq_kvar).max() > one.q_tolerance_kvar[0]


def test_the_order_of_the_sets_changes_nothing() -> None:
    p = three_boards()
    one, other = island(p), island(replace(p, gensets=p.gensets[::-1]))
    assert one.sets == other.sets[::-1]
    for curve in ("as_set", "trimmed"):
        a, b = getattr(one, curve), getattr(other, curve)
        np.testing.assert_allclose(a.q_kvar, b.q_kvar[:, ::-1], atol=1e-4)
        np.testing.assert_allclose(a.dq_kvar, b.dq_kvar[:, ::-1], atol=1e-4)
        np.testing.assert_allclose(a.p_kw, b.p_kw[:, ::-1], atol=1e-4)
        np.testing.assert_allclose(a.u_pu, b.u_pu, atol=1e-9)
    assert one.u_operating_pu == pytest.approx(other.u_operating_pu, abs=1e-9)
    theirs = {(m.genset, m.setting): m for m in other.margins}
    assert len(one.margins) == len(theirs) == 12
    for m in one.margins:
        n = theirs[m.genset, m.setting]
        assert (m.low_breaks, m.high_breaks) == (n.low_breaks, n.high_breaks)
        assert [m.low_pu, m.high_pu] == pytest.approx([n.low_pu, n.high_pu], abs=1e-6, nan_ok=True)


# ---- sets that do not share


def test_one_zero_droop_set_takes_every_change_of_kvar() -> None:
    """Common practice, no source: the stiff set holds the voltage and the others keep their kvar."""
    one = island(one_bus({"regulator_mode": "no droop"}, {}))
    moved = np.ptp(one.as_set.q_kvar, axis=0)
    assert moved[1] < 0.05 * moved[0]
    np.testing.assert_allclose(one.as_set.u_pu, 1.0, atol=1e-9)
    assert "G1 has no voltage droop and takes every change of kvar." in one.findings


def test_an_isochronous_set_takes_every_change_of_kw() -> None:
    one = island(one_bus({"governor_mode": "isochronous", "no_load_frequency_pu": 1.0}, {}))
    np.testing.assert_allclose(one.as_set.p_kw[:, 1], 800.0, atol=1e-6)
    np.testing.assert_allclose(one.as_set.f_hz, 60.0, atol=1e-9)
    assert "G1 is isochronous and takes every change of kW." in one.findings


def test_load_sharing_governors_share_in_proportion() -> None:
    big = {"s_rated_kva": 2000.0, "p_engine_kw": 2400.0, "governor_mode": "load sharing"}
    one = island(one_bus(big, {"governor_mode": "load sharing"}))
    np.testing.assert_allclose(one.as_set.dp_kw, 0.0, atol=1e-6)


def test_cross_current_compensation_shares_without_a_fall_of_voltage() -> None:
    """Common practice, no source: only the unbalance is seen, so the bus keeps its voltage."""
    one = island(one_bus(CROSS, CROSS))
    np.testing.assert_allclose(one.as_set.dq_kvar, 0.0, atol=1e-6)
    np.testing.assert_allclose(one.as_set.u_pu, 1.0, atol=1e-9)


def test_a_set_at_set_power_and_one_on_kvar_control_take_no_part() -> None:
    points = [
        set_point("G1", p_set_kw=300.0),
        set_point("G2", regulator_mode="kvar control", q_set_kvar=150.0),
    ]
    one = island(one_bus({}, {}, {}, modes=[mode(set_points=points)]))
    assert one.apart_kw == ("G1",)
    assert one.apart_kvar == ("G2",)
    np.testing.assert_allclose(one.as_set.p_kw[:, 0], 300.0, atol=1e-6)
    np.testing.assert_allclose(one.as_set.q_kvar[:, 1], 150.0, atol=1e-6)
    np.testing.assert_allclose(one.as_set.dp_kw, 0.0, atol=1e-4)  # the two others are equal
    changed = {(m.genset, m.setting) for m in one.margins}
    assert not changed & {("G1", "no-load frequency"), ("G1", "speed droop")}
    assert not changed & {("G2", "no-load voltage"), ("G2", "voltage droop")}


def test_a_reversed_droop_circuit_runs_away_and_has_no_margins() -> None:
    """Common practice, no source: a reversed circuit drives the sets apart to their limits."""
    strong = {"ceiling": 1.5, "x_d_pu": 0.8, "x_q_pu": 0.6}
    one = island(one_bus({"reversed_polarity": True, **strong}, strong, kw=600.0))
    assert abs(one.q_operating_kvar[0] - one.q_operating_kvar[1]) > 2.0 * one.q_tolerance_kvar[0]
    assert any(text.startswith("G1: its droop circuit is reversed") for text in one.findings)
    assert any("G1 is held at its excitation limit" in text for text in one.findings)
    assert not [m for m in one.margins if "voltage" in m.setting]


def test_a_reversed_droop_circuit_without_any_operating_point_says_so() -> None:
    tight = {"ceiling": 2.0, "x_d_pu": 2.0}
    (left,) = study(one_bus({"reversed_polarity": True, **tight}, tight)).not_studied
    assert "the droop circuit of G1 is reversed" in left.reason


def test_a_fixed_field_is_judged_but_not_trimmed() -> None:
    one = island(one_bus({"regulator_mode": "fixed excitation", "no_load_voltage_pu": 1.1}, {}, kw=500.0))
    assert one.apart_kvar == ()
    assert np.nanmax(np.abs(one.as_set.dq_kvar)) > one.q_tolerance_kvar[0]
    assert any(text.startswith("G1: no regulator acts on its field") for text in one.findings)


def test_two_zero_droop_sets_are_not_studied_and_it_says_why() -> None:
    result = study(one_bus({"regulator_mode": "no droop"}, {"regulator_mode": "no droop"}))
    assert result.islands == ()
    (left,) = result.not_studied
    assert left.sets == ("G1", "G2")
    assert "kvar is undetermined" in left.reason


def test_an_overloaded_mode_has_its_sharing_judged_over_the_range() -> None:
    """The range of load is that of the ratings, whatever the mode asks for."""
    unequal = ({"no_load_voltage_pu": 1.02}, {})
    over, within = (island(one_bus(*unequal, kw=kw)) for kw in (4000.0, 800.0))
    assert any("no operating point at the mode's own load: the load exceeds" in x for x in over.findings)
    assert np.isnan(over.p_operating_kw).all()
    np.testing.assert_allclose(over.as_set.q_kvar, within.as_set.q_kvar, atol=0.01)
    np.testing.assert_allclose(over.trimmed.dq_kvar, within.trimmed.dq_kvar, atol=0.01)
    assert over.cos_phi == pytest.approx(within.cos_phi, abs=1e-6)
    alike = island(one_bus({}, {}, kw=4000.0))
    assert {m.low_breaks[:12] for m in alike.margins} == {"kvar sharing", "kW sharing o"}


def test_no_setting_cures_an_overload_so_margins_leave_it_aside() -> None:
    over = island(one_bus({}, {}, kw=1700.0))
    assert any(
        x.startswith("The mode's own load is beyond the ratings of G1 and G2 together") for x in over.findings
    )
    assert all("sharing" in m.low_breaks + m.high_breaks for m in over.margins)


def test_an_overload_of_another_island_hides_nothing() -> None:
    sets = [genset(f"G{k}", "A" if k < 3 else "B") for k in (1, 2, 3)]
    loads = [load("Pumps", "A", p_rated_kw=900.0), load("Fans", "B", p_rated_kw=3000.0)]
    p = plant(boards=[board("A"), board("B")], gensets=sets, loads=loads)
    alone = island(replace(p, loads=p.loads[:1]))
    np.testing.assert_allclose(island(p).as_set.q_kvar, alone.as_set.q_kvar, atol=1e-6)


def test_sets_without_a_consumer_are_not_studied() -> None:
    p = one_bus({}, {})
    (left,) = study(replace(p, loads=(replace(p.loads[0], p_rated_kw=0.0),))).not_studied
    assert left.reason == "no consumer that could be scaled is in use."


def test_sets_beside_a_shore_supply_have_no_sharing_of_their_own() -> None:
    p = one_bus({}, {}, shore_supplies=[shore("Shore", "MSB", i_rated_a=4000.0)])
    assert study(p).islands == ()
    assert study(p).not_studied == ()


def test_an_engine_at_its_limit_at_full_load_is_said() -> None:
    """Droop 3 % beside 5 %: at full load the stiffer engine would carry 125 %, and its fuel ends at 110 %."""
    tight = {"p_engine_kw": 860.0}
    one = island(
        one_bus(
            {"speed_droop_pu": 0.03, "no_load_frequency_pu": 1.03, **tight},
            {"speed_droop_pu": 0.05, "no_load_frequency_pu": 1.03, **tight},
        )
    )
    assert one.as_set.p_kw[-1, 0] == pytest.approx(1.1 * 860.0 * 0.95, rel=1e-9)
    assert any(text.startswith("G1 is held at its engine limit at ") for text in one.findings)
    assert all(m.trimmed for m in one.margins)


def test_what_cannot_be_scaled_is_kept_and_named() -> None:
    """A synchronous motor keeps its kW and a filter its kvar: the least load is the motor's."""
    p = one_bus(
        {},
        {},
        synchronous_motors=[synchronous_motor("SM", "MSB", p_output_kw=570.0, efficiency=0.95)],
        filters=[filter_bank("C1", "MSB")],
    )
    one = island(p)
    assert one.as_set.load_pu[0] == pytest.approx(600.0 / 1600.0, abs=1e-6)
    assert one.as_set.load_pu[-1] == 1.0
    np.testing.assert_allclose(one.as_set.p_total_kw, 1600.0 * one.as_set.load_pu, rtol=1e-4)
    assert "SM and C1 keep their power over the range of load: only the consumers are scaled." in one.findings
    assert "The sets carry 38 % without any consumer; sharing is judged from there." in one.findings


def test_a_battery_with_droop_takes_its_part_and_the_range_is_that_of_the_sets() -> None:
    point = set_point("Battery", no_load_frequency_pu=1.02)
    battery = converter_supply("Battery", "MSB", speed_droop_pu=0.05)
    p = one_bus({}, {}, converter_supplies=[battery], modes=[mode(set_points=[point])])
    one = island(p)
    assert one.sets == ("G1", "G2")
    np.testing.assert_allclose(one.as_set.p_total_kw, 1600.0 * one.as_set.load_pu, rtol=2e-3)
    assert any("Battery too takes load by droop of its own" in text for text in one.findings)


def test_set_lines_pass_through_the_operating_points() -> None:
    one = island(three_boards())
    for line in one.lines:
        u = np.interp(line.q_operating_kvar, line.q_kvar, line.u_pu)
        assert u == pytest.approx(line.u_operating_pu, abs=2e-5)


def test_a_line_ends_where_the_droop_leaves_no_voltage() -> None:
    """Droop 20 % from 80 %: (V + Xq/V)^2 + (Xp/V)^2 = 0.64 has no root at large kvar; no crash, no number."""
    steep = {"voltage_droop_pu": 0.20, "no_load_voltage_pu": 0.62, "droop_base": "rated kVA"}
    one = island(one_bus(steep, steep, kw=100.0, cos_phi=1.0))
    u = one.lines[0].u_pu
    assert np.isfinite(u[0])
    assert np.isnan(u[-1])


def test_unequal_rated_voltages_are_each_of_the_set_s_own() -> None:
    """450 V and 440 V sets on a 440 V board at the same no-load per cent: the 450 V set takes more."""
    one = island(one_bus({}, {"u_rated_v": 440.0}))
    assert one.q_operating_kvar[0] > one.q_operating_kvar[1]
    u = [line.u_operating_pu for line in one.lines]
    assert u[0] * 450.0 == pytest.approx(u[1] * 440.0, rel=1e-12)


def test_two_islands_are_studied_apart() -> None:
    sets = [
        genset(f"G{i}", name, p_engine_kw=1200.0) for name in ("A", "B") for i in (f"{name}1", f"{name}2")
    ]
    p = plant(
        boards=[board("A"), board("B")],
        gensets=sets,
        loads=[load("LA", "A", p_rated_kw=600.0), load("LB", "B", p_rated_kw=200.0)],
    )
    one, other = study(p).islands
    assert one.sets == ("GA1", "GA2")
    assert other.sets == ("GB1", "GB2")
    np.testing.assert_allclose(other.as_set.p_total_kw, 1600.0 * other.as_set.load_pu, rtol=1e-4)
