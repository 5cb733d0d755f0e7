"""Rounding: nothing prints equal to a limit that it exceeds, nothing prints as minus nought."""

from __future__ import annotations

import math
from decimal import ROUND_HALF_UP, Decimal

from hypothesis import example, given
from hypothesis import strategies as st

from study.report import numbers

_FINITE = st.floats(min_value=1e-3, max_value=1e6, allow_nan=False)


@given(limit=_FINITE, beyond=st.floats(min_value=1e-12, max_value=0.5))
@example(limit=100.0, beyond=4e-6)
def test_value_beyond_its_limit_never_prints_equal_to_it(limit: float, beyond: float) -> None:
    value = limit * (1.0 + beyond)
    printed = numbers.judged_pair(value, limit, exceeds=value > limit)
    assert (printed[0] != printed[1]) == (value != limit)


def test_adjacent_floats_still_print_apart() -> None:
    value = math.nextafter(100.0, 200.0)
    assert numbers.judged_pair(value, 100.0, exceeds=True) == ("100.00000000000001", "100.00000000000000")


def test_value_below_a_lower_limit_prints_below_it() -> None:
    assert numbers.judged_pair(24.9996, 25.0, exceeds=True) == ("24.9996", "25.0000")


def test_value_inside_keeps_four_significant_digits() -> None:
    assert numbers.judged_pair(99.99, 100.0, exceeds=False) == ("100.0", "100.0")


@given(st.floats(allow_nan=False, allow_infinity=False, min_value=-1e9, max_value=1e9), st.integers(0, 6))
def test_number_reads_back_within_half_of_its_last_digit(value: float, decimals: int) -> None:
    text = numbers.number(value, decimals)
    assert "-" not in text
    back = float(text.replace(numbers.MINUS, "-"))
    assert abs(back - value) <= 0.5 * 10.0**-decimals * (1 + 1e-6) + 1e-12 * abs(value)
    assert text.startswith(numbers.MINUS) == (back < 0)


def test_halves_round_away_from_zero_as_in_a_spreadsheet() -> None:
    assert [numbers.number(v, 1) for v in (39.15, 0.25, -0.25, 2.675e2)] == ["39.2", "0.3", "−0.3", "267.5"]


@given(
    st.floats(allow_nan=False, allow_infinity=False, min_value=-1e12, max_value=1e12)
    | st.decimals(-10000, 10000, places=4).map(float),
    st.integers(0, 9),
)
@example(6923948368.566255, 7)
@example(2.5, 0)
@example(1e-7, 3)
def test_rounding_is_that_of_the_number_as_written(value: float, decimals: int) -> None:
    """The way round is Python's decimal arithmetic on the shortest decimal that means the number."""
    exact = Decimal(repr(value)).quantize(Decimal(1).scaleb(-decimals), ROUND_HALF_UP)
    printed = numbers.number(value, decimals).replace(numbers.MINUS, "-")
    assert Decimal(printed) == exact
    assert len(printed.partition(".")[2]) == decimals


@given(st.lists(st.tuples(st.floats(allow_nan=False, allow_infinity=False), st.integers(0, 7))))
def test_a_column_prints_as_its_numbers_do(cells: list[tuple[float, int]]) -> None:
    halves = [((n + 0.5) / 10.0**n, n) for n in range(8)]
    values, decimals = zip(*halves, *cells, strict=True)
    assert numbers.column_texts(values, decimals) == [numbers.number(v, d) for v, d in (*halves, *cells)]


def test_what_is_not_a_number_prints_as_words() -> None:
    assert numbers.number(math.nan, 1) == "n/a"
    assert numbers.number(math.inf, 1, "no set left") == "no set left"
    assert numbers.quantity(math.nan, "kW") == "n/a"


def test_column_of_noise_and_numbers_does_not_grow_digits() -> None:
    assert numbers.column_decimals([1e-13, 400.0, 55.5], most=2) == 1
    assert numbers.column_decimals([]) == 0
    assert numbers.column_decimals([math.nan, 0.0]) == 0


def test_small_number_beside_a_large_one_does_not_print_as_nought() -> None:
    decimals = numbers.column_decimals([0.04, 5600.0], most=2)
    assert numbers.number(0.04, decimals) == "0.04"


def test_input_numbers_keep_the_decimals_they_were_written_with() -> None:
    assert numbers.exact_decimals([0.55, 250.0]) == 2
    assert numbers.exact_decimals([100.0 * 0.07, 35.0], 1) == 0


def test_spreadsheet_formats() -> None:
    assert numbers.excel_format(3) == "0.000"
