"""A case to be solved by both solvers, its two solutions, and how far they are apart."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.network.batch import BatchSolution
from study.network.network import ModeNetwork, checked_loads
from study.network.solution import ModeSolution

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """A mode with what its consumers ask for, [load], at their rated voltage, in kW and kvar."""

    at: ModeNetwork
    p_kw: FloatArray
    q_kvar: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Agreement:
    """Largest differences between the two solvers in one mode; NaN where one of them has no solution."""

    du_pu: float
    dp_kw: float
    dq_kvar: float
    residual_pu: float
    iterations: int


@dataclass(frozen=True, slots=True, kw_only=True)
class SolvedCase:
    """A case solved twice: ``reported`` by pandapower, ``own`` by the vectorised solver."""

    reported: ModeSolution
    own: ModeSolution
    agreement: Agreement


def case(at: ModeNetwork, p_kw: ArrayLike, q_kvar: ArrayLike) -> Case:
    """Return a case after checking its numbers.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    p_kw, q_kvar : ndarray, shape (load,)
        Power of each consumer, all its units in use, at its rated voltage. [kW], [kvar]

    Returns
    -------
    Case
        Ready for `solve_reported`.

    Raises
    ------
    SolveError
        A wrong number of loads, or a value that is not a number.
    """
    p, q = checked_loads(at, p_kw, q_kvar)
    return Case(at=at, p_kw=p[0], q_kvar=q[0])


def agreement_of(batch: BatchSolution, reported: ModeSolution | None, own: ModeSolution) -> Agreement:
    """Return the largest differences between the two solutions of one case.

    Parameters
    ----------
    batch : BatchSolution
        The vectorised solver's, for residual and iterations.
    reported : ModeSolution or None
        The other solver's; None where it has no solution.
    own : ModeSolution
        The vectorised solver's.

    Returns
    -------
    Agreement
        NaN where there is nothing to compare.
    """
    if reported is None:
        nan = float("nan")
        return Agreement(
            du_pu=nan,
            dp_kw=nan,
            dq_kvar=nan,
            residual_pu=float(batch.residual_pu[0]),
            iterations=int(batch.iterations[0]),
        )
    du = np.concatenate(
        [
            np.abs(reported.board_v_pu) - np.abs(own.board_v_pu),
            np.abs(reported.terminal_v_pu) - np.abs(own.terminal_v_pu),
        ]
    )
    ds = np.concatenate(
        [
            reported.source_s_kva - own.source_s_kva,
            (reported.s_from_kva - own.s_from_kva)[own.determined],
            (reported.s_to_kva - own.s_to_kva)[own.determined],
        ]
    )
    return Agreement(
        du_pu=float(np.abs(du).max(initial=0.0)),
        dp_kw=float(np.abs(ds.real).max(initial=0.0)),
        dq_kvar=float(np.abs(ds.imag).max(initial=0.0)),
        residual_pu=float(batch.residual_pu[0]),
        iterations=int(batch.iterations[0]),
    )
