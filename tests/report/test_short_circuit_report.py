"""Section, sheets, figures and JSON of short-circuit currents and fault ratings, from made-up results."""

from __future__ import annotations

import json
import math
import re
from collections import Counter
from dataclasses import replace
from io import BytesIO

import numpy as np
import pytest
from lxml import etree
from openpyxl import Workbook, load_workbook

from study.report.catalogue import all_tables
from study.report.charts import Figures
from study.report.charts_short_circuit import short_circuit_figures
from study.report.content import StudyOutcome
from study.report.excel import result_workbook
from study.report.fault_view import curves, governing_mode, greatest, leading_boards, least, one_busbar
from study.report.findings import findings
from study.report.json_out import json_text
from study.report.plotting import Drawing, house_style
from study.report.tables import Table
from study.report.tables_assumptions import NOT_COVERED, not_covered
from study.report.tables_fault_devices import breakers_table
from study.report.tables_verdicts import verdict_grid
from study.results.short_circuit import FaultCase, ShortCircuitResult
from tests.report import drawn, made_up, made_up_faults
from tests.report.made_up_fault_ratings import JUST_ABOVE_KA
from tests.report.test_html import Reader

OUTCOME = made_up_faults.fault_outcome()
TABLES = all_tables(OUTCOME)
PLAIN = all_tables(made_up.outcome())
NEW = {key: table for key, table in TABLES.items() if key not in PLAIN}
SHEETS = ("R Short-circuit", "R Fault ratings")


@pytest.fixture(scope="module")
def page() -> str:
    return drawn.small_with_faults().page


@pytest.fixture(scope="module")
def figures() -> Figures:
    return drawn.small_with_faults().figures


def _faults(outcome: StudyOutcome = OUTCOME) -> ShortCircuitResult:
    assert outcome.short_circuit is not None
    return outcome.short_circuit


RESULT = _faults()
CASE: FaultCase = RESULT.modes[0].maximum


def _texts(key: str, column: str) -> tuple[str, ...]:
    table = TABLES[key]
    return table.texts(table.index(column))


def test_study_without_it_has_no_table_or_sheet_of_it() -> None:
    assert not any(table.sheet in SHEETS for table in PLAIN.values())


def test_study_with_it_no_longer_says_that_it_is_not_covered(page: str) -> None:
    left_out = {subject for subject, _ in NOT_COVERED} - {subject for subject, _ in not_covered(OUTCOME)}
    assert left_out == {"Short-circuit currents"}
    assert "ratings of boards and devices are not judged" not in page


def test_every_new_table_stands_on_one_of_the_two_sheets() -> None:
    assert {table.sheet for table in NEW.values()} == set(SHEETS)
    for key in ("short_circuit_governing", "fault_contributions", "fault_duties", "earth_faults"):
        assert NEW[key].n_rows > 0


def test_section_comes_before_the_comparison_and_is_numbered(page: str) -> None:
    reader = Reader()
    reader.feed(page)
    headings = [text for tag, text in reader.text if tag == "h2"]
    titles = [h.split(" ", 1)[1] for h in headings]
    assert titles.index("Short-circuit") == titles.index("Comparing modes") - 1
    assert [int(h.split(" ", 1)[0]) for h in headings] == list(range(1, len(headings) + 1))


def test_ids_are_unique_and_links_have_targets(page: str) -> None:
    reader = Reader()
    reader.feed(page)
    reader.close()
    assert [i for i, n in Counter(reader.ids).items() if n > 1] == []
    for tag, name, value in reader.attributes:
        if name in ("href", "xlink:href"):
            assert value[1:] in reader.ids, (tag, value)


def test_names_and_sentences_are_escaped(page: str) -> None:
    assert "<script>alert('x')</script> pump" not in page
    assert made_up_faults.SENTENCE not in page
    assert "&lt;b&gt;Not&lt;/b&gt; cleared after 0.4 s &amp; more." in page
    assert "&lt;b&gt;125&lt;/b&gt;" in page


