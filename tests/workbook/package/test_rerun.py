"""The next run: the same bytes for the same input, and the engineer's changes in between respected."""

from __future__ import annotations

import io
import re
import warnings
import zipfile

import openpyxl
import pytest
import xlsxwriter
from lxml import etree
from openpyxl.workbook.defined_name import DefinedName

from study.issues import PackageError
from study.workbook import own_work_on_results
from study.workbook.package import graft_result_sheets, validate_package
from study.workbook.package.opc import package_from_bytes
from study.workbook.reader import read_package
from tests.workbook.package.samples import (
    MAIN,
    OFFICE,
    edited,
    engineers_book,
    openpyxl_book,
    packed_book,
    parts,
    result_book,
    rezip,
)

NS = {"m": MAIN}
BOOKS = {"XlsxWriter": engineers_book, "openpyxl": openpyxl_book, "packed": packed_book}


def load(data):
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        return openpyxl.load_workbook(io.BytesIO(data))


def saved(book):
    out = io.BytesIO()
    book.save(out)
    return out.getvalue()


def sheet_list(data):
    """Name, sheetId, relation id, state and target of each sheet."""
    content = parts(data)
    targets = {r.get("Id"): r.get("Target") for r in etree.fromstring(content["xl/_rels/workbook.xml.rels"])}
    rows = []
    for node in etree.fromstring(content["xl/workbook.xml"]).iterfind(".//m:sheet", NS):
        ident = node.get(f"{{{OFFICE}}}id")
        target = targets[ident]
        path = target.lstrip("/") if target.startswith("/") else f"xl/{target}"
        rows.append((node.get("name"), node.get("sheetId"), ident, node.get("state", "visible"), path))
    return rows


def local_names(data):
    book = etree.fromstring(parts(data)["xl/workbook.xml"])
    names = [s.get("name") for s in book.iterfind(".//m:sheet", NS)]
    return {
        (d.get("name"), names[int(d.get("localSheetId"))]): d.text
        for d in book.iterfind(".//m:definedName", NS)
        if d.get("localSheetId")
    }


@pytest.mark.parametrize("book", BOOKS)
def test_the_same_results_give_the_same_file(book):
    first = graft_result_sheets(BOOKS[book](), result_book())
    assert graft_result_sheets(first, result_book()) == first


def test_new_values_come_and_everything_else_stays():
    first = graft_result_sheets(packed_book(), result_book(value=3.5))
    second = graft_result_sheets(first, result_book(value=9.75, rows=5))
    assert sheet_list(second) == sheet_list(first)
    assert list(parts(second)) == list(parts(first))
    assert load(second)["R Summary"]["B3"].value == 9.75
    assert load(second)["R Summary"].tables["tbl_R_Summary"].ref == "A6:C11"
    assert validate_package(second) == []
    before, after = parts(first), parts(second)
    changed = {n for n in before if before[n] != after[n]}
    assert {"xl/styles.xml", "xl/workbook.xml", "[Content_Types].xml"}.isdisjoint(changed)
    assert all(
        re.match(r"xl/(worksheets/sheet[45]|charts/chart\d|tables/table[23])\.xml", n) for n in changed
    )


def test_going_back_to_old_results_gives_the_old_file():
    first = graft_result_sheets(packed_book(), result_book(value=3.5))
    second = graft_result_sheets(first, result_book(value=9.75, rows=5))
    assert graft_result_sheets(second, result_book(value=3.5)) == first


def test_parts_that_do_not_change_are_not_compressed_anew():
    """Another program may have saved with a better or no compression."""
    first = graft_result_sheets(engineers_book(), result_book())
    stored = rezip(parts(first), zipfile.ZIP_STORED)
    with zipfile.ZipFile(io.BytesIO(graft_result_sheets(stored, result_book()))) as package:
        assert {i.compress_type for i in package.infolist()} == {zipfile.ZIP_STORED}


def test_references_of_the_engineers_hold():
    first = graft_result_sheets(engineers_book(), result_book())
    second = graft_result_sheets(first, result_book(value=8))
    assert load(second)["R notes of mine"]["A1"].value == "='R Summary'!B3*2"
    assert load(second).defined_names["Last_result"].value == "'R Summary'!$B$3"
    assert validate_package(second) == []


def between(data):
    """The engineer adds sheets between and behind ours, with print titles and a name of their own."""
    book = load(data)
    for title, place in (("Mine between", 4), ("Mine behind", None)):
        sheet = book.create_sheet(title, place)
        sheet["A1"] = "='R Load flow'!B3"
        sheet.print_title_rows = "1:1"
        sheet.defined_names["Own"] = DefinedName("Own", attr_text=f"'{title}'!$A$1")
    book["R Load flow"].sheet_state = "hidden"
    book.active = book.sheetnames.index("Mine behind")
    return saved(book)


