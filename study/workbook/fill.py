"""Blank cells: an error, a typical value that is listed, or nothing, by the class of their column."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

from study.model.plant import Assumption
from study.workbook.columns import Column
from study.workbook.faults import Findings
from study.workbook.links import Names, RowsBySheet
from study.workbook.tables import Row


def set_context(rows: RowsBySheet, names: Names, project: Mapping[str, Any]) -> None:
    """Give every row what rules for typical values look up outside it."""
    nominal = {row.name: row.values.get("u_nominal_v") for row in rows.get("Boards", ())}
    for its_rows in rows.values():
        for row in its_rows:
            row.values["f_rated_hz"] = project.get("f_rated_hz")
            row.values["project_ambient_degc"] = project.get("ambient_degc")
            board = row.values.get("board")
            if board is not None:
                row.values["board_u_nominal_v"] = nominal.get(board)
    for row in rows.get("Loads", ()):
        row.values["fed_by_converter"] = "yes" if _fed_by_converter(row) else "no"


def _fed_by_converter(row: Row) -> bool:
    values = row.values
    started_by_one = values.get("kind") == "motor" and values.get("starting_method") == "converter"
    return values.get("kind") == "converter" or started_by_one or "converter_kind" in values


def fill_rows(rows: Iterable[Row], found: Findings) -> list[Assumption]:
    """Fill the blank cells of rows of one sheet.

    Parameters
    ----------
    rows : iterable of Row
        Rows with their references settled; they are changed.
    found : Findings
        Takes required cells that are blank.

    Returns
    -------
    list of Assumption
        Every typical value that stands in for a blank.
    """
    assumptions: list[Assumption] = []
    for row in rows:
        columns = row.table.spec.columns
        ruled = []
        for column in columns:
            if column.typical is not None and column.typical.rule is not None:
                ruled.append(column)
            else:
                _fill(row, column, assumptions, found)
        _fill_ruled(row, ruled, assumptions, found)
        _check_groups(row, found)
    return assumptions


def _fill_ruled(row: Row, columns: list[Column], assumptions: list[Assumption], found: Findings) -> None:
    """Fill the blanks that follow from other cells, those that wait for one another last."""
    waiting = columns
    while waiting:
        left = [column for column in waiting if not _fill(row, column, assumptions, found)]
        if len(left) == len(waiting):
            # What the rules need is itself at fault, here or on the sheet that the row refers to.
            row.broken.update(column.field for column in left)
            return
        waiting = left


def _fill(row: Row, column: Column, assumptions: list[Assumption], found: Findings) -> bool:
    """Fill one cell; return False where a typical value has to wait for another cell."""
    values, name = row.values, column.field
    applies = not column.when or column.applies(values)
    if name in row.broken or (name in values and (applies or row.broken)):
        return True
    if name in values:
        _report_unused(row, column, found)
        del values[name]
    if column.blank == "required":
        _fill_required(row, column, applies, found)
    elif column.typical is None:
        values[name] = column.absent
    else:
        return _fill_typical(row, column, applies, assumptions, found)
    return True


def _fill_required(row: Row, column: Column, applies: bool, found: Findings) -> None:
    row.values[column.field] = None
    if not applies:
        return
    row.broken.add(column.field)
    # Where the whole heading is missing, one fault for it says more than one for each row.
    if (None, column.field) in row.table.at or column.when:
        found.add(
            "missing-value", row.sheet, row.cell(column.field),
            f"{row.name or 'the row'}: {column.name} is blank", _what(column),
        )  # fmt: skip


def _what(column: Column) -> str:
    if column.choices:
        return f"choose from {', '.join(column.choices)}"
    if column.target:
        return f"give a name from {', '.join(column.target)}"
    if column.kind in {"number", "integer"}:
        return f"give a number {column.bounds.words(column.unit)}"
    return f"give the {column.name}"


def _fill_typical(
    row: Row, column: Column, applies: bool, assumptions: list[Assumption], found: Findings
) -> bool:
    typical = column.typical
    if typical is None:
        raise ValueError(column.name)
    try:
        value = typical.of(row.values)
    except (KeyError, TypeError):
        return False
    except ValueError as error:
        row.broken.add(column.field)
        found.add(
            "no-typical-value", row.sheet, row.cell(column.field), f"{row.name}: {column.name} is blank",
            str(error),
        )  # fmt: skip
        return True
    row.values[column.field] = value
    if applies:
        source = f"{typical.words}: {typical.source}" if typical.words else typical.source
        assumptions.append(
            Assumption(
                equipment=row.name,
                quantity=column.name,
                value=value,
                unit=column.unit,
                source=source,
                cell=row.place(column.field),
            )
        )
    return True


def _report_unused(row: Row, column: Column, found: Findings) -> None:
    reason = " and ".join(
        f"{name.replace('_', ' ')} is {' or '.join(allowed)}" for name, allowed in column.when
    )
    found.add(
        "not-used", row.sheet, row.cell(column.field), f"{row.name}: {column.name} is not used here",
        f"it is used where {reason}", severity="note",
    )  # fmt: skip


def _check_groups(row: Row, found: Findings) -> None:
    for group in row.table.spec.one_of:
        if any((None, name) in row.table.misread for name in group):
            continue
        if not row.broken & set(group) and not any(row.has(name) for name in group):
            headings = [row.table.spec.column(name).heading for name in group]
            row.broken.add(group[0])
            found.add(
                "missing-value", row.sheet, row.cell(group[0]), f"{row.name}: no value in any of the columns",
                f"give {' or '.join(headings)}",
            )  # fmt: skip
