"""How a column and a sheet of the workbook are described.

One description serves the reader, the blank workbook and the documentation of the columns.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any, Literal

Kind = Literal["number", "integer", "text", "choice", "yes-no", "date", "reference", "references"]
Blank = Literal["required", "typical", "none", "unknown"]

GIVEN: tuple[str, ...] = ("given",)
"""Stands for any value in the condition of a column."""

Values = Mapping[str, Any]
"""One row by field name; numbers are in the unit of the column's own heading."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Bounds:
    """The range that a number may lie in.

    None leaves a side open, ``open`` excludes the end itself, ``or_zero`` takes 0 as well.
    """

    low: float | None = None
    high: float | None = None
    low_open: bool = False
    high_open: bool = False
    or_zero: bool = False

    def hold(self, value: float) -> bool:
        """Return True where `value` lies inside.

        Examples
        --------
        >>> Bounds(low=0.0, low_open=True).hold(0.0)
        False
        >>> Bounds(low=0.0, high=1.0).hold(1.0)
        True
        """
        if self.or_zero and value == 0.0:
            return True
        low_holds = self.low is None or value > self.low or (value == self.low and not self.low_open)
        high_holds = self.high is None or value < self.high or (value == self.high and not self.high_open)
        return low_holds and high_holds

    def words(self, unit: str = "") -> str:
        """Return the range in words.

        Examples
        --------
        >>> Bounds(low=0.0, low_open=True).words("m")
        'above 0 m'
        >>> Bounds(low=0.0, high=100.0).words("%")
        'from 0 to 100 %'
        """
        tail = f" {unit}" if unit else ""
        low = "" if self.low is None else f"{self.low:.10g}"
        high = "" if self.high is None else f"{self.high:.10g}"
        if low and high:
            start = "above" if self.low_open else "from"
            end = "and below" if self.high_open else ("and up to" if self.low_open else "to")
            return f"{start} {low} {end} {high}{tail}"
        if low:
            return f"above {low}{tail}" if self.low_open else f"{low}{tail} or more"
        if high:
            return f"below {high}{tail}" if self.high_open else f"{high}{tail} or less"
        return "any number"


ANY = Bounds()
AMPERES = Bounds(low=0.0, high=100_000.0, low_open=True)
KILOAMPERES = Bounds(low=0.0, high=1_000.0, low_open=True)
"""No short-circuit current is larger; what is, was typed in ampere."""
KILOWATTS = Bounds(low=0.0, high=200_000.0, low_open=True)
LARGE = Bounds(low=0.0, high=1_000_000.0, low_open=True)
"""For quantities without a natural end: keeps out what can only be a slip."""
POWER_FACTOR = Bounds(low=0.0, high=1.0, low_open=True)


def between(low: float, high: float) -> Bounds:
    """Return the range from `low` to `high`, both ends included."""
    return Bounds(low=low, high=high)


def above(low: float, high: float | None = None) -> Bounds:
    """Return the range above `low` (excluded), up to `high` (included) where there is one."""
    return Bounds(low=low, high=high, low_open=True)


@dataclass(frozen=True, slots=True, kw_only=True)
class Typical:
    """What stands in for a blank cell: a fixed value, or a rule over the other cells of the row.

    Attributes
    ----------
    value : float or str or None
        In the unit of the heading; None where `rule` gives it.
    source : str
        Where the value comes from, shown with every assumption.
    rule : callable or None
        Takes the row, returns the value in the unit of the heading.
    words : str
        The rule in words.
    """

    source: str
    value: float | str | None = None
    rule: Callable[[Values], float | str] | None = None
    words: str = ""

    def of(self, values: Values) -> float | str:
        """Return the typical value for one row."""
        if self.rule is not None:
            return self.rule(values)
        if self.value is None:
            raise ValueError("a typical value needs a number or a rule")
        return self.value


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column of an input sheet.

    Attributes
    ----------
    name, unit : str
        The heading is ``name [unit]``; an empty unit means a heading without brackets.
    field : str
        Name of the value in a row, equal to the model's attribute where there is one.
    kind : str
        What the cells hold.
    blank : str
        Class of a blank cell: an error (required), a typical value, an absent feature (none),
        or something that nothing may stand in for (unknown).
    bounds, usual : Bounds
        Outside `bounds` is a fault, outside `usual` a warning.
    choices, words : tuple of str
        The closed list of a choice; `words` are the few texts that a number column takes as well.
    target : tuple of str
        Sheets whose names a reference may give.
    typical : Typical or None
        For the class ``typical``.
    absent : object
        The value of a blank cell of the class ``none`` or ``unknown``.
    when : tuple of (field, values)
        The column is used only in rows where each named field holds one of the values.
    hint : str
        One line for the engineer, with the base of the number.
    older : tuple of str
        Other forms of the name that are still taken.
    ratio : bool
        A plain number from 0 to about 1, whose heading may also carry ``[%]`` or ``[pu]``.
    pattern : str
        Regular expression that a text must match as a whole; the hint says it in words.
    """

    name: str
    field: str
    kind: Kind
    unit: str = ""
    blank: Blank = "none"
    bounds: Bounds = ANY
    usual: Bounds | None = None
    choices: tuple[str, ...] = ()
    words: tuple[str, ...] = ()
    target: tuple[str, ...] = ()
    typical: Typical | None = None
    absent: object = None
    when: tuple[tuple[str, tuple[str, ...]], ...] = ()
    hint: str = ""
    older: tuple[str, ...] = ()
    ratio: bool = False
    pattern: str = ""

    @property
    def heading(self) -> str:
        """The heading as the blank workbook writes it."""
        return f"{self.name} [{self.unit}]" if self.unit else self.name

    @property
    def is_percent(self) -> bool:
        """True where the heading's unit is per cent, so that the model holds a hundredth of the number."""
        return self.unit in {"%", "% U"}

    def applies(self, values: Values) -> bool:
        """Return True where the column is used in this row."""
        return all(
            values.get(field) is not None if allowed is GIVEN else values.get(field) in allowed
            for field, allowed in self.when
        )

    def to_model(self, value: Any) -> Any:
        """Return the value in the model's unit: per cent become plain fractions.

        Examples
        --------
        >>> Column(name="Voltage droop", unit="%", field="droop_pu", kind="number").to_model(4.0)
        0.04
        """
        return value / 100.0 if self.is_percent and isinstance(value, (int, float)) else value


