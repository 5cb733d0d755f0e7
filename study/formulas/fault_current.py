"""A short-circuit current as exponentials: its a.c. and d.c. components, peaks and I²t at any instant.

Every source keeps its own exponentials, so that sources with unlike decay can be added at any instant.
Arrays broadcast: the usual shape is sources x places, with times on a further axis.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

SQRT2 = math.sqrt(2.0)
SQRT3 = math.sqrt(3.0)

# Grid for the search of the greatest peak: steps in half a cycle, then each pass narrows eightfold.
_COARSE_STEPS = 48
_PASSES = 4


def as_float(value: ArrayLike) -> FloatArray:
    """Return the value as an array of floats.

    Parameters
    ----------
    value : array_like
        Any shape, any unit.

    Returns
    -------
    FloatArray
        Same shape and unit.
    """
    return np.asarray(value, dtype=float)


def read_only_arrays(values: dict[str, ArrayLike]) -> dict[str, FloatArray]:
    """Return read-only float copies of named values, broadcast to one shape.

    Parameters
    ----------
    values : dict of str to array_like
        Shapes that broadcast.

    Returns
    -------
    dict of str to FloatArray
        The same names.

    Raises
    ------
    ValueError
        Shapes that do not broadcast.
    """
    arrays = np.broadcast_arrays(*(as_float(value) for value in values.values()))
    copies = {name: np.array(array) for name, array in zip(values, arrays, strict=True)}
    for array in copies.values():
        array.flags.writeable = False
    return copies


@dataclass(frozen=True, slots=True, kw_only=True)
class FaultCurrent:
    """Short-circuit current of one or many sources as exponentials; all fields have one shape.

    Attributes
    ----------
    subtransient_a : FloatArray
        Initial symmetrical current I'', r.m.s. [A].
    transient_a : FloatArray
        Transient current I', r.m.s. [A]; 0 for an asynchronous motor.
    sustained_a : FloatArray
        Sustained current Ik, r.m.s. [A].
    dc_a : FloatArray
        Direct component at t = 0 [A].
    t_sub_s, t_trans_s, t_dc_s : FloatArray
        Time constants T'', T', Tdc [s]; ``inf`` means no decay.
    """

    subtransient_a: FloatArray
    transient_a: FloatArray
    sustained_a: FloatArray
    dc_a: FloatArray
    t_sub_s: FloatArray
    t_trans_s: FloatArray
    t_dc_s: FloatArray

    def __post_init__(self) -> None:
        """Give all fields one shape, make them read-only and refuse values that cannot be."""
        arrays = read_only_arrays({field.name: getattr(self, field.name) for field in fields(self)})
        for name, array in arrays.items():
            if name.endswith("_a") and not (np.isfinite(array) & (array >= 0.0)).all():
                raise ValueError(f"{name} holds a current below 0 A or not a number")
            if name.endswith("_s") and not (array > 0.0).all():
                raise ValueError(f"{name} holds a time constant that is not above 0 s")
            object.__setattr__(self, name, array)


def with_time_axis(current: FaultCurrent) -> FaultCurrent:
    """Return the current with a last axis of length one, against which an array of times broadcasts.

    Parameters
    ----------
    current : FaultCurrent
        Any shape, for example sources x places.

    Returns
    -------
    FaultCurrent
        One axis more, for example sources x places x 1.
    """
    return FaultCurrent(**{field.name: getattr(current, field.name)[..., None] for field in fields(current)})


def ac_component_a(current: FaultCurrent, time_s: ArrayLike) -> FloatArray:
    """Return Iac(t) = (I'' - I') e^(-t/T'') + (I' - Ik) e^(-t/T') + Ik.

    Source: IEC 61363-1:1998, from memory; the same terms in Glover, Sarma and Overbye, Power System Analysis
    and Design, example 7.2.

    Parameters
    ----------
    current : FaultCurrent
        Any shape.
    time_s : array_like
        Time from the start of the fault, broadcast against the current [s].

    Returns
    -------
    FloatArray
        Symmetrical current, r.m.s. [A].

    Examples
    --------
    >>> current = FaultCurrent(subtransient_a=7.0, transient_a=4.375, sustained_a=0.9545, dc_a=9.9,
    ...                        t_sub_s=0.035, t_trans_s=2.0, t_dc_s=0.2)
    >>> round(float(ac_component_a(current, 0.05)), 3)
    4.92
    """
    time = as_float(time_s)
    fast = (current.subtransient_a - current.transient_a) * np.exp(-time / current.t_sub_s)
    slow = (current.transient_a - current.sustained_a) * np.exp(-time / current.t_trans_s)
    return as_float(fast + slow + current.sustained_a)


def dc_component_a(current: FaultCurrent, time_s: ArrayLike) -> FloatArray:
    """Return idc(t) = idc(0) e^(-t/Tdc), for the worst angle of the voltage at the start of the fault.

    Source: IEC 61363-1:1998, from memory; Glover, Sarma and Overbye, example 7.2.

    Parameters
    ----------
    current : FaultCurrent
        Any shape.
    time_s : array_like
        Time from the start of the fault, broadcast against the current [s].

    Returns
    -------
    FloatArray
        Direct component [A].
    """
    return as_float(current.dc_a * np.exp(-as_float(time_s) / current.t_dc_s))


def asymmetrical_rms_a(current: FaultCurrent, time_s: ArrayLike) -> FloatArray:
    """Return the r.m.s. value with the direct component, sqrt(Iac(t)² + idc(t)²).

    Source: Glover, Sarma and Overbye, Power System Analysis and Design, example 7.2.

    Parameters
    ----------
    current : FaultCurrent
        Any shape.
    time_s : array_like
        Broadcast against the current [s].

    Returns
    -------
    FloatArray
        [A]
    """
    return as_float(np.hypot(ac_component_a(current, time_s), dc_component_a(current, time_s)))


def half_cycle_peak_a(current: FaultCurrent, frequency_hz: float) -> FloatArray:
    """Return ip = sqrt2 Iac(T/2) + idc(T/2); peaks of several sources add arithmetically.

    Source: IEC 61363-1:1998, from memory.

    Parameters
    ----------
    current : FaultCurrent
        Any shape.
    frequency_hz : float
        [Hz]

    Returns
    -------
    FloatArray
        One peak for each current [A].

    Examples
    --------
    >>> current = FaultCurrent(subtransient_a=1000.0, transient_a=1000.0, sustained_a=1000.0, dc_a=1414.2,
    ...                        t_sub_s=0.01, t_trans_s=0.1, t_dc_s=float("inf"))
    >>> round(float(half_cycle_peak_a(current, 60.0)))
    2828
    """
    half_cycle = 0.5 / frequency_hz
    return as_float(SQRT2 * ac_component_a(current, half_cycle) + dc_component_a(current, half_cycle))


def _envelope_a(
    current: FaultCurrent, angle_rad: FloatArray, frequency_hz: float, sum_sources: bool
) -> FloatArray:
    """Return the greatest instantaneous current at each angle w t, over all angles of the voltage."""
    time_s = angle_rad / (2.0 * math.pi * frequency_hz)
    ac, dc = ac_component_a(current, time_s), dc_component_a(current, time_s)
    if sum_sources:
        ac, dc = ac.sum(axis=0), dc.sum(axis=0)
    return as_float(np.abs(SQRT2 * ac * np.exp(1j * angle_rad) - dc))


def greatest_peak_a(current: FaultCurrent, frequency_hz: float, *, sum_sources: bool) -> FloatArray:
    """Return the greatest instantaneous current over all times and all angles of the voltage.

    At time t the worst angle gives abs(sqrt2 Iac(t) e^(jwt) - idc(t)). Its maximum comes shortly before T/2
    and is never below `half_cycle_peak_a`; the difference grows with R/X.

    Source: follows from the components of IEC 61363-1:1998, which itself reads the peak at T/2.

    Parameters
    ----------
    current : FaultCurrent
        Sources on the first axis where they are to be added.
    frequency_hz : float
        [Hz]
    sum_sources : bool
        Add the components over the first axis before the maximum is sought.

    Returns
    -------
    FloatArray
        The shape of the current, without its first axis where sources are added [A].

    Examples
    --------
    >>> current = FaultCurrent(subtransient_a=1000.0, transient_a=1000.0, sustained_a=1000.0, dc_a=1414.21,
    ...                        t_sub_s=0.01, t_trans_s=0.1, t_dc_s=0.005)
    >>> round(float(half_cycle_peak_a(current, 60.0))), round(float(
    ...     greatest_peak_a(current, 60.0, sum_sources=False)))
    (1681, 1730)
    """
    expanded = with_time_axis(current)
    step = math.pi / _COARSE_STEPS
    angle = as_float(np.arange(1, _COARSE_STEPS + 1) * step)
    value = _envelope_a(expanded, angle, frequency_hz, sum_sources)
    best = as_float(angle[np.argmax(value, axis=-1)])
    for _ in range(_PASSES):
        angle = np.clip(best[..., None] + np.linspace(-step, step, 17), 0.0, math.pi)
        value = _envelope_a(expanded, angle, frequency_hz, sum_sources)
        index = np.argmax(value, axis=-1)[..., None]
        best = np.take_along_axis(angle, index, axis=-1)[..., 0]
        step /= 8.0
    return as_float(value.max(axis=-1))


def _integral_s(rate: FloatArray, duration_s: FloatArray) -> FloatArray:
    """Return the integral of e^(-rate t) from 0 to the duration."""
    safe = np.where(rate > 0.0, rate, 1.0)
    return as_float(np.where(rate > 0.0, -np.expm1(-rate * duration_s) / safe, duration_s))


def joule_integral_a2s(current: FaultCurrent, duration_s: ArrayLike) -> FloatArray:
    """Return the integral of Iac(t)² + idc(t)² from 0 to a duration, sources on the first axis added first.

    The exponentials are integrated exactly; the term at supply frequency averages out over whole cycles.

    Source: definition of the Joule integral, IEC 60909-0:2016, clause on thermal effect (there m + n).

    Parameters
    ----------
    current : FaultCurrent
        Sources x places (or sources alone).
    duration_s : array_like
        Broadcast against the places [s].

    Returns
    -------
    FloatArray
        The shape of the places [A²s].

    Examples
    --------
    >>> current = FaultCurrent(subtransient_a=[10.0], transient_a=[10.0], sustained_a=[10.0], dc_a=[0.0],
    ...                        t_sub_s=[0.01], t_trans_s=[0.1], t_dc_s=[0.02])
    >>> float(joule_integral_a2s(current, 2.0))
    200.0
    """
    duration = as_float(duration_s)
    fast, slow = current.subtransient_a - current.transient_a, current.transient_a - current.sustained_a
    ac = np.concatenate([fast, slow, current.sustained_a])
    rate = np.concatenate([1.0 / current.t_sub_s, 1.0 / current.t_trans_s, np.zeros_like(slow)])
    dc_rate = 1.0 / current.t_dc_s
    total = np.zeros(np.broadcast_shapes(fast.shape[1:], duration.shape))
    for amplitudes, rates in ((ac, rate), (current.dc_a, dc_rate)):
        for amplitude, own_rate in zip(amplitudes, rates, strict=True):
            total = total + (amplitude * amplitudes * _integral_s(own_rate + rates, duration)).sum(axis=0)
    return as_float(total)
