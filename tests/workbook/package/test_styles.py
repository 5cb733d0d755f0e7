"""Styles joined: equal ones found, others appended, Excel's reserved places respected.

Order of the style sheet, reserved fills and the first free number format (164): ECMA-376 Part 1 clause 18.8,
from memory.
"""

from __future__ import annotations

import pytest
from lxml import etree

from study.workbook.package.styles import EMPTY_STYLES, ORDER, merge_styles
from tests.workbook.package.samples import MAIN, engineers_book, parts, result_book

NS = {"m": MAIN}
NO_FILLS = "<fill><patternFill patternType='none'/></fill><fill><patternFill patternType='gray125'/></fill>"
FILL = "<fill><patternFill patternType='solid'><fgColor rgb='FFAABBCC'/></patternFill></fill>"


def sheet(**containers):
    """A style sheet with these children of its containers, in the order of the schema."""
    rows = {
        "fonts": "<font><sz val='10'/><name val='Arial'/></font>",
        "fills": NO_FILLS,
        "borders": "<border><left/></border>",
        "cellStyleXfs": "<xf numFmtId='0' fontId='0' fillId='0' borderId='0'/>",
        "cellXfs": "<xf numFmtId='0' fontId='0' fillId='0' borderId='0' xfId='0'/>",
    } | containers
    inside = "".join(f"<{name}>{rows[name]}</{name}>" for name in ORDER if rows.get(name))
    return f"<?xml version='1.0'?><styleSheet xmlns='{MAIN}'>{inside}</styleSheet>".encode()


def texts(data, container):
    found = etree.fromstring(data).find(f"m:{container}", NS)
    return [etree.tostring(c, method="c14n").decode() for c in found]


def resolved(data, xf):
    """What a cell format means once its numbers are looked up."""
    root = etree.fromstring(data)
    node = root.find("m:cellXfs", NS)[xf]
    codes = {n.get("numFmtId"): n.get("formatCode") for n in root.iterfind(".//m:numFmts//m:numFmt", NS)}
    looks = [
        etree.tostring(root.find(f"m:{name}", NS)[int(node.get(attribute))], method="c14n")
        for name, attribute in (("fonts", "fontId"), ("fills", "fillId"), ("borders", "borderId"))
    ]
    number = node.get("numFmtId")
    rest = {k: v for k, v in node.attrib.items() if not k.endswith("Id")}
    return (*looks, codes.get(number, number), rest, [etree.tostring(c, method="c14n") for c in node])


@pytest.mark.parametrize("base", [EMPTY_STYLES, sheet(), parts(engineers_book())["xl/styles.xml"]])
def test_every_format_means_the_same_after_the_move(base):
    extra = parts(result_book())["xl/styles.xml"]
    joined, numbers = merge_styles(base, extra)
    for old, new in enumerate(numbers.cells):
        assert resolved(joined, new) == resolved(extra, old)
    assert len(set(numbers.cells)) == len(numbers.cells) > 3
    assert len(numbers.differential) == len(texts(extra, "dxfs"))


def test_joining_twice_adds_nothing():
    extra = parts(result_book())["xl/styles.xml"]
    joined, numbers = merge_styles(sheet(), extra)
    assert merge_styles(joined, extra) == (joined, numbers)


@pytest.mark.parametrize("fills", ["", "<fill><patternFill patternType='none'/></fill>"])
def test_the_two_reserved_fills_are_never_given_away(fills):
    extra = sheet(
        fills=NO_FILLS + FILL,
        cellXfs="<xf numFmtId='0' fontId='0' fillId='2' borderId='0' xfId='0'/>",
    )
    joined, numbers = merge_styles(sheet(fills=fills), extra)
    kinds = [
        f.find("m:patternFill", NS).get("patternType") for f in etree.fromstring(joined).find("m:fills", NS)
    ]
    assert kinds == ["none", "gray125", "solid"]
    assert resolved(joined, numbers.cells[0]) == resolved(extra, 0)


