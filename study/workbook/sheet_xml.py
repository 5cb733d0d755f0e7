"""The cells of one worksheet part: addresses, values, and which formulas and formats stand behind them.

A streaming parser of our own on the standard library's expat. The ready readers lose errors and uncalculated
formulas, or refuse a workbook for its looks; each reason is a test in tests/workbook/test_reader_choice.py.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from datetime import datetime, timedelta
from typing import Final
from xml.parsers import expat

from study.issues import PackageError
from study.workbook.package.cells import split_address
from study.workbook.package.xml import MAIN, number_in

MAX_CELLS: Final = 4_000_000
LAST_COLUMN: Final = 16_384
LAST_ROW: Final = 1_048_576
_ROW, _CELL, _VALUE, _FORMULA = (f"{MAIN}}}{name}" for name in ("row", "c", "v", "f"))
_TEXT, _INLINE, _PHONETIC, _ITEM = (f"{MAIN}}}{name}" for name in ("t", "is", "rPh", "si"))
_EPOCH_1900: Final = datetime(1899, 12, 30)
_EPOCH_1904: Final = datetime(1904, 1, 1)
# The last day that Excel knows, 31 December 9999.
_LAST_SERIAL: Final = 2_958_466.0

Value = float | str | bool | datetime | None


class TooManyRowsError(Exception):
    """A sheet holds more rows than are read."""


class Percent(float):
    """A number in a cell that is shown as a percentage: 0.04 shown as 4 %."""

    __slots__ = ()


class ErrorValue(str):
    """An Excel error, for example ``#DIV/0!``."""

    __slots__ = ()


class NoStoredValue(str):
    """The text of a formula whose value the file does not hold."""

    __slots__ = ()


class ResultFormula(str):
    """The text of a formula that depends on a result sheet."""

    __slots__ = ()


@dataclass(slots=True, kw_only=True)
class SheetCells:
    """The cells of a sheet that hold something, by row and column number from 1.

    ``formulas`` holds the text of every formula by row and column; ``moved`` how many rows and columns a
    cell lies behind the one for which its text was written, where a formula was filled down or across.
    """

    rows: dict[int, dict[int, Value]] = field(default_factory=dict)
    formulas: dict[tuple[int, int], str] = field(default_factory=dict)
    moved: dict[tuple[int, int], tuple[int, int]] = field(default_factory=dict)


@dataclass(frozen=True, slots=True, kw_only=True)
class BookTables:
    """What the cells of every sheet refer to: shared texts, and by style number how a number is shown."""

    strings: Sequence[str] = ()
    shown_as: Sequence[str] = ()
    starts_1904: bool = False


def _parser(part: str) -> expat.XMLParserType:
    parser = expat.ParserCreate(namespace_separator="}")
    parser.buffer_text = True
    parser.ordered_attributes = False

    def refuse(*_: object) -> None:
        raise PackageError(
            f"part {part} declares an XML document type, as no workbook does; it is not opened"
        )

    parser.StartDoctypeDeclHandler = refuse
    return parser


def _run(parser: expat.XMLParserType, data: bytes, part: str) -> None:
    try:
        parser.Parse(data, True)
    except expat.ExpatError as error:
        raise PackageError(f"part {part} is damaged (its XML breaks off in line {error.lineno})") from error


def read_shared_strings(data: bytes, part: str) -> list[str]:
    """Return the texts that cells share, with their formatting left out."""
    texts: list[str] = []
    pieces: list[str] = []
    parser = _parser(part)
    silent = 0

    def start(tag: str, _: Mapping[str, str]) -> None:
        nonlocal silent
        if tag == _ITEM:
            pieces.clear()
        elif tag == _PHONETIC:
            silent += 1
        elif tag == _TEXT and not silent:
            parser.CharacterDataHandler = pieces.append

    def end(tag: str) -> None:
        nonlocal silent
        if tag == _TEXT:
            parser.CharacterDataHandler = None
        elif tag == _PHONETIC:
            silent -= 1
        elif tag == _ITEM:
            texts.append(plain_text("".join(pieces)))

    parser.StartElementHandler = start
    parser.EndElementHandler = end
    _run(parser, data, part)
    return texts


