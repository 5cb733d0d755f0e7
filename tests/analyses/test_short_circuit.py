"""Short-circuit study of small plants: by hand, at its limits, and with what must not change a result.

Hand values are plain arithmetic on the formulas of IEC 61363-1 (from memory of the standard), written here
without the modules under test.
"""

import math
from dataclasses import replace

import numpy as np
import pytest

from study.analyses.short_circuit import short_circuit
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.analyses.short_circuit_totals import greatest_peaks
from study.formulas.fault_current import FaultCurrent, greatest_peak_a
from study.network.network import build_network
from tests import plants

OWN = ShortCircuitOptions(compare=False)
HZ, SQRT2, SQRT3 = 60.0, math.sqrt(2.0), math.sqrt(3.0)
RATED_A = 1000e3 / (SQRT3 * 450.0)


def study(plant, options=OWN):
    return short_circuit(build_network(plant), options)


def at(result, name, mode=0):
    return result.places.names.index(name), result.modes[mode]


def a_set(name, board="MSB", **changes):
    """The machine of the worked case: 1 MVA, 450 V, no tolerance, saturated values as stated."""
    given = {
        "x_d_pu": 2.2,
        "x_d1_pu": 0.25,
        "x_d2_pu": 0.15,
        "x_d1_saturated_pu": 0.25,
        "x_d2_saturated_pu": 0.15,
        "r_stator_pu": 0.01,
        "t_d1_s": 0.25,
        "t_d2_s": 0.015,
        "t_armature_s": 0.15 / (2.0 * math.pi * HZ * 0.01),
        "reactance_tolerance": 0.0,
        "sustained_current": 1.3,
    }
    return plants.genset(name, board, **{**given, **changes})


def one_board(*sets, **more):
    return plants.plant(boards=[plants.board("MSB", 450.0)], gensets=list(sets), **more)


def by_hand(*, x_sub=0.15, x_trans=0.25, ra=0.01, cos_phi=0.8, sustained=1.3, loaded=True):
    """I'', Iac(T/2) and ip of one set at its terminals, per unit of rated current."""
    load = (cos_phi - 1j * math.sqrt(1 - cos_phi**2)) if loaded else 0.0
    sub, trans = (abs(1.0 + complex(ra, x) * load) / abs(complex(ra, x)) for x in (x_sub, x_trans))
    t, t_dc = 0.5 / HZ, 0.15 / (2.0 * math.pi * HZ * 0.01)
    ac = (sub - trans) * math.exp(-t / 0.015) + (trans - sustained) * math.exp(-t / 0.25) + sustained
    dc = SQRT2 * (sub + (load.imag if loaded else 0.0)) * math.exp(-t / t_dc)
    return sub, ac, SQRT2 * ac + dc


# ---- by hand


def test_one_loaded_set_at_its_board():
    k, mode = at(study(one_board(a_set("G1"))), "MSB")
    sub, ac, ip = by_hand()
    case = mode.maximum
    assert case.ik_initial_a[k] == pytest.approx(sub * RATED_A, rel=1e-9)
    assert case.iac_half_a[k] == pytest.approx(ac * RATED_A, rel=1e-9)
    assert case.ip_a[k] == pytest.approx(ip * RATED_A, rel=1e-9)
    # The same machine in the literature's order of size: 9.4 kA, 7.8 kA, 21 kA.
    assert case.ik_initial_a[k] == pytest.approx(9421.0, abs=0.5)


def test_the_minimum_is_without_load_and_at_the_high_end_of_the_tolerance():
    k, mode = at(study(one_board(a_set("G1", reactance_tolerance=0.15))), "MSB")
    sub, _, _ = by_hand(x_sub=0.15 * 1.15, x_trans=0.25 * 1.15, loaded=False)
    assert mode.minimum.ik_initial_a[k] == pytest.approx(sub * RATED_A, rel=1e-9)
    high = by_hand(x_sub=0.15 * 0.85, x_trans=0.25 * 0.85)
    assert mode.maximum.ik_initial_a[k] == pytest.approx(high[0] * RATED_A, rel=1e-9)
    assert mode.maximum.ik_initial_nominal_a[k] == pytest.approx(by_hand()[0] * RATED_A, rel=1e-9)


