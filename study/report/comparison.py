"""Side by side, as text: verdicts of all modes, two modes of one study, two revisions of a workbook."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterable, Iterator, Mapping, Sequence
from functools import cache
from typing import Any

from study.checks.verdict import Verdict, worst
from study.model.modes import Mode
from study.model.plant import Plant
from study.report.content import StudyOutcome
from study.report.tables_modes import modes_table
from study.report.tables_verdicts import VESSEL, figure_text, subjects_of
from study.workbook.sheets import SHEETS

_PLACE_FIELDS = frozenset({"cell"})
_MOST_LINES = 200
# fields whose column has a longer name than the part of the model that holds them
_OWN_NAMES = {
    "RegulatorSettings": {
        "droop_pu": "voltage_droop_pu",
        "mode": "regulator_mode",
        "reversed_polarity": "polarity",
    },
    "GovernorSettings": {
        "droop_pu": "speed_droop_pu",
        "mode": "governor_mode",
        "time_constant_s": "governor_time_constant_s",
        "dead_time_s": "governor_dead_time_s",
    },
}


def verdict_summary(outcome: StudyOutcome) -> str:
    """Return the verdict of each subject in each mode, one word a cell, with a count of what exceeds.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    str
        A table of plain text.
    """
    names = [*outcome.modes, *([""] if any(not v.mode for v in outcome.verdicts) else [])]
    rows = [["", *(name or VESSEL for name in names)]]
    for subject in subjects_of(outcome):
        cells = (worst(_of(outcome, subject, name)) for name in names)
        rows.append([subject, *(v.status if v else "-" for v in cells)])
    count = {word: sum(v.status == word for v in outcome.verdicts) for word in ("exceeds", "not assessed")}
    closing = f"{count['exceeds']} values exceed their limit, {count['not assessed']} could not be assessed."
    return f"{_aligned(rows)}\n{closing}"


def modes_side_by_side(outcome: StudyOutcome, one: str, other: str) -> str:
    """Return the governing figures and verdicts of two modes side by side.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.
    one, other : str
        Names of two of its modes.

    Returns
    -------
    str
        A table of plain text.
    """
    table = modes_table(outcome)
    at = [table.column("mode").index(name) for name in (one, other)]
    rows = [["", one, other]]
    for i, column in enumerate(table.columns):
        if column.key not in ("mode", "description") and column.kind != "cell":
            texts = table.texts(i)
            rows.append([column.title, *(texts[k] or "-" for k in at)])
    for subject in subjects_of(outcome):
        pair = [worst(_of(outcome, subject, name)) for name in (one, other)]
        if any(pair):
            rows.append([subject, *(_judged(v) for v in pair)])
    return _aligned(rows)


def revisions_side_by_side(old: StudyOutcome, new: StudyOutcome) -> str:
    """Return what changed between two revisions of a workbook: inputs first, then verdicts.

    Parameters
    ----------
    old, new : StudyOutcome
        The two studies.

    Returns
    -------
    str
        One line for each change; equipment is matched by its name, verdicts by mode, equipment and quantity.
    """
    names = (
        f"{old.plant.file_name} (revision {old.plant.project.revision})",
        (f"{new.plant.file_name} (revision {new.plant.project.revision})"),
    )
    inputs = list(_input_changes(old.plant, new.plant))
    verdicts = list(_verdict_changes(old.verdicts, new.verdicts))
    lines = [f"from {names[0]} to {names[1]}", "", f"inputs changed: {len(inputs)}", *_shortened(inputs)]
    return "\n".join([*lines, "", f"verdicts changed: {len(verdicts)}", *_shortened(verdicts)])


def _shortened(lines: Sequence[str]) -> list[str]:
    if len(lines) <= _MOST_LINES:
        return [f"  {line}" for line in lines]
    return [*(f"  {line}" for line in lines[:_MOST_LINES]), f"  and {len(lines) - _MOST_LINES} more"]


def _of(outcome: StudyOutcome, subject: str, mode: str) -> tuple[Verdict, ...]:
    return tuple(v for v in outcome.verdicts if v.subject == subject and v.mode == mode)


def _judged(v: Verdict | None) -> str:
    return f"{v.status}: {v.equipment}, {figure_text(v)}" if v else "-"


def _aligned(rows: Sequence[Sequence[str]]) -> str:
    widths = [max(len(row[k]) for row in rows) for k in range(len(rows[0]))]
    return "\n".join(
        "  ".join(text.ljust(width) for text, width in zip(row, widths, strict=True)).rstrip() for row in rows
    )


def _input_changes(old: Plant, new: Plant) -> Iterator[str]:
    before, after = dict(_items(old)), dict(_items(new))
    for key in after.keys() - before.keys():
        yield f"{_words(key)}: new"
    for key in before.keys() - after.keys():
        yield f"{_words(key)}: gone"
    for key, item in after.items():
        if key in before:
            yield from (f"{_words(key)}: {text}" for text in _field_changes(before[key], item))


def _words(key: tuple[str, str]) -> str:
    return f"{key[1]} ({key[0]})" if key[1] else key[0]


def _items(plant: Plant) -> Iterator[tuple[tuple[str, str], Any]]:
    """Return every row of the plant with its kind and its name; rows without a name are numbered."""
    yield ("project", ""), plant.project
    for field in dataclasses.fields(plant):
        rows = getattr(plant, field.name)
        if not isinstance(rows, tuple) or field.name in ("assumptions", "findings", "not_read"):
            continue
        for number, row in enumerate(rows, start=1):
            name = getattr(row, "name", None) or getattr(row, "quantity", None) or f"row {number}"
            yield (field.name.replace("_", " "), str(name)), row


def _field_changes(old: Any, new: Any, prefix: str = "") -> Iterator[str]:
    if isinstance(new, Mode):
        yield from _mapping_changes(old.states, new.states, "state")
        yield from _mapping_changes(old.demand, new.demand, "demand")
        yield from _mapping_changes(old.simultaneity, new.simultaneity, "simultaneity")
        yield from _mapping_changes(old.set_points, new.set_points, "set-point")
    for field in dataclasses.fields(new):
        a, b = getattr(old, field.name), getattr(new, field.name)
        if field.name in _PLACE_FIELDS or a == b or isinstance(b, Mapping):
            continue
        if dataclasses.is_dataclass(a) and dataclasses.is_dataclass(b):
            yield from _field_changes(a, b, prefix)
        else:
            known = _OWN_NAMES.get(type(new).__name__, {}).get(field.name, field.name)
            heading, per_cent = _headings().get(known, (field.name.replace("_", " "), False))
            yield f"{prefix}{heading} {_shown(a, per_cent)} -> {_shown(b, per_cent)}"


@cache
def _headings() -> Mapping[str, tuple[str, bool]]:
    """Return the workbook's own heading of every field of the model, and whether it is in per cent."""
    return {c.field: (c.heading, c.is_percent) for spec in SHEETS for c in spec.columns}


