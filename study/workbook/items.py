"""The two sheets of items and values: Project and Acceptance."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from study.limits import BUILT_IN, LimitSpec
from study.model.plant import AcceptanceItem, Assumption, Project
from study.units import UNITS, conversion_factor
from study.workbook.cells import Refused, is_blank, plain, read_cell, shown
from study.workbook.columns import Bounds, Column, SheetSpec
from study.workbook.faults import Findings, place
from study.workbook.headings import (
    HeadingIndex,
    Match,
    Misfit,
    closest,
    folded,
    heading_key,
    known_unit,
    nearest,
    split_heading,
)
from study.workbook.tables import Table


def read_project(
    table: Table | None, spec: SheetSpec, found: Findings, not_read: list[str]
) -> tuple[dict[str, Any], list[Assumption], dict[str, int]]:
    """Read the items of the Project sheet.

    Returns
    -------
    values : dict
        By field; items at fault are missing.
    assumptions : list of Assumption
        Typical values that stand in for blanks.
    rows : dict
        Row number of each item by its name.
    """
    if table is None:
        return {}, [], {}
    index = HeadingIndex(SheetSpec(name=spec.name, row_is="", hint="", columns=spec.items))
    values: dict[str, Any] = {}
    rows: dict[str, int] = {}
    for number, cells in table.data_rows():
        text = plain(cells.get(table.at[None, "item"]) or "")
        match = _item(table, number, text, index, found)
        if not isinstance(match, Match):
            if match is None:
                not_read.append(f"{place(spec.name, table.key_column, number)}: item {shown(text)}")
            continue
        if match.column.name in rows:
            found.add(
                "doubled-item", spec.name, table.cell(number, "item"),
                f"{match.column.name} stands in row {rows[match.column.name]} already",
                "keep one of the rows",
            )  # fmt: skip
            continue
        rows[match.column.name] = number
        raw = cells.get(table.at.get((None, "value"), -1))
        if not is_blank(raw):
            values[match.column.field] = _value(table, number, raw, match, found)
    return values, _fill(table, spec, values, rows, found), rows


def _item(
    table: Table, number: int, text: str | None, index: HeadingIndex, found: Findings
) -> Match | Misfit | None:
    cell = table.cell(number, "item")
    if not text:
        wanted = "name the item, or clear the row"
        found.add("missing-name", table.spec.name, cell, "the row has no item", wanted)
        return Misfit(code="missing-name", found="", wanted="")
    match = index.recognise(text)
    if not isinstance(match, Misfit):
        return match
    if match.code == "missing-unit":
        # The items of the contract have no unit of their own: the number is in the unit of the item.
        wanted = heading_key(split_heading(text)[0])
        return Match(column=next(c for c in table.spec.items if heading_key(c.name) == wanted), factor=1.0)
    code = "near-miss-item" if match.code == "near-miss-heading" else match.code
    said = match.found.replace("the heading", "it")
    wanted = match.wanted.replace("heading", "item")
    found.add(code, table.spec.name, cell, f"item {shown(text)}: {said}", wanted)
    return match


def _value(table: Table, number: int, raw: Any, match: Match, found: Findings) -> Any:
    read = read_cell(raw, match)
    if isinstance(read, Refused):
        found.add(read.code, table.spec.name, table.cell(number, "value"), read.found, read.wanted)
        return None
    return read


def _fill(
    table: Table, spec: SheetSpec, values: dict[str, Any], rows: Mapping[str, int], found: Findings
) -> list[Assumption]:
    assumptions: list[Assumption] = []
    for item in spec.items:
        if item.field in values:
            continue
        number = rows.get(item.name, table.header_row)
        if item.blank == "required":
            cell = table.cell(number, "value") if item.name in rows else ""
            found.add("missing-value", spec.name, cell, f"{item.name} is not given", f"give the {item.name}")
            values[item.field] = None
        elif item.typical is not None:
            value = item.typical.of(values)
            values[item.field] = value
            assumptions.append(_assumption(table, item, value, number))
        else:
            values[item.field] = item.absent
    return assumptions


def _assumption(table: Table, item: Column, value: float | str, number: int) -> Assumption:
    return Assumption(
        equipment="Project",
        quantity=item.name,
        value=value,
        unit=item.unit,
        source=item.typical.source if item.typical else "",
        cell=place(table.spec.name, table.at.get((None, "value"), table.key_column), number),
    )


def project(values: Mapping[str, Any]) -> Project:
    """Return the title block."""
    return Project(**{name: values[name] for name in Project.__dataclass_fields__})


def read_acceptance(table: Table | None, found: Findings) -> tuple[AcceptanceItem, ...]:
    """Read the limits that the engineer wrote; what is no built-in quantity is refused."""
    if table is None:
        return ()
    known = {folded(limit.quantity): limit for limit in BUILT_IN.values()}
    items: dict[str, AcceptanceItem] = {}
    for number, cells in table.data_rows():
        limit = _quantity(table, number, cells, known, found)
        if limit is None:
            continue
        if limit.quantity in items:
            found.add(
                "doubled-item", table.spec.name, table.cell(number, "quantity"),
                f"{limit.quantity} stands in {items[limit.quantity].cell} already", "keep one of the rows",
            )  # fmt: skip
            continue
        item = _acceptance_item(table, number, cells, limit, found)
        if item is not None:
            items[limit.quantity] = item
    return tuple(items.values())


def _quantity(
    table: Table, number: int, cells: Mapping[int, Any], known: Mapping[str, LimitSpec], found: Findings
) -> LimitSpec | None:
    text = plain(cells.get(table.at[None, "quantity"]) or "") or ""
    name = split_heading(text)[0]
    limit = known.get(folded(name))
    if limit is None:
        quantities = [spec.quantity for spec in known.values()]
        near = nearest(name, quantities)
        hint = closest(near) if near else "take it off this sheet, or start it with #"
        found.add(
            "unknown-quantity", table.spec.name, table.cell(number, "quantity"),
            f"quantity {shown(text)} is not known", hint,
        )  # fmt: skip
    return limit


def _acceptance_item(
    table: Table, number: int, cells: Mapping[int, Any], limit: LimitSpec, found: Findings
) -> AcceptanceItem | None:
    raw = cells.get(table.at.get((None, "limit"), -1))
    cell = table.cell(number, "limit")
    if is_blank(raw):
        found.add(
            "missing-value", table.spec.name, cell, f"{limit.quantity} has no limit",
            "give the limit, or take the row out for the built-in one",
        )  # fmt: skip
        return None
    factor = _unit_factor(table, number, cells, limit, found)
    if factor is None:
        return None
    read = read_cell(raw, Match(column=_limit_column(limit), factor=factor))
    if isinstance(read, Refused):
        found.add(read.code, table.spec.name, cell, read.found, read.wanted)
        return None
    return AcceptanceItem(
        quantity=limit.quantity,
        limit=read,
        unit=limit.unit,
        basis=_text(table, cells, "basis"),
        cell=place(table.spec.name, table.at[None, "limit"], number),
    )


def _text(table: Table, cells: Mapping[int, Any], field: str) -> str:
    value = cells.get(table.at.get((None, field), -1))
    return "" if is_blank(value) else plain(value) or ""


def _limit_column(limit: LimitSpec) -> Column:
    if limit.choices:
        return Column(name=limit.quantity, field="limit", kind="choice", choices=limit.choices)
    unit = "" if limit.unit == "-" else limit.unit
    bounds = Bounds(low=limit.minimum, high=limit.maximum)
    return Column(name=limit.quantity, field="limit", kind="number", unit=unit, bounds=bounds)


def _unit_factor(
    table: Table, number: int, cells: Mapping[int, Any], limit: LimitSpec, found: Findings
) -> float | None:
    """Return what turns the limit as written into the built-in unit; a blank unit means that unit."""
    quantity = plain(cells.get(table.at[None, "quantity"]) or "") or ""
    written = _text(table, cells, "unit") or split_heading(quantity)[1] or ""
    if limit.choices or not written or folded(written) == folded(limit.unit or "-"):
        return 1.0
    factor = _factor_between(written, limit.unit)
    if factor is None:
        found.add(
            "wrong-unit", table.spec.name, table.cell(number, "unit"),
            f"the unit of {limit.quantity} is {shown(written)}", f"write {limit.unit or 'no unit'}",
        )  # fmt: skip
    return factor


def _factor_between(written: str, wanted: str) -> float | None:
    known = known_unit(written)
    if known is None or wanted not in UNITS or UNITS[known][0] != UNITS[wanted][0]:
        return None
    return conversion_factor(known, wanted)
