"""The load flow of the demonstration vessels: two solvers against each other and against Kirchhoff.

The third route is `si_circuit`: every branch, consumer and source again from the sheets' numbers, in ohms and
amperes, with the voltages found. What is left over at a node is the error of the solution.
"""

from __future__ import annotations

from functools import cache
from pathlib import Path

import numpy as np
import pytest

from study.analyses.balance import load_balance
from study.network.cases import Case, SolvedCase, case
from study.network.network import build_network, mode_network
from study.network.solver import solve_reported
from study.network.sources import Law, Speed
from study.workbook import read_plant
from tests.agreement.si_circuit import current_mismatch

WORKBOOKS = Path(__file__).parents[2] / "workbooks"
DEMOS = ("workboat", "service-vessel", "large-vessel")


@cache
def solved(demo: str) -> tuple[tuple[Case, SolvedCase], ...]:
    plant = read_plant(WORKBOOKS / f"{demo}.xlsx")
    network = build_network(plant)
    networks = [mode_network(network, m) for m in plant.modes]
    balance = load_balance(plant, [at.view for at in networks])
    p, q = balance.demand.p_counted_kw, balance.demand.q_counted_kvar
    cases = [case(at, p[k], q[k]) for k, at in enumerate(networks)]
    return tuple(zip(cases, solve_reported(network, cases), strict=True))


def live(demo: str) -> list[tuple[Case, SolvedCase]]:
    return [(c, s) for c, s in solved(demo) if s.own.solved]


@pytest.mark.parametrize("demo", DEMOS)
def test_most_modes_have_a_solution(demo: str) -> None:
    assert len(live(demo)) >= len(solved(demo)) - 1


@pytest.mark.parametrize("demo", DEMOS)
def test_the_two_solvers_agree(demo: str) -> None:
    """1e-8 pu and the kW and kvar that go with it; each run reports anything above 1e-6 pu as a finding."""
    for c, s in live(demo):
        assert s.reported.solved, s.reported.reason
        assert s.agreement.du_pu < 1e-8
        assert s.agreement.dp_kw < 1e-8 * c.at.network.s_base_kva
        assert s.agreement.dq_kvar < 1e-8 * c.at.network.s_base_kva


@pytest.mark.parametrize("demo", DEMOS)
def test_kirchhoff_holds_in_amperes_at_every_node(demo: str) -> None:
    """Relative to the largest current of the mode; 1e-8 is what the two solvers are held to."""
    for c, s in live(demo):
        mismatch, largest = current_mismatch(s.own, c.p_kw, c.q_kvar)
        assert mismatch < 1e-8 * largest, c.at.mode.name


@pytest.mark.parametrize("demo", DEMOS)
def test_reported_power_balances(demo: str) -> None:
    """What the sources give is what consumers, motors and filters take and the branches lose."""
    for c, s in live(demo):
        r = s.reported
        given = r.source_s_kva.sum() + r.filter_s_kva.sum()
        taken = r.load_s_kva.sum() + r.motor_s_kva.sum()
        lost = np.where(r.determined, r.s_from_kva + r.s_to_kva, 0.0).sum()
        assert abs(given - taken - lost) < 1e-7 * c.at.network.s_base_kva


@pytest.mark.parametrize("demo", DEMOS)
def test_sets_with_droop_follow_their_lines(demo: str) -> None:
    """``|V + jX I| = Vref`` (IEEE 421.5) and ``P = Pr (f0 - f)/droop``, per unit of each set."""
    checked = 0
    for _, s in live(demo):
        r = s.reported
        for k, source in enumerate(r.at.sources):
            if r.limited_by[k] or source.kind != "genset":
                continue
            v = r.source_u_pu[k]
            i = np.conj(r.source_s_kva[k] / source.s_rated_kva) / v
            if source.law == Law.PHASOR:
                assert abs(v + 1j * source.xc_pu * i) == pytest.approx(source.v_ref_pu, abs=1e-8)
                checked += 1
            f = r.f_pu[source.island]
            if source.speed == Speed.DROOP:
                p_kw = source.p_rated_kw * (source.f_no_load_pu - f) / source.speed_droop_pu
                assert r.source_s_kva[k].real == pytest.approx(p_kw, abs=1e-6 * source.p_rated_kw)
    assert checked > 0
