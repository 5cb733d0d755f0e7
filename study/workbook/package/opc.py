"""The workbook file as a package: parts, relations, content types; everything unsafe is refused here."""

from __future__ import annotations

import hashlib
import posixpath
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from pathlib import Path

from study.issues import PackageError
from study.workbook.package.xml import (
    CONTENT_TYPES,
    MAIN,
    OFFICE,
    STRICT,
    Node,
    as_utf8,
    check_prolog,
    parse,
)
from study.workbook.package.zip import MAX_FILE_BYTES, Member, inflate, part_key, read_members, verify

TYPES_PART = "[Content_Types].xml"
SPREADSHEET = "application/vnd.openxmlformats-officedocument.spreadsheetml."
WORKSHEET_TYPE = SPREADSHEET + "worksheet+xml"
STYLES_TYPE = SPREADSHEET + "styles+xml"
_WORKBOOK_TYPES = {
    SPREADSHEET + "sheet.main+xml": False,
    "application/vnd.ms-excel.sheet.macroEnabled.main+xml": True,
}
_OTHER_TYPES = {
    "application/vnd.ms-excel.sheet.binary.macroEnabled.main": "is a binary workbook (.xlsb)",
    SPREADSHEET + "template.main+xml": "is a template (.xltx)",
    "application/vnd.ms-excel.template.macroEnabled.main+xml": "is a template (.xltm)",
    "application/vnd.ms-excel.addin.macroEnabled.main+xml": "is an add-in (.xlam)",
}
_OLE = bytes.fromhex("d0cf11e0a1b11ae1")
_ENCRYPTED_STREAM = "EncryptedPackage".encode("utf-16-le")


@dataclass(frozen=True, slots=True, kw_only=True)
class Relation:
    """One relationship of a part.

    Attributes
    ----------
    id, kind : str
        Identifier and full type.
    target : str
        Part name without leading slash; for external targets the text as it stands.
    external : bool
        Whether it leaves the package.
    """

    id: str
    kind: str
    target: str
    external: bool

    def is_a(self, kind: str) -> bool:
        """Return whether the type ends in this word, for example ``worksheet``."""
        return self.kind.rpartition("/")[2] == kind


@dataclass(frozen=True, slots=True, kw_only=True)
class Package:
    """A workbook file that has passed every safety check.

    Attributes
    ----------
    data : bytes
        The whole file.
    digest : str
        SHA-256 of it; hand it to `write_atomically` to be sure that the file did not change meanwhile.
    members : tuple of Member
        Zip entries in their order.
    by_key : mapping of str to Member
        The same by compared name.
    workbook_part : str
        Name of the part that lists the sheets.
    macro_enabled : bool
        True for .xlsm.
    """

    data: bytes = field(repr=False)
    digest: str
    members: tuple[Member, ...] = field(repr=False)
    by_key: Mapping[str, Member] = field(repr=False)
    workbook_part: str
    macro_enabled: bool

    @property
    def names(self) -> tuple[str, ...]:
        """Part names in the order of the file."""
        return tuple(m.name for m in self.members)

    def read(self, part: str) -> bytes:
        """Return the content of a part, whatever the case of its name."""
        return _required(self.by_key, part)


def rels_part(part: str) -> str:
    """Return the name of the part that holds a part's relations; of the package itself for ``""``.

    Examples
    --------
    >>> rels_part("xl/workbook.xml")
    'xl/_rels/workbook.xml.rels'
    """
    folder, _, name = part.rpartition("/")
    return posixpath.join(folder, "_rels", name + ".rels")


def resolve(source: str, target: str) -> str:
    """Return the part name that a target means when it stands in the relations of ``source``.

    Examples
    --------
    >>> resolve("xl/worksheets/sheet1.xml", "../drawings/drawing1.xml")
    'xl/drawings/drawing1.xml'
    """
    path = target.partition("#")[0]
    joined = path if path.startswith("/") else posixpath.join("/", posixpath.dirname(source), path)
    return posixpath.normpath(joined).lstrip("/")


def read_relations(data: bytes, source: str) -> tuple[Relation, ...]:
    """Read a relations part."""
    root = parse(as_utf8(data, rels_part(source)), rels_part(source))
    return tuple(_relation(node, source) for node in root.all("Relationship"))


