"""What feeds a fault in one mode and case: sets, supplies, motors in use, each with its own cable."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from study.formulas.fault_current import SQRT3
from study.formulas.fault_iec61363_motors import LARGE_MOTOR_KW
from study.formulas.induction import rated_current
from study.model.loads import Load
from study.model.modes import Mode
from study.model.sources import ConverterSupply, Genset, ShoreSupply, SynchronousMotor
from study.network.network import Network
from study.network.view import View

# A regenerating drive counts as a motor with ILR/IrM 3 and R/X 0.10: IEC 60909-0:2016, from memory.
DRIVE_STARTING_CURRENT, DRIVE_R_OVER_X = 3.0, 0.10


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseOptions:
    """What makes a case: its name, the step of the reactances' tolerance (-1, 0, 1), load and motors."""

    maximum: bool
    tolerance_sign: float
    preloaded: bool
    motors: bool


MAXIMUM = CaseOptions(maximum=True, tolerance_sign=-1.0, preloaded=True, motors=True)
NOMINAL = replace(MAXIMUM, tolerance_sign=0.0)
MINIMUM = CaseOptions(maximum=False, tolerance_sign=1.0, preloaded=False, motors=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Supply:
    """One source as the workbook has it, before it becomes a row of arrays.

    ``item`` is its record, or for motors the consumers lumped in it; ``units`` how many equal ones stand for
    it; ``node`` its node and ``lead`` the impedance of its own cable(s) to the board [pu]. ``pu`` is network
    base over own rating: what an own per-unit impedance is multiplied by.
    """

    name: str
    kind: str
    board: str
    node: int
    lead: complex
    units: float
    item: Genset | SynchronousMotor | ShoreSupply | ConverterSupply | Load | None
    voltage: float
    pu: float
    rated_a: float
    starting: float = 0.0
    r_over_x: float = 0.0
    poles: int = 0
    p_rated_kw: float = 0.0


def supplies_of(
    network: Network,
    mode: Mode,
    view: View,
    options: CaseOptions,
    leads: dict[int, tuple[int, complex]],
) -> tuple[tuple[Supply, ...], tuple[str, ...]]:
    """Return what feeds a fault in a case, and what was found about it.

    Parameters
    ----------
    network : Network
        Of the plant.
    mode : Mode
        The mode.
    view : View
        What is energised in the case.
    options : CaseOptions
        The case.
    leads : dict of int to (int, complex)
        For each terminal node that ends a single path: the node of the board end and the impedance of one
        unit's run. [pu]

    Returns
    -------
    tuple
        The sources; sentences.
    """
    plant = network.plant
    machines = [x for x in plant.gensets if x.name in view.sources]
    rows = [_machine(network, x, "genset", leads) for x in machines]
    found: list[str] = []
    for shore in plant.shore_supplies:
        if shore.name not in view.sources:
            continue
        level = _fault_level(shore, options)
        if level is None:
            found.append(f"{shore.name} has no fault level: its short-circuit current is not known.")
            continue
        rows.append(_shore(network, shore, level, leads))
    for converter in plant.converter_supplies:
        if converter.name not in view.sources:
            continue
        if converter.short_circuit_current is None:
            found.append(f"{converter.name} has no short-circuit current given: nothing of it is counted.")
            continue
        rows.append(_converter(network, converter, leads))
    if options.motors:
        rows += [
            _machine(network, x, "synchronous motor", leads)
            for x in plant.synchronous_motors
            if x.name in view.motors_on
        ]
        rows += _motors(network, mode, view, leads)
    return tuple(rows), tuple(found)


def _fault_level(shore: ShoreSupply, options: CaseOptions) -> float | None:
    given = (shore.fault_level_max_mva, shore.fault_level_min_mva)
    first, second = given if options.maximum else given[::-1]
    return first if first is not None else second


def _place(network: Network, name: str, leads: dict[int, tuple[int, complex]]) -> tuple[int, complex]:
    node = network.topology.node_of[name]
    return node, leads[node][1] if node in leads else 0j


def _machine(
    network: Network, item: Genset | SynchronousMotor, kind: str, leads: dict[int, tuple[int, complex]]
) -> Supply:
    node, lead = _place(network, item.name, leads)
    u = network.u_base_v[node]
    return Supply(
        name=item.name,
        kind=kind,
        board=item.board,
        node=node,
        lead=lead,
        units=1.0,
        item=item,
        voltage=item.u_rated_v / u,
        pu=network.s_base_kva / item.s_rated_kva * (item.u_rated_v / u) ** 2,
        rated_a=1000.0 * item.s_rated_kva / (SQRT3 * item.u_rated_v),
    )


def _shore(
    network: Network, item: ShoreSupply, level_mva: float, leads: dict[int, tuple[int, complex]]
) -> Supply:
    node, lead = _place(network, item.name, leads)
    u = network.u_base_v[node]
    return Supply(
        name=item.name,
        kind="shore supply",
        board=item.board,
        node=node,
        lead=lead,
        units=1.0,
        item=item,
        voltage=item.u_rated_v / u,
        pu=network.s_base_kva / (1000.0 * level_mva) * (item.u_rated_v / u) ** 2,
        rated_a=item.i_rated_a,
        r_over_x=item.r_over_x,
    )


def _converter(network: Network, item: ConverterSupply, leads: dict[int, tuple[int, complex]]) -> Supply:
    node, lead = _place(network, item.name, leads)
    u_rated = network.plant.board(item.board).u_nominal_v
    u = network.u_base_v[node]
    return Supply(
        name=item.name,
        kind="converter supply",
        board=item.board,
        node=node,
        lead=lead,
        units=1.0,
        item=item,
        voltage=u_rated / u,
        pu=network.s_base_kva / item.s_rated_kva * (u_rated / u) ** 2,
        rated_a=1000.0 * item.s_rated_kva / (SQRT3 * u_rated),
    )


def _motors(network: Network, mode: Mode, view: View, leads: dict[int, tuple[int, complex]]) -> list[Supply]:
    """Return the motors in use: large ones by name, small ones as one for each board."""
    large: list[Supply] = []
    small: dict[int, list[Supply]] = {}
    for k, item in enumerate(network.plant.loads):
        demand = mode.demand.get(item.name)
        if not view.load_fed[k] or demand is None or demand.in_use <= 0.0 or not _feeds_back(item):
            continue
        one = _motor(network, item, demand.in_use, view.load_node[k], leads)
        if item.p_rated_kw > LARGE_MOTOR_KW:
            large.append(one)
        else:
            board_node = leads[one.node][0] if one.node in leads else one.node
            small.setdefault(board_node, []).append(replace(one, node=board_node, lead=0j))
    return large + [_lump(network, parts) for parts in small.values()]


def _feeds_back(item: Load) -> bool:
    """Return True for a motor on the line, and for a drive that can return power."""
    if item.kind == "motor":
        motor = item.motor
        return motor is not None and (motor.starting_method != "converter" or motor.regenerates)
    return item.motor is not None and item.motor.regenerates


def _motor(
    network: Network, item: Load, in_use: float, node: int, leads: dict[int, tuple[int, complex]]
) -> Supply:
    u = network.u_base_v[node]
    motor = item.motor
    assert motor is not None  # `_feeds_back` has seen to it
    drive = item.kind != "motor" or motor.starting_method == "converter"
    current = float(
        rated_current(item.p_rated_kw, item.u_rated_v, item.efficiency, item.cos_phi, item.phases)
    )
    line_v = item.u_rated_v if item.phases == 3 else u
    rated_kva = SQRT3 * line_v * current / 1000.0
    return Supply(
        name=item.name,
        kind="regenerating drive" if drive else "motor",
        board=item.board,
        node=node,
        lead=leads[node][1] / in_use if node in leads else 0j,
        units=in_use,
        item=item,
        voltage=0.0,
        pu=network.s_base_kva / (rated_kva * in_use) * (line_v / u) ** 2,
        rated_a=current * in_use,
        starting=DRIVE_STARTING_CURRENT if drive else motor.starting_current,
        r_over_x=DRIVE_R_OVER_X if drive else 0.0,
        poles=motor.poles,
        p_rated_kw=item.p_rated_kw,
    )


def _lump(network: Network, parts: Sequence[Supply]) -> Supply:
    """Return small motors of one board as one: rated currents added, typical data."""
    admittance = sum(1.0 / p.pu for p in parts)
    first = parts[0]
    board = network.topology.nodes[first.node].board
    return replace(
        first,
        name=f"small motors of {board}",
        kind="small motors",
        board=board,
        units=1.0,
        item=None,
        pu=1.0 / admittance,
        rated_a=sum(p.rated_a for p in parts),
        starting=sum(p.starting / p.pu for p in parts) / admittance,
        r_over_x=0.0,
        p_rated_kw=sum(p.p_rated_kw * p.units for p in parts) / sum(p.units for p in parts),
    )