def test_page_says_standard_assumptions_and_cautions(page: str) -> None:
    words = " ".join(re.sub(r"<[^>]+>", " ", page).split())
    for text in (
        "IEC 61363-1:1998",
        "IEC 60909-0:2016",
        "Bolted fault",
        "cables cold (20 °C)",
        "low end of their tolerance",
        "from memory of the standard",
        "on a board that sets feed peak at T/2 −10 to +5 %; behind a cable peak at T/2 −14 to +3 %",
        "greatest peak over all times and angles",
    ):
        assert text in words


_LONG_NUMBER = re.compile(r"\d{7,}|\d\.\d{7,}")


@pytest.mark.parametrize("table", NEW.values(), ids=NEW.keys())
def test_no_number_of_many_digits(table: Table) -> None:
    for i, column in enumerate(table.columns):
        if not column.is_text:
            for text in table.texts(i):
                assert not _LONG_NUMBER.search(text), (column.key, text)
                assert text not in ("nan", "inf"), column.key


_SUFFIXES = {"ka", "a", "v", "s", "ms", "percent", "ohm", "uf", "kw", "ka2s", "mm2", "degc", "pu", "multiple"}
_PLAIN = {"cos_phi", "r_over_x", "voltage_factor", "kappa", "value", "limit", "least_to_pick_up"}


@pytest.mark.parametrize("table", NEW.values(), ids=NEW.keys())
def test_every_number_says_its_unit(table: Table) -> None:
    for column in table.columns:
        if not column.is_text and column.key not in _PLAIN | {"depends_on_data"}:
            assert column.key.split("_")[-1] in _SUFFIXES, column.key
            assert column.unit or column.key.endswith(("multiple", "_pu")), column.key


_WORKED = [table for table in NEW.values() if table.worked is not None]
_UNITS = re.compile(r" (?:kA²s|kA|A|V|%)(?![A-Za-z²])")


@pytest.mark.parametrize("table", _WORKED, ids=[table.key for table in _WORKED])
def test_worked_row_gives_its_result_by_hand(table: Table) -> None:
    assert table.worked is not None
    for line in table.worked.lines:
        figures = _UNITS.sub("", line.figures).replace("√(", "np.sqrt(")
        figures = re.sub(r"√(\d)", r"np.sqrt(\1)", figures).replace("²", "**2").replace("−", "-")
        figures = figures.replace("×", "*").replace("exp(", "np.exp(").replace("π", "np.pi")
        result, _, unit = line.result.replace("−", "-").partition(" ")
        by_hand = eval(figures, {"np": np})
        if unit == "%":
            by_hand *= 100.0
        # Half of the fourth significant digit of the result is 5e-4 of it at most.
        assert by_hand == pytest.approx(float(result), rel=5.1e-4), line.label


def test_main_tables_have_a_row_worked_by_hand() -> None:
    assert {table.key for table in _WORKED} >= {
        "short_circuit_governing", "short_circuit_boards", "short_circuit_places", "short_circuit_general",
        "fault_contributions", "fault_sources", "fault_quick_estimates", "earth_faults", "fault_duties",
        "board_ratings", "breaker_ratings", "high_voltage_breaker_ratings", "fault_clearing", "cable_heat",
    }  # fmt: skip


def test_worked_results_stand_in_their_rows() -> None:
    lines = {key: NEW[key].worked for key in ("short_circuit_boards", "fault_contributions", "earth_faults")}
    for key, column, label in (
        ("short_circuit_boards", "ip_ka", "ip"),
        ("short_circuit_boards", "ik_initial_ka", "I''k"),
        ("fault_contributions", "iac_half_ka", "Iac(T/2)"),
        ("earth_faults", "capacitive_a", "Capacitive current"),
    ):
        worked = lines[key]
        assert worked is not None
        result = next(line.result for line in worked.lines if line.label == label)
        shown = float(_texts(key, column)[0])
        assert float(result.split()[0]) == pytest.approx(shown, rel=5e-3)