def _relation(node: Node, source: str) -> Relation:
    attributes = node.attributes
    target = attributes.get("Target", "")
    external = attributes.get("TargetMode") == "External"
    return Relation(
        id=attributes.get("Id", ""),
        kind=attributes.get("Type", ""),
        target=target if external else resolve(source, target),
        external=external,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class ContentTypes:
    """Declared type of each part.

    Attributes
    ----------
    defaults : mapping of str to str
        Type by lower-case extension.
    overrides : mapping of str to str
        Type by compared part name.
    """

    defaults: Mapping[str, str]
    overrides: Mapping[str, str]

    def of(self, part: str) -> str | None:
        """Return the type of a part; None when none is declared."""
        key = part_key(part)
        return self.overrides.get(key) or self.defaults.get(key.rpartition(".")[2])


def read_content_types(data: bytes) -> ContentTypes:
    """Read ``[Content_Types].xml``."""
    root = parse(as_utf8(data, TYPES_PART), TYPES_PART)
    if root.space != CONTENT_TYPES:
        raise PackageError("the list of content types is not the one of an Office file; the file is damaged")
    return ContentTypes(
        defaults={
            n.attributes.get("Extension", "").lower(): n.attributes.get("ContentType", "")
            for n in root.all("Default")
        },
        overrides={
            part_key(n.attributes.get("PartName", "")): n.attributes.get("ContentType", "")
            for n in root.all("Override")
        },
    )


def open_package(path: str | Path) -> Package:
    """Read a workbook file and refuse it in one sentence when it cannot be used safely.

    Parameters
    ----------
    path : str or Path
        The .xlsx or .xlsm file.

    Returns
    -------
    Package
        The file's bytes and its parts.

    Raises
    ------
    PackageError
        The file cannot be read, is no workbook, is encrypted, signed, damaged, or over the size limits.
    """
    path = Path(path)
    try:
        with path.open("rb") as stream:
            data = stream.read(MAX_FILE_BYTES + 1)
    except FileNotFoundError:
        raise PackageError(f"{path.name}: there is no such file") from None
    except OSError as error:
        raise PackageError(f"{path.name}: the file cannot be read ({error.strerror})") from error
    try:
        return package_from_bytes(data)
    except PackageError as error:
        raise PackageError(f"{path.name}: {error}") from error


def package_from_bytes(data: bytes) -> Package:
    """Check a workbook held in memory; see `open_package`."""
    if data[:8] == _OLE:
        raise PackageError(_ole_sentence(data))
    members = read_members(data)
    by_key = {part_key(m.name): m for m in members}
    _refuse_other_formats(by_key)
    types = read_content_types(_required(by_key, TYPES_PART))
    for member in members:
        _check_member(member, types)
    relations = read_relations(_required(by_key, "_rels/.rels"), "")
    _refuse_signed(relations, by_key)
    workbook = _workbook_part(relations, types, by_key)
    package = Package(
        data=data,
        digest=hashlib.sha256(data).hexdigest(),
        members=members,
        by_key=by_key,
        workbook_part=workbook,
        macro_enabled=_WORKBOOK_TYPES[types.of(workbook) or ""],
    )
    root = parse(as_utf8(package.read(workbook), workbook), workbook)
    if root.space != MAIN or root.name != "workbook":
        raise PackageError(
            "the workbook part is not in a form that Excel writes; open the file in Excel and save it"
        )
    return package


def _ole_sentence(data: bytes) -> str:
    if _ENCRYPTED_STREAM in data:
        return "the file is protected by a password; remove it in Excel and save the file again"
    return "the file is in the old .xls format; open it in Excel and save it as .xlsx"


def _required(members: Mapping[str, Member], part: str) -> bytes:
    try:
        return inflate(members[part_key(part)])
    except KeyError:
        raise PackageError(f"part {part} is missing; the file is damaged or is no workbook") from None


def _refuse_other_formats(members: Mapping[str, Member]) -> None:
    if TYPES_PART.lower() in members:
        return
    if "mimetype" in members and "content.xml" in members:
        raise PackageError("the file is an OpenDocument spreadsheet; save it as .xlsx")
    raise PackageError("the file is a zip file but no Excel workbook; open the workbook and save it as .xlsx")


def _check_member(member: Member, types: ContentTypes) -> None:
    """Check the sum of a member, and that XML declares no document type."""
    head = verify(member)
    declared = types.of(member.name) or ""
    name = member.name.lower()
    if name.endswith((".xml", ".rels")) or declared.endswith("xml"):
        check_prolog(head, member.name, whole=len(head) == member.size)
    elif b"<!DOCTYPE" in head.replace(b"\0", b"") and declared.endswith("vmlDrawing"):
        raise PackageError(
            f"part {member.name} declares an XML document type, as no workbook does; it is not opened"
        )


def _refuse_signed(relations: Iterable[Relation], members: Mapping[str, Member]) -> None:
    if any("digital-signature" in r.kind for r in relations) or any(
        k.startswith("_xmlsignatures/") for k in members
    ):
        raise PackageError(
            "the file is digitally signed and any change would break the signature; save an unsigned copy"
        )


def _workbook_part(relations: Iterable[Relation], types: ContentTypes, members: Mapping[str, Member]) -> str:
    """Return the name of the workbook part, or say what kind of file this is instead."""
    strict = f"{STRICT}officeDocument/relationships/officeDocument"
    found = [r for r in relations if r.kind in (f"{OFFICE}/officeDocument", strict)]
    if len(found) != 1 or part_key(found[0].target) not in members:
        raise PackageError("the workbook part is missing; the file is damaged or is no workbook")
    part = members[part_key(found[0].target)].name
    kind = types.of(part) or ""
    if kind in _OTHER_TYPES:
        raise PackageError(f"the file {_OTHER_TYPES[kind]}; save it as .xlsx or .xlsm")
    if kind not in _WORKBOOK_TYPES:
        raise PackageError("the file is an Office file but no Excel workbook; save the workbook as .xlsx")
    if found[0].kind == strict or STRICT.encode() in inflate(members[part_key(part)])[:4096]:
        raise PackageError(
            "the file is a Strict Open XML workbook; save it as the ordinary Excel Workbook (.xlsx)"
        )
    return part
