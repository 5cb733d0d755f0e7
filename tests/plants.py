"""Small plants written by hand, for tests: every function has a sensible default for every field.

``plant(boards=[board("MSB")], gensets=[genset("G1", "MSB")], loads=[load("L1", "MSB")])`` is whole.
Percentages are fractions, as everywhere in the model. Changes go to the object's own fields; those of a
set's ``machine``, ``excitation``, ``regulator`` and ``governor`` are found by name
(``genset("G1", "MSB", x_d_pu=2.2, no_load_voltage_pu=1.03)``), with the prefixes ``voltage_`` and
``speed_`` where two parts use one word (``voltage_droop_pu``, ``speed_droop_pu``, ``regulator_mode``,
``governor_mode``).
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import fields, replace
from typing import Any

from study.model.branches import (
    Board,
    Cable,
    Filter,
    Reactor,
    ThreeWindingTransformer,
    Tie,
    Transformer,
)
from study.model.loads import ConverterData, Load, MotorData
from study.model.modes import Demand, Mode, SetPoint, Transfer
from study.model.plant import Plant, Project
from study.model.protection import Device
from study.model.sources import (
    ConverterSupply,
    ExcitationSystem,
    Genset,
    GovernorSettings,
    MachineData,
    RegulatorSettings,
    ShoreSupply,
    SynchronousMotor,
)

PROJECT = Project(
    vessel="Test plant",
    hull_number="0",
    document_number="T-000",
    revision="0",
    date="2024-01-01",
    prepared_by="test",
    checked_by="test",
    approved_by="test",
    f_rated_hz=60.0,
    rules="none",
    ambient_degc=45.0,
    engine_room_degc=45.0,
)

MACHINE = MachineData(
    x_d_pu=2.0,
    x_d1_pu=0.25,
    x_d2_pu=0.15,
    x_d1_saturated_pu=0.22,
    x_d2_saturated_pu=0.13,
    x_q_pu=1.1,
    x_q1_pu=1.1,
    x_q2_pu=0.17,
    x_l_pu=0.08,
    x_2_pu=0.16,
    x_0_pu=0.05,
    r_stator_pu=0.01,
    t_d01_s=2.5,
    t_d1_s=0.3,
    t_d2_s=0.03,
    t_q2_s=0.03,
    t_armature_s=0.04,
    saturation_10=0.08,
    saturation_12=0.25,
    reactance_tolerance=0.15,
    inertia_s=1.2,
)

EXCITATION = ExcitationSystem(
    field_supply="permanent magnet",
    unregulated_voltage_pu=1.1,
    compound_current_share=0.5,
    ceiling=2.0,
    exciter_time_constant_s=0.2,
    gain=200.0,
    integral_per_s=100.0,
    derivative_s=0.05,
    v_per_hz_knee_hz=57.0,
    sustained_current=3.0,
    sustained_duration_s=5.0,
)

REGULATOR = RegulatorSettings(
    no_load_voltage_pu=1.0,
    droop_pu=0.03,
    droop_base="rated load at rated pf",
    droop_law="phasor",
    mode="droop",
    reversed_polarity=False,
    cross_current_group=None,
)

GOVERNOR = GovernorSettings(
    no_load_frequency_pu=1.04,
    droop_pu=0.04,
    mode="droop",
    time_constant_s=0.2,
    dead_time_s=0.05,
)

MOTOR = MotorData(
    speed_rpm=1770.0,
    poles=4,
    starting_method="direct",
    starting_current=6.5,
    starting_cos_phi=0.3,
    locked_rotor_torque=2.0,
    breakdown_torque=2.6,
    torque_law="fan",
    inertia_kgm2=None,
    starting_time_s=None,
    star_delta_change_s=None,
    autotransformer_tap=0.65,
    soft_starter_current=3.0,
    soft_starter_ramp_s=10.0,
    contactor_drop_out=0.65,
    restart_delay_s=None,
    regenerates=False,
)

CONVERTER = ConverterData(
    kind="6-pulse",
    input_choke_pu=0.03,
    dc_choke_pu=0.0,
    phase_shift_deg=0.0,
    displacement_cos_phi=0.95,
    spectrum=None,
)

# The workbook's words for the same field of two parts of a set.
_RENAMED = {
    "voltage_droop_pu": ("regulator", "droop_pu"),
    "regulator_mode": ("regulator", "mode"),
    "speed_droop_pu": ("governor", "droop_pu"),
    "governor_mode": ("governor", "mode"),
    "governor_time_constant_s": ("governor", "time_constant_s"),
    "governor_dead_time_s": ("governor", "dead_time_s"),
}


def board(name: str, u_nominal_v: float = 440.0, **changes: Any) -> Board:
    """Return a main board of 440 V."""
    start = Board(
        name=name,
        cell="",
        u_nominal_v=u_nominal_v,
        role="main",
        busbar_rated_a=None,
        peak_withstand_ka=None,
        short_time_withstand_ka=None,
        short_time_duration_s=None,
        earthing="insulated",
        earthing_resistor_ohm=None,
        resistor_rating_a=None,
        resistor_time_s=None,
        redundancy_group=None,
    )
    return replace(start, **changes)


def genset(name: str, board: str, **changes: Any) -> Genset:
    """Return a set of 1000 kVA, 0.8, 450 V with an engine of 860 kW, 3 % voltage and 4 % speed droop."""
    start = Genset(
        name=name,
        board=board,
        cell="",
        s_rated_kva=1000.0,
        cos_phi_rated=0.8,
        u_rated_v=450.0,
        p_engine_kw=860.0,
        alternator_efficiency=0.95,
        service="main",
        min_engine_load=0.25,
        max_load_step=0.5,
        start_delay_s=30.0,
        starts_at_island_load=None,
        redundancy_group=None,
        machine=MACHINE,
        excitation=EXCITATION,
        regulator=REGULATOR,
        governor=GOVERNOR,
    )
    return _changed(start, ("machine", "excitation", "regulator", "governor"), changes)


def synchronous_motor(name: str, board: str, **changes: Any) -> SynchronousMotor:
    """Return a synchronous motor of 1000 kVA, 440 V."""
    start = SynchronousMotor(
        name=name,
        board=board,
        cell="",
        s_rated_kva=1000.0,
        cos_phi_rated=0.9,
        u_rated_v=440.0,
        p_output_kw=850.0,
        efficiency=0.95,
        machine=MACHINE,
        excitation=EXCITATION,
    )
    return _changed(start, ("machine", "excitation"), changes)


def shore(name: str, board: str, **changes: Any) -> ShoreSupply:
    """Return a shore connection of 440 V, 60 Hz, 800 A with a fault level of 8 to 15 MVA."""
    start = ShoreSupply(
        name=name,
        board=board,
        cell="",
        u_rated_v=440.0,
        f_hz=60.0,
        i_rated_a=800.0,
        fault_level_max_mva=15.0,
        fault_level_min_mva=8.0,
        r_over_x=0.1,
    )
    return replace(start, **changes)


def converter_supply(name: str, board: str, **changes: Any) -> ConverterSupply:
    """Return a grid-forming battery converter of 500 kVA."""
    start = ConverterSupply(
        name=name,
        board=board,
        cell="",
        s_rated_kva=500.0,
        control="grid forming",
        p_set_kw=None,
        q_set_kvar=None,
        voltage_droop_pu=0.03,
        speed_droop_pu=0.02,
        stored_energy_kwh=500.0,
        short_circuit_current=1.5,
        short_circuit_duration_s=1.0,
        spectrum=None,
    )
    return replace(start, **changes)


def transformer(name: str, from_board: str, to_board: str, **changes: Any) -> Transformer:
    """Return one transformer of 200 kVA, 440/230 V, 4 %."""
    start = Transformer(
        name=name,
        from_board=from_board,
        to_board=to_board,
        cell="",
        s_rated_kva=200.0,
        u_primary_v=440.0,
        u_secondary_v=230.0,
        u_k_pu=0.04,
        copper_loss_kw=2.6,
        iron_loss_kw=0.6,
        vector_group="Dyn11",
        units=1,
        tap_pu=0.0,
        x0_over_x1=0.95,
        r0_over_r1=1.0,
        inrush_current=10.0,
        inrush_decay_s=0.1,
    )
    return replace(start, **changes)


def three_winding(
    name: str, primary_board: str, secondary_board: str, tertiary_board: str, **changes: Any
) -> ThreeWindingTransformer:
    """Return a drive transformer of 2000/1000/1000 kVA, 6600/690/690 V."""
    start = ThreeWindingTransformer(
        name=name,
        primary_board=primary_board,
        secondary_board=secondary_board,
        tertiary_board=tertiary_board,
        cell="",
        s_primary_kva=2000.0,
        s_secondary_kva=1000.0,
        s_tertiary_kva=1000.0,
        u_primary_v=6600.0,
        u_secondary_v=690.0,
        u_tertiary_v=690.0,
        u_k_primary_secondary_pu=0.06,
        u_k_primary_tertiary_pu=0.06,
        u_k_secondary_tertiary_pu=0.11,
        copper_loss_primary_secondary_kw=8.0,
        copper_loss_primary_tertiary_kw=8.0,
        copper_loss_secondary_tertiary_kw=9.0,
        iron_loss_kw=3.5,
        vector_group="Dd0y11",
        tap_pu=0.0,
    )
    return replace(start, **changes)


def cable(name: str, from_end: str, to_end: str, **changes: Any) -> Cable:
    """Return one run of three-core 95 mm2, 50 m, copper class 2, EPR, 90 degC, with maker's R and X."""
    start = Cable(
        name=name,
        from_end=from_end,
        to_end=to_end,
        cell="",
        cores="3",
        runs=1,
        section_mm2=95.0,
        length_m=50.0,
        conductor="copper",
        conductor_class=2,
        tinned=False,
        insulation="EPR",
        conductor_temperature_degc=90.0,
        short_circuit_temperature_degc=250.0,
        ambient_temperature_degc=45.0,
        bunched=1,
        duty="continuous",
        overall_diameter_mm=None,
        further_derating=1.0,
        resistance_ohm_per_km=0.193,
        reactance_ohm_per_km=0.090,
        r0_ohm_per_km=None,
        x0_ohm_per_km=None,
        capacitance_uf_per_km=None,
        rating_a=None,
    )
    return replace(start, **changes)


