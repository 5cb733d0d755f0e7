"""Limit cases of field supply and terminal voltage: what the physics must give, worked in each test."""

import numpy as np
import pytest

from study.formulas.excitation import (
    FieldSupply,
    available_field,
    compound_from_current_share,
    compound_from_two_loads,
    fixed_field,
    held_voltage,
    independent_ceiling,
    shunt_ceiling,
    unregulated_no_load_voltage,
)
from study.formulas.saturation import saturation_curve
from study.formulas.synchronous import (
    Machine,
    field_required,
    inherent_regulation,
    open_circuit_voltage,
    rated_load_field,
    terminal_voltage_at_field,
    terminal_voltage_on_load,
)

PHI = float(np.arccos(0.8))
ROUND = Machine(xd_pu=2.0, xq_pu=2.0, xd_transient_pu=0.25)
SHIP = Machine(xd_pu=2.6, xq_pu=1.4, xd_transient_pu=0.22, saturation=saturation_curve(0.12, 0.45))


@pytest.mark.parametrize("phi", [PHI, 0.0, np.pi / 2])
def test_round_rotor_curve_is_the_closed_form(phi):
    i = np.linspace(0.0, 1.0, 21)
    e = 2.5
    expected = np.sqrt(e**2 - (2.0 * i * np.cos(phi)) ** 2) - 2.0 * i * np.sin(phi)
    v = terminal_voltage_at_field(e, i, phi, ROUND)
    assert v.tolist() == pytest.approx(expected.tolist(), abs=1e-12)


def test_a_leading_current_raises_the_voltage():
    v = terminal_voltage_at_field(1.0, [0.0, 0.1, 0.2], -PHI, ROUND)
    assert v[0] == pytest.approx(1.0, abs=1e-12)
    assert v[0] < v[1] < v[2]


def test_a_current_beyond_the_short_circuit_current_is_not_a_number():
    v = terminal_voltage_at_field(1.0, [0.49, 0.51], np.pi / 2, ROUND)
    assert v[0] == pytest.approx(0.02, abs=1e-12)
    assert np.isnan(v[1])


def test_field_of_a_saturated_machine_at_no_load_is_the_open_circuit_curve():
    assert float(field_required(1.2, 0.0, 0.0, SHIP)) == pytest.approx(1.2 * 1.45, rel=1e-12)
    assert float(open_circuit_voltage(1.2 * 1.45, SHIP.saturation)) == pytest.approx(1.2, abs=1e-12)


def test_saturation_limits_the_voltage_rise():
    free = Machine(xd_pu=2.6, xq_pu=1.4, xd_transient_pu=0.22)
    assert float(inherent_regulation(1.0, PHI, SHIP)) < float(inherent_regulation(1.0, PHI, free))
    assert float(inherent_regulation(1.0, -PHI, free)) < float(inherent_regulation(1.0, 0.0, free))


def test_constant_impedance_voltage_is_in_proportion_to_the_field():
    field = rated_load_field(0.8, ROUND)
    v = terminal_voltage_on_load(0.8 * field, 0.8, 0.6, exponent=2.0, v_top_pu=1.0, machine=ROUND)
    assert float(v) == pytest.approx(0.8, abs=1e-12)


def test_constant_power_beyond_the_nose_collapses():
    """For V^2 < Xd S less field means a higher voltage: no stable point below the regulated voltage."""
    field = rated_load_field(0.8, ROUND)
    enough = terminal_voltage_on_load(field * 1.001, 0.8, 0.6, exponent=0.0, v_top_pu=1.0, machine=ROUND)
    short = terminal_voltage_on_load(field * 0.999, 0.8, 0.6, exponent=0.0, v_top_pu=1.0, machine=ROUND)
    assert float(enough) == 1.0
    assert np.isnan(float(short))


def test_compound_source_that_copies_the_machine_holds_any_load():
    """With Kv = 1 and Ki = Xd the source is the machine's own equation: it suits every load."""
    source = compound_from_two_loads(1.0, 1.0, 0.8, ROUND)
    for phi in (PHI, 0.0, -PHI, np.pi / 2):
        need = float(field_required(1.0, 0.7, phi, ROUND))
        assert float(available_field(1.0, 0.7, phi, source)) == pytest.approx(need, rel=1e-12)


