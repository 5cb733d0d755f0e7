"""Limit cases of sharing on one bus, and agreement with a load flow of the same sets."""

import numpy as np
import pytest

from study.formulas.load_compensation import compensated_voltage, reactance_from_droop, signed_reactance
from study.formulas.sharing import (
    active_sharing_limit,
    reactive_sharing_limit,
    set_point_margin,
    set_point_sensitivity,
    share_reactive,
    share_straight,
    trimmed_no_load,
)


def test_phasor_law_agrees_with_a_load_flow_behind_the_droop_reactances():
    """The law |V + jXc I| = Vref is that of a voltage source behind Xc: pandapower solves that network."""
    pp = pytest.importorskip("pandapower")
    net = pp.create_empty_network(sn_mva=1.0)
    board = pp.create_bus(net, 0.45)
    for xc in (0.04, 0.08):
        hidden = pp.create_bus(net, 0.45)
        pp.create_gen(net, hidden, p_mw=0.8, vm_pu=1.0, slack=True, slack_weight=1.0)
        pp.create_impedance(net, hidden, board, rft_pu=0.0, xft_pu=xc, sn_mva=1.0)
    pp.create_load(net, board, 1.6, 1.0)
    pp.runpp(net, distributed_slack=True, numba=False, lightsim2grid=False, init="flat", tolerance_mva=1e-10)
    v, q = share_reactive([1.0, 1.0], [0.04, 0.08], [0.8, 0.8], [1000.0, 1000.0], 1000.0)
    assert float(v) == pytest.approx(float(net.res_bus.vm_pu[board]), abs=1e-9)
    assert q.tolist() == pytest.approx((-1e3 * net.res_impedance.q_to_mvar).tolist(), abs=1e-5)


def test_reactive_current_law_has_the_root_of_a_quadratic():
    """V^2 - V (sum k E/sum k) + Q/sum k = 0 with k = r/Xc."""
    e, x, r, total = (
        np.array([1.01, 1.0, 0.99]),
        np.array([0.04, 0.05, 0.06]),
        np.array([800.0, 500.0, 500.0]),
        900.0,
    )
    k = r / x
    mean = np.sum(k * e) / np.sum(k)
    expected = 0.5 * (mean + np.sqrt(mean**2 - 4.0 * total / np.sum(k)))
    v, q = share_reactive(e, x, np.zeros(3), r, total)
    assert float(v) == pytest.approx(expected, abs=1e-13)
    assert q.sum() == pytest.approx(total, abs=1e-8)
    assert q.tolist() == pytest.approx((k * expected * (e - expected)).tolist(), abs=1e-8)


def test_many_loads_at_once_are_as_one_by_one():
    totals = np.array([0.0, 300.0, 1200.0])
    args = ([1.0, 1.01], [0.03, 0.05], [0.5, 0.6], [1000.0, 600.0])
    v, q = share_reactive(*args, totals)
    assert v.shape == (3,)
    assert q.shape == (3, 2)
    for one, total in enumerate(totals):
        assert share_reactive(*args, total)[1].tolist() == pytest.approx(q[one].tolist(), abs=1e-9)
    assert share_straight([1.0, 1.01], [0.03, 0.05], [600.0, 400.0], totals)[1].shape == (3, 2)


def test_one_set_without_droop_takes_every_change():
    _, q1 = share_reactive([1.0, 1.0], [0.0, 0.05], [0.8, 0.8], [1000.0, 1000.0], 500.0)
    v, q2 = share_reactive([1.0, 1.0], [0.0, 0.05], [0.8, 0.8], [1000.0, 1000.0], 900.0)
    assert float(v) == 1.0
    assert (q2 - q1).tolist() == pytest.approx([400.0, 0.0], abs=1e-9)
    x, y = share_straight([60.0, 61.0], [0.0, 2.0], [1.0, 1.0], 1.6)
    assert float(x) == 60.0
    assert y.tolist() == pytest.approx([1.1, 0.5], abs=1e-12)


def test_set_without_droop_at_its_limit_leaves_the_rest_to_the_other():
    v, q = share_reactive([1.0, 1.0], [0.0, 0.08], [0.8, 0.8], [1000.0, 1000.0], 1000.0, q_max_pu=[0.6, 0.6])
    assert q.tolist() == pytest.approx([600.0, 400.0], abs=1e-8)
    assert float(compensated_voltage(v, 0.8, 0.4, 0.0, 0.08)) == pytest.approx(1.0, abs=1e-12)


