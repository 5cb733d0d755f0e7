"""Settings that change while the plant runs: set-points and droops as the time simulation wants them."""

from __future__ import annotations

from study.formulas.load_compensation import reactance_from_droop, signed_reactance
from study.issues import SolveError
from study.model.modes import Event
from study.network import dynamics_data as d
from study.network.dynamics_build import Happening
from study.network.network import ModeNetwork
from study.network.sources import Law, Source, Speed

SETTINGS = ("no-load voltage", "voltage droop", "no-load frequency", "speed droop")


def setting_happenings(at: ModeNetwork, event: Event, row: int) -> tuple[list[Happening], str]:
    """Return what a change of setting does, and a sentence for it.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    event : Event
        Of kind set-point step or droop changed.
    row : int
        Of the source in the simulation.

    Returns
    -------
    tuple of list and str
        Happenings at the event's time.

    Raises
    ------
    SolveError
        A unit that names no setting, or a setting that does nothing in this mode.
    """
    name = (event.unit or "").removeprefix("%").strip()
    if name not in SETTINGS or event.size is None:
        raise SolveError(
            f"{event.equipment}: {event.unit!r} names no setting; the unit is one of: "
            + ", ".join(f"% {x}" for x in SETTINGS)
            + "."
        )
    source = at.sources[at.source_names.index(event.equipment)]
    value = event.size / 100.0
    columns = _columns(source, name, value)
    happenings = [
        Happening(at_s=event.at_s, kind=d.SET_PARAMETER, index=row, column=column, value=x)
        for column, x in columns.items()
    ]
    if event.duration_s is not None:
        back = _columns(source, name, _own(source, name))
        happenings += [
            Happening(at_s=event.at_s + event.duration_s, kind=d.SET_PARAMETER, index=row, column=c, value=x)
            for c, x in back.items()
        ]
    return happenings, f"{event.equipment}: {name} to {event.size:g} %"


def _own(source: Source, name: str) -> float:
    return {
        "no-load voltage": source.v_ref_pu,
        "voltage droop": source.droop_pu,
        "no-load frequency": source.f_no_load_pu,
        "speed droop": source.speed_droop_pu,
    }[name]


def _columns(source: Source, name: str, value: float) -> dict[int, float]:
    """Return the parameters that a setting fixes."""
    if name in ("no-load frequency", "speed droop"):
        if source.speed == Speed.FIXED:
            raise SolveError(f"{source.name} runs at a set power: its {name} is not in use.")
        if name == "speed droop" and source.speed != Speed.DROOP:
            raise SolveError(f"the governor of {source.name} has no droop in use.")
        return {d.F_REF if name == "no-load frequency" else d.DROOP: value}
    if source.law in (Law.FIELD, Law.REACTIVE_POWER):
        raise SolveError(f"no {name} is in use on {source.name}: {source.words}.")
    v_ref = value if name == "no-load voltage" else source.v_ref_pu
    droop = value if name == "voltage droop" else source.droop_pu
    if source.law == Law.CROSS_CURRENT or source.machine is None:
        if name == "voltage droop":
            raise SolveError(f"{source.name}: its voltage droop cannot be changed in the simulation.")
        return {d.V_REF: value}
    law = "reactive current" if source.law == Law.REACTIVE_CURRENT else "phasor"
    x = reactance_from_droop(droop, source.droop_base, law, source.cos_phi, v_ref)  # type: ignore[arg-type]
    return {d.V_REF: v_ref, d.XC: signed_reactance(x, "reversed" if source.reversed_polarity else "normal")}
