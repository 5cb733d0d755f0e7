"""IEC 61363-1 at every place of one mode and case: what each source gives, as exponentials.

The stages of the fault are solved as networks: subtransient, transient while the asynchronous motors still
give current and after they have died away, and sustained with what holds a current. Each source keeps its own
decay behind the impedance that it sees, its own part of what is common to all. Behind a common impedance the
other sources take over what motors gave; that is a row of its own, which rises as the motors die away.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields, replace

import numpy as np
from numpy.typing import NDArray

from study.formulas.fault_current import SQRT3, FaultCurrent
from study.formulas.fault_iec61363 import Source, through_impedance
from study.formulas.fault_iec61363_motors import limited_current_behind_impedance_a
from study.formulas.fault_iec61363_plant import starred
from study.network.fault_network import FaultNetwork
from study.network.fault_sources import pick_source
from study.network.fault_stages import Stage, solve_stage

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
BoolArray = NDArray[np.bool_]

HELD = 1e-9  # pu: what stands between a regulator's held voltage and a set's terminals


@dataclass(frozen=True, slots=True, kw_only=True)
class Stages:
    """The stages of a case, each with the sources' impedances at their boards and at their terminals.

    ``mixed`` is the transient stage with the motors still there, ``transient`` that without them.
    ``held_field`` and ``held_voltage`` are the two bounds of the sustained current: excitation at its limit,
    and terminal voltage kept; ``reach`` is that of the standard's Z* = U0/(sqrt3 Ik).
    """

    subtransient: Stage
    mixed: Stage
    transient: Stage
    reach: Stage
    held_field: Stage
    held_voltage: Stage
    negative: Stage


@dataclass(frozen=True, slots=True, kw_only=True)
class Sustained:
    """Sustained current of each source at each place, both estimates, per unit."""

    reach: FloatArray
    duty: FloatArray


def terminal_source(net: FaultNetwork) -> Source:
    """Return the sources at their own terminals with starred impedances.

    Parameters
    ----------
    net : FaultNetwork
        The network.

    Returns
    -------
    Source
        Shape (source,). [pu]
    """
    return starred(net.sources.bare, SQRT3 * net.sources.voltage)


def solve_stages(net: FaultNetwork, lasting: Stages | None = None) -> Stages:
    """Return every stage of a fault.

    Parameters
    ----------
    net : FaultNetwork
        The network.
    lasting : Stages, optional
        Stages of the same network at another tolerance, whose sustained and negative-sequence stages serve
        here too: they do not hang on X''d and X'd.

    Returns
    -------
    Stages
        Per unit.
    """
    s = net.sources
    board, bare = s.at_board, terminal_source(net)
    everyone = np.ones(len(s.bus), bool)
    holds = board.current.sustained_a > 0.0
    keeps = holds | (s.field_limit > 0.0)

    def stage(component: Callable[[Source], FloatArray], active: BoolArray, **how: FloatArray) -> Stage:
        z = [x.r_ohm + 1j * np.where(active, component(x), 1.0) for x in (board, bare)]
        return solve_stage(net, z[0], z[1], active, **how)  # type: ignore[arg-type]

    first = stage(lambda x: x.x_sub_ohm, everyone)
    transient = stage(lambda x: x.x_trans_ohm, ~s.asynchronous)
    mixed = transient
    if s.asynchronous.any():
        mixed = stage(lambda x: np.where(s.asynchronous, x.x_sub_ohm, x.x_trans_ohm), everyone)
    if lasting is not None:
        return replace(lasting, subtransient=first, mixed=mixed, transient=transient)
    return Stages(
        subtransient=first,
        mixed=mixed,
        transient=transient,
        reach=stage(lambda x: _reach_reactance(x, s.voltage), holds),
        held_field=stage(
            lambda x: x.x_sustained_ohm,
            holds,
            voltage=np.where(
                holds,
                board.current.sustained_a
                * np.hypot(board.r_ohm, np.where(holds, board.x_sustained_ohm, 1.0)),
                0.0,
            ),
        ),
        held_voltage=_held_voltage(net, keeps),
        # A converter has no negative sequence; its limit is taken to hold for every kind of fault.
        negative=solve_stage(net, s.negative, s.negative - s.lead, s.limit == 0.0),
    )


def _reach_reactance(x: Source, voltage: FloatArray) -> FloatArray:
    """Return the reactance of Z* = U0/(sqrt3 Ik) beside the source's resistance."""
    ik = np.where(x.current.sustained_a > 0.0, x.current.sustained_a, 1.0)
    return np.sqrt(np.maximum((voltage / ik) ** 2 - x.r_ohm**2, 0.0))


