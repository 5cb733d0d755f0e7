"""What the compiled time simulation reads and fills: flat arrays, and the names of their columns.

Columns are plain integers at module level, so that the compiled code sees constants.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]

# States of a source. Angle [rad], speed, E'q, psi1d, E''d, field; transducer, integral and filtered error of
# the regulator, its trim; integral and filtered error of the governor, rack, dead time, charge air, measured
# kW, trim of the set power. A converter uses angle, speed, e.m.f. (at FLUX) and measured kW.
(
    ANGLE, SPEED, FLUX, DAMPER_D, DAMPER_Q, FIELD, MEASURED, INTEGRAL, FILTERED, KVAR_TRIM,
    GOV_INTEGRAL, GOV_FILTERED, RACK, DELAY, TURBO, POWER, POWER_TRIM,
) = range(17)  # fmt: skip
STATES = 17

# Parameters of a source, per unit of its own rating unless said otherwise. RATING over the network's base;
# OWN_V turns network voltage into own. SUPPLY_* see `formulas.excitation.FieldSupply`.
(
    RATING, OWN_V, XD, XD1, XD2, XQ, XQ2, XL, RA, TD01, TD02, TQ02, SAT_KIND, SAT_A, SAT_B, TWO_H,
    V_REF, XC, Q_SET, Q_PER_P, AVR_P, AVR_I, AVR_D, RATED_FIELD, EXCITER_S, KNEE,
    SUPPLY_C, SUPPLY_V, SUPPLY_I, FIELD_ON, F_REF, DROOP, P_SET, GOV_P, GOV_I, GOV_D, GOV_FILTER_S,
    RACK_S, DEAD_S, ENGINE, STEP, P_RATED, I_MAX, R_SOURCE, X_SOURCE, ON,
) = range(46)  # fmt: skip
PARAMETERS = 46

MACHINE, CONVERTER, SHORE = 0, 1, 2
# How the field is made.
CONSTANT_FIELD, SUPPLY_ALONE, PHASOR, REACTIVE_CURRENT, KVAR = 0, 1, 2, 3, 4
# How the engine is told.
BY_DROOP, ISOCHRONOUS, LOAD_SHARING, SET_POWER = 0, 1, 2, 3

# Parameters of a motor, per unit of its rated input kVA and voltage; Y_SCALE turns its admittance into the
# network's, OWN_MOTOR_V network voltage into its own. CHANGE_S is NaN where the speed decides.
(
    G_SHUNT, B_SHUNT, R_STATOR, R_RUN, R_START, X_RUN, X_START, SLIP_RATED, AIR_GAP, TORQUE_FACTOR,
    MOTOR_2H, LOAD, Y_SCALE, OWN_MOTOR_V, TAP, I_LIMIT, RAMP_S, CHANGE_S, POWER_P, POWER_Q, B_FIXED,
) = range(21)  # fmt: skip
MOTOR_PARAMETERS = 21
DIRECT, STAR_DELTA, AUTOTRANSFORMER, SOFT_STARTER, BY_CONVERTER = 0, 1, 2, 3, 4
CONSTANT_TORQUE, FAN, HYPERBOLIC = 0, 1, 2
# Where a starter stands.
OFF, REDUCED, GAP, FULL = 0, 1, 2, 3

# What happens at a time: kind, and what INDEX, COLUMN and VALUE then mean.
(
    START_MOTOR, OPEN_SOURCE, CLOSE_SOURCE, CHANGE_LOAD, SET_PARAMETER, FAULT_ON, FAULT_OFF, INRUSH,
    STOP_MOTOR,
) = range(9)  # fmt: skip

# What a relay of a set looks at, and what it does.
OVERCURRENT, UNDERVOLTAGE, OVERVOLTAGE, UNDERFREQUENCY, OVERFREQUENCY, REVERSE_POWER, NO_EXCITATION = range(7)
TRIP_SOURCE, SHED_LOAD = 0, 1

# Columns of what is kept of a source and of a motor at every step.
(
    KEPT_U, KEPT_I, KEPT_FIELD, KEPT_CEILING, KEPT_P, KEPT_Q, KEPT_SPEED, KEPT_ENGINE, KEPT_TURNING,
) = range(9)  # fmt: skip
KEPT_SOURCE = 9
KEPT_N, KEPT_MOTOR_U, KEPT_LINE_I, KEPT_TORQUE, KEPT_LOAD_TORQUE = range(5)
KEPT_MOTOR = 5

# How a run ends.
FINISHED, COLLAPSED, BLACKOUT, NO_SOLUTION = 0, 1, 2, 3


class System(NamedTuple):
    """A plant at rest; arrays [node], [source], [motor], [event], [relay], [load state].

    ``y`` [node, node] is the network without what moves, per unit. Loads draw
    ``constant + square |V|^2``; below ``floor`` (of |V|^2) the constant part is an impedance. ``load_a`` and
    ``load_b`` [load state, node] are changes of the two. ``cross`` [source, source] are cross-current
    reactances in network units. Events are sorted by time.
    """

    omega: float
    y: ComplexArray
    constant: ComplexArray
    square: ComplexArray
    floor: FloatArray
    kind: IntArray
    node: IntArray
    regulator: IntArray
    governor: IntArray
    par: FloatArray
    cross: FloatArray
    motor_node: IntArray
    method: IntArray
    law: IntArray
    motor: FloatArray
    event_time: FloatArray
    event_kind: IntArray
    event_index: IntArray
    event_column: IntArray
    event_value: FloatArray
    load_a: ComplexArray
    load_b: ComplexArray
    inrush_node: IntArray
    inrush_y: FloatArray
    inrush_s: FloatArray
    relay_source: IntArray
    relay_looks: IntArray
    relay_at: FloatArray
    relay_delay: FloatArray
    relay_does: IntArray
    relay_index: IntArray


class Start(NamedTuple):
    """Where a run starts: states of sources [source, STATES], motors' speeds and starters, voltages."""

    source: FloatArray
    speed: FloatArray
    stage: IntArray
    v: ComplexArray


class Run(NamedTuple):
    """What is kept of a run, [row, ...]; ``log`` rows are time, kind (-1 relay, -2 starter), index."""

    time: FloatArray
    v: ComplexArray
    source: FloatArray
    motor: FloatArray
    log: FloatArray


class Now(NamedTuple):
    """A plant at one instant, and the space to work in; everything in it is written to."""

    system: System
    par: FloatArray
    constant: ComplexArray
    square: ComplexArray
    shunt: ComplexArray
    source: FloatArray
    speed: FloatArray
    slip: FloatArray
    stage: IntArray
    since: FloatArray
    motor_y: ComplexArray
    current: ComplexArray
    shared: FloatArray
    v: ComplexArray
    right: FloatArray
    factors: FloatArray
    order: IntArray
    flags: IntArray
