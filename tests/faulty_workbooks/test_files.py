"""Faults through real files, as the spreadsheet program stores them; and files that are no workbook."""

from __future__ import annotations

import zipfile
from collections.abc import Callable
from datetime import datetime
from pathlib import Path
from typing import Any

import openpyxl
import pytest
import xlsxwriter

from study.issues import PackageError
from study.workbook import check_workbook, write_workbook
from study.workbook.sheet_xml import ErrorValue, Percent, ResultFormula
from tests.faulty_workbooks import good
from tests.faulty_workbooks.cases_plant import NAMES, TOPOLOGY
from tests.faulty_workbooks.cases_reading import CELLS, HEADINGS, ITEMS
from tests.faulty_workbooks.grids import good_grids, has, listing, write
from tests.faulty_workbooks.spoil import Fault

# Every sixth case of the tables goes through a file as well; doubled sheets cannot be written by a writer.
THROUGH_FILES = [*HEADINGS, *ITEMS, *CELLS, *NAMES, *TOPOLOGY][::6]


@pytest.mark.parametrize("case", THROUGH_FILES, ids=lambda case: f"{case.code}: {case.name}")
def test_fault_through_a_file(case: Fault, tmp_path: Path) -> None:
    grids = good_grids()
    for spoil in case.spoil:
        spoil(grids)
    path = tmp_path / "spoilt.xlsx"
    write(grids, path)
    plant, issues = check_workbook(path)
    cell = "" if case.row is None else grids[case.sheet].cell(case.row, case.heading)
    assert has(issues, case.code, case.sheet, cell), listing(issues)
    assert (plant is None) == any(issue.severity == "fault" for issue in issues)


@pytest.mark.parametrize(
    ("value", "code"),
    [
        (ErrorValue("#DIV/0!"), "error-value"),
        (ErrorValue("#N/A"), "error-value"),
        (ErrorValue("#REF!"), "error-value"),
        (ErrorValue("#VALUE!"), "error-value"),
        (ErrorValue("#NAME?"), "error-value"),
        (ErrorValue("#NUM!"), "error-value"),
        (ErrorValue("#NULL!"), "error-value"),
        (ResultFormula("'R Load flow'!B2"), "result-formula"),
        (datetime(2025, 5, 4), "date-for-number"),
        (True, "truth-for-number"),
        ("12,5", "decimal-comma"),
        ("1\u00a0200", "text-number"),
        (Percent(0.3), "percent-format"),
    ],
)
def test_value_as_the_file_stores_it(value: Any, code: str, tmp_path: Path) -> None:
    grids = good_grids()
    grids["Loads"].put(0, "Rated output [kW]", value)
    path = tmp_path / "spoilt.xlsx"
    write(grids, path)
    plant, issues = check_workbook(path)
    assert plant is None
    assert has(issues, code, "Loads", "G5"), listing(issues)


def test_formulas_that_were_never_calculated(tmp_path: Path) -> None:
    path = tmp_path / "openpyxl.xlsx"
    write_workbook(path, good.tables())
    book = openpyxl.load_workbook(path)
    book["Loads"]["G5"] = "=15*2"
    book["Gensets"]["B5"] = '="MSB"&" A"'
    book["Boards"]["I5"] = "=1+1"
    book.save(path)
    plant, issues = check_workbook(path)
    assert plant is None
    for sheet, cell in (("Loads", "G5"), ("Gensets", "B5"), ("Boards", "I5")):
        assert has(issues, "no-stored-value", sheet, cell), listing(issues)


def test_stored_values_of_formulas_are_read(tmp_path: Path) -> None:
    grids = good_grids()
    path = tmp_path / "formulas.xlsx"
    write(grids, path)
    with zipfile.ZipFile(path) as package:
        parts = {name: package.read(name) for name in package.namelist()}
    loads = next(name for name in parts if b"<v>0.92</v>" in parts[name] and "sheet" in name)
    parts[loads] = parts[loads].replace(b"<v>0.92</v>", b"<f>92/100</f><v>0.92</v>")
    with zipfile.ZipFile(path, "w") as package:
        for name, data in parts.items():
            package.writestr(name, data)
    plant, issues = check_workbook(path)
    assert plant is not None, listing(issues)
    assert plant.load("Pump").efficiency == 0.92


def test_droop_shown_as_a_percentage_is_read_as_shown(tmp_path: Path) -> None:
    grids = good_grids()
    grids["Gensets"].put(0, "Voltage droop [%]", Percent(0.04))
    path = tmp_path / "percent.xlsx"
    write(grids, path)
    plant, issues = check_workbook(path)
    assert plant is not None, listing(issues)
    assert plant.genset("DG1").regulator.droop_pu == 0.04
    assert has(issues, "percent-read", "Gensets", "AU5"), listing(issues)


def test_doubled_sheet_in_a_damaged_file(tmp_path: Path) -> None:
    path = tmp_path / "doubled.xlsx"
    write(good_grids(), path)
    with zipfile.ZipFile(path) as package:
        parts = {name: package.read(name) for name in package.namelist()}
    parts["xl/workbook.xml"] = parts["xl/workbook.xml"].replace(b'name="Filters"', b'name="loads"')
    with zipfile.ZipFile(path, "w") as package:
        for name, data in parts.items():
            package.writestr(name, data)
    plant, issues = check_workbook(path)
    assert plant is None
    assert any(issue.code == "doubled-sheet" for issue in issues), listing(issues)