def test_a_set_behind_its_cable_and_a_fault_at_its_own_terminals():
    cable = plants.cable("C1", "G1", "MSB", length_m=100.0)
    result = study(one_board(a_set("G1"), cables=[cable]))
    base_ohm = 450.0**2 / 1000e3
    r20, x = 0.193 * 0.1 / base_ohm, 0.090 * 0.1 / base_ohm  # resistance is given at 20 degC: cold
    x4 = (8.0 * math.pi * HZ * 1e-4 / 0.193) ** 2
    r = r20 * (1.0 + x4 / (192.0 + 0.8 * x4))  # skin effect of IEC 60287-1-1
    emf = abs(1.0 + complex(0.01, 0.15) * (0.8 - 0.6j))
    board, mode = at(result, "MSB")
    terminals, _ = at(result, "G1")
    assert mode.maximum.ik_initial_a[board] == pytest.approx(
        emf / abs(complex(0.01 + r, 0.15 + x)) * RATED_A, rel=1e-6
    )
    assert mode.maximum.ik_initial_a[terminals] == pytest.approx(by_hand()[0] * RATED_A, rel=1e-9)


def test_small_motors_give_six_and_a_quarter_and_ten_times_their_current():
    """Typical data of IEC 61363-1, from memory: I'' 6.25 In, Iac(T/2) 4 In, ip 10 In, all rounded."""
    motor = plants.load("Pump", "MSB", p_rated_kw=75.0, u_rated_v=450.0)
    result = study(one_board(a_set("G1"), loads=[motor]))
    sources = result.modes[0].maximum.sources
    row = sources.names.index("small motors of MSB")
    k, mode = at(result, "MSB")
    rated = 75e3 / (SQRT3 * 450.0 * 0.93 * 0.86)
    assert sources.rated_a[row] == pytest.approx(rated)
    given = (mode.maximum.source_initial_a, mode.maximum.source_half_a, mode.maximum.source_ip_a)
    for current, times in zip(given, (6.25, 4.0, 10.0), strict=True):
        assert current[k, row] / rated == pytest.approx(times, rel=0.01)


def test_large_motors_stand_alone_and_small_ones_are_lumped_by_board():
    loads = [
        plants.load("Thruster", "MSB", p_rated_kw=400.0),
        plants.load("Pump 1", "MSB", p_rated_kw=30.0),
        plants.load("Pump 2", "MSB", p_rated_kw=40.0, installed=2),
        plants.load("Drive", "MSB", p_rated_kw=300.0, starting_method="converter"),
        plants.load("Winch", "MSB", p_rated_kw=300.0, starting_method="converter", regenerates=True),
        plants.load("Heater", "MSB", kind="heating", p_rated_kw=300.0),
    ]
    case = study(one_board(a_set("G1"), loads=loads)).modes[0].maximum
    assert case.sources.names[:4] == ("G1", "Thruster", "Winch", "small motors of MSB")
    small = case.sources.rated_a[3]
    assert small == pytest.approx((30.0 + 2 * 40.0) * 1e3 / (SQRT3 * 440.0 * 0.93 * 0.86))
    # A regenerating drive counts with 3 times its current (IEC 60909-0, from memory), at 450 of 440 V.
    assert case.sources.initial_a[2] / case.sources.rated_a[2] == pytest.approx(3.0 * 450.0 / 440.0)


def test_a_converter_supply_gives_its_limit_and_no_direct_component():
    supply = plants.converter_supply("BATT", "MSB", short_circuit_current=1.5, short_circuit_duration_s=0.5)
    plant = plants.plant(boards=[plants.board("MSB", 450.0)], converter_supplies=[supply])
    k, mode = at(study(plant), "MSB")
    limit = 1.5 * 500e3 / (SQRT3 * 450.0)
    assert mode.maximum.ik_initial_a[k] == pytest.approx(limit)
    assert mode.maximum.ip_a[k] == pytest.approx(SQRT2 * limit)
    assert mode.iec60909_maximum.ik_3ph_a[k] == pytest.approx(limit)
    times = mode.maximum.time_s
    assert np.all(mode.maximum.iac_a[k][times > 0.5] == 0.0)
    assert mode.maximum.iac_a[k][times <= 0.5] == pytest.approx(limit)


def test_converters_alone_feed_several_boards_and_have_no_two_phase_fault_of_their_own():
    """No negative sequence: the least fault is the three-phase one, the limit, for as long as it lasts."""
    supply = plants.converter_supply("BATT", "MSB", short_circuit_current=1.5, short_circuit_duration_s=0.5)
    plant = plants.plant(
        boards=[plants.board(n, 450.0) for n in ("MSB", "DB", "DB 2")],
        converter_supplies=[supply],
        cables=[plants.cable("C1", "MSB", "DB"), plants.cable("C2", "DB", "DB 2")],
    )
    result = study(plant)
    limit = 1.5 * 500e3 / (SQRT3 * 450.0)
    for name in ("MSB", "DB", "DB 2"):
        k, mode = at(result, name)
        assert mode.minimum.ik_initial_a[k] == pytest.approx(limit)
        assert np.isnan(mode.minimum.iac_2ph_a[k]).all()
        soon, late = (int(np.argmin(np.abs(mode.minimum.time_s - t))) for t in (0.1, 1.0))
        assert mode.minimum.least_a[k, [soon, late]] == pytest.approx([limit, 0.0])
        assert mode.one_set.least_100ms_a[k] == pytest.approx(limit)


