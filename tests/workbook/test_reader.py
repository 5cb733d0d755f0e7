"""The cells of hand-written worksheet parts: addresses, values, formulas, formats, and what is refused.

What a cell of each type holds: ECMA-376-1, clauses 18.3.1.4, 18.3.1.40 and 18.18.11, from memory.
"""

from __future__ import annotations

import time
from collections.abc import Mapping
from datetime import datetime
from pathlib import Path
from typing import Any

import pytest
import xlsxwriter

from study.issues import PackageError
from study.workbook.package.opc import package_from_bytes
from study.workbook.reader import RawBook, read_package
from study.workbook.result_formulas import dependent_formulas, shifted
from study.workbook.sheet_xml import ErrorValue, NoStoredValue, Percent, ResultFormula
from tests.workbook.sheet_samples import MAIN, package


def _read(sheets: dict[str, str], **more: Any) -> RawBook:
    return read_package(package_from_bytes(package(sheets, **more)), "book.xlsx")


def _cells(content: str, **more: Any) -> dict[int, dict[int, Any]]:
    return {number: dict(row) for number, row in _read({"Loads": content}, **more).sheets[0].read().items()}


def _one(content: str, **more: Any) -> Any:
    return _cells(f'<row r="1">{content}</row>', **more)[1][1]


def test_addresses_with_gaps() -> None:
    cells = _cells(
        '<row r="3"><c r="B3"><v>1</v></c><c r="AA3"><v>2</v></c></row>'
        '<row r="7"><c r="A7"><v>3</v></c></row>'
    )
    assert cells == {3: {2: 1.0, 27: 2.0}, 7: {1: 3.0}}


def test_cells_without_addresses_count_on() -> None:
    cells = _cells(
        '<row><c><v>1</v></c><c/><c><v>2</v></c></row><row><c r="C2"><v>3</v></c><c><v>4</v></c></row>'
    )
    assert cells == {1: {1: 1.0, 3: 2.0}, 2: {3: 3.0, 4: 4.0}}


def test_a_prefix_of_the_namespace() -> None:
    row = '<x:row r="1"><x:c r="A1"><x:v>5</x:v></x:c></x:row>'
    content = f'<x:worksheet xmlns:x="{MAIN}"><x:sheetData>{row}</x:sheetData></x:worksheet>'
    assert _cells(content) == {1: {1: 5.0}}


def test_a_part_in_utf_16() -> None:
    text = (
        f'<?xml version="1.0" encoding="UTF-16"?><worksheet xmlns="{MAIN}"><sheetData><row r="1">'
        '<c r="A1" t="inlineStr"><is><t>Größe</t></is></c></row></sheetData></worksheet>'
    )
    data = package({"Loads": "<row/>"})
    from tests.workbook.package.samples import parts, rezip

    content = parts(data) | {"xl/worksheets/sheet1.xml": text.encode("utf-16")}
    book = read_package(package_from_bytes(rezip(content)), "book.xlsx")
    assert book.sheets[0].read() == {1: {1: "Größe"}}


@pytest.mark.parametrize(
    ("content", "value"),
    [
        ('<c r="A1"><v>12.5</v></c>', 12.5),
        ('<c r="A1" t="n"><v>1E-3</v></c>', 0.001),
        ('<c r="A1" t="b"><v>1</v></c>', True),
        ('<c r="A1" t="b"><v>0</v></c>', False),
        ('<c r="A1" t="str"><f>"a"</f><v>a</v></c>', "a"),
        ('<c r="A1" t="e"><v>#DIV/0!</v></c>', ErrorValue("#DIV/0!")),
        ('<c r="A1" t="e"><f>1/0</f><v>#DIV/0!</v></c>', ErrorValue("#DIV/0!")),
        ('<c r="A1"><f>2*3</f><v>6</v></c>', 6.0),
        ('<c r="A1"><f>2*3</f></c>', NoStoredValue("2*3")),
        ('<c r="A1"><f>2*3</f><v></v></c>', NoStoredValue("2*3")),
        ('<c r="A1"><f>2*3</f><v/></c>', NoStoredValue("2*3")),
        ('<c r="A1" s="1"><v>0.04</v></c>', Percent(0.04)),
        ('<c r="A1" s="4"><v>0.04</v></c>', Percent(0.04)),
        ('<c r="A1" s="2"><v>45730</v></c>', datetime(2025, 3, 14)),
        ('<c r="A1" s="3"><v>45730.5</v></c>', datetime(2025, 3, 14, 12)),
        ('<c r="A1" t="d"><v>2025-03-14T00:00:00Z</v></c>', datetime(2025, 3, 14)),
        ('<c r="A1" s="99"><v>1</v></c>', 1.0),
        ('<c r="A1" t="inlineStr"><is><t>a</t></is></c>', "a"),
        ('<c r="A1" t="inlineStr"><is><r><t>a</t></r><r><t xml:space="preserve"> b</t></r></is></c>', "a b"),
        ('<c r="A1" t="str"><v>a_x000A_b_x0041</v></c>', "a\nb_x0041"),
    ],
)
def test_value_of_a_cell(content: str, value: Any) -> None:
    read = _one(content)
    assert read == value
    assert type(read) is type(value)


