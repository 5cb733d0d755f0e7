"""The zip container of a workbook: read with limits, written member by member without recompressing."""

from __future__ import annotations

import struct
import zlib
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from urllib.parse import unquote

from study.issues import PackageError

MAX_FILE_BYTES = 128 * 2**20
MAX_ENTRIES = 5000
MAX_TOTAL_BYTES = 512 * 2**20
MAX_RATIO = 300
"""Inflated to stored size; sheets of real workbooks stay under about 100, deflate itself reaches 1032."""
RATIO_FLOOR_BYTES = 2**20
"""Parts that inflate to less than this are never a danger, whatever their ratio."""

_CHUNK = 64 * 1024
_EOCD = struct.Struct("<4s4H2LH")
_EOCD64_LOCATOR = struct.Struct("<4sLQL")
_EOCD64 = struct.Struct("<4sQ2H2L4Q")
_CENTRAL = struct.Struct("<4s6H3L5H2L")
_LOCAL = struct.Struct("<4s5H3L2H")
_FLAG_ENCRYPTED, _FLAG_DESCRIPTOR, _FLAG_UTF8 = 0x1, 0x8, 0x800
_STORED, _DEFLATED = 0, 8
_DAMAGED = "the file is damaged (its zip directory does not hold together); restore it from a copy"
_DOS_TIME, _DOS_DATE = 0, (1 << 5) | 1
"""1980-01-01 00:00, the first date that a zip file can hold: no clock time in parts of ours."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Member:
    """One entry of the zip file with its compressed bytes as they stand.

    Attributes
    ----------
    name : str
        Part name without the leading slash.
    raw_name : bytes
        The name as stored.
    packed : bytes
        Compressed bytes.
    size : int
        Inflated size [byte].
    crc : int
        CRC-32 of the inflated bytes.
    method : int
        0 stored, 8 deflated.
    made_by, needs, flags, time, date, internal, external : int
        Header fields kept for the way back.
    extra, local_extra, comment : bytes
        Extra fields of the central and the local header, and the entry's comment.
    """

    name: str
    raw_name: bytes
    packed: bytes
    size: int
    crc: int
    method: int
    made_by: int = 20
    needs: int = 20
    flags: int = 0
    time: int = _DOS_TIME
    date: int = _DOS_DATE
    internal: int = 0
    external: int = 0
    extra: bytes = b""
    local_extra: bytes = b""
    comment: bytes = b""


def part_key(name: str) -> str:
    """Return the form in which part names are compared: no leading slash, no escapes, no case."""
    return unquote(name.removeprefix("/")).lower()


def new_member(name: str, content: bytes) -> Member:
    """Compress a part of ours; its time stamp is fixed so that equal content gives equal bytes."""
    squeezer = zlib.compressobj(6, zlib.DEFLATED, -zlib.MAX_WBITS)
    packed = squeezer.compress(content) + squeezer.flush()
    return Member(
        name=name,
        raw_name=name.encode("utf-8"),
        packed=packed,
        size=len(content),
        crc=zlib.crc32(content),
        method=_DEFLATED,
        flags=0 if name.isascii() else _FLAG_UTF8,
    )


def read_members(data: bytes) -> tuple[Member, ...]:
    """Read the zip directory and check every entry against the limits before anything is inflated.

    Parameters
    ----------
    data : bytes
        The whole file.

    Returns
    -------
    tuple of Member
        In the order of the directory; contents are still compressed.

    Raises
    ------
    PackageError
        The file is no zip file, is damaged, or is larger than the limits allow.
    """
    if len(data) > MAX_FILE_BYTES:
        raise PackageError(f"the file is larger than {MAX_FILE_BYTES // 2**20} MB; it is no study workbook")
    count, start, size = _end_record(data)
    if count > MAX_ENTRIES:
        raise PackageError(f"the file holds {count} parts, more than the {MAX_ENTRIES} that are accepted")
    members, spans = [], []
    position = start
    for _ in range(count):
        try:
            member, span, position = _read_entry(data, position, start)
        except (struct.error, UnicodeDecodeError) as error:
            raise PackageError(_DAMAGED) from error
        members.append(member)
        spans.append(span)
    if position != start + size:
        raise PackageError(_DAMAGED)
    _check_spans(spans)
    _check_sizes(members)
    _check_names(members)
    return tuple(members)


def _end_record(data: bytes) -> tuple[int, int, int]:
    """Return the number of entries, the offset and the size of the central directory."""
    if data[:4] not in (b"PK\x03\x04", b"PK\x05\x06"):
        raise PackageError("the file is no Excel workbook (.xlsx or .xlsm); open it and save it as .xlsx")
    at = data.rfind(b"PK\x05\x06", max(0, len(data) - 65535 - _EOCD.size))
    if at < 0 or at + _EOCD.size > len(data):
        raise PackageError(
            "the file is damaged or cut short (the zip directory is missing); get a whole copy"
        )
    _, disk, start_disk, here, count, size, start, comment = _EOCD.unpack_from(data, at)
    if at + _EOCD.size + comment != len(data):
        raise PackageError(_DAMAGED)
    end = at
    locator_at = at - _EOCD64_LOCATOR.size
    if locator_at > 0 and data[locator_at : locator_at + 4] == b"PK\x06\x07":
        end = _EOCD64_LOCATOR.unpack_from(data, locator_at)[2]
        if not 0 < end <= locator_at - _EOCD64.size or data[end : end + 4] != b"PK\x06\x06":
            raise PackageError(_DAMAGED)
        _, _, _, _, disk, start_disk, here, count, size, start = _EOCD64.unpack_from(data, end)
    if disk or start_disk or here != count or start + size != end:
        raise PackageError(_DAMAGED)
    return count, start, size


def _read_entry(data: bytes, position: int, directory: int) -> tuple[Member, tuple[int, int], int]:
    """Read one central entry and its local header; return it, the bytes it spans and the next position."""
    (mark, made_by, needs, flags, method, time, date, crc, packed, size, n_name, n_extra, n_comment, disk,
     internal, external, offset) = _CENTRAL.unpack_from(data, position)  # fmt: skip
    name_at = position + _CENTRAL.size
    extra_at = name_at + n_name
    comment_at = extra_at + n_extra
    after = comment_at + n_comment
    if mark != b"PK\x01\x02" or disk not in (0, 0xFFFF) or after > len(data):
        raise PackageError(_DAMAGED)
    raw_name, extra = data[name_at:extra_at], data[extra_at:comment_at]
    size, packed, offset = _zip64(extra, size, packed, offset)
    name = raw_name.decode("utf-8" if flags & _FLAG_UTF8 else "cp437")
    if flags & _FLAG_ENCRYPTED:
        raise PackageError("the file is encrypted; remove the password and save it again")
    if method not in (_STORED, _DEFLATED):
        raise PackageError(
            f"part {name} is packed by a method that Excel does not use; save the file in Excel"
        )
    if offset > directory:
        # A 64-bit offset may be beyond what an index can be.
        raise PackageError(_DAMAGED)
    local = _LOCAL.unpack_from(data, offset)
    body = offset + _LOCAL.size + local[9] + local[10]
    local_name_at = offset + _LOCAL.size
    local_name = data[local_name_at : local_name_at + local[9]]
    if local[0] != b"PK\x03\x04" or local_name != raw_name or body + packed > directory:
        raise PackageError(_DAMAGED)
    member = Member(
        name=name,
        raw_name=raw_name,
        packed=data[body : body + packed],
        size=size,
        crc=crc,
        method=method,
        made_by=made_by,
        needs=needs,
        flags=flags & ~_FLAG_DESCRIPTOR,
        time=time,
        date=date,
        internal=internal,
        external=external,
        extra=_without_zip64(extra),
        local_extra=_without_zip64(data[local_name_at + local[9] : body]),
        comment=data[comment_at:after],
    )
    return member, (offset, body + packed), after


def _fields(extra: bytes) -> Iterator[tuple[int, bytes]]:
    """Yield the id and the whole bytes of each extra field."""
    at = 0
    while at + 4 <= len(extra):
        ident, length = struct.unpack_from("<HH", extra, at)
        yield ident, extra[at : at + 4 + length]
        at += 4 + length


def _without_zip64(extra: bytes) -> bytes:
    return b"".join(field for ident, field in _fields(extra) if ident != 1)


def _zip64(extra: bytes, size: int, packed: int, offset: int) -> tuple[int, int, int]:
    """Replace the saturated 32-bit fields by their 64-bit values."""
    wide = next((field[4:] for ident, field in _fields(extra) if ident == 1), b"")
    values = []
    at = 0
    for value in (size, packed, offset):
        if value == 0xFFFFFFFF:
            values.append(int(struct.unpack_from("<Q", wide, at)[0]))
            at += 8
        else:
            values.append(value)
    return values[0], values[1], values[2]


def _check_spans(spans: list[tuple[int, int]]) -> None:
    """Refuse entries that share bytes: the way to make a small file inflate without end."""
    end = 0
    for start, stop in sorted(spans):
        if start < end:
            raise PackageError(_DAMAGED)
        end = stop


def _check_sizes(members: Iterable[Member]) -> None:
    total = 0
    for member in members:
        total += member.size
        if total > MAX_TOTAL_BYTES:
            raise PackageError(
                f"the file unpacks to more than {MAX_TOTAL_BYTES // 2**20} MB; it is not opened"
            )
        if member.size > RATIO_FLOOR_BYTES and member.size > MAX_RATIO * max(1, len(member.packed)):
            raise PackageError(
                f"part {member.name} is compressed more than {MAX_RATIO} times, which no workbook needs; "
                "it is not opened"
            )


def _check_names(members: Iterable[Member]) -> None:
    """Refuse names that leave the package, or that two readers would take for different parts."""
    seen: set[str] = set()
    for member in members:
        name = member.name.removesuffix("/") if member.size == 0 else member.name
        name = unquote(name)
        steps = name.split("/")
        if any(step in ("", ".", "..") for step in steps) or any(c in "\\:\x7f" or c < " " for c in name):
            raise PackageError(
                f"the file holds a part with the unsafe name {member.name!r}; it is not opened"
            )
        if part_key(name) in seen:
            raise PackageError(f"the file holds the part {member.name} twice; it is damaged or tampered with")
        seen.add(part_key(name))


def inflate(member: Member) -> bytes:
    """Return the content of a member, checked against its size and CRC."""
    return b"".join(_inflated(member))


def verify(member: Member) -> bytes:
    """Check size and CRC of a member in bounded memory; return its first bytes."""
    chunks = _inflated(member)
    head = next(chunks, b"")
    for _ in chunks:
        pass
    return head


def _inflated(member: Member) -> Iterator[bytes]:
    """Yield the content in chunks; stop at the declared size, raise when size or CRC differ."""
    damaged = f"part {member.name} is damaged (its check sum is wrong); restore the file from a copy"
    crc, length = 0, 0
    try:
        for chunk in _unpacked(member):
            length += len(chunk)
            crc = zlib.crc32(chunk, crc)
            if length > member.size:
                break
            yield chunk
    except zlib.error as error:
        raise PackageError(damaged) from error
    if length != member.size or crc != member.crc:
        raise PackageError(damaged)


def _unpacked(member: Member) -> Iterator[bytes]:
    """Yield the content in chunks of bounded size, whatever the stream claims."""
    pieces = (member.packed[at : at + _CHUNK] for at in range(0, len(member.packed), _CHUNK))
    if member.method == _STORED:
        yield from pieces
        return
    inflater = zlib.decompressobj(-zlib.MAX_WBITS)
    for piece in pieces:
        waiting = piece
        while waiting and not inflater.eof:
            chunk = inflater.decompress(waiting, _CHUNK)
            waiting = inflater.unconsumed_tail
            if chunk:
                yield chunk
    rest = inflater.flush()
    if rest:
        yield rest


def write_members(members: Iterable[Member]) -> bytes:
    """Return the zip file of the members, each with its compressed bytes as they stand."""
    body, directory = bytearray(), bytearray()
    count = 0
    for member in members:
        offset = len(body)
        body += _LOCAL.pack(
            b"PK\x03\x04", member.needs, member.flags, member.method, member.time, member.date, member.crc,
            len(member.packed), member.size, len(member.raw_name), len(member.local_extra),
        )  # fmt: skip
        body += member.raw_name + member.local_extra + member.packed
        directory += _CENTRAL.pack(
            b"PK\x01\x02", member.made_by, member.needs, member.flags, member.method, member.time,
            member.date, member.crc, len(member.packed), member.size, len(member.raw_name),
            len(member.extra), len(member.comment), 0, member.internal, member.external, offset,
        )  # fmt: skip
        directory += member.raw_name + member.extra + member.comment
        count += 1
    end = _EOCD.pack(b"PK\x05\x06", 0, 0, count, count, len(directory), len(body), 0)
    return bytes(body + directory + end)
