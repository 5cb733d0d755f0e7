"""A small invented plant with a value under every heading of every sheet, and nothing wrong with it."""

from __future__ import annotations

from typing import Any

Row = dict[str, Any]
Tables = dict[str, list[Row]]

MODES = ("At sea", "Harbour")

MACHINE: Row = {
    "Xd [pu]": 2.4, "Xd' [pu]": 0.22, "Xd'' [pu]": 0.15, "Xd' saturated [pu]": 0.2,
    "Xd'' saturated [pu]": 0.135, "Xq [pu]": 1.3, "Xq' [pu]": 1.3, "Xq'' [pu]": 0.18, "Xl [pu]": 0.09,
    "X2 [pu]": 0.165, "X0 [pu]": 0.04, "Stator resistance [pu]": 0.012, "Td0' [s]": 2.0, "Td' [s]": 0.18,
    "Td'' [s]": 0.012, "Tq'' [s]": 0.012, "Armature time constant [s]": 0.035, "Saturation S(1.0)": 0.1,
    "Saturation S(1.2)": 0.35, "Reactance tolerance [%]": 15.0, "Inertia constant [s]": 1.0,
    "Field supply": "compounded", "Unregulated voltage [%]": 108.0, "Compound current share [%]": 60.0,
    "Excitation ceiling [x rated-load field]": 2.2, "Exciter time constant [s]": 0.12, "Regulator gain": 30.0,
    "Regulator integral [1/s]": 20.0, "Regulator derivative [s]": 0.4, "V/Hz knee [Hz]": 57.0,
    "Sustained short-circuit current [x In]": 3.3, "Sustained duration [s]": 5.0,
}  # fmt: skip

SETTINGS: Row = {
    "No-load voltage [%]": 102.0, "Voltage droop [%]": 4.0, "Droop base": "rated load at rated pf",
    "Droop law": "phasor", "Regulator mode": "droop", "Droop circuit polarity": "normal",
    "Cross-current group": "main", "No-load frequency [%]": 102.0, "Speed droop [%]": 4.0,
    "Governor mode": "droop", "Governor time constant [s]": 0.25, "Governor dead time [s]": 0.03,
}  # fmt: skip


def _genset(name: str, board: str, service: str) -> Row:
    return {
        "Genset": name, "Board": board, "Rated apparent power [kVA]": 500.0, "Rated power factor": 0.8,
        "Rated voltage [V]": 450.0, "Engine power [kW]": 425.0, "Alternator efficiency [%]": 94.0,
        "Service": service, "Minimum engine load [%]": 30.0, "Largest engine load step [%]": 40.0,
        "Start delay [s]": 20.0, "Starts at island load [%]": 85.0, "Redundancy group": "A",
        **MACHINE, **SETTINGS,
    }  # fmt: skip


def _board(name: str, volts: float, role: str) -> Row:
    return {
        "Board": name, "Nominal voltage [V]": volts, "Role": role, "Busbar rated current [A]": 1600.0,
        "Peak withstand [kA]": 80.0, "Short-time withstand [kA]": 40.0, "Short-time duration [s]": 1.0,
        "System earthing": "high resistance", "Earthing resistor [ohm]": 50.0, "Resistor rating [A]": 5.0,
        "Resistor time [s]": 10.0, "Redundancy group": "A",
    }  # fmt: skip


def _cable(name: str, ends: tuple[str, str], section: float, length: float) -> Row:
    return {
        "Cable": name, "From": ends[0], "To": ends[1], "Cores": "3", "Runs in parallel": 2.0,
        "Section [mm2]": section, "Length [m]": length, "Conductor": "copper", "Conductor class": "2",
        "Tinned": "no", "Insulation": "EPR", "Conductor temperature [°C]": 90.0,
        "Short-circuit temperature [°C]": 250.0, "Ambient temperature [°C]": 45.0, "Cables bunched": 3.0,
        "Duty": "continuous", "Overall diameter [mm]": 40.0, "Further derating": 1.0,
        "Resistance [ohm/km]": 0.193, "Reactance [ohm/km]": 0.09, "R0 [ohm/km]": 0.6, "X0 [ohm/km]": 0.3,
        "Capacitance [uF/km]": 0.4, "Current rating [A]": 230.0,
    }  # fmt: skip


