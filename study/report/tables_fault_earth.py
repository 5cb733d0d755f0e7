"""Tables of earth faults: their currents, neutral resistors, what detects them."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Final

from study.report import fault_pieces
from study.report.content import StudyOutcome
from study.report.fault_pieces import NOT_GIVEN
from study.report.fault_view import SHEET, mode_words
from study.report.numbers import figure, quantity
from study.report.tables import (
    Column,
    Table,
    Value,
    Worked,
    WorkedLine,
    cell_column,
    make_table,
    text_column,
)
from study.results.fault_ratings import EarthFaultRow, FaultRatingsResult
from study.results.short_circuit import EarthSystem, ShortCircuitResult

_EARTH_SHOWN: Final = 20


def earth_table(outcome: StudyOutcome, result: ShortCircuitResult) -> Table:
    """Return the earth-fault current of every system with one neutral, equal rows of modes drawn together."""
    columns = [
        text_column("boards", "Boards of the system"),
        text_column("modes", "Modes"),
        text_column("earthing", "Neutral"),
        text_column("capacitance_data", "Capacitance is"),
        Column(key="u_nominal_v", heading="Nominal", unit="V", most_decimals=0),
        Column(key="capacitance_uf", heading="Capacitance of a phase", unit="µF", most_decimals=3, digits=3),
        Column(key="capacitive_a", heading="Capacitive current", unit="A", most_decimals=3, digits=3),
        Column(
            key="resistor_a", heading="Resistor current", unit="A", most_decimals=2, digits=3, missing="none"
        ),
        Column(
            key="fault_a",
            heading="Earth-fault current",
            unit="A",
            most_decimals=3,
            digits=3,
            missing="see I''k1",
        ),
        Column(
            key="largest_resistor_ohm",
            heading="Largest damping resistor",
            unit="Ω",
            most_decimals=1,
            missing="none",
        ),
        Column(key="resistor_power_kw", heading="Heat of the resistor", unit="kW", most_decimals=2,
               missing="none"),
    ]  # fmt: skip
    found: dict[tuple[Value, ...], list[str]] = {}
    for mode in result.modes:
        for system in mode.earth:
            found.setdefault(_earth_row(system), []).append(mode.mode)
    rows = [
        (row[0], mode_words(modes, outcome.modes), *(math.nan if v is None else v for v in row[1:]))
        for row, modes in found.items()
    ]
    return make_table(
        key="earth_faults",
        title="Earth faults",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=(
            "Boards joined without a transformer have one neutral. In an insulated system an earth fault "
            "draws the capacitive current of all that is energised; a resistor no larger than that shown "
            "keeps an arcing fault from raising the voltage. A typical capacitance is to be replaced by the "
            "maker's before an earth-fault setting is chosen.",
        ),
        worked=_worked_earth(result),
        group_by=("earthing",),
        shown_per_group=_EARTH_SHOWN,
    )


def _earth_row(system: EarthSystem) -> tuple[Value, ...]:
    values = (
        system.capacitive_a,
        system.resistor_a,
        system.fault_a,
        system.largest_resistor_ohm,
        system.resistor_power_w / 1000.0,
    )
    return (
        ", ".join(system.boards),
        system.earthing,
        "by data" if system.capacitance_given else "typical",
        system.u_nominal_v,
        1e6 * system.capacitance_f,
        # NaN is not equal to itself, so that rows with it would never be drawn together.
        *(None if math.isnan(v) else v for v in values),
    )


def _worked_earth(result: ShortCircuitResult) -> Worked | None:
    for mode in result.modes:
        for system in mode.earth:
            if math.isfinite(system.capacitive_a) and system.capacitive_a > 0:
                c, u = figure(system.capacitance_f * 1e6, ""), figure(system.u_nominal_v, "V")
                line = WorkedLine(
                    label="Capacitive current",
                    formula="√3 · 2π · f · C · U",
                    figures=f"√3 × 2 × π × {figure(result.f_hz, '')} × {c} / 1000000 × {u}",
                    result=quantity(system.capacitive_a, "A"),
                )
                return Worked(row=f"{', '.join(system.boards)}, {mode.mode}", lines=(line,))
    return None


def resistors_table(ratings: FaultRatingsResult, cells: Mapping[str, str]) -> Table:
    """Return every neutral resistor against its current and time."""
    r = ratings.resistors
    columns = [
        text_column("mode", "Mode"),
        text_column("board", "Board"),
        Column(key="current_a", heading="Current", unit="A", most_decimals=2, against="rated_a"),
        Column(key="rated_a", heading="Rated", unit="A", most_decimals=2, exact=True, missing=NOT_GIVEN),
        Column(
            key="lasts_s",
            heading="Cleared within",
            unit="s",
            most_decimals=2,
            against="rated_s",
            infinite="nothing trips",
        ),
        Column(key="rated_s", heading="Rated for", unit="s", most_decimals=2, exact=True,
               missing=NOT_GIVEN),
        cell_column(),
    ]  # fmt: skip
    rows = [
        (
            mode,
            name,
            float(r.current_a[i]),
            float(r.rated_a[i]),
            float(r.lasts_s[i, m]),
            float(r.rated_s[i]),
            cells.get(name, ""),
        )
        for m, mode in enumerate(ratings.modes)
        for i, name in enumerate(r.boards)
        if r.live[i, m]
    ]
    return make_table(
        key="neutral_resistors",
        title="Neutral resistors",
        sheet=fault_pieces.SHEET,
        columns=columns,
        rows=rows,
    )


def detection_table(outcome: StudyOutcome, ratings: FaultRatingsResult) -> Table:
    """Return earth-fault currents against what detects them, equal rows of several modes drawn together."""
    columns = [
        text_column("boards", "Boards of the system"),
        text_column("modes", "Modes"),
        text_column("earthing", "Neutral"),
        text_column("capacitance_data", "Capacitance is"),
        Column(key="u_nominal_v", heading="Nominal", unit="V", most_decimals=0),
        Column(key="capacitive_a", heading="Capacitive current", unit="A", most_decimals=3, digits=3),
        Column(
            key="fault_a",
            heading="Earth-fault current",
            unit="A",
            most_decimals=3,
            digits=3,
            against="pick_up_a",
            missing="see I''k1",
        ),
        Column(
            key="pick_up_a",
            heading="Highest pick-up, with tolerance",
            unit="A",
            most_decimals=3,
            digits=3,
            missing="none",
        ),
        text_column("pick_up_device", "Of device"),
        text_column("trips", "Devices with an earth-fault setting", kind="long text"),
    ]
    found: dict[tuple[Value, ...], list[str]] = {}
    for row in ratings.earth:
        found.setdefault(_detection_row(row), []).append(row.mode)
    rows = [
        (row[0], mode_words(modes, outcome.modes), *(math.nan if v is None else v for v in row[1:]))
        for row, modes in found.items()
    ]
    return make_table(
        key="earth_fault_detection",
        title="Detection of earth faults",
        sheet=fault_pieces.SHEET,
        columns=columns,
        rows=rows,
        notes=("A device trips for certain where the earth-fault current lies above its highest pick-up.",),
    )


def _detection_row(row: EarthFaultRow) -> tuple[Value, ...]:
    return (
        ", ".join(row.boards),
        row.earthing,
        "by data" if row.capacitance_given else "typical",
        row.u_nominal_v,
        _known(row.capacitive_a),
        _known(row.fault_a),
        _known(row.pick_up_a),
        row.pick_up_device,
        ", ".join(row.trips) or "none: alarm only",
    )


def _known(value: float) -> float | None:
    """Return None for NaN, which is not equal to itself."""
    return None if math.isnan(value) else value
