"""Ratings, settings and curves of devices that contradict each other."""

from __future__ import annotations

from typing import Final

from study.workbook.tables import Row
from study.workbook.topology import Plan

# The first rating must not be above the second.
RATING_ORDER: Final = (("ics_ka", "icu_ka"), ("icu_ka", "icm_ka"), ("icw_ka", "icm_ka"))
# Beyond the rating, which a setting may not use.
SETTING_ORDER: Final = (("long_time_a", "i_rated_a"),)


def check_protection(plan: Plan) -> None:
    """Report what devices, ranges and curves say against themselves."""
    for row in plan.of("Devices"):
        for low, high in RATING_ORDER:
            _in_order(plan, row, low, high, warning=False)
        for low, high in SETTING_ORDER:
            _in_order(plan, row, low, high, warning=True)
    for row in plan.of("Setting ranges"):
        if row.has("minimum", "maximum") and row.values["minimum"] > row.values["maximum"]:
            said = f"the range of {row.name} ends at {row.values['maximum']:g}, below its start"
            plan.report("setting-range", row, "maximum", said, "exchange Min and Max")
    for row in plan.of("Curves"):
        _check_point(plan, row)


def _in_order(plan: Plan, row: Row, low: str, high: str, *, warning: bool) -> None:
    smaller, larger = row.values.get(low), row.values.get(high)
    if isinstance(smaller, float) and isinstance(larger, float) and smaller > larger:
        first, second = row.table.spec.column(low), row.table.spec.column(high)
        said = f"{row.name}: {first.name} is {smaller:g} {first.unit}, {second.name} {larger:g} {second.unit}"
        wanted = f"{first.name} may not be above {second.name}"
        plan.report("rating-order", row, low, said, wanted, warning=warning)


def _check_point(plan: Plan, row: Row) -> None:
    if row.has("current_in", "current_a"):
        said = f"{row.name}: the point has a current in both columns"
        plan.report("curve-choice", row, "current_a", said, "leave one of them blank")
    if row.has("time_min_s", "time_max_s") and row.values["time_min_s"] > row.values["time_max_s"]:
        said = f"{row.name}: the shortest time is above the longest"
        plan.report("time-order", row, "time_min_s", said, "exchange the two")
