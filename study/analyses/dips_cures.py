"""What might cure a case that goes too far: each change tried by simulating the case again."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace
from typing import Any, Final

from study.analyses.balance_sources import interlocked_pairs, may_run_together
from study.analyses.dips_options import DipOptions
from study.analyses.dips_simulation import cases_of, simulate_case
from study.model.loads import StartingMethod
from study.model.modes import Event, Mode
from study.model.plant import Plant
from study.model.sources import Genset
from study.network.network import ModeNetwork, build_network, mode_network
from study.results.arrays import FloatArray
from study.results.dips import Cure

Change = tuple[str, Plant, tuple[Event, ...]]
QUICKER: Final = 0.5
HIGHER: Final = 1.5
APART_S: Final = 10.0
METHODS: Final[tuple[StartingMethod, ...]] = ("star-delta", "autotransformer", "soft starter")


def try_cures(
    networks: Sequence[ModeNetwork],
    cases: Sequence[str],
    p_kw: FloatArray,
    q_kvar: FloatArray,
    options: DipOptions,
    *,
    progress: Callable[[str], None] | None = None,
) -> tuple[Cure, ...]:
    """Simulate cases again, each time with one thing changed.

    One set more on the same boards; a motor started by each other method; an exciter of half the time
    constant; a ceiling half as high again; an auxiliary supply of the field instead of a shunt one; starts
    farther apart. The load is that of the mode. Nothing of the workbook is changed.

    Parameters
    ----------
    networks : sequence of ModeNetwork
        One for each mode, in workbook order.
    cases : sequence of str
        Names of the cases.
    p_kw, q_kvar : ndarray, shape (mode, load)
        What the consumers ask for. [kW], [kvar]
    options : DipOptions
        Limits and lengths.
    progress : callable, optional
        Is told which case is being simulated.

    Returns
    -------
    tuple of Cure
        Case by case; changes that do not apply to a case are left out.
    """
    row = {at.mode.name: n for n, at in enumerate(networks)}
    found = []
    for events in cases_of(networks[0].network.plant.events) if networks else ():
        if events[0].case not in cases:
            continue
        n = row[events[0].mode]
        if progress is not None:
            progress(f"cures of {events[0].case}")
        for words, plant, changed in changes(networks[n], events):
            at = mode_network(build_network(plant), plant.mode(events[0].mode))
            simulated = simulate_case(at, changed, p_kw[n], q_kvar[n], options=options)
            if simulated.simulated:
                found.append(Cure(case=events[0].case, change=words, simulated=simulated))
    return tuple(found)


def changes(at: ModeNetwork, events: Sequence[Event]) -> Iterator[Change]:
    """Yield each change that applies to a case: in words, the plant with it, the events with it.

    Parameters
    ----------
    at : ModeNetwork
        The mode as it is.
    events : sequence of Event
        Rows of the case, by time.

    Yields
    ------
    tuple
        Words, plant, events.
    """
    plant, rows = at.network.plant, tuple(events)
    running = [g for g in plant.gensets if g.name in at.source_names]
    for genset in _more(at, running):
        mode = replace(at.mode, states={**at.mode.states, genset.name: "on"})
        yield f"{genset.name} also on line", _with_mode(plant, mode), rows
    for load, words, method in _other_starts(plant, rows):
        yield words, _with_motor(plant, load, starting_method=method), rows
    yield from _other_fields(plant, running, rows)
    starts = [e for e in rows if e.kind == "motor start"]
    if len(starts) > 1:
        yield f"starts {APART_S:g} s farther apart", plant, _apart(rows)


def _more(at: ModeNetwork, running: Sequence[Genset]) -> Iterator[Genset]:
    """Yield a main set that may join: on standby, else any; none that an interlock keeps out."""
    plant, names = at.network.plant, [g.name for g in running]
    homes = {g.board for g in running}
    islands = [i for i in at.view.islands if homes & set(i.boards)]
    pairs = interlocked_pairs(plant)
    free = [
        g
        for g in plant.gensets
        if g.name not in names
        and g.service == "main"
        and any(g.board in i.boards for i in islands)
        and may_run_together([*names, g.name], pairs)
    ]
    standby = [g for g in free if at.mode.state(g.name) == "standby"]
    yield from (standby or free)[:1]


def _other_starts(plant: Plant, events: Sequence[Event]) -> Iterator[tuple[str, str, StartingMethod]]:
    for e in events:
        load = next((x for x in plant.loads if x.name == e.equipment), None)
        if e.kind != "motor start" or load is None or load.motor is None:
            continue
        for method in METHODS:
            if method != load.motor.starting_method:
                yield load.name, f"{load.name} by {method}", method


def _other_fields(plant: Plant, running: Sequence[Genset], events: tuple[Event, ...]) -> Iterator[Change]:
    names = {g.name for g in running}
    fed = [g.excitation for g in running]
    if any(x.exciter_time_constant_s for x in fed):
        yield "exciters with half the time constant", _with_field(plant, names, _quicker), events
    regulated = [x for x in fed if x.field_supply not in ("fixed", "compounded without regulator")]
    if regulated:
        yield "ceilings half as high again", _with_field(plant, names, _higher), events
    if any(x.field_supply == "shunt" for x in fed):
        yield "fields fed by an auxiliary winding", _with_field(plant, names, _auxiliary), events


def _quicker(x: Any) -> Any:
    own = x.exciter_time_constant_s
    return replace(x, exciter_time_constant_s=own * QUICKER if own else own)


def _higher(x: Any) -> Any:
    return replace(x, ceiling=x.ceiling * HIGHER)


def _auxiliary(x: Any) -> Any:
    return replace(x, field_supply="auxiliary winding") if x.field_supply == "shunt" else x


def _with_field(plant: Plant, names: set[str], change: Callable[[Any], Any]) -> Plant:
    return replace(
        plant,
        gensets=tuple(
            replace(g, excitation=change(g.excitation)) if g.name in names else g for g in plant.gensets
        ),
    )


def _with_mode(plant: Plant, mode: Mode) -> Plant:
    return replace(plant, modes=tuple(mode if m.name == mode.name else m for m in plant.modes))


def _with_motor(plant: Plant, load: str, **changed: Any) -> Plant:
    return replace(
        plant,
        loads=tuple(
            replace(x, motor=replace(x.motor, **changed)) if x.name == load and x.motor is not None else x
            for x in plant.loads
        ),
    )


def _apart(events: tuple[Event, ...]) -> tuple[Event, ...]:
    """Return the events with every start after the first one later, in steps."""
    out, number = [], -1
    for e in events:
        number += e.kind == "motor start"
        out.append(replace(e, at_s=e.at_s + APART_S * max(number, 0)))
    return tuple(out)
