"""Where the pages of a printed result sheet end: no mode, no heading and no chart is parted."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from typing import Final

_PAGE_PIXELS: Final = 1090.0
"""Across an A3 page at 96 dots to the inch, a quarter left for fonts whose digits widen the columns."""
_MODES_PIXELS: Final = 1800.0
"""Of columns of modes that stand side by side on a page: letters of ten points print at six."""
WIDEST_PIXELS: Final = 3600.0
"""Letters of ten points print at four there: sheets are read on the screen, the report is for print."""
_PAGE_ACROSS_PIXELS: Final = 1488.0
_PAGE_POINTS: Final = 745.0
"""Height of an A3 page between the margins."""
_ROW_POINTS: Final = 15.0
_HEADING_ROWS: Final = 2  # repeated on every page


def pixels(width: float) -> float:
    """Return the pixels of a column from its width in characters (ECMA-376-1, 18.3.1.13, from memory)."""
    return math.floor(7.0 * width + 5.0)


def pages_across(widths: Mapping[int, float], starts: Sequence[int]) -> tuple[list[int], float]:
    """Return where to break a sheet across its width, so that the columns of a mode stay on one page.

    Parameters
    ----------
    widths : mapping of int to float
        Width of each column in characters; the first column repeats on every page.
    starts : sequence of int
        First column of each mode.

    Returns
    -------
    breaks : list of int
        Columns that begin a page.
    widest : float
        Pixels of the widest page.

    Examples
    --------
    >>> pages_across(dict.fromkeys(range(10), 100.0), [1, 4, 7])
    ([4, 7], 2820.0)
    """
    count = max(widths) + 1
    columns = [pixels(widths[c]) for c in range(count)]
    breaks: list[int] = []
    used = widest = sum(columns[: starts[0]])
    for start, end in zip(starts, [*starts[1:], count], strict=True):
        group = sum(columns[start:end])
        if used + group > _MODES_PIXELS and start != starts[0]:
            breaks.append(start)
            used = columns[0]
        used += group
        widest = max(widest, used)
    return breaks, float(widest)


def modes_scale(widest: float) -> int:
    """Return the scale at which a page of so many pixels is printed [%]."""
    return max(10, min(100, math.floor(100.0 * _PAGE_PIXELS / widest)))


def print_scale(widths: Iterable[float]) -> tuple[int, float]:
    """Return how many pages a sheet takes across its width, and the scale at which it is printed.

    Parameters
    ----------
    widths : iterable of float
        Width of each column in characters.

    Returns
    -------
    pages : int
        One, but for sheets whose letters would be too small.
    scale : float
        Printed to true size, where the widths are those of the usual font [1].

    Examples
    --------
    >>> print_scale([100.0] * 4)
    (1, 0.5276595744680851)
    """
    whole = sum(map(pixels, widths))
    pages = math.ceil(whole / WIDEST_PIXELS)
    return pages, min(1.0, pages * _PAGE_ACROSS_PIXELS / whole)


def pages_down(together: Sequence[tuple[int, int]], heights: Mapping[int, float], scale: float) -> list[int]:
    """Return the rows that begin a page, so that rows that belong together stay on one.

    Parameters
    ----------
    together : sequence of tuple of int
        First and last row of each piece that is not to be parted, in order.
    heights : mapping of int to float
        Heights of the rows that have one of their own [pt].
    scale : float
        Printed to true size [1].

    Returns
    -------
    list of int
        Rows before which a page ends.

    Examples
    --------
    >>> pages_down([(0, 5), (40, 60), (62, 70)], {}, 1.0)
    [40]
    """
    room = _PAGE_POINTS / scale - _HEADING_ROWS * _ROW_POINTS
    breaks: list[int] = []
    row, used = 0, 0.0
    for first, last in together:
        while row < first:
            used = _following(used, heights.get(row, _ROW_POINTS), room)
            row += 1
        piece = sum(heights.get(r, _ROW_POINTS) for r in range(first, last + 1))
        if used + piece > room and used > 0.0:
            breaks.append(first)
            used = 0.0
        while row <= last:
            used = _following(used, heights.get(row, _ROW_POINTS), room)
            row += 1
    return breaks


def _following(used: float, height: float, room: float) -> float:
    """Return the points used after a row that the page takes, or that begins the next one."""
    return height if used + height > room else used + height
