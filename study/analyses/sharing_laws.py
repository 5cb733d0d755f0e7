"""A set's own settings from the state that it holds: the regulator's and the governor's law turned round."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from study.analyses.sharing_group import Group
from study.formulas.load_compensation import (
    cross_current_reactance,
    reactance_from_droop,
    terminal_voltage_phasor,
    terminal_voltage_reactive_current,
)
from study.network.sources import Law, Source
from study.results.arrays import FloatArray

_REPEATS = 4  # the droop's reactance follows the no-load voltage by about 2 % of its change


@dataclass(frozen=True, slots=True, kw_only=True)
class Held:
    """What the sets of a group carry and hold, or changes of it; arrays [..., set], frequency [..., 1].

    ``u_pu`` is the terminal voltage of the set's rated voltage, ``board_u_pu`` that of its board of the
    board's nominal voltage.
    """

    p_kw: FloatArray
    q_kvar: FloatArray
    u_pu: FloatArray
    board_u_pu: FloatArray
    f_pu: FloatArray

    def moved(self, change: Held, steps: FloatArray | float) -> Held:
        """Return the state after some steps of a change, [..., 1]."""
        return Held(
            p_kw=self.p_kw + steps * change.p_kw,
            q_kvar=self.q_kvar + steps * change.q_kvar,
            u_pu=self.u_pu + steps * change.u_pu,
            board_u_pu=self.board_u_pu + steps * change.board_u_pu,
            f_pu=self.f_pu + steps * change.f_pu,
        )

    def at(self, k: int) -> Held:
        """Return one of several states."""
        return Held(
            p_kw=self.p_kw[k],
            q_kvar=self.q_kvar[k],
            u_pu=self.u_pu[k],
            board_u_pu=self.board_u_pu[k],
            f_pu=self.f_pu[k],
        )


def no_load_voltage_holding(group: Group, n: int, now: Held, then: Held) -> float:
    """Return the no-load voltage that makes set n hold another state, its droop setting left alone.

    The regulator sees ``|u + x w|`` (IEEE 421.5, load compensation); x is the reactance of the droop setting
    at the new no-load voltage.

    Parameters
    ----------
    group : Group
        The sets.
    n : int
        Place of the set.
    now, then : Held
        The state as set, and the other one.

    Returns
    -------
    float
        No-load voltage. [pu of rated]
    """
    s = group.sources[n]
    rest = s.v_ref_pu - abs(now.u_pu[n] + s.xc_pu * _weight(group, n, now))
    w, v_ref = _weight(group, n, then), s.v_ref_pu
    for _ in range(_REPEATS):
        v_ref = rest + float(abs(then.u_pu[n] + _reactance(s, v_ref) * w))
    return v_ref


def droop_holding(group: Group, n: int, now: Held, then: Held) -> float:
    """Return the voltage droop that makes set n hold another state, its no-load voltage left alone.

    Solves ``|u + x w| = Vref`` for x, and turns the reactance into the droop over the base of the workbook.

    Parameters
    ----------
    group : Group
        The sets.
    n : int
        Place of the set.
    now, then : Held
        The state as set, and the other one.

    Returns
    -------
    float
        Droop [pu of rated]; NaN where no droop brings it there.
    """
    s = group.sources[n]
    v_seen = abs(now.u_pu[n] + s.xc_pu * _weight(group, n, now))
    u, w = float(then.u_pu[n]), _weight(group, n, then)
    half, rest = u * w.real, v_seen**2 - u**2
    root = half**2 + abs(w) ** 2 * rest
    below = half + np.sqrt(root) if root >= 0.0 else 0.0
    x = rest / below if below else np.nan
    return _droop(s, float(x)) if x >= 0.0 else float("nan")


def no_load_frequency_holding(source: Source, p_kw: float, f_pu: float) -> float:
    """Return the no-load frequency at which a governor with droop holds a power: ``f + droop P/Pr``."""
    return f_pu + source.speed_droop_pu * p_kw / source.p_rated_kw


def speed_droop_holding(source: Source, p_kw: float, f_pu: float) -> float:
    """Return the speed droop at which a governor holds a power: ``(f0 - f) Pr/P``; NaN without power."""
    return (source.f_no_load_pu - f_pu) * source.p_rated_kw / p_kw if p_kw > 0.0 else float("nan")


def _weight(group: Group, n: int, held: Held) -> complex:
    """Return w, by which the compensating reactance acts on what the regulator of set n sees.

    ``jI`` with the terminal voltage as reference; its real part alone under the reactive-current law; under
    cross-current compensation the set's own current less the mean of its group's.
    """
    s = group.sources[n]
    turned = (held.q_kvar + 1j * held.p_kw) / (group.s_rated_kva * held.u_pu)
    if s.law == Law.REACTIVE_CURRENT:
        return complex(turned[n].real)
    if s.law != Law.CROSS_CURRENT:
        return complex(turned[n])
    members = [
        k
        for k, other in enumerate(group.sources)
        if other.law == Law.CROSS_CURRENT and other.cross_group == s.cross_group
    ]
    row = cross_current_reactance(group.s_rated_kva[members], 1.0)[members.index(n)]
    return complex(row @ turned[members])


def _reactance(s: Source, v_ref_pu: float) -> float:
    law = "reactive current" if s.law == Law.REACTIVE_CURRENT else "phasor"
    return reactance_from_droop(s.droop_pu, s.droop_base, law, s.cos_phi, v_ref_pu)  # type: ignore[arg-type]


def _droop(s: Source, x_pu: float) -> float:
    """Return the fall of voltage over the base load that a reactance makes; NaN where it holds none."""
    if s.droop_base == "rated kVA":
        return x_pu
    q = float(np.sqrt(1.0 - s.cos_phi**2))
    try:
        if s.law == Law.REACTIVE_CURRENT or s.droop_base == "rated kvar":
            return s.v_ref_pu - float(terminal_voltage_reactive_current(q, s.v_ref_pu, x_pu))
        return s.v_ref_pu - float(terminal_voltage_phasor(s.cos_phi, q, s.v_ref_pu, x_pu))
    except ValueError:
        return float("nan")
