"""Files that must be refused, each in one sentence, and those that must not.

The dangers are common practice in reading zip and XML from strangers; the rules on part names and on document
types are those of ECMA-376 Part 2 (Open Packaging Conventions), from memory.
"""

from __future__ import annotations

import errno
import io
import random
import struct
import time
import tracemalloc
import zipfile
import zlib
from pathlib import Path

import pytest

from study.issues import PackageError
from study.workbook.package import graft_result_sheets, open_package, validate_package
from study.workbook.package import zip as zip_module
from study.workbook.package.opc import package_from_bytes
from tests.workbook.package.samples import (
    OFFICE,
    edited,
    engineers_book,
    openpyxl_book,
    packed_book,
    parts,
    result_book,
    rezip,
)

STRICT = b"http://purl.oclc.org/ooxml"


@pytest.fixture(scope="module")
def book():
    return engineers_book()


def with_member(data, name, content=b"<a/>", method=zipfile.ZIP_DEFLATED):
    """The package with one more member, whatever its name; the zip module warns of doubles, we do not."""
    out = io.BytesIO(data)
    with zipfile.ZipFile(out, "a", method) as package:
        info = zipfile.ZipInfo("x")
        info.filename = name
        info.compress_type = method
        package.writestr(info, content)
    return out.getvalue()


def refused(data, match):
    with pytest.raises(PackageError, match=match) as caught:
        package_from_bytes(data)
    sentence = str(caught.value)
    assert "\n" not in sentence
    assert len(sentence) < 200


@pytest.mark.parametrize("make", [engineers_book, openpyxl_book, packed_book])
def test_sound_workbooks_are_opened(make, tmp_path):
    path = tmp_path / "BOOK.xlsx"
    path.write_bytes(make())
    package = open_package(path)
    assert package.data == path.read_bytes()
    assert package.workbook_part == "xl/workbook.xml"
    assert package.macro_enabled is (make is packed_book)
    assert {n: package.read(n) for n in package.names} == parts(package.data)
    assert package.read("/XL/Workbook.xml") == parts(package.data)["xl/workbook.xml"]


def test_the_message_names_the_file(tmp_path):
    path = tmp_path / "Vessel.xlsx"
    path.write_bytes(b"not a workbook")
    with pytest.raises(PackageError, match=r"^Vessel\.xlsx: the file is no Excel workbook"):
        open_package(path)
    with pytest.raises(PackageError, match=r"^none\.xlsx: there is no such file$"):
        open_package(tmp_path / "none.xlsx")
    with pytest.raises(PackageError, match="the file cannot be read"):
        open_package(tmp_path)


@pytest.mark.parametrize("data", [b"", b"PK", b"Load,kW\n", b"\x00" * 4096, b"PK\x03\x04" + b"\0" * 60])
def test_what_is_no_zip_file(data):
    refused(data, r"no Excel workbook \(\.xlsx or \.xlsm\)|damaged or cut short")


def test_the_old_format_and_protected_files():
    ole = bytes.fromhex("d0cf11e0a1b11ae1") + b"\0" * 504
    refused(ole + "Workbook".encode("utf-16-le"), r"old \.xls format")
    refused(ole + "EncryptedPackage".encode("utf-16-le"), "protected by a password")


def test_strict_workbooks(book):
    strict_root = parts(book)
    strict_root["_rels/.rels"] = strict_root["_rels/.rels"].replace(
        b"http://schemas.openxmlformats.org/officeDocument/2006/relationships",
        STRICT + b"/officeDocument/relationships",
    )
    refused(rezip(strict_root), "Strict Open XML")
    strict_book = edited(
        book,
        workbook=lambda c: c.replace(
            b"http://schemas.openxmlformats.org/spreadsheetml/2006/main", STRICT + b"/spreadsheetml/main"
        ),
    )
    refused(strict_book, "Strict Open XML")


def test_signed_workbooks(book):
    content = parts(book)
    row = (
        b'<Relationship Id="s" Type="http://schemas.openxmlformats.org/package/2006/relationships/'
        b'digital-signature/origin" Target="sig/origin.sigs"/></Relationships>'
    )
    content["_rels/.rels"] = content["_rels/.rels"].replace(b"</Relationships>", row)
    refused(rezip(content), "digitally signed")
    refused(with_member(book, "_xmlsignatures/sig1.xml"), "digitally signed")


