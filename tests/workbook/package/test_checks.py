"""Each rule of the package check: a sound workbook passes, one fault put in is found.

The rules are those of ECMA-376 Part 1 (clause 18, SpreadsheetML) and Part 2 (packages), from memory, and the
limits of Excel (31 characters in a sheet name: common practice, no source).
"""

from __future__ import annotations

import re

import pytest

from study.workbook.package import graft_result_sheets, validate_package
from study.workbook.package.cells import address, split_address
from tests.workbook.package.samples import (
    engineers_book,
    openpyxl_book,
    packed_book,
    parts,
    result_book,
    rezip,
)

BOOK, STYLES, TYPES = "xl/workbook.xml", "xl/styles.xml", "[Content_Types].xml"
RELS, SHEET, TABLE = "xl/_rels/workbook.xml.rels", "xl/worksheets/sheet4.xml", "xl/tables/table2.xml"


@pytest.fixture(scope="module")
def content():
    return parts(graft_result_sheets(packed_book(), result_book()))


@pytest.mark.parametrize("make", [engineers_book, openpyxl_book, packed_book, result_book])
def test_sound_workbooks_pass(make):
    assert validate_package(make()) == []


def test_no_workbook_is_one_sentence():
    assert validate_package(b"no workbook")[0].startswith("the file is no Excel workbook")


