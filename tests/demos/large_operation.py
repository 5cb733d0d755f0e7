"""Modes, switching, events and protection of the demonstration construction vessel."""

from __future__ import annotations

from tests.demos.equipment import protect_sets
from tests.demos.rows import Book

MV_TRANSFORMERS = (
    *("T-PP1", "T-PP2", "T-PS1", "T-PS2", "T-TF1", "T-TF2", "T-TA1", "T-TA2"),
    *("T-690-P", "T-690-S", "T-450-P", "T-450-S"),
)


def add_operation(book: Book) -> None:
    """Add the modes and all that belongs to them, and the protection."""
    _operation(book)
    _running(book)
    _events(book)
    _protection(book)


def _operation(book: Book) -> None:
    both = "DG1, DG4"
    book.add(
        "Modes",
        "Mode|Description|Kind|Sets that may run together in change-over",
        ("Transit", "Full speed, ring closed", "sea", "DG1, DG3, DG4, DG6"),
        ("Slow transit", "Economical speed on two sets", "sea", both),
        ("Manoeuvring", "Approach with thrusters, ring closed", "manoeuvring"),
        ("Station keeping closed ring", "Positioning, all section ties closed", "station keeping"),
        ("Station keeping in two parts", "Positioning, port and starboard apart", "station keeping"),
        ("Heavy lift", "Crane, tensioners and rapid ballast, ring open at one tie", "cargo"),
        ("Harbour", "Alongside on the harbour set, 6.6 kV dead", "harbour"),
        ("At anchor", "One small set with the port battery", "harbour", "DG2, DG5"),
        ("Shore supply", "Alongside on the 450 V shore connection", "shore"),
        ("Emergency", "Main plant dead, emergency set on its board", "emergency"),
    )
    book.add(
        "Set-points",
        "Equipment|Mode|No-load voltage [%]|No-load frequency [%]|Set power [kW]|Regulator mode|Tap [%]",
        ("BATT-S", "Transit", None, None, -300),
        ("BATT-S", "Heavy lift", None, None, 400),
        ("DG1", "Station keeping in two parts", 100.0, None, None, "cross-current"),
        ("DG3", "Station keeping in two parts", 100.0, None, None, "cross-current"),
        # floats: its droop line meets zero kW where the running set holds the frequency
        ("BATT-P", "At anchor", 100.0, 98.9),
        ("T-450-P", "At anchor", None, None, None, None, -2.5),
        ("HG", "Harbour", 101.0, 100.0),
    )
    book.add(
        "Simultaneity",
        "Service|Mode|Duty|Simultaneity factor [%]",
        ("Deck", "Heavy lift", "intermittent", 45),
        ("Deck", "Manoeuvring", "intermittent", 50),
        ("Workshop", "Transit", "intermittent", 25),
        ("Galley", "Transit", "continuous", 80),
        ("Lighting", "Harbour", "continuous", 85),
        ("Safety", "Emergency", "intermittent", 100),
    )
    book.add(
        "Interlocks",
        "Interlock|Equipment A|Equipment B|Kind",
        ("Shore against HG", "Shore", "HG", "both only in change-over"),
        ("Shore against T-450-P", "Shore", "T-450-P", "never both closed"),
        ("HG against T-450-S", "HG", "T-450-S", "both only in change-over"),
        ("Interconnector against EDG", "C-ESB", "EDG", "both only in change-over"),
        ("Emergency transformers", "T-EM1", "T-EM2", "both only in change-over"),
        ("450 V tie against T-450-S", "BT-450", "T-450-S", "both only in change-over"),
    )
    book.add(
        "Transfers",
        "Board or load|Normal supply|Other supply|Automatic|Transfer at [% U]|Delay [s]",
        ("ESB", "SWB-P", "EDG", "yes", 70, 15),
        ("ELDB", "T-EM1", "T-EM2", "no"),
        ("THR-F", "SWB-P", "SWB-S", "yes", 70, 2),
        ("THR-A", "SWB-S", "SWB-P", "yes", 70, 2),
    )