@pytest.mark.parametrize(
    ("kind", "match"),
    [
        ("application/vnd.ms-excel.sheet.binary.macroEnabled.main", r"binary workbook \(\.xlsb\)"),
        ("application/vnd.openxmlformats-officedocument.spreadsheetml.template.main+xml", "template"),
        ("application/vnd.ms-excel.addin.macroEnabled.main+xml", "add-in"),
        (
            "application/vnd.openxmlformats-officedocument.wordprocessingml.document.main+xml",
            "no Excel workbook",
        ),
    ],
)
def test_other_office_files(book, kind, match):
    own = b"application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml"
    refused(edited(book, types=lambda c: c.replace(own, kind.encode())), match)


def test_other_zip_files():
    refused(
        rezip({"mimetype": b"application/vnd.oasis.opendocument.spreadsheet", "content.xml": b"<a/>"}),
        "OpenDocument",
    )
    refused(rezip({"readme.txt": b"hello"}), "zip file but no Excel workbook")


def test_a_missing_workbook_part(book):
    content = parts(book)
    del content["xl/workbook.xml"]
    refused(rezip(content), "workbook part is missing")
    content = parts(book)
    del content["_rels/.rels"]
    refused(rezip(content), "_rels/.rels is missing")


@pytest.mark.parametrize(
    "name",
    [
        "../evil.xml",
        "xl/../../evil.xml",
        "/etc/evil.xml",
        "xl//evil.xml",
        "xl\\evil.xml",
        "C:/evil.xml",
        "xl/./evil.xml",
        "xl/%2e%2e/evil.xml",
        "xl/%2fevil/../x.xml",
        "xl/ev\x01il.xml",
    ],
)
def test_part_names_that_leave_the_package(book, name):
    refused(with_member(book, name), "unsafe name")


@pytest.mark.parametrize("name", ["xl/workbook.xml", "XL/Workbook.XML", "xl/work%62ook.xml"])
def test_part_names_that_stand_twice(book, name):
    with pytest.warns(UserWarning, match="Duplicate") if name == "xl/workbook.xml" else no_warning():
        data = with_member(book, name)
    refused(data, "twice")


class no_warning:  # noqa: N801
    def __enter__(self):
        return self

    def __exit__(self, *_):
        return False


def test_folder_entries_are_harmless(book):
    data = with_member(book, "xl/", b"", zipfile.ZIP_STORED)
    assert package_from_bytes(data).workbook_part == "xl/workbook.xml"
    assert validate_package(graft_result_sheets(data, result_book())) == []


DOCTYPE = b'<!DOCTYPE w [<!ENTITY a "aaaaaaaaaa"><!ENTITY b "&a;&a;&a;&a;&a;&a;">]>'


@pytest.mark.parametrize(
    "part",
    [
        "xl/workbook.xml",
        "xl/worksheets/sheet1.xml",
        "[Content_Types].xml",
        "_rels/.rels",
        "docProps/core.xml",
    ],
)
@pytest.mark.parametrize("encoding", ["utf-8", "utf-16"])
def test_document_types(book, part, encoding):
    content = parts(book)
    head, _, tail = content[part].decode().partition("?>")
    text = f"{head}?>\n<!-- {'long ' * 100} -->{DOCTYPE.decode()}{tail}"
    content[part] = text.replace('"UTF-8"', f'"{encoding.upper()}"', 1).encode(encoding)
    refused(rezip(content), "declares an XML document type")


def test_document_types_in_parts_of_any_name(book):
    kind = b'<Override PartName="/xl/odd.bin" ContentType="application/xml"/></Types>'
    data = edited(book, types=lambda c: c.replace(b"</Types>", kind))
    refused(with_member(data, "xl/odd.bin", b"<?xml version='1.0'?>" + DOCTYPE + b"<w/>"), "document type")
    vml = parts(book)
    name = next(n for n in vml if n.endswith(".vml"))
    vml[name] = DOCTYPE + vml[name]
    refused(rezip(vml), "document type")


def test_a_document_type_behind_more_than_is_looked_at(book):
    content = parts(book)
    content["docProps/core.xml"] = (
        b"<!--" + random.Random(1).randbytes(200_000).hex().encode() + b"-->" + DOCTYPE
    )
    refused(rezip(content), "its XML does not begin")


