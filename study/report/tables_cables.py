"""Tables of cables: overload, short circuit, voltage drop, and the section that would suffice."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Final

import numpy as np

from study.model.plant import Plant
from study.report.content import cells_by_name
from study.report.fault_pieces import of_rating, tells
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
from study.results.arrays import IntArray
from study.results.cable_protection import CableProtectionResult

SHEET: Final = "R Cables"
_SHOWN: Final = 25
_NONE: Final = "none"
_MEGA: Final = 1e6
_MODES_NAMED: Final = 3


def cable_tables(plant: Plant, result: CableProtectionResult) -> tuple[Table, ...]:
    """Return the tables of the sheet ``R Cables``.

    Parameters
    ----------
    plant : Plant
        For the input cells.
    result : CableProtectionResult
        The result.

    Returns
    -------
    tuple of Table
        In the order of the page.
    """
    cells = cells_by_name(plant)
    return overload_table(result, cells), heat_table(result, cells), sections_table(result, cells)


def _runs(result: CableProtectionResult, k: int) -> str:
    runs, section = int(result.runs[k]), float(result.sections.section_mm2[k])
    return f"{runs} × {section:g}" if runs > 1 else f"{section:g}"


def overload_table(result: CableProtectionResult, cells: Mapping[str, str]) -> Table:
    """Return every cable's load, setting and rating, the tightest first."""
    own = result.overload
    columns = [
        text_column("cable", "Cable"),
        text_column("from_end", "From"),
        text_column("to_end", "To"),
        text_column("section", "Runs × mm²"),
        Column(key="flow_a", heading="Load, greatest", unit="A", most_decimals=1, missing="none"),
        text_column("mode", "In mode"),
        Column(key="load_a", heading="Ib", unit="A", most_decimals=1, missing="unknown"),
        text_column("device", "Overload protection"),
        Column(key="in_a", heading="In", unit="A", most_decimals=1, against="rating_a", missing="unknown",
               infinite=_NONE),
        Column(key="rating_a", heading="Iz", unit="A", most_decimals=1, missing="not rated"),
        percent_column("in_percent", "In, of Iz", against=100.0, missing="not assessed"),
        Column(key="i2_a", heading="I2", unit="A", most_decimals=1, missing="unknown", infinite=_NONE),
        percent_column("i2_percent", "I2, of Iz", missing="not assessed"),
        text_column("exempt", "Without overload trip"),
        cell_column(),
    ]  # fmt: skip
    parts = own.device_a / own.rating_a
    order = np.argsort(-np.where(np.isfinite(parts), parts, -1.0), kind="stable")
    return make_table(
        key="cable_overload",
        title="Cables against their overload protection",
        sheet=SHEET,
        columns=columns,
        rows=[_overload_row(result, int(k), cells) for k in order],
        notes=(
            "Ib: the greatest current of the load flow, and no less than the rated current of the consumer "
            "or source served. In: setting or rating of the device that trips first; I2: what trips it for "
            "certain within its conventional time (breakers 1.30 Ir, gG fuses 1.6 In, thermal overload "
            "relays 1.2, makers' curves as given). Ib ≤ In ≤ Iz, and I2 within the limit of the sheet "
            "Acceptance. "
            "Steering gear and fire pumps have short-circuit protection alone.",
        ),
        worked=_worked_overload(result, order),
        shown_per_group=_SHOWN,
    )


def _overload_row(result: CableProtectionResult, k: int, cells: Mapping[str, str]) -> tuple[Value, ...]:
    own, mode = result.overload, int(result.overload.load_mode[k])
    setting, trips, rating = float(own.device_a[k]), float(own.conventional_a[k]), float(own.rating_a[k])
    return (
        result.names[k],
        result.from_ends[k],
        result.to_ends[k],
        _runs(result, k),
        float(own.flow_a[k, mode]) if mode >= 0 else math.nan,
        result.modes[mode] if mode >= 0 else "",
        float(own.load_a[k]),
        own.device[k] or ("" if own.exempt[k] else _NONE),
        None if own.exempt[k] and math.isinf(setting) else setting,
        rating,
        None if math.isinf(setting) else of_rating(setting, rating),
        None if own.exempt[k] and math.isinf(trips) else trips,
        None if math.isinf(trips) else of_rating(trips, rating),
        own.exempt[k],
        cells.get(result.names[k], ""),
    )


