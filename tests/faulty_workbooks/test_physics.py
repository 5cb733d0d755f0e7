"""Faults of physics through the command line: found by `check` before anything is solved, each at its cell.

What cannot be is common knowledge of the trade; that transformers in parallel need one clock number and one
ratio is from memory of IEC 60076-1 (vector groups) and IEC 60076-8 (parallel operation).
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import pytest

from study.cli import main
from tests.faulty_workbooks.grids import good_grids, write
from tests.faulty_workbooks.spoil import Spoil, again, put


@dataclass(frozen=True)
class Physics:
    """What is spoilt, the cell that `check` must name, words of the message, and whether it is a warning."""

    name: str
    spoil: tuple[Spoil, ...]
    where: tuple[str, int, str]
    words: tuple[str, ...]
    warning: bool = False


def case(
    name: str, where: tuple[str, int, str], words: str | tuple[str, ...], *spoil: Spoil, warning: bool = False
) -> Physics:
    return Physics(
        name=name,
        spoil=spoil,
        where=where,
        words=(words,) if isinstance(words, str) else words,
        warning=warning,
    )


SECOND = again("Transformers", 0, Transformer="T2")
SECOND_BY_CABLES = again("Three-winding transformers", 0, Transformer="T4")

CASES = [
    case(
        "a board without a source", ("Boards", 7, "Board"), "no source can reach Far",
        again("Boards", 2, Board="Far"),
    ),
    case(
        "two voltage levels joined by a tie", ("Ties", 0, "Board B"),
        ("BT joins MSB A (450 V) and LDB (230 V)", "put a transformer between them"),
        put("Ties", 0, "Board B", "LDB"),
    ),
    case(
        "two voltage levels joined by a cable", ("Cables", 3, "To"), "put a transformer between them",
        put("Cables", 3, "To", "LDB"),
    ),
    case(
        "a transformer turned round", ("Transformers", 0, "From"),
        ("T1 has 450 V on LDB, which has 230 V", "exchange From and To"),
        put("Transformers", 0, "From", "LDB"), put("Transformers", 0, "To", "MSB A"),
        put("Cables", 1, "From", "LDB"),
    ),
    case(
        "a transformer with its voltages turned round", ("Transformers", 0, "From"), "exchange From and To",
        put("Transformers", 0, "Primary voltage [V]", 230.0),
        put("Transformers", 0, "Secondary voltage [V]", 450.0),
    ),
    case(
        "X''d above X'd", ("Gensets", 0, "Xd'' [pu]"), "Xd'' must be below Xd'",
        put("Gensets", 0, "Xd'' [pu]", 0.25),
    ),
    case(
        "X'd above Xd", ("Synchronous motors", 0, "Xd' [pu]"), "Xd' must be below Xd",
        put("Synchronous motors", 0, "Xd' [pu]", 2.6),
    ),
    case(
        "power factor of a set above 1", ("Gensets", 0, "Rated power factor"), "up to 1",
        put("Gensets", 0, "Rated power factor", 1.05),
    ),
    case(
        "power factor of a load in per cent", ("Loads", 0, "Power factor"), "up to 1",
        put("Loads", 0, "Power factor", 86.0),
    ),
    case(
        "engine far above what the alternator can turn", ("Gensets", 0, "Engine power [kW]"),
        ("the engine gives 3995 kW at the terminals, the alternator is rated 400 kW",),
        put("Gensets", 0, "Engine power [kW]", 4250.0),
    ),
    case(
        "engine above what the alternator can turn", ("Gensets", 0, "Engine power [kW]"),
        "the engine gives 564 kW at the terminals, the alternator is rated 400 kW",
        put("Gensets", 0, "Engine power [kW]", 600.0), warning=True,
    ),
    case(
        "parallel transformers of two clock numbers", ("Transformers", 1, "Vector group"),
        ("T1 (Dyn11) and T2 (Dyn5) close a ring in the modes At sea and Harbour", "180° apart"),
        SECOND, put("Transformers", -1, "Vector group", "Dyn5"),
    ),
    case(
        "a ring over a three-winding transformer", ("Three-winding transformers", 1, "Vector group"),
        ("T3 (Dd0y11) and T4 (Dd0y1) close a ring", "60° apart"),
        SECOND_BY_CABLES, put("Three-winding transformers", -1, "Vector group", "Dd0y1"),
    ),
    case(
        "parallel transformers of two taps", ("Transformers", 1, "Tap [%]"),
        ("T1 and T2 close a ring in the modes At sea and Harbour", "differ by 2.4 %"),
        SECOND, put("Transformers", -1, "Tap [%]", 5.0), warning=True,
    ),
    case(
        "a tap set in one mode alone", ("Transformers", 1, "Tap [%]"),
        ("T1 and T2 close a ring in the mode At sea", "differ by 5.1 %"),
        SECOND, put("Set-points", 0, "Equipment", "T2"), put("Set-points", 0, "Tap [%]", -2.5),
        warning=True,
    ),
    case(
        "a cable to nowhere", ("Cables", 2, "To"), ("“Pomp”", "Pump"), put("Cables", 2, "To", "Pomp"),
    ),
    case(
        "a device rated below its board", ("Devices", 0, "Rated voltage [V]"),
        "Q-DG1 is rated 230 V, and its board has 450 V",
        put("Devices", 0, "Rated voltage [V]", 230.0),
    ),
    case(
        "a device rated just below its board", ("Devices", 0, "Rated voltage [V]"),
        "Q-DG1 is rated 440 V, and its board has 450 V",
        put("Devices", 0, "Rated voltage [V]", 440.0), warning=True,
    ),
    case(
        "a doubled running state", ("Running", 9, "Equipment"), "stands in row 5 already",
        again("Running", 0, Harbour="off"),
    ),
]  # fmt: skip


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
def test_check_names_the_cell(case: Physics, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    grids = good_grids()
    for spoil in case.spoil:
        spoil(grids)
    book = tmp_path / "vessel.xlsx"
    write(grids, book)
    status = main(["check", str(book)])
    out, err = capsys.readouterr()
    sheet, row, heading = case.where
    name = f"'{sheet}'" if " " in sheet or "-" in sheet else sheet
    cell = f"{name}!{grids[sheet].cell(row, heading)}: "
    lines = [line for line in (out if case.warning else err).splitlines() if cell in line]
    assert lines, out + err
    for words in case.words:
        assert words in lines[0]
    assert status == (0 if case.warning else 2)


@pytest.mark.parametrize(
    "open_it",
    [
        (put("Running", -1, "Equipment", "T2"), put("Running", -1, "At sea", "off")),
        (put("Running", -1, "Equipment", "T2"), put("Running", -1, "At sea", "standby")),
        (put("Running", -1, "Equipment", "C-T1"), put("Running", -1, "At sea", "off")),
        (put("Running", -1, "Equipment", "Q-T1"), put("Running", -1, "At sea", "off")),
    ],
    ids=["transformer off", "transformer standby", "cable off", "device off"],
)
def test_an_open_ring_is_no_ring(
    open_it: tuple[Spoil, ...], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Open at sea by the transformer, its cable or its device: the ring is named in harbour alone."""
    grids = good_grids()
    for spoil in (SECOND, put("Transformers", -1, "Vector group", "Dyn1"), again("Running", 0), *open_it):
        spoil(grids)
    grids["Running"].put(-1, "Harbour", "on")
    book = tmp_path / "vessel.xlsx"
    write(grids, book)
    assert main(["check", str(book)]) == 2
    assert "close a ring in the mode Harbour, and its ends are 60° apart" in capsys.readouterr().err


def test_equal_transformers_in_parallel_are_sound(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    grids = good_grids()
    SECOND(grids)
    SECOND_BY_CABLES(grids)
    book = tmp_path / "vessel.xlsx"
    write(grids, book)
    assert main(["check", str(book)]) == 0
    assert "ring" not in capsys.readouterr().out