def plain_text(text: str) -> str:
    """Return a text with the escapes ``_x000D_`` of the file format resolved.

    Examples
    --------
    >>> plain_text("a_x0020_b"), plain_text("_x001B_[2J"), plain_text("_xD83D__xDCA1_")
    ('a b', '�[2J', '💡')
    """
    if "_x" not in text:
        return text
    head, *rest = text.split("_x")
    out = [head]
    for piece in rest:
        code, mark, tail = piece[:4], piece[4:5], piece[5:]
        if mark == "_" and len(code) == 4 and all(c in "0123456789abcdefABCDEF" for c in code):
            out.append(_escaped(int(code, 16)) + tail)
        else:
            out.append("_x" + piece)
    # A sign beyond the first 65 536 is written as two halves; a half alone is no sign.
    return "".join(out).encode("utf-16", "surrogatepass").decode("utf-16", "replace")


def _escaped(code: int) -> str:
    """Return the sign of an escape; one that steers a terminal shows as the sign for what cannot be shown."""
    sign = chr(code)
    return sign if sign in "\t\n\r" or unicodedata.category(sign) != "Cc" else "\ufffd"


class _CellReader:
    """Collects the cells of one sheet while its XML streams past."""

    def __init__(
        self, parser: expat.XMLParserType, tables: BookTables, part: str, most_rows: int | None
    ) -> None:
        self.parser = parser
        self.most_rows = most_rows
        self.tables = tables
        self.part = part
        self.sheet = SheetCells()
        self.cells: dict[int, Value] = {}
        self.row = self.column = 0
        self.ref: str | None = None
        self.count = 0
        self.attributes: Mapping[str, str] = {}
        self.value: list[str] = []
        self.formula: list[str] = []
        self.has_formula = self.has_value = False
        self.shared: dict[str, tuple[str, int, int]] = {}
        self.shared_index: str | None = None
        self.letters: dict[str, int] = {}
        self.shown: dict[str, str] = {}
        self.filled_rows = 0

    def start(self, tag: str, attributes: Mapping[str, str]) -> None:
        if tag == _CELL:
            self.attributes = attributes
            self.has_formula = self.has_value = False
            self.value = []
            if "r" in attributes:
                self.ref = attributes["r"]
            else:
                self._next_place()
        elif tag in {_VALUE, _TEXT}:
            self.has_value = True
            self.parser.CharacterDataHandler = self.value.append
        elif tag == _FORMULA:
            self.has_formula = True
            self.formula = []
            self.shared_index = attributes.get("si") if attributes.get("t") == "shared" else None
            self.parser.CharacterDataHandler = self.formula.append
        elif tag == _PHONETIC:
            self.has_value = False
        elif tag == _ROW:
            self._new_row(attributes.get("r"))

    def _new_row(self, number: str | None) -> None:
        given = None if number is None else number_in(number)
        self.row = self.row + 1 if given is None else given
        self.column = 0
        self.ref = None
        self.cells = self.sheet.rows.setdefault(self.row, {})

    def _next_place(self) -> None:
        """Give a cell without an address the column after the cell before it."""
        if self.ref is not None:
            self._place(self.ref)
        self.column += 1
        self.ref = None

    def _place(self, ref: str) -> None:
        letters = ref.rstrip("0123456789")
        column = self.letters.get(letters)
        if column is None:
            column = self.letters[letters] = split_address(f"{letters}1")[0]
        if not 0 < column <= LAST_COLUMN or not 0 < self.row <= LAST_ROW:
            raise PackageError(f"part {self.part} has a cell with the address {ref}; the file is damaged")
        self.column = column

    def end(self, tag: str) -> None:
        if tag in {_VALUE, _TEXT, _FORMULA}:
            self.parser.CharacterDataHandler = None
        elif tag == _CELL and (self.has_value or self.has_formula):
            self._keep()
        elif tag == _ROW:
            self._end_row()

    def _end_row(self) -> None:
        if not self.cells:
            self.sheet.rows.pop(self.row, None)
            return
        self.filled_rows += 1
        if self.most_rows is not None and self.filled_rows > self.most_rows:
            raise TooManyRowsError

    def _keep(self) -> None:
        if self.ref is not None:
            self._place(self.ref)
        text = "".join(self.value)
        if self.has_formula:
            formula = self._formula_text()
            self.sheet.formulas[self.row, self.column] = formula
            if not text and self.attributes.get("t") != "str":
                self._store(NoStoredValue(formula))
                return
        if text:
            self._store(self._value(text))

    def _store(self, value: Value) -> None:
        self.count += 1
        if self.count > MAX_CELLS:
            raise PackageError(f"part {self.part} holds more than {MAX_CELLS} cells; it is not opened")
        self.cells[self.column] = value

    def _formula_text(self) -> str:
        text = "".join(self.formula)
        if self.shared_index is None:
            return text
        text, row, column = self.shared.setdefault(self.shared_index, (text, self.row, self.column))
        if (self.row, self.column) != (row, column):
            self.sheet.moved[self.row, self.column] = self.row - row, self.column - column
        return text

    def _value(self, text: str) -> Value:
        kind = self.attributes.get("t", "n")
        if kind == "n":
            return self._number(text)
        return _KINDS.get(kind, _text)(text, self.tables)

    def _number(self, text: str) -> Value:
        try:
            number = float(text)
        except ValueError:
            return text
        if "_" in text or not text.isascii():
            # Python takes these for numbers; no spreadsheet does.
            return text
        style = self.attributes.get("s", "0")
        how = self.shown.get(style)
        if how is None:
            how = self.shown[style] = self._shown_as(style)
        if not how:
            return number
        return Percent(number) if how == "percent" else _date(number, self.tables)

    def _shown_as(self, style: str) -> str:
        number = number_in(style)
        if number is None:
            raise PackageError(f"part {self.part} has a cell of the style {style!r}; the file is damaged")
        return self.tables.shown_as[number] if number < len(self.tables.shown_as) else ""


