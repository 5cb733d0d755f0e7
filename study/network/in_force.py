"""The laws that hold in a solved scenario: limited sources at their limits."""

from __future__ import annotations

from study.network.batch import BatchSolution
from study.network.laws import VoltageLaws, take
from study.network.limits import limited_laws
from study.network.power import PowerLaws, power_laws


def laws_in_force(batch: BatchSolution, k: int = 0) -> VoltageLaws:
    """Return the voltage laws of one scenario, with limited sources at their limits.

    Parameters
    ----------
    batch : BatchSolution
        Solved scenarios.
    k : int
        Which.

    Returns
    -------
    VoltageLaws
        One column.
    """
    return limited_laws(batch.laws.column(k), batch.at.sources, batch.excitation_state[k])


def power_in_force(batch: BatchSolution, k: int = 0) -> PowerLaws:
    """Return the active-power laws of one scenario, with limited sources at their limits.

    Parameters
    ----------
    batch : BatchSolution
        Solved scenarios.
    k : int
        Which.

    Returns
    -------
    PowerLaws
        One column.
    """
    return power_laws(
        batch.at.sources,
        batch.at.structure.islands,
        batch.at.network.s_base_kva,
        f_no_load_pu=take(batch.f_no_load_pu, k),
        speed_droop_pu=take(batch.speed_droop_pu, k),
        at_limit=batch.power_state[k],
    )
