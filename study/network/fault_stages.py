"""One stage of a fault: what each source gives to a bolted fault at every place at once."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.formulas.fault_iec60909_nodal import admittance_matrix
from study.network.fault_inverse import inverse
from study.network.fault_network import FaultNetwork

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class Stage:
    """What each source gives to a bolted fault at each place, as phasors.

    ``current`` [place, source] and ``z_place`` [place], the impedance at the place, are per unit; ``fed``
    [place] is False where no source of this stage reaches. ``z_bus`` [bus, bus].
    """

    current: ComplexArray
    z_place: ComplexArray
    fed: BoolArray
    z_bus: ComplexArray


def solve_stage(
    net: FaultNetwork,
    z_board: ComplexArray,
    z_bare: ComplexArray,
    active: BoolArray,
    *,
    voltage: FloatArray | None = None,
    transform: Callable[[ComplexArray], ComplexArray] | None = None,
) -> Stage:
    """Return what each source gives to a fault at each place, in one stage of the fault.

    A source at its own terminals gives ``U / z_bare``; all else comes through the network, in which sources
    are voltages behind `z_board`.

    Source: nodal analysis.

    Parameters
    ----------
    net : FaultNetwork
        The network.
    z_board, z_bare : ndarray, shape (source,)
        Impedances of the sources at their boards, cable included, and at their terminals. [pu]
    active : ndarray of bool, shape (source,)
        Sources that take part.
    voltage : ndarray, shape (source,), optional
        What drives each source in this stage, where it is not its voltage before the fault. [pu]
    transform : callable, optional
        Applied to every impedance: to another frequency.

    Returns
    -------
    Stage
        Phasors per unit.
    """
    s = net.sources
    if not len(s.bus):
        return _nothing(net)
    drive = s.voltage if voltage is None else voltage
    if transform is None:
        branches, place_z = net.admittance, net.place_z
    else:
        z_board, z_bare, place_z = (transform(z) for z in (z_board, z_bare, net.place_z))
        branches = admittance_matrix(
            len(net.bus_island),
            branch_from=net.from_bus,
            branch_to=net.to_bus,
            branch_impedance=transform(net.z),
            branch_ratio=net.ratio,
            source_bus=np.zeros(0, np.int64),
            source_impedance=np.zeros(0),
        )
    y = np.where(active, 1.0 / np.where(active, z_board, 1.0), 0.0)
    y_bare = np.where(active, 1.0 / np.where(active, z_bare, 1.0), 0.0) / s.units
    z_bus = inverse(branches, s.bus[active], y[active], net.bus_island)
    fed_islands = np.unique(s.island[active])
    fed = (net.place_bus >= 0) & np.isin(net.place_island, fed_islands)
    bus = np.where(fed, net.place_bus, 0)
    z_at = z_bus[bus, bus]
    own = net.place_own
    has_own = fed & (own >= 0)
    y_own = np.where(has_own, (y / s.units)[own], 0.0)
    others = 1.0 / z_at - y_own
    series = 1.0 + place_z * others
    current = z_bus[bus[:, None], s.bus[None, :]] * ((y * drive)[None, :] / (z_at * series)[:, None])
    at = np.flatnonzero(has_own)
    row = own[at]
    current[at, row] *= 1.0 - 1.0 / s.units[row]
    current[at, row] += (y_bare * drive)[row]
    current[~fed] = 0.0
    y_direct = np.where(has_own, y_bare[own], 0.0)
    return Stage(
        current=current,
        z_place=np.where(fed, 1.0 / (others / series + y_direct), np.inf),
        fed=fed,
        z_bus=z_bus,
    )


def _nothing(net: FaultNetwork) -> Stage:
    """Return the stage of a network without sources."""
    places, buses = len(net.place_bus), len(net.bus_island)
    return Stage(
        current=np.zeros((places, 0), complex),
        z_place=np.full(places, np.inf, complex),
        fed=np.zeros(places, bool),
        z_bus=np.zeros((buses, buses), complex),
    )
