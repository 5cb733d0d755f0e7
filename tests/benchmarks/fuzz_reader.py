"""Workbooks changed at random: the reader answers with a plant, a list of faults or a sentence, and in time.

Run with ``python -m tests.benchmarks.fuzz_reader [COUNT] [FIRST]``. Most cases change bytes, values or
elements inside the parts; one in seven changes the zip structure around them (fuzz_zip.py). Case n is the
same in every run; one that fails is kept as a file in the folder for temporary files. A few hundred cases
run with the other tests (tests/workbook/test_fuzz.py).
"""

from __future__ import annotations

import re
import signal
import sys
import tempfile
import time
import traceback
import warnings
import zipfile
from collections import Counter
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from functools import cache
from pathlib import Path
from random import Random
from types import FrameType
from typing import NoReturn

from study.issues import PackageError
from study.workbook import write_workbook
from study.workbook.build import check_raw
from study.workbook.faults import FAULTS
from study.workbook.package import graft_result_sheets, validate_package
from study.workbook.package.opc import package_from_bytes
from study.workbook.reader import read_package
from tests.benchmarks.fuzz_zip import STRUCTURE
from tests.faulty_workbooks import good
from tests.workbook.package.samples import engineers_book, packed_book, parts, result_book, rezip
from tests.workbook.sheet_samples import package

SECONDS_PER_CASE = 10
"""Of the processor, so that a busy machine makes no case slow."""
GRAFT_EVERY = 5
STRUCTURE_EVERY = 7
TOKENS = (
    b"0", b"-1", b"1E999", b"nan", b"4294967296", b"99999999999999999999", b"A1", b"XFD1048576", b"ZZZZ1",
    b"", b"&lt;", b"&amp;", b"&#10;", b"&#x10FFFF;", b"s", b"str", b"inlineStr", b"e", b"d", b"b", b"shared",
    b"../../x", b"/xl/workbook.xml", b"http://example.org/", b"\xf0\x9f\x92\xa1", b"=cmd|'/c x'!A1",
    b"&lt;script&gt;", b"'R Summary'!B3", b"R_x[a]", b"2025-03-14", b"1,5", b"#REF!", b" ", b"1_0",
    b"\xc2\xb2", b"a" * 5000,
)  # fmt: skip
_VALUE = re.compile(rb'(?<==")[^"<]*(?=")|(?<=>)[^<]+(?=<)')
_VALUE_SPOILERS = (b"&bomb;", b"&#0;", b"<script>", b"\xff\xfe", b"\x00", b'"')
_ELEMENT = re.compile(rb"<([\w:]+)[^<>]*/>|<([\w:]+)\b[^<>]*>[^<>]*</\2>")
_TAG = re.compile(rb"</?[\w:]+[^<>]*>")
_MOMENT = re.compile(rb"20[0-9]{2}-[0-9]{2}-[0-9]{2}T[0-9:]+Z")
_AFTER_PROLOG = re.compile(rb"^(<\?[^>]*\?>)?\s*<[^>]*>")

Change = Callable[[Random, bytes], bytes]


class TooSlow(BaseException):
    """A case took longer than it may; no handler of the program catches it."""


# ---- ways to change bytes


def _any_bytes(dice: Random, data: bytes) -> bytes:
    changed = bytearray(data)
    for _ in range(dice.randint(1, 4)):
        at = dice.randrange(len(changed) + 1)
        changed[at : at + dice.choice((0, 1, 1, 1, 4, 40))] = dice.randbytes(dice.choice((0, 1, 1, 4)))
    return bytes(changed)


def _cut(dice: Random, data: bytes) -> bytes:
    at = dice.randrange(len(data) + 1)
    return data[:at] if dice.random() < 0.5 else data[at:]


def _splice(dice: Random, data: bytes) -> bytes:
    a, b, c = (dice.randrange(len(data) + 1) for _ in range(3))
    return data[:c] + data[min(a, b) : min(max(a, b), min(a, b) + 5000)] + data[c:]


