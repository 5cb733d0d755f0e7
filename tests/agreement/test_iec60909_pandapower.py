"""Ship plants by IEC 60909: our own nodal currents against hand formulas and against pandapower.

pandapower is exact only where every set and motor stands on a bus of its own, so each has a short cable here.
"""

import math

import numpy as np
import pandapower as pp
import pandapower.shortcircuit as sc
import pytest

from study.formulas.fault_current import SQRT3
from study.formulas.fault_iec60909 import (
    equivalent_frequency_r_over_x,
    kappa_factor,
    peak_a,
)
from study.formulas.fault_iec60909_equipment import (
    generator_correction,
    generator_fictitious_resistance_ohm,
    motor_impedance_ohm,
    motor_r_over_x,
)
from study.formulas.fault_iec60909_nodal import (
    admittance_matrix,
    at_equivalent_frequency,
    impedance_matrix,
    initial_currents,
)

UN_V, HZ, C_MAX = 440.0, 60.0, 1.05
# From the hand calculation with the formulas of IEC 60909-0; pandapower gives the same.
SET_KA, SET_PEAK_KA, WITH_MOTOR_KA, BEHIND_CABLE_KA, BEHIND_CABLE_PEAK_KA = (
    9.2200,
    21.4476,
    11.2135,
    9.2067,
    17.740,
)


def set_impedance(rating_va, x_sub=0.15):
    x = x_sub * 450.0**2 / rating_va
    correction = generator_correction(nominal_v=UN_V, rated_v=450.0, c_max=C_MAX, x_sub_pu=x_sub, cos_phi=0.8)
    return correction * (generator_fictitious_resistance_ohm(x, 450.0, rating_va) + 1j * x)


def motor(power_w, cos_phi=0.86, efficiency=0.94, ratio=6.0):
    rated_a = power_w / (SQRT3 * UN_V * cos_phi * efficiency)
    return motor_impedance_ohm(
        rated_v=UN_V, rated_a=rated_a, starting_ratio=ratio, r_over_x=motor_r_over_x("low voltage")
    )


def own(sources, cables, buses):
    """I''k, ip by method C and ip from R/X at the fault; sources are (bus, z), cables (from, to, z)."""

    def solve(transform):
        return impedance_matrix(
            admittance_matrix(
                buses,
                branch_from=[i for i, _, _ in cables],
                branch_to=[j for _, j, _ in cables],
                branch_impedance=transform(np.array([z for _, _, z in cables], dtype=complex)),
                branch_ratio=1.0,
                source_bus=[bus for bus, _ in sources],
                source_impedance=transform(np.array([z for _, z in sources])),
            )
        )

    z = solve(np.asarray)
    initial = initial_currents(z, C_MAX * UN_V / SQRT3) / 1e3
    r_over_x = equivalent_frequency_r_over_x(solve(at_equivalent_frequency).diagonal())
    at_fault = z.diagonal().real / z.diagonal().imag
    return initial, peak_a(initial, kappa_factor(r_over_x)), peak_a(initial, kappa_factor(at_fault))


def test_one_set_with_a_motor_and_a_cable_by_hand():
    z_set, z_motor, z_cable = set_impedance(1e6), motor(200e3), (0.10 + 0.08j) * 0.050
    # One set without its fictitious resistance's effect on I''k: c cancels between cmax and KG.
    alone, alone_peak, _ = own([(0, z_set)], [], 1)
    assert alone[0] == pytest.approx(SET_KA, abs=0.5e-4)
    assert alone_peak[0] == pytest.approx(SET_PEAK_KA, abs=0.5e-4)
    assert own([(0, z_set), (0, z_motor)], [], 1)[0][0] == pytest.approx(WITH_MOTOR_KA, abs=0.5e-4)
    behind, by_method_c, behind_peak = own([(0, z_set), (0, z_motor)], [(0, 1, z_cable)], 2)
    assert behind[1] == pytest.approx(BEHIND_CABLE_KA, abs=0.5e-4)
    # The hand value takes R/X at the fault, as without meshes; method C is 1.3 % higher.
    assert behind_peak[1] == pytest.approx(BEHIND_CABLE_PEAK_KA, abs=0.5e-3)
    assert 1.0 < by_method_c[1] / behind_peak[1] < 1.02