def test_a_shore_supply_gives_its_fault_level():
    shore = plants.shore("Shore", "MSB", fault_level_max_mva=15.0, fault_level_min_mva=8.0)
    plant = plants.plant(boards=[plants.board("MSB")], shore_supplies=[shore])
    k, mode = at(study(plant), "MSB")
    for case, level in ((mode.maximum, 15e6), (mode.minimum, 8e6)):
        assert case.ik_initial_a[k] == pytest.approx(level / (SQRT3 * 440.0))
        assert case.iac_a[k] == pytest.approx(level / (SQRT3 * 440.0))
        assert case.r_over_x[k] == pytest.approx(0.1)


def test_an_unknown_fault_level_is_not_a_pass():
    shore = plants.shore("Shore", "MSB", fault_level_max_mva=None, fault_level_min_mva=None)
    plant = plants.plant(boards=[plants.board("MSB")], shore_supplies=[shore])
    k, mode = at(study(plant), "MSB")
    assert not mode.solved
    assert math.isnan(mode.maximum.ik_initial_a[k])
    assert any("Shore has no fault level" in f for f in mode.findings)


# ---- sustained current


def test_a_shunt_set_cannot_clear_at_its_board_but_holds_a_distant_fault():
    """Behind an impedance that keeps its voltage up a self-excited set keeps its field: V/Z, by hand."""
    motor = plants.load("Far", "MSB", kind="general", p_rated_kw=5.0, u_rated_v=450.0)
    far = plants.cable(
        "C-Far", "MSB", "Far", length_m=200.0, resistance_ohm_per_km=3.0, reactance_ohm_per_km=0.1
    )
    result = study(
        one_board(a_set("G1", field_supply="shunt", sustained_current=None), loads=[motor], cables=[far])
    )
    k, mode = at(result, "MSB")
    j, _ = at(result, "Far")
    assert mode.maximum.sustained_duty_a[k] == mode.minimum.sustained_reach_a[k] == 0.0
    assert mode.minimum.iac_a[k][-1] == pytest.approx(0.0, abs=1e-6)
    assert any("MSB: nothing keeps the fault current up (G1)" in f for f in mode.findings)
    cold = complex(0.6 * (1.0 + (8.0 * math.pi * HZ * 1e-4 / 3.0) ** 2 / 192.0), 0.02)
    assert mode.maximum.sustained_duty_a[j] == pytest.approx(450.0 / SQRT3 / abs(cold), rel=1e-4)


def test_sustained_current_is_known_or_said_to_be_unknown():
    known = study(one_board(a_set("G1"))).modes[0]
    assert known.maximum.sustained_duty_a[0] == pytest.approx(1.3 * RATED_A)
    # A round rotor without saturation: field at rated load |1 + (ra + jxd) I|, at no load 1, over Zd.
    machine = {"x_q_pu": 2.2, "saturation_10": 0.0, "saturation_12": 0.0, "ceiling": 2.0}
    unknown = study(one_board(a_set("G1", sustained_current=None, **machine))).modes[0]
    assert not unknown.maximum.sources.sustained_known[0]
    assert any("sustained current not given" in f for f in unknown.findings)
    zd = complex(0.01, 2.2)
    rated_load_field = abs(1.0 + zd * (0.8 - 0.6j))
    assert unknown.minimum.sustained_reach_a[0] == pytest.approx(RATED_A / abs(zd))
    assert unknown.maximum.sustained_duty_a[0] == pytest.approx(2.0 * rated_load_field / abs(zd) * RATED_A)


def test_reach_never_exceeds_duty():
    plant = replace(plants.small_plant(2))
    case = study(plant).modes[0].maximum
    live = case.live
    assert np.all(case.sustained_reach_a[live] <= case.sustained_duty_a[live] * (1 + 1e-12))