def test_xml_in_an_unknown_encoding(book):
    content = parts(book)
    content["docProps/core.xml"] = content["docProps/core.xml"].replace(b"UTF-8", b"x-none")
    refused(rezip(content), r"docProps/core\.xml is damaged")


def test_a_damaged_member(book):
    data = bytearray(book)
    with zipfile.ZipFile(io.BytesIO(book)) as package:
        info = max(package.infolist(), key=lambda i: i.compress_size)
    at = info.header_offset + 30 + len(info.filename) + info.compress_size // 2
    data[at] ^= 0xFF
    refused(bytes(data), "check sum is wrong")


@pytest.mark.parametrize("kept", [0.3, 0.9, 0.999])
def test_a_file_cut_short(book, kept):
    refused(book[: int(len(book) * kept)], "cut short|damaged")


def test_a_file_with_bytes_in_front(book):
    refused(b"MZ" + b"\0" * 100 + book, "no Excel workbook")
    refused(book[:4] + b"\0" * 10 + book[4:], "damaged")


def headers(data):
    """Offsets of the central directory entries."""
    end = data.rfind(b"PK\x05\x06")
    count, _, at = struct.unpack_from("<HLL", data, end + 10)
    for _ in range(count):
        yield at
        at += 46 + sum(struct.unpack_from("<3H", data, at + 28))


def test_an_encrypted_member_and_an_odd_method(book):
    for field, value, match in ((8, 1, "encrypted"), (10, 9, "method that Excel does not use")):
        data = bytearray(book)
        at = next(headers(book))
        struct.pack_into("<H", data, at + field, value)
        refused(bytes(data), match)


def test_a_name_that_differs_between_the_two_headers(book):
    data = bytearray(book)
    at = next(headers(book))
    offset = struct.unpack_from("<L", book, at + 42)[0]
    data[offset + 30] ^= 0x20
    refused(bytes(data), "zip directory does not hold together")


def local_record(name, content):
    crc, size = zlib.crc32(content), len(content)
    head = struct.pack("<4s5H3L2H", b"PK\3\4", 20, 0, 0, 0, 33, crc, size, size, len(name), 0)
    return head + name + content


def test_members_that_share_bytes():
    """The way to make a small file inflate without end: one member lies inside the bytes of another."""
    inner = local_record(b"inner.xml", b"<a/>")
    outer = local_record(b"outer.bin", inner)
    directory = b""
    for name, content, at in ((b"outer.bin", inner, 0), (b"inner.xml", b"<a/>", len(outer) - len(inner))):
        fields = (
            20,
            20,
            0,
            0,
            0,
            33,
            zlib.crc32(content),
            len(content),
            len(content),
            len(name),
            0,
            0,
            0,
            0,
            0,
            at,
        )
        directory += struct.pack("<4s6H3L5H2L", b"PK\1\2", *fields) + name
    end = struct.pack("<4s4H2LH", b"PK\5\6", 0, 0, 2, 2, len(directory), len(outer), 0)
    with zipfile.ZipFile(io.BytesIO(outer + directory + end)) as package:
        assert package.namelist() == ["outer.bin", "inner.xml"]
    with pytest.raises(PackageError, match="zip directory does not hold together"):
        zip_module.read_members(outer + directory + end)
    whole = outer + inner
    moved = directory[:-13] + struct.pack("<L", len(outer)) + b"inner.xml"
    end = struct.pack("<4s4H2LH", b"PK\5\6", 0, 0, 2, 2, len(moved), len(whole), 0)
    assert [m.name for m in zip_module.read_members(whole + moved + end)] == ["outer.bin", "inner.xml"]


def zeros(size):
    return with_member(engineers_book(), "xl/media/zeros.bin", bytes(size))


def test_a_part_compressed_beyond_reason():
    refused(zeros(20 * 2**20), "compressed more than 300 times")


def test_small_parts_may_compress_well():
    assert package_from_bytes(zeros(2**19)).names[-1] == "xl/media/zeros.bin"


