"""Starters, overload relays, tuned governors, performance classes, and the windings behind time constants."""

from __future__ import annotations

import numpy as np
import pytest

from study.formulas.exciters import reference_at_frequency
from study.formulas.governor import acceptance_limit, governor_open_loop, tuned_gains
from study.formulas.induction import circuit_from_name_plate, motor_torque, typical_starting_data
from study.formulas.performance_iso8528 import performance_class
from study.formulas.starting import (
    CLASS_CURRENT,
    TRIP_CLASSES,
    load_torque,
    overload_heating,
    overload_time_constant,
    run_up_integral,
    starting_torque_factor,
)
from study.formulas.winding_times import coupling, largest_leakage, winding_time_constants


@pytest.mark.parametrize(("name", "tau_s"), [("10", 387.0), ("20", 774.0), ("30", 1161.0)])
def test_time_constant_of_the_slowest_relay_of_a_class(name, tau_s):
    """Classes of IEC 60947-4-1, table 2 (from memory): 10, 20 and 30 s at 7.2 times the setting, cold."""
    assert overload_time_constant(TRIP_CLASSES[name][1]) == pytest.approx(tau_s, abs=0.5)


def test_heating_is_exact_for_a_constant_current_in_any_steps():
    tau = overload_time_constant(10.0)
    t = np.array([0.0, 0.5, 3.0, 10.0])
    h = overload_heating(t, np.full(4, CLASS_CURRENT), tau)
    assert h[-1] == pytest.approx(1.0, rel=1e-12)
    assert (np.diff(h) > 0.0).all()
    # At the ultimate current it comes to 1 and no further.
    assert overload_heating(np.array([0.0, 1e6]), np.full(2, 1.15), tau)[-1] == pytest.approx(1.0)


def test_load_torques_meet_at_full_speed():
    for law in ("constant", "fan", "hyperbolic"):
        assert float(load_torque(1.0, law)) == pytest.approx(1.0)
    assert float(load_torque(0.2, "hyperbolic")) == 1.5
    with pytest.raises(ValueError, match="unknown load torque law"):
        load_torque(1.0, "cubic")


def test_run_up_by_numbers():
    """A constant surplus of torque would be a straight line: the integral against many thin slices."""
    circuit = circuit_from_name_plate(0.93, 0.86, typical_starting_data(30.0))
    n = np.linspace(0.0, 0.95 * (1.0 - circuit.slip_rated), 20_001)
    middle = 0.5 * (n[1:] + n[:-1])
    torque = motor_torque(1.0 - middle, 0.9, circuit) * starting_torque_factor(1.0 - middle, 2.2, circuit)
    slices = np.diff(n) / (torque - 0.7 * load_torque(middle, "fan"))
    found = run_up_integral(circuit, locked_rotor_torque=2.2, law="fan", load_pu=0.7, v_pu=0.9)
    assert found == pytest.approx(float(slices.sum()), rel=1e-3)


def test_a_motor_too_weak_for_its_load_does_not_run_up():
    circuit = circuit_from_name_plate(0.93, 0.86, typical_starting_data(30.0))
    star = {"locked_rotor_torque": 2.2, "law": "constant", "load_pu": 1.0, "torque_share": 1.0 / 3.0}
    assert run_up_integral(circuit, **star) == np.inf


@pytest.mark.parametrize("inertia_s", [0.5, 1.0, 3.0])
@pytest.mark.parametrize("rack_s", [0.05, 0.2, 0.5])
@pytest.mark.parametrize("dead_s", [0.01, 0.03, 0.1])
def test_a_tuned_governor_has_margin(inertia_s, rack_s, dead_s):
    """Phase margin of the open loop at its crossover: 30 degrees and more in every combination."""
    numerator, denominator = governor_open_loop(
        inertia_s, rack_s, dead_s, tuned_gains(inertia_s, rack_s, dead_s)
    )
    w = np.geomspace(0.05, 500.0, 20_000)
    loop = np.polyval(numerator, 1j * w) / np.polyval(denominator, 1j * w)
    crossing = np.flatnonzero(np.abs(loop) < 1.0)[0]
    margin = 180.0 + np.degrees(np.unwrap(np.angle(loop))[crossing])
    assert 30.0 < margin < 90.0
    # The closed loop is stable: every root in the left half plane.
    assert np.roots(np.polyadd(numerator, denominator)).real.max() < 0.0


def test_load_acceptance():
    assert acceptance_limit([1.2, 1.2], [0.4, 0.4], 1.1, [0.2, 1.1]).tolist() == pytest.approx([0.68, 1.32])


def test_volts_per_hertz():
    v = reference_at_frequency(1.02, [60.0, 57.0, 51.3], 57.0)
    assert v.tolist() == pytest.approx([1.02, 1.02, 0.918])
    assert float(reference_at_frequency(1.02, 30.0, 0.0)) == 1.02


@pytest.mark.parametrize(
    ("quantity", "load_on", "deviation", "recovery_s", "wanted"),
    [
        ("voltage", True, 0.15, 4.0, "G3"),
        ("voltage", True, 0.151, 1.0, "G2"),
        ("voltage", False, 0.30, 1.0, "G1"),
        ("voltage", True, 0.26, 1.0, "none"),
        ("frequency", True, 0.10, 3.0, "G3"),
        ("frequency", True, 0.12, 5.0, "G2"),
        ("frequency", False, 0.10, 3.0, "G3"),
        ("frequency", False, 0.10, 6.0, "G1"),
    ],
)
def test_performance_classes(quantity, load_on, deviation, recovery_s, wanted):
    """ISO 8528-5:2018, table 4, from memory; a dip from the initial frequency may hold the droop besides."""
    found = performance_class(
        quantity, load_on=load_on, deviation_pu=deviation, recovery_s=recovery_s, speed_droop_pu=0.04
    )
    assert found == wanted


def test_windings_have_the_open_circuit_time_constants():
    c = coupling(2.4, 0.23, 0.158, 0.09)
    field_s, damper_s = winding_time_constants(c, 2.0, 0.022)
    poles = np.roots([field_s * damper_s, field_s + (1.0 + c) * damper_s, 1.0])
    assert sorted(-1.0 / poles.real) == pytest.approx([0.022, 2.0])


def test_too_large_a_leakage_is_refused_and_the_largest_is_not():
    largest = largest_leakage(2.0, 0.2, 0.12, 2.5, 0.03)
    winding_time_constants(coupling(2.0, 0.2, 0.12, 0.999 * largest), 2.5, 0.03)
    with pytest.raises(ValueError, match="Xl is too large"):
        winding_time_constants(coupling(2.0, 0.2, 0.12, 1.01 * largest), 2.5, 0.03)
