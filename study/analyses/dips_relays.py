"""Protection functions of sets as relays of the time simulation: what they look at, and what they do."""

from __future__ import annotations

import numpy as np

from study.analyses.dips_cases import CaseWork
from study.model.protection import ProtectionFunction
from study.model.sources import Genset
from study.network import dynamics_data as d
from study.network.dynamics_build import Relay

LOOKS = {
    "preferential trip 1": d.OVERCURRENT,
    "preferential trip 2": d.OVERCURRENT,
    "undervoltage": d.UNDERVOLTAGE,
    "overvoltage": d.OVERVOLTAGE,
    "underfrequency": d.UNDERFREQUENCY,
    "overfrequency": d.OVERFREQUENCY,
    "reverse power": d.REVERSE_POWER,
    "loss of excitation": d.NO_EXCITATION,
}
STAGES = {"preferential trip 1": 1, "preferential trip 2": 2}


def add_relays(work: CaseWork) -> None:
    """Add the protection functions that stand on the sets of a case, and the stages that they shed.

    Preferential trips look at the current of their set and take off the consumers of their stage; all others
    open the set. Differential protection sees nothing of these events.

    Parameters
    ----------
    work : CaseWork
        Is added to; a setting whose unit says nothing is a finding.
    """
    rows, plant = work.rows(), work.plant
    sets = {g.name: g for g in plant.gensets}
    states: dict[int, int] = {}
    for f in plant.protection_functions:
        if f.equipment not in rows or f.equipment not in sets or f.kind not in LOOKS:
            continue
        setting = setting_pu(f, sets[f.equipment], plant.project.f_rated_hz)
        if setting is None:
            work.findings.append(f"{f.name}: a setting in {f.unit!r} is not understood; it is left out.")
            continue
        stage = STAGES.get(f.kind, 0)
        if stage and stage not in states:
            states[stage] = _stage(work, stage)
        work.relays.append(
            Relay(
                source=rows.index(f.equipment),
                looks=LOOKS[f.kind],
                setting=setting,
                delay_s=f.delay_s,
                does=d.SHED_LOAD if stage else d.TRIP_SOURCE,
                index=states.get(stage, 0),
            )
        )
        what = f"trip stage {stage} is shed" if stage else f"{f.equipment} is tripped"
        work.relay_words.append(f"{f.name}: {what}")


def _stage(work: CaseWork, stage: int) -> int:
    """Add the state without the consumers of a trip stage."""
    here = np.array([x.trip_stage == stage for x in work.plant.loads], bool)
    return work.state(np.where(here, 0.0, work.p_kw), np.where(here, 0.0, work.q_kvar))


def setting_pu(function: ProtectionFunction, item: Genset, f_rated_hz: float) -> float | None:
    """Return a setting per unit of what its relay looks at; None where the unit says nothing.

    Currents are of rated current, voltages of rated voltage, frequencies of rated frequency, reverse power of
    rated kW, reactive power of rated kVA.

    Parameters
    ----------
    function : ProtectionFunction
        A function of a set.
    item : Genset
        The set.
    f_rated_hz : float
        Rated frequency. [Hz]

    Returns
    -------
    float or None
        [pu]
    """
    unit, value = function.unit.strip(), function.pick_up
    if unit == "%":
        return value / 100.0
    bases: dict[str, dict[str, float]] = {
        "preferential": {
            "A": 1000.0 * item.s_rated_kva / (3.0**0.5 * item.u_rated_v),
            "kVA": item.s_rated_kva,
            "kW": item.p_rated_kw,
        },
        "voltage": {"V": item.u_rated_v, "pu": 1.0},
        "frequency": {"Hz": f_rated_hz, "pu": 1.0},
        "reverse": {"kW": item.p_rated_kw},
        "loss": {"kvar": item.s_rated_kva},
    }
    for word, units in bases.items():
        if word in function.kind and unit in units:
            return value / units[unit]
    return None
