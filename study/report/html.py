"""The report: one page that carries everything with it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Final

from study.checks.verdict import STATUS_ORDER
from study.report.catalogue import all_tables
from study.report.charts import Figures, draw_figures
from study.report.content import CAUTION, StudyOutcome
from study.report.findings import Finding, findings
from study.report.page_tables import TableView, table_view, turned, verdict_css, verdict_text
from study.report.style import ACCENT, INK, QUIET, RULE, TINT, VERDICTS
from study.report.tables import Table
from study.report.tables_assumptions import not_covered
from study.report.tables_verdicts import VESSEL, VerdictGrid, verdict_grid
from study.resources import resource_dir

_SECTIONS: Final = (
    ("verdicts", "Verdicts"),
    ("load-balance", "Load balance"),
    ("voltage", "Voltage and sharing"),
    ("short-circuit", "Short-circuit"),
    ("grading", "Grading"),
    ("cables", "Cables"),
    ("dips", "Voltage dips and recovery"),
    ("comparing", "Comparing modes"),
    ("assumptions", "Assumptions, limits and methods"),
    ("not-covered", "Not covered"),
    ("control", "Document control"),
)
_LISTED = 40
_NOT_ON_THE_PAGE = (
    "findings",
    "governing_verdicts",
    "mode_figures",
    "load_by_board",
    "sharing_curves",
    "setting_lines",
    "regulation_curves",
    "inherent_curves",
    "short_circuit_by_mode",
    "fault_decay",
    "fault_simulation_curves",
    "setting_list",
    "dips_traces",
    "dips_set_traces",
)
"""Tables that the page shows as sentences, grid or figures, or leaves to the result sheets."""
_ON_SHEET_ONLY: Final[dict[str, tuple[str, ...]]] = {
    "load_balance": ("board", "input_cell"),
    "short_circuit_boards": ("ik_nominal_ka", "ip_nominal_ka"),
    "short_circuit_general": ("ik_2ph_library_ka",),
    "short_circuit_places": ("idc_half_ka", "input_cell"),
}
"""Columns that the page leaves to the result sheets."""


@dataclass(frozen=True, slots=True, kw_only=True)
class GridView:
    """One cell of the verdict grid."""

    css: str
    text: str
    figure: str
    equipment: str
    link: str


@dataclass(frozen=True, slots=True, kw_only=True)
class FindingView:
    """A finding with its status word and shape."""

    css: str
    status: str
    finding: Finding


def report_page(outcome: StudyOutcome, tables: Mapping[str, Table] | None = None) -> str:
    """Return the report as one HTML page without anything external.

    Parameters
    ----------
    outcome : StudyOutcome
        The study.
    tables : mapping of str to Table, optional
        `all_tables` of the study, where they have been made already.

    Returns
    -------
    str
        The page, the same for the same study.
    """
    from jinja2 import Environment, FileSystemLoader, StrictUndefined
    from markupsafe import Markup

    environment = Environment(
        loader=FileSystemLoader(resource_dir("templates")),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    figures = draw_figures(outcome)
    page = environment.get_template("report.html.j2").render(
        **_context(outcome, figures, all_tables(outcome) if tables is None else tables),
        drawn={d.key: Markup(d.svg) for d in figures.every},
    )
    return str(page)


def _context(outcome: StudyOutcome, figures: Figures, tables: Mapping[str, Table]) -> dict[str, Any]:
    grid = verdict_grid(outcome)
    shown = [_finding_view(f) for f in findings(outcome)]
    acting = [f for f in shown if f.finding.status != "close"]
    names, lines = turned(tables["mode_figures"])
    project = outcome.plant.project
    return {
        "outcome": outcome,
        "plant": outcome.plant,
        "project": project,
        "caution": CAUTION,
        "sections": [
            {"key": key, "title": title, "number": number}
            for number, (key, title) in enumerate(_sections(outcome), start=1)
        ],
        "tables": _views(tables, outcome),
        "figures": figures,
        "grid": grid,
        "grid_rows": _grid_rows(grid),
        "tally": _tally(outcome),
        "findings": acting[:_LISTED],
        "more_findings": acting[_LISTED:],
        "close_findings": [f for f in shown if f.finding.status == "close"],
        "modes": names,
        "mode_lines": lines,
        "mode_verdicts": _mode_verdicts(grid, len(names)),
        "not_covered": not_covered(outcome),
        "looks": VERDICTS,
        "colours": {"accent": ACCENT, "ink": INK, "quiet": QUIET, "rule": RULE, "tint": TINT},
        "print_document": css_text(f"{project.document_number} rev. {project.revision}"),
        "print_vessel": css_text(project.vessel),
    }


def _sections(outcome: StudyOutcome) -> list[tuple[str, str]]:
    """Return key and title of every section that the study fills."""
    given = {
        "short-circuit": outcome.short_circuit,
        "grading": outcome.grading,
        "cables": outcome.cables,
        "dips": outcome.dips,
    }
    return [(key, title) for key, title in _SECTIONS if given.get(key, outcome) is not None]


def _views(tables: Mapping[str, Table], outcome: StudyOutcome) -> dict[str, TableView]:
    """Return the tables that have a row, by key; the page asks for them by name."""
    views = {}
    for key, table in tables.items():
        if table.n_rows and key not in _NOT_ON_THE_PAGE:
            anchors = _proofs(table, outcome) if key == "verdicts" else ()
            views[key] = table_view(table, anchors=anchors, without=_ON_SHEET_ONLY.get(key, ()))
    return views


def _proofs(table: Table, outcome: StudyOutcome) -> list[str]:
    """Return an anchor for the governing row of each subject and mode."""
    seen: set[str] = set()
    anchors = []
    for subject, mode in zip(table.column("subject"), table.column("mode"), strict=True):
        anchor = _proof(str(subject), str(mode), outcome.modes)
        anchors.append("" if anchor in seen else anchor)
        seen.add(anchor)
    return anchors


def _proof(subject: str, mode: str, modes: tuple[str, ...]) -> str:
    word = "-".join("".join(c if c.isalnum() else " " for c in subject.lower()).split())
    number = modes.index(mode) + 1 if mode in modes else 0
    return f"proof-{word}-{number}"


def _grid_rows(grid: VerdictGrid) -> list[tuple[str, list[GridView | None]]]:
    modes = tuple(column for column in grid.columns if column != VESSEL)
    rows = []
    for subject, cells in zip(grid.subjects, grid.cells, strict=True):
        views: list[GridView | None] = []
        for column, cell in zip(grid.columns, cells, strict=True):
            if cell is None:
                views.append(None)
                continue
            views.append(
                GridView(
                    css=verdict_css(cell.status),
                    text=verdict_text(cell.status),
                    figure=cell.figure,
                    equipment=cell.equipment,
                    link=_proof(subject, column, modes) if cell.judged else "table-load-flow-islands",
                )
            )
        rows.append((subject, views))
    return rows


def _mode_verdicts(grid: VerdictGrid, n_modes: int) -> list[tuple[str, list[str]]]:
    """Return each subject's status and figure for the modes, for the comparison."""
    return [
        (
            subject,
            [
                f"{verdict_text(cell.status)}: {cell.figure}" if cell else "nothing to judge"
                for cell in cells[:n_modes]
            ],
        )
        for subject, cells in zip(grid.subjects, grid.cells, strict=True)
        if any(cells[:n_modes])
    ]


def _tally(outcome: StudyOutcome) -> list[tuple[str, str, int]]:
    """Return style, word and count of each status, worst first."""
    return [
        (verdict_css(word), verdict_text(word), sum(v.status == word for v in outcome.verdicts))
        for word in STATUS_ORDER
    ]


def _finding_view(finding: Finding) -> FindingView:
    return FindingView(css=verdict_css(finding.status), status=verdict_text(finding.status), finding=finding)


def css_text(text: str) -> str:
    r"""Return text as the inside of a CSS string, with everything but letters and digits escaped.

    Parameters
    ----------
    text : str
        Any text.

    Returns
    -------
    str
        Safe between quotes in a style sheet.

    Examples
    --------
    >>> css_text('A "1"')
    'A\\20 \\22 1\\22 '
    """
    return "".join(c if c.isascii() and c.isalnum() else f"\\{ord(c):x} " for c in text)
