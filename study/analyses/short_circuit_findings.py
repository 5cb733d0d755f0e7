"""Earth-fault currents, rules of thumb and sentences of the short-circuit study of one mode."""

from __future__ import annotations

import math

import numpy as np

from study.analyses.short_circuit_case import SolvedCase
from study.formulas.fault_earth import (
    capacitive_earth_fault_current_a,
    earth_fault_current_a,
    largest_neutral_resistance_ohm,
    neutral_resistor_power_w,
    resistive_earth_fault_current_a,
)
from study.formulas.fault_estimates import QUICK_ESTIMATES, quick_estimate_a
from study.model.branches import Board
from study.model.modes import Mode
from study.model.plant import Plant
from study.network.fault_network import FaultNetwork
from study.network.fault_zero_sequence import CABLE_Z0_OVER_Z1, EARTHED, neutral_systems
from study.results.short_circuit import EarthSystem, Iec60909Case, QuickRow

LARGEST_DIFFERENCE = 1e-6  # relative, between our IEC 60909 and pandapower's, above which it is a finding
_SETS = ("genset",)
_MOTORS = ("motor", "small motors", "synchronous motor", "regenerating drive")


def earth_systems(net: FaultNetwork) -> tuple[EarthSystem, ...]:
    """Return the earth-fault current of every system of boards with one neutral.

    Parameters
    ----------
    net : FaultNetwork
        The maximum case's network.

    Returns
    -------
    tuple of EarthSystem
        In the order of their first boards.
    """
    plant, hz = net.plant.network.plant, net.plant.network.plant.project.f_rated_hz
    out = []
    for system in neutral_systems(net):
        boards = [plant.boards[i] for i in system.boards]
        u, c = system.u_base_v, system.capacitance_f
        kinds = dict.fromkeys(b.earthing for b in boards)
        capacitive = float(capacitive_earth_fault_current_a(u, c, hz))
        resistor = _resistor_ohm(boards) if "high resistance" in kinds else None
        current = math.nan if resistor is None else float(resistive_earth_fault_current_a(u, resistor))
        total = float(earth_fault_current_a(capacitive, 0.0 if resistor is None else current))
        out.append(
            EarthSystem(
                boards=tuple(b.name for b in boards),
                u_nominal_v=u,
                earthing=" and ".join(kinds),
                capacitance_f=c,
                capacitance_given=system.given,
                capacitive_a=capacitive,
                resistor_a=current,
                fault_a=math.nan if any(k in EARTHED for k in kinds) else total,
                largest_resistor_ohm=float(largest_neutral_resistance_ohm(c, hz)) if c else math.inf,
                resistor_power_w=math.nan
                if resistor is None
                else float(neutral_resistor_power_w(u, resistor)),
            )
        )
    return tuple(out)


def _resistor_ohm(boards: list[Board]) -> float | None:
    """Return the resistors of the boards in parallel, None where none is given."""
    given = [b.earthing_resistor_ohm for b in boards if b.earthing_resistor_ohm]
    return 1.0 / sum(1.0 / r for r in given) if given else None


def quick_rows(net: FaultNetwork) -> tuple[QuickRow, ...]:
    """Return rules of thumb for every island, at the voltage of its first board with a set.

    Parameters
    ----------
    net : FaultNetwork
        The maximum case's network.

    Returns
    -------
    tuple of QuickRow
        Islands in order.
    """
    s, topology = net.sources, net.plant.network.topology
    rows = []
    for i, island in enumerate(net.view.islands):
        here = [k for k in range(len(s.supplies)) if s.island[k] == i]
        sets = [s.supplies[k] for k in here if s.supplies[k].kind in _SETS]
        if not sets:
            continue
        level = net.plant.network.u_base_v[topology.node_of[sets[0].board]]
        at = {
            x.name: x.rated_a * net.plant.network.u_base_v[x.node] / level
            for x in (s.supplies[k] for k in here)
        }
        motors = [s.supplies[k].name for k in here if s.supplies[k].kind in _MOTORS]
        for rule, estimate in QUICK_ESTIMATES.items():
            if "d.c." in estimate.quantity:
                continue
            value = quick_estimate_a(estimate, [at[x.name] for x in sets], [at[n] for n in motors] or [0.0])
            rows.append(
                QuickRow(
                    island=i,
                    boards=island.boards,
                    rule=rule,
                    quantity=estimate.quantity,
                    value_a=value,
                    basis=estimate.source,
                )
            )
    return tuple(rows)


