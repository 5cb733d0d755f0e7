"""One slip in a workbook gives one message, with the cell, what it holds and what is wanted instead."""

from __future__ import annotations

from pathlib import Path

import pytest

from study.cli import main
from tests.faulty_workbooks.grids import Grid, check, good_grids, listing, write
from tests.faulty_workbooks.spoil import Spoil, call, put, rename, without


def near(cell: str, text: str, known: str) -> str:
    return (
        f"{cell}: heading “{text}”: the heading is nearly “{known}”; write “{known}”, or start the heading "
        "with # if it is your own remark [near-miss-heading]"
    )


def messages(*spoil: Spoil) -> list[str]:
    grids = good_grids()
    for change in spoil:
        change(grids)
    return [str(issue) for issue in check(grids)[1]]


@pytest.mark.parametrize(
    ("spoil", "message"),
    [
        (
            rename("Boards", "Role", "Roel"),
            near("Boards!C4", "Roel", "Role"),
        ),
        (
            rename("Devices", "End", "Edn"),
            near("Devices!C4", "Edn", "End"),
        ),
        (
            rename("Curves", "Current [A]", "Curretn [A]"),
            near("Curves!C4", "Curretn [A]", "Current [A]"),
        ),
        (
            rename("Gensets", "Rated apparent power [kVA]", "Rated apparent powr [kVA]"),
            near("Gensets!C4", "Rated apparent powr [kVA]", "Rated apparent power [kVA]"),
        ),
        (
            rename("Running", "Harbour", "Habrour"),
            near("Running!C4", "Habrour", "Harbour"),
        ),
        (
            rename("Demand", "Harbour: load factor [%]", "Harbour: load factor [V]"),
            "Demand!F4: heading “Harbour: load factor [V]”: the unit [V] does not fit; write "
            "“Harbour: load factor [%]”; known units are [%], [pu], [p.u.] [wrong-unit]",
        ),
        (
            rename("Spectra", "Order", "Ordre"),
            near("Spectra!C4", "Ordre", "Order"),
        ),
        (
            rename("Let-through", "Prospective current [kA]", "Prospective current [kW]"),
            "'Let-through'!B4: heading “Prospective current [kW]”: the unit [kW] does not fit; write "
            "“Prospective current [kA]”; known units are [A], [kA] [wrong-unit]",
        ),
        (
            put("Transformers", 0, "From", "MSBA"),
            "Transformers!B5: From “MSBA” does not exist; closest names are MSB A, MSB B [unknown-name]",
        ),
        (
            put("Demand", 0, "Load", "Pmup"),
            "Demand!A5: Load “Pmup” does not exist; the closest name is Pump [unknown-name]",
        ),
        (
            put("Gensets", 0, "Rated apparent power [kVA]", "500 kVA"),
            "Gensets!C5: Rated apparent power is the text “500 kVA”; write the number alone, in the "
            "unit of the heading [text-number]",
        ),
        (
            put("Loads", 0, "Installed", "2 off"),
            "Loads!F5: Installed is the text “2 off”; write the number alone [text-number]",
        ),
        (
            put("Loads", 0, "Rated output [kW]", "30,5"),
            "Loads!G5: Rated output is the text “30,5”; type it again as a number; Excel aligns numbers to "
            "the right [decimal-comma]",
        ),
        (
            put("Running", 0, "Harbour", "running"),
            "Running!C5: Harbour: State is “running”; choose from on, off, standby [unknown-choice]",
        ),
        (
            put("Gensets", 0, "Engine power [kW]", 4250.0),
            "Gensets!F5: DG1: the engine gives 3995 kW at the terminals, the alternator is rated 400 kW, "
            "a ratio of 9.99; usual is 0.7 to 1.3; "
            "check engine power, rated kVA and power factor [engine-power]",
        ),
    ],
)
def test_one_slip_gives_one_message(spoil: Spoil, message: str) -> None:
    assert messages(spoil) == [message]


def test_a_set_misspelt_on_running_gives_no_false_alarm() -> None:
    """Not listed, the set counts neither as on nor as off: no interlock is broken, no mode is without."""
    found = messages(put("Running", 0, "Equipment", "D1G"), put("Running", 3, "Harbour", "on"))
    assert len(found) == 2
    assert found[0].startswith("Gensets!A5: DG1 has no row on the sheet Running; add a row")
    assert found[1].startswith("Running!A5: Equipment “D1G” does not exist; the closest name is DG1 [")


@pytest.mark.parametrize(
    ("spoil", "message"),
    [
        (without("Boards"), "Boards: there is no sheet Boards; add the sheet [missing-sheet]"),
        (
            call("Gensets", "Genset"),
            "Genset: the sheet’s name is nearly “Gensets”; call it “Gensets”, or start its name with # if it "
            "is your own [near-miss-sheet]",
        ),
        (
            rename("Gensets", "Genset", "Machine room"),
            "Gensets: the sheet has no row of headings; start the row of headings with “Genset” "
            "[missing-header]",
        ),
        (
            lambda grids: grids["Modes"].rows.clear(),
            "Modes: the sheet has no rows; fill it in [missing-sheet]",
        ),
        (
            lambda grids: grids["Running"].rows.clear(),
            "Running: the sheet has no rows; fill it in [missing-sheet]",
        ),
        (
            lambda grids: grids.update(Loads=Grid([], [])),
            "Loads: the sheet is empty; fill it in [missing-sheet]",
        ),
    ],
)
def test_a_sheet_that_cannot_be_read_is_the_only_fault(spoil: Spoil, message: str) -> None:
    """What refers to it is right for all that is known."""
    assert messages(spoil) == [message]


def test_what_refers_to_other_sheets_is_still_checked() -> None:
    found = messages(without("Boards"), put("Demand", 0, "Load", "Pmup"))
    assert [line.partition(":")[0] for line in found] == ["Boards", "Demand!A5"]


def test_faults_of_several_sheets_come_together_and_in_order() -> None:
    grids = good_grids()
    for change in (
        put("Loads", 1, "Rated output [kW]", "x"),
        put("Boards", 0, "Role", "x"),
        put("Loads", 0, "Rated output [kW]", "y"),
        put("Cables", 0, "To", "z"),
    ):
        change(grids)
    issues = check(grids)[1]
    where = [issue.address for issue in issues if issue.severity == "fault"]
    assert where == ["Boards!C5", "Cables!C5", "Loads!G5", "Loads!G6"], listing(issues)


def test_what_is_not_read_is_listed_once(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    grids = good_grids()
    grids["Loads"].add("Yard item", ["77", "78"])
    grids["Loads"].add("# own remark", ["x"])
    grids["Own notes"] = Grid(["a"], [["b"]])
    write(grids, tmp_path / "vessel.xlsx")
    assert main(["check", str(tmp_path / "vessel.xlsx")]) == 0
    lines = [line for line in capsys.readouterr().out.splitlines() if line.startswith("not read: ")]
    assert lines == [
        "not read: sheet “Own notes”",
        f"not read: Loads!{grids['Loads'].cell(-1, 'Yard item')}: column “Yard item”",
    ]