def test_a_table_that_starts_elsewhere(tmp_path: Path) -> None:
    path = tmp_path / "moved.xlsx"
    grids = good_grids()
    grids["Loads"].put(0, "Rated output [kW]", -1.0)
    with xlsxwriter.Workbook(path) as book:
        for name, grid in grids.items():
            sheet = book.add_worksheet(name)
            sheet.write("A1", "our own notes")
            for row, line in enumerate([grid.headings, *grid.rows], 9):
                for column, value in enumerate(line, 3):
                    if value is not None:
                        sheet.write(row, column, value)
    plant, issues = check_workbook(path)
    assert plant is None
    assert [(i.code, i.sheet, i.cell) for i in issues] == [("out-of-range", "Loads", "J11")]


def _nothing(path: Path) -> None:
    path.write_bytes(b"")


def _text(path: Path) -> None:
    path.write_text("Board;Voltage\nMSB;450\n")


def _half(path: Path) -> None:
    write_workbook(path)
    data = path.read_bytes()
    path.write_bytes(data[: len(data) // 2])


def _old_format(path: Path) -> None:
    path.write_bytes(bytes.fromhex("d0cf11e0a1b11ae1") + bytes(4096))


def _plain_zip(path: Path) -> None:
    with zipfile.ZipFile(path, "w") as package:
        package.writestr("readme.txt", "no workbook")


def _bomb(path: Path) -> None:
    write_workbook(path)
    with zipfile.ZipFile(path) as package:
        parts = {name: package.read(name) for name in package.namelist()}
    name = "xl/worksheets/sheet1.xml"
    parts[name] = parts[name].replace(b"</worksheet>", b" " * 60_000_000 + b"</worksheet>")
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as package:
        for part, data in parts.items():
            package.writestr(part, data)


@pytest.mark.parametrize("spoil", [_nothing, _text, _half, _old_format, _plain_zip, _bomb])
def test_a_file_that_is_no_workbook(spoil: Callable[[Path], None], tmp_path: Path) -> None:
    path = tmp_path / "book.xlsx"
    spoil(path)
    with pytest.raises(PackageError, match=r"book\.xlsx: "):
        check_workbook(path)


def test_a_file_that_is_not_there(tmp_path: Path) -> None:
    with pytest.raises(PackageError, match="no such file"):
        check_workbook(tmp_path / "none.xlsx")


def _laid_out(path: Path, change: Callable[[Any, dict[str, Any]], None]) -> None:
    """Write the good workbook with openpyxl, changed in what only a file has: merged cells, hidden rows."""
    write(good_grids(), path)
    book = openpyxl.load_workbook(path)
    change(book, {name: book[name] for name in book.sheetnames})
    book.save(path)


def test_merged_cells_above_the_headings_are_the_engineers(tmp_path: Path) -> None:
    def change(_: Any, sheets: dict[str, Any]) -> None:
        sheets["Loads"]["A2"] = "Consumers of the vessel"
        sheets["Loads"].merge_cells("A2:H3")

    path = tmp_path / "merged.xlsx"
    _laid_out(path, change)
    plant, issues = check_workbook(path)
    assert plant is not None, listing(issues)
    assert issues == ()


def test_a_heading_merged_over_two_columns_leaves_one_without(tmp_path: Path) -> None:
    """Only the first of merged cells holds the text."""

    def change(_: Any, sheets: dict[str, Any]) -> None:
        sheets["Loads"].merge_cells("F4:G4")

    path = tmp_path / "merged.xlsx"
    _laid_out(path, change)
    plant, issues = check_workbook(path)
    assert plant is None
    assert [(i.code, i.address) for i in issues] == [("missing-heading", "Loads!A4")], listing(issues)
    assert "Rated output [kW]" in issues[0].found


def test_a_heading_merged_over_two_rows_is_one_heading(tmp_path: Path) -> None:
    def change(_: Any, sheets: dict[str, Any]) -> None:
        sheets["Filters"].insert_rows(5)
        for column in range(1, 8):
            sheets["Filters"].merge_cells(start_row=4, end_row=5, start_column=column, end_column=column)

    path = tmp_path / "merged.xlsx"
    _laid_out(path, change)
    plant, issues = check_workbook(path)
    assert plant is not None, listing(issues)
    assert len(plant.filters) == 1


def test_names_merged_over_rows_are_missed(tmp_path: Path) -> None:
    """A name merged over two rows names the first alone."""

    def change(_: Any, sheets: dict[str, Any]) -> None:
        sheets["Loads"].merge_cells("A5:A6")

    path = tmp_path / "merged.xlsx"
    _laid_out(path, change)
    plant, issues = check_workbook(path)
    assert plant is None
    assert has(issues, "missing-name", "Loads", "A6"), listing(issues)


def test_hidden_rows_columns_and_sheets_are_read_like_any_other(tmp_path: Path) -> None:
    """A filter hides rows; the plant does not lose them by it."""

    def change(book: Any, sheets: dict[str, Any]) -> None:
        sheets["Loads"].row_dimensions[6].hidden = True
        sheets["Loads"].column_dimensions["G"].hidden = True
        sheets["Cables"].sheet_state = "hidden"
        book["Devices"].sheet_state = "veryHidden"

    path = tmp_path / "hidden.xlsx"
    _laid_out(path, change)
    plant, issues = check_workbook(path)
    assert plant is not None, listing(issues)
    grids = good_grids()
    assert len(plant.loads) == len(grids["Loads"].rows)
    assert len(plant.cables) == len(grids["Cables"].rows)
    assert len(plant.devices) == len(grids["Devices"].rows)

    def spoil(book: Any, sheets: dict[str, Any]) -> None:
        change(book, sheets)
        sheets["Loads"]["G6"] = -1

    _laid_out(path, spoil)
    plant, issues = check_workbook(path)
    assert plant is None
    assert has(issues, "out-of-range", "Loads", "G6"), listing(issues)