def test_what_was_written_on_result_sheets_is_listed():
    first = graft_result_sheets(engineers_book(), result_book())
    assert own_work_on_results(package_from_bytes(first)) == ("comments on R Load flow",)
    content = parts(first)
    part = next(row[4] for row in sheet_list(first) if row[0] == "R Summary")
    content[part] = re.sub(
        rb"</row>",
        b'<c r="M1"><f t="shared" ref="M1:M2" si="0">$A1*2</f><v>1</v></c></row>',
        content[part],
        count=1,
    )
    later = content[part].index(b'<row r="2"')
    content[part] = content[part][:later] + content[part][later:].replace(
        b"</row>", b'<c r="M2"><f t="shared" si="0"/><v>1</v></c></row>', 1
    )
    assert own_work_on_results(package_from_bytes(rezip(content))) == (
        "R Summary!M1 (=$A1*2)",
        "R Summary!M2 (=$A2*2)",
        "comments on R Load flow",
    )


def test_names_of_result_sheets_make_no_sheet_be_read_for_formulas(monkeypatch):
    """Print titles and marks of the last run name result sheets; only the engineer's own formulas count."""
    book = load(openpyxl_book())
    del book["Other"]
    first = graft_result_sheets(saved(book), result_book())
    monkeypatch.setattr("study.workbook.reader.read_cells", None)
    assert [s.name for s in read_package(package_from_bytes(first), "x").sheets] == ["Loads"]


def test_sheets_put_between_stay_where_they_are():
    first = between(graft_result_sheets(engineers_book(), result_book()))
    second = graft_result_sheets(first, result_book(value=8))
    names = ["Loads", "R notes of mine", "Hidden", "R Summary", "Mine between", "R Load flow", "Mine behind"]
    assert [row[0] for row in sheet_list(second)] == names
    assert sheet_list(second) == sheet_list(first)
    assert [row[3] for row in sheet_list(second)][5] == "hidden"
    kept = {k: v for k, v in local_names(first).items() if not k[1].startswith("R ")}
    assert {k: v for k, v in local_names(second).items() if not k[1].startswith("R ")} == kept
    assert load(second).active.title == "Mine behind"
    assert graft_result_sheets(second, result_book(value=8)) == second


def test_a_sheet_no_longer_made_goes_and_positions_follow():
    first = between(graft_result_sheets(openpyxl_book(), result_book(("R Load flow", "R Gone", "R Last"))))
    second = graft_result_sheets(first, result_book(("R Load flow", "R Last")))
    assert validate_package(second) == []
    names = ["Loads", "Other", "R Load flow", "Mine between", "R Last", "Mine behind"]
    assert [row[0] for row in sheet_list(second)] == names
    assert load(second).active.title == "Mine behind"
    kept = {k: v for k, v in local_names(first).items() if k[1] != "R Gone"}
    assert local_names(second) == kept
    gone = next(row[4] for row in sheet_list(first) if row[0] == "R Gone")
    content = parts(second)
    assert gone not in content
    assert b"R Gone" not in content["xl/workbook.xml"]
    assert f"/{gone}".encode() not in content["[Content_Types].xml"]
    assert not any(b"R Gone" in c for n, c in content.items() if n.startswith(("xl/charts", "xl/tables")))
    assert graft_result_sheets(second, result_book(("R Load flow", "R Last"))) == second


def test_the_active_tab_of_a_sheet_that_goes_is_handed_over():
    book = load(graft_result_sheets(engineers_book(), result_book(("R Load flow", "R Gone"))))
    book["Loads"].sheet_state = "hidden"
    book.active = book.sheetnames.index("R Gone")
    second = graft_result_sheets(saved(book), result_book(("R Load flow",)))
    assert validate_package(second) == []
    assert load(second).active.title == "R notes of mine"


