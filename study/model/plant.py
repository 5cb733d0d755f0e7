"""The plant: everything the workbook says, checked and with its typical values filled in."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TypeVar

from study.issues import Issue
from study.model.branches import (
    Board,
    Cable,
    Filter,
    Reactor,
    ThreeWindingTransformer,
    Tie,
    Transformer,
)
from study.model.loads import Load
from study.model.modes import Event, Interlock, Mode, Transfer
from study.model.protection import (
    CurvePoint,
    Device,
    LetThroughPoint,
    MakerDiscrimination,
    ProtectionFunction,
    SettingRange,
    SpectrumLine,
)
from study.model.sources import ConverterSupply, Genset, ShoreSupply, SynchronousMotor

_Named = TypeVar("_Named", Board, Genset, Load, Mode)


@dataclass(frozen=True, slots=True, kw_only=True)
class Project:
    """The title block and the two temperatures that ratings hang on."""

    vessel: str
    hull_number: str
    document_number: str
    revision: str
    date: str
    prepared_by: str
    checked_by: str
    approved_by: str
    f_rated_hz: float
    rules: str
    ambient_degc: float
    engine_room_degc: float


@dataclass(frozen=True, slots=True, kw_only=True)
class AcceptanceItem:
    """One row of the Acceptance sheet: a limit that the engineer wrote, as text or number."""

    quantity: str
    limit: float | str
    unit: str
    basis: str
    cell: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Assumption:
    """A typical value that stands in for a blank cell."""

    equipment: str
    quantity: str
    value: float | str
    unit: str
    source: str
    cell: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Plant:
    """Everything about the vessel.

    ``cells`` maps (equipment, heading without unit) to ``Sheet!A1``; it also holds blanks that were filled.
    ``input_digest`` is the SHA-256 over the input cells, ``file_digest`` that of the whole file, empty where
    the plant was not read from one. ``findings`` are warnings and notes, never faults.
    """

    project: Project
    acceptance: tuple[AcceptanceItem, ...]
    boards: tuple[Board, ...]
    gensets: tuple[Genset, ...]
    shore_supplies: tuple[ShoreSupply, ...]
    converter_supplies: tuple[ConverterSupply, ...]
    synchronous_motors: tuple[SynchronousMotor, ...]
    transformers: tuple[Transformer, ...]
    three_winding: tuple[ThreeWindingTransformer, ...]
    cables: tuple[Cable, ...]
    ties: tuple[Tie, ...]
    reactors: tuple[Reactor, ...]
    filters: tuple[Filter, ...]
    loads: tuple[Load, ...]
    modes: tuple[Mode, ...]
    interlocks: tuple[Interlock, ...]
    transfers: tuple[Transfer, ...]
    devices: tuple[Device, ...]
    protection_functions: tuple[ProtectionFunction, ...]
    setting_ranges: tuple[SettingRange, ...]
    curves: tuple[CurvePoint, ...]
    let_through: tuple[LetThroughPoint, ...]
    maker_discrimination: tuple[MakerDiscrimination, ...]
    spectra: tuple[SpectrumLine, ...]
    events: tuple[Event, ...]
    assumptions: tuple[Assumption, ...]
    findings: tuple[Issue, ...]
    not_read: tuple[str, ...]
    cells: Mapping[tuple[str, str], str]
    file_name: str
    input_digest: str
    file_digest: str = ""

    def cell_of(self, equipment: str, heading: str) -> str:
        """Return the address of a cell as ``Sheet!A1``, or an empty text where there is none."""
        return self.cells.get((equipment, heading), "")

    def setting_cell(self, genset: str, mode: str, heading: str) -> str:
        """Return the cell of a set-point in force in a mode: the mode's own trim, else the set's own cell.

        Parameters
        ----------
        genset, mode : str
            Names.
        heading : str
            Of the setting on the sheet Gensets.

        Returns
        -------
        str
            ``Sheet!A1``, or an empty text.
        """
        point = self.mode(mode).set_points.get(genset)
        trimmed = {
            "No-load voltage": point and point.no_load_voltage_pu,
            "No-load frequency": point and point.no_load_frequency_pu,
        }.get(heading)
        if point is None or trimmed is None:
            return self.cell_of(genset, heading)
        return self.cell_of(f"{genset} in {mode}", heading) or point.cell

    def board(self, name: str) -> Board:
        """Return the board called `name` (exact); raises KeyError where there is none."""
        return _by_name(self.boards, name)

    def genset(self, name: str) -> Genset:
        """Return the set called `name` (exact); raises KeyError where there is none."""
        return _by_name(self.gensets, name)

    def load(self, name: str) -> Load:
        """Return the load called `name` (exact); raises KeyError where there is none."""
        return _by_name(self.loads, name)

    def mode(self, name: str) -> Mode:
        """Return the mode called `name` (exact); raises KeyError where there is none."""
        return _by_name(self.modes, name)


def _by_name(items: tuple[_Named, ...], name: str) -> _Named:
    for item in items:
        if item.name == name:
            return item
    raise KeyError(name)
