"""What a source cannot exceed, and which of its laws gives way: engine, excitation, converter current.

A state is 0 where the source's own law holds. Excitation: 1 at the ceiling, 2 at no field, 3 at the largest
current of a converter. Power: 1 at the largest kW, -1 at the largest that a converter takes in.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from study.network.fields import FieldState
from study.network.laws import VoltageLaws
from study.network.machines import NO_FIELD
from study.network.power import PowerLaws
from study.network.sources import Law, Source, Speed

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]

CEILING, NO_EXCITATION, LARGEST_CURRENT = 1, 2, 3
SLACK = 1e-9  # of rating, by which a limit may be passed before the source is held at it


def limited_laws(laws: VoltageLaws, sources: tuple[Source, ...], state: IntArray) -> VoltageLaws:
    """Return the laws with those of limited sources replaced.

    Parameters
    ----------
    laws : VoltageLaws
        Within limits.
    sources : tuple of Source
        Sources on line.
    state : ndarray of int, shape (source,)
        Excitation state of each.

    Returns
    -------
    VoltageLaws
        At the limits named.
    """
    if not state.any():
        return laws
    code = laws.code.copy()
    code[(state == CEILING) | (state == NO_EXCITATION)] = Law.FIELD
    code[state == LARGEST_CURRENT] = Law.CURRENT_LIMIT
    supplies = tuple(
        {CEILING: s.ceiling, NO_EXCITATION: NO_FIELD}.get(int(k), own)
        for s, k, own in zip(sources, state, laws.supplies, strict=True)
    )
    return replace(laws.with_code(code), supplies=supplies)


def excitation_steps(
    laws: VoltageLaws,
    sources: tuple[Source, ...],
    state: IntArray,
    field: FieldState,
    *,
    v: ComplexArray,
    i: ComplexArray,
) -> tuple[IntArray, FloatArray]:
    """Return the state each source wants in each scenario, and how far it is from where it is.

    Parameters
    ----------
    laws : VoltageLaws
        Within limits.
    sources : tuple of Source
        Sources on line.
    state : ndarray of int, shape (source,)
        Excitation state solved for.
    field : FieldState
        Field of the sets at the point.
    v, i : ndarray, shape (source, scenario)
        Terminal voltage and current found.

    Returns
    -------
    tuple of ndarray
        State wanted and distance (0 where it stays), [source, scenario].
    """
    wanted = np.repeat(state[:, None], v.shape[1], axis=1)
    distance = np.zeros(v.shape)
    # Past a quarter turn the field counts as one against the present one: below nothing.
    under = np.where(field.in_step, -field.needed, field.needed)
    over = field.needed - field.most
    if not state.any() and _within(laws, np.fmax(over, under), i):
        return wanted, distance
    error = regulator_error(laws, v, i)
    for j, s in enumerate(sources):
        if s.law in (Law.FIELD, Law.BEHIND_IMPEDANCE):
            continue
        steps: list[tuple[int, FloatArray]] = []
        if s.machine is not None:
            steps = _machine_steps(int(state[j]), error[j], over[j], under[j])
        elif np.isfinite(s.i_max_pu):
            steps = _converter_steps(laws, j, int(state[j]), (v[j], i[j], error[j]))
        for new_state, by in steps:
            beyond = by > SLACK
            wanted[j, beyond], distance[j, beyond] = new_state, by[beyond]
    return wanted, distance


def _within(laws: VoltageLaws, beyond: FloatArray, i: ComplexArray) -> bool:
    """Return True where every regulated source is inside its limits in every scenario."""
    free = (laws.code == Law.FIELD) | (laws.code == Law.BEHIND_IMPEDANCE)
    worst = np.fmax(beyond, np.abs(i) / laws.i_max - 1.0)
    return not np.any(worst[~free] > SLACK)


def regulator_error(laws: VoltageLaws, v: ComplexArray, i: ComplexArray) -> FloatArray:
    """Return set-point less what the regulator sees, [source, scenario]: positive asks for more field."""
    out = laws.e_ref - np.abs(laws.compensated(v, i))
    s = v * np.conj(i)
    reactive = laws.code == Law.REACTIVE_CURRENT
    out[reactive] = (laws.e_ref - np.abs(v) - laws.x * s.imag / np.abs(v))[reactive]
    kvar = laws.code == Law.REACTIVE_POWER
    out[kvar] = (laws.q_set + laws.q_per_p * s.real - s.imag)[kvar]
    return np.asarray(out)


def _machine_steps(
    state: int, error: FloatArray, over: FloatArray, under: FloatArray
) -> list[tuple[int, FloatArray]]:
    """Return the states that a set may go to, each with how far it is past what keeps it where it is."""
    if state == CEILING:
        return [(0, -error)]
    if state == NO_EXCITATION:
        return [(0, error)]
    return [(CEILING, over), (NO_EXCITATION, under)]


def _converter_steps(
    laws: VoltageLaws, j: int, state: int, point: tuple[ComplexArray, ComplexArray, FloatArray]
) -> list[tuple[int, FloatArray]]:
    v, i, error = point
    if state == LARGEST_CURRENT:
        return [(0, np.where((v * np.conj(i)).imag >= 0.0, -error, error))]
    return [(LARGEST_CURRENT, np.abs(i) / laws.i_max[j] - 1.0)]


def power_steps(
    power: PowerLaws,
    sources: tuple[Source, ...],
    state: IntArray,
    *,
    p: FloatArray,
    f: FloatArray,
) -> tuple[IntArray, FloatArray]:
    """Return the power state each source wants, and how far it is from where it is.

    Parameters
    ----------
    power : PowerLaws
        As solved.
    sources : tuple of Source
        Sources on line.
    state : ndarray of int, shape (source,)
        Power state solved for.
    p : ndarray, shape (source, scenario)
        Active power found. [pu]
    f : ndarray, shape (island, scenario)
        Frequency found. [pu]

    Returns
    -------
    tuple of ndarray
        State wanted and distance (0 where it stays), [source, scenario].
    """
    wanted = np.repeat(state[:, None], p.shape[1], axis=1)
    distance = np.zeros(p.shape)
    if not state.any() and np.all(np.abs(p) <= power.limit):
        return wanted, distance
    for j, s in enumerate(sources):
        limit, rated = float(power.limit[j, 0]), float(power.rated[j, 0])
        if not np.isfinite(limit) or s.speed == Speed.FIXED:
            continue
        steps: list[tuple[int, FloatArray]]
        if state[j] != 0:
            asked = _asked(power, s, j, f)
            steps = [(0, state[j] * (limit * state[j] - asked) / rated)]
        else:
            steps = [(1, (p[j] - limit) / rated)]
            if s.kind == "converter supply":
                steps.append((-1, (-limit - p[j]) / rated))
        for new_state, by in steps:
            wanted[j, by > SLACK], distance[j, by > SLACK] = new_state, by[by > SLACK]
    return wanted, distance


def _asked(power: PowerLaws, source: Source, j: int, f: FloatArray) -> FloatArray:
    """Return the power that a limited source's governor asks for at the frequency found."""
    f_own = f[source.island]
    if source.speed == Speed.DROOP:
        return np.asarray(power.gain[j] * (power.f_no_load[j] - f_own))
    return np.where(f_own < power.f_no_load[j], np.inf, -np.inf)
