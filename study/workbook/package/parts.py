"""Parts that belong to sheets: who refers to whom, free names, relations and content types rewritten."""

from __future__ import annotations

import posixpath
import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import replace

from study.workbook.package.opc import (
    TYPES_PART,
    Package,
    Relation,
    read_content_types,
    read_relations,
    rels_part,
)
from study.workbook.package.xml import RELATIONS, XML_LINE, Document, escape
from study.workbook.package.zip import part_key

Graph = Mapping[str, tuple[Relation, ...]]
"""Relations by the compared name of the part that has them; the package itself is ``""``."""

_NUMBERED = re.compile(r"^(.*?)(\d*)(\.[^./]*)$")
_RELS_NAME = re.compile(r"^(.*?)_rels/([^/]*)\.rels$")


def read_graph(package: Package) -> dict[str, tuple[Relation, ...]]:
    """Read the relations of every part."""
    graph = {}
    for name in package.names:
        found = _RELS_NAME.match(name)
        if found:
            source = found[1] + found[2]
            graph[part_key(source)] = read_relations(package.read(name), source)
    return graph


def _reached(graph: Graph, starts: Iterable[str], closed: frozenset[str]) -> set[str]:
    """Return the parts reached from the starts without passing through the closed ones."""
    seen: set[str] = set()
    waiting = [s for s in starts if s not in closed]
    while waiting:
        part = waiting.pop()
        if part in seen:
            continue
        seen.add(part)
        targets = (part_key(r.target) for r in graph.get(part, ()) if not r.external)
        waiting.extend(t for t in targets if t not in closed)
    return seen


def exclusive_parts(package: Package, graph: Graph, sheets: Iterable[str]) -> set[str]:
    """Return the compared names of the parts that only these sheets lead to, without the sheets.

    Parameters
    ----------
    package : Package
        The engineer's workbook.
    graph : Graph
        Its relations.
    sheets : iterable of str
        Names of the sheet parts.

    Returns
    -------
    set of str
        Drawings, charts, tables and pictures that nothing else uses, with their relations parts.
    """
    owned = frozenset(map(part_key, sheets))
    inside = _reached(graph, owned, frozenset())
    others = {part_key(n) for n in package.names} - inside
    kept = _reached(graph, ["", *others], owned)
    gone = inside - kept - owned
    return gone | {part_key(rels_part(p)) for p in gone | owned}


def free_name(name: str, taken: set[str]) -> str:
    """Return the part name with the first number that is not taken, and take it.

    Examples
    --------
    >>> free_name("xl/charts/chart1.xml", {"xl/charts/chart1.xml"})
    'xl/charts/chart2.xml'
    """
    found = _NUMBERED.match(name)
    stem, ending = (found[1], found[3]) if found else (name, "")
    number = 1
    while part_key(f"{stem}{number}{ending}") in taken:
        number += 1
    free = f"{stem}{number}{ending}"
    taken.add(part_key(free))
    return free


def relative(source: str, target: str) -> str:
    """Return a target as it is written in the relations of ``source``.

    Examples
    --------
    >>> relative("xl/worksheets/sheet1.xml", "xl/charts/chart1.xml")
    '../charts/chart1.xml'
    """
    return posixpath.relpath("/" + target, posixpath.dirname("/" + source))


def relation_xml(relation: Relation, source: str) -> str:
    """Return one relationship element."""
    mode = ' TargetMode="External"' if relation.external else ""
    target = relation.target if relation.external else relative(source, relation.target)
    ident, kind = escape(relation.id), escape(relation.kind)
    return f'<Relationship Id="{ident}" Type="{kind}" Target="{escape(target)}"{mode}/>'


def relations_xml(relations: Iterable[Relation], source: str) -> bytes:
    """Return a whole relations part."""
    rows = "".join(relation_xml(r, source) for r in relations)
    return f'{XML_LINE}<Relationships xmlns="{RELATIONS}">{rows}</Relationships>'.encode()


def linked_parts(graph: Graph, sheet: str) -> list[str]:
    """Return the parts that a sheet leads to, in the order of the relations."""
    found: dict[str, str] = {}
    waiting = [sheet]
    while waiting:
        for relation in graph.get(part_key(waiting.pop(0)), ()):
            if not relation.external and part_key(relation.target) not in found:
                found[part_key(relation.target)] = relation.target
                waiting.append(relation.target)
    return list(found.values())


def moved_relations(relations: Iterable[Relation], names: Mapping[str, str]) -> list[Relation]:
    """Return relations whose targets carry their new names."""
    return [r if r.external else replace(r, target=names[part_key(r.target)]) for r in relations]


def edit_content_types(data: bytes, gone: set[str], new: Mapping[str, str]) -> bytes:
    """Return ``[Content_Types].xml`` without the parts that go and with those that come.

    Parameters
    ----------
    data : bytes
        The part.
    gone : set of str
        Compared names of the parts that are no longer there.
    new : mapping of str to str
        Type of each part of ours.

    Returns
    -------
    bytes
        The same bytes when nothing had to be declared.
    """
    types, document = read_content_types(data), Document(data, TYPES_PART)
    by_key = {part_key(n): t for n, t in new.items()}
    for node in document.root.all("Override"):
        key = part_key(node.attributes.get("PartName", ""))
        wanted = by_key.get(key)
        if key in gone:
            document.remove(node)
        elif wanted is not None:
            document.set_attribute(node, "ContentType", wanted)
    missing = {n: t for n, t in new.items() if part_key(n) not in types.overrides and types.of(n) != t}
    document.append(document.root, _declarations(missing, types.defaults, document.prefix(document.root)))
    return document.result()


def _declarations(missing: Mapping[str, str], defaults: Mapping[str, str], prefix: str) -> str:
    """Declare parts as Excel does: pictures and notes by their extension, XML one by one."""
    rows, known = [], dict(defaults)
    for name, kind in missing.items():
        extension = part_key(name).rpartition(".")[2]
        if extension not in known and not kind.endswith("+xml"):
            known[extension] = kind
            rows.append(f'<{prefix}Default Extension="{escape(extension)}" ContentType="{escape(kind)}"/>')
        elif known.get(extension) != kind:
            rows.append(f'<{prefix}Override PartName="/{escape(name)}" ContentType="{escape(kind)}"/>')
    return "".join(rows)


def edit_relations(data: bytes, source: str, gone: set[str], new: Sequence[Relation]) -> bytes:
    """Return a relations part without those ids and with new relations at its end."""
    document = Document(data, rels_part(source))
    for node in document.root.all("Relationship"):
        if node.attributes.get("Id") in gone:
            document.remove(node)
    if new:
        prefix = document.prefix(document.root)
        rows = "".join(relation_xml(r, source) for r in new)
        document.append(document.root, rows.replace("<Relationship ", f"<{prefix}Relationship "))
    return document.result()