def _running(book: Book) -> None:
    main = "on on on on on on off on off off"
    book.running(
        {
            # transit, slow, manoeuvring, closed ring, two parts, lift, harbour, anchor, shore, emergency
            "DG1": "on on on on on on off off off off",
            "DG2": "standby standby standby standby standby standby standby on off off",
            "DG3": "standby standby standby standby on on off standby off off",
            "DG4": "on on on on on on off standby off off",
            "DG5": "standby standby standby standby standby standby off off off off",
            "DG6": "on off on on on on off off off off",
            "HG": "off off off off off off on off standby off",
            "EDG": "standby standby standby standby standby standby standby standby standby on",
            "Shore": "off off off off off off off off on off",
            "BATT-P": "off off off off off off off on off off",
            "BATT-S": "on off off off off on off off off off",
            "Jetting pump motor": "off off off off off on off off off off",
            "BT-12": main,
            "BT-23": "on on on on off on off on off off",
            "BT-34": main,
            "BT-41": "on on on on off off off on off off",
            "BT-690": "off off off off off off off on off off",
            "BT-450": "off off off off off off on off on off",
            "BT-LDB": "off off off off off off off off off off",
            "C-ESB": "on on on on on on on on on off",
            "C-THR-F-2": " ".join(["standby"] * 9 + ["off"]),
            "C-THR-A-2": " ".join(["standby"] * 9 + ["off"]),
            "FLT-P": "off off off on on on off off off off",
            "FLT-S": "off off off on on on off off off off",
            "FLT-MV": "on on on off off off off off off off",
            "X-CRANE-P": "off off off on on on off on off off",
            "X-CRANE-S": "off off off on on on off off off off",
            **dict.fromkeys(("T-PP1", "T-PP2", "T-PS1", "T-PS2"), "on on on on on on off off off off"),
            **dict.fromkeys(("T-TF1", "T-TF2", "T-TA1", "T-TA2"), "off off on on on on off off off off"),
            "T-690-P": main,
            "T-690-S": "on on on on on on off off off off",
            "T-450-P": main,
            "T-450-S": main,
            "T-230-P": "on on on on on on on on on off",
            "T-230-S": "on on on on on on on on on off",
            "T-EM1": "on on on on on on on on on on",
            "T-EM2": " ".join(["standby"] * 10),
        }
    )


def _propulsion_limited(case: str, at_s: float) -> list[tuple[object, ...]]:
    """Return what the drives take off by themselves when a set is lost."""
    drives = [f"Propulsion converter {side}{n}{half}" for side in "PS" for n in "12" for half in "AB"]
    return [(case, "Transit", "load step", drive, -350, "kW", at_s) for drive in drives]


def _events(book: Book) -> None:
    book.add(
        "Events",
        "Case|Mode|Kind|Equipment|Size|Unit|At [s]|Duration [s]",
        ("Fire pump start at anchor", "At anchor", "motor start", "Fire pump P", 1, "units", 0.5),
        ("Rapid ballast start", "Heavy lift", "motor start", "Rapid ballast pump 1", 1, "units", 0.5),
        ("Emergency fire pump start", "Emergency", "motor start", "Emergency fire pump", 1, "units", 0.5),
        ("Chiller start in harbour", "Harbour", "motor start", "Chiller 1", 1, "units", 0.5),
        ("Thruster step", "Station keeping closed ring", "load step", "Bow thruster 1", 600, "kW", 0.5),
        ("One large set trips", "Station keeping in two parts", "set trip", "DG3", None, None, 0.5),
        ("Set trips in transit", "Transit", "set trip", "DG4", None, None, 0.5),
        *_propulsion_limited("Set trips in transit", 0.8),
        ("Propulsion throws off", "Slow transit", "load rejection", "DG1", 80, "%", 0.5),
        ("Voltage of DG4 raised", "Transit", "set-point step", "DG4", 103, "% no-load voltage", 0.5),
        ("Droop of DG1 changed", "Transit", "droop changed", "DG1", 5, "% voltage droop", 0.5),
        ("Field of DG6 lost", "Transit", "field loss", "DG6", None, None, 0.5),
        *_propulsion_limited("Field of DG6 lost", 4.8),
        ("Black start of MV-2", "At anchor", "build-up", "DG2", None, None, 0),
        ("Energising T-PP1", "Heavy lift", "transformer energising", "T-PP1", None, None, 0.5),
        ("Fault on LV690-S", "Heavy lift", "fault", "LV690-S", None, None, 0.5),
        ("Fault on LV690-S", "Heavy lift", "fault cleared", "LV690-S", None, None, 0.8),
        ("DG4 droop 6 %", "Transit", "maladjustment", "DG4", 6, "% voltage droop", 0),
        ("DG4 voltage 103 %", "Transit", "maladjustment", "DG4", 103, "% no-load voltage", 0),
        ("DG6 frequency 103 %", "Transit", "maladjustment", "DG6", 103, "% no-load frequency", 0),
        ("DG1 speed droop 3 %", "Manoeuvring", "maladjustment", "DG1", 3, "% speed droop", 0),
    )


