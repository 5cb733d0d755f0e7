"""What can be wrong with a workbook or a solution, as values and as errors."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Final, Literal

Severity = Literal["fault", "warning", "note"]

LONGEST_SENTENCE: Final = 400
_HEAD: Final = 280
_TAIL: Final = 100


def one_line(text: str) -> str:
    r"""Return a text as one line that a terminal can show.

    Names from a workbook may hold line breaks and characters that steer a terminal or turn its writing round.

    Parameters
    ----------
    text : str
        Any text.

    Returns
    -------
    str
        The text with a blank for each control and format character and each line break.

    Examples
    --------
    >>> one_line("Pump\nNo. 1\x1b[2J")
    'Pump No. 1 [2J'
    """
    if text.isprintable():
        return text
    return "".join(" " if unicodedata.category(c) in _NOT_SHOWN else c for c in text)


_NOT_SHOWN: Final = frozenset({"Cc", "Cf", "Cs", "Zl", "Zp"})


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
        return one_line(f"{where}{self.found}; {self.wanted} [{self.code}]")


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
    """The workbook file itself cannot be opened or written; the message is one sentence for the user.

    Parameters
    ----------
    sentence : str
        What is wrong and what to do; names in it may come from a damaged file and be of any length.
    """

    def __init__(self, sentence: str) -> None:
        text = one_line(sentence)
        super().__init__(text if len(text) <= LONGEST_SENTENCE else f"{text[:_HEAD]} ... {text[-_TAIL:]}")


class ChangedFileError(PackageError):
    """The workbook was saved, moved or deleted by someone else while the study ran."""


class SolveError(StudyError):
    """A formula or a network has no solution; the message says which and why."""