def _load(name: str, board: str, kind: str, kw: float, volts: float = 440.0, **more: Any) -> Row:
    return {
        "Load": name, "Board": board, "Description": "invented", "Service": "Engine auxiliaries",
        "Kind": kind, "Installed": 2.0, "Rated output [kW]": kw, "Absorbed power [kW]": 0.9 * kw,
        "Power factor": 0.86, "Running current [A]": 50.0, "Rated voltage [V]": volts, "Phases": "3",
        "Essential to": "propulsion", "Trip stage": "1", "Redundancy group": "A", **more,
    }  # fmt: skip


MOTOR: Row = {
    "Efficiency": 0.92, "Rated speed [rpm]": 1770.0, "Poles": 4.0, "Load torque law": "fan",
    "Moment of inertia [kgm2]": 0.8, "Starting time [s]": 4.0, "Contactor drop-out [%]": 60.0,
    "Restart delay after blackout [s]": 5.0, "Regenerates": "no",
}  # fmt: skip
LINE_START: Row = {
    "Starting current [x In]": 6.5, "Starting power factor": 0.3, "Locked-rotor torque [x Tn]": 1.8,
    "Breakdown torque [x Tn]": 2.4,
}  # fmt: skip
CONVERTER: Row = {
    "Converter kind": "6-pulse", "Input choke [%]": 3.0, "DC choke [%]": 2.0, "Phase shift [deg]": 0.0,
    "Displacement power factor": 0.95, "Spectrum": "Six",
}  # fmt: skip


def _demand(name: str) -> Row:
    row: Row = {"Load": name}
    for mode in MODES:
        row |= {f"{mode}: in use": 1.0, f"{mode}: load factor [%]": 80.0, f"{mode}: duty": "continuous"}
    return row


def _running(name: str, at_sea: str = "on", harbour: str = "on") -> Row:
    return {"Equipment": name, "At sea": at_sea, "Harbour": harbour}


def _device(name: str, equipment: str, kind: str, **more: Any) -> Row:
    return {
        "Device": name, "Equipment": equipment, "Kind": kind, "Rated current [A]": 1000.0,
        "Rated voltage [V]": 690.0, "Icu [kA]": 50.0, "Ics [kA]": 50.0, "Icw [kA]": 40.0, "Icm [kA]": 105.0,
        "Icw duration [s]": 1.0, "Test power factor": 0.25, "Category": "B", **more,
    }  # fmt: skip


BREAKER: Row = {
    "Setting source": "adjustable", "Curve": "CL 100", "Long-time current [A]": 700.0,
    "Long-time delay [s]": 12.0, "Long-time delay at [x Ir]": 6.0, "Long-time law": "I2t",
    "Short-time current [A]": 2100.0, "Short-time delay [s]": 0.3, "Short-time law": "definite",
    "Instantaneous current [A]": "off", "Instantaneous senses": "rms", "Earth-fault current [A]": 100.0,
    "Earth-fault delay [s]": 0.4, "Current tolerance [%]": 10.0, "Time tolerance [%]": 10.0,
    "Opening time min [s]": 0.03, "Breaking time max [s]": 0.07, "CT primary [A]": 1000.0,
    "CT secondary [A]": 5.0, "Relay curve": "very inverse", "Time multiplier": 0.2, "Reset": "definite",
    "Direction": "forward", "Protected zone": "MSB", "Interlocked with": "Q-T1",
}  # fmt: skip


