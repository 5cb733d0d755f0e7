"""Arrays in results are read-only: a result is whole, and nothing changes it afterwards."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
BoolArray = NDArray[np.bool_]
IntArray = NDArray[np.int64]


def read_only(values: Any, dtype: Any = np.float64) -> NDArray[Any]:
    """Return `values` as an array that cannot be written to.

    Parameters
    ----------
    values : array_like
        Any shape.
    dtype : numpy dtype
        Element type of the result.

    Returns
    -------
    numpy.ndarray
        A copy with its write flag cleared.

    Examples
    --------
    >>> read_only([1, 2]).flags.writeable
    False
    """
    array = np.array(values, dtype=dtype)
    array.flags.writeable = False
    return array
