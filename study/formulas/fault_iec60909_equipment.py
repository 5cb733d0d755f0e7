"""IEC 60909-0: impedances of equipment and the factors that correct them.

The text of the standard was not at hand: formulas are from memory and are held against the published results
of IEC TR 60909-4.
"""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from study.formulas.fault_current import SQRT3, ComplexArray, FloatArray, as_float
from study.formulas.fault_iec60909 import LV_LIMIT_V

MotorGroup = Literal[
    "above 1 kV, 1 MW per pole pair or more", "above 1 kV, below 1 MW per pole pair", "low voltage"
]
_MOTOR_R_OVER_X = {
    "above 1 kV, 1 MW per pole pair or more": 0.10,
    "above 1 kV, below 1 MW per pole pair": 0.15,
    "low voltage": 0.42,
}


def _sine(cos_phi: ArrayLike) -> FloatArray:
    """Return sin phi of a lagging power factor."""
    return as_float(np.sqrt(1.0 - as_float(cos_phi) ** 2))


def generator_correction(
    *, nominal_v: ArrayLike, rated_v: ArrayLike, c_max: ArrayLike, x_sub_pu: ArrayLike, cos_phi: ArrayLike
) -> FloatArray:
    """Return KG = (Un/UrG) cmax / (1 + x''d sin phi) of a generator without unit transformer.

    Source: IEC 60909-0:2016, synchronous generators, from memory; applied in IEC TR 60909-4.

    Parameters
    ----------
    nominal_v, rated_v : array_like
        Nominal voltage of the system and rated voltage of the generator [V].
    c_max : array_like
        Voltage factor for the maximum current.
    x_sub_pu : array_like
        x''d on the generator's rating [pu].
    cos_phi : array_like
        Rated power factor, over-excited.

    Returns
    -------
    FloatArray
        KG.

    Examples
    --------
    >>> round(float(generator_correction(
    ...     nominal_v=440.0, rated_v=450.0, c_max=1.05, x_sub_pu=0.15, cos_phi=0.8)), 4)
    0.9419
    """
    ratio = as_float(nominal_v) / as_float(rated_v)
    return as_float(ratio * as_float(c_max) / (1.0 + as_float(x_sub_pu) * _sine(cos_phi)))


def unit_correction_with_tap_changer(
    *,
    nominal_v: ArrayLike,
    rated_v: ArrayLike,
    transformer_ratio: ArrayLike,
    c_max: ArrayLike,
    x_sub_pu: ArrayLike,
    x_transformer_pu: ArrayLike,
    cos_phi: ArrayLike,
) -> FloatArray:
    """Return KS of a generator with unit transformer and on-load tap-changer.

    KS = (UnQ/UrG)² (UrTLV/UrTHV)² cmax / (1 + abs(x''d - xT) sin phi), on tr² ZG + ZTHV.

    Source: IEC 60909-0:2016, power station units, from memory; applied in IEC TR 60909-4.

    Parameters
    ----------
    nominal_v, rated_v : array_like
        Nominal voltage of the high-voltage system and rated voltage of the generator [V].
    transformer_ratio : array_like
        UrTHV/UrTLV, above 1.
    c_max : array_like
        Voltage factor for the maximum current.
    x_sub_pu, x_transformer_pu : array_like
        x''d on the generator's and xT on the transformer's rating [pu].
    cos_phi : array_like
        Rated power factor of the generator.

    Returns
    -------
    FloatArray
        KS.
    """
    squared = (as_float(nominal_v) / as_float(rated_v) / as_float(transformer_ratio)) ** 2
    difference = np.abs(as_float(x_sub_pu) - as_float(x_transformer_pu))
    return as_float(squared * as_float(c_max) / (1.0 + difference * _sine(cos_phi)))


