"""Made-up short-circuit results for the report, of any size: exponentials in, everything else from them.

The currents follow from each source's exponentials by plain numpy, apart from the program's own arithmetic.
"""

from __future__ import annotations

import math
from dataclasses import fields, replace
from typing import Any

import numpy as np

from study.model.plant import Plant
from study.report.content import StudyOutcome
from study.results.arrays import read_only
from study.results.short_circuit import (
    BranchEnds,
    DeviceFaults,
    EarthSystem,
    Exponentials,
    FaultCase,
    FaultSources,
    Iec60909Case,
    KnownBias,
    ModeShortCircuit,
    OneSetLeft,
    Places,
    QuickRow,
    ShortCircuitResult,
    SimulatedFault,
)
from tests.analyses.made_up_short_circuit import no_routes
from tests.report import made_up
from tests.report.made_up_fault_ratings import fault_ratings, fault_verdicts

F_HZ = 60.0
HALF_S = 0.5 / F_HZ
NAN = math.nan
SQRT2, SQRT3 = math.sqrt(2.0), math.sqrt(3.0)
TIMES_S = np.array([0.0, 0.002, 0.005, HALF_S, 0.02, 0.05, 0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0])
PARTINGS_S = (0.02, 0.05, 0.1)
SENTENCE = "DG3 is shunt self-excited: its current falls to nought. <b>Not</b> cleared after 0.4 s & more."


def fault_outcome() -> StudyOutcome:
    """Return the small made-up study with a short-circuit study; its last mode has no solution."""
    return _with_faults(made_up.outcome())


def large_fault_outcome() -> StudyOutcome:
    """Return the study of 60 boards, 500 loads and 10 modes with a short-circuit study."""
    return _with_faults(made_up.large_outcome(), all_solved=True)


def _with_faults(outcome: StudyOutcome, *, all_solved: bool = False) -> StudyOutcome:
    plant = outcome.plant
    role = {2: "emergency", 3: "propulsion"}
    boards = tuple(replace(b, role=role.get(i, b.role)) for i, b in enumerate(plant.boards))
    plant = replace(plant, boards=boards)
    ratings = fault_ratings(plant)
    return replace(
        outcome,
        plant=plant,
        short_circuit=short_circuit(plant, all_solved=all_solved),
        fault_ratings=ratings,
        verdicts=(*outcome.verdicts, *fault_verdicts(ratings)),
    )


def short_circuit(plant: Plant, *, all_solved: bool = False) -> ShortCircuitResult:
    """Return a whole result for a plant."""
    where = _places(plant)
    modes = [_mode(plant, where, m) for m in range(len(plant.modes))]
    if not all_solved:
        modes[-1] = replace(modes[-1], solved=False, reason="no source is on line", findings=(), earth=())
    return ShortCircuitResult(
        places=where, f_hz=F_HZ, modes=tuple(modes), simulated=simulated(plant), bias=BIAS
    )


def simulated(plant: Plant) -> tuple[SimulatedFault, ...]:
    """Return one simulated fault, whose ip lies outside its band, and one that could not be simulated."""
    times, wave = np.linspace(0.0, 0.2, 41), np.linspace(0.0, 0.1, 241)
    falls = 12_000.0 * np.exp(-times / 0.1) + 6_000.0
    one = SimulatedFault(
        cases=("Fault <1>", "Fault 2"),
        cell="Events!A5",
        mode=plant.modes[0].name,
        place=plant.boards[0].name,
        simulated=True,
        reason="",
        behind="on a board that sets feed",
        peak_a=40_000.0,
        iac_half_a=16_000.0,
        iac_100ms_a=10_000.0,
        ship_peak_a=39_000.0,
        ship_ip_a=34_000.0,
        ship_iac_half_a=17_000.0,
        ship_iac_100ms_a=11_000.0,
        general_ip_a=41_000.0,
        general_ik_initial_a=17_500.0,
        bias_low_percent=read_only([-3.0, 0.0, -10.0, -7.0]),
        bias_high_percent=read_only([18.0, 14.0, 5.0, 5.0]),
        motors_over_sets=0.81,
        motors_known_to=0.6,
        time_s=read_only(times),
        iac_a=read_only(falls),
        ship_iac_a=read_only(1.05 * falls),
        wave_time_s=read_only(wave),
        wave_a=read_only(20_000.0 * np.cos(2.0 * math.pi * F_HZ * wave)),
        ship_envelope_a=read_only(np.full_like(wave, 34_000.0)),
        left_out=("Shore 1", "Battery 1"),
    )
    nothing = {
        f.name: read_only([]) for f in fields(SimulatedFault) if f.name.endswith(("_percent", "_s"))
    } | {name: read_only([]) for name in ("iac_a", "ship_iac_a", "wave_a", "ship_envelope_a")}
    numbers = [f.name for f in fields(SimulatedFault) if f.name.endswith("_a") and f.name not in nothing]
    other = SimulatedFault(
        cases=("Fault 3",), cell="Events!A6", mode=plant.modes[0].name, place="Galley", simulated=False,
        reason="there is no fault place 'Galley'", behind="", left_out=(), motors_over_sets=NAN,
        motors_known_to=NAN, **nothing,
        **dict.fromkeys(numbers, NAN),
    )  # fmt: skip
    return one, other


