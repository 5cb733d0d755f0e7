"""Cell formats of the result sheets joined to the engineer's: found when equal, appended when not."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from study.workbook.package.xml import (
    COMPATIBILITY,
    MAIN,
    XML_LINE,
    Document,
    Node,
    escape,
    parse,
    whole_number,
)

ORDER = (
    "numFmts",
    "fonts",
    "fills",
    "borders",
    "cellStyleXfs",
    "cellXfs",
    "cellStyles",
    "dxfs",
    "tableStyles",
    "colors",
    "extLst",
)
FIRST_CUSTOM_FORMAT = 164
"""Number formats below this are built in and never declared."""
_RESERVED_FILLS = ("none", "gray125")

EMPTY_STYLES = f'{XML_LINE}<styleSheet xmlns="{MAIN}"/>'.encode()


@dataclass(frozen=True, slots=True, kw_only=True)
class StyleMap:
    """Where the formats of the result sheets stand in the joined style sheet.

    Attributes
    ----------
    cells : tuple of int
        New cell format for each old one.
    differential : tuple of int
        New differential format (conditional formats, tables) for each old one.
    """

    cells: tuple[int, ...]
    differential: tuple[int, ...]


Key = tuple[str, str, tuple[tuple[str, str], ...], tuple["Key", ...]]


def _key(node: Node) -> Key:
    """Return what makes two style elements equal."""
    return node.space, node.name, tuple(sorted(node.attributes.items())), tuple(map(_key, node.children))


def _render(node: Node, prefix: str) -> str:
    """Write an element anew with the prefix that the engineer's file uses."""
    if node.space != MAIN or any("}" in name for name in node.attributes):
        raise ValueError(f"a format of the result sheets uses the foreign element {node.name}")
    attributes = "".join(f' {name}="{escape(value)}"' for name, value in node.attributes.items())
    children = "".join(_render(child, prefix) for child in node.children)
    if not children:
        return f"<{prefix}{node.name}{attributes}/>"
    return f"<{prefix}{node.name}{attributes}>{children}</{prefix}{node.name}>"


def _made(name: str, attributes: Mapping[str, str], *children: Node) -> Node:
    return Node(space=MAIN, name=name, attributes=dict(attributes), start=0, children=list(children))


class _Pool:
    """One container of the style sheet and what is appended to it."""

    def __init__(self, sheet: Document, name: str) -> None:
        self.name = name
        self.node = sheet.root.find(name)
        self.prefix = sheet.prefix(self.node or sheet.root)
        items = self.node.children if self.node else []
        self.size = len(items)
        self.index: dict[Key, int] = {}
        for position, item in enumerate(items):
            self.index.setdefault(_key(item), position)
        self.added: list[str] = []

    def place(self, item: Node) -> int:
        """Return the index of an equal element; append the element when there is none."""
        key = _key(item)
        if key not in self.index:
            self.append(item)
        return self.index[key]

    def append(self, item: Node) -> None:
        """Append an element whether or not there is an equal one."""
        self.index.setdefault(_key(item), self.size)
        self.added.append(_render(item, self.prefix))
        self.size += 1

    def write(self, sheet: Document) -> None:
        """Put the insertions into the style sheet."""
        if not self.added:
            return
        text = "".join(self.added)
        if self.node is None:
            whole = f'<{self.prefix}{self.name} count="{self.size}">{text}</{self.prefix}{self.name}>'
            sheet.insert_in_order(whole, self.name, ORDER)
            return
        sheet.set_attribute(self.node, "count", str(self.size))
        sheet.append(self.node, text)


