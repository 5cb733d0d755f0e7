"""Adjusting margins: at each margin's value the network itself has the stated quantity at its limit.

The network is solved again with the setting at that value, at 20 % and 100 % of the combined rating and at
the mode's own load, apart from how the margin was found.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from study.analyses.sharing_options import SharingOptions
from study.formulas.sharing import active_sharing_limit, reactive_sharing_limit, set_point_margin
from study.model.plant import Plant
from study.results.arrays import FloatArray
from study.results.sharing import AdjustingMargin, IslandSharing
from tests.analyses.sharing_plants import OPTIONS, island, one_bus, solved_with, three_boards
from tests.plants import mode, set_point

WIDE = SharingOptions(kw_of_largest=9.0, kw_of_own=9.0, kvar_of_largest=9.0, kvar_of_smallest=9.0)


def scales(p: Plant) -> FloatArray:
    """Return factors on the consumers that give 20 %, 100 % and the own load on the sets, by bisection."""
    rated = sum(g.p_rated_kw for g in p.gensets)

    def total(k: float) -> float:
        return float(solved_with(p, np.array([k])).source_p_kw.sum())

    found = []
    for wanted in (0.2 * rated, 1.0 * rated):
        low, high = 0.0, 4.0
        for _ in range(40):
            middle = 0.5 * (low + high)
            low, high = (middle, high) if total(middle) <= wanted else (low, middle)
        found.append(low)
    return np.array([*found, 1.0])


def uses(
    p: Plant, k: FloatArray, m: AdjustingMargin, value: float, options: SharingOptions
) -> dict[str, float]:
    """Return how far every quantity is used with one setting changed: 1 at its limit."""
    found = solved_with(p, k, m.genset, m.setting, value)
    assert found.solved.all()
    kw, kvar = found.source_p_kw, found.source_q_kvar
    rated_kw, rated_kvar = (
        np.array([getattr(g, n) for g in p.gensets]) for n in ("p_rated_kw", "q_rated_kvar")
    )
    kw_limit = active_sharing_limit(rated_kw, of_largest=options.kw_of_largest, of_own=options.kw_of_own)
    kvar_limit = reactive_sharing_limit(
        rated_kvar, of_largest=options.kvar_of_largest, of_smallest=options.kvar_of_smallest
    )
    kw_off = np.abs(kw - kw.sum(axis=1)[:, None] * rated_kw / rated_kw.sum()) / kw_limit
    kvar_off = np.abs(kvar - kvar.sum(axis=1)[:, None] * rated_kvar / rated_kvar.sum()) / kvar_limit
    out: dict[str, float] = {}
    for i, g in enumerate(p.gensets):
        out[f"kW sharing of {g.name}"] = float(kw_off[:, i].max())
        out[f"kvar sharing of {g.name}"] = float(kvar_off[:, i].max())
        out[f"rated kVA of {g.name}"] = float(np.hypot(kw, kvar)[-1, i] / g.s_rated_kva)
        out[f"rated kW of {g.name}"] = float(kw[-1, i] / g.p_rated_kw)
    u, f = found.board_u_pu()[-1], found.frequency_pu[-1, 0]
    out["lowest voltage"] = float((1.0 - u.min()) / options.voltage_low)
    out["highest voltage"] = float((u.max() - 1.0) / options.voltage_high)
    out["lowest frequency"] = float((1.0 - f) / options.frequency)
    out["highest frequency"] = float((f - 1.0) / options.frequency)
    return out


def sides(one: IslandSharing) -> list[tuple[AdjustingMargin, float, str]]:
    """Return every margin that ends, either way."""
    both = [(m, m.low_pu, m.low_breaks) for m in one.margins] + [
        (m, m.high_pu, m.high_breaks) for m in one.margins
    ]
    return [(m, value, breaks) for m, value, breaks in both if np.isfinite(value)]


CROSS = {"regulator_mode": "cross-current"}
BIG = {"s_rated_kva": 2000.0, "p_engine_kw": 2400.0}


@pytest.mark.parametrize(
    ("p", "count"),
    [
        pytest.param(three_boards(), 24, id="cables between unequal sets"),
        pytest.param(one_bus({"no_load_voltage_pu": 1.004}, {"voltage_droop_pu": 0.032}), 16, id="one bus"),
        pytest.param(one_bus({"droop_law": "reactive current"}, BIG, {}, kw=1500.0), 24, id="two laws"),
        pytest.param(
            one_bus({"droop_base": "rated kvar"}, {"droop_base": "rated kvar"}), 16, id="rated kvar"
        ),
        pytest.param(
            one_bus({**CROSS, "no_load_voltage_pu": 1.001}, {**CROSS, **BIG}, kw=1500.0), 12, id="cross"
        ),
    ],
)
def test_at_its_margin_the_network_has_the_stated_quantity_at_its_limit(p: Plant, count: int) -> None:
    """Within 1 %; nothing else is further beyond its limit, and half-way there all limits hold."""
    one, k = island(p), scales(p)
    found = sides(one)
    assert len(found) == count
    for m, value, breaks in found:
        there = uses(p, k, m, value, OPTIONS)
        assert there[breaks] == pytest.approx(1.0, abs=0.01), (m.genset, m.setting, breaks)
        assert max(there.values()) < 1.01, (m.genset, m.setting, breaks)
        half = uses(p, k, m, 0.5 * (value + m.set_pu), OPTIONS)
        assert max(half.values()) < 1.0
        beyond = uses(p, k, m, m.set_pu + 1.2 * (value - m.set_pu), OPTIONS)
        assert beyond[breaks] > 1.0


def test_the_set_points_of_two_sets_with_4_per_cent_must_agree_within_0_8_per_cent() -> None:
    """Qr dE/d: 10 % of rated kvar uses 0.1 x 2 x 4 % of set-point; the law bends the lines by a twentieth."""
    droop = {"voltage_droop_pu": 0.04, "droop_base": "rated kvar", "droop_law": "reactive current"}
    margin = island(one_bus(droop, droop)).margins[0]
    down, up = set_point_margin([0.0, 0.0], [60.0, 60.0], [0.04, 0.04], [600.0, 600.0])
    assert up[0] == pytest.approx(0.008)
    assert margin.setting == "no-load voltage"
    assert margin.high_pu - 1.0 == pytest.approx(up[0], rel=0.05)
    assert 1.0 - margin.low_pu == pytest.approx(down[0], rel=0.05)


def test_speed_settings_follow_straight_lines() -> None:
    """Tolerance 15 % of rated: dP = Pr df / (2 d), so df = 2 x 0.15 x 4 % at any load; droop at 100 %."""
    one = island(one_bus({}, {}))
    by_setting = {m.setting: m for m in one.margins if m.genset == "G1"}
    m = by_setting["no-load frequency"]
    assert m.high_pu - m.set_pu == pytest.approx(2 * 0.15 * 0.04, rel=1e-3)
    assert m.set_pu - m.low_pu == pytest.approx(2 * 0.15 * 0.04, rel=1e-3)
    # at full load the frequency is 1.04 - 0.04 x 0.85 where the other carries 85 %, and this set 115 %
    m = by_setting["speed droop"]
    assert m.low_pu == pytest.approx(0.04 * 0.85 / 1.15, rel=1e-3)
    assert m.high_pu == pytest.approx(0.04 * 1.15 / 0.85, rel=1e-3)


def test_voltage_limits_are_of_the_board_and_not_of_the_sets() -> None:
    """450 V sets on a 440 V board: +6 % is 466.4 V, which is 3.6 % above the sets' rated voltage."""
    p = one_bus(
        {"no_load_voltage_pu": 1.02, "voltage_droop_pu": 0.01}, {"no_load_voltage_pu": 1.02}, kw=300.0
    )
    m = next(x for x in island(p, WIDE).margins if (x.genset, x.setting) == ("G1", "no-load voltage"))
    assert m.high_breaks == "highest voltage"
    found = solved_with(p, np.ones(1), "G1", "no-load voltage", m.high_pu)
    assert found.source_u_pu[0, 0] * 450.0 == pytest.approx(1.06 * 440.0, abs=0.05)


