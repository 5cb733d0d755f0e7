"""What feeds the plant: generating sets, shore supplies, converter supplies, synchronous motors.

Percent of the workbook are plain fractions here (``_pu``); every base is named in the attribute's text.
``None`` means that the workbook does not say and no typical value may stand in for it.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

GensetService = Literal["main", "harbour", "emergency"]
FieldSupply = Literal[
    "auxiliary winding",
    "permanent magnet",
    "shunt",
    "compounded",
    "compounded without regulator",
    "fixed",
]
DroopBase = Literal["rated load at rated pf", "rated kVA", "rated kvar"]
DroopLaw = Literal["phasor", "reactive current"]
RegulatorMode = Literal["droop", "no droop", "cross-current", "fixed excitation", "kvar control"]
GovernorMode = Literal["droop", "isochronous", "load sharing"]
ConverterControl = Literal["grid forming", "grid following"]


@dataclass(frozen=True, slots=True, kw_only=True)
class MachineData:
    """A synchronous machine's constants, per unit of its own rated kVA and voltage.

    ``x_d1_pu`` is the transient, ``x_d2_pu`` the subtransient reactance (unsaturated);
    the saturated pair serves faults.
    """

    x_d_pu: float
    x_d1_pu: float
    x_d2_pu: float
    x_d1_saturated_pu: float
    x_d2_saturated_pu: float
    x_q_pu: float
    x_q1_pu: float
    x_q2_pu: float
    x_l_pu: float
    x_2_pu: float
    x_0_pu: float
    r_stator_pu: float
    t_d01_s: float
    t_d1_s: float
    t_d2_s: float
    t_q2_s: float
    t_armature_s: float
    saturation_10: float
    saturation_12: float
    reactance_tolerance: float
    inertia_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ExcitationSystem:
    """How the field is fed.

    ``ceiling`` is a multiple of the field current at rated load and power factor;
    ``unregulated_voltage_pu`` the voltage of a compounded set whose regulator takes nothing away.
    """

    field_supply: FieldSupply
    unregulated_voltage_pu: float
    compound_current_share: float
    ceiling: float
    exciter_time_constant_s: float | None
    gain: float
    integral_per_s: float
    derivative_s: float
    v_per_hz_knee_hz: float | None
    sustained_current: float | None
    sustained_duration_s: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class RegulatorSettings:
    """Voltage setting of a set: no-load voltage and droop, both per unit of rated voltage."""

    no_load_voltage_pu: float
    droop_pu: float
    droop_base: DroopBase
    droop_law: DroopLaw
    mode: RegulatorMode
    reversed_polarity: bool
    cross_current_group: str | None


@dataclass(frozen=True, slots=True, kw_only=True)
class GovernorSettings:
    """Speed setting of a set: no-load frequency and droop, both per unit of rated frequency.

    The droop is the fall from no load to rated kW.
    """

    no_load_frequency_pu: float
    droop_pu: float
    mode: GovernorMode
    time_constant_s: float
    dead_time_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Genset:
    """A generating set. Rated kW is the lesser of alternator kW and engine power x efficiency."""

    name: str
    board: str
    cell: str
    s_rated_kva: float
    cos_phi_rated: float
    u_rated_v: float
    p_engine_kw: float
    alternator_efficiency: float
    service: GensetService
    min_engine_load: float
    max_load_step: float
    start_delay_s: float
    starts_at_island_load: float | None
    redundancy_group: str | None
    machine: MachineData
    excitation: ExcitationSystem
    regulator: RegulatorSettings
    governor: GovernorSettings

    @property
    def p_rated_kw(self) -> float:
        """Rated active power at the terminals [kW]."""
        return min(self.s_rated_kva * self.cos_phi_rated, self.p_engine_kw * self.alternator_efficiency)

    @property
    def q_rated_kvar(self) -> float:
        """Rated reactive power, at rated kVA and rated power factor [kvar]."""
        return float(self.s_rated_kva * (1.0 - self.cos_phi_rated**2) ** 0.5)


@dataclass(frozen=True, slots=True, kw_only=True)
class ShoreSupply:
    """A shore connection: voltage and frequency behind its fault-level impedance."""

    name: str
    board: str
    cell: str
    u_rated_v: float
    f_hz: float
    i_rated_a: float
    fault_level_max_mva: float | None
    fault_level_min_mva: float | None
    r_over_x: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ConverterSupply:
    """A battery, shaft generator or fuel cell that feeds through a converter."""

    name: str
    board: str
    cell: str
    s_rated_kva: float
    control: ConverterControl
    p_set_kw: float | None
    q_set_kvar: float | None
    voltage_droop_pu: float
    speed_droop_pu: float
    stored_energy_kwh: float | None
    short_circuit_current: float | None
    short_circuit_duration_s: float | None
    spectrum: str | None


@dataclass(frozen=True, slots=True, kw_only=True)
class SynchronousMotor:
    """A synchronous motor on a board."""

    name: str
    board: str
    cell: str
    s_rated_kva: float
    cos_phi_rated: float
    u_rated_v: float
    p_output_kw: float
    efficiency: float
    machine: MachineData
    excitation: ExcitationSystem
