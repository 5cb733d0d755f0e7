"""The workbook part: list of sheets, defined names, views; who owns which sheet."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from study.issues import PackageError
from study.workbook.package.opc import Package, Relation, read_relations, rels_part
from study.workbook.package.xml import OFFICE, Document, Node, escape, number_in, whole_number
from study.workbook.package.zip import part_key

MARK = "StudyResultSheet"
"""Hidden name, scoped to a sheet, whose value is that sheet's name as text.

A copy that the engineer makes of a result sheet carries the mark with the old name, so it is his own.
"""

WORKBOOK_ORDER = (
    "fileVersion", "fileSharing", "workbookPr", "workbookProtection", "bookViews", "sheets",
    "functionGroups", "externalReferences", "definedNames", "calcPr", "oleSize", "customWorkbookViews",
    "pivotCaches", "smartTagPr", "smartTagTypes", "webPublishing", "fileRecoveryPr",
    "webPublishObjects", "extLst",
)  # fmt: skip
"""Children of the workbook element in the order of ECMA-376-1 clause 18.2.27 (CT_Workbook), from memory."""

_FILTER = "_xlnm._filterdatabase"
_TRUE = ("1", "true")


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """One entry of the list of sheets.

    Attributes
    ----------
    name : str
        Name on the tab.
    index : int
        Position in the list, from 0.
    number : int
        The sheetId.
    relation : Relation
        Where its part is.
    owned : bool
        Whether this program made it.
    hidden : bool
        Whether its tab is not shown.
    """

    name: str
    index: int
    number: int
    relation: Relation
    owned: bool
    hidden: bool
    node: Node = field(repr=False)

    @property
    def part(self) -> str:
        """Name of its part."""
        return self.relation.target


@dataclass(frozen=True, slots=True, kw_only=True)
class DefinedName:
    """A defined name; ``scope`` is the sheet's position, or None for the whole workbook."""

    name: str
    scope: int | None
    hidden: bool
    value: str

    @property
    def key(self) -> tuple[str, int | None]:
        """What must be unique."""
        return self.name.lower(), self.scope


def defined_names(root: Node) -> list[tuple[Node, DefinedName]]:
    """Return every defined name with its element."""
    container = root.find("definedNames")
    return [(node, _defined_name(node)) for node in container.all("definedName")] if container else []


def _defined_name(node: Node) -> DefinedName:
    scope = whole_number(node, "localSheetId") if "localSheetId" in node.attributes else None
    return DefinedName(
        name=node.attributes.get("name", ""),
        scope=scope,
        hidden=node.attributes.get("hidden", "0") in _TRUE,
        value=node.text,
    )


def mark_value(sheet: str) -> str:
    """Return the value of the ownership mark: the sheet's name as a text constant."""
    doubled = sheet.replace('"', '""')
    return f'"{doubled}"'


def read_sheets(package: Package, root: Node, prefix: str) -> list[Sheet]:
    """Return the list of sheets with their parts and their owners."""
    relations = {
        r.id: r for r in read_relations(package.read(rels_part(package.workbook_part)), package.workbook_part)
    }
    marks = {d.scope: d.value for _, d in defined_names(root) if d.name.lower() == MARK.lower()}
    container = root.find("sheets")
    sheets: list[Sheet] = []
    for index, node in enumerate(container.all("sheet") if container else ()):
        name = node.attributes.get("name", "")
        relation = relations.get(node.attributes.get(f"{{{OFFICE}}}id", ""))
        if relation is None or relation.external:
            raise PackageError(f"the sheet {name} has no part; the file is damaged")
        sheets.append(
            Sheet(
                name=name,
                index=index,
                number=whole_number(node, "sheetId"),
                relation=relation,
                owned=name.startswith(prefix)
                and marks.get(index) == mark_value(name)
                and relation.is_a("worksheet"),
                hidden=node.attributes.get("state", "visible") != "visible",
                node=node,
            )
        )
    if len({part_key(s.part) for s in sheets}) < len(sheets):
        raise PackageError("two sheets share one part; the file is damaged")
    return sheets


