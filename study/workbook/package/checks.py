"""What is wrong with a workbook package: the rules whose breach makes Excel repair or refuse a file."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field

from study.issues import PackageError
from study.workbook.package.checks_sheets import cell_texts, check_sheet, check_tables
from study.workbook.package.names import WORKBOOK_ORDER, Sheet, defined_names, read_sheets
from study.workbook.package.opc import (
    SPREADSHEET,
    STYLES_TYPE,
    TYPES_PART,
    WORKSHEET_TYPE,
    Package,
    Relation,
    package_from_bytes,
    read_content_types,
    rels_part,
)
from study.workbook.package.parts import read_graph
from study.workbook.package.styles import FIRST_CUSTOM_FORMAT, ORDER
from study.workbook.package.tables import TABLE_TYPE, read_tables
from study.workbook.package.xml import OFFICE, Node, as_utf8, effective, out_of_order, parse, whole_number
from study.workbook.package.zip import part_key

LONGEST_SHEET_NAME = 31
_FORBIDDEN = re.compile(r"[\[\]:*?/\\]|^'|'$")


@dataclass(frozen=True, slots=True, kw_only=True)
class _Read:
    """A package with every XML part parsed once."""

    package: Package
    graph: Mapping[str, tuple[Relation, ...]]
    roots: Mapping[str, Node] = field(repr=False)

    @property
    def book(self) -> Node:
        return self.roots[part_key(self.package.workbook_part)]

    def related(self, kind: str) -> Node | None:
        """Return the root of the workbook's part of a kind."""
        for relation in self.graph.get(part_key(self.package.workbook_part), ()):
            if relation.is_a(kind) and not relation.external:
                return self.roots.get(part_key(relation.target))
        return None


def validate_package(data: bytes) -> list[str]:
    """List what is wrong with a workbook file.

    Parameters
    ----------
    data : bytes
        The whole file.

    Returns
    -------
    list of str
        One sentence for each fault, with the part; empty when nothing was found.
    """
    try:
        package = package_from_bytes(data)
        graph = read_graph(package)
        roots = {part_key(n): parse(as_utf8(package.read(n), n), n) for n in package.names if _is_xml(n)}
        sheets = read_sheets(package, roots[part_key(package.workbook_part)], "")
        read = _Read(package=package, graph=graph, roots=roots)
        return [
            *_check_types(read),
            *_check_related_types(read),
            *_check_relations(read),
            *_check_workbook(read, sheets),
            *_check_names(read, sheets),
            *_check_styles(read.related("styles")),
            *_check_differential(read),
            *_check_chain(read, sheets),
            *_check_sheets(read, sheets),
        ]
    except PackageError as error:
        return [str(error)]


def _is_xml(name: str) -> bool:
    return name.lower().endswith((".xml", ".rels"))


def _repeated(values: Iterable[str]) -> list[str]:
    return [value for value, count in Counter(values).items() if count > 1]


def _check_types(read: _Read) -> Iterator[str]:
    types = read_content_types(read.package.read(TYPES_PART))
    keys = {part_key(n) for n in read.package.names}
    for name in read.package.names:
        if types.of(name) is None and name != TYPES_PART and not name.endswith("/"):
            yield f"{name}: no content type is declared"
    for part in types.overrides:
        if part not in keys:
            yield f"{TYPES_PART}: declares {part}, which is not there"
    root = read.roots[part_key(TYPES_PART)]
    declared = [part_key(n.attributes.get("PartName", "")) for n in root.all("Override")]
    declared += ["." + n.attributes.get("Extension", "").lower() for n in root.all("Default")]
    for part in _repeated(declared):
        yield f"{TYPES_PART}: declares {part} twice"


