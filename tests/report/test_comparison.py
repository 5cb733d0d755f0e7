"""Two modes, and two revisions, side by side as text."""

from __future__ import annotations

import dataclasses

from study.report.comparison import modes_side_by_side, revisions_side_by_side, verdict_summary
from tests.report.made_up import outcome as made_up


def test_the_summary_has_a_word_for_every_subject_and_mode() -> None:
    outcome = made_up()
    lines = verdict_summary(outcome).splitlines()
    subjects = {v.subject for v in outcome.verdicts}
    assert {line.split("  ")[0] for line in lines[1:-1]} == subjects
    exceeding = sum(v.status == "exceeds" for v in outcome.verdicts)
    assert lines[-1].startswith(f"{exceeding} values exceed")


def test_two_modes_stand_side_by_side() -> None:
    outcome = made_up()
    one, other = outcome.modes[:2]
    text = modes_side_by_side(outcome, one, other)
    head = text.splitlines()[0].split()
    assert head == [*one.split(), *other.split()]
    assert "Load [kW]" in text


def test_a_revision_names_the_changed_field_and_the_turned_verdict() -> None:
    old = made_up()
    load = old.plant.loads[0]
    changed = dataclasses.replace(load, p_rated_kw=load.p_rated_kw + 1.0)
    plant = dataclasses.replace(old.plant, loads=(changed, *old.plant.loads[1:]))
    first = old.verdicts[0]
    turned = dataclasses.replace(first, status="exceeds" if first.status != "exceeds" else "within")
    new = dataclasses.replace(old, plant=plant, verdicts=(turned, *old.verdicts[1:]))
    text = revisions_side_by_side(old, new)
    assert "inputs changed: 1" in text
    change = f"Rated output [kW] {load.p_rated_kw:g} -> {changed.p_rated_kw:g}"
    assert f"{load.name} (loads): {change}" in text
    assert "verdicts changed: 1" in text
    assert f"{first.status} (" in text


def test_the_same_workbook_has_no_changes() -> None:
    outcome = made_up()
    text = revisions_side_by_side(outcome, outcome)
    assert "inputs changed: 0" in text
    assert "verdicts changed: 0" in text
