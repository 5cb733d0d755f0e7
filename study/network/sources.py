"""The sources on line in a mode: by which law each holds voltage and speed, and what it cannot exceed."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum

import numpy as np
from numpy.typing import NDArray

from study.formulas.excitation import FieldSupply
from study.formulas.load_compensation import reactance_from_droop, signed_reactance
from study.formulas.synchronous import Machine, rated_load_field
from study.model.modes import Mode, SetPoint
from study.model.plant import Plant
from study.model.sources import ConverterSupply, Genset, RegulatorMode, ShoreSupply
from study.network.machines import NO_FIELD, largest_field, machine_of, set_field
from study.network.topology import Topology
from study.network.view import View

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

# The fuel rack of an auxiliary engine is left at 110 % so that the governor and the protection can act.
# Source: IACS UR M51, programme for trials of engines driving generators; from memory.
ENGINE_OVERLOAD = 1.10


class Law(IntEnum):
    """How a source's voltage follows its current."""

    PHASOR = 0
    REACTIVE_CURRENT = 1
    REACTIVE_POWER = 2
    FIELD = 3
    CROSS_CURRENT = 4
    BEHIND_IMPEDANCE = 5
    CURRENT_LIMIT = 6


class Speed(IntEnum):
    """How a source's active power follows the frequency."""

    DROOP = 0
    ISOCHRONOUS = 1
    LOAD_SHARING = 2
    FIXED = 3
    SHORE = 4


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """One source on line, its own quantities per unit of its own rating.

    ``v_ref_pu`` is the voltage at no load, ``xc_pu`` the compensating reactance with its sign (`r_pu` + j
    `xc_pu` the impedance of a shore supply); reactive power is ``q_set_pu + q_per_p x P`` under that law.
    ``droop`` in pu of rated frequency over rated kW; ``p_max_pu`` of rated kVA.
    """

    name: str
    kind: str
    node: int
    island: int
    s_rated_kva: float
    p_rated_kw: float
    q_rated_kvar: float
    u_rated_v: float
    law: Law
    v_ref_pu: float
    droop_pu: float
    droop_base: str
    cos_phi: float
    reversed_polarity: bool
    r_pu: float
    xc_pu: float
    q_set_pu: float
    q_per_p: float
    cross_group: str
    field: FieldSupply
    ceiling: FieldSupply
    machine: Machine | None
    rated_field_pu: float
    i_max_pu: float
    speed: Speed
    f_no_load_pu: float
    speed_droop_pu: float
    p_set_kw: float
    p_max_kw: float
    p_engine_kw: float
    words: str


def sources_of(plant: Plant, mode: Mode, topology: Topology, view: View) -> tuple[Source, ...]:
    """Return the sources on line, with the mode's set-points applied.

    Parameters
    ----------
    plant : Plant
        The whole plant.
    mode : Mode
        One of its modes.
    topology : Topology
        The plant's nodes.
    view : View
        What is on line.

    Returns
    -------
    tuple of Source
        Sets, then shore supplies, then converters, in workbook order.
    """
    on = set(view.sources)
    made: list[Source] = []
    items: list[Genset | ShoreSupply | ConverterSupply] = [
        *plant.gensets,
        *plant.shore_supplies,
        *plant.converter_supplies,
    ]
    for item in items:
        if item.name not in on:
            continue
        node = topology.node_of[item.name]
        place = (node, view.island[node])
        point = mode.set_points.get(item.name)
        if isinstance(item, Genset):
            made.append(_from_genset(item, point, place))
        elif isinstance(item, ShoreSupply):
            made.append(_from_shore(item, point, place, plant.project.f_rated_hz))
        else:
            u_board_v = plant.board(item.board).u_nominal_v
            made.append(_from_converter(item, point, place, u_board_v))
    return tuple(made)


