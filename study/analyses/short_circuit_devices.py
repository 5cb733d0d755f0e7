"""Every protective device in one mode: what it must break and make, and the least fault it must see."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.analyses.short_circuit_case import CaseCurrents, SolvedCase
from study.analyses.short_circuit_ends import EndRows
from study.formulas.fault_current import SQRT2, FaultCurrent
from study.model.protection import Device
from study.network.fault_network import FaultNetwork
from study.network.topology import Topology
from study.results.arrays import read_only
from study.results.short_circuit import DeviceFaults

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

_LAST_S = 10.0  # for devices whose settings give no time: the end of the time grid
_KINDS = ("three-phase", "two-phase", "line-earth")


@dataclass(frozen=True, slots=True, kw_only=True)
class DevicePlaces:
    """Where devices sit, whatever the mode, [device]: the end's node, the branch (-1: none), the far node.

    ``owner`` is the equipment where it stands on a board without a cable, else empty.
    """

    node: IntArray
    branch: IntArray
    far_node: IntArray
    owner: tuple[str, ...]


def device_places(devices: tuple[Device, ...], topology: Topology) -> DevicePlaces:
    """Return the place of every device: the named end of its equipment, else the supply's side.

    Parameters
    ----------
    devices : tuple of Device
        Of the plant.
    topology : Topology
        Nodes and branches.

    Returns
    -------
    DevicePlaces
        In workbook order.
    """
    by_name: dict[str, list[int]] = {}
    on_node: dict[int, list[int]] = {}
    for k, b in enumerate(topology.branches):
        by_name.setdefault(b.name, []).append(k)
        for node in (b.from_node, b.to_node):
            on_node.setdefault(node, []).append(k)
    rows = [_place(d, topology, by_name, on_node) for d in devices]
    columns = list(zip(*rows, strict=True)) or [(), (), (), ()]
    return DevicePlaces(
        node=np.array(columns[0], np.int64),
        branch=np.array(columns[1], np.int64),
        far_node=np.array(columns[2], np.int64),
        owner=tuple(columns[3]),
    )


def _place(
    d: Device, topology: Topology, by_name: dict[str, list[int]], on_node: dict[int, list[int]]
) -> tuple[int, int, int, str]:
    legs = by_name.get(d.equipment, [])
    if legs:
        return _on_branch(d, topology, legs)
    node = topology.node_of[d.equipment]
    if topology.nodes[node].kind != "terminal":
        return node, -1, node, d.equipment
    # The device of a source or consumer sits at the board end of its cable.
    k = on_node[node][0]
    branch = topology.branches[k]
    board = branch.to_node if branch.from_node == node else branch.from_node
    return (node, k, board, "") if d.end == d.equipment else (board, k, node, "")


def _on_branch(d: Device, topology: Topology, legs: list[int]) -> tuple[int, int, int, str]:
    """Return the end that a device names: by the end's own name first, else by the board it belongs to."""
    ends = []
    for k in legs:
        b = topology.branches[k]
        for node, far, name in ((b.from_node, b.to_node, b.from_end), (b.to_node, b.from_node, b.to_end)):
            if topology.nodes[node].kind != "star":
                ends.append((node, k, far, name, topology.nodes[node].board))
    for column in (3, 4):
        for end in ends:
            if d.end in (None, end[column]):
                return end[0], end[1], end[2], ""
    return ends[0][0], ends[0][1], ends[0][2], ""


def device_faults(
    devices: tuple[Device, ...], places: DevicePlaces, maximum: SolvedCase, minimum: SolvedCase, hz: float
) -> DeviceFaults:
    """Return what every device of a mode must break and see.

    Parameters
    ----------
    devices : tuple of Device
        In workbook order.
    places : DevicePlaces
        Where they sit.
    maximum, minimum : SolvedCase
        The mode's two cases.
    hz : float
        Rated frequency. [Hz]

    Returns
    -------
    DeviceFaults
        [A]
    """
    net = maximum.net
    place = net.plant.place_of_node[places.node]
    end = _rows(maximum.rows, places)
    open_branch = (places.branch >= 0) & (end < 0)
    live = (place >= 0) & maximum.stages.subtransient.fed[place] & ~open_branch
    share = np.where(
        (end >= 0)[:, None], maximum.share[end] if len(maximum.share) else 0.0, _own(net, places, maximum)
    )
    parts = maximum.parts
    parting = np.array([d.opening_time_min_s for d in devices], float) + 0.5 / hz
    through = _sides(parts, maximum.ends_s, place, share, 0.5 / hz)
    rest = _sides(parts, maximum.ends_s, place, 1.0 - share, 0.5 / hz)
    governs = through[2] >= rest[2]
    late = np.where(
        governs,
        _dc_part(parts, maximum.ends_s, place, share, parting),
        _dc_part(parts, maximum.ends_s, place, 1.0 - share, parting),
    )
    operating = np.array([_operating_s(d) for d in devices], float)
    far_place, least, kinds = _least(places, minimum, operating)
    seen = live & np.isfinite(least)

    def only(values: FloatArray, where: NDArray[np.bool_]) -> FloatArray:
        return read_only(np.where(where, values, np.nan))

    return DeviceFaults(
        names=tuple(d.name for d in devices),
        place=read_only(np.where(live, place, -1), np.int64),
        end=read_only(np.where(live, end, -1), np.int64),
        ends=read_only([end, _rows(minimum.rows, places)], np.int64),
        own=read_only([_own_columns(x, places) for x in (maximum, minimum)], np.int64),
        duty_initial_a=only(np.maximum(through[0], rest[0]), live),
        duty_half_a=only(np.maximum(through[1], rest[1]), live),
        duty_ip_a=only(np.maximum(through[2], rest[2]), live),
        duty_through=read_only(governs & live, np.bool_),
        parting_s=read_only(parting),
        dc_part=only(late, live),
        operating_s=read_only(operating),
        far_place=read_only(np.where(seen, far_place, -1), np.int64),
        least_a=only(least, seen),
        least_kind=tuple(_KINDS[k] if s else "" for k, s in zip(kinds, seen, strict=True)),
    )


