"""The one plotting style, and the way from a figure to an inline SVG with real text."""

from __future__ import annotations

import re
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from html import escape
from io import StringIO
from typing import Any, Final

from study.report.style import INK, QUIET, RULE, SERIES

WIDTH_IN: Final = 8.6
TALLEST_IN: Final = 10.5
SMALL: Final = 7.0
_FONT = 8.0

_RC: Final[Any] = {
    "svg.fonttype": "none",
    "svg.hashsalt": "vessel-study",
    "svg.id": None,
    "text.parse_math": False,
    "text.color": INK,
    "font.family": ["DejaVu Sans"],
    "font.size": _FONT,
    "axes.titlesize": _FONT,
    "axes.titleweight": "bold",
    "axes.titlelocation": "left",
    "axes.titley": 1.0,  # the library would else measure every tick label to find that same place
    "axes.labelsize": _FONT,
    "axes.labelcolor": QUIET,
    "axes.edgecolor": RULE,
    "axes.linewidth": 0.6,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.grid": True,
    "axes.axisbelow": True,
    "axes.formatter.useoffset": False,
    "axes.unicode_minus": True,
    "grid.color": "#E6EAED",
    "grid.linewidth": 0.5,
    "xtick.color": RULE,
    "ytick.color": RULE,
    "xtick.labelcolor": INK,
    "ytick.labelcolor": INK,
    "xtick.labelsize": SMALL + 0.5,
    "ytick.labelsize": SMALL + 0.5,
    "xtick.major.size": 2.5,
    "ytick.major.size": 2.5,
    "legend.fontsize": SMALL + 0.5,
    "legend.frameon": False,
    "legend.handlelength": 2.2,
    "lines.linewidth": 1.3,
    "lines.markersize": 4.0,
}

_TAG = re.compile(r"<[^>]*>")
_LONG_DECIMAL = re.compile(r"-?\d+\.\d{3,}(?:e-?\d+)?")
_ID = re.compile(r'\sid="([^"]*)"')
_REFERENCE = re.compile(r'url\(#([^)]+)\)|(?:xlink:)?href="#([^"]+)"')
_FONT_RULE = re.compile(r"font:\s*(?:(?P<weight>bold|700)\s+)?(?P<size>[\d.]+)px\s+[^;\"]*(;\s*)?")


@dataclass(frozen=True, slots=True, kw_only=True)
class Drawing:
    """One figure of the page: what stands above it, and its SVG."""

    key: str
    title: str
    caption: str
    svg: str


@contextmanager
def house_style() -> Iterator[None]:
    """Hold the plotting style while figures are drawn; leaves the library's settings as they were."""
    import matplotlib as mpl

    with mpl.rc_context(_RC), warnings.catch_warnings():
        # Only the width of a name is measured with the font; the page draws it with the reader's own.
        warnings.filterwarnings("ignore", message="Glyph .* missing from font")
        yield


def canvas(height_in: float) -> Any:
    """Return an empty figure of the page's width.

    Parameters
    ----------
    height_in : float
        Height [inch].

    Returns
    -------
    matplotlib.figure.Figure
        The figure.
    """
    from matplotlib.figure import Figure

    return Figure(figsize=(WIDTH_IN, height_in))


def place(figure: Any, *, left: float, right: float, bottom: float, top: float) -> tuple[float, ...]:
    """Return left, bottom, width and height of a frame as fractions of a figure, from margins in inches."""
    width, height = figure.get_size_inches()
    return (
        left / width,
        bottom / height,
        (width - left - right) / width,
        (height - bottom - top) / height,
    )


