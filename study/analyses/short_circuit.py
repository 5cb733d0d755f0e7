"""Short-circuit currents at every place, in every mode: IEC 61363-1 and IEC 60909 side by side.

The maximum case counts every set that may run in parallel, change-over included, and every motor in use; the
minimum the sets that the mode runs, and no motor; beside it, one supply in each island.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from study.analyses.short_circuit_case import SolvedCase, solve_case
from study.analyses.short_circuit_devices import DevicePlaces, device_faults, device_places, least_far_a
from study.analyses.short_circuit_findings import (
    earth_findings,
    earth_systems,
    mode_findings,
    quick_rows,
)
from study.analyses.short_circuit_general import GeneralCase, compared, general_case
from study.analyses.short_circuit_one_set import one_set_case, one_set_left
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.analyses.short_circuit_simulation import known_bias, simulated_faults
from study.model.modes import Mode
from study.network.fault_network import FaultPlant, fault_network, fault_plant, with_tolerance
from study.network.fault_supplies import MAXIMUM, MINIMUM, NOMINAL
from study.network.network import Network
from study.network.solver_faults import library_currents
from study.network.view import View
from study.results.arrays import read_only
from study.results.short_circuit import (
    Iec60909Case,
    ModeShortCircuit,
    PlaceKind,
    Places,
    ShortCircuitResult,
)

DEFAULT_OPTIONS = ShortCircuitOptions()


@dataclass(frozen=True, slots=True, kw_only=True)
class SolvedMode:
    """A mode with its solved cases, before it becomes a result."""

    mode: Mode
    maximum: SolvedCase
    minimum: SolvedCase
    general: tuple[GeneralCase, GeneralCase]


def short_circuit(
    network: Network,
    options: ShortCircuitOptions = DEFAULT_OPTIONS,
    views: Sequence[View] | None = None,
) -> ShortCircuitResult:
    """Return the short-circuit currents of every mode.

    Parameters
    ----------
    network : Network
        Of the plant.
    options : ShortCircuitOptions
        Choices of the study.
    views : sequence of View, optional
        What is energised in each mode, where it is known already.

    Returns
    -------
    ShortCircuitResult
        Modes in workbook order.
    """
    static = fault_plant(network)
    places = device_places(network.plant.devices, network.topology)
    seen: Sequence[View | None] = views or [None] * len(network.plant.modes)
    solved = [solve_mode(static, m, options, v) for m, v in zip(network.plant.modes, seen, strict=True)]
    general = _compared(solved, options)
    return ShortCircuitResult(
        places=places_of(static),
        f_hz=network.plant.project.f_rated_hz,
        modes=tuple(_mode(s, g, places) for s, g in zip(solved, general, strict=True)),
        simulated=simulated_faults(network),
        bias=known_bias(),
    )


def places_of(static: FaultPlant) -> Places:
    """Return the fault places of a plant.

    Parameters
    ----------
    static : FaultPlant
        Of the plant.

    Returns
    -------
    Places
        Boards first.
    """
    network = static.network
    nodes = [network.topology.nodes[k] for k in static.place_node]
    loads = {x.name for x in network.plant.loads}
    kinds: list[PlaceKind] = []
    for n in nodes:
        if n.kind == "board":
            kinds.append("board")
        elif n.kind == "terminal":
            kinds.append("consumer terminals" if n.owner in loads else "source terminals")
        else:
            kinds.append("transformer terminals")
    return Places(
        names=tuple(n.owner for n in nodes),
        kinds=tuple(kinds),
        boards=tuple(n.board for n in nodes),
        u_nominal_v=read_only(network.u_base_v[static.place_node]),
    )


def solve_mode(
    static: FaultPlant, mode: Mode, options: ShortCircuitOptions, view: View | None = None
) -> SolvedMode:
    """Return a mode's two cases by both standards.

    Parameters
    ----------
    static : FaultPlant
        Of the plant.
    mode : Mode
        One of its modes.
    options : ShortCircuitOptions
        Choices of the study.
    view : View, optional
        What is energised in the mode, where it is known already.

    Returns
    -------
    SolvedMode
        Before the comparison with pandapower.
    """
    high = fault_network(static, mode, MAXIMUM, None if mode.changeover_sets else view)
    low = fault_network(static, mode, MINIMUM, view if mode.changeover_sets else high.view)
    return SolvedMode(
        mode=mode,
        maximum=solve_case(high, with_tolerance(high, NOMINAL), options),
        minimum=solve_case(low, None, options),
        general=(general_case(high, options), general_case(low, options)),
    )


def _compared(
    solved: Sequence[SolvedMode], options: ShortCircuitOptions
) -> list[tuple[Iec60909Case, Iec60909Case]]:
    own = [g for s in solved for g in s.general]
    if not options.compare:
        cases = [g.case for g in own]
    else:
        nets = [x.net for s in solved for x in (s.maximum, s.minimum)]
        library = library_currents(nets, options.lv_tolerance_percent, all_places=False)
        words = (
            "I''k and ip of the three-phase fault at boards, transformer and source terminals, "
            "without converter supplies"
        )
        cases = [
            compared(g, x.ik_3ph_a, x.ik_2ph_a, x.ip_3ph_a, words) for g, x in zip(own, library, strict=True)
        ]
    return list(zip(cases[::2], cases[1::2], strict=True))


def _mode(
    s: SolvedMode,
    general: tuple[Iec60909Case, Iec60909Case],
    places: DevicePlaces,
) -> ModeShortCircuit:
    plant = s.maximum.net.plant.network.plant
    live = bool(np.any(s.maximum.case.live))
    alone = one_set_case(s.minimum)
    least = least_far_a(plant.devices, places, alone)
    return ModeShortCircuit(
        mode=s.mode.name,
        solved=live,
        reason="" if live else "no source whose short-circuit current is known feeds any board.",
        maximum=s.maximum.case,
        minimum=s.minimum.case,
        one_set=one_set_left(alone, s.minimum, least),
        iec60909_maximum=general[0],
        iec60909_minimum=general[1],
        devices=device_faults(plant.devices, places, s.maximum, s.minimum, plant.project.f_rated_hz),
        earth=earth_systems(s.maximum.net),
        quick=quick_rows(s.maximum.net),
        findings=(
            *mode_findings(plant, s.mode, s.maximum, s.minimum, general),
            *earth_findings(s.maximum.net),
        ),
    )
