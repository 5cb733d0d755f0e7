"""Operating modes, what runs in them, what is demanded of them, and the events to study."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from study.model.sources import RegulatorMode

ModeKind = Literal["sea", "manoeuvring", "harbour", "cargo", "station keeping", "shore", "emergency"]
State = Literal["on", "off", "standby"]
DutyKind = Literal["continuous", "intermittent", "occasional"]
EventKind = Literal[
    "motor start",
    "load step",
    "set trip",
    "load rejection",
    "set-point step",
    "droop changed",
    "field loss",
    "build-up",
    "transformer energising",
    "fault",
    "fault cleared",
    "maladjustment",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Demand:
    """What one load asks for in one mode; ``in_use`` is a number of units, load factor a fraction."""

    in_use: float
    load_factor: float
    duty: DutyKind
    cell: str


@dataclass(frozen=True, slots=True, kw_only=True)
class SetPoint:
    """A trim of one piece of equipment in one mode; None leaves the equipment's own setting.

    ``q_set_kvar`` is what a set in kvar control holds; None there means its rated power factor.
    """

    equipment: str
    mode: str
    cell: str
    no_load_voltage_pu: float | None
    no_load_frequency_pu: float | None
    p_set_kw: float | None
    regulator_mode: RegulatorMode | None
    tap_pu: float | None
    q_set_kvar: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Mode:
    """An operating mode.

    ``states`` holds every switchable piece of equipment; one that is not named there is on.
    ``simultaneity`` is keyed by (service, duty); a pair that is not named has the factor of `Acceptance`
    for intermittent duty and 1 otherwise. ``changeover_sets`` may run together while changing over.
    """

    name: str
    cell: str
    description: str
    kind: ModeKind
    changeover_sets: tuple[str, ...]
    states: Mapping[str, State]
    demand: Mapping[str, Demand]
    simultaneity: Mapping[tuple[str, DutyKind], float]
    set_points: Mapping[str, SetPoint]

    def state(self, equipment: str) -> State:
        """Return whether a piece of equipment is on, off or standby in this mode."""
        return self.states.get(equipment, "on")

    def is_on(self, equipment: str) -> bool:
        """Return True where the equipment is on."""
        return self.state(equipment) == "on"


@dataclass(frozen=True, slots=True, kw_only=True)
class Event:
    """One step of a case; `unit` says what `size` is."""

    case: str
    mode: str
    kind: EventKind
    equipment: str
    cell: str
    size: float | None
    unit: str | None
    at_s: float
    duration_s: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Interlock:
    """What may not be closed together."""

    name: str
    equipment_a: str
    equipment_b: str
    cell: str
    kind: Literal["never both closed", "both only in change-over"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Transfer:
    """A second feed of a board or load.

    ``normal_supply`` and ``other_supply`` name a board, a source or a branch.
    """

    target: str
    normal_supply: str
    other_supply: str
    cell: str
    automatic: bool
    transfer_at_pu: float | None
    delay_s: float | None