def margin_of(p: Plant, genset: str, setting: str, options: SharingOptions = WIDE) -> AdjustingMargin:
    one = island(p, options)
    return next(m for m in one.margins if (m.genset, m.setting) == (genset, setting))


@pytest.mark.parametrize(
    ("kw", "setting", "side", "breaks", "options"),
    [
        (1100.0, "no-load frequency", "high", "rated kW of G1", WIDE),
        (1100.0, "no-load frequency", "low", "rated kW of G2", WIDE),
        (1200.0, "no-load voltage", "high", "rated kVA of G1", WIDE),
        (1100.0, "speed droop", "low", "rated kW of G1", WIDE),
        (800.0, "no-load voltage", "low", "lowest voltage", replace(WIDE, voltage_low=0.01)),
        (400.0, "no-load frequency", "high", "highest frequency", replace(WIDE, frequency=0.031)),
    ],
)
def test_each_limit_can_be_the_first_to_break(
    kw: float, setting: str, side: str, breaks: str, options: SharingOptions
) -> None:
    p = one_bus({}, {}, kw=kw, cos_phi=0.9)
    m = margin_of(p, "G1", setting, options)
    assert getattr(m, f"{side}_breaks") == breaks
    there = uses(p, np.array([1.0]), m, getattr(m, f"{side}_pu"), options)
    # with tolerances set aside a setting goes far, and the line is straight to 3 %
    assert there[breaks] == pytest.approx(1.0, abs=0.03)