def unit_correction_without_tap_changer(
    *,
    nominal_v: ArrayLike,
    rated_v: ArrayLike,
    transformer_ratio: ArrayLike,
    generator_voltage_range: ArrayLike,
    c_max: ArrayLike,
    x_sub_pu: ArrayLike,
    cos_phi: ArrayLike,
) -> FloatArray:
    """Return KSO of a generator with unit transformer without on-load tap-changer, at its main tap.

    KSO = UnQ / [UrG (1 + pG)] UrTLV/UrTHV cmax / (1 + x''d sin phi), on tr² ZG + ZTHV.

    Source: IEC 60909-0:2016, power station units, from memory; applied in IEC TR 60909-4.

    Parameters
    ----------
    nominal_v, rated_v : array_like
        Nominal voltage of the high-voltage system and rated voltage of the generator [V].
    transformer_ratio : array_like
        UrTHV/UrTLV, above 1.
    generator_voltage_range : array_like
        pG, highest continuous voltage above rated [pu].
    c_max : array_like
        Voltage factor for the maximum current.
    x_sub_pu : array_like
        x''d on the generator's rating [pu].
    cos_phi : array_like
        Rated power factor of the generator.

    Returns
    -------
    FloatArray
        KSO.
    """
    highest = as_float(rated_v) * (1.0 + as_float(generator_voltage_range))
    ratio = as_float(nominal_v) / highest / as_float(transformer_ratio)
    return as_float(ratio * as_float(c_max) / (1.0 + as_float(x_sub_pu) * _sine(cos_phi)))


def generator_fictitious_resistance_ohm(
    x_sub_ohm: ArrayLike, rated_v: ArrayLike, rating_va: ArrayLike
) -> FloatArray:
    """Return RGf, which serves kappa and the peak alone: 0.15, 0.07 or 0.05 times X''d.

    Source: IEC 60909-0:2016, synchronous generators, from memory.

    Parameters
    ----------
    x_sub_ohm : array_like
        X''d [ohm].
    rated_v, rating_va : array_like
        Rated voltage [V] and rating [VA].

    Returns
    -------
    FloatArray
        [ohm]

    Examples
    --------
    >>> generator_fictitious_resistance_ohm([1.0, 1.0, 1.0], [450.0, 6600.0, 15e3], [1e6, 1e7, 2e8])
    array([0.15, 0.07, 0.05])
    """
    high = np.where(as_float(rating_va) >= 100e6, 0.05, 0.07)
    return as_float(as_float(x_sub_ohm) * np.where(as_float(rated_v) <= LV_LIMIT_V, 0.15, high))


def transformer_impedance_ohm(
    rating_va: ArrayLike, rated_v: ArrayLike, uk_pu: ArrayLike, ur_pu: ArrayLike
) -> ComplexArray:
    """Return ZT = RT + jXT with abs(ZT) = uk UrT²/SrT and RT = uR UrT²/SrT.

    Source: IEC 60909-0:2016, two-winding transformers, from memory.

    Parameters
    ----------
    rating_va, rated_v : array_like
        Rating [VA] and rated voltage of the side to which the impedance is referred [V].
    uk_pu, ur_pu : array_like
        Impedance voltage and its resistive part, load losses over rating [pu].

    Returns
    -------
    ComplexArray
        [ohm]

    Raises
    ------
    ValueError
        A resistive part above the impedance voltage.

    Examples
    --------
    >>> transformer_impedance_ohm(1e6, 1000.0, 0.05, 0.03)
    array(0.03+0.04j)
    """
    uk, ur = as_float(uk_pu), as_float(ur_pu)
    if not ((ur >= 0.0) & (ur <= uk)).all():
        raise ValueError("load losses of a transformer lie between 0 and its impedance voltage")
    base = as_float(rated_v) ** 2 / as_float(rating_va)
    return np.asarray(base * (ur + 1j * np.sqrt(uk**2 - ur**2)), dtype=complex)


def transformer_correction(c_max: ArrayLike, x_pu: ArrayLike) -> FloatArray:
    """Return KT = 0.95 cmax / (1 + 0.6 xT); for three windings once for each pair of them.

    Source: IEC 60909-0:2016, impedance correction of network transformers, from memory; applied in
    IEC TR 60909-4.

    Parameters
    ----------
    c_max : array_like
        Voltage factor of the low-voltage side's system for the maximum current.
    x_pu : array_like
        xT on the transformer's rating [pu].

    Returns
    -------
    FloatArray
        KT.

    Examples
    --------
    >>> round(float(transformer_correction(1.1, 0.12)), 4)
    0.9748
    """
    return as_float(0.95 * as_float(c_max) / (1.0 + 0.6 * as_float(x_pu)))


