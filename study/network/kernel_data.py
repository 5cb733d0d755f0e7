"""What the compiled sweep reads and fills: named tuples of arrays, and SuperLU's factors as it wants them."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.sparse.linalg import SuperLU

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]


class Triangles(NamedTuple):
    """Factors ``L U = Pr J Pc``, by columns: L below its diagonal, U above, and 1 over U's diagonal."""

    lower_start: IntArray
    lower_row: IntArray
    lower: FloatArray
    upper_start: IntArray
    upper_row: IntArray
    upper: FloatArray
    inverse_diagonal: FloatArray
    row_place: IntArray
    column_place: IntArray


def triangles(factors: SuperLU) -> Triangles:
    """Return SuperLU's factors in the form that the compiled sweep reads.

    Parameters
    ----------
    factors : SuperLU
        Of the Jacobian.

    Returns
    -------
    Triangles
        Column by column.
    """
    lower, upper = factors.L.tocsc(), factors.U.tocsc()
    lower.sort_indices()
    upper.sort_indices()
    size = lower.shape[0]
    columns = np.repeat(np.arange(size), np.diff(lower.indptr))
    below = lower.indices > columns
    upper_columns = np.repeat(np.arange(size), np.diff(upper.indptr))
    above = upper.indices < upper_columns
    return Triangles(
        lower_start=_starts(columns[below], size),
        lower_row=lower.indices[below].astype(np.int64),
        lower=lower.data[below],
        upper_start=_starts(upper_columns[above], size),
        upper_row=upper.indices[above].astype(np.int64),
        upper=upper.data[above],
        inverse_diagonal=1.0 / upper.diagonal(),
        row_place=factors.perm_r.astype(np.int64),
        column_place=factors.perm_c.astype(np.int64),
    )


def _starts(columns: IntArray, size: int) -> IntArray:
    return np.searchsorted(columns, np.arange(size + 1)).astype(np.int64)


class Fixed(NamedTuple):
    """What all scenarios share; see `scenarios` and `consumers` for the names."""

    port_bus: IntArray
    direct: IntArray
    parent: IntArray
    into: ComplexArray
    out: ComplexArray
    own: ComplexArray
    by_load: FloatArray
    source_bus: IntArray
    source_island: IntArray
    code: IntArray
    v0: ComplexArray
    i0: ComplexArray
    b0: FloatArray
    by_law: FloatArray
    r: FloatArray
    cross: FloatArray
    q_set: FloatArray
    q_per_p: FloatArray
    i_max: FloatArray
    buses: int
    islands: int


class Varying(NamedTuple):
    """What differs from scenario to scenario: arrays with one column for each, or one for all."""

    constant: ComplexArray
    impedance: ComplexArray
    e_ref: FloatArray
    x: FloatArray
    a: FloatArray
    b: FloatArray


class Found(NamedTuple):
    """Results to be filled, scenarios along the last axis, and the first point as unknowns [size]."""

    v: ComplexArray
    i: ComplexArray
    m: FloatArray
    residual: FloatArray
    sweeps: IntArray
    start: FloatArray
