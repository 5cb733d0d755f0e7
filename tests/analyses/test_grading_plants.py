"""Drawn plants: a good ladder is not blamed, a planted slip is found where it is and nowhere else."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from study.model.plant import Plant
from study.model.protection import Device
from tests import plants
from tests.analyses.grading_plants import breaker, failing, graded, heater

SEEDS = range(6)
LADDER_S = (0.05, 0.12, 0.22, 0.35, 0.5)


def drawn(seed: int) -> Plant:
    """Return one to three sets, boards in a tree of up to four levels, consumers on every board.

    Breakers one level nearer to the sets wait longer; every pick-up is below the least fault that the breaker
    has to clear and falls from level to level, consumers open at once.
    """
    rng = np.random.default_rng(seed)
    sets = int(rng.integers(1, 4))
    boards, parent, level = ["MSB"], {}, {"MSB": 0}
    for n in range(int(rng.integers(2, 6))):
        above = str(rng.choice([b for b in boards if level[b] < 3]))
        boards.append(f"B{n}")
        parent[f"B{n}"], level[f"B{n}"] = above, level[above] + 1
    rated = float(rng.uniform(600.0, 1200.0))
    gensets = [plants.genset(f"G{n}", "MSB", s_rated_kva=rated, p_engine_kw=rated) for n in range(sets)]
    cables = [
        plants.cable(f"CG{n}", f"G{n}", "MSB", length_m=8.0, section_mm2=300.0, runs=3) for n in range(sets)
    ]
    in_a = 1000.0 * rated / (3.0**0.5 * 450.0)
    # At once above what one set gives, 8.6 times rated current at half a cycle: the faulty set alone.
    own = {"short_time_a": 2.2 * in_a, "short_time_delay_s": LADDER_S[4], "instantaneous_a": 9.3 * in_a}
    devices = [breaker(f"QG{n}", f"CG{n}", "MSB", **own, current_tolerance=0.05) for n in range(sets)]
    for name, above in parent.items():
        length = float(rng.uniform(5.0, 20.0))
        cables.append(plants.cable(f"C{name}", above, name, length_m=length, section_mm2=240.0, runs=2))
        deep = level[name]
        settings = {"short_time_a": (1.5 - 0.2 * deep) * in_a, "short_time_delay_s": LADDER_S[4 - deep]}
        devices.append(breaker(f"Q{name}", f"C{name}", above, **settings))
    loads = []
    for board in boards:
        for k in range(int(rng.integers(1, 3))):
            name = f"H-{board}-{k}"
            loads.append(heater(name, board, float(rng.uniform(5.0, 40.0))))
            cables.append(plants.cable(f"C{name}", board, name, length_m=float(rng.uniform(5.0, 25.0))))
            devices.append(breaker(f"Q{name}", f"C{name}", board, instantaneous_a=0.5 * in_a))
    return plants.plant(
        boards=[plants.board(b, role="main" if b == "MSB" else "distribution") for b in boards],
        gensets=gensets,
        cables=cables,
        loads=loads,
        devices=devices,
    )


def changed(plant: Plant, device: str, **settings: object) -> Plant:
    """Return the plant with other settings of one device."""
    return replace(
        plant,
        devices=tuple(replace(d, **settings) if d.name == device else d for d in plant.devices),  # type: ignore[arg-type]
    )


def feeders(plant: Plant) -> list[Device]:
    """Return the breakers between boards, outermost first."""
    own = [d for d in plant.devices if d.name.startswith("QB")]
    return sorted(own, key=lambda d: d.short_time_delay_s or 0.0)


@pytest.mark.parametrize("seed", SEEDS)
def test_a_good_ladder_is_not_blamed(seed: int) -> None:
    result = graded(drawn(seed))
    assert failing(result) == {}
    assert np.isfinite(result.reach.clears_s[result.reach.present]).all()
    assert result.changes == ()


@pytest.mark.parametrize("seed", SEEDS)
def test_a_feeder_as_slow_as_its_sets_is_found(seed: int) -> None:
    plant = drawn(seed)
    slip = feeders(plant)[seed % len(feeders(plant))].name
    found = failing(graded(changed(plant, slip, short_time_delay_s=LADDER_S[4])))
    sets = {g.name for g in plant.gensets}
    assert {(slip, f"Q{name}") for name in sets} <= found.keys()
    assert all(slip in pair for pair in found)


@pytest.mark.parametrize("seed", SEEDS)
def test_a_feeder_that_opens_at_once_is_found_with_all_behind_it(seed: int) -> None:
    plant = drawn(seed)
    slip = feeders(plant)[-1].name
    found = failing(graded(changed(plant, slip, instantaneous_a=200.0, instantaneous_off=False)))
    board = slip.removeprefix("Q")
    fed = {f"Q{x.name}" for x in plant.loads if x.board == board}
    assert {(q, slip) for q in fed} <= found.keys()
    assert all(slip == upstream for _, upstream in found)


@pytest.mark.parametrize("seed", SEEDS)
def test_a_consumer_that_never_opens_is_found(seed: int) -> None:
    plant = drawn(seed)
    slip = f"Q{plant.loads[0].name}"
    result = graded(changed(plant, slip, instantaneous_a=1e6))
    assert {downstream for downstream, _ in failing(result)} == {slip}