def test_value_just_beyond_its_rating_never_prints_equal_to_it(page: str) -> None:
    for key, value, limit, part in (
        ("board_ratings", "limited_peak_ka", "rated_peak_ka", "peak_percent"),
        ("breaker_ratings", "ip_ka", "icm_ka", "making_percent"),
        ("fault_duties", "value", "limit", ""),
    ):
        table = TABLES[key]
        numbers = [table.column(value), table.column(limit)]
        rows = [
            r
            for r, (a, b) in enumerate(zip(*numbers, strict=True))
            if isinstance(a, float) and isinstance(b, float) and b < a < 1.0001 * b
        ]
        assert rows, key
        for r in rows:
            assert _texts(key, value)[r] != _texts(key, limit)[r]
            assert not part or float(_texts(key, part)[r]) > 100.0
    assert f"{JUST_ABOVE_KA:.5f}" in page


def test_board_table_holds_the_result() -> None:
    table = TABLES["short_circuit_boards"]
    rows = [dict(zip([c.key for c in table.columns], row, strict=True)) for row in table.rows()]
    first = next(r for r in rows if r["case"] == "maximum" and r["board"] == "MSB 1")
    assert first["ip_ka"] == pytest.approx(CASE.ip_a[0] / 1000.0)
    assert first["ik_general_ka"] == pytest.approx(RESULT.modes[0].iec60909_maximum.ik_3ph_a[0] / 1000.0)
    assert first["dc_at_50_ms_percent"] == pytest.approx(100.0 * CASE.dc_part[0, 1])
    marked = [r["board"] for r in rows if r["remark"]]
    assert set(marked) == {RESULT.places.names[2]}


def test_dead_boards_and_modes_without_a_solution_have_no_row_of_currents() -> None:
    boards = set(TABLES["short_circuit_boards"].column("board"))
    assert OUTCOME.plant.boards[-1].name not in boards
    assert set(TABLES["short_circuit_boards"].column("mode")) == {OUTCOME.modes[0]}
    remarks = dict(
        zip(
            TABLES["short_circuit_findings"].column("remark"),
            TABLES["short_circuit_findings"].column("modes"),
            strict=True,
        )
    )
    assert remarks["No short-circuit study: no source is on line."] == OUTCOME.modes[-1]
    governing = TABLES["short_circuit_governing"]
    dead = governing.column("board").index(OUTCOME.plant.boards[-1].name)
    assert governing.column("mode")[dead] == "none"
    assert governing.column("ip_ka")[dead] is None


def test_contributions_add_up_to_the_board_and_name_their_branch() -> None:
    table = TABLES["fault_contributions"]
    keys = [c.key for c in table.columns]
    rows = [dict(zip(keys, row, strict=True)) for row in table.rows()]
    own = [r for r in rows if r["board"] == "MSB 1" and r["case"] == "maximum"]
    assert math.fsum(float(r["ip_ka"] or 0) for r in own) == pytest.approx(CASE.ip_a[0] / 1000.0)
    assert math.fsum(float(r["ip_share_percent"] or 0) for r in own) == pytest.approx(100.0)
    through = {r["source"]: r["through"] for r in own}
    assert (through["DG1"], through["DG2"]) == ("C-G1", "BT 1")
    assert through["small motors of MSB 1"] == "stands on the board"


def test_governing_mode_is_the_one_of_the_greatest_peak() -> None:
    large = _faults(made_up_faults.large_fault_outcome())
    place = 5
    peaks = {m.mode: float(m.maximum.ip_a[place]) for m in large.modes}
    found = governing_mode(large, place)
    assert found is not None
    assert peaks[found.mode] == max(peaks.values())
    assert greatest(list(peaks), list(peaks.values())) is not None


