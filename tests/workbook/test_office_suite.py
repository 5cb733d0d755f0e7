"""The demonstration vessel with its results in an office suite: opened, printed, saved, and studied again."""

from __future__ import annotations

import json
import shutil
import subprocess
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from study.cli import main
from study.workbook.package import validate_package

OFFICE_SUITE = shutil.which("soffice")
DEMO = Path(__file__).parents[2] / "workbooks" / "workboat.xlsx"


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Run the study, let the office suite print and save the workbook, and run again on what it saved."""
    if OFFICE_SUITE is None:
        pytest.skip("LibreOffice (soffice) is not on the path")
    folder = tmp_path_factory.mktemp("office")
    book = folder / "vessel.xlsx"
    shutil.copyfile(DEMO, book)
    assert main(["run", str(book), "--quiet"]) == 0
    profile = f"-env:UserInstallation={(folder / 'profile').as_uri()}"
    for kind, out in (("pdf", "printed"), ("xlsx:Calc MS Excel 2007 XML", "saved")):
        subprocess.run(
            [OFFICE_SUITE, profile, "--headless", "--convert-to", kind, "--outdir", str(folder / out), book],
            check=True, capture_output=True, timeout=300,
        )  # fmt: skip
    shutil.copyfile(folder / "saved" / "vessel.xlsx", folder / "as-saved.xlsx")
    assert main(["run", str(folder / "saved" / "vessel.xlsx"), "--quiet"]) == 0
    return folder


def sheet_names(path: Path) -> list[str]:
    book = openpyxl.load_workbook(path, read_only=True)
    try:
        return list(book.sheetnames)
    finally:
        book.close()


def results(path: Path) -> dict[str, Any]:
    document: dict[str, Any] = json.loads(path.read_text("utf-8"))
    return document


def test_every_result_sheet_is_printed(folder: Path) -> None:
    if shutil.which("pdftotext") is None:
        pytest.skip("pdftotext is not on the path")
    done = subprocess.run(
        ["pdftotext", str(folder / "printed" / "vessel.pdf"), "-"], check=True, capture_output=True, text=True
    )
    names = sheet_names(folder / "vessel.xlsx")
    missing = [name for name in names if name.startswith("R ") and name not in done.stdout]
    assert missing == []
    assert "Demonstration workboat" in done.stdout


def test_what_the_office_suite_saves_is_sound_and_studied_alike(folder: Path) -> None:
    assert validate_package((folder / "as-saved.xlsx").read_bytes()) == []
    first = results(folder / "vessel-results.json")
    again = results(folder / "saved" / "vessel-results.json")
    assert again["input"].pop("sha256_of_input_cells") == first["input"].pop("sha256_of_input_cells")
    assert again == first


def test_the_sheets_of_the_first_run_are_replaced(folder: Path) -> None:
    data = (folder / "saved" / "vessel.xlsx").read_bytes()
    assert validate_package(data) == []
    before = sheet_names(folder / "as-saved.xlsx")
    assert sheet_names(folder / "saved" / "vessel.xlsx") == before
    assert main(["run", str(folder / "saved" / "vessel.xlsx"), "--quiet"]) == 0
    assert (folder / "saved" / "vessel.xlsx").read_bytes() == data
