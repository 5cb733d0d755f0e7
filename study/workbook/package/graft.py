"""Result sheets grafted into the engineer's workbook; every part that is not ours keeps its bytes."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field, replace

from study.issues import PackageError
from study.workbook.package.names import (
    MARK,
    Changes,
    DefinedName,
    Sheet,
    defined_names,
    edit_workbook,
    mark_value,
    new_positions,
    read_sheets,
    refuse_locked,
)
from study.workbook.package.opc import (
    STYLES_TYPE,
    TYPES_PART,
    Package,
    Relation,
    package_from_bytes,
    read_content_types,
    rels_part,
)
from study.workbook.package.parts import (
    Graph,
    edit_content_types,
    edit_relations,
    exclusive_parts,
    free_name,
    linked_parts,
    moved_relations,
    read_graph,
    relations_xml,
)
from study.workbook.package.sheets import OldSheet, old_sheet, rewrite_sheet, rewrite_table, shared_strings
from study.workbook.package.stale import is_referred_to, stale_sheet
from study.workbook.package.styles import EMPTY_STYLES, StyleMap, merge_styles
from study.workbook.package.tables import TablePlace, place_tables, read_tables
from study.workbook.package.xml import OFFICE, Document, number_in
from study.workbook.package.zip import Member, inflate, new_member, part_key, write_members


@dataclass(frozen=True, slots=True, kw_only=True)
class _Side:
    """One of the two workbooks, read."""

    package: Package
    graph: Graph
    book: Document = field(repr=False)
    sheets: list[Sheet]

    def related(self, kind: str) -> Relation | None:
        """Return the workbook's first relation of a kind."""
        relations = self.graph.get(part_key(self.package.workbook_part), ())
        return next((r for r in relations if r.is_a(kind) and not r.external), None)

    def read_related(self, kind: str) -> bytes | None:
        """Return the content of the part behind `related`."""
        relation = self.related(kind)
        return None if relation is None else self.package.read(relation.target)


