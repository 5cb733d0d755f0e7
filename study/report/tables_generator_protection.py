"""Tables of the sets' protection: functions as set, and overcurrent stages beside the set's own current."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Final

from study.model.plant import Plant
from study.report.content import cells_by_name
from study.report.fault_pieces import of_rating
from study.report.numbers import figure, percent, quantity
from study.report.tables import (
    Column,
    Table,
    Value,
    Worked,
    WorkedLine,
    cell_column,
    make_table,
    percent_column,
    text_column,
)
from study.results.generator_protection import GeneratorProtectionResult, SetStages

SHEET: Final = "R Grading"
_NONE: Final = "none"


def generator_protection_tables(plant: Plant, result: GeneratorProtectionResult) -> tuple[Table, ...]:
    """Return the tables of the sets' protection.

    Parameters
    ----------
    plant : Plant
        For the input cells.
    result : GeneratorProtectionResult
        The result.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    return stages_table(result.stages, cells_by_name(plant)), functions_table(result)


def stages_table(own: SetStages, cells: Mapping[str, str]) -> Table:
    """Return the overcurrent stages of every set beside its rated, sustained and own fault current."""
    columns = [
        text_column("genset", "Set"),
        text_column("device", "Breaker"),
        text_column("opened_by", "Opened by"),
        Column(key="rated_a", heading="Rated current", unit="A", most_decimals=1),
        Column(key="long_time_a", heading="Long-time", unit="A", exact=True, missing=_NONE),
        percent_column("long_time_percent", "Long-time, of rated", missing=_NONE),
        Column(
            key="clears_150_s",
            heading="150 % cleared within",
            unit="s",
            most_decimals=1,
            missing="unknown",
            infinite="not cleared",
        ),
        Column(key="short_time_a", heading="Short-time", unit="A", exact=True, missing=_NONE),
        Column(key="sustained_a", heading="Sustained current", unit="A", most_decimals=0, missing="unknown"),
        percent_column("short_time_percent", "Short-time, of sustained", missing="not assessed"),
        Column(key="instantaneous_a", heading="Instantaneous", unit="A", exact=True, missing=_NONE),
        Column(key="own_seen_a", heading="Own contribution", unit="A", most_decimals=0, missing="unknown"),
        percent_column("instantaneous_percent", "Lower tolerance, of own", missing=_NONE),
        Column(key="parallel", heading="Runs in parallel", kind="text"),
        text_column("differential", "Differential"),
        cell_column(),
    ]
    return make_table(
        key="set_protection_stages",
        title="Overcurrent stages of the sets",
        sheet=SHEET,
        columns=columns,
        rows=[_stage_row(own, k, cells) for k in range(len(own.names))],
        notes=(
            "Own contribution: the set's greatest current into a fault at its terminals as the instantaneous "
            "stage sees it: ip/√2 where it senses the peak, I''k where it senses the r.m.s. current. An "
            "instantaneous stage above it opens the faulty set alone.",
        ),
        worked=_worked(own),
    )


def _stage_row(own: SetStages, k: int, cells: Mapping[str, str]) -> tuple[Value, ...]:
    sustained, seen = float(own.sustained_a[k]), float(own.own_seen_a[k])
    return (
        own.names[k],
        own.device[k] or _NONE,
        own.opened_by[k],
        float(own.rated_a[k]),
        float(own.long_time_a[k]),
        of_rating(float(own.long_time_a[k]), float(own.rated_a[k])),
        float(own.clears_150_s[k]),
        float(own.short_time_a[k]),
        sustained,
        of_rating(float(own.short_time_a[k]), sustained),
        float(own.instantaneous_a[k]),
        seen,
        of_rating(float(own.instantaneous_least_a[k]), seen),
        "yes" if own.parallel[k] else "no",
        "yes" if own.differential[k] else "no",
        cells.get(own.names[k], ""),
    )


def _worked(own: SetStages) -> Worked | None:
    for k, name in enumerate(own.names):
        setting, rated = float(own.long_time_a[k]), float(own.rated_a[k])
        if math.isfinite(setting):
            line = WorkedLine(
                label="Long-time, of rated",
                formula="setting / rated current",
                figures=f"{figure(setting, 'A')} / {figure(rated, 'A')}",
                result=quantity(of_rating(setting, rated), "%"),
            )
            return Worked(row=name, lines=(line,))
    return None


def functions_table(result: GeneratorProtectionResult) -> Table:
    """Return every protection function of the sets, as written and in per cent of the rated value."""
    columns = [
        text_column("genset", "Set"),
        text_column("kind", "Kind"),
        text_column("function", "Function"),
        text_column("written", "Pick-up as written"),
        percent_column("pick_up_percent", "Pick-up, of rated", missing="unit not of its kind"),
        Column(key="delay_s", heading="Delay", unit="s", exact=True),
        text_column("trips", "Trips"),
        cell_column(),
    ]
    return make_table(
        key="set_protection_functions",
        title="Protection functions of the sets",
        sheet=SHEET,
        columns=columns,
        rows=[
            (f.genset, f.kind, f.name, f.written, percent(f.pick_up_pu), f.delay_s, f.trips, f.cell)
            for f in result.functions
        ],
        notes=(
            "In per cent of rated kW (reverse power), voltage, frequency or current. The usual ranges are "
            "limits of the sheet Acceptance.",
        ),
    )