def tie(name: str, board_a: str, board_b: str, **changes: Any) -> Tie:
    """Return a bus-tie without impedance."""
    start = Tie(
        name=name, board_a=board_a, board_b=board_b, cell="", rated_current_a=2000.0, x_ohm=0.0, r_ohm=0.0
    )
    return replace(start, **changes)


def reactor(name: str, from_board: str, to_board: str, **changes: Any) -> Reactor:
    """Return a series reactor of 20 mohm."""
    start = Reactor(
        name=name,
        from_board=from_board,
        to_board=to_board,
        cell="",
        rated_current_a=1000.0,
        x_ohm=0.02,
        r_ohm=0.0005,
        short_time_ka=None,
        short_time_duration_s=None,
    )
    return replace(start, **changes)


def filter_bank(name: str, board: str, **changes: Any) -> Filter:
    """Return a capacitor bank of 100 kvar, 440 V."""
    start = Filter(
        name=name,
        board=board,
        cell="",
        kind="capacitor",
        q_rated_kvar=100.0,
        u_rated_v=440.0,
        tuning_order=None,
        quality=None,
    )
    return replace(start, **changes)


def load(name: str, board: str, kind: str = "motor", **changes: Any) -> Load:
    """Return one consumer of 100 kW, 440 V: by default a motor, efficiency 0.93, power factor 0.86."""
    start = Load(
        name=name,
        board=board,
        cell="",
        description="",
        service="auxiliaries",
        kind=kind,  # type: ignore[arg-type]
        installed=1,
        p_rated_kw=100.0,
        p_absorbed_kw=100.0,
        absorbed_is_given=False,
        efficiency=0.93 if kind == "motor" else 1.0,
        cos_phi=1.0 if kind == "heating" else 0.86,
        running_current_a=None,
        u_rated_v=440.0,
        phases=3,
        essential_to="none",
        trip_stage=0,
        redundancy_group=None,
        motor=MOTOR if kind == "motor" else None,
        converter=CONVERTER if kind == "converter" else None,
    )
    if "p_rated_kw" in changes:
        changes.setdefault("p_absorbed_kw", changes["p_rated_kw"])
    own = {name: changes.pop(name) for name in [f.name for f in fields(MotorData)] if name in changes}
    if own:
        changes["motor"] = replace(MOTOR, **own)
    return replace(start, **changes)