@pytest.mark.parametrize(
    "content",
    [
        '<c r="A1" s="1"/>',
        '<c r="A1"/>',
        '<c r="A1" t="str"><f>IF(1,"")</f><v></v></c>',
        '<c r="A1"><v></v></c>',
    ],
)
def test_cells_that_hold_nothing(content: str) -> None:
    assert _cells(f'<row r="1">{content}</row>') == {}


def test_serial_dates_from_1904() -> None:
    # 14 March 2025 is 44268 days after 1 January 1904, which that system counts from.
    assert _one('<c r="A1" s="2"><v>44268</v></c>', properties='<workbookPr date1904="1"/>') == datetime(
        2025, 3, 14
    )


def test_shared_texts_without_their_formatting_and_readings() -> None:
    runs = "<r><rPr><b/></rPr><t>DG</t></r><r><t> 1</t></r><rPh sb='0' eb='1'><t>x</t></rPh>"
    strings = f"<si><t>plain</t></si><si>{runs}</si>"
    assert _one('<c r="A1" t="s"><v>1</v></c>', strings=strings) == "DG 1"


def test_a_shared_text_that_is_not_there() -> None:
    with pytest.raises(PackageError, match="shared text"):
        _one('<c r="A1" t="s"><v>5</v></c>')


def test_a_shared_formula_is_one_formula() -> None:
    content = (
        '<row r="1"><c r="A1"><f t="shared" ref="A1:A2" si="0">\'R Cables\'!B1</f><v>1</v></c></row>'
        '<row r="2"><c r="A2"><f t="shared" si="0"/><v>2</v></c></row>'
    )
    cells = _cells(content)
    assert type(cells[1][1]) is type(cells[2][1]) is ResultFormula


def test_a_formula_that_is_filled_down_refers_to_its_own_row() -> None:
    """Only the first row of the second column reads a result; the file holds the text of its formula once."""
    content = (
        '<row r="1"><c r="A1"><f>\'R Cables\'!B1</f><v>1</v></c>'
        '<c r="B1"><f t="shared" ref="B1:B3" si="0">2*A1</f><v>2</v></c></row>'
        '<row r="2"><c r="A2"><v>1</v></c><c r="B2"><f t="shared" si="0"/><v>2</v></c></row>'
        '<row r="3"><c r="A3"><f>\'R Cables\'!B3</f><v>1</v></c>'
        '<c r="B3"><f t="shared" si="0"/><v>2</v></c></row>'
    )
    cells = _cells(content)
    assert [type(cells[row][2]) for row in (1, 2, 3)] == [ResultFormula, float, ResultFormula]


@pytest.mark.parametrize(
    ("formula", "rows", "columns"),
    [
        ("A1+$A1+A$1+$A$1", 3, 2),
        ("SUM(B2:C9)*Cables!D4", 5, 0),
        ("SUM('R It''s'!A:C)+SUM(2:3)", 4, 1),
        ('IF(A1="A1",LOG10(B2),Rating)', 1, 1),
        ("AZ9+XFC1+Rating_2", 1, 1),
    ],
)
def test_filled_formulas_read_as_openpyxl_translates_them(formula: str, rows: int, columns: int) -> None:
    from openpyxl.formula.translate import Translator

    target = f"{chr(ord('F') + columns)}{50 + rows}"
    wanted = Translator(f"={formula}", origin="F50").translate_formula(target)
    assert f"={shifted(formula, rows, columns)}" == wanted


