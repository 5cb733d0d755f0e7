"""Workbooks to try the package code on: rich engineer's files, and the result sheets to graft."""

from __future__ import annotations

import io
import struct
import warnings
import zipfile
import zlib
from collections.abc import Callable, Mapping

import openpyxl
import xlsxwriter
from openpyxl.chart import BarChart, Reference
from openpyxl.comments import Comment
from openpyxl.formatting.rule import CellIsRule
from openpyxl.styles import PatternFill
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.table import Table

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
OFFICE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
MICROSOFT = "http://schemas.microsoft.com/office"
SPREADSHEET = "application/vnd.openxmlformats-officedocument.spreadsheetml."
VBA = (
    b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1 no real project, only bytes that must survive" + bytes(range(256)) * 8
)


def picture() -> bytes:
    """A PNG of 8 x 8 pixels."""

    def chunk(kind: bytes, content: bytes) -> bytes:
        return (
            struct.pack(">L", len(content)) + kind + content + struct.pack(">L", zlib.crc32(kind + content))
        )

    rows = b"".join(b"\0" + bytes([20 * y, 80, 160]) * 8 for y in range(8))
    header = struct.pack(">2L5B", 8, 8, 8, 2, 0, 0, 0)
    body = chunk(b"IHDR", header) + chunk(b"IDAT", zlib.compress(rows)) + chunk(b"IEND", b"")
    return b"\x89PNG\r\n\x1a\n" + body


def parts(data: bytes) -> dict[str, bytes]:
    """Content of every part, read by the standard library."""
    with zipfile.ZipFile(io.BytesIO(data)) as package:
        assert package.testzip() is None
        return {i.filename: package.read(i) for i in package.infolist()}


def rezip(content: Mapping[str, bytes], method: int = zipfile.ZIP_DEFLATED) -> bytes:
    """The parts as a zip file again."""
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", method) as package:
        for name, data in content.items():
            package.writestr(name, data)
    return out.getvalue()


def edited(data: bytes, **changes: Callable[[bytes], bytes]) -> bytes:
    """The package with parts changed; keys are ``workbook``, ``styles``, ``types`` or ``rels``."""
    names = {
        "workbook": "xl/workbook.xml",
        "styles": "xl/styles.xml",
        "types": "[Content_Types].xml",
        "rels": "xl/_rels/workbook.xml.rels",
    }
    content = parts(data)
    for key, change in changes.items():
        before = content[names[key]]
        content[names[key]] = change(before)
        assert content[names[key]] != before, f"the change to {key} does nothing"
    return rezip(content)


def result_book(
    sheets: tuple[str, ...] = ("R Summary", "R Load flow"), *, value: float = 3.5, rows: int = 3
) -> bytes:
    """Result sheets as the report writes them: table, chart, formats, links, print set-up, note, picture."""
    out = io.BytesIO()
    book = xlsxwriter.Workbook(out, {"in_memory": True})
    head = book.add_format({"bold": True, "bg_color": "#DDEBF7", "border": 1, "text_wrap": True})
    number = book.add_format({"num_format": "0.000"})
    current = book.add_format({"num_format": '0.0 "kA"', "italic": True})
    exceeds = book.add_format({"font_color": "#9C0006", "bg_color": "#FFC7CE", "num_format": '0.00 "pu"'})
    for name in sheets:
        sheet = book.add_worksheet(name)
        word = name.replace(" ", "_").replace("-", "_")
        sheet.write_string(0, 0, name, head)
        sheet.write_string(1, 0, "=HYPERLINK(A1)", current)
        sheet.write_string(1, 1, "@cmd")
        sheet.write_string(1, 2, '+1 dxfId="0" s="1" <c r="A1">')
        sheet.write_string(1, 3, "-2")
        sheet.write_number(2, 1, value, number)
        sheet.write_rich_string(2, 0, "two ", head, "kinds", " of text")
        sheet.write_url(3, 0, "internal:'Loads'!B2", string="cell that governs")
        sheet.write_url(3, 1, "https://example.org/a?b=1&c=2", string="rule")
        columns = [{"header": "Board"}, {"header": "Value", "format": number}, {"header": "Verdict"}]
        cells = [[f"MSB {i}", value + i, "within"] for i in range(rows)]
        sheet.add_table(
            5, 0, 5 + rows, 2, {"name": f"tbl_{word}", "columns": columns, "data": cells, "autofilter": True}
        )
        sheet.conditional_format(
            6, 1, 5 + rows, 1, {"type": "cell", "criteria": ">", "value": 4, "format": exceeds}
        )
        sheet.conditional_format(6, 1, 5 + rows, 1, {"type": "data_bar", "data_bar_2010": True})
        chart = book.add_chart({"type": "column"})
        chart.add_series(
            {"name": "Value", "categories": [name, 6, 0, 5 + rows, 0], "values": [name, 6, 1, 5 + rows, 1]}
        )
        chart.set_title({"name": f"{name} chart"})
        sheet.insert_chart("E6", chart)
        sheet.freeze_panes(6, 1)
        sheet.set_column(0, 0, 24)
        sheet.set_column(1, 1, 12, number)
        sheet.set_row(12, None, head)
        sheet.repeat_rows(5)
        sheet.print_area(0, 0, 20, 10)
        sheet.set_landscape()
        sheet.fit_to_pages(1, 0)
        sheet.set_footer("&L&A&RPage &P of &N")
    sheet.write_comment("B3", "a note of ours")
    sheet.insert_image("E25", "p.png", {"image_data": io.BytesIO(picture())})
    book.close()
    return out.getvalue()


