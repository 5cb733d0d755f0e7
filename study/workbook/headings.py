"""Headings: names compared as an engineer compares them, units converted, near misses caught."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from types import MappingProxyType
from typing import Final

from study.units import UNITS, conversion_factor
from study.workbook.columns import Column, ModeColumn, SheetSpec

REMARK: Final = "#"
NEAR: Final = 2
SHORT: Final = 3
_PRIMES = str.maketrans(
    {
        "’": "'",
        "‘": "'",
        "′": "'",
        "´": "'",
        "`": "'",
        "ʹ": "'",
        "″": "''",
        "”": "''",
        "“": "''",
        '"': "''",
        "ʺ": "''",
    }
)
_BRACKETS = re.compile(r"^(?P<name>.*?)\s*\[(?P<unit>[^\[\]]*)\]\s*$", re.DOTALL)
_PERCENT_OF = {"% U": "%"}


def folded(text: str) -> str:
    """Return a name as it is compared: without case, outer and doubled blanks.

    Examples
    --------
    >>> folded("  DG 1 ") == folded("dg  1")
    True
    """
    return " ".join(text.split()).casefold()


@lru_cache(maxsize=8192)
def heading_key(text: str) -> str:
    """Return a heading's name as it is compared: without case, blanks, line breaks and kind of prime mark.

    Examples
    --------
    >>> heading_key("Xd″  saturated") == heading_key("xd'' Saturated")
    True
    """
    return "".join(text.translate(_PRIMES).split()).casefold()


def split_heading(text: str) -> tuple[str, str | None]:
    """Return name and unit of a heading; None where it has no brackets.

    Examples
    --------
    >>> split_heading("Rated power [kVA]")
    ('Rated power', 'kVA')
    >>> split_heading("Board")
    ('Board', None)
    """
    match = _BRACKETS.match(text)
    if match is None:
        return text.strip(), None
    return match["name"].strip(), match["unit"].strip()


def edit_distance(a: str, b: str, limit: int) -> int:
    """Return the number of slips between two texts, at most `limit` + 1.

    A slip is a letter too many, one too few, another letter, or two neighbours exchanged.

    Source: F. J. Damerau, Communications of the ACM 7 (1964) 171; V. I. Levenshtein, Soviet Physics Doklady
    10 (1966) 707; by the usual row-wise recurrence, in which no letter is touched twice.

    Examples
    --------
    >>> edit_distance("kitten", "sitting", 5)
    3
    >>> edit_distance("kitten", "sitting", 1), edit_distance("End", "Edn", 2)
    (2, 1)
    """
    if abs(len(a) - len(b)) > limit:
        return limit + 1
    before, row = [0] * (len(b) + 1), list(range(len(b) + 1))
    for i, left in enumerate(a, 1):
        before, above, row = row, before, [i] + [0] * len(b)
        for j, right in enumerate(b, 1):
            row[j] = min(before[j] + 1, row[j - 1] + 1, before[j - 1] + (left != right))
            if i > 1 and j > 1 and left == b[j - 2] and a[i - 2] == right:
                row[j] = min(row[j], above[j - 2] + 1)
        if min(row) > limit and min(before) > limit:
            return limit + 1
    return min(row[-1], limit + 1)


def nearest(text: str, names: Iterable[str], count: int = 3) -> tuple[str, ...]:
    """Return the names that look most like `text`, best first, none that look nothing like it.

    Examples
    --------
    >>> nearest("MSB-1", ["MSB 1", "MSB 2", "ESB"])
    ('MSB 1', 'MSB 2')
    """
    wanted = heading_key(text)
    limit = max(min(NEAR, len(wanted) // 2), len(wanted) // 3)
    scored = sorted((edit_distance(wanted, heading_key(name), limit), name) for name in names)
    # Where one is much like it, those that are less so only distract.
    limit = min(limit, scored[0][0] + 1) if scored else limit
    return tuple(name for distance, name in scored if distance <= limit)[:count]


def closest(names: Sequence[str]) -> str:
    """Return a sentence's end that offers names.

    Examples
    --------
    >>> closest(["MSB 1"]), closest(["MSB 1", "MSB 2"])
    ('the closest name is MSB 1', 'closest names are MSB 1, MSB 2')
    """
    return f"the closest name is {names[0]}" if len(names) == 1 else f"closest names are {', '.join(names)}"


@lru_cache(maxsize=512)
def known_unit(text: str) -> str | None:
    """Return the unit of the table that `text` means, None where there is none.

    Case is forgiven except where it tells mega from milli.

    Examples
    --------
    >>> known_unit("kva"), known_unit("mm²"), known_unit("mw"), known_unit("furlong")
    ('kVA', 'mm2', None, None)
    """
    plain = _plain_unit(text)
    if plain in _EXACT:
        return _EXACT[plain]
    candidates = {
        unit for unit in _FOLDED.get(plain.casefold(), ()) if plain[:1] not in "mM" or unit[:1] == plain[:1]
    }
    return candidates.pop() if len(candidates) == 1 else None


def _plain_unit(text: str) -> str:
    plain = unicodedata.normalize("NFKC", text).replace("×", "x").replace("·", " ").replace("º", "°")
    return " ".join(plain.split())


def _unit_tables() -> tuple[Mapping[str, str], Mapping[str, tuple[str, ...]]]:
    exact: dict[str, str] = {}
    for unit in UNITS:
        exact.setdefault(_plain_unit(unit), unit)
    by_fold: dict[str, list[str]] = {}
    for plain, unit in exact.items():
        by_fold.setdefault(plain.casefold(), []).append(unit)
    return exact, {fold: tuple(units) for fold, units in by_fold.items()}


_EXACT, _FOLDED = _unit_tables()
_UNIT_KEYS: Final = frozenset(heading_key(unit) for unit in (*UNITS, *_PERCENT_OF))


@dataclass(frozen=True, slots=True, kw_only=True)
class Match:
    """A heading that is known; a cell's number times `factor` is in the unit of the column."""

    column: Column
    factor: float
    mode: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Misfit:
    """A heading that cannot be read: what is wrong and what is wanted.

    ``meant`` holds the mode (None for a plain column) and field of each column that it may stand for.
    """

    code: str
    found: str
    wanted: str
    meant: tuple[tuple[str | None, str], ...] = ()


