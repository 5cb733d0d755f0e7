"""The network of a fault: places, own paths, conductor temperatures, what is on, zero sequence."""

import numpy as np
import pytest

from study.network.fault_network import case_mode, fault_network, fault_plant, only_sources
from study.network.fault_stages import solve_stage
from study.network.fault_supplies import MAXIMUM, MINIMUM
from study.network.fault_zero_sequence import neutral_systems, zero_sequence
from study.network.network import build_network
from tests import plants


def net_of(plant, options=MAXIMUM, mode=0):
    return fault_network(fault_plant(build_network(plant)), plant.modes[mode], options)


def feeder_plant(**changes):
    return plants.plant(
        boards=[plants.board("MSB", 450.0), plants.board("DB", 450.0)],
        gensets=[plants.genset("G1", "MSB")],
        cables=[
            plants.cable("C1", "G1", "MSB"),
            plants.cable("C2", "MSB", "DB", **changes),
            plants.cable("C3", "DB", "Fan"),
        ],
        loads=[plants.load("Fan", "DB", p_rated_kw=150.0, installed=2)],
    )


def test_terminals_at_the_end_of_one_path_are_no_buses():
    net = net_of(feeder_plant())
    assert len(net.bus_island) == 2
    names = [net.plant.network.topology.nodes[k].owner for k in net.plant.place_node]
    assert names == ["MSB", "DB", "G1", "Fan"]
    assert (net.stub >= 0).tolist() == [False, False, True, True]
    assert [net.sources.supplies[k].name for k in net.place_own[2:]] == ["G1", "Fan"]


def test_cables_are_cold_for_the_maximum_and_hot_for_the_minimum():
    """R20 (234.5 + t)/(254.5) of IEC 60228; at 50 m of 10 ohm/km the skin effect is below 1e-6."""
    plant = feeder_plant(resistance_ohm_per_km=10.0, short_circuit_temperature_degc=250.0)
    base = 450.0**2 / 1000e3
    for options, factor in ((MAXIMUM, 1.0), (MINIMUM, (234.5 + 250.0) / 254.5)):
        net = net_of(plant, options)
        assert net.z[0].real * base == pytest.approx(0.5 * factor, rel=1e-5)
        assert net.z[0].imag * base == pytest.approx(0.0045)


def test_a_run_to_a_group_is_of_one_unit_and_its_motor_stands_there():
    """Fault at one unit: itself direct, the other through both runs, by plain circuit arithmetic."""
    net = net_of(feeder_plant())
    s = net.sources
    z = s.at_board.r_ohm + 1j * s.at_board.x_sub_ohm
    bare = s.bare.r_ohm + 1j * s.bare.x_sub_ohm
    stage = solve_stage(net, z, bare, np.ones(2, bool), voltage=np.ones(2))
    fan, run = 1, net.place_z[3]
    unit = 2.0 * bare[fan]
    upstream = z[0] + net.z[0]
    others = 1.0 / (run + 1.0 / (1.0 / upstream + 1.0 / (unit + run)))
    assert 1.0 / stage.z_place[3] == pytest.approx(1.0 / unit + others)
    assert stage.current[3].sum() == pytest.approx(1.0 / stage.z_place[3])


def test_a_path_through_the_network_is_the_same_as_a_bus_at_its_end():
    """A board in the place of the terminal, which makes it a bus, changes nothing."""
    stub = feeder_plant()
    net = net_of(stub)
    as_board = plants.plant(
        boards=[plants.board(n, 450.0) for n in ("MSB", "DB", "GB")],
        gensets=[plants.genset("G1", "GB")],
        cables=[
            plants.cable("C1", "GB", "MSB"),
            plants.cable("C2", "MSB", "DB"),
            plants.cable("C3", "DB", "Fan"),
        ],
        loads=list(stub.loads),
    )
    other = net_of(as_board)
    for one, name in ((net, "G1"), (other, "GB")):
        s = one.sources
        bare = s.bare.r_ohm + 1j * s.bare.x_sub_ohm
        stage = solve_stage(one, bare + s.lead, bare, np.ones(2, bool), voltage=np.ones(2))
        owners = [one.plant.network.topology.nodes[k].owner for k in one.plant.place_node]
        value = stage.z_place[[owners.index(n) for n in ("MSB", "DB", name, "Fan")]]
        if one is net:
            first = value
    assert value == pytest.approx(first, rel=1e-12)