BIAS = (
    KnownBias(
        place="on a board that sets feed", state="loaded", quantity="peak at T/2",
        low_percent=-10.0, high_percent=5.0,
    ),
    KnownBias(
        place="behind a cable", state="loaded", quantity="peak at T/2", low_percent=-14.0, high_percent=3.0
    ),
)  # fmt: skip


def _places(plant: Plant) -> Places:
    boards = [(b.name, "board", b.name, b.u_nominal_v) for b in plant.boards]
    ends = [(t.name, "transformer terminals", t.to_board, t.u_secondary_v) for t in plant.transformers]
    sets = [(g.name, "source terminals", g.board, g.u_rated_v) for g in plant.gensets]
    loads = [(x.name, "consumer terminals", x.board, x.u_rated_v) for x in plant.loads]
    rows = [*boards, *ends, *sets, *loads]
    return Places(
        names=tuple(r[0] for r in rows),
        kinds=tuple(r[1] for r in rows),  # type: ignore[arg-type]
        boards=tuple(r[2] for r in rows),
        u_nominal_v=read_only([r[3] for r in rows]),
    )


def _mode(plant: Plant, where: Places, m: int) -> ModeShortCircuit:
    maximum = _case(plant, where, m, motors=True, strength=1.15)
    minimum = _case(plant, where, m, motors=False, strength=0.85)
    none = read_only([])
    return ModeShortCircuit(
        mode=plant.modes[m].name,
        solved=True,
        reason="",
        maximum=maximum,
        minimum=minimum,
        one_set=OneSetLeft(
            supplies=("DG1",),
            fewer=True,
            ik_initial_a=read_only(0.5 * minimum.ik_initial_a),
            least_100ms_a=read_only(0.5 * minimum.least_a[:, 6]),
            least_1s_a=read_only(0.4 * minimum.least_a[:, 9]),
            device_least_a=none,
        ),
        iec60909_maximum=_general(maximum, 1.05),
        iec60909_minimum=_general(minimum, 0.95),
        devices=DeviceFaults(
            names=(), place=read_only([], np.int64), end=read_only([], np.int64),
            ends=read_only([[], []], np.int64), own=read_only([[], []], np.int64), duty_initial_a=none,
            duty_half_a=none, duty_ip_a=none, duty_through=read_only([], bool), parting_s=none, dc_part=none,
            operating_s=none, far_place=read_only([], np.int64), least_a=none, least_kind=(),
        ),
        earth=_earth(plant),
        quick=(
            QuickRow(
                island=0,
                boards=tuple(b.name for b in plant.boards),
                rule="ten and three",
                quantity="symmetrical current, r.m.s.",
                value_a=41_234.5678,
                basis="a class rule",
            ),
        ),
        findings=(SENTENCE,) if m == 0 else (),
    )  # fmt: skip


