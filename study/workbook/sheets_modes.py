"""The sheets of the project, its acceptance limits, the modes, and what runs and is asked for in them."""

from __future__ import annotations

from typing import get_args

from study.model.modes import DutyKind, EventKind, ModeKind, State
from study.model.sources import RegulatorMode
from study.workbook.columns import (
    LARGE,
    REQUIRED,
    Bounds,
    Column,
    ModeColumn,
    SheetSpec,
    between,
    choice,
    key,
    number,
    reference,
    text,
    typical,
    yes_no,
)
from study.workbook.sheets_branches import SOURCES, TRANSFORMER_SHEETS

BRANCHES = (*TRANSFORMER_SHEETS, "Cables", "Ties", "Reactors")
SWITCHABLE = (*SOURCES, "Synchronous motors", *BRANCHES, "Filters", "Devices")
ANY_EQUIPMENT = ("Boards", *SOURCES, "Synchronous motors", *BRANCHES, "Filters", "Loads", "Devices")
MODES_SHEET = ("Modes",)

PROJECT = SheetSpec(
    name="Project",
    row_is="an item",
    hint="The title block, the rated frequency and the temperatures that ratings hang on.",
    required=True,
    unique=("item",),
    columns=(
        text("Item", "item", "", **REQUIRED),
        text("Value", "value", "", **REQUIRED),
        text("Note", "note", "free", older=("Notes", "Remark", "Remarks")),
    ),
    items=(
        text("Vessel", "vessel", "", **REQUIRED),
        text("Hull number", "hull_number", "", absent=""),
        text("Document number", "document_number", "", absent=""),
        text("Revision", "revision", "", **REQUIRED),
        Column(name="Date", field="date", kind="date", blank="required", hint="of this revision"),
        text("Prepared by", "prepared_by", "", absent=""),
        text("Checked by", "checked_by", "", absent=""),
        text("Approved by", "approved_by", "", absent=""),
        number("Rated frequency", "Hz", "f_rated_hz", between(45.0, 65.0), "Hz", **REQUIRED),
        text("Classification rules and edition", "rules", "", absent=""),
        number(
            "Ambient temperature", "°C", "ambient_degc", between(-20.0, 70.0), "°C, where cables run",
            **typical(45.0, "IEC 60092-101 and -352, from memory"),
        ),
        number(
            "Engine-room temperature", "°C", "engine_room_degc", between(-20.0, 80.0), "°C",
            **typical(45.0, "IEC 60092-101, from memory"),
        ),
    ),
)  # fmt: skip

ACCEPTANCE = SheetSpec(
    name="Acceptance",
    row_is="a limit",
    hint="The built-in limits. A changed value is marked as agreed for this project wherever it is used.",
    unique=("quantity",),
    columns=(
        text("Quantity", "quantity", "a built-in quantity", **REQUIRED),
        text("Limit", "limit", "in the unit beside it", **REQUIRED),
        text("Unit", "unit", "", absent=""),
        text("Basis", "basis", "who agreed to it, or the rule", absent=""),
    ),
)

MODES = SheetSpec(
    name="Modes",
    row_is="an operating mode",
    hint="Running and Demand have a column or three for each name given here.",
    required=True,
    unique=("name",),
    columns=(
        key("Mode", "name"),
        text("Description", "description", "", absent=""),
        choice("Kind", "kind", get_args(ModeKind), "", **REQUIRED),
        Column(
            name="Sets that may run together in change-over", field="changeover_sets", kind="references",
            target=SOURCES, hint="names with commas between; blank: none", absent=(),
        ),
    ),
)  # fmt: skip

RUNNING = SheetSpec(
    name="Running",
    row_is="anything that can be switched",
    hint="on, off or standby. Every set and supply stands here; other equipment that is not listed is on.",
    required=True,
    unique=("equipment",),
    columns=(
        reference(
            "Equipment", "equipment", SWITCHABLE, "set, supply, tie, transformer, cable, ...", **REQUIRED
        ),
    ),
    mode_columns=(
        ModeColumn(
            suffix="",
            column=choice("State", "state", get_args(State), "state in this mode"),
        ),
    ),
)

