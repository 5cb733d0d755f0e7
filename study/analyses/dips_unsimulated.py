"""The result of a case that cannot be simulated: it says why, and every figure is none."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from study.model.modes import Event
from study.network.network import ModeNetwork
from study.results.arrays import read_only
from study.results.dips import BoardDips, CaseStep, Recovery, SimulatedCase


def not_simulated(at: ModeNetwork, events: Sequence[Event], reason: str) -> SimulatedCase:
    """Return the result of a case that cannot be simulated.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    events : sequence of Event
        Rows of the sheet.
    reason : str
        A sentence.

    Returns
    -------
    SimulatedCase
        With empty traces and figures that are not numbers.
    """
    none, nan = read_only(np.zeros(0)), float("nan")
    nothing = Recovery(
        before=nan,
        least=nan,
        least_at_s=nan,
        largest=nan,
        largest_at_s=nan,
        after=nan,
        recovery_s=nan,
        overshoot=nan,
        settled=False,
    )
    return SimulatedCase(
        case=events[0].case,
        mode=at.mode.name,
        cells=tuple(e.cell for e in events),
        kinds=tuple(e.kind for e in events),
        equipment=tuple(e.equipment for e in events),
        simulated=False,
        reason=reason,
        collapsed=False,
        board="",
        u_nominal_v=nan,
        worst_board="",
        starts_at_s=events[0].at_s,
        time_s=none,
        u_board_pu=none,
        u_worst_pu=none,
        f_hz=none,
        voltage=nothing,
        frequency=nothing,
        iso_class_voltage="",
        iso_class_frequency="",
        sets=(),
        motors=(),
        boards=BoardDips(names=(), u_before_pu=none, u_least_pu=none, u_largest_pu=none, u_after_pu=none),
        drop_outs=(),
        steps=tuple(CaseStep(at_s=e.at_s, text=f"{e.kind}: {e.equipment}", cell=e.cell) for e in events),
        findings=(),
        time_step_s=nan,
    )
