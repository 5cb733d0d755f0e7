"""Results written by hand for the checks: one of each kind, changed field by field."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import fields, replace
from typing import Any

import numpy as np

from study.checks.limits import Limits, limits_in_force
from study.checks.verdict import Verdict
from study.model.plant import AcceptanceItem, Plant
from study.results.arrays import read_only
from study.results.balance import (
    BalanceResult,
    ConsumerDemand,
    EmergencyDuty,
    IslandBalance,
    LossOfSet,
    ModeBalance,
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

LIMITS = limits_in_force(())
NAN = math.nan
MODE = "At sea"


def agreed(**quantities: float | str) -> Limits:
    """Return limits with some quantities agreed otherwise; `Voltage_below=8.0` for `Voltage below`."""
    return limits_in_force(
        AcceptanceItem(
            quantity=name.replace("_", " "), limit=limit, unit="%", basis="owner", cell="Acceptance!B9"
        )
        for name, limit in quantities.items()
    )


def with_cells(plant: Plant, *named: tuple[str, str]) -> Plant:
    """Return a plant that knows a cell for each (equipment, heading): ``Sheet!`` and their initials."""
    return replace(plant, cells={pair: f"{pair[0]}!{pair[1]}" for pair in named})


def find(verdicts: Iterable[Verdict], equipment: str, quantity: str) -> Verdict:
    """Return the one verdict of a piece of equipment whose quantity begins so."""
    found = [v for v in verdicts if v.equipment == equipment and v.quantity.startswith(quantity)]
    assert len(found) == 1, [v.quantity for v in verdicts if v.equipment == equipment]
    return found[0]


def quantities(verdicts: Iterable[Verdict], equipment: str) -> set[str]:
    return {v.quantity for v in verdicts if v.equipment == equipment}


# ---- load balance


def a_set(name: str = "G1", **changes: Any) -> SetBalance:
    start = SetBalance(
        name=name,
        kind="genset",
        state="on",
        island=0,
        p_rated_kw=800.0,
        s_rated_kva=1000.0,
        p_kw=400.0,
        q_kvar=300.0,
        s_kva=500.0,
        cos_phi=0.8,
        engine_loading=0.5,
        alternator_loading=0.5,
    )
    return replace(start, **changes)


def a_loss(stage: str, kw_loading: float, *sets_left: str, kva_loading: float = 0.0) -> LossOfSet:
    return LossOfSet(
        island=0,
        lost="G1",
        stage=stage,
        p_load_kw=800.0,
        q_load_kvar=600.0,
        p_capacity_kw=800.0,
        s_capacity_kva=1000.0,
        kw_loading=kw_loading,
        kva_loading=kva_loading,
        sets_left=sets_left,
    )


def an_island(**changes: Any) -> IslandBalance:
    start = IslandBalance(
        island=0,
        boards=("MSB", "DB"),
        p_load_kw=800.0,
        q_load_kvar=600.0,
        p_capacity_kw=1600.0,
        s_capacity_kva=2000.0,
        kw_loading=0.5,
        kva_loading=0.55,
        spare_kw=800.0,
        fewest_sets=("G1", "G2"),
        fewest_sets_text="2 sets (G1, G2)",
        largest_step_load="",
        largest_step_kw=0.0,
        step_capability_kw=400.0,
        loss=(),
        shore=None,
        shore_current_a=NAN,
        shore_rated_a=NAN,
    )
    return replace(start, **changes)


def a_balance(
    *islands: IslandBalance, emergency: tuple[EmergencyDuty, ...] = (), **changes: Any
) -> BalanceResult:
    """Return the balance of one mode at sea."""
    none = read_only(np.zeros((1, 1)))
    start = ModeBalance(
        mode=MODE,
        kind="sea",
        services=(),
        boards=(),
        p_by_service_kw=none,
        q_by_service_kvar=none,
        p_connected_by_service_kw=none,
        p_by_board_kw=none,
        q_by_board_kvar=none,
        p_total_kw=800.0,
        q_total_kvar=600.0,
        s_total_kva=1000.0,
        alternative_kw=800.0,
        p_unfed_kw=0.0,
        sets=(),
        islands=islands,
        main_set_out=(),
        restart=(),
        findings=(),
    )
    demand = ConsumerDemand(
        **{
            f.name: () if "tuple" in str(f.type) else none for f in fields(ConsumerDemand)
        }  # the checks look at modes, never at single consumers
    )
    return BalanceResult(
        demand=demand, modes=(replace(start, **changes),), emergency=emergency, diversity=2.0
    )


# ---- load flow


def _empty(kind: Any) -> Any:
    return kind(**{f.name: () if "tuple" in str(f.type) else read_only([]) for f in fields(kind)})


def boards(**columns: Any) -> BoardState:
    """Return live boards of 440 V at 440 V without ratings; at least `names` is given."""
    n = len(columns["names"])
    start = BoardState(
        names=(),
        energised=read_only(np.ones(n), np.bool_),
        island=read_only(np.zeros(n), np.int64),
        u_nominal_v=read_only(np.full(n, 440.0)),
        u_v=read_only(np.full(n, 440.0)),
        angle_deg=read_only(np.zeros(n)),
        p_load_kw=read_only(np.zeros(n)),
        q_load_kvar=read_only(np.zeros(n)),
        busbar_current_a=read_only(np.full(n, 1000.0)),
        busbar_rated_a=read_only(np.full(n, NAN)),
        busbar_loading=read_only(np.full(n, NAN)),
    )
    return replace(start, **columns)


def terminals(**columns: Any) -> TerminalState:
    n = len(columns["loads"])
    start = TerminalState(
        loads=(),
        boards=("MSB",) * n,
        fed_by=("C1",) * n,
        path=("",) * n,
        u_rated_v=read_only(np.full(n, 440.0)),
        u_v=read_only(np.full(n, 440.0)),
        angle_deg=read_only(np.zeros(n)),
        drop_pu=read_only(np.zeros(n)),
        p_kw=read_only(np.zeros(n)),
        q_kvar=read_only(np.zeros(n)),
        current_a=read_only(np.zeros(n)),
    )
    return replace(start, **columns)


def sources(**columns: Any) -> SourceState:
    """Return sets at half load."""
    n = len(columns["names"])
    half = {f.name: read_only(np.full(n, 0.5)) for f in fields(SourceState) if "tuple" not in str(f.type)}
    half |= {"island": read_only(np.zeros(n), np.int64), "p_kw": read_only(np.full(n, 400.0))}
    half |= {"p_rated_kw": read_only(np.full(n, 800.0))}
    start = SourceState(names=(), kinds=("genset",) * n, limited_by=("",) * n, law=("",) * n, **half)  # type: ignore[arg-type]
    return replace(start, **columns)


def branches(**columns: Any) -> BranchState:
    n = len(columns["names"])
    zero = {f.name: read_only(np.zeros(n)) for f in fields(BranchState) if "tuple" not in str(f.type)}
    zero |= {"determined": read_only(np.ones(n), np.bool_)}
    start = BranchState(names=(), kinds=("cable",) * n, from_ends=("",) * n, to_ends=("",) * n, **zero)  # type: ignore[arg-type]
    return replace(start, **columns)


def a_flow(**parts: Any) -> LoadFlowResult:
    """Return the load flow of one solved mode that holds nothing but the parts given."""
    start = ModeLoadFlow(
        mode=MODE,
        solved=True,
        reason="",
        boards=_empty(BoardState),
        terminals=_empty(TerminalState),
        sources=_empty(SourceState),
        branches=_empty(BranchState),
        islands=(),
        dead_boards=(),
        agreement=SolverAgreement(
            largest_du_pu=0.0, largest_dp_kw=0.0, largest_dq_kvar=0.0, residual_pu=0.0, iterations=1
        ),
        findings=(),
    )
    return LoadFlowResult(modes=(replace(start, **parts),))


def unsolved_flow(reason: str = "the load exceeds what the engines can give.") -> LoadFlowResult:
    return a_flow(solved=False, reason=reason)


def an_island_state(f_hz: float, *source_names: str) -> IslandState:
    return IslandState(
        island=0,
        boards=("MSB",),
        sources=source_names,
        f_hz=f_hz,
        p_load_kw=0.0,
        p_loss_kw=0.0,
        q_load_kvar=0.0,
        q_loss_kvar=0.0,
        findings=(),
    )