def _held_voltage(net: FaultNetwork, keeps: BoolArray) -> Stage:
    """Return the stage in which sets keep their terminal voltage; other supplies have their impedance."""
    s = net.sources
    genset = np.array([x.kind == "genset" for x in s.supplies], bool)
    own = np.where(genset, HELD * 1j, s.bare.r_ohm + 1j * np.where(keeps, s.bare.x_sustained_ohm, 1.0))
    return solve_stage(net, own + s.lead, own, keeps)


def fault_parts(
    net: FaultNetwork, stages: Stages, extra: ComplexArray | None, times: float
) -> tuple[FaultCurrent, Sustained]:
    """Return the current of each source at each place as exponentials, in pu.

    Parameters
    ----------
    net : FaultNetwork
        The network.
    stages : Stages
        Of `solve_stages`.
    extra : ndarray, shape (place,), optional
        Impedance at the fault, in series with the positive sequence: 0 for a three-phase fault. [pu]
    times : float
        Current at the fault over that of the positive sequence: 1, sqrt3 (two phases), 3 (earth fault).

    Returns
    -------
    tuple
        Exponentials [place, source] with the sustained current of the case (duty for the maximum, reach for
        the minimum), with motors one column more for what is taken over from them; both estimates of the
        sustained current [place, source].
    """
    s = net.sources
    first, mixed, last = (
        _at_fault(net, x, extra) for x in (stages.subtransient, stages.mixed, stages.transient)
    )
    t_sub, _, t_dc, dc = _behind(net, first, "x_sub_ohm", everyone=True)
    t_trans = np.where(s.asynchronous, np.inf, _behind(net, last, "x_trans_ohm", everyone=False)[1])
    sub = _limit(net, first, np.abs(first))
    motors = s.asynchronous
    transient = np.where(motors, 0.0, _limit(net, mixed, np.abs(mixed)))
    sustained = _sustained(net, stages, extra)
    columns = {
        "subtransient_a": sub,
        "transient_a": transient,
        "sustained_a": sustained.duty if net.options.maximum else sustained.reach,
        "dc_a": dc,
        "t_sub_s": t_sub,
        "t_trans_s": t_trans,
        "t_dc_s": t_dc,
    }
    if motors.any():
        taken = np.where(motors, 0.0, np.maximum(_limit(net, last, np.abs(last)) - transient, 0.0))
        columns = _with_taken_over(net, columns, taken)
    scaled = {k: times * v if k.endswith("_a") else v for k, v in columns.items()}
    return FaultCurrent(**scaled), Sustained(reach=times * sustained.reach, duty=times * sustained.duty)


def _with_taken_over(
    net: FaultNetwork, columns: dict[str, FloatArray], taken: FloatArray
) -> dict[str, FloatArray]:
    """Return the columns with one more: from nothing to what is taken over, as fast as motors die away."""
    s = net.sources
    sub = columns["subtransient_a"]
    # Only motors that share an impedance with other sources are replaced at the fault.
    shared = np.where(
        s.asynchronous, sub * (1.0 - np.minimum(sub / s.at_board.current.subtransient_a, 1.0)), 0.0
    )
    rise = _mean(columns["t_sub_s"], shared)
    fall = _mean(columns["t_trans_s"], taken)
    total = np.where(np.isfinite(rise), taken.sum(axis=1), 0.0)
    extra = {
        "subtransient_a": 0.0 * total,
        "transient_a": total,
        "sustained_a": 0.0 * total,
        "dc_a": 0.0 * total,
        "t_sub_s": rise,
        "t_trans_s": fall,
        "t_dc_s": np.full_like(total, np.inf),
    }
    return {k: np.concatenate([v, extra[k][:, None]], axis=1) for k, v in columns.items()}


def _mean(value: FloatArray, weight: FloatArray) -> FloatArray:
    """Return the mean over sources by weight; inf where there is no weight."""
    total = weight.sum(axis=1)
    weighted = np.where(weight > 0.0, value, 0.0) * weight
    infinite = np.full_like(total, np.inf)
    return np.asarray(np.divide(weighted.sum(axis=1), total, out=infinite, where=total > 0.0))


def _at_fault(net: FaultNetwork, stage: Stage, extra: ComplexArray | None) -> ComplexArray:
    """Return the phasors with an impedance at the fault; it lowers all of a place by one factor."""
    if extra is None:
        return stage.current
    z = np.where(stage.fed, stage.z_place, 1.0)
    factor = np.where(stage.fed & np.isfinite(extra), z / (z + np.where(np.isfinite(extra), extra, 0.0)), 0.0)
    return np.asarray(stage.current * factor[:, None])


def _seen(current: ComplexArray, voltage: FloatArray, z: ComplexArray) -> ComplexArray:
    """Return the impedance that each source sees beyond its own; 0 where it gives nothing."""
    gives = np.abs(current) > 0.0
    seen = np.where(gives, voltage / np.where(gives, current, 1.0) - z, 0.0)
    return np.asarray(np.maximum(seen.real, 0.0) + 1j * np.maximum(seen.imag, 0.0))


