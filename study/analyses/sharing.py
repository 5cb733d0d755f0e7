"""Sharing of kW and kvar between sets in parallel, for every mode and island."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from functools import partial

import numpy as np

from study.analyses.sharing_cases import Parallel, maladjusted_cases
from study.analyses.sharing_curves import AsSet, no_curve, sharing_curve, solve_as_set
from study.analyses.sharing_findings import curve_findings, group_findings, own_load_findings
from study.analyses.sharing_group import Group, groups_of, kvar_off, tolerances
from study.analyses.sharing_margins import adjusting_margins
from study.analyses.sharing_options import SharingOptions
from study.analyses.sharing_trim import set_trims, trimmed_settings, trimmed_solution
from study.formulas.load_compensation import terminal_voltage_phasor, terminal_voltage_reactive_current
from study.network.network import ModeNetwork
from study.network.sources import Law, Source
from study.results.arrays import FloatArray, read_only
from study.results.sharing import IslandSharing, NotStudied, SettingLine, SharingResult

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
    not_studied: list[NotStudied] = []
    parallel: dict[tuple[str, str], Parallel] = {}
    for at, p, q in zip(networks, p_kw, q_kvar, strict=True):
        for group in groups_of(at, p, q):
            as_set = solve_as_set(group)
            if isinstance(as_set, str):
                not_studied.append(NotStudied(mode=at.mode.name, sets=group.names, reason=as_set))
                continue
            islands.append(_island(group, as_set, options))
            here = Parallel(group=group, own=as_set.own, result=islands[-1])
            parallel |= {(at.mode.name, s.name): here for s in (*group.sources, *group.beside)}
    return SharingResult(
        islands=tuple(islands),
        cases=maladjusted_cases(networks[0].network.plant, parallel, not_studied, options)
        if networks
        else (),
        not_studied=tuple(not_studied),
    )


def _island(group: Group, as_set: AsSet, options: SharingOptions) -> IslandSharing:
    own, places = as_set.own, group.places
    p, q = own.source_p_kw[0, places], own.source_q_kvar[0, places]
    p_near, q_near = _near_own_load(group, as_set)
    settings = trimmed_settings(group, as_set)
    trims = set_trims(group, settings)
    trimmed = None if settings is None else trimmed_solution(group, as_set, settings)
    p_tolerance, q_tolerance = tolerances(group, options)
    return IslandSharing(
        mode=group.at.mode.name,
        island=group.island,
        sets=group.names,
        cos_phi=float(p_near.sum() / np.hypot(p_near.sum(), q_near.sum())),
        p_rated_kw=read_only(group.p_rated_kw),
        q_rated_kvar=read_only(group.q_rated_kvar),
        p_tolerance_kw=read_only(p_tolerance),
        q_tolerance_kvar=read_only(q_tolerance),
        p_operating_kw=read_only(p),
        q_operating_kvar=read_only(q),
        u_operating_pu=float(own.source_u_pu[0, places].mean()),
        f_operating_hz=float(own.frequency_pu[0, group.island]) * group.at.network.plant.project.f_rated_hz,
        circulating_kvar=float(np.abs(kvar_off(group, q)).sum()) / 2.0,
        as_set=sharing_curve(group, as_set.load_pu, as_set.solution, trimmed=False),
        trimmed=no_curve(group, as_set.load_pu)
        if trimmed is None
        else sharing_curve(group, as_set.load_pu, trimmed, trimmed=True),
        lines=tuple(_lines(group, p_near, q, own.source_u_pu[0, places])),
        margins=adjusting_margins(group, as_set, trims, options),
        findings=(
            *own_load_findings(group, own),
            *group_findings(group),
            *curve_findings(group, as_set.load_pu, as_set.solution, "as set"),
            *curve_findings(group, as_set.load_pu, trimmed, "trimmed at 75 % load"),
        ),
        trims=trims,
        apart_kw=tuple(n for n, takes in zip(group.names, group.shares_kw, strict=True) if not takes),
        apart_kvar=tuple(n for n, takes in zip(group.names, group.shares_kvar, strict=True) if not takes),
    )


def _near_own_load(group: Group, as_set: AsSet) -> tuple[FloatArray, FloatArray]:
    """Return kW and kvar of the sets at the mode's own load, or at the highest of the range with a solution.

    NaN where no load has one.
    """
    solved = np.flatnonzero(as_set.solution.solved[: len(as_set.load_pu)])
    solution, row = (
        (as_set.own, 0) if as_set.own.solved[0] or not solved.size else (as_set.solution, solved[-1])
    )
    return solution.source_p_kw[row, group.places], solution.source_q_kvar[row, group.places]


def _lines(group: Group, p_kw: FloatArray, q_kvar: FloatArray, u_pu: FloatArray) -> Iterator[SettingLine]:
    """Yield each set's voltage over its kvar at given kW, and the operating point on it."""
    for n, source in enumerate(group.sources):
        q = np.linspace(0.0, _LINE_TO, _LINE_POINTS) * source.q_rated_kvar
        yield SettingLine(
            genset=source.name,
            q_kvar=read_only(q),
            u_pu=read_only(_line(source, p_kw[n] / source.s_rated_kva, q / source.s_rated_kva)),
            q_operating_kvar=float(q_kvar[n]),
            u_operating_pu=float(u_pu[n]),
        )


def _line(source: Source, p_pu: float, q_pu: FloatArray) -> FloatArray:
    """Return the voltage that the set's own regulator holds; NaN where it has no such line or voltage."""
    if source.law == Law.REACTIVE_CURRENT:
        held = partial(terminal_voltage_reactive_current, v_ref_pu=source.v_ref_pu, xc_pu=source.xc_pu)
    elif source.law == Law.PHASOR:
        held = partial(terminal_voltage_phasor, p_pu, v_ref_pu=source.v_ref_pu, xc_pu=source.xc_pu)
    else:
        return np.full(q_pu.shape, np.nan)
    for count in range(len(q_pu), 0, -1):
        try:  # beyond its nose a drooped set holds no voltage
            return np.append(held(q_pu[:count]), np.full(len(q_pu) - count, np.nan))
        except ValueError:
            continue
    return np.full(q_pu.shape, np.nan)
