"""What can be wrong with a workbook or a solution, as values and as errors."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

Severity = Literal["fault", "warning", "note"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Issue:
    """One thing found in a workbook: where, what was found, what is wanted.

    Attributes
    ----------
    code : str
        Short stable word for the kind of fault, for example ``out-of-range``.
    sheet, cell : str
        Address; either may be empty where the fault has none.
    found : str
        What the cell or sheet holds, in the engineer's words.
    wanted : str
        What to write instead.
    severity : str
        ``fault`` stops the run, ``warning`` and ``note`` do not.
    """

    code: str
    sheet: str
    cell: str
    found: str
    wanted: str
    severity: Severity = "fault"

    @property
    def address(self) -> str:
        """Sheet and cell in the spreadsheet's own notation, for example ``Cables!F12``."""
        if not self.sheet:
            return self.cell
        name = f"'{self.sheet}'" if " " in self.sheet or "-" in self.sheet else self.sheet
        return f"{name}!{self.cell}" if self.cell else name

    def __str__(self) -> str:
        """Return the one-line form: address, found, wanted, code."""
        where = f"{self.address}: " if self.address else ""
        return f"{where}{self.found}; {self.wanted} [{self.code}]"


class StudyError(Exception):
    """Base of every error that the program raises on purpose."""


class WorkbookError(StudyError):
    """The workbook cannot be used; carries every fault found, never only the first.

    Parameters
    ----------
    issues : iterable of Issue
        All faults.
    """

    def __init__(self, issues: Iterable[Issue]) -> None:
        self.issues: tuple[Issue, ...] = tuple(issues)
        super().__init__("\n".join(str(i) for i in self.issues))


class PackageError(StudyError):
    """The workbook file itself cannot be opened or written; the message is one sentence for the user."""


class SolveError(StudyError):
    """A formula or a network has no solution; the message says which and why."""
