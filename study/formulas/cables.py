"""Resistance, reactance, capacitance and voltage drop of ship cable.

Values are for one conductor and one kilometre of route; a run of n cables in parallel has an n-th of them.
"""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.table_files import numeric_table, table_rows

Conductor = Literal["copper", "aluminium"]
Cores = Literal["3 single", "2", "3", "4"]

FloatArray = NDArray[np.float64]

# Temperature at which the resistance would be zero, with the sign turned; IEC 60228 annex A and IEC 60949.
ZERO_RESISTANCE_DEGC = {"copper": 234.5, "aluminium": 228.0}


def standard_sections() -> tuple[float, ...]:
    """Return the conductor sections of the tables, ascending [mm2].

    Source: IEC 60228:2004 (from memory).

    Returns
    -------
    tuple of float
        Sections. [mm2]

    Examples
    --------
    >>> standard_sections()[:3]
    (0.5, 0.75, 1.0)
    """
    return tuple(numeric_table("conductor_resistance_iec60228", "section_mm2"))


def conductor_resistance(
    section_mm2: float, conductor: Conductor, conductor_class: int, tinned: bool
) -> float:
    """Return the largest d.c. resistance of a conductor at 20 degC.

    Source: IEC 60228:2004, tables 2, 3 and 4 (from memory).

    Parameters
    ----------
    section_mm2 : float
        Nominal section. [mm2]
    conductor : str
        ``copper`` or ``aluminium``.
    conductor_class : int
        2 stranded, 5 flexible.
    tinned : bool
        Metal-coated copper.

    Returns
    -------
    float
        Resistance. [ohm/km]

    Raises
    ------
    ValueError
        The standard has no such conductor.

    Examples
    --------
    >>> conductor_resistance(2.5, "copper", 5, True)
    8.21
    """
    row = numeric_table("conductor_resistance_iec60228", "section_mm2").get(float(section_mm2))
    column = f"{conductor}_{conductor_class}_{'tinned' if tinned else 'plain'}"
    if row is None or column not in row:
        kind = f"{'metal-coated ' if tinned else ''}{conductor} of class {conductor_class}"
        raise ValueError(f"IEC 60228 has no {section_mm2:g} mm2 conductor of {kind}: give its resistance")
    return row[column]


def resistance_at(r20: ArrayLike, temperature_degc: ArrayLike, conductor: Conductor) -> FloatArray:
    """Return a resistance at another temperature: ``R20 (b + t)/(b + 20)``.

    Source: IEC 60228:2004, annex A (copper, b = 234.5) and annex A for aluminium (b = 228); from memory.

    Parameters
    ----------
    r20 : float or ndarray
        Resistance at 20 degC. [ohm or ohm/km]
    temperature_degc : float or ndarray
        Conductor temperature. [degC]
    conductor : str
        ``copper`` or ``aluminium``.

    Returns
    -------
    ndarray
        Resistance. [unit of `r20`]

    Examples
    --------
    >>> round(float(resistance_at(1.0, 90.0, "copper")), 4)
    1.275
    """
    b = ZERO_RESISTANCE_DEGC[conductor]
    return np.asarray(np.asarray(r20, float) * (b + np.asarray(temperature_degc, float)) / (b + 20.0))


def skin_effect_factor(r_ohm_per_km: ArrayLike, f_hz: ArrayLike) -> FloatArray:
    """Return the a.c. over the d.c. resistance of a round stranded conductor, skin effect alone.

    ``1 + x^4/(192 + 0.8 x^4)`` with ``x^2 = 8 pi f 1e-7/R`` (R in ohm/m); for x up to 2.8.

    Source: IEC 60287-1-1, clause 2.1.2 (ks = 1); from memory.

    Parameters
    ----------
    r_ohm_per_km : float or ndarray
        D.c. resistance at the temperature of the conductor. [ohm/km]
    f_hz : float or ndarray
        Frequency. [Hz]

    Returns
    -------
    ndarray
        Factor, 1 or more.

    Raises
    ------
    ValueError
        x above 2.8: beyond the formula.

    Examples
    --------
    >>> round(float(skin_effect_factor(0.0283 * 1.275, 60.0)), 3)
    1.085
    """
    x4 = (8.0 * np.pi * np.asarray(f_hz, float) * 1e-4 / np.asarray(r_ohm_per_km, float)) ** 2
    if np.any(x4 > 2.8**4):
        raise ValueError("the skin effect formula of IEC 60287-1-1 ends at x = 2.8")
    return np.asarray(1.0 + x4 / (192.0 + 0.8 * x4))