def test_a_limited_set_stays_at_its_limit():
    _, q = share_reactive([1.0, 1.0], [0.02, 0.08], [0.5, 0.5], [1000.0, 1000.0], 900.0, q_max_pu=[0.6, 0.6])
    assert q.tolist() == pytest.approx([600.0, 300.0], abs=1e-8)


def test_two_sets_without_droop_are_undetermined():
    with pytest.raises(ValueError, match="undetermined"):
        share_reactive([1.0, 1.0], [0.0, 0.0], [0.5, 0.5], [1.0, 1.0], 1.0)
    with pytest.raises(ValueError, match="undetermined"):
        share_straight([1.0, 1.0], [0.0, 0.0], [1.0, 1.0], 1.0)


def test_reversed_droop_is_no_operating_point():
    x = signed_reactance(reactance_from_droop(0.04, "rated kVA", "phasor", 0.8, 1.0), "reversed")
    with pytest.raises(ValueError, match="reversed"):
        share_reactive([1.0, 1.0], [x, x], [0.5, 0.5], [1.0, 1.0], 0.8)


def test_load_beyond_every_limit_has_no_voltage():
    with pytest.raises(ValueError, match="no voltage"):
        share_reactive([1.0, 1.0], [0.05, 0.05], [0.5, 0.5], [1.0, 1.0], 3.0, q_max_pu=[1.0, 1.0])


def test_sets_trimmed_at_75_per_cent_share_in_proportion_there_only():
    droop, rating = np.array([0.04, 0.03]), np.array([600.0, 400.0])
    x0 = trimmed_no_load(1.0, droop, 0.75)
    x, y = share_straight(x0, droop, rating, 750.0)
    assert float(x) == pytest.approx(1.0, abs=1e-12)
    assert (y / rating).tolist() == pytest.approx([0.75, 0.75], abs=1e-12)
    assert np.ptp(share_straight(x0, droop, rating, 200.0)[1] / rating) > 0.05


def test_sharing_limits_of_the_rules():
    """ClassNK H 2.4.14: 15 % of the largest; the 25 % alternatives from memory of IEC 60092-301."""
    assert active_sharing_limit([1000.0, 1000.0], of_largest=0.15, of_own=0.25).tolist() == [150.0, 150.0]
    assert active_sharing_limit([1000.0, 300.0], of_largest=0.15, of_own=0.25).tolist() == [150.0, 75.0]
    assert reactive_sharing_limit([600.0, 600.0], of_largest=0.10, of_smallest=0.25) == 60.0
    assert reactive_sharing_limit([600.0, 100.0], of_largest=0.10, of_smallest=0.25) == 25.0


def test_margin_puts_the_first_set_exactly_on_its_limit():
    droop, rating = np.array([0.04, 0.03, 0.05]), np.array([600.0, 400.0, 500.0])
    x0, total = trimmed_no_load(1.0, droop, 0.75), 1125.0
    limit = np.full(3, 60.0)
    base = share_straight(x0, droop, rating, total)[1]
    fair = total * rating / rating.sum()
    down, up = set_point_margin(base - fair, limit, droop, rating)
    for j in range(3):
        for room, sign in ((up[j], 1.0), (down[j], -1.0)):
            moved = x0 + sign * room * np.eye(3)[j]
            stray = np.abs(share_straight(moved, droop, rating, total)[1] - fair)
            assert stray.max() == pytest.approx(60.0, abs=1e-6)


def test_sensitivity_is_the_slope_of_the_share():
    droop, rating = np.array([0.04, 0.03, 0.05]), np.array([600.0, 400.0, 500.0])
    slope = set_point_sensitivity(droop, rating)
    step = 1e-4 * np.eye(3)[1]
    moved = (
        share_straight(1.0 + step, droop, rating, 900.0)[1]
        - share_straight(np.ones(3), droop, rating, 900.0)[1]
    )
    assert (moved / 1e-4).tolist() == pytest.approx(slope[:, 1].tolist(), rel=1e-6)


def test_a_set_alone_has_no_sharing_margin():
    with pytest.raises(ValueError, match="alone"):
        set_point_margin([0.0], [60.0], [0.04], [600.0])


def test_droop_on_reactive_load_needs_reactive_power_in_its_base():
    with pytest.raises(ValueError, match="power factor 1"):
        reactance_from_droop(0.05, "rated load at rated pf", "reactive current", 1.0, 1.0)
    with pytest.raises(ValueError, match="power factor 1"):
        reactance_from_droop(0.05, "rated kvar", "phasor", 1.0, 1.0)
    assert reactance_from_droop(0.05, "rated load at rated pf", "phasor", 1.0, 1.0) > 0.0
    assert reactance_from_droop(0.0, "rated kvar", "phasor", 1.0, 1.0) == 0.0
