"""One setting of one source changed: what it is, whether it acts, and the mode's network with it."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from types import MappingProxyType
from typing import Final

from study.model.modes import Event, Mode, SetPoint
from study.model.plant import Plant
from study.model.sources import ConverterSupply, Genset
from study.network.network import ModeNetwork, with_settings
from study.network.sources import Law, Source, Speed
from study.results.sharing import SetTrim

# unit word of an event -> the setting
SETTINGS: Final[Mapping[str | None, str]] = MappingProxyType(
    {f"% {name}": name for name in ("no-load voltage", "voltage droop", "no-load frequency", "speed droop")}
)
_SET_POINT = {"no-load voltage": "no_load_voltage_pu", "no-load frequency": "no_load_frequency_pu"}
_PART = {"no-load voltage": "regulator", "voltage droop": "regulator"}
_NO_LOAD_PERCENT = (50.0, 150.0)  # bounds of the sheet Gensets
_DROOP_PERCENT = (0.0, 20.0)


def own_value(plant: Plant, event: Event) -> float:
    """Return what the workbook says of the setting in the event's mode, per unit; NaN where it has none."""
    setting = SETTINGS.get(event.unit)
    item = _item(plant, event.equipment)
    if setting is None or item is None:
        return float("nan")
    point = plant.mode(event.mode).set_points.get(event.equipment)
    given = getattr(point, _SET_POINT[setting], None) if setting in _SET_POINT else None
    if given is not None:
        return float(given)
    if isinstance(item, ConverterSupply):
        return 1.0 if setting in _SET_POINT else float(getattr(item, _converter_field(setting)))
    part = getattr(item, _PART.get(setting, "governor"))
    return float(getattr(part, _SET_POINT.get(setting, "droop_pu")))


def changed_network(at: ModeNetwork, events: Sequence[Event]) -> ModeNetwork:
    """Return a mode's network with the settings of some events.

    Parameters
    ----------
    at : ModeNetwork
        As it is.
    events : sequence of Event
        Maladjustments in this mode that `why_not` has nothing against.

    Returns
    -------
    ModeNetwork
        With other sources, and refused where they can no longer share.
    """
    plant, mode = at.network.plant, at.mode
    for event in events:
        plant, mode = _with_setting(plant, mode, event)
    return with_settings(at, plant, mode)


def trimmed_network(at: ModeNetwork, trims: Sequence[SetTrim]) -> ModeNetwork:
    """Return a mode's network with the trimmed set-points of its sets, as the sheet Set-points would have it.

    Parameters
    ----------
    at : ModeNetwork
        As it is.
    trims : sequence of SetTrim
        Sets in parallel; a set-point that was not trimmed stays as it is.

    Returns
    -------
    ModeNetwork
        With other sources.
    """
    mode = at.mode
    points = dict(mode.set_points)
    for trim in trims:
        point = points.get(trim.genset) or _no_set_point(trim.genset, mode.name)
        found = {"no_load_voltage_pu": trim.u_trimmed_pu, "no_load_frequency_pu": trim.f_trimmed_pu}
        given = {name: value for name, value in found.items() if not math.isnan(value)}
        points[trim.genset] = replace(point, **given)  # type: ignore[arg-type]
    return with_settings(at, at.network.plant, replace(mode, set_points=points))


def _with_setting(plant: Plant, mode: Mode, event: Event) -> tuple[Plant, Mode]:
    """Return the plant with another droop, or the mode with another set-point."""
    setting, value = SETTINGS[event.unit], float(event.size or 0.0) / 100.0
    if setting in _SET_POINT:
        point = mode.set_points.get(event.equipment) or _no_set_point(event.equipment, event.mode)
        point = replace(point, **{_SET_POINT[setting]: value})  # type: ignore[arg-type]
        return plant, replace(mode, set_points={**mode.set_points, event.equipment: point})
    part = _PART.get(setting, "governor")
    return replace(
        plant,
        gensets=tuple(
            replace(g, **{part: replace(getattr(g, part), droop_pu=value)})
            if g.name == event.equipment
            else g
            for g in plant.gensets
        ),
        converter_supplies=tuple(
            replace(c, **{_converter_field(setting): value})  # type: ignore[arg-type]
            if c.name == event.equipment
            else c
            for c in plant.converter_supplies
        ),
    ), mode


def why_not(at: ModeNetwork, event: Event) -> str:
    """Return why an event cannot be studied or would change nothing; an empty text where it can.

    Parameters
    ----------
    at : ModeNetwork
        The event's mode.
    event : Event
        A maladjustment of a source on line.

    Returns
    -------
    str
        A sentence.
    """
    if event.unit not in SETTINGS:
        wanted = ", ".join(str(unit) for unit in SETTINGS)
        return f"{event.unit!r} names no setting; the unit is one of: {wanted}."
    setting = SETTINGS[event.unit]
    low, high = _NO_LOAD_PERCENT if setting in _SET_POINT else _DROOP_PERCENT
    if event.size is None or not low <= event.size <= high:
        given = "no size is given" if event.size is None else f"a {setting} of {event.size:g} % is no setting"
        return f"{given}; give the new value, from {low:g} to {high:g} %."
    source = at.sources[at.source_names.index(event.equipment)]
    item = _item(at.network.plant, event.equipment)
    if isinstance(item, ConverterSupply):
        return "" if item.control == "grid forming" else f"{item.name} follows the grid at a set power."
    return _no_effect(at, item, source, setting) if item is not None else ""


def _no_effect(at: ModeNetwork, item: Genset, source: Source, setting: str) -> str:
    """Return why a setting of a set does nothing in this mode."""
    if setting in ("no-load frequency", "speed droop"):
        return _no_effect_on_speed(item, source, setting)
    name = source.name
    without = item.excitation.field_supply == "compounded without regulator"
    if without or (setting == "voltage droop" and source.law == Law.FIELD):
        return f"no regulator acts on the field of {name}."
    if source.law == Law.REACTIVE_POWER:
        return f"{name} is on kvar control."
    point = at.mode.set_points.get(name)
    in_use = (point and point.regulator_mode) or item.regulator.mode
    if setting == "voltage droop" and in_use == "no droop":
        return f"the regulator of {name} works without droop: its droop setting is not in use."
    return ""


def _no_effect_on_speed(item: Genset, source: Source, setting: str) -> str:
    if source.speed == Speed.FIXED:
        return f"{source.name} runs at a set power."
    if setting == "speed droop" and item.governor.mode != "droop":
        return f"the governor of {source.name} is {item.governor.mode}: its speed droop is not in use."
    return ""


def _item(plant: Plant, name: str) -> Genset | ConverterSupply | None:
    items: tuple[Genset | ConverterSupply, ...] = (*plant.gensets, *plant.converter_supplies)
    return next((x for x in items if x.name == name), None)


def _converter_field(setting: str) -> str:
    return setting.replace(" ", "_") + "_pu"


def _no_set_point(equipment: str, mode: str) -> SetPoint:
    return SetPoint(
        equipment=equipment,
        mode=mode,
        cell="",
        no_load_voltage_pu=None,
        no_load_frequency_pu=None,
        p_set_kw=None,
        regulator_mode=None,
        tap_pu=None,
    )
