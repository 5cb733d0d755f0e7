"""The dip study on page, sheet and in the JSON file, from a made-up result."""

from __future__ import annotations

import json
import re
from dataclasses import replace

import pytest

from study.checks.dips import judge_dips
from study.checks.limits import limits_in_force
from study.report.catalogue import all_tables
from study.report.charts_dips import dips_figures
from study.report.content import StudyOutcome
from study.report.html import report_page
from study.report.json_out import json_text
from study.report.plotting import house_style
from study.report.tables_dips_traces import kept_rows
from tests.report.made_up import outcome
from tests.report.made_up_dips import case, dips


@pytest.fixture(scope="module")
def study() -> StudyOutcome:
    bare = outcome()
    limits = limits_in_force(())
    result = dips(bare.modes[0], bare.plant.loads[0].name)
    return replace(
        bare,
        dips=result,
        verdicts=(*bare.verdicts, *judge_dips(bare.plant, result, limits)),
        limits=tuple(limits.by_key.values()),
    )


def test_the_table_of_cases(study: StudyOutcome) -> None:
    table = all_tables(study)["dips_cases"]
    assert table.column("case") == ("Pump start", "Set trips", "Not possible")
    assert table.column("u_least_percent")[0] == pytest.approx(84.0)
    assert table.texts(table.index("u_recovery_s"))[1] == "not back"
    assert table.column("outcome")[2] == "not simulated: the mode has no solution"
    assert table.column("verdict") == ("exceeds", "exceeds", "not assessed")
    assert table.worked is not None
    assert "16.00 %" in table.worked.lines[0].result


def test_the_worked_estimate_can_be_worked(study: StudyOutcome) -> None:
    worked = all_tables(study)["dips_starts"].worked
    assert worked is not None
    numbers = [float(x.replace("−", "-")) for x in re.findall(r"\d+\.\d+", worked.lines[0].figures)]
    assert numbers[:2] == [1.0, 0.0]
    path, motor, source = complex(0.01, 0.01), complex(0.3, 1.2), complex(0.02, 0.2)
    assert numbers[2:] == [0.01, 0.01, 0.3, 1.2, 0.02, 0.2, 0.01, 0.01, 0.3, 1.2]
    assert abs((path + motor) / (source + path + motor)) == pytest.approx(0.855, abs=0.01)


def test_every_simulated_case_has_a_figure(study: StudyOutcome) -> None:
    with house_style():
        drawn = dips_figures(study)
    assert [d.title for d in drawn] == [f"Pump start ({study.modes[0]})", f"Set trips ({study.modes[0]})"]
    assert "does not come back" in drawn[1].svg


def test_page_and_json_hold_the_section(study: StudyOutcome) -> None:
    page = report_page(study)
    assert "Voltage dips and recovery" in page
    assert "Contactors that would open" in page
    tables = json.loads(json_text(study))["tables"]
    assert tables["dips_traces"]["rows"][0]["u_percent"] == pytest.approx(100.0)


def test_thinning_keeps_the_extremes() -> None:
    one = case("At sea")
    rows = kept_rows(one, 3)
    assert {0, 3, len(one.time_s) - 1} <= set(rows.tolist())
    assert len(kept_rows(replace(one, time_s=one.time_s[:0]), 3)) == 0
