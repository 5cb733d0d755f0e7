"""Modes, interlocks and events that cannot be."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Final

from study.workbook.sheets import SOURCE_SHEETS
from study.workbook.tables import Row
from study.workbook.topology import Plan

SETS: Final = ("Gensets",)
TRANSFORMERS: Final = ("Transformers", "Three-winding transformers")
# What an event can happen to; a kind that is not named here can happen to anything.
EVENT_SHEETS: Final = {
    "motor start": ("Loads", "Synchronous motors"),
    "load step": ("Loads", "Boards"),
    "set trip": SOURCE_SHEETS,
    "load rejection": (*SOURCE_SHEETS, "Boards", "Loads"),
    "set-point step": (*SETS, "Converter supplies"),
    "droop changed": (*SETS, "Converter supplies"),
    "field loss": (*SETS, "Synchronous motors"),
    "build-up": SETS,
    "transformer energising": TRANSFORMERS,
    "maladjustment": (*SETS, "Converter supplies"),
}
SIZED_EVENTS: Final = ("load step", "set-point step", "droop changed", "maladjustment")


def known_modes(plan: Plan, modes: Sequence[str]) -> list[str]:
    """Return the modes that have a column on the sheet Running; all, where the sheet has no rows."""
    tables = [row.table for row in plan.of("Running")][:1]
    return [mode for mode in modes if all((mode, "state") in table.at for table in tables)]


def check_modes(plan: Plan, modes: Sequence[str]) -> None:
    """Report modes in which nothing feeds the plant."""
    rows = [row for row in plan.of("Running") if plan.names.sheet_of(row.name) in SOURCE_SHEETS]
    # A source that is not listed or not read is a fault of its own, and may be the one that is on.
    if not plan.found.unread.isdisjoint(SOURCE_SHEETS):
        return
    if len({row.name for row in rows}) < len(plan.names.all(SOURCE_SHEETS)):
        return
    for mode in modes:
        states = [row.modes.get(mode, {}).get("state") for row in rows]
        if states and None not in states and "on" not in states:
            row = next(row for row in plan.of("Modes") if row.name == mode)
            said = f"no set and no supply is on in the mode {mode}"
            plan.report("no-source-on", row, "name", said, "check the sheet Running", warning=True)


def check_interlocks(plan: Plan, modes: Sequence[str]) -> None:
    """Report interlocked equipment that the sheet Running has on at the same time."""
    running = {row.name: row for row in plan.of("Running")}
    for row in plan.of("Interlocks"):
        if not row.has("equipment_a", "equipment_b", "kind"):
            continue
        pair = (row.values["equipment_a"], row.values["equipment_b"])
        if pair[0] == pair[1]:
            continue
        for mode in modes:
            if all(_is_on(plan, name, running.get(name), mode) for name in pair):
                listed = next((running[name] for name in pair if name in running), row)
                plan.found.add(
                    "interlocked", listed.sheet, listed.cell("state", mode),
                    f"{pair[0]} and {pair[1]} are both on in the mode {mode}, and {row.name} forbids it",
                    "switch one of them off",
                    severity="fault" if row.values["kind"] == "never both closed" else "warning",
                )  # fmt: skip


def _is_on(plan: Plan, name: str, row: Row | None, mode: str) -> bool:
    # What is not listed is on, but for sources: these need a state.
    usual = "" if plan.names.sheet_of(name) in SOURCE_SHEETS else "on"
    return (usual if row is None else row.modes.get(mode, {}).get("state", usual)) == "on"


def check_events(plan: Plan) -> None:
    """Report events that cannot happen to their equipment, or that need a size."""
    for row in plan.of("Events"):
        if not row.has("kind", "equipment"):
            continue
        kind, equipment = row.values["kind"], row.values["equipment"]
        sheet = plan.names.sheet_of(equipment)
        allowed = EVENT_SHEETS.get(kind)
        if allowed is not None and sheet not in allowed:
            said = f"a {kind} cannot happen to {equipment}, which is on the sheet {sheet}"
            plan.report("wrong-event", row, "equipment", said, f"name something from {', '.join(allowed)}")
        elif kind == "motor start" and _is_no_motor(plan, equipment):
            said = f"a motor start cannot happen to {equipment}, which is no motor"
            plan.report("wrong-event", row, "equipment", said, "name a load of the kind motor")
        _check_size(plan, row, kind)


def _is_no_motor(plan: Plan, equipment: str) -> bool:
    row = plan.names.rows[equipment]
    return row.sheet == "Loads" and row.values.get("kind") not in {"motor", None}


def _check_size(plan: Plan, row: Row, kind: str) -> None:
    if row.broken & {"size", "unit"}:
        return
    if kind in SIZED_EVENTS and not row.has("size"):
        said = f"a {kind} needs a size"
        plan.report("missing-size", row, "size", said, "give the size and its unit")
    elif row.has("size") and not row.has("unit"):
        plan.report(
            "missing-size", row, "unit", "the size has no unit", "write the unit, for example kW or %"
        )