def device(name: str, equipment: str, **changes: Any) -> Device:
    """Return a circuit breaker of 1600 A with an adjustable release."""
    empty = {f.name: None for f in fields(Device)}
    given = {
        "name": name,
        "equipment": equipment,
        "cell": "",
        "kind": "circuit breaker",
        "i_rated_a": 1600.0,
        "setting_source": "adjustable",
        "long_time_delay_at": 6.0,
        "long_time_law": "I2t",
        "short_time_off": False,
        "short_time_law": "definite",
        "instantaneous_off": False,
        "instantaneous_senses": "rms",
        "current_tolerance": 0.1,
        "time_tolerance": 0.1,
        "opening_time_min_s": 0.02,
        "breaking_time_max_s": 0.05,
    }
    return Device(**{**empty, **given, **changes})  # type: ignore[arg-type]


def demand(in_use: float = 1.0, load_factor: float = 1.0, duty: str = "continuous") -> Demand:
    """Return a demand: one unit in use, full load, continuous."""
    return Demand(in_use=in_use, load_factor=load_factor, duty=duty, cell="")  # type: ignore[arg-type]


def set_point(equipment: str, mode: str = "At sea", **changes: Any) -> SetPoint:
    """Return a set-point that changes nothing but what is named."""
    start = SetPoint(
        equipment=equipment,
        mode=mode,
        cell="",
        no_load_voltage_pu=None,
        no_load_frequency_pu=None,
        p_set_kw=None,
        regulator_mode=None,
        tap_pu=None,
    )
    return replace(start, **changes)