FAULTS = {
    "a named style of no format": (
        "xl/styles.xml",
        rb'(<cellStyle name="Normal") xfId="0"',
        rb'\1 xfId="7"',
        r"Normal refers to xfId 7 of \d+",
    ),
    "a named style of what is no number": (
        "xl/styles.xml",
        rb'(<cellStyle name="Normal") xfId="0"',
        rb'\1 xfId="none"',
        "cellStyle says xfId='none'",
    ),
    "a part of no type": (
        TYPES,
        rb'<Override PartName="/xl/tables/table2.xml"[^>]*/>',
        b"",
        "table2.xml: is related as rId\\d+ but its type is application/xml",
    ),
    "a type of no part": (
        TYPES,
        rb"</Types>",
        b'<Override PartName="/no.xml" ContentType="a/b"/></Types>',
        "declares no.xml, which is not there",
    ),
    "a type declared twice": (
        TYPES,
        rb'(<Override PartName="/xl/styles.xml"[^>]*/>)',
        rb"\1\1",
        "declares xl/styles.xml twice",
    ),
    "a default declared twice": (
        TYPES,
        rb'(<Default Extension="xml"[^>]*/>)',
        rb"\1\1",
        r"declares \.xml twice",
    ),
    "a relation to nothing": (
        RELS,
        rb"theme/theme1.xml",
        b"theme/none.xml",
        "leads to xl/theme/none.xml, which is not there",
    ),
    "a relation id twice": (RELS, rb'Id="rId95"', b'Id="rId94"', "the id rId94 stands twice"),
    "a reference to no relation": (
        SHEET,
        rb'<drawing r:id="rId\d+"/>',
        b'<drawing r:id="rId77"/>',
        "drawing refers to the relation rId77",
    ),
    "a chart that is not there": (
        "xl/drawings/drawing3.xml",
        rb'(<c:chart [^>]*)r:id="rId1"',
        rb'\1r:id="rId8"',
        "chart refers to the relation rId8",
    ),
    "sheets out of order": (
        BOOK,
        rb"(<calcPr[^>]*/>)(.*)</workbook>",
        rb"\2\1</workbook>",
        "calcPr stands behind extLst",
    ),
    "one sheet name twice": (
        BOOK,
        rb'name="R Load flow"',
        b'name="r SUMMARY"',
        "two sheets are named r summary",
    ),
    "a long sheet name": (
        BOOK,
        rb'name="R Load flow"',
        b'name="R ' + b"x" * 30 + b'"',
        "is no valid name of a sheet",
    ),
    "a sign in a sheet name": (BOOK, rb'name="R Load flow"', b'name="R a/b"', "is no valid name of a sheet"),
    "one sheetId twice": (BOOK, rb'sheetId="4"', b'sheetId="5"', "sheetId 5 stands twice"),
    "two sheets on one part": (
        RELS,
        rb"worksheets/sheet5.xml",
        b"worksheets/sheet4.xml",
        "two sheets share one part",
    ),
    "no visible sheet": (
        BOOK,
        rb'<sheet name="([^"]*)" sheetId="(\d+)"(?: state="hidden")?',
        rb'<sheet name="\1" sheetId="\2" state="hidden"',
        "no sheet is visible",
    ),
    "one name twice": (
        BOOK,
        rb"(<definedName name=.Total_power.[^/]*/definedName>)",
        rb"\1\1",
        "name total_power stands twice",
    ),
    "a name on no sheet": (BOOK, rb'localSheetId="4"', b'localSheetId="9"', "belongs to sheet 9"),
    "no names in the list": (
        BOOK,
        rb"<definedNames>.*</definedNames>",
        b"<definedNames/>",
        "list of names is empty",
    ),
    "no active tab": (BOOK, rb'activeTab="1"', b'activeTab="5"', "active tab 5 is not there"),
    "a wrong count": (STYLES, rb'<fonts count="\d+"', b'<fonts count="99"', "fonts counts 99 but holds"),
    "styles out of order": (
        STYLES,
        rb"(<fonts.*</fonts>)(<fills.*</fills>)",
        rb"\2\1",
        "fonts stands behind fills",
    ),
    "a font that is not there": (
        STYLES,
        rb'(<cellXfs.*?)fontId="\d+"',
        rb'\1fontId="88"',
        "refers to fontId 88 of",
    ),
    "a style that is not there": (STYLES, rb'(<cellXfs.*?)xfId="0"', rb'\1xfId="8"', "refers to xfId 8 of"),
    "a number format that is not there": (
        STYLES,
        rb'(<cellXfs.*?)numFmtId="164"',
        rb'\1numFmtId="864"',
        "number format 864, which is not declared",
    ),
    "a number format twice": (
        STYLES,
        rb'numFmtId="165" formatCode',
        b'numFmtId="164" formatCode',
        "number format 164 stands twice",
    ),
    "a conditional format that is not there": (
        SHEET,
        rb' dxfId="\d+"',
        b' dxfId="50"',
        "cfRule refers to dxfId 50 of",
    ),
    "a table format that is not there": (
        TABLE,
        rb'dataDxfId="\d+"',
        b'dataDxfId="50"',
        "tableColumn refers to dataDxfId 50 of",
    ),
    "a chain to no formula": (
        "xl/calcChain.xml",
        rb'r="B6"',
        b'r="C6"',
        "names C6 of sheet 1, which holds no formula",
    ),
    "sheet elements out of order": (
        SHEET,
        rb"(<hyperlinks>.*</hyperlinks>)(<pageMargins[^>]*/>)",
        rb"\2\1",
        "hyperlinks stands behind pageMargins",
    ),
    "a sheet element twice": (SHEET, rb"(<pageMargins[^>]*/>)", rb"\1\1", "pageMargins stands twice"),
    "an unknown sheet element": (
        SHEET,
        rb"<pageMargins",
        b"<pageMargin/><pageMargins",
        "pageMargin is no child of worksheet",
    ),
    "a cell format that is not there": (
        SHEET,
        rb'<c r="B3" s="\d+"',
        b'<c r="B3" s="70"',
        "cell B3 uses the cell format 70 of",
    ),
    "a row format that is not there": (
        SHEET,
        rb'<row r="13"([^>]*) s="\d+"',
        rb'<row r="13"\1 s="70"',
        "row 13 uses the cell format 70",
    ),
    "a column format that is not there": (
        SHEET,
        rb'style="\d+"',
        b'style="70"',
        "column uses the cell format 70",
    ),
    "a row twice": (SHEET, rb'<row r="3"', b'<row r="2"', "row 2 stands behind row 2"),
    "cells out of order": (SHEET, rb'<c r="B3"', b'<c r="A3"', "cell A3 stands out of order in row 3"),
    "a cell in the wrong row": (SHEET, rb'<c r="B3"', b'<c r="B4"', "cell B4 stands out of order in row 3"),
    "a shared string that is not there": (
        "xl/worksheets/sheet1.xml",
        rb't="s"><v>\d+<',
        b't="s"><v>999<',
        "shared string that is not there",
    ),
    "an inline string with no text": (
        SHEET,
        rb'<c r="B2"([^>]*)><is>.*?</is></c>',
        rb'<c r="B2"\1/>',
        "cell B2 holds no text",
    ),
    "one table number twice": (
        TABLE,
        rb' id="2" name=',
        b' id="1" name=',
        "tables: the number 1 stands twice",
    ),
    "one table name twice": (
        TABLE,
        rb'displayName="[^"]*"',
        b'displayName="LOADS"',
        "tables: the name loads stands twice",
    ),
    "a table named like a name": (
        TABLE,
        rb'displayName="[^"]*"',
        b'displayName="total_power"',
        "is also a defined name",
    ),
    "a table named like a cell": (
        TABLE,
        rb'displayName="[^"]*"',
        b'displayName="AB12"',
        "no valid name of a table",
    ),
    "a table with a blank in its name": (
        TABLE,
        rb'displayName="[^"]*"',
        b'displayName="my table"',
        "no valid name of a table",
    ),
    "too few columns": (TABLE, rb' ref="A6:C9"', b' ref="A6:D9"', "3 columns do not fill A6:D9"),
    "a wrong count of columns": (
        TABLE,
        rb'tableColumns count="3"',
        b'tableColumns count="4"',
        "count of columns is wrong",
    ),
    "two columns of one name": (TABLE, rb'name="Value"', b'name="board"', "two columns share one name"),
    "two columns of one id": (
        TABLE,
        rb'tableColumn id="2"',
        b'tableColumn id="1"',
        "two columns share one id",
    ),
    "a heading that differs": (
        SHEET,
        rb"<t>Verdict</t>",
        b"<t>Verdicts</t>",
        "heading 'Verdicts' is not the column name 'Verdict'",
    ),
    "a number that is none": (SHEET, rb'<c r="B3" s="\d+"', b'<c r="B3" s="x"', "an element c says s='x'"),
}


