"""The solution of one mode in the words of the plant: boards, consumers, sources, branches, islands."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.network.batch import BatchSolution
from study.network.network import ModeNetwork
from study.network.ties import tie_flows

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class Flows:
    """Complex power into each live branch with impedance at both ends, kVA as P + jQ, [live]."""

    s_from_kva: ComplexArray
    s_to_kva: ComplexArray


@dataclass(frozen=True, slots=True, kw_only=True)
class ModeSolution:
    """One mode solved by one of the two solvers.

    Boards [board] and consumers [load] in workbook order: ``board_v_pu`` complex, per unit of the board's
    nominal voltage, ``terminal_v_pu`` of the consumer's rated voltage; both 0 where ``energised`` or
    ``load_fed`` is False. Consumers' kW and kvar are those drawn at the voltage found. Sources [source] as in
    ``at.sources``, at their terminals. Branches [branch] are the closed ones, ``branch`` their places in the
    topology; power counts into the branch at both ends (0 at the star point of a three-winding transformer);
    currents are of one unit's run for a consumer's cable.
    ``determined`` is False for a tie in a closed ring of ties without impedance. ``f_pu`` is [island].
    ``node_v_pu`` [node] is per unit of the node's base voltage (NaN at a star point). Where ``solved`` is
    False the arrays of sources, branches and islands are empty and ``reason`` says why.
    """

    at: ModeNetwork
    solved: bool
    reason: str
    node_v_pu: ComplexArray
    energised: BoolArray
    board_v_pu: ComplexArray
    load_fed: BoolArray
    terminal_v_pu: ComplexArray
    load_s_kva: ComplexArray
    motor_s_kva: ComplexArray
    filter_s_kva: ComplexArray
    source_s_kva: ComplexArray
    source_u_pu: FloatArray
    source_i_a: FloatArray
    field_pu: FloatArray
    limited_by: tuple[str, ...]
    ran_away: BoolArray
    branch: IntArray
    s_from_kva: ComplexArray
    s_to_kva: ComplexArray
    i_from_a: FloatArray
    i_to_a: FloatArray
    determined: BoolArray
    f_pu: FloatArray
    findings: tuple[str, ...]


def unsolved(at: ModeNetwork, reason: str, findings: Sequence[str] = ()) -> ModeSolution:
    """Return the solution of a mode that has none.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    reason : str
        A sentence.
    findings : sequence of str
        What else was found.

    Returns
    -------
    ModeSolution
        With empty tables.
    """
    plant = at.network.plant
    none, empty = np.zeros(0), np.zeros(0, complex)
    return ModeSolution(
        at=at,
        solved=False,
        reason=reason,
        node_v_pu=np.zeros(len(at.bus_of_node), complex),
        energised=np.array(at.view.board_energised, bool),
        board_v_pu=np.zeros(len(plant.boards), complex),
        load_fed=np.array(at.view.load_fed, bool),
        terminal_v_pu=np.zeros(len(plant.loads), complex),
        load_s_kva=np.zeros(len(plant.loads), complex),
        motor_s_kva=np.zeros(len(plant.synchronous_motors), complex),
        filter_s_kva=np.zeros(len(plant.filters), complex),
        source_s_kva=empty,
        source_u_pu=none,
        source_i_a=none,
        field_pu=none,
        limited_by=(),
        ran_away=np.zeros(0, bool),
        branch=np.zeros(0, np.int64),
        s_from_kva=empty,
        s_to_kva=empty,
        i_from_a=none,
        i_to_a=none,
        determined=np.zeros(0, bool),
        f_pu=none,
        findings=(*at.view.findings, *findings),
    )


def flows_of(at: ModeNetwork, v_bus: ComplexArray) -> Flows:
    """Return the power into every live branch, from bus voltages and the branches' two-ports.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    v_bus : ndarray, shape (bus,)
        Complex voltages. [pu]

    Returns
    -------
    Flows
        [kVA]
    """
    branches = at.network.branches
    v_from = v_bus[at.bus_of_node[branches.from_node[at.live]]]
    v_to = v_bus[at.bus_of_node[branches.to_node[at.live]]]
    yff, yft, ytf, ytt = at.two_port
    base = at.network.s_base_kva
    return Flows(
        s_from_kva=v_from * np.conj(yff * v_from + yft * v_to) * base,
        s_to_kva=v_to * np.conj(ytf * v_from + ytt * v_to) * base,
    )


def drawn_kva(at: ModeNetwork, v_bus: ComplexArray, p_kw: FloatArray, q_kvar: FloatArray) -> ComplexArray:
    """Return what each consumer draws at the voltage found, [load]; 0 where it is not fed."""
    fed = at.load_bus >= 0
    v = np.where(fed, np.abs(v_bus[at.load_bus]), 0.0) * at.load_arrays.v_scale
    share = at.load_arrays.constant_power
    return np.asarray(np.where(fed, (p_kw + 1j * q_kvar) * (share + (1.0 - share) * v**2), 0.0))


def solution_of(batch: BatchSolution, k: int, p_kw: FloatArray, q_kvar: FloatArray) -> ModeSolution:
    """Return one scenario of the vectorised solver in full.

    Parameters
    ----------
    batch : BatchSolution
        Scenarios of a mode.
    k : int
        Which.
    p_kw, q_kvar : ndarray, shape (load,)
        What was asked for in it. [kW], [kvar]

    Returns
    -------
    ModeSolution
        In the words of the plant.
    """
    at = batch.at
    if not batch.solved[k]:
        return unsolved(at, batch.reason[k])
    v_bus = batch.v_bus_pu[k]
    return assemble(
        batch,
        k,
        v_bus=v_bus,
        source_s_kva=batch.source_p_kw[k] + 1j * batch.source_q_kvar[k],
        f_pu=batch.frequency_pu[k],
        flows=flows_of(at, v_bus),
        load_s_kva=drawn_kva(at, v_bus, p_kw, q_kvar),
    )


def assemble(
    batch: BatchSolution,
    k: int,
    *,
    v_bus: ComplexArray,
    source_s_kva: ComplexArray,
    f_pu: FloatArray,
    flows: Flows,
    load_s_kva: ComplexArray,
) -> ModeSolution:
    """Return a solution from voltages, source powers and branch flows, whichever solver found them.

    Parameters
    ----------
    batch : BatchSolution
        Holds the limits in force and the field of each source.
    k : int
        Scenario of the batch.
    v_bus : ndarray, shape (bus,)
        Complex voltages. [pu]
    source_s_kva : ndarray, shape (source,)
        P + jQ at the terminals. [kVA]
    f_pu : ndarray, shape (island,)
        Frequency. [pu of rated]
    flows : Flows
        Of the live branches with impedance.
    load_s_kva : ndarray, shape (load,)
        Drawn by each consumer. [kVA]

    Returns
    -------
    ModeSolution
        In the words of the plant.
    """
    at = batch.at
    network, plant = at.network, at.network.plant
    nominal = np.array([b.u_nominal_v for b in plant.boards])
    bus = at.bus_of_node[: len(nominal)]
    energised = bus >= 0
    filter_s = -_filter_power(at, v_bus)
    node_s = _node_balance(at, source_s_kva, load_s_kva, filter_s, flows)
    ties, tie_s, determined = tie_flows(network.topology, at.view, node_s)
    place = np.concatenate([at.live, ties])
    order = np.argsort(place, kind="stable")
    place = place[order]
    at_star = np.array([n.kind == "star" for n in network.topology.nodes], bool)
    s_from, s_to = (
        np.where(at_star[nodes[place]], 0.0, np.concatenate(s)[order])
        for s, nodes in (
            ((flows.s_from_kva, tie_s), network.branches.from_node),
            ((flows.s_to_kva, -tie_s), network.branches.to_node),
        )
    )
    units = np.concatenate([at.units, np.ones(len(ties))])[order]
    i_from, i_to = (
        _amperes(at, place, s, nodes, v_bus) / units
        for s, nodes in ((s_from, network.branches.from_node), (s_to, network.branches.to_node))
    )
    node = np.array([s.node for s in at.sources], np.int64)
    v_source = np.abs(v_bus[at.bus_of_node[node]])
    u_source = v_source * network.u_base_v[node]
    return ModeSolution(
        at=at,
        solved=True,
        reason="",
        node_v_pu=np.where(at.bus_of_node >= 0, np.where(at_star, np.nan, v_bus[at.bus_of_node]), 0.0),
        energised=energised,
        board_v_pu=np.where(energised, v_bus[bus] * network.u_base_v[: len(nominal)] / nominal, 0.0),
        load_fed=np.array(at.view.load_fed, bool),
        terminal_v_pu=np.where(at.load_bus >= 0, v_bus[at.load_bus] * at.load_arrays.v_scale, 0.0),
        load_s_kva=load_s_kva,
        motor_s_kva=at.motor_kva,
        filter_s_kva=filter_s,
        source_s_kva=source_s_kva,
        source_u_pu=u_source / np.array([s.u_rated_v for s in at.sources]),
        source_i_a=1000.0 * np.abs(source_s_kva) / (3.0**0.5 * u_source),
        field_pu=batch.field_pu[k],
        limited_by=limit_words(batch, k),
        ran_away=batch.ran_away[k],
        branch=place,
        s_from_kva=s_from,
        s_to_kva=s_to,
        i_from_a=i_from,
        i_to_a=i_to,
        determined=np.concatenate([np.ones(len(at.live), bool), determined])[order],
        f_pu=f_pu,
        findings=(*at.view.findings, *_findings(batch, k, source_s_kva)),
    )


def limit_words(batch: BatchSolution, k: int) -> tuple[str, ...]:
    """Return what limits each source: empty, 'engine', 'excitation' or 'current'."""
    words = []
    for j, s in enumerate(batch.at.sources):
        if batch.power_state[k, j]:
            words.append("engine" if s.machine is not None else "current")
        else:
            words.append({0: "", 3: "current"}.get(int(batch.excitation_state[k, j]), "excitation"))
    return tuple(words)


def _filter_power(at: ModeNetwork, v_bus: ComplexArray) -> ComplexArray:
    """Return the power that each filter takes from its board, in kVA."""
    node = np.array(at.network.topology.filter_node, np.int64)
    on = at.filter_pu != 0.0
    v = np.where(on, np.abs(v_bus[at.bus_of_node[node]]), 0.0) if len(node) else np.zeros(0)
    return np.asarray(np.conj(at.filter_pu) * v**2 * at.network.s_base_kva)


def _node_balance(
    at: ModeNetwork,
    source_s: ComplexArray,
    load_s: ComplexArray,
    filter_s: ComplexArray,
    flows: Flows,
) -> ComplexArray:
    """Return what comes into each node less what leaves it, without the ties, in kVA."""
    network = at.network
    out = np.zeros(len(network.topology.nodes), complex)
    np.add.at(out, [s.node for s in at.sources], source_s)
    fed = at.load_bus >= 0
    np.subtract.at(out, np.array(at.view.load_node, np.int64)[fed], load_s[fed])
    motors = [network.topology.node_of[m.name] for m in network.plant.synchronous_motors]
    np.subtract.at(out, np.array(motors, np.int64), at.motor_kva)
    np.add.at(out, np.array(network.topology.filter_node, np.int64), filter_s)
    np.subtract.at(out, network.branches.from_node[at.live], flows.s_from_kva)
    np.subtract.at(out, network.branches.to_node[at.live], flows.s_to_kva)
    return out


def _amperes(
    at: ModeNetwork, place: IntArray, s_kva: ComplexArray, nodes: IntArray, v_bus: ComplexArray
) -> FloatArray:
    node = nodes[place]
    u = np.abs(v_bus[at.bus_of_node[node]]) * at.network.u_base_v[node]
    amperes = 1000.0 * np.abs(s_kva) / (3.0**0.5 * u) * at.network.branches.ampere_factor[place]
    return np.where(s_kva == 0.0, 0.0, amperes)


def _findings(batch: BatchSolution, k: int, source_s: ComplexArray) -> list[str]:
    out = []
    for j, s in enumerate(batch.at.sources):
        state, field = int(batch.excitation_state[k, j]), batch.field_pu[k, j]
        end = {1: f"its excitation ceiling ({field:.2f} x rated-load field)", 2: "no excitation"}.get(state)
        if batch.ran_away[k, j] and end:
            out.append(
                f"{s.name}: its droop circuit is reversed, so the regulators in parallel do not hold their "
                f"kvar: it runs to {end}, and that state is shown."
            )
        elif end:
            out.append(f"{s.name} is held at {end}.")
        elif state:
            out.append(f"{s.name} is held at its largest current.")
        if batch.power_state[k, j]:
            out.append(f"{s.name} is held at its largest power, {abs(source_s[j].real):.0f} kW.")
        if s.machine is not None and source_s[j].real < -1e-6 * s.p_rated_kw:
            out.append(f"{s.name} is driven as a motor ({source_s[j].real:.0f} kW).")
        if s.reversed_polarity and not end:
            out.append(f"{s.name}: its droop circuit is reversed; its voltage rises with reactive load.")
    return out
