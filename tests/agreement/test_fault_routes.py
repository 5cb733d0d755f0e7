"""The shares of fault currents in branches against the whole circuit, every branch current unknown.

The circuit below is written from the impedances alone: bus voltages and branch currents are unknowns, sources
are voltages behind impedances, the fault is a short. Its branch currents are what the shares must give with
its own source currents.
"""

from dataclasses import replace

import numpy as np
import pytest

from study.analyses.short_circuit import short_circuit
from study.analyses.short_circuit_ends import end_rows
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.formulas.fault_iec60909_nodal import admittance_matrix
from study.network.fault_network import fault_network, fault_plant
from study.network.fault_supplies import MAXIMUM, MINIMUM
from study.network.network import build_network
from tests import plants

OWN = ShortCircuitOptions(compare=False)


def ship(**more):
    """Two halves at 690 V over a reactive tie, a ring of two feeders, a 440 V board with a tap, a motor."""
    given = {
        "boards": [
            plants.board("PS", 690.0),
            plants.board("SB", 690.0),
            plants.board("FWD", 690.0),
            plants.board("AFT", 440.0),
            plants.board("AFT 2", 440.0),
        ],
        "gensets": [
            plants.genset("G1", "PS", u_rated_v=690.0),
            plants.genset("G2", "SB", u_rated_v=690.0, s_rated_kva=600.0),
        ],
        "cables": [
            plants.cable("W1", "G1", "PS", length_m=30.0),
            plants.cable("W3", "PS", "FWD", length_m=60.0, resistance_ohm_per_km=0.2),
            plants.cable("W4", "SB", "FWD", length_m=90.0, reactance_ohm_per_km=0.2),
            plants.cable("W5", "FWD", "Thruster", length_m=20.0),
            plants.cable("W6", "AFT 2", "Pump", length_m=25.0),
        ],
        "ties": [plants.tie("BT", "PS", "SB", x_ohm=0.002, r_ohm=0.0), plants.tie("BT A", "AFT", "AFT 2")],
        "transformers": [
            plants.transformer(
                "T1", "SB", "AFT", u_primary_v=690.0, u_secondary_v=440.0, vector_group="Dyn11", tap_pu=0.05
            )
        ],
        "loads": [
            plants.load("Thruster", "FWD", p_rated_kw=400.0, u_rated_v=690.0),
            plants.load("Pump", "AFT 2", p_rated_kw=150.0, installed=2),
            plants.load("Fan", "AFT 2", p_rated_kw=120.0),
        ],
    }
    return plants.plant(**{**given, **more})


def circuit(net, place):
    """Return each source's current at its board and each branch's at both ends, for a short at a place."""
    s, count, branches = net.sources, len(net.bus_island), len(net.live)
    size = count + branches + 1
    m, rhs = np.zeros((size, size), complex), np.zeros(size, complex)
    z = s.at_board.r_ohm + 1j * s.at_board.x_sub_ohm
    own = net.place_own[place]
    for k, bus in enumerate(s.bus):
        y = 1.0 / z[k] * (1.0 - (k == own) / s.units[k])
        m[bus, bus] += y
        rhs[bus] += y * 1.0
    for n in range(branches):
        i, a, b, t = count + n, net.from_bus[n], net.to_bus[n], net.ratio[n]
        m[a, i] += 1.0 / t  # the current of the `to` side leaves `from` through the turns
        m[b, i] -= 1.0
        m[i, a], m[i, b], m[i, i] = 1.0 / t, -1.0, -net.z[n]
    fault, bus = size - 1, net.place_bus[place]
    m[bus, fault] = 1.0
    m[fault, bus], m[fault, fault] = 1.0, -net.place_z[place]
    x = np.linalg.solve(m, rhs)
    y = 1.0 / z * (1.0 - (np.arange(len(z)) == own) / s.units)
    given = y * (1.0 - x[s.bus])
    to_side = x[count : count + branches]
    return given, np.concatenate([to_side / net.ratio, -to_side])


def at_one_angle(net):
    """Return the network with every branch at 45 degrees, where shares are exact."""
    z = np.abs(net.z) * np.exp(0.25j * np.pi)
    admittance = admittance_matrix(
        len(net.bus_island),
        branch_from=net.from_bus,
        branch_to=net.to_bus,
        branch_impedance=z,
        branch_ratio=net.ratio,
        source_bus=np.zeros(0, np.int64),
        source_impedance=np.zeros(0),
    )
    return replace(net, z=z, admittance=admittance)