def _case(plant: Plant, where: Places, m: int, *, motors: bool, strength: float) -> FaultCase:
    names = [g.name for g in plant.gensets]
    kinds = ["genset"] * len(names)
    boards = [g.board for g in plant.gensets]
    if motors:
        fed = [b.name for b in plant.boards[:-1]]
        names += [f"small motors of {b}" for b in fed]
        kinds += ["small motors"] * len(fed)
        boards += fed
    live = np.array([b != plant.boards[-1].name for b in where.boards])
    parts = _parts(where, live, kinds, seed=m, strength=strength * (1.0 + 0.01 * (m % 3)))
    initial = parts["subtransient_a"]
    ac, dc = _ac(parts, TIMES_S), _dc(parts, TIMES_S)
    half, direct = _ac(parts, [HALF_S])[..., 0], _dc(parts, [HALF_S])[..., 0]
    ip = SQRT2 * half + direct
    dark = np.where(live, 1.0, NAN)
    idc = direct.sum(axis=1) * dark
    with np.errstate(invalid="ignore", divide="ignore"):
        r_over_x = np.log(parts["dc_a"].sum(axis=1) * dark / idc) / (2.0 * math.pi * F_HZ * HALF_S)
        dc_part = _dc(parts, PARTINGS_S).sum(axis=1) / (SQRT2 * _ac(parts, PARTINGS_S).sum(axis=1))
    iac, peak = ac.sum(axis=1) * dark[:, None], ip.sum(axis=1) * dark
    sustained = parts["sustained_a"].sum(axis=1) * dark
    behind = np.array([kind != "board" for kind in where.kinds])
    return FaultCase(
        sources=_sources(names, kinds, boards, initial=initial, ip=ip, sustained=parts["sustained_a"]),
        live=read_only(live, bool),
        parallel_paths=read_only(np.arange(len(live)) == 2, bool),
        ik_initial_a=read_only(initial.sum(axis=1) * dark),
        iac_half_a=read_only(half.sum(axis=1) * dark),
        idc_half_a=read_only(idc),
        ip_a=read_only(peak),
        peak_a=read_only(1.02 * peak),
        ik_initial_nominal_a=read_only(0.87 * initial.sum(axis=1) * dark),
        ip_nominal_a=read_only(0.87 * peak),
        r_over_x=read_only(r_over_x),
        cos_phi=read_only(r_over_x / np.hypot(1.0, r_over_x)),
        sustained_reach_a=read_only(0.9 * sustained),
        sustained_duty_a=read_only(sustained),
        equivalent_half_a=read_only(np.where(behind, 0.99 * half.sum(axis=1) * dark, NAN)),
        equivalent_ip_a=read_only(np.where(behind, 0.99 * peak, NAN)),
        time_s=read_only(TIMES_S),
        iac_a=read_only(iac),
        idc_a=read_only(dc.sum(axis=1) * dark[:, None]),
        iac_2ph_a=read_only(0.866 * iac),
        iac_earth_a=read_only(np.full_like(iac, NAN)),
        least_a=read_only(0.866 * iac),
        parting_s=read_only(PARTINGS_S),
        dc_part=read_only(dc_part * dark[:, None]),
        parts=_exponentials(parts, 1.0),
        parts_2ph=_exponentials(parts, 0.866),
        parts_earth=_exponentials(parts, 0.0),
        source_initial_a=read_only(initial),
        source_half_a=read_only(half),
        source_ip_a=read_only(ip),
        ends=_ends(where, boards, kinds, initial=initial, half=half, ip=ip),
        routes=no_routes(initial.shape),
    )


def _exponentials(parts: dict[str, Any], times: float) -> Exponentials:
    return Exponentials(
        **{k: read_only(times * v if k.endswith("_a") else v) for k, v in parts.items()},
        ends_s=read_only(np.full(parts["dc_a"].shape[1], np.inf)),
    )


def _parts(where: Places, live: Any, kinds: list[str], *, seed: int, strength: float) -> dict[str, Any]:
    rng = np.random.default_rng(seed)
    far = np.array([{"board": 1.0}.get(kind, 0.35) for kind in where.kinds])
    far = far * np.where(where.u_nominal_v < 300.0, 0.5, 1.0) * np.where(live, 1.0, 0.0)
    far[2:] *= rng.uniform(0.5, 0.9, len(far) - 2)
    size = np.array([strength * (9000.0 if kind == "genset" else 700.0) for kind in kinds])
    motor = np.array([kind != "genset" for kind in kinds])
    initial = np.outer(far, size)
    shape = initial.shape
    transient = np.where(motor, 0.0, 0.6 * initial)
    return {
        "subtransient_a": initial,
        "transient_a": transient,
        "sustained_a": np.where(motor, 0.0, 0.35 * initial),
        "dc_a": 1.4 * initial,
        "t_sub_s": np.broadcast_to(np.where(motor, 0.0187, 0.015), shape),
        "t_trans_s": np.full(shape, 0.25),
        "t_dc_s": np.broadcast_to(np.where(motor, 0.0117, 0.0398), shape),
    }


def _ac(p: dict[str, Any], times_s: Any) -> Any:
    t = np.asarray(times_s)
    fast = (p["subtransient_a"] - p["transient_a"])[..., None] * np.exp(-t / p["t_sub_s"][..., None])
    slow = (p["transient_a"] - p["sustained_a"])[..., None] * np.exp(-t / p["t_trans_s"][..., None])
    return fast + slow + p["sustained_a"][..., None]


def _dc(p: dict[str, Any], times_s: Any) -> Any:
    return p["dc_a"][..., None] * np.exp(-np.asarray(times_s) / p["t_dc_s"][..., None])


