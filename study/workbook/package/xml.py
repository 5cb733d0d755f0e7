"""XML parts with byte positions, so that a part is changed by insertions and every other byte stays."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from xml.parsers import expat
from xml.sax.saxutils import escape as _escape

from study.issues import PackageError

MAX_XML_BYTES = 64 * 2**20
LONGEST_NUMBER = 10
MAX_NODES = 600_000
MAX_DEPTH = 200

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
RELATIONS = "http://schemas.openxmlformats.org/package/2006/relationships"
CONTENT_TYPES = "http://schemas.openxmlformats.org/package/2006/content-types"
OFFICE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
STRICT = "http://purl.oclc.org/ooxml/"
XML_LINE = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n'
COMPATIBILITY = "http://schemas.openxmlformats.org/markup-compatibility/2006"

_START_TAG = re.compile(rb"""<[^<>"']*(?:(?:"[^"]*"|'[^']*')[^<>"']*)*>""")
_RAW_NAME = re.compile(rb"<([^\s/>]+)")
_ATTRIBUTE = re.compile(rb"""\s([^\s=]+)\s*=\s*("[^"]*"|'[^']*')""")
_DOCTYPE = "part {} declares an XML document type, as no workbook does; it is not opened"
_DECLARED = re.compile(rb"""^\s*<\?xml[^>]*?encoding\s*=\s*["']([^"']+)["']""")


@dataclass(slots=True, kw_only=True, eq=False)
class Node:
    """An element and where it stands in the bytes of its part.

    Attributes
    ----------
    space, name : str
        Namespace and local name.
    attributes : dict
        Values by local name; names with a namespace are ``{namespace}name``.
    start, stop : int
        First byte of the start tag; byte after the end tag.
    close : int
        First byte of the end tag; ``-1`` for ``<name/>``.
    children : list of Node
        In document order.
    text : str
        Character data directly inside, joined.
    """

    space: str
    name: str
    attributes: dict[str, str]
    start: int
    stop: int = -1
    close: int = -1
    children: list[Node] = field(default_factory=list)
    text: str = ""

    def find(self, name: str, space: str | None = None) -> Node | None:
        """Return the first child of that name, in the node's own namespace unless told otherwise."""
        wanted = self.space if space is None else space
        return next((c for c in self.children if c.name == name and c.space == wanted), None)

    def all(self, name: str) -> list[Node]:
        """Return the children of that name in the node's own namespace."""
        return [c for c in self.children if c.name == name and c.space == self.space]

    def walk(self) -> Iterator[Node]:
        """Yield the node and everything under it."""
        waiting = [self]
        while waiting:
            node = waiting.pop()
            yield node
            waiting.extend(reversed(node.children))


def number_in(text: str) -> int | None:
    """Return the whole number that a text holds, None where it holds none or an absurdly long one.

    Examples
    --------
    >>> number_in(" 12 "), number_in("-1"), number_in("²"), number_in("1" * 5000)
    (12, None, None, None)
    """
    text = text.strip()
    return int(text) if text.isascii() and text.isdigit() and len(text) <= LONGEST_NUMBER else None


def whole_number(node: Node, name: str, default: int = 0) -> int:
    """Return an attribute that is a number not below zero.

    Raises
    ------
    PackageError
        It is something else.
    """
    text = node.attributes.get(name, str(default))
    number = number_in(text)
    if number is None:
        raise PackageError(f"an element {node.name} says {name}={text[:20]!r}; the file is damaged")
    return number


def escape(text: str) -> str:
    """Return the text fit for an element or a double-quoted attribute."""
    return _escape(text, {'"': "&quot;", "\n": "&#10;", "\r": "&#13;", "\t": "&#9;"})


def as_utf8(data: bytes, part: str) -> bytes:
    """Return an XML part in UTF-8; the package format allows UTF-8 and UTF-16 only."""
    if data[:2] in (b"\xff\xfe", b"\xfe\xff"):
        try:
            text = data.decode("utf-16")
        except UnicodeDecodeError as error:
            raise PackageError(f"part {part} is damaged (its text cannot be decoded)") from error
        return re.sub(r"""\sencoding\s*=\s*["'][^"']*["']""", "", text, count=1).encode("utf-8")
    declared = _DECLARED.match(data.removeprefix(b"\xef\xbb\xbf"))
    if declared and declared[1].lower() not in (b"utf-8", b"us-ascii", b"utf8"):
        raise PackageError(f"part {part} is not written in UTF-8; save the file in Excel")
    return data