def engineers_book(*, macros: bool = False) -> bytes:
    """A rich workbook by XlsxWriter, with references to result sheets that are not there yet."""
    out = io.BytesIO()
    book = xlsxwriter.Workbook(out, {"in_memory": True})
    bold = book.add_format({"bold": True, "font_name": "Arial", "font_size": 10, "bg_color": "#FFFF00"})
    power = book.add_format({"num_format": '0.0 "kW"'})
    warn = book.add_format({"bg_color": "#FF0000"})
    loads, own, hidden = (book.add_worksheet(n) for n in ("Loads", "R notes of mine", "Hidden"))
    loads.write_row(0, 0, ["Load", "Power [kW]", "Remark"], bold)
    loads.add_table(
        "A1:C4", {"name": "Loads", "columns": [{"header": h} for h in ("Load", "Power [kW]", "Remark")]}
    )
    for row, (name, kw) in enumerate((("Fan", 11), ("Pump", 30), ("Crane", 75)), 1):
        loads.write_row(row, 0, [name, kw, "text — of mine"], power)
    loads.write_formula("B6", "=SUM(B2:B4)", power, 116)
    loads.conditional_format("B2:B4", {"type": "cell", "criteria": ">", "value": 50, "format": warn})
    loads.data_validation("A2:A4", {"validate": "list", "source": ["Fan", "Pump", "Crane"]})
    loads.write_comment("A2", "ask the yard")
    loads.insert_image("E2", "logo.png", {"image_data": io.BytesIO(picture())})
    loads.add_sparkline("D2", {"range": "Loads!B2:B4"})
    loads.insert_textbox("H2", "a box of text")
    loads.set_header("&C&G", {"image_center": "head.png", "image_data_center": io.BytesIO(picture() + b"")})
    chart = book.add_chart({"type": "bar"})
    chart.add_series({"values": "=Loads!$B$2:$B$4"})
    loads.insert_chart("E10", chart)
    loads.print_area("A1:D9")
    own.write_formula("A1", "='R Summary'!B3*2", power, 7)
    own.write_formula("A2", "='R Load flow'!B3", None, 3.5)
    own.repeat_rows(0)
    mine = book.add_chart({"type": "line"})
    mine.add_series({"values": "='R Summary'!$B$7:$B$9"})
    own.insert_chart("C3", mine)
    hidden.hide()
    book.define_name("Total_power", "=Loads!$B$6")
    book.define_name("Hidden!Local", "=Hidden!$A$1")
    book.define_name("Last_result", "='R Summary'!$B$3")
    book.set_properties({"title": "Vessel", "author": "An engineer"})
    book.set_custom_property("Hull", "1234")
    if macros:
        book.add_vba_project(io.BytesIO(VBA), is_stream=True)
    own.activate()
    with warnings.catch_warnings():
        # The chart draws from a result sheet that is not there yet.
        warnings.filterwarnings("ignore", message="Unknown worksheet reference 'R Summary'")
        book.close()
    return out.getvalue()


def openpyxl_book() -> bytes:
    """A workbook by openpyxl, whose relations have absolute targets."""
    book = openpyxl.Workbook()
    sheet = book.active
    sheet.title = "Loads"
    for row in (["Load", "kW"], ["Fan", 11], ["Pump", 30], ["=A1", "=SUM(B2:B3)"]):
        sheet.append(row)
    chart = BarChart()
    chart.add_data(Reference(sheet, min_col=2, min_row=2, max_row=3))
    sheet.add_chart(chart, "E2")
    sheet.add_table(Table(displayName="Loads", ref="A1:B3"))
    sheet["A2"].comment = Comment("ask the yard", "An engineer")
    sheet.conditional_formatting.add(
        "B2:B3", CellIsRule(operator="greaterThan", formula=["20"], fill=PatternFill(bgColor="FFC7CE"))
    )
    check = DataValidation(type="list", formula1='"Fan,Pump"')
    sheet.add_data_validation(check)
    check.add("A2:A3")
    sheet.print_title_rows = "1:1"
    book.defined_names["Total"] = DefinedName("Total", attr_text="Loads!$B$4")
    other = book.create_sheet("Other")
    other["A1"] = "='R Summary'!B3"
    other.sheet_state = "hidden"
    out = io.BytesIO()
    book.save(out)
    return out.getvalue()


