"""From the file to the plant: sheets found, cells checked, references settled, blanks filled, plant built."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Final, TypeVar

from study.issues import Issue, PackageError, StudyError, WorkbookError
from study.model.plant import AcceptanceItem, Assumption, Plant
from study.workbook import build_branches as branches
from study.workbook import build_loads as loads
from study.workbook import build_modes as modes
from study.workbook import build_protection as protection
from study.workbook import build_sources as sources
from study.workbook.faults import Findings, place
from study.workbook.fill import fill_rows, set_context
from study.workbook.headings import edit_distance, folded, heading_key
from study.workbook.items import project, read_acceptance, read_project
from study.workbook.links import Names, check_references, check_unique, enter_names, settle_spellings
from study.workbook.package import open_package
from study.workbook.places import CellPlaces
from study.workbook.plausible import check_plausible
from study.workbook.reader import RawBook, RawSheet, read_package
from study.workbook.sheets import BY_NAME, SHEETS
from study.workbook.tables import Row, Table, find_table, read_rows
from study.workbook.topology import Plan

ITEM_SHEETS: Final = ("Project", "Acceptance")
# A letter in five letters: Notes is not a misspelt Modes.
LETTERS_PER_SLIP: Final = 4
_Made = TypeVar("_Made")


@dataclass(slots=True, kw_only=True)
class Reading:
    """What has been read so far."""

    file_name: str
    found: Findings = field(default_factory=Findings)
    not_read: list[str] = field(default_factory=list)
    tables: dict[str, Table] = field(default_factory=dict)
    rows: dict[str, list[Row]] = field(default_factory=dict)
    project: dict[str, Any] = field(default_factory=dict)
    acceptance: tuple[AcceptanceItem, ...] = ()
    assumptions: list[Assumption] = field(default_factory=list)
    places: dict[tuple[str, str], str] = field(default_factory=dict)

    @property
    def modes(self) -> list[str]:
        """Names of the modes, each once."""
        names = {folded(row.name): row.name for row in reversed(self.rows.get("Modes", [])) if row.name}
        return list(reversed(names.values()))


def read_plant(path: Path | str) -> Plant:
    """Read a workbook.

    Parameters
    ----------
    path : path
        An .xlsx or .xlsm file.

    Returns
    -------
    Plant
        Everything that the workbook says, with typical values filled in and listed.

    Raises
    ------
    PackageError
        The file cannot be opened.
    WorkbookError
        The workbook cannot be used; the error holds every fault.
    """
    plant, issues = check_workbook(path)
    if plant is None:
        raise WorkbookError(issue for issue in issues if issue.severity == "fault")
    return plant


def check_workbook(path: Path | str) -> tuple[Plant | None, tuple[Issue, ...]]:
    """Read a workbook and return the plant, where it can be used, and everything found.

    Parameters
    ----------
    path : path
        An .xlsx or .xlsm file.

    Returns
    -------
    plant : Plant or None
        None where there is a fault.
    issues : tuple of Issue
        Faults, warnings and notes in the order of the sheets.

    Raises
    ------
    PackageError
        The file cannot be opened.
    """
    package = open_package(path)
    name = Path(path).name
    try:
        return check_raw(read_package(package, name), package.digest)
    except PackageError as error:
        raise PackageError(f"{name}: {error}") from error


def check_raw(book: RawBook, file_digest: str = "") -> tuple[Plant | None, tuple[Issue, ...]]:
    """Check raw cells and return the plant, where they can be used, and everything found."""
    reading = Reading(file_name=book.file_name)
    _read_tables(book, reading)
    names = _settle(reading)
    states, on = modes.running_states(reading.rows, names, reading.modes, reading.found)
    asked, duties = modes.demands(reading.rows, names, reading.modes, reading.found)
    reading.assumptions += on + duties
    check_plausible(Plan(rows=reading.rows, names=names, found=reading.found), reading.modes)
    if reading.found.any_fault:
        return None, reading.found.in_order()
    broken = [
        row.place(row.table.spec.key.field) for rows in reading.rows.values() for row in rows if row.broken
    ]
    if broken:
        raise StudyError(f"{broken[0]} was refused without a reason; please report this workbook")
    plant = _plant(reading, modes.build_modes(reading.rows, states, asked), file_digest)
    return plant, reading.found.in_order()


def _read_tables(book: RawBook, reading: Reading) -> None:
    raw = _recognised_sheets(book, reading)
    order = [BY_NAME["Modes"], *(spec for spec in SHEETS if spec.name != "Modes")]
    for spec in order:
        sheet = raw.get(spec.name)
        if sheet is None:
            if spec.required and spec.name not in reading.found.unread:
                _report_no_rows(reading, spec.name, f"there is no sheet {spec.name}", "add the sheet")
            continue
        table = find_table(spec, sheet.read(), reading.modes, reading.found, reading.not_read)
        if table is None:
            continue
        reading.tables[spec.name] = table
        if spec.name not in ITEM_SHEETS:
            reading.rows[spec.name] = read_rows(table, reading.found)
            if spec.required and not reading.rows[spec.name]:
                _report_no_rows(reading, spec.name, "the sheet has no rows", "fill it in")
    _read_items(reading)


def _report_no_rows(reading: Reading, sheet: str, said: str, wanted: str) -> None:
    reading.found.unread.add(sheet)
    reading.found.add("missing-sheet", sheet, "", said, wanted)


def _read_items(reading: Reading) -> None:
    spec = BY_NAME["Project"]
    table = reading.tables.get("Project")
    reading.project, assumed, rows = read_project(table, spec, reading.found, reading.not_read)
    reading.assumptions += assumed
    if table is not None:
        column = table.at.get((None, "value"), table.key_column)
        reading.places |= {("Project", item): place("Project", column, row) for item, row in rows.items()}
    reading.acceptance = read_acceptance(reading.tables.get("Acceptance"), reading.found)
    for limit in reading.acceptance:
        reading.places["Acceptance", limit.quantity] = limit.cell


def _recognised_sheets(book: RawBook, reading: Reading) -> dict[str, RawSheet]:
    known = {folded(spec.name): spec.name for spec in SHEETS}
    sheets: dict[str, RawSheet] = {}
    misspelt: set[str] = set()
    for sheet in book.sheets:
        name = known.get(folded(sheet.name))
        if name is None:
            misspelt.add(_unknown_sheet(sheet.name, reading))
        elif name in sheets:
            reading.found.add(
                "doubled-sheet", sheet.name, "", f"the sheet {name} is there twice", "keep one of the two"
            )
        else:
            sheets[name] = sheet
    reading.found.unread |= misspelt - sheets.keys()
    return sheets


def _unknown_sheet(name: str, reading: Reading) -> str:
    """Report a sheet that is nearly one of ours, and return the name of that; list any other as not read."""
    for spec in SHEETS:
        limit = min(2, len(spec.name) // LETTERS_PER_SLIP)
        if edit_distance(heading_key(name), heading_key(spec.name), limit) <= limit:
            reading.found.add(
                "near-miss-sheet", name, "", f"the sheet’s name is nearly “{spec.name}”",
                f"call it “{spec.name}”, or start its name with # if it is your own",
            )  # fmt: skip
            return spec.name
    reading.not_read.append(f"sheet “{name}”")
    return ""


def _settle(reading: Reading) -> Names:
    rows, found = reading.rows, reading.found
    names = enter_names(rows, found)
    settle_spellings(rows)
    check_references(rows, names, found)
    modes.check_services(rows, found)
    check_unique(rows, found)
    set_context(rows, names, reading.project)
    modes.check_mode_headings(reading.tables, reading.modes, found)
    for its_rows in rows.values():
        reading.assumptions += fill_rows(its_rows, found)
    return names


def _each(reading: Reading, sheet: str, build: Callable[[Row], _Made]) -> tuple[_Made, ...]:
    return tuple(build(row) for row in reading.rows.get(sheet, ()))


def _plant(reading: Reading, its_modes: tuple[Any, ...], file_digest: str) -> Plant:
    rows = reading.rows
    return Plant(
        project=project(reading.project),
        acceptance=reading.acceptance,
        boards=_each(reading, "Boards", branches.board),
        gensets=_each(reading, "Gensets", sources.genset),
        shore_supplies=_each(reading, "Shore supplies", sources.shore_supply),
        converter_supplies=_each(reading, "Converter supplies", sources.converter_supply),
        synchronous_motors=_each(reading, "Synchronous motors", sources.synchronous_motor),
        transformers=_each(reading, "Transformers", branches.transformer),
        three_winding=_each(reading, "Three-winding transformers", branches.three_winding),
        cables=_each(reading, "Cables", branches.cable),
        ties=_each(reading, "Ties", branches.tie),
        reactors=_each(reading, "Reactors", branches.reactor),
        filters=_each(reading, "Filters", branches.filter_of),
        loads=_each(reading, "Loads", loads.load),
        modes=its_modes,
        interlocks=modes.interlocks(rows.get("Interlocks", ())),
        transfers=modes.transfers(rows.get("Transfers", ())),
        devices=_each(reading, "Devices", protection.device),
        protection_functions=_each(reading, "Protection functions", protection.protection_function),
        setting_ranges=_each(reading, "Setting ranges", protection.setting_range),
        curves=_each(reading, "Curves", protection.curve_point),
        let_through=_each(reading, "Let-through", protection.let_through_point),
        maker_discrimination=_each(reading, "Maker discrimination", protection.maker_discrimination),
        spectra=_each(reading, "Spectra", loads.spectrum_line),
        events=modes.events(rows.get("Events", ())),
        assumptions=tuple(reading.assumptions),
        findings=reading.found.in_order(),
        not_read=tuple(reading.not_read),
        cells=CellPlaces(rows, reading.places),
        file_name=reading.file_name,
        input_digest=input_digest(reading.tables),
        file_digest=file_digest,
    )


def input_digest(tables: Mapping[str, Table]) -> str:
    """Return the SHA-256 over the input cells: sheet, headings and values in order, wherever they stand.

    Rows that are blank or remarks and columns that are not read do not count.
    """
    digest = hashlib.sha256()
    for spec in SHEETS:
        table = tables.get(spec.name)
        if table is None:
            continue
        lines = [spec.name, "\x1f".join(placed.text for placed in table.placed)]
        columns = [placed.column_number for placed in table.placed]
        lines += ["\x1f".join(repr(cells.get(c)) for c in columns) for _, cells in table.data_rows()]
        digest.update("\x1e".join(lines).encode())
    return digest.hexdigest()