@dataclass(frozen=True, slots=True, kw_only=True)
class ModeColumn:
    """A column that is repeated for each mode; ``suffix`` follows the mode's name and a colon."""

    suffix: str
    column: Column

    def heading(self, mode: str) -> str:
        """Return the heading for one mode.

        Examples
        --------
        >>> load = Column(name="load factor", unit="%", field="load_factor", kind="number")
        >>> ModeColumn(suffix="load factor", column=load).heading("At sea")
        'At sea: load factor [%]'
        """
        name = f"{mode}: {self.suffix}" if self.suffix else mode
        return f"{name} [{self.column.unit}]" if self.column.unit else name


@dataclass(frozen=True, slots=True, kw_only=True)
class SheetSpec:
    """One input sheet.

    Attributes
    ----------
    name : str
        Name of the sheet.
    row_is : str
        What one row describes.
    hint : str
        The line under the title.
    columns : tuple of Column
        The first one is the key.
    mode_columns : tuple of ModeColumn
        Columns that are repeated for each mode.
    items : tuple of Column
        For sheets of items and values: what each item's value must be.
    required : bool
        The workbook cannot be used without it.
    unique : tuple of str
        Fields that together may occur once.
    names_equipment : bool
        The key is a name of equipment, unique over all sheets.
    one_of : tuple of tuple of str
        In each group of fields at least one must be given.
    """

    name: str
    row_is: str
    hint: str
    columns: tuple[Column, ...]
    mode_columns: tuple[ModeColumn, ...] = ()
    items: tuple[Column, ...] = ()
    required: bool = False
    unique: tuple[str, ...] = ()
    names_equipment: bool = False
    one_of: tuple[tuple[str, ...], ...] = ()

    @property
    def key(self) -> Column:
        """The column whose heading marks the header row."""
        return self.columns[0]

    def column(self, field: str) -> Column:
        """Return the column that fills `field`; raises KeyError where there is none."""
        for column in self.columns:
            if column.field == field:
                return column
        raise KeyError(field)


def key(name: str, hint: str) -> Column:
    """Return the column of an equipment's own name."""
    return Column(name=name, field="name", kind="text", blank="required", hint=hint)


def text(name: str, field: str, hint: str, **more: Any) -> Column:
    """Return a column of free text."""
    return Column(name=name, field=field, kind="text", hint=hint, **more)


def number(name: str, unit: str, field: str, bounds: Bounds, hint: str, **more: Any) -> Column:
    """Return a column of numbers."""
    return Column(name=name, unit=unit, field=field, kind="number", bounds=bounds, hint=hint, **more)


def ratio(name: str, field: str, bounds: Bounds, hint: str, **more: Any) -> Column:
    """Return a column of plain numbers from 0 to about 1, such as a power factor."""
    return Column(name=name, field=field, kind="number", bounds=bounds, hint=hint, ratio=True, **more)


def integer(name: str, field: str, bounds: Bounds, hint: str, **more: Any) -> Column:
    """Return a column of whole numbers."""
    return Column(name=name, field=field, kind="integer", bounds=bounds, hint=hint, **more)


def choice(name: str, field: str, choices: tuple[str, ...], hint: str, **more: Any) -> Column:
    """Return a column with a closed list of texts."""
    return Column(name=name, field=field, kind="choice", choices=choices, hint=hint, **more)


def yes_no(name: str, field: str, hint: str, **more: Any) -> Column:
    """Return a column of yes and no."""
    return Column(name=name, field=field, kind="yes-no", hint=hint, **more)


def reference(name: str, field: str, target: tuple[str, ...], hint: str, **more: Any) -> Column:
    """Return a column that names equipment of other sheets."""
    return Column(name=name, field=field, kind="reference", target=target, hint=hint, **more)


def typical(value: float | str, source: str) -> dict[str, Any]:
    """Return the two settings of a column whose blank takes a fixed typical value."""
    return {"blank": "typical", "typical": Typical(value=value, source=source)}


def derived(rule: Callable[[Values], float | str], words: str, source: str) -> dict[str, Any]:
    """Return the two settings of a column whose blank takes a value from other cells of the row."""
    return {"blank": "typical", "typical": Typical(rule=rule, words=words, source=source)}


REQUIRED: dict[str, Any] = {"blank": "required"}
UNKNOWN: dict[str, Any] = {"blank": "unknown"}
