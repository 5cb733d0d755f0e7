"""One cell against its column: what is read, and what is refused with which words."""

from __future__ import annotations

from datetime import datetime
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from study.workbook.cells import Refused, is_blank, plain, read_cell, shown
from study.workbook.columns import (
    LARGE,
    Bounds,
    Column,
    above,
    between,
    choice,
    integer,
    number,
    ratio,
    yes_no,
)
from study.workbook.headings import Match
from study.workbook.sheet_xml import Percent

LENGTH = number("Length", "m", "length_m", above(0.0, 5000.0), "one way")
DROOP = number("Voltage droop", "%", "droop_pu", between(0.0, 20.0), "of rated voltage")
REACTANCE = number("Xd", "pu", "x_d_pu", LARGE, "")
COS_PHI = ratio("Power factor", "cos_phi", above(0.0, 1.0), "")
SETTING = number("Instantaneous current", "A", "i_a", LARGE, "", words=("off",))
COUNT = integer("Installed", "installed", between(1, 100), "")
ROLE = choice("Role", "role", ("main", "emergency"), "")
PHASES = choice("Phases", "phases", ("3", "2", "1"), "")
TINNED = yes_no("Tinned", "tinned", "")
DATE = Column(name="Date", field="date", kind="date")
NAME = Column(name="Load", field="name", kind="text")


def _read(value: Any, column: Column, factor: float = 1.0) -> Any:
    return read_cell(value, Match(column=column, factor=factor))


@pytest.mark.parametrize(
    ("value", "column", "factor", "read"),
    [
        (5.0, LENGTH, 1.0, 5.0),
        (0.25, LENGTH, 1000.0, 250.0),
        (0.035, DROOP, 100.0, 3.5),
        (0.0, DROOP, 1.0, 0.0),
        (Percent(0.04), DROOP, 1.0, 4.0),
        (Percent(0.035), DROOP, 100.0, 3.5),
        (Percent(0.15), REACTANCE, 1.0, 0.15),
        (Percent(0.15), REACTANCE, 0.01, 0.15),
        (Percent(0.8), COS_PHI, 1.0, 0.8),
        (80.0, COS_PHI, 0.01, 0.8),
        ("off", SETTING, 1.0, "off"),
        (" OFF ", SETTING, 1.0, "off"),
        (630.0, SETTING, 1.0, 630.0),
        (3.0, COUNT, 1.0, 3),
        ("MAIN ", ROLE, 1.0, "main"),
        (3.0, PHASES, 1.0, "3"),
        ("3", PHASES, 1.0, "3"),
        (True, TINNED, 1.0, "yes"),
        ("No", TINNED, 1.0, "no"),
        (datetime(2025, 3, 14, 9), DATE, 1.0, "2025-03-14"),
        (" 2025-03-14 ", DATE, 1.0, "2025-03-14"),
        (101.0, NAME, 1.0, "101"),
        ("Pump\n 1", NAME, 1.0, "Pump 1"),
        ("=SUM(A1)", NAME, 1.0, "=SUM(A1)"),
    ],
)
def test_what_is_read(value: Any, column: Column, factor: float, read: Any) -> None:
    found = _read(value, column, factor)
    assert found == read
    assert type(found) is type(read)


@pytest.mark.parametrize(
    ("value", "column", "code", "words"),
    [
        (-5.0, LENGTH, "out-of-range", "Length is -5 m"),
        (0.0, LENGTH, "out-of-range", "Length is 0 m"),
        ("4,5", DROOP, "decimal-comma", "“4,5”"),
        ("1.234,5", DROOP, "decimal-comma", "“1.234,5”"),
        ("1\u00a0234,5", DROOP, "decimal-comma", "234,5"),
        ("4.5", DROOP, "text-number", "“4.5”, not a number"),
        ("nan", DROOP, "text-number", "“nan”"),
        ("about 4", DROOP, "text-number", "“about 4”"),
        ("off", LENGTH, "text-number", "“off”"),
        (True, DROOP, "truth-for-number", "TRUE"),
        (datetime(2025, 4, 5), DROOP, "date-for-number", "2025-04-05"),
        (float("inf"), REACTANCE, "not-finite", "Xd"),
        (Percent(0.5), LENGTH, "percent-format", "50 %"),
        (Percent(4.0), DROOP, "out-of-range", "400 %"),
        (2.5, COUNT, "not-whole", "2.5"),
        ("mian", ROLE, "unknown-choice", "“mian”"),
        ("maybe", TINNED, "unknown-choice", "“maybe”"),
        ("14.03.2025", DATE, "not-a-date", "“14.03.2025”"),
        (45730.0, DATE, "not-a-date", "45730"),
        (datetime(2025, 2, 1), NAME, "not-a-name", "2025-02-01"),
    ],
)
def test_what_is_refused(value: Any, column: Column, code: str, words: str) -> None:
    refused = _read(value, column)
    assert isinstance(refused, Refused)
    assert refused.code == code
    assert words in refused.found
    assert refused.wanted


def test_the_range_is_told_with_the_base() -> None:
    assert _read(-5.0, LENGTH).wanted == "give a number above 0 and up to 5000 m (one way)"


def test_the_closest_choice_is_offered() -> None:
    assert "did you mean main?" in _read("mian", ROLE).wanted


@pytest.mark.parametrize(
    ("bounds", "inside", "outside"),
    [
        (above(0.0), 1e-12, 0.0),
        (between(0.0, 1.0), 1.0, 1.0000001),
        (Bounds(low=0.0, high=1.0, high_open=True), 0.999, 1.0),
        (Bounds(low=1.0, high=9.0, or_zero=True), 0.0, 0.5),
        (Bounds(), -1e300, None),
    ],
)
def test_ends_of_a_range(bounds: Bounds, inside: float, outside: float | None) -> None:
    assert bounds.hold(inside)
    assert outside is None or not bounds.hold(outside)


@pytest.mark.parametrize("value", [None, "", "   ", "\u00a0", "\n\t"])
def test_blanks(value: Any) -> None:
    assert is_blank(value)


def test_long_texts_are_cut_in_messages() -> None:
    assert len(shown("x" * 500)) < 80


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_a_plain_number_is_never_changed(value: float) -> None:
    read = _read(value, number("Anything", "kW", "p_kw", Bounds(), ""))
    assert read == value


@given(st.floats(min_value=1e-6, max_value=1e6), st.sampled_from([0.001, 0.01, 100.0, 1000.0]))
def test_a_conversion_is_within_the_last_digits(value: float, factor: float) -> None:
    # 15 significant digits are what Excel itself keeps.
    read = _read(value, number("Anything", "kW", "p_kw", Bounds(), ""), factor)
    assert read == pytest.approx(value * factor, rel=1e-14)


@given(st.one_of(st.none(), st.text(), st.floats(), st.booleans(), st.datetimes()))
def test_any_value_has_a_text_or_none(value: Any) -> None:
    assert value is None or plain(value) is None or isinstance(plain(value), str)
    assert isinstance(shown(value), str)