def _behind(
    net: FaultNetwork, current: ComplexArray, reactance: str, *, everyone: bool
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    """Return T'', T', Tdc and idc(0), [place, source], behind what each source sees."""
    s, hz = net.sources, net.plant.network.plant.project.f_rated_hz
    takes = np.ones(len(s.bus), bool) if everyone else ~s.asynchronous
    board, bare = s.at_board, terminal_source(net)
    out = [np.full(current.shape, np.inf) for _ in range(3)] + [np.zeros(current.shape)]

    def fill(source: Source, i: ComplexArray, where: tuple[NDArray[np.int64], ...] | BoolArray) -> None:
        x = np.where(np.isfinite(getattr(source, reactance)), getattr(source, reactance), 0.0)
        columns = where if isinstance(where, np.ndarray) else where[1]
        seen = _seen(i, s.voltage[columns], source.r_ohm + 1j * x)
        through = through_impedance(source, r_ohm=seen.real, x_ohm=seen.imag, frequency_hz=hz).current
        fall = np.abs(i) / source.current.subtransient_a
        at = (slice(None), where) if isinstance(where, np.ndarray) else where
        for array, value in zip(
            out, (through.t_sub_s, through.t_trans_s, through.t_dc_s, source.current.dc_a * fall), strict=True
        ):
            array[at] = value

    if takes.any():
        fill(pick_source(board, takes), current[:, takes], takes)
    place = np.flatnonzero((net.place_own >= 0) & (net.place_bus >= 0))
    place = place[takes[net.place_own[place]]]
    row = net.place_own[place]
    if len(row):
        fill(pick_source(bare, row), current[place, row], (place, row))
    return out[0], out[1], out[2], out[3]


def _limit(net: FaultNetwork, current: ComplexArray, size: FloatArray) -> FloatArray:
    """Return the currents with those of converter supplies held at their limit, or at what they can drive."""
    s = net.sources
    columns = np.flatnonzero(s.limit > 0.0)
    if not len(columns):
        return size
    out = size.copy()
    for k in columns:
        seen = _seen(current[:, k], s.voltage[k], 1j * s.bare.x_sub_ohm[k])
        held = limited_current_behind_impedance_a(s.limit[k], SQRT3 * s.voltage[k], seen.real, seen.imag)
        out[:, k] = np.where(size[:, k] > 0.0, held, 0.0)
    return out


def _sustained(net: FaultNetwork, stages: Stages, extra: ComplexArray | None) -> Sustained:
    """Return both estimates; a set that feeds its field itself holds where its field can keep the voltage."""
    s = net.sources
    phasors = [_at_fault(net, x, extra) for x in (stages.reach, stages.held_field, stages.held_voltage)]
    reach, field, voltage = (_limit(net, i, np.abs(i)) for i in phasors)
    shunt = s.field_limit > 0.0
    xd = s.bare.r_ohm + 1j * np.where(np.isfinite(s.bare.x_sustained_ohm), s.bare.x_sustained_ohm, 0.0)
    needs = np.abs(s.voltage + xd * phasors[2])
    keeps = np.where(shunt & (needs <= s.field_limit * s.voltage), voltage, 0.0)
    others = np.where(shunt, 0.0, voltage)
    by_field = field.sum(axis=1) <= voltage.sum(axis=1)
    duty = np.where(by_field[:, None], field, others) + keeps
    low = reach.sum(axis=1) <= duty.sum(axis=1)
    return Sustained(reach=np.where(low[:, None], reach + keeps, duty), duty=duty)


def in_amperes(net: FaultNetwork, current: FaultCurrent) -> FaultCurrent:
    """Return currents [place, source] in A at the voltage of their place.

    Parameters
    ----------
    net : FaultNetwork
        Holds the bases.
    current : FaultCurrent
        Per unit.

    Returns
    -------
    FaultCurrent
        [A]
    """
    base = net.plant.base_a[net.plant.place_node][:, None]
    return replace(
        current,
        **{f.name: getattr(current, f.name) * base for f in fields(FaultCurrent) if f.name.endswith("_a")},
    )


def half_cycle(current: FaultCurrent, frequency_hz: float) -> tuple[FloatArray, FloatArray]:
    """Return Iac and idc at T/2 of each source.

    Source: IEC 61363-1:1998, from memory.

    Parameters
    ----------
    current : FaultCurrent
        Any shape.
    frequency_hz : float
        [Hz]

    Returns
    -------
    tuple of ndarray
        r.m.s. and direct component. [A]
    """
    t = 0.5 / frequency_hz
    fast = (current.subtransient_a - current.transient_a) * np.exp(-t / current.t_sub_s)
    slow = (current.transient_a - current.sustained_a) * np.exp(-t / current.t_trans_s)
    return fast + slow + current.sustained_a, current.dc_a * np.exp(-t / current.t_dc_s)
