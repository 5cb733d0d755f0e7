"""The look that page, figures and sheets share: one accent, colours that the colour-blind tell apart."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

from study.checks.verdict import Status

ACCENT: Final = "#1F4E6B"
INK: Final = "#1A1A1A"
QUIET: Final = "#5C6670"
RULE: Final = "#C9D1D8"
TINT: Final = "#EDF2F5"

# Dark to light and far apart in hue for the common kinds of colour blindness; the accent leads.
SERIES: Final = (
    "#1F4E6B",
    "#D1812A",
    "#4C9F8A",
    "#A6437A",
    "#7FA8D1",
    "#8A7A1F",
    "#5B5EA6",
    "#B9B0A2",
)
DASHES: Final = ("solid", (0, (5, 1.6)), (0, (1.5, 1.4)), (0, (6, 1.4, 1.4, 1.4)))
MARKERS: Final = ("o", "s", "^", "D", "v", "P", "X", "h")


@dataclass(frozen=True, slots=True, kw_only=True)
class VerdictLook:
    """How a status word is shown: a shape for readers without colours, ink and ground."""

    shape: str
    css: str
    ink: str
    ground: str


VERDICTS: Final[dict[Status, VerdictLook]] = {
    "within": VerdictLook(shape="✓", css="within", ink="#1B5E3A", ground="#E8F2EC"),
    "close": VerdictLook(shape="▲", css="close", ink="#7A5300", ground="#FBF1DB"),
    "exceeds": VerdictLook(shape="✕", css="exceeds", ink="#8E1B1B", ground="#F8E4E4"),
    "not assessed": VerdictLook(shape="○", css="open", ink="#4A4A4A", ground="#EFEFEF"),
}
