"""Workbooks of any size, the same at every call: main and distribution boards, loads with cables."""

from __future__ import annotations

import random
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from study.workbook import write_workbook

Row = dict[str, Any]

KINDS = ("motor", "motor", "motor", "heating", "lighting", "general", "converter")
SERVICES = tuple(f"Service {n}" for n in range(1, 25))
# Section [mm2] by the rated output up to which it serves [kW]; generous, so that no drop is out of reason.
SECTIONS = ((4.0, 2.5), (8.0, 4.0), (15.0, 10.0), (30.0, 25.0), (60.0, 50.0))
MAIN_BOARDS, SETS_ON_EACH = 4, 2


@dataclass(frozen=True, slots=True, kw_only=True)
class Size:
    """How much of everything the workbook holds; boards are the distribution boards."""

    loads: int
    boards: int
    modes: int = 12


SIZES = (
    Size(loads=500, boards=12),
    Size(loads=1500, boards=36),
    Size(loads=5000, boards=120),
)


def write_made(path: Path, size: Size) -> None:
    """Write the workbook of a size."""
    write_workbook(path, tables(size))


def tables(size: Size) -> dict[str, list[Row]]:
    """Return the rows of every sheet."""
    dice = random.Random(size.loads)
    modes = [f"Mode {n}" for n in range(1, size.modes + 1)]
    loads = list(_loads(size, dice))
    sets = [f"DG{n}" for n in range(1, MAIN_BOARDS * SETS_ON_EACH + 1)]
    return {
        "Project": _project(),
        "Boards": list(_boards(size)),
        "Gensets": [_genset(name, place, size) for place, name in enumerate(sets)],
        "Transformers": list(_transformers(size)),
        "Cables": [*_board_cables(size), *(_load_cable(row, dice) for row in loads)],
        "Ties": [
            {"Tie": f"BT{n}", "Board A": f"MSB {n}", "Board B": f"MSB {n + 1}", "Rated current [A]": 4000.0}
            for n in range(1, MAIN_BOARDS)
        ],
        "Loads": loads,
        "Modes": [{"Mode": mode, "Kind": "sea", "Description": "made up"} for mode in modes],
        "Running": [{"Equipment": name} | dict.fromkeys(modes, "on") for name in sets],
        "Demand": [_demand(row, modes, dice) for row in loads],
        "Simultaneity": [
            {"Service": service, "Mode": mode, "Duty": "continuous", "Simultaneity factor [%]": 80.0}
            for service in SERVICES
            for mode in modes
        ],
        "Devices": [_device(row) for row in loads],
    }


def _project() -> list[Row]:
    items = {"Vessel": "Made up", "Revision": "A", "Date": "2025-01-02", "Rated frequency": 60.0}
    return [{"Item": item, "Value": value} for item, value in items.items()]


def _is_low(number: int) -> bool:
    return number % 2 == 0


def _volts(number: int) -> float:
    return 230.0 if _is_low(number) else 690.0


def _boards(size: Size) -> Iterator[Row]:
    for n in range(1, MAIN_BOARDS + 1):
        yield {"Board": f"MSB {n}", "Nominal voltage [V]": 690.0, "Role": "main",
               "Busbar rated current [A]": 6000.0}  # fmt: skip
    for n in range(1, size.boards + 1):
        yield {"Board": f"DB {n}", "Nominal voltage [V]": _volts(n), "Role": "distribution",
               "Busbar rated current [A]": 800.0}  # fmt: skip


def _main_of(number: int) -> str:
    return f"MSB {number % MAIN_BOARDS + 1}"


def _genset(name: str, place: int, size: Size) -> Row:
    kva = 2.0 * size.loads
    return {
        "Genset": name, "Board": f"MSB {place // SETS_ON_EACH + 1}", "Rated apparent power [kVA]": kva,
        "Rated power factor": 0.8, "Rated voltage [V]": 690.0, "Engine power [kW]": 0.85 * kva,
        "Field supply": "auxiliary winding", "No-load voltage [%]": 102.0, "Voltage droop [%]": 4.0,
        "No-load frequency [%]": 102.0, "Speed droop [%]": 4.0,
    }  # fmt: skip


def _transformers(size: Size) -> Iterator[Row]:
    for n in range(1, size.boards + 1):
        if _is_low(n):
            yield {
                "Transformer": f"T {n}", "From": _main_of(n), "To": f"DB {n}", "Rated power [kVA]": 630.0,
                "Primary voltage [V]": 690.0, "Secondary voltage [V]": 230.0,
                "Short-circuit voltage [%]": 5.0, "Vector group": "Dyn11",
            }  # fmt: skip


def _board_cables(size: Size) -> Iterator[Row]:
    for n in range(1, size.boards + 1):
        if not _is_low(n):
            yield {"Cable": f"C-DB {n}", "From": _main_of(n), "To": f"DB {n}", "Runs in parallel": 4,
                   "Section [mm2]": 150.0, "Length [m]": 20.0 + n % 30}  # fmt: skip


def _loads(size: Size, dice: random.Random) -> Iterator[Row]:
    for n in range(1, size.loads + 1):
        kind, board = KINDS[n % len(KINDS)], n % size.boards + 1
        row: Row = {
            "Load": f"Consumer {n:05d}", "Board": f"DB {board}", "Description": f"made up, number {n}",
            "Service": SERVICES[n % len(SERVICES)], "Kind": kind, "Installed": 1 + n % 2,
            "Rated output [kW]": round(dice.uniform(0.5, 20.0), 1), "Rated voltage [V]": _volts(board),
            "Power factor": round(dice.uniform(0.75, 0.95), 2), "Essential to": "none",
            "Trip stage": "none",
        }  # fmt: skip
        if kind == "motor":
            row |= {"Efficiency": round(dice.uniform(0.8, 0.95), 3), "Starting method": "direct",
                    "Starting current [x In]": 6.0}  # fmt: skip
        yield row


def _load_cable(load: Row, dice: random.Random) -> Row:
    section = next(mm2 for kw, mm2 in SECTIONS if load["Rated output [kW]"] <= kw)
    return {"Cable": f"C-{load['Load']}", "From": load["Board"], "To": load["Load"], "Section [mm2]": section,
            "Length [m]": float(dice.randint(5, 40))}  # fmt: skip


def _demand(load: Row, modes: list[str], dice: random.Random) -> Row:
    row: Row = {"Load": load["Load"]}
    for mode in modes:
        if dice.random() < 0.6:
            row |= {f"{mode}: in use": 1, f"{mode}: load factor [%]": dice.randint(4, 20) * 5,
                    f"{mode}: duty": dice.choice(("continuous", "intermittent"))}  # fmt: skip
    return row


def _device(load: Row) -> Row:
    return {"Device": f"Q-{load['Load']}", "Equipment": load["Load"], "Kind": "circuit breaker",
            "Rated current [A]": 160.0, "Rated voltage [V]": 690.0, "Icu [kA]": 36.0}  # fmt: skip