@pytest.mark.parametrize("frequency_hz", [50.0, 60.0])
@pytest.mark.parametrize("seed", [1, 2, 3])
def test_drawn_boards_agree_with_pandapower(seed, frequency_hz):
    """Three sections in a ring of ties, three unlike sets and four motors, each on its own bus."""
    rng = np.random.default_rng(seed)
    net = pp.create_empty_network(f_hz=frequency_hz, sn_mva=1.0)
    boards = [pp.create_bus(net, vn_kv=0.44) for _ in range(3)]
    sources, cables = [], []

    def cable(i, j, r, x, length_km):
        pp.create_line_from_parameters(
            net, i, j, length_km=length_km, r_ohm_per_km=r, x_ohm_per_km=x, c_nf_per_km=0.0, max_i_ka=1.0
        )
        net.line.loc[net.line.index[-1], "endtemp_degree"] = 20.0
        cables.append((i, j, (r + 1j * x) * length_km))

    for i, j in ((0, 1), (1, 2), (2, 0)):
        cable(boards[i], boards[j], *rng.uniform(0.02, 0.1, 2), rng.uniform(0.01, 0.05))
    for board, rating in zip(boards, rng.uniform(0.4e6, 2e6, 3), strict=True):
        bus = pp.create_bus(net, vn_kv=0.44)
        cable(board, bus, *rng.uniform(0.02, 0.1, 2), rng.uniform(0.01, 0.03))
        z = set_impedance(rating)
        # rdss_ohm is what pandapower takes for both I''k and ip: the fictitious resistance here.
        pp.create_gen(
            net,
            bus,
            p_mw=0.0,
            vn_kv=0.45,
            sn_mva=rating / 1e6,
            xdss_pu=0.15,
            cos_phi=0.8,
            rdss_ohm=0.15 * 0.15 * 450.0**2 / rating,
            slack=bool(board == boards[0]),
        )
        sources.append((bus, z))
    for _ in range(4):
        bus, power = pp.create_bus(net, vn_kv=0.44), rng.uniform(30e3, 300e3)
        cable(boards[rng.integers(3)], bus, *rng.uniform(0.1, 0.5, 2), rng.uniform(0.02, 0.08))
        pp.create_motor(
            net,
            bus,
            pn_mech_mw=power / 1e6,
            cos_phi=0.86,
            cos_phi_n=0.86,
            efficiency_n_percent=94.0,
            lrc_pu=6.0,
            rx=0.42,
            vn_kv=0.44,
        )
        sources.append((bus, motor(power)))
    sc.calc_sc(net, fault="3ph", case="max", ip=True, kappa_method="C", lv_tol_percent=6)
    initial, peak, _ = own(sources, cables, len(net.bus))
    assert initial == pytest.approx(net.res_bus_sc.ikss_ka.to_numpy(), rel=1e-6)
    assert peak == pytest.approx(net.res_bus_sc.ip_ka.to_numpy(), rel=1e-6)


def test_hand_values_follow_from_the_formulas_without_the_modules():
    """The same case with plain arithmetic, so that the figures above are not our own output."""
    x = 0.15 * 0.45**2
    kg = 440.0 / 450.0 * 1.05 / (1.0 + 0.15 * 0.6)
    z = kg * complex(0.15 * x, x)
    initial = 1.05 * 0.44 / math.sqrt(3.0) / abs(z)
    assert initial == pytest.approx(SET_KA, abs=0.5e-4)
    peak = (1.02 + 0.98 * math.exp(-0.45)) * math.sqrt(2.0) * initial
    assert peak == pytest.approx(SET_PEAK_KA, abs=0.5e-4)
    size = 0.44 / (math.sqrt(3.0) * 6.0 * 0.2 / (math.sqrt(3.0) * 0.44 * 0.86 * 0.94))
    z_motor = complex(0.42, 1.0) / math.hypot(0.42, 1.0) * size
    both = z * z_motor / (z + z_motor)
    assert 1.05 * 0.44 / math.sqrt(3.0) / abs(both) == pytest.approx(WITH_MOTOR_KA, abs=0.5e-4)
