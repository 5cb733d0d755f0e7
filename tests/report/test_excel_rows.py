"""Rows written in fewer steps say what the library's own rows say."""

from __future__ import annotations

import re
import zipfile
from io import BytesIO
from typing import Any

import pytest
import xlsxwriter
from xlsxwriter.worksheet import Worksheet

from study.report.excel_rows import ResultSheet


def written(kind: type[Worksheet], fill: Any) -> dict[str, bytes]:
    """Return the parts of a workbook with one sheet, without the optional spans of rows."""
    buffer = BytesIO()
    book = xlsxwriter.Workbook(buffer, {"in_memory": True})
    fill(book, book.add_worksheet("R One", kind))
    book.close()
    with zipfile.ZipFile(BytesIO(buffer.getvalue())) as package:
        return {n: re.sub(rb' spans="\d+:\d+"', b"", package.read(n)) for n in package.namelist()}


def cells_of_every_kind(book: Any, sheet: Any) -> None:
    bold, plain = book.add_format({"bold": True}), book.add_format({"num_format": "0.00"})
    sheet.set_row(1, 30.0)
    sheet.set_row(6, 25.0)
    sheet.set_column(3, 3, 12.0, bold)
    for row, value in enumerate([1.0, -0.1, 1e300, 1 / 3, 17]):
        sheet.write_number(row, 2, value, plain)
    sheet.write_string(0, 0, 'words & <"more">', bold)
    sheet.write_string(0, 27, "words without a format")
    sheet.write_blank(3, 1, None, bold)
    sheet.write_number(3, 3, 5.0)
    sheet.write_boolean(4, 0, True, bold)
    sheet.write_url(5, 0, "internal:'R One'!A1", bold, "a link")
    sheet.merge_range(8, 0, 8, 3, "", plain)
    sheet.write_string(8, 0, "merged", plain)
    sheet.add_table(10, 0, 12, 1, {"columns": [{"header": "A"}, {"header": "B"}]})


def test_cells_of_every_kind_are_those_of_the_library() -> None:
    own, library = written(ResultSheet, cells_of_every_kind), written(Worksheet, cells_of_every_kind)
    assert own == library


def test_a_column_filled_at_once_is_that_written_cell_by_cell() -> None:
    values = (1.5, "words", None, -2, "words", "Ω < 3")

    def at_once(book: Any, sheet: Any) -> None:
        looks = [book.add_format({"indent": 1}), book.add_format({"bold": True})]
        sheet.fill_column(3, 2, [(v, looks[k % 2]) for k, v in enumerate(values)])

    def one_by_one(book: Any, sheet: Any) -> None:
        looks = [book.add_format({"indent": 1}), book.add_format({"bold": True})]
        for k, value in enumerate(values):
            sheet.write(3 + k, 2, value, looks[k % 2])

    assert written(ResultSheet, at_once) == written(Worksheet, one_by_one)


def test_a_column_beyond_the_end_of_the_sheet_is_refused() -> None:
    def too_low(_: Any, sheet: Any) -> None:
        sheet.fill_column(1_048_575, 0, [(1.0, None), (2.0, None)])

    with pytest.raises(ValueError, match="no cell in row 1048577"):
        written(ResultSheet, too_low)
