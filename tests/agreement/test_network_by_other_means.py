"""One small plant solved by three routes that share nothing but its numbers.

The network room; SciPy's root finder on the equations in volts, ohms and amperes; and a pandapower network
built from the same numbers by pandapower's own functions for lines, transformers and generators.
"""

from __future__ import annotations

import numpy as np
import pandapower as pp
import pytest
from scipy.optimize import root

from study.network.cases import SolvedCase, case
from study.network.network import build_network, mode_network
from study.network.solver import export_json, solve_reported
from tests.plants import board, cable, genset, load, plant, reactor, transformer

# kVA, voltage droop at 1 pu reactive current, no-load voltage, no-load frequency, speed droop; 450 V, 0.8
SETS = ((1000.0, 0.04, 1.00, 1.03, 0.04), (600.0, 0.05, 1.01, 1.04, 0.05))
P_KW, Q_KVAR = np.array([300.0, 250.0, 90.0]), np.array([180.0, 0.0, 30.0])
R20, X = 0.193, 0.090  # ohm/km, maker's
R90 = R20 * 324.5 / 254.5  # IEC 60228
R_OHM_KM = R90 * (1.0 + (8e-4 * np.pi * 60.0 / R90) ** 2 / (192.0 + 0.8 * (8e-4 * np.pi * 60.0 / R90) ** 2))


def our_solution() -> SolvedCase:
    p = plant(
        boards=[board("A"), board("B"), board("C", 230.0)],
        gensets=[
            genset(
                f"G{n}",
                at,
                s_rated_kva=s,
                p_engine_kw=2.0 * s,
                droop_base="rated kVA",
                voltage_droop_pu=d,
                no_load_voltage_pu=e,
                no_load_frequency_pu=f,
                speed_droop_pu=r,
            )
            for n, (at, (s, d, e, f, r)) in enumerate(zip("AB", SETS, strict=True))
        ],
        cables=[cable("C-G0", "G0", "A", runs=6, length_m=20.0), cable("C-M", "A", "Motor", runs=3)],
        reactors=[reactor("X", "A", "B", x_ohm=0.01, r_ohm=0.001)],
        transformers=[transformer("T", "B", "C", tap_pu=-0.025)],
        loads=[
            load("Motor", "A"),
            load("Heater", "B", kind="heating"),
            load("Supply", "C", kind="converter", u_rated_v=230.0),
        ],
    )
    network = build_network(p)
    return solve_reported(network, [case(mode_network(network, p.modes[0]), P_KW, Q_KVAR)])[0]


def by_scipy() -> tuple[np.ndarray, np.ndarray, float]:
    """Return line voltages at G0's terminal, A, B, C and the motor [V], sources' kVA, and frequency [pu]."""
    z_set = complex(R_OHM_KM, X) * 0.020 / 6.0
    z_motor = complex(R_OHM_KM, X) * 0.050 / 3.0
    z_x = complex(0.001, 0.01)
    r = 2.6 / 200.0
    z_t = complex(r, np.sqrt(0.04**2 - r**2)) * 230.0**2 / 200e3
    iron = 600.0 / 230.0**2
    turns = 440.0 * (1.0 - 0.025) / 230.0

    def unpack(x: np.ndarray) -> tuple[np.ndarray, np.ndarray, float]:
        volts = (x[:5] + 1j * x[5:10]) * 440.0  # line voltages as phasors; currents below are sqrt(3) I
        return volts, (x[10:12] + 1j * x[12:14]) * 1000.0, x[14]

    def equations(x: np.ndarray) -> np.ndarray:
        v, i, f = unpack(x)
        g, a, b, c, m = v
        from_set, to_motor, across = (g - a) / z_set, (a - m) / z_motor, (a - b) / z_x
        inside = b / turns
        through = (inside - c) / z_t
        motor = np.conj(complex(P_KW[0], Q_KVAR[0]) * 1e3 / m)
        heater = np.conj(complex(P_KW[1], Q_KVAR[1]) * 1e3) / 440.0**2 * b
        supply = np.conj(complex(P_KW[2], Q_KVAR[2]) * 1e3 / c)
        nodes = [
            i[0] - from_set,
            from_set - to_motor - across,
            across + i[1] - heater - (through + 0.5 * iron * inside) / turns,
            through - 0.5 * iron * c - supply,
            to_motor - motor,
        ]
        laws = []
        for n, u in enumerate((g, b)):
            s, d, e, f0, droop = SETS[n]
            x_set = d * 450.0**2 / (s * 1e3)
            laws += [abs(u + 1j * x_set * i[n]) / 450.0 - e]
            laws += [(u * np.conj(i[n])).real / (0.8 * s * 1e3) - (f0 - f) / droop]
        nodes = np.array(nodes) / 1000.0
        return np.concatenate([nodes.real, nodes.imag, laws, [g.imag / 440.0]])

    start = np.concatenate([np.ones(5), np.zeros(5), [0.5, 0.3], [-0.3, -0.2], [1.0]])
    found = root(equations, start, method="hybr", tol=1e-14)
    assert np.abs(equations(found.x)).max() < 1e-11
    v, i, f = unpack(found.x)
    return v, np.array([v[0], v[2]]) * np.conj(i) / 1e3, f