def reactance_from_build(f_hz: float, spacing_mm: float, conductor_diameter_mm: float) -> float:
    """Return the reactance of a balanced circuit: ``2 pi f (0.05 + 0.2 ln(2 s/d))`` mH/km.

    Source: inductance of parallel round conductors, internal part 0.05 mH/km; IEC 60287-1-3 and any handbook.

    Parameters
    ----------
    f_hz : float
        Frequency. [Hz]
    spacing_mm : float
        Geometric mean distance of the conductor axes. [mm]
    conductor_diameter_mm : float
        Diameter of a conductor. [mm]

    Returns
    -------
    float
        Reactance of one conductor. [ohm/km]

    Examples
    --------
    >>> round(reactance_from_build(50.0, 20.0, 10.0), 4)
    0.1028
    """
    inductance_mh = 0.05 + 0.2 * float(np.log(2.0 * spacing_mm / conductor_diameter_mm))
    return 2.0 * np.pi * f_hz * inductance_mh * 1e-3


def typical_reactance(section_mm2: float, cores: Cores, f_hz: float) -> float:
    """Return the reactance of a cable of typical build.

    Cores lie against each other: at one core's diameter in two- and three-core cable and in trefoil of single
    cores (with their sheath), at ``2^(1/6)`` of it on average in four-core cable.

    Source: `reactance_from_build` with the typical build of the table ``cable_build``; common practice.

    Parameters
    ----------
    section_mm2 : float
        Nominal section. [mm2]
    cores : str
        ``3 single``, ``2``, ``3`` or ``4``.
    f_hz : float
        Frequency. [Hz]

    Returns
    -------
    float
        Reactance of one conductor. [ohm/km]

    Raises
    ------
    ValueError
        No typical build of that section.

    Examples
    --------
    >>> round(typical_reactance(95.0, "3", 60.0), 3)
    0.088
    """
    diameter, core = _build(section_mm2)
    # Sheath of a single core: 0.035 D + 1.0 mm as in IEC 60502-1 (from memory).
    spacing = {"2": core, "3": core, "4": core * 2.0 ** (1.0 / 6.0), "3 single": core * 1.07 + 2.0}[cores]
    return reactance_from_build(f_hz, spacing, diameter)


def _build(section_mm2: float) -> tuple[float, float]:
    """Return conductor diameter and core diameter [mm]."""
    row = numeric_table("cable_build", "section_mm2").get(float(section_mm2))
    if row is None:
        raise ValueError(f"{section_mm2:g} mm2 is no standard section: give the reactance of the cable")
    diameter = row["conductor_diameter_mm"]
    return diameter, diameter + 2.0 * row["insulation_mm"]


def typical_capacitance(section_mm2: float, insulation: str) -> float:
    """Return the capacitance of a core to earth: ``e/(18 ln(D/d))`` uF/km.

    Exact for a screened core; an upper value for a cable whose cores have no screen of their own.

    Source: IEC 60287-1-1, capacitance of a circular conductor (from memory), with the typical build.

    Parameters
    ----------
    section_mm2 : float
        Nominal section. [mm2]
    insulation : str
        A name of the table ``insulation``.

    Returns
    -------
    float
        Capacitance. [uF/km]

    Raises
    ------
    ValueError
        An unknown section or insulation.

    Examples
    --------
    >>> round(typical_capacitance(95.0, "EPR"), 2)
    0.74
    """
    diameter, core = _build(section_mm2)
    return insulation_data(insulation)["permittivity"] / (18.0 * float(np.log(core / diameter)))


