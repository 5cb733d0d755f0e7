"""The load balance: what is asked for in every mode, and what there is to give it.

Loads count with the input at their part load, times simultaneity or diversity (`balance_demand`). The
sources of every live island share what counts on its boards (`balance_shares`, `balance_islands`); then a set
is lost (`balance_loss`), and the plant comes back from a blackout (`balance_restart`). Losses of cables and
transformers are not in the balance; the load flow has them.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from study.analyses.balance_demand import asked_of, consumer_demand, load_table
from study.analyses.balance_findings import plant_findings
from study.analyses.balance_mode import Study, mode_balance
from study.analyses.balance_options import BalanceOptions
from study.analyses.balance_restart import restart_delay_s
from study.analyses.balance_sources import interlocked_pairs
from study.analyses.balance_supply import supply_of
from study.model.plant import Plant
from study.network.view import DEAD, View
from study.results.balance import BalanceResult

__all__ = ["BalanceOptions", "load_balance"]


def load_balance(plant: Plant, views: Sequence[View], options: BalanceOptions | None = None) -> BalanceResult:
    """Return the load balance of every mode.

    Parameters
    ----------
    plant : Plant
        The whole plant.
    views : sequence of View
        What is energised: one view for each mode of the plant, in its order.
    options : BalanceOptions, optional
        What Acceptance says; its defaults where left out.

    Returns
    -------
    BalanceResult
        Sums are of unrounded values. What concerns no mode in particular is among the findings of the first.

    Raises
    ------
    ValueError
        The views are not those of the plant's modes.
    """
    options = options or BalanceOptions()
    if [view.mode for view in views] != [mode.name for mode in plant.modes]:
        raise ValueError("give one view for each mode of the plant, in the plant's order")
    table = load_table(plant)
    supplies = [supply_of(plant, view) for view in views]
    fed = np.array([s.load_island != DEAD for s in supplies], dtype=bool)
    fed = fed.reshape(len(plant.modes), len(plant.loads))
    demand = consumer_demand(plant.modes, table, asked_of(plant, table), fed, options.intermittent_diversity)
    study = Study(
        plant=plant,
        table=table,
        demand=demand,
        options=options,
        interlocked=interlocked_pairs(plant),
        restarts=any(restart_delay_s(x) is not None for x in plant.loads if x.motor is not None),
    )
    pairs = [mode_balance(study, row, supply) for row, supply in enumerate(supplies)]
    modes = [mode for mode, _ in pairs]
    if modes:
        general = tuple(plant_findings(plant, demand))
        modes[0] = replace(modes[0], findings=general + modes[0].findings)
    return BalanceResult(
        demand=demand,
        modes=tuple(modes),
        emergency=tuple(duty for _, duties in pairs for duty in duties),
        diversity=options.intermittent_diversity,
    )
