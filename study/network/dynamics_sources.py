"""Sources of a mode as the time simulation wants them: parameters, and the states that hold the load flow."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.formulas.excitation import FieldSupply, available_field
from study.formulas.exciters import SLIP_RING_LAG_S
from study.formulas.governor import tuned_gains
from study.formulas.machine_constants import open_circuit_time_constant
from study.formulas.saturation import SaturationCurve, saturation_field
from study.formulas.synchronous import rated_load_field, two_reaction
from study.formulas.winding_times import coupling, largest_leakage, winding_time_constants
from study.model.sources import ConverterSupply, Genset, MachineData
from study.network import dynamics_data as d
from study.network.batch import BatchSolution
from study.network.dynamics_data import Plant
from study.network.machines import machine_of
from study.network.sources import Law, Source, Speed

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]

LARGEST_LEAKAGE = 0.8  # of X''d and X''q: more cannot be
LEAST_TIME_S = 0.002  # a dead time below it is none
CONVERTER_X_PU = 0.10  # filter of a grid-forming converter; common practice, no source
STIFF_X_PU = 1e-3  # behind a shore supply without a fault level
_REGULATORS = {
    Law.PHASOR: d.PHASOR,
    Law.CROSS_CURRENT: d.CROSS_CURRENT,
    Law.REACTIVE_CURRENT: d.REACTIVE_CURRENT,
    Law.REACTIVE_POWER: d.KVAR,
}
_GOVERNORS = {
    Speed.DROOP: d.BY_DROOP,
    Speed.ISOCHRONOUS: d.ISOCHRONOUS,
    Speed.LOAD_SHARING: d.LOAD_SHARING,
    Speed.FIXED: d.SET_POWER,
    Speed.SHORE: d.BY_DROOP,
}
_SATURATIONS = {"none": 0.0, "quadratic": 1.0, "exponential": 2.0}


@dataclass(frozen=True, slots=True, kw_only=True)
class SourceRows:
    """Sources that hold a voltage: ``place`` [row] in the mode, ``table`` [row, column] of `dynamics_data`.

    Their nodes are yet to be filled in.
    """

    place: IntArray
    table: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Operating:
    """Where a source stands, per unit of its own rating; ``f_pu`` is the frequency."""

    v: complex
    i: complex
    f_pu: float


def source_rows(batch: BatchSolution, island: int) -> SourceRows:
    """Return the sources of an island with the states that hold its load flow.

    Parameters
    ----------
    batch : BatchSolution
        The mode solved; the first scenario is taken.
    island : int
        Which island.

    Returns
    -------
    SourceRows
        Converters that follow the grid are none: see `following`.
    """
    at = batch.at
    rows = [j for j, s in enumerate(at.sources) if s.island == island and not _follows(s)]
    table = np.zeros((len(rows), d.SOURCE_COLUMNS))
    groups = sorted({s.cross_group for s in at.sources})
    for n, j in enumerate(rows):
        s = at.sources[j]
        to_v, to_i = float(batch.laws.to_own_v[j, 0]), float(batch.laws.to_own_i[j, 0])
        bus = at.structure.source_bus[j]
        point = Operating(
            v=complex(batch.v_bus_pu[0, bus]) * to_v,
            i=complex(batch.i_source_pu[0, j]) * to_i,
            f_pu=float(batch.frequency_pu[0, island]),
        )
        p = table[n]
        p[d.ON], p[d.OWN_V], p[d.RATING] = 1.0, to_v, s.s_rated_kva / at.network.s_base_kva
        if s.law == Law.CROSS_CURRENT:
            p[d.GROUP] = 1.0 + groups.index(s.cross_group)
        p[d.GOVERNOR] = _GOVERNORS[s.speed]
        _fill_common(s, point, p)
        if s.machine is not None:
            item = at.network.plant.genset(s.name)
            p[d.KIND] = d.MACHINE
            fill_machine(item, at.network.plant.project.f_rated_hz, p)
            fill_rotor(point, p)
            p[d.REGULATOR] = _fill_excitation(item, s, point, p)
            _fill_rack(point, p)
        else:
            p[d.KIND] = d.SHORE if s.kind == "shore supply" else d.CONVERTER
            p[d.REGULATOR] = d.PHASOR
            _fill_behind(_overload(at.network.plant.converter_supplies, s.name), s, point, p)
    return SourceRows(place=np.array(rows, np.int64), table=table)


def _follows(s: Source) -> bool:
    return s.kind == "converter supply" and s.law == Law.REACTIVE_POWER


def following(batch: BatchSolution, island: int) -> tuple[IntArray, ComplexArray]:
    """Return buses and power [pu of the network] of the converters that follow the grid at a set power.

    Parameters
    ----------
    batch : BatchSolution
        The mode solved; the first scenario is taken.
    island : int
        Which island.

    Returns
    -------
    tuple of ndarray
        Bus and P + jQ given, [converter].
    """
    at = batch.at
    rows = [j for j, s in enumerate(at.sources) if s.island == island and _follows(s)]
    power = (batch.source_p_kw[0, rows] + 1j * batch.source_q_kvar[0, rows]) / at.network.s_base_kva
    return at.structure.source_bus[rows], np.asarray(power, complex)


def _fill_common(s: Source, point: Operating, p: FloatArray) -> None:
    """Fill what every source has: settings of voltage and speed, and its measured power."""
    p[d.P_RATED] = s.p_rated_kw / s.s_rated_kva
    p[d.V_REF], p[d.XC] = s.v_ref_pu, s.xc_pu
    p[d.DROOP], p[d.F_REF] = s.speed_droop_pu, s.f_no_load_pu
    p[d.POWER] = (point.v * point.i.conjugate()).real / p[d.P_RATED]
    p[d.SPEED] = point.f_pu
    p[d.ANGLE] = float(np.angle(point.v))
    if s.speed == Speed.FIXED:
        p[d.P_SET] = p[d.POWER]
        p[d.F_REF] = point.f_pu + s.speed_droop_pu * p[d.POWER]
    elif s.speed in (Speed.ISOCHRONOUS, Speed.LOAD_SHARING):
        p[d.F_REF], p[d.DROOP] = point.f_pu, 0.0


def fill_machine(item: Genset, f_rated_hz: float, p: FloatArray) -> None:
    """Fill the constants of a set: machine, regulator's gains, governor.

    Parameters
    ----------
    item : Genset
        The set.
    f_rated_hz : float
        Rated frequency. [Hz]
    p : ndarray, shape (SOURCE_COLUMNS,)
        A row of sources; is written to. RATING and OWN_V stay.
    """
    m, e, g = item.machine, item.excitation, item.governor
    curve = machine_of(item).saturation
    p[d.XD], p[d.XD1], p[d.XD2] = m.x_d_pu, m.x_d1_pu, m.x_d2_pu
    p[d.XQ2] = m.x_q2_pu
    p[d.XQ] = max(m.x_q_pu, m.x_q2_pu)
    t_d02, p[d.TQ02] = subtransient_times(m)
    p[d.XL], p[d.RA] = _leakage(m, t_d02), m.r_stator_pu
    c = coupling(m.x_d_pu, m.x_d1_pu, m.x_d2_pu, p[d.XL])
    p[d.TD01], p[d.TD02] = winding_time_constants(c, m.t_d01_s, t_d02)
    p[d.SAT_KIND], p[d.SAT_A], p[d.SAT_B] = _SATURATIONS[curve.kind], curve.a, curve.b
    p[d.TWO_H] = 2.0 * m.inertia_s
    p[d.EXCITER_S] = e.exciter_time_constant_s or SLIP_RING_LAG_S
    p[d.AVR_P], p[d.AVR_I], p[d.AVR_D] = e.gain, e.integral_per_s, e.derivative_s
    p[d.KNEE] = (e.v_per_hz_knee_hz or 0.0) / f_rated_hz
    p[d.FIELD_ON] = 1.0
    p[d.P_RATED] = item.p_rated_kw / item.s_rated_kva
    p[d.ENGINE] = item.p_engine_kw * item.alternator_efficiency / item.p_rated_kw
    p[d.STEP] = item.max_load_step
    p[d.RACK_S] = max(g.time_constant_s, LEAST_TIME_S)
    p[d.DEAD_S] = g.dead_time_s if g.dead_time_s > LEAST_TIME_S else 0.0
    gains = tuned_gains(m.inertia_s / p[d.P_RATED], p[d.RACK_S], p[d.DEAD_S])
    p[d.GOV_P], p[d.GOV_I], p[d.GOV_D] = gains.proportional, gains.integral_per_s, gains.derivative_s
    p[d.GOV_FILTER_S] = gains.filter_s


def _leakage(m: MachineData, t_d02_s: float) -> float:
    """Return the leakage reactance, not more than what X''d and the time constants leave; it acts little."""
    most = largest_leakage(m.x_d_pu, m.x_d1_pu, m.x_d2_pu, m.t_d01_s, t_d02_s)
    return min(m.x_l_pu, LARGEST_LEAKAGE * min(m.x_d2_pu, m.x_q2_pu), 0.95 * most)


def subtransient_times(m: MachineData) -> tuple[float, float]:
    """Return T''d0 and T''q0 from the short-circuit time constants of a machine [s]."""
    direct = float(open_circuit_time_constant(m.t_d2_s, m.x_d2_pu, m.x_d1_pu))
    return direct, m.t_q2_s * max(m.x_q_pu, m.x_q2_pu) / m.x_q2_pu


def fill_rotor(point: Operating, p: FloatArray) -> None:
    """Fill angle, fluxes and field that hold a voltage and a current at a speed.

    Source: steady state of the machine model, with speed as a factor on the voltages.

    Parameters
    ----------
    point : Operating
        Voltage, current, speed.
    p : ndarray, shape (SOURCE_COLUMNS,)
        A row of sources with its parameters; its states are written to.
    """
    w, phi = point.f_pu, float(np.angle(point.v * point.i.conjugate()))
    axes = two_reaction(abs(point.v), abs(point.i), phi, p[d.XD] * w, p[d.XQ] * w, ra_pu=p[d.RA])
    i_d, i_q, e = float(axes.id_pu), float(axes.iq_pu), float(axes.e_pu) / w
    p[d.ANGLE] = float(np.angle(point.v)) + float(axes.delta_rad)
    p[d.FLUX] = e - (p[d.XD] - p[d.XD1]) * i_d
    p[d.DAMPER_D] = p[d.FLUX] - (p[d.XD1] - p[d.XL]) * i_d
    p[d.DAMPER_Q] = (p[d.XQ] - p[d.XQ2]) * i_q
    p[d.SPEED] = w
    p[d.FIELD] = e + float(saturation_field(p[d.FLUX], curve_of(p)))


def set_alone(item: Genset, supply: FieldSupply, f_rated_hz: float, residual_pu: float) -> Plant:
    """Return a set at rated speed on a board of its own, without load and without field but for the residual.

    Parameters
    ----------
    item : Genset
        The set.
    supply : FieldSupply
        The most that its field supply gives.
    f_rated_hz : float
        Rated frequency. [Hz]
    residual_pu : float
        Voltage of the residual magnetism. [pu of rated]

    Returns
    -------
    Plant
        With one node, per unit of the set's own rating.
    """
    p = np.zeros(d.SOURCE_COLUMNS)
    p[d.ON] = p[d.OWN_V] = p[d.RATING] = p[d.SPEED] = p[d.F_REF] = 1.0
    fill_machine(item, f_rated_hz, p)
    _fill_supply(supply, p)
    p[d.RATED_FIELD] = rated_load_field(item.cos_phi_rated, machine_of(item))
    p[d.GOVERNOR], p[d.V_REF] = d.ISOCHRONOUS, item.regulator.no_load_voltage_pu
    without = item.excitation.field_supply in ("fixed", "compounded without regulator")
    p[d.REGULATOR] = d.SUPPLY_ALONE if without else d.PHASOR
    p[d.FLUX] = p[d.DAMPER_D] = p[d.MEASURED] = residual_pu
    p[d.FILTERED] = p[d.V_REF] - residual_pu
    node, single = np.zeros((1, d.NODE_COLUMNS)), np.zeros(d.SINGLE_COLUMNS)
    node[0, d.V_RE], single[d.OMEGA] = residual_pu, 2.0 * np.pi * f_rated_hz
    single[d.DEAD_TIME] = -np.inf  # a low voltage is no end here
    return Plant(
        source=p[np.newaxis],
        motor=np.zeros((0, d.MOTOR_COLUMNS)),
        node=node,
        y=np.zeros((1, 1), complex),
        work=np.zeros((2, 3)),
        order=np.zeros(2, np.int64),
        single=single,
    )


def curve_of(p: FloatArray) -> SaturationCurve:
    """Return the saturation curve that parameters hold."""
    kind = {v: k for k, v in _SATURATIONS.items()}[float(p[d.SAT_KIND])]
    return SaturationCurve(kind=kind, a=float(p[d.SAT_A]), b=float(p[d.SAT_B]))  # type: ignore[arg-type]


def _fill_excitation(item: Genset, s: Source, point: Operating, p: FloatArray) -> int:
    """Fill supply and regulator; return how the field is made."""
    field = float(p[d.FIELD])
    p[d.RATED_FIELD] = s.rated_field_pu
    if s.law == Law.FIELD:
        if item.excitation.field_supply == "compounded without regulator":
            _fill_supply(s.field, p)
            given = float(
                available_field(abs(point.v), abs(point.i), np.angle(point.v * point.i.conjugate()), s.field)
            )
            # The load flow knows no speed: the supply is taken as set for this voltage at this speed.
            p[d.SUPPLY_C : d.SUPPLY_I + 1] *= field / given
            return d.SUPPLY_ALONE
        p[d.SUPPLY_C] = field
        return d.CONSTANT_FIELD
    _fill_supply(s.ceiling, p)
    seen = abs(point.v + 1j * p[d.XC] * point.i)
    if s.law == Law.REACTIVE_CURRENT:
        reactive = (point.v * point.i.conjugate()).imag
        seen = abs(point.v) + p[d.XC] * reactive / abs(point.v)
    elif s.law == Law.CROSS_CURRENT:
        seen = s.v_ref_pu
    elif s.law == Law.REACTIVE_POWER:
        p[d.V_REF], p[d.Q_SET], p[d.Q_PER_P] = seen, s.q_set_pu, s.q_per_p
    p[d.MEASURED], p[d.INTEGRAL] = seen, field / s.rated_field_pu
    p[d.FILTERED] = p[d.V_REF] - seen
    return _REGULATORS[s.law]


def _fill_supply(supply: FieldSupply, p: FloatArray) -> None:
    p[d.SUPPLY_C], p[d.SUPPLY_V] = supply.constant_pu, supply.voltage_gain
    p[d.SUPPLY_I] = supply.current_gain


def _fill_rack(point: Operating, p: FloatArray) -> None:
    """Fill the governor's states: the rack gives what the machine takes."""
    active = (point.v * point.i.conjugate()).real + p[d.RA] * abs(point.i) ** 2
    rack = active / point.f_pu / p[d.P_RATED]
    for state in (d.RACK, d.DELAY, d.TURBO, d.GOV_INTEGRAL):
        p[state] = rack
    p[d.GOV_FILTERED] = 0.0


def _overload(supplies: tuple[ConverterSupply, ...], name: str) -> float:
    """Return the largest current of a converter for a short time; infinite for what is no converter."""
    for item in supplies:
        if item.name == name:
            return max(1.0, item.short_circuit_current or 1.0)
    return float("inf")


def _fill_behind(i_max: float, s: Source, point: Operating, p: FloatArray) -> None:
    """Fill a source without a machine: an e.m.f. behind its impedance."""
    if s.kind == "shore supply":
        p[d.R_SOURCE], p[d.X_SOURCE] = s.r_pu, s.xc_pu
        if s.r_pu == 0.0 and s.xc_pu == 0.0:
            p[d.X_SOURCE] = STIFF_X_PU
    else:
        p[d.X_SOURCE] = CONVERTER_X_PU
        p[d.I_MAX] = i_max
    emf = point.v + complex(p[d.R_SOURCE], p[d.X_SOURCE]) * point.i
    p[d.FLUX], p[d.ANGLE] = abs(emf), float(np.angle(emf))