_EXTRA_PARTS: dict[str, tuple[str | None, bytes]] = {
    "xl/pivotCache/pivotCacheDefinition1.xml": (
        SPREADSHEET + "pivotCacheDefinition+xml",
        f'<pivotCacheDefinition xmlns="{MAIN}" xmlns:r="{OFFICE}" r:id="rId1" recordCount="0">'
        '<cacheSource type="worksheet"><worksheetSource ref="A1:B4" sheet="Loads"/></cacheSource>'
        '<cacheFields count="2"><cacheField name="Load"/><cacheField name="Power [kW]"/></cacheFields>'
        "</pivotCacheDefinition>".encode(),
    ),
    "xl/pivotCache/pivotCacheRecords1.xml": (
        SPREADSHEET + "pivotCacheRecords+xml",
        f'<pivotCacheRecords xmlns="{MAIN}" count="0"/>'.encode(),
    ),
    "xl/pivotTables/pivotTable1.xml": (
        SPREADSHEET + "pivotTable+xml",
        f'<pivotTableDefinition xmlns="{MAIN}" name="P1" cacheId="7" dataCaption="Values">'
        '<location ref="K20:L22" firstHeaderRow="1" firstDataRow="1" firstDataCol="1"/>'
        '<pivotFields count="2"><pivotField showAll="0"/><pivotField showAll="0"/></pivotFields>'
        "</pivotTableDefinition>".encode(),
    ),
    "xl/ctrlProps/ctrlProp1.xml": (
        "application/vnd.ms-excel.controlproperties+xml",
        f'<formControlPr xmlns="{MICROSOFT}/spreadsheetml/2009/9/main" objectType="CheckBox"/>'.encode(),
    ),
    "xl/slicers/slicer1.xml": (
        "application/vnd.ms-excel.slicer+xml",
        f'<slicers xmlns="{MICROSOFT}/spreadsheetml/2009/9/main"><slicer name="Load" cache="Slicer_Load" '
        'caption="Load" rowHeight="241300"/></slicers>'.encode(),
    ),
    "xl/slicerCaches/slicerCache1.xml": (
        "application/vnd.ms-excel.slicerCache+xml",
        f'<slicerCacheDefinition xmlns="{MICROSOFT}/spreadsheetml/2009/9/main" name="Slicer_Load" '
        'sourceName="Load"/>'.encode(),
    ),
    "xl/externalLinks/externalLink1.xml": (
        SPREADSHEET + "externalLink+xml",
        f'<externalLink xmlns="{MAIN}" xmlns:r="{OFFICE}"><externalBook r:id="rId1"><sheetNames>'
        '<sheetName val="Data"/></sheetNames></externalBook></externalLink>'.encode(),
    ),
    "xl/printerSettings/printerSettings1.bin": (
        SPREADSHEET + "printerSettings",
        bytes(range(256)),
    ),
    "xl/persons/person.xml": (
        "application/vnd.ms-excel.person+xml",
        f'<personList xmlns="{MICROSOFT}/spreadsheetml/2018/threadedcomments"/>'.encode(),
    ),
    "xl/threadedComments/threadedComment1.xml": (
        "application/vnd.ms-excel.threadedcomments+xml",
        f'<ThreadedComments xmlns="{MICROSOFT}/spreadsheetml/2018/threadedcomments"/>'.encode(),
    ),
    "xl/calcChain.xml": (
        SPREADSHEET + "calcChain+xml",
        f'<calcChain xmlns="{MAIN}"><c r="B6" i="1"/><c r="A1" i="2"/><c r="A2"/></calcChain>'.encode(),
    ),
    "customXml/item1.xml": (None, b'<own:data xmlns:own="urn:mine"><own:row>1</own:row></own:data>'),
    "customXml/itemProps1.xml": (
        "application/vnd.openxmlformats-officedocument.customXmlProperties+xml",
        b'<ds:datastoreItem xmlns:ds="http://schemas.openxmlformats.org/officeDocument/2006/customXml" '
        b'ds:itemID="{11111111-2222-3333-4444-555555555555}"/>',
    ),
}

