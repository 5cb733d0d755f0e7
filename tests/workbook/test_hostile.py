"""Hostile files through the command line: one sentence, exit status 2, bounded in time and memory.

The dangers are common practice in reading files from strangers, no source: compressed bombs, entities that
expand (and one that reads a file), names that leave the package, sheets of absurd extent, text that a
spreadsheet program or a browser would take for something to run.
"""

from __future__ import annotations

import io
import json
import os
import re
import sys
import zipfile
from collections.abc import Callable
from contextlib import redirect_stderr, redirect_stdout
from dataclasses import dataclass
from functools import cache
from html.parser import HTMLParser
from pathlib import Path
from xml.sax.saxutils import escape

import openpyxl
import pytest

from study.cli import main
from study.workbook import write_workbook
from tests.faulty_workbooks import good
from tests.workbook.limited import study
from tests.workbook.package.samples import VBA, parts, rezip

if sys.platform == "win32":
    pytest.skip("the limits on a process are a POSIX matter", allow_module_level=True)

ROOT = Path(__file__).parents[2]
MOST_SECONDS, MOST_MB = 30.0, 700.0
SMALL_DEMO = ROOT / "workbooks" / "workboat.xlsx"


def book_parts() -> dict[str, bytes]:
    return parts(SMALL_DEMO.read_bytes())


def with_sheet(change: Callable[[bytes], bytes], name: str = "xl/worksheets/sheet14.xml") -> bytes:
    """Return the workbook with the sheet of loads changed."""
    content = book_parts()
    changed = change(content[name])
    assert changed != content[name]
    return rezip(content | {name: changed})


def many_parts_that_inflate() -> bytes:
    """A gigabyte in parts that each stay below every limit of their own."""
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED, compresslevel=1) as package:
        for name, data in book_parts().items():
            package.writestr(name, data)
        block = (os.urandom(4096) + bytes(200_000)) * 100
        for number in range(50):
            package.writestr(f"xl/media/image{number}.bin", block)
    return out.getvalue()


@cache
def one_part_that_inflates() -> bytes:
    return with_sheet(lambda c: c.replace(b"</sheetData>", b" " * 400_000_000 + b"</sheetData>"))


def laughs(levels: int = 12) -> bytes:
    entities = b'<!ENTITY a0 "lol">' + b"".join(
        b'<!ENTITY a%d "%s">' % (n, b"&a%d;" % (n - 1) * 10) for n in range(1, levels)
    )
    doctype = b"<!DOCTYPE x [" + entities + b"]>"
    return with_sheet(
        lambda c: c.replace(b"<worksheet", doctype + b"<worksheet", 1).replace(
            b"</sheetData>",
            b'<row r="9000"><c r="A9000" t="inlineStr"><is><t>&a%d;</t></is></c></row></sheetData>'
            % (levels - 1),
        )
    )


def quadratic() -> bytes:
    doctype = b'<!DOCTYPE x [<!ENTITY a "' + b"x" * 100_000 + b'">]>'
    return with_sheet(
        lambda c: c.replace(b"<worksheet", doctype + b"<worksheet", 1).replace(
            b"</sheetData>",
            b'<row r="9000"><c r="A9000" t="inlineStr"><is><t>'
            + b"&a;" * 50_000
            + b"</t></is></c></row></sheetData>",
        )
    )


def reads_a_file() -> bytes:
    doctype = b'<!DOCTYPE x [<!ENTITY a SYSTEM "file:///etc/passwd">]>'
    content = book_parts()
    strings = content["xl/sharedStrings.xml"].replace(b"<sst", doctype + b"<sst", 1)
    return rezip(content | {"xl/sharedStrings.xml": strings.replace(b"<t>", b"<t>&a;", 1)})


def leaves_the_package() -> bytes:
    return rezip(book_parts() | {"../../../../tmp/evil.xml": b"<a/>"})


def row_beyond_the_sheet() -> bytes:
    return with_sheet(
        lambda c: c.replace(
            b"</sheetData>", b'<row r="999999999"><c r="A999999999"><v>1</v></c></row></sheetData>'
        )
    )


def column_beyond_the_sheet() -> bytes:
    return with_sheet(
        lambda c: c.replace(b"</sheetData>", b'<row r="9000"><c r="ZZZ9000"><v>1</v></c></row></sheetData>')
    )