@pytest.mark.parametrize("fault", FAULTS)
def test_a_fault_is_found(content, fault):
    part, pattern, new, sentence = FAULTS[fault]
    changed, count = re.subn(pattern, new, content[part], flags=re.DOTALL)
    assert count
    found = validate_package(rezip({**content, part: changed}))
    assert any(re.search(sentence, line) for line in found), found


def test_tables_that_overlap():
    content = parts(graft_result_sheets(engineers_book(), result_book(("R Summary",))))
    twin = content[TABLE].replace(b' id="2"', b' id="7"').replace(b"tbl_R_Summary", b"twin")
    content["xl/tables/table7.xml"] = twin
    kind = b'<Override PartName="/xl/tables/table7.xml" ContentType="%s"/></Types>' % (
        b"application/vnd.openxmlformats-officedocument.spreadsheetml.table+xml"
    )
    content[TYPES] = content[TYPES].replace(b"</Types>", kind)
    rels = "xl/worksheets/_rels/sheet4.xml.rels"
    row = re.search(rb"<Relationship [^>]*table2.xml\"/>", content[rels])[0]
    other = re.sub(rb'Id="\w+"', b'Id="rId70"', row).replace(b"table2", b"table7")
    content[rels] = content[rels].replace(b"</Relationships>", other + b"</Relationships>")
    found = validate_package(rezip(content))
    assert found == ["xl/tables/table2.xml: shares cells with xl/tables/table7.xml"]


def test_a_table_on_no_sheet():
    content = parts(graft_result_sheets(engineers_book(), result_book(("R Summary",))))
    rels = "xl/worksheets/_rels/sheet4.xml.rels"
    content[rels] = re.sub(rb"<Relationship [^>]*table2.xml\"/>", b"", content[rels])
    content[SHEET] = re.sub(rb"<tableParts.*</tableParts>", b"", content[SHEET])
    assert "xl/tables/table2.xml: the table is on no sheet" in validate_package(rezip(content))


@pytest.mark.parametrize(
    ("column", "letters"), [(1, "A"), (26, "Z"), (27, "AA"), (702, "ZZ"), (703, "AAA"), (16384, "XFD")]
)
def test_addresses_of_columns(column, letters):
    """The last column of Excel 2007 and later is XFD, number 16384."""
    assert address(column, 7) == f"{letters}7"
    assert split_address(f"${letters}$7") == (column, 7)
    assert split_address("no cell") == (0, 0)