def _tokens(dice: Random, data: bytes) -> bytes:
    """Replace values of attributes and texts of elements by others that look like something."""
    spots = _spots(_VALUE, data)
    if not spots:
        return _any_bytes(dice, data)
    for found in sorted(dice.sample(spots, min(len(spots), dice.randint(1, 4))), key=lambda m: -m.start()):
        what = dice.random()
        token = (
            dice.choice(TOKENS if what < 0.6 else _VALUE_SPOILERS) if what < 0.65 else dice.choice(spots)[0]
        )
        data = data[: found.start()] + token + data[found.end() :]
    return data


def _elements(dice: Random, data: bytes) -> bytes:
    """Take elements or, now and then, single tags out, double them, or put them elsewhere."""
    for _ in range(dice.randint(1, 3)):
        spots = _spots(_TAG if dice.random() < 0.1 else _ELEMENT, data)
        if not spots:
            break
        found, other = dice.choice(spots), dice.choice(spots)
        piece = found[0] * dice.choice((0, 0, 1, 2, 50))
        if dice.random() < 0.5:
            data = data[: found.start()] + piece + data[found.end() :]
        else:
            data = data[: other.start()] + piece + data[other.start() :]
    return data


def _spots(pattern: re.Pattern[bytes], data: bytes) -> list[re.Match[bytes]]:
    """Return the matches behind the first tag, whose change would only ever be refused."""
    head = _AFTER_PROLOG.match(data)
    return list(pattern.finditer(data, head.end() if head else 0))


def _prolog(dice: Random, data: bytes) -> bytes:
    head = dice.choice(
        (
            b'<!DOCTYPE x [<!ENTITY bomb "boom">]>',
            b'<?xml version="1.0" encoding="UTF-16"?>',
            b'<?xml version="1.0" encoding="latin-1"?>',
            b"\xef\xbb\xbf",
            b"<!-- -->" * 100,
            b"\n" * 500,
        )
    )
    return head + (data if dice.random() < 0.5 else data[data.find(b"?>") + 2 :])


CHANGES: tuple[Change, ...] = (
    *[_tokens] * 7,
    *[_elements] * 4,
    _any_bytes,
    _any_bytes,
    _cut,
    _splice,
    _prolog,
)


# ---- ways to change packages


@cache
def _bases() -> tuple[Mapping[str, bytes], ...]:
    """Return the parts of the workbooks that are changed: small ones first, which are changed most."""
    small = package(
        {
            "Project": '<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1" t="s"><v>1</v></c></row>'
            '<row r="2"><c r="A2" t="s"><v>2</v></c><c r="B2" t="inlineStr"><is><t>Demo</t></is></c></row>',
            "Boards": '<row r="1"><c r="A1" t="str"><v>Board</v></c><c r="B1" t="str"><v>Role</v></c>'
            '<c r="C1" t="str"><v>Nominal voltage [V]</v></c></row><row r="2"><c r="A2" t="str"><v>MSB</v>'
            '</c><c r="C2" s="1"><v>450</v></c></row>',
            "Own": '<row r="1"><c r="A1" s="2"><v>45000</v></c><c r="B1"><f t="shared" ref="B1:B2" si="0">'
            'A1*2</f><v>9</v></c></row><row r="2"><c r="B2"><f t="shared" si="0"/><v>1</v></c><c r="C2">'
            "<f>'R X'!A1</f><v>7</v></c></row>",
            "R X": '<row r="1"><c r="A1"><v>1</v></c></row>',
        },
        strings="<si><t>Item</t></si><si><r><t>Val</t></r><r><t>ue</t></r></si><si><t>Vessel</t></si>",
        names="<definedNames><definedName name=\"Own\">'R X'!$A$1</definedName></definedNames>",
    )
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "good.xlsx"
        write_workbook(path, good.tables())
        whole = path.read_bytes()
    books = (small, small, small, engineers_book(), packed_book(), whole)
    return tuple(
        {name: _MOMENT.sub(b"2000-01-01T00:00:00Z", data) for name, data in parts(book).items()}
        for book in books
    )


def _changed_parts(dice: Random, content: dict[str, bytes]) -> None:
    for _ in range(dice.choice((1, 1, 1, 2, 5))):
        name = dice.choice(list(content))
        content[name] = dice.choice(CHANGES)(dice, content[name])