@pytest.mark.parametrize(
    "formula",
    [
        "'R Load flow'!B2",
        "1+'r summary'!$B$2",
        "SUM('R Load flow'!A:A)",
        "SUM('R It''s'!A:A)",
        "'[1]R Load flow'!B2",
        "Own!A1",
        "SUM(Own!A1:B2)",
        "SUM(Own!A:C)",
        "SUM(Own!1:3)",
        "Bus_volts",
        "2*BUS_VOLTS+1",
    ],
)
def test_a_formula_that_depends_on_a_result(formula: str) -> None:
    own = '<row r="1"><c r="A1"><f>\'R Load flow\'!B2</f><v>1</v></c></row>'
    names = "<definedNames><definedName name=\"Bus_volts\">'R Load flow'!$B$2</definedName></definedNames>"
    loads = f'<row r="1"><c r="A1"><f>{formula}</f><v>1</v></c></row>'
    book = _read({"Loads": loads, "Own": own, "R Load flow": "<row/>"}, names=names)
    assert type(book.sheets[0].read()[1][1]) is ResultFormula


@pytest.mark.parametrize(
    "formula",
    [
        "Own!B1",
        "Own!A2",
        "SUM(Own!B:C)",
        '"Own!A1"',
        "Bus_voltage",
        "Bus_volts2",
        "LOG10(Loads!C5)",
        "Rating!A1",
    ],
)
def test_a_formula_that_does_not(formula: str) -> None:
    own = '<row r="1"><c r="A1"><f>\'R Load flow\'!B2</f><v>1</v></c></row>'
    names = (
        "<definedNames><definedName name=\"Bus_volts\">'R Load flow'!$B$2</definedName>"
        '<definedName name="Bus_voltage">450</definedName></definedNames>'
    )
    loads = f'<row r="1"><c r="A1"><f>{formula.replace(chr(34), "&quot;")}</f><v>1</v></c></row>'
    book = _read({"Loads": loads, "Own": own, "R Load flow": "<row/>"}, names=names)
    assert book.sheets[0].read() == {1: {1: 1.0}}


def test_dependence_over_several_steps() -> None:
    steps = "".join(
        f'<row r="{n}"><c r="A{n}"><f>{formula}</f><v>1</v></c></row>'
        for n, formula in enumerate(("'R Cables'!A1", "A1", "A2*2", "B9"), 1)
    )
    read = _read({"Loads": steps, "R Cables": "<row/>"}).sheets[0].read()
    assert [type(read[n][1]) for n in (1, 2, 3, 4)] == [ResultFormula, ResultFormula, ResultFormula, float]


@pytest.mark.parametrize("formula", ["A{before}+1", "SUM(A$1:A{before})", "SUM(A{before}:Z{before})"])
def test_long_chains_take_time_in_proportion(formula: str) -> None:
    chain = {("own", 1, 1): "'R Cables'!A1"}
    chain |= {("own", row, 1): formula.format(before=row - 1) for row in range(2, 3001)}
    apart = {("own", row, 9): f"SUM(K$1:K{row})" for row in range(1, 3001)}
    start = time.process_time()
    assert dependent_formulas(chain | apart, {}) == set(chain)
    assert time.process_time() - start < 5.0


def test_ranges_over_too_many_steps_are_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("study.workbook.result_formulas.MOST_STEPS", 1000)
    chain = {("own", 1, 1): "'R Cables'!A1"}
    chain |= {("own", row, 1): f"SUM(A{row - 1}:CA{row - 1})" for row in range(2, 200)}
    with pytest.raises(PackageError, match="more steps than are followed"):
        dependent_formulas(chain, {})