def test_a_part_that_says_less_than_it_holds(monkeypatch):
    """The directory claims a small size; not much more than that may be inflated."""
    summed = []
    real = zlib.crc32
    monkeypatch.setattr(zip_module.zlib, "crc32", lambda c, s=0: (summed.append(len(c)), real(c, s))[1])
    data = bytearray(zeros(50 * 2**20))
    summed.clear()
    at = list(headers(bytes(data)))[-1]
    struct.pack_into("<L", data, at + 24, 1000)
    tracemalloc.start()
    refused(bytes(data), "check sum is wrong")
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert peak < 5 * 2**20
    assert sum(summed) < 2**20


def test_too_much_in_all(monkeypatch, book):
    monkeypatch.setattr(zip_module, "MAX_TOTAL_BYTES", 2**14)
    refused(book, "unpacks to more than")


def test_too_many_parts():
    content = parts(engineers_book()) | {f"xl/media/{i}.bin": b"" for i in range(6000)}
    refused(rezip(content, zipfile.ZIP_STORED), r"holds \d+ parts, more than the 5000")


def test_a_file_too_large(monkeypatch, book, tmp_path):
    monkeypatch.setattr("study.workbook.package.opc.MAX_FILE_BYTES", 1000)
    monkeypatch.setattr(zip_module, "MAX_FILE_BYTES", 1000)
    path = tmp_path / "BOOK.xlsx"
    path.write_bytes(book)
    with pytest.raises(PackageError, match=r"^BOOK\.xlsx: the file is larger than"):
        open_package(path)


def test_xml_with_too_many_elements(book, monkeypatch):
    flood = edited(book, workbook=lambda c: c.replace(b"<sheets>", b"<sheets>" + b"<sheet/>" * 1_000_000))
    refused(flood, "compressed more")
    monkeypatch.setattr("study.workbook.package.xml.MAX_NODES", 10_000)
    noise = b"".join(b'<a b="%d"/>' % n for n in random.Random(2).choices(range(10**9), k=11_000))
    refused(edited(book, workbook=lambda c: c.replace(b"<sheets>", noise + b"<sheets>")), "larger or deeper")


def test_an_xml_part_that_is_too_large(book, monkeypatch):
    monkeypatch.setattr("study.workbook.package.xml.MAX_XML_BYTES", 1000)
    refused(book, "larger than any workbook needs")


def test_xml_that_is_too_deep(book):
    deep = b"<a>" * 300 + b"</a>" * 300
    refused(edited(book, workbook=lambda c: c.replace(b"<sheets>", deep + b"<sheets>")), "larger or deeper")


def test_long_text_takes_time_in_proportion(book):
    """Text that comes in very many pieces."""
    pieces = b"".join(b"%d&amp;" % n for n in random.Random(5).choices(range(1000), k=500_000))
    text = b"<definedName name='n'>" + pieces + b"</definedName></definedNames>"
    data = edited(book, workbook=lambda c: c.replace(b"</definedNames>", text))
    start = time.perf_counter()
    package_from_bytes(data)
    assert time.perf_counter() - start < 5


def test_zip64_directories_are_read(book, monkeypatch):
    """Some programs write the 64-bit records whatever the size."""
    results = result_book()
    with monkeypatch.context() as patch:
        patch.setattr(zipfile, "ZIP_FILECOUNT_LIMIT", 3)
        data = rezip(parts(book))
    assert b"PK\x06\x06" in data
    assert validate_package(graft_result_sheets(data, results)) == []


def test_64_bit_fields_of_a_member_are_read_and_not_carried_on(book):
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as package:
        for name, content in parts(book).items():
            with package.open(name, "w", force_zip64=True) as member:
                member.write(content)
    assert b"\x01\x00\x10\x00" in out.getvalue()[:200]
    joined = graft_result_sheets(out.getvalue(), result_book())
    assert parts(joined)["xl/sharedStrings.xml"] == parts(book)["xl/sharedStrings.xml"]
    assert not any(m.local_extra for m in zip_module.read_members(joined))