def deep() -> bytes:
    """Elements inside each other, of names that differ so that the part is no bomb by its ratio."""
    names = [b"a%d" % (n * 7919 % 100_003) for n in range(60_000)]
    nest = b"".join(b"<%s>" % n for n in names) + b"".join(b"</%s>" % n for n in reversed(names))
    return with_sheet(lambda c: c.replace(b"</worksheet>", nest + b"</worksheet>"))


def old_format() -> bytes:
    return bytes.fromhex("d0cf11e0a1b11ae1") + b"\0" * 504 + "Workbook".encode("utf-16-le") + bytes(100_000)


def with_a_password() -> bytes:
    return (
        bytes.fromhex("d0cf11e0a1b11ae1") + b"\0" * 504 + "EncryptedPackage".encode("utf-16-le") + bytes(9000)
    )


def member_with_a_password() -> bytes:
    data = bytearray(SMALL_DEMO.read_bytes())
    at = data.index(b"PK\x01\x02")
    data[at + 8] |= 1
    return bytes(data)


def cut_short() -> bytes:
    return SMALL_DEMO.read_bytes()[:60_000]


def a_picture() -> bytes:
    return b"\x89PNG\r\n\x1a\n" + bytes(5000)


def a_hundred_thousand_loads() -> bytes:
    row = '<row r="{0}">' + "".join(
        f'<c r="{column}{{0}}" t="inlineStr"><is><t>{text}</t></is></c>'
        for column, text in zip("ABCDE", ("L{0}", "MSB", "", "Hotel", "motor"), strict=True)
    ) + "<c r=\"F{0}\"><v>1</v></c><c r=\"G{0}\"><v>7.5</v></c></row>"  # fmt: skip
    rows = "".join(row.format(number) for number in range(9000, 109_000)).encode()
    return with_sheet(lambda c: c.replace(b"</sheetData>", rows + b"</sheetData>"))


REFUSED: dict[Callable[[], bytes], str] = {
    many_parts_that_inflate: "unpacks to more than 512 MB",
    one_part_that_inflates: "compressed more than 300 times",
    laughs: "declares an XML document type",
    quadratic: "declares an XML document type",
    reads_a_file: "declares an XML document type",
    leaves_the_package: "unsafe name",
    row_beyond_the_sheet: "has a cell with the address",
    column_beyond_the_sheet: "has a cell with the address ZZZ9000",
    old_format: "old .xls format; open it in Excel and save it as .xlsx",
    with_a_password: "protected by a password",
    member_with_a_password: "encrypted; remove the password",
    cut_short: "damaged or cut short",
    a_picture: "no Excel workbook",
    a_hundred_thousand_loads: "the sheet Loads holds more than the 20000 rows that are read",
}


RUN_TOO = (one_part_that_inflates, laughs, with_a_password)


@pytest.mark.parametrize(
    ("make", "command"),
    [*((make, "check") for make in REFUSED), *((make, "run") for make in RUN_TOO)],
    ids=lambda value: getattr(value, "__name__", value),
)
def test_refused_in_one_sentence(make: Callable[[], bytes], command: str, tmp_path: Path) -> None:
    book = tmp_path / "Vessel.xlsx"
    data = make()
    book.write_bytes(data)
    ended = study(command, book)
    assert ended.status == 2, ended
    assert ended.out == ""
    assert ended.err.startswith("study: Vessel.xlsx: ")
    assert ended.err.count("\n") == 1
    assert REFUSED[make] in ended.err
    assert len(ended.err) < 420
    assert "root:" not in ended.err
    assert ended.seconds < MOST_SECONDS
    assert ended.peak_mb < MOST_MB
    assert os.listdir(tmp_path) == ["Vessel.xlsx"]
    assert book.read_bytes() == data


def absurd_dimension() -> bytes:
    return with_sheet(lambda c: re.sub(rb"<dimension[^>]*>", b'<dimension ref="A1:XFD1048576"/>', c))


def merged_and_formatted_to_the_corner() -> bytes:
    return with_sheet(
        lambda c: c.replace(
            b"</sheetData>",
            b'<row r="1048576"><c r="XFD1048576" s="1"/></row></sheetData><mergeCells count="1">'
            b'<mergeCell ref="A900000:XFD1048576"/></mergeCells>',
        )
    )


def formats_alone_in_every_row() -> bytes:
    rows = b"".join(
        b'<row r="%d" s="1" customFormat="1"><c r="A%d" s="1"/></row>' % (n, n)
        for n in range(9000, 1_048_577)
    )
    return with_sheet(lambda c: c.replace(b"</sheetData>", rows + b"</sheetData>"))


