"""Limits of sets in parallel at one load, and how far a change of their state goes before one breaks."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from study.analyses.sharing_group import Group, kvar_off, kw_off, tolerances
from study.analyses.sharing_laws import Held
from study.analyses.sharing_options import SharingOptions
from study.results.arrays import BoolArray, FloatArray, IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadLimits:
    """The sets at one load as set, and what is held against limits there.

    ``base``, ``low`` and ``high`` [quantity] are values as set and bounds; ``below`` and ``above`` name what
    breaks at each bound. ``own`` marks the mode's own load, at which voltage, frequency and ratings count
    beside sharing. ``broken`` names what is broken as set, and is empty where all holds.
    """

    group: Group
    load_pu: float
    held: Held
    own: bool
    base: FloatArray
    low: FloatArray
    high: FloatArray
    below: tuple[str, ...]
    above: tuple[str, ...]
    broken: str

    def ends(self, change: Held) -> tuple[Ends, Ends]:
        """Return how many times changes may be made, down and up, and what breaks there.

        Parameters
        ----------
        change : Held
            Differences of every quantity for one step, [line, set].

        Returns
        -------
        tuple of Ends
            Both [line].
        """
        slope = _quantities(self.group, change, own=self.own)
        rising, moves = slope > 0.0, slope != 0.0
        step = np.where(moves, slope, 1.0)
        to_low, to_high = (self.low - self.base) / step, (self.high - self.base) / step
        up = np.where(moves, np.where(rising, to_high, to_low), np.inf)
        down = np.where(moves, np.where(rising, to_low, to_high), -np.inf)
        kva = tuple(f"rated kVA of {name}" for name in self.group.names)
        above, below = (*self.above, *kva), (*self.below, *kva)
        if self.own:
            less, more = _kva_ends(self.held, change, self.group.s_rated_kva)
            down, up = np.concatenate([down, less], axis=-1), np.concatenate([up, more], axis=-1)
            rising = np.concatenate([rising, np.ones(less.shape, bool)], axis=-1)
        k, m = down.argmax(axis=-1), up.argmin(axis=-1)
        line = np.arange(len(slope))
        return (
            Ends(steps=down[line, k], breaks=_named(k, rising[line, k], below, above)),
            Ends(steps=up[line, m], breaks=_named(m, rising[line, m], above, below)),
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class Ends:
    """Where lines end, [line]: after how many steps (infinite: nowhere), and what breaks there."""

    steps: FloatArray
    breaks: tuple[str, ...]


def _named(
    k: IntArray, rising: BoolArray, names: tuple[str, ...], otherwise: tuple[str, ...]
) -> tuple[str, ...]:
    return tuple(names[n] if up else otherwise[n] for n, up in zip(k, rising, strict=True))


def limits_at(
    group: Group, options: SharingOptions, held: Held, load_pu: float, *, own: bool, at_limit: str
) -> LoadLimits:
    """Return the limits at one load.

    Parameters
    ----------
    group : Group
        The sets.
    options : SharingOptions
        Tolerances, voltage and frequency band.
    held : Held
        The sets there, as set.
    load_pu : float
        Load of the sets, of the sum of rated kW.
    own : bool
        Whether this is the mode's own load.
    at_limit : str
        A set that is held at a limit there, in words; else empty.

    Returns
    -------
    LoadLimits
        Sharing; at the mode's own load ratings, voltage and frequency too.
    """
    kw, kvar = tolerances(group, options)
    names = [f"{word} sharing of {name}" for word in ("kW", "kvar") for name in group.names]
    low, high, below, above = [-kw, -kvar], [kw, kvar], list(names), list(names)
    if own:
        none, one = np.full(len(kw), np.inf), np.ones(len(kw))
        low += [-none, (1.0 - options.voltage_low) * one, one[:1] - options.frequency]
        high += [group.p_rated_kw, (1.0 + options.voltage_high) * one, one[:1] + options.frequency]
        rated = [f"rated kW of {name}" for name in group.names]
        below += [*rated, *["lowest voltage"] * len(kw), "lowest frequency"]
        above += [*rated, *["highest voltage"] * len(kw), "highest frequency"]
    base, lows, highs = _quantities(group, held, own=own), np.concatenate(low), np.concatenate(high)
    return LoadLimits(
        group=group,
        load_pu=load_pu,
        held=held,
        own=own,
        base=base,
        low=lows,
        high=highs,
        below=tuple(below),
        above=tuple(above),
        broken=at_limit
        or _worst(base, lows, highs, (below, above))
        or (_overloaded(group, held) if own else ""),
    )


def _worst(
    base: FloatArray, low: FloatArray, high: FloatArray, names: tuple[Sequence[str], Sequence[str]]
) -> str:
    """Return the quantity that is furthest beyond a bound, as a part of it; empty where all hold."""
    with np.errstate(invalid="ignore"):  # a bound at infinity is never passed
        under = np.where(base < low, (low - base) / np.abs(low), 0.0)
        over = np.where(base > high, (base - high) / np.abs(high), 0.0)
    k, m = int(under.argmax()), int(over.argmax())
    if not max(under[k], over[m]) > 0.0:
        return ""
    return names[0][k] if under[k] > over[m] else names[1][m]


def _overloaded(group: Group, held: Held) -> str:
    loading = np.hypot(held.p_kw, held.q_kvar) / group.s_rated_kva
    k = int(loading.argmax())
    return f"rated kVA of {group.names[k]}" if loading[k] > 1.0 else ""


def _quantities(group: Group, held: Held, *, own: bool) -> FloatArray:
    """Return what is held against bounds, [..., quantity]; linear in the state, so it serves changes too."""
    values = [kw_off(group, held.p_kw), kvar_off(group, held.q_kvar)]
    if own:
        values += [held.p_kw, held.board_u_pu, held.f_pu]
    return np.concatenate(values, axis=-1)


def _kva_ends(held: Held, change: Held, rated_kva: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the steps, down and up, at which each set reaches its kVA, ``|S + t dS| = Sr``: [line, set]."""
    a = change.p_kw**2 + change.q_kvar**2
    half = held.p_kw * change.p_kw + held.q_kvar * change.q_kvar
    rest = np.minimum(held.p_kw**2 + held.q_kvar**2 - rated_kva**2, 0.0)
    root = np.sqrt(half**2 - a * rest)
    step = np.where(a > 0.0, a, 1.0)
    down, up = (-half - root) / step, (-half + root) / step
    return np.where(a > 0.0, down, -np.inf), np.where(a > 0.0, up, np.inf)