def test_extremes_name_every_mode_that_has_them_and_pass_over_what_is_dead() -> None:
    top = greatest(["a", "b", "c", "d"], [1.0, 2.0, math.nan, 2.0])
    low = least(["a", "b", "c", "d"], [1.0, 2.0, math.nan, 2.0])
    assert top is not None
    assert low is not None
    assert (top.value, top.modes) == (2.0, ("b", "d"))
    assert (low.value, low.modes) == (1.0, ("a",))
    assert greatest(["a"], [math.nan]) is None


def test_curves_meet_the_result_at_its_own_times() -> None:
    at = curves(CASE, 0, np.asarray(CASE.time_s))
    np.testing.assert_allclose(at.iac_a, CASE.iac_a[0], rtol=1e-12)
    np.testing.assert_allclose(at.idc_a, CASE.idc_a[0], rtol=1e-12)
    np.testing.assert_allclose(at.source_iac_a.sum(axis=0), at.iac_a)
    half = curves(CASE, 0, np.array([made_up_faults.HALF_S]))
    assert half.envelope_a[0] == pytest.approx(CASE.ip_a[0])


def test_source_that_blocks_gives_nothing_afterwards() -> None:
    ends = np.full(len(CASE.sources.names), np.inf)
    ends[0] = 0.15
    case = replace(CASE, parts=replace(CASE.parts, ends_s=ends))
    at = curves(case, 0, np.array([0.1, 0.2]))
    assert at.source_iac_a[0, 0] > 0.0
    assert at.source_iac_a[0, 1] == 0.0


def test_sections_of_one_busbar_are_drawn_once() -> None:
    leading = leading_boards(OUTCOME, RESULT)
    assert len(leading) == 4
    groups = one_busbar(RESULT, leading)
    assert groups[0] == (0, 1)
    assert all(3 not in group for group in groups), "the last board is dead"


def test_sources_equal_in_several_modes_stand_once() -> None:
    outcome = made_up_faults.large_fault_outcome()
    table = all_tables(outcome)["fault_sources"]
    own = [row for row in table.rows() if row[:2] == ("minimum", "DG1")]
    assert 1 <= len(own) < len(outcome.modes)
    assert sum(str(row[4]).count("; ") + 1 for row in own) == len(outcome.modes)


def test_assumed_sustained_current_is_said() -> None:
    table = TABLES["fault_sources"]
    said = dict(zip(table.column("source"), table.column("sustained_data"), strict=True))
    assert (said["DG1"], said["DG2"]) == ("not given: a bound stands in", "by data")
    assert said["small motors of MSB 1"] == ""


def test_verdict_grid_has_fault_ratings() -> None:
    grid = verdict_grid(OUTCOME)
    row = grid.cells[grid.subjects.index("fault ratings")]
    assert [cell.status for cell in row if cell] == ["exceeds"] * len(OUTCOME.modes)
    assert "never cleared" in {cell.figure for cell in row if cell}
    sentences = [f.sentence for f in findings(OUTCOME) if f.subject == "fault ratings"]
    assert any(s.startswith("C-001: heat of a fault") and "never cleared" in s for s in sentences)
    assert not any("no source is left" in s for s in sentences)


def test_worst_mode_of_each_duty_once_worst_first() -> None:
    table = TABLES["fault_duties"]
    assert len(set(zip(table.column("equipment"), table.column("quantity"), strict=True))) == table.n_rows
    order = ["exceeds", "not assessed", "close", "within"]
    verdicts = [str(v) for v in table.column("verdict")]
    assert verdicts == sorted(verdicts, key=order.index)
    row = table.column("equipment").index("MSB 1")
    assert table.column("modes")[row] == OUTCOME.modes[-1]


def test_missing_rating_and_dead_piece_are_words() -> None:
    boards = TABLES["board_ratings"]
    second = boards.column("board").index("MSB 2")
    assert _texts("board_ratings", "rated_peak_ka")[second] == "not given"
    assert _texts("board_ratings", "peak_percent")[second] == "not assessed"
    last = boards.column("board").index(OUTCOME.plant.boards[-1].name)
    assert boards.column("mode")[last] == "dead in every mode"
    assert boards.column("ip_ka")[last] is None


