"""Other programs open the file, save it, and the next run still knows its own sheets."""

from __future__ import annotations

import io
import posixpath
import shutil
import subprocess
import warnings

import openpyxl
import pytest
import python_calamine
from lxml import etree

from study.workbook.package import graft_result_sheets, validate_package
from tests.workbook.package.samples import (
    MAIN,
    OFFICE,
    VBA,
    engineers_book,
    openpyxl_book,
    packed_book,
    parts,
    result_book,
    saved_by_openpyxl,
)
from tests.workbook.package.test_rerun import between, local_names, sheet_list

OFFICE_SUITE = shutil.which("soffice")
BOOKS = {"XlsxWriter": engineers_book, "openpyxl": openpyxl_book, "macros": packed_book}


def load(data):
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        return openpyxl.load_workbook(io.BytesIO(data))


def table(data, sheet):
    return (
        python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(data)).get_sheet_by_name(sheet).to_python()
    )


@pytest.fixture(scope="module")
def converted(tmp_path_factory):
    """Each grafted workbook as LibreOffice saves and prints it; one start of the program for each format."""
    if OFFICE_SUITE is None:
        pytest.skip("LibreOffice (soffice) is not on the path")
    folder = tmp_path_factory.mktemp("office")
    paths = []
    for name, make in BOOKS.items():
        paths.append(folder / f"{name}.xlsx")
        paths[-1].write_bytes(graft_result_sheets(make(), result_book(value=3.5)))
    paths.append(folder / "between.xlsx")
    paths[-1].write_bytes(between(graft_result_sheets(engineers_book(), result_book(value=3.5))))
    profile = f"-env:UserInstallation={(folder / 'profile').as_uri()}"
    for kind, out in (("xlsx:Calc MS Excel 2007 XML", "saved"), ("pdf", "printed")):
        command = [OFFICE_SUITE, profile, "--headless", "--convert-to", kind, "--outdir", str(folder / out)]
        subprocess.run([*command, *map(str, paths)], check=True, capture_output=True, timeout=240)
    return folder


@pytest.mark.parametrize("book", BOOKS)
def test_a_save_by_libreoffice_in_between(converted, book):
    saved = (converted / "saved" / f"{book}.xlsx").read_bytes()
    assert validate_package(saved) == []
    again = graft_result_sheets(saved, result_book(value=8))
    assert validate_package(again) == []
    assert load(again).sheetnames == load(saved).sheetnames
    assert load(again)["R Summary"]["B3"].value == 8
    assert load(again)["R Summary"].defined_names["StudyResultSheet"].hidden
    assert graft_result_sheets(again, result_book(value=8)) == again
    first = load(graft_result_sheets(BOOKS[book](), result_book(value=8)))
    for cell in ("A1", "A2", "B3", "B7", "A4"):
        twin = load(again)["R Load flow"][cell]
        assert repr((twin.font, twin.fill)) == repr(
            (first["R Load flow"][cell].font, first["R Load flow"][cell].fill)
        )
        assert twin.number_format == first["R Load flow"][cell].number_format


def parts_of_result_sheets(content):
    """Result sheets and what hangs on them, by the relations as lxml reads them."""
    book = etree.fromstring(content["xl/workbook.xml"])
    targets = relation_targets(content, "xl/workbook.xml")
    ours = [
        targets[sheet.get(f"{{{OFFICE}}}id")]
        for sheet in book.iter(f"{{{MAIN}}}sheet")
        if sheet.get("name").startswith("R ")
    ]
    for part in ours:
        ours += [target for target in relation_targets(content, part).values() if target not in ours]
    return {*ours, *map(rels_of, ours)}


def rels_of(part):
    folder, _, name = part.rpartition("/")
    return f"{folder}/_rels/{name}.rels"


def relation_targets(content, part):
    if rels_of(part) not in content:
        return {}
    folder = part.rpartition("/")[0]
    return {
        row.get("Id"): posixpath.normpath(posixpath.join(f"/{folder}", row.get("Target"))).lstrip("/")
        for row in etree.fromstring(content[rels_of(part)])
        if row.get("TargetMode") != "External"
    }


