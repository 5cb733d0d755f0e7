"""The sums of one mode: by service and duty, by board, in total."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from study.analyses.balance_demand import LoadTable
from study.analyses.balance_supply import ModeSupply
from study.model.sources import SynchronousMotor
from study.results.arrays import FloatArray, IntArray, read_only
from study.results.balance import DUTIES, ConsumerDemand

SYNCHRONOUS = "Synchronous motors"


@dataclass(frozen=True, slots=True, kw_only=True)
class Totals:
    """Sums of what counts; arrays are [service, duty] and [board] as in `ModeBalance`."""

    services: tuple[str, ...]
    p_by_service_kw: FloatArray
    q_by_service_kvar: FloatArray
    p_connected_by_service_kw: FloatArray
    p_by_board_kw: FloatArray
    q_by_board_kvar: FloatArray
    p_total_kw: float
    q_total_kvar: float
    p_synchronous_kw: float
    p_unfed_kw: float


def totals(
    table: LoadTable,
    demand: ConsumerDemand,
    row: int,
    supply: ModeSupply,
    *,
    boards: Sequence[str],
    motors: Sequence[tuple[SynchronousMotor, float]],
) -> Totals:
    """Return the sums of one mode, all of the same unrounded values.

    Parameters
    ----------
    table : LoadTable
        The loads as arrays.
    demand : ConsumerDemand
        What the loads take.
    row : int
        The mode's row.
    supply : ModeSupply
        Which board feeds which load.
    boards : sequence of str
        All boards, in workbook order.
    motors : sequence of (SynchronousMotor, float)
        Synchronous motors of the plant with their input, nil where they are off. [kW]

    Returns
    -------
    Totals
        Synchronous motors are a service of their own, on continuous duty.
    """
    duty = demand.duty[row].astype(np.int64)
    services = (*table.services, SYNCHRONOUS) if motors else table.services
    cell = table.service * len(DUTIES) + duty
    shape = (len(services), len(DUTIES))
    by_service = _grouped(cell, demand.p_counted_kw[row], shape)
    connected = _grouped(cell, demand.p_kw[row] * demand.fed[row], shape)
    by_board = _grouped(supply.load_board, demand.p_counted_kw[row], (len(boards),))
    place = {name: i for i, name in enumerate(boards)}
    for motor, p_kw in motors:
        by_service[-1, 0] += p_kw
        connected[-1, 0] += p_kw
        by_board[place[motor.board]] += p_kw
    p_synchronous_kw = math.fsum(p_kw for _, p_kw in motors)
    unfed = ~demand.fed[row]
    return Totals(
        services=services,
        p_by_service_kw=read_only(by_service),
        q_by_service_kvar=read_only(_grouped(cell, demand.q_counted_kvar[row], shape)),
        p_connected_by_service_kw=read_only(connected),
        p_by_board_kw=read_only(by_board),
        q_by_board_kvar=read_only(_grouped(supply.load_board, demand.q_counted_kvar[row], (len(boards),))),
        p_total_kw=math.fsum((*demand.p_counted_kw[row], p_synchronous_kw)),
        q_total_kvar=math.fsum(demand.q_counted_kvar[row]),
        p_synchronous_kw=p_synchronous_kw,
        p_unfed_kw=math.fsum(demand.p_kw[row][unfed]),
    )


def _grouped(group: IntArray, values: FloatArray, shape: tuple[int, ...]) -> FloatArray:
    sums = np.bincount(group, weights=values, minlength=math.prod(shape))
    return np.asarray(sums, dtype=float).reshape(shape)
