"""Which part of a fault's current comes through any branch, for a fault at any place of one case.

The current that a source gives at the faulted place has come there through the branches alone, so its way is
that of the branches' impedances, at every instant and whatever its own decay. Currents over time follow from
the exponentials of the place and these shares.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from study.results.arrays import BoolArray, FloatArray, IntArray


@dataclass(frozen=True, slots=True, kw_only=True)
class FaultRoutes:
    """The ways of fault currents in one case; rows [end] are those of the case's `BranchEnds`.

    ``ends`` names the board or equipment at which each row stands. ``determined`` is False for a tie in a
    closed ring of ties without impedance: all of every source is then taken as coming through it.

    The rest serves `shares`. A row is either the end of a path to a place's own terminals, ``terminal``
    [end] (-1: it is not), ``inward`` [end] the part of it that comes by this row, negative at the terminals
    (1 and -1 but where cables lie side by side); or it has its line in
    three tables, ``line`` [end]: ``pull`` [line, bus], what leaves the end into its branch for 1 at a bus
    against the reference of its island, ``from_source`` [line, source] and ``to_place`` [line, place], what
    stands directly behind it; the last line is empty. ``turns`` [bus] is the voltage at 1 pu of the
    reference, ``hours`` [bus] the lag in twelfths of a turn, ``base_a`` [bus] the A of 1 pu. ``own_source``
    [place] stands at the place itself (-1: none); ``units`` [source] is how many equal ones it stands for.
    """

    ends: tuple[str, ...]
    determined: BoolArray
    terminal: IntArray
    inward: FloatArray
    line: IntArray
    pull: FloatArray
    from_source: FloatArray
    to_place: BoolArray
    end_bus: IntArray
    source_bus: IntArray
    source_island: IntArray
    place_bus: IntArray
    place_island: IntArray
    turns: FloatArray
    hours: IntArray
    base_a: FloatArray
    own_source: IntArray
    units: FloatArray

    def shares(self, end: IntArray, place: IntArray) -> FloatArray:
        """Return the current through ends of branches, for 1 A that each source gives at a faulted place.

        Source: nodal analysis; the sources inject, the fault takes out.

        Parameters
        ----------
        end : ndarray of int, shape (pair,)
            Rows; -1 gives nothing.
        place : ndarray of int, shape (pair,)
            Faulted place of each pair.

        Returns
        -------
        ndarray, shape (pair, source)
            A at the voltage of the end per A at that of the place; positive from the end into its branch,
            negative out of the branch. Where nothing reaches the place, 0.
        """
        end, place = np.asarray(end, np.int64), np.asarray(place, np.int64)
        bus, k, line = self.place_bus[place], self.source_bus, self.line[end]
        at = np.where(bus >= 0, bus, 0)
        per_injection = self.turns[at][:, None] / self.turns[k][None, :]
        through = (self.pull[line][:, k] - self.from_source[line]) * per_injection
        through += (self.to_place[line, place] - self.pull[line, at])[:, None]
        self._paths(through, per_injection, end, place)
        own = self.own_source[place]
        has = np.flatnonzero(own >= 0)
        through[has, own[has]] *= 1.0 - 1.0 / self.units[own[has]]
        live = (bus >= 0) & (end >= 0)
        reached = live[:, None] & (self.place_island[place][:, None] == self.source_island[None, :])
        scale = self.base_a[self.end_bus[end]] / self.base_a[at]
        return np.asarray(np.where(reached, through * scale[:, None], 0.0))

    def own_shares(self, source: IntArray, place: IntArray) -> FloatArray:
        """Return what one unit of a source gives, for 1 A that all its units give at a faulted place.

        Parameters
        ----------
        source, place : ndarray of int, shape (pair,)
            Columns of the sources, faulted places.

        Returns
        -------
        ndarray, shape (pair,)
            A at the voltage of the source's board per A at that of the place.
        """
        bus, k = self.place_bus[place], self.source_bus[source]
        at = np.where(bus >= 0, bus, 0)
        per_injection = self.turns[at] / self.turns[k] * self.base_a[k] / self.base_a[at]
        reached = (bus >= 0) & (self.place_island[place] == self.source_island[source])
        return np.asarray(np.where(reached, per_injection / self.units[source], 0.0))

    def _paths(self, through: FloatArray, per_injection: FloatArray, end: IntArray, place: IntArray) -> None:
        """Fill in the rows of paths to terminals: the fault lies at their end, or their own source gives."""
        terminal, inward = self.terminal[end], self.inward[end]
        into = np.flatnonzero((terminal >= 0) & (terminal == place))
        through[into] = inward[into][:, None]
        own = np.where(terminal >= 0, self.own_source[terminal], -1)
        out = np.flatnonzero((own >= 0) & (terminal != place))
        source = own[out]
        through[out, source] = -inward[out] * per_injection[out, source] / self.units[source]

    def turned(self, end: IntArray, place: IntArray) -> BoolArray:
        """Return True where a star-delta transformation lies between the end and the faulted place.

        On the far side of one, a two-phase fault flows in all three phases, 2/sqrt3 of it (through the turns)
        in one of them; a line-earth fault in two, 1/sqrt3 of it.

        Source: symmetrical components, positive and negative sequence turned by 30 degrees against each
        other; from memory of Kundur, Power System Stability and Control.

        Parameters
        ----------
        end, place : ndarray of int, shape (pair,)
            As for `shares`.

        Returns
        -------
        ndarray of bool, shape (pair,)
            False where either is dead.
        """
        bus, at = self.end_bus[end], self.place_bus[place]
        both = (np.asarray(end) >= 0) & (at >= 0)
        return np.asarray(both & ((self.hours[bus] - self.hours[at]) % 2 == 1))
