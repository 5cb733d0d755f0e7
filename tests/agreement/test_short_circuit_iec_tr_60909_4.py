"""The network of IEC TR 60909-4, clause 6, as a plant of our own model, through to the result.

Expected values: IEC TR 60909-4:2000, clause 6, F1 to F8, as the tests of pandapower (BSD licence) print them.

All of I''k, the two-phase current, the peak by method C, Ib at 0.1 s and Ik go from the model through the
network to the result. What the model cannot say, and how it is met here:

- A generator with its unit transformer as one power station unit (KS, KSO) is land practice: sets and
  transformers are corrected each by itself in a ship (KG, KT). The rows of the two units therefore hold the
  reactances of a set and a transformer whose own corrections give the unit's corrected impedances: KG x' =
  KS x'' and KT uk' = KS uk, solved below. Nothing but the figures of these rows is fitted; the fictitious
  resistance for the peak and mu for Ib then follow from them as for every set.
- A sheet takes voltages up to 36 kV: the plant is made as the reader would make it, in the model's own
  records, not read from a file. Scaled to 36 kV its 10 kV boards would fall below 1 kV, where other rules
  hold.
- A third winding that is left open: it gets a board of its own.
- The earth fault cannot be had through the model: the earthed star points of this network (feeders, three
  windings, one over 22 ohm) have no place in a workbook for ships; the formulas' own test holds it. Nor can
  kappa at 50 Hz, method B, which the study does not offer.
"""

import math

import pytest

from study.analyses.short_circuit_general import general_case
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.network.fault_network import fault_network, fault_plant
from study.network.fault_supplies import MAXIMUM
from study.network.network import build_network
from tests import plants

SQRT3 = math.sqrt(3.0)
INITIAL_KA = [40.6447, 31.7831, 19.6730, 16.2277, 33.1894, 37.5629, 25.5895, 13.5778]
STEADY_KA = [40.635, 31.663, 19.623, 16.196, 32.997, 34.356, 22.276, 13.573]
PEAK_KA = [100.5677, 80.6079, 45.8111, 36.8427, 83.4033, 98.1434, 51.6899, 36.9227]
# F1 and F8 are printed equal to the initial current.
BREAKING_KA = [40.645, 31.570, 19.388, 16.017, 32.795, 34.028, 23.212, 13.578]
TWO_PHASE_KA = [35.1994, 27.5249, 17.0373, 14.0536, 28.7429, 32.5304, 22.1611, 11.7586]
HALF_DIGIT_4, HALF_DIGIT_3 = 0.5001e-4, 0.5001e-3
VOLTS = (380e3, 110e3, 110e3, 110e3, 110e3, 10e3, 10e3, 30e3)


def direct_resistance(r):
    """Return the d.c. resistance whose a.c. resistance at 50 Hz is r, as the report states it [ohm/km]."""
    dc = r
    for _ in range(60):
        x4 = (8.0 * math.pi * 50.0 * 1e-4 / dc) ** 2
        dc = r / (1.0 + x4 / (192.0 + 0.8 * x4))
    return dc


def line(name, ends, length_km, z_per_km, *, runs=1):
    return plants.cable(
        name,
        *ends,
        length_m=1000.0 * length_km,
        runs=runs,
        resistance_ohm_per_km=direct_resistance(z_per_km.real),
        reactance_ohm_per_km=z_per_km.imag,
    )


def feeder(name, board, u_v, z):
    """A supply of impedance z [ohm]: its fault level is 1.1 U²/|z|."""
    return plants.shore(
        name,
        board,
        u_rated_v=u_v,
        f_hz=50.0,
        fault_level_max_mva=1.1 * u_v**2 / abs(z) / 1e6,
        r_over_x=z.real / z.imag,
    )


def unit(number, rating_kva, generator, transformer, correction):
    """A set and a transformer whose KG and KT give the impedances of a unit of correction KS or KSO.

    KG = cmax/(1 + x sin phi) at rated voltage: x' = KS x/(cmax - KS x sin phi). KT = 0.95 cmax/(1 + 0.6 xT):
    xT' = KS xT/(0.95 cmax - 0.6 KS xT).
    """
    u_g, x, r_ohm, cos_phi = generator
    high, u_high, uk, ur = transformer
    x_new = correction * x / (1.1 - correction * x * math.sqrt(1.0 - cos_phi**2))
    x_t = math.sqrt(uk**2 - ur**2)
    x_t_new = correction * x_t / (0.95 * 1.1 - 0.6 * correction * x_t)
    ur_new = ur * x_t_new / x_t
    return plants.genset(
        f"G{number}",
        f"U{number}",
        s_rated_kva=rating_kva,
        u_rated_v=u_g,
        cos_phi_rated=cos_phi,
        x_d2_saturated_pu=x_new,
        x_d1_saturated_pu=2.0 * x_new,
        r_stator_pu=r_ohm / (u_g**2 / (1000.0 * rating_kva)) * x_new / x,
    ), plants.transformer(
        f"T{number}",
        high,
        f"U{number}",
        s_rated_kva=rating_kva,
        u_primary_v=u_high,
        u_secondary_v=u_g,
        u_k_pu=math.hypot(x_t_new, ur_new),
        copper_loss_kw=ur_new * rating_kva,
    )