def _date(serial: float, tables: BookTables) -> Value:
    if not 0.0 <= serial < _LAST_SERIAL:
        return serial
    return (_EPOCH_1904 if tables.starts_1904 else _EPOCH_1900) + timedelta(days=serial)


def _text(text: str, _: BookTables) -> Value:
    return plain_text(text)


def _shared(text: str, tables: BookTables) -> Value:
    place = number_in(text)
    if place is None or place >= len(tables.strings):
        raise PackageError("a cell refers to a shared text that is not there; the file is damaged")
    return tables.strings[place]


def _iso_date(text: str, _: BookTables) -> Value:
    try:
        return datetime.fromisoformat(text.removesuffix("Z"))
    except ValueError:
        return text


_KINDS: Final[Mapping[str, Callable[[str, BookTables], Value]]] = {
    "s": _shared,
    "b": lambda text, _: text.strip() not in {"0", "false"},
    "e": lambda text, _: ErrorValue(text),
    "d": _iso_date,
}


def read_cells(data: bytes, part: str, tables: BookTables, most_rows: int | None = None) -> SheetCells:
    """Return the cells of a worksheet part that hold a value or a formula.

    Parameters
    ----------
    data : bytes
        The part.
    part : str
        Its name, for messages.
    tables : BookTables
        Shared texts and styles of the workbook.
    most_rows : int, optional
        How many rows may hold something.

    Raises
    ------
    PackageError
        The part is damaged or absurdly large.
    TooManyRowsError
        More than `most_rows` rows hold something.
    """
    parser = _parser(part)
    reader = _CellReader(parser, tables, part, most_rows)
    parser.StartElementHandler = reader.start
    parser.EndElementHandler = reader.end
    _run(parser, data, part)
    return reader.sheet
