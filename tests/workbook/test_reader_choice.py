"""Why the cells are read by code of our own, and that it reads what a well-kept library reads.

python-calamine is the fastest reader and loses what must not be lost. openpyxl loses nothing when it reads
a file twice; it is the reference here, and is not used because of what it refuses and how. Each reason is a
test, so that a version which does better makes itself known.
"""

from __future__ import annotations

import contextlib
import io
import random
import subprocess
import sys
import textwrap
import warnings
from collections.abc import Iterator
from datetime import datetime
from pathlib import Path
from typing import Any

import openpyxl
import pytest
import python_calamine

from study.issues import PackageError
from study.workbook.package.opc import package_from_bytes
from study.workbook.reader import code_kind, is_result, read_package
from study.workbook.sheet_xml import ErrorValue, NoStoredValue, Percent, ResultFormula
from tests.faulty_workbooks.grids import good_grids, write
from tests.workbook.package.samples import parts, rezip
from tests.workbook.sheet_samples import package

ROOT = Path(__file__).parents[2]
DEMOS = sorted((ROOT / "workbooks").glob("*.xlsx"))
Cells = dict[tuple[str, int, int], Any]


def ours(data: bytes) -> Cells:
    book = read_package(package_from_bytes(data), "book.xlsx")
    return {
        (sheet.name, row, column): value
        for sheet in book.sheets
        for row, cells in sheet.read().items()
        for column, value in cells.items()
    }


def by_openpyxl(data: bytes) -> Cells:
    """Read stored values and formulas, each in a pass of its own, since openpyxl gives one or the other."""
    cells: Cells = {}
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        values = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=True)
        formulas = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=False)
        for sheet in values.worksheets:
            if not is_result(sheet.title):
                for place, value in _pairs(sheet, formulas[sheet.title]):
                    cells[sheet.title, *place] = value
        values.close()
        formulas.close()
    return cells


def _pairs(values: Any, formulas: Any) -> Iterator[tuple[tuple[int, int], Any]]:
    values.reset_dimensions()
    formulas.reset_dimensions()
    for value_row, formula_row in zip(values.iter_rows(), formulas.iter_rows(), strict=True):
        for value, formula in zip(value_row, formula_row, strict=True):
            if formula.value is not None:
                yield (formula.row, formula.column), _as_we_say(value, formula)


def _as_we_say(value: Any, formula: Any) -> Any:
    if formula.data_type == "f" and value.value is None:
        return NoStoredValue(formula.value.removeprefix("="))
    if value.data_type == "e":
        return ErrorValue(value.value)
    if type(value.value) is int or type(value.value) is float:
        number = float(value.value)
        return Percent(number) if code_kind(value.number_format) == "percent" else number
    return value.value


@pytest.mark.parametrize("demo", DEMOS, ids=lambda path: path.stem)
def test_every_cell_of_the_demonstrations_is_read_as_openpyxl_reads_it(demo: Path) -> None:
    data = demo.read_bytes()
    own, other = ours(data), by_openpyxl(data)
    assert own == other
    assert [type(value) for value in own.values()] == [type(other[place]) for place in own]


def test_every_kind_of_cell_is_read_as_openpyxl_reads_it(tmp_path: Path) -> None:
    values: list[Any] = [
        1.5, -2.0, 1e-9, 7.0, "text", "=text", " ", "a\nb", "Größe", True, False, datetime(2025, 3, 14),
        Percent(0.04), ErrorValue("#DIV/0!"), ErrorValue("#N/A"), NoStoredValue("A1+1"), "007", "1,5",
    ]  # fmt: skip
    grids = good_grids()
    for row, value in enumerate(values):
        if row == len(grids["Loads"].rows):
            grids["Loads"].rows.append([None] * len(grids["Loads"].headings))
        grids["Loads"].put(row, "Description", value)
    path = tmp_path / "kinds.xlsx"
    write(grids, path)
    own, other = ours(path.read_bytes()), by_openpyxl(path.read_bytes())
    assert own == other
    column = grids["Loads"].column("Description") + 1
    assert [own["Loads", 5 + row, column] for row in range(len(values))] == values


def by_calamine(content: str) -> list[list[Any]]:
    data = package({"Loads": f'<row r="1">{content}</row>'})
    book = python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(data))
    return book.get_sheet_by_name("Loads").to_python()