def test_two_phase_is_less_at_once_and_more_when_sustained():
    """With X2 = X''d the initial two-phase current is sqrt3/2 of the three-phase: symmetrical components."""
    k, mode = at(study(one_board(a_set("G1", x_2_pu=0.15))), "MSB")
    case = mode.minimum
    assert case.iac_2ph_a[k][0] == pytest.approx(case.iac_a[k][0] * SQRT3 / 2.0, rel=1e-9)
    assert case.iac_2ph_a[k][-1] > case.iac_a[k][-1]
    assert case.least_a[k] == pytest.approx(np.minimum(case.iac_2ph_a[k], case.iac_a[k]))


def test_line_earth_current_of_a_solidly_earthed_board():
    """3 E / (Z1 + Z2 + Z0), plain arithmetic; none where the neutral is insulated."""
    machine = a_set("G1", x_2_pu=0.16, x_0_pu=0.05)
    boards = [plants.board("MSB", 450.0, earthing="solid")]
    k, mode = at(study(plants.plant(boards=boards, gensets=[machine])), "MSB")
    z = complex(0.01, 0.15) + complex(0.01, 0.16) + complex(0.01, 0.05)
    assert mode.minimum.iac_earth_a[k][0] == pytest.approx(3.0 / abs(z) * RATED_A, rel=1e-9)
    _, insulated = at(study(one_board(machine)), "MSB")
    assert np.isnan(insulated.minimum.iac_earth_a[k]).all()


# ---- limits


def test_two_equal_sets_are_one_of_double_size():
    two = study(one_board(a_set("G1"), a_set("G2")))
    one = study(one_board(a_set("G1", s_rated_kva=2000.0)))
    for name in ("ik_initial_a", "iac_half_a", "ip_a", "peak_a", "sustained_duty_a", "iac_2ph_a", "iac_a"):
        for case in ("maximum", "minimum"):
            a, b = getattr(getattr(two.modes[0], case), name), getattr(getattr(one.modes[0], case), name)
            assert a == pytest.approx(b, rel=1e-9), name
    assert two.modes[0].iec60909_maximum.ip_3ph_a == pytest.approx(one.modes[0].iec60909_maximum.ip_3ph_a)


def distributed(order=1):
    """Two unlike sets with cables, a shore supply, a distribution board behind a cable, motors on both."""
    sets = [a_set("G1"), a_set("G2", s_rated_kva=600.0, x_d2_saturated_pu=0.13)][::order]
    loads = [
        plants.load("Thruster", "MSB", p_rated_kw=300.0),
        plants.load("Fan", "DB", p_rated_kw=150.0),
        plants.load("Pumps", "DB", p_rated_kw=22.0, installed=4),
    ][::order]
    cables = [
        plants.cable("C1", "G1", "MSB", runs=3, length_m=20.0),
        plants.cable("C2", "G2", "MSB", runs=2, length_m=30.0),
        plants.cable("C3", "MSB", "DB", runs=2, length_m=40.0),
        plants.cable("C4", "DB", "Fan"),
        plants.cable("C5", "MSB", "Thruster"),
    ][::order]
    return plants.plant(
        boards=[plants.board("MSB", 450.0), plants.board("DB", 450.0, role="distribution")],
        gensets=sets,
        loads=loads,
        cables=cables,
        devices=[plants.device("Q1", "C1", end="MSB"), plants.device("Q3", "C3", end="MSB")],
    )


def test_the_order_of_sources_changes_nothing():
    first, second = study(distributed()), study(distributed(-1))
    place = [second.places.names.index(n) for n in first.places.names]
    a, b = first.modes[0], second.modes[0]
    for name in ("ik_initial_a", "iac_half_a", "ip_a", "peak_a", "equivalent_ip_a", "dc_part", "least_a"):
        assert getattr(a.maximum, name) == pytest.approx(
            getattr(b.maximum, name)[place], rel=1e-9, nan_ok=True
        )
    for name in ("ik_3ph_a", "ip_3ph_a", "ib_a", "ith_a"):
        x, y = getattr(a.iec60909_maximum, name), getattr(b.iec60909_maximum, name)
        assert x == pytest.approx(y[place], rel=1e-9)


def test_contributions_add_up_and_arrive_through_the_branches():
    result = study(distributed())
    case = result.modes[0].maximum
    assert case.source_initial_a.sum(axis=1) == pytest.approx(case.ik_initial_a)
    assert case.source_ip_a.sum(axis=1) == pytest.approx(case.ip_a)
    msb = result.places.names.index("MSB")
    ends = case.ends
    here = ends.place == msb
    assert ends.share[here].sum(axis=0)[:-1] == pytest.approx(1.0)  # nothing stands on MSB without a cable
    assert ends.through_initial_a[here].sum() == pytest.approx(case.ik_initial_a[msb])
    total = ends.through_half_a + ends.rest_half_a
    assert total == pytest.approx(case.iac_half_a[ends.place])


