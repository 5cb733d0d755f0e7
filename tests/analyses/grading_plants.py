"""Small plants for grading, and the way from a plant to its grading."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from study.analyses.balance import load_balance
from study.analyses.grading import grading
from study.analyses.grading_options import GradingOptions
from study.analyses.load_flow import load_flow
from study.analyses.short_circuit import short_circuit
from study.analyses.short_circuit_options import ShortCircuitOptions
from study.model.plant import Plant
from study.model.protection import Device, SettingRange
from study.network.network import build_network, mode_network
from study.results.grading import EXTENTS, GradingResult
from study.results.short_circuit import ModeShortCircuit
from tests import plants


def graded(plant: Plant, *, in_turn: bool = False, **options: Any) -> GradingResult:
    """Return the grading of a plant; with `in_turn` parallel paths are followed as they open."""
    network = build_network(plant)
    networks = [mode_network(network, mode) for mode in plant.modes]
    balance = load_balance(plant, [at.view for at in networks])
    flow = load_flow(networks, balance.demand.p_counted_kw, balance.demand.q_counted_kvar)
    faults = short_circuit(network, ShortCircuitOptions(compare=False))

    def resolve(number: int, opened: tuple[str, ...]) -> ModeShortCircuit:
        states = {**plant.modes[number].states, **dict.fromkeys(opened, "off")}
        mode = replace(plant.modes[number], states=states)
        without = replace(network, plant=replace(plant, modes=(mode,)))
        return short_circuit(without, ShortCircuitOptions(compare=False)).modes[0]

    return grading(
        plant, faults, flow, balance, GradingOptions(**options), resolve=resolve if in_turn else None
    )


def breaker(name: str, equipment: str, board: str, **settings: Any) -> Device:
    """Return a breaker at a board's end, 10 % tolerances, 30 ms to break, without an instantaneous stage."""
    start = {"end": board, "breaking_time_max_s": 0.03, "opening_time_min_s": 0.01}
    if "instantaneous_a" not in settings:
        start |= {"instantaneous_off": True}
    return plants.device(name, equipment, **{**start, **settings})


def heater(name: str, board: str, kw: float = 20.0) -> Any:
    """Return a consumer that gives nothing into a fault."""
    return plants.load(name, board, "heating", p_rated_kw=kw)


def feeder_plant(
    *,
    source: Any = None,
    near: dict[str, Any] | None = None,
    above: dict[str, Any] | None = None,
    **more: Any,
) -> Plant:
    """Return a source, a board, a feeder with the breaker QF to a second board, and a heater behind QH.

    ``near`` changes QH, which opens at once above 300 A; ``above`` QF, which waits for 0.2 s above 900 A.
    """
    sources = source or {"shore_supplies": [plants.shore("Shore", "MSB")]}
    first = {"instantaneous_a": 300.0, "i_rated_a": 40.0}
    second = {"short_time_a": 900.0, "short_time_delay_s": 0.2, "i_rated_a": 400.0}
    devices = [
        breaker("QH", "CH", "DB", **(first | (near or {}))),
        breaker("QF", "CF", "MSB", **(second | (above or {}))),
        *more.pop("devices", []),
    ]
    return plants.plant(
        boards=[plants.board("MSB"), plants.board("DB", role="distribution"), *more.pop("boards", [])],
        cables=[
            plants.cable("CF", "MSB", "DB", length_m=20.0),
            plants.cable("CH", "DB", "H", length_m=15.0, section_mm2=10.0, resistance_ohm_per_km=1.83),
            *more.pop("cables", []),
        ],
        loads=[heater("H", "DB"), *more.pop("loads", [])],
        devices=devices,
        **sources,
        **more,
    )


class Pair:
    """One pair in one mode, by name."""

    def __init__(self, result: GradingResult, downstream: str, upstream: str, mode: int = 0) -> None:
        p, names = result.pairs, result.stations.names
        rows = [
            k
            for k in range(len(p.zone))
            if names[p.downstream[k]] == downstream and names[p.upstream[k]] == upstream
        ]
        assert rows, f"no pair {downstream}, {upstream}"
        self.there = bool(p.present[rows[0], mode])
        self.extent = EXTENTS[p.extent[rows[0], mode]] if self.there else ""
        self.rule = result.rules[p.rule[rows[0], mode]]
        self.level = result.levels[p.level[rows[0], mode]]
        for field in ("clears_s", "releases_s", "margin_s", "current_a", "upstream_a", "up_to_a"):
            setattr(self, field, float(getattr(p, field)[rows[0], mode]))
        for field in ("from_a", "largest_a", "current_ratio", "needed_s"):
            setattr(self, field, float(getattr(p, field)[rows[0], mode]))

    clears_s: float
    releases_s: float
    margin_s: float
    needed_s: float
    current_a: float
    upstream_a: float
    up_to_a: float
    from_a: float
    largest_a: float
    current_ratio: float


def failing(result: GradingResult) -> dict[tuple[str, str], tuple[str, ...]]:
    """Return the pairs that fail, with the modes in which they do."""
    p, names = result.pairs, result.stations.names
    bad = np.isin(p.extent, (1, 2))
    return {
        (names[p.downstream[k]], names[p.upstream[k]]): tuple(result.modes[m] for m in np.flatnonzero(bad[k]))
        for k in np.flatnonzero(bad.any(axis=1))
    }


def setting_range(device: str, setting: str, low: float, high: float, step: float | None) -> SettingRange:
    """Return a range of a setting."""
    return SettingRange(device=device, setting=setting, cell="", minimum=low, maximum=high, step=step)
