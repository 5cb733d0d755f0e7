"""The compiled time simulation against the same equations written again, integrated by `solve_ivp`."""

from __future__ import annotations

import numpy as np
import pytest

from study.network import dynamics_data as d
from study.network.dynamics_build import Drive, Happening, Plan, build_model
from tests import plants
from tests.agreement.dips_peer import STATES, Peer
from tests.agreement.dips_plants import course_of, genset, network_of, solved

STARTS = (0.048, 0.256)
UNTIL = 0.65


@pytest.fixture(scope="module", name="both")
def _both():
    """Two unlike sets, a constant-power load, a motor direct on line and one behind a soft starter."""
    sets = [
        genset("G1"),
        genset("G2", s_rated_kva=600.0, p_engine_kw=520.0, field_supply="compounded"),
    ]
    loads = [
        plants.load("L", "MSB", "converter", p_rated_kw=300.0, cos_phi=0.9, u_rated_v=440.0),
        plants.load("M1", "MSB", p_rated_kw=60.0, inertia_kgm2=1.5),
        plants.load(
            "M2", "MSB", p_rated_kw=90.0, inertia_kgm2=2.0, starting_method="soft starter", torque_law="fan"
        ),
    ]
    at = network_of(sets, loads, cables=[plants.cable("C1", "MSB", "M1"), plants.cable("C2", "MSB", "M2")])
    p, q = np.array([300.0, 0.0, 0.0]), np.array([120.0, 0.0, 0.0])
    drives = tuple(Drive(load=x, units=1.0, load_pu=0.7) for x in loads[1:])
    starts = tuple(Happening(at_s=t, kind=d.START_MOTOR, index=n) for n, t in enumerate(STARTS))
    plan = Plan(island=0, p_kw=p[None], q_kvar=q[None], drives=drives, happenings=starts)
    model = build_model(solved(at, p, q), plan)
    course = course_of(model, UNTIL)
    at_s = np.arange(0.0, UNTIL - 0.01, 0.016)  # instants at which both are known
    peer = Peer(model, np.array(STARTS)).follow(UNTIL, list(STARTS), at_s)
    rows = np.searchsorted(course.time_s, at_s + 1e-9) - 1
    assert course.time_s[rows] == pytest.approx(at_s, abs=1e-9)
    return course, peer, rows


@pytest.mark.parametrize(
    ("kept", "state", "tolerance"),
    [(d.KEPT_SPEED, d.SPEED, 1e-4), (d.KEPT_FIELD, d.FIELD, 3e-3), (d.KEPT_ENGINE, d.RACK, 1e-3)],
)
def test_states_of_the_sets_are_the_same(both, kept, state, tolerance):
    """A thousandth of what each goes through: rated-load fields are near 3 pu of the air-gap line."""
    course, peer, rows = both
    for n in range(2):
        wanted = peer[:, n * STATES + state - d.FIRST_STATE]
        assert course.source[rows, n, kept] == pytest.approx(wanted, abs=tolerance)
        assert np.ptp(wanted) > 10.0 * tolerance


def test_the_motors_run_up_alike(both):
    course, peer, rows = both
    for m in range(2):
        found = course.motor[rows, m, d.KEPT_TURNING]
        assert found == pytest.approx(peer[:, 2 * STATES + m], abs=1e-3)
    assert peer[-1, 2 * STATES] > 0.9