def test_motors_on_the_faulted_side_come_back_through_the_feeder():
    result = study(distributed())
    mode = result.modes[0]
    ends, sources = mode.maximum.ends, mode.maximum.sources
    msb = result.places.names.index("MSB")
    row = next(n for n, b in enumerate(ends.branches) if b == "C3" and ends.place[n] == msb)
    share = dict(zip(sources.names, ends.share[row], strict=True))
    assert share["Fan"] == share["small motors of DB"] == pytest.approx(1.0)
    assert share["G1"] == share["G2"] == share["Thruster"] == pytest.approx(0.0)


def test_a_breaker_meets_the_larger_of_its_own_branch_and_the_rest():
    result = study(distributed())
    mode = result.modes[0]
    q1 = mode.devices.names.index("Q1")
    msb = result.places.names.index("MSB")
    own = mode.maximum.source_ip_a[msb, mode.maximum.sources.names.index("G1")]
    total = mode.maximum.ip_a[msb]
    assert mode.devices.duty_ip_a[q1] == pytest.approx(max(own, total - own))
    assert mode.devices.place[q1] == msb


def test_the_minimum_at_the_far_end_of_a_feeder_is_seen_through_its_device():
    result = study(distributed())
    mode = result.modes[0]
    q3 = mode.devices.names.index("Q3")
    db = result.places.names.index("DB")
    assert mode.devices.far_place[q3] == db
    last = mode.minimum.least_a[db][-1]
    assert mode.devices.least_a[q3] == pytest.approx(last)


def test_without_motors_and_load_only_the_tolerance_parts_the_cases():
    plant = one_board(a_set("G1", reactance_tolerance=0.0, cos_phi_rated=1.0))
    mode = study(plant).modes[0]
    loaded, idle = by_hand(cos_phi=1.0), by_hand(loaded=False)
    assert mode.maximum.ik_initial_a[0] / mode.minimum.ik_initial_a[0] == pytest.approx(loaded[0] / idle[0])


def test_vanishing_resistance_gives_the_classical_limit():
    """R -> 0: ip = sqrt2 (Iac(T/2) + I''), no decay of the direct component, as in any textbook."""
    plant = one_board(a_set("G1", r_stator_pu=1e-9, t_armature_s=1e6))
    case = study(plant).modes[0].minimum
    assert case.ik_initial_a[0] == pytest.approx(RATED_A / 0.15, rel=1e-6)
    assert case.ip_a[0] == pytest.approx(SQRT2 * (case.iac_half_a[0] + case.ik_initial_a[0]), rel=1e-6)
    assert case.cos_phi[0] == pytest.approx(0.0, abs=1e-6)


def test_the_total_never_rises_before_the_direct_component_has_gone():
    """What the sets take over from motors behind a common impedance is no more than the motors gave."""
    loads = [
        plants.load("Thruster", "MSB", p_rated_kw=600.0),
        plants.load("Far", "MSB", kind="heating", p_rated_kw=5.0),
    ]
    far = plants.cable("C1", "MSB", "Far", length_m=100.0)
    plant = one_board(a_set("G1", t_d2_s=0.006, x_d1_saturated_pu=0.18), loads=loads, cables=[far])
    for case in (study(plant).modes[0].maximum, study(distributed()).modes[0].maximum):
        early = case.time_s <= 0.03
        assert np.all(np.diff(case.iac_a[case.live][:, early], axis=1) <= 1e-9)


def test_the_peak_over_interpolated_sums_is_that_of_every_source():
    parts = study(distributed()).modes[0].maximum.parts
    names = list(FaultCurrent.__slots__)
    current = FaultCurrent(**{n: getattr(parts, n) for n in names})
    turned = FaultCurrent(**{n: getattr(parts, n).T for n in names})
    assert greatest_peaks(current, parts.ends_s, HZ) == pytest.approx(
        greatest_peak_a(turned, HZ, sum_sources=True), rel=1e-6
    )


# ---- modes


def test_change_over_sets_count_for_the_maximum_alone():
    sets = [a_set("G1"), a_set("G2")]
    mode = plants.mode(states={"G2": "standby"}, changeover_sets=("G1", "G2"))
    both = study(one_board(*sets, modes=[mode])).modes[0]
    assert both.maximum.sources.names == ("G1", "G2")
    assert both.minimum.sources.names == ("G1",)
    assert any("The maximum counts G2" in f for f in both.findings)
    apart = study(one_board(*sets, modes=[replace(mode, changeover_sets=())])).modes[0]
    assert apart.maximum.sources.names == ("G1",)
    assert any("G2: on standby and not counted" in f for f in apart.findings)