def _shown(value: Any, per_cent: bool) -> str:
    if value is None:
        return "blank"
    if isinstance(value, float):
        return f"{value * (100.0 if per_cent else 1.0):.6g}"
    return str(value)


def _mapping_changes(old: Mapping[Any, Any], new: Mapping[Any, Any], what: str) -> Iterator[str]:
    for key in dict.fromkeys((*old, *new)):
        a, b = old.get(key), new.get(key)
        name = " / ".join(key) if isinstance(key, tuple) else key
        if dataclasses.is_dataclass(a) and dataclasses.is_dataclass(b):
            yield from (f"{what} of {name}, {text}" for text in _field_changes(a, b))
        elif a != b:
            yield f"{what} of {name} {_plain(a)} -> {_plain(b)}"


def _plain(value: Any) -> str:
    return "given" if dataclasses.is_dataclass(value) else _shown(value, False)


def _verdict_changes(old: Iterable[Verdict], new: Iterable[Verdict]) -> Iterator[str]:
    before = {(v.mode, v.subject, v.equipment, v.quantity): v for v in old}
    for v in new:
        was = before.get((v.mode, v.subject, v.equipment, v.quantity))
        if was is not None and was.status != v.status:
            yield (
                f"{v.mode or VESSEL}, {v.equipment}, {v.quantity}: {was.status} ({figure_text(was)}) -> "
                f"{v.status} ({figure_text(v)})"
            )
