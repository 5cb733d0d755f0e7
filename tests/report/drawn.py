"""The pages of the made-up studies, each drawn once in a process, with the figures that stand on it."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from unittest.mock import patch

from study.report.charts import Figures, draw_figures
from study.report.content import StudyOutcome
from study.report.html import report_page
from tests.report import made_up, made_up_faults


@dataclass(frozen=True)
class Drawn:
    """A study, its page and the figures of that page."""

    outcome: StudyOutcome
    page: str
    figures: Figures


def drawn(outcome: StudyOutcome) -> Drawn:
    """Draw a page and keep its figures."""
    figures: list[Figures] = []

    def keep(outcome: StudyOutcome) -> Figures:
        figures.append(draw_figures(outcome))
        return figures[-1]

    with patch("study.report.html.draw_figures", keep):
        page = report_page(outcome)
    return Drawn(outcome, page, figures[0])


def page_with(outcome: StudyOutcome, figures: Figures) -> str:
    """Return the page of a study around figures that are drawn already."""
    with patch("study.report.html.draw_figures", lambda _: figures):
        return report_page(outcome)


@cache
def small() -> Drawn:
    """Return the small study."""
    return drawn(made_up.outcome())


@cache
def small_with_faults() -> Drawn:
    """Return the small study with short-circuit currents."""
    return drawn(made_up_faults.fault_outcome())


@cache
def large_with_faults() -> Drawn:
    """Return the study of 60 boards, 500 loads and 10 modes with short-circuit currents."""
    return drawn(made_up_faults.large_fault_outcome())
