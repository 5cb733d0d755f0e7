"""The page: well formed, whole in itself, safe against names, readable without colours or a script."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import replace
from html.parser import HTMLParser

import pytest
from lxml import etree

from study.report.charts_balance import set_loading
from study.report.content import CAUTION
from study.report.html import css_text, report_page
from study.report.plotting import Drawing, house_style
from study.report.tables_assumptions import NOT_COVERED, not_covered
from tests.report import drawn, made_up

OUTCOME = made_up.outcome()
_VOID = {"meta", "br", "hr", "img", "input", "link", "col"}


class Reader(HTMLParser):
    """Collects what the tests look at, and holds the nesting of tags."""

    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.open: list[str] = []
        self.ids: list[str] = []
        self.attributes: list[tuple[str, str, str]] = []
        self.text: list[tuple[str, str]] = []
        self.tags: Counter[str] = Counter()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags[tag] += 1
        for name, value in attrs:
            self.attributes.append((tag, name, value or ""))
            if name == "id":
                self.ids.append(value or "")
        if tag not in _VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.handle_starttag(tag, attrs)
        if tag not in _VOID:
            self.open.pop()

    def handle_endtag(self, tag: str) -> None:
        assert self.open, f"</{tag}> closes nothing"
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        self.text.append((self.open[-1] if self.open else "", data))


def _read(page: str) -> Reader:
    reader = Reader()
    reader.feed(page)
    reader.close()
    return reader


@pytest.fixture(scope="module")
def page() -> str:
    return drawn.small().page


@pytest.fixture(scope="module")
def read(page: str) -> Reader:
    return _read(page)


@pytest.fixture(scope="module")
def words(read: Reader) -> str:
    return " ".join(data for tag, data in read.text if tag not in ("style", "script"))


def test_tags_are_nested_and_closed(read: Reader) -> None:
    assert read.open == []
    assert read.tags["main"] == 1


def test_ids_are_unique_and_every_link_has_its_target(page: str, read: Reader) -> None:
    assert [i for i, n in Counter(read.ids).items() if n > 1] == []
    for tag, name, value in read.attributes:
        if name in ("href", "xlink:href"):
            assert value.startswith("#"), (tag, value)
            assert value[1:] in read.ids, value
    for inner in re.findall(r"url\(#([^)]+)\)", page):
        assert inner in read.ids


def test_nothing_external_is_asked_for(page: str, read: Reader) -> None:
    assert not re.search(r"https?://|//www|@import|url\((?!#)", page)
    assert not {"img", "link", "iframe", "object", "embed", "form"} & set(read.tags)
    assert not [a for a in read.attributes if a[1] in ("src", "srcset", "action") or a[1].startswith("on")]


def test_names_from_cells_never_become_markup(page: str, read: Reader, words: str) -> None:
    assert read.tags["script"] == 1
    assert "<script>alert" not in page
    assert made_up.SCRIPT in words


def test_title_block_is_escaped_too() -> None:
    fields = ("vessel", "document_number", "revision", "rules", "prepared_by")
    bad = {field: f'"; }} </style><script>alert("{field}")</script>' for field in fields}
    plant = replace(OUTCOME.plant, project=replace(OUTCOME.plant.project, **bad))
    page = report_page(replace(OUTCOME, plant=plant))
    assert [field for field in fields if f'<script>alert("{field}")' in page] == []
    read = _read(page)
    assert read.tags["script"] == 1
    assert read.tags["style"] == 1
    assert read.open == []


def test_css_text_leaves_nothing_that_a_style_sheet_reads() -> None:
    assert re.fullmatch(r"(?:[A-Za-z0-9]|\\[0-9a-f]+ )*", css_text('"; } </style>\n\\ é'))


def test_first_page_says_what_it_must(page: str) -> None:
    first = page[: page.index('id="verdicts"')]
    words = " ".join(d for tag, d in _read_part(first) if tag not in ("style", "title"))
    project = OUTCOME.plant.project
    for text in (
        project.vessel,
        project.hull_number,
        project.document_number,
        project.date,
        project.rules,
        OUTCOME.plant.file_name,
        OUTCOME.plant.input_digest,
        OUTCOME.tool_version,
        CAUTION,
    ):
        assert text in words
    for subject, _ in NOT_COVERED:
        assert subject[1:] in words


def _read_part(part: str) -> list[tuple[str, str]]:
    reader = Reader()
    reader.feed(part)
    return reader.text


def test_verdicts_are_words_and_shapes(words: str) -> None:
    for text in ("✓ within", "✕ exceeds", "○ not assessed", "▲ close"):
        assert text in words


def test_mode_without_a_solution_is_not_shown_as_nothing_to_judge(page: str) -> None:
    grid = page[page.index('class="grid"') : page.index("Findings that need action")]
    row = grid[grid.index(">voltage<") : grid.index(">kW sharing<")]
    assert "no solution" in row


def test_findings_name_cell_rule_and_cure(page: str) -> None:
    part = page[page.index("Findings that need action") : page.index("Judged quantities")]
    for text in ("230.0004 A", "Cables!F4", "IEC 60092-352", "Take a larger section or more runs."):
        assert text in part


def test_sections_that_do_not_exist_yet_have_no_heading(read: Reader) -> None:
    headings = [d for tag, d in read.text if tag == "h2"]
    assert [h.split(" ", 1)[1] for h in headings] == [
        "Verdicts",
        "Load balance",
        "Voltage and sharing",
        "Comparing modes",
        "Assumptions, limits and methods",
        "Not covered",
        "Document control",
    ]


def test_all_modes_are_side_by_side_without_a_script(page: str) -> None:
    table = page[page.index('class="compare"') :]
    table = table[: table.index("</table>")]
    for mode in OUTCOME.modes:
        assert f">{mode}</th>" in table
    assert "hidden" not in table


def test_numbers_of_many_digits_are_not_printed(words: str) -> None:
    digest = OUTCOME.plant.input_digest
    assert not re.findall(r"\d\.\d{6,}", words.replace(digest, ""))


def test_the_same_study_gives_the_same_page(page: str) -> None:
    assert report_page(made_up.outcome()) == page


def test_study_without_short_circuit_has_no_section_or_figure_of_it(page: str) -> None:
    assert "Short-circuit</h2>" not in page
    figures = drawn.small().figures
    assert (figures.short_circuit, figures.fault_ratings) == ((), ())
    assert not_covered(OUTCOME) == NOT_COVERED


def test_figures_are_xml_with_text_and_a_text_alternative() -> None:
    figures = drawn.small().figures.every
    assert len(figures) > 5
    for figure in figures:
        _check_figure(figure)


def _check_figure(figure: Drawing) -> None:
    svg = figure.svg
    root = etree.fromstring(svg)
    assert root.get("role") == "img"
    labels = root.get("aria-labelledby").split()
    assert [root.find(tag).get("id") for tag in ("title", "desc")] == labels
    assert len(root.findtext("desc")) > 20
    assert len(root.findall(".//text")) > 3
    assert root.find(".//style") is None
    assert "NaN" not in svg
    assert "nan" not in re.sub(r"<[^>]*>", "", svg).lower().replace("manoeuvring", "")
    axes = " ".join(t for t in root.itertext())
    assert re.search(r"\[[^\]]+\]", axes), "an axis has its unit in brackets"


def test_figures_carry_no_date_and_no_name_of_a_program() -> None:
    for figure in drawn.small().figures.every:
        assert not re.search(r"20\d\d-\d\d|matplotlib|Matplotlib", figure.svg)


def test_names_with_signs_of_mathematics_stay_as_they_are() -> None:
    gensets = (replace(OUTCOME.plant.gensets[0], name="A$_1$ & <B>"), *OUTCOME.plant.gensets[1:])
    mode = OUTCOME.balance.modes[0]
    sets = (replace(mode.sets[0], name="A$_1$ & <B>"), *mode.sets[1:])
    outcome = replace(
        OUTCOME,
        plant=replace(OUTCOME.plant, gensets=gensets),
        balance=replace(OUTCOME.balance, modes=(replace(mode, sets=sets), *OUTCOME.balance.modes[1:])),
    )
    with house_style():
        figure = set_loading(outcome)
    assert figure is not None
    svg = figure.svg
    assert "A$_1$ &amp; &lt;B&gt;" in svg
