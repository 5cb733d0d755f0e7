"""Ib <= In <= Iz and I2 <= 1.45 Iz, IEC 60364-4-43 clause 433.1; damage lines of IEC 60949 and IEEE C57.109.

From memory. The consequences below are those that handbooks draw from the two conditions.
"""

from __future__ import annotations

import numpy as np
import pytest

from study.formulas.cable_overload import least_rating_a, voltage_drop_pu
from study.formulas.cable_ratings import adiabatic_k, withstand_a2s
from study.formulas.damage_curves import cable_withstand_s, first_half_cycle_a, through_fault_s


def test_a_gg_fuse_may_be_nine_tenths_of_the_rating() -> None:
    # I2 = 1.6 In <= 1.45 Iz gives In <= 0.906 Iz, in handbooks 0.9 Iz.
    assert 100.0 / least_rating_a(0.0, 100.0, 160.0) == pytest.approx(0.906, abs=5e-4)


def test_a_breaker_may_be_the_whole_rating() -> None:
    # I2 = 1.30 Ir (IEC 60947-2) or 1.45 In (IEC 60898-1): In <= Iz governs.
    for trips_at in (1.30, 1.45):
        assert least_rating_a(80.0, 100.0, trips_at * 100.0) == pytest.approx(100.0)


def test_without_overload_protection_the_load_alone_counts() -> None:
    assert least_rating_a(80.0, np.nan, np.nan) == 80.0


def test_withstand_time_is_the_adiabatic_heat() -> None:
    k = adiabatic_k(90.0, 250.0, "copper")
    amps = np.array([2000.0, 5000.0, 20000.0])
    assert amps**2 * cable_withstand_s(amps, k, 35.0) == pytest.approx(np.full(3, withstand_a2s(35.0, k)))


def test_through_fault_points_of_a_transformer() -> None:
    # IEEE C57.109, from memory: 25 x 2 s, 11.3 x 10 s, 6.3 x 30 s, 4.75 x 60 s, 3 x 300 s, 2 x 1800 s; about
    # 1250 for I²t from 6.3 times up.
    at = np.array([25.0, 11.3, 6.3, 4.75, 3.0, 2.0])
    seconds = through_fault_s(at, 0.04)
    assert seconds == pytest.approx([2.0, 10.0, 30.0, 60.0, 300.0, 1800.0])
    assert (at**2 * seconds)[:3] == pytest.approx(1250.0, rel=0.05)
    # Its own impedance of 5 % lets through no more than 20 times.
    assert np.isinf(through_fault_s(20.5, 0.05))


def test_first_half_cycle_of_a_start() -> None:
    # kappa = 1.02 + 0.98 e^(-3 R/X), IEC 60909-0; by hand at cos phi 0.3: R/X 0.3145, kappa 1.401.
    assert first_half_cycle_a(600.0, 0.3) == pytest.approx(600.0 * 1.401, abs=0.3)


def test_voltage_drop_by_hand() -> None:
    # 100 A, 50 m of 25 mm2 at 90 degC (0.927 ohm/km, 0.097), cos phi 0.85, 440 V: by hand
    # 1.732 x 100 x 0.05 x (0.788 + 0.0511)/440 = 0.01651; one phase, 230 V: 2 x 5 x 0.8391/230 = 0.03648.
    assert voltage_drop_pu(100.0, (0.927, 0.097), 50.0, 0.85, 440.0) == pytest.approx(0.01651, abs=5e-6)
    one = voltage_drop_pu(100.0, (0.927, 0.097), 50.0, 0.85, 230.0, three_phase=False)
    assert one == pytest.approx(0.03648, abs=5e-6)
