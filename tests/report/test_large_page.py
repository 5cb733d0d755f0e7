"""The page of a study of 60 boards, 500 loads and 10 modes: small to send, and nothing runs over."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from study.report.catalogue import all_tables
from tests.report import drawn, test_page


@pytest.fixture(scope="module")
def large() -> drawn.Drawn:
    return drawn.large_with_faults()


def test_page_stays_small(large: drawn.Drawn) -> None:
    assert len(large.page.encode()) < 5_000_000


def test_page_shortens_places_and_sheet_holds_all(large: drawn.Drawn) -> None:
    faults = large.outcome.short_circuit
    assert faults is not None
    table = all_tables(large.outcome)["short_circuit_places"]
    others = np.array([kind != "board" for kind in faults.places.kinds])
    assert table.n_rows == sum(int((m.maximum.live & others).sum()) for m in faults.modes)
    part = large.page[large.page.index('id="table-short-circuit-places"') :]
    shown = part[: part.index("</table>")].count("<tr")
    assert shown < 200
    assert f"all {table.n_rows} rows are on sheet R Short-circuit" in part


@pytest.mark.skipif(test_page.BROWSER is None, reason="no Chromium on this machine; CI installs one")
@pytest.mark.parametrize("width", [1280, 520])
def test_nothing_runs_over_and_no_words_overlap(large: drawn.Drawn, width: int, tmp_path: Path) -> None:
    page = tmp_path / "large.html"
    page.write_text(large.page + test_page.MEASURE, encoding="utf-8")
    test_page.measure(page, width, tmp_path)