def test_one_set_left_is_the_mode_with_that_set_alone():
    """The smaller set holds less; everything is as in a mode in which it runs alone."""
    feeder = {
        "cables": [plants.cable("C1", "MSB", "DB")],
        "boards": [plants.board("MSB", 450.0), plants.board("DB", 450.0)],
        "devices": [plants.device("Q1", "C1", end="MSB", short_time_a=900.0, short_time_delay_s=0.4)],
    }
    both = plants.plant(gensets=[a_set("G1"), a_set("G2", s_rated_kva=500.0)], **feeder)
    alone = plants.plant(gensets=[a_set("G2", s_rated_kva=500.0)], **feeder)
    mode, other = study(both).modes[0], study(alone).modes[0]
    assert mode.maximum.sources.names == mode.minimum.sources.names == ("G1", "G2")
    assert (mode.one_set.supplies, mode.one_set.fewer) == (("G2",), True)
    assert mode.one_set.ik_initial_a == pytest.approx(other.minimum.ik_initial_a)
    at = np.argmin(np.abs(other.minimum.time_s - 0.1))
    assert mode.one_set.least_100ms_a == pytest.approx(other.minimum.least_a[:, at])
    assert mode.one_set.device_least_a == pytest.approx(other.devices.least_a)
    assert mode.one_set.device_least_a[0] < 0.6 * mode.devices.least_a[0]
    assert not other.one_set.fewer
    assert other.one_set.device_least_a == pytest.approx(other.devices.least_a)


def test_a_closed_tie_makes_one_busbar_and_carries_the_far_side():
    boards = [plants.board("A", 450.0), plants.board("B", 450.0)]
    plant = plants.plant(
        boards=boards, gensets=[a_set("G1", "A"), a_set("G2", "B")], ties=[plants.tie("BT", "A", "B")]
    )
    case = study(plant).modes[0].maximum
    assert case.ik_initial_a[0] == case.ik_initial_a[1] == pytest.approx(2.0 * by_hand()[0] * RATED_A)
    row = case.ends.branches.index("BT")
    assert case.ends.through_initial_a[row] == pytest.approx(by_hand()[0] * RATED_A)
    assert case.ends.determined[row]


def test_a_dead_mode_says_so_and_the_others_go_on():
    dark = plants.mode("Dark", states={"G1": "off"})
    result = study(one_board(a_set("G1"), modes=[dark, plants.mode("Sea")]))
    assert [m.solved for m in result.modes] == [False, True]
    assert result.modes[0].reason
    assert not result.modes[0].maximum.live.any()


def test_a_ring_is_outside_the_scope_of_the_ship_method():
    boards = [plants.board(n, 450.0) for n in "ABC"]
    cables = [plants.cable(f"C{a}{b}", a, b) for a, b in ("AB", "BC", "CA")]
    plant = plants.plant(boards=boards, gensets=[a_set("G1", "A")], cables=cables)
    mode = study(plant).modes[0]
    assert mode.maximum.parallel_paths.all()
    assert any("parallel paths" in f for f in mode.findings)
    radial = study(replace(plant, cables=plant.cables[:2])).modes[0]
    assert not radial.maximum.parallel_paths.any()


# ---- earth faults and rules of thumb


def test_capacitive_current_of_an_insulated_system():
    """Ic = sqrt3 w C U, with C of the cables that are energised: circuit theory."""
    cable = plants.cable("C3", "MSB", "DB", capacitance_uf_per_km=0.5, length_m=200.0, runs=2)
    plant = plants.plant(
        boards=[plants.board("MSB", 450.0), plants.board("DB", 450.0)],
        gensets=[a_set("G1")],
        cables=[cable],
    )
    system = study(plant).modes[0].earth[0]
    farad = 0.5e-6 * 0.2 * 2
    assert system.capacitance_f == pytest.approx(farad)
    assert system.capacitance_given
    assert system.fault_a == pytest.approx(SQRT3 * 2.0 * math.pi * HZ * farad * 450.0)


def test_high_resistance_earthing_adds_the_resistor_in_quadrature():
    board = plants.board("MV", 6600.0, earthing="high resistance", earthing_resistor_ohm=762.1)
    machine = a_set("G1", "MV", u_rated_v=6600.0)
    system = study(plants.plant(boards=[board], gensets=[machine])).modes[0].earth[0]
    assert system.resistor_a == pytest.approx(5.0, abs=5e-3)
    assert system.fault_a == pytest.approx(math.hypot(system.resistor_a, system.capacitive_a))