def drawing(figure: Any, *, key: str, title: str, caption: str, description: str) -> Drawing:
    """Return a figure as inline SVG with a title and a text alternative.

    Parameters
    ----------
    figure : matplotlib.figure.Figure
        The figure.
    key : str
        Prefix of every id in it; unique on the page.
    title, caption : str
        What stands above the figure.
    description : str
        What a reader who does not see it needs to know.

    Returns
    -------
    Drawing
        The figure.
    """
    buffer = StringIO()
    figure.savefig(buffer, format="svg", metadata={"Date": None, "Creator": None}, transparent=True)
    return Drawing(
        key=key, title=title, caption=caption, svg=inline_svg(buffer.getvalue(), key, title, description)
    )


def inline_svg(text: str, key: str, title: str, description: str) -> str:
    """Return an SVG file as an element of a page: own ids, no size, no style that leaks, short numbers.

    Parameters
    ----------
    text : str
        The file.
    key : str
        Prefix of the ids.
    title, description : str
        Text alternative.

    Returns
    -------
    str
        The element.
    """
    body = text[text.index("<svg") :]
    body = re.sub(r"<!--.*?-->|<metadata>.*?</metadata>|<style.*?</style>", "", body, flags=re.S)
    used = {a or b for a, b in _REFERENCE.findall(body)}
    body = _TAG.sub(lambda tag: _clean_tag(tag[0], key, used), body)
    body = re.sub(r"<defs>\s*</defs>", "", body)
    body = re.sub(r">\s*\n\s*<", "><", body)
    view = re.search(r'viewBox="([^"]+)"', body)
    if view is None:
        raise ValueError(f"figure {key} has no viewBox")
    head = (
        f'<svg viewBox="{view[1]}" role="img" aria-labelledby="{key}-title {key}-desc">'
        f'<title id="{key}-title">{escape(title)}</title><desc id="{key}-desc">{escape(description)}</desc>'
    )
    return head + body[body.index(">") + 1 :].strip()


def _clean_tag(tag: str, key: str, used: set[str]) -> str:
    tag = _ID.sub(lambda m: f' id="{key}-{m[1]}"' if m[1] in used else "", tag)
    tag = _REFERENCE.sub(lambda m: f"url(#{key}-{m[1]})" if m[1] else f'href="#{key}-{m[2]}"', tag)
    tag = _FONT_RULE.sub(_font_size, tag)
    tag = re.sub(r" (?:transform=\"rotate\(-?0 [^\"]*\)\"|style=\"\s*\")", "", tag)
    tag = re.sub(r"\s+", " ", tag)
    return _LONG_DECIMAL.sub(lambda m: f"{float(m[0]):.2f}".rstrip("0").rstrip("."), tag)


def _font_size(found: re.Match[str]) -> str:
    weight = "font-weight:bold;" if found["weight"] else ""
    return f"{weight}font-size:{float(found['size']):g}px;"


def colour(i: int) -> str:
    """Return the colour of the i-th series."""
    return SERIES[i % len(SERIES)]


def dash(i: int) -> Any:
    """Return the line pattern of the i-th series; it shifts with every round of the colours."""
    patterns: tuple[Any, ...] = ("-", (0, (5, 1.6)), (0, (1.5, 1.3)), (0, (6, 1.4, 1.4, 1.4)))
    return patterns[(i + i // len(SERIES)) % len(patterns)]


def marker(i: int) -> str:
    """Return the mark of the i-th series."""
    return "os^DvPXh"[i % 8]


def legend_below(figure: Any, handles: list[Any], labels: list[str], *, y_in: float = 0.06) -> None:
    """Put one legend under all frames of a figure."""
    height = figure.get_size_inches()[1]
    figure.legend(
        handles,
        labels,
        loc="lower center",
        ncols=_legend_columns(labels),
        bbox_to_anchor=(0.5, y_in / height),
        borderpad=0,
    )


def legend_rows(labels: list[str]) -> int:
    """Return the rows that `legend_below` needs."""
    return -(-len(labels) // _legend_columns(labels))


def _legend_columns(labels: list[str]) -> int:
    longest = max(len(label) for label in labels)
    return max(1, min(len(labels), int(0.97 * WIDTH_IN / (0.55 + 0.066 * longest))))
