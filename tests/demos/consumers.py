"""Builders of consumers: the load, its demand, its cable and what protects it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Final

from tests.demos import catalogue, sizing
from tests.demos.catalogue import Row
from tests.demos.headings import LOAD_COLUMNS
from tests.demos.rows import Book

DUTIES: Final = {"c": "continuous", "i": "intermittent", "o": "occasional"}
# words of the compact load lists that stand for one or more columns
PRESETS: Final[dict[str, Row]] = {
    "propulsion": {"for_": "propulsion"},
    "steering": {"for_": "steering"},
    "safety": {"for_": "safety"},
    "habitability": {"for_": "habitability"},
    "port": {"group": "Port"},
    "starboard": {"group": "Starboard"},
    "constant": {"law": "constant"},
    "star-delta": {"start": "star-delta", "change_s": 5},
    "autotransformer": {"start": "autotransformer", "tap": 65},
    "soft-starter": {"start": "soft starter", "soft_in": 3.2, "ramp_s": 10},
    "single-phase": {"phases": 2},
    "fused": {"fused": True},
    "regenerates": {"regen": "yes"},
    "6-pulse": {"pulses": "6-pulse", "choke": 3, "pf": 0.92, "dpf": 0.95, "spectrum": "Typical 6-pulse"},
    "dc-link": {
        "pulses": "6-pulse",
        "dc_choke": 4,
        "pf": 0.93,
        "dpf": 0.95,
        "spectrum": "Typical 6-pulse DC link",
    },
    "12-pulse": {"pulses": "12-pulse", "choke": 4, "pf": 0.94, "dpf": 0.96, "spectrum": "Typical 12-pulse"},
    "24-pulse": {"pulses": "24-pulse", "choke": 4, "pf": 0.95, "dpf": 0.96, "spectrum": "Typical 24-pulse"},
    "active": {
        "pulses": "active front end",
        "choke": 8,
        "pf": 0.99,
        "dpf": 1.0,
        "spectrum": "Typical active front end",
    },
}
MOTOR_BREAKERS_A: Final = (2, 4, 6, 10, 16, 25, 32, 50, 63, 80, 100, 160, 250, 400, 630)


def add_load(book: Book, *line: object, **columns: object) -> None:
    """Add a consumer, its demand and, where a length is given, its cable and devices.

    The line is: name, board, service, kind, units installed, kW, demand, length of cable [m]. The demand
    has one word for each mode: ``units/load factor`` with ``i`` or ``o`` behind it for a duty that is not
    continuous, or a dash.
    """
    name, board, service, kind, installed, kw, demand, *length_m = line
    row: Row = {
        "Load": name,
        "Board": board,
        "Service": service,
        "Kind": kind,
        "Installed": installed,
        "Rated output [kW]": kw,
        "Phases": 3,
        "Essential to": "none",
        "Trip stage": "none",
    }
    if kind == "motor":
        row |= {"Starting method": "direct", "Poles": 4, "Load torque law": "fan"}
        if columns.get("for_") in ("propulsion", "steering"):
            row["Restart delay after blackout [s]"] = book.next_restart_s()
    row["Rated voltage [V]"] = book.consumer_volts.get(book.volts[str(board)], book.volts[str(board)])
    fused = columns.pop("fused", False)
    row |= {LOAD_COLUMNS[key]: value for key, value in columns.items()}
    book.sheets["Loads"].append(row)
    book.sheets["Demand"].append(_demand(book, str(name), str(demand)))
    if length_m:
        _connect(book, row, float(str(length_m[0])), fused=bool(fused))


def read_loads(book: Book, text: str) -> None:
    """Add the consumers of a compact list.

    A line in brackets gives board, service, kind and words that hold for the lines under it. Each of those
    is: name, kW of a unit (``2x5.5`` for two), demand of each mode, length of cable [m], words, description.
    A word is a preset or ``column=value``; a dash for the length leaves cable and devices out.
    """
    head: list[str] = []
    for line in text.strip().splitlines():
        cells = [cell.strip() for cell in line.strip().strip("[]").split("|")]
        if line.startswith("["):
            head = cells
            continue
        board, service, kind, *common = head
        name, power, demand, length_m, *rest = cells
        installed, _, kw = power.rpartition("x")
        columns = read_words(" ".join((*common, *rest[:1])))
        if len(rest) > 1:
            columns["about"] = rest[1]
        values: list[object] = [name, board, service, kind, int(installed or 1), float(kw), demand]
        add_load(book, *values, *([] if length_m == "-" else [float(length_m)]), **columns)


def read_words(words: str) -> Row:
    """Return the columns that presets and ``column=value`` words stand for."""
    columns: Row = {}
    for word in words.split():
        key, given, value = word.partition("=")
        columns |= {key: _value(value)} if given else PRESETS[word]
    return columns


def _value(text: str) -> object:
    for kind in (int, float):
        try:
            return kind(text)
        except ValueError:
            continue
    return text.replace("_", " ")


def _demand(book: Book, name: str, demand: str) -> Row:
    words = _by_letters(demand, book.letters) if book.letters else demand.split()
    if len(words) != len(book.modes):
        raise ValueError(f"{name}: {len(words)} demands for {len(book.modes)} modes")
    row: Row = {"Load": name}
    for mode, word in zip(book.modes, words, strict=True):
        if word == "-":
            row[f"{mode}: in use"] = 0
            continue
        units, factor = word.split("/")
        duty = factor[-1] if factor[-1] in DUTIES else "c"
        row[f"{mode}: in use"] = int(units)
        row[f"{mode}: load factor [%]"] = float(factor.rstrip("cio"))
        row[f"{mode}: duty"] = DUTIES[duty]
    return row


def _by_letters(demand: str, letters: str) -> list[str]:
    """Return one word for each mode from parts such as ``TSM 1/80; HA 1/50i`` (a dash: in no mode)."""
    words = dict.fromkeys(letters, "-")
    for part in demand.split(";"):
        where, _, word = part.strip().partition(" ")
        for letter in where.strip("-"):
            if words[letter] != "-":
                raise ValueError(f"{demand}: {letter} is named twice")
            words[letter] = word
    return list(words.values())


def load_current_a(book: Book, row: Mapping[str, object]) -> float:
    """Return the rated current of one unit of a load [A], given or worked out."""
    if "Running current [A]" in row:
        return float(str(row["Running current [A]"]))
    kw = float(str(row["Rated output [kW]"]))
    efficiency, cos_phi = sizing.motor_figures(kw) if row["Kind"] == "motor" else (1.0, 0.95)
    efficiency = float(str(row.get("Efficiency", efficiency)))
    cos_phi = float(str(row.get("Power factor", cos_phi)))
    volts = float(str(row.get("Rated voltage [V]", book.volts[str(row["Board"])])))
    return sizing.line_current_a(kw / efficiency / cos_phi, volts, int(str(row["Phases"])))


def _connect(book: Book, row: Row, length_m: float, *, fused: bool) -> None:
    name, board = str(row["Load"]), str(row["Board"])
    amps = load_current_a(book, row)
    phases = int(str(row["Phases"]))
    protect = _protect_motor if row["Kind"] == "motor" else _protect_other
    carries, sheet = protect(book, row, amps, fused)
    book.cable(
        f"C-{name}",
        (board, name),
        carries,
        length_m,
        board=board,
        cores="2" if phases < 3 else "3 single" if amps > 350 else "3",
        phases=phases,
        bunched=8,
        drop_amps=amps,
        least_mm2=max(catalogue.least_mm2(sheet, book.breaking_ka[board]), 2.5 if phases == 3 else 1.5),
    )


def _protect_motor(book: Book, row: Row, amps: float, fused: bool) -> tuple[float, str]:
    """Add a motor's devices; return what its cable carries [A] and the let-through sheet."""
    name, board = str(row["Load"]), str(row["Board"])
    size = sizing.next_size(amps, MOTOR_BREAKERS_A)
    if fused:
        _fuse(book, name, board, sizing.next_size(amps, sizing.FUSES_A), "aM")
    else:
        book.breaker(
            f"Q-{name}",
            f"C-{name}",
            board,
            size,
            ii=round(13 * amps),
            senses="peak",
            curve=frame(size),
            i_tol=20,
        )
    if row["Essential to"] != "steering" and "fire pump" not in name.lower():
        start_s = float(str(row.get("Starting time [s]", 0)))
        book.device(
            f"F-{name}",
            name,
            None,
            "thermal overload",
            round(amps, 1),
            ir=round(amps, 1),
            trip_class="30" if start_s > 5 else "20" if start_s > 3.5 else "10",
            source="adjustable",
        )
    return 1.15 * amps, frame(size)


