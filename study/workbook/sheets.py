"""Every input sheet, in the order of the workbook: the one description that reader, blank and text share."""

from __future__ import annotations

from collections.abc import Iterator
from types import MappingProxyType
from typing import Final

from study.workbook import sheets_branches as branches
from study.workbook import sheets_loads as loads
from study.workbook import sheets_modes as modes
from study.workbook import sheets_protection as protection
from study.workbook import sheets_sources as sources
from study.workbook.columns import Column, SheetSpec

RESULT_PREFIX: Final = "R "

SHEETS: Final[tuple[SheetSpec, ...]] = (
    modes.PROJECT,
    modes.ACCEPTANCE,
    branches.BOARDS,
    sources.GENSETS,
    sources.SHORE_SUPPLIES,
    sources.CONVERTER_SUPPLIES,
    sources.SYNCHRONOUS_MOTORS,
    branches.TRANSFORMERS,
    branches.THREE_WINDING,
    branches.CABLES,
    branches.TIES,
    branches.REACTORS,
    branches.FILTERS,
    loads.LOADS,
    modes.MODES,
    modes.RUNNING,
    modes.SET_POINTS,
    modes.DEMAND,
    modes.SIMULTANEITY,
    modes.INTERLOCKS,
    modes.TRANSFERS,
    protection.DEVICES,
    protection.PROTECTION_FUNCTIONS,
    protection.SETTING_RANGES,
    protection.CURVES,
    protection.LET_THROUGH,
    protection.MAKER_DISCRIMINATION,
    loads.SPECTRA,
    modes.EVENTS,
)

BY_NAME: Final = MappingProxyType({spec.name: spec for spec in SHEETS})
SHEET_ORDER: Final = MappingProxyType({spec.name: place for place, spec in enumerate(SHEETS)})
EQUIPMENT_SHEETS: Final = tuple(spec.name for spec in SHEETS if spec.names_equipment)
SOURCE_SHEETS: Final = branches.SOURCES

BLANK_WORDS: Final = MappingProxyType(
    {
        "required": "required",
        "typical": "typical value",
        "none": "absent",
        "unknown": "unknown: what needs it is not assessed",
    }
)


def column_documentation() -> str:
    """Return the description of every sheet and column in Markdown.

    Returns
    -------
    str
        One section for each sheet with a table of its columns.
    """
    return "\n".join(line for spec in SHEETS for line in _section(spec))


def _section(spec: SheetSpec) -> Iterator[str]:
    yield f"### {spec.name}"
    yield ""
    yield f"One row is {spec.row_is}. {spec.hint}"
    yield ""
    yield "| column | holds | blank | what it is |"
    yield "|---|---|---|---|"
    for column in spec.columns:
        yield _line(column.heading, column)
    for repeated in spec.mode_columns:
        yield _line(repeated.heading("MODE"), repeated.column)
    if spec.items:
        yield ""
        yield "| item | holds | blank | what it is |"
        yield "|---|---|---|---|"
        for item in spec.items:
            yield _line(item.name, item)
    yield ""


def _line(heading: str, column: Column) -> str:
    cells = (heading, _holds(column), _blank(column), column.hint)
    return "| " + " | ".join(cell.replace("|", "\\|") for cell in cells) + " |"


def _holds(column: Column) -> str:
    words = {
        "number": column.bounds.words(column.unit),
        "integer": f"whole number, {column.bounds.words()}",
        "choice": ", ".join(column.choices),
        "yes-no": "yes, no",
        "date": "date",
        "text": "text",
        "reference": f"name from {', '.join(column.target)}",
        "references": f"names from {', '.join(column.target)}",
    }[column.kind]
    return f"{words}, or {', '.join(column.words)}" if column.words else words


def _blank(column: Column) -> str:
    words = BLANK_WORDS[column.blank]
    if column.typical is not None:
        value = column.typical.words or f"{column.typical.value} {column.unit}".strip()
        words = f"{value} ({column.typical.source})"
    if column.when:
        words += "; used where " + " and ".join(f"{f} is {' or '.join(v)}" for f, v in column.when)
    return words