def test_a_first_fill_of_the_results_is_not_put_on_a_reserved_place():
    extra = sheet(fills=FILL)
    joined, numbers = merge_styles(sheet(fills="<fill><patternFill patternType='none'/></fill>"), extra)
    root = etree.fromstring(joined)
    assert root.find("m:cellXfs", NS)[numbers.cells[0]].get("fillId") == "2"


def test_number_formats_get_numbers_that_are_free():
    own = "<numFmt numFmtId='164' formatCode='0.0'/><numFmt numFmtId='170' formatCode='0.00'/>"
    dxf = "<dxf><numFmt numFmtId='180' formatCode='0.000'/></dxf>"
    extra = sheet(
        numFmts="<numFmt numFmtId='164' formatCode='0.00'/><numFmt numFmtId='165' formatCode='0.0000'/>",
        cellXfs="".join(
            f"<xf numFmtId='{n}' fontId='0' fillId='0' borderId='0' xfId='0'/>" for n in (0, 9, 164, 165)
        ),
    )
    joined, numbers = merge_styles(sheet(numFmts=own, dxfs=dxf), extra)
    formats = [n.get("numFmtId") for n in etree.fromstring(joined).find("m:cellXfs", NS)]
    assert [formats[n] for n in numbers.cells] == ["0", "9", "170", "181"]


def test_number_formats_in_compatibility_blocks_count():
    """Excel wraps a format that has a newer form in such a block."""
    block = (
        "<mc:AlternateContent xmlns:mc='http://schemas.openxmlformats.org/markup-compatibility/2006'>"
        "<mc:Choice Requires='x16r2'><numFmt numFmtId='164' formatCode='0.0' formatCode16='x'"
        "/></mc:Choice><mc:Fallback><numFmt numFmtId='164' formatCode='0.0'/></mc:Fallback>"
        "</mc:AlternateContent>"
    )
    extra = sheet(
        numFmts="<numFmt numFmtId='164' formatCode='0.0'/><numFmt numFmtId='165' formatCode='0.00'/>",
        cellXfs="".join(
            f"<xf numFmtId='{n}' fontId='0' fillId='0' borderId='0' xfId='0'/>" for n in (164, 165)
        ),
    )
    joined, numbers = merge_styles(sheet(numFmts=block), extra)
    formats = [n.get("numFmtId") for n in etree.fromstring(joined).find("m:cellXfs", NS)]
    assert [formats[n] for n in numbers.cells] == ["164", "165"]


def test_formats_hang_on_the_style_called_normal():
    base = sheet(
        cellStyleXfs="<xf numFmtId='0' fontId='0' fillId='0' borderId='0'/>" * 2,
        cellStyles="<cellStyle name='Mine' xfId='0'/><cellStyle name='Normal' xfId='1' builtinId='0'/>",
    )
    extra = sheet(cellXfs="<xf numFmtId='9' fontId='0' fillId='0' borderId='0' xfId='0'/>")
    joined, numbers = merge_styles(base, extra)
    assert etree.fromstring(joined).find("m:cellXfs", NS)[numbers.cells[0]].get("xfId") == "1"


def test_containers_come_in_the_order_of_the_schema():
    extra = parts(result_book())["xl/styles.xml"]
    bare = f"<styleSheet xmlns='{MAIN}'><cellStyles/><colors/><extLst/></styleSheet>".encode()
    for base in (EMPTY_STYLES, bare):
        names = [etree.QName(c).localname for c in etree.fromstring(merge_styles(base, extra)[0])]
        assert names == sorted(names, key=ORDER.index)
        assert {"fonts", "fills", "borders", "cellStyleXfs", "cellXfs", "dxfs"} <= set(names)


def test_a_foreign_element_in_a_result_format_is_no_surprise():
    extra = sheet(dxfs="<dxf><x:own xmlns:x='urn:x'/></dxf>")
    with pytest.raises(ValueError, match="foreign element own"):
        merge_styles(sheet(), extra)