def tables() -> Tables:
    """Return every sheet, new at every call."""
    loads = {
        "Pump": _load("Pump", "MSB A", "motor", 30.0, **MOTOR, **LINE_START, **{"Starting method": "direct"}),
        "Thruster": _load(
            "Thruster", "MSB B", "motor", 90.0, **MOTOR, **LINE_START,
            **{"Starting method": "soft starter", "Soft-starter current [x In]": 3.0,
            "Soft-starter ramp [s]": 8.0},
        ),
        "Compressor": _load(
            "Compressor", "MSB A", "motor", 20.0, **MOTOR, **LINE_START,
            **{"Starting method": "autotransformer", "Autotransformer tap [%]": 65.0},
        ),
        "Fan": _load(
            "Fan", "MSB A", "motor", 15.0, **MOTOR, **LINE_START,
            **{"Starting method": "star-delta", "Star-delta change at [s]": 4.0},
        ),
        "Winch": _load("Winch", "MSB B", "converter", 60.0, **CONVERTER),
        "Lights": _load("Lights", "LDB", "lighting", 10.0, volts=230.0),
    }  # fmt: skip
    return {
        "Project": [
            {"Item": item, "Value": value, "Note": "invented"}
            for item, value in (
                ("Vessel", "Example"), ("Hull number", "1"), ("Document number", "E-1"), ("Revision", "A"),
                ("Date", "2025-03-14"), ("Prepared by", "A"), ("Checked by", "B"), ("Approved by", "C"),
                ("Rated frequency", 60.0), ("Classification rules and edition", "invented, 2025"),
                ("Ambient temperature", 45.0), ("Engine-room temperature", 50.0),
            )
        ],
        "Acceptance": [
            {"Quantity": "Close margin", "Limit": 4.0, "Unit": "%", "Basis": "owner"},
            {"Quantity": "Voltage reference", "Limit": "nominal of board", "Basis": "owner"},
            {"Quantity": "Intermittent diversity", "Limit": 2.0, "Unit": "-", "Basis": "owner"},
        ],
        "Boards": [
            _board("MSB A", 450.0, "main"), _board("MSB B", 450.0, "main"), _board("LDB", 230.0,
            "distribution"),
            _board("ESB", 450.0, "emergency"), _board("RDB", 450.0, "distribution"),
            _board("P1", 600.0, "propulsion"), _board("P2", 600.0, "propulsion"),
        ],
        "Gensets": [_genset("DG1", "MSB A", "main"), _genset("DG2", "MSB B", "main"),
                    _genset("EG", "ESB", "emergency")],
        "Shore supplies": [{
            "Supply": "Shore", "Board": "MSB B", "Rated voltage [V]": 440.0, "Frequency [Hz]": 60.0,
            "Rated current [A]": 400.0, "Fault level max [MVA]": 20.0, "Fault level min [MVA]": 8.0,
            "R/X": 0.2,
        }],
        "Converter supplies": [{
            "Supply": "Battery", "Board": "MSB A", "Rated apparent power [kVA]": 200.0,
            "Control": "grid forming", "Set power [kW]": 50.0, "Set reactive power [kvar]": 0.0,
            "Voltage droop [%]": 3.0, "Speed droop [%]": 4.0, "Stored energy [kWh]": 300.0,
            "Short-circuit current [x In]": 1.5, "Short-circuit duration [s]": 1.0, "Spectrum": "Six",
        }],
        "Synchronous motors": [{
            "Motor": "SM", "Board": "MSB B", "Rated apparent power [kVA]": 120.0, "Rated power factor": 0.9,
            "Rated voltage [V]": 440.0, **MACHINE, "Rated output [kW]": 100.0, "Efficiency": 0.95,
        }],
        "Transformers": [{
            "Transformer": "T1", "From": "MSB A", "To": "LDB", "Rated power [kVA]": 60.0,
            "Primary voltage [V]": 450.0, "Secondary voltage [V]": 230.0, "Short-circuit voltage [%]": 4.0,
            "Copper loss [kW]": 1.0, "Iron loss [kW]": 0.3, "Vector group": "Dyn11", "Units in parallel": 1.0,
            "Tap [%]": 2.5, "X0/X1": 0.95, "R0/R1": 1.0, "Inrush current [x In]": 9.0,
            "Inrush decay [s]": 0.1,
        }],
        "Three-winding transformers": [{
            "Transformer": "T3", "Primary board": "MSB B", "Secondary board": "P1", "Tertiary board": "P2",
            "Primary power [kVA]": 400.0, "Secondary power [kVA]": 200.0, "Tertiary power [kVA]": 200.0,
            "Primary voltage [V]": 450.0, "Secondary voltage [V]": 600.0, "Tertiary voltage [V]": 600.0,
            "Short-circuit voltage primary-secondary [%]": 6.0,
            "Short-circuit voltage primary-tertiary [%]": 6.0,
            "Short-circuit voltage secondary-tertiary [%]": 10.0, "Copper loss primary-secondary [kW]": 2.0,
            "Copper loss primary-tertiary [kW]": 2.0, "Copper loss secondary-tertiary [kW]": 2.5,
            "Iron loss [kW]": 1.0, "Vector group": "Dd0y11", "Tap [%]": 0.0,
        }],
        "Cables": [
            _cable("C-DG1", ("DG1", "MSB A"), 150.0, 20.0), _cable("C-T1", ("MSB A", "T1"), 50.0, 10.0),
            _cable("C-Pump", ("MSB A", "Pump"), 16.0, 40.0), _cable("C-ESB", ("MSB A", "ESB"), 95.0, 60.0),
        ],
        "Ties": [{
            "Tie": "BT", "Board A": "MSB A", "Board B": "MSB B", "Rated current [A]": 1600.0,
            "Reactance [ohm]": 0.0001, "Resistance [ohm]": 0.0001,
        }],
        "Reactors": [{
            "Reactor": "L1", "From": "MSB B", "To": "RDB", "Rated current [A]": 200.0,
            "Reactance [ohm]": 0.05,
            "Resistance [ohm]": 0.001,
        }],
        "Filters": [{
            "Filter": "F5", "Board": "MSB A", "Kind": "tuned", "Rated reactive power [kvar]": 50.0,
            "Rated voltage [V]": 450.0, "Tuning order": 4.9, "Quality": 40.0,
        }],
        "Loads": list(loads.values()),
        "Modes": [
            {"Mode": "At sea", "Description": "invented", "Kind": "sea",
             "Sets that may run together in change-over": "DG1, DG2"},
            {"Mode": "Harbour", "Description": "invented", "Kind": "harbour",
             "Sets that may run together in change-over": "DG1; Shore"},
        ],
        "Running": [
            _running("DG1"), _running("DG2", "standby", "off"), _running("EG", "off", "standby"),
            _running("Shore", "off", "off"), _running("Battery", "off", "on"), _running("BT"),
            _running("SM", "on", "off"), _running("T1"), _running("C-ESB"),
        ],
        "Set-points": [{
            "Equipment": "DG1", "Mode": "At sea", "No-load voltage [%]": 101.0,
            "No-load frequency [%]": 101.0,
            "Set power [kW]": 100.0, "Set reactive power [kvar]": 10.0, "Regulator mode": "no droop",
            "Tap [%]": 0.0,
        }],
        "Demand": [_demand(name) for name in loads],
        "Simultaneity": [{
            "Service": "Engine auxiliaries", "Mode": "At sea", "Duty": "intermittent",
            "Simultaneity factor [%]": 60.0,
        }],
        "Interlocks": [{
            "Interlock": "I1", "Equipment A": "DG1", "Equipment B": "Shore", "Kind": "never both closed",
        }],
        "Transfers": [{
            "Board or load": "ESB", "Normal supply": "MSB A", "Other supply": "EG", "Automatic": "yes",
            "Transfer at [% U]": 80.0, "Delay [s]": 2.0,
        }],
        "Devices": [
            _device("Q-DG1", "C-DG1", "circuit breaker", End="MSB A", **BREAKER),
            _device("Q-T1", "T1", "circuit breaker", End="primary",
                    **(BREAKER | {"Curve": "K1", "Interlocked with": "Q-DG1",
                        "Instantaneous current [A]": 9000.0,
                                  "Short-time current [A]": "off"})),
            _device("F-Pump", "Pump", "fuse", **{"Fuse class": "gG"}),
            _device("O-Pump", "Pump", "thermal overload", **{"Trip class": "10A"}),
        ],
        "Protection functions": [{
            "Function": "RP-DG1", "Equipment": "DG1", "Kind": "reverse power", "Pick-up": 10.0, "Unit": "%",
            "Delay [s]": 5.0, "Trips": "Q-DG1",
        }],
        "Setting ranges": [{
            "Device": "Q-DG1", "Setting": "Long-time current", "Min": 400.0, "Max": 1000.0, "Step": 50.0,
        }],
        "Curves": [
            {"Curve": "K1", "Current [x In]": 2.0, "Time min [s]": 10.0, "Time max [s]": 20.0},
            {"Curve": "K2", "Current [A]": 200.0, "Time min [s]": 10.0, "Time max [s]": 20.0},
        ],
        "Let-through": [{
            "Curve": "CL 100", "Prospective current [kA]": 10.0, "Cut-off peak [kA]": 9.0,
            "Let-through I2t [A2s]": 2.2e5,
        }],
        "Maker discrimination": [{
            "Upstream device": "Q-DG1", "Downstream device": "Q-T1", "Discrimination up to [kA]": 10.0,
            "Reference": "invented",
        }],
        "Spectra": [{
            "Spectrum": "Six", "Loading [%]": 100.0, "Order": 5.0, "Current [%]": 30.0, "Angle [deg]": 0.0,
        }],
        "Events": [{
            "Case": "Start", "Mode": "At sea", "Kind": "load step", "Equipment": "MSB A", "Size": 50.0,
            "Unit": "kW", "At [s]": 1.0, "Duration [s]": 5.0,
        }],
    }  # fmt: skip