def test_change_over_turns_on_the_sets_and_their_breakers():
    plant = plants.plant(
        boards=[plants.board("MSB", 450.0)],
        gensets=[plants.genset("G1", "MSB"), plants.genset("G2", "MSB")],
        devices=[plants.device("Q2", "G2")],
        modes=[plants.mode(states={"G2": "standby", "Q2": "off"}, changeover_sets=("G2",))],
    )
    assert case_mode(plant.modes[0], plant, MAXIMUM).is_on("Q2")
    assert not case_mode(plant.modes[0], plant, MINIMUM).is_on("G2")
    assert net_of(plant).view.sources == ("G1", "G2")


def test_single_phase_runs_count_once_for_the_maximum_and_there_and_back_for_the_minimum():
    """Between line and neutral the minimum goes there and back, 2 Z; the two-phase fault does so itself."""
    loads = [
        plants.load("L-N", "DB", kind="general", phases=1, u_rated_v=254.0, p_rated_kw=2.0),
        plants.load("L-L", "DB", kind="general", phases=2, u_rated_v=440.0, p_rated_kw=2.0),
    ]
    plant = plants.plant(
        boards=[plants.board("DB", 440.0)],
        gensets=[plants.genset("G1", "DB")],
        loads=loads,
        cables=[plants.cable("C1", "DB", "L-N"), plants.cable("C2", "DB", "L-L")],
    )
    x = 0.090 * 0.05 / (440.0**2 / 1000e3)
    high, low = net_of(plant), net_of(plant, MINIMUM)
    assert high.place_z[1:].imag == pytest.approx([x, x])
    assert low.place_z[1:].imag == pytest.approx([2 * x, x])


def test_only_some_sources_leave_the_network_as_it_is():
    net = net_of(feeder_plant())
    alone = only_sources(net, np.array([True, False]))
    assert [s.name for s in alone.sources.supplies] == ["G1"]
    assert alone.place_own.tolist() == [-1, -1, 0, -1]
    assert np.array_equal(alone.admittance, net.admittance)


def test_an_island_without_a_lasting_source_has_no_transient_stage():
    net = net_of(feeder_plant())
    s = net.sources
    z = s.at_board.r_ohm + 1j * s.at_board.x_sub_ohm
    stage = solve_stage(net, z, z, np.zeros(2, bool))
    assert not stage.fed.any()
    assert np.all(stage.current == 0.0)


def test_neutral_systems_end_at_transformers():
    plant = plants.small_plant(1)
    systems = neutral_systems(net_of(plant))
    assert [s.boards for s in systems] == [(0,), (1,)]


def test_zero_sequence_behind_a_star_point_and_a_resistor():
    """Dyn transformer: Z0 = R0/R1 R + j X0/X1 X at its secondary; 3 R of a neutral resistor in series."""
    boards = [plants.board("MSB", 440.0), plants.board("LB", 230.0, earthing="solid")]
    plant = plants.plant(
        boards=boards,
        gensets=[plants.genset("G1", "MSB")],
        transformers=[plants.transformer("T1", "MSB", "LB")],
    )
    net = net_of(plant)
    z = net.z[0]
    found = zero_sequence(net)
    assert np.isinf(found[0])
    assert found[1] == pytest.approx(complex(z.real, 0.95 * z.imag))
    earthed = [plants.board("MSB", 440.0, earthing="low resistance", earthing_resistor_ohm=2.0)]
    alone = net_of(plants.plant(boards=earthed, gensets=[plants.genset("G1", "MSB")]))
    base = 440.0**2 / 1000e3
    own = complex(0.01, 0.05) * (450.0 / 440.0) ** 2
    assert zero_sequence(alone)[0] == pytest.approx(own + 3.0 * 2.0 / base)
