"""What the compiled time simulation reads and writes: a few flat arrays, and the names of their columns.

Columns are plain integers at module level, so that the compiled code sees constants; few arrays, because
every one that is passed on costs compiling time. Whole numbers (kinds, nodes) are kept as floats beside the
rest.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]

# A source: parameters per unit of its own rating. RATING over the network's base; OWN_V turns network voltage
# into own. SUPPLY_* see `formulas.excitation.FieldSupply`. ON is 0 when its breaker is open. GROUP numbers
# the
# cross-current groups from 1; 0 is none.
(
    RATING, OWN_V, XD, XD1, XD2, XQ, XQ2, XL, RA, TD01, TD02, TQ02, SAT_KIND, SAT_A, SAT_B, TWO_H,
    V_REF, XC, Q_SET, Q_PER_P, AVR_P, AVR_I, AVR_D, RATED_FIELD, EXCITER_S, KNEE,
    SUPPLY_C, SUPPLY_V, SUPPLY_I, FIELD_ON, F_REF, DROOP, P_SET, GOV_P, GOV_I, GOV_D, GOV_FILTER_S,
    RACK_S, DEAD_S, ENGINE, STEP, P_RATED, I_MAX, R_SOURCE, X_SOURCE, ON, KIND, NODE, REGULATOR, GOVERNOR,
    GROUP,
) = range(51)  # fmt: skip
# Its states. Angle [rad], speed, E'q, psi1d, E''d, field; transducer, integral and filtered error of the
# regulator, its trim; integral and filtered error of the governor, rack, dead time, charge air, measured kW,
# trim of the set power. A converter uses angle, speed, e.m.f. (at FLUX) and measured kW.
FIRST_STATE, STATES = 51, 17
(
    ANGLE, SPEED, FLUX, DAMPER_D, DAMPER_Q, FIELD, MEASURED, INTEGRAL, FILTERED, KVAR_TRIM,
    GOV_INTEGRAL, GOV_FILTERED, RACK, DELAY, TURBO, POWER, POWER_TRIM,
) = range(FIRST_STATE, FIRST_STATE + STATES)  # fmt: skip
# Of each state: the derivative, the value at the start of a step, the weighted sum over the step.
RATE, ORIGIN, TOTAL = STATES, 2 * STATES, 3 * STATES
# What follows from them: the current in network units as I0 - M V, and axis currents and voltages.
(
    I0_RE, I0_IM, M_RR, M_RI, M_IR, M_II, I_RE, I_IM, SINE, COSINE, I_D, I_Q, V_D, V_Q,
) = range(FIRST_STATE + 4 * STATES, FIRST_STATE + 4 * STATES + 14)  # fmt: skip
SOURCE_COLUMNS = FIRST_STATE + 4 * STATES + 14

MACHINE, CONVERTER, SHORE = 0, 1, 2
# How the field is made.
CONSTANT_FIELD, SUPPLY_ALONE, PHASOR, REACTIVE_CURRENT, KVAR, CROSS_CURRENT = 0, 1, 2, 3, 4, 5
# How the engine is told.
BY_DROOP, ISOCHRONOUS, LOAD_SHARING, SET_POWER = 0, 1, 2, 3

# A motor: parameters per unit of its rated input kVA and voltage; Y_SCALE turns its admittance into the
# network's, OWN_MOTOR_V network voltage into its own. CHANGE_S is NaN where the speed decides.
(
    G_SHUNT, B_SHUNT, R_STATOR, R_RUN, R_START, X_RUN, X_START, SLIP_RATED, AIR_GAP, TORQUE_FACTOR,
    MOTOR_2H, LOAD, Y_SCALE, OWN_MOTOR_V, TAP, I_LIMIT, RAMP_S, CHANGE_S, POWER_P, POWER_Q, B_FIXED,
    MOTOR_NODE, METHOD, LAW,
) = range(24)  # fmt: skip
# Its speed with rate, origin and total; and what follows: slip, starter, time since the start, admittance
# G - jB with what the starter does to it, torques over rated torque.
(
    TURNING, TURNING_RATE, TURNING_ORIGIN, TURNING_TOTAL, SLIP, STAGE, SINCE, STARTED, GAP_UNTIL,
    MOTOR_G, MOTOR_B, WINDING, TORQUE, AGAINST,
) = range(24, 38)  # fmt: skip
MOTOR_COLUMNS = 38
DIRECT, STAR_DELTA, AUTOTRANSFORMER, SOFT_STARTER, BY_CONVERTER = 0, 1, 2, 3, 4
CONSTANT_TORQUE, FAN, HYPERBOLIC = 0, 1, 2
# Where a starter stands.
OFF, REDUCED, GAP, FULL = 0, 1, 2, 3

# A node: voltage; load ``A + B |V|^2`` whose constant part is an impedance below FLOOR (of |V|^2); shunt.
V_RE, V_IM, A_RE, A_IM, B_RE, B_IM, SHUNT_G, SHUNT_B, FLOOR = range(9)
NODE_COLUMNS = 9

# One number each: rated angular frequency, mean load on the sharing lines, speed of the island, whether the
# factors serve, how often they were made, for how long the network has been dead.
OMEGA, SHARED, ISLAND_SPEED, HAS_FACTORS, FACTORED, DEAD_TIME = range(6)
SINGLE_COLUMNS = 6

# An event: time, kind, and what index, column and value then mean.
EVENT_TIME, EVENT_KIND, EVENT_INDEX, EVENT_COLUMN, EVENT_VALUE = range(5)
EVENT_COLUMNS = 5
(
    START_MOTOR, OPEN_SOURCE, CLOSE_SOURCE, CHANGE_LOAD, SET_PARAMETER, FAULT_ON, FAULT_OFF, INRUSH,
    STOP_MOTOR,
) = range(9)  # fmt: skip

# A relay of a set: the set, what it looks at, setting, delay, what it does and to which state of load, timer.
(
    RELAY_SOURCE, RELAY_LOOKS, RELAY_SETTING, RELAY_DELAY, RELAY_DOES, RELAY_INDEX, RELAY_TIMER,
) = range(7)  # fmt: skip
RELAY_COLUMNS = 7
OVERCURRENT, UNDERVOLTAGE, OVERVOLTAGE, UNDERFREQUENCY, OVERFREQUENCY, REVERSE_POWER, NO_EXCITATION = range(7)
TRIP_SOURCE, SHED_LOAD = 0, 1

# A transformer that is energised: node, susceptance at first, decay, and when (infinite: not yet).
INRUSH_NODE, INRUSH_Y, INRUSH_S, INRUSH_AT = range(4)
INRUSH_COLUMNS = 4

# What is kept of a source and of a motor at every step.
(
    KEPT_U, KEPT_I, KEPT_FIELD, KEPT_CEILING, KEPT_P, KEPT_Q, KEPT_SPEED, KEPT_ENGINE, KEPT_ON,
) = range(9)  # fmt: skip
KEPT_SOURCE = 9
KEPT_TURNING, KEPT_MOTOR_U, KEPT_LINE_I, KEPT_TORQUE, KEPT_AGAINST = range(5)
KEPT_MOTOR = 5

# How a run ends.
FINISHED, COLLAPSED, BLACKOUT, NO_SOLUTION = 0, 1, 2, 3
# What a row of the log says of: an event, a relay, a starter.
EVENT_LOG, RELAY_LOG, STARTER_LOG = 0, 1, 2


class Plant(NamedTuple):
    """A plant at one instant; everything in it is written to while it is followed.

    ``source`` [source, column], ``motor`` [motor, column], ``node`` [node, column]; ``y`` [node, node] is the
    network without what moves, per unit. ``work`` [2 node, 2 node + 1] holds factors and a right-hand side,
    ``order`` [2 node] row exchanges.
    """

    source: FloatArray
    motor: FloatArray
    node: FloatArray
    y: ComplexArray
    work: FloatArray
    order: IntArray
    single: FloatArray


class Script(NamedTuple):
    """What happens to a plant: events sorted by time, relays, transformers, and changes of load.

    ``load`` [state, 4, node] are changes of A (real, imaginary) and of B.
    """

    event: FloatArray
    relay: FloatArray
    inrush: FloatArray
    load: FloatArray


class Kept(NamedTuple):
    """What is kept of a run, [row, ...]: written to; ``log`` rows are time, what, which."""

    time: FloatArray
    v: FloatArray
    source: FloatArray
    motor: FloatArray
    log: FloatArray
