"""Every figure of the page, by its section."""

from __future__ import annotations

from dataclasses import dataclass

from study.report.charts_balance import load_by_service, set_loading
from study.report.charts_dips import dips_figures
from study.report.charts_fault_ratings import fault_rating_figures
from study.report.charts_sharing import case_figures, sharing_figures
from study.report.charts_short_circuit import short_circuit_figures
from study.report.charts_voltage import board_voltages, regulation_figures, voltages_by_board
from study.report.content import StudyOutcome
from study.report.plotting import Drawing, house_style


@dataclass(frozen=True, slots=True, kw_only=True)
class Figures:
    """The figures of a study, in the order of the page."""

    balance: tuple[Drawing, ...]
    voltages: tuple[Drawing, ...]
    sharing: tuple[Drawing, ...]
    cases: tuple[Drawing, ...]
    regulation: tuple[Drawing, ...]
    short_circuit: tuple[Drawing, ...]
    fault_ratings: tuple[Drawing, ...]
    dips: tuple[Drawing, ...]

    @property
    def every(self) -> tuple[Drawing, ...]:
        """All figures."""
        return (
            *self.balance,
            *self.voltages,
            *self.sharing,
            *self.cases,
            *self.regulation,
            *self.short_circuit,
            *self.fault_ratings,
            *self.dips,
        )


def draw_figures(outcome: StudyOutcome) -> Figures:
    """Draw every figure of a study.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.

    Returns
    -------
    Figures
        A figure that has nothing to show is left out.
    """
    with house_style():
        return Figures(
            balance=_present(load_by_service(outcome), set_loading(outcome)),
            voltages=_present(board_voltages(outcome), voltages_by_board(outcome)),
            sharing=sharing_figures(outcome),
            cases=case_figures(outcome),
            regulation=regulation_figures(outcome),
            short_circuit=short_circuit_figures(outcome),
            fault_ratings=fault_rating_figures(outcome),
            dips=dips_figures(outcome),
        )


def _present(*figures: Drawing | None) -> tuple[Drawing, ...]:
    return tuple(figure for figure in figures if figure is not None)
