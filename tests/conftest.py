"""Put the folder above on the path, so that every test finds `study` and `tests.plants`; order the files.

Each file is one piece of work for one process (`--dist loadfile`), so that what a file works out once is not
worked out in two processes. The files that take longest come first, so that no process waits at the end.
"""

from __future__ import annotations

import gc
from pathlib import Path

import pytest

SLOWEST_FIRST = (
    "tests/golden/test_demo_end_to_end.py",
    # pages need nothing that is compiled, so that a fresh copy compiles in one process while these are drawn
    "tests/report/test_large_page.py",
    "tests/report/test_page.py",
    "tests/report/test_html.py",
    "tests/report/test_short_circuit_report.py",
    "tests/workbook/test_office_suite.py",
    "tests/workbook/test_hostile.py",
    "tests/workbook/test_in_place.py",
    "tests/agreement/test_drawn_plants.py",
    "tests/workbook/package/test_other_programs.py",
    "tests/agreement/test_short_circuit_drawn_plants.py",
    "tests/analyses/test_load_flow.py",
    "tests/workbook/test_reader_choice.py",
    "tests/faulty_workbooks/test_files.py",
    "tests/analyses/test_sharing_margins.py",
    "tests/workbook/package/test_open.py",
    "tests/workbook/package/test_rerun.py",
    "tests/agreement/test_short_circuit_pandapower.py",
)


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    """Sort by file; tests of one file stay in their order."""
    place = {config.rootpath / name: rank for rank, name in enumerate(SLOWEST_FIRST)}
    items.sort(key=lambda item: place.get(Path(item.path), len(place)))


def pytest_collection_finish() -> None:
    """Let the collector of cycles look less often: the default costs a fifth of the time of a large page."""
    gc.freeze()
    gc.set_threshold(20_000, 10, 10)