def _protection(book: Book) -> None:
    earth: dict[str, object] = {"Earth-fault current [A]": 1.5, "Earth-fault delay [s]": 0.8}
    book.amend("Devices", earth, *[f"R-DG{n}" for n in range(1, 7)])
    quick: dict[str, object] = {"Earth-fault current [A]": 1.0, "Earth-fault delay [s]": 0.3}
    book.amend("Devices", quick, *[f"R-{name}-1" for name in MV_TRANSFORMERS], "R-Jetting pump motor")
    book.amend("Devices", {"Interlocked with": "Q-T-450-P-2"}, "Q-BT-450")
    sets = tuple(f"DG{n}" for n in range(1, 7))
    protect_sets(book, sets)
    protect_sets(book, ("HG", "EDG"), preferential=False)
    book.add(
        "Protection functions",
        "Function|Equipment|Kind|Pick-up|Unit|Delay [s]|Trips",
        *[(f"{n} loss of excitation", n, "loss of excitation", 40, "%", 3, f"Q-{n}") for n in sets],
        *[(f"{n} differential", n, "differential", 20, "%", 0.05, f"Q-{n}") for n in (*sets, "HG")],
        *[
            (f"MV-{n} differential", f"MV-{n}", "differential", 20, "%", 0.05, opens)
            for n, opens in (
                (1, "Q-BT-12, Q-BT-41, Q-DG1"),
                (2, "Q-BT-12, Q-BT-23, Q-DG2, Q-DG3"),
                (3, "Q-BT-23, Q-BT-34, Q-DG4"),
                (4, "Q-BT-34, Q-BT-41, Q-DG5, Q-DG6"),
            )
        ],
        ("ESB undervoltage", "ESB", "undervoltage", 70, "%", 3, "Q-ESB-E"),
    )
    book.add(
        "Setting ranges",
        "Device|Setting|Min|Max|Step",
        *[(f"R-{n}", "Time multiplier", 0.05, 1.5, 0.01) for n in sets],
        *[(f"R-{n}", "Short-time current", 300, 5000, 10) for n in sets],
        *[(f"R-{n}", "Short-time delay", 0.05, 2, 0.01) for n in sets],
        *[(f"R-BT-{n}", "Short-time delay", 0.05, 2, 0.01) for n in ("12", "23", "34", "41")],
        ("Q-BT-450", "Short-time delay", 0.1, 0.5, 0.1),
        ("Q-T-450-P-2", "Short-time delay", 0.1, 0.5, 0.1),
        ("Q-T-450-S-2", "Short-time delay", 0.1, 0.5, 0.1),
    )
    book.add(
        "Maker discrimination",
        "Upstream device|Downstream device|Discrimination up to [kA]|Reference",
        ("Q-ER1-P", "Q-Main sea-water pump P1", 42, "Invented data sheet, table 3"),
        ("Q-ER1-S", "Q-Main sea-water pump S1", 42, "Invented data sheet, table 3"),
        ("Q-HVAC-1", "Q-Chiller 1", 42, "Invented data sheet, table 4"),
        ("Q-GALLEY", "Q-Range 1", 36, "Invented data sheet, table 2"),
        ("Q-L-ACC1", "Q-Cabin heaters deck 1", 10, "Invented data sheet, table 1"),
    )
