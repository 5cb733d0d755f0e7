"""The verdict is judged unrounded, and NaN is never a pass."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from study.checks.verdict import Verdict, judge, make_verdict, worst

FINITE = st.floats(-1e6, 1e6)


def a_verdict(value: float, limit: float = 100.0, **changes: object) -> Verdict:
    values: dict[str, object] = {
        "mode": "At sea",
        "subject": "loading",
        "equipment": "DG1",
        "quantity": "kW",
        "value": value,
        "limit": limit,
        "unit": "%",
        "close_margin": 0.05,
        "basis": "test",
    }
    return make_verdict(**(values | changes))  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("value", "sense", "status"),
    [
        (94.9, "at most", "within"),
        (95.1, "at most", "close"),
        (100.0, "at most", "close"),
        (100.0 + 1e-12 * 100, "at most", "exceeds"),
        (105.1, "at least", "within"),
        (104.9, "at least", "close"),
        (99.999999, "at least", "exceeds"),
    ],
)
def test_the_word_follows_the_unrounded_value(value: float, sense: str, status: str) -> None:
    assert judge(value, 100.0, sense, 0.05)[0] == status  # type: ignore[arg-type]


@pytest.mark.parametrize(("value", "limit"), [(math.nan, 1.0), (1.0, math.nan), (math.nan, math.nan)])
def test_what_is_not_known_is_not_assessed(value: float, limit: float) -> None:
    status, margin = judge(value, limit, "at most", 0.05)
    assert status == "not assessed"
    assert math.isnan(margin)


@given(value=FINITE, limit=FINITE.filter(bool))
def test_the_margin_is_negative_exactly_where_the_limit_is_exceeded(value: float, limit: float) -> None:
    status, margin = judge(value, limit, "at most", 0.05)
    assert (status == "exceeds") == (margin < 0)


@pytest.mark.parametrize(("value", "depends"), [(96.0, True), (90.0, False), (104.0, True), (111.0, False)])
def test_a_verdict_that_flips_within_the_tolerance_depends_on_data(value: float, depends: bool) -> None:
    assert a_verdict(value, data_tolerance=0.05).depends_on_data is depends


def test_a_remedy_stands_only_where_something_exceeds() -> None:
    assert a_verdict(101.0, remedy="cure").remedy == "cure"
    assert a_verdict(99.0, remedy="cure").remedy == ""


def test_the_worst_is_the_one_that_exceeds_most() -> None:
    rows = (a_verdict(50.0), a_verdict(math.nan), a_verdict(120.0), a_verdict(101.0), a_verdict(99.0))
    governing = worst(rows)
    assert governing is not None
    assert governing.value == 120.0
    assert worst(()) is None


def test_not_assessed_weighs_more_than_close() -> None:
    governing = worst((a_verdict(99.0), a_verdict(math.nan)))
    assert governing is not None
    assert governing.status == "not assessed"


@pytest.mark.parametrize(
    ("value", "limit", "sense", "status", "margin"),
    [
        (math.inf, 100.0, "at most", "exceeds", -math.inf),
        (5.0, math.inf, "at most", "within", 1.0),
        (5.0, math.inf, "at least", "exceeds", -1.0),
        (math.inf, math.inf, "at most", "exceeds", -1.0),
    ],
)
def test_what_has_no_end_is_judged_all_the_same(
    value: float, limit: float, sense: str, status: str, margin: float
) -> None:
    assert judge(value, limit, sense, 0.05) == (status, margin)  # type: ignore[arg-type]