def _worked_overload(result: CableProtectionResult, order: IntArray) -> Worked | None:
    own = result.overload
    for k in order.tolist():
        setting, rating, trips = float(own.device_a[k]), float(own.rating_a[k]), float(own.conventional_a[k])
        if tells(of_rating(setting, rating)) and math.isfinite(trips):
            return Worked(
                row=result.names[k],
                lines=(
                    WorkedLine(
                        label="In, of Iz",
                        formula="In / Iz",
                        figures=f"{figure(setting, 'A')} / {figure(rating, 'A')}",
                        result=quantity(of_rating(setting, rating), "%"),
                    ),
                    WorkedLine(
                        label="I2, of Iz",
                        formula="I2 / Iz",
                        figures=f"{figure(trips, 'A')} / {figure(rating, 'A')}",
                        result=quantity(of_rating(trips, rating), "%"),
                    ),
                ),
            )
    return None


def heat_table(result: CableProtectionResult, cells: Mapping[str, str]) -> Table:
    """Return the worst fault of every cable in its worst mode, nearest to what it withstands first."""
    heat = result.heat
    columns = [
        text_column("cable", "Cable"),
        text_column("section", "Runs × mm²"),
        text_column("mode", "Worst mode"),
        text_column("device", "Cleared by"),
        text_column("stage", "Stage"),
        Column(
            key="fault_ka", heading="Fault, I''k", unit="kA", most_decimals=3, digits=3, missing="unknown"
        ),
        text_column("where", "Where"),
        Column(
            key="clearing_s",
            heading="Arc out within",
            unit="s",
            most_decimals=3,
            missing="unknown",
            infinite="not cleared",
        ),
        text_column("data", "Heat from"),
        Column(key="heat", heading="Heat", unit="kA²s", most_decimals=4, digits=3, against="withstand"),
        Column(key="withstand", heading="k²S²", unit="kA²s", most_decimals=3, digits=3),
        percent_column("heat_percent", "Heat, of k²S²", against=100.0, missing="not assessed"),
        text_column("slow", "Longer than 5 s"),
        cell_column(),
    ]
    parts = np.where(np.isnan(heat.heat_a2s), -1.0, heat.heat_a2s) / heat.withstand_a2s[:, None]
    worst = parts.argmax(axis=1) if parts.shape[1] else np.zeros(len(parts), np.int64)
    rows = [(int(k), int(worst[k])) for k in np.argsort(-parts.max(axis=1, initial=-1.0), kind="stable")]
    return make_table(
        key="cable_fault_range",
        title="Cables in a short circuit, over the whole range of fault currents",
        sheet=SHEET,
        columns=columns,
        rows=[_heat_row(result, k, m, cells) for k, m in rows],
        notes=(
            "Faults from the near end (maximum case) to the far end (least kind, minimum case), and between "
            "both those just below each pick-up, where the next slower stage clears. Each current decays "
            "until the arc is out at the latest; a maker's let-through I²t counts where the device opens "
            "fast enough. Longer than 5 s: in the modes named the least faults last longer than heat stays "
            "in the conductor; the heat of their first 5 s counts.",
        ),
        worked=_worked_heat(result, rows),
        shown_per_group=_SHOWN,
    )


def _heat_row(result: CableProtectionResult, k: int, m: int, cells: Mapping[str, str]) -> tuple[Value, ...]:
    heat = result.heat
    slow = [mode for mode, long in zip(result.modes, heat.slow[k], strict=True) if long]
    withstand = float(heat.withstand_a2s[k]) / _MEGA
    known = bool(result.modes) and not math.isnan(float(heat.heat_a2s[k, m]))
    worst: tuple[Value, ...] = ("", "", "", math.nan, "", math.nan, "", math.nan)
    part = math.nan
    if known:
        value = float(heat.heat_a2s[k, m]) / _MEGA
        part = percent(value / withstand)
        worst = (
            result.modes[m],
            heat.devices[int(heat.device[k, m])] if heat.device[k, m] >= 0 else _NONE,
            heat.stage[k][m],
            float(heat.fault_a[k, m]) / 1000.0,
            "between the ends" if heat.inside[k, m] else "at an end",
            float(heat.clearing_s[k, m]),
            "let-through I²t" if heat.let_through[k, m] else "decaying current",
            value,
        )
    name = result.names[k]
    return name, _runs(result, k), *worst, withstand, part, _named(slow, result.modes), cells.get(name, "")


