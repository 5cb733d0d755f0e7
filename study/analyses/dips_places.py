"""Where motors hang on a mode's network, what each is at standstill and at speed, which board is judged."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from study.formulas.induction import line_starting_current, rated_current
from study.model.loads import Load, MotorData
from study.network.dynamics_build import place_of
from study.network.dynamics_motors import Drive
from study.network.network import ModeNetwork
from study.results.arrays import ComplexArray, FloatArray, IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class MotorPlaces:
    """Motors that start on the network of a mode, arrays [motor], per unit of the network's base.

    ``load`` are places in the workbook, ``bus`` the bus that the motor or its own run hangs on, ``z_path``
    that run. ``y_start`` and ``y_run`` are one unit at its terminals at standstill, as its starter shows it,
    and at rated speed; ``own_v`` turns network voltage into its own. ``torque`` is what the starter leaves at
    rated voltage, over rated torque; ``i_line_a`` and ``cos_phi`` the line current there.
    """

    load: IntArray
    bus: IntArray
    z_path: ComplexArray
    y_start: ComplexArray
    y_run: ComplexArray
    own_v: FloatArray
    torque: FloatArray
    u_rated_v: FloatArray
    methods: tuple[str, ...]
    i_line_a: FloatArray
    cos_phi: FloatArray
    island: IntArray


def motor_places(at: ModeNetwork) -> MotorPlaces:
    """Return the motors of a mode that draw a starting current from the network.

    Parameters
    ----------
    at : ModeNetwork
        The mode.

    Returns
    -------
    MotorPlaces
        Motors whose board is live, not fed by converters.
    """
    loads, s_base = at.network.plant.loads, at.network.s_base_kva
    index = [
        n
        for n, x in enumerate(loads)
        if x.motor is not None and x.motor.starting_method != "converter" and at.load_bus[n] >= 0
    ]
    chosen = [loads[n] for n in index]
    places = [place_of(at, Drive(load=x, units=1.0, load_pu=1.0)) for x in chosen]
    own_v = np.asarray(at.load_arrays.v_scale[index], float)
    starts = [start_by_method(_motor(x)) for x in chosen]
    times, cos_phi = np.array([s.times for s in starts]), np.array([s.cos_phi for s in starts])
    run_phi = np.arccos([x.cos_phi for x in chosen])
    input_pu = np.array([x.p_rated_kw / (x.efficiency * x.cos_phi) for x in chosen]) / s_base * own_v**2
    rated_a = [rated_current(x.p_rated_kw, x.u_rated_v, x.efficiency, x.cos_phi, x.phases) for x in chosen]
    node = np.array(at.view.load_node, np.int64)[index]
    return MotorPlaces(
        load=np.array(index, np.int64),
        bus=np.array([bus for bus, _ in places], np.int64),
        z_path=np.array([z for _, z in places], complex),
        y_start=input_pu * times * np.exp(-1j * np.arccos(cos_phi)),
        y_run=input_pu * np.exp(-1j * run_phi),
        own_v=own_v,
        torque=np.array(
            [s.torque * _motor(x).locked_rotor_torque for s, x in zip(starts, chosen, strict=True)]
        ),
        u_rated_v=np.array([x.u_rated_v for x in chosen], float),
        methods=tuple(_motor(x).starting_method for x in chosen),
        i_line_a=times * np.array(rated_a, float),
        cos_phi=cos_phi,
        island=np.array(at.view.island, np.int64)[node],
    )


def _motor(load: Load) -> MotorData:
    assert load.motor is not None
    return load.motor


@dataclass(frozen=True, slots=True, kw_only=True)
class Start:
    """Line current over rated current, its power factor, and the share of torque left."""

    times: float
    cos_phi: float
    torque: float


def start_by_method(motor: MotorData) -> Start:
    """Return what the network carries at the start of a motor by its own method.

    Star-delta: a third; autotransformer: a^2; a soft starter passes its limit at k times the voltage, whose
    active part is k^2 of that direct on line, so that its power factor is k times.
    """
    direct, method = motor.starting_current, motor.starting_method
    assert method != "converter"
    times = line_starting_current(
        method, direct, tap=motor.autotransformer_tap, current_limit=motor.soft_starter_current
    )
    k = times / direct
    if method == "soft starter":
        return Start(times=times, cos_phi=k * motor.starting_cos_phi, torque=k * k)
    return Start(times=times, cos_phi=motor.starting_cos_phi, torque=k)


def judged_board(at: ModeNetwork, island: int) -> int:
    """Return the board of the largest set of an island, or of its largest source: where dips are judged."""
    here = [s for s in at.sources if s.island == island]
    sets = [s for s in here if s.machine is not None] or here
    largest = max(sets, key=lambda s: s.s_rated_kva)
    names = [b.name for b in at.network.plant.boards]
    return names.index(at.network.topology.nodes[largest.node].board)
