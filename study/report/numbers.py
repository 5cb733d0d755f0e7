"""The one place of rounding: numbers as text, with their units.

Numbers in a column share their decimals, so that they line up on the decimal point. A judged value gets as
many digits as it takes to differ from a limit that it exceeds.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from decimal import ROUND_HALF_UP, Context, Decimal

import numpy as np

NOT_AVAILABLE = "n/a"
MINUS = "−"
_MOST_DIGITS = 15
_HUGE = 1e15
_ROUNDING = Context(prec=50, rounding=ROUND_HALF_UP)
_NOISE = 1e-9
_SAFE, _NEAR_HALF = 1e8, 1e-6  # below the one, a part of a unit is known far better than the other


def percent(value_pu: float) -> float:
    """Return a fraction in percent.

    Parameters
    ----------
    value_pu : float
        Fraction [1].

    Returns
    -------
    float
        The same [%].

    Examples
    --------
    >>> percent(0.025)
    2.5
    """
    return 100.0 * float(value_pu)


def significant_decimals(value: float, digits: int = 4, most: int = 6) -> int:
    """Return the decimals that show a number with so many significant digits.

    Parameters
    ----------
    value : float
        Any number; 0 and NaN ask for no decimals.
    digits : int
        Significant digits wanted [1].
    most : int
        Never more decimals than this [1].

    Returns
    -------
    int
        Decimals, 0 or more [1].

    Examples
    --------
    >>> [significant_decimals(v) for v in (12345.0, 231.4, 0.98765)]
    [0, 1, 4]
    """
    if not math.isfinite(value) or value == 0.0:
        return 0
    return min(most, max(0, digits - 1 - math.floor(math.log10(abs(value)))))


def column_decimals(values: Iterable[float], most: int = 2, digits: int = 3) -> int:
    """Return the decimals that a column of numbers shares.

    So many significant digits for the smallest number, but not more than one above that for the largest;
    and always enough that the smallest does not print as zero, within `most`.

    Parameters
    ----------
    values : iterable of float
        The column; NaN and infinite are passed over.
    most : int
        Never more decimals than this [1].
    digits : int
        Significant digits of the smallest number [1].

    Returns
    -------
    int
        Decimals, 0 or more [1].

    Examples
    --------
    >>> column_decimals([0.4, 80.0]), column_decimals([0.4, 3500.0]), column_decimals([1200.0, 3500.0])
    (2, 1, 0)
    """
    sizes = np.abs(np.fromiter(values, float))
    sizes = sizes[np.isfinite(sizes)]
    largest = float(sizes.max(initial=0.0))
    sizes = sizes[sizes > _NOISE * largest]
    if not len(sizes):
        return 0
    smallest = float(sizes.min())
    wanted = min(
        significant_decimals(smallest, digits, most), significant_decimals(largest, digits + 1, most)
    )
    return min(most, max(wanted, significant_decimals(smallest, 1, most)))


def exact_decimals(values: Iterable[float], most: int = 2) -> int:
    """Return the fewest decimals that show every number as it was written.

    Parameters
    ----------
    values : iterable of float
        The column; NaN and infinite are passed over.
    most : int
        Never more decimals than this [1].

    Returns
    -------
    int
        Decimals, 0 or more [1].

    Examples
    --------
    >>> exact_decimals([0.55, 250.0]), exact_decimals([11.0, 45.0])
    (2, 0)
    """
    known = [v for v in values if math.isfinite(v)]
    for decimals in range(most):
        if all(abs(round(v, decimals) - v) <= _NOISE * max(1.0, abs(v)) for v in known):
            return decimals
    return most


def decimals_apart(value: float, limit: float, decimals: int, most: int = _MOST_DIGITS) -> int:
    """Return the decimals, `decimals` or more, at which a value and its limit print differently.

    Parameters
    ----------
    value, limit : float
        In the same unit.
    decimals : int
        Decimals wanted otherwise [1].
    most : int
        Where to stop looking [1].

    Returns
    -------
    int
        Decimals [1]; `decimals` where the two are equal or one is not finite.

    Examples
    --------
    >>> decimals_apart(100.004, 100.0, 1), decimals_apart(100.0, 100.0, 1)
    (3, 1)
    """
    if value == limit or not (math.isfinite(value) and math.isfinite(limit)):
        return decimals
    for more in range(decimals, most + 1):
        if number(value, more) != number(limit, more):
            return more
    return decimals if most < _MOST_DIGITS else most


def close_rows(values: Sequence[float], limits: Sequence[float], decimals: int) -> list[int]:
    """Return the rows in which a value and its limit may print alike: not further apart than a last digit.

    Parameters
    ----------
    values, limits : sequence of float
        In the same unit.
    decimals : int
        Decimals that they print with [1].

    Returns
    -------
    list of int
        Numbers of the rows, from 0.

    Examples
    --------
    >>> close_rows([100.004, 55.0, 100.0], [100.0, 100.0, 100.0], 1)
    [0, 2]
    """
    with np.errstate(invalid="ignore"):
        apart = np.abs(np.array(values, float) - np.array(limits, float))
    return [int(row) for row in np.flatnonzero(apart <= 1.01 * 10.0**-decimals)]


def number(value: float, decimals: int, infinite: str = "infinite", missing: str = NOT_AVAILABLE) -> str:
    """Return a number as text with fixed decimals and a true minus sign; never minus nought.

    Parameters
    ----------
    value : float
        Number to print; NaN becomes ``n/a``.
    decimals : int
        Decimals [1].
    infinite, missing : str
        Words for an infinite value and for NaN.

    Returns
    -------
    str
        The text.

    Examples
    --------
    >>> number(-0.04, 1), number(12.345, 2), number(float("nan"), 1)
    ('0.0', '12.35', 'n/a')
    """
    if math.isnan(value):
        return missing
    if math.isinf(value):
        return infinite
    text = _rounded(value, decimals)
    if not text.strip("-0."):
        return text.lstrip("-")
    return text.replace("-", MINUS)


def column_texts(values: Sequence[float], decimals: Sequence[int]) -> list[str]:
    """Return numbers as `number` does, a whole column in a fraction of the time.

    Parameters
    ----------
    values : sequence of float
        Numbers to print, all finite.
    decimals : sequence of int
        Decimals of each [1].

    Returns
    -------
    list of str
        One text for each.

    Examples
    --------
    >>> column_texts([-0.04, 12.345, -7.0], [1, 2, 0])
    ['0.0', '12.35', '−7']
    """
    given = np.array(values, float)
    with np.errstate(over="ignore", invalid="ignore"):
        scaled = np.abs(given) * np.power(10.0, np.array(decimals, float))
        # Well away from a half, a number as written and its binary value round alike.
        near = ~(scaled < _SAFE) | (np.abs(scaled % 1.0 - 0.5) < _NEAR_HALF)
    texts = [f"{v:.{d}f}" for v, d in zip(values, decimals, strict=True)]
    for k in np.flatnonzero(near | np.signbit(given)).tolist():
        texts[k] = number(values[k], decimals[k])
    return texts


def _rounded(value: float, decimals: int) -> str:
    """Round the number as it is written in decimals, halves away from zero, as a spreadsheet does."""
    if abs(value) >= _HUGE:
        return f"{value:.3e}"
    written = repr(float(value))
    places = len(written.partition(".")[2])
    if "e" in written or (places == decimals + 1 and written[-1] == "5"):
        step = Decimal(1).scaleb(-decimals)
        return format(Decimal(written).quantize(step, context=_ROUNDING), "f")
    if places <= decimals:
        return written + "0" * (decimals - places)
    # Away from a half, the number as written and its binary value round alike, and this is faster.
    return f"{value:.{decimals}f}"


def tiny(value: float) -> str:
    """Return a small number with a power of ten.

    Parameters
    ----------
    value : float
        Number to print.

    Returns
    -------
    str
        The text.

    Examples
    --------
    >>> tiny(2.34e-10), tiny(0.0)
    ('2.3e−10', '0')
    """
    if not math.isfinite(value):
        return number(value, 0)
    if value == 0.0:
        return "0"
    mantissa, exponent = f"{value:.1e}".split("e")
    return f"{mantissa}e{int(exponent)}".replace("-", MINUS)


def quantity(value: float, unit: str, decimals: int | None = None) -> str:
    """Return a number with its unit, as in a sentence: four significant digits, no idle noughts.

    Parameters
    ----------
    value : float
        Number to print; NaN becomes ``n/a``.
    unit : str
        Unit behind it; may be empty.
    decimals : int, optional
        Decimals [1]; by significant digits where it is not given.

    Returns
    -------
    str
        The text.

    Examples
    --------
    >>> quantity(231.0, "A"), quantity(0.98765, "pu"), quantity(100.04, "%", 2)
    ('231 A', '0.9877 pu', '100.04 %')
    """
    if not math.isfinite(value):
        return number(value, 0)
    if decimals is None:
        text = number(value, significant_decimals(value))
        text = text.rstrip("0").rstrip(".") if "." in text else text
    else:
        text = number(value, decimals)
    return f"{text} {unit}" if unit else text


def figure(value: float, unit: str) -> str:
    """Return a number that goes into a sum worked by hand: six significant digits.

    Two more than the result shows, so that the reader's sum gives the printed result.

    Parameters
    ----------
    value : float
        Number to print.
    unit : str
        Unit behind it; may be empty.

    Returns
    -------
    str
        The text.

    Examples
    --------
    >>> figure(16.718123, "kW"), figure(0.5, "")
    ('16.7181 kW', '0.5')
    """
    text = number(value, significant_decimals(value, 6, 9))
    text = text.rstrip("0").rstrip(".") if "." in text else text
    return f"{text} {unit}" if unit else text


def judged_pair(value: float, limit: float, *, exceeds: bool) -> tuple[str, str]:
    """Return a judged value and its limit as text that never agrees where the value exceeds the limit.

    Parameters
    ----------
    value, limit : float
        In the same unit.
    exceeds : bool
        Whether the value is beyond the limit.

    Returns
    -------
    tuple of str
        Value and limit.

    Examples
    --------
    >>> judged_pair(100.0003, 100.0, exceeds=True)
    ('100.0003', '100.0000')
    >>> judged_pair(81.27, 100.0, exceeds=False)
    ('81.3', '100.0')
    """
    decimals = judged_decimals(value, limit, exceeds=exceeds)
    texts = number(value, decimals), number(limit, decimals)
    if exceeds and texts[0] == texts[1] and value != limit:
        return repr(float(value)).replace("-", MINUS), repr(float(limit)).replace("-", MINUS)
    return texts


def judged_decimals(value: float, limit: float, *, exceeds: bool) -> int:
    """Return the decimals that `judged_pair` prints with.

    Parameters
    ----------
    value, limit : float
        In the same unit.
    exceeds : bool
        Whether the value is beyond the limit.

    Returns
    -------
    int
        Decimals [1].

    Examples
    --------
    >>> judged_decimals(3.12, 2.5, exceeds=True)
    3
    """
    sizes = [abs(v) for v in (value, limit) if math.isfinite(v)]
    decimals = significant_decimals(max(sizes, default=0.0))
    return decimals_apart(value, limit, decimals) if exceeds else decimals


def excel_format(decimals: int) -> str:
    """Return the number format of a spreadsheet cell.

    Parameters
    ----------
    decimals : int
        Decimals [1].

    Returns
    -------
    str
        The format.

    Examples
    --------
    >>> excel_format(0), excel_format(2)
    ('0', '0.00')
    """
    return "0" if decimals == 0 else "0." + "0" * decimals
