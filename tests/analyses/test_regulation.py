"""Regulation of a set by itself, against closed forms and limit cases of each excitation system."""

from __future__ import annotations

import numpy as np
import pytest

from study.analyses.regulation import inherent_curves, voltage_regulation
from study.formulas.excitation import compound_from_two_loads
from study.formulas.synchronous import rated_load_field
from study.model.sources import Genset
from study.network.machines import machine_of
from study.results.regulation import SetRegulation
from tests.plants import board, genset, plant

ROUND_ROTOR = {"x_d_pu": 1.0, "x_q_pu": 1.0, "r_stator_pu": 0.0, "saturation_10": 0.0, "saturation_12": 0.0}


def regulation_of(machine: Genset) -> SetRegulation:
    return voltage_regulation(plant(boards=[board("MSB")], gensets=[machine])).sets[0]


def test_inherent_regulation_of_a_round_rotor() -> None:
    """E = |1 + jXs I| by hand: Xs 1.0; 0 lag 2.0, 0.8 lag 1.7889, unity 1.4142, 0.8 lead 0.8944.

    Standard phasor construction, for example Chapman, *Electric Machinery Fundamentals*, ch. 4, from memory;
    the printed figures have four decimals.
    """
    curve = inherent_curves(genset("G", "MSB", **ROUND_ROTOR))
    np.testing.assert_allclose(curve.regulation_pu, [1.0, 0.7889, 0.4142, -0.1056], atol=5e-5)


def test_the_inductive_load_asks_for_the_most() -> None:
    """Common practice, no source: zero power factor lagging is the hardest load on the voltage."""
    curve = inherent_curves(genset("G", "MSB"))
    at_a_quarter = curve.u_pu[:, 10]
    assert list(np.argsort(at_a_quarter)) == [0, 1, 2, 3]
    assert at_a_quarter[3] > 1.0


def test_voltage_at_constant_field_satisfies_the_phasor_equation() -> None:
    curve = inherent_curves(genset("G", "MSB", **ROUND_ROTOR))
    v, i = curve.u_pu[1, 1:13], curve.current_pu[1, 1:13]
    np.testing.assert_allclose(np.hypot(v + 0.6 * i, 0.8 * i), 1.0, atol=1e-9)


def test_an_integrating_regulator_holds_its_voltage_to_the_ceiling() -> None:
    row = regulation_of(genset("G", "MSB", field_supply="permanent magnet", integral_per_s=10.0))
    assert row.band_centred_pu == pytest.approx(0.0, abs=1e-12)
    assert row.field_pu[-1] == pytest.approx(1.0, abs=1e-9)


@pytest.mark.parametrize("gain", [20.0, 50.0, 200.0])
def test_a_proportional_regulator_falls_by_the_extra_field_over_the_gain(gain: float) -> None:
    """V0 - V = (E_rated - E_no_load) / K, in pu of rated-load field; checked to first order in 1/K."""
    row = regulation_of(genset("G", "MSB", integral_per_s=0.0, gain=gain))
    extra = row.field_pu[-1] - row.field_pu[0]
    fall = row.u_without_droop_pu[0] - row.u_without_droop_pu[-1]
    assert fall == pytest.approx(extra / gain, rel=1e-9)


def test_the_drooped_line_falls_by_the_stated_droop_at_rated_load() -> None:
    for law in ("phasor", "reactive current"):
        row = regulation_of(genset("G", "MSB", voltage_droop_pu=0.04, droop_law=law))
        assert row.droop_no_load_to_rated_pu == pytest.approx(0.04, abs=1e-12)


def test_a_fixed_field_follows_the_inherent_curve() -> None:
    row = regulation_of(genset("G", "MSB", field_supply="fixed", no_load_voltage_pu=1.0))
    curve = row.inherent
    at_a_quarter = np.interp(0.25, row.load_pu, row.u_without_droop_pu)
    assert at_a_quarter == pytest.approx(np.interp(0.25, curve.current_pu[1], curve.u_pu[1]), abs=2e-4)
    assert row.band_as_set_pu == 1.0
    assert any("no voltage at rated load" in text for text in row.findings)


