"""The result sheets, read back by openpyxl."""

from __future__ import annotations

import math
import re
import zipfile
from functools import cache
from io import BytesIO

import pytest
from openpyxl import Workbook, load_workbook
from openpyxl.worksheet.worksheet import Worksheet

from study.issues import StudyError
from study.report import excel_sheet
from study.report.catalogue import all_tables
from study.report.excel import result_workbook
from study.report.excel_pages import pages_across, pages_down
from study.report.excel_sheet import internal_link
from study.report.tables import SHEETS, Table
from tests.report import made_up

OUTCOME = made_up.outcome()
TABLES = all_tables(OUTCOME)
_FORMAT = re.compile(r"0(?:\.(0+))?")


@cache
def _data() -> bytes:
    return result_workbook(OUTCOME)


@cache
def _book() -> Workbook:
    return load_workbook(BytesIO(_data()))


def _start(table: Table) -> tuple[Worksheet, int]:
    """Return the sheet of a table and the row of its first row of data."""
    sheet = _book()[table.sheet]
    titles = [c.title for c in table.columns]
    for row in range(1, sheet.max_row + 1):
        if [sheet.cell(row, c + 1).value for c in range(len(titles))] == titles:
            above = next(
                r for r in range(row, 0, -1) if sheet.cell(r, 1).font.b and sheet.cell(r, 1).font.sz == 12
            )
            if sheet.cell(above, 1).value == table.title:
                return sheet, row + 1
    raise AssertionError(f"{table.key} is not on {table.sheet}")


def test_every_sheet_has_the_prefix_of_results() -> None:
    used = {table.sheet for table in TABLES.values()}
    assert _book().sheetnames == [name for name in SHEETS if name in used]
    assert all(name.startswith("R ") for name in _book().sheetnames)


@pytest.mark.parametrize("table", TABLES.values(), ids=TABLES.keys())
def test_every_value_stands_on_its_sheet_unrounded(table: Table) -> None:
    if table.n_rows == 0:
        pytest.skip("nothing to show in this study")
    sheet, first = _start(table)
    for r, row in enumerate(table.rows()):
        for c, value in enumerate(row):
            found = sheet.cell(first + r, c + 1).value
            if isinstance(value, (int, float)) and not isinstance(value, bool) and math.isfinite(value):
                assert found == pytest.approx(value, rel=1e-14), table.columns[c].key
            elif value is None or value == "":
                assert found is None
            else:
                assert isinstance(found, str)


def _width(sheet: Worksheet, column: int) -> float:
    # Neighbours of one width share one entry.
    return next(d.width for d in sheet.column_dimensions.values() if d.min <= column <= d.max)


@pytest.mark.parametrize("table", TABLES.values(), ids=TABLES.keys())
def test_columns_are_wide_enough_for_their_numbers(table: Table) -> None:
    if table.n_rows == 0:
        pytest.skip("nothing to show in this study")
    sheet, _ = _start(table)
    for c, column in enumerate(table.columns):
        if not column.is_text:
            numbers = [t for t in table.texts(c) if t[-1:].isdigit()]
            assert max((len(t) for t in numbers), default=0) + 1 <= _width(sheet, c + 1), column.key


def test_number_formats_have_few_decimals_but_where_a_limit_is_near() -> None:
    sheet, first = _start(TABLES["cables"])
    at = TABLES["cables"].index("current_a") + 1
    formats = [sheet.cell(first + r, at).number_format for r in range(3)]
    assert formats[0] == "0.0000"
    assert formats[1].startswith("0.0_0")


def test_text_of_cells_is_never_a_formula() -> None:
    for sheet in _book().worksheets:
        for row in sheet.iter_rows():
            assert all(cell.data_type != "f" for cell in row)
    names = {cell.value for cell in _book()["R Load balance"]["A"]}
    assert {"=1+1 sounder", made_up.SCRIPT} <= names


def test_governing_cells_are_links_into_the_workbook() -> None:
    sheet, first = _start(TABLES["cables"])
    cell = sheet.cell(first, TABLES["cables"].index("input_cell") + 1)
    assert cell.value == "Cables!A4"
    assert cell.hyperlink is not None
    assert cell.hyperlink.location == "'Cables'!A4"
    assert cell.hyperlink.target is None