@pytest.mark.parametrize("offset", [2**63, 2**64 - 1, 2**40])
def test_a_64_bit_offset_beyond_every_file(offset):
    """The only entry of the directory says that its data stand where no index reaches."""
    one = rezip({"a": b"1"})
    at, end = one.index(b"PK\x01\x02"), one.index(b"PK\x05\x06")
    wide = struct.pack("<HHQ", 1, 8, offset)
    entry = bytearray(one[at:end] + wide)
    struct.pack_into("<H", entry, 30, len(wide))
    struct.pack_into("<L", entry, 42, 0xFFFFFFFF)
    tail = bytearray(one[end:])
    struct.pack_into("<LL", tail, 12, len(entry), at)
    with pytest.raises(PackageError, match="the file is damaged"):
        package_from_bytes(one[:at] + bytes(entry + tail))


def test_streamed_members_are_read_and_written_plainly(book):
    """Sizes behind the data instead of before it, as programs write that cannot go back in the file."""

    class Stream(io.RawIOBase):
        def __init__(self):
            self.out = bytearray()

        def writable(self):
            return True

        def write(self, data):
            self.out += data
            return len(data)

    stream = Stream()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as package:
        for name, content in parts(book).items():
            package.writestr(name, content)
    data = bytes(stream.out)
    assert b"PK\x07\x08" in data
    joined = graft_result_sheets(data, result_book())
    assert parts(joined)["xl/sharedStrings.xml"] == parts(book)["xl/sharedStrings.xml"]
    assert graft_result_sheets(joined, result_book()) == joined


def test_stored_members_stay_stored(book):
    joined = graft_result_sheets(rezip(parts(book), zipfile.ZIP_STORED), result_book())
    with zipfile.ZipFile(io.BytesIO(joined)) as package:
        assert package.getinfo("xl/sharedStrings.xml").compress_type == zipfile.ZIP_STORED


def test_names_outside_ascii_survive(book):
    joined = graft_result_sheets(with_member(book, "customXml/größe.bin", b"1"), result_book())
    assert parts(joined)["customXml/größe.bin"] == b"1"


def test_sheets_without_a_part(book):
    for change in (
        lambda c: c.replace(b"worksheets/sheet1.xml", b"worksheets/none.xml"),
        lambda c: c.replace(b'Id="rId1"', b'Id="rId77"'),
    ):
        data = edited(book, rels=change)
        assert validate_package(data)
    with pytest.raises(PackageError, match="the sheet Loads has no part"):
        graft_result_sheets(data, result_book())


def test_bytes_changed_at_random_never_end_in_a_traceback():
    """Seeded; whatever comes out is either a sound file or one sentence."""
    base = graft_result_sheets(engineers_book(), result_book(("R Summary",)))
    results = result_book(("R Summary",))
    content = parts(base)
    chosen = ["xl/workbook.xml", "xl/styles.xml", "[Content_Types].xml", "xl/_rels/workbook.xml.rels"]
    dice = random.Random(3)
    outcomes = set()
    for _ in range(150):
        part = dice.choice(chosen)
        changed = bytearray(content[part])
        changed[dice.randrange(len(changed))] = dice.randrange(256)
        data = rezip(content | {part: bytes(changed)})
        try:
            graft_result_sheets(data, results)
            outcomes.add("joined")
        except PackageError as error:
            outcomes.add("more than one line" if "\n" in str(error) else "refused")
    assert outcomes == {"joined", "refused"}


def test_a_file_that_cannot_be_read(monkeypatch, tmp_path):
    def broken(*_args, **_kwargs):
        raise OSError(errno.EIO, "Input/output error")

    monkeypatch.setattr(Path, "open", broken)
    with pytest.raises(PackageError, match=r"BOOK\.xlsx: the file cannot be read \(Input/output error\)"):
        open_package(tmp_path / "BOOK.xlsx")


def test_large_members_take_time_in_proportion():
    """Incompressible data of 60 MB: a reader that copies its rest for every chunk takes minutes."""
    noise = random.Random(4).randbytes(60 * 2**20)
    data = with_member(engineers_book(), "xl/media/noise.bin", noise)
    start = time.perf_counter()
    package_from_bytes(data)
    assert time.perf_counter() - start < 10


def test_relation_targets_of_the_root_may_be_absolute(book):
    content = parts(book)
    content["_rels/.rels"] = content["_rels/.rels"].replace(b'"xl/workbook.xml"', b'"/xl/workbook.xml"')
    assert f"{OFFICE}/officeDocument".encode() in content["_rels/.rels"]
    assert package_from_bytes(rezip(content)).workbook_part == "xl/workbook.xml"