class _Stop(Exception):  # noqa: N818 - a signal out of a callback, never an error
    """Leaves the parser when the answer is known."""


def check_prolog(head: bytes, part: str, *, whole: bool) -> None:
    """Refuse an XML part whose start declares a document type, the door to entity expansion.

    Parameters
    ----------
    head : bytes
        First bytes of the part.
    part : str
        Its name, for the message.
    whole : bool
        Whether ``head`` is all of it.

    Raises
    ------
    PackageError
        The part declares a document type, or what stands before its first element cannot be read.
    """
    reached: list[str] = []

    def stop_at(what: str) -> Callable[..., None]:
        def stop(*_: object) -> None:
            reached.append(what)
            raise _Stop

        return stop

    parser = expat.ParserCreate()
    parser.StartDoctypeDeclHandler = stop_at("document type")
    parser.StartElementHandler = stop_at("root")
    try:
        parser.Parse(head, False)
    except _Stop:
        pass
    except (expat.ExpatError, LookupError, ValueError) as error:
        raise PackageError(f"part {part} is damaged (its XML cannot be read)") from error
    if reached == ["document type"]:
        raise PackageError(_DOCTYPE.format(part))
    if not reached and not whole:
        raise PackageError(f"part {part} is damaged (its XML does not begin)")


class _Builder:
    """Collects the tree while expat runs."""

    def __init__(self, data: bytes, part: str) -> None:
        self.data, self.part = data, part
        self.parser = expat.ParserCreate(namespace_separator="}")
        self.parser.buffer_text = True
        self.parser.StartElementHandler = self.start
        self.parser.EndElementHandler = self.end
        self.parser.CharacterDataHandler = self.characters
        self.parser.StartDoctypeDeclHandler = self.doctype
        self.open: list[Node] = []
        self.texts: list[list[str]] = []
        self.root: Node | None = None
        self.count = 0

    def doctype(self, *_: object) -> None:
        raise PackageError(_DOCTYPE.format(self.part))

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        self.count += 1
        if self.count > MAX_NODES or len(self.open) >= MAX_DEPTH:
            raise PackageError(
                f"part {self.part} is larger or deeper than any workbook needs; it is not opened"
            )
        space, _, name = tag.rpartition("}")
        if "}" in "".join(attributes):
            attributes = {("{" + k if "}" in k else k): v for k, v in attributes.items()}
        node = Node(space=space, name=name, attributes=attributes, start=self.parser.CurrentByteIndex)
        if self.open:
            self.open[-1].children.append(node)
        else:
            self.root = node
        self.open.append(node)
        self.texts.append([])

    def end(self, _: str) -> None:
        node, at = self.open.pop(), self.parser.CurrentByteIndex
        texts = self.texts.pop()
        if texts:
            node.text = texts[0] if len(texts) == 1 else "".join(texts)
        # Of ``<name/>`` the parser reports the byte after it as its end.
        if not texts and not node.children and self.data.startswith(b"/>", at - 2):
            node.stop = at
        else:
            node.close, node.stop = at, self.data.index(b">", at) + 1

    def characters(self, text: str) -> None:
        if self.texts:
            self.texts[-1].append(text)


def parse(data: bytes, part: str) -> Node:
    """Return the root of an XML part, every element with its byte positions.

    Raises
    ------
    PackageError
        The part is not well-formed, declares a document type, or is absurdly large.
    """
    if len(data) > MAX_XML_BYTES:
        raise PackageError(f"part {part} is larger than any workbook needs; it is not opened")
    builder = _Builder(data, part)
    try:
        builder.parser.Parse(data, True)
    except expat.ExpatError as error:
        raise PackageError(f"part {part} is damaged (its XML breaks off in line {error.lineno})") from error
    if builder.root is None:
        raise PackageError(f"part {part} is empty; the file is damaged")
    return builder.root