def refuse_locked(root: Node, package: Package) -> None:
    """Raise when the engineer has locked the list of sheets, or the file records shared editing."""
    protection = root.find("workbookProtection")
    if protection and protection.attributes.get("lockStructure", "0") in _TRUE:
        raise PackageError(
            "the structure of the workbook is protected, so no sheet can be added; unprotect it in Excel"
        )
    relations = read_relations(package.read(rels_part(package.workbook_part)), package.workbook_part)
    if any(r.is_a("revisionHeaders") for r in relations):
        raise PackageError(
            "the workbook is shared with a change history; stop sharing it in Excel and save it"
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class Changes:
    """What a run does to the list of sheets.

    Attributes
    ----------
    replaced : frozenset of int
        Old positions of sheets that get new content.
    removed : frozenset of int
        Old positions of sheets that go.
    added : sequence of (str, str)
        Name and relation id of each new sheet; they come last.
    names : sequence of DefinedName
        Names that come with the result sheets; ``scope`` is the new position.
    """

    replaced: frozenset[int]
    removed: frozenset[int]
    added: Sequence[tuple[str, str]]
    names: Sequence[DefinedName]


def new_positions(sheets: Sequence[Sheet], removed: frozenset[int]) -> dict[int, int]:
    """Return the position of each sheet that stays, by its old position."""
    staying = [s.index for s in sheets if s.index not in removed]
    return {old: new for new, old in enumerate(staying)}


def edit_workbook(book: Document, sheets: Sequence[Sheet], changes: Changes) -> bytes:
    """Return the workbook part with the changes made; all other bytes stay as they are."""
    positions = new_positions(sheets, changes.removed)
    _edit_sheets(book, sheets, changes)
    _edit_names(book, changes, positions)
    _edit_views(book, sheets, positions)
    calculation = book.root.find("calcPr")
    if calculation is None:
        prefix = book.prefix(book.root)
        book.insert_in_order(f'<{prefix}calcPr fullCalcOnLoad="1"/>', "calcPr", WORKBOOK_ORDER)
    elif calculation.attributes.get("fullCalcOnLoad") not in _TRUE:
        book.set_attribute(calculation, "fullCalcOnLoad", "1")
    return book.result()


def _edit_sheets(book: Document, sheets: Sequence[Sheet], changes: Changes) -> None:
    container = book.root.find("sheets")
    if container is None:
        raise PackageError("the workbook has no list of sheets; the file is damaged")
    for sheet in sheets:
        if sheet.index in changes.removed:
            book.remove(sheet.node)
    prefix, bound = book.prefix(container), book.prefix_of(OFFICE)
    declare, mark = ("", bound) if bound else (f' xmlns:r="{OFFICE}"', "r:")
    following = max((s.number for s in sheets), default=0) + 1
    text = "".join(
        f'<{prefix}sheet{declare} name="{escape(name)}" sheetId="{following + i}" {mark}id="{relation}"/>'
        for i, (name, relation) in enumerate(changes.added)
    )
    if text:
        book.append(container, text)


def _edit_names(book: Document, changes: Changes, positions: Mapping[int, int]) -> None:
    wanted = {d.key: d for d in changes.names}
    container = book.root.find("definedNames")
    prefix = book.prefix(container or book.root)
    for node, found in defined_names(book.root):
        scope = found.scope
        if scope is not None and scope in changes.removed:
            book.remove(node)
            continue
        place = None if scope is None else positions.get(scope, scope)
        new = wanted.pop((found.name.lower(), place), None)
        if new is not None:
            if new != DefinedName(name=found.name, scope=scope, hidden=found.hidden, value=found.value):
                book.replace(node, _render(new, prefix))
        elif scope in changes.replaced and found.name.lower() == _FILTER:
            book.remove(node)
        elif place is not None:
            book.set_attribute(node, "localSheetId", str(place))
    text = "".join(_render(d, prefix) for d in wanted.values())
    if text and container is not None:
        book.append(container, text)
    elif text:
        book.insert_in_order(
            f"<{prefix}definedNames>{text}</{prefix}definedNames>", "definedNames", WORKBOOK_ORDER
        )


def _render(defined: DefinedName, prefix: str) -> str:
    scope = "" if defined.scope is None else f' localSheetId="{defined.scope}"'
    hidden = ' hidden="1"' if defined.hidden else ""
    name, value = escape(defined.name), escape(defined.value)
    return f'<{prefix}definedName name="{name}"{scope}{hidden}>{value}</{prefix}definedName>'


def _edit_views(book: Document, sheets: Sequence[Sheet], positions: Mapping[int, int]) -> None:
    """Keep the active tab where it is; a tab that goes hands over to the first one shown."""
    views = book.root.find("bookViews")
    if views is None:
        prefix = book.prefix(book.root)
        book.insert_in_order(
            f"<{prefix}bookViews><{prefix}workbookView/></{prefix}bookViews>", "bookViews", WORKBOOK_ORDER
        )
        return
    shown = [positions[s.index] for s in sheets if s.index in positions and not s.hidden]
    for view in views.all("workbookView"):
        for name in ("firstSheet", "activeTab"):
            old = number_in(view.attributes.get(name, ""))
            if old is not None:
                place = positions.get(old, shown[0] if shown else 0)
                book.set_attribute(view, name, str(place))
