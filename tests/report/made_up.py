"""Results written by hand, so that the report can be tested without a solver.

`outcome()` is a vessel of three sets on two boards, two modes, with what every table and figure can meet:
a value just beyond its limit, something not assessed, a dead board, a mode without a solution, a sign of
markup in a name. `large_outcome()` has the size of the largest vessel the report is made for.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np

from study.checks.limits import limits_in_force
from study.checks.verdict import Verdict, make_verdict
from study.issues import Issue
from study.model.loads import Load
from study.model.plant import Assumption, Plant
from study.report.content import StudyOutcome
from study.results.arrays import read_only
from study.results.balance import (
    BalanceResult,
    ConsumerDemand,
    EmergencyDuty,
    IslandBalance,
    LossOfSet,
    MainSetOut,
    ModeBalance,
    RestartStep,
    SetBalance,
)
from study.results.load_flow import (
    BoardState,
    BranchState,
    IslandState,
    LoadFlowResult,
    ModeLoadFlow,
    SolverAgreement,
    SourceState,
    TerminalState,
)
from study.results.regulation import InherentCurve, RegulationResult, SetRegulation
from study.results.sharing import (
    AdjustingMargin,
    IslandSharing,
    MaladjustedCase,
    SettingLine,
    SetTrim,
    SharingCurve,
    SharingResult,
)
from tests import plants

SCRIPT = "<script>alert('x')</script> pump"
NAN = math.nan
SERVICES = ("propulsion auxiliaries", "cargo", "hotel", "deck machinery", "ventilation")


@dataclass(frozen=True, kw_only=True)
class Size:
    """How large the made-up vessel is."""

    modes: int = 2
    sets: int = 3
    boards: int = 4
    loads: int = 9


SMALL = Size()
LARGE = Size(modes=10, sets=6, boards=60, loads=500)
_MODE_NAMES = (
    "At sea",
    "Manoeuvring",
    "Harbour",
    "Cargo loading",
    "Cargo discharging",
    "Station keeping, closed tie",
    "Station keeping, open tie",
    "Anchor",
    "Shore connection",
    "Emergency",
)


def outcome(size: Size = SMALL, *, last_mode_solved: bool = False) -> StudyOutcome:
    """Return a whole made-up study."""
    plant = _plant(size)
    balance = _balance(plant, size)
    flow = _load_flow(plant, last_mode_solved=last_mode_solved)
    return StudyOutcome(
        plant=plant,
        balance=balance,
        load_flow=flow,
        regulation=_regulation(plant),
        sharing=_sharing(plant),
        verdicts=_verdicts(plant, balance, flow),
        limits=tuple(limits_in_force(()).by_key.values()),
        methods=(
            "Load balance by connected load, load factor and simultaneity; intermittent load by diversity.",
            "Load flow by Newton's method in each island, sets behind their droop.",
        ),
        tool_version="0.0.test",
    )


def large_outcome() -> StudyOutcome:
    """Return a study of 60 boards, 500 loads and 10 modes."""
    return outcome(LARGE, last_mode_solved=True)


def _plant(size: Size) -> Plant:
    boards = [
        plants.board(
            f"MSB {i + 1}" if i < 2 else f"DB {i + 1} distribution, deck {i}",
            440.0 if i % 3 != 2 else 230.0,
            cell=f"Boards!A{i + 4}",
            role="main" if i < 2 else "distribution",
            busbar_rated_a=2500.0 if i < 2 else None,
        )
        for i in range(size.boards)
    ]
    sets = [
        plants.genset(f"DG{i + 1}", boards[i % 2].name, cell=f"Gensets!A{i + 4}") for i in range(size.sets)
    ]
    loads = [_load(i, boards[i % len(boards)].name) for i in range(size.loads)]
    modes = [
        plants.mode(
            _MODE_NAMES[m],
            demand={load.name: plants.demand() for load in loads},
            cell=f"Modes!A{m + 4}",
            description="Laden, service speed, one reefer circuit" if m == 0 else "",
        )
        for m in range(size.modes)
    ]
    cables = [
        plants.cable(f"C-{i + 1:03d}", boards[0].name, loads[i].name, cell=f"Cables!A{i + 4}")
        for i in range(size.loads)
    ]
    return plants.plant(
        project=replace(
            plants.PROJECT,
            vessel="Made-up vessel",
            hull_number="000",
            document_number="T-000-EL-001",
            revision="B",
            rules="Rules of the class, edition 2024",
        ),
        boards=boards,
        gensets=sets,
        loads=loads,
        modes=modes,
        cables=cables,
        ties=[plants.tie("BT 1", boards[0].name, boards[1].name, cell="Ties!A4")],
        transformers=[plants.transformer("T 1", boards[1].name, boards[2].name, cell="Transformers!A4")],
        assumptions=(
            Assumption(
                equipment="DG1",
                quantity="Xq",
                value=1.123456789012345,
                unit="pu",
                source="typical of salient-pole sets, common practice, no source",
                cell="Gensets!T4",
            ),
            Assumption(
                equipment="C-001",
                quantity="Conductor",
                value="copper",
                unit="",
                source="common practice, no source",
                cell="Cables!H4",
            ),
        ),
        findings=(
            Issue(
                code="plausibility",
                sheet="Cables",
                cell="G7",
                found="length is 1 m",
                wanted="check the one-way length",
                severity="warning",
            ),
        ),
        not_read=("sheet 'My notes'", "Loads: column 'Supplier remark'"),
        file_name="made-up.xlsx",
        input_digest="0123456789abcdef" * 4,
    )


def _load(i: int, board: str) -> Load:
    name = SCRIPT if i == 1 else f"Consumer {i + 1} with a name of usual length"
    if i == 2:
        name = "=1+1 sounder"
    kind = ("motor", "heating", "lighting", "general")[i % 4]
    return plants.load(
        name,
        board,
        kind,
        p_rated_kw=(0.55, 11.0, 45.0, 250.0, 18.5)[i % 5],
        service=SERVICES[i % len(SERVICES)],
        installed=1 + i % 3,
        cell=f"Loads!A{i + 4}",
    )


def _balance(plant: Plant, size: Size) -> BalanceResult:
    shape = (size.modes, size.loads)
    rng = np.random.default_rng(7)
    in_use = np.ones(shape)
    in_use[:, 3::7] = 0.0
    load_factor = np.round(rng.uniform(0.3, 1.0, shape), 2)
    duty = np.broadcast_to(np.arange(size.loads) % 5 == 4, shape).astype(float)
    efficiency = np.array([0.91 if load.kind == "motor" else 1.0 for load in plant.loads]) * np.ones(shape)
    cos_phi = np.array([1.0 if load.kind == "heating" else 0.85 for load in plant.loads]) * np.ones(shape)
    absorbed = np.array([load.p_absorbed_kw for load in plant.loads])
    p_unit = absorbed * load_factor / efficiency
    p = in_use * p_unit
    q = p * np.sqrt(1.0 / cos_phi**2 - 1.0)
    factor = np.where(duty > 0, 0.5, 1.0)
    demand = ConsumerDemand(
        modes=tuple(m.name for m in plant.modes),
        loads=tuple(load.name for load in plant.loads),
        in_use=read_only(in_use),
        load_factor=read_only(load_factor),
        duty=read_only(duty),
        efficiency=read_only(efficiency),
        cos_phi=read_only(cos_phi),
        factor=read_only(factor),
        p_unit_kw=read_only(p_unit),
        p_kw=read_only(p),
        q_kvar=read_only(q),
        p_counted_kw=read_only(p * factor),
        q_counted_kvar=read_only(q * factor),
        fed=read_only(np.ones(shape, dtype=bool), dtype=np.bool_),
    )
    modes = tuple(_mode_balance(plant, demand, m) for m in range(size.modes))
    emergency = EmergencyDuty(
        genset="DG1",
        mode=plant.modes[-1].name,
        p_load_kw=120.0,
        q_load_kvar=60.0,
        p_rated_kw=800.0,
        s_rated_kva=1000.0,
        kw_loading=0.15,
        kva_loading=0.134,
        hours_required=18.0,
        hours_basis="SOLAS II-1/43",
    )
    return BalanceResult(demand=demand, modes=modes, emergency=(emergency,), diversity=2.0)


def _mode_balance(plant: Plant, demand: ConsumerDemand, m: int) -> ModeBalance:
    service = np.array([SERVICES.index(load.service) for load in plant.loads])
    board = np.array([[b.name for b in plant.boards].index(load.board) for load in plant.loads])

    def by_service(values: Any) -> Any:
        table = np.zeros((len(SERVICES), 3))
        np.add.at(table, (service, demand.duty[m].astype(int)), values)
        return read_only(table)

    def by_board(values: Any) -> Any:
        table = np.zeros(len(plant.boards))
        np.add.at(table, board, values)
        return read_only(table)

    p_total, q_total = float(demand.p_counted_kw[m].sum()), float(demand.q_counted_kvar[m].sum())
    running = plant.gensets[: max(1, len(plant.gensets) - 1)]
    s_total = math.hypot(p_total, q_total)
    capacity = 800.0 * len(running)
    sets = tuple(
        SetBalance(
            name=g.name,
            kind="genset",
            state="on" if g in running else "standby",
            island=0,
            p_rated_kw=800.0,
            s_rated_kva=1000.0,
            p_kw=p_total / len(running),
            q_kvar=q_total / len(running),
            s_kva=s_total / len(running),
            cos_phi=p_total / s_total,
            engine_loading=p_total / len(running) / 817.0,
            alternator_loading=s_total / len(running) / 1000.0,
        )
        for g in plant.gensets
    )
    left = running[1:]
    loss = tuple(
        LossOfSet(
            island=0,
            lost=running[0].name,
            stage=stage,
            p_load_kw=p_total * share,
            q_load_kvar=q_total * share,
            p_capacity_kw=800.0 * len(left),
            s_capacity_kva=1000.0 * len(left),
            kw_loading=p_total * share / (800.0 * len(left)) if left else math.inf,
            kva_loading=s_total * share / (1000.0 * len(left)) if left else math.inf,
            sets_left=tuple(g.name for g in left),
        )
        for stage, share in (("at once", 1.0), ("after trip stage 1", 0.8))
    )
    island = IslandBalance(
        island=0,
        boards=tuple(b.name for b in plant.boards),
        p_load_kw=p_total,
        q_load_kvar=q_total,
        p_capacity_kw=capacity,
        s_capacity_kva=1000.0 * len(running),
        kw_loading=p_total / capacity,
        kva_loading=s_total / (1000.0 * len(running)),
        spare_kw=capacity - p_total,
        fewest_sets=("DG1",),
        fewest_sets_text="DG1 alone carries it at 88 %",
        largest_step_load=plant.loads[0].name,
        largest_step_kw=212.5,
        step_capability_kw=400.0,
        loss=loss,
        shore=None,
        shore_current_a=NAN,
        shore_rated_a=NAN,
    )
    return ModeBalance(
        mode=plant.modes[m].name,
        kind=plant.modes[m].kind,
        services=SERVICES,
        boards=tuple(b.name for b in plant.boards),
        p_by_service_kw=by_service(demand.p_counted_kw[m]),
        q_by_service_kvar=by_service(demand.q_counted_kvar[m]),
        p_connected_by_service_kw=by_service(demand.p_kw[m]),
        p_by_board_kw=by_board(demand.p_counted_kw[m]),
        q_by_board_kvar=by_board(demand.q_counted_kvar[m]),
        p_total_kw=p_total,
        q_total_kvar=q_total,
        s_total_kva=s_total,
        alternative_kw=0.97 * p_total,
        p_unfed_kw=0.0,
        sets=sets,
        islands=(island,),
        main_set_out=(
            MainSetOut(
                out="DG1",
                p_load_kw=0.7 * p_total,
                q_load_kvar=0.7 * q_total,
                p_capacity_kw=1600.0,
                s_capacity_kva=2000.0,
                kw_loading=0.7 * p_total / 1600.0,
                kva_loading=0.7 * s_total / 2000.0,
            ),
        )
        if m == 0
        else (),
        restart=(
            RestartStep(
                step=1,
                at_s=5.0,
                loads=(plant.loads[0].name,),
                p_step_kw=100.0,
                p_total_kw=100.0,
                step_capability_kw=400.0,
            ),
        ),
        findings=("The largest consumer is switched in one step.",) if m == 0 else (),
    )


def _load_flow(plant: Plant, *, last_mode_solved: bool) -> LoadFlowResult:
    modes = [_mode_flow(plant, m) for m in range(len(plant.modes))]
    if not last_mode_solved:
        modes[-1] = _unsolved(plant.modes[-1].name)
    return LoadFlowResult(modes=tuple(modes))


def _mode_flow(plant: Plant, m: int) -> ModeLoadFlow:
    rng = np.random.default_rng(m)
    n_boards, n_loads = len(plant.boards), len(plant.loads)
    nominal = np.array([b.u_nominal_v for b in plant.boards])
    energised = np.ones(n_boards, dtype=bool)
    energised[-1] = False
    u_pu = np.where(energised, 1.01 - 0.05 * rng.random(n_boards), NAN)
    rated_a = np.array([b.busbar_rated_a or NAN for b in plant.boards])
    current = np.where(energised, 2500.04 * np.ones(n_boards), NAN)
    boards = BoardState(
        names=tuple(b.name for b in plant.boards),
        energised=read_only(energised, dtype=np.bool_),
        island=read_only(np.where(energised, 0, -1), dtype=np.int64),
        u_nominal_v=read_only(nominal),
        u_v=read_only(u_pu * nominal),
        angle_deg=read_only(np.where(energised, -0.4, NAN)),
        p_load_kw=read_only(np.where(energised, 55.0, NAN)),
        q_load_kvar=read_only(np.where(energised, 30.0, NAN)),
        busbar_current_a=read_only(current),
        busbar_rated_a=read_only(rated_a),
        busbar_loading=read_only(current / rated_a),
    )
    drop = 0.06 * rng.random(n_loads)
    rated_v = np.array([load.u_rated_v for load in plant.loads])
    p_kw = np.array([load.p_absorbed_kw for load in plant.loads])
    terminals = TerminalState(
        loads=tuple(load.name for load in plant.loads),
        boards=tuple(load.board for load in plant.loads),
        fed_by=tuple(c.name for c in plant.cables),
        path=tuple(f"MSB 1 > {c.name}" for c in plant.cables),
        u_rated_v=read_only(rated_v),
        u_v=read_only(rated_v * (1.0 - drop)),
        angle_deg=read_only(np.full(len(drop), -0.6)),
        drop_pu=read_only(drop),
        p_kw=read_only(p_kw),
        q_kvar=read_only(0.6 * p_kw),
        current_a=read_only(p_kw / (np.sqrt(3.0) * 0.44 * 0.86)),
    )
    return ModeLoadFlow(
        mode=plant.modes[m].name,
        solved=True,
        reason="",
        boards=boards,
        terminals=terminals,
        sources=_sources(plant),
        branches=_branches(plant, rng),
        islands=(
            IslandState(
                island=0,
                boards=boards.names,
                sources=tuple(g.name for g in plant.gensets),
                f_hz=60.61234567890123,
                p_load_kw=1200.0,
                p_loss_kw=12.34567,
                q_load_kvar=620.0,
                q_loss_kvar=22.2,
                findings=("DG2 carries more kvar than its share.",) if m == 0 else (),
            ),
        ),
        dead_boards=(plant.boards[-1].name,),
        agreement=SolverAgreement(
            largest_du_pu=2.3e-10,
            largest_dp_kw=1.2e-7,
            largest_dq_kvar=4.5e-7,
            residual_pu=3e-12,
            iterations=6,
        ),
        findings=(),
    )


def _sources(plant: Plant) -> SourceState:
    n = len(plant.gensets)
    p, q = np.linspace(380.0, 420.0, n), np.linspace(230.0, 190.0, n)
    s, u = np.hypot(p, q), np.full(n, 446.3)
    return SourceState(
        names=tuple(g.name for g in plant.gensets),
        kinds=("genset",) * n,
        island=read_only(np.zeros(n), dtype=np.int64),
        u_v=read_only(u),
        p_kw=read_only(p),
        q_kvar=read_only(q),
        s_kva=read_only(s),
        cos_phi=read_only(p / s),
        current_a=read_only(1000.0 * s / (np.sqrt(3.0) * u)),
        p_rated_kw=read_only(np.full(n, 800.0)),
        q_rated_kvar=read_only(np.full(n, 600.0)),
        s_rated_kva=read_only(np.full(n, 1000.0)),
        kw_loading=read_only(p / 800.0),
        kva_loading=read_only(s / 1000.0),
        engine_loading=read_only(p / 817.0),
        field_pu=read_only(np.full(n, 0.71)),
        limited_by=("",) * (n - 1) + ("excitation",),
        law=("phasor",) * n,
    )


def _branches(plant: Plant, rng: np.random.Generator) -> BranchState:
    names = [c.name for c in plant.cables] + ["T 1", "BT 1"]
    n = len(names)
    current = rng.uniform(5.0, 220.0, n)
    current[0] = 230.0004
    rating = np.full(n, 230.0)
    rating[1] = NAN
    determined = np.ones(n, dtype=bool)
    determined[-1] = False
    current[-1] = NAN
    return BranchState(
        names=tuple(names),
        kinds=("cable",) * len(plant.cables) + ("transformer", "tie"),
        from_ends=(plant.boards[0].name,) * n,
        to_ends=(*(c.to_end for c in plant.cables), plant.boards[2].name, plant.boards[1].name),
        p_from_kw=read_only(0.6 * current),
        q_from_kvar=read_only(0.3 * current),
        p_to_kw=read_only(0.59 * current),
        q_to_kvar=read_only(0.29 * current),
        current_a=read_only(current),
        rating_a=read_only(rating),
        loading=read_only(current / rating),
        loss_kw=read_only(0.01 * current),
        loss_kvar=read_only(0.01 * current),
        drop_pu=read_only(0.0001 * current),
        determined=read_only(determined, dtype=np.bool_),
    )


def _unsolved(mode: str) -> ModeLoadFlow:
    return ModeLoadFlow(
        mode=mode,
        solved=False,
        reason="the load is above what the sets on line can carry",
        boards=_empty(BoardState),
        terminals=_empty(TerminalState),
        sources=_empty(SourceState),
        branches=_empty(BranchState),
        islands=(),
        dead_boards=(),
        agreement=SolverAgreement(
            largest_du_pu=NAN, largest_dp_kw=NAN, largest_dq_kvar=NAN, residual_pu=0.3, iterations=40
        ),
        findings=(),
    )


def _empty(kind: Any) -> Any:
    none = {f.name: () if "tuple" in str(f.type) else read_only([]) for f in fields(kind)}
    return kind(**none)


def _regulation(plant: Plant) -> RegulationResult:
    current = np.linspace(0.0, 1.2, 25)
    angle = (math.pi / 2, math.acos(0.8), 0.0, -math.acos(0.8))
    u_pu = np.array([np.sqrt(np.maximum(1.0 - (1.8 * current * math.cos(a)) ** 2, 0.0)) for a in angle])
    u_pu = u_pu - np.array([[1.8 * math.sin(a)] for a in angle]) * current
    u_pu[u_pu < 0.05] = NAN
    inherent = InherentCurve(
        labels=("0 lagging", "0.8 lagging", "1", "0.8 leading"),
        cos_phi=read_only([0.0, 0.8, 1.0, 0.8]),
        lagging=(True, True, False, False),
        current_pu=read_only(np.broadcast_to(current, (4, 25))),
        u_pu=read_only(u_pu),
        regulation_pu=read_only([1.8, 1.35, 0.9, 0.12]),
        field_pu=read_only([1.2, 1.0, 0.8, 0.4]),
    )
    load = np.linspace(0.0, 1.0, 21)
    sets = tuple(
        SetRegulation(
            genset=g.name,
            service="main",
            field_supply=g.excitation.field_supply,
            law="phasor",
            inherent=inherent,
            load_pu=read_only(load),
            u_with_droop_pu=read_only(1.0 - 0.03 * load),
            u_without_droop_pu=read_only(1.0 - 0.004 * load - 0.01 * load * (1 - load)),
            field_pu=read_only(0.4 + 0.6 * load),
            band_as_set_pu=0.004,
            band_centred_pu=0.002,
            band_as_set_with_droop_pu=0.03,
            droop_no_load_to_rated_pu=0.03,
            compensation_x_pu=0.0471,
            reaches_ceiling_at_pu=NAN,
            findings=(),
        )
        for g in plant.gensets
    )
    return RegulationResult(sets=sets)


def _sharing(plant: Plant) -> SharingResult:
    islands = tuple(_island_sharing(plant, mode.name) for mode in plant.modes)
    return SharingResult(islands=islands, cases=(_case(plant),))


def _island_sharing(plant: Plant, mode: str) -> IslandSharing:
    names = tuple(g.name for g in plant.gensets)
    n = len(names)
    lines = tuple(
        SettingLine(
            genset=name,
            q_kvar=read_only([-100.0, 600.0]),
            u_pu=read_only([1.02 + 0.003 * i, 0.99 + 0.003 * i]),
            q_operating_kvar=235.0 + 70.0 * i,
            u_operating_pu=1.0057,
        )
        for i, name in enumerate(names)
    )
    return IslandSharing(
        mode=mode,
        island=0,
        sets=names,
        cos_phi=0.83,
        p_rated_kw=read_only(np.full(n, 800.0)),
        q_rated_kvar=read_only(np.full(n, 600.0)),
        p_tolerance_kw=read_only(np.full(n, 120.0)),
        q_tolerance_kvar=read_only(np.full(n, 60.0)),
        p_operating_kw=read_only(np.linspace(380.0, 420.0, n)),
        q_operating_kvar=read_only(np.linspace(230.0, 190.0, n)),
        u_operating_pu=1.0057,
        f_operating_hz=60.6,
        circulating_kvar=20.0,
        as_set=_curve(n, trimmed=False),
        trimmed=_curve(n, trimmed=True),
        lines=lines,
        margins=tuple(
            AdjustingMargin(
                genset=name,
                setting=setting,
                set_pu=1.02,
                low_pu=1.011,
                low_breaks="kvar sharing of DG2",
                high_pu=NAN,
                high_breaks="",
            )
            for name in names
            for setting in ("no-load voltage", "voltage droop")
        ),
        findings=(),
        trims=tuple(
            SetTrim(
                genset=name,
                u_as_set_pu=1.02 + 0.003 * i,
                u_trimmed_pu=1.02,
                f_as_set_pu=1.03,
                f_trimmed_pu=1.03,
            )
            for i, name in enumerate(names)
        ),
    )


def _curve(n: int, *, trimmed: bool) -> SharingCurve:
    load = np.linspace(0.2, 1.0, 17)
    off = np.linspace(-1.0, 1.0, n)
    total_p, total_q = 800.0 * n * load, 530.0 * n * load
    dp = np.outer(load - (0.75 if trimmed else 0.2), 60.0 * off)
    dq = np.outer(load - (0.75 if trimmed else 0.1), (40.0 if trimmed else 66.6667) * off)
    solved = np.ones(17, dtype=bool)
    solved[-1] = False
    return SharingCurve(
        trimmed=trimmed,
        load_pu=read_only(load),
        p_total_kw=read_only(total_p),
        q_total_kvar=read_only(total_q),
        p_kw=read_only(np.where(solved[:, None], total_p[:, None] / n + dp, NAN)),
        q_kvar=read_only(np.where(solved[:, None], total_q[:, None] / n + dq, NAN)),
        dp_kw=read_only(np.where(solved[:, None], dp, NAN)),
        dq_kvar=read_only(np.where(solved[:, None], dq, NAN)),
        u_pu=read_only(np.where(solved, 1.02 - 0.03 * load, NAN)),
        f_hz=read_only(np.where(solved, 62.0 - 2.0 * load, NAN)),
        solved=read_only(solved, dtype=np.bool_),
    )


def _case(plant: Plant) -> MaladjustedCase:
    n = len(plant.gensets)
    shift = np.linspace(150.0, -150.0, n)
    return MaladjustedCase(
        case="DG1 no-load voltage high",
        mode=plant.modes[0].name,
        genset="DG1",
        setting="no-load voltage",
        value_pu=1.035,
        was_pu=1.02,
        cell="Events!F4",
        solved=True,
        sets=tuple(g.name for g in plant.gensets),
        p_before_kw=read_only(np.full(n, 400.0)),
        q_before_kvar=read_only(np.full(n, 210.0)),
        p_after_kw=read_only(np.full(n, 401.0)),
        q_after_kvar=read_only(210.0 + shift),
        p_tolerance_kw=read_only(np.full(n, 120.0)),
        q_tolerance_kvar=read_only(np.full(n, 60.0)),
        p_share_kw=read_only(np.full(n, 400.0)),
        q_share_kvar=read_only(np.full(n, 210.0)),
        s_rated_kva=read_only(np.full(n, 1000.0)),
        u_before_pu=1.005,
        u_after_pu=1.0102,
        f_before_hz=60.6,
        f_after_hz=60.59,
        sentence="DG1 takes 150 kvar more than its share; the tolerance is 60 kvar.",
    )


def _verdicts(plant: Plant, balance: BalanceResult, flow: LoadFlowResult) -> tuple[Verdict, ...]:
    found: list[Verdict] = []
    for mode in balance.modes:
        found.append(
            _verdict(
                mode=mode.mode,
                subject="capacity",
                equipment="all boards",
                quantity="loading in kW of the sets on line",
                value=100.0 * mode.islands[0].kw_loading,
                limit=100.0,
                cell="Gensets!C4",
            )
        )
        found += [
            _verdict(
                mode=mode.mode,
                subject="loading",
                equipment=s.name,
                quantity="engine load, at least",
                value=100.0 * s.engine_loading,
                limit=25.0,
                sense="at least",
                cell="Gensets!K4",
            )
            for s in mode.sets
            if s.state == "on"
        ]
        found += [
            _verdict(
                mode=mode.mode,
                subject=f"{word} sharing",
                equipment=g.name,
                quantity=f"distance from its {word} share {how}",
                value=value,
                limit=limit,
                unit=word,
            )
            for g in plant.gensets
            for word, limit in (("kW", 120.0), ("kvar", 60.0))
            for how, value in (("as set", 0.5004 * limit * 2), ("trimmed at 75 % load", 0.3 * limit))
        ]
    for solved in flow.modes:
        found += _flow_verdicts(solved)
    found += [
        _verdict(
            mode="",
            subject="regulation",
            equipment=g.name,
            quantity="voltage regulation without droop, ± about the best centre",
            value=0.2,
            limit=2.5,
        )
        for g in plant.gensets
    ]
    return tuple(found)


def _flow_verdicts(mode: ModeLoadFlow) -> list[Verdict]:
    if not mode.solved:
        return [
            _verdict(
                mode=mode.mode,
                subject="loading",
                equipment="whole plant",
                quantity="load flow without a solution",
                value=1.0,
                limit=0.0,
                unit="-",
                basis=mode.reason,
            )
        ]
    found = [
        _verdict(
            mode=mode.mode,
            subject="voltage",
            equipment=name,
            quantity="board voltage below reference",
            value=100.0 * (1.0 - float(mode.boards.u_v[i] / mode.boards.u_nominal_v[i])),
            limit=10.0,
            cell="Boards!B4",
        )
        for i, name in enumerate(mode.boards.names)
        if mode.boards.energised[i]
    ]
    found += [
        _verdict(
            mode=mode.mode,
            subject="cables",
            equipment=name,
            quantity="current",
            value=float(mode.branches.current_a[i]),
            limit=float(mode.branches.rating_a[i]),
            unit="A",
            cell=f"Cables!F{i + 4}",
            basis="IEC 60092-352 rating with its corrections"
            if not math.isnan(mode.branches.rating_a[i])
            else "no section given",
            remedy="Take a larger section or more runs.",
        )
        for i, name in enumerate(mode.branches.names)
        if mode.branches.kinds[i] == "cable"
    ]
    return found


def _verdict(**given: Any) -> Verdict:
    start: dict[str, Any] = {
        "unit": "%",
        "close_margin": 0.05,
        "basis": "a rule of the class",
        "data_tolerance": 0.05,
        "remedy": "Change the setting named here.",
    }
    return make_verdict(**{**start, **given})
