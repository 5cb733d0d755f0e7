"""The load flow of every mode: boards, consumers' terminals, sources, branches, islands.

Each mode is solved twice (`network.solver`); what is reported is pandapower's solution, and how far the
vectorised one is from it. Consumers ask for what the load balance counts; their terminals and own runs are
then shown as they are while the consumer runs.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from study.analyses.load_flow_boards import board_state
from study.analyses.load_flow_branches import BranchTable, branch_state, branch_table
from study.analyses.load_flow_running import while_running
from study.analyses.load_flow_terminals import terminal_state
from study.network.cases import SolvedCase, case
from study.network.network import ModeNetwork
from study.network.solution import ModeSolution
from study.network.solver import solve_reported
from study.results.arrays import read_only
from study.results.load_flow import (
    IslandState,
    LoadFlowResult,
    ModeLoadFlow,
    SolverAgreement,
    SourceState,
)

FloatArray = NDArray[np.float64]

LARGEST_DIFFERENCE_PU = 1e-6  # between the solvers, above which it is a finding
LOWEST_PLAUSIBLE_PU = 0.7  # board voltage below which consumers do not keep the power they are given


def load_flow(
    networks: Sequence[ModeNetwork],
    p_kw: FloatArray,
    q_kvar: FloatArray,
    *,
    running_kw: FloatArray | None = None,
    running_kvar: FloatArray | None = None,
) -> LoadFlowResult:
    """Return the load flow of every mode.

    Parameters
    ----------
    networks : sequence of ModeNetwork
        One for each mode.
    p_kw, q_kvar : ndarray, shape (mode, load)
        What counts of the consumers, all units in use together, at rated voltage. [kW], [kvar]
    running_kw, running_kvar : ndarray, shape (mode, load), optional
        What they take while they run, where that is more than what counts. [kW], [kvar]

    Returns
    -------
    LoadFlowResult
        Modes in the order given; one without a solution says why, and the others go on.

    Raises
    ------
    SolveError
        A kW or kvar that is not a number; names the consumers.
    """
    if not networks:
        return LoadFlowResult(modes=())
    cases = [case(at, p_kw[k], q_kvar[k]) for k, at in enumerate(networks)]
    network = networks[0].network
    solved, table = solve_reported(network, cases), branch_table(network)
    run_kw = p_kw if running_kw is None else running_kw
    run_kvar = q_kvar if running_kvar is None else running_kvar
    return LoadFlowResult(
        modes=tuple(
            _mode(c, while_running(c.reported, p, q), table)
            for c, p, q in zip(solved, run_kw, run_kvar, strict=True)
        )
    )


def _mode(one: SolvedCase, running: ModeSolution, table: BranchTable) -> ModeLoadFlow:
    s = one.reported
    own_findings = _source_findings(s)
    return ModeLoadFlow(
        mode=s.at.mode.name,
        solved=s.solved,
        reason=s.reason,
        boards=board_state(s),
        terminals=terminal_state(running),
        sources=_sources(s),
        branches=branch_state(running, table),
        islands=_islands(s, own_findings),
        dead_boards=tuple(
            b.name for b, live in zip(s.at.network.plant.boards, s.energised, strict=True) if not live
        ),
        agreement=SolverAgreement(
            largest_du_pu=one.agreement.du_pu,
            largest_dp_kw=one.agreement.dp_kw,
            largest_dq_kvar=one.agreement.dq_kvar,
            residual_pu=one.agreement.residual_pu,
            iterations=one.agreement.iterations,
        ),
        findings=(*s.at.view.findings, *_mode_findings(one)),
    )


def _mode_findings(one: SolvedCase) -> list[str]:
    s, out = one.reported, []
    if one.agreement.du_pu > LARGEST_DIFFERENCE_PU:
        out.append(
            f"The two solvers differ by {one.agreement.du_pu:.1e} pu of voltage, more than rounding explains."
        )
    if s.solved and np.any(np.abs(s.board_v_pu[s.energised]) < LOWEST_PLAUSIBLE_PU):
        out.append(
            f"A board is below {100 * LOWEST_PLAUSIBLE_PU:.0f} % voltage: contactors and drives would have "
            "dropped out, the plant does not run like this."
        )
    names = [m.name for m in s.at.network.plant.synchronous_motors if m.name in s.at.view.motors_on]
    if names:
        out.append(f"{', '.join(names)}: counted with rated or set kW and no kvar.")
    return out


def _source_findings(s: ModeSolution) -> dict[str, list[str]]:
    """Return what was found about each source, by its name."""
    out: dict[str, list[str]] = {}
    for text in s.findings[len(s.at.view.findings) :]:
        for source in s.at.sources:
            if text.startswith((f"{source.name} ", f"{source.name}:")):
                out.setdefault(source.name, []).append(text)
    return out


def _sources(s: ModeSolution) -> SourceState:
    sources = s.at.sources if s.solved else ()
    p, q = s.source_s_kva.real, s.source_s_kva.imag
    apparent = np.abs(s.source_s_kva)
    p_rated, q_rated, s_rated, u_rated, engine = (
        np.array([getattr(x, name) for x in sources], float)
        for name in ("p_rated_kw", "q_rated_kvar", "s_rated_kva", "u_rated_v", "p_engine_kw")
    )
    # A shore connection is rated in amperes, a set in kVA: at low voltage the two part.
    by_current = np.array([x.kind == "shore supply" for x in sources], bool)
    kva_loading = apparent / s_rated / np.where(by_current, s.source_u_pu, 1.0)
    with np.errstate(invalid="ignore"):
        cos_phi = p / apparent
    return SourceState(
        names=tuple(x.name for x in sources),
        kinds=tuple(x.kind for x in sources),
        island=read_only([x.island for x in sources], np.int64),
        u_v=read_only(s.source_u_pu * u_rated),
        p_kw=read_only(p),
        q_kvar=read_only(q),
        s_kva=read_only(apparent),
        cos_phi=read_only(cos_phi),
        current_a=read_only(s.source_i_a),
        p_rated_kw=read_only(p_rated),
        q_rated_kvar=read_only(q_rated),
        s_rated_kva=read_only(s_rated),
        kw_loading=read_only(p / p_rated),
        kva_loading=read_only(kva_loading),
        engine_loading=read_only(p / engine),
        field_pu=read_only(s.field_pu),
        limited_by=s.limited_by,
        law=tuple(x.words for x in sources),
    )


def _islands(s: ModeSolution, by_source: dict[str, list[str]]) -> tuple[IslandState, ...]:
    """Return the live islands; what filters lose and supply counts with the losses."""
    if not s.solved:
        return ()
    at, network = s.at, s.at.network
    island_of = np.array(at.view.island, np.int64)
    load_island = island_of[np.array(at.view.load_node, np.int64)]
    motor_node = [network.topology.node_of[m.name] for m in network.plant.synchronous_motors]
    motor_island = island_of[np.array(motor_node, np.int64)]
    filter_island = island_of[np.array(network.topology.filter_node, np.int64)]
    branch_island = island_of[network.branches.from_node[s.branch]]
    loss = np.where(s.determined, s.s_from_kva + s.s_to_kva, 0.0)
    out = []
    for n, island in enumerate(at.view.islands):
        load = s.load_s_kva[load_island == n].sum() + s.motor_s_kva[motor_island == n].sum()
        lost = loss[branch_island == n].sum() - s.filter_s_kva[filter_island == n].sum()
        out.append(
            IslandState(
                island=n,
                boards=island.boards,
                sources=island.sources,
                f_hz=float(s.f_pu[n]) * network.plant.project.f_rated_hz,
                p_load_kw=float(load.real),
                p_loss_kw=float(lost.real),
                q_load_kvar=float(load.imag),
                q_loss_kvar=float(lost.imag),
                findings=tuple(text for name in island.sources for text in by_source.get(name, ())),
            )
        )
    return tuple(out)