def _protect_other(book: Book, row: Row, amps: float, fused: bool) -> tuple[float, str]:
    """Add the device of a consumer that is no motor; return as for a motor."""
    name, board = str(row["Load"]), str(row["Board"])
    if fused:
        size = sizing.next_size(1.15 * amps, sizing.FUSES_A)
        _fuse(book, name, board, size, "gG")
        return size / 0.9, "CL 32" if size <= 63 else frame(size)
    if 1.1 * amps <= 63 and takes_miniature(book, board):
        size = sizing.next_size(1.1 * amps)
        book.breaker(
            f"Q-{name}", f"C-{name}", board, size, curve="MCB C", source="fixed", i_tol=None, t_tol=None
        )
        return size, "MCB C"
    setting = max(round(1.15 * amps), 16)
    size = sizing.next_size(setting, sizing.SUPPLY_BREAKERS_A)
    air = size > 630
    book.breaker(
        f"Q-{name}",
        f"C-{name}",
        board,
        size,
        icw_ka=0.8 * book.breaking_ka[board] if air else None,
        ir=setting,
        tr=8,
        tr_at=2,
        isd=6 * setting if air else None,
        tsd=0.1 if air else None,
        ii=round((12 if air else 8) * setting),
        curve=None if air else frame(size),
    )
    return setting, frame(size)


def takes_miniature(book: Book, board: str) -> bool:
    """Return True where miniature breakers have the breaking capacity for a board."""
    return book.breaking_ka[board] <= 15


def _fuse(book: Book, load: str, board: str, amps: float, fuse_class: str) -> None:
    """Add a fuse to a consumer's run; breaking capacity 80 kA as makers declare for the type."""
    ratings: Row = {"u": 500, "icu": 80, "icm": 176, "fuse": fuse_class, "source": "fixed"}
    book.device(f"S-{load}", f"C-{load}", board, "fuse", amps, **ratings)


def frame(amps: float) -> str:
    """Return the let-through sheet of the moulded-case frame that holds a rating."""
    for size in (32, 100, 160, 250):
        if amps <= size:
            return f"CL {size}"
    return "CL 630"
