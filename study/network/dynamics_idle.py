"""Nodes at which nothing stands taken out of a plant: what they take in they pass on."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.network import dynamics_data as d
from study.network.dynamics_data import Plant, Script

ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, kw_only=True)
class Smaller:
    """A plant with fewer nodes, its script, and what gives the voltages of all nodes, [node, node left]."""

    start: Plant
    script: Script
    back: ComplexArray


def without_idle_nodes(start: Plant, script: Script) -> Smaller:
    """Take out the nodes without source, motor, consumer, fault or transformer to be energised.

    ``Y = Ykk - Yke Yee^-1 Yek``, ``Ve = -Yee^-1 Yek Vk``.

    Source: G. Kron, elimination of nodes; any textbook of network analysis.

    Parameters
    ----------
    start : Plant
        Ready to be followed.
    script : Script
        What happens to it.

    Returns
    -------
    Smaller
        The same plant.
    """
    load = np.abs(start.node[:, d.A_RE : d.B_IM + 1]).sum(axis=1) + np.abs(script.load).sum(axis=(0, 1))
    busy = np.asarray(load > 0.0)
    faults = np.isin(script.event[:, d.EVENT_KIND], (d.FAULT_ON, d.FAULT_OFF))
    for places in (
        start.source[:, d.NODE],
        start.motor[:, d.MOTOR_NODE],
        script.inrush[:, d.INRUSH_NODE],
        script.event[faults, d.EVENT_INDEX],
    ):
        busy[places.astype(np.int64)] = True
    kept, idle = np.flatnonzero(busy), np.flatnonzero(~busy)
    number = np.cumsum(busy) - 1.0
    y, size = start.y, len(kept)
    through = np.linalg.solve(y[np.ix_(idle, idle)], y[np.ix_(idle, kept)])
    back = np.zeros((len(y), size), complex)
    back[kept, np.arange(size)] = 1.0
    back[idle] = -through
    source, motor = start.source.copy(), start.motor.copy()
    event, inrush = script.event.copy(), script.inrush.copy()
    source[:, d.NODE] = number[source[:, d.NODE].astype(np.int64)]
    motor[:, d.MOTOR_NODE] = number[motor[:, d.MOTOR_NODE].astype(np.int64)]
    inrush[:, d.INRUSH_NODE] = number[inrush[:, d.INRUSH_NODE].astype(np.int64)]
    event[faults, d.EVENT_INDEX] = number[event[faults, d.EVENT_INDEX].astype(np.int64)]
    return Smaller(
        start=start._replace(
            source=source,
            motor=motor,
            node=start.node[kept],
            y=np.ascontiguousarray(y[np.ix_(kept, kept)] - y[np.ix_(kept, idle)] @ through),
            work=np.zeros((2 * size, 2 * size + 1)),
            order=np.zeros(2 * size, np.int64),
        ),
        script=script._replace(
            event=event, inrush=inrush, load=np.ascontiguousarray(script.load[:, :, kept])
        ),
        back=back,
    )