def _read(data: bytes, prefix: str) -> _Side:
    package = package_from_bytes(data)
    book = Document(package.read(package.workbook_part), package.workbook_part)
    return _Side(
        package=package,
        graph=read_graph(package),
        book=book,
        sheets=read_sheets(package, book.root, prefix),
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Plan:
    """Which sheet goes where, before anything is written.

    Attributes
    ----------
    names : dict
        Part name in the engineer's workbook by compared part name in the result workbook.
    old : dict
        The owned sheet that each result sheet replaces, where there is one.
    stale : list of Sheet
        Owned sheets that this run no longer makes but other parts refer to.
    removed : list of Sheet
        Owned sheets that go.
    dropped : set of str
        Compared names of parts that go.
    tables : mapping
        Number and name of each table by compared part name in the result workbook.
    """

    names: dict[str, str]
    old: dict[str, Sheet]
    stale: list[Sheet]
    removed: list[Sheet]
    dropped: set[str]
    tables: Mapping[str, TablePlace]


def graft_result_sheets(package_bytes: bytes, result_workbook_bytes: bytes, prefix: str = "R ") -> bytes:
    """Put result sheets behind the engineer's sheets, in the place of those of the last run.

    Parameters
    ----------
    package_bytes : bytes
        The engineer's workbook, .xlsx or .xlsm.
    result_workbook_bytes : bytes
        A workbook written by XlsxWriter that holds the result sheets and nothing else. Dates in it are to be
        text, since the engineer's workbook may count days from 1904.
    prefix : str
        What the name of every result sheet begins with.

    Returns
    -------
    bytes
        The whole file. Parts that are not ours keep their bytes, compressed as they were; the list of sheets,
        relations, content types and styles get insertions; a calculation chain that names a
        replaced sheet goes.

    Raises
    ------
    PackageError
        The workbook cannot be used, its structure is locked, or a sheet of the engineer's has the name of a
        result sheet.
    ValueError
        The result workbook is not as described.
    """
    base, result = _read(package_bytes, prefix), _read(result_workbook_bytes, prefix)
    refuse_locked(base.book.root, base.package)
    _check_result(result, prefix)
    plan = _plan(base, result)
    styles, numbers = _joined_styles(base, result)
    new = _new_parts(base, result, plan, numbers)
    new |= _new_lists(base, result, plan, styles, new)
    return write_members(_members(base.package, plan.dropped, new))


def _check_result(result: _Side, prefix: str) -> None:
    if not result.sheets:
        raise ValueError("the result workbook holds no sheet")
    for sheet in result.sheets:
        if not sheet.name.startswith(prefix) or not sheet.relation.is_a("worksheet"):
            raise ValueError(f"{sheet.name!r} is no worksheet whose name begins with {prefix!r}")


def _plan(base: _Side, result: _Side) -> _Plan:
    made = {s.name.lower() for s in result.sheets}
    owned = {s.name.lower(): s for s in base.sheets if s.owned}
    for sheet in base.sheets:
        if not sheet.owned and sheet.name.lower() in made:
            raise PackageError(
                f"the workbook has a sheet of its own named {sheet.name!r}, the name of a result sheet; "
                "rename or delete it and run again"
            )
    base_tables = read_tables(base.package)
    stale, removed = _vanished(base, [s for n, s in owned.items() if n not in made], base_tables)
    going = [s for s in owned.values() if s not in stale]
    dropped = exclusive_parts(base.package, base.graph, [s.part for s in going])
    dropped |= {part_key(s.part) for s in removed}
    chain = base.related("calcChain")
    if chain and _names_a_sheet(base.package.read(chain.target), {s.number for s in owned.values()}):
        dropped |= {part_key(chain.target), part_key(rels_part(chain.target))}
    taken = {part_key(n) for n in base.package.names} - dropped
    old = {s.name: owned[s.name.lower()] for s in result.sheets if s.name.lower() in owned}
    names: dict[str, str] = {}
    for sheet in result.sheets:
        new = old[sheet.name].part if sheet.name in old else free_name("xl/worksheets/sheet1.xml", taken)
        names[part_key(sheet.part)] = new
    for sheet in result.sheets:
        for part in linked_parts(result.graph, sheet.part):
            if part_key(part) not in names:
                names[part_key(part)] = free_name(part, taken)
    tables = place_tables(
        base_tables, read_tables(result.package), dropped, [d.name for _, d in defined_names(base.book.root)]
    )
    return _Plan(names=names, old=old, stale=stale, removed=removed, dropped=dropped, tables=tables)


def _vanished(
    base: _Side, vanished: list[Sheet], tables: list[TablePlace]
) -> tuple[list[Sheet], list[Sheet]]:
    """Split the owned sheets that are no longer made into those that must stay and those that go."""
    if not vanished:
        return [], []
    owned = [s.part for s in base.sheets if s.owned]
    ours = {part_key(p) for p in owned} | exclusive_parts(base.package, base.graph, owned)
    stale: list[Sheet] = []
    removed: list[Sheet] = []
    for sheet in vanished:
        on_it = _tables_on(base, sheet, tables)
        referred = is_referred_to(sheet, base.package, base.book.root, ours, [t.name for t in on_it])
        (stale if referred else removed).append(sheet)
    return stale, removed


def _tables_on(base: _Side, sheet: Sheet, tables: list[TablePlace]) -> list[TablePlace]:
    targets = {part_key(r.target) for r in base.graph.get(part_key(sheet.part), ()) if r.is_a("table")}
    return [t for t in tables if part_key(t.part) in targets]


def _names_a_sheet(chain: bytes, numbers: set[int]) -> bool:
    """Return whether a chain of calculation names one of these sheets."""
    return bool(numbers & {number_in(i.decode()) for i in re.findall(rb"""\bi=["'](\d+)["']""", chain)})


def _joined_styles(base: _Side, result: _Side) -> tuple[bytes, StyleMap]:
    extra = result.read_related("styles")
    if extra is None:
        raise ValueError("the result workbook has no styles")
    own = base.read_related("styles")
    return merge_styles(EMPTY_STYLES if own is None else own, extra)


def _new_parts(base: _Side, result: _Side, plan: _Plan, styles: StyleMap) -> dict[str, bytes]:
    """Return the content of every part of ours by its name in the engineer's workbook."""
    strings = shared_strings(result.read_related("sharedStrings"))
    renamed = {t.name: plan.tables[part_key(t.part)].name for t in read_tables(result.package)}
    renamed = {old: new for old, new in renamed.items() if old != new}
    parts: dict[str, bytes] = {}
    for sheet in result.sheets:
        replaced = plan.old.get(sheet.name)
        before = (
            OldSheet() if replaced is None else old_sheet(base.package.read(replaced.part), replaced.part)
        )
        data = result.package.read(sheet.part)
        parts[plan.names[part_key(sheet.part)]] = rewrite_sheet(data, strings, styles, before, renamed)
    for key, name in plan.names.items():
        if name not in parts:
            data = result.package.read(key)
            table = plan.tables.get(key)
            parts[name] = rewrite_table(data, styles, table.number, table.name) if table else data
        relations = result.graph.get(key)
        if relations:
            parts[rels_part(name)] = relations_xml(moved_relations(relations, plan.names), name)
    tables = read_tables(base.package) if plan.stale else []
    for sheet in plan.stale:
        headed = [t.ref for t in _tables_on(base, sheet, tables) if t.headed]
        parts[sheet.part] = stale_sheet(base.package.read(sheet.part), sheet.part, headed)
    return parts


def _new_lists(
    base: _Side, result: _Side, plan: _Plan, styles: bytes, parts: Mapping[str, bytes]
) -> dict[str, bytes]:
    """Return the parts of the engineer's that list what the workbook holds, and the styles."""
    workbook = base.package.workbook_part
    types = read_content_types(result.package.read(TYPES_PART))
    declared = {name: types.of(key) or "" for key, name in plan.names.items()}
    known = base.graph.get(part_key(workbook), ())
    ids = _free_ids(known)
    new_relations, added = [], []
    for sheet in result.sheets:
        if sheet.name not in plan.old:
            target = plan.names[part_key(sheet.part)]
            new_relations.append(
                Relation(id=next(ids), kind=f"{OFFICE}/worksheet", target=target, external=False)
            )
            added.append((sheet.name, new_relations[-1].id))
    lists: dict[str, bytes] = {}
    own_styles = base.related("styles")
    if own_styles is None:
        # Some readers look for the usual name instead of following the relation.
        taken = {part_key(n) for n in (*base.package.names, *parts)}
        name = free_name("xl/styles.xml", taken) if "xl/styles.xml" in taken else "xl/styles.xml"
        new_relations.append(Relation(id=next(ids), kind=f"{OFFICE}/styles", target=name, external=False))
        declared[name] = STYLES_TYPE
        lists[name] = styles
    else:
        lists[own_styles.target] = styles
    gone = {r.id for r in known if part_key(r.target) in plan.dropped and not r.external}
    lists[workbook] = edit_workbook(base.book, base.sheets, _changes(base, result, plan, added))
    lists[rels_part(workbook)] = edit_relations(
        base.package.read(rels_part(workbook)), workbook, gone, new_relations
    )
    ours = {part_key(n) for n in parts}
    lists[TYPES_PART] = edit_content_types(base.package.read(TYPES_PART), plan.dropped - ours, declared)
    return lists


def _free_ids(relations: Iterable[Relation]) -> Iterator[str]:
    """Yield relation ids above every numbered one."""
    found = [re.fullmatch(r"rId(\d+)", r.id, re.IGNORECASE) for r in relations]
    number = max((number_in(id_[1]) or 0 for id_ in found if id_), default=0)
    while True:
        number += 1
        yield f"rId{number}"


def _changes(base: _Side, result: _Side, plan: _Plan, added: list[tuple[str, str]]) -> Changes:
    """Say what happens to the list of sheets, with the names of the result sheets at their new places."""
    removed = frozenset(s.index for s in plan.removed)
    positions = new_positions(base.sheets, removed)
    following = len(positions)
    places: dict[int, int] = {}
    for sheet in result.sheets:
        if sheet.name in plan.old:
            places[sheet.index] = positions[plan.old[sheet.name].index]
        else:
            places[sheet.index], following = following, following + 1
    names = [
        DefinedName(
            name=MARK,
            scope=places[s.index],
            hidden=True,
            value=mark_value(plan.old[s.name].name if s.name in plan.old else s.name),
        )
        for s in result.sheets
    ]
    for _, found in defined_names(result.book.root):
        if found.scope is None:
            raise ValueError(f"the name {found.name} of the result workbook is not scoped to a sheet")
        names.append(replace(found, scope=places[found.scope]))
    return Changes(
        replaced=frozenset(s.index for s in plan.old.values()), removed=removed, added=added, names=names
    )


def _members(package: Package, dropped: set[str], new: Mapping[str, bytes]) -> Iterator[Member]:
    """Yield the zip entries: the engineer's as they are, ours in the place they had, new ones last."""
    waiting = {part_key(name): (name, content) for name, content in new.items()}
    for member in package.members:
        found = waiting.pop(part_key(member.name), None)
        if found is not None:
            unchanged = len(found[1]) == member.size and inflate(member) == found[1]
            yield member if unchanged else new_member(member.name, found[1])
        elif part_key(member.name) not in dropped:
            yield member
    for name, content in waiting.values():
        yield new_member(name, content)