def _named(modes: list[str], every: tuple[str, ...]) -> str:
    if len(modes) == len(every) > 1:
        return "every mode"
    return ", ".join(modes) if len(modes) <= _MODES_NAMED else f"{len(modes)} of {len(every)} modes"


def _worked_heat(result: CableProtectionResult, rows: list[tuple[int, int]]) -> Worked | None:
    heat, sections = result.heat, result.sections
    for k, m in rows:
        if not result.modes or math.isnan(float(heat.heat_a2s[k, m])):
            continue
        area = float(result.runs[k] * sections.section_mm2[k])
        withstand, value = float(heat.withstand_a2s[k]) / _MEGA, float(heat.heat_a2s[k, m]) / _MEGA
        return Worked(
            row=f"{result.names[k]}, {result.modes[m]}",
            lines=(
                WorkedLine(
                    label="Withstand",
                    formula="k² S²",
                    figures=f"({heat.k[k]:.1f} A·√s/mm²)² × ({area:g} mm²)²",
                    result=quantity(withstand, "kA²s"),
                ),
                WorkedLine(
                    label="Heat, of k²S²",
                    formula="heat / k²S²",
                    figures=f"{figure(value, 'kA²s')} / {figure(withstand, 'kA²s')}",
                    result=quantity(percent(value / withstand), "%"),
                ),
            ),
        )
    return None


def sections_table(result: CableProtectionResult, cells: Mapping[str, str]) -> Table:
    """Return the smallest sections that suffice, those that must grow first."""
    own = result.sections
    columns = [
        text_column("cable", "Cable"),
        Column(key="runs", heading="Runs", kind="count"),
        _section_column("section_mm2", "Section laid"),
        _section_column("rating_mm2", "For rating"),
        _section_column("heat_mm2", "For short circuit"),
        _section_column("drop_mm2", "For voltage drop", missing="no demand"),
        _section_column("enough_mm2", "Enough would be"),
        text_column("proposal", "Proposal"),
        text_column("reason", "Because of"),
        percent_column("drop_percent", "Drop of the run", most_decimals=2, missing="none"),
        percent_column("total_percent", "Drop to worst consumer", most_decimals=2, missing="none"),
        text_column("consumer", "Worst consumer"),
        cell_column(),
    ]
    step = np.nan_to_num(own.enough_mm2 / own.section_mm2, nan=1.0)
    order = np.argsort(
        -np.where(step > 1.0, step + 10.0, np.where(step < 1.0, 1.0 / step, 0.0)), kind="stable"
    )
    return make_table(
        key="cable_sections",
        title="Smallest sections that meet rating, short circuit and voltage drop",
        sheet=SHEET,
        columns=columns,
        rows=[_section_row(result, int(k), cells) for k in order],
        notes=(
            "Proposals for the designer, nothing is changed: number of runs, way of laying and devices are "
            "kept. Voltage drop: the run may use its own drop and what the worst consumer behind it leaves "
            "of the limit, in the mode that leaves least. Mechanical strength and terminals are not looked "
            "at.",
        ),
        shown_per_group=_SHOWN,
    )


def _section_column(key: str, heading: str, missing: str = "none or unknown") -> Column:
    return Column(key=key, heading=heading, unit="mm²", most_decimals=1, exact=True, missing=missing)


def _section_row(result: CableProtectionResult, k: int, cells: Mapping[str, str]) -> tuple[Value, ...]:
    own, drop, mode = result.sections, result.drop, int(result.drop.worst_mode[k])
    return (
        result.names[k],
        int(result.runs[k]),
        float(own.section_mm2[k]),
        float(own.rating_mm2[k]),
        float(own.heat_mm2[k]),
        float(own.drop_mm2[k]),
        float(own.enough_mm2[k]),
        _proposal(float(own.enough_mm2[k]), float(own.section_mm2[k])),
        own.governs[k],
        percent(float(drop.own_pu[k, mode])) if mode >= 0 else math.nan,
        percent(float(drop.total_pu[k, mode])) if mode >= 0 else math.nan,
        drop.consumer[k],
        cells.get(result.names[k], ""),
    )


def _proposal(enough: float, laid: float) -> str:
    if math.isnan(enough):
        return ""
    if enough > laid:
        return "larger section"
    return "as laid" if enough == laid else "smaller would do"