_DRAWING = "application/vnd.openxmlformats-officedocument.drawing"
_TYPE_BY_RELATION = {
    "worksheet": WORKSHEET_TYPE,
    "styles": STYLES_TYPE,
    "table": TABLE_TYPE,
    "sharedStrings": SPREADSHEET + "sharedStrings+xml",
    "calcChain": SPREADSHEET + "calcChain+xml",
    "comments": SPREADSHEET + "comments+xml",
    "pivotTable": SPREADSHEET + "pivotTable+xml",
    "drawing": _DRAWING + "+xml",
    "chart": _DRAWING + "ml.chart+xml",
    "vmlDrawing": "application/vnd.openxmlformats-officedocument.vmlDrawing",
}


def _check_related_types(read: _Read) -> Iterator[str]:
    """Check that a part has the type that its relation promises."""
    types = read_content_types(read.package.read(TYPES_PART))
    for relations in read.graph.values():
        for relation in relations:
            kind = _TYPE_BY_RELATION.get(relation.kind.rpartition("/")[2])
            found = types.of(relation.target)
            if kind and not relation.external and found != kind:
                yield f"{relation.target}: is related as {relation.id} but its type is {found}"


def _check_relations(read: _Read) -> Iterator[str]:
    keys = {part_key(n) for n in read.package.names}
    for source, relations in read.graph.items():
        where = rels_part(source)
        if source and source not in keys:
            yield f"{where}: belongs to a part that is not there"
        for ident in _repeated(r.id for r in relations):
            yield f"{where}: the id {ident} stands twice"
        for relation in relations:
            if not relation.external and part_key(relation.target) not in keys:
                yield f"{where}: {relation.id} leads to {relation.target}, which is not there"
    office = f"{{{OFFICE}}}"
    for part, root in read.roots.items():
        ids = {r.id for r in read.graph.get(part, ())}
        for node in root.walk():
            for name, value in node.attributes.items():
                if name.startswith(office) and value and value not in ids:
                    yield f"{part}: {node.name} refers to the relation {value}, which is not there"


def _check_workbook(read: _Read, sheets: list[Sheet]) -> Iterator[str]:
    part, book = read.package.workbook_part, read.book
    yield from (f"{part}: {fault}" for fault in out_of_order(book, WORKBOOK_ORDER, ()))
    for name in _repeated(s.name.lower() for s in sheets):
        yield f"{part}: two sheets are named {name}"
    for number in _repeated(str(s.number) for s in sheets):
        yield f"{part}: the sheetId {number} stands twice"
    for sheet in sheets:
        if not 0 < len(sheet.name) <= LONGEST_SHEET_NAME or _FORBIDDEN.search(sheet.name):
            yield f"{part}: {sheet.name!r} is no valid name of a sheet"
    if all(s.hidden for s in sheets):
        yield f"{part}: no sheet is visible"


def _check_names(read: _Read, sheets: list[Sheet]) -> Iterator[str]:
    part, book = read.package.workbook_part, read.book
    names = [d for _, d in defined_names(book)]
    for name, scope in [key for key, count in Counter(d.key for d in names).items() if count > 1]:
        yield f"{part}: the name {name} stands twice in the scope {scope}"
    for defined in names:
        if defined.scope is not None and not 0 <= defined.scope < len(sheets):
            yield f"{part}: the name {defined.name} belongs to sheet {defined.scope}, which is not there"
    if book.find("definedNames") and not names:
        yield f"{part}: the list of names is empty"
    for view in book.walk():
        active = whole_number(view, "activeTab") if view.name == "workbookView" else 0
        if active >= len(sheets):
            yield f"{part}: the active tab {active} is not there"


