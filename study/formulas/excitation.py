"""What the field supply of a set can give in steady state, and the voltage the set then holds.

Field is per unit of the field that gives rated voltage on the air-gap line, so voltage and current of the
field are equal in steady state. Every supply is one form: a part that does not depend on the machine, and the
phasor sum of a part derived from its voltage and a part derived from its current, ``c + |Kv V + j Ki I|``.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from study.formulas.synchronous import (
    Machine,
    field_required,
    field_required_for_load,
    highest_held_voltage,
)

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class FieldSupply:
    """The most field that a supply gives, ``constant + |voltage_gain V + j current_gain I|``.

    Attributes
    ----------
    constant_pu : float
        Part that does not depend on the machine. [pu field]
    voltage_gain : float
        Kv, field for 1 pu terminal voltage. [pu field]
    current_gain : float
        Ki, field for 1 pu stator current. [pu field]
    """

    constant_pu: float
    voltage_gain: float
    current_gain: float


def available_field(v_pu: ArrayLike, i_pu: ArrayLike, phi_rad: ArrayLike, supply: FieldSupply) -> FloatArray:
    """Return the most field that a supply gives at a terminal voltage and a stator current.

    With V as reference, ``|Kv V + jKi I| = sqrt((Kv V + Ki I sin(phi))^2 + (Ki I cos(phi))^2)``: a lagging
    current adds, a leading one takes away.

    Source: IEEE 421.5-2016, type ST2A, compound source ``VE = |Kp Vt + jKi It|``, without the drop of its
    rectifier; from memory.

    Parameters
    ----------
    v_pu, i_pu : float or ndarray
        Terminal voltage and stator current. [pu]
    phi_rad : float or ndarray
        Angle of lag. [rad]
    supply : FieldSupply
        Gains of the supply.

    Returns
    -------
    ndarray
        Field. [pu of the air-gap-line field at rated voltage]

    Examples
    --------
    >>> s = FieldSupply(constant_pu=0.0, voltage_gain=1.0, current_gain=2.0)
    >>> round(float(available_field(1.0, 1.0, np.arccos(0.8), s)), 4)
    2.7203
    """
    v, i, phi = np.asarray(v_pu, float), np.asarray(i_pu, float), np.asarray(phi_rad, float)
    in_phase = supply.voltage_gain * v + supply.current_gain * i * np.sin(phi)
    return np.asarray(supply.constant_pu + np.hypot(in_phase, supply.current_gain * i * np.cos(phi)))


def fixed_field(field_pu: float) -> FieldSupply:
    """Return the supply of a set without regulator, or at its field-current limit: a constant field.

    Source: definition.

    Parameters
    ----------
    field_pu : float
        Field. [pu of the air-gap-line field at rated voltage]

    Returns
    -------
    FieldSupply
        Constant part only.

    Raises
    ------
    ValueError
        A field below 0.

    Examples
    --------
    >>> fixed_field(2.7).constant_pu
    2.7
    """
    if field_pu < 0.0:
        raise ValueError(f"field {field_pu} pu must be 0 or more")
    return FieldSupply(constant_pu=field_pu, voltage_gain=0.0, current_gain=0.0)


def independent_ceiling(ceiling: float, rated_load_field_pu: float) -> FieldSupply:
    """Return the ceiling of a regulator fed from a permanent magnet machine or an auxiliary winding.

    Source: common practice, no source: such a supply does not fall with the terminal voltage.

    Parameters
    ----------
    ceiling : float
        Excitation ceiling. [x rated-load field]
    rated_load_field_pu : float
        Field at rated load. [pu of the air-gap-line field at rated voltage]

    Returns
    -------
    FieldSupply
        Constant part only.

    Raises
    ------
    ValueError
        A ceiling below 0.

    Examples
    --------
    >>> independent_ceiling(2.0, 2.5).constant_pu
    5.0
    """
    return fixed_field(ceiling * rated_load_field_pu)


def shunt_ceiling(ceiling: float, rated_load_field_pu: float) -> FieldSupply:
    """Return the ceiling of a regulator fed from the set's own terminals: in proportion to their voltage.

    Source: common practice, no source; IEEE 421.5 bus-fed sources (ST1A: ``VRmax Vt``), from memory.

    Parameters
    ----------
    ceiling : float
        Excitation ceiling at rated voltage. [x rated-load field]
    rated_load_field_pu : float
        Field at rated load. [pu of the air-gap-line field at rated voltage]

    Returns
    -------
    FieldSupply
        Voltage-derived part only.

    Raises
    ------
    ValueError
        A ceiling below 0.

    Examples
    --------
    >>> shunt_ceiling(2.0, 2.5).voltage_gain
    5.0
    """
    if ceiling < 0.0:
        raise ValueError(f"ceiling {ceiling} must be 0 or more")
    return FieldSupply(constant_pu=0.0, voltage_gain=ceiling * rated_load_field_pu, current_gain=0.0)


def compound_from_two_loads(
    v_no_load_pu: float, v_loaded_pu: float, cos_phi: float, machine: Machine
) -> FieldSupply:
    """Return the compound source that gives one voltage at no load and one at rated current.

    ``Kv V0`` is the field required at no load, ``|Kv V1 + jKi|`` that at 1 pu current of rated power factor.
    With 1.2 and 1.2 this is the unregulated level of a compounded set whose regulator only takes field away.

    Source: algebra on the compound source of IEEE 421.5 (see `available_field`).

    Parameters
    ----------
    v_no_load_pu, v_loaded_pu : float
        Unregulated voltage at no load and at 1 pu current. [pu]
    cos_phi : float
        Rated power factor, lagging.
    machine : Machine
        Reactances and saturation.

    Returns
    -------
    FieldSupply
        Voltage-derived and current-derived parts.

    Raises
    ------
    ValueError
        The machine needs less field at rated load than the voltage-derived part alone gives.

    Examples
    --------
    >>> m = Machine(xd_pu=2.0, xq_pu=2.0, xd_transient_pu=0.25)
    >>> s = compound_from_two_loads(1.0, 1.0, 0.8, m)
    >>> round(s.voltage_gain, 9), round(s.current_gain, 9)
    (1.0, 2.0)
    """
    phi = float(np.arccos(cos_phi))
    voltage_gain = float(field_required(v_no_load_pu, 0.0, 0.0, machine)) / v_no_load_pu
    field_loaded = float(field_required(v_loaded_pu, 1.0, phi, machine))
    from_voltage = voltage_gain * v_loaded_pu
    if field_loaded < from_voltage:
        raise ValueError("the voltage-derived field alone exceeds the field at rated load")
    in_phase = from_voltage * np.sin(phi)
    current_gain = float(np.sqrt(in_phase**2 + field_loaded**2 - from_voltage**2) - in_phase)
    return FieldSupply(constant_pu=0.0, voltage_gain=voltage_gain, current_gain=current_gain)


def compound_from_current_share(
    current_share: float, v_loaded_pu: float, cos_phi: float, machine: Machine
) -> FieldSupply:
    """Return the compound source with a given current-derived part that gives a voltage at rated current.

    ``Ki = share x field``, and Kv such that ``|Kv V1 + jKi|`` is the field at 1 pu current of rated power
    factor. The voltage at no load then follows from the saturation curve.

    Source: algebra on the compound source of IEEE 421.5 (see `available_field`).

    Parameters
    ----------
    current_share : float
        Current-derived part over the whole field at that load, as magnitudes.
    v_loaded_pu : float
        Unregulated voltage at 1 pu current. [pu]
    cos_phi : float
        Rated power factor, lagging.
    machine : Machine
        Reactances and saturation.

    Returns
    -------
    FieldSupply
        Voltage-derived and current-derived parts.

    Raises
    ------
    ValueError
        A share that is not from 0 to 1.

    Examples
    --------
    >>> m = Machine(xd_pu=2.0, xq_pu=2.0, xd_transient_pu=0.25)
    >>> s = compound_from_current_share(2.0 / 2.720294, 1.0, 0.8, m)
    >>> round(s.voltage_gain, 5), round(s.current_gain, 5)
    (1.0, 2.0)
    """
    if not 0.0 <= current_share <= 1.0:
        raise ValueError(f"current share {current_share} must be from 0 to 1")
    phi = float(np.arccos(cos_phi))
    field_loaded = float(field_required(v_loaded_pu, 1.0, phi, machine))
    current_gain = current_share * field_loaded
    from_voltage = np.sqrt(field_loaded**2 - (current_gain * np.cos(phi)) ** 2) - current_gain * np.sin(phi)
    voltage_gain = float(from_voltage) / v_loaded_pu
    return FieldSupply(constant_pu=0.0, voltage_gain=voltage_gain, current_gain=current_gain)


def held_voltage(
    p_pu: ArrayLike,
    q_pu: ArrayLike,
    *,
    exponent: float,
    v_top_pu: ArrayLike,
    supply: FieldSupply,
    machine: Machine,
) -> FloatArray:
    """Return the voltage that a set holds on a load ``P V^n + jQ V^n`` with the supply at its limit.

    It is `v_top_pu` where the supply suffices there. With the regulated voltage as top it is the voltage of a
    regulated set within its field, and of a compounded set whose regulator can only take excitation away. A
    set without regulator wants a top well above any voltage it can reach.

    Source: operating point of `available_field` and `field_required_for_load`; common practice, no source.

    Parameters
    ----------
    p_pu, q_pu : float or ndarray
        Power at 1.0 pu voltage. [pu]
    exponent : float
        n: 0 constant power, 1 constant current, 2 constant impedance.
    v_top_pu : float or ndarray
        Regulated voltage, or the highest to be considered. [pu]
    supply : FieldSupply
        The most the supply gives.
    machine : Machine
        Reactances and saturation.

    Returns
    -------
    ndarray
        Terminal voltage [pu]; nan where no voltage can be held: a self-excited set collapses.

    Examples
    --------
    >>> m = Machine(xd_pu=2.0, xq_pu=2.0, xd_transient_pu=0.25)
    >>> pmg = independent_ceiling(1.5, 2.720294)
    >>> held = held_voltage([0.8, 1.6], [0.6, 1.2], exponent=2.0, v_top_pu=1.0, supply=pmg, machine=m)
    >>> held.round(4).tolist()
    [1.0, 0.8739]
    """
    p, q, v_top = np.broadcast_arrays(*(np.asarray(x, float) for x in (p_pu, q_pu, v_top_pu)))
    apparent, phi = np.hypot(p, q), np.arctan2(q, p)

    def surplus(v: FloatArray) -> FloatArray:
        given = available_field(v, apparent * v ** (exponent - 1.0), phi, supply)
        return np.asarray(given - field_required_for_load(v, p, q, exponent, machine))

    return highest_held_voltage(surplus, v_top)


def unregulated_no_load_voltage(supply: FieldSupply, v_top_pu: float, machine: Machine) -> float:
    """Return the voltage that a supply alone builds up at no load.

    Where the supply line stays below the saturation curve the set does not excite itself.

    Source: build-up of self-excited machines: intersection of supply line and open-circuit characteristic;
    Fitzgerald, Kingsley, Umans, *Electric Machinery*, from memory.

    Parameters
    ----------
    supply : FieldSupply
        The most the supply gives.
    v_top_pu : float
        Highest voltage to be considered. [pu]
    machine : Machine
        Saturation is what fixes the voltage of a self-excited set.

    Returns
    -------
    float
        Voltage [pu]; nan where none builds up.

    Raises
    ------
    ValueError
        The supply exceeds the saturation curve up to the highest voltage: nothing fixes the voltage.

    Examples
    --------
    >>> from study.formulas.saturation import saturation_curve
    >>> m = Machine(xd_pu=2.0, xq_pu=1.2, xd_transient_pu=0.25, saturation=saturation_curve(0.11, 0.39))
    >>> s = FieldSupply(constant_pu=0.0, voltage_gain=1.39, current_gain=1.5)
    >>> round(unregulated_no_load_voltage(s, 2.0, m), 6)
    1.2
    """
    v = float(held_voltage(0.0, 0.0, exponent=2.0, v_top_pu=v_top_pu, supply=supply, machine=machine))
    if v == v_top_pu:
        raise ValueError(f"the supply exceeds the saturation curve up to {v_top_pu} pu: no voltage is fixed")
    return v