def least_far_a(devices: tuple[Device, ...], places: DevicePlaces, case: CaseCurrents) -> FloatArray:
    """Return the least fault at the far end of each device when its own setting has cleared it.

    Parameters
    ----------
    devices : tuple of Device
        In workbook order.
    places : DevicePlaces
        Where they sit.
    case : CaseCurrents
        A minimum case.

    Returns
    -------
    ndarray, shape (device,)
        [A]; NaN where nothing feeds it.
    """
    return _least(places, case, np.array([_operating_s(d) for d in devices], float))[1]


def _rows(rows: EndRows, places: DevicePlaces, far: bool = False) -> IntArray:
    at = {(int(b), int(n)): k for k, (b, n) in enumerate(zip(rows.branch, rows.node, strict=True))}
    node = places.far_node if far else places.node
    return np.array(
        [at.get((int(b), int(n)), -1) for b, n in zip(places.branch, node, strict=True)], np.int64
    )


def _own_columns(solved: SolvedCase, places: DevicePlaces) -> IntArray:
    """Return the source on which each device stands without a cable, -1 for none."""
    column = {s.name: k for k, s in enumerate(solved.net.sources.supplies)}
    return np.array([column.get(owner, -1) for owner in places.owner], np.int64)


def _own(net: FaultNetwork, places: DevicePlaces, solved: SolvedCase) -> FloatArray:
    """Return shares of devices on equipment without a cable: what the equipment gives itself."""
    out = np.zeros((len(places.owner), solved.parts.dc_a.shape[1]))
    column = {s.name: (k, s.units) for k, s in enumerate(net.sources.supplies)}
    for n, owner in enumerate(places.owner):
        if owner in column:
            k, units = column[owner]
            out[n, k] = 1.0 / units
    return out


def _at(
    parts: FaultCurrent, ends_s: FloatArray, place: IntArray, share: FloatArray, time_s: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return Iac and idc of a part of each source at one instant for each device."""
    t = np.broadcast_to(time_s, place.shape)[:, None]
    runs = share * (t <= ends_s)
    sub, trans, kept = (getattr(parts, f)[place] for f in ("subtransient_a", "transient_a", "sustained_a"))
    ac = (sub - trans) * np.exp(-t / parts.t_sub_s[place]) + (trans - kept) * np.exp(
        -t / parts.t_trans_s[place]
    )
    dc = parts.dc_a[place] * np.exp(-t / parts.t_dc_s[place])
    return ((ac + kept) * runs).sum(axis=1), (dc * runs).sum(axis=1)


def _sides(
    parts: FaultCurrent, ends_s: FloatArray, place: IntArray, share: FloatArray, half_s: float
) -> tuple[FloatArray, FloatArray, FloatArray]:
    initial = (parts.subtransient_a[place] * share).sum(axis=1)
    ac, dc = _at(parts, ends_s, place, share, np.asarray(half_s))
    return initial, ac, SQRT2 * ac + dc


def _dc_part(
    parts: FaultCurrent, ends_s: FloatArray, place: IntArray, share: FloatArray, time_s: FloatArray
) -> FloatArray:
    ac, dc = _at(parts, ends_s, place, share, time_s)
    return np.divide(dc, SQRT2 * ac, out=np.zeros_like(dc), where=ac > 0.0)


def _operating_s(d: Device) -> float:
    """Return when a device has cleared a high current by its own setting, NaN where it has none."""
    if d.instantaneous_a is not None and not d.instantaneous_off:
        return d.breaking_time_max_s
    if d.short_time_a is not None and not d.short_time_off and d.short_time_delay_s is not None:
        return d.short_time_delay_s * (1.0 + d.time_tolerance) + d.breaking_time_max_s
    return np.nan


def _least(
    places: DevicePlaces, minimum: CaseCurrents, operating: FloatArray
) -> tuple[IntArray, FloatArray, IntArray]:
    """Return the far place, the least current there through the device, and of which fault."""
    far_place = minimum.net.plant.place_of_node[places.far_node]
    row = _rows(minimum.rows, places, far=True)
    near = _rows(minimum.rows, places)
    share = minimum.share[row] if len(minimum.share) else np.zeros((len(row), minimum.parts.dc_a.shape[1]))
    # A fault on the source's side of a source's own device is fed by that source alone.
    backwards = (row >= 0) & (near >= 0) & (share.sum(axis=1) == 0.0)
    if backwards.any():
        share = np.where(backwards[:, None], minimum.share[near], share)
        far_place = np.where(backwards, minimum.net.plant.place_of_node[places.node], far_place)
    share = np.where((places.branch < 0)[:, None], 1.0, share)
    time = np.where(np.isfinite(operating), operating, _LAST_S)
    faults = [minimum.parts, minimum.two_phase] + ([minimum.earth] if minimum.earth is not None else [])
    currents = np.array([_at(f, minimum.ends_s, far_place, share, time)[0] for f in faults])
    initial = np.array([(f.subtransient_a[far_place] * share).sum(axis=1) for f in faults])
    currents = np.where(initial > 0.0, currents, np.nan)
    lost = ((places.branch >= 0) & (row < 0)) | (far_place < 0) | ~np.isfinite(currents).any(axis=0)
    filled = np.where(np.isfinite(currents), currents, np.inf)
    kind = filled.argmin(axis=0)
    return far_place, np.where(lost, np.nan, filled.min(axis=0)), kind