class HeadingIndex:
    """The known headings of one sheet.

    Parameters
    ----------
    spec : SheetSpec
        The sheet.
    modes : iterable of str
        Names of the modes, for sheets with a column for each.
    """

    def __init__(self, spec: SheetSpec, modes: Iterable[str] = ()) -> None:
        self._columns: dict[str, list[Column]] = {}
        self._modes: dict[str, tuple[str, ModeColumn]] = {}
        self._shown: dict[str, str] = {}
        self._numbers: list[str] = []
        for column in spec.columns:
            for name in (column.name, *column.older):
                self._columns.setdefault(heading_key(name), []).append(column)
                self._shown.setdefault(heading_key(name), column.heading)
                if column.kind == "number":
                    self._numbers.append(heading_key(name))
        for mode in modes:
            for repeated in spec.mode_columns:
                name = f"{mode}: {repeated.suffix}" if repeated.suffix else mode
                self._modes[heading_key(name)] = (mode, repeated)
                self._shown.setdefault(heading_key(name), repeated.heading(mode))
                if repeated.column.kind == "number":
                    self._numbers.append(heading_key(name))

    def recognise(self, text: str) -> Match | Misfit | None:
        """Return what a heading means; None where it is the engineer's own."""
        whole = self._modes.get(heading_key(text))
        if whole is not None and not whole[1].column.unit:
            return Match(column=whole[1].column, factor=1.0, mode=whole[0])
        name, unit = split_heading(text)
        found = heading_key(name)
        if found in self._modes:
            return _of_mode(*self._modes[found], unit)
        if found in self._columns:
            return _by_unit(self._columns[found], unit)
        return self._unbracketed(name) or self._near(found, unit)

    def _near(self, found: str, unit: str | None) -> Misfit | None:
        distances = {known: edit_distance(found, known, _most_slips(known)) for known in self._shown}
        near = [known for known, distance in distances.items() if distance <= _most_slips(known)]
        if not near:
            return None
        known = min(near, key=distances.__getitem__)
        shown = self._heading(known, unit)
        return Misfit(
            code="near-miss-heading",
            found=f"the heading is nearly “{shown}”",
            wanted=f"write “{shown}”, or start the heading with {REMARK} if it is your own remark",
            meant=self._meant(known),
        )

    def _heading(self, known: str, unit: str | None) -> str:
        """Return a heading as the sheet writes it; of two with one name, that with the unit."""
        for column in self._columns.get(known, ()):
            if unit is not None and not isinstance(unit_factor(column, unit), Misfit):
                return column.heading
        return self._shown[known]

    def _meant(self, known: str) -> tuple[tuple[str | None, str], ...]:
        if known in self._modes:
            mode, repeated = self._modes[known]
            return ((mode, repeated.column.field),)
        return tuple((None, column.field) for column in self._columns[known])

    def _unbracketed(self, name: str) -> Misfit | None:
        for known in self._numbers:
            rest = heading_key(name).removeprefix(known)
            if rest != heading_key(name) and rest.strip("(),.-/") in _UNIT_KEYS:
                return Misfit(
                    code="unit-without-brackets",
                    found="the unit is not in square brackets",
                    wanted=f"write “{self._shown[known]}”",
                    meant=self._meant(known),
                )
        return None


