"""Every table as plain data for other programs: stable keys with unit suffixes, unrounded values."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping, Sequence
from dataclasses import asdict, replace
from functools import lru_cache
from typing import Any

from study.report.catalogue import all_tables
from study.report.content import StudyOutcome
from study.report.tables import Column, Table, Value

FORMAT = "vessel-study-results/1"


@lru_cache(maxsize=50_000, typed=True)
def _word(value: Value) -> str:
    return json.dumps(value, ensure_ascii=False)


def json_document(outcome: StudyOutcome, tables: Mapping[str, Table] | None = None) -> dict[str, Any]:
    """Return the whole study as dictionaries, lists, texts and numbers.

    NaN and infinite values become null. A table with columns for each mode has them under ``modes``, by the
    name of the mode.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.
    tables : mapping of str to Table, optional
        `all_tables` of the study, where they have been made already.

    Returns
    -------
    dict
        Ready for `json.dumps`.
    """
    tables = all_tables(outcome) if tables is None else tables
    return {
        "format": FORMAT,
        "tool_version": outcome.tool_version,
        "input": {
            "file_name": outcome.plant.file_name,
            "sha256_of_input_cells": outcome.plant.input_digest,
        },
        "project": {key: _json_value(value) for key, value in asdict(outcome.plant.project).items()},
        "modes": list(outcome.modes),
        "tables": {key: table_document(table) for key, table in tables.items()},
    }


def json_text(outcome: StudyOutcome, tables: Mapping[str, Table] | None = None) -> str:
    """Return the study as JSON text.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.
    tables : mapping of str to Table, optional
        `all_tables` of the study, where they have been made already.

    Returns
    -------
    str
        The text, the same for the same study.
    """
    tables = all_tables(outcome) if tables is None else tables
    head = json.dumps(json_document(outcome, {}), ensure_ascii=False, allow_nan=False)
    parts = ", ".join(f"{_word(key)}: {_table_text(table)}" for key, table in tables.items())
    return f"{head.removesuffix('{}}')}{{{parts}}}}}\n"


def _table_text(table: Table) -> str:
    """Return what `table_document` holds, as text: column by column, which is much quicker."""
    document = table_document(replace(table, values=tuple(() for _ in table.columns), row_styles=()))
    head = json.dumps(document, ensure_ascii=False, allow_nan=False).removesuffix("]}")
    columns = [_column_texts(c.key, v) for c, v in zip(table.columns, table.values, strict=True)]
    plain = [texts for c, texts in zip(table.columns, columns, strict=True) if not c.group]
    modes = []
    for group in table.groups:
        inside = [texts for c, texts in zip(table.columns, columns, strict=True) if c.group == group]
        modes.append([f"{_word(group)}: {{{', '.join(row)}}}" for row in zip(*inside, strict=True)])
    if modes:
        plain.append([f'"modes": {{{", ".join(row)}}}' for row in zip(*modes, strict=True)])
    if table.row_styles:
        plain.append([f'"row": {_word(style or "item")}' for style in table.row_styles])
    rows = ", ".join(f"{{{', '.join(row)}}}" for row in zip(*plain, strict=True))
    return f"{head}{rows}]}}"


def _column_texts(key: str, values: Sequence[Value]) -> list[str]:
    name = f"{_word(key)}: "
    return [
        name + (repr(v) if type(v) is float and math.isfinite(v) else _word(_json_value(v))) for v in values
    ]


def table_document(table: Table) -> dict[str, Any]:
    """Return one table.

    Parameters
    ----------
    table : Table
        The table.

    Returns
    -------
    dict
        Title, notes, columns and rows.
    """
    columns = {column.key: column for column in table.columns}
    return {
        "title": table.title,
        "notes": list(table.notes),
        "columns": [_column_document(column) for column in columns.values()],
        "rows": [_row_document(table, r, row) for r, row in enumerate(table.rows())],
    }


def _column_document(column: Column) -> dict[str, Any]:
    document: dict[str, Any] = {"key": column.key, "heading": column.heading, "unit": column.unit}
    if column.group:
        document["for_each_mode"] = True
    return document


def _row_document(table: Table, number: int, row: tuple[Value, ...]) -> dict[str, Any]:
    document: dict[str, Any] = {}
    by_mode: dict[str, dict[str, Any]] = {group: {} for group in table.groups}
    for column, value in zip(table.columns, row, strict=True):
        place = by_mode[column.group] if column.group else document
        place[column.key] = _json_value(value)
    if by_mode:
        document["modes"] = by_mode
    if table.row_styles:
        document["row"] = table.style(number) or "item"
    return document


def _json_value(value: Value) -> Value:
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value
