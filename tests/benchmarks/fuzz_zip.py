"""Ways to change the zip structure of a workbook: headers that lie, entries that share, repeat or wander.

Layout of the records from memory of the ZIP file format specification (APPNOTE), sections 4.3.7, 4.3.12 and
4.3.16.
"""

from __future__ import annotations

import re
import struct
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from random import Random

_LOCAL, _CENTRAL, _END = b"PK\x03\x04", b"PK\x01\x02", b"PK\x05\x06"
# Offset in the record and struct code of each field of more than one meaning.
_LOCAL_FIELDS = ((4, "H"), (6, "H"), (8, "H"), (14, "L"), (18, "L"), (22, "L"), (26, "H"), (28, "H"))
_CENTRAL_FIELDS = (
    (6, "H"), (8, "H"), (10, "H"), (16, "L"), (20, "L"), (24, "L"), (28, "H"), (30, "H"), (32, "H"),
    (34, "H"), (42, "L"),
)  # fmt: skip
_END_FIELDS = ((4, "H"), (6, "H"), (8, "H"), (10, "H"), (12, "L"), (16, "L"), (20, "H"))
_NUMBERS = {
    "H": (0, 1, 8, 9, 12, 0x7F, 0x800, 0x7FFF, 0xFFFE, 0xFFFF),
    "L": (0, 1, 0x100, 0xFFFF, 0x7FFFFFFF, 0x80000000, 0xFFFFFFFE, 0xFFFFFFFF),
}
_OFFSET, _PACKED, _SIZE, _CRC = 42, 20, 24, 16
_NAMES = (b"../", b"..\\", b"/", b"C:", b"\x00", b"\xff", b"%2e%2e/", b"xl/workbook.xml", b"XL/WORKBOOK.XML")


@dataclass(frozen=True, slots=True)
class _Records:
    """Where the records of a zip file begin."""

    local: Sequence[int]
    central: Sequence[int]
    end: int


def _records(data: bytes) -> _Records:
    return _Records(
        [found.start() for found in re.finditer(re.escape(_LOCAL), data)],
        [found.start() for found in re.finditer(re.escape(_CENTRAL), data)],
        data.rfind(_END),
    )


def _set(data: bytes, at: int, code: str, value: int) -> bytes:
    packed = struct.pack(f"<{code}", value & (0xFFFF if code == "H" else 0xFFFFFFFF))
    return data[:at] + packed + data[at + len(packed) :]


def _get(data: bytes, at: int, code: str) -> int:
    return int(struct.unpack_from(f"<{code}", data, at)[0])