def test_both_calibrations_of_a_compound_source_agree():
    by_loads = compound_from_two_loads(1.03, 1.0, 0.8, SHIP)
    share = by_loads.current_gain / rated_load_field(0.8, SHIP)
    by_share = compound_from_current_share(share, 1.0, 0.8, SHIP)
    assert by_share.voltage_gain == pytest.approx(by_loads.voltage_gain, rel=1e-12)
    assert by_share.current_gain == pytest.approx(by_loads.current_gain, rel=1e-12)


def test_compounded_set_without_regulator_meets_its_two_calibrated_loads_and_varies_between():
    source = compound_from_two_loads(1.02, 1.0, 0.8, SHIP)
    assert unregulated_no_load_voltage(source, 2.0, SHIP) == pytest.approx(1.02, abs=1e-12)
    rated = held_voltage(0.8, 0.6, exponent=2.0, v_top_pu=2.0, supply=source, machine=SHIP)
    assert float(rated) == pytest.approx(1.0, abs=1e-12)
    unity = held_voltage(1.0, 0.0, exponent=2.0, v_top_pu=2.0, supply=source, machine=SHIP)
    assert abs(float(unity) - 1.0) > 1e-3


def test_regulator_that_takes_away_holds_its_set_point_up_to_the_unregulated_level():
    source = compound_from_two_loads(1.2, 1.2, 0.8, SHIP)
    load = np.array([0.0, 0.5, 1.0, 2.0, 4.0])
    kwargs = {"exponent": 1.0, "supply": source, "machine": SHIP}
    free = held_voltage(0.8 * load, 0.6 * load, v_top_pu=2.0, **kwargs)
    held = held_voltage(0.8 * load, 0.6 * load, v_top_pu=1.0, **kwargs)
    assert free[[0, 2]].tolist() == pytest.approx([1.2, 1.2], abs=1e-9)
    assert held.tolist() == np.minimum(free, 1.0).tolist()
    high = held_voltage(0.8 * load, 0.6 * load, v_top_pu=1.3, **kwargs)
    assert high[:3].tolist() == pytest.approx(free[:3].tolist(), abs=1e-9)


def test_shunt_set_collapses_where_a_permanent_magnet_set_sags():
    ceiling, field = 1.5, rated_load_field(0.8, SHIP)
    heavy = {"exponent": 2.0, "v_top_pu": 1.0, "machine": SHIP}
    sags = held_voltage(2.4, 1.8, supply=independent_ceiling(ceiling, field), **heavy)
    collapses = held_voltage(2.4, 1.8, supply=shunt_ceiling(ceiling, field), **heavy)
    assert 0.3 < float(sags) < 0.9
    assert np.isnan(float(collapses))


def test_shunt_set_does_not_build_up_below_the_air_gap_line():
    weak = FieldSupply(constant_pu=0.0, voltage_gain=0.99, current_gain=0.0)
    assert np.isnan(unregulated_no_load_voltage(weak, 2.0, SHIP))
    strong = FieldSupply(constant_pu=0.0, voltage_gain=1.45, current_gain=0.0)
    assert unregulated_no_load_voltage(strong, 2.0, SHIP) == pytest.approx(1.2, abs=1e-9)


def test_nothing_fixes_the_voltage_of_an_unsaturated_self_excited_set():
    strong = FieldSupply(constant_pu=0.0, voltage_gain=1.45, current_gain=0.0)
    with pytest.raises(ValueError, match="no voltage is fixed"):
        unregulated_no_load_voltage(strong, 2.0, ROUND)


def test_set_on_its_own_leads_a_fixed_field_to_the_inherent_curve():
    field = rated_load_field(0.8, SHIP)
    held = held_voltage(0.8, 0.6, exponent=1.0, v_top_pu=2.0, supply=fixed_field(field), machine=SHIP)
    curve = terminal_voltage_at_field(field, 1.0, PHI, SHIP)
    assert float(held) == pytest.approx(float(curve), abs=1e-9)
    assert float(held) == pytest.approx(1.0, abs=1e-9)


@pytest.mark.parametrize("call", [lambda: fixed_field(-1.0), lambda: shunt_ceiling(-1.0, 2.0)])
def test_negative_fields_are_refused(call):
    with pytest.raises(ValueError, match="0 or more"):
        call()


def test_shares_outside_0_to_1_are_refused():
    with pytest.raises(ValueError, match="from 0 to 1"):
        compound_from_current_share(1.5, 1.0, 0.8, SHIP)
