"""The reported load flow: ratings, loadings, drops along the path, busbars, modes without a solution."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from study.analyses.load_flow import load_flow
from study.analyses.load_flow_branches import cable_rating_a
from study.model.plant import Plant
from study.network.cable_data import cable_ohm_per_km
from study.network.network import build_network, mode_network
from study.results.load_flow import ModeLoadFlow
from tests.plants import (
    board,
    cable,
    genset,
    load,
    mode,
    plant,
    shore,
    synchronous_motor,
    three_winding,
    tie,
    transformer,
)


def flow(p: Plant, p_kw: Any, q_kvar: Any) -> tuple[ModeLoadFlow, ...]:
    network = build_network(p)
    networks = [mode_network(network, m) for m in p.modes]
    shape = (len(p.modes), len(p.loads))
    return load_flow(
        networks, np.broadcast_to(np.asarray(p_kw, float), shape), np.broadcast_to(q_kvar, shape)
    ).modes


def two_switchboards(**changes: Any) -> Plant:
    """Return a main board with a set, a distribution board on a cable, a 230 V board behind a transformer."""
    given: dict[str, Any] = {
        "boards": [
            board("MSB", 440.0, busbar_rated_a=1000.0),
            board("DB", 440.0, role="distribution"),
            board("LB", 230.0, role="distribution"),
        ],
        "gensets": [genset("G", "MSB", u_rated_v=440.0, voltage_droop_pu=0.0)],
        "transformers": [transformer("T", "MSB", "LB")],
        "cables": [
            cable("C-DB", "MSB", "DB", runs=2),
            cable("C-Pump", "DB", "Pump"),
            cable("C-Light", "LB", "Light", cores="2", section_mm2=16.0),
        ],
        "loads": [
            load("Pump", "DB"),
            load("Fan", "MSB"),
            load("Light", "LB", kind="lighting", phases=2, u_rated_v=230.0),
        ],
    }
    return plant(**{**given, **changes})


P, Q = [60.0, 40.0, 10.0], [30.0, 20.0, 0.0]


def value(state: Any, names: tuple[str, ...], name: str, field: str) -> float:
    return float(getattr(state, field)[names.index(name)])


def test_the_drop_is_counted_from_the_switchboard_along_every_cable() -> None:
    m = flow(two_switchboards(), P, Q)[0]
    t = m.terminals
    k = t.loads.index("Pump")
    assert t.path[k] == "MSB > C-DB > DB > C-Pump"
    assert t.fed_by[k] == "C-Pump"
    u_msb = m.boards.u_v[0]
    assert t.drop_pu[k] == pytest.approx((u_msb - t.u_v[k]) / 440.0, abs=1e-12)
    assert t.drop_pu[k] > 0.005


def test_the_drop_behind_a_transformer_is_counted_from_its_secondary() -> None:
    m = flow(two_switchboards(), P, Q)[0]
    k = m.terminals.loads.index("Light")
    assert m.terminals.path[k] == "LB > C-Light"
    drop = (m.boards.u_v[2] - m.terminals.u_v[k]) / 230.0
    assert m.terminals.drop_pu[k] == pytest.approx(drop, abs=1e-12)


def test_a_consumer_on_the_switchboard_has_no_drop() -> None:
    m = flow(two_switchboards(), P, Q)[0]
    k = m.terminals.loads.index("Fan")
    assert (m.terminals.path[k], m.terminals.drop_pu[k]) == ("MSB", 0.0)


def test_a_terminal_without_load_is_left_out() -> None:
    m = flow(two_switchboards(), [60.0, 0.0, 10.0], [30.0, 0.0, 0.0])[0]
    assert m.terminals.loads == ("Pump", "Light")


def test_the_single_phase_terminal_carries_its_own_current() -> None:
    m = flow(two_switchboards(), P, Q)[0]
    k = m.terminals.loads.index("Light")
    u, p_kw = m.terminals.u_v[k], m.terminals.p_kw[k]
    assert p_kw == pytest.approx(10.0 * (u / 230.0) ** 2, rel=1e-9)
    assert m.terminals.current_a[k] == pytest.approx(1000.0 * p_kw / u, rel=1e-9)
    assert value(m.branches, m.branches.names, "C-Light", "current_a") == pytest.approx(
        m.terminals.current_a[k], rel=1e-9
    )


def test_a_cables_rating_is_the_tables_value_times_its_factors() -> None:
    """ABS Rules 4-8-3 table 6: 95 mm2 at 85 degC 276 A. IEC 60092-352: three cores 0.70, bunch 0.85."""
    at_85 = {"conductor_temperature_degc": 85.0}
    assert cable_rating_a(cable("C", "A", "B", cores="3 single", **at_85)) == pytest.approx(276.0)
    assert cable_rating_a(cable("C", "A", "B", runs=2, **at_85)) == pytest.approx(2 * 0.70 * 276.0)
    assert cable_rating_a(cable("C", "A", "B", bunched=7, **at_85)) == pytest.approx(0.85 * 0.70 * 276.0)
    derated = cable("C", "A", "B", further_derating=0.8, ambient_temperature_degc=65.0, **at_85)
    # sqrt((85 - 65)/(85 - 45)) = 0.7071; the table of IEC 60092-352 prints 0.71.
    assert cable_rating_a(derated) == pytest.approx(0.8 * 0.5**0.5 * 0.70 * 276.0)


def test_the_makers_rating_is_taken_as_it_stands_for_each_run() -> None:
    c = cable("C", "A", "B", rating_a=200.0, runs=3, bunched=9, further_derating=0.5)
    assert cable_rating_a(c) == 600.0


def test_a_section_no_standard_rates_has_no_rating() -> None:
    assert np.isnan(cable_rating_a(cable("C", "A", "B", section_mm2=777.0)))


def test_a_transformer_is_loaded_by_its_primary_current() -> None:
    m = flow(two_switchboards(), P, Q)[0]
    b = m.branches
    rated = 200e3 / (3.0**0.5 * 440.0)
    assert value(b, b.names, "T", "rating_a") == pytest.approx(rated)
    s = np.hypot(value(b, b.names, "T", "p_from_kw"), value(b, b.names, "T", "q_from_kvar"))
    current = 1000.0 * s / (3.0**0.5 * m.boards.u_v[0])
    assert value(b, b.names, "T", "loading") == pytest.approx(current / rated, rel=1e-9)


def test_losses_of_every_branch_add_up_to_the_islands() -> None:
    m = flow(two_switchboards(), P, Q)[0]
    island = m.islands[0]
    assert island.p_loss_kw == pytest.approx(m.branches.loss_kw.sum(), rel=1e-9)
    assert island.p_load_kw + island.p_loss_kw == pytest.approx(m.sources.p_kw.sum(), abs=1e-6)
    assert island.q_load_kvar + island.q_loss_kvar == pytest.approx(m.sources.q_kvar.sum(), abs=1e-6)


def test_a_busbar_carries_all_that_comes_in() -> None:
    m = flow(two_switchboards(), P, Q)[0]
    s = np.hypot(m.sources.p_kw[0], m.sources.q_kvar[0])
    current = 1000.0 * s / (3.0**0.5 * m.boards.u_v[0])
    assert m.boards.busbar_current_a[0] == pytest.approx(current, rel=1e-7)
    assert m.boards.busbar_loading[0] == pytest.approx(current / 1000.0, rel=1e-7)
    assert np.isnan(m.boards.busbar_loading[1])


def test_what_hangs_on_a_board_counts_consumers_behind_their_cables() -> None:
    m = flow(two_switchboards(), P, Q)[0]
    assert m.boards.p_load_kw[:2] == pytest.approx([40.0, 60.0], abs=1e-6)


def test_one_mode_without_a_solution_does_not_stop_the_others() -> None:
    modes = [mode("A"), mode("B", states={"G": "off"}), mode("C")]
    p = two_switchboards(modes=modes)
    first, second, third = flow(p, [P, P, [1500.0, 40.0, 10.0]], [Q, Q, Q])
    assert first.solved
    assert not second.solved
    assert second.reason == "no source is on line."
    assert second.dead_boards == ("MSB", "DB", "LB")
    assert second.boards.names == ()
    assert second.terminals.loads == ()
    assert not third.solved
    assert "exceeds what the engines of G can give" in third.reason


def test_a_dead_board_has_no_numbers() -> None:
    p = two_switchboards(modes=[mode(states={"T": "off"})])
    m = flow(p, P, Q)[0]
    assert m.dead_boards == ("LB",)
    assert m.boards.energised.tolist() == [True, True, False]
    assert m.boards.island.tolist() == [0, 0, -1]
    assert np.isnan(m.boards.u_v[2])
    assert "Light" not in m.terminals.loads


def test_a_shore_connection_is_loaded_by_its_current() -> None:
    p = plant(boards=[board("M")], shore_supplies=[shore("S", "M")], loads=[load("L", "M")])
    m = flow(p, [500.0], [200.0])[0]
    assert m.sources.kinds == ("shore supply",)
    assert m.sources.kva_loading[0] == pytest.approx(m.sources.current_a[0] / 800.0, rel=1e-9)
    assert np.isnan(m.sources.field_pu[0])


def test_a_three_winding_transformer_is_one_row() -> None:
    boards = [board("H", 6600.0), board("A", 690.0), board("B", 690.0)]
    p = plant(
        boards=boards,
        gensets=[genset("G", "H", u_rated_v=6600.0, s_rated_kva=3000.0, p_engine_kw=2700.0)],
        three_winding=[three_winding("T", "H", "A", "B")],
        loads=[load("LA", "A", kind="converter"), load("LB", "B", kind="converter")],
    )
    m = flow(p, [900.0, 500.0], [300.0, 100.0])[0]
    b = m.branches
    assert b.names == ("T",)
    assert -b.p_to_kw[0] == pytest.approx(1400.0, abs=1e-6)
    assert b.loss_kw[0] == pytest.approx(m.sources.p_kw[0] - 1400.0, abs=1e-6)
    # The secondary carries most of its rating: 949 of 1000 kVA.
    assert b.rating_a[0] == pytest.approx(1e6 / (3.0**0.5 * 690.0))
    u = m.boards.u_v[1]
    assert b.current_a[0] == pytest.approx(1000.0 * np.hypot(900.0, 300.0) / (3.0**0.5 * u), rel=1e-7)


def test_a_synchronous_motor_takes_its_input_and_is_named() -> None:
    motors = [synchronous_motor("SM", "MSB", p_output_kw=95.0)]
    m = flow(two_switchboards(synchronous_motors=motors), P, Q)[0]
    assert m.boards.p_load_kw[0] == pytest.approx(140.0, abs=1e-6)
    assert any(text.startswith("SM:") for text in m.findings)


def test_a_set_at_its_limit_is_named_in_its_island() -> None:
    sets = [
        genset("G1", "M", p_engine_kw=480.0),
        genset("G2", "M", p_engine_kw=1200.0),
    ]
    p = plant(boards=[board("M")], gensets=sets, loads=[load("L", "M")])
    m = flow(p, [1500.0], [600.0])[0]
    assert m.sources.limited_by == ("engine", "")
    assert m.islands[0].findings == ("G1 is held at its largest power, 502 kW.",)


def test_a_tie_in_a_ring_has_no_current_and_says_so() -> None:
    ties = [tie(f"{a}{b}", a, b) for a, b in ("AB", "BC", "CA")]
    boards = [board(n) for n in "ABC"]
    p = plant(boards=boards, gensets=[genset("G", "A")], ties=ties, loads=[load("L", "B")])
    m = flow(p, [100.0], [50.0])[0]
    assert m.branches.determined.tolist() == [False] * 3
    assert np.isnan(m.branches.current_a).all()
    assert np.isnan(m.boards.busbar_current_a[1])


def test_agreement_is_reported_in_every_mode() -> None:
    m = flow(two_switchboards(), P, Q)[0]
    assert 0.0 < m.agreement.residual_pu < 1e-9
    assert m.agreement.largest_du_pu < 1e-8
    assert m.agreement.iterations > 0


# ---- consumers that count in part, while they run


def running(p: Plant, counted: Any, asked: Any, q_per_p: float = 0.5) -> ModeLoadFlow:
    """Return the first mode with some kW counted of what consumers take while they run."""
    kw, run = np.array([counted], float), np.array([asked], float)
    (one,) = load_flow(
        [mode_network(build_network(p), p.modes[0])],
        kw,
        q_per_p * kw,
        running_kw=run,
        running_kvar=q_per_p * run,
    ).modes
    return one


def drawn_by_hand(v_board: float, z_pu: complex, s_pu: complex) -> complex:
    """Return the voltage behind a run to a constant power, by Newton's method on V - V' = Z conj(S/V')."""
    v = complex(v_board)
    for _ in range(50):
        v = v_board - z_pu * np.conj(s_pu / v)
    return v


def test_a_run_carries_its_consumer_in_full_whatever_counts_of_it() -> None:
    """The pump counts with 20 of 50 kW: its board sees 20, its own cable and its terminals 50."""
    p = two_switchboards()
    part, alone = (
        running(p, [20.0, 30.0, 2.0], [50.0, 30.0, 2.0]),
        flow(p, [20.0, 30.0, 2.0], [10.0, 15.0, 1.0])[0],
    )
    np.testing.assert_array_equal(part.boards.u_v, alone.boards.u_v)
    np.testing.assert_array_equal(part.sources.p_kw, alone.sources.p_kw)
    assert part.islands == alone.islands
    c, t = part.branches.names.index("C-Pump"), part.terminals.loads.index("Pump")
    cable_pump = p.cables[1]
    r, x = cable_ohm_per_km(cable_pump, 60.0)
    z = complex(r, x) * cable_pump.length_m / 1000.0 / 440.0**2 * 1e5  # per unit of 440 V and 100 kVA
    v_board = part.boards.u_v[part.boards.names.index("DB")] / 440.0
    v = drawn_by_hand(v_board, z, complex(0.5, 0.25))
    assert part.terminals.u_v[t] == pytest.approx(440.0 * abs(v), abs=1e-6)
    assert part.branches.current_a[c] == pytest.approx(
        1e5 * abs(complex(0.5, 0.25) / v) / 440.0 / 3**0.5, rel=1e-5
    )
    assert part.terminals.p_kw[t] == 50.0
    behind_board = part.terminals.angle_deg[t] - part.boards.angle_deg[part.boards.names.index("DB")]
    assert behind_board == pytest.approx(np.degrees(np.angle(v)), abs=1e-6)
    assert part.branches.drop_pu[c] == pytest.approx(v_board - abs(v), abs=1e-8)


def test_a_consumer_that_counts_with_nothing_has_its_terminal_voltage() -> None:
    part = running(two_switchboards(), [0.0, 0.0, 0.0], [50.0, 30.0, 2.0])
    assert part.terminals.loads == ("Pump", "Fan", "Light")
    assert (
        part.branches.current_a[[part.branches.names.index(n) for n in ("C-Pump", "C-Light")]] > 5.0
    ).all()
    assert part.branches.current_a[part.branches.names.index("C-DB")] == pytest.approx(0.0, abs=1e-6)


def test_what_counts_in_full_is_the_load_flow_itself() -> None:
    """Heating follows the square of the voltage; its run has two cables side by side."""
    heater = load("Heater", "DB", kind="heating")
    p = two_switchboards(
        loads=[load("Pump", "DB"), load("Fan", "MSB"), heater],
        cables=[
            cable("C-DB", "MSB", "DB", runs=2),
            cable("C-Pump", "DB", "Pump"),
            cable("C-Heater 1", "DB", "Heater", section_mm2=16.0),
            cable("C-Heater 2", "Heater", "DB", section_mm2=10.0),
        ],
    )
    kw = [40.0, 30.0, 25.0]
    found, (alone, *_) = running(p, kw, kw), flow(p, kw, [20.0, 15.0, 12.5])
    for name in ("u_v", "drop_pu", "p_kw", "q_kvar", "current_a"):
        np.testing.assert_allclose(getattr(found.terminals, name), getattr(alone.terminals, name), rtol=1e-7)
    for name in ("current_a", "p_from_kw", "p_to_kw", "loss_kw", "drop_pu"):
        np.testing.assert_allclose(
            getattr(found.branches, name), getattr(alone.branches, name), rtol=1e-6, atol=1e-8
        )