def merge_styles(base: bytes, extra: bytes) -> tuple[bytes, StyleMap]:
    """Append the formats of one style sheet to another.

    Parameters
    ----------
    base : bytes
        The engineer's style sheet; comes back with insertions only.
    extra : bytes
        The style sheet of the result sheets.

    Returns
    -------
    bytes
        The joined style sheet; equal to ``base`` when it already holds every format.
    StyleMap
        The new numbers.
    """
    sheet, root = Document(base, "styles"), parse(extra, "styles of the result sheets")
    pools = {name: _Pool(sheet, name) for name in ORDER[:6]} | {"dxfs": _Pool(sheet, "dxfs")}
    formats = _place_formats(pools["numFmts"], sheet.root, root)
    _reserve(pools)
    fonts = [pools["fonts"].place(n) for n in _items(root, "fonts")]
    fills = [pools["fills"].place(n) for n in _items(root, "fills")]
    borders = [pools["borders"].place(n) for n in _items(root, "borders")]
    normal = _normal_style(sheet.root)
    if not pools["cellStyleXfs"].size:
        plain = dict.fromkeys(("numFmtId", "fontId", "fillId", "borderId"), "0")
        pools["cellStyleXfs"].append(_made("xf", plain))
    cells = []
    for xf in _items(root, "cellXfs"):
        moved = {
            "numFmtId": formats.get(xf.attributes.get("numFmtId", "0"), xf.attributes.get("numFmtId", "0")),
            "fontId": str(fonts[whole_number(xf, "fontId")]),
            "fillId": str(fills[whole_number(xf, "fillId")]),
            "borderId": str(borders[whole_number(xf, "borderId")]),
            "xfId": normal,
        }
        cells.append(pools["cellXfs"].place(replace(xf, attributes=xf.attributes | moved)))
    differential = [pools["dxfs"].place(_renumbered(n, formats)) for n in _items(root, "dxfs")]
    for pool in pools.values():
        pool.write(sheet)
    return sheet.result(), StyleMap(cells=tuple(cells), differential=tuple(differential))


def _items(root: Node, name: str) -> list[Node]:
    container = root.find(name)
    return container.children if container else []


def _number_formats(root: Node) -> list[Node]:
    """Return every number format, those inside compatibility blocks and differential formats too."""
    return [n for n in root.walk() if n.name == "numFmt" and n.space == root.space]


def _place_formats(pool: _Pool, base: Node, extra: Node) -> dict[str, str]:
    """Return the new number of each number format; codes already declared keep their number."""
    used = [whole_number(n, "numFmtId") for n in _number_formats(base)]
    following = max([FIRST_CUSTOM_FORMAT - 1, *used]) + 1
    declared = {
        n.attributes.get("formatCode", ""): n.attributes["numFmtId"]
        for item in reversed(_items(base, "numFmts"))
        for n in (item.walk() if item.space == COMPATIBILITY else (item,))
        if "numFmtId" in n.attributes
    }
    moved = {}
    for node in _number_formats(extra):
        code, number = node.attributes["formatCode"], node.attributes["numFmtId"]
        if int(number) < FIRST_CUSTOM_FORMAT:
            continue
        if code not in declared:
            declared[code] = str(following)
            pool.append(_made("numFmt", {"numFmtId": str(following), "formatCode": code}))
            following += 1
        moved[number] = declared[code]
    return moved


def _reserve(pools: Mapping[str, _Pool]) -> None:
    """Fill the two places of the fill table that Excel keeps for itself, whatever a file holds there."""
    fills = pools["fills"]
    for pattern in _RESERVED_FILLS[fills.size :]:
        fills.append(_made("fill", {}, _made("patternFill", {"patternType": pattern})))


def _normal_style(root: Node) -> str:
    """Return the number of the style called Normal."""
    for style in _items(root, "cellStyles"):
        if style.attributes.get("builtinId") == "0":
            return str(whole_number(style, "xfId"))
    return "0"


def _renumbered(dxf: Node, formats: Mapping[str, str]) -> Node:
    """Return a differential format with the new number of its number format."""
    children = []
    for child in dxf.children:
        number = child.attributes.get("numFmtId", "")
        moved = child.attributes | {"numFmtId": formats[number]} if number in formats else child.attributes
        children.append(replace(child, attributes=moved))
    return replace(dxf, children=children)