def a_stray_value_in_the_corner() -> bytes:
    return with_sheet(
        lambda c: c.replace(
            b"</sheetData>", b'<row r="1048576"><c r="XFD1048576"><v>1</v></c></row></sheetData>'
        )
    )


@pytest.mark.parametrize(
    "make",
    [
        absurd_dimension,
        merged_and_formatted_to_the_corner,
        formats_alone_in_every_row,
        a_stray_value_in_the_corner,
        deep,
    ],
    ids=lambda make: make.__name__,
)
def test_an_absurd_extent_is_no_burden(make: Callable[[], bytes], tmp_path: Path) -> None:
    book = tmp_path / "Vessel.xlsx"
    book.write_bytes(make())
    ended = study("check", book)
    assert ended.status == 0, ended
    assert ended.seconds < MOST_SECONDS
    assert ended.peak_mb < MOST_MB


# ---- text that another program would take for something to run

HOSTILE = (
    "=cmd|' /C calc'!A0",
    "<script>alert(1)</script>",
    '"><img src=x onerror=alert(1)>',
    "@SUM(1+1)*cmd|'x'!A0",
    '+HYPERLINK("http://example.org/","x")',
    "-2+3",
    "{{7*7}}",
    "</svg><script>alert(2)</script>",
)


def hostile_tables() -> good.Tables:
    """The good workbook with hostile names for a board, a set, loads, modes and descriptions."""
    tables = good.tables()
    spoilt = ("Pump", "MSB B", "Fan", "Winch", "Lights", "Compressor", "DG2", "Harbour")
    new = dict(zip(spoilt, HOSTILE, strict=True))

    def renamed(value: object) -> object:
        return new.get(value, value) if isinstance(value, str) else value

    def heading(text: str) -> str:
        return text.replace("Harbour", HOSTILE[7]) if text.startswith("Harbour") else text

    for sheet, rows in tables.items():
        tables[sheet] = [{heading(name): renamed(value) for name, value in row.items()} for row in rows]
    tables["Project"][0]["Value"] = HOSTILE[1]
    tables["Modes"][0]["Sets that may run together in change-over"] = None
    tables["Loads"][0]["Description"] = HOSTILE[2]
    return tables


class Tags(HTMLParser):
    """Every tag of a page with its attributes; what is inside quotes and text is neither."""

    def __init__(self) -> None:
        super().__init__()
        self.scripts: list[str] = []
        self.handlers: list[str] = []
        self._in_script = False

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self._in_script = tag == "script"
        self.handlers += [f"{tag} {name}" for name, _ in attrs if name.startswith("on")]
        self.handlers += [f"{tag} {name}" for name, value in attrs if (value or "").startswith("javascript:")]

    def handle_data(self, data: str) -> None:
        if self._in_script:
            self.scripts.append(data)
            self._in_script = False


STEERING = "_x001B_[2J_x001B_]0;owned_x0007_ \u202egnp.exe \x9b2J _xD800_half a sign Größe 发电机 💡"
"""What would steer a terminal, and what no letters exist for; it becomes the name of a mode."""


def with_macros(content: dict[str, bytes]) -> dict[str, bytes]:
    """Return the parts of a workbook with a macro project."""
    types = content["[Content_Types].xml"].replace(
        b"application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml",
        b"application/vnd.ms-excel.sheet.macroEnabled.main+xml",
    )
    types = types.replace(
        b"</Types>",
        b'<Override PartName="/xl/vbaProject.bin" '
        b'ContentType="application/vnd.ms-office.vbaProject"/></Types>',
    )
    relations = content["xl/_rels/workbook.xml.rels"].replace(
        b"</Relationships>",
        b'<Relationship Id="rIdVba" Type="http://schemas.microsoft.com/office/2006/relationships/vbaProject" '
        b'Target="vbaProject.bin"/></Relationships>',
    )
    return content | {
        "[Content_Types].xml": types,
        "xl/_rels/workbook.xml.rels": relations,
        "xl/vbaProject.bin": VBA,
    }


@dataclass(frozen=True)
class Run:
    """A run on the hostile workbook: the file, the exit status and what was printed."""

    book: Path
    status: int
    out: str
    err: str