def test_the_lowest_frequency_can_be_the_first_to_break() -> None:
    """1.0 - 0.04 x 200/800 = 0.99 pu; the plant is at 0.98 when one of two equal sets is 2 % lower."""
    low = {"no_load_frequency_pu": 1.0}
    m = margin_of(one_bus(low, low, kw=400.0), "G1", "no-load frequency", replace(WIDE, frequency=0.02))
    assert m.low_breaks == "lowest frequency"
    assert m.low_pu == pytest.approx(0.98, abs=1e-6)


def test_load_sharing_governors_move_the_frequency_by_their_mean() -> None:
    """Both at 100 %, limit 105 %: one of two equal sets may go to 110 %, beyond the 5 % that is followed."""
    sharing = {"governor_mode": "load sharing", "no_load_frequency_pu": 1.0}
    m = margin_of(one_bus(sharing, sharing), "G1", "no-load frequency")
    assert np.isnan([m.low_pu, m.high_pu]).all()
    assert (m.low_breaks, m.high_breaks) == ("", "")
    m = margin_of(one_bus(sharing, sharing), "G1", "no-load frequency", replace(WIDE, frequency=0.02))
    assert m.high_pu == pytest.approx(1.04, abs=1e-6)
    assert m.high_breaks == "highest frequency"


def test_an_isochronous_set_moves_the_frequency_and_the_others_kw() -> None:
    """Its no-load frequency is the plant's; the other set gives ``Pr (f0 - f) / droop``."""
    p = one_bus(
        {"governor_mode": "isochronous", "no_load_frequency_pu": 1.0},
        {"no_load_frequency_pu": 1.02},
        kw=800.0,
    )
    options = replace(OPTIONS, kw_of_largest=0.9, kw_of_own=0.9, kvar_of_largest=9.0, kvar_of_smallest=9.0)
    m = margin_of(p, "G1", "no-load frequency", options)
    there = solved_with(p, np.ones(1), "G1", "no-load frequency", m.low_pu)
    assert there.frequency_pu[0, 0] == pytest.approx(m.low_pu, abs=1e-12)
    assert there.source_p_kw[0, 1] == pytest.approx(800.0 * (1.02 - m.low_pu) / 0.04, rel=1e-9)
    assert not [x for x in island(p, options).margins if (x.genset, x.setting) == ("G1", "speed droop")]


def test_a_stiff_set_has_a_margin_of_voltage_and_none_of_droop() -> None:
    one = island(one_bus({"regulator_mode": "no droop"}, {}), WIDE)
    assert {m.setting for m in one.margins if m.genset == "G1" and "voltage" in m.setting} == {
        "no-load voltage"
    }


def test_what_is_broken_as_set_and_as_trimmed_has_no_room() -> None:
    one = island(one_bus({"voltage_droop_pu": 0.08}, {"voltage_droop_pu": 0.02}))
    assert one.margins
    for m in one.margins:
        assert not m.trimmed
        assert m.low_pu == m.high_pu == m.set_pu
        assert m.low_breaks == m.high_breaks
        assert m.low_breaks in {f"kvar sharing of {name}, broken as set" for name in one.sets}


def test_margins_of_sets_out_of_tolerance_are_about_the_trimmed_set_points() -> None:
    """The set that is off is brought to the other, and the room is that of two sets set alike."""
    off, alike = (island(one_bus({"no_load_voltage_pu": u}, {})) for u in (1.02, 1.0))
    assert all(m.trimmed for m in off.margins)
    assert not any(m.trimmed for m in alike.margins)
    for m, other in zip(off.margins, alike.margins, strict=True):
        assert m.set_pu - m.low_pu == pytest.approx(other.set_pu - other.low_pu, rel=0.05)


def test_near_full_load_the_engines_fuel_limit_leaves_the_margin_on_the_safe_side() -> None:
    """Fuel ends at 110 %, so at full load no set can be 15 % above its share; the margin does not see it."""
    tight = {"p_engine_kw": 842.2}  # 800 kW at the terminals
    p = one_bus(tight, tight)
    m = margin_of(p, "G1", "speed droop", OPTIONS)
    there = uses(p, scales(p), m, m.low_pu, OPTIONS)
    assert 0.6 < there["kW sharing of G1"] < 1.0
    assert m.low_pu == pytest.approx(
        margin_of(one_bus({}, {}), "G1", "speed droop", OPTIONS).low_pu, rel=1e-3
    )


def test_the_mode_s_set_points_are_the_values_as_set() -> None:
    point = set_point("G1", no_load_voltage_pu=1.003, no_load_frequency_pu=1.041)
    p = one_bus({}, {}, modes=[mode(set_points=[point])])
    assert margin_of(p, "G1", "no-load voltage", OPTIONS).set_pu == 1.003
    assert margin_of(p, "G1", "no-load frequency", OPTIONS).set_pu == 1.041
