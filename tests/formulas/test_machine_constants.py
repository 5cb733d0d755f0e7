"""Standard data of synchronous machines: limit cases and a solution of the field equation."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from study.formulas.machine_constants import (
    armature_time_constant,
    inertia_constant,
    loaded_time_constant,
    negative_sequence_reactance,
    open_circuit_time_constant,
    short_circuit_time_constant,
)


def test_loaded_time_constant_is_that_of_the_field_equation():
    """T'd0 dE'q/dt = Efd - E'q - (Xd - X'd) Id with Id = E'q/(X'd + Xe); Sauer and Pai, from memory.

    Integrated from no load for Xd 2.0, X'd 0.2, T'd0 2.5 s on Xe = 2.0: the voltage goes from 0.9091 to
    0.5000 with 1.375 s.
    """
    xd, xd1, t0, xe = 2.0, 0.2, 2.5, 2.0
    t = np.linspace(0.0, 12.0, 241)
    run = solve_ivp(
        lambda _, e: (1.0 - e - (xd - xd1) * e / (xd1 + xe)) / t0,
        (0.0, 12.0),
        [1.0],
        t_eval=t,
        rtol=1e-10,
        atol=1e-12,
    )
    v = run.y[0] * xe / (xd1 + xe)
    tau = float(loaded_time_constant(t0, xd1, xd, xe))
    assert tau == pytest.approx(1.375, abs=5e-4)
    assert v[0] == pytest.approx(0.9091, abs=5e-5)
    assert xe / (xd + xe) == pytest.approx(0.5, abs=1e-12)
    assert v.tolist() == pytest.approx((0.5 + (v[0] - 0.5) * np.exp(-t / tau)).tolist(), abs=1e-8)


def test_limits_of_the_external_reactance():
    short = float(short_circuit_time_constant(2.5, 0.2, 2.0))
    assert float(loaded_time_constant(2.5, 0.2, 2.0, 0.0)) == short
    assert float(loaded_time_constant(2.5, 0.2, 2.0, 1e9)) == pytest.approx(2.5, rel=1e-8)
    assert float(open_circuit_time_constant(short, 0.2, 2.0)) == pytest.approx(2.5, rel=1e-12)


def test_reactances_in_the_wrong_order():
    with pytest.raises(ValueError, match="Xd'' < Xd' < Xd"):
        short_circuit_time_constant(2.5, 2.0, 0.2)


def test_armature_and_negative_sequence():
    x2 = negative_sequence_reactance(0.12, 0.16)
    assert float(x2) == pytest.approx(0.14)
    assert float(armature_time_constant(x2, 0.14 / (2.0 * np.pi * 50.0 * 0.03), 50.0)) == pytest.approx(0.03)


def test_inertia_constant_is_the_time_that_rated_torque_needs_for_half_the_speed():
    """H = E/S: rated kVA drains the store of a flywheel in H seconds (definition)."""
    omega = 1800.0 * np.pi / 30.0
    assert float(inertia_constant(50.0, 1800.0, 800.0)) * 800e3 == pytest.approx(
        0.5 * 50.0 * omega**2, rel=1e-12
    )