_EXTRA_RELATIONS: tuple[tuple[str, str, str, str], ...] = (
    ("xl/_rels/workbook.xml.rels", "rId91", "pivotCacheDefinition", "pivotCache/pivotCacheDefinition1.xml"),
    ("xl/_rels/workbook.xml.rels", "rId92", "externalLink", "externalLinks/externalLink1.xml"),
    ("xl/_rels/workbook.xml.rels", "rId93", "calcChain", "calcChain.xml"),
    ("xl/_rels/workbook.xml.rels", "rId94", "customXml", "../customXml/item1.xml"),
    ("xl/_rels/workbook.xml.rels", "rId95", "slicerCache", "/xl/slicerCaches/slicerCache1.xml"),
    ("xl/_rels/workbook.xml.rels", "rId96", "person", "persons/person.xml"),
    ("xl/worksheets/_rels/sheet1.xml.rels", "rId91", "pivotTable", "../pivotTables/pivotTable1.xml"),
    ("xl/worksheets/_rels/sheet1.xml.rels", "rId92", "ctrlProp", "../ctrlProps/ctrlProp1.xml"),
    ("xl/worksheets/_rels/sheet1.xml.rels", "rId93", "slicer", "../slicers/slicer1.xml"),
    ("xl/worksheets/_rels/sheet1.xml.rels", "rId94", "printerSettings",
     "../printerSettings/printerSettings1.bin"),
    ("xl/worksheets/_rels/sheet1.xml.rels", "rId95", "threadedComment",
     "../threadedComments/threadedComment1.xml"),
    ("xl/pivotCache/_rels/pivotCacheDefinition1.xml.rels", "rId1", "pivotCacheRecords",
     "pivotCacheRecords1.xml"),
    ("xl/pivotTables/_rels/pivotTable1.xml.rels", "rId1", "pivotCacheDefinition",
     "../pivotCache/pivotCacheDefinition1.xml"),
    ("customXml/_rels/item1.xml.rels", "rId1", "customXmlProps", "itemProps1.xml"),
)  # fmt: skip

_EMPTY_RELATIONS = (
    '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\r\n'
    '<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"></Relationships>'
)


def packed_book(*, macros: bool = True) -> bytes:
    """`engineers_book` with the parts that no library here writes, made by hand."""
    content = parts(engineers_book(macros=macros))
    types = content["[Content_Types].xml"].decode()
    for name, (kind, data) in _EXTRA_PARTS.items():
        content[name] = data
        if kind:
            types = types.replace("</Types>", f'<Override PartName="/{name}" ContentType="{kind}"/></Types>')
    content["[Content_Types].xml"] = types.encode()
    relations: list[tuple[str, str]] = [
        (part, f'<Relationship Id="{ident}" Type="{OFFICE}/{kind}" Target="{target}"/>')
        for part, ident, kind, target in _EXTRA_RELATIONS
    ]
    relations.append(
        (
            "xl/externalLinks/_rels/externalLink1.xml.rels",
            f'<Relationship Id="rId1" Type="{OFFICE}/externalLinkPath" '
            'Target="other.xlsx" TargetMode="External"/>',
        )
    )
    for part, row in relations:
        text = content.get(part, _EMPTY_RELATIONS.encode()).decode()
        content[part] = text.replace("</Relationships>", f"{row}</Relationships>").encode()
    book = content["xl/workbook.xml"].decode()
    book = book.replace(
        "<definedNames>",
        '<externalReferences><externalReference r:id="rId92"/></externalReferences><definedNames>',
    )
    slicers = (
        '<extLst><ext uri="{BBE1A952-AA13-448e-AADC-164F8A28A991}" '
        f'xmlns:x14="{MICROSOFT}/spreadsheetml/2009/9/main"><x14:slicerCaches>'
        '<x14:slicerCache r:id="rId95"/></x14:slicerCaches></ext></extLst>'
    )
    book = book.replace(
        "</workbook>",
        f'<pivotCaches><pivotCache cacheId="7" r:id="rId91"/></pivotCaches>{slicers}</workbook>',
    )
    content["xl/workbook.xml"] = book.encode()
    sheet = content["xl/worksheets/sheet1.xml"].decode()
    control = (
        '<mc:AlternateContent xmlns:mc="http://schemas.openxmlformats.org/markup-compatibility/2006">'
        '<mc:Choice Requires="x14"><controls><control shapeId="2049" r:id="rId92" name="Check"/></controls>'
        "</mc:Choice></mc:AlternateContent>"
    )
    content["xl/worksheets/sheet1.xml"] = sheet.replace("<tableParts", f"{control}<tableParts").encode()
    return rezip(content)


def saved_by_openpyxl(data: bytes) -> bytes:
    """The workbook after openpyxl has loaded and saved it."""
    out = io.BytesIO()
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        openpyxl.load_workbook(io.BytesIO(data)).save(out)
    return out.getvalue()
