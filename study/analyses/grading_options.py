"""Choices of the grading study; limits come from the Acceptance sheet."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class GradingOptions:
    """What the grading study is asked.

    ``margin_s`` is the least time from clearing downstream to release upstream, ``clearing_s`` the longest
    time until the least fault is cleared, ``last_s`` how far currents are followed. ``starting_time_s`` is
    a motor's starting time where the workbook gives none; ``start_factor`` times that is how long a release
    must hold a start. ``trials`` is how
    often, at most, all that a setting bears upon is graded again in the search for settings.
    """

    margin_s: float = 0.01
    clearing_s: float = 5.0
    last_s: float = 20.0
    starting_time_s: float = 3.0
    start_factor: float = 1.1
    trials: int = 24
