"""The workbook is written back in place, or the old file is whole and a sentence says why; as a user runs it.

Study, page and result sheets are made once and taken from there: what is tested is what happens to files
around them.
"""

from __future__ import annotations

import contextlib
import os
import pickle
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import replace
from functools import cache
from hashlib import sha256
from pathlib import Path

import openpyxl
import pytest

from study.cli import main
from study.report.content import StudyOutcome
from study.report.excel import result_workbook
from study.report.html import report_page
from study.workbook.package import graft_result_sheets, validate_package, write
from tests.demos import studies
from tests.workbook.package.samples import parts, rezip

ROOT = Path(__file__).parents[2]
DEMO = ROOT / "workbooks" / "workboat.xlsx"
OUTPUTS = ["vessel-report.html", "vessel-results.json", "vessel.xlsx"]


@pytest.fixture(scope="module")
def studied() -> StudyOutcome:
    return studies.studied("workboat")


@pytest.fixture
def book(tmp_path: Path, studied: StudyOutcome, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return a copy of the demonstration vessel whose study is done already."""
    path = tmp_path / "ship" / "vessel.xlsx"
    path.parent.mkdir()
    shutil.copyfile(DEMO, path)
    known_study(studied, monkeypatch)
    return path


def known_study(
    studied: StudyOutcome, monkeypatch: pytest.MonkeyPatch, meanwhile: Callable[[], object] = lambda: None
) -> None:
    """Let `run` take the study that is done; `meanwhile` happens while it would be done."""

    def run(book: Path, progress: object = None) -> StudyOutcome:
        digest = sha256(book.read_bytes()).hexdigest()
        meanwhile()
        return replace(studied, plant=replace(studied.plant, file_digest=digest))

    monkeypatch.setattr("study.pipeline.run_study", run)
    monkeypatch.setattr("study.report.html.report_page", lambda *_: known_page())
    monkeypatch.setattr("study.report.excel.result_workbook", lambda *_: known_sheets())


@cache
def known_page() -> str:
    return report_page(studies.studied("workboat"))


@cache
def known_sheets() -> bytes:
    return result_workbook(studies.studied("workboat"))


def one_sentence(capsys: pytest.CaptureFixture[str]) -> str:
    err = capsys.readouterr().err
    assert err.startswith("study: ")
    assert err.count("\n") == 1
    return err


def test_in_place(book: Path) -> None:
    assert main(["run", str(book)]) == 0
    assert sorted(os.listdir(book.parent)) == OUTPUTS
    assert validate_package(book.read_bytes()) == []


@pytest.mark.parametrize("lock", ["~$vessel.xlsx", ".~lock.vessel.xlsx#"])
def test_open_in_a_spreadsheet_program(book: Path, lock: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Names of the lock files: common practice of the spreadsheet programs, no source."""
    before = book.read_bytes()
    (book.parent / lock).write_bytes(b"An engineer")
    assert main(["run", str(book)]) == 0
    out = capsys.readouterr().out
    assert "vessel.xlsx: the file is open in another program" in out
    assert "the result sheets are in vessel-with-results.xlsx instead" in out
    assert book.read_bytes() == before
    copy = book.with_name("vessel-with-results.xlsx")
    assert validate_package(copy.read_bytes()) == []
    assert "R Summary" in openpyxl.load_workbook(copy).sheetnames
    assert sorted(os.listdir(book.parent)) == sorted([lock, *OUTPUTS, copy.name])


def test_a_copy_of_an_earlier_run_is_not_replaced(book: Path) -> None:
    """The engineer may have worked on it since."""
    (book.parent / "~$vessel.xlsx").write_bytes(b"")
    earlier = book.with_name("vessel-with-results.xlsx")
    earlier.write_bytes(b"worked on since")
    assert main(["run", str(book), "--quiet"]) == 0
    assert earlier.read_bytes() == b"worked on since"
    assert validate_package(book.with_name("vessel-with-results-2.xlsx").read_bytes()) == []


def test_marked_read_only(book: Path, capsys: pytest.CaptureFixture[str]) -> None:
    before = book.read_bytes()
    book.chmod(0o444)
    assert main(["run", str(book)]) == 0
    assert "marked read-only" in capsys.readouterr().out
    assert book.read_bytes() == before
    assert book.with_name("vessel-with-results.xlsx").exists()


def test_changed_while_the_study_ran(
    book: Path, studied: StudyOutcome, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Results of the old inputs must not stand behind the new ones."""
    known_study(studied, monkeypatch, lambda: book.write_bytes(b"saved by the engineer"))
    assert main(["run", str(book)]) == 2
    assert "vessel.xlsx: the file is no Excel workbook" in one_sentence(capsys)

    shutil.copyfile(DEMO, book)
    other = openpyxl.load_workbook(DEMO)
    other["Loads"]["A5"].comment = None
    known_study(studied, monkeypatch, lambda: other.save(book))
    for more in ([], ["--out", str(book.parent / "out")]):
        shutil.copyfile(DEMO, book)
        assert main(["run", str(book), *more]) == 2
        assert "the file was changed while the study ran, nothing was written; run again" in one_sentence(
            capsys
        )
    assert sorted(p.name for p in book.parent.rglob("*")) == ["out", "vessel.xlsx"]


@pytest.mark.parametrize("what", ["changed", "moved or deleted"])
def test_changed_while_the_results_were_written(
    book: Path, what: str, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """The last look is just before the rename."""
    real = os.fsync

    def meanwhile(handle: int) -> None:
        if what == "changed":
            book.write_bytes(b"saved by the engineer")
        else:
            book.unlink(missing_ok=True)
        real(handle)

    monkeypatch.setattr(write.os, "fsync", meanwhile)
    assert main(["run", str(book)]) == 2
    assert f"the file was {what} while the study ran, nothing was written" in one_sentence(capsys)
    assert [p.read_bytes() for p in book.parent.iterdir()] == (
        [b"saved by the engineer"] * (what == "changed")
    )


def test_out_leaves_the_workbook_alone_and_refuses_its_own_folder(
    book: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    before, times = book.read_bytes(), book.stat().st_mtime_ns
    assert main(["run", str(book), "--out", str(book.parent / "new" / "deep")]) == 0
    assert sorted(os.listdir(book.parent / "new" / "deep")) == OUTPUTS
    assert (book.read_bytes(), book.stat().st_mtime_ns) == (before, times)
    capsys.readouterr()
    assert main(["run", str(book), "--out", str(book.parent)]) == 2
    assert "is the workbook's own folder" in one_sentence(capsys)
    assert main(["run", str(book), "--out", str(book)]) == 2
    assert "is a file; give the name of a folder" in one_sentence(capsys)
    assert book.read_bytes() == before


def test_a_formula_on_results_is_named_in_one_line(
    book: Path, studied: StudyOutcome, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    own = openpyxl.load_workbook(book)
    own.create_sheet("Own sums")["B2"] = "='R Summary'!B7*2"
    own.create_sheet("Own notes")["B2"] = "=Boards!B5"
    own.save(book)
    known_study(studied, monkeypatch)
    assert main(["run", str(book)]) == 0
    lines = [line for line in capsys.readouterr().out.splitlines() if "formulas on" in line]
    assert lines == [
        "formulas on Own sums read result sheets; they show the new results when the workbook is next opened "
        "in a spreadsheet program"
    ]


def test_a_formula_written_on_a_result_sheet_is_named_when_it_is_replaced(
    book: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["run", str(book)]) == 0
    assert "replaced with" not in capsys.readouterr().out
    content = parts(book.read_bytes())
    part = next(name for name, data in content.items() if b">Summary: " in data)
    content[part] = content[part].replace(b"</row>", b'<c r="XFC1"><f>SUM(B2:B9)</f><v>2</v></c></row>', 1)
    book.write_bytes(rezip(content))
    assert main(["run", str(book)]) == 0
    assert (
        "replaced with the result sheets: R Summary!XFC1 (=SUM(B2:B9)); keep formulas and comments of your "
        "own on sheets of your own, they may refer to result sheets"
    ) in capsys.readouterr().out.splitlines()
    assert b"SUM(B2:B9)" not in parts(book.read_bytes())[part]


# ---- disks


@contextlib.contextmanager
def disk(folder: Path, options: str) -> Iterator[None]:
    """Mount a disk in memory; a test that may not is skipped."""
    folder.mkdir(exist_ok=True)
    mounted = subprocess.run(
        ["mount", "-t", "tmpfs", "-o", options, "tmpfs", str(folder)], check=False, capture_output=True
    ) if shutil.which("mount") else None  # fmt: skip
    if mounted is None or mounted.returncode:
        pytest.skip("this system does not let the test mount a small disk")
    try:
        yield
    finally:
        subprocess.run(["umount", str(folder)], check=True)


def test_a_full_disk(
    tmp_path: Path, studied: StudyOutcome, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    folder = tmp_path / "small"
    with disk(folder, "size=200k"):
        book = folder / "vessel.xlsx"
        shutil.copyfile(DEMO, book)
        known_study(studied, monkeypatch)
        assert main(["run", str(book)]) == 2
        said = one_sentence(capsys)
        assert (
            "vessel.xlsx: the file was not written, the disk is full; what was there before is unharmed"
            in said
        )
        assert "--out FOLDER" in said
        assert os.listdir(folder) == ["vessel.xlsx"]
        assert book.read_bytes() == DEMO.read_bytes()


def test_a_disk_that_the_report_fills(
    tmp_path: Path, studied: StudyOutcome, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """The workbook has its results; the reports of the last run are whole, not cut short."""
    folder = tmp_path / "small"
    old = DEMO.read_bytes()
    room = len(old) + len(graft_result_sheets(old, known_sheets())) + 60_000
    with disk(folder, f"size={room // 1024}k"):
        book = folder / "vessel.xlsx"
        shutil.copyfile(DEMO, book)
        for name in OUTPUTS[:2]:
            (folder / name).write_text("of the last run")
        known_study(studied, monkeypatch)
        filler = folder / "filler"
        real = write._sync

        def fill(handle: int) -> None:
            real(handle)
            with contextlib.suppress(OSError), filler.open("ab") as stream:
                stream.write(bytes(room))

        monkeypatch.setattr(write, "_sync", fill)
        assert main(["run", str(book)]) == 2
        assert "vessel-report.html: the file was not written, the disk is full" in one_sentence(capsys)
        assert {name: (folder / name).read_text() for name in OUTPUTS[:2]} == dict.fromkeys(
            OUTPUTS[:2], "of the last run"
        )
        assert validate_package(book.read_bytes()) == []
        assert not [name for name in os.listdir(folder) if name.endswith(".tmp")]


def test_a_read_only_disk(
    tmp_path: Path, studied: StudyOutcome, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    folder = tmp_path / "fixed"
    with disk(folder, "size=1m"):
        book = folder / "vessel.xlsx"
        shutil.copyfile(DEMO, book)
        subprocess.run(["mount", "-o", "remount,ro", str(folder)], check=True)
        known_study(studied, monkeypatch)
        assert main(["run", str(book)]) == 2
        assert "the disk is read-only; what was there before is unharmed; give another folder with --out" in (
            one_sentence(capsys)
        )
        assert main(["run", str(book), "--out", str(tmp_path / "out"), "--quiet"]) == 0
        assert sorted(os.listdir(tmp_path / "out")) == OUTPUTS
        assert os.listdir(folder) == ["vessel.xlsx"]


def test_report_and_json_are_replaced_in_one_step(
    book: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Nothing is opened for writing under its own name."""
    for name in OUTPUTS[:2]:
        (book.parent / name).write_text("of the last run")
    opened: list[str] = []
    real = os.replace

    def fail(source: str, target: str) -> None:
        opened.append(Path(target).name)
        if Path(target).name == "vessel-results.json":
            raise OSError(5, "Input/output error")
        real(source, target)

    monkeypatch.setattr(write.os, "replace", fail)
    assert main(["run", str(book)]) == 2
    assert "vessel-results.json: the file was not written, Input/output error" in one_sentence(capsys)
    assert opened == ["vessel.xlsx", "vessel-report.html", "vessel-results.json"]
    assert (book.parent / "vessel-results.json").read_text() == "of the last run"


# ---- killed


RUN_OF_A_KNOWN_STUDY = """
import pickle, sys
from pathlib import Path
import study.pipeline
import study.report.excel
import study.report.html
from study.cli import main
known = pickle.loads(Path(sys.argv[1]).read_bytes())
study.pipeline.run_study = lambda *_, **__: known[0]
study.report.html.report_page = lambda *_: known[1]
study.report.excel.result_workbook = lambda *_: known[2]
sys.exit(main(["run", sys.argv[2]]))
"""


@pytest.mark.skipif(os.name == "nt", reason="SIGKILL is a POSIX matter")
@pytest.mark.parametrize("moment", ["reading", "temporary file"])
def test_a_killed_run_leaves_the_old_file_whole(
    moment: str, tmp_path: Path, studied: StudyOutcome, tmp_path_factory: pytest.TempPathFactory
) -> None:
    """A run in a process of its own, killed while it reads, or when its temporary file appears."""
    book = tmp_path / "vessel.xlsx"
    shutil.copyfile(DEMO, book)
    command = ["-m", "study", "run", str(book)]
    if moment == "temporary file":
        known = tmp_path_factory.mktemp("known") / "study"
        known.write_bytes(pickle.dumps((studied, known_page(), known_sheets())))
        command = ["-c", RUN_OF_A_KNOWN_STUDY, str(known), str(book)]
    with subprocess.Popen([sys.executable, *command], cwd=ROOT) as process:
        deadline = time.monotonic() + 300
        while time.monotonic() < deadline and process.poll() is None:
            if moment == "reading" or any(n.endswith(".tmp") for n in os.listdir(tmp_path)):
                time.sleep(0.3 if moment == "reading" else 0.0)
                break
            time.sleep(0.0005)
        process.send_signal(signal.SIGKILL)
    assert process.returncode == -signal.SIGKILL
    data = book.read_bytes()
    assert data == DEMO.read_bytes() or validate_package(data) == []
    if moment == "reading":
        assert os.listdir(tmp_path) == ["vessel.xlsx"]
        assert data == DEMO.read_bytes()
    assert main(["check", str(book)]) == 0


def test_an_error_of_the_program_would_not_be_hidden(book: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Only what is raised on purpose becomes a sentence; the tests above do not pass by a catch-all."""
    monkeypatch.setattr("study.pipeline.write_results", lambda *_, **__: 1 // 0)
    with pytest.raises(ZeroDivisionError):
        main(["run", str(book)])