def _from_genset(g: Genset, point: SetPoint | None, place: tuple[int, int]) -> Source:
    v_ref = _trim(point, "no_load_voltage_pu", g.regulator.no_load_voltage_pu)
    law, words = _genset_law(g, (point and point.regulator_mode) or g.regulator.mode)
    q_set_kvar = point.q_set_kvar if point else None
    if law == Law.REACTIVE_POWER:
        words += " at rated power factor" if q_set_kvar is None else f" at {q_set_kvar:g} kvar"
    machine = machine_of(g)
    p_max = ENGINE_OVERLOAD * g.p_engine_kw * g.alternator_efficiency
    p_set = _trim(point, "p_set_kw", np.nan)
    return Source(
        name=g.name,
        kind="genset",
        node=place[0],
        island=place[1],
        s_rated_kva=g.s_rated_kva,
        p_rated_kw=g.p_rated_kw,
        q_rated_kvar=g.q_rated_kvar,
        u_rated_v=g.u_rated_v,
        law=law,
        v_ref_pu=v_ref,
        droop_pu=_droop_in_use(g, law, words),
        droop_base=g.regulator.droop_base,
        cos_phi=g.cos_phi_rated,
        reversed_polarity=g.regulator.reversed_polarity,
        r_pu=0.0,
        xc_pu=_compensation(g, v_ref, _droop_in_use(g, law, words), law),
        q_set_pu=(q_set_kvar or 0.0) / g.s_rated_kva,
        q_per_p=0.0 if q_set_kvar is not None else _tan(g.cos_phi_rated),
        cross_group=g.regulator.cross_current_group or "cross-current",
        field=_own_field(g, v_ref),
        ceiling=largest_field(g),
        machine=machine,
        rated_field_pu=rated_load_field(g.cos_phi_rated, machine),
        i_max_pu=np.inf,
        speed=_genset_speed(g, p_set),
        f_no_load_pu=_trim(point, "no_load_frequency_pu", g.governor.no_load_frequency_pu),
        speed_droop_pu=g.governor.droop_pu,
        p_set_kw=p_set,
        p_max_kw=p_max,
        p_engine_kw=g.p_engine_kw * g.alternator_efficiency,
        words=words,
    )


def _genset_law(g: Genset, mode: RegulatorMode) -> tuple[Law, str]:
    supply = g.excitation.field_supply
    if supply in ("fixed", "compounded without regulator"):
        return Law.FIELD, "fixed field" if supply == "fixed" else "compounded, no regulator"
    if mode == "droop" and g.regulator.droop_pu > 0.0:
        return {
            "phasor": (Law.PHASOR, "droop on the current phasor"),
            "reactive current": (Law.REACTIVE_CURRENT, "droop on reactive current"),
        }[g.regulator.droop_law]
    return {
        "fixed excitation": (Law.FIELD, "fixed excitation"),
        "kvar control": (Law.REACTIVE_POWER, "kvar control"),
        "cross-current": (Law.CROSS_CURRENT, "cross-current compensation"),
        "no droop": (Law.PHASOR, "no droop"),
        "droop": (Law.PHASOR, "no droop"),
    }[mode]


def _droop_in_use(g: Genset, law: Law, words: str) -> float:
    if words == "no droop" or law in (Law.FIELD, Law.REACTIVE_POWER):
        return 0.0
    return g.regulator.droop_pu


def _compensation(g: Genset, v_ref: float, droop: float, law: Law) -> float:
    form = "reactive current" if law == Law.REACTIVE_CURRENT else "phasor"
    x = reactance_from_droop(droop, g.regulator.droop_base, form, g.cos_phi_rated, v_ref)  # type: ignore[arg-type]
    return signed_reactance(x, "reversed" if g.regulator.reversed_polarity else "normal")


def _own_field(g: Genset, v_ref: float) -> FieldSupply:
    if g.excitation.field_supply == "compounded without regulator":
        return largest_field(g)
    return set_field(g, v_ref)


def _genset_speed(g: Genset, p_set_kw: float) -> Speed:
    if not np.isnan(p_set_kw):
        return Speed.FIXED
    if g.governor.mode == "load sharing":
        return Speed.LOAD_SHARING
    if g.governor.mode == "isochronous" or g.governor.droop_pu == 0.0:
        return Speed.ISOCHRONOUS
    return Speed.DROOP