def _changed_names(dice: Random, content: dict[str, bytes]) -> None:
    name = dice.choice(list(content))
    data = content.pop(name)
    if dice.random() < 0.7:
        new = dice.choice(
            ("../x", "/x", "xl\\x", name.upper(), name + "/", dice.choice(list(content)), "%2e%2e/x")
        )
        content[new] = data


def made_case(number: int) -> bytes:
    """Return the file of a case."""
    dice = Random(number)
    content = dict(dice.choice(_bases()))
    method = dice.choice((zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED))
    if number % STRUCTURE_EVERY == 0:
        return dice.choice(STRUCTURE)(dice, rezip(content, method))
    what = dice.random()
    if what < 0.1:
        _changed_names(dice, content)
    if what > 0.05:
        _changed_parts(dice, content)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        data = rezip(content, method)
    return dice.choice((_any_bytes, _cut, _splice))(dice, data) if dice.random() < 0.05 else data


# ---- what is tried on each


@contextmanager
def _limited() -> Iterator[None]:
    def stop(_number: int, _frame: FrameType | None) -> NoReturn:
        raise TooSlow

    before = signal.signal(signal.SIGPROF, stop)
    signal.setitimer(signal.ITIMER_PROF, SECONDS_PER_CASE)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_PROF, 0)
        signal.signal(signal.SIGPROF, before)


@cache
def _results() -> bytes:
    return result_book(("R Summary",))


def outcome(data: bytes, *, graft: bool) -> str:
    """Read, check and perhaps write a file; return how it ended.

    Raises
    ------
    AssertionError
        The answer is not one that a user can do something with.
    """
    try:
        plant, issues = check_raw(read_package(package_from_bytes(data), "book.xlsx"))
    except PackageError as error:
        _one_sentence(str(error))
        return "refused"
    finally:
        if graft:
            _graft(data)
    assert (plant is None) == any(issue.severity == "fault" for issue in issues)
    for issue in issues:
        assert issue.code in FAULTS
        assert issue.found
        assert issue.wanted
    return "faults" if plant is None else "plant"


def _graft(data: bytes) -> None:
    try:
        joined = graft_result_sheets(data, _results())
    except PackageError as error:
        _one_sentence(str(error))
        return
    if not validate_package(data):
        assert validate_package(joined) == []


def _one_sentence(text: str) -> None:
    assert text
    assert "\n" not in text
    assert len(text) < 600


def run(number: int) -> tuple[str, float]:
    """Return how a case ended and the seconds it took; what goes wrong is raised with the case's number."""
    data = made_case(number)
    start = time.process_time()
    try:
        with _limited():
            how = outcome(data, graft=number % GRAFT_EVERY == 0)
    except (Exception, TooSlow) as error:
        path = Path(tempfile.gettempdir()) / f"fuzz-case-{number}.xlsx"
        path.write_bytes(data)
        error.add_note(f"case {number}, kept as {path}")
        raise
    return how, time.process_time() - start


def main() -> int:
    """Run the cases; print how they ended, the slowest one, and a traceback for each kind of failure."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 50_000
    first = int(sys.argv[2]) if len(sys.argv) > 2 else 0
    ends: Counter[str] = Counter()
    failures: Counter[str] = Counter()
    slowest = (0.0, -1)
    start = time.perf_counter()
    for number in range(first, first + count):
        try:
            how, seconds = run(number)
        except (Exception, TooSlow) as error:
            how, seconds = "failed", 0.0
            where = traceback.extract_tb(error.__traceback__)[-1]
            kind = f"{type(error).__name__} in {where.name}, line {where.lineno}: {error}"[:150]
            if not failures[kind]:
                print("".join(traceback.format_exception(error)), flush=True)
            failures[kind] += 1
        ends[how] += 1
        slowest = max(slowest, (seconds, number))
        if (number - first + 1) % 5000 == 0:
            print(
                f"{number - first + 1} cases, {time.perf_counter() - start:.0f} s: {dict(ends)}", flush=True
            )
    print(f"\n{count} cases from {first} in {time.perf_counter() - start:.0f} s: {dict(ends)}")
    print(f"slowest: case {slowest[1]}, {slowest[0]:.2f} s")
    for kind, times in failures.most_common():
        print(f"{times} x {kind}")
    return 1 if failures else 0


if __name__ == "__main__":
    sys.exit(main())