def insulation_data(insulation: str) -> dict[str, float]:
    """Return conductor temperature, end temperature and permittivity of an insulation.

    Source: the table ``insulation`` names its standards (from memory).

    Parameters
    ----------
    insulation : str
        ``PVC``, ``EPR``, ``HEPR``, ``XLPE``, ``halogen-free`` or ``silicone``.

    Returns
    -------
    dict
        ``conductor_degc``, ``end_degc`` [degC], ``permittivity``.

    Raises
    ------
    ValueError
        An unknown insulation.

    Examples
    --------
    >>> insulation_data("XLPE")["end_degc"]
    250.0
    """
    rows = {row["insulation"]: row for row in table_rows("insulation")}
    if insulation not in rows:
        raise ValueError(f"unknown insulation {insulation!r}: one of {', '.join(rows)}")
    return {heading: float(x) for heading, x in rows[insulation].items() if heading != "insulation"}


def voltage_drop_approximate(
    i_a: ArrayLike, r_ohm: ArrayLike, x_ohm: ArrayLike, cos_phi: ArrayLike, phases: int
) -> FloatArray:
    """Return the voltage drop between lines: ``sqrt(3) I (R cos + X sin)``, or with 2 for single phase.

    Source: common practice, as in IEC 60092-352 and IEC 60364-5-52 annex G (from memory).

    Parameters
    ----------
    i_a : float or ndarray
        Current. [A]
    r_ohm, x_ohm : float or ndarray
        Resistance and reactance of one conductor of the run. [ohm]
    cos_phi : float or ndarray
        Power factor, lagging.
    phases : int
        3; 1 or 2 for a load between two conductors.

    Returns
    -------
    ndarray
        Drop. [V]

    Raises
    ------
    ValueError
        Phases other than 1, 2, 3.

    Examples
    --------
    >>> round(float(voltage_drop_approximate(100.0, 0.02, 0.01, 0.8, 3)), 2)
    3.81
    """
    cos = np.asarray(cos_phi, float)
    along = np.asarray(r_ohm, float) * cos + np.asarray(x_ohm, float) * np.sqrt(1.0 - cos * cos)
    return np.asarray(_loop_factor(phases) * np.asarray(i_a, float) * along)


def voltage_drop_exact(
    u_sending_v: ArrayLike, i_a: ArrayLike, z_ohm: ArrayLike, cos_phi: ArrayLike, phases: int
) -> FloatArray:
    """Return the voltage drop between lines with the angle between both ends counted.

    ``Us - Ur`` with ``Us = |Ur + k Z I|``; the power factor is that at the load.

    Source: phasor diagram of the short line, any textbook.

    Parameters
    ----------
    u_sending_v : float or ndarray
        Voltage at the supply end, between lines (conductors). [V]
    i_a : float or ndarray
        Current. [A]
    z_ohm : complex or ndarray
        Impedance R + jX of one conductor of the run. [ohm]
    cos_phi : float or ndarray
        Power factor at the load, lagging.
    phases : int
        3; 1 or 2 for a load between two conductors.

    Returns
    -------
    ndarray
        Drop. [V]

    Raises
    ------
    ValueError
        Phases other than 1, 2, 3, or a current that the run cannot carry at that voltage.

    Examples
    --------
    >>> round(float(voltage_drop_exact(440.0, 100.0, 0.02 + 0.01j, 0.8, 3)), 2)
    3.81
    """
    us, z, cos = np.asarray(u_sending_v, float), np.asarray(z_ohm, complex), np.asarray(cos_phi, float)
    fall = _loop_factor(phases) * np.asarray(i_a, float) * z * (cos - 1j * np.sqrt(1.0 - cos * cos))
    rest = us**2 - fall.imag**2
    if np.any(rest < 0.0) or np.any(np.sqrt(np.maximum(rest, 0.0)) < fall.real):
        raise ValueError("the cable cannot carry this current at this voltage")
    return np.asarray(us - (np.sqrt(rest) - fall.real))


def _loop_factor(phases: int) -> float:
    """Return what multiplies the fall along one conductor."""
    if phases not in {1, 2, 3}:
        raise ValueError(f"phases must be 1, 2 or 3, not {phases}")
    return float(np.sqrt(3.0)) if phases == 3 else 2.0
