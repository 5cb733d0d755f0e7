"""The blank workbook as Excel and another reader see it."""

from __future__ import annotations

from datetime import date
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from study.workbook import check_workbook, write_workbook
from study.workbook.package.checks import validate_package
from study.workbook.sheets import SHEETS
from tests.faulty_workbooks import good


@pytest.fixture(scope="module")
def book(tmp_path_factory: pytest.TempPathFactory) -> Any:
    path = tmp_path_factory.mktemp("blank") / "good.xlsx"
    write_workbook(path, good.tables())
    return openpyxl.load_workbook(path)


def test_sheets_in_order(book: Any) -> None:
    assert book.sheetnames == [spec.name for spec in SHEETS]


@pytest.mark.parametrize("spec", SHEETS, ids=lambda spec: spec.name)
def test_each_sheet_is_a_table_under_a_title(book: Any, spec: Any) -> None:
    sheet = book[spec.name]
    (table,) = sheet.tables.values()
    headings = [cell.value for cell in sheet[4] if cell.value]
    assert sheet["A1"].value == spec.name
    assert spec.hint in sheet["A2"].value
    assert [column.name for column in table.tableColumns] == headings
    assert headings[: len(spec.columns)] == [column.heading for column in spec.columns]
    assert table.ref.startswith("A4:")
    assert sheet.freeze_panes == "B5"
    assert sheet.print_title_rows == "$4:$4"
    assert sheet.page_setup.orientation == "landscape"
    assert sheet.page_setup.paperSize in {"8", "9", 8, 9}


def test_closed_choices_are_drop_downs(book: Any) -> None:
    lists = {
        (name, next(iter(validation.sqref.ranges)).min_col): validation.formula1
        for name in book.sheetnames
        for validation in book[name].data_validations.dataValidation
        if validation.type == "list"
    }
    for spec in SHEETS:
        for number, column in enumerate(spec.columns, 1):
            if column.kind == "choice":
                assert lists[spec.name, number] == f'"{",".join(column.choices)}"'
            elif column.kind == "yes-no":
                assert lists[spec.name, number] == '"yes,no"'
            elif column.kind == "reference":
                assert lists[spec.name, number].endswith("_list")


def test_lists_of_names_follow_their_sheets(book: Any) -> None:
    used = {
        validation.formula1
        for name in book.sheetnames
        for validation in book[name].data_validations.dataValidation
        if validation.type == "list" and not str(validation.formula1).startswith('"')
    }
    assert used <= set(book.defined_names)
    assert "'Boards'!$A$5:INDEX(" in book.defined_names["Boards_list"].attr_text


def test_input_messages_fit_excel(book: Any) -> None:
    # Excel's limits of a validation: 32 characters of title, 255 of message and of list.
    for name in book.sheetnames:
        for validation in book[name].data_validations.dataValidation:
            assert len(validation.promptTitle or "") <= 32
            assert len(validation.prompt or "") <= 255
            assert len(validation.formula1 or "") <= 257


def test_required_headings_are_marked(book: Any) -> None:
    for spec in SHEETS:
        for cell, column in zip(book[spec.name][4], spec.columns, strict=False):
            dark = cell.fill.fgColor.rgb == "FF1F4E6B"
            assert dark == (column.blank == "required" and not column.when)


def test_text_is_never_a_formula(tmp_path: Path) -> None:
    tables = good.tables()
    tables["Loads"][0]["Description"] = "=1+1"
    tables["Loads"][1]["Description"] = "+49 30"
    tables["Loads"][2]["Description"] = "http://example.invalid"
    path = tmp_path / "text.xlsx"
    write_workbook(path, tables)
    cells = [openpyxl.load_workbook(path)["Loads"].cell(row, 3) for row in (5, 6, 7)]
    assert [cell.value for cell in cells] == ["=1+1", "+49 30", "http://example.invalid"]
    # openpyxl calls any text with = in front a formula; the file must hold it as a shared text.
    plant, _ = check_workbook(path)
    assert plant is not None
    assert plant.load("Pump").description == "=1+1"


def test_same_bytes_every_time(tmp_path: Path) -> None:
    first, second = tmp_path / "a.xlsx", tmp_path / "b.xlsx"
    write_workbook(first, good.tables())
    write_workbook(second, good.tables())
    assert first.read_bytes() == second.read_bytes()


def test_package_is_sound(tmp_path: Path) -> None:
    path = tmp_path / "blank.xlsx"
    write_workbook(path)
    assert validate_package(path.read_bytes()) == []


def test_blank_holds_items_limits_and_modes(tmp_path: Path) -> None:
    path = tmp_path / "blank.xlsx"
    write_workbook(path)
    sheets = openpyxl.load_workbook(path)
    assert [row[0].value for row in sheets["Project"].iter_rows(min_row=5, max_row=7)] == [
        "Vessel", "Hull number", "Document number",
    ]  # fmt: skip
    assert sheets["Acceptance"]["A5"].value == "Close margin"
    assert [cell.value for cell in sheets["Running"][4]] == [
        "Equipment", "At sea", "Manoeuvring", "Harbour", "Emergency",
    ]  # fmt: skip
    assert "Harbour: load factor [%]" in [cell.value for cell in sheets["Demand"][4]]


def test_headings_keep_the_words_of_the_rows(tmp_path: Path) -> None:
    tables = good.tables()
    for row in tables["Gensets"]:
        row["Engine power [MW]"] = row.pop("Engine power [kW]") / 1000.0
        row["# maker"] = "invented"
    path = tmp_path / "units.xlsx"
    write_workbook(path, tables)
    headings = [cell.value for cell in openpyxl.load_workbook(path)["Gensets"][4]]
    assert "Engine power [MW]" in headings
    assert "Engine power [kW]" not in headings
    assert headings[-1] == "# maker"
    plant, _ = check_workbook(path)
    assert plant is not None
    assert plant.genset("DG1").p_engine_kw == 425.0


def test_values_of_every_kind(tmp_path: Path) -> None:
    tables = good.tables()
    tables["Project"][4]["Value"] = date(2025, 3, 14)
    tables["Transfers"][0]["Automatic"] = True
    tables["Modes"][0]["Sets that may run together in change-over"] = ("DG1", "DG2")
    path = tmp_path / "kinds.xlsx"
    write_workbook(path, tables)
    plant, _ = check_workbook(path)
    assert plant is not None
    assert plant.project.date == "2025-03-14"
    assert plant.transfers[0].automatic
    assert plant.modes[0].changeover_sets == ("DG1", "DG2")


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"Boardz": []}, "no input sheet “Boardz”"),
        ({"Boards": [{"Bord": "MSB"}]}, "nearly “Board”"),
        ({"Boards": [{"Maker": "MSB"}]}, "“Maker”: is not known"),
        ({"Acceptance": [{"Quantity": "Nonsense", "Limit": 1}]}, "no quantity “Nonsense”"),
    ],
)
def test_tables_that_fit_no_sheet(tmp_path: Path, change: Any, words: str) -> None:
    with pytest.raises(ValueError, match=words):
        write_workbook(tmp_path / "no.xlsx", good.tables() | change)