class Document:
    """An XML part and the edits to it; bytes that no edit touches come out as they went in.

    Parameters
    ----------
    data : bytes
        Content of the part.
    part : str
        Its name, for messages.
    """

    def __init__(self, data: bytes, part: str) -> None:
        self.data = as_utf8(data, part)
        self.part = part
        self.root = parse(self.data, part)
        self._edits: list[tuple[int, int, bytes]] = []
        self._filled: dict[int, tuple[Node, list[str]]] = {}

    def raw_name(self, node: Node) -> str:
        """Return the name as it stands in the file, prefix included."""
        found = _RAW_NAME.match(self.data, node.start)
        return found[1].decode() if found else node.name

    def prefix(self, node: Node) -> str:
        """Return the prefix with its colon that the node's own name carries, or an empty string."""
        prefix, colon, _ = self.raw_name(node).rpartition(":")
        return prefix + colon

    def prefix_of(self, space: str) -> str | None:
        """Return the prefix that the root element binds to a namespace; None when it binds none."""
        tag = _START_TAG.match(self.data, self.root.start)
        for name, value in _ATTRIBUTE.findall(tag[0]) if tag else ():
            if name.startswith(b"xmlns:") and value[1:-1] == space.encode():
                return str(name[6:].decode()) + ":"
        return None

    def append(self, node: Node, xml: str) -> None:
        """Insert text as the last content of a node."""
        if node.close >= 0:
            self._edits.append((node.close, node.close, xml.encode()))
        else:
            self._filled.setdefault(node.start, (node, []))[1].append(xml)

    def insert_in_order(self, xml: str, name: str, order: tuple[str, ...]) -> None:
        """Insert a child of the root before the first one that the schema puts behind it."""
        behind = set(order[order.index(name) + 1 :])
        for child in self.root.children:
            if child.name in behind and child.space == self.root.space:
                self._edits.append((child.start, child.start, xml.encode()))
                return
        self.append(self.root, xml)

    def remove(self, node: Node) -> None:
        """Take a node out."""
        self._edits.append((node.start, node.stop, b""))

    def replace(self, node: Node, xml: str) -> None:
        """Put other text in the place of a node."""
        self._edits.append((node.start, node.stop, xml.encode()))

    def set_attribute(self, node: Node, name: str, value: str) -> None:
        """Set an attribute that has no namespace."""
        if node.attributes.get(name) == value:
            return
        tag = _START_TAG.match(self.data, node.start)
        assert tag is not None
        found = next((m for m in _ATTRIBUTE.finditer(tag[0]) if m[1] == name.encode()), None)
        if found:
            first, last = (node.start + at for at in found.span(2))
            self._edits.append((first, last, f'"{escape(value)}"'.encode()))
        else:
            end = tag.end() - (2 if tag[0].endswith(b"/>") else 1)
            self._edits.append((end, end, f' {name}="{escape(value)}"'.encode()))

    def result(self) -> bytes:
        """Return the part with all edits made."""
        edits = list(self._edits)
        for node, texts in self._filled.values():
            slash = self.data.rindex(b"/", node.start, node.stop)
            edits.append((slash, node.stop, f">{''.join(texts)}</{self.raw_name(node)}>".encode()))
        out, at = bytearray(), 0
        # An insertion at the first byte of a replaced span belongs before it, whichever came first.
        for start, stop, text in sorted(edits, key=lambda e: (e[0], e[1])):
            out += self.data[at:start] + text
            at = stop
        return bytes(out + self.data[at:])


def effective(node: Node) -> Node:
    """Return the first element inside a compatibility block, or the element itself."""
    if node.space != COMPATIBILITY:
        return node
    return next((inner for choice in node.children for inner in choice.children), node)


def out_of_order(root: Node, order: tuple[str, ...], repeatable: tuple[str, ...]) -> list[str]:
    """Return what is wrong with the sequence of an element's children.

    Parameters
    ----------
    root : Node
        The element.
    order : tuple of str
        Names in the order of the schema.
    repeatable : tuple of str
        Names that may stand more than once.

    Returns
    -------
    list of str
        One sentence for each fault.
    """
    faults, last = [], -1
    for name in (effective(c).name for c in root.children):
        if name not in order:
            faults.append(f"{name} is no child of {root.name}")
            continue
        place = order.index(name)
        if place < last:
            faults.append(f"{name} stands behind {order[last]}")
        elif place == last and name not in repeatable:
            faults.append(f"{name} stands twice")
        last = max(last, place)
    return faults