@pytest.mark.parametrize("book", BOOKS)
def test_every_part_that_libreoffice_wrote_for_the_engineer_keeps_its_bytes(converted, book):
    """Pictures, charts, comments, tables, conditional formats, checks, names and properties among them."""
    before = parts((converted / "saved" / f"{book}.xlsx").read_bytes())
    after = parts(
        graft_result_sheets((converted / "saved" / f"{book}.xlsx").read_bytes(), result_book(value=8))
    )
    may_change = parts_of_result_sheets(before) | {
        "xl/workbook.xml", "xl/_rels/workbook.xml.rels", "[Content_Types].xml", "xl/styles.xml",
    }  # fmt: skip
    changed = {name for name, data in before.items() if after.get(name) != data}
    assert changed <= may_change
    kept = {name for name in before if name not in may_change}
    assert any(name.startswith("xl/worksheets/sheet") for name in kept)
    assert any(name.startswith("xl/drawings/") for name in kept)
    assert "docProps/core.xml" in kept


def test_sheets_put_between_and_saved_by_libreoffice(converted):
    """Order, hidden sheets, active tab, names, print titles and areas, and formulas on results."""
    saved = (converted / "saved" / "between.xlsx").read_bytes()
    second = graft_result_sheets(saved, result_book(value=8))
    assert validate_package(second) == []
    assert sheet_list(second) == sheet_list(saved)
    assert [(row[0], row[3]) for row in sheet_list(second)] == [
        ("Loads", "visible"), ("R notes of mine", "visible"), ("Hidden", "hidden"), ("R Summary", "visible"),
        ("Mine between", "visible"), ("R Load flow", "hidden"), ("Mine behind", "visible"),
    ]  # fmt: skip
    mine = {key: text for key, text in local_names(saved).items() if not key[1].startswith("R ")}
    assert ("Own", "Mine between") in mine
    assert {name for name, _ in mine} >= {"_xlnm.Print_Titles", "_xlnm.Print_Area"}
    assert {k: v for k, v in local_names(second).items() if not k[1].startswith("R ")} == mine
    book = load(second)
    assert book.active.title == "Mine behind"
    assert book["Mine between"]["A1"].value == "='R Load flow'!B3"
    assert book["R notes of mine"]["A1"].value == "='R Summary'!B3*2"
    assert book.defined_names["Last_result"].value == "'R Summary'!$B$3"
    assert book["R Load flow"]["B3"].value == 8
    assert graft_result_sheets(second, result_book(value=8)) == second


@pytest.mark.parametrize("book", BOOKS)
def test_libreoffice_reads_the_results(converted, book):
    saved = (converted / "saved" / f"{book}.xlsx").read_bytes()
    rows = table(saved, "R Summary")
    assert rows[0][0] == "R Summary"
    assert rows[1][:4] == ["=HYPERLINK(A1)", "@cmd", '+1 dxfId="0" s="1" <c r="A1">', "-2"]
    assert rows[2][:2] == ["two kinds of text", 3.5]
    assert rows[5][:3] == ["Board", "Value", "Verdict"]
    assert rows[6][:3] == ["MSB 0", 3.5, "within"]
    if book == "openpyxl":
        # A reference with no stored value, so LibreOffice had to follow it.
        assert table(saved, "Other")[0][0] == 3.5
    assert len(load(saved)["R Summary"]._charts) == 1
    assert (converted / "printed" / f"{book}.pdf").stat().st_size > 10_000


@pytest.mark.parametrize("book", ["XlsxWriter", "openpyxl"])
def test_a_save_by_openpyxl_in_between(book):
    saved = saved_by_openpyxl(graft_result_sheets(BOOKS[book](), result_book(value=3.5)))
    again = graft_result_sheets(saved, result_book(value=8))
    assert validate_package(again) == []
    assert load(again).sheetnames == load(saved).sheetnames
    assert load(again)["R Summary"]["B3"].value == 8
    assert graft_result_sheets(again, result_book(value=8)) == again
    untouched = {n: c for n, c in parts(saved).items() if n.startswith(("xl/worksheets/sheet1", "docProps"))}
    assert untouched.items() <= parts(again).items()


def test_macros_after_a_save_by_openpyxl():
    out = io.BytesIO()
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        data = graft_result_sheets(engineers_book(macros=True), result_book())
        book = openpyxl.load_workbook(io.BytesIO(data), keep_vba=True)
        book.save(out)
        book.vba_archive.close()
    again = graft_result_sheets(out.getvalue(), result_book(value=8))
    assert parts(again)["xl/vbaProject.bin"] == VBA
    assert load(again)["R Summary"]["B3"].value == 8
