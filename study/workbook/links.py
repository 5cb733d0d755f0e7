"""Names and references: every name once, every reference to something that exists and fits."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from typing import Any, Final

from study.workbook.cells import shown
from study.workbook.columns import Column
from study.workbook.faults import Findings
from study.workbook.headings import closest, folded, nearest
from study.workbook.sheets import EQUIPMENT_SHEETS
from study.workbook.tables import Row

RowsBySheet = Mapping[str, Sequence[Row]]
LISTED_SHEETS: Final = ("Modes", "Curves", "Let-through", "Spectra")
# A sheet of five thousand wrong references is told in seconds, without the closest names of the last ones.
COMPARISONS: Final = 100_000
_SEPARATORS: Final = re.compile(r"[,;\n]")
# Texts that only group rows: the first spelling stands for all that differ in case and blanks.
GROUPING_FIELDS: Final = ("service", "redundancy_group", "cross_current_group", "case", "curve", "spectrum")
GROUPING_SHEETS: Final = frozenset(
    {"Boards", "Gensets", "Loads", "Events", "Curves", "Let-through", "Spectra"}
)


class Names:
    """The names of every sheet and the equipment behind them."""

    def __init__(self) -> None:
        self._by_sheet: dict[str, dict[str, str]] = {}
        self._comparisons_left = COMPARISONS
        self._near: dict[tuple[str, tuple[str, ...]], tuple[str, ...]] = {}
        self.rows: dict[str, Row] = {}

    def enter(self, sheet: str, name: str, row: Row | None = None) -> None:
        """Add a name of a sheet; of equipment, with its row."""
        self._by_sheet.setdefault(sheet, {}).setdefault(folded(name), name)
        if row is not None:
            self.rows[name] = row

    def find(self, text: str, sheets: Iterable[str]) -> str | None:
        """Return the name as its own sheet writes it, None where none of the sheets has it."""
        wanted = folded(text)
        for sheet in sheets:
            name = self._by_sheet.get(sheet, {}).get(wanted)
            if name is not None:
                return name
        return None

    def sheet_of(self, name: str) -> str:
        """Return the sheet of a piece of equipment; an empty text where there is none."""
        row = self.rows.get(name)
        return "" if row is None else row.sheet

    def near(self, text: str, sheets: Iterable[str]) -> tuple[str, ...]:
        """Return the names that look most like `text`; none once thousands of references have been wrong."""
        wanted = (folded(text), tuple(sheets))
        if wanted not in self._near:
            names = self.all(sheets)
            self._comparisons_left -= len(names)
            self._near[wanted] = nearest(text, names) if self._comparisons_left >= 0 else ()
        return self._near[wanted]

    def all(self, sheets: Iterable[str]) -> list[str]:
        """Return every name of some sheets."""
        return [name for sheet in sheets for name in self._by_sheet.get(sheet, {}).values()]


def enter_names(rows: RowsBySheet, found: Findings) -> Names:
    """Return every name; equipment that shares one is reported.

    Parameters
    ----------
    rows : mapping
        Rows of each sheet.
    found : Findings
        Takes the faults.
    """
    names = Names()
    for sheet in EQUIPMENT_SHEETS:
        for row in rows.get(sheet, ()):
            if row.name:
                _enter_equipment(names, row, found)
    for sheet in LISTED_SHEETS:
        for row in rows.get(sheet, ()):
            if row.name:
                names.enter(sheet, row.name)
    return names


def _enter_equipment(names: Names, row: Row, found: Findings) -> None:
    first = names.find(row.name, EQUIPMENT_SHEETS)
    if first is None:
        names.enter(row.sheet, row.name, row)
        return
    other = names.rows[first]
    row.broken.add("name")
    found.add(
        "doubled-name", row.sheet, row.cell("name"), f"the name {shown(row.name)} is taken",
        f"{other.place('name')} has it; give each piece of equipment its own name",
    )  # fmt: skip


def settle_spellings(rows: RowsBySheet) -> None:
    """Write every group, service and case as its first row does, so that case and blanks part no group."""
    first: dict[tuple[str, str], str] = {}
    for sheet, its_rows in rows.items():
        if sheet not in GROUPING_SHEETS:
            continue
        for row in its_rows:
            for name in GROUPING_FIELDS:
                text = row.values.get(name)
                if type(text) is str:
                    row.values[name] = first.setdefault((name, folded(text)), text)


def check_references(rows: RowsBySheet, names: Names, found: Findings) -> None:
    """Replace every reference by the exact name it means; report those that mean nothing."""
    for its_rows in rows.values():
        if not its_rows:
            continue
        columns = [c for c in its_rows[0].table.spec.columns if c.kind in {"reference", "references"}]
        for row in its_rows:
            for column in columns:
                text = row.values.get(column.field)
                if type(text) is str:
                    _settle(row, column, text, names, found)


def _settle(row: Row, column: Column, text: str, names: Names, found: Findings) -> None:
    exact = names.find(text, column.target)
    if column.kind == "reference":
        if exact is None:
            _report(row, column, text, names, found)
        else:
            row.values[column.field] = exact
        return
    parts = [exact] if exact is not None else []
    for part in [] if parts else filter(None, map(str.strip, _SEPARATORS.split(text))):
        name = names.find(part, column.target)
        if name is None:
            _report(row, column, part, names, found)
        else:
            parts.append(name)
    row.values[column.field] = tuple(dict.fromkeys(parts))


def _report(row: Row, column: Column, text: str, names: Names, found: Findings) -> None:
    row.broken.add(column.field)
    row.values.pop(column.field, None)
    other = names.find(text, EQUIPMENT_SHEETS)
    if other is None:
        _report_unknown(row, column, text, names, found)
        return
    sheet = names.sheet_of(other)
    code, wanted = "wrong-equipment", f"give a name from {', '.join(column.target)}"
    if row.sheet == "Running" and sheet == "Loads":
        code, wanted = (
            "switched-load",
            "say on the sheet Demand what runs of a load, and take it off this sheet",
        )
    said = f"{column.name} {shown(text)} is on the sheet {sheet}"
    found.add(code, row.sheet, row.cell(column.field), said, wanted)


def _report_unknown(row: Row, column: Column, text: str, names: Names, found: Findings) -> None:
    if not found.unread.isdisjoint(column.target):
        return
    known = names.all(column.target)
    near = names.near(text, column.target)
    if near:
        wanted = closest(near)
    elif known:
        wanted = f"give a name from {', '.join(column.target)}"
    else:
        wanted = f"there is none on {', '.join(column.target)} yet; add it there"
    found.add(
        "unknown-name",
        row.sheet,
        row.cell(column.field),
        f"{column.name} {shown(text)} does not exist",
        wanted,
    )


def check_unique(rows: RowsBySheet, found: Findings) -> None:
    """Report rows that describe what another row of their sheet describes already."""
    for its_rows in rows.values():
        unique = _unique_fields(its_rows)
        seen: dict[tuple[Any, ...], Row] = {}
        for row in its_rows if unique else ():
            if row.broken & set(unique):
                continue
            identity = tuple(_identity(row.values.get(name)) for name in unique)
            first = seen.setdefault(identity, row)
            if first is not row:
                row.broken.add(unique[0])
                what = ", ".join(shown(v) for v in map(row.values.get, unique) if v is not None)
                found.add(
                    "doubled-row", row.sheet, row.cell(unique[0]),
                    f"{what} stands in row {first.number} already", "keep one of the two rows",
                )  # fmt: skip


def _unique_fields(rows: Sequence[Row]) -> tuple[str, ...]:
    """Return the fields that tell rows apart; none where the heading of one is at fault."""
    if not rows:
        return ()
    table = rows[0].table
    unheaded = {
        f for f in table.spec.unique if (None, f) not in table.at and table.spec.column(f).blank == "required"
    }
    return () if unheaded else table.spec.unique


def _identity(value: Any) -> Any:
    return folded(value) if type(value) is str else value