def test_cells_beyond_the_most_links_keep_their_text(monkeypatch: pytest.MonkeyPatch) -> None:
    """A sheet takes 65 530 links (Excel specifications and limits, from memory)."""
    monkeypatch.setattr(excel_sheet, "MOST_LINKS", 3)
    sheet = load_workbook(BytesIO(result_workbook(OUTCOME)))["R Load flow"]
    whole = _book()["R Load flow"]
    assert [c.value for row in sheet.iter_rows() for c in row] == [
        c.value for row in whole.iter_rows() for c in row
    ]
    inputs = [
        c for row in sheet.iter_rows() for c in row if c.hyperlink and "'R " not in c.hyperlink.location
    ]
    assert len(inputs) == 3


def test_a_sheet_longer_than_a_sheet_can_be_is_said(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(excel_sheet, "LAST_ROW", 40)
    with pytest.raises(StudyError, match=r"would need \d+ rows, more than a sheet can have"):
        result_workbook(OUTCOME)


def test_link_to_a_sheet_with_a_blank_or_a_quote_in_its_name() -> None:
    assert internal_link("Shore supplies!C4") == "internal:'Shore supplies'!C4"
    assert internal_link("'Shore supplies'!C4") == "internal:'Shore supplies'!C4"
    assert internal_link("'Mate''s list'!B2") == "internal:'Mate''s list'!B2"


def test_status_words_are_coloured_by_condition() -> None:
    rules = [rule.text for formats in _book()["R Summary"].conditional_formatting for rule in formats.rules]
    assert {"within", "close", "exceeds", "not assessed"} <= set(rules)


def test_charts_stand_beside_loading_voltages_and_sharing() -> None:
    names = zipfile.ZipFile(BytesIO(_data())).namelist()
    assert sum(name.startswith("xl/charts/chart") for name in names) >= 10
    sheets = {name: len(_book()[name]._charts) for name in _book().sheetnames}  # openpyxl reads charts back
    assert sheets["R Capacity"] >= 3
    assert sheets["R Load flow"] >= 1
    assert sheets["R Sharing"] >= 8


def test_charts_point_at_numbers_of_their_own_sheet() -> None:
    archive = zipfile.ZipFile(BytesIO(_data()))
    for name in archive.namelist():
        if name.startswith("xl/charts/chart"):
            text = archive.read(name).decode()
            for sheet in re.findall(r"<c:f>'([^']+)'!", text):
                assert sheet in SHEETS


def test_no_mode_is_parted_by_the_edge_of_a_page() -> None:
    table = next(t for t in TABLES.values() if t.sheet == "R Load balance")
    starts = [table.index(c.key, c.group) for c in table.columns if c.group]
    firsts = {min(c for c in starts if table.columns[c].group == group) for group in table.groups}
    sheet = _book()["R Load balance"]
    assert {b.id for b in sheet.col_breaks.brk} <= firsts
    assert not sheet.sheet_properties.pageSetUpPr or not sheet.sheet_properties.pageSetUpPr.fitToPage
    breaks, widest = pages_across({c: 20.0 if c else 30.0 for c in range(36)}, [4, 12, 20, 28])
    assert breaks == [12, 20, 28]
    assert widest == 215 + 3 * 145 + 8 * 145


def test_headings_and_charts_are_not_parted_by_the_end_of_a_page() -> None:
    """At full size a page holds 47 rows of 15 points under the two that repeat."""
    assert pages_down([(0, 10), (45, 50)], {}, 1.0) == [45]
    assert pages_down([(0, 10), (40, 45)], {}, 1.0) == []
    assert pages_down([(0, 10), (40, 45)], {20: 60.0}, 1.0) == [40]
    assert pages_down([(0, 10), (45, 50)], {}, 0.5) == []
    # a piece longer than a page begins one and runs on; what follows counts from its end
    assert pages_down([(5, 120), (130, 150)], {}, 1.0) == [5, 130]


def test_rows_of_headings_repeat_in_print_and_pages_are_landscape() -> None:
    for sheet in _book().worksheets:
        assert sheet.page_setup.orientation == "landscape"
        assert sheet.print_title_rows
        assert sheet.freeze_panes
        assert "Page &P of &N" in _data().decode("latin-1") or sheet.oddFooter.right.text == "Page &P of &N"


def test_the_same_study_gives_the_same_bytes() -> None:
    assert result_workbook(made_up.outcome()) == _data()
