"""Which formulas depend on a result sheet, by themselves or by way of other cells and names.

Such a value would come from the run before, and the next run would change it again.
"""

from __future__ import annotations

import re
from bisect import bisect_left
from collections.abc import Collection, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Final

from study.issues import PackageError
from study.workbook.package.cells import Area, address, area, split_address
from study.workbook.sheet_xml import LAST_COLUMN, LAST_ROW

Place = tuple[str, int, int]
"""Sheet in small letters, row and column."""

FEW_CELLS: Final = 64
MOST_CELLS: Final = 4_000_000
MOST_STEPS: Final = 20_000_000

_DIRECT: Final = re.compile(r"'(?:\[[^\]]*\])?R (?:[^']|'')*'!", re.IGNORECASE)
_STRING: Final = re.compile(r'"[^"]*"')
_REFERENCE: Final = re.compile(
    r"(?:(?:'((?:[^']|'')+)'|([\w.]+))!)?"
    r"(\$?[A-Za-z]{1,3}\$?\d{1,7}(?::\$?[A-Za-z]{1,3}\$?\d{1,7})?"
    r"|\$?[A-Za-z]{1,3}:\$?[A-Za-z]{1,3}|\$?\d{1,7}:\$?\d{1,7})(?![\w(.])"
)
_STRINGS_APART: Final = re.compile(r'("[^"]*")')
_COORDINATE: Final = re.compile(r"(\$?)([A-Za-z]{0,3})(\$?)(\d{0,7})(?=:|$)")
_NAME: Final = re.compile(r"(?<![\w.!'])([A-Za-z_\\][\w.]*)(?![\w.(!\[])")


@dataclass(frozen=True, slots=True, kw_only=True)
class Reference:
    """A rectangle on a sheet."""

    sheet: str
    cells: Area


def mentions_results(formula: str) -> bool:
    """Return True where a formula names a result sheet itself.

    Examples
    --------
    >>> mentions_results("2*'R Load flow'!B7"), mentions_results("Running!B7")
    (True, False)
    """
    return "'" in formula and _DIRECT.search(formula) is not None


def references(formula: str, own_sheet: str) -> Iterator[Reference]:
    """Yield the rectangles that a formula refers to.

    Examples
    --------
    >>> [(r.sheet, r.cells.bottom) for r in references("SUM(A1:B9)+Cables!$C$4", "Loads")]
    [('loads', 9), ('cables', 4)]
    """
    for quoted, plain, cells in _REFERENCE.findall(_STRING.sub("", formula)):
        sheet = quoted.replace("''", "'") or plain or own_sheet
        yield Reference(sheet=sheet.casefold(), cells=_area(cells))


def shifted(formula: str, rows: int, columns: int) -> str:
    """Return a formula as it reads when it is filled down and across: references without $ move along.

    Examples
    --------
    >>> shifted("SUM(A1:$B2)*Cables!$C$4+D:D", 2, 1)
    'SUM(B3:$B4)*Cables!$C$4+E:E'
    """
    pieces = _STRINGS_APART.split(formula)
    # Every second piece is a text in quotes.
    pieces[::2] = [_REFERENCE.sub(lambda found: _moved(found, rows, columns), piece) for piece in pieces[::2]]
    return "".join(pieces)


def _moved(found: re.Match[str], rows: int, columns: int) -> str:
    cells = _COORDINATE.sub(lambda part: _moved_part(part, rows, columns), found[3])
    return found[0].removesuffix(found[3]) + cells


def _moved_part(part: re.Match[str], rows: int, columns: int) -> str:
    column_mark, letters, row_mark, digits = part.groups()
    if letters and not column_mark:
        letters = address(max(1, split_address(f"{letters}1")[0] + columns), 1)[:-1]
    if digits and not row_mark:
        digits = str(max(1, int(digits) + rows))
    return f"{column_mark}{letters}{row_mark}{digits}"