def mode_findings(
    plant: Plant,
    mode: Mode,
    maximum: SolvedCase,
    minimum: SolvedCase,
    general: tuple[Iec60909Case, ...],
) -> tuple[str, ...]:
    """Return what was found about a mode, in sentences.

    Parameters
    ----------
    plant : Plant
        The plant.
    mode : Mode
        As the workbook has it.
    maximum, minimum : SolvedCase
        Its two cases.
    general : tuple of Iec60909Case
        IEC 60909 of both.

    Returns
    -------
    tuple of str
        What concerns clearing first.
    """
    return (
        *_clearing(minimum),
        *_sustained(maximum),
        *_counted(plant, mode, maximum),
        *_scope(maximum),
        *_agreement(general),
        *dict.fromkeys((*maximum.net.findings, *minimum.net.findings)),
    )


def _clearing(minimum: SolvedCase) -> list[str]:
    """Return a sentence for every island in which nothing keeps a fault current up."""
    net, case, out = minimum.net, minimum.case, []
    for i, island in enumerate(net.view.islands):
        at = [
            k
            for k, b in enumerate(net.plant.network.plant.boards)
            if b.name in island.boards and case.live[k] and case.sustained_reach_a[k] == 0.0
        ]
        if at:
            names = ", ".join(net.plant.network.plant.boards[k].name for k in at)
            feeds = ", ".join(
                x.name for x, n in zip(net.sources.supplies, net.sources.island, strict=True) if n == i
            )
            out.append(
                f"{names}: nothing keeps the fault current up ({feeds}); it falls to 0 A, so a device with a "
                "delay may not clear. Give the set an excitation that holds, or an instantaneous setting."
            )
    return out


def _sustained(maximum: SolvedCase) -> list[str]:
    supplies = zip(maximum.net.sources.supplies, maximum.net.sources.holdings, strict=True)
    return [
        f"{s.name} {h.words}."
        for s, h in supplies
        if s.kind == "genset" and (not h.known or h.current_in == 0.0)
    ]


def _counted(plant: Plant, mode: Mode, maximum: SolvedCase) -> list[str]:
    out = []
    more = [n for n in mode.changeover_sets if not mode.is_on(n) and n in maximum.net.view.sources]
    if more:
        out.append(f"The maximum counts {', '.join(more)}: may run together in change-over.")
    left = [
        g.name
        for g in plant.gensets
        if mode.state(g.name) == "standby" and g.name not in maximum.net.view.sources
    ]
    if left:
        out.append(
            f"{', '.join(left)}: on standby and not counted. Name them as sets that may run together in "
            "change-over if they may run in parallel with the others."
        )
    return out


def _scope(maximum: SolvedCase) -> list[str]:
    if not maximum.case.parallel_paths.any():
        return []
    boards = [
        b.name for k, b in enumerate(maximum.net.plant.network.plant.boards) if maximum.case.parallel_paths[k]
    ]
    shown = ", ".join(boards[:4]) + (f" and {len(boards) - 4} more" if len(boards) > 4 else "")
    return [f"{shown}: fed by parallel paths, which IEC 61363-1 does not cover; solved by nodal reduction."]


def _agreement(general: tuple[Iec60909Case, ...]) -> list[str]:
    out = []
    for words, case in zip(("maximum", "minimum"), general, strict=True):
        if np.isfinite(case.largest_difference) and case.largest_difference > LARGEST_DIFFERENCE:
            out.append(
                f"IEC 60909, {words}: ours and pandapower differ by {100 * case.largest_difference:.2g} %, "
                "more than rounding explains."
            )
    return out


def earth_findings(net: FaultNetwork) -> tuple[str, ...]:
    """Return a sentence where a typical zero-sequence impedance of cables was needed.

    Parameters
    ----------
    net : FaultNetwork
        The network.

    Returns
    -------
    tuple of str
        Empty where no board is earthed.
    """
    boards = net.plant.network.plant.boards
    if not any(b.earthing in EARTHED and net.view.island[i] >= 0 for i, b in enumerate(boards)):
        return ()
    return (
        f"Earth faults: a cable without R0 and X0 counts with {CABLE_Z0_OVER_Z1:g} times its impedance "
        "(common practice, no source).",
    )