@pytest.mark.parametrize(
    "formula",
    ["='R Gone'!B3", "=SUM('R gone'!B3,1)", "=SUM(tbl_R_Gone[Value])", "=SUM('R Load flow:R Gone'!B3)"],
)
def test_a_sheet_no_longer_made_but_referred_to_shows_no_old_number(formula):
    book = load(graft_result_sheets(engineers_book(), result_book(("R Load flow", "R Gone"))))
    book["Loads"]["J1"] = formula
    first = saved(book)
    second = graft_result_sheets(first, result_book(("R Load flow",)))
    assert validate_package(second) == []
    sheet = load(second)["R Gone"]
    values = {c.coordinate: c.value for row in sheet.iter_rows() for c in row if c.value is not None}
    headings = {"A6": "Board", "B6": "Value", "C6": "Verdict"}
    assert {k: v for k, v in values.items() if k in headings} == headings
    assert values["A1"].startswith("Not part of the latest run")
    assert {v for k, v in values.items() if k not in headings and k != "A1"} == {"#N/A"}
    assert values["B3"] == values["B7"] == "#N/A"
    assert graft_result_sheets(second, result_book(("R Load flow",))) == second
    third = graft_result_sheets(second, result_book(("R Load flow", "R Gone"), value=6))
    assert load(third)["R Gone"]["B3"].value == 6
    assert validate_package(third) == []


def test_a_reference_in_a_name_or_a_chart_counts_too():
    for data in (
        edited(
            graft_result_sheets(engineers_book(), result_book(("R Load flow", "R Gone"))),
            workbook=lambda c: c.replace(b"'R Summary'!$B$3", b"'R Gone'!$B$3"),
        ),
        graft_result_sheets(
            rezip(
                {
                    n: c.replace(b"'R Summary'!$B$7", b"'R Gone'!$B$7")
                    for n, c in parts(engineers_book()).items()
                }
            ),
            result_book(("R Load flow", "R Gone")),
        ),
    ):
        assert b"R Gone" in parts(data)["xl/workbook.xml"]
        second = graft_result_sheets(data, result_book(("R Load flow",)))
        assert "R Gone" in load(second).sheetnames


def test_a_copy_that_the_engineer_made_is_his():
    """A copy in a spreadsheet program takes the sheet-scoped names along, the mark among them."""
    book = load(graft_result_sheets(engineers_book(), result_book()))
    copy = book.copy_worksheet(book["R Summary"])
    copy.title = "R Summary (2)"
    copy.defined_names["StudyResultSheet"] = DefinedName(
        "StudyResultSheet", attr_text='"R Summary"', hidden=True
    )
    first = saved(book)
    second = graft_result_sheets(first, result_book(value=8))
    assert load(second)["R Summary (2)"]["B3"].value == 3.5
    assert load(second)["R Summary"]["B3"].value == 8
    part = next(row[4] for row in sheet_list(second) if row[0] == "R Summary (2)")
    assert parts(second)[part] == parts(first)[part]


def test_a_result_sheet_that_the_engineer_renamed_is_his():
    book = load(graft_result_sheets(engineers_book(), result_book()))
    book["R Summary"].title = "Rev A"
    second = graft_result_sheets(saved(book), result_book(value=8))
    assert load(second)["Rev A"]["B3"].value == 3.5
    assert load(second)["R Summary"]["B3"].value == 8
    assert validate_package(second) == []


def test_a_sheet_without_the_mark_is_not_taken():
    def unmarked(content):
        return re.sub(
            rb"<definedName name=.StudyResultSheet. localSheetId=.3.[^/]*/definedName>", b"", content
        )

    first = edited(graft_result_sheets(engineers_book(), result_book()), workbook=unmarked)
    with pytest.raises(PackageError, match="sheet of its own named 'R Summary'"):
        graft_result_sheets(first, result_book())


def test_names_of_the_engineers_on_a_result_sheet_stay():
    book = load(graft_result_sheets(engineers_book(), result_book()))
    book["R Summary"].defined_names["My_cell"] = DefinedName("My_cell", attr_text="'R Summary'!$B$3")
    second = graft_result_sheets(saved(book), result_book())
    assert local_names(second)["My_cell", "R Summary"] == "'R Summary'!$B$3"


def test_a_result_sheet_in_front_stays_in_front():
    book = load(graft_result_sheets(engineers_book(), result_book()))
    for sheet in book:
        sheet.sheet_view.tabSelected = sheet.title == "R Summary"
    book.active = book.sheetnames.index("R Summary")
    second = graft_result_sheets(saved(book), result_book(value=8))
    assert load(second).active.title == "R Summary"
    assert [s.title for s in load(second) if s.sheet_view.tabSelected] == ["R Summary"]


