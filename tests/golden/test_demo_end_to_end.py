"""The main job on the demonstration vessels, run as a user would run it."""

from __future__ import annotations

import json
import zipfile
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from study.cli import main
from study.pipeline import DEMOS, result_frames
from study.workbook.package import validate_package
from tests.demos.studies import WORKBOOKS, run, studied

EXPECTED_STATUS = {"workboat": 0, "service-vessel": 1}


@pytest.fixture(scope="module", params=sorted(EXPECTED_STATUS))
def done(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> tuple[str, Path, int]:
    """Study a copy of a demo in its own folder; return its name, the folder and the exit status."""
    name = str(request.param)
    folder = tmp_path_factory.mktemp(name)
    assert main(["new", str(folder / "vessel.xlsx"), "--demo", name]) == 0
    return name, folder, run(name, folder / "vessel.xlsx", "--quiet")


def outcome_of(folder: Path) -> dict[str, Any]:
    document: dict[str, Any] = json.loads((folder / "vessel-results.json").read_text("utf-8"))
    return document


def test_the_exit_status_tells_the_verdict(done: tuple[str, Path, int]) -> None:
    name, _, status = done
    assert status == EXPECTED_STATUS[name]


def test_every_part_of_the_workbook_that_is_not_ours_is_untouched(done: tuple[str, Path, int]) -> None:
    name, folder, _ = done
    with zipfile.ZipFile(WORKBOOKS / f"{name}.xlsx") as old, zipfile.ZipFile(folder / "vessel.xlsx") as new:
        changed = {part for part in old.namelist() if old.read(part) != new.read(part)}
    assert changed <= {
        "[Content_Types].xml",
        "xl/workbook.xml",
        "xl/_rels/workbook.xml.rels",
        "xl/styles.xml",
    }


def test_the_result_workbook_is_sound(done: tuple[str, Path, int]) -> None:
    _, folder, _ = done
    assert validate_package((folder / "vessel.xlsx").read_bytes()) == []
    book = openpyxl.load_workbook(folder / "vessel.xlsx", read_only=True)
    names = list(book.sheetnames)
    book.close()
    assert next(name for name in names if name.startswith("R ")) == "R Summary"


def test_a_second_run_changes_nothing(done: tuple[str, Path, int]) -> None:
    _, folder, status = done
    names = ("vessel.xlsx", "vessel-report.html", "vessel-results.json")
    before = {name: (folder / name).read_bytes() for name in names}
    assert main(["run", str(folder / "vessel.xlsx"), "--quiet"]) == status
    for name in names:
        assert (folder / name).read_bytes() == before[name], name


def test_out_leaves_the_workbook_alone(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("study.pipeline.run_study", lambda *_, **__: studied("workboat"))
    monkeypatch.setattr("study.report.html.report_page", lambda *_: "the page")
    book = tmp_path / "vessel.xlsx"
    main(["new", str(book), "--demo", "workboat"])
    before = book.read_bytes()
    assert main(["run", str(book), "--out", str(tmp_path / "out"), "--quiet", "--networks"]) == 0
    assert book.read_bytes() == before
    written = sorted(p.name for p in (tmp_path / "out").iterdir())
    assert written[-3:] == ["vessel-report.html", "vessel-results.json", "vessel.xlsx"]
    assert sum("network" in name for name in written) == 3


def test_the_planted_faults_of_the_service_vessel_are_found() -> None:
    found = studied("service-vessel")
    bad = {(v.mode, v.subject, v.equipment) for v in found.verdicts if v.status == "exceeds"}
    assert ("Cargo", "capacity", "all boards") in bad
    assert ("Manoeuvring", "kvar sharing", "DG2") in bad
    assert {e for _, subject, e in bad if subject == "cables"} == {"C-ACC-2"}
    assert {(m, e) for m, subject, e in bad if subject == "grading"} >= {("At sea", "Q-CARGO")}
    assert {e for _, subject, e in bad if subject == "grading"} == {"Q-CARGO"}
    assert found.grading is not None
    (change,) = [c for c in found.grading.changes if c.device == "Q-CARGO"]
    # Below the least of what one set gives at the cargo panel, as the rest of that board's ladder.
    assert change.setting == "Short-time current"
    assert change.proposed < change.now


def test_tables_are_frames_for_notebooks() -> None:
    frames = result_frames(studied("workboat"))
    assert {"verdicts", "load_balance", "boards"} <= frames.keys()
    assert all(len(frame.columns) for frame in frames.values())


@pytest.mark.parametrize("name", DEMOS)
def test_the_two_solvers_agree_on_every_mode(name: str) -> None:
    """pandapower's solution against our own: the acceptance of the engine is 1e-6 pu in every run."""
    for mode in studied(name).load_flow.modes:
        assert mode.solved, mode.reason
        assert mode.agreement.largest_du_pu < 1e-8, mode.mode


def test_a_wrong_word_ends_with_status_2_and_its_cell(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    book = tmp_path / "vessel.xlsx"
    main(["new", str(book), "--demo", "workboat"])
    sheets = openpyxl.load_workbook(book)
    cell = sheets["Loads"].cell(5, 2)
    cell.value = "MSBB"
    sheets.save(book)
    assert main(["check", str(book)]) == 2
    message = capsys.readouterr().err
    assert "Loads!B5" in message
    assert "MSB" in message


@pytest.mark.parametrize(
    "words",
    [
        ["run", "nowhere.xlsx"],
        ["new", "vessel.xlsx", "--demo", "titan"],
        ["new", "vessel.ods"],
        ["compare", "nowhere.xlsx"],
    ],
)
def test_a_wrong_call_gets_one_sentence(
    words: list[str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    assert main(words) == 2
    message = capsys.readouterr().err.strip()
    assert message.startswith("study: ")
    assert "\n" not in message