def three_winding_star(
    z_ab: ArrayLike, z_ac: ArrayLike, z_bc: ArrayLike
) -> tuple[ComplexArray, ComplexArray, ComplexArray]:
    """Return the star impedances ZA, ZB, ZC of a three-winding transformer from those of its pairs.

    Source: IEC 60909-0:2016, three-winding transformers, from memory.

    Parameters
    ----------
    z_ab, z_ac, z_bc : array_like of complex
        Impedance of each pair with the third winding open, already corrected, all referred to one side [ohm].

    Returns
    -------
    tuple of ComplexArray
        ZA, ZB, ZC on the same side [ohm].

    Examples
    --------
    >>> three_winding_star(3j, 4j, 5j)
    (array(0.+1.j), array(0.+2.j), array(0.+3.j))
    """
    ab, ac, bc = (np.asarray(z, dtype=complex) for z in (z_ab, z_ac, z_bc))
    half = 0.5 * (ab + ac + bc)
    return np.asarray(half - bc), np.asarray(half - ac), np.asarray(half - ab)


def motor_impedance_ohm(
    *, rated_v: ArrayLike, rated_a: ArrayLike, starting_ratio: ArrayLike, r_over_x: ArrayLike
) -> ComplexArray:
    """Return ZM of asynchronous motors, abs(ZM) = UrM / (sqrt3 IrM ILR/IrM).

    A regenerating converter drive counts as a motor with ILR/IrM 3 and R/X 0.10, for I''k and ip alone.

    Source: IEC 60909-0:2016, asynchronous motors, from memory; applied in IEC TR 60909-4.

    Parameters
    ----------
    rated_v, rated_a : array_like
        Rated line voltage [V] and current [A].
    starting_ratio : array_like
        ILR/IrM.
    r_over_x : array_like
        RM/XM, see `motor_r_over_x`.

    Returns
    -------
    ComplexArray
        [ohm]

    Examples
    --------
    >>> z = motor_impedance_ohm(rated_v=3**0.5, rated_a=1.0, starting_ratio=5.0, r_over_x=0.42)
    >>> round(float(abs(z)), 6), round(float(z.real / z.imag), 6)
    (0.2, 0.42)
    """
    ratio = as_float(r_over_x)
    size = as_float(rated_v) / (SQRT3 * as_float(rated_a) * as_float(starting_ratio))
    return np.asarray(size * (ratio + 1j) / np.hypot(ratio, 1.0), dtype=complex)


def motor_r_over_x(group: MotorGroup) -> float:
    """Return the usual RM/XM of a motor of which it is not known.

    Source: IEC 60909-0:2016, asynchronous motors, from memory.

    Parameters
    ----------
    group : str
        By voltage and power per pole pair; low-voltage groups include their cables.

    Returns
    -------
    float
        RM/XM.

    Examples
    --------
    >>> motor_r_over_x("low voltage")
    0.42
    """
    return _MOTOR_R_OVER_X[group]


def feeder_impedance_ohm(
    nominal_v: ArrayLike, c: ArrayLike, initial_a: ArrayLike, r_over_x: ArrayLike
) -> ComplexArray:
    """Return ZQ = c Un / (sqrt3 I''kQ) of a network feeder, for example a shore supply.

    Source: IEC 60909-0:2016, network feeders, from memory; applied in IEC TR 60909-4.

    Parameters
    ----------
    nominal_v, c : array_like
        Nominal line voltage [V] and voltage factor with which I''kQ was stated.
    initial_a : array_like
        I''kQ [A].
    r_over_x : array_like
        RQ/XQ.

    Returns
    -------
    ComplexArray
        [ohm]
    """
    ratio = as_float(r_over_x)
    size = as_float(c) * as_float(nominal_v) / (SQRT3 * as_float(initial_a))
    return np.asarray(size * (ratio + 1j) / np.hypot(ratio, 1.0), dtype=complex)