def test_quick_estimates_of_the_rules():
    """46 CFR 111.52-3: 10 times the sets' and 4 times the motors' rated current; ClassNK 10 and 3 times."""
    motor = plants.load("Pump", "MSB", p_rated_kw=75.0, u_rated_v=450.0)
    rows = {r.rule: r.value_a for r in study(one_board(a_set("G1"), loads=[motor])).modes[0].quick}
    rated = 75e3 / (SQRT3 * 450.0 * 0.93 * 0.86)
    assert rows["46 CFR maximum asymmetrical"] == pytest.approx(10.0 * RATED_A + 4.0 * rated)
    assert rows["ClassNK"] == pytest.approx(10.0 * RATED_A + 3.0 * rated)


# ---- what decays, and what is carried further


def test_when_the_motors_have_died_away_the_sets_give_what_they_give_without_them():
    """Behind a common impedance the sets take over; the transient network has no motors in it."""
    far = plants.cable("C6", "MSB", "Far", length_m=100.0)
    heater = plants.load("Far", "MSB", kind="heating", p_rated_kw=5.0)
    plant = replace(distributed(), cables=(*distributed().cables, far))
    with_motors = study(replace(plant, loads=(*plant.loads, heater)))
    bare = [c for c in plant.cables if c.name not in ("C4", "C5")]
    without = study(replace(plant, loads=(heater,), cables=tuple(bare)))
    late = np.flatnonzero(with_motors.modes[0].maximum.time_s > 0.8)[0]
    for name in ("Far", "DB"):
        k, mode = at(with_motors, name)
        j, other = at(without, name)
        assert mode.maximum.iac_a[k][late] == pytest.approx(other.maximum.iac_a[j][late], rel=3e-3)
        assert mode.maximum.iac_a[k][0] > 1.05 * other.maximum.iac_a[j][0] or name == "Far"


def test_a_motors_own_cable_lengthens_its_decay_by_reactance_alone():
    """T''M = (XM + Xc)/(w RR), TdcM = (XM + Xc)/(w (RS + Rc)): IEC 61363-1, from memory, typical data."""
    result = study(distributed())
    case = result.modes[0].maximum
    k, row = result.places.names.index("MSB"), case.sources.names.index("Thruster")
    base = 440.0 / (SQRT3 * 300e3 / (SQRT3 * 440.0 * 0.93 * 0.86))
    scale = 1.0 / (6.5 * math.hypot(0.055, 0.15))
    x = 0.15 * scale * base + 0.0045
    x4 = (8.0 * math.pi * HZ * 1e-4 / 0.193) ** 2
    r_cable = 0.193 * 0.05 * (1.0 + x4 / (192.0 + 0.8 * x4))
    omega = 2.0 * math.pi * HZ
    assert case.parts.t_sub_s[k, row] == pytest.approx(x / (omega * 0.021 * scale * base), rel=1e-6)
    assert case.parts.t_dc_s[k, row] == pytest.approx(
        x / (omega * (0.034 * scale * base + r_cable)), rel=1e-6
    )


def test_breaking_current_falls_with_mu_and_q():
    """Ib = |sum of I (1 - jX''/Z (1 - mu q))|, mu = 0.71 + 0.51 e^(-0.30 r), q = 0.79 + 0.12 ln m at 0.05 s.

    IEC 60909-0, from memory; the rule of meshed networks at one board, in plain arithmetic.
    """
    motor = plants.load("Pump", "MSB", p_rated_kw=75.0, u_rated_v=450.0, poles=4)
    case = study(one_board(a_set("G1"), loads=[motor])).modes[0].iec60909_maximum
    c, base_ohm = 1.05, 450.0**2 / 1000e3
    z_set = c / (1.0 + 0.15 * 0.6) * complex(0.01, 0.15) * base_ohm
    rated = 75e3 / (SQRT3 * 450.0 * 0.93 * 0.86)
    z_motor = 450.0 / (SQRT3 * rated * 6.5) * complex(0.42, 1.0) / math.hypot(0.42, 1.0)
    total = 0j
    for z, in_a, q in ((z_set, RATED_A, 1.0), (z_motor, rated, 0.79 + 0.12 * math.log(0.0375))):
        current = c * 450.0 / SQRT3 / z
        mu = 0.71 + 0.51 * math.exp(-0.30 * abs(current) / in_a)
        total += current * (1.0 - 1j * z.imag / z * (1.0 - mu * q))
    assert case.ib_a[0] == pytest.approx(abs(total), rel=1e-6)


