"""Faults of sheets, headings, items and cells."""

from __future__ import annotations

from datetime import datetime

from study.workbook.sheet_xml import ErrorValue, Percent
from tests.faulty_workbooks.grids import Grid
from tests.faulty_workbooks.spoil import (
    added,
    again,
    call,
    cell,
    drop,
    fault,
    noted_cell,
    odd_cell,
    put,
    rename,
    renamed,
    without,
    without_row,
)

SHEETS = [
    *(
        fault(f"no {sheet}", "missing-sheet", sheet, None, "", without(sheet))
        for sheet in ("Project", "Boards", "Loads", "Modes", "Running", "Demand")
    ),
    *(
        fault(f"{sheet} called {name}", "near-miss-sheet", name, None, "", call(sheet, name))
        for sheet, name in (
            ("Gensets", "Genset"),
            ("Boards", "Board"),
            ("Demand", "Demands"),
            ("Ties", "Tie"),
            ("Converter supplies", "Convertor supplies"),
            ("Set-points", "Setpoints"),
            ("Devices", "Device"),
            ("Acceptance", "Acceptanse"),
        )
    ),
    *(
        fault(
            f"{sheet} twice",
            "doubled-sheet",
            f" {sheet.upper()}",
            None,
            "",
            lambda grids, sheet=sheet: grids.update({f" {sheet.upper()}": grids[sheet]}),
        )
        for sheet in ("Gensets", "Loads", "Modes")
    ),
    *(
        fault(
            f"{sheet} without rows",
            "missing-sheet",
            sheet,
            None,
            "",
            lambda grids, sheet=sheet: grids[sheet].rows.clear(),
        )
        for sheet in ("Boards", "Loads", "Modes", "Running", "Demand")
    ),
    fault(
        "Boards empty", "missing-sheet", "Boards", None, "", lambda grids: grids.update(Boards=Grid([], []))
    ),
    renamed("key heading misspelt", "missing-header", "Gensets", "Genset", "Gensett"),
    fault(
        "no header at all", "missing-header", "Gensets", None, "", rename("Gensets", "Genset", "Machine room")
    ),
    fault(
        "no header on an optional sheet",
        "missing-header",
        "Filters",
        None,
        "",
        rename("Filters", "Filter", "Harmonic thing"),
    ),
]

HEADINGS = [
    renamed("a unit on a pick-up", "wrong-unit", "Protection functions", "Pick-up", "Pick-up [%]"),
    renamed("a unit on an order", "wrong-unit", "Spectra", "Order", "Order [%]"),
    renamed("a unit on a size", "wrong-unit", "Events", "Size", "Size [kW]"),
    added("doubled", "doubled-heading", "Cables", "LENGTH [m]"),
    added("doubled by an older form", "doubled-heading", "Gensets", "X″d [pu]"),
    renamed(
        "optional heading misspelt", "near-miss-heading", "Gensets", "Voltage droop [%]", "Voltage drop [%]"
    ),
    added("two letters", "near-miss-heading", "Cables", "Tined"),
    added("near miss beside the right one", "near-miss-heading", "Loads", "Efficency"),
    added("a prime too many", "near-miss-heading", "Gensets", "Xd''' [pu]"),
    added("heading is an error", "error-value", "Loads", ErrorValue("#REF!")),
    renamed(
        "kilowatt for kVA", "wrong-unit", "Gensets", "Rated apparent power [kVA]", "Rated apparent power [kW]"
    ),
    renamed("milliwatt", "unknown-unit", "Loads", "Rated output [kW]", "Rated output [mW]"),
    renamed("megohm", "unknown-unit", "Ties", "Reactance [ohm]", "Reactance [Mohm]"),
    renamed("per cent for volt", "wrong-unit", "Boards", "Nominal voltage [V]", "Nominal voltage [%]"),
    renamed("unit behind the name", "unit-without-brackets", "Loads", "Input choke [%]", "Input choke %"),
    added("a mode that is not there", "unknown-mode", "Demand", "Anchorage: in use"),
    renamed("a mode misspelt on Demand", "near-miss-heading", "Demand", "At sea: in use", "At see: in use"),
    renamed("a mode misspelt on Running", "near-miss-heading", "Running", "Harbour", "Harbor"),
    fault("a mode without Running", "missing-heading", "Running", None, "", drop("Running", "Harbour")),
    fault("a mode without in use", "missing-heading", "Demand", None, "", drop("Demand", "Harbour: in use")),
    fault(
        "a mode without load factor",
        "missing-heading",
        "Demand",
        None,
        "",
        drop("Demand", "Harbour: load factor [%]"),
    ),
    renamed(
        "load factor in kW", "wrong-unit", "Demand", "Harbour: load factor [%]", "Harbour: load factor [kW]"
    ),
]

