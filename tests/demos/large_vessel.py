"""A 150 m construction vessel, 60 Hz: six main sets on a 6.6 kV ring of four sections, about 60 boards.

Two propulsion motors are fed by four 12-pulse converter pairs behind three-winding transformers; the pairs
of one shaft are shifted by 15 degrees against each other. Four thrusters, two batteries, a harbour set, an
emergency set, a synchronous pump motor. The section ties have the impedance of their busbar trunking (about
20 m), so that the ring's currents are determined.

The second converter pair of each shaft is taken off by the preferential trip (stage 2). In harbour the
harbour set is alone: its loss is a blackout, and is reported as it is.

Meant to be a sound design but for one planted fault: the harbour set is shunt excited, its short-circuit
current collapses, and behind delayed breakers a fault in harbour does not clear.
"""

from __future__ import annotations

from tests.demos.consumers import read_loads
from tests.demos.large_loads import load_lists
from tests.demos.large_operation import add_operation
from tests.demos.large_plant import add_plant
from tests.demos.rows import Book, Tables

MODES = (
    "Transit",
    "Slow transit",
    "Manoeuvring",
    "Station keeping closed ring",
    "Station keeping in two parts",
    "Heavy lift",
    "Harbour",
    "At anchor",
    "Shore supply",
    "Emergency",
)
LETTERS = "TSMKPLHAOE"


def tables() -> Tables:
    """Return every sheet of the construction vessel's workbook."""
    book = Book(hz=60, modes=MODES, letters=LETTERS, consumer_volts={450: 440})
    _project(book)
    add_plant(book)
    for text in load_lists():
        read_loads(book, text)
    add_operation(book)
    return book.finish()


def _project(book: Book) -> None:
    book.add(
        "Project",
        "Item|Value|Note",
        ("Vessel", "Demonstration construction vessel", "Invented; no real vessel"),
        ("Hull number", "D-303"),
        ("Document number", "D-303-E-010"),
        ("Revision", "C"),
        ("Date", "2025-05-20"),
        ("Prepared by", "Electrical department"),
        ("Checked by", "Design office"),
        ("Approved by", "Technical manager"),
        ("Rated frequency", 60, "Hz"),
        ("Classification rules and edition", "IACS unified requirements, as amended 2023"),
        ("Ambient temperature", 45, "°C, outside air 35 °C"),
        ("Engine-room temperature", 45, "°C"),
    )
    book.add(
        "Acceptance",
        "Quantity|Limit|Unit|Basis",
        ("Close margin", 5, "%", "Design office practice"),
        ("Voltage reference", "nominal of board", None, "Agreed with the owner"),
        ("Intermittent diversity", 2.5, "-", "Owner's specification"),
        ("One-set margin", 10, "%", "Running sets stay below 90 %"),
        ("Emergency duration", 18, "h", "SOLAS II-1/43, cargo ship"),
        ("Total harmonic distortion", 8, "%", "IACS UR E24"),
    )
