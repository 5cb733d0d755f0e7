"""Trims that vary from scenario to scenario: set-points and droops of the sources."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.formulas.load_compensation import reactance_from_droop, signed_reactance
from study.issues import SolveError
from study.network.network import ModeNetwork
from study.network.sources import Law, Source

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Settings:
    """Trims that vary from scenario to scenario, arrays [scenario, source] or [source]; None leaves them.

    Per unit of the source's rated voltage and of rated frequency; droops over the base named in the workbook.
    """

    no_load_voltage_pu: FloatArray | None = None
    voltage_droop_pu: FloatArray | None = None
    no_load_frequency_pu: FloatArray | None = None
    speed_droop_pu: FloatArray | None = None


def column_wise(at: ModeNetwork, values: FloatArray | None, name: str) -> FloatArray | None:
    """Return a setting as [source, scenario], refusing what is no number or of the wrong shape.

    Parameters
    ----------
    at : ModeNetwork
        The mode.
    values : ndarray, shape (source,) or (scenario, source), or None
        As given.
    name : str
        For the message.

    Returns
    -------
    ndarray or None
        None where the setting is left alone.

    Raises
    ------
    SolveError
        Wrong shape or not a number.
    """
    if values is None:
        return None
    out = np.atleast_2d(np.asarray(values, float)).T
    if out.shape[0] != len(at.sources):
        raise SolveError(f"{at.mode.name}: {name} is given for {out.shape[0]} of {len(at.sources)} sources")
    if not np.isfinite(out).all():
        raise SolveError(f"{at.mode.name}: {name} holds what is not a number")
    return out


def or_own(values: FloatArray | None, sources: tuple[Source, ...], name: str) -> FloatArray:
    """Return a setting, or the sources' own values as one column."""
    own = np.array([getattr(s, name) for s in sources], float)[:, None]
    return own if values is None else values


def reactances(
    sources: tuple[Source, ...], v_ref: FloatArray, given_v: FloatArray | None, droop: FloatArray | None
) -> FloatArray:
    """Return the compensating reactance of each source, again where voltage or droop setting varies."""
    own = np.array([s.xc_pu for s in sources], float)[:, None]
    if droop is None and given_v is None:
        return own
    base = np.array([s.droop_pu for s in sources], float)[:, None] if droop is None else droop
    v_all, d_all = np.broadcast_arrays(v_ref, base)
    out = np.repeat(own, v_all.shape[1], axis=1)
    for j, s in enumerate(sources):
        if s.droop_base == "rated kVA" and s.law == Law.PHASOR:
            out[j] = np.where(s.reversed_polarity, -d_all[j], d_all[j])  # the droop is the reactance
        elif s.machine is not None and s.law in (Law.PHASOR, Law.REACTIVE_CURRENT, Law.CROSS_CURRENT):
            pairs = list(zip(v_all[j].tolist(), d_all[j].tolist(), strict=True))
            once = {pair: _reactance(s, *pair) for pair in dict.fromkeys(pairs)}
            out[j] = [once[pair] for pair in pairs]
    return out


def _reactance(source: Source, v_ref: float, droop: float) -> float:
    law = "reactive current" if source.law == Law.REACTIVE_CURRENT else "phasor"
    x = reactance_from_droop(droop, source.droop_base, law, source.cos_phi, v_ref)  # type: ignore[arg-type]
    return signed_reactance(x, "reversed" if source.reversed_polarity else "normal")
