"""Sharing of kW and kvar between sets in parallel, for every mode and island."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from study.analyses.sharing_cases import SETTINGS, maladjusted_case
from study.analyses.sharing_curves import (
    LOADS_PU,
    Group,
    scale_to,
    share_of,
    sharing_curve,
    solve_scaled,
    trimmed_settings,
)
from study.analyses.sharing_margins import adjusting_margins, operating_loads
from study.analyses.sharing_options import SharingOptions
from study.formulas.load_compensation import terminal_voltage_phasor, terminal_voltage_reactive_current
from study.formulas.sharing import active_sharing_limit, reactive_sharing_limit
from study.model.modes import Event
from study.network.batch import BatchSolution, Settings
from study.network.network import ModeNetwork
from study.network.sources import Law, Source, Speed
from study.results.arrays import FloatArray, read_only
from study.results.sharing import IslandSharing, MaladjustedCase, SettingLine, SharingResult

_LINE_POINTS = 23
_LINE_TO = 1.1  # of rated kvar


def sharing_study(
    networks: Sequence[ModeNetwork], p_kw: FloatArray, q_kvar: FloatArray, options: SharingOptions
) -> SharingResult:
    """Study every island in which two or more sets run in parallel.

    An island that hangs on a shore supply has no sharing of its own and is passed over.

    Parameters
    ----------
    networks : sequence of ModeNetwork
        One for each mode, in workbook order.
    p_kw, q_kvar : ndarray, shape (mode, load)
        Power of the consumers, from the load balance.
    options : SharingOptions
        Tolerances.

    Returns
    -------
    SharingResult
        Islands in order of the modes; cases in order of the sheet Events.
    """
    islands: list[IslandSharing] = []
    groups: dict[tuple[str, str], tuple[Group, BatchSolution]] = {}
    for at, p, q in zip(networks, p_kw, q_kvar, strict=True):
        for group in _groups(at, p, q):
            own = solve_scaled(group, np.ones(1))
            if own.solved[0]:
                islands.append(_island(group, own, options))
                groups |= {(at.mode.name, s.name): (group, own) for s in group.sources}
    events = networks[0].network.plant.events if networks else ()
    return SharingResult(islands=tuple(islands), cases=tuple(_cases(events, groups, options)))


def _groups(at: ModeNetwork, p_kw: FloatArray, q_kvar: FloatArray) -> list[Group]:
    found = []
    for n in range(len(at.view.islands)):
        here = [k for k, s in enumerate(at.sources) if s.island == n]
        sets = [k for k in here if at.sources[k].kind == "genset"]
        on_shore = any(at.sources[k].speed == Speed.SHORE for k in here)
        loads = np.array([at.view.island[node] == n for node in at.view.load_node], bool) & (at.load_bus >= 0)
        if len(sets) > 1 and not on_shore and not at.refusals[n] and p_kw[loads].sum() > 0.0:
            found.append(Group(at=at, island=n, places=np.array(sets), loads=loads, p_kw=p_kw, q_kvar=q_kvar))
    return found


def _island(group: Group, own: BatchSolution, options: SharingOptions) -> IslandSharing:
    p, q = own.source_p_kw[0, group.places], own.source_q_kvar[0, group.places]
    scale, solution = scale_to(group, LOADS_PU)
    as_set = sharing_curve(group, solution, trimmed=False)
    settings = trimmed_settings(group, scale, solution)
    _, trimmed = scale_to(group, LOADS_PU, settings)
    u_own = float(own.source_u_pu[0, group.places[0]])
    share = share_of(q.sum(), group.q_rated_kvar, q, group.shares_kvar)
    s_total = float(np.hypot(p.sum(), q.sum()))
    q_limit = reactive_sharing_limit(
        group.q_rated_kvar, of_largest=options.kvar_of_largest, of_smallest=options.kvar_of_smallest
    )
    return IslandSharing(
        mode=group.at.mode.name,
        island=group.island,
        sets=tuple(s.name for s in group.sources),
        cos_phi=float(p.sum()) / s_total,
        p_rated_kw=read_only(group.p_rated_kw),
        q_rated_kvar=read_only(group.q_rated_kvar),
        p_tolerance_kw=read_only(
            active_sharing_limit(group.p_rated_kw, of_largest=options.kw_of_largest, of_own=options.kw_of_own)
        ),
        q_tolerance_kvar=read_only(np.full(len(group.sources), q_limit)),
        p_operating_kw=read_only(p),
        q_operating_kvar=read_only(q),
        u_operating_pu=u_own,
        f_operating_hz=float(own.frequency_pu[0, group.island]) * group.at.network.plant.project.f_rated_hz,
        circulating_kvar=float(np.abs(q - share).sum()) / 2.0,
        as_set=as_set,
        trimmed=sharing_curve(group, trimmed, trimmed=True),
        lines=tuple(
            _line(s, p[n], q[n], float(own.source_u_pu[0, k]))
            for n, (k, s) in enumerate(zip(group.places, group.sources, strict=True))
        ),
        margins=adjusting_margins(group, operating_loads(as_set, p, q, u_own), options),
        findings=_findings(group, settings),
    )


def _line(source: Source, p_kw: float, q_kvar: float, u_pu: float) -> SettingLine:
    """Return the set's voltage over its kvar, its kW being those of the operating point."""
    q = np.linspace(0.0, _LINE_TO, _LINE_POINTS) * source.q_rated_kvar
    p_own, q_own = p_kw / source.s_rated_kva, q / source.s_rated_kva
    if source.law == Law.REACTIVE_CURRENT:
        u = terminal_voltage_reactive_current(q_own, source.v_ref_pu, source.xc_pu)
    elif source.law == Law.PHASOR:
        u = terminal_voltage_phasor(p_own, q_own, source.v_ref_pu, source.xc_pu)
    else:
        u = np.full(q.shape, np.nan)
    return SettingLine(
        genset=source.name,
        q_kvar=read_only(q),
        u_pu=read_only(u),
        q_operating_kvar=q_kvar,
        u_operating_pu=u_pu,
    )


def _findings(group: Group, settings: Settings | None) -> tuple[str, ...]:
    found = []
    for s in group.sources:
        if s.speed == Speed.FIXED:
            found.append(f"{s.name} runs at a set power and takes no part in kW sharing.")
        if s.speed == Speed.ISOCHRONOUS:
            found.append(f"{s.name} is isochronous among sets with droop and takes every change of kW.")
        if s.law == Law.REACTIVE_POWER:
            found.append(f"{s.name} is on kvar control and takes no part in kvar sharing.")
        if s.law == Law.PHASOR and s.xc_pu == 0.0:
            found.append(f"{s.name} has no voltage droop and takes every change of kvar.")
    if settings is None:
        found.append("The plant has no solution at 75 % load as set; it could not be trimmed.")
    return tuple(found)


def _cases(
    events: Sequence[Event],
    groups: dict[tuple[str, str], tuple[Group, BatchSolution]],
    options: SharingOptions,
) -> list[MaladjustedCase]:
    found: list[MaladjustedCase] = []
    rows: dict[tuple[str, str], list[Event]] = {}
    for event in events:
        known = groups.get((event.mode, event.equipment))
        if event.kind != "maladjustment" or event.unit not in SETTINGS or known is None:
            continue
        earlier = rows.setdefault((event.case, event.mode), [])
        earlier.append(event)
        found.append(maladjusted_case(known[0], tuple(earlier), known[1], options))
    return found
