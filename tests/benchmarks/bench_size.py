"""Seconds and peak memory by the size of the workbook, and how they grow with it.

Run with ``python -m tests.benchmarks.bench_size [--study]``. Each size is measured in a process of its own,
in seconds of the processor. Without ``--study`` the workbooks are read and checked, and result sheets in
proportion are put into them; with it the whole study is done and its own result sheets, report and JSON are
written, which takes minutes at 5 000 loads. The exponent is that of a power law between neighbouring sizes:
1 is in proportion.
"""

from __future__ import annotations

import json
import math
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from itertools import pairwise
from pathlib import Path
from typing import Any

import xlsxwriter

from tests.benchmarks.made_workbooks import SIZES, Size, write_made
from tests.workbook.limited import ROOT, peak_kilobytes

RESULT_ROWS_PER_LOAD = 24
RESULT_COLUMNS = 20
Measured = dict[str, float]


def measure(book: Path, results: Path) -> Measured:
    """Return seconds of each step, and the peak after it, for reading, checking and putting sheets in."""
    from study.network.network import build_network
    from study.workbook import check_workbook
    from study.workbook.package import graft_result_sheets, write_atomically

    clock = _Clock()
    plant = clock("read and check", lambda: check_workbook(book)[0])
    if plant is None:
        raise AssertionError("the made-up workbook is at fault")
    clock("network", lambda: build_network(plant))
    data, extra = book.read_bytes(), results.read_bytes()
    joined = clock("put the result sheets in", lambda: graft_result_sheets(data, extra))
    again = clock("the same on the next run", lambda: graft_result_sheets(joined, extra))
    if again != joined:
        raise AssertionError("the second run gives another file")
    clock("write", lambda: write_atomically(book.with_suffix(".out.xlsx"), joined))
    return clock.measured


def measure_study(book: Path, results: Path) -> Measured:
    """Return seconds of each step, and the peak after it, for a whole run."""
    from study.pipeline import run_study
    from study.report.catalogue import all_tables
    from study.report.excel import result_workbook
    from study.report.html import report_page
    from study.report.json_out import json_text
    from study.workbook.package import graft_result_sheets

    clock = _Clock()
    outcome = clock("study", lambda: run_study(book))
    tables = clock("tables", lambda: all_tables(outcome))
    extra = clock("result sheets", lambda: result_workbook(outcome, tables))
    clock("put the result sheets in", lambda: graft_result_sheets(book.read_bytes(), extra))
    clock("report", lambda: report_page(outcome, tables))
    clock("JSON", lambda: json_text(outcome, tables))
    return clock.measured


class _Clock:
    """Takes the time and the memory of one step after the other."""

    def __init__(self) -> None:
        self.measured: Measured = {}

    def __call__(self, step: str, do: Callable[[], Any]) -> Any:
        start = time.process_time()
        made = do()
        self.measured[f"{step} [s]"] = time.process_time() - start
        self.measured["peak [MB]"] = peak_kilobytes() / 1024
        return made


def write_results(path: Path, size: Size) -> None:
    """Write result sheets as large as those of a study: a table of modes and loads on each of two."""
    with xlsxwriter.Workbook(path, {"constant_memory": True}) as book:
        form = book.add_format({"num_format": "0.00"})
        for name in ("R Load flow", "R Short-circuit"):
            sheet = book.add_worksheet(name)
            for row in range(size.loads * RESULT_ROWS_PER_LOAD // 2):
                sheet.write_row(
                    row, 0, [f"made up {row % 97}", *(row + k / 7 for k in range(RESULT_COLUMNS))], form
                )


def in_a_process(size: Size, book: Path, results: Path, how: str) -> Measured:
    """Measure in a process of its own, so that the peak is that of this size."""
    done = subprocess.run(
        [sys.executable, "-m", "tests.benchmarks.bench_size", how, str(book), str(results)],
        cwd=ROOT, capture_output=True, text=True, check=True,
    )  # fmt: skip
    measured: Measured = json.loads(done.stdout)
    return {"loads": size.loads} | measured


def print_table(rows: list[Measured]) -> None:
    """Print one line for each step: its figure at each size and the exponents between."""
    print(
        f"{'':32}" + "".join(f"{row['loads']:>10.0f}" for row in rows) + "   growth with the number of loads"
    )
    for step in rows[0]:
        if step == "loads":
            continue
        figures = [row[step] for row in rows]
        growth = [
            math.log(later[step] / first[step]) / math.log(later["loads"] / first["loads"])
            for first, later in pairwise(rows)
        ]
        print(
            f"{step:32}"
            + "".join(f"{f:10.2f}" for f in figures)
            + "   "
            + ", ".join(f"{g:.2f}" for g in growth)
        )


def main() -> None:
    """Measure every size, or one where the words say so."""
    words = sys.argv[1:]
    if len(words) == 3:
        step = measure_study if words[0] == "--study" else measure
        print(json.dumps(step(Path(words[1]), Path(words[2]))))
        return
    how = "--study" if "--study" in words else "--sheets"
    rows = []
    with tempfile.TemporaryDirectory() as folder:
        for size in SIZES:
            book, results = Path(folder) / f"made{size.loads}.xlsx", Path(folder) / "results.xlsx"
            write_made(book, size)
            write_results(results, size)
            rows.append(in_a_process(size, book, results, how))
            print(f"{size.loads} loads, {size.boards} boards, {size.modes} modes measured", flush=True)
    print_table(rows)


if __name__ == "__main__":
    main()