def units():
    x_t = math.sqrt(0.16**2 - 0.005**2)
    ks = (110 / 21) ** 2 * (21 / 115) ** 2 * 1.1 / (1 + abs(0.14 - x_t) * math.sqrt(1 - 0.85**2))
    kso = 110 / (10.5 * 1.075) * (10.5 / 120) * 1.1 / (1 + 0.16 * math.sqrt(1 - 0.9**2))
    return (
        unit(1, 150e3, (21e3, 0.14, 0.002, 0.85), ("F4", 115e3, 0.16, 0.005), ks),
        unit(2, 100e3, (10.5e3, 0.16, 0.005, 0.9), ("F3", 120e3, 0.12, 0.005), kso),
    )


def network_feeder(name, board, u_v, initial_a):
    size = 1.1 * u_v / (SQRT3 * initial_a)
    return feeder(name, board, u_v, size * complex(0.1, 1.0) / math.hypot(0.1, 1.0))


def three_winding(name, tertiary):
    return plants.three_winding(
        name,
        "F1",
        "F2",
        tertiary,
        s_primary_kva=350e3,
        s_secondary_kva=350e3,
        s_tertiary_kva=50e3,
        u_primary_v=400e3,
        u_secondary_v=120e3,
        u_tertiary_v=30e3,
        u_k_primary_secondary_pu=0.21,
        u_k_primary_tertiary_pu=0.10,
        u_k_secondary_tertiary_pu=0.07,
        copper_loss_primary_secondary_kw=0.0026 * 350e3,
        copper_loss_primary_tertiary_kw=0.0016 * 50e3,
        copper_loss_secondary_tertiary_kw=0.0016 * 50e3,
        iron_loss_kw=0.0,
        vector_group="Yy0d5",
    )


def report_plant():
    a, b, c = 0.12 + 0.39j, 0.096 + 0.388j, 0.12 + 0.386j
    boards = [plants.board(f"F{k + 1}", u) for k, u in enumerate(VOLTS)]
    boards += [plants.board("T3-C", 30e3), plants.board("U1", 21e3), plants.board("U2", 10.5e3)]
    sets, unit_transformers = zip(*units(), strict=True)
    project = plants.PROJECT.__class__(
        **{**{f: getattr(plants.PROJECT, f) for f in plants.PROJECT.__slots__}, "f_rated_hz": 50.0}
    )
    return plants.plant(
        project=project,
        boards=boards,
        shore_supplies=[
            network_feeder("Q1", "F1", 380e3, 38e3),
            network_feeder("Q2", "F5", 110e3, 16e3),
        ],
        gensets=[
            *sets,
            plants.genset(
                "G3",
                "F6",
                s_rated_kva=10e3,
                u_rated_v=10.5e3,
                cos_phi_rated=0.8,
                x_d2_saturated_pu=0.1,
                x_d1_saturated_pu=0.2,
                r_stator_pu=0.018 / (10.5e3**2 / 10e6),
            ),
        ],
        three_winding=[three_winding("T3", "T3-C"), three_winding("T4", "F8")],
        transformers=[
            *unit_transformers,
            plants.transformer(
                "T5",
                "F5",
                "F6",
                s_rated_kva=31.5e3,
                u_primary_v=115e3,
                u_secondary_v=10.5e3,
                u_k_pu=0.12,
                copper_loss_kw=0.005 * 31.5e3,
                units=2,
            ),
        ],
        cables=[
            line("L1", ("F2", "F3"), 20, a),
            line("L2", ("F3", "F4"), 10, a),
            line("L3", ("F2", "F5"), 5, a, runs=2),
            line("L4", ("F5", "F3"), 10, b),
            line("L5", ("F5", "F4"), 15, c),
            line("L6", ("F6", "F7"), 1, 0.082 + 0.086j),
        ],
        loads=[
            plants.load(
                "M1",
                "F7",
                p_rated_kw=5000.0,
                u_rated_v=10e3,
                cos_phi=0.88,
                efficiency=0.975,
                poles=2,
                starting_current=5.0,
            ),
            plants.load(
                "M2",
                "F7",
                p_rated_kw=2000.0,
                u_rated_v=10e3,
                cos_phi=0.89,
                efficiency=0.968,
                poles=4,
                starting_current=5.2,
                installed=2,
            ),
        ],
    )


@pytest.fixture(scope="module", name="case")
def _case():
    plant = report_plant()
    net = fault_network(fault_plant(build_network(plant)), plant.modes[0], MAXIMUM)
    return general_case(net, ShortCircuitOptions(lv_tolerance_percent=10, delay_s=0.1)).case


def test_initial_currents(case):
    assert case.ik_3ph_a[:8] / 1e3 == pytest.approx(INITIAL_KA, abs=HALF_DIGIT_4)


def test_two_phase_currents(case):
    found = case.ik_2ph_a[:8] / 1e3
    assert found[:7] == pytest.approx(TWO_PHASE_KA[:7], abs=HALF_DIGIT_4)
    # F8 is printed 11.7586 where sqrt3/2 of the printed 13.5778 rounds to 11.7587.
    assert found[7] == pytest.approx(TWO_PHASE_KA[7], abs=2 * HALF_DIGIT_4)


def test_steady_state_currents_are_those_without_motors(case):
    assert case.ik_steady_a[:8] / 1e3 == pytest.approx(STEADY_KA, abs=HALF_DIGIT_3)


def test_peaks_by_the_equivalent_frequency(case):
    assert case.ip_3ph_a[:8] / 1e3 == pytest.approx(PEAK_KA, abs=HALF_DIGIT_4)


def test_breaking_currents(case):
    found = case.ib_a[:8] / 1e3
    assert found[1:] == pytest.approx(BREAKING_KA[1:], abs=HALF_DIGIT_3)
    # F1: the report leaves out G3, whose ratio is above 2 but whose part in Ib is 0.002 kA.
    assert found[0] == pytest.approx(BREAKING_KA[0], abs=0.003)