def _area(text: str) -> Area:
    first, colon, last = text.replace("$", "").partition(":")
    if colon and first.isalpha():
        return area(f"{first}1:{last}{LAST_ROW}")
    if colon and first.isdigit():
        return Area(left=1, top=int(first), right=LAST_COLUMN, bottom=int(last))
    return area(f"{first}{colon}{last}")


def dependent_formulas(formulas: Mapping[Place, str], names: Mapping[str, str]) -> set[Place]:
    """Return the cells whose formulas depend on a result sheet.

    Parameters
    ----------
    formulas : mapping
        Every formula of the sheets that are no results.
    names : mapping
        What each defined name stands for.

    Returns
    -------
    set of Place
        Cells that name a result sheet, and those that refer to such cells over any number of steps.

    Raises
    ------
    PackageError
        Ranges refer to each other over more steps than can be followed in bounded time.

    Examples
    --------
    >>> chain = {("a", 1, 1): "'R Cables'!B2", ("b", 1, 1): "a!A1*2", ("b", 2, 1): "7"}
    >>> sorted(dependent_formulas(chain, {}))
    [('a', 1, 1), ('b', 1, 1)]
    """
    plain = {place: _with_names(formula, names) for place, formula in formulas.items()}
    behind, wide = _sorted_by_width(plain)
    found: set[Place] = set()
    waiting = [place for place, formula in plain.items() if mentions_results(formula)]
    steps = 0
    while waiting:
        new = _follow(waiting, behind, found)
        steps += len(wide)
        if steps > MOST_STEPS:
            raise PackageError(
                "the formulas depend on each other in more steps than are followed; take out those that read "
                "result sheets"
            )
        waiting = _readers_of(new, wide)
        for place in waiting:
            del wide[place]
    return found


def _sorted_by_width(
    formulas: Mapping[Place, str],
) -> tuple[dict[Place, list[Place]], dict[Place, list[Reference]]]:
    """Return the places behind each cell that small ranges refer to, and the wide ranges by place."""
    behind: dict[Place, list[Place]] = {}
    wide: dict[Place, list[Reference]] = {}
    left = MOST_CELLS
    for place, text in formulas.items():
        for reference in references(text, place[0]):
            cells = reference.cells
            size = (cells.bottom - cells.top + 1) * (cells.right - cells.left + 1)
            if size > FEW_CELLS or size > left:
                wide.setdefault(place, []).append(reference)
                continue
            left -= size
            for row in range(cells.top, cells.bottom + 1):
                for column in range(cells.left, cells.right + 1):
                    behind.setdefault((reference.sheet, row, column), []).append(place)
    return behind, wide


def _follow(waiting: list[Place], behind: Mapping[Place, Sequence[Place]], found: set[Place]) -> set[Place]:
    """Add places and all that refer to them cell by cell to `found`; return what is new."""
    new = set()
    while waiting:
        place = waiting.pop()
        if place not in found:
            found.add(place)
            new.add(place)
            waiting.extend(behind.get(place, ()))
    return new


def _readers_of(new: Collection[Place], wide: Mapping[Place, Sequence[Reference]]) -> list[Place]:
    """Return the places that refer to a wide range with one of the new cells in it."""
    rows: dict[str, dict[int, list[int]]] = {}
    for sheet, row, column in sorted(new):
        rows.setdefault(sheet, {}).setdefault(column, []).append(row)
    return [
        place for place, refs in wide.items() if any(_covers(ref, rows.get(ref.sheet, {})) for ref in refs)
    ]


def _covers(reference: Reference, rows: Mapping[int, Sequence[int]]) -> bool:
    cells = reference.cells
    for column, its_rows in rows.items():
        if cells.left <= column <= cells.right:
            place = bisect_left(its_rows, cells.top)
            if place < len(its_rows) and its_rows[place] <= cells.bottom:
                return True
    return False


def _with_names(formula: str, names: Mapping[str, str]) -> str:
    """Return a formula with what its defined names stand for added at its end."""
    if not names:
        return formula
    bare = _STRING.sub("", formula)
    used = {word.casefold() for word in _NAME.findall(bare)}
    meant = [names[word] for word in used if word in names]
    return "+".join([formula, *meant])
