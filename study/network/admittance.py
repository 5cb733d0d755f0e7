"""Nodal admittance at a multiple of rated frequency, from the one list of branches that both solvers use."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.sparse import coo_array, csr_array

from study.model.branches import Filter
from study.network.arrays import BranchArrays

ComplexArray = NDArray[np.complex128]
IntArray = NDArray[np.int64]


def branch_admittances(
    branches: BranchArrays, ratio: ArrayLike, units: ArrayLike, order: ArrayLike
) -> tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]:
    """Return the four admittances of each branch's two-port: Yff, Yft, Ytf, Ytt.

    A pi circuit behind an ideal transformer at the `from` end:
    ``Yff = (y + s/2)/t^2, Yft = Ytf = -y/t, Ytt = y + s/2`` with ``y = n/(r + jhx)`` and ``s = n(g + jhb)``.

    Source: the common branch model; for example Zimmerman et al., MATPOWER, IEEE Trans. Power Systems 26(1)
    2011, section II.

    Parameters
    ----------
    branches : BranchArrays
        Per-unit data of the branches wanted.
    ratio : ndarray, shape (branch,)
        Off-nominal ratio.
    units : ndarray, shape (branch,)
        Equal runs in parallel, n.
    order : float or ndarray
        Frequency over rated frequency, h.

    Returns
    -------
    tuple of ndarray
        Each [branch]. [pu]
    """
    h, n, t = np.asarray(order, float), np.asarray(units, float), np.asarray(ratio, float)
    series = n / (branches.r_pu + 1j * h * branches.x_pu)
    shunt = 0.5 * n * (branches.g_pu + 1j * h * branches.b_pu)
    return (series + shunt) / t**2, -series / t, -series / t, series + shunt


def nodal_admittance(
    size: int,
    from_bus: IntArray,
    to_bus: IntArray,
    two_port: tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray],
    *,
    shunt_bus: IntArray,
    shunt_pu: ComplexArray,
) -> csr_array:
    """Return the nodal admittance matrix.

    Parameters
    ----------
    size : int
        Number of buses.
    from_bus, to_bus : ndarray of int, shape (branch,)
        Ends of the branches.
    two_port : tuple of ndarray
        From `branch_admittances`.
    shunt_bus : ndarray of int, shape (shunt,)
        Buses of the shunts.
    shunt_pu : ndarray, shape (shunt,)
        Their admittances. [pu]

    Returns
    -------
    csr_array, shape (size, size)
        Admittance; every row has an entry on the diagonal. [pu]
    """
    yff, yft, ytf, ytt = two_port
    diagonal = np.arange(size)  # kept in every row, be it zero
    rows = np.concatenate([from_bus, from_bus, to_bus, to_bus, shunt_bus, diagonal])
    cols = np.concatenate([from_bus, to_bus, from_bus, to_bus, shunt_bus, diagonal])
    values = np.concatenate([yff, yft, ytf, ytt, shunt_pu, np.zeros(size)])
    return csr_array(coo_array((values, (rows, cols)), shape=(size, size)))


def filter_admittance(item: Filter, u_base_v: float, s_base_kva: float, order: float) -> complex:
    """Return a filter's admittance; at rated frequency it supplies its rated kvar.

    Capacitor ``jhB``; tuned filter: L and C in series, in tune at order n, resistance ``n X_L / quality``;
    high-pass filter: the resistance ``quality x n X_L`` across the reactor. With ``X = U^2/Q`` the reactances
    at rated frequency are ``X_C = X n^2/(n^2 - 1)``, ``X_L = X_C/n^2``.

    Source: J. Arrillaga, N. R. Watson, *Power System Harmonics*, passive filter design; from memory.

    Parameters
    ----------
    item : Filter
        The filter.
    u_base_v : float
        Base voltage of its board. [V]
    s_base_kva : float
        Base power. [kVA]
    order : float
        Frequency over rated frequency.

    Returns
    -------
    complex
        Admittance. [pu]

    Raises
    ------
    ValueError
        A tuned or high-pass filter without tuning order above 1 or without quality.
    """
    b_pu = item.q_rated_kvar / s_base_kva * (u_base_v / item.u_rated_v) ** 2
    if item.kind == "capacitor":
        return 1j * order * b_pu
    n, quality = item.tuning_order, item.quality
    if n is None or n <= 1.0 or quality is None or quality <= 0.0:
        raise ValueError(f"filter {item.name} needs a tuning order above 1 and a quality above 0")
    x_c = n * n / (n * n - 1.0) / b_pu
    x_l = x_c / (n * n)
    if item.kind == "tuned":
        return 1.0 / (n * x_l / quality + 1j * (order * x_l - x_c / order))
    resistor = quality * n * x_l
    reactor = 1j * order * x_l
    return 1.0 / (resistor * reactor / (resistor + reactor) - 1j * x_c / order)