def _sources(
    names: list[str], kinds: list[str], boards: list[str], *, initial: Any, ip: Any, sustained: Any
) -> FaultSources:
    n = len(names)
    sets = np.array([kind == "genset" for kind in kinds])
    return FaultSources(
        names=tuple(names),
        kinds=tuple(kinds),
        boards=tuple(boards),
        island=read_only(np.zeros(n), np.int64),
        rated_a=read_only(np.where(sets, 1283.0, 112.0)),
        initial_a=read_only(initial.max(axis=0)),
        peak_a=read_only(ip.max(axis=0)),
        sustained_a=read_only(sustained.max(axis=0)),
        sustained_known=read_only(sets & (np.arange(n) > 0), bool),
        holds=tuple("holds about 3 In: compounded" if s else "nothing: its field dies" for s in sets),
        holds_s=read_only(np.where(sets, np.inf, 0.0)),
        preload=read_only(np.where(sets, 1.0, 0.0)),
    )


def _ends(
    where: Places, boards: list[str], kinds: list[str], *, initial: Any, half: Any, ip: Any
) -> BranchEnds:
    """Return the generators' cables and a tie between the first two boards."""
    place, branches, far, share = [], [], [], []
    for s, board in enumerate(boards):
        if kinds[s] == "genset":
            place.append(where.names.index(board))
            branches.append(f"C-G{s + 1}")
            far.append(f"DG{s + 1}")
            share.append(np.arange(len(kinds)) == s)
    for a, b in ((0, 1), (1, 0)):
        place.append(a)
        branches.append("BT 1")
        far.append(where.names[b])
        share.append(np.array([board == where.names[b] for board in boards]))
    part, rows = np.array(share, float), np.array(place)

    def through(values: Any) -> Any:
        return (part * values[rows]).sum(axis=1)

    return BranchEnds(
        place=read_only(rows, np.int64),
        branches=tuple(branches),
        kinds=tuple("tie" if name == "BT 1" else "cable" for name in branches),
        far_ends=tuple(far),
        share=read_only(part),
        through_initial_a=read_only(through(initial)),
        through_half_a=read_only(through(half)),
        through_ip_a=read_only(through(ip)),
        rest_initial_a=read_only(initial[rows].sum(axis=1) - through(initial)),
        rest_half_a=read_only(half[rows].sum(axis=1) - through(half)),
        rest_ip_a=read_only(ip[rows].sum(axis=1) - through(ip)),
        determined=read_only(np.arange(len(rows)) != len(rows) - 1, bool),
    )


def _general(case: FaultCase, c: float) -> Iec60909Case:
    initial = 0.98 * case.ik_initial_a
    library = np.where(np.arange(len(initial)) < 5, initial * (1.0 + 1e-6), NAN)
    return Iec60909Case(
        c=read_only(np.full(len(initial), c)),
        ik_3ph_a=read_only(initial),
        ik_2ph_a=read_only(0.866 * initial),
        ik_earth_a=read_only(np.full(len(initial), NAN)),
        ip_3ph_a=read_only(2.3456789 * initial),
        ip_2ph_a=read_only(2.0314 * initial),
        ib_a=read_only(0.8 * initial),
        ik_steady_a=read_only(0.7 * initial),
        ith_a=read_only(0.9 * initial),
        delay_s=0.05,
        duration_s=1.0,
        pandapower_ik_3ph_a=read_only(library),
        pandapower_ip_3ph_a=read_only(2.3456789 * library),
        pandapower_ik_2ph_a=read_only(0.866 * library),
        largest_difference=1.2345e-6,
        comparison="I''k and ip of every board",
    )


def _earth(plant: Plant) -> tuple[EarthSystem, ...]:
    w = 2.0 * math.pi * F_HZ
    insulated = EarthSystem(
        boards=tuple(b.name for b in plant.boards if b.u_nominal_v > 300.0)[:30],
        u_nominal_v=440.0,
        earthing="insulated",
        capacitance_f=1.23456789e-6,
        capacitance_given=False,
        capacitive_a=SQRT3 * w * 1.23456789e-6 * 440.0,
        resistor_a=NAN,
        fault_a=SQRT3 * w * 1.23456789e-6 * 440.0,
        largest_resistor_ohm=1.0 / (3.0 * w * 1.23456789e-6),
        resistor_power_w=NAN,
    )
    low = replace(
        insulated,
        boards=tuple(b.name for b in plant.boards if b.u_nominal_v < 300.0),
        u_nominal_v=230.0,
        earthing="solid",
        capacitive_a=SQRT3 * w * 1.23456789e-6 * 230.0,
        fault_a=NAN,
    )
    return insulated, low
