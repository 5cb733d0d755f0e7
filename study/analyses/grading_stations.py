"""Where protective devices stand: all that open one place together, and which side of it feeds a fault."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.model.plant import Plant
from study.model.protection import Device
from study.results.short_circuit import FaultCase, ModeShortCircuit, ShortCircuitResult

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

NO_END = -1
# Kinds of sources that keep a current up; a motor gives one and stops.
LASTING = frozenset({"genset", "shore supply", "converter supply"})


@dataclass(frozen=True, slots=True, kw_only=True)
class Stations:
    """The places at which devices open a circuit, whatever the mode, [station].

    ``devices`` are their rows in the workbook; ``branch`` the branch that they open ("" where the equipment
    stands on its board without a cable), ``equipment`` the piece named on the sheet, ``place`` the fault
    place at which they stand. ``names`` joins the devices' names.
    """

    names: tuple[str, ...]
    devices: tuple[tuple[int, ...], ...]
    branch: tuple[str, ...]
    equipment: tuple[str, ...]
    place: IntArray

    def __len__(self) -> int:
        """Return how many there are."""
        return len(self.names)


def stations_of(plant: Plant, result: ShortCircuitResult) -> Stations:
    """Return the stations of a plant: breaker, its relay and the overload relay beside it are one.

    Parameters
    ----------
    plant : Plant
        Devices.
    result : ShortCircuitResult
        Where each device stands in every mode.

    Returns
    -------
    Stations
        In the order of their first device; devices that are live in no mode stand nowhere.
    """
    found: dict[tuple[int, str], list[int]] = {}
    boards = {board.name for board in plant.boards}
    for k, device in enumerate(plant.devices):
        at = _where(k, device, result.modes)
        if at is not None and device.equipment not in boards:
            found.setdefault(at, []).append(k)
    rows = [(place, branch, tuple(found[place, branch])) for place, branch in found]
    return Stations(
        names=tuple(" + ".join(plant.devices[k].name for k in members) for _, _, members in rows),
        devices=tuple(members for _, _, members in rows),
        branch=tuple("" if branch.startswith("\0") else branch for _, branch, _ in rows),
        equipment=tuple(plant.devices[members[0]].equipment for _, _, members in rows),
        place=np.array([place for place, _, _ in rows], np.int64),
    )


def _where(k: int, device: Device, modes: tuple[ModeShortCircuit, ...]) -> tuple[int, str] | None:
    """Return place and branch of a device in the first mode in which it is live; no branch: its equipment."""
    for mode in modes:
        place, end = int(mode.devices.place[k]), int(mode.devices.end[k])
        if place >= 0:
            return place, mode.maximum.ends.branches[end] if end >= 0 else f"\0{device.equipment}"
    return None


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseWays:
    """One case of one mode, and what comes through each station in it.

    ``place`` [station] is where each stands, ``device`` [station] the device that stands for it. ``end``
    [station] is the row of the case's branch ends, `NO_END` where the branch is open or there is none;
    ``own`` [station] the source that stands behind a station without a branch (-1: none). ``lasting``
    [source] marks the sources that keep a current up.
    """

    mode: ModeShortCircuit
    maximum: bool
    place: IntArray
    device: IntArray
    end: IntArray
    own: IntArray
    lasting: BoolArray

    @property
    def case(self) -> FaultCase:
        """Return the currents of the case."""
        return self.mode.maximum if self.maximum else self.mode.minimum

    def into_branch(self, station: IntArray, place: IntArray, inside: IntArray) -> FloatArray:
        """Return the current through stations into their branch, for 1 A that each source gives at a fault.

        Parameters
        ----------
        station, place : ndarray of int, shape (row,)
            Which, and where the fault lies.
        inside : ndarray of int, shape (row,)
            The station just behind which, in its branch, the fault lies; -1: at the place itself.

        Returns
        -------
        ndarray, shape (row, source)
            A at the voltage of the station; negative out of the branch.
        """
        if len(self.case.ends.place):
            found = self.mode.device_shares(self.device[station], place, maximum=self.maximum)
        else:
            found = self._of_sources_alone(station, place)
        close = (inside == station) & self.case.live[place]
        found[close] += 1.0
        return found

    def turned(self, station: IntArray, place: IntArray) -> BoolArray:
        """Return True where a star-delta transformation lies between a station and a faulted place.

        Parameters
        ----------
        station, place : ndarray of int, shape (row,)
            Which, and where the fault lies.

        Returns
        -------
        ndarray of bool, shape (row,)
            False where either is dead.
        """
        routes = self.case.routes
        bus, at = routes.place_bus[self.place[station]], routes.place_bus[place]
        both = (bus >= 0) & (at >= 0)
        if not len(routes.hours):
            return both
        return np.asarray(both & ((routes.hours[bus] - routes.hours[at]) % 2 == 1))

    def _of_sources_alone(self, station: IntArray, place: IntArray) -> FloatArray:
        """Return what comes out through stations of a plant without a closed branch."""
        found = np.zeros((len(station), self.case.parts.dc_a.shape[1]))
        own = self.own[station]
        rows = np.flatnonzero(own >= 0)
        found[rows, own[rows]] = -self.case.routes.own_shares(own[rows], place[rows])
        return found


def case_ways(stations: Stations, mode: ModeShortCircuit, *, maximum: bool) -> CaseWays:
    """Return the ways of a case's currents through the stations.

    Parameters
    ----------
    stations : Stations
        Of the plant.
    mode : ModeShortCircuit
        One of its modes.
    maximum : bool
        The maximum case, else the minimum.

    Returns
    -------
    CaseWays
        For this case.
    """
    device = np.array([members[0] for members in stations.devices], np.int64)
    row = 0 if maximum else 1
    kinds = (mode.maximum if maximum else mode.minimum).sources.kinds
    return CaseWays(
        mode=mode,
        maximum=maximum,
        place=stations.place,
        device=device,
        end=mode.devices.ends[row, device],
        own=mode.devices.own[row, device],
        lasting=np.array([kind in LASTING for kind in kinds], bool),
    )
