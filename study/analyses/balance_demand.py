"""What every load takes in every mode: input at its part load, and what of it counts in the balance.

The rules of counting, first match wins:

1. the factor of the Simultaneity sheet for the load's service, duty and mode;
2. in an emergency mode 1, since SOLAS II-1/42 and 43 want the services that the emergency source may have to
   feed together counted together (from memory);
3. continuous duty 1; intermittent duty one over the diversity of Acceptance; occasional duty 0 (common
   practice, no source: what runs now and then is covered by the spare of the sets).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from study.formulas.demand import part_load_efficiency, part_load_power_factor, reactive_power_kvar
from study.model.loads import Load
from study.model.modes import Mode
from study.model.plant import Plant
from study.model.sources import SynchronousMotor
from study.results.arrays import BoolArray, FloatArray, IntArray, read_only
from study.results.balance import DUTIES, ConsumerDemand

INTERMITTENT = DUTIES.index("intermittent")


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadTable:
    """The loads of the plant as arrays [load]; ``service`` indexes ``services``."""

    names: tuple[str, ...]
    services: tuple[str, ...]
    service: IntArray
    p_rated_kw: FloatArray
    p_absorbed_kw: FloatArray
    efficiency: FloatArray
    cos_phi: FloatArray
    is_motor: BoolArray
    behind_converter: BoolArray
    trip_stage: IntArray
    essential: BoolArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """The demand of every mode as arrays [mode, load]; ``duty`` indexes ``DUTIES``."""

    in_use: FloatArray
    load_factor: FloatArray
    duty: IntArray


def load_table(plant: Plant) -> LoadTable:
    """Return the loads as arrays, with what does not change from mode to mode.

    The power factor of a consumer behind a converter is the displacement power factor of the converter, at
    every load; only motors on the board itself follow their load.
    """
    loads = plant.loads
    services = tuple(dict.fromkeys(load.service for load in loads))
    number = {name: i for i, name in enumerate(services)}
    return LoadTable(
        names=tuple(load.name for load in loads),
        services=services,
        service=np.array([number[load.service] for load in loads], dtype=np.int64),
        p_rated_kw=np.array([load.p_rated_kw for load in loads], dtype=float),
        p_absorbed_kw=np.array([load.p_absorbed_kw for load in loads], dtype=float),
        efficiency=np.array([load.efficiency if load.kind == "motor" else 1.0 for load in loads]),
        cos_phi=np.array([board_cos_phi(load) for load in loads], dtype=float),
        is_motor=np.array([load.kind == "motor" for load in loads], dtype=bool),
        behind_converter=np.array([behind_converter(load) for load in loads], dtype=bool),
        trip_stage=np.array([load.trip_stage for load in loads], dtype=np.int64),
        essential=np.array([load.essential_to != "none" for load in loads], dtype=bool),
    )


def behind_converter(load: Load) -> bool:
    """Return True where the board sees a converter and not the motor or consumer itself."""
    by_start = load.motor is not None and load.motor.starting_method == "converter"
    return load.converter is not None or by_start


def board_cos_phi(load: Load) -> float:
    """Return the power factor at rated output as the board sees it."""
    return load.cos_phi if load.converter is None else load.converter.displacement_cos_phi


def asked_of(plant: Plant, table: LoadTable) -> Asked:
    """Return the demand of all modes as arrays; a load that a mode does not name is not in use."""
    shape = (len(plant.modes), len(table.names))
    in_use, load_factor = np.zeros(shape), np.zeros(shape)
    duty = np.zeros(shape, dtype=np.int64)
    column = {name: i for i, name in enumerate(table.names)}
    number = {name: i for i, name in enumerate(DUTIES)}
    for row, mode in enumerate(plant.modes):
        where = [column[name] for name in mode.demand if name in column]
        rows = [
            (d.in_use, d.load_factor, number[d.duty]) for name, d in mode.demand.items() if name in column
        ]
        if rows:
            in_use[row, where], load_factor[row, where], duty[row, where] = zip(*rows, strict=True)
    return Asked(in_use=in_use, load_factor=load_factor, duty=duty)


def consumer_demand(
    modes: tuple[Mode, ...], table: LoadTable, asked: Asked, fed: BoolArray, diversity: float
) -> ConsumerDemand:
    """Return what every load takes in every mode.

    Parameters
    ----------
    modes : tuple of Mode
        Their names, kinds and simultaneity factors are used.
    table : LoadTable
        The loads as arrays.
    asked : Asked
        The demand of the modes as arrays.
    fed : ndarray of bool, shape (mode, load)
        False where the load's board is dead.
    diversity : float
        Sum of the intermittent loads over the largest demand they make together, 1 or more. [-]

    Returns
    -------
    ConsumerDemand
        Arrays [mode, load]. Efficiency is 1 where the rating is an input; loads that are not in use keep the
        values at rated output.
    """
    in_use, load_factor = asked.in_use, asked.load_factor
    output_kw = table.p_absorbed_kw * load_factor
    idle = (in_use == 0.0) | (output_kw == 0.0)
    beta = np.where(idle, 1.0, np.abs(output_kw) / table.p_rated_kw)
    efficiency = np.where(
        table.is_motor & ~idle, part_load_efficiency(beta, table.efficiency), table.efficiency
    )
    cos_phi = np.where(
        table.is_motor & ~table.behind_converter & ~idle,
        part_load_power_factor(beta, table.cos_phi, table.efficiency),
        table.cos_phi,
    )
    # A machine that is driven gives its output less its losses back to the board.
    p_unit_kw = np.where(output_kw >= 0.0, output_kw / efficiency, output_kw * efficiency)
    p_kw = in_use * p_unit_kw
    q_kvar = reactive_power_kvar(np.abs(p_kw), cos_phi)
    factor = counting_factors(modes, table, asked.duty, diversity) * fed
    return ConsumerDemand(
        modes=tuple(mode.name for mode in modes),
        loads=table.names,
        in_use=read_only(in_use),
        load_factor=read_only(load_factor),
        duty=read_only(asked.duty),
        efficiency=read_only(efficiency),
        cos_phi=read_only(cos_phi),
        factor=read_only(factor),
        p_unit_kw=read_only(p_unit_kw),
        p_kw=read_only(p_kw),
        q_kvar=read_only(q_kvar),
        p_counted_kw=read_only(p_kw * factor),
        q_counted_kvar=read_only(q_kvar * factor),
        fed=read_only(fed, bool),
    )


def counting_factors(
    modes: tuple[Mode, ...], table: LoadTable, duty: IntArray, diversity: float
) -> FloatArray:
    """Return the part of each load that counts in each mode, dead boards left aside.

    Source: ClassNK-type electric load analysis, PG = sum(Pc) + chi sum(Pi), chi = 1/diversity with a
    diversity of 2 to 3; the exceptions are in the head of this module.

    Parameters
    ----------
    modes : tuple of Mode
        Their kind and their simultaneity factors are used.
    table : LoadTable
        The loads as arrays.
    duty : ndarray of int, shape (mode, load)
        Index into ``DUTIES``.
    diversity : float
        Diversity of intermittent loads. [-]

    Returns
    -------
    ndarray, shape (mode, load)
        [-]
    """
    by_duty = np.array([1.0, 1.0 / diversity, 0.0])
    emergency = np.array([mode.kind == "emergency" for mode in modes], dtype=bool)[:, None]
    factor = np.where(emergency, 1.0, by_duty[duty])
    services = {name: i for i, name in enumerate(table.services)}
    for row, mode in enumerate(modes):
        for (service, kind), value in mode.simultaneity.items():
            hit = (table.service == services.get(service, -1)) & (duty[row] == DUTIES.index(kind))
            factor[row, hit] = value
    return factor


def alternative_total_kw(demand: ConsumerDemand, row: int) -> float:
    """Return the total of one mode by the other rule: largest intermittent consumer instead of diversity.

    What is not intermittent counts as in the balance; of the intermittent loads count those that are sure
    to run together (factor 1) and the largest single unit of the others.

    Source: ClassNK-type electric load analysis: chi sum(Pi) may be replaced by the largest intermittent
    motor and those sure to run with it.
    """
    counted = demand.p_counted_kw[row]
    varies = (demand.duty[row] == INTERMITTENT) & (demand.factor[row] < 1.0) & demand.fed[row]
    single = demand.p_unit_kw[row] * np.minimum(demand.in_use[row], 1.0)
    largest = float(np.max(single[varies], initial=0.0))
    return float(counted[~varies].sum()) + largest


def synchronous_motor_kw(motor: SynchronousMotor, mode: Mode) -> float:
    """Return the input of a synchronous motor that is on [kW]: its set power, else rated output.

    Demand has no row for it, and its kvar are taken as nil: at rated excitation it gives kvar, which the
    balance does not credit.
    """
    trim = mode.set_points.get(motor.name)
    if trim is not None and trim.p_set_kw is not None:
        return abs(trim.p_set_kw)
    return motor.p_output_kw / motor.efficiency
