"""Cell addresses as numbers."""

from __future__ import annotations

import re
from dataclasses import dataclass

_PLACE = re.compile(r"\$?([A-Za-z]{1,3})\$?([0-9]{1,9})")


@dataclass(frozen=True, slots=True, kw_only=True)
class Area:
    """A rectangle of cells, rows and columns from 1, both ends inside."""

    left: int
    top: int
    right: int
    bottom: int

    def overlaps(self, other: Area) -> bool:
        """Return whether the two share a cell."""
        return (
            self.left <= other.right
            and other.left <= self.right
            and self.top <= other.bottom
            and other.top <= self.bottom
        )


def split_address(place: str) -> tuple[int, int]:
    """Return column and row of a cell address, both from 1; zeros when it is none.

    Examples
    --------
    >>> split_address("AB12")
    (28, 12)
    """
    found = _PLACE.fullmatch(place)
    if not found:
        return 0, 0
    column = 0
    for letter in found[1].upper():
        column = 26 * column + ord(letter) - ord("A") + 1
    return column, int(found[2])


def address(column: int, row: int) -> str:
    """Return the address of a cell.

    Examples
    --------
    >>> address(28, 12)
    'AB12'
    """
    letters = ""
    while column:
        column, rest = divmod(column - 1, 26)
        letters = chr(ord("A") + rest) + letters
    return f"{letters}{row}"


def area(ref: str) -> Area:
    """Return the rectangle that a reference like ``A1:B4`` means."""
    first, _, last = ref.partition(":")
    (left, top), (right, bottom) = split_address(first), split_address(last or first)
    return Area(left=left, top=top, right=right, bottom=bottom)