def transfer(target: str, normal_supply: str, other_supply: str, **changes: Any) -> Transfer:
    """Return an automatic second feed."""
    start = Transfer(
        target=target,
        normal_supply=normal_supply,
        other_supply=other_supply,
        cell="",
        automatic=True,
        transfer_at_pu=0.7,
        delay_s=0.5,
    )
    return replace(start, **changes)


def mode(
    name: str = "At sea",
    states: Mapping[str, str] | None = None,
    demand: Mapping[str, Demand] | None = None,
    set_points: Iterable[SetPoint] = (),
    **changes: Any,
) -> Mode:
    """Return a sea mode in which everything not named is on."""
    start = Mode(
        name=name,
        cell="",
        description="",
        kind="sea",
        changeover_sets=(),
        states=dict(states or {}),  # type: ignore[arg-type]
        demand=dict(demand or {}),
        simultaneity={},
        set_points={s.equipment: s for s in set_points},
    )
    return replace(start, **changes)


def plant(**changes: Any) -> Plant:
    """Return a plant of what is named and nothing else; one mode `At sea` with all loads at full demand."""
    empty: dict[str, Any] = {f.name: () for f in fields(Plant)}
    empty.update(project=PROJECT, cells={}, file_name="test.xlsx", input_digest="0" * 64)
    for key, value in changes.items():
        empty[key] = tuple(value) if isinstance(value, list) else value
    if not empty["modes"]:
        empty["modes"] = (mode(demand={x.name: demand(float(x.installed)) for x in empty["loads"]}),)
    return Plant(**empty)


def small_plant(sets: int = 2, **set_changes: Any) -> Plant:
    """Return equal sets, a motor and a heater on one board, and a lighting board behind a transformer."""
    return plant(
        boards=[board("MSB"), board("LB", 230.0, role="distribution")],
        gensets=[genset(f"G{i + 1}", "MSB", **set_changes) for i in range(sets)],
        transformers=[transformer("T1", "MSB", "LB")],
        loads=[
            load("Pump", "MSB", p_rated_kw=400.0),
            load("Heater", "MSB", kind="heating", p_rated_kw=200.0),
            load("Lights", "LB", kind="lighting", p_rated_kw=80.0, cos_phi=0.95, u_rated_v=230.0),
        ],
    )


def _changed(item: Any, parts: tuple[str, ...], changes: Mapping[str, Any]) -> Any:
    """Return `item` with every change put into the part that has a field of that name."""
    own = {f.name for f in fields(item)}
    by_part: dict[str, dict[str, Any]] = {part: {} for part in parts}
    outer: dict[str, Any] = {}
    for key, value in changes.items():
        if key in own:
            outer[key] = value
            continue
        part, name = _RENAMED.get(key, (None, key))
        if part is None:
            owners = [p for p in parts if name in {f.name for f in fields(getattr(item, p))}]
            if len(owners) != 1:
                raise TypeError(f"{key} belongs to {len(owners)} parts of {type(item).__name__}")
            part = owners[0]
        by_part[part][name] = value
    for part, values in by_part.items():
        if values:
            outer[part] = replace(outer.get(part, getattr(item, part)), **values)
    return replace(item, **outer)
