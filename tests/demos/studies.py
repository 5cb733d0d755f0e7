"""The studies of the demonstration vessels, each done once in a process."""

from __future__ import annotations

from functools import cache
from pathlib import Path

from study.pipeline import run_study
from study.report.content import StudyOutcome

WORKBOOKS = Path(__file__).parents[2] / "workbooks"


@cache
def studied(name: str) -> StudyOutcome:
    """Return the whole study of a demonstration vessel; a result is frozen, so that tests may share it."""
    return run_study(WORKBOOKS / f"{name}.xlsx")
