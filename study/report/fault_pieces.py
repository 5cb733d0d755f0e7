"""What the tables of fault ratings share: the worst mode of a piece, its part of a rating, its input cell."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Final

from study.report.content import StudyOutcome, cells_by_name
from study.report.numbers import figure, percent, quantity
from study.report.tables import Worked, WorkedLine
from study.results.arrays import IntArray

SHEET: Final = "R Fault ratings"
NOT_GIVEN: Final = "not given"
DEAD: Final = "dead in every mode"
_TOO_NEAR_PERCENT = 0.1


def piece_cells(outcome: StudyOutcome) -> dict[str, str]:
    """Return the input cell of every piece of equipment and every device by its name."""
    devices = {device.name: device.cell for device in outcome.plant.devices if device.cell}
    return cells_by_name(outcome.plant) | devices


def worst_rows(worst_mode: IntArray, modes: Sequence[str]) -> list[tuple[int, int, str]]:
    """Return (piece, mode, words) of every piece; mode 0 of a piece that is dead in every mode."""
    return [(i, max(int(m), 0), modes[int(m)] if m >= 0 else DEAD) for i, m in enumerate(worst_mode.tolist())]


def of_rating(value: float, rating: float) -> float:
    """Return a value in percent of its rating; NaN where one is not known."""
    return percent(value / rating) if rating > 0 else math.nan


def tells(part_percent: float) -> bool:
    """Return whether a part of a rating is known and far enough from all of it to be worked by hand."""
    return math.isfinite(part_percent) and abs(part_percent - 100.0) > _TOO_NEAR_PERCENT


def worked_part(row: str, label: str, value: float, rating: float, unit: str) -> Worked:
    """Return a value in percent of its rating, worked by hand."""
    line = WorkedLine(
        label=label,
        formula="value / rating",
        figures=f"{figure(value, unit)} / {figure(rating, unit)}",
        result=quantity(of_rating(value, rating), "%"),
    )
    return Worked(row=row, lines=(line,))


def larger(one: float, other: float) -> float:
    """Return the larger of two, passing over NaN."""
    known = [v for v in (one, other) if not math.isnan(v)]
    return max(known, default=math.nan)


def shown(live: bool, value: float) -> float | None:
    """Return a value, None where the piece is dead."""
    return float(value) if live else None