@pytest.fixture(scope="module")
def hostile_run(tmp_path_factory: pytest.TempPathFactory) -> Run:
    """Study the workbook in which everything is hostile at once."""
    book = tmp_path_factory.mktemp("hostile") / "vessel.xlsm"
    plain = book.with_suffix(".xlsx")
    write_workbook(plain, hostile_tables())
    content = with_macros(parts(plain.read_bytes()))
    plain.unlink()
    strings = content["xl/sharedStrings.xml"]
    written = escape(STEERING).encode()
    changed = re.sub(rb"(<t[^>]*>)At sea(</t>|: )", lambda m: m[1] + written + m[2], strings)
    assert changed.count(written) > 3
    book.write_bytes(rezip(content | {"xl/sharedStrings.xml": changed}))
    out, err = (io.TextIOWrapper(io.BytesIO(), encoding="utf-8", write_through=True) for _ in range(2))
    with redirect_stdout(out), redirect_stderr(err):
        status = main(["run", str(book)])
    printed, wrong = (stream.buffer.getvalue().decode() for stream in (out, err))
    return Run(book, status, printed, wrong)


def test_hostile_names_are_studied_like_any_other(hostile_run: Run) -> None:
    assert hostile_run.status in {0, 1, 3}, hostile_run.err
    assert hostile_run.err == ""


def test_no_text_becomes_a_formula(hostile_run: Run) -> None:
    book = hostile_run.book
    found = {name: re.findall(rb"<f\b[^>]*>([^<]*)", data) for name, data in parts(book.read_bytes()).items()
             if name.startswith("xl/worksheets/")}  # fmt: skip
    assert [f for formulas in found.values() for f in formulas if b"cmd" in f or b"HYPERLINK" in f] == []
    workbook = openpyxl.load_workbook(book)
    cells = [cell for sheet in workbook for row in sheet.iter_rows() for cell in row if cell.value in HOSTILE]
    assert any(cell.value == HOSTILE[0] and cell.parent.title.startswith("R ") for cell in cells)
    # openpyxl guesses a formula from the sign at the start: what counts is the type that stands in the file.
    with zipfile.ZipFile(book) as package:
        for name in package.namelist():
            if name.startswith("xl/worksheets/sheet"):
                assert b"<f>cmd" not in package.read(name)
    assert not [
        link for sheet in workbook for link in sheet._hyperlinks if "example.org" in (link.target or "")
    ]


def test_no_text_becomes_live_in_the_page(hostile_run: Run) -> None:
    book = hostile_run.book
    page = book.with_name("vessel-report.html").read_text("utf-8")
    tags = Tags()
    tags.feed(page)
    assert tags.handlers == []
    assert not [script for script in tags.scripts if "alert" in script]
    assert "<script>alert" not in page
    assert "<img src=x" not in page
    assert "&lt;script&gt;alert(1)&lt;/script&gt;" in page
    assert "{{7*7}}" in page
    assert "http://example.org" not in re.sub(r"HYPERLINK\([^)]*\)", "", page)


def test_macros_stay_and_never_run(hostile_run: Run) -> None:
    """The bytes of the macro project are the engineer's and come back as they were."""
    assert parts(hostile_run.book.read_bytes())["xl/vbaProject.bin"] == VBA
    assert sorted(os.listdir(hostile_run.book.parent)) == [
        "vessel-report.html", "vessel-results.json", "vessel.xlsm"
    ]  # fmt: skip


def test_names_that_steer_a_terminal(hostile_run: Run) -> None:
    """The name of the mode stands in the summary with its letters, and without what would steer."""
    assert "Größe 发电机 💡" in hostile_run.out
    assert not re.search("[\x00-\x08\x0b-\x1f\x7f-\x9f\u202e\ud800-\udfff]", hostile_run.out)
    json.loads(hostile_run.book.with_name("vessel-results.json").read_text("utf-8"))
    assert "\x1b" not in hostile_run.book.with_name("vessel-report.html").read_text("utf-8")


@pytest.mark.parametrize("encoding", ["ascii", "cp1252"])
def test_a_terminal_without_the_letters(
    encoding: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    book = tmp_path / "vessel.xlsx"
    content = book_parts()
    content["xl/sharedStrings.xml"] = content["xl/sharedStrings.xml"].replace(
        b"<t>MSB</t>", "<t>Größe 发电机</t>".encode(), 1
    )
    book.write_bytes(rezip(content))
    monkeypatch.setenv("PYTHONIOENCODING", encoding)
    ended = study("check", book)
    assert ended.status in {0, 2}
    assert "Traceback" not in ended.err
    assert "vessel.xlsx" in ended.out + ended.err
