"""Reader of the coefficient tables beside this module: comma-separated, the source in the first line."""

from __future__ import annotations

import csv
from collections.abc import Mapping
from functools import cache
from importlib.resources import files
from types import MappingProxyType


@cache
def table_rows(name: str) -> tuple[Mapping[str, str], ...]:
    """Return the rows of a table, keyed by its headings.

    Parameters
    ----------
    name : str
        File name without its ending.

    Returns
    -------
    tuple of mapping
        One for each row, text as written.

    Raises
    ------
    FileNotFoundError
        No such table.

    Examples
    --------
    >>> table_rows("insulation")[0]["conductor_degc"]
    '70'
    """
    lines = _lines(name)
    return tuple(MappingProxyType(row) for row in csv.DictReader(lines[1:]))


def table_source(name: str) -> str:
    """Return the first line of a table: where its numbers come from.

    Parameters
    ----------
    name : str
        File name without its ending.

    Returns
    -------
    str
        Source.

    Raises
    ------
    FileNotFoundError
        No such table.

    Examples
    --------
    >>> table_source("current_rating_45degc")[:9]
    'ABS Rules'
    """
    return _lines(name)[0].lstrip("# ")


@cache
def numeric_table(name: str, key: str) -> Mapping[float, Mapping[str, float]]:
    """Return a table of numbers, keyed by the number in one of its columns; empty fields are left out.

    Parameters
    ----------
    name : str
        File name without its ending.
    key : str
        Heading of the key column.

    Returns
    -------
    mapping
        Key to a mapping of the other headings to numbers.

    Raises
    ------
    FileNotFoundError
        No such table.

    Examples
    --------
    >>> numeric_table("current_rating_45degc", "section_mm2")[95.0]["85"]
    276.0
    """
    return MappingProxyType(
        {
            float(row[key]): MappingProxyType({h: float(x) for h, x in row.items() if h != key and x})
            for row in table_rows(name)
        }
    )


def _lines(name: str) -> list[str]:
    return (files("study.formulas") / "tables" / f"{name}.csv").read_text(encoding="utf-8").splitlines()