@pytest.mark.parametrize(
    ("content", "own"),
    [
        ('<c r="B1" t="e"><v>#DIV/0!</v></c>', ErrorValue("#DIV/0!")),
        ('<c r="B1" t="e"><f>NA()</f><v>#N/A</v></c>', ErrorValue("#N/A")),
        ('<c r="B1"><f>2*3</f></c>', NoStoredValue("2*3")),
    ],
)
def test_calamine_takes_errors_and_uncalculated_formulas_for_blanks(content: str, own: Any) -> None:
    """A blank stands for a typical value: an error read as blank becomes a wrong number that looks right."""
    around = '<c r="A1"><v>1</v></c>{}<c r="C1"><v>1</v></c>'
    assert by_calamine(around.format(content)) == by_calamine(around.format("")) == [[1.0, "", 1.0]]
    read = ours(package({"Loads": f'<row r="1">{around.format(content)}</row>'}))["Loads", 1, 2]
    assert read == own
    assert type(read) is type(own)


def test_calamine_does_not_tell_four_per_cent_from_a_fraction() -> None:
    assert by_calamine('<c r="A1" s="1"><v>0.04</v></c>') == by_calamine('<c r="A1"><v>0.04</v></c>')
    assert type(
        ours(package({"Loads": '<row r="1"><c r="A1" s="1"><v>0.04</v></c></row>'}))["Loads", 1, 1]
    ) is (Percent)


def test_calamine_does_not_tell_a_number_from_one_taken_from_a_result_sheet() -> None:
    taken = "<c r=\"A1\"><f>'R Cables'!B2</f><v>7</v></c>"
    assert by_calamine(taken) == [[7.0]]
    data = package({"Loads": f'<row r="1">{taken}</row>', "R Cables": "<row/>"})
    assert type(ours(data)["Loads", 1, 1]) is ResultFormula


@pytest.mark.skipif(sys.platform == "win32", reason="the limit on memory is a POSIX matter")
def test_calamine_dies_of_a_stray_cell() -> None:
    """It keeps a rectangle: two cells in the corners of a sheet ask for 550 GB, and the process dies."""
    program = """
        import io, resource
        resource.setrlimit(resource.RLIMIT_AS, (4 * 2**30, 4 * 2**30))
        resource.setrlimit(resource.RLIMIT_CORE, (0, 0))
        import python_calamine
        from tests.workbook.sheet_samples import package
        rows = '<row r="1"><c r="A1"><v>1</v></c></row><row r="1048576"><c r="XFD1048576"><v>2</v></c></row>'
        book = python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(package({"Loads": rows})))
        try:
            book.get_sheet_by_name("Loads")
        except Exception:
            raise SystemExit(7)
    """
    done = subprocess.run(
        [sys.executable, "-c", textwrap.dedent(program)],
        cwd=ROOT,
        check=False,
        capture_output=True,
        timeout=60,
    )
    assert done.returncode < 0
    assert b"memory allocation" in done.stderr


@pytest.mark.parametrize(
    ("part", "old", "new"),
    [
        ("xl/styles.xml", b'rgb="FFFFFFFF"', b'rgb="#FFFFFF"'),
        ("xl/styles.xml", b'<family val="2"/>', b'<family val="34"/>'),
        ("xl/styles.xml", b'vertical="center"', b'vertical="middle"'),
        ("docProps/core.xml", b"2000-01-01T00:00:00Z", b"1 January 2000"),
        ("xl/workbook.xml", b"<bookViews>", b'<bookViews><workbookView visibility="maximized"/>'),
    ],
    ids=["colour", "font", "alignment", "date of the file", "window"],
)
def test_openpyxl_refuses_a_workbook_for_its_looks(part: str, old: bytes, new: bytes) -> None:
    """Parts that no cell depends on must not keep an engineer from the study."""
    content = parts(DEMOS[-1].read_bytes())
    assert old in content[part]
    data = rezip(content | {part: content[part].replace(old, new)})
    with pytest.raises(ValueError, match="Unable to read workbook"):
        by_openpyxl(data)
    assert ours(data) == ours(DEMOS[-1].read_bytes())


def test_openpyxl_ends_in_errors_of_every_kind_on_damaged_files() -> None:
    """Nothing short of catching everything would turn these into a sentence. Seeded."""
    content = parts(
        package({"Loads": '<row r="1"><c r="A1" t="s" s="2"><v>0</v></c></row>'}, strings="<si><t>x</t></si>")
    )
    names = [name for name in content if name.startswith("xl/") or name.startswith("[")]
    dice = random.Random(11)
    kinds: set[str] = set()
    for _ in range(400):
        name = dice.choice(names)
        changed = bytearray(content[name])
        at = dice.randrange(len(changed))
        changed[at : at + dice.randrange(8)] = dice.randbytes(dice.randrange(3))
        data = rezip(content | {name: bytes(changed)})
        try:
            by_openpyxl(data)
        except Exception as error:
            kinds.add(type(error).__name__)
        with contextlib.suppress(PackageError):
            ours(data)
    assert len(kinds) > 3, kinds
