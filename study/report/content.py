"""What the report is made from: the plant, every result, every verdict."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Final

from study.checks.limits import LimitUsed
from study.checks.verdict import STATUS_ORDER, Status, Verdict
from study.model.plant import Plant
from study.results.balance import BalanceResult
from study.results.cable_protection import CableProtectionResult
from study.results.dips import DipsResult
from study.results.fault_ratings import FaultRatingsResult
from study.results.generator_protection import GeneratorProtectionResult
from study.results.grading import GradingResult
from study.results.load_flow import LoadFlowResult
from study.results.regulation import RegulationResult
from study.results.sharing import SharingResult
from study.results.short_circuit import ShortCircuitResult

CAUTION: Final = (
    "These results support, and do not replace, class approval, flag rules, local codes and the judgement of "
    "a qualified engineer; protection settings are to be verified at trials before energising."
)


@dataclass(frozen=True, slots=True, kw_only=True)
class StudyOutcome:
    """Everything that one run found.

    ``methods`` holds one sentence for each method, with its standard, clause and range of use; a verdict
    with an empty mode is about the vessel itself. ``short_circuit``, ``fault_ratings``, ``grading``,
    ``cables``, ``set_protection`` and ``dips`` are None in a study without them. ``cure_words`` judge
    the cures of ``dips``, one by one.
    """

    plant: Plant
    balance: BalanceResult
    load_flow: LoadFlowResult
    regulation: RegulationResult
    sharing: SharingResult
    verdicts: tuple[Verdict, ...]
    limits: tuple[LimitUsed, ...]
    methods: tuple[str, ...]
    tool_version: str
    short_circuit: ShortCircuitResult | None = None
    fault_ratings: FaultRatingsResult | None = None
    grading: GradingResult | None = None
    cables: CableProtectionResult | None = None
    set_protection: GeneratorProtectionResult | None = None
    dips: DipsResult | None = None
    cure_words: tuple[Status, ...] = ()

    @property
    def modes(self) -> tuple[str, ...]:
        """Names of the modes in workbook order."""
        return tuple(mode.name for mode in self.plant.modes)

    def limit(self, key: str) -> LimitUsed | None:
        """Return the limit with that key; None where the study holds none."""
        return next((used for used in self.limits if used.key == key), None)


class StatusLookup:
    """Status words by mode, equipment and subject, for tables that show a verdict beside each row.

    Parameters
    ----------
    verdicts : iterable of Verdict
        All verdicts of the study.
    """

    def __init__(self, verdicts: Iterable[Verdict]) -> None:
        self._worst: dict[tuple[str, str, str], Status] = {}
        for v in verdicts:
            key = (v.mode, v.equipment, v.subject)
            known = self._worst.get(key, v.status)
            self._worst[key] = min(known, v.status, key=STATUS_ORDER.index)

    def __call__(self, mode: str, equipment: str, *subjects: str) -> str:
        """Return the worst status of one piece of equipment in those subjects; empty where it has none."""
        found = [
            self._worst[mode, equipment, subject]
            for subject in subjects
            if (mode, equipment, subject) in self._worst
        ]
        return min(found, key=STATUS_ORDER.index) if found else ""


def cells_by_name(plant: Plant) -> dict[str, str]:
    """Return the cell of every piece of equipment and load by its name; empty cells are left out.

    Parameters
    ----------
    plant : Plant
        The plant.

    Returns
    -------
    dict
        Name to ``Sheet!A1``.
    """
    groups: tuple[Iterable[object], ...] = (
        plant.boards,
        plant.gensets,
        plant.shore_supplies,
        plant.converter_supplies,
        plant.synchronous_motors,
        plant.transformers,
        plant.three_winding,
        plant.cables,
        plant.ties,
        plant.reactors,
        plant.filters,
        plant.loads,
    )
    found = {}
    for group in groups:
        for item in group:
            name, cell = getattr(item, "name", ""), getattr(item, "cell", "")
            if name and cell:
                found[str(name)] = str(cell)
    return found
