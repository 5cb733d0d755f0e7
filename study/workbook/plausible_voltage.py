"""Rated voltages against the nominal voltage of boards; windings the wrong way round."""

from __future__ import annotations

from math import sqrt
from typing import Final

from study.workbook.tables import Row
from study.workbook.topology import BRANCH_BOARDS, Plan, boards_of

FAULT_BEYOND: Final = 0.20
WARNING_BEYOND: Final = 0.10
ONE_LEVEL: Final = 0.005

# Sheet by sheet: field of the board, field of the rated voltage.
RATED_ON: Final = {
    "Gensets": (("board", "u_rated_v"),),
    "Shore supplies": (("board", "u_rated_v"),),
    "Synchronous motors": (("board", "u_rated_v"),),
    "Filters": (("board", "u_rated_v"),),
    "Loads": (("board", "u_rated_v"),),
    "Transformers": (("from_board", "u_primary_v"), ("to_board", "u_secondary_v")),
    "Three-winding transformers": (
        ("primary_board", "u_primary_v"),
        ("secondary_board", "u_secondary_v"),
        ("tertiary_board", "u_tertiary_v"),
    ),
}


def check_voltages(plan: Plan) -> None:
    """Report rated voltages that do not fit the board, and boards joined that do not fit each other."""
    for sheet, pairs in RATED_ON.items():
        for row in plan.of(sheet):
            if sheet == "Transformers" and _is_turned(plan, row):
                continue
            for board, voltage in pairs:
                _check_rated(plan, row, board, voltage)
    for sheet in ("Cables", "Ties", "Reactors"):
        for row in plan.of(sheet):
            _check_one_level(plan, row)
    for row in plan.of("Devices"):
        _check_device(plan, row)


def nominal_v(plan: Plan, board: str | None) -> float | None:
    """Return the nominal voltage of a board [V]; None where it is not known."""
    row = plan.names.rows.get(board or "")
    return None if row is None else row.values.get("u_nominal_v")


def _check_rated(plan: Plan, row: Row, board_field: str, voltage_field: str) -> None:
    board, rated = row.values.get(board_field), row.values.get(voltage_field)
    nominal = nominal_v(plan, board)
    if nominal is None or rated is None:
        return
    apart = abs(rated / nominal - 1.0)
    if row.sheet == "Loads" and row.values.get("phases") == "1":
        apart = min(apart, abs(rated * sqrt(3.0) / nominal - 1.0))
    if apart > WARNING_BEYOND:
        plan.report(
            "wrong-voltage", row, voltage_field,
            f"{row.name} is rated {rated:.5g} V, and {board} has {nominal:.5g} V",
            "correct the rated voltage or the board",
            warning=apart <= FAULT_BEYOND,
        )  # fmt: skip


def _is_turned(plan: Plan, row: Row) -> bool:
    if not row.has("from_board", "to_board", "u_primary_v", "u_secondary_v"):
        return False
    from_v, to_v = nominal_v(plan, row.values["from_board"]), nominal_v(plan, row.values["to_board"])
    if from_v is None or to_v is None:
        return False
    primary, secondary = row.values["u_primary_v"], row.values["u_secondary_v"]
    fits = _near(primary, from_v) and _near(secondary, to_v)
    fits_turned = _near(primary, to_v) and _near(secondary, from_v)
    if fits or not fits_turned:
        return False
    plan.report(
        "turned-round", row, "from_board",
        f"{row.name} has {primary:.5g} V on {row.values['from_board']}, which has {from_v:.5g} V",
        "exchange From and To, or the two voltages",
    )  # fmt: skip
    return True


def _near(rated: float, nominal: float) -> bool:
    return abs(rated / nominal - 1.0) <= FAULT_BEYOND


def _check_one_level(plan: Plan, row: Row) -> None:
    fields = BRANCH_BOARDS[row.sheet]
    levels = [(end, nominal_v(plan, row.values.get(end))) for end in fields]
    volts = [(end, level) for end, level in levels if level is not None]
    if len(volts) == 2 and abs(volts[0][1] / volts[1][1] - 1.0) > ONE_LEVEL:
        said = (
            f"{row.name} joins {row.values[volts[0][0]]} ({volts[0][1]:.5g} V) and "
            f"{row.values[volts[1][0]]} ({volts[1][1]:.5g} V)"
        )
        plan.report("two-voltages", row, volts[1][0], said, "put a transformer between them")


def _check_device(plan: Plan, row: Row) -> None:
    rated = row.values.get("u_rated_v")
    if rated is None or not row.has("equipment"):
        return
    end = row.values.get("end")
    at = boards_of(plan, end) if end is not None else set()
    boards = at or boards_of(plan, row.values["equipment"])
    levels = [level for level in (nominal_v(plan, board) for board in boards) if level is not None]
    # Without an end the device may stand on the low side.
    if not levels or rated >= min(levels):
        return
    needed = min(levels)
    if plan.names.rows[row.values["equipment"]].values.get("phases") == "1":
        needed /= sqrt(3.0)
    plan.report(
        "device-voltage", row, "u_rated_v",
        f"{row.name} is rated {rated:.5g} V, and its board has {min(levels):.5g} V",
        "choose a device for that voltage",
        warning=rated >= (1.0 - WARNING_BEYOND) * needed,
    )  # fmt: skip