@pytest.mark.parametrize("options", [MAXIMUM, MINIMUM])
def test_branch_currents_are_those_of_the_whole_circuit(options):
    """Sources of unlike angle, a ring, a tap, motors: exact to the digits of the machine."""
    plant = ship()
    net = at_one_angle(fault_network(fault_plant(build_network(plant)), plant.modes[0], options))
    rows = end_rows(net)
    routes, ends = rows.routes, 2 * len(net.live)
    assert ends == 8  # both ends of the reactive tie, the ring's cables and the transformer
    for p in np.flatnonzero(net.place_bus >= 0):
        given, branch = circuit(net, p)
        # what each source gives at its own board is so much at the place
        at_place = given * routes.turns[routes.source_bus] / routes.turns[routes.place_bus[p]]
        own = net.place_own[p]
        if own >= 0 and net.sources.units[own] > 1.0:
            at_place[own] /= 1.0 - 1.0 / net.sources.units[own]
        share = routes.shares(np.arange(ends), np.full(ends, p))
        base = net.plant.base_a[rows.node[:ends]] / net.plant.base_a[net.plant.place_node[p]]
        assert share @ at_place == pytest.approx(branch * base, rel=1e-9, abs=1e-9)


def test_a_tie_without_impedance_carries_what_the_far_side_lacks():
    plant = ship()
    result = short_circuit(build_network(plant), OWN)
    mode, names = result.modes[0], list(result.places.names)
    case = mode.maximum
    tie = next(
        k for k, b in enumerate(case.ends.branches) if b == "BT A" and names[case.ends.place[k]] == "AFT"
    )
    column = {n: k for k, n in enumerate(case.sources.names)}
    for place, upstream, pump, fan in (
        ("AFT", 0.0, -1.0, -1.0),  # the motors behind the tie come out of it
        ("AFT 2", 1.0, 0.0, 0.0),  # all else goes in
        ("Pump", 1.0, 0.0, 0.0),
        ("SB", 0.0, -1.0, -1.0),
    ):
        share = case.shares(np.array([tie]), np.array([names.index(place)]))[0]
        turns = 1.0 if place != "SB" else 690.0 / 440.0 * 1.05
        assert share[column["G1"]] == pytest.approx(upstream)
        assert share[column["Pump"]] == pytest.approx(pump * turns)
        assert share[column["Fan"]] == pytest.approx(fan * turns)


def test_a_feeder_breaker_of_a_set_and_of_one_of_two_pumps():
    plant = ship(
        devices=[
            plants.device("Q1", "W1", end="PS"),
            plants.device("Q2", "G2"),
            plants.device("Q6", "W6", end="AFT 2"),
            plants.device("QT", "T1", end="SB"),
        ]
    )
    result = short_circuit(build_network(plant), OWN)
    mode, names = result.modes[0], list(result.places.names)
    column = {n: k for k, n in enumerate(mode.maximum.sources.names)}

    def share(device, place):
        at = [n.name for n in plant.devices].index(device)
        return mode.device_shares(np.array([at]), np.array([names.index(place)]), maximum=True)[0]

    assert share("Q1", "PS")[column["G1"]] == pytest.approx(-1.0)
    assert share("Q1", "G1")[[column["G1"], column["G2"]]] == pytest.approx([0.0, 1.0])
    assert share("Q1", "AFT 2")[column["G1"]] == pytest.approx(-440.0 / 690.0 / 1.05)
    assert share("Q2", "SB")[[column["G1"], column["G2"]]] == pytest.approx([0.0, -1.0])
    # two pumps stand in one row: at one of them the other comes through the run, elsewhere one is half
    assert share("Q6", "Pump")[[column["G1"], column["Pump"]]] == pytest.approx([1.0, 0.5])
    assert share("Q6", "AFT 2")[[column["G1"], column["Pump"]]] == pytest.approx([0.0, -0.5])
    assert share("QT", "AFT 2")[[column["G1"], column["Fan"]]] == pytest.approx([440.0 / 690.0 / 1.05, 0.0])
    end = mode.devices.ends[0]
    far = np.array([names.index(n) for n in ("PS", "PS", "PS", "AFT 2")])
    assert mode.maximum.routes.turned(end, far).tolist() == [False, False, True, True]


def test_the_current_through_a_branch_that_ends_at_the_place_is_that_of_its_end():
    """With `BranchEnds`, made from the same rows, in a plant with a ring."""
    result = short_circuit(build_network(ship()), OWN)
    case = result.modes[0].maximum
    ends = case.ends
    for k, place in enumerate(ends.place):
        share = case.shares(np.array([k]), np.array([place]))[0]
        assert -share @ case.source_initial_a[place] == pytest.approx(
            ends.through_initial_a[k], rel=1e-9, abs=1e-6
        )
