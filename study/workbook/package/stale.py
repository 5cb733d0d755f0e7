"""Result sheets that a run no longer makes but the engineer refers to: kept, every value turned to #N/A."""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable
from dataclasses import replace

from study.workbook.package.cells import area
from study.workbook.package.names import Sheet, defined_names
from study.workbook.package.opc import Package
from study.workbook.package.xml import Document, Node
from study.workbook.package.zip import part_key

_NOTICE = "Not part of the latest run; the sheet is kept because other cells refer to it."


def is_referred_to(
    sheet: Sheet, package: Package, book: Node, ours: Collection[str], tables: Iterable[str]
) -> bool:
    """Return whether a part of the engineer's names the sheet or one of its tables.

    Taking out a sheet that a formula names makes the file one that Excel has to repair.

    Parameters
    ----------
    sheet : Sheet
        The owned sheet.
    package : Package
        The workbook.
    book : Node
        Root of its workbook part.
    ours : collection of str
        Compared names of parts that do not count: owned sheets and what belongs to them.
    tables : iterable of str
        Names of the tables on the sheet.
    """
    name = re.escape(sheet.name.replace("'", "''"))
    structured = "".join(rf"|(?<![\w.]){re.escape(t)}\[" for t in tables)
    wanted = re.compile(rf"{name}'!|{name}:{structured}", re.IGNORECASE)
    if any(d.scope != sheet.index and wanted.search(d.value) for _, d in defined_names(book)):
        return True
    # Text in a part may write the quotes and signs of a name as entities.
    skipped = {*ours, part_key(package.workbook_part)}
    for part in package.names:
        key = part_key(part)
        if key in skipped or not key.endswith(".xml") or key.startswith("docprops/"):
            continue
        text = package.read(part).decode("utf-8", "replace")
        if wanted.search(_plain(text)):
            return True
    return False


def _plain(text: str) -> str:
    for entity, sign in (
        ("&apos;", "'"),
        ("&quot;", '"'),
        ("&lt;", "<"),
        ("&gt;", ">"),
        ("&#39;", "'"),
        ("&amp;", "&"),
    ):
        text = text.replace(entity, sign)
    return text


def stale_sheet(data: bytes, part: str, tables: Iterable[str]) -> bytes:
    """Return a sheet that holds #N/A wherever the old one held a value: no old number is taken for new.

    Parameters
    ----------
    data : bytes
        The old sheet.
    part : str
        Its name, for messages.
    tables : iterable of str
        Cell ranges of its tables that have a header row; headings keep their text, as Excel demands.

    Returns
    -------
    bytes
        The new part.
    """
    sheet = Document(data, part)
    headings = [replace(a, bottom=a.top) for a in map(area, tables)]
    cells = sheet.root.find("sheetData")
    for row in cells.all("row") if cells else ():
        for cell in row.all("c"):
            place = cell.attributes.get("r", "")
            if cell.children and not any(area(place).overlaps(heading) for heading in headings):
                sheet.replace(cell, _emptied(place, cell, sheet.prefix(cell)))
    return sheet.result()


def _emptied(place: str, cell: Node, prefix: str) -> str:
    style = f' s="{cell.attributes["s"]}"' if "s" in cell.attributes else ""
    where = f' r="{place}"' if place else ""
    if place == "A1":
        text = f"<{prefix}is><{prefix}t>{_NOTICE}</{prefix}t></{prefix}is>"
        return f'<{prefix}c{where}{style} t="inlineStr">{text}</{prefix}c>'
    return f'<{prefix}c{where}{style} t="e"><{prefix}v>#N/A</{prefix}v></{prefix}c>'
