"""What current-limiting devices let through, by the maker's data."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from study.model.plant import Plant

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class LetThrough:
    """One maker's sheet: ascending prospective currents with cut-off peak and I²t; NaN where not given."""

    prospective_a: FloatArray
    cut_off_a: FloatArray
    heat_a2s: FloatArray

    def cut_off_at_a(self, prospective_a: FloatArray) -> FloatArray:
        """Return the cut-off peak; NaN outside the sheet."""
        return _interpolated(prospective_a, self.prospective_a, self.cut_off_a)

    def heat_at_a2s(self, prospective_a: FloatArray) -> FloatArray:
        """Return the let-through I²t; NaN outside the sheet."""
        return _interpolated(prospective_a, self.prospective_a, self.heat_a2s)


def let_through_sheets(plant: Plant) -> dict[str, LetThrough]:
    """Return the makers' sheets by name.

    Parameters
    ----------
    plant : Plant
        The plant.

    Returns
    -------
    dict of str to LetThrough
        One for each curve.
    """
    sheets: dict[str, LetThrough] = {}
    for name in dict.fromkeys(point.curve for point in plant.let_through):
        rows = sorted(
            (p.prospective_ka, p.cut_off_peak_ka, p.let_through_a2s)
            for p in plant.let_through
            if p.curve == name
        )
        table = np.array([[np.nan if x is None else x for x in row] for row in rows], float)
        sheets[name] = LetThrough(
            prospective_a=1000.0 * table[:, 0], cut_off_a=1000.0 * table[:, 1], heat_a2s=table[:, 2]
        )
    return sheets


def _interpolated(at: FloatArray, x: FloatArray, y: FloatArray) -> FloatArray:
    """Return straight lines in double-logarithmic scale, NaN where the data ends."""
    given = ~np.isnan(y)
    if not given.any():
        return np.full(np.shape(at), np.nan)
    low, high = x[given][0], x[given][-1]
    inside = (at >= low) & (at <= high)
    safe = np.where(inside, at, low)
    return np.where(inside, np.exp(np.interp(np.log(safe), np.log(x[given]), np.log(y[given]))), np.nan)
