"""The faults that the sheet Events names: simulated with all windings, beside both standards."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from study.report.fault_view import SHEET, ka, ka_column
from study.report.findings import listed
from study.report.numbers import figure, number, percent, quantity
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
from study.results.short_circuit import ShortCircuitResult, SimulatedFault

_NOTHING: Final = "No fault is simulated: name a place in a row of kind fault on the sheet Events."
_INSTANTS_S: Final = (0.0, 0.004, 0.01, 0.02, 0.03, 0.05, 0.08, 0.1, 0.15, 0.2)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Line:
    """One quantity of one simulated fault [A]; the band of the known difference [%], NaN where none is."""

    quantity: str
    simulated_a: float
    ship_a: float
    general_a: float
    low_percent: float
    high_percent: float

    @property
    def ship_percent(self) -> float:
        """Difference of IEC 61363-1 against the simulation [%]."""
        return 100.0 * (self.ship_a / self.simulated_a - 1.0)

    @property
    def general_percent(self) -> float:
        """Difference of IEC 60909 against the simulation [%]."""
        return 100.0 * (self.general_a / self.simulated_a - 1.0)

    @property
    def outside(self) -> bool:
        """Whether the difference lies outside its band."""
        known = not math.isnan(self.low_percent)
        return known and not self.low_percent <= self.ship_percent <= self.high_percent


def _lines(fault: SimulatedFault) -> Iterator[_Line]:
    rows = (
        ("Iac(T/2)", fault.iac_half_a, fault.ship_iac_half_a, math.nan),
        ("Iac(0.1 s)", fault.iac_100ms_a, fault.ship_iac_100ms_a, math.nan),
        ("Peak, against ip at T/2", fault.peak_a, fault.ship_ip_a, fault.general_ip_a),
        ("Peak, against greatest peak", fault.peak_a, fault.ship_peak_a, math.nan),
    )
    yield _Line(
        quantity="Initial a.c. component, I''k",
        simulated_a=float(fault.iac_a[0]),
        ship_a=float(fault.ship_iac_a[0]),
        general_a=fault.general_ik_initial_a,
        low_percent=math.nan,
        high_percent=math.nan,
    )
    for k, (words, simulated, ship, general) in enumerate(rows):
        yield _Line(
            quantity=words,
            simulated_a=simulated,
            ship_a=ship,
            general_a=general,
            low_percent=float(fault.bias_low_percent[k]),
            high_percent=float(fault.bias_high_percent[k]),
        )


def simulation_tables(result: ShortCircuitResult) -> tuple[Table, ...]:
    """Return the simulated faults, and their currents against time.

    Parameters
    ----------
    result : ShortCircuitResult
        The result.

    Returns
    -------
    tuple of Table
        The second for the result sheet alone.
    """
    return simulation_table(result), _curves_table(result)


def simulation_table(result: ShortCircuitResult) -> Table:
    """Return simulation and standards side by side."""
    columns = [
        text_column("case", "Case"),
        text_column("mode", "Mode"),
        text_column("place", "Place"),
        text_column("quantity", "Quantity"),
        ka_column("simulated_ka", "Simulated", 3),
        ka_column("ship_ka", "IEC 61363-1", 3),
        percent_column("ship_difference_percent", "Difference"),
        Column(key="known_from_percent", heading="Known from", unit="%", most_decimals=0),
        Column(key="known_to_percent", heading="Known to", unit="%", most_decimals=0),
        ka_column("general_ka", "IEC 60909", 3),
        percent_column("general_difference_percent", "Difference of IEC 60909"),
        text_column("remark", "Remark", kind="long text"),
        cell_column(),
    ]
    rows = [row for fault in result.simulated for row in _rows(fault)]
    return make_table(
        key="fault_simulations",
        title="Simulated faults beside the standards",
        sheet=SHEET,
        columns=columns,
        rows=rows,
        notes=_notes(result) if rows else (_NOTHING,),
        worked=_worked(result.simulated),
    )


def _rows(fault: SimulatedFault) -> Iterator[tuple[Value, ...]]:
    head = ("; ".join(fault.cases), fault.mode, fault.place)
    if not fault.simulated:
        yield (*head, "not simulated", *(None,) * 7, f"{fault.reason}.", fault.cell)
        return
    left_out = ""
    if fault.left_out:
        left_out = f"left out of all three: {listed(fault.left_out, 4)}"
    for k, line in enumerate(_lines(fault)):
        known = not math.isnan(line.low_percent)
        general = not math.isnan(line.general_a)
        words = [_outside_words(fault) if line.outside else "", left_out if k == 0 else ""]
        yield (
            *head,
            line.quantity,
            ka(line.simulated_a),
            ka(line.ship_a),
            line.ship_percent,
            line.low_percent if known else None,
            line.high_percent if known else None,
            ka(line.general_a) if general else None,
            line.general_percent if general else None,
            "; ".join(w for w in words if w),
            fault.cell,
        )


def _outside_words(fault: SimulatedFault) -> str:
    words = "outside the known differences"
    if fault.motors_over_sets > fault.motors_known_to:
        words += (
            f": the motors have {percent(fault.motors_over_sets):.0f} % of the sets' rated current; they "
            f"were measured with up to {percent(fault.motors_known_to):.0f} %"
        )
    return words


def _notes(result: ShortCircuitResult) -> tuple[str, ...]:
    return (
        "Rows of kind fault on the sheet Events, in the maximum case of their mode: every set and motor with "
        "all its windings, loaded before the fault, fields at their ceiling from the start, speeds constant, "
        "fault at the worst point of the wave. The difference is of the formula against the simulation.",
        "The formulas of IEC 61363-1 have a known bias, measured on 10 000 drawn plants whose sets hold 3 "
        f"times rated current: {bias_words(result)}. IEC 60909 knows no load before the fault and takes a "
        "fictitious resistance.",
    )


def bias_words(result: ShortCircuitResult) -> str:
    """Return the known bias in words: by kind of place, then by quantity.

    Parameters
    ----------
    result : ShortCircuitResult
        Holds the bands.

    Returns
    -------
    str
        Without a full stop.
    """
    places = dict.fromkeys(b.place for b in result.bias)
    parts = []
    for place in places:
        bands = ", ".join(
            f"{b.quantity} {_signed(b.low_percent)} to {_signed(b.high_percent)} %"
            for b in result.bias
            if b.place == place
        )
        parts.append(f"{place} {bands}")
    return "; ".join(parts)


def _signed(value: float) -> str:
    return f"+{number(value, 0)}" if value > 0.0 else number(value, 0)


def _worked(faults: Sequence[SimulatedFault]) -> Worked | None:
    for fault in faults:
        if not fault.simulated:
            continue
        line = list(_lines(fault))[3]
        return Worked(
            row=f"{fault.mode}, {fault.place}, {line.quantity}",
            lines=(
                WorkedLine(
                    label="Difference",
                    formula="IEC 61363-1 / simulated − 1",
                    figures=f"{figure(ka(line.ship_a), 'kA')} / {figure(ka(line.simulated_a), 'kA')} − 1",
                    result=quantity(line.ship_percent, "%"),
                ),
            ),
        )
    return None


def _curves_table(result: ShortCircuitResult) -> Table:
    columns = [
        text_column("mode", "Mode"),
        text_column("place", "Place"),
        Column(key="time_s", heading="Time", unit="s", most_decimals=3, exact=True),
        ka_column("iac_simulated_ka", "Iac, simulated", 3),
        ka_column("iac_ship_ka", "Iac, IEC 61363-1", 3),
    ]
    rows = []
    for fault in result.simulated:
        if not fault.simulated:
            continue
        for t in _INSTANTS_S:
            k = int(np.argmin(np.abs(fault.time_s - t)))
            rows.append(
                (fault.mode, fault.place, float(fault.time_s[k]), ka(fault.iac_a[k]), ka(fault.ship_iac_a[k]))
            )
    return make_table(
        key="fault_simulation_curves",
        title="A.c. component of the simulated faults against time",
        sheet=SHEET,
        columns=columns,
        rows=rows,
    )
