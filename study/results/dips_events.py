"""Result of the quick estimate of every event of the sheet Events."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class EventEstimate:
    """One row of the sheet Events by closed forms: the voltage just after it, at the board judged.

    ``board`` is that of the largest set of the island. Voltages are per unit of its nominal voltage:
    before, for the first cycle (sets behind X''d) and for the 0.1 to 0.2 s that a meter sees (behind X'd),
    every consumer an impedance. ``change_pu`` is the latter over the voltage before, less 1: a dip is
    negative. ``worst_board`` changes most of the others. Where ``assessed`` is False ``reason`` says why and
    the numbers are NaN.
    """

    case: str
    mode: str
    kind: str
    equipment: str
    cell: str
    assessed: bool
    reason: str
    board: str
    u_before_pu: float
    u_first_cycle_pu: float
    u_transient_pu: float
    change_pu: float
    worst_board: str
    u_worst_pu: float
