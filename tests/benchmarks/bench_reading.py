"""Time every cell of a workbook read by our reader, by openpyxl (read-only) and by python-calamine.

Run with ``python -m tests.benchmarks.bench_reading``. Ratios are what counts: machines differ. The peers do
not give the same: python-calamine takes errors and formulas without a value for blanks, and openpyxl needs
two passes for values and formulas (tests/workbook/test_reader_choice.py). That all three find the same number
of cells with a value is checked here.
"""

from __future__ import annotations

import io
import tempfile
import time
import warnings
from collections.abc import Callable
from pathlib import Path

import openpyxl
import python_calamine

from study.workbook.package.opc import package_from_bytes
from study.workbook.reader import is_result, read_package
from tests.benchmarks.made_workbooks import SIZES, write_made

LARGE_DEMO = Path(__file__).parents[2] / "workbooks" / "large-vessel.xlsx"
REPEATS = 3


def ours(data: bytes) -> int:
    """Return the number of cells that hold something; the file is checked before it is read."""
    book = read_package(package_from_bytes(data), "book.xlsx")
    return sum(len(cells) for sheet in book.sheets for cells in sheet.read().values())


def by_calamine(data: bytes) -> int:
    """Return the number of cells with a value."""
    book = python_calamine.CalamineWorkbook.from_filelike(io.BytesIO(data))
    return sum(
        cell != ""
        for name in book.sheet_names
        if not is_result(name)
        for row in book.get_sheet_by_name(name).to_python()
        for cell in row
    )


def by_openpyxl(data: bytes, *, values: bool = True) -> int:
    """Return the number of cells with a value, in one pass."""
    book = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=values)
    count = 0
    for sheet in book.worksheets:
        if not is_result(sheet.title):
            sheet.reset_dimensions()
            count += sum(cell.value is not None for row in sheet.iter_rows() for cell in row)
    return count


def by_openpyxl_twice(data: bytes) -> int:
    """Return the number of cells with a value, of a pass for values and a pass for formulas."""
    by_openpyxl(data, values=False)
    return by_openpyxl(data)


READERS: dict[str, Callable[[bytes], int]] = {
    "ours": ours,
    "python-calamine": by_calamine,
    "openpyxl, values": by_openpyxl,
    "openpyxl, values and formulas": by_openpyxl_twice,
}


def measure(name: str, data: bytes) -> None:
    """Print seconds and ratios for one workbook."""
    seconds, cells = {}, set()
    for reader, read in READERS.items():
        best = float("inf")
        for _ in range(REPEATS):
            start = time.process_time()
            cells.add(read(data))
            best = min(best, time.process_time() - start)
        seconds[reader] = best
    if len(cells) != 1:
        raise AssertionError(f"the readers do not find the same cells in {name}: {cells}")
    print(f"\n{name}: {len(data) / 1e6:.2f} MB, {cells.pop()} cells")
    for reader, second in seconds.items():
        print(f"  {reader:30} {second:7.2f} s   {second / seconds['ours']:5.2f} x ours")


def main() -> None:
    """Measure the large demonstration vessel and the made-up workbooks."""
    warnings.simplefilter("ignore")
    measure(LARGE_DEMO.stem, LARGE_DEMO.read_bytes())
    with tempfile.TemporaryDirectory() as folder:
        for size in SIZES:
            path = Path(folder) / "made.xlsx"
            write_made(path, size)
            measure(f"{size.loads} loads, {size.boards} boards, {size.modes} modes", path.read_bytes())


if __name__ == "__main__":
    main()