ITEMS = [
    cell("no vessel", "missing-value", ("Project", 0, "Value"), None),
    fault("no row for the vessel", "missing-value", "Project", None, "", without_row("Project", 0)),
    cell("frequency as text", "text-number", ("Project", 8, "Value"), "sixty"),
    cell("frequency out of range", "out-of-range", ("Project", 8, "Value"), 6.0),
    cell("frequency in kHz", "unknown-unit", ("Project", 8, "Item"), "Rated frequency [kHz]"),
    cell("date in words", "not-a-date", ("Project", 4, "Value"), "14 March 2025"),
    cell("an impossible date", "not-a-date", ("Project", 4, "Value"), "2025-02-30"),
    cell("item misspelt", "near-miss-item", ("Project", 10, "Item"), "Ambient temprature"),
    fault("item twice", "doubled-item", "Project", 12, "Item", again("Project", 0)),
    cell("value without item", "missing-name", ("Project", 1, "Item"), None),
    cell("vessel is an error", "error-value", ("Project", 0, "Value"), ErrorValue("#N/A")),
    cell("unknown limit", "unknown-quantity", ("Acceptance", 0, "Quantity"), "Closing margin"),
    fault(
        "limit twice",
        "doubled-item",
        "Acceptance",
        3,
        "Quantity",
        again("Acceptance", 0, Quantity="close  MARGIN"),
    ),
    cell("limit blank", "missing-value", ("Acceptance", 0, "Limit"), None),
    cell("limit as text", "text-number", ("Acceptance", 0, "Limit"), "five"),
    cell("limit negative", "out-of-range", ("Acceptance", 0, "Limit"), -1.0),
    cell("limit in volt", "wrong-unit", ("Acceptance", 0, "Unit"), "V"),
    cell("unit for a plain number", "wrong-unit", ("Acceptance", 2, "Unit"), "%"),
    cell("unknown voltage reference", "unknown-choice", ("Acceptance", 1, "Limit"), "nominal of set"),
]

CELLS = [
    cell("a vector group without clock", "unknown-choice", ("Transformers", 0, "Vector group"), "Dyn"),
    cell("a vector group turned round", "unknown-choice", ("Transformers", 0, "Vector group"), "dYN11"),
    cell(
        "a vector group of two windings",
        "unknown-choice",
        ("Three-winding transformers", 0, "Vector group"),
        "Dyn11",
    ),
    cell("a dash for nothing", "text-number", ("Cables", 0, "R0 [ohm/km]"), "-"),
    cell("n/a for nothing", "text-number", ("Boards", 0, "Peak withstand [kA]"), "n/a"),
    cell("a hard blank in a number", "text-number", ("Loads", 0, "Rated output [kW]"), "1\xa0500"),
    cell("a unit in the cell", "text-number", ("Loads", 0, "Rated output [kW]"), "30 kW"),
    cell("off where it is no word", "text-number", ("Devices", 0, "Long-time current [A]"), "off"),
    cell("a name that became a date", "not-a-name", ("Loads", 0, "Load"), datetime(2025, 2, 1)),
    cell("power factor above one", "out-of-range", ("Gensets", 0, "Rated power factor"), 1.1),
    cell("power factor in per cent", "out-of-range", ("Loads", 0, "Power factor"), 86.0),
    cell("efficiency in per cent", "out-of-range", ("Loads", 0, "Efficiency"), 92.0),
    cell(
        "alternator efficiency as a fraction",
        "out-of-range",
        ("Gensets", 0, "Alternator efficiency [%]"),
        0.94,
    ),
    cell("negative length", "out-of-range", ("Cables", 0, "Length [m]"), -5.0),
    cell("no units", "out-of-range", ("Loads", 0, "Installed"), 0.0),
    cell("odd poles", "out-of-range", ("Loads", 0, "Poles"), 3.0),
    cell("above synchronous speed", "out-of-range", ("Loads", 0, "Rated speed [rpm]"), 1810.0),
    cell("per cent format for amperes", "percent-format", ("Ties", 0, "Rated current [A]"), Percent(0.5)),
    odd_cell("droop as a fraction", "unusual-value", ("Gensets", 0, "Voltage droop [%]"), 0.04),
    odd_cell("speed droop as a fraction", "unusual-value", ("Gensets", 0, "Speed droop [%]"), 0.04),
    odd_cell("load factor as a fraction", "unusual-value", ("Demand", 0, "At sea: load factor [%]"), 0.8),
    odd_cell("a long cable", "unusual-value", ("Cables", 0, "Length [m]"), 1500.0),
    odd_cell("much slip", "unusual-value", ("Loads", 0, "Rated speed [rpm]"), 1480.0),
    noted_cell(
        "per cent format read as shown", "percent-read", ("Gensets", 0, "Voltage droop [%]"), Percent(0.04)
    ),
    noted_cell("soft starter of a direct start", "not-used", ("Loads", 0, "Soft-starter ramp [s]"), 5.0),
    noted_cell("efficiency of lighting", "not-used", ("Loads", 5, "Efficiency"), 0.9),
    cell("tuned filter without order", "missing-value", ("Filters", 0, "Tuning order"), None),
    cell("no current on a curve", "missing-value", ("Curves", 0, "Current [x In]"), None),
    fault(
        "no time on a curve",
        "missing-value",
        "Curves",
        0,
        "Time min [s]",
        put("Curves", 0, "Time min [s]", None),
        put("Curves", 0, "Time max [s]", None),
    ),
    fault(
        "no figure on a let-through curve",
        "missing-value",
        "Let-through",
        0,
        "Cut-off peak [kA]",
        put("Let-through", 0, "Cut-off peak [kA]", None),
        put("Let-through", 0, "Let-through I2t [A2s]", None),
    ),
]
