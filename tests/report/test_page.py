"""The page in a browser: nothing runs over, no text of a figure lies on another, print has its pages."""

from __future__ import annotations

import json
import re
import shutil
import subprocess
from pathlib import Path

import pytest

from tests.report import drawn, made_up

BROWSER = next(filter(None, map(shutil.which, ("chromium", "chromium-browser", "google-chrome"))), None)
pytestmark = pytest.mark.skipif(BROWSER is None, reason="no Chromium on this machine; CI installs one")

# Reports what is wider than the window outside a scrolling box, and figure texts that overlap or leave.
MEASURE = """
<script>
addEventListener("load", function () {
  var found = {over: [], overlaps: [], left: []};
  found.width = innerWidth;
  found.page = document.documentElement.scrollWidth;
  document.querySelectorAll("main *").forEach(function (e) {
    if (e.closest(".scroll, .plot, svg, details:not([open])")) { return; }
    if (e.getBoundingClientRect().right > innerWidth + 1) { found.over.push(e.tagName + " " + e.className); }
  });
  document.querySelectorAll(".plot svg").forEach(function (svg) {
    var box = svg.getBoundingClientRect();
    var texts = Array.from(svg.querySelectorAll("text"), function (t) {
      return {words: t.textContent, box: t.getBoundingClientRect()};
    });
    texts.forEach(function (a, i) {
      if (a.box.left < box.left - 2 || a.box.right > box.right + 2 ||
          a.box.top < box.top - 2 || a.box.bottom > box.bottom + 2) { found.left.push(a.words); }
      texts.slice(i + 1).forEach(function (b) {
        var across = Math.min(a.box.right, b.box.right) - Math.max(a.box.left, b.box.left);
        var down = Math.min(a.box.bottom, b.box.bottom) - Math.max(a.box.top, b.box.top);
        // Line boxes are taller than letters: a third of a line may touch.
        if (across > 2 && down > 0.34 * Math.min(a.box.height, b.box.height)) {
          found.overlaps.push([svg.querySelector("title").textContent, a.words, b.words]);
        }
      });
    });
  });
  document.documentElement.dataset.found = JSON.stringify(found);
});
</script>
"""


def _run(tmp_path: Path, page: Path, *arguments: str) -> str:
    assert BROWSER is not None
    command = [
        BROWSER,
        "--headless",
        "--no-sandbox",
        "--disable-gpu",
        f"--user-data-dir={tmp_path / 'profile'}",
        *arguments,
        page.as_uri(),
    ]
    return subprocess.run(command, capture_output=True, text=True, timeout=240, check=True).stdout


_DRAWN = {
    "small": drawn.small_with_faults,
    "one set in each mode": lambda: drawn.drawn(made_up.outcome(made_up.Size(modes=10, sets=1))),
}


@pytest.fixture(scope="module", params=_DRAWN)
def page(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("page") / f"{request.param}.html"
    path.write_text(_DRAWN[request.param]().page + MEASURE, encoding="utf-8")
    return path


@pytest.mark.parametrize("width", [1280, 520])
def test_nothing_runs_over_and_no_words_overlap(page: Path, width: int, tmp_path: Path) -> None:
    measure(page, width, tmp_path)


def measure(page: Path, width: int, tmp_path: Path) -> None:
    """Open a page with the script that measures it, and check what it found."""
    dom = _run(tmp_path, page, f"--window-size={width},900", "--dump-dom")
    held = re.search(r'data-found="([^"]*)"', dom)
    assert held is not None
    found = json.loads(held[1].replace("&quot;", '"').replace("&amp;", "&").replace("&lt;", "<"))
    assert found["page"] <= found["width"] + 1
    assert found["over"] == []
    assert found["left"] == []
    assert found["overlaps"] == []


def test_print_makes_whole_pages(tmp_path: Path) -> None:
    page = tmp_path / "small.html"
    page.write_text(drawn.small_with_faults().page, encoding="utf-8")
    target = tmp_path / "page.pdf"
    _run(tmp_path, page, f"--print-to-pdf={target}", "--no-pdf-header-footer")
    data = target.read_bytes()
    assert data.startswith(b"%PDF")
    assert len(re.findall(rb"/Type\s*/Page\b", data)) >= 8