def _check_styles(root: Node | None) -> Iterator[str]:
    if root is None:
        return
    yield from (f"styles: {fault}" for fault in out_of_order(root, ORDER, ()))
    sizes = {c.name: len(c.children) for c in root.children if c.space == root.space}
    for container in root.children:
        count = whole_number(container, "count", len(container.children))
        if count != len(container.children) and container.space == root.space:
            yield f"styles: {container.name} counts {count} but holds {len(container.children)}"
    declared = [n.attributes.get("numFmtId", "") for n in _formats(root)]
    for number in _repeated(declared):
        yield f"styles: the number format {number} stands twice"
    yield from _check_named_styles(root, sizes.get("cellStyleXfs", 0))
    limits = {
        "fontId": sizes.get("fonts", 0),
        "fillId": sizes.get("fills", 0),
        "borderId": sizes.get("borders", 0),
    }
    for name in ("cellStyleXfs", "cellXfs"):
        formats = root.find(name)
        for place, xf in enumerate(formats.children if formats else ()):
            yield from _check_xf(f"{name}[{place}]", xf, limits, sizes.get("cellStyleXfs", 0), declared)


def _check_named_styles(root: Node, formats: int) -> Iterator[str]:
    container = root.find("cellStyles")
    for style in container.children if container else ():
        number = whole_number(style, "xfId")
        if number >= max(1, formats):
            yield f"styles: {style.attributes.get('name', '')} refers to xfId {number} of {formats}"


def _formats(root: Node) -> list[Node]:
    container = root.find("numFmts")
    return [effective(n) for n in container.children] if container else []


def _check_xf(
    where: str, xf: Node, limits: dict[str, int], styles: int, declared: list[str]
) -> Iterator[str]:
    for name, limit in (limits | {"xfId": max(1, styles)}).items():
        number = whole_number(xf, name)
        if number >= limit:
            yield f"styles: {where} refers to {name} {number} of {limit}"
    number = whole_number(xf, "numFmtId")
    if number >= FIRST_CUSTOM_FORMAT and str(number) not in declared:
        yield f"styles: {where} refers to the number format {number}, which is not declared"


def _check_differential(read: _Read) -> Iterator[str]:
    styles = read.related("styles")
    container = styles.find("dxfs") if styles else None
    size = len(container.children) if container else 0
    space = read.book.space
    for part, root in read.roots.items():
        for node in root.walk():
            if node.space != space:
                continue
            for name, value in node.attributes.items():
                if name.lower().endswith("dxfid") and whole_number(node, name) >= size:
                    yield f"{part}: {node.name} refers to {name} {value} of {size}"


def _check_chain(read: _Read, sheets: list[Sheet]) -> Iterator[str]:
    """Check that every cell in the calculation chain holds a formula."""
    chain = read.related("calcChain")
    formulas: dict[str, set[str]] = {}
    for sheet in sheets if chain else ():
        root = read.roots.get(part_key(sheet.part))
        formulas[str(sheet.number)] = {
            n.attributes.get("r", "") for n in (root.walk() if root else ()) if n.name == "c" and n.find("f")
        }
    number = ""
    for cell in chain.children if chain else ():
        number = cell.attributes.get("i", number)
        if cell.attributes.get("r", "") not in formulas.get(number, set()):
            yield f"calcChain: names {cell.attributes.get('r')} of sheet {number}, which holds no formula"


def _check_sheets(read: _Read, sheets: list[Sheet]) -> Iterator[str]:
    strings, styles = read.related("sharedStrings"), read.related("styles")
    texts = [
        "".join(n.text for n in i.walk() if n.name == "t") for i in (strings.children if strings else ())
    ]
    formats = styles.find("cellXfs") if styles else None
    size = max(1, len(formats.children) if formats else 0)
    tables = {part_key(t.part): t for t in read_tables(read.package)}
    headings: dict[str, dict[str, str]] = {}
    for sheet in sheets:
        root = read.roots.get(part_key(sheet.part))
        if root is None or not sheet.relation.is_a("worksheet"):
            continue
        yield from check_sheet(sheet.part, root, size, len(texts))
        on_sheet = cell_texts(root, texts)
        for relation in read.graph.get(part_key(sheet.part), ()):
            if relation.is_a("table") and not relation.external:
                headings[part_key(relation.target)] = on_sheet
    names = {d.name.lower() for _, d in defined_names(read.book)}
    yield from check_tables(tables, read.roots, headings, names)