def by_pandapower() -> pp.pandapowerNet:
    net = pp.create_empty_network(f_hz=60.0, sn_mva=1.0)
    g, a, b, m = (pp.create_bus(net, vn_kv=0.44) for _ in range(4))
    c = pp.create_bus(net, vn_kv=0.23)
    for at, to, km, runs in ((g, a, 0.020, 6), (a, m, 0.050, 3)):
        pp.create_line_from_parameters(
            net,
            at,
            to,
            length_km=km,
            r_ohm_per_km=R_OHM_KM,
            x_ohm_per_km=X,
            c_nf_per_km=0.0,
            max_i_ka=1.0,
            parallel=runs,
        )
    pp.create_line_from_parameters(
        net, a, b, length_km=1.0, r_ohm_per_km=0.001, x_ohm_per_km=0.01, c_nf_per_km=0.0, max_i_ka=1.0
    )
    pp.create_transformer_from_parameters(
        net,
        b,
        c,
        sn_mva=0.2,
        vn_hv_kv=0.44,
        vn_lv_kv=0.23,
        vkr_percent=1.3,
        vk_percent=4.0,
        pfe_kw=0.6,
        i0_percent=0.0,
        tap_side="hv",
        tap_neutral=0,
        tap_min=-1,
        tap_max=1,
        tap_pos=-1,
        tap_step_percent=2.5,
        tap_changer_type="Ratio",
    )
    pp.create_load(net, m, p_mw=0.3, q_mvar=0.18)
    pp.create_load(net, b, p_mw=0.25, const_z_p_percent=100.0, const_z_q_percent=100.0)
    pp.create_load(net, c, p_mw=0.09, q_mvar=0.03)
    for at, (s, d, e, f0, droop) in zip((g, b), SETS, strict=True):
        emf = pp.create_bus(net, vn_kv=0.44)
        pp.create_impedance(net, emf, at, rft_pu=0.0, xft_pu=d * (450.0 / 440.0) ** 2, sn_mva=s / 1000.0)
        weight = 0.8 * s / 1000.0 / droop
        pp.create_gen(
            net,
            emf,
            p_mw=weight * (f0 - 1.0),
            vm_pu=e * 450.0 / 440.0,
            slack=True,
            slack_weight=weight,
        )
    pp.runpp(
        net, distributed_slack=True, trafo_model="pi", tolerance_mva=1e-11, numba=False, lightsim2grid=False
    )
    return net


def test_scipy_finds_the_same_voltages_and_powers() -> None:
    ours = our_solution()
    v, s, f = by_scipy()
    for solution in (ours.reported, ours.own):
        boards = np.abs(solution.board_v_pu) * np.array([440.0, 440.0, 230.0])
        assert boards == pytest.approx(np.abs(v[[1, 2, 3]]), rel=1e-8)
        assert abs(solution.terminal_v_pu[0]) * 440.0 == pytest.approx(abs(v[4]), rel=1e-8)
        assert solution.source_s_kva == pytest.approx(s, rel=1e-7)
        assert solution.f_pu == pytest.approx([f], abs=1e-9)


def test_a_pandapower_network_built_from_the_numbers_agrees() -> None:
    ours, net = our_solution(), by_pandapower()
    vm = net.res_bus.vm_pu.to_numpy()
    assert np.abs(ours.reported.board_v_pu) == pytest.approx(vm[[1, 2, 4]], abs=1e-8)
    assert abs(ours.reported.terminal_v_pu[0]) == pytest.approx(vm[3], abs=1e-8)
    into_net = -(net.res_impedance.p_to_mw + 1j * net.res_impedance.q_to_mvar).to_numpy() * 1000.0
    assert ours.reported.source_s_kva == pytest.approx(into_net, abs=1e-5)


def test_the_exported_network_gives_the_reported_solution() -> None:
    """An engineer who loads the file and runs it with the same options gets the report's figures."""
    ours = our_solution()
    at = ours.reported.at
    net = pp.from_json_string(export_json(at.network, case(at, P_KW, Q_KVAR)))
    pp.runpp(
        net,
        distributed_slack=True,
        trafo_model="pi",
        trafo3w_losses="hv",
        tolerance_mva=1e-10,
        numba=False,
        lightsim2grid=False,
    )
    names = net.bus["name"].tolist()
    vm = [net.res_bus.vm_pu.iloc[names.index(n)] for n in "ABC"]
    assert np.abs(ours.reported.board_v_pu) == pytest.approx(vm, abs=1e-9)
