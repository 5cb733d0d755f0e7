"""What feeds a fault in one mode and case, as arrays [source] per unit of the network's base.

Currents are per unit of base power over sqrt3 times base voltage of the source's own level, so that the
formulas of IEC 61363-1 serve with a line voltage of sqrt3: phase voltage 1. Each source stands on its board
behind its own cable, which is part of it.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, fields, replace

import numpy as np
from numpy.typing import NDArray

from study.formulas.fault_current import SQRT2, SQRT3, FaultCurrent, FloatArray
from study.formulas.fault_iec61363 import (
    Source,
    dc_time_constant_s,
    load_phasor_a,
    synchronous_source,
    through_impedance,
)
from study.formulas.fault_iec61363_motors import TYPICAL_MOTOR, asynchronous_source
from study.formulas.fault_iec61363_plant import starred
from study.model.plant import Plant
from study.model.sources import ConverterSupply, Genset, SynchronousMotor
from study.network.fault_holding import Holding, holding_of
from study.network.fault_supplies import CaseOptions, Supply

ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

LARGE = 1e12  # stands for an impedance through which nothing comes [pu]
MOTOR_R_OVER_X_SPLIT = TYPICAL_MOTOR.rs_pu / (TYPICAL_MOTOR.rs_pu + TYPICAL_MOTOR.rr_pu)


@dataclass(frozen=True, slots=True, kw_only=True)
class FaultSources:
    """Sources of one case, arrays [source] per unit.

    ``bare`` are the sources at their own terminals, ``at_board`` behind their own cables with starred
    impedances: the load before the fault is inside them. ``voltage`` drives them, ``negative`` is the
    negative-sequence impedance behind the cable. ``limit`` is the current of a converter supply (0 for all
    else) and ``ends_s`` how long it lasts. ``field_limit`` is the e.m.f. of a shunt set at rated voltage and
    full field (0 for others). ``asynchronous`` marks motors that have no transient part.
    """

    supplies: tuple[Supply, ...]
    bus: IntArray
    island: IntArray
    units: FloatArray
    lead: ComplexArray
    voltage: FloatArray
    bare: Source
    at_board: Source
    negative: ComplexArray
    limit: FloatArray
    ends_s: FloatArray
    field_limit: FloatArray
    asynchronous: BoolArray
    preload: FloatArray
    holdings: tuple[Holding, ...]


def fault_sources(
    plant: Plant,
    supplies: Sequence[Supply],
    stand: tuple[IntArray, IntArray],
    options: CaseOptions,
    before: FloatArray,
) -> FaultSources:
    """Return the arrays of a case.

    Parameters
    ----------
    plant : Plant
        Holds the rated frequency.
    supplies : sequence of Supply
        What feeds the fault.
    stand : tuple of ndarray of int, shape (source,)
        Bus and island of each.
    options : CaseOptions
        The case.
    before : ndarray, shape (source,)
        Voltage at each source's board before the fault; drives motors. [pu]

    Returns
    -------
    FaultSources
        In the order of the supplies.
    """
    hz = plant.project.f_rated_hz
    voltage = np.array(
        [s.voltage if s.voltage else before[k] for k, s in enumerate(supplies)], float
    ).reshape(-1)
    holdings = tuple(holding_of(s.item, s.kind, maximum=options.maximum) for s in supplies)
    asynchronous = np.array([s.kind in _ASYNCHRONOUS for s in supplies], bool)
    table = np.zeros((len(supplies), len(_ROW)))
    for k in np.flatnonzero(~asynchronous).tolist():
        table[k] = _columns(_lasting_source(supplies[k], voltage[k], holdings[k], options, hz)).T
    if asynchronous.any():
        motors = [s for s in supplies if s.kind in _ASYNCHRONOUS]
        table[asynchronous] = _columns(_motor_sources(motors, voltage[asynchronous], hz)).T
    bare = _joined_source(dict(zip(_ROW, table.T, strict=True)))
    lead = np.array([s.lead for s in supplies], complex)
    behind = through_impedance(bare, r_ohm=lead.real, x_ohm=lead.imag, frequency_hz=hz)
    behind = _own_cable_of_motors(bare, behind, asynchronous)
    at_board = starred(behind, SQRT3 * voltage)
    limit = np.where([s.kind == "converter supply" for s in supplies], bare.current.sustained_a, 0.0)
    return FaultSources(
        supplies=tuple(supplies),
        bus=stand[0],
        island=stand[1],
        units=np.array([s.units for s in supplies], float),
        lead=lead,
        voltage=voltage,
        bare=bare,
        at_board=at_board,
        negative=_negative(supplies, bare, limit) + lead,
        limit=limit,
        ends_s=np.array(
            [
                h.lasts_s if s.kind == "converter supply" else np.inf
                for s, h in zip(supplies, holdings, strict=True)
            ],
            float,
        ),
        field_limit=np.array([h.field_limit for h in holdings], float),
        asynchronous=asynchronous,
        preload=np.array(
            [1.0 if options.preloaded and s.kind in _SYNCHRONOUS else 0.0 for s in supplies], float
        ),
        holdings=holdings,
    )


_SYNCHRONOUS = ("genset", "synchronous motor")
_ASYNCHRONOUS = ("motor", "small motors", "regenerating drive")
_ROW = (
    *(f.name for f in fields(FaultCurrent)),
    "r_ohm",
    "x_sub_ohm",
    "x_trans_ohm",
    "x_sustained_ohm",
    "r_dc_ohm",
    "x_dc_ohm",
)


def _lasting_source(s: Supply, voltage: float, holding: Holding, options: CaseOptions, hz: float) -> Source:
    """Return a source that is no asynchronous motor, at its own terminals."""
    if isinstance(s.item, Genset | SynchronousMotor):
        return _machine_source(s, s.item, voltage, options, sustained_in=holding.current_in, hz=hz)
    if isinstance(s.item, ConverterSupply):
        return _limited_source(voltage, (s.item.short_circuit_current or 0.0) * voltage / s.pu)
    return _stiff_source(voltage, s.pu, s.r_over_x, hz)


def _columns(source: Source) -> FloatArray:
    """Return the arrays of a source in the order of `_ROW`, (column, source)."""
    current = [getattr(source.current, f.name) for f in fields(FaultCurrent)]
    return np.array(current + [getattr(source, name) for name in _ROW[len(current) :]], float)


def pick_sources(sources: FaultSources, rows: IntArray) -> FaultSources:
    """Return some of the sources.

    Parameters
    ----------
    sources : FaultSources
        All of them.
    rows : ndarray of int
        Which.

    Returns
    -------
    FaultSources
        In the order of the rows.
    """
    values: dict[str, object] = {}
    for f in fields(FaultSources):
        value = getattr(sources, f.name)
        if isinstance(value, tuple):
            values[f.name] = tuple(value[k] for k in rows)
        else:
            values[f.name] = pick_source(value, rows) if isinstance(value, Source) else value[rows]
    return FaultSources(**values)  # type: ignore[arg-type]


def pick_source(source: Source, rows: NDArray[np.generic]) -> Source:
    """Return some rows of a source's arrays.

    Parameters
    ----------
    source : Source
        Shape (source,).
    rows : ndarray
        Indices or a mask.

    Returns
    -------
    Source
        In the order of the rows.
    """
    current = FaultCurrent(**{f.name: getattr(source.current, f.name)[rows] for f in fields(FaultCurrent)})
    own = {f.name: getattr(source, f.name)[rows] for f in fields(Source) if f.name != "current"}
    return Source(current=current, **own)


def _joined_source(columns: dict[str, FloatArray]) -> Source:
    current = FaultCurrent(**{f.name: columns[f.name] for f in fields(FaultCurrent)})
    own = {f.name: columns[f.name] for f in fields(Source) if f.name != "current"}
    return Source(current=current, **own)


def _machine_source(
    s: Supply,
    item: Genset | SynchronousMotor,
    voltage: float,
    options: CaseOptions,
    *,
    sustained_in: float,
    hz: float,
) -> Source:
    m = item.machine
    tolerance = 1.0 + options.tolerance_sign * m.reactance_tolerance
    rated = voltage / s.pu
    load = load_phasor_a(rated if options.preloaded else 0.0, item.cos_phi_rated)
    if s.kind == "synchronous motor":
        load = -np.conj(load)  # draws kW, over-excited: delivers kvar
    x_sub = m.x_d2_saturated_pu * tolerance * s.pu
    return synchronous_source(
        voltage_v=SQRT3 * voltage,
        load_a=load,
        ra_ohm=m.r_stator_pu * s.pu,
        x_sub_ohm=x_sub,
        x_trans_ohm=max(m.x_d1_saturated_pu * tolerance * s.pu, x_sub),
        xd_ohm=m.x_d_pu * s.pu,
        t_sub_s=m.t_d2_s,
        t_trans_s=m.t_d1_s,
        t_dc_s=m.t_armature_s,
        sustained_a=sustained_in * rated,
        frequency_hz=hz,
    )


def _stiff_source(voltage: float, z: float, r_over_x: float, hz: float) -> Source:
    """Return a supply of constant voltage behind a constant impedance."""
    x = z / float(np.hypot(1.0, r_over_x))
    r = x * r_over_x
    current = voltage / z
    return _constant(current, SQRT2 * current, float(dc_time_constant_s(x, r, hz)), r, x)


def _limited_source(voltage: float, limit: float) -> Source:
    """Return a converter as the reactance that lets its limit through at its own terminals."""
    return _constant(limit, 0.0, np.inf, 0.0, voltage / limit)


def _constant(current: float, dc: float, t_dc_s: float, r: float, x: float) -> Source:
    """Return a source whose symmetrical current does not decay."""
    i, endless = np.asarray(current), np.asarray(np.inf)
    return Source(
        current=FaultCurrent(
            subtransient_a=i,
            transient_a=i,
            sustained_a=i,
            dc_a=np.asarray(dc),
            t_sub_s=endless,
            t_trans_s=endless,
            t_dc_s=np.asarray(t_dc_s),
        ),
        r_ohm=np.asarray(r),
        x_sub_ohm=np.asarray(x),
        x_trans_ohm=np.asarray(x),
        x_sustained_ohm=np.asarray(x),
        r_dc_ohm=np.asarray(r),
        x_dc_ohm=np.asarray(x),
    )


def _motor_sources(motors: Sequence[Supply], voltage: FloatArray, hz: float) -> Source:
    """Return motors without load before the fault: typical data, those of large ones by their own start."""
    rs, rr, x = np.array([_motor_circuit(s) for s in motors], float).T * np.array([s.pu for s in motors])
    return asynchronous_source(
        voltage_v=SQRT3 * voltage, load_a=0.0, rs_ohm=rs, rr_ohm=rr, x_ohm=x, frequency_hz=hz
    )


def _motor_circuit(s: Supply) -> tuple[float, float, float]:
    """Return RS, RR and XS + XR per unit of the motors' own rating."""
    z = TYPICAL_MOTOR
    if s.kind == "small motors":
        return z.rs_pu, z.rr_pu, z.x_pu
    if s.kind == "motor":
        scale = 1.0 / (s.starting * math.hypot(z.rs_pu + z.rr_pu, z.x_pu))
        return z.rs_pu * scale, z.rr_pu * scale, z.x_pu * scale
    x = 1.0 / s.starting / math.hypot(1.0, s.r_over_x)
    rs = MOTOR_R_OVER_X_SPLIT * s.r_over_x * x
    return rs, s.r_over_x * x - rs, x


def _own_cable_of_motors(bare: Source, behind: Source, asynchronous: BoolArray) -> Source:
    """Return the sources with the standard's own rule for a motor's cable: T''M = (XM + Xc)/(w RR)."""
    t_sub = np.where(
        asynchronous,
        bare.current.t_sub_s * behind.x_sub_ohm / bare.x_sub_ohm,
        behind.current.t_sub_s,
    )
    return replace(behind, current=replace(behind.current, t_sub_s=t_sub))


def _negative(supplies: Sequence[Supply], bare: Source, limit: FloatArray) -> ComplexArray:
    """Return negative-sequence impedances at the terminals; a converter has none."""
    out = bare.r_ohm + 1j * bare.x_sub_ohm
    for k, s in enumerate(supplies):
        if isinstance(s.item, Genset | SynchronousMotor):
            out[k] = complex(s.item.machine.r_stator_pu, s.item.machine.x_2_pu) * s.pu
    return np.where(limit > 0.0, LARGE, out)
