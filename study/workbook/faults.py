"""Every kind of fault that the workbook can have, by its code; and the list that gathers what is found."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType
from typing import Final

from study.issues import Issue, Severity
from study.workbook.package.cells import address, split_address
from study.workbook.sheets import SHEET_ORDER

FAULTS: Final[Mapping[str, str]] = MappingProxyType(
    {
        # sheets and headings
        "missing-sheet": "a sheet that every study needs is not there",
        "doubled-sheet": "two sheets have the same name",
        "near-miss-sheet": "a sheet's name is a letter or two away from a known one",
        "missing-header": "a sheet has no row that starts with its key heading",
        "missing-heading": "a required heading is not there",
        "doubled-heading": "a heading stands twice",
        "near-miss-heading": "a heading is one or two letters away from a known one",
        "unit-without-brackets": "the unit of a heading stands without square brackets",
        "missing-unit": "a heading has no unit and needs one",
        "wrong-unit": "the unit of a heading measures something else",
        "unknown-unit": "the unit of a heading is not known",
        "unknown-mode": "a heading names a mode that the sheet Modes does not have",
        # cells
        "missing-value": "a required cell is blank",
        "no-typical-value": "a blank cell for which there is no typical value",
        "missing-name": "a row holds values and has no name",
        "no-stored-value": "a formula whose value the file does not hold",
        "error-value": "an Excel error",
        "result-formula": "a formula that depends on a result sheet",
        "text-number": "a text where a number belongs",
        "decimal-comma": "a number with a comma, kept as text",
        "date-for-number": "a date where a number belongs",
        "truth-for-number": "TRUE or FALSE where a number belongs",
        "not-finite": "a number too large to be one",
        "percent-format": "a cell shown as a percentage where no percentage belongs",
        "percent-read": "a cell shown as a percentage, read as it is shown",
        "not-whole": "a number with decimals where a whole one belongs",
        "out-of-range": "a number that cannot be",
        "unusual-value": "a number that can be, and seldom is",
        "unknown-choice": "a text that is not in the closed list",
        "not-a-date": "something that is no date",
        "not-a-name": "a date or TRUE or FALSE where a name or text belongs",
        "not-used": "a value that is not used in this row",
        # items and limits
        "near-miss-item": "an item's name is one or two letters away from a known one",
        "doubled-item": "an item or quantity stands twice",
        "unknown-quantity": "a limit that the program does not have",
        # names
        "doubled-name": "two pieces of equipment have one name",
        "doubled-row": "two rows describe the same thing",
        "unknown-name": "a reference to nothing",
        "wrong-equipment": "a reference to something of another kind",
        "unknown-service": "a service that no load has",
        "unknown-end": "an end that the equipment does not have",
        # topology
        "same-end": "both ends are one board",
        "no-board-end": "neither end of a cable is a board",
        "wrong-board": "a cable ends on another board than the equipment's own",
        "doubled-cable": "two cables to one thing from one board",
        "circular-feed": "supplies that feed each other in a circle",
        "two-voltages": "boards of different voltage joined without a transformer",
        "turned-round": "a transformer whose windings are the wrong way round",
        "wrong-voltage": "a rated voltage that does not fit the board",
        "ring-phase": "transformers of different clock number that close a ring",
        "ring-ratio": "transformers of different ratio or tap that close a ring",
        "no-source": "a board that no source can reach",
        "no-sources": "a plant without any source",
        # operation
        "missing-state": "a source without a state in a mode",
        "switched-load": "a load on the sheet Running",
        "interlocked": "interlocked equipment on at the same time",
        "missing-load-factor": "units in use without a load factor",
        "too-many-in-use": "more units in use than installed",
        "in-use-without-demand": "a demand without units in use",
        "no-source-on": "a mode in which no source is on",
        "wrong-event": "an event that cannot happen to this equipment",
        "missing-size": "an event without the size or unit that it needs",
        # plausibility
        "reactance-order": "X'' < X' < X does not hold",
        "time-constant-order": "T'' < T' < Td0' does not hold",
        "saturation-order": "the saturation falls with the voltage",
        "first-cycle-current": "a short-circuit current outside 4 to 12 times rated current",
        "resistance-ratio": "R/X of a machine outside 0.02 to 0.3",
        "engine-power": "engine and alternator do not fit each other",
        "load-sum": "loads of more than three times the capacity",
        "no-such-conductor": "a conductor that IEC 60228 does not have, without its resistance",
        "too-warm": "an ambient temperature above that of the conductor",
        "cable-drop": "a fall of voltage above 20 %",
        "device-voltage": "a device rated below the voltage of its board",
        "setting-range": "a range whose end lies below its start",
        "time-order": "a shortest time above the longest",
        "curve-choice": "both or neither of two columns of which one is wanted",
        "rating-order": "ratings that contradict each other",
        "absorbed-power": "an absorbed power above the rated output",
        "fault-levels": "a least fault level above the largest",
        "u-k-order": "a copper loss that leaves no reactance",
    }
)


class Findings:
    """What has been found so far, in no order.

    Attributes
    ----------
    unread : set of str
        Sheets that could not be read as a whole, which is a fault of its own: that a name is on none of the
        others says nothing then.
    """

    def __init__(self) -> None:
        self.unread: set[str] = set()
        self._issues: list[Issue] = []
        self._seen: set[tuple[str, str, str, str]] = set()

    def add(
        self, code: str, sheet: str, cell: str, found: str, wanted: str, *, severity: Severity = "fault"
    ) -> None:
        """Add one issue; the same words on the same cell are added once.

        Raises
        ------
        KeyError
            `code` is not in the table of faults.
        """
        if code not in FAULTS:
            raise KeyError(code)
        if (code, sheet, cell, found) in self._seen:
            return
        self._seen.add((code, sheet, cell, found))
        self._issues.append(
            Issue(code=code, sheet=sheet, cell=cell, found=found, wanted=wanted, severity=severity)
        )

    @property
    def any_fault(self) -> bool:
        """True where something stops the run."""
        return any(issue.severity == "fault" for issue in self._issues)

    def in_order(self) -> tuple[Issue, ...]:
        """Return everything in the order of sheets, rows and columns."""
        return tuple(sorted(self._issues, key=_place))


def _place(issue: Issue) -> tuple[int, str, int, int, str]:
    column, row = split_address(issue.cell)
    return SHEET_ORDER.get(issue.sheet, -1), issue.sheet, row, column, issue.code


def place(sheet: str, column: int, row: int) -> str:
    """Return the address of a cell with its sheet, as Excel writes it.

    Examples
    --------
    >>> place("Shore supplies", 2, 5)
    "'Shore supplies'!B5"
    """
    quoted = f"'{sheet}'" if " " in sheet or "-" in sheet else sheet
    return f"{quoted}!{address(column, row)}"
