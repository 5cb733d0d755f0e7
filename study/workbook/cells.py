"""One cell checked against its column: a value in the column's own unit, or what is wrong with it."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from datetime import datetime
from math import isfinite
from typing import Any, Final

from study.workbook.columns import Column
from study.workbook.headings import Match, folded, nearest
from study.workbook.sheet_xml import ErrorValue, NoStoredValue, Percent, ResultFormula

SHOWN_LENGTH: Final = 60
_WITH_UNIT: Final = re.compile(r"[-+]?[0-9]+(\.[0-9]+)?\s*[^\s0-9.,].{0,11}")


@dataclass(frozen=True, slots=True, kw_only=True)
class Refused:
    """Why a cell cannot be read: the code, what was found, what is wanted."""

    code: str
    found: str
    wanted: str


def is_blank(value: object) -> bool:
    """Return True for an empty cell, or one that holds blanks only.

    Examples
    --------
    >>> is_blank(None), is_blank(" "), is_blank(0.0)
    (True, True, False)
    """
    return value is None or (type(value) is str and not value.strip())


def shown(value: object) -> str:
    """Return a cell's content as a message shows it.

    Examples
    --------
    >>> shown(4.0), shown("4,5"), shown(True)
    ('4', '“4,5”', 'TRUE')
    """
    if isinstance(value, bool):
        return "TRUE" if value else "FALSE"
    if isinstance(value, float):
        return f"{float(value):.15g}"
    if isinstance(value, datetime):
        return f"the date {value.date().isoformat()}"
    text = str(value)
    return f"“{text if len(text) <= SHOWN_LENGTH else text[:SHOWN_LENGTH] + '...'}”"


def read_cell(value: Any, match: Match) -> Any:
    """Return what a cell that is not blank holds, in the unit of its column, or a `Refused`.

    Parameters
    ----------
    value : object
        The raw value.
    match : Match
        Its heading.

    Returns
    -------
    object
        float, int or str by the kind of the column; `Refused` where it cannot be read.
    """
    if isinstance(value, (ErrorValue, NoStoredValue, ResultFormula)):
        return _formula_fault(value, match.column)
    return _READERS[match.column.kind](value, match)


def _formula_fault(value: str, column: Column) -> Refused:
    name = column.name
    if isinstance(value, ErrorValue):
        return Refused(
            code="error-value",
            found=f"{name} is the error {value}",
            wanted="correct the formula or its inputs",
        )
    if isinstance(value, NoStoredValue):
        return Refused(
            code="no-stored-value",
            found=f"{name} is a formula without a stored value",
            wanted="open the workbook in Excel, let it calculate, and save it",
        )
    return Refused(
        code="result-formula",
        found=f"{name} is a formula that depends on a result sheet",
        wanted="write a value, or let the formula depend on input sheets only",
    )


def _read_number(value: Any, match: Match) -> float | str | Refused:
    column = match.column
    if type(value) is float:
        number = value if match.factor == 1.0 else float(f"{value * match.factor:.15g}")
    elif column.words and type(value) is str and folded(value) in column.words:
        return folded(value)
    else:
        other = _other_number(value, match)
        if isinstance(other, Refused):
            return other
        number = other
    if not isfinite(number):
        return Refused(
            code="not-finite", found=f"{column.name} is not a finite number", wanted=_wanted(column)
        )
    if not column.bounds.hold(number):
        unit = f" {column.unit}" if column.unit else ""
        found = f"{column.name} is {number:.10g}{unit}"
        return Refused(code="out-of-range", found=found, wanted=_wanted(column))
    return number


def _wanted(column: Column) -> str:
    if column.kind not in {"number", "integer"}:
        return f"give {column.hint or 'a text'}"
    words = f"give a number {column.bounds.words(column.unit)}" if column.bounds.words() else "give a number"
    if column.bounds.words() == "any number":
        words = "give a number"
    words = f"{words}, or {' or '.join(column.words)}" if column.words else words
    return f"{words} ({column.hint})" if column.hint not in {"", column.unit} else words


def _other_number(value: Any, match: Match) -> float | Refused:
    """Return a number from something that is no plain one, or say what it is."""
    column = match.column
    if isinstance(value, Percent):
        return _percent(value, match)
    if isinstance(value, bool):
        found = f"{column.name} is {shown(value)}"
        return Refused(code="truth-for-number", found=found, wanted=_wanted(column))
    if isinstance(value, datetime):
        found = f"{column.name} is {shown(value)}, or is formatted as a date"
        return Refused(code="date-for-number", found=found, wanted=_wanted(column))
    text = str(value).strip()
    found = f"{column.name} is the text {shown(text)}"
    if _is_comma_number(text):
        return Refused(
            code="decimal-comma",
            found=found,
            wanted="type it again as a number; Excel aligns numbers to the right",
        )
    if _is_number(text):
        return Refused(
            code="text-number", found=f"{found}, not a number", wanted="convert the cell to a number in Excel"
        )
    wanted = _wanted(column)
    if _WITH_UNIT.fullmatch(text):
        wanted = "write the number alone" + (", in the unit of the heading" if column.unit else "")
    elif column.blank != "required":
        wanted = f"{wanted}, or leave the cell blank"
    return Refused(code="text-number", found=found, wanted=wanted)


def _percent(value: float, match: Match) -> float | Refused:
    """Return a number from a cell that is shown as a percentage: what is shown counts."""
    column = match.column
    if column.is_percent:
        return float(f"{value * 100.0:.15g}")
    if column.ratio or column.unit == "pu":
        return float(value)
    found = f"{column.name} is shown as {value * 100.0:.10g} %"
    return Refused(code="percent-format", found=found, wanted="format the cell as a plain number")


def _is_comma_number(text: str) -> bool:
    plain = text.replace("\u00a0", "").replace("\u202f", "").replace(" ", "").replace("'", "")
    return "," in plain and _is_number(plain.replace(".", "").replace(",", ".", 1).replace(",", ""))


def _is_number(text: str) -> bool:
    try:
        float(text.replace("\u00a0", "").replace(" ", ""))
    except ValueError:
        return False
    return True


def _read_integer(value: Any, match: Match) -> int | Refused:
    number = _read_number(value, match)
    if isinstance(number, Refused):
        return number
    whole = float(number)
    if whole != int(whole):
        found = f"{match.column.name} is {whole:.10g}"
        return Refused(code="not-whole", found=found, wanted="give a whole number")
    return int(whole)


def plain(value: Any) -> str | None:
    """Return a cell's content as text, None for a date or a truth value.

    Examples
    --------
    >>> plain(101.0), plain(" DG  1 "), plain(True)
    ('101', 'DG 1', None)
    """
    if isinstance(value, (bool, datetime)):
        return None
    if isinstance(value, float):
        return f"{float(value):.15g}"
    return " ".join(str(value).split())


def _read_text(value: Any, match: Match) -> str | Refused:
    text = plain(value)
    if text is None:
        return Refused(
            code="not-a-name",
            found=f"{match.column.name} is {shown(value)}",
            wanted="type it as text, with an apostrophe in front where Excel changes it",
        )
    if match.column.pattern and re.fullmatch(match.column.pattern, text) is None:
        found = f"{match.column.name} is {shown(value)}"
        return Refused(code="unknown-choice", found=found, wanted=f"write it {match.column.hint}")
    return text


def _read_choice(value: Any, match: Match) -> str | Refused:
    column = match.column
    text = plain(value) or shown(value)
    for choice in column.choices:
        if folded(choice) == folded(text):
            return choice
    near = nearest(text, column.choices, 1)
    hint = f"; did you mean {near[0]}?" if near else ""
    return Refused(
        code="unknown-choice",
        found=f"{column.name} is {shown(value)}",
        wanted=f"choose from {', '.join(column.choices)}{hint}",
    )


_YES_NO: Final[Mapping[str, str]] = {"yes": "yes", "no": "no", "true": "yes", "false": "no"}


def _read_yes_no(value: Any, match: Match) -> str | Refused:
    answer = _YES_NO.get(shown(value).strip("“”").strip().casefold())
    if answer is None:
        found = f"{match.column.name} is {shown(value)}"
        return Refused(code="unknown-choice", found=found, wanted="write yes or no")
    return answer


def _read_date(value: Any, match: Match) -> str | Refused:
    if isinstance(value, datetime):
        return value.date().isoformat()
    try:
        return datetime.strptime(str(value).strip(), "%Y-%m-%d").date().isoformat()
    except ValueError:
        return Refused(
            code="not-a-date",
            found=f"{match.column.name} is {shown(value)}",
            wanted="write it as year-month-day, for example 2025-03-14, or as an Excel date",
        )


_READERS: Final[Mapping[str, Callable[[Any, Match], Any]]] = {
    "number": _read_number,
    "integer": _read_integer,
    "text": _read_text,
    "choice": _read_choice,
    "yes-no": _read_yes_no,
    "date": _read_date,
    "reference": _read_text,
    "references": _read_text,
}