SET_POINTS = SheetSpec(
    name="Set-points",
    row_is="a trim in one mode",
    hint="Overrides the equipment's own settings in one mode; a blank leaves them.",
    unique=("equipment", "mode"),
    columns=(
        reference(
            "Equipment", "equipment", ("Gensets", "Converter supplies", *TRANSFORMER_SHEETS), "", **REQUIRED
        ),
        reference("Mode", "mode", MODES_SHEET, "", **REQUIRED),
        number("No-load voltage", "%", "no_load_voltage_pu", between(50.0, 150.0), "of rated voltage"),
        number("No-load frequency", "%", "no_load_frequency_pu", between(50.0, 150.0), "of rated frequency"),
        number("Set power", "kW", "p_set_kw", between(-200_000.0, 200_000.0), "of a converter supply"),
        number(
            "Set reactive power",
            "kvar",
            "q_set_kvar",
            between(-200_000.0, 200_000.0),
            "of a set in kvar control; blank: its rated power factor",
        ),
        choice("Regulator mode", "regulator_mode", get_args(RegulatorMode), ""),
        number("Tap", "%", "tap_pu", between(-20.0, 20.0), "+ : more primary turns"),
    ),
)

DEMAND = SheetSpec(
    name="Demand",
    row_is="a load",
    hint="For each mode: units in use, load factor and duty. A load that is not listed asks for nothing.",
    required=True,
    unique=("load",),
    columns=(reference("Load", "load", ("Loads",), "", **REQUIRED),),
    mode_columns=(
        ModeColumn(
            suffix="in use",
            column=number(
                "in use", "", "in_use", between(0.0, 10_000.0), "number of units; blank: none", absent=0.0
            ),
        ),
        ModeColumn(
            suffix="load factor",
            column=number(
                "load factor", "%", "load_factor", between(0.0, 150.0),
                "of the absorbed power where that is given, else of the rated output",
                usual=Bounds(low=1.0, high=110.0, or_zero=True),
            ),
        ),
        ModeColumn(
            suffix="duty",
            column=choice(
                "duty", "duty", get_args(DutyKind), "",
                **typical("continuous", "counts in full; the safe side for the balance"),
            ),
        ),
    ),
)  # fmt: skip

SIMULTANEITY = SheetSpec(
    name="Simultaneity",
    row_is="a service in a mode",
    hint="The share of a service's load that comes at the same time; replaces the diversity of Acceptance.",
    unique=("service", "mode", "duty"),
    columns=(
        text("Service", "service", "as on the sheet Loads", **REQUIRED),
        reference("Mode", "mode", MODES_SHEET, "", **REQUIRED),
        choice("Duty", "duty", get_args(DutyKind), "", **REQUIRED),
        number(
            "Simultaneity factor", "%", "factor", between(0.0, 100.0), "of the sum of loads", **REQUIRED
        ),
    ),
)  # fmt: skip

INTERLOCKS = SheetSpec(
    name="Interlocks",
    row_is="two pieces of equipment that may not be closed together",
    hint="Equipment that the sheet Running has on in one mode is held against it.",
    unique=("name",),
    columns=(
        text("Interlock", "name", "name", **REQUIRED),
        reference("Equipment A", "equipment_a", SWITCHABLE, "", **REQUIRED),
        reference("Equipment B", "equipment_b", SWITCHABLE, "", **REQUIRED),
        choice("Kind", "kind", ("never both closed", "both only in change-over"), "", **REQUIRED),
    ),
)

TRANSFERS = SheetSpec(
    name="Transfers",
    row_is="a second feed of a board or load",
    hint="A supply is named by its board, its source or the branch that brings it.",
    unique=("target",),
    columns=(
        reference("Board or load", "target", ("Boards", "Loads"), "what is fed", **REQUIRED),
        reference("Normal supply", "normal_supply", ("Boards", *SOURCES, *BRANCHES), "", **REQUIRED),
        reference("Other supply", "other_supply", ("Boards", *SOURCES, *BRANCHES), "", **REQUIRED),
        yes_no("Automatic", "automatic", "changes over by itself", absent="no"),
        number(
            "Transfer at", "% U", "transfer_at_pu", between(0.0, 100.0),
            "of nominal voltage, below which it changes over",
        ),
        number("Delay", "s", "delay_s", between(0.0, 600.0), "before it changes over"),
    ),
)  # fmt: skip

EVENTS = SheetSpec(
    name="Events",
    row_is="one step of a case",
    hint="Rows with one Case form a sequence in one mode.",
    columns=(
        text("Case", "case", "name of the sequence", **REQUIRED),
        reference("Mode", "mode", MODES_SHEET, "", **REQUIRED),
        choice("Kind", "kind", get_args(EventKind), "", **REQUIRED),
        reference("Equipment", "equipment", ANY_EQUIPMENT, "what it happens to", **REQUIRED),
        number("Size", "", "size", between(-1e6, 1e6), "in the unit beside it; blank: the whole"),
        text("Unit", "unit", "of the size, for example kW or %"),
        number("At", "s", "at_s", between(0.0, 3600.0), "from the start of the case", absent=0.0),
        number("Duration", "s", "duration_s", LARGE, "blank: to the end"),
    ),
)
