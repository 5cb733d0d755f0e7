"""A mode's network with other settings is the one that would be made anew, field by field."""

from __future__ import annotations

import dataclasses
import math
from typing import Any

import numpy as np
import pytest
from scipy.sparse import issparse

from study.model.modes import Mode
from study.model.plant import Plant
from study.network.network import ModeNetwork, build_network, mode_network, with_settings
from tests.plants import board, converter_supply, genset, load, mode, plant, set_point, shore, tie


def two_islands(**set_changes: Any) -> Plant:
    """Return two sets with a converter on one board, and a board on shore supply of another frequency."""
    return plant(
        boards=[board("A"), board("B")],
        gensets=[genset("G1", "A", **set_changes), genset("G2", "A", s_rated_kva=800.0)],
        converter_supplies=[converter_supply("PTO", "A", control="grid forming", speed_droop_pu=0.03)],
        shore_supplies=[shore("S", "B", f_hz=50.0)],
        ties=[tie("T", "A", "B")],
        loads=[load("L1", "A"), load("L2", "B", kind="heating")],
        modes=[mode(states={"T": "off"})],
    )


def same(one: Any, other: Any) -> bool:
    """Return True where two values are equal, arrays bit by bit."""
    if issparse(one):
        return bool((one != other).nnz == 0)
    if isinstance(one, np.ndarray):
        return np.array_equal(one, other, equal_nan=True)
    if isinstance(one, tuple):
        return len(one) == len(other) and all(same(a, b) for a, b in zip(one, other, strict=True))
    if dataclasses.is_dataclass(one) and not isinstance(one, Plant | Mode):
        return all(same(getattr(one, f.name), getattr(other, f.name)) for f in dataclasses.fields(one))
    if isinstance(one, float) and math.isnan(one):
        return math.isnan(other)
    return bool(one == other)


CHANGES: dict[str, tuple[dict[str, Any], dict[str, Any]]] = {
    "voltage droop": ({"voltage_droop_pu": 0.055}, {}),
    "reversed": ({"reversed_polarity": True}, {}),
    "speed droop": ({"speed_droop_pu": 0.02}, {}),
    "isochronous": ({"speed_droop_pu": 0.0}, {}),
    "no-load voltage": ({}, {"no_load_voltage_pu": 1.04}),
    "no-load frequency": ({}, {"no_load_frequency_pu": 1.01}),
    "kvar control": ({}, {"regulator_mode": "kvar control"}),
}


@pytest.mark.parametrize("name", CHANGES)
def test_other_settings_give_the_network_made_anew(name: str) -> None:
    of_set, of_mode = CHANGES[name]
    at = mode_network(build_network(two_islands()), "At sea")
    changed = two_islands(**of_set)
    points = {"G1": set_point("G1", **of_mode)} if of_mode else {}
    there = dataclasses.replace(changed.modes[0], set_points=points)
    found = with_settings(at, changed, there)
    anew = mode_network(build_network(changed), there)
    differing = [
        f.name
        for f in dataclasses.fields(ModeNetwork)
        if not same(getattr(found, f.name), getattr(anew, f.name))
    ]
    assert differing == []
    assert not same(at.sources, found.sources)
    assert len(found.view.islands) == 2
