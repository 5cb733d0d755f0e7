"""Initial currents of all buses at once from the nodal impedance matrix, and what each source gives.

Any consistent unit serves: ohm on one voltage level, or per unit. Reactances scale with frequency, so 50 and
60 Hz, and the equivalent frequency of method C, differ only in the impedances that are given.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.fault_current import ComplexArray, FloatArray, as_float
from study.formulas.fault_iec60909 import EQUIVALENT_FREQUENCY_RATIO

IndexArray = NDArray[np.int64]

# A matrix worse than this has a bus without a path to any source.
_LARGEST_CONDITION = 1e14


def at_equivalent_frequency(impedance: ArrayLike) -> ComplexArray:
    """Return impedances with their reactance at 0.4 times system frequency, for method C.

    Source: IEC 60909-0:2016, peak current in meshed networks, from memory.

    Parameters
    ----------
    impedance : array_like of complex
        R + jX at system frequency.

    Returns
    -------
    ComplexArray
        Same unit.

    Examples
    --------
    >>> at_equivalent_frequency(1 + 10j)
    array(1.+4.j)
    """
    value = np.asarray(impedance, dtype=complex)
    return np.asarray(value.real + 1j * EQUIVALENT_FREQUENCY_RATIO * value.imag, dtype=complex)


def admittance_matrix(
    bus_count: int,
    *,
    branch_from: ArrayLike,
    branch_to: ArrayLike,
    branch_impedance: ArrayLike,
    branch_ratio: ArrayLike,
    source_bus: ArrayLike,
    source_impedance: ArrayLike,
) -> ComplexArray:
    """Return the nodal admittance matrix with all sources as impedances to the reference.

    A branch has its impedance on the side of `branch_to` and an ideal transformer on that of `branch_from`.

    Source: nodal analysis; IEC 60909-0:2016 replaces sources by their impedances in the same way.

    Parameters
    ----------
    bus_count : int
        Number of buses.
    branch_from, branch_to : array_like of int
        Buses of each branch.
    branch_impedance : array_like of complex
        Series impedance.
    branch_ratio : array_like
        Ratio of the ideal transformer, off-nominal in per unit; 1 for lines.
    source_bus : array_like of int
        Bus of each source; motors are sources.
    source_impedance : array_like of complex
        Its impedance, corrected as the standard asks.

    Returns
    -------
    ComplexArray
        Shape buses x buses.

    Raises
    ------
    ValueError
        A branch or source without impedance: buses joined so are one bus.
    """
    z_branch, z_source = (
        np.asarray(branch_impedance, dtype=complex),
        np.asarray(source_impedance, dtype=complex),
    )
    if (z_branch == 0.0).any() or (z_source == 0.0).any():
        raise ValueError("a branch or source without impedance has no admittance: join its buses")
    start, end = np.asarray(branch_from, dtype=np.int64), np.asarray(branch_to, dtype=np.int64)
    ratio, y_branch = as_float(branch_ratio), 1.0 / z_branch
    matrix = np.zeros((bus_count, bus_count), dtype=complex)
    np.add.at(matrix, (start, start), y_branch / ratio**2)
    np.add.at(matrix, (end, end), y_branch)
    np.add.at(matrix, (start, end), -y_branch / ratio)
    np.add.at(matrix, (end, start), -y_branch / ratio)
    source = np.asarray(source_bus, dtype=np.int64)
    np.add.at(matrix, (source, source), 1.0 / z_source)
    return matrix


def impedance_matrix(admittance: ComplexArray) -> ComplexArray:
    """Return Z, whose diagonal holds the impedance at each fault place.

    Source: nodal analysis.

    Parameters
    ----------
    admittance : ComplexArray
        Shape buses x buses.

    Returns
    -------
    ComplexArray
        Shape buses x buses.

    Raises
    ------
    ValueError
        A bus that no source feeds.
    """
    unfed = np.flatnonzero(admittance.diagonal() == 0.0)
    if unfed.size:
        raise ValueError(f"no source feeds some bus: {unfed.tolist()}")
    try:
        impedance = np.asarray(np.linalg.inv(admittance), dtype=complex)
    except np.linalg.LinAlgError as error:
        raise ValueError("no source feeds some buses that are joined") from error
    if np.linalg.norm(admittance, 1) * np.linalg.norm(impedance, 1) > _LARGEST_CONDITION:
        raise ValueError("no source feeds some buses that are joined")
    return impedance


def initial_currents(impedance: ComplexArray, driving_voltage: ArrayLike) -> FloatArray:
    """Return I''k of every bus, the driving voltage over the magnitude of its own impedance.

    Source: IEC 60909-0:2016, equivalent voltage source at the fault, from memory.

    Parameters
    ----------
    impedance : ComplexArray
        Of `impedance_matrix`.
    driving_voltage : array_like
        c Un/sqrt3 of each bus [V], or c in per unit.

    Returns
    -------
    FloatArray
        Shape buses [A or pu].
    """
    return as_float(as_float(driving_voltage) / np.abs(impedance.diagonal()))


def source_contributions(
    impedance: ComplexArray,
    *,
    source_bus: ArrayLike,
    source_impedance: ArrayLike,
    driving_voltage: ArrayLike,
) -> ComplexArray:
    """Return the current of each source for a fault at each bus, as phasors that add up to the fault current.

    Source: IEC 60909-0:2016, equivalent voltage source at the fault, from memory; nodal analysis.

    Parameters
    ----------
    impedance : ComplexArray
        Of `impedance_matrix`.
    source_bus : array_like of int
        Bus of each source.
    source_impedance : array_like of complex
        As in the admittance matrix.
    driving_voltage : array_like
        c Un/sqrt3 of each bus [V], or c in per unit.

    Returns
    -------
    ComplexArray
        Shape sources x buses, at the source's own bus [A or pu].
    """
    fault_current = as_float(driving_voltage) / impedance.diagonal()
    drop = impedance[np.asarray(source_bus, dtype=np.int64)] * fault_current
    return np.asarray(drop / np.asarray(source_impedance, dtype=complex)[:, None], dtype=complex)


def branch_contributions(
    impedance: ComplexArray,
    *,
    branch_from: ArrayLike,
    branch_to: ArrayLike,
    branch_impedance: ArrayLike,
    branch_ratio: ArrayLike,
    driving_voltage: ArrayLike,
) -> ComplexArray:
    """Return the current in each branch for a fault at each bus, positive towards `branch_to`, on its side.

    Source: nodal analysis.

    Parameters
    ----------
    impedance : ComplexArray
        Of `impedance_matrix`.
    branch_from, branch_to : array_like of int
        Buses of each branch.
    branch_impedance : array_like of complex
        As in the admittance matrix.
    branch_ratio : array_like
        As in the admittance matrix.
    driving_voltage : array_like
        c Un/sqrt3 of each bus [V], or c in per unit.

    Returns
    -------
    ComplexArray
        Shape branches x buses [A or pu].
    """
    fault_current = as_float(driving_voltage) / impedance.diagonal()
    start, end = np.asarray(branch_from, dtype=np.int64), np.asarray(branch_to, dtype=np.int64)
    ratio = as_float(branch_ratio)[:, None]
    difference = impedance[end] - impedance[start] / ratio
    return np.asarray(
        difference * fault_current / np.asarray(branch_impedance, dtype=complex)[:, None], dtype=complex
    )