def test_a_device_that_acts_at_once_sees_more_than_one_that_waits():
    plant = distributed()
    fast = plants.device("Q3", "C3", end="MSB", instantaneous_a=4000.0, breaking_time_max_s=0.05)
    result = study(replace(plant, devices=(plant.devices[0], fast)))
    mode, db = result.modes[0], result.places.names.index("DB")
    row = mode.devices.names.index("Q3")
    assert mode.devices.operating_s[row] == 0.05
    instant = np.flatnonzero(mode.minimum.time_s == 0.05)[0]
    assert mode.devices.least_a[row] == pytest.approx(mode.minimum.least_a[db][instant])
    own = mode.maximum.ends
    msb = result.places.names.index("MSB")
    end = next(n for n, b in enumerate(own.branches) if b == "C3" and own.place[n] == msb)
    assert mode.devices.duty_half_a[row] == pytest.approx(max(own.through_half_a[end], own.rest_half_a[end]))


def test_the_equivalent_generator_agrees_with_every_source_by_itself():
    """Both carry the sources through one impedance (IEC 61363-1, clause 7, from memory); within 3 %."""
    result = study(distributed())
    k, mode = at(result, "DB")
    assert mode.maximum.equivalent_half_a[k] == pytest.approx(mode.maximum.iac_half_a[k], rel=0.03)
    step_up = plants.plant(
        boards=[plants.board("MSB", 450.0), plants.board("LB", 230.0)],
        gensets=[a_set("G1")],
        transformers=[plants.transformer("T1", "MSB", "LB", u_primary_v=450.0, u_secondary_v=250.0)],
    )
    result = study(step_up)
    k, mode = at(result, "LB")
    assert mode.maximum.equivalent_half_a[k] == pytest.approx(mode.maximum.iac_half_a[k], rel=0.03)
    board, _ = at(result, "MSB")
    assert math.isnan(mode.maximum.equivalent_half_a[board])


def test_small_motors_stand_on_their_own_side_of_a_closed_tie():
    """Two sections are one busbar, yet the tie carries the motors of the far section alone, in any order."""
    loads = [
        plants.load("Pump P", "PS", p_rated_kw=30.0),
        plants.load("Pump S", "SB", p_rated_kw=60.0),
    ]
    shares = []
    for order in (loads, loads[::-1]):
        plant = plants.plant(
            boards=[plants.board("PS", 450.0), plants.board("SB", 450.0)],
            gensets=[a_set("G1", "PS")],
            ties=[plants.tie("BT", "PS", "SB")],
            loads=order,
            devices=[plants.device("Q", "BT", end="PS")],
        )
        result = study(plant)
        case = result.modes[0].maximum
        row = result.modes[0].devices.end[0]
        through = dict(zip(case.sources.names, case.ends.share[row], strict=True))
        assert through["G1"] == through["small motors of PS"] == 0.0
        assert through["small motors of SB"] == 1.0
        shares.append(case.ends.through_ip_a[row])
    assert shares[0] == pytest.approx(shares[1])


def test_cables_side_by_side_in_rows_of_their_own_share_the_current():
    """Two rows of one run are one row of two runs; each of their breakers meets the rest and half of it."""
    boards, sets = [plants.board("MSB", 450.0)], [a_set("G1"), a_set("G2")]
    rows = [plants.cable(n, "G1", "MSB", length_m=30.0) for n in ("C1a", "C1b")]
    far = plants.cable("C2", "G2", "MSB", length_m=30.0)
    apart = study(
        plants.plant(
            boards=boards,
            gensets=sets,
            cables=[*rows, far],
            devices=[plants.device(f"Q {c.name}", c.name, end="MSB") for c in rows],
        )
    )
    both = replace(rows[0], runs=2)
    devices = [plants.device("Q", "C1a", end="MSB")]
    joined = study(plants.plant(boards=boards, gensets=sets, cables=[both, far], devices=devices))
    one, other = apart.modes[0], joined.modes[0]
    assert one.maximum.ik_initial_a == pytest.approx(other.maximum.ik_initial_a)
    assert one.maximum.equivalent_ip_a == pytest.approx(other.maximum.equivalent_ip_a, nan_ok=True)
    ends = dict(zip(one.maximum.ends.branches, one.maximum.ends.through_initial_a, strict=False))
    assert ends["C1a"] == ends["C1b"]
    g1 = one.maximum.source_ip_a[0, 0]
    assert one.devices.duty_ip_a == pytest.approx([one.maximum.ip_a[0] - 0.5 * g1] * 2)
    assert other.devices.duty_ip_a == pytest.approx([max(g1, one.maximum.ip_a[0] - g1)])
