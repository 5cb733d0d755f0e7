"""The impedance matrix of a network some islands of which no source feeds."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from study.formulas.fault_iec60909_nodal import impedance_matrix

ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]


def inverse(admittance: ComplexArray, bus: IntArray, y: ComplexArray, bus_island: IntArray) -> ComplexArray:
    """Return the impedance matrix; buses of islands without a source get 1 pu to the reference.

    Parameters
    ----------
    admittance : ndarray, shape (bus, bus)
        Of the branches alone. [pu]
    bus : ndarray of int, shape (source,)
        Buses of the sources.
    y : ndarray, shape (source,)
        Their admittances. [pu]
    bus_island : ndarray of int, shape (bus,)
        Island of each bus.

    Returns
    -------
    ndarray, shape (bus, bus)
        [pu]
    """
    matrix = admittance.copy()
    np.add.at(matrix, (bus, bus), y)
    unfed = np.flatnonzero(~np.isin(bus_island, bus_island[bus]))
    matrix[unfed, unfed] += 1.0
    return impedance_matrix(matrix)
