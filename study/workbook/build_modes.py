"""Modes: what runs, what is asked for, the trims and simultaneity of each; events, interlocks, transfers."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any, Final

from study.model.modes import Demand, DutyKind, Event, Interlock, Mode, SetPoint, State, Transfer
from study.model.plant import Assumption
from study.workbook.build_parts import make, model_values
from study.workbook.faults import Findings
from study.workbook.headings import closest, folded, nearest
from study.workbook.links import Names, RowsBySheet
from study.workbook.sheets import SOURCE_SHEETS
from study.workbook.tables import Row, Table

DEFAULT_DUTY: Final[DutyKind] = "continuous"


def check_mode_headings(tables: Mapping[str, Table], modes: Sequence[str], found: Findings) -> None:
    """Report modes that have no column on Running or Demand."""
    for sheet, wanted in (("Running", ("state",)), ("Demand", ("in_use", "load_factor"))):
        table = tables.get(sheet)
        for repeated in table.spec.mode_columns if table is not None else ():
            for mode in modes:
                name = repeated.column.field
                if table is None or name not in wanted or (mode, name) in table.at.keys() | table.misread:
                    continue
                heading = repeated.heading(mode)
                found.add(
                    "missing-heading", sheet, "", f"there is no heading “{heading}” for the mode {mode}",
                    f"add the column “{heading}”",
                )  # fmt: skip


def running_states(
    rows: RowsBySheet, names: Names, modes: Sequence[str], found: Findings
) -> tuple[dict[str, dict[str, State]], list[Assumption]]:
    """Return the state of each listed equipment by mode; a source needs one in every mode.

    Returns
    -------
    states : dict
        By mode, then by equipment.
    assumptions : list of Assumption
        Listed equipment whose state is blank in a mode: on.
    """
    states: dict[str, dict[str, State]] = {mode: {} for mode in modes}
    assumptions: list[Assumption] = []
    listed: set[str] = set()
    for row in rows.get("Running", ()):
        equipment = row.values.get("equipment")
        if equipment is None:
            continue
        listed.add(equipment)
        is_source = names.sheet_of(equipment) in SOURCE_SHEETS
        for mode in modes:
            state = row.modes.get(mode, {}).get("state")
            if state is not None:
                states[mode][equipment] = state
            elif (mode, "state") in row.table.at and f"{mode}: state" not in row.broken:
                if is_source:
                    _report_stateless(row, equipment, mode, found)
                else:
                    states[mode][equipment] = "on"
                    assumptions.append(_assumed_on(row, equipment, mode))
    _check_listed(rows, names, listed, found)
    return states, assumptions


def _report_stateless(row: Row, equipment: str, mode: str, found: Findings) -> None:
    found.add(
        "missing-state", row.sheet, row.cell("state", mode),
        f"{equipment} has no state in the mode {mode}", "write on, off or standby",
    )  # fmt: skip


def _assumed_on(row: Row, equipment: str, mode: str) -> Assumption:
    return Assumption(
        equipment=equipment,
        quantity=f"state in {mode}",
        value="on",
        unit="",
        source="what is not switched off is on",
        cell=row.place("state", mode),
    )


def _check_listed(rows: RowsBySheet, names: Names, listed: set[str], found: Findings) -> None:
    if "Running" in found.unread:
        return
    for name in names.all(SOURCE_SHEETS):
        if name not in listed:
            source = names.rows[name]
            found.add(
                "missing-state", source.sheet, source.cell("name"), f"{name} has no row on the sheet Running",
                "add a row with on, off or standby in every mode",
            )  # fmt: skip


def demands(
    rows: RowsBySheet, names: Names, modes: Sequence[str], found: Findings
) -> tuple[dict[str, dict[str, Demand]], list[Assumption]]:
    """Return what each load asks for by mode; a load with nothing in use is left out."""
    asked: dict[str, dict[str, Demand]] = {mode: {} for mode in modes}
    assumptions: list[Assumption] = []
    for row in rows.get("Demand", ()):
        load = row.values.get("load")
        if load is None:
            continue
        for mode in modes:
            values = row.modes.get(mode)
            if not values or not _is_asked(row, mode, values, found):
                continue
            _check_installed(row, mode, values["in_use"], names, found)
            if "duty" not in values:
                assumptions.append(_assumed_duty(row, load, mode))
            asked[mode][load] = Demand(
                in_use=values["in_use"],
                load_factor=values["load_factor"] / 100.0,
                duty=values.get("duty", DEFAULT_DUTY),
                cell=row.place("in_use", mode),
            )
    return asked, assumptions


def _is_asked(row: Row, mode: str, values: Mapping[str, Any], found: Findings) -> bool:
    """Return True where units are in use and their load factor is known; report what is left out."""
    in_use, factor = values.get("in_use"), values.get("load_factor")
    if in_use and factor is not None:
        return True
    if in_use and f"{mode}: load_factor" not in row.broken and (mode, "load_factor") in row.table.at:
        found.add(
            "missing-load-factor", row.sheet, row.cell("load_factor", mode),
            f"{row.name} has {in_use:.10g} in use in the mode {mode} and no load factor",
            "give it in per cent",
        )  # fmt: skip
    elif (
        in_use is None and factor and f"{mode}: in_use" not in row.broken and (mode, "in_use") in row.table.at
    ):
        found.add(
            "in-use-without-demand", row.sheet, row.cell("in_use", mode),
            f"{row.name} has a load factor in the mode {mode} and no units in use, so it asks for nothing",
            "write the number of units, or 0",
            severity="warning",
        )  # fmt: skip
    return False


def _check_installed(row: Row, mode: str, in_use: float, names: Names, found: Findings) -> None:
    installed = names.rows[row.name].values.get("installed")
    if installed is not None and in_use > installed:
        found.add(
            "too-many-in-use", row.sheet, row.cell("in_use", mode),
            f"{row.name} has {in_use:.10g} in use and {installed} installed", "correct one of the two",
        )  # fmt: skip


def _assumed_duty(row: Row, load: str, mode: str) -> Assumption:
    return Assumption(
        equipment=load,
        quantity=f"duty in {mode}",
        value=DEFAULT_DUTY,
        unit="",
        source="counts in full; the safe side for the balance",
        cell=row.place("duty", mode),
    )


def check_services(rows: RowsBySheet, found: Findings) -> None:
    """Report services of the sheet Simultaneity that no load has, and write the others as Loads does."""
    services = {
        folded(row.values["service"]): row.values["service"]
        for row in rows.get("Loads", ())
        if row.has("service")
    }
    for row in rows.get("Simultaneity", ()):
        service = row.values.get("service")
        if service is None:
            continue
        exact = services.get(folded(service))
        if exact is not None:
            row.values["service"] = exact
            continue
        near = nearest(service, services.values())
        row.broken.add("service")
        if "Loads" in found.unread:
            continue
        found.add(
            "unknown-service", row.sheet, row.cell("service"), f"no load has the service “{service}”",
            closest(near) if near else "write it as on the sheet Loads",
        )  # fmt: skip


def build_modes(
    rows: RowsBySheet,
    states: Mapping[str, Mapping[str, State]],
    asked: Mapping[str, Mapping[str, Demand]],
) -> tuple[Mode, ...]:
    """Return the modes."""
    trims: dict[str, dict[str, SetPoint]] = {}
    for row in rows.get("Set-points", ()):
        set_point = make(SetPoint, model_values(row))
        trims.setdefault(set_point.mode, {})[set_point.equipment] = set_point
    shares: dict[str, dict[tuple[str, DutyKind], float]] = {}
    for row in rows.get("Simultaneity", ()):
        values = model_values(row)
        shares.setdefault(values["mode"], {})[values["service"], values["duty"]] = values["factor"]
    return tuple(
        make(
            Mode,
            model_values(row),
            states=states[row.name],
            demand=asked[row.name],
            simultaneity=shares.get(row.name, {}),
            set_points=trims.get(row.name, {}),
        )
        for row in rows.get("Modes", ())
    )


def events(rows: Iterable[Row]) -> tuple[Event, ...]:
    """Return the events."""
    return tuple(make(Event, model_values(row)) for row in rows)


def interlocks(rows: Iterable[Row]) -> tuple[Interlock, ...]:
    """Return the interlocks."""
    return tuple(make(Interlock, model_values(row)) for row in rows)


def transfers(rows: Iterable[Row]) -> tuple[Transfer, ...]:
    """Return the second feeds."""
    return tuple(make(Transfer, model_values(row)) for row in rows)
