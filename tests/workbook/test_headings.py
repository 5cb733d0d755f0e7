"""Headings: how names are compared, how units are converted, what is nearly right."""

from __future__ import annotations

import string

import pytest
from hypothesis import given
from hypothesis import strategies as st

from study.units import UNITS
from study.workbook.columns import Column
from study.workbook.headings import (
    HeadingIndex,
    Match,
    Misfit,
    edit_distance,
    heading_key,
    known_unit,
    nearest,
    unit_factor,
)
from study.workbook.sheets import BY_NAME, SHEETS

GENSETS = HeadingIndex(BY_NAME["Gensets"])
DEMAND = HeadingIndex(BY_NAME["Demand"], ["At sea", "Harbour: alongside", "Pier [summer]"])
RUNNING = HeadingIndex(BY_NAME["Running"], ["At sea", "Harbour: alongside", "Pier [summer]"])


@pytest.mark.parametrize(
    "text",
    [
        "Xd'' saturated [pu]",
        "XD'' SATURATED [pu]",
        "Xd’’ saturated [pu]",
        "Xd′′ saturated [pu]",
        "Xd″ saturated [pu]",
        "Xd” saturated [pu]",
        'Xd" saturated [pu]',
        "Xd''\nsaturated\n[pu]",
        "  Xd ''  saturated[ pu ]",
        "Xd''\u00a0saturated [pu]",
        "X''d saturated [p.u.]",
    ],
)
def test_case_blanks_line_breaks_and_primes_do_not_count(text: str) -> None:
    match = GENSETS.recognise(text)
    assert isinstance(match, Match)
    assert match.column.field == "x_d2_saturated_pu"


@pytest.mark.parametrize(
    ("heading", "factor"),
    [
        ("Rated apparent power [MVA]", 1000.0),
        ("Rated voltage [kV]", 1000.0),
        ("Engine power [MW]", 1000.0),
        ("Engine power [W]", 0.001),
        ("Start delay [ms]", 0.001),
        ("Start delay [min]", 60.0),
        ("Voltage droop [pu]", 100.0),
        ("Xd [%]", 0.01),
        ("Rated power factor [%]", 0.01),
        ("Rated power factor [pu]", 1.0),
        ("Rated power factor [-]", 1.0),
        ("Engine power [KW]", 1.0),
        ("Rated apparent power [kva]", 1.0),
    ],
)
def test_units_are_converted(heading: str, factor: float) -> None:
    # Prefixes of the SI brochure: k 1e3, M 1e6, m 1e-3; per cent is a hundredth.
    match = GENSETS.recognise(heading)
    assert isinstance(match, Match)
    assert match.factor == pytest.approx(factor, rel=1e-12)


@pytest.mark.parametrize(
    ("heading", "code"),
    [
        ("Voltage droop", "missing-unit"),
        ("Voltage droop []", "missing-unit"),
        ("Voltage droop [-]", "missing-unit"),
        ("Voltage droop [V]", "wrong-unit"),
        ("Voltage droop [parts]", "unknown-unit"),
        ("Voltage droop %", "unit-without-brackets"),
        ("Voltage droop (%)", "unit-without-brackets"),
        ("Voltage droop, pu", "unit-without-brackets"),
        ("Voltage drop [%]", "near-miss-heading"),
        ("Voltge droop [%]", "near-miss-heading"),
        ("Voltag drop [%]", "near-miss-heading"),
        ("Board [V]", "wrong-unit"),
        ("Engine power [mW]", "unknown-unit"),
        ("Xb [pu]", "near-miss-heading"),
    ],
)
def test_headings_that_cannot_be_read(heading: str, code: str) -> None:
    misfit = GENSETS.recognise(heading)
    assert isinstance(misfit, Misfit)
    assert misfit.code == code


@pytest.mark.parametrize("heading", ["Drawing", "Maker", "Cost [EUR]", "Class approval", "Tag", "N"])
def test_headings_of_the_engineer_are_left_alone(heading: str) -> None:
    assert GENSETS.recognise(heading) is None