def _with_tables(formula: str, path: Path, names: Mapping[str, str] | None = None) -> type:
    """Return what the reader makes of a formula beside a table of results and one of the engineer's.

    In the second one, column b takes its value of row 3 from a result sheet.
    """
    with xlsxwriter.Workbook(path) as book:
        loads, own, result = (book.add_worksheet(name) for name in ("Loads", "Own", "R Cables"))
        result.add_table("B3:C5", {"name": "R_cables", "columns": [{"header": "Cable"}, {"header": "A [A]"}]})
        own.add_table("A1:C4", {"name": "Mine", "columns": [{"header": h} for h in ("a", "b", "c [#]")]})
        own.write_formula("B3", "='R Cables'!C4", None, 7)
        own.write_formula("C2", formula if "@" in formula or "This Row" in formula else "=1", None, 7)
        loads.write_formula("A1", formula, None, 7)
        for name, value in (names or {}).items():
            book.define_name(name, value)
    sheets = read_package(package_from_bytes(path.read_bytes()), path.name).sheets
    cells = {(sheet.name, row, column): value for sheet in sheets for row, line in sheet.read().items()
             for column, value in line.items()}  # fmt: skip
    return type(cells["Own", 2, 3] if "This Row" in formula else cells["Loads", 1, 1])


@pytest.mark.parametrize(
    ("formula", "kind"),
    [
        ("=SUM(R_cables[A '[A']])", ResultFormula),
        ("=INDEX(r_CABLES[[#All],[Cable]],2)", ResultFormula),
        ("=ROWS(R_cables[])", ResultFormula),
        ("=SUM(Mine[b])", ResultFormula),
        ("=SUM(Mine[[a]:[c '['#']]])", ResultFormula),
        ("=SUM(Mine[])", ResultFormula),
        ("=SUM(Mine[a])", float),
        ("=SUM(Mine[c '['#']])", float),
        ("=SUM(Yours[b])", float),
        ('="R_cables[Cable]"', float),
        ("=SUM(Mine[[#This Row],[b]])", float),
        ("=SUM(Mine[[#This Row],[a]])", float),
    ],
)
def test_dependence_by_table_name(formula: str, kind: type, tmp_path: Path) -> None:
    assert _with_tables(formula, tmp_path / "book.xlsx") is kind


def test_dependence_by_a_name_for_a_column(tmp_path: Path) -> None:
    names = {"Result_amperes": "=R_cables[A '[A']]", "Own_a": "=Mine[a]"}
    assert _with_tables("=SUM(Result_amperes)", tmp_path / "one.xlsx", names) is ResultFormula
    assert _with_tables("=SUM(Own_a)", tmp_path / "two.xlsx", names) is float


def test_result_sheets_are_not_listed() -> None:
    book = _read({"Loads": "<row/>", "R Summary": "<row/>", "r cables": "<row/>", "Running": "<row/>"})
    assert [sheet.name for sheet in book.sheets] == ["Loads", "Running"]


def test_the_last_cell_of_a_sheet_is_no_burden() -> None:
    rows = '<row r="1"><c r="A1"><v>1</v></c></row><row r="1048576"><c r="XFD1048576"><v>2</v></c></row>'
    assert _cells(rows) == {1: {1: 1.0}, 1048576: {16384: 2.0}}


def test_many_formatted_empty_rows_are_no_burden() -> None:
    rows = "".join(f'<row r="{n}" s="1"><c r="A{n}" s="1"/></row>' for n in range(1, 20_001))
    assert _cells(rows) == {}


@pytest.mark.parametrize(
    "content",
    [
        '<row r="1"><c r="ZZZ1"><v>1</v></c></row>',
        '<row r="9999999"><c r="A9999999"><v>1</v></c></row>',
        '<row r="1"><c r="?1"><v>1</v></c></row>',
    ],
)
def test_an_address_that_no_sheet_has(content: str) -> None:
    with pytest.raises(PackageError, match="damaged"):
        _cells(content)


def test_xml_that_breaks_off() -> None:
    with pytest.raises(PackageError, match="damaged"):
        _cells(f'<worksheet xmlns="{MAIN}"><sheetData><row r="1"><c r="A1">')


@pytest.mark.parametrize("style", ["-1", "s", "", "1.0", "²", "99999999999999999999"])
def test_a_style_that_is_no_number(style: str) -> None:
    """A style counted from the end would show a plain number as a percentage."""
    with pytest.raises(PackageError, match="style"):
        _one(f'<c r="A1" s="{style}"><v>1</v></c>')


@pytest.mark.parametrize("text", ["1_000", "１２", "0x10", "1,5", "12 kW"])
def test_what_no_spreadsheet_takes_for_a_number_stays_text(text: str) -> None:
    assert _one(f'<c r="A1"><v>{text}</v></c>') == text