def test_a_flat_compounded_set_without_regulator_is_a_few_per_cent_off_between() -> None:
    """Share of the current transformers such that no load and rated load have rated voltage.

    Between them, and at other power factors, it is off by a few per cent (common practice, no source).
    """
    machine = machine_of(genset("G", "MSB"))
    flat = compound_from_two_loads(1.0, 1.0, 0.8, machine)
    row = regulation_of(
        genset(
            "G",
            "MSB",
            field_supply="compounded without regulator",
            unregulated_voltage_pu=1.0,
            compound_current_share=flat.current_gain / rated_load_field(0.8, machine),
        )
    )
    assert row.u_without_droop_pu[0] == pytest.approx(1.0, abs=1e-6)
    assert row.u_without_droop_pu[-1] == pytest.approx(1.0, abs=1e-6)
    assert 0.005 < np.ptp(row.u_without_droop_pu) < 0.10


def test_a_compounded_regulator_can_only_take_away() -> None:
    """An unregulated level below the set-point leaves the regulator nothing to hold the voltage with."""
    weak = {"field_supply": "compounded", "compound_current_share": 0.6, "no_load_voltage_pu": 1.0}
    strong = regulation_of(genset("G", "MSB", unregulated_voltage_pu=1.2, **weak))
    short = regulation_of(genset("G", "MSB", unregulated_voltage_pu=0.95, **weak))
    assert strong.band_as_set_pu < 1e-9
    assert short.u_without_droop_pu[-1] == pytest.approx(0.95, abs=1e-3)


def test_a_shunt_fed_set_reaches_its_ceiling_no_later_than_one_with_its_own_supply() -> None:
    shunt = regulation_of(genset("G", "MSB", field_supply="shunt", ceiling=1.5))
    magnet = regulation_of(genset("G", "MSB", field_supply="permanent magnet", ceiling=1.5))
    assert shunt.reaches_ceiling_at_pu <= magnet.reaches_ceiling_at_pu
    short = regulation_of(genset("G", "MSB", field_supply="shunt", ceiling=0.8))
    held = regulation_of(genset("G", "MSB", field_supply="permanent magnet", ceiling=0.8))
    # the shunt-fed field falls with the voltage, so it ends lower or collapses
    assert np.isnan(short.u_without_droop_pu[-1]) or (
        short.u_without_droop_pu[-1] < held.u_without_droop_pu[-1] - 0.01
    )


@pytest.mark.parametrize("mode", ["no droop", "cross-current", "kvar control"])
def test_a_droop_that_is_not_in_use_lets_nothing_fall(mode: str) -> None:
    """A set alone compares its current with nobody's: cross-current compensation gives it no droop either."""
    row = regulation_of(genset("G", "MSB", regulator_mode=mode, voltage_droop_pu=0.04))
    np.testing.assert_array_equal(row.u_with_droop_pu, row.u_without_droop_pu)
    assert row.droop_no_load_to_rated_pu == 0.0
    assert (row.compensation_x_pu > 0.0) == (mode == "cross-current")


def test_a_reversed_droop_circuit_lets_the_voltage_rise_and_says_so() -> None:
    row = regulation_of(genset("G", "MSB", reversed_polarity=True))
    assert row.droop_no_load_to_rated_pu < 0.0
    assert row.compensation_x_pu < 0.0
    assert any("reversed" in text for text in row.findings)


def test_a_droop_that_leaves_no_voltage_is_a_finding_and_no_crash() -> None:
    """(V + Xq/V)^2 + (Xp/V)^2 = 0.36 has no root at rated load with X = 0.2."""
    steep = {"no_load_voltage_pu": 0.6, "voltage_droop_pu": 0.2, "droop_base": "rated kVA"}
    row = regulation_of(genset("G", "MSB", **steep))
    assert np.isnan(row.u_with_droop_pu).all()
    assert row.band_as_set_with_droop_pu == 1.0
    assert any("holds no voltage at some load" in text for text in row.findings)