@pytest.mark.parametrize(
    ("heading", "mode", "field"),
    [
        ("at SEA : in use", "At sea", "in_use"),
        ("Harbour: alongside: load factor [%]", "Harbour: alongside", "load_factor"),
        ("Pier [summer]: duty", "Pier [summer]", "duty"),
        ("Pier [summer]: load factor [pu]", "Pier [summer]", "load_factor"),
    ],
)
def test_columns_of_a_mode(heading: str, mode: str, field: str) -> None:
    match = DEMAND.recognise(heading)
    assert isinstance(match, Match)
    assert (match.mode, match.column.field) == (mode, field)


@pytest.mark.parametrize("mode", ["At sea", "Harbour: alongside", "Pier [summer]"])
def test_the_state_column_is_the_mode(mode: str) -> None:
    match = RUNNING.recognise(mode.upper())
    assert isinstance(match, Match)
    assert match.mode == mode


def test_one_name_with_two_units() -> None:
    index = HeadingIndex(BY_NAME["Curves"])
    found = [index.recognise(text) for text in ("Current [x In]", "Current [A]", "Current [kA]")]
    assert [m.column.field for m in found if isinstance(m, Match)] == ["current_in", "current_a", "current_a"]


@pytest.mark.parametrize("spec", SHEETS, ids=lambda spec: spec.name)
def test_every_own_heading_is_recognised(spec) -> None:  # type: ignore[no-untyped-def]
    index = HeadingIndex(spec)
    for column in spec.columns:
        match = index.recognise(column.heading)
        assert isinstance(match, Match)
        assert match.column is column
        assert match.factor == 1.0


@pytest.mark.parametrize("spec", SHEETS, ids=lambda spec: spec.name)
def test_older_names_clash_with_no_other(spec) -> None:  # type: ignore[no-untyped-def]
    seen: dict[tuple[str, str], Column] = {}
    for column in spec.columns:
        for name in (column.name, *column.older):
            assert seen.setdefault((heading_key(name), column.unit), column) is column


def test_every_unit_of_a_heading_is_known() -> None:
    units = {c.unit for spec in SHEETS for c in (*spec.columns, *spec.items)} - {"", "% U"}
    assert units <= set(UNITS)


@pytest.mark.parametrize(
    ("a", "b", "distance"),
    [
        # The usual worked examples of the edit distance: Wagner and Fischer, J. ACM 21 (1974); from memory.
        ("kitten", "sitting", 3),
        ("saturday", "sunday", 3),
        ("", "abc", 3),
        ("abc", "abc", 0),
    ],
)
def test_edit_distance(a: str, b: str, distance: int) -> None:
    assert edit_distance(a, b, 5) == edit_distance(b, a, 5) == distance
    assert edit_distance(a, b, 1) == min(distance, 2)


def test_nearest_names_come_best_first() -> None:
    assert nearest("MSB-P", ["ESB", "MSB P", "MSB S", "Bow thruster"])[:2] == ("MSB P", "MSB S")
    assert nearest("anything else", ["ESB", "MSB P"]) == ()


@pytest.mark.parametrize("text", ["Mm", "MS", "Mohm", "mva", "mW", "K", "kilo", "", "%%"])
def test_units_that_are_refused(text: str) -> None:
    assert known_unit(text) is None


def test_per_cent_of_voltage() -> None:
    column = BY_NAME["Transfers"].column("transfer_at_pu")
    assert [unit_factor(column, unit) for unit in ("% U", "%", "pu")] == [1.0, 1.0, 100.0]


@given(st.text(alphabet=string.printable + "’″′[]%Ω°", max_size=40))
def test_any_text_is_a_heading_or_is_not(text: str) -> None:
    assert isinstance(GENSETS.recognise(text), (Match, Misfit, type(None)))