def _most_slips(known: str) -> int:
    # Two letters apart says nothing about a name of three: Tag is no misspelt Td'.
    return NEAR if len(known) > SHORT else 1


def _of_mode(mode: str, repeated: ModeColumn, unit: str | None) -> Match | Misfit:
    factor = unit_factor(repeated.column, unit)
    if not isinstance(factor, Misfit):
        return Match(column=repeated.column, factor=factor, mode=mode)
    wanted = factor.wanted.replace(f"“{repeated.column.heading}”", f"“{repeated.heading(mode)}”")
    return replace(factor, wanted=wanted, meant=((mode, repeated.column.field),))


def _by_unit(columns: list[Column], unit: str | None) -> Match | Misfit:
    misfits: list[Misfit] = []
    for column in columns:
        factor = unit_factor(column, unit)
        if not isinstance(factor, Misfit):
            return Match(column=column, factor=factor)
        misfits.append(factor)
    meant = tuple((None, column.field) for column in columns)
    if len(misfits) == 1:
        return replace(misfits[0], meant=meant)
    wanted = " or ".join(f"“{column.heading}”" for column in columns)
    return Misfit(code=misfits[0].code, found=misfits[0].found, wanted=f"write {wanted}", meant=meant)


def unit_factor(column: Column, unit: str | None) -> float | Misfit:
    """Return what a number under a heading with `unit` is multiplied by, or why it cannot be.

    Examples
    --------
    >>> power = Column(name="Rated power", unit="kVA", field="s_rated_kva", kind="number")
    >>> unit_factor(power, "MVA")
    1000.0
    """
    if unit is None or unit in {"", "-"}:
        return _without_unit(column)
    if _plain_unit(unit) == _plain_unit(column.unit):
        return 1.0
    if not column.unit and not column.ratio:
        plain = f"write “{column.name}”"
        return Misfit(code="wrong-unit", found=f"the heading has the unit [{unit}]", wanted=plain)
    return _converted(column, unit)


def _without_unit(column: Column) -> float | Misfit:
    if not column.unit:
        return 1.0
    return Misfit(code="missing-unit", found="the heading has no unit", wanted=f"write “{column.heading}”")


def _converted(column: Column, unit: str) -> float | Misfit:
    known = known_unit(unit)
    if known is None:
        return Misfit(code="unknown-unit", found=f"the unit [{unit}] is not known", wanted=_accepted(column))
    try:
        return conversion_factor(known, _PERCENT_OF.get(column.unit, column.unit) or "pu")
    except ValueError:
        return Misfit(code="wrong-unit", found=f"the unit [{unit}] does not fit", wanted=_accepted(column))


def _accepted(column: Column) -> str:
    wanted = _PERCENT_OF.get(column.unit, column.unit) or "pu"
    if wanted not in UNITS:
        return f"write “{column.heading}”"
    dimension = UNITS[wanted][0]
    units = [f"[{unit}]" for unit, (its_dimension, _) in UNITS.items() if its_dimension == dimension]
    return f"write “{column.heading}”; known units are {', '.join(units)}"


MISFIT_CODES: Final = MappingProxyType(
    {
        "near-miss-heading": "a heading is one or two letters away from a known one",
        "unit-without-brackets": "the unit of a heading stands without square brackets",
        "missing-unit": "a heading has no unit and needs one",
        "wrong-unit": "the unit of a heading measures something else",
        "unknown-unit": "the unit of a heading is not known",
    }
)
