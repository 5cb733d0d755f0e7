"""Worksheet parts written by hand, in a package that holds nothing else."""

from __future__ import annotations

import io
import zipfile
from collections.abc import Mapping
from pathlib import Path

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
OFFICE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
PACKAGE = "http://schemas.openxmlformats.org/package/2006"
SPREADSHEET = "application/vnd.openxmlformats-officedocument.spreadsheetml"

# Style 0 plain, 1 per cent, 2 a date, 3 and 4 the engineer's own formats of a date and of per cent.
STYLES = (
    f'<styleSheet xmlns="{MAIN}"><numFmts count="2"><numFmt numFmtId="164" formatCode="dd/mm/yyyy"/>'
    '<numFmt numFmtId="165" formatCode="0.00%;[Red]-0.00%"/></numFmts><cellXfs count="5"><xf numFmtId="0"/>'
    '<xf numFmtId="9"/><xf numFmtId="14"/><xf numFmtId="164"/><xf numFmtId="165"/></cellXfs></styleSheet>'
)


def package(
    sheets: Mapping[str, str],
    *,
    strings: str = "",
    names: str = "",
    properties: str = "",
    folder: Path | None = None,
) -> bytes:
    """Return a workbook whose sheets have these contents of ``sheetData``; also written into `folder`."""
    head = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>'
    overrides = "".join(
        f'<Override PartName="/xl/worksheets/sheet{i}.xml" ContentType="{SPREADSHEET}.worksheet+xml"/>'
        for i in range(1, len(sheets) + 1)
    )
    listed = "".join(
        f'<sheet name="{name}" sheetId="{i}" r:id="rId{i}"/>' for i, name in enumerate(sheets, 1)
    )
    relations = "".join(
        f'<Relationship Id="rId{i}" Type="{OFFICE}/worksheet" Target="worksheets/sheet{i}.xml"/>'
        for i in range(1, len(sheets) + 1)
    )
    parts = {
        "[Content_Types].xml": (
            f'{head}<Types xmlns="{PACKAGE}/content-types">'
            '<Default Extension="xml" ContentType="application/xml"/>'
            '<Default Extension="rels" '
            'ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
            f'<Override PartName="/xl/workbook.xml" ContentType="{SPREADSHEET}.sheet.main+xml"/>'
            f'<Override PartName="/xl/styles.xml" ContentType="{SPREADSHEET}.styles+xml"/>'
            f'<Override PartName="/xl/sharedStrings.xml" ContentType="{SPREADSHEET}.sharedStrings+xml"/>'
            f"{overrides}</Types>"
        ),
        "_rels/.rels": (
            f'{head}<Relationships xmlns="{PACKAGE}/relationships"><Relationship Id="rId1" '
            f'Type="{OFFICE}/officeDocument" Target="xl/workbook.xml"/></Relationships>'
        ),
        "xl/workbook.xml": (
            f'{head}<workbook xmlns="{MAIN}" xmlns:r="{OFFICE}">{properties}<sheets>{listed}</sheets>'
            f"{names}</workbook>"
        ),
        "xl/_rels/workbook.xml.rels": (
            f'{head}<Relationships xmlns="{PACKAGE}/relationships">{relations}'
            f'<Relationship Id="rIdS" Type="{OFFICE}/styles" Target="styles.xml"/>'
            f'<Relationship Id="rIdT" Type="{OFFICE}/sharedStrings" Target="sharedStrings.xml"/>'
            "</Relationships>"
        ),
        "xl/styles.xml": head + STYLES,
        "xl/sharedStrings.xml": f'{head}<sst xmlns="{MAIN}">{strings}</sst>',
    }
    for i, content in enumerate(sheets.values(), 1):
        body = (
            content
            if "<worksheet" in content
            else (f'<worksheet xmlns="{MAIN}"><sheetData>{content}</sheetData></worksheet>')
        )
        parts[f"xl/worksheets/sheet{i}.xml"] = body if body.startswith("<?xml") else head + body
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, text in parts.items():
            archive.writestr(name, text)
    if folder is not None:
        (folder / "book.xlsx").write_bytes(out.getvalue())
    return out.getvalue()