def _other_number(dice: Random, code: str, value: int) -> int:
    near = (value + 1, value - 1, value * 2, value // 2, value ^ (1 << dice.randrange(16)))
    return dice.choice((*near, *_NUMBERS[code]))


def fields(dice: Random, data: bytes) -> bytes:
    """Change one field of one record."""
    records = _records(data)
    starts, known = dice.choice(
        (
            (records.local, _LOCAL_FIELDS),
            (records.central, _CENTRAL_FIELDS),
            (records.central, _CENTRAL_FIELDS),
            ([records.end], _END_FIELDS),
        )
    )
    offset, code = dice.choice(known)
    at = dice.choice(starts) + offset
    return _set(data, at, code, _other_number(dice, code, _get(data, at, code)))


def both_headers(dice: Random, data: bytes) -> bytes:
    """Change method, check sum or a size in the local and the central header alike: a lie that holds."""
    at = dice.choice(_records(data).central)
    local = _get(data, at + _OFFSET, "L")
    (central_offset, code), local_offset = dice.choice(
        (((10, "H"), 8), ((_CRC, "L"), 14), ((_PACKED, "L"), 18), ((_SIZE, "L"), 22), ((8, "H"), 6))
    )
    value = _other_number(dice, code, _get(data, at + central_offset, code))
    return _set(_set(data, at + central_offset, code, value), local + local_offset, code, value)


def shared(dice: Random, data: bytes) -> bytes:
    """Let two entries point at one place."""
    one, other = (dice.choice(_records(data).central) for _ in range(2))
    return _set(data, one + _OFFSET, "L", _get(data, other + _OFFSET, "L"))


def names(dice: Random, data: bytes) -> bytes:
    """Write a piece of another name over a name, in one of its headers or in both."""
    at = dice.choice(_records(data).central)
    local, length = _get(data, at + _OFFSET, "L"), _get(data, at + 28, "H")
    piece = dice.choice(_NAMES)[:length]
    shift = dice.randrange(length - len(piece) + 1)
    places = [at + 46 + shift, local + 30 + shift]
    for place in dice.choice((places, places[:1], places[1:])):
        data = data[:place] + piece + data[place + len(piece) :]
    return data


def _rebuilt(data: bytes, entries: Sequence[bytes]) -> bytes:
    """Return the file with other entries in its directory, counts and sizes in keeping."""
    records = _records(data)
    start = records.central[0]
    directory = b"".join(entries)
    end = data[records.end :]
    for at, code, value in (
        (8, "H", len(entries)), (10, "H", len(entries)), (12, "L", len(directory)), (16, "L", start)
    ):  # fmt: skip
        end = _set(end, at, code, value)
    return data[:start] + directory + end


def _entries(data: bytes) -> list[bytes]:
    records = _records(data)
    stops = [*records.central[1:], records.end]
    return [data[a:b] for a, b in zip(records.central, stops, strict=True)]


def order(dice: Random, data: bytes) -> bytes:
    """Shuffle the directory, take entries out or repeat them."""
    entries = _entries(data)
    what = dice.randrange(3)
    if what == 0:
        dice.shuffle(entries)
    elif what == 1:
        del entries[dice.randrange(len(entries))]
    else:
        entries.insert(dice.randrange(len(entries) + 1), dice.choice(entries))
    return _rebuilt(data, entries)


def extra(dice: Random, data: bytes) -> bytes:
    """Put an extra field into an entry, one with 64-bit sizes among them, or a comment behind the file."""
    if dice.random() < 0.2:
        comment = dice.randbytes(dice.choice((1, 30))) if dice.random() < 0.5 else _END + bytes(18)
        return _set(data, _records(data).end + 20, "H", len(comment)) + comment
    entries = _entries(data)
    place = dice.randrange(len(entries))
    entry = entries[place]
    content = dice.randbytes(dice.choice((0, 3, 8, 24, 28)))
    field = struct.pack("<HH", dice.choice((1, 1, 0x5455, 0x7075)), len(content) + dice.choice((0, 0, 0, 5)))
    name = _get(entry, 28, "H")
    entry = _set(entry, 30, "H", _get(entry, 30, "H") + len(field) + len(content))
    entry = entry[: 46 + name] + field + content + entry[46 + name :]
    if dice.random() < 0.5:
        entry = _set(entry, dice.choice((_PACKED, _SIZE, _OFFSET)), "L", 0xFFFFFFFF)
    entries[place] = entry
    return _rebuilt(data, entries)


def packed_bytes(dice: Random, data: bytes) -> bytes:
    """Change bytes of a compressed part, and leave everything around it."""
    at = dice.choice(_records(data).central)
    local, packed = _get(data, at + _OFFSET, "L"), _get(data, at + _PACKED, "L")
    start = local + 30 + _get(data, local + 26, "H") + _get(data, local + 28, "H")
    changed = bytearray(data)
    for _ in range(dice.randint(1, 3)):
        if packed:
            changed[start + dice.randrange(packed)] ^= 1 << dice.randrange(8)
    return bytes(changed)


STRUCTURE: tuple[Callable[[Random, bytes], bytes], ...] = (
    fields, fields, fields, both_headers, both_headers, shared, names, order, extra, packed_bytes,
)  # fmt: skip