def _from_shore(s: ShoreSupply, point: SetPoint | None, place: tuple[int, int], f_rated_hz: float) -> Source:
    s_rated = 3.0**0.5 * s.u_rated_v * s.i_rated_a / 1000.0
    fault_mva = s.fault_level_min_mva or s.fault_level_max_mva
    z = s_rated / (1000.0 * fault_mva) if fault_mva else 0.0
    x = z / (1.0 + s.r_over_x**2) ** 0.5
    return _plain(
        s.name,
        "shore supply",
        place,
        s_rated,
        s.u_rated_v,
        law=Law.BEHIND_IMPEDANCE,
        v_ref_pu=_trim(point, "no_load_voltage_pu", 1.0),
        r_pu=x * s.r_over_x,
        xc_pu=x,
        speed=Speed.SHORE,
        f_no_load_pu=s.f_hz / f_rated_hz,
        words="behind its least fault level" if fault_mva else "stiff: no fault level is given",
    )


def _from_converter(
    c: ConverterSupply, point: SetPoint | None, place: tuple[int, int], u_board_v: float
) -> Source:
    p_set = _trim(point, "p_set_kw", np.nan if c.p_set_kw is None else c.p_set_kw)
    if c.control == "grid following":
        return _plain(
            c.name,
            "converter supply",
            place,
            c.s_rated_kva,
            u_board_v,
            law=Law.REACTIVE_POWER,
            q_set_pu=(c.q_set_kvar or 0.0) / c.s_rated_kva,
            speed=Speed.FIXED,
            p_set_kw=0.0 if np.isnan(p_set) else p_set,
            words="grid following",
        )
    share = 0.0 if np.isnan(p_set) else p_set / c.s_rated_kva
    return _plain(
        c.name,
        "converter supply",
        place,
        c.s_rated_kva,
        u_board_v,
        law=Law.PHASOR,
        v_ref_pu=_trim(point, "no_load_voltage_pu", 1.0),
        droop_pu=c.voltage_droop_pu,
        droop_base="rated kVA",
        xc_pu=c.voltage_droop_pu,
        i_max_pu=1.0,
        speed=Speed.DROOP if c.speed_droop_pu else Speed.ISOCHRONOUS,
        f_no_load_pu=_trim(point, "no_load_frequency_pu", 1.0 + c.speed_droop_pu * share),
        speed_droop_pu=c.speed_droop_pu,
        p_max_kw=c.s_rated_kva,
        words="grid forming",
    )


def _plain(
    name: str, kind: str, place: tuple[int, int], s_kva: float, u_v: float, **changes: object
) -> Source:
    """Return a source without a field, with every field that is not named left neutral."""
    neutral: dict[str, object] = {
        "v_ref_pu": 1.0,
        "droop_pu": 0.0,
        "droop_base": "rated kVA",
        "cos_phi": 1.0,
        "reversed_polarity": False,
        "r_pu": 0.0,
        "xc_pu": 0.0,
        "q_set_pu": 0.0,
        "q_per_p": 0.0,
        "cross_group": "",
        "field": NO_FIELD,
        "ceiling": NO_FIELD,
        "machine": None,
        "rated_field_pu": np.nan,
        "i_max_pu": np.inf,
        "f_no_load_pu": 1.0,
        "speed_droop_pu": 0.0,
        "p_set_kw": np.nan,
        "p_max_kw": np.inf,
        "p_engine_kw": np.nan,
    }
    return Source(
        name=name,
        kind=kind,
        node=place[0],
        island=place[1],
        s_rated_kva=s_kva,
        p_rated_kw=s_kva,
        q_rated_kvar=s_kva,
        u_rated_v=u_v,
        **{**neutral, **changes},  # type: ignore[arg-type]
    )


def _trim(point: SetPoint | None, name: str, otherwise: float) -> float:
    """Return what the mode's set-point says of a quantity, or the source's own value."""
    value = getattr(point, name, None)
    return otherwise if value is None else float(value)


def _tan(cos_phi: float) -> float:
    return float((1.0 - cos_phi**2) ** 0.5 / cos_phi)