def test_what_does_not_clear_stands_first_and_says_so() -> None:
    table = TABLES["fault_clearing"]
    assert (table.column("result")[0], table.column("cleared_by")[0]) == ("does not clear", "nothing")
    assert _texts("fault_clearing", "clearing_s")[0] == "does not clear"
    by = dict(zip(table.column("device"), table.column("cleared_by"), strict=True))
    assert (by["Q1"], by["Q3"], by["Q4"]) == ("itself", "Q1, as backup", "its sources, which block")
    assert "Q5" not in by, "a device that is not judged"
    assert _texts("cable_heat", "heat_ka2s")[0] == "does not clear"


def test_devices_of_each_rule_have_their_own_table() -> None:
    names = [TABLES[k].column("device") for k in ("breaker_ratings", "high_voltage_breaker_ratings")]
    assert (set(names[0]), set(names[1])) == ({"Q1", "Q2", "Q5"}, {"Q3"})
    assert TABLES["fuse_ratings"].column("device") == ("Q4",)
    assert TABLES["short_time_ratings"].column("device") == ("Q1",)


def test_need_at_the_end_of_a_range_is_not_explained_by_a_ratio_of_none() -> None:
    ratings = OUTCOME.fault_ratings
    assert ratings is not None
    peak, needed = (np.array(v) for v in (ratings.devices.peak_ka, ratings.devices.needed_ka))
    peak[0], needed[0] = 106.521, 50.0
    devices = replace(ratings.devices, peak_ka=peak, needed_ka=needed)
    worked = breakers_table(replace(ratings, devices=devices), {}).worked
    assert worked is not None
    assert [line.label for line in worked.lines] == ["Needed, of Icu"]
    before = TABLES["breaker_ratings"].worked
    assert before is not None
    assert before.lines[0].figures == "48.4 kA / 2.1"


def test_json_holds_both_sheets_without_nan() -> None:
    document = json.loads(json_text(OUTCOME), parse_constant=pytest.fail)
    boards = document["tables"]["short_circuit_boards"]["rows"]
    assert boards[0]["ip_ka"] == float(CASE.ip_a[0]) / 1000.0
    cable = document["tables"]["cable_heat"]["rows"][0]
    assert cable["heat_ka2s"] is None
    assert document["tables"]["fault_clearing"]["rows"][0]["result"] == "does not clear"


@pytest.fixture(scope="module")
def book() -> Workbook:
    return load_workbook(BytesIO(result_workbook(OUTCOME)))


@pytest.mark.parametrize("name", SHEETS)
def test_sheet_has_its_tables_numbers_unrounded_and_room_for_them(name: str, book: Workbook) -> None:
    sheet = book[name]
    numbers = {
        f"{c.value:.12g}"
        for row in sheet.iter_rows()
        for c in row
        if isinstance(c.value, (int, float)) and not isinstance(c.value, bool)
    }
    titles = {sheet.cell(r, 1).value for r in range(1, sheet.max_row + 1)}
    for table in NEW.values():
        if table.sheet != name:
            continue
        assert table.title in titles
        for c, column in enumerate(table.columns):
            width = next(d.width for d in sheet.column_dimensions.values() if d.min <= c + 1 <= d.max)
            for value, text in zip(table.values[c], table.texts(c), strict=True):
                if isinstance(value, float) and math.isfinite(value) and not column.is_text:
                    assert f"{value:.12g}" in numbers
                    assert len(text) + 1 <= width, column.key


def test_native_charts_of_decay_stand_beside_the_numbers(book: Workbook) -> None:
    groups = one_busbar(RESULT, leading_boards(OUTCOME, RESULT))
    assert len(book["R Short-circuit"]._charts) == len(groups)
    # One board has no rating, which a chart would show as a rating of nought.
    assert len(book["R Fault ratings"]._charts) == 0