def test_the_name_that_macros_use_stays():
    first = graft_result_sheets(engineers_book(macros=True), result_book())
    content = parts(first)
    part = next(row[4] for row in sheet_list(first) if row[0] == "R Summary")
    for text in (b'<sheetPr codeName="Sheet7">', b'<sheetPr codeName="Sheet7"/>'):
        old = content[part]
        tail = (
            old[old.index(b"</sheetPr>") :] if not text.endswith(b"/>") else old[old.index(b"<dimension") :]
        )
        changed = old[: old.index(b"<sheetPr")] + text + tail
        second = graft_result_sheets(rezip(content | {part: changed}), result_book(value=8))
        root = etree.fromstring(parts(second)[part])
        assert root.find("m:sheetPr", NS).get("codeName") == "Sheet7"
        assert root.find("m:sheetPr/m:pageSetUpPr", NS).get("fitToPage") == "1"
        assert validate_package(second) == []


def plain_results(*, chart=False, formula=False):
    out = io.BytesIO()
    book = xlsxwriter.Workbook(out, {"in_memory": True})
    sheet = book.add_worksheet("R Summary")
    sheet.write_number("B3", 1)
    if chart:
        drawn = book.add_chart({"type": "pie"})
        drawn.add_series({"values": "='R Summary'!$B$3:$B$4"})
        sheet.insert_chart("D4", drawn)
    if formula:
        sheet.write_formula("B4", "=B3*2", None, 2)
    book.close()
    return out.getvalue()


def test_parts_that_are_no_longer_needed_go():
    base = engineers_book()
    bare = graft_result_sheets(base, plain_results())
    with_chart = graft_result_sheets(bare, plain_results(chart=True))
    assert {n for n in parts(with_chart) if n not in parts(bare)} == {
        "xl/worksheets/_rels/sheet4.xml.rels",
        "xl/drawings/drawing3.xml",
        "xl/drawings/_rels/drawing3.xml.rels",
        "xl/charts/chart3.xml",
    }
    assert graft_result_sheets(with_chart, plain_results()) == bare
    assert validate_package(with_chart) == []


def test_a_picture_that_the_engineer_uses_as_well_stays():
    """Some programs store a picture once for all sheets."""
    base = edited(engineers_book(), types=lambda c: c.replace(b"</Types>", b" </Types>"))
    first = graft_result_sheets(base, plain_results(chart=True))
    content = parts(first)
    row = f'<Relationship Id="rId9" Type="{OFFICE}/image" Target="../media/image1.png"/>'.encode()
    rels = "xl/drawings/_rels/drawing3.xml.rels"
    content[rels] = content[rels].replace(b"</Relationships>", row + b"</Relationships>")
    second = graft_result_sheets(rezip(content), plain_results())
    assert "xl/media/image1.png" in parts(second)
    assert "xl/drawings/drawing3.xml" not in parts(second)
    assert validate_package(second) == []


def test_a_calculation_chain_that_names_a_result_sheet_goes():
    first = graft_result_sheets(packed_book(), plain_results(formula=True))
    content = parts(first)
    number = next(row[1] for row in sheet_list(first) if row[0] == "R Summary")
    chain = content["xl/calcChain.xml"].replace(
        b"</calcChain>", f'<c r="B4" i="{number}"/></calcChain>'.encode()
    )
    second = graft_result_sheets(rezip(content | {"xl/calcChain.xml": chain}), plain_results())
    after = parts(second)
    assert "xl/calcChain.xml" not in after
    assert b"calcChain" not in after["[Content_Types].xml"]
    assert b"calcChain" not in after["xl/_rels/workbook.xml.rels"]
    assert validate_package(second) == []
    assert {n for n in content if n not in after} == {"xl/calcChain.xml"}


def test_table_numbers_stay_with_their_tables():
    """A slicer knows its table by the number."""

    def numbers(data):
        return {t.displayName: t.id for s in load(data) for t in s.tables.values()}

    first = graft_result_sheets(engineers_book(), result_book(("R A", "R B")))
    second = graft_result_sheets(first, result_book(("R B", "R A", "R C")))
    assert numbers(first).items() <= numbers(second).items()
    assert validate_package(second) == []


def test_styles_do_not_grow_from_run_to_run():
    data = graft_result_sheets(packed_book(), result_book())
    styles = parts(data)["xl/styles.xml"]
    for value in (1, 2, 3):
        data = graft_result_sheets(data, result_book(value=value))
        assert parts(data)["xl/styles.xml"] == styles


def test_capitals_in_a_sheet_name_make_no_other_sheet():
    first = graft_result_sheets(engineers_book(), result_book(("R Summary",)))
    second = graft_result_sheets(first, result_book(("R SUMMARY",), value=8))
    assert load(second).sheetnames == load(first).sheetnames
    third = graft_result_sheets(second, result_book(("R Summary",), value=9))
    assert load(third).sheetnames == load(first).sheetnames
    assert load(third)["R Summary"]["B3"].value == 9
