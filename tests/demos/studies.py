"""The studies of the demonstration vessels, each done once in a process."""

from __future__ import annotations

from pathlib import Path
from unittest.mock import patch

from study.cli import main
from study.pipeline import run_study
from study.report.content import StudyOutcome

WORKBOOKS = Path(__file__).parents[2] / "workbooks"
_DONE: dict[str, StudyOutcome] = {}


def studied(name: str) -> StudyOutcome:
    """Return the whole study of a demonstration vessel; a result is frozen, so that tests may share it."""
    if name not in _DONE:
        _DONE[name] = run_study(WORKBOOKS / f"{name}.xlsx")
    return _DONE[name]


def run(name: str, book: Path, *options: str) -> int:
    """Run the program on a copy of a demonstration vessel; keep its study, and return the exit status."""

    def keep(path: Path, *rest: object, **more: object) -> StudyOutcome:
        _DONE[name] = run_study(path, *rest, **more)  # type: ignore[arg-type]
        return _DONE[name]

    with patch("study.pipeline.run_study", keep):
        return main(["run", str(book), *options])