def test_figures_are_small_and_have_a_text_alternative(figures: Figures) -> None:
    for figure in (*figures.short_circuit, *figures.fault_ratings):
        _check_figure(figure)


def _check_figure(figure: Drawing) -> None:
    svg = figure.svg
    assert len(svg) < 60_000
    root = etree.fromstring(svg)
    assert root.get("role") == "img"
    assert len(root.findtext("desc")) > 40
    assert re.search(r"\[(kA|s|% of rating)\]", " ".join(root.itertext()))
    assert "nan" not in re.sub(r"<[^>]*>", "", svg).lower()


def test_figures_show_what_they_must(figures: Figures) -> None:
    assert [f.key for f in (*figures.short_circuit, *figures.fault_ratings)] == [
        "fig-fault-1", "fig-fault-2", "fig-fault-simulated-1", "fig-fault-duties", "fig-fault-peaks"
    ]  # fmt: skip
    words = " ".join(etree.fromstring(figures.short_circuit[0].svg).itertext())
    for text in ("a.c., √2 Iac", "d.c., idc", "greatest peak", "DG1", "small motors of MSB 1", "least fault"):
        assert text in words
    assert "MSB 1, MSB 2" in figures.short_circuit[0].title


def test_a_simulated_fault_stands_beside_both_standards(page: str) -> None:
    rows = list(TABLES["fault_simulations"].rows())
    keys = [c.key for c in TABLES["fault_simulations"].columns]
    peak = dict(zip(keys, rows[3], strict=True))
    assert (peak["case"], peak["place"]) == ("Fault <1>; Fault 2", OUTCOME.plant.boards[0].name)
    assert peak["ship_difference_percent"] == pytest.approx(100.0 * (34.0 / 40.0 - 1.0))
    assert peak["general_difference_percent"] == pytest.approx(2.5)
    assert (peak["known_from_percent"], peak["known_to_percent"]) == (-10.0, 5.0)
    assert "outside the known differences" in str(peak["remark"])
    first = dict(zip(keys, rows[0], strict=True))
    assert "Shore 1, Battery 1" in str(first["remark"])
    assert first["known_from_percent"] is None
    inside = dict(zip(keys, rows[1], strict=True))
    assert inside["remark"] == ""
    last = dict(zip(keys, rows[-1], strict=True))
    assert last["quantity"] == "not simulated"
    assert last["remark"] == "there is no fault place 'Galley'."
    assert "fig-fault-simulated-1" in page
    assert "Fault &lt;1&gt;" in page


def test_no_simulated_fault_leaves_no_empty_table(figures: Figures) -> None:
    outcome = replace(OUTCOME, short_circuit=replace(RESULT, simulated=()))
    with house_style():
        left = short_circuit_figures(outcome)
    page = drawn.page_with(outcome, replace(figures, short_circuit=left))
    assert "Simulated faults beside" not in page
    assert "fig-fault-simulated" not in page


def test_a_workbook_without_faults_to_simulate_says_how_to_name_one() -> None:
    tables = all_tables(replace(OUTCOME, short_circuit=replace(RESULT, simulated=())))
    assert tables["fault_simulations"].n_rows == 0
    assert "a row of kind fault on the sheet Events" in tables["fault_simulations"].notes[0]


def test_through_faults_show_what_is_exceeded_and_what_is_not_assessed(page: str) -> None:
    table = TABLES["through_faults"]
    peak, rated = table.texts(table.index("peak_ka")), table.texts(table.index("rated_peak_ka"))
    assert peak[0] != rated[0]  # 45.0001 against 45.00004
    assert table.texts(table.index("heat_percent"))[1] == "not assessed"
    assert table.texts(table.index("withstand_ka"))[2] == "not given"
    assert table.column("device")[:2] == ("Q1", "")
    assert "Transformers and reactors against the fault behind them" in page
